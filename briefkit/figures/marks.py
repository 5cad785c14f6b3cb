"""The marks of a bqplot figure as SVG: Lines, Scatter, Label, Image. Any other raises: a curve is never dropped."""

from __future__ import annotations

import base64
import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import bqplot
import numpy as np
from numpy.typing import NDArray

from briefkit.figures.markup import element, number, paint, refuse_unhandled, words

Floats = NDArray[np.float64]

# Pointers, tooltips, selections and data bookkeeping: nothing of it shows on paper.
_HARMLESS = (
    "scales_metadata", "preserve_domain", "labels", "enable_hover", "tooltip", "tooltip_style", "interactions",
    "tooltip_location", "selected_style", "unselected_style", "hovered_style", "unhovered_style", "hovered_point",
    "enable_move", "enable_delete", "restrict_x", "restrict_y", "update_on_move", "drag_color", "drag_size",
    "names_unique", "display_names", "label_display_horizontal_offset", "label_display_vertical_offset",
)  # fmt: skip
_COMMON = ("scales", "visible", "apply_clip")
_LINES = (
    *_COMMON, "x", "y", "colors", "fill_colors", "stroke_width", "line_style", "close_path", "fill", "opacities",
    "fill_opacities", "marker", "marker_size",
)  # fmt: skip
_SCATTER = (
    *_COMMON, "x", "y", "colors", "opacities", "marker", "default_size", "fill", "stroke", "stroke_width",
)  # fmt: skip
_LABEL = (
    *_COMMON, "x", "y", "text", "colors", "opacities", "x_offset", "y_offset", "rotate_angle", "default_size",
    "font_weight", "align",
)  # fmt: skip
_IMAGE = (*_COMMON, "x", "y", "image", "pixelated")
_DASHES = {"solid": None, "dashed": "10,10", "dotted": "2,10", "dash_dotted": "10,5,2,5"}  # bqplot's own


@dataclass(frozen=True)
class Frame:
    """The figure's size and plot area in pixels, and the scales used where a mark names none."""

    full_width: float
    full_height: float
    left: float
    top: float
    width: float
    height: float
    scale_x: Any
    scale_y: Any

    def __repr__(self) -> str:  # goes into the id: numbers only, no addresses
        return f"{self.full_width}x{self.full_height}+{self.left}+{self.top}:{self.width}x{self.height}"


def pixels(values: Floats, scale: Any, length: float, *, flip: bool) -> Floats:
    """Data to pixels along one side of the plot area; `flip` for the vertical, where pixels grow downwards.

    Raises ValueError for a scale that is not a plain linear one with explicit limits and no padding, and for values
    that are not finite.
    """
    if type(scale) is not bqplot.LinearScale:
        raise ValueError(f"cannot draw a {type(scale).__name__} on paper; only LinearScale")
    refuse_unhandled(scale, ("min", "max", "reverse", "allow_padding"), ())
    if scale.min is None or scale.max is None or scale.allow_padding:
        raise ValueError("a scale needs explicit min and max and allow_padding=False, or screen and paper would differ")
    if scale.min == scale.max:
        raise ValueError(f"a scale's min and max are the same: {scale.min}")
    if not np.all(np.isfinite(values)):
        raise ValueError("a figure holds data that are not finite; leave the gap out of the array")
    share = (values - scale.min) / (scale.max - scale.min)
    result: Floats = (1.0 - share if flip != scale.reverse else share) * length
    return result


def draw_mark(mark: Any, frame: Frame) -> str:
    """One mark as SVG; an empty string if it is not visible or has no data. ValueError if it cannot be drawn whole."""
    drawer = _DRAWERS.get(type(mark))
    if drawer is None:
        raise ValueError(f"cannot draw a bqplot {type(mark).__name__} on paper; only Lines, Scatter, Label and Image")
    return drawer(mark, frame) if mark.visible else ""


def overflows(mark: Any, frame: Frame) -> bool:
    """Whether the mark has points beyond the plot area, so that it must be clipped."""
    if isinstance(mark, bqplot.Image):
        return False
    x, y = _places(mark, frame, mark.x, mark.y)
    outside = (x < -0.01) | (x > frame.width + 0.01) | (y < -0.01) | (y > frame.height + 0.01)
    return bool(np.any(outside))


def _places(mark: Any, frame: Frame, x: Any, y: Any) -> tuple[Floats, Floats]:
    across = pixels(np.asarray(x, dtype=float), mark.scales.get("x", frame.scale_x), frame.width, flip=False)
    up = pixels(np.asarray(y, dtype=float), mark.scales.get("y", frame.scale_y), frame.height, flip=True)
    return across, up


def _lines(mark: bqplot.Lines, frame: Frame) -> str:
    refuse_unhandled(mark, _LINES, _HARMLESS)
    if mark.fill not in ("none", "inside"):
        raise ValueError(f"cannot draw Lines.fill = {mark.fill!r} on paper; only none and inside")
    x, y = _places(mark, frame, mark.x, mark.y)
    if y.size == 0 and x.size == 0:
        return ""
    y = np.atleast_2d(y)
    x = np.broadcast_to(x, y.shape) if x.ndim == 1 and x.shape[-1] == y.shape[-1] else np.atleast_2d(x)
    if x.shape != y.shape:
        raise ValueError(f"a line has {x.shape} abscissas and {y.shape} ordinates")
    parts = []
    for index, (across, up) in enumerate(zip(x, y, strict=True)):
        colour = mark.colors[index % len(mark.colors)] or _nth(mark.fill_colors, index, None)
        inside = mark.fill == "inside"
        fill = (_nth(mark.fill_colors, index, None) if mark.fill_colors else colour) if inside else None
        width = mark.stroke_width
        attributes = {
            "d": _path(across, up) + ("Z" if mark.close_path else ""),
            **paint(stroke=colour if width > 0 else None, fill=fill),
            "stroke-width": width if width > 0 else None,
            "stroke-dasharray": _DASHES[mark.line_style] if width > 0 else None,
            "stroke-linejoin": "round" if width > 0 else None,
            "opacity": _opacity(mark.opacities, index),
            "fill-opacity": _opacity(mark.fill_opacities, index) if inside else None,
        }
        parts.append(element("path", attributes))
        if mark.marker is not None:
            shape = _symbol(mark.marker, mark.marker_size)
            parts += [_at(shape, px, py, paint(fill=colour)) for px, py in zip(across, up, strict=True)]
    return "".join(parts)


def _scatter(mark: bqplot.Scatter, frame: Frame) -> str:
    refuse_unhandled(mark, _SCATTER, _HARMLESS)
    x, y = _places(mark, frame, mark.x, mark.y)
    shape = _symbol(mark.marker, mark.default_size)
    parts = []
    for index, (px, py) in enumerate(zip(x, y, strict=True)):
        colour = mark.colors[index % len(mark.colors)]
        edge = mark.stroke or (None if mark.fill else colour)
        attributes = {
            **paint(stroke=edge, fill=colour if mark.fill else None),
            "stroke-width": mark.stroke_width if edge else None,
            "opacity": _opacity(list(mark.opacities), index),
        }
        parts.append(_at(shape, px, py, attributes))
    return "".join(parts)


def _label(mark: bqplot.Label, frame: Frame) -> str:
    refuse_unhandled(mark, _LABEL, _HARMLESS)
    x, y = _places(mark, frame, mark.x, mark.y)
    texts = [] if mark.text is None else np.atleast_1d(mark.text).tolist()
    parts = []
    for index, (px, py, text) in enumerate(zip(x, y, texts, strict=True)):
        if not text:
            continue
        spot = f"translate({number(px + mark.x_offset)},{number(py + mark.y_offset)})"
        turn = f"rotate({number(mark.rotate_angle)})" if mark.rotate_angle else ""
        attributes: dict[str, str | float | None] = {
            "transform": spot + turn,
            "dominant-baseline": "central",
            "text-anchor": None if mark.align == "start" else mark.align,
            "font-size": mark.default_size,
            "font-weight": None if mark.font_weight == "normal" else mark.font_weight,
            **paint(fill=mark.colors[index % len(mark.colors)]),
            "opacity": _opacity(list(mark.opacities), index),
        }
        parts.append(element("text", attributes, words(str(text))))
    return "".join(parts)


def _image(mark: bqplot.Image, frame: Frame) -> str:
    refuse_unhandled(mark, _IMAGE, _HARMLESS)
    if mark.image.format != "png":
        raise ValueError(f"an Image on paper must be png, not {mark.image.format}")
    x, y = _places(mark, frame, mark.x, mark.y)
    if x[0] >= x[1] or y[0] <= y[1]:
        raise ValueError("an Image on paper must run left to right and bottom to top")
    data = base64.b64encode(bytes(mark.image.value)).decode("ascii")
    attributes: dict[str, str | float | None] = {
        "x": float(x[0]), "y": float(y[1]), "width": float(x[1] - x[0]), "height": float(y[0] - y[1]),
        "preserveAspectRatio": "none", "image-rendering": "pixelated" if mark.pixelated else None,
        "href": f"data:image/png;base64,{data}",
    }  # fmt: skip
    return element("image", attributes)


_DRAWERS: dict[type, Callable[[Any, Frame], str]] = {
    bqplot.Lines: _lines,
    bqplot.Scatter: _scatter,
    bqplot.Label: _label,
    bqplot.Image: _image,
}


def _path(x: Floats, y: Floats) -> str:
    points = [f"{number(px)},{number(py)}" for px, py in zip(x.tolist(), y.tolist(), strict=True)]
    return "M" + "L".join(points)


def _at(shape: str, x: float, y: float, attributes: dict[str, Any]) -> str:
    return element("path", {"transform": f"translate({number(x)},{number(y)})", "d": shape, **attributes})


def _symbol(marker: str, size: float) -> str:
    """A marker of `size` square pixels, the shapes as bqplot draws them."""
    half = math.sqrt(size) / 2.0
    if marker == "circle":
        r = number(math.sqrt(size / math.pi))
        return f"M0,{r}A{r},{r} 0 1,1 0,-{r}A{r},{r} 0 1,1 0,{r}Z"
    if marker == "square":
        h = number(half)
        return f"M-{h},-{h}H{h}V{h}H-{h}Z"
    if marker == "diamond":
        tall = math.sqrt(size / (2.0 * math.tan(math.pi / 6.0)))
        a, b = number(tall), number(tall * math.tan(math.pi / 6.0))
        return f"M0,-{a}L{b},0L0,{a}L-{b},0Z"
    if marker == "plus":
        h = number(half)
        return f"M0,-{h}V{h}M-{h},0H{h}"
    raise ValueError(f"cannot draw the marker {marker!r} on paper; only circle, square, diamond, plus")


def _nth(items: Sequence[Any], index: int, missing: Any) -> Any:
    return items[index] if index < len(items) else missing


def _opacity(values: Sequence[float | None], index: int) -> float | None:
    """The opacity to write: none for opaque (a list shorter than the marks means opaque)."""
    if not values:
        return None
    value = values[index % len(values)]
    return None if value is None or value == 1.0 else float(value)
