"""What a solved batch holds, and the disc seen element by element."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property, lru_cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from briefkit.errors import Reason
from briefkit.physics.balance import Model
from briefkit.physics.elements import Coefficients, Motion, Points, flow_at, flow_coefficients, points_at
from briefkit.physics.rotor import Case, Planform, Rotor, State

Array = NDArray[np.float64]

ELEMENT_CHUNK = 64  # members at a time, so that a large batch needs little beyond its answer


def tip_angle(rotor: Rotor, case: Case, terms: Coefficients) -> Array:
    """Angle of attack [rad] at the tip where it retreats square to the wind, (batch,)."""
    return flow_at(case, _retreating_tip(rotor.planform), terms).angle[:, 0]


@lru_cache(maxsize=32)
def _retreating_tip(planform: Planform) -> Points:
    return points_at(planform, np.array([1.0]), np.array([1.5 * np.pi]))


@dataclass(frozen=True, eq=False)
class Elements:
    """The disc seen element by element, arrays (batch, radius, azimuth).

    `radii` fractions of R, `azimuths` [rad] from the tail in the direction of rotation; `speed` [m/s] normal to the
    blade, negative where the flow is reversed; `mach` of the flow across the blade; `angle` of attack [rad], in
    reversed flow near +-pi, wrapped to -pi..pi.
    """

    radii: Array
    azimuths: Array
    speed: Array
    mach: Array
    angle: Array
    rotation: int

    @property
    def ahead(self) -> Array:
        """Where the elements are, fractions of R ahead of the shaft, (radius, azimuth)."""
        return -self.radii[:, None] * np.cos(self.azimuths)

    @property
    def right(self) -> Array:
        """Fractions of R to the right of the shaft seen from above, (radius, azimuth): mirrored if clockwise."""
        return self.rotation * self.radii[:, None] * np.sin(self.azimuths)


@dataclass(frozen=True, eq=False)
class Trim:
    """A solved batch; arrays (batch,). Angles in radians, in axes fixed to the rotor's shaft.

    A member whose `reason` is not `Reason.NONE` holds NaN everywhere but in `residual` (NaN too where nothing was
    tried), `iterations` and `reason`: check `solved` first.

    - `t0`, `t1c`, `t1s`: pitch from the shaft's plane. `b0`: coning; `b1c`, `b1s`: flapping from the no-feathering
      plane; `hub_b1c`, `hub_b1s`: flapping from the shaft's plane (zero when trimmed, since the shaft stands on it).
    - `inflow`: mean flow down through the disc by the tip speed; `induced_velocity` [m/s] its mean induced part;
      `kx`, `ky`: gradients of the induced part by r cos, r sin of azimuth from where the wind leaves the disc.
    - `mu`, `ct` (T / rho A (Omega R)^2), `ct_sigma`; `ch`, `cy`: in-plane force downwind, and 90 degrees of azimuth on;
      `cq`: torque.
    - `disc_tilt`: the disc's plane from the plane normal to the apparent weight, positive into the wind (nose down);
      `incidence`: the same from the flight path.
    - `advancing_mach` at the tip, (1 + mu) times `tip_mach`; `tip_angle`: angle of attack at r = 1 where the blade
      retreats square to the wind (psi = 270 degrees in wind from ahead). `climb_rate` [m/s] along the flight path.
    - `case`, `motion`, `model`: the same in wind axes, dimensionless, for whatever sums over the disc again.
    - `residual`: largest of the force balances over n W, the flap equations [rad] and the inflow balance (over twice a
      typical resultant), at the solution. `iterations`: how often the disc was summed to find it.
    """

    rotor: Rotor
    state: State
    t0: Array
    t1c: Array
    t1s: Array
    b0: Array
    b1c: Array
    b1s: Array
    hub_b1c: Array
    hub_b1s: Array
    inflow: Array
    induced_velocity: Array
    kx: Array
    ky: Array
    mu: Array
    ct: Array
    ct_sigma: Array
    ch: Array
    cy: Array
    cq: Array
    disc_tilt: Array
    incidence: Array
    tip_mach: Array
    advancing_mach: Array
    climb_rate: Array
    tip_angle: Array
    residual: Array
    iterations: NDArray[np.intp]
    reason: NDArray[np.object_]
    case: Case = field(repr=False)
    motion: Motion = field(repr=False)
    model: Model = field(repr=False)

    @property
    def solved(self) -> NDArray[np.bool_]:
        """True for members that hold numbers."""
        return np.array([reason is Reason.NONE for reason in self.reason])

    @property
    def scale_of_thrust(self) -> Array:
        """rho A (Omega R)^2 [N], (batch,): what CT, CH and CY are multiplied with."""
        value = np.asarray(self.state.density) * self.rotor.disc_area * np.asarray(self.state.tip_speed) ** 2
        return np.broadcast_to(value, self.t0.shape)

    @property
    def scale_of_power(self) -> Array:
        """rho A (Omega R)^3 [W], (batch,): what CQ is multiplied with for power."""
        return np.asarray(self.scale_of_thrust * self.state.tip_speed)

    def elements(self, radii: ArrayLike | None = None, azimuths: ArrayLike | None = None) -> Elements:
        """Speed, Mach number and angle over the disc, at the solver's own points or at those given.

        `radii` (radius,) fractions of R from the root cut-out to 1, `azimuths` (azimuth,) [rad] from the tail in the
        direction of rotation. Refused members hold NaN.
        """
        own = self.model.grid
        r = own.radii if radii is None else np.asarray(radii, dtype=np.float64)
        psi = own.azimuths if azimuths is None else np.asarray(azimuths, dtype=np.float64)
        shape = (r.size, psi.size)
        radius, azimuth = (np.broadcast_to(axis, shape).ravel() for axis in (r[:, None], psi))
        speed, mach, angle = (np.empty((self.case.size, radius.size)) for _ in range(3))
        terms = flow_coefficients(self.case, self.motion, self.model.inflow)
        tip_speed = np.broadcast_to(np.asarray(self.state.tip_speed, dtype=np.float64), (self.case.size,))
        for start in range(0, self.case.size, ELEMENT_CHUNK):
            members = np.arange(start, min(start + ELEMENT_CHUNK, self.case.size))
            points = points_at(self.rotor.planform, radius, azimuth - self.case.wind_azimuth[members, None])
            flow = flow_at(self.case.take(members), points, terms.take(members))
            speed[members] = flow.across * tip_speed[members, None]
            mach[members] = flow.mach
            angle[members] = flow.angle - 2.0 * np.pi * np.rint(flow.angle / (2.0 * np.pi))
        speeds, machs, angles = (values.reshape(-1, *shape) for values in (speed, mach, angle))
        return Elements(r, psi, speeds, machs, angles, self.rotor.rotation)

    @cached_property
    def _own(self) -> Elements:
        return self.elements()

    @property
    def radii(self) -> Array:
        """The solver's radius fractions, (radius,)."""
        return self._own.radii

    @property
    def azimuths(self) -> Array:
        """The solver's azimuths [rad], (azimuth,)."""
        return self._own.azimuths

    @property
    def speed(self) -> Array:
        """Speed normal to the blade [m/s] at the solver's points, (batch, radius, azimuth); negative: reversed."""
        return self._own.speed

    @property
    def mach(self) -> Array:
        """Mach number across the blade at the solver's points, (batch, radius, azimuth)."""
        return self._own.mach

    @property
    def angle(self) -> Array:
        """Angle of attack [rad] at the solver's points, (batch, radius, azimuth)."""
        return self._own.angle
