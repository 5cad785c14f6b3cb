"""Where words inside a figure go: near what they speak of, clear of lines, of marks and of other words."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from briefkit.figures.canvas import Plane, finite_runs

Floats = NDArray[np.float64]

_CLEAR: Final = 3.0  # px between words and what they keep clear of
_FAR: Final = 50.0  # px: farther off, words no longer seem to belong
_ASIDE: Final = np.array([9.0, 20.0, 31.0])
_NUDGES: Final = np.array([0.0, -8.0, 8.0, -16.0, 16.0, -28.0, 28.0])  # px up and down, for words beside their point
_SAMPLE: Final = 3.0  # px between the points a line is taken as


@dataclass
class Crowd:
    """What words of one figure have to keep clear of, and the plot area they stay inside.

    Pixels from the plot area's left and top edge; a box is (left, right, top, bottom).
    """

    area: Plane
    _points: list[tuple[Floats, float]] = field(default_factory=list)
    _boxes: list[tuple[float, float, float, float]] = field(default_factory=list)

    def add_line(self, x: ArrayLike, y: ArrayLike, cost: float = np.inf) -> None:
        """A drawn line over rising x, in data units; NaN is a gap. `cost` [px] is how far words go to avoid it."""
        area = self.area
        for places, up in finite_runs(x, y):
            across = (places - area.x.min) / (area.x.max - area.x.min) * area.width
            down = (area.y.max - up) / (area.y.max - area.y.min) * area.height
            # Along the line, not along x: a step has a height.
            along = np.concatenate([[0.0], np.cumsum(np.hypot(np.diff(across), np.diff(down)))])
            samples = np.append(np.arange(0.0, along[-1], _SAMPLE), along[-1])
            points = np.stack([np.interp(samples, along, across), np.interp(samples, along, down)])
            self._points.append((points, cost))

    def add_mark(self, across: float, down: float, reach: float = 8.0) -> None:
        """A ring or a dot at a place."""
        self._boxes.append((across - reach, across + reach, down - reach, down + reach))

    def place(self, across: float, down: float, width: float, height: float) -> tuple[float, float] | None:
        """Left and top edge of the best place for words of this size that speak of a point; it is taken then.

        None where every place near it is crowded.
        """
        offsets = np.arange(6.0, _FAR, 7.0)
        lefts = np.concatenate([across - width * np.linspace(0.0, 1.0, 5), across + _ASIDE, across - width - _ASIDE])
        tops = np.concatenate([down + offsets, down - offsets - height, down - 0.5 * height + _NUDGES])
        left, top = (edges.ravel() for edges in np.broadcast_arrays(lefts[None, :], tops[:, None]))
        right, bottom = left + width, top + height
        # As far as the nearest edge of the words is, and a little for standing askew.
        away = np.maximum(left - across, across - right), np.maximum(top - down, down - bottom)
        cost = np.hypot(*np.maximum(away, 0.0)) + 0.1 * np.abs(left + 0.5 * width - across)
        free = (left >= 2.0) & (right <= self.area.width) & (top >= 0.0) & (bottom <= self.area.height - 2.0)
        for box in self._boxes:
            apart = (left > box[1] + _CLEAR) | (right < box[0] - _CLEAR)
            free &= apart | (top > box[3] + _CLEAR) | (bottom < box[2] - _CLEAR)
        free &= (left > across + 5.0) | (right < across - 5.0) | (top > down + 5.0) | (bottom < down - 5.0)
        kept = np.flatnonzero(free)
        left, right, top, bottom, cost = (edges[kept] for edges in (left, right, top, bottom, cost))
        for (x, y), dear in self._points:
            close = (x > across - _FAR - width) & (x < across + _FAR + width)
            x, y = x[close], y[close]
            inside = (x > left[:, None] - _CLEAR) & (x < right[:, None] + _CLEAR)
            inside &= (y > top[:, None] - _CLEAR) & (y < bottom[:, None] + _CLEAR)
            cost = np.where(inside.any(axis=1), cost + dear, cost)
        if not np.isfinite(cost).any():
            return None
        best = int(np.argmin(cost))
        self._boxes.append((left[best], right[best], top[best], bottom[best]))
        return float(left[best]), float(top[best])


def widest(rows: Sequence[str], each: float) -> float:
    """The width of the longest row [px], for letters `each` wide on average."""
    return each * max(len(row) for row in rows)
