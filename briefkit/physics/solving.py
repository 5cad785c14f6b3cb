"""A batch solved and reported: chunks, the second attempt at hard members, the range answers are offered for."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, fields, replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from briefkit.errors import Reason
from briefkit.physics.balance import (
    GLIDING,
    TORQUE,
    VERTICAL,
    Balance,
    Model,
    Way,
)
from briefkit.physics.elements import Motion, flow_at, flow_coefficients, points_at
from briefkit.physics.flapping import from_no_feathering_plane
from briefkit.physics.newton import solve
from briefkit.physics.rotor import BARE, REFERENCE_STATION, Case, Rotor, State
from briefkit.physics.section import Attached, Section
from briefkit.physics.start import gliding_start, held_start, trimmed_start
from briefkit.physics.steady import Trim, tip_angle

Array = NDArray[np.float64]
Members = NDArray[np.intp]

# The range the model is offered for. Beyond it a member is refused, never extrapolated.
LARGEST_ADVANCE_RATIO: Final = 0.5
LARGEST_BLADE_LOADING: Final = 0.18
LARGEST_ADVANCING_MACH: Final = 0.95
# Descent through the disc, by the hover induced velocity, past which the wake is no longer a slipstream unless the
# rotor flies on edgewise faster than EDGEWISE of the same. Roughness is felt from about half the hover induced velocity
# (common practice, no source); FAA-H-8083-21B warns from 300 ft/min, which is .15 to .2 of it on a light helicopter.
LARGEST_DESCENT: Final = 0.25
EDGEWISE: Final = 1.5

TOLERANCE: Final = 1e-10  # where the iteration stops
ACCEPTED: Final = 1e-8  # the residual that counts as solved
# States at a time: their arrays stay in the processor's cache, and no matrix product is so large (rows x points x
# sums) that a linear-algebra library splits it over threads, which costs more than it gives at this size.
CHUNK: Final = 64
LARGEST_PRODUCT: Final = 200_000
EVALUATIONS: Final = 40
ALLOCATOR_HINT: Final = 8_000_000  # bytes, more than the arrays of one chunk together

# No unknown moves farther in one step [rad; inflow by the tip speed]: t0 t1c t1s b0 b1c b1s induced tilt climb.
_LARGEST_STEP: Final = np.array([0.12, 0.12, 0.12, 0.12, 0.12, 0.12, 0.03, 0.12, 0.12])
_SHARES: Final = (0.0, 0.3, 0.55, 0.75, 0.9, 1.0)  # of the section asked for, on the way from attached to it
_KINDS: Final[NDArray[np.object_]] = np.array([Reason.NONE, Reason.OUTSIDE_MODEL, Reason.NO_TRIM], dtype=object)


@dataclass(frozen=True, eq=False)
class Found:
    """Solver output by member: columns of `Motion`, CT CH CY CQ, the last residual, evaluations of the disc."""

    columns: Array
    forces: Array
    left: Array
    evaluations: Members

    def put(self, members: Members | NDArray[np.bool_], part: Found) -> None:
        """Write the answers of some members into the whole batch."""
        for name in ("columns", "forces", "left", "evaluations"):
            getattr(self, name)[members] = getattr(part, name)

    @classmethod
    def nothing(cls, size: int) -> Found:
        """A batch without any answer."""
        blank = np.full((size, 9), np.nan), np.full((size, 4), np.nan), np.full(size, np.nan)
        return cls(*blank, np.zeros(size, dtype=np.intp))


@dataclass(frozen=True)
class _Blend:
    """A section part of the way from one that never stalls to the one asked for."""

    section: Section
    share: float
    highest_mach: float = 1.0

    def coefficients(self, angle: Array, mach: Array, lift_slope: Array) -> tuple[Array, Array]:
        """Lift and drag coefficient."""
        easy, asked = (
            Attached().coefficients(angle, mach, lift_slope),
            self.section.coefficients(angle, mach, lift_slope),
        )
        lift, drag = (one + self.share * (other - one) for one, other in zip(easy, asked, strict=True))
        return lift, drag


def solved(rotor: Rotor, state: State, way: Way, model: Model, case: Case, controls: Array | None = None) -> Trim:
    """A batch solved one way and reported; `controls` (batch, 9) where they are held."""
    _settle_allocator()
    asked = case
    if VERTICAL not in way.equations:  # the weight only scales residuals then
        case = replace(case, weight=0.1 * case.solidity)
    inside = _within_range(case, way)
    if controls is not None:
        inside &= np.isfinite(controls).all(axis=1)
    start = np.full((case.size, 9), np.nan)
    found = Found.nothing(case.size)
    for members in _chunks(np.flatnonzero(inside), model):
        part = case.take(members)
        start[members] = _start(part, model, way, None if controls is None else controls[members])
        found.put(members, _attempt(part, model, way, start[members]))
    for members in _chunks(np.flatnonzero(inside & ~(found.left <= ACCEPTED)), model):
        again = _continued(case.take(members), model, way, start[members])
        again.evaluations[:] += found.evaluations[members]
        found.put(members, again)
    return _report(rotor, state, asked, found, model)


def _settle_allocator() -> None:
    """Take and drop one large array, untouched.

    The GNU C library hands freed memory back to the system at once until it has seen a block of that size come and go
    (mallopt(3), dynamic threshold). Without this each evaluation pays for fresh pages: twice the time.
    """
    np.empty(ALLOCATOR_HINT, dtype=np.uint8)


def _start(case: Case, model: Model, way: Way, controls: Array | None) -> Array:
    if controls is not None:
        return held_start(case, model.inflow, controls)
    return (gliding_start if way is GLIDING else trimmed_start)(case, model.inflow)


def _attempt(case: Case, model: Model, way: Way, start: Array) -> Found:
    free = list(way.free)
    balance = Balance(case, model, way, start)
    roots = solve(balance.left, balance.slopes, start[:, free], _LARGEST_STEP[free], TOLERANCE, EVALUATIONS)
    columns = balance.columns(roots.x, np.arange(case.size))
    return Found(columns, roots.kept, np.abs(roots.left).max(axis=1), roots.evaluations)


def _continued(case: Case, model: Model, way: Way, start: Array) -> Found:
    """From the solution with a section that never stalls, step by step to the section asked for.

    A member that is lost on the way stays where it was lost: that is its last residual.
    """
    whole = Found.nothing(case.size)
    whole.columns[:] = start
    going = np.arange(case.size)
    for share in _SHARES:
        section = model.section if share == 1.0 else _Blend(model.section, share)
        found = _attempt(case.take(going), replace(model, section=section), way, whole.columns[going])
        found.evaluations[:] += whole.evaluations[going]
        whole.put(going, found)
        going = going[found.left <= ACCEPTED]
        if going.size == 0:
            break
    arrived = np.zeros(case.size, dtype=bool)
    arrived[going] = True
    # Solved with a section that is not the one asked for is not solved.
    whole.left[~arrived] = np.maximum(whole.left[~arrived], 2.0 * ACCEPTED)
    return whole


def _within_range(case: Case, way: Way) -> NDArray[np.bool_]:
    """Members worth solving: finite numbers, and not outside the model's range for certain.

    The exact limits are held after solving, when advance ratio and blade loading are known.
    """
    finite = np.isfinite(np.array([getattr(case, part.name) for part in fields(case)])).all(axis=0)
    hover = np.sqrt(np.where(case.weight > 0.0, case.weight, np.nan) / 2.0)
    sinking = case.speed * np.sin(case.climb) < -1.3 * LARGEST_DESCENT * hover
    slow = case.speed * np.cos(case.climb) < 0.8 * EDGEWISE * hover
    good = (
        (case.weight > 0.0)
        & (case.weight <= 1.1 * LARGEST_BLADE_LOADING * case.solidity)
        & (case.speed >= 0.0)
        & (case.speed <= 1.2 * LARGEST_ADVANCE_RATIO)
        & (case.tip_mach > 0.0)
        & (case.tip_mach <= LARGEST_ADVANCING_MACH)
        & (case.flap_gain > 0.0)
    )
    if TORQUE not in way.equations:
        good &= ~(sinking & slow)
    elif way is GLIDING:  # so slow a glide sinks faster than the wake allows, whatever its path
        good &= ~slow
    return np.asarray(finite & good)


def _chunks(members: Members, model: Model) -> Iterator[Members]:
    points, sums = model.grid.weights.shape
    size = max(1, min(CHUNK, LARGEST_PRODUCT // (points * sums)))
    for start in range(0, members.size, size):
        yield members[start : start + size]


def _report(rotor: Rotor, state: State, case: Case, found: Found, model: Model) -> Trim:
    """The answers in the rotor's own axes, with a reason and no number where there is none."""
    reason = _reasons(case, found, model)
    gone = np.array([member is not Reason.NONE for member in reason])
    columns, forces = np.where(gone[:, None], np.nan, found.columns), np.where(gone[:, None], np.nan, found.forces)
    motion = Motion(*columns.T)
    mu, axial, induced = motion.mu(case), motion.axial(case), motion.inflow(case)
    kx, ky = model.inflow.gradients(mu, axial + induced)
    level_b1c, level_b1s = from_no_feathering_plane(motion)
    t1c, t1s = turned(motion.t1c, motion.t1s, case.wind_azimuth)
    b1c, b1s = turned(level_b1c, level_b1s, case.wind_azimuth)
    hub_b1c, hub_b1s = turned(motion.b1c, motion.b1s, case.wind_azimuth)
    blank = np.where(gone, np.nan, 1.0)
    return Trim(
        rotor=rotor,
        state=state,
        t0=motion.t0,
        t1c=t1c,
        t1s=t1s,
        b0=motion.b0,
        b1c=b1c,
        b1s=b1s,
        hub_b1c=hub_b1c,
        hub_b1s=hub_b1s,
        inflow=axial + induced,
        induced_velocity=induced * np.asarray(state.tip_speed),
        kx=kx * blank,
        ky=ky * blank,
        mu=mu,
        ct=forces[:, 0],
        ct_sigma=forces[:, 0] / case.solidity,
        ch=forces[:, 1],
        cy=forces[:, 2],
        cq=forces[:, 3],
        disc_tilt=motion.tilt + motion.b1c,
        incidence=motion.tilt + motion.b1c + motion.climb,
        tip_mach=case.tip_mach * blank,
        advancing_mach=(1.0 + mu) * case.tip_mach,
        climb_rate=case.speed * np.sin(motion.climb) * np.asarray(state.tip_speed),
        tip_angle=tip_angle(rotor, case, flow_coefficients(case, motion, model.inflow)),
        residual=found.left,
        iterations=found.evaluations,
        reason=reason,
        case=case,
        motion=motion,
        model=model,
    )


def _reasons(case: Case, found: Found, model: Model) -> NDArray[np.object_]:
    """Why a member has no number: not solved at all or outside the model's range, or no steady flight found."""
    motion = Motion(*found.columns.T)
    mu, loading = motion.mu(case), found.forces[:, 0] / case.solidity
    hover = np.sqrt(np.abs(found.forces[:, 0]) / 2.0)
    # Against the thrust, whichever way that points.
    against = motion.axial(case) * np.sign(found.forces[:, 0])
    in_wake = (against < -LARGEST_DESCENT * hover) & (mu < EDGEWISE * hover)
    inside = (
        (mu <= LARGEST_ADVANCE_RATIO)
        & (np.abs(loading) <= LARGEST_BLADE_LOADING)
        & ((1.0 + mu) * case.tip_mach <= min(LARGEST_ADVANCING_MACH, model.section.highest_mach))
        & ~in_wake
    )
    lost = (found.evaluations > 0) & ~(found.left <= ACCEPTED)
    lost |= _deeply_stalled(case, motion, model)
    kinds = np.where(lost, 2, np.where(inside, 0, 1))
    # Looked up, not filled in: numpy would turn a text enumeration assigned to a whole array into plain text.
    return _KINDS[kinds]


def _deeply_stalled(case: Case, motion: Motion, model: Model) -> NDArray[np.bool_]:
    """Members whose blades at 0.75 R stand, in the mean round the disc, past the section's angle of maximum lift.

    Thrust against collective has a maximum; far beyond it a stalled disc can carry the weight again like a flat plate.
    That is an answer to the equations, not a flight.
    """
    if not hasattr(model.section, "stall_angle"):
        return np.zeros(case.size, dtype=bool)
    azimuths = model.grid.azimuths
    points = points_at(BARE, np.full_like(azimuths, REFERENCE_STATION), azimuths)
    flow = flow_at(case, points, flow_coefficients(case, motion, model.inflow))
    stall = model.section.stall_angle(flow.mach.mean(axis=1))
    return np.asarray(flow.angle.mean(axis=1) > stall)


def turned(cosine: Array, sine: Array, turn: Array) -> tuple[Array, Array]:
    """A first harmonic in wind axes, in axes whose zero lies `turn` against the rotation from theirs."""
    return cosine * np.cos(turn) - sine * np.sin(turn), cosine * np.sin(turn) + sine * np.cos(turn)
