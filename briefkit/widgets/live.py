"""The live condition: the one thing that changes. It holds the present `Condition` and tells its exhibits at once."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from html import escape
from typing import Any

import ipywidgets as w
import numpy as np

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope.condition import Condition
from briefkit.errors import ReadingError
from briefkit.widgets import closing, words
from briefkit.widgets.answers import Answers
from briefkit.widgets.controls import Control, asked, ranges
from briefkit.widgets.exhibit import STYLE, Exhibit, guarded
from briefkit.widgets.height import ByQnh


class LiveCondition(w.VBox):  # type: ignore[misc]  # ipywidgets carries no types
    """A panel of the six numbers of a condition, each on a slider and in a box, in the units of the type's manual.

    `LiveCondition(aircraft, condition)`; the condition needs an airspeed. Exhibits made with it follow: each change is
    one solve, shared, and every exhibit is redrawn before the call returns. An entry the manual does not permit is
    refused in words and the present condition stays; nothing is clamped. Raises the refusal of the first condition.
    """

    def __init__(self, aircraft: Aircraft, condition: Condition) -> None:
        self._answers = _checked(aircraft, condition)
        self._followers: list[Exhibit] = []
        self._busy = False
        ends = ranges(aircraft)
        self._controls = [Control(aircraft, dial, *ends[dial.field]) for dial in words.dials(aircraft)]
        self._heading, self._word = w.HTML(), w.HTML()
        style = w.HTML(STYLE, layout={"display": "none"})
        height = ByQnh(aircraft, self._by_qnh, self._refuse_height)
        self._height = height
        super().__init__([style, self._heading, *self._controls[:2], height, *self._controls[2:], self._word])
        self.add_class("briefkit")
        for control in self._controls:
            control.slider.observe(self._callback(self._slide, control), "value")
            control.box.observe(self._callback(self._type, control), "value")
        self._show()
        closing.remember(self)

    # --- the source exhibits follow ---

    @property
    def answers(self) -> Answers:
        """What is computed for the present condition."""
        return self._answers

    def follow(self, exhibit: Exhibit) -> None:
        """Redraw `exhibit` at every change from now on."""
        self._followers.append(exhibit)

    def leave(self, exhibit: Exhibit) -> None:
        """Stop redrawing `exhibit`."""
        self._followers = [other for other in self._followers if other is not exhibit]

    # --- the present condition ---

    @property
    def aircraft(self) -> Aircraft:
        """The type in its configuration."""
        return self._answers.aircraft

    @property
    def condition(self) -> Condition:
        """The present condition; assigning one applies it, or raises its refusal and changes nothing."""
        return self._answers.condition

    @condition.setter
    def condition(self, condition: Condition) -> None:
        self._apply(_checked(self.aircraft, condition))

    def change(self, **text: str) -> None:
        """Change some values, typed as for `Condition`: `live.change(bank="20 deg")`. Raises as `Condition` does."""
        self.condition = self.condition.with_(**text)

    @property
    def word(self) -> str:
        """What the panel says at present: a refusal or a remark in words, or nothing."""
        return self._said

    def still_inputs(self) -> tuple[tuple[str, str], ...]:
        """The panel on paper: the condition's numbers."""
        return ((self.aircraft.name, self.aircraft.configuration), *words.inputs(self.aircraft, self.condition))

    def close(self) -> None:
        """Close every model of the panel; exhibits that followed say that they are no longer live."""
        if self.comm is None:  # never opened, or closed before: there is nothing to give back
            return
        for exhibit in list(self._followers):
            exhibit.mark_old("The live condition it followed was closed; run its cell again.")
        self._followers = []
        closing.forget(self)
        closing.close_tree(self)

    # --- controls ---

    def _callback(self, act: Callable[[Control, Any], None], control: Control) -> Callable[..., None]:
        def changed(change: Any) -> None:
            if not self._busy:
                act(control, change["new"])

        return guarded(partial(self._refuse, control), changed)

    def _slide(self, control: Control, number: float) -> None:
        moved = control.slid(number, words.number_of(control.dial, self.condition))
        if moved is not None:
            self._ask(control, moved)

    def _type(self, control: Control, text: str) -> None:
        self._ask(control, control.read(text))

    def _ask(self, control: Control, number: float) -> None:
        self._apply(_checked(self.aircraft, asked(self.condition, control.dial, number)))

    def _by_qnh(self, elevation: str, qnh: str) -> None:
        self.change(elevation=elevation, qnh=qnh)

    def _apply(self, answers: Answers) -> None:
        self._answers = answers
        self._show()
        for exhibit in list(self._followers):
            exhibit.refresh()

    def _refuse(self, control: Control, why: str) -> None:
        """Say why, and set the controls back to what is used."""
        typed = control.box.value.strip()
        number = words.number_of(control.dial, self.condition)
        shown = words.text_of(control.dial, number, self.aircraft)
        entered = "" if typed == shown.replace("\u00a0", " ") else f" Entered: {typed}."
        self._show(f"Refused: {why}.{entered} {control.dial.name} stays at {shown}.")

    def _refuse_height(self, why: str) -> None:
        self._show(f"Refused: {why}. The height stays as it is.")

    def _show(self, refusal: str = "") -> None:
        """Set every control to the present condition, and the words under them."""
        self._busy = True
        try:
            for control in self._controls:
                control.show(words.number_of(control.dial, self.condition))
            self._height.clear()
        finally:
            self._busy = False
        sentence = words.sentence(self.aircraft, self.condition)
        aircraft = f"{self.aircraft.name}, {self.aircraft.configuration}"
        self._heading.value = f"<h4>{escape(aircraft)}</h4><p>{escape(sentence)}</p>"
        self._said = refusal or self._remark()
        self._word.value = f"<p class='word'>{escape(self._said)}</p>" if self._said else ""

    def _remark(self) -> str:
        """A speed above VNE may be looked at, but not without a word."""
        level, ias = self._answers.level, self.condition.ias
        shown = 0.0 if ias is None else float(units.from_si(ias, "speed", level.unit))
        if shown <= level.ias + 0.005:
            return ""
        return f"This airspeed is above the manual's VNE here, {level.text}."


def _checked(aircraft: Aircraft, condition: Condition) -> Answers:
    """Answers for a condition that may be shown: on the chart, inside the limits, with a speed that has a meaning."""
    if condition.ias is None:
        raise ReadingError("no airspeed", "a condition with ias", 'add ias="65 kt"')
    answers = Answers(aircraft, condition)
    if bool(np.isnan(aircraft.calibration.to_calibrated(condition.ias))):
        raise aircraft.calibration.refuse(condition.ias, aircraft.units.speed)
    return answers
