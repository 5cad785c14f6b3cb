"""The example brief: built twice, the same bytes, small enough to send by telephone."""

from __future__ import annotations

import re
import shutil
import socket
import tempfile
from pathlib import Path

import pytest

from briefkit.brief.build import build
from briefkit.brief.run import Picture, Words
from briefkit.session.sheets import deck_pages

pytestmark = pytest.mark.slow


def test_guard_g34_built_twice_and_from_two_folders_the_same_bytes(examples, built, exported, tmp_path, today):
    """Three pages, each under 400 kB; nothing of the folder, the machine or the notebook's own data is in them."""
    elsewhere = tmp_path / "another folder"
    shutil.copytree(examples, elsewhere, ignore=shutil.ignore_patterns(".*", "__pycache__"))
    second = build([elsewhere], tmp_path / "two", today, beside=deck_pages)
    assert [result.error for result in second] == [""] * 3
    assert [result.notes for result in built] == [()] * 3
    ours = {file.name: file.read_bytes() for file in built[0].page.parent.iterdir()}
    assert {file.name: file.read_bytes() for file in (tmp_path / "two").iterdir()} == ours
    assert ours["NB-2T-001.html"].decode("utf-8") == exported.html
    assert all(20_000 < result.size < 400_000 for result in built)
    told = (
        str(tmp_path),
        str(examples),
        str(Path.home()),
        tempfile.gettempdir(),
        socket.gethostname(),
        "widget",
        "ipynb",
    )
    for name, content in ours.items():
        text = content.decode("utf-8")
        assert [word for word in told if len(word) > 4 and word in text] == [], name
        assert not re.search(r"kernelspec|nbformat|execution_count|model_id|/home/|/Users/|[A-Z]:\\\\", text), name


def test_every_exhibit_has_its_drawings_named_in_words_and_a_table(exported):
    assert sum(isinstance(block, Picture) for block in exported.ran.blocks) == 5
    assert sum(isinstance(block, Words) for block in exported.ran.blocks) > 3
    assert exported.html.count("<svg") == exported.pictures >= 6
    for drawing in re.findall(r"<svg.*?</svg>", exported.html, re.DOTALL):
        assert re.search(r"<title[^>]*>[^<]{4,}</title>", drawing)
        assert re.search(r"<desc[^>]*>[^<]{4,}</desc>", drawing)
        assert 'role="img"' in drawing
    figures = re.findall(r'<figure class="exhibit".*?</figure>', exported.html, re.DOTALL)
    assert all("<table" in figure for figure in figures)
    ids = re.findall(r'\bid="([^"]*)"', exported.html)
    assert len(ids) == len(set(ids))


def test_the_order_of_the_page(exported):
    body = exported.html.split("<body>")[1]
    order = (
        "1. VNE",
        "4. If it starts",
        "Which one is it?",
        "How the reduction was found",
        "Analysis",
        "Document control",
    )
    places = [body.index(f"<h2>{words}") for words in order]
    assert places[4] < body.index('<span class="title">Speed at the blades') < places[5]
    assert places == sorted(places)


def test_the_headline_number(exported):
    """Page 1 of the worked example: 1,800 lb in the Vellmark block, 10 kt or more before a turn."""
    body = exported.html.split("<body>")[1]
    row = re.search(r'<th scope="row">1,800\u00a0lb</th><td>(.*?)</td>', body)
    assert row is not None
    assert row[1] == "10\u00a0kt or more"
    assert "VNE here is 79: 5.1 below" in body or "VNE here 79: 5.1 below" in body


def test_nothing_of_the_notebook_but_words_and_stills(exported):
    assert "load_aircraft(" not in exported.html
    assert "VBox(" not in exported.html
    assert "widget" not in exported.html.lower()
