"""Curves for the stall-boundary exhibit: the manual's VNE, the equivalent VNE at a few banks, and the onset band."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from enum import StrEnum
from typing import Final

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope import region
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.equivalent import equivalent_vnes
from briefkit.envelope.spread import quick_onset_bands
from briefkit.errors import OutsideLimits, Reason

Floats = NDArray[np.float64]
Reasons = NDArray[np.object_]

CHART_POINTS: Final = 61
BAND_POINTS: Final = 13


class Against(StrEnum):
    """What the boundary is drawn against."""

    ALTITUDE = "pressure altitude"
    MASS = "mass"


@dataclass(frozen=True, eq=False)
class EquivalentCurve:
    """The equivalent VNE at one bank (n,), in the type's unit; NaN with a reason where refused."""

    bank_deg: float
    ias: Floats
    reason: Reasons


@dataclass(frozen=True, eq=False)
class Boundary:
    """Speeds against height or mass, in the units of the type's manual, indicated.

    `x` and `vne` are (n,); the onset arrays are (m,) over `onset_x`, at the condition's own load factor and rotor
    speed; NaN where there is no such indicated speed.
    """

    against: Against
    x: Floats
    x_label: str
    x_unit: str
    speed_unit: str
    vne: Floats
    equivalent: tuple[EquivalentCurve, ...]
    onset_x: Floats
    onset_lower: Floats
    onset_central: Floats
    onset_upper: Floats


def boundary(
    aircraft: Aircraft,
    condition: Condition,
    against: str = "pressure altitude",
    banks_deg: tuple[float, ...] = (0.0, 15.0, 20.0, 25.0, 30.0),
) -> Boundary:
    """The curves around one condition, over every permitted value of `against` ("pressure altitude" or "mass").

    Raises `ValueError` for another `against`; `OutsideLimits` where the condition leaves nothing to draw.
    """
    over = Against(against)
    values = _permitted(aircraft, condition, over, CHART_POINTS)
    many = _along(condition, over, values)
    level = replace(many, load_factor=np.ones(len(many)), rotor_speed=np.ones(len(many)))
    curves = []
    for bank in banks_deg:
        turning = replace(many, load_factor=np.full(len(many), 1.0 / math.cos(math.radians(bank))))
        answers = equivalent_vnes(aircraft, turning)
        curves.append(EquivalentCurve(bank, answers.ias, answers.reason))
    sparse = _permitted(aircraft, condition, over, BAND_POINTS)
    band = quick_onset_bands(aircraft, _along(condition, over, sparse))
    quantity, unit, label = _axis(aircraft, over)
    speed = aircraft.units.speed
    return Boundary(
        against=over,
        x=units.from_si(values, quantity, unit),
        x_label=label,
        x_unit=unit,
        speed_unit=speed,
        vne=equivalent_vnes(aircraft, level).vne,
        equivalent=tuple(curves),
        onset_x=units.from_si(sparse, quantity, unit),
        onset_lower=units.from_si(band.lower, "speed", speed),
        onset_central=units.from_si(band.central, "speed", speed),
        onset_upper=units.from_si(band.upper, "speed", speed),
    )


def _axis(aircraft: Aircraft, over: Against) -> tuple[str, str, str]:
    if over is Against.MASS:
        return "mass", aircraft.units.mass, "Mass"
    return "height", aircraft.units.height, "Pressure altitude"


def _permitted(aircraft: Aircraft, condition: Condition, over: Against, count: int) -> Floats:
    """Evenly spaced permitted values [m or kg], ends included."""
    if over is Against.MASS:
        return np.linspace(aircraft.limits.min_mass.value, aircraft.limits.max_mass.value, count)
    top = float(region.top_of(aircraft, condition.oat))
    if not math.isfinite(top):
        low, high = (units.show(t, "temperature", "°C") for t in region.temperature_range(aircraft))
        oat = condition.oat - units.ZERO_CELSIUS
        raise OutsideLimits(
            "outside air temperature", oat, "°C", f"{low} to {high}", aircraft.limits.source, Reason.OUTSIDE_LIMITS
        )
    return np.linspace(aircraft.vne.heights[0], top, count)


def _along(condition: Condition, over: Against, values: Floats) -> Conditions:
    one = Conditions.of(condition)
    name = "mass" if over is Against.MASS else "pressure_altitude"
    return replace(one.repeat(len(values)), **{name: values})
