"""The crew's page held against its own rules before it is built: what it must carry, and what must never differ."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from briefkit import units
from briefkit.brief import crew_page, fit, recognition
from briefkit.brief.finding import Finding, Level
from briefkit.brief.identity import Brief
from briefkit.envelope import cues
from briefkit.envelope.condition import Conditions
from briefkit.envelope.days import block_of
from briefkit.envelope.equivalent import equivalent_vnes
from briefkit.envelope.reductions import ReductionTable
from briefkit.errors import Reason

# Answers are kept to 0.01 of the unit.
_ROUNDED = 0.0051


def page_findings(brief: Brief, table: ReductionTable) -> list[Finding]:
    """What of a page's content stands against release."""
    place = str(brief.identity.folder)
    return [
        *level_findings(brief, table),
        *caution_findings(place, brief),
        *rough_air_findings(place, brief, table),
        *_one_sheet(place, brief, table),
    ]


def level_findings(brief: Brief, table: ReductionTable) -> list[Finding]:
    """Level at 100 % our answer is the manual's VNE by definition, all over the block; else the error is ours."""
    aircraft, area = brief.aircraft, brief.operation.work_areas[brief.identity.work_area]
    block = block_of(aircraft, area)
    masses = np.array([row.mass.value for row in table.rows])
    height, oat, mass = (axis.ravel() for axis in np.meshgrid(block.heights, block.temperatures, masses, indexing="ij"))
    answers = equivalent_vnes(aircraft, Conditions.si(mass=mass, pressure_altitude=height, oat=oat))
    chart_mass = mass if aircraft.vne.masses else np.full_like(mass, aircraft.limits.max_mass.value)
    manual = units.from_si(aircraft.vne.indicated(height, oat, chart_mass), "speed", aircraft.units.speed)
    wrong = (answers.reason == Reason.NONE) & ~(np.abs(answers.ias - manual) < _ROUNDED)
    if not np.any(wrong):
        return []
    worst = int(np.argmax(np.where(wrong, np.abs(answers.ias - manual), -1.0)))
    unit = aircraft.units
    at = ", ".join(
        (
            units.show(float(height[worst]), "height", unit.height),
            units.show(float(oat[worst]) - units.ZERO_CELSIUS, "temperature difference", "degC"),
            units.show(float(mass[worst]), "mass", unit.mass),
        )
    )
    text = f"level at {at} the answer is {answers.ias[worst]:g}, the manual's VNE {float(manual[worst]):g} {unit.speed}"
    remedy = "an error of briefkit's: do not brief from it, and report it"
    return [Finding(Level.BLOCKS, f"{brief.identity.aircraft}: {aircraft.vne.source}", text, remedy)]


def caution_findings(place: str, brief: Brief) -> list[Finding]:
    """Every page carries the cautions, and a two-bladed rotor's the one on low g (G24, G25)."""
    sections = {section.heading: section for section in recognition.recognition(brief.aircraft)}
    remedy = "an error of briefkit's: do not brief from it, and report it"
    found = []
    cautions = sections.get("Cautions")
    if cautions is None or not any("aft and forward cyclic" in point for point in cautions.points):
        found.append(Finding(Level.BLOCKS, place, "the page lacks the cautions", remedy))
    if cues.needs_low_g_caution(brief.aircraft) and not any("low g" in heading for heading in sections):
        found.append(Finding(Level.BLOCKS, place, "the page lacks the low-g caution of two blades", remedy))
    return found


def rough_air_findings(place: str, brief: Brief, table: ReductionTable) -> list[Finding]:
    """Our slowest answer under the manual's rough-air speed is for the chief pilot to know; the page prints neither."""
    answers = [row.answer.speed for row in table.rows if row.answer is not None]
    found = []
    for speed in brief.aircraft.speeds:
        if speed.applies != "turbulence" or speed.speed is None or not answers:
            continue
        if min(answers) < speed.speed:
            slowest = f"{min(answers).number:.0f} {table.unit}"
            text = f"the slowest answer in a turn, {slowest}, is under {speed.label}: {speed.text}"
            found.append(Finding(Level.NOTE, place, text, "the manual's speed alone is printed for rough air"))
    return found


def _one_sheet(place: str, brief: Brief, table: ReductionTable) -> list[Finding]:
    area = brief.operation.work_areas[brief.identity.work_area]
    second = recognition.recognition(brief.aircraft, brief.operation.entry_for(brief.aircraft), area)
    said = fit.complaint(replace(crew_page.first_sheet(brief, table), recognition=second))
    return [Finding(Level.NOTE, place, said)] if said else []
