"""The office's register, `register.toml` in the operator folder: which documents are current, which pages were issued.

A plain file. The office types `[[documents]]`; `issue` adds `[[issued]]` entries and changes no earlier one, so that
what replaces what follows from the list: the highest revision of a number that is in force is the current one.
"""

from __future__ import annotations

import datetime as dt
import json
import re
import tomllib
from dataclasses import dataclass
from itertools import pairwise
from pathlib import Path
from typing import Annotated, ClassVar, Final

from pydantic import Field

from briefkit.aircraft.make import needed
from briefkit.aircraft.tables import Text
from briefkit.brief.write import write_page
from briefkit.errors import BriefkitError
from briefkit.reading.document import Document, Table
from briefkit.reading.quantity import quoted

REGISTER_FILE: Final = "register.toml"
_DIGEST = re.compile(r"[0-9a-f]{64}")
_REVISION = re.compile(r"\brev(?:ision)?\.?\s+([A-Za-z0-9]+(?:\.[0-9]+)?)", re.IGNORECASE)


@dataclass(frozen=True)
class Controlled:
    """A document briefs rest on: its name as sources cite it, its current revision, the aircraft file it belongs to.

    `aircraft` is the stem of the file, "" for a document of the whole company. `review` is the day it is due again.
    """

    name: str
    revision: str
    aircraft: str = ""
    review: dt.date | None = None


@dataclass(frozen=True)
class Turn:
    """One row of an issued page's table of turns: mass as printed, steepest bank [deg], knots (its unit) below VNE."""

    mass: str
    bank: float
    reduction: float


@dataclass(frozen=True)
class Issued:
    """An issued page: what it is, the SHA-256 of its file, its dates, and what it rests on ("flight manual rev 4")."""

    number: str
    revision: int
    title: str
    brief: str
    page: str
    content: str
    registered: dt.date
    effective: dt.date
    expires: dt.date
    rests_on: tuple[str, ...] = ()
    turns: tuple[Turn, ...] = ()
    withdrawn: dt.date | None = None


@dataclass(frozen=True)
class Register:
    """The register as read; empty where the operator keeps none yet."""

    path: Path
    documents: tuple[Controlled, ...] = ()
    issued: tuple[Issued, ...] = ()

    def of(self, number: str) -> list[Issued]:
        """The issued revisions of a document number, lowest first."""
        return sorted((one for one in self.issued if one.number == number), key=lambda one: one.revision)

    def before(self, number: str, revision: int) -> Issued | None:
        """The revision a crew has in hand when this one comes."""
        earlier = [one for one in self.of(number) if one.revision < revision]
        return earlier[-1] if earlier else None


class _DocumentEntry(Table):
    required: ClassVar[tuple[str, ...]] = ("name", "revision")
    name: Text | None = None
    revision: Text | None = None
    aircraft: Text | None = None
    review: dt.date | None = None


class _IssuedEntry(Table):
    required: ClassVar[tuple[str, ...]] = (
        "number", "revision", "title", "brief", "page", "content", "registered", "effective", "expires",
    )  # fmt: skip
    number: Text | None = None
    revision: Annotated[int, Field(ge=0)] | None = None
    title: Text | None = None
    brief: Text | None = None
    page: Text | None = None
    content: Text | None = None
    registered: dt.date | None = None
    effective: dt.date | None = None
    expires: dt.date | None = None
    rests_on: list[Text] | None = None
    turns: list[Text] | None = None
    withdrawn: dt.date | None = None


def load_register(path: Path | str) -> Register:
    """The register of an operator folder, or in a file; empty where there is none. Raises `FaultyFile` with faults."""
    path = Path(path)
    path = path / REGISTER_FILE if path.is_dir() else path
    if not path.exists():
        return Register(path)
    document = Document(path)
    document.tables("", (), ("documents", "issued", "invented"))
    documents = document.entries("documents", _DocumentEntry)
    issued = document.entries("issued", _IssuedEntry)
    turns: dict[str, tuple[Turn, ...]] = {}
    seen: set[tuple[str | None, int | None]] = set()
    for name, entry in issued:
        for key in ("page", "content"):
            digest = getattr(entry, key)
            if digest and not _DIGEST.fullmatch(digest):
                document.fault(f"{name}.{key}", quoted(digest), "64 hexadecimal digits, as briefkit issue wrote them")
        if (entry.number, entry.revision) in seen:
            read = f"{entry.number} rev {entry.revision}"
            document.fault(f"{name}.revision", read, "each revision once", "take one of the two entries out")
        seen.add((entry.number, entry.revision))
        turns[name] = _read_turns(document, name, entry.turns or [])
    document.raise_faults()
    return Register(
        path,
        tuple(
            Controlled(needed(entry.name), needed(entry.revision), entry.aircraft or "", entry.review)
            for _, entry in documents
        ),
        tuple(_issued(entry, turns[name]) for name, entry in issued),
    )


def _issued(entry: _IssuedEntry, turns: tuple[Turn, ...]) -> Issued:
    return Issued(
        number=needed(entry.number),
        revision=needed(entry.revision),
        title=needed(entry.title),
        brief=needed(entry.brief),
        page=needed(entry.page),
        content=needed(entry.content),
        registered=needed(entry.registered),
        effective=needed(entry.effective),
        expires=needed(entry.expires),
        rests_on=tuple(entry.rests_on or ()),
        turns=turns,
        withdrawn=entry.withdrawn,
    )


_TURN = re.compile(r"(.+): at most (\d+(?:\.\d+)?) deg, VNE less (\d+(?:\.\d+)?)")


def turn_text(turn: Turn) -> str:
    """ "1,800 lb: at most 30 deg, VNE less 10" """
    return f"{turn.mass}: at most {turn.bank:g} deg, VNE less {turn.reduction:g}"


def _read_turns(document: Document, name: str, lines: list[str]) -> tuple[Turn, ...]:
    found = []
    for number, line in enumerate(lines, start=1):
        match = _TURN.fullmatch(line)
        if match is None:
            document.fault(f"{name}.turns, value {number}", quoted(line), '"1,800 lb: at most 30 deg, VNE less 10"')
        else:
            found.append(Turn(match[1], float(match[2]), float(match[3])))
    return tuple(found)


def add_issued(path: Path, entry: Issued) -> None:
    """One entry at the end of the register; everything in it stays as it is, byte for byte.

    Raises `BriefkitError` where the file could not be read back with just this entry more.
    """
    text = path.read_bytes().decode("utf-8") if path.exists() else ""
    ends = "\r\n" if "\r\n" in text else "\n"
    joined = text.rstrip("\r\n") + (2 * ends if text.strip() else "") + ends.join([*_block(entry), ""])
    try:
        for one in (text, joined):
            tomllib.loads(one.removeprefix("\ufeff"))
    except ValueError:
        raise BriefkitError(f"{path}: an entry cannot be added at its end; look at what stands there") from None
    write_page(path, joined)


def _block(entry: Issued) -> list[str]:
    def text(value: str) -> str:
        return json.dumps(value, ensure_ascii=False)

    def listed(key: str, values: tuple[str, ...]) -> list[str]:
        return [f"{key} = [", *(f"  {text(value)}," for value in values), "]"] if values else []

    return [
        "[[issued]]",
        f"number = {text(entry.number)}",
        f"revision = {entry.revision}",
        f"title = {text(entry.title)}",
        f"brief = {text(entry.brief)}",
        f"registered = {entry.registered.isoformat()}",
        f"effective = {entry.effective.isoformat()}",
        f"expires = {entry.expires.isoformat()}",
        f"page = {text(entry.page)}",
        f"content = {text(entry.content)}",
        *listed("rests_on", entry.rests_on),
        *listed("turns", tuple(turn_text(turn) for turn in entry.turns)),
    ]


@dataclass(frozen=True)
class Citation:
    """A document a source cites, the revision it cites ("" where it names none), and the source's place and text."""

    document: Controlled
    revision: str
    place: str
    source: str


def citations(register: Register, aircraft: str, sources: tuple[tuple[str, str], ...]) -> list[Citation]:
    """Which controlled documents the sources (place, text) cite; `aircraft` is the stem of the aircraft file.

    A document belongs to a source that has its name in it, whatever the capitals; of two names the longer one counts.
    Its revision is the first "rev N" after the name, before a semicolon or the next document.
    """
    known = [one for one in register.documents if one.aircraft in ("", aircraft)]
    known.sort(key=lambda one: (-len(one.name), not one.aircraft))
    found = []
    for place, source in sources:
        named: dict[int, tuple[int, Controlled]] = {}
        for document in known:
            for match in re.finditer(rf"(?<!\w){re.escape(document.name)}(?!\w)", source, re.IGNORECASE):
                if all(match.end() <= start or match.start() >= end for start, (end, _) in named.items()):
                    named[match.start()] = match.end(), document
        starts = [*sorted(named), len(source)]
        for start, following in pairwise(starts):
            end, document = named[start]
            cited = _REVISION.search(source[end:following].partition(";")[0])
            found.append(Citation(document, cited[1] if cited else "", place, source))
    return found


def stale(citation: Citation) -> bool:
    """Whether a source cites another revision than the current one, or none."""
    return citation.revision.casefold() != _number(citation.document.revision)


def _number(revision: str) -> str:
    """ "rev 4" and "4" are one."""
    return re.sub(r"(?i)^rev(?:ision)?\.?\s+", "", revision.strip()).casefold()


def older(citation: Citation) -> bool:
    """Whether the source is older rather than newer; where the revisions are no numbers it counts as older."""
    cited, current = citation.revision, _number(citation.document.revision)
    return not (cited.isdecimal() and current.isdecimal() and int(cited) > int(current))
