"""Tables that show a whole operation at once: what sets the answer where, and masses along a leg."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Final

from briefkit.aircraft.model import Aircraft, Stated
from briefkit.aircraft.operation import FleetEntry, WorkArea
from briefkit.envelope.condition import Condition
from briefkit.envelope.equivalent import EquivalentVne, equivalent_vne, equivalent_vnes
from briefkit.errors import Reason, Refusal, SetBy

_SAID: Final = (Reason.NONE, Reason.BEYOND_CHART)


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


@dataclass(frozen=True)
class SetByDay:
    """One work area and day of the same table, masses across: `below` [the type's unit] and `set_by` of each.

    `set_by` is None where there is no figure; `reason` then says why, and `refusal` is the first such sentence of the
    day that is not simply beyond the chart.
    """

    area: str
    oat: float
    below: tuple[float, ...]
    set_by: tuple[SetBy | None, ...]
    reason: tuple[Reason, ...]
    refusal: str


def set_by_table(aircraft: Aircraft, fleet: FleetEntry, areas: tuple[WorkArea, ...]) -> tuple[SetByRow, ...]:
    """What sets the answer over work areas, coldest and hottest day, and masses."""
    rows = []
    for area, day, oat in _days(areas):
        for mass, one in zip(fleet.masses, _across(fleet, area, oat), strict=True):
            try:
                rows.append(SetByRow(area.name, day, oat, mass, equivalent_vne(aircraft, one), ""))
            except Refusal as refusal:
                rows.append(SetByRow(area.name, day, oat, mass, None, str(refusal)))
    return tuple(rows)


def set_by_days(aircraft: Aircraft, fleet: FleetEntry, areas: tuple[WorkArea, ...]) -> tuple[SetByDay, ...]:
    """The same in one batch, a line for each work area and day; only a refused day is asked again, for its sentence."""
    days = _days(areas)
    asked = [one for area, _, oat in days for one in _across(fleet, area, oat)]
    answers = equivalent_vnes(aircraft, asked, upper=False)
    found, count = [], len(fleet.masses)
    for number, (area, _, oat) in enumerate(days):
        part = slice(number * count, (number + 1) * count)
        reasons = tuple(answers.reason[part])
        set_by = tuple(None if why else by for why, by in zip(reasons, answers.set_by[part], strict=True))
        refused = [one for one, why in zip(asked[part], reasons, strict=True) if why not in _SAID]
        refusal = _refusal(aircraft, refused[0]) if refused else ""
        found.append(SetByDay(area.name, oat, tuple(answers.below_vne[part].tolist()), set_by, reasons, refusal))
    return tuple(found)


def _days(areas: tuple[WorkArea, ...]) -> list[tuple[WorkArea, str, float]]:
    return [
        (area, day, end.value)
        for area in areas
        for day, end in (("coldest", area.low_temperature), ("hottest", area.high_temperature))
    ]


def _across(fleet: FleetEntry, area: WorkArea, oat: float) -> list[Condition]:
    """Every mass at the briefed bank and the stated climb, at the area's highest pressure altitude."""
    return [
        Condition.si(
            mass=mass.value, pressure_altitude=area.high_altitude.value, oat=oat,
            load_factor=1.0 / math.cos(fleet.brief_bank.value), climb=0.0 if fleet.climb is None else fleet.climb.value,
            mass_spread=fleet.mass_spread, oat_spread=fleet.temperature_spread,
        )
        for mass in fleet.masses
    ]  # fmt: skip


def _refusal(aircraft: Aircraft, one: Condition) -> str:
    try:
        equivalent_vne(aircraft, one)
    except Refusal as refusal:
        return str(refusal)
    raise AssertionError("a member of a batch was refused and alone it is not")


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
