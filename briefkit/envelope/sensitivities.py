"""Rules of thumb near a planned condition: what one step of height, temperature, mass or rotor speed costs, and how far
the rule holds.

They are slopes of the equivalent VNE, that is, of the manual's own chart read at the equivalent level flight. A rule
without its range would be carried too far, so each comes with the range over which it holds within 1 kt.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.equivalent import equivalent_vne, equivalent_vnes
from briefkit.errors import Reason

Floats = NDArray[np.float64]

HOLDS_WITHIN: Final = 1.0 * units.KNOT
_POINTS: Final = 40  # on each side of the condition
_FIELDS: Final = ("pressure_altitude", "oat", "mass", "rotor_speed")


@dataclass(frozen=True)
class RuleOfThumb:
    """One rule: `change` of the equivalent VNE in the type's unit for one `step`, holding from `low` to `high`.

    `low` and `high` are values of the varied quantity in the unit of `unit`; the rule stops at the first point that is
    off by more than 1 kt or refused.
    """

    quantity: str
    step: str
    unit: str
    change: float
    low: float
    high: float


def rules_of_thumb(aircraft: Aircraft, condition: Condition) -> tuple[RuleOfThumb, ...]:
    """The four rules at one condition. Raises as `equivalent_vne` does where it has no answer itself."""
    height, mass = aircraft.units.height, aircraft.units.mass
    thousand = 1000.0 if height == "ft" else 300.0
    fifty = 50.0 if mass == "kg" else 100.0
    up, heavier = units.to_si(thousand, "height", height), units.to_si(fifty, "mass", mass)
    wanted = (
        ("pressure_altitude", "height", height, "pressure altitude", f"+{thousand:,.0f} {height}", up, 3.0),
        ("oat", "temperature", "°C", "temperature", "+10 °C", 10.0, 3.0),
        ("mass", "mass", mass, "mass", f"+{fifty:.0f} {mass}", heavier, 6.0),
        ("rotor_speed", "ratio", "%", "rotor speed", "−1 %", -0.01, 5.0),
    )
    # One batch: most of what a question costs is the call.
    varied, steps = [], []
    for field, _, _, _, _, step, reach in wanted:
        offsets = np.linspace(-reach, reach, 2 * _POINTS + 1) * step
        values = {name: np.full(len(offsets), float(getattr(condition, name))) for name in _FIELDS}
        varied.append(values | {field: values[field] + offsets})
        steps.append(offsets)
    one = Conditions.of(condition).repeat(len(wanted) * (2 * _POINTS + 1))
    together = {name: np.concatenate([values[name] for values in varied]) for name in _FIELDS}
    answers = equivalent_vnes(
        aircraft, replace(one, **together), upper=False
    )  # one batch: most of its cost is per call
    if answers.reason[_POINTS] != Reason.NONE:  # the condition itself: a single call says what is permitted
        equivalent_vne(aircraft, condition)
    every = np.where(answers.reason == Reason.NONE, answers.ias, np.nan).reshape(len(wanted), -1)
    rules = []
    for (field, quantity, unit, name, text, step, _), offsets, ias in zip(wanted, steps, every, strict=True):
        found = _rule(aircraft, offsets, ias)
        if found is not None:
            slope, first, last = found
            start = float(getattr(condition, field))
            ends = sorted(float(units.from_si(start + float(offsets[i]), quantity, unit)) for i in (first, last))
            rules.append(RuleOfThumb(name, text, unit, round(slope * step, 2), ends[0], ends[1]))
    return tuple(rules)


def _rule(aircraft: Aircraft, offsets: Floats, ias: Floats) -> tuple[float, int, int] | None:
    """The slope at the middle, and the first and last point it holds at; None where there is no slope to be had."""
    slope = _slope(offsets, ias)
    if slope is None:
        return None
    within = units.from_si(HOLDS_WITHIN, "speed", aircraft.units.speed)
    with np.errstate(invalid="ignore"):
        holds = np.abs(ias - (ias[_POINTS] + slope * offsets)) <= within
    first = _POINTS - int(np.argmin(np.append(holds[: _POINTS + 1][::-1], False))) + 1
    last = _POINTS + int(np.argmin(np.append(holds[_POINTS:], False))) - 1
    return slope, first, last


def _slope(offsets: Floats, ias: Floats) -> float | None:
    """Of the answers next to the condition; one-sided at an edge."""
    at, span = _POINTS, 2
    for left, right in ((at - span, at + span), (at - span, at), (at, at + span)):
        if np.isfinite(ias[[left, right]]).all():
            return float((ias[right] - ias[left]) / (offsets[right] - offsets[left]))
    return None
