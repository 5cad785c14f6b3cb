"""The power-on VNE from whichever form the manual prints: a chart, lines, or a figure with slopes; capped or not."""

from __future__ import annotations

import re
from dataclasses import dataclass, replace
from typing import Final

import numpy as np

from briefkit import units
from briefkit.aircraft import chart_text, line_text, slope_text
from briefkit.aircraft.cells import Labels
from briefkit.aircraft.chart import Axis, Floats, ReadingRule, Texts, VneChart, density_altitude_of
from briefkit.aircraft.chart_text import TypedChart
from briefkit.aircraft.model import Limits
from briefkit.aircraft.slope_text import Slope
from briefkit.aircraft.tables import ChartTable
from briefkit.physics import atmosphere
from briefkit.reading.document import Document
from briefkit.reading.quantity import Typed, quoted

_FORMS: Final = ("chart", "lines", "base")
_SLOWEST: Final = 20.0 * units.KNOT
_COLDEST: Final = units.ZERO_CELSIUS - 80.0


@dataclass(frozen=True)
class TypedVne:
    """One VNE as typed: a chart or a base figure, with slopes; what depends on the limits comes later."""

    chart: TypedChart | None
    base: Typed | None
    slopes: tuple[Slope, ...]

    @property
    def unit(self) -> str:
        return self.chart.speed_unit if self.chart else self.base.unit if self.base else ""


def read(document: Document, key: str, table: ChartTable) -> TypedVne | None:
    """The VNE of a table at a dotted key; None, with its faults recorded in the document, where it has any."""
    before = len(document.faults)
    given = [form for form in _FORMS if getattr(table, form) is not None]
    if len(given) != 1:
        if not document.has_fault_below(key):
            read_ = " and ".join(given) or "nothing"
            document.fault(f"{key}.chart", read_, "one of chart, lines, base (with less for slopes)", "add it")
        return None
    chart = None
    if table.chart is not None:
        chart = chart_text.read_vne(document, f"{key}.chart", table.chart)
    elif table.lines is not None:
        chart = line_text.read_lines(document, f"{key}.lines", table.lines)
        if table.reading_error is None:
            remedy = 'add reading_error = "1 kt": how far a reading of the printed line may be out'
            document.fault(f"{key}.reading_error", "nothing", "an airspeed, needed with lines", remedy)
    typed = [slope_text.read_slope(document, f"{key}.less", text) for text in table.slopes]
    slopes = tuple(slope for slope in typed if slope is not None)
    _check_slopes(document, key, chart, slopes)
    _check_temperatures(document, key, table, chart, slopes)
    if len(document.faults) > before:
        return None
    return TypedVne(chart, table.base, slopes)


def build(document: Document, key: str, table: ChartTable, typed: TypedVne, limits: Limits) -> VneChart | None:
    """The chart in SI, its ends from the manual's limits where it has none of its own; None with faults."""
    axes: tuple[Labels, ...] = ()
    speeds: Floats = np.zeros(())
    texts: Texts = np.array("", dtype=object)
    straight: set[Axis] = set()
    rows: tuple[tuple[str, ...], ...] = ()
    if typed.chart is not None:
        axes, speeds, texts, rows = typed.chart.axes, typed.chart.speeds, typed.chart.texts, typed.chart.rows
        straight |= {axes[0].axis} if typed.chart.straight else set()
    elif typed.base is not None and typed.base.value is not None:
        speeds, texts = np.array(typed.base.value), np.array(typed.base.text, dtype=object)
        rows = (("VNE", "as typed"), ("base", typed.base.text))
    if typed.slopes:
        more, lost = slope_text.slope_axes(list(typed.slopes), _ends(limits, typed.slopes))
        speeds = speeds.reshape(speeds.shape + (1,) * lost.ndim) - lost
        texts = np.where(lost == 0.0, texts.reshape(texts.shape + (1,) * lost.ndim), "")
        axes, straight = (*axes, *more), straight | {axis.axis for axis in more}
        width = len(rows[0])
        rows += tuple((("less", slope.text) + ("",) * width)[: max(width, 2)] for slope in typed.slopes)
        slowest = float(np.nanmin(speeds))
        if slowest < _SLOWEST:
            read_ = f"{units.from_si(slowest, 'speed', typed.unit):,.0f} {typed.unit} at the end of the slope"
            document.fault(f"{key}.less", read_, "20 kt or more everywhere within the limits", "look again")
            return None
    return _chart(table, axes, speeds, texts, rows, straight, limits)


def capped(chart: VneChart, cap: Typed, source: str) -> VneChart:
    """The chart, and never above a figure: the lesser of its own cap and this one."""
    value = cap.value if cap.value is not None else np.inf
    if chart.cap is not None and chart.cap <= value:
        return chart
    return replace(chart, cap=value, cap_text=cap.text, cap_source=source)


def lowered(chart: VneChart, by: Typed, source: str) -> VneChart:
    """The chart with every entry, and its cap, less one airspeed; typed cells as the difference of what is typed."""
    less = by.value or 0.0
    printed = None if chart.printed is None else _differences(chart.printed, by)
    cap = None if chart.cap is None else chart.cap - less
    cap_text = f"{chart.cap_text} less {by.text}" if chart.cap_text else ""
    return replace(
        chart,
        speeds=chart.speeds - less,
        printed=printed,
        cap=cap,
        cap_text=cap_text,
        lowered=by.text,
        lowered_source=source,
    )


def _differences(printed: Texts, by: Typed) -> Texts:
    def difference(text: str) -> str:
        number, _ = units.read_with_unit(text, "number") if re.fullmatch(r"[\d.,]+", text) else (None, "")
        return "" if number is None else f"{number - units.from_si(by.value or 0.0, 'speed', by.unit):.6g}"

    return np.array([difference(str(text)) for text in printed.ravel()], dtype=object).reshape(printed.shape)


def _chart(
    table: ChartTable,
    axes: tuple[Labels, ...],
    speeds: Floats,
    texts: Texts,
    rows: tuple[tuple[str, ...], ...],
    straight: set[Axis],
    limits: Limits,
) -> VneChart:
    """Typed axes in the order of `VneChart.speeds`, with what marks and absent axes mean."""
    kinds = [axis.axis for axis in axes]
    nodes = {axis.axis: list(axis.values) for axis in axes}
    typed = tuple((axis.axis, axis.texts) for axis in axes)
    marks = {axis.axis: axis for axis in axes}
    order = [kinds.index(kind) for kind in Axis if kind in kinds]
    shape = tuple(len(nodes.get(kind, [0])) for kind in Axis)
    speeds, texts = speeds.transpose(order).reshape(shape), texts.transpose(order).reshape(shape)
    density = Axis.HEIGHT in marks and marks[Axis.HEIGHT].density
    if Axis.HEIGHT not in nodes:
        nodes[Axis.HEIGHT] = [atmosphere.LOWEST, limits.max_altitude.value]
        speeds, texts = np.repeat(speeds, 2, axis=0), np.repeat(texts, 2, axis=0)
    # "0 or less" and "-20 degC or below": one more entry where nothing lower can be, holding the same.
    bottoms = {
        Axis.HEIGHT: atmosphere.LOWEST_DENSITY_ALTITUDE if density else atmosphere.LOWEST,
        Axis.TEMPERATURE: _COLDEST,
    }
    for place, kind in enumerate(Axis):
        if kind in bottoms and kind in marks and marks[kind].or_less and bottoms[kind] < nodes[kind][0]:
            nodes[kind].insert(0, bottoms[kind])
            speeds = np.insert(speeds, 0, speeds.take(0, place), axis=place)
            texts = np.insert(texts, 0, texts.take(0, place), axis=place)
    mass = marks.get(Axis.MASS)
    chart = VneChart(
        heights=tuple(nodes[Axis.HEIGHT]),
        temperatures=tuple(nodes.get(Axis.TEMPERATURE, ())),
        masses=tuple(nodes.get(Axis.MASS, ())),
        speeds=speeds,
        reading=ReadingRule(table.reading),
        source=table.source,
        rows=rows,
        reading_error=(table.reading_error.value or 0.0) if table.reading_error else 0.0,
        covers_temperatures=table.covers_temperatures,
        reason=table.reason,
        rotor_speeds=tuple(nodes.get(Axis.ROTOR_SPEED, ())),
        density_altitude=density,
        bands=mass is not None and mass.bands,
        or_less=mass is not None and mass.or_less,
        straight=tuple(kind for kind in Axis if kind in straight),
        printed=texts,
        typed=typed,
    )
    return chart if table.cap is None else capped(chart, table.cap, table.source)


def _ends(limits: Limits, slopes: tuple[Slope, ...]) -> dict[Axis, tuple[float, float]]:
    """How far a slope runs on each axis [SI]: to the ends of what the manual permits."""
    top = limits.max_altitude.value
    heights = (atmosphere.LOWEST, top)
    if any(slope.density for slope in slopes):
        hottest = np.minimum(limits.max_temperature_at(top), units.ZERO_CELSIUS + 55.0)
        thinnest = density_altitude_of(np.array(top), np.asarray(hottest))
        heights = (atmosphere.LOWEST_DENSITY_ALTITUDE, 11_000.0 if np.isnan(thinnest) else float(thinnest))
    hottest_day = float(np.max(limits.max_temperature_at(atmosphere.LOWEST)))
    return {
        Axis.HEIGHT: heights,
        Axis.TEMPERATURE: (_COLDEST, min(hottest_day, units.ZERO_CELSIUS + 60.0)),
        Axis.MASS: (limits.min_mass.value, limits.max_mass.value),
        Axis.ROTOR_SPEED: (limits.rotor_on[0].value, limits.rotor_on[1].value),
    }


def _check_slopes(document: Document, key: str, chart: TypedChart | None, slopes: tuple[Slope, ...]) -> None:
    taken = {axis.axis for axis in chart.axes} if chart else set()
    for slope in slopes:
        first = next(other for other in slopes if other.axis is slope.axis)
        if slope.axis in taken:
            document.fault(f"{key}.less", quoted(slope.text), f"slopes over what the {key} chart has no axis for")
        elif (slope.density, slope.unit) != (first.density, first.unit):
            document.fault(f"{key}.less", quoted(slope.text), f"the same unit and kind of height as in {first.text!r}")


def _check_temperatures(
    document: Document, key: str, table: ChartTable, chart: TypedChart | None, slopes: tuple[Slope, ...]
) -> None:
    said = table.covers_temperatures
    own = [axis.axis for axis in chart.axes] if chart else []
    own += [slope.axis for slope in slopes]
    place = f"{key}.covers_temperatures"
    if said and Axis.TEMPERATURE in own:
        document.fault(place, quoted(said), "nothing: this VNE varies with temperature itself", "take it out")
    elif said and not re.search(r"\d", said):
        remedy = 'like "flight manual 2-5: the chart holds at all permitted temperatures"'
        document.fault(place, quoted(said), "the manual's statement with its page", remedy)
