"""The run of a deck without a screen: which case, which stage, what was predicted and decided; each step on the log.

The order is kept here and not in a panel: predictions are locked before the manual's figure can be shown, the manual's
figure before the computed one, and a decision ends the case.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import asdict
from enum import IntEnum
from typing import Any

from briefkit.envelope.condition import Condition
from briefkit.errors import BriefkitError
from briefkit.session.answers import Answers, Computed, Manual, answers
from briefkit.session.deck import Case, Deck
from briefkit.session.privacy import refuse_personal
from briefkit.session.record import SessionLog


class SessionError(BriefkitError):
    """A step out of order, or without what it needs."""


class Stage(IntEnum):
    """How far the present case is: each stage is reached only from the one before it."""

    PREDICT = 0
    LOCKED = 1
    MANUAL = 2
    COMPUTED = 3
    DECIDED = 4


class Session:
    """One run through a deck. `Session(deck, log)`; without a log nothing is recorded, which is for rehearsal.

    `index`, `case`, `stage`, `predictions`, `decision` and `blank` are the present state, for a panel to draw. A step
    that the log refuses has not happened: the state is changed only after it is on the disk.
    """

    def __init__(self, deck: Deck, log: SessionLog | None = None) -> None:
        self.deck, self.log = deck, log
        self.index, self.blank = 0, False
        self.stage, self.predictions, self.decision = Stage.PREDICT, (), ""  # type: Stage, tuple[str, ...], str
        self._closed = False
        self._record("opened")
        self._record("case", case=self.case.name)

    @property
    def case(self) -> Case:
        """The present case."""
        return self.deck.cases[self.index]

    def lock(self, predictions: Sequence[str]) -> None:
        """Lock the group's predictions, one text each, no names; at least one. They cannot be changed after this."""
        self._at(Stage.PREDICT, "the predictions are locked; reset the case to start it again")
        given = tuple(text.strip() for text in predictions if text.strip())
        if not given:
            raise SessionError("no prediction: the group says what it expects before anything is shown")
        for number, text in enumerate(given, start=1):
            refuse_personal(f"prediction {number}", text, self.deck.words)
        self._record("predictions", case=self.case.name, predictions=given)
        self.predictions, self.stage = given, Stage.LOCKED

    def show_manual(self) -> Manual:
        """The manual's figure with the change made; the first reveal."""
        self._at(Stage.LOCKED, "lock the predictions first" if self.stage is Stage.PREDICT else "it is shown already")
        manual = self.deck.answers(self.case).manual
        self._record("manual", case=self.case.name, inputs=inputs(self.case.condition), outputs=_manual(manual))
        self.stage = Stage.MANUAL
        return manual

    def show_computed(self) -> Computed:
        """The computed figure; the second reveal."""
        self._at(
            Stage.MANUAL, "the manual’s figure comes first" if self.stage < Stage.MANUAL else "it is shown already"
        )
        said = self.deck.answers(self.case)
        self._record("computed", case=self.case.name, inputs=inputs(self.case.condition), outputs=outputs(said))
        self.stage = Stage.COMPUTED
        return said.computed

    def decide(self, text: str) -> None:
        """What the group decides to do: a sentence, not a number alone."""
        self._at(Stage.COMPUTED, "decided already" if self.stage is Stage.DECIDED else "both figures are shown first")
        if not text.strip():
            raise SessionError("no decision: say what you would do")
        refuse_personal("decision", text, self.deck.words)
        self._record("decision", case=self.case.name, decision=text.strip())
        self.decision, self.stage = text.strip(), Stage.DECIDED

    def what_if(self, condition: Condition) -> Answers:
        """Both figures at any other condition, on the log; only once the case's own figures are out."""
        if self.stage < Stage.COMPUTED:
            raise SessionError("both figures of the case are shown before anything else is tried")
        said = answers(self.deck.aircraft, self.deck.fleet, condition)
        self._record("what-if", case=self.case.name, inputs=inputs(condition), outputs=outputs(said))
        return said

    def next(self) -> Case:
        """On to the next case, from its beginning; it may be passed over unfinished."""
        return self._go(self.index + 1, "this is the last case")

    def back(self) -> Case:
        """Back to the case before, from its beginning."""
        return self._go(self.index - 1, "this is the first case")

    def reset(self) -> None:
        """The present case from its beginning; what was recorded stays recorded."""
        self._record("reset", case=self.case.name)
        self._begin()

    def toggle_blank(self) -> bool:
        """Blank the screen, or show it again. The state is left alone."""
        self.blank = not self.blank
        return self.blank

    def close(self) -> None:
        """End the session on the log; nothing after this is recorded."""
        if not self._closed:
            self._record("closed")
            self._closed = True

    def _at(self, stage: Stage, otherwise: str) -> None:
        if self._closed:
            raise SessionError("the session is closed")
        if self.stage is not stage:
            raise SessionError(otherwise)

    def _go(self, index: int, otherwise: str) -> Case:
        if not 0 <= index < len(self.deck.cases):
            raise SessionError(otherwise)
        self._record("case", case=self.deck.cases[index].name)
        self.index = index
        self._begin()
        return self.case

    def _begin(self) -> None:
        self.stage, self.predictions, self.decision = Stage.PREDICT, (), ""

    def _record(self, kind: str, **fields: Any) -> None:
        if self._closed:
            raise SessionError("the session is closed")
        if self.log is not None:
            self.log.step(kind, **fields)


def inputs(condition: Condition) -> dict[str, float | None]:
    """A condition as the log keeps it: every field, SI."""
    return asdict(condition)


def outputs(said: Answers) -> dict[str, Any]:
    """Both figures as the log keeps them."""
    computed = said.computed
    return _manual(said.manual) | {
        "says": str(computed.says),
        "computed": computed.text,
        "reduction": computed.reduction,
        "exact": computed.exact,
        "bank_deg": computed.bank_deg,
    }


def _manual(manual: Manual) -> dict[str, Any]:
    return {"manual": manual.text, "vne": manual.vne, "unit": manual.unit, "where": manual.where}
