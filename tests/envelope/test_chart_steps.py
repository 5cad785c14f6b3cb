"""What is drawn between two answers: nothing above the manual's chart, whatever its rule and whatever the axis."""

from __future__ import annotations

from dataclasses import replace
from functools import partial

import numpy as np
import pytest

from briefkit import units
from briefkit.aircraft.chart import ReadingRule, VneChart
from briefkit.envelope import boundary as module
from briefkit.envelope.boundary import boundary
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.equivalent import equivalent_vnes
from briefkit.envelope.partings import partings

HERE = Condition(mass="1,750 lb", pressure_altitude="5,000 ft", oat="15 degC")
FT, KT, LB, C0 = units.FOOT, units.KNOT, units.POUND, units.ZERO_CELSIUS
LOWER, BETWEEN = ReadingRule.NEXT_LOWER, ReadingRule.INTERPOLATE
HEIGHTS = tuple(h * FT for h in (0.0, 2100.0, 4000.0, 6000.0, 8150.0, 10000.0))
COLUMN = np.array([112.0, 107.0, 97.0, 88.0, 79.0, 69.0])
AXES = {"pressure altitude": ("pressure_altitude", "height", "ft"), "mass": ("mass", "mass", "lb"),
        "rotor speed": ("rotor_speed", "ratio", "%"), "bank": (None, "angle", "deg")}  # fmt: skip
made = partial(VneChart, heights=HEIGHTS, source="invented manual 2-4", rows=(), covers_temperatures="2-4")


def by_temperature(reading):
    cells = COLUMN[:, None] + np.array([4.0, 0.0, -9.0])
    return made(temperatures=(C0 - 20.0, C0 + 12.0, C0 + 40.0), masses=(), speeds=cells[:, :, None, None] * KT,
                reading=reading)  # fmt: skip


def by_mass(reading, **more):
    cells = COLUMN[:, None] + np.array([6.0, 0.0, -12.0])
    masses = tuple(m * LB for m in (1301.0, 1611.0, 2006.0))
    return made(temperatures=(), masses=masses, speeds=cells[:, None, :, None] * KT, reading=reading, **more)


def by_rotor_speed(reading):
    cells = COLUMN[:, None] + np.array([-10.0, -2.0, 1.0])
    return made(temperatures=(), masses=(), rotor_speeds=(0.97, 0.995, 1.02), speeds=cells[:, None, None, :] * KT,
                reading=reading)  # fmt: skip


CHARTS = {
    "temperature, next lower": by_temperature(LOWER),
    "temperature": by_temperature(BETWEEN),
    "mass, next lower": by_mass(LOWER),
    "bands of mass": by_mass(BETWEEN, bands=True, or_less=True),
    "rotor speed, next lower": by_rotor_speed(LOWER),
    "rotor speed": by_rotor_speed(BETWEEN),
    "density altitude, next lower": made(temperatures=(), masses=(), speeds=COLUMN[:, None, None, None] * KT,
                                         reading=LOWER, density_altitude=True),
}  # fmt: skip


@pytest.fixture
def lines_alone(monkeypatch):
    """Without the band: each of these aircraft would need a table of its own."""
    monkeypatch.setattr(module, "with_band", lambda aircraft, condition, chart: chart)


@pytest.mark.parametrize(
    "kind", [pytest.param(kind, marks=[pytest.mark.slow] * (kind == "mass, next lower")) for kind in CHARTS]
)
def test_the_lines_as_drawn_lie_nowhere_above_the_chart(two_t, lines_alone, kind):
    """The straight lines between the points, at two thousand places, against the chart's own reading rule there."""
    aircraft = replace(two_t, vne=CHARTS[kind])
    for against in AXES:
        nowhere_above(aircraft, HERE.with_(rotor_speed="99 %"), against)


def nowhere_above(aircraft, here, against):
    drawn = boundary(aircraft, here, against, banks_deg=(0.0, 25.0))
    places = np.random.default_rng(5).uniform(drawn.x[0], drawn.x[-1], 2000)
    many = Conditions.of(here).repeat(len(places))
    field, quantity, unit = AXES[against]
    if field is not None:
        many = replace(many, **{field: np.asarray(units.to_si(places, quantity, unit))})
    k = many.rotor_speed if aircraft.vne.rotor_speeds else 1.0
    mass = many.mass if aircraft.vne.masses else aircraft.limits.max_mass.value
    chart = aircraft.vne.indicated(many.pressure_altitude, many.oat, mass, k) / KT
    joined = np.interp(places, drawn.x, drawn.vne)
    assert (joined <= chart + 0.01).all()  # drawn to 0.01
    np.testing.assert_allclose(joined, chart, atol=0.02)
    for curve in drawn.equivalent:
        blue = np.interp(places, drawn.x, curve.ias)
        assert (blue[np.isfinite(blue)] <= joined[np.isfinite(blue)] + 1e-9).all()


def test_a_computed_line_steps_where_its_own_reading_does(two_t, lines_alone):
    """Under "next lower VNE" at 30 degrees: no more than 8 ft aside of the single answers."""
    aircraft = replace(two_t, vne=CHARTS["temperature, next lower"])
    here = HERE.with_(oat="12 degC")  # a column of the chart
    drawn = boundary(aircraft, here, banks_deg=(30.0,))
    places = np.random.default_rng(5).uniform(0.0, 9000.0, 300)
    near = places[:, None] + np.array([-8.0, 0.0, 8.0])
    asked = Conditions.of(here.with_(bank="30 deg")).repeat(near.size)
    answers = equivalent_vnes(aircraft, replace(asked, pressure_altitude=near.ravel() * FT), upper=False)
    highest = answers.ias.reshape(near.shape).max(axis=1)
    joined = np.interp(places, drawn.x, drawn.equivalent[0].ias)
    both = np.isfinite(joined) & np.isfinite(highest)
    assert both.sum() > 200
    assert (joined <= highest + 0.1)[both].all()


def test_where_a_line_leaves_vne_and_meets_it_again():
    """By hand: under VNE by 1 kt a place, from 10 to 20 and back; a dip of less than half a knot is none."""
    x, vne = np.linspace(0.0, 60.0, 61), np.full(61, 100.0)
    under = np.clip(10.0 - np.abs(x - 20.0), 0.0, None)
    for slower in (False, True):
        leaves, meets = partings(x, vne, vne - under, slower=slower)
        assert (leaves, meets) == (((30.0,), (10.0,)) if slower else ((10.0,), (30.0,)))
    assert partings(x, vne, vne - 0.04 * under, slower=False) == ((), ())
