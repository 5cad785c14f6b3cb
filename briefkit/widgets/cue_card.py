"""The cue card: what stall on the retreating side feels like in this type, which one it is, and what to do."""

from __future__ import annotations

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.envelope import cues
from briefkit.envelope.condition import Condition
from briefkit.errors import Refusal
from briefkit.figures.still import StillParts, Table
from briefkit.widgets import words
from briefkit.widgets.answers import Answers
from briefkit.widgets.table_exhibit import TableExhibit


class CueCard(TableExhibit):
    """Pitch, roll, vibration in hertz at this rotor speed, "which one is it?", and the recovery with its source.

    `CueCard(aircraft, condition)` is fixed, `CueCard(live)` follows. Nothing on it but the frequency and the phase lag
    is computed: a roll direction is the handbook's, mirrored for a rotor that turns clockwise.
    """

    def __init__(self, source: object, condition: Condition | None = None) -> None:
        super().__init__(source, condition)

    def _draw(self, answers: Answers) -> StillParts:
        aircraft, condition = answers.aircraft, answers.condition
        felt = cues.onset_words(aircraft)
        side = cues.sides(aircraft)
        shake = cues.vibration(aircraft)
        k = condition.rotor_speed
        sentences, source = cues.recovery(aircraft)
        mirrored = f"; {side.mirrored}" if side.mirrored else ""
        caption = (
            f"{felt[:1].upper()}{felt[1:]} ({cues.CHAPTER_11}{mirrored}.) The shake comes about "
            f"{units.show_number(shake.blade * k, 1)} times a second, once a blade; the rotor turns "
            f"{units.show_number(shake.once * k, 1)} times a second ({cues.NO_SOURCE}). "
            f"What to do: {' '.join(sentences)} Source: {source}."
        )
        rows = tuple((one.name, one.when, one.sign, one.first, one.source) for one in cues.which_one(aircraft))
        table = Table(("Which one is it?", "When", "What one notices", "First", "Source"), rows, "Different hands")
        self._show(table)
        return StillParts(
            title="If it starts",
            caption=caption,
            alt=f"Cues of blade stall. {caption}",
            inputs=words.inputs(aircraft, condition),
            drawings=(),
            table=table,
            notes=_hub(aircraft, answers),
        )


def _hub(aircraft: Aircraft, answers: Answers) -> tuple[str, ...]:
    """How this hub answers. The phase lag needs a solved rotor: without one the sentence is left out."""
    if answers.condition.ias is None:
        return ()
    try:
        return (cues.hub_words(aircraft, answers.solution.phase_lag_deg),)
    except Refusal:
        return ()
