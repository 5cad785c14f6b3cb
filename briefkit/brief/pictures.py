"""The two pictures of sheet 3: the reduction as stairs, and one row on the manual's own chart."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from briefkit import units
from briefkit.aircraft.chart import Axis, Floats, density_altitude_of
from briefkit.aircraft.model import Aircraft
from briefkit.brief import words
from briefkit.brief.derivation import work_by_hand
from briefkit.brief.front import row_text
from briefkit.envelope.chart_steps import stepped
from briefkit.envelope.reductions import ReductionRow, ReductionTable, RowKind
from briefkit.figures.chart import ChartFigure, Mark
from briefkit.figures.parts import Drawing, StillParts, Table
from briefkit.figures.stairs import stairs_figure
from briefkit.figures.still import still


@dataclass(frozen=True)
class _Picture:
    parts: StillParts

    def still_parts(self) -> StillParts:
        return self.parts


def stairs(aircraft: Aircraft, table: ReductionTable) -> str:
    """The reduction against mass as stairs, the far side hatched: an HTML fragment."""
    return still(_Picture(stairs_parts(aircraft, table)))


def stairs_parts(aircraft: Aircraft, table: ReductionTable) -> StillParts:
    """The same as parts, for a live exhibit too."""
    unit, kind = aircraft.units.mass, aircraft.units.speed_label()
    rows = table.rows[::-1]
    edges = [aircraft.limits.min_mass.value, *(row.mass.value for row in rows)]
    texts = [row_text(aircraft, table, row) for row in rows]
    not_briefed = (RowKind.NO_TURN, RowKind.UNDER_FLOOR)
    figure = stairs_figure(
        units.from_si(np.array(edges), "mass", unit),
        [aircraft.limits.min_mass.text, *(row.mass.text for row in rows)],
        [None if row.kind in not_briefed else row.reduction for row in rows],
        texts,
        step=aircraft.units.speed_step,
        speed_words=f"{kind} below VNE",
    )
    bank = f"{table.brief_bank_deg:.0f}°"
    alt = f"Before a turn of up to {bank} of bank: " + "; ".join(
        f"up to {row.mass.text}, {text}" for row, text in zip(rows, texts, strict=True)
    )
    listed = Table(
        ("Up to mass", "Slow to VNE less"),
        tuple((row.mass.text, text) for row, text in zip(table.rows, texts[::-1], strict=True)),
        "The same as a table",
    )
    caption = f"Slow to the left of the stairs before a turn of up to {bank} of bank. Hatched: not briefed."
    return StillParts("Section 2 as stairs", caption, alt, (), (Drawing(figure, caption, alt),), listed)


def row_on_chart(aircraft: Aircraft, row: ReductionRow) -> str:
    """One row's block point and its equivalent level flight on the manual's chart: an HTML fragment.

    Raises ValueError for a row without an answer.
    """
    if row.at is None or row.answer is None:
        raise ValueError("only a row with an answer has a place on the chart")
    chart, shown, at, point = aircraft.vne, aircraft.units, row.at, row.answer.chart_point
    hand = work_by_hand(aircraft, at, row.answer)
    heights, columns, names = chart_lines(aircraft, at.mass)
    kind = shown.speed_label()
    x_words = f"{'Density' if chart.density_altitude else 'Pressure'} altitude, {shown.height}"
    figure = ChartFigure(
        units.from_si(heights, "height", shown.height),
        units.from_si(columns, "speed", shown.speed),
        names,
        x_words=x_words,
        speed_words=f"VNE, {kind}",
        steps=stepped(chart, Axis.HEIGHT),
    )
    loaded = words.height(aircraft, point.pressure_altitude, 10.0)
    here_words = (f"{row.mass.text}, {row.bank_deg}°", f"VNE {words.number(hand.vne_here.number)} here")
    there_words = (f"as loaded at {loaded}", f"{words.number(point.vne)} on the chart")
    here = Mark(along(aircraft, at.pressure_altitude, at.oat), hand.vne_here.number, here_words)
    there = Mark(along(aircraft, point.pressure_altitude, point.temperature), point.vne, there_words)
    figure.update(here, there)
    alt = (
        f"{row.mass.text} at {words.place(aircraft, at)} with {row.bank_deg}° of bank is as loaded as level flight at "
        f"{loaded}, {words.temperature(point.temperature)}, where the chart gives {words.number(point.vne)} {kind}; "
        f"here it gives {words.number(hand.vne_here.number)}."
    )
    hereabouts = words.height(aircraft, at.pressure_altitude)
    table = Table(
        ("Where", "Pressure altitude", "Temperature", f"VNE, {kind}"),
        (
            (
                "here",
                hereabouts,
                words.temperature(at.oat),
                words.number(hand.vne_here.number),
            ),
            ("there", loaded, words.temperature(point.temperature), words.number(point.vne)),
        ),
        "Here and there",
    )
    caption = "The turn here, and the level flight that loads the rotor as much, on the manual’s own chart."
    parts = StillParts("The equivalent level flight", caption, alt, (), (Drawing(figure.figure, caption, alt),), table)
    return still(_Picture(parts))


def chart_lines(aircraft: Aircraft, mass: float) -> tuple[Floats, Floats, list[str]]:
    """Heights [m] (n,) as the chart has them, speeds [m/s] (n, m), none above its cap, and the names of the columns.

    A third variable is held: at the first mass not lighter than `mass`, at the rotor speed nearest 100 %.
    """
    chart, shown = aircraft.vne, aircraft.units
    heavier = min(int(np.searchsorted(chart.masses, mass - 1e-6)), max(len(chart.masses) - 1, 0))
    rotor = int(np.argmin(np.abs(np.array(chart.rotor_speeds or (1.0,)) - 1.0)))
    typed = dict(chart.typed).get(Axis.HEIGHT, ())
    first = len(chart.heights) - len(typed) if typed else 0  # not the entry that stands for "or less"
    heights, speeds = np.array(chart.heights[first:]), chart.speeds[first:]
    if chart.cap is not None:
        speeds = np.minimum(speeds, chart.cap)
    if chart.temperatures:
        names = [words.temperature(oat) for oat in chart.temperatures]
        return heights, speeds[:, :, heavier, rotor], names
    if chart.masses:
        names = [units.show(node, "mass", shown.mass) for node in chart.masses]
        return heights, speeds[:, 0, :, rotor], names
    names = [f"{speed * 100.0:g} %" for speed in chart.rotor_speeds] or ["VNE"]
    return heights, speeds[:, 0, 0, :], names


def along(aircraft: Aircraft, altitude: float, oat: float) -> float:
    """A place along the chart's heights, in its unit."""
    height = altitude
    if aircraft.vne.density_altitude:
        height = float(density_altitude_of(np.array(altitude), np.array(oat)))
    return float(units.from_si(height, "height", aircraft.units.height))
