"""Legs of two revisions: what a crew is told of the mass along them, and the burn by which it falls.

Along a leg the lines of section 2 become lighter, so what makes the aircraft lighter sooner is less conservative: a
smaller take-off mass, a larger burn at its lower end, a leg that is new. Legs are told apart by their names.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from briefkit import units
from briefkit.aircraft.legs import Leg
from briefkit.aircraft.model import Stated
from briefkit.brief.identity import Brief

_BURN = "fuel flow"


def burn_at_least(burn: Stated) -> Stated:
    """The burn's lower end [kg/h], the one that counts along a leg; its text with the spread, in the unit as typed."""
    if not burn.spread:
        return replace(burn, value=units.from_si(burn.value, _BURN, "kg/h"))
    unit = units.read_with_unit(burn.text, _BURN)[1]
    spread, least = (units.from_si(end, _BURN, unit) for end in (burn.spread, burn.value - burn.spread))
    text = f"{burn.text}, give or take {spread:,.4g} (at least {least:,.4g} {unit})"
    return Stated(units.from_si(burn.value - burn.spread, _BURN, "kg/h"), text, burn.source)


def figures_of(leg: Leg) -> Iterator[tuple[str, Stated, int]]:
    """(name, figure, direction that is safer: 1 higher, -1 lower, 0 neither)"""
    yield "take-off mass", leg.take_off_mass, 1
    yield "fuel", leg.fuel, 0  # with the same mass it moves no line, only the hour the leg ends
    yield "reserve", leg.reserve, 1  # so does it, but less kept back is less conservative by itself


def legs_of(brief: Brief) -> dict[str, Leg]:
    """The legs of the brief's fleet entry by name, a name that comes again with its number; of every work area."""
    found: dict[str, Leg] = {}
    fleet = brief.operation.entry_for(brief.aircraft)
    for leg in brief.operation.legs:
        if fleet is not None and leg.fleet == fleet.key:
            again = sum(one.name == leg.name for one in found.values())
            found[f"leg {leg.name} ({again + 1})" if again else f"leg {leg.name}"] = leg
    return found


def on_page(brief: Brief, leg: Leg | None) -> bool:
    """Whether the leg is flown in the work area the brief is for."""
    return leg is not None and leg.work_area == brief.identity.work_area


def whole(brief: Brief, leg: Leg | None) -> str:
    """A leg in a line; "" for none."""
    if leg is None:
        return ""
    if not on_page(brief, leg):
        return f"in {leg.work_area}, not on this page"
    masses = f"{leg.take_off_mass.text} at take-off, fuel {leg.fuel.text}, reserve {leg.reserve.text}"
    return f"{masses}, in {leg.work_area}" + (f" ({leg.source})" if leg.source else "")
