"""Configurations: what a supplement (doors off, floats, an external load) replaces or lowers, and on which serials.

A supplement's `vne` is a figure never to be passed ("150 km/h": the lesser of it and the basic chart) or an amount off
the basic chart ("less 15 kt"); its own chart, under power_on, replaces the basic one.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any, Final

from briefkit import units
from briefkit.aircraft import answers, cross, manual_speeds, power_off, vne
from briefkit.aircraft.make import needed, optional, pair
from briefkit.aircraft.model import Aircraft, Answer, Limits
from briefkit.aircraft.tables import ChartTable, ConfigurationEntry, PowerOffTable, SpeedEntry
from briefkit.aircraft.vne import TypedVne
from briefkit.errors import ReadingError
from briefkit.reading.document import Document
from briefkit.reading.quantity import Typed, quoted

KEY: Final = "configuration"
_FIGURE: Final = 'a speed never to be passed, like "150 km/h", or an amount off the basic VNE, like "less 15 kt"'
_SLACK: Final = 1e-9


@dataclass(frozen=True)
class TypedConfiguration:
    """One entry as typed, its charts read."""

    key: str
    entry: ConfigurationEntry
    cap: Typed | None
    less: Typed | None
    power_on: tuple[ChartTable, TypedVne] | None
    power_off: tuple[PowerOffTable, TypedVne | None] | None
    speeds: tuple[SpeedEntry, ...]
    answers: tuple[Answer, ...]


def read_all(document: Document, unit: str) -> list[TypedConfiguration]:
    """Every [[configuration]] of the file, with faults recorded in the document."""
    return [_read(document, key, entry, unit) for key, entry in document.entries(KEY, ConfigurationEntry)]


def check_all(
    document: Document, configurations: list[TypedConfiguration], basic: str, serials: list[str], limits: Limits | None
) -> None:
    """Names that stand twice, serials the file does not have, limits that contradict the basic ones."""
    names = [basic]
    for one in configurations:
        name = one.entry.name
        if name and name in names:
            document.fault(f"{one.key}.name", quoted(name), "a name of its own", f"taken: {', '.join(names)}")
        names.append(name or "")
        for field in ("serials", "not_for_serials"):
            for number, serial in enumerate(getattr(one.entry, field) or [], start=1):
                if serials and serial not in serials:
                    permitted = f"{', '.join(serials)}, as type.serials says"
                    document.fault(f"{one.key}.{field}, value {number}", quoted(serial), permitted)
        if one.entry.serials and one.entry.not_for_serials:
            permitted = "serials or not_for_serials, not both"
            document.fault(f"{one.key}.not_for_serials", "both", permitted, "take one out")
        if limits is not None and not document.has_fault_below(one.key):
            _check_limits(document, one, limits)


def apply(document: Document, basic: Aircraft, one: TypedConfiguration) -> Aircraft | None:
    """The basic aircraft in one of its configurations; None, with faults in the document, where a chart has any."""
    entry, source = one.entry, one.entry.source
    limits = _limits(basic.limits, entry)
    chart, off = basic.vne, basic.vne_off
    sources = [("configuration", source)]
    if one.power_on is not None:
        table, typed = one.power_on
        table = table if table.source else table.model_copy(update={"source": source})
        own = vne.build(document, f"{one.key}.power_on", table, typed, limits)
        if own is None:
            return None
        chart = own
        sources.append(("configuration.power_on", chart.source))
    if one.less is not None:
        chart = vne.lowered(chart, one.less, source)
    if one.cap is not None:
        chart = vne.capped(chart, one.cap, source)
    if one.power_off is not None:
        off_table, off_typed = one.power_off
        off_table = off_table if off_table.source else off_table.model_copy(update={"source": source})
        own_off = power_off.build(document, f"{one.key}.power_off", off_table, off_typed, limits)
        if own_off is None:
            return None
        off = own_off
        sources.append(("configuration.power_off", off.source))
    speeds = tuple(manual_speeds.build(speed, source) for speed in one.speeds)
    labels = {speed.label for speed in speeds}
    allowed, refused = _serials(basic, entry)
    return replace(
        basic,
        configuration=needed(entry.name),
        serials=allowed,
        refused_serials=refused,
        limits=limits,
        vne=chart,
        vne_off=off,
        # A supplement's speed replaces the basic one of the same name.
        speeds=(*speeds, *(speed for speed in basic.speeds if speed.label not in labels)),
        answers=one.answers if one.power_on is not None else (*basic.answers, *one.answers),
        sources=(*basic.sources, *sources),
        basic_vne=basic.vne,
    )


def _read(document: Document, key: str, entry: ConfigurationEntry, unit: str) -> TypedConfiguration:
    cap, less = _figure(document, f"{key}.vne", entry.vne)
    power_on, off = None, None
    if entry.power_on is not None:
        table = document.part(f"{key}.power_on", entry.power_on, ChartTable)
        typed = vne.read(document, f"{key}.power_on", table)
        power_on = (table, typed) if typed is not None else None
    if entry.power_off is not None:
        off_table = document.part(f"{key}.power_off", entry.power_off, PowerOffTable)
        off = off_table, power_off.read(document, f"{key}.power_off", off_table)
    speeds = []
    for number, raw in enumerate(entry.speeds or [], start=1):
        place = f"{key}.speeds (entry {number})"
        speeds.append(document.part(place, raw, SpeedEntry))
        manual_speeds.check(document, place, speeds[-1], unit)
    reasons: Mapping[str, Any] = entry.reasons or {}
    answered = answers.read_answers(document, f"{key}.reasons", reasons)
    if entry.vne is not None and entry.power_on is not None and less is not None:
        document.fault(f"{key}.vne", quoted(entry.vne), "an amount off the basic chart, or power_on, not both")
    return TypedConfiguration(key, entry, cap, less, power_on, off, tuple(speeds), answered)


def _figure(document: Document, place: str, text: str | None) -> tuple[Typed | None, Typed | None]:
    if text is None:
        return None, None
    less = text.strip().startswith("less ")
    typed = text.strip().removeprefix("less ")
    try:
        value, unit = units.read_with_unit(typed, "speed")
    except ReadingError as error:
        document.fault(place, quoted(text), _FIGURE, error.remedy)
        return None, None
    low, high = (1.0, 100.0) if less else (20.0, 250.0)
    if not low * units.KNOT <= value <= high * units.KNOT:
        document.fault(place, quoted(text), f"{low:g} to {high:g} kt", "look again at the digits and the unit")
        return None, None
    found = Typed(typed, value, unit)
    return (None, found) if less else (found, None)


def _limits(basic: Limits, entry: ConfigurationEntry) -> Limits:
    source = entry.source
    return replace(
        basic,
        max_mass=optional(entry.max_mass, source) or basic.max_mass,
        max_altitude=optional(entry.max_altitude, source) or basic.max_altitude,
        min_temperature=optional(entry.min_temperature, source) or basic.min_temperature,
        max_bank=optional(entry.max_bank, source) or basic.max_bank,
        rotor_on=pair(entry.rotor_on, source) if entry.rotor_on else basic.rotor_on,
        rotor_off=pair(entry.rotor_off, source) if entry.rotor_off else basic.rotor_off,
    )


def _check_limits(document: Document, one: TypedConfiguration, basic: Limits) -> None:
    """A supplement makes limits narrower; a larger mass needs a chart made for it."""
    entry, key = one.entry, one.key
    for name, typed, limit, upper in (
        ("max_altitude", entry.max_altitude, basic.max_altitude, True),
        ("max_bank", entry.max_bank, basic.max_bank, True),
        ("min_temperature", entry.min_temperature, basic.min_temperature, False),
    ):
        if typed is None or typed.value is None or limit is None:
            continue
        if (typed.value - limit.value) * (1.0 if upper else -1.0) > _SLACK:
            permitted = f"{'at most' if upper else 'not below'} {limit.text}, the basic limit"
            document.fault(f"{key}.{name}", typed.text, permitted, "a supplement does not widen this")
    mass = entry.max_mass.value if entry.max_mass else None
    if mass is not None and mass <= basic.min_mass.value:
        document.fault(
            f"{key}.max_mass", needed(entry.max_mass).text, f"more than {basic.min_mass.text}, limits.min_mass"
        )
    if mass is not None and mass > basic.max_mass.value * (1.0 + _SLACK) and one.power_on is None:
        permitted = f"at most {basic.max_mass.text}, for which the basic chart was made"
        remedy = "give the supplement's own chart under power_on"
        document.fault(f"{key}.max_mass", needed(entry.max_mass).text, permitted, remedy)
    for fault in cross.rotor_range_faults(key, entry.rotor_on, entry.rotor_off):
        document.fault(fault.key, fault.read, fault.permitted, fault.remedy)


def _serials(basic: Aircraft, entry: ConfigurationEntry) -> tuple[tuple[str, ...], tuple[tuple[str, str], ...]]:
    """The serials the configuration may be flown on, and the others, each with why not."""
    where = f" ({entry.source})" if entry.source else ""
    only = ", ".join(entry.serials or ())
    refused = []
    for serial in basic.serials:
        if serial in (entry.not_for_serials or ()):
            refused.append((serial, f"{entry.name} is not for serial {serial}{where}"))
        elif entry.serials and serial not in entry.serials:
            refused.append((serial, f"{entry.name} is for serials {only} only{where}"))
    names = [serial for serial, _ in refused]
    return tuple(serial for serial in basic.serials if serial not in names), tuple(refused)
