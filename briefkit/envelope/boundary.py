"""Curves for the stall-boundary exhibit: the manual's VNE, the equivalent VNE at a few banks, and the onset band."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from enum import StrEnum
from typing import Final

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.chart import Axis
from briefkit.aircraft.model import Aircraft
from briefkit.envelope import chart_steps, region
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.equivalent import equivalent_vnes
from briefkit.envelope.onset import TipAngles, onset_speed, tip_angles
from briefkit.envelope.onset_build import TARGETS
from briefkit.envelope.partings import ends, partings
from briefkit.envelope.solution import rotor_of
from briefkit.envelope.speeds import indicated_of
from briefkit.envelope.spread import OnsetBands, quick_onset_bands
from briefkit.errors import OutsideLimits, Reason

Floats = NDArray[np.float64]
Reasons = NDArray[np.object_]

CHART_POINTS: Final = 61
BAND_POINTS: Final = 31
_STEEPEST: Final = math.radians(60.0)
_STRONGEST: Final = {"ft": 2000.0 * units.FOOT / 60.0, "m": 10.0}  # m/s of rising air: round in the type's own unit
_STEP: Final = 1e-6  # rad past a bank is past it
_JUMP: Final = 0.5  # in the type's unit: more from one point to the next is a step of the chart


class Against(StrEnum):
    """What the boundary is drawn against."""

    ALTITUDE = "pressure altitude"
    MASS = "mass"
    ROTOR_SPEED = "rotor speed"
    BANK = "bank"
    GUST = "gust"


_CHART_AXES: Final = {
    Against.ALTITUDE: Axis.HEIGHT,
    Against.MASS: Axis.MASS,
    Against.ROTOR_SPEED: Axis.ROTOR_SPEED,
}


class Margin(StrEnum):
    """How the onset band lies to VNE: its middle against half its own width (`envelope.margin` in arrays)."""

    ABOVE = "above VNE"
    UNDER = "under VNE"
    UNRESOLVED = "not resolved"
    NONE = "no figure"


@dataclass(frozen=True, eq=False)
class EquivalentCurve:
    """The equivalent VNE at one bank (n,), in the type's unit; NaN with a reason where refused.

    `bank_deg` is None where the boundary is drawn against the bank itself. `parts` are the places along x where it
    leaves the manual's VNE as x gets harder on the rotor, `meets` those where it comes back to it, `ends` those where
    it has no answer any more though x goes on: the last or first place that has one.
    """

    bank_deg: float | None
    ias: Floats
    reason: Reasons
    parts: tuple[float, ...] = ()
    meets: tuple[float, ...] = ()
    ends: tuple[float, ...] = ()


@dataclass(frozen=True, eq=False)
class Boundary:
    """Speeds against one quantity, in the units of the type's manual, indicated.

    `x` and `vne` are (n,), x rising and closer where the chart has its entries: the straight lines between lie nowhere
    above the chart. The onset arrays are (m,) over `onset_x`, at the condition's own load factor and rotor
    speed where these are not what is varied; NaN where there is no such indicated speed. Against a gust there is no
    equivalent VNE: a gust's angle at the slow tip is larger than any load factor shows, so only the onset is drawn.
    `calibrated` is the range of the airspeed calibration, None where the manual has none. `limited` says whether the
    ends of x are the manual's limits.
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
    calibrated: tuple[float, float] | None
    limited: bool

    def margin_at(self, x: float) -> Margin:
        """How the band lies to VNE at `x`. A middle nearer to VNE than the band's half-width is not resolved (G19); nor
        is one against a band whose upper end has no indicated speed, for its width is not known.
        """
        edges = (self.onset_lower, self.onset_central, self.onset_upper)
        lower, central, upper = (float(np.interp(x, self.onset_x, edge)) for edge in edges)
        vne = float(np.interp(x, self.x, self.vne))
        if not (math.isfinite(lower) and math.isfinite(vne)):
            return Margin.NONE
        half = max(central - lower, (upper - lower) / 2.0)
        if not (math.isfinite(central) and math.isfinite(upper)) or abs(central - vne) < half:
            return Margin.UNRESOLVED
        return Margin.ABOVE if central > vne else Margin.UNDER


def boundary(
    aircraft: Aircraft,
    condition: Condition,
    against: str = "pressure altitude",
    banks_deg: tuple[float, ...] = (0.0, 15.0, 20.0, 25.0, 30.0),
) -> Boundary:
    """The curves around one condition, over every permitted value of `against`.

    "pressure altitude", "mass", "rotor speed" within the power-on range, "bank" to the manual's limit or 60 degrees,
    "gust" to 10 m/s or 2,000 ft/min of rising air. Where the manual has a speed of its own for a turn no line lies
    above it, and against the bank the manual's line steps down to it.

    Raises `ValueError` for another `against`; `OutsideLimits` where the condition leaves nothing to draw.
    """
    over = Against(against)
    values = _places(aircraft, condition, over, banks_deg)
    quantity, unit, label = _axis(aircraft, over)
    x = np.asarray(units.from_si(values, quantity, unit))
    vne, curves = _curves(aircraft, _along(condition, over, values), over, banks_deg, x)
    foot, top = (
        float(units.from_si(end, "speed", aircraft.units.speed))
        for end in (aircraft.calibration.lowest_indicated, aircraft.calibration.highest_indicated)
    )
    nothing = np.empty(0)
    chart = Boundary(
        against=over,
        x=x,
        x_label=label,
        x_unit=unit,
        speed_unit=aircraft.units.speed,
        vne=vne,
        equivalent=curves,
        onset_x=nothing,
        onset_lower=nothing,
        onset_central=nothing,
        onset_upper=nothing,
        calibrated=(foot, top) if aircraft.calibration.in_manual else None,
        limited=over is not Against.GUST and (over is not Against.BANK or aircraft.limits.max_bank is not None),
    )
    return with_band(aircraft, condition, chart)


def with_band(aircraft: Aircraft, condition: Condition, chart: Boundary) -> Boundary:
    """The same chart curves with the onset band of another condition that shares them: one with another bank."""
    values = _permitted(aircraft, condition, chart.against, BAND_POINTS)
    band = _band(aircraft, condition, chart.against, values)
    quantity, unit, _ = _axis(aircraft, chart.against)
    lower, central, upper = (
        np.asarray(units.from_si(end, "speed", aircraft.units.speed)) for end in (band.lower, band.central, band.upper)
    )
    return replace(
        chart,
        onset_x=np.asarray(units.from_si(values, quantity, unit)),
        onset_lower=lower,
        onset_central=central,
        onset_upper=upper,
    )


def _places(aircraft: Aircraft, condition: Condition, over: Against, banks_deg: tuple[float, ...]) -> Floats:
    """Permitted values along the axis [SI], as many as it takes to draw what the chart says and nothing above it."""
    values = _permitted(aircraft, condition, over, CHART_POINTS)
    if over in _CHART_AXES:
        values = chart_steps.with_entries(aircraft.vne, _CHART_AXES[over], condition.oat, values)
    if over is Against.GUST or not chart_steps.steps(aircraft.vne):
        return values

    def lines(at: Floats) -> Floats:
        vne, curves = _curves(aircraft, _along(condition, over, at), over, banks_deg, at)
        return np.stack([vne, *(curve.ias for curve in curves)])

    return chart_steps.closer(values, lines, _JUMP)


def _curves(
    aircraft: Aircraft, many: Conditions, over: Against, banks_deg: tuple[float, ...], x: Floats
) -> tuple[Floats, tuple[EquivalentCurve, ...]]:
    """The manual's VNE and every curve, asked for in one batch: level first, then bank by bank.

    The manual's VNE is that at 100 %, but where its chart has rotor speeds: there it is that of the rotor as it turns.
    """
    banks: tuple[float | None, ...] = {Against.GUST: (), Against.BANK: (None,)}.get(over, banks_deg)
    count, lines = len(many), len(banks)
    wide = many.take(np.tile(np.arange(count), 1 + lines))
    load, rotor, climb = (array.copy() for array in (wide.load_factor, wide.rotor_speed, wide.climb))
    load[:count], climb[:count] = 1.0, 0.0
    if not aircraft.vne.rotor_speeds:
        rotor[:count] = 1.0
    for line, bank in enumerate(banks, start=1):
        if bank is not None:
            load[line * count : (line + 1) * count] = 1.0 / math.cos(math.radians(bank))
    answers = equivalent_vnes(aircraft, replace(wide, load_factor=load, rotor_speed=rotor, climb=climb), upper=False)
    vne = answers.vne[:count]
    curves, level = [], vne
    if over is Against.BANK:
        vne = own_in_a_turn(aircraft, vne, np.arccos(1.0 / many.load_factor))
    for line, bank in enumerate(banks, start=1):
        own = slice(line * count, (line + 1) * count)
        turning = np.full(count, math.radians(bank)) if bank is not None else np.arccos(1.0 / many.load_factor)
        ias = np.minimum(answers.ias[own], own_in_a_turn(aircraft, level, turning))
        parts, meets = partings(x, vne, ias, slower=over is Against.ROTOR_SPEED)
        curves.append(EquivalentCurve(bank, ias, answers.reason[own], parts, meets, ends(x, ias)))
    return vne, tuple(curves)


def own_in_a_turn(aircraft: Aircraft, vne: Floats, bank: Floats) -> Floats:
    """VNE in the type's unit, or what the manual itself permits in a turn of `bank` [rad] where it says so; (n,)."""
    unit, permitted = aircraft.units.speed, vne
    for own in aircraft.speeds:
        if own.applies != "bank":
            continue
        turning = bank > (_STEP if own.above_bank is None else own.above_bank + _STEP)
        if own.less_than_vne is not None:
            lower = vne - float(units.from_si(own.less_than_vne, "speed", unit))
            permitted = np.where(turning, np.minimum(permitted, lower), permitted)
        if own.speed is not None:
            said = float(units.from_si(own.speed.value, "speed", unit))
            permitted = np.where(turning, np.minimum(permitted, said), permitted)
    return permitted


def _band(aircraft: Aircraft, condition: Condition, over: Against, values: Floats) -> OnsetBands:
    if over is Against.GUST:
        return _gusty(aircraft, condition, values)
    return quick_onset_bands(aircraft, _along(condition, over, values))


def _gusty(aircraft: Aircraft, condition: Condition, values: Floats) -> OnsetBands:
    """The gust moves the middle; the spread is that of still air, which the gust hardly changes."""
    one, many, rotor = Conditions.of(condition), Conditions.of(condition).repeat(len(values)), rotor_of(aircraft)
    still, calm = quick_onset_bands(aircraft, one), tip_angles(rotor, one)
    # The same air and the same rotor at every gust: one look serves them all.
    curve = TipAngles(*(np.repeat(array, len(values), axis=0) for array in (calm.speed, calm.angle)))
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
        banks = np.linspace(0.0, _STEEPEST if limit is None else min(limit.value, _STEEPEST), count)
        # The manual's own speed in a turn begins at a bank: a step, not a slope.
        steps = [own.above_bank for own in aircraft.speeds if own.applies == "bank" and own.above_bank is not None]
        beyond = [step + 2.0 * _STEP for step in steps if step + 2.0 * _STEP < banks[-1]]
        return np.union1d(banks, [bank for step in beyond for bank in (step - 2.0 * _STEP, step)])
    if over is Against.GUST:
        return np.linspace(0.0, _STRONGEST[aircraft.units.height], count)
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
