"""The flapping solution: flap angle round the azimuth, coning, the tilt of the disc, and the controls held."""

from __future__ import annotations

import math
from typing import Any, Final

import bqplot
import ipywidgets as w

from briefkit import units
from briefkit.aircraft.model import Aircraft, Hub
from briefkit.envelope.condition import Condition
from briefkit.envelope.held import Held, held_at, to_stop_deg
from briefkit.envelope.solution import phase_lag_deg
from briefkit.figures.flapping import FlapCurveFigure, TipPathFigure
from briefkit.figures.still import Drawing, StillParts, Table
from briefkit.widgets import words
from briefkit.widgets.answers import Answers
from briefkit.widgets.exhibit import Exhibit, Fixed, guarded

_FREE: Final = {
    Hub.TEETERING: "the blades see-saw on one hinge and the coning is built in",
    Hub.ARTICULATED: "each blade flaps on its own hinge",
    Hub.HINGELESS: "each blade bends at its root",
}
_PLACES: Final = (("tail, 0°", 0.0), ("advancing, 90°", 0.5), ("nose, 180°", 1.0), ("retreating, 270°", 1.5))
HOLD: Final = "Hold the controls here"
TRIM: Final = "Trim again"


class Flapping(Exhibit):
    """Flapping of the rotor: trimmed, or with the controls held where another condition was trimmed.

    `Flapping(aircraft, condition)` is fixed, `Flapping(live)` follows. The condition needs an airspeed. Trimmed, the
    flapping is seen from the plane without cyclic feathering. With `held_from` (a condition), or a press of the live
    exhibit's button, the controls stay as they were trimmed there and the flapping is seen from the mast.
    """

    def __init__(
        self, source: object, condition: Condition | None = None, *, held_from: Condition | None = None
    ) -> None:
        self._asked_from = held_from
        self._from: Answers | None = None
        super().__init__(source, condition)
        if not isinstance(self._source, Fixed):
            self._hold = w.ToggleButton(
                value=self._from is not None, layout={"width": "auto", "align_self": "flex-start"}
            )
            self._hold.tooltip = "Held as they are trimmed now, while the condition changes"
            self._hold.description = TRIM if self._from else HOLD
            self._hold.observe(guarded(self.mark_old, self._pressed), "value")
            self.children = (self._caption, self._hold, self._picture, self._state)

    def hold(self, on: bool = True) -> None:
        """Hold the controls as they are trimmed in the present condition, or let them be trimmed again."""
        before = self._from
        if on:
            answers = self._source.answers
            _ = answers.solution  # a flight that has no trim has no controls to hold
            self._from = answers
        else:
            self._from = None
        try:
            self._redraw()
        except Exception:
            self._from = before
            raise

    def _pressed(self, change: Any) -> None:
        try:
            self.hold(change["new"])
        finally:
            self._hold.description = TRIM if self._from else HOLD

    def _build(self, aircraft: Aircraft) -> tuple[bqplot.Figure, ...]:
        if self._asked_from is not None:
            self._from = Answers(aircraft, self._asked_from)
        self._curve = FlapCurveFigure()
        self._sides = TipPathFigure(rotation=-1 if aircraft.mirrored else 1)
        return self._curve.figure, self._sides.figure

    def _draw(self, answers: Answers) -> StillParts:
        return self._draw_trimmed(answers) if self._from is None else self._draw_held(answers, self._from)

    # --- trimmed ---

    def _draw_trimmed(self, answers: Answers) -> StillParts:
        aircraft, solution = answers.aircraft, answers.solution
        b0, b1c, b1s = solution.b0_deg, solution.b1c_deg, solution.b1s_deg
        self._curve.update(b0, b1c, b1s)
        self._sides.update(b0, b1c, b1s)
        caption = (
            f"Coning {words.angle(b0)}; the disc is tilted {_tilted(b1c, b1s)}, seen from the plane without cyclic "
            f"feathering. Hub {aircraft.rotor.hub}: {_FREE[aircraft.rotor.hub]}."
        )
        rows = [(name, words.angle(_flap(b0, b1c, b1s, turn))) for name, turn in _PLACES]
        stop = _stop_row(aircraft, b0, 0.0)
        left = stop[0][1] if stop else ""
        table = Table(("Blade over", "Flap angle, up"), (*rows, *stop), "Flap angle of the blade")
        trimmed = (
            "Trimmed, the mast is taken to stand square to the disc: seen from it nothing flaps, and the whole way to "
            "the stop is left. The angles above are seen from the plane without feathering."
            if stop
            else ""
        )
        return self._parts_of(answers, "Flapping", caption, table, left, trimmed)

    # --- held ---

    def _draw_held(self, answers: Answers, trimmed: Answers) -> StillParts:
        aircraft, before = answers.aircraft, trimmed.solution
        now = held_at(aircraft, before, answers.condition)
        self._curve.update(now.b0_deg, now.b1c_deg, now.b1s_deg, before.b0_deg)
        self._sides.update(now.b0_deg, now.b1c_deg, now.b1s_deg, before.b0_deg)
        where = words.sentence(trimmed.aircraft, trimmed.condition)
        tilted = "stands where it stood"
        if max(abs(now.b1c_deg), abs(now.b1s_deg)) >= 0.05:
            tilted = f"has tilted {_tilted(now.b1c_deg, now.b1s_deg)} from where it stood on the mast"
        caption = (
            f"Controls held as trimmed at {where}: the disc {tilted}, coning {words.angle(now.b0_deg)} "
            f"({words.angle(before.b0_deg)} trimmed there). {_lift(now, answers.condition)}"
        )
        rows = [
            (name, words.angle(before.b0_deg), words.angle(_flap(now.b0_deg, now.b1c_deg, now.b1s_deg, turn)))
            for name, turn in _PLACES
        ]
        stop = _stop_row(aircraft, now.b0_deg, now.tilt_deg)
        left = stop[0][1] if stop else ""
        rows += [(*one, left) for one in _stop_row(aircraft, before.b0_deg, 0.0)]
        table = Table(
            ("Blade over", "As it was trimmed", "Controls held"), tuple(rows), "Flap angle of the blade, from the mast"
        )
        settled = "The disc as it settles before the pilot answers: what the aircraft then does is not computed."
        return self._parts_of(answers, "Flapping, controls held", caption, table, left, settled)

    def _parts_of(self, answers: Answers, title: str, caption: str, table: Table, left: str, note: str) -> StillParts:
        """`left` is what is left to the flap stop as the table has it; empty where the file gives no stop."""
        stop, lag = answers.aircraft.rotor.flap_stop, phase_lag_deg(answers.aircraft, answers.condition)
        notes = [
            f"From force to flap the rotor lags {units.show_number(lag)}° (hover, here). "
            "This is steady flight: it does not show which way a stalling rotor rolls."
        ]
        if stop is not None:
            notes.append(
                f"Flap stop: {stop.text.replace(' deg', '°')} ({stop.source}). Left to it, at most: {left}; less by "
                "what the centre of gravity takes."
            )
        return StillParts(
            title=title, caption=caption, alt=f"Flap angle round the azimuth and the disc from two sides. {caption}",
            inputs=self._inputs(answers),
            drawings=(
                Drawing(self._curve.figure, "Flap angle round the azimuth", f"One wave a turn. {caption}"),
                Drawing(self._sides.figure, "The disc from the left and from behind", caption),
            ),
            table=table, notes=(*notes, *([note] if note else [])),
        )  # fmt: skip

    def _inputs(self, answers: Answers) -> tuple[tuple[str, str], ...]:
        stated = words.inputs(answers.aircraft, answers.condition)
        if self._from is None:
            return stated
        return (*stated, ("Controls held from", words.sentence(self._from.aircraft, self._from.condition)))


def _flap(b0: float, b1c: float, b1s: float, turn: float) -> float:
    """Flap angle at an azimuth given in half turns."""
    return b0 + b1c * math.cos(math.pi * turn) + b1s * math.sin(math.pi * turn)


def _tilted(b1c: float, b1s: float) -> str:
    """ "1.9° back and 0.4° towards the retreating side", what is nothing left out: b1s above zero lifts the advancing
    blade."""
    parts = [
        f"{words.angle(abs(b1c))} {'back' if b1c < 0.0 else 'forward'}",
        f"{words.angle(abs(b1s))} towards the {'retreating' if b1s > 0.0 else 'advancing'} side",
    ]
    shown = [part for part, angle in zip(parts, (b1c, b1s), strict=True) if abs(angle) >= 0.05]
    return " and ".join(shown) or "nowhere"


def _lift(now: Held, condition: Condition) -> str:
    """What the rotor pulls, against what this flight needs."""
    pulls = f"The rotor pulls {units.show_number(now.load, 2)} times the weight"
    if condition.load_factor <= 1.0 + 1e-9:
        return f"{pulls}."
    return f"{pulls}; a level turn at {words.turn(condition)} needs {units.show_number(condition.load_factor, 2)}."


def _stop_row(aircraft: Aircraft, b0: float, tilt: float) -> list[tuple[str, str]]:
    """What is left to the flap stop, rounded down to a tenth; no row where the file gives no stop."""
    left = to_stop_deg(aircraft, b0, tilt)
    if left is None:
        return []
    down = math.floor(left * 10.0 + 1e-6) / 10.0
    return [("left to the flap stop, at most", words.angle(down) if left > 0.0 else "nothing: the stop is met")]
