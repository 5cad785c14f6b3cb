"""The what-if panel of a recurrent check: predict, the manual's figure, the computed one, decide; each step logged.

It is worked by keyboard alone: Tab and Space through native boxes and buttons, or one key at a time in the box at the
foot. The order of the steps is kept by `session.recurrent`, and no answer is sent to the browser before it is shown.
"""

from __future__ import annotations

import sys
import time
from collections.abc import Callable
from html import escape
from typing import Any, Final

import ipywidgets as w

from briefkit.errors import ReadingError
from briefkit.figures.still import StillParts, Table
from briefkit.session.answers import Computed, Manual
from briefkit.session.deck import Deck
from briefkit.session.record import SessionLog, new_log_path
from briefkit.session.recurrent import Session, SessionError, Stage
from briefkit.widgets import closing
from briefkit.widgets.exhibit import STYLE, guarded
from briefkit.widgets.free_try import FreeTry
from briefkit.widgets.paper import FOLDER, live_page, write_live_page
from briefkit.widgets.what_if_style import WHAT_IF_STYLE

STEPS: Final = {
    Stage.PREDICT: "Lock the predictions",
    Stage.LOCKED: "Show the manual’s figure",
    Stage.MANUAL: "Show the computed figure",
    Stage.COMPUTED: "Record the decision",
    Stage.DECIDED: "Next case",
}
KEYS: Final = "s step, n next, p back, r reset, t try, b blank, f fill"
# A key or button held down repeats: it must not run through the reveals.
HELD: Final = 0.35  # s
MOST_BOXES: Final = 12


class WhatIf(w.VBox):  # type: ignore[misc]  # ipywidgets carries no types
    """A deck in front of a crew: `WhatIf(deck)`.

    Each step is logged in `session_logs/` of the operator folder, or in the `log` given; `rehearsal=True` records
    nothing, and says so. `boxes` is how many predictions a case has room for, 1 to 12. Raises what the log's folder
    refuses. What a step refuses is said in the panel and has not happened.
    """

    def __init__(self, deck: Deck, *, log: SessionLog | None = None, rehearsal: bool = False, boxes: int = 4) -> None:
        if not isinstance(deck, Deck):
            raise ReadingError(type(deck).__name__, "a deck", "load_deck(folder, aircraft)")
        if not 1 <= boxes <= MOST_BOXES:
            raise ReadingError(f"{boxes} boxes", f"1 to {MOST_BOXES}")
        if rehearsal and log is not None:
            raise ReadingError("a rehearsal with a log", "one of the two")
        if log is None and not rehearsal:
            log = SessionLog(new_log_path(deck.folder), deck)
        self.session = Session(deck, log)
        self._manual: Manual | None = None
        self._computed: Computed | None = None
        self._filled, self._busy, self._trying = False, False, False
        self._clock: Callable[[], float] = time.monotonic
        self._last_step = float("-inf")
        self._make(boxes)
        super().__init__([w.HTML(STYLE + WHAT_IF_STYLE, layout={"display": "none"}), self._screen, self._moves])
        for name in ("briefkit", "briefkit-what-if"):
            self.add_class(name)
        self._listen()
        self._draw()
        self._say(log.torn if log is not None and log.torn else "")
        closing.remember(self)

    # --- construction ---

    def _make(self, boxes: int) -> None:
        self._head, self._said, self._shown, self._word = (w.HTML() for _ in range(4))
        self._boxes = [_box(f"Prediction {number}") for number in range(1, boxes + 1)]
        self._predictions = w.HBox(self._boxes, layout={"flex_flow": "row wrap", "overflow": "hidden"})
        self._decision = _box("Decision")
        case, deck = self.session.case, self.session.deck
        self._free = FreeTry(deck.aircraft, case.condition, self.session.what_if)
        sides = [
            w.VBox([self._head, self._predictions, self._said, self._free, self._word]),
            w.VBox([self._free.said]),
            w.VBox([self._shown, self._decision]),
        ]
        for side in sides:
            side.add_class("side")
        self._screen = w.HBox(sides, layout={"flex_flow": "row wrap", "overflow": "visible"})
        self._screen.add_class("screen")
        names = ("", "Next", "Back", "Reset", "Try another", "Blank", "Fill the window", "Write to a page")
        self._buttons = [w.Button(description=name) for name in names]
        self._step, self._next, self._back, self._reset, self._try, self._blank, self._fill, self._paper = self._buttons
        self._blank.add_class("blanker")
        row = w.HBox(self._buttons, layout={"flex_flow": "row wrap", "overflow": "hidden"})
        row.add_class("buttons")
        self._keys = w.Text(description="One key:", placeholder=KEYS, continuous_update=True)
        self._keys.tooltip = KEYS
        self._moves = w.VBox([row, self._keys], layout={"overflow": "visible"})
        self._moves.add_class("moves")

    def _listen(self) -> None:
        acts = (
            self.step, self.next, self.back, self.reset, self.toggle_try, self.toggle_blank, self.toggle_fill,
            self.write,
        )  # fmt: skip
        for button, act in zip(self._buttons, acts, strict=True):
            button.on_click(guarded(self._say, lambda _, act=act: act()))
        self._keys.observe(guarded(self._say, self._key), "value")

    # --- what a key or a button does ---

    def step(self) -> None:
        """The one next thing: lock, show the manual's figure, show the computed one, record the decision, go on."""
        if self.session.blank:
            raise SessionError("the screen is blank; show it first")
        now, self._last_step, last = self._clock(), self._clock(), self._last_step
        if now - last < HELD:
            return
        stage = self.session.stage
        if stage is Stage.PREDICT:
            self.session.lock([box.value for box in self._boxes])
        elif stage is Stage.LOCKED:
            self._manual = self.session.show_manual()
        elif stage is Stage.MANUAL:
            self._computed = self.session.show_computed()
        elif stage is Stage.COMPUTED:
            self.session.decide(self._decision.value)
        else:
            self.session.next()
            self._clear()
        self._draw()

    def next(self) -> None:
        """On to the next case, from its beginning."""
        self.session.next()
        self._clear()
        self._draw()

    def back(self) -> None:
        """Back to the case before, from its beginning."""
        self.session.back()
        self._clear()
        self._draw()

    def reset(self) -> None:
        """The present case from its beginning; what was recorded stays recorded."""
        self.session.reset()
        self._clear()
        self._draw()

    def toggle_try(self) -> None:
        """Open the sliders for any other condition, or put them away; only once the case's own figures are out."""
        if self.session.stage < Stage.COMPUTED:
            raise SessionError("both figures of the case are shown before anything else is tried")
        if self.session.blank:
            raise SessionError("the screen is blank; show it first")
        self._trying = not self._trying
        self._free.begin(self.session.case.condition)
        self._draw()

    def toggle_blank(self) -> None:
        """Blank the whole window, or show it again. A case may be set while it is blank."""
        self.session.toggle_blank()
        self._draw()

    def toggle_fill(self) -> None:
        """Cover the whole window, menus and code with it, or give it back."""
        self._filled = not self._filled
        self._draw()

    def write(self) -> None:
        """Write the panel as it stands into a page, in `live_pages/` of the operator folder."""
        deck = self.session.deck
        page = live_page(deck.title, deck.aircraft, [self], ("No names and no results on this page.",))
        path = write_live_page(deck.operator, deck.folder.name, page)
        self._say(f"Written: {path.name}, in {FOLDER} of the operator folder.")

    def close(self) -> None:
        """End the session on its log and close every model of the panel."""
        if self.comm is None:  # never opened, or closed before: there is nothing to give back
            return
        try:
            if not sys.is_finalizing():  # ipywidgets closes what is left while Python ends: too late to write
                self.session.close()
        finally:
            closing.forget(self)
            closing.close_tree(self)

    def still_parts(self) -> StillParts:
        """The case as far as it has been shown: nothing that was not on the screen."""
        session, case = self.session, self.session.case
        rows = [("Start", case.start_text), ("Change", case.change_text), ("Asked", case.prompt)]
        rows += [(f"Prediction {n}", text) for n, text in enumerate(session.predictions, start=1)]
        if self._manual is not None:
            rows.append(("The manual", f"{self._manual.text} ({self._manual.where})"))
        if self._computed is not None:
            rows.append(("Computed", " ".join(part for part in (self._computed.text, self._computed.how) if part)))
        if session.decision:
            rows.append(("Decision", session.decision))
        rows += self._free.rows()
        title = self._place()
        return StillParts(
            title=title, caption=f"{case.start_text}. Then: {case.change_text}.", alt=f"{title}: {case.prompt}",
            inputs=(), drawings=(), table=Table(("Step", "What was said"), tuple(rows)),
        )  # fmt: skip

    # --- drawing ---

    def _key(self, change: Any) -> None:
        """One key: the box is emptied at once, so that the next key is a key again."""
        text = change["new"]
        if self._busy or not text:
            return
        self._busy = True
        try:
            self._keys.value = ""
        finally:
            self._busy = False
        acts = {"s": self.step, " ": self.step, "n": self.next, "p": self.back, "r": self.reset, "t": self.toggle_try,
                "b": self.toggle_blank, "f": self.toggle_fill}  # fmt: skip
        act = acts.get(text[-1].lower())
        if act is None:
            raise SessionError(f"no such key; {KEYS}")
        act()

    def _clear(self) -> None:
        self._manual = self._computed = None
        self._trying = False
        self._free.begin(self.session.case.condition)
        self._last_step = float("-inf")
        for box in (*self._boxes, self._decision):
            box.value = ""

    def _draw(self) -> None:
        session, stage = self.session, self.session.stage
        case = session.case
        self._head.value = (
            f"<h2>{escape(self._place())}</h2>"
            f"<p class='small'>{escape(session.deck.title)}</p>"
            f"<p>{escape(case.start_text)}.</p><p class='large'>Then: {escape(case.change_text)}.</p>"
            + ("" if self._trying else f"<p>{escape(case.prompt)}</p>")  # the sliders take its place
        )
        self._predictions.layout.display = "flex" if stage is Stage.PREDICT else "none"
        self._decision.layout.display = "flex" if stage is Stage.COMPUTED else "none"
        self._free.layout.display = "flex" if self._trying else "none"
        self._said.value = _predicted(session.predictions)
        # What is tried takes the lesson's place, so that it is seen without scrolling.
        self._shown.value = _figures(self._manual, self._computed) + ("" if self._trying else self._lesson())
        self._step.description = STEPS[stage]
        last = session.index == len(session.deck.cases) - 1
        self._step.disabled = last and stage is Stage.DECIDED
        self._next.disabled, self._back.disabled = last, session.index == 0
        self._try.disabled = stage < Stage.COMPUTED
        self._try.description = "Close the tries" if self._trying else "Try another"
        self._blank.description = "Show the screen" if session.blank else "Blank"
        self._fill.description = "Leave the full window" if self._filled else "Fill the window"
        for name, on in (("briefkit-blank", session.blank), ("briefkit-fill", self._filled)):
            (self.add_class if on else self.remove_class)(name)
        self._say("")

    def _lesson(self) -> str:
        case, session = self.session.case, self.session
        if session.stage is not Stage.DECIDED:
            return ""
        source = f"<p class='small'>{escape(case.source)}</p>" if case.source else ""
        return (
            f"<h3>Decided</h3><p>{escape(session.decision)}</p><h3>What to take from it</h3>"
            f"<p>{escape(case.teaching)}</p><p>Decision: {escape(case.expected)}</p>{source}"
        )

    def _place(self) -> str:
        session = self.session
        return f"Case {session.index + 1} of {len(session.deck.cases)}: {session.case.name}"

    def _say(self, words: str) -> None:
        """What was refused or done, and what is recorded, under everything else."""
        log = self.session.log
        kept = "Rehearsal: nothing is recorded." if log is None else f"Recorded in {log.path.name}, without names."
        said = f"<p class='word'>{escape(words[:1].upper() + words[1:])}</p>" if words else ""
        invented = self.session.deck.aircraft.invented
        self._word.value = f"{said}<p class='small'>{escape(' '.join(part for part in (kept, invented) if part))}</p>"


def _box(name: str) -> w.Text:
    return w.Text(description=name, continuous_update=False)


def _predicted(predictions: tuple[str, ...]) -> str:
    if not predictions:
        return ""
    return f"<h3>Predicted, and locked</h3><p>{'; '.join(escape(text) for text in predictions)}</p>"


def _figures(manual: Manual | None, computed: Computed | None) -> str:
    """The manual's figure in black; the computed one in the one blue, under it."""
    parts = []
    if manual is not None:
        small = "".join(f"<p class='small'>{escape(line)}</p>" for line in (manual.where, *manual.also))
        parts.append(f"<h3>The manual</h3><p class='large'>{escape(manual.text)}</p>{small}")
    if computed is not None:
        how = f"<p class='small'>{escape(computed.how)}</p>" if computed.how else ""
        parts.append(f"<h3>Computed</h3><p class='large computed'>{escape(computed.text)}</p>{how}")
    return "".join(parts)
