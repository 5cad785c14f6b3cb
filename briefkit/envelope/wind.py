"""The trimmed rotor with the relative wind from any side: hover in wind, sideward and rearward flight.

The rotor's equations know the wind only by its own direction, so this is forward flight turned: the disc tilts into the
wind whichever side of the airframe that is. The airframe's drag across the wind is not in any aircraft file; the drag
area of forward flight stands in for it, which at the speeds of sideward flight is a small part of the forces.
"""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.solution import Solution, phase_lag_deg, rotor_of, state_of
from briefkit.errors import NoTrim, OutsideLimits, Reason
from briefkit.physics import airspeed, atmosphere
from briefkit.physics.trim import trim


def fastest_wind(aircraft: Aircraft) -> float:
    """The fastest relative wind that may be asked for [m/s true]: the chart's fastest entry in the thinnest air."""
    height = aircraft.limits.max_altitude.value
    hottest = float(aircraft.limits.max_temperature_at(height))
    pressure = float(atmosphere.pressure_at(height))
    return float(airspeed.true_from_calibrated(float(np.nanmax(aircraft.vne.speeds)), pressure, hottest))


def solve_in_wind(aircraft: Aircraft, condition: Condition, bearing: float, speed: float) -> Solution:
    """The trimmed rotor in a relative wind of `speed` [m/s true] from `bearing` [rad], clockwise from the nose.

    The condition's own airspeed is not used. `tip_angle_deg` is that of the tip where it retreats square to the wind;
    the flapping and cyclic of the answer are in the rotor's own axes. At bearing zero and the condition's own true
    airspeed this is `solution.solve`. Raises `OutsideLimits` where the model is not valid, `NoTrim` where it finds no
    flight; a climb faster than the wind is not valid.
    """
    many, rotor = Conditions.of(condition), rotor_of(aircraft)
    turned = replace(state_of(rotor, many, np.array([speed])), wind_azimuth=rotor.wind_azimuth(bearing))
    solved = trim(rotor, turned)
    reason = solved.reason[0]
    if reason is not Reason.NONE:
        kind = NoTrim if reason is Reason.NO_TRIM else OutsideLimits
        unit = aircraft.units.speed
        shown = float(units.from_si(speed, "speed", unit))
        permitted = "what the rotor model covers; see the advance ratio and loading it is offered for"
        raise kind("relative wind", shown, f"{unit} true", permitted, "rotor model", reason)
    angles = {
        f"{name}_deg": math.degrees(float(getattr(solved, name)[0]))
        for name in ("tip_angle", "b0", "b1c", "b1s", "t0", "t1c", "t1s")
    }
    return Solution(
        advance_ratio=float(solved.mu[0]), blade_loading=float(solved.ct_sigma[0]),
        advancing_mach=float(solved.advancing_mach[0]), residual=float(solved.residual[0]), tas=speed,
        phase_lag_deg=phase_lag_deg(aircraft, condition), trim=solved,
        section=aircraft.section, **angles,
    )  # fmt: skip
