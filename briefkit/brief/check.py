"""What stands between a brief and its release: faults, what is still "?", missing sources and spreads, dates, people.

Nothing is computed or run here; `build` does that. A draft may have findings, a released page may not block on any.
"""

from __future__ import annotations

import calendar
import datetime as dt
import json
from collections.abc import Iterable
from pathlib import Path

from briefkit.aircraft.operation import OPERATION_FILE, Operation, load_operation
from briefkit.aircraft.operation_check import cross_check
from briefkit.brief.check_aircraft import aircraft_findings
from briefkit.brief.finding import Finding, Level, from_fault, invented_finding, loaded, source_findings
from briefkit.brief.identity import (
    BRIEF_FILE,
    Identity,
    disagreements,
    load_identity,
    named_aircraft,
    named_configuration,
    operator_folder,
    shown_path,
)
from briefkit.errors import Fault, FaultyFile

__all__ = ["Finding", "Level", "findings"]


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
        return _sorted(aircraft_findings(path)[1])
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
    identity, found = loaded(folder / BRIEF_FILE, load_identity)
    operation, aircraft = None, None
    try:
        operation, more = loaded(shown_path(operator_folder(folder) / OPERATION_FILE), load_operation)
        found += more
    except FaultyFile as error:
        found += [finding for fault in error.faults if (finding := from_fault(fault)) not in found]
    found += _notebook(folder)
    if (named := named_aircraft(folder)) is not None:
        aircraft, more = aircraft_findings(named, named_configuration(folder))
        found += more
    if identity is not None:
        found += _dates(identity, operation, folder, today)
        found += map(from_fault, disagreements(identity, aircraft, operation))
        if operation is not None:
            found += _people(identity, operation, folder)
    if operation is not None:
        place = str(shown_path(operator_folder(folder) / OPERATION_FILE))
        found += source_findings(place, operation.sources) + invented_finding(place, operation.invented)
    if operation is not None and aircraft is not None and identity is not None:
        found += map(from_fault, cross_check(operation, aircraft, [identity.work_area]))
    return _sorted(found)


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
