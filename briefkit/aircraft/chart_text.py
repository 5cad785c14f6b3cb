r"""Charts as text blocks laid out like the manual's page, typed or pasted from a spreadsheet.

    ft \ degC    -20     0    +20    +40     kt indicated
    0            112   112    112    108
    2,000        112   112    107     99

Down the side and across go two of pressure altitude (ft, m), density altitude (DA ft, DA m), temperature (degC), mass
(lb, kg) and rotor speed (%); one of them alone is a chart too. A third is typed as several such charts, each under a
line "at 1,700 lb or less".
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft import cells
from briefkit.aircraft.cells import AXES, SPEEDS, Block, Labels, Row
from briefkit.aircraft.chart import Floats
from briefkit.reading.document import Document
from briefkit.reading.quantity import quoted

_AXIS_TEXT: Final = r"(?:DA\s+)?[^\s\\]+"
_CORNER = re.compile(rf"{_AXIS_TEXT}(?:\s*\\\s*{_AXIS_TEXT})*")
_EXAMPLE: Final = r'like "ft \ degC   -20   0   +20   kt indicated"'
_DOWN: Final = f"{', '.join(AXES)}: pressure altitudes go down the side as a rule"
_TWO: Final = (
    'a chart varies with at most two variables (14 CFR 27.1505(b)(1)); a third is typed as charts under lines like "at '
    '2,006 lb or less", with a reason'
)
Texts = NDArray[np.object_]


@dataclass(frozen=True)
class TypedChart:
    """A chart as typed, in SI: its axes (down, across, third, as far as there are), speeds [m/s] and the text of each
    cell, both of the shape of the axes; NaN where the manual prints no value. `rows` is the text, header first.

    `straight` where the axis down is read along straight lines.
    """

    axes: tuple[Labels, ...]
    speeds: Floats
    texts: Texts
    speed_unit: str
    rows: tuple[tuple[str, ...], ...]
    straight: bool = False


def read_vne(document: Document, key: str, text: str) -> TypedChart | None:
    """The VNE chart typed at a dotted key; None, with its faults recorded in the document, where it has any."""
    blocks, parted = cells.split(text, document.block_line(key))
    if not parted and len(re.findall(r"\d\s*,(?!\d{3}\b)", text)) > sum(len(block.rows) for block in blocks):
        first = blocks[0].rows[0]
        read = f"commas between cells: {quoted(' '.join(first.cells))}"
        permitted = "tabs, semicolons or spaces between cells; a comma groups digits"
        document.fault(key, read, permitted, "write ; for the commas", first.line)
        return None
    charts = [_read_block(document, f"{key}, at {block.label}" if block.label else key, block, parted)
              for block in blocks]  # fmt: skip
    found = [chart for chart in charts if chart is not None]
    if len(found) < len(charts):
        return None
    if len(found) == 1 and not blocks[0].label:
        return found[0]
    return stacked(document, key, blocks, found)


def stacked(document: Document, key: str, blocks: list[Block], charts: list[TypedChart]) -> TypedChart | None:
    """Charts each under its line "at ..." as one, with that as one more axis; None with faults."""
    first = charts[0]
    if len(blocks) < 2 or not blocks[0].label:
        read = "one chart under a line" if len(blocks) < 2 else "a chart without a line above it"
        document.fault(
            key, read, 'two charts or more, each under a line like "at 1,700 lb or less"', line=blocks[0].line
        )
        return None
    for block, chart in zip(blocks[1:], charts[1:], strict=True):
        if chart.axes != first.axes or chart.speed_unit != first.speed_unit:
            remedy = "all charts under one key have the same rows and columns"
            document.fault(
                f"{key}, at {block.label}", "other rows or columns", "those of the first", remedy, block.line
            )
            return None
    names = [(block.line, f"at {block.label}", block.label) for block in blocks]
    third = cells.named_labels(document, key, names, {axis.axis for axis in first.axes})
    if third is None:
        return None
    rows = [first.rows[0]]
    for label, chart in zip(third.texts, charts, strict=True):
        rows += [(f"at {label}", *[""] * (len(first.rows[0]) - 1)), *chart.rows[1:]]
    return TypedChart(
        (*first.axes, third),
        np.stack([chart.speeds for chart in charts], axis=-1),
        np.stack([chart.texts for chart in charts], axis=-1),
        first.speed_unit,
        tuple(rows),
        first.straight,
    )


def _read_block(document: Document, key: str, block: Block, parted: str) -> TypedChart | None:
    before = len(document.faults)
    rows = block.rows
    if len(rows) < 3:
        permitted = r'a line like "ft \ degC  0  +20  kt indicated", then two rows or more'
        document.fault(key, f"{len(rows)} lines", permitted)
        return None
    head = _corner(document, key, rows[0], parted)
    if head is None:
        return None
    down, across, heads, speed_unit = head
    axes = []
    if across:
        axes.append(cells.labels(document, key, across, [(rows[0].line, f"header, column {x}", x) for x in heads]))
    sides = [(row.line, f"row {row.cells[0]}", row.cells[0]) for row in rows[1:]]
    axes.insert(0, cells.labels(document, key, down, sides))
    speeds = _speeds(document, key, rows[1:], heads, speed_unit)
    if len(document.faults) == before:
        _blank_lines(document, key, rows, heads, speeds)
    if len(document.faults) > before:
        return None
    corner = rf"{down} \ {across}".rstrip(" \\")
    shape = tuple(len(axis.values) for axis in axes if axis)
    texts = np.array([["" if cell in cells.NO_VALUE else cell for cell in row.cells[1:]] for row in rows[1:]], object)
    return TypedChart(
        tuple(axis for axis in axes if axis),
        (units.to_si(1.0, "speed", speed_unit) * np.array(speeds, dtype=float)).reshape(shape),
        texts.reshape(shape),
        speed_unit,
        ((corner, *heads), *(row.cells for row in rows[1:])),
    )


def _corner(document: Document, key: str, row: Row, parted: str) -> tuple[str, str, list[str], str] | None:
    """What goes down and across (as typed), column heads, speed unit; None with a fault."""
    where = f"{key}, header"
    heads = list(row.cells)
    if parted:
        corner, *heads = heads
        speed = heads.pop() if heads else ""
        while heads and not heads[-1]:
            heads.pop()
    else:
        joined = " ".join(heads)
        match = _CORNER.match(joined)
        corner = match[0] if match else ""
        heads = joined[len(corner) :].split()
        numbers = next((i for i, cell in enumerate(heads) if cell[0].isalpha()), len(heads))
        heads, speed = heads[:numbers], " ".join(heads[numbers:])
    parts = [" ".join(part.split()) for part in corner.split("\\")]
    if len(parts) > 2:
        document.fault(where, quoted(corner), f"two axes, {_EXAMPLE}", _TWO, row.line)
        return None
    down, across = parts[0], parts[1] if len(parts) == 2 else ""
    faults = []
    if down not in AXES:
        faults.append((down, _DOWN))
    if across not in AXES and len(parts) == 2:
        faults.append((across, f"{', '.join(AXES)}: temperatures or masses go across as a rule"))
    elif across and down in AXES and AXES[across][0] is AXES[down][0]:
        faults.append((across, f"two different variables; {_DOWN}"))
    unit = speed_unit(speed)
    if not unit:
        permitted = f"the unit of the cells at the end of the line: {', '.join(f'{unit} indicated' for unit in SPEEDS)}"
        faults.append((speed, permitted))
    for read, permitted in faults:
        document.fault(where, quoted(read) if read else "nothing", permitted, _EXAMPLE, row.line)
    if not across:
        return None if faults else (down, "", ["VNE"], unit)
    if len(heads) < 2:
        document.fault(where, f"{len(heads)} columns", f"two columns or more, {_EXAMPLE}", line=row.line)
    return None if faults or len(heads) < 2 else (down, across, heads, unit)


def speed_unit(text: str) -> str:
    """The unit of "kt indicated"; "" where it says anything else."""
    unit, _, kind = text.partition(" ")
    return unit if unit in SPEEDS and kind.strip() == "indicated" else ""


def _speeds(
    document: Document, key: str, rows: tuple[Row, ...], heads: list[str], unit: str
) -> list[list[float | None]]:
    found = []
    for row in rows:
        place = f"{key}, row {row.cells[0]}"
        if len(row.cells) - 1 != len(heads):
            permitted = f"{len(heads)}, one below each column {', '.join(heads)}"
            remedy = cells.SPLIT if len(row.cells) - 1 > len(heads) else cells.EMPTY
            document.fault(place, f"{len(row.cells) - 1} cells", permitted, remedy, row.line)
            continue
        pairs = zip(heads, row.cells[1:], strict=True)
        found.append([cells.speed(document, f"{place}, column {head}", cell, unit, row.line) for head, cell in pairs])
    return found


def _blank_lines(
    document: Document, key: str, rows: tuple[Row, ...], heads: list[str], speeds: list[list[float | None]]
) -> None:
    """A row or column without any value would say the chart reaches there."""
    blank = np.isnan(np.array(speeds, dtype=float))
    for row, none in zip(rows[1:], blank.all(axis=1), strict=True):
        if none:
            document.fault(
                f"{key}, row {row.cells[0]}", "no value in the row", "a figure", "take the row out", row.line
            )
    for i in np.nonzero(blank.all(axis=0))[0]:
        place = f"{key}, header, column {heads[int(i)]}"
        document.fault(place, "no value below it", "a figure", "take the column out", rows[0].line)
