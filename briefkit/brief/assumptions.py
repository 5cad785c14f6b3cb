"""What the rotor model assumes: the onset band on the analysis page, how it lies to VNE, and what widens it.

The reduction rests on none of it. An absolute onset is softer than the manual's chart; it is printed here alone.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from briefkit import units
from briefkit.aircraft.model import Aircraft, Stated
from briefkit.brief import words
from briefkit.brief.derivation import worked_row
from briefkit.brief.pages import Grid, Ink, Section
from briefkit.brief.published import published_lines
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.equivalent import equivalent_vne
from briefkit.envelope.margin import margin_to_vne
from briefkit.envelope.onset import FIRST_SIGNS, tip_angles
from briefkit.envelope.reductions import ReductionRow, ReductionTable
from briefkit.envelope.solution import rotor_of
from briefkit.envelope.spread import OnsetBand, onset_band
from briefkit.errors import Reason, Refusal
from briefkit.units import Speed

_ENTRY: Final = 0.005  # of a unit of speed: nearer than any printed entry lies to the next


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
        return Section("What the rotor model assumes", before=(*before, no_band(aircraft, at, refusal)))
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
        after=(*section_line(aircraft), *published_lines()),
    )


def no_band(aircraft: Aircraft, at: Condition, refusal: Refusal) -> str:
    """Why there is none, for a reader of the page; a limit of the manual keeps the words of its refusal."""
    why = str(refusal)
    if refusal.reason is Reason.OUTSIDE_MODEL:
        angle = tip_angles(rotor_of(aircraft), Conditions.of(at.changed(load_factor=1.0))).angle[0]
        known = angle[np.isfinite(angle)]
        if known.size and known.max() < FIRST_SIGNS:
            why = "the tip does not reach 12 degrees at any speed the model covers"
        elif known.size and known.min() >= FIRST_SIGNS:
            why = "the tip is above 12 degrees at every speed the model covers"
    return f"No onset band at {words.place(aircraft, at)}: {why.rstrip('.')}."


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
    margin is smaller than the band's half-width. The differences are from the reading, not from what is left of it.
    """
    try:
        k = level.rotor_speed if aircraft.vne.rotor_speeds else 1.0
        vne = equivalent_vne(aircraft, level.changed(rotor_speed=k, climb=0.0)).vne
    except Refusal as refusal:
        return f"VNE governs; no margin to it here: {refusal}."
    kind, unit, found = aircraft.units.speed_label(), aircraft.units.speed, margin_to_vne(aircraft, band, vne)
    governs = f"VNE governs, {_vne(aircraft, vne)}"
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


def _vne(aircraft: Aircraft, vne: Speed) -> str:
    """An entry as the chart prints it; what is read between entries rounded down to one unit, and marked."""
    chart, kind, unit = aircraft.vne, aircraft.units.speed_label(), aircraft.units.speed
    texts = [] if chart.printed is None else [str(text) for text in chart.printed.ravel()]
    for text, speed in zip(texts, chart.speeds.ravel(), strict=False):
        if text and abs(units.from_si(float(speed), "speed", unit) - vne.number) < _ENTRY:
            return f"{text} {kind} there"
    down = units.round_down(vne.number)
    mark = " (read off the chart, rounded down)" if vne.number - down >= _ENTRY else ""
    return f"{units.show_number(down)} {kind} there{mark}"


def _taken(aircraft: Aircraft) -> list[str]:
    taken = []
    if not aircraft.calibration.in_manual:
        taken.append("indicated airspeed as calibrated, the manual gives no calibration")
    if not aircraft.vne.rotor_speeds:
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
