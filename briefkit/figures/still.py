"""Stills: an exhibit, a bqplot figure or a whole widget panel as static HTML that says the same as the screen.

A panel keeps its structure and loses its controls: each input becomes a line with its value, figures become SVG, HTML
stays, buttons and outputs vanish, tabs and accordions become headed sections. A widget this module does not know
raises: nothing a notebook shows may be missing from the page without a word.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import bqplot
import ipywidgets as w

from briefkit.figures.markup import element, finite_text, words
from briefkit.figures.parts import Drawing, HasStillInputs, HasStillParts, StillParts, Table, figure_columns
from briefkit.figures.svg import svg

__all__ = ["Drawing", "HasStillInputs", "HasStillParts", "StillParts", "Table", "still", "svg"]


def still(thing: object, key: str = "") -> str:
    """An HTML fragment of `thing`: anything with `still_parts()`, a bqplot Figure, or an ipywidgets tree.

    `key` sets its ids apart from those of the same thing elsewhere on the page (its place in the notebook, say).
    Raises ValueError for a widget or mark that cannot be drawn, naming it, and for numbers that are not finite.
    """
    if isinstance(thing, w.Widget) and _hidden(thing):
        return ""
    if isinstance(thing, HasStillParts):
        return _exhibit(thing.still_parts(), key)
    if isinstance(thing, HasStillInputs):
        return _inputs(thing.still_inputs())
    if isinstance(thing, bqplot.Figure):
        return element("figure", {"class": "exhibit"}, svg(_plain(thing), key))
    if isinstance(thing, w.Widget):
        return _panel(thing, key)
    raise ValueError(f"cannot put a {type(thing).__name__} on paper")


def _plain(figure: bqplot.Figure) -> Drawing:
    """A bare figure is named by its title and described by its axes."""
    if not figure.title.strip():
        raise ValueError("a figure needs a title: it is its name for a reader who cannot see it")
    axes = [axis.label for axis in figure.axes if axis.visible and axis.label]
    return Drawing(figure, figure.title, f"{figure.title}. Axes: {', '.join(axes)}." if axes else figure.title)


def _exhibit(parts: StillParts, key: str) -> str:
    for name in ("title", "caption", "alt"):
        if not getattr(parts, name).strip():
            raise ValueError(f"an exhibit needs a {name} in words")
    said = [drawing.desc for drawing in parts.drawings]
    label = None if parts.alt in said else parts.alt
    heading = element("span", {"class": "title"}, words(parts.title))
    body = [element("figcaption", {}, heading, " ", words(parts.caption))]
    body += [svg(drawing, f"{key}/{index}") for index, drawing in enumerate(parts.drawings)]
    if parts.inputs:
        body.append(_inputs(parts.inputs))
    body.append(table_html(parts.table))
    body += [element("p", {"class": "note"}, words(note)) for note in parts.notes]
    return element("figure", {"class": "exhibit", "aria-label": label}, *body)


def _inputs(pairs: tuple[tuple[str, str], ...] | list[tuple[str, str]]) -> str:
    lines = [
        element("div", {}, element("dt", {}, words(name)), element("dd", {}, words(value))) for name, value in pairs
    ]
    return element("dl", {"class": "inputs"}, *lines)


def table_html(table: Table) -> str:
    """A table as markup; a row that does not fit its headings, or no row, raises ValueError."""
    if not table.header or not table.rows:
        raise ValueError("an exhibit needs a table with a header and at least one row")
    for row in table.rows:
        if len(row) != len(table.header):
            raise ValueError(f"a table row has {len(row)} cells under {len(table.header)} headings: {row}")
    head = [element("th", {"scope": "col"}, words(cell)) for cell in table.header]
    rows = [
        element(
            "tr", {}, element("th", {"scope": "row"}, words(row[0])), *(element("td", {}, words(c)) for c in row[1:])
        )
        for row in table.rows
    ]
    caption = element("caption", {}, words(table.caption)) if table.caption else ""
    columns = " ".join(f"n{number}" for number in figure_columns(table.rows)) or None
    heading = element("thead", {}, element("tr", {}, *head))
    return element("table", {"class": columns}, caption, heading, element("tbody", {}, *rows))


# --- widget trees ---------------------------------------------------------------------------------------------------

_VANISH = (w.Button, w.Output, w.Valid, w.Play, w.Controller)
_SINGLE = (
    w.IntSlider, w.FloatSlider, w.FloatLogSlider, w.BoundedIntText, w.BoundedFloatText, w.IntText, w.FloatText,
    w.IntProgress, w.FloatProgress, w.Text, w.Textarea, w.Combobox, w.DatePicker,
)  # fmt: skip
_CHOICE = (w.Dropdown, w.RadioButtons, w.Select, w.ToggleButtons, w.SelectionSlider)
_MANY = (w.SelectMultiple, w.SelectionRangeSlider)
_RANGE = (w.IntRangeSlider, w.FloatRangeSlider)
_SWITCH = (w.Checkbox, w.ToggleButton)
_SECTIONS = (w.Tab, w.Accordion)
_GROUPS = (w.Box, w.VBox, w.HBox, w.GridBox)


def _panel(widget: w.Widget, key: str) -> str:
    kind = type(widget)
    if kind in _VANISH:
        return ""
    if kind in _SECTIONS:
        return _sections(widget, key)
    if kind is w.HTML:
        return element("div", {"class": "prose"}, finite_text(widget.value)) if widget.value else ""
    if kind is w.Label:
        return element("p", {}, words(widget.value)) if widget.value else ""
    if isinstance(widget, _GROUPS):
        return _group(widget, key)
    line = _input(widget)
    if line is None:
        raise ValueError(f"cannot put a {kind.__name__} on paper: there is no still for this widget")
    return _inputs([line])


def _group(box: w.Box, key: str) -> str:
    """The children in order; neighbouring inputs share one list."""
    parts: list[str] = []
    lines: list[tuple[str, str]] = []
    for index, child in enumerate(box.children):
        line = None if isinstance(child, (HasStillParts, HasStillInputs)) or _hidden(child) else _input(child)
        if line is not None:
            lines.append(line)
            continue
        drawn = still(child, f"{key}/{index}")
        if drawn and lines:
            parts.append(_inputs(lines))
            lines = []
        parts.append(drawn)
    if lines:
        parts.append(_inputs(lines))
    inside = "".join(parts)
    return element("div", {"class": "panel"}, inside) if inside else ""


def _sections(widget: w.Tab | w.Accordion, key: str) -> str:
    parts = []
    for index, child in enumerate(widget.children):
        drawn = still(child, f"{key}/{index}")
        title = widget.get_title(index)
        if drawn and not title:
            raise ValueError(f"section {index + 1} of a {type(widget).__name__} needs a title to stand on paper")
        if drawn:
            parts.append(element("section", {}, element("h4", {}, words(title)), drawn))
    return "".join(parts)


def _input(widget: w.Widget) -> tuple[str, str] | None:
    """(description, value as text) of an input; None for anything else. An input without a name raises ValueError."""
    for kinds, show in _SHOWN.items():
        if type(widget) in kinds:
            name = widget.description or getattr(widget, "placeholder", "")
            if not name:
                raise ValueError(f"a {type(widget).__name__} needs a description to stand on paper")
            return name.rstrip(": "), show(widget)
    return None


def _value(widget: Any) -> str:
    if widget.value is None:
        return "not set"
    if isinstance(widget.value, float):
        return format(widget.value, getattr(widget, "readout_format", None) or ",g").replace("-", "\u2212")
    return f"{widget.value:,}".replace("-", "\u2212") if isinstance(widget.value, int) else str(widget.value)


_SHOWN: dict[tuple[type, ...], Callable[[Any], str]] = {
    _SINGLE: _value,
    _CHOICE: lambda widget: "not set" if widget.label is None else str(widget.label),
    _MANY: lambda widget: ", ".join(map(str, widget.label)) or "none",
    _RANGE: lambda widget: f"{widget.value[0]:,g} to {widget.value[1]:,g}",
    _SWITCH: lambda widget: "yes" if widget.value else "no",
}


def _hidden(widget: Any) -> bool:
    layout = getattr(widget, "layout", None)
    return layout is not None and (layout.display == "none" or layout.visibility == "hidden")
