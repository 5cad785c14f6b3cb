"""The index of a folder of pages: a line for each brief, whole after a build, one line replaced after an issue."""

from __future__ import annotations

import html
import re
from dataclasses import dataclass
from pathlib import Path
from typing import Final

from briefkit.brief.harden import harden
from briefkit.brief.pages import render_plain
from briefkit.brief.write import write_page

INDEX: Final = "index.html"
_LIST = re.compile(r'(<ul class="index">\n)(.*?)(</ul>)', re.DOTALL)
_LINE = re.compile(r"<li>.*?</li>\n?", re.DOTALL)
_HEADING = re.compile(r"<h1[^>]*>(.*?)</h1>", re.DOTALL)


@dataclass(frozen=True)
class Result:
    """What became of one brief: `brief` its folder, `page` the file written (or left), seconds, bytes, the error.

    `title` is the page's own heading ("" where the typed files could not be read); `notes` what its author should hear;
    `beside` the further pages written with it; `issued` the issued page that was left in its place ("NB-2T-001 rev 0").
    """

    brief: Path
    page: Path | None
    seconds: float = 0.0
    size: int = 0
    error: str = ""
    title: str = ""
    mark: str = ""
    notes: tuple[str, ...] = ()
    beside: tuple[Path, ...] = ()
    issued: str = ""

    @property
    def readback(self) -> Path | None:
        return self.page.with_suffix(".readback.html") if self.page else None


def index_of(results: tuple[Result, ...]) -> str:
    """The finished index page."""
    return harden(render_plain("index.html.j2", results=results), neighbours=True)


def heading_of(page: str) -> str:
    """The heading of a finished page as plain text; "" where it has none."""
    found = _HEADING.search(page)
    return html.unescape(re.sub(r"<[^>]*>", "", found[1])).strip() if found else ""


def relist(folder: Path, brief: Path, target: Path, page: str) -> None:
    """Have the index of a folder say what is in it now: the line of the page just written there, without a mark.

    A folder without an index of ours is left as it is. Raises `BuildError` where the index cannot be written.
    """
    path = folder / INDEX
    try:
        text = path.read_text(encoding="utf-8")
    except (OSError, UnicodeDecodeError):
        return
    if (listed := _LIST.search(text)) is None:
        return
    readback = target.with_suffix(".readback.html")
    beside = tuple(file for file in sorted(folder.glob(f"{target.stem}.*.html")) if file != readback)
    fresh = _LINE.search(index_of((Result(brief, target, title=heading_of(page), beside=beside),)))
    assert fresh is not None  # the template sets one line for each result
    said = (f'href="{target.name}"', f"<p>{target.stem} ", f"<p>{html.escape(brief.name)} ")
    kept = [line for line in _LINE.findall(listed[2]) if not any(one in line for one in said)]
    lines = sorted([*kept, fresh[0]], key=lambda line: _place(listed[2], line, said))
    write_page(path, text[: listed.end(1)] + "".join(lines) + text[listed.start(3) :])


def _place(listed: str, line: str, said: tuple[str, ...]) -> int:
    """Where a line stood in the list; the new one stands where the old one of its page did, or last."""
    at = listed.find(line)
    return at if at >= 0 else min((at for one in said if (at := listed.find(one)) >= 0), default=len(listed))
