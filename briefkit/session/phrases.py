"""Conditions in words, the figures as their author typed them."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Final

from briefkit import units

# Order of a condition's sentence, and what stands before and after each value.
_FRAMES: Final[dict[str, tuple[str, str]]] = {
    "mass": ("", ""),
    "pressure_altitude": ("Hp ", ""),
    "elevation": ("elevation ", ""),
    "qnh": ("QNH ", ""),
    "oat": ("", ""),
    "bank": ("", " of bank"),
    "load_factor": ("load factor ", ""),
    "rotor_speed": ("rotor ", ""),
    "climb": ("climb ", ""),
}
NAMES: Final = {
    "mass": "mass",
    "pressure_altitude": "pressure altitude",
    "elevation": "elevation",
    "qnh": "QNH",
    "oat": "temperature",
    "bank": "bank",
    "load_factor": "load factor",
    "rotor_speed": "rotor speed",
    "climb": "climb",
}


def value_text(key: str, typed: str) -> str:
    """One value in its words: "30° of bank", "rotor 97 %", "Hp 8,000 ft"; the digits stay as typed."""
    before, after = _FRAMES[key]
    return f"{before}{_shown(typed)}{after}"


def condition_text(typed: Mapping[str, str]) -> str:
    """A condition in one line: "2,006 lb, Hp 8,000 ft, +30 °C, level, rotor 100 %"."""
    level = "bank" not in typed and "load_factor" not in typed
    parts = []
    for key in _FRAMES:
        if key in typed:
            parts.append(value_text(key, typed[key]))
        elif key == "bank" and level:
            parts.append("level")
        elif key == "rotor_speed":
            parts.append("rotor 100 %")
    return ", ".join(parts)


def _shown(typed: str) -> str:
    """A typed quantity as a page sets it: a true minus sign, the unit's own sign."""
    text = typed.strip().replace("-", "\u2212")
    for unit, sign in units.SHOWN.items():
        if text.endswith(unit) and text[: -len(unit)].rstrip()[-1:].isdigit():
            return text.removesuffix(unit).rstrip() + ("°" if sign == "°" else f" {sign}")
    return text
