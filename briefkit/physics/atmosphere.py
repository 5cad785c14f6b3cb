"""The standard atmosphere, and the heights and densities read off it.

ISO 2533:1975 (the ICAO standard atmosphere, Doc 7488), troposphere only: temperature falls 6.5 K per kilometre of
geopotential height. Dry air, a perfect gas. Every function takes floats or arrays, broadcasts, and returns arrays.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from briefkit.errors import OutsideLimits, Reason
from briefkit.units import (
    GAS_CONSTANT,
    GRAVITY,
    HEAT_RATIO,
    LAPSE_RATE,
    SEA_LEVEL_PRESSURE,
    SEA_LEVEL_TEMPERATURE,
    TROPOPAUSE,
)

Array = NDArray[np.float64]

LOWEST: Final = -1000.0  # m; the lowest field on earth lies at -430 m, a deep low pressure adds 400 m the other way
LOWEST_DENSITY_ALTITUDE: Final = -5000.0  # m; where the tables of Doc 7488 begin (-43 C at sea level is -2,200 m)

_EXPONENT: Final = GRAVITY / (GAS_CONSTANT * LAPSE_RATE)  # 5.25588
_SLACK: Final = 1e-6  # m; a height that is the limit itself but for rounding is inside


def pressure_at(pressure_altitude: ArrayLike) -> Array:
    """Pressure [Pa] at a pressure altitude [m], -1,000 to 11,000 m; ISO 2533 equation 12.

    Raises `OutsideLimits` if any height lies outside (or is not a number).
    """
    height = _inside(pressure_altitude, "pressure altitude", LOWEST)
    return SEA_LEVEL_PRESSURE * (1.0 - LAPSE_RATE * height / SEA_LEVEL_TEMPERATURE) ** _EXPONENT


def temperature_at(pressure_altitude: ArrayLike) -> Array:
    """Standard temperature [K] at a pressure altitude [m], -1,000 to 11,000 m; raises `OutsideLimits` outside."""
    return SEA_LEVEL_TEMPERATURE - LAPSE_RATE * _inside(pressure_altitude, "pressure altitude", LOWEST)


def pressure_altitude_of(pressure: ArrayLike) -> Array:
    """Pressure altitude [m] of a pressure [Pa], the inverse of `pressure_at`; same range, same refusal."""
    ratio = _positive(pressure, "pressure", "Pa") / SEA_LEVEL_PRESSURE
    height = SEA_LEVEL_TEMPERATURE / LAPSE_RATE * (1.0 - ratio ** (1.0 / _EXPONENT))
    return _inside(height, "pressure altitude", LOWEST)


def density(pressure: ArrayLike, temperature: ArrayLike) -> Array:
    """Density [kg/m3] of dry air from pressure [Pa] and temperature [K], both above zero; perfect gas."""
    absolute = _positive(temperature, "temperature", "K")
    return _positive(pressure, "pressure", "Pa") / (GAS_CONSTANT * absolute)


def speed_of_sound(temperature: ArrayLike) -> Array:
    """Speed of sound [m/s] in dry air at a temperature [K] above zero."""
    return np.sqrt(HEAT_RATIO * GAS_CONSTANT * _positive(temperature, "temperature", "K"))


def density_altitude(density: ArrayLike) -> Array:
    """Height [m] in the standard atmosphere with this density [kg/m3]; -5,000 to 11,000 m.

    Raises `OutsideLimits` outside.
    """
    sea_level = SEA_LEVEL_PRESSURE / (GAS_CONSTANT * SEA_LEVEL_TEMPERATURE)
    ratio = _positive(density, "density", "kg/m3") / sea_level
    height = SEA_LEVEL_TEMPERATURE / LAPSE_RATE * (1.0 - ratio ** (1.0 / (_EXPONENT - 1.0)))
    return _inside(height, "density altitude", LOWEST_DENSITY_ALTITUDE)


def pressure_altitude_from_qnh(elevation: ArrayLike, qnh: ArrayLike) -> Array:
    """Pressure altitude [m] of a field at an elevation [m] under a QNH [Pa].

    QNH is the setting at which an altimeter on the field reads its elevation, and an altimeter's scale is turned by the
    pressure altitude of its setting (the altimeter-setting relation p^n + p0^n (L/T0) h = QNH^n, n = RL/g): so it is
    the elevation plus the pressure altitude of the QNH itself. Valid where QNH is 85,000 to 108,500 Pa (the range of
    recorded sea-level pressures; what is typed is held to it where it is read). Elevation and answer must lie within
    -1,000 to 11,000 m, else `OutsideLimits`.
    """
    height = _inside(elevation, "elevation", LOWEST)
    ratio = _positive(qnh, "QNH", "Pa") / SEA_LEVEL_PRESSURE
    turned = SEA_LEVEL_TEMPERATURE / LAPSE_RATE * (1.0 - ratio ** (1.0 / _EXPONENT))
    return _inside(height + turned, "pressure altitude", LOWEST)


def _inside(height: ArrayLike, quantity: str, lowest: float) -> Array:
    values = np.asarray(height, dtype=np.float64)
    good = (values >= lowest - _SLACK) & (values <= TROPOPAUSE + _SLACK)
    if not good.all():
        _refuse(values, good, quantity, "m", f"{lowest:,.0f} to {TROPOPAUSE:,.0f} m")
    return values


def _positive(number: ArrayLike, quantity: str, unit: str) -> Array:
    values = np.asarray(number, dtype=np.float64)
    good = (values > 0.0) & np.isfinite(values)
    if not good.all():
        _refuse(values, good, quantity, unit, "above zero")
    return values


def _refuse(values: Array, good: NDArray[np.bool_], quantity: str, unit: str, permitted: str) -> None:
    worst = float(np.atleast_1d(values)[~np.atleast_1d(good)][0])
    raise OutsideLimits(quantity, str(worst), unit, permitted, "standard atmosphere", Reason.OUTSIDE_MODEL)
