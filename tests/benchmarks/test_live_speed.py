"""Kernel time from a control to new data, for the disc map, the flapping and the boundary together."""

from __future__ import annotations

from itertools import cycle
from pathlib import Path

import pytest

from briefkit.aircraft.load import load_aircraft
from briefkit.envelope.condition import Condition
from briefkit.figures.still import still
from briefkit.widgets.disc import DiscMap
from briefkit.widgets.flapping import Flapping
from briefkit.widgets.live import LiveCondition
from briefkit.widgets.stall_boundary import StallBoundary

AIRCRAFT = Path(__file__).parents[2] / "example_briefs" / "aircraft" / "pelquill-2t.toml"


@pytest.fixture
def panel():
    start = Condition(mass="1,800 lb", pressure_altitude="8,000 ft", oat="20 degC", ias="60 kt")
    live = LiveCondition(load_aircraft(AIRCRAFT), start)
    exhibits = [DiscMap(live), Flapping(live), StallBoundary(live)]
    yield live, exhibits
    for exhibit in exhibits:
        exhibit.close()
    live.close()


@pytest.mark.parametrize(
    ("field", "values"), [("ias", (60.0, 61.0, 62.0)), ("load_factor", (10.0, 15.0, 20.0)), ("mass", (1700.0, 1750.0))]
)
def test_a_slider_move_redraws_every_exhibit(benchmark, panel, field, values):
    live, exhibits = panel
    slider = next(control.slider for control in live._controls if control.dial.field == field)
    numbers = cycle(values)

    def move() -> None:
        slider.value = next(numbers)

    benchmark.pedantic(move, rounds=30, warmup_rounds=3)
    assert all(exhibit.fault == "" for exhibit in exhibits)


def test_the_stills_of_three_exhibits(benchmark, panel):
    _, exhibits = panel
    benchmark(lambda: [still(exhibit) for exhibit in exhibits])
