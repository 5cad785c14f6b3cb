"""Calibrated and true airspeed, compressible and subsonic.

Calibrated airspeed is the speed that gives the same impact pressure at sea level on the standard day; the true one
follows from that impact pressure in the air at hand (isentropic relation for a ratio of specific heats of 1.4).
The step from indicated to calibrated is a table of the aircraft's manual and no business of this room.
"""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from briefkit.errors import OutsideLimits, Reason
from briefkit.physics.atmosphere import speed_of_sound
from briefkit.units import GAS_CONSTANT, HEAT_RATIO, SEA_LEVEL_PRESSURE, SEA_LEVEL_TEMPERATURE, Speed, SpeedKind

Array = NDArray[np.float64]

_POWER: Final = HEAT_RATIO / (HEAT_RATIO - 1.0)  # 3.5
_HALF: Final = (HEAT_RATIO - 1.0) / 2.0  # 0.2
_SEA_LEVEL_SOUND: Final = float(np.sqrt(HEAT_RATIO * GAS_CONSTANT * SEA_LEVEL_TEMPERATURE))


def true_from_calibrated(cas: ArrayLike, pressure: ArrayLike, temperature: ArrayLike) -> Array:
    """True airspeed [m/s] from calibrated [m/s], static pressure [Pa] and temperature [K]; broadcasts.

    Valid from standing still to Mach 1 on both scales; raises `OutsideLimits` outside.
    """
    return _rescale(cas, SEA_LEVEL_PRESSURE, _SEA_LEVEL_SOUND, pressure, speed_of_sound(temperature), "calibrated")


def calibrated_from_true(tas: ArrayLike, pressure: ArrayLike, temperature: ArrayLike) -> Array:
    """Calibrated airspeed [m/s] from true [m/s], the inverse of `true_from_calibrated`; same range, same refusal."""
    return _rescale(tas, pressure, speed_of_sound(temperature), SEA_LEVEL_PRESSURE, _SEA_LEVEL_SOUND, "true")


def to_true(speed: Speed, pressure: float, temperature: float) -> Speed:
    """The true airspeed of a calibrated one; `MixedSpeeds` for any other kind, else as `true_from_calibrated`."""
    cas = speed.of_kind(SpeedKind.CALIBRATED).value
    return Speed(float(true_from_calibrated(cas, pressure, temperature)), SpeedKind.TRUE, speed.unit)


def to_calibrated(speed: Speed, pressure: float, temperature: float) -> Speed:
    """The calibrated airspeed of a true one; `MixedSpeeds` for any other kind, else as `calibrated_from_true`."""
    tas = speed.of_kind(SpeedKind.TRUE).value
    return Speed(float(calibrated_from_true(tas, pressure, temperature)), SpeedKind.CALIBRATED, speed.unit)


def _rescale(
    speed: ArrayLike, pressure: ArrayLike, sound: ArrayLike, new_pressure: ArrayLike, new_sound: ArrayLike, kind: str
) -> Array:
    """The speed with the same impact pressure in other air. expm1 and log1p keep small speeds exact."""
    values = np.asarray(speed, dtype=np.float64)
    mach = values / np.asarray(sound)
    good = (mach >= 0.0) & (mach < 1.0)
    impact = np.expm1(_POWER * np.log1p(_HALF * np.where(good, mach, 0.0) ** 2)) * np.asarray(pressure)
    new_mach = np.sqrt(np.expm1(np.log1p(impact / np.asarray(new_pressure)) / _POWER) / _HALF)
    good = good & (new_mach < 1.0)
    if not good.all():
        worst = float(np.atleast_1d(np.broadcast_to(values, good.shape))[~np.atleast_1d(good)][0])
        permitted = "from zero to Mach 1, calibrated and true"
        raise OutsideLimits(f"{kind} airspeed", str(worst), "m/s", permitted, "subsonic formula", Reason.OUTSIDE_MODEL)
    return np.asarray(new_mach * np.asarray(new_sound), dtype=np.float64)
