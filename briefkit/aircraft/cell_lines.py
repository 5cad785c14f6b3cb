"""The line of an aircraft file a finding speaks of: the model keeps values, the file keeps where they stand."""

from __future__ import annotations

import re
from typing import Final

from briefkit.aircraft.cells import Block, Row, split
from briefkit.reading.document import Document

_CONFIGURATION = re.compile(r"configuration \((?P<name>.*)\)\.(?P<rest>.*)")
_FORMS: Final = ("", ".chart", ".lines")


def line_of(document: Document, key: str) -> int:
    """The line of a finding's key, like "vne.power_on.chart, row 6,000, column 0"; 0 where it is not known.

    `key` names a configuration by its name, and a chart by its table alone or with the block it is typed in.
    """
    where, _, cells = key.partition(", ")
    name = _numbered(document, where)
    for form in _FORMS:
        text = _value(document.data, f"{name}{form}")
        if isinstance(text, str):
            inside = _line(split(text, document.block_line(f"{name}{form}"))[0], cells) if cells else 0
            return inside or document.line_of(f"{name}{form}")
    return 0


def _numbered(document: Document, key: str) -> str:
    """A key that names a configuration, by the number of its entry instead, as the document does."""
    found = _CONFIGURATION.fullmatch(key)
    entries = document.data.get("configuration", [])
    if found is None or not isinstance(entries, list):
        return key
    for number, entry in enumerate(entries, start=1):
        if isinstance(entry, dict) and entry.get("name") == found["name"]:
            return f"configuration (entry {number}).{found['rest']}"
    return key


def _value(value: object, key: str) -> object:
    """What stands at a dotted key, "configuration (entry 2).power_on.chart"; None where there is nothing."""
    for part in key.split("."):
        name, _, entry = part.partition(" (entry ")
        value = value.get(name) if isinstance(value, dict) else None
        if entry:
            value = value[int(entry.rstrip(")")) - 1] if isinstance(value, list) else None
    return value


def _line(blocks: list[Block], cells: str) -> int:
    """The line of a row, a printed line or a header among a chart's blocks; 0 where none fits."""
    named = dict(part.split(" ", 1) for part in cells.split(", ") if " " in part)
    for block in blocks:
        if "at" in named and named["at"] != block.label:
            continue
        if not {"row", "line"} & set(named):
            return block.rows[0].line if block.rows else 0
        for row in block.rows:
            if _is(row, named):
                return row.line
    return 0


def _is(row: Row, named: dict[str, str]) -> bool:
    if "row" in named:
        return row.cells[0] == named["row"]
    return " ".join(row.cells).startswith(f"{named['line']}:")
