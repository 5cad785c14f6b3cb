"""Constants, conversions, the one closed reader of typed quantities, and rounding to the safe side.

SI floats inside; knots, feet, kilograms, pounds, degrees and percent only at the doors, and this is the door.
A general units library read "3 350 kg" as 1,050 kg in a trial; this one accepts a closed grammar only.
"""

from __future__ import annotations

import math
import numbers
import re
from dataclasses import dataclass
from enum import StrEnum
from typing import TYPE_CHECKING, Final

from briefkit.errors import MixedSpeeds, ReadingError

if TYPE_CHECKING:
    from typing import Any, TypeVar

    from numpy.typing import NDArray

    Number = TypeVar("Number", float, NDArray[Any])

# Exact by definition (international foot, pound, nautical mile; ISO 80000-3, -4).
FOOT: Final = 0.3048
INCH: Final = 0.0254
POUND: Final = 0.45359237
SLUG: Final = 14.59390294
KNOT: Final = 1852.0 / 3600.0
KILOMETRE_PER_HOUR: Final = 1.0 / 3.6
MILE_PER_HOUR: Final = 1609.344 / 3600.0
INCH_OF_MERCURY: Final = 3386.389  # at 0 C, NIST SP 811 table B.9
ZERO_CELSIUS: Final = 273.15

# ISO 2533:1975 (the ICAO standard atmosphere, Doc 7488): defining constants.
GRAVITY: Final = 9.80665
SEA_LEVEL_TEMPERATURE: Final = 288.15
SEA_LEVEL_PRESSURE: Final = 101325.0
GAS_CONSTANT: Final = 287.05287
LAPSE_RATE: Final = 0.0065
TROPOPAUSE: Final = 11000.0
HEAT_RATIO: Final = 1.4

# quantity -> unit as typed -> (factor, offset): SI = number * factor + offset.
_UNITS: Final[dict[str, dict[str, tuple[float, float]]]] = {
    "mass": {"kg": (1.0, 0.0), "lb": (POUND, 0.0)},
    "height": {"ft": (FOOT, 0.0), "m": (1.0, 0.0)},
    "length": {"m": (1.0, 0.0), "mm": (0.001, 0.0), "cm": (0.01, 0.0), "ft": (FOOT, 0.0), "in": (INCH, 0.0)},
    "speed": {
        "kt": (KNOT, 0.0),
        "km/h": (KILOMETRE_PER_HOUR, 0.0),
        "mph": (MILE_PER_HOUR, 0.0),
    },
    "vertical speed": {"ft/min": (FOOT / 60.0, 0.0), "m/s": (1.0, 0.0)},
    "temperature": {"degC": (1.0, ZERO_CELSIUS), "°C": (1.0, ZERO_CELSIUS), "C": (1.0, ZERO_CELSIUS)},
    "temperature difference": {"degC": (1.0, 0.0), "°C": (1.0, 0.0), "C": (1.0, 0.0)},
    "angle": {"deg": (math.pi / 180.0, 0.0), "°": (math.pi / 180.0, 0.0)},
    "ratio": {"%": (0.01, 0.0)},
    "fuel flow": {"kg/h": (1.0 / 3600.0, 0.0), "lb/h": (POUND / 3600.0, 0.0)},
    "pressure": {"hPa": (100.0, 0.0), "inHg": (INCH_OF_MERCURY, 0.0)},
    "rotation": {"rpm": (math.pi / 30.0, 0.0)},
    "area": {"m2": (1.0, 0.0), "m²": (1.0, 0.0), "ft2": (FOOT * FOOT, 0.0), "ft²": (FOOT * FOOT, 0.0)},
    "inertia": {"kg m2": (1.0, 0.0), "kg m²": (1.0, 0.0), "slug ft2": (SLUG * FOOT * FOOT, 0.0)},
    "number": {"": (1.0, 0.0)},
}

# What a unit is called on a page, where that differs from how it is typed.
SHOWN: Final = {"degC": "°C", "C": "°C", "deg": "°", "m2": "m²", "ft2": "ft²", "kg m2": "kg m²", "slug ft2": "slug ft²"}

_QUANTITY = re.compile(
    r"(?P<sign>[+\-\u2212]?)(?P<whole>\d{1,3}(?:,\d{3}){1,3}|\d{1,9})(?P<fraction>\.\d{1,9})?"
    r"[ \u00a0]?(?P<unit>\D.*)?",
    re.ASCII,
)


# "85 KIAS", "150 km/h IAS": an airspeed that says its kind.
_KIND = re.compile(r"(?P<number>[^A-Za-z]*\d)[ \u00a0]?(?:K|(?P<unit>km/h|mph) )(?P<kind>IAS|CAS|TAS)")


class SpeedKind(StrEnum):
    """Which of the trade's three speeds a number is."""

    INDICATED = "IAS"
    CALIBRATED = "CAS"
    TRUE = "TAS"

    @property
    def words(self) -> str:
        """ "indicated", "calibrated", "true"."""
        return self.name.lower()

    def label(self, unit: str) -> str:
        """ "KIAS", "km/h IAS", "mph TAS": the unit as the trade writes it with the kind."""
        return f"K{self}" if unit == "kt" else f"{unit} {self}"


@dataclass(frozen=True, eq=False)
class Speed:
    """One airspeed with its kind: [m/s] inside, `unit` is what it is shown in.

    Sums, differences (a difference is of the same kind) and comparisons are between equal kinds; with another kind, or
    with a bare number, which has none, they raise `MixedSpeeds`. From one kind to the next leads only the aircraft's
    calibration (indicated, calibrated) and the air of the day (calibrated, true).

    Raises `ReadingError` for a value that is not finite: a comparison with it would say whatever is asked.
    """

    value: float
    kind: SpeedKind
    unit: str = "kt"

    def __post_init__(self) -> None:
        if not math.isfinite(self.value):
            raise ReadingError(
                str(self.value), f"a finite {self.kind.words} speed", "where there is none, leave it out"
            )

    @classmethod
    def of(cls, number: float, unit: str, kind: SpeedKind = SpeedKind.INDICATED) -> Speed:
        """From a number in a unit of speed."""
        return cls(to_si(float(number), "speed", unit), kind, unit)

    @property
    def number(self) -> float:
        """In its own unit, to 0.000001 of it (so that 85 kt kept in m/s is 85 kt again)."""
        return round(from_si(self.value, "speed", self.unit), 6)

    @property
    def text(self) -> str:
        """With unit and kind, floored to one unit: "75 KIAS"."""
        return f"{show_number(round_down(self.number))} {self.kind.label(self.unit)}"

    def of_kind(self, kind: SpeedKind) -> Speed:
        """Itself where it is of this kind; else `MixedSpeeds`."""
        if self.kind is not kind:
            raise MixedSpeeds(f"a {self.kind.words} speed, {self._shown()}, where a speed is {kind.words}")
        return self

    def __add__(self, other: Speed) -> Speed:
        return Speed(self.value + self._like(other), self.kind, self.unit)

    def __sub__(self, other: Speed) -> Speed:
        return Speed(self.value - self._like(other), self.kind, self.unit)

    # Compared to 1e-9 m/s, so that 64 kt less 10 kt is 54 kt.
    def __lt__(self, other: Speed) -> bool:
        return round(self.value, 9) < round(self._like(other), 9)

    def __le__(self, other: Speed) -> bool:
        return round(self.value, 9) <= round(self._like(other), 9)

    def __gt__(self, other: Speed) -> bool:
        return not self <= other

    def __ge__(self, other: Speed) -> bool:
        return not self < other

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Speed | numbers.Number):
            return False
        return round(self.value, 9) == round(self._like(other), 9)

    def __hash__(self) -> int:
        return hash((round(self.value, 9), self.kind))

    def _like(self, other: object) -> float:
        if isinstance(other, Speed) and other.kind is self.kind:
            return other.value
        what = other._shown() if isinstance(other, Speed) else f"{other!r}, which has no kind"
        raise MixedSpeeds(f"{self._shown()} and {what} are neither added nor compared")

    def _shown(self) -> str:
        return f"{from_si(self.value, 'speed', self.unit):g} {self.kind.label(self.unit)}"


def permitted_units(quantity: str) -> tuple[str, ...]:
    """The units a quantity may be typed in; KeyError for a quantity that does not exist (a programming error)."""
    return tuple(_UNITS[quantity])


def read_with_unit(text: str, quantity: str) -> tuple[float, str]:
    """Read a typed quantity: the SI value and the unit as typed.

    Grammar: optional sign (the Unicode minus too), digits with commas only in whole groups of three, one decimal
    point, then a unit of the closed list for `quantity`. Everything else raises `ReadingError`: decimal commas, spaces
    inside a number, exponents, nan, inf, expressions, unknown units.
    """
    units = _UNITS[quantity]
    example = next(iter(units))
    if not isinstance(text, str):
        raise ReadingError(
            str(text), f"text with a unit ({_listed(units)})", f'write it as text, like "{text} {example}"'
        )
    match = _QUANTITY.fullmatch(text.strip())
    if match is None:
        remedy = "digits, commas only in groups of three, a decimal point"
        raise ReadingError(text, f"a number and a unit ({_listed(units)})", remedy)
    unit = (match["unit"] or "").strip()
    if unit not in units:
        raise ReadingError(text, f"{quantity} in {_listed(units)}", "" if unit else "add the unit")
    number = float(match["whole"].replace(",", "") + (match["fraction"] or ""))
    if match["sign"] in ("-", "\u2212"):
        number = -number
    factor, offset = units[unit]
    return number * factor + offset, unit


def read(text: str, quantity: str) -> float:
    """Read a typed quantity to SI; see `read_with_unit`."""
    return read_with_unit(text, quantity)[0]


def read_speed(text: str, kind: SpeedKind = SpeedKind.INDICATED) -> Speed:
    """Read an airspeed that may say its kind: "85 kt", "85 KIAS", "150 km/h IAS", "100 KTAS".

    Without a kind it is of `kind`; another kind than `kind` raises `ReadingError`, as does what `read` refuses.
    """
    found = _KIND.fullmatch(text.strip()) if isinstance(text, str) else None
    if found is None:
        value, unit = read_with_unit(text, "speed")
        return Speed(value, kind, unit)
    said = SpeedKind(found["kind"])
    if said is not kind:
        raise ReadingError(text, f"{kind.words} airspeed", f"this one is {said.words}: convert it first")
    value, unit = read_with_unit(f"{found['number']} {found['unit'] or 'kt'}", "speed")
    return Speed(value, kind, unit)


def to_si(number: Number, quantity: str, unit: str) -> Number:
    """A number in a permitted unit to SI (works on arrays too)."""
    factor, offset = _UNITS[quantity][unit]
    return number * factor + offset


def from_si(value: Number, quantity: str, unit: str) -> Number:
    """An SI value to a number in a permitted unit (works on arrays too)."""
    factor, offset = _UNITS[quantity][unit]
    return (value - offset) / factor


def show_number(number: float, decimals: int = 0) -> str:
    """A number for a page: grouped digits, a true minus sign, never "-0". Not finite raises ValueError."""
    if not math.isfinite(number):
        raise ValueError(f"a number that is not finite must never reach a page: {number}")
    text = f"{number:,.{decimals}f}"
    if text.startswith("-"):
        text = text[1:] if float(text.replace(",", "")) == 0.0 else "\u2212" + text[1:]
    return text


def show(value: float, quantity: str, unit: str, decimals: int = 0) -> str:
    """An SI value for a page, with its unit: `show(909.9, "mass", "lb")` is "2,006 lb"."""
    shown = SHOWN.get(unit, unit)
    gap = "" if shown in ("°", "%", "") else "\u00a0"
    if unit == "%":
        gap = "\u00a0"
    return f"{show_number(from_si(value, quantity, unit), decimals)}{gap}{shown}"


def round_down(number: float, step: float = 1.0) -> float:
    """Down to a multiple of `step`, after rounding to 0.01 (so that 85.0 kept as 84.999999 stays 85)."""
    return math.floor(round(number, 2) / step + 1e-9) * step


def round_up(number: float, step: float = 1.0) -> float:
    """Up to a multiple of `step`, after rounding to 0.01 (so that 5.0000001 stays 5)."""
    return math.ceil(round(number, 2) / step - 1e-9) * step


def _listed(units: dict[str, tuple[float, float]]) -> str:
    return ", ".join(units) if units != {"": (1.0, 0.0)} else "no unit"
