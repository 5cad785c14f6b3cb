"""What a handout is made of: finished strings in small frozen blocks, and the template that sets them.

Nothing is computed here. `crew_page` fills a `CrewPage`, `export` adds the author's analysis, `render` sets the page.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from enum import StrEnum
from functools import cache
from typing import Final

import jinja2
from markupsafe import Markup, escape

from briefkit.brief.templates import template_folder
from briefkit.errors import BuildError
from briefkit.figures import theme
from briefkit.figures.parts import figure_columns

_UNIT_GAP: Final = re.compile(
    r"(?<=±) |(?<=\d) (?=(?:°C|%|kt|KIAS|KTAS|km/h|mph|lb|kg|ft|m|hPa|inHg|rpm|degrees?|deg)\b|°|%)"
)
_MARKED: Final = re.compile(r"([\d,.\u2212+]+)([*\u2020\u2021])")


class Ink(StrEnum):
    """Whose number it is: decides the ink, and nothing else."""

    MANUAL = "manual"  # typed from the flight manual: black
    COMPUTED = "computed"  # ours: the one deep blue
    CONTEXT = "context"  # neither: grey


@dataclass(frozen=True)
class Grid:
    """A small table of finished strings; every row as long as the header.

    `caption` names the table (a screen reader says it first). `beside` are short notes set at the table's side on
    paper and below it on a phone. The first cell of a row is its heading unless `row_headings` is False; `numbers`
    sets the other cells as right-aligned figures, otherwise as text. `anchors` are ids of the rows, or empty.
    """

    header: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    caption: str
    ink: Ink = Ink.MANUAL
    beside: tuple[str, ...] = ()
    numbers: bool = True
    row_headings: bool = True
    anchors: tuple[str, ...] = ()

    @property
    def setting(self) -> str:
        """Classes of the table: how its columns are set, and whether it is wide, or long enough to be cut."""
        words = ["numbers"] if self.numbers else ["texts", *(f"n{column}" for column in figure_columns(self.rows))]
        words += ["dense"] * (len(self.header) > 6) + ["long"] * (len(self.rows) > 12)
        return " ".join(words)

    def __post_init__(self) -> None:
        for row in self.rows:
            if len(row) != len(self.header):
                raise BuildError(f"table {self.caption!r}: a row of {len(row)} cells under {len(self.header)} headings")
        if self.anchors and len(self.anchors) != len(self.rows):
            raise BuildError(f"table {self.caption!r}: {len(self.anchors)} anchors for {len(self.rows)} rows")


@dataclass(frozen=True)
class Section:
    """One numbered or titled part of a page, in the order it is set: before, grid, figure, points, after.

    `aside` stands at the right of the heading ("KIAS, power on"); `points` are list items; `figure` is a finished
    fragment of `figures.still`, trusted as it stands (hardening is last). `sources` are the documents its figures are
    from where the text does not name them: numbers beside the heading. `changed` sets a bar in the margin.
    """

    heading: str
    aside: str = ""
    before: tuple[str, ...] = ()
    grid: Grid | None = None
    figure: str = ""
    points: tuple[str, ...] = ()
    after: tuple[str, ...] = ()
    sources: tuple[str, ...] = ()
    changed: bool = False

    @property
    def run_in(self) -> bool:
        """Sentences only: on the crew's sheet the heading runs into the first of them."""
        return self.grid is None and not self.figure and not self.points


@dataclass(frozen=True)
class Source:
    """One line of the list of sources: its number on this page, the document as typed, and what is from it."""

    number: int
    text: str
    what: str

    @property
    def anchor(self) -> str:
        return f"source-{self.number}"


@dataclass(frozen=True)
class CrewPage:
    """Pages 1 to 4 of a handout as finished strings.

    `mark` is "DRAFT: not for crews" or empty; `revision` is "rev 0"; `expires` is "expires 29 Feb 2032". `heading` is
    the type, configuration and work area; `under` the lines below it. `front` is sheet 1, `recognition` sheet 2,
    `analysis` goes before the author's notebook, `control` after it; `slip` is a sheet of its own. `unit` is the unit
    of the airspeed indicator where it is not the knot: set as large as the type's name. `sources` is the numbered list
    that `control` holds, for links to its lines.
    """

    number: str
    revision: str
    title: str
    expires: str
    mark: str
    heading: str
    under: tuple[str, ...]
    front: tuple[Section, ...]
    recognition: tuple[Section, ...]
    analysis: tuple[Section, ...]
    control: tuple[Section, ...]
    slip: Section | None = None
    invented: str = ""
    unit: str = ""
    sources: tuple[Source, ...] = ()
    content: str = ""  # the hash of what the page was made from, see `seal`

    def numbers(self, part: Section) -> tuple[Source, ...]:
        """The listed sources of a section that its text does not name, in the order of their numbers."""
        return tuple(source for source in self.sources if source.text in part.sources)

    @property
    def running(self) -> str:
        """The line every printed page carries."""
        return " | ".join(part for part in (self.mark, f"{self.number} {self.revision}", self.expires) if part)


def render(page: CrewPage, analysis: tuple[str, ...]) -> str:
    """The handout before hardening. `analysis` are the notebook's finished fragments, in order.

    Raises:
        BuildError: the template is missing.
    """
    return _set("handout.html.j2", page=page, analysis=tuple(map(Markup, analysis)))


def render_plain(template: str, **values: object) -> str:
    """A plain sheet (read-back, index) in the handout's own style, before hardening."""
    return _set(template, **values)


def _set(template: str, **values: object) -> str:
    style = theme.stylesheet() + "\n" + (template_folder() / "handout.css").read_text(encoding="utf-8")
    return _environment().get_template(template).render(style=Markup(style), **values)


@cache
def _environment() -> jinja2.Environment:
    environment = jinja2.Environment(
        loader=jinja2.FileSystemLoader(template_folder()),
        autoescape=True,
        undefined=jinja2.StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
    )
    environment.filters |= {"css_string": css_string, "fragment": Markup, "set": set_text, "cell": set_cell}
    return environment


def css_string(text: str) -> Markup:
    """Text as the inside of a CSS string: all but plain letters, digits and spaces as codes, each ended by a space."""
    return Markup(re.sub(r"[^A-Za-z0-9 ]", lambda match: f"\\{ord(match[0]):x} ", text))


def set_text(text: str) -> Markup:
    """A sentence for the page: a number and its unit are never parted by the end of a line."""
    return escape(_UNIT_GAP.sub("\u00a0", text))


def set_cell(text: str) -> Markup:
    """A table cell: as a sentence, and a mark after a number hangs outside the column so that the digits line up."""
    marked = _MARKED.fullmatch(text)
    if marked is None:
        return set_text(text)
    return set_text(marked[1]) + Markup('<span class="mark">{}</span>').format(marked[2])
