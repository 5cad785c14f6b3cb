"""A finding on a brief or its files: how much it matters, where, what, and what to do."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace
from enum import StrEnum
from pathlib import Path
from typing import TypeVar

from briefkit.errors import Fault, FaultyFile
from briefkit.reading.document import EXAMPLE, Document

Loaded = TypeVar("Loaded")


class Level(StrEnum):
    """How much a finding matters."""

    BLOCKS = "blocks release"
    REASON = "needs a reason"
    NOTE = "note"


@dataclass(frozen=True)
class Finding:
    """One finding: how much it matters, where, what, and what to do."""

    level: Level
    place: str
    text: str
    remedy: str = ""

    def __str__(self) -> str:
        tail = f"; {self.remedy}" if self.remedy else ""
        return f"{self.level}: {self.place}: {self.text.removesuffix('.')}{tail}"


def loaded(path: Path, load: Callable[[Path], Loaded]) -> tuple[Loaded | None, list[Finding]]:
    """A typed file, and its faults and "?" as findings; a "?" is one finding, however many rules it breaks."""
    try:
        document = Document(path)
    except FaultyFile as error:
        return None, [from_fault(fault) for fault in error.faults]
    made, faults = None, []
    try:
        made = load(path)
    except FaultyFile as error:
        faults = [replace(fault, read="?") if fault.read == '"?"' else fault for fault in error.faults]
    asked = [fault.key for fault in faults if fault.read == "?"]
    for key in document.unanswered():
        if not any(other.startswith(key) or key.startswith(other) for other in asked):
            faults.append(Fault(str(path), key, "?", "", "", document.line_of(key)))
    faults += [Fault(str(path), key, EXAMPLE, "", "", line) for key, line in document.examples()]
    faults.sort(key=lambda fault: fault.line)
    return made, [from_fault(fault) for fault in faults]


def from_fault(fault: Fault) -> Finding:
    """A fault of a file blocks release; a "?" or a starter's example says so in fewer words."""
    place = f"{fault.file}, line {fault.line}: {fault.key}" if fault.line else f"{fault.file}: {fault.key}"
    if fault.read == "?":
        return Finding(Level.BLOCKS, place, 'still "?"', "type it from its document")
    if fault.read == EXAMPLE:
        remedy = f"type your own value and take the mark # {EXAMPLE} out"
        return Finding(Level.BLOCKS, place, "still the starter's example", remedy)
    return Finding(Level.BLOCKS, place, f"read {fault.read}; permitted: {fault.permitted}", fault.remedy)


def invented_finding(place: str, invented: str) -> list[Finding]:
    """A file that says its values are invented blocks release."""
    if not invented:
        return []
    remedy = "take the key out once every value is your own"
    return [Finding(Level.BLOCKS, f"{place}: invented", f"the file says: {invented}", remedy)]


def source_findings(place: str, sources: Iterable[tuple[str, str]]) -> list[Finding]:
    """One finding for each table without a source."""
    remedy = 'add source = "document, page, revision"'
    return [Finding(Level.BLOCKS, f"{place}: {name}", "no source", remedy) for name, source in sources if not source]
