"""The flapping solution: flap angle round the azimuth, coning, and the tilt of the disc."""

from __future__ import annotations

import bqplot

from briefkit import units
from briefkit.aircraft.model import Aircraft, Hub
from briefkit.envelope.condition import Condition
from briefkit.figures.flapping import FlapCurveFigure, TipPathFigure
from briefkit.figures.still import Drawing, StillParts, Table
from briefkit.widgets import words
from briefkit.widgets.answers import Answers
from briefkit.widgets.exhibit import Exhibit

_FREE = {
    Hub.TEETERING: "the blades see-saw on one hinge and the coning is built in",
    Hub.ARTICULATED: "each blade flaps on its own hinge",
    Hub.HINGELESS: "each blade bends at its root",
}


class Flapping(Exhibit):
    """Flapping of the trimmed rotor, seen from the plane without cyclic feathering.

    `Flapping(aircraft, condition)` is fixed, `Flapping(live)` follows. The condition needs an airspeed.
    """

    def __init__(self, source: object, condition: Condition | None = None) -> None:
        super().__init__(source, condition)

    def _build(self, aircraft: Aircraft) -> tuple[bqplot.Figure, ...]:
        self._curve = FlapCurveFigure()
        self._sides = TipPathFigure(rotation=-1 if aircraft.mirrored else 1)
        return self._curve.figure, self._sides.figure

    def _draw(self, answers: Answers) -> StillParts:
        aircraft, solution = answers.aircraft, answers.solution
        b0, b1c, b1s = solution.b0_deg, solution.b1c_deg, solution.b1s_deg
        self._curve.update(b0, b1c, b1s)
        self._sides.update(b0, b1c, b1s)
        fore_aft = f"{words.angle(abs(b1c))} {'back' if b1c < 0.0 else 'forward'}"
        aside = f"{words.angle(abs(b1s))} towards the {'retreating' if b1s > 0.0 else 'advancing'} side"
        caption = (
            f"Coning {words.angle(b0)}; the disc is tilted {fore_aft} and {aside}, seen from the plane without cyclic "
            f"feathering. Hub {aircraft.rotor.hub}: {_FREE[aircraft.rotor.hub]}."
        )
        flaps = (
            ("tail, 0°", b0 + b1c),
            ("advancing, 90°", b0 + b1s),
            ("nose, 180°", b0 - b1c),
            ("retreating, 270°", b0 - b1s),
        )
        return StillParts(
            title="Flapping",
            caption=caption,
            alt=f"Flap angle round the azimuth and the disc from two sides. {caption}",
            inputs=words.inputs(aircraft, answers.condition),
            drawings=(
                Drawing(self._curve.figure, "Flap angle round the azimuth", f"One wave a turn. {caption}"),
                Drawing(self._sides.figure, "The disc from the left and from behind", caption),
            ),
            table=Table(
                ("Blade over", "Flap angle, up"),
                tuple((name, words.angle(value)) for name, value in flaps),
                "Flap angle of the blade",
            ),
            notes=(
                f"From force to flap the rotor lags {units.show_number(solution.phase_lag_deg)}° (hover, here). This "
                " is steady flight: it does not show which way a stalling rotor rolls.",
            ),
        )
