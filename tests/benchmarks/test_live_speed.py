"""Kernel time from a control to new data, for the disc map, the flapping and the boundary together."""

from __future__ import annotations

import time
from itertools import cycle
from pathlib import Path

import numpy as np
import pytest

from briefkit.aircraft.load import load_aircraft
from briefkit.envelope.condition import Condition
from briefkit.envelope.onset_table import onset_table
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


# Every control of the panel; aim 40 ms. Mass and temperature redraw every line, bank the band alone.
MOVES = {
    "ias": (60.0, 61.0, 62.0),
    "load_factor": (10.0, 15.0, 20.0),
    "pressure_altitude": (7000.0, 7500.0, 7900.0),
    "mass": (1700.0, 1720.0, 1750.0),
    "oat": (10.0, 15.0, 18.0),
    "rotor_speed": (98.0, 99.0, 101.0),
}


@pytest.mark.parametrize("field", list(MOVES))
def test_a_slider_move_redraws_every_exhibit(benchmark, panel, field, capsys):
    live, exhibits = panel
    slider = next(control.slider for control in live._controls if control.dial.field == field)
    numbers, processor = cycle(MOVES[field]), []

    def move() -> None:
        start = time.process_time()
        slider.value = next(numbers)
        processor.append(time.process_time() - start)

    benchmark.pedantic(move, rounds=20, warmup_rounds=3)
    assert all(exhibit.fault == "" for exhibit in exhibits)
    with capsys.disabled():
        wall = benchmark.stats.stats.median if benchmark.stats else float("nan")
        print(f"\n{field}: {wall * 1e3:.1f} ms median, processor {np.median(processor[3:]) * 1e3:.1f} ms")


def test_the_first_boundary_of_a_type(benchmark, capsys):
    """The onset table is made once a type: what a crew waits for when the first boundary appears."""
    processor = []

    def first() -> None:
        start = time.process_time()
        table = onset_table(load_aircraft(AIRCRAFT))
        processor.append(time.process_time() - start)
        assert all(np.isfinite(speeds).all() for speeds in table.speeds)

    benchmark.pedantic(first, rounds=3)
    with capsys.disabled():
        print(f"\nonset table: processor {min(processor):.2f} s at best")


def test_the_stills_of_three_exhibits(benchmark, panel):
    _, exhibits = panel
    benchmark(lambda: [still(exhibit) for exhibit in exhibits])
