from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from briefkit.envelope.condition import Condition, Conditions, UnknownName
from briefkit.errors import OutsideLimits, ReadingError

TYPED = {"mass": "2,006 lb", "pressure_altitude": "5,210 ft", "oat": "36 degC"}


def test_text_becomes_si():
    one = Condition(**TYPED, ias="85 kt", bank="30 deg", rotor_speed="97 %")
    assert one.mass == pytest.approx(2006 * 0.45359237)
    assert one.pressure_altitude == pytest.approx(5210 * 0.3048)
    assert one.oat == pytest.approx(309.15)
    assert one.ias == pytest.approx(85 * 1852 / 3600)
    assert one.load_factor == pytest.approx(2 / math.sqrt(3))
    assert one.rotor_speed == pytest.approx(0.97)


@pytest.mark.parametrize(("bank", "load"), [("30 deg", 1.155), ("60 deg", 2.0)])
def test_load_factor_of_a_level_turn_is_the_handbooks(bank, load):
    # FAA-H-8083-21B: 60 degrees 2.0; 30 degrees 1.16, whose exact value is 1.155.
    assert Condition(**TYPED, bank=bank).load_factor == pytest.approx(load, abs=0.0005)


def test_elevation_and_qnh_make_the_pressure_altitude():
    # By the altimeter-setting relation of the standard atmosphere, worked separately.
    there = {"mass": "900 kg", "oat": "10 degC"}
    for elevation, qnh, height in (("8,640 ft", "990 hPa", 9281.0), ("14 ft", "985 hPa", 794.0)):
        one = Condition(**there, elevation=elevation, qnh=qnh)
        assert one.pressure_altitude / 0.3048 == pytest.approx(height, abs=1.0)


@pytest.mark.parametrize(
    ("typed", "said"),
    [
        ({"bank": "30 deg", "load_factor": "1.2"}, "one of them"),
        ({"elevation": "5,210 ft", "qnh": "1005 hPa"}, "one way to give the height"),
        ({"qnh": "1005 hPa"}, "one way to give the height"),
        ({"mass": "3 350 kg"}, "mass in kg, lb"),
        ({"ias": "85"}, "add the unit"),
    ],
)
def test_what_cannot_be_read_is_refused(typed, said):
    with pytest.raises(ReadingError, match=said):
        Condition(**(TYPED | typed))


def test_elevation_needs_its_qnh():
    with pytest.raises(ReadingError, match="pressure_altitude"):
        Condition(mass="900 kg", oat="10 degC", elevation="500 ft")
    with pytest.raises(ReadingError, match="elevation together with qnh"):
        Condition(**TYPED).with_(elevation="500 ft")


@pytest.mark.parametrize(
    ("typed", "said"),
    [
        ({"oat": "95 degC"}, "°F"),  # G27: a temperature in Fahrenheit
        ({"load_factor": "0.9"}, "load factor"),
        ({"bank": "85 deg"}, "0 to 80 deg"),
        ({"rotor_speed": "3 %"}, "50 to 120 %"),
        ({"mass": "12 kg"}, "100 to 60,000 kg"),
        ({"pressure_altitude": "60,000 ft"}, "pressure altitude"),
    ],
)
def test_what_no_helicopter_can_have_is_refused(typed, said):
    with pytest.raises(OutsideLimits, match=said):
        Condition(**(TYPED | typed))


def test_altimeter_setting_is_plausible_or_refused():
    # G26: QNH 850-1085 hPa; "2886" is 28.86 inHg with its point lost.
    with pytest.raises(OutsideLimits, match=r"850 to 1,085 hPa"):
        Condition(mass="900 kg", oat="10 degC", elevation="500 ft", qnh="2886 hPa")


def test_a_misspelt_keyword_is_named():
    with pytest.raises(UnknownName, match="wieght"):
        Condition(**TYPED, wieght="900 kg")
    with pytest.raises(UnknownName, match="wieght"):
        Conditions.si(mass=1.0, pressure_altitude=0.0, oat=288.0, wieght=3.0)


def test_with_replaces_a_turn_and_keeps_the_rest():
    one = Condition(**TYPED, bank="30 deg", ias="85 kt")
    level = one.with_(bank="0 deg")
    assert level.load_factor == 1.0
    assert (level.mass, level.ias) == (one.mass, one.ias)
    assert one.load_factor > 1.0
    assert one.with_(load_factor="1.3").bank == pytest.approx(math.acos(1 / 1.3))


def test_a_condition_does_not_change():
    with pytest.raises(AttributeError):
        Condition(**TYPED).mass = 3.0  # type: ignore[misc]


@given(
    mass=st.floats(500, 5000),
    height=st.floats(-900, 6000),
    oat=st.floats(240, 320),
    load=st.floats(1, 3),
    rotor=st.floats(0.8, 1.1),
)
def test_batches_hold_what_singles_hold(mass, height, oat, load, rotor):
    one = Condition.si(mass=mass, pressure_altitude=height, oat=oat, load_factor=load, rotor_speed=rotor)
    many = Conditions.of([one, one.changed(load_factor=1.0)])
    assert len(many) == 2
    assert many.mass[0] == mass
    assert many.load_factor.tolist() == [load, 1.0]
    assert many.density[0] == pytest.approx(one.density, rel=1e-12)
    assert many.repeat(3).take(range(0, 6, 3)).oat.tolist() == many.oat.tolist()
