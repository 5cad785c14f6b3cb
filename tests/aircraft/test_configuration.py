"""Configurations: a supplement lowers or replaces VNE and limits, for some serials; nothing basic leaks in."""

from __future__ import annotations

import math

import numpy as np
import pytest

from briefkit.aircraft.findings import entry_findings
from briefkit.errors import FaultyFile
from briefkit.units import FOOT, KILOMETRE_PER_HOUR, KNOT, POUND, ZERO_CELSIUS

DOORS_OFF = """[[configuration]]
name = "doors off"
source = "doors-off supplement p. 2 rev 1"
vne = "less 15 kt"
"""
OWN = """[[configuration]]
name = "floats"
source = "float supplement p. 4 rev 2"
max_mass = "2,050 lb"

[configuration.power_on]
reading = "interpolate"
chart = '''
ft \\ degC   -20   +40   kt indicated
0   90   90
10,000   80   60
'''

[configuration.power_off]
less = "4 kt"

[[configuration.speeds]]
label = "Water"
text = "Not above 60 KIAS below 50 ft"
value = "60 kt"
applies = "other"
"""
COLD, HOT = ZERO_CELSIUS - 20.0, ZERO_CELSIUS + 20.0


def test_the_basic_configuration_is_what_it_was(file_2t):
    plain, with_kit = file_2t.load(), file_2t.added(DOORS_OFF).load()
    np.testing.assert_array_equal(plain.vne.speeds, with_kit.vne.speeds)
    assert with_kit.configurations == ("doors on", "doors off")
    assert with_kit.basic_vne is None
    assert file_2t.added(DOORS_OFF).load("doors on").vne.lowered == ""


def test_an_amount_off_the_basic_chart(file_2t):
    """Planted in the invented world: the 2T's doors-off supplement, lower by 15 KIAS."""
    aircraft = file_2t.added(DOORS_OFF).load("doors off")
    assert aircraft.configuration == "doors off"
    assert aircraft.vne.indicated(8000 * FOOT, HOT, 900.0) / KNOT == pytest.approx(64.0)
    assert aircraft.vne.printed[4, 2, 0, 0] == "64"
    assert (aircraft.vne.lowered, aircraft.vne.lowered_source) == ("15 kt", "doors-off supplement p. 2 rev 1")
    # power off: 85, or power on where that is less, of the lowered power-on VNE
    assert aircraft.vne_off.indicated(aircraft.vne.indicated(8000 * FOOT, HOT, 900.0), 0.0, HOT, 900.0) / KNOT == 64.0
    assert ("configuration", "doors-off supplement p. 2 rev 1") in aircraft.sources


def test_a_cap_of_the_basic_chart_is_lowered_with_it(file_2t):
    text = file_2t.replaced(('reading = "interpolate"', 'reading = "interpolate"\ncap = "100 kt"')).added(DOORS_OFF)
    aircraft = text.load("doors off")
    assert aircraft.vne.indicated(0.0, COLD, 900.0) / KNOT == pytest.approx(85.0)  # the lesser of 112 and 100, less 15
    assert aircraft.vne.cap_text == "100 kt less 15 kt"


def test_a_figure_never_to_be_passed(file_3f):
    aircraft = file_3f.load("external load")
    found = aircraft.vne.indicated(np.array([0.0, 3000.0, 4000.0]), 288.0, 2380.0) / KILOMETRE_PER_HOUR
    assert found == pytest.approx([150.0, 150.0, 150.0])
    assert (aircraft.vne.cap_text, aircraft.vne.cap_source) == ("150 km/h", "load supplement p. 3 rev 1")
    slow = file_3f.replaced(('vne = "150 km/h"', 'vne = "180 km/h"')).load("external load")
    # the basic chart stays in force where it is lower: 157 km/h at 4,000 m
    assert slow.vne.indicated(4000.0, 288.0, 2380.0) / KILOMETRE_PER_HOUR == pytest.approx(157.0)


def test_limits_speeds_and_their_sources_are_the_supplements(file_3f):
    basic, load = file_3f.load(), file_3f.load("external load")
    assert basic.limits.max_bank is None
    assert load.limits.max_bank is not None
    assert load.limits.max_bank.value == pytest.approx(math.radians(30))
    assert load.limits.max_bank.source == load.limits.max_mass.source == "load supplement p. 3 rev 1"
    assert load.limits.min_mass.source == basic.limits.min_mass.source
    assert [speed.label for speed in load.speeds] == ["With a load on the hook"]
    assert load.speeds[0].source == "load supplement p. 3 rev 1"


def test_a_chart_of_its_own_replaces_the_basic_one(file_2t):
    aircraft = file_2t.added(OWN).load("floats")
    assert aircraft.vne.indicated(0.0, HOT, 900.0) / KNOT == pytest.approx(90.0)
    assert aircraft.vne.source == "float supplement p. 4 rev 2"
    assert aircraft.vne_off.text == "VNE power on less 4 kt"
    assert aircraft.limits.max_mass.value == pytest.approx(2050 * POUND)
    assert aircraft.basic_vne is not None
    assert {name for name, _ in aircraft.sources} >= {
        "configuration",
        "configuration.power_on",
        "configuration.power_off",
    }


def test_a_speed_of_the_same_name_replaces_the_basic_one(file_4h):
    kit = (
        '[[configuration]]\nname = "hoist"\nsource = "hoist supplement p. 2"\n\n[[configuration.speeds]]\n'
        'label = "Rough air"\ntext = "80 KIAS"\napplies = "turbulence"\n'
    )
    aircraft = file_4h.added(kit).load("hoist")
    assert [speed.text for speed in aircraft.speeds] == ["80 KIAS", "VNE less 10 above 30 degrees"]


def test_serials_it_is_not_for_are_refused_with_the_reason(file_3f):
    assert file_3f.load().serials == ("031", "033", "036")
    load = file_3f.load("external load")
    assert load.serials == ("031", "033")
    assert load.refused_serials == (("036", "external load is not for serial 036 (load supplement p. 3 rev 1)"),)
    only = file_3f.replaced(('not_for_serials = ["036"]', 'serials = ["033"]')).load("external load")
    assert only.serials == ("033",)
    assert "for serials 033 only" in only.refused_serials[0][1]


def test_a_configuration_the_file_does_not_have_is_refused_without_a_guess(file_2t):
    with pytest.raises(FaultyFile) as refused:
        file_2t.added(DOORS_OFF).load("doors of")
    (fault,) = refused.value.faults
    assert fault.permitted == '"doors on", "doors off"'
    assert fault.remedy == ""


def test_a_supplement_above_the_basic_chart_is_a_finding(file_2t):
    fast = file_2t.added(OWN.replace("0   90   90", "0   125   125")).load("floats")
    (fault,) = [fault for fault in entry_findings(fast) if "supplement_above_basic" in fault.remedy]
    assert fault.key == "configuration (floats).power_on"
    assert entry_findings(file_2t.added(OWN).load("floats")) == []


def test_a_figure_that_lowers_nothing_is_a_finding(file_3f):
    useless = file_3f.replaced(('vne = "150 km/h"', 'vne = "350 km/h"')).load("external load")
    assert any("supplement_above_basic" in fault.remedy for fault in entry_findings(useless))


def test_an_answer_of_the_basic_chart_does_not_answer_for_another_chart(file_4h):
    own = (
        '[[configuration]]\nname = "ice"\nsource = "ice supplement p. 1"\n\n[configuration.power_on]\nchart = \'\'\'\n'
        "ft \\ degC   -40   -20   +40   kt indicated\n0   100   120   110\n12,000   90   85   66\n'''\n"
    )
    found = entry_findings(file_4h.added(own).load("ice"))
    assert any(fault.key == "configuration (ice).power_on.chart, row 0, column -20" for fault in found)
    more = own + '\n[configuration.reasons]\nrises_with_temperature = { cells = "column -20", reason = "so printed" }\n'
    found = entry_findings(file_4h.added(more).load("ice"))
    assert not any("rises_with_temperature" in fault.remedy for fault in found)


@pytest.mark.parametrize(
    ("old", "new", "key", "words"),
    [
        ('name = "doors off"', 'name = "doors on"', ".name", "taken: doors on"),
        ('vne = "less 15 kt"', 'vne = "less 15"', ".vne", "add the unit"),
        ('vne = "less 15 kt"', 'vne = "15 kt"', ".vne", "20 to 250 kt"),
        ('vne = "less 15 kt"', 'vne = "less 150 kt"', ".vne", "1 to 100 kt"),
        ('vne = "less 15 kt"', 'vne = "slower"', ".vne", "a speed never to be passed"),
        ('vne = "less 15 kt"', 'vne = "less 15 km/h"', ".vne", "kt, as units.speed says"),
        ('vne = "less 15 kt"', 'serials = ["041"]', ".serials, value 1", "014, 022, as type.serials says"),
        ('vne = "less 15 kt"', 'not_for_serials = ["014", "41"]', ".not_for_serials, value 2", "as type.serials says"),
        ('vne = "less 15 kt"', 'serials = ["014"]\nnot_for_serials = ["022"]', ".not_for_serials", "not both"),
        ('vne = "less 15 kt"', 'max_mass = "2,100 lb"', ".max_mass", "for which the basic chart was made"),
        ('vne = "less 15 kt"', 'max_mass = "1,200 lb"', ".max_mass", "more than 1,301 lb"),
        ('vne = "less 15 kt"', 'max_mass = "900 kg"', ".max_mass", "lb, as units.mass says"),
        ('vne = "less 15 kt"', 'max_altitude = "11,000 ft"', ".max_altitude", "a supplement does not widen this"),
        ('vne = "less 15 kt"', 'min_temperature = "-40 degC"', ".min_temperature", "not below -30 degC"),
        ('vne = "less 15 kt"', 'rotor_on = ["101 %", "102 %"]', ".rotor_on", "a range with 100 % in it"),
        ('vne = "less 15 kt"', 'vne_less = "15 kt"', ".vne_less", "take it out"),
        (
            'vne = "less 15 kt"',
            "reasons = { rises_with_hight = 'x' }",
            ".reasons.rises_with_hight",
            "rises_with_altitude",
        ),
    ],
)
def test_a_slip_in_a_supplement_is_named(file_2t, old, new, key, words):
    assert old in DOORS_OFF
    fault = file_2t.added(DOORS_OFF.replace(old, new)).fault()
    assert fault.key == f"configuration (entry 1){key}"
    assert words in str(fault)


def test_a_slip_inside_a_supplements_chart_names_its_line(file_2t):
    text = file_2t.added(DOORS_OFF).added(OWN.replace("10,000   80   60", "10,000   80   6O"))
    fault = text.fault()
    assert fault.key == "configuration (entry 2).power_on.chart, row 10,000, column +40"
    assert "6O" in text.text.split("\n")[fault.line - 1]


def test_an_amount_off_the_basic_chart_and_a_chart_of_its_own_contradict(file_2t):
    fault = file_2t.added(OWN.replace('max_mass = "2,050 lb"', 'vne = "less 15 kt"')).fault()
    assert fault.key == "configuration (entry 1).vne"


def test_a_slope_too_steep_for_the_supplements_height_is_refused_whichever_is_asked_for(file_2t):
    steep = '[[configuration]]\nname = "ski"\nsource = "s"\n\n[configuration.power_on]\nbase = "90 kt"\n'
    steep += 'less = "9 kt per 1,000 ft above 0 ft"\n'
    fault = file_2t.added(steep).fault()
    assert fault.key == "configuration (entry 1).power_on.less"
