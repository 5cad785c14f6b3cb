"""What the figure builders share: scales, axes, marks with one look, words at line ends, runs of finite values."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import bqplot
import numpy as np
from ipywidgets import Layout
from numpy.typing import ArrayLike, NDArray

from briefkit.figures import theme
from briefkit.units import show_number

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Plane:
    """A plot area: its scales and its size in pixels, so that builders can speak of both."""

    x: bqplot.LinearScale
    y: bqplot.LinearScale
    width: float
    height: float

    @property
    def scales(self) -> dict[str, bqplot.LinearScale]:
        return {"x": self.x, "y": self.y}

    def x_at(self, pixel: float) -> float:
        """The abscissa `pixel` to the right of the plot area's left edge."""
        return float(self.x.min + (self.x.max - self.x.min) * pixel / self.width)

    def y_at(self, pixel: float) -> float:
        """The ordinate `pixel` below the plot area's top edge."""
        return float(self.y.max - (self.y.max - self.y.min) * pixel / self.height)

    def across(self, value: float) -> float:
        """Pixels from the left edge to an abscissa."""
        return float((value - self.x.min) / (self.x.max - self.x.min) * self.width)

    def down(self, value: float) -> float:
        """Pixels from the top edge down to an ordinate."""
        return float((self.y.max - value) / (self.y.max - self.y.min) * self.height)


@dataclass(frozen=True)
class Margins:
    """Room round a plot area [px]."""

    left: int
    right: int
    top: int
    bottom: int


def plane(limits: tuple[float, float, float, float], width: int, height: int, room: Margins) -> Plane:
    """A plot area for (x low, x high, y low, y high) inside a figure of `width` by `height` pixels."""
    x_low, x_high, y_low, y_high = (float(limit) for limit in limits)
    if not (x_low < x_high and y_low < y_high and all(map(math.isfinite, limits))):
        raise ValueError(f"axis limits must be finite and rising: {limits}")
    return Plane(
        bqplot.LinearScale(min=x_low, max=x_high, allow_padding=False),
        bqplot.LinearScale(min=y_low, max=y_high, allow_padding=False),
        width - room.left - room.right,
        height - room.top - room.bottom,
    )


def rescale(area: Plane, limits: tuple[float, float, float, float]) -> None:
    """Give a plot area new limits (x low, x high, y low, y high) in place."""
    with area.x.hold_sync():
        area.x.min, area.x.max = float(limits[0]), float(limits[1])
    with area.y.hold_sync():
        area.y.min, area.y.max = float(limits[2]), float(limits[3])


def figure(area: Plane, room: Margins, marks: Sequence[Any], axes: Sequence[bqplot.Axis] = ()) -> bqplot.Figure:
    """A figure of fixed size round a plot area: no padding, no toolbar, no animation; the picture is the data."""
    width = f"{round(area.width + room.left + room.right)}px"
    height = f"{round(area.height + room.top + room.bottom)}px"
    return bqplot.Figure(
        marks=list(marks),
        axes=list(axes),
        layout=Layout(width=width, height=height, min_width=width, min_height=height),
        fig_margin={"left": room.left, "right": room.right, "top": room.top, "bottom": room.bottom},
        padding_x=0.0,
        padding_y=0.0,
        display_toolbar=False,
        background_style={"fill": theme.PAPER},
    )


def ticks(low: float, high: float, about: int = 5) -> Floats:
    """Round numbers (1, 2 or 5 times a power of ten apart) from `low` to `high`, about `about` of them."""
    rough = 1.15 * (high - low) / max(about, 1)  # rather fewer than more
    power = 10.0 ** math.floor(math.log10(rough))
    step = min((factor * power for factor in (1.0, 2.0, 5.0, 10.0)), key=lambda size: abs(math.log(size / rough)))
    first = math.ceil(low / step - 1e-9)
    last = math.floor(high / step + 1e-9)
    return np.round(np.arange(first, last + 1) * step, 10)


def axis(scale: bqplot.LinearScale, side: str, values: ArrayLike, texts: Sequence[str] | None = None) -> bqplot.Axis:
    """An axis with explicit ticks. Texts default to the numbers, grouped."""
    drawn = bqplot.Axis(
        scale=scale,
        side=side,
        grid_lines="none",
        color=theme.GREY,
        grid_color=theme.RULE,
        tick_style={"font-size": f"{theme.SMALL:g}px"},
    )
    set_ticks(drawn, values, texts)
    return drawn


def set_ticks(drawn: bqplot.Axis, values: ArrayLike, texts: Sequence[str] | None = None) -> None:
    """New ticks for an axis, in place."""
    places = np.asarray(values, dtype=float)
    if texts is None:
        decimals = 0 if np.all(places == np.round(places)) else 1
        texts = [show_number(place, decimals) for place in places.tolist()]
    # Keys as JavaScript writes numbers: bqplot looks the text up by them.
    keys = [repr(int(place)) if place.is_integer() else repr(place) for place in places.tolist()]
    with drawn.hold_sync():
        drawn.tick_labels = dict(zip(keys, texts, strict=True))
        drawn.tick_values = places


def lines(area: Plane, colour: str, width: float, dash: str = "solid", **more: Any) -> bqplot.Lines:
    """An empty line in one colour; fill it with `put`."""
    return bqplot.Lines(
        x=[], y=[], scales=area.scales, colors=[colour], stroke_width=width, line_style=dash, enable_hover=False, **more
    )


def patch(area: Plane, fill: str, opacity: float = 1.0, edge: str | None = None, width: float = 0.0) -> bqplot.Lines:
    """An empty filled polygon; fill it with `put`."""
    return lines(
        area, edge or fill, width, fill="inside", fill_colors=[fill], fill_opacities=[opacity], close_path=True
    )


def texts(area: Plane, colour: str = theme.INK, *, bold: bool = False, size: float = theme.SMALL, align: str = "start",
          dx: int = 0, dy: int = 0) -> bqplot.Label:  # fmt: skip
    """An empty set of labels with one look, free to stand outside the plot area; fill it with `put`."""
    return bqplot.Label(
        x=[], y=[], text=[], scales=area.scales, colors=[colour], default_size=size, align=align, x_offset=dx,
        y_offset=dy, font_weight="bold" if bold else "normal", apply_clip=False, enable_hover=False,
    )  # fmt: skip


def put(mark: Any, x: ArrayLike, y: ArrayLike, **more: Any) -> None:
    """New data for a mark, in one message, so that no half-drawn figure is ever shown. Not finite raises ValueError."""
    across, up = np.asarray(x, dtype=float), np.asarray(y, dtype=float)
    if not (np.all(np.isfinite(across)) and np.all(np.isfinite(up))):
        raise ValueError("a figure is never given numbers that are not finite; leave the gap out of the array")
    with mark.hold_sync():
        mark.x, mark.y = across, up
        for name, value in more.items():
            setattr(mark, name, value)


def write(mark: bqplot.Label, places: Sequence[tuple[float, float, str]], **more: Any) -> None:
    """New words for a set of labels: (x, y, text) each."""
    text = np.array([place[2] for place in places], dtype=str)
    put(mark, [place[0] for place in places], [place[1] for place in places], text=text, **more)


def finite_runs(x: ArrayLike, y: ArrayLike) -> list[tuple[Floats, Floats]]:
    """The stretches of two or more neighbouring points that are finite: a gap stays a gap, nothing is drawn across it.

    A lone finite point between two gaps is returned too, as a stretch of one.
    """
    across, up = np.asarray(x, dtype=float), np.asarray(y, dtype=float)
    if across.shape != up.shape or across.ndim != 1:
        raise ValueError(f"a curve needs two arrays of one length, not {across.shape} and {up.shape}")
    good = np.isfinite(across) & np.isfinite(up)
    edges = np.flatnonzero(np.diff(np.concatenate(([False], good, [False])).astype(int)))
    return [(across[a:b], up[a:b]) for a, b in zip(edges[::2], edges[1::2], strict=True)]


def spread_out(targets: Sequence[float], heights: Sequence[float], low: float, high: float) -> list[float]:
    """Centres as near the targets as possible for boxes of these heights, none overlapping, all between low and high.

    Boxes keep the order of their targets. If they do not fit, they are packed from `low` downwards.
    """
    order = sorted(range(len(targets)), key=lambda index: targets[index])
    groups: list[list[float]] = []  # each: top, total height, sum of wished tops (relative), count
    for index in order:
        wish = targets[index] - heights[index] / 2.0
        groups.append([wish, heights[index], wish, 1.0])
        while len(groups) > 1 and groups[-2][0] + groups[-2][1] > groups[-1][0]:
            last, before = groups.pop(), groups.pop()
            wished = before[2] + last[2] - last[3] * before[1]
            count = before[3] + last[3]
            groups.append([wished / count, before[1] + last[1], wished, count])
        groups[-1][0] = max(low, min(groups[-1][0], high - groups[-1][1]))
    centres = [0.0] * len(targets)
    tops = [group[0] for group in groups]
    for place in range(len(groups) - 1, 0, -1):  # a group pushed up by the lower limit may have met its neighbour
        tops[place - 1] = min(tops[place - 1], tops[place] - groups[place - 1][1])
    shift = max(0.0, low - min(tops, default=low))
    members = iter(order)
    for top, group in zip(tops, groups, strict=True):
        edge = top + shift
        for _ in range(round(group[3])):
            index = next(members)
            centres[index] = edge + heights[index] / 2.0
            edge += heights[index]
    return centres


def text_width(text: str, size: float = theme.SMALL) -> float:
    """About how wide a text is [px]: 0.55 em a character, an average of common sans faces, on the wide side."""
    return 0.55 * size * len(text)
