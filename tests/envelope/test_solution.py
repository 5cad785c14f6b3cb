"""The rotor model at the door: units and refusals; and the similarity the whole idea rests on."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from briefkit import units
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.onset import tip_angle_at
from briefkit.envelope.solution import phase_lag_deg, rotor_of, solve, solve_many
from briefkit.errors import OutsideCalibration, OutsideLimits, ReadingError, Reason
from briefkit.physics import atmosphere

CRUISE = Condition(mass="2,006 lb", pressure_altitude="5,210 ft", oat="36 degC", ias="85 kt")


def test_numbers_at_the_door(two_t):
    answer = solve(two_t, CRUISE)
    # 85 KIAS is 84.5 KCAS; by the root of relative density at 5,210 ft, +36 C it is 96.3 KTAS.
    assert answer.tas / (1852 / 3600) == pytest.approx(96.3, abs=0.4)
    assert answer.advance_ratio == pytest.approx(answer.tas / two_t.rotor.tip_speed, rel=0.01)
    weight = CRUISE.mass * units.GRAVITY
    area = math.pi * two_t.rotor.radius.value**2
    solidity = 2 * two_t.rotor.chord.value / (math.pi * two_t.rotor.radius.value)
    loading = weight / (CRUISE.density * area * two_t.rotor.tip_speed**2 * solidity)
    assert answer.blade_loading == pytest.approx(loading, rel=0.02)  # the disc also holds up its own tilt
    advancing = (two_t.rotor.tip_speed + answer.tas) / CRUISE.sound_speed
    assert answer.advancing_mach == pytest.approx(advancing, rel=0.005)
    assert answer.residual < 1e-8
    assert answer.b1c_deg < 0.0  # the disc tilts back: dissymmetry of lift answered by flapping


def test_a_batch_is_the_same_states_one_by_one(two_t):
    several = [CRUISE, CRUISE.with_(bank="30 deg"), CRUISE.with_(ias="60 kt"), CRUISE.with_(mass="1,500 lb")]
    many = solve_many(two_t, several)
    for i, one in enumerate(several):
        assert many.tip_angle_deg[i] == pytest.approx(solve(two_t, one).tip_angle_deg, abs=1e-7)


def test_similarity_of_the_rotor_model(two_t):
    """At p' = p m'/(n m), T' = T/k^2, V' = V/k in level flight at 100 % the tip angle is the same to 0.05 degree."""
    rng = np.random.default_rng(20305)
    count = 200
    n, k = rng.uniform(1.0, 1.4, count), rng.uniform(0.97, 1.02, count)
    here = Conditions.si(
        mass=rng.uniform(600.0, 910.0, count), pressure_altitude=rng.uniform(0.0, 2500.0, count),
        oat=rng.uniform(265.0, 305.0, count), load_factor=n, rotor_speed=k,
    )  # fmt: skip
    tas = rng.uniform(25.0, 55.0, count)
    rotor = rotor_of(two_t)
    mine = tip_angle_at(rotor, here, tas)
    heaviest = two_t.limits.max_mass.value
    pressure = here.pressure * heaviest / (n * here.mass)
    keep = (pressure < 101325.0) & (pressure > 45000.0)
    height = np.asarray(atmosphere.pressure_altitude_of(np.where(keep, pressure, 80000.0)))
    level = np.ones(count)
    there = replace(
        here,
        mass=heaviest * level,
        load_factor=level,
        rotor_speed=level,
        oat=here.oat / k**2,
        pressure_altitude=height,
    )
    theirs = tip_angle_at(rotor, there, tas / k)
    known = keep & np.isfinite(mine) & np.isfinite(theirs)
    assert known.sum() > 100
    assert np.degrees(np.abs(mine - theirs)[known]).max() < 0.05


@pytest.mark.parametrize(
    ("worse", "name"),
    [
        ({"mass": "2,006 lb"}, "heavier"),
        ({"pressure_altitude": "7,000 ft"}, "higher"),
        ({"oat": "36 degC"}, "hotter"),
        ({"rotor_speed": "97 %"}, "slower rotor"),
        ({"bank": "20 deg"}, "turning"),
        ({"ias": "90 kt"}, "faster"),
    ],
)
def test_what_brings_stall_nearer(two_t, worse, name):
    """FAA-H-8083-21B ch. 11: high weight, low rotor rpm, high density altitude, turns."""
    easy = Condition(mass="1,700 lb", pressure_altitude="4,000 ft", oat="15 degC", ias="80 kt")
    assert solve(two_t, easy.with_(**worse)).tip_angle_deg > solve(two_t, easy).tip_angle_deg + 0.05, name


def test_refusals(two_t):
    with pytest.raises(ReadingError, match="ias="):
        solve(two_t, CRUISE.changed(ias=None))
    with pytest.raises(OutsideCalibration, match="40 to 120 kt indicated"):
        solve(two_t, CRUISE.with_(ias="130 kt"))
    with pytest.raises(OutsideLimits, match=r"up to 2,006 lb"):
        solve(two_t, CRUISE.with_(mass="2,100 lb"))
    many = solve_many(two_t, [CRUISE, CRUISE.with_(ias="130 kt")])
    assert many.reason.tolist() == [Reason.NONE, Reason.OUTSIDE_CALIBRATION]
    assert np.isnan(many.tip_angle_deg[1])


def test_phase_lag_of_a_teetering_hub_is_a_quarter_turn(two_t):
    assert phase_lag_deg(two_t, CRUISE) == pytest.approx(90.0)
