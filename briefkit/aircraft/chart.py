"""The manual's power-on VNE chart as an array of cells, read by the manual's own rule."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]


class ReadingRule(StrEnum):
    """How the manual says its chart is read between entries."""

    INTERPOLATE = "interpolate"
    NEXT_LOWER = "next lower VNE"


@dataclass(frozen=True, eq=False)
class VneChart:
    """Indicated VNE [m/s] over pressure altitude [m], and over temperature [K] or mass [kg] where the chart has them.

    `speeds` has shape (heights, temperatures, masses); an axis the chart does not have has length 1 and an empty
    tuple here. `rows` is the chart as typed (header first), for the page and the read-back sheet. `reading_error`
    [m/s] is the half-width of reading a printed curve; 0 for printed figures. `covers_temperatures` is the statement,
    with its page, that a chart without a temperature axis holds at every permitted temperature. `reason` is the
    manual's own statement, with its page, of what sets VNE; `entry_reason` the author's answer to a finding on cells.
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
    entry_reason: str = ""

    def indicated(self, height: Floats | float, temperature: Floats | float, mass: Floats | float) -> Floats:
        """VNE [m/s indicated] by the chart's rule; arguments broadcast; NaN off the chart's axes.

        "interpolate" is linear along each axis; "next lower VNE" takes the lowest corner of the cell, a point on a
        grid line belonging to that line alone (nodes closed). A mass below the first column reads that column ("1,700
        lb or less").
        """
        height, temperature, mass = np.broadcast_arrays(
            np.asarray(height, dtype=float), np.asarray(temperature, dtype=float), np.asarray(mass, dtype=float)
        )
        ih, fh = _locate(self.heights, height)
        it, ft = _locate(self.temperatures, temperature)
        im, fm = _locate(self.masses, np.maximum(mass, self.masses[0]) if self.masses else mass)
        outside = np.isnan(fh) | np.isnan(ft) | np.isnan(fm)
        result: Floats = (
            np.zeros(height.shape) if self.reading is ReadingRule.INTERPOLATE else np.full(height.shape, np.inf)
        )
        for dh in (0, 1):
            for dt in (0, 1) if self.temperatures else (0,):
                for dm in (0, 1) if self.masses else (0,):
                    weight = _weight(fh, dh) * _weight(ft, dt) * _weight(fm, dm)
                    corner = self.speeds[ih + dh, it + dt, im + dm]
                    if self.reading is ReadingRule.INTERPOLATE:
                        result = result + weight * corner
                    else:
                        result = np.where(weight > 0.0, np.minimum(result, corner), result)
        return np.where(outside, np.nan, result)


# Two nodes closer than this share of a cell are one: so 5,000 ft converted to metres and back is still 5,000 ft.
_SAME = 1e-9


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
