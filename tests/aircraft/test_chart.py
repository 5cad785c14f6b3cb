"""The chart read by the manual's rule, on every axis a chart may have."""

from __future__ import annotations

import ambiance
import numpy as np
import pytest

from briefkit.aircraft.chart import Axis, ReadingRule, VneChart, density_altitude_of, standard_density


def chart(speeds: object, reading: ReadingRule = ReadingRule.INTERPOLATE, **fields: object) -> VneChart:
    """A chart over the axes given among `fields`; the shape of the speeds follows from them."""
    axes: dict[str, tuple[float, ...]] = {
        "heights": (0.0, 1000.0),
        "temperatures": (),
        "masses": (),
        "rotor_speeds": (),
    }
    axes |= {name: fields.pop(name) for name in list(fields) if name in axes}  # type: ignore[misc]
    shape = tuple(max(len(nodes), 1) for nodes in axes.values())
    return VneChart(
        speeds=np.array(speeds, dtype=float).reshape(shape), reading=reading, source="", rows=(), **axes, **fields
    )  # type: ignore[arg-type]


def test_a_shape_that_is_not_that_of_the_axes_is_refused() -> None:
    with pytest.raises(ValueError, match="a chart of shape"):
        VneChart((0.0, 1.0), (), (), np.zeros((2, 2)), ReadingRule.INTERPOLATE, "", ())


def test_rotor_speed_is_an_axis_like_any_other() -> None:
    made = chart([[40.0, 50.0], [30.0, 40.0]], rotor_speeds=(0.97, 1.00))
    assert made.indicated(500.0, 288.0, 900.0, 0.985) == pytest.approx(40.0)
    assert np.isnan(made.indicated(500.0, 288.0, 900.0, 1.01))
    lower = chart([[40.0, 50.0], [30.0, 40.0]], ReadingRule.NEXT_LOWER, rotor_speeds=(0.97, 1.00))
    assert lower.indicated(500.0, 288.0, 900.0, 0.985) == 30.0
    assert lower.indicated(0.0, 288.0, 900.0) == 50.0  # at 100 % by default, and nodes are closed


def test_a_band_is_the_next_heavier_column_whatever_the_rule() -> None:
    made = chart([[60.0, 50.0, 40.0], [50.0, 40.0, 30.0]], masses=(700.0, 800.0, 900.0), bands=True, or_less=True)
    heights = np.zeros(5)
    read = made.indicated(heights, 288.0, np.array([500.0, 700.0, 700.1, 800.0, 900.0]))
    assert read.tolist() == [60.0, 60.0, 50.0, 50.0, 40.0]
    assert made.indicated(500.0, 288.0, 710.0) == pytest.approx(45.0)  # between heights still by the rule
    assert np.isnan(made.indicated(0.0, 288.0, 901.0))


def test_a_mass_below_a_column_that_does_not_say_or_less_is_off_the_chart() -> None:
    made = chart([[60.0, 50.0], [50.0, 40.0]], masses=(700.0, 900.0))
    assert np.isnan(made.indicated(0.0, 288.0, 699.0))
    assert made.lowest_mass == 700.0
    said = chart([[60.0, 50.0], [50.0, 40.0]], masses=(700.0, 900.0), or_less=True)
    assert said.indicated(0.0, 288.0, 100.0) == 60.0
    assert said.lowest_mass == -np.inf


def test_a_straight_axis_is_read_along_its_line_and_the_lower_line_holds() -> None:
    cells = [[60.0, 58.0], [40.0, 30.0]]
    made = chart(cells, ReadingRule.NEXT_LOWER, temperatures=(273.0, 293.0), straight=(Axis.HEIGHT,))
    assert made.indicated(500.0, 283.0, 900.0) == pytest.approx(44.0)  # the warmer line at half way: (58 + 30)/2
    assert made.indicated(500.0, 273.0, 900.0) == pytest.approx(50.0)  # on the colder line: (60 + 40)/2
    plain = chart(cells, ReadingRule.NEXT_LOWER, temperatures=(273.0, 293.0))
    assert plain.indicated(500.0, 283.0, 900.0) == 30.0


def test_a_cap_is_taken_after_reading() -> None:
    made = chart([60.0, 40.0], cap=55.0)
    assert made.indicated(np.array([0.0, 200.0, 500.0]), 288.0, 900.0).tolist() == [55.0, 55.0, 50.0]


@pytest.mark.parametrize("reading", list(ReadingRule))
def test_a_blank_cell_spoils_only_what_leans_on_it(reading: ReadingRule) -> None:
    made = chart([[60.0, 50.0], [50.0, np.nan]], reading, temperatures=(273.0, 293.0))
    assert np.isnan(made.indicated(500.0, 280.0, 900.0))
    assert np.isnan(made.indicated(1000.0, 293.0, 900.0))
    assert made.indicated(0.0, 293.0, 900.0) == 50.0
    assert made.indicated(1000.0, 273.0, 900.0) == 50.0
    assert np.isfinite(made.indicated(500.0, 273.0, 900.0))


def test_density_altitude_rows_are_found_from_pressure_altitude_and_temperature() -> None:
    """Held against `ambiance`, an independent standard atmosphere."""
    heights = np.array([-2000.0, 0.0, 1500.0, 3000.0, 9000.0])
    np.testing.assert_allclose(
        standard_density(heights), ambiance.Atmosphere(heights_geometric(heights)).density, rtol=1e-6
    )
    made = chart([60.0, 30.0], heights=(0.0, 3000.0), density_altitude=True)
    hot = 288.15 - 0.0065 * 1000.0 + 20.0
    pressure = float(ambiance.Atmosphere(heights_geometric(1000.0)).pressure[0])
    density = pressure / (287.05287 * hot)
    nodes = np.linspace(0.0, 3000.0, 3001)
    table = ambiance.Atmosphere(heights_geometric(nodes)).density
    expected = float(np.interp(-density, -table, nodes))
    assert made.indicated(1000.0, hot, 900.0) == pytest.approx(60.0 - 30.0 * expected / 3000.0, abs=1e-4)
    # and back: the row of that density altitude stands at 1,000 m on that day
    back = chart([60.0, 30.0], heights=(0.0, expected), density_altitude=True)
    assert back.node_heights(hot)[1] == pytest.approx(1000.0, abs=0.01)


def heights_geometric(geopotential: object) -> object:
    """`ambiance` takes geometric heights; ISO 2533 equation 8, nominal earth radius 6,356,766 m."""
    h = np.asarray(geopotential, dtype=float)
    return 6356766.0 * h / (6356766.0 - h)


def test_density_altitude_outside_the_atmosphere_is_no_number() -> None:
    found = density_altitude_of(
        np.array([0.0, -2000.0, 12000.0, 11000.0, np.nan]), np.array([288.15, 288, 288, 288, 288])
    )
    assert found[0] == pytest.approx(0.0, abs=1e-6)
    assert np.isnan(found[1:]).all()


def test_rows_of_density_altitude_stand_lower_on_a_warm_day_and_stay_inside_the_atmosphere() -> None:
    made = chart([60.0, 30.0, 20.0], heights=(-5000.0, 1000.0, 3000.0), density_altitude=True)
    cold, warm = made.node_heights(258.15), made.node_heights(303.15)
    assert np.all(warm <= cold + 1e-6)
    assert warm[0] == pytest.approx(-1000.0)
    plain = chart([60.0, 30.0], heights=(0.0, 3000.0))
    assert plain.node_heights(303.15).tolist() == [0.0, 3000.0]


def test_a_point_a_hair_inside_a_cell_takes_its_lowest_corner_and_a_node_is_a_node() -> None:
    made = chart([60.0, 50.0, 40.0], ReadingRule.NEXT_LOWER, heights=(0.0, 1000.0, 2000.0))
    assert made.indicated(np.array([1.0, 999.0]), 288.0, 900.0).tolist() == [50.0, 50.0]
    # 1,000 m typed in feet and converted back differs in the last digit: it is still 1,000 m
    assert made.indicated(np.array([1000.0 * (1 - 1e-12), 1000.0 * (1 + 1e-12)]), 288.0, 900.0).tolist() == [50.0, 50.0]


def test_a_mixed_chart_takes_the_lower_line_however_near_the_other() -> None:
    cells = [[60.0, 58.0], [40.0, 30.0]]
    made = chart(cells, ReadingRule.NEXT_LOWER, temperatures=(273.0, 293.0), straight=(Axis.HEIGHT,))
    assert made.indicated(1000.0, 273.2, 900.0) == 30.0
