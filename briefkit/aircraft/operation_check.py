"""An operation held against an aircraft's manual: what of it the manual forbids, or does not speak of."""

from __future__ import annotations

from collections.abc import Iterable
from itertools import product
from pathlib import Path
from typing import Final

import numpy as np

from briefkit import units
from briefkit.aircraft.chart import density_altitude_of
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.operation import FleetEntry, Operation, WorkArea
from briefkit.errors import Fault

# Half a millimetre, half a gram: a foot converted there and back is still the same foot.
_SLACK: Final = 5e-4


def cross_check(operation: Operation, aircraft: Aircraft, areas: Iterable[str] | None = None) -> list[Fault]:
    """What of the operation the aircraft's manual forbids; each fault names both files. `areas` defaults to all.

    A corner of a work area outside the chart or the limits or where the chart prints no VNE, a mass outside the limits
    or the chart, a bank above the manual's, a leg that ends lighter than permitted, a configuration the aircraft file
    does not have.
    """
    stem = Path(aircraft.file).stem
    entry = operation.entry_for(aircraft)
    if entry is None:
        known = ", ".join(operation.fleet)
        return [Fault(operation.file, "fleet", known, f"an entry [fleet.{stem}]", "add it")]
    faults = []
    for other in operation.fleet.values():
        if other.aircraft == stem and other.configuration not in ("", *aircraft.configurations):
            permitted = f"{', '.join(aircraft.configurations)} ({aircraft.file})"
            read = other.configuration
            faults.append(Fault(operation.file, f"fleet.{other.key}.configuration", read, permitted))
    faults += _entry_faults(operation, entry, aircraft)
    faults += _leg_faults(operation, entry, aircraft)
    for key in operation.work_areas if areas is None else areas:
        if key in operation.work_areas:
            area = operation.work_areas[key]
            found = _area_faults(operation, area, aircraft)
            faults += found or ([] if faults else _blank_faults(operation, area, entry, aircraft))
    return faults


def _entry_faults(operation: Operation, entry: FleetEntry, aircraft: Aircraft) -> list[Fault]:
    limits, chart, faults = aircraft.limits, aircraft.vne, []
    where = f"{aircraft.file}, {limits.source}"
    lowest = chart.lowest_mass
    for number, mass in enumerate(entry.masses, start=1):
        place = f"fleet.{entry.key}.masses, value {number}"
        if not _within(mass.value, limits.min_mass.value, limits.max_mass.value):
            permitted = f"{limits.min_mass.text} to {limits.max_mass.text} ({where})"
            faults.append(Fault(operation.file, place, mass.text, permitted))
        elif not _within(mass.value, lowest, chart.masses[-1] if chart.masses else np.inf):
            ends = [units.show(end, "mass", aircraft.units.mass) for end in (lowest, chart.masses[-1]) if end > 0.0]
            permitted = f"{' to '.join(ends)}, the masses of the VNE chart ({aircraft.file}, {chart.source})"
            remedy = 'where the manual says so, mark the first one "or less"' if mass.value < lowest else ""
            faults.append(Fault(operation.file, place, mass.text, permitted, remedy))
    if limits.max_bank is not None and not _within(entry.brief_bank.value, 0.0, limits.max_bank.value):
        permitted = f"at most {limits.max_bank.text} ({aircraft.file}, {limits.max_bank.source})"
        faults.append(Fault(operation.file, f"fleet.{entry.key}.brief_bank", entry.brief_bank.text, permitted))
    return faults


def _leg_faults(operation: Operation, entry: FleetEntry, aircraft: Aircraft) -> list[Fault]:
    """A leg whose mass without fuel is under the least the manual permits: the fuel, or its unit, is wrong."""
    least, faults = aircraft.limits.min_mass, []
    for number, leg in enumerate(operation.legs, start=1):
        if leg.fleet == entry.key and leg.take_off_mass.value - leg.fuel.value < least.value - _SLACK:
            permitted = f"a mass without fuel of {least.text} or more ({aircraft.file}, {least.source})"
            read = f"{leg.fuel.text} of {leg.take_off_mass.text}"
            faults.append(Fault(operation.file, f"legs (entry {number}).fuel", read, permitted))
    return faults


def _area_faults(operation: Operation, area: WorkArea, aircraft: Aircraft) -> list[Fault]:
    chart, limits, shown = aircraft.vne, aircraft.limits, aircraft.units
    faults = []

    def fault(part: str, read: str, permitted: str, source: str) -> None:
        place = f"work_areas.{area.key}.{part}"
        faults.append(Fault(operation.file, place, read, f"{permitted} ({aircraft.file}, {source})"))

    # The lowest density altitude is at the low, cold corner of the area, the highest at the high, hot one.
    corners = ((area.low_altitude, area.low_temperature), (area.high_altitude, area.high_temperature))
    for altitude, oat in corners:
        height, kind = altitude.value, ""
        if chart.density_altitude:
            height, kind = float(density_altitude_of(np.array(height), np.array(oat.value))), "density altitudes, "
        if not _within(height, chart.heights[0], chart.heights[-1]):
            low, high = (units.show(end, "height", shown.height) for end in (chart.heights[0], chart.heights[-1]))
            read = f"{altitude.text} at {oat.text}" if kind else altitude.text
            fault("pressure_altitudes", read, f"{kind}{low} to {high}, the rows of the VNE chart", chart.source)
        if altitude.value > limits.max_altitude.value + _SLACK:
            fault("pressure_altitudes", altitude.text, f"at most {limits.max_altitude.text}", limits.source)
    for temperature in (area.low_temperature, area.high_temperature):
        axis = chart.temperatures
        if axis and not _within(temperature.value, axis[0], axis[-1]):
            low, high = (units.show(end, "temperature", "degC") for end in (axis[0], axis[-1]))
            fault("temperatures", temperature.text, f"{low} to {high}, the columns of the VNE chart", chart.source)
        if temperature.value < limits.min_temperature.value - _SLACK:
            fault("temperatures", temperature.text, f"{limits.min_temperature.text} or warmer", limits.source)
    highest = float(np.min(limits.max_temperature_at(np.array([area.low_altitude.value, area.high_altitude.value]))))
    if area.high_temperature.value > highest + _SLACK:
        permitted = f"at most {units.show(highest, 'temperature', 'degC', 1)} at {area.high_altitude.text}"
        fault("temperatures", area.high_temperature.text, permitted, limits.source)
    return faults


def _blank_faults(operation: Operation, area: WorkArea, entry: FleetEntry, aircraft: Aircraft) -> list[Fault]:
    """Corners on the chart's axes where it prints no value all the same: lines that end early, cells left blank."""
    heights, oats = (area.low_altitude, area.high_altitude), (area.low_temperature, area.high_temperature)
    for altitude, oat, mass in product(heights, oats, entry.masses):
        if np.isnan(aircraft.vne.indicated(altitude.value, oat.value, mass.value)):
            read = f"{altitude.text}, {oat.text}, {mass.text}"
            permitted = f"where the chart prints a VNE, rotor at 100 % ({aircraft.file}, {aircraft.vne.source})"
            return [Fault(operation.file, f"work_areas.{area.key}", read, permitted)]
    return []


def _within(value: float, low: float, high: float) -> bool:
    return low - _SLACK <= value <= high + _SLACK
