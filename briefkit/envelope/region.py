"""The permitted region: the chart's axes and the manual's maximum altitude and temperatures together.

Heights here are the chart's own: pressure altitude, or density altitude where the chart's rows are that.
"""

from __future__ import annotations

from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.chart import density_altitude_of, standard_density
from briefkit.aircraft.model import Aircraft
from briefkit.physics import atmosphere

Floats = NDArray[np.float64]


def standard_day_only(aircraft: Aircraft) -> bool:
    """True where the chart does not say which temperatures it was made for: its points lie on the standard day."""
    chart = aircraft.vne
    return not (chart.temperatures or chart.density_altitude or chart.covers_temperatures)


def temperature_range(aircraft: Aircraft) -> tuple[float, float]:
    """Coldest and hottest temperature of the permitted region at any height [K]."""
    limits, chart = aircraft.limits, aircraft.vne
    low, high = limits.min_temperature.value, np.inf
    if limits.max_temperature is not None:
        high = limits.max_temperature.value
    if limits.isa_deviation is not None:
        bottom = atmosphere.LOWEST if chart.density_altitude else chart.heights[0]
        at_bottom = units.SEA_LEVEL_TEMPERATURE - units.LAPSE_RATE * bottom + limits.isa_deviation.value
        high = min(high, at_bottom)
    if chart.temperatures:
        low, high = max(low, chart.temperatures[0]), min(high, chart.temperatures[-1])
    return low, high


def highest_altitude(aircraft: Aircraft) -> float:
    """Highest pressure altitude [m] the limits and, where its rows are that, the chart permit."""
    top = aircraft.limits.max_altitude.value
    return top if aircraft.vne.density_altitude else min(aircraft.vne.heights[-1], top)


def top_of(aircraft: Aircraft, temperature: Floats | float) -> Floats:
    """Highest permitted pressure altitude on the chart at a temperature [m]; -inf where none is."""
    limits, chart = aircraft.limits, aircraft.vne
    temperature = np.asarray(temperature, dtype=float)
    top = np.full(temperature.shape, highest_altitude(aircraft))
    if limits.isa_deviation is not None:
        # T <= T0 + d - L h, solved for h; limits lie below the tropopause.
        allowed = units.SEA_LEVEL_TEMPERATURE + limits.isa_deviation.value - temperature
        top = np.minimum(top, allowed / units.LAPSE_RATE)
    low, high = temperature_range(aircraft)
    bottom = chart.heights[0]
    if chart.density_altitude:
        top = np.minimum(top, altitude_at(aircraft, np.full(top.shape, chart.heights[-1]), temperature))
        bottom = atmosphere.LOWEST
    outside = (temperature < low - 1e-9) | (temperature > high + 1e-9) | (top < bottom)
    return np.where(outside, -np.inf, top)


def altitude_at(aircraft: Aircraft, height: Floats, temperature: Floats | float) -> Floats:
    """Pressure altitude [m] of a height on the chart at a temperature [K], within -1,000 to 11,000 m; broadcasts."""
    if not aircraft.vne.density_altitude:
        return height
    pressure = standard_density(height) * units.GAS_CONSTANT * temperature
    ends = atmosphere.pressure_at(np.array([atmosphere.LOWEST, 11_000.0]))
    return np.asarray(atmosphere.pressure_altitude_of(np.clip(pressure, ends[1], ends[0])))


def height_at(aircraft: Aircraft, altitude: Floats, temperature: Floats | float) -> Floats:
    """Height on the chart [m] of a pressure altitude [m] at a temperature [K]; NaN outside the standard atmosphere."""
    if not aircraft.vne.density_altitude:
        return altitude
    altitude, temperature = np.broadcast_arrays(altitude, np.asarray(temperature, dtype=float))
    return density_altitude_of(altitude, temperature)


def heaviest(aircraft: Aircraft) -> float:
    """The largest mass the chart speaks of: its axis' last column within the limits, or the maximum mass."""
    most = aircraft.limits.max_mass.value
    return min(aircraft.vne.masses[-1], most) if aircraft.vne.masses else most


def mass_rows(aircraft: Aircraft, steps: int) -> Floats:
    """Masses m' runs over: the maximum mass alone, bands one by one, or the chart's axis cut into `steps` a column."""
    chart, most = aircraft.vne, heaviest(aircraft)
    return _cut(chart.masses, most, 1 if chart.bands else steps) if chart.masses else np.array([most])


def rotor_rows(aircraft: Aircraft, steps: int) -> Floats:
    """Rotor speeds k' runs over: 1, or the chart's axis within the power-on range cut into `steps` a column."""
    nodes = aircraft.vne.rotor_speeds
    if not nodes:
        return np.array([1.0])
    slow, fast = (end.value for end in aircraft.limits.rotor_on)
    cut = _cut(nodes, min(nodes[-1], fast), steps)
    inside = cut[(cut >= slow - 1e-12) & (cut <= fast + 1e-12)]
    return np.unique(np.append(inside, max(nodes[0], slow)))


def _cut(nodes: tuple[float, ...], last: float, steps: int) -> Floats:
    kept = [node for node in nodes if node < last] + [last]
    pieces = [np.linspace(a, b, steps, endpoint=False) for a, b in pairwise(kept)]
    return np.unique(np.concatenate([*pieces, [last]]))
