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
from briefkit.envelope.condition import Conditions
from briefkit.envelope.onset_build import SHARES, make

Floats = NDArray[np.float64]
Index = NDArray[np.intp]

# Taken off what the table gives; its largest error against direct solving is measured in the tests, and is smaller.
ALLOWANCE: Final = 0.2 * units.KNOT
_EDGE: Final = 0.02  # of a node's range: how far its polynomial may be carried past its end


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

        Along loading the polynomial of each temperature node; across, a parabola through the three nearest nodes, or
        the next warmer three where the coldest of them has no such loading.
        """
        nodes, count = self.temperatures, len(self.temperatures)
        place = (referred_oat - nodes[0]) / (nodes[1] - nodes[0])
        middle = np.clip(np.rint(place), 1, count - 2).astype(np.intp)
        found = self._through(target, variant, loading, place, middle)
        again = np.flatnonzero(np.isnan(found) & (place >= middle) & (middle < count - 2))
        if len(again):
            found[again] = self._through(target, variant[again], loading[again], place[again], middle[again] + 1)
        return found

    def _through(self, target: int, variant: Index, loading: Floats, place: Floats, middle: Index) -> Floats:
        """Through the three nodes round `middle`, (batch,); NaN where `place` or `loading` is off one of them."""
        count = len(self.temperatures)
        least, most = self.ends[target]
        found, known = np.zeros(len(loading)), (place >= 0.0) & (place <= count - 1.0)
        for step, weight in zip((-1, 0, 1), _parabola(place - middle), strict=True):
            at = middle + step
            share = (np.log(loading) - least[at]) / (most[at] - least[at])
            along = _barycentric(SHARES, share)
            found += weight * np.einsum("bl,bl->b", along, self.speeds[target][variant, at])
            known &= (share >= -_EDGE) & (share <= 1.0 + _EDGE)
        return np.where(known, found, np.nan)


def _parabola(x: Floats) -> tuple[Floats, Floats, Floats]:
    """Weights of Lagrange's parabola through -1, 0 and 1."""
    return 0.5 * x * (x - 1.0), 1.0 - x * x, 0.5 * x * (x + 1.0)


_KEPT: weakref.WeakKeyDictionary[Aircraft, OnsetTable] = weakref.WeakKeyDictionary()


def onset_table(aircraft: Aircraft) -> OnsetTable:
    """The aircraft's table, made once (about half a second) and kept with it."""
    if aircraft not in _KEPT:
        fields, temperatures, ends, speeds = make(aircraft)
        _KEPT[aircraft] = OnsetTable(fields, temperatures, np.array(ends), np.array(speeds))
    return _KEPT[aircraft]


def loading_of(many: Conditions) -> Floats:
    """n m/(rho k^2) [m3] of conditions, (batch,)."""
    return many.load_factor * many.mass / (many.density * many.rotor_speed**2)


def _barycentric(nodes: Floats, at: Floats) -> Floats:
    """Weights (point, node) of polynomial interpolation (Berrut and Trefethen 2004, eq. 4.2 and 5.4)."""
    signs = np.where(np.arange(len(nodes)) % 2 == 0, 1.0, -1.0)
    signs[[0, -1]] *= 0.5
    distance = at[:, None] - nodes[None, :]
    # On a node its own term outweighs the others.
    terms = signs / np.where(distance == 0.0, 1e-30, distance)
    weights: Floats = terms / terms.sum(axis=1, keepdims=True)
    return weights
