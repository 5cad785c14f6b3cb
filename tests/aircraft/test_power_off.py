"""Power-off VNE in the three forms of 14 CFR 27.1505(c)(2), and (c)(1): at least midway between VNE and climb speed.

The rule's text is from memory; the invented types' figures are worked by hand beside each test.
"""

from __future__ import annotations

import numpy as np
import pytest

from briefkit.aircraft.answers import Kind
from briefkit.aircraft.findings import all_findings, entry_findings
from briefkit.units import FOOT, KILOMETRE_PER_HOUR, KNOT, ZERO_CELSIUS


def off_at(aircraft, height, oat, mass):
    on = aircraft.vne.indicated(height, oat, mass)
    return aircraft.vne_off.indicated(on, height, oat, mass)


def test_a_constant_or_power_on_where_that_is_less(file_2t):
    aircraft = file_2t.load()
    found = off_at(aircraft, np.array([0.0, 10_000 * FOOT]), ZERO_CELSIUS + 20.0, 900.0) / KNOT
    assert found == pytest.approx([85.0, 69.0])
    assert aircraft.vne_off.text == "85 kt, or VNE power on if less"


def test_power_on_less_an_airspeed(file_4h):
    aircraft = file_4h.load()
    assert off_at(aircraft, 6000 * FOOT, ZERO_CELSIUS, 3000.0) / KNOT == pytest.approx(112.0)
    assert aircraft.vne_off.text == "VNE power on less 8 kt"


def test_a_constant_to_a_height_then_power_on_less_but_not_over(file_3f):
    aircraft = file_3f.load()
    # 2,380 kg: 205 to 1,500 m; at 1,500.1 m power on is 227 and 202 is left; at 3,000 m 185 - 25
    heights = np.array([0.0, 1500.0, 1500.1, 3000.0])
    found = off_at(aircraft, heights, 288.0, 2380.0) / KILOMETRE_PER_HOUR
    assert found == pytest.approx([205.0, 205.0, 202.0, 160.0], abs=0.01)
    # 1,700 kg at 1,600 m: 272.4 - 25 is over 205
    assert off_at(aircraft, 1600.0, 288.0, 1700.0) / KILOMETRE_PER_HOUR == pytest.approx(205.0)
    assert aircraft.vne_off.text == (
        "to 1,500 m 205 km/h, or VNE power on if less; above that VNE power on less 25 km/h, at most 205 km/h"
    )
    assert [name for name, _ in aircraft.vne_off.figures] == [
        "constant", "up to, pressure altitude", "VNE power on less", "not over",
    ]  # fmt: skip


def test_a_chart_of_its_own_is_never_above_power_on(file_2t):
    own = "source = \"2-6\"\nreading = \"interpolate\"\nchart = '''\nft   kt indicated\n0   90\n10,000   70\n'''"
    aircraft = file_2t.table("vne.power_off", own).load()
    found = off_at(aircraft, np.array([0.0, 10_000 * FOOT]), ZERO_CELSIUS + 20.0, 900.0) / KNOT
    assert found == pytest.approx([90.0, 69.0])
    assert aircraft.vne_off.text == "the power-off chart"
    kinds = {one.kind for one in all_findings(aircraft)}
    assert Kind.POWER_OFF_ABOVE_POWER_ON in kinds  # 70 printed where power on is 69


def test_no_power_on_vne_gives_no_power_off_vne(file_3f):
    aircraft = file_3f.load()
    assert np.isnan(off_at(aircraft, 5000.0, 288.0, 2380.0))


@pytest.mark.parametrize(
    ("body", "key", "words"),
    [
        ("", "constant", "27.1505(c)(2)"),
        ('constant = "85 kt"\nless = "8 kt"', "to_height", "up to which pressure altitude?"),
        ('constant = "85 kt"\nto_height = "5,000 ft"', "less", "what holds above it?"),
        ('less = "8 kt"\nto_height = "5,000 ft"', "constant", "what holds up to that height?"),
        ('constant = "85 kt"\nnot_over = "80 kt"', "not_over", "not_over limits what less leaves"),
        ("constant = \"85 kt\"\nchart = '''\nft   kt indicated\n0   90\n10,000   70\n'''", "chart", "one of them"),
        ("chart = '''\nft   kt indicated\n0   9O\n10,000   70\n'''", "chart, row 0, column VNE", "without unit"),
        ('less = "8"', "less", "add the unit"),
        ('constant = "85 km/h"', "constant", "kt, as units.speed says"),
    ],
)
def test_another_form_is_refused(file_2t, body, key, words):
    fault = file_2t.table("vne.power_off", f'source = "2-4"\n{body}').fault()
    assert fault.key == f"vne.power_off.{key}"
    assert words in str(fault)


def test_under_the_midpoint_of_climb_speed_and_vne_is_a_finding(file_4h):
    """Planted fault of the invented world: VNE less 30 fails (c)(1), less 8 holds in every permitted cell."""
    assert entry_findings(file_4h.load()) == []
    (fault,) = entry_findings(file_4h.replaced(('less = "8 kt"', 'less = "30 kt"')).load())
    assert "27.1505(c)(1)" in fault.permitted
    assert "power_off_under_midpoint" in fault.remedy
    # Worst where VNE is lowest and permitted: 12,000 ft, ISA+35 = 26.2 C. VNE 76 - 10 (6.2/20) = 72.9, off 42.9. In
    # indicated speeds (55 and 42.9 kt are below the calibration): (72.9 + 55)/2 = 63.9, so 21.1 short
    assert "12,000 ft, 26" in fault.read.replace("\u00a0", " ")
    assert fault.read.replace("\u00a0", " ").endswith(", 21.1 kt too slow")


def test_the_midpoint_is_held_on_both_sides_of_the_height(file_3f):
    assert entry_findings(file_3f.load()) == []
    low = file_3f.replaced(('constant = "205 km/h"', 'constant = "180 km/h"')).load()
    (fault,) = entry_findings(low)
    assert "0 m" in fault.read.replace("\u00a0", " ")  # (285 + 100)/2 = 192.5 at sea level
    high = file_3f.replaced(('less = "25 km/h"', 'less = "45 km/h"')).load()
    assert len(entry_findings(high)) == 1


def test_an_answer_takes_the_finding_away(file_4h):
    answered = file_4h.replaced(
        ('less = "8 kt"', 'less = "30 kt"'),
        ("[vne.reasons]", '[vne.reasons]\npower_off_under_midpoint = "2-6: so printed"'),
    )
    assert entry_findings(answered.load()) == []


def test_the_midpoint_is_looked_at_on_the_hottest_day_of_a_density_altitude_chart(file_2t):
    """VNE falls with density altitude, so less 20 kt fails worst on the hottest day at the greatest height."""
    chart = "DA ft   kt indicated\n-5,000   112\n8,000   100\n14,000   70"
    body = f"source = \"2-4\"\nreading = \"interpolate\"\nchart = '''\n{chart}\n'''"
    made = file_2t.table("vne.power_on", body).table("vne.power_off", 'source = "2-4"\nless = "20 kt"')
    (fault,) = entry_findings(made.load())
    assert "27.1505(c)(1)" in fault.permitted
    # ISA+35 at 10,000 ft is 30.2 C, a density altitude of 13,846 ft: VNE 70.8 there (71.7 calibrated), off 50.8 (53.7),
    # climb 54 (56.6): (71.7 + 56.6)/2 - 53.7 = 10.5
    assert "10,000 ft, 30" in fault.read.replace("\u00a0", " ")
    assert fault.read.replace("\u00a0", " ").endswith(", 10.5 kt too slow")
