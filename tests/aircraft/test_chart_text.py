"""Charts as people paste them: the same chart whatever parts the cells; a mistyped cell is refused or alone changes."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from briefkit.aircraft.calibration_text import CalibrationRows, read_calibration
from briefkit.aircraft.chart_text import TypedChart, read_vne
from briefkit.reading.document import Document
from briefkit.units import FOOT, KNOT

CELLS = (
    ("ft \\ degC", "-20", "0", "+20", "+40", "kt indicated"),
    ("0", "112", "112", "112", "108"),
    ("2,000", "112", "112", "107", "99"),
    ("4,000", "112", "106", "97", "89"),
)


def block(separator: str, end: str = "\n", cells: tuple[tuple[str, ...], ...] = CELLS) -> str:
    return end.join(separator.join(row) for row in cells) + end


def read(folder: Path, text: str) -> tuple[TypedChart | None, Document]:
    path = folder / "chart.toml"
    path.write_bytes(f"[vne.power_on]\nchart = '''\n{text}'''\n".encode())
    document = Document(path)
    return read_vne(document, "vne.power_on.chart", document.data["vne"]["power_on"]["chart"]), document


PASTED = {
    "spaces": block("    "),
    "one space": block(" "),
    "tabs": block("\t"),
    "semicolons": block(";"),
    "semicolons and spaces": block(" ; "),
    "CRLF": block("\t", "\r\n"),
    "BOM inside": "\ufeff" + block("\t"),
    "trailing tabs": block("\t").replace("\n", "\t\t\n"),
    "gap before the unit": block("\t").replace("\tkt", "\t\t\tkt"),
    "blank lines": block("\t").replace("\n", "\n\n \t \n"),
    "Unicode minus": block("  ").replace("-20", "\u221220"),
    "degree sign": block("\t").replace("degC", "°C"),
    "no group commas": block(";").replace(",", ""),
    "no spaces in the corner": block("  ").replace("ft \\ degC", "ft\\degC"),
}


@pytest.mark.parametrize("name", PASTED)
def test_a_pasted_chart_reads_the_same(tmp_path: Path, name: str) -> None:
    table, document = read(tmp_path, PASTED[name])
    assert document.faults == []
    assert table is not None
    assert table.axes[0].values == pytest.approx((0.0, 2000 * FOOT, 4000 * FOOT))
    assert table.axes[1].values == pytest.approx((253.15, 273.15, 293.15, 313.15))
    np.testing.assert_allclose(table.speeds[2] / KNOT, [112.0, 106.0, 97.0, 89.0])
    assert (table.axes[1].axis, table.speed_unit, table.axes[0].unit) == ("temperature", "kt", "ft")
    assert table.rows[2][1:] == ("112", "112", "107", "99")  # as typed


def test_rows_are_kept_as_typed(tmp_path: Path) -> None:
    table, _ = read(tmp_path, block("  "))
    assert table is not None
    assert table.rows == (CELLS[0][:-1], *CELLS[1:])


def test_two_columns_and_two_rows_are_a_chart(tmp_path: Path) -> None:
    table, document = read(tmp_path, "ft \\ degC  0  +40  kt indicated\n0  112  108\n10,000  77  61\n")
    assert document.faults == []
    assert table is not None
    assert table.speeds.shape == (2, 2)


def test_every_faulty_cell_is_named_with_its_line(tmp_path: Path) -> None:
    text = block("\t").replace("107", "1O7").replace("\t89", "\t").replace("106", "1,06")
    table, document = read(tmp_path, text)
    assert table is None
    assert [(fault.key, fault.line) for fault in document.faults] == [
        ("vne.power_on.chart, row 2,000, column +20", 5),
        ("vne.power_on.chart, row 4,000", 6),
    ]
    text = block("\t").replace("107", "1O7").replace("106", "1,06")
    _, document = read(tmp_path, text)
    assert [(fault.key, fault.line) for fault in document.faults] == [
        ("vne.power_on.chart, row 2,000, column +20", 5),
        ("vne.power_on.chart, row 4,000, column 0", 6),
    ]


def test_a_block_that_starts_on_the_line_of_its_quotes_points_at_the_right_line(tmp_path: Path) -> None:
    path = tmp_path / "chart.toml"
    path.write_text("[vne.power_on]\nchart = '''" + block("  ").replace("107", "1O7") + "'''\n", encoding="utf-8")
    document = Document(path)
    read_vne(document, "vne.power_on.chart", document.data["vne"]["power_on"]["chart"])
    assert [fault.line for fault in document.faults] == [4]


@pytest.mark.slow
@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], deadline=None)
@given(st.text(alphabet=st.sampled_from("0129.,;-+ \t\nkftdegCindicated\\ \u2212"), max_size=60))
def test_any_text_is_a_chart_or_has_a_fault(tmp_path: Path, text: str) -> None:
    table, document = read(tmp_path, text + "\n")
    assert (table is None) == bool(document.faults)
    if table is not None:
        assert not np.any(table.speeds <= 0.0)


@pytest.mark.slow
@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], deadline=None)
@given(row=st.integers(0, 3), column=st.integers(0, 4), cell=st.text(alphabet="0123456789.,-+ OlkFt?", max_size=5))
def test_a_mistyped_cell_is_refused_at_its_row_or_changes_only_itself(
    tmp_path: Path, row: int, column: int, cell: str
) -> None:
    cells = [list(line) for line in CELLS]
    cells[row][column] = cell
    table, document = read(tmp_path, block("\t", cells=tuple(tuple(line) for line in cells)))
    if table is None:
        assert document.faults
        assert all(fault.read and fault.permitted and fault.line for fault in document.faults)
    elif row and column:
        expected = np.array([[float(value) for value in line[1:5]] for line in CELLS[1:]])
        typed = cell.strip().replace(",", "")
        expected[row - 1, column - 1] = np.nan if typed == "-" else float(typed)
        np.testing.assert_allclose(table.speeds / KNOT, expected)


def test_a_calibration_reads_in_any_separator(tmp_path: Path) -> None:
    for separator in ("   ", "\t", ";"):
        rows = (("km/h indicated", "km/h calibrated"), ("100", "104"), ("150", "151"))
        text = "\n".join(separator.join(row) for row in rows) + "\n"
        path = tmp_path / "calibration.toml"
        path.write_text(f"[calibration]\ntable = '''\n{text}'''\n", encoding="utf-8")
        document = Document(path)
        found = read_calibration(document, "calibration.table", document.data["calibration"]["table"])
        assert document.faults == []
        assert isinstance(found, CalibrationRows)
        assert found.indicated == pytest.approx((100 / 3.6, 150 / 3.6))
        assert found.calibrated == pytest.approx((104 / 3.6, 151 / 3.6))
        assert found.rows == rows
