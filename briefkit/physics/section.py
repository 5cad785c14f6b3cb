"""Blade sections: lift and drag coefficients by angle of attack and Mach number.

A section is called with arrays: angle of attack [rad] from the chord to the oncoming flow, any value (near pi the air
comes from the trailing edge), the Mach number of the flow across the blade, and the rotor's low-speed lift slope
[1/rad], which sections with a lift curve of their own ignore. It must be continuous in angle and Mach number, and equal
at -pi and pi, or the equations may have no exact solution.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Protocol

import numpy as np
from numpy.typing import NDArray

from briefkit.errors import OutsideLimits, Reason

Array = NDArray[np.float64]

HELD_MACH: Final = 0.85  # the Prandtl-Glauert factor grows without bound towards Mach 1
DRAG_POLAR: Final = (0.0087, -0.0216, 0.400)  # NACA TR 716: by powers of the angle [rad]
LINEAR_TO: Final = np.pi / 4.0  # beyond it only where the speed across the blade is next to nothing


class Section(Protocol):
    """What the blade-element equations ask of a section."""

    @property
    def highest_mach(self) -> float:
        """Up to which Mach number the section is known; a rotor whose advancing tip passes it is refused."""
        ...

    def coefficients(self, angle: Array, mach: Array, lift_slope: Array) -> tuple[Array, Array]:
        """Lift and drag coefficient; arrays broadcast."""
        ...


class StallingSection(Section, Protocol):
    """A section that knows where its lift is largest."""

    def stall_angle(self, mach: Array) -> Array:
        """Angle of attack [rad] of maximum lift at a Mach number."""
        ...


@dataclass(frozen=True)
class Attached:
    """The section that never stalls: lift linear in angle, a published drag polar.

    The published 12 and 16 degree boundaries (NACA WR L-110, TR 840) were computed with such a section. Lift
    a alpha / sqrt(1 - M^2) with M held at 0.85 (`HELD_MACH`); drag .0087 - .0216 alpha + .400 alpha^2 (NACA TR 716),
    alpha in radians. In reversed flow the angle is reckoned from the trailing edge. From 45 to 90 degrees the lift
    falls smoothly to nothing, so that the coefficient is continuous round the circle: such angles occur only at the
    edge of the reversed-flow region, where the air hardly moves across the blade.
    """

    drag_polar: tuple[float, float, float] = DRAG_POLAR
    highest_mach: float = 1.0

    def coefficients(self, angle: Array, mach: Array, lift_slope: Array) -> tuple[Array, Array]:
        """Lift and drag coefficient; see the class."""
        # In place where it can be: fresh arrays of this size cost more than the arithmetic.
        folded = angle * (1.0 / np.pi)
        np.rint(folded, out=folded)
        folded *= -np.pi
        folded += angle
        lifting = _faded(folded)
        factor = np.minimum(mach, HELD_MACH)
        factor *= factor
        np.subtract(1.0, factor, out=factor)
        np.sqrt(factor, out=factor)
        lift = np.divide(lifting, factor, out=factor)
        lift *= lift_slope
        constant, first, second = self.drag_polar
        drag = first * lifting
        drag += constant
        folded *= folded
        folded *= second
        drag += folded
        return lift, drag


def _faded(folded: Array) -> Array:
    """The angle itself up to 45 degrees, then a smooth fall to zero at 90 (its slope is continuous too)."""
    steep = np.abs(folded) > LINEAR_TO
    excess = (np.abs(folded[steep]) - LINEAR_TO) / (np.pi / 2.0 - LINEAR_TO)
    faded = folded.copy()
    faded[steep] *= 1.0 - excess * excess * (3.0 - 2.0 * excess)
    return faded


# NACA 0012 by Mach number: the closed forms in common textbook use, typed from memory and compared with one public
# program; angles in degrees. Below CRITICAL: lift slope .1/sqrt(1-M^2) - .01 M per degree, departure from it at
# 15 - 16 M degrees, a loss K1 (alpha - departure)^K2. Above: slope .677 - .744 M, departure at 3.4.
CRITICAL: Final = 0.725
LAST_LIFT_MACH: Final = 0.85  # the slope above CRITICAL runs to zero near 0.91, where no section's does
DEEP_FROM: Final = 18.0  # deg; from here drag passes over to that of a flat plate, complete at DEEP_AT
DEEP_AT: Final = 26.0


@dataclass(frozen=True)
class Naca0012:
    """NACA 0012 over the full circle by Mach number: attached, stalling, and as a flat plate beyond.

    Lift is the larger of the closed form above and a flat plate's 1.15 sin(2 alpha); with the air from the trailing
    edge it grows by .1 a degree to .7 at most. Drag is the closed form to 18 degrees and the plate's
    1.03 - 1.02 cos(2 alpha) from 26, with a smooth change between. Four things differ from the forms as printed, for
    continuity and sense: above Mach 0.725 the slope falls by .744 from where it stood (printed .677 - .744 M: a step of
    .0003), lift is held above Mach 0.85, drag starts to rise at 17 - 23.4 M degrees or 0 with one coefficient at any
    Mach number (printed: a smaller one, a step down, above 0.725), and stops at the plate's drag at 26 degrees. Against
    a smooth section at rotor Reynolds numbers the maximum lift is low and the drag high, which is the safe side.
    """

    highest_mach: float = 1.0

    def coefficients(self, angle: Array, mach: Array, lift_slope: Array) -> tuple[Array, Array]:
        """Lift and drag coefficient; `lift_slope` is not used."""
        wrapped = angle - 2.0 * np.pi * np.rint(angle / (2.0 * np.pi))
        size = np.degrees(np.abs(wrapped))
        lift, drag = flat_plate(size)
        near = size < DEEP_AT
        own_lift, own_drag = _attached_and_stalling(size[near], np.broadcast_to(mach, size.shape)[near])
        lift[near] = np.maximum(own_lift, lift[near])
        drag[near] += (1.0 - smooth_share(size[near], DEEP_FROM, DEEP_AT)) * (own_drag - drag[near])
        return lift * np.sign(wrapped), drag

    def stall_angle(self, mach: Array) -> Array:
        """Angle of attack [rad] of maximum lift: where the loss past departure eats the slope."""
        slope, departure, loss, power = _lift_constants(np.asarray(mach, dtype=np.float64))
        return np.radians(departure + (slope / (loss * power)) ** (1.0 / (power - 1.0)))


def _attached_and_stalling(size: Array, mach: Array) -> tuple[Array, Array]:
    """Lift and drag coefficient of the closed forms at an angle [deg] of zero or more."""
    slope, departure, loss, power = _lift_constants(mach)
    lift = slope * size - loss * np.maximum(size - departure, 0.0) ** power
    drag = 0.0081 + size * (-350.0 + size * (396.0 + size * (-63.3 + size * 3.66))) * 1e-6
    divergence = np.maximum(17.0 - 23.4 * mach, 0.0)
    drag += 0.00066 * np.maximum(size - divergence, 0.0) ** 2.54
    most = 1.03 - 1.02 * np.cos(np.radians(2.0 * DEEP_AT))
    return lift, np.minimum(drag, most) + 21.0 * np.maximum(mach - CRITICAL, 0.0) ** 3.2


def _lift_constants(mach: Array) -> tuple[Array, Array, Array, Array]:
    """Slope [1/deg], departure [deg], K1 and K2 of the closed forms at a Mach number."""
    held = np.minimum(mach, LAST_LIFT_MACH)
    below = np.minimum(held, CRITICAL)
    subsonic = 0.1 / np.sqrt(1.0 - below * below) - 0.01 * below
    slope = subsonic - 0.744 * np.maximum(held - CRITICAL, 0.0)
    return slope, 15.0 - 16.0 * below, 0.0233 + 0.342 * below**7.15, 2.05 - 0.95 * below


def flat_plate(size: Array) -> tuple[Array, Array]:
    """Lift and drag coefficient of a fully stalled section at 0 to 180 degrees from the chord."""
    twice = np.radians(2.0 * size)
    lift = 1.15 * np.sin(twice)
    rear = np.minimum(0.1 * np.abs(180.0 - size), 0.7)
    lift = np.where(size > 90.0, -np.minimum(-lift, rear), lift)
    return lift, 1.03 - 1.02 * np.cos(twice)


def smooth_share(size: Array, start: float, end: float) -> Array:
    """0 up to `start`, 1 from `end`, smooth between."""
    part = np.clip((size - start) / (end - start), 0.0, 1.0)
    return part * part * (3.0 - 2.0 * part)


@dataclass(frozen=True, eq=False)
class TableSection:
    """A section from an operator's own table.

    `machs` (m,) rising from 0 or above, `angles` [rad] (a,) rising, `lift` and `drag` (m, a). Linear between points.
    Below the first Mach number its row holds; above the last the section is not known (`highest_mach`). Beyond the
    first and last angle the coefficients pass over, within 10 degrees, into those of a stalled flat plate.

    Raises `OutsideLimits` for a table that is not of that form, has fewer than two angles, or does not reach from -5 to
    +15 degrees (what a blade needs before its stall is even in sight).
    """

    machs: Array
    angles: Array
    lift: Array
    drag: Array

    def __post_init__(self) -> None:
        good = (
            self.machs.ndim == self.angles.ndim == 1
            and self.lift.shape == self.drag.shape == (self.machs.size, self.angles.size)
            and self.machs.size >= 1
            and self.angles.size >= 2
            and bool((np.diff(self.machs) > 0.0).all() and (np.diff(self.angles) > 0.0).all())
            and bool(self.machs[0] >= 0.0 and self.machs[-1] <= 1.0)
            and bool(self.angles[0] <= np.radians(-5.0) and self.angles[-1] >= np.radians(15.0))
            and bool(self.angles[0] >= -np.pi and self.angles[-1] <= np.pi)
            and all(bool(np.isfinite(values).all()) for values in (self.lift, self.drag))
            and bool((self.drag > 0.0).all())
        )
        if not good:
            permitted = "Mach 0 to 1 and angles rising, -5 to +15 degrees at least, one finite value a point, drag > 0"
            raise OutsideLimits("section table", "", "", permitted, "section table", Reason.OUTSIDE_MODEL)

    @property
    def highest_mach(self) -> float:
        """The last Mach number of the table."""
        return float(self.machs[-1])

    def coefficients(self, angle: Array, mach: Array, lift_slope: Array) -> tuple[Array, Array]:
        """Lift and drag coefficient; `lift_slope` is not used."""
        wrapped = angle - 2.0 * np.pi * np.rint(angle / (2.0 * np.pi))
        column, across = _place(self.angles, wrapped)
        row, along = _place(self.machs, mach)
        own_lift, own_drag = (_bilinear(values, row, along, column, across) for values in (self.lift, self.drag))
        outside = np.maximum(np.maximum(self.angles[0] - wrapped, wrapped - self.angles[-1]), 0.0)
        share = smooth_share(np.degrees(outside), 0.0, 10.0)
        lift, drag = flat_plate(np.degrees(np.abs(wrapped)))
        lift *= np.sign(wrapped)
        return own_lift + share * (lift - own_lift), own_drag + share * (drag - own_drag)

    def stall_angle(self, mach: Array) -> Array:
        """Angle of attack [rad] of the first lift maximum above zero angle (the last angle where there is none)."""
        positive = np.flatnonzero(self.angles > 0.0)
        lift = self.lift[:, positive]
        falls = np.diff(lift, axis=1) <= 0.0  # on a plateau its first point, the safe side
        first = np.where(falls.any(axis=1), falls.argmax(axis=1), positive.size - 1)
        return np.interp(mach, self.machs, self.angles[positive[first]])


def _place(nodes: Array, values: Array) -> tuple[NDArray[np.intp], Array]:
    """Cell index and fraction within it, held at both ends."""
    if nodes.size == 1:
        return np.zeros(np.shape(values), dtype=np.intp), np.zeros(np.shape(values))
    index = np.clip(np.searchsorted(nodes, values) - 1, 0, nodes.size - 2)
    fraction = (values - nodes[index]) / (nodes[index + 1] - nodes[index])
    return index, np.clip(fraction, 0.0, 1.0)


def _bilinear(values: Array, row: NDArray[np.intp], along: Array, column: NDArray[np.intp], across: Array) -> Array:
    below = np.minimum(row + 1, values.shape[0] - 1)
    low = values[row, column] * (1.0 - across) + values[row, column + 1] * across
    high = values[below, column] * (1.0 - across) + values[below, column + 1] * across
    return np.asarray(low * (1.0 - along) + high * along)


SECTIONS: Final[dict[str, Section]] = {"attached": Attached(), "stalling": Naca0012()}


def section_named(section: str | Section) -> Section:
    """The section of that name, or the section itself. Raises `OutsideLimits` for a name that is not known."""
    if not isinstance(section, str):
        return section
    if section not in SECTIONS:
        raise OutsideLimits("section", section, "", ", ".join(SECTIONS), "rotor model", Reason.OUTSIDE_MODEL)
    return SECTIONS[section]
