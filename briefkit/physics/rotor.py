"""The rotor, the state it flies in, and the same two as the dimensionless numbers the equations use.

Conventions (one place for the whole room): azimuth psi is 0 over the tail and grows with rotation, so 90 degrees is the
advancing side in forward flight. Flap is beta = b0 + b1c cos(psi) + b1s sin(psi), up positive; pitch is
theta = t0 + twist (r - 0.75) + t1c cos(psi) + t1s sin(psi), nose up positive, r the fraction of the radius. Inflow is
positive down through the disc. A clockwise rotor is the mirror image: its equations are these.
"""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import Final, Literal

import numpy as np
from numpy.typing import NDArray

from briefkit.errors import OutsideLimits, Reason

Array = NDArray[np.float64]
Values = float | Array
Hub = Literal["teetering", "articulated", "hingeless"]

REFERENCE_STATION: Final = 0.75  # where chord is quoted and collective measured: the trade's habit


@dataclass(frozen=True)
class Distribution:
    """A quantity along the blade: straight lines between points.

    `radii` (fractions of R, from 0 or above to 1, not falling) and `values`, of equal length, two points at least. A
    radius given twice is a step. Outside the first and last point the end value holds.
    Raises `OutsideLimits` where the points cannot be read that way.
    """

    radii: tuple[float, ...]
    values: tuple[float, ...]

    def __post_init__(self) -> None:
        radii, values = np.asarray(self.radii), np.asarray(self.values)
        sound = radii.size == values.size >= 2 and np.isfinite(values).all()
        if not (sound and (np.diff(radii) >= 0.0).all() and radii[0] >= 0.0 and radii[-1] <= 1.0):
            text = "two or more points, radii from 0 to 1 and not falling, one value each"
            raise OutsideLimits("blade distribution", str(self.radii), "", text, "rotor", Reason.OUTSIDE_MODEL)

    def at(self, r: Array) -> Array:
        """The quantity at radius fractions `r` (any shape)."""
        return np.interp(r, self.radii, self.values)

    @property
    def steps(self) -> tuple[float, ...]:
        """Radii where the quantity jumps: integration panels must end there."""
        return tuple(a for a, b in zip(self.radii[:-1], self.radii[1:], strict=True) if a == b)


@dataclass(frozen=True)
class Planform:
    """The blade's shape along the radius, the part of a rotor that sets where sums are taken: hashable."""

    root_cutout: float
    tip_loss: float
    taper: Distribution | None
    twist_shape: Distribution | None

    def relative_chord(self, r: Array) -> Array:
        """Chord over the chord at 0.75 R, at radius fractions `r`."""
        return np.ones_like(r) if self.taper is None else self.taper.at(r)

    def twist_offset(self, r: Array) -> Array:
        """The tabulated part of the twist [rad] at radius fractions `r`, zero at 0.75 R."""
        if self.twist_shape is None:
            return np.zeros_like(r)
        return self.twist_shape.at(r) - self.twist_shape.at(np.array(REFERENCE_STATION))

    @property
    def steps(self) -> tuple[float, ...]:
        """Radii inside the lifting blade where chord or pitch jumps."""
        found = {step for shape in (self.taper, self.twist_shape) if shape is not None for step in shape.steps}
        return tuple(sorted(step for step in found if self.root_cutout < step < self.tip_loss))


BARE: Final = Planform(0.0, 1.0, None, None)  # no cut-out, constant chord, linear twist only


@dataclass(frozen=True)
class Rotor:
    """A rotor in SI units. Numbers may be floats or arrays of one batch length, so a spread is one batch.

    `blades`, `root_cutout`, `tip_loss`, `hub`, `rotation`, `taper` and `twist_shape` are common to a batch.

    - `radius` [m]; `chord` [m] at 0.75 R; `taper`: chord over that at 0.75 R along the blade (none: constant chord).
    - `twist` [rad], linear, root (r = 0) to tip, negative for washout; `twist_shape`: pitch [rad] along the blade added
      to it, reckoned from its value at 0.75 R (none: linear only).
    - `root_cutout`: fraction of R where the blade begins, not inside the flap hinge. `tip_loss`: Bailey's B, no lift
      outboard of it (NACA TR 716); drag reaches the tip.
    - `flap_inertia` [kg m2] of one blade about its flap hinge.
    - `hub`; `flap_frequency` nu, per revolution; `hinge_offset`, fraction of R (hingeless: the equivalent one);
      `precone` [rad]; `pitch_flap`: tan(delta-3), pitch falls by this times the flap angle above precone.
      A teetering hub has nu = 1, no offset, and cones to its precone only. Its undersling sets in-plane loads, not
      flapping, so it is not asked for.
    - `tip_speed` [m/s] at 100 % rotor speed; `drag_area` [m2] of the airframe.
    - `lift_slope` [1/rad] of the section at low speed; `rotation` +1 anticlockwise seen from above, -1 clockwise.
    """

    blades: int
    radius: Values
    chord: Values
    twist: Values
    root_cutout: float
    flap_inertia: Values
    hub: Hub
    tip_speed: Values
    drag_area: Values
    flap_frequency: Values = 1.0
    hinge_offset: Values = 0.0
    precone: Values = 0.0
    tip_loss: float = 0.97
    lift_slope: Values = 5.73
    rotation: int = 1
    pitch_flap: Values = 0.0
    taper: Distribution | None = None
    twist_shape: Distribution | None = None

    def __post_init__(self) -> None:
        self._require("blades", self.blades, self.blades >= 1, "1 or more")
        for name in ("radius", "chord", "flap_inertia", "tip_speed", "lift_slope"):
            self._require(name, getattr(self, name), np.asarray(getattr(self, name)) > 0.0, "above zero")
        self._require("drag area", self.drag_area, np.asarray(self.drag_area) >= 0.0, "zero or above")
        self._require("tip loss", self.tip_loss, 0.9 <= self.tip_loss <= 1.0, "0.9 to 1")
        self._require("root cut-out", self.root_cutout, 0.0 <= self.root_cutout <= 0.5, "0 to 0.5 of the radius")
        offset = np.asarray(self.hinge_offset)
        inside = (offset >= 0.0) & (offset <= self.root_cutout)
        self._require("hinge offset", self.hinge_offset, inside, "from zero to the root cut-out")
        frequency = np.asarray(self.flap_frequency)
        self._require("flap frequency", self.flap_frequency, (frequency >= 1.0) & (frequency <= 1.3), "1 to 1.3")
        if self.taper is not None:
            own = float(self.taper.at(np.array(REFERENCE_STATION)))
            self._require("taper at 0.75 R", own, abs(own - 1.0) < 1e-3, "1: it is the chord over that at 0.75 R")
        self._require("rotation", self.rotation, self.rotation in (1, -1), "1 or -1")
        if self.hub == "teetering":
            central = (frequency == 1.0) & (offset == 0.0)
            self._require("teetering hub", self.hub, central, "flap frequency 1 and no hinge offset")
        self._require("hub", self.hub, self.hub in ("teetering", "articulated", "hingeless"), "one of the three hubs")

    @staticmethod
    def _require(quantity: str, value: object, good: object, permitted: str) -> None:
        if not np.all(np.asarray(good)):
            raise OutsideLimits(quantity, str(value), "", permitted, "rotor", Reason.OUTSIDE_MODEL)

    @property
    def solidity(self) -> Values:
        """Blade area over disc area with the chord at 0.75 R: N c / (pi R)."""
        return self.blades * self.chord / (np.pi * self.radius)

    @property
    def disc_area(self) -> Values:
        """[m2]"""
        return np.pi * self.radius**2

    def lock_number(self, density: Values) -> Values:
        """rho a c R^4 / I, with the chord at 0.75 R, the low-speed lift slope and this density [kg/m3]."""
        return density * self.lift_slope * self.chord * self.radius**4 / self.flap_inertia

    def wind_azimuth(self, bearing: Values) -> Values:
        """`State.wind_azimuth` [rad] of a relative wind from a bearing [rad] off the nose, to the right positive.

        Seen from above azimuth grows from the tail to the right of an anticlockwise rotor, to the left of a clockwise.
        """
        return -self.rotation * bearing

    @property
    def planform(self) -> Planform:
        """What of the rotor is shape along the blade."""
        return Planform(self.root_cutout, self.tip_loss, self.taper, self.twist_shape)


@dataclass(frozen=True, eq=False)
class State:
    """What the rotor flies in. Floats, or arrays of one batch length.

    `density` [kg/m3], `sound_speed` [m/s], `tip_speed` [m/s] (rotor speed fraction times the rotor's at 100 %), `speed`
    [m/s] true along the flight path, `thrust_weight` [N] the load factor times weight, `climb_rate` [m/s] (not above
    `speed`), `wind_azimuth` [rad] by which the relative wind is turned from ahead, in the direction of rotation (wind
    from ahead comes over psi = 180 degrees; with pi/2 it comes over 270; `Rotor.wind_azimuth` makes it from a bearing),
    `height` [m] of the rotor above the ground (infinite: out of ground effect; half the radius at least).

    `hub_height` [m] above the centre of gravity and `cg_ahead` [m] of the shaft: where the moments of a trimmed flight
    balance. With both zero no centre of gravity is stated, and the shaft stands on the disc.
    """

    density: Values
    sound_speed: Values
    tip_speed: Values
    speed: Values
    thrust_weight: Values
    climb_rate: Values = 0.0
    wind_azimuth: Values = 0.0
    height: Values = np.inf
    hub_height: Values = 0.0
    cg_ahead: Values = 0.0


@dataclass(frozen=True, eq=False)
class Case:
    """Rotor and state as dimensionless arrays of one batch length: lengths by R, speeds by the tip speed.

    `weight` is n W / (rho A (Omega R)^2), `drag` the same of the airframe's drag along the flight path, `climb` the
    angle of the flight path [rad], `flap_gain` = rho c R^4 / (2 I) (Lock number over twice the lift slope).
    """

    solidity: Array
    flap_gain: Array
    stiffness: Array  # nu^2
    hinge_offset: Array
    precone: Array
    pitch_flap: Array
    twist: Array
    lift_slope: Array
    tip_mach: Array
    speed: Array
    weight: Array
    drag: Array
    climb: Array
    wind_azimuth: Array
    coning: Array  # 1 where the blade is free to cone, 0 on a teetering hub
    ground: Array  # (R / 4z)^2 for a rotor z above the ground
    gust: Array  # of air straight up, by the tip speed
    hub_height: Array  # above the centre of gravity; 0 where none is stated
    cg_ahead: Array

    @property
    def size(self) -> int:
        """Batch length."""
        return int(self.speed.size)

    def spread(self, *others: Values) -> Case:
        """The same with one member spread over the batch length of others; ValueError if lengths differ."""
        size = np.broadcast_shapes((self.size,), *(np.shape(other) for other in others))
        return Case(*(np.broadcast_to(getattr(self, field.name), size).copy() for field in fields(self)))

    def take(self, members: NDArray[np.intp] | NDArray[np.bool_]) -> Case:
        """The members given, in that order."""
        return Case(*(getattr(self, field.name)[members] for field in fields(self)))


def case_of(rotor: Rotor, state: State, gust: Values = 0.0) -> Case:
    """The dimensionless numbers of a rotor in a state and an up-gust [m/s]; every float is spread over the batch.

    A climb faster than the speed along the flight path has no angle, a rotor nearer the ground than half its radius no
    ground effect that is known, a centre of gravity ahead of a hub of no height no moment that a hub could hold: they
    give NaN there, which no solver accepts.
    Raises ValueError if two arrays have different lengths.
    """
    tip_speed = np.asarray(state.tip_speed, dtype=np.float64)
    dynamic = np.asarray(state.density) * rotor.disc_area * tip_speed**2
    speed = np.asarray(state.speed, dtype=np.float64)
    steepness = np.asarray(state.climb_rate) / np.where(speed > 0.0, speed, 1.0)
    climb = np.where(np.abs(steepness) <= 1.0, np.arcsin(np.clip(steepness, -1.0, 1.0)), np.nan)
    height = np.asarray(state.height, dtype=np.float64) / rotor.radius
    above = np.asarray(state.hub_height, dtype=np.float64) / rotor.radius
    values = (
        rotor.solidity,
        state.density * rotor.chord * rotor.radius**4 / (2.0 * rotor.flap_inertia),
        np.asarray(rotor.flap_frequency) ** 2,
        rotor.hinge_offset,
        rotor.precone,
        rotor.pitch_flap,
        rotor.twist,
        rotor.lift_slope,
        tip_speed / state.sound_speed,
        speed / tip_speed,
        state.thrust_weight / dynamic,
        0.5 * state.density * speed**2 * rotor.drag_area / dynamic,
        np.where((speed > 0.0) | (np.asarray(state.climb_rate) == 0.0), climb, np.nan),
        state.wind_azimuth,
        0.0 if rotor.hub == "teetering" else 1.0,
        np.where(height >= 0.5, (0.25 / np.maximum(height, 0.5)) ** 2, np.nan),
        gust / tip_speed,
        np.where(above >= 0.0, above, np.nan),
        np.where((above > 0.0) | (np.asarray(state.cg_ahead) == 0.0), state.cg_ahead / rotor.radius, np.nan),
    )
    arrays = np.broadcast_arrays(*(np.atleast_1d(np.asarray(value, dtype=np.float64)) for value in values))
    return Case(*(np.ascontiguousarray(array) for array in arrays))
