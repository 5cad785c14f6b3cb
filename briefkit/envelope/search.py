"""The manual's chart laid out for one question: at points at least this loaded and no warmer, how fast does it allow?

The permitted region is the chart's axes and the manual's maximum altitude and temperatures together. It is cut into
rows of one temperature and one mass. Along a row a loading m'/rho' asked for is a height (the air thins with height),
so each row answers with its exact point at that height or the running maximum above it. A plain grid search made a
false 0.02 kt in a trial, which a page would have printed as 5 kt; this one is exact at the constraint.
"""

from __future__ import annotations

import weakref
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope.speeds import true_of
from briefkit.physics import atmosphere

Floats = NDArray[np.float64]

TEMPERATURE_STEP = 0.5  # K between rows
HEIGHT_STEP = 50.0 * units.FOOT  # between stored points of a row
MASS_STEPS = 20  # rows between two masses of the chart's axis
SLACK = 1e-9  # relative: a point exactly as loaded counts as such
_NEAR = 0.05 * units.KNOT  # a row this close below the best is looked at exactly


@dataclass(frozen=True, eq=False)
class Rows:
    """Rows (row,) of the permitted region and their stored points (row, height), heights rising.

    `vne` is true airspeed [m/s], -inf where the chart's speed is outside the calibration; `best_above` its running
    maximum from the top; `loading` [m3] is the largest m'/rho' of the row.
    """

    temperature: Floats
    mass: Floats
    top: Floats
    loading: Floats
    heights: Floats
    vne: Floats
    best_above: Floats


@dataclass(frozen=True, eq=False)
class Best:
    """Per query (batch,): the largest true airspeed [m/s] (-inf where no point qualifies) and a chart point for it.

    The point is, of those within 0.5 kt of the largest, the one nearest the temperature asked for.
    """

    vne: Floats
    height: Floats
    temperature: Floats
    mass: Floats

    def where(self, mine: NDArray[np.bool_], other: Best) -> Best:
        """This one's members where `mine`, the other's elsewhere."""
        names = ("vne", "height", "temperature", "mass")
        return Best(*(np.where(mine, getattr(self, name), getattr(other, name)) for name in names))


_KEPT: weakref.WeakKeyDictionary[Aircraft, Rows] = weakref.WeakKeyDictionary()


def rows_of(aircraft: Aircraft) -> Rows:
    """The aircraft's rows, made once and kept with it (some milliseconds)."""
    if aircraft not in _KEPT:
        _KEPT[aircraft] = _lay_out(aircraft)
    return _KEPT[aircraft]


def chart_true_airspeed(
    aircraft: Aircraft, height: Floats | float, temperature: Floats | float, mass: Floats | float, less: float = 0.0
) -> Floats:
    """The chart's VNE, `less` an indicated speed [m/s], as true airspeed [m/s]; NaN off chart or calibration."""
    indicated = aircraft.vne.indicated(height, temperature, mass) - less
    return true_of(aircraft.calibration, indicated, atmosphere.pressure_at(height), temperature)


def reading_allowance(aircraft: Aircraft) -> float:
    """Taken off the chart's reading at the equivalent point, once [m/s indicated]: reading error, and the spread of a
    calibration the manual does not give."""
    unprinted = 0.0 if aircraft.calibration.in_manual else aircraft.calibration.spread
    return aircraft.vne.reading_error + unprinted


def top_of(aircraft: Aircraft, temperature: Floats | float) -> Floats:
    """Highest permitted pressure altitude on the chart at a temperature [m]; -inf where none is."""
    limits, chart = aircraft.limits, aircraft.vne
    temperature = np.asarray(temperature, dtype=float)
    top = np.full(temperature.shape, min(chart.heights[-1], limits.max_altitude.value))
    if limits.isa_deviation is not None:
        # T <= T0 + d - L h, solved for h; limits lie below the tropopause.
        allowed = units.SEA_LEVEL_TEMPERATURE + limits.isa_deviation.value - temperature
        top = np.minimum(top, allowed / units.LAPSE_RATE)
    low, high = temperature_range(aircraft)
    outside = (temperature < low - 1e-9) | (temperature > high + 1e-9) | (top < chart.heights[0])
    return np.where(outside, -np.inf, top)


def temperature_range(aircraft: Aircraft) -> tuple[float, float]:
    """Coldest and hottest temperature of the permitted region at any height [K]."""
    limits, chart = aircraft.limits, aircraft.vne
    low, high = limits.min_temperature.value, np.inf
    if limits.max_temperature is not None:
        high = limits.max_temperature.value
    if limits.isa_deviation is not None:
        at_bottom = units.SEA_LEVEL_TEMPERATURE - units.LAPSE_RATE * chart.heights[0] + limits.isa_deviation.value
        high = min(high, at_bottom)
    if chart.temperatures:
        low, high = max(low, chart.temperatures[0]), min(high, chart.temperatures[-1])
    return low, high


def fastest(aircraft: Aircraft, loading: Floats, warmest: Floats, here: Floats) -> Best:
    """Largest true VNE over permitted points with m'/rho' >= `loading` and T' <= `warmest`.

    `loading` [m3], `warmest` and `here` [K] are (batch,); `here` is the day's own temperature, a row of its own.
    """
    rows = rows_of(aircraft)
    loading = loading * (1.0 - SLACK)
    stored = _stored_rows(aircraft, rows, loading, warmest)
    own = [_own_row(aircraft, rows, loading, warmest, row) for row in (warmest, here)]
    value = np.concatenate([stored.vne, *(one.vne for one in own)], axis=1)
    height = np.concatenate([stored.height, *(one.height for one in own)], axis=1)
    temperature = np.concatenate([stored.temperature, *(one.temperature for one in own)], axis=1)
    mass = np.concatenate([stored.mass, *(one.mass for one in own)], axis=1)
    best = value.max(axis=1)
    near = value >= (best - 0.5 * units.KNOT)[:, None]
    distance = np.where(near, np.abs(temperature - warmest[:, None]), np.inf)
    pick = np.argmin(distance, axis=1)
    at = np.arange(len(best))
    return Best(best, height[at, pick], temperature[at, pick], mass[at, pick])


def largest_loading(aircraft: Aircraft, warmest: Floats) -> Floats:
    """Largest m'/rho' [m3] over permitted points no warmer than `warmest` [K], (batch,); -inf where none is."""
    rows = rows_of(aircraft)
    cold = rows.temperature[None, :] <= warmest[:, None] * (1.0 + SLACK)
    stored = np.where(cold, rows.loading[None, :], -np.inf).max(axis=1)
    top = top_of(aircraft, warmest)
    permitted = np.isfinite(top)
    safe_top = np.where(permitted, top, aircraft.vne.heights[0])
    own = _heaviest(aircraft) / atmosphere.density(atmosphere.pressure_at(safe_top), warmest)
    readable = np.isfinite(chart_true_airspeed(aircraft, safe_top, warmest, _heaviest(aircraft)))
    return np.asarray(np.maximum(stored, np.where(permitted & readable, own, -np.inf)))


def _heaviest(aircraft: Aircraft) -> float:
    """The largest mass the chart speaks of: its axis' last column within the limits, or the maximum mass."""
    return (
        min(aircraft.vne.masses[-1], aircraft.limits.max_mass.value)
        if aircraft.vne.masses
        else aircraft.limits.max_mass.value
    )


def _lay_out(aircraft: Aircraft) -> Rows:
    low, high = temperature_range(aircraft)
    bottom = aircraft.vne.heights[0]
    steps = np.arange(np.ceil(low / TEMPERATURE_STEP), np.floor(high / TEMPERATURE_STEP) + 1.0) * TEMPERATURE_STEP
    # Whole and half degrees Celsius, the chart's own rows, and the corners of the region.
    temperatures = {low, high, *(t for t in steps + (units.ZERO_CELSIUS % TEMPERATURE_STEP) if low <= t <= high)}
    temperatures |= {t for t in aircraft.vne.temperatures if low <= t <= high}
    highest = min(aircraft.vne.heights[-1], aircraft.limits.max_altitude.value)
    corner = float(aircraft.limits.max_temperature_at(highest))
    temperatures |= {corner} if low <= corner <= high else set()
    masses = _mass_rows(aircraft)
    temperature, mass = (grid.ravel() for grid in np.meshgrid(sorted(temperatures), masses, indexing="ij"))
    top = top_of(aircraft, temperature)
    keep = np.isfinite(top)
    temperature, mass, top = temperature[keep], mass[keep], top[keep]

    nodes = np.array([h for h in aircraft.vne.heights if h < highest])
    shared = np.unique(np.concatenate([nodes, np.arange(bottom, highest, HEIGHT_STEP), [highest]]))
    heights = np.minimum(shared[None, :], top[:, None])  # points past a row's top repeat its top
    vne = chart_true_airspeed(aircraft, heights, temperature[:, None], mass[:, None], reading_allowance(aircraft))
    readable = np.isfinite(vne)
    vne = np.where(readable, vne, -np.inf)
    best_above = np.maximum.accumulate(vne[:, ::-1], axis=1)[:, ::-1]
    # A top whose speed is below the calibration cannot be used: the row ends at its highest readable point.
    top = np.where(readable, heights, -np.inf).max(axis=1)
    keep = np.isfinite(top)
    with np.errstate(invalid="ignore"):
        safe = np.where(keep, top, bottom)
    loading = np.where(keep, mass / atmosphere.density(atmosphere.pressure_at(safe), temperature), -np.inf)
    return Rows(*(a[keep] for a in (temperature, mass, top, loading, heights, vne, best_above)))


def _mass_rows(aircraft: Aircraft) -> Floats:
    """Masses m' runs over: the maximum mass alone, or the chart's axis cut finely within the limits."""
    heaviest = _heaviest(aircraft)
    if not aircraft.vne.masses:
        return np.array([heaviest])
    nodes = np.array([m for m in aircraft.vne.masses if m <= heaviest])
    fine = [np.linspace(a, b, MASS_STEPS, endpoint=False) for a, b in pairwise(nodes)]
    return np.unique(np.concatenate([*fine, nodes, [heaviest]]))


def _height_asked(loading: Floats, temperature: Floats, mass: Floats, bottom: float) -> Floats:
    """Lowest pressure altitude at which a row is at least as loaded [m], not below the chart's first row."""
    pressure = mass / loading * units.GAS_CONSTANT * temperature
    highest = atmosphere.pressure_at(11_000.0)
    safe = np.clip(pressure, highest, atmosphere.pressure_at(bottom))
    height = np.asarray(atmosphere.pressure_altitude_of(safe))
    return np.where(pressure < highest, np.inf, np.maximum(height, bottom))


def _stored_rows(aircraft: Aircraft, rows: Rows, loading: Floats, warmest: Floats) -> Best:
    """Best of each stored row, (batch, row): its running maximum above, and its exact point where that could win."""
    bottom = aircraft.vne.heights[0]
    asked = _height_asked(loading[:, None], rows.temperature[None, :], rows.mass[None, :], bottom)
    open_ = (asked <= rows.top[None, :]) & (rows.temperature[None, :] <= warmest[:, None] * (1.0 + SLACK))
    asked = np.where(open_, asked, rows.top[None, :])
    shared = rows.heights.max(axis=0)
    index = np.clip(np.searchsorted(shared, asked.ravel()).reshape(asked.shape), 0, len(shared) - 1)
    row = np.broadcast_to(np.arange(len(rows.top))[None, :], asked.shape)
    stored = np.where(open_, rows.best_above[row, index], -np.inf)
    below = np.where(open_, rows.best_above[row, np.maximum(index - 1, 0)], -np.inf)
    # The exact point lies between two stored ones: look only where the lower of them could still win.
    look = open_ & (below >= stored.max(axis=1, keepdims=True) - 0.5 * units.KNOT - _NEAR)
    exact = np.full(asked.shape, -np.inf)
    where = np.nonzero(look)
    speed = chart_true_airspeed(
        aircraft, asked[where], rows.temperature[where[1]], rows.mass[where[1]], reading_allowance(aircraft)
    )
    exact[where] = np.where(np.isfinite(speed), speed, -np.inf)
    value = np.maximum(exact, stored)
    height = np.where(exact >= stored - _NEAR, asked, _height_of_best(rows, row, index))
    return Best(value, height, np.broadcast_to(rows.temperature, asked.shape), np.broadcast_to(rows.mass, asked.shape))


def _height_of_best(rows: Rows, row: NDArray[np.intp], index: NDArray[np.intp]) -> Floats:
    """Height of the stored point that makes the running maximum at `index` [m]."""
    columns = np.arange(rows.vne.shape[1])
    # Where a point is its own running maximum it is a peak; the next peak upwards is the one that counts.
    peak = np.where(rows.vne >= rows.best_above, columns[None, :], rows.vne.shape[1] - 1)
    next_peak = np.minimum.accumulate(peak[:, ::-1], axis=1)[:, ::-1]
    return np.asarray(rows.heights[row, next_peak[row, index]])


def _own_row(aircraft: Aircraft, rows: Rows, loading: Floats, warmest: Floats, temperature: Floats) -> Best:
    """A row at each query's own temperature, (batch, masses): the exact point, the chart's heights above, the top."""
    masses = _mass_rows(aircraft)
    bottom = aircraft.vne.heights[0]
    top = top_of(aircraft, temperature)[:, None]
    asked = _height_asked(loading[:, None], temperature[:, None], masses[None, :], bottom)
    open_ = (asked <= top) & (temperature <= warmest * (1.0 + SLACK))[:, None]
    asked = np.where(open_, asked, bottom)
    nodes = np.broadcast_to(np.asarray(aircraft.vne.heights), (*asked.shape, len(aircraft.vne.heights)))
    last = np.where(open_, top, bottom)
    heights = np.concatenate([asked[..., None], nodes, last[..., None]], axis=-1)
    speed = chart_true_airspeed(
        aircraft, heights, temperature[:, None, None], masses[None, :, None], reading_allowance(aircraft)
    )
    usable = open_[..., None] & (heights >= asked[..., None]) & (heights <= last[..., None]) & np.isfinite(speed)
    speed = np.where(usable, speed, -np.inf)
    pick = np.argmax(speed, axis=-1)[..., None]
    return Best(
        np.take_along_axis(speed, pick, axis=-1)[..., 0],
        np.take_along_axis(heights, pick, axis=-1)[..., 0],
        np.broadcast_to(temperature[:, None], asked.shape),
        np.broadcast_to(masses[None, :], asked.shape),
    )
