"""The stall boundary: the manual's VNE, the equivalent VNE at a few banks, and the softer onset band behind them."""

from __future__ import annotations

from dataclasses import replace
from numbers import Real
from typing import Final

import bqplot
import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope.boundary import Against, Boundary, boundary, own_in_a_turn, with_band
from briefkit.envelope.condition import Condition
from briefkit.errors import ReadingError, Reason, Refusal, SetBy
from briefkit.figures.boundary import BoundaryFigure
from briefkit.figures.boundary_lines import Here
from briefkit.figures.still import Drawing, StillParts, Table
from briefkit.widgets import boundary_words, words
from briefkit.widgets.answers import Answers
from briefkit.widgets.exhibit import Exhibit, Fixed

Floats = NDArray[np.float64]

BANKS: Final = (0.0, 20.0, 30.0)
_STEEPEST: Final = 80.0  # what a condition may have
_TABLE_ROWS: Final = 6
_AXES: Final = {
    Against.ALTITUDE: "pressure altitude",
    Against.MASS: "mass",
    Against.ROTOR_SPEED: "rotor speed",
    Against.BANK: "bank",
    Against.GUST: "speed of a rising gust",
}
# The field of a condition that an axis replaces, and any value of it to compare conditions without.
_REPLACED: Final = {
    Against.ALTITUDE: ("pressure_altitude", 0.0),
    Against.MASS: ("mass", 1000.0),
    Against.ROTOR_SPEED: ("rotor_speed", 1.0),
    Against.BANK: ("load_factor", 1.0),
}
_SHORT: Final = {
    Reason.BEYOND_CHART: "beyond chart",
    Reason.TOO_COLD: "too cold",
    Reason.OUTSIDE_CALIBRATION: "no calibration",
    Reason.OUTSIDE_LIMITS: "outside limits",
    Reason.OUTSIDE_CHART: "off the chart",
    Reason.NO_TEMPERATURES: "colder than standard",
}


class StallBoundary(Exhibit):
    """Indicated speed against one quantity, around one condition.

    `StallBoundary(aircraft, condition)` is fixed, `StallBoundary(live)` follows. `against` is "pressure altitude",
    "mass", "rotor speed", "bank" or "gust"; `banks` up to four banks in degrees, none above the manual's bank limit
    (against bank or gust they are not used). Against a gust only the onset band is drawn.
    """

    def __init__(
        self,
        source: object,
        condition: Condition | None = None,
        *,
        against: str = "pressure altitude",
        banks: tuple[float, ...] = BANKS,
    ) -> None:
        self._against, self._banks = Against(against), _banks(banks)
        self._kept: tuple[Condition, Boundary] | None = None
        super().__init__(source, condition)

    def _build(self, aircraft: Aircraft) -> tuple[bqplot.Figure, ...]:
        limit = aircraft.limits.max_bank
        if limit is not None:
            highest = units.from_si(limit.value, "angle", "deg")
            self._banks = tuple(bank for bank in self._banks if bank <= highest + 1e-9)
        lines = {Against.BANK: 1, Against.GUST: 0}.get(self._against, len(self._banks))
        unit = self._axis(aircraft)[1]
        self._boundary = BoundaryFigure(
            x_words=f"{_AXES[self._against]}, {units.SHOWN.get(unit, unit)}",
            speed_words=f"{aircraft.units.speed_label()}, power on",
            turns=lines,
        )
        return (self._boundary.figure,)

    def _draw(self, answers: Answers) -> StillParts:
        aircraft, condition = answers.aircraft, answers.condition
        curves = self._curves(aircraft, condition)
        here, caption = self._here(answers, curves)
        self._boundary.update(self._drawn, here)
        title = f"VNE and the equivalent level flight, against {_AXES[self._against]}"
        if self._against is Against.GUST:
            title = "VNE and the onset band, against the speed of a rising gust"
        desc = f"Indicated speed against {_AXES[self._against]}. {caption}"
        return StillParts(
            title=title,
            caption=caption,
            alt=desc,
            inputs=words.inputs(aircraft, condition),
            drawings=(Drawing(self._boundary.figure, title, desc),),
            table=self._table(aircraft, curves),
            notes=boundary_words.notes(aircraft, curves),
        )

    def _curves(self, aircraft: Aircraft, condition: Condition) -> Boundary:
        """The curves do not depend on the airspeed, nor on the number along the axis: kept while only those change.

        The bank moves the onset band alone: the lines have their own.
        """
        moved: dict[str, float | None] = {"ias": None}
        if self._against in _REPLACED:
            field, anything = _REPLACED[self._against]
            moved[field] = anything
        key = condition.changed(**moved)
        if self._kept is not None and self._kept[0] == key:
            return self._kept[1]
        if self._kept is not None and _level(self._kept[0]) == _level(key):
            curves = with_band(aircraft, condition, self._kept[1])
        else:
            curves = boundary(aircraft, condition, self._against, self._banks)
        self._kept = key, curves
        self._drawn = boundary_words.drawn(aircraft, condition, curves)
        return curves

    def _axis(self, aircraft: Aircraft) -> tuple[str, str]:
        """Quantity and unit of the axis, in the units of the type's manual."""
        shown = aircraft.units
        return {
            Against.ALTITUDE: ("height", shown.height),
            Against.MASS: ("mass", shown.mass),
            Against.ROTOR_SPEED: ("ratio", "%"),
            Against.BANK: ("angle", "deg"),
            Against.GUST: ("vertical speed", "ft/min" if shown.height == "ft" else "m/s"),
        }[self._against]

    def _here(self, answers: Answers, curves: Boundary) -> tuple[Here, str]:
        aircraft, condition = answers.aircraft, answers.condition
        quantity, unit = self._axis(aircraft)
        value = {
            Against.ALTITUDE: condition.pressure_altitude,
            Against.MASS: condition.mass,
            Against.ROTOR_SPEED: condition.rotor_speed,
            Against.BANK: condition.bank,
            Against.GUST: 0.0,
        }[self._against]
        speed = None if condition.ias is None else float(units.from_si(condition.ias, "speed", aircraft.units.speed))
        label = aircraft.units.speed_label()
        words_here = "here" if speed is None else f"here, {units.show_number(speed)} {label}"
        here = Here(float(units.from_si(value, quantity, unit)), speed, words_here)
        # A picture that stands still has the time to solve what the table does not reach.
        still = condition if isinstance(self._source, Fixed) else None
        onset = boundary_words.onset_here(aircraft, curves, here.x, still)
        if self._against is Against.GUST:
            covered = boundary_words.covered_load(aircraft, condition)
            return here, f"The manual's VNE here is {answers.level.text} ({aircraft.vne.source}). {covered} {onset}"
        here, said = self._answer(answers, here)
        return here, f"{said} {onset}"

    def _answer(self, answers: Answers, here: Here) -> tuple[Here, str]:
        aircraft, condition = answers.aircraft, answers.condition
        vne, label = (
            f"The manual's VNE here is {answers.level.text} ({aircraft.vne.source}).",
            aircraft.units.speed_label(),
        )
        turn = words.turn(condition)
        if condition.level_at_full_rotor_speed:
            return here, f"{vne} Level at 100 % rotor speed that is the answer."
        try:
            answer = answers.equivalent
        except Refusal as refusal:
            return here, f"{vne} With {turn} there is no figure: {words.why(refusal)}."
        own = float(own_in_a_turn(aircraft, np.array([answers.level.ias]), np.array([condition.bank]))[0])
        if own < answer.ias:
            said = boundary_words.own_turn(aircraft, own)
            here = replace(here, answer=own, answer_words=f"{turn}: {units.show_number(units.round_down(own))} {label}")
            return here, f"{vne} With {turn} {said}, lower than the equivalent level flight gives, {answer.text}."
        here = replace(here, answer=answer.ias, answer_words=f"{turn}: {answer.text}")
        if answer.set_by is SetBy.MANUAL_VNE:
            return here, f"{vne} With {turn} nothing is taken off: VNE still limits."
        point = answer.chart_point
        there = words.level_point(aircraft, point.mass, point.pressure_altitude, point.temperature)
        there += boundary_words.rotor_there(aircraft, point.rotor_speed)
        below = units.show_number(units.round_up(answer.below_vne))
        return here, (
            f"{vne} With {turn} the rotor is as loaded as level at {there}, where the chart gives "
            f"{units.show_number(point.vne, 1)}: {answer.text} here, {below} {answer.unit} below VNE."
        )

    def _table(self, aircraft: Aircraft, curves: Boundary) -> Table:
        """A row at even steps of the axis; speeds floored to one unit, a refused cell says why."""
        label = aircraft.units.speed_label()
        turns = [c for c in curves.equivalent if not np.array_equal(c.ias, curves.vne, equal_nan=True)]
        names = tuple(name[0].upper() + name[1:] for name in map(boundary_words.name, turns))
        unit = units.SHOWN.get(curves.x_unit, curves.x_unit)
        header = (f"{curves.x_label}, {unit}", f"VNE, {label}", *names, "Onset band", "First signs, 12°")
        rows = []
        even = np.linspace(curves.x[0], curves.x[-1], _TABLE_ROWS)
        for index in np.abs(curves.x[None, :] - even[:, None]).argmin(axis=1).tolist():
            cells = [_floored(curves.vne[index], "off the chart")]
            cells += [_floored(c.ias[index], _SHORT.get(c.reason[index], str(c.reason[index]))) for c in turns]
            x = float(curves.x[index])
            shown = units.show_number(x, 0 if abs(x - round(x)) < 0.05 else 1)
            rows.append((shown, *cells, boundary_words.band(curves, x), boundary_words.margin(curves, x)))
        return Table(header, tuple(rows), f"{label}, power on, floored to 1 {curves.speed_unit}")


def _banks(given: tuple[float, ...]) -> tuple[float, ...]:
    """The banks of the lines, refused in words where one is no bank of a turn or stands twice."""
    read = f"banks of {', '.join(map(str, given))}"
    if not all(isinstance(bank, Real) and 0.0 <= bank <= _STEEPEST for bank in given):  # NaN too
        raise ReadingError(read, f"numbers from 0 to {_STEEPEST:g} degrees", "(0, 20, 30) draws three lines")
    banks = tuple(float(bank) for bank in given)
    if len(set(banks)) < len(banks):
        raise ReadingError(read, "each bank once", "two lines would be one")
    return banks


def _level(condition: Condition) -> Condition:
    return condition.changed(load_factor=1.0)


def _floored(speed: float, why: str) -> str:
    return units.show_number(units.round_down(float(speed))) if np.isfinite(speed) else why
