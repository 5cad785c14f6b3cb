"""Typed TOML to tables: what is tolerated, what is refused, and that every fault is listed with its line."""

from __future__ import annotations

import hashlib
from pathlib import Path
from typing import Annotated, ClassVar

import pytest

from briefkit.errors import FaultyFile
from briefkit.reading.document import SIZE_LIMIT, Document, Table
from briefkit.reading.quantity import Typed, nearest, quantity, spelling


class _Limits(Table):
    required: ClassVar[tuple[str, ...]] = ("mass", "height")
    mass: Annotated[Typed | None, quantity("mass", 100.0, 20_000.0)] = None
    height: Annotated[Typed | None, quantity("height")] = None
    warmest: Annotated[Typed | None, quantity("temperature")] = None
    slope: Annotated[Typed | None, quantity("number", unknown=True)] = None
    share: Annotated[Typed | None, quantity("ratio")] = None
    source: str = ""


def document(folder: Path, text: str | bytes) -> Document:
    path = folder / "typed.toml"
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return Document(path)


def faults(folder: Path, text: str) -> list[tuple[str, str, int]]:
    read = document(folder, text)
    read.table("limits", _Limits)
    return [(fault.key, fault.read, fault.line) for fault in read.faults]


GOOD = '[limits]\nmass = "2,006 lb"\nheight = "10,000 ft"\n'


@pytest.mark.parametrize("ends", ["\n", "\r\n", "\r"], ids=["LF", "CRLF", "CR"])
@pytest.mark.parametrize("mark", [b"", b"\xef\xbb\xbf"], ids=["plain", "BOM"])
def test_any_line_ends_and_a_byte_order_mark_read_alike(tmp_path: Path, ends: str, mark: bytes) -> None:
    content = mark + GOOD.replace("\n", ends).encode()
    read = document(tmp_path, content)
    table = read.table("limits", _Limits)
    assert read.faults == []
    assert table is not None
    assert table.mass == Typed("2,006 lb", 2006 * 0.45359237, "lb")
    assert read.data_hash == hashlib.sha256(content).hexdigest()


def test_a_number_is_text_or_a_table_with_source_and_spread(tmp_path: Path) -> None:
    text = (
        '[limits]\nmass = { value = "910 kg", spread = "2 kg", source = "weight report" }\n'
        'height = { value = "3,000 m", spread = "1 %" }\n'
        'warmest = { value = "\u22127 degC", spread = "1.5 degC" }\nslope = 5.73\n'
        'share = { value = "12 %", spread = "2 %" }\n'
    )
    read = document(tmp_path, text)
    table = read.table("limits", _Limits)
    assert read.faults == []
    assert table is not None
    assert table.mass == Typed("910 kg", 910.0, "kg", "weight report", 2.0)
    assert table.height == Typed("3,000 m", 3000.0, "m", "", 30.0)  # a spread in percent is of the value
    assert table.warmest is not None
    assert table.warmest.value == pytest.approx(266.15)
    assert table.warmest.spread == 1.5  # a difference of temperatures, not 274.65 K
    assert table.slope == Typed("5.73", 5.73, "")
    assert table.share == Typed("12 %", 0.12, "%", "", 0.02)  # of a percentage it is in points


def test_unknown_is_read_only_where_it_is_permitted(tmp_path: Path) -> None:
    read = document(tmp_path, GOOD + 'slope = "unknown"\nshare = "unknown"\n')
    table = read.table("limits", _Limits)
    assert table is not None
    assert table.slope == Typed("unknown", None, "")
    assert [(fault.key, fault.read) for fault in read.faults] == [("limits.share", '"unknown"')]


def test_a_faulty_key_does_not_hide_the_others_and_good_ones_stay_readable(tmp_path: Path) -> None:
    read = document(tmp_path, '[limits]\nmass = "2,006 stone"\nheight = "10,000 ft"\nshare = "12"\n')
    table = read.table("limits", _Limits)
    assert [fault.key for fault in read.faults] == ["limits.mass", "limits.share"]
    assert table is not None
    assert table.mass is None
    assert table.height is not None


def test_a_misspelt_required_key_is_one_fault(tmp_path: Path) -> None:
    assert faults(tmp_path, '[limits]\nmas = "2,006 lb"\nheight = "1 ft"\n') == [("limits.mas", "the key mas", 2)]


def test_a_missing_key_is_named_at_its_table(tmp_path: Path) -> None:
    assert faults(tmp_path, '# first\n\n[limits]\nheight = "1 ft"\n') == [("limits.mass", "nothing", 3)]


def test_slips_of_toml_are_all_listed_and_the_rest_is_still_read(tmp_path: Path) -> None:
    text = '[limits]\nmass = 2,006 lb\nheight = “1 ft”\nwarmest = 30 degC\nshare = "12"\n'
    assert faults(tmp_path, text) == [
        ("limits.mass", "`2,006 lb`", 2),
        ("limits.height", "`“1 ft”`", 3),
        ("limits.warmest", "`30 degC`", 4),
        ("limits.share", '"12"', 5),
    ]


def test_faults_are_raised_in_the_order_of_the_file(tmp_path: Path) -> None:
    read = document(tmp_path, '[limits]\nsoruce = "x"\nmass = "1"\nheight = ft\n')
    read.table("limits", _Limits)
    with pytest.raises(FaultyFile, match="3 faults") as raised:
        read.raise_faults()
    assert [fault.line for fault in raised.value.faults] == [2, 3, 4]


def test_tables_of_an_array_are_told_apart(tmp_path: Path) -> None:
    read = document(tmp_path, '[[day]]\nmass = "1,000 kg"\nheight = "1 ft"\n\n[[day]]\nmass = "10"\nheight = "1 ft"\n')
    entries = read.entries("day", _Limits)
    assert [name for name, _ in entries] == ["day (entry 1)", "day (entry 2)"]
    assert [(fault.key, fault.line) for fault in read.faults] == [("day (entry 2).mass", 6)]


@pytest.mark.parametrize("value", ['day = "Monday"', "day = [1, 2]"])
def test_an_array_of_tables_that_is_something_else_is_refused(tmp_path: Path, value: str) -> None:
    read = document(tmp_path, value)
    assert read.entries("day", _Limits) == []
    assert "under [[day]]" in read.faults[0].permitted


def test_a_table_that_is_a_value_is_refused(tmp_path: Path) -> None:
    read = document(tmp_path, "limits = 3\n")
    assert read.table("limits", _Limits) is None
    assert [(fault.key, fault.read, fault.permitted) for fault in read.faults] == [
        ("limits", "3", "a table, under [limits]")
    ]


@pytest.mark.parametrize("literal", ["true", "nan", "inf", "1979-05-27", "[1]"])
def test_what_is_not_a_number_is_not_read_as_one(tmp_path: Path, literal: str) -> None:
    assert [key for key, _, _ in faults(tmp_path, GOOD + f"slope = {literal}\n")] == ["limits.slope"]


def test_a_file_too_large_or_not_text_or_absent_is_one_fault(tmp_path: Path) -> None:
    with pytest.raises(FaultyFile, match=r"1 fault:\n.*at most 256,000 bytes"):
        document(tmp_path, "#" * (SIZE_LIMIT + 1))
    with pytest.raises(FaultyFile, match="line 2: file: read bytes that are not UTF-8 text"):
        document(tmp_path, '[limits]\nmass = "910 kg" # après\n'.encode("latin-1"))
    with pytest.raises(FaultyFile, match=r"did you mean typed\.toml\?"):
        Document(tmp_path / "tiped.toml")
    with pytest.raises(FaultyFile, match="give a file in it"):
        Document(tmp_path)


def test_what_is_no_text_file_at_all_is_refused_and_not_waited_for() -> None:
    with pytest.raises(FaultyFile, match="a device or a pipe"):
        Document("/dev/zero")


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("a = " + "[" * 100_000, "lists within lists"),
        ("a = " + "9" * 5000, "thousands of digits"),
        ("[limits]\nday = 2032-02-30\n", "line 2: limits.day.*no such day"),
        ("[limits]\n[limits]\n", "line 2: .*stands twice"),
        ("[limits]\nx = 1\nx = 2\n", "line 3: .*stands twice"),
    ],
)
def test_what_toml_itself_refuses_is_a_fault_like_any_other(tmp_path: Path, text: str, words: str) -> None:
    with pytest.raises(FaultyFile, match=words):
        document(tmp_path, text).raise_faults()


def test_only_a_temperature_too_high_is_asked_for_fahrenheit(tmp_path: Path) -> None:
    class Bounded(Table):
        day: Annotated[Typed | None, quantity("temperature", 200.0, 330.0)] = None
        mass: Annotated[Typed | None, quantity("mass", 100.0, 200.0)] = None

    for text, asked in (('day = "95 degC"', True), ('day = "-95 degC"', False), ('mass = "300 kg"', False)):
        read = document(tmp_path, f"[limits]\n{text}\n")
        read.table("limits", Bounded)
        assert len(read.faults) == 1
        assert ("Fahrenheit" in read.faults[0].remedy) is asked


def test_everything_still_to_be_typed_is_listed(tmp_path: Path) -> None:
    text = '[a]\nx = "?"\ny = ["1 kg", "?"]\nz = { value = "1 kg", source = "?" }\nw = "what?"\n'
    text += "[[b]]\nc = '''\n1 2\n3 ?\n'''\n"
    assert document(tmp_path, text).unanswered() == ("a.x", "a.y, value 2", "a.z.source", "b (entry 1).c")


def test_lines_marked_example_are_listed_but_not_words_in_a_block(tmp_path: Path) -> None:
    text = "[a]   # EXAMPLE: all of it\nx = 1   # EXAMPLE\ny = 2   # for EXAMPLE\nz = '''\nw = 1 # EXAMPLE\n'''\n"
    assert document(tmp_path, text).examples() == (("a", 1), ("a.x", 2))


@pytest.mark.parametrize(
    ("typed", "kind", "meant"),
    [
        ("4,45 m", "length", '"4.45 m"'),
        ("3 350 kg", "mass", '"3350 kg"'),
        ("85 kts", "speed", '"85 kt"'),
        ("29.92 in", "pressure", '"29.92 inHg"'),
        ("1013 mb", "pressure", '"1013 hPa"'),
        ("95 F", "temperature", "(F - 32) x 5/9"),
        ("30 degrees", "angle", '"30 deg"'),
    ],
)
def test_what_was_most_likely_meant(typed: str, kind: str, meant: str) -> None:
    assert meant in spelling(typed, kind)


@pytest.mark.parametrize("typed", ["1,00,000 ft", "ten ft", "5e3 ft", ""])
def test_no_guess_where_nothing_is_near(typed: str) -> None:
    assert spelling(typed, "height") == ""


def test_nearest_is_empty_where_nothing_is_near() -> None:
    assert nearest("colour", ("radius", "rpm")) == ""
    assert nearest("raduis", ("radius", "rpm")) == "radius"


def test_a_block_left_open_is_named_where_it_opens(tmp_path: Path) -> None:
    text = "[a]\nx = '''\n1 2\n\n[b]\ny = 3\nz = '''\n4 5\n'''\n"
    with pytest.raises(FaultyFile) as refused:
        document(tmp_path, text)
    first = refused.value.faults[0]
    assert (first.key, first.line) == ("x", 2)
    assert "still open at line 7" in first.read
    words = "[a]\nx = '''\ny = 3\n[b]\n'''\nz = '''\n4 5\n'''\n"
    closed = document(tmp_path, words)  # a closed block may hold any words
    assert closed.data["a"]["x"] == "y = 3\n[b]\n"


def test_a_table_below_an_entry_has_the_entrys_name(tmp_path: Path) -> None:
    text = '[[kit]]\nname = "a"\n\n[[kit]]\nname = "b"\n\n[kit.chart]\nx = 1\n\n[[kit.speeds]]\ny = 2\n'
    read = document(tmp_path, text)
    assert read.line_of("kit (entry 2).chart.x") == 8
    assert read.line_of("kit (entry 2).speeds (entry 1).y") == 11
    assert read.line_of("kit (entry 1).chart.x") == 1
    assert read.line_of("kit") == 1  # what is first below it


def test_a_misspelt_name_above_a_table_is_found_at_that_table(tmp_path: Path) -> None:
    read = document(tmp_path, "[a]\nx = 1\n\n[wrk.harl]\ny = 2\n")
    read.tables("", ("a",), ("work",))
    (fault,) = read.faults
    assert (fault.key, fault.line) == ("wrk", 4)
