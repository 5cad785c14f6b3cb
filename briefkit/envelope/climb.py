"""What a stated climb costs on top of the chart's answer: the rotor model's difference, which can only lower it.

At the chart point, level at V', the model's retreating tip has an angle A; V'' is the speed of the same A in the climb
w/k. The answer here falls by k (V' - V''). Drag area at the upper end of its spread; what a descent gives back is
never used.
"""

from __future__ import annotations

from dataclasses import replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from briefkit.aircraft.model import Aircraft
from briefkit.envelope.condition import Conditions
from briefkit.envelope.onset import tip_angle_at
from briefkit.envelope.search import Best
from briefkit.envelope.solution import rotor_of

Floats = NDArray[np.float64]

_STEP: Final = 1.0  # m/s, the first step of the secant
_SECANTS: Final = 5
_CLOSE: Final = 1e-4  # rad: a hundredth of a knot


def climb_cost(aircraft: Aircraft, best: Best, climb: Floats, rotor_speed: Floats) -> Floats:
    """True airspeed [m/s] to take off at each chart point for a climb [m/s], (batch,); zero where there is none.

    NaN where the model has no answer: the caller refuses.
    """
    cost = np.zeros(len(climb))
    asked = np.nonzero((climb > 0.0) & np.isfinite(best.vne))[0]
    if not len(asked):
        return cost
    drag = aircraft.rotor.drag_area
    rotor = rotor_of(aircraft, drag_area=drag.value + drag.spread)
    there = best.rotor_speed[asked]
    level = Conditions.si(
        mass=best.mass[asked],
        pressure_altitude=best.height[asked],
        oat=best.temperature[asked],
        rotor_speed=there,
    )
    scale = rotor_speed[asked] / there
    climbing = replace(level, climb=climb[asked] / scale)
    fast = best.vne[asked] * there
    angle = tip_angle_at(rotor, level, fast)
    past, slow = fast, fast - _STEP
    miss_past = tip_angle_at(rotor, climbing, past) - angle
    for _ in range(_SECANTS):
        miss = tip_angle_at(rotor, climbing, slow) - angle
        moved = slow - past
        slope = np.where(moved == 0.0, np.inf, (miss - miss_past) / np.where(moved == 0.0, 1.0, moved))
        past, miss_past, slow = slow, miss, slow - miss / slope
    reached = np.abs(tip_angle_at(rotor, climbing, slow) - angle) < _CLOSE
    cost[asked] = np.where(reached, np.maximum(fast - slow, 0.0) * scale, np.nan)
    return cost
