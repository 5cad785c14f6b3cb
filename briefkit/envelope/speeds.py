"""Indicated to true airspeed and back, through the aircraft's own calibration; no speed where there is none."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from briefkit.aircraft.model import Calibration
from briefkit.physics import airspeed
from briefkit.units import Speed

Floats = NDArray[np.float64]


def true_of(calibration: Calibration, indicated: Floats | float, pressure: Floats, oat: Floats | float) -> Floats:
    """True airspeed [m/s] of an indicated one [m/s] at pressure [Pa] and temperature [K]; broadcasts.

    NaN where the indicated speed is NaN or outside the calibration: callers give the reason.
    """
    calibrated = calibration.to_calibrated(indicated)
    known = np.isfinite(calibrated)
    return np.where(known, airspeed.true_from_calibrated(np.where(known, calibrated, 0.0), pressure, oat), np.nan)


def indicated_of(calibration: Calibration, true: Floats | float, pressure: Floats, oat: Floats | float) -> Floats:
    """Indicated airspeed [m/s] of a true one [m/s], the inverse of `true_of`; NaN likewise."""
    true = np.asarray(true, dtype=float)
    known = np.isfinite(true)
    calibrated = airspeed.calibrated_from_true(np.where(known, true, 0.0), pressure, oat)
    return calibration.to_indicated(np.where(known, calibrated, np.nan))


def true_speed(calibration: Calibration, speed: Speed, pressure: float, oat: float) -> Speed:
    """The true airspeed of an indicated one, as `true_of` for a single speed that carries its kind.

    Raises `OutsideCalibration`, and `MixedSpeeds` for a speed of another kind.
    """
    return airspeed.to_true(calibration.calibrated_of(speed), pressure, oat)


def indicated_speed(calibration: Calibration, speed: Speed, pressure: float, oat: float) -> Speed:
    """The indicated airspeed of a true one, the inverse of `true_speed`; raises likewise."""
    return calibration.indicated_of(airspeed.to_calibrated(speed, pressure, oat))
