"""Quantities as a person types them: `"910 kg"`, or a table with value, source and spread."""

from __future__ import annotations

import difflib
import math
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Final

from pydantic import PlainValidator
from pydantic_core import PydanticCustomError

from briefkit import units
from briefkit.errors import ReadingError

NOT_YET: Final = "?"  # what an author types for a value still to be looked up
UNKNOWN: Final = "unknown"  # what an author types for a value that is not to be had
# Common other spellings of the permitted units, for remedies only: none of them is read.
_SPELLINGS: Final = {
    "kts": "kt", "knots": "kt", "knot": "kt", "kn": "kt", "KIAS": "kt", "kmh": "km/h", "kph": "km/h", "km/hr": "km/h",
    "lbs": "lb", "pounds": "lb", "kgs": "kg", "KG": "kg", "feet": "ft", "FT": "ft", "'": "ft", "metres": "m",
    "meters": "m", "inches": "in", '"': "in", "degrees": "deg", "mb": "hPa", "mbar": "hPa", "in": "inHg", "Hg": "inHg",
    "celsius": "degC", "Celsius": "degC", "deg C": "degC", "fpm": "ft/min", "percent": "%", "RPM": "rpm",
}  # fmt: skip
_DECIMAL_COMMA = re.compile(r"\D*(\d+),(\d{1,2}|\d{4,})([^\d,.]*)")
_NUMBER_THEN_UNIT = re.compile(r"([-+\u2212]?[\d,]*\.?\d+)\s*(\D.*)")
_PARTS: Final = ("value", "source", "spread")
_SPREAD_QUANTITY: Final = {"temperature": "temperature difference"}


@dataclass(frozen=True)
class Typed:
    """A quantity as typed. `value` [SI] is None where the author wrote "unknown", `spread` [SI] where none is given."""

    text: str
    value: float | None
    unit: str
    source: str = ""
    spread: float | None = None


def quantity(kind: str, low: float = -math.inf, high: float = math.inf, *, unknown: bool = False) -> PlainValidator:
    """A pydantic validator for `"910 kg"` or `{ value = "910 kg", source = "...", spread = "2 kg" }`.

    `kind` is a quantity of `units`; outside `low` to `high` [SI] nobody types on purpose; `unknown` permits "unknown".
    """
    return PlainValidator(lambda read: _read_quantity(read, kind, low, high, unknown))


def nearest(word: str, known: Iterable[str]) -> str:
    """The nearest of the known words, or "" where none is near."""
    known = list(known)
    if _SPELLINGS.get(word) in known:
        return _SPELLINGS[word]
    found = difflib.get_close_matches(word, known, n=1, cutoff=0.6)
    return found[0] if found else ""


def did_you_mean(word: str, known: Iterable[str], otherwise: str = "") -> str:
    """The remedy for a misspelt word."""
    like = nearest(word, known)
    return f"did you mean {like}?" if like else otherwise


def spelling(text: str, kind: str) -> str:
    """What a person most likely meant by a quantity that could not be read, as a remedy; "" where it is not clear."""
    if comma := _DECIMAL_COMMA.fullmatch(text.strip()):
        return f'a decimal point, not a comma: "{comma[1]}.{comma[2]}{comma[3]}"'
    if re.search(r"\d\s\d", text):
        return f'no space inside a number: "{re.sub(r"(?<=[0-9])[^0-9a-zA-Z.](?=[0-9])", "", text.strip())}"'
    match = _NUMBER_THEN_UNIT.fullmatch(text.strip())
    if match is None:
        return ""
    if kind == "temperature" and match[2].endswith("F"):
        return "in Celsius: (F - 32) x 5/9"
    if match[2] in units.permitted_units(kind):
        return ""
    like = nearest(match[2], units.permitted_units(kind))
    return f'did you mean "{match[1]} {like}"?' if like else ""


def quoted(read: object) -> str:
    """What was read, as a fault shows it."""
    if isinstance(read, str):
        return f'"{read}"' if len(read) <= 80 else f'"{read[:77]}..."'
    if isinstance(read, bool):
        return str(read).lower()
    return "a table" if isinstance(read, Mapping) else "a list" if isinstance(read, list) else str(read)


def plain(number: float) -> str:
    """A number for a sentence: four figures, whole from 1,000 up, never an exponent."""
    return f"{number:,.0f}" if abs(number) >= 1000.0 else f"{number:.4g}"


def _read_quantity(read: object, kind: str, low: float, high: float, unknown: bool) -> Typed:
    faults: list[tuple[str, str, str, str]] = []
    table: Mapping[str, object] = read if isinstance(read, Mapping) else {"value": read}
    for name in table:
        if name not in _PARTS:
            faults.append((f".{name}", f"the key {name}", ", ".join(_PARTS), did_you_mean(name, _PARTS)))
    typed = Typed("", None, "")
    try:
        typed = _read_value(table.get("value", ""), kind, low, high, unknown)
    except ReadingError as error:
        faults.append(("", quoted(error.read) if error.read else "no value", error.permitted, error.remedy))
    source = table.get("source", "")
    if not isinstance(source, str):
        faults.append((".source", quoted(source), "text: which document, which page", ""))
    spread = None
    try:
        if "spread" in table:
            spread = _read_spread(table["spread"], kind, typed.value)
    except ReadingError as error:
        faults.append((".spread", quoted(error.read), error.permitted, error.remedy))
    if faults:
        raise PydanticCustomError("typed", "not readable", {"faults": faults})
    return Typed(typed.text, typed.value, typed.unit, str(source), spread)


def _read_value(read: object, kind: str, low: float, high: float, unknown: bool) -> Typed:
    if kind == "number" and isinstance(read, int | float) and not isinstance(read, bool) and math.isfinite(read):
        read = f"{read:.9f}".rstrip("0").rstrip(".")
    alternative = ', or "unknown"' if unknown else ""
    permitted_units = ", ".join(unit for unit in units.permitted_units(kind) if unit) or "no unit"
    if read == NOT_YET:
        remedy = f"type the value from its document{alternative}"
        raise ReadingError(NOT_YET, f"{kind} ({permitted_units}){alternative}", remedy)
    if read == UNKNOWN:
        if unknown:
            return Typed(UNKNOWN, None, "")
        remedy = "no published class range stands in for this one: measure it or find it"
        raise ReadingError(UNKNOWN, f"{kind} ({permitted_units})", remedy)
    try:
        value, unit = units.read_with_unit(read, kind)  # type: ignore[arg-type]  # it refuses what is not text
    except ReadingError as error:
        remedy = spelling(error.read, kind) or error.remedy
        raise ReadingError(error.read, error.permitted + alternative, remedy) from None
    if not low <= value <= high:
        remedy = "look again at the digits and the unit"
        if kind == "temperature" and value > high:
            remedy = "is it Fahrenheit? in Celsius: (F - 32) x 5/9"
        raise ReadingError(str(read), _range_in_words(kind, unit, low, high), remedy)
    return Typed(str(read).strip(), value, unit)


def _read_spread(read: object, kind: str, value: float | None) -> float:
    kind = _SPREAD_QUANTITY.get(kind, kind)
    if isinstance(read, str) and read.strip().endswith("%") and kind != "ratio":
        spread = units.read(read, "ratio") * abs(value or 0.0)
    else:
        spread = _read_value(read, kind, -math.inf, math.inf, False).value or 0.0
    if spread < 0.0:
        raise ReadingError(str(read), "a half-width, zero or more", "leave the minus sign out")
    return spread


def _range_in_words(kind: str, unit: str, low: float, high: float) -> str:
    shown = [plain(units.from_si(end, kind, unit)) if math.isfinite(end) else "" for end in (low, high)]
    if not shown[1]:
        return f"{shown[0]} {unit} or more".replace("  ", " ")
    return f"{shown[0]} to {shown[1]} {unit}".strip()
