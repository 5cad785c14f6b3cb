"""The invented demo world, loaded once, and its brief run once. Do not use for flight."""

from __future__ import annotations

import datetime as dt
import os
import pickle
import time
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pytest
from hypothesis import settings

from briefkit.aircraft.load import load_aircraft
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.operation import Operation, load_operation

if TYPE_CHECKING:
    from briefkit.brief.build import Result
    from briefkit.brief.pages import CrewPage
    from briefkit.brief.run import Ran

# The same examples on every machine, and no example fails for being slow on a busy one.
settings.register_profile("briefkit", deadline=None, derandomize=True)
settings.load_profile("briefkit")

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
def exported(tmp_path_factory: pytest.TempPathFactory) -> Exported:
    """Takes some seconds: tests that use it are slow."""

    def make(_: Path) -> Exported:
        from briefkit.brief.export import compose, contents, load_brief
        from briefkit.brief.run import run

        brief = load_brief(EXAMPLES / "vellmark-2t")
        crew, ran = contents(brief, TODAY), run(brief.identity.notebook)
        return Exported(crew, ran, compose(crew, ran, brief.identity.folder))

    return once_a_run(tmp_path_factory, "exported", make)


@pytest.fixture(scope="session")
def built(tmp_path_factory: pytest.TempPathFactory) -> tuple[Result, ...]:
    """The three example briefs with everything that `briefkit build` sets beside their pages."""

    def make(folder: Path) -> tuple[Result, ...]:
        from briefkit.brief.build import build
        from briefkit.session.sheets import deck_pages

        results = build([EXAMPLES], folder / "pages", TODAY, beside=deck_pages)
        assert [result.error for result in results] == ["", "", ""]
        return results

    return once_a_run(tmp_path_factory, "built", make)


def once_a_run(factory: pytest.TempPathFactory, name: str, make: Callable[[Path], Any]) -> Any:
    """What `make` gives, made by the first worker of a run that asks; the others wait for it and read it."""
    base = factory.getbasetemp()
    folder = (base.parent if "PYTEST_XDIST_WORKER" in os.environ else base) / f"once-{name}"
    made, failed = folder / "made", folder / "failed"
    try:
        folder.mkdir()
    except FileExistsError:
        deadline = time.monotonic() + 300.0
        while not made.exists():
            assert not failed.exists(), f"{name} could not be made; see the other worker"
            assert time.monotonic() < deadline, f"{name} was not made in time"
            time.sleep(0.1)
        return pickle.loads(made.read_bytes())
    try:
        value = make(folder)
        (folder / "part").write_bytes(pickle.dumps(value))
        (folder / "part").rename(made)
    except BaseException:
        failed.touch()
        raise
    return value
