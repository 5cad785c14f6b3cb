"""The guards that are file matters, by their numbers: what a faulty or doubtful file must never do in silence.

The demonstration world's planted faults are among them. G1 and the other guards on answers are held in tests/envelope.
"""

from __future__ import annotations

import shutil
from pathlib import Path

import numpy as np
import pytest

from briefkit.aircraft.answers import Kind
from briefkit.aircraft.findings import all_findings, entry_findings
from briefkit.aircraft.load import load_aircraft
from briefkit.aircraft.operation import load_operation
from briefkit.aircraft.operation_check import cross_check
from briefkit.brief.check import Level, findings
from briefkit.brief.identity import load_brief
from briefkit.brief.readback import BLANKS, readback
from briefkit.envelope.condition import Condition
from briefkit.envelope.equivalent import equivalent_vne
from briefkit.errors import FaultyFile, OutsideChart, OutsideLimits, ReadingError
from briefkit.units import FOOT, KNOT, ZERO_CELSIUS


@pytest.mark.parametrize(
    ("old", "new", "kind"),
    [
        ("2,000        112   112    107     99", "2,000        112   113    107     99", Kind.RISES_WITH_ALTITUDE),
        ("2,000        112   112    107     99", "2,000        112   112    117     99", Kind.RISES_WITH_TEMPERATURE),
    ],
)
def test_g9_a_vne_that_rises_needs_a_written_reason(file_2t, old, new, kind):
    found = [one for one in all_findings(file_2t.replaced((old, new)).load()) if one.kind is kind]
    assert found
    assert all(new.split()[0] in one.cells for one in found)


def test_g9_with_mass(file_3f):
    found = all_findings(file_3f.replaced(("264     241     213", "264     241     251")).load())
    assert Kind.RISES_WITH_MASS in {one.kind for one in found}


def test_g10_more_than_two_variables_cite_the_rule(file_2t):
    slopes = ("3 kt per 1,000 ft above 3,000 ft", "1 kt per 5 degC above 20 degC", "2 kt per 100 lb above 1,700 lb")
    body = 'source = "2-4"\nbase = "112 kt"\nless = [' + ", ".join(f'"{slope}"' for slope in slopes) + "]"
    found = entry_findings(file_2t.table("vne.power_on", body).load())
    (fault,) = [one for one in found if "two variables" in one.permitted]
    assert "27.1505(b)(1)" in fault.permitted


def test_g11_under_40_kt_and_power_off(file_2t, file_4h):
    slow = all_findings(file_2t.replaced(("77     69     61", "77     69     36")).load())
    assert Kind.UNDER_40_KT in {one.kind for one in slow}
    above = all_findings(file_2t.replaced(('constant = "85 kt"', 'constant = "125 kt"')).load())
    assert Kind.POWER_OFF_ABOVE_POWER_ON in {one.kind for one in above}
    under = all_findings(file_4h.replaced(('less = "8 kt"', 'less = "30 kt"')).load())  # the planted fault
    assert Kind.POWER_OFF_UNDER_MIDPOINT in {one.kind for one in under}


def test_g12_ten_cells_are_read_back_and_other_data_ask_for_other_cells(examples: Path, tmp_path: Path):
    brief = load_brief(examples / "vellmark-2t")
    sheet = readback(brief.aircraft, brief.identity)
    assert len(sheet.chart.blanks) == BLANKS == 10
    text = (examples / "aircraft" / "pelquill-2t.toml").read_text(encoding="utf-8")
    (tmp_path / "pelquill-2t.toml").write_text(text + "\n# changed\n", encoding="utf-8")
    other = readback(load_aircraft(tmp_path / "pelquill-2t.toml"), brief.identity)
    assert other.chart.blanks != sheet.chart.blanks


def test_g12_every_form_has_cells_to_read_back(file_2t, examples: Path):
    identity = load_brief(examples / "vellmark-2t").identity
    lines = "ft   kt indicated\n-20 degC: 0 112, 10,000 86\n+40 degC: 0 108, 10,000 61"
    for body in (
        'base = "112 kt"\nless = "3 kt per 1,000 ft above 3,000 ft"',
        f"reading_error = \"1 kt\"\nlines = '''\n{lines}\n'''",
    ):
        aircraft = file_2t.table("vne.power_on", f'source = "2-4"\n{body}').load()
        sheet = readback(aircraft, identity)
        assert sheet.chart.blanks
        assert all(sheet.chart.rows[row][column] for row, column in sheet.chart.blanks)


def test_g13_the_hash_of_the_file_follows_every_byte_and_every_configuration(file_3f):
    basic, load = file_3f.load(), file_3f.load("external load")
    assert basic.data_hash == load.data_hash
    assert file_3f.replaced(("# pressure altitude", "# pressure  altitude")).load().data_hash != basic.data_hash


def test_g16_a_serial_or_configuration_the_file_does_not_speak_of(file_3f):
    with pytest.raises(FaultyFile):
        file_3f.load("doors off")
    assert "036" not in file_3f.load("external load").serials


@pytest.mark.parametrize("key", ["chord", "twist", "flap_inertia", "drag_area"])
def test_g17_an_estimate_without_a_spread_blocks_release_not_drafting(file_2t, key, today):
    line = next(line for line in file_2t.text.split("\n") if line.startswith(f"{key} ="))
    bare = line.split('"')[1]
    made = file_2t.replaced((line, f'{key} = "{bare}"'))
    aircraft = made.load()
    assert getattr(aircraft.rotor, key).spread == 0.0
    blocked = [one for one in findings(made.folder / "type.toml", today) if one.level is Level.BLOCKS]
    assert any(one.place.endswith(f"rotor.{key}") and one.text == "no spread" for one in blocked)


def test_g26_pressure_altitude_qnh_and_elevation_cannot_be_taken_for_one_another():
    base = {"mass": "1,800 lb", "oat": "20 degC"}
    for wrong in ({"elevation": "5,210 ft", "qnh": "2886"}, {"elevation": "5,210 ft", "qnh": "28.86"}):
        with pytest.raises(ReadingError):  # the planted QNH "2886" has no unit
            Condition(**base, **wrong)
    for wrong in ("2886 hPa", "28.86 hPa", "1005 inHg"):
        with pytest.raises((ReadingError, OutsideLimits)):
            Condition(**base, elevation="5,210 ft", qnh=wrong)
    inches, hectopascals = (Condition(**base, elevation="5,210 ft", qnh=qnh) for qnh in ("28.86 inHg", "977.3 hPa"))
    assert inches.pressure_altitude == pytest.approx(hectopascals.pressure_altitude, abs=1.0)


def test_g26_in_the_operation_file(examples: Path, tmp_path: Path):
    text = (examples / "operation.toml").read_text(encoding="utf-8")
    for old, new, words in (
        ('"990 hPa"', '"2886"', "add the unit"),
        ('"990 hPa"', '"2886 hPa"', "850 to 1,085 hPa"),
        ('lowest_qnh = "990 hPa"\n', "", "elevations without lowest_qnh"),
        ('elevations = ["8,640 ft",', 'pressure_altitudes = ["8,640 ft",', "lowest_qnh without"),
    ):
        assert old in text
        (tmp_path / "operation.toml").write_text(text.replace(old, new), encoding="utf-8")
        with pytest.raises(FaultyFile, match=words):
            load_operation(tmp_path)


@pytest.mark.parametrize("typed", ["95 degC", "95 F", "95"])
def test_g27_a_temperature_that_looks_like_fahrenheit_is_refused(examples: Path, tmp_path: Path, typed: str):
    text = (examples / "operation.toml").read_text(encoding="utf-8").replace('"+30 degC"', f'"{typed}"')
    (tmp_path / "operation.toml").write_text(text, encoding="utf-8")
    with pytest.raises(FaultyFile, match=r"work_areas\.vellmark\.temperatures, value 2"):
        load_operation(tmp_path)


def test_g28_a_mass_above_the_certificated_maximum(examples: Path, two_t, file_3f):
    operation = load_operation(examples)
    lower = file_3f.replaced(('max_mass = "2,380 kg"          # load included', 'max_mass = "2,300 kg"'))
    load = lower.load("external load")
    shutil.copy(file_3f.folder / "type.toml", file_3f.folder / "ormbrae-3f.toml")
    held = cross_check(operation, load_aircraft(file_3f.folder / "ormbrae-3f.toml", "external load"), ["corrant"])
    assert [(fault.key, fault.read) for fault in held] == [("fleet.ormbrae-3f-load.masses, value 1", "2,380 kg")]
    assert "1,290 kg to 2,300 kg" in held[0].permitted
    assert load.limits.max_mass.text == "2,300 kg"
    with pytest.raises(OutsideLimits):
        equivalent_vne(two_t, Condition(mass="2,007 lb", pressure_altitude="4,000 ft", oat="15 degC"))


# -- planted faults of the demonstration world -----------------------------------------------------------------------


@pytest.mark.parametrize("row", ["264     241     213", "236     213     185"])
def test_planted_a_3f_cell_typed_231_for_213(file_3f, row):
    found = all_findings(file_3f.replaced((row, row.replace("213", "231"))).load())
    assert Kind.OUT_OF_LINE in {one.kind for one in found}


def test_planted_a_doors_off_supplement_lower_by_15_kias(file_2t):
    kit = '[[configuration]]\nname = "doors off"\nsource = "doors supplement p. 2"\nvne = "less 15 kt"'
    aircraft = file_2t.added(kit).load("doors off")
    at = Condition(mass="1,800 lb", pressure_altitude="8,000 ft", oat="20 degC")
    assert equivalent_vne(aircraft, at).ias == 64.0
    steep = equivalent_vne(aircraft, at.with_(bank="30 deg"))
    # by hand with the chart lowered: 9,480 ft, +20 C: 71.6 - 15 = 56.6 indicated there
    assert steep.chart_point.vne == pytest.approx(56.6, abs=0.1)
    assert steep.ias < 64.0


def test_planted_colder_than_the_4hs_chart(examples: Path):
    """Ysbrane at -43: outside the manual, no VNE, no flight."""
    four_h = load_aircraft(examples / "aircraft" / "kvillarn-4h.toml")
    with pytest.raises((OutsideChart, OutsideLimits)) as refused:
        equivalent_vne(four_h, Condition(mass="3,350 kg", pressure_altitude="310 ft", oat="-43 degC"))
    assert "−40" in refused.value.permitted
    cold = equivalent_vne(four_h, Condition(mass="3,350 kg", pressure_altitude="310 ft", oat="-38 degC"))
    assert cold.text == "130 KIAS"  # the tip-Mach column: 129 + 16 x 2/20 = 130.6


def test_planted_below_the_first_row_unless_the_manual_says_sea_level_and_below(file_3f):
    at = Condition(mass="2,000 kg", pressure_altitude="-50 m", oat="40 degC")
    with pytest.raises(OutsideChart, match="pressure altitude"):
        equivalent_vne(file_3f.load(), at)
    said = file_3f.replaced(("0          285     285     269", "0 or less   285     285     269")).load()
    assert equivalent_vne(said, at).text == "285 km/h IAS"


def test_no_number_is_made_where_the_chart_is_blank(file_2t):
    made = file_2t.replaced(("77     69     61", "77     69      -")).load()
    at = Condition(mass="1,800 lb", pressure_altitude="9,500 ft", oat="25 degC")
    with pytest.raises(OutsideChart, match="this part of the chart"):
        equivalent_vne(made, at)
    assert np.isnan(made.vne.indicated(9500 * FOOT, ZERO_CELSIUS + 25.0, 900.0))
    assert equivalent_vne(made, at.with_(oat="20 degC")).ias == pytest.approx(
        float(made.vne.indicated(9500 * FOOT, ZERO_CELSIUS + 20.0, 900.0)) / KNOT, abs=0.01
    )
