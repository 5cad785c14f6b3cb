"""The operator's own section table: read as it stands, or refused with the row named."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from briefkit.aircraft.section_table import read_section_table
from briefkit.errors import FaultyFile

HEADER = "mach, alpha_deg, cl, cd"
GOOD = [
    "# invented, for this test only",
    HEADER,
    *(
        f"{mach}, {alpha}, {round(alpha * slope, 3)}, 0.0{9 + alpha % 7}"
        for mach, slope in ((0.3, 0.1), (0.5, 0.11))
        for alpha in (-6, 0, 8, 16)
    ),
]


def written(folder: Path, lines: list[str], ending: str = "\n", start: str = "") -> Path:
    path = folder / "section.csv"
    path.write_bytes((start + ending.join(lines) + ending).encode("utf-8"))
    return path


@pytest.mark.parametrize(("ending", "start"), [("\n", ""), ("\r\n", "\ufeff")])
def test_read_as_it_stands(tmp_path: Path, ending: str, start: str) -> None:
    section = read_section_table(written(tmp_path, GOOD, ending, start))
    np.testing.assert_allclose(section.machs, [0.3, 0.5])
    np.testing.assert_allclose(np.degrees(section.angles), [-6.0, 0.0, 8.0, 16.0])
    np.testing.assert_allclose(section.lift[1], [-0.66, 0.0, 0.88, 1.76])
    assert section.highest_mach == 0.5
    lift, _ = section.coefficients(np.radians(np.array([4.0])), np.array([0.4]), np.array(5.73))
    assert lift[0] == pytest.approx(0.25 * (0.0 + 0.8 + 0.0 + 0.88))


def without(line: int) -> list[str]:
    return [text for number, text in enumerate(GOOD, start=1) if number != line]


def with_line(line: int, text: str) -> list[str]:
    return [text if number == line else old for number, old in enumerate(GOOD, start=1)]


@pytest.mark.parametrize(
    ("lines", "words"),
    [
        (without(8), ["line 8", "8 at Mach 0.5"]),  # a hole in the second block
        (without(10), ["after line 9", "16 at Mach 0.5"]),  # the last point
        (with_line(5, "0.3, -7, 0.1, 0.01"), ["line 5", "above 0"]),
        (with_line(7, "0.2, -6, 0.1, 0.01"), ["line 7, mach", "rising Mach"]),
        (with_line(4, "0.3, 0, 0,01, 0.01"), ["line 4", "5 cells"]),
        (with_line(4, "0.3, 0, nan, 0.01"), ["line 4, cl", "nan"]),
        (with_line(4, "0.3, 0, 1e-2, 0.01"), ["line 4, cl"]),
        (with_line(4, "0.3, 0, 0.0, -0.01"), ["line 4, cd", "0.0001 to 3"]),
        (with_line(4, "1.3, 0, 0.0, 0.01"), ["line 4, mach", "0 to 1"]),
        (with_line(2, "M, alpha, cl, cd"), ["line 2", HEADER]),
        ([HEADER], ["rows", "none"]),
        ([], ["nothing"]),
        (GOOD[:5], ["-5 to +15", "from -6 to 8"]),
    ],
)
def test_refused_with_the_row_named(tmp_path: Path, lines: list[str], words: list[str]) -> None:
    with pytest.raises(FaultyFile, match=r"section\.csv") as caught:
        read_section_table(written(tmp_path, lines))
    for word in words:
        assert word in str(caught.value)


def test_every_fault_of_the_cells_at_once(tmp_path: Path) -> None:
    lines = with_line(4, "0.3, zero, 0.0, 0.01")
    lines[5] = "0.3, 16, 1.6"
    with pytest.raises(FaultyFile, match="2 faults") as caught:
        read_section_table(written(tmp_path, lines))
    assert [fault.key for fault in caught.value.faults] == ["line 4, alpha_deg", "line 6"]


def test_a_file_that_is_not_there(tmp_path: Path) -> None:
    with pytest.raises(FaultyFile, match="file"):
        read_section_table(tmp_path / "none.csv")
