"""Speed against one quantity: the manual's VNE, the equivalent VNE of a few turns, and the onset band behind them."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import bqplot
import numpy as np
from numpy.typing import ArrayLike, NDArray

from briefkit.figures import canvas, theme
from briefkit.figures.canvas import Margins, put, write
from briefkit.figures.curves import Curve, End, EndWords

Floats = NDArray[np.float64]

_ROOM = Margins(40, 122, 30, 44)
_HEIGHT = 330
_UNDER = 48.0  # room for two rows of words under a line's end [px]
_SAME = 0.05  # speeds closer than this, everywhere, are one line


@dataclass(frozen=True)
class Here:
    """The present condition on the figure: its place, its speed, and the equivalent VNE there, with their words.

    No speed leaves its ring out, no answer its dot; the line stays.
    """

    x: float
    speed: float | None
    words: str
    answer: float | None = None
    answer_words: str = ""


@dataclass(frozen=True)
class Curves:
    """What the figure shows, in the units it is printed in; NaN marks a gap (refused), and a gap stays a gap.

    `x` (n,) rising; `manual` (n,) the manual's VNE; `turns` (name, (n,) speeds) of the equivalent VNE;
    `onset_lower`, `onset_central`, `onset_upper` (m,) the absolute onset band over `onset_x` (m,) rising; where only
    its upper end has no value the band is drawn open, up to the top of the figure, and says so.
    """

    x: ArrayLike
    manual: ArrayLike
    turns: Sequence[tuple[str, ArrayLike]]
    onset_x: ArrayLike
    onset_lower: ArrayLike
    onset_central: ArrayLike
    onset_upper: ArrayLike


class BoundaryFigure:
    """A live bqplot figure of the boundary: built once, changed in place by `update`."""

    def __init__(self, *, x_words: str, speed_words: str, turns: int) -> None:
        """`x_words` and `speed_words` name the axes with their units; `turns` is how many lines are computed."""
        if not 0 <= turns <= len(theme.DASHES):
            raise ValueError(f"up to {len(theme.DASHES)} computed lines can be told apart, not {turns}")
        area = self._area = canvas.plane((0.0, 1.0, 0.0, 1.0), theme.WIDTH, _HEIGHT, _ROOM)
        self._words = (x_words, speed_words)
        self._band = [canvas.patch(area, theme.BAND)]
        self._middle = Curve(area, theme.GREY, theme.THIN, "dotted")
        self._manual = Curve(area, theme.INK, theme.HEAVY)
        self._turns = [Curve(area, theme.COMPUTED, theme.LINE, theme.DASHES[index]) for index in range(turns)]
        self._stops = canvas.lines(area, theme.COMPUTED, theme.LINE)
        self._stop_words = [canvas.texts(area, theme.COMPUTED, align=align) for align in ("start", "end")]
        self._ends = EndWords(area)
        self._here_line = canvas.lines(area, theme.RULE, theme.THIN)
        self._here = bqplot.Scatter(
            x=[], y=[], scales=area.scales, colors=[theme.PAPER], stroke=theme.INK, stroke_width=2.0, default_size=90,
            enable_hover=False,
        )  # fmt: skip
        self._answer = bqplot.Scatter(
            x=[], y=[], scales=area.scales, colors=[theme.COMPUTED], default_size=70, enable_hover=False
        )
        self._answer_words = canvas.texts(area, theme.COMPUTED, bold=True)
        self._here_words = canvas.texts(area, bold=True)
        self._titles = canvas.texts(area, theme.GREY)
        self._foot = canvas.texts(area, theme.GREY, align="middle")
        self._x_axis = canvas.axis(area.x, "bottom", [0.0, 1.0])
        self._y_axis = canvas.axis(area.y, "left", [0.0, 1.0])
        self.figure = canvas.figure(area, _ROOM, self._in_order(), [self._x_axis, self._y_axis])

    def update(self, curves: Curves, here: Here | None = None) -> None:
        """New curves and the present condition. A curve without one finite point raises ValueError."""
        x = np.asarray(curves.x, dtype=float)
        manual = np.asarray(curves.manual, dtype=float)
        turns = [(name, np.asarray(speeds, dtype=float)) for name, speeds in curves.turns]
        if len(turns) != len(self._turns):
            raise ValueError(f"this figure was built for {len(self._turns)} computed lines, not {len(turns)}")
        band = [
            np.asarray(edge, dtype=float) for edge in (curves.onset_lower, curves.onset_central, curves.onset_upper)
        ]
        band_x = np.asarray(curves.onset_x, dtype=float)
        if not np.any(np.isfinite(manual)):
            raise ValueError("the manual's VNE has no value anywhere on this figure")
        computed = [speeds for _, speeds in turns]
        self._set_limits(x, [manual, *computed, *band], computed, here)
        grown = self._draw_band(band_x, band)
        grown |= self._manual.update(x, manual)
        merged = [name for name, speeds in turns if _same(speeds, manual)]
        grown |= self._draw_turns(x, turns, merged, here)
        self._write_ends(x, manual, [turn for turn in turns if turn[0] not in merged], (band_x, band), merged)
        self._draw_here(here)
        if grown:
            self.figure.marks = self._in_order()

    def _in_order(self) -> list[bqplot.Mark]:
        marks = [*self._band, self._here_line, *self._middle.marks]
        for turn in self._turns:
            marks += turn.marks
        return [
            *marks, *self._manual.marks, self._stops, *self._stop_words, *self._ends.marks,
            self._here, self._answer, self._answer_words,
            self._here_words, self._titles, self._foot,
        ]  # fmt: skip

    def _set_limits(self, x: Floats, speeds: Sequence[Floats], lines: Sequence[Floats], here: Here | None) -> None:
        """Round limits round everything shown, with room for words over all and under the ends of `lines`."""
        everything = np.concatenate([*speeds, _speeds(here)])
        finite = everything[np.isfinite(everything)]
        step = 10.0 if np.ptp(finite) <= 120.0 else 20.0
        low, high = (
            math.floor((finite.min() - 0.12 * np.ptp(finite)) / step) * step,
            math.ceil((finite.max() + 0.13 * np.ptp(finite)) / step) * step,
        )
        area = self._area
        stops = [float(speed[place]) for speed in lines for place in _stops(speed)]
        while stops and low > 0.0 and (min(stops) - low) / (high - low) * area.height < _UNDER:
            low -= step
        canvas.rescale(area, (float(x[0]), float(x[-1]), max(low, 0.0), high))
        canvas.set_ticks(self._x_axis, canvas.ticks(float(x[0]), float(x[-1]), 5))
        canvas.set_ticks(self._y_axis, canvas.ticks(max(low, 0.0), high, 6))
        write(self._titles, [(area.x_at(-_ROOM.left + 2.0), area.y_at(-18.0), self._words[1])])
        write(self._foot, [(area.x_at(area.width / 2.0), area.y_at(area.height + 36.0), self._words[0])])

    def _draw_band(self, x: Floats, band: Sequence[Floats]) -> bool:
        lower, central, upper = band
        runs = [run for run in canvas.finite_runs(x, lower) if run[0].size > 1]
        missing = len(runs) - len(self._band)
        self._band += [canvas.patch(self._area, theme.BAND) for _ in range(missing)]
        for index, mark in enumerate(self._band):
            if index < len(runs):
                part = np.isin(x, runs[index][0])
                top_x, top = _top(x[part], upper[part], float(self._area.y.max))
                put(mark, np.concatenate([x[part], top_x[::-1]]), np.concatenate([lower[part], top[::-1]]))
            else:
                put(mark, [], [])
        return self._middle.update(x, central) or missing > 0

    def _draw_turns(
        self, x: Floats, turns: Sequence[tuple[str, Floats]], merged: Sequence[str], here: Here | None
    ) -> bool:
        """The computed lines; where one ends before the figure does, a bar across its end says so."""
        grown = False
        area = self._area
        bars_x, bars_y = [], []
        ends: list[tuple[str, float, float]] = []
        for curve, (name, speeds) in zip(self._turns, turns, strict=True):
            grown |= curve.update([], []) if name in merged else curve.update(x, speeds)
            for place in [] if name in merged else _stops(speeds):
                end, speed = float(x[place]), float(speeds[place])
                across, down = area.across(end), area.down(speed)
                ends.append((name, across, down))
                bars_x.append([end, end])
                bars_y.append([area.y_at(down - 6.0), area.y_at(down + 6.0)])
        put(self._stops, bars_x, bars_y)
        rings = [] if here is None else [(area.across(here.x), area.down(speed)) for speed in _speeds(here)]
        self._write_stops(ends, None if here is None else area.across(here.x), rings)
        return grown

    def _write_stops(
        self, ends: Sequence[tuple[str, float, float]], here: float | None, rings: Sequence[tuple[float, float]]
    ) -> None:
        """Words under the ends (name, pixels across and down): heavier, higher or steeper only lowers a line."""
        area, width = self._area, canvas.text_width("chart ends")
        words: list[list[tuple[float, float, str]]] = [[], []]
        # Boxes (left, right, top, bottom) in pixels that words keep clear of.
        taken = [(across - 9.0, across + 9.0, down - 9.0, down + 9.0) for across, down in rings]
        for name, across, down in sorted(ends, key=lambda end: end[2]):
            left = across > 0.6 * area.width or (here is not None and -8.0 < here - across < width)
            edge = across - width if left else across
            top = down + 16.0
            while any(a < edge + width and edge < b and c < top + 22.0 and top - 8.0 < d for a, b, c, d in taken):
                top += 2.0
            taken.append((edge, edge + width, top - 8.0, top + 22.0))
            place = area.x_at(across + (2.0 if left else -2.0))
            rows = (name + ",", "chart ends")
            words[left] += [(place, area.y_at(top + 14.0 * row), text) for row, text in enumerate(rows)]
        for mark, places in zip(self._stop_words, words, strict=True):
            write(mark, places)

    def _write_ends(
        self,
        x: Floats,
        manual: Floats,
        turns: Sequence[tuple[str, Floats]],
        band: tuple[Floats, Sequence[Floats]],
        merged: Sequence[str],
    ) -> None:
        level = tuple(f"and {name}" for name in merged)
        ends = [_end(x, manual, ("VNE, manual", *level), theme.INK, bold=True)]
        for name, speeds in turns:
            if np.isfinite(speeds[-1]):
                ends.append(_end(x, speeds, (name,), theme.COMPUTED))
        lower, _, upper = band[1]
        if np.any(np.isfinite(lower)):
            rows: tuple[str, ...] = ("onset band,", "softer than", "the chart")
            if np.any(np.isfinite(lower) & ~np.isfinite(upper)):
                rows = (*rows, "(open at the top)")
            upper = np.where(np.isfinite(upper), upper, self._area.y.max)
            ends.append(_end(band[0], (lower + upper) / 2.0, rows, theme.GREY))
        self._ends.update(ends)

    def _draw_here(self, here: Here | None) -> None:
        if here is None:
            for mark in (self._here, self._answer, self._here_line):
                put(mark, [], [])
            write(self._here_words, [])
            write(self._answer_words, [])
            return
        area = self._area
        top = area.y_at(-4.0)
        put(self._here_line, [here.x, here.x], [area.y.min, top])
        for mark, speed in ((self._here, here.speed), (self._answer, here.answer)):
            put(mark, [] if speed is None else [here.x], [] if speed is None else [speed])
        longest = max(canvas.text_width(here.words), canvas.text_width(here.answer_words))
        right = area.across(here.x) > area.width - longest - 8.0
        place = area.x_at(area.across(here.x) + (-6.0 if right else 6.0))
        align = "end" if right else "start"
        write(self._here_words, [(place, area.y_at(2.0), here.words)], align=align)
        write(
            self._answer_words, [(place, area.y_at(16.0), here.answer_words)] if here.answer_words else [], align=align
        )


def _stops(speeds: Floats) -> list[int]:
    """Where a line begins or ends inside the figure: the outer ends of its values, if not at the figure's own."""
    finite = np.flatnonzero(np.isfinite(speeds))
    if finite.size == 0:
        return []
    first, last = int(finite[0]), int(finite[-1])
    return ([first] if first > 0 else []) + ([last] if last < speeds.size - 1 else [])


def _speeds(here: Here | None) -> list[float]:
    return [] if here is None else [speed for speed in (here.speed, here.answer) if speed is not None]


def _same(one: Floats, other: Floats) -> bool:
    gaps = np.array_equal(np.isfinite(one), np.isfinite(other))
    return gaps and bool(np.nanmax(np.abs(one - other), initial=0.0) < _SAME)


def _top(x: Floats, upper: Floats, ceiling: float) -> tuple[Floats, Floats]:
    """The band's top edge: straight between neighbours that both have an upper end, else open up to the ceiling."""
    both = np.isfinite(upper[:-1]) & np.isfinite(upper[1:])
    left, right = np.where(both, upper[:-1], ceiling), np.where(both, upper[1:], ceiling)
    across = np.stack([x[:-1], x[1:]], axis=1).ravel()
    return across, np.stack([left, right], axis=1).ravel()


def _end(x: Floats, y: Floats, rows: tuple[str, ...], colour: str, *, bold: bool = False) -> End:
    last = int(np.flatnonzero(np.isfinite(y))[-1])
    return End(float(x[last]), float(y[last]), rows, colour, bold)
