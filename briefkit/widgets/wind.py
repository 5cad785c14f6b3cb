"""The relative wind of a disc map: from which side, how fast, in words, and the controls that turn it."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from html import escape
from typing import Any, Final

import ipywidgets as w

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope.wind import fastest_wind
from briefkit.errors import ReadingError
from briefkit.widgets.controls import SLIDER, named_box
from briefkit.widgets.exhibit import guarded

STEP_DEG: Final = 15.0
_FROM: Final = ("ahead", "the front right", "the right", "the rear right", "behind", "the rear left", "the left",
                "the front left")  # fmt: skip
_OVER: Final = ("nose", "front right", "right side", "rear right", "tail", "rear left", "left side", "front left")
_TIE: Final = "\u00a0"


@dataclass(frozen=True)
class Wind:
    """Where the relative wind comes from, degrees clockwise from the nose seen from above (0 up to 360), and its true
    speed [m/s]; without a speed it is the condition's own airspeed."""

    bearing_deg: float = 0.0
    speed: float | None = None

    @property
    def as_flown(self) -> bool:
        """Plain forward flight at the condition's own airspeed."""
        return self.bearing_deg == 0.0 and self.speed is None

    @property
    def bearing(self) -> float:
        """The same in radians."""
        return math.radians(self.bearing_deg)

    def turn(self, rotation: int) -> float:
        """By how much azimuth [rad] the advancing side is turned from where it is in forward flight."""
        return -rotation * self.bearing

    def words(self, aircraft: Aircraft, speed: float) -> str:
        """ "20 kt true from the right, 90° from the nose"; `speed` [m/s] is what it blows at."""
        unit = aircraft.units.speed
        shown = f"{units.show_number(float(units.from_si(speed, 'speed', unit)))}{_TIE}{unit} true"
        if speed == 0.0:
            return f"{shown}, still air"
        side = f"{shown} from {_FROM[_eighth(self.bearing_deg)]}"
        return side if self.bearing_deg == 0.0 else f"{side}, {_degrees(self.bearing_deg)} clockwise from the nose"

    def over(self, azimuth: float, rotation: int) -> str:
        """What of the aircraft lies under an azimuth [rad]: "nose", "right side"."""
        return _OVER[_eighth(180.0 - rotation * math.degrees(azimuth))]


def read_wind(aircraft: Aircraft, wind_from: str, wind: str) -> Wind:
    """The wind as typed: "90 deg" clockwise from the nose, and "17 kt" true or nothing for the condition's airspeed.

    Raises `ReadingError` outside -180 to 360 degrees, below zero, or above `fastest_wind`.
    """
    bearing = round(math.degrees(units.read(wind_from, "angle")), 6)
    if not -180.0 <= bearing <= 360.0:
        raise ReadingError(wind_from, "-180 to 360 deg, clockwise from the nose")
    bearing = bearing % 360.0
    if not wind.strip():
        return Wind(bearing)
    speed, unit = units.read(wind, "speed"), aircraft.units.speed
    fastest = fastest_wind(aircraft)
    if not 0.0 <= speed <= fastest:
        end = units.show_number(units.round_down(float(units.from_si(fastest, "speed", unit))))
        raise ReadingError(wind, f"0 to {end} {unit} true: the chart's fastest entry in the thinnest air it permits")
    return Wind(bearing, speed)


class WindControl(w.VBox):  # type: ignore[misc]  # ipywidgets carries no types
    """A slider and two boxes under a disc map that follows: each asks for another wind, and what is refused is said.

    `asked` is called with the new wind; what it raises is said too, and the controls go back to `shown`.
    """

    def __init__(self, aircraft: Aircraft, wind: Wind, asked: Callable[[Wind], None]) -> None:
        self._aircraft, self._asked, self._wind, self._busy = aircraft, asked, wind, False
        unit = aircraft.units.speed
        wide = {"description_width": "160px"}
        self.slider = w.FloatSlider(
            min=0.0, max=360.0 - STEP_DEG, step=STEP_DEG, readout=False, continuous_update=True,
            description="Relative wind from", style=wide, layout=SLIDER,
        )  # fmt: skip
        self.slider.tooltip = "Relative wind from, degrees clockwise from the nose"
        self.bearing = named_box("Relative wind from", "120px")
        self.bearing.tooltip = "Relative wind from, degrees clockwise from the nose: 0° ahead, 90° right, 180° behind"
        self.speed = w.Text(
            description=f"Relative wind, {unit} true", placeholder="as the airspeed", continuous_update=False,
            style=wide, layout={"width": "320px"},
        )  # fmt: skip
        self.speed.tooltip = f"Relative wind in {unit} true; empty: the condition's airspeed"
        self.word = w.HTML()
        row = w.HBox([self.slider, self.bearing], layout={"flex_flow": "row wrap"})
        super().__init__([row, self.speed, self.word])
        self.slider.observe(guarded(self._refuse, self._slide), "value")
        for box in (self.bearing, self.speed):
            box.observe(guarded(self._refuse, self._type), "value")
        self._show()

    def _slide(self, change: Any) -> None:
        if not self._busy:
            self._ask(Wind(change["new"] % 360.0, self._wind.speed))

    def _type(self, _: Any) -> None:
        if self._busy:
            return
        unit = self._aircraft.units.speed
        bearing, speed = self.bearing.value.strip(), self.speed.value.strip()
        self._ask(read_wind(
            self._aircraft,
            f"{bearing} deg" if bearing[-1:].isdigit() else bearing,
            f"{speed} {unit}" if speed[-1:].isdigit() else speed,
        ))  # fmt: skip

    def _ask(self, wind: Wind) -> None:
        self._asked(wind)
        self._wind = wind
        self._show()

    def _refuse(self, why: str) -> None:
        self._show()
        self.word.value = f"<p class='word'>Refused: {escape(why)}. The wind stays as it is.</p>"

    def _show(self) -> None:
        wind, self._busy = self._wind, True
        try:
            # The front end rounds a slider to its grid and sends that back as a hand's move: the grid goes through it.
            with self.slider.hold_sync():
                self.slider.min = wind.bearing_deg % STEP_DEG
                self.slider.max = max(360.0 - STEP_DEG, wind.bearing_deg)
                self.slider.value = wind.bearing_deg
            self.bearing.value = _degrees(wind.bearing_deg)
            self.speed.value = _typed(self._aircraft, wind.speed)
        finally:
            self._busy = False
        self.word.value = ""


def _typed(aircraft: Aircraft, speed: float | None) -> str:
    if speed is None:
        return ""
    unit = aircraft.units.speed
    return f"{float(units.from_si(speed, 'speed', unit)):.4g} {unit}"


def _eighth(bearing_deg: float) -> int:
    return math.floor(bearing_deg / 45.0 + 0.5) % 8


def _degrees(bearing_deg: float) -> str:
    return f"{bearing_deg:.4g}°"
