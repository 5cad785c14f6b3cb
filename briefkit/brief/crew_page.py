"""The crew's page as finished strings: what the template sets before and after the author's own analysis."""

from __future__ import annotations

from typing import Final

from briefkit.aircraft.model import Aircraft
from briefkit.brief import control, derivation, front, pictures, recognition
from briefkit.brief.identity import Brief
from briefkit.brief.pages import CrewPage, Section
from briefkit.envelope.reductions import ReductionTable, RowKind, reductions
from briefkit.errors import BuildError

DRAFT: Final = "DRAFT: not for crews"


def crew_page(brief: Brief, version: str) -> CrewPage:
    """Pages 1 to 4 of a brief.

    Raises the refusal of a block point the manual forbids, and `BuildError` where the operation has no fleet entry for
    the aircraft.
    """
    identity, aircraft, operation = brief.identity, brief.aircraft, brief.operation
    fleet, area = operation.entry_for(aircraft), operation.work_areas[identity.work_area]
    if fleet is None:
        key = aircraft.file.removesuffix(".toml")
        raise BuildError(f"{operation.file}: no table [fleet.{key}] for {aircraft.file}; add its masses and brief_bank")
    table = reductions(aircraft, fleet, area)
    serials = control.listed(identity.serials)
    above = ", then ".join((*operation.documents, "this page"))
    return CrewPage(
        number=identity.number,
        revision=f"rev {identity.revision}",
        title=identity.title,
        expires=f"expires {control.day(identity.expires)}",
        mark=DRAFT,
        heading=f"{aircraft.name}, {aircraft.configuration}: {area.name}",
        under=(
            f"Serials {serials} only. For briefing; not for working out speeds in flight.",
            f"Flight manual, placards and markings first, then {above}.",
        ),
        front=front.front(aircraft, fleet, area, table),
        recognition=recognition.recognition(aircraft),
        analysis=_analysis(aircraft, table),
        control=control.control(brief, version),
        slip=control.slip(identity),
        invented=aircraft.invented,
    )


def _analysis(aircraft: Aircraft, table: ReductionTable) -> tuple[Section, ...]:
    """Sheet 3 before the author's own analysis: the method, each row, the pictures, the chart, the assumptions."""
    row = derivation.worked_row(table)
    on_chart = (Section("One row on the chart", figure=pictures.row_on_chart(aircraft, row)),) if row else ()
    taken_off = any(one.kind is not RowKind.VNE_LIMITS for one in table.rows)
    stairs = (Section("The reduction as a picture", figure=pictures.stairs(aircraft, table)),) if taken_off else ()
    return (
        derivation.method(aircraft, table),
        *on_chart,
        derivation.rows_section(aircraft, table),
        *stairs,
        derivation.chart_section(aircraft),
        derivation.assumptions(aircraft, table),
    )
