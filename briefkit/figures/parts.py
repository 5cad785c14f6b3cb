"""What a figure is made of when it leaves the screen: plain text, drawings and a table, frozen."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final, Protocol, runtime_checkable

import bqplot

# A number with its sign, its spread's mark and at most one word of unit: "−1.4°", "± 5.2 %", "10 kt", "1,800 lb".
_FIGURE: Final = re.compile(r"(?:[-+−]|±\s?)?\d[\d,]*(?:\.\d+)?\*?(?:[\s\u00a0]?[^\s\d,.;]+)?")


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


def figure_columns(rows: Sequence[Sequence[str]]) -> tuple[int, ...]:
    """Which columns of a table hold figures, counted from 1, the first column apart: theirs are set to the right."""
    columns = list(zip(*rows, strict=True))[1:]
    return tuple(
        number
        for number, cells in enumerate(columns, start=2)
        if 2 * sum(_FIGURE.fullmatch(cell.strip()) is not None for cell in cells) > len(cells)
    )


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
