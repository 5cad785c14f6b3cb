"""Where a line of the boundary leaves the manual's VNE, meets it again and ends."""

from __future__ import annotations

from typing import Final

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]

SAME: Final = 0.05  # in the type's unit: speeds closer than this are one
_SEEN: Final = 0.5  # and those within this look it
_SHORT: Final = 1e-3  # of the axis
_PITCHES: Final = 60.0  # of the axis: the next point that shows a slope is half of one off, or more


def partings(x: Floats, vne: Floats, ias: Floats, *, slower: bool) -> tuple[tuple[float, ...], tuple[float, ...]]:
    """Where a curve leaves VNE for lower speeds, going up x (down x if `slower`), and where it meets VNE again.

    Each the straight line through its next two points under VNE, carried back to VNE, within the step it lies in.
    """
    below = vne - ias
    with np.errstate(invalid="ignore"):
        lower = below > SAME
    # A stretch that never leaves VNE by as much as can be seen, or is too short to be seen, is none.
    edges = np.flatnonzero(np.diff(np.concatenate(([False], lower, [False])).astype(int)))
    for first, end in zip(edges[::2], edges[1::2], strict=True):
        length = x[min(end, len(x) - 1)] - x[max(first - 1, 0)]
        lower[first:end] = below[first:end].max() > _SEEN and length > _SHORT * (x[-1] - x[0])
    known = np.isfinite(below)
    leaves: list[float] = []
    meets: list[float] = []
    for i in np.flatnonzero((lower[:-1] != lower[1:]) & known[:-1] & known[1:]).tolist():
        place = _carried(x, below, i + 1, 1) if lower[i + 1] else _carried(x, below, i, -1)
        (meets if bool(lower[i + 1]) is slower else leaves).append(place)
    return tuple(leaves), tuple(meets)


def _carried(x: Floats, below: Floats, first: int, step: int) -> float:
    """From the first point under VNE, `step` pointing on under it, back to VNE and no farther than the point before."""
    back = abs(float(x[first] - x[first - step]))
    apart = 0.5 * float(x[-1] - x[0]) / _PITCHES
    behind = first + step
    while 0 <= behind < len(x) and abs(x[behind] - x[first]) < apart:
        behind += step
    if 0 <= behind < len(x) and below[behind] > below[first]:
        back = min(back, float(below[first] * abs(x[behind] - x[first]) / (below[behind] - below[first])))
    return float(x[first]) - step * back


def ends(x: Floats, ias: Floats) -> tuple[float, ...]:
    """The last or first place with an answer, where x goes on."""
    known = np.flatnonzero(np.isfinite(ias))
    if not len(known):
        return ()
    outer = ((known[0], 0), (known[-1], len(x) - 1))
    return tuple(float(x[end]) for end, last in outer if end != last)
