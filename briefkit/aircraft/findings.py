"""Entry findings: what a manual could print, though it is rarely meant. Each needs a written reason before release."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import replace
from typing import Final

import numpy as np

from briefkit import units
from briefkit.aircraft.answers import EntryFinding, Kind, addressed, answered, finding
from briefkit.aircraft.chart import Axis, Floats, VneChart
from briefkit.aircraft.hover import falls
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.permitted import power_off_findings, supplement_findings
from briefkit.errors import Fault

_RISES: Final = {
    Axis.HEIGHT: (Kind.RISES_WITH_ALTITUDE, "height"),
    Axis.TEMPERATURE: (Kind.RISES_WITH_TEMPERATURE, "temperature"),
    Axis.MASS: (Kind.RISES_WITH_MASS, "mass"),
}
_SLOWEST_CAS: Final = 40.0 * units.KNOT
_SLACK: Final = 1e-6  # m/s
# How far a cell may lie off the line between its neighbours, where VNE falls on both sides: common practice, no source.
OUT_OF_LINE: Final = 3.0 * units.KNOT
CALIBRATION_OUT_OF_LINE: Final = 1.5 * units.KNOT  # likewise


def entry_findings(aircraft: Aircraft) -> list[Fault]:
    """What needs a written reason and has none in the file, as sentences that name the cell."""
    found = [one for one in all_findings(aircraft) if not answered(aircraft, one)]
    return [addressed(one, aircraft, aircraft.file) for one in found]


def all_findings(aircraft: Aircraft) -> list[EntryFinding]:
    """Every entry finding of an aircraft in its configuration, answered or not.

    A configuration that reads the basic chart, capped or lowered, repeats none of the basic one's findings on its form.
    """
    chart, basic, unit = aircraft.vne, aircraft.basic_vne, aircraft.units.speed
    table = "vne" if basic is None else f"configuration ({aircraft.configuration})"
    key = f"{table}.power_on"
    if chart.typed:
        key += ".lines" if chart.typed[0][0] in chart.straight else ".chart"
    found = []
    if basic is None or chart.rows is not basic.rows:
        found += _variables(key, chart) + _rising(key, chart, unit)
    found += _slow(key, chart, aircraft)
    if aircraft.vne_off.chart is not None:
        found += _rising(f"{table}.power_off.chart", aircraft.vne_off.chart, unit)
        found += _slow(f"{table}.power_off.chart", aircraft.vne_off.chart, aircraft)
    found += power_off_findings(f"{table}.power_off", aircraft)
    found += _masses(key, aircraft)
    if basic is None:
        found += _calibration(aircraft)
        for ceilings in aircraft.hover_tables:
            for cells, read in falls(ceilings):
                permitted = "a ceiling that falls with mass and temperature"
                found.append(finding(Kind.HOVER_CEILING_RISES, cells, "hover.table", read, permitted))
    return [*found, *supplement_findings(table, aircraft)]


def _calibration(aircraft: Aircraft) -> list[EntryFinding]:
    """The correction (calibrated less indicated) changes smoothly: an entry off its neighbours' line is looked at."""
    table, unit, found = aircraft.calibration, aircraft.units.speed, []
    indicated = np.array(table.indicated)
    correction = np.array(table.calibrated) - indicated
    for i in range(1, len(indicated) - 1):
        expected = float(np.interp(indicated[i], indicated[[i - 1, i + 1]], correction[[i - 1, i + 1]]))
        if abs(correction[i] - expected) > CALIBRATION_OUT_OF_LINE:
            row = table.text[i + 1]
            near = units.show(float(indicated[i] + expected), "speed", unit)
            permitted = f"near {near}, by the entries on both sides"
            key, place = "calibration.table", f"row {row[0]}"
            found.append(finding(Kind.CALIBRATION_OUT_OF_LINE, place, key, row[1], permitted))
    return found


def _masses(key: str, aircraft: Aircraft) -> list[EntryFinding]:
    """Masses that do not agree: a maximum the chart does not reach, a hover table for more than the maximum."""
    found, heaviest, chart = [], aircraft.limits.max_mass, aircraft.vne
    if chart.masses and heaviest.value > chart.masses[-1] * (1.0 + 1e-9):
        last = units.show(chart.masses[-1], "mass", aircraft.units.mass)
        permitted = f"the maximum mass, {heaviest.text}, on the chart"
        found.append(finding(Kind.HEAVIER_THAN_CHART, "", key, f"up to {last}", permitted))
    if aircraft.basic_vne is None:
        for table in aircraft.hover_tables:
            if table.masses[-1] > heaviest.value * (1.0 + 1e-9):
                permitted = f"at most the maximum mass, {heaviest.text}"
                found.append(finding(Kind.HOVER_ABOVE_MAXIMUM_MASS, "", "hover.table", table.rows[-1][0], permitted))
    return found


def _variables(key: str, chart: VneChart) -> list[EntryFinding]:
    if len(chart.variables) <= 2:
        return []
    read = ", ".join(chart.variables)
    permitted = "at most two variables at one time (14 CFR 27.1505(b)(1))"
    return [finding(Kind.MORE_THAN_TWO_VARIABLES, "", key, read, permitted)]


def place_of(chart: VneChart, index: tuple[int, ...]) -> str:
    """A cell as the person sees it: "row 4,000, column -20", "point 2,000, line +20 degC"."""
    lines = bool(chart.typed) and chart.typed[0][0] in chart.straight
    names = ("point", "line", "at") if lines else ("row", "column", "at")
    nodes = chart.axes
    parts = []
    for name, (axis, texts) in zip((*names, "at"), chart.typed, strict=False):
        added = len(nodes[axis]) - len(texts)  # an entry below a first one that says "or less"
        parts.append(f"{name} {texts[max(index[list(Axis).index(axis)] - added, 0)]}")
    return ", ".join(parts)


def cell_text(chart: VneChart, index: tuple[int, ...], unit: str) -> str:
    """A cell's speed with its unit: the figure as typed where the cell was."""
    typed = "" if chart.printed is None else str(chart.printed[index])
    return f"{typed} {unit}" if typed.replace(".", "").isdigit() else _text(chart, index, unit)


def explained(aircraft: Aircraft, place: str, found: list[EntryFinding]) -> list[EntryFinding]:
    """Those findings on other cells of the power-on chart that are gone once the cell at `place` is left out."""
    chart = aircraft.vne
    speeds = chart.speeds.copy()
    for index in np.ndindex(speeds.shape):
        if place_of(chart, index) == place:
            speeds[index] = np.nan
    rest = replace(chart, speeds=speeds)
    left = {(one.kind, one.cells) for one in _rising("", rest, aircraft.units.speed)}
    kinds = {*(kind for kind, _ in _RISES.values()), Kind.OUT_OF_LINE}
    return [
        one
        for one in found
        if one.kind in kinds
        and ".power_on" in one.fault.key
        and one.cells != place
        and (one.kind, one.cells) not in left
    ]


def _text(chart: VneChart, index: tuple[int, ...], unit: str) -> str:
    typed = "" if chart.printed is None else str(chart.printed[index])
    return typed or units.show(float(chart.speeds[index]), "speed", unit, 1)


def _pairs(chart: VneChart, axis: Axis) -> Iterator[tuple[tuple[int, ...], tuple[int, ...]]]:
    """Each cell with the one before it on an axis."""
    along = list(Axis).index(axis)
    for index in np.ndindex(chart.speeds.shape):
        if index[along]:
            yield index, (*index[:along], index[along] - 1, *index[along + 1 :])


def _rising(key: str, chart: VneChart, unit: str) -> list[EntryFinding]:
    found = []
    for axis, (kind, words) in _RISES.items():
        for index, before in _pairs(chart, axis):
            if chart.speeds[index] > chart.speeds[before] + _SLACK:
                lower = f"{_text(chart, before, unit)} before it, {place_of(chart, before)}: look at both"
                permitted = f"VNE that does not rise with {words} ({lower})"
                found.append(finding(kind, place_of(chart, index), key, _text(chart, index, unit), permitted))
    return [*found, *_out_of_line(key, chart, unit), *_uneven(key, chart)]


def _uneven(key: str, chart: VneChart) -> list[EntryFinding]:
    """Heights and temperatures of a table mostly go in one step: an entry off it is often mistyped."""
    found = []
    if chart.typed and chart.typed[0][0] in chart.straight:
        return []
    for name, (axis, texts) in zip(("row", "column", "at"), chart.typed, strict=False):
        nodes = np.array(chart.axes[axis])[-len(texts) :]
        if axis in (Axis.HEIGHT, Axis.TEMPERATURE):
            for i in _off_step(nodes):
                permitted = "an even step, as between most others"
                found.append(finding(Kind.UNEVEN_AXIS, f"{name} {texts[i]}", key, texts[i], permitted))
    return found


def _off_step(nodes: Floats) -> list[int]:
    """The one entry without which all others go in one step; else each entry after a step other than the usual one."""
    steps = np.round(np.diff(nodes), 3)
    if len(nodes) < 4 or np.ptp(steps) < 0.01:
        return []
    alone = []
    for i in range(len(nodes)):
        rest = np.round(np.diff(np.delete(nodes, i)), 3)
        if 0 < i < len(nodes) - 1:
            rest[i - 1] = np.round(rest[i - 1] / 2.0, 3)  # the gap the entry was taken out of
        if np.ptp(rest) < 0.01:
            alone.append(i)
    if len(alone) == 1:
        return alone
    usual, count = Counter(steps.tolist()).most_common(1)[0]
    return [i + 1 for i, step in enumerate(steps) if step != usual] if count > 1 else []


def _out_of_line(key: str, chart: VneChart, unit: str) -> list[EntryFinding]:
    """Where VNE falls on both sides, a cell lies near the line between its neighbours; below a flat top it need not."""
    if chart.bands or (chart.typed and chart.typed[0][0] in chart.straight):
        return []
    found: dict[str, EntryFinding] = {}
    for along, axis in enumerate(Axis):
        nodes = np.array(chart.axes[axis])
        for index in np.ndindex(chart.speeds.shape):
            i = index[along]
            if not 0 < i < len(nodes) - 1:
                continue
            line = chart.speeds[(*index[:along], slice(None), *index[along + 1 :])]
            before, here, after = line[i - 1 : i + 2]
            if not before > here > after or before >= np.nanmax(line) - _SLACK:
                continue
            share = (nodes[i] - nodes[i - 1]) / (nodes[i + 1] - nodes[i - 1])
            expected = before + share * (after - before)
            if abs(here - expected) > OUT_OF_LINE:
                place = place_of(chart, index)
                near = units.show(expected, "speed", unit)
                permitted = f"near {near}, between its neighbours by {axis}"
                found.setdefault(place, finding(Kind.OUT_OF_LINE, place, key, _text(chart, index, unit), permitted))
    return list(found.values())


def _slow(key: str, chart: VneChart, aircraft: Aircraft) -> list[EntryFinding]:
    found, unit = [], aircraft.units.speed
    calibrated = aircraft.calibration.to_calibrated(chart.speeds)
    speeds = np.where(np.isnan(calibrated), chart.speeds, calibrated)
    for index in map(tuple, np.argwhere(speeds < _SLOWEST_CAS - _SLACK)):
        permitted = "40 kt calibrated or more (14 CFR 27.1505(a)(1))"
        found.append(finding(Kind.UNDER_40_KT, place_of(chart, index), key, _text(chart, index, unit), permitted))
    return found
