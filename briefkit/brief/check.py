"""What stands between a brief and its release: faults, what is still "?", missing sources and spreads, dates, people.

Nothing is computed or run here; `build` does that. A draft may have findings, a released page may not block on any.
"""

from __future__ import annotations

import calendar
import datetime as dt
import json
from collections.abc import Callable, Iterable
from dataclasses import dataclass, fields, replace
from enum import StrEnum
from pathlib import Path
from typing import Final, TypeVar

import numpy as np

from briefkit.aircraft.cross import entry_findings
from briefkit.aircraft.load import load_aircraft
from briefkit.aircraft.model import Aircraft, Limits, RotorData, Stated
from briefkit.aircraft.operation import OPERATION_FILE, Operation, cross_check, load_operation
from briefkit.brief.identity import (
    BRIEF_FILE,
    Identity,
    disagreements,
    load_identity,
    named_aircraft,
    operator_folder,
    shown_path,
)
from briefkit.errors import Fault, FaultyFile
from briefkit.reading.document import EXAMPLE, Document

# A value typed without a spread counts as exact. These never are: each moves the onset band or the pictures.
_NEVER_EXACT: Final = ("chord", "twist", "flap_inertia", "lift_slope", "drag_area")

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


def findings(path: Path | str, today: dt.date | None = None) -> list[Finding]:
    """Every finding on a brief (folder or `brief.toml`), on all briefs of an operator folder, or on an aircraft file.

    `today` is the day expiry is held against, by default the clock's. Raises `FaultyFile` only where the path leads to
    nothing to check.
    """
    path, today = Path(path), today or dt.date.today()
    if path.is_file() and path.name == BRIEF_FILE:
        path = path.parent
    if path.is_file():
        if path.suffix != ".toml" or path.name == OPERATION_FILE:
            raise _nothing(path)
        return _sorted(_aircraft(path)[1])
    if (path / BRIEF_FILE).is_file():
        return _brief(path, today)
    folders = sorted(file.parent for file in path.rglob(BRIEF_FILE))
    if not folders:
        raise _nothing(path)
    found: dict[Finding, None] = {}
    for folder in folders:
        found |= dict.fromkeys(_brief(folder, today))
    return _sorted(found)


def _nothing(path: Path) -> FaultyFile:
    permitted = f"a folder with a {BRIEF_FILE}, an operator folder, or an aircraft file"
    return FaultyFile([Fault(str(path), "path", "nothing to check", permitted, "check the path")])


def _brief(folder: Path, today: dt.date) -> list[Finding]:
    identity, found = _loaded(folder / BRIEF_FILE, load_identity)
    operation, aircraft = None, None
    try:
        operation, more = _loaded(shown_path(operator_folder(folder) / OPERATION_FILE), load_operation)
        found += more
    except FaultyFile as error:
        found += [finding for fault in error.faults if (finding := _from_fault(fault)) not in found]
    found += _notebook(folder)
    if (named := named_aircraft(folder)) is not None:
        aircraft, more = _aircraft(named)
        found += more
    if identity is not None:
        found += _dates(identity, operation, folder, today)
        found += map(_from_fault, disagreements(identity, aircraft, operation))
        if operation is not None:
            found += _people(identity, operation, folder)
    if operation is not None:
        place = str(shown_path(operator_folder(folder) / OPERATION_FILE))
        found += _sources(place, operation.sources) + _invented(place, operation.invented)
    if operation is not None and aircraft is not None and identity is not None:
        found += map(_from_fault, cross_check(operation, aircraft, [identity.work_area]))
    return _sorted(found)


def _loaded(path: Path, load: Callable[[Path], Loaded]) -> tuple[Loaded | None, list[Finding]]:
    """A typed file, and its faults and "?" as findings; a "?" is one finding, however many rules it breaks."""
    try:
        document = Document(path)
    except FaultyFile as error:
        return None, [_from_fault(fault) for fault in error.faults]
    loaded, faults = None, []
    try:
        loaded = load(path)
    except FaultyFile as error:
        faults = [replace(fault, read="?") if fault.read == '"?"' else fault for fault in error.faults]
    asked = [fault.key for fault in faults if fault.read == "?"]
    for key in document.unanswered():
        if not any(other.startswith(key) or key.startswith(other) for other in asked):
            faults.append(Fault(str(path), key, "?", "", "", document.line_of(key)))
    faults += [Fault(str(path), key, EXAMPLE, "", "", line) for key, line in document.examples()]
    faults.sort(key=lambda fault: fault.line)
    return loaded, [_from_fault(fault) for fault in faults]


def _from_fault(fault: Fault) -> Finding:
    place = f"{fault.file}, line {fault.line}: {fault.key}" if fault.line else f"{fault.file}: {fault.key}"
    if fault.read == "?":
        return Finding(Level.BLOCKS, place, 'still "?"', "type it from its document")
    if fault.read == EXAMPLE:
        remedy = f"type your own value and take the mark # {EXAMPLE} out"
        return Finding(Level.BLOCKS, place, "still the starter's example", remedy)
    return Finding(Level.BLOCKS, place, f"read {fault.read}; permitted: {fault.permitted}", fault.remedy)


def _aircraft(path: Path) -> tuple[Aircraft | None, list[Finding]]:
    aircraft, found = _loaded(path, load_aircraft)
    if aircraft is None:
        return None, found
    place = str(path)
    found += _invented(place, aircraft.invented)
    charts = [(name, source) for name, source in aircraft.sources if name not in ("rotor", "limits")]
    found += _sources(place, charts)
    found += _numbers_without_source(place, "rotor", aircraft.rotor)
    found += _numbers_without_source(place, "limits", aircraft.limits)
    for name in _NEVER_EXACT:
        if getattr(aircraft.rotor, name).spread == 0.0:
            remedy = 'add spread = "...", the half-width you would bet on at 95 %'
            found.append(Finding(Level.BLOCKS, f"{place}: rotor.{name}", "no spread", remedy))
    for entry in fields(aircraft.rotor):
        stated = getattr(aircraft.rotor, entry.name)
        if isinstance(stated, Stated) and not stated.known:
            found.append(Finding(Level.NOTE, f"{place}: rotor.{entry.name}", f"unknown; used: {stated.basis}"))
    if not aircraft.calibration.in_manual:
        text = "no calibration in the manual: indicated is taken as calibrated, give or take the spread"
        found.append(Finding(Level.NOTE, f"{place}: calibration", text))
    cells = aircraft.vne.speeds[np.isfinite(aircraft.vne.speeds)]
    outside = int(np.sum(np.isnan(aircraft.calibration.to_calibrated(cells))))
    if outside:
        text = f"{outside} cells lie outside the airspeed calibration: no answer is computed from them"
        found.append(Finding(Level.NOTE, f"{place}: vne.power_on.chart", text))
    for fault in entry_findings(aircraft):
        text = f"read {fault.read}; expected: {fault.permitted}"
        found.append(Finding(Level.REASON, f"{place}: {fault.key}", text, fault.remedy))
    if aircraft.vne.entry_reason:
        text = f"findings on the cells answered: {aircraft.vne.entry_reason}"
        found.append(Finding(Level.NOTE, f"{place}: vne.power_on.entry_reason", text))
    return aircraft, found


def _invented(place: str, invented: str) -> list[Finding]:
    if not invented:
        return []
    remedy = "take the key out once every value is your own"
    return [Finding(Level.BLOCKS, f"{place}: invented", f"the file says: {invented}", remedy)]


def _sources(place: str, sources: Iterable[tuple[str, str]]) -> list[Finding]:
    remedy = 'add source = "document, page, revision"'
    return [Finding(Level.BLOCKS, f"{place}: {name}", "no source", remedy) for name, source in sources if not source]


def _numbers_without_source(place: str, table: str, data: RotorData | Limits) -> list[Finding]:
    bare = []
    for entry in fields(data):
        stated = getattr(data, entry.name)
        parts = stated if isinstance(stated, tuple) else (stated,)
        if any(isinstance(part, Stated) and not part.source for part in parts):
            bare.append(entry.name)
    if not bare:
        return []
    remedy = 'one source = "document, page, revision" in the table serves them all'
    return [Finding(Level.BLOCKS, f"{place}: {table}", f"no source for {', '.join(bare)}", remedy)]


def _dates(identity: Identity, operation: Operation | None, folder: Path, today: dt.date) -> list[Finding]:
    place, found = str(folder / BRIEF_FILE), []
    if identity.expires <= today:
        text = f"expired on {identity.expires}"
        found.append(Finding(Level.BLOCKS, f"{place}: document.expires", text, "review it and issue a new revision"))
    if identity.effective > today:
        found.append(Finding(Level.NOTE, f"{place}: document.effective", f"not in force before {identity.effective}"))
    if operation is not None:
        months = operation.policy.validity_months
        latest = _months_after(identity.effective, months)
        if identity.expires > latest:
            text = f"{identity.expires} is more than {months} months after {identity.effective}"
            remedy = f"{latest} at the latest ({operation.file}, policy.validity_months)"
            found.append(Finding(Level.BLOCKS, f"{place}: document.expires", text, remedy))
    if identity.revision not in {change.revision for change in identity.changes}:
        text = f"no line for revision {identity.revision}"
        found.append(Finding(Level.BLOCKS, f"{place}: changes", text, "say in [[changes]] what is new"))
    return found


def _months_after(day: dt.date, months: int) -> dt.date:
    """The same day so many months on, or the last of that month where it is shorter."""
    year, month = divmod(day.year * 12 + day.month - 1 + months, 12)
    return dt.date(year, month + 1, min(day.day, calendar.monthrange(year, month + 1)[1]))


def _people(identity: Identity, operation: Operation, folder: Path) -> list[Finding]:
    place, people = f"{folder / BRIEF_FILE}: people", operation.policy.people
    empty = [role for role in ("prepared", "checked", "approved") if not getattr(identity, role)]
    if empty:
        text = f"nobody yet for {', '.join(empty)}: a draft, not for crews"
        return [Finding(Level.BLOCKS, place, text, "the page says DRAFT until all three have signed")]
    if identity.approved == identity.prepared:
        text = f"{identity.approved} has prepared and approved"
        return [Finding(Level.BLOCKS, place, text, "the approver is never the preparer")]
    distinct = len(set(identity.people))
    if distinct < people:
        text = f"{distinct} distinct people, the policy asks for {people} ({operation.file})"
        return [Finding(Level.BLOCKS, place, text, "another person has to sign one of the roles")]
    return []


def _notebook(folder: Path) -> list[Finding]:
    path = folder / "brief.ipynb"
    if not path.is_file():
        return [Finding(Level.BLOCKS, str(path), "no notebook", "every brief has a brief.ipynb beside its brief.toml")]
    try:
        cells = json.loads(path.read_text(encoding="utf-8"))["cells"]
        stored = any(cell.get("outputs") for cell in cells)
    except (OSError, ValueError, KeyError, TypeError, AttributeError):
        return [Finding(Level.BLOCKS, str(path), "not a notebook that can be read", "save it again from JupyterLab")]
    if stored:
        remedy = "clear the outputs before you pass the file on"
        return [Finding(Level.NOTE, str(path), "outputs are stored in it; a build never reads them", remedy)]
    return []


def _sorted(found: Iterable[Finding]) -> list[Finding]:
    """Each once, what blocks first, otherwise in the order found."""
    order = list(Level)
    return sorted(dict.fromkeys(found), key=lambda finding: order.index(finding.level))
