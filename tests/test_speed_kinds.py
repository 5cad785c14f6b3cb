"""G6: every speed has a kind and a unit; adding or comparing unlike kinds raises."""

from __future__ import annotations

import math
import operator
from dataclasses import replace

import numpy as np
import pytest

from briefkit import units
from briefkit.aircraft.manual_speeds import figure
from briefkit.brief.derivation import work_by_hand
from briefkit.envelope.condition import Condition
from briefkit.envelope.equivalent import EquivalentVnes, equivalent_vne
from briefkit.envelope.margin import margin_to_vne
from briefkit.envelope.solution import solve
from briefkit.envelope.speeds import indicated_speed, true_speed
from briefkit.envelope.spread import OnsetBand
from briefkit.errors import BriefkitError, MixedSpeeds, OutsideCalibration, ReadingError
from briefkit.physics import airspeed
from briefkit.units import Speed, SpeedKind

IAS, CAS, TAS = SpeedKind.INDICATED, SpeedKind.CALIBRATED, SpeedKind.TRUE
# The trap of the demonstration world: 94 KIAS is 112 KTAS at the saddle.
SADDLE = {"mass": "3,350 kg", "pressure_altitude": "9,281 ft", "oat": "22 degC"}


@pytest.mark.parametrize("do", [operator.add, operator.sub, operator.lt, operator.le, operator.gt, operator.ge])
@pytest.mark.parametrize("other", [Speed.of(112, "kt", TAS), Speed.of(94, "kt", CAS), 94.0, None])
def test_g6_unlike_kinds_are_neither_added_nor_compared(do, other):
    with pytest.raises(MixedSpeeds, match=r"94 KIAS and .* are neither added nor compared"):
        do(Speed.of(94, "kt"), other)
    assert issubclass(MixedSpeeds, BriefkitError)


@pytest.mark.parametrize("other", [Speed.of(94, "kt", TAS), 94, 94.0, np.float64(94.0), np.int64(94)])
def test_g6_not_even_for_equality(other):
    for same in (operator.eq, operator.ne):
        with pytest.raises(MixedSpeeds):
            same(Speed.of(94, "kt"), other)
        with pytest.raises(MixedSpeeds):
            same(other, Speed.of(94, "kt"))


@pytest.mark.parametrize("other", [None, "94 KIAS", (94,), object()])
def test_what_is_no_number_is_no_speed(other):
    assert Speed.of(94, "kt") != other
    assert not Speed.of(94, "kt") == other  # noqa: SIM201  (both ways are asked)


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf, np.float64("nan")])
def test_a_speed_that_is_not_finite_is_refused(value):
    """Not a number is neither under a floor nor above it, so that `not under` would have let it pass."""
    for make in (lambda: Speed(value, IAS), lambda: Speed.of(value, "kt")):
        with pytest.raises(ReadingError, match="a finite indicated speed"):
            make()


def test_a_band_without_an_upper_end_or_a_calibration_has_no_width(two_t):
    """ "None in manual": no top of the table stands in for the missing end."""
    plain = replace(two_t, calibration=replace(two_t.calibration, indicated=(), calibrated=()))
    found = margin_to_vne(plain, OnsetBand(80.0, 90.0, None, "kt", ()), Speed.of(85, "kt"))
    assert (found.half_width, found.resolved, found.reduced) == (None, False, True)


def test_g6_one_kind_in_two_units_is_one_speed():
    assert Speed.of(100, "kt") == Speed.of(185.2, "km/h")
    assert Speed.of(64, "kt") - Speed.of(10, "kt") >= Speed.of(54, "kt")
    assert (Speed.of(64, "kt") - Speed.of(10, "kt")).number == 54.0
    assert (Speed.of(64, "kt") + Speed.of(10, "kt")).text == "74 KIAS"
    assert hash(Speed.of(100, "kt")) == hash(Speed.of(185.2, "km/h"))
    assert (Speed.of(213.7, "km/h").text, Speed.of(80, "mph", TAS).text) == ("213 km/h IAS", "80 mph TAS")


@pytest.mark.parametrize("text", ["85 KTAS", "85 KCAS", "150 km/h TAS", "80 mph CAS"])
def test_g6_typed_for_another_kind_is_refused(text):
    with pytest.raises(ReadingError, match="indicated airspeed; this one is"):
        units.read_speed(text)
    with pytest.raises(ReadingError, match="convert it first"):
        Condition(**SADDLE, ias=text)
    assert figure(text) is None  # nor may it stand as a manual's figure for the airspeed indicator


@pytest.mark.parametrize(
    ("text", "unit"), [("85 KIAS", "kt"), ("85 kt", "kt"), ("85 km/h IAS", "km/h"), ("85\u00a0mph IAS", "mph")]
)
def test_g6_typed_with_its_kind_or_without(text, unit):
    speed = units.read_speed(text)
    assert (speed.number, speed.unit, speed.kind) == (85.0, unit, IAS)


@pytest.mark.parametrize("text", ["", "K", "85 KKIAS", "85 IAS", "8 5 KIAS", "85,0 KIAS", "85 kt TAS", "-", 85])
def test_g6_anything_else_is_not_read(text):
    with pytest.raises(ReadingError):
        units.read_speed(text)


def test_g6_the_doors_hand_out_kinds(four_h):
    here = Condition(**SADDLE, ias="90 KIAS", bank="15 deg")
    answer = equivalent_vne(four_h, here)
    for speed in (answer.speed, answer.vne, answer.chart_vne, here.airspeed):
        assert (speed.kind, speed.unit) == (IAS, "kt")
    assert answer.speed.text == answer.text
    assert (answer.vne - answer.speed).number == answer.below_vne
    true = solve(four_h, here).true_airspeed
    assert true.kind is TAS
    assert EquivalentVnes.kind is IAS
    with pytest.raises(MixedSpeeds):
        _ = true < answer.speed
    with pytest.raises(MixedSpeeds, match=r"a true speed, .* where a speed is indicated"):
        here.changed(ias=true)
    assert here.changed(ias=answer.speed).ias == pytest.approx(answer.speed.value)
    assert Condition(**SADDLE).airspeed is None


def test_g6_from_kind_to_kind_leads_only_calibration_and_air(four_h):
    """By hand as in the scenario: 94 KIAS is 93.3 KCAS, and 112 KTAS in air of 0.690 the standard density."""
    here = Condition(**SADDLE)
    needle = Speed.of(94, "kt")
    calibrated = four_h.calibration.calibrated_of(needle)
    assert (calibrated.kind, calibrated.number) == (CAS, pytest.approx(93.3, abs=0.01))
    true = true_speed(four_h.calibration, needle, here.pressure, here.oat)
    assert (true.kind, true.number) == (TAS, pytest.approx(93.3 / 0.690**0.5, abs=0.5))
    assert indicated_speed(four_h.calibration, true, here.pressure, here.oat) == needle
    for wrong, step in (
        (needle, lambda s: airspeed.to_true(s, here.pressure, here.oat)),
        (calibrated, lambda s: airspeed.to_calibrated(s, here.pressure, here.oat)),
        (true, four_h.calibration.calibrated_of),
        (needle, four_h.calibration.indicated_of),
    ):
        with pytest.raises(MixedSpeeds):
            step(wrong)
    with pytest.raises(OutsideCalibration, match="60 to 160 kt"):
        four_h.calibration.calibrated_of(Speed.of(170, "kt"))
    with pytest.raises(OutsideCalibration, match="60 to 160 kt"):
        four_h.calibration.indicated_of(Speed.of(20, "kt", CAS))


def test_g6_in_the_working_by_hand_and_the_margin(two_t):
    at = Condition(mass="1,800 lb", pressure_altitude="8,000 ft", oat="20 degC", bank="30 deg")
    hand = work_by_hand(two_t, at, equivalent_vne(two_t, at))
    assert (hand.true.kind, hand.indicated.kind, hand.vne_here.kind, hand.below.kind) == (TAS, IAS, IAS, IAS)
    with pytest.raises(MixedSpeeds):
        margin_to_vne(two_t, OnsetBand(80.0, 90.0, None, "kt", ()), hand.true)


def test_g6_a_manuals_rough_air_speed_is_indicated(four_h):
    rough = four_h.speeds[0].speed
    assert (rough.kind, rough.text) == (IAS, "100 KIAS")
    assert replace(four_h.speeds[0]) == four_h.speeds[0]
