"""The places along an axis that a drawn line needs so that nothing lies above what the manual's chart says there.

A line joined through evenly spaced answers cuts the corners at the chart's entries; under "next lower VNE", and at a
band of mass, VNE steps down at an entry, and the join would lie above it for a whole step.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Final

import numpy as np
from numpy.typing import NDArray

from briefkit.aircraft.chart import Axis, ReadingRule, VneChart

Floats = NDArray[np.float64]

_HAIR: Final = 1e-6  # of the axis: far too little to see, and a thousand times what the chart takes for the same entry
_CUTS, _ROUNDS = 5, 2  # a step between two places a sixtieth of the axis apart is found to a 25th of that


def with_entries(chart: VneChart, axis: Axis, oat: float, values: Floats) -> Floats:
    """`values` [SI], rising, with the chart's entries between their ends; where it steps at them also a hair beside."""
    nodes = chart.node_heights(oat) if axis is Axis.HEIGHT else np.array(chart.axes[axis])
    if stepped(chart, axis):
        hair = _HAIR * (values[-1] - values[0])
        nodes = np.concatenate([nodes - hair, nodes, nodes + hair])
    return np.union1d(values, nodes[(nodes > values[0]) & (nodes < values[-1])])


def steps(chart: VneChart) -> bool:
    """Whether VNE steps anywhere on the chart, and with it every answer read there."""
    return any(stepped(chart, axis) for axis in Axis)


def closer(values: Floats, lines: Callable[[Floats], Floats], jump: float) -> Floats:
    """`values` with more between two where a line, (line, value), jumps: until each step is too short to see."""
    found, least = lines(values), 4.0 * _HAIR * (values[-1] - values[0])
    for _ in range(_ROUNDS):
        with np.errstate(invalid="ignore"):
            far = (np.abs(np.diff(found, axis=1)) > jump).any(axis=0) & (np.diff(values) > least)
        if not far.any():
            break
        shares = np.arange(1, _CUTS) / _CUTS
        between = (values[:-1][far, None] + np.diff(values)[far, None] * shares).ravel()
        together = np.concatenate([values, between])
        order = np.argsort(together)
        values, found = together[order], np.concatenate([found, lines(between)], axis=1)[:, order]
    return values


def stepped(chart: VneChart, axis: Axis) -> bool:
    """Whether VNE steps at the chart's entries along one axis: between two of them the lower holds."""
    if not chart.axes[axis]:
        return False
    return (chart.bands and axis is Axis.MASS) or (
        chart.reading is ReadingRule.NEXT_LOWER and axis not in chart.straight
    )
