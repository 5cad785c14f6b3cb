r"""Charts as text blocks laid out like the manual's page, typed or pasted from a spreadsheet.

Cells are parted by tabs, else by semicolons, else by runs of spaces; a comma never parts cells ("2,000" is one number).
Every faulty cell is named by its row and column as the person sees them:

    ft \ degC    -20     0    +20    +40     kt indicated
    0            112   112    112    108
    2,000        112   112    107     99
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Final

import numpy as np

from briefkit import units
from briefkit.aircraft.chart import Floats
from briefkit.errors import ReadingError
from briefkit.reading.document import Document
from briefkit.reading.quantity import quoted, spelling

_CORNER = re.compile(r"[^\s\\]+(?:\s*\\\s*[^\s\\]+)*")
_SPEEDS: Final = tuple(units.permitted_units("speed"))
_ACROSS: Final = {unit: kind for kind in ("temperature", "mass") for unit in units.permitted_units(kind)}
_HOTTEST: Final = 55.0  # degC; above it a figure is most likely in Fahrenheit
_FASTEST: Final = {"kt": 250.0, "km/h": 460.0, "mph": 290.0}
_SPLIT: Final = "a space inside a number parts it: write 2,000 or 2000"

_EMPTY: Final = "a chart has no empty cells: type the figure from the manual"


@dataclass(frozen=True)
class VneTable:
    """A chart as typed, in SI: heights [m], columns [K or kg], speeds [m/s] of shape (heights, columns)."""

    heights: tuple[float, ...]
    across: str  # "temperature", "mass" or "" (one column, no axis across)
    columns: tuple[float, ...]
    speeds: Floats
    speed_unit: str
    height_unit: str
    rows: tuple[tuple[str, ...], ...]
    or_less: bool = False  # the first column says so


@dataclass(frozen=True)
class CalibrationRows:
    """A calibration as typed: unit, indicated and calibrated speeds [m/s], and the rows, header first."""

    unit: str
    indicated: tuple[float, ...]
    calibrated: tuple[float, ...]
    rows: tuple[tuple[str, ...], ...]


@dataclass(frozen=True)
class _Row:
    line: int
    cells: tuple[str, ...]


def read_vne(document: Document, key: str, text: str) -> VneTable | None:
    """The VNE chart typed at a dotted key; None, with its faults recorded in the document, where it has any."""
    before = len(document.faults)
    rows, parted = _rows(text, document.block_line(key))
    if len(rows) < 3:
        document.fault(
            key, f"{len(rows)} lines", r'a line like "ft \ degC  0  +20  kt indicated", then two rows or more'
        )
        return None
    if not parted and len(re.findall(r"\d\s*,(?!\d{3}\b)", text)) > len(rows):
        read = f"commas between cells: {quoted(' '.join(rows[0].cells))}"
        permitted = "tabs, semicolons or spaces between cells; a comma groups digits"
        document.fault(key, read, permitted, "write ; for the commas", rows[0].line)
        return None
    head = _corner(document, key, rows[0], parted)
    if head is None:
        return None
    height_unit, across, across_unit, labels, speed_unit = head
    columns = _axis(
        document, key, [(rows[0].line, f"header, column {label}", label) for label in labels] if across else []
    )
    heights = _axis(document, key, [(row.line, f"row {row.cells[0]}", row.cells[0]) for row in rows[1:]])
    if across == "temperature" and any(value is not None and value > _HOTTEST for value in columns):
        hottest = max(value for value in columns if value is not None)
        document.fault(f"{key}, header", f"{hottest:g} {across_unit}", f"up to {_HOTTEST:g} degC", "is it Fahrenheit?")
    speeds = _speeds(document, key, rows[1:], labels, speed_unit)
    if len(document.faults) > before:
        return None
    shown = ((rf"{height_unit} \ {across_unit}".rstrip(" \\"), *labels), *(row.cells for row in rows[1:]))
    return VneTable(
        tuple(units.to_si(value, "height", height_unit) for value in heights if value is not None),
        across,
        tuple(units.to_si(value, across, across_unit) for value in columns if value is not None),
        units.to_si(1.0, "speed", speed_unit) * np.array(speeds, dtype=float),
        speed_unit,
        height_unit,
        shown,
        across == "mass" and labels[0].startswith(("<=", "≤")),
    )


def read_calibration(document: Document, key: str, text: str) -> CalibrationRows | None:
    """The calibration typed at a dotted key; None, with its faults recorded in the document, where it has any."""
    before = len(document.faults)
    rows, _ = _rows(text, document.block_line(key))
    header = " ".join(rows[0].cells) if rows else ""
    match = re.fullmatch(r"(\S+) indicated (\S+) calibrated", " ".join(header.split()))
    if match is None or match[1] != match[2] or match[1] not in _SPEEDS:
        permitted = f'a first line "kt indicated    kt calibrated"; units {", ".join(_SPEEDS)}, the same in both'
        document.fault(f"{key}, header", quoted(header), permitted, line=rows[0].line if rows else 0)
        return None
    if len(rows) < 3:
        document.fault(key, f"{len(rows) - 1} rows", "two rows or more below the header")
        return None
    for row in rows[1:]:
        if len(row.cells) != 2:
            document.fault(f"{key}, row {row.cells[0]}", f"{len(row.cells)} cells", "2 cells", _SPLIT, row.line)
    whole = [row for row in rows[1:] if len(row.cells) == 2]
    columns = []
    for place, name in enumerate(("indicated", "calibrated")):
        cells = [(row.line, f"row {row.cells[0]}, {name}", row.cells[place]) for row in whole]
        columns.append(_axis(document, key, cells))
        for (line, label, cell), value in zip(cells, columns[-1], strict=True):
            if value is not None and not 0.0 < value <= _FASTEST[match[1]]:
                permitted = f"above 0, up to {_FASTEST[match[1]]:g} {match[1]}"
                document.fault(f"{key}, {label}", cell, permitted, "look again in the manual", line)
    if len(document.faults) > before:
        return None
    indicated, calibrated = (
        tuple(units.to_si(value, "speed", match[1]) for value in column if value is not None) for column in columns
    )
    shown = ((f"{match[1]} indicated", f"{match[1]} calibrated"), *(row.cells for row in rows[1:]))
    return CalibrationRows(match[1], indicated, calibrated, shown)


def _rows(text: str, first_line: int) -> tuple[list[_Row], str]:
    """Lines with something on them as cells, and what parts the cells ("" for runs of spaces)."""
    parted = "\t" if "\t" in text else ";" if ";" in text else ""
    rows = []
    for offset, line in enumerate(text.lstrip("\ufeff").replace("\r\n", "\n").split("\n")):
        if not line.strip(" \t;"):
            continue
        cells = [cell.strip() for cell in (line.rstrip(" \t;") if parted else line).split(parted or None)]
        rows.append(_Row(first_line + offset, tuple(cells)))
    return rows, parted


def _corner(document: Document, key: str, row: _Row, parted: str) -> tuple[str, str, str, list[str], str] | None:
    """Height unit, kind and unit of the axis across, column labels, speed unit; None with a fault."""
    where = f"{key}, header"
    example = r'like "ft \ degC   -20   0   +20   kt indicated"'
    cells = list(row.cells)
    if parted:
        corner, *cells = cells
        speed = cells.pop() if cells else ""
        while cells and not cells[-1]:
            cells.pop()
    else:
        joined = " ".join(cells)
        match = _CORNER.match(joined)
        corner = match[0] if match else ""
        cells = joined[len(corner) :].split()
        numbers = next((i for i, cell in enumerate(cells) if cell[0].isalpha()), len(cells))
        cells, speed = cells[:numbers], " ".join(cells[numbers:])
    parts = [part.strip() for part in corner.split("\\")]
    if len(parts) > 2:
        remedy = "a chart varies with at most two of altitude, temperature, mass and rotor speed (14 CFR 27.1505(b)(1))"
        document.fault(where, quoted(corner), f"two axes, {example}", remedy, row.line)
        return None
    height, across = parts[0], parts[1] if len(parts) == 2 else ""
    faults = []
    if height not in units.permitted_units("height"):
        faults.append((height, "ft or m: pressure altitudes go down the side"))
    if across not in _ACROSS and len(parts) == 2:
        faults.append((across, f"{', '.join(_ACROSS)}: temperatures or masses go across"))
    unit, _, kind = speed.partition(" ")
    if unit not in _SPEEDS or kind.strip() != "indicated":
        permitted = (
            f"the unit of the cells at the end of the line: {', '.join(f'{unit} indicated' for unit in _SPEEDS)}"
        )
        faults.append((speed, permitted))
    for read, permitted in faults:
        document.fault(where, quoted(read) if read else "nothing", permitted, example, row.line)
    if not across:
        return None if faults else (height, "", "", ["VNE"], unit)
    if len(cells) < 2:
        document.fault(where, f"{len(cells)} columns", f"two columns or more, {example}", line=row.line)
    return None if faults or len(cells) < 2 else (height, _ACROSS.get(across, ""), across, cells, unit)


def _axis(document: Document, key: str, cells: list[tuple[int, str, str]]) -> list[float | None]:
    """The labels of an axis as numbers, each above the one before; None for a cell that has a fault."""
    found: list[float | None] = []
    for line, place, cell in cells:
        value = _number(document, f"{key}, {place}", cell.removeprefix("<=").removeprefix("≤"), line)
        previous = next((other for other in reversed(found) if other is not None), None)
        if value is not None and previous is not None and value <= previous:
            permitted = f"more than the one before it, {previous:,g}"
            document.fault(f"{key}, {place}", cell, permitted, "rising order, each value once", line)
        found.append(value)
    return found


def _speeds(
    document: Document, key: str, rows: list[_Row], labels: list[str], speed_unit: str
) -> list[list[float | None]]:
    fastest = _FASTEST[speed_unit]
    found = []
    for row in rows:
        cells = row.cells[1:]
        place = f"{key}, row {row.cells[0]}"
        if len(cells) != len(labels):
            permitted = f"{len(labels)}, one below each column {', '.join(labels)}"
            document.fault(
                place, f"{len(cells)} cells", permitted, _SPLIT if len(cells) > len(labels) else _EMPTY, row.line
            )
            continue
        values = []
        for label, cell in zip(labels, cells, strict=True):
            here = f"{place}, column {label}"
            value = _number(document, here, cell, row.line)
            if value is not None and not 0.0 < value <= fastest:
                document.fault(
                    here, cell, f"above 0, up to {fastest:g} {speed_unit}", "look again in the manual", row.line
                )
            values.append(value)
        found.append(values)
    return found


def _number(document: Document, place: str, cell: str, line: int) -> float | None:
    try:
        return units.read(cell, "number")
    except ReadingError as error:
        remedy = spelling(cell, "number") or error.remedy
        if cell == "?":
            remedy = "type the figure from the manual"
        elif not cell:
            remedy = _EMPTY
        document.fault(place, quoted(cell) if cell else "an empty cell", "a number without unit", remedy, line)
        return None
