"""Harmonic balance against the same blade integrated in time by scipy, element forces written out again here."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.integrate import solve_ivp

from briefkit.physics.rotor import Rotor, State
from briefkit.physics.trim import Controls, Trim, held, trim

Array = NDArray[np.float64]
REVOLUTIONS = 7  # flapping settles by a factor of ten in each


class Blade:
    """One blade in the flow of a solved flight: its flap moment at any azimuth, flap angle and rate. Plain floats."""

    def __init__(self, rotor: Rotor, flight: Trim) -> None:
        node, weight = np.polynomial.legendre.leggauss(20)
        inner, outer = rotor.tip_loss - rotor.root_cutout, 1.0 - rotor.tip_loss
        self.r = np.concatenate([rotor.root_cutout + inner * (node + 1) / 2, rotor.tip_loss + outer * (node + 1) / 2])
        self.weight = np.concatenate([inner * weight / 2, outer * weight / 2])
        self.lifts = np.concatenate([np.ones(20), np.zeros(20)])
        self.arm = self.r - rotor.hinge_offset
        self.twisted = rotor.twist * (self.r - 0.75)
        self.slope, self.precone, self.coupling = rotor.lift_slope, rotor.precone, rotor.pitch_flap
        self.gain = float(flight.state.density) * rotor.chord * rotor.radius**4 / (2.0 * rotor.flap_inertia)
        tip_speed, ratio = float(flight.state.tip_speed), float(flight.state.speed) / float(flight.state.tip_speed)
        incidence = float(flight.motion.tilt[0] + flight.motion.climb[0])
        self.mu, self.axial = ratio * np.cos(incidence), ratio * np.sin(incidence)
        self.induced, self.kx = float(flight.induced_velocity[0]) / tip_speed, float(flight.kx[0])
        self.tip_mach = tip_speed / float(flight.state.sound_speed)
        self.t0, self.t1c, self.t1s = (float(pitch[0]) for pitch in (flight.t0, flight.t1c, flight.t1s))

    def moment(self, psi: float, flap: float, rate: float) -> float:
        cosine, sine = np.cos(psi), np.sin(psi)
        inflow = self.axial + self.induced * (1.0 + self.kx * cosine * self.r)
        across = self.r + self.mu * sine
        down = inflow + self.arm * rate + self.mu * flap * cosine
        pitch = self.twisted + self.t0 + self.t1c * cosine + self.t1s * sine - self.coupling * (flap - self.precone)
        speed = np.hypot(across, down)
        mach = np.minimum(speed * self.tip_mach, 0.85)
        # Reversed flow by turning the axes round: the air meets the trailing edge at pitch plus its own slope.
        angle = pitch - np.where(across > 0, np.arctan2(down, across), -np.arctan2(down, -across))
        lift = self.lifts * self.slope * angle / np.sqrt(1.0 - mach**2)
        drag = 0.0087 - 0.0216 * angle + 0.4 * angle**2
        return float(self.gain * np.sum(self.weight * speed * (lift * across - drag * down) * self.arm))


def first_harmonics(rotor: Rotor, flight: Trim) -> tuple[float, float, float]:
    """Mean, cosine and sine of the periodic flap angle [deg] that time marching settles to."""
    blade = Blade(rotor, flight)
    stiffness, precone = rotor.flap_frequency**2, rotor.precone
    teetering = rotor.hub == "teetering"

    def rates(psi: float, y: Array) -> list[float]:
        if teetering:  # two blades on one beam: what lifts one presses the other
            one = blade.moment(psi, precone + y[0], y[1])
            other = blade.moment(psi + np.pi, precone - y[0], -y[1])
            return [y[1], 0.5 * (one - other) - y[0]]
        return [y[1], blade.moment(psi, y[0], y[1]) + (stiffness - 1.0) * precone - stiffness * y[0]]

    last = 2.0 * np.pi * (REVOLUTIONS - 1) + 2.0 * np.pi * np.arange(72) / 72.0
    end = 2.0 * np.pi * REVOLUTIONS
    path = solve_ivp(rates, (0.0, end), [0.0, 0.0], t_eval=last, rtol=1e-6, atol=1e-8, method="DOP853")
    flap = np.degrees(path.y[0]) + (np.degrees(precone) if teetering else 0.0)
    return float(flap.mean()), float(2.0 * (flap * np.cos(last)).mean()), float(2.0 * (flap * np.sin(last)).mean())


# Harmonic balance keeps the mean and first harmonic; what the second feeds back grows with advance ratio. A teetering
# beam has no second harmonic and agrees to .02 degree at mu .3 (the trial value); blades on own hinges do at mu .12.
@pytest.mark.parametrize(("precone", "coupling"), [(0.0, 0.0), pytest.param(0.04, 0.3, marks=pytest.mark.slow)])
@pytest.mark.parametrize(("mu", "free_tolerance"), [(0.12, 0.02), pytest.param(0.3, 0.12, marks=pytest.mark.slow)])
def test_three_hubs(
    rotor: Rotor,
    mass: tuple[float, float],
    mu: float,
    free_tolerance: float,
    precone: float,
    coupling: float,
    state_of: Callable[..., State],
) -> None:
    rotor = replace(rotor, precone=precone, pitch_flap=coupling)
    state = state_of(rotor, speed=mu * rotor.tip_speed, mass=0.8 * mass[1])
    settled = trim(rotor, state)
    assert settled.mu[0] == pytest.approx(mu, rel=0.03)
    # Controls moved off trim, so that the disc flaps against its shaft as well.
    moved = replace(Controls.of(settled), t1c=settled.t1c + 0.015, t1s=settled.t1s - 0.01)
    tolerance = 0.02 if rotor.hub == "teetering" else free_tolerance
    for flight in (settled, held(rotor, state, moved)):
        assert flight.solved.all()
        expected = np.degrees([flight.b0[0], flight.hub_b1c[0], flight.hub_b1s[0]])
        assert first_harmonics(rotor, flight) == pytest.approx(tuple(expected), abs=tolerance)
