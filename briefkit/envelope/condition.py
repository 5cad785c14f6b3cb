"""One flight condition: text with units at the door, SI floats inside; and many of them as arrays."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, fields
from typing import Any, Final, Self

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.errors import BriefkitError, OutsideLimits, ReadingError, Reason
from briefkit.physics import atmosphere
from briefkit.units import Speed, SpeedKind

Floats = NDArray[np.float64]

# keyword -> the quantity its text is read as.
_DOORS: Final = {
    "mass": "mass",
    "pressure_altitude": "height",
    "elevation": "height",
    "qnh": "pressure",
    "oat": "temperature",
    "ias": "speed",
    "bank": "angle",
    "load_factor": "number",
    "rotor_speed": "ratio",
    "climb": "vertical speed",
    "mass_spread": "mass",
    "oat_spread": "temperature difference",
}

# Outside these a typed number is a slip of the pen, whatever the aircraft (SI; shown in the unit named).
_PLAUSIBLE: Final = {
    "mass": (100.0, 60_000.0, "kg"),
    "pressure_altitude": (-1_000.0, 11_000.0, "m"),
    "elevation": (-1_000.0, 9_000.0, "m"),
    "qnh": (85_000.0, 108_500.0, "hPa"),
    "oat": (units.ZERO_CELSIUS - 80.0, units.ZERO_CELSIUS + 55.0, "°C"),
    "ias": (0.0, 150.0, "kt"),
    "bank": (0.0, math.radians(80.0), "deg"),
    "load_factor": (1.0, 1.0 / math.cos(math.radians(80.0)), ""),
    "rotor_speed": (0.5, 1.2, "%"),
    "climb": (-15.0, 25.0, "ft/min"),
    "mass_spread": (0.0, 1_000.0, "kg"),
    "oat_spread": (0.0, 15.0, "°C"),
}
_HINTS: Final = {
    "oat": "a temperature in °F? type it in °C",
    "qnh": "28.86 inHg is 977 hPa",
    "load_factor": "a level turn has a load factor of 1 or more",
}


class UnknownName(BriefkitError, TypeError):
    """A keyword that a condition does not have."""


@dataclass(frozen=True, init=False)
class Condition:
    """A flight condition in steady air.

    `Condition(mass="2,006 lb", pressure_altitude="5,210 ft", oat="36 degC", ias="85 kt", bank="30 deg",
    rotor_speed="100 %")`. Mass, height and temperature are required. `pressure_altitude` may instead be given as
    `elevation` with `qnh`; `bank` excludes `load_factor` (a level turn: n = 1/cos(bank)); `ias` (indicated, in the
    manual's calibration; "85 KIAS" may say so, "85 KTAS" is refused) is needed only where a flight speed is; `climb` is
    a vertical speed; `mass_spread` and `oat_spread` are half-widths, taken at their worse end.

    Fields are SI: kg, m, K, m/s, and fractions for rotor speed. Raises `ReadingError` for text that cannot be read
    and `OutsideLimits` for a number no helicopter can have.
    """

    mass: float
    pressure_altitude: float
    oat: float
    ias: float | None
    load_factor: float
    rotor_speed: float
    climb: float
    mass_spread: float
    oat_spread: float

    def __init__(self, **text: str) -> None:
        missing = [name for name in ("mass", "oat") if name not in text]
        if "pressure_altitude" not in text and not {"elevation", "qnh"} <= text.keys():
            missing.append("pressure_altitude (or elevation with qnh)")
        if missing:
            raise ReadingError("nothing", "a condition with mass, height and temperature", "add " + ", ".join(missing))
        self._fill(_read(text))

    @classmethod
    def si(
        cls,
        *,
        mass: float,
        pressure_altitude: float,
        oat: float,
        ias: float | Speed | None = None,
        load_factor: float = 1.0,
        rotor_speed: float = 1.0,
        climb: float = 0.0,
        mass_spread: float = 0.0,
        oat_spread: float = 0.0,
    ) -> Self:
        """The same from SI floats (kg, m, K, m/s indicated, fractions), for sweeps and widgets.

        `ias` may be a `Speed`: one of another kind raises `MixedSpeeds`.
        """
        values = {name: value for name, value in locals().items() if name not in ("cls", "__class__")}
        if isinstance(ias, Speed):
            values["ias"] = ias.of_kind(SpeedKind.INDICATED).value
        for name, value in values.items():
            if value is not None:
                _plausible(name, float(value))
        made = cls.__new__(cls)
        made._fill(values)
        return made

    def with_(self, **text: str) -> Self:
        """A copy with some values typed anew: `condition.with_(bank="20 deg")`."""
        made = type(self).__new__(type(self))
        made._fill({field.name: getattr(self, field.name) for field in fields(self)} | _read(text))
        return made

    def changed(self, **si: float | Speed | None) -> Self:
        """A copy with some SI values replaced: `condition.changed(load_factor=1.0, rotor_speed=1.0)`."""
        kept: dict[str, Any] = {field.name: getattr(self, field.name) for field in fields(self)}
        return type(self).si(**(kept | si))

    def _fill(self, values: dict[str, Any]) -> None:
        defaults = {
            "ias": None, "load_factor": 1.0, "rotor_speed": 1.0, "climb": 0.0, "mass_spread": 0.0, "oat_spread": 0.0,
        }  # fmt: skip
        for field in fields(self):
            value = values[field.name] if field.name in values else defaults[field.name]
            object.__setattr__(self, field.name, None if value is None else float(value))

    @property
    def airspeed(self) -> Speed | None:
        """`ias` with its kind."""
        return None if self.ias is None else Speed(self.ias, SpeedKind.INDICATED)

    @property
    def bank(self) -> float:
        """Bank of the level turn with this load factor [rad]."""
        return math.acos(1.0 / self.load_factor)

    @property
    def pressure(self) -> float:
        """Ambient pressure [Pa]."""
        return float(atmosphere.pressure_at(self.pressure_altitude))

    @property
    def density(self) -> float:
        """Air density [kg/m3], dry."""
        return float(atmosphere.density(self.pressure, self.oat))

    @property
    def sound_speed(self) -> float:
        """Speed of sound [m/s]."""
        return float(atmosphere.speed_of_sound(self.oat))

    @property
    def level_at_full_rotor_speed(self) -> bool:
        """True where the manual's VNE is the answer by definition: load factor 1, rotor at 100 %, no climb."""
        return self.load_factor <= 1.0 + 1e-12 and abs(self.rotor_speed - 1.0) <= 1e-12


@dataclass(frozen=True, eq=False)
class Conditions:
    """Many conditions as arrays (batch,), SI, in the meaning of `Condition`; `ias` is NaN where not given."""

    mass: Floats
    pressure_altitude: Floats
    oat: Floats
    ias: Floats
    load_factor: Floats
    rotor_speed: Floats
    climb: Floats
    mass_spread: Floats
    oat_spread: Floats

    @classmethod
    def of(cls, conditions: Condition | Iterable[Condition]) -> Conditions:
        """From single conditions."""
        listed: Sequence[Condition] = [conditions] if isinstance(conditions, Condition) else list(conditions)
        return cls.si(**{
            field.name: [np.nan if (v := getattr(one, field.name)) is None else v for one in listed]
            for field in fields(cls)
        })  # fmt: skip

    @classmethod
    def si(cls, **values: Any) -> Conditions:
        """From SI numbers or arrays, broadcast to one batch. Mass, pressure_altitude and oat are required."""
        defaults = {
            "ias": np.nan, "load_factor": 1.0, "rotor_speed": 1.0, "climb": 0.0, "mass_spread": 0.0, "oat_spread": 0.0,
        }  # fmt: skip
        names = [field.name for field in fields(cls)]
        if unknown := sorted(set(values) - set(names)):
            raise UnknownName(f"unknown: {', '.join(unknown)}; a condition has {', '.join(names)}")
        filled = np.broadcast_arrays(*(np.atleast_1d(np.asarray((defaults | values)[n], dtype=float)) for n in names))
        return cls(*(array.ravel() for array in filled))

    def __len__(self) -> int:
        return len(self.mass)

    def take(self, members: NDArray[np.intp]) -> Conditions:
        """The members given, in that order."""
        return Conditions(*(getattr(self, field.name)[members] for field in fields(self)))

    def repeat(self, count: int) -> Conditions:
        """Each member `count` times in a row."""
        return Conditions(*(np.repeat(getattr(self, field.name), count) for field in fields(self)))

    @property
    def pressure(self) -> Floats:
        """Ambient pressure [Pa], (batch,)."""
        return np.asarray(atmosphere.pressure_at(self.pressure_altitude))

    @property
    def density(self) -> Floats:
        """Air density [kg/m3], (batch,)."""
        return np.asarray(atmosphere.density(self.pressure, self.oat))


def _read(text: dict[str, str]) -> dict[str, float]:
    """Typed keywords to the SI fields of a condition; both heights and both turns resolved to one."""
    if unknown := sorted(set(text) - set(_DOORS)):
        raise UnknownName(f"unknown: {', '.join(unknown)}; a condition has {', '.join(_DOORS)}")
    if {"bank", "load_factor"} <= text.keys():
        raise ReadingError("bank and load_factor", "one of them", "a level turn's bank sets its load factor")
    if "pressure_altitude" in text and ("elevation" in text or "qnh" in text):
        raise ReadingError("pressure_altitude and elevation or qnh", "one way to give the height")
    if ("elevation" in text) != ("qnh" in text):
        raise ReadingError("elevation or qnh alone", "elevation together with qnh", "or pressure_altitude")
    values = {name: units.read(typed, _DOORS[name]) for name, typed in text.items() if name != "ias"}
    if "ias" in text:
        values["ias"] = units.read_speed(text["ias"]).value
    for name, value in values.items():
        _plausible(name, value)
    if "elevation" in values:
        height = float(atmosphere.pressure_altitude_from_qnh(values.pop("elevation"), values.pop("qnh")))
        _plausible("pressure_altitude", height)
        values["pressure_altitude"] = height
    if "bank" in values:
        values["load_factor"] = 1.0 / math.cos(values.pop("bank"))
    return values


def _plausible(name: str, value: float) -> None:
    low, high, unit = _PLAUSIBLE[name]
    if low * (1.0 - 1e-12) - 1e-9 <= value <= high * (1.0 + 1e-12) + 1e-9:
        return
    quantity = _DOORS[name]
    ends = [
        units.show_number(units.from_si(end, quantity, unit), 1 if name == "load_factor" else 0) for end in (low, high)
    ]
    shown = units.from_si(value, quantity, unit) if math.isfinite(value) else "not a number"
    permitted = f"{ends[0]} to {ends[1]} {unit}".strip()
    where = _HINTS.get(name, "what was typed")
    raise OutsideLimits(name.replace("_", " "), shown, unit, permitted, where, Reason.OUTSIDE_LIMITS)
