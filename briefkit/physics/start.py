"""Where the iteration starts: the closed forms of a simple idea of the rotor.

Uniform chord, no cut-out or tip loss, small angles, lift linear with one Prandtl-Glauert factor for the whole blade, no
reversed flow: NACA TR 716's equations in their simplest form, in the axes of the disc. Close enough that a few steps
finish; nothing here reaches an answer.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from briefkit.physics.elements import Motion
from briefkit.physics.inflow import Inflow, glauert
from briefkit.physics.rotor import Case

Array = NDArray[np.float64]

_USUAL_DRAG = 0.011  # of a section, to guess a glide


def effective_slope(case: Case) -> Array:
    """Lift slope [1/rad] with the Mach number of 0.75 R."""
    mach = np.minimum(0.75 * case.tip_mach, 0.8)
    return case.lift_slope / np.sqrt(1.0 - mach * mach)


def trimmed_start(case: Case, shape: Inflow) -> Array:
    """(batch, 9) columns of `Motion` near the trimmed solution."""
    tilt = np.arctan2(case.drag * np.cos(case.climb), case.weight + case.drag * np.sin(case.climb))
    motion = Motion(*np.concatenate([np.zeros((7, case.size)), [tilt, case.climb]]))
    mu, axial = motion.mu(case), motion.axial(case)
    induced = glauert(case.weight, mu, axial)
    through = axial + induced
    # Thrust fixes collective: 2 CT / (sigma a) = t0 (1/3 + mu^2/2) - twist mu^2/8 + t1s mu/2 - lambda/2.
    level, by_t0 = _sine_pitch(mu, through)
    loading = 2.0 * case.weight / (case.solidity * effective_slope(case))
    t0 = loading + through / 2.0 + case.twist * mu * mu / 8.0 - level * mu / 2.0
    t0 /= 1.0 / 3.0 + mu * mu / 2.0 + by_t0 * mu / 2.0
    t1s = level + by_t0 * t0
    b0, t1c = _coning_and_cosine_pitch(case, shape, mu, through, induced, t0, t1s)
    zero = np.zeros_like(mu)
    return np.stack([t0, t1c, t1s, b0, zero, zero, induced, tilt, case.climb], axis=1)


def gliding_start(case: Case, shape: Inflow) -> Array:
    """The same down the glide whose loss of height pays for a usual power."""
    speed = np.maximum(case.speed, 1e-3)
    hover = case.weight / 2.0 / np.sqrt(speed * speed + case.weight / 2.0)
    profile = case.solidity * _USUAL_DRAG / 8.0 * (1.0 + 4.65 * speed * speed)
    power = case.weight * hover + profile + case.drag * speed
    slope = np.clip(power / (case.weight * speed), 0.0, 0.9)
    return trimmed_start(replace(case, climb=-np.arcsin(slope)), shape)


def held_start(case: Case, shape: Inflow, controls: Array) -> Array:
    """(batch, 9) columns near the answer to controls held; `controls` (batch, 9), of which pitch, tilt and climb count.

    The disc's own cyclic pitch follows from collective and inflow; flapping is what the held cyclic leaves over.
    """
    held = Motion(*controls.T)
    mu, axial = held.mu(case), held.axial(case)
    slope = effective_slope(case)
    induced = np.full_like(mu, 0.02)
    for _ in range(25):
        through = axial + induced
        level, by_t0 = _sine_pitch(mu, through)
        disc_t1s = level + by_t0 * held.t0
        thrust = held.t0 * (1.0 / 3.0 + mu * mu / 2.0) - case.twist * mu * mu / 8.0 + disc_t1s * mu / 2.0
        thrust = 0.5 * case.solidity * slope * (thrust - through / 2.0)
        induced = 0.5 * induced + 0.25 * thrust / np.maximum(np.hypot(mu, through), 0.02)
    b0, disc_t1c = _coning_and_cosine_pitch(case, shape, mu, axial + induced, induced, held.t0, disc_t1s)
    b1c, b1s = disc_t1s - held.t1s, held.t1c - disc_t1c
    return np.stack([held.t0, held.t1c, held.t1s, b0, b1c, b1s, induced, held.tilt, held.climb], axis=1)


def _sine_pitch(mu: Array, through: Array) -> tuple[Array, Array]:
    """t1s that leaves the disc no sine moment, as a part by inflow and a part by collective."""
    damping = 1.0 / 8.0 + 3.0 * mu * mu / 16.0
    return mu * through / (4.0 * damping), -mu / (3.0 * damping)


def _coning_and_cosine_pitch(
    case: Case, shape: Inflow, mu: Array, through: Array, induced: Array, t0: Array, t1s: Array
) -> tuple[Array, Array]:
    """Coning, and the t1c that leaves the disc no cosine moment."""
    mean = t0 * (1.0 + mu * mu) / 4.0 + case.twist / 80.0 + t1s * mu / 3.0 - through / 3.0
    spring = case.stiffness - 1.0
    coned = (case.flap_gain * effective_slope(case) * mean + spring * case.precone) / case.stiffness
    b0 = np.where(case.coning > 0.0, coned, case.precone)
    kx, _ = shape.gradients(mu, through)
    return b0, (mu * b0 / 6.0 + kx * induced / 8.0) / (1.0 / 8.0 + mu * mu / 16.0)
