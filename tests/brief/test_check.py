"""check: what blocks a release, what needs a reason, and nothing on a brief that is complete."""

from __future__ import annotations

import datetime as dt
import json
import shutil
from pathlib import Path

import pytest

from briefkit.brief.check import Finding, Level, findings
from briefkit.brief.identity import load_brief
from briefkit.brief.release import standing
from briefkit.brief.standing import DRAFT
from briefkit.errors import FaultyFile

TODAY = dt.date(2030, 6, 1)


def edit(path: Path, *pairs: tuple[str, str]) -> None:
    text = path.read_text(encoding="utf-8")
    for old, new in pairs:
        assert old in text
        text = text.replace(old, new)
    path.write_text(text, encoding="utf-8")


@pytest.fixture
def world(tmp_path: Path, examples: Path) -> Path:
    """The demo operator folder as a complete one: no longer said to be invented. Nobody has signed."""
    folder = Path(shutil.copytree(examples, tmp_path / "operator"))
    for path in (folder / "operation.toml", folder / "aircraft" / "pelquill-2t.toml"):
        lines = path.read_text(encoding="utf-8").split("\n")
        path.write_text("\n".join(line for line in lines if not line.startswith("invented")), encoding="utf-8")
    return folder


def serious(world: Path, today: dt.date = TODAY) -> list[Finding]:
    """What is found in the files themselves; signing and the computed page have tests of their own."""
    found = findings(world / "vellmark-2t", today, page=False)
    return [one for one in found if one.level is not Level.NOTE and not one.place.endswith(": signatures")]


def only(world: Path, today: dt.date = TODAY) -> Finding:
    (finding,) = serious(world, today)
    return finding


@pytest.mark.slow
def test_a_complete_brief_has_nothing_but_notes(world: Path) -> None:
    assert serious(world) == []
    notes = findings(world / "vellmark-2t", TODAY)
    assert [note.place.rpartition(": ")[2] for note in notes if note.level is Level.NOTE] == ["rotor.lift_slope"]


@pytest.mark.slow
def test_the_demo_brief_is_blocked_because_it_is_invented_and_unsigned(examples: Path) -> None:
    found = findings(examples / "vellmark-2t", TODAY)
    blocking = [finding.place.rpartition(": ")[2] for finding in found if finding.level is Level.BLOCKS]
    assert sorted(blocking) == ["invented", "invented", "signatures"]


def test_faults_of_all_files_are_listed_with_their_lines(world: Path) -> None:
    edit(world / "aircraft" / "pelquill-2t.toml", ('radius = "4.45 m"', 'radius = "4.45"'))
    edit(world / "operation.toml", ('"8,000 ft"', '"8,000"'))
    edit(world / "vellmark-2t" / "brief.toml", ("expires = 2032-02-29", 'expires = "2032-02-29"'))
    found = serious(world)
    assert {finding.level for finding in found} == {Level.BLOCKS}
    assert [finding.place.rpartition("/")[2] for finding in found] == [
        "brief.toml, line 9: document.expires",
        "operation.toml, line 17: work_areas.vellmark.pressure_altitudes, value 2",
        "pelquill-2t.toml, line 21: rotor.radius",
    ]


@pytest.mark.parametrize(
    ("old", "new", "place"),
    [
        ('radius = "4.45 m"', 'radius = "?"', "rotor.radius"),
        ('chord = { value = "225 mm"', 'chord = { value = "?"', "rotor.chord"),
        ('source = "flight manual 2-2 rev 4"', 'source = "?"', "limits.source"),
        ("70\n10,000", "?\n10,000", "vne.power_on.chart, row 8,000, column +40"),
    ],
)
def test_what_is_still_to_be_typed_is_one_finding_at_its_place(world: Path, old: str, new: str, place: str) -> None:
    edit(world / "aircraft" / "pelquill-2t.toml", (old, new))
    finding = only(world)
    assert (finding.level, finding.text) == (Level.BLOCKS, 'still "?"')
    assert finding.place.endswith(place)
    assert ", line " in finding.place


def test_a_value_still_marked_example_blocks(world: Path) -> None:
    edit(
        world / "aircraft" / "pelquill-2t.toml", ('rpm = "452 rpm"', 'rpm = "452 rpm"   # EXAMPLE'), ("# at 100 %", "")
    )
    finding = only(world)
    assert finding.place.endswith("rotor.rpm")
    assert "example" in finding.text


@pytest.mark.parametrize(
    ("old", "new", "place", "text"),
    [
        ('source = "flight manual 5-2 rev 4"\n', "", "calibration", "no source"),
        ('source = "maintenance manual 62-10 rev 7"\n', "", "rotor", "no source for radius, rpm, root_cutout"),
        ('spread = "2 mm", ', "", "rotor.chord", "no spread"),
    ],
)
def test_missing_sources_and_spreads_block(world: Path, old: str, new: str, place: str, text: str) -> None:
    edit(world / "aircraft" / "pelquill-2t.toml", (old, new))
    finding = only(world)
    assert (finding.level, finding.place.rpartition(": ")[2]) == (Level.BLOCKS, place)
    assert finding.text.startswith(text)


def test_a_missing_source_in_the_operation_blocks(world: Path) -> None:
    edit(world / "operation.toml", ('source = "OM-C 4.2 rev 9"\n', ""))
    assert only(world).place.endswith("work_areas.vellmark")


@pytest.mark.slow
def test_cells_outside_the_calibration_are_noted(world: Path) -> None:
    (world / "vellmark-2t" / "deck.toml").unlink()  # one of its cases asks where the calibration then ends
    edit(world / "aircraft" / "pelquill-2t.toml", ("\n120             116", ""))
    assert serious(world) == []
    texts = [finding.text for finding in findings(world / "vellmark-2t", TODAY)]
    assert "10 cells lie outside the airspeed calibration: no answer is computed from them" in texts


@pytest.mark.slow
def test_a_chart_that_rises_needs_a_reason(world: Path) -> None:
    edit(world / "aircraft" / "pelquill-2t.toml", ("6,000        105    96     88", "6,000        105    96     98"))
    finding = serious(world)[0]
    assert finding.level is Level.REASON
    assert "row 6,000, column +20" in finding.place
    edit(
        world / "aircraft" / "pelquill-2t.toml",
        (
            "[vne.power_off]",
            "[vne.reasons]\n"
            'rises_with_temperature = { cells = "row 6,000, column +20", reason = "so printed, asked the maker" }\n'
            'rises_with_altitude = { cells = "row 6,000, column +20", reason = "so printed, asked the maker" }\n'
            'similarity = { cells = "row 6,000, column +20", reason = "so printed, asked the maker" }\n'
            'out_of_line = { cells = "column +20", reason = "so printed, asked the maker" }\n'
            "[vne.power_off]",
        ),
    )
    assert serious(world) == []
    assert any("so printed" in finding.text for finding in findings(world / "vellmark-2t", TODAY))


@pytest.mark.parametrize(
    ("day", "expired"), [(dt.date(2032, 2, 28), False), (dt.date(2032, 2, 29), True), (dt.date(2040, 1, 1), True)]
)
def test_an_expired_brief_blocks_from_its_day_on(world: Path, day: dt.date, expired: bool) -> None:
    assert bool(serious(world, day)) is expired
    if expired:
        assert only(world, day).text == "expired on 2032-02-29"


@pytest.mark.parametrize(("expires", "blocks"), [("2032-04-01", False), ("2032-04-02", True)])
def test_expiry_beyond_the_policy_blocks(world: Path, expires: str, blocks: bool) -> None:
    edit(world / "vellmark-2t" / "brief.toml", ("expires = 2032-02-29", f"expires = {expires}"))
    assert bool(serious(world)) is blocks
    if blocks:
        assert "2032-04-01 at the latest (operation.toml" in only(world).remedy


def test_a_month_shorter_than_the_day_of_effect_ends_the_policy_on_its_last_day(world: Path) -> None:
    edit(world / "operation.toml", ("validity_months = 24", "validity_months = 11"))
    dates = (("effective = 2030-04-01", "effective = 2030-03-31"), ("expires = 2032-02-29", "expires = 2031-03-01"))
    edit(world / "vellmark-2t" / "brief.toml", *dates)
    assert "2031-02-28 at the latest" in only(world).remedy


def test_a_revision_without_a_line_of_changes_blocks(world: Path) -> None:
    edit(world / "vellmark-2t" / "brief.toml", ("revision = 0\nissued", "revision = 1\nissued"))
    assert only(world).text == "no line for revision 1"


@pytest.mark.slow
def test_the_notebook_has_to_be_there_and_readable_and_outputs_are_noted(world: Path) -> None:
    (world / "vellmark-2t" / "deck.toml").unlink()  # one of its cases asks where the calibration then ends
    path = world / "vellmark-2t" / "brief.ipynb"
    notebook = json.loads(path.read_text(encoding="utf-8"))
    notebook["cells"][1]["outputs"] = [{"output_type": "stream", "name": "stdout", "text": "1"}]
    path.write_text(json.dumps(notebook), encoding="utf-8")
    assert serious(world) == []
    assert any("outputs are stored" in finding.text for finding in findings(world / "vellmark-2t", TODAY))
    for broken in ("{", "[]", '{"cells": 3}'):
        path.write_text(broken, encoding="utf-8")
        assert only(world).text == "not a notebook that can be read"
    path.unlink()
    assert only(world).text == "no notebook"


def test_a_work_area_outside_the_manual_blocks(world: Path) -> None:
    edit(world / "operation.toml", ('"+30 degC"', '"+36 degC"'))
    found = serious(world)
    assert found
    assert all("work_areas.vellmark.temperatures" in finding.place for finding in found)


@pytest.mark.slow
def test_a_whole_operator_folder_lists_a_shared_finding_once(world: Path) -> None:
    shutil.copytree(world / "vellmark-2t", world / "second")
    edit(world / "aircraft" / "pelquill-2t.toml", ('radius = "4.45 m"', 'radius = "4.45"'))
    found = [finding for finding in findings(world, TODAY, page=False) if "rotor.radius" in finding.place]
    assert len(found) == 1


@pytest.mark.slow
def test_two_briefs_of_one_number_and_revision_block(world: Path) -> None:
    second = Path(shutil.copytree(world / "vellmark-2t", world / "second"))
    assert "NB-2T-001 rev 0 is also the brief in" in only(world).text
    edit(second / "brief.toml", ("revision = 0\nissued", "revision = 1\nissued"))
    assert serious(world) == []


@pytest.mark.parametrize(
    ("file", "old", "new", "place"),
    [
        ("vellmark-2t/brief.toml", "First issue", "First issue, ask ops@norrabeck.example", "brief.toml"),
        ("aircraft/pelquill-2t.toml", "order 2231", "order 2231, tel 555 0123 45", "vellmark-2t: sources"),
        ("operation.toml", "Norrabeck Rotor Charter", "Norrabeck, licence 4471882", "vellmark-2t: sources"),
    ],
)
def test_peoples_data_in_the_typed_files_block(world: Path, file: str, old: str, new: str, place: str) -> None:
    edit(world / file, (old, new))
    found = serious(world)
    assert found
    assert all(one.place.endswith(place) and "people are not on a brief" in one.remedy for one in found)


@pytest.mark.slow
def test_a_faulty_deck_blocks_and_leaves_the_page_a_draft(signed: Path, signing) -> None:
    """A deck that teaches a steeper bank than the tool permits today is held like any other file of the brief."""
    assert standing(load_brief(signed), TODAY).mark == ""
    signing.edit(signed / "deck.toml", ('most_bank = "20 deg"', 'most_bank = "30 deg"'))
    signing(signed)
    (found,) = [one for one in findings(signed, TODAY, page=False) if one.level is not Level.NOTE]
    assert found.level is Level.BLOCKS
    assert found.place.startswith("vellmark-2t/deck.toml, line ")
    assert standing(load_brief(signed), TODAY).mark == DRAFT


@pytest.mark.slow
def test_no_finding_holds_a_path_of_this_machine(world: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """From anywhere, by any path: places are those inside the operator folder."""
    for other in ("corrant-3f", "ysbrane-4h"):
        shutil.rmtree(world / other)
    (world / "register.toml").write_text('[[documents]]\nname = "flight manual"\n', encoding="utf-8")
    edit(world / "vellmark-2t" / "brief.toml", ('"014"', '"099"'))
    (world / "vellmark-2t" / "brief.ipynb").unlink()
    listed = []
    for here, path in ((world.parent, world), (world / "vellmark-2t", Path("..")), (Path("/"), world.relative_to("/"))):
        monkeypatch.chdir(here)
        listed.append(findings(path, TODAY, page=False))
    assert all(found == listed[0] for found in listed)
    places = {one.place.partition(",")[0].partition(":")[0] for one in listed[0]}
    assert places == {"register.toml", "vellmark-2t/brief.toml", "vellmark-2t/brief.ipynb", "aircraft/pelquill-2t.toml"}
    for one in listed[0]:
        assert str(world) not in str(one)
        assert not one.place.startswith(("/", ".", ":"))


def test_an_aircraft_file_alone(world: Path) -> None:
    path = world / "aircraft" / "pelquill-2t.toml"
    assert [finding.level for finding in findings(path, TODAY)] == [Level.NOTE]


def test_a_path_with_nothing_to_check_is_refused(tmp_path: Path) -> None:
    for path in (tmp_path, tmp_path / "none"):
        with pytest.raises(FaultyFile, match="nothing to check"):
            findings(path, TODAY)


def test_a_brief_outside_any_operator_folder_is_one_finding(tmp_path: Path, examples: Path) -> None:
    folder = Path(shutil.copytree(examples / "vellmark-2t", tmp_path / "alone"))
    found = [finding for finding in findings(folder, TODAY) if "operation.toml" in finding.text]
    assert len(found) == 1
    assert found[0].level is Level.BLOCKS


def test_a_finding_prints_on_one_line() -> None:
    finding = Finding(Level.BLOCKS, "brief.toml: people", "nobody yet", "sign it")
    assert str(finding) == "blocks release: brief.toml: people: nobody yet; sign it"
