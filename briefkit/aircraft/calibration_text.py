"""The airspeed calibration as a text block: indicated and calibrated speeds, row by row."""

from __future__ import annotations

import re
from dataclasses import dataclass

from briefkit import units
from briefkit.aircraft import cells
from briefkit.reading.document import Document
from briefkit.reading.quantity import quoted


@dataclass(frozen=True)
class CalibrationRows:
    """A calibration as typed: unit, indicated and calibrated speeds [m/s], and the rows, header first."""

    unit: str
    indicated: tuple[float, ...]
    calibrated: tuple[float, ...]
    rows: tuple[tuple[str, ...], ...]


def read_calibration(document: Document, key: str, text: str) -> CalibrationRows | None:
    """The calibration typed at a dotted key; None, with its faults recorded in the document, where it has any."""
    before = len(document.faults)
    rows = [row for block in cells.split(text, document.block_line(key))[0] for row in block.rows]
    header = " ".join(rows[0].cells) if rows else ""
    match = re.fullmatch(r"(\S+) indicated (\S+) calibrated", " ".join(header.split()))
    if match is None or match[1] != match[2] or match[1] not in cells.SPEEDS:
        permitted = f'a first line "kt indicated    kt calibrated"; units {", ".join(cells.SPEEDS)}, the same in both'
        document.fault(f"{key}, header", quoted(header), permitted, line=rows[0].line if rows else 0)
        return None
    unit = match[1]
    if len(rows) < 3:
        document.fault(key, f"{len(rows) - 1} rows", "two rows or more below the header")
        return None
    for row in rows[1:]:
        if len(row.cells) != 2:
            document.fault(f"{key}, row {row.cells[0]}", f"{len(row.cells)} cells", "2 cells", cells.SPLIT, row.line)
    whole = [row for row in rows[1:] if len(row.cells) == 2]
    columns = []
    for place, name in enumerate(("indicated", "calibrated")):
        column = [(row.line, f"{key}, row {row.cells[0]}, {name}", row.cells[place]) for row in whole]
        columns.append(_rising(document, column, unit))
    if len(document.faults) > before:
        return None
    indicated, calibrated = (tuple(units.to_si(value, "speed", unit) for value in column) for column in columns)
    shown = ((f"{unit} indicated", f"{unit} calibrated"), *(row.cells for row in rows[1:]))
    return CalibrationRows(unit, indicated, calibrated, shown)


def _rising(document: Document, column: list[tuple[int, str, str]], unit: str) -> list[float]:
    """Speeds as numbers, each above the one before; what has a fault is left out."""
    found: list[float] = []
    for line, place, cell in column:
        value = cells.number(document, place, cell, line)
        if value is None:
            continue
        if found and value <= found[-1]:
            permitted = f"more than the one before it, {found[-1]:,g}"
            document.fault(place, cell, permitted, "rising order, each value once", line)
        if not 0.0 < value <= cells.FASTEST[unit]:
            permitted = f"above 0, up to {cells.FASTEST[unit]:g} {unit}"
            document.fault(place, cell, permitted, "look again in the manual", line)
        found.append(value)
    return found
