"""What a chart says of itself: sound charts collapse on one curve, a slip of the pen stands out."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from briefkit import units
from briefkit.envelope.chart_shape import Shape, chart_shape

KT = units.KNOT


def spoiled(aircraft, row, column, knots):
    speeds = aircraft.vne.speeds.copy()
    speeds[row, column] += knots * KT
    return replace(aircraft, vne=replace(aircraft.vne, speeds=speeds))


def test_the_demo_chart_collapses(two_t):
    shape = chart_shape(two_t)
    assert shape.findings.size == 0
    falling = shape.shape == Shape.FALLING
    assert falling.sum() > 12
    assert np.nanmax(np.abs(shape.residual)) < 2.0 * KT


def test_the_structural_plateau_is_flat_and_left_out(two_t):
    shape = chart_shape(two_t)
    flat = shape.shape == Shape.FLAT
    assert flat.sum() == 6  # the cells printed 112 KIAS
    assert np.isnan(shape.residual[flat]).all()


@pytest.mark.parametrize("knots", [-9.0, -5.0, 5.0, 9.0, 27.0])
@pytest.mark.parametrize(("row", "column"), [(3, 2), (4, 1), (2, 3)])
def test_one_wrong_cell_is_found_and_named(two_t, row, column, knots):
    shape = chart_shape(spoiled(two_t, row, column, knots))
    worst = shape.findings[0]
    assert (shape.row[worst], shape.column[worst]) == (row, column)
    assert np.sign(shape.residual[worst]) == np.sign(knots)


def test_a_cold_edge_is_told_apart(two_t):
    # A chart capped in the cold by tip Mach number, as the invented clockwise twin's: level or falling to the left.
    speeds = two_t.vne.speeds.copy()
    speeds[:2, 0] = 100.0 * KT
    shape = chart_shape(replace(two_t, vne=replace(two_t.vne, speeds=speeds)))
    cold = shape.shape == Shape.COLD
    assert {(0, 0), (1, 0)} <= {(int(r), int(c)) for r, c in zip(shape.row[cold], shape.column[cold], strict=True)}
    assert shape.findings.size == 0


def test_a_flat_chart_has_no_curve(two_t):
    speeds = np.full_like(two_t.vne.speeds, 100.0 * KT)
    shape = chart_shape(replace(two_t, vne=replace(two_t.vne, speeds=speeds)))
    assert np.isnan(shape.residual).all()
    assert set(shape.shape) == {Shape.FLAT}
