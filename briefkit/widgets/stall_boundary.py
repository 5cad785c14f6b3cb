"""The stall boundary: the manual's VNE, the equivalent VNE at a few banks, and the softer onset band behind them."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Final

import bqplot
import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope.boundary import Against, Boundary, boundary
from briefkit.envelope.condition import Condition
from briefkit.errors import Reason, Refusal, SetBy
from briefkit.figures.boundary import BoundaryFigure, Curves, Here
from briefkit.figures.still import Drawing, StillParts, Table
from briefkit.widgets import words
from briefkit.widgets.answers import Answers
from briefkit.widgets.exhibit import Exhibit

Floats = NDArray[np.float64]

BANKS: Final = (0.0, 20.0, 30.0)
_TABLE_ROWS: Final = 6
_SHORT: Final = {
    Reason.BEYOND_CHART: "beyond chart",
    Reason.TOO_COLD: "too cold",
    Reason.OUTSIDE_CALIBRATION: "no calibration",
    Reason.OUTSIDE_LIMITS: "outside limits",
}


class StallBoundary(Exhibit):
    """Indicated speed against pressure altitude or mass, around one condition.

    `StallBoundary(aircraft, condition)` is fixed, `StallBoundary(live)` follows. `against` is "pressure altitude" or
    "mass"; `banks` up to four banks in degrees, none above the manual's bank limit.
    """

    def __init__(
        self,
        source: object,
        condition: Condition | None = None,
        *,
        against: str = "pressure altitude",
        banks: tuple[float, ...] = BANKS,
    ) -> None:
        self._against, self._banks = Against(against), tuple(float(bank) for bank in banks)
        self._kept: tuple[Condition, Boundary] | None = None
        super().__init__(source, condition)

    def _build(self, aircraft: Aircraft) -> tuple[bqplot.Figure, ...]:
        limit = aircraft.limits.max_bank
        if limit is not None:
            highest = units.from_si(limit.value, "angle", "deg")
            self._banks = tuple(bank for bank in self._banks if bank <= highest + 1e-9)
        over_mass = self._against is Against.MASS
        unit = aircraft.units.mass if over_mass else aircraft.units.height
        self._boundary = BoundaryFigure(
            x_words=f"{self._against}, {unit}",
            speed_words=f"{aircraft.units.speed_label()}, power on",
            banks=len(self._banks),
        )
        return (self._boundary.figure,)

    def _draw(self, answers: Answers) -> StillParts:
        aircraft, condition = answers.aircraft, answers.condition
        curves = self._curves(aircraft, condition)
        here, caption = self._here(answers)
        self._boundary.update(
            Curves(
                x=curves.x,
                manual=curves.vne,
                turns=[(c.bank_deg, c.ias) for c in curves.equivalent if c.bank_deg is not None],
                onset_x=curves.onset_x,
                onset_lower=curves.onset_lower,
                onset_central=curves.onset_central,
                onset_upper=curves.onset_upper,
            ),
            here,
        )
        title = f"VNE and the equivalent level flight, against {self._against}"
        desc = f"Indicated speed against {self._against}. {caption}"
        return StillParts(
            title=title,
            caption=caption,
            alt=desc,
            inputs=words.inputs(aircraft, condition),
            drawings=(Drawing(self._boundary.figure, title, desc),),
            table=self._table(aircraft, curves),
            notes=self._notes(aircraft, curves),
        )

    def _curves(self, aircraft: Aircraft, condition: Condition) -> Boundary:
        """The curves do not depend on the airspeed, nor on the number along the axis: kept while only those change."""
        along = "mass" if self._against is Against.MASS else "pressure_altitude"
        ends = aircraft.limits.max_mass.value if self._against is Against.MASS else aircraft.vne.heights[0]
        key = condition.changed(**{"ias": None, along: ends})
        if self._kept is None or self._kept[0] != key:
            self._kept = key, boundary(aircraft, condition, self._against, self._banks)
        return self._kept[1]

    def _here(self, answers: Answers) -> tuple[Here, str]:
        aircraft, condition = answers.aircraft, answers.condition
        quantity, unit = (
            ("mass", aircraft.units.mass) if self._against is Against.MASS else ("height", aircraft.units.height)
        )
        value = condition.mass if self._against is Against.MASS else condition.pressure_altitude
        speed = None if condition.ias is None else float(units.from_si(condition.ias, "speed", aircraft.units.speed))
        label = aircraft.units.speed_label()
        words_here = "here" if speed is None else f"here, {units.show_number(speed)} {label}"
        level = answers.level
        vne = f"The manual's VNE here is {level.text} ({aircraft.vne.source})."
        turn = _turn(condition)
        here = Here(float(units.from_si(value, quantity, unit)), speed, words_here)
        if condition.level_at_full_rotor_speed:
            return here, f"{vne} Level at 100 % rotor speed that is the answer."
        try:
            answer = answers.equivalent
        except Refusal as refusal:
            return here, f"{vne} With {turn} there is no figure. {refusal}."
        here = replace(here, answer=answer.ias, answer_words=f"{turn}: {answer.text}")
        if answer.set_by is SetBy.MANUAL_VNE:
            return here, f"{vne} With {turn} nothing is taken off: VNE still limits."
        point = answer.chart_point
        there = words.level_point(aircraft, point.mass, point.pressure_altitude, point.temperature)
        below = units.show_number(units.round_up(answer.below_vne))
        return here, (
            f"{vne} With {turn} the rotor is as loaded as level at {there}, where the chart gives "
            f"{units.show_number(point.vne, 1)}: {answer.text} here, {below} {answer.unit} below VNE."
        )

    def _table(self, aircraft: Aircraft, curves: Boundary) -> Table:
        """A row at even steps of the axis; speeds floored to one unit, a refused cell says why."""
        label = aircraft.units.speed_label()
        turns = [c for c in curves.equivalent if not np.array_equal(c.ias, curves.vne, equal_nan=True)]
        banks = tuple("Level" if c.bank_deg == 0.0 else f"{c.bank_deg:g}° bank" for c in turns)
        header = (f"{curves.x_label}, {curves.x_unit}", f"VNE, {label}", *banks, "Onset band")
        rows = []
        for index in np.linspace(0, curves.x.size - 1, _TABLE_ROWS).round().astype(int).tolist():
            cells = [_floored(curves.vne[index], "off the chart")]
            cells += [_floored(c.ias[index], _SHORT.get(c.reason[index], str(c.reason[index]))) for c in turns]
            rows.append((units.show_number(curves.x[index]), *cells, _band(curves, float(curves.x[index]))))
        return Table(header, tuple(rows), f"{label}, power on, floored to 1 {curves.speed_unit}")

    def _notes(self, aircraft: Aircraft, curves: Boundary) -> tuple[str, ...]:
        same = [
            "level" if c.bank_deg == 0.0 else f"at {c.bank_deg:g}° bank"
            for c in curves.equivalent
            if np.array_equal(c.ias, curves.vne, equal_nan=True)
        ]
        notes = [
            "Black is the manual's. Blue is the manual's own chart read at the equivalent level flight. The grey band "
            "is the rotor model's absolute onset, softer than the chart; it is no speed to fly."
        ]
        if same:
            notes.append(f"Nothing is taken off {' and '.join(same)}: the manual's VNE holds along the whole line.")
        if not np.all(np.isfinite(curves.onset_lower) & np.isfinite(curves.onset_upper)):
            notes.append(
                "Where the band or its upper end is missing, that speed is outside the calibration or the model."
            )
        for reason in sorted({str(r) for curve in curves.equivalent for r in curve.reason if r}):
            notes.append(f"Where a blue line ends: {reason}.")
        return tuple(notes)


def _turn(condition: Condition) -> str:
    """What takes this condition away from level flight at 100 %, in words."""
    parts = []
    if condition.load_factor > 1.0 + 1e-12:
        parts.append(f"{units.show_number(math.degrees(condition.bank))}° bank")
    if abs(condition.rotor_speed - 1.0) > 1e-12:
        parts.append(f"rotor at {100.0 * condition.rotor_speed:.4g} %")
    return ", ".join(parts)


def _floored(speed: float, why: str) -> str:
    return units.show_number(units.round_down(float(speed))) if np.isfinite(speed) else why


def _band(curves: Boundary, x: float) -> str:
    ends = (float(np.interp(x, curves.onset_x, edge)) for edge in (curves.onset_lower, curves.onset_upper))
    low, high = (units.show_number(units.round_down(end)) if math.isfinite(end) else "" for end in ends)
    if low and high:
        return f"{low} to {high}"
    return f"from {low}" if low else "no figure"
