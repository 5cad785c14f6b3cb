"""The manual's chart on the page: cells as typed around the work area, whatever form the manual has."""

from __future__ import annotations

import math
import re
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from briefkit.aircraft.chart import ReadingRule
from briefkit.aircraft.load import load_aircraft
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.operation import Operation
from briefkit.brief import pictures
from briefkit.brief.chart_grid import ChartGrid, cell_text, chart_grid
from briefkit.brief.front import power_off
from briefkit.brief.pictures import row_on_chart
from briefkit.envelope.reductions import reductions
from briefkit.figures.chart import ChartFigure


def with_chart(examples: Path, folder: Path, body: str, name: str = "pelquill-2t") -> Aircraft:
    """A demo type with another [vne.power_on]."""
    text = (examples / "aircraft" / f"{name}.toml").read_text(encoding="utf-8")
    start = text.index("[vne.power_on]")
    end = text.index("\n[vne.power_off]")
    path = folder / f"{name}.toml"
    path.write_text(f'{text[:start]}[vne.power_on]\nsource = "2-4"\n{body}\n{text[end:]}', encoding="utf-8")
    return load_aircraft(path)


def grid(aircraft: Aircraft, operation: Operation, area: str = "vellmark") -> ChartGrid:
    entry = operation.entry_for(aircraft)
    assert entry is not None
    return chart_grid(aircraft, entry, operation.work_areas[area])


def test_the_2t_prints_the_cells_around_its_area(two_t: Aircraft, operation: Operation) -> None:
    found = grid(two_t, operation)
    assert found.header == ("Hp ft (29.92 set)", "0 °C", "+20 °C", "+40 °C")
    assert found.rows == (("6,000", "96", "88", "80*"), ("8,000", "87", "79", "70*"))
    assert found.notes == ("* warmer or higher than permitted: for reading between only.",)


def test_the_3f_prints_masses_with_its_first_one_or_less(examples: Path, operation: Operation) -> None:
    found = grid(load_aircraft(examples / "aircraft" / "ormbrae-3f.toml"), operation, "corrant")
    assert found.header == ("Hp m (1013.25 set)", "1,700\u00a0kg or less", "2,000\u00a0kg", "2,380\u00a0kg")
    assert found.rows[:2] == (("2,000", "264", "241", "213"), ("3,000", "236", "213", "185"))
    assert found.rows[2:] == (("4,000", "208", "185", "157"),)


def test_with_its_load_the_3f_prints_the_loads_figure(examples: Path, operation: Operation) -> None:
    found = grid(load_aircraft(examples / "aircraft" / "ormbrae-3f.toml", "external load"), operation, "corrant")
    assert {cell for row in found.rows for cell in row[1:]} == {"150"}
    assert "Never above 150 km/h IAS (load supplement p. 3 rev 1)." in found.notes


def test_a_lowered_chart_says_so(two_t: Aircraft, examples: Path, operation: Operation, tmp_path: Path) -> None:
    text = (examples / "aircraft" / "pelquill-2t.toml").read_text(encoding="utf-8")
    text += '\n[[configuration]]\nname = "doors off"\nsource = "supplement p. 2"\nvne = "less 15 kt"\n'
    (tmp_path / "pelquill-2t.toml").write_text(text, encoding="utf-8")
    found = grid(load_aircraft(tmp_path / "pelquill-2t.toml", "doors off"), operation)
    assert found.rows[1] == ("8,000", "72", "64", "55*")
    assert "Every entry is the basic chart’s less 15 KIAS (supplement p. 2)." in found.notes


def test_a_figure_with_slopes_stands_as_typed(examples: Path, operation: Operation, tmp_path: Path) -> None:
    aircraft = with_chart(examples, tmp_path, 'base = "112 kt"\nless = "3 kt per 1,000 ft above 3,000 ft"')
    found = grid(aircraft, operation)
    assert found.rows == (("base", "112 kt"), ("less", "3 kt per 1,000 ft above 3,000 ft"))


def test_what_is_read_off_a_line_is_rounded_down_and_marked(
    examples: Path, operation: Operation, tmp_path: Path
) -> None:
    body = 'reading = "interpolate"\nreading_error = "1 kt"\nlines = \'\'\'\nft   kt indicated\n'
    body += "-20 degC: 0 112, 7,000 100, 10,000 86\n+40 degC: 0 108, 6,000 79, 10,000 61\n'''"
    found = grid(with_chart(examples, tmp_path, body), operation)
    # at 6,000 ft the cold line is 112 - 12 x 6/7 = 101.7; at 7,000 the hot one 79 - 18/4 = 74.5
    assert found.rows[0] == ("6,000", "101†", "79*")
    assert found.rows[1] == ("7,000", "100", "74*")
    assert "† read off the manual’s lines or slopes, rounded down." in found.notes


def test_a_blank_cell_prints_as_a_dash(examples: Path, operation: Operation, tmp_path: Path) -> None:
    body = "chart = '''\nft \\ degC   0   +40   kt indicated\n0   112   108\n6,000   96   80\n10,000   77   -\n'''"
    found = grid(with_chart(examples, tmp_path, body), operation)
    assert found.rows[-1] == ("10,000", "77", "–*")


def test_density_altitude_rows_enclose_the_areas_density_altitudes(
    examples: Path, operation: Operation, tmp_path: Path
) -> None:
    body = "chart = '''\nDA ft   kt indicated\n0 or less   112\n4,000   110\n8,000   90\n12,000   70\n'''"
    aircraft = with_chart(examples, tmp_path, body)
    found = grid(aircraft, operation)
    # 6,000 ft at +10 C is a density altitude of about 6,800 ft, 8,000 ft at +30 C about 11,500 ft
    assert [row[0] for row in found.rows] == ["4,000", "8,000", "12,000"]
    assert found.header[0] == "Density altitude, ft"
    low = grid(aircraft, operation, "harl")
    assert low.rows[0][0] == "0 or less"
    assert len({row[0] for row in low.rows}) == len(low.rows)


def test_a_third_variable_prints_the_lowest_and_says_so(examples: Path, operation: Operation, tmp_path: Path) -> None:
    body = "chart = '''\n" + "".join(
        f"at {mass} lb or less\nft \\ degC   0   +40   kt indicated\n0   112   108\n10,000   {top}   61\n"
        for mass, top in (("1,700", "80"), ("2,006", "70"))
    )
    found = grid(with_chart(examples, tmp_path, body + "'''"), operation)
    assert found.rows[-1] == ("10,000", "70", "61*")
    assert any(note == "Lowest over every mass of the chart." for note in found.notes)


def test_a_chart_that_says_nothing_of_height_has_one_row(examples: Path, operation: Operation, tmp_path: Path) -> None:
    body = "chart = '''\nlb   kt indicated\n≤1,700   112\n2,006   100\n'''"
    found = grid(with_chart(examples, tmp_path, body), operation)
    assert found.rows == (("all", "112", "100"),)


def test_the_power_off_vne_in_the_manuals_form(two_t: Aircraft, examples: Path) -> None:
    assert power_off(two_t) == "85 KIAS, or the above if less"
    assert power_off(load_aircraft(examples / "aircraft" / "kvillarn-4h.toml")) == "VNE power on less 8 kt"


def test_a_capped_cell_prints_the_cap(two_t: Aircraft) -> None:
    capped = replace(two_t.vne, cap=80.0 * 1852.0 / 3600.0)
    assert cell_text(capped, (0, 0, 0, 0), "kt") == ("80", False)
    assert cell_text(capped, (5, 3, 0, 0), "kt") == ("61", False)


@pytest.mark.slow
@pytest.mark.parametrize(("name", "area"), [("ormbrae-3f", "corrant"), ("kvillarn-4h", "vellmark")])
def test_the_picture_of_a_row_on_the_chart(examples: Path, operation: Operation, name: str, area: str) -> None:
    aircraft = load_aircraft(examples / "aircraft" / f"{name}.toml")
    entry = operation.entry_for(aircraft)
    assert entry is not None
    table = reductions(aircraft, entry, operation.work_areas[area])
    html = row_on_chart(aircraft, table.rows[0])
    assert f"Pressure altitude, {aircraft.units.height}" in html
    assert "nan" not in re.sub(r"<[^>]*>", " ", html)


def test_no_line_of_a_picture_lies_above_the_chart_s_cap_or_its_rule(
    two_t: Aircraft, operation: Operation, monkeypatch: pytest.MonkeyPatch
) -> None:
    """At 7,000 ft and +20 degC the lower of 88 and 79 holds; a supplement's 80 KIAS is never passed."""
    drawn = []
    monkeypatch.setattr(pictures, "ChartFigure", lambda *a, **k: drawn.append(ChartFigure(*a, **k)) or drawn[-1])
    entry = operation.entry_for(two_t)
    assert entry is not None
    row = reductions(two_t, replace(entry, masses=entry.masses[-1:]), operation.work_areas["vellmark"]).rows[0]
    for changes, vne in (({"reading": ReadingRule.NEXT_LOWER}, 79.0), ({"cap": 80.0 * 1852.0 / 3600.0}, 80.0)):
        row_on_chart(replace(two_t, vne=replace(two_t.vne, **changes)), row)
        line = drawn[-1].figure.marks[2]
        assert np.interp(7000.0, line.x, line.y) == pytest.approx(vne, abs=0.51)
        assert np.interp(7000.0, line.x, line.y) <= vne + 1e-9


def test_a_picture_against_density_altitude_marks_the_point_there(
    examples: Path, operation: Operation, tmp_path: Path
) -> None:
    rows = "DA ft   kt indicated\n-3,000   112\n3,000   112\n8,000   86\n13,000   60\n"
    body = f"reading = \"interpolate\"\nchart = '''\n{rows}'''"
    aircraft = with_chart(examples, tmp_path, body)
    entry = operation.entry_for(aircraft)
    assert entry is not None
    table = reductions(aircraft, replace(entry, masses=entry.masses[-1:]), operation.work_areas["vellmark"])
    row = table.rows[0]
    assert row.answer is not None
    html = row_on_chart(aircraft, row)
    assert "Density altitude, ft" in html
    assert math.isfinite(row.answer.chart_point.vne)
