"""What has been computed for one condition: asked once, shared by every exhibit that shows it."""

from __future__ import annotations

from collections.abc import Callable
from functools import cached_property
from typing import TypeVar

from briefkit.aircraft.model import Aircraft
from briefkit.envelope import here
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.equivalent import EquivalentVne, equivalent_vne
from briefkit.envelope.solution import Solution, solve
from briefkit.errors import Refusal

T = TypeVar("T")


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

    @property
    def level(self) -> EquivalentVne:
        """The manual's VNE here: level flight, rotor at 100 %, which is the manual's own number by definition."""
        return _given(self._level)

    @cached_property
    def _solution(self) -> Solution | Refusal:
        return _kept(lambda: solve(self.aircraft, self.condition))

    @cached_property
    def _equivalent(self) -> EquivalentVne | Refusal:
        return _kept(lambda: equivalent_vne(self.aircraft, self.condition))

    @cached_property
    def _level(self) -> EquivalentVne | Refusal:
        level = self.condition.changed(load_factor=1.0, rotor_speed=1.0, climb=0.0)
        return _kept(lambda: equivalent_vne(self.aircraft, level))


def _kept(ask: Callable[[], T]) -> T | Refusal:
    try:
        return ask()
    except Refusal as refusal:
        return refusal


def _given(answer: T | Refusal) -> T:
    if isinstance(answer, Refusal):
        raise answer.with_traceback(None)
    return answer
