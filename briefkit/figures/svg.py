"""A bqplot Figure as one SVG element: no browser, no script, the same bytes for the same figure.

Presentation attributes and classes only, never `style=` (a strict Content-Security-Policy drops it). Positions follow
bqplot's own to within 0.01 px, provided every scale has an explicit minimum and maximum and `allow_padding=False`:
anything else is refused, because the front end would then choose limits this writer cannot know.
"""

from __future__ import annotations

import hashlib
import re
from typing import Any

import bqplot
import numpy as np

from briefkit.figures import theme
from briefkit.figures.marks import Frame, draw_mark, overflows, pixels
from briefkit.figures.markup import element, number, paint, refuse_unhandled, words
from briefkit.figures.parts import Drawing

_PIXELS = re.compile(r"(\d+(?:\.\d+)?)px")
_FIGURE_HANDLED = ("title", "axes", "marks", "scale_x", "scale_y", "fig_margin", "layout", "background_style")
# Only about the screen, or without effect once padding is refused and no mark asks for a legend.
_FIGURE_HARMLESS = (
    "interaction", "animation_duration", "display_toolbar", "pixel_ratio", "padding_x", "padding_y",
    "legend_location", "legend_style", "legend_text", "min_aspect_ratio", "max_aspect_ratio", "title_style",
)  # fmt: skip
_AXIS_HANDLED = (
    "side", "label", "scale", "grid_lines", "tick_values", "tick_labels", "label_color", "grid_color", "color",
    "visible", "tick_style", "label_offset",
)  # fmt: skip
_OFFSET = re.compile(r"(-?\d+(?:\.\d+)?)px")


def svg(drawing: Drawing, key: str = "") -> str:
    """One `<svg>` element with role, title and description.

    `key` makes its ids differ from those of the same drawing elsewhere on the page. Raises ValueError for an empty
    title or description, an unknown mark, a setting that would change the look and is not drawn, a scale without
    explicit limits, and data that are not finite.
    """
    figure = drawing.figure
    if not drawing.title.strip() or not drawing.desc.strip():
        raise ValueError("a drawing needs a title and a description in words")
    frame = _frame(figure)
    body = _background(figure, frame)
    body += "".join(_axis(axis, frame) for axis in figure.axes if axis.visible)
    clipped = []
    for mark in figure.marks:
        drawn = draw_mark(mark, frame)
        if drawn:
            clipped.append((drawn, mark.apply_clip and overflows(mark, frame)))
    digest = hashlib.sha256()
    for piece in (key, drawing.title, drawing.desc, repr(frame), body, repr(clipped), figure.title):
        digest.update(piece.encode() + b"\0")
    mark_id = "s" + digest.hexdigest()[:10]
    if any(clip for _, clip in clipped):
        area = element("rect", {"x": 0.0, "y": 0.0, "width": frame.width, "height": frame.height})
        body += element("clipPath", {"id": f"{mark_id}c"}, area)
    for drawn, clip in clipped:
        body += element("g", {"clip-path": f"url(#{mark_id}c)"}, drawn) if clip else drawn
    body += _heading(figure, frame)
    size = f"0 0 {number(frame.full_width)} {number(frame.full_height)}"
    return element(
        "svg",
        {
            "xmlns": "http://www.w3.org/2000/svg", "role": "img", "viewBox": size, "width": frame.full_width,
            "height": frame.full_height, "aria-labelledby": f"{mark_id}t {mark_id}d",
        },
        element("title", {"id": f"{mark_id}t"}, words(drawing.title)),
        element("desc", {"id": f"{mark_id}d"}, words(drawing.desc)),
        element("g", {"transform": f"translate({number(frame.left)},{number(frame.top)})"}, body),
    )  # fmt: skip


def _frame(figure: bqplot.Figure) -> Frame:
    refuse_unhandled(figure, _FIGURE_HANDLED, _FIGURE_HARMLESS)
    sides = []
    for side in ("width", "height"):
        match = _PIXELS.fullmatch(getattr(figure.layout, side) or "")
        if match is None:
            raise ValueError(f'the figure needs layout.{side} in pixels, like "440px"')
        sides.append(float(match[1]))
    ratio = sides[0] / sides[1]
    if not figure.min_aspect_ratio <= ratio <= figure.max_aspect_ratio:
        raise ValueError(f"the figure's aspect ratio {ratio:.2f} is outside its own limits; bqplot would shrink it")
    margin = {side: float(figure.fig_margin[side]) for side in ("left", "right", "top", "bottom")}
    width = sides[0] - margin["left"] - margin["right"]
    height = sides[1] - margin["top"] - margin["bottom"]
    if min(width, height) < 1.0:
        raise ValueError("the margins leave no room for the figure")
    return Frame(sides[0], sides[1], margin["left"], margin["top"], width, height, figure.scale_x, figure.scale_y)


def _background(figure: bqplot.Figure, frame: Frame) -> str:
    style = dict(figure.background_style)
    fill = style.pop("fill", None)
    if style:
        raise ValueError(f"cannot draw Figure.background_style {sorted(style)} on paper; only fill")
    if fill is None or fill == "none":
        return ""
    return element("rect", {"width": frame.width, "height": frame.height, **paint(fill=fill)})


def _heading(figure: bqplot.Figure, frame: Frame) -> str:
    if not figure.title:
        return ""
    if figure.title_style:
        raise ValueError("cannot draw Figure.title_style on paper; leave it empty")
    place: dict[str, str | float | None] = {
        "x": 0.5 * frame.width,
        "y": -0.5 * frame.top,
        "dy": "1em",
        "text-anchor": "middle",
    }
    return element("text", {**place, "font-size": 16.0, **paint(fill=theme.INK)}, words(figure.title))


def _axis(axis: Any, frame: Frame) -> str:
    if type(axis) is not bqplot.Axis:
        raise ValueError(f"cannot draw a {type(axis).__name__} on paper; only Axis")
    refuse_unhandled(axis, _AXIS_HANDLED, ())
    if axis.tick_values is None or len(axis.tick_values) == 0:
        raise ValueError("an axis needs explicit tick_values, so that screen and paper show the same ones")
    sideways = axis.side in ("left", "right")
    length = frame.height if sideways else frame.width
    reach = frame.width if sideways else frame.height
    places = pixels(np.asarray(axis.tick_values, dtype=float), axis.scale, length, flip=sideways)
    origin = {"left": (0.0, 0.0), "right": (frame.width, 0.0), "top": (0.0, 0.0), "bottom": (0.0, frame.height)}
    parts = [_tick(axis, float(place), reach, text) for place, text in zip(places, _tick_texts(axis), strict=True)]
    end = number(-6.0 if axis.side in ("left", "top") else 6.0)  # the axis ends in a tick of its own, as d3 draws it
    line = f"M{end},0H0V{number(length)}H{end}" if sideways else f"M0,{end}V0H{number(length)}V{end}"
    parts.append(element("path", {"d": line, **paint(stroke=axis.color or theme.GREY)}))
    parts.append(_axis_label(axis, length))
    x, y = origin[axis.side]
    return element("g", {"transform": f"translate({number(x)},{number(y)})"}, *parts)


def _tick_texts(axis: bqplot.Axis) -> list[str]:
    """Texts of the ticks, looked up as bqplot does: by the number as JavaScript writes it ("1000", "0.5")."""
    texts = []
    for value in np.asarray(axis.tick_values, dtype=float).tolist():
        key = repr(int(value)) if value.is_integer() else repr(value)
        if not axis.tick_labels or key not in axis.tick_labels:
            raise ValueError(f'an axis needs a tick_labels entry for "{key}", so that screen and paper read the same')
        texts.append(axis.tick_labels[key])
    return texts


def _tick(axis: bqplot.Axis, place: float, reach: float, text: str) -> str:
    sideways = axis.side in ("left", "right")
    outward = -1.0 if axis.side in ("left", "top") else 1.0
    dash = "5,5" if axis.grid_lines == "dashed" else None
    end = 6.0 * outward if axis.grid_lines == "none" else -reach * outward
    size = _tick_size(axis)
    line: dict[str, str | float | None]
    spot: dict[str, str | float | None]
    if sideways:
        line = {"x1": 0.0, "x2": end, "y1": place, "y2": place}
        spot = {"x": 9.0 * outward, "y": place, "dy": "0.32em", "text-anchor": "end" if outward < 0 else "start"}
    else:
        line = {"x1": place, "x2": place, "y1": 0.0, "y2": end}
        spot = {"x": place, "y": 9.0 * outward, "dy": "0.71em" if outward > 0 else "0em", "text-anchor": "middle"}
    rule = element("line", {**line, **paint(stroke=axis.grid_color or theme.RULE), "stroke-dasharray": dash})
    return rule + (
        element("text", {**spot, "font-size": size, **paint(fill=axis.color or theme.GREY)}, words(text))
        if text
        else ""
    )


def _tick_size(axis: bqplot.Axis) -> float:
    style = dict(axis.tick_style)
    size = str(style.pop("font-size", "12px"))
    match = _PIXELS.fullmatch(size)
    if style or match is None:
        raise ValueError('cannot draw this Axis.tick_style on paper; only {"font-size": "12px"}')
    return float(match[1])


def _axis_label(axis: bqplot.Axis, length: float) -> str:
    if not axis.label:
        return ""
    match = _OFFSET.fullmatch(axis.label_offset or "")
    if match is None:
        raise ValueError('an axis with a label needs label_offset in pixels, like "34px"')
    offset = float(match[1]) * (-1.0 if axis.side in ("left", "top") else 1.0)
    style = {"text-anchor": "middle", "font-size": 14.0, **paint(fill=axis.label_color or theme.INK)}
    if axis.side in ("left", "right"):
        spot: dict[str, str | float | None] = {"transform": "rotate(-90)", "x": -0.5 * length, "y": offset}
        spot["dy"] = "0em" if axis.side == "left" else "1ex"
    else:
        spot = {"x": 0.5 * length, "y": offset, "dy": "0.75ex" if axis.side == "top" else "0.25ex"}
    return element("text", {**spot, **style}, words(axis.label))
