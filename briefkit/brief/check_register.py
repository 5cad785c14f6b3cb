"""A brief held against the office's register: documents revised since, and figures relaxed since the last issue."""

from __future__ import annotations

import datetime as dt
import re
from collections.abc import Iterable
from pathlib import Path
from typing import Final

from briefkit.brief.compare import Difference, Revision, explained, relaxed
from briefkit.brief.finding import Finding, Level, from_fault
from briefkit.brief.identity import BRIEF_FILE, Brief, Identity
from briefkit.brief.issue import ARCHIVE, archive_name, opened
from briefkit.brief.register import Citation, Register, citations, load_register, older, stale
from briefkit.brief.sources import sources
from briefkit.errors import BriefkitError, FaultyFile

_DATED: Final = re.compile(r"\b(?:rev|revision|issue|edition|amendment|work order|dated)\b\.?\s*\S*\d", re.IGNORECASE)


def read_register(operator: Path) -> tuple[Register | None, list[Finding]]:
    """The operator's register, and its faults as findings."""
    try:
        return load_register(operator), []
    except FaultyFile as error:
        return None, [from_fault(fault) for fault in error.faults]


def basis_findings(place: str, identity: Identity) -> list[Finding]:
    """The documents a brief rests on have to be named, each with its revision."""
    if not identity.basis:
        remedy = 'basis = ["Flight manual rev 4", ...]: an inspector asks for them'
        return [Finding(Level.BLOCKS, f"{place}: document.basis", "no document this brief rests on", remedy)]
    return [
        Finding(Level.BLOCKS, f"{place}: document.basis, value {number}", f"{text!r} names no revision", "add it")
        for number, text in enumerate(identity.basis, start=1)
        if text.strip() != "?" and not _DATED.search(text)
    ]


def unmarked_changes(place: str, identity: Identity) -> list[Finding]:
    """A revision whose list of changes names no section shows a crew no bar beside what is new."""
    lines = [change for change in identity.changes if change.revision == identity.revision]
    if identity.revision == 0 or not lines or any(change.sections for change in lines):
        return []
    text = f"no section named for revision {identity.revision}: no bar stands in the margin"
    return [Finding(Level.NOTE, f"{place}: changes", text, 'add sections = ["2", ...]')]


def source_revisions(brief: Brief, register: Register, today: dt.date) -> list[Finding]:
    """Sources that are not from the current revision of a registered document, and documents due for review."""
    if not register.documents:
        text = "no document is registered, so no source is held against its current revision"
        return [Finding(Level.NOTE, str(register.path), text, "list them under [[documents]]")]
    found = []
    for cited in cited_by(brief, register):
        if stale(cited):
            found.append(Finding(Level.BLOCKS, cited.place, *_stale_words(cited, register)))
    for document in register.documents:
        due = document.review is not None and document.review <= today
        if due and any(cited.document == document for cited in cited_by(brief, register)):
            text = f"{document.name} was due for review on {document.review}"
            found.append(Finding(Level.BLOCKS, str(register.path), text, "the office reviews it and moves the date"))
    return found


def _stale_words(cited: Citation, register: Register) -> tuple[str, str]:
    current = f"{cited.document.name} rev {cited.document.revision.removeprefix('rev ')}"
    place = f"({register.path.name})"
    if not cited.revision:
        return f"{cited.source!r} does not say which revision; current is {current} {place}", "add it after looking"
    if older(cited):
        return f"from rev {cited.revision}; current is {current} {place}", "read the new revision, then type it again"
    return f"from rev {cited.revision}; registered is {current} {place}", "have the office register the new revision"


def cited_by(brief: Brief, register: Register) -> list[Citation]:
    """What a brief cites: every source its numbers are from, and its own list of basis documents."""
    identity = brief.identity
    found = [(f"{identity.folder}: {source.what}", source.text) for source in sources(brief)]
    found += [(f"{identity.folder / identity.file}: document.basis", text) for text in identity.basis]
    return citations(register, Path(identity.aircraft).stem, tuple(found))


def issued_before(identity: Identity, content: str, register: Register) -> list[Finding]:
    """A revision crews have in hand is never made again with another content, nor after a later one."""
    found, place = [], f"{identity.folder / identity.file}: document.revision"
    for entry in register.of(identity.number):
        name = f"rev {entry.revision} was issued on {entry.registered}"
        if entry.revision > identity.revision:
            found.append(Finding(Level.BLOCKS, place, f"{name}, this is rev {identity.revision}", "raise the revision"))
        elif entry.revision == identity.revision and entry.content != content:
            remedy = "a changed page is a new revision: raise it, say in [[changes]] what is new, sign"
            found.append(Finding(Level.BLOCKS, place, f"{name} with another content", remedy))
    return found


def previous(identity: Identity, register: Register) -> Path | None:
    """The archive of the revision crews have in hand; None where this is the first."""
    before = register.before(identity.number, identity.revision)
    return None if before is None else identity.operator / ARCHIVE / archive_name(before)


def figures_relaxed(present: Revision, register: Register) -> tuple[tuple[Difference, ...], list[Finding]]:
    """Figures less conservative than those of the last issued revision, and a finding for each without a reason."""
    identity = present.brief.identity
    archive = previous(identity, register)
    if archive is None:
        return (), []
    try:
        with opened(archive) as old:
            found = tuple(relaxed(old, present))
    except BriefkitError as error:
        remedy = "put the archive briefkit issue wrote back: without it nobody sees what was relaxed"
        return (), [Finding(Level.BLOCKS, str(archive), f"the last issued revision cannot be read: {error}", remedy)]
    place = f"{identity.folder / BRIEF_FILE}: changes"
    return found, [
        Finding(Level.REASON, place, str(one), f'if it is meant: figures = ["{one.name}"] and reason = "..." there')
        for one in found
        if not explained(present.brief, one)
    ]


def touched(briefs: Iterable[Brief], register: Register) -> list[Finding]:
    """For each registered document that was revised: the briefs that still rest on an older revision."""
    briefs, found = list(briefs), []
    for document in register.documents:
        stale_in = [
            str(brief.identity.folder)
            for brief in briefs
            if any(cited.document == document and stale(cited) for cited in cited_by(brief, register))
        ]
        if stale_in:
            whose = f" ({document.aircraft})" if document.aircraft else ""
            text = f"{document.name}{whose}, now rev {document.revision}, touches {', '.join(sorted(set(stale_in)))}"
            found.append(Finding(Level.NOTE, str(register.path), text, "each needs a new revision"))
    return found


def to_recall(briefs: Iterable[Brief], register: Register, today: dt.date) -> list[Finding]:
    """Issued pages in force that rest on a document revised since: crews hold them."""
    stems = {brief.identity.number: Path(brief.identity.aircraft).stem for brief in briefs}
    found = []
    for number in dict.fromkeys(entry.number for entry in register.issued):
        entry = register.of(number)[-1]
        if entry.withdrawn is not None or entry.expires <= today:
            continue
        rests_on = tuple(("", text) for text in entry.rests_on)
        old = sorted({one.source for one in citations(register, stems.get(number, ""), rests_on) if stale(one)})
        if old:
            text = f"{number} rev {entry.revision} is with the crews and rests on {', '.join(old)}, revised since"
            found.append(Finding(Level.NOTE, str(register.path), text, "recall it, or withdraw it: withdrawn = a date"))
    return found
