"""The invented demo world, loaded once. Do not use for flight."""

from __future__ import annotations

from pathlib import Path

import pytest

from briefkit.aircraft.load import load_aircraft
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.operation import Operation, load_operation

EXAMPLES = Path(__file__).parents[1] / "example_briefs"


@pytest.fixture(scope="session")
def examples() -> Path:
    return EXAMPLES


@pytest.fixture(scope="session")
def two_t() -> Aircraft:
    """The invented Pelquill 2T."""
    return load_aircraft(EXAMPLES / "aircraft" / "pelquill-2t.toml")


@pytest.fixture(scope="session")
def operation() -> Operation:
    """The invented Norrabeck Rotor Charter."""
    return load_operation(EXAMPLES)
