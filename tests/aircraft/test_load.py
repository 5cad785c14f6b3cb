"""The aircraft file: the invented 2T as typed, every fault at once, estimates for "unknown", entry findings."""

from __future__ import annotations

import math
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from briefkit.aircraft import estimates
from briefkit.aircraft.chart import ReadingRule
from briefkit.aircraft.findings import entry_findings
from briefkit.aircraft.load import load_aircraft
from briefkit.aircraft.model import Aircraft, Hub
from briefkit.errors import FaultyFile
from briefkit.units import FOOT, KNOT, POUND, Speed


@pytest.fixture(scope="module")
def typed(examples: Path) -> str:
    return (examples / "aircraft" / "pelquill-2t.toml").read_text(encoding="utf-8")


def load(folder: Path, text: str) -> Aircraft:
    path = folder / "type.toml"
    path.write_text(text, encoding="utf-8")
    return load_aircraft(path)


def changed(text: str, *pairs: tuple[str, str]) -> str:
    """The text with each first word, which must be there, replaced by the second."""
    for old, new in pairs:
        assert old in text
        text = text.replace(old, new, 1)
    return text


def test_the_2t_is_read_as_typed(two_t: Aircraft) -> None:
    limits, rotor = two_t.limits, two_t.rotor
    assert (two_t.name, two_t.serials, two_t.configuration) == ("Pelquill 2T", ("014", "022"), "doors on")
    assert limits.max_mass.text == "2,006 lb"
    assert limits.max_mass.value == 2006 * POUND
    assert (limits.rotor_on[0].value, limits.rotor_off[1].value) == (0.97, 1.08)
    assert limits.max_bank is None
    assert limits.climb_speed.source != limits.source
    assert (rotor.hub, rotor.blades, rotor.flap_frequency.value, rotor.hinge_offset.value) == (
        Hub.TEETERING,
        2,
        1.0,
        0.0,
    )
    assert rotor.tip_speed == pytest.approx(210.6, abs=0.05)
    assert rotor.twist.value == pytest.approx(math.radians(-7.0))
    assert rotor.drag_area.spread == pytest.approx(0.25 * 0.62)
    assert not rotor.lift_slope.known
    assert two_t.vne.reading is ReadingRule.INTERPOLATE
    assert two_t.vne.rows[5] == ("8,000", "95", "87", "79", "70")
    assert two_t.vne.speeds[4, 2, 0, 0] == pytest.approx(79 * KNOT)
    assert two_t.vne_off.constant.value == pytest.approx(85 * KNOT)
    assert two_t.calibration.to_calibrated(np.array([40.0 * KNOT]))[0] == pytest.approx(44 * KNOT)
    assert "Do not use for flight" in two_t.invented
    assert two_t.file == "pelquill-2t.toml"
    assert all(source for _, source in two_t.sources)
    assert two_t.unanswered == ()


def test_the_demo_file_says_on_its_first_line_that_it_is_invented(examples: Path) -> None:
    for path in examples.rglob("*.toml"):
        first = path.read_text(encoding="utf-8").split("\n")[0]
        assert "nvented" in first, path
        assert first.endswith("Do not use for flight."), path


def test_six_planted_faults_are_all_listed(typed: str, tmp_path: Path) -> None:
    text = changed(
        typed,
        ('hub = "teetering"', 'hub = "teetring"'),
        ('max_mass = "2,006 lb"', 'max_mass = "2 006 lb"'),
        ("climb_speed = {", "climb_sped = {"),
        ("60              62", "60              6Z"),
        ("8,000         95    87     79", "8,000         95    87     7 9"),
        ('constant = "85 kt"', 'constant = "85"'),
    )
    with pytest.raises(FaultyFile, match=r"^6 faults:") as refused:
        load(tmp_path, text)
    assert [fault.key for fault in refused.value.faults] == [
        "rotor.hub",
        "limits.max_mass",
        "limits.climb_sped",
        "calibration.table, row 60, calibrated",
        "vne.power_on.chart, row 8,000",
        "vne.power_off.constant",
    ]
    lines = text.split("\n")
    for fault, word in zip(refused.value.faults, ("teetring", "2 006", "climb_sped", "6Z", "7 9", '"85"'), strict=True):
        assert word in lines[fault.line - 1]
    assert all(fault.permitted for fault in refused.value.faults)


def test_cross_checks_run_though_other_tables_are_faulty(typed: str, tmp_path: Path) -> None:
    text = changed(typed, ('min_mass = "1,301 lb"', 'min_mass = "3,301 lb"'), ('name = "Pelquill 2T"', "name = 3"))
    with pytest.raises(FaultyFile, match=r"(?s)type\.name.*limits\.min_mass: read 3,301 lb"):
        load(tmp_path, text)


def test_unknown_takes_the_class_range_and_says_its_basis(typed: str, tmp_path: Path) -> None:
    text = typed
    for key in ("twist", "flap_inertia", "drag_area"):
        start = text.index(f"{key} = ")
        text = text[:start] + f'{key} = "unknown"' + text[text.index("\n", start) :]
    rotor = load(tmp_path, text).rotor
    assert (math.degrees(rotor.twist.value), math.degrees(rotor.twist.spread)) == pytest.approx((-9.0, 3.0))
    for stated in (rotor.twist, rotor.flap_inertia, rotor.drag_area):
        assert not stated.known
        assert stated.text == "unknown"
        assert "common practice, no source" in stated.basis
        assert stated.spread > 0.0
    # the ranges hold what was measured for the invented 2T
    assert abs(rotor.drag_area.value - 0.62) < rotor.drag_area.spread
    assert abs(rotor.flap_inertia.value - 111.0) < rotor.flap_inertia.spread
    assert abs(math.degrees(rotor.twist.value) + 7.0) < math.degrees(rotor.twist.spread)


def test_estimates_are_the_figures_their_basis_names() -> None:
    light = estimates.drag_area(1000 * POUND)
    assert light.value == pytest.approx(4.0 * FOOT**2)
    assert light.spread == pytest.approx(1.0 * FOOT**2)
    assert estimates.drag_area(8000 * POUND).value == pytest.approx(16.0 * FOOT**2)  # 8^(2/3) = 4
    # Lock number rho a c R^4 / I, rho = 1.225 kg/m3: 4 and 8 at the two ends
    inertia = estimates.flap_inertia(4.45, 0.225, 5.73)
    locks = [1.225 * 5.73 * 0.225 * 4.45**4 / (inertia.value + side * inertia.spread) for side in (1, -1)]
    assert locks == pytest.approx([4.0, 8.0], rel=1e-4)
    assert estimates.lift_slope().value + estimates.lift_slope().spread > 5.90  # holds TN 2474's measured slope
    assert estimates.precone(Hub.ARTICULATED).value == 0.0


def test_a_rotor_speed_range_may_end_at_100_percent(typed: str, tmp_path: Path) -> None:
    for pair in ('["100 %", "104 %"]', '["96 %", "100 %"]'):
        assert load(tmp_path, changed(typed, ('["97 %", "102 %"]', pair))).limits.rotor_on[0].value <= 1.0


def test_an_own_spread_beside_unknown_is_kept(typed: str, tmp_path: Path) -> None:
    text = changed(typed, ('lift_slope = "unknown"', 'lift_slope = { value = "unknown", spread = "0.4" }'))
    assert load(tmp_path, text).rotor.lift_slope.spread == 0.4


def test_flap_frequency_by_hub() -> None:
    # rigid-blade dynamics, nu^2 = 1 + 1.5 e/(1 - e); practice of the invented 3F: e = 0.035 gives 1.027
    assert estimates.flap_frequency(Hub.TEETERING, 0.0).value == 1.0
    assert estimates.flap_frequency(Hub.ARTICULATED, 0.035).value == pytest.approx(1.027, abs=5e-4)
    assert estimates.flap_frequency(Hub.HINGELESS, 0.0).value == 1.10
    assert estimates.equivalent_hinge_offset(1.10) == pytest.approx(0.123, abs=5e-4)
    frequency = estimates.flap_frequency(Hub.ARTICULATED, 0.07).value
    assert estimates.equivalent_hinge_offset(frequency) == pytest.approx(0.07)


def test_articulated_and_hingeless_hubs_take_what_is_left_out_from_what_is_typed(typed: str, tmp_path: Path) -> None:
    articulated = changed(
        typed, ('hub = "teetering"', 'hub = "articulated"\nhinge_offset = "3.5 %"'), ("blades = 2", "blades = 3")
    )
    rotor = load(tmp_path, changed(articulated, ('precone = "2.5 deg"\n', ""))).rotor
    assert rotor.hinge_offset.value == pytest.approx(0.035)
    assert rotor.flap_frequency.value == pytest.approx(1.027, abs=5e-4)
    assert rotor.flap_frequency.text == "1.027 for the articulated hub"
    assert "uniform blade" in rotor.flap_frequency.basis
    assert rotor.precone.value == 0.0
    hingeless = changed(
        typed,
        ('hub = "teetering"', 'hub = "hingeless"\nflap_frequency = "1.10"'),
        ('flap_stop = "11 deg"\n', ""),
        ('root_cutout = "12 %"', 'root_cutout = "13 %"'),  # outboard of the equivalent hinge
    )
    rotor = load(tmp_path, hingeless).rotor
    assert rotor.flap_frequency.known
    assert rotor.hinge_offset.value == pytest.approx(0.123, abs=5e-4)
    assert rotor.hinge_offset.text == "12.3 %"
    assert math.degrees(rotor.precone.value) == pytest.approx(2.5)


def test_what_the_manual_says_in_words_is_kept_word_for_word(typed: str, tmp_path: Path) -> None:
    more = """
[recovery]
source = "flight manual 3-9 rev 4"
text = "Lower the collective. Reduce speed."

[[manual.speeds]]
label = "Rough air"
text = "100 KIAS, less where the pilot sees fit"
value = "100 kt"
applies = "turbulence"
source = "flight manual 2-5 rev 4"
"""
    aircraft = load(tmp_path, typed + more)
    assert (aircraft.recovery, aircraft.recovery_source) == (
        "Lower the collective. Reduce speed.",
        "flight manual 3-9 rev 4",
    )
    (speed,) = aircraft.speeds
    assert (speed.label, speed.applies) == ("Rough air", "turbulence")
    assert speed.text == "100 KIAS, less where the pilot sees fit"
    assert speed.speed == Speed.of(100, "kt")
    assert (speed.less_than_vne, speed.above_bank) == (None, None)
    assert aircraft.hover[0].text == "7,250 ft at ISA; 4,950 ft at ISA+20; 3,400 ft at ISA+35"
    assert ("recovery", "flight manual 3-9 rev 4") in aircraft.sources
    assert ("manual.speeds (entry 1)", "flight manual 2-5 rev 4") in aircraft.sources


def test_a_value_has_its_own_source_or_that_of_its_table(two_t: Aircraft, typed: str, tmp_path: Path) -> None:
    rotor = two_t.rotor
    assert rotor.radius.source == rotor.source == "maintenance manual 62-10 rev 7"
    assert rotor.chord.source.startswith("measured at 0.75 R")
    assert rotor.lift_slope.source == rotor.source
    own = changed(typed, ('lift_slope = "unknown"', 'lift_slope = { value = "unknown", source = "asked the maker" }'))
    assert load(tmp_path, own).rotor.lift_slope.source == "asked the maker"


def test_no_calibration_in_the_manual_takes_a_spread_once(typed: str, tmp_path: Path) -> None:
    start, end = typed.index("table = '''"), typed.index("[vne.power_on]")
    text = typed[:start] + 'table = "none in manual"\nspread = "4 kt"\n\n' + typed[end:]
    calibration = load(tmp_path, text).calibration
    assert not calibration.in_manual
    assert calibration.spread == pytest.approx(4 * KNOT)
    assert calibration.to_calibrated(30.0) == 30.0


def test_a_chart_over_height_and_mass(typed: str, tmp_path: Path) -> None:
    start, end = typed.index("ft \\ degC"), typed.index("'''\n\n[vne.power_off]")
    rows = "ft \\ lb   ≤1,600   1,800   2,006   kt indicated\n0   112  112  105\n10,000   86  77  69\n"
    vne = load(tmp_path, typed[:start] + rows + typed[end:]).vne
    assert vne.temperatures == ()
    assert vne.masses == pytest.approx((1600 * POUND, 1800 * POUND, 2006 * POUND))
    assert vne.speeds.shape == (2, 1, 3, 1)
    assert vne.indicated(0.0, 288.15, 1500 * POUND) == pytest.approx(112 * KNOT)  # "or less" holds below its column
    assert vne.indicated(5000 * FOOT, 288.15, 2006 * POUND) == pytest.approx(87 * KNOT)


def test_a_chart_over_height_alone(typed: str, tmp_path: Path) -> None:
    start, end = typed.index("ft \\ degC"), typed.index("'''\n\n[vne.power_off]")
    vne = load(tmp_path, typed[:start] + "ft    kt indicated\n0   112\n10,000   69\n" + typed[end:]).vne
    assert (vne.temperatures, vne.masses, vne.speeds.shape) == ((), (), (2, 1, 1, 1))
    assert vne.rows == (("ft", "VNE"), ("0", "112"), ("10,000", "69"))


@pytest.mark.parametrize(
    ("pair", "place", "words"),
    [
        (("4,000        112", "4,000        113"), "row 4,000, column -20", "does not rise with height"),
        (
            ("6,000        105    96     88     80", "6,000        105    96     98     80"),
            "row 6,000, column +20",
            "height",
        ),
        (
            ("0            112   112    112    108", "0            112   112    112    113"),
            "row 0, column +40",
            "temperature",
        ),
        (
            ("10,000        86    77     69     61", "10,000        86    77     69     32"),
            "row 10,000, column +40",
            "40 kt",
        ),
        (('constant = "85 kt"', 'constant = "115 kt"'), "vne.power_off.constant", "not above every power-on VNE"),
    ],
)
def test_what_a_manual_rarely_prints_needs_a_reason(
    typed: str, tmp_path: Path, pair: tuple[str, str], place: str, words: str
) -> None:
    found = entry_findings(load(tmp_path, changed(typed, pair)))
    named = [fault for fault in found if place in fault.key and words in fault.permitted]
    assert len(named) == 1, found
    assert named[0].read in pair[1]
    kinds = ("rises_with_altitude", "rises_with_temperature", "under_40_kt", "out_of_line")
    every = "".join(f'{kind} = {{ cells = "all", reason = "so printed" }}\n' for kind in kinds)
    every += 'power_off_above_power_on = "so printed"\npower_off_under_midpoint = "so printed"\n'
    answered = changed(typed, pair, ("[vne.power_off]", f"[vne.reasons]\n{every}\n[vne.power_off]"))
    assert entry_findings(load(tmp_path, answered)) == []


def test_the_2t_has_no_entry_findings(two_t: Aircraft) -> None:
    assert entry_findings(two_t) == []


@pytest.mark.slow
@pytest.mark.parametrize("name", ["pelquill-2t", "ormbrae-3f", "kvillarn-4h"])
@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(data=st.data())
def test_a_spoilt_file_is_refused_in_words_or_still_a_whole_aircraft(
    examples: Path, tmp_path: Path, name: str, data: st.DataObject
) -> None:
    text = (examples / "aircraft" / f"{name}.toml").read_text(encoding="utf-8")
    for _ in range(data.draw(st.integers(1, 3))):
        at = data.draw(st.integers(0, len(text) - 1))
        put = data.draw(st.text(alphabet="0123456789.,-+ \"'[]{}=#\n\\?\tkgft%\u2212\x00", max_size=2))
        text = text[:at] + put + text[at + data.draw(st.integers(0, 2)) :]
    faults, aircraft = (), None
    try:
        aircraft = load(tmp_path, text)
    except FaultyFile as refused:
        faults = refused.faults
    assert (aircraft is None) == bool(faults)
    assert all(fault.read and fault.permitted for fault in faults)
    if aircraft is not None:
        assert np.all((aircraft.vne.speeds > 0.0) | np.isnan(aircraft.vne.speeds))
        assert np.any(np.isfinite(aircraft.vne.speeds))
        entry_findings(aircraft)  # whatever it is, it can be looked at
        assert 0.0 < aircraft.limits.min_mass.value < aircraft.limits.max_mass.value
        assert 150.0 <= aircraft.rotor.tip_speed <= 260.0


@pytest.mark.slow
def test_loading_imports_nothing_heavy(examples: Path) -> None:
    program = (
        "import sys; from briefkit import load_aircraft, load_operation; "
        f"load_aircraft({str(examples / 'aircraft' / 'pelquill-2t.toml')!r}); load_operation({str(examples)!r}); "
        "print([m for m in ('scipy', 'nbconvert', 'ipywidgets', 'bqplot') if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


@pytest.mark.parametrize(
    ("table", "belongs"),
    [
        ('[reasons]\nmore_than_two_variables = "2-4"', "[vne.reasons]"),
        ('[[speeds]]\nlabel = "Rough air"\ntext = "90 KIAS"', "[[manual.speeds]]"),
    ],
)
def test_a_table_at_the_wrong_place_is_told_where_it_belongs(file_2t, table, belongs):
    assert file_2t.added(table).fault().remedy == f"did you mean {belongs}?"
