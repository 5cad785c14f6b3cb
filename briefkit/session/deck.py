"""The deck of a recurrent check (`deck.toml` in a brief's folder): cases, each a start, one change and a lesson.

A deck is held against the tool when it is read: a case whose decision rests on more than the tool permits today is a
fault, so that no old deck can teach an old number.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Annotated, Any, ClassVar, Final, Literal

from pydantic import Field

from briefkit import units
from briefkit.aircraft.make import needed
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.operation import FleetEntry, Operation, load_operation
from briefkit.aircraft.tables import Text
from briefkit.brief.identity import operator_folder
from briefkit.envelope.condition import Condition
from briefkit.errors import BriefkitError, FaultyFile, ReadingError
from briefkit.reading.document import Document, Table
from briefkit.reading.quantity import Typed, quantity, quoted
from briefkit.session.answers import Answers, Says, answers
from briefkit.session.phrases import condition_text, value_text
from briefkit.session.privacy import capital_words, what_is_personal

DECK_FILE: Final = "deck.toml"
LONGEST_TEXT: Final = 400
MOST_CASES: Final = 40


@dataclass(frozen=True)
class Case:
    """One case: where it starts, its one change, and what the instructor does with it.

    `condition` is the start with the change made; `changed` names what changes ("bank"). The texts carry the figures as
    typed. `says` is what the tool says there, held against the tool when the deck is read.
    """

    name: str
    start_text: str
    change_text: str
    start: Condition
    condition: Condition
    changed: str
    prompt: str
    teaching: str
    expected: str
    says: Says
    source: str


@dataclass(frozen=True)
class Deck:
    """A deck with the aircraft and the fleet entry it was held against; all hashes are SHA-256 of files as read.

    `words` are the words with a capital letter that name a place, a type or a document of the operator.
    """

    title: str
    source: str
    cases: tuple[Case, ...]
    aircraft: Aircraft
    fleet: FleetEntry
    file: str
    data_hash: str
    operation_hash: str
    folder: Path
    operator: Path
    aircraft_file: str
    words: frozenset[str]

    def answers(self, case: Case) -> Answers:
        """Both figures with the change made."""
        return answers(self.aircraft, self.fleet, case.condition)

    def answers_before(self, case: Case) -> Answers:
        """Both figures at the start."""
        return answers(self.aircraft, self.fleet, case.start)


class _Values(Table):
    mass: Annotated[Typed | None, quantity("mass")] = None
    pressure_altitude: Annotated[Typed | None, quantity("height")] = None
    elevation: Annotated[Typed | None, quantity("height")] = None
    qnh: Annotated[Typed | None, quantity("pressure")] = None
    oat: Annotated[Typed | None, quantity("temperature")] = None
    bank: Annotated[Typed | None, quantity("angle")] = None
    load_factor: Annotated[Typed | None, quantity("number")] = None
    rotor_speed: Annotated[Typed | None, quantity("ratio")] = None
    climb: Annotated[Typed | None, quantity("vertical speed")] = None


class _Start(_Values):
    required: ClassVar[tuple[str, ...]] = ("mass", "oat")


class _DeckTable(Table):
    required: ClassVar[tuple[str, ...]] = ("title",)
    title: Text | None = None
    source: str = ""


class _CaseTable(Table):
    required: ClassVar[tuple[str, ...]] = ("name", "start", "change", "prompt", "teaching", "expected", "says")
    name: Text | None = None
    start: dict[str, Any] | None = None
    change: dict[str, Any] | None = None
    prompt: Annotated[Text, Field(max_length=LONGEST_TEXT)] | None = None
    teaching: Annotated[Text, Field(max_length=LONGEST_TEXT)] | None = None
    expected: Annotated[Text, Field(max_length=LONGEST_TEXT)] | None = None
    says: Literal["reduction", "covered bank", "manual VNE", "no turn", "refused"] | None = None
    least_reduction: Annotated[Typed | None, quantity("speed", 0.0, 100.0)] = None
    most_bank: Annotated[Typed | None, quantity("angle", 0.0, math.radians(80.0))] = None
    source: str = ""


def load_deck(path: Path | str, aircraft: Aircraft) -> Deck:
    """The deck of a `deck.toml`, or of the folder that holds it, for one aircraft in its configuration.

    The operation is that of the operator folder the deck lies in. Raises `FaultyFile` with every fault: also where
    what the tool says today is not what a case expects, where no case is one that the tool refuses, and where none is
    one that stall does not decide.
    """
    path = Path(path)
    path = path / DECK_FILE if path.is_dir() else path
    document = Document(path)
    operator = operator_folder(path.parent)
    operation = load_operation(operator)
    fleet = operation.entry_for(aircraft)
    document.tables("", ("deck", "case"))
    head = document.table("deck", _DeckTable) or _DeckTable()
    entries = document.entries("case", _CaseTable)
    if fleet is None:
        read = f"a deck for {aircraft.file}, {aircraft.configuration}"
        document.fault("deck", read, f"an aircraft with a fleet entry in {operation.file}")
        raise FaultyFile(document.faults)
    if len(entries) > MOST_CASES:
        document.fault("case", f"{len(entries)} cases", f"at most {MOST_CASES}")
    cases = [_case(document, name, entry) for name, entry in entries[:MOST_CASES]]
    for (name, entry), case in zip(entries, cases, strict=False):
        if case is not None:
            _hold(document, name, entry, case, answers(aircraft, fleet, case.condition))
    _check_names(document, entries)
    _check_kinds(document, entries)
    document.raise_faults()
    whole = tuple(needed(case) for case in cases)
    title = needed(head.title)
    return Deck(
        title=title,
        source=head.source,
        cases=whole,
        aircraft=aircraft,
        fleet=fleet,
        file=path.name,
        data_hash=document.data_hash,
        operation_hash=operation.data_hash,
        folder=path.parent,
        operator=operator,
        aircraft_file=_inside(operator, aircraft),
        words=_known_words(title, whole, aircraft, operation),
    )


def _case(document: Document, name: str, entry: _CaseTable) -> Case | None:
    """A case from its entry; None, with its faults recorded, where it cannot be made."""
    before = len(document.faults)
    start = document.part(f"{name}.start", entry.start, _Start) if entry.start is not None else None
    change = document.part(f"{name}.change", entry.change, _Values) if entry.change is not None else None
    for key in ("name", "prompt", "teaching", "expected", "source"):
        if found := what_is_personal_in_deck(getattr(entry, key) or ""):
            document.fault(f"{name}.{key}", found, "no person's data, and no results, in a deck")
    if start is None or change is None:
        return None
    typed, changes = _texts(start), _texts(change)
    if change == _Values() or len(changes) != 1:
        read = f"{len(changes)} changes" if changes else "no change"
        if not document.has_fault_below(f"{name}.change"):
            document.fault(f"{name}.change", read, "one change: one variable at a time", "put the others in start")
        return None
    if document.has_fault_below(f"{name}.start") or document.has_fault_below(f"{name}.change"):
        return None
    changed = next(iter(changes))
    at_start = _condition(document, f"{name}.start", typed)
    if at_start is None:
        return None
    made = _condition(document, f"{name}.change", _with(typed, changes))
    texts = (entry.name, entry.prompt, entry.teaching, entry.expected, entry.says)
    if made is None or len(document.faults) > before or None in texts:
        return None
    if made == at_start:
        document.fault(f"{name}.change.{changed}", changes[changed], "another value than at the start")
        return None
    return Case(
        name=needed(entry.name),
        start_text=condition_text(typed),
        change_text=value_text(changed, changes[changed]),
        start=at_start,
        condition=made,
        changed=changed,
        prompt=needed(entry.prompt),
        teaching=needed(entry.teaching),
        expected=needed(entry.expected),
        says=Says(needed(entry.says)),
        source=entry.source,
    )


def what_is_personal_in_deck(text: str) -> str:
    """Shapes of people's data and results; a deck's own words may have capital letters."""
    return what_is_personal(text, capital_words([text]))


def _texts(values: _Values) -> dict[str, str]:
    return {key: typed.text for key in type(values).model_fields if (typed := getattr(values, key)) is not None}


def _with(start: Mapping[str, str], change: Mapping[str, str]) -> dict[str, str]:
    """The start with its change; a bank takes the place of a load factor, a pressure altitude that of an elevation."""
    gone = {"bank": ("load_factor",), "load_factor": ("bank",), "pressure_altitude": ("elevation", "qnh")}
    left_out = {name for key in change for name in gone.get(key, ())}
    return {key: text for key, text in start.items() if key not in left_out} | dict(change)


def _condition(document: Document, place: str, typed: Mapping[str, str]) -> Condition | None:
    try:
        return Condition(**typed)
    except ReadingError as error:
        document.fault(place, error.read, error.permitted, error.remedy)
    except BriefkitError as error:
        document.fault(place, str(error), "a condition a helicopter can have")
    return None


def _hold(document: Document, name: str, entry: _CaseTable, case: Case, today: Answers) -> None:
    """What a case expects against what the tool says: another kind of answer, or a looser number, is a fault."""
    computed, unit = today.computed, today.manual.unit
    if computed.says is not case.says:
        remedy = "the case, or the aircraft file, is not what it was: look at both"
        document.fault(f"{name}.says", quoted(str(case.says)), f'"{computed.says}": {computed.text}', remedy)
        return
    if (case.says in (Says.REDUCTION, Says.COVERED_BANK)) != (entry.least_reduction is not None):
        remedy = "it says what the expected decision rests on"
        needs = f'given where says is "{Says.REDUCTION}" or "{Says.COVERED_BANK}", and only there'
        document.fault(f"{name}.least_reduction", "given" if entry.least_reduction else "nothing", needs, remedy)
    elif entry.least_reduction is not None and computed.reduction is not None:
        typed = units.from_si(needed(entry.least_reduction.value), "speed", unit)
        if round(typed, 2) < round(computed.reduction, 2):
            permitted = f"{units.show_number(computed.reduction)} {unit} or more, as the tool says today"
            document.fault(f"{name}.least_reduction", quoted(entry.least_reduction.text), permitted)
    if (case.says is Says.COVERED_BANK) != (entry.most_bank is not None):
        needs = f'given where says is "{Says.COVERED_BANK}", and only there'
        document.fault(f"{name}.most_bank", "given" if entry.most_bank else "nothing", needs)
    elif entry.most_bank is not None and computed.bank_deg is not None:
        permitted = f"{computed.bank_deg} deg or less, as the tool says today"
        if math.degrees(needed(entry.most_bank.value)) > computed.bank_deg + 1e-6:
            document.fault(f"{name}.most_bank", quoted(entry.most_bank.text), permitted)


def _check_names(document: Document, entries: list[tuple[str, _CaseTable]]) -> None:
    seen: set[str] = set()
    for name, entry in entries:
        if entry.name and entry.name in seen:
            document.fault(f"{name}.name", quoted(entry.name), "each name once: the log names cases by it")
        seen.add(entry.name or "")


def _check_kinds(document: Document, entries: list[tuple[str, _CaseTable]]) -> None:
    """Judgement is trained by the cases where the tool has no number to give."""
    listed = {entry.says for _, entry in entries}
    wanted = ((Says.REFUSED, "that the tool must refuse"), (Says.MANUAL_VNE, "where stall is not what decides"))
    for says, what in wanted:
        if says not in listed and not any(document.has_fault_below(f"{name}.says") for name, _ in entries):
            document.fault("case", f'no case that says "{says}"', f"at least one case {what}", "add one")


def _inside(operator: Path, aircraft: Aircraft) -> str:
    """The aircraft's file as a path inside the operator folder; by name alone where it lies in `aircraft/`."""
    return f"aircraft/{aircraft.file}" if (operator / "aircraft" / aircraft.file).is_file() else aircraft.file


def _known_words(title: str, cases: tuple[Case, ...], aircraft: Aircraft, operation: Operation) -> frozenset[str]:
    texts = [title, aircraft.name, aircraft.configuration, operation.name, *operation.documents]
    texts += [area.name for area in operation.work_areas.values()]
    texts += [text for case in cases for text in (case.name, case.prompt, case.teaching, case.expected, case.source)]
    return capital_words(texts)
