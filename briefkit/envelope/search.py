"""One question to the manual's chart: at points at least this loaded and no warmer, how fast does it allow?

Each row answers with its exact point at the height asked for, or the running maximum above it. A plain grid search
made a false 0.02 kt in a trial, which a page would have printed as 5 kt; this one is exact at the constraint.
"""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import Final

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope import region
from briefkit.envelope.rows import Rows, chart_speed, rows_of
from briefkit.physics import atmosphere

Floats = NDArray[np.float64]
Index = NDArray[np.intp]

SLACK: Final = 1e-9  # relative: a point exactly as loaded counts as such
_REPORT: Final = 0.5 * units.KNOT  # of points this near the largest, the one nearest the day's temperature is reported
_LOOK: Final = 0.05 * units.KNOT  # a row this far below the best is not looked at exactly
_COLUMN: Final = 1.0 * units.KNOT  # a column of mass and rotor speed this far below the best has no row of its own
_CHUNK: Final = 512  # queries at a time: their arrays stay in cache
_MANY: Final = 1000  # rows of a chart that are looked at in two goes
_STRIDE: Final = 16  # temperatures from one look to the next
_NEAR: Final = 3.0 * units.KNOT


@dataclass(frozen=True, eq=False)
class Best:
    """Per query (batch,): the largest referred speed V'/k' [m/s true], -inf where no point qualifies, and a point.

    `height` is a pressure altitude [m]. The point is the fastest, or the one to report: of those within 0.5 kt of it
    the one nearest the temperature asked for.
    """

    vne: Floats
    height: Floats
    temperature: Floats
    mass: Floats
    rotor_speed: Floats

    def where(self, mine: NDArray[np.bool_], other: Best) -> Best:
        """This one's members where `mine`, the other's elsewhere."""
        return Best(*(np.where(mine, getattr(self, f.name), getattr(other, f.name)) for f in fields(self)))


def fastest(aircraft: Aircraft, loading: Floats, warmest: Floats, here: Floats, report: bool = False) -> Best:
    """Largest referred VNE over permitted points with m'/(rho' k'^2) >= `loading` and T'/k'^2 <= `warmest`.

    `loading` [m3], `warmest` and `here` [K] are (batch,); `here` is the day's own temperature, a row of its own.
    `report` gives the point to report, at twice the cost.
    """
    rows = rows_of(aircraft)
    near = _REPORT if report else 0.0
    size = _CHUNK if len(rows.top) < _MANY else _CHUNK // 8
    parts = []
    for start in range(0, len(loading), size):
        at = slice(start, start + size)
        asked = loading[at] * (1.0 - SLACK)
        parts.append(_fastest(aircraft, _worth_reading(rows, asked, warmest[at]), asked, warmest[at], here[at], near))
    return Best(*(np.concatenate([getattr(part, f.name) for part in parts]) for f in fields(Best)))


def largest_loading(aircraft: Aircraft, warmest: Floats) -> Floats:
    """Largest m'/(rho' k'^2) [m3] over permitted points no warmer than `warmest` [K], (batch,); -inf where none is."""
    rows = rows_of(aircraft)
    if rows.standard_day:
        least = (units.SEA_LEVEL_TEMPERATURE - np.multiply.outer(warmest, rows.rotor_speed**2)) / units.LAPSE_RATE
        on_the_day: Floats = np.where(least <= rows.top, rows.loading, -np.inf).max(axis=1)
        return on_the_day
    warmth, so_far = rows.coldest_first
    last = np.searchsorted(warmth, warmest * (1.0 + SLACK), side="right") - 1
    stored = np.where(last >= 0, so_far[np.maximum(last, 0)], -np.inf)
    # The row at exactly the warmest temperature, for the heaviest column.
    column = np.argmax(rows.mass[: rows.columns] / rows.rotor_speed[: rows.columns] ** 2)
    mass, k = rows.mass[column], rows.rotor_speed[column]
    oat = warmest * k**2
    top = region.top_of(aircraft, oat)
    safe = np.where(np.isfinite(top), top, 0.0)
    height = region.height_at(aircraft, safe, oat)
    known = np.isfinite(top) & np.isfinite(height)
    speed = chart_speed(aircraft, np.where(known, height, rows.heights[0]), oat, mass, k)
    own = mass / (atmosphere.density(atmosphere.pressure_at(safe), oat) * k**2)
    return np.asarray(np.maximum(stored, np.where(known & np.isfinite(speed), own, -np.inf)))


def _worth_reading(rows: Rows, loading: Floats, warmest: Floats) -> Rows:
    """Of a chart with thousands of rows, the temperatures near those that could hold the answer of any query.

    A look at every sixteenth temperature tells which: within four kelvin of one that was looked at the speed a row
    allows is taken to change by less than `_NEAR`. A temperature left out wrongly could only have raised the answer.
    """
    if len(rows.top) < _MANY or rows.standard_day:
        return rows
    count = len(rows.top) // rows.columns
    coarse = np.unique(np.append(np.arange(0, count, _STRIDE), count - 1))
    looked = rows.at_temperatures(coarse)
    best = _stored_speeds(looked, loading, warmest)[0].reshape(len(loading), len(coarse), rows.columns).max(axis=2)
    near = (best >= np.maximum(best.max(axis=1), -1e9)[:, None] - _NEAR).any(axis=0)
    wanted = np.zeros(count, dtype=bool)
    wanted[coarse] = True
    for left, right, worth in zip(coarse[:-1], coarse[1:], near[:-1] | near[1:], strict=True):
        wanted[left:right] |= worth
    return rows.at_temperatures(np.flatnonzero(wanted))


def _stored_speeds(rows: Rows, loading: Floats, warmest: Floats) -> tuple[Floats, Index, Floats, NDArray[np.bool_]]:
    """The running maximum at or above the height asked for (query, row), its index, that height, whether permitted."""
    asked = rows.asked(loading, warmest)
    open_ = (asked <= rows.top) & (rows.warmth <= warmest[:, None] * (1.0 + SLACK))
    index = rows.place(np.where(open_, asked, rows.heights[0]))
    return np.where(open_, rows.best_above[rows.kept_at, index], -np.inf), index, asked, open_


def _fastest(aircraft: Aircraft, rows: Rows, loading: Floats, warmest: Floats, here: Floats, near: float) -> Best:
    stored, index, asked, open_ = _stored_speeds(rows, loading, warmest)
    # The exact point lies between two stored ones: look only where the one below could still win.
    below = np.where(open_, rows.best_above[rows.kept_at, np.maximum(index - 1, 0)], -np.inf)
    best = stored.max(axis=1)
    query, at = np.nonzero(below >= np.maximum(best, -1e9)[:, None] - near - _LOOK)
    found = [_stored(rows, query, at, index, stored), _exact(aircraft, rows, query, at, asked)]
    if not rows.standard_day:
        found += _own_rows(aircraft, rows, loading, warmest, here, best, stored)
    return _pick(aircraft, found, warmest, near)


@dataclass(frozen=True, eq=False)
class _Points:
    """Candidate points (point,), each of one query, heights the chart's own."""

    query: Index
    speed: Floats
    height: Floats
    temperature: Floats
    mass: Floats
    rotor_speed: Floats


def _stored(rows: Rows, query: Index, row: Index, index: Index, stored: Floats) -> _Points:
    """The running maximum of the rows looked at, with the height of the peak that makes it."""
    at = rows.peak[rows.kept_at[row], index[query, row]]
    height = np.minimum(rows.heights[at], rows.top[row])
    return _points(rows, query, row, stored[query, row], height)


def _exact(aircraft: Aircraft, rows: Rows, query: Index, row: Index, asked: Floats) -> _Points:
    """The point exactly as loaded as asked, of the rows looked at."""
    height = np.minimum(asked[query, row], rows.top[row])
    made = _points(rows, query, row, np.empty(0), height)
    speed = chart_speed(aircraft, height, made.temperature, made.mass, made.rotor_speed)
    return _points(rows, query, row, speed, height)


def _points(rows: Rows, query: Index, row: Index, speed: Floats, height: Floats) -> _Points:
    temperature = rows.temperature[row]
    if rows.standard_day:
        temperature = np.asarray(atmosphere.temperature_at(height))
    return _Points(query, speed, height, temperature, rows.mass[row], rows.rotor_speed[row])


def _own_rows(
    aircraft: Aircraft, rows: Rows, loading: Floats, warmest: Floats, here: Floats, best: Floats, stored: Floats
) -> list[_Points]:
    """Rows at each query's own temperatures, the warmest permitted and the day's.

    The point as loaded as asked and the chart's own heights above it, for the columns of mass and rotor speed that
    could win.
    """
    by_column = stored.reshape(len(loading), -1, rows.columns).max(axis=1)
    query, column = np.nonzero(by_column >= np.maximum(best, -1e9)[:, None] - _COLUMN)
    none_stored = np.nonzero(np.isneginf(best))[0]
    query = np.concatenate([query, np.repeat(none_stored, rows.columns)])
    column = np.concatenate([column, np.tile(np.arange(rows.columns), len(none_stored))])
    mass, k = rows.mass[column], rows.rotor_speed[column]
    return [
        _own_row(aircraft, rows, query, loading[query], warmest[query], oat, mass, k)
        for oat in (warmest[query] * k**2, np.where(here == warmest, np.nan, here)[query])
    ]


def _own_row(
    aircraft: Aircraft,
    rows: Rows,
    query: Index,
    loading: Floats,
    warmest: Floats,
    oat: Floats,
    mass: Floats,
    k: Floats,
) -> _Points:
    """Points of one row a member; a member without a temperature (NaN) has none."""
    stated = np.isfinite(oat)
    top = np.where(stated, region.top_of(aircraft, np.where(stated, oat, units.SEA_LEVEL_TEMPERATURE)), -np.inf)
    allowed = np.isfinite(top) & (np.where(stated, oat, np.inf) / k**2 <= warmest * (1.0 + SLACK))
    query = query[allowed]
    loading, oat, mass, k = (values[allowed] for values in (loading, oat, mass, k))
    pressure = mass / (loading * k**2) * units.GAS_CONSTANT * oat
    ends = atmosphere.pressure_at(np.array([atmosphere.LOWEST, 11_000.0]))
    altitude = np.asarray(atmosphere.pressure_altitude_of(np.clip(pressure, ends[1], ends[0])))
    asked = np.where(pressure > ends[1], np.fmax(region.height_at(aircraft, altitude, oat), rows.heights[0]), np.inf)
    last = np.fmin(region.height_at(aircraft, top[allowed], oat), rows.heights[-1])
    nodes = np.broadcast_to(aircraft.vne.heights, (len(asked), len(aircraft.vne.heights)))
    own = np.concatenate([asked[:, None], nodes, last[:, None]], axis=1)
    usable = (own >= asked[:, None]) & (own <= last[:, None])
    at, _ = np.nonzero(usable)
    height = own[usable]
    speed = chart_speed(aircraft, height, oat[at], mass[at], k[at])
    return _Points(query[at], speed, height, oat[at], mass[at], k[at])


def _pick(aircraft: Aircraft, found: list[_Points], warmest: Floats, near: float) -> Best:
    """The largest speed of each query, and of the points this near it the one nearest the temperature asked for."""
    points = _Points(*(np.concatenate([getattr(part, f.name) for part in found]) for f in fields(_Points)))
    best = np.full(len(warmest), -np.inf)
    np.maximum.at(best, points.query, points.speed)
    close = np.nonzero((points.speed >= best[points.query] - near) & np.isfinite(points.speed))[0]
    query = points.query[close]
    distance = np.abs(points.temperature[close] - warmest[query])
    first = close[np.lexsort((-points.speed[close], distance, query))]
    answered, at = np.unique(points.query[first], return_index=True)
    pick = first[at]
    temperature = points.temperature[pick]
    values = (
        region.altitude_at(aircraft, points.height[pick], temperature),
        temperature,
        points.mass[pick],
        points.rotor_speed[pick],
    )
    filled = [np.full(len(warmest), np.nan) for _ in values]
    for array, value in zip(filled, values, strict=True):
        array[answered] = value
    return Best(best, *filled)
