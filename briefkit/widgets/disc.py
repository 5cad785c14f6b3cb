"""The rotor-disc map: what each part of each blade meets, seen from above with the nose up the page."""

from __future__ import annotations

import math
from typing import Final

import bqplot
import ipywidgets as w
import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope.condition import Condition
from briefkit.envelope.solution import Solution
from briefkit.envelope.wind import solve_in_wind
from briefkit.figures.disc import DiscFigure, levels_for, reversed_region
from briefkit.figures.still import Drawing, StillParts, Table
from briefkit.widgets import words
from briefkit.widgets.answers import Answers
from briefkit.widgets.disc_quantities import LEVELS, SPEED, UNITS, Field, checked, field_of
from briefkit.widgets.exhibit import Exhibit, Fixed
from briefkit.widgets.wind import Wind, WindControl, read_wind

Floats = NDArray[np.float64]

# Fixed steps for a type up to this multiple of its tip speed, so that a colour means the same at every condition.
_COVERED: Final = 1.35
_AZIMUTHS: Final[Floats] = np.asarray(2.0 * np.pi / 24 * np.arange(24), dtype=np.float64)
# The four rows of the table: azimuths from where the wind leaves the disc.
_QUARTERS: Final = np.array([0.5, 1.0, 1.5, 2.0]) * np.pi
_IN_FORWARD_FLIGHT: Final = ("advancing side", "nose", "retreating side", "tail")
_NO_SIDE: Final = ("90° side", "nose", "270° side", "tail")
_TURNED: Final = ("advancing side", "upwind side", "retreating side", "downwind side")


class DiscMap(Exhibit):
    """One quantity over the disc, with the reversed-flow region outlined.

    `DiscMap(aircraft, condition)` is fixed, `DiscMap(live)` follows and carries controls of the relative wind. The
    condition needs an airspeed. `quantity` is "speed" (normal to the blade, true), "Mach", "angle of attack" or "angle
    over stall"; another is refused.

    For a hover in wind, sideward or rearward flight: `wind_from` is where the relative wind comes from, clockwise from
    the nose ("90 deg": from the right), `wind` its true speed ("17 kt"); without one it is the condition's airspeed.
    """

    def __init__(
        self,
        source: object,
        condition: Condition | None = None,
        *,
        quantity: str = SPEED,
        wind_from: str = "0 deg",
        wind: str = "",
    ) -> None:
        self._quantity = checked(quantity)
        self._asked_wind = wind_from, wind
        self._wind = Wind()
        super().__init__(source, condition)
        if not isinstance(self._source, Fixed):
            self._control = WindControl(self._source.answers.aircraft, self._wind, self.turn)
            self.children = (self._caption, self._control, self._picture, self._state)

    def turn(self, wind: Wind) -> None:
        """Redraw in another relative wind; a wind that is refused raises, and the picture stays as it is."""
        before, self._wind = self._wind, wind
        try:
            self._redraw()
        except Exception:
            self._wind = before
            raise

    def _build(self, aircraft: Aircraft) -> tuple[bqplot.Figure, ...]:
        rotor = aircraft.rotor
        self._wind = read_wind(aircraft, *self._asked_wind)
        self._rotation = -1 if aircraft.mirrored else 1
        self._root = rotor.root_cutout.value
        self._radii = np.linspace(self._root, 1.0, 13)
        fastest = float(units.from_si(_COVERED * rotor.tip_speed, "speed", aircraft.units.speed))
        self._levels = levels_for(0.0, fastest)
        self._disc = DiscFigure(
            blades=rotor.blades,
            rotation=self._rotation,
            root_cutout=self._root,
            unit=UNITS.get(self._quantity, aircraft.units.speed),
        )
        return (self._disc.figure,)

    def _spare(self) -> tuple[w.Widget, ...]:
        return self._disc.spare

    def _draw(self, answers: Answers) -> StillParts:
        solution, wind = self._solution(answers), self._wind
        speed = solution.trim.elements(self._radii, _AZIMUTHS).speed[0]
        azimuths, radii = reversed_region(self._radii, _AZIMUTHS, speed, self._root)
        if self._quantity == SPEED:
            field, along = self._speed_field(solution, answers.aircraft.units.speed, speed, radii)
            steps = self._levels
        else:
            field = field_of(self._quantity, solution, self._root, wind.turn(self._rotation))
            along = np.stack([field.along(psi) for psi in self._places(solution).tolist()], axis=1)
            steps = LEVELS[self._quantity]
        self._disc.update(
            field.radii, field.azimuths, field.values, steps, reversed_azimuths=azimuths, reversed_radii=radii,
            wind_from_deg=None if solution.tas == 0.0 else wind.bearing_deg,
        )  # fmt: skip
        caption = " ".join(part for part in (self._side(answers, solution), field.caption) if part)
        alt = f"Rotor disc from above, nose up. {caption}"
        return StillParts(
            title=field.title, caption=caption, alt=alt, inputs=self._inputs(answers, solution),
            drawings=(Drawing(self._disc.figure, field.title, alt),),
            table=self._table(field, along, solution), notes=(*field.notes, *self._turned_notes()),
        )  # fmt: skip

    def _solution(self, answers: Answers) -> Solution:
        wind = self._wind
        if wind.as_flown:
            return answers.solution
        speed = answers.solution.tas if wind.speed is None else wind.speed
        return solve_in_wind(answers.aircraft, answers.condition, wind.bearing, speed)

    # --- words ---

    def _for_words(self, answers: Answers) -> str:
        if self._wind.as_flown:
            return super()._for_words(answers)
        still_air = words.sentence(answers.aircraft, answers.condition.changed(ias=None))
        return f"{still_air}, relative wind {self._blows(answers, self._solution(answers))}"

    def _inputs(self, answers: Answers, solution: Solution) -> tuple[tuple[str, str], ...]:
        if self._wind.as_flown:
            return words.inputs(answers.aircraft, answers.condition)
        stated = words.inputs(answers.aircraft, answers.condition.changed(ias=None))
        return (*stated, ("Relative wind", self._blows(answers, solution)))

    def _blows(self, answers: Answers, solution: Solution) -> str:
        return self._wind.words(answers.aircraft, solution.tas)

    def _side(self, answers: Answers, solution: Solution) -> str:
        """From which side, and over what of the aircraft the blade advances; nothing in plain forward flight."""
        wind = self._wind
        if wind.as_flown:
            return ""
        blows = f"Relative wind {self._blows(answers, solution)}"
        if solution.tas == 0.0:
            return f"{blows}: no side advances."
        advancing, _, retreating, _ = (wind.over(psi, self._rotation) for psi in self._places(solution))
        return f"{blows}: the blade advances over the {advancing} and retreats over the {retreating}."

    def _turned_notes(self) -> tuple[str, ...]:
        if self._wind.as_flown:
            return ()
        return (
            "Trimmed as in forward flight, turned to the wind: the disc tilts into it. The airframe's drag is taken as "
            "from ahead, whatever the side; tail rotor and downwash on the airframe are not computed.",
            "What wind and how fast a sideward or rearward flight are permitted, the flight manual says; this picture "
            "does not.",
        )

    def _places(self, solution: Solution) -> Floats:
        """The azimuths [rad] of the table's rows, 0 up to a whole turn; in still air those of the aircraft."""
        turn = self._wind.turn(self._rotation) if solution.tas else 0.0
        return np.asarray((_QUARTERS + turn) % (2.0 * np.pi))

    def _speed_field(self, solution: Solution, unit: str, speed: Floats, reach: Floats) -> tuple[Field, Floats]:
        """The speed normal to the blade, from what was found of it [m/s] and of the reversed flow's reach, in words;
        and the same along the four blades of the table, (radii, 4)."""
        exact = solution.trim.elements(self._radii, self._places(solution)).speed[0]
        along = np.asarray(units.from_si(exact, "speed", unit), dtype=np.float64)
        tips = [units.show_number(tip) for tip in along[-1].tolist()]
        behind = "Nowhere outside the root does the air come from behind the blade."
        if reach.size:
            behind = (
                f"Out to {units.show_number(100.0 * reach.max())} % of the radius the air comes from behind the blade."
            )
        caption = (
            f"The advancing tip meets {tips[0]} {unit}, the retreating tip {tips[2]} {unit} (true). {behind}"
            if solution.tas
            else f"Every tip meets {tips[0]} {unit} (true)."
        )
        note = (
            f"Rotor model, trimmed: angle of attack at the retreating tip {words.angle(solution.tip_angle_deg)}, "
            f"advance ratio {units.show_number(solution.advance_ratio, 2)}, "
            f"advancing-tip Mach number {units.show_number(solution.advancing_mach, 2)}."
        )
        shown = np.asarray(units.from_si(speed, "speed", unit), dtype=np.float64)
        field = Field(
            self._radii, _AZIMUTHS, shown, "Speed at the blades", caption, f"Speed normal to the blade, {unit} true",
            (note,), 0, f" {unit}",
        )  # fmt: skip
        return field, along

    def _table(self, field: Field, along: Floats, solution: Solution) -> Table:
        shares = np.minimum((0.5, 0.75, 1.0), field.radii[-1])
        header = ("Blade over the", *(f"{units.show_number(100.0 * share)} % radius" for share in shares.tolist()))
        rows = []
        names = _TURNED if self._wind.bearing_deg else _IN_FORWARD_FLIGHT
        if solution.tas == 0.0:
            names = _NO_SIDE
        for name, psi, values in zip(names, self._places(solution).tolist(), along.T, strict=True):
            if names is _TURNED:
                name = f"{name}, {units.show_number(math.degrees(psi))}°"
            at = np.interp(shares, field.radii, values)
            rows.append((name, *(field.shown(value) for value in at.tolist())))
        return Table(header, tuple(rows), field.table_caption)
