"""The printed side of a deck: the instructor's sheet, and the deck as a static page for when the projector fails.

The static page keeps each answer in a `<details>`, the manual's figure before the computed one; printed, it is the
questions alone. The instructor's sheet has everything open and room for a pen. Neither has a place for a name.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

from briefkit.brief.finding import Finding, from_fault
from briefkit.brief.harden import harden
from briefkit.brief.identity import Brief
from briefkit.brief.pages import CrewPage, render_plain
from briefkit.errors import FaultyFile
from briefkit.session.answers import Answers
from briefkit.session.deck import DECK_FILE, Case, Deck, load_deck

DECK_PAGE: Final = "deck"
INSTRUCTOR_SHEET: Final = "instructor"


@dataclass(frozen=True)
class CaseOnPaper:
    """A case with what is shown of it, before and after its change."""

    number: int
    case: Case
    before: Answers
    after: Answers


def on_paper(deck: Deck) -> tuple[CaseOnPaper, ...]:
    """Every case with its answers, numbered from 1."""
    return tuple(
        CaseOnPaper(number, case, deck.answers_before(case), deck.answers(case))
        for number, case in enumerate(deck.cases, start=1)
    )


def deck_pages(brief: Brief, page: CrewPage) -> tuple[tuple[str, str], ...]:
    """What a build writes beside a brief's page where its folder has a deck: (name, finished page); nothing without.

    Raises `FaultyFile` with every fault of the deck, also where it no longer agrees with the tool.
    """
    if not (brief.identity.folder / DECK_FILE).is_file():
        return ()
    deck = load_deck(brief.identity.folder, brief.aircraft)
    cases = on_paper(deck)
    return tuple(
        (name, harden(render_plain(f"{name}.html.j2", page=page, deck=deck, cases=cases)))
        for name in (DECK_PAGE, INSTRUCTOR_SHEET)
    )


def deck_findings(brief: Brief) -> list[Finding]:
    """Every fault of a brief's deck, if it has one; each blocks, for a build refuses it."""
    if not (brief.identity.folder / DECK_FILE).is_file():
        return []
    try:
        load_deck(brief.identity.folder, brief.aircraft)
    except FaultyFile as error:
        return [from_fault(fault) for fault in error.faults]
    return []
