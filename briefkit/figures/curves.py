"""Curves that may have gaps, and the words at their ends: no legends, nothing drawn across a gap, no words on words."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import bqplot
import numpy as np
from numpy.typing import ArrayLike, NDArray

from briefkit.figures import canvas, theme
from briefkit.figures.canvas import Plane, put, write

_NOTHING = np.empty(0)
_ROW = 14.0  # px between rows of words at a line's end


class Curve:
    """A line drawn as its finite stretches, each its own mark; a stretch of one point becomes a dot."""

    def __init__(self, area: Plane, colour: str, width: float = theme.LINE, dash: str = "solid") -> None:
        self._area, self._colour, self._width, self._dash = area, colour, width, dash
        self.marks = [canvas.lines(area, colour, width, dash)]
        self._sent: tuple[NDArray[np.float64], NDArray[np.float64], str | None] | None = None

    def update(self, x: ArrayLike, y: ArrayLike, dash: str | None = None) -> bool:
        """New data; True if a mark had to be added (the figure then needs its list of marks again).

        The same data as before are not sent again.
        """
        new = np.array(x, dtype=float), np.array(y, dtype=float), dash
        old, self._sent = self._sent, new
        if (
            old is not None
            and old[2] == dash
            and all(np.array_equal(one, other, equal_nan=True) for one, other in zip(old[:2], new[:2], strict=True))
        ):
            return False
        runs = canvas.finite_runs(x, y)
        missing = len(runs) - len(self.marks)
        self.marks += [canvas.lines(self._area, self._colour, self._width, self._dash) for _ in range(missing)]
        more = {} if dash is None else {"line_style": dash}
        for index, mark in enumerate(self.marks):
            across, up = runs[index] if index < len(runs) else (_NOTHING, _NOTHING)
            put(mark, across, up, marker="circle" if across.size == 1 else None, marker_size=20, **more)
        return missing > 0


@dataclass(frozen=True)
class End:
    """Words for the end of a line: where the line ends (data), the rows of words, their colour and weight."""

    x: float
    y: float
    rows: tuple[str, ...]
    colour: str
    bold: bool = False


class EndWords:
    """Words in the right margin at the ends of lines, moved apart where lines meet, with a hair line where moved."""

    def __init__(self, area: Plane) -> None:
        self._area = area
        self._plain = canvas.texts(area)
        self._bold = canvas.texts(area, bold=True)
        self._leads = canvas.lines(area, theme.GREY, theme.THIN, apply_clip=False)
        self.marks: list[bqplot.Mark] = [self._leads, self._plain, self._bold]

    def update(self, ends: Sequence[End]) -> None:
        area = self._area
        targets = [area.down(end.y) for end in ends]
        heights = [_ROW * len(end.rows) + 3.0 for end in ends]
        centres = canvas.spread_out(targets, heights, -12.0, area.height + 12.0)
        lead_x, lead_y = [], []
        for mark, bold in ((self._plain, False), (self._bold, True)):
            places, colours = [], []
            for end, centre in zip(ends, centres, strict=True):
                if end.bold is bold:
                    places += _rows(area, centre, end.rows)
                    colours += [end.colour] * len(end.rows)
            write(mark, places, colors=colours or [theme.INK])
        for end, target, centre in zip(ends, targets, centres, strict=True):
            if abs(target - centre) > 5.0:
                lead_x.append([end.x, area.x_at(area.width + 10.0)])
                lead_y.append([end.y, area.y_at(centre)])
        put(self._leads, lead_x, lead_y)


def _rows(area: Plane, centre: float, rows: Sequence[str]) -> list[tuple[float, float, str]]:
    top = centre - _ROW * (len(rows) - 1) / 2.0
    x = area.x_at(area.width + 14.0)
    return [(x, area.y_at(top + _ROW * index), row) for index, row in enumerate(rows)]
