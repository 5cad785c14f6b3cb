"""Values as a page says them: one way to write a height, a temperature, a mass, a speed and a bank."""

from __future__ import annotations

import math

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope.condition import Condition


def height(aircraft: Aircraft, metres: float, to: float = 1.0) -> str:
    """ "8,000 ft"; rounded to the nearest `to`."""
    unit = aircraft.units.height
    return f"{units.show_number(round(units.from_si(metres, 'height', unit) / to) * to)} {unit}"


def top(aircraft: Aircraft, metres: float) -> str:
    """ "2,203 ft": the top of an area, rounded up, so that one place has one height on a page."""
    unit = aircraft.units.height
    return f"{units.show_number(math.ceil(units.from_si(metres, 'height', unit) - 1e-6))} {unit}"


def temperature(kelvin: float, decimals: int = 0) -> str:
    """ "+20 °C": a temperature on a page carries its sign."""
    number = units.show_number(kelvin - units.ZERO_CELSIUS, decimals)
    return f"{number if number.startswith(chr(0x2212)) or float(number) == 0.0 else '+' + number} °C"


def mass(aircraft: Aircraft, kilograms: float) -> str:
    """ "2,124 lb", rounded up: a heavier aircraft is never called lighter."""
    unit = aircraft.units.mass
    return f"{units.show_number(units.round_up(units.from_si(kilograms, 'mass', unit)))} {unit}"


def number(value: float) -> str:
    """A speed or difference to 0.1 without trailing zero: "71.6", "79"."""
    text = units.show_number(value, 1)
    return text.removesuffix(".0")


def knots(aircraft: Aircraft, value: float) -> str:
    """ "10 kt": a reduction, a whole step of the unit."""
    return f"{units.show_number(value)} {aircraft.units.speed}"


def indicated(aircraft: Aircraft, typed: str) -> str:
    """A typed indicated speed with unit and kind: "54 kt" is "54 KIAS"; the digits stay as typed."""
    unit = aircraft.units.speed
    return f"{typed.removesuffix(unit).strip()} {aircraft.units.speed_label()}" if typed.endswith(unit) else typed


def degrees(radians: float) -> str:
    """ "30°" """
    return f"{math.degrees(radians):.0f}°"


def place(aircraft: Aircraft, condition: Condition) -> str:
    """ "8,000 ft, +20 °C": a block point."""
    return f"{height(aircraft, condition.pressure_altitude)}, {temperature(condition.oat)}"


def subscale(aircraft: Aircraft) -> str:
    """What the altimeter is set to for pressure altitude, in the manual's pressure unit."""
    return "29.92" if aircraft.units.pressure == "inHg" else "1013.25"
