"""The power-off VNE in the forms a manual may have it, read and put together."""

from __future__ import annotations

from typing import Final

from briefkit.aircraft import vne
from briefkit.aircraft.make import optional
from briefkit.aircraft.model import Limits, PowerOffVne
from briefkit.aircraft.tables import ChartTable, PowerOffTable
from briefkit.aircraft.vne import TypedVne
from briefkit.reading.document import Document

_FORMS: Final = (
    "constant; or less; or constant (or chart, lines) with to_height and less (14 CFR 27.1505(c)(2)); or a chart alone"
)


def read(document: Document, key: str, table: PowerOffTable) -> TypedVne | None:
    """Hold the form against the three permitted; the typed chart where there is one. Faults go to the document."""
    if document.has_fault_below(key):
        return None
    own = [name for name in ("constant", "chart", "lines") if getattr(table, name) is not None]
    if len(own) > 1:
        document.fault(f"{key}.{own[1]}", " and ".join(own), f"one of them: {_FORMS}", "take one out")
    elif not own and table.less is None:
        document.fault(f"{key}.constant", "nothing", _FORMS, "add the form the manual has")
    elif own and (table.less is None) != (table.to_height is None):
        read_ = f"{own[0]} with {'less' if table.less else 'to_height'} alone"
        remedy = "add to_height: up to which pressure altitude?" if table.less else "add less: what holds above it?"
        document.fault(f"{key}.{'to_height' if table.less else 'less'}", read_, _FORMS, remedy)
    elif not own and table.to_height is not None:
        document.fault(f"{key}.constant", "to_height without constant", _FORMS, "what holds up to that height?")
    if table.not_over is not None and table.less is None:
        document.fault(f"{key}.not_over", "not_over without less", "not_over limits what less leaves", "take it out")
    if table.chart is None and table.lines is None:
        return None
    return vne.read(document, key, _as_chart(table))


def build(
    document: Document, key: str, table: PowerOffTable, typed: TypedVne | None, limits: Limits
) -> PowerOffVne | None:
    """The power-off VNE; None with faults."""
    chart = None
    if typed is not None:
        chart = vne.build(document, key, _as_chart(table), typed, limits)
        if chart is None:
            return None
    return PowerOffVne(
        source=table.source,
        constant=optional(table.constant, table.source),
        less=optional(table.less, table.source),
        to_height=optional(table.to_height, table.source),
        not_over=optional(table.not_over, table.source),
        chart=chart,
    )


def _as_chart(table: PowerOffTable) -> ChartTable:
    return ChartTable.model_construct(
        chart=table.chart,
        lines=table.lines,
        reading=table.reading,
        reading_error=table.reading_error,
        source=table.source,
    )
