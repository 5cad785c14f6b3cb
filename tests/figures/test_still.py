"""Stills of exhibits and widget trees, held against HTML as html5lib parses it."""

from __future__ import annotations

import dataclasses
from typing import Any

import bqplot
import html5lib
import ipywidgets as w
import pytest

from briefkit.figures.parts import figure_columns
from briefkit.figures.still import Drawing, StillParts, Table, still

SVG = "{http://www.w3.org/2000/svg}"


def line_figure(scales: Any, figure: Any) -> bqplot.Figure:
    return figure(bqplot.Lines(x=[0.0, 10.0], y=[0.0, 5.0], scales=scales), title="Named")


@pytest.fixture
def parts(scales, figure) -> StillParts:
    drawing = Drawing(line_figure(scales, figure), "Speed", "VNE 85 KIAS at 5,210 ft.")
    table = Table(("Hp ft", "KIAS"), (("5,000", "85"), ("6,000", "80")), "VNE")
    inputs = (("Mass", "2,006 lb"), ("OAT", "+36 °C"))
    return StillParts("Boundary", "VNE 85 KIAS.", "VNE 85 KIAS at 5,210 ft.", inputs, (drawing,), table, ("A note.",))


class Exhibit(w.VBox):
    def __init__(self, parts: StillParts) -> None:
        super().__init__()
        self._parts = parts

    def still_parts(self) -> StillParts:
        return self._parts


def fragment(html: str) -> Any:
    """Parsed by the HTML standard's own rules; a parse error raises."""
    return html5lib.HTMLParser(strict=True, namespaceHTMLElements=False).parseFragment(html)


def texts(tree: Any, path: str) -> list[str]:
    return ["".join(node.itertext()) for node in tree.iterfind(path)]


def test_an_exhibit_has_caption_picture_inputs_table_and_notes_in_that_order(parts):
    tree = fragment(still(Exhibit(parts)))
    figure = tree.find("figure")
    kinds = [child.tag.split("}")[-1] for child in figure]
    assert kinds == ["figcaption", "svg", "dl", "table", "p"]
    assert figure.get("class") == "exhibit"
    assert texts(figure, "figcaption") == ["Boundary VNE 85 KIAS."]
    assert texts(figure, "dl//dt") == ["Mass", "OAT"]
    assert texts(figure, "dl//dd") == ["2,006 lb", "+36 °C"]


def test_the_table_is_a_real_one(parts):
    """WCAG technique H63: header cells carry their scope; H39: the caption names the table."""
    table = fragment(still(Exhibit(parts))).find("figure/table")
    assert texts(table, "caption") == ["VNE"]
    assert [cell.get("scope") for cell in table.iterfind("thead//th")] == ["col", "col"]
    assert [cell.get("scope") for cell in table.iterfind("tbody//th")] == ["row", "row"]
    assert texts(table, "tbody//td") == ["85", "80"]


def test_columns_of_figures_are_set_to_the_right():
    """Most of a column's cells are a number with at most one word of unit; the first column names the rows."""
    rows = (
        ("6,000", "−1.4°", "282 kt", "± 5.2 %", "from 88", "8,000 ft, +20 °C", "flight manual 2-4"),
        ("8,000", "1.2", "no figure", "± 1.0°", "no figure", "whole area", "5.73 per radian as published"),
        ("9,000", "+20 °C", "1,800 lb", "80*", "77", "9,860 ft, +20 °C", ""),
    )
    assert figure_columns(rows) == (2, 3, 4)


def test_an_alt_no_drawing_says_becomes_the_label_of_the_figure(parts):
    assert fragment(still(Exhibit(parts))).find("figure").get("aria-label") is None
    other = dataclasses.replace(parts, alt="Reduction 10 kt.")
    assert fragment(still(Exhibit(other))).find("figure").get("aria-label") == "Reduction 10 kt."


def test_the_same_exhibit_twice_has_ids_of_its_own(parts):
    both = fragment(still(Exhibit(parts), "1") + still(Exhibit(parts), "2"))
    ids = [node.get("id") for node in both.iter() if isinstance(node.tag, str) and node.get("id")]
    assert len(ids) == len(set(ids)) == 4


@pytest.mark.parametrize("name", ["title", "caption", "alt"])
def test_an_exhibit_without_words_is_refused(parts, name):
    with pytest.raises(ValueError, match=name):
        still(Exhibit(dataclasses.replace(parts, **{name: " "})))


def test_an_exhibit_may_be_a_table_alone(parts):
    html = still(Exhibit(dataclasses.replace(parts, drawings=())))
    assert "<svg" not in html
    assert "<table" in html
    assert "VNE 85 KIAS at 5,210 ft." in html


def test_an_exhibit_without_a_table_is_refused(parts):
    with pytest.raises(ValueError, match="at least one row"):
        still(Exhibit(dataclasses.replace(parts, table=Table(("Hp ft",), ()))))
    with pytest.raises(ValueError, match="3 cells under 2"):
        still(Exhibit(dataclasses.replace(parts, table=Table(("a", "b"), (("1", "2", "3"),)))))


@pytest.mark.parametrize("bad", ["nan kt", "−inf", "VNE is NaN", "infinity"])
def test_words_that_are_not_numbers_never_reach_a_page(parts, bad):
    with pytest.raises(ValueError, match="not finite"):
        still(Exhibit(dataclasses.replace(parts, caption=bad)))
    with pytest.raises(ValueError, match="not finite"):
        still(w.HTML(f"<p>{bad}</p>"))


def test_ordinary_words_with_those_letters_pass(parts):
    assert "finance" in still(Exhibit(dataclasses.replace(parts, caption="Banana, information, finance.")))


@pytest.mark.slow
def test_a_bare_figure_is_named_by_its_title(scales, figure):
    assert texts(fragment(still(line_figure(scales, figure))), f"figure/{SVG}svg/{SVG}title") == ["Named"]
    with pytest.raises(ValueError, match="needs a title"):
        still(figure(bqplot.Lines(x=[0.0, 1.0], y=[0.0, 1.0], scales=scales)))


def test_a_panel_keeps_its_structure_and_loses_its_controls(parts, scales, figure):
    """Measured fact of the trial: structure stays, inputs become lines, buttons and outputs vanish."""
    panel = w.VBox([
        w.HTML("<p>Before <b>this</b>.</p>"),
        w.HBox([w.FloatSlider(value=2006, min=1300, max=2006, description="Mass:", readout_format=",.0f"),
                w.Dropdown(options=[("hot day", 1), ("cold day", 2)], value=2, description="Day")]),
        w.Button(description="Do not print me"),
        w.Output(),
        Exhibit(parts),
    ])  # fmt: skip
    html = still(panel)
    tree = fragment(html)
    assert texts(tree, ".//dt")[:2] == ["Mass", "Day"]
    assert texts(tree, ".//dd")[:2] == ["2,006", "cold day"]
    assert "Do not print me" not in html
    assert html.index("Before") < html.index("cold day") < html.index("<figure")


def test_tabs_and_accordions_become_headed_sections(scales, figure):
    for kind in (w.Tab, w.Accordion):
        panel = kind([line_figure(scales, figure), w.Label("second")], titles=["Picture", "Words"])
        tree = fragment(still(panel))
        assert texts(tree, "section/h4") == ["Picture", "Words"]
    with pytest.raises(ValueError, match="section 1"):
        still(w.Tab([w.Label("words")]))


@pytest.mark.parametrize(
    ("widget", "shown"),
    [
        (w.IntSlider(value=-7, min=-40, max=40, description="OAT"), "−7"),
        (w.IntText(value=2006, description="Mass"), "2,006"),
        (w.FloatText(value=36.5, description="OAT"), "36.5"),
        (w.FloatRangeSlider(value=(10.0, 30.0), min=0, max=40, description="OAT"), "10 to 30"),
        (w.Checkbox(value=True, description="Doors off"), "yes"),
        (w.ToggleButton(value=False, description="Doors off"), "no"),
        (w.SelectMultiple(options=["a", "b", "c"], value=["a", "c"], description="Bases"), "a, c"),
        (w.Dropdown(options=["a"], value=None, description="Base"), "not set"),
        (w.Text(value="W < 2,006", description="Remark"), "W < 2,006"),
    ],
)
def test_every_input_is_shown_at_its_value(widget, shown):
    assert texts(fragment(still(widget)), ".//dd") == [shown]


def test_an_input_without_a_name_is_refused():
    with pytest.raises(ValueError, match="needs a description"):
        still(w.VBox([w.FloatSlider()]))


def test_hidden_things_leave_nothing(parts):
    exhibit = Exhibit(parts)
    exhibit.layout.display = "none"
    assert still(exhibit) == ""
    assert still(w.VBox([w.Label("gone", layout={"visibility": "hidden"})])) == ""


def test_an_unknown_widget_is_refused_by_name():
    class Odd(w.DOMWidget):
        pass

    with pytest.raises(ValueError, match="Odd"):
        still(w.VBox([Odd()]))
    with pytest.raises(ValueError, match="ColorPicker"):
        still(w.ColorPicker())
    with pytest.raises(ValueError, match="dict"):
        still({})
