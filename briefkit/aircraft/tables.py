"""Shape of the tables of an aircraft file. Outside the ranges given nobody types on purpose."""

from __future__ import annotations

import math
from typing import Annotated, Any, ClassVar, Final, Literal

from pydantic import BeforeValidator, Field

from briefkit.reading.document import Table
from briefkit.reading.quantity import Typed, quantity
from briefkit.units import KNOT, ZERO_CELSIUS

Text = Annotated[str, Field(pattern=r"^[^\x00-\x1f\x7f]*\S[^\x00-\x1f\x7f]*$")]
Mass = Annotated[Typed | None, quantity("mass", 100.0, 20_000.0)]
Temperature = Annotated[Typed | None, quantity("temperature", ZERO_CELSIUS - 80.0, ZERO_CELSIUS + 55.0)]
# The coldest day a manual permits is cold, the hottest is warm: a sign typed wrongly shows.
Coldest = Annotated[Typed | None, quantity("temperature", ZERO_CELSIUS - 80.0, ZERO_CELSIUS + 5.0)]
Hottest = Annotated[Typed | None, quantity("temperature", ZERO_CELSIUS + 5.0, ZERO_CELSIUS + 55.0)]
Height = Annotated[Typed | None, quantity("height", -600.0, 11_000.0)]
RotorSpeed = Annotated[Typed, quantity("ratio", 0.75, 1.25)]
Airspeed = Annotated[Typed | None, quantity("speed", 20.0 * KNOT, 250.0 * KNOT)]
Pair = Field(min_length=2, max_length=2)
Reading = Literal["interpolate", "next lower VNE"]

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
    flap_stop: Annotated[Typed | None, quantity("angle", math.radians(1.0), math.radians(30.0))] = None
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
    min_temperature: Coldest = None
    isa_deviation: Annotated[Typed | None, quantity("temperature difference", 0.0, 50.0)] = None
    max_temperature: Hottest = None
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


class ChartTable(Table):
    """One VNE in one of the forms manuals print: chart, lines, or base; slopes (`less`) and a cap with any of them."""

    chart: str | None = None
    lines: str | None = None
    base: Airspeed = None
    less: Annotated[list[Text] | None, BeforeValidator(lambda read: [read] if isinstance(read, str) else read)] = None
    cap: Airspeed = None
    reading: Reading = "next lower VNE"
    reading_error: Annotated[Typed | None, quantity("speed", 0.0, 10.0 * KNOT)] = None
    covers_temperatures: str = ""
    reason: str = ""
    source: str = ""

    @property
    def slopes(self) -> list[str]:
        return list(self.less or [])


class PowerOffTable(Table):
    """14 CFR 27.1505(c)(2): constant; less; constant with to_height and less. Or a chart of its own."""

    constant: Airspeed = None
    to_height: Height = None
    less: Annotated[Typed | None, quantity("speed", 1.0 * KNOT, 100.0 * KNOT)] = None
    not_over: Airspeed = None
    chart: str | None = None
    lines: str | None = None
    reading: Reading = "next lower VNE"
    reading_error: Annotated[Typed | None, quantity("speed", 0.0, 10.0 * KNOT)] = None
    source: str = ""


class CellsReason(Table):
    """The answer to a finding on cells: which of them ("column -20", "row 6,000", both, or "all"), and why."""

    required: ClassVar[tuple[str, ...]] = ("cells", "reason")
    cells: Text | None = None
    reason: Text | None = None


class SpeedEntry(Table):
    required: ClassVar[tuple[str, ...]] = ("label", "text", "applies")
    label: Text | None = None
    text: Text | None = None
    value: Text | None = None
    applies: (
        Literal["turbulence", "doors", "bank", "torque", "IMC", "climb", "autorotation", "load", "other"] | None
    ) = None
    source: str = ""


class HoverEntry(Table):
    """A line of words (label, text), or a table of ceilings (kind, table)."""

    label: Text | None = None
    text: Text | None = None
    kind: Literal["IGE", "OGE"] | None = None
    table: str | None = None
    reading: Literal["interpolate", "next lower ceiling"] = "next lower ceiling"
    source: str = ""


class ConfigurationEntry(Table):
    """What a supplement changes. The tables power_on, power_off, reasons and speeds are held to their own shapes."""

    required: ClassVar[tuple[str, ...]] = ("name",)
    name: Text | None = None
    source: str = ""
    serials: Annotated[list[Text], Field(min_length=1)] | None = None
    not_for_serials: Annotated[list[Text], Field(min_length=1)] | None = None
    vne: Text | None = None
    power_on: dict[str, Any] | None = None
    power_off: dict[str, Any] | None = None
    reasons: dict[str, Any] | None = None
    speeds: list[dict[str, Any]] | None = None
    max_mass: Mass = None
    max_altitude: Height = None
    min_temperature: Coldest = None
    max_bank: Annotated[Typed | None, quantity("angle", math.radians(10.0), math.radians(90.0))] = None
    rotor_on: Annotated[list[RotorSpeed], Pair] | None = None
    rotor_off: Annotated[list[RotorSpeed], Pair] | None = None


class RecoveryTable(Table):
    required: ClassVar[tuple[str, ...]] = ("text",)
    text: Text | None = None
    source: str = ""
