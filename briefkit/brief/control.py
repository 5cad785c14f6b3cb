"""Sheet 4: whose document this is, from what, until when; sources; room for signatures; the slip for the office."""

from __future__ import annotations

import datetime as dt

from briefkit.aircraft.operation import Operation
from briefkit.brief.identity import ROLES, Brief, Identity
from briefkit.brief.pages import Grid, Ink, Section, Source
from briefkit.brief.standing import Standing

_HASH_SHOWN = 12


def control(
    brief: Brief, version: str, listed: tuple[Source, ...], standing: Standing | None = None
) -> tuple[Section, ...]:
    """The sections of sheet 4; without a `standing` nobody has signed."""
    return (
        document(brief.identity, brief.operation),
        people(brief.identity, brief.operation, standing),
        changes(brief.identity, standing),
        sources(listed, brief.identity),
        made_from(brief, version, standing),
    )


def document(identity: Identity, operation: Operation) -> Section:
    """Number, dates, serials, and what stands above this page."""
    rows = (
        ("Document", f"{identity.number} rev {identity.revision}"),
        ("Title", identity.title),
        ("Operator", operation.name),
        ("Issued", day(identity.issued)),
        ("Effective", day(identity.effective)),
        ("Expires", day(identity.expires)),
        ("Serials", f"{listed(identity.serials)} only, {identity.configuration}"),
    )
    order = " > ".join(
        ("airworthiness directives and the flight manual with its supplements, markings and placards",
         *operation.documents, "this brief")
    )  # fmt: skip
    after = (
        f"Order of precedence: {order}.",
        "For briefing and training. Not a flight-manual supplement. Uncontrolled when printed: check the revision with "
        "the office.",
    )
    return Section(
        "Document control", grid=Grid(("Item", "Entry"), rows, "This document", Ink.CONTEXT, numbers=False), after=after
    )


def people(identity: Identity, operation: Operation, standing: Standing | None = None) -> Section:
    """Prepared, checked, approved, by staff code and day, with room for wet signatures beside them."""
    rows = []
    for role in ROLES:
        signature = standing.signed.get(role) if standing is not None else None
        expected = identity.expected(role)
        open_role = f"not signed ({expected} to sign)" if expected else "not signed"
        said = (signature.code, day(signature.date)) if signature is not None else (open_role, "")
        rows.append((role.capitalize(), *said, ""))
    grid = Grid(
        ("Role", "Staff code", "Date", "Signature on paper"), tuple(rows), "Who stands behind it", Ink.CONTEXT,
        numbers=False,
    )  # fmt: skip
    after = f"At least {operation.policy.people} different people. An edit of anything signed makes the page a draft."
    return Section("Signatures", grid=grid, after=(after,))


def changes(identity: Identity, standing: Standing | None = None) -> Section:
    """What changed, as typed, and each figure that asks less of a crew than the revision they have in hand."""
    points = tuple(f"rev {change.revision}: {change.text}" for change in identity.changes)
    relaxed = standing.relaxed if standing is not None else ()
    rows = tuple((one.name, one.old, one.new, reason or "no reason given") for one, reason in relaxed)
    header = ("Less conservative than before", "Was", "Is", "Reason")
    grid = Grid(header, rows, "Figures that became less conservative", Ink.CONTEXT, numbers=False) if rows else None
    return Section("Changes", grid=grid, points=points or ("None recorded.",))


def sources(listed: tuple[Source, ...], identity: Identity) -> Section:
    """The numbered list of sources, each line with its anchor; then the documents the brief rests on."""
    rows = tuple((str(source.number), source.text, source.what) for source in listed)
    anchors = tuple(source.anchor for source in listed)
    header = ("No.", "Source", "What is from it")
    grid = Grid(header, rows, "Sources", Ink.CONTEXT, numbers=False, anchors=anchors)
    return Section("Sources", grid=grid, after=(f"Basis: {'; '.join(identity.basis)}.",) if identity.basis else ())


def made_from(brief: Brief, version: str, standing: Standing | None = None) -> Section:
    """The versions and data this page was made from, so that it can be made again."""
    sealed = "" if standing is None else standing.seal.content[:_HASH_SHOWN]
    content = (("content (what a signature covers)", sealed),) if sealed else ()
    rows = (
        ("briefkit", version),
        (brief.aircraft.file, brief.aircraft.data_hash[:_HASH_SHOWN]),
        (brief.operation.file, brief.operation.data_hash[:_HASH_SHOWN]),
        (brief.identity.file, brief.identity.data_hash[:_HASH_SHOWN]),
        *content,
    )
    return Section(
        "Made from", grid=Grid(("What", "Version or SHA-256"), rows, "Made from", Ink.CONTEXT, numbers=False)
    )


def slip(identity: Identity) -> Section:
    """The acknowledgement slip: it goes to the office, not left on the handout."""
    rows = (("Date", ""), ("Staff code", ""), ("Initials", ""))
    return Section(
        "Acknowledgement slip",
        before=(
            f"{identity.number} rev {identity.revision}, {identity.title}: read and understood. "
            "Return to the office; do not leave it on the handout.",
        ),
        grid=Grid(("Entry", "By hand"), rows, "Acknowledgement", Ink.CONTEXT, numbers=False),
    )


def day(date: dt.date) -> str:
    """ "29 Feb 2032", whatever the machine's language."""
    months = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")
    return f"{date.day} {months[date.month - 1]} {date.year}"


def listed(items: tuple[str, ...]) -> str:
    """ "014 and 022" """
    return items[0] if len(items) == 1 else f"{', '.join(items[:-1])} and {items[-1]}"
