"""A brief's configuration picks its VNE, limits and fleet entry; another serial or name blocks (G16)."""

from __future__ import annotations

import datetime as dt
from pathlib import Path

import pytest

from briefkit.brief.check import Level, findings
from briefkit.brief.identity import load_brief
from briefkit.errors import FaultyFile

PLAIN = ("aircraft/pelquill-2t.toml", "aircraft/ormbrae-3f.toml")


@pytest.fixture
def brief_3f(operator: Path) -> Path:
    """The example brief, turned into one for the 3F over Corrant."""
    path = operator / "vellmark-2t" / "brief.toml"
    text = path.read_text(encoding="utf-8")
    for old, new in (PLAIN, ('"vellmark"', '"corrant"'), ('["014", "022"]', '["031", "033"]'), ("doors on", "basic")):
        assert old in text
        text = text.replace(old, new)
    path.write_text(text, encoding="utf-8")
    return path.parent


def edit(folder: Path, old: str, new: str) -> None:
    path = folder / "brief.toml"
    text = path.read_text(encoding="utf-8")
    assert old in text
    path.write_text(text.replace(old, new), encoding="utf-8")


def test_the_configuration_named_is_the_one_loaded(brief_3f: Path) -> None:
    brief = load_brief(brief_3f)
    assert brief.aircraft.configuration == "basic"
    assert brief.operation.entry_for(brief.aircraft).key == "ormbrae-3f"
    edit(brief_3f, 'configuration = "basic"', 'configuration = "external load"')
    loaded = load_brief(brief_3f)
    assert loaded.aircraft.vne.cap_text == "150 km/h"
    assert loaded.operation.entry_for(loaded.aircraft).key == "ormbrae-3f-load"


def test_a_serial_the_supplement_is_not_for_blocks_with_its_reason(brief_3f: Path, today: dt.date) -> None:
    edit(brief_3f, '["031", "033"]', '["031", "036"]')
    assert load_brief(brief_3f).identity.serials == ("031", "036")  # the basic configuration is for all three
    edit(brief_3f, 'configuration = "basic"', 'configuration = "external load"')
    with pytest.raises(FaultyFile, match=r"subject\.serials, value 2: .*not for serial 036 \(load supplement p\. 3"):
        load_brief(brief_3f)
    blocked = [finding for finding in findings(brief_3f, today) if finding.level is Level.BLOCKS]
    assert any("not for serial 036" in finding.remedy for finding in blocked)


def test_a_configuration_no_manual_data_is_given_for_blocks(brief_3f: Path, today: dt.date) -> None:
    edit(brief_3f, 'configuration = "basic"', 'configuration = "doors off"')
    with pytest.raises(
        FaultyFile, match=r'subject\.configuration: read "doors off"; permitted: "basic", "external load"'
    ):
        load_brief(brief_3f)
    assert any("doors off" in finding.text for finding in findings(brief_3f, today) if finding.level is Level.BLOCKS)


def test_a_brief_is_held_against_the_limits_of_its_own_configuration(brief_3f: Path, operator: Path) -> None:
    path = operator / "operation.toml"
    text = path.read_text(encoding="utf-8").replace('brief_bank = "20 deg"', 'brief_bank = "35 deg"')
    path.write_text(text, encoding="utf-8")
    load_brief(brief_3f)  # the basic entry has its own bank, and the basic manual no limit
    edit(brief_3f, 'configuration = "basic"', 'configuration = "external load"')
    with pytest.raises(FaultyFile, match=r"fleet\.ormbrae-3f-load\.brief_bank: read 35 deg; permitted: at most 30 deg"):
        load_brief(brief_3f)


def test_a_fleet_entry_for_a_configuration_that_is_nowhere_is_a_fault(brief_3f: Path, operator: Path) -> None:
    path = operator / "operation.toml"
    text = path.read_text(encoding="utf-8").replace('"external load"', '"external lode"')
    path.write_text(text, encoding="utf-8")
    with pytest.raises(FaultyFile, match=r"fleet\.ormbrae-3f-load\.configuration: read external lode"):
        load_brief(brief_3f)


def test_a_work_area_the_chart_leaves_blank_is_a_fault(brief_3f: Path, operator: Path) -> None:
    path = operator / "aircraft" / "ormbrae-3f.toml"
    text = path.read_text(encoding="utf-8").replace("4,000      208     185     157", "4,000      208     185     -")
    path.write_text(text, encoding="utf-8")
    with pytest.raises(
        FaultyFile, match=r"work_areas\.corrant: read .*2,380 kg; permitted: where the chart prints a VNE"
    ):
        load_brief(brief_3f)


def test_a_mass_lighter_than_a_chart_that_does_not_say_or_less_is_a_fault(brief_3f: Path, operator: Path) -> None:
    path = operator / "aircraft" / "ormbrae-3f.toml"
    path.write_text(path.read_text(encoding="utf-8").replace("≤1,700", "1,850"), encoding="utf-8")
    with pytest.raises(FaultyFile, match=r"masses, value 5: read 1,700 kg; .*mark the first one \"or less\""):
        load_brief(brief_3f)


def test_corners_of_an_area_are_held_against_density_altitudes(brief_3f: Path, operator: Path) -> None:
    """9,800 ft on 990 hPa is 10,441 ft pressure altitude; on a +22 C day its density altitude is above 4,000 m."""
    path = operator / "aircraft" / "ormbrae-3f.toml"
    text = path.read_text(encoding="utf-8").replace('covers_temperatures = "flight', '# "flight')
    text = text.replace("m \\ kg ", "DA m \\ kg ")
    path.write_text(text.replace("\n4,000      208", "\n4,300      208"), encoding="utf-8")
    load_brief(brief_3f)
    path.write_text(text, encoding="utf-8")
    with pytest.raises(
        FaultyFile, match=r"pressure_altitudes: read 9,800 ft on QNH 990 hPa at \+22 degC; .*density alt"
    ):
        load_brief(brief_3f)
