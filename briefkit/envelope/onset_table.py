"""The onset of one type as a small table, so that a live boundary redraws at once.

The trimmed rotor of one type depends only on the loading n m/(rho k^2), the referred temperature T/k^2 (tip Mach
number) and the advance ratio, and weakly on density through the Lock number. So the referred onset speed V/k is a
smooth function of loading and referred temperature: for the stated rotor, and for each input a spread up or down.
"""

from __future__ import annotations

import weakref
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope import region
from briefkit.envelope.condition import Conditions
from briefkit.envelope.onset import (
    FIRST_SIGNS,
    LIMIT_OF_CONTROL,
    moved_onset,
    onset_speed,
    tip_angles,
)
from briefkit.envelope.solution import rotor_of
from briefkit.errors import BriefkitError
from briefkit.physics import atmosphere

Floats = NDArray[np.float64]
Index = NDArray[np.intp]

TARGETS: Final = (FIRST_SIGNS, LIMIT_OF_CONTROL)
# Taken off what the table gives; its largest error against direct solving is measured in the tests, and is smaller.
ALLOWANCE: Final = 0.2 * units.KNOT

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
_EDGE: Final = 0.02  # of a node's range: how far its polynomial may be carried past its end
_LOOKS: Final = 20  # loadings of the first look, which finds the table's ends
_DENSITY: Final = 1.0  # kg/m3, for the weak dependence through the Lock number
# Onset between these advance ratios, so that a spread either way still has one within the model.
_SLOWEST, _FASTEST = 0.12, 0.45
_NARROWINGS: Final = 5


def _nodes(low: float, high: float, count: int) -> Floats:
    """Chebyshev points of the second kind, rising, ends included."""
    return 0.5 * (low + high) - 0.5 * (high - low) * np.cos(np.pi * np.arange(count) / (count - 1))


_SHARES: Final = _nodes(0.0, 1.0, _LOADING_NODES)


@dataclass(frozen=True, eq=False)
class OnsetTable:
    """Referred onset V/k [m/s], per target: (variant, temperature node, loading node).

    Variant 0 is the rotor as stated; 1 + 2 i and 2 + 2 i have field i of `fields` a spread down and up. `ends` are the
    logarithms of the lightest and heaviest loading at each temperature node, (target, end, temperature node): in the
    cold the advancing tip ends the model's range earlier. Loading nodes share out that range.
    """

    fields: tuple[str, ...]
    temperatures: Floats
    ends: Floats
    speeds: Floats

    def speed(self, target: int, variant: Index, loading: Floats, referred_oat: Floats) -> Floats:
        """Referred onset V/k [m/s], (batch,), for a loading n m/(rho k^2) [m3] and T/k^2 [K]; NaN off the table.

        Along loading the polynomial of each temperature node; across, a parabola through the three nearest nodes.
        """
        nodes, count = self.temperatures, len(self.temperatures)
        place = (referred_oat - nodes[0]) / (nodes[1] - nodes[0])
        middle = np.clip(np.rint(place), 1, count - 2).astype(np.intp)
        least, most = self.ends[target]
        found, known = np.zeros(len(loading)), (place >= 0.0) & (place <= count - 1.0)
        for step, weight in zip((-1, 0, 1), _parabola(place - middle), strict=True):
            at = middle + step
            share = (np.log(loading) - least[at]) / (most[at] - least[at])
            along = _barycentric(_SHARES, share)
            found += weight * np.einsum("bl,bl->b", along, self.speeds[target][variant, at])
            known &= (share >= -_EDGE) & (share <= 1.0 + _EDGE)
        return np.where(known, found, np.nan)


def _parabola(x: Floats) -> tuple[Floats, Floats, Floats]:
    """Weights of Lagrange's parabola through -1, 0 and 1."""
    return 0.5 * x * (x - 1.0), 1.0 - x * x, 0.5 * x * (x + 1.0)


_KEPT: weakref.WeakKeyDictionary[Aircraft, OnsetTable] = weakref.WeakKeyDictionary()


def onset_table(aircraft: Aircraft) -> OnsetTable:
    """The aircraft's table, made once (about a second) and kept with it."""
    if aircraft not in _KEPT:
        _KEPT[aircraft] = _make(aircraft)
    return _KEPT[aircraft]


def possible(field: str, values: Floats) -> Floats:
    """Changed values that a rotor can have: a flap frequency is not below 1, a drag area not below 0."""
    return np.maximum(values, _FLOORS[field]) if field in _FLOORS else values


def loading_of(many: Conditions) -> Floats:
    """n m/(rho k^2) [m3] of conditions, (batch,)."""
    return many.load_factor * many.mass / (many.density * many.rotor_speed**2)


def _make(aircraft: Aircraft) -> OnsetTable:
    low, high = region.temperature_range(aircraft)
    slow, fast = (end.value for end in aircraft.limits.rotor_on)
    temperatures = np.linspace(low / max(fast, 1.0) ** 2, high / min(slow, 1.0) ** 2, _TEMPERATURE_NODES)
    fields = tuple(field for field in INPUTS if getattr(aircraft.rotor, field).spread > 0.0)
    ends, speeds = [], []
    for target, looked in zip(TARGETS, _ends(aircraft, temperatures), strict=True):
        end, found = _within(aircraft, fields, temperatures, looked, target)
        ends.append(end)
        speeds.append(found)
    return OnsetTable(fields, temperatures, np.array(ends), np.array(speeds))


def _within(
    aircraft: Aircraft, fields: tuple[str, ...], temperatures: Floats, ends: Floats, target: float
) -> tuple[Floats, Floats]:
    """The ends (end, temperature) and the speeds, each range narrowed until every variant has an answer in it."""
    for _ in range(_NARROWINGS):
        loading = ends[0][:, None] + (ends[1] - ends[0])[:, None] * _SHARES
        speeds = _speeds(aircraft, fields, temperatures, np.exp(loading), target)
        sound = np.asarray(np.isfinite(speeds).all(axis=0))
        if sound.all():
            return ends, speeds
        runs = [_longest_run(row) for row in sound]
        if min(last - first for first, last in runs) < 2:
            break
        ends = np.array([[row[run[end]] for row, run in zip(loading, runs, strict=True)] for end in (0, 1)])
    raise BriefkitError("the rotor model has no onset within its range for this rotor; check chord, twist and rpm")


def _ends(aircraft: Aircraft, temperatures: Floats) -> list[Floats]:
    """Per target the logarithms of the lightest and the heaviest loading with an onset well inside the model: (end,
    temperature)."""
    limits = aircraft.limits
    # From the lightest mass in the thickest cold air to twice the heaviest in the thinnest.
    asked = np.geomspace(limits.min_mass.value / 1.4, 2.2 * limits.max_mass.value / 0.9, _LOOKS)
    many = _days(np.tile(asked, len(temperatures)), np.repeat(temperatures, len(asked)))
    rotor = rotor_of(aircraft)
    curve = tip_angles(rotor, many)
    found = []
    for target in TARGETS:
        ratio = onset_speed(rotor, many, target, curve).reshape(len(temperatures), len(asked)) / rotor.tip_speed
        with np.errstate(invalid="ignore"):
            usable = np.asarray((ratio >= _SLOWEST) & (ratio <= _FASTEST))
        runs = [_longest_run(row) for row in usable]
        if min(last - first for first, last in runs) < 2:
            raise BriefkitError("the rotor model reaches the stall angle nowhere; check chord, twist and rpm")
        found.append(np.log(np.array([[asked[run[end]] for run in runs] for end in (0, 1)])))
    return found


def _speeds(
    aircraft: Aircraft, fields: tuple[str, ...], temperatures: Floats, loadings: Floats, target: float
) -> Floats:
    """Onset of every variant [m/s] at loadings [m3] of (temperature, loading): (variant, temperature, loading)."""
    many, rotor = _days(loadings.ravel(), np.repeat(temperatures, loadings.shape[1])), rotor_of(aircraft)
    stated = onset_speed(rotor, many, target)
    count = 2 * len(fields)
    changes = {}
    for i, field in enumerate(fields):
        value = getattr(aircraft.rotor, field)
        values = np.full(count, value.value)
        values[2 * i : 2 * i + 2] = possible(field, value.value + value.spread * np.array([-1.0, 1.0]))
        changes[field] = np.tile(values, len(many))
    moved = moved_onset(rotor, many, rotor_of(aircraft, **changes), many.repeat(count), stated, target, count)
    every = np.concatenate([stated[:, None], moved.reshape(len(many), count)], axis=1)
    return every.T.reshape(1 + count, *loadings.shape)


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


def _barycentric(nodes: Floats, at: Floats) -> Floats:
    """Weights (point, node) of polynomial interpolation (Berrut and Trefethen 2004, eq. 4.2 and 5.4)."""
    signs = np.where(np.arange(len(nodes)) % 2 == 0, 1.0, -1.0)
    signs[[0, -1]] *= 0.5
    distance = at[:, None] - nodes[None, :]
    exact = np.abs(distance) < 1e-12 * (nodes[-1] - nodes[0])
    # On a node the other terms are of no account; 1 keeps them finite.
    terms = signs / np.where(exact.any(axis=1)[:, None], 1.0 + np.arange(len(nodes)), distance)
    weights: Floats = terms / terms.sum(axis=1, keepdims=True)
    return np.where(exact.any(axis=1)[:, None], exact.astype(float), weights)
