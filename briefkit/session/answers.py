"""What is shown for one condition in a recurrent check: first the manual's figure, then the computed one.

Plain strings and floats, for the panel, the sheets and the log alike. A refusal is an answer here, in words.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from enum import StrEnum
from typing import Final

from briefkit import units
from briefkit.aircraft.chart import Axis, ReadingRule, density_altitude_of
from briefkit.aircraft.model import Aircraft, ManualSpeed
from briefkit.aircraft.operation import FleetEntry
from briefkit.brief import front, words
from briefkit.envelope import here
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.equivalent import LOAD_EXPONENT, EquivalentVne, equivalent_vne
from briefkit.envelope.reductions import COVERED_BANK_STEP_DEG, LOWEST_BRIEFED_BANK_DEG, floor_of
from briefkit.envelope.speeds import true_of
from briefkit.errors import BeyondChart, OutsideChart, OutsideLimits, Reason, Refusal, SetBy
from briefkit.physics import atmosphere


class Says(StrEnum):
    """What the computed answer to a condition is."""

    REDUCTION = "reduction"
    COVERED_BANK = "covered bank"
    MANUAL_VNE = "manual VNE"
    NO_TURN = "no turn"
    REFUSED = "refused"


@dataclass(frozen=True)
class Manual:
    """The manual's own figure. `vne` is in the type's unit and None where there is none: `text` then says why.

    `where` is the place on the chart; `also` the manual's other speeds and its power-off VNE, verbatim.
    """

    text: str
    vne: float | None
    unit: str
    where: str
    also: tuple[str, ...]


@dataclass(frozen=True)
class Computed:
    """The computed figure: one sentence, and its numbers where it has any.

    `reduction` is in the type's unit, rounded up to its step, `exact` before that; `bank_deg` is the covered bank,
    rounded down to 5 degrees; `how` is the equivalent level flight in a line, "" where none was needed.
    """

    says: Says
    text: str
    reduction: float | None = None
    exact: float | None = None
    bank_deg: int | None = None
    how: str = ""


@dataclass(frozen=True)
class Answers:
    """Both, in the order they are shown."""

    manual: Manual
    computed: Computed


_NO_FLIGHT: Final = "No VNE here, so no flight here."


def answers(aircraft: Aircraft, fleet: FleetEntry, condition: Condition) -> Answers:
    """The manual's figure and the computed one at a condition; a refusal becomes the text of the answer.

    The operator's spreads of mass and temperature enter where the condition states smaller ones, so that no answer is
    looser than the operator's own page would be at this point.
    """
    asked = condition.changed(
        mass_spread=max(condition.mass_spread, fleet.mass_spread),
        oat_spread=max(condition.oat_spread, fleet.temperature_spread),
    )
    return Answers(_manual(aircraft, condition), _computed(aircraft, fleet, asked))


def _manual(aircraft: Aircraft, condition: Condition) -> Manual:
    """VNE here by the manual's rule, level, whatever the turn: the chart knows no bank."""
    unit = aircraft.units
    level = Conditions.of(condition.changed(load_factor=1.0))
    also = (
        f"Power off: {front.power_off(aircraft)} ({aircraft.vne_off.source}).",
        *(f"{speed.label}: {speed.text} ({speed.source})." for speed in aircraft.speeds),
    )
    try:
        here.refuse(aircraft, level)
    except Refusal as refusal:
        return Manual(f"{_sentence(refusal)} {_NO_FLIGHT}", None, unit.speed, aircraft.vne.source, also)
    vne = round(float(units.from_si(here.indicated_vne(aircraft, level)[0], "speed", unit.speed)), 2)
    text = f"{units.show_number(units.round_down(vne))} {unit.speed_label()}"
    return Manual(text, vne, unit.speed, _place_on_chart(aircraft, level), also)


def _computed(aircraft: Aircraft, fleet: FleetEntry, condition: Condition) -> Computed:
    try:
        answer = equivalent_vne(aircraft, condition)
    except BeyondChart as refusal:
        if refusal.covered_bank is None:
            return Computed(Says.REFUSED, _sentence(refusal))
        return _covered(aircraft, fleet, condition, refusal.covered_bank)
    except (OutsideChart, OutsideLimits) as refusal:
        ends = refusal.reason in (Reason.OUTSIDE_CHART, Reason.OUTSIDE_LIMITS)
        return Computed(Says.REFUSED, f"{_sentence(refusal)}{' Nothing is computed outside it.' if ends else ''}")
    except Refusal as refusal:
        return Computed(Says.REFUSED, _sentence(refusal))
    return _reduction(aircraft, fleet, condition, answer)


def _reduction(aircraft: Aircraft, fleet: FleetEntry, condition: Condition, answer: EquivalentVne) -> Computed:
    """The reduction at the condition's own bank, or that VNE still limits."""
    reduction = units.round_up(answer.below_vne, aircraft.units.speed_step)
    if answer.set_by is SetBy.MANUAL_VNE or reduction <= 0.0:
        text = "Blade stall asks for nothing below the manual’s VNE here. VNE still limits."
        text = _beside_own(aircraft, condition, 0.0, text)
        return Computed(Says.MANUAL_VNE, text, 0.0, max(answer.below_vne, 0.0))
    how = _how(aircraft, condition, answer)
    if under := _under_floor(aircraft, fleet, answer, reduction):
        text = f"The answer is under {under}: {_not_this(condition)}."
        return Computed(Says.NO_TURN, text, exact=answer.below_vne, how=how)
    before = " before the turn" if condition.load_factor > 1.0 else ""
    text = f"Slow to VNE less {words.knots(aircraft, reduction)} or more{before}." + _not_briefed(fleet, condition)
    text = _beside_own(aircraft, condition, reduction, text)
    return Computed(Says.REDUCTION, text, reduction, answer.below_vne, how=how)


def _covered(aircraft: Aircraft, fleet: FleetEntry, condition: Condition, covered: float) -> Computed:
    """Beyond the chart: the covered bank, rounded down, with its own reduction; never a bank without one."""
    bank = int(units.round_down(math.degrees(covered), COVERED_BANK_STEP_DEG))
    if bank < LOWEST_BRIEFED_BANK_DEG:
        text = f"Loaded beyond anything on the manual’s chart: {_not_this(condition)} at this mass."
        return Computed(Says.NO_TURN, text)
    at = condition.changed(load_factor=1.0 / math.cos(math.radians(bank)))
    try:
        answer = equivalent_vne(aircraft, at)
    except Refusal as refusal:
        return Computed(Says.NO_TURN, f"{_sentence(refusal)} {_capital(_not_this(condition))}.")
    reduction = units.round_up(answer.below_vne, aircraft.units.speed_step)
    how = _how(aircraft, at, answer) if answer.set_by is SetBy.EQUIVALENT else ""
    if under := _under_floor(aircraft, fleet, answer, reduction):
        text = f"Beyond the manual’s chart, and at {bank}° the answer is under {under}: {_not_this(condition)}."
        return Computed(Says.NO_TURN, text, exact=answer.below_vne, how=how)
    slow = f"slow to VNE less {words.knots(aircraft, reduction)} or more before it" if reduction else "VNE still limits"
    text = f"Beyond the manual’s chart at {words.degrees(condition.bank)}. At most {bank}°, and {slow}."
    text = _beside_own(aircraft, at, reduction, text + _not_briefed(fleet, at))
    return Computed(Says.COVERED_BANK, text, reduction, answer.below_vne, bank, how)


def _under_floor(aircraft: Aircraft, fleet: FleetEntry, answer: EquivalentVne, reduction: float) -> str:
    """The floor in words where VNE less the printed reduction would lie under it; else ""."""
    floor = floor_of(aircraft, fleet)
    if answer.vne - units.Speed.of(reduction, answer.unit) >= floor.speed:
        return ""
    return f"{words.indicated(aircraft, floor.text)} ({floor.reason})"


def _not_this(condition: Condition) -> str:
    return f"no turn of {words.degrees(condition.bank)}" if condition.load_factor > 1.0 else "not like this"


def _not_briefed(fleet: FleetEntry, condition: Condition) -> str:
    """A bank above the company's one briefed bank may be talked about, and is not briefed."""
    brief = fleet.brief_bank
    if condition.load_factor * math.cos(brief.value) <= 1.0 + 1e-9:
        return ""
    return f" Over {words.degrees(brief.value)} of bank is not briefed."


def _beside_own(aircraft: Aircraft, condition: Condition, reduction: float, text: str) -> str:
    """The computed sentence beside what the manual itself says of this turn; the larger of the two comes first."""
    said = [speed for speed in aircraft.speeds if _applies(speed, condition)]
    if not said:
        return text
    texts = "; ".join(f"{speed.text} ({speed.source})" for speed in said)
    largest = max((speed.less_than_vne or 0.0) for speed in said)
    if units.from_si(largest, "speed", aircraft.units.speed) >= max(reduction, 1e-9):
        return f"The manual’s own holds: {texts}. Computed alone: {text[:1].lower()}{text[1:]}"
    return f"{text} The manual’s own: {texts}. The slower of the two holds."


def _applies(speed: ManualSpeed, condition: Condition) -> bool:
    if speed.applies != "bank" or condition.load_factor <= 1.0:
        return False
    return speed.above_bank is None or condition.bank > speed.above_bank + 1e-9


def _how(aircraft: Aircraft, condition: Condition, answer: EquivalentVne) -> str:
    """The equivalent level flight as a line a pilot can follow in the manual."""
    if answer.set_by is not SetBy.EQUIVALENT:
        return ""
    point, k, unit = answer.chart_point, condition.rotor_speed, aircraft.units.speed
    counts = (condition.mass + condition.mass_spread) * condition.load_factor**LOAD_EXPONENT / k**2
    pressure = atmosphere.pressure_at(point.pressure_altitude)
    there = units.to_si(point.vne, "speed", unit)
    true = units.from_si(float(true_of(aircraft.calibration, there, pressure, point.temperature)), "speed", unit)
    turned = "" if k == point.rotor_speed else f", times {units.show_number(k / point.rotor_speed * 100.0, 1)} %"
    mass = words.mass(aircraft, point.mass) if aircraft.vne.masses else aircraft.limits.max_mass.text
    stated = " (with the stated spreads)" if condition.mass_spread or condition.oat_spread else ""
    climb = ", less what the climb costs" if condition.climb > 0.0 else ""
    vne = words.number(answer.ias + answer.below_vne)
    return (
        f"Counts as {words.mass(aircraft, counts)} here{stated}. {mass} is as loaded at "
        f"{words.height(aircraft, point.pressure_altitude, 10.0)}, {words.temperature(point.temperature)}: the "
        f"manual’s VNE there, {words.number(point.vne)} {aircraft.units.speed_label()}, is {words.number(true)} {unit} "
        f"true{turned}{climb}: {words.number(answer.ias)} {aircraft.units.speed_label()} here. VNE here is {vne}: "
        f"{words.number(answer.below_vne)} below."
    )


def _place_on_chart(aircraft: Aircraft, one: Conditions) -> str:
    """Which entries of the manual's chart enclose a condition, as a crew finds them in its own book."""
    chart, unit = aircraft.vne, aircraft.units
    height = density_altitude_of(one.pressure_altitude, one.oat) if chart.density_altitude else one.pressure_altitude
    values = {
        Axis.HEIGHT: (
            float(height[0]),
            "height",
            unit.height,
            "density altitude " if chart.density_altitude else "Hp ",
        ),
        Axis.TEMPERATURE: (float(one.oat[0]), "temperature", "°C", ""),
        Axis.MASS: (float(one.mass[0]), "mass", unit.mass, ""),
        Axis.ROTOR_SPEED: (float(one.rotor_speed[0]), "ratio", "%", "rotor "),
    }
    parts, between = [], False
    for axis in chart.variables:
        value, quantity, shown, name = values[axis]
        nodes = [end for end in chart.axes[axis] if end <= value + 1e-6][-1:]
        nodes += [end for end in chart.axes[axis] if end >= value - 1e-6][:1]
        texts = (
            words.temperature(end) if quantity == "temperature" else units.show(end, quantity, shown) for end in nodes
        )
        ends = list(dict.fromkeys(texts))
        between = between or len(ends) > 1
        parts.append(name + " to ".join(ends))
    rule = "" if not between else ", interpolated" if chart.reading is ReadingRule.INTERPOLATE else ", the lower VNE"
    cap = f"; never above {words.indicated(aircraft, chart.cap_text)} ({chart.cap_source})" if chart.cap_text else ""
    return f"{chart.source}: {', '.join(parts)}{rule}{cap}" if parts else f"{chart.source}{cap}"


def _sentence(refusal: Refusal) -> str:
    """A refusal as a page sets it: a true minus sign and the apostrophe of the page."""
    text = re.sub(r"(?<![\w.])-(?=\d)", "\u2212", str(refusal)).replace("'", "’")
    return f"{_capital(text)}."


def _capital(text: str) -> str:
    return text[:1].upper() + text[1:]
