"""What a figure is made of when it leaves the screen: plain text, drawings and a table, frozen."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol, runtime_checkable

import bqplot


@dataclass(frozen=True)
class Drawing:
    """One bqplot figure with its name and its description in words (both needed by a reader who cannot see it)."""

    figure: bqplot.Figure
    title: str
    desc: str


@dataclass(frozen=True)
class Table:
    """A table of text: `header` names the columns, every row has as many cells, the first cell names the row."""

    header: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    caption: str = ""


@dataclass(frozen=True)
class StillParts:
    """Everything an exhibit says on paper.

    `title` and `caption` stand over it, `alt` states its main number in words, `inputs` are (name, value) pairs of
    the condition it is drawn for, `drawings` one or more figures, `table` the same content as text, `notes` sentences
    that stand under it.
    """

    title: str
    caption: str
    alt: str
    inputs: tuple[tuple[str, str], ...]
    drawings: tuple[Drawing, ...]
    table: Table
    notes: tuple[str, ...] = ()


@runtime_checkable
class HasStillInputs(Protocol):
    """A panel of controls: on paper only the numbers they stand at remain."""

    def still_inputs(self) -> tuple[tuple[str, str], ...]:
        """(name, value) pairs."""
        ...


@runtime_checkable
class HasStillParts(Protocol):
    """Anything that can be put on paper."""

    def still_parts(self) -> StillParts:
        """The parts of the still, at the state the thing is in now."""
        ...
