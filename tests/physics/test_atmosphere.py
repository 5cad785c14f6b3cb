"""The standard atmosphere against its standard, two general-purpose packages, and a handbook's density altitudes."""

from __future__ import annotations

from collections.abc import Callable

import ambiance
import fluids
import numpy as np
import pytest

from briefkit.errors import OutsideLimits, Reason
from briefkit.physics.atmosphere import (
    density,
    density_altitude,
    pressure_altitude_from_qnh,
    pressure_altitude_of,
    pressure_at,
    speed_of_sound,
    temperature_at,
)
from briefkit.units import FOOT, INCH_OF_MERCURY, ZERO_CELSIUS

Table = Callable[[str], list[dict[str, str]]]


def test_standard_table(table: Table) -> None:
    rows = table("isa_geopotential.csv")
    height = np.array([float(row["H_m"]) for row in rows])
    pressure, temperature = pressure_at(height), temperature_at(height)
    for column, computed in (
        ("T_K", temperature),
        ("p_Pa", pressure),
        ("rho_kgm3", density(pressure, temperature)),
        ("a_mps", speed_of_sound(temperature)),
    ):
        np.testing.assert_allclose(computed, [float(row[column]) for row in rows], rtol=1e-5, err_msg=column)


def test_published_tropopause_row() -> None:
    # ICAO Doc 7488 at 11 km geopotential; half the last printed digit.
    pressure, temperature = pressure_at(11_000.0), temperature_at(11_000.0)
    assert temperature == pytest.approx(216.650, abs=5e-4)
    assert pressure == pytest.approx(22632.0, abs=0.1)
    assert density(pressure, temperature) == pytest.approx(0.363918, abs=5e-7)
    assert speed_of_sound(temperature) == pytest.approx(295.069, abs=6e-4)


def test_against_two_packages() -> None:
    # Both take geometric height; the 1976 standard's geopotential height is r h / (r + h) with r = 6,356,766 m.
    geometric = np.linspace(-990.0, 11_000.0, 60)
    geopotential = 6_356_766.0 * geometric / (6_356_766.0 + geometric)
    pressure, temperature = pressure_at(geopotential), temperature_at(geopotential)
    one = ambiance.Atmosphere(geometric)
    np.testing.assert_allclose(pressure, one.pressure, rtol=2e-5)
    np.testing.assert_allclose(temperature, one.temperature, rtol=2e-5)
    np.testing.assert_allclose(density(pressure, temperature), one.density, rtol=2e-5)
    np.testing.assert_allclose(speed_of_sound(temperature), one.speed_of_sound, rtol=2e-5)
    other = [fluids.ATMOSPHERE_1976(h) for h in geometric]
    np.testing.assert_allclose(pressure, [air.P for air in other], rtol=2e-5)
    np.testing.assert_allclose(density(pressure, temperature), [air.rho for air in other], rtol=2e-5)


@pytest.mark.parametrize(("celsius", "printed"), [(5.0, 5048.0), (30.0, 7855.0), (-25.0, 1232.0)])
def test_handbook_density_altitude(celsius: float, printed: float) -> None:
    # FAA-H-8083-25, density altitude at a pressure altitude of 5,048 ft (transcribed): 10 ft.
    computed = density_altitude(density(pressure_at(5048.0 * FOOT), ZERO_CELSIUS + celsius)) / FOOT
    assert computed == pytest.approx(printed, abs=10.0)


def test_handbook_field_under_a_setting() -> None:
    # FAA-H-8083-25: field at 5,883 ft, 30.10 inHg, 70 F: pressure altitude 5,718 ft, density altitude about 7,700.
    height = pressure_altitude_from_qnh(5883.0 * FOOT, 30.10 * INCH_OF_MERCURY)
    assert height / FOOT == pytest.approx(5718.0, abs=2.0)
    warm = density(pressure_at(height), ZERO_CELSIUS + (70.0 - 32.0) / 1.8)
    assert density_altitude(warm) / FOOT == pytest.approx(7700.0, abs=50.0)


@pytest.mark.parametrize(
    ("elevation", "qnh", "expected"),
    [(8640.0, 990.0, 9281.0), (14.0, 985.0, 794.0), (5883.0, 1013.25, 5883.0)],
)
def test_low_pressure_raises_the_pressure_altitude(elevation: float, qnh: float, expected: float) -> None:
    # The demonstration bases on their deepest days, by hand from the altimeter-setting relation; the last by identity.
    assert pressure_altitude_from_qnh(elevation * FOOT, qnh * 100.0) / FOOT == pytest.approx(expected, abs=1.0)


def test_heights_go_there_and_back() -> None:
    height = np.linspace(-1000.0, 11_000.0, 37)
    np.testing.assert_allclose(pressure_altitude_of(pressure_at(height)), height, atol=1e-7)
    standard = density(pressure_at(height), temperature_at(height))
    np.testing.assert_allclose(density_altitude(standard), height, atol=1e-7)


def test_a_cold_day_lies_below_the_lowest_pressure_altitude() -> None:
    # Sea level at -43 C is denser than the air at -1,000 m: still a density altitude, down to where Doc 7488 begins.
    assert density_altitude(density(101_325.0, ZERO_CELSIUS - 43.0)) < -2000.0


@pytest.mark.parametrize("height", [-1000.1, 11_000.1, np.nan, np.inf])
def test_outside_is_refused(height: float) -> None:
    with pytest.raises(OutsideLimits, match="pressure altitude") as caught:
        pressure_at(np.array([0.0, height]))
    assert caught.value.reason is Reason.OUTSIDE_MODEL
    with pytest.raises(OutsideLimits, match="-1,000 to 11,000 m"):
        temperature_at(height)


def test_impossible_air_is_refused() -> None:
    with pytest.raises(OutsideLimits, match="temperature"):
        density(101_325.0, 0.0)
    with pytest.raises(OutsideLimits, match="pressure"):
        pressure_altitude_of(-1.0)
    with pytest.raises(OutsideLimits, match="density altitude"):
        density_altitude(0.2)
