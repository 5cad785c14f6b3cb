"""How much slower before a turn, over a work area: the crew page's stairs and rows, beside the live condition."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.operation import FleetEntry, WorkArea
from briefkit.brief import words as said
from briefkit.brief.front import row_text
from briefkit.brief.pictures import stairs_parts
from briefkit.envelope.condition import Condition
from briefkit.envelope.reductions import reductions
from briefkit.figures.still import StillParts, Table
from briefkit.widgets.answers import Answers
from briefkit.widgets.table_exhibit import TableExhibit, condition_of, source_of


class Reductions(TableExhibit):
    """The reduction before a turn of the company's one briefed bank, by mass, over one work area.

    `Reductions(aircraft, fleet, area)` is fixed; `Reductions(live, fleet, area)` marks the row that the live mass falls
    under, the heavier line between two. Raises what the area's own points refuse.
    """

    def __init__(self, source: object, fleet: FleetEntry, area: WorkArea) -> None:
        self._fleet, self._area = fleet, area
        super().__init__(source_of(source))

    def _build(self, aircraft: Aircraft) -> tuple[Any, ...]:
        self._block = reductions(aircraft, self._fleet, self._area)
        self._stairs = stairs_parts(aircraft, self._block)
        rows = tuple((row.mass.text, row_text(aircraft, self._block, row)) for row in self._block.rows)
        self._listed = Table(
            ("Up to mass", "Slow to VNE less"), rows, "The same as a table; between two masses the heavier line holds"
        )
        return (*(drawing.figure for drawing in self._stairs.drawings), *super()._build(aircraft))

    def _for_words(self, answers: Answers) -> str:
        aircraft, area, condition = answers.aircraft, self._area, condition_of(answers)
        low, high = (said.height(aircraft, end.value) for end in (area.low_altitude, area.high_altitude))
        cold, hot = (said.temperature(end.value) for end in (area.low_temperature, area.high_temperature))
        block = f"{area.name}, Hp {low} to {high}, {cold} to {hot}, {self._bank()} of bank"
        return block if condition is None else f"{block}; mass now {_mass(aircraft, condition)}"

    def _bank(self) -> str:
        return f"{self._block.brief_bank_deg:.0f}°"

    def _draw(self, answers: Answers) -> StillParts:
        aircraft, condition = answers.aircraft, condition_of(answers)
        now = None if condition is None else self._row_of(condition)
        caption = self._stairs.caption
        inputs = [("Work area", self._area.name), ("Briefed bank", self._bank())]
        if condition is not None:
            inputs.append(("Mass", _mass(aircraft, condition)))
            caption = f"{caption} {self._now(aircraft, condition, now)}"
        self._show(self._listed, now)
        floor = self._block.floor
        notes = (
            f"Status: {self._fleet.status}. An answer under {said.indicated(aircraft, floor.text)} "
            f"({floor.reason}) is no turn. Over {self._bank()}: not briefed.",
        )
        title = "Before a turn"
        return replace(
            self._stairs, title=title, caption=caption, inputs=tuple(inputs), table=self._listed, notes=notes
        )

    def _row_of(self, condition: Condition) -> int | None:
        """The lightest row that is not lighter than the mass; None above the heaviest."""
        under = [i for i, row in enumerate(self._block.rows) if row.mass.value >= condition.mass - 1e-6]
        return max(under, default=None)

    def _now(self, aircraft: Aircraft, condition: Condition, now: int | None) -> str:
        if now is None:
            return f"{_mass(aircraft, condition)} is above every briefed mass: no turn briefed."
        mass, text = self._listed.rows[now]
        return f"At {_mass(aircraft, condition)} the line for {mass} holds: {text}."


def _mass(aircraft: Aircraft, condition: Condition) -> str:
    return units.show(condition.mass, "mass", aircraft.units.mass)
