"""The operator's own section table: read as it stands, or refused with the row named."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from briefkit.aircraft.section_table import read_section_table
from briefkit.brief.assumptions import section_line
from briefkit.brief.check_aircraft import aircraft_findings
from briefkit.brief.finding import Level
from briefkit.envelope.condition import Condition
from briefkit.envelope.solution import rotor_of, solve
from briefkit.errors import FaultyFile
from briefkit.physics.section import Naca0012
from briefkit.physics.stall import stall_measures
from briefkit.physics.trim import trim

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
        (with_line(4, "0.3, 0, 0.0, 0"), ["line 4, cd", "0.0001 to 3"]),
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


def turned(sign_from: str) -> list[str]:
    """The table with the sign of every lift at one Mach number turned round."""
    cells = [line.split(", ") for line in GOOD[2:]]
    return GOOD[:2] + [", ".join([m, a, str(-float(cl)) if m == sign_from else cl, cd]) for m, a, cl, cd in cells]


@pytest.mark.parametrize(
    ("lines", "words"),
    [
        (turned("0.3"), ["lines 3 to 6, cl", "0.5 at -5 degrees, -0.5 at +5, at Mach 0.3", "look again at the signs"]),
        (turned("0.5"), ["lines 7 to 10, cl", "0.55 at -5 degrees", "rises from -5 to +5"]),
        (
            [HEADER, *(f"0.3, {a}, 0.4, 0.01" for a in (-6, 0, 8, 16))],
            ["0.4 at -5 degrees, 0.4 at +5"],
        ),  # no lift slope
    ],
)
def test_lift_that_does_not_rise_is_refused(tmp_path: Path, lines: list[str], words: list[str]) -> None:
    """Taken as it stood, it stalled at its first angle above zero. One fault for each Mach number."""
    with pytest.raises(FaultyFile, match="1 fault") as caught:
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


# -- the key of the aircraft file --------------------------------------------------------------------------------------

KEY = '[section]\ntable = "section.csv"\nsource = "wind-tunnel report 12 rev 1"\nspread = "1 deg"'
# Lift falls from 10 degrees on: a section that stalls early.
EARLY = [
    HEADER,
    *(f"{mach}, {alpha}, {lift}, 0.012" for mach in (0.2, 0.6) for alpha, lift in ((-6, -0.6), (0, 0.0), (10, 1.0),
                                                                                  (16, 0.7)))
]  # fmt: skip
FAST = Condition(mass="1,900 lb", pressure_altitude="4,000 ft", oat="20 degC", ias="90 kt")


@pytest.fixture
def with_section(file_2t):
    written(file_2t.folder, EARLY)
    return file_2t.added(KEY)


def test_the_file_names_a_table_beside_it(with_section):
    section = with_section.load().section
    assert (section.file, section.source) == ("section.csv", "wind-tunnel report 12 rev 1")
    assert np.degrees(section.spread) == pytest.approx(1.0)
    assert ("section", "wind-tunnel report 12 rev 1") in with_section.load().sources


def test_an_edit_of_the_table_is_an_edit_of_the_aircrafts_data(with_section, file_2t):
    before = with_section.load().data_hash
    written(with_section.folder, [*EARLY, "# a note"])
    after = with_section.load().data_hash
    assert len({before, after, file_2t.load().data_hash}) == 3


def test_the_stall_angle_is_the_tables_less_its_spread_and_beyond_it_no_more_than_naca_0012s(with_section):
    section = with_section.load().section
    found = np.degrees(section.stall_angle(np.array([0.3, 0.6, 0.62, 0.8])))
    np.testing.assert_allclose(found[:2], 9.0)
    beyond = np.degrees(Naca0012().stall_angle(np.array([0.62, 0.8])))
    np.testing.assert_allclose(found[2:], np.minimum(10.0, beyond) - 1.0)
    assert found[3] < 9.0


def test_pictures_of_the_angle_over_stall_use_it_and_say_so(with_section, file_2t):
    from briefkit.widgets.disc_quantities import OVER_STALL, field_of

    own, plain = solve(with_section.load(), FAST), solve(file_2t.load(), FAST)
    assert own.tip_angle_deg == plain.tip_angle_deg
    measured = stall_measures(own.trim, own.section, (72, 36))
    assert measured.excess[0] > stall_measures(plain.trim, None, (72, 36)).excess[0]
    field = field_of(OVER_STALL, own, 0.12)
    assert f"{abs(np.degrees(measured.excess[0])):.1f}°" in field.caption
    assert "own section (wind-tunnel report 12 rev 1)" in field.notes[0]
    assert "NACA 0012 at each Mach number" in field_of(OVER_STALL, plain, 0.12).notes[0]


def test_the_onset_band_does_not_use_it_and_the_page_says_so(with_section, file_2t):
    own = with_section.load()
    assert rotor_of(own) == rotor_of(file_2t.load())  # all that the onset band knows of the blades
    said = section_line(own)
    assert section_line(file_2t.load()) == ()
    assert "own blade section (wind-tunnel report 12 rev 1) stands behind pictures" in said[0]
    assert "less its spread of 1.0°" in said[0]


def test_it_flies(with_section):
    aircraft = with_section.load()
    flown = trim(rotor_of(aircraft), solve(aircraft, FAST).trim.state, section=aircraft.section)
    # The advancing tip meets more than Mach 0.6, where the table ends: refused, not guessed.
    assert not flown.solved[0]
    written(with_section.folder, [line.replace("0.6, ", "0.9, ") for line in EARLY])
    plain = solve(aircraft, FAST.with_(mass="1,400 lb", pressure_altitude="0 ft", ias="60 kt")).trim
    flown = trim(rotor_of(aircraft), plain.state, section=with_section.load().section)
    assert flown.solved[0]
    # Lift of 0.1 a degree at any Mach number, where the attached section's grows with it: more pitch for one flight.
    assert np.degrees(flown.t0 - plain.t0)[0] > 0.3


def test_faults_of_the_table_are_faults_of_the_file_by_row(with_section):
    lines = list(EARLY)
    lines[2] = "0.2, 0, zero, 0.012"
    written(with_section.folder, lines)
    fault = with_section.fault()
    assert fault.key == "section.table, section.csv, line 3, cl"
    assert "zero" in fault.read


@pytest.mark.parametrize(
    "name", ["/etc/section.csv", "..\\\\section.csv", "a/section.csv", ".section.csv", "section.txt"]
)
def test_a_table_elsewhere_is_refused(with_section, name):
    fault = with_section.replaced(('"section.csv"', f'"{name}"')).fault()
    assert (fault.key, "without folders" in fault.permitted) == ("section.table", True)


def test_a_link_is_refused_whatever_it_leads_to(with_section, tmp_path_factory):
    elsewhere = tmp_path_factory.mktemp("elsewhere")
    written(elsewhere, EARLY)
    (with_section.folder / "section.csv").unlink()
    (with_section.folder / "section.csv").symlink_to(elsewhere / "section.csv")
    fault = with_section.fault()
    assert fault.permitted == "a file of its own, no link"


def test_a_file_too_large_is_not_even_read(with_section):
    written(with_section.folder, ["# " + "x" * 300_000])
    assert with_section.fault().permitted == "at most 256,000 bytes"


@pytest.mark.parametrize(
    ("old", "place"), [('\nspread = "1 deg"', "section"), ('\nsource = "wind-tunnel report 12 rev 1"', "section")]
)
def test_without_source_or_spread_it_blocks_release_and_not_drafting(with_section, old, place):
    made = with_section.replaced((old, ""))
    made.load()
    blocked = [one for one in aircraft_findings(made.folder / "type.toml")[1] if one.level is Level.BLOCKS]
    assert any(one.place.endswith(f": {place}") for one in blocked), blocked


def test_the_seal_and_the_archive_cover_it(examples: Path, tmp_path: Path) -> None:
    import io
    import shutil
    import zipfile

    from briefkit.brief.identity import load_brief, load_identity
    from briefkit.brief.issue import archived
    from briefkit.brief.seal import seal_of

    folder = Path(shutil.copytree(examples, tmp_path / "operator", ignore=shutil.ignore_patterns("*.html")))
    aircraft = folder / "aircraft" / "pelquill-2t.toml"
    aircraft.write_text(aircraft.read_text(encoding="utf-8") + "\n" + KEY, encoding="utf-8")
    written(aircraft.parent, EARLY)
    before = dict(seal_of(load_identity(folder / "vellmark-2t")).parts)
    written(aircraft.parent, [*EARLY, "# a note"])
    after = dict(seal_of(load_identity(folder / "vellmark-2t")).parts)
    assert [name for name in after if after[name] != before.get(name)] == ["aircraft/section.csv"]
    archive = zipfile.ZipFile(io.BytesIO(archived(load_brief(folder / "vellmark-2t"), "<p>page</p>")))
    assert archive.read("aircraft/section.csv") == (aircraft.parent / "section.csv").read_bytes()


@pytest.mark.parametrize("offset", ["18 %", "17.9 %"])
def test_a_hinge_at_the_root_cut_out_makes_a_rotor(file_3f, offset):
    """Outboard of it the rotor model refuses; the loader says so at the key (tests/bad)."""
    rotor = rotor_of(file_3f.replaced(('hinge_offset = "3.5 %"', f'hinge_offset = "{offset}"')).load())
    assert float(rotor.hinge_offset) <= rotor.root_cutout + 1e-12
