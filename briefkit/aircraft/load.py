"""An aircraft file (TOML) to an `Aircraft`, or every fault in it at once."""

from __future__ import annotations

from pathlib import Path
from typing import Final, TypeVar

from briefkit.aircraft import chart_text, cross, estimates
from briefkit.aircraft.chart import ReadingRule, VneChart
from briefkit.aircraft.estimates import Estimate
from briefkit.aircraft.model import (
    Aircraft,
    Calibration,
    DisplayUnits,
    HoverLine,
    Hub,
    Limits,
    ManualSpeed,
    PowerOffVne,
    Rotation,
    RotorData,
    Stated,
)
from briefkit.aircraft.tables import (
    CalibrationTable,
    HoverEntry,
    LimitsTable,
    PowerOffTable,
    PowerOnTable,
    RecoveryTable,
    RotorTable,
    SpeedEntry,
    TypeTable,
    UnitsTable,
)
from briefkit.reading.document import Document
from briefkit.reading.quantity import UNKNOWN, Typed, quoted

NONE_IN_MANUAL: Final = "none in manual"
_REQUIRED: Final = ("type", "units", "rotor", "limits", "calibration", "vne")
_OPTIONAL: Final = ("invented", "manual", "hover", "recovery")

V = TypeVar("V")


def load_aircraft(path: Path | str) -> Aircraft:
    """The aircraft of a TOML file, in SI; every speed in the file is an indicated one, as the manual prints it.

    Raises `FaultyFile` with every fault: file, line, key or row and column, what was read, what is permitted, what to
    write instead.
    """
    document = Document(path)
    document.tables("", _REQUIRED, _OPTIONAL)
    document.tables("vne", ("power_on", "power_off"))
    document.tables("manual", (), ("speeds",))
    parts = _Parts(document)
    document.raise_faults()
    return parts.aircraft()


class _Parts:
    """The tables of one file as far as they could be read, and what is made of them once there is no fault."""

    def __init__(self, document: Document) -> None:
        self.document = document
        self.type = document.table("type", TypeTable)
        self.units = document.table("units", UnitsTable)
        self.rotor = document.table("rotor", RotorTable)
        self.limits = document.table("limits", LimitsTable)
        self.calibration = document.table("calibration", CalibrationTable)
        self.power_on = document.table("vne.power_on", PowerOnTable)
        self.power_off = document.table("vne.power_off", PowerOffTable)
        self.speeds = document.entries("manual.speeds", SpeedEntry)
        self.hover = document.entries("hover", HoverEntry)
        self.recovery = document.table("recovery", RecoveryTable)
        self.invented = document.data.get("invented", "")
        if not isinstance(self.invented, str):
            document.fault("invented", quoted(self.invented), "a sentence in quotes")
        self.chart = self._chart()
        self.calibrated = self._calibrated()
        self._cross()

    def _chart(self) -> chart_text.VneTable | None:
        if not self.power_on or self.power_on.chart is None:
            return None
        return chart_text.read_vne(self.document, "vne.power_on.chart", self.power_on.chart)

    def _calibrated(self) -> chart_text.CalibrationRows | None:
        table = self.calibration
        if not table or table.table is None:
            return None
        if table.table.strip() != NONE_IN_MANUAL:
            return chart_text.read_calibration(self.document, "calibration.table", table.table)
        if table.spread is None:
            remedy = 'add spread = "4 kt": how far indicated and calibrated may lie apart'
            self.document.fault("calibration.spread", "nothing", f'a speed, needed with "{NONE_IN_MANUAL}"', remedy)
        return None

    def _cross(self) -> None:
        faults = cross.limit_faults(self.limits) if self.limits else []
        if self.limits and not self.document.has_fault_below("limits"):
            faults += cross.hottest_faults(self.limits)
        faults += cross.rotor_faults(self.rotor) if self.rotor else []
        faults += cross.loading_faults(self.rotor, self.limits) if self.rotor and self.limits else []
        if self.units:
            faults += cross.unit_faults(self.chart, self.calibrated.unit if self.calibrated else "", self.units)
        if self.calibrated:
            faults += cross.calibration_faults(self.calibrated.indicated, self.calibrated.calibrated)
        for fault in faults:
            self.document.fault(fault.key, fault.read, fault.permitted, fault.remedy)

    def aircraft(self) -> Aircraft:
        """The frozen model; only asked for when there is no fault, so nothing needed is missing."""
        kind, shown = needed(self.type), needed(self.units)
        recovery = self.recovery or RecoveryTable()
        return Aircraft(
            name=needed(kind.name),
            serials=tuple(needed(kind.serials)),
            configuration=needed(kind.configuration),
            units=DisplayUnits(needed(shown.speed), needed(shown.height), needed(shown.mass), needed(shown.pressure)),
            rotor=_rotor(needed(self.rotor), needed(needed(self.limits).max_mass)),
            limits=_limits(needed(self.limits)),
            calibration=_calibration(needed(self.calibration), self.calibrated),
            vne=_vne(needed(self.power_on), needed(self.chart)),
            vne_off=PowerOffVne(
                _stated(needed(self.power_off).constant, needed(self.power_off).source), needed(self.power_off).source
            ),
            speeds=tuple(
                ManualSpeed(needed(entry.label), needed(entry.text), needed(entry.applies), entry.source)
                for _, entry in self.speeds
            ),
            hover=tuple(HoverLine(needed(entry.label), needed(entry.text), entry.source) for _, entry in self.hover),
            recovery=recovery.text or "",
            recovery_source=recovery.source,
            invented=self.invented,
            file=self.document.path.name,
            data_hash=self.document.data_hash,
            sources=self._sources(),
            unanswered=self.document.unanswered(),
        )

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
        return tuple(found)


def needed(value: V | None) -> V:
    """A value whose absence was already a fault."""
    if value is None:
        raise AssertionError("a missing value passed the checks of the file")
    return value


def _stated(typed: Typed | None, source: str, estimate: Estimate | None = None) -> Stated:
    """A typed value, or its estimate where the author wrote "unknown"; the table's source unless it has its own."""
    typed = needed(typed)
    if typed.value is None:
        estimate = needed(estimate)
        return Stated(estimate.value, UNKNOWN, typed.source or source, typed.spread or estimate.spread, estimate.basis)
    return Stated(typed.value, typed.text, typed.source or source, typed.spread or 0.0)


def _derived(typed: Typed | None, source: str, estimate: Estimate, text: str) -> Stated:
    """As `_stated`, for a key that may be left out: then the estimate under a text that says where it is from."""
    if typed is None:
        return Stated(estimate.value, text, source, estimate.spread, estimate.basis)
    return _stated(typed, source, estimate)


def _limits(table: LimitsTable) -> Limits:
    def optional(typed: Typed | None) -> Stated | None:
        return None if typed is None else _stated(typed, table.source)

    def pair(typed: list[Typed] | None) -> tuple[Stated, Stated]:
        low, high = needed(typed)
        return _stated(low, table.source), _stated(high, table.source)

    return Limits(
        max_mass=_stated(table.max_mass, table.source),
        min_mass=_stated(table.min_mass, table.source),
        max_altitude=_stated(table.max_altitude, table.source),
        min_temperature=_stated(table.min_temperature, table.source),
        isa_deviation=optional(table.isa_deviation),
        max_temperature=optional(table.max_temperature),
        max_bank=optional(table.max_bank),
        rotor_on=pair(table.rotor_on),
        rotor_off=pair(table.rotor_off),
        climb_speed=_stated(table.climb_speed, table.source),
        source=table.source,
    )


def _rotor(table: RotorTable, max_mass: Typed) -> RotorData:
    hub, source = Hub(needed(table.hub)), table.source
    radius, chord = _stated(table.radius, source), _stated(table.chord, source)
    slope = _stated(table.lift_slope, source, estimates.lift_slope())
    offset_typed = needed(table.hinge_offset).value if table.hinge_offset else None
    class_frequency = estimates.flap_frequency(hub, offset_typed or 0.0)
    frequency = _derived(
        table.flap_frequency, source, class_frequency, f"{class_frequency.value:.3f} for the {hub} hub"
    )
    equivalent = 0.0 if hub is not Hub.HINGELESS else estimates.equivalent_hinge_offset(frequency.value)
    offset = Estimate(equivalent, 0.0, frequency.basis)
    inertia = estimates.flap_inertia(radius.value, chord.value, slope.value)
    return RotorData(
        hub=hub,
        rotation=Rotation(needed(table.rotation)),
        blades=needed(table.blades),
        radius=radius,
        rpm=_stated(table.rpm, source),
        chord=chord,
        twist=_stated(table.twist, source, estimates.twist()),
        root_cutout=_stated(table.root_cutout, source),
        hinge_offset=_derived(table.hinge_offset, source, offset, f"{100.0 * equivalent:.3g} %"),
        flap_frequency=frequency,
        flap_inertia=_stated(table.flap_inertia, source, inertia),
        precone=_derived(table.precone, source, estimates.precone(hub), "none stated"),
        lift_slope=slope,
        drag_area=_stated(table.drag_area, source, estimates.drag_area(needed(max_mass.value))),
        source=source,
    )


def _calibration(table: CalibrationTable, rows: chart_text.CalibrationRows | None) -> Calibration:
    spread = needed(table.spread.value) if table.spread else 0.0
    if rows is None:
        return Calibration((), (), table.source, spread)
    return Calibration(rows.indicated, rows.calibrated, table.source, spread, rows.rows)


def _vne(table: PowerOnTable, chart: chart_text.VneTable) -> VneChart:
    down, across = len(chart.heights), len(chart.columns)
    shape = (down, 1, across, 1) if chart.across == "mass" else (down, max(across, 1), 1, 1)
    return VneChart(
        heights=chart.heights,
        temperatures=chart.columns if chart.across == "temperature" else (),
        masses=chart.columns if chart.across == "mass" else (),
        speeds=chart.speeds.reshape(shape),
        reading=ReadingRule(table.reading),
        source=table.source,
        rows=chart.rows,
        reading_error=needed(table.reading_error.value) if table.reading_error else 0.0,
        covers_temperatures=table.covers_temperatures,
        reason=table.reason,
        entry_reason=table.entry_reason,
        or_less=chart.or_less,
    )
