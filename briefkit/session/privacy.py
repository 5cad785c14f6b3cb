"""What may not stand in a deck or a session log: people's data, names, and how anyone did.

Results belong in the operator's own training records, never beside what a group answered. Shapes can be found; a name
in small letters, or one that starts a sentence like any other word, cannot: a guard against habit and not a promise.
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from typing import Final

from briefkit.brief.check_notebook import personal_data
from briefkit.errors import BriefkitError

_WORD = re.compile(r"[^\W\d_]+(?:[’'-][^\W\d_]+)*")
# A sentence starts here: the capital letter of its first word says nothing by itself.
_START = re.compile(r"(?:^|[.;?!\n])[\s\"'“‘(\[-]*$")
_GOES_ON = re.compile(r"[ \u00a0]+(?:[a-z(“]|[A-Z0-9]*[A-Z]{2})")
_TITLE = re.compile(r"\b(?:mr|mrs|ms|miss|dr|capt(?:ain)?|cpt|f/?o|first officer)\b\.?[ ]+[^\W\d_]", re.IGNORECASE)
_INITIAL = re.compile(r"(?<!\w)(?:[A-Z]\.\s?)+[A-Z][^\W\d_]+")
_SPEAKS = re.compile(
    r"\b[A-Z][^\W\d_]+(?:[’']s)?\s+(?:says?|said|thinks?|thought|guess(?:es|ed)|reckons?|answer(?:s|ed)|knew|knows|"
    r"forgot|missed|wanted|wants|got|did|was|has|had)\b"
)
_RESULT = re.compile(
    r"\b(?:(?:un)?satisfactory|not assessed|further training|marks? out of|\d+ out of \d+|grade[ds]?|score[ds]?"
    r"|(?:pass|fail)(?:ed|es|s)? (?:the |this |a )?(?:check|test|case|item|question|exam\w*))\b",
    re.IGNORECASE,
)
# Words a short answer starts with, and trade words with a capital and small letters; common practice, no source.
_STARTERS: Final = frozenset({
    "A", "About", "Above", "All", "Answer", "Around", "At", "Bank", "Below", "Between", "Both", "Case",
    "Collective", "Crew", "Crews", "Decision", "Even", "Everyone", "Group", "It", "Less", "Level", "Limit",
    "Limits", "Lower", "Manual", "Max", "Maximum", "Min", "Minimum", "Minus", "More", "Most", "Nearly", "No",
    "Nobody", "None", "Not", "Nothing", "Nr", "One", "Only", "Outside", "Over", "Plan", "Reduce", "Refused",
    "Roll", "Rotor", "Roughly", "Same", "Slow", "Slower", "Some", "Speed", "Stall", "Stay", "That", "The", "They",
    "This", "Three", "Tool", "Turn", "Two", "Under", "Unknown", "Up", "VNE", "We", "Yes", "Zero",
})  # fmt: skip
_TRADE: Final = frozenset({"Hp", "Mach", "Celsius"})


class PersonalData(BriefkitError):
    """A text that may not be written: it looks like a person's name or data, or like a result."""


def refuse_personal(place: str, text: str, known: Iterable[str] = ()) -> None:
    """Raise `PersonalData` where a text looks like a name, an address, a number of a person, or a result.

    `known` are words with a capital letter that name no person: places, types and manuals of the operator's own files.
    """
    found = what_is_personal(text, known)
    if found:
        raise PersonalData(
            f"{place}: {found}. Not written: no names and no results here; say it without, in small letters"
        )


def what_is_personal(text: str, known: Iterable[str] = ()) -> str:
    """What looks personal in a text, in words; "" where nothing does."""
    shapes = personal_data("", text)
    if shapes:
        return shapes[0].text
    if result := _RESULT.search(text):
        return f"{result[0]!r} looks like a result"
    permitted = _TRADE | frozenset(known)
    for shape in (_TITLE, _INITIAL):
        if match := shape.search(text):
            return f"{match[0]!r} looks like a name"
    for match in _SPEAKS.finditer(text):
        if re.sub(r"[’']s$", "", match[0].split()[0]) not in permitted | _STARTERS:
            return f"{match[0]!r} looks like a name"
    name = next((match[0] for match in _WORD.finditer(text) if _is_name(text, match, permitted)), "")
    return f"{name!r} looks like a name" if name else ""


def capital_words(texts: Iterable[str]) -> frozenset[str]:
    """Every word with a capital letter of the texts given: the operator's own places, types and documents."""
    return frozenset(match[0] for text in texts for match in _WORD.finditer(text) if match[0][:1].isupper())


def _is_name(text: str, match: re.Match[str], permitted: frozenset[str]) -> bool:
    """A word with a capital and small letters that the operator's files do not know, unless it starts a sentence."""
    word = match[0]
    if not word[0].isupper() or word.isupper() or word in permitted:
        return False
    if not _START.search(text[: match.start()]):
        return True
    # First in its sentence: a name where no sentence follows ("Berg 70", "Berg: 70", "Anna Berg").
    return word not in _STARTERS and not _GOES_ON.match(text[match.end() :])
