"""A live panel of the invented 2T, everything it opens closed again, and the path a browser's messages take."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Any

import pytest
from ipywidgets.widgets import widget as models

from briefkit.aircraft.model import Aircraft
from briefkit.envelope.condition import Condition
from briefkit.widgets.live import LiveCondition


@pytest.fixture
def start() -> Condition:
    """1,800 lb at 8,000 ft, +20 C: VNE 79 KIAS in the invented 2T's manual."""
    return Condition(mass="1,800 lb", pressure_altitude="8,000 ft", oat="20 degC", ias="60 kt")


@pytest.fixture
def live(two_t: Aircraft, start: Condition) -> Iterator[LiveCondition]:
    made = LiveCondition(two_t, start)
    yield made
    for follower in list(made._followers):
        follower.close()
    made.close()


@pytest.fixture(autouse=True)
def nothing_left_open() -> Iterator[None]:
    """A test that leaves models open fails."""
    before = set(models._instances)
    yield
    assert set(models._instances) == before, "models were left open"


@pytest.fixture
def from_browser() -> Callable[[Any, Any], None]:
    """Set a widget's value as the front end does: a comm message, whose errors ipywidgets swallows."""

    def send(widget: Any, value: Any) -> None:
        data = {"method": "update", "state": {"value": value}, "buffer_paths": []}
        widget._handle_msg({"content": {"data": data}, "buffers": []})

    return send


@pytest.fixture
def control(live: LiveCondition) -> Callable[[str], Any]:
    """One number's controls by its field."""
    return lambda field: next(c for c in live._controls if c.dial.field == field)


@pytest.fixture
def models_open() -> Callable[[], int]:
    return lambda: len(models._instances)


@pytest.fixture
def plain() -> Callable[[str], str]:
    """Words with plain spaces: on the page a number and its unit are tied together."""
    return lambda text: text.replace("\u00a0", " ")
