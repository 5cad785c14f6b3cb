"""The rotor-disc speed map: what each part of each blade meets, seen from above with the nose up the page."""

from __future__ import annotations

from typing import Final

import bqplot
import ipywidgets as w
import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope.condition import Condition
from briefkit.figures.disc import DiscFigure, levels_for, reversed_region
from briefkit.figures.still import Drawing, StillParts, Table
from briefkit.widgets import words
from briefkit.widgets.answers import Answers
from briefkit.widgets.disc_quantities import LEVELS, SPEED, UNITS, checked, field_of
from briefkit.widgets.exhibit import Exhibit

Floats = NDArray[np.float64]

# Fixed steps for a type up to this multiple of its tip speed, so that a colour means the same at every condition.
_COVERED: Final = 1.35
_AZIMUTHS: Final = np.arange(24) * (2.0 * np.pi / 24)
_PLACES: Final = (("advancing side", 6), ("nose", 12), ("retreating side", 18), ("tail", 0))


class DiscMap(Exhibit):
    """One quantity over the disc, with the reversed-flow region outlined.

    `DiscMap(aircraft, condition)` is fixed, `DiscMap(live)` follows. The condition needs an airspeed. `quantity` is
    "speed" (normal to the blade, true), "Mach", "angle of attack" or "angle over stall"; another is refused.
    """

    def __init__(self, source: object, condition: Condition | None = None, *, quantity: str = SPEED) -> None:
        self._quantity = checked(quantity)
        super().__init__(source, condition)

    def _build(self, aircraft: Aircraft) -> tuple[bqplot.Figure, ...]:
        rotor = aircraft.rotor
        self._root = rotor.root_cutout.value
        self._radii = np.linspace(self._root, 1.0, 13)
        fastest = float(units.from_si(_COVERED * rotor.tip_speed, "speed", aircraft.units.speed))
        self._levels = levels_for(0.0, fastest)
        self._disc = DiscFigure(
            blades=rotor.blades,
            rotation=-1 if aircraft.mirrored else 1,
            root_cutout=self._root,
            unit=UNITS.get(self._quantity, aircraft.units.speed),
        )
        return (self._disc.figure,)

    def _spare(self) -> tuple[w.Widget, ...]:
        return self._disc.spare

    def _draw(self, answers: Answers) -> StillParts:
        aircraft, solution = answers.aircraft, answers.solution
        elements = solution.trim.elements(self._radii, _AZIMUTHS)
        speed = np.asarray(units.from_si(elements.speed[0], "speed", aircraft.units.speed))
        azimuths, radii = reversed_region(self._radii, _AZIMUTHS, speed, self._root)
        if self._quantity != SPEED:
            return self._draw_field(answers, azimuths, radii)
        self._disc.update(self._radii, _AZIMUTHS, speed, self._levels, reversed_azimuths=azimuths, reversed_radii=radii)
        unit = aircraft.units.speed
        tips = {name: units.show_number(speed[-1, column]) for name, column in _PLACES}
        behind = "Nowhere outside the root does the air come from behind the blade."
        if radii.size:
            behind = (
                f"Out to {units.show_number(100.0 * radii.max())} % of the radius the air comes from behind the blade."
            )
        caption = (
            f"The advancing tip meets {tips['advancing side']} {unit}, the retreating tip {tips['retreating side']} "
            f"{unit} (true). {behind}"
        )
        title = "Speed at the blades"
        return StillParts(
            title=title,
            caption=caption,
            alt=f"Rotor disc from above, nose up. {caption}",
            inputs=words.inputs(aircraft, answers.condition),
            drawings=(Drawing(self._disc.figure, title, f"Rotor disc from above, nose up. {caption}"),),
            table=self._table(speed, unit),
            notes=(
                f"Rotor model, trimmed: angle of attack at the retreating tip {words.angle(solution.tip_angle_deg)}, "
                f"advance ratio {units.show_number(solution.advance_ratio, 2)}, "
                f"advancing-tip Mach number {units.show_number(solution.advancing_mach, 2)}.",
            ),
        )

    def _draw_field(self, answers: Answers, reversed_azimuths: Floats, reversed_radii: Floats) -> StillParts:
        """Another quantity than speed."""
        field = field_of(self._quantity, answers.solution, self._root)
        self._disc.update(
            field.radii, field.azimuths, field.values, LEVELS[self._quantity],
            reversed_azimuths=reversed_azimuths, reversed_radii=reversed_radii,
        )  # fmt: skip
        shares = np.minimum((0.5, 0.75, 1.0), field.radii[-1])
        header = ("Blade over the", *(f"{units.show_number(100.0 * share)} % radius" for share in shares.tolist()))
        rows = []
        for name, column in _PLACES:
            along = np.interp(shares, field.radii, field.values[:, column * field.azimuths.size // _AZIMUTHS.size])
            rows.append((name, *(field.shown(value) for value in along.tolist())))
        alt = f"Rotor disc from above, nose up. {field.caption}"
        return StillParts(
            title=field.title, caption=field.caption, alt=alt,
            inputs=words.inputs(answers.aircraft, answers.condition),
            drawings=(Drawing(self._disc.figure, field.title, alt),),
            table=Table(header, tuple(rows), field.table_caption), notes=field.notes,
        )  # fmt: skip

    def _table(self, speed: Floats, unit: str) -> Table:
        shares = (0.5, 0.75, 1.0)
        header = ("Blade over the", *(f"{units.show_number(100.0 * share)} % radius" for share in shares))
        rows = []
        for name, column in _PLACES:
            along = np.interp(shares, self._radii, speed[:, column])
            rows.append((name, *(f"{units.show_number(value)} {unit}" for value in along.tolist())))
        return Table(header, tuple(rows), f"Speed normal to the blade, {unit} true")
