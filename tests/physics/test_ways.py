"""Controls held, gusts and torque-free flight, over the same equations."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from briefkit.errors import Reason
from briefkit.physics.power import power
from briefkit.physics.rotor import Rotor, State
from briefkit.physics.section import Attached
from briefkit.physics.trim import Controls, held, torque_free, trim, vertical_gust

StateOf = Callable[..., State]
Masses = tuple[float, float]


@pytest.mark.parametrize("turn", [0.0, 70.0])
def test_held_where_it_was_trimmed_changes_nothing(rotor: Rotor, mass: Masses, turn: float, state_of: StateOf) -> None:
    speed = np.array([0.0, 15.0, 40.0, 60.0])
    for section in ("attached", "stalling"):
        state = state_of(rotor, speed=speed, mass=0.9 * mass[1], wind_azimuth=np.radians(turn))
        flight = trim(rotor, state, section=section)
        same = held(rotor, state, Controls.of(flight), section=section)
        assert same.solved.all()
        for part in ("t0", "t1c", "t1s", "b0", "b1c", "b1s", "ct", "cq", "ch", "tip_angle", "mu", "disc_tilt"):
            np.testing.assert_allclose(getattr(same, part), getattr(flight, part), atol=1e-8, err_msg=part)
        np.testing.assert_allclose(same.hub_b1c, 0.0, atol=1e-8)


def test_flapping_follows_the_swashplate_in_hover(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    # The two first-harmonic equations in hover by hand, small angles: (nu^2 - 1) b1c = g (A t1c - B b1s) and
    # (nu^2 - 1) b1s = g B b1c, with A and B the moments of r^2 and r (r - e) about the hinge. At nu = 1 the disc
    # follows the swashplate by the same angle a quarter turn later: flapping and feathering are equivalent.
    state = state_of(rotor, speed=0.0, mass=mass[1])
    level = Controls.of(trim(rotor, state))
    cyclic = 0.02
    answer = held(rotor, state, replace(level, t1c=level.t1c + cyclic))
    r = np.linspace(rotor.root_cutout, rotor.tip_loss, 2001)
    slope = rotor.lift_slope / np.sqrt(1.0 - (r * rotor.tip_speed / 340.294) ** 2)
    gain = 1.225 * rotor.chord * rotor.radius**4 / (2.0 * rotor.flap_inertia)
    by_pitch = gain * np.trapezoid(slope * r**2 * (r - rotor.hinge_offset), r)
    by_rate = gain * np.trapezoid(slope * r * (r - rotor.hinge_offset) ** 2, r)
    spring = rotor.flap_frequency**2 - 1.0
    sine = by_pitch * cyclic / (by_rate + spring**2 / by_rate)
    assert answer.hub_b1s[0] == pytest.approx(sine, rel=0.015)
    assert answer.hub_b1c[0] == pytest.approx(spring * sine / by_rate, abs=0.015 * cyclic)
    if rotor.hub == "teetering":
        assert answer.hub_b1s[0] == pytest.approx(cyclic, rel=0.01)


def test_faster_with_controls_held_the_disc_flaps_back(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    # Handbook teaching (FAA-H-8083-21B, flapping back): more speed, the disc tilts away from the wind.
    state = state_of(rotor, speed=40.0, mass=mass[1])
    before = trim(rotor, state)
    after = held(rotor, replace(state, speed=np.array([40.0, 45.0, 50.0])), Controls.of(before))
    assert (np.diff(after.hub_b1c) < 0.0).all()
    assert (np.diff(after.disc_tilt) < 0.0).all()


def test_slower_rotor_with_controls_held_loses_thrust(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    state = state_of(rotor, speed=40.0, mass=mass[1])
    before = trim(rotor, state)
    speeds = rotor.tip_speed * np.array([1.0, 0.97, 0.9])
    after = held(rotor, replace(state, tip_speed=speeds), Controls.of(before))
    assert after.solved.all()
    assert (np.diff(after.ct * after.scale_of_thrust) < 0.0).all()


def test_wind_from_the_side_with_controls_held(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    # The shaft keeps its lean while the wind goes round: opposite winds see opposite leans, and turn the answer round.
    state = state_of(rotor, speed=20.0, mass=mass[1])
    controls = replace(Controls.of(trim(rotor, state_of(rotor, speed=0.0, mass=mass[1]))), shaft_c=0.05)
    winds = held(rotor, replace(state, wind_azimuth=np.radians(np.array([0.0, 180.0, 90.0, -90.0]))), controls)
    assert winds.solved.all()
    assert winds.inflow[0] > winds.inflow[2] > winds.inflow[1]  # into the wind the disc is blown through, astern up
    assert winds.inflow[2] == pytest.approx(winds.inflow[3], abs=1e-12)
    assert winds.hub_b1c[0] < 0.0 < winds.hub_b1c[1]  # always back, away from the wind


def test_gust_raises_the_tip_angle_at_once(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    speed, gust = np.array([25.0, 40.0, 55.0]), 2.0
    before = trim(rotor, state_of(rotor, speed=speed, mass=mass[1]))
    met = vertical_gust(before, gust)
    assert met.settled.solved.all()
    # In the first instant only the air through the tip's path changes: w over the speed of the retreating tip.
    tip = before.elements([1.0], [1.5 * np.pi]).speed[:, 0, 0]
    np.testing.assert_allclose(met.instant_tip_angle - before.tip_angle, gust / tip, rtol=0.05)
    assert (met.instant_load > 1.1).all()
    # Then the disc flaps back and the inflow grows, which takes some of the load off again.
    assert (met.settled.hub_b1c < 0.0).all()
    assert (met.settled.ct / before.ct < met.instant_load).all()
    assert (met.settled.tip_angle > before.tip_angle).all()
    stronger = vertical_gust(before, 2.0 * gust)
    assert (stronger.instant_tip_angle > met.instant_tip_angle).all()
    none = vertical_gust(before, 0.0)
    np.testing.assert_allclose(none.instant_load, 1.0, atol=1e-12)
    np.testing.assert_allclose(none.settled.tip_angle, before.tip_angle, atol=1e-8)


def test_a_gust_on_a_glide_is_met_on_the_glide_path(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    glide = torque_free(rotor, state_of(rotor, speed=np.array([30.0, 45.0]), mass=mass[1]))
    none = vertical_gust(glide, 0.0)
    np.testing.assert_allclose(none.instant_load, 1.0, atol=1e-12)
    np.testing.assert_allclose(none.settled.hub_b1c, 0.0, atol=1e-8)
    np.testing.assert_allclose(none.settled.cq, 0.0, atol=1e-9)
    assert (vertical_gust(glide, 2.0).instant_load > 1.1).all()


def test_gusts_over_one_flight_are_a_batch(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    before = trim(rotor, state_of(rotor, speed=45.0, mass=mass[1]))
    met = vertical_gust(before, np.array([-2.0, 0.0, 2.0, 4.0]))
    assert met.instant_load.shape == (4,)
    assert (np.diff(met.instant_load) > 0.0).all()
    assert (np.diff(met.settled.tip_angle) > 0.0).all()


def test_gliding_needs_no_torque(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    speed = np.linspace(20.0, 55.0, 9)
    state = state_of(rotor, speed=speed, mass=mass[1])
    glide = torque_free(rotor, state)
    assert glide.solved.all()
    assert np.abs(glide.cq).max() < 1e-10
    assert (glide.climb_rate < -3.0).all()
    # The weight still stands on the rotor, and what height gives is what rotor and airframe take.
    given = power(glide)
    np.testing.assert_allclose(given.induced + given.profile + given.parasite, -given.climb, rtol=1e-7)
    # It is the trimmed flight down that path.
    again = trim(rotor, replace(state, climb_rate=glide.climb_rate))
    np.testing.assert_allclose(again.t0, glide.t0, atol=1e-8)
    np.testing.assert_allclose(again.cq, 0.0, atol=1e-9)
    # Sink has a least value between slow and fast.
    lowest = glide.climb_rate.argmax()
    assert 0 < lowest < speed.size - 1


def test_gliding_slowly_is_refused(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    flight = torque_free(rotor, state_of(rotor, speed=np.array([0.0, 5.0, 40.0]), mass=mass[1]))
    assert [reason is Reason.OUTSIDE_MODEL for reason in flight.reason] == [True, True, False]


def test_windmilling_speed_does_not_need_a_weight(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    state = state_of(rotor, speed=40.0, mass=0.0)
    spun = torque_free(rotor, state, Controls(np.radians(3.0), 0.0, np.radians(-2.0)))
    assert spun.solved.all()
    assert abs(spun.cq[0]) < 1e-9
    assert spun.ct[0] > 0.0
    assert spun.incidence[0] < 0.0  # the disc leans back: the air comes from below


def test_held_outside_the_model_is_refused(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    state = state_of(rotor, speed=np.array([30.0, 30.0, 2.0, 30.0]), mass=mass[1])
    pitch = np.radians(np.array([8.0, np.nan, 8.0, 60.0]))
    flight = held(rotor, state, Controls(pitch, 0.0, 0.0), gust=np.array([0.0, 0.0, 12.0, 0.0]))
    kinds = [reason.name for reason in flight.reason]
    assert kinds[:3] == ["NONE", "OUTSIDE_MODEL", "OUTSIDE_MODEL"]
    assert kinds[3] in {"OUTSIDE_MODEL", "NO_TRIM"}
    assert np.isnan(flight.ct[1:]).all()


def test_as_much_thrust_down_as_up_is_refused(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    state = state_of(rotor, speed=40.0, mass=mass[1])
    pitch = np.radians(np.arange(-30.0, 31.0, 5.0))
    flight = held(rotor, state, Controls(pitch, 0.0, 0.0), inflow="uniform")
    loading = flight.ct_sigma[flight.solved]
    assert loading.min() < 0.0 < loading.max()
    assert np.abs(loading).max() <= 0.18
    assert flight.reason[0] is Reason.OUTSIDE_MODEL
    assert flight.reason[-1] is Reason.OUTSIDE_MODEL


def test_a_section_can_be_handed_in(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    state = state_of(rotor, speed=40.0, mass=mass[1])
    clean, rough = (trim(rotor, state, section=Attached((drag, 0.0, 0.4))) for drag in (0.006, 0.012))
    assert power(rough).profile[0] > 1.5 * power(clean).profile[0]


def test_flapping_and_feathering_are_equivalent(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    # The same disc seen from the plane without feathering: put the shaft square to that plane and take all cyclic off,
    # and the disc flaps from the shaft by what was called flapping from that plane. Exact on a central hinge; any other
    # hub strains when the disc flaps from it, and so flaps a little elsewhere.
    state = state_of(rotor, speed=np.array([20.0, 40.0, 55.0]), mass=mass[1])
    flight = trim(rotor, state)
    bare = Controls(flight.t0, 0.0, 0.0, shaft_c=flight.disc_tilt - flight.t1s, shaft_s=flight.t1c)
    seen = held(rotor, state, bare)
    assert seen.solved.all()
    tolerance = {"teetering": 0.03, "articulated": 0.6, "hingeless": 1.5}[rotor.hub]
    assert np.degrees(seen.hub_b1c) == pytest.approx(np.degrees(flight.b1c), abs=tolerance)
    assert np.degrees(seen.hub_b1s) == pytest.approx(np.degrees(flight.b1s), abs=tolerance)
    assert (flight.b1c < 0.0).all()  # blown back from the plane of no feathering


def test_the_thrust_leans_with_the_disc(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    # Hover, cyclic put in either way: the in-plane force points where the disc leans, and is the thrust's share of it.
    # The disc up over the tail leans the thrust forward (against H); up at psi = 90, away from there (against Y).
    state = state_of(rotor, speed=0.0, mass=mass[1])
    level = Controls.of(trim(rotor, state))
    one = held(rotor, state, replace(level, t1c=np.array([0.02])))
    other = held(rotor, state, replace(level, t1s=np.array([0.02])))
    # Where the hub holds a moment, one side lifts more, and its lift leans back with the inflow there: the rest.
    rest = {"teetering": 0.12, "articulated": 0.12, "hingeless": 0.5}[rotor.hub]
    for flight in (one, other):
        assert flight.ch[0] == pytest.approx(-flight.ct[0] * flight.hub_b1c[0], abs=rest * 0.02 * flight.ct[0])
        assert flight.cy[0] == pytest.approx(-flight.ct[0] * flight.hub_b1s[0], abs=rest * 0.02 * flight.ct[0])
    # A quarter turn of the cyclic is a quarter turn of everything.
    assert other.hub_b1c[0] == pytest.approx(-one.hub_b1s[0], abs=1e-9)
    assert other.ch[0] == pytest.approx(-one.cy[0], abs=1e-9)
    assert other.cy[0] == pytest.approx(one.ch[0], abs=1e-9)
