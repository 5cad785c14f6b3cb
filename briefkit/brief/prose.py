"""The author's markdown as page text: headings below the page's own, pictures in the page, no formulas.

HTML in a cell is shown as it was typed: nothing of it is obeyed, so that nothing of it can break the page.
"""

from __future__ import annotations

import base64
import mimetypes
import re
from collections.abc import Iterable
from pathlib import Path
from typing import Final
from urllib.parse import unquote

from bs4 import BeautifulSoup
from nbconvert.filters.markdown_mistune import InvalidNotebook, IPythonRenderer, MarkdownWithMath

from briefkit.brief.run import Words
from briefkit.errors import BuildError

LARGEST_PICTURE: Final = 1_000_000
_PICTURES: Final = ("image/png", "image/jpeg", "image/gif", "image/webp")
_DEEPEST: Final = 6
_HEADING: Final = re.compile(r"<h([1-6])>")
_HEADING_TAG: Final = re.compile(r"</?h([1-6])>")
_BELOW: Final = 2  # the page has h1 and its sheets h2, so an author's first level is h3


def set_words(words: Words, folder: Path) -> str:
    """One markdown cell as an HTML fragment, well nested.

    Raises:
        BuildError: a formula, a diagram in code, a picture without words for a reader who cannot see it, or one that
            is not a file of `folder`; each names the cell.
    """
    renderer = _PageRenderer(words)
    try:
        html = MarkdownWithMath(renderer=renderer).render(words.text)
    except InvalidNotebook as error:
        raise BuildError(f"{words.place}: {error}; paste the picture again") from None
    fragment = BeautifulSoup(html, "html.parser")
    for picture in fragment.find_all("img"):
        picture["src"] = _embedded(str(picture.get("src", "")), words, folder)
        if not str(picture.get("alt", "")).strip():
            raise BuildError(f"{words.place}: a picture needs words for a reader who cannot see it: ![words](file)")
    for heading in fragment.find_all(re.compile(r"h[1-6]")):
        heading.name = f"h{min(int(heading.name[1]) + _BELOW, _DEEPEST)}"
        heading.attrs.pop("id", None)  # two cells may carry the same heading; ids on a page are single
    return f'<div class="words">{fragment}</div>\n'


def in_order(fragments: Iterable[str]) -> tuple[str, ...]:
    """The author's fragments with headings that never skip a level, whatever level the author began with.

    The highest level used comes next below the page's own; a deeper one is at most one below the heading before it.
    """
    parts = tuple(fragments)
    levels = [int(level) for part in parts for level in _HEADING.findall(part)]
    shift, above, last = min(levels, default=0), _BELOW + 1, _BELOW

    def next_level(match: re.Match[str]) -> str:
        nonlocal last
        if match[0].startswith("<h"):
            last = min(int(match[1]) - shift + above, last + 1)
        return match[0].replace(match[1], str(last), 1)

    return tuple(_HEADING_TAG.sub(next_level, part) for part in parts)


class _PageRenderer(IPythonRenderer):
    """Refuses what a page without scripts cannot draw."""

    def __init__(self, words: Words) -> None:
        super().__init__(escape=True, exclude_anchor_links=True, attachments=words.attachments)
        self._place = words.place

    def _refuse(self) -> str:
        raise BuildError(
            f"{self._place}: formulas and diagrams in code are not drawn on the page; write them in words "
            "(a dollar sign that is meant: \\$)"
        )

    def block_math(self, body: str) -> str:
        return self._refuse()

    def inline_math(self, body: str) -> str:
        return self._refuse()

    def multiline_math(self, text: str) -> str:
        return self._refuse()

    def latex_environment(self, name: str, body: str) -> str:
        return self._refuse()

    def block_mermaidjs(self, code: str) -> str:
        return self._refuse()


def _embedded(source: str, words: Words, folder: Path) -> str:
    """A picture as data in the page."""
    if source.startswith("data:"):
        if source.startswith(tuple(f"data:{kind};base64," for kind in _PICTURES)):
            return source
        raise BuildError(f"{words.place}: a pasted picture is not PNG, JPEG, GIF or WebP")
    if re.match(r"[A-Za-z][A-Za-z0-9+.\-]*:|//", source):
        raise BuildError(f"{words.place}: the picture {source[:60]!r} is elsewhere; keep it as a file beside the brief")
    file = (folder / unquote(source)).resolve()
    kind = mimetypes.guess_type(file.name)[0]
    if kind not in _PICTURES:
        raise BuildError(f"{words.place}: the picture {source[:60]!r} is not PNG, JPEG, GIF or WebP")
    if not file.is_relative_to(folder.resolve()) or not file.is_file():
        raise BuildError(f"{words.place}: the picture {source[:60]!r} is not a file in the brief's folder")
    if file.stat().st_size > LARGEST_PICTURE:
        raise BuildError(f"{words.place}: the picture {source[:60]!r} is larger than {LARGEST_PICTURE:,} bytes")
    return f"data:{kind};base64,{base64.b64encode(file.read_bytes()).decode('ascii')}"
