"""Cross-checks of an aircraft file: plain functions over what could be read, each returning the faults it found.

What cannot be meant is a fault. What a manual could print, though it is rarely meant, is an entry finding: it needs a
written reason before release (see `entry_findings`).
"""

from __future__ import annotations

import math
from typing import Final

import numpy as np

from briefkit import units
from briefkit.aircraft.chart_text import VneTable
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.tables import LimitsTable, RotorTable, UnitsTable
from briefkit.errors import Fault
from briefkit.reading.quantity import Typed

_DENSITY: Final = units.SEA_LEVEL_PRESSURE / (units.GAS_CONSTANT * units.SEA_LEVEL_TEMPERATURE)
_SLOWEST_CAS: Final = 40.0 * units.KNOT  # 14 CFR 27.1505(a)(1)


def limit_faults(limits: LimitsTable) -> list[Fault]:
    """Limits that contradict one another."""
    faults = []
    for low_key, low, high_key, high in (
        ("min_mass", limits.min_mass, "max_mass", limits.max_mass),
        ("min_temperature", limits.min_temperature, "max_temperature", limits.max_temperature),
    ):
        if low and high and _si(low) >= _si(high):
            faults.append(_fault(f"limits.{low_key}", low.text, f"less than {high_key}, {high.text}"))
    for key, pair in (("rotor_on", limits.rotor_on), ("rotor_off", limits.rotor_off)):
        if pair and _si(pair[0]) >= _si(pair[1]):
            faults.append(
                _fault(f"limits.{key}", f"{pair[0].text} to {pair[1].text}", "the lower speed, then the higher")
            )
    on = limits.rotor_on
    if on and _si(on[0]) < _si(on[1]) and not _si(on[0]) <= 1.0 <= _si(on[1]):
        read = f"{on[0].text} to {on[1].text}"
        faults.append(_fault("limits.rotor_on", read, "a range with 100 % in it", "is 100 % the speed of rotor.rpm?"))
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
    if rotor.hub == "articulated" and rotor.hinge_offset is None:
        faults.append(
            _fault("rotor.hinge_offset", "nothing", "hinge_offset is needed with an articulated hub", "add it")
        )
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


def loading_faults(rotor: RotorTable, limits: LimitsTable) -> list[Fault]:
    """A blade loading in the hover, CT/sigma at maximum mass, sea level, standard day, that no helicopter has."""
    parts = (limits.max_mass, rotor.blades, rotor.chord, rotor.radius, rotor.rpm)
    if None in parts or not limits.max_mass or not rotor.chord or not rotor.radius or not rotor.rpm or not rotor.blades:
        return []
    mass, chord, radius = _si(limits.max_mass), _si(rotor.chord), _si(rotor.radius)
    tip = radius * _si(rotor.rpm)
    loading = mass * units.GRAVITY / (_DENSITY * rotor.blades * chord * radius * tip**2)
    if 0.03 <= loading <= 0.15:
        return []
    read = f"{limits.max_mass.text} on {rotor.blades} blades of {rotor.chord.text}, CT/sigma {loading:.3f}"
    return [
        _fault(
            "limits.max_mass", read, "CT/sigma 0.03 to 0.15 in the hover at sea level", "kg or lb? rotor.chord in mm?"
        )
    ]


def unit_faults(chart: VneTable | None, calibration_unit: str, shown: UnitsTable) -> list[Fault]:
    """Charts in another unit than the type's instruments."""
    faults = []
    for key, read, typed, name in (
        ("vne.power_on.chart", chart.speed_unit if chart else "", shown.speed, "speed"),
        ("vne.power_on.chart", chart.height_unit if chart else "", shown.height, "height"),
        ("calibration.table", calibration_unit, shown.speed, "speed"),
    ):
        if read and typed and read != typed:
            faults.append(_fault(key, read, f"{typed}, as units.{name} says", "correct the one that is wrong"))
    return faults


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


def entry_findings(aircraft: Aircraft) -> list[Fault]:
    """What the chart says that needs a written reason: a VNE that rises or is under 40 kt, a power-off VNE above all.

    Empty where the author has given `entry_reason` in [vne.power_on].
    """
    chart, unit = aircraft.vne, aircraft.units.speed
    found = []
    remedy = "look again in the manual; if it is so printed, say why in vne.power_on.entry_reason"
    columns = chart.temperatures or chart.masses
    across = "temperature" if chart.temperatures else "mass"
    cells = chart.speeds.reshape(len(chart.heights), -1)
    for i, row in enumerate(cells):
        for j, cell in enumerate(row):
            place = f"vne.power_on.chart, row {chart.rows[i + 1][0]}"
            place += f", column {chart.rows[0][j + 1]}" if columns else ""
            shown = chart.rows[i + 1][j + 1]
            if i and cell > cells[i - 1, j] + 1e-9:
                found.append(
                    _fault(
                        place, shown, f"VNE that does not rise with height ({chart.rows[i][j + 1]} above it)", remedy
                    )
                )
            if j and cell > row[j - 1] + 1e-9:
                permitted = f"VNE that does not rise with {across} ({chart.rows[i + 1][j]} before it)"
                found.append(_fault(place, shown, permitted, remedy))
            calibrated = float(aircraft.calibration.to_calibrated(float(cell)))
            if (cell if math.isnan(calibrated) else calibrated) < _SLOWEST_CAS:
                found.append(_fault(place, shown, "40 kt calibrated or more (14 CFR 27.1505(a)(1))", remedy))
    highest = float(np.max(cells))
    if aircraft.vne_off.constant.value > highest:
        permitted = f"not above every power-on VNE ({units.from_si(highest, 'speed', unit):g} {unit})"
        found.append(_fault("vne.power_off.constant", aircraft.vne_off.constant.text, permitted, remedy))
    return [] if chart.entry_reason else found


def _fault(key: str, read: str, permitted: str, remedy: str = "") -> Fault:
    return Fault("", key, read, permitted, remedy)


def _si(typed: Typed) -> float:
    return typed.value if typed.value is not None else math.nan
