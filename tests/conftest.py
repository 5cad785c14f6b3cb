"""The invented demo world, loaded once, and its brief run once. Do not use for flight."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

from briefkit.aircraft.load import load_aircraft
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.operation import Operation, load_operation

if TYPE_CHECKING:
    from briefkit.brief.pages import CrewPage
    from briefkit.brief.run import Ran

# The demo briefs are in force on this day; no test's answer may hang on the clock's.
TODAY = dt.date(2030, 6, 1)
EXAMPLES = Path(__file__).parents[1] / "example_briefs"


@pytest.fixture(scope="session")
def examples() -> Path:
    return EXAMPLES


@pytest.fixture(scope="session")
def today() -> dt.date:
    return TODAY


@pytest.fixture(scope="session")
def two_t() -> Aircraft:
    """The invented Pelquill 2T."""
    return load_aircraft(EXAMPLES / "aircraft" / "pelquill-2t.toml")


@pytest.fixture(scope="session")
def three_f() -> Aircraft:
    """The invented Ormbrae 3F: km/h, metres, a chart over height and mass."""
    return load_aircraft(EXAMPLES / "aircraft" / "ormbrae-3f.toml")


@pytest.fixture(scope="session")
def four_h() -> Aircraft:
    """The invented Kvillarn 4H: clockwise, hingeless, a chart with a cold edge."""
    return load_aircraft(EXAMPLES / "aircraft" / "kvillarn-4h.toml")


@pytest.fixture(scope="session")
def operation() -> Operation:
    """The invented Norrabeck Rotor Charter."""
    return load_operation(EXAMPLES)


@dataclass(frozen=True)
class Exported:
    """The example brief as far as its page: the crew's sheets, what its notebook left, and the page."""

    crew: CrewPage
    ran: Ran
    html: str

    @property
    def pictures(self) -> int:
        """How many drawings were handed to the page: by the notebook and by the crew's sheets."""
        parts = (*self.crew.front, *self.crew.recognition, *self.crew.analysis, *self.crew.control)
        shown = (getattr(block, "html", "") for block in self.ran.blocks)
        return sum(html.count("<svg") for html in (*shown, *(part.figure for part in parts)))


@pytest.fixture(scope="session")
def exported() -> Exported:
    """Takes some seconds: tests that use it are slow."""
    from briefkit.brief.export import compose, contents, load_brief
    from briefkit.brief.run import run

    brief = load_brief(EXAMPLES / "vellmark-2t")
    crew, ran = contents(brief, TODAY), run(brief.identity.notebook)
    return Exported(crew, ran, compose(crew, ran, brief.identity.folder))
