"""briefkit: how close your weights, bases, days and turns bring your own rotor to stall, on one page a crew can check.

The public names are loaded when first used, so that `import briefkit` costs nothing.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

__version__ = "0.1.0"

__all__ = [
    "Condition",
    "CueCard",
    "DiscMap",
    "EquivalentChart",
    "Flapping",
    "LiveCondition",
    "Reductions",
    "RulesOfThumb",
    "SetByTable",
    "StallBoundary",
    "ToPaper",
    "WhatIf",
    "covered_bank",
    "equivalent_vne",
    "equivalent_vnes",
    "load_aircraft",
    "load_deck",
    "load_operation",
    "onset_band",
    "solve",
    "solve_many",
    "still",
]

if TYPE_CHECKING:
    from briefkit.aircraft.load import load_aircraft
    from briefkit.aircraft.operation import load_operation
    from briefkit.envelope.condition import Condition
    from briefkit.envelope.equivalent import covered_bank, equivalent_vne, equivalent_vnes
    from briefkit.envelope.solution import solve, solve_many
    from briefkit.envelope.spread import onset_band
    from briefkit.figures.still import still
    from briefkit.session.deck import load_deck
    from briefkit.widgets.cue_card import CueCard
    from briefkit.widgets.disc import DiscMap
    from briefkit.widgets.equivalent_chart import EquivalentChart
    from briefkit.widgets.flapping import Flapping
    from briefkit.widgets.live import LiveCondition
    from briefkit.widgets.paper import ToPaper
    from briefkit.widgets.reductions import Reductions
    from briefkit.widgets.rules_of_thumb import RulesOfThumb
    from briefkit.widgets.set_by import SetByTable
    from briefkit.widgets.stall_boundary import StallBoundary
    from briefkit.widgets.what_if import WhatIf
else:
    _HOME = {
        "load_aircraft": "briefkit.aircraft.load",
        "load_operation": "briefkit.aircraft.operation",
        "Condition": "briefkit.envelope.condition",
        "covered_bank": "briefkit.envelope.equivalent",
        "equivalent_vne": "briefkit.envelope.equivalent",
        "equivalent_vnes": "briefkit.envelope.equivalent",
        "solve": "briefkit.envelope.solution",
        "solve_many": "briefkit.envelope.solution",
        "onset_band": "briefkit.envelope.spread",
        "still": "briefkit.figures.still",
        "DiscMap": "briefkit.widgets.disc",
        "Flapping": "briefkit.widgets.flapping",
        "LiveCondition": "briefkit.widgets.live",
        "StallBoundary": "briefkit.widgets.stall_boundary",
        "load_deck": "briefkit.session.deck",
        "CueCard": "briefkit.widgets.cue_card",
        "EquivalentChart": "briefkit.widgets.equivalent_chart",
        "Reductions": "briefkit.widgets.reductions",
        "RulesOfThumb": "briefkit.widgets.rules_of_thumb",
        "SetByTable": "briefkit.widgets.set_by",
        "ToPaper": "briefkit.widgets.paper",
        "WhatIf": "briefkit.widgets.what_if",
    }

    def __getattr__(name: str) -> object:
        if name not in _HOME:
            raise AttributeError(f"module 'briefkit' has no attribute {name!r}")
        from importlib import import_module

        value = getattr(import_module(_HOME[name]), name)
        globals()[name] = value
        return value

    def __dir__() -> list[str]:
        return sorted(set(globals()) | set(__all__))
