"""Sheet 1 of the crew's page: the manual's VNE, the reduction before a turn, rough air, and what to do if it starts."""

from __future__ import annotations

import math

from briefkit import units
from briefkit.aircraft.chart import ReadingRule
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.operation import FleetEntry, WorkArea
from briefkit.brief import words
from briefkit.brief.chart_grid import chart_grid
from briefkit.brief.deciding import Ruling, ruled_turn, ruling_speed, tip_first
from briefkit.brief.pages import Grid, Ink, Section
from briefkit.envelope import cues
from briefkit.envelope.reductions import ReductionRow, ReductionTable, RowKind


def front(aircraft: Aircraft, fleet: FleetEntry, area: WorkArea, table: ReductionTable) -> tuple[Section, ...]:
    """The four sections of sheet 1, in their fixed order."""
    ruling = ruling_speed(aircraft, fleet, area)
    return (
        vne_section(aircraft, fleet, area) if ruling is None else ruled_section(aircraft, area, ruling),
        turn_section(aircraft, fleet, area, table, ruling),
        rough_air(aircraft),
        if_it_starts(aircraft),
    )


def vne_section(aircraft: Aircraft, fleet: FleetEntry, area: WorkArea) -> Section:
    """The manual's own chart around the work area, cells as typed, with what else the manual says of VNE."""
    chart, shown = aircraft.vne, aircraft.units
    entries = chart_grid(aircraft, fleet, area)
    interpolate = chart.reading is ReadingRule.INTERPOLATE
    between, down = ("interpolate", ", and round down") if interpolate else ("take the lower VNE", "")
    beside = [
        f"Between entries: {between} (manual {_page(chart.source)}){down}.",
        f"Power off: {power_off(aircraft)}.",
        *entries.notes,
    ]
    grid = Grid(
        entries.header,
        entries.rows,
        f"VNE power on, {shown.speed_label()}, from {chart.source}",
        Ink.MANUAL,
        tuple(beside),
    )
    others = tuple(
        f"{speed.label}: {speed.text} ({speed.source})."
        for speed in aircraft.speeds
        if speed.applies not in ("turbulence", "bank")
    )
    aside = f"{shown.speed_label()}, power on"
    return Section(f"1. VNE: {chart.source}", aside, grid=grid, after=others, sources=(aircraft.vne_off.source,))


def ruled_section(aircraft: Aircraft, area: WorkArea, ruling: Ruling) -> Section:
    """One speed of the configuration is VNE all over the area: that speed, and no other on the sheet."""
    label = aircraft.units.speed_label()
    digits = ruling.text.removesuffix(aircraft.units.speed).strip()
    said = tuple(f"{speed.label}: {speed.text}." for speed in aircraft.speeds if speed.source == ruling.source)
    beside = (*said, f"Power off: {_power_off_within(aircraft, area)}.")
    caption = f"VNE power on, {label}, from {ruling.source}"
    grid = Grid(("Height, temperature and mass", f"VNE, {label}"), (("all here", digits),), caption, beside=beside)
    aside = f"{label}, power on"
    return Section(f"1. VNE: {ruling.source}", aside, grid=grid, sources=(aircraft.vne_off.source,))


def _power_off_within(aircraft: Aircraft, area: WorkArea) -> str:
    """The one branch of the power-off VNE that holds all over the area, where there is one; else all of it."""
    off, cap = aircraft.vne_off, aircraft.vne.cap
    if off.to_height is None or off.less is None or area.low_altitude.value <= off.to_height.value:
        return power_off(aircraft)
    never_over = off.not_over is None or (cap is not None and cap - off.less.value <= off.not_over.value)
    return f"VNE power on less {off.less.text}" if never_over else off.text


def power_off(aircraft: Aircraft) -> str:
    """The power-off VNE in the manual's form; a bare constant in the fewest words."""
    off = aircraft.vne_off
    if off.constant is not None and off.less is None:
        return f"{words.indicated(aircraft, off.constant.text)}, or the above if less"
    return off.text


def turn_section(
    aircraft: Aircraft, fleet: FleetEntry, area: WorkArea, table: ReductionTable, ruling: Ruling | None = None
) -> Section:
    """The reduction before a turn of the one briefed bank, by mass; where there is none, what decides instead."""
    bank = f"{table.brief_bank_deg:.0f}°"
    status = fleet.status
    lead = "For awareness" if status == "for information" else f"{status[:1].upper()}{status[1:]}"
    heading = f"2. {lead}: before a turn of up to {bank} of bank, slow to VNE less"
    # What the manual says of turns comes before anything computed, and the slower of the two holds.
    own = tuple(
        f"The manual’s own first: {speed.label}, {speed.text} ({speed.source}). The slower of the two holds."
        for speed in aircraft.speeds
        if speed.applies == "bank"
    )
    cold = (said,) if (said := tip_first(aircraft, area)) else ()
    where = _where(aircraft, fleet, area)
    sources = (fleet.source, area.source)
    if all(row.kind is RowKind.VNE_LIMITS for row in table.rows):
        limits = _nothing(aircraft, bank) if ruling is None else ruled_turn(ruling, aircraft, bank)
        heading = f"2. {lead}: turns of up to {bank} of bank"
        before, after = (*own, limits, *cold), (f"{where} {_masses(fleet)} Over {bank}: not briefed.",)
        return Section(heading, before=before, after=after, sources=sources)
    rows = tuple(
        (row.mass.text + (" or less" if row is table.rows[-1] else ""), row_text(aircraft, table, row))
        for row in table.rows
    )
    grid = Grid(
        ("Mass", "Slow to VNE less"), rows, f"Reduction before a turn of up to {bank}", Ink.COMPUTED, numbers=False
    )
    method = (
        "In between: the heavier line. Read from the manual’s own VNE chart at the equivalent level flight (“How the "
        "reduction was found”); not a flight-manual limit and not a speed to aim for."
    )
    floor = (
        f"Answer under {words.indicated(aircraft, table.floor.text)} ({table.floor.reason}): "
        f"no {table.brief_bank_deg:.0f}-degree turn."
    )
    after = (*cold, method, f"{where} {floor} Over {bank}: not briefed.")
    read = (aircraft.vne.source, aircraft.limits.climb_speed.source, aircraft.calibration.source)
    return Section(heading, before=own, grid=grid, after=after, sources=(*sources, *read))


def _where(aircraft: Aircraft, fleet: FleetEntry, area: WorkArea) -> str:
    """What the answer holds for, in a sentence."""
    cold, hot = (words.temperature(one.value) for one in (area.low_temperature, area.high_temperature))
    return f"{_turn(fleet)}, rotor at 100 %, Hp {_range(aircraft, area)}, {cold} to {hot}."


def _masses(fleet: FleetEntry) -> str:
    """Which masses a sentence without rows holds for; a load on the hook is in the mass."""
    return f"Every mass up to {fleet.masses[0].text}, with all it carries."


def _nothing(aircraft: Aircraft, bank: str) -> str:
    """Nothing is taken off: that VNE still limits, and why, where the manual says why."""
    why = "The maker set it for reasons this page cannot see."
    if aircraft.vne.reason:
        page, _, said = aircraft.vne.reason.rstrip(".").partition(": ")
        why = f"The manual says why: {said} ({page})." if said else f"The manual says why: {page}."
    return f"Up to {bank} of bank, blade stall asks for nothing below VNE here. VNE still limits. {why}"


def _turn(fleet: FleetEntry) -> str:
    return "Level turn" if fleet.climb is None else f"Turn, level or climbing at up to {fleet.climb.text}"


def row_text(aircraft: Aircraft, table: ReductionTable, row: ReductionRow) -> str:
    """What a row says: never a speed beside a bank angle, never a bank without its reduction."""
    amount = f"{words.knots(aircraft, row.reduction)} or more"
    if row.kind is RowKind.REDUCTION:
        return amount
    if row.kind is RowKind.COVERED:
        return (
            f"at most {row.bank_deg}°, and {amount}" if row.reduction else f"at most {row.bank_deg}°; VNE still limits"
        )
    if row.kind is RowKind.VNE_LIMITS:
        return "VNE still limits"
    if row.kind is RowKind.UNDER_FLOOR:
        return f"no {table.brief_bank_deg:.0f}-degree turn"
    return "no turn briefed at this mass"


def rough_air(aircraft: Aircraft) -> Section:
    """The manual's rough-air speed verbatim, or that it gives none; never a number of ours."""
    said = [f"{speed.text} ({speed.source})." for speed in aircraft.speeds if speed.applies == "turbulence"]
    sentences = said or ["The manual gives no speed. Slow down early; gentle hands."]
    return Section("3. Rough air", before=tuple(sentences))


def if_it_starts(aircraft: Aircraft) -> Section:
    """Recognition and the first act, in the words of the manual or the handbook."""
    sentences, source = cues.recovery(aircraft)
    mirrored = cues.sides(aircraft).mirrored
    others = (
        "Light in the seat, or the rotor horn?" if cues.needs_low_g_caution(aircraft) else "The rotor horn, or sinking?"
    )
    tail = f"{source}{'; ' + mirrored if mirrored else ''}. {others} Not this: page 2."
    felt = cues.onset_words(aircraft)
    return Section("4. If it starts", before=(felt[:1].upper() + felt[1:], *sentences, tail))


def _range(aircraft: Aircraft, area: WorkArea) -> str:
    unit = aircraft.units.height
    low = math.floor(units.from_si(area.low_altitude.value, "height", unit) + 1e-6)
    high = math.ceil(units.from_si(area.high_altitude.value, "height", unit) - 1e-6)
    return f"{units.show_number(low)} to {units.show_number(high)} {unit}"


def _page(source: str) -> str:
    return source.removeprefix("flight manual").strip() or source
