"""The manual's own VNE chart, with this condition here and the same rotor there (the equivalent level flight)."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import bqplot
import numpy as np
from numpy.typing import ArrayLike

from briefkit.figures import canvas, theme
from briefkit.figures.canvas import Margins, put, write
from briefkit.figures.curves import Curve, End, EndWords

_ROOM = Margins(40, 70, 30, 44)
_HEIGHT = 330
_ROW = 14.0
_WORDS = 42.0  # room for two rows of words over and under the lines [px]


@dataclass(frozen=True)
class Mark:
    """A point on the chart with the words that stand by it."""

    x: float
    speed: float
    words: tuple[str, ...]


class ChartFigure:
    """A live bqplot figure of the manual's chart: the lines are built once, the two marks move."""

    def __init__(
        self,
        x: ArrayLike,
        speeds: ArrayLike,
        names: Sequence[str],
        *,
        x_words: str,
        speed_words: str,
        steps: bool = False,
    ) -> None:
        """`x` (n,) rising (height, say); `speeds` (n, m) as printed, NaN for a blank cell; `names` (m,) of columns.

        With `steps` the lower of two entries holds between them, and is drawn so; else a line joins them.
        """
        across, columns = np.asarray(x, dtype=float), np.asarray(speeds, dtype=float)
        if columns.shape != (across.size, len(names)) or across.size < 2:
            raise ValueError(
                f"a chart of {columns.shape} speeds needs as many rows and names: {across.size}, {len(names)}"
            )
        finite = columns[np.isfinite(columns)]
        if finite.size == 0:
            raise ValueError("the chart has no speed on it")
        room = max(float(np.ptp(finite)), 10.0) * _WORDS / (_HEIGHT - _ROOM.top - _ROOM.bottom - 2.0 * _WORDS)
        low, high = math.floor((finite.min() - room) / 5.0) * 5.0, math.ceil((finite.max() + room) / 5.0) * 5.0
        limits = (float(across[0]), float(across[-1]), low, high)
        area = self._area = canvas.plane(limits, theme.WIDTH, _HEIGHT, _ROOM)
        curves = [Curve(area, theme.INK, theme.THIN) for _ in names]
        ends, dots = EndWords(area), self._nodes(across, columns)
        for curve, column in zip(curves, columns.T, strict=True):
            curve.update(*(_stairs(across, column) if steps else (across, column)))
        ends.update([self._end(across, column, name) for column, name in zip(columns.T, names, strict=True)])
        titles, foot = canvas.texts(area, theme.GREY), canvas.texts(area, theme.GREY, align="middle")
        write(titles, [(area.x_at(-_ROOM.left + 2.0), area.y_at(-18.0), speed_words)])
        write(foot, [(area.x_at(area.width / 2.0), area.y_at(area.height + 36.0), x_words)])
        self._make_points()
        marks = [mark for curve in curves for mark in curve.marks]
        marks += [
            dots,
            *ends.marks,
            titles,
            foot,
            self._hairs,
            self._shaft,
            self._head,
            self._here,
            self._there,
            *self._words,
        ]
        axes = [
            canvas.axis(area.x, "bottom", canvas.ticks(limits[0], limits[1], 5)),
            canvas.axis(area.y, "left", canvas.ticks(max(low, 0.0), high, 6)),
        ]
        self.figure = canvas.figure(area, _ROOM, marks, axes)

    def update(self, here: Mark, there: Mark | None) -> None:
        """This condition, and where the same rotor is found in level flight (None: the manual's VNE stands)."""
        put(self._here, [here.x], [here.speed])
        put(self._there, [] if there is None else [there.x], [] if there is None else [there.speed])
        self._draw_arrow(here, there)
        self._write(here, there)

    def _make_points(self) -> None:
        area = self._area
        look = {"x": [], "y": [], "scales": area.scales, "default_size": 90, "enable_hover": False}
        self._here = bqplot.Scatter(colors=[theme.PAPER], stroke=theme.INK, stroke_width=2.0, **look)
        self._there = bqplot.Scatter(colors=[theme.COMPUTED], stroke=theme.COMPUTED, stroke_width=2.0, **look)
        self._hairs = canvas.lines(area, theme.GREY, theme.THIN)
        self._shaft = canvas.lines(area, theme.COMPUTED, theme.LINE)
        self._head = canvas.patch(area, theme.COMPUTED)
        self._words = [canvas.texts(area, colour, bold=True, align="middle") for colour in (theme.INK, theme.COMPUTED)]

    def _nodes(self, x: canvas.Floats, columns: canvas.Floats) -> bqplot.Scatter:
        """The cells as printed, as dots: what lies between is read between them."""
        rows, cells = np.nonzero(np.isfinite(columns))
        return bqplot.Scatter(
            x=x[rows], y=columns[rows, cells], scales=self._area.scales, colors=[theme.INK], default_size=14,
            enable_hover=False,
        )  # fmt: skip

    def _end(self, x: canvas.Floats, column: canvas.Floats, name: str) -> End:
        finite = np.flatnonzero(np.isfinite(column))
        if finite.size == 0:
            raise ValueError(f"the chart's column {name} has no speed on it")
        return End(float(x[finite[-1]]), float(column[finite[-1]]), (name,), theme.INK)

    def _draw_arrow(self, here: Mark, there: Mark | None) -> None:
        """From mark to mark, drawn in pixels so that the head keeps its shape; none where they are one place."""
        put(self._shaft, [], [])
        put(self._head, [], [])
        if there is None:
            return
        area = self._area
        a = np.array([area.across(here.x), area.down(here.speed)])
        b = np.array([area.across(there.x), area.down(there.speed)])
        length = float(np.hypot(*(b - a)))
        if length < 22.0:
            return
        along = (b - a) / length
        aside = np.array([-along[1], along[0]])
        tip, start = b - 8.0 * along, a + 7.0 * along
        neck = tip - 9.0 * along
        corners = np.array([tip, neck + 4.5 * aside, neck - 4.5 * aside])
        put(self._shaft, [area.x_at(p[0]) for p in (start, neck)], [area.y_at(p[1]) for p in (start, neck)])
        put(self._head, [area.x_at(p[0]) for p in corners], [area.y_at(p[1]) for p in corners])

    def _write(self, here: Mark, there: Mark | None) -> None:
        """Words clear of every line: this condition's along the top, the other's along the foot, hair lines to both."""
        area = self._area
        hairs_x, hairs_y = [], []
        for mark, point, top in zip(self._words, (here, there), (True, False), strict=True):
            if point is None:
                write(mark, [])
                continue
            first = 8.0 if top else area.height - 10.0 - _ROW * (len(point.words) - 1)
            edge = first + _ROW * (len(point.words) - 1) + 9.0 if top else first - 9.0
            half = max(canvas.text_width(row) for row in point.words) / 2.0
            across = area.x_at(min(max(area.across(point.x), half), area.width - half))
            write(mark, [(across, area.y_at(first + _ROW * row), text) for row, text in enumerate(point.words)])
            hairs_x.append([point.x, point.x])
            hairs_y.append([point.speed, area.y_at(edge)])
        put(self._hairs, hairs_x, hairs_y, colors=[theme.GREY])


def _stairs(x: canvas.Floats, column: canvas.Floats) -> tuple[canvas.Floats, canvas.Floats]:
    """Each entry at its place, between two of them the lower; a blank cell leaves its neighbours' treads out."""
    treads = np.minimum(column[:-1], column[1:])
    left, right = np.append(column[0], treads), np.append(treads, column[-1])
    return np.repeat(x, 3), np.stack([left, column, right], axis=1).ravel()
