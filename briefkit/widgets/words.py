"""A condition in words, in the units of the type's manual: what stands over an exhibit and in its still."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Final

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope.condition import Condition
from briefkit.errors import BeyondChart, Refusal

_TIE: Final = "\u00a0"  # a number and its unit stay on one line


@dataclass(frozen=True)
class Dial:
    """One number of a condition an instructor can turn: the SI field, what it is called, its quantity and unit."""

    field: str
    name: str
    quantity: str
    unit: str
    step: float


def dials(aircraft: Aircraft) -> tuple[Dial, ...]:
    """The six numbers of a condition, in the units of the type's manual."""
    shown = aircraft.units
    return (
        Dial("mass", "Mass", "mass", shown.mass, 1.0),
        Dial("pressure_altitude", "Pressure altitude", "height", shown.height, 100.0 if shown.height == "ft" else 50.0),
        Dial("oat", "Outside air temperature", "temperature", "°C", 1.0),
        Dial("ias", "Airspeed", "speed", shown.speed, 1.0),
        Dial("load_factor", "Bank", "angle", "°", 1.0),
        Dial("rotor_speed", "Rotor speed", "ratio", "%", 0.5),
    )


def number_of(dial: Dial, condition: Condition) -> float:
    """The number a dial shows; bank in degrees from the load factor. An airspeed not given raises ValueError."""
    if dial.field == "load_factor":
        return math.degrees(condition.bank)
    value = getattr(condition, dial.field)
    if value is None:
        raise ValueError(f"the condition has no {dial.name.lower()}")
    return float(units.from_si(value, dial.quantity, dial.unit))


def text_of(dial: Dial, number: float, aircraft: Aircraft) -> str:
    """A dial's number as printed: whole where it is whole, else one decimal; speeds carry their kind."""
    whole = abs(number - round(number)) < 0.05
    text = units.show_number(round(number) if whole else number, 0 if whole else 1)
    if dial.quantity == "temperature" and number > 0.0 and not text.startswith("0"):
        text = "+" + text
    if dial.quantity == "speed":
        return f"{text}{_TIE}{aircraft.units.speed_label()}"
    return f"{text}°" if dial.unit == "°" else f"{text}{_TIE}{dial.unit}"


def inputs(aircraft: Aircraft, condition: Condition) -> tuple[tuple[str, str], ...]:
    """(name, value) of everything a condition states."""
    pairs = []
    for dial in dials(aircraft):
        if dial.field == "ias" and condition.ias is None:
            continue
        pairs.append((dial.name, text_of(dial, number_of(dial, condition), aircraft)))
    if condition.climb:
        pairs.append(("Climb", units.show(condition.climb, "vertical speed", "ft/min")))
    if condition.mass_spread:
        pairs.append(("Mass spread", units.show(condition.mass_spread, "mass", aircraft.units.mass)))
    if condition.oat_spread:
        pairs.append(("Temperature spread", units.show(condition.oat_spread, "temperature difference", "°C")))
    return tuple(pairs)


_SHORT: Final = {"Mass": "", "Pressure altitude": f"Hp{_TIE}", "Outside air temperature": "", "Airspeed": ""}


def sentence(aircraft: Aircraft, condition: Condition) -> str:
    """The condition as one line: "2,006 lb, Hp 6,000 ft, +30 °C, 65 KIAS, bank 30°, rotor speed 100 %"."""
    return ", ".join(_SHORT.get(name, name.lower() + " ") + value for name, value in inputs(aircraft, condition))


def level_point(aircraft: Aircraft, mass: float, pressure_altitude: float, temperature: float) -> str:
    """A point on the manual's chart in words, to whole units: "2,006 lb, Hp 9,484 ft, +20 °C"."""
    shown = aircraft.units
    degrees = round(units.from_si(temperature, "temperature", "°C"))
    sign = "+" if degrees > 0 else ""
    return (
        f"{units.show(mass, 'mass', shown.mass)}, Hp{_TIE}{units.show(pressure_altitude, 'height', shown.height)}, "
        f"{sign}{units.show_number(degrees)}{_TIE}°C"
    )


def angle(degrees: float) -> str:
    """An angle to a tenth of a degree, with a true minus sign."""
    return f"{units.show_number(degrees, 1)}°"


def turn(condition: Condition) -> str:
    """What takes a condition away from level flight at 100 %: "30° bank, rotor at 97 %"; nothing where it is that."""
    parts = []
    if condition.load_factor > 1.0 + 1e-12:
        parts.append(f"{units.show_number(math.degrees(condition.bank))}° bank")
    if abs(condition.rotor_speed - 1.0) > 1e-12:
        parts.append(f"rotor at {100.0 * condition.rotor_speed:.4g} %")
    return ", ".join(parts)


def why(refusal: Refusal) -> str:
    """A refusal in words. Beyond the chart the covered bank is left out: no bank without its own reduction."""
    return str(refusal.reason) if isinstance(refusal, BeyondChart) else str(refusal)
