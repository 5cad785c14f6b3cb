"""Sheet 3: how the reduction was found, so that a pilot can follow it by hand in the manual."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.brief import words
from briefkit.brief.pages import Grid, Ink, Section
from briefkit.envelope.chart_shape import LARGEST_RESIDUAL, Shape, chart_shape
from briefkit.envelope.condition import Condition
from briefkit.envelope.equivalent import LOAD_EXPONENT, EquivalentVne
from briefkit.envelope.reductions import ReductionRow, ReductionTable, RowKind
from briefkit.envelope.speeds import indicated_speed, true_speed
from briefkit.physics import atmosphere
from briefkit.units import Speed, SpeedKind


@dataclass(frozen=True)
class Hand:
    """One row worked by hand: every intermediate a pilot meets; `below` is `vne_here` less `indicated`."""

    counts_as: float
    true: Speed
    indicated: Speed
    vne_here: Speed
    below: Speed


def work_by_hand(aircraft: Aircraft, at: Condition, answer: EquivalentVne) -> Hand:
    """The steps from the block point to the reduction, from the chart point alone; speeds with their kinds.

    `counts_as` is the mass [kg] with the load factor's guard; `true` the chart's VNE there as true airspeed;
    `indicated` the same true airspeed as indicated at the block point.
    """
    unit, point = aircraft.units.speed, answer.chart_point

    def chart(height: float, oat: float, mass: float) -> Speed:
        return Speed(float(aircraft.vne.indicated(height, oat, mass)), SpeedKind.INDICATED, unit)

    there = chart(point.pressure_altitude, point.temperature, point.mass)
    pressure = float(atmosphere.pressure_at(point.pressure_altitude))
    flown = true_speed(aircraft.calibration, there, pressure, point.temperature)
    true = Speed(flown.value * at.rotor_speed, flown.kind, unit)
    indicated = indicated_speed(aircraft.calibration, true, at.pressure, at.oat)
    vne_here = chart(at.pressure_altitude, at.oat, at.mass if aircraft.vne.masses else point.mass)
    return Hand(at.mass * at.load_factor**LOAD_EXPONENT, true, indicated, vne_here, vne_here - indicated)


def method(aircraft: Aircraft, table: ReductionTable) -> Section:
    """The idea in a paragraph, and one row worked."""
    bank = table.brief_bank_deg
    load = 1.0 / math.cos(math.radians(bank))
    sentences = [
        "In a turn the rotor is loaded as if the aircraft were heavier; at another rotor speed as if it were at "
        "another height and temperature. The manual’s own chart says how fast this rotor may go when it is that "
        "loaded, in level flight at 100 %. So the chart is read there: at every permitted point at least as loaded "
        "and no warmer, and the largest true airspeed found is the answer here. No rotor model takes part.",
        f"At {bank:.0f}° of bank the load factor is {load:.3f}; it is counted as {load:.3f}^{LOAD_EXPONENT} = "
        f"{load**LOAD_EXPONENT:.3f}, which guards limits set by loads. The answer is never above the manual’s VNE "
        "here.",
    ]
    row = worked_row(table)
    after = (worked_line(aircraft, row), plain_line(aircraft, row)) if row is not None else ()
    return Section("How the reduction was found", before=tuple(sentences), after=after)


def worked_row(table: ReductionTable) -> ReductionRow | None:
    """The row to work by hand: the heaviest at the briefed bank with a reduction, else the heaviest with any."""
    with_number = [row for row in table.rows if row.answer is not None and row.reduction > 0.0]
    at_brief_bank = [row for row in with_number if row.kind is RowKind.REDUCTION]
    return next(iter(at_brief_bank or with_number), None)


def worked_line(aircraft: Aircraft, row: ReductionRow) -> str:
    """One row as a sentence a pilot can follow with the manual open."""
    if row.at is None or row.answer is None:
        raise ValueError("only a row with an answer can be worked")
    at, point = row.at, row.answer.chart_point
    hand = work_by_hand(aircraft, at, row.answer)
    kind = aircraft.units.speed_label()
    here = words.height(aircraft, at.pressure_altitude)
    mass = aircraft.limits.max_mass.text if not aircraft.vne.masses else words.mass(aircraft, point.mass)
    counts = f"{row.mass.text} at {words.place(aircraft, at)}, {row.bank_deg} degrees counts as"
    loaded = f"{words.height(aircraft, point.pressure_altitude, 10.0)}, {words.temperature(point.temperature)}"
    there = f"{words.number(point.vne)} {kind}, is {words.number(hand.true.number)} {aircraft.units.speed} true"
    below = f"{_below(aircraft, row, hand)}, so {words.knots(aircraft, row.reduction)}"
    return (
        f"By hand: {counts} {words.mass(aircraft, hand.counts_as)}; {mass} is as loaded at {loaded}; the manual’s VNE "
        f"there, {there}, which is {words.number(hand.indicated.number)} {kind} at {here}; VNE here is "
        f"{words.number(hand.vne_here.number)}: {below}."
    )


def plain_line(aircraft: Aircraft, row: ReductionRow) -> str:
    """The upper edge of the worked row: the same reading with the load factor as it is, without the guard."""
    if row.at is None or row.answer is None:
        raise ValueError("only a row with an answer has an upper edge")
    kind, unit = aircraft.units.speed_label(), aircraft.units.speed
    upper = words.number(row.answer.upper)
    more = words.number(row.answer.upper - row.answer.ias)
    return (
        f"Without the guard, the load factor being {row.at.load_factor:.3f} as it is, the chart would give {upper} "
        f"{kind} there, {more} {unit} more: the upper edge of what it can say. The lower one is printed."
    )


def _below(aircraft: Aircraft, row: ReductionRow, hand: Hand) -> str:
    """The difference, with what a stated climb adds to it by the rotor model."""
    if row.at is None or row.at.climb <= 0.0:
        return f"{words.number(row.exact)} below"
    climb = units.show(row.at.climb, "vertical speed", "ft/min")
    cost = f"{words.number(row.exact - hand.below.number)} {aircraft.units.speed}"
    return (
        f"{words.number(hand.below.number)} below, and a climb of {climb} costs another {cost} by the rotor model: "
        f"{words.number(row.exact)} in all"
    )


def rows_section(aircraft: Aircraft, table: ReductionTable) -> Section:
    """For each mass the block point that sets it, and the equivalent level flight there."""
    points = len(table.block.heights) * len(table.block.temperatures)
    searched = (
        f"{points} points over the work area: its corners, every chart row and column inside it, and every 250 ft and "
        "2 °C"
    )
    heading = "The equivalent level flight of each row"
    if all(row.kind is RowKind.VNE_LIMITS for row in table.rows):
        masses = ", ".join(row.mass.text for row in table.rows)
        nothing = f"Nothing is taken off at {masses}, at any of {searched}."
        return Section(heading, before=(nothing, *covered_line(aircraft, table)))
    kind = aircraft.units.speed_label()
    rows = []
    for row in table.rows:
        if row.at is None or row.answer is None:
            rows.append((row.mass.text, "", "", "", "", "", "", str(row.kind)))
        elif row.exact <= 0.0:
            rows.append((row.mass.text, f"{row.bank_deg}°", "whole area", "", "", "", "0", "VNE still limits"))
        else:
            point, hand = row.answer.chart_point, work_by_hand(aircraft, row.at, row.answer)
            rows.append((
                row.mass.text,
                f"{row.bank_deg}°",
                words.place(aircraft, row.at),
                words.mass(aircraft, hand.counts_as),
                f"{words.height(aircraft, point.pressure_altitude, 10.0)}, {words.temperature(point.temperature)}",
                f"{words.number(point.vne)} there, {words.number(hand.indicated.number)} here",
                words.number(row.exact),
                words.knots(aircraft, row.reduction),
            ))  # fmt: skip
    header = (
        "Mass",
        "Bank",
        "Set at",
        "Counts as",
        "As loaded on the chart",
        f"Manual’s VNE, {kind}",
        "Below VNE",
        "Printed",
    )
    after = (f"Each row is the largest of {searched}.", *covered_line(aircraft, table))
    return Section(
        heading,
        grid=Grid(header, tuple(rows), "What sets each row of section 2", Ink.COMPUTED, numbers=False),
        after=after,
        sources=(aircraft.vne.source, aircraft.calibration.source),
    )


def covered_line(aircraft: Aircraft, table: ReductionTable) -> tuple[str, ...]:
    """For a pull-up or a gust: how much load the chart covers all over the work area, and never a speed."""
    covered = [f"{row.covered_load:.2f} at {row.mass.text}" for row in table.rows if row.covered_load >= 1.0]
    if not covered:
        return ()
    return (
        "For a pull-up or a gust there is no speed here. The load factor that the manual’s chart covers all over the "
        f"area, rotor at 100 %: {', '.join(covered)}. {_capped(aircraft, table)}A gust can do more than its load "
        "factor shows.",
    )


def _capped(aircraft: Aircraft, table: ReductionTable) -> str:
    """Said where the manual's bank limit, not the chart, ends what is covered."""
    limit = aircraft.limits.max_bank
    if limit is None:
        return ""
    most = units.round_down(1.0 / math.cos(limit.value), 0.01)
    ended = any(abs(row.covered_load - most) < 1e-9 for row in table.rows)
    return f"Never above {most:.2f}: the manual’s bank limit, {limit.text} ({limit.source}). " if ended else ""


def chart_section(aircraft: Aircraft) -> Section:
    """The manual's chart as typed."""
    chart = aircraft.vne
    header = (chart.rows[0][0], *chart.rows[0][1:])
    grid = Grid(header, chart.rows[1:], f"VNE power on, {aircraft.units.speed_label()}, as typed from {chart.source}")
    return Section("The manual’s chart", grid=grid, after=(f"Reading rule: {chart.reading}.", shape_line(aircraft)))


def shape_line(aircraft: Aircraft) -> str:
    """What the chart says of itself: how many cells are flat, on a cold edge, falling, and whether these collapse."""
    found, unit = chart_shape(aircraft), aircraft.units.speed
    flat, cold, falling = (found.shape == kind for kind in (Shape.FLAT, Shape.COLD, Shape.FALLING))
    parts = []
    if flat.any():
        highest = units.show(float(np.nanmax(aircraft.vne.speeds)), "speed", unit)
        parts.append(
            f"{flat.sum()} flat at the highest value, {highest}, set by something other than the rotor’s loading"
        )
    if cold.any():
        parts.append(f"{cold.sum()} on a cold edge, where the advancing tip sets it")
    parts.append(f"{falling.sum()} falling with loading, as blade stall or something lower does")
    said = f"Its {len(found.shape)} cells: {'; '.join(parts)}."
    far = np.abs(found.residual[np.isfinite(found.residual)])
    if not far.size:
        return f"{said} Too few fall to tell whether they lie on one curve."
    within, off = units.show(float(far.max()), "speed", unit, 1), len(found.findings)
    if not off:
        return f"{said} Speed over tip speed against loading, these lie on one curve within {within}."
    largest = units.show(LARGEST_RESIDUAL, "speed", unit)
    return (
        f"{said} Speed over tip speed against loading, {off} of these lie more than {largest} off the curve of the "
        f"others, by up to {within}: another limit, or a slip; the aircraft file says why."
    )
