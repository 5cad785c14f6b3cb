"""Exhibits that are tables, and exhibits that belong to an operation and not to one condition."""

from __future__ import annotations

from typing import Any, NoReturn

import ipywidgets as w

from briefkit.aircraft.model import Aircraft
from briefkit.envelope.condition import Condition
from briefkit.errors import ReadingError
from briefkit.figures.still import Table, table_html
from briefkit.widgets.answers import Answers
from briefkit.widgets.exhibit import Exhibit, Fixed


class TableExhibit(Exhibit):
    """An exhibit whose picture is its table. A subclass says what it shows in `_draw`, and calls `_show`."""

    def _build(self, aircraft: Aircraft) -> tuple[Any, ...]:
        self._grid = w.HTML()
        return (self._grid,)

    def _show(self, table: Table, now: int | None = None) -> None:
        """Set the table; `now` is the row that holds for the present condition."""
        head, *rows = table_html(table).split("<tr>")
        marked = [('<tr class="now">' if place == now else "<tr>") + row for place, row in enumerate(rows, start=-1)]
        self._grid.value = head + "".join(marked)


class _OfType(Answers):
    """Answers of a type at no one condition: asking for one is refused."""

    def __init__(self, aircraft: Aircraft) -> None:
        self.aircraft = aircraft

    @property
    def condition(self) -> NoReturn:  # type: ignore[override]  # there is none
        raise ReadingError("an exhibit of a whole operation", "an exhibit of one condition")


class OfOperation(Fixed):
    """A source for what holds over an operation: it never changes, and has no condition."""

    def __init__(self, aircraft: Aircraft) -> None:
        self.answers = _OfType(aircraft)


def source_of(source: object) -> object:
    """The source of an exhibit of an operation: an aircraft stands for itself, a live condition is followed."""
    return OfOperation(source) if isinstance(source, Aircraft) else source


def condition_of(answers: Answers) -> Condition | None:
    """The present condition of a live source; None over a whole operation."""
    return None if isinstance(answers, _OfType) else answers.condition
