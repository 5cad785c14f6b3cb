"""Height as a crew has it: the ground's elevation and the QNH, two boxes beside the pressure altitude."""

from __future__ import annotations

from collections.abc import Callable

import ipywidgets as w

from briefkit.aircraft.model import Aircraft
from briefkit.widgets.exhibit import guarded

EXAMPLES = {"ft": "7,200 ft", "m": "2,200 m", "inHg": "29.38 inHg", "hPa": "995 hPa"}


class ByQnh(w.HBox):  # type: ignore[misc]  # ipywidgets carries no types
    """Two boxes, each a number with its unit or bare in the manual's; with both filled `asked` gets the two texts.

    What `asked` raises is handed to `refuse` in words. `clear` empties them: the height was set another way since.
    """

    def __init__(self, aircraft: Aircraft, asked: Callable[[str, str], None], refuse: Callable[[str], None]) -> None:
        self._asked, self._units, self._busy = asked, aircraft.units, False
        self.elevation = _box("or elevation", EXAMPLES[aircraft.units.height], 160)
        self.qnh = _box("and QNH", EXAMPLES[aircraft.units.pressure], 64)
        super().__init__([self.elevation, self.qnh], layout={"flex_flow": "row wrap"})
        self.add_class("by-qnh")
        for box in (self.elevation, self.qnh):
            box.observe(guarded(refuse, self._typed), "value")

    def clear(self) -> None:
        """Empty both boxes."""
        self._busy = True
        try:
            self.elevation.value = self.qnh.value = ""
        finally:
            self._busy = False

    def _typed(self, _: object) -> None:
        texts = [box.value.replace("\u00a0", " ").strip() for box in (self.elevation, self.qnh)]
        if self._busy or not all(texts):
            return
        kept = (self.elevation.value, self.qnh.value)
        shown = zip(texts, (self._units.height, self._units.pressure), strict=True)
        self._asked(*(f"{text} {unit}" if text[-1:].isdigit() else text for text, unit in shown))
        self._busy = True
        try:  # showing the new condition emptied them: they are what set it
            self.elevation.value, self.qnh.value = kept
        finally:
            self._busy = False


def _box(name: str, example: str, label: int) -> w.Text:
    made = w.Text(
        description=name, placeholder=example, continuous_update=False, style={"description_width": f"{label}px"},
        layout={"width": f"{label + 130}px"},
    )  # fmt: skip
    made.tooltip = f"{name}, like {example}"
    return made
