"""A work area on its lowest QNH and its range of temperatures, as the block of points a reduction is taken over."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.operation import WorkArea

BLOCK_HEIGHT_STEP: Final = 250.0 * units.FOOT
BLOCK_TEMPERATURE_STEP: Final = 2.0


@dataclass(frozen=True)
class Block:
    """A work area as points to evaluate: pressure altitudes [m] and temperatures [K], rising, corners included."""

    heights: tuple[float, ...]
    temperatures: tuple[float, ...]


def block_of(aircraft: Aircraft, area: WorkArea) -> Block:
    """The area's corners, every chart row and column inside it, and every 250 ft and 2 C."""

    def points(low: float, high: float, axis: tuple[float, ...], step: float) -> tuple[float, ...]:
        inside = [value for value in axis if low < value < high]
        return tuple(sorted({low, high, *inside, *(float(x) for x in np.arange(low, high, step))}))

    return Block(
        points(area.low_altitude.value, area.high_altitude.value, aircraft.vne.heights, BLOCK_HEIGHT_STEP),
        points(
            area.low_temperature.value, area.high_temperature.value, aircraft.vne.temperatures, BLOCK_TEMPERATURE_STEP
        ),
    )
