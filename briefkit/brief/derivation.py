"""Sheet 3: how the reduction was found, so that a pilot can follow it by hand in the manual, and what it rests on."""

from __future__ import annotations

import math
from dataclasses import dataclass

from briefkit import units
from briefkit.aircraft.model import Aircraft, Stated
from briefkit.brief import words
from briefkit.brief.pages import Grid, Ink, Section
from briefkit.brief.published import published_line
from briefkit.envelope.condition import Condition
from briefkit.envelope.equivalent import LOAD_EXPONENT, EquivalentVne, equivalent_vne
from briefkit.envelope.margin import margin_to_vne
from briefkit.envelope.reductions import ReductionRow, ReductionTable, RowKind
from briefkit.envelope.speeds import indicated_speed, true_speed
from briefkit.envelope.spread import OnsetBand, onset_band
from briefkit.errors import Refusal
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
    after = (worked_line(aircraft, row),) if row is not None else ()
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
        return Section(heading, before=(nothing,))
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
    after = (f"Each row is the largest of {searched}.",)
    return Section(
        heading,
        grid=Grid(header, tuple(rows), "What sets each row of section 2", Ink.COMPUTED, numbers=False),
        after=after,
        sources=(aircraft.vne.source, aircraft.calibration.source),
    )


def chart_section(aircraft: Aircraft) -> Section:
    """The manual's chart as typed."""
    chart = aircraft.vne
    header = (chart.rows[0][0], *chart.rows[0][1:])
    grid = Grid(header, chart.rows[1:], f"VNE power on, {aircraft.units.speed_label()}, as typed from {chart.source}")
    return Section("The manual’s chart", grid=grid, after=(f"Reading rule: {chart.reading}.",))


def assumptions(aircraft: Aircraft, table: ReductionTable) -> Section:
    """What the rotor model's onset band rests on; the reduction rests on none of it."""
    row = worked_row(table) or table.rows[0]
    at = row.at
    before = [
        "The reduction above uses the manual’s chart, calibration and limits, the mass, the bank and the day; none of "
        "the estimates below. They enter only the rotor model, whose absolute onset is softer than the chart: "
        "analysis, not for use in flight."
        + (" Taken: " + "; ".join(taken) + "." if (taken := _taken(aircraft)) else ""),
    ]
    if at is None:
        return Section("What the rotor model assumes", before=tuple(before))
    level = at.changed(load_factor=1.0)
    try:
        band = onset_band(aircraft, level)
    except Refusal as refusal:
        return Section(
            "What the rotor model assumes", before=(*before, f"No onset band at {words.place(aircraft, at)}: {refusal}")
        )
    rows = tuple(
        (one.name, _input(aircraft, one.name), one.spread, _effect(one.lowers_by), _effect(one.raises_by))
        for one in band.contributions
    )
    unit = aircraft.units.speed
    header = ("Input", "Value and source", "Spread", f"Lowers by, {unit}", f"Raises by, {unit}")
    before += [_band_line(aircraft, row, level, band), margin_line(aircraft, level, band)]
    return Section(
        "What the rotor model assumes",
        before=tuple(before),
        grid=Grid(header, rows, "What each spread does to the onset band", Ink.CONTEXT, numbers=False),
        after=(*section_line(aircraft), published_line()),
    )


def section_line(aircraft: Aircraft) -> tuple[str, ...]:
    """Where the operator's own section is used and where it is not."""
    section = aircraft.section
    if section is None:
        return ()
    spread = units.show(section.spread, "angle", "deg", 1)
    return (
        f"The operator’s own blade section ({section.source}) stands behind pictures of the angle over stall: its "
        f"angle of maximum lift, less its spread of {spread}. The onset band keeps the section without stall that the "
        "published 12 and 16 degrees were computed with.",
    )


def _effect(change: float | None) -> str:
    return "outside" if change is None else words.number(change)


def _band_line(aircraft: Aircraft, row: ReductionRow, level: Condition, band: OnsetBand) -> str:
    kind = aircraft.units.speed_label()

    def end(speed: float | None) -> str:
        return f"{words.number(speed)} {kind}" if speed is not None else "outside the calibrated range"

    where = f"{row.mass.text} at {words.place(aircraft, level)}"
    return (
        f"Level, {where}. First signs (12 degrees at the retreating tip): {end(band.central)}; with the spread below, "
        f"from {end(band.lower)}. Limit of control (16 degrees), with its spread: {end(band.upper)}."
    )


def margin_line(aircraft: Aircraft, level: Condition, band: OnsetBand) -> str:
    """How the band lies to the manual's VNE at the same place, told from its lower edge, and "not resolved" where the
    margin is smaller than the band's half-width.
    """
    try:
        vne = equivalent_vne(aircraft, level.changed(rotor_speed=1.0, climb=0.0)).vne
    except Refusal as refusal:
        return f"VNE governs; no margin to it here: {refusal}."
    kind, unit, found = aircraft.units.speed_label(), aircraft.units.speed, margin_to_vne(aircraft, band, vne)
    governs = f"VNE governs, {words.number(vne.number)} {kind} there"
    if found.lower is None:
        said = f"{governs}. Reduced margin: the band begins under the calibrated range"
    elif found.reduced:
        low, under = words.number(found.lower.number), words.number((vne - found.lower).number)
        said = f"{governs}. Reduced margin: the band begins at {low} {kind}, {under} {unit} under it"
    else:
        above = words.number((found.lower - vne).number)
        said = f"{governs}; the band begins {above} {unit} above it and is no speed to fly"
    if found.margin is None or found.half_width is None:
        return f"{said}; margin of the first signs: not resolved."
    side = "above" if found.margin.value >= 0.0 else "under"
    first = f"first signs {words.number(abs(found.margin.number))} {unit} {side} VNE"
    width = f"{'at least ' if found.at_least else ''}{words.number(found.half_width.number)} {unit}"
    return f"{said}; {first}, the band’s half-width {width}{'' if found.resolved else ': not resolved'}."


def _taken(aircraft: Aircraft) -> list[str]:
    taken = []
    if not aircraft.calibration.in_manual:
        taken.append("indicated airspeed as calibrated, the manual gives no calibration")
    taken.append("the manual’s VNE to hold at 100 % rotor speed")
    if aircraft.vne.covers_temperatures:
        taken.append(f"the chart to hold at every permitted temperature ({aircraft.vne.covers_temperatures})")
    return taken


_STATED = {
    "blade chord": "chord",
    "blade twist": "twist",
    "blade flap inertia": "flap_inertia",
    "flap frequency": "flap_frequency",
    "section lift slope": "lift_slope",
    "drag area": "drag_area",
}


def _input(aircraft: Aircraft, name: str) -> str:
    if name not in _STATED:
        return "as stated for the operation"
    stated: Stated = getattr(aircraft.rotor, _STATED[name])
    return f"{stated.text}, {stated.basis or stated.source}"
