"""The blocks a page is set from, and the small rules of setting."""

from __future__ import annotations

import re
import warnings

import html5lib
import pytest

from briefkit.brief import templates
from briefkit.brief.harden import harden
from briefkit.brief.pages import CrewPage, Grid, Ink, Section, css_string, render, set_cell, set_text
from briefkit.errors import BuildError


def crew(**changes: object) -> CrewPage:
    """A page with one of everything; words chosen to need escaping."""
    vne = Grid(("Hp ft", "0 °C"), (("6,000", "96"), ("8,000", "80*")), "VNE", beside=("Between: <interpolate>",))
    turn = Grid(("Mass", "Less"), (("2,006 lb", "10 kt"),), "Reduction", Ink.COMPUTED, numbers=False)
    cards = Grid(("", "When", "Sign", "First"), (("Low g", "any", "light", ""),), "Which", numbers=False)
    content = {
        "number": "NB-1",
        "revision": "rev 0",
        "title": 'A "title" & </title><b>more',
        "expires": "expires 29 Feb 2032",
        "mark": "DRAFT: not for crews",
        "heading": "Type <9>, doors on",
        "under": ("Serials 1 & 2 only.",),
        "front": (
            Section("1. VNE", "KIAS", grid=vne),
            Section("2. Turn", grid=turn),
            Section("3. Air", before=("a", "b")),
        ),
        "recognition": (Section("Which", grid=cards, points=("p", "q")),),
        "analysis": (Section("How", before=("By hand.",), figure='<figure class="exhibit"><svg></svg></figure>'),),
        "control": (Section("Control", after=("Signed by nobody.",)),),
        "slip": Section("Slip", before=("Read.",)),
        "invented": "Invented. Do not use.",
    }
    return CrewPage(**(content | changes))  # type: ignore[arg-type]


def test_the_page_is_valid_html_and_keeps_its_order():
    """html5lib in strict mode raises on any parse error of the WHATWG HTML standard."""
    page = harden(render(crew(), ("<p>first</p>", "<p>second</p>")))
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", DeprecationWarning)
        html5lib.HTMLParser(strict=True).parse(page)
    order = ["DRAFT: not for crews", "Type &lt;9&gt;", "1. VNE", "2. Turn", "3. Air", "Which", "How", "first", "second"]
    order += ["Control", "Slip"]
    places = [page.index(words, page.index("<body>")) for words in order]
    assert places == sorted(places)
    assert '<title>NB-1 rev 0: A "title" &amp; &lt;/title&gt;&lt;b&gt;more</title>' in page
    assert "Between: &lt;interpolate&gt;" in page


def test_every_printed_page_carries_mark_number_and_expiry():
    style = re.findall(r"<style>(.*?)</style>", harden(render(crew(), ())), re.DOTALL)[0]
    margin = re.search(r'@top-left { content: "(.*?)"; }', style)
    assert margin is not None
    said = re.sub(r"\\([0-9a-f]+) ", lambda code: chr(int(code[1], 16)), margin[1])
    assert said == "DRAFT: not for crews | NB-1 rev 0 | expires 29 Feb 2032"
    assert "size:" not in re.sub(r"(font|text)-size[^;]*;?", "", style).replace("box-sizing:", "")
    unmarked = render(crew(mark=""), ())
    assert "DRAFT" not in unmarked


def test_a_style_string_cannot_be_left():
    hostile = 'x"; } body { display: none } /* \\'
    assert '"' not in css_string(hostile)
    assert ";" not in css_string(hostile)
    assert css_string("NB-2T rev 0") == "NB\\2d 2T rev 0"


@pytest.mark.parametrize(
    ("text", "wanted"),
    [
        ("at 8,000 ft, +20 °C, 100 %", "at 8,000\u00a0ft, +20\u00a0°C, 100\u00a0%"),
        ("54 KIAS; 5 kt or more", "54\u00a0KIAS; 5\u00a0kt or more"),
        ("± 5.2 %", "±\u00a05.2\u00a0%"),
        ("3 manuals, 2 feet apart", "3 manuals, 2 feet apart"),
        ("a < b", "a &lt; b"),
    ],
)
def test_a_number_is_not_parted_from_its_unit(text, wanted):
    assert set_text(text) == wanted


def test_a_mark_hangs_outside_the_figures():
    assert set_cell("80*") == '80<span class="mark">*</span>'
    assert set_cell("80") == "80"
    assert set_cell("warm*") == "warm*"


def test_a_short_row_is_refused():
    with pytest.raises(BuildError, match="table 'VNE': a row of 1 cells under 2 headings"):
        Grid(("a", "b"), (("1",),), "VNE")


def test_the_template_is_found_in_a_wheel_and_beside_the_package_in_a_checkout(tmp_path, monkeypatch):
    module = tmp_path / "briefkit" / "brief" / "templates.py"
    monkeypatch.setattr(templates, "__file__", str(module))
    with pytest.raises(BuildError, match="template is missing from this installation"):
        templates.template_folder()
    beside = tmp_path / "templates" / "handout"
    beside.mkdir(parents=True)
    assert templates.template_folder() == beside
    inside = tmp_path / "briefkit" / "templates" / "handout"
    inside.mkdir(parents=True)
    assert templates.template_folder() == inside
