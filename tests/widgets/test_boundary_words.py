"""What the boundary says of its lines, held against the single answers on both sides of every place it names."""

from __future__ import annotations

import re

import numpy as np
import pytest

from briefkit.envelope import boundary as module
from briefkit.envelope.boundary import boundary
from briefkit.envelope.condition import Condition
from briefkit.envelope.equivalent import equivalent_vne
from briefkit.envelope.spread import onset_band
from briefkit.errors import ReadingError
from briefkit.widgets import boundary_words
from briefkit.widgets.live import LiveCondition
from briefkit.widgets.stall_boundary import StallBoundary


@pytest.fixture
def told(monkeypatch, plain):
    """What is told of one line; without the band, which has no part in it."""
    monkeypatch.setattr(module, "with_band", lambda aircraft, condition, chart: chart)

    def tell(aircraft, condition, against, bank):
        drawn = boundary(aircraft, condition, against, (bank,))
        return plain(boundary_words._told(drawn, drawn.equivalent[0]))

    return tell


@pytest.mark.slow  # another aircraft, so other rows to search
def test_where_a_line_meets_vne_again_it_does_not_part(three_f, told):
    """The 3F's chart over mass has a corner at 1,700 kg: under VNE on both sides of it, on VNE again when heavier."""
    here = Condition(mass="2,000 kg", pressure_altitude="1,500 m", oat="15 degC", bank="20 deg")
    said = told(three_f, here, "mass", 20.0)
    leaves, meets = re.fullmatch(
        r"parts from the manual's VNE at ([\d,]+ kg) and meets it again at ([\d,]+ kg)", said
    ).groups()
    assert (leaves, meets) == ("1,580 kg", "2,040 kg")
    for mass, under in ((leaves, False), ("1,610 kg", True), ("2,000 kg", True), (meets, False)):
        assert (equivalent_vne(three_f, here.with_(mass=mass)).below_vne > 0.1) is under, mass


def test_all_along_is_said_of_a_line_that_is_under_vne_all_along(two_t, told):
    """At 15 degrees the slowest rotor alone is under VNE, and by 0.07 kt; a single answer each."""
    here = Condition(mass="1,750 lb", pressure_altitude="6,000 ft", oat="0 degC")
    below = [
        equivalent_vne(two_t, here.with_(bank="15 deg", rotor_speed=f"{k} %")).below_vne for k in (97, 98, 100, 102)
    ]
    assert 0.05 < below[0] <= 0.1
    assert max(below[1:]) <= 0.05
    assert told(two_t, here, "rotor speed", 15.0) == "at most 0.1 kt below the manual's VNE"
    heavy = here.with_(mass="2,006 lb")
    assert told(two_t, heavy, "rotor speed", 20.0) == "below the manual's VNE all along"
    for rotor in ("97 %", "100 %", "102 %"):
        assert equivalent_vne(two_t, heavy.with_(bank="20 deg", rotor_speed=rotor)).below_vne > 0.05


@pytest.mark.parametrize(
    ("banks", "said"),
    [((-5,), "from 0 to 80 degrees"), ((float("nan"),), "from 0 to 80 degrees"), ((85.0,), "from 0 to 80 degrees"),
     ((0, 0), "each bank once"), (("20",), "from 0 to 80 degrees")],
)  # fmt: skip
def test_what_is_no_bank_is_refused_in_words(two_t, start, models_open, banks, said):
    before = models_open()
    with pytest.raises(ReadingError, match=said):
        StallBoundary(two_t, start, banks=banks)
    assert models_open() == before


@pytest.mark.slow  # another aircraft, so another onset table
def test_a_band_past_the_end_of_its_table_is_solved_where_the_picture_stands_still(four_h, plain):
    """The 4H in the cold: the table ends, the rotor model does not. A live picture says that it may be the table."""
    here = Condition(mass="2,670 kg", pressure_altitude="9,009 ft", oat="-6 degC", ias="90 kt", bank="30 deg")
    exhibit = StallBoundary(four_h, here)
    caption, drawn = plain(exhibit.still_parts().caption), exhibit._kept[1]
    exhibit.close()
    assert np.isnan(np.interp(9009.0, drawn.onset_x, drawn.onset_lower))
    solved = onset_band(four_h, here)
    assert solved.upper is None
    assert (
        f"solved for this condition alone because the drawn one ends before it, is from {int(solved.lower)} KIAS"
        in (caption)
    )
    live = LiveCondition(four_h, here)
    exhibit = StallBoundary(live)
    assert "the rotor model or the table it is drawn from" in exhibit.still_parts().caption
    exhibit.close()
    live.close()
