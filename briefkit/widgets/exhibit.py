"""What every exhibit shares: caption, the condition it is drawn for, figures, and an honest state when one fails."""

from __future__ import annotations

from collections.abc import Callable
from html import escape
from typing import Any, Protocol

import bqplot
import ipywidgets as w

from briefkit.aircraft.model import Aircraft
from briefkit.envelope.condition import Condition
from briefkit.errors import BriefkitError, ReadingError
from briefkit.figures import theme
from briefkit.figures.still import StillParts
from briefkit.widgets import closing, words
from briefkit.widgets.answers import Answers

STYLE = (
    "<style>"
    f".briefkit{{background:{theme.PAPER};color:{theme.INK};padding:8px 12px;font-size:14px;line-height:1.45;"
    "font-variant-numeric:tabular-nums}"
    f".briefkit,.briefkit .bqplot text{{font-family:{theme.FONTS}}}"
    ".briefkit .widget-html-content,.briefkit .jupyter-widgets,.briefkit .widget-label"
    f"{{color:{theme.INK};font-size:14px;line-height:1.45}}"
    ".briefkit h4{margin:0;font-size:16px;font-weight:600}.briefkit p{margin:2px 0}"
    f".briefkit .for{{color:{theme.GREY}}}"
    f".briefkit .word{{border-left:4px solid {theme.INK};padding-left:8px;font-weight:600}}"
    ".briefkit .named-box{position:relative}.briefkit .named-box .widget-label"
    "{position:absolute;width:1px!important;height:1px;min-width:0!important;overflow:hidden;clip-path:inset(50%)}"
    f".briefkit .jupyter-button{{color:{theme.INK};background:{theme.PAPER};border:1px solid {theme.GREY};"
    "box-shadow:none}.briefkit .jupyter-button.mod-active{border-width:3px;font-weight:600}"
    f".briefkit .noUi-handle{{border:1px solid {theme.GREY}}}"
    ".briefkit-old{opacity:.35;filter:grayscale(1)}"
    ".briefkit table{border-collapse:collapse;font-size:14px;line-height:1.45}"
    f".briefkit th,.briefkit td{{text-align:left;vertical-align:top;padding:3px 16px 3px 0;"
    f"border:0;border-bottom:1px solid {theme.RULE};background:{theme.PAPER};color:{theme.INK};"
    "white-space:normal}.briefkit th{font-weight:600}"
    f".briefkit table caption{{text-align:left;color:{theme.GREY}}}"
    f".briefkit tr.now th,.briefkit tr.now td{{border-bottom:3px solid {theme.INK};font-weight:600}}"
    ".briefkit .bqplot text{font-variant-numeric:tabular-nums}.briefkit .bqplot>svg{overflow:visible}"
    "</style>"
)


class Source(Protocol):
    """Where an exhibit gets its answers: a fixed condition, or the live one."""

    @property
    def answers(self) -> Answers: ...

    def follow(self, exhibit: Exhibit) -> None: ...

    def leave(self, exhibit: Exhibit) -> None: ...


class Fixed:
    """A source that never changes."""

    def __init__(self, aircraft: Aircraft, condition: Condition) -> None:
        self.answers = Answers(aircraft, condition)

    def follow(self, exhibit: Exhibit) -> None:
        """Nothing will ever change."""

    def leave(self, exhibit: Exhibit) -> None:
        """Nothing was followed."""


class Exhibit(w.VBox):  # type: ignore[misc]  # ipywidgets carries no types
    """Base of the exhibits. A subclass makes its figures once, redraws them from `Answers`, and says what they show.

    `Exhibit(aircraft, condition)` is fixed and raises what its condition refuses; `Exhibit(live)` follows a
    `LiveCondition` and shows a refusal in words, its last picture greyed and marked not current.
    """

    heading = ""

    def __init__(self, source: object, condition: Condition | None = None) -> None:
        self._source = _source(source, condition)
        self._parts: StillParts | None = None
        self._fault = ""
        self._drawn_for = ""
        self._figures = self._build(self._source.answers.aircraft)
        self._caption, self._state = w.HTML(), w.HTML()
        style = w.HTML(STYLE, layout={"display": "none"})
        # A narrow page gets a scroll bar: a picture cut at its edge could be taken for whole.
        self._picture = w.Box([style, *self._figures], layout={"flex_flow": "row wrap", "overflow": "auto"})
        super().__init__([self._caption, self._picture, self._state])
        self.add_class("briefkit")
        self._source.follow(self)
        closing.remember(self)
        if not isinstance(self._source, Fixed):
            self.refresh()
            return
        try:
            self._redraw()
        except Exception:
            self.close()
            raise

    # --- for subclasses ---

    def _build(self, aircraft: Aircraft) -> tuple[bqplot.Figure, ...]:
        """Make the figures, empty."""
        raise NotImplementedError

    def _draw(self, answers: Answers) -> StillParts:
        """Redraw the figures in place and return what they say."""
        raise NotImplementedError

    def _for_words(self, answers: Answers) -> str:
        """What the picture is drawn for, in one line."""
        return words.sentence(answers.aircraft, answers.condition)

    def _spare(self) -> tuple[w.Widget, ...]:
        """Models the figures use that no trait of theirs leads to."""
        return ()

    # --- state ---

    @property
    def condition(self) -> Condition:
        """The condition this exhibit is asked for (its picture may be older: then it says so)."""
        return self._source.answers.condition

    @property
    def fault(self) -> str:
        """Why the picture is not current, in words; empty when it is."""
        return self._fault

    def still_parts(self) -> StillParts:
        """The exhibit as it stands, for paper. A picture that is not current is refused: it must not be printed."""
        if self._fault or self._parts is None:
            raise ReadingError("a picture that is not current", "an exhibit that shows its condition", self._fault)
        return self._parts

    def refresh(self) -> None:
        """Redraw for the source's present condition; a failure is shown in words and never raised."""
        try:
            self._redraw()
        except BriefkitError as error:
            self.mark_old(str(error))
        except Exception as error:  # a callback that raises would vanish in the front end: say it here instead
            self.mark_old(f"fault in the program: {type(error).__name__}: {error}")

    def mark_old(self, why: str) -> None:
        """Grey the picture and say why it is not current."""
        self._fault = why
        self._picture.add_class("briefkit-old")
        shown = ""
        if self._drawn_for:
            shown = f"<p class='for'>The grey picture is for {escape(self._drawn_for)}.</p>"
        self._state.value = f"<p class='word'>Not current. {escape(why)}</p>{shown}"

    def close(self) -> None:
        """Close every model of this exhibit and stop following."""
        if self.comm is None:  # never opened, or closed before: there is nothing to give back
            return
        self._source.leave(self)
        closing.forget(self)
        closing.close_tree(self, *self._spare())

    def _redraw(self) -> None:
        answers = self._source.answers
        parts = self._draw(answers)
        self._parts, self._fault, self._drawn_for = parts, "", self._for_words(answers)
        self._caption.value = (
            f"<h4>{escape(parts.title)}</h4><p>{escape(parts.caption)}</p>"
            f"<p class='for'>{escape(answers.aircraft.name)}: {escape(self._drawn_for)}</p>"
        )
        self._state.value = "".join(f"<p class='for'>{escape(note)}</p>" for note in parts.notes)
        self._picture.remove_class("briefkit-old")


def _source(source: object, condition: Condition | None) -> Source:
    if isinstance(source, Aircraft):
        if condition is None:
            raise ReadingError("an aircraft alone", "an aircraft with a condition, or a LiveCondition")
        return Fixed(source, condition)
    if condition is not None or not all(hasattr(source, name) for name in ("answers", "follow", "leave")):
        raise ReadingError(type(source).__name__, "an aircraft with a condition, or a LiveCondition alone")
    return source  # type: ignore[return-value]


def guarded(show: Callable[[str], None], act: Callable[..., None]) -> Callable[..., None]:
    """A callback whose errors are shown in the panel: the front end would swallow them."""

    def safe(*arguments: Any) -> None:
        try:
            act(*arguments)
        except BriefkitError as error:
            show(str(error))
        except Exception as error:
            show(f"fault in the program: {type(error).__name__}: {error}")

    return safe
