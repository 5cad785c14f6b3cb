"""Power by integration over the disc, and the measures of stall at one state."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest

from briefkit.physics.inflow import induced_balance
from briefkit.physics.power import power
from briefkit.physics.rotor import Rotor, State
from briefkit.physics.section import Attached, Naca0012
from briefkit.physics.stall import LEAST_SPEED, stall_measures
from briefkit.physics.trim import trim

StateOf = Callable[..., State]
Masses = tuple[float, float]


@pytest.mark.parametrize("section", ["attached", "stalling"])
@pytest.mark.parametrize("inflow", ["white-blake", "uniform", "drees"])
def test_power_adds_up(rotor: Rotor, mass: Masses, section: str, inflow: str, state_of: StateOf) -> None:
    # Induced, profile, parasite and climb power are summed apart from torque; on random states they equal it to 1e-6.
    random = np.random.default_rng(3)
    count = 60
    speed = random.uniform(0.0, 65.0, count)
    state = state_of(
        rotor,
        speed=speed,
        mass=random.uniform(*mass, count),
        density=random.uniform(0.9, 1.3, count),
        load_factor=random.uniform(1.0, 1.2, count),
        climb_rate=random.uniform(0.0, 0.1, count) * speed,
    )
    flight = trim(rotor, state, section=section, inflow=inflow)
    assert flight.solved.sum() > 45
    spent = power(flight)
    parts = spent.induced + spent.profile + spent.parasite + spent.climb
    good = flight.solved
    assert np.abs(parts / spent.total - 1.0)[good].max() < 1e-6
    assert np.abs(spent.left_over / spent.total)[good].max() < 1e-6
    # Thrust by two routes: what the blades' elements give, and what the momentum of the inflow carries.
    free = flight.motion.induced
    carried = induced_balance(np.zeros(count), flight.mu, flight.motion.axial(flight.case), free)
    assert np.abs(carried / flight.ct - 1.0)[good].max() < 1e-6
    parasite = 0.5 * np.asarray(state.density) * speed**3 * rotor.drag_area
    np.testing.assert_allclose(spent.parasite[good], parasite[good], rtol=1e-12)


def test_hover_by_hand(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    # Momentum theory: induced power W^(3/2) / sqrt(2 rho A); profile with a constant drag coefficient
    # rho A Vt^3 sigma cd / 8, less the blade inside the cut-out and more for the inflow: 3 %.
    weight = mass[1] * 9.80665
    flight = trim(rotor, state_of(rotor, speed=0.0, mass=mass[1]), section=Attached((0.010, 0.0, 0.0)))
    spent = power(flight)
    assert spent.induced[0] == pytest.approx(weight**1.5 / np.sqrt(2.0 * 1.225 * rotor.disc_area), rel=1e-6)
    simple = 1.225 * rotor.disc_area * rotor.tip_speed**3 * rotor.solidity * 0.010 / 8.0
    assert spent.profile[0] == pytest.approx(simple, rel=0.03)
    assert spent.figure_of_merit[0] == pytest.approx(spent.induced[0] / spent.total[0], rel=1e-9)
    assert 0.6 < spent.figure_of_merit[0] < 0.85
    # Higher harmonics of rounding apart, hover is the same all round.
    assert flight.ch[0] == pytest.approx(0.0, abs=1e-12)


def test_figure_of_merit_is_of_hover_only(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    spent = power(trim(rotor, state_of(rotor, speed=np.array([0.0, 20.0, np.nan]), mass=mass[1])))
    assert np.isfinite(spent.figure_of_merit[0])
    assert np.isnan(spent.figure_of_merit[1:]).all()
    assert np.isnan(spent.total[2])
    assert np.isnan(spent.parasite[2])


def test_power_curve_has_the_known_shape(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    spent = power(trim(rotor, state_of(rotor, speed=np.linspace(0.0, 60.0, 25), mass=mass[1])))
    assert (np.diff(spent.induced) < 0.0).all()
    assert (np.diff(spent.profile)[4:] > 0.0).all()
    least = spent.total.argmin()
    assert 8 < least < 20


def test_ground_and_hover_power(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    heights = rotor.radius * np.array([0.5, 1.0, 2.0, np.inf])
    spent = power(trim(rotor, state_of(rotor, speed=0.0, mass=mass[1], height=heights)))
    assert (np.diff(spent.total) > 0.0).all()


def test_stall_measures_at_one_state(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    flight = trim(rotor, state_of(rotor, speed=np.array([20.0, 45.0, 60.0]), mass=mass[1], density=0.95))
    assert flight.solved.all()
    measured = stall_measures(flight)
    np.testing.assert_array_equal(measured.tip_angle, flight.tip_angle)
    np.testing.assert_array_equal(measured.blade_loading, flight.ct_sigma)
    assert (np.diff(measured.excess) > 0.0).all()
    assert (np.diff(measured.reversed_share) >= 0.0).all()
    assert ((measured.stalled_share >= 0.0) & (measured.stalled_share < 0.5)).all()
    # The place named is where the angle is that far over the section's stall angle.
    disc = flight.elements(measured.radii, measured.azimuths)
    for member in range(3):
        ring = int(np.flatnonzero(measured.radii == measured.excess_radius[member])[0])
        sector = int(np.flatnonzero(measured.azimuths == measured.excess_azimuth[member])[0])
        own = disc.angle[member, ring, sector] - Naca0012().stall_angle(disc.mach[member, ring, sector])
        assert own == pytest.approx(measured.excess[member], abs=1e-12)
        assert measured.over_stall.shape == (3, measured.radii.size, measured.azimuths.size)
        slow = disc.speed[member] < LEAST_SPEED * rotor.tip_speed
        np.testing.assert_array_equal(np.isnan(measured.over_stall[member]), slow)


def test_reversed_share_is_the_reversed_circle(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    # r + mu sin(psi) < 0 is a circle of diameter mu; what of it lies outside the cut-out, by fine counting.
    flight = trim(rotor, state_of(rotor, speed=0.35 * rotor.tip_speed, mass=mass[1], sound_speed=400.0))
    share = stall_measures(flight, grid=(360, 200)).reversed_share[0]
    mu, inner = flight.mu[0], rotor.root_cutout
    r = np.sqrt(np.linspace(inner**2, 1.0, 200_001))
    across = np.arccos(np.clip(r / mu, -1.0, 1.0)) / np.pi * (r < mu)
    assert share == pytest.approx(across.mean(), abs=2e-3)


def test_stalled_share_grows_past_stall(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    flight = trim(rotor, state_of(rotor, speed=55.0, mass=mass[1], load_factor=np.array([1.0, 1.3, 1.6, 1.8])))
    share = stall_measures(flight).stalled_share
    good = flight.solved
    assert good.sum() >= 3
    assert (np.diff(share[good]) >= 0.0).all()
    assert share[good][-1] > share[good][0]


def test_refused_members_have_no_measures(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    measured = stall_measures(trim(rotor, state_of(rotor, speed=np.array([30.0, np.nan]), mass=mass[1])))
    for part in ("tip_angle", "excess", "excess_radius", "excess_azimuth", "stalled_share", "reversed_share"):
        values = getattr(measured, part)
        assert np.isfinite(values[0]), part
        assert np.isnan(values[1]), part


def test_a_batch_of_none_has_measures_of_none(rotor: Rotor, mass: Masses, state_of: StateOf) -> None:
    measures = stall_measures(trim(rotor, state_of(rotor, speed=np.zeros(0), mass=mass[0])))
    assert measures.excess.shape == measures.stalled_share.shape == (0,)
