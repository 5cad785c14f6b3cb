"""A live panel of the invented 2T, everything it opens closed again, and the path a browser's messages take."""

from __future__ import annotations

import shutil
from collections.abc import Callable, Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from ipywidgets.widgets import widget as models

from briefkit.aircraft.load import load_aircraft
from briefkit.aircraft.model import Aircraft
from briefkit.envelope.condition import Condition
from briefkit.session.deck import Deck, load_deck
from briefkit.widgets.live import LiveCondition
from briefkit.widgets.what_if import WhatIf


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


@pytest.fixture
def operator(tmp_path: Path, examples: Path) -> Path:
    """The operator folder of the examples, to be written to."""
    folder = tmp_path / "operator"
    shutil.copytree(examples, folder, ignore=shutil.ignore_patterns(".*", "*.html", "*.png", "session_logs"))
    return folder


@pytest.fixture(scope="package")
def read_deck(examples: Path) -> Deck:
    """The example's deck, read once: reading holds every case against the tool."""
    return load_deck(examples / "vellmark-2t", load_aircraft(examples / "aircraft" / "pelquill-2t.toml"))


@pytest.fixture
def deck(operator: Path, read_deck: Deck) -> Deck:
    """The same as if read in a folder of the test's own."""
    return replace(read_deck, folder=operator / "vellmark-2t", operator=operator)


@pytest.fixture
def panel(deck: Deck) -> Iterator[WhatIf]:
    made = WhatIf(deck)
    made._clock = iter(range(0, 100_000, 10)).__next__  # no key is ever held down
    yield made
    made.close()


@pytest.fixture
def press() -> Callable[[Any], None]:
    """Press a button as the front end does: a comm message."""

    def send(button: Any) -> None:
        button._handle_msg({"content": {"data": {"method": "custom", "content": {"event": "click"}}}, "buffers": []})

    return send
