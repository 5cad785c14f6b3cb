"""A brief as one static page: the same road, and the same bytes, for `briefkit build` and `jupyter nbconvert`."""

from __future__ import annotations

import datetime as dt
import sys
from dataclasses import replace
from importlib.metadata import version
from pathlib import Path
from typing import Any

from nbconvert.exporters import Exporter
from nbformat import NotebookNode
from traitlets import default
from traitlets.config import Application

from briefkit.brief.crew_page import crew_page
from briefkit.brief.harden import harden
from briefkit.brief.identity import BRIEF_FILE, NOTEBOOK, Brief, Identity, load_brief
from briefkit.brief.pages import CrewPage, Section, render
from briefkit.brief.prose import in_order, set_words
from briefkit.brief.release import in_the_way, standing
from briefkit.brief.run import Ran, Words, read_notebook, run_node
from briefkit.brief.seal import seal_of
from briefkit.brief.sources import link
from briefkit.envelope.reductions import ReductionTable
from briefkit.errors import BriefkitError, BuildError


def contents(brief: Brief, today: dt.date, node: NotebookNode | None = None) -> CrewPage:
    """Pages 1 to 4 of a loaded brief, DRAFT unless released on that day with these cells.

    Raises BriefkitError where the operation asks for what cannot be answered.
    """
    stays_inside(brief.identity)
    known = standing(brief, today, None if node is None else node.cells)
    return mark_changes(crew_page(brief, version("briefkit"), known), brief.identity)


def stays_inside(identity: Identity) -> None:
    """Raise `BuildError` where a link leads a file of the brief out of the operator folder."""
    operator = identity.operator.resolve()
    for file in (identity.folder / BRIEF_FILE, identity.notebook, identity.aircraft_path):
        if file.exists() and not file.resolve().is_relative_to(operator):
            raise BuildError(f"{file.name}: a link out of the operator folder; keep the file itself in it")


def mark_changes(page: CrewPage, identity: Identity) -> CrewPage:
    """The page with a bar beside every section that the list of changes names for this revision.

    A section is named by its number on sheet 1 ("2") or by the beginning of its heading. Raises:
        BuildError: no section of the page is so called.
    """
    named = [name for change in identity.changes if change.revision == identity.revision for name in change.sections]
    found: set[str] = set()

    def marked(part: Section) -> Section:
        here = {name for name in named if _is_called(part.heading, name)}
        found.update(here)
        return replace(part, changed=True) if here else part

    barred = replace(
        page,
        front=tuple(map(marked, page.front)),
        recognition=tuple(map(marked, page.recognition)),
        analysis=tuple(map(marked, page.analysis)),
        control=tuple(map(marked, page.control)),
    )
    missing = [name for name in named if name not in found]
    if missing:
        parts = (*page.front, *page.recognition, *page.analysis, *page.control)
        known = "; ".join(part.heading for part in parts)
        raise BuildError(f"{identity.file}: changes: no section {missing[0]!r} on the page; there is: {known}")
    return barred


def _is_called(heading: str, name: str) -> bool:
    if name.isdigit():
        return heading.startswith(f"{name}. ")
    return heading.casefold().startswith(name.strip().casefold())


def compose(page: CrewPage, ran: Ran, folder: Path) -> str:
    """The finished, hardened page: the crew's sheets, and what the notebook says and shows, in its order.

    Raises:
        BuildError: what the notebook wrote or shows cannot be put on paper; see `set_words` and `harden`.
    """
    words = iter(in_order(set_words(block, folder) for block in ran.blocks if isinstance(block, Words)))
    blocks = (next(words) if isinstance(block, Words) else block.html for block in ran.blocks)
    return harden(link(render(page, tuple(blocks)), page.sources))


def export(notebook: Path, today: dt.date, node: NotebookNode | None = None) -> str:
    """Run the notebook of a brief (or `node`, if given, in its place) and give its page on a day.

    Raises:
        BriefkitError: faults of the typed files, a failing cell, something without a still.
    """
    if notebook.name != NOTEBOOK or not (notebook.parent / BRIEF_FILE).is_file():
        raise BuildError(
            f"{notebook.name}: a brief is {NOTEBOOK} beside its {BRIEF_FILE}; no other notebook is its page"
        )
    brief = load_brief(notebook.parent)
    stays_inside(brief.identity)
    node = read_notebook(notebook) if node is None else node
    page = contents(brief, today, node)
    ran = run_node(node, notebook)
    unchanged(brief, page, node)
    return compose(page, ran, notebook.parent)


def released(brief: Brief, day: dt.date) -> tuple[str, str, ReductionTable]:
    """Run a brief's notebook on a day: the page, its mark ("" where it is released), its table of turns."""
    stays_inside(brief.identity)
    node = read_notebook(brief.identity.notebook)
    known = standing(brief, day, node.cells)
    page = mark_changes(crew_page(brief, version("briefkit"), known), brief.identity)
    if page.mark or known.table is None:
        name = f"{brief.identity.number} rev {brief.identity.revision}"
        raise BuildError(f"{name}: {page.mark}; against its release:\n{in_the_way(brief, day)}")
    ran = run_node(node, brief.identity.notebook)
    unchanged(brief, page, node)
    return compose(page, ran, brief.identity.folder), page.mark, known.table


def unchanged(brief: Brief, page: CrewPage, node: NotebookNode) -> None:
    """Raise `BuildError` where a file of a released brief changed while its notebook ran: the page is of neither."""
    if not page.mark and seal_of(brief.identity, node.cells).content != page.content:
        raise BuildError(f"{brief.identity.folder}: a file changed while the notebook ran; look at it and build again")


class BriefExporter(Exporter):
    """`jupyter nbconvert --to briefkit brief.ipynb`: the page `briefkit build` writes, byte for byte.

    No option, filter, template or preprocessor of nbconvert's changes it: a page that a machine's settings could
    change would not be the page that was approved.
    """

    output_mimetype = "text/html"
    export_from_notebook = "Brief"

    @default("file_extension")
    def _file_extension_default(self) -> str:
        return ".html"

    def from_filename(  # type: ignore[override]  # nbconvert's own exporters give text too
        self, filename: str, resources: dict[str, Any] | None = None, **kw: Any
    ) -> tuple[str, dict[str, Any]]:
        """The page of a notebook file; whatever it stored is not read."""
        return self._page(Path(filename).absolute(), None, resources)

    def from_notebook_node(  # type: ignore[override]
        self, nb: NotebookNode, resources: dict[str, Any] | None = None, **kw: Any
    ) -> tuple[str, dict[str, Any]]:
        """The page of a notebook in memory; `resources` must say in which folder it lives."""
        metadata = (resources or {}).get("metadata", {})
        if not metadata.get("path") or not metadata.get("name"):
            return self.from_file(None)
        return self._page(Path(metadata["path"]).absolute() / f"{metadata['name']}.ipynb", nb, resources)

    def from_file(  # type: ignore[override]
        self, file_stream: Any, resources: dict[str, Any] | None = None, **kw: Any
    ) -> tuple[str, dict[str, Any]]:
        """Refused: a stream does not say which brief it is."""
        return self._page(None, None, resources)

    def _page(
        self, notebook: Path | None, node: NotebookNode | None, resources: dict[str, Any] | None
    ) -> tuple[str, dict[str, Any]]:
        ready = dict(self._init_resources(resources))  # type: ignore[no-untyped-call]
        try:
            if notebook is None:
                raise BuildError(f"a brief is exported from its file, {NOTEBOOK}, not from a stream")
            return export(notebook, dt.date.today(), node), ready
        except BriefkitError as error:
            if not _on_the_command_line():
                raise
            sys.stderr.write(f"{error}\n")
            raise SystemExit(1) from None


def _on_the_command_line() -> bool:
    """True under `jupyter nbconvert`, which would show a traceback where a sentence is meant."""
    return Application.initialized() and type(Application.instance()).__name__ == "NbConvertApp"
