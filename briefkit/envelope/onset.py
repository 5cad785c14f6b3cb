"""The speed at which the retreating tip reaches a given angle of attack: the rotor model's own, absolute onset.

An absolute onset is soft: one degree on the criterion moves it by eight or nine knots, and drag, twist, chord and
section are estimates. It is analysis, never a number for a crew. First signs have been associated with 12 degrees at
the retreating tip and the limit of control with 15 to 16 (NACA TR 840; the two upper values from memory).
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, fields
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.envelope.condition import Conditions
from briefkit.envelope.solution import state_of
from briefkit.errors import Reason
from briefkit.physics.rotor import Rotor
from briefkit.physics.trim import trim

Floats = NDArray[np.float64]

FIRST_SIGNS: Final = math.radians(12.0)
LIMIT_OF_CONTROL: Final = math.radians(16.0)

# Advance ratios of the first look. The tip angle rises smoothly with speed, so these bracket every crossing.
_ADVANCE_RATIOS: Final = np.concatenate([[0.03, 0.06], np.arange(0.09, 0.481, 0.03), [0.497]])
_REFINEMENTS: Final = 3
_STEP: Final = 1.0 * units.KNOT  # for the slope of tip angle against speed


@dataclass(frozen=True, eq=False)
class TipAngles:
    """Retreating-tip angle [rad] of each member (batch,) at rising true airspeeds [m/s]; both (batch, speed)."""

    speed: Floats
    angle: Floats


def tip_angles(rotor: Rotor, many: Conditions) -> TipAngles:
    """The tip angle of each condition from near hover to the model's highest advance ratio."""
    count = len(_ADVANCE_RATIOS)
    speed = _ADVANCE_RATIOS[None, :] * (many.rotor_speed * rotor.tip_speed)[:, None]
    angle = tip_angle_at(repeat_rotor(rotor, count), many.repeat(count), speed.ravel())
    return TipAngles(speed, angle.reshape(speed.shape))


def tip_angle_at(rotor: Rotor, many: Conditions, speed: Floats, grid: tuple[int, int] = (24, 12)) -> Floats:
    """Retreating-tip angle [rad] at true airspeeds [m/s], (batch,); NaN where the model has no answer."""
    solved = trim(rotor, state_of(rotor, many, speed), grid=grid)
    return np.where(solved.reason == Reason.NONE, solved.tip_angle, np.nan)


def gust_angle(rotor: Rotor, many: Conditions, speed: Floats, gust: Floats | float) -> Floats:
    """What air rising at `gust` [m/s] adds to the retreating tip's angle [rad] at once, controls held; broadcasts.

    The tip meets air at tip speed less true airspeed: a gust's angle is largest where the blade is slowest.
    """
    return np.arctan2(gust, many.rotor_speed * rotor.tip_speed - speed)


def onset_speed(
    rotor: Rotor,
    many: Conditions,
    target: float,
    curve: TipAngles | None = None,
    gust: Floats | float = 0.0,
) -> Floats:
    """True airspeed [m/s] at which the retreating tip reaches `target` [rad], (batch,), in air rising at `gust` [m/s].

    NaN where it is above the target at every speed, or does not reach it within the model's range. Three secant steps
    on the model itself leave less than 0.01 kt.
    """
    curve = curve or tip_angles(rotor, many)
    rising = np.broadcast_to(np.asarray(gust, dtype=float), (len(many),))
    added = gust_angle(
        rotor, many.repeat(curve.speed.shape[1]), curve.speed.ravel(), np.repeat(rising, curve.speed.shape[1])
    )
    curve = TipAngles(curve.speed, curve.angle + added.reshape(curve.speed.shape))
    column = _crossing(curve, target)
    members = np.nonzero(column >= 0)[0]
    speed = np.full(len(many), np.nan)
    if not len(members):
        return speed
    inner_rotor, inner, left = take_rotor(rotor, members), many.take(members), column[members]
    slow, fast = curve.speed[members, left], curve.speed[members, left + 1]
    below, above = curve.angle[members, left] - target, curve.angle[members, left + 1] - target
    for _ in range(_REFINEMENTS):
        guess = slow - below * (fast - slow) / (above - below)
        miss = tip_angle_at(inner_rotor, inner, guess) - target
        miss = miss + gust_angle(inner_rotor, inner, guess, rising[members])
        reached = miss >= 0.0
        fast, above = np.where(reached, guess, fast), np.where(reached, miss, above)
        slow, below = np.where(reached, slow, guess), np.where(reached, below, miss)
    speed[members] = slow - below * (fast - slow) / np.where(above > below, above - below, np.inf)
    return speed


def moved_onset(
    rotor: Rotor,
    many: Conditions,
    changed: Rotor,
    changed_many: Conditions,
    speed: Floats,
    target: float,
    count: int,
) -> Floats:
    """Onset of the changed members [m/s]: two secant steps from the unchanged one, whose slope they start with."""
    if count == 0:
        return np.empty(0)
    safe = np.where(np.isfinite(speed), speed, 10.0)
    slope = (tip_angle_at(rotor, many, safe + _STEP) - tip_angle_at(rotor, many, safe - _STEP)) / (2.0 * _STEP)
    slope = np.repeat(slope, count)
    start = np.repeat(safe, count)
    miss = tip_angle_at(changed, changed_many, start) - target
    guess = np.maximum(start - miss / slope, 0.0)
    again = tip_angle_at(changed, changed_many, guess) - target
    moved = guess - start
    secant = np.where(np.abs(moved) > 1e-6, (again - miss) / np.where(np.abs(moved) > 1e-6, moved, 1.0), slope)
    found = guess - again / np.where(secant > 0.0, secant, slope)
    return np.where(np.repeat(np.isfinite(speed), count), found, np.nan)


def _crossing(curve: TipAngles, target: float) -> NDArray[np.intp]:
    """Column before the first rise through the target, (batch,); -1 where there is none or the first point is above."""
    with np.errstate(invalid="ignore"):
        rises = (curve.angle[:, :-1] < target) & (curve.angle[:, 1:] >= target)
        starts_above = ~(curve.angle[:, 0] < target)
    first = np.argmax(rises, axis=1)
    return np.where(rises.any(axis=1) & ~starts_above, first, -1)


def repeat_rotor(rotor: Rotor, count: int) -> Rotor:
    """Each member of a batch of rotors, `count` times in a row."""
    return _each(rotor, lambda values: np.repeat(values, count))


def take_rotor(rotor: Rotor, members: NDArray[np.intp]) -> Rotor:
    """The members given of a batch of rotors."""
    return _each(rotor, lambda values: values[members])


def _each(rotor: Rotor, change: Callable[[Floats], Floats]) -> Rotor:
    values: dict[str, Any] = {field.name: getattr(rotor, field.name) for field in fields(rotor)}
    values |= {name: change(v) for name, v in values.items() if isinstance(v, np.ndarray)}
    return Rotor(**values)
