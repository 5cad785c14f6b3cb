"""Issuing: a signed, unblocked brief becomes a page, a line of the register, and an archive to make both again from.

`verify` answers for a page somebody holds: as registered, altered, superseded, expired, withdrawn, not registered.
"""

from __future__ import annotations

import datetime as dt
import hashlib
import io
import json
import re
import tempfile
import zipfile
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from enum import StrEnum
from pathlib import Path
from typing import Any, Final

from briefkit.aircraft.operation import OPERATION_FILE
from briefkit.aircraft.section_table import section_file
from briefkit.brief.compare import Revision, revision_of, turns_of
from briefkit.brief.identity import BRIEF_FILE, NOTEBOOK, Brief, load_brief, operator_folder
from briefkit.brief.index import relist
from briefkit.brief.register import REGISTER_FILE, Issued, Register, add_issued, citations, load_register
from briefkit.brief.seal import covered, seal_of
from briefkit.brief.sources import sources
from briefkit.brief.write import write_page
from briefkit.envelope.reductions import ReductionTable
from briefkit.errors import BriefkitError, FaultyFile

ARCHIVE: Final = "issued"
_INSIDE: Final = "brief"
_EPOCH: Final = (1980, 1, 1, 0, 0, 0)  # the archive carries no clock
_LARGEST: Final = 50_000_000
_TITLE = re.compile(r"<title>\s*([A-Z0-9][A-Z0-9-]{1,30}) rev (\d{1,4}):")


def issue(
    folder: Path | str,
    out: Path,
    day: dt.date,
    make: Callable[[Brief, dt.date], tuple[str, str, ReductionTable]],
) -> tuple[Issued, Path]:
    """Build, archive and register one brief; the entry, and the page written.

    `make` gives the page, its mark ("" where it is released) and its table of turns for a brief on a day. Raises
    `BriefkitError` where the brief is not released, this revision or a later one was issued already, or a file cannot
    be written. The register comes after the page: a page that is not in it counts as not issued. Last, an index that
    stands in `out` is told.
    """
    brief = load_brief(folder)
    identity = brief.identity
    register = load_register(identity.operator)
    for one in register.of(identity.number):
        if one.revision >= identity.revision:
            remedy = "a changed page is a new revision: raise document.revision and sign again"
            raise BriefkitError(f"{one.number} rev {one.revision} was issued on {one.registered}; {remedy}")
    seal = seal_of(identity)
    page, mark, table = make(brief, day)
    if mark:
        raise BriefkitError(f"{folder}: the page says {mark!r}; briefkit check lists what stands against release")
    entry = _entry(brief, register, page, table, day)
    archive = archived(brief, page)
    if seal_of(identity) != seal:
        raise BriefkitError(f"{folder}: a file of the brief changed while it was being issued; look, then issue again")
    write_page(identity.operator / ARCHIVE / archive_name(entry), archive)
    target = out / f"{identity.number}.html"
    write_page(target, page)
    add_issued(register.path, entry)
    try:
        relist(out, identity.folder, target, page)
    except BriefkitError as error:
        raise BriefkitError(f"{entry.number} rev {entry.revision} is issued and registered, but {error}") from None
    return entry, target


def archive_name(entry: Issued) -> str:
    """ "NB-2T-001-rev-0.zip" """
    return f"{entry.number}-rev-{entry.revision}.zip"


def _entry(brief: Brief, register: Register, page: str, table: ReductionTable, day: dt.date) -> Issued:
    identity = brief.identity
    found = (*(source.text for source in sources(brief)), *identity.basis)
    cited = citations(register, Path(identity.aircraft).stem, tuple(("", text) for text in found))
    rests_on = {f"{one.document.name} rev {one.revision}" for one in cited if one.revision}
    return Issued(
        number=identity.number,
        revision=identity.revision,
        title=identity.title,
        brief=identity.folder.resolve().relative_to(identity.operator).as_posix(),
        page=digest(page.encode("utf-8")),
        content=seal_of(identity).content,
        registered=day,
        effective=identity.effective,
        expires=identity.expires,
        rests_on=tuple(sorted(rests_on)),
        turns=turns_of(table),
    )


def digest(content: bytes) -> str:
    """The SHA-256 of a page's file."""
    return hashlib.sha256(content).hexdigest()


def archived(brief: Brief, page: str) -> bytes:
    """The page and every file it was made from as a ZIP, without stored outputs; the same bytes for the same files."""
    identity = brief.identity
    files = {
        f"{identity.number}.html": page.encode("utf-8"),
        OPERATION_FILE: (identity.operator / OPERATION_FILE).read_bytes(),
        identity.aircraft: identity.aircraft_path.read_bytes(),
        f"{_INSIDE}/{BRIEF_FILE}": (identity.folder / identity.file).read_bytes(),
        f"{_INSIDE}/{NOTEBOOK}": _without_outputs(identity.notebook),
    }
    if (section := section_file(identity.aircraft_path)) is not None:
        files[section.relative_to(identity.operator).as_posix()] = section.read_bytes()
    for path in covered(identity):
        files[f"{_INSIDE}/{path.relative_to(identity.folder).as_posix()}"] = path.read_bytes()
    made = io.BytesIO()
    with zipfile.ZipFile(made, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, content in files.items():
            archive.writestr(zipfile.ZipInfo(name, _EPOCH), content, zipfile.ZIP_DEFLATED)
    return made.getvalue()


def _without_outputs(notebook: Path) -> bytes:
    data: dict[str, Any] = json.loads(notebook.read_text(encoding="utf-8"))
    for cell in data["cells"]:
        if cell["cell_type"] == "code":
            cell["outputs"], cell["execution_count"] = [], None
        cell["metadata"] = {}
    data["metadata"] = {}
    return json.dumps(data, indent=1, ensure_ascii=False).encode("utf-8")


@contextmanager
def opened(path: Path) -> Iterator[Revision]:
    """One revision to compare: a brief's folder, or the archive of an issued one with the table of turns it printed.

    Raises `BriefkitError` for an archive that is not one of ours or not as registered, `FaultyFile` for its files.
    """
    if path.suffix != ".zip":
        yield revision_of(path)
        return
    with tempfile.TemporaryDirectory(prefix="briefkit-") as private:
        folder = Path(private)
        try:
            with zipfile.ZipFile(path) as archive:
                if sum(one.file_size for one in archive.infolist()) > _LARGEST:
                    raise BriefkitError(f"{path}: larger than {_LARGEST:,} bytes when opened")
                archive.extractall(folder)
        except (OSError, zipfile.BadZipFile, RuntimeError, NotImplementedError, EOFError) as error:
            raise BriefkitError(f"{path}: not an archive that can be read ({error})") from None
        yield revision_of(folder / _INSIDE, _printed_turns(path, folder))


def _printed_turns(path: Path, folder: Path) -> Any:
    """The rows the issued page printed, from the register the archive lies beside; None where it has no entry."""
    brief = load_brief(folder / _INSIDE)
    for entry in load_register(path.parent.parent).of(brief.identity.number):
        if entry.revision == brief.identity.revision:
            page = folder / f"{entry.number}.html"
            if not page.is_file() or digest(page.read_bytes()) != entry.page:
                raise BriefkitError(f"{path}: the page in it is not the one that was registered")
            return entry.turns
    return None


class State(StrEnum):
    """What a page is, held against the register."""

    AS_REGISTERED = "as registered"
    NOT_YET = "not yet in force"
    SUPERSEDED = "superseded"
    EXPIRED = "expired"
    WITHDRAWN = "withdrawn"
    ALTERED = "altered"
    NOT_REGISTERED = "not in this register"


@dataclass(frozen=True)
class Verdict:
    """The answer for one page: what it is, and why in a sentence. Only `AS_REGISTERED` may be used."""

    state: State
    text: str

    def __str__(self) -> str:
        return f"{self.state}: {self.text}"


def verify(page: Path, register: Register, day: dt.date) -> Verdict:
    """What a page is on a day. Raises `BriefkitError` where it cannot be read."""
    try:
        content = page.read_bytes()
    except OSError as error:
        raise BriefkitError(f"{page}: cannot be read ({(error.strerror or 'unknown').lower()})") from None
    found = digest(content)
    for entry in register.issued:
        if entry.page == found:
            return _standing(entry, register, day)
    said = _TITLE.search(content[:20_000].decode("utf-8", errors="replace"))
    if said is not None:
        for entry in register.of(said[1]):
            if entry.revision == int(said[2]):
                text = f"{page.name} says it is {_named(entry)}, but it is not the page that was registered"
                return Verdict(State.ALTERED, f"{text}; do not use it")
    name = f"{said[1]} rev {int(said[2])}" if said else page.name
    return Verdict(State.NOT_REGISTERED, f"{name}; a draft, another operator's page, or one that was changed")


def _standing(entry: Issued, register: Register, day: dt.date) -> Verdict:
    name = _named(entry)
    later = [one for one in register.of(entry.number) if one.revision > entry.revision]
    ruling = [one for one in later if one.effective <= day]
    if entry.withdrawn is not None and entry.withdrawn <= day:
        return Verdict(State.WITHDRAWN, f"{name} was withdrawn on {entry.withdrawn}")
    if ruling:
        text = f"{name} was replaced by rev {ruling[-1].revision}, effective {ruling[-1].effective}"
        return Verdict(State.SUPERSEDED, text)
    if entry.expires <= day:
        return Verdict(State.EXPIRED, f"{name} expired on {entry.expires}")
    if entry.effective > day:
        return Verdict(State.NOT_YET, f"{name} becomes effective on {entry.effective}")
    coming = f"; rev {later[0].revision} replaces it on {later[0].effective}" if later else ""
    return Verdict(State.AS_REGISTERED, f"{name}, effective {entry.effective}, expires {entry.expires}{coming}")


def _named(entry: Issued) -> str:
    return f"{entry.number} rev {entry.revision}, {entry.title}"


def find_register(page: Path, given: Path | None) -> Register:
    """The register given (a file, or the operator's folder), or the one of the operator folder above a page or here.

    Raises `BriefkitError` where there is none: a page nobody can look up is not a page to trust.
    """
    places = [given] if given is not None else [page.parent, Path.cwd()]
    for place in places:
        path = place
        if place.is_dir():
            try:
                path = operator_folder(place) / REGISTER_FILE
            except FaultyFile:
                path = place / REGISTER_FILE
        if path.is_file():
            return load_register(path)
    raise BriefkitError(f"no {REGISTER_FILE} above {page.parent} or here; name it with --register")
