"""Calibrated and true airspeed."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.optimize import brentq

from briefkit.errors import OutsideLimits
from briefkit.physics.airspeed import calibrated_from_true, true_from_calibrated
from briefkit.physics.atmosphere import density, pressure_at, temperature_at
from briefkit.units import FOOT, KNOT, ZERO_CELSIUS


@pytest.mark.parametrize(
    ("cas", "height", "celsius", "expected"),
    [(100.0, 5000.0, None, 107.67), (120.0, 10_000.0, None, 139.38), (120.0, 6000.0, 30.0, 137.36)],
)
def test_worked_values(cas: float, height: float, celsius: float | None, expected: float) -> None:
    # Computed from the definition (impact pressure of subsonic compressible flow, heat ratio 1.4): 0.05 kt.
    temperature = temperature_at(height * FOOT) if celsius is None else ZERO_CELSIUS + celsius
    tas = true_from_calibrated(cas * KNOT, pressure_at(height * FOOT), temperature)
    assert tas / KNOT == pytest.approx(expected, abs=0.05)


def test_against_the_definition_solved_by_scipy() -> None:
    # Impact pressure from the integral of dp = -rho V dV along an isentrope, as the ratio of stagnation to static.
    def impact(speed: float, pressure: float, rho: float) -> float:
        return pressure * ((1.0 + speed**2 * rho / (7.0 * pressure)) ** 3.5 - 1.0)

    pressure, temperature = float(pressure_at(3000.0)), 303.0
    rho = float(density(pressure, temperature))
    at_sea_level = float(density(101_325.0, 288.15))
    for cas in (20.0, 60.0, 150.0):
        wanted = impact(cas, 101_325.0, at_sea_level)
        tas = brentq(lambda v, wanted=wanted: impact(v, pressure, rho) - wanted, 1.0, 300.0, xtol=1e-10)
        assert true_from_calibrated(cas, pressure, temperature) == pytest.approx(tas, abs=1e-7)


def test_there_and_back_to_a_thousandth_of_a_knot() -> None:
    speed = np.linspace(0.0, 180.0, 91)[:, None] * KNOT
    pressure, temperature = (
        pressure_at(np.array([-500.0, 0.0, 2500.0, 6000.0])),
        np.array([300.0, 288.15, 310.0, 230.0]),
    )
    tas = true_from_calibrated(speed, pressure, temperature)
    assert tas.shape == (91, 4)
    np.testing.assert_allclose(
        calibrated_from_true(tas, pressure, temperature) / KNOT, speed / KNOT + 0.0 * tas, atol=1e-6
    )


def test_the_same_at_sea_level_on_the_standard_day() -> None:
    speed = np.array([0.0, 1e-6, 30.0, 100.0])
    np.testing.assert_allclose(true_from_calibrated(speed, 101_325.0, 288.15), speed, rtol=1e-12, atol=0.0)


@pytest.mark.parametrize("speed", [-1.0, 341.0, np.nan])
def test_outside_is_refused(speed: float) -> None:
    with pytest.raises(OutsideLimits, match="calibrated airspeed"):
        true_from_calibrated(speed, 101_325.0, 288.15)
    with pytest.raises(OutsideLimits, match="true airspeed"):
        calibrated_from_true(np.array([50.0, speed]), 101_325.0, 288.15)


def test_subsonic_here_but_not_true_is_refused() -> None:
    with pytest.raises(OutsideLimits, match="Mach 1"):
        true_from_calibrated(300.0, pressure_at(11_000.0), temperature_at(11_000.0))
