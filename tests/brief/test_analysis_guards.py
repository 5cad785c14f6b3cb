"""G2, G3, G18 and G19 on the analysis page, where alone the absolute onset band is printed: VNE governs, the band is
told from its lower edge, a margin is called reduced where the band begins under VNE, and not resolved where the band is
wider than it.
"""

from __future__ import annotations

import re
from dataclasses import replace
from types import SimpleNamespace

import numpy as np
import pytest

from briefkit.brief.assumptions import assumptions, margin_line, no_band
from briefkit.envelope.condition import Condition
from briefkit.envelope.margin import margin_to_vne
from briefkit.envelope.onset import TipAngles
from briefkit.envelope.reductions import reductions
from briefkit.envelope.spread import OnsetBand, onset_band
from briefkit.errors import OutsideLimits, Reason
from briefkit.units import Speed, to_si

# VNE of the invented 2T there, by its chart: 85.2 KIAS (85 at 5,210 ft, +36 C).
HOT = Condition(mass="2,006 lb", pressure_altitude="5,210 ft", oat="36 degC")
HIGH = HOT.with_(pressure_altitude="10,000 ft", oat="29 degC")  # VNE 65.4


def band(lower: float | None, central: float | None, upper: float | None) -> OnsetBand:
    return OnsetBand(lower, central, upper, "kt", ())


def test_g2_vne_governs_and_the_band_is_no_speed_to_fly(two_t):
    said = margin_line(two_t, HOT, band(88.0, 96.0, 105.0))
    marked = "VNE governs, 85 KIAS there (read off the chart, rounded down)"
    assert said.startswith(f"{marked}; the band begins 2.8 kt above it and is no speed to fly;")


@pytest.mark.parametrize(
    ("feet", "oat", "text"),
    [
        # Straight lines between the invented chart's cells at +20 C, 6,000 ft 88 and 8,000 ft 79, by hand.
        ("7,900 ft", "20 degC", "79 KIAS there (read off the chart, rounded down)"),  # 79.45, which 79.5 is above
        ("6,002 ft", "20 degC", "87 KIAS there (read off the chart, rounded down)"),  # 87.99
        ("8,000 ft", "20 degC", "79 KIAS there"),  # an entry, as the chart prints it
    ],
)
def test_an_interpolated_vne_is_rounded_down_and_marked(two_t, feet, oat, text):
    said = margin_line(two_t, HOT.with_(pressure_altitude=feet, oat=oat), band(60.0, 96.0, 105.0))
    assert said.startswith(f"VNE governs, {text}. Reduced margin: the band begins at 60 KIAS")


def test_an_entry_with_a_decimal_is_printed_as_the_chart_has_it(two_t):
    chart, cell = two_t.vne, two_t.vne.printed == "79"  # 8,000 ft, +20 C
    assert cell.sum() == 1
    speeds, printed = chart.speeds.copy(), chart.printed.copy()
    speeds[cell], printed[cell] = to_si(79.5, "speed", "kt"), "79.5"
    made = replace(two_t, vne=replace(chart, speeds=speeds, printed=printed))
    here = HOT.with_(pressure_altitude="8,000 ft", oat="20 degC")
    assert margin_line(made, here, band(60.0, 96.0, 105.0)).startswith("VNE governs, 79.5 KIAS there. Reduced")


def test_g3_a_band_that_begins_under_vne_is_a_reduced_margin_with_its_own_lower_bound(two_t):
    known = onset_band(two_t, HIGH)
    said, lower = margin_line(two_t, HIGH, known), known.lower
    assert lower < 65.0
    assert f"Reduced margin: the band begins at {lower:.1f} KIAS, {65.4 - lower:.1f} kt under it" in said
    assert "no speed to fly" not in said
    # The lower bound is the band's own: it is not raised to VNE.
    found = margin_to_vne(two_t, known, Speed.of(65.4, "kt"))
    assert found.reduced
    assert found.lower == Speed.of(lower, "kt")


def test_g3_where_the_lower_end_lies_under_the_calibration(two_t):
    said = margin_line(two_t, HIGH, band(None, 44.0, 66.0))
    assert "Reduced margin: the band begins under the calibrated range" in said
    assert said.endswith("not resolved.")


@pytest.mark.parametrize(
    ("ends", "resolved"),
    [
        ((80.0, 96.0, 110.0), False),  # +11 against 16 taken off the middle
        ((90.0, 96.0, 118.0), False),  # +11 against half of 28
        ((93.0, 97.0, 103.0), True),  # +12 against 5
        ((70.0, 74.0, 80.0), True),  # -11 against 5: first signs come well under VNE
        ((93.0, 103.0, None), False),  # the upper end lies above the calibration: the width is not known
    ],
)
def test_g19_a_margin_smaller_than_the_bands_half_width_is_not_resolved(two_t, ends, resolved):
    said = margin_line(two_t, HOT, band(*ends))
    assert said.endswith("not resolved.") is not resolved, said
    assert ("at least" in said) is (ends[2] is None)


def test_a_chart_over_rotor_speed_governs_at_the_rotors_own(two_t):
    """By hand: 10 kt less at 97 % than at 100 %. Nor is such a chart taken to hold at 100 %."""
    cells = two_t.vne.speeds[..., [0, 0]] + np.array([-10.0, 0.0]) * to_si(1.0, "speed", "kt")
    over = replace(two_t, vne=replace(two_t.vne, speeds=cells, rotor_speeds=(0.97, 1.0)))
    for aircraft, rotor, vne in ((over, "97 %", "75"), (over, "100 %", "85"), (two_t, "97 %", "85")):
        said = margin_line(aircraft, HOT.with_(rotor_speed=rotor), band(88.0, 96.0, 105.0))
        assert said.startswith(f"VNE governs, {vne} KIAS there"), said
    none = SimpleNamespace(rows=[SimpleNamespace(at=None, answer=None)])  # a table without a figure anywhere
    said = [assumptions(aircraft, none).before[0] for aircraft in (two_t, over)]
    assert ["to hold at 100 % rotor speed" in line for line in said] == [True, False]


def test_g19_the_decks_first_case_is_not_resolved(two_t):
    """Scenario 1: level at the plateau on the hottest day."""
    assert margin_line(two_t, HOT, onset_band(two_t, HOT)).endswith("not resolved.")


def test_g18_the_analysis_page_tells_the_band_from_its_lower_edge_and_what_widens_it(two_t, operation):
    """Once the row's place is known: the lower edge is printed and the method of the band stands beside it."""
    fleet = operation.fleet["pelquill-2t"]
    table = reductions(two_t, replace(fleet, masses=fleet.masses[2:3]), operation.work_areas["vellmark"])
    section = assumptions(two_t, table)
    line, governs = section.before[-2:]
    first, lower = (float(x) for x in re.findall(r"([\d.]+) KIAS", line)[:2])
    assert lower < first
    assert "with the spread below, from" in line
    assert governs.startswith("VNE governs, ")
    assert section.grid.caption == "What each spread does to the onset band"
    costs = [row[3] for row in section.grid.rows]
    assert [float(cost) for cost in costs] == sorted((float(cost) for cost in costs), reverse=True)
    assert "to none of which anything in it is fitted" in section.after[0]  # G20: with the residuals' signs


@pytest.mark.parametrize(
    ("degrees", "why"),
    [
        (11.0, "the tip does not reach 12 degrees at any speed the model covers."),
        (13.0, "the tip is above 12 degrees at every speed the model covers."),
    ],
)
def test_where_there_is_no_band_the_page_says_why_in_plain_words(two_t, monkeypatch, degrees, why):
    """Too cold and light for the first signs, or too loaded for any speed without them: never one for the other."""
    at = Condition(mass="2,006 lb", pressure_altitude="1,216 ft", oat="-18 degC")
    angles = np.array([[degrees - 1.0, degrees, np.nan]])

    def tip(*_):
        return TipAngles(np.array([[10.0, 20.0, 30.0]]), np.radians(angles))

    def refuse(*_):
        raise OutsideLimits("retreating-tip angle", "12 degrees", "", "", "rotor model", Reason.OUTSIDE_MODEL)

    monkeypatch.setattr("briefkit.brief.assumptions.onset_band", refuse)
    monkeypatch.setattr("briefkit.brief.assumptions.tip_angles", tip)
    monkeypatch.setattr("briefkit.brief.assumptions.worked_row", lambda table: SimpleNamespace(at=at))
    said = assumptions(two_t, SimpleNamespace(rows=())).before[-1].replace("\u00a0", " ")
    assert said == f"No onset band at 1,216 ft, \u221218 °C: {why}"


def test_the_4h_in_the_cold_does_not_reach_the_first_signs(four_h):
    at = Condition(mass="3,350 kg", pressure_altitude="1,216 ft", oat="-38 degC")
    with pytest.raises(OutsideLimits) as refused:
        onset_band(four_h, at)
    assert no_band(four_h, at, refused.value).endswith(
        "the tip does not reach 12 degrees at any speed the model covers."
    )
