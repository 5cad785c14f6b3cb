"""The manual's hover ceilings: one line looked up, nothing computed but where the manual interpolates."""

from __future__ import annotations

import numpy as np
import pytest

from briefkit.aircraft.hover import hover_lines
from briefkit.units import FOOT, POUND, ZERO_CELSIUS

HOT = ZERO_CELSIUS + 30.0


def oge(aircraft, mass, height, oat):
    (line,) = [line for line in hover_lines(aircraft, mass, height, oat) if line.kind == "OGE"]
    return line


def with_table(file_2t, rows: str, reading: str = ""):
    start = file_2t.text.index("[[hover]]")
    table = f"[[hover]]\nkind = \"OGE\"\nsource = \"5-3\"\n{reading}\ntable = '''\n{rows}\n'''\n"
    return type(file_2t)(file_2t.text[:start] + table, file_2t.folder)


TWO = "lb \\ degC    0    +20    ft\n1,700   11,000   9,000\n2,006   7,000   5,000"


def test_too_high_for_its_mass_and_day(file_2t):
    line = oge(file_2t.load(), 2006 * POUND, 6000 * FOOT, HOT)
    # 6,000 ft, +30 C is ISA+26.9: the column ISA+35 holds, 3,400 ft
    assert line.possible is False
    assert (
        line.text.replace("\u00a0", " ") == "At 2,006 lb the manual gives no OGE hover here (flight manual 5-3 rev 4)."
    )


def test_low_and_cold_enough(file_2t):
    line = oge(file_2t.load(), 1800 * POUND, 3000 * FOOT, ZERO_CELSIUS)
    assert line.possible is True
    # colder than standard reads the column ISA, a lighter mass the row 2,006 lb: the lower ceiling in both
    assert line.text.replace("\u00a0", " ").startswith("At 1,800 lb the manual gives OGE hover here, up to 7,250 ft")


@pytest.mark.parametrize(("mass", "oat"), [(2100, 10.0), (2000, 60.0)])
def test_beyond_the_table_there_is_no_figure(file_2t, mass, oat):
    line = oge(file_2t.load(), mass * POUND, 1000 * FOOT, ZERO_CELSIUS + oat)
    assert line.possible is None
    assert "ends at" in line.text


def test_exact_cells_and_the_next_lower_between(file_2t):
    aircraft = with_table(file_2t, TWO).load()
    for mass, oat, ceiling in ((1700, 0, 11_000), (1700, 20, 9000), (2006, 20, 5000), (1701, 0, 7000), (1700, 1, 9000)):
        for height, possible in ((ceiling - 1, True), (ceiling + 1, False)):
            assert oge(aircraft, mass * POUND, height * FOOT, ZERO_CELSIUS + oat).possible is possible, (
                mass,
                oat,
                height,
            )


def test_interpolated_only_where_the_manual_says_so(file_2t):
    aircraft = with_table(file_2t, TWO, 'reading = "interpolate"').load()
    for height, possible in ((7999, True), (8001, False)):  # half way in both: (11,000 + 9,000 + 7,000 + 5,000)/4
        assert oge(aircraft, 1853 * POUND, height * FOOT, ZERO_CELSIUS + 10.0).possible is possible


def test_a_dash_is_no_ceiling(file_2t):
    line = oge(with_table(file_2t, TWO.replace("5,000", "-")).load(), 2006 * POUND, 1000 * FOOT, ZERO_CELSIUS + 20.0)
    assert line.possible is None
    assert "no hover figure" in line.text


def test_the_table_prints_as_typed(file_3f):
    first, second = file_3f.load().hover
    assert first.label == "Hover ceiling out of ground effect at 2,380 kg"
    assert first.text == "2,950 m at ISA; 1,810 m at ISA+20; 1,020 m at ISA+35"
    assert second.source == "flight manual 5-3 rev 2"


def test_a_line_of_words_is_still_a_line(file_2t):
    line = file_2t.added('[[hover]]\nlabel = "IGE at 1,900 lb"\ntext = "10,500 ft"\nsource = "5-4"').load().hover[-1]
    assert (line.label, line.text) == ("IGE at 1,900 lb", "10,500 ft")


def test_a_ceiling_that_rises_with_mass_is_a_finding(file_2t):
    from briefkit.aircraft.findings import entry_findings

    found = entry_findings(with_table(file_2t, TWO.replace("7,000", "12,000")).load())
    assert [fault.key for fault in found] == ["hover.table, row 2,006, column 0"]


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ("lb \\ degC", "lb \\ ft", "a line like"),
        ("ft\n1,700", "lb\n1,700", "a line like"),
        ("1,700   11,000", "1,700   11 000", "write 2,000 or 2000"),
        ("5,000", "5O00", "a number without unit"),
        ("11,000", "110,000", "-600 to 11,000 m"),
        ("0    +20", "20    +20", "more than the one before it"),
        ("0    +20", "32    +120", "is it Fahrenheit?"),
        ("2,006", "1,600", "more than the one before it"),
        ("lb \\ degC", "kg \\ degC", "lb, as units.mass says"),
    ],
)
def test_a_slip_in_the_table_is_named(file_2t, old, new, words):
    assert old in TWO
    faults = with_table(file_2t, TWO.replace(old, new)).faults()
    assert any(words in str(fault) for fault in faults), [str(fault) for fault in faults]


def test_half_an_entry_is_refused(file_2t):
    fault = file_2t.added('[[hover]]\nlabel = "IGE"\nkind = "IGE"').fault()
    assert "label and text" in fault.permitted


def test_every_number_of_the_look_up_is_finite(file_2t):
    aircraft = file_2t.load()
    for mass in np.linspace(590.0, 1000.0, 9):
        for height in np.linspace(-500.0, 4000.0, 9):
            for line in hover_lines(aircraft, mass, height, 280.0):
                assert "nan" not in line.text
