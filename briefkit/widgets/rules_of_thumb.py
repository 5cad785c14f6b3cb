"""Rules of thumb at one condition: what a step costs, and how far the rule holds."""

from __future__ import annotations

import math
from typing import Final

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope.condition import Condition
from briefkit.envelope.sensitivities import RuleOfThumb, rules_of_thumb
from briefkit.errors import ReadingError
from briefkit.figures.still import StillParts, Table
from briefkit.widgets import words
from briefkit.widgets.answers import Answers
from briefkit.widgets.table_exhibit import TableExhibit

_STEP: Final = {"ft": 100.0, "m": 50.0, "lb": 10.0, "kg": 5.0, "°C": 1.0, "%": 0.5}


class RulesOfThumb(TableExhibit):
    """Slopes of the equivalent VNE round a condition, each with the range over which it holds within 1 kt.

    `RulesOfThumb(aircraft, condition)` is fixed, `RulesOfThumb(live)` follows. No airspeed is needed. Costs are rounded
    up and gains down, to 0.1 of the type's unit; ranges are rounded inwards.
    """

    def __init__(self, source: object, condition: Condition | None = None) -> None:
        super().__init__(source, condition)

    def _draw(self, answers: Answers) -> StillParts:
        aircraft, condition = answers.aircraft, answers.condition
        answer = answers.equivalent
        rules = rules_of_thumb(aircraft, condition)
        if not rules:
            raise ReadingError("a condition round which nothing can be varied", "one inside the manual's chart")
        table = Table(
            ("Change", "The answer", "Holds"),
            tuple((f"{rule.quantity} {rule.step}", _change(aircraft, rule), _range(rule)) for rule in rules),
            "From this condition, one at a time",
        )
        self._show(table)
        costs = "; ".join(f"{row[0]}: {row[1]}" for row in table.rows)
        return StillParts(
            title="Rules of thumb",
            caption=f"The answer here is {answer.text} ({answer.set_by}). Each rule is for one change alone.",
            alt=f"From {answer.text}: {costs}.",
            inputs=words.inputs(aircraft, condition),
            drawings=(),
            table=table,
            notes=(
                f"Read from the manual's own chart ({aircraft.vne.source}). Outside its range a rule is off by more "
                "than 1 kt, or the chart has no answer: do not carry it further. Not for use in flight.",
            ),
        )


def _change(aircraft: Aircraft, rule: RuleOfThumb) -> str:
    """ "5.2 kt slower": a cost is rounded up and a gain down."""
    unit = aircraft.units.speed
    if rule.change < 0.0:
        return f"{units.show_number(units.round_up(-rule.change, 0.1), 1)} {unit} slower"
    gain = units.round_down(rule.change, 0.1)
    return f"{units.show_number(gain, 1)} {unit} faster" if gain > 0.0 else "no change"


def _range(rule: RuleOfThumb) -> str:
    """From and to, rounded inwards; where that leaves nothing, that it holds here alone."""
    step = _STEP[rule.unit]
    low = math.ceil(round(rule.low / step, 6)) * step
    high = math.floor(round(rule.high / step, 6)) * step
    decimals = 0 if step >= 1.0 else 1
    if low >= high:
        return "here only"
    first, last = (units.show_number(end, decimals) for end in (low, high))
    if rule.unit == "°C":  # a temperature carries its sign
        first, last = (f"+{text}" if end > 0.0 else text for text, end in ((first, low), (last, high)))
    return f"from {first} to {last}\u00a0{rule.unit}"
