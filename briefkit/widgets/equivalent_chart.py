"""The manual's own VNE chart with this condition on it, and the level flight that loads the same rotor as much."""

from __future__ import annotations

import bqplot
import numpy as np

from briefkit import units
from briefkit.aircraft.chart import Axis
from briefkit.aircraft.model import Aircraft
from briefkit.brief import words as said
from briefkit.brief.pictures import along, chart_lines
from briefkit.envelope.chart_steps import stepped
from briefkit.envelope.condition import Condition
from briefkit.envelope.equivalent import EquivalentVne
from briefkit.errors import Refusal, SetBy
from briefkit.figures.chart import ChartFigure, Mark
from briefkit.figures.still import Drawing, StillParts, Table
from briefkit.widgets import boundary_words, closing, words
from briefkit.widgets.answers import Answers
from briefkit.widgets.exhibit import Exhibit


class EquivalentChart(Exhibit):
    """The condition here, and the same rotor there, on the manual's chart: what a pilot can follow with a pencil.

    `EquivalentChart(aircraft, condition)` is fixed, `EquivalentChart(live)` follows. No airspeed is needed. A condition
    beyond the chart shows its place, and in words why there is no other.
    """

    def __init__(self, source: object, condition: Condition | None = None) -> None:
        super().__init__(source, condition)

    def _build(self, aircraft: Aircraft) -> tuple[bqplot.Figure, ...]:
        self._make(aircraft, self._source.answers.condition.mass)
        return (self._chart.figure,)

    def _make(self, aircraft: Aircraft, mass: float) -> None:
        """The chart's lines; on a chart of three variables those for one mass."""
        shown = aircraft.units
        self._heights, self._columns, names = chart_lines(aircraft, mass)
        self._chart = ChartFigure(
            units.from_si(self._heights, "height", shown.height),
            units.from_si(self._columns, "speed", shown.speed),
            names,
            x_words=f"{'Density' if aircraft.vne.density_altitude else 'Pressure'} altitude, {shown.height}",
            speed_words=f"VNE, {shown.speed_label()}",
            steps=stepped(aircraft.vne, Axis.HEIGHT),
        )

    def _lines_for(self, aircraft: Aircraft, mass: float) -> None:
        """Other lines where a chart of three variables is entered at another mass."""
        heights, columns, _ = chart_lines(aircraft, mass)
        same = (heights, self._heights), (columns, self._columns)
        if all(np.array_equal(one, other, equal_nan=True) for one, other in same):
            return
        old = self._chart.figure
        self._make(aircraft, mass)
        self._picture.children = [self._chart.figure if child is old else child for child in self._picture.children]
        closing.close_tree(old)

    def _draw(self, answers: Answers) -> StillParts:
        aircraft, condition = answers.aircraft, answers.condition
        self._lines_for(aircraft, condition.mass)
        answer, why = _asked(answers)
        moved = answer is not None and answer.set_by is SetBy.EQUIVALENT
        vne = answers.level.ias
        turn = words.turn(condition)
        mass = units.show(condition.mass, "mass", aircraft.units.mass)
        here = Mark(
            self._place(aircraft, condition.pressure_altitude, condition.oat),
            vne,
            (f"{mass}, {turn}" if turn else mass, f"VNE {_floored(vne)} here"),
        )
        there = None
        if answer is not None and moved:
            point = answer.chart_point
            there = Mark(
                self._place(aircraft, point.pressure_altitude, point.temperature),
                point.vne,
                (
                    f"as loaded at {_height(aircraft, point.pressure_altitude)}",
                    f"{said.number(point.vne)} on the chart",
                ),
            )
        self._chart.update(here, there)
        caption = _caption(aircraft, condition, answers.level.text, answer, why)
        title = "The equivalent level flight"
        alt = f"The manual's VNE chart with this condition on it. {caption}"
        return StillParts(
            title=title,
            caption=caption,
            alt=alt,
            inputs=words.inputs(aircraft, condition),
            drawings=(Drawing(self._chart.figure, title, alt),),
            table=_table(aircraft, condition, vne, answer, why),
            notes=_notes(aircraft),
        )

    def _place(self, aircraft: Aircraft, altitude: float, oat: float) -> float:
        """Along the chart's heights; under its first row (a row that says "or less") at its edge."""
        first = float(units.from_si(float(self._heights[0]), "height", aircraft.units.height))
        return max(along(aircraft, altitude, oat), first)


def _asked(answers: Answers) -> tuple[EquivalentVne | None, str]:
    try:
        return answers.equivalent, ""
    except Refusal as refusal:
        return None, words.why(refusal)


def _caption(aircraft: Aircraft, condition: Condition, level: str, answer: EquivalentVne | None, why: str) -> str:
    vne = f"The manual's VNE here is {level} ({aircraft.vne.source})."
    turn = words.turn(condition)
    if answer is None:
        return f"{vne} With {turn} there is no figure: {why}."
    if condition.level_at_full_rotor_speed and answer.set_by is SetBy.MANUAL_VNE:
        return f"{vne} Level at 100 % rotor speed that is the answer."
    if answer.set_by is not SetBy.EQUIVALENT:
        return f"{vne} With {turn or 'the climb'} nothing is taken off: VNE still limits."
    point = answer.chart_point
    there = words.level_point(aircraft, point.mass, point.pressure_altitude, point.temperature)
    there += boundary_words.rotor_there(aircraft, point.rotor_speed)
    below = units.show_number(units.round_up(answer.below_vne))
    return (
        f"{vne} With {turn or 'the climb'} the rotor is as loaded as level at {there}, where the chart gives "
        f"{said.number(point.vne)} {aircraft.units.speed_label()}: {answer.text} here, {below} {answer.unit} below VNE."
    )


def _table(aircraft: Aircraft, condition: Condition, vne: float, answer: EquivalentVne | None, why: str) -> Table:
    shown, label = aircraft.units, aircraft.units.speed_label()
    rows = [
        (
            "here", units.show(condition.mass, "mass", shown.mass), _height(aircraft, condition.pressure_altitude),
            said.temperature(condition.oat), f"VNE {_floored(vne)} {label}",
        )
    ]  # fmt: skip
    if answer is None:
        rows.append(("there", "", "", "", f"none: {why}"))
    elif answer.set_by is SetBy.EQUIVALENT:
        point = answer.chart_point
        rows.append((
            "there", units.show(point.mass, "mass", shown.mass), _height(aircraft, point.pressure_altitude),
            said.temperature(point.temperature), f"VNE {said.number(point.vne)} {label}",
        ))  # fmt: skip
        rows.append(("answer here", *rows[0][1:4], answer.text))
    else:
        rows.append(("answer here", *rows[0][1:4], f"{answer.text}: the manual's VNE"))
    return Table(("Where", "Mass", "Pressure altitude", "Temperature", "Speed"), tuple(rows), "Here and there")


def _notes(aircraft: Aircraft) -> tuple[str, ...]:
    notes = ["Dots are the manual's own entries. The answer is never above the manual's VNE here."]
    if aircraft.vne.masses and aircraft.vne.temperatures:
        notes.append("The lines are those for the first mass of the chart that is not lighter.")
    if aircraft.vne.rotor_speeds and (aircraft.vne.masses or aircraft.vne.temperatures):
        notes.append("The lines are those for the rotor speed of the chart that is nearest to 100 %.")
    return tuple(notes)


def _floored(vne: float) -> str:
    """VNE here, which may lie between the chart's entries: floored to one unit, as the answer is."""
    return units.show_number(units.round_down(vne))


def _height(aircraft: Aircraft, metres: float) -> str:
    return f"Hp {said.height(aircraft, metres)}"
