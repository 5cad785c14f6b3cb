"""What a chart says of itself: sound charts collapse on one curve, a slip of the pen stands out."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from briefkit import units
from briefkit.envelope.chart_shape import Shape, _residuals, chart_shape
from briefkit.physics import airspeed, atmosphere

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
    assert shape.index[worst].tolist() == [row, column, 0, 0]
    assert np.sign(shape.residual[worst]) == np.sign(knots)


def test_a_cold_edge_is_told_apart(two_t):
    # A chart capped in the cold by tip Mach number, as the invented clockwise twin's: level or falling to the left.
    speeds = two_t.vne.speeds.copy()
    speeds[:2, 0] = 100.0 * KT
    shape = chart_shape(replace(two_t, vne=replace(two_t.vne, speeds=speeds)))
    cold = shape.shape == Shape.COLD
    assert {(0, 0), (1, 0)} <= {(r, c) for r, c, *_ in shape.index[cold].tolist()}
    assert shape.findings.size == 0


def test_a_flat_chart_has_no_curve(two_t):
    speeds = np.full_like(two_t.vne.speeds, 100.0 * KT)
    shape = chart_shape(replace(two_t, vne=replace(two_t.vne, speeds=speeds)))
    assert np.isnan(shape.residual).all()
    assert set(shape.shape) == {Shape.FLAT}


def three_variables(mixed: float = 0.0):
    """Height by temperature by mass, made from one curve of loading alone: V = 75 m/s x sqrt(610 / loading), floored to
    whole knots as a manual prints it; `mixed` adds what does not go with loading, so much a kilogram.
    """

    def made(aircraft):
        heights, oats = np.arange(0.0, 3001.0, 500.0), units.ZERO_CELSIUS + np.array([-20.0, 0.0, 20.0, 40.0])
        masses = aircraft.limits.max_mass.value * np.array([0.7, 0.85, 1.0])
        height, oat, mass = np.meshgrid(heights, oats, masses, indexing="ij")
        pressure = atmosphere.pressure_at(height.ravel()).reshape(height.shape)
        true = 75.0 * np.sqrt(610.0 / (mass / atmosphere.density(pressure, oat))) - mixed * (mass - masses[1])
        calibrated = airspeed.calibrated_from_true(true, pressure, oat)
        speeds = (np.floor(calibrated / KT) * KT)[..., None]
        chart = replace(
            aircraft.vne, heights=tuple(heights), temperatures=tuple(oats), masses=tuple(masses), speeds=speeds
        )
        none = replace(aircraft.calibration, indicated=(), calibrated=())
        return replace(aircraft, vne=chart, calibration=none)

    return made


def test_a_chart_of_three_variables_collapses_too(two_t):
    made = three_variables()(two_t)
    shape = chart_shape(made)
    assert shape.index.shape == (7 * 4 * 3, 4)
    assert np.nanmax(np.abs(shape.residual)) < 1.2 * KT  # whole knots indicated, and nothing else
    for place in ((3, 2, 1, 0), (5, 1, 2, 0), (1, 3, 0, 0)):
        speeds = made.vne.speeds.copy()
        speeds[place] += 6.0 * KT
        found = chart_shape(replace(made, vne=replace(made.vne, speeds=speeds)))
        assert found.index[found.findings].tolist() == [list(place)]
        assert found.collapses


def test_a_chart_that_does_not_go_with_loading_is_told_as_a_whole(two_t):
    shape = chart_shape(three_variables(0.08)(two_t))
    assert not shape.collapses
    assert chart_shape(two_t).collapses


def test_a_low_cell_beside_the_plateau_is_no_cold_edge(two_t):
    """112, 112, 107 typed 89, 99: what is lower than its cold neighbour falls with something else than the cold."""
    shape = chart_shape(spoiled(two_t, 1, 2, -18.0))
    assert shape.index[shape.findings].tolist() == [[1, 2, 0, 0]]
    assert not np.any(shape.shape == Shape.COLD)


def test_one_cell_that_pulls_the_curve_is_named_alone():
    """By construction: nine cells on one curve of loading, the first 20 kt off and its only near neighbour not."""
    loading = np.array([470.0, 480.0, 650.0, 690.0, 710.0, 760.0, 840.0, 890.0, 940.0])
    vne = 42.0 * np.sqrt(850.0 / loading)
    vne[0] += 20.0 * KT
    off = np.abs(_residuals(loading, vne)) > 2.0 * KT
    assert np.nonzero(off)[0].tolist() == [0]
