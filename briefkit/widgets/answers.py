"""What has been computed for one condition: asked once, shared by every exhibit that shows it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from typing import TypeVar

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope import here
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.equivalent import EquivalentVne, equivalent_vne
from briefkit.envelope.solution import Solution, solve
from briefkit.errors import Refusal

T = TypeVar("T")


@dataclass(frozen=True)
class ManualVne:
    """The manual's own VNE at a condition, indicated: `ias` to 0.01, `text` floored to one unit, with unit and kind."""

    ias: float
    unit: str
    text: str


class Answers:
    """The answers at one frozen condition. A refusal is kept too, and raised again to whoever asks next."""

    def __init__(self, aircraft: Aircraft, condition: Condition) -> None:
        """Raises the condition's own refusal if it is not on the chart and inside the limits (`envelope.here`)."""
        here.refuse(aircraft, Conditions.of(condition))
        self.aircraft, self.condition = aircraft, condition

    @property
    def solution(self) -> Solution:
        """The trimmed rotor here; raises what `solve` raises."""
        return _given(self._solution)

    @property
    def equivalent(self) -> EquivalentVne:
        """The equivalent VNE here; raises what `equivalent_vne` raises."""
        return _given(self._equivalent)

    @cached_property
    def level(self) -> ManualVne:
        """The manual's VNE here, whatever the turn, for the chart knows no bank; at the rotor's own speed where
        the manual prints VNE over that, else at 100 %.
        """
        shown = self.aircraft.units
        indicated = float(here.indicated_vne(self.aircraft, Conditions.of(self.condition))[0])
        ias = round(float(units.from_si(indicated, "speed", shown.speed)), 2)
        return ManualVne(ias, shown.speed, f"{units.show_number(units.round_down(ias))} {shown.speed_label()}")

    @cached_property
    def _solution(self) -> Solution | Refusal:
        return _kept(lambda: solve(self.aircraft, self.condition))

    @cached_property
    def _equivalent(self) -> EquivalentVne | Refusal:
        return _kept(lambda: equivalent_vne(self.aircraft, self.condition))


def _kept(ask: Callable[[], T]) -> T | Refusal:
    try:
        return ask()
    except Refusal as refusal:
        return refusal


def _given(answer: T | Refusal) -> T:
    if isinstance(answer, Refusal):
        raise answer.with_traceback(None)
    return answer
