"""The read-back sheet: chart and limits as typed, to lay beside the manual, ten cells for the second pilot to fill."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass
from typing import Final

from briefkit import units
from briefkit.aircraft.model import Aircraft, Stated
from briefkit.brief.identity import Identity
from briefkit.brief.pages import Grid

BLANKS: Final = 10


@dataclass(frozen=True)
class Chart:
    """The VNE chart as typed; a cell to fill by hand has its number in `blanks`, by (row, column)."""

    header: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    caption: str
    blanks: dict[tuple[int, int], int]


@dataclass(frozen=True)
class Sheet:
    """Two printed sheets: what was typed, with ten cells left open, and those ten cells as typed."""

    heading: str
    under: tuple[str, ...]
    chart: Chart
    limits: Grid
    more: tuple[Grid, ...]
    answers: Grid


def readback(aircraft: Aircraft, identity: Identity) -> Sheet:
    """The sheet for one aircraft file. The ten cells follow from the file's hash: other data, other cells."""
    chart = _chart(aircraft)
    return Sheet(
        heading=f"{aircraft.name}, {aircraft.configuration}: read-back of the typed figures",
        under=(
            f"Serials {', '.join(aircraft.serials)}. File {identity.aircraft}, {aircraft.data_hash[:12]}.",
            "Lay this beside the manual. The second pilot reads the manual, never the screen, and fills the numbered "
            "cells by hand; then turns to the next sheet and compares. Every difference goes back to the author.",
        ),
        chart=chart,
        limits=_limits(aircraft),
        more=tuple(grid for grid in (_power_off(aircraft), _calibration(aircraft), _others(aircraft)) if grid),
        answers=_answers(aircraft, chart),
    )


def _chart(aircraft: Aircraft) -> Chart:
    header, *rows = aircraft.vne.rows
    cells = [(i, j) for i, row in enumerate(rows) for j, cell in enumerate(row) if j and cell]
    cells.sort(key=lambda cell: hashlib.sha256(f"{aircraft.data_hash} {cell}".encode()).digest())
    chosen = sorted(cells[:BLANKS])
    caption = f"VNE power on, {aircraft.units.speed_label()}, {aircraft.vne.source}, read: {aircraft.vne.reading}"
    return Chart(tuple(header), tuple(map(tuple, rows)), caption, {cell: at for at, cell in enumerate(chosen, start=1)})


def _answers(aircraft: Aircraft, chart: Chart) -> Grid:
    rows = tuple(
        (str(at), chart.rows[row][0], chart.header[column], chart.rows[row][column], "", "")
        for (row, column), at in chart.blanks.items()
    )
    header = ("Cell", chart.header[0], "Column", f"As typed, {aircraft.units.speed_label()}", "Same", "Different")
    return Grid(header, rows, "The numbered cells, as typed", numbers=False)


def _limits(aircraft: Aircraft) -> Grid:
    limits = aircraft.limits
    rows = [
        _line("Maximum mass", limits.max_mass),
        _line("Minimum mass", limits.min_mass),
        _line("Maximum pressure altitude", limits.max_altitude),
        _line("Minimum temperature", limits.min_temperature),
        _line("Maximum temperature, above standard", limits.isa_deviation),
        _line("Maximum temperature", limits.max_temperature),
        _line("Maximum bank", limits.max_bank),
        _line("Rotor speed, power on, lowest", limits.rotor_on[0]),
        _line("Rotor speed, power on, highest", limits.rotor_on[1]),
        _line("Rotor speed, power off, lowest", limits.rotor_off[0]),
        _line("Rotor speed, power off, highest", limits.rotor_off[1]),
        _line("Climb speed", limits.climb_speed),
        *(_line(f"VNE power off: {name}", stated) for name, stated in aircraft.vne_off.figures),
    ]
    chart = aircraft.vne
    for name, text, source in (
        ("VNE power on, never above", chart.cap_text, chart.cap_source),
        ("VNE power on, the basic chart less", chart.lowered, chart.lowered_source),
        ("VNE power on holds at every permitted temperature", chart.covers_temperatures, chart.source),
    ):
        rows += [(name, text, source)] if text else []
    return Grid(("Limit", "As typed", "Page"), tuple(row for row in rows if row), "Limits, as typed", numbers=False)


def _line(name: str, stated: Stated | None) -> tuple[str, str, str] | None:
    return None if stated is None else (name, stated.text, stated.source)


def _power_off(aircraft: Aircraft) -> Grid | None:
    chart = aircraft.vne_off.chart
    if chart is None:
        return None
    header, *rows = chart.rows
    caption = f"VNE power off, {aircraft.units.speed_label()}, {chart.source}, read: {chart.reading}"
    return Grid(tuple(header), tuple(map(tuple, rows)), caption, numbers=False)


def _calibration(aircraft: Aircraft) -> Grid | None:
    table = aircraft.calibration
    if not table.in_manual:
        spread = units.show(table.spread, "speed", aircraft.units.speed)
        row = ("none in manual", f"within {spread}, as stated", table.source)
        return Grid(("Airspeed calibration", "Spread", "Page"), (row,), "Airspeed calibration", numbers=False)
    header, *rows = table.text
    return Grid(tuple(header), tuple(map(tuple, rows)), f"Airspeed calibration, as typed, {table.source}")


def _others(aircraft: Aircraft) -> Grid | None:
    rows = [(speed.label, speed.text, speed.source) for speed in aircraft.speeds]
    rows += [(line.label, line.text, line.source) for line in aircraft.hover]
    if not rows:
        return None
    return Grid(("Other figures", "As typed", "Page"), tuple(rows), "Other figures of the manual", numbers=False)
