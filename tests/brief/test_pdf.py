"""The page as PDF: a clear word where no Chromium is, and nothing of the machine in the file where one is."""

from __future__ import annotations

import datetime as dt
import os
from pathlib import Path

import pytest

from briefkit.brief import pdf
from briefkit.brief.crew_page import crew_page
from briefkit.brief.harden import harden
from briefkit.brief.identity import load_brief
from briefkit.brief.pages import render
from briefkit.errors import BuildError

DAY = dt.date(2030, 3, 1)


@pytest.fixture
def page(examples, tmp_path) -> Path:
    file = tmp_path / "NB-4H-001.html"
    file.write_text(harden(render(crew_page(load_brief(examples / "ysbrane-4h"), "0"), ())), encoding="utf-8")
    return file


def test_without_a_chromium_a_clear_word(page, monkeypatch):
    monkeypatch.setattr(pdf.shutil, "which", lambda _: None)
    with pytest.raises(BuildError, match=r"no Chromium is installed .* the pages themselves are complete and print"):
        pdf.print_pdf(page, "A5", DAY)
    assert [file.name for file in page.parent.iterdir()] == [page.name]


def test_a_paper_nobody_has(page):
    with pytest.raises(BuildError, match="paper 'B5': A4, A5, Letter"):
        pdf.print_pdf(page, "B5", DAY)


@pytest.mark.skipif(os.name == "nt", reason="a script as a browser")
@pytest.mark.parametrize("script", ["exit 3", "exit 0"], ids=["fails", "writes nothing"])
def test_a_chromium_that_does_not_print(page, tmp_path, monkeypatch, script):
    browser = tmp_path / "browser"
    browser.write_text(f"#!/bin/sh\n{script}\n")
    browser.chmod(0o755)
    monkeypatch.setattr(pdf.shutil, "which", lambda _: str(browser))
    with pytest.raises(BuildError, match=r"NB-4H-001\.html: Chromium could not print it; no PDF"):
        pdf.print_pdf(page, "A5", DAY)
