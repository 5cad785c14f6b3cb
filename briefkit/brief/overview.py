"""Two tables of the analysis page: what sets the answer over all work areas, and the line of section 2 along a leg."""

from __future__ import annotations

import math
import re
from collections.abc import Iterable
from typing import Final

from briefkit import units
from briefkit.aircraft.legs import Leg
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.operation import FleetEntry, WorkArea
from briefkit.brief import words
from briefkit.brief.front import row_text
from briefkit.brief.pages import Grid, Ink, Section
from briefkit.envelope.overview import SetByDay, masses_by_hour, set_by_days
from briefkit.envelope.reductions import ReductionRow, ReductionTable, RowKind
from briefkit.errors import Reason, SetBy

_HOUR: Final = 3600.0
_VNE, _BEYOND, _NONE, _NO_TURN = "VNE", "beyond", "no figure", "no turn"
_MINUS: Final = re.compile(r"(?<![\w.])-(?=\d)")


def set_by_section(
    aircraft: Aircraft, fleet: FleetEntry, areas: Iterable[WorkArea], briefed: WorkArea, table: ReductionTable
) -> Section:
    """What sets the answer at the briefed bank: work areas and days down, masses across, at the top of each area.

    First the work area that is briefed as section 2 has it: a point may need less than the whole block, and nobody
    should find a smaller figure here without its larger one beside it.
    """
    bank, unit = words.degrees(fleet.brief_bank.value), aircraft.units.speed
    masses = [mass.text for mass in fleet.masses]
    rows: list[tuple[str, ...]] = [(f"{briefed.name}, all of it: section 2", *(_row_cell(row) for row in table.rows))]
    refused: dict[str, dict[str, list[str]]] = {}
    for day in set_by_days(aircraft, fleet, tuple(areas)):
        where = f"{day.area}, {words.temperature(day.oat)}"
        if day.refusal:
            refused.setdefault(day.refusal, {}).setdefault(day.area, []).append(words.temperature(day.oat))
        if any(day.set_by) or Reason.BEYOND_CHART in day.reason:
            rows.append((where, *_cells(aircraft, day)))
    points = [f"No figure, {_listed(where)}: {_set(refusal)}." for refusal, where in refused.items()]
    step = words.knots(aircraft, aircraft.units.speed_step)
    key = (
        f"Figures: {unit} below VNE, set by the manual’s VNE at the equivalent level flight, rounded up to a step of "
        f"{step}. {_VNE}: the manual’s VNE sets it, nothing is taken off. {_BEYOND.capitalize()}: loaded beyond "
        f"the chart at {bank}."
    )
    after = (
        "Below the first line: points, the top of each work area on its coldest and its hottest day. A day between "
        "them can need more: what holds for a crew is section 2. The manual’s other speeds, and the floor, come first."
    )
    grid = Grid(("Where", *masses), tuple(rows), f"At {bank} of bank", Ink.COMPUTED)
    return Section(
        "What sets the answer where", before=(key,), grid=grid, points=tuple(points), after=(after,),
        sources=(aircraft.vne.source, fleet.source),
    )  # fmt: skip


def _row_cell(row: ReductionRow) -> str:
    if row.kind is RowKind.REDUCTION:
        return units.show_number(row.reduction)
    return {RowKind.VNE_LIMITS: _VNE, RowKind.UNDER_FLOOR: _NO_TURN}.get(row.kind, _BEYOND)


def _set(refusal: str) -> str:
    return _MINUS.sub("\u2212", refusal).replace("'", "’")


def _listed(where: dict[str, list[str]]) -> str:
    """ "Corrant Saddle work area at −10 °C and +22 °C; Ysbrane Point winter coast at −38 °C"."""
    return "; ".join(f"{area} at {' and '.join(days)}" for area, days in where.items())


def _cells(aircraft: Aircraft, day: SetByDay) -> tuple[str, ...]:
    cells = []
    for below, set_by, reason in zip(day.below, day.set_by, day.reason, strict=True):
        if set_by is None:
            cells.append(_BEYOND if reason is Reason.BEYOND_CHART else _NONE)
        elif set_by is SetBy.EQUIVALENT:
            cells.append(units.show_number(units.round_up(below, aircraft.units.speed_step)))
        else:
            cells.append(_VNE)
    return tuple(cells)


def leg_sections(
    aircraft: Aircraft, fleet: FleetEntry, area: WorkArea, table: ReductionTable, legs: Iterable[Leg]
) -> tuple[Section, ...]:
    """A section for each leg flown with this fleet entry in this work area."""
    mine = [leg for leg in legs if (leg.fleet, leg.work_area) == (fleet.key, area.key)]
    return tuple(_leg_section(aircraft, table, leg) for leg in mine)


def _leg_section(aircraft: Aircraft, table: ReductionTable, leg: Leg) -> Section:
    """Masses by hour with the line of section 2 that holds: no number that section 2 does not have."""
    spread = units.show(leg.burn.spread * _HOUR, "mass", aircraft.units.mass)
    before = (
        f"{leg.take_off_mass.text} at take-off, fuel {leg.fuel.text}, reserve {leg.reserve.text}; burn "
        f"{leg.burn.text}, give or take {spread} an hour ({leg.burn.source}).",
    )
    after = (
        "The mass is the most it can be then: the burn is taken at its lower end. Where less was burnt, the heavier "
        "line holds. Not an endurance.",
    )
    sources = (leg.source, leg.burn.source)
    if all(row.kind is RowKind.VNE_LIMITS for row in table.rows):
        nothing = f"{leg.name}: {before[0]} Nothing is taken off at any of its masses: VNE still limits."
        return Section("Fuel along a leg", before=(nothing,), sources=sources)
    rows = [_leg_row(aircraft, table, hour, mass) for hour, mass in leg_points(table, leg)]
    header = ("After take-off", "Mass, at most", "Line of section 2", "Slow to VNE less")
    caption = f"{leg.name}, down to the reserve"
    grid = Grid(header, tuple(rows), caption, Ink.COMPUTED, numbers=False)
    return Section("Fuel along a leg", before=before, grid=grid, after=after, sources=sources)


def leg_points(table: ReductionTable, leg: Leg) -> list[tuple[float, float]]:
    """Hours after take-off and the most the mass [kg] can be: every hour, each change of line, and the reserve.

    The hours end when the reserve is reached at the stated burn; the masses are those of the burn less its spread.
    """
    start, burn = leg.take_off_mass.value, leg.burn.value * _HOUR
    slow = burn - leg.burn.spread * _HOUR
    hours = [hour for hour, _ in masses_by_hour(start, leg.fuel.value, burn, leg.reserve.value)]
    changes = ((start - row.mass.value) / slow for row in table.rows)
    times = {round(hour, 6) for hour in (*hours, *(change for change in changes if 0.0 < change < hours[-1]))}
    return [(hour, start - slow * hour) for hour in sorted(times)]


def _leg_row(aircraft: Aircraft, table: ReductionTable, hour: float, mass: float) -> tuple[str, str, str, str]:
    slack = 1e-6 * mass
    row = [one for one in table.rows if one.mass.value >= mass - slack][-1]
    line = row.mass.text + (" or less" if row is table.rows[-1] else "")
    # A line begins where its own mass is reached; to the next whole minute, never earlier.
    minutes = math.ceil(round(hour * 60.0, 4))
    at = row.mass.text if abs(row.mass.value - mass) <= slack else words.mass(aircraft, mass)
    return _clock(minutes), at, line, row_text(aircraft, table, row)


def _clock(minutes: int) -> str:
    if minutes == 0:
        return "take-off"
    hours, rest = divmod(minutes, 60)
    return " ".join(part for part in (f"{hours}\u00a0h" if hours else "", f"{rest}\u00a0min" if rest else "") if part)
