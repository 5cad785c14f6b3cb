"""What stands between a brief and its release, each finding with its place and remedy.

Faults, what is still "?", missing sources and spreads, documents revised since, dates, signatures, people's data,
pictures without words, and the page held against its own rules. No cell is run here; `build` does that. A draft may
have findings; a released page has none that blocks and none that still needs a reason.
"""

from __future__ import annotations

import calendar
import datetime as dt
import re
from collections.abc import Iterable
from dataclasses import replace
from pathlib import Path
from pkgutil import resolve_name
from typing import Final

from briefkit.aircraft.operation import OPERATION_FILE, Operation, load_operation
from briefkit.aircraft.operation_check import cross_check
from briefkit.brief import check_register
from briefkit.brief.check_aircraft import aircraft_findings
from briefkit.brief.check_notebook import notebook_findings, personal_data
from briefkit.brief.check_page import page_findings
from briefkit.brief.compare import Difference, Revision, turns_of
from briefkit.brief.crew_page import table_of
from briefkit.brief.finding import Finding, Level, from_fault, invented_finding, loaded, source_findings
from briefkit.brief.identity import (
    BRIEF_FILE,
    NOTEBOOK,
    Brief,
    Identity,
    disagreements,
    load_identity,
    named_aircraft,
    named_configuration,
    operator_folder,
)
from briefkit.brief.register import REGISTER_FILE, Register
from briefkit.brief.seal import seal_of
from briefkit.brief.sign import problems
from briefkit.brief.sources import sources
from briefkit.envelope.reductions import ReductionTable
from briefkit.errors import BriefkitError, Fault, FaultyFile

# What a later room finds on a brief, named as an entry point names things: no road to a page may leave it out, and
# imports go one way all the same.
_LATER: Final = ("briefkit.session.sheets:deck_findings",)

__all__ = ["Finding", "Level", "findings", "page_standing", "stands_against"]


def findings(path: Path | str, today: dt.date, *, page: bool = True) -> list[Finding]:
    """Every finding on a brief (folder or `brief.toml`), on all briefs of an operator folder, or on an aircraft file.

    `today` is the day expiry is held against. Without `page` what has to be computed for the
    crew's page is left out. Over an operator folder it also says which briefs a revised document touches, and which
    issued pages. Places are paths inside the operator folder (or inside `path`, above several): none of this machine.
    Raises `FaultyFile` only where the path leads to nothing to check.
    """
    start = Path(path).resolve()
    if start.is_file() and start.name == BRIEF_FILE:
        start = start.parent
    if start.is_file():
        if start.suffix != ".toml" or start.name in (OPERATION_FILE, REGISTER_FILE):
            raise _nothing(path)
        return _sorted(aircraft_findings(start)[1], start.parent)
    if (start / BRIEF_FILE).is_file():
        return _sorted(_brief(start, today, page)[1], start)
    folders = [file.parent for file in sorted(start.rglob(BRIEF_FILE)) if not _hidden(file.relative_to(start))]
    if not folders:
        raise _nothing(path)
    found, briefs = [], []
    for folder in folders:
        brief, more = _brief(folder, today, page)
        found += more
        briefs += [brief] if brief is not None else []
    return _sorted([*found, *_over_all(briefs, today)], start)


def stands_against(found: Iterable[Finding]) -> list[Finding]:
    """Those a released page may not have: what blocks, and what still needs a reason."""
    return [finding for finding in found if finding.level is not Level.NOTE]


def _hidden(inside: Path) -> bool:
    return any(part.startswith(".") for part in inside.parts)


def _nothing(path: Path | str) -> FaultyFile:
    permitted = f"a folder with a {BRIEF_FILE}, an operator folder, or an aircraft file"
    return FaultyFile([Fault(str(path), "path", "nothing to check", permitted, "check the path")])


def _over_all(briefs: list[Brief], today: dt.date) -> list[Finding]:
    """What a revised document touches, operator by operator."""
    found = []
    for operator in dict.fromkeys(brief.identity.operator for brief in briefs):
        register, _ = check_register.read_register(operator)
        own = [brief for brief in briefs if brief.identity.operator == operator]
        if register is not None:
            found += check_register.touched(own, register)
            found += check_register.to_recall(own, register, today)
    return found


def _brief(folder: Path, today: dt.date, page: bool) -> tuple[Brief | None, list[Finding]]:
    """A brief as loaded, None where a file of it has faults, and everything found on it."""
    identity, found = loaded(folder / BRIEF_FILE, load_identity)
    operation, aircraft = None, None
    try:
        operation, more = loaded(operator_folder(folder) / OPERATION_FILE, load_operation)
        found += more
    except FaultyFile as error:
        found += [finding for fault in error.faults if (finding := from_fault(fault)) not in found]
    found += notebook_findings(folder)
    if (named := named_aircraft(folder)) is not None:
        aircraft, more = aircraft_findings(named.absolute(), named_configuration(folder))
        found += more
    if identity is not None:
        found += _identity(identity, operation, folder, today)
        found += map(from_fault, disagreements(identity, aircraft, operation))
    if operation is not None:
        place = str(operator_folder(folder) / OPERATION_FILE)
        found += source_findings(place, operation.sources) + invented_finding(place, operation.invented)
    if operation is None or aircraft is None or identity is None:
        return None, found
    crossed = cross_check(operation, aircraft, [identity.work_area])
    found += map(from_fault, crossed)
    brief = Brief(identity, aircraft, operation)
    found += _twins(identity, folder) + _people_in_sources(brief, folder)
    for name in _LATER:
        found += resolve_name(name)(brief)
    register, more = check_register.read_register(identity.operator)
    found += more
    unread = any(one.level is Level.BLOCKS and one.place == str(folder / NOTEBOOK) for one in found)
    found += [] if unread else _signatures(brief, folder, register)
    if crossed or disagreements(identity, aircraft, operation):
        return None, found
    if register is not None:
        found += check_register.source_revisions(brief, register, today)
    return brief, found + (page_standing(brief)[2] if page else [])


def page_standing(brief: Brief) -> tuple[ReductionTable | None, tuple[Difference, ...], list[Finding]]:
    """What has to be computed for the crew's page: its table of turns, what it relaxes since the last issue, findings.

    The table is None where the operation asks for what cannot be answered; then the finding says why.
    """
    try:
        table = table_of(brief)
    except BriefkitError as error:
        place = f"{brief.identity.operator / brief.operation.file}: work_areas.{brief.identity.work_area}"
        return None, (), [Finding(Level.BLOCKS, place, str(error), "a work area or a mass the manual does not cover")]
    found = page_findings(brief, table)
    register, _ = check_register.read_register(brief.identity.operator)
    if register is None:
        return table, (), found
    differences, more = check_register.figures_relaxed(Revision(brief, turns_of(table)), register)
    return table, differences, found + more


def _identity(identity: Identity, operation: Operation | None, folder: Path, today: dt.date) -> list[Finding]:
    place = str(folder / BRIEF_FILE)
    found = _dates(identity, operation, place, today) + check_register.basis_findings(place, identity)
    found += check_register.unmarked_changes(place, identity)
    said = "\n".join((identity.title, *identity.basis, *(f"{one.text}\n{one.reason}" for one in identity.changes)))
    return found + personal_data(place, said)


def _dates(identity: Identity, operation: Operation | None, place: str, today: dt.date) -> list[Finding]:
    found = []
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


def _twins(identity: Identity, folder: Path) -> list[Finding]:
    """Another brief of the operator with this number and revision: crews could not tell their pages apart."""
    found = []
    for file in sorted(identity.operator.rglob(BRIEF_FILE)):
        if file.parent.resolve() == folder.resolve() or _hidden(file.relative_to(identity.operator)):
            continue
        try:
            other = load_identity(file.parent)
        except FaultyFile:
            continue
        if (other.number, other.revision) == (identity.number, identity.revision):
            text = f"{other.number} rev {other.revision} is also the brief in {file.parent}"
            place = f"{folder / BRIEF_FILE}: document.number"
            found.append(Finding(Level.BLOCKS, place, text, "give each its own number, or the later one a revision"))
    return found


def _people_in_sources(brief: Brief, folder: Path) -> list[Finding]:
    """Sources and the manual's own words are printed as typed."""
    said = [source.text for source in sources(brief)]
    said += [speed.text for speed in brief.aircraft.speeds] + [brief.aircraft.recovery, brief.operation.name]
    return personal_data(f"{folder}: sources", "\n".join(said))


def _signatures(brief: Brief, folder: Path, register: Register | None) -> list[Finding]:
    """Who still has to sign, and whether this revision was issued with another content."""
    try:
        seal = seal_of(brief.identity)
    except BriefkitError as error:
        return [Finding(Level.BLOCKS, str(folder), str(error), "every file of the brief's folder is signed with it")]
    place = f"{folder / BRIEF_FILE}: signatures"
    found = [Finding(Level.BLOCKS, place, text, remedy) for text, remedy in problems(brief, seal)]
    return found + ([] if register is None else check_register.issued_before(brief.identity, seal.content, register))


def _sorted(found: Iterable[Finding], start: Path) -> list[Finding]:
    """Each once, what blocks first, otherwise in the order found; paths as from the operator folder of `start`."""
    try:
        root = operator_folder(start)
    except FaultyFile:
        root = start
    here = re.compile(re.escape(str(root)) + r"([\\/]|(?![\w.-]))")

    def inside(text: str) -> str:
        return here.sub(lambda match: "" if match[1] else root.name, text)

    found = [replace(one, place=inside(one.place), text=inside(one.text), remedy=inside(one.remedy)) for one in found]
    order = list(Level)
    return sorted(dict.fromkeys(found), key=lambda finding: order.index(finding.level))
