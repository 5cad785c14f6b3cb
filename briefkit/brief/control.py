"""Sheet 4: whose document this is, from what, until when; sources; room for signatures; the slip for the office."""

from __future__ import annotations

import datetime as dt

from briefkit.aircraft.operation import Operation
from briefkit.brief.identity import Brief, Identity
from briefkit.brief.pages import Grid, Ink, Section
from briefkit.envelope import cues

_HASH_SHOWN = 12


def control(brief: Brief, version: str) -> tuple[Section, ...]:
    """The sections of sheet 4."""
    return (
        document(brief.identity, brief.operation),
        people(brief.identity, brief.operation),
        changes(brief.identity),
        sources(brief),
        made_from(brief, version),
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


def people(identity: Identity, operation: Operation) -> Section:
    """Prepared, checked, approved, by staff code, with room for wet signatures."""
    rows = tuple(
        (role, code or "not signed", "", "")
        for role, code in (
            ("Prepared", identity.prepared),
            ("Checked", identity.checked),
            ("Approved", identity.approved),
        )
    )
    grid = Grid(("Role", "Staff code", "Signature", "Date"), rows, "Who stands behind it", Ink.CONTEXT, numbers=False)
    return Section("Signatures", grid=grid, after=(f"At least {operation.policy.people} different people.",))


def changes(identity: Identity) -> Section:
    """What changed, newest first as typed."""
    points = tuple(f"rev {change.revision}: {change.text}" for change in identity.changes)
    return Section("Changes", points=points or ("None recorded.",))


def sources(brief: Brief) -> Section:
    """Every document a number on these pages is from."""
    where: dict[str, list[str]] = {}
    for key, source in (*brief.aircraft.sources, *brief.operation.sources):
        if source:
            where.setdefault(source, []).append(key)
    rows = tuple((source, ", ".join(keys)) for source, keys in where.items())
    rows += ((cues.HANDBOOK, "recognition, recovery, cautions (chapters 2 and 11)"),)
    points = tuple(brief.identity.basis)
    grid = Grid(("Source", "What is from it"), rows, "Sources", Ink.CONTEXT, numbers=False)
    return Section("Sources", grid=grid, points=points)


def made_from(brief: Brief, version: str) -> Section:
    """The versions and data this page was made from, so that it can be made again."""
    rows = (
        ("briefkit", version),
        (brief.aircraft.file, brief.aircraft.data_hash[:_HASH_SHOWN]),
        (brief.operation.file, brief.operation.data_hash[:_HASH_SHOWN]),
        (brief.identity.file, brief.identity.data_hash[:_HASH_SHOWN]),
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
