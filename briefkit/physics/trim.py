"""Steady flight of a rotor: the ways to solve it over one set of equations, and the range the answers are offered for.

Trimmed: the rotor carries the apparent weight and pulls the airframe's drag along a given flight path, with no net hub
moment, so the shaft stands on the disc. Solved in the shaft's axes turned to the wind, where the wind's direction over
the ground plays no part, and turned back.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, fields
from typing import Final

import numpy as np
from numpy.typing import NDArray

from briefkit.errors import Reason
from briefkit.physics import balance as equations
from briefkit.physics.balance import TRIMMED, Balance
from briefkit.physics.elements import Motion, flow_at, flow_coefficients, make_grid, points_at
from briefkit.physics.flapping import from_no_feathering_plane
from briefkit.physics.inflow import Inflow, inflow_named
from briefkit.physics.newton import solve
from briefkit.physics.rotor import Case, Rotor, State, case_of
from briefkit.physics.section import Section, section_named
from briefkit.physics.start import trimmed_start
from briefkit.physics.steady import Elements, Trim

__all__ = ["Elements", "Trim", "trim"]

Array = NDArray[np.float64]

# The range the model is offered for. Beyond it a member is refused, never extrapolated.
LARGEST_ADVANCE_RATIO: Final = 0.5
LARGEST_BLADE_LOADING: Final = 0.18
LARGEST_ADVANCING_MACH: Final = 0.95
# Descent through the disc, by the hover induced velocity, past which the wake is no longer a slipstream unless the
# rotor flies on edgewise faster than EDGEWISE of the same. On the safe side of the vortex-ring region, which begins
# near half the hover induced velocity (common practice, no source).
LARGEST_DESCENT: Final = 0.35
EDGEWISE: Final = 1.5

TOLERANCE: Final = 1e-11  # where the iteration stops
ACCEPTED: Final = 1e-8  # the residual that counts as solved
CHUNK: Final = 64  # states at a time: their arrays stay in the processor's cache
EVALUATIONS: Final = 60

_KINDS: Final = (Reason.NONE, Reason.OUTSIDE_MODEL, Reason.NO_TRIM)

# No unknown moves farther in one step [rad; inflow by the tip speed]: t0 t1c t1s b0 b1c b1s induced tilt climb.
_LARGEST_STEP: Final = np.array([0.12, 0.12, 0.12, 0.12, 0.12, 0.12, 0.03, 0.12, 0.12])


def trim(
    rotor: Rotor,
    state: State,
    *,
    inflow: str = "white-blake",
    section: str | Section = "attached",
    grid: tuple[int, int] = (24, 12),
) -> Trim:
    """The rotor trimmed in a state: a batch, of length 1 for a single one.

    Blade element with tip loss, momentum inflow with a first-harmonic gradient, rigid flapping by harmonic balance,
    reversed flow kept. `inflow` names an entry of `inflow.INFLOWS`, `section` one of `section.SECTIONS` or is a
    section; `grid` = (azimuths, radii).

    A member outside the range of the model (advance ratio 0.5, blade loading CT/sigma 0.18, advancing-tip Mach 0.95,
    descent into the rotor's own wake; a number that is not finite) gets `Reason.OUTSIDE_MODEL`; one for which no
    steady flight was found, `Reason.NO_TRIM` with the last residual. Raises `OutsideLimits` for names or grids that do
    not exist, ValueError for arrays of different lengths.
    """
    case = case_of(rotor, state)
    mesh, blade, model = make_grid(rotor.planform, grid), section_named(section), inflow_named(inflow)
    found = _Found.nothing(case.size)
    for members in _chunks(np.flatnonzero(within_range(case))):
        part = case.take(members)
        found.put(members, _solved(Balance(part, mesh, blade, model, TRIMMED, trimmed_start(part, model))))
    return _report(rotor, state, case, found, model, grid)


@dataclass(frozen=True, eq=False)
class _Found:
    """Solver output by member: the columns of `Motion`, the coefficients CT CH CY CQ, last residual, evaluations."""

    columns: Array
    forces: Array
    left: Array
    evaluations: NDArray[np.intp]

    def put(self, members: NDArray[np.intp], part: _Found) -> None:
        """Write the answers of some members into the whole batch."""
        self.columns[members], self.forces[members] = part.columns, part.forces
        self.left[members], self.evaluations[members] = part.left, part.evaluations

    @classmethod
    def nothing(cls, size: int) -> _Found:
        """A batch without any answer."""
        blank = np.full((size, 9), np.nan), np.full((size, 4), np.nan), np.full(size, np.nan)
        return cls(*blank, np.zeros(size, dtype=np.intp))


def within_range(case: Case) -> NDArray[np.bool_]:
    """Members worth solving: finite numbers, and not outside the model's range for certain.

    The exact limits are held after solving, when advance ratio and blade loading are known.
    """
    columns = np.stack([getattr(case, f.name) for f in fields(case)])
    finite = np.isfinite(columns).all(axis=0)
    with np.errstate(invalid="ignore", divide="ignore"):
        hover = np.sqrt(np.maximum(case.weight, 0.0) / 2.0)
        sinking = case.speed * np.sin(case.climb) < -LARGEST_DESCENT * hover
        slow = case.speed * np.cos(case.climb) < EDGEWISE * hover
        good = (
            (case.weight > 0.0)
            & (case.weight <= 1.1 * LARGEST_BLADE_LOADING * case.solidity)
            & (case.speed >= 0.0)
            & (case.speed <= 1.2 * LARGEST_ADVANCE_RATIO)
            & (case.tip_mach > 0.0)
            & (case.tip_mach <= LARGEST_ADVANCING_MACH)
            & (case.flap_gain > 0.0)
            & ~(sinking & slow)
        )
    return np.asarray(finite & good)


def _chunks(members: NDArray[np.intp]) -> Iterator[NDArray[np.intp]]:
    for start in range(0, members.size, CHUNK):
        yield members[start : start + CHUNK]


def _solved(balance: Balance) -> _Found:
    """The batch of a balance solved from where its base stands."""
    free = list(balance.way.free)
    base = balance.base.copy()
    roots = solve(balance.left, balance.slopes, base[:, free], _LARGEST_STEP[free], TOLERANCE, EVALUATIONS)
    base[:, free] = roots.x
    motion, case = Motion(*base.T), balance.case
    sums = balance.sums(case, motion)[0]
    forces = np.stack(
        [
            equations.thrust(case, sums),
            equations.rearward_force(case, motion, sums),
            equations.side_force(case, motion, sums),
            equations.torque(case, sums),
        ],
        axis=1,
    )
    return _Found(base, forces, np.abs(roots.left).max(axis=1), roots.evaluations)


def _report(rotor: Rotor, state: State, case: Case, found: _Found, model: Inflow, grid: tuple[int, int]) -> Trim:
    """The answers in the rotor's own axes, with a reason and no number where there is none."""
    reason = _reasons(case, found)
    gone = np.array([member is not Reason.NONE for member in reason])
    columns, forces = np.where(gone[:, None], np.nan, found.columns), np.where(gone[:, None], np.nan, found.forces)
    motion = Motion(*columns.T)
    mu, axial = motion.mu(case), motion.axial(case)
    kx, ky = model.gradients(mu, axial + motion.induced)
    level_b1c, level_b1s = from_no_feathering_plane(motion)
    t1c, t1s = _turned(motion.t1c, motion.t1s, case.wind_azimuth)
    b1c, b1s = _turned(level_b1c, level_b1s, case.wind_azimuth)
    hub_b1c, hub_b1s = _turned(motion.b1c, motion.b1s, case.wind_azimuth)
    tip = points_at(rotor.planform, np.array([1.0]), np.array([1.5 * np.pi]))
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
        inflow=axial + motion.induced,
        induced_velocity=motion.induced * np.asarray(state.tip_speed),
        kx=kx,
        ky=ky,
        mu=mu,
        ct=forces[:, 0],
        ct_sigma=forces[:, 0] / case.solidity,
        ch=forces[:, 1],
        cy=forces[:, 2],
        cq=forces[:, 3],
        disc_tilt=motion.tilt,
        incidence=motion.tilt + motion.climb,
        tip_mach=case.tip_mach * blank,
        advancing_mach=(1.0 + mu) * case.tip_mach,
        tip_angle=flow_at(case, tip, flow_coefficients(case, motion, model)).angle[:, 0],
        residual=found.left,
        iterations=found.evaluations,
        reason=reason,
        case=case,
        motion=motion,
        shape=model,
        grid=grid,
    )


def _reasons(case: Case, found: _Found) -> NDArray[np.object_]:
    """Why a member has no number: not solved at all or outside the model's range, or no steady flight found."""
    motion = Motion(*found.columns.T)
    mu, loading = motion.mu(case), found.forces[:, 0] / case.solidity
    hover = np.sqrt(np.maximum(found.forces[:, 0], 0.0) / 2.0)
    in_wake = (motion.axial(case) < -LARGEST_DESCENT * hover) & (mu < EDGEWISE * hover)
    inside = (
        (mu <= LARGEST_ADVANCE_RATIO)
        & (loading <= LARGEST_BLADE_LOADING)
        & ((1.0 + mu) * case.tip_mach <= LARGEST_ADVANCING_MACH)
        & ~in_wake
    )
    lost = (found.evaluations > 0) & ~(found.left <= ACCEPTED)
    kinds = np.where(lost, 2, np.where(inside, 0, 1))
    # Member by member: numpy would turn a text enumeration assigned to a whole array into plain text.
    reason = np.empty(case.size, dtype=object)
    for member, kind in enumerate(kinds):
        reason[member] = _KINDS[kind]
    return reason


def _turned(cosine: Array, sine: Array, turn: Array) -> tuple[Array, Array]:
    """A first harmonic in wind axes, in axes whose zero lies `turn` against the rotation from theirs."""
    return cosine * np.cos(turn) - sine * np.sin(turn), cosine * np.sin(turn) + sine * np.cos(turn)
