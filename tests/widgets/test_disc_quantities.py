"""The disc map's other quantities, held against their definitions and the handbook picture."""

from __future__ import annotations

import re

import numpy as np
import pytest

from briefkit.envelope.solution import solve
from briefkit.errors import ReadingError
from briefkit.figures.still import still
from briefkit.physics.stall import stall_measures
from briefkit.widgets.disc import DiscMap
from briefkit.widgets.disc_quantities import LEVELS, QUANTITIES, field_of


@pytest.fixture
def disc(two_t, start):
    made = []

    def make(quantity, condition=start, aircraft=two_t):
        made.append(DiscMap(aircraft, condition, quantity=quantity))
        return made[-1]

    yield make
    for exhibit in made:
        exhibit.close()


@pytest.mark.parametrize("quantity", QUANTITIES)
def test_each_has_a_picture_a_table_and_words(disc, quantity):
    parts = disc(quantity).still_parts()
    assert len(parts.table.rows) == 4
    assert any(character.isdigit() for character in parts.alt)
    html = still(disc(quantity))
    assert html.count("<svg") == 1
    words = re.sub(r'"data:image/png;base64,[^"]*"', "", html)  # in a picture's bytes "nan" is chance
    assert not re.search(r"\bnan\b", words, re.IGNORECASE)


def test_mach_at_the_advancing_tip_is_tip_mach_times_one_plus_mu(disc, two_t, start):
    """Definition; the through-flow adds less than 0.002 at this advance ratio."""
    solution = solve(two_t, start)
    rows = {row[0]: row for row in disc("Mach").still_parts().table.rows}
    tip = two_t.rotor.tip_speed / start.sound_speed
    assert float(rows["advancing side"][-1]) == pytest.approx(tip * (1.0 + solution.advance_ratio), abs=0.007)
    assert float(rows["retreating side"][-1]) == pytest.approx(tip * (1.0 - solution.advance_ratio), abs=0.007)


def test_the_retreating_tip_s_angle_is_the_solution_s_and_the_advancing_one_is_smaller(disc, two_t, start):
    """Handbook ch. 2: in forward flight the retreating blade works at the higher angle of attack."""
    rows = {row[0]: row for row in disc("angle of attack").still_parts().table.rows}
    retreating, advancing = (float(rows[f"{side} side"][-1].rstrip("°").replace("\u2212", "-")) for side in
                             ("retreating", "advancing"))  # fmt: skip
    assert retreating == pytest.approx(solve(two_t, start).tip_angle_deg, abs=0.06)
    assert retreating > advancing


def test_over_stall_states_the_largest_excess_and_grows_with_speed(disc, two_t, start):
    solution = solve(two_t, start)
    measures = stall_measures(solution.trim, grid=(72, 36))
    excess = float(np.degrees(measures.excess[0]))
    assert excess < 0.0
    caption = disc("angle over stall").still_parts().caption
    assert f"{-excess:.1f}° short of the stall angle" in caption
    assert "0 % of the disc" in caption
    fast = float(np.degrees(stall_measures(solve(two_t, start.with_(ias="78 kt")).trim, grid=(72, 36)).excess[0]))
    assert fast > excess
    assert f"{abs(fast):.1f}°" in disc("angle over stall", start.with_(ias="78 kt")).still_parts().caption


@pytest.mark.parametrize("quantity", QUANTITIES[2:])
def test_angles_stay_inside_their_steps_and_are_finite_near_reversed_flow(two_t, start, quantity):
    field = field_of(quantity, solve(two_t, start.with_(ias="78 kt")), two_t.rotor.root_cutout.value)
    assert np.isfinite(field.values).all()
    assert field.values.min() >= LEVELS[quantity][0]
    assert field.values.max() <= LEVELS[quantity][-1]


def test_an_unknown_quantity_is_refused_with_the_list(two_t, start, models_open):
    before = models_open()
    with pytest.raises(ReadingError, match="speed, Mach, angle of attack, angle over stall"):
        DiscMap(two_t, start, quantity="lift")
    assert models_open() == before


@pytest.mark.slow
def test_it_follows_and_adds_no_models(live, models_open):
    exhibits = [DiscMap(live, quantity=quantity) for quantity in QUANTITIES[1:]]
    before = models_open()
    captions = [exhibit.still_parts().caption for exhibit in exhibits]
    for speed in range(61, 75):
        live.change(ias=f"{speed} kt")
    assert models_open() == before
    assert all(exhibit.still_parts().caption != caption for exhibit, caption in zip(exhibits, captions, strict=True))
    for exhibit in exhibits:
        exhibit.close()
