"""Knots below VNE before a turn, as stairs: one tread a row of masses, the far side hatched "not briefed".

Stairs and never a smooth curve, because a smooth curve is flown along.
"""

from __future__ import annotations

from collections.abc import Sequence

import bqplot
import numpy as np
from numpy.typing import ArrayLike

from briefkit.figures import canvas, theme
from briefkit.figures.canvas import Margins, put, write
from briefkit.figures.hatch import hatch

_ROOM = Margins(78, 26, 34, 44)
_ROW = 26.0  # least height of a row [px]
_RISE = 150.0  # shared out by mass range, beyond the least height [px]


def stairs_figure(
    edges: ArrayLike,
    edge_texts: Sequence[str],
    reductions: Sequence[float | None],
    texts: Sequence[str],
    *,
    step: float,
    speed_words: str,
) -> bqplot.Figure:
    """The stairs of one block, heaviest row on top as in the table beside it.

    `edges` (n + 1,) rising masses, the lower and upper edge of each row, with their `edge_texts` as printed;
    `reductions` (n,) how far below VNE each row is briefed, whole multiples of `step`, None where no turn is briefed;
    `texts` (n,) what the row says; `speed_words` names the horizontal axis with its unit. Raises ValueError for shapes
    that do not match, masses that do not rise, and reductions that are not on a step.
    """
    masses = np.asarray(edges, dtype=float)
    count = masses.size - 1
    if count < 1 or {len(reductions), len(texts), len(edge_texts) - 1} != {count}:
        raise ValueError(f"{masses.size} mass edges need {count} reductions and texts")
    if not (np.all(np.isfinite(masses)) and np.all(np.diff(masses) > 0.0)):
        raise ValueError(f"masses must rise: {masses}")
    for reduction in reductions:
        if reduction is not None and (reduction < 0.0 or abs(reduction / step - round(reduction / step)) > 1e-9):
            raise ValueError(f"a reduction of {reduction:g} is not on a step of {step:g}")
    heights = _ROW + _RISE * np.diff(masses) / np.ptp(masses) * min(1.0, count / 4.0)
    levels = np.concatenate([[0.0], np.cumsum(heights)])
    far = max([r for r in reductions if r is not None], default=0.0) + 4.0 * step
    height = round(levels[-1]) + _ROOM.top + _ROOM.bottom
    area = canvas.plane((-far, 0.0, 0.0, float(levels[-1])), theme.WIDTH, height, _ROOM)
    marks = [*_forbidden(area, levels, reductions), *_treads(area, levels, reductions, far)]
    marks += _words(area, levels, reductions, texts, speed_words)
    places = -np.arange(0.0, far + 0.5 * step, step)
    names = ["VNE" if place == 0.0 else f"{-place:g}" for place in places]
    axes = [
        canvas.axis(area.x, "bottom", places[::-1], names[::-1]),
        canvas.axis(area.y, "left", levels, list(edge_texts)),
    ]
    return canvas.figure(area, _ROOM, marks, axes)


def _forbidden(area: canvas.Plane, levels: canvas.Floats, reductions: Sequence[float | None]) -> list[bqplot.Mark]:
    """The hatched far side: everything between the stairs and VNE, and whole rows where no turn is briefed."""
    ground, strokes = canvas.patch(area, theme.BAND), canvas.lines(area, theme.GREY, 0.8)
    corners_x, corners_y, x, y = [], [], [], []
    for reduction, low, high in zip(reductions, levels[:-1], levels[1:], strict=True):
        left = area.x.min if reduction is None else -reduction
        if left < 0.0:
            corners_x.append([left, 0.0, 0.0, left])
            corners_y.append([low, low, high, high])
            # Hatched in pixels, so that the strokes keep their angle.
            across = [area.across(left), area.width, area.width, area.across(left)]
            px, py = hatch(across, [low, low, high, high], 7.0)
            x += [[area.x_at(a) for a in stroke] for stroke in px.tolist()]
            y += py.tolist()
    shade = [theme.BAND] * max(len(corners_x), 1)
    put(ground, corners_x, corners_y, colors=shade, fill_colors=shade, fill_opacities=[1.0] * len(shade))
    put(strokes, x, y, colors=[theme.GREY])
    return [ground, strokes]


def _treads(
    area: canvas.Plane, levels: canvas.Floats, reductions: Sequence[float | None], far: float
) -> list[bqplot.Mark]:
    """The stairs in blue, VNE in black, and a hair line between rows on the near side."""
    stairs, limit = canvas.lines(area, theme.COMPUTED, theme.HEAVY), canvas.lines(area, theme.INK, theme.HEAVY)
    rules = canvas.lines(area, theme.RULE, theme.THIN)
    x, y = [], []
    for reduction, low, high in zip(reductions, levels[:-1], levels[1:], strict=True):
        place = -far if reduction is None else -reduction
        x += [place, place]
        y += [low, high]
    put(stairs, x, y)
    put(limit, [0.0, 0.0], [0.0, float(levels[-1])], apply_clip=False)
    inner = levels[1:-1]
    put(rules, [[-far, 0.0]] * len(inner), [[level, level] for level in inner], colors=[theme.RULE])
    return [rules, stairs, limit]


def _words(
    area: canvas.Plane,
    levels: canvas.Floats,
    reductions: Sequence[float | None],
    texts: Sequence[str],
    speed_words: str,
) -> list[bqplot.Mark]:
    plate = canvas.patch(area, theme.PAPER)  # words on hatching cannot be read
    said, foot = canvas.texts(area, dx=8), canvas.texts(area, theme.GREY, align="middle")
    heads = [canvas.texts(area, theme.INK, bold=True, align=align) for align in ("start", "end")]
    plates: list[list[tuple[float, float]]] = []
    middles = (levels[:-1] + levels[1:]) / 2.0
    write(said, [(area.x.min, middle, text) for middle, text in zip(middles.tolist(), texts, strict=True)])
    for reduction, middle, text in zip(reductions, middles.tolist(), texts, strict=True):
        if reduction is None:
            start, wide = area.x_at(2.0), area.x_at(16.0 + canvas.text_width(text))
            low, high = middle - 10.0, middle + 10.0
            corners = [(start, low), (wide, low), (wide, high), (start, high)]
            plates.append(corners)
    sheet = [theme.PAPER] * max(len(plates), 1)
    put(
        plate,
        [[corner[0] for corner in corners] for corners in plates],
        [[corner[1] for corner in corners] for corners in plates],
        colors=sheet,
        fill_colors=sheet,
        fill_opacities=[1.0] * len(sheet),
    )
    write(foot, [(area.x_at(area.width / 2.0), area.y_at(area.height + 36.0), speed_words)])
    above = area.y_at(-16.0)
    write(heads[0], [(area.x.min, above, "briefed")])
    write(heads[1], [(0.0, above, "not briefed")] if any(r is None or r > 0.0 for r in reductions) else [])
    return [plate, said, foot, *heads]
