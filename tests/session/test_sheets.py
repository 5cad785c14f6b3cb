"""The deck on paper: answers folded on the static page, open on the instructor's sheet, no place for a name."""

from __future__ import annotations

import html5lib
import pytest
from typer.testing import CliRunner

from briefkit.brief.build import build
from briefkit.brief.export import contents
from briefkit.brief.identity import load_brief
from briefkit.cli import app
from briefkit.session.sheets import deck_findings, deck_pages

XHTML = "{http://www.w3.org/1999/xhtml}"


@pytest.fixture(scope="module")
def example(examples, today):
    """The example brief with its crew's page, whose analysis takes a second or two."""
    loaded = load_brief(examples / "vellmark-2t")
    return loaded, contents(loaded, today)


@pytest.fixture(scope="module")
def pages(example):
    return dict(deck_pages(*example))


def edited(brief, old, new):
    """The folder's deck with one piece of text replaced."""
    path = brief / "deck.toml"
    text = path.read_text(encoding="utf-8")
    assert old in text
    path.write_text(text.replace(old, new), encoding="utf-8")
    return brief


def tree(page):
    parser = html5lib.HTMLParser(strict=True, namespaceHTMLElements=True)  # raises on any parse error
    return parser.parse(page)


def words(node, skip=()):
    if not isinstance(node.tag, str) or node.tag in skip:
        return ""
    inner = "".join(words(child, skip) + (child.tail or "") for child in node)
    return ((node.text or "") + inner).replace("\u00a0", " ")


def plain(text):
    return text.replace("\u00a0", " ")


@pytest.mark.slow
def test_answers_are_folded_manual_first(pages, deck):
    parsed = tree(pages["deck"])
    folded = parsed.findall(f".//{XHTML}details")
    assert len(folded) == 3 * len(deck.cases)
    assert not [one for one in folded if "open" in one.attrib]
    titles = [words(one.find(f"{XHTML}summary")) for one in folded[:3]]
    assert titles == ["The manual’s figure", "The computed figure", "What to take from it"]
    outside = words(parsed.find(f".//{XHTML}main"), skip=(f"{XHTML}details",))
    for number, case in enumerate(deck.cases):
        said = deck.answers(case)
        inside = [words(one) for one in folded[3 * number : 3 * number + 3]]
        assert plain(said.manual.text) in inside[0]
        assert plain(said.computed.text) in inside[1]
        assert plain(said.computed.text) not in inside[0]
        assert plain(case.expected) in inside[2]
        assert plain(case.prompt) in outside
        assert plain(case.change_text) in outside
        for answer in (said.manual.text, said.computed.text, case.teaching, case.expected):
            assert plain(answer) not in outside


def test_the_instructor_s_sheet_has_everything(pages, deck):
    text = words(tree(pages["instructor"]).find(f".//{XHTML}main"))
    for case in deck.cases:
        said = deck.answers(case)
        for part in (
            case.start_text, case.change_text, case.prompt, said.manual.text, said.manual.where, said.computed.text,
            said.computed.how, case.teaching, case.expected, case.source,
        ):  # fmt: skip
            assert plain(part) in text
    assert deck.data_hash[:12] in text


def test_neither_is_for_crews_nor_runs_anything(pages):
    """G33, and practice.md 4: no script, no form, nothing fetched, no name to fill in."""
    for page in pages.values():
        parsed = tree(page)
        assert not [node for node in parsed.iter() if node.tag in (f"{XHTML}script", f"{XHTML}form", f"{XHTML}input")]
        assert "default-src 'none'" in page
        assert "DRAFT: not for crews" in page
        assert "Do not use for flight" in page
        text = words(parsed.find(f".//{XHTML}body")).lower()
        for label in ("name:", "trainee", "candidate", "passed", "failed", "score"):
            assert label not in text


def test_the_same_deck_gives_the_same_bytes(brief, example, pages):
    assert dict(deck_pages(load_brief(brief), example[1])) == pages


def test_hostile_text_stays_text(brief, example):
    edited(brief, "Which entry of the chart do you read now?", "<script>alert(1)</script>{{ 7*7 }}")
    for _, page in deck_pages(load_brief(brief), example[1]):
        assert "<script" not in page
        assert "&lt;script&gt;alert(1)&lt;/script&gt;{{ 7*7 }}" in page


def test_no_deck_no_pages(brief, example):
    (brief / "deck.toml").unlink()
    assert deck_pages(load_brief(brief), example[1]) == ()
    assert deck_findings(load_brief(brief)) == []


@pytest.mark.slow
def test_check_hears_of_a_faulty_deck(brief):
    edited(brief, 'most_bank = "20 deg"', 'most_bank = "30 deg"')
    (found,) = deck_findings(load_brief(brief))
    assert "20 deg or less, as the tool says today" in str(found)
    done = CliRunner().invoke(app, ["check", str(brief)])
    assert done.exit_code == 1
    assert "20 deg or less, as the tool says today" in done.output


@pytest.mark.slow
def test_a_build_sets_them_beside_the_page(brief, tmp_path, today):
    notebook = '{"nbformat": 4, "nbformat_minor": 4, "metadata": {}, "cells": []}'
    (brief / "brief.ipynb").write_text(notebook, encoding="utf-8")
    out = tmp_path / "out"
    (result,) = build([brief], out, today, beside=deck_pages)
    assert not result.error
    assert [file.name for file in result.beside] == ["NB-2T-001.deck.html", "NB-2T-001.instructor.html"]
    index = (out / "index.html").read_text(encoding="utf-8")
    assert all(file.is_file() and f'href="{file.name}"' in index for file in result.beside)

    # a faulty deck fails its brief, in words, and every page of the last good build is left
    before = {file.name: file.read_bytes() for file in out.iterdir() if file.name != "index.html"}
    edited(brief, 'says = "refused"', 'says = "reduction"')
    (result,) = build([brief], out, today, beside=deck_pages)
    assert "case (entry 7).says" in result.error
    assert {file.name: file.read_bytes() for file in out.iterdir() if file.name != "index.html"} == before
