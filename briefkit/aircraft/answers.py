"""Answers to entry findings, in the aircraft file by kind of finding and by cells.

So that an answer for one column does not hide a slip of typing in another, it names the cells it speaks of:

    [vne.reasons]
    rises_with_temperature = { cells = "column -20", reason = "the coldest column holds the tip Mach number, 2-5" }
    more_than_two_variables = "flight manual 2-6 prints one chart a mass"
"""

from __future__ import annotations

import json
import re
from collections.abc import Mapping
from dataclasses import dataclass, replace
from enum import StrEnum
from typing import Any, Final

from briefkit.aircraft.model import Aircraft, Answer
from briefkit.aircraft.tables import CellsReason
from briefkit.errors import Fault
from briefkit.reading.document import Document
from briefkit.reading.quantity import did_you_mean, quoted


class Kind(StrEnum):
    """The kinds of entry finding; each is the key its answer stands under."""

    RISES_WITH_ALTITUDE = "rises_with_altitude"
    RISES_WITH_TEMPERATURE = "rises_with_temperature"
    RISES_WITH_MASS = "rises_with_mass"
    UNDER_40_KT = "under_40_kt"
    OUT_OF_LINE = "out_of_line"
    UNEVEN_AXIS = "uneven_axis"
    MORE_THAN_TWO_VARIABLES = "more_than_two_variables"
    POWER_OFF_ABOVE_POWER_ON = "power_off_above_power_on"
    POWER_OFF_UNDER_MIDPOINT = "power_off_under_midpoint"
    SUPPLEMENT_ABOVE_BASIC = "supplement_above_basic"
    CALIBRATION_OUT_OF_LINE = "calibration_out_of_line"
    HEAVIER_THAN_CHART = "heavier_than_chart"
    HOVER_ABOVE_MAXIMUM_MASS = "hover_above_maximum_mass"
    HOVER_CEILING_RISES = "hover_ceiling_rises"
    SIMILARITY = "similarity"


# Findings on single cells: their answer says which.
ON_CELLS: Final = (
    Kind.RISES_WITH_ALTITUDE,
    Kind.RISES_WITH_TEMPERATURE,
    Kind.RISES_WITH_MASS,
    Kind.UNDER_40_KT,
    Kind.OUT_OF_LINE,
    Kind.UNEVEN_AXIS,
    Kind.CALIBRATION_OUT_OF_LINE,
    Kind.HOVER_CEILING_RISES,
    Kind.SIMILARITY,
)
TABLE: Final = "[vne.reasons]"  # where answers stand in an aircraft file
_PART: Final = r"(?:row|column|at|line|point) \S.*?"
_CELLS = re.compile(rf"all|{_PART}(?:, {_PART}){{0,2}}")


@dataclass(frozen=True)
class EntryFinding:
    """One finding: its kind, the cell it is on ("row 0, column -20"; "" for none), and the fault as a sentence."""

    kind: Kind
    cells: str
    fault: Fault


def finding(kind: Kind, cells: str, key: str, read: str, permitted: str) -> EntryFinding:
    """An entry finding whose sentence says how to answer it."""
    place = f"{key}, {cells}" if cells else key
    return EntryFinding(kind, cells, Fault("", place, read, permitted, _remedy(kind, cells, "the aircraft file", ())))


def addressed(found: EntryFinding, aircraft: Aircraft, file: str) -> Fault:
    """The finding's fault with a remedy to paste: the table, the file, and a line that fits what stands there already.

    A second line of the same name would be a slip of TOML, so that reasons given for other cells are in the new line.
    """
    known = tuple(answer for answer in aircraft.answers if answer.kind == found.kind)
    return replace(found.fault, file=file, remedy=_remedy(found.kind, found.cells, file, known))


def _remedy(kind: Kind, cells: str, file: str, known: tuple[Answer, ...]) -> str:
    instead = ""
    if kind not in ON_CELLS:
        line = f'{kind} = "the reason"'
    else:
        entries = [*((answer.cells, answer.reason) for answer in known), (cells, "...")]
        typed = [f"{{ cells = {_toml(at)}, reason = {_toml(why)} }}" for at, why in entries]
        line = f"{kind} = {typed[0]}" if not known else f"{kind} = [{', '.join(typed)}]"
        instead = f" (in place of the line {kind} there)" if known else ""
    return f"look again in the manual; if it is so printed, say why under {TABLE} in {file}{instead}: {line}"


def _toml(text: str) -> str:
    return json.dumps(text, ensure_ascii=False)


def read_answers(document: Document, key: str, table: Mapping[str, Any]) -> tuple[Answer, ...]:
    """The answers of a table of reasons; faults go to the document."""
    found = []
    for name, value in table.items():
        place = f"{key}.{name}"
        if name not in list(Kind):
            document.fault(place, f"the key {name}", ", ".join(Kind), did_you_mean(name, list(Kind)))
        elif name in ON_CELLS:
            found += _on_cells(document, place, name, value)
        elif isinstance(value, str) and value.strip():
            found.append(Answer(name, "", value))
        else:
            document.fault(place, quoted(value), "the reason, as text in quotes")
    return tuple(found)


def _on_cells(document: Document, place: str, name: str, value: object) -> list[Answer]:
    """Answers on cells, each a table, or a list of them."""
    answers = []
    entries = value if isinstance(value, list) else [value]
    for entry in entries:
        if not isinstance(entry, dict):
            permitted = '{ cells = "column -20", reason = "..." }: which cells, and why'
            document.fault(place, quoted(entry), permitted, 'cells = "all" where all of them are meant')
            continue
        table = document.part(place, entry, CellsReason)
        if table.cells and not _CELLS.fullmatch(table.cells):
            permitted = '"column -20", "row 6,000", "row 6,000, column -20" or "all"'
            document.fault(f"{place}.cells", quoted(table.cells), permitted)
        elif table.cells and table.reason:
            answers.append(Answer(name, table.cells, table.reason))
    return answers


def answered(aircraft: Aircraft, found: EntryFinding) -> bool:
    """Whether the file has a reason for this kind of finding on these cells."""
    for answer in aircraft.answers:
        if answer.kind == found.kind and (
            answer.cells in ("", "all") or set(answer.cells.split(", ")) <= set(found.cells.split(", "))
        ):
            return True
    return False
