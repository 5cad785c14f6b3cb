"""The operation file (TOML): work areas, fleet and approval policy of one operator, as plain values in SI.

The folder that holds `operation.toml` is the operator folder; a brief reads nothing outside it.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from itertools import pairwise
from pathlib import Path
from typing import Annotated, ClassVar, Final

from pydantic import Field

from briefkit.aircraft import legs as legs_of
from briefkit.aircraft.legs import Flown, FuelBurn, Leg, LegEntry
from briefkit.aircraft.make import needed
from briefkit.aircraft.model import Aircraft, Stated
from briefkit.aircraft.tables import Airspeed, Height, Mass, Pair, Temperature, Text
from briefkit.physics import atmosphere
from briefkit.reading.document import Document, Table
from briefkit.reading.quantity import Typed, quantity, quoted

OPERATION_FILE: Final = "operation.toml"
FOR_INFORMATION: Final = "for information"
_COMPANY_LIMIT = re.compile(r"company limit, \S.*")
_NAME = re.compile(r"[a-z0-9][a-z0-9_-]*")


@dataclass(frozen=True)
class WorkArea:
    """A block of pressure altitudes [m] and temperatures [K] a brief is made for.

    Where the author typed elevations and a lowest QNH, the pressure altitudes are those on that QNH and their text says
    so ("5,210 ft on QNH 995 hPa").
    """

    key: str
    name: str
    low_altitude: Stated
    high_altitude: Stated
    low_temperature: Stated
    high_temperature: Stated
    source: str


@dataclass(frozen=True)
class FleetEntry:
    """What the company flies with one aircraft file: masses [kg] heaviest first, the one briefed bank [rad], spreads.

    `aircraft` is the stem of its file and `configuration` the one the entry is for, "" for every one without an entry
    of its own. `status` is "for information" or "company limit, <reference>". Speeds are indicated [m/s], `climb`
    [m/s], `mass_spread` [kg], `temperature_spread` [K], `fuel_burn` [kg/s].
    """

    key: str
    masses: tuple[Stated, ...]
    brief_bank: Stated
    status: str
    minimum_manoeuvring_speed: Stated | None
    imc_speed: Stated | None
    climb: Stated | None
    mass_spread: float
    temperature_spread: float
    source: str
    aircraft: str = ""
    configuration: str = ""
    fuel_burn: Stated | None = None


@dataclass(frozen=True)
class Policy:
    """Who must sign: at least `people` distinct staff codes, never fewer than two, the approver never the preparer.

    `approvers` are the staff codes that may approve, `limit_approvers` those that may approve a page whose status is a
    company limit; empty where anyone may.
    """

    people: int = 3
    validity_months: int = 24
    approvers: tuple[str, ...] = ()
    limit_approvers: tuple[str, ...] = ()


@dataclass(frozen=True)
class Operation:
    """One operator as its file states it. `documents` are the operator's manuals above a brief, in order."""

    name: str
    source: str
    documents: tuple[str, ...]
    policy: Policy
    work_areas: dict[str, WorkArea]
    fleet: dict[str, FleetEntry]
    invented: str = ""
    file: str = ""
    data_hash: str = ""
    sources: tuple[tuple[str, str], ...] = ()
    unanswered: tuple[str, ...] = ()
    legs: tuple[Leg, ...] = ()

    def entry_for(self, aircraft: Aircraft) -> FleetEntry | None:
        """The fleet entry for an aircraft in its configuration: its own, else the one for all others of the file."""
        mine = [entry for entry in self.fleet.values() if entry.aircraft == Path(aircraft.file).stem]
        own = [entry for entry in mine if entry.configuration == aircraft.configuration]
        return next(iter(own + [entry for entry in mine if not entry.configuration]), None)


class _OperatorTable(Table):
    required: ClassVar[tuple[str, ...]] = ("name", "documents")
    name: Text | None = None
    documents: Annotated[list[Text], Field(min_length=1)] | None = None
    source: str = ""


class _PolicyTable(Table):
    people: Annotated[int, Field(ge=2, le=3)] = 3
    validity_months: Annotated[int, Field(ge=1, le=60)] = 24
    approvers: list[Text] | None = None
    limit_approvers: list[Text] | None = None


class _AreaTable(Table):
    required: ClassVar[tuple[str, ...]] = ("name", "temperatures")
    name: Text | None = None
    pressure_altitudes: Annotated[list[Height], Pair] | None = None
    elevations: Annotated[list[Height], Pair] | None = None
    lowest_qnh: Annotated[Typed | None, quantity("pressure", 85_000.0, 108_500.0)] = None
    temperatures: Annotated[list[Temperature], Pair] | None = None
    source: str = ""


class _FleetTable(Table):
    required: ClassVar[tuple[str, ...]] = ("masses", "brief_bank", "status")
    masses: Annotated[list[Mass], Field(min_length=1)] | None = None
    brief_bank: Annotated[Typed | None, quantity("angle", math.radians(5.0), math.radians(60.0))] = None
    status: Text | None = None
    aircraft: Text | None = None
    configuration: Text | None = None
    minimum_manoeuvring_speed: Airspeed = None
    imc_speed: Airspeed = None
    climb: Annotated[Typed | None, quantity("vertical speed", 0.0, 15.0)] = None
    fuel_burn: FuelBurn = None
    mass_spread: Annotated[Typed | None, quantity("mass", 0.0, 500.0)] = None
    temperature_spread: Annotated[Typed | None, quantity("temperature difference", 0.0, 15.0)] = None
    source: str = ""


def load_operation(path: Path | str) -> Operation:
    """The operation of `operation.toml`, or of the folder that holds it.

    Raises `FaultyFile` with every fault: file, line, key, what was read, what is permitted, what to write instead.
    """
    path = Path(path)
    document = Document(path / OPERATION_FILE if path.is_dir() else path)
    document.tables("", ("operator", "work_areas", "fleet"), ("invented", "policy", legs_of.KEY))
    operator = document.table("operator", _OperatorTable)
    policy = document.table("policy", _PolicyTable) or _PolicyTable()
    areas = document.named("work_areas", _AreaTable)
    fleet = document.named("fleet", _FleetTable)
    legs = document.entries(legs_of.KEY, LegEntry)
    invented = document.data.get("invented", "")
    if not isinstance(invented, str):
        document.fault("invented", quoted(invented), "a sentence in quotes")
    for key, area in areas.items():
        _check_area(document, key, area)
    for key, entry in fleet.items():
        _check_entry(document, key, entry)
    legs_of.check(document, legs, {key: _flown(entry) for key, entry in fleet.items()}, areas)
    document.raise_faults()
    operator = needed(operator)
    flown = {key: _entry(key, entry) for key, entry in fleet.items()}
    return Operation(
        name=needed(operator.name),
        source=operator.source,
        documents=tuple(needed(operator.documents)),
        policy=Policy(
            policy.people,
            policy.validity_months,
            tuple(policy.approvers or ()),
            tuple(policy.limit_approvers or ()),
        ),
        work_areas={key: _area(key, area) for key, area in areas.items()},
        fleet=flown,
        invented=str(invented),
        file=document.path.name,
        data_hash=document.data_hash,
        sources=(
            ("operator", operator.source),
            *((f"work_areas.{key}", area.source) for key, area in areas.items()),
            *((f"fleet.{key}", entry.source) for key, entry in fleet.items()),
            *((key, leg.source) for key, leg in legs),
        ),
        unanswered=document.unanswered(),
        legs=tuple(legs_of.build(leg, needed(flown[needed(leg.fleet)].fuel_burn)) for _, leg in legs),
    )


def _check_area(document: Document, key: str, area: _AreaTable) -> None:
    place = f"work_areas.{key}"
    if not _NAME.fullmatch(key):
        document.fault(place, key, "a key of small letters, digits, - and _", "give the full name in name = ...")
    if (area.elevations is None) == (area.pressure_altitudes is None):
        permitted = "either pressure_altitudes, or elevations with lowest_qnh"
        if not document.has_fault_below(place):
            document.fault(place, "both" if area.elevations else "neither", permitted, "give one of the two")
    elif (area.elevations is None) != (area.lowest_qnh is None) and not document.has_fault_below(place):
        read = "elevations without lowest_qnh" if area.elevations else "lowest_qnh without elevations"
        permitted = "elevations and lowest_qnh together: the same ground lies higher on a low QNH"
        document.fault(place, read, permitted)
    for name in ("pressure_altitudes", "elevations", "temperatures"):
        pair: list[Typed] | None = getattr(area, name)
        if pair and needed(pair[0].value) > needed(pair[1].value):
            document.fault(f"{place}.{name}", f"{pair[0].text}, {pair[1].text}", "the lower, then the higher")
        _check_one_unit(document, f"{place}.{name}", pair or [])


def _check_one_unit(document: Document, place: str, values: list[Typed]) -> None:
    """Values of one list in two units: one of them is a slip."""
    spelled = {"°C": "degC", "C": "degC"}
    given = [spelled.get(typed.unit, typed.unit) for typed in values]
    other = next((typed for typed, unit in zip(values, given, strict=True) if unit != given[0]), None)
    if other is not None:
        document.fault(place, f"{values[0].text}, {other.text}", "one unit in all", "correct the one that is wrong")


def _check_entry(document: Document, key: str, entry: _FleetTable) -> None:
    place = f"fleet.{key}"
    masses = [typed for typed in entry.masses or [] if typed]
    for number, (above, mass) in enumerate(pairwise(masses), start=2):
        if needed(mass.value) >= needed(above.value):
            permitted = f"less than the one before it, {above.text}"
            document.fault(f"{place}.masses, value {number}", mass.text, permitted, "heaviest first, each once")
    _check_one_unit(document, f"{place}.masses", masses)
    if entry.status and entry.status != FOR_INFORMATION and not _COMPANY_LIMIT.fullmatch(entry.status):
        permitted = f'"{FOR_INFORMATION}", or "company limit, " and its reference'
        document.fault(f"{place}.status", quoted(entry.status), permitted, 'like "company limit, OM-B 2.3"')


def _flown(entry: _FleetTable) -> Flown:
    return Flown(next((mass for mass in entry.masses or [] if mass), None), entry.fuel_burn)


def _stated(typed: Typed | None, source: str) -> Stated:
    typed = needed(typed)
    return Stated(needed(typed.value), typed.text, typed.source or source, typed.spread or 0.0)


def _area(key: str, table: _AreaTable) -> WorkArea:
    if table.elevations is not None:
        qnh = needed(table.lowest_qnh)
        low, high = (
            Stated(
                float(atmosphere.pressure_altitude_from_qnh(needed(needed(typed).value), needed(qnh.value))),
                f"{needed(typed).text} on QNH {qnh.text}",
                table.source,
            )
            for typed in table.elevations
        )
    else:
        low, high = (_stated(typed, table.source) for typed in needed(table.pressure_altitudes))
    cold, hot = (_stated(typed, table.source) for typed in needed(table.temperatures))
    return WorkArea(key, needed(table.name), low, high, cold, hot, table.source)


def _entry(key: str, table: _FleetTable) -> FleetEntry:
    def optional(typed: Typed | None) -> Stated | None:
        return None if typed is None else _stated(typed, table.source)

    return FleetEntry(
        key=key,
        masses=tuple(_stated(typed, table.source) for typed in needed(table.masses)),
        brief_bank=_stated(table.brief_bank, table.source),
        status=needed(table.status),
        minimum_manoeuvring_speed=optional(table.minimum_manoeuvring_speed),
        imc_speed=optional(table.imc_speed),
        climb=optional(table.climb),
        mass_spread=(table.mass_spread.value or 0.0) if table.mass_spread else 0.0,
        temperature_spread=(table.temperature_spread.value or 0.0) if table.temperature_spread else 0.0,
        source=table.source,
        aircraft=table.aircraft or key,
        configuration=table.configuration or "",
        fuel_burn=optional(table.fuel_burn),
    )
