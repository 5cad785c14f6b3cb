"""The condition itself on the manual's chart and inside its limits: looked at before anything is computed from it."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.chart import density_altitude_of
from briefkit.aircraft.model import Aircraft
from briefkit.envelope.condition import Conditions
from briefkit.envelope.speeds import true_of
from briefkit.errors import OutsideChart, OutsideLimits, Reason, Refusal, SetBy

Floats = NDArray[np.float64]
Reasons = NDArray[np.object_]

_SLACK = 1e-9  # relative, so that a limit typed and a condition typed alike are equal


def filled(count: int, member: Reason | SetBy) -> Reasons:
    """An array of one enum member (batch,). `numpy.full` would turn it into plain text."""
    return np.array([member] * count, dtype=object)


def chart_mass(aircraft: Aircraft, many: Conditions) -> Floats:
    """The mass the chart is read at here: the condition's own, or the maximum mass where the chart has no such axis."""
    return many.mass.copy() if aircraft.vne.masses else np.full(len(many), aircraft.limits.max_mass.value)


def indicated_vne(aircraft: Aircraft, many: Conditions) -> Floats:
    """The manual's power-on VNE here [m/s indicated], by the manual's reading rule; NaN off the chart."""
    return aircraft.vne.indicated(many.pressure_altitude, many.oat, chart_mass(aircraft, many), many.rotor_speed)


def true_airspeed(aircraft: Aircraft, indicated: Floats, many: Conditions) -> Floats:
    """Indicated [m/s] to true airspeed [m/s] here; NaN outside the calibration."""
    return true_of(aircraft.calibration, indicated, many.pressure, many.oat)


def reasons(aircraft: Aircraft, many: Conditions) -> Reasons:
    """Why each condition is not permitted here, (batch,); `Reason.NONE` where it is."""
    found = filled(len(many), Reason.NONE)
    for reason, outside in _checks(aircraft, many):
        found[outside & (found == Reason.NONE)] = reason
    return found


def refuse(aircraft: Aircraft, one: Conditions) -> None:
    """Raise the refusal of a single condition that is not permitted here, naming the axis or limit; else nothing."""
    if not reasons(aircraft, one)[0]:
        return
    for refusal in _refusals(aircraft, one):
        raise refusal
    indicated = float(indicated_vne(aircraft, one)[0])
    if np.isnan(indicated):
        shown = aircraft.units
        parts = (
            units.show(float(one.pressure_altitude[0]), "height", shown.height),
            units.show(float(one.oat[0]), "temperature", "°C"),
            units.show(float(one.mass[0]), "mass", shown.mass),
        )
        permitted, source = "where the chart prints a VNE", aircraft.vne.source
        raise OutsideChart("this part of the chart", ", ".join(parts), "", permitted, source, Reason.OUTSIDE_CHART)
    raise aircraft.calibration.refuse(indicated, aircraft.units.speed)


def _checks(aircraft: Aircraft, many: Conditions) -> list[tuple[Reason, NDArray[np.bool_]]]:
    limits = aircraft.limits
    low_k, high_k = limits.rotor_on
    outside_limits = (
        _over(many.mass, limits.max_mass.value)
        | _under(many.mass, limits.min_mass.value)
        | _over(many.pressure_altitude, limits.max_altitude.value)
        | _under(many.oat, limits.min_temperature.value)
        | (many.oat > limits.max_temperature_at(many.pressure_altitude) + 1e-6)
        | _under(many.rotor_speed, low_k.value)
        | _over(many.rotor_speed, high_k.value)
    )
    if limits.max_bank is not None:
        outside_limits |= _over(many.load_factor, 1.0 / np.cos(limits.max_bank.value))
    vne = indicated_vne(aircraft, many)
    return [
        (Reason.OUTSIDE_CHART, np.isnan(vne)),
        (Reason.OUTSIDE_LIMITS, outside_limits),
        (Reason.OUTSIDE_CALIBRATION, np.isnan(true_airspeed(aircraft, vne, many))),
    ]


def _over(value: Floats, limit: float) -> NDArray[np.bool_]:
    return value > limit + abs(limit) * _SLACK


def _under(value: Floats, limit: float) -> NDArray[np.bool_]:
    return value < limit - abs(limit) * _SLACK


def _refusals(aircraft: Aircraft, one: Conditions) -> list[Refusal]:
    """Every axis and limit passed, the chart's first."""
    limits, chart, shown = aircraft.limits, aircraft.vne, aircraft.units
    height, oat, mass = float(one.pressure_altitude[0]), float(one.oat[0]), float(one.mass[0])
    rows = ("pressure altitude", height)
    if chart.density_altitude:
        rows = ("density altitude", float(density_altitude_of(one.pressure_altitude, one.oat)[0]))
    axes = (
        (*rows, "height", shown.height, chart.heights),
        ("outside air temperature", oat, "temperature", "°C", chart.temperatures),
        ("mass", mass, "mass", shown.mass, chart.masses[-1:] and (chart.lowest_mass, chart.masses[-1])),
        ("rotor speed", float(one.rotor_speed[0]), "ratio", "%", chart.rotor_speeds),
    )
    found: list[Refusal] = []
    for name, value, quantity, unit, axis in axes:
        if axis and not axis[0] - 1e-6 <= value <= axis[-1] + 1e-6:
            ends = [units.show(end, quantity, unit) for end in (axis[0], axis[-1]) if np.isfinite(end)]
            permitted = " to ".join(ends) if len(ends) == 2 else f"up to {ends[0]}"
            found.append(
                _outside(OutsideChart, name, value, quantity, unit, permitted, chart.source, Reason.OUTSIDE_CHART)
            )
    low_k, high_k = limits.rotor_on
    hottest = float(limits.max_temperature_at(height))
    bounds: list[tuple[str, float, str, str, float | None, float | None]] = [
        ("mass", mass, "mass", shown.mass, limits.min_mass.value, limits.max_mass.value),
        ("pressure altitude", height, "height", shown.height, None, limits.max_altitude.value),
        ("outside air temperature", oat, "temperature", "°C", limits.min_temperature.value, hottest),
        ("rotor speed", float(one.rotor_speed[0]), "ratio", "%", low_k.value, high_k.value),
    ]
    if limits.max_bank is not None:
        bank = float(np.arccos(1.0 / one.load_factor[0]))
        bounds.append(("bank", bank, "angle", "deg", None, limits.max_bank.value))
    for name, value, quantity, unit, low, high in bounds:
        if (low is not None and value < low - abs(low) * _SLACK) or (
            high is not None and value > high + abs(high) * _SLACK
        ):
            ends = [units.show(end, quantity, unit, 0) for end in (low, high) if end is not None and np.isfinite(end)]
            permitted = " to ".join(ends) if len(ends) == 2 else f"up to {ends[0]}"
            found.append(
                _outside(OutsideLimits, name, value, quantity, unit, permitted, limits.source, Reason.OUTSIDE_LIMITS)
            )
    return found


def _outside(
    kind: type[Refusal], name: str, value: float, quantity: str, unit: str, permitted: str, where: str, reason: Reason
) -> Refusal:
    return kind(name, units.from_si(value, quantity, unit), units.SHOWN.get(unit, unit), permitted, where, reason)
