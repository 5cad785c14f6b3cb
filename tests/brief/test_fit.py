"""Whether sheet 1 fits A5, by published widths."""

from __future__ import annotations

from dataclasses import replace

import pytest

from briefkit.brief import fit
from briefkit.brief.pages import CrewPage, Grid, Section


@pytest.mark.parametrize(
    ("text", "bold", "wanted"),
    [
        # Adobe Core 14 AFM: A 667, V 667, space 278, W 944, i 222 (bold 278), 0 556, degree 400, w 722 (bold 778)
        ("A", False, 6.67),
        ("VNE", False, 6.67 + 7.22 + 6.67),
        ("W i", False, 9.44 + 2.78 + 2.22),
        ("iw", True, 2.78 + 7.78),
        ("30°", False, 5.56 * 2 + 4.00),
    ],
)
def test_widths_are_those_of_helvetica(text, bold, wanted):
    """From memory of the AFM files; the browser test measures the same in Liberation Sans."""
    assert fit.text_width(text, 10.0, bold=bold) == pytest.approx(wanted)


def page(sentences: int) -> CrewPage:
    grid = Grid(("Mass", "Less"), (("2,006 lb", "10 kt"),), "Reduction")
    front = (Section("1. VNE", grid=grid), Section("2. Words", before=("Five words of no consequence.",) * sentences))
    return CrewPage("N", "rev 0", "T", "", "", "Heading", ("Under.",), front, (), (), ())


def test_every_sentence_costs_a_line_and_too_many_are_told():
    assert fit.height(page(11)) - fit.height(page(10)) == pytest.approx(11.0 * 1.2 + 1.0)
    assert fit.complaint(page(5)) == ""
    most = int((fit.HEIGHT - fit.height(page(0))) / (11.0 * 1.2 + 1.0))
    assert fit.complaint(page(most - 1)) == ""
    assert fit.complaint(page(most + 3)).startswith("sheet 1 is about")
    assert "longer than one A5 sheet: fewer masses or words" in fit.complaint(page(most + 3))


def test_sheet_2_is_told_of_too():
    """A row of the table is as tall as its longest cell; a point has a line or more; both at 11 pt."""
    grid = Grid(("a", "b", "c", "d"), (("x", "x", "x", "x"),), "Which", numbers=False)
    one = Section("Which", grid=grid)
    row = ("x", "x", "x", "high speed, heavy, high and hot in a turn")  # 19 em: two lines of the last column
    more = replace(one, grid=replace(grid, rows=(*grid.rows, row)))
    cautions = Section("Cautions", points=("Short.",))
    base, taller = (replace(page(1), recognition=(part, cautions)) for part in (one, more))
    added = fit.recognition_height(taller) - fit.recognition_height(base)
    assert added == pytest.approx(2 * 11.0 * 1.12 + 2.2 + 0.75)
    assert fit.complaint(base) == ""
    long = replace(base, recognition=(one, Section("Cautions", points=("Short.",) * 40)))
    assert fit.complaint(long).startswith("sheet 2 is about ")
    assert fit.recognition_height(page(1)) == 0.0


def test_a_long_sentence_is_broken_where_a_word_would_not_fit():
    narrow = replace(page(1), under=("i" * 400,))  # one word cannot be broken: one line
    assert fit.height(narrow) == pytest.approx(fit.height(page(1)))
    words = replace(page(1), under=(" ".join(["word"] * 60),))
    # "word" is 2.167 em and a space 0.278: at 11 pt 13 of them take 347 of 363 pt, so 60 take five lines
    assert fit.height(words) - fit.height(page(1)) == pytest.approx(4 * 11.0 * 1.2)
