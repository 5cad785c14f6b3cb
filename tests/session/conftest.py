"""The invented operator in a folder of its own, its 2T's deck, and a session on it. Do not use for flight."""

from __future__ import annotations

import datetime as dt
import shutil
from pathlib import Path

import pytest

from briefkit.aircraft.load import load_aircraft
from briefkit.aircraft.model import Aircraft
from briefkit.session.deck import Deck, load_deck
from briefkit.session.record import SessionLog

DAY = dt.datetime(2030, 4, 2, 9, 30, 15, tzinfo=dt.UTC)


@pytest.fixture(scope="session")
def three_f_with_load(examples: Path) -> Aircraft:
    """The 3F with a load on the hook: 150 km/h, at most 30 degrees of bank."""
    return load_aircraft(examples / "aircraft" / "ormbrae-3f.toml", "external load")


@pytest.fixture
def operator(tmp_path: Path, examples: Path) -> Path:
    folder = tmp_path / "operator"
    shutil.copytree(examples, folder, ignore=shutil.ignore_patterns(".*", "*.html", "*.png"))
    return folder


@pytest.fixture
def brief(operator: Path) -> Path:
    return operator / "vellmark-2t"


@pytest.fixture(scope="session")
def deck(examples: Path) -> Deck:
    """The example's own deck: the copy in `operator` has the same bytes."""
    return load_deck(examples / "vellmark-2t", load_aircraft(examples / "aircraft" / "pelquill-2t.toml"))


@pytest.fixture
def log(operator: Path, deck: Deck) -> SessionLog:
    return SessionLog(operator / "session_logs" / "one.jsonl", deck, clock=lambda: DAY)
