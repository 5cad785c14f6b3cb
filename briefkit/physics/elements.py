"""Blade elements: the flow each one sees, the forces it gives, and their sums over the disc.

All in wind axes: psi = 0 is where the relative wind leaves the disc, whatever its direction over the ground. Speeds are
by the tip speed. Arrays are (batch, point), the points running over radius, then azimuth.

The speeds normal to the blade and through the disc are linear in a few coefficients per state, so each is one matrix
product with shapes that do not change (`Grid`).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from briefkit.errors import OutsideLimits, Reason
from briefkit.physics.inflow import Inflow, ground_share
from briefkit.physics.rotor import REFERENCE_STATION, Case, Planform
from briefkit.physics.section import Section

Array = NDArray[np.float64]

# By what is changed (pitch, flow through, flow across), then by shape: (point, sum) each.
Products = tuple[tuple[Array, ...], tuple[Array, ...], tuple[Array, ...]]

OUTBOARD_NODES = 2  # between the tip-loss radius and the tip, where only a short piece of drag is summed


@dataclass(frozen=True, eq=False)
class Points:
    """Points on the disc and what does not change there: radius fraction, azimuth [rad], shapes of the velocities.

    `shapes` rows: 1, r cos, r sin, cos, cos^2, sin cos, sin; `pitch_shapes` rows: 1, cos, sin, r - 0.75; (row, point).
    Where the azimuths differ by member everything has the batch before the points: (row, batch, point).
    """

    radius: Array
    azimuth: Array
    sine: Array
    shapes: Array
    pitch_shapes: Array
    twist: Array


@dataclass(frozen=True, eq=False)
class Grid:
    """Gauss nodes along the blade, equal steps round the azimuth, and the weights of the sums over them.

    `weights` (point, sum): of the force normal to the disc: 1, r, cos, sin, r cos, r sin, cos^2, sin cos, sin^2; the
    first six serve the in-plane force too. Each sum is the mean over azimuth of the integral along the blade, with the
    chord over its value at 0.75 R as a factor. `lifting` is 1 inboard of the tip-loss radius, 0 outboard. The products,
    weights times shapes, take slopes of the forces to slopes of the sums.
    """

    radii: Array
    azimuths: Array
    points: Points
    weights: Array
    lifting: Array
    normal_products: Products
    drag_products: Products


def points_at(planform: Planform, radius: Array, azimuth: Array) -> Points:
    """The points with `radius` (point,) and `azimuth` (point,), or (batch, point) where they differ by member."""
    cosine, sine = np.cos(azimuth), np.sin(azimuth)
    radius = np.broadcast_to(radius, azimuth.shape)
    one = np.ones_like(cosine)
    shapes = np.stack([one, radius * cosine, radius * sine, cosine, cosine * cosine, sine * cosine, sine])
    pitch_shapes = np.stack([one, cosine, sine, radius - REFERENCE_STATION])
    return Points(radius, azimuth, sine, shapes, pitch_shapes, planform.twist_offset(radius))


def _nodes(panels: tuple[float, ...], counts: tuple[int, ...]) -> tuple[Array, Array]:
    """Gauss-Legendre nodes and weights over panels that end at the given radii."""
    nodes, weights = [], []
    for start, end, count in zip(panels[:-1], panels[1:], counts, strict=True):
        node, weight = np.polynomial.legendre.leggauss(count)
        nodes.append(0.5 * (start + end) + 0.5 * (end - start) * node)
        weights.append(0.5 * (end - start) * weight)
    return np.concatenate(nodes), np.concatenate(weights)


def radial_nodes(planform: Planform, count: int) -> tuple[Array, Array]:
    """`count` nodes and weights from the root cut-out to the tip; panels end at steps and at the tip-loss radius.

    Raises `OutsideLimits` where there are too few nodes for the panels (two each).
    """
    inner = [planform.root_cutout, *planform.steps, planform.tip_loss]
    outboard = OUTBOARD_NODES if planform.tip_loss < 1.0 else 0
    free = count - outboard
    if free < 2 * (len(inner) - 1):
        least = f"{2 * (len(inner) - 1) + outboard} or more for this blade"
        raise OutsideLimits("radial nodes", float(count), "", least, "rotor model", Reason.OUTSIDE_MODEL)
    lengths = np.diff(inner)
    counts = np.maximum(2, np.floor(free * lengths / lengths.sum()).astype(int))
    while counts.sum() > free:
        counts[np.argmax(counts)] -= 1
    while counts.sum() < free:  # the longest panel for each node it has takes the next
        counts[np.argmax(lengths / counts)] += 1
    panels, split = [float(end) for end in inner], [int(number) for number in counts]
    if outboard:
        panels, split = [*panels, 1.0], [*split, outboard]
    return _nodes(tuple(panels), tuple(split))


@lru_cache(maxsize=32)
def make_grid(planform: Planform, grid: tuple[int, int]) -> Grid:
    """The grid for `grid` = (azimuths, radii); at least 8 azimuths, since the sums hold third harmonics. Kept."""
    azimuth_count, radius_count = grid
    if azimuth_count < 8:
        raise OutsideLimits("azimuths", float(azimuth_count), "", "8 or more", "rotor model", Reason.OUTSIDE_MODEL)
    radii, along = radial_nodes(planform, radius_count)
    azimuths = 2.0 * np.pi * np.arange(azimuth_count) / azimuth_count
    radius, azimuth = (mesh.ravel() for mesh in np.meshgrid(radii, azimuths, indexing="ij"))
    points = points_at(planform, radius, azimuth)
    cosine, sine = np.cos(azimuth), np.sin(azimuth)
    factors = (
        np.ones_like(radius),
        radius,
        cosine,
        sine,
        radius * cosine,
        radius * sine,
        cosine * cosine,
        sine * cosine,
        sine * sine,
    )
    each = np.repeat(along * planform.relative_chord(radii), azimuth_count) / azimuth_count
    weights = np.ascontiguousarray(np.stack([factor * each for factor in factors], axis=1))
    lifting = np.where(radius <= planform.tip_loss, 1.0, 0.0)
    for shared in (radii, azimuths):  # handed out with every answer
        shared.flags.writeable = False
    return Grid(
        radii, azimuths, points, weights, lifting, _products(points, weights), _products(points, weights[:, :6])
    )


def _products(points: Points, weights: Array) -> Products:
    """Weights times each shape of the pitch, of the flow through and of the flow across."""
    pitch, through, across = (
        tuple(np.ascontiguousarray(shape[:, None] * weights) for shape in shapes)
        for shapes in (points.pitch_shapes, points.shapes, points.sine[None])
    )
    return pitch, through, across


@dataclass(frozen=True, eq=False)
class Motion:
    """What the blades do and the air they meet, dimensionless, each (batch,).

    Pitch t0, t1c, t1s and flap b0, b1c, b1s [rad] from the shaft's plane, in wind axes; `induced`: mean induced inflow
    that the wake has in free air; `tilt` [rad] of the shaft's plane, nose down positive, from the plane normal to the
    apparent weight; `climb` [rad] of the flight path above that plane. The flow meets the shaft's plane at their sum.
    """

    t0: Array
    t1c: Array
    t1s: Array
    b0: Array
    b1c: Array
    b1s: Array
    induced: Array
    tilt: Array
    climb: Array

    def mu(self, case: Case) -> Array:
        """Advance ratio: the speed in the plane of the shaft's disc; a gust straight up adds what leans into it."""
        return case.speed * np.cos(self.tilt + self.climb) + case.gust * np.sin(self.tilt)

    def axial(self, case: Case) -> Array:
        """mu_z: the free stream's part of the flow down through the disc."""
        return case.speed * np.sin(self.tilt + self.climb) - case.gust * np.cos(self.tilt)

    def inflow(self, case: Case) -> Array:
        """Mean induced inflow at the disc: the momentum value `induced`, less what the ground takes off."""
        if not case.ground.any():
            return self.induced
        return self.induced * ground_share(case.ground, self.mu(case), self.induced)


@dataclass(frozen=True, eq=False)
class Coefficients:
    """The linear coefficients of the flow: `across` (batch,) is mu, `through` and `pitch` go with the shapes."""

    across: Array
    through: Array
    pitch: Array

    def take(self, members: NDArray[np.intp]) -> Coefficients:
        """The members given, in that order."""
        return Coefficients(self.across[members], self.through[members], self.pitch[members])


def flow_coefficients(case: Case, motion: Motion, inflow: Inflow) -> Coefficients:
    """Coefficients of the shapes in `Points` for a motion.

    Through the disc: mu_z + lambda_i (1 + kx r cos + ky r sin) + (r - e) beta' + mu beta cos(psi), with the flap's rate
    beta' = -b1c sin + b1s cos. Pitch falls by the pitch-flap coupling times the flap above precone.
    """
    mu, axial, induced = motion.mu(case), motion.axial(case), motion.inflow(case)
    kx, ky = inflow.gradients(mu, axial + induced)
    e = case.hinge_offset
    through = np.array(
        [
            axial + induced,
            kx * induced + motion.b1s,
            ky * induced - motion.b1c,
            mu * motion.b0 - e * motion.b1s,
            mu * motion.b1c,
            mu * motion.b1s,
            e * motion.b1c,
        ]
    ).T
    feather = case.pitch_flap
    pitch = np.array(
        [
            motion.t0 - feather * (motion.b0 - case.precone),
            motion.t1c - feather * motion.b1c,
            motion.t1s - feather * motion.b1s,
            case.twist,
        ]
    ).T
    return Coefficients(mu, through, pitch)


@dataclass(frozen=True, eq=False)
class Flow:
    """The flow at points, (batch, point): speed normal to the blade (negative: reversed) and down, pitch, resultant,
    angle of attack [rad] and Mach number."""

    across: Array
    through: Array
    resultant: Array
    angle: Array
    mach: Array


def flow_at(case: Case, points: Points, terms: Coefficients) -> Flow:
    """The flow at the points of the disc."""
    across = terms.across[:, None] * points.sine
    across += points.radius
    through = _combined(terms.through, points.shapes)
    resultant = across * across
    scratch = through * through
    resultant += scratch
    np.sqrt(resultant, out=resultant)
    angle = _combined(terms.pitch, points.pitch_shapes)
    angle += points.twist
    angle -= np.arctan2(through, across, out=scratch)
    return Flow(across, through, resultant, angle, resultant * case.tip_mach[:, None])


def _combined(terms: Array, shapes: Array) -> Array:
    """Shapes weighed by each member's coefficients, (batch, point)."""
    if shapes.ndim == 2:
        return terms @ shapes
    return np.asarray(np.einsum("mk,kmp->mp", terms, shapes))


@dataclass(frozen=True, eq=False)
class Forces:
    """Forces of the elements over (rho c (Omega R)^2 / 2): `normal` up, `drag` against rotation; (batch, point)."""

    normal: Array
    drag: Array
    lift_coefficient: Array
    drag_coefficient: Array


def forces_of(case: Case, flow: Flow, section: Section, lifting: Array) -> Forces:
    """The forces; lift counts only where `lifting` is 1 (tip loss), drag everywhere."""
    lift, drag = section.coefficients(flow.angle, flow.mach, case.lift_slope[:, None])
    lift *= lifting
    normal, in_plane = lift * flow.across, lift * flow.through
    other = drag * flow.through
    normal -= other
    normal *= flow.resultant
    in_plane += np.multiply(drag, flow.across, out=other)
    in_plane *= flow.resultant
    return Forces(normal, in_plane, lift, drag)


@dataclass(frozen=True, eq=False)
class Sums:
    """Means over the disc: `normal` (batch, 9) and `drag` (batch, 6), in the order of `Grid.weights`."""

    normal: Array
    drag: Array


def sums_of(grid: Grid, normal: Array, drag: Array) -> Sums:
    """The sums of element forces over the grid."""
    return Sums(normal @ grid.weights, drag @ grid.weights[:, :6])
