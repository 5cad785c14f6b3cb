"""Power at a solved state, by integration over the disc, and where it goes.

For each element the air takes D U of its drag, and its lift works against the induced flow; what the in-plane force and
the thrust do beyond that moves the airframe. So, exactly and for any flapping that is steady,

    CQ = mean(Fz lambda_i) + mean(cd U^3) + (mu_z CT - mu CH),

induced, profile, and propulsive power, the last being what drag and climb take: (T sin - H cos) of the disc's
incidence times the speed is D V + n W w when the forces balance.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from briefkit.physics.balance import disc_of
from briefkit.physics.steady import Trim

Array = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Power:
    """Power of the main rotor [W], each (batch,); NaN where the flight has a reason.

    `total` is torque times rotor speed. `induced`, `profile`, `parasite` (drag along the flight path) and `climb` (the
    apparent weight up it; negative in descent) add up to it in a trimmed flight; with the controls held forces need
    not balance, and `left_over` is what then speeds the aircraft up. No tail rotor, no losses, no engine.
    `figure_of_merit`: ideal over total power, CT^(3/2) / (sqrt2 CQ), in hover only; NaN with wind or climb.
    """

    total: Array
    induced: Array
    profile: Array
    parasite: Array
    climb: Array
    left_over: Array
    figure_of_merit: Array


def power(flight: Trim) -> Power:
    """The power of a solved batch, summed on the grid it was solved on.

    Source: the energy balance above; NACA TR 716 and any later textbook give it term by term.
    """
    case, motion, model = flight.case, flight.motion, flight.model
    disc = disc_of(case, motion, model)
    weights, points = model.grid.weights[:, 0], model.grid.points
    induced = motion.inflow(case)
    shape = np.stack([induced, flight.kx * induced, flight.ky * induced], axis=1) @ points.shapes[:3]
    half = 0.5 * case.solidity
    by_induced = half * ((disc.forces.normal * shape) @ weights)
    by_profile = half * ((disc.forces.drag_coefficient * disc.flow.resultant**3) @ weights)
    watts = flight.scale_of_power
    parasite = case.drag * case.speed
    climb = case.weight * case.speed * np.sin(motion.climb)
    still = (case.speed == 0.0) & (case.gust == 0.0)
    merit = np.where(still, np.maximum(flight.ct, 0.0) ** 1.5 / (np.sqrt(2.0) * flight.cq), np.nan)
    return Power(
        total=flight.cq * watts,
        induced=by_induced * watts,
        profile=by_profile * watts,
        parasite=parasite * watts,
        climb=climb * watts,
        left_over=(flight.cq - by_induced - by_profile - parasite - climb) * watts,
        figure_of_merit=merit,
    )
