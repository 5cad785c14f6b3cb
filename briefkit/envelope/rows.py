"""The permitted region cut into rows of one temperature, mass and rotor speed, each with its stored speeds.

Along a row the loading m'/(rho' k'^2) grows with height, so a loading asked for is a height. A row keeps the chart's
true airspeed at close heights and their running maximum from the top.
"""

from __future__ import annotations

import weakref
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Any, Final

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope import region
from briefkit.envelope.speeds import true_of
from briefkit.physics import atmosphere

Floats = NDArray[np.float64]
Index = NDArray[np.intp]

TEMPERATURE_STEP: Final = 0.5  # K between rows
HEIGHT_STEP: Final = 50.0 * units.FOOT  # between stored points of a row
MASS_STEPS: Final = 20  # rows between two masses of the chart's axis
ROTOR_STEPS: Final = 4  # rows between two rotor speeds of the chart's axis

# The pressure ratio of the standard atmosphere to this power falls by a straight line with height; density likewise.
_PRESSURE_POWER: Final = units.GAS_CONSTANT * units.LAPSE_RATE / units.GRAVITY
_DENSITY_POWER: Final = _PRESSURE_POWER / (1.0 - _PRESSURE_POWER)
_SEA_LEVEL_DENSITY: Final = units.SEA_LEVEL_PRESSURE / (units.GAS_CONSTANT * units.SEA_LEVEL_TEMPERATURE)
_SCALE: Final = units.SEA_LEVEL_TEMPERATURE / units.LAPSE_RATE  # m


@dataclass(frozen=True, eq=False)
class Rows:
    """Rows (row,), temperatures outermost, then `columns` of mass and rotor speed; stored points (row, height).

    Speeds are referred: V'/k' [m/s true], -inf where the chart has none. `heights` are the chart's own, rising and
    common to all rows; a row ends at its `top` (-inf: not permitted at all). `loading` [m3] is the largest m'/(rho'
    k'^2) of a row, `warmth` [K] its T'/k'^2 (-inf on the standard day, where the height asked for looks after it).
    `best_above` is the running maximum of `vne` from the top, `peak` the index of the point that makes it; `kept_at` is
    where each row lies in these three, which rows of some temperatures share with all;
    `pressure_rows` where a row's loading is a pressure (else a density); `first_at` and `bin` serve `place`.
    """

    temperature: Floats
    mass: Floats
    rotor_speed: Floats
    columns: int
    top: Floats
    loading: Floats
    warmth: Floats
    heights: Floats
    vne: Floats
    best_above: Floats
    peak: Index
    kept_at: Index
    standard_day: bool
    pressure_rows: bool
    first_at: Index
    bin: float

    def asked(self, loading: Floats, warmest: Floats) -> Floats:
        """Lowest chart height [m] at which each row is as loaded and no warmer, (batch, row), not below the chart."""
        # rho' <= m'/(L k'^2) is a pressure at one temperature: one factor of the row, one of the query.
        if self.pressure_rows:
            share = self.mass / self.rotor_speed**2 * units.GAS_CONSTANT * self.temperature / units.SEA_LEVEL_PRESSURE
            power = _PRESSURE_POWER
        else:
            share, power = self.mass / self.rotor_speed**2 / _SEA_LEVEL_DENSITY, _DENSITY_POWER
        height = _SCALE * (1.0 - np.multiply.outer(loading**-power, share**power))
        if self.standard_day:
            cold = (units.SEA_LEVEL_TEMPERATURE - np.multiply.outer(warmest, self.rotor_speed**2)) / units.LAPSE_RATE
            height = np.maximum(height, cold)
        floored: Floats = np.maximum(height, self.heights[0])
        return floored

    @cached_property
    def coldest_first(self) -> tuple[Floats, Floats]:
        """`warmth`, rising, and the largest `loading` of all rows no warmer."""
        order = np.argsort(self.warmth)
        return self.warmth[order], np.maximum.accumulate(self.loading[order])

    def at_temperatures(self, at: Index) -> Rows:
        """The rows of some temperatures alone, by their place among all of them."""
        rows = (at[:, None] * self.columns + np.arange(self.columns)).ravel()
        names = ("temperature", "mass", "rotor_speed", "top", "loading", "warmth", "kept_at")
        kept: dict[str, Any] = {name: getattr(self, name)[rows] for name in names}
        return replace(self, **kept)

    def place(self, height: Floats) -> Index:
        """Index of the first stored height at or above each height (within the stored ones)."""
        guess = self.first_at[np.minimum((height - self.heights[0]) / self.bin, len(self.first_at) - 1).astype(np.intp)]
        index: Index = guess + (self.heights[guess] < height)
        return index


_KEPT: weakref.WeakKeyDictionary[Aircraft, Rows] = weakref.WeakKeyDictionary()


def rows_of(aircraft: Aircraft) -> Rows:
    """The aircraft's rows, made once and kept with it (some milliseconds)."""
    if aircraft not in _KEPT:
        _KEPT[aircraft] = _lay_out(aircraft)
    return _KEPT[aircraft]


def chart_speed(aircraft: Aircraft, height: Floats, temperature: Floats, mass: Floats, rotor_speed: Floats) -> Floats:
    """Referred VNE V'/k' [m/s true] at heights of the chart's own; -inf where the chart has none; broadcasts.

    The chart's reading error, and the spread of a calibration the manual does not give, are taken off once, here.
    """
    altitude = region.altitude_at(aircraft, height, temperature)
    unprinted = 0.0 if aircraft.calibration.in_manual else aircraft.calibration.spread
    indicated = (
        aircraft.vne.indicated(altitude, temperature, mass, rotor_speed) - aircraft.vne.reading_error - unprinted
    )
    true = true_of(aircraft.calibration, indicated, atmosphere.pressure_at(altitude), temperature) / rotor_speed
    return np.where(np.isfinite(true), true, -np.inf)


def _lay_out(aircraft: Aircraft) -> Rows:
    chart, standard = aircraft.vne, region.standard_day_only(aircraft)
    columns = np.meshgrid(
        region.mass_rows(aircraft, MASS_STEPS), region.rotor_rows(aircraft, ROTOR_STEPS), indexing="ij"
    )
    masses, rotor_speeds = (axis.ravel() for axis in columns)
    temperatures = np.array([np.nan]) if standard else _temperatures(aircraft)
    temperature = np.repeat(temperatures, len(masses))
    mass, rotor_speed = np.tile(masses, len(temperatures)), np.tile(rotor_speeds, len(temperatures))
    heights = _heights(aircraft)
    oat = np.asarray(atmosphere.temperature_at(heights))[None, :] if standard else temperature[:, None]
    if standard:
        top = np.full(mass.shape, heights[-1])
    else:
        highest = region.top_of(aircraft, temperature)
        safe = np.where(np.isfinite(highest), highest, 0.0)
        top = np.where(
            np.isfinite(highest), np.fmin(region.height_at(aircraft, safe, temperature), heights[-1]), -np.inf
        )
    at = np.minimum(heights[None, :], np.where(np.isfinite(top), top, heights[0])[:, None])
    vne = chart_speed(aircraft, at, np.broadcast_to(oat, at.shape), mass[:, None], rotor_speed[:, None])
    vne = np.where(np.isfinite(top)[:, None], vne, -np.inf)
    best_above = np.maximum.accumulate(vne[:, ::-1], axis=1)[:, ::-1]
    # Where a point is its own running maximum it is a peak; the next peak upwards makes the maximum below it.
    peak = np.where(vne >= best_above, np.arange(len(heights)), len(heights) - 1)
    peak = np.minimum.accumulate(peak[:, ::-1], axis=1)[:, ::-1]
    # A row ends at its highest point with a speed: above it nothing can be used.
    top = np.where(np.isfinite(vne), at, -np.inf).max(axis=1)
    usable = np.isfinite(top)
    safe = np.where(usable, top, heights[0])
    warm = np.asarray(atmosphere.temperature_at(safe)) if standard else temperature
    density = atmosphere.density(atmosphere.pressure_at(region.altitude_at(aircraft, safe, warm)), warm)
    loading = np.where(usable, mass / (density * rotor_speed**2), -np.inf)
    warmth = np.where(standard, -np.inf, temperature / rotor_speed**2)
    step = np.diff(heights).min()
    starts = heights[0] + step * np.arange(int(np.ceil((heights[-1] - heights[0]) / step)) + 1)
    first_at = np.minimum(np.searchsorted(heights, starts), len(heights) - 1)
    return Rows(
        temperature=temperature,
        mass=mass,
        rotor_speed=rotor_speed,
        columns=len(masses),
        top=top,
        loading=loading,
        warmth=warmth,
        heights=heights,
        vne=vne,
        best_above=best_above,
        peak=peak,
        kept_at=np.arange(len(mass)),
        standard_day=standard,
        pressure_rows=not (standard or chart.density_altitude),
        first_at=first_at,
        bin=float(step),
    )


def _temperatures(aircraft: Aircraft) -> Floats:
    """Every half degree Celsius, the chart's own rows, and the corners of the region [K]."""
    low, high = region.temperature_range(aircraft)
    first = np.ceil((low - units.ZERO_CELSIUS) / TEMPERATURE_STEP)
    last = np.floor((high - units.ZERO_CELSIUS) / TEMPERATURE_STEP)
    kept = {low, high, *(units.ZERO_CELSIUS + np.arange(first, last + 1.0) * TEMPERATURE_STEP).tolist()}
    kept |= {oat for oat in aircraft.vne.temperatures if low <= oat <= high}
    corner = float(aircraft.limits.max_temperature_at(region.highest_altitude(aircraft)))
    return np.array(sorted(kept | ({corner} if low <= corner <= high else set())))


def _heights(aircraft: Aircraft) -> Floats:
    """Close heights with the chart's own among them [m], none nearer to another than a foot."""
    chart = aircraft.vne
    top = chart.heights[-1] if chart.density_altitude else region.highest_altitude(aircraft)
    own = np.array([height for height in chart.heights if height < top] + [top])
    close = np.arange(own[0], top, HEIGHT_STEP)
    apart = np.abs(close[:, None] - own[None, :]).min(axis=1) >= units.FOOT
    return np.sort(np.concatenate([own, close[apart]]))
