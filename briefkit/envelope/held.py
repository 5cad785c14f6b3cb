"""The rotor with its controls where another condition was trimmed: what the disc does before the pilot answers."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from briefkit import units
from briefkit.aircraft.model import Aircraft, Hub
from briefkit.envelope import here
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.solution import Solution, rotor_of, state_of
from briefkit.errors import NoTrim, OutsideLimits, ReadingError, Reason
from briefkit.physics.trim import Controls, held


@dataclass(frozen=True)
class Held:
    """Flapping from the shaft's plane in degrees (coning `b0_deg`), and the thrust over the weight, `load`.

    Where the controls were trimmed the shaft stood on the disc, so `b1c_deg`, `b1s_deg` are what has been added since.
    """

    b0_deg: float
    b1c_deg: float
    b1s_deg: float
    load: float

    @property
    def tilt_deg(self) -> float:
        """How far the disc stands off the shaft's plane, whichever way."""
        return math.hypot(self.b1c_deg, self.b1s_deg)


def held_at(aircraft: Aircraft, trimmed: Solution, condition: Condition) -> Held:
    """The rotor settled in a condition with the controls of a trimmed flight.

    The condition's bank plays no part: a rotor knows only the thrust it has, which `load` tells. Raises `ReadingError`
    without an airspeed, `OutsideCalibration`, and `OutsideLimits` or `NoTrim` as `solution.solve` does.
    """
    if condition.ias is None:
        raise ReadingError("no airspeed", "a condition with ias", 'add ias="85 kt"')
    many, rotor = Conditions.of(condition), rotor_of(aircraft)
    true = here.true_airspeed(aircraft, many.ias, many)
    if np.isnan(true[0]):
        raise aircraft.calibration.refuse(condition.ias, aircraft.units.speed)
    found = held(rotor, state_of(rotor, many, true), Controls.of(trimmed.trim))
    reason = found.reason[0]
    if reason is not Reason.NONE:
        kind = NoTrim if reason is Reason.NO_TRIM else OutsideLimits
        shown = float(units.from_si(condition.ias, "speed", aircraft.units.speed))
        permitted = "a condition nearer to where the controls were trimmed"
        raise kind("airspeed, controls held,", shown, aircraft.units.speed_label(), permitted, "rotor model", reason)
    thrust = float((found.ct * found.scale_of_thrust)[0])
    b0, b1c, b1s = (math.degrees(float(getattr(found, name)[0])) for name in ("b0", "hub_b1c", "hub_b1s"))
    return Held(b0, b1c, b1s, thrust / (condition.mass * units.GRAVITY))


def to_stop_deg(aircraft: Aircraft, b0_deg: float, tilt_deg: float) -> float | None:
    """Degrees left to the flap stop at most, below zero past it; None where the file gives no stop.

    A teetering hub stops see-sawing either way; a blade on a hinge stops on its way down. Less is left than this says
    by what the centre of gravity takes, which the file does not know.
    """
    stop = aircraft.rotor.flap_stop
    if stop is None:
        return None
    allowed = math.degrees(stop.value)
    return allowed - tilt_deg if aircraft.rotor.hub is Hub.TEETERING else allowed + b0_deg - tilt_deg
