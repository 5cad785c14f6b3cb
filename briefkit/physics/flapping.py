"""Rigid blade flapping by harmonic balance, one equation for every hub.

beta'' + nu^2 beta = (nu^2 - 1) precone + flap_gain * M(psi), with primes per radian of azimuth and M the blade's
aerodynamic moment about the flap hinge over rho c Omega^2 R^4 / 2. Steady flapping keeps the mean and the first
harmonic: nu^2 b0 - (nu^2 - 1) precone = gain M0; (nu^2 - 1) b1c = gain M1c; (nu^2 - 1) b1s = gain M1s. A teetering hub
(nu = 1) has no coning freedom: b0 is its precone. The blade's weight moment is left out: it lowers coning by under
0.1 degree at a helicopter's rotor speed and touches nothing else.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from briefkit.physics.elements import Motion, Sums
from briefkit.physics.rotor import Case

Array = NDArray[np.float64]


def moments(case: Case, sums: Sums) -> tuple[Array, Array, Array]:
    """Mean and first harmonics of the aerodynamic flap moment about the hinge, each (batch,)."""
    one, radius, cosine, sine, radius_cosine, radius_sine = sums.normal.T[:6]
    e = case.hinge_offset
    return radius - e * one, 2.0 * (radius_cosine - e * cosine), 2.0 * (radius_sine - e * sine)


def flap_balance(case: Case, motion: Motion, sums: Sums) -> tuple[Array, Array, Array]:
    """What is left of the three flap equations [rad], each (batch,); zero in steady flight."""
    mean, cosine, sine = moments(case, sums)
    spring = case.stiffness - 1.0
    free = case.stiffness * motion.b0 - spring * case.precone - case.flap_gain * mean
    return (
        np.where(case.coning > 0.0, free, motion.b0 - case.precone),
        spring * motion.b1c - case.flap_gain * cosine,
        spring * motion.b1s - case.flap_gain * sine,
    )


def from_no_feathering_plane(motion: Motion) -> tuple[Array, Array]:
    """b1c and b1s [rad] of the disc from the plane in which the blades keep their pitch, each (batch,).

    That plane is tilted from the shaft's by b1c = -t1s, b1s = t1c: a blade that goes up-slope in it has its nose up
    from the shaft's plane. Flapping and feathering are equivalent (exactly so without hinge offset).
    """
    return motion.b1c + motion.t1s, motion.b1s - motion.t1c


def phase_lag(lock_number: ArrayLike, flap_frequency: ArrayLike) -> Array:
    """Azimuth [rad] by which the flap's peak follows the lift's in hover: atan2(gamma / 8, nu^2 - 1).

    90 degrees at nu = 1; valid for Lock number at local density above zero and nu of 1 or more. Uniform blade, no tip
    loss or hinge offset in the damping gamma / 8 (common practice, no source).
    """
    return np.arctan2(np.asarray(lock_number) / 8.0, np.asarray(flap_frequency) ** 2 - 1.0)


def hinge_flap_frequency(hinge_offset: ArrayLike) -> Array:
    """Flap frequency nu [per revolution] of a uniform blade on a free hinge at a fraction e of the radius.

    nu^2 = 1 + 1.5 e / (1 - e); e from 0 to below 1.
    """
    e = np.asarray(hinge_offset, dtype=np.float64)
    return np.sqrt(1.0 + 1.5 * e / (1.0 - e))
