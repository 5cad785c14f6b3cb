"""What the manual's chart says of itself: which cells are flat, which lie on a cold edge, which fall with loading.

Rotor limits collapse: VNE over tip speed depends on the loading m'/rho' alone, as far as tip Mach number plays no part.
So the falling cells of a sound chart lie on one curve, over however many variables it is printed. A cell more than 2 kt
off it is a slip of the pen, or another limit that took over there; either way somebody should look. Where a good part
of the cells is off, the chart as a whole does not collapse: its limit is not one of loading alone (a load in newtons,
stall that depends on Mach number).
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from typing import Final

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope import region
from briefkit.envelope.speeds import true_of
from briefkit.physics import atmosphere

Floats = NDArray[np.float64]
Flags = NDArray[np.bool_]

LARGEST_RESIDUAL: Final = 2.0 * units.KNOT
_DEGREE: Final = 2  # over the logarithm of the loading, so that V ~ 1/loading is within it
_MANY: Final = 30  # falling cells from which one degree more is known well enough: they spread over more loading
_WHOLE: Final = 1.0 / 3.0  # of the falling cells, off the curve: then it is the chart and not the cell
_LEAST: Final = 6  # falling cells; fewer make no curve
_ROUNDS: Final = 30
_SUSPECTS: Final = 3  # cells farthest off, each tried as the one that is wrong
_ROBUST: Final = 0.7 * units.KNOT  # residuals beyond this weigh less and less (Huber's weights)


class Shape(StrEnum):
    """What a cell of the chart looks like."""

    FLAT = "flat at the chart's highest value"
    COLD = "cold edge: falls or stays level towards the cold"
    FALLING = "falls with loading"


@dataclass(frozen=True, eq=False)
class ChartShape:
    """Cells of the chart with a speed (cell,), SI; `residual` [m/s true] from the common curve, NaN where not falling.

    `index` (cell, 4) places a cell in `VneChart.speeds`: height, temperature, mass, rotor speed; 0 on an axis the chart
    does not have.
    """

    index: NDArray[np.intp]
    shape: NDArray[np.object_]
    loading: Floats
    vne: Floats
    advancing_mach: Floats
    residual: Floats

    @property
    def findings(self) -> NDArray[np.intp]:
        """Cells off the common curve by more than 2 kt, the farthest first."""
        far = np.where(np.isfinite(self.residual), np.abs(self.residual), 0.0)
        order = np.argsort(-far, kind="stable")
        return order[far[order] > LARGEST_RESIDUAL]

    @property
    def collapses(self) -> bool:
        """False where more than a third of the falling cells lie off every common curve."""
        return bool(len(self.findings) <= _WHOLE * np.isfinite(self.residual).sum())


def chart_shape(aircraft: Aircraft) -> ChartShape:
    """The shape of the aircraft's power-on chart.

    A chart without temperatures is taken on the standard day, one without masses at the maximum mass, one without
    rotor speeds at 100 %.
    """
    chart = aircraft.vne
    row, t, m, k = np.nonzero(np.isfinite(chart.speeds))
    height = np.array(chart.heights)[row]
    # A height beyond the atmosphere (a node that only says "or less") has no air to be loaded in.
    known = height >= atmosphere.LOWEST
    row, t, m, k, height = row[known], t[known], m[known], k[known], height[known]
    standard = np.asarray(atmosphere.temperature_at(height))
    oat = np.array(chart.temperatures)[t] if chart.temperatures else standard
    mass = np.array(chart.masses)[m] if chart.masses else np.full(len(row), region.heaviest(aircraft))
    rotor = np.array(chart.rotor_speeds)[k] if chart.rotor_speeds else np.ones(len(row))
    # On a density-altitude chart the standard day stands for every day of that density.
    pressure = np.asarray(atmosphere.pressure_at(height))
    density = np.asarray(atmosphere.density(pressure, standard if chart.density_altitude else oat))
    indicated = chart.speeds[row, t, m, k]
    vne = true_of(aircraft.calibration, indicated, pressure, oat) / rotor
    loading = mass / (density * rotor**2)
    shape = _shapes(chart.speeds)[row, t, m, k]
    residual = np.full(len(row), np.nan)
    falling = np.nonzero((shape == Shape.FALLING) & np.isfinite(vne))[0]
    if len(falling) >= _LEAST:
        residual[falling] = _residuals(loading[falling], vne[falling])
    mach = (vne + aircraft.rotor.tip_speed) * rotor / np.asarray(atmosphere.speed_of_sound(oat))
    return ChartShape(np.stack([row, t, m, k], axis=1), shape, loading, vne, mach, residual)


def _shapes(speeds: Floats) -> NDArray[np.object_]:
    """The shape of every cell: (heights, temperatures, masses, rotor speeds)."""
    known = np.where(np.isfinite(speeds), speeds, -np.inf)
    highest = known.max()
    flat = (known == highest) & ((known == highest).sum() > 1)
    warmer = np.concatenate([known[:, 1:], np.full_like(known[:, :1], -np.inf)], axis=1)
    # An edge runs in from the coldest column; a low cell with a higher one on its cold side is no edge.
    # So is one beside a flat cell on its cold side, however the cells warmer than it go on.
    cold = np.logical_and.accumulate(~flat & (known <= warmer), axis=1)
    shape = np.array([Shape.FALLING] * speeds.size, dtype=object).reshape(speeds.shape)
    shape[cold] = Shape.COLD
    shape[flat] = Shape.FLAT
    return shape


def _residuals(loading: Floats, vne: Floats) -> Floats:
    """Distance from the common curve; where one cell left out of the fit clears all others, from theirs alone."""
    spread = np.log(loading)
    x = (spread - spread.mean()) / max(float(np.ptp(spread)), 1e-9)
    degree = _DEGREE + (1 if len(x) >= _MANY else 0)
    powers = np.stack([x**n for n in range(degree + 1)], axis=1)
    every = np.ones(len(x), dtype=bool)
    residual = _fitted(powers, vne, every)
    off = np.abs(residual) > LARGEST_RESIDUAL
    if off.sum() > 1 and len(x) > _LEAST:
        # One bad cell can pull the curve off its neighbours: then it is the one to name, and they are not.
        for cell in np.argsort(-np.abs(residual), kind="stable")[:_SUSPECTS]:
            others = every.copy()
            others[cell] = False
            alone = _fitted(powers, vne, others)
            far = np.abs(alone) > LARGEST_RESIDUAL
            if far[cell] and far.sum() == 1:
                return alone
    return residual


def _fitted(powers: Floats, vne: Floats, kept: Flags) -> Floats:
    """Distance from a smooth curve through the cells kept, a few of them off it not pulling it (Huber's weights)."""
    weight = kept.astype(float)
    residual: Floats = np.zeros_like(vne)
    for _ in range(_ROUNDS):
        root = np.sqrt(weight)[:, None]
        curve, *_ = np.linalg.lstsq(powers * root, vne * root[:, 0], rcond=None)
        residual = vne - powers @ curve
        weight = np.where(kept, _ROBUST / np.maximum(np.abs(residual), _ROBUST), 0.0)
    return residual
