"""The onset band: its combination of spreads against random sampling, its trends, its refusals."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from briefkit import units
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.onset import FIRST_SIGNS, onset_speed, tip_angle_at, tip_angles
from briefkit.envelope.onset_build import INPUTS
from briefkit.envelope.solution import rotor_of
from briefkit.envelope.speeds import indicated_of
from briefkit.envelope.spread import onset_band, onset_bands
from briefkit.errors import OutsideLimits

HOT = Condition(mass="2,006 lb", pressure_altitude="5,210 ft", oat="36 degC")
SIX = (
    HOT,
    HOT.with_(bank="20 deg"),
    HOT.with_(rotor_speed="97 %"),
    HOT.with_(mass="1,800 lb"),
    HOT.with_(pressure_altitude="8,000 ft", oat="20 degC"),
    HOT.with_(pressure_altitude="8,000 ft", oat="20 degC", bank="15 deg"),
)


def test_onset_speed_is_where_the_tip_reaches_the_angle(two_t):
    rotor, many = rotor_of(two_t), Conditions.of(SIX)
    speed = onset_speed(rotor, many, FIRST_SIGNS)
    np.testing.assert_allclose(np.degrees(tip_angle_at(rotor, many, speed)), 12.0, atol=1e-5)


@pytest.mark.slow
def test_onset_agrees_with_a_plain_bisection(two_t):
    rotor, many = rotor_of(two_t), Conditions.of(SIX)
    low, high = np.full(6, 20.0), np.full(6, 70.0)
    for _ in range(40):
        middle = 0.5 * (low + high)
        above = tip_angle_at(rotor, many, middle) > FIRST_SIGNS
        low, high = np.where(above, low, middle), np.where(above, middle, high)
    np.testing.assert_allclose(onset_speed(rotor, many, FIRST_SIGNS), low, atol=0.005)


@pytest.mark.slow
def test_one_at_a_time_against_two_thousand_samples(two_t):
    """The lower end is the 2.5 % point of the sampled 12-degree onset, every input normal with its spread as 95 %."""
    rng = np.random.default_rng(20306)
    count, rotor = 2000, rotor_of(two_t)
    bands = onset_bands(two_t, Conditions.of(SIX))
    for i, one in enumerate(SIX):
        many = Conditions.of(one).repeat(count)
        changes = {}
        for field in INPUTS:
            stated = getattr(two_t.rotor, field)
            if stated.spread:
                changes[field] = stated.value + stated.spread / 1.96 * rng.standard_normal(count)
        sampled = rotor_of(two_t, **changes)
        # A secant of this test's own from the nominal onset, its first step by the nominal slope.
        nominal = onset_speed(rotor, Conditions.of(one), FIRST_SIGNS)[0]
        near, far = tip_angle_at(rotor, Conditions.of(one).repeat(2), nominal * np.array([1.0, 1.02]))
        v0 = np.full(count, nominal)
        a0 = tip_angle_at(sampled, many, v0)
        v1 = v0 + (FIRST_SIGNS - a0) * 0.02 * nominal / (far - near)
        a1 = tip_angle_at(sampled, many, v1)
        v1 = v1 + np.where(a1 == a0, 0.0, (FIRST_SIGNS - a1) * (v1 - v0) / np.where(a1 == a0, 1.0, a1 - a0))
        a1 = tip_angle_at(sampled, many, v1)
        assert np.abs(a1 - FIRST_SIGNS).max() < math.radians(0.01)
        seen = indicated_of(two_t.calibration, v1, many.pressure, many.oat)
        low = np.percentile(seen, 2.5)
        assert bands.lower[i] == pytest.approx(low, abs=1.5 * units.KNOT)


def test_what_the_band_is_made_of(two_t):
    band = onset_band(two_t, HOT)
    assert band.unit == "kt"
    assert band.lower < band.central
    total = math.sqrt(sum(one.lowers_by**2 for one in band.contributions))
    assert band.central - band.lower == pytest.approx(total, abs=0.02)
    # Blade inertia does not matter to it; the author should know.
    assert {one.name: one.lowers_by for one in band.contributions}["blade flap inertia"] == pytest.approx(0.0, abs=0.05)


@pytest.mark.slow
def test_heavier_higher_hotter_slower_rotor_more_bank_lowers_it(two_t):
    easy = Condition(mass="1,900 lb", pressure_altitude="6,000 ft", oat="20 degC")
    worse = [
        {"mass": "2,000 lb"},
        {"pressure_altitude": "7,000 ft"},
        {"oat": "30 degC"},
        {"rotor_speed": "98 %"},
        {"bank": "20 deg"},
    ]
    first = onset_band(two_t, easy).central
    for typed in worse:
        assert onset_band(two_t, easy.with_(**typed)).central < first - 0.5


def test_a_steep_turn_has_no_onset_speed(two_t):
    # At 60 degrees the tip is above 12 degrees at every speed: no number, not a small one (G5).
    with pytest.raises(OutsideLimits, match="12 degrees"):
        onset_band(two_t, HOT.with_(bank="60 deg"))
    assert np.isnan(onset_speed(rotor_of(two_t), Conditions.of(HOT.with_(bank="60 deg")), FIRST_SIGNS)[0])


def test_an_end_without_an_indicated_speed_is_none(two_t):
    light = onset_band(two_t, HOT.with_(mass="1,600 lb"))
    assert light.upper is None  # above the 120 KIAS the indicator is calibrated to


def test_above_the_maximum_mass_is_refused(two_t):
    with pytest.raises(OutsideLimits, match="up to 2,006 lb"):
        onset_band(two_t, HOT.with_(mass="2,050 lb"))


def test_a_calibration_not_in_the_manual_widens_both_ends(two_t):
    none = replace(two_t, calibration=replace(two_t.calibration, indicated=(), calibrated=(), spread=4.0 * units.KNOT))
    many = Conditions.of(HOT)
    without = replace(none, calibration=replace(none.calibration, spread=0.0))
    wide, narrow = onset_bands(none, many), onset_bands(without, many)
    lowered = narrow.central - narrow.lower
    assert wide.central - wide.lower == pytest.approx(np.hypot(lowered, 4.0 * units.KNOT), rel=1e-9)


def test_curve_starts_near_the_hover(two_t):
    curve = tip_angles(rotor_of(two_t), Conditions.of(HOT))
    assert curve.speed.shape == curve.angle.shape
    assert curve.speed[0, 0] < 7.0
