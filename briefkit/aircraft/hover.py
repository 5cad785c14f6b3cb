r"""The manual's hover ceilings: a small table, and the one line looked up in it.

    lb \ ISA     0     +20     +35     ft
    2,006     7,250   4,950   3,400

`ISA` heads columns of degrees above standard, `degC` columns of outside air temperature. Nothing is computed but where
the manual says its table is interpolated: otherwise the next heavier mass and the next warmer column hold.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Final

import numpy as np

from briefkit import units
from briefkit.aircraft import cells
from briefkit.aircraft.cells import Row
from briefkit.aircraft.chart import Floats
from briefkit.aircraft.model import Aircraft, HoverLine, HoverTable
from briefkit.aircraft.tables import HoverEntry
from briefkit.physics import atmosphere
from briefkit.reading.document import Document
from briefkit.reading.quantity import quoted

_EXAMPLE: Final = r'a line like "lb \ ISA   0   +20   +35   ft" (or degC for ISA), then a row for each mass'
_SLACK: Final = 1e-6
_WORDS: Final = {"OGE": "out of ground effect", "IGE": "in ground effect"}


@dataclass(frozen=True)
class HoverAnswer:
    """What the manual says of hovering here: `possible` is None where its table has no figure for it."""

    kind: str
    possible: bool | None
    text: str
    source: str


def hover_lines(aircraft: Aircraft, mass: float, pressure_altitude: float, oat: float) -> tuple[HoverAnswer, ...]:
    """One look-up line for each hover table of the manual, at a mass [kg], pressure altitude [m] and temperature [K].

    Nothing raises: what the table does not hold is said in the line.
    """
    return tuple(_answer(aircraft, table, mass, pressure_altitude, oat) for table in aircraft.hover_tables)


def printed(table: HoverTable) -> tuple[HoverLine, ...]:
    """The table as lines for the page, cells as typed."""
    header, *rows = table.rows
    mass_unit, height_unit = header[0].split()[0], header[-1]
    days = [_day(table, head) for head in header[1:-1]]
    lines = []
    for row in rows:
        pairs = zip(days, row[1:], strict=True)
        parts = [f"{cell} {height_unit} at {day}" for day, cell in pairs if cell not in cells.NO_VALUE]
        label = f"Hover ceiling {_WORDS[table.kind]} at {row[0]} {mass_unit}"
        lines.append(HoverLine(label, "; ".join(parts), table.source))
    return tuple(lines)


def read_hover(document: Document, key: str, entry: HoverEntry) -> HoverTable | None:
    """The table of a [[hover]] entry; None, with its faults recorded in the document, where it has any."""
    before = len(document.faults)
    blocks, parted = cells.split(entry.table or "", document.block_line(key))
    rows = [row for block in blocks for row in block.rows]
    head = _header(rows[0], parted) if len(rows) > 1 else None
    if head is None:
        read = quoted(" ".join(rows[0].cells)) if rows else "nothing"
        document.fault(f"{key}, header", read, _EXAMPLE, line=rows[0].line if rows else 0)
        return None
    mass_unit, across, heads, unit = head
    masses = cells.labels(
        document, key, mass_unit, [(row.line, f"row {row.cells[0]}", row.cells[0]) for row in rows[1:]]
    )
    columns = _columns(document, f"{key}, header", heads, rows[0].line)
    ceilings = [_ceilings(document, key, row, heads, unit) for row in rows[1:]]
    if masses is None or len(document.faults) > before:
        return None
    return HoverTable(
        kind=entry.kind or "OGE",
        masses=masses.values,
        columns=tuple(value if across == "ISA" else value + units.ZERO_CELSIUS for value in columns),
        above_standard=across == "ISA",
        ceilings=np.array(ceilings, dtype=float),
        interpolate=entry.reading == "interpolate",
        rows=((rf"{mass_unit} \ {across}", *heads, unit), *(row.cells for row in rows[1:])),
        source=entry.source,
    )


def falls(table: HoverTable) -> list[tuple[str, str]]:
    """Places whose ceiling is higher than that of a lighter mass or a colder column, with their text."""
    found = []
    for i, row in enumerate(table.ceilings):
        for j, ceiling in enumerate(row):
            if (i and ceiling > table.ceilings[i - 1, j] + _SLACK) or (j and ceiling > row[j - 1] + _SLACK):
                place = f"row {table.rows[i + 1][0]}, column {table.rows[0][j + 1]}"
                found.append((place, table.rows[i + 1][j + 1]))
    return found


def _day(table: HoverTable, head: str) -> str:
    """A column's head in words: "ISA", "ISA+20", "+20 °C"."""
    if not table.above_standard:
        return f"{head} °C"
    if units.read(head, "number") == 0.0:
        return "ISA"
    return f"ISA{head}" if head[0] in "+-\u2212" else f"ISA+{head}"


def _header(row: Row, parted: str) -> tuple[str, str, list[str], str] | None:
    """Mass unit, "ISA" or "degC", column heads, height unit."""
    text = "\t".join(row.cells) if parted else "  ".join(row.cells)
    found = re.fullmatch(r"(lb|kg)\s*\\\s*(ISA|degC|°C|C)\s+(.*\S)\s+(ft|m)", text)
    return None if found is None else (found[1], found[2], found[3].split(), found[4])


def _columns(document: Document, place: str, heads: list[str], line: int) -> list[float]:
    found: list[float] = []
    for head in heads:
        value = cells.number(document, f"{place}, column {head}", head, line)
        if value is None:
            continue
        if found and value <= found[-1]:
            permitted = f"more than the one before it, {found[-1]:g}"
            document.fault(f"{place}, column {head}", head, permitted, "rising order, each value once", line)
        if not -80.0 <= value <= cells.HOTTEST:
            document.fault(f"{place}, column {head}", head, f"-80 to {cells.HOTTEST:g} degC", "is it Fahrenheit?", line)
        found.append(value)
    return found


def _ceilings(document: Document, key: str, row: Row, heads: list[str], unit: str) -> list[float]:
    place = f"{key}, row {row.cells[0]}"
    if len(row.cells) - 1 != len(heads):
        permitted = f"{len(heads)}, one below each column {', '.join(heads)}"
        document.fault(place, f"{len(row.cells) - 1} cells", permitted, cells.SPLIT, row.line)
        return []
    found = []
    for head, cell in zip(heads, row.cells[1:], strict=True):
        value = np.nan if cell in cells.NO_VALUE else cells.number(document, f"{place}, column {head}", cell, row.line)
        height = units.to_si(value, "height", unit) if value is not None else np.nan
        if height < -600.0 or height > 11_000.0:
            document.fault(
                f"{place}, column {head}", cell, "-600 to 11,000 m as pressure altitude", "look again", row.line
            )
        found.append(height)
    return found


def _answer(aircraft: Aircraft, table: HoverTable, mass: float, altitude: float, oat: float) -> HoverAnswer:
    shown, words = aircraft.units, _WORDS[table.kind]
    heavy = units.show(mass, "mass", shown.mass)
    across = oat - float(atmosphere.temperature_at(altitude)) if table.above_standard else oat
    if mass > table.masses[-1] * (1.0 + 1e-9):
        last = units.show(table.masses[-1], "mass", shown.mass)
        return _none(table, f"The manual’s table for hover {words} ends at {last}")
    if across > table.columns[-1] + _SLACK:
        return _none(table, f"The manual’s table for hover {words} ends at {_day(table, table.rows[0][-2])}")
    ceiling = _ceiling(table, mass, across)
    if not np.isfinite(ceiling):
        return _none(table, f"At {heavy} the manual gives no hover figure {words} here")
    if altitude > ceiling + _SLACK:
        text = f"At {heavy} the manual gives no {table.kind} hover here ({table.source})."
        return HoverAnswer(table.kind, False, text, table.source)
    height = units.round_down(units.from_si(ceiling, "height", shown.height), 1.0)
    text = f"At {heavy} the manual gives {table.kind} hover here, up to {units.show_number(height)} {shown.height}"
    return HoverAnswer(table.kind, True, f"{text} ({table.source}).", table.source)


def _none(table: HoverTable, text: str) -> HoverAnswer:
    return HoverAnswer(table.kind, None, f"{text} ({table.source}).", table.source)


def _ceiling(table: HoverTable, mass: float, across: float) -> float:
    """The ceiling [m] by the table's rule; NaN where it has none. Lighter or colder than the table: its first entry."""
    low, high, share = _between(table.masses, mass)
    left, right, part = _between(table.columns, across)
    corners: Floats = table.ceilings[np.ix_([low, high], [left, right])]
    if not table.interpolate:
        return float(corners[1 if share > 0.0 else 0, 1 if part > 0.0 else 0])
    weights = np.outer([1.0 - share, share], [1.0 - part, part])
    return float(np.sum(np.where(weights > 0.0, weights * corners, 0.0)))


def _between(axis: tuple[float, ...], value: float) -> tuple[int, int, float]:
    """Lower and upper entry and the share of the upper; below the first entry that entry alone."""
    upper = int(np.searchsorted(np.asarray(axis), value - abs(value) * 1e-9 - 1e-9))
    upper = min(upper, len(axis) - 1)
    if upper == 0 or abs(value - axis[upper]) <= abs(value) * 1e-9 + 1e-9:
        return upper, upper, 0.0
    return upper - 1, upper, (value - axis[upper - 1]) / (axis[upper] - axis[upper - 1])
