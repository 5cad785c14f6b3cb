"""How far the rotor model lies from published measurements, as the analysis page prints it.

Recomputed by tests/physics/test_published_sides.py, which fails where a figure here is not what the model gives now.
Nothing in the model is fitted to any of them; a residual is model less measurement, and the unsafe side is the one on
which the model would put the onset of stall later than it is.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

from briefkit import units


@dataclass(frozen=True)
class Residual:
    """Lowest and highest residual over a published series, in `unit`; `unsafe` is "above" or "below" zero."""

    what: str
    source: str
    low: float
    high: float
    unit: str
    decimals: int
    unsafe: str

    @property
    def text(self) -> str:
        """ "hover thrust at a given pitch −9.0 to +4.7 % (NACA TN 2474; above zero is the unsafe side)"."""
        ends = (_signed(self.low, self.decimals), _signed(self.high, self.decimals))
        return f"{self.what} {ends[0]} to {ends[1]}{self.unit} ({self.source}; {self.unsafe} zero is the unsafe side)"


PUBLISHED: Final = (
    Residual("hover thrust at a given pitch", "NACA TN 2474, four runs", -9.0, 4.7, "\u00a0%", 1, "above"),
    Residual("thrust in autorotation", "NACA TR 487, to advance ratio 0.3", -5.1, -3.8, "\u00a0%", 1, "above"),
    Residual("flapping to the rear", "NACA TR 487, to advance ratio 0.4", -0.42, 0.16, "°", 2, "below"),
)


def published_line() -> str:
    """The residuals, worst on either side with its sign, in a sentence."""
    listed = "; ".join(one.text for one in PUBLISHED)
    return f"The rotor model less published measurements, to none of which anything in it is fitted: {listed}."


def _signed(number: float, decimals: int) -> str:
    text = units.show_number(number, decimals)
    return text if text.startswith("\u2212") else f"+{text}"
