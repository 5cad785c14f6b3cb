"""What stands in where an author writes "unknown": a class range and, honestly, what it rests on.

No estimate enters the equivalent VNE or a reduction without a climb; they enter the pictures and the onset band only,
each at both ends of its range.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Final

from briefkit import units
from briefkit.aircraft.model import Hub

NO_SOURCE: Final = "common practice, no source"
_SEA_LEVEL_DENSITY: Final = units.SEA_LEVEL_PRESSURE / (units.GAS_CONSTANT * units.SEA_LEVEL_TEMPERATURE)


@dataclass(frozen=True)
class Estimate:
    """A class value [SI], the half-width of its range [SI], and its basis in words."""

    value: float
    spread: float
    basis: str


def twist() -> Estimate:
    """Linear twist root to tip [rad]: -12 to -6 degrees."""
    return Estimate(math.radians(-9.0), math.radians(3.0), f"-12 to -6 degrees; {NO_SOURCE}")


def drag_area(max_mass: float) -> Estimate:
    """Equivalent flat-plate drag area [m2] from the maximum mass [kg]: 4 ft2 at 1,000 lb, growing as mass^(2/3)."""
    area = 4.0 * (max_mass / units.POUND / 1000.0) ** (2.0 / 3.0) * units.FOOT**2
    return Estimate(area, 0.25 * area, f"4 ft2 x (maximum mass / 1,000 lb)^(2/3), give or take 25 %; {NO_SOURCE}")


def lift_slope() -> Estimate:
    """Section lift slope [per rad]. NACA TR 716 reckons with 5.73; TN 2474 measured 5.90 on NACA 0015 blades."""
    return Estimate(5.73, 0.3, "5.73 per radian as in NACA TR 716, the range holding the 5.90 measured in NACA TN 2474")


def flap_inertia(radius: float, chord: float, slope: float) -> Estimate:
    """Flapping inertia of one blade [kg m2] from a Lock number of 4 to 8 at sea level (radius, chord in m)."""
    heavy, light = (_SEA_LEVEL_DENSITY * slope * chord * radius**4 / lock for lock in (4.0, 8.0))
    basis = f"Lock number 4 to 8 at sea level; {NO_SOURCE}; the onset of stall does not depend on it"
    return Estimate((heavy + light) / 2.0, (heavy - light) / 2.0, basis)


def flap_frequency(hub: Hub, hinge_offset: float) -> Estimate:
    """Rotating flap frequency [per rev] by hub: 1 teetering; by the hinge offset articulated; 1.08 to 1.12 hingeless.

    Articulated, a uniform blade hinged at the fraction e of the radius: nu^2 = 1 + 1.5 e / (1 - e) (rigid-blade
    dynamics). Its spread, 0.005, covers blades that are not uniform.
    """
    if hub is Hub.TEETERING:
        return Estimate(1.0, 0.0, "")
    if hub is Hub.ARTICULATED:
        frequency = math.sqrt(1.0 + 1.5 * hinge_offset / (1.0 - hinge_offset))
        return Estimate(frequency, 0.005, "uniform blade about its hinge offset, nu^2 = 1 + 1.5 e/(1 - e)")
    return Estimate(1.10, 0.02, f"1.08 to 1.12 for hingeless hubs; {NO_SOURCE}")


def equivalent_hinge_offset(frequency: float) -> float:
    """Hinge offset (fraction of the radius) at which a uniform hinged blade has this flap frequency [per rev]."""
    excess = frequency**2 - 1.0
    return excess / (1.5 + excess)


def precone(hub: Hub) -> Estimate:
    """Built-in coning [rad]: none stated outside teetering hubs; 1 to 4 degrees there, coning having no freedom."""
    if hub is Hub.TEETERING:
        return Estimate(math.radians(2.5), math.radians(1.5), f"1 to 4 degrees for teetering hubs; {NO_SOURCE}")
    return Estimate(0.0, 0.0, "")
