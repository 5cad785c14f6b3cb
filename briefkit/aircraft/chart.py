"""The manual's power-on VNE chart as an array of cells, read by the manual's own rule."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from itertools import product
from math import prod
from typing import Final

import numpy as np
from numpy.typing import NDArray

from briefkit.physics import atmosphere
from briefkit.units import GAS_CONSTANT, GRAVITY, LAPSE_RATE, SEA_LEVEL_PRESSURE, SEA_LEVEL_TEMPERATURE

Floats = NDArray[np.float64]
Texts = NDArray[np.object_]


class ReadingRule(StrEnum):
    """How the manual says its chart is read between entries."""

    INTERPOLATE = "interpolate"
    NEXT_LOWER = "next lower VNE"


class Axis(StrEnum):
    """What a chart may vary with, in the order of the axes of `VneChart.speeds`."""

    HEIGHT = "height"
    TEMPERATURE = "temperature"
    MASS = "mass"
    ROTOR_SPEED = "rotor speed"


@dataclass(frozen=True, eq=False)
class VneChart:
    """Indicated VNE [m/s] over height [m], temperature [K], mass [kg] and rotor speed (fraction), as far as the chart
    varies with them.

    `speeds` has shape (heights, temperatures, masses, rotor speeds); an axis the chart does not have has length 1 and
    an empty tuple here, but for the heights: a chart that does not speak of height has two rows alike, the ends of
    what is permitted. NaN where the manual prints no value. `heights` are pressure altitudes, or density altitudes
    where `density_altitude`.

    `straight` names the axes read along straight lines whatever `reading` says (printed lines and slopes). With `bands`
    the masses are "X or less": between two of them the heavier holds, whatever `reading` says. With `or_less` the
    lightest mass holds for anything lighter. `cap` [m/s indicated] is taken after reading, the lesser of the two.

    `rows` is the chart as typed (header first), for the page and the read-back sheet; `printed`, shaped as `speeds`,
    the text of each typed cell, "" where no cell was typed; `typed` the axes as typed (down, across, third), with the
    text of each entry. `reading_error` [m/s] is the half-width of reading a printed curve; 0 for printed figures.
    `covers_temperatures` is the statement, with its page, that a chart without a temperature axis holds at every
    permitted temperature. `reason` is the manual's own statement, with its page, of what sets VNE. `cap_text` is the
    cap as typed; `lowered` says by how much a configuration lowers every entry ("15 kt"), `speeds` being lowered
    already. Each of the two has its source where it is not the chart's.
    """

    heights: tuple[float, ...]
    temperatures: tuple[float, ...]
    masses: tuple[float, ...]
    speeds: Floats
    reading: ReadingRule
    source: str
    rows: tuple[tuple[str, ...], ...]
    reading_error: float = 0.0
    covers_temperatures: str = ""
    reason: str = ""
    rotor_speeds: tuple[float, ...] = ()
    density_altitude: bool = False
    bands: bool = False
    or_less: bool = False
    cap: float | None = None
    straight: tuple[Axis, ...] = ()
    printed: Texts | None = None
    typed: tuple[tuple[Axis, tuple[str, ...]], ...] = ()
    cap_text: str = ""
    cap_source: str = ""
    lowered: str = ""
    lowered_source: str = ""

    def __post_init__(self) -> None:
        lengths = tuple(max(len(nodes), 1) for nodes in self.axes.values())
        if self.speeds.shape != lengths or not self.heights:
            raise ValueError(f"a chart of shape {self.speeds.shape} for axes of {lengths}")

    @property
    def axes(self) -> dict[Axis, tuple[float, ...]]:
        """Every axis with its nodes, rising; an axis the chart does not have is empty."""
        return dict(zip(Axis, (self.heights, self.temperatures, self.masses, self.rotor_speeds), strict=True))

    @property
    def variables(self) -> tuple[Axis, ...]:
        """What VNE varies with, in words of the manual: the typed axes."""
        return tuple(axis for axis, _ in self.typed)

    @property
    def lowest_mass(self) -> float:
        """Lightest mass the chart speaks of [kg]; minus infinity where it has no mass axis or says "or less"."""
        return self.masses[0] if self.masses and not self.or_less else -np.inf

    def indicated(
        self,
        height: Floats | float,
        temperature: Floats | float,
        mass: Floats | float,
        rotor_speed: Floats | float = 1.0,
    ) -> Floats:
        """VNE [m/s indicated] by the chart's rule at a pressure altitude [m], always, whatever the chart's own rows.

        Arguments broadcast; NaN off the chart's axes and where the manual prints no value. "interpolate" is linear
        along each axis; "next lower VNE" takes the lowest corner of the cell, a point on a grid line belonging to that
        line alone (nodes closed).
        """
        height, temperature, mass, rotor_speed = np.broadcast_arrays(
            *(np.asarray(value, dtype=float) for value in (height, temperature, mass, rotor_speed))
        )
        if self.density_altitude:
            height = density_altitude_of(height, temperature)
        if self.or_less and self.masses:
            mass = np.maximum(mass, self.masses[0])
        places = {
            axis: _locate(nodes, value)
            for (axis, nodes), value in zip(self.axes.items(), (height, temperature, mass, rotor_speed), strict=True)
        }
        if self.bands:
            index, fraction = places[Axis.MASS]
            places[Axis.MASS] = index, np.ceil(fraction)
        outside = np.any([np.isnan(fraction) for _, fraction in places.values()], axis=0)
        result = self._read(places)
        if self.cap is not None:
            result = np.minimum(result, self.cap)
        return np.where(outside, np.nan, result)

    def node_heights(self, temperature: float) -> Floats:
        """Pressure altitudes [m] of the chart's height rows at one temperature [K], (heights,), rising.

        The rows themselves, unless they are density altitudes: then within -1,000 to 11,000 m, a row beyond standing at
        the end.
        """
        if not self.density_altitude:
            return np.array(self.heights)
        pressure = standard_density(np.array(self.heights)) * GAS_CONSTANT * temperature
        ends = atmosphere.pressure_at([atmosphere.LOWEST, 11_000.0])
        return atmosphere.pressure_altitude_of(np.clip(pressure, ends[1], ends[0]))

    def _read(self, places: dict[Axis, tuple[NDArray[np.intp], Floats]]) -> Floats:
        """Along the straight axes by weight, then the lowest over the corners of the others."""
        present = [axis for axis, nodes in self.axes.items() if nodes]
        linear = [axis for axis in present if self.reading is ReadingRule.INTERPOLATE or axis in self.straight]
        lowest = [axis for axis in present if axis not in linear]
        blank = bool(np.isnan(self.speeds).any())
        result: Floats | None = None
        for low in product((0, 1), repeat=len(lowest)):
            corner = dict(zip(lowest, low, strict=True))
            value: Floats = np.zeros(places[Axis.HEIGHT][0].shape)
            for side in product((0, 1), repeat=len(linear)):
                at = corner | dict(zip(linear, side, strict=True))
                cell = self.speeds[tuple(places[axis][0] + at.get(axis, 0) for axis in Axis)]
                weight = prod((_weight(places[axis][1], at[axis]) for axis in linear), start=1.0)
                # A corner without a value spoils only what really leans on it.
                value = value + (np.where(weight > 0.0, weight * cell, 0.0) if blank else weight * cell)
            if not lowest:
                return value
            counts = prod((_weight(places[axis][1], corner[axis]) for axis in lowest), start=1.0) > 0.0
            result = np.where(counts, np.minimum(np.inf if result is None else result, value),
                              np.inf if result is None else result)  # fmt: skip
        if result is None:
            raise AssertionError("a product of pairs has at least one member")
        return result


# Two nodes closer than this share of a cell are one: so 5,000 ft converted to metres and back is still 5,000 ft.
_SAME: Final = 1e-9
# Density falls with height in the standard atmosphere as pressure does, with the exponent one less (ISO 2533).
_DENSITY_EXPONENT: Final = GRAVITY / (GAS_CONSTANT * LAPSE_RATE) - 1.0


def standard_density(density_altitude: Floats | float) -> Floats:
    """Density [kg/m3] of the standard atmosphere at a density altitude [m], -5,000 to 11,000 m (ISO 2533)."""
    sea_level = SEA_LEVEL_PRESSURE / (GAS_CONSTANT * SEA_LEVEL_TEMPERATURE)
    ratio = 1.0 - LAPSE_RATE * np.asarray(density_altitude, dtype=float) / SEA_LEVEL_TEMPERATURE
    return np.asarray(sea_level * ratio**_DENSITY_EXPONENT)


def density_altitude_of(pressure_altitude: Floats, temperature: Floats) -> Floats:
    """Density altitude [m] at a pressure altitude [m] and a temperature [K]; NaN outside the standard atmosphere."""
    known = (pressure_altitude >= atmosphere.LOWEST) & (pressure_altitude <= 11_000.0) & (temperature > 0.0)
    pressure = atmosphere.pressure_at(np.where(known, pressure_altitude, 0.0))
    density = atmosphere.density(pressure, np.where(known, temperature, SEA_LEVEL_TEMPERATURE))
    ends = standard_density(np.array([atmosphere.LOWEST_DENSITY_ALTITUDE, 11_000.0]))
    inside = (density <= ends[0]) & (density >= ends[1])
    return np.where(known & inside, atmosphere.density_altitude(np.clip(density, ends[1], ends[0])), np.nan)


def _locate(axis: tuple[float, ...], value: Floats) -> tuple[NDArray[np.intp], Floats]:
    """Lower cell index and fraction along an axis; fraction NaN outside; a missing axis gives index 0, fraction 0."""
    if not axis:
        return np.zeros(value.shape, dtype=np.intp), np.zeros(value.shape)
    nodes = np.asarray(axis)
    index = np.clip(np.searchsorted(nodes, value, side="right") - 1, 0, len(nodes) - 2)
    fraction = (value - nodes[index]) / (nodes[index + 1] - nodes[index])
    fraction = np.where(np.abs(fraction) < _SAME, 0.0, np.where(np.abs(fraction - 1.0) < _SAME, 1.0, fraction))
    return index, np.where((fraction < 0.0) | (fraction > 1.0), np.nan, fraction)


def _weight(fraction: Floats, upper: int) -> Floats:
    return fraction if upper else 1.0 - fraction
