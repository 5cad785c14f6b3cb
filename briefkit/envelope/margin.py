"""How the absolute onset band lies to the manual's VNE: told from its lower edge, and not told finer than it is known.

The band's own half-width decides whether a margin is one: a margin smaller than it is not resolved, whatever its sign.
VNE governs in any case; the band is analysis, softer than the chart, and no end of it is ever moved to VNE.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from briefkit.aircraft.model import Aircraft
from briefkit.envelope.spread import OnsetBand
from briefkit.units import Speed, SpeedKind


@dataclass(frozen=True)
class Margin:
    """From VNE to the first signs (12 degrees), all indicated.

    `lower` is the band's own lower end and None where that lies under the calibrated range; `margin` is `central` less
    VNE, negative where first signs come first, None where the middle has no indicated speed; `half_width` the larger of
    half the band and what its spread takes off the middle, `at_least` where the band's upper end lies above the
    calibrated range and the top of that range stands in; None where there is no width to be had. `reduced` where the
    band begins under VNE, `resolved` where the margin is no smaller than a half-width that is fully known.
    """

    vne: Speed
    lower: Speed | None
    margin: Speed | None
    half_width: Speed | None
    at_least: bool
    reduced: bool
    resolved: bool


def margin_to_vne(aircraft: Aircraft, band: OnsetBand, vne: Speed) -> Margin:
    """The margin of a band to the manual's VNE at the same condition.

    Raises `MixedSpeeds` where `vne` is not an indicated speed.
    """
    lower, central, upper = band.speeds
    # An end without an indicated speed: the lower one lies under the foot of the calibration, the upper above its top.
    reduced = lower is None or lower < vne
    margin = None if central is None else central - vne
    highest = aircraft.calibration.highest_indicated
    top = Speed(highest, SpeedKind.INDICATED, band.unit) if math.isfinite(highest) else None
    end = top if upper is None else upper
    if lower is None or central is None or margin is None or end is None:
        return Margin(vne, lower, margin, None, False, reduced, False)
    half = max(central - lower, Speed((end - lower).value / 2.0, end.kind, end.unit))
    resolved = upper is not None and abs(margin.value) >= half.value
    return Margin(vne, lower, margin, half, upper is None, reduced, resolved)
