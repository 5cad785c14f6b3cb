"""The onset of one type as a small table, so that a live boundary redraws at once.

The trimmed rotor of one type depends only on the loading n m/(rho k^2), the referred temperature T/k^2 (tip Mach
number) and the advance ratio, and weakly on density through the Lock number. So the table holds, for each advance
ratio and referred temperature, the loading at which the retreating tip reaches the angle: always defined, smooth, and
inverted by a look-up. One such table for the stated rotor and one for each input a spread up or down.
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
from briefkit.envelope.onset import FIRST_SIGNS, LIMIT_OF_CONTROL, repeat_rotor
from briefkit.envelope.solution import rotor_of
from briefkit.errors import BriefkitError, Reason
from briefkit.physics import atmosphere
from briefkit.physics.rotor import Rotor, State
from briefkit.physics.trim import trim

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

_RATIO_NODES: Final = 14
_TEMPERATURE_NODES: Final = 4
_FINE: Final = 257  # advance ratios at which a column is looked up: linear between them is exact to 0.001 kt
_DENSITY: Final = 1.0  # kg/m3, for the weak dependence through the Lock number
_LOADINGS: Final = np.linspace(0.03, 0.165, 8)  # first look, as CT/sigma; the model ends at 0.18
_HIGHEST_RATIO: Final = 0.49
_MARGIN: Final = float(np.radians(0.7))
_SECANTS: Final = 2
_NARROWINGS: Final = 6


@dataclass(frozen=True, eq=False)
class OnsetTable:
    """Natural logarithm of the onset loading [m3/kg kg = m3], per target: (variant, temperature node, fine ratio).

    Variant 0 is the rotor as stated; 1 + 2 i and 2 + 2 i have field i of `fields` a spread down and up. `ratios` are
    true airspeed over tip speed, (target, fine ratio), rising; loadings fall along them.
    """

    fields: tuple[str, ...]
    tip_speed: float
    temperatures: Floats
    ratios: Floats
    log_loading: Floats

    def speed(self, target: int, variant: Index, loading: Floats, referred_oat: Floats) -> Floats:
        """Referred onset V/k [m/s], (batch,), for a loading n m/(rho k^2) [m3] and T/k^2 [K]; NaN off the table."""
        weights = _barycentric(self.temperatures, referred_oat)
        column = np.einsum("bt,btf->bf", weights, self.log_loading[target][variant])
        asked = np.log(loading)[:, None]
        inside = (asked[:, 0] <= column[:, 0]) & (asked[:, 0] >= column[:, -1])
        left = np.clip((column > asked).sum(axis=1) - 1, 0, _FINE - 2)
        at = np.arange(len(left))
        high, low = column[at, left], column[at, left + 1]
        share = (high - asked[:, 0]) / (high - low)
        ratios = self.ratios[target]
        found = (ratios[left] + share * (ratios[left + 1] - ratios[left])) * self.tip_speed
        known = inside & (referred_oat >= self.temperatures[0] - 1e-6) & (referred_oat <= self.temperatures[-1] + 1e-6)
        return np.where(known, found, np.nan)


_KEPT: weakref.WeakKeyDictionary[Aircraft, OnsetTable] = weakref.WeakKeyDictionary()


def onset_table(aircraft: Aircraft) -> OnsetTable:
    """The aircraft's table, made once (about a second) and kept with it."""
    if aircraft not in _KEPT:
        _KEPT[aircraft] = _make(aircraft)
    return _KEPT[aircraft]


def _make(aircraft: Aircraft) -> OnsetTable:
    low, high = region.temperature_range(aircraft)
    slow, fast = (end.value for end in aircraft.limits.rotor_on)
    temperatures = _nodes(low / max(fast, 1.0) ** 2 - 2.0, high / min(slow, 1.0) ** 2 + 2.0, _TEMPERATURE_NODES)
    fields, changes = _variants(aircraft)
    stated, count = rotor_of(aircraft), 1 + 2 * len(fields)
    rotors = rotor_of(aircraft, **changes)
    made = [
        _within(stated, rotors, count, temperatures, ends, target)
        for target, ends in zip(TARGETS, _reached(stated, temperatures), strict=True)
    ]
    ratios, tables = (np.array(part) for part in zip(*made, strict=True))
    return OnsetTable(fields, float(aircraft.rotor.tip_speed), temperatures, ratios, tables)


def _variants(aircraft: Aircraft) -> tuple[tuple[str, ...], dict[str, Floats]]:
    """The fields with a spread, and each rotor field as an array over the variants."""
    fields = tuple(field for field in INPUTS if getattr(aircraft.rotor, field).spread > 0.0)
    changes = {}
    for i, field in enumerate(fields):
        stated = getattr(aircraft.rotor, field)
        values = np.full(1 + 2 * len(fields), stated.value)
        values[1 + 2 * i], values[2 + 2 * i] = possible(field, stated.value + stated.spread * np.array([-1.0, 1.0]))
        changes[field] = values
    return fields, changes


def possible(field: str, values: Floats) -> Floats:
    """Changed values that a rotor can have: a flap frequency is not below 1, a drag area not below 0."""
    return np.maximum(values, _FLOORS[field]) if field in _FLOORS else values


def _reached(stated: Rotor, temperatures: Floats) -> list[tuple[float, float]]:
    """Per target the advance ratios at which some loading reaches it and a lighter one does not, at every temperature.

    A look at the stated rotor; the variants lie within the margin, or the range is narrowed.
    """
    ratios = np.linspace(0.06, _HIGHEST_RATIO, 30)
    axes = np.meshgrid(ratios, temperatures[[0, -1]], _LOADINGS, indexing="ij")
    ratio, oat, loading = (np.asarray(axis.ravel(), dtype=float) for axis in axes)
    angle = _angles(stated, ratio, oat, loading, stated).reshape(len(ratios), 2, len(_LOADINGS))
    highest = np.where(np.isfinite(angle), angle, -np.inf).max(axis=2)
    found = []
    for target in TARGETS:
        usable = ((angle[:, :, 0] < target - _MARGIN) & (highest > target + _MARGIN)).all(axis=1)
        if usable.sum() < 3:
            raise BriefkitError("the rotor model reaches the stall angle nowhere; check chord, twist and rpm")
        found.append((float(ratios[usable][0]), float(ratios[usable][-1])))
    return found


def _within(
    stated: Rotor, rotors: Rotor, count: int, temperatures: Floats, ends: tuple[float, float], target: float
) -> tuple[Floats, Floats]:
    """Fine ratios and the table over them, the range narrowed until every variant has an answer everywhere in it."""
    low, high = ends
    for _ in range(_NARROWINGS):
        nodes = _nodes(low, high, _RATIO_NODES)
        loading = _onset_loading(stated, rotors, count, nodes, temperatures, target)
        falls = np.concatenate([np.diff(loading, axis=2) < 0.0, np.ones((*loading.shape[:2], 1), dtype=bool)], axis=2)
        sound = (np.isfinite(loading) & falls).all(axis=(0, 1))
        if sound.all():
            fine = np.linspace(low, high, _FINE)
            return fine, np.einsum("fr,vtr->vtf", _barycentric(nodes, fine), loading)
        first, last = _longest_run(sound)
        if last - first < 2:
            break
        low, high = float(nodes[first]), float(nodes[last])
    raise BriefkitError("the rotor model's onset does not fall with loading; no table can be made of it")


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


def _onset_loading(
    stated: Rotor, rotors: Rotor, count: int, ratios: Floats, temperatures: Floats, target: float
) -> Floats:
    """Logarithm of the loading at the target for every variant: (variant, temperature, ratio)."""
    oat, ratio = (grid.ravel() for grid in np.meshgrid(temperatures, ratios, indexing="ij"))
    points, looks = len(ratio), len(_LOADINGS)
    look = _angles(stated, np.repeat(ratio, looks), np.repeat(oat, looks), np.tile(_LOADINGS, points), stated)
    known = [(row, np.isfinite(row)) for row in look.reshape(points, looks)]
    first = np.array([np.interp(target, row[ok], _LOADINGS[ok]) for row, ok in known])
    rotor = repeat_rotor(rotors, points)
    ratio, oat, guess = np.tile(ratio, count), np.tile(oat, count), np.tile(first, count)
    past = 0.98 * guess
    miss_past = _angles(rotor, ratio, oat, past, stated) - target
    for _ in range(_SECANTS):
        miss = _angles(rotor, ratio, oat, guess, stated) - target
        moved = guess - past
        slope = np.where(moved == 0.0, np.inf, (miss - miss_past) / np.where(moved == 0.0, 1.0, moved))
        past, miss_past, guess = guess, miss, guess - miss / slope
    return np.log(guess * _loading_unit(stated)).reshape(count, len(temperatures), len(ratios))


def _loading_unit(rotor: Rotor) -> Floats:
    """n m/(rho k^2) [m3] at CT/sigma of 1: sigma A (Omega R)^2 / g."""
    return np.asarray(rotor.solidity * rotor.disc_area * rotor.tip_speed**2 / units.GRAVITY)


def _angles(rotor: Rotor, ratio: Floats, oat: Floats, loading: Floats, stated: Rotor) -> Floats:
    """Tip angles [rad] at speed over tip speed, temperature [K] and CT/sigma of the stated rotor, (batch,)."""
    mass = loading * _loading_unit(stated) * _DENSITY
    state = State(
        density=np.full(len(ratio), _DENSITY),
        sound_speed=np.asarray(atmosphere.speed_of_sound(oat)),
        tip_speed=np.full(len(ratio), float(np.max(rotor.tip_speed))),
        speed=ratio * np.max(rotor.tip_speed),
        thrust_weight=mass * units.GRAVITY,
    )
    solved = trim(rotor, state)
    return np.where(solved.reason == Reason.NONE, solved.tip_angle, np.nan)


def _nodes(low: float, high: float, count: int) -> Floats:
    """Chebyshev points of the second kind, rising, ends included."""
    return 0.5 * (low + high) - 0.5 * (high - low) * np.cos(np.pi * np.arange(count) / (count - 1))


def _barycentric(nodes: Floats, at: Floats) -> Floats:
    """Weights (point, node) of polynomial interpolation (Berrut and Trefethen 2004, eq. 4.2 and 5.4)."""
    signs = np.where(np.arange(len(nodes)) % 2 == 0, 1.0, -1.0)
    signs[[0, -1]] *= 0.5
    distance = at[:, None] - nodes[None, :]
    exact = np.abs(distance) < 1e-12 * (nodes[-1] - nodes[0])
    terms = signs / np.where(exact, 1.0, distance)
    weights: Floats = terms / terms.sum(axis=1, keepdims=True)
    return np.where(exact.any(axis=1)[:, None], exact.astype(float), weights)


def loading_of(many: Conditions) -> Floats:
    """n m/(rho k^2) [m3] of conditions, (batch,)."""
    return many.load_factor * many.mass / (many.density * many.rotor_speed**2)
