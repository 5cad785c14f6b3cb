"""The crew's page as finished strings: what the template sets before and after the author's own analysis."""

from __future__ import annotations

from dataclasses import replace

from briefkit.brief import assumptions, control, derivation, front, overview, pictures, recognition
from briefkit.brief.identity import Brief
from briefkit.brief.pages import CrewPage, Section
from briefkit.brief.sources import sources
from briefkit.brief.standing import DRAFT, Standing
from briefkit.envelope.reductions import ReductionTable, RowKind, reductions
from briefkit.errors import BuildError


def table_of(brief: Brief) -> ReductionTable:
    """The brief's table of turns; raises as `crew_page`."""
    aircraft, operation = brief.aircraft, brief.operation
    fleet = operation.entry_for(aircraft)
    if fleet is None:
        key = aircraft.file.removesuffix(".toml")
        raise BuildError(f"{operation.file}: no table [fleet.{key}] for {aircraft.file}; add its masses and brief_bank")
    return reductions(aircraft, fleet, operation.work_areas[brief.identity.work_area])


def crew_page(brief: Brief, version: str, standing: Standing | None = None) -> CrewPage:
    """Pages 1 to 4 of a brief; without a `standing` (see `release`) it is a draft that nobody has signed.

    Raises the refusal of a block point the manual forbids, and `BuildError` where the operation has no fleet entry for
    the aircraft.
    """
    known = standing.table if standing is not None else None
    table = table_of(brief) if known is None else known
    aircraft, area = brief.aircraft, brief.operation.work_areas[brief.identity.work_area]
    listed = sources(brief)
    page = replace(
        first_sheet(brief, table),
        recognition=recognition.recognition(aircraft, brief.operation.entry_for(aircraft), area),
        analysis=_analysis(brief, table),
        control=control.control(brief, version, listed, standing),
        slip=control.slip(brief.identity),
        sources=listed,
    )
    if standing is None:
        return page
    page = replace(page, content=standing.seal.content)
    if standing.expired is not None:
        ended = control.day(standing.expired)
        return replace(page, mark=f"EXPIRED {ended}: not for crews", heading=f"EXPIRED {ended}: {page.heading}")
    return replace(page, mark=standing.mark)


def first_sheet(brief: Brief, table: ReductionTable) -> CrewPage:
    """Sheet 1 alone, as a draft: enough to see whether it fits."""
    identity, aircraft, operation = brief.identity, brief.aircraft, brief.operation
    fleet, area = operation.entry_for(aircraft), operation.work_areas[identity.work_area]
    if fleet is None:
        raise BuildError(f"{operation.file}: no fleet entry for {aircraft.file}")
    above = ", then ".join((*operation.documents, "this page"))
    return CrewPage(
        number=identity.number,
        revision=f"rev {identity.revision}",
        title=identity.title,
        expires=f"expires {control.day(identity.expires)}",
        mark=DRAFT,
        heading=f"{aircraft.name}, {aircraft.configuration}: {area.name}",
        under=(
            f"Serials {control.listed(identity.serials)} only. For briefing; not for working out speeds in flight.",
            f"Flight manual, placards and markings first, then {above}.",
        ),
        front=front.front(aircraft, fleet, area, table),
        recognition=(),
        analysis=(),
        control=(),
        invented=aircraft.invented,
        unit="" if aircraft.units.speed == "kt" else aircraft.units.speed,
    )


def _analysis(brief: Brief, table: ReductionTable) -> tuple[Section, ...]:
    """Sheet 3 before the author's own analysis: method, rows, pictures, legs, what sets where, chart, assumptions."""
    aircraft, operation = brief.aircraft, brief.operation
    row, read = derivation.worked_row(table), (aircraft.vne.source, aircraft.calibration.source)
    fleet, areas = operation.entry_for(aircraft), operation.work_areas
    legs: tuple[Section, ...] = ()
    set_by: tuple[Section, ...] = ()
    if fleet is not None:
        briefed = areas[brief.identity.work_area]
        legs = overview.leg_sections(aircraft, fleet, briefed, table, operation.legs)
        set_by = (overview.set_by_section(aircraft, fleet, areas.values(), briefed, table),)
    on_chart = (
        (Section("One row on the chart", figure=pictures.row_on_chart(aircraft, row), sources=read),) if row else ()
    )
    taken_off = any(one.kind is not RowKind.VNE_LIMITS for one in table.rows)
    stairs = (
        (Section("The reduction as a picture", figure=pictures.stairs(aircraft, table), sources=read),)
        if taken_off
        else ()
    )
    return (
        derivation.method(aircraft, table),
        *on_chart,
        derivation.rows_section(aircraft, table),
        *stairs,
        *legs,
        *set_by,
        derivation.chart_section(aircraft),
        *recognition.ceilings(aircraft),
        assumptions.assumptions(aircraft, table),
    )
