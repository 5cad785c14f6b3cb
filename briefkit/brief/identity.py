"""What a brief is: its number, revision, dates, aircraft, work area and people, from `brief.toml` in its folder.

People are staff codes, never names. `[people]` says who is expected to sign; only a `[[signatures]]` entry written by
`sign`, with the hash of what was signed, is a signature. Nothing is read outside the operator folder, the nearest
folder upwards that holds `operation.toml`.
"""

from __future__ import annotations

import datetime as dt
import re
from dataclasses import dataclass
from pathlib import Path, PurePosixPath
from typing import Annotated, ClassVar, Final, Literal

from pydantic import Field

from briefkit.aircraft.load import load_configurations
from briefkit.aircraft.make import needed
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.operation import OPERATION_FILE, Operation, load_operation
from briefkit.aircraft.operation_check import cross_check
from briefkit.aircraft.tables import Text
from briefkit.errors import BriefkitError, Fault, FaultyFile
from briefkit.reading.document import Document, Table
from briefkit.reading.quantity import did_you_mean, quoted

BRIEF_FILE: Final = "brief.toml"
NOTEBOOK: Final = "brief.ipynb"
# A staff code has a digit in it and no small letters: "NRC-17" is one, a name is not.
_STAFF_CODE = re.compile(r"(?=[A-Z0-9-]*[0-9])[A-Z0-9]{1,8}(?:-[A-Z0-9]{1,8}){0,2}")
_NUMBER = re.compile(r"[A-Z0-9][A-Z0-9-]{1,30}")
_CONTENT = re.compile(r"[0-9a-f]{64}")
ROLES: Final = ("prepared", "checked", "approved")


@dataclass(frozen=True)
class Change:
    """One line of the list of changes.

    `figures` names figures that became less conservative and `reason` says why; `sections` names what it marks on the
    page.
    """

    revision: int
    text: str
    figures: tuple[str, ...] = ()
    reason: str = ""
    sections: tuple[str, ...] = ()


@dataclass(frozen=True)
class Signature:
    """One signature: role, staff code, day, SHA-256 of what was signed, and its parts ("operation.toml 1f2e...")."""

    role: str
    code: str
    date: dt.date
    content: str
    signed: tuple[str, ...] = ()


@dataclass(frozen=True)
class Identity:
    """A brief as its `brief.toml` states it; `folder` holds the notebook.

    `prepared`, `checked` and `approved` are the staff codes expected to sign, "" where anyone may. `signatures` are
    as written, whether or not what was signed has changed since (see `seal`). `aircraft` is the path of the aircraft
    file inside the operator folder `operator`.
    """

    number: str
    title: str
    revision: int
    issued: dt.date
    effective: dt.date
    expires: dt.date
    aircraft: str
    work_area: str
    serials: tuple[str, ...]
    configuration: str
    prepared: str
    checked: str
    approved: str
    changes: tuple[Change, ...]
    basis: tuple[str, ...]
    signatures: tuple[Signature, ...]
    folder: Path
    operator: Path
    file: str = BRIEF_FILE
    data_hash: str = ""
    unanswered: tuple[str, ...] = ()

    @property
    def aircraft_path(self) -> Path:
        return self.operator / self.aircraft

    @property
    def notebook(self) -> Path:
        return self.folder / NOTEBOOK

    def expected(self, role: str) -> str:
        """The staff code expected to sign a role, "" where anyone may."""
        return {"prepared": self.prepared, "checked": self.checked, "approved": self.approved}[role]


class _DocumentTable(Table):
    required: ClassVar[tuple[str, ...]] = ("number", "title", "revision", "issued", "effective", "expires")
    number: Text | None = None
    title: Text | None = None
    revision: Annotated[int, Field(ge=0)] | None = None
    issued: dt.date | None = None
    effective: dt.date | None = None
    expires: dt.date | None = None
    basis: list[Text] | None = None


class _SubjectTable(Table):
    required: ClassVar[tuple[str, ...]] = ("aircraft", "work_area", "serials", "configuration")
    aircraft: Text | None = None
    work_area: Text | None = None
    serials: Annotated[list[Text], Field(min_length=1)] | None = None
    configuration: Text | None = None


class _PeopleTable(Table):
    prepared: str = ""
    checked: str = ""
    approved: str = ""


class _ChangeEntry(Table):
    required: ClassVar[tuple[str, ...]] = ("revision", "text")
    revision: Annotated[int, Field(ge=0)] | None = None
    text: Text | None = None
    figures: list[Text] | None = None
    reason: Text | None = None
    sections: list[Text] | None = None


class _SignatureEntry(Table):
    required: ClassVar[tuple[str, ...]] = ("role", "code", "date", "content", "signed")
    role: Literal["prepared", "checked", "approved"] | None = None
    code: Text | None = None
    date: dt.date | None = None
    content: Text | None = None
    signed: list[Text] | None = None


def operator_folder(path: Path | str) -> Path:
    """The nearest folder, from `path` upwards, that holds `operation.toml`; raises `FaultyFile` where none does."""
    start = Path(path).resolve()
    for folder in (start, *start.parents):
        if (folder / OPERATION_FILE).is_file():
            return folder
    remedy = "keep the brief in a folder below the one that holds operation.toml"
    raise FaultyFile([Fault(str(path), "folder", "no operation.toml here or above", OPERATION_FILE, remedy)])


def load_identity(path: Path | str) -> Identity:
    """The identity of a brief, from its folder or its `brief.toml`.

    Raises `FaultyFile` with every fault: file, line, key, what was read, what is permitted, what to write instead.
    """
    path = Path(path)
    file = path / BRIEF_FILE if path.is_dir() else path
    document = Document(file)
    operator = None
    try:
        operator = operator_folder(file.parent)
    except FaultyFile as error:
        document.faults += error.faults
    document.tables("", ("document", "subject"), ("people", "changes", "signatures"))
    head = document.table("document", _DocumentTable)
    subject = document.table("subject", _SubjectTable)
    people = document.table("people", _PeopleTable) or _PeopleTable()
    changes = document.entries("changes", _ChangeEntry)
    signatures = document.entries("signatures", _SignatureEntry)
    if head:
        _check_head(document, head)
    if subject and operator:
        _check_subject(document, subject, operator)
    for role in ROLES:
        _check_code(document, f"people.{role}", getattr(people, role))
    _check_changes(document, changes)
    _check_signatures(document, signatures)
    document.raise_faults()
    head, subject = needed(head), needed(subject)
    return Identity(
        number=needed(head.number),
        title=needed(head.title),
        revision=needed(head.revision),
        issued=needed(head.issued),
        effective=needed(head.effective),
        expires=needed(head.expires),
        aircraft=needed(subject.aircraft),
        work_area=needed(subject.work_area),
        serials=tuple(needed(subject.serials)),
        configuration=needed(subject.configuration),
        prepared=people.prepared,
        checked=people.checked,
        approved=people.approved,
        changes=tuple(_change(entry) for _, entry in changes),
        basis=tuple(head.basis or ()),
        signatures=tuple(_signature(entry) for _, entry in signatures),
        folder=file.parent,
        operator=needed(operator),
        file=file.name,
        data_hash=document.data_hash,
        unanswered=document.unanswered(),
    )


@dataclass(frozen=True)
class Brief:
    """A brief's three files, each loaded and held against the others."""

    identity: Identity
    aircraft: Aircraft
    operation: Operation


def load_brief(path: Path | str) -> Brief:
    """The brief in a folder: identity, aircraft and operation.

    Raises `FaultyFile` with the faults of all three, `BriefkitError` for a folder that is no brief's.
    """
    _is_a_briefs(Path(path))
    faults: list[Fault] = []
    identity, aircraft, operation = None, None, None
    try:
        identity = load_identity(path)
    except FaultyFile as error:
        faults += error.faults
    named = named_aircraft(path)
    if named is not None:
        try:
            known = load_configurations(named)
            basic = next(iter(known.values()))
            aircraft = known.get(named_configuration(path) or basic.configuration, basic)
        except FaultyFile as error:
            faults += error.faults
    try:
        folder = Path(path) if Path(path).is_dir() else Path(path).parent
        operation = load_operation(shown_path(operator_folder(folder) / OPERATION_FILE))
    except FaultyFile as error:
        faults += [fault for fault in error.faults if fault not in faults]
    if identity is not None:
        faults += disagreements(identity, aircraft, operation)
    if operation is not None and aircraft is not None and identity is not None:
        faults += cross_check(operation, aircraft, [identity.work_area])
    if faults:
        raise FaultyFile(faults)
    return Brief(needed(identity), needed(aircraft), needed(operation))


def _is_a_briefs(folder: Path) -> None:
    """Raise `BriefkitError` for a folder without a `brief.toml`, with the briefs below it: one of them was meant."""
    if not folder.is_dir() or (folder / BRIEF_FILE).exists():
        return
    inside = sorted(file.parent.relative_to(folder) for file in folder.glob(f"*/**/{BRIEF_FILE}"))
    below = [one.as_posix() for one in inside if not any(part.startswith(".") for part in one.parts)]
    said = f"here; briefs below: {', '.join(below)}" if below else "here, nor in a folder below"
    raise BriefkitError(f"{folder}: no {BRIEF_FILE} {said}")


def named_configuration(path: Path | str) -> str | None:
    """The configuration a brief names, even where the rest of its `brief.toml` is faulty; None where it names none."""
    return _named(path, "configuration")


def _named(path: Path | str, key: str) -> str | None:
    path = Path(path)
    try:
        subject = Document(path / BRIEF_FILE if path.is_dir() else path).data.get("subject")
    except FaultyFile:
        return None
    name = subject.get(key) if isinstance(subject, dict) else None
    return name if isinstance(name, str) else None


def named_aircraft(path: Path | str) -> Path | None:
    """The aircraft file a brief names, even where the rest of its `brief.toml` is faulty; None where it names none."""
    path = Path(path)
    file = path / BRIEF_FILE if path.is_dir() else path
    name = _named(path, "aircraft")
    try:
        target = (operator_folder(file.parent) / name).resolve() if name is not None else None
        inside = target is not None and target.is_relative_to(operator_folder(file.parent))
        return shown_path(target) if target is not None and inside and target.is_file() else None
    except (FaultyFile, OSError, RuntimeError, ValueError):  # RuntimeError: links in a circle
        return None


def disagreements(identity: Identity, aircraft: Aircraft | None, operation: Operation | None) -> list[Fault]:
    """What brief.toml says of the aircraft and the operation that they do not say."""
    faults, file = [], str(identity.folder / identity.file)
    if operation is not None and identity.work_area not in operation.work_areas:
        known = operation.work_areas
        permitted = f"{', '.join(known)} ({operation.file})"
        remedy = did_you_mean(identity.work_area, known)
        faults.append(Fault(file, "subject.work_area", quoted(identity.work_area), permitted, remedy))
    if aircraft is not None:
        for number, serial in enumerate(identity.serials, start=1):
            if serial not in aircraft.serials:
                permitted = f"{', '.join(aircraft.serials) or 'none'} ({aircraft.file})"
                why = dict(aircraft.refused_serials).get(serial, "")
                faults.append(Fault(file, f"subject.serials, value {number}", quoted(serial), permitted, why))
        if identity.configuration != aircraft.configuration:
            permitted = f"{', '.join(quoted(name) for name in aircraft.configurations)} ({aircraft.file})"
            read = quoted(identity.configuration)
            remedy = "another configuration may have another VNE: its own [[configuration]] in the aircraft file"
            faults.append(Fault(file, "subject.configuration", read, permitted, remedy))
    return faults


def _check_head(document: Document, head: _DocumentTable) -> None:
    if head.number and not _NUMBER.fullmatch(head.number):
        permitted = 'capitals, digits and hyphens, like "NB-2T-001": it names the file'
        document.fault("document.number", quoted(head.number), permitted)
    if head.issued and head.effective and head.effective < head.issued:
        document.fault("document.effective", str(head.effective), f"the day of issue, {head.issued}, or later")
    if head.effective and head.expires and head.expires <= head.effective:
        document.fault("document.expires", str(head.expires), f"after {head.effective}, when it becomes effective")


def _check_subject(document: Document, subject: _SubjectTable, operator: Path) -> None:
    if subject.aircraft is None:
        return
    key, inside = "subject.aircraft", PurePosixPath(subject.aircraft)
    permitted = 'a path inside the operator folder, like "aircraft/pelquill-2t.toml"'
    try:
        target = (operator / inside).resolve()
    except (OSError, RuntimeError, ValueError):
        target = operator
    if inside.is_absolute() or "\\" in subject.aircraft or not target.is_relative_to(operator):
        led = not inside.is_absolute() and ".." not in inside.parts and "\\" not in subject.aircraft
        remedy = (
            "a link leads out of it: keep the file itself there" if led else "from the folder of operation.toml, with /"
        )
        document.fault(key, quoted(subject.aircraft), permitted, remedy)
    elif not target.is_file():
        known = [str(other.relative_to(operator).as_posix()) for other in sorted(operator.glob("aircraft/*.toml"))]
        remedy = did_you_mean(subject.aircraft, known, f"there is {', '.join(known)}" if known else "")
        document.fault(key, f"{quoted(subject.aircraft)}, no such file", permitted, remedy)


def staff_code(code: str) -> bool:
    """Whether a text is a staff code: capitals and digits with at least one digit, so that no name is one."""
    return bool(_STAFF_CODE.fullmatch(code))


def _check_code(document: Document, key: str, code: str) -> None:
    if code and not staff_code(code):
        permitted = 'a staff code with a digit in it, like "NRC-17", or "" where anyone may sign'
        document.fault(key, quoted(code), permitted, "a code, not a name: people are not named on a brief")


def _check_changes(document: Document, entries: list[tuple[str, _ChangeEntry]]) -> None:
    for name, entry in entries:
        if entry.figures and not entry.reason and not document.has_fault_below(f"{name}.reason"):
            document.fault(f"{name}.reason", "nothing", "why these figures may be less conservative", "add it")


def _check_signatures(document: Document, entries: list[tuple[str, _SignatureEntry]]) -> None:
    seen: set[str] = set()
    for name, entry in entries:
        _check_code(document, f"{name}.code", entry.code or "")
        if entry.content and not _CONTENT.fullmatch(entry.content):
            remedy = "take the entry out and sign again: briefkit sign writes it"
            document.fault(f"{name}.content", quoted(entry.content), "64 hexadecimal digits", remedy)
        if entry.role and entry.role in seen:
            document.fault(f"{name}.role", quoted(entry.role), "each role once", "take one of the two entries out")
        seen.add(entry.role or "")


def _change(entry: _ChangeEntry) -> Change:
    figures, sections = tuple(entry.figures or ()), tuple(entry.sections or ())
    return Change(needed(entry.revision), needed(entry.text), figures, entry.reason or "", sections)


def _signature(entry: _SignatureEntry) -> Signature:
    role, code, content = needed(entry.role), needed(entry.code), needed(entry.content)
    return Signature(role, code, needed(entry.date), content, tuple(entry.signed or ()))


def shown_path(path: Path) -> Path:
    """The path as a person would type it here, where it is below the present folder."""
    try:
        return path.relative_to(Path.cwd())
    except ValueError:
        return path
