"""Text blocks cut into cells, and what a cell may hold: numbers, labels of an axis, airspeeds.

Cells are parted by tabs, else by semicolons, else by runs of spaces; a comma never parts cells ("2,000" is one number).
Every faulty cell is named by its row and column as the person sees them.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from typing import Final

from briefkit import units
from briefkit.aircraft.chart import Axis
from briefkit.errors import ReadingError
from briefkit.reading.document import Document
from briefkit.reading.quantity import plain, quoted, spelling

SPEEDS: Final = tuple(units.permitted_units("speed"))
FASTEST: Final = {"kt": 250.0, "km/h": 460.0, "mph": 290.0}
HOTTEST: Final = 55.0  # degC; above it a figure is most likely in Fahrenheit
SPLIT: Final = "a space inside a number parts it: write 2,000 or 2000"
EMPTY: Final = 'type the figure from the manual, or "-" where the manual prints none: a chart has no empty cells'
NO_VALUE: Final = ("-", "\u2212", "\u2013")  # a cell the manual leaves without a value

# An axis as typed in a header: its kind, the unit of its labels, and whether its heights are density altitudes.
AXES: Final[dict[str, tuple[Axis, str, bool]]] = {
    **{unit: (Axis.HEIGHT, unit, False) for unit in units.permitted_units("height")},
    **{f"DA {unit}": (Axis.HEIGHT, unit, True) for unit in units.permitted_units("height")},
    **{unit: (Axis.TEMPERATURE, unit, False) for unit in units.permitted_units("temperature")},
    **{unit: (Axis.MASS, unit, False) for unit in units.permitted_units("mass")},
    "%": (Axis.ROTOR_SPEED, "%", False),
}
QUANTITY: Final = {
    Axis.HEIGHT: "height",
    Axis.TEMPERATURE: "temperature",
    Axis.MASS: "mass",
    Axis.ROTOR_SPEED: "ratio",
}
# Outside these (SI) nobody types an entry of a chart on purpose; density altitudes go deeper.
_RANGES: Final = {
    Axis.HEIGHT: (-600.0, 11_000.0),
    Axis.TEMPERATURE: (units.ZERO_CELSIUS - 80.0, units.ZERO_CELSIUS + HOTTEST),
    Axis.MASS: (100.0, 20_000.0),
    Axis.ROTOR_SPEED: (0.75, 1.25),
}
_LOWEST_DENSITY_ALTITUDE: Final = -5_000.0

_OR_LESS = re.compile(
    r"([+\-\u2212]?\d[\d.,]*)(?:[ \u00a0]*(?!or\b|and\b)([^\W\d]\S*|%|°C))?\s+(?:or less|or below|and below)\b"
)
_BLOCK = re.compile(r"at\s+(\S.*?)\s*:?")


@dataclass(frozen=True)
class Row:
    """One line of a text block: its number in the file and its cells."""

    line: int
    cells: tuple[str, ...]


@dataclass(frozen=True)
class Block:
    """Rows that belong together; `label` is what its line "at 1,700 lb or less" says, "" where it has none."""

    label: str
    line: int
    rows: tuple[Row, ...]


@dataclass(frozen=True)
class Labels:
    """The entries of one axis: kind, values [SI], text as typed, and what its marks "or less" say.

    `bands` where every entry says "or less", `or_less` where the first does.
    """

    axis: Axis
    unit: str
    density: bool
    values: tuple[float, ...]
    texts: tuple[str, ...]
    or_less: bool = False
    bands: bool = False


def split(text: str, first_line: int) -> tuple[list[Block], str]:
    """Lines with something on them as blocks of rows, and what parts the cells ("" for runs of spaces)."""
    parted = "\t" if "\t" in text else ";" if ";" in text else ""
    blocks: list[tuple[str, int, list[Row]]] = [("", first_line, [])]
    for offset, typed in enumerate(text.lstrip("\ufeff").replace("\r\n", "\n").split("\n")):
        line = or_less_marked(typed)
        if not line.strip(" \t;"):
            continue
        if heading := _BLOCK.fullmatch(line.strip(" \t;")):
            blocks.append((heading[1], first_line + offset, []))
            continue
        cells = [cell.strip() for cell in (line.rstrip(" \t;") if parted else line).split(parted or None)]
        blocks[-1][2].append(Row(first_line + offset, tuple(cells)))
    if len(blocks) > 1 and not blocks[0][2]:
        del blocks[0]
    return [Block(label, line, tuple(rows)) for label, line, rows in blocks], parted


def or_less_marked(line: str) -> str:
    """The line with "1,700 lb or less" written as the one cell "≤1,700lb"."""
    return _OR_LESS.sub(lambda found: f"≤{found[1]}{found[2] or ''}", line)


def header_of(label: str) -> str:
    """The axis a label with its unit belongs to ("≤1,700 lb", "DA 3,000 ft"), as typed in a header; "" if none."""
    text, _ = unmarked(label)
    density = text.startswith("DA")
    for header, (axis, unit, dense) in AXES.items():
        try:
            if density == dense and units.read_with_unit(text.removeprefix("DA").strip(), QUANTITY[axis])[1] == unit:
                return header
        except ReadingError:
            continue
    return ""


def named_labels(document: Document, key: str, names: list[tuple[int, str, str]], taken: set[Axis]) -> Labels | None:
    """An axis whose entries carry their unit, one a chart or line: (line, place, name), of none of the axes `taken`.

    None with faults.
    """
    headers = [header_of(name) for _, _, name in names]
    for (line, place, name), header in zip(names, headers, strict=True):
        if not header or header != headers[0] or AXES[header][0] in taken:
            permitted = (
                'a value with its unit, like "1,700 lb or less" or "+20 degC", one unit in all, of another variable'
            )
            document.fault(f"{key}, {place}", quoted(name), permitted, line=line)
            return None
    density = AXES[headers[0]][2]
    bare = [(line, place, name.replace("DA", "", 1).strip() if density else name) for line, place, name in names]
    return labels(document, key, headers[0], bare)


def unmarked(label: str, unit: str = "") -> tuple[str, bool]:
    """A label without its mark for "or less" and without its unit, and whether it had the mark."""
    text = label.strip().removeprefix("<=").removeprefix("≤")
    return text.strip().removesuffix(unit).strip(), text != label.strip()


def labels(document: Document, key: str, header: str, cells: list[tuple[int, str, str]]) -> Labels | None:
    """The entries of an axis, each above the one before; `cells` are (line, place, label). None with faults."""
    axis, unit, density = AXES[header]
    found: list[float] = []
    marks = []
    before = len(document.faults)
    for line, place, cell in cells:
        text, mark = unmarked(cell, unit)
        value = number(document, f"{key}, {place}", text, line)
        marks.append(mark)
        if value is None:
            continue
        if found and value <= found[-1]:
            permitted = f"more than the one before it, {found[-1]:,g}"
            document.fault(f"{key}, {place}", text, permitted, "rising order, each value once", line)
        if axis is not Axis.TEMPERATURE:
            _in_range(document, f"{key}, {place}", value, header, line)
        found.append(value)
    # A whole header in Fahrenheit is one mistake, and one sentence.
    if axis is Axis.TEMPERATURE and found and max(found) > HOTTEST:
        permitted, read = f"up to {HOTTEST:g} degC", f"{max(found):g} {header}"
        document.fault(_header(key, cells), read, permitted, "is it Fahrenheit?", cells[0][0])
    elif axis is Axis.TEMPERATURE and found:
        _in_range(document, _header(key, cells), min(found), header, cells[0][0])
    _check_marks(document, _header(key, cells), axis, marks, cells)
    if len(document.faults) > before:
        return None
    quantity = QUANTITY[axis]
    values = tuple(units.to_si(value, quantity, unit) for value in found)
    texts = tuple(cell for _, _, cell in cells)
    bands = all(marks) and len(marks) > 1
    return Labels(axis, unit, density, values, texts, bool(marks and marks[0]), bands)


def number(document: Document, place: str, cell: str, line: int) -> float | None:
    """A number without unit; None with a fault."""
    try:
        return units.read(cell, "number")
    except ReadingError as error:
        remedy = spelling(cell, "number") or error.remedy
        if cell == "?":
            remedy = "type the figure from the manual"
        elif not cell:
            remedy = EMPTY
        document.fault(place, quoted(cell) if cell else "an empty cell", "a number without unit", remedy, line)
        return None


def speed(document: Document, place: str, cell: str, unit: str, line: int) -> float | None:
    """An airspeed in a cell, NaN where the manual prints none ("-"); None with a fault."""
    if cell in NO_VALUE:
        return math.nan
    value = number(document, place, cell, line)
    if value is not None and not 0.0 < value <= FASTEST[unit]:
        document.fault(place, cell, f"above 0, up to {FASTEST[unit]:g} {unit}", "look again in the manual", line)
        return None
    return value


def _header(key: str, cells: list[tuple[int, str, str]]) -> str:
    return f"{key}, {cells[0][1].partition(',')[0]}" if cells[0][1].startswith("header") else key


def _in_range(document: Document, place: str, value: float, header: str, line: int) -> None:
    axis, unit, density = AXES[header]
    low, high = _RANGES[axis]
    low = _LOWEST_DENSITY_ALTITUDE if density else low
    if not low <= units.to_si(value, QUANTITY[axis], unit) <= high:
        ends = [plain(units.from_si(end, QUANTITY[axis], unit)) for end in (low, high)]
        document.fault(place, f"{value:,g} {header}", f"{ends[0]} to {ends[1]} {header}", "look again", line)


def _check_marks(
    document: Document, place: str, axis: Axis, marks: list[bool], cells: list[tuple[int, str, str]]
) -> None:
    if not any(marks):
        return
    line, read = cells[0][0], quoted(" ".join(cell for _, _, cell in cells))
    if axis is Axis.ROTOR_SPEED:
        document.fault(place, read, "rotor speeds without a mark", "the chart ends where its entries end", line)
    elif any(marks[1:]) and not (all(marks) and axis is Axis.MASS):
        permitted = '"or less" on the first entry alone, or, for masses, on every one (bands)'
        remedy = 'the rule between entries is `reading = "next lower VNE"` or "interpolate"'
        document.fault(place, read, permitted, remedy, line)
