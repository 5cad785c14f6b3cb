"""From live to paper: what stands on the screen now becomes one static page, hardened as every page is."""

from __future__ import annotations

import datetime as dt
import secrets
from collections.abc import Sequence
from html import escape
from importlib.metadata import version
from pathlib import Path
from typing import Final

import ipywidgets as w

from briefkit.aircraft.model import Aircraft
from briefkit.brief.harden import harden
from briefkit.brief.identity import operator_folder
from briefkit.brief.pages import render_plain
from briefkit.brief.write import write_page
from briefkit.errors import ReadingError
from briefkit.figures.still import still
from briefkit.widgets import closing
from briefkit.widgets.exhibit import STYLE, guarded

FOLDER: Final = "live_pages"


def live_page(title: str, aircraft: Aircraft, things: Sequence[object], under: Sequence[str] = ()) -> str:
    """The page of some exhibits and panels as they stand: no script, nothing fetched, marked not for crews.

    A picture that is not current is refused (`ReadingError`), as is a page of nothing: an old number is never printed.
    """
    if not things:
        raise ReadingError("nothing to write", "at least one exhibit or panel")
    parts = tuple(still(thing, f"live-{place}") for place, thing in enumerate(things))
    behind = (
        f"{aircraft.name}, {aircraft.configuration}. Aircraft file {aircraft.data_hash[:12]}, "
        f"briefkit {version('briefkit')}."
    )
    return harden(
        render_plain("live.html.j2", title=title, under=(*under, behind), parts=parts, invented=aircraft.invented)
    )


def write_live_page(folder: Path, name: str, page: str) -> Path:
    """Write a page into `live_pages/` of a folder under a name of its own; what is there is never written over."""
    at = f"{dt.datetime.now(dt.UTC):%Y%m%dT%H%M%SZ}"
    path = folder / FOLDER / f"{name}-{at}-{secrets.token_hex(2)}.html"
    write_page(path, page)
    return path


class ToPaper(w.VBox):  # type: ignore[misc]  # ipywidgets carries no types
    """A button that writes a live panel as it stands into a page of the operator folder.

    `ToPaper(folder, aircraft, live, DiscMap(live), title="...")`: `folder` is the brief's, the things are shown
    elsewhere and stay what they are. What cannot be written is said beside the button.
    """

    def __init__(self, folder: Path | str, aircraft: Aircraft, *things: object, title: str = "As it stood") -> None:
        if not things:
            raise ReadingError("nothing to write", "at least one exhibit or panel")
        self._folder, self._aircraft, self._things, self._title = Path(folder), aircraft, things, title
        self.written: Path | None = None
        self._button = w.Button(description="Write this to a page", layout={"width": "auto"})
        self._word = w.HTML()
        super().__init__([w.HTML(STYLE, layout={"display": "none"}), self._button, self._word])
        self.add_class("briefkit")
        self._button.on_click(guarded(self._refuse, self._write))
        closing.remember(self)

    def close(self) -> None:
        """Close every model of the button."""
        if self.comm is None:
            return
        closing.forget(self)
        closing.close_tree(self)

    def _write(self, _: object) -> None:
        page = live_page(self._title, self._aircraft, self._things)
        operator = operator_folder(self._folder.resolve())
        self.written = write_live_page(operator, self._folder.resolve().name, page)
        self._word.value = f"<p>Written: {escape(self.written.name)}, in {FOLDER} of the operator folder.</p>"

    def _refuse(self, why: str) -> None:
        self._word.value = f"<p class='word'>Not written. {escape(why)}</p>"
