"""The rotor model at a condition: stated values become a rotor, the condition a state, trim answers."""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.section_table import OperatorSection
from briefkit.envelope import here
from briefkit.envelope.condition import Condition, Conditions
from briefkit.errors import NoTrim, OutsideLimits, ReadingError, Reason
from briefkit.physics import atmosphere
from briefkit.physics.rotor import Rotor, State
from briefkit.physics.trim import Trim, trim
from briefkit.units import Speed, SpeedKind

Floats = NDArray[np.float64]
Reasons = NDArray[np.object_]


@dataclass(frozen=True, eq=False)
class Solution:
    """The trimmed rotor at one condition. Angles in degrees; flapping and cyclic from the no-feathering plane.

    `tip_angle_deg` is the angle of attack at the retreating tip (r = 1, azimuth 270), `blade_loading` CT/sigma,
    `residual` the largest relative imbalance left, `tas` in m/s, `phase_lag_deg` atan((gamma/8)/(nu^2 - 1)) at local
    density. `trim` holds the arrays of the disc, a batch of one. `section` is the operator's own, whose stall angle the
    disc is held against; the flight itself is solved with the attached section of the published boundaries.
    """

    tip_angle_deg: float
    advance_ratio: float
    blade_loading: float
    advancing_mach: float
    b0_deg: float
    b1c_deg: float
    b1s_deg: float
    t0_deg: float
    t1c_deg: float
    t1s_deg: float
    residual: float
    tas: float
    phase_lag_deg: float
    trim: Trim
    section: OperatorSection | None = None

    @property
    def true_airspeed(self) -> Speed:
        """`tas` with its kind."""
        return Speed(self.tas, SpeedKind.TRUE)


@dataclass(frozen=True, eq=False)
class Solutions:
    """The same for a batch (batch,); NaN where `reason` is not empty."""

    tip_angle_deg: Floats
    advance_ratio: Floats
    blade_loading: Floats
    advancing_mach: Floats
    b0_deg: Floats
    b1c_deg: Floats
    b1s_deg: Floats
    t0_deg: Floats
    t1c_deg: Floats
    t1s_deg: Floats
    residual: Floats
    tas: Floats
    reason: Reasons
    trim: Trim


def rotor_of(aircraft: Aircraft, **changes: Any) -> Rotor:
    """The aircraft's rotor for the model; `changes` replace single fields (floats, or arrays of one batch length)."""
    data = aircraft.rotor
    values: dict[str, Any] = {
        "blades": data.blades,
        "radius": data.radius.value,
        "chord": data.chord.value,
        "twist": data.twist.value,
        "root_cutout": data.root_cutout.value,
        "flap_inertia": data.flap_inertia.value,
        "hub": str(data.hub),
        "flap_frequency": data.flap_frequency.value,
        "hinge_offset": data.hinge_offset.value,
        "precone": data.precone.value,
        "tip_speed": data.tip_speed,
        "drag_area": data.drag_area.value,
        "lift_slope": data.lift_slope.value,
        "rotation": -1 if aircraft.mirrored else 1,
    }
    return Rotor(**(values | changes))


def state_of(rotor: Rotor, many: Conditions, tas: Floats) -> State:
    """The state of each condition at a true airspeed [m/s], (batch,)."""
    return State(
        density=many.density,
        sound_speed=np.asarray(atmosphere.speed_of_sound(many.oat)),
        tip_speed=many.rotor_speed * rotor.tip_speed,
        speed=np.asarray(tas, dtype=float),
        thrust_weight=many.load_factor * many.mass * units.GRAVITY,
        climb_rate=many.climb,
    )


def solve(aircraft: Aircraft, condition: Condition) -> Solution:
    """The trimmed rotor at one condition with an indicated airspeed.

    Raises `ReadingError` without an airspeed, `OutsideLimits` above the maximum mass, `OutsideCalibration` where the
    airspeed has no calibrated value, `OutsideLimits` or `NoTrim` where the model is not valid or finds no flight.
    """
    if condition.ias is None:
        raise ReadingError("no airspeed", "a condition with ias", 'add ias="85 kt"')
    many = solve_many(aircraft, Conditions.of(condition))
    reason = many.reason[0]
    if reason:
        _raise(aircraft, condition, reason, many.trim)
    numbers = {
        name: float(getattr(many, name)[0])
        for name in Solution.__dataclass_fields__
        if name not in ("trim", "phase_lag_deg", "section")
    }
    lag = phase_lag_deg(aircraft, condition)
    return Solution(**numbers, phase_lag_deg=lag, trim=many.trim, section=aircraft.section)


def solve_many(aircraft: Aircraft, conditions: Conditions | Iterable[Condition]) -> Solutions:
    """The trimmed rotor of a batch; a refused member has NaN and a `Reason`, and disturbs no other."""
    many = conditions if isinstance(conditions, Conditions) else Conditions.of(conditions)
    rotor = rotor_of(aircraft)
    true = here.true_airspeed(aircraft, many.ias, many)
    reason = here.filled(len(many), Reason.NONE)
    reason[np.isnan(true)] = Reason.OUTSIDE_CALIBRATION
    reason[many.mass > aircraft.limits.max_mass.value * (1.0 + 1e-9)] = Reason.OUTSIDE_LIMITS
    solved = trim(rotor, state_of(rotor, many, np.where(np.isnan(true), 0.0, true)))
    reason = np.where(reason == Reason.NONE, solved.reason, reason)
    usable = reason == Reason.NONE

    def kept(values: Floats) -> Floats:
        return np.where(usable, values, np.nan)

    return Solutions(
        tip_angle_deg=kept(np.degrees(solved.tip_angle)),
        advance_ratio=kept(solved.mu),
        blade_loading=kept(solved.ct_sigma),
        advancing_mach=kept(solved.advancing_mach),
        b0_deg=kept(np.degrees(solved.b0)),
        b1c_deg=kept(np.degrees(solved.b1c)),
        b1s_deg=kept(np.degrees(solved.b1s)),
        t0_deg=kept(np.degrees(solved.t0)),
        t1c_deg=kept(np.degrees(solved.t1c)),
        t1s_deg=kept(np.degrees(solved.t1s)),
        residual=kept(solved.residual),
        tas=kept(true),
        reason=reason,
        trim=solved,
    )


def lock_number(aircraft: Aircraft, density: float) -> float:
    """Blade Lock number rho a c R^4 / I at a density [kg/m3]."""
    data = aircraft.rotor
    return density * data.lift_slope.value * data.chord.value * data.radius.value**4 / data.flap_inertia.value


def phase_lag_deg(aircraft: Aircraft, condition: Condition) -> float:
    """Hover phase lag from force to flap [deg], atan((gamma/8)/(nu^2 - 1)), at the condition's density."""
    gamma = lock_number(aircraft, condition.density)
    return math.degrees(math.atan2(gamma / 8.0, aircraft.rotor.flap_frequency.value**2 - 1.0))


def _raise(aircraft: Aircraft, condition: Condition, reason: Reason, solved: Trim) -> None:
    if reason is Reason.OUTSIDE_CALIBRATION:
        raise aircraft.calibration.refuse(float(condition.ias or 0.0), aircraft.units.speed)
    if reason is Reason.OUTSIDE_LIMITS:
        limit = aircraft.limits.max_mass
        unit = aircraft.units.mass
        raise OutsideLimits(
            "mass", units.from_si(condition.mass, "mass", unit), unit, f"up to {limit.text}", limit.source, reason
        )
    kind = NoTrim if reason is Reason.NO_TRIM else OutsideLimits
    shown = units.from_si(float(condition.ias or 0.0), "speed", aircraft.units.speed)
    permitted = f"advance ratio {float(solved.mu[0]):.2f}, blade loading {float(solved.ct_sigma[0]):.3f} were asked for"
    raise kind("airspeed", shown, aircraft.units.speed_label(), permitted, "rotor model", reason)
