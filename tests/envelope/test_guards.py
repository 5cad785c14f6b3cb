"""Guards of the trade by number, where they are matters of the envelope, on all three invented types."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from briefkit import units
from briefkit.brief import recognition
from briefkit.envelope import cues, region
from briefkit.envelope.boundary import Against, boundary
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.equivalent import equivalent_vnes
from briefkit.envelope.onset import FIRST_SIGNS, LIMIT_OF_CONTROL, onset_speed
from briefkit.envelope.solution import rotor_of, solve_many, state_of
from briefkit.envelope.spread import onset_bands, quick_onset_bands
from briefkit.errors import Reason
from briefkit.physics.trim import trim

TYPES = ("two_t", "three_f", "four_h")


def random_conditions(aircraft, seed, count, load=(1.0, 1.6)):
    """Conditions that a crew could type, some of them outside chart or limits."""
    rng = np.random.default_rng(seed)
    low, high = region.temperature_range(aircraft)
    low_k, high_k = (end.value for end in aircraft.limits.rotor_on)
    return Conditions.si(
        mass=rng.uniform(aircraft.limits.min_mass.value * 0.95, aircraft.limits.max_mass.value * 1.03, count),
        pressure_altitude=rng.uniform(-200.0, aircraft.limits.max_altitude.value * 1.05, count),
        oat=rng.uniform(low - 3.0, min(high, units.ZERO_CELSIUS + 50.0) + 3.0, count),
        load_factor=rng.uniform(*load, count),
        rotor_speed=rng.uniform(low_k - 0.01, high_k + 0.01, count),
    )


@pytest.mark.slow
@pytest.mark.parametrize("name", TYPES)
def test_g1_nothing_told_lies_above_the_manuals_vne(name, request):
    """G1 on 20,000 seeded conditions of the three types in batches, as printed and as drawn; G32: refused members hold
    nothing.
    """
    aircraft = request.getfixturevalue(name)
    many = random_conditions(aircraft, 20313 + TYPES.index(name), 6667)
    answers = equivalent_vnes(aircraft, many)
    usable = answers.reason == Reason.NONE
    assert 1500 < usable.sum() < 6667
    assert (answers.ias[usable] <= answers.vne[usable]).all()
    assert (answers.upper[usable] <= answers.vne[usable]).all()
    assert (answers.below_vne[usable] >= 0.0).all()
    # As printed: an answer is floored, a reduction rounded up. As drawn: the numbers of a figure are these arrays.
    vne, ias = answers.vne[usable], answers.ias[usable]
    step = aircraft.units.speed_step
    printed = np.array([units.round_down(speed) for speed in ias])
    slowed = vne - np.array([units.round_up(below, step) for below in answers.below_vne[usable]])
    assert (printed <= vne).all()
    assert (printed <= ias + 0.005).all()
    assert (slowed <= ias + 0.011).all()  # both ends are kept to 0.01
    assert np.isnan(answers.ias[~usable]).all()
    assert np.isnan(answers.below_vne[~usable]).all()
    assert all(isinstance(reason, Reason) for reason in answers.reason)


@pytest.mark.slow
@pytest.mark.parametrize("name", TYPES)
@pytest.mark.parametrize("against", list(Against))
def test_g2_nothing_drawn_as_usable_lies_above_vne(name, against, request):
    """G1 and G2 on every boundary: no blue line above the black one."""
    aircraft = request.getfixturevalue(name)
    middle = Condition.si(
        mass=0.9 * aircraft.limits.max_mass.value, pressure_altitude=1200.0, oat=units.ZERO_CELSIUS + 15.0
    )
    drawn = boundary(aircraft, middle, against)
    for curve in drawn.equivalent:
        usable = curve.reason == Reason.NONE
        assert (curve.ias[usable] <= drawn.vne[usable]).all()
        assert np.isnan(curve.ias[~usable]).all()


@pytest.mark.parametrize("name", TYPES)
def test_g5_no_number_outside_the_model(name, request):
    """Batches of the rotor model never hand out a number without flight behind it."""
    aircraft = request.getfixturevalue(name)
    many = random_conditions(aircraft, 20316, 400, load=(1.0, 3.0))
    speeds = np.random.default_rng(20317).uniform(0.0, 80.0, 400)
    with_speed = Conditions(**{f: getattr(many, f) for f in Conditions.__dataclass_fields__} | {"ias": speeds})
    solved = solve_many(aircraft, with_speed)
    gone = solved.reason != Reason.NONE
    assert gone.any()
    for field in ("tip_angle_deg", "advance_ratio", "blade_loading", "b0_deg", "t0_deg"):
        values = getattr(solved, field)
        assert np.isnan(values[gone]).all()
        assert np.isfinite(values[~gone]).all()


@given(st.floats(0.0, 400.0), st.sampled_from(["kt", "km/h", "mph"]))
def test_g7_speeds_go_round_the_units(number, unit):
    """Within 0.05 kt, by way of every unit; here exactly but for rounding."""
    si = units.to_si(number, "speed", unit)
    for other in ("kt", "km/h", "mph"):
        back = units.to_si(units.from_si(si, "speed", other), "speed", other)
        assert abs(back - si) < 1e-9


@given(st.floats(0.0, 500.0), st.sampled_from([1.0, 2.0, 5.0, 10.0]))
def test_g8_rounding_is_to_the_safe_side(number, step):
    down, up = units.round_down(number, step), units.round_up(number, step)
    assert down <= number + 0.0051
    assert up >= number - 0.0051
    assert up - down <= step + 1e-9
    assert down % step == pytest.approx(0.0, abs=1e-9) or down % step == pytest.approx(step, abs=1e-9)


@pytest.mark.parametrize("name", TYPES)
def test_g18_the_band_is_told_from_its_lower_edge(name, request):
    aircraft = request.getfixturevalue(name)
    many = Conditions.si(
        mass=aircraft.limits.max_mass.value, pressure_altitude=np.linspace(500.0, 2500.0, 5), oat=293.15
    )
    band = quick_onset_bands(aircraft, many)
    known = np.isfinite(band.lower) & np.isfinite(band.central)  # its middle may lie above the calibration
    assert known.any()
    assert (band.lower[known] < band.central[known]).all()


def test_g20_no_onset_is_shifted_to_the_manuals_evidence(two_t):
    """G20: nothing is calibrated. Another VNE in the manual leaves the onset band where it was, above or below it."""
    many = Conditions.si(mass=two_t.limits.max_mass.value, pressure_altitude=1500.0, oat=293.15)
    stated = onset_bands(two_t, many)
    for knots in (-25.0, 25.0):
        chart = replace(two_t.vne, speeds=two_t.vne.speeds + knots * units.KNOT)
        other = onset_bands(replace(two_t, vne=chart), many)
        for end in ("lower", "central", "upper"):
            np.testing.assert_array_equal(getattr(stated, end), getattr(other, end))
    assert (math.degrees(FIRST_SIGNS), math.degrees(LIMIT_OF_CONTROL)) == pytest.approx((12.0, 16.0))  # NACA TR 840


@pytest.mark.parametrize("name", TYPES)
def test_g22_no_roll_direction_from_the_solver(name, request):
    """The words do not depend on the solution: the same text whatever the flapping says."""
    aircraft = request.getfixturevalue(name)
    right = name == "four_h"
    assert cues.onset_words(aircraft).endswith("usually right." if right else "usually left.")
    said = [section.heading for section in recognition.recognition(aircraft)]
    assert said[0] == "Which one is it?"


@pytest.mark.parametrize("name", TYPES)
def test_g23_clockwise_is_the_same_rotor(name, request):
    """Equations do not know the hand: every number of the solution is the same turned the other way."""
    aircraft = request.getfixturevalue(name)
    many = Conditions.si(mass=aircraft.limits.max_mass.value, pressure_altitude=1000.0, oat=288.15)
    speed = np.array([50.0])
    one, other = (trim(rotor, state_of(rotor, many, speed)) for rotor in (
        rotor_of(aircraft, rotation=1), rotor_of(aircraft, rotation=-1)))  # fmt: skip
    for field in ("t0", "t1c", "t1s", "b0", "b1c", "b1s", "tip_angle", "residual"):
        np.testing.assert_array_equal(getattr(one, field), getattr(other, field))


@pytest.mark.parametrize("name", TYPES)
def test_g30_what_brings_onset_nearer(name, request):
    """FAA-H-8083-21B ch. 11: onset falls with weight, density altitude, bank; rises with rotor rpm."""
    aircraft = request.getfixturevalue(name)
    most = aircraft.limits.max_mass.value
    easy = Condition.si(mass=0.9 * most, pressure_altitude=1200.0, oat=288.15)
    worse = (
        easy.changed(mass=0.97 * most),
        easy.changed(pressure_altitude=1800.0),
        easy.changed(oat=300.0),
        easy.changed(load_factor=1.1),
        easy.changed(rotor_speed=0.98),
    )
    speed = onset_speed(rotor_of(aircraft), Conditions.of([easy, *worse]), FIRST_SIGNS)
    assert np.isfinite(speed).all()
    assert (speed[1:] < speed[0] - 0.5).all()


@pytest.mark.parametrize("name", TYPES)
def test_g31_two_resolutions_agree(name, request):
    """Onset from the trim grid and from one three times as fine: within 1 kt (measured: some hundredths)."""
    aircraft = request.getfixturevalue(name)
    rotor = rotor_of(aircraft)
    many = Conditions.si(mass=aircraft.limits.max_mass.value, pressure_altitude=1500.0, oat=293.15)
    speed = onset_speed(rotor, many, FIRST_SIGNS)
    state = state_of(rotor, many, speed)
    coarse, fine = (trim(rotor, state, grid=grid).tip_angle for grid in ((24, 12), (72, 40)))
    faster = trim(rotor, state_of(rotor, many, speed + units.KNOT)).tip_angle
    assert abs(float((fine - coarse)[0])) < float((faster - coarse)[0])


@pytest.mark.parametrize("name", TYPES)
def test_g29_limits_beside_the_result(name, request):
    """No answer above a manual bank limit exists: the what-if is refused and names the limit."""
    aircraft = request.getfixturevalue(name)
    limit = aircraft.limits.max_bank
    steep = Conditions.si(
        mass=0.8 * aircraft.limits.max_mass.value, pressure_altitude=500.0, oat=288.15,
        load_factor=1.0 / math.cos(math.radians(50.0)),
    )  # fmt: skip
    reason = equivalent_vnes(aircraft, steep).reason[0]
    if limit is not None and limit.value < math.radians(50.0):
        assert reason is Reason.OUTSIDE_LIMITS
    else:
        assert reason in (Reason.NONE, Reason.BEYOND_CHART)
