"""The permitted points of a type's chart, and the entry findings that are looked for there rather than cell by cell."""

from __future__ import annotations

import math

import numpy as np

from briefkit import units
from briefkit.aircraft.answers import EntryFinding, Kind, finding
from briefkit.aircraft.chart import Floats
from briefkit.aircraft.model import Aircraft

_SLACK = 1e-6  # m/s


def power_off_findings(key: str, aircraft: Aircraft) -> list[EntryFinding]:
    """Power-off VNE over all power-on cells, and under the midpoint of 27.1505(c)(1) where flight is permitted."""
    off, unit = aircraft.vne_off, aircraft.units.speed
    on, height, temperature, mass, rotor_speed = permitted_points(aircraft)
    found = []
    if off.constant is not None and off.constant.value > (highest := float(np.nanmax(aircraft.vne.speeds))) + _SLACK:
        permitted = f"not above every power-on VNE ({units.from_si(highest, 'speed', unit):g} {unit})"
        found.append(finding(Kind.POWER_OFF_ABOVE_POWER_ON, "", f"{key}.constant", off.constant.text, permitted))
    if off.chart is not None:
        above = off.chart.indicated(height, temperature, mass, rotor_speed) - on
        if np.any(above > _SLACK):
            worst = int(np.nanargmax(above))
            place = _point(aircraft, float(height[worst]), float(temperature[worst]), float(mass[worst]))
            value = units.show(float(on[worst] + above[worst]), "speed", unit, 1)
            read = f"{value} at {place}, {_shown(float(above[worst]), unit)} above power-on VNE there"
            found.append(finding(Kind.POWER_OFF_ABOVE_POWER_ON, "", f"{key}.chart", read, "not above power-on VNE"))
    climb = aircraft.limits.climb_speed.value
    cas = aircraft.calibration.to_calibrated
    slow = off.indicated(on, height, temperature, mass, rotor_speed)
    calibrated = np.array([cas(slow), cas(on), np.broadcast_to(cas(climb), on.shape)])
    off_speed, on_speed, climb_speed = np.where(
        np.isnan(calibrated).any(axis=0), [slow, on, on * 0.0 + climb], calibrated
    )
    short = (on_speed + climb_speed) / 2.0 - off_speed
    if np.any(short > _SLACK):
        worst = int(np.nanargmax(short))
        place = _point(aircraft, float(height[worst]), float(temperature[worst]), float(mass[worst]))
        value = units.show(float(slow[worst]), "speed", unit, 1)
        read = f"{value} at {place}, {_shown(float(short[worst]), unit)} too slow"
        permitted = "midway between power-on VNE and climb speed, or more (14 CFR 27.1505(c)(1))"
        found.append(finding(Kind.POWER_OFF_UNDER_MIDPOINT, "", key, read, permitted))
    return found


def permitted_points(aircraft: Aircraft) -> tuple[Floats, Floats, Floats, Floats, Floats]:
    """Power-on VNE [m/s indicated], pressure altitude, temperature, mass and rotor speed at the chart's entries, and at
    the hottest day of each height, as far as the limits permit; (n,) each."""
    chart, limits, off = aircraft.vne, aircraft.limits, aircraft.vne_off
    top = limits.max_altitude.value
    rows = [h for h in chart.heights if h <= top] if not chart.density_altitude else list(np.linspace(0.0, top, 25))
    step = [off.to_height.value, off.to_height.value + 1.0] if off.to_height is not None else []
    heights = np.array(sorted({*rows, top, *(h for h in step if h <= top)}))
    hottest = np.minimum(limits.max_temperature_at(heights), units.ZERO_CELSIUS + 55.0)
    columns = [t for t in chart.temperatures if t >= limits.min_temperature.value] or [limits.min_temperature.value]
    masses = np.array([m for m in chart.masses if m <= limits.max_mass.value] or [limits.max_mass.value])
    if chart.masses and masses[-1] < limits.max_mass.value <= chart.masses[-1]:
        masses = np.append(masses, limits.max_mass.value)
    speeds = np.array(chart.rotor_speeds or (1.0,))
    place, column, mass, rotor_speed = (
        axis.ravel() for axis in np.meshgrid(np.arange(len(heights)), np.arange(len(columns) + 1), masses, speeds)
    )
    height = heights[place]
    temperature = np.where(column < len(columns), np.array([*columns, 0.0])[column], hottest[place])
    if chart.temperatures:
        hot_end = np.minimum(hottest[place], chart.temperatures[-1])
        temperature = np.where(column < len(columns), temperature, hot_end)
    on = chart.indicated(height, temperature, mass, rotor_speed)
    keep = np.isfinite(on) & (temperature <= hottest[place] + 1e-6)
    return on[keep], height[keep], temperature[keep], mass[keep], rotor_speed[keep]


def _point(aircraft: Aircraft, height: float, temperature: float, mass: float) -> str:
    shown = aircraft.units
    parts = [units.show(height, "height", shown.height), units.show(temperature, "temperature", "degC")]
    if aircraft.vne.masses:
        parts.append(units.show(mass, "mass", shown.mass))
    return ", ".join(parts)


def _shown(speed: float, unit: str) -> str:
    return units.show(math.ceil(units.from_si(speed, "speed", unit) * 10.0 - 1e-9) / 10.0
                      * units.to_si(1.0, "speed", unit), "speed", unit, 1)  # fmt: skip


def supplement_findings(key: str, aircraft: Aircraft) -> list[EntryFinding]:
    """A supplement whose VNE is above the basic one somewhere, or whose figure lowers nothing anywhere."""
    basic, chart, unit = aircraft.basic_vne, aircraft.vne, aircraft.units.speed
    if basic is None:
        return []
    on, height, temperature, mass, rotor_speed = permitted_points(aircraft)
    above = on - basic.indicated(height, temperature, mass, rotor_speed)
    if np.any(above > _SLACK):
        worst = int(np.nanargmax(above))
        place = _point(aircraft, float(height[worst]), float(temperature[worst]), float(mass[worst]))
        value = units.show(float(on[worst]), "speed", unit, 1)
        read = f"{value} at {place}, {_shown(float(above[worst]), unit)} above the basic VNE there"
        return [finding(Kind.SUPPLEMENT_ABOVE_BASIC, "", f"{key}.power_on", read, "not above the basic VNE")]
    if chart.cap is not None and chart.cap != basic.cap and chart.cap >= np.nanmax(chart.speeds) - _SLACK:
        permitted = "a figure below the basic VNE somewhere"
        return [finding(Kind.SUPPLEMENT_ABOVE_BASIC, "", f"{key}.vne", chart.cap_text, permitted)]
    return []
