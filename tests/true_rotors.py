"""Invented true rotors and the manuals their makers would have written: to try the tool where the truth is known.

A world is a rotor with a limit of its own (an angle, a stalled share, a loading, a load in newtons) and a manual whose
VNE is 0.9 of the true onset in level flight at 100 % and maximum mass (14 CFR 27.1505(a)(2)), printed in whole knots.
The tool sees the manual and the mass only. Everything here is invented.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from briefkit import units
from briefkit.aircraft.chart import ReadingRule, VneChart
from briefkit.aircraft.model import Aircraft, Calibration, Stated
from briefkit.envelope.condition import Conditions
from briefkit.envelope.equivalent import equivalent_vnes
from briefkit.envelope.onset import FIRST_SIGNS, onset_speed
from briefkit.envelope.solution import state_of
from briefkit.errors import Reason
from briefkit.physics import airspeed, atmosphere
from briefkit.physics.rotor import Rotor
from briefkit.physics.stall import stall_measures
from briefkit.physics.trim import Trim, trim

FT, KT = units.FOOT, units.KNOT
FACTOR = 0.9
RATIOS = np.concatenate([[0.05], np.arange(0.09, 0.461, 0.035)])
HEIGHTS = np.arange(0.0, 12_001.0, 2_000.0) * FT
OATS = units.ZERO_CELSIUS + np.array([-20.0, 0.0, 20.0, 40.0])
MANUALS = ("height and temperature", "height", "height and mass", "capped")
INFLOWS = ("white-blake", "uniform", "coleman", "drees", "pitt-peters")

Measure = Callable[[Trim, np.ndarray], np.ndarray]


def _excess(flight: Trim, mass: np.ndarray) -> np.ndarray:
    return stall_measures(flight, grid=(36, 18)).excess


def _share(flight: Trim, mass: np.ndarray) -> np.ndarray:
    return stall_measures(flight, grid=(48, 24)).stalled_share


def _control_load(flight: Trim, mass: np.ndarray) -> np.ndarray:
    """Pitching moments of a stalling section grow steeply; in newtons they go with density and tip speed squared."""
    return flight.state.density * flight.state.tip_speed**2 * flight.tip_angle**4


# Limit -> what grows with speed. Those in newtons do not follow the similarity.
LIMITS: dict[str, Measure] = {
    "tip angle": lambda flight, load: flight.tip_angle,
    "section angle over stall": _excess,
    "stalled share": _share,
    "blade loading against advance ratio": lambda flight, load: flight.ct_sigma + 0.3 * flight.mu,
    "blade loading times advance ratio": lambda flight, load: flight.ct_sigma * flight.mu,
    "newtons: control load, steep in the tip angle": _control_load,
}
# Loads that grow with thrust itself show little on a chart made at one mass, and a turn costs what the chart cannot
# say. The tool does not claim to cover them, and the page says so; they are tried and printed apart.
OUTSIDE_THE_CLAIM: dict[str, Measure] = {
    "newtons: bending, thrust by tip angle squared": lambda flight, load: load * flight.tip_angle**2,
    "newtons: shake, thrust by advance ratio squared": lambda flight, load: load * flight.mu**2,
}


# Limits whose level is drawn outright; the others are set where the rotor flies at an advance ratio of 0.28 to 0.38 at
# sea level and maximum mass.
_ABSOLUTE: dict[str, Callable[[np.random.Generator], float]] = {
    "section angle over stall": lambda rng: float(np.radians(rng.uniform(0.0, 3.0))),
    "stalled share": lambda rng: float(rng.uniform(0.01, 0.05)),
}


@dataclass(frozen=True, eq=False)
class World:
    """One true rotor, its limit, and the aircraft as the tool sees it."""

    rotor: Rotor
    guess: Rotor
    inflow: str
    limit: str
    manual: str
    threshold: float
    aircraft: Aircraft


def make_world(rng: np.random.Generator, limit: str, manual: str, pattern: Aircraft) -> World | None:
    """A world of that kind; None where the draw gives a rotor without a sensible manual."""
    rotor = _rotor(rng)
    loading = rng.uniform(0.06, 0.085)
    mass = float(loading * rotor.solidity * rotor.disc_area * 1.225 * rotor.tip_speed**2 / units.GRAVITY)
    inflow = str(rng.choice(INFLOWS))
    sea_level = Conditions.si(mass=mass, pressure_altitude=0.0, oat=288.15)
    anchor = np.array([rng.uniform(0.28, 0.38) * rotor.tip_speed])
    if limit in _ABSOLUTE:
        threshold = _ABSOLUTE[limit](rng)
    else:
        threshold = float(_measure(rotor, inflow, limit, sea_level, anchor)[0])
    guess = replace(rotor, twist=np.radians(-8.0), lift_slope=5.73, tip_loss=0.97)
    blank = World(rotor, guess, inflow, limit, manual, threshold, pattern)
    aircraft = _aircraft(blank, mass, pattern, rng)
    return None if aircraft is None else replace(blank, aircraft=aircraft)


def true_onset(world: World, many: Conditions) -> np.ndarray:
    """True airspeed [m/s] at which the world's own limit is reached; inf where it never is, 0 where it always is."""
    count = len(RATIOS)
    wide = many.repeat(count)
    speed = np.tile(RATIOS, len(many)) * wide.rotor_speed * world.rotor.tip_speed
    value = _measure(world.rotor, world.inflow, world.limit, wide, speed).reshape(len(many), count) - world.threshold
    speed = speed.reshape(value.shape)
    # A state the model cannot fly at high speed is past the limit.
    value = np.where(np.isnan(value), np.inf, value)
    reached = value >= 0.0
    first = np.argmax(reached, axis=1)
    found = np.where(reached.any(axis=1), 0.0, np.inf)
    inner = np.nonzero(reached.any(axis=1) & (first > 0))[0]
    if not len(inner):
        return found
    low, high = speed[inner, first[inner] - 1], speed[inner, first[inner]]
    below, above = value[inner, first[inner] - 1], value[inner, first[inner]]
    for step in range(6):
        share = np.where(np.isfinite(above), -below / np.where(np.isfinite(above), above - below, 1.0), 0.5)
        middle = low + (high - low) * (np.clip(share, 0.02, 0.98) if step % 3 != 2 else 0.5)
        now = _measure(world.rotor, world.inflow, world.limit, many.take(inner), middle) - world.threshold
        now = np.where(np.isnan(now), np.inf, now)
        past = now >= 0.0
        high, above = np.where(past, middle, high), np.where(past, now, above)
        low, below = np.where(past, low, middle), np.where(past, below, now)
    finite = np.isfinite(above)
    found[inner] = low + (high - low) * np.where(finite, -below / np.where(finite, above - below, 1.0), 0.5)
    return found


def random_conditions(world: World, rng: np.random.Generator, count: int) -> Conditions:
    """Turns and rotor speeds inside the world's chart and limits."""
    aircraft = world.aircraft
    height = rng.uniform(0.0, aircraft.vne.heights[-1], count)
    hottest = np.minimum(aircraft.limits.max_temperature_at(height), OATS[-1])
    most = aircraft.limits.max_mass.value
    return Conditions.si(
        mass=rng.uniform(0.65, 1.0, count) * most,
        pressure_altitude=height,
        oat=rng.uniform(OATS[0], hottest),
        load_factor=rng.uniform(1.0, 1.5, count),
        rotor_speed=rng.uniform(0.97, 1.02, count),
    )


def guessed_onset(world: World, many: Conditions) -> np.ndarray:
    """What the absolute 12-degree criterion would say with class values for what the manual does not give."""
    return onset_speed(world.guess, many, FIRST_SIGNS)


def _rotor(rng: np.random.Generator) -> Rotor:
    blades = int(rng.integers(2, 6))
    hub = "teetering" if blades == 2 else str(rng.choice(["articulated", "hingeless"]))
    radius, tip_speed = rng.uniform(3.8, 8.0), rng.uniform(195.0, 225.0)
    chord = rng.uniform(0.014, 0.024) * np.pi * radius
    offset, frequency = 0.0, 1.0
    if hub == "articulated":
        offset = float(rng.uniform(0.02, 0.06))
        frequency = float(np.sqrt(1.0 + 1.5 * offset / (1.0 - offset)))
    elif hub == "hingeless":
        offset, frequency = 0.1, float(rng.uniform(1.06, 1.13))
    slope = rng.uniform(5.5, 6.1)
    inertia = 1.225 * slope * chord * radius**4 / rng.uniform(4.5, 9.0)
    return Rotor(
        blades=blades, radius=radius, chord=chord, twist=np.radians(rng.uniform(-12.0, -5.0)), root_cutout=0.18,
        flap_inertia=inertia, hub=hub, tip_speed=tip_speed, drag_area=rng.uniform(0.006, 0.012) * np.pi * radius**2,
        flap_frequency=frequency, hinge_offset=offset, tip_loss=rng.uniform(0.95, 0.98), lift_slope=slope,
    )  # fmt: skip


def _measure(rotor: Rotor, inflow: str, limit: str, many: Conditions, speed: np.ndarray) -> np.ndarray:
    flight = trim(rotor, state_of(rotor, many, speed), inflow=inflow)
    load = many.load_factor * many.mass * units.GRAVITY
    return np.where(flight.reason == Reason.NONE, (LIMITS | OUTSIDE_THE_CLAIM)[limit](flight, load), np.nan)


def _aircraft(world: World, mass: float, pattern: Aircraft, rng: np.random.Generator) -> Aircraft | None:
    """The manual its maker would print: whole knots, and the chart's top where VNE would fall under 50 KIAS."""
    height, oat = (grid.ravel() for grid in np.meshgrid(HEIGHTS, OATS, indexing="ij"))
    masses = mass * np.array([0.7, 0.85, 1.0]) if world.manual == "height and mass" else np.array([mass])
    cells = []
    for each in masses:
        many = Conditions.si(mass=each, pressure_altitude=height, oat=oat)
        onset = np.minimum(true_onset(world, many), RATIOS[-1] * world.rotor.tip_speed)
        cas = airspeed.calibrated_from_true(FACTOR * onset, many.pressure, many.oat)
        cells.append(np.floor(cas / KT).reshape(len(HEIGHTS), len(OATS)))
    speeds = np.stack(cells, axis=2)
    permitted = OATS[None, :] <= atmosphere.temperature_at(HEIGHTS)[:, None] + 35.0 + 15.0
    if world.manual in ("height", "height and mass"):
        # Made for every permitted temperature: the lowest of the row, the hot end taken 15 C beyond the limit.
        speeds = np.where(permitted[:, :, None], speeds, np.inf).min(axis=1, keepdims=True)
    if world.manual == "capped":
        speeds = np.minimum(speeds, np.floor(rng.uniform(0.75, 0.95) * speeds[0].max()))
    # Printed charts fall with height, temperature and mass; a maker rounds a rising cell down.
    for axis in (0, 1, 2):
        if not (axis == 1 and speeds.shape[1] > 1 and world.manual != "capped"):
            speeds = np.minimum.accumulate(speeds, axis=axis)
    tall = (speeds.reshape(len(HEIGHTS), -1).min(axis=1) >= 50.0).cumprod().astype(bool)
    if tall.sum() < 4:
        return None
    chart = replace(
        pattern.vne,
        heights=tuple(HEIGHTS[tall]),
        temperatures=tuple(OATS) if speeds.shape[1] > 1 else (),
        masses=tuple(masses) if len(masses) > 1 else (),
        speeds=_four(speeds[tall] * KT),
        reading=ReadingRule.INTERPOLATE,
        rows=(),
        covers_temperatures="" if speeds.shape[1] > 1 else "invented manual",
    )
    limits = replace(
        pattern.limits,
        max_mass=_stated(mass),
        min_mass=_stated(0.5 * mass),
        max_altitude=_stated(float(HEIGHTS[tall][-1])),
        min_temperature=_stated(float(OATS[0])),
        climb_speed=_stated(40.0 * KT),
    )
    none = Calibration((), (), "none in this invented manual", 0.0)
    return replace(pattern, limits=limits, calibration=none, vne=chart)


def _four(speeds: np.ndarray) -> np.ndarray:
    fields = VneChart.__dataclass_fields__
    return speeds[..., None] if "rotor_speeds" in fields else speeds


def _stated(value: float) -> Stated:
    return Stated(value, "invented", "invented manual")


@dataclass(frozen=True, eq=False)
class Held:
    """The tool's answers in one world against the truth [kt true], conditions inside the chart only."""

    over_onset: np.ndarray
    over_factor: np.ndarray
    guess_over_onset: np.ndarray


def hold(world: World, rng: np.random.Generator, count: int) -> Held:
    """Random conditions of a world: the equivalent VNE, and 0.9 of a guessed 12-degree onset, less the true speeds."""
    many = random_conditions(world, rng, count)
    answers = equivalent_vnes(world.aircraft, many)
    inside = np.nonzero(answers.reason == Reason.NONE)[0]
    many = many.take(inside)
    onset = true_onset(world, many)
    told = airspeed.true_from_calibrated(answers.ias[inside] * KT, many.pressure, many.oat)
    guess = guessed_onset(world, many)
    known = np.isfinite(guess)
    return Held((told - onset) / KT, (told - FACTOR * onset) / KT, ((guess - onset) / KT)[known])
