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

    def coefficients(self, angle: Array, mach: Array, lift_slope: Array) -> tuple[Array, Array]:
        """Lift and drag coefficient; arrays broadcast."""
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
        constant, first, second = DRAG_POLAR
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


SECTIONS: Final[dict[str, Section]] = {"attached": Attached()}


def section_named(section: str | Section) -> Section:
    """The section of that name, or the section itself. Raises `OutsideLimits` for a name that is not known."""
    if not isinstance(section, str):
        return section
    if section not in SECTIONS:
        raise OutsideLimits("section", section, "", ", ".join(SECTIONS), "rotor model", Reason.OUTSIDE_MODEL)
    return SECTIONS[section]
