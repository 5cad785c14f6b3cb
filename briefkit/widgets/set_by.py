"""What sets the answer where: work areas, days and masses of an operation in one table."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import groupby

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.operation import FleetEntry, WorkArea
from briefkit.brief import words as said
from briefkit.envelope.equivalent import EquivalentVne
from briefkit.envelope.overview import SetByRow, set_by_table
from briefkit.errors import ReadingError, Reason, Refusal, SetBy
from briefkit.figures.still import StillParts, Table
from briefkit.widgets import words
from briefkit.widgets.answers import Answers
from briefkit.widgets.table_exhibit import TableExhibit, condition_of, source_of


class SetByTable(TableExhibit):
    """Whose number the answer is, at the briefed bank and the top of each work area, on its coldest and hottest day.

    `SetByTable(aircraft, fleet, areas)` is fixed; `SetByTable(live, fleet, areas)` has the live condition as its first
    row and follows it. `fleet` is the operation's entry for the type, `areas` its work areas.
    """

    def __init__(self, source: object, fleet: FleetEntry, areas: Sequence[WorkArea]) -> None:
        if not areas:
            raise ReadingError("no work area", "at least one work area of the operation")
        self._fleet, self._areas = fleet, tuple(areas)
        super().__init__(source_of(source))

    def _build(self, aircraft: Aircraft) -> tuple[object, ...]:
        self._rows = tuple(_row(aircraft, row) for row in set_by_table(aircraft, self._fleet, self._areas))
        return super()._build(aircraft)

    def _for_words(self, answers: Answers) -> str:
        condition = condition_of(answers)
        block = f"{self._bank()} of bank, the top of each work area"
        return block if condition is None else f"{words.sentence(answers.aircraft, condition)}; below it {block}"

    def _bank(self) -> str:
        return said.degrees(self._fleet.brief_bank.value)

    def _draw(self, answers: Answers) -> StillParts:
        aircraft, condition = answers.aircraft, condition_of(answers)
        rows = _joined(self._rows)
        if condition is not None:
            mass = units.show(condition.mass, "mass", aircraft.units.mass)
            rows = (
                ("this condition", said.temperature(condition.oat), mass, *_said(aircraft, *_asked(answers))),
                *rows,
            )
        step = said.knots(aircraft, aircraft.units.speed_step)
        table = Table(
            ("Where", "Day", "Mass", "Below VNE", "Set by"),
            rows,
            f"At {self._bank()} of bank: how far below the manual's VNE, rounded up to a step of {step}",
        )
        self._show(table, now=None if condition is None else 0)
        refused = sum(row[3] == "no figure" for row in self._rows)
        ours = sum(row[4] == str(SetBy.EQUIVALENT) for row in self._rows)
        theirs, count = len(self._rows) - ours - refused, len(self._rows)
        none = f"; {refused} {'has' if refused == 1 else 'have'} no figure" if refused else ""
        caption = (
            f"Of {count} cases (place, day, mass) the manual's VNE is the answer in {theirs}, and the manual's own "
            f"chart, read at the equivalent level flight, in {ours}{none}."
        )
        return StillParts(
            title="What sets the answer",
            caption=caption,
            alt=caption,
            inputs=() if condition is None else words.inputs(aircraft, condition),
            drawings=(),
            table=table,
            notes=(
                "Points, not blocks: the crew's page takes the largest reduction over a whole work area. The manual's "
                "other speeds, and the floor, come before it.",
            ),
        )


def _row(aircraft: Aircraft, row: SetByRow) -> tuple[str, ...]:
    day = f"{row.day}, {said.temperature(row.oat)}"
    beyond = str(Reason.BEYOND_CHART)
    refusal = beyond if beyond in row.refusal else row.refusal  # no covered bank without its own reduction
    return (row.area, day, row.mass.text, *_said(aircraft, row.answer, refusal))


def _joined(rows: tuple[tuple[str, ...], ...]) -> tuple[tuple[str, ...], ...]:
    """Neighbouring masses of one place and day that have the same answer share a row."""
    shown: list[tuple[str, ...]] = []
    for _, group in groupby(rows, key=lambda row: (*row[:2], *row[3:])):
        alike = list(group)
        first, last = (one[2].replace(" ", "\u00a0") for one in (alike[0], alike[-1]))
        mass = first if len(alike) == 1 else f"{first} to {last}"
        shown.append((*alike[0][:2], mass, *alike[0][3:]))
    return tuple(shown)


def _asked(answers: Answers) -> tuple[EquivalentVne | None, str]:
    try:
        return answers.equivalent, ""
    except Refusal as refusal:
        return None, words.why(refusal)


def _said(aircraft: Aircraft, answer: EquivalentVne | None, refusal: str) -> tuple[str, str]:
    """How far below VNE, and whose number it is; a refusal in its own words."""
    if answer is None:
        return "no figure", refusal
    if answer.set_by is SetBy.EQUIVALENT:
        return said.knots(aircraft, units.round_up(answer.below_vne, aircraft.units.speed_step)), str(answer.set_by)
    return "nothing", str(answer.set_by)
