"""The manual's other speeds: word for word for the page, the figure for the computing."""

from __future__ import annotations

import math

import pytest

from briefkit.aircraft.manual_speeds import figure
from briefkit.units import KILOMETRE_PER_HOUR, KNOT, Speed, SpeedKind


def entry(**keys: str) -> str:
    given = {"label": "Rough air", "text": "100 KIAS", "applies": "turbulence", "source": "2-7"} | keys
    return "[[manual.speeds]]\n" + "\n".join(f'{key} = "{value}"' for key, value in given.items() if value)


@pytest.mark.parametrize(
    ("text", "speed", "less", "bank"),
    [
        ("100 kt", 100 * KNOT, None, None),
        ("100 KIAS", 100 * KNOT, None, None),
        ("150 km/h IAS", 150 * KILOMETRE_PER_HOUR, None, None),
        ("VNE less 10 kt", None, 10 * KNOT, None),
        ("VNE less 10 kt above 30 deg", None, 10 * KNOT, math.radians(30)),
        ("80 kt above 45 deg", 80 * KNOT, None, math.radians(45)),
    ],
)
def test_a_figure_is_read(text, speed, less, bank):
    found = figure(text)
    assert found is not None
    assert found[0] == (None if speed is None else Speed(speed, SpeedKind.INDICATED))
    assert found[1:] == pytest.approx((less, bank))


@pytest.mark.parametrize(
    "text", ["", "slow down", "VNE less 10", "100", "100 kt in turbulence", "VNE less 10 kt above 30", "VNE"]
)
def test_anything_else_is_no_figure(text):
    assert figure(text) is None


def test_the_4h_speaks_of_rough_air_and_of_bank(file_4h):
    rough, bank = file_4h.load().speeds
    assert (rough.text, rough.applies, rough.speed) == ("100 KIAS", "turbulence", Speed.of(100, "kt"))
    assert (bank.text, bank.applies) == ("VNE less 10 above 30 degrees", "bank")
    assert (bank.speed, bank.less_than_vne, bank.above_bank) == (
        None,
        pytest.approx(10 * KNOT),
        pytest.approx(math.pi / 6),
    )
    assert bank.value == "VNE less 10 kt above 30 deg"


def test_words_without_a_figure_are_words(file_2t):
    (speed,) = file_2t.added(entry(text="Avoid abrupt manoeuvres")).load().speeds
    assert (speed.speed, speed.less_than_vne, speed.above_bank) == (None, None, None)


@pytest.mark.parametrize(
    ("keys", "words"),
    [
        ({"text": "100 KIAS, and VNE less 10 above 30 degrees"}, "add value"),
        ({"value": "a hundred"}, "a figure like"),
        ({"value": "100 km/h"}, "kt, as units.speed says"),
        ({"value": "1,000 kt"}, "such as a manual gives"),
        ({"value": "VNE less 10 kt above 300 deg"}, "such as a manual gives"),
    ],
)
def test_a_figure_the_computing_could_not_use_is_refused(file_2t, keys, words):
    fault = file_2t.added(entry(**keys)).fault()
    assert fault.key == "manual.speeds (entry 1).value"
    assert words in str(fault)
