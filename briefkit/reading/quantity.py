"""Quantities as a person types them: `"910 kg"`, or a table with value, source and spread."""

from __future__ import annotations

import difflib
import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Final

from pydantic import PlainValidator
from pydantic_core import PydanticCustomError

from briefkit import units
from briefkit.errors import ReadingError

NOT_YET: Final = "?"  # what an author types for a value still to be looked up
UNKNOWN: Final = "unknown"  # what an author types for a value that is not to be had
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
    found = difflib.get_close_matches(word, list(known), n=1, cutoff=0.6)
    return found[0] if found else ""


def did_you_mean(word: str, known: Iterable[str], otherwise: str = "") -> str:
    """The remedy for a misspelt word."""
    like = nearest(word, known)
    return f"did you mean {like}?" if like else otherwise


def quoted(read: object) -> str:
    """What was read, as a fault shows it."""
    if isinstance(read, str):
        return f'"{read}"' if len(read) <= 80 else f'"{read[:77]}..."'
    if isinstance(read, bool):
        return str(read).lower()
    return "a table" if isinstance(read, Mapping) else "a list" if isinstance(read, list) else str(read)


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
        raise ReadingError(error.read, error.permitted + alternative, error.remedy) from None
    if not low <= value <= high:
        raise ReadingError(str(read), _range_in_words(kind, unit, low, high), "look again at the digits and the unit")
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
    shown = [f"{units.from_si(end, kind, unit):,.4g}" if math.isfinite(end) else "" for end in (low, high)]
    if not shown[1]:
        return f"{shown[0]} {unit} or more".replace("  ", " ")
    return f"{shown[0]} to {shown[1]} {unit}".strip()
