"""How far the rotor model lies from published measurements, as the analysis page prints it.

Recomputed by tests/physics/test_published_sides.py, which fails where a figure here is not what the model gives now.
Nothing in the model is fitted to any of them; a residual is model less measurement, and the unsafe side is the one on
which the model would put the onset of stall later than it is. Every point inside the model's range is in one of them.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import groupby
from typing import Final

from briefkit import units


@dataclass(frozen=True)
class Residual:
    """Lowest and highest residual over `points` of the `of` points of a published series, in `unit`, and `where` on it
    they lie; `unsafe` is "above" or "below" zero.
    """

    what: str
    source: str
    where: str
    points: int
    of: int
    low: float
    high: float
    unit: str
    decimals: int
    unsafe: str

    @property
    def text(self) -> str:
        """ "−9.0 to +4.7 % (11 of 25 points, from 6.4° to 10.4° of pitch)"; one figure where both ends are it."""
        ends = dict.fromkeys(_signed(end, self.decimals) for end in (self.low, self.high))
        return f"{' to '.join(ends)}{self.unit} ({self.points} of {self.of} points, {self.where})"


_HOVER, _TN_2474, _TR_487 = "hover thrust at a given pitch", "NACA TN 2474, four runs", "NACA TR 487"
_PERCENT: Final = "\u00a0%"

PUBLISHED: Final = (
    Residual(_HOVER, _TN_2474, "from 6.4° to 10.4° of pitch", 11, 25, -9.0, 4.7, _PERCENT, 1, "above"),
    Residual(_HOVER, _TN_2474, "at 12.0°, where measured thrust flattens", 1, 25, 12.7, 12.7, _PERCENT, 1, "above"),
    Residual(_HOVER, _TN_2474, "below 6.4°, where thrust is small", 13, 25, -40.0, 90.0, _PERCENT, 0, "above"),
    Residual(_HOVER, "NASA TM 81232", "from 5° to 12°", 9, 9, 26.0, 49.0, _PERCENT, 0, "above"),
    Residual("thrust in autorotation", _TR_487, "to advance ratio 0.4", 3, 5, -9.6, -3.8, _PERCENT, 1, "above"),
    Residual("flapping to the rear", _TR_487, "to advance ratio 0.45", 7, 11, -0.64, 0.16, "°", 2, "below"),
)


def published_lines() -> tuple[str, str, str]:
    """Paragraphs: the residuals in hover, worst on either side with its sign; what they mean; those in flight."""
    quantities = []
    for (what, unsafe), residuals in groupby(PUBLISHED, lambda one: (one.what, one.unsafe)):
        series = (
            f"{source}: {', '.join(one.text for one in ones)}"
            for source, ones in groupby(residuals, lambda one: one.source)
        )
        quantities.append(f"{what.capitalize()} ({unsafe} zero is the unsafe side), {'; '.join(series)}.")
    hover, *flight = quantities
    return (
        f"The rotor model less published measurements, to none of which anything in it is fitted. {hover}",
        "In NASA TM 81232 tip vortices pass close under two broad blades. Strip theory with uniform inflow does not "
        "know them, and overstates the thrust at a given pitch: the model can put the onset of stall later than it "
        "is. So its absolute onset is soft, and no number on page 1 rests on it but what a stated climb takes off, "
        "which only lowers.",
        f"{' '.join(flight)} Left out is what lies at or beyond the model’s end, advance ratio 0.5.",
    )


def _signed(number: float, decimals: int) -> str:
    text = units.show_number(number, decimals)
    return text if text.startswith("\u2212") else f"+{text}"
