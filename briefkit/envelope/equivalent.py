"""The manual's VNE read at the equivalent level flight: what the chart itself says of this load factor and rotor speed.

A rotor at load factor n, mass m, rotor speed k, density rho and temperature T has the same blade loading, advance ratio
and tip Mach numbers as in level flight at 100 % with p' = p m'/(n m), T' = T/k^2 and true airspeed V' = V/k (the
flight-test trade's referral). So the manual's own chart is read there, at every permitted point at least as loaded and
no warmer; the largest speed found is the answer. The load factor enters as n^1.15, which guards limits that are set
by loads in newtons and so do not follow the similarity. No rotor model takes part, but for the cost of a stated climb.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass, replace
from typing import ClassVar, Final

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope import here, region, search
from briefkit.envelope.climb import climb_cost
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.speeds import indicated_of
from briefkit.errors import BeyondChart, NoTrim, OutsideCalibration, OutsideChart, Reason, SetBy
from briefkit.physics import atmosphere
from briefkit.units import Speed, SpeedKind

Floats = NDArray[np.float64]
Reasons = NDArray[np.object_]

LOAD_EXPONENT: Final = 1.15


@dataclass(frozen=True)
class ChartPoint:
    """Where on the manual's chart the answer was read: SI, and the chart's VNE there in the type's own unit."""

    pressure_altitude: float
    temperature: float
    mass: float
    rotor_speed: float
    vne: float


@dataclass(frozen=True)
class EquivalentVne:
    """The answer at one condition, in the unit of the type's airspeed indicator, indicated.

    `ias`, `below_vne` (manual's VNE here less `ias`) and `upper` (with the plain load factor) are kept to 0.01 and not
    floored; `text` is floored to one unit and carries unit and kind. `set_by` says whose number it is. `speed`, `vne`
    (the manual's, here) and `chart_vne` (the chart's, there) carry their kind with them.
    """

    ias: float
    unit: str
    text: str
    below_vne: float
    upper: float
    set_by: SetBy
    chart_point: ChartPoint

    @property
    def speed(self) -> Speed:
        """`ias` with its kind."""
        return Speed.of(self.ias, self.unit)

    @property
    def vne(self) -> Speed:
        """The manual's VNE here, indicated."""
        return Speed.of(round(self.ias + self.below_vne, 2), self.unit)

    @property
    def chart_vne(self) -> Speed:
        """The chart's VNE at `chart_point`, indicated there."""
        return Speed.of(self.chart_point.vne, self.unit)


@dataclass(frozen=True, eq=False)
class EquivalentVnes:
    """The answers of a batch (batch,), as in `EquivalentVne`; where `reason` is not empty the numbers are NaN.

    Every speed of it is of one `kind`, in one `unit`.
    """

    kind: ClassVar[SpeedKind] = SpeedKind.INDICATED
    ias: Floats
    below_vne: Floats
    upper: Floats
    vne: Floats
    unit: str
    set_by: Reasons
    reason: Reasons
    point_altitude: Floats
    point_temperature: Floats
    point_mass: Floats
    point_rotor_speed: Floats


def equivalent_vne(aircraft: Aircraft, condition: Condition) -> EquivalentVne:
    """The manual's VNE at the equivalent level flight of one condition.

    Level with the rotor at 100 % it is the manual's VNE by definition. Raises `OutsideLimits` or `OutsideChart` where
    the condition itself is not on the chart and inside the limits, `BeyondChart` (with `covered_bank`, radians) where
    no point of the chart is as loaded, `OutsideCalibration` where the answer has no indicated speed.
    """
    conditions = Conditions.of(condition)
    here.refuse(aircraft, conditions)
    answers = _answers(aircraft, conditions, report=True, upper=True)
    reason = answers.reason[0]
    if reason:
        raise _refusal(aircraft, condition, reason)
    ias = float(answers.ias[0])
    height, oat, mass, k = (
        float(array[0])
        for array in (answers.point_altitude, answers.point_temperature, answers.point_mass, answers.point_rotor_speed)
    )
    there = units.from_si(float(aircraft.vne.indicated(height, oat, mass, k)), "speed", aircraft.units.speed)
    point = ChartPoint(height, oat, mass, k, round(there, 2))
    text = f"{units.show_number(units.round_down(ias))} {aircraft.units.speed_label()}"
    return EquivalentVne(
        ias, answers.unit, text, float(answers.below_vne[0]), float(answers.upper[0]), answers.set_by[0], point
    )


def equivalent_vnes(
    aircraft: Aircraft, conditions: Conditions | Iterable[Condition], *, upper: bool = True
) -> EquivalentVnes:
    """The same for a batch; a refused member has NaN and a `Reason`, and disturbs no other.

    The chart point of each is the fastest one, not the one nearest the day's temperature that a single call reports.
    Without `upper` the plain-n speeds are left NaN and the batch costs half.
    """
    many = conditions if isinstance(conditions, Conditions) else Conditions.of(conditions)
    return _answers(aircraft, many, report=False, upper=upper)


def _answers(aircraft: Aircraft, many: Conditions, report: bool, upper: bool) -> EquivalentVnes:
    reason = here.reasons(aircraft, many)
    vne = np.where(reason == Reason.NONE, here.indicated_vne(aircraft, many), np.nan)
    level = (many.load_factor <= 1.0 + 1e-12) & (np.abs(many.rotor_speed - 1.0) <= 1e-12)
    ask = np.nonzero((reason == Reason.NONE) & ~level)[0]
    ias, plain = vne.copy(), vne.copy()
    rotor = many.rotor_speed.copy() if aircraft.vne.rotor_speeds else np.ones(len(many))
    point = [many.pressure_altitude.copy(), many.oat.copy(), here.chart_mass(aircraft, many), rotor]
    set_by = here.filled(len(many), SetBy.MANUAL_VNE)
    if len(ask):
        asked = many.take(ask)
        found, why, best = _read(aircraft, asked, vne[ask], LOAD_EXPONENT, report)
        lower = (why == Reason.NONE) & (found < vne[ask])
        ias[ask], reason[ask] = found, why
        plain[ask] = _read(aircraft, asked, vne[ask], 1.0, False)[0] if upper else np.nan
        set_by[ask[lower]] = SetBy.EQUIVALENT
        for array, value in zip(point, (best.height, best.temperature, best.mass, best.rotor_speed), strict=True):
            array[ask[lower]] = value[lower]
    refused = reason != Reason.NONE
    ias, plain = (np.where(refused, np.nan, array) for array in (ias, plain))
    unit = aircraft.units.speed

    def shown(values: Floats) -> Floats:
        return np.round(units.from_si(values, "speed", unit), 2)

    return EquivalentVnes(
        ias=shown(ias),
        below_vne=shown(vne - ias),
        upper=shown(plain),
        vne=shown(vne),
        unit=unit,
        set_by=set_by,
        reason=reason,
        point_altitude=point[0],
        point_temperature=point[1],
        point_mass=point[2],
        point_rotor_speed=point[3],
    )


def covered_bank(aircraft: Aircraft, condition: Condition) -> float:
    """Steepest bank [deg] whose equivalent level flight the manual's chart still reaches here; its own bank left out.

    Never above the manual's bank limit. Raises as `equivalent_vne` does; `BeyondChart` where not even level flight at
    this rotor speed is on the chart.
    """
    conditions = Conditions.of(condition.changed(load_factor=1.0))
    here.refuse(aircraft, conditions)
    banks, reason = covered_banks(aircraft, conditions)
    if reason[0]:
        raise _refusal(aircraft, condition, reason[0])
    return math.degrees(float(banks[0]))


def covered_banks(aircraft: Aircraft, conditions: Conditions) -> tuple[Floats, Reasons]:
    """Covered banks of a batch [rad] with their reasons; the load factor of each condition is left out."""
    level = replace(conditions, load_factor=np.ones(len(conditions)))
    reason = here.reasons(aircraft, level)
    reason[_colder_than_standard(aircraft, level) & (reason == Reason.NONE)] = Reason.NO_TEMPERATURES
    load = np.full(len(level), np.inf)
    for day in _days(level):
        warmest = day.oat / day.rotor_speed**2
        room = search.largest_loading(aircraft, warmest) * day.density * day.rotor_speed**2
        cold = np.isneginf(room) & (reason == Reason.NONE)
        reason[cold] = Reason.TOO_COLD
        heaviest = day.mass + day.mass_spread
        load = np.minimum(load, np.where(np.isneginf(room), np.nan, np.maximum(room, 0.0) / heaviest))
    n = load ** (1.0 / LOAD_EXPONENT)
    reason[(reason == Reason.NONE) & (n < 1.0 - search.SLACK)] = Reason.NOT_EVEN_LEVEL
    bank = np.arccos(1.0 / np.maximum(n, 1.0))
    if aircraft.limits.max_bank is not None:
        bank = np.minimum(bank, aircraft.limits.max_bank.value)
    return np.where(reason == Reason.NONE, bank, np.nan), reason


def _read(
    aircraft: Aircraft, many: Conditions, vne: Floats, exponent: float, report: bool
) -> tuple[Floats, Reasons, search.Best]:
    """Indicated speed [m/s] at the equivalent level flight, its reasons, and the chart points; never above `vne`."""
    reason = here.filled(len(many), Reason.NONE)
    reason[_colder_than_standard(aircraft, many)] = Reason.NO_TEMPERATURES
    answer, kept = vne.copy(), None
    for day in _days(many):
        k = day.rotor_speed
        loading = day.load_factor**exponent * (day.mass + day.mass_spread) / (day.density * k**2)
        warmest = day.oat / k**2
        best = search.fastest(aircraft, loading, warmest, day.oat, report)
        reason[np.isneginf(best.vne) & (reason == Reason.NONE)] = Reason.BEYOND_CHART
        true = np.where(np.isneginf(best.vne), np.nan, best.vne * k) - climb_cost(aircraft, best, day.climb, k)
        reason[np.isnan(true) & (reason == Reason.NONE)] = Reason.NO_TRIM
        indicated = indicated_of(aircraft.calibration, true, day.pressure, day.oat)
        # Above the calibration's top is above VNE here in any case; below its foot there is no indicated speed.
        here_true = here.true_airspeed(aircraft, vne, day)
        indicated = np.where(true >= here_true * (1.0 - search.SLACK), vne, indicated)
        reason[np.isnan(indicated) & (reason == Reason.NONE)] = Reason.OUTSIDE_CALIBRATION
        lower = indicated < answer
        kept = best if kept is None else best.where(lower, kept)
        answer = np.where(np.isnan(indicated), np.nan, np.minimum(answer, indicated))
    if kept is None:
        raise AssertionError("a day always has at least one temperature")
    cold = np.isneginf(search.largest_loading(aircraft, many.oat / many.rotor_speed**2))
    reason[cold & (reason == Reason.BEYOND_CHART)] = Reason.TOO_COLD
    return np.where(reason == Reason.NONE, answer, np.nan), reason, kept


def _colder_than_standard(aircraft: Aircraft, many: Conditions) -> NDArray[np.bool_]:
    """Where a chart that does not say its temperatures cannot be used: its points lie on the standard day."""
    if not region.standard_day_only(aircraft):
        return np.zeros(len(many), dtype=bool)
    standard = np.asarray(atmosphere.temperature_at(many.pressure_altitude))
    return many.oat - many.oat_spread < standard - 1e-6


def _days(many: Conditions) -> list[Conditions]:
    """The temperature as read, and both ends of its spread where one is stated."""
    if not np.any(many.oat_spread):
        return [many]
    return [replace(many, oat=many.oat + side * many.oat_spread) for side in (0.0, -1.0, 1.0)]


def _refusal(
    aircraft: Aircraft, condition: Condition, reason: Reason
) -> BeyondChart | OutsideCalibration | OutsideChart | NoTrim:
    """The refusal a single call raises, with what is permitted."""
    if reason is Reason.OUTSIDE_CALIBRATION:
        return aircraft.calibration.refuse(math.nan, aircraft.units.speed)
    if reason is Reason.NO_TEMPERATURES:
        return OutsideChart(
            "outside air temperature", "not on the chart", "", "level flight at 100 %", aircraft.vne.source, reason
        )
    if reason is Reason.NO_TRIM:
        climb = units.from_si(condition.climb, "vertical speed", "ft/min")
        return NoTrim("climb", climb, "ft/min", "a climb the rotor model can fly here", "rotor model", reason)
    percent = f"rotor {condition.rotor_speed * 100.0:.4g} %"
    if reason is Reason.TOO_COLD:
        coldest = region.temperature_range(aircraft)[0] - units.ZERO_CELSIUS
        needs = condition.oat / condition.rotor_speed**2 - units.ZERO_CELSIUS
        permitted = (
            f"the chart ends at {units.show_number(coldest)} °C; at {percent} this needs {units.show_number(needs)} °C"
        )
        return BeyondChart("rotor speed", condition.rotor_speed * 100.0, "%", permitted, aircraft.vne.source, reason)
    banks, why = covered_banks(aircraft, Conditions.of(condition))
    bank = float(banks[0])
    if why[0]:
        refusal = BeyondChart(
            "rotor speed and mass", f"{percent}, {units.show(condition.mass, 'mass', aircraft.units.mass)}", "",
            "a lighter aircraft or a faster rotor", aircraft.vne.source, why[0],
        )  # fmt: skip
    else:
        permitted = f"up to {units.show_number(math.floor(math.degrees(bank) + 1e-9))} deg of bank here"
        refusal = BeyondChart("bank", math.degrees(condition.bank), "deg", permitted, aircraft.vne.source, reason)
        refusal.covered_bank = bank
    return refusal
