"""The three invented demonstration rotors, and the reader of the published tables."""

from __future__ import annotations

import csv
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from briefkit.physics.flapping import hinge_flap_frequency
from briefkit.physics.rotor import Rotor, State

REFERENCE = Path(__file__).parents[1] / "reference"
GRAVITY = 9.80665

PELQUILL_2T = Rotor(
    blades=2,
    radius=4.45,
    chord=0.225,
    twist=np.radians(-7.0),
    root_cutout=0.12,
    flap_inertia=111.0,
    hub="teetering",
    tip_speed=452.0 * np.pi / 30.0 * 4.45,
    drag_area=0.62,
)
ORMBRAE_3F = Rotor(
    blades=3,
    radius=5.60,
    chord=0.345,
    twist=np.radians(-10.0),
    root_cutout=0.18,
    flap_inertia=340.0,
    hub="articulated",
    tip_speed=374.0 * np.pi / 30.0 * 5.60,
    drag_area=1.15,
    hinge_offset=0.035,
    flap_frequency=float(hinge_flap_frequency(0.035)),
)
KVILLARN_4H = Rotor(
    blades=4,
    radius=5.85,
    chord=0.340,
    twist=np.radians(-9.0),
    root_cutout=0.20,
    flap_inertia=437.0,
    hub="hingeless",
    tip_speed=356.0 * np.pi / 30.0 * 5.85,
    drag_area=1.45,
    hinge_offset=0.123,
    flap_frequency=1.10,
    rotation=-1,
)
ROTORS = {"2T": PELQUILL_2T, "3F": ORMBRAE_3F, "4H": KVILLARN_4H}
MASS = {"2T": (590.0, 910.0), "3F": (1290.0, 2380.0), "4H": (2010.0, 3350.0)}  # kg, least and most

StateOf = Callable[..., State]


@pytest.fixture(scope="session")
def rotors() -> dict[str, Rotor]:
    return ROTORS


@pytest.fixture(scope="session")
def masses() -> dict[str, tuple[float, float]]:
    """Least and most mass [kg] by rotor."""
    return MASS


@pytest.fixture(scope="session", params=list(ROTORS))
def name(request: pytest.FixtureRequest) -> str:
    """Each of the three rotors in turn."""
    return str(request.param)


@pytest.fixture(scope="session")
def rotor(name: str) -> Rotor:
    return ROTORS[name]


@pytest.fixture(scope="session")
def mass(name: str) -> tuple[float, float]:
    """Least and most mass [kg] of the rotor in turn."""
    return MASS[name]


@pytest.fixture(scope="session")
def state_of() -> StateOf:
    """A state at full rotor speed, sea level standard unless told otherwise."""

    def make(
        rotor: Rotor,
        *,
        speed: object,
        mass: object,
        load_factor: object = 1.0,
        density: object = 1.225,
        sound_speed: object = 340.294,
        rotor_speed: object = 1.0,
        **rest: object,
    ) -> State:
        thrust_weight = np.asarray(load_factor) * np.asarray(mass) * GRAVITY
        tip_speed = np.asarray(rotor_speed) * rotor.tip_speed
        return State(density, sound_speed, tip_speed, speed, thrust_weight, **rest)  # type: ignore[arg-type]

    return make


def read_reference(file: str) -> list[dict[str, str]]:
    """Rows of a published table in tests/reference; lines that begin with # say where it is from."""
    lines = [line for line in (REFERENCE / file).read_text(encoding="utf-8").splitlines() if not line.startswith("#")]
    return list(csv.DictReader(lines))


@pytest.fixture(scope="session")
def table() -> Callable[[str], list[dict[str, str]]]:
    return read_reference
