"""Making a type's onset table: a coarse look finds where the onset lies, two steps on the model find it at the nodes.

Some 3,000 states of the rotor model instead of the 10,000 that bracketing every node takes.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope import region
from briefkit.envelope.condition import Conditions
from briefkit.envelope.onset import FIRST_SIGNS, LIMIT_OF_CONTROL, take_rotor, tip_angle_at
from briefkit.envelope.solution import rotor_of
from briefkit.errors import BriefkitError
from briefkit.physics import atmosphere
from briefkit.physics.solving import LARGEST_ADVANCING_MACH

Floats = NDArray[np.float64]

TARGETS: Final = (FIRST_SIGNS, LIMIT_OF_CONTROL)

# Rotor field -> what the author calls it. Radius, blades and rotor speed are certified figures without a spread.
INPUTS: Final = {
    "chord": "blade chord",
    "twist": "blade twist",
    "flap_inertia": "blade flap inertia",
    "flap_frequency": "flap frequency",
    "lift_slope": "section lift slope",
    "drag_area": "drag area",
}
_FLOORS: Final = {"flap_frequency": 1.0, "drag_area": 0.0}

_LOADING_NODES: Final = 9
_TEMPERATURE_NODES: Final = 6
_LOOKS, _LOOKED_SPEEDS, _FINE = 9, 8, 200  # loadings and speeds of the first look, which finds the table's ends
_DENSITY: Final = 1.0  # kg/m3, for the weak dependence through the Lock number
# Onset between these advance ratios, so that a spread either way still has one within the model.
_SLOWEST, _FASTEST = 0.13, 0.46
_MARGIN: Final = 0.015
_NARROWINGS: Final = 5
_REFINEMENTS: Final = 2
# What a spread changes is the difference of two solutions of one grid, so a coarser one serves (0.05 kt apart).
_VARIANT_GRID: Final = (16, 12)
_STEP: Final = 1.0 * units.KNOT  # for the slope of tip angle against speed
_ALMOST: Final = np.radians(0.1)  # of the target before the last secant step: else there is no number
_NEAR: Final = 0.6 * units.KNOT  # a first step so short needs no second


def _nodes(low: float, high: float, count: int) -> Floats:
    """Chebyshev points of the second kind, rising, ends included."""
    return 0.5 * (low + high) - 0.5 * (high - low) * np.cos(np.pi * np.arange(count) / (count - 1))


SHARES: Final = _nodes(0.0, 1.0, _LOADING_NODES)


def possible(field: str, values: Floats) -> Floats:
    """Changed values that a rotor can have: a flap frequency is not below 1, a drag area not below 0."""
    return np.maximum(values, _FLOORS[field]) if field in _FLOORS else values


def make(aircraft: Aircraft) -> tuple[tuple[str, ...], Floats, list[Floats], list[Floats]]:
    """Fields with a spread, temperature nodes [K], and per target the ends and the speeds, as `OnsetTable` has them.

    Raises `BriefkitError` where the rotor model reaches the stall angle nowhere.
    """
    low, high = region.temperature_range(aircraft)
    slow, fast = (end.value for end in aircraft.limits.rotor_on)
    temperatures = np.linspace(low / max(fast, 1.0) ** 2, high / min(slow, 1.0) ** 2, _TEMPERATURE_NODES)
    fields = tuple(field for field in INPUTS if getattr(aircraft.rotor, field).spread > 0.0)
    looked = _look(aircraft, temperatures)
    ends, speeds = [], []
    for target in TARGETS:
        end, found = _within(aircraft, fields, temperatures, looked.onset(target))
        ends.append(end)
        speeds.append(found)
    return fields, temperatures, ends, speeds


@dataclass(frozen=True, eq=False)
class _Look:
    """A coarse look at the tip angle [rad]: (temperature, loading, speed) over `speeds` [m/s] (temperature, speed)."""

    loadings: Floats  # logarithms, common to all temperatures
    speeds: Floats
    angle: Floats

    def onset(self, target: float) -> _Onset:
        """Where each loading reaches `target`, by straight lines, carried on past the speeds looked at."""
        last = self.angle.shape[2] - 2
        at = np.clip(np.count_nonzero(self.angle < target, axis=2) - 1, 0, last)[:, :, None]
        speeds = np.broadcast_to(self.speeds[:, None, :], self.angle.shape)
        v0, v1, a0, a1 = (
            np.take_along_axis(array, at + step, axis=2)[:, :, 0] for array in (speeds, self.angle) for step in (0, 1)
        )
        slope = (a1 - a0) / (v1 - v0)
        slope = np.where(slope > 0.0, slope, np.nan)
        return _Onset(target, self.loadings, v0 + (target - a0) / slope, slope)


@dataclass(frozen=True, eq=False)
class _Onset:
    """Onset [m/s] and the slope of the tip angle there [rad s/m], to within a few knots: (temperature, loading)."""

    target: float
    loadings: Floats
    speed: Floats
    slope: Floats


def _look(aircraft: Aircraft, temperatures: Floats) -> _Look:
    """Speeds to where the advancing tip, or the advance ratio, ends the model's range."""
    limits, rotor, tip_speed = aircraft.limits, rotor_of(aircraft), _tip_speed(aircraft)
    # From the lightest mass in the thickest cold air to nearly three times the heaviest in the thinnest.
    asked = np.geomspace(limits.min_mass.value / 1.4, 2.9 * limits.max_mass.value / 0.9, _LOOKS)
    shares = np.linspace(0.0, 1.0, _LOOKED_SPEEDS)
    top = np.minimum(_FASTEST, _room(tip_speed, temperatures)) + _MARGIN
    ratios = (_SLOWEST - _MARGIN) + (top - (_SLOWEST - _MARGIN))[:, None] * shares
    speeds = ratios * tip_speed
    shape = (len(temperatures), _LOOKS, _LOOKED_SPEEDS)
    every = np.broadcast_to(asked[None, :, None], shape), np.broadcast_to(temperatures[:, None, None], shape)
    many = _days(*(array.ravel() for array in every))
    angle = tip_angle_at(rotor, many, np.broadcast_to(speeds[:, None, :], shape).ravel()).reshape(shape)
    return _Look(np.log(asked), speeds, angle)


def _tip_speed(aircraft: Aircraft) -> float:
    return float(np.asarray(rotor_of(aircraft).tip_speed).flat[0])


def _room(tip_speed: float, temperatures: Floats) -> Floats:
    """Advance ratios at which the advancing tip nears the Mach number that ends the model's range."""
    tip_mach = tip_speed / np.asarray(atmosphere.speed_of_sound(temperatures))
    return LARGEST_ADVANCING_MACH / tip_mach - 1.0 - 2.0 * _MARGIN


def _within(aircraft: Aircraft, fields: tuple[str, ...], temperatures: Floats, onset: _Onset) -> tuple[Floats, Floats]:
    """The ends (end, temperature) and the speeds, each range narrowed until every variant has an answer in it."""
    ends = _ends(_tip_speed(aircraft), temperatures, onset)
    for _ in range(_NARROWINGS):
        stated = _stated(aircraft, temperatures, ends, onset)
        speeds = np.concatenate([stated[None], stated + _changed(aircraft, fields, temperatures, ends, stated)])
        sound = np.asarray(np.isfinite(speeds).all(axis=0))
        if sound.all():
            return ends, speeds
        runs = [_longest_run(row) for row in sound]
        if min(last - first for first, last in runs) < 2:
            break
        loading = _loadings(ends)
        ends = np.array([[row[run[end]] for row, run in zip(loading, runs, strict=True)] for end in (0, 1)])
    raise BriefkitError("the rotor model has no onset within its range for this rotor; check chord, twist and rpm")


def _ends(tip_speed: float, temperatures: Floats, onset: _Onset) -> Floats:
    """Logarithms of the lightest and heaviest loading with an onset well inside the model: (end, temperature)."""
    fastest = np.minimum(_FASTEST, _room(tip_speed, temperatures)) * tip_speed
    fine = np.linspace(onset.loadings[0], onset.loadings[-1], _FINE)
    ends = []
    for speeds, most in zip(onset.speed, fastest, strict=True):
        known = np.interp(fine, onset.loadings, speeds)  # NaN next to NaN
        with np.errstate(invalid="ignore"):
            usable = np.asarray((known >= _SLOWEST * tip_speed) & (known <= most))
        first, last = _longest_run(usable)
        if last - first < 2:
            raise BriefkitError("the rotor model reaches the stall angle nowhere; check chord, twist and rpm")
        ends.append((fine[first], fine[last]))
    return np.array(ends).T


def _loadings(ends: Floats) -> Floats:
    """Logarithms of the loadings at the nodes of each temperature's range: (temperature, loading node)."""
    return np.asarray(ends[0][:, None] + (ends[1] - ends[0])[:, None] * SHARES)


def _stated(aircraft: Aircraft, temperatures: Floats, ends: Floats, onset: _Onset) -> Floats:
    """Onset of the stated rotor [m/s], (temperature, loading node): from the look, by Newton and secant steps."""
    loadings = _loadings(ends)
    many = _days(np.exp(loadings).ravel(), np.repeat(temperatures, loadings.shape[1]))
    rotor = rotor_of(aircraft)
    speed, slope = (
        np.array([np.interp(row, onset.loadings, values) for row, values in zip(loadings, table, strict=True)]).ravel()
        for table in (onset.speed, onset.slope)
    )
    miss = tip_angle_at(rotor, many, speed) - onset.target
    for _ in range(_REFINEMENTS):
        moved = -miss / slope
        speed = speed + moved
        left = tip_angle_at(rotor, many, speed) - onset.target
        with np.errstate(divide="ignore", invalid="ignore"):
            secant = (left - miss) / moved
        slope = np.where((np.abs(moved) > 1e-3) & (secant > 0.3 * slope), secant, slope)
        miss = left
    found = np.where(np.abs(miss) < _ALMOST, speed - miss / slope, np.nan)
    return np.asarray(found.reshape(loadings.shape))


def _changed(aircraft: Aircraft, fields: tuple[str, ...], temperatures: Floats, ends: Floats, stated: Floats) -> Floats:
    """What each variant's onset is above the stated one [m/s]: (variant less 1, temperature, loading node)."""
    loadings = _loadings(ends)
    many, rotor = _days(np.exp(loadings).ravel(), np.repeat(temperatures, loadings.shape[1])), rotor_of(aircraft)
    count, start = 2 * len(fields), stated.ravel()
    if not fields:
        return np.zeros((0, *loadings.shape))
    changes = {}
    for i, field in enumerate(fields):
        value = getattr(aircraft.rotor, field)
        values = np.full(count, value.value)
        values[2 * i : 2 * i + 2] = possible(field, value.value + value.spread * np.array([-1.0, 1.0]))
        changes[field] = np.tile(values, len(many))
    slower, at, faster = (tip_angle_at(rotor, many, start + step, _VARIANT_GRID) for step in (-_STEP, 0.0, _STEP))
    slope, base, start = (np.repeat(one, count) for one in ((faster - slower) / (2.0 * _STEP), at, start))
    changed, wide = rotor_of(aircraft, **changes), many.repeat(count)
    miss = tip_angle_at(changed, wide, start, _VARIANT_GRID) - base
    moved = -miss / slope
    far = np.flatnonzero(np.abs(moved) > _NEAR)
    left = tip_angle_at(take_rotor(changed, far), wide.take(far), (start + moved)[far], _VARIANT_GRID) - base[far]
    secant = (left - miss[far]) / moved[far]
    moved[far] -= left / np.where(secant > 0.3 * slope[far], secant, slope[far])
    moved[far[~(np.abs(left) < 3.0 * _ALMOST)]] = np.nan
    return np.asarray(moved.reshape(len(many), count).T.reshape(count, *loadings.shape))


def _days(loading: Floats, oat: Floats) -> Conditions:
    """Level conditions at 100 % with these loadings [m3] and temperatures [K], in air of the table's density."""
    pressure = _DENSITY * units.GAS_CONSTANT * oat
    return Conditions.si(
        mass=loading * _DENSITY, pressure_altitude=np.asarray(atmosphere.pressure_altitude_of(pressure)), oat=oat
    )


def _longest_run(sound: NDArray[np.bool_]) -> tuple[int, int]:
    """First and last index of the longest run of True; (0, 0) where there is none."""
    best, start = (0, 0), None
    for i, ok in enumerate([*sound.tolist(), False]):
        if ok and start is None:
            start = i
        elif not ok and start is not None:
            best = max(best, (start, i - 1), key=lambda run: run[1] - run[0])
            start = None
    return best
