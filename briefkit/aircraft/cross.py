"""Cross-checks of an aircraft file: plain functions over what could be read, each returning the faults it found.

What cannot be meant is a fault. What a manual could print, though it is rarely meant, is an entry
finding (findings.py).
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from typing import Final

from briefkit import units
from briefkit.aircraft import estimates
from briefkit.aircraft.chart_text import TypedChart
from briefkit.aircraft.make import needed
from briefkit.aircraft.model import Hub
from briefkit.aircraft.tables import LimitsTable, RotorTable, UnitsTable
from briefkit.errors import Fault
from briefkit.reading.quantity import Typed

_DENSITY: Final = units.SEA_LEVEL_PRESSURE / (units.GAS_CONSTANT * units.SEA_LEVEL_TEMPERATURE)


def limit_faults(limits: LimitsTable) -> list[Fault]:
    """Limits that contradict one another."""
    faults = []
    for low_key, low, high_key, high in (
        ("min_mass", limits.min_mass, "max_mass", limits.max_mass),
        ("min_temperature", limits.min_temperature, "max_temperature", limits.max_temperature),
    ):
        if low and high and _si(low) >= _si(high):
            faults.append(_fault(f"limits.{low_key}", low.text, f"less than {high_key}, {high.text}"))
    return faults + rotor_range_faults("limits", limits.rotor_on, limits.rotor_off)


def rotor_range_faults(table: str, on: list[Typed] | None, off: list[Typed] | None) -> list[Fault]:
    """Rotor-speed ranges the wrong way round, and one for power on without 100 %."""
    faults = []
    for key, pair in (("rotor_on", on), ("rotor_off", off)):
        if pair and _si(pair[0]) >= _si(pair[1]):
            faults.append(
                _fault(f"{table}.{key}", f"{pair[0].text} to {pair[1].text}", "the lower speed, then the higher")
            )
    if on and _si(on[0]) < _si(on[1]) and not _si(on[0]) <= 1.0 <= _si(on[1]):
        read = f"{on[0].text} to {on[1].text}"
        faults.append(_fault(f"{table}.rotor_on", read, "a range with 100 % in it", "is 100 % the speed of rotor.rpm?"))
    return faults


def hottest_faults(limits: LimitsTable) -> list[Fault]:
    """No limit of temperature at all: without one the chart's hottest column would count as permitted."""
    if limits.isa_deviation or limits.max_temperature:
        return []
    remedy = 'add isa_deviation = "35 degC" (above standard) or max_temperature = "40 degC", as the manual has it'
    return [_fault("limits.isa_deviation", "nothing", "isa_deviation or max_temperature", remedy)]


def rotor_faults(rotor: RotorTable) -> list[Fault]:
    """A hub whose numbers belong to another, and a tip speed no helicopter has."""
    faults = []
    if rotor.hub == "teetering":
        if rotor.blades is not None and rotor.blades != 2:
            faults.append(_fault("rotor.blades", str(rotor.blades), "2 with a teetering hub"))
        if rotor.hinge_offset and _si(rotor.hinge_offset) != 0.0:
            faults.append(_fault("rotor.hinge_offset", rotor.hinge_offset.text, '"0 %" with a teetering hub'))
        if rotor.flap_frequency and rotor.flap_frequency.value not in (None, 1.0):
            faults.append(_fault("rotor.flap_frequency", rotor.flap_frequency.text, '"1" with a teetering hub'))
    if rotor.hub == "hingeless" and rotor.flap_stop:
        faults.append(
            _fault("rotor.flap_stop", rotor.flap_stop.text, "no flap_stop with a hingeless hub", "leave it out")
        )
    if rotor.hub == "articulated" and rotor.hinge_offset is None:
        faults.append(
            _fault("rotor.hinge_offset", "nothing", "hinge_offset is needed with an articulated hub", "add it")
        )
    faults += _hinge_faults(rotor)
    if rotor.radius and rotor.rpm and not 150.0 <= (tip := _si(rotor.radius) * _si(rotor.rpm)) <= 260.0:
        remedy = "look again: the radius is half the diameter, rpm is that of the rotor at 100 %"
        faults.append(
            _fault(
                "rotor.rpm",
                f"{rotor.rpm.text} with radius {rotor.radius.text}, a tip speed of {tip:.0f} m/s",
                "150 to 260 m/s",
                remedy,
            )
        )
    return faults


def _hinge_faults(rotor: RotorTable) -> list[Fault]:
    """A flap hinge, or the equivalent one of a hingeless hub, outboard of where the blade begins."""
    cutout = rotor.root_cutout.value if rotor.root_cutout else None
    if cutout is None or rotor.hub not in ("articulated", "hingeless"):
        return []
    if rotor.hinge_offset and rotor.hinge_offset.value is not None:
        key, offset, read = "rotor.hinge_offset", rotor.hinge_offset.value, rotor.hinge_offset.text
    elif rotor.hub == "hingeless":
        typed = rotor.flap_frequency
        frequency = typed.value if typed and typed.value else estimates.flap_frequency(Hub.HINGELESS, 0.0).value
        key, offset = "rotor.flap_frequency", estimates.equivalent_hinge_offset(frequency)
        read = f"{frequency:g}, a hinge equivalent at {100.0 * offset:.1f} %"
    else:
        return []
    if offset <= cutout * (1.0 + 1e-9):
        return []
    permitted = f"a hinge inside the root cut-out, {needed(rotor.root_cutout).text}"
    return [_fault(key, read, permitted, "root_cutout is where the blade begins, from the rotor's centre")]


def loading_faults(rotor: RotorTable, limits: LimitsTable) -> list[Fault]:
    """A blade loading in the hover, CT/sigma at maximum mass, sea level, standard day, that no helicopter has."""
    parts = (limits.max_mass, rotor.blades, rotor.chord, rotor.radius, rotor.rpm)
    if None in parts or not limits.max_mass or not rotor.chord or not rotor.radius or not rotor.rpm or not rotor.blades:
        return []
    mass, chord, radius = _si(limits.max_mass), _si(rotor.chord), _si(rotor.radius)
    tip = radius * _si(rotor.rpm)
    loading = mass * units.GRAVITY / (_DENSITY * rotor.blades * chord * radius * tip**2)
    if 0.04 <= loading <= 0.12:  # common practice, no source; the invented types have 0.068 to 0.082
        return []
    read = f"{limits.max_mass.text} on {rotor.blades} blades of {rotor.chord.text}, CT/sigma {loading:.3f}"
    return [
        _fault(
            "limits.max_mass", read, "CT/sigma 0.04 to 0.12 in the hover at sea level", "kg or lb? rotor.chord in mm?"
        )
    ]


def unit_faults(key: str, typed: Iterable[tuple[str, str]], shown: UnitsTable) -> list[Fault]:
    """What is typed in another unit than the type's manual has: (key below `key`, unit as typed), one fault a key."""
    faults: dict[str, Fault] = {}
    for name, unit in typed:
        for quantity, meant in (("speed", shown.speed), ("height", shown.height), ("mass", shown.mass)):
            if unit in units.permitted_units(quantity) and meant and unit != meant:
                permitted = f"{meant}, as units.{quantity} says"
                place = f"{key}.{name}" if name else key
                faults.setdefault(place, _fault(place, unit, permitted, "correct the one that is wrong"))
    return list(faults.values())


def drag_faults(rotor: RotorTable, limits: LimitsTable) -> list[Fault]:
    """A drag area more than four times off what helicopters of its mass have (estimates.py)."""
    if not rotor.drag_area or rotor.drag_area.value is None or not limits.max_mass:
        return []
    usual = estimates.drag_area(_si(limits.max_mass)).value
    if usual / 4.0 <= rotor.drag_area.value <= 4.0 * usual:
        return []
    permitted = f"within four times of {usual:.2f} m2, usual at {limits.max_mass.text}"
    return [_fault("rotor.drag_area", rotor.drag_area.text, permitted, "m2 or ft2?")]


def spread_faults(key: str, table: object) -> list[Fault]:
    """A spread of more than half of what it is the spread of: the unit, most likely. Angles and temperatures may have
    one, their zero being no absence."""
    found = []
    for name, typed in vars(table).items():
        if not isinstance(typed, Typed) or not typed.spread or not typed.value or name in ("twist", "precone"):
            continue
        if typed.spread > 0.5 * abs(typed.value) and not typed.unit.endswith("C"):
            read = f"a spread of {typed.spread / abs(typed.value):.0%} of {typed.text}"
            found.append(_fault(f"{key}.{name}.spread", read, "at most half of the value", "look again at the unit"))
    return found


def typed_units(table: object) -> list[tuple[str, str]]:
    """The keys of a table with the units of the quantities typed under them."""
    found = []
    for name, value in vars(table).items():
        for typed in value if isinstance(value, list) else [value]:
            if isinstance(typed, Typed):
                found.append((name, typed.unit))
    return found


def chart_units(chart: TypedChart | None) -> list[str]:
    """The units of a chart's cells and of its axes."""
    return [] if chart is None else [chart.speed_unit, *(axis.unit for axis in chart.axes)]


def calibration_faults(indicated: tuple[float, ...], calibrated: tuple[float, ...]) -> list[Fault]:
    """A calibrated speed more than a quarter away from its indicated one."""
    for read, meant in zip(indicated, calibrated, strict=True):
        if abs(meant - read) > 0.25 * read:
            return [
                _fault(
                    "calibration.table",
                    f"{meant / read:.2f} calibrated for 1 indicated",
                    "within a quarter of one another",
                    "look again in the manual",
                )
            ]
    return []


def _fault(key: str, read: str, permitted: str, remedy: str = "") -> Fault:
    return Fault("", key, read, permitted, remedy)


def _si(typed: Typed) -> float:
    return typed.value if typed.value is not None else math.nan
