"""The equations of steady flight: nine residuals, nine unknowns, and their slopes.

Unknowns are the fields of `Motion` in order. Equations, in order: vertical and in-plane force over the weight, the
three of flapping [rad], inflow, torque, the two moments about a stated centre of gravity. A way of solving (`Way`)
names which unknowns are free and which equations must then hold; trimmed, controls held and torque-free flight are
such choices over this one set.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from briefkit.physics.elements import (
    Coefficients,
    Flow,
    Forces,
    Grid,
    Motion,
    Products,
    Sums,
    flow_at,
    flow_coefficients,
    forces_of,
    make_grid,
    sums_of,
)
from briefkit.physics.flapping import flap_balance
from briefkit.physics.inflow import Inflow, induced_balance, inflow_named
from briefkit.physics.rotor import Case, Rotor
from briefkit.physics.section import Section, section_named

Array = NDArray[np.float64]
Members = NDArray[np.intp]

T0, T1C, T1S, B0, B1C, B1S, INDUCED, TILT, CLIMB = range(9)
VERTICAL, IN_PLANE, FLAP_MEAN, FLAP_COSINE, FLAP_SINE, INFLOW, TORQUE, HUB_COSINE, HUB_SINE = range(9)

_ANGLE_STEP: Final = 1e-6  # rad, for slopes of section coefficients
_UNKNOWN_STEP: Final = 1e-7  # for slopes of the closed-form parts; every unknown is of order 0.01 to 1
_REFERENCE_LOADING: Final = 0.1  # a usual CT/sigma, only to scale the inflow equation


@dataclass(frozen=True)
class Way:
    """Free unknowns and the equations they must meet, as many of one as of the other."""

    free: tuple[int, ...]
    equations: tuple[int, ...]


TRIMMED: Final = Way((T0, T1C, T1S, B0, INDUCED, TILT), (VERTICAL, IN_PLANE, FLAP_MEAN, FLAP_COSINE, FLAP_SINE, INFLOW))
# The same where a centre of gravity is stated: the disc then flaps from the shaft by what holds the moments.
BALANCED: Final = Way((*TRIMMED.free, B1C, B1S), (*TRIMMED.equations, HUB_COSINE, HUB_SINE))
HELD: Final = Way((B0, B1C, B1S, INDUCED), (FLAP_MEAN, FLAP_COSINE, FLAP_SINE, INFLOW))
# Torque-free: trimmed down a glide path that is found, or with the controls held at a shaft angle that is found.
GLIDING: Final = Way((*TRIMMED.free, CLIMB), (*TRIMMED.equations, TORQUE))
WINDMILLING: Final = Way((*HELD.free, TILT), (*HELD.equations, TORQUE))


@dataclass(frozen=True, eq=False)
class Loads:
    """Force and torque coefficients in the shaft's axes, each (batch,): CT along the shaft, CH in the disc's plane
    downwind, CY in it towards psi = 90 degrees of the wind axes, CQ (which is the power coefficient too)."""

    thrust: Array
    rearward: Array
    side: Array
    torque: Array


def loads_of(case: Case, motion: Motion, sums: Sums) -> Loads:
    """The loads of a motion. Flapped blades lean part of their lift inward, which is why flapping turns up here."""
    lift, _, cosine, sine, _, _, cosines, mixed, sines = sums.normal.T
    _, spin, drag_cosine, drag_sine = sums.drag.T[:4]
    half = 0.5 * case.solidity
    return Loads(
        thrust=half * lift,
        rearward=half * (drag_sine - motion.b0 * cosine - motion.b1c * cosines - motion.b1s * mixed),
        side=-half * (drag_cosine + motion.b0 * sine + motion.b1c * mixed + motion.b1s * sines),
        torque=half * spin,
    )


def hub_moments(case: Case, motion: Motion, loads: Loads) -> tuple[Array, Array]:
    """Moments about the centre of gravity by cosine and sine, over rho A (Omega R)^2 R; zero in balance.

    The disc's tilt from the shaft strains the hub by N I Omega^2 (nu^2 - 1) / 2 per radian; against it stand the
    in-plane force at the hub's height (the thrust's lean with the disc is in it) and the thrust behind the centre of
    gravity. The airframe's drag acts there. The part of the lift that a hinge offset passes on at once is left out, as
    in the usual formula for hub moment. Where no centre of gravity is stated, the tilt itself must vanish.
    """
    hub = 0.25 * case.solidity * (case.stiffness - 1.0) / case.flap_gain
    ahead_cosine, ahead_sine = case.cg_ahead * np.cos(case.wind_azimuth), -case.cg_ahead * np.sin(case.wind_azimuth)
    pitching = hub * motion.b1c - loads.rearward * case.hub_height + loads.thrust * ahead_cosine
    rolling = hub * motion.b1s - loads.side * case.hub_height + loads.thrust * ahead_sine
    stated = case.hub_height > 0.0
    return np.where(stated, pitching, case.weight * motion.b1c), np.where(stated, rolling, case.weight * motion.b1s)


def residuals(case: Case, motion: Motion, sums: Sums, wanted: tuple[int, ...]) -> Array:
    """The equations wanted, then CT, CH, CY and CQ: (batch, wanted + 4).

    Vertical: T cos(tilt) + H sin(tilt) = n W + D sin(climb). In plane: T sin(tilt) - H cos(tilt) = D cos(climb), both
    over n W. Drag acts along the flight path, H in the disc's plane.
    """
    loads, mu = loads_of(case, motion, sums), motion.mu(case)
    cosine, sine = np.cos(motion.tilt), np.sin(motion.tilt)
    scale = 2.0 * np.sqrt(mu * mu + 0.5 * _REFERENCE_LOADING * case.solidity)
    parts = [
        (loads.thrust * cosine + loads.rearward * sine - case.drag * np.sin(motion.climb)) / case.weight - 1.0,
        (loads.thrust * sine - loads.rearward * cosine - case.drag * np.cos(motion.climb)) / case.weight,
        *flap_balance(case, motion, sums),
        induced_balance(loads.thrust, mu, motion.axial(case), motion.induced) / scale,
        loads.torque / case.weight,
    ]
    if HUB_COSINE in wanted:
        parts.extend(moment / case.weight for moment in hub_moments(case, motion, loads))
    return np.array([*(parts[one] for one in wanted), loads.thrust, loads.rearward, loads.side, loads.torque]).T


@dataclass(frozen=True, eq=False)
class Model:
    """What the disc is summed with: mesh, section and shape of the inflow; `size` = (azimuths, radii)."""

    grid: Grid
    section: Section
    inflow: Inflow
    size: tuple[int, int]

    @classmethod
    def of(cls, rotor: Rotor, inflow: str, section: str | Section, size: tuple[int, int]) -> Model:
        """By names; raises `OutsideLimits` for those that do not exist and for a grid that is too coarse."""
        return cls(make_grid(rotor.planform, size), section_named(section), inflow_named(inflow), size)


@dataclass(frozen=True, eq=False)
class Disc:
    """The disc in one motion: sums, and what they were made of."""

    sums: Sums
    terms: Coefficients
    flow: Flow
    forces: Forces


def disc_of(case: Case, motion: Motion, model: Model) -> Disc:
    """The disc of a batch in a motion, summed over the model's grid."""
    terms = flow_coefficients(case, motion, model.inflow)
    flow = flow_at(case, model.grid.points, terms)
    forces = forces_of(case, flow, model.section, model.grid.lifting)
    return Disc(sums_of(model.grid, forces.normal, forces.drag), terms, flow, forces)


@dataclass(frozen=True, eq=False)
class Balance:
    """The equations of a batch for one way of solving: `base` (batch, 9) holds the unknowns that are not free."""

    case: Case
    model: Model
    way: Way
    base: Array

    def left(self, x: Array, members: Members) -> Array:
        """Residuals of the equations in force and then CT, CH, CY, CQ, (member, equations + 4)."""
        case, motion = self._members(members), Motion(*self.columns(x, members).T)
        return residuals(case, motion, disc_of(case, motion, self.model).sums, self.way.equations)

    def slopes(self, x: Array, members: Members) -> tuple[Array, Array]:
        """What `left` gives, and the equations' slopes by the free unknowns (member, equation, free).

        Slopes of the element forces are analytic by angle and velocity, and go to the sums through the grid's
        shapes; Mach number is held meanwhile. What is in closed form is differenced.
        """
        case, columns = self._members(members), self.columns(x, members)
        motion = Motion(*columns.T)
        disc = disc_of(case, motion, self.model)
        sums, terms = disc.sums, disc.terms
        left = residuals(case, motion, sums, self.way.equations)
        now = left[:, : len(self.way.equations)]
        # Every free unknown moved a little in turn, all in one batch: (free, member) run together.
        count, free = x.shape[0], len(self.way.free)
        many = case.take(np.tile(np.arange(count), free))
        moved = np.tile(columns, (free, 1, 1))
        moved[np.arange(free), :, self.way.free] += _UNKNOWN_STEP
        moved_motion = Motion(*moved.reshape(-1, 9).T)
        moved_terms = flow_coefficients(many, moved_motion, self.model.inflow)
        change = [
            (new.reshape(free, count, -1) - old.reshape(count, -1))
            for new, old in (
                (moved_terms.pitch, terms.pitch),
                (moved_terms.through, terms.through),
                (moved_terms.across, terms.across),
            )
        ]
        normal, drag = (
            own + sum(np.einsum("fmk,mks->fms", part, by) for part, by in zip(change, slopes, strict=True))
            for own, slopes in zip((sums.normal, sums.drag), self._sum_slopes(case, disc), strict=True)
        )
        moved_sums = Sums(normal.reshape(free * count, -1), drag.reshape(free * count, -1))
        after = residuals(many, moved_motion, moved_sums, self.way.equations).reshape(free, count, -1)[:, :, :free]
        return left, ((after - now) / _UNKNOWN_STEP).transpose(1, 2, 0)

    def _sum_slopes(self, case: Case, disc: Disc) -> tuple[list[Array], list[Array]]:
        """Slopes of the normal and the drag sums by the coefficients of pitch, flow through and flow across.

        Each (member, coefficient, sum).
        """
        grid, flow, forces = self.model.grid, disc.flow, disc.forces
        u, across, through = flow.resultant, flow.across, flow.through
        raised = self.model.section.coefficients(flow.angle + _ANGLE_STEP, flow.mach, case.lift_slope[:, None])
        lift, drag = forces.lift_coefficient, forces.drag_coefficient
        lift_slope = (raised[0] * grid.lifting - lift) / _ANGLE_STEP
        drag_slope = (raised[1] - drag) / _ANGLE_STEP
        sine, cosine = through / u, across / u
        # normal = u (lift across - drag through); in-plane drag = u (lift through + drag across)
        normal = self._by_flow(lift_slope * across - drag_slope * through, forces.normal, lift, -drag, u, sine, cosine)
        in_plane = self._by_flow(lift_slope * through + drag_slope * across, forces.drag, drag, lift, u, sine, cosine)
        return _summed(normal, grid.normal_products), _summed(in_plane, grid.drag_products)

    @staticmethod
    def _by_flow(
        turned: Array, force: Array, by_across: Array, by_through: Array, u: Array, sine: Array, cosine: Array
    ) -> tuple[Array, Array, Array]:
        """Slopes of an element's force by pitch, flow through and flow across; the angle is pitch less inflow angle."""
        along = force / u
        return (
            u * turned,
            along * sine - turned * cosine + u * by_through,
            along * cosine + turned * sine + u * by_across,
        )

    def columns(self, x: Array, members: Members) -> Array:
        """All nine columns of the members, with the free ones x."""
        columns = self.base[members]
        columns[:, list(self.way.free)] = x
        return columns

    def _members(self, members: Members) -> Case:
        return self.case if members.size == self.case.size else self.case.take(members)


def _summed(fields: tuple[Array, Array, Array], products: Products) -> list[Array]:
    """Fields over the disc summed with each of their products: (member, shape, sum).

    One small matrix product each: those do not wake the threads of a linear-algebra library.
    """
    pairs = zip(fields, products, strict=True)
    return [np.stack([field @ product for product in by_shape], axis=1) for field, by_shape in pairs]
