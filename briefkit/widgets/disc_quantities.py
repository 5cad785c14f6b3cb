"""What else a disc map may show: Mach number, angle of attack, angle over stall, each finite and with its own steps."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Final

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.envelope.solution import Solution
from briefkit.errors import ReadingError
from briefkit.physics.stall import LEAST_SPEED, stall_measures
from briefkit.widgets import words

Floats = NDArray[np.float64]

SPEED: Final = "speed"
MACH: Final = "Mach"
ANGLE: Final = "angle of attack"
OVER_STALL: Final = "angle over stall"
QUANTITIES: Final = (SPEED, MACH, ANGLE, OVER_STALL)
_AZIMUTHS: Final = 72
_RINGS: Final = 36
# Fixed steps, so that a shade means the same at every condition; the end steps stand for what lies beyond them.
LEVELS: Final = {
    MACH: np.arange(0, 11) / 10.0,
    ANGLE: np.arange(-4.0, 17.0, 2.0),
    OVER_STALL: np.arange(-16.0, 5.0, 2.0),
}
UNITS: Final = {MACH: "Mach", ANGLE: "degrees", OVER_STALL: "degrees"}


@dataclass(frozen=True)
class Field:
    """One quantity over the disc: `values` (radii, azimuths) finite, in the printed unit, and what is said of it."""

    radii: Floats
    azimuths: Floats
    values: Floats
    title: str
    caption: str
    table_caption: str
    notes: tuple[str, ...]
    decimals: int
    mark: str

    def along(self, azimuth: float) -> Floats:
        """The values along the blade at an azimuth [rad], linear between the nodes on either side."""
        count = self.azimuths.size
        place = round(azimuth * count / (2.0 * np.pi), 6)
        before = math.floor(place)
        share = place - before
        one, other = self.values[:, before % count], self.values[:, (before + 1) % count]
        return np.asarray((1.0 - share) * one + share * other, dtype=float)

    def shown(self, value: float) -> str:
        """A value as printed: "0.62", "7.4°"."""
        return units.show_number(value, self.decimals) + self.mark


def checked(quantity: str) -> str:
    """The quantity, or a refusal that lists what may be asked."""
    if quantity not in QUANTITIES:
        raise ReadingError(quantity, ", ".join(QUANTITIES))
    return quantity


def field_of(quantity: str, solution: Solution, root: float, turn: float = 0.0) -> Field:
    """The field of one quantity of a solved state; `root` is the root cut-out as a fraction of the radius.

    `turn` [rad] is by how much azimuth the advancing side is turned from 90 degrees (a relative wind not from ahead).
    """
    if quantity == OVER_STALL:
        return _over_stall(solution)
    radii = np.linspace(root, 1.0, _RINGS + 1)
    azimuths = 2.0 * np.pi * np.arange(_AZIMUTHS) / _AZIMUTHS
    flow = solution.trim.elements(radii, azimuths)
    tips = solution.trim.elements(np.array([root, 1.0]), np.array([0.5, 1.5]) * np.pi + turn)
    if quantity == MACH:
        mach, (advancing, retreating) = flow.mach[0], tips.mach[0, -1]
        caption = (
            f"The advancing tip meets Mach {units.show_number(advancing, 2)}, the retreating tip "
            f"{units.show_number(retreating, 2)}."
        )
        if solution.tas == 0.0:
            caption = f"Every tip meets Mach {units.show_number(advancing, 2)}."
        return Field(radii, azimuths, mach, "Mach number at the blades", caption, "Mach number", (), 2, "")
    slow = ~(flow.speed[0] >= LEAST_SPEED * float(np.ravel(solution.trim.state.tip_speed)[0]))
    angle = _within(np.degrees(flow.angle[0]), slow, ANGLE)
    caption = (
        f"The retreating tip stands at {words.angle(solution.tip_angle_deg)}, the advancing tip at "
        f"{words.angle(math.degrees(tips.angle[0, -1, 0]))}. First signs of stall are looked for at 12° on the "
        "retreating tip (NACA WR L-110, TR 840)."
    )
    if solution.tas == 0.0:
        caption = f"Every tip stands at {words.angle(solution.tip_angle_deg)}."
    note = f"{_ends(ANGLE)} {_SLOW}"
    return Field(radii, azimuths, angle, "Angle of attack", caption, "Angle of attack", (note,), 1, "°")


def _over_stall(solution: Solution) -> Field:
    measures = stall_measures(solution.trim, solution.section, (_AZIMUTHS, _RINGS))
    over = np.degrees(measures.over_stall[0])
    excess = float(np.degrees(measures.excess[0]))
    place = f"{units.show_number(100.0 * measures.excess_radius[0])} % radius, azimuth " + words.angle(
        round(float(np.degrees(measures.excess_azimuth[0])))
    ).replace(".0°", "°")
    past = "past" if excess > 0.0 else "short of"
    caption = (
        f"Nearest to stall at {place}: {words.angle(abs(excess))} {past} the stall angle there. "
        f"{units.show_number(100.0 * measures.stalled_share[0])} % of the disc is past it."
    )
    notes = (_whose(solution), f"{_ends(OVER_STALL)} {_SLOW}")
    values = _within(over, np.isnan(over), OVER_STALL)
    return Field(
        measures.radii, measures.azimuths, values, "Angle over stall", caption,
        "Angle of attack less the stall angle", notes, 1, "°",
    )  # fmt: skip


def _whose(solution: Solution) -> str:
    """Whose stall angle it is: the operator's section where the aircraft file names one."""
    section = solution.section
    if section is None:
        return (
            "Held against the stall angle of NACA 0012 at each Mach number: another section stalls elsewhere (common "
            "practice, no source)."
        )
    less = words.angle(math.degrees(section.spread))
    return (
        f"Held against the operator's own section ({section.source}): its angle of maximum lift at each Mach number, "
        f"less its spread of {less}; above Mach {units.show_number(section.highest_mach, 2)}, where its table ends, no "
        "more than NACA 0012's."
    )


_SLOW: Final = (
    f"Where the blade is slower than {100.0 * LEAST_SPEED:.0f} % of the tip speed an angle says little: the first step "
    "is drawn there."
)


def _ends(quantity: str) -> str:
    low, high = (units.show_number(float(LEVELS[quantity][end])) for end in (0, -1))
    return f"The first step stands for {low}° and less, the last for {high}° and more."


def _within(values: Floats, slow: NDArray[np.bool_], quantity: str) -> Floats:
    """Finite values inside the steps: the low end where the blade is too slow for an angle to mean anything."""
    low, high = LEVELS[quantity][[0, -1]]
    return np.asarray(np.where(slow, low, np.clip(np.where(slow, low, values), low, high)), dtype=float)
