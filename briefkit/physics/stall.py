"""How near a solved state is to stall: the measures in use, each with its source, and the arrays for a picture.

The section that flies in the solution and the section whose stall is looked up may differ: with the attached section
the angles are those of published tip-angle boundaries, and the stall angle they are held against is NACA 0012's.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from briefkit.physics.section import Naca0012, StallingSection
from briefkit.physics.steady import Trim

Array = NDArray[np.float64]

FIRST_SIGNS: Final = np.radians(12.0)  # retreating-tip angle, NACA WR L-110 and TR 840
LIMIT_OF_CONTROL: Final = np.radians(16.0)  # the same; figure from memory
# By the tip speed. Slower, near reversed flow, angles run to 90 degrees and forces to nothing.
LEAST_SPEED: Final = 0.2


@dataclass(frozen=True, eq=False)
class StallMeasures:
    """Measures by member, (batch,), and the disc they were taken on, (batch, radius, azimuth).

    - `tip_angle` [rad]: angle of attack at the tip where it retreats square to the wind; to be held against 12 degrees
      (first signs) and 16 (limit of control): NACA WR L-110, TR 840.
    - `excess` [rad]: the largest angle of attack less the section's angle of maximum lift at that Mach number, where
      the blade meets air at `LEAST_SPEED` or more; `excess_radius`, `excess_azimuth` [rad] its place (common practice,
      no source). Negative: nowhere stalled.
    - `stalled_share` of the disc, by area from the root cut-out, that lies past the stall angle at such speeds;
      `reversed_share` the part where the flow is reversed (common practice, no source).
    - `blade_loading`: CT / sigma (the trade's first measure; common practice, no source).
    - `over_stall` (batch, radius, azimuth) [rad]: angle less stall angle at `radii`, `azimuths`; NaN where the blade is
      slower than that.
    """

    tip_angle: Array
    excess: Array
    excess_radius: Array
    excess_azimuth: Array
    stalled_share: Array
    reversed_share: Array
    blade_loading: Array
    over_stall: Array
    radii: Array
    azimuths: Array


def stall_measures(
    flight: Trim, section: StallingSection | None = None, grid: tuple[int, int] = (72, 36)
) -> StallMeasures:
    """The stall measures of a solved batch, on `grid` = (azimuths, radii) rings and sectors of the blade's annulus.

    `section` is whose stall angle is used (none: NACA 0012). Refused members hold NaN. The largest angle is the largest
    at the points, the outermost of which lies half a ring inside the tip.
    """
    stalling = Naca0012() if section is None else section
    azimuth_count, ring_count = grid
    edges = np.linspace(flight.rotor.root_cutout, 1.0, ring_count + 1)
    radii = 0.5 * (edges[:-1] + edges[1:])
    azimuths = 2.0 * np.pi * np.arange(azimuth_count) / azimuth_count
    disc = flight.elements(radii, azimuths)
    reversed_flow = disc.speed <= 0.0
    tip_speed = np.broadcast_to(np.asarray(flight.state.tip_speed, dtype=np.float64), flight.t0.shape)
    slow = ~(disc.speed >= LEAST_SPEED * tip_speed[:, None, None])
    over = np.where(slow, np.nan, disc.angle - stalling.stall_angle(disc.mach))
    # A ring's area goes with its mean radius; every sector is alike.
    share = np.broadcast_to((radii * np.diff(edges))[:, None], over.shape[1:])
    share = share / share.sum()
    flat = np.where(np.isnan(over), -np.inf, over).reshape(over.shape[0], radii.size * azimuths.size)
    worst = flat.argmax(axis=1)
    ring, sector = np.unravel_index(worst, over.shape[1:])
    gone = np.where(flight.solved, 1.0, np.nan)
    return StallMeasures(
        tip_angle=flight.tip_angle,
        excess=np.where(flight.solved, flat[np.arange(flat.shape[0]), worst], np.nan),
        excess_radius=radii[ring] * gone,
        excess_azimuth=azimuths[sector] * gone,
        stalled_share=((over > 0.0) * share).sum(axis=(1, 2)) * gone,
        reversed_share=(reversed_flow * share).sum(axis=(1, 2)) * gone,
        blade_loading=flight.ct_sigma,
        over_stall=over,
        radii=radii,
        azimuths=azimuths,
    )
