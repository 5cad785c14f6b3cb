"""Shape of the tables of an aircraft file. Outside the ranges given nobody types on purpose."""

from __future__ import annotations

import math
from typing import Annotated, ClassVar, Final, Literal

from pydantic import Field

from briefkit.reading.document import Table
from briefkit.reading.quantity import Typed, quantity
from briefkit.units import KNOT, ZERO_CELSIUS

Text = Annotated[str, Field(pattern=r"^[^\x00-\x1f\x7f]*\S[^\x00-\x1f\x7f]*$")]
Mass = Annotated[Typed | None, quantity("mass", 100.0, 20_000.0)]
Temperature = Annotated[Typed | None, quantity("temperature", ZERO_CELSIUS - 80.0, ZERO_CELSIUS + 55.0)]
Height = Annotated[Typed | None, quantity("height", -600.0, 11_000.0)]
RotorSpeed = Annotated[Typed, quantity("ratio", 0.75, 1.25)]
Airspeed = Annotated[Typed | None, quantity("speed", 20.0 * KNOT, 250.0 * KNOT)]
Pair = Field(min_length=2, max_length=2)

# page.md 3 of the house rules: when a manual's other speed applies.
APPLIES: Final = ("turbulence", "doors", "bank", "torque", "IMC", "climb", "autorotation", "load", "other")


class TypeTable(Table):
    required: ClassVar[tuple[str, ...]] = ("name", "serials", "configuration")
    name: Text | None = None
    serials: Annotated[list[Text], Field(min_length=1)] | None = None
    configuration: Text | None = None
    source: str = ""


class UnitsTable(Table):
    required: ClassVar[tuple[str, ...]] = ("speed", "height", "mass", "pressure")
    speed: Literal["kt", "km/h", "mph"] | None = None
    height: Literal["ft", "m"] | None = None
    mass: Literal["lb", "kg"] | None = None
    pressure: Literal["inHg", "hPa"] | None = None


class RotorTable(Table):
    required: ClassVar[tuple[str, ...]] = (
        "hub",
        "rotation",
        "blades",
        "radius",
        "rpm",
        "chord",
        "twist",
        "root_cutout",
        "flap_inertia",
        "lift_slope",
        "drag_area",
    )
    hub: Literal["teetering", "articulated", "hingeless"] | None = None
    rotation: Literal["anticlockwise", "clockwise"] | None = None
    blades: Annotated[int, Field(ge=2, le=8)] | None = None
    radius: Annotated[Typed | None, quantity("length", 2.0, 15.0)] = None
    rpm: Annotated[Typed | None, quantity("rotation", 100.0 * math.pi / 30.0, 900.0 * math.pi / 30.0)] = None
    chord: Annotated[Typed | None, quantity("length", 0.08, 1.2)] = None
    twist: Annotated[Typed | None, quantity("angle", math.radians(-25.0), math.radians(5.0), unknown=True)] = None
    root_cutout: Annotated[Typed | None, quantity("ratio", 0.0, 0.5)] = None
    hinge_offset: Annotated[Typed | None, quantity("ratio", 0.0, 0.25)] = None
    flap_frequency: Annotated[Typed | None, quantity("number", 1.0, 1.3, unknown=True)] = None
    flap_inertia: Annotated[Typed | None, quantity("inertia", 10.0, 20_000.0, unknown=True)] = None
    precone: Annotated[Typed | None, quantity("angle", 0.0, math.radians(8.0), unknown=True)] = None
    lift_slope: Annotated[Typed | None, quantity("number", 4.5, 7.0, unknown=True)] = None
    drag_area: Annotated[Typed | None, quantity("area", 0.1, 10.0, unknown=True)] = None
    source: str = ""


class LimitsTable(Table):
    required: ClassVar[tuple[str, ...]] = (
        "max_mass",
        "min_mass",
        "max_altitude",
        "min_temperature",
        "rotor_on",
        "rotor_off",
        "climb_speed",
    )
    max_mass: Mass = None
    min_mass: Mass = None
    max_altitude: Height = None
    min_temperature: Temperature = None
    isa_deviation: Annotated[Typed | None, quantity("temperature difference", 0.0, 50.0)] = None
    max_temperature: Temperature = None
    max_bank: Annotated[Typed | None, quantity("angle", math.radians(10.0), math.radians(90.0))] = None
    rotor_on: Annotated[list[RotorSpeed], Pair] | None = None
    rotor_off: Annotated[list[RotorSpeed], Pair] | None = None
    climb_speed: Airspeed = None
    source: str = ""


class CalibrationTable(Table):
    required: ClassVar[tuple[str, ...]] = ("table",)
    table: str | None = None
    spread: Annotated[Typed | None, quantity("speed", 0.0, 20.0 * KNOT)] = None
    source: str = ""


class PowerOnTable(Table):
    required: ClassVar[tuple[str, ...]] = ("chart",)
    chart: str | None = None
    reading: Literal["interpolate", "next lower VNE"] = "next lower VNE"
    reading_error: Annotated[Typed | None, quantity("speed", 0.0, 10.0 * KNOT)] = None
    covers_temperatures: str = ""
    reason: str = ""
    entry_reason: str = ""
    source: str = ""


class PowerOffTable(Table):
    required: ClassVar[tuple[str, ...]] = ("constant",)
    constant: Airspeed = None
    source: str = ""


class SpeedEntry(Table):
    required: ClassVar[tuple[str, ...]] = ("label", "text", "applies")
    label: Text | None = None
    text: Text | None = None
    applies: (
        Literal["turbulence", "doors", "bank", "torque", "IMC", "climb", "autorotation", "load", "other"] | None
    ) = None
    source: str = ""


class HoverEntry(Table):
    required: ClassVar[tuple[str, ...]] = ("label", "text")
    label: Text | None = None
    text: Text | None = None
    source: str = ""


class RecoveryTable(Table):
    required: ClassVar[tuple[str, ...]] = ("text",)
    text: Text | None = None
    source: str = ""
