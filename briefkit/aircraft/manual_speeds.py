"""The manual's other speeds: its own words for the page, and the figure in them for the computing."""

from __future__ import annotations

import re
from typing import Final

from briefkit import units
from briefkit.aircraft.make import needed
from briefkit.aircraft.model import ManualSpeed
from briefkit.aircraft.tables import SpeedEntry
from briefkit.errors import ReadingError
from briefkit.reading.document import Document
from briefkit.reading.quantity import quoted
from briefkit.units import Speed

_FIGURE = re.compile(
    r"(?P<less>VNE less )?(?P<speed>[\d.,]+ ?[a-zA-Z/]+(?: [ICT]AS)?)(?: above (?P<bank>[\d.,]+ ?\S+))?"
)
_EXAMPLES: Final = '"100 kt", "VNE less 10 kt" or "VNE less 10 kt above 30 deg"'
Figure = tuple[Speed | None, float | None, float | None]


def figure(text: str) -> Figure | None:
    """Indicated speed, amount below VNE [m/s] and bank above which it holds [rad], None where not given; None if none.

    A calibrated or a true speed is none: the indicator shows neither.
    """
    found = _FIGURE.fullmatch(" ".join(text.split()))
    if found is None:
        return None
    try:
        speed = units.read_speed(found["speed"])
        bank = units.read(found["bank"], "angle") if found["bank"] else None
    except ReadingError:
        return None
    return (None, speed.value, bank) if found["less"] else (speed, None, bank)


def check(document: Document, key: str, entry: SpeedEntry, unit: str) -> None:
    """A figure that cannot be read is a fault: it would hold for crews and not for the computing."""
    if entry.text is None or document.has_fault_below(key):
        return
    typed = entry.value or entry.text
    found = figure(typed)
    if found is not None:
        speed, less, bank = found
        wrong = [speed is not None and not 10.0 <= speed.value <= 130.0, less is not None and not 0.0 < less <= 50.0]
        if any(wrong) or (bank is not None and not 0.0 < bank < 1.5):
            document.fault(f"{key}.value", quoted(typed), "an airspeed and a bank such as a manual gives", "look again")
        elif unit and not re.search(rf"\b{re.escape('KIAS' if unit == 'kt' else unit)}|\b{re.escape(unit)}\b", typed):
            document.fault(f"{key}.value", quoted(typed), f"{unit}, as units.speed says")
    elif entry.value is not None:
        document.fault(f"{key}.value", quoted(entry.value), f"a figure like {_EXAMPLES}")
    elif re.search(r"\d", entry.text):
        remedy = f"add value = ..., like {_EXAMPLES}; two figures are two entries"
        document.fault(f"{key}.value", "nothing", f"the figure in {quoted(entry.text)}", remedy)


def build(entry: SpeedEntry, source: str = "") -> ManualSpeed:
    """The frozen speed of an entry without faults."""
    text = needed(entry.text)
    speed, less, bank = figure(entry.value or text) or (None, None, None)
    return ManualSpeed(
        needed(entry.label), text, needed(entry.applies), entry.source or source, entry.value or "", speed, less, bank
    )
