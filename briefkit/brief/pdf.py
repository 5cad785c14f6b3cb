"""A page as PDF, printed by an installed Chromium; without one the page itself prints from any browser."""

from __future__ import annotations

import datetime as dt
import os
import re
import shutil
import subprocess
import tempfile
from collections.abc import Iterable, Iterator
from pathlib import Path
from typing import Final

from briefkit.brief.build import Result
from briefkit.brief.harden import harden
from briefkit.brief.identity import load_identity
from briefkit.brief.write import write_page
from briefkit.errors import BuildError

PAPERS: Final = ("A4", "A5", "Letter")
SECONDS: Final = 120
_NAMES: Final = ("chromium", "chromium-browser")
# The network is kept off; the page could not use it, its policy forbids every fetch.
_FLAGS: Final = (
    "--headless=new", "--disable-gpu", "--no-first-run", "--disable-sync", "--disable-background-networking",
    "--disable-component-update", "--disable-extensions", "--host-resolver-rules=MAP * ~NOTFOUND",
    "--no-pdf-header-footer",
)  # fmt: skip
# Chromium asks a page's width queries of its own default paper, not of the paper the page asks for, and then shrinks
# a wide setting onto a small sheet: on A5 they are answered for it.
_ON_A5: Final = {"(min-width: 150mm)": "not all", "(max-width: 149.9mm)": "all"}
_DATED: Final = re.compile(rb"/(CreationDate|ModDate) \(D:\d{14}\+00'00'\)")


def find_chromium() -> str:
    """The installed Chromium. Raises BuildError with what to do where there is none."""
    for name in _NAMES:
        found = shutil.which(name)
        if found is not None:
            return found
    raise BuildError(
        "no PDF: no Chromium is installed (on Debian: apt install chromium); the pages themselves are complete and "
        "print from any browser"
    )


def print_pdfs(results: Iterable[Result], paper: str) -> Iterator[Path]:
    """Print the page of every brief that was built. Raises as `print_pdf`."""
    for result in results:
        if result.page is not None and not result.error:
            yield print_pdf(result.page, paper, load_identity(result.brief).issued)


def print_pdf(page: Path, paper: str, day: dt.date) -> Path:
    """Print a built page to a PDF beside it.

    `paper` is one of `PAPERS`; `day` (the day of issue) stands in the file where Chromium would put the clock. The same
    page gives the same sheets with the same Chromium and fonts, and nearly always the same bytes (once in a great
    while, on a busy machine, Chromium numbers a file's objects otherwise): the page is the controlled document, not
    its PDF.

    Raises:
        BuildError: no Chromium, or it fails or takes longer than `SECONDS`.
    """
    if paper not in PAPERS:
        raise BuildError(f"paper {paper!r}: {', '.join(PAPERS)}")
    browser = find_chromium()
    sized = harden(_on_paper(page.read_text(encoding="utf-8"), paper))
    with tempfile.TemporaryDirectory(prefix="briefkit-", ignore_cleanup_errors=True) as private:
        source, made = Path(private) / "page.html", Path(private) / "page.pdf"
        source.write_text(sized, encoding="utf-8")
        # Chromium refuses its own sandbox to root, as in a container; the page has no script to keep in.
        root = ("--no-sandbox",) if getattr(os, "geteuid", lambda: 1)() == 0 else ()
        command = [browser, *_FLAGS, *root, f"--user-data-dir={private}/profile", f"--print-to-pdf={made}"]
        try:
            subprocess.run([*command, source.as_uri()], check=True, capture_output=True, timeout=SECONDS)
            content = made.read_bytes()
        except subprocess.TimeoutExpired:
            raise BuildError(f"{page.name}: Chromium printed for more than {SECONDS} s; no PDF") from None
        except (subprocess.CalledProcessError, OSError):
            raise BuildError(f"{page.name}: Chromium could not print it; no PDF") from None
    stamp = f"D:{day:%Y%m%d}000000+00'00'".encode("ascii")  # as long as what it replaces: offsets in the file hold
    target = page.with_suffix(".pdf")
    write_page(target, _DATED.sub(lambda found: b"/" + found[1] + b" (" + stamp + b")", content))
    return target


def _on_paper(html: str, paper: str) -> str:
    """The page with its paper named and its width queries answered for it."""
    for asked, answer in _ON_A5.items() if paper == "A5" else ():
        html = html.replace(f"@media {asked}", f"@media {answer}")
    return html.replace("</style>", f"@page{{size:{paper}}}</style>", 1)
