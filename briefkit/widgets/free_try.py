"""Between cases: any other condition, on sliders and in boxes, answered and logged, and back to the case again."""

from __future__ import annotations

from collections.abc import Callable
from html import escape
from typing import Any, Final

import ipywidgets as w

from briefkit.aircraft.model import Aircraft
from briefkit.envelope.condition import Condition
from briefkit.session.answers import Answers
from briefkit.widgets import words
from briefkit.widgets.controls import Control, asked, ranges
from briefkit.widgets.exhibit import guarded
from briefkit.widgets.height import ByQnh

_FREE: Final = ("mass", "pressure_altitude", "oat", "load_factor", "rotor_speed")


class FreeTry(w.VBox):  # type: ignore[misc]  # ipywidgets carries no types
    """Five numbers to move freely. `ask` gives the answers to a condition, and logs it; what it raises is said.

    A slider asks when it is let go (with the keyboard: at each press), so that the log holds tries and not the way to
    them. A condition off the chart or past a limit is an answer, in words; text that is no number is refused.
    """

    def __init__(self, aircraft: Aircraft, condition: Condition, ask: Callable[[Condition], Answers]) -> None:
        self._aircraft, self._case, self._condition, self._ask = aircraft, condition, condition, ask
        self.answers: Answers | None = None
        self._busy = False
        ends = ranges(aircraft)
        self.controls = [
            Control(aircraft, dial, *ends[dial.field]) for dial in words.dials(aircraft) if dial.field in _FREE
        ]
        for control in self.controls:
            control.slider.continuous_update = False
            control.slider.observe(guarded(self._refuse, self._heard(control, self._slide)), "value")
            control.box.observe(guarded(self._refuse, self._heard(control, self._type)), "value")
        self.by_qnh = ByQnh(aircraft, self._by_qnh, self._refuse)
        self.again = w.Button(description="Back to the case’s numbers", layout={"align_self": "flex-start"})
        self.again.on_click(guarded(self._refuse, lambda _: self.begin(self._case)))
        self.said = w.HTML()
        self._word = w.HTML()
        first, *rest = self.controls
        super().__init__([first, rest[0], self.by_qnh, *rest[1:], self.again, self._word])
        self.add_class("free-try")
        self._show()

    @property
    def condition(self) -> Condition:
        """What the controls stand at."""
        return self._condition

    def begin(self, case: Condition) -> None:
        """Set everything to a case's condition; nothing has been tried."""
        self._case = self._condition = case
        self.answers = None
        self._show()

    def rows(self) -> list[tuple[str, str]]:
        """What was tried last, for paper; nothing where nothing was."""
        if self.answers is None:
            return []
        computed = self.answers.computed
        return [
            ("Tried", words.sentence(self._aircraft, self._condition)),
            ("The manual", f"{self.answers.manual.text} ({self.answers.manual.where})"),
            ("Computed", " ".join(part for part in (computed.text, computed.how) if part)),
        ]

    # --- what a hand asks ---

    def _heard(self, control: Control, act: Callable[[Control, Any], None]) -> Callable[[Any], None]:
        def changed(change: Any) -> None:
            if not self._busy:
                act(control, change["new"])

        return changed

    def _slide(self, control: Control, number: float) -> None:
        moved = control.slid(number, words.number_of(control.dial, self._condition))
        if moved is not None:
            self._try(asked(self._condition, control.dial, moved))

    def _type(self, control: Control, text: str) -> None:
        self._try(asked(self._condition, control.dial, control.read(text)))

    def _by_qnh(self, elevation: str, qnh: str) -> None:
        self._try(self._condition.with_(elevation=elevation, qnh=qnh))

    def _try(self, condition: Condition) -> None:
        self.answers = self._ask(condition)
        self._condition = condition
        self._show()

    def _refuse(self, why: str) -> None:
        self._show(f"Refused: {why}. The numbers stay as they were.")

    def _show(self, refusal: str = "") -> None:
        self._busy = True
        try:
            for control in self.controls:
                control.show(words.number_of(control.dial, self._condition))
            self.by_qnh.clear()
        finally:
            self._busy = False
        self._word.value = f"<p class='word'>{escape(refusal)}</p>" if refusal else ""
        self.said.value = "" if self.answers is None else _figures(self._aircraft, self._condition, self.answers)


def _figures(aircraft: Aircraft, condition: Condition, said: Answers) -> str:
    """One try: what was asked, the manual's figure in black, the computed one under it in the one blue."""
    of_the_manual = "".join(f"<p class='small'>{escape(line)}</p>" for line in (said.manual.where, *said.manual.also))
    how = f"<p class='small'>{escape(said.computed.how)}</p>" if said.computed.how else ""
    return (
        f"<h3>Tried</h3><p>{escape(words.sentence(aircraft, condition))}</p>"
        f"<p>The manual: <b>{escape(said.manual.text)}</b></p>{of_the_manual}"
        f"<p class='computed'>Computed: <b>{escape(said.computed.text)}</b></p>{how}"
    )
