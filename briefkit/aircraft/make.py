"""Tables of an aircraft file that have no fault, as the frozen parts of the model."""

from __future__ import annotations

from typing import TypeVar

from briefkit.aircraft import estimates
from briefkit.aircraft.calibration_text import CalibrationRows
from briefkit.aircraft.estimates import Estimate
from briefkit.aircraft.model import Calibration, Hub, Limits, Rotation, RotorData, Stated
from briefkit.aircraft.tables import CalibrationTable, LimitsTable, RotorTable
from briefkit.reading.quantity import UNKNOWN, Typed

V = TypeVar("V")


def needed(value: V | None) -> V:
    """A value whose absence was already a fault."""
    if value is None:
        raise AssertionError("a missing value passed the checks of the file")
    return value


def stated(typed: Typed | None, source: str, estimate: Estimate | None = None) -> Stated:
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
    return stated(typed, source, estimate)


def optional(typed: Typed | None, source: str) -> Stated | None:
    """As `stated`, for what may be left out."""
    return None if typed is None else stated(typed, source)


def pair(typed: list[Typed] | None, source: str) -> tuple[Stated, Stated]:
    """The two ends of a range."""
    low, high = needed(typed)
    return stated(low, source), stated(high, source)


def limits(table: LimitsTable) -> Limits:
    """The manual's limits."""
    source = table.source
    return Limits(
        max_mass=stated(table.max_mass, source),
        min_mass=stated(table.min_mass, source),
        max_altitude=stated(table.max_altitude, source),
        min_temperature=stated(table.min_temperature, source),
        isa_deviation=optional(table.isa_deviation, source),
        max_temperature=optional(table.max_temperature, source),
        max_bank=optional(table.max_bank, source),
        rotor_on=pair(table.rotor_on, source),
        rotor_off=pair(table.rotor_off, source),
        climb_speed=stated(table.climb_speed, source),
        source=source,
    )


def rotor(table: RotorTable, max_mass: Typed) -> RotorData:
    """The rotor, with estimates where the author wrote "unknown" or left out what the hub gives."""
    hub, source = Hub(needed(table.hub)), table.source
    radius, chord = stated(table.radius, source), stated(table.chord, source)
    slope = stated(table.lift_slope, source, estimates.lift_slope())
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
        rpm=stated(table.rpm, source),
        chord=chord,
        twist=stated(table.twist, source, estimates.twist()),
        root_cutout=stated(table.root_cutout, source),
        hinge_offset=_derived(table.hinge_offset, source, offset, f"{100.0 * equivalent:.3g} %"),
        flap_frequency=frequency,
        flap_inertia=stated(table.flap_inertia, source, inertia),
        precone=_derived(table.precone, source, estimates.precone(hub), "none stated"),
        flap_stop=optional(table.flap_stop, source),
        lift_slope=slope,
        drag_area=stated(table.drag_area, source, estimates.drag_area(needed(max_mass.value))),
        source=source,
    )


def calibration(table: CalibrationTable, rows: CalibrationRows | None) -> Calibration:
    """The calibration, or none with its spread."""
    spread = needed(table.spread.value) if table.spread else 0.0
    if rows is None:
        return Calibration((), (), table.source, spread)
    return Calibration(rows.indicated, rows.calibrated, table.source, spread, rows.rows)
