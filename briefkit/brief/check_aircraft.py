"""What stands between an aircraft file and a released page: sources, spreads, and entry findings without a reason."""

from __future__ import annotations

from dataclasses import fields, replace
from pathlib import Path
from typing import Final

import numpy as np

from briefkit import units
from briefkit.aircraft.answers import EntryFinding, Kind, addressed, answered, finding
from briefkit.aircraft.cell_lines import line_of
from briefkit.aircraft.chart import Axis
from briefkit.aircraft.findings import all_findings, cell_text, explained, place_of
from briefkit.aircraft.load import load_configurations
from briefkit.aircraft.model import Aircraft, Limits, RotorData, Stated
from briefkit.brief.finding import Finding, Level, invented_finding, loaded, source_findings
from briefkit.envelope.chart_shape import LARGEST_RESIDUAL, chart_shape
from briefkit.reading.document import Document

# A value typed without a spread counts as exact. These never are: each moves the onset band or the pictures.
_NEVER_EXACT: Final = ("chord", "twist", "flap_inertia", "lift_slope", "drag_area")


def aircraft_findings(path: Path, configuration: str | None = None) -> tuple[Aircraft | None, list[Finding]]:
    """The aircraft of a file in one configuration, and what is found there; with None the basic one, and all looked at.

    None where the file has faults; the basic one where it has no such configuration (which the brief is told of).
    """
    known, found = loaded(path, load_configurations)
    if known is None:
        return None, found
    basic = next(iter(known.values()))
    asked = known.get(configuration or basic.configuration, basic)
    looked_at = known.values() if configuration is None else [asked]
    for aircraft in looked_at:
        found += _findings(str(path), aircraft)
    return asked, list(dict.fromkeys(found))


def _findings(place: str, aircraft: Aircraft) -> list[Finding]:
    found = invented_finding(place, aircraft.invented)
    charts = [(name, source) for name, source in aircraft.sources if name not in ("rotor", "limits")]
    found += source_findings(place, charts)
    found += _numbers_without_source(place, "rotor", aircraft.rotor)
    found += _numbers_without_source(place, "limits", aircraft.limits)
    for name in _NEVER_EXACT:
        if getattr(aircraft.rotor, name).spread == 0.0:
            remedy = 'add spread = "...", the half-width you would bet on at 95 %'
            found.append(Finding(Level.BLOCKS, f"{place}: rotor.{name}", "no spread", remedy))
    if aircraft.section is not None and aircraft.section.spread == 0.0:
        remedy = 'add spread = "1 deg", the half-width of its angle of maximum lift'
        found.append(Finding(Level.BLOCKS, f"{place}: section", "no spread", remedy))
    for entry in fields(aircraft.rotor):
        stated = getattr(aircraft.rotor, entry.name)
        if isinstance(stated, Stated) and not stated.known:
            found.append(Finding(Level.NOTE, f"{place}: rotor.{entry.name}", f"unknown; used: {stated.basis}"))
    if not aircraft.calibration.in_manual:
        text = "no calibration in the manual: indicated is taken as calibrated, give or take the spread"
        found.append(Finding(Level.NOTE, f"{place}: calibration", text))
    cells = aircraft.vne.speeds[np.isfinite(aircraft.vne.speeds)]
    outside = int(np.sum(np.isnan(aircraft.calibration.to_calibrated(cells))))
    if outside:
        text = f"{outside} cells lie outside the airspeed calibration: no answer is computed from them"
        found.append(Finding(Level.NOTE, f"{place}: vne.power_on.chart", text))
    every = [*similarity_findings(aircraft), *all_findings(aircraft)]
    found += _unanswered(place, aircraft, every)
    for answer in aircraft.answers:
        where = f"{place}: reasons.{answer.kind}"
        meant = [one for one in every if answered(replace(aircraft, answers=(answer,)), one)]
        text = f"answers {len(meant)} findings{f' ({answer.cells})' if answer.cells else ''}: {answer.reason}"
        found.append(Finding(Level.NOTE, where, text, "" if meant else "answers nothing: take it out"))
    return found


def _unanswered(place: str, aircraft: Aircraft, every: list[EntryFinding]) -> list[Finding]:
    """What still needs a reason, the cell farthest off the common curve first.

    A neighbour that only looks wrong beside such a cell is named with it, not by itself, for as long as that cell has
    no reason of its own.
    """
    document, path = Document(place), Path(place)
    file = f"{path.parent.name}/{path.name}" if path.parent.name == "aircraft" else path.name
    left = [one for one in every if not answered(aircraft, one)]
    found = []
    while left:
        one = left.pop(0)
        beside = []
        if one.kind is Kind.SIMILARITY and one.cells != "all":
            beside = explained(aircraft, one.cells, left)
            left = [other for other in left if other not in beside]
        names = list(dict.fromkeys(other.cells for other in beside))
        verb = "looks" if len(names) == 1 else "look"
        tail = f"; {' and '.join(names)} {verb} wrong only beside it" if names else ""
        fault, line = addressed(one, aircraft, file), line_of(document, one.fault.key)
        where = f"{place}, line {line}: {fault.key}" if line else f"{place}: {fault.key}"
        text = f"read {fault.read}; expected: {fault.permitted}{tail}"
        found.append(Finding(Level.REASON, where, text, fault.remedy))
    return found


def similarity_findings(aircraft: Aircraft) -> list[EntryFinding]:
    """Cells off the curve on which VNE over tip speed collapses against loading, the farthest first; one finding on
    "all" where the chart as a whole does not collapse.

    A configuration that reads the basic chart, capped or lowered, repeats none of the basic one's.
    """
    chart, basic, unit = aircraft.vne, aircraft.basic_vne, aircraft.units.speed
    if (basic is not None and chart.rows is basic.rows) or Axis.HEIGHT not in chart.variables:
        return []
    shape, found = chart_shape(aircraft), []
    table = "vne" if basic is None else f"configuration ({aircraft.configuration})"
    largest = units.show(LARGEST_RESIDUAL, "speed", unit)
    permitted = f"within {largest} of the curve all falling cells share (speed over tip speed against loading)"
    if not shape.collapses:
        worst = units.show(float(np.nanmax(np.abs(shape.residual))), "speed", unit, 1)
        falling = int(np.isfinite(shape.residual).sum())
        count = f"{len(shape.findings)} of {falling} cells off it, by up to {worst}"
        return [finding(Kind.SIMILARITY, "all", f"{table}.power_on", count, permitted)]
    for cell in shape.findings:
        off = units.show(abs(float(shape.residual[cell])), "speed", unit, 1)
        side = "above" if shape.residual[cell] > 0.0 else "below"
        index = tuple(int(at) for at in shape.index[cell])
        read = f"{cell_text(chart, index, unit)}, {off} {side} the curve of the others"
        found.append(finding(Kind.SIMILARITY, place_of(chart, index), f"{table}.power_on", read, permitted))
    return found


def _numbers_without_source(place: str, table: str, data: RotorData | Limits) -> list[Finding]:
    bare = []
    for entry in fields(data):
        stated = getattr(data, entry.name)
        parts = stated if isinstance(stated, tuple) else (stated,)
        if any(isinstance(part, Stated) and not part.source for part in parts):
            bare.append(entry.name)
    if not bare:
        return []
    remedy = 'one source = "document, page, revision" in the table serves them all'
    return [Finding(Level.BLOCKS, f"{place}: {table}", f"no source for {', '.join(bare)}", remedy)]
