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
from briefkit.envelope.onset import onset_speed, tip_angles
from briefkit.envelope.onset_build import TARGETS
from briefkit.envelope.solution import rotor_of
from briefkit.envelope.speeds import indicated_of
from briefkit.envelope.spread import OnsetBands, onset_bands, quick_onset_bands
from briefkit.errors import OutsideLimits, Reason

Floats = NDArray[np.float64]
Reasons = NDArray[np.object_]

CHART_POINTS: Final = 61
BAND_POINTS: Final = 13
_STEEPEST: Final = math.radians(60.0)
_STRONGEST: Final = 10.0  # m/s of rising air


class Against(StrEnum):
    """What the boundary is drawn against."""

    ALTITUDE = "pressure altitude"
    MASS = "mass"
    ROTOR_SPEED = "rotor speed"
    BANK = "bank"
    GUST = "gust"


@dataclass(frozen=True, eq=False)
class EquivalentCurve:
    """The equivalent VNE at one bank (n,), in the type's unit; NaN with a reason where refused.

    `bank_deg` is None where the boundary is drawn against the bank itself.
    """

    bank_deg: float | None
    ias: Floats
    reason: Reasons


@dataclass(frozen=True, eq=False)
class Boundary:
    """Speeds against one quantity, in the units of the type's manual, indicated.

    `x` and `vne` are (n,); the onset arrays are (m,) over `onset_x`, at the condition's own load factor and rotor
    speed where these are not what is varied; NaN where there is no such indicated speed. Against a gust there is no
    equivalent VNE: a gust's angle at the slow tip is larger than any load factor shows, so only the onset is drawn.
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
    """The curves around one condition, over every permitted value of `against`.

    "pressure altitude", "mass", "rotor speed" within the power-on range, "bank" to the manual's limit or 60 degrees,
    "gust" to 10 m/s of rising air.

    Raises `ValueError` for another `against`; `OutsideLimits` where the condition leaves nothing to draw.
    """
    over = Against(against)
    values = _permitted(aircraft, condition, over, CHART_POINTS)
    many = _along(condition, over, values)
    level = replace(many, load_factor=np.ones(len(many)), rotor_speed=np.ones(len(many)), climb=np.zeros(len(many)))
    sparse = _permitted(aircraft, condition, over, BAND_POINTS)
    band = _band(aircraft, condition, over, sparse)
    quantity, unit, label = _axis(aircraft, over)
    speed = aircraft.units.speed
    return Boundary(
        against=over,
        x=units.from_si(values, quantity, unit),
        x_label=label,
        x_unit=unit,
        speed_unit=speed,
        vne=equivalent_vnes(aircraft, level, upper=False).vne,
        equivalent=_curves(aircraft, many, over, banks_deg),
        onset_x=units.from_si(sparse, quantity, unit),
        onset_lower=units.from_si(band.lower, "speed", speed),
        onset_central=units.from_si(band.central, "speed", speed),
        onset_upper=units.from_si(band.upper, "speed", speed),
    )


def _curves(
    aircraft: Aircraft, many: Conditions, over: Against, banks_deg: tuple[float, ...]
) -> tuple[EquivalentCurve, ...]:
    if over is Against.GUST:
        return ()
    if over is Against.BANK:
        answers = equivalent_vnes(aircraft, many, upper=False)
        return (EquivalentCurve(None, answers.ias, answers.reason),)
    curves = []
    for bank in banks_deg:
        turning = replace(many, load_factor=np.full(len(many), 1.0 / math.cos(math.radians(bank))))
        answers = equivalent_vnes(aircraft, turning, upper=False)
        curves.append(EquivalentCurve(bank, answers.ias, answers.reason))
    return tuple(curves)


def _band(aircraft: Aircraft, condition: Condition, over: Against, values: Floats) -> OnsetBands:
    many = _along(condition, over, values)
    if over is not Against.GUST:
        return quick_onset_bands(aircraft, many)
    # The gust moves the middle; the spread is that of still air, which the gust hardly changes.
    still = onset_bands(aircraft, Conditions.of(condition))
    rotor = rotor_of(aircraft)
    curve = tip_angles(rotor, many)
    first, last = (
        indicated_of(aircraft.calibration, onset_speed(rotor, many, target, curve, values), many.pressure, many.oat)
        for target in TARGETS
    )
    below = still.central - still.lower
    above = np.sqrt((still.raises**2).sum(axis=1))
    foot, top = aircraft.calibration.lowest_indicated, aircraft.calibration.highest_indicated
    lower, upper = (np.where((end >= foot) & (end <= top), end, np.nan) for end in (first - below, last + above))
    return replace(still, lower=lower, central=first, upper=upper)


def _axis(aircraft: Aircraft, over: Against) -> tuple[str, str, str]:
    rising = "ft/min" if aircraft.units.height == "ft" else "m/s"
    return {
        Against.ALTITUDE: ("height", aircraft.units.height, "Pressure altitude"),
        Against.MASS: ("mass", aircraft.units.mass, "Mass"),
        Against.ROTOR_SPEED: ("ratio", "%", "Rotor speed"),
        Against.BANK: ("angle", "deg", "Bank"),
        Against.GUST: ("vertical speed", rising, "Air rising"),
    }[over]


def _permitted(aircraft: Aircraft, condition: Condition, over: Against, count: int) -> Floats:
    """Evenly spaced permitted values [m or kg], ends included."""
    if over is Against.MASS:
        return np.linspace(aircraft.limits.min_mass.value, aircraft.limits.max_mass.value, count)
    if over is Against.ROTOR_SPEED:
        slow, fast = (end.value for end in aircraft.limits.rotor_on)
        return np.linspace(slow, fast, count)
    if over is Against.BANK:
        limit = aircraft.limits.max_bank
        return np.linspace(0.0, _STEEPEST if limit is None else min(limit.value, _STEEPEST), count)
    if over is Against.GUST:
        return np.linspace(0.0, _STRONGEST, count)
    top = float(region.top_of(aircraft, condition.oat))
    if not math.isfinite(top):
        low, high = (units.show(t, "temperature", "°C") for t in region.temperature_range(aircraft))
        oat = condition.oat - units.ZERO_CELSIUS
        raise OutsideLimits(
            "outside air temperature", oat, "°C", f"{low} to {high}", aircraft.limits.source, Reason.OUTSIDE_LIMITS
        )
    return np.linspace(aircraft.vne.heights[0], top, count)


def _along(condition: Condition, over: Against, values: Floats) -> Conditions:
    many = Conditions.of(condition).repeat(len(values))
    if over is Against.GUST:
        return many
    if over is Against.BANK:
        return replace(many, load_factor=1.0 / np.cos(values))
    name = {Against.MASS: "mass", Against.ROTOR_SPEED: "rotor_speed"}.get(over, "pressure_altitude")
    return replace(many, **{name: values})
