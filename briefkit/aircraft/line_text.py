"""A chart of printed lines, as the points a person reads off each line.

    ft    kt indicated
    -20 degC: 0 112, 4,000 112, 10,000 86
    +20 degC: 0 112, 1,000 112, 10,000 69

Points are parted by a comma and a space, or a semicolon; a comma inside digits groups them. Between its points a line
is straight, so all lines are put on the heights (or whatever goes along) of all of them without any loss. Where a line
does not reach there is no value.
"""

from __future__ import annotations

import re
from typing import Final

import numpy as np

from briefkit import units
from briefkit.aircraft import cells, chart_text
from briefkit.aircraft.cells import AXES, Labels
from briefkit.aircraft.chart_text import TypedChart
from briefkit.reading.document import Document
from briefkit.reading.quantity import quoted

_LINE = re.compile(r"\s*([^:]+?)\s*:\s*(.+?)\s*")
_EXAMPLE: Final = (
    'like "ft   kt indicated", then a line like "+20 degC: 0 112, 4,000 97, 10,000 69" for each one printed'
)


def read_lines(document: Document, key: str, text: str) -> TypedChart | None:
    """The chart of lines typed at a dotted key; None, with its faults recorded in the document, where it has any."""
    before = len(document.faults)
    first = document.block_line(key)
    rows = [(first + i, line) for i, line in enumerate(text.replace("\ufeff", "").split("\n")) if line.strip()]
    header = " ".join(rows[0][1].split()) if rows else ""
    match = re.fullmatch(r"((?:DA )?\S+) (\S+ indicated)", header)
    unit = chart_text.speed_unit(match[2]) if match else ""
    if match is None or match[1] not in AXES or not unit or len(rows) < 2:
        document.fault(f"{key}, header", quoted(header), f"what goes along, and the speeds, {_EXAMPLE}", line=first)
        return None
    along = match[1]
    lines: list[tuple[int, str, tuple[Labels, list[float], list[str]] | None]] = []
    for line, typed in rows[1:]:
        named = _LINE.fullmatch(typed)
        if named is None:
            place, permitted = f"{key}, line {len(lines) + 1}", f"a name, a colon, points, {_EXAMPLE}"
            document.fault(place, quoted(typed.strip()), permitted, line=line)
            continue
        place = f"{key}, line {named[1]}"
        lines.append((line, named[1], _points(document, place, named[2], along, unit, line)))
    across = None
    if len(lines) > 1:  # one line alone may have any name
        names = [(line, f"line {name}", cells.or_less_marked(name)) for line, name, _ in lines]
        across = cells.named_labels(document, key, names, {AXES[along][0]})
    if len(document.faults) > before:
        return None
    found = [points for _, _, points in lines if points is not None]
    shown = ((header, "points, each with its speed"), *((name, typed.partition(":")[2].strip())
             for (_, name, _), (_, typed) in zip(lines, rows[1:], strict=True)))  # fmt: skip
    return _resampled(found, across, unit, shown)


def _points(
    document: Document, place: str, text: str, along: str, unit: str, line: int
) -> tuple[Labels, list[float], list[str]] | None:
    """The nodes of one line, its speeds [m/s] and their text; None with faults."""
    pairs = [pair.split() for pair in re.split(r",\s+|\s*;\s*", text.strip(" ,;"))]
    wrong = next((pair for pair in pairs if len(pair) != 2), None)
    if wrong is not None or len(pairs) < 2:
        permitted = 'two points or more, each its place and its speed, like "0 112, 4,000 97"'
        remedy = "a comma and a space part points; a comma inside digits groups them"
        document.fault(place, quoted(" ".join(wrong or pairs[0])), permitted, remedy, line)
        return None
    nodes = cells.labels(document, place, along, [(line, f"point {at}", at) for at, _ in pairs])
    speeds = [cells.speed(document, f"{place}, point {at}", speed, unit, line) for at, speed in pairs]
    blank = next(
        (at for (at, _), value in zip(pairs, speeds, strict=True) if value is not None and np.isnan(value)), None
    )
    if blank is not None:
        document.fault(f"{place}, point {blank}", "no value", "a speed", "a line ends at its last point", line)
    if nodes is None or blank is not None or None in speeds:
        return None
    values = [units.to_si(value, "speed", unit) for value in speeds if value is not None]
    return nodes, values, [speed for _, speed in pairs]


def _resampled(
    lines: list[tuple[Labels, list[float], list[str]]],
    across: Labels | None,
    unit: str,
    shown: tuple[tuple[str, ...], ...],
) -> TypedChart:
    """Every line on the nodes of all of them: exact, since each is straight between its own."""
    nodes = {value: text for labels, _, _ in lines for value, text in zip(labels.values, labels.texts, strict=True)}
    along = tuple(sorted(nodes))
    first = lines[0][0]
    down = Labels(first.axis, first.unit, first.density, along, tuple(nodes[value] for value in along))
    speeds = np.full((len(along), len(lines)), np.nan)
    texts = np.full((len(along), len(lines)), "", dtype=object)
    for j, (labels, values, typed) in enumerate(lines):
        speeds[:, j] = np.interp(along, labels.values, values, left=np.nan, right=np.nan)
        for value, text in zip(labels.values, typed, strict=True):
            texts[along.index(value), j] = text
    if across is None:
        return TypedChart((down,), speeds[:, 0], texts[:, 0], unit, shown, straight=True)
    return TypedChart((down, across), speeds, texts, unit, shown, straight=True)
