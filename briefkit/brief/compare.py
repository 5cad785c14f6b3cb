"""What changed between two revisions of a brief, in words and numbers, and which figures became less conservative.

A VNE chart is compared as a crew reads it: at every height, temperature, mass and rotor speed that either revision
prints, by each manual's own reading rule. A turn table is compared at every mass that either prints, by its own rule
that the heavier line holds.
"""

from __future__ import annotations

import difflib
import json
import math
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, replace
from itertools import product
from pathlib import Path
from typing import Final

import numpy as np

from briefkit import units
from briefkit.aircraft.chart import Axis, ReadingRule
from briefkit.aircraft.legs import KEY as LEGS
from briefkit.aircraft.model import Aircraft, Stated
from briefkit.brief import compare_legs as legs
from briefkit.brief.identity import Brief, load_brief
from briefkit.brief.register import Turn
from briefkit.envelope.reductions import ReductionTable, RowKind, reductions
from briefkit.errors import BuildError

_SLACK: Final = 1e-6  # m/s, or of whatever a figure is in
_SHOWN: Final = 90


@dataclass(frozen=True)
class Difference:
    """One thing that changed: its name, what it was and is, and whether the new one asks less of a crew."""

    name: str
    old: str
    new: str
    less_conservative: bool = False

    def __str__(self) -> str:
        tail = ": less conservative" if self.less_conservative else ""
        return f"{self.name}: {self.old or 'nothing'} -> {self.new or 'nothing'}{tail}"


@dataclass(frozen=True)
class Revision:
    """One revision as compared: its files as loaded, and the rows of its table of turns."""

    brief: Brief
    turns: tuple[Turn, ...]


def turns_of(table: ReductionTable) -> tuple[Turn, ...]:
    """The rows of a table of turns as figures; where no turn is briefed, no bank is covered."""
    none = (RowKind.NO_TURN, RowKind.UNDER_FLOOR)
    return tuple(
        Turn(row.mass.text, 0.0 if row.kind in none else float(row.bank_deg), float(row.reduction))
        for row in table.rows
    )


def revision_of(folder: Path | str, turns: tuple[Turn, ...] | None = None) -> Revision:
    """A brief's folder as a revision; `turns` are the rows it printed, where they are on record.

    Raises `FaultyFile` with the faults of its files, and the refusal of a work area the manual forbids.
    """
    brief = load_brief(folder)
    if turns is None:
        fleet = brief.operation.entry_for(brief.aircraft)
        if fleet is None:
            raise BuildError(f"{brief.operation.file}: no fleet entry for {brief.aircraft.file}")
        turns = turns_of(reductions(brief.aircraft, fleet, brief.operation.work_areas[brief.identity.work_area]))
    return Revision(brief, turns)


def compare(old: Revision, new: Revision) -> list[Difference]:
    """Everything that changed, figures first, those that became less conservative before the others."""
    found = [*_turns(old, new), *_vne(old.brief.aircraft, new.brief.aircraft), *_figures(old, new), *_legs(old, new)]
    found.sort(key=lambda one: not one.less_conservative)
    found += [*_words(old.brief, new.brief), *_cells(old.brief, new.brief)]
    return [replace(one, name=_typeable(one.name)) for one in found]


def _typeable(name: str) -> str:
    """A name as a person types it into [[changes]]: plain spaces, a plain minus sign."""
    return name.replace("\u00a0", " ").replace("\u2212", "-")


def relaxed(old: Revision, new: Revision) -> list[Difference]:
    """The figures that became less conservative."""
    return [one for one in compare(old, new) if one.less_conservative]


def explained(brief: Brief, difference: Difference) -> str:
    """The reason the brief gives for a figure of its present revision, "" where it gives none.

    An entry of [[changes]] names figures in full, or their beginning up to a comma or colon: "VNE power on" is all.
    """
    for change in brief.identity.changes:
        for figure in map(_typeable, change.figures):
            whole = difference.name == figure or difference.name.startswith((f"{figure},", f"{figure}:"))
            if whole and change.reason and change.revision == brief.identity.revision:
                return change.reason
    return ""


def _turns(old: Revision, new: Revision) -> Iterator[Difference]:
    """At every mass either prints: the bank it is briefed to, and how much below VNE."""
    unit = new.brief.aircraft.units.speed
    masses = {units.read(turn.mass, "mass"): turn.mass for turn in (*old.turns, *new.turns)}
    for mass in sorted(masses, reverse=True):
        then, now = _row(old.turns, mass), _row(new.turns, mass)
        name = f"turn at {masses[mass]}"
        if then == now:
            continue
        steeper = now[0] > then[0] + _SLACK
        # Less below VNE counts where there still is a turn; where no turn is briefed any more, nothing is taken off.
        faster = now[0] > 0.0 and then[0] > 0.0 and _to_unit(now[1], new, unit) < _to_unit(then[1], old, unit) - _SLACK
        yield Difference(name, _row_text(then, old), _row_text(now, new), steeper or faster)


def _row(turns: tuple[Turn, ...], mass: float) -> tuple[float, float]:
    """(bank, reduction) that hold at a mass: those of the lightest row at or above it; (0, 0) above the heaviest."""
    above = [turn for turn in turns if units.read(turn.mass, "mass") >= mass - 5e-4]
    if not above:
        return 0.0, 0.0
    row = min(above, key=lambda turn: units.read(turn.mass, "mass"))
    return row.bank, row.reduction


def _to_unit(reduction: float, revision: Revision, unit: str) -> float:
    own = revision.brief.aircraft.units.speed
    return reduction if own == unit else units.from_si(units.to_si(reduction, "speed", own), "speed", unit)


def _row_text(row: tuple[float, float], revision: Revision) -> str:
    bank, reduction = row
    if bank == 0.0:
        return "no turn"
    taken = f"VNE less {reduction:g} {revision.brief.aircraft.units.speed}" if reduction else "VNE"
    return f"up to {bank:g} deg, {taken}"


def _vne(old: Aircraft, new: Aircraft) -> Iterator[Difference]:
    """Power-on and power-off VNE at every point of either chart."""
    axes = [_union(old.vne.axes[axis], new.vne.axes[axis]) for axis in Axis]
    for point in product(*axes):
        then, now = (_read(aircraft, point) for aircraft in (old, new))
        place = _place(new, point) or _place(old, point) or _plain_place(new, point)
        for name, before, after in zip(("VNE power on", "VNE power off"), then, now, strict=True):
            if _same(before, after):
                continue
            raised = math.isfinite(after) and not after <= before + _SLACK
            yield Difference(f"{name}, {place}", _speed(before, old), _speed(after, new), raised)
    if old.vne.reading is not new.vne.reading:
        raised = new.vne.reading is ReadingRule.INTERPOLATE
        yield Difference("VNE power on, between entries", str(old.vne.reading), str(new.vne.reading), raised)


def _union(*axes: tuple[float, ...]) -> list[float]:
    """The nodes of both, rising; two that differ only by a conversion there and back are one. [nan] for no axis."""
    nodes: list[float] = []
    for value in sorted(value for axis in axes for value in axis):
        if not nodes or value - nodes[-1] > 1e-3 * max(1.0, abs(value) * 1e-3):
            nodes.append(value)
    return nodes or [math.nan]


def _read(aircraft: Aircraft, point: tuple[float, ...]) -> tuple[float, float]:
    """VNE power on and power off [m/s indicated] at a point; an axis a chart does not have does not matter to it."""
    height, temperature, mass, rotor_speed = (
        default if math.isnan(value) else value
        for value, default in zip(point, (0.0, units.ZERO_CELSIUS, aircraft.limits.max_mass.value, 1.0), strict=True)
    )
    chart = aircraft.vne
    if chart.density_altitude and not chart.temperatures:
        temperature = _standard_day(height)
    on = float(chart.indicated(height, temperature, mass, rotor_speed))
    return on, float(aircraft.vne_off.indicated(on, height, temperature, mass, rotor_speed))


def _standard_day(height: float) -> float:
    """On it a density altitude is the pressure altitude."""
    return units.SEA_LEVEL_TEMPERATURE - units.LAPSE_RATE * height


def _same(one: float, other: float) -> bool:
    return (math.isnan(one) and math.isnan(other)) or abs(one - other) <= _SLACK


def _speed(value: float, aircraft: Aircraft) -> str:
    if math.isnan(value):
        return "not on the chart"
    shown = math.floor(units.from_si(value, "speed", aircraft.units.speed) * 10.0 + 1e-6) / 10.0
    return f"{shown:g} {aircraft.units.speed_label()}"


def _place(aircraft: Aircraft, point: tuple[float, ...]) -> str:
    """The point as its manual names it; "" where it is on no entry of this chart."""
    chart, parts = aircraft.vne, []
    names = ("point", "line", "at", "at") if chart.typed and chart.typed[0][0] in chart.straight else _NAMES
    for name, (axis, texts) in zip(names, chart.typed, strict=False):
        nodes, value = chart.axes[axis], point[list(Axis).index(axis)]
        near = [i for i, node in enumerate(nodes) if abs(node - value) <= 1e-3 * max(1.0, abs(value) * 1e-3)]
        if not near:
            return ""
        parts.append(f"{name} {texts[max(near[0] - (len(nodes) - len(texts)), 0)]}")
    return ", ".join(parts)


_NAMES: Final = ("row", "column", "at", "at")


def _plain_place(aircraft: Aircraft, point: tuple[float, ...]) -> str:
    shown = aircraft.units
    kinds = (("height", shown.height), ("temperature", "degC"), ("mass", shown.mass), ("ratio", "%"))
    known = [(value, *kind) for value, kind in zip(point, kinds, strict=True) if not math.isnan(value)]
    return "at " + ", ".join(units.show(value, kind, unit) for value, kind, unit in known)


_LOWER_IS_SAFER: Final = ("max_mass", "max_altitude", "isa_deviation", "max_temperature", "max_bank")
_HIGHER_IS_SAFER: Final = ("min_mass", "min_temperature", "climb_speed")


def _figures(old: Revision, new: Revision) -> Iterator[Difference]:
    """Limits, the manual's other speeds, the briefed bank and the floor, each with the direction that is safer."""
    then, now = dict(_stated(old.brief)), dict(_stated(new.brief))
    for name in dict.fromkeys([*then, *now]):
        (a, safer), (b, _) = then.get(name, (None, now.get(name, (None, 0))[1])), now.get(name, (None, 0))
        if a is not None and b is not None and _same(a.value, b.value) and _same(a.spread, b.spread):
            if a.text != b.text:
                yield Difference(name, a.text, b.text)
            continue
        if a is not None and b is not None and a.text == b.text and _same(a.value, b.value):
            b = replace(b, text=f"{b.text}, {'narrower' if b.spread < a.spread else 'wider'} spread")
        # A limit that is gone holds nobody back any more; a new one can only hold back.
        loose = b is None if a is None or b is None else (b.value - a.value) * safer < -_SLACK
        yield Difference(name, a.text if a else "", b.text if b else "", bool(safer) and loose and a is not None)


def _stated(brief: Brief) -> Iterator[tuple[str, tuple[Stated, int]]]:
    """(name, (figure, direction that is safer: 1 higher, -1 lower, 0 neither))"""
    limits, aircraft = brief.aircraft.limits, brief.aircraft
    for keys, direction in ((_LOWER_IS_SAFER, -1), (_HIGHER_IS_SAFER, 1)):
        for key in keys:
            if (stated := getattr(limits, key)) is not None:
                yield f"limits, {key}", (stated, direction)
    for key, pair in (("rotor_on", limits.rotor_on), ("rotor_off", limits.rotor_off)):
        yield f"limits, {key}, lowest", (pair[0], 1)
        yield f"limits, {key}, highest", (pair[1], -1)
    for name, stated in aircraft.vne_off.figures:
        yield f"VNE power off: {name}", (stated, 0)  # what it does is compared point by point
    for speed in aircraft.speeds:
        if speed.speed is not None:
            yield f"manual speed, {speed.label}", (Stated(speed.speed.value, speed.text, speed.source), -1)
        elif speed.less_than_vne is not None:
            yield f"manual speed, {speed.label}", (Stated(speed.less_than_vne, speed.text, speed.source), 1)
    fleet = brief.operation.entry_for(aircraft)
    if fleet is not None:
        yield "brief_bank", (fleet.brief_bank, -1)
        if fleet.fuel_burn is not None:
            yield "fuel_burn", (legs.burn_at_least(fleet.fuel_burn), -1)  # more: lighter lines sooner along a leg
        for key in ("imc_speed", "minimum_manoeuvring_speed", "climb"):
            if (stated := getattr(fleet, key)) is not None:
                yield key, (stated, 1)
    for table in aircraft.hover_tables:
        for index, value in np.ndenumerate(table.ceilings):
            mass = units.show(table.masses[index[0]], "mass", aircraft.units.mass)
            shift = 0.0 if table.above_standard else units.ZERO_CELSIUS
            place = f"hover {table.kind}, {mass}, {units.show_number(table.columns[index[1]] - shift)}"
            yield place, (Stated(float(value), units.show(float(value), "height", aircraft.units.height), ""), -1)


def _legs(old: Revision, new: Revision) -> Iterator[Difference]:
    """The legs on either revision's page: figure by figure, or whole where one of the two does not have it."""
    then, now = legs.legs_of(old.brief), legs.legs_of(new.brief)
    for name in dict.fromkeys([*then, *now]):
        a, b = then.get(name), now.get(name)
        was_on, is_on = legs.on_page(old.brief, a), legs.on_page(new.brief, b)
        if not was_on and not is_on:
            continue
        if a is None or b is None or was_on is not is_on:
            yield Difference(name, legs.whole(old.brief, a), legs.whole(new.brief, b), is_on and not was_on)
            continue
        for (figure, one, safer), (_, other, _) in zip(legs.figures_of(a), legs.figures_of(b), strict=True):
            moved = not _same(one.value, other.value)
            if moved or one.text != other.text:
                loose = (other.value - one.value) * safer < 0.0
                yield Difference(f"{name}, {figure}", one.text, other.text, moved and loose)
        if a.work_area != b.work_area:
            yield Difference(f"{name}, work area", a.work_area, b.work_area)
        if a.source != b.source:
            yield Difference(f"{name}, source", a.source, b.source)


def _words(old: Brief, new: Brief) -> Iterator[Difference]:
    then, now = _texts(old), _texts(new)
    for name in dict.fromkeys([*then, *now]):
        if then.get(name, "") != now.get(name, ""):
            yield Difference(name, then.get(name, ""), now.get(name, ""))


def _texts(brief: Brief) -> dict[str, str]:
    identity, aircraft, operation = brief.identity, brief.aircraft, brief.operation
    area, fleet = operation.work_areas[identity.work_area], operation.entry_for(aircraft)
    texts = {
        "number": identity.number,
        "revision": str(identity.revision),
        "title": identity.title,
        "issued": str(identity.issued),
        "effective": str(identity.effective),
        "expires": str(identity.expires),
        "aircraft": f"{aircraft.name}, {aircraft.configuration}",
        "serials": ", ".join(identity.serials),
        "basis": "; ".join(identity.basis),
        "work area": area.name,
        "work area, heights": f"{area.low_altitude.text} to {area.high_altitude.text}",
        "work area, temperatures": f"{area.low_temperature.text} to {area.high_temperature.text}",
        "masses": ", ".join(mass.text for mass in fleet.masses) if fleet else "",
        "status": fleet.status if fleet else "",
        "documents above this one": ", ".join(operation.documents),
        "recovery": f"{aircraft.recovery} ({aircraft.recovery_source})" if aircraft.recovery else "",
        "calibration": "; ".join(" ".join(row) for row in aircraft.calibration.text),
    }
    texts |= {f"manual speed, {speed.label}, words": speed.text for speed in aircraft.speeds}
    sources = (one for one in (*aircraft.sources, *operation.sources) if not one[0].startswith(f"{LEGS} "))
    texts |= {f"source of {key}": source for key, source in sources if source}  # a leg's stands by its name
    return texts


def _cells(old: Brief, new: Brief) -> Iterator[Difference]:
    """The notebook's cells, matched as a whole and shown by the first line that differs."""
    then, now = (_sources(brief.identity.notebook) for brief in (old, new))
    matcher = difflib.SequenceMatcher(None, then, now, autojunk=False)
    for kind, a, b, c, d in matcher.get_opcodes():
        if kind == "equal":
            continue
        for i in range(max(b - a, d - c)):
            was, is_now = then[a + i] if a + i < b else "", now[c + i] if c + i < d else ""
            at = c + i + 1 if c + i < d else a + i + 1
            yield Difference(f"notebook cell {at}", *_first_change(was, is_now))


def _sources(notebook: Path) -> list[str]:
    try:
        cells = json.loads(notebook.read_text(encoding="utf-8"))["cells"]
        return [text if isinstance(text := cell["source"], str) else "".join(text) for cell in cells]
    except (OSError, ValueError, KeyError, TypeError, AttributeError):
        raise BuildError(f"{notebook.name}: not a notebook that can be read") from None


def _first_change(old: str, new: str) -> tuple[str, str]:
    pairs = _pairs(old.splitlines(), new.splitlines())
    a, b = next(((a, b) for a, b in pairs if a != b), (old, new))
    return tuple(f"{text[: _SHOWN - 3]}..." if len(text) > _SHOWN else text for text in (a, b))  # type: ignore[return-value]


def _pairs(old: Iterable[str], new: Iterable[str]) -> Iterator[tuple[str, str]]:
    a, b = list(old), list(new)
    for i in range(max(len(a), len(b))):
        yield (a[i] if i < len(a) else ""), (b[i] if i < len(b) else "")
