"""Hatching as plain line segments, so that screen and paper draw the same strokes."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]


def hatch(x: ArrayLike, y: ArrayLike, spacing: float, angle_deg: float = 45.0) -> tuple[Floats, Floats]:
    """Parallel strokes inside a closed polygon.

    `x`, `y` (n,) are its corners in a plane of equal scales, `spacing` the distance between strokes in the same unit,
    `angle_deg` their direction from the x axis. Returns two arrays (strokes, 2) of end points; concave polygons are
    cut properly (even-odd rule). Strokes lie at whole multiples of `spacing` from the origin, so that neighbouring
    polygons share one pattern.
    """
    corners = np.stack([np.asarray(x, dtype=float), np.asarray(y, dtype=float)])
    if corners.ndim != 2 or corners.shape[1] < 3 or spacing <= 0.0:
        raise ValueError("hatching needs a polygon of three corners or more and a positive spacing")
    turn = math.radians(angle_deg)
    along = np.array([math.cos(turn), math.sin(turn)])
    aside = np.array([-math.sin(turn), math.cos(turn)])
    s, t = along @ corners, aside @ corners
    s_next, t_next = np.roll(s, -1), np.roll(t, -1)
    starts, ends = [], []
    for index in range(math.ceil(t.min() / spacing), math.floor(t.max() / spacing) + 1):
        level = index * spacing
        crossing = (t <= level) != (t_next <= level)
        share = (level - t[crossing]) / (t_next[crossing] - t[crossing])
        cuts = np.sort(s[crossing] + share * (s_next[crossing] - s[crossing]))
        for a, b in zip(cuts[::2], cuts[1::2], strict=True):
            starts.append(a * along + level * aside)
            ends.append(b * along + level * aside)
    if not starts:
        return np.empty((0, 2)), np.empty((0, 2))
    both = np.stack([np.array(starts), np.array(ends)], axis=1)
    return both[:, :, 0], both[:, :, 1]
