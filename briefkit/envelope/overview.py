"""Tables that show a whole operation at once: what sets the answer where, and masses along a leg."""

from __future__ import annotations

import math
from dataclasses import dataclass

from briefkit.aircraft.model import Aircraft, Stated
from briefkit.aircraft.operation import FleetEntry, WorkArea
from briefkit.envelope.condition import Condition
from briefkit.envelope.equivalent import EquivalentVne, equivalent_vne
from briefkit.errors import Refusal


@dataclass(frozen=True)
class SetByRow:
    """One work area, day and mass at the briefed bank, at the area's highest pressure altitude.

    `answer` is None where the tool refuses, and `refusal` then says why.
    """

    area: str
    day: str
    oat: float
    mass: Stated
    answer: EquivalentVne | None
    refusal: str


def set_by_table(aircraft: Aircraft, fleet: FleetEntry, areas: tuple[WorkArea, ...]) -> tuple[SetByRow, ...]:
    """What sets the answer over work areas, coldest and hottest day, and masses."""
    load = 1.0 / math.cos(fleet.brief_bank.value)
    rows = []
    for area in areas:
        days = (("coldest", area.low_temperature.value), ("hottest", area.high_temperature.value))
        for day, oat in days:
            for mass in fleet.masses:
                one = Condition.si(
                    mass=mass.value, pressure_altitude=area.high_altitude.value, oat=oat, load_factor=load,
                    mass_spread=fleet.mass_spread, oat_spread=fleet.temperature_spread,
                )  # fmt: skip
                try:
                    rows.append(SetByRow(area.name, day, oat, mass, equivalent_vne(aircraft, one), ""))
                except Refusal as refusal:
                    rows.append(SetByRow(area.name, day, oat, mass, None, str(refusal)))
    return tuple(rows)


def masses_by_hour(take_off: float, fuel: float, burn: float, reserve: float = 0.0) -> tuple[tuple[float, float], ...]:
    """Hours from take-off and the mass [kg] at each, down to the reserve.

    `take_off`, `fuel` and `reserve` in kg, `burn` in kg/h. The last point is when the reserve is reached. Raises
    ValueError for a burn that is not above zero, or more reserve than fuel.
    """
    if not (burn > 0.0 and 0.0 <= reserve <= fuel < take_off):
        raise ValueError("burn must be above zero, and the reserve within the fuel, and the fuel within the mass")
    end = (fuel - reserve) / burn
    hours = [float(hour) for hour in range(math.floor(end) + 1)]
    if end > hours[-1]:
        hours.append(end)
    return tuple((hour, take_off - burn * hour) for hour in hours)
