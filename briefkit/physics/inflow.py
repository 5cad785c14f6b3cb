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


def _tangent_half(mu: Array, through: Array) -> Array:
    """tan(chi / 2) as mu / (lambda + resultant), 0 in still air."""
    below = through + np.hypot(mu, through)
    return mu / np.where(below > 0.0, below, np.where(mu > 0.0, np.finfo(float).tiny, 1.0))


def _coleman(mu: Array, through: Array) -> tuple[Array, Array]:
    return _tangent_half(mu, through), np.zeros_like(mu)


def _drees(mu: Array, through: Array) -> tuple[Array, Array]:
    # (1 - cos(chi)) / sin(chi) is tan(chi / 2); 1 / sin(chi) is the resultant over mu.
    resultant = np.hypot(mu, through)
    return 4.0 / 3.0 * (_tangent_half(mu, through) - 1.8 * mu * resultant), -2.0 * mu


def _pitt_peters(mu: Array, through: Array) -> tuple[Array, Array]:
    return 15.0 * np.pi / 32.0 * _tangent_half(mu, through), np.zeros_like(mu)


# Only the default is offered to a pilot; the others are for tests and comparison. Gains as commonly printed.
INFLOWS: Final[dict[str, Inflow]] = {
    "white-blake": Inflow(_white_blake, "White and Blake, 35th annual forum of the AHS, 1979", "any skew"),
    "uniform": Inflow(_uniform, "Glauert, ARC R&M 1111, 1926, without his gradient", "hover; tests elsewhere"),
    "coleman": Inflow(_coleman, "Coleman, Feingold and Stempin, NACA WR L-126, 1945", "skew to about 120 degrees"),
    "drees": Inflow(_drees, "Drees, J. Helicopter Association of Great Britain 3, 1949", "advance ratio to 0.4"),
    "pitt-peters": Inflow(_pitt_peters, "Pitt and Peters, Vertica 5, 1981 (steady)", "skew to about 120 degrees"),
}


def inflow_named(name: str) -> Inflow:
    """The inflow of that name. Raises `OutsideLimits` for a name that is not known."""
    if name not in INFLOWS:
        raise OutsideLimits("inflow", name, "", ", ".join(INFLOWS), "rotor model", Reason.OUTSIDE_MODEL)
    return INFLOWS[name]


def ground_share(ground: Array, mu: Array, induced: Array) -> Array:
    """What is left of the mean induced inflow near the ground, 1 far above it.

    Cheeseman and Bennett, ARC R&M 3021 (1955): at constant power the thrust grows by
    1 / (1 - (R / 4z)^2 / (1 + (mu / lambda_i)^2)), with `ground` = (R / 4z)^2 for a rotor z above it. At constant
    thrust that leaves the factor's inverse to the power 3/2 of the inflow, since induced power goes with thrust^(3/2).
    Valid from z = R / 2 up.
    """
    slow = induced * induced / np.maximum(induced * induced + mu * mu, np.finfo(float).tiny)
    return np.asarray((1.0 - ground * slow) ** 1.5)


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
