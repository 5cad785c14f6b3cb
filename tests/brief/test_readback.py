"""The read-back sheet: as typed, ten cells open."""

from __future__ import annotations

from dataclasses import replace

import pytest

from briefkit.brief.identity import load_brief
from briefkit.brief.pages import render_plain
from briefkit.brief.readback import BLANKS, readback


@pytest.fixture(scope="module")
def loaded(examples):
    return load_brief(examples / "vellmark-2t")


def test_everything_as_typed_and_ten_cells_open(loaded):
    sheet = readback(loaded.aircraft, loaded.identity)
    assert sheet.chart.rows[3] == ("6,000", "105", "96", "88", "80")  # flight manual 2-4 of the invented 2T
    assert len(sheet.chart.blanks) == BLANKS == 10
    assert sorted(sheet.chart.blanks.values()) == list(range(1, 11))
    assert all(column > 0 for _, column in sheet.chart.blanks)
    limits = {row[0]: row[1:] for row in sheet.limits.rows}
    assert limits["Maximum mass"] == ("2,006 lb", "flight manual 2-2 rev 4")
    assert limits["Maximum temperature, above standard"][0] == "35 degC"
    assert "Maximum bank" not in limits  # the 2T's manual has none
    calibration = next(grid for grid in sheet.more if "calibration" in grid.caption)
    assert calibration.rows[0] == ("40", "44")


def test_the_answers_are_the_open_cells(loaded):
    sheet = readback(loaded.aircraft, loaded.identity)
    for (row, column), number in sheet.chart.blanks.items():
        answer = sheet.answers.rows[number - 1]
        assert answer[:4] == (
            str(number),
            sheet.chart.rows[row][0],
            sheet.chart.header[column],
            sheet.chart.rows[row][column],
        )


def test_other_data_other_cells_same_data_same_cells(loaded):
    first = readback(loaded.aircraft, loaded.identity).chart.blanks
    assert readback(loaded.aircraft, loaded.identity).chart.blanks == first
    changed = replace(loaded.aircraft, data_hash="0" * 64)
    assert readback(changed, loaded.identity).chart.blanks != first


def test_an_open_cell_does_not_show_what_was_typed(loaded):
    aircraft, identity = loaded.aircraft, loaded.identity
    sheet = readback(aircraft, identity)
    marked = replace(sheet.chart, rows=tuple((row[0], *("X" * len(row[1:]))) for row in sheet.chart.rows))

    class Page:
        number, revision, invented = "NB-1", "rev 0", ""

    html = render_plain("readback.html.j2", page=Page, sheet=replace(sheet, chart=marked))
    chart = html.split("<tbody>")[1].split("</tbody>")[0]
    cells = sum(len(row) - 1 for row in sheet.chart.rows)
    assert chart.count('<td class="blank">') == BLANKS
    assert chart.count("<td>X</td>") == chart.count("X") == cells - BLANKS
