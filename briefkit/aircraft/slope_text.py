"""VNE as a figure and slopes: `base = "112 kt"`, `less = "3 kt per 1,000 ft above 3,000 ft"`.

A slope is a chart of two or three entries, read along straight lines: the base up to where the slope begins, then the
line to the end of what the manual permits.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Final

import numpy as np

from briefkit import units
from briefkit.aircraft import cells
from briefkit.aircraft.cells import AXES, Labels
from briefkit.aircraft.chart import Axis, Floats
from briefkit.errors import ReadingError
from briefkit.reading.document import Document
from briefkit.reading.quantity import quoted

_SLOPE = re.compile(
    r"(?P<amount>[\d.,]+ ?\S+) (?:per|for each|for every) (?P<step>[\d.,]+ ?\S+)(?P<dense>(?: DA| density altitude)?)"
    r" (?P<side>above|below) (?P<start>[+\-\u2212]?[\d.,]+ ?\S+)(?: DA| density altitude)?"
)
_EXAMPLE: Final = '"3 kt per 1,000 ft above 3,000 ft"'


@dataclass(frozen=True)
class Slope:
    """VNE falls by `rate` [m/s per SI unit of the axis] from `start` [SI] upwards, or downwards where `below`."""

    axis: Axis
    unit: str
    density: bool
    rate: float
    start: float
    below: bool
    text: str


def read_slope(document: Document, place: str, text: str) -> Slope | None:
    """One slope; None with a fault."""
    permitted = f"an airspeed per a step above a value, {_EXAMPLE}; of ft, m, DA, degC, lb, kg or %"
    found = _SLOPE.fullmatch(" ".join(text.split()))
    if found is None:
        document.fault(place, quoted(text), permitted)
        return None
    start = cells.header_of(f"DA {found['start']}" if found["dense"] else found["start"])
    try:
        amount = units.read(found["amount"], "speed")
        axis, unit, density = AXES[start]
        kind = "temperature difference" if axis is Axis.TEMPERATURE else cells.QUANTITY[axis]
        step, step_unit = units.read_with_unit(found["step"], kind)
    except (ReadingError, KeyError):
        document.fault(place, quoted(text), permitted)
        return None
    if step_unit != unit or step <= 0.0 or amount <= 0.0:
        document.fault(place, quoted(text), f"one unit on both sides, steps above zero, {_EXAMPLE}")
        return None
    below = found["side"] == "below"
    if below and axis is not Axis.ROTOR_SPEED:
        document.fault(place, quoted(text), "slopes above a value; below one for rotor speeds only")
        return None
    value = units.read(found["start"], cells.QUANTITY[axis])
    return Slope(axis, unit, density, amount / step, value, below, text)


def slope_axes(slopes: list[Slope], ends: dict[Axis, tuple[float, float]]) -> tuple[tuple[Labels, ...], Floats]:
    """Axes from the ends of what is permitted [SI] and the starts of the slopes, and what is taken off [m/s] there.

    Below a rising slope the base holds for anything less. A start outside the ends adds no entry of its own.
    """
    axes, lost = [], []
    for axis in dict.fromkeys(slope.axis for slope in slopes):
        mine = [slope for slope in slopes if slope.axis is axis]
        low, high = ends[axis]
        nodes = np.array(sorted({low, high, *(slope.start for slope in mine if low < slope.start < high)}))
        off = np.zeros(len(nodes))
        for slope in mine:
            beyond = slope.start - nodes if slope.below else nodes - slope.start
            off += slope.rate * np.maximum(beyond, 0.0)
        or_less = axis is Axis.MASS and all(slope.start >= low for slope in mine)
        texts = tuple(units.show(float(node), cells.QUANTITY[axis], mine[0].unit) for node in nodes)
        axes.append(Labels(axis, mine[0].unit, mine[0].density, tuple(map(float, nodes)), texts, or_less))
        lost.append(off)
    total = np.zeros(tuple(len(off) for off in lost))
    for place, off in enumerate(lost):
        total = total + off.reshape([-1 if at == place else 1 for at in range(len(lost))])
    return tuple(axes), total
