"""The operation file, and its check against the manual: each fault names both files."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from briefkit.aircraft.load import load_aircraft
from briefkit.aircraft.model import Aircraft, Stated
from briefkit.aircraft.operation import Operation, WorkArea, load_operation
from briefkit.aircraft.operation_check import cross_check
from briefkit.errors import FaultyFile
from briefkit.units import FOOT, POUND, read


def stated(text: str, kind: str) -> Stated:
    return Stated(read(text, kind), text, "")


def with_area(operation: Operation, **changes: Stated) -> Operation:
    area: WorkArea = replace(operation.work_areas["vellmark"], **changes)
    return replace(operation, work_areas={"vellmark": area})


def test_the_demo_operation_is_read_as_typed(operation: Operation) -> None:
    area, entry = operation.work_areas["vellmark"], operation.fleet["pelquill-2t"]
    assert operation.name == "Norrabeck Rotor Charter"
    assert operation.documents == ("OM-B",)
    assert (operation.policy.people, operation.policy.validity_months) == (3, 24)
    assert (area.low_altitude.value, area.high_altitude.value) == pytest.approx((6000 * FOOT, 8000 * FOOT))
    assert (area.low_temperature.value, area.high_temperature.value) == pytest.approx((283.15, 303.15))
    assert [mass.text for mass in entry.masses] == ["2,006 lb", "1,900 lb", "1,800 lb", "1,750 lb", "1,700 lb"]
    assert entry.masses[0].value == 2006 * POUND
    assert entry.brief_bank.text == "30 deg"
    assert entry.status == "for information"


def test_the_folder_reads_as_its_file(examples: Path, operation: Operation) -> None:
    assert load_operation(examples / "operation.toml") == operation


def test_the_demo_operation_fits_the_2t(operation: Operation, two_t: Aircraft) -> None:
    assert cross_check(operation, two_t, ["vellmark"]) == []


def test_elevations_become_pressure_altitudes_on_the_lowest_qnh(tmp_path: Path) -> None:
    path = tmp_path / "operation.toml"
    path.write_text(
        '[operator]\nname = "N"\ndocuments = ["OM-B"]\n[work_areas.corrant]\nname = "Corrant"\n'
        'elevations = ["8,640 ft", "8,640 ft"]\nlowest_qnh = "990 hPa"\ntemperatures = ["-24 degC", "+22 degC"]\n'
        '[fleet.x]\nmasses = ["900 kg"]\nbrief_bank = "30 deg"\nstatus = "company limit, OM-B 2.3"\n',
        encoding="utf-8",
    )
    area = load_operation(path).work_areas["corrant"]
    # 9,281 ft: by hand from ISO 2533, p = 99,000 (1 - 0.0065 x 2633.5/288.15)^5.25588 = 71,724 Pa
    assert area.low_altitude.value / FOOT == pytest.approx(9281, abs=0.6)
    assert area.low_altitude.text == "8,640 ft on QNH 990 hPa"


@pytest.mark.parametrize(
    ("part", "changes", "words"),
    [
        ("pressure_altitudes", {"low_altitude": stated("-500 ft", "height")}, "0\u00a0ft to 10,000\u00a0ft, the rows"),
        ("pressure_altitudes", {"high_altitude": stated("10,500 ft", "height")}, "at most 10,000 ft"),
        ("temperatures", {"low_temperature": stated("-25 degC", "temperature")}, "the columns of the VNE chart"),
        ("temperatures", {"low_temperature": stated("-31 degC", "temperature")}, "-30 degC or warmer"),
        # ISA + 35 at 8,000 ft is 34.15 C (ISO 2533: 15 - 0.0065 x 2438.4 + 35)
        ("temperatures", {"high_temperature": stated("35 degC", "temperature")}, "at most 34.2\u00a0°C at 8,000 ft"),
    ],
)
def test_a_corner_the_manual_forbids_names_both_files(
    operation: Operation, two_t: Aircraft, part: str, changes: dict[str, Stated], words: str
) -> None:
    found = cross_check(with_area(operation, **changes), two_t)
    assert any(words in fault.permitted and fault.key == f"work_areas.vellmark.{part}" for fault in found), found
    for fault in found:
        assert fault.file == "operation.toml"
        assert "pelquill-2t.toml, flight manual 2-" in fault.permitted


def test_a_corner_just_inside_is_no_fault(operation: Operation, two_t: Aircraft) -> None:
    edge = with_area(
        operation,
        low_altitude=stated("0 ft", "height"),
        high_altitude=stated("10,000 ft", "height"),
        low_temperature=stated("-20 degC", "temperature"),
        high_temperature=stated("30 degC", "temperature"),
    )
    assert cross_check(edge, two_t) == []


def test_a_mass_or_a_bank_the_manual_forbids(operation: Operation, two_t: Aircraft) -> None:
    entry = operation.fleet["pelquill-2t"]
    heavy = replace(entry, masses=(stated("2,007 lb", "mass"), stated("1,300 lb", "mass")))
    found = cross_check(replace(operation, fleet={"pelquill-2t": heavy}), two_t, ["vellmark"])
    assert [(fault.key, fault.read) for fault in found] == [
        ("fleet.pelquill-2t.masses, value 1", "2,007 lb"),
        ("fleet.pelquill-2t.masses, value 2", "1,300 lb"),
    ]
    limited = replace(two_t, limits=replace(two_t.limits, max_bank=stated("25 deg", "angle")))
    (fault,) = cross_check(operation, limited, ["vellmark"])
    assert (fault.key, fault.read) == ("fleet.pelquill-2t.brief_bank", "30 deg")
    assert "at most 25 deg (pelquill-2t.toml" in fault.permitted


def test_only_the_work_area_asked_about_is_held_against_the_manual(operation: Operation, two_t: Aircraft) -> None:
    hot = with_area(operation, high_temperature=stated("40 degC", "temperature"))
    assert cross_check(hot, two_t)
    assert cross_check(hot, two_t, []) == []


def test_an_aircraft_that_is_not_in_the_fleet(operation: Operation, two_t: Aircraft) -> None:
    (fault,) = cross_check(operation, replace(two_t, file="vrenholt-3.toml"))
    assert "[fleet.vrenholt-3]" in fault.permitted


def test_spreads_climb_and_speeds_of_a_fleet_entry(examples: Path, tmp_path: Path) -> None:
    more = (
        'mass_spread = "20 lb"\ntemperature_spread = "2 degC"\nclimb = "500 ft/min"\nimc_speed = "60 kt"\n'
        'minimum_manoeuvring_speed = { value = "65 kt", source = "OM-B 2.4 rev 11" }\n'
    )
    text = (
        (examples / "operation.toml")
        .read_text(encoding="utf-8")
        .replace("[fleet.ormbrae-3f]", f"{more}[fleet.ormbrae-3f]")
    )
    (tmp_path / "operation.toml").write_text(text, encoding="utf-8")
    entry = load_operation(tmp_path).fleet["pelquill-2t"]
    assert entry.mass_spread == 20 * POUND
    assert entry.temperature_spread == 2.0
    assert entry.climb is not None
    assert entry.climb.value == pytest.approx(2.54)
    assert entry.imc_speed is not None
    assert entry.imc_speed.source == entry.source == "OM-B 2.3 rev 11"
    assert entry.minimum_manoeuvring_speed is not None
    assert entry.minimum_manoeuvring_speed.source == "OM-B 2.4 rev 11"


def test_a_mass_given_twice_is_refused(examples: Path, tmp_path: Path) -> None:
    text = (examples / "operation.toml").read_text(encoding="utf-8").replace('"1,900 lb"', '"2,006 lb"')
    (tmp_path / "operation.toml").write_text(text, encoding="utf-8")
    with pytest.raises(FaultyFile, match=r"masses, value 2: read 2,006 lb; permitted: less than the one before it"):
        load_operation(tmp_path)


def test_faults_of_several_tables_are_listed_together(examples: Path, tmp_path: Path) -> None:
    text = (examples / "operation.toml").read_text(encoding="utf-8")
    for old, new in (("people = 3", "people = 1"), ('"8,000 ft"', '"8000 feet"'), ('"1,900 lb"', '"1,900"')):
        assert old in text
        text = text.replace(old, new)
    (tmp_path / "operation.toml").write_text(text, encoding="utf-8")
    with pytest.raises(FaultyFile, match="3 faults") as refused:
        load_operation(tmp_path)
    assert [fault.key for fault in refused.value.faults] == [
        "policy.people",
        "work_areas.vellmark.pressure_altitudes, value 2",
        "fleet.pelquill-2t.masses, value 2",
    ]


def test_a_corner_on_the_manuals_coldest_day_is_no_fault(examples: Path, operation: Operation) -> None:
    three_f = load_aircraft(examples / "aircraft" / "ormbrae-3f.toml")
    assert cross_check(with_area(operation, low_temperature=stated("-35 degC", "temperature")), three_f) == []
    (fault,) = cross_check(with_area(operation, low_temperature=stated("-36 degC", "temperature")), three_f)
    assert "-35 degC or warmer" in fault.permitted


def test_an_entry_of_its_own_comes_before_the_one_for_the_rest(examples: Path, operation: Operation) -> None:
    path = examples / "aircraft" / "ormbrae-3f.toml"
    basic, load = load_aircraft(path), load_aircraft(path, "external load")
    entries = [operation.entry_for(aircraft) for aircraft in (basic, load)]
    assert [entry and entry.key for entry in entries] == ["ormbrae-3f", "ormbrae-3f-load"]
    only = replace(operation, fleet={key: entry for key, entry in operation.fleet.items() if key != "ormbrae-3f-load"})
    found = only.entry_for(load)
    assert found is not None
    assert found.key == "ormbrae-3f"
