"""What the boundary figure is drawn from, and what follows before anything is drawn: limits, stretches, ends."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from briefkit.figures import canvas

Floats = NDArray[np.float64]

_SAME: Final = 0.05  # speeds closer than this, everywhere, are one line


@dataclass(frozen=True)
class Here:
    """The present condition on the figure: its place, its speed, and the equivalent VNE there, with their words.

    No speed leaves its ring out, no answer its dot; the line stays.
    """

    x: float
    speed: float | None
    words: str
    answer: float | None = None
    answer_words: str = ""


@dataclass(frozen=True, eq=False)
class Curves:
    """What the figure shows, in the units it is printed in; NaN marks a gap (refused), and a gap stays a gap.

    `x` (n,) rising; `manual` (n,) the manual's VNE; `turns` (name, (n,) speeds) of the equivalent VNE;
    `onset_lower`, `onset_central`, `onset_upper` (m,) the absolute onset band over `onset_x` (m,) rising; where only
    its upper end has no value the band is drawn open, up to the end of the calibration or the top of the figure.
    `parts` are, for each turn, the places where it leaves the manual's VNE, with their words; `ended`, for each turn,
    what ends there ("chart", "line"), from left to right. `ceiling` is where the airspeed calibration ends, with its
    words: nothing lies above it. `foot` says what bounds the figure left and right and `limited` whether that is the
    manual.
    """

    x: ArrayLike
    manual: ArrayLike
    turns: Sequence[tuple[str, ArrayLike]]
    onset_x: ArrayLike
    onset_lower: ArrayLike
    onset_central: ArrayLike
    onset_upper: ArrayLike
    parts: Sequence[Sequence[tuple[float, str]]] = ()
    ended: Sequence[Sequence[str]] = ()
    ceiling: tuple[float, str] | None = None
    foot: str = ""
    limited: bool = False


@dataclass(frozen=True, eq=False)
class Lines:
    """The curves as arrays; `merged` names the turns that are the manual's line."""

    x: Floats
    manual: Floats
    turns: list[tuple[str, Floats]]
    band_x: Floats
    lower: Floats
    central: Floats
    upper: Floats
    ceiling: float
    merged: list[str]

    @classmethod
    def of(cls, curves: Curves) -> Lines:
        manual = np.asarray(curves.manual, dtype=float)
        turns = [(name, np.asarray(speeds, dtype=float)) for name, speeds in curves.turns]
        return cls(
            x=np.asarray(curves.x, dtype=float),
            manual=manual,
            turns=turns,
            band_x=np.asarray(curves.onset_x, dtype=float),
            lower=np.asarray(curves.onset_lower, dtype=float),
            central=np.asarray(curves.onset_central, dtype=float),
            upper=np.asarray(curves.onset_upper, dtype=float),
            ceiling=math.nan if curves.ceiling is None else curves.ceiling[0],
            merged=[name for name, speeds in turns if _same(speeds, manual)],
        )

    @property
    def open(self) -> bool:
        """Whether the band has a lower end somewhere that has no upper one."""
        return bool(np.any(np.isfinite(self.lower) & ~np.isfinite(self.upper)))

    @property
    def above(self) -> bool:
        """Whether some of the band lies above the manual's VNE."""
        upper = np.where(np.isfinite(self.lower) & ~np.isfinite(self.upper), np.inf, self.upper)
        with np.errstate(invalid="ignore"):
            return bool(np.any(upper > np.interp(self.band_x, self.x, self.manual)))

    def stretches(self, top: float) -> list[tuple[Floats, Floats, Floats, Floats]]:
        """(x, lower, upper, VNE) of each stretch of the band, at enough places to cut it along VNE."""
        top = self.ceiling if math.isfinite(self.ceiling) else top
        upper = np.where(np.isfinite(self.upper), self.upper, top)
        found = []
        for across, lower in canvas.finite_runs(self.band_x, self.lower):
            inside = self.x[(self.x > across[0]) & (self.x < across[-1])]  # a step of VNE stays a step
            fine = np.unique(np.concatenate([np.linspace(across[0], across[-1], 121), across, inside]))
            vne = np.interp(fine, self.x, np.where(np.isfinite(self.manual), self.manual, top))
            found.append((fine, np.interp(fine, across, lower), np.interp(fine, self.band_x, upper), vne))
        return found


def limits_of(lines: Lines, here: Here | None, height: float) -> tuple[float, float, float, float]:
    """Round limits round everything shown, with room under the lines and, where the calibration ends, over it."""
    everything = np.concatenate(
        [lines.manual, *(speeds for _, speeds in lines.turns), lines.lower, lines.central, lines.upper, speeds_of(here)]
    )
    finite = everything[np.isfinite(everything)]
    reach = float(np.ptp(finite))
    step = 10.0 if reach <= 120.0 else 20.0
    low = max(math.floor((finite.min() - 0.12 * reach) / step) * step, 0.0)
    high = math.ceil((finite.max() + 0.03 * reach) / step) * step
    if math.isfinite(lines.ceiling) and (lines.open or lines.ceiling < high + 0.1 * reach):
        high = max(high, lines.ceiling)
        room = 20.0  # px over the calibration's end, for its words
        high = max(high, lines.ceiling + (lines.ceiling - low) * room / (height - room))
    return float(lines.x[0]), float(lines.x[-1]), low, high


def stops(speeds: Floats) -> list[int]:
    """Where a line begins or ends inside the figure: the outer ends of its values, if not at the figure's own."""
    finite = np.flatnonzero(np.isfinite(speeds))
    if finite.size == 0:
        return []
    first, last = int(finite[0]), int(finite[-1])
    return ([first] if first > 0 else []) + ([last] if last < speeds.size - 1 else [])


def speeds_of(here: Here | None) -> list[float]:
    return [] if here is None else [speed for speed in (here.speed, here.answer) if speed is not None]


def _same(one: Floats, other: Floats) -> bool:
    gaps = np.array_equal(np.isfinite(one), np.isfinite(other))
    return gaps and bool(np.nanmax(np.abs(one - other), initial=0.0) < _SAME)
