"""The manual's VNE chart around a work area as a grid of text: cells as typed, what was read off a line marked."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from briefkit import units
from briefkit.aircraft.chart import Axis, VneChart, density_altitude_of
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.operation import FleetEntry, WorkArea
from briefkit.brief import words

NOT_PERMITTED: Final = "*"
READ_OFF: Final = "†"
NO_VALUE: Final = "–"  # where the manual prints none
_SLOPES: Final = ("VNE", "as typed")


@dataclass(frozen=True)
class ChartGrid:
    """Header, rows and the notes that go beside them."""

    header: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    notes: tuple[str, ...]


def chart_grid(aircraft: Aircraft, fleet: FleetEntry, area: WorkArea) -> ChartGrid:
    """The entries that enclose the work area; a figure with slopes stands as typed."""
    chart = aircraft.vne
    notes = list(_notes(aircraft))
    if chart.rows[0] == _SLOPES:
        return ChartGrid(_SLOPES, chart.rows[1:], tuple(notes))
    rows, marks = [], set()
    across, columns = _columns(aircraft, fleet, area)
    for i, label in _rows(aircraft, area):
        cells = []
        for j in columns:
            text, mark = _cell(aircraft, i, across, j)
            cells.append(text + mark)
            marks.add(mark)
        rows.append((label, *cells))
    if NOT_PERMITTED in marks:
        notes.append(f"{NOT_PERMITTED} warmer or higher than permitted: for reading between only.")
    if READ_OFF in marks:
        notes.append(f"{READ_OFF} read off the manual’s lines or slopes, rounded down.")
    if len(chart.typed) > 2 and across is not None:
        others = " and ".join(axis for axis in chart.variables if axis not in (Axis.HEIGHT, across))
        notes.append(f"Lowest over every {others} of the chart.")
    return ChartGrid((_corner(aircraft), *_heads(aircraft, across, columns)), tuple(rows), tuple(notes))


def cell_text(chart: VneChart, index: tuple[int, ...], unit: str) -> tuple[str, bool]:
    """An entry as the manual has it, or rounded down where it was not typed, and whether it was not."""
    speed = float(chart.speeds[index])
    if np.isnan(speed):
        return NO_VALUE, False
    if chart.cap is not None and chart.cap < speed:
        return units.show_number(units.round_down(units.from_si(chart.cap, "speed", unit))), False
    typed = "" if chart.printed is None else str(chart.printed[index])
    if typed:
        return typed, False
    return units.show_number(units.round_down(units.from_si(speed, "speed", unit))), True


def _cell(aircraft: Aircraft, i: int, across: Axis | None, j: int) -> tuple[str, str]:
    """Text and mark of one entry: the lowest over the axes the grid does not show."""
    chart = aircraft.vne
    here = [range(i, i + 1) if axis is Axis.HEIGHT else range(j, j + 1) if axis is across else range(max(len(nodes), 1))
            for axis, nodes in chart.axes.items()]  # fmt: skip
    part = chart.speeds[np.ix_(*here)]
    place = np.unravel_index(int(np.nanargmin(part)) if np.isfinite(part).any() else 0, part.shape)
    index = tuple(int(axis[at]) for axis, at in zip(here, place, strict=True))
    text, read_off = cell_text(chart, index, aircraft.units.speed)
    if across is Axis.TEMPERATURE and not _permitted(aircraft, chart.heights[i], chart.temperatures[j]):
        return text, NOT_PERMITTED
    return text, READ_OFF if read_off else ""


def _rows(aircraft: Aircraft, area: WorkArea) -> list[tuple[int, str]]:
    """Entries down the side that enclose the area, with their labels."""
    chart, unit = aircraft.vne, aircraft.units.height
    typed = dict(chart.typed).get(Axis.HEIGHT)
    if typed is None:
        return [(0, "all")]
    low, high = area.low_altitude.value, area.high_altitude.value
    if chart.density_altitude:
        cold, hot = area.low_temperature.value, area.high_temperature.value
        corners = density_altitude_of(np.array([low, high]), np.array([cold, hot]))
        low, high = float(corners[0]), float(corners[1])
    added = len(chart.heights) - len(typed)  # the entry that stands for "or less"
    labels = [units.show_number(units.from_si(height, "height", unit)) for height in chart.heights]
    found = [(max(i, added), labels[max(i, added)]) for i in around(chart.heights, low, high)]
    return [(i, f"{label} or less" if added and i == added else label) for i, label in dict(found).items()]


def _columns(aircraft: Aircraft, fleet: FleetEntry, area: WorkArea) -> tuple[Axis | None, list[int]]:
    chart = aircraft.vne
    if chart.temperatures:
        return Axis.TEMPERATURE, around(chart.temperatures, area.low_temperature.value, area.high_temperature.value)
    if chart.masses:
        masses = [mass.value for mass in fleet.masses]
        return Axis.MASS, around(chart.masses, min(masses), max(masses))
    if chart.rotor_speeds:
        return Axis.ROTOR_SPEED, list(range(len(chart.rotor_speeds)))
    return None, [0]


def _heads(aircraft: Aircraft, across: Axis | None, columns: list[int]) -> list[str]:
    chart, shown = aircraft.vne, aircraft.units
    if across is Axis.TEMPERATURE:
        return [words.temperature(chart.temperatures[j]) for j in columns]
    if across is Axis.MASS:
        less = [chart.bands or (chart.or_less and j == 0) for j in columns]
        heads = [units.show(chart.masses[j], "mass", shown.mass) for j in columns]
        return [head + (" or less" if mark else "") for head, mark in zip(heads, less, strict=True)]
    if across is Axis.ROTOR_SPEED:
        return [f"{chart.rotor_speeds[j] * 100.0:g} %" for j in columns]
    return ["VNE"]


def _corner(aircraft: Aircraft) -> str:
    if aircraft.vne.density_altitude:
        return f"Density altitude, {aircraft.units.height}"
    return f"Hp {aircraft.units.height} ({words.subscale(aircraft)} set)"


def _notes(aircraft: Aircraft) -> list[str]:
    chart = aircraft.vne
    notes = []
    if chart.cap_text:
        notes.append(f"Never above {words.indicated(aircraft, chart.cap_text)} ({chart.cap_source}).")
    if chart.lowered:
        text = words.indicated(aircraft, chart.lowered)
        notes.append(f"Every entry is the basic chart’s less {text} ({chart.lowered_source}).")
    if chart.bands:
        notes.append("Between masses: the heavier column.")
    return notes


def around(axis: tuple[float, ...], low: float, high: float) -> list[int]:
    """Indices of the chart's entries that enclose a range, with all between them."""
    nodes = np.asarray(axis)
    first = max(int(np.searchsorted(nodes, low + 1e-6, side="right")) - 1, 0)
    last = min(int(np.searchsorted(nodes, high - 1e-6, side="left")), len(nodes) - 1)
    return list(range(first, last + 1))


def _permitted(aircraft: Aircraft, height: float, oat: float) -> bool:
    if aircraft.vne.density_altitude:
        return oat >= aircraft.limits.min_temperature.value - 1e-6
    limits = aircraft.limits
    inside = limits.min_temperature.value - 1e-6 <= oat <= float(limits.max_temperature_at(height)) + 1e-6
    return inside and height <= limits.max_altitude.value + 1e-6
