"""What is seen in a notebook without running it: people's data, pictures without words, what has no still."""

from __future__ import annotations

from pathlib import Path

import pytest

from briefkit.brief.check_notebook import notebook_findings, personal_data
from briefkit.brief.finding import Level


def texts(folder: Path) -> list[str]:
    return [one.text for one in notebook_findings(folder) if one.level is Level.BLOCKS]


# The shapes are ITU-T E.123's, RFC 5322's and the licence number formats of Part-FCL authorities; the numbers are from
# ranges kept for fiction (ITU +999, 555-01xx) or made up.
@pytest.mark.parametrize(
    ("text", "what"),
    [
        ("write to ops.desk+brief@norrabeck.example today", "an e-mail address"),
        ("call +999 607 123 4567", "a telephone number"),
        ("call +44 (0)20 7946 0123", "a telephone number"),
        ("(0607) 123 4567", "a telephone number"),
        ("020 7946 0123", "a telephone number"),
        ("555-555-0123", "a telephone number"),
        ("555.555.0123", "a telephone number"),
        ("Tel: 46 01 23 99", "a telephone number"),
        ("mobile no. 5550123", "a telephone number"),
        ("XX.FCL.12345", "a licence number"),
        ("GBR.FCL.AT.123456H.A", "a licence number"),
        ("licence no. 4471882", "a licence number"),
        ("ATPL(H) 123456", "a licence number"),
        ("certificate number 1234567", "a licence number"),
        ("Name: A. Person", "a label for a person's name"),
        ("**Trainee:** Person", "a label for a person's name"),
        ("| Check pilot : Person |", "a label for a person's name"),
        ("- Signed by: Person", "a label for a person's name"),
    ],
)
def test_peoples_data_is_found(text: str, what: str) -> None:
    found = personal_data("text cell 1", text)
    assert what in {one.text.partition(":")[0] for one in found}
    assert all(one.level is Level.BLOCKS for one in found)


@pytest.mark.parametrize(
    "text",
    [
        "At 2,006 lb and 8,000 ft, +20 C, slow to VNE less 10 kt (14 CFR 27.1505(b)(1)).",
        "The pressure falls from 1013.25 to 985 hPa; 29.92 set. Effective 2030-04-01, expires 2032-02-29.",
        "+10 to +30 C; Hp 6,000 to 8,000 ft; rotor 97 to 102 %; 1,700 1,750 1,800 1,900 2,006 lb",
        "| 6,000 | 105 | 96 | 88 | 80 |\n| 8,000 | 95 | 87 | 79 | 70 |",
        "FAA-H-8083-21B ch. 11; flight manual 2-4 rev 4; NB-2T-001 rev 0; serials 014, 022; work order 2231.",
        "The pilot flying slows down first: the crew agrees on it. Name the limit, then fly it.",
        "The type certificate and its supplement 4 come first.",
        "10000000 times the 12.5 m2",
    ],
)
def test_figures_and_words_of_the_trade_are_not_peoples_data(text: str) -> None:
    assert personal_data("text cell 1", text) == []


def test_names_of_arguments_are_no_labels_in_code(brief: Path, nb) -> None:
    nb.write(brief / "brief.ipynb", nb.code("def show(name: str):\n    pilot: str = name\n    return pilot\n"))
    assert texts(brief) == []
    nb.write(brief / "brief.ipynb", nb.code("contact = 'ops@norrabeck.example'"))
    assert texts(brief) == ["an e-mail address: 'ops@norrabeck.example'"]


@pytest.mark.parametrize(
    ("source", "count"),
    [
        ("![](disc.png)", 1),
        ("![ ](disc.png) and ![][disc]", 2),
        ("<img src='disc.png'>", 1),
        ('<img src="disc.png" alt="">', 1),
        ("![The disc from above](disc.png)", 0),
        ('<img alt="The disc from above" src="disc.png">', 0),
        ("Write `![](file)` for a picture.", 0),
    ],
)
def test_a_picture_needs_words(brief: Path, nb, source: str, count: int) -> None:
    nb.write(brief / "brief.ipynb", nb.text(source))
    found = texts(brief)
    assert [text.split()[0] for text in found] == ([str(count)] if count else [])
    assert all("without words" in text for text in found)


@pytest.mark.parametrize(
    ("source", "shown"),
    [
        ("1 + 1", "1 + 1"),
        ("'text'", "text"),
        ("[1, 2]", "[1, 2]"),
        ("import matplotlib.pyplot as plt\nplt.plot([1])", "plt.plot"),
        ("from IPython.display import HTML\nHTML('<b>x</b>')", "HTML"),
        ("display('text')", "display"),
        ("import pandas as pd\npd.DataFrame()", "pd.DataFrame"),
    ],
)
def test_what_a_cell_shows_without_a_still_is_found(brief: Path, nb, source: str, shown: str) -> None:
    nb.write(brief / "brief.ipynb", nb.text("Words"), nb.code(source))
    (found,) = notebook_findings(brief)
    assert "no still" in found.text
    assert shown in found.text
    assert found.place.endswith("code cell 1")


@pytest.mark.parametrize(
    "source",
    [
        "1 + 1;",
        "x = 1",
        "DiscMap(live)",
        "live",
        "None",
        "print('x')",
        "%timeit 1",
        "!ls",
        "live?",
        "display(live)",
        "",
    ],
)
def test_what_a_build_would_show_or_not_show_is_left_to_it(brief: Path, nb, source: str) -> None:
    nb.write(brief / "brief.ipynb", nb.code(source))
    assert texts(brief) == []


def test_a_cell_that_is_not_python_is_found(brief: Path, nb) -> None:
    nb.write(brief / "brief.ipynb", nb.code("DiscMap(live"))
    assert texts(brief) == ["not Python: '(' was never closed"]


def test_the_example_notebooks_have_nothing(examples: Path) -> None:
    for folder in (path.parent for path in examples.glob("*/brief.ipynb")):
        assert notebook_findings(folder) == []
