"""Builds briefs: for each one the static page and the read-back sheet, and an index of what was built.

Several kernels run at once, one failing brief does not stop the others, and a page is replaced only by a whole one.
"""

from __future__ import annotations

import asyncio
import datetime as dt
import os
import time
from collections.abc import Callable, Iterable, Iterator
from pathlib import Path

from briefkit.brief.export import compose, contents, stays_inside, unchanged
from briefkit.brief.fit import complaint
from briefkit.brief.harden import harden
from briefkit.brief.identity import BRIEF_FILE, Brief, load_brief
from briefkit.brief.index import INDEX, Result, heading_of, index_of
from briefkit.brief.issue import digest
from briefkit.brief.pages import CrewPage, render_plain
from briefkit.brief.readback import readback
from briefkit.brief.register import load_register
from briefkit.brief.run import complete, read_notebook, run_async
from briefkit.brief.write import sweep, write_page
from briefkit.errors import BriefkitError, BuildError

__all__ = ["Beside", "Result", "build", "find_briefs"]

# What a later room sets beside a brief's page: (name, finished page) for each; the file is NUMBER.name.html.
Beside = Callable[[Brief, CrewPage], tuple[tuple[str, str], ...]]


def find_briefs(paths: Iterable[Path]) -> tuple[Path, ...]:
    """The brief folders under the given folders, notebooks or brief.toml files, each once, in order.

    Raises:
        BuildError: a path that does not exist, or below which no brief is.
    """
    found: dict[Path, None] = {}
    for path in paths:
        if not path.exists():
            raise BuildError(f"{path}: no such file or folder")
        folder = path if path.is_dir() else path.parent
        inside = [folder] if (folder / BRIEF_FILE).is_file() else sorted(_below(folder)) if path.is_dir() else []
        if not inside:
            raise BuildError(f"{path}: no brief here; a brief is a folder with {BRIEF_FILE} and its notebook")
        found |= dict.fromkeys(inside)
    return tuple(found)


def _below(folder: Path) -> Iterator[Path]:
    for file in folder.rglob(BRIEF_FILE):
        if not any(part.startswith(".") for part in file.relative_to(folder).parts):
            yield file.parent


def build(
    paths: Iterable[Path],
    out: Path,
    today: dt.date,
    tell: Callable[[Result], None] | None = None,
    beside: Beside | None = None,
) -> tuple[Result, ...]:
    """Build every brief below `paths` as it stands on a day, into the folder `out`; `tell` hears of each as it is done.

    `beside` makes further pages of a brief, from rooms this one does not know; what it refuses fails the brief.

    Never raises for a brief that fails: its result carries the error, and its page stays as it was. Raises:
        BuildError: no brief found, or `out` cannot be written at all.
    """
    briefs = find_briefs(paths)
    results = complete(_build_all(briefs, out, today, tell or (lambda _: None), beside or (lambda _, __: ())))
    write_page(out / INDEX, index_of(results))
    return results


async def _build_all(
    briefs: tuple[Path, ...], out: Path, today: dt.date, tell: Callable[[Result], None], beside: Beside
) -> tuple[Result, ...]:
    _make(out)
    cores = asyncio.Semaphore(_cores())
    taken: dict[str, Path] = {INDEX: out}

    async def one(folder: Path) -> Result:
        async with cores:
            result = await _build_one(folder, out, taken, today, beside)
        tell(result)
        return result

    return tuple(await asyncio.gather(*map(one, briefs)))


def _make(out: Path) -> None:
    try:
        out.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise BuildError(f"{out}: cannot be used as a folder ({error.strerror})") from None
    sweep(out)


async def _build_one(folder: Path, out: Path, taken: dict[str, Path], today: dt.date, beside: Beside) -> Result:
    start = time.monotonic()
    target, title, mark = None, "", ""
    try:
        brief = load_brief(folder)
        target = _target(brief, folder, out, taken)
        stays_inside(brief.identity)
        node = read_notebook(brief.identity.notebook)
        page = contents(brief, today, node)
        title, mark = page.heading, page.mark
        ran = await run_async(node, brief.identity.notebook)
        unchanged(brief, page, node)
        html, sheet, more = compose(page, ran, folder), _readback(brief, page), beside(brief, page)
        if kept := _issued_page(brief, target, html):
            error = (
                f"{target}: {kept} was issued as this page, and what is built now differs from it: not written; "
                "build to another folder with --out, or raise document.revision, sign and issue that"
            )
            seconds, title = time.monotonic() - start, heading_of(target.read_text(encoding="utf-8"))
            return Result(folder, target, seconds, error=error, title=title, issued=kept)
        size = write_page(target, html)
        write_page(target.with_suffix(".readback.html"), sheet)
        written = tuple(target.with_suffix(f".{name}.html") for name, _ in more)
        for file, (_, text) in zip(written, more, strict=True):
            write_page(file, text)
    except BriefkitError as error:
        return Result(folder, target, time.monotonic() - start, error=str(error), title=title, mark=mark)
    notes = tuple(note for note in (complaint(page), *ran.notes) if note)
    seconds = time.monotonic() - start
    return Result(folder, target, seconds, size, title=title, mark=mark, notes=notes, beside=written)


def _target(brief: Brief, folder: Path, out: Path, taken: dict[str, Path]) -> Path:
    """The page's file, named by the document number; two briefs may not carry one number, in any capitals."""
    name = f"{brief.identity.number}.html"
    other = taken.setdefault(name.lower(), folder)
    if other != folder:
        whose = "the index page" if other == out else f"the brief in {other}"
        raise BuildError(f"document number {brief.identity.number} is taken by {whose}; give this brief its own")
    return out / name


def _issued_page(brief: Brief, target: Path, html: str) -> str:
    """The issued page that stands at `target` and would be lost ("NB-2T-001 rev 0"), or "".

    An issued page may give way only to one that is in the register too. Raises `FaultyFile` where the register cannot
    be read: nobody knows then what the page that stands there is.
    """
    if not target.is_file():
        return ""
    known = {
        entry.page: f"{entry.number} rev {entry.revision}" for entry in load_register(brief.identity.operator).issued
    }
    return "" if digest(html.encode("utf-8")) in known else known.get(digest(target.read_bytes()), "")


def _readback(brief: Brief, page: CrewPage) -> str:
    return harden(render_plain("readback.html.j2", page=page, sheet=readback(brief.aircraft, brief.identity)))


def _cores() -> int:
    try:
        return len(os.sched_getaffinity(0))
    except AttributeError:  # not on every system
        return os.cpu_count() or 1
