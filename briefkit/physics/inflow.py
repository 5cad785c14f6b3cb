"""Inflow through the disc: Glauert's momentum value and its first-harmonic shape.

lambda(r, psi) = mu_z + lambda_i (1 + kx r cos(psi) + ky r sin(psi)), all by the tip speed and positive down through the
disc: mu_z the free stream's part, lambda_i the mean induced part. kx positive means more downwash over the tail.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from briefkit.errors import OutsideLimits, Reason

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Inflow:
    """A shape of the induced inflow: `gradients(mu, through)` gives kx and ky.

    `mu` is the advance ratio and `through` the mean flow down through the disc, mu_z + lambda_i. `source` names the
    publication, `valid` the range in words.
    """

    gradients: Callable[[Array, Array], tuple[Array, Array]]
    source: str
    valid: str


def skew(mu: Array, through: Array) -> Array:
    """Wake skew angle chi [rad]: 0 straight below the disc (hover), 90 degrees edgewise; atan2(mu, lambda)."""
    return np.arctan2(mu, through)


def _uniform(mu: Array, through: Array) -> tuple[Array, Array]:
    return np.zeros_like(mu), np.zeros_like(mu)


def _white_blake(mu: Array, through: Array) -> tuple[Array, Array]:
    # sqrt2 sin(chi), and sin(chi) is mu over the resultant. In hover both may vanish: no wind, no gradient.
    resultant = np.hypot(mu, through)
    return np.sqrt(2.0) * mu / np.where(resultant > 0.0, resultant, 1.0), np.zeros_like(mu)


INFLOWS: Final[dict[str, Inflow]] = {
    "white-blake": Inflow(_white_blake, "White and Blake, 35th annual forum of the AHS, 1979", "any skew"),
    "uniform": Inflow(_uniform, "Glauert, ARC R&M 1111, 1926, without his gradient", "hover; tests elsewhere"),
}


def inflow_named(name: str) -> Inflow:
    """The inflow of that name. Raises `OutsideLimits` for a name that is not known."""
    if name not in INFLOWS:
        raise OutsideLimits("inflow", name, "", ", ".join(INFLOWS), "rotor model", Reason.OUTSIDE_MODEL)
    return INFLOWS[name]


def induced_balance(thrust: Array, mu: Array, axial: Array, induced: Array) -> Array:
    """2 lambda_i sqrt(mu^2 + (mu_z + lambda_i)^2) - CT: zero at Glauert's inflow (ARC R&M 1111).

    The product form stays smooth through zero thrust, where the quotient would not.
    """
    return 2.0 * induced * np.hypot(mu, axial + induced) - thrust


def glauert(thrust: Array, mu: Array, axial: Array) -> Array:
    """Mean induced inflow lambda_i for a thrust coefficient, advance ratio and free-stream inflow; CT above zero.

    Newton from the hover value down, where the balance is convex; valid for climb, level flight and any descent in
    which the air still passes down through the disc or goes by it edgewise faster than the hover induced velocity.
    """
    hover = np.sqrt(thrust / 2.0)
    induced = hover / np.sqrt(1.0 + (mu / hover) ** 2)
    for _ in range(30):
        resultant = np.hypot(mu, axial + induced)
        slope = 2.0 * resultant + 2.0 * induced * (axial + induced) / resultant
        step = induced_balance(thrust, mu, axial, induced) / slope
        induced = induced - step
        if np.all(np.abs(step) <= 1e-14):
            break
    return induced
