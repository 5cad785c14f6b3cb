"""Speed against one quantity: the manual's VNE, the equivalent VNE of a few turns, and the onset band behind them."""

from __future__ import annotations

import math
from typing import Final

import bqplot
import numpy as np
from numpy.typing import NDArray

from briefkit.figures import canvas, theme
from briefkit.figures.boundary_lines import Curves, Here, Lines, limits_of, speeds_of, stops
from briefkit.figures.canvas import Margins, put, write
from briefkit.figures.curves import Curve, End, EndWords
from briefkit.figures.placing import Crowd, widest

Floats = NDArray[np.float64]

_ROOM: Final = Margins(40, 122, 64, 46)
_HEIGHT: Final = 374
_PALE: Final = 0.55  # of the band's own grey, where it lies above VNE
_LETTER: Final = 6.6  # px, of the words inside the figure
_ROW: Final = 14.0


class BoundaryFigure:
    """A live bqplot figure of the boundary: built once, changed in place by `update`."""

    def __init__(self, *, x_words: str, speed_words: str, turns: int) -> None:
        """`x_words` and `speed_words` name the axes with their units; `turns` is how many lines are computed."""
        if not 0 <= turns <= len(theme.DASHES):
            raise ValueError(f"up to {len(theme.DASHES)} computed lines can be told apart, not {turns}")
        area = self._area = canvas.plane((0.0, 1.0, 0.0, 1.0), theme.WIDTH, _HEIGHT, _ROOM)
        self._words = (x_words, speed_words)
        self._shown: tuple[Curves, tuple[float, ...]] | None = None
        self._bounds: tuple[object, ...] = ()
        self._pale = [canvas.patch(area, theme.BAND, _PALE)]
        self._full = [canvas.patch(area, theme.BAND)]
        self._middle = Curve(area, theme.GREY, theme.THIN, "dotted")
        self._manual = Curve(area, theme.INK, theme.HEAVY)
        self._turns = [Curve(area, theme.COMPUTED, theme.LINE, theme.DASHES[index]) for index in range(turns)]
        self._stops = canvas.lines(area, theme.COMPUTED, theme.LINE)
        self._parts = bqplot.Scatter(
            x=[], y=[], scales=area.scales, colors=[theme.COMPUTED], marker="diamond", default_size=44,
            enable_hover=False,
        )  # fmt: skip
        self._named = canvas.texts(area, theme.COMPUTED)
        self._limits = canvas.lines(area, theme.GREY, theme.THIN, apply_clip=False)
        self._limit_words = canvas.texts(area, theme.GREY)
        self._ends = EndWords(area)
        self._here_line = canvas.lines(area, theme.GREY, theme.THIN, "dotted", apply_clip=False)
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
        """New curves and the present condition. A curve without one finite point raises ValueError.

        Curves that are the same object as before, within the same limits, are not sent again.
        """
        if len(curves.turns) != len(self._turns):
            raise ValueError(f"this figure was built for {len(self._turns)} computed lines, not {len(curves.turns)}")
        lines = Lines.of(curves)
        if not np.any(np.isfinite(lines.manual)):
            raise ValueError("the manual's VNE has no value anywhere on this figure")
        limits = limits_of(lines, here, self._area.height)
        if self._shown is None or self._shown[0] is not curves or self._shown[1] != limits:
            bounds = limits, curves.foot, curves.ceiling, curves.limited
            if self._bounds != bounds:
                self._set_limits(limits, curves)
                self._bounds = bounds
            grown = self._draw_band(lines)
            grown |= self._manual.update(lines.x, lines.manual)
            for curve, (name, speeds) in zip(self._turns, lines.turns, strict=True):
                grown |= curve.update([], []) if name in lines.merged else curve.update(lines.x, speeds)
            self._write_ends(lines)
            if grown:
                self.figure.marks = self._in_order()
            self._shown = curves, limits
        self._draw_here(here)
        self._name_ceiling(curves, here)
        self._name_places(lines, curves, here)

    def _in_order(self) -> list[bqplot.Mark]:
        marks = [*self._pale, *self._full, self._limits, self._here_line, *self._middle.marks]
        for turn in self._turns:
            marks += turn.marks
        return [
            *marks, *self._manual.marks, self._stops, self._parts, self._named, *self._ends.marks, self._limit_words,
            self._here, self._answer, self._answer_words, self._here_words, self._titles, self._foot,
        ]  # fmt: skip

    def _set_limits(self, limits: tuple[float, ...], curves: Curves) -> None:
        """Scales, axes and their words; where the manual's permitted range and the calibration end."""
        area = self._area
        x_low, x_high, low, high = limits
        canvas.rescale(area, (x_low, x_high, low, high))
        canvas.set_ticks(self._x_axis, canvas.ticks(x_low, x_high, 5))
        canvas.set_ticks(self._y_axis, canvas.ticks(low, high, 6))
        write(self._titles, [(area.x_at(-_ROOM.left + 2.0), area.y_at(-_ROOM.top + 14.0), self._words[1])])
        foot = f"{self._words[0]}; {curves.foot}" if curves.foot else self._words[0]
        write(self._foot, [(area.x_at(area.width / 2.0), area.y_at(area.height + 37.0), foot)])
        across, up = [], []
        if curves.limited:
            across += [[x_low, x_low], [x_high, x_high]]
            up += [[low, high], [low, high]]
        if curves.ceiling is not None and low < curves.ceiling[0] <= high:
            across.append([x_low, x_high])
            up.append([curves.ceiling[0]] * 2)
        put(self._limits, across, up)

    def _draw_band(self, lines: Lines) -> bool:
        """The band in two greys: as it is under VNE, pale above, where it is no speed to fly."""
        grown = False
        stretches = lines.stretches(self._area.y.max)
        for above, patches, opacity in ((True, self._pale, _PALE), (False, self._full, 1.0)):
            while len(patches) < len(stretches):
                patches.append(canvas.patch(self._area, theme.BAND, opacity))
                grown = True
            for index, mark in enumerate(patches):
                if index >= len(stretches):
                    put(mark, [], [])
                    continue
                across, lower, upper, vne = stretches[index]
                edge = np.maximum(lower, np.minimum(vne, upper))  # along VNE, within the band
                put(mark, *(_polygon(across, edge, upper) if above else _polygon(across, lower, edge)))
        return self._middle.update(lines.band_x, lines.central) or grown

    def _write_ends(self, lines: Lines) -> None:
        level = tuple(row for name in lines.merged for row in _fitting(f"and {name}"))
        ends = [_end(lines.x, lines.manual, ("VNE, manual", *level), theme.INK, bold=True)]
        for name, speeds in lines.turns:
            if name not in lines.merged and np.isfinite(speeds[-1]):
                ends.append(_end(lines.x, speeds, (name,), theme.COMPUTED))
        if np.any(np.isfinite(lines.central)):
            ends.append(_end(lines.band_x, lines.central, ("first signs, 12°",), theme.GREY))
        if np.any(np.isfinite(lines.lower)):
            rows: tuple[str, ...] = ("onset band,", "softer than", "the chart")
            if lines.above:
                rows = (*rows[:2], "the chart,", "faint above VNE")
            top = lines.ceiling if math.isfinite(lines.ceiling) else self._area.y.max
            if lines.open and not math.isfinite(lines.ceiling):
                rows = (*rows, "(open at the top)")
            upper = np.where(np.isfinite(lines.upper), lines.upper, top)
            ends.append(_end(lines.band_x, (lines.lower + upper) / 2.0, rows, theme.GREY))
        self._ends.update(ends)

    def _name_ceiling(self, curves: Curves, here: Here | None) -> None:
        """Where the calibration ends, on the side that the present condition leaves free."""
        area = self._area
        if curves.ceiling is None or not area.y.min < curves.ceiling[0] <= area.y.max:
            write(self._limit_words, [])
            return
        top, text = curves.ceiling
        right = here is not None and area.across(here.x) < 0.5 * area.width
        place = area.x_at(area.width - 6.0 if right else 6.0)
        write(self._limit_words, [(place, area.y_at(area.down(top) - 9.0), text)], align="end" if right else "start")

    def _name_places(self, lines: Lines, curves: Curves, here: Here | None) -> None:
        """Bars where a line ends before the figure does, diamonds where it leaves VNE; words by both, clear of all."""
        area, crowd = self._area, Crowd(self._area)
        crowd.add_line(lines.x, lines.manual)
        for name, speeds in lines.turns:
            if name not in lines.merged:
                crowd.add_line(lines.x, speeds)
        crowd.add_line(lines.band_x, lines.central, cost=30.0)
        if here is not None:
            crowd.add_line([here.x - 1e-9, here.x + 1e-9], [area.y.min, area.y.max], cost=20.0)
            for speed in speeds_of(here):
                crowd.add_mark(area.across(here.x), area.down(speed))
        if curves.ceiling is not None:
            crowd.add_line([lines.x[0], lines.x[-1]], [curves.ceiling[0]] * 2)
        asked: list[tuple[float, float, tuple[str, ...]]] = []
        bars_x, bars_y = [], []
        for turn, (name, speeds) in enumerate(lines.turns):
            for end, place in enumerate([] if name in lines.merged else stops(speeds)):
                what = f"{curves.ended[turn][end] if curves.ended else 'chart'} ends"
                across, down = area.across(float(lines.x[place])), area.down(float(speeds[place]))
                asked.append((across, down, (what,) if len(lines.turns) == 1 else (f"{name},", what)))
                bars_x.append([float(lines.x[place])] * 2)
                bars_y.append([area.y_at(down - 6.0), area.y_at(down + 6.0)])
        put(self._stops, bars_x, bars_y)
        left = [place for turn in curves.parts for place in turn]
        at = [float(np.interp(x, lines.x, lines.manual)) for x, _ in left]
        put(self._parts, [x for x, _ in left], at)
        for (x, words), speed in zip(left, at, strict=True):
            crowd.add_mark(area.across(x), area.down(speed), 4.0)
            asked.append((area.across(x), area.down(speed), tuple(words.split("\n"))))
        named = []
        for across, down, rows in asked:
            box = crowd.place(across, down, widest(rows, _LETTER), _ROW * len(rows))
            if box is not None:
                named += [
                    (area.x_at(box[0]), area.y_at(box[1] + _ROW * (index + 0.5)), row) for index, row in enumerate(rows)
                ]
        write(self._named, named)

    def _draw_here(self, here: Here | None) -> None:
        if here is None:
            for mark in (self._here, self._answer, self._here_line):
                put(mark, [], [])
            write(self._here_words, [])
            write(self._answer_words, [])
            return
        area = self._area
        put(self._here_line, [here.x, here.x], [area.y.min, area.y_at(-8.0)])
        for mark, speed in ((self._here, here.speed), (self._answer, here.answer)):
            put(mark, [] if speed is None else [here.x], [] if speed is None else [speed])
        rows = [(self._here_words, here.words), (self._answer_words, here.answer_words)]
        rows = rows if here.answer_words else rows[:1]
        write(self._answer_words, [])
        for index, (mark, words) in enumerate(rows):
            half = 0.5 * canvas.text_width(words)
            middle = min(max(area.across(here.x), half - 4.0), area.width + _ROOM.right - half - 4.0)
            down = -16.0 - 15.0 * (len(rows) - 1 - index)
            write(mark, [(area.x_at(middle), area.y_at(down), words)], align="middle")


def _polygon(x: Floats, lower: Floats, upper: Floats) -> tuple[Floats, Floats]:
    return np.concatenate([x, x[::-1]]), np.concatenate([lower, upper[::-1]])


def _fitting(words: str) -> tuple[str, ...]:
    """Words at a line's end in as many rows as the margin needs."""
    if canvas.text_width(words) <= _ROOM.right - 4.0:
        return (words,)
    first, _, last = words.rpartition(" ")
    return (first, last)


def _end(x: Floats, y: Floats, rows: tuple[str, ...], colour: str, *, bold: bool = False) -> End:
    last = int(np.flatnonzero(np.isfinite(y))[-1])
    return End(float(x[last]), float(y[last]), rows, colour, bold)
