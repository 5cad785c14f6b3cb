"""An aircraft file (TOML) to an `Aircraft`, or every fault in it at once."""

from __future__ import annotations

import hashlib
from dataclasses import replace
from pathlib import Path
from typing import Final

from briefkit.aircraft import answers, configuration, cross, hover, make, manual_speeds, power_off, section_table, vne
from briefkit.aircraft.calibration_text import CalibrationRows, read_calibration
from briefkit.aircraft.make import needed
from briefkit.aircraft.model import Aircraft, DisplayUnits, HoverLine, HoverTable
from briefkit.aircraft.tables import (
    CalibrationTable,
    ChartTable,
    HoverEntry,
    LimitsTable,
    PowerOffTable,
    RecoveryTable,
    RotorTable,
    SpeedEntry,
    TypeTable,
    UnitsTable,
)
from briefkit.aircraft.vne import TypedVne
from briefkit.errors import Fault, FaultyFile
from briefkit.reading.document import Document
from briefkit.reading.quantity import quoted

NONE_IN_MANUAL: Final = "none in manual"
_REQUIRED: Final = ("type", "units", "rotor", "limits", "calibration", "vne")
_BELONGS: Final = {
    "reasons": answers.TABLE,
    "power_on": "[vne.power_on]",
    "power_off": "[vne.power_off]",
    "speeds": "[[manual.speeds]]",
}
_OPTIONAL: Final = ("invented", "manual", "hover", "recovery", configuration.KEY, section_table.KEY)


def load_aircraft(path: Path | str, configuration: str = "") -> Aircraft:
    """The aircraft of a TOML file in one of its configurations ("" for the basic one), in SI.

    Every speed in the file is an indicated one, as the manual prints it. Raises `FaultyFile` with every fault of the
    file, whichever configuration is asked for: file, line, key or row and column, what was read, what is permitted,
    what to write instead; and where the file has no such configuration.
    """
    known = load_configurations(path)
    if not configuration:
        return next(iter(known.values()))
    if configuration not in known:
        permitted = ", ".join(f'"{name}"' for name in known)
        raise FaultyFile([Fault(str(path), "configuration", quoted(configuration), permitted)])
    return known[configuration]


def load_configurations(path: Path | str) -> dict[str, Aircraft]:
    """Every configuration of an aircraft file by its name, the basic one first. Raises as `load_aircraft` does."""
    document = Document(path)
    document.tables("", _REQUIRED, _OPTIONAL)
    document.tables("vne", ("power_on", "power_off"), ("reasons",))
    document.tables("manual", (), ("speeds",))
    _misplaced(document)
    parts = _Parts(document)
    document.raise_faults()
    found = parts.aircraft()
    document.raise_faults()
    return {aircraft.configuration: aircraft for aircraft in found}


def _misplaced(document: Document) -> None:
    """A table of the right name at the top of the file: the remedy says where it belongs, not to take it out."""
    for name, belongs in _BELONGS.items():
        for i, fault in enumerate(document.faults):
            if fault.key == name:
                document.faults[i] = replace(fault, remedy=f"did you mean {belongs}?")


class _Parts:
    """The tables of one file as far as they could be read, and what is made of them once there is no fault."""

    def __init__(self, document: Document) -> None:
        self.document = document
        self.type = document.table("type", TypeTable)
        self.units = document.table("units", UnitsTable)
        self.rotor = document.table("rotor", RotorTable)
        self.limits = document.table("limits", LimitsTable)
        self.calibration = document.table("calibration", CalibrationTable)
        self.power_on = document.table("vne.power_on", ChartTable)
        self.power_off = document.table("vne.power_off", PowerOffTable)
        self.speeds = document.entries("manual.speeds", SpeedEntry)
        self.hover = document.entries("hover", HoverEntry)
        self.recovery = document.table("recovery", RecoveryTable)
        self.section_entry = document.table(section_table.KEY, section_table.SectionEntry)
        self.section = section_table.read_section(document, self.section_entry)
        self.invented = document.data.get("invented", "")
        if not isinstance(self.invented, str):
            document.fault("invented", quoted(self.invented), "a sentence in quotes")
        unit = (self.units.speed or "") if self.units else ""
        self.typed_on = vne.read(document, "vne.power_on", self.power_on) if self.power_on else None
        self.typed_off = power_off.read(document, "vne.power_off", self.power_off) if self.power_off else None
        self.calibrated = self._calibrated()
        self.hover_tables = self._hover()
        self.configurations = configuration.read_all(document, unit)
        self.answers = answers.read_answers(document, "vne.reasons", document.raw("vne.reasons"))
        for name, entry in self.speeds:
            manual_speeds.check(document, name, entry, unit)
        self._cross()
        if self.units:
            self._units(self.units)

    def _calibrated(self) -> CalibrationRows | None:
        table = self.calibration
        if not table or table.table is None:
            return None
        if table.table.strip() != NONE_IN_MANUAL:
            return read_calibration(self.document, "calibration.table", table.table)
        if table.spread is None:
            remedy = 'add spread = "4 kt": how far indicated and calibrated may lie apart'
            self.document.fault("calibration.spread", "nothing", f'a speed, needed with "{NONE_IN_MANUAL}"', remedy)
        return None

    def _hover(self) -> list[HoverTable]:
        found = []
        for name, entry in self.hover:
            lines, table = (entry.label, entry.text), (entry.kind, entry.table)
            given = [value is not None for value in (*lines, *table)]
            if given not in ([True, True, False, False], [False, False, True, True]):
                if not self.document.has_fault_below(name):
                    permitted = "label and text (a line of words), or kind and table (ceilings)"
                    keys = [key for key, there in zip(("label", "text", "kind", "table"), given, strict=True) if there]
                    self.document.fault(name, ", ".join(keys) or "nothing", permitted)
            elif entry.table is not None:
                read = hover.read_hover(self.document, f"{name}.table", entry)
                found += [read] if read is not None else []
        return found

    def _cross(self) -> None:
        document, limits = self.document, self.limits
        faults = cross.limit_faults(limits) if limits else []
        whole = limits is not None and not document.has_fault_below("limits")
        if whole and limits is not None:
            faults += cross.hottest_faults(limits)
        faults += cross.rotor_faults(self.rotor) if self.rotor else []
        faults += cross.loading_faults(self.rotor, limits) if self.rotor and limits else []
        faults += cross.drag_faults(self.rotor, limits) if self.rotor and limits else []
        for key, table in (("rotor", self.rotor), ("limits", limits)):
            faults += cross.spread_faults(key, table) if table else []
        if self.calibrated:
            faults += cross.calibration_faults(self.calibrated.indicated, self.calibrated.calibrated)
        for fault in faults:
            document.fault(fault.key, fault.read, fault.permitted, fault.remedy)
        kind = self.type
        basic, serials = ((kind.configuration or ""), (kind.serials or [])) if kind else ("", [])
        made = make.limits(limits) if whole and not faults and limits is not None else None
        configuration.check_all(document, self.configurations, basic, serials, made)

    def _units(self, shown: UnitsTable) -> None:
        """Everything an aircraft file takes from the manual is in the manual's units."""
        faults = []
        for key, table in (("limits", self.limits), ("vne.power_on", self.power_on), ("vne.power_off", self.power_off)):
            faults += cross.unit_faults(key, cross.typed_units(table) if table else [], shown)
        charts = [("vne.power_on", self.typed_on), ("vne.power_off", self.typed_off)]
        for one in self.configurations:
            figures = [("vne", figure.unit) for figure in (one.cap, one.less) if figure is not None]
            faults += cross.unit_faults(one.key, [*cross.typed_units(one.entry), *figures], shown)
            charts += [(f"{one.key}.power_on", one.power_on[1])] if one.power_on else []
            charts += [(f"{one.key}.power_off", one.power_off[1])] if one.power_off else []
            if one.power_off:
                faults += cross.unit_faults(f"{one.key}.power_off", cross.typed_units(one.power_off[0]), shown)
        for key, chart in charts:
            faults += cross.unit_faults(key, [*_chart_units(chart)] if chart else [], shown)
        if self.calibrated:
            faults += cross.unit_faults("calibration", [("table", self.calibrated.unit)], shown)
        for ceilings in self.hover_tables:
            cells = [ceilings.rows[0][0].split()[0], ceilings.rows[0][-1]]
            faults += cross.unit_faults(f"hover ({ceilings.kind})", [("table", unit) for unit in cells], shown)
        for fault in faults:
            self.document.fault(fault.key, fault.read, fault.permitted, fault.remedy)

    def aircraft(self) -> list[Aircraft]:
        """The frozen models, the basic configuration first; only asked for when there is no fault so far.

        What depends on the limits (how far a slope runs) can still be a fault: then fewer come back.
        """
        basic = self._basic()
        if basic is None:
            return []
        found = [basic]
        for one in self.configurations:
            made = configuration.apply(self.document, basic, one)
            found += [made] if made is not None else []
        return found

    def _basic(self) -> Aircraft | None:
        document, kind, shown = self.document, needed(self.type), needed(self.units)
        on_table, off_table = needed(self.power_on), needed(self.power_off)
        limits = make.limits(needed(self.limits))
        chart = vne.build(document, "vne.power_on", on_table, needed(self.typed_on), limits)
        off = power_off.build(document, "vne.power_off", off_table, self.typed_off, limits)
        if chart is None or off is None:
            return None
        recovery = self.recovery or RecoveryTable()
        name = needed(kind.configuration)
        return Aircraft(
            name=needed(kind.name),
            serials=tuple(needed(kind.serials)),
            configuration=name,
            units=DisplayUnits(needed(shown.speed), needed(shown.height), needed(shown.mass), needed(shown.pressure)),
            rotor=make.rotor(needed(self.rotor), needed(needed(self.limits).max_mass)),
            limits=limits,
            calibration=make.calibration(needed(self.calibration), self.calibrated),
            vne=chart,
            vne_off=off,
            speeds=tuple(manual_speeds.build(entry) for _, entry in self.speeds),
            hover=self._hover_lines(),
            hover_tables=tuple(self.hover_tables),
            answers=self.answers,
            recovery=recovery.text or "",
            recovery_source=recovery.source,
            invented=self.invented,
            file=document.path.name,
            data_hash=self._data_hash(),
            sources=self._sources(),
            unanswered=document.unanswered(),
            configurations=(name, *(needed(one.entry.name) for one in self.configurations)),
            section=self.section,
        )

    def _data_hash(self) -> str:
        """That of the file, with its section table's where it names one: an edit of either is an edit."""
        own = self.document.data_hash
        return own if self.section is None else hashlib.sha256(f"{own} {self.section.digest}".encode()).hexdigest()

    def _hover_lines(self) -> tuple[HoverLine, ...]:
        tables = iter(self.hover_tables)
        found: list[HoverLine] = []
        for _, entry in self.hover:
            if entry.table is not None:
                found += hover.printed(next(tables))
            else:
                found.append(HoverLine(needed(entry.label), needed(entry.text), entry.source))
        return tuple(found)

    def _sources(self) -> tuple[tuple[str, str], ...]:
        found = [
            ("type", needed(self.type).source),
            ("rotor", needed(self.rotor).source),
            ("limits", needed(self.limits).source),
            ("calibration", needed(self.calibration).source),
            ("vne.power_on", needed(self.power_on).source),
            ("vne.power_off", needed(self.power_off).source),
            *((name, entry.source) for name, entry in self.speeds),
            *((name, entry.source) for name, entry in self.hover),
        ]
        if self.recovery:
            found.append(("recovery", self.recovery.source))
        if self.section:
            found.append((section_table.KEY, self.section.source))
        return tuple(found)


def _chart_units(typed: TypedVne) -> list[tuple[str, str]]:
    key = "lines" if typed.chart is not None and typed.chart.straight else "chart"
    return [(key, unit) for unit in cross.chart_units(typed.chart)] + [("less", slope.unit) for slope in typed.slopes]
