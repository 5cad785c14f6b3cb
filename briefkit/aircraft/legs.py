"""Legs of the operation file: take-off mass, fuel and what is burnt an hour, for the masses along them.

[fleet.pelquill-2t]
fuel_burn = { value = "66 lb/h", spread = "10 %", source = "flight manual 5-10 rev 4" }

[[legs]]
name = "Round the plateau"
fleet = "pelquill-2t"
work_area = "vellmark"
take_off_mass = "2,006 lb"
fuel = "183 lb"
reserve = "33 lb"
source = "OM-C 4.2 rev 9"
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Annotated, ClassVar, Final

from briefkit import units
from briefkit.aircraft.make import needed, stated
from briefkit.aircraft.model import Stated
from briefkit.aircraft.tables import Mass, Text
from briefkit.reading.document import Document, Table
from briefkit.reading.quantity import Typed, did_you_mean, quantity, quoted

KEY: Final = "legs"
LONGEST: Final = 12.0 * 3600.0  # s
_HOUR: Final = 3600.0

FuelBurn = Annotated[Typed | None, quantity("fuel flow", 5.0 / _HOUR, 3_000.0 / _HOUR)]
Fuel = Annotated[Typed | None, quantity("mass", 1.0, 10_000.0)]


@dataclass(frozen=True)
class Leg:
    """One leg of a fleet entry in a work area: masses [kg], `burn` [kg/s] with its spread."""

    name: str
    fleet: str
    work_area: str
    take_off_mass: Stated
    fuel: Stated
    reserve: Stated
    burn: Stated
    source: str


class LegEntry(Table):
    required: ClassVar[tuple[str, ...]] = ("name", "fleet", "work_area", "take_off_mass", "fuel", "reserve")
    name: Text | None = None
    fleet: Text | None = None
    work_area: Text | None = None
    take_off_mass: Mass = None
    fuel: Fuel = None
    reserve: Fuel = None
    source: str = ""


@dataclass(frozen=True)
class Flown:
    """What a leg needs to know of its fleet entry: the heaviest mass and the burn, as typed."""

    heaviest: Typed | None
    burn: Typed | None


def check(
    document: Document, entries: Iterable[tuple[str, LegEntry]], fleet: Mapping[str, Flown], areas: Iterable[str]
) -> None:
    """Faults of the legs: keys that do not exist, a burn that is missing, masses that contradict one another."""
    areas = list(areas)
    for key, leg in entries:
        if leg.work_area and leg.work_area not in areas:
            document.fault(
                f"{key}.work_area", quoted(leg.work_area), ", ".join(areas), did_you_mean(leg.work_area, areas)
            )
        flown = fleet.get(leg.fleet or "")
        if leg.fleet and flown is None:
            document.fault(f"{key}.fleet", quoted(leg.fleet), ", ".join(fleet), did_you_mean(leg.fleet, fleet))
        elif flown is not None and leg.fleet and not document.has_fault_below(key):
            _check_burn(document, key, leg, flown)
            _check_masses(document, key, leg, flown)


def build(entry: LegEntry, burn: Stated) -> Leg:
    """The frozen leg of an entry without faults."""
    mass, fuel, reserve = (stated(typed, entry.source) for typed in (entry.take_off_mass, entry.fuel, entry.reserve))
    return Leg(
        needed(entry.name), needed(entry.fleet), needed(entry.work_area), mass, fuel, reserve, burn, entry.source
    )


def _check_burn(document: Document, key: str, leg: LegEntry, flown: Flown) -> None:
    place = f"fleet.{leg.fleet}.fuel_burn"
    if document.has_fault_below(place):
        return
    if flown.burn is None:
        remedy = 'add fuel_burn = { value = "66 lb/h", spread = "10 %", source = "..." } to it'
        document.fault(f"{key}.fleet", quoted(leg.fleet), "a fleet entry with fuel_burn", remedy)
    elif not flown.burn.spread:
        remedy = 'add spread = "...": along a leg the lower end counts, the heavier aircraft'
        read = "nothing" if flown.burn.spread is None else _spread_text(flown.burn)
        document.fault(f"{place}.spread", read, "the half-width you would bet on at 95 %", remedy)
    elif flown.burn.spread > 0.5 * needed(flown.burn.value):
        read = f"{_spread_text(flown.burn)} of {flown.burn.text}"
        document.fault(f"{place}.spread", read, "at most half of the burn", "look again at the unit")


def _spread_text(burn: Typed) -> str:
    """The half-width in the unit of the burn, to 0.1 of it: of a share, what it comes to."""
    spread = units.from_si(needed(burn.spread), "fuel flow", burn.unit)
    return f"{spread:,.1f} {burn.unit}".replace(".0 ", " ")


def _check_masses(document: Document, key: str, leg: LegEntry, flown: Flown) -> None:
    if leg.take_off_mass is None or leg.fuel is None or leg.reserve is None:
        return
    mass, fuel, reserve = (needed(typed.value) for typed in (leg.take_off_mass, leg.fuel, leg.reserve))
    if flown.heaviest is not None and mass > needed(flown.heaviest.value) * (1.0 + 1e-9):
        permitted = f"at most {flown.heaviest.text}, the heaviest of fleet.{leg.fleet}.masses"
        document.fault(f"{key}.take_off_mass", leg.take_off_mass.text, permitted)
    if fuel >= 0.6 * mass:
        permitted = f"less than six tenths of {leg.take_off_mass.text}"
        document.fault(f"{key}.fuel", leg.fuel.text, permitted, "look again at the unit")
    elif reserve >= fuel:
        document.fault(f"{key}.reserve", leg.reserve.text, f"less than the fuel, {leg.fuel.text}")
    elif flown.burn is not None and flown.burn.value and (fuel - reserve) / flown.burn.value > LONGEST:
        read = f"{leg.fuel.text} at {flown.burn.text}"
        document.fault(f"{key}.fuel", read, "at most 12 hours", "look again at the units of fuel and burn")
