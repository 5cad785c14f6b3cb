"""brief.toml: read as typed, held against aircraft and operation, and kept inside the operator folder."""

from __future__ import annotations

import datetime as dt
import shutil
from pathlib import Path

import pytest

from briefkit.brief.identity import Identity, disagreements, load_brief, load_identity, named_aircraft, operator_folder
from briefkit.errors import BriefkitError, FaultyFile


@pytest.fixture
def world(tmp_path: Path, examples: Path) -> Path:
    """A copy of the demo operator folder that a test may spoil."""
    return Path(shutil.copytree(examples, tmp_path / "operator"))


def edit(path: Path, old: str, new: str) -> None:
    text = path.read_text(encoding="utf-8")
    assert old in text
    path.write_text(text.replace(old, new, 1), encoding="utf-8")


@pytest.fixture(scope="module")
def identity(examples: Path) -> Identity:
    return load_identity(examples / "vellmark-2t")


def test_the_demo_brief_is_read_as_typed(identity: Identity, examples: Path) -> None:
    assert (identity.number, identity.revision) == ("NB-2T-001", 0)
    assert (identity.issued, identity.expires) == (dt.date(2030, 3, 1), dt.date(2032, 2, 29))
    assert (identity.work_area, identity.serials, identity.configuration) == ("vellmark", ("014", "022"), "doors on")
    assert (identity.prepared, identity.checked, identity.approved) == ("", "", "")
    assert identity.signatures == ()
    assert [change.text for change in identity.changes] == ["First issue"]
    assert len(identity.basis) == 3
    assert identity.operator == examples.resolve()
    assert identity.aircraft_path.name == "pelquill-2t.toml"
    assert identity.notebook.is_file()
    assert load_identity(examples / "vellmark-2t" / "brief.toml") == identity


def test_the_demo_brief_agrees_with_its_aircraft_and_operation(examples: Path) -> None:
    brief = load_brief(examples / "vellmark-2t")
    assert brief.aircraft.name == "Pelquill 2T"
    assert brief.operation.name == "Norrabeck Rotor Charter"
    assert disagreements(brief.identity, brief.aircraft, brief.operation) == []


@pytest.mark.parametrize("code", ["NRC-17", "17", "N1", "NRC-TRI-07"])
def test_staff_codes(world: Path, code: str) -> None:
    edit(world / "vellmark-2t" / "brief.toml", 'prepared = ""', f'prepared = "{code}"')
    assert load_identity(world / "vellmark-2t").prepared == code


@pytest.mark.parametrize("name", ["A. Person", "Person", "PERSON", "person1", "A-B", "NRC-17 Person", "Persönchen-1"])
def test_what_looks_like_a_name_is_refused(world: Path, name: str) -> None:
    edit(world / "vellmark-2t" / "brief.toml", 'approved = ""', f'approved = "{name}"')
    with pytest.raises(FaultyFile, match=r"people\.approved.*a code, not a name"):
        load_identity(world / "vellmark-2t")


def test_a_link_that_leads_out_of_the_operator_folder_is_refused(world: Path, tmp_path: Path) -> None:
    outside = shutil.copy(world / "aircraft" / "pelquill-2t.toml", tmp_path / "outside.toml")
    (world / "aircraft" / "linked.toml").symlink_to(outside)
    edit(world / "vellmark-2t" / "brief.toml", "aircraft/pelquill-2t.toml", "aircraft/linked.toml")
    with pytest.raises(FaultyFile, match="inside the operator folder"):
        load_identity(world / "vellmark-2t")


def test_a_brief_expires_after_the_day_it_becomes_effective(world: Path) -> None:
    edit(world / "vellmark-2t" / "brief.toml", "expires = 2032-02-29", "expires = 2030-04-01")
    with pytest.raises(FaultyFile, match=r"document\.expires: read 2030-04-01; permitted: after 2030-04-01"):
        load_identity(world / "vellmark-2t")


def test_the_aircraft_is_found_though_the_rest_of_the_brief_is_faulty_but_never_outside(
    world: Path, tmp_path: Path
) -> None:
    file = world / "vellmark-2t" / "brief.toml"
    edit(file, "revision = 0", "revision = -1")
    found = named_aircraft(file)
    assert found is not None
    assert found.resolve() == (world / "aircraft" / "pelquill-2t.toml").resolve()
    shutil.copy(found, tmp_path / "outside.toml")
    edit(file, '"aircraft/pelquill-2t.toml"', '"../outside.toml"')
    assert (world / "../outside.toml").is_file()
    assert named_aircraft(file) is None
    edit(file, '"../outside.toml"', "7")
    assert named_aircraft(file) is None
    assert named_aircraft(world) is None


def test_the_operator_folder_is_the_nearest_one_upwards(world: Path, tmp_path: Path) -> None:
    deep = world / "vellmark-2t" / "pictures"
    deep.mkdir()
    assert operator_folder(deep) == world.resolve()
    (world / "vellmark-2t" / "operation.toml").touch()
    assert operator_folder(deep) == (world / "vellmark-2t").resolve()


def test_a_brief_outside_any_operator_folder_lists_its_other_faults_too(tmp_path: Path) -> None:
    (tmp_path / "brief.toml").write_text('[people]\nprepared = "A. Person"\n', encoding="utf-8")
    with pytest.raises(FaultyFile, match=r"(?s)a code, not a name.*no operation\.toml here or above"):
        load_identity(tmp_path)


def test_faults_of_all_three_files_are_listed_together(world: Path) -> None:
    edit(world / "vellmark-2t" / "brief.toml", 'work_area = "vellmark"', 'work_area = "velmark"')
    edit(world / "aircraft" / "pelquill-2t.toml", 'radius = "4.45 m"', 'radius = "4.45"')
    with pytest.raises(FaultyFile, match=r"(?s)2 faults.*rotor\.radius.*subject\.work_area.*did you mean vellmark\?"):
        load_brief(world / "vellmark-2t")
    edit(world / "operation.toml", "people = 3", "people = 1")
    edit(world / "vellmark-2t" / "brief.toml", "revision = 0", "revision = -1")
    with pytest.raises(FaultyFile, match=r"(?s)3 faults.*document\.revision.*rotor\.radius.*policy\.people"):
        load_brief(world / "vellmark-2t")


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ('serials = ["014", "022"]', 'serials = ["014", "031"]', r'subject\.serials, value 2: read "031"'),
        ('configuration = "doors on"', 'configuration = "doors off"', "another configuration may have another VNE"),
        ('work_area = "vellmark"', 'work_area = "harll"', r"did you mean harl\?"),
    ],
)
def test_what_the_other_files_do_not_say_is_a_fault(world: Path, old: str, new: str, words: str) -> None:
    edit(world / "vellmark-2t" / "brief.toml", old, new)
    with pytest.raises(FaultyFile, match=words):
        load_brief(world / "vellmark-2t")


def test_a_work_area_outside_the_manual_refuses_the_brief(world: Path) -> None:
    edit(world / "operation.toml", '"8,000 ft"', '"10,500 ft"')
    with pytest.raises(FaultyFile, match=r"work_areas\.vellmark\.pressure_altitudes: read 10,500 ft"):
        load_brief(world / "vellmark-2t")


def test_a_folder_that_is_no_briefs_names_the_briefs_below_it(world: Path) -> None:
    """Typed one folder too high: no other file is offered in the place of brief.toml."""
    hidden = world / ".old" / "x"
    hidden.mkdir(parents=True)
    shutil.copy(world / "vellmark-2t" / "brief.toml", hidden)
    with pytest.raises(BriefkitError) as caught:
        load_brief(world)
    said = f"{world}: no brief.toml here; briefs below: corrant-3f, vellmark-2t, ysbrane-4h"
    assert str(caught.value) == said
    with pytest.raises(BriefkitError, match=r"aircraft: no brief\.toml here, nor in a folder below"):
        load_brief(world / "aircraft")
