"""One number of the live condition: its name, a slider, and a box that takes the number as one would type it."""

from __future__ import annotations

import math
from typing import Final

import ipywidgets as w
import numpy as np

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope import region
from briefkit.envelope.condition import Condition
from briefkit.errors import ReadingError
from briefkit.physics import atmosphere
from briefkit.reading.quantity import spelling
from briefkit.widgets.words import Dial, text_of

# The box stands beside it where there is room, else under it.
SLIDER: Final = {"flex": "1 1 300px", "max_width": "440px", "width": "auto"}


class Control(w.HBox):  # type: ignore[misc]  # ipywidgets carries no types
    """A slider over the permitted range and a box; both only ask, the live condition decides.

    Neither clamps: the box takes any text, and the slider's ends are the permitted ones. The front end rounds a slider
    to its own grid when it draws it, and sends that back as if a hand had moved it: 1,763.7 lb would silently become
    1,764. So the grid is laid through the number shown, and a move of less than a step is not taken for a hand's.
    """

    def __init__(self, aircraft: Aircraft, dial: Dial, low: float, high: float) -> None:
        """`low` and `high` are the slider's ends in the dial's unit; they may be the same (the dial then stands)."""
        self.dial, self._aircraft = dial, aircraft
        self.low, self.high = low, high
        self.slider = w.FloatSlider(
            value=low, min=low, max=high, step=dial.step, readout=False, disabled=not low < high,
            description=dial.name, style={"description_width": "160px"},
            layout=SLIDER,
        )  # fmt: skip
        self.box = named_box(dial.name, "120px")
        self.box.tooltip = f"{dial.name}, {text_of(dial, low, aircraft)} to {text_of(dial, high, aircraft)}"
        super().__init__([self.slider, self.box], layout={"flex_flow": "row wrap"})

    def show(self, number: float) -> None:
        """Set both to a number in the dial's unit."""
        step = self.dial.step
        offset = (number - self.low) % step
        start = self.low if min(offset, step - offset) < 1e-6 * step else self.low + offset
        with self.slider.hold_sync():
            # The ends keep round the number, so that the slider can never show another one than is used.
            self.slider.min, self.slider.max = round(min(start, number), 6), round(max(self.high, number), 6)
            self.slider.value = round(number, 6)
        self.box.value = typed_text(self.dial, number, self._aircraft)

    def slid(self, number: float, now: float) -> float | None:
        """What a slider moved to `number` asks for, whole steps from `now`'s side; None where no hand moved it."""
        step = self.dial.step
        if abs(number - now) < 0.51 * step:
            return None
        if number >= self.high - 1e-6 * step:
            return self.high
        whole = math.floor(number / step + 1e-6) if number > now else math.ceil(number / step - 1e-6)
        return min(max(whole * step, self.low), self.high)

    def read(self, text: str) -> float:
        """Typed text to a number in the dial's unit: "2,006 lb", or "2,006" alone. Raises `ReadingError`."""
        return read_number(self.dial, text)


def named_box(name: str, width: str) -> w.Text:
    """A box whose name stands beside it already: a screen reader hears it, nobody sees it twice."""
    made = w.Text(description=name, continuous_update=False, layout={"width": width, "flex": "0 0 auto"})
    made.add_class("named-box")
    return made


def asked(condition: Condition, dial: Dial, number: float) -> Condition:
    """The condition with one dial at a number in its unit; raises as `Condition` does."""
    if dial.field == "load_factor":
        return condition.with_(bank=f"{number:.6f} deg".replace("-", "\u2212"))
    return condition.changed(**{dial.field: units.to_si(number, dial.quantity, dial.unit)})


def typed_text(dial: Dial, number: float, aircraft: Aircraft) -> str:
    """The number as one would type it: plain spaces."""
    return text_of(dial, number, aircraft).replace("\u00a0", " ")


def read_number(dial: Dial, text: str) -> float:
    """A number with one of its quantity's units, or bare in the dial's own; the speed's kind may stand behind it."""
    typed = text.replace("\u00a0", " ").strip()
    if dial.quantity == "speed":
        typed = typed.replace("KIAS", "kt").removesuffix(" IAS")
    try:
        value = units.read(typed, dial.quantity)
    except ReadingError as error:
        if not typed[-1:].isdigit():
            raise _hinted(error, typed, dial) from None
        bare = f"{typed} {dial.unit}"
        try:
            value = units.read(bare, dial.quantity)
        except ReadingError as again:
            raise _hinted(again, bare, dial) from None
    return float(units.from_si(value, dial.quantity, dial.unit))


def _hinted(error: ReadingError, typed: str, dial: Dial) -> ReadingError:
    """The error with what a typed file is told of the same slip, so that the box says no less."""
    return ReadingError(error.read, error.permitted, spelling(typed, dial.quantity) or error.remedy)


def ranges(aircraft: Aircraft) -> dict[str, tuple[float, float]]:
    """The ends of each slider in the dial's unit, by field: the manual's limits and the chart's axes."""
    limits, chart, shown = aircraft.limits, aircraft.vne, aircraft.units
    coldest, hottest = region.temperature_range(aircraft)
    hottest = min(hottest, units.read("55 degC", "temperature"))  # the hottest a condition may state
    low_k, high_k = limits.rotor_on
    foot = atmosphere.LOWEST if chart.density_altitude else chart.heights[0]
    top = region.highest_altitude(aircraft)
    fastest = float(np.nanmax(chart.speeds))
    if aircraft.calibration.in_manual:
        fastest = min(1.25 * fastest, aircraft.calibration.highest_indicated)
    bank = limits.max_bank.value if limits.max_bank is not None else units.read("60 deg", "angle")

    def ends(quantity: str, unit: str, low: float, high: float) -> tuple[float, float]:
        first, last = (round(float(units.from_si(end, quantity, unit)), 6) for end in (low, high))
        return first, last

    return {
        "mass": ends("mass", shown.mass, limits.min_mass.value, limits.max_mass.value),
        "pressure_altitude": ends("height", shown.height, foot, top),
        "oat": ends("temperature", "°C", coldest, hottest),
        "ias": ends("speed", shown.speed, aircraft.calibration.lowest_indicated, fastest),
        "load_factor": ends("angle", "°", 0.0, bank),
        "rotor_speed": ends("ratio", "%", low_k.value, high_k.value),
    }
