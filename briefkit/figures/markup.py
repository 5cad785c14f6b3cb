"""Small pieces both writers share: numbers, escaping, elements, colours, and the check that nothing is overlooked."""

from __future__ import annotations

import math
import re
from collections.abc import Iterable, Mapping
from html import escape
from typing import Any

from briefkit.figures import theme

_NOT_FINITE = re.compile(r"(?<![A-Za-z])(nan|inf|infinity)(?![A-Za-z])", re.IGNORECASE)


def number(value: float) -> str:
    """A coordinate or size to 0.01 px, shortest form; not finite raises ValueError (never NaN to a page)."""
    if not math.isfinite(value):
        raise ValueError(f"a figure holds a number that is not finite: {value}")
    text = f"{value:.2f}".rstrip("0").rstrip(".")
    return "0" if text in ("-0", "") else text


def words(text: str) -> str:
    """Text escaped for markup; a stray "nan" or "inf" raises ValueError."""
    return escape(finite_text(text), quote=True)


def finite_text(text: str) -> str:
    """The text itself; a stray "nan" or "inf" in it raises ValueError."""
    if _NOT_FINITE.search(text):
        raise ValueError(f"text holds a number that is not finite: {text!r}")
    return text


def element(name: str, attributes: Mapping[str, str | float | None], *content: str) -> str:
    """One element; attributes that are None are left out, floats are written as numbers, text is escaped."""
    parts = [name]
    for key, value in attributes.items():
        if value is not None:
            shown = _shown(value) if isinstance(value, str) else number(value)
            parts.append(f'{key}="{shown}"')
    inside = "".join(content)
    return f"<{' '.join(parts)}>{inside}</{name}>" if inside or name in _PAIRED else f"<{' '.join(parts)}/>"


def _shown(value: str) -> str:
    """An attribute's text. The letters of a picture's bytes are no words: "nan" among them is chance."""
    return escape(value, quote=True) if value.startswith("data:image/png;base64,") else words(value)


_PAIRED = frozenset({"svg", "g", "text", "title", "desc", "dl", "dt", "dd", "table", "td", "th", "tr", "p", "div"})


def paint(*, stroke: str | None = None, fill: str | None = None) -> dict[str, str | float | None]:
    """Stroke and fill as presentation attributes, with the class of their role so that a page can restate them."""
    classes = [
        f"{kind}-{role}"
        for kind, colour in (("stroke", stroke), ("fill", fill))
        if colour and (role := theme.role_of(colour))
    ]
    return {"class": " ".join(classes) or None, "fill": fill or "none", "stroke": stroke}


def refuse_unhandled(widget: Any, handled: Iterable[str], harmless: Iterable[str]) -> None:
    """Raise ValueError if a synced trait outside the two lists is not at its default: it could change the look.

    A trait this writer has never heard of (a newer bqplot) falls under the same rule, so nothing is dropped silently.
    """
    known = set(handled) | set(harmless)
    for name in widget.traits(sync=True):
        if name.startswith("_") or name in known or name in ("tabbable", "tooltip"):
            continue
        value, default = getattr(widget, name), widget.trait_defaults(name)
        if not _same(value, default):
            kind = type(widget).__name__
            raise ValueError(f"cannot draw {kind}.{name} = {value!r} on paper; leave it at {default!r}")


def _same(value: Any, default: Any) -> bool:
    if value is None or default is None:
        return value is default
    try:
        return bool(value == default)
    except ValueError:  # arrays: not a plain default, so it was set
        return False
