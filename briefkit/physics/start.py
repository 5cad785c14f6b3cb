"""Where the iteration starts: the closed forms of a straight-tapered idea of the rotor.

Uniform chord, no cut-out or tip loss, small angles, lift linear with one Prandtl-Glauert factor for the whole blade, no
reversed flow: NACA TR 716's equations in their simplest form. Close enough that a few steps finish; nothing here
reaches an answer.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from briefkit.physics.inflow import Inflow, glauert
from briefkit.physics.rotor import Case

Array = NDArray[np.float64]


def effective_slope(case: Case) -> Array:
    """Lift slope [1/rad] with the Mach number of 0.75 R."""
    mach = np.minimum(0.75 * case.tip_mach, 0.8)
    return case.lift_slope / np.sqrt(1.0 - mach * mach)


def trimmed_start(case: Case, shape: Inflow) -> Array:
    """(batch, 9) columns of `Motion` near the trimmed solution."""
    tilt = np.arctan2(case.drag * np.cos(case.climb), case.weight + case.drag * np.sin(case.climb))
    mu = case.speed * np.cos(tilt + case.climb)
    axial = case.speed * np.sin(tilt + case.climb)
    slope = effective_slope(case)
    induced = glauert(case.weight, mu, axial)
    through = axial + induced
    kx, _ = shape.gradients(mu, through)
    # Thrust and the sine moment fix collective and t1s together; then coning, then t1c.
    ratio = (through / 4.0 * mu, mu / 3.0)
    damping = 1.0 / 8.0 + 3.0 * mu * mu / 16.0
    loading = 2.0 * case.weight / (case.solidity * slope)
    lift_by_t0 = 1.0 / 3.0 + mu * mu / 2.0 - ratio[1] * mu / (2.0 * damping)
    t0 = (loading + through / 2.0 + case.twist * mu * mu / 8.0 - ratio[0] * mu / (2.0 * damping)) / lift_by_t0
    t1s = (ratio[0] - ratio[1] * t0) / damping
    mean = slope * (t0 * (1.0 + mu * mu) / 4.0 + case.twist / 80.0 + t1s * mu / 3.0 - through / 3.0)
    spring = case.stiffness - 1.0
    coned = (case.flap_gain * mean + spring * case.precone) / case.stiffness
    b0 = np.where(case.coning > 0.0, coned, case.precone)
    t1c = (mu * b0 / 6.0 + kx * induced / 8.0) / (1.0 / 8.0 + mu * mu / 16.0)
    zero = np.zeros_like(mu)
    return np.stack([t0, t1c, t1s, b0, zero, zero, induced, tilt, case.climb], axis=1)
