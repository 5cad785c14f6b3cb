"""Speed against one quantity: the manual's VNE, the equivalent VNE of a few turns, and the onset band behind them."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import bqplot
import numpy as np
from numpy.typing import ArrayLike, NDArray

from briefkit.figures import canvas, theme
from briefkit.figures.canvas import Margins, put, write
from briefkit.figures.curves import Curve, End, EndWords
from briefkit.figures.placing import Crowd, widest

Floats = NDArray[np.float64]

_ROOM: Final = Margins(40, 122, 64, 46)
_HEIGHT: Final = 374
_SAME: Final = 0.05  # speeds closer than this, everywhere, are one line
_PALE: Final = 0.55  # of the band's own grey, where it lies above VNE
_LETTER: Final = 6.6  # px, of the words inside the figure
_ROW: Final = 14.0


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


@dataclass(frozen=True, eq=False)
class Curves:
    """What the figure shows, in the units it is printed in; NaN marks a gap (refused), and a gap stays a gap.

    `x` (n,) rising; `manual` (n,) the manual's VNE; `turns` (name, (n,) speeds) of the equivalent VNE;
    `onset_lower`, `onset_central`, `onset_upper` (m,) the absolute onset band over `onset_x` (m,) rising; where only
    its upper end has no value the band is drawn open, up to the end of the calibration or the top of the figure.
    `parts` are, for each turn, the places where it leaves the manual's VNE, with their words. `ceiling` is where the
    airspeed calibration ends, with its words: nothing lies above it. `foot` says what bounds the figure left and right
    and `limited` whether that is the manual.
    """

    x: ArrayLike
    manual: ArrayLike
    turns: Sequence[tuple[str, ArrayLike]]
    onset_x: ArrayLike
    onset_lower: ArrayLike
    onset_central: ArrayLike
    onset_upper: ArrayLike
    parts: Sequence[Sequence[tuple[float, str]]] = ()
    ceiling: tuple[float, str] | None = None
    foot: str = ""
    limited: bool = False


class BoundaryFigure:
    """A live bqplot figure of the boundary: built once, changed in place by `update`."""

    def __init__(self, *, x_words: str, speed_words: str, turns: int) -> None:
        """`x_words` and `speed_words` name the axes with their units; `turns` is how many lines are computed."""
        if not 0 <= turns <= len(theme.DASHES):
            raise ValueError(f"up to {len(theme.DASHES)} computed lines can be told apart, not {turns}")
        area = self._area = canvas.plane((0.0, 1.0, 0.0, 1.0), theme.WIDTH, _HEIGHT, _ROOM)
        self._words = (x_words, speed_words)
        self._shown: tuple[Curves, tuple[float, ...]] | None = None
        self._band = [canvas.patch(area, theme.BAND, _PALE), canvas.patch(area, theme.BAND)]
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
        lines = _Lines.of(curves)
        if not np.any(np.isfinite(lines.manual)):
            raise ValueError("the manual's VNE has no value anywhere on this figure")
        limits = _limits(lines, here, self._area.height)
        if self._shown is None or self._shown[0] is not curves or self._shown[1] != limits:
            self._set_limits(limits, curves)
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
        marks = [*self._band, self._limits, self._here_line, *self._middle.marks]
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

    def _draw_band(self, lines: _Lines) -> bool:
        """The band in two greys: as it is under VNE, pale above, where it is no speed to fly."""
        pale: list[tuple[Floats, Floats]] = []
        full: list[tuple[Floats, Floats]] = []
        for across, lower, upper, vne in lines.stretches(self._area.y.max):
            pale.append(_polygon(across, np.maximum(lower, np.minimum(vne, upper)), upper))
            full.append(_polygon(across, lower, np.maximum(lower, np.minimum(vne, upper))))
        grown = False
        shown = [*pale, *full]
        while len(self._band) < len(shown):
            self._band.append(canvas.patch(self._area, theme.BAND))
            grown = True
        for index, mark in enumerate(self._band):
            across, up = shown[index] if index < len(shown) else (np.empty(0), np.empty(0))
            put(mark, across, up, fill_opacities=[_PALE if index < len(pale) else 1.0])
        return self._middle.update(lines.band_x, lines.central) or grown

    def _write_ends(self, lines: _Lines) -> None:
        level = tuple(f"and {name}" for name in lines.merged)
        ends = [_end(lines.x, lines.manual, ("VNE, manual", *level), theme.INK, bold=True)]
        for name, speeds in lines.turns:
            if name not in lines.merged and np.isfinite(speeds[-1]):
                ends.append(_end(lines.x, speeds, (name,), theme.COMPUTED))
        if np.any(np.isfinite(lines.central)):
            ends.append(_end(lines.band_x, lines.central, ("first signs, 12°",), theme.GREY))
        if np.any(np.isfinite(lines.lower)):
            rows: tuple[str, ...] = ("onset band,", "softer than", "the chart")
            if lines.above:
                rows = (*rows[:2], "the chart,", "pale above VNE")
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

    def _name_places(self, lines: _Lines, curves: Curves, here: Here | None) -> None:
        """Bars where a line ends before the figure does, diamonds where it leaves VNE; words by both, clear of all."""
        area, crowd = self._area, Crowd(self._area)
        crowd.add_line(lines.x, lines.manual)
        for name, speeds in lines.turns:
            if name not in lines.merged:
                crowd.add_line(lines.x, speeds)
        crowd.add_line(lines.band_x, lines.central, cost=30.0)
        if here is not None:
            crowd.add_line([here.x - 1e-9, here.x + 1e-9], [area.y.min, area.y.max], cost=20.0)
            for speed in _speeds(here):
                crowd.add_mark(area.across(here.x), area.down(speed))
        if curves.ceiling is not None:
            crowd.add_line([lines.x[0], lines.x[-1]], [curves.ceiling[0]] * 2)
        asked: list[tuple[float, float, tuple[str, ...]]] = []
        bars_x, bars_y = [], []
        for name, speeds in lines.turns:
            for place in [] if name in lines.merged else _stops(speeds):
                across, down = area.across(float(lines.x[place])), area.down(float(speeds[place]))
                asked.append((across, down, ("chart ends",) if len(lines.turns) == 1 else (f"{name},", "chart ends")))
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


@dataclass(frozen=True, eq=False)
class _Lines:
    """The curves as arrays; `merged` names the turns that are the manual's line."""

    x: Floats
    manual: Floats
    turns: list[tuple[str, Floats]]
    band_x: Floats
    lower: Floats
    central: Floats
    upper: Floats
    ceiling: float
    merged: list[str]

    @classmethod
    def of(cls, curves: Curves) -> _Lines:
        manual = np.asarray(curves.manual, dtype=float)
        turns = [(name, np.asarray(speeds, dtype=float)) for name, speeds in curves.turns]
        return cls(
            x=np.asarray(curves.x, dtype=float),
            manual=manual,
            turns=turns,
            band_x=np.asarray(curves.onset_x, dtype=float),
            lower=np.asarray(curves.onset_lower, dtype=float),
            central=np.asarray(curves.onset_central, dtype=float),
            upper=np.asarray(curves.onset_upper, dtype=float),
            ceiling=math.nan if curves.ceiling is None else curves.ceiling[0],
            merged=[name for name, speeds in turns if _same(speeds, manual)],
        )

    @property
    def open(self) -> bool:
        """Whether the band has a lower end somewhere that has no upper one."""
        return bool(np.any(np.isfinite(self.lower) & ~np.isfinite(self.upper)))

    @property
    def above(self) -> bool:
        """Whether some of the band lies above the manual's VNE."""
        upper = np.where(np.isfinite(self.lower) & ~np.isfinite(self.upper), np.inf, self.upper)
        with np.errstate(invalid="ignore"):
            return bool(np.any(upper > np.interp(self.band_x, self.x, self.manual)))

    def stretches(self, top: float) -> list[tuple[Floats, Floats, Floats, Floats]]:
        """(x, lower, upper, VNE) of each stretch of the band, at enough places to cut it along VNE."""
        top = self.ceiling if math.isfinite(self.ceiling) else top
        upper = np.where(np.isfinite(self.upper), self.upper, top)
        found = []
        for across, lower in canvas.finite_runs(self.band_x, self.lower):
            fine = np.union1d(np.linspace(across[0], across[-1], 121), across)
            vne = np.interp(fine, self.x, np.where(np.isfinite(self.manual), self.manual, top))
            found.append((fine, np.interp(fine, across, lower), np.interp(fine, self.band_x, upper), vne))
        return found


def _polygon(x: Floats, lower: Floats, upper: Floats) -> tuple[Floats, Floats]:
    return np.concatenate([x, x[::-1]]), np.concatenate([lower, upper[::-1]])


def _limits(lines: _Lines, here: Here | None, height: float) -> tuple[float, float, float, float]:
    """Round limits round everything shown, with room under the lines and, where the calibration ends, over it."""
    everything = np.concatenate(
        [lines.manual, *(speeds for _, speeds in lines.turns), lines.lower, lines.central, lines.upper, _speeds(here)]
    )
    finite = everything[np.isfinite(everything)]
    reach = float(np.ptp(finite))
    step = 10.0 if reach <= 120.0 else 20.0
    low = max(math.floor((finite.min() - 0.12 * reach) / step) * step, 0.0)
    high = math.ceil((finite.max() + 0.03 * reach) / step) * step
    if math.isfinite(lines.ceiling) and (lines.open or lines.ceiling < high + 0.1 * reach):
        high = max(high, lines.ceiling)
        room = 20.0  # px over the calibration's end, for its words
        high = max(high, lines.ceiling + (lines.ceiling - low) * room / (height - room))
    return float(lines.x[0]), float(lines.x[-1]), low, high


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


def _end(x: Floats, y: Floats, rows: tuple[str, ...], colour: str, *, bold: bool = False) -> End:
    last = int(np.flatnonzero(np.isfinite(y))[-1])
    return End(float(x[last]), float(y[last]), rows, colour, bold)
