"""new: six answers make a folder that builds, whose every invented value is listed, and nothing is written over."""

from __future__ import annotations

import datetime as dt
import itertools
import json
import re
import shutil
from pathlib import Path

import pytest

from briefkit.aircraft.findings import entry_findings
from briefkit.aircraft.operation import load_operation
from briefkit.brief.check import Level, findings, stands_against
from briefkit.brief.crew_page import crew_page
from briefkit.brief.identity import Brief, load_brief
from briefkit.brief.new import QUESTIONS, Answers, faults_of, new
from briefkit.brief.templates import template_folder
from briefkit.envelope.reductions import RowKind, reductions
from briefkit.errors import FaultyFile, ReadingError
from briefkit.reading.document import Document

TODAY = dt.date(2030, 6, 1)
VRENHOLT = Answers("Vrenholt 3", "3", "articulated", "clockwise", "km/h", "kg")
CHOICES = {question.name: question.choices for question in QUESTIONS}
BLADES = {"teetering": "2", "articulated": "3", "hingeless": "8"}


ALL = tuple(itertools.product(CHOICES["hub"], CHOICES["airspeed_unit"], CHOICES["mass_unit"]))


def made_with(folder: Path, hub: str, speed: str, mass: str) -> Brief:
    answers = Answers("Vrenholt 3", BLADES[hub], hub, "anticlockwise", speed, mass)
    return load_brief(new(folder / "op", answers, TODAY).folder)


@pytest.mark.parametrize(
    ("hub", "speed", "mass"),
    [("teetering", "mph", "lb"), ("articulated", "km/h", "kg"), ("hingeless", "kt", "lb"), ("teetering", "kt", "kg")],
)
def test_whatever_is_answered_there_is_a_table_of_reductions_at_once(
    tmp_path: Path, hub: str, speed: str, mass: str
) -> None:
    brief = made_with(tmp_path, hub, speed, mass)
    aircraft, operation = brief.aircraft, brief.operation
    assert (aircraft.rotor.hub, aircraft.units.speed, aircraft.units.mass) == (hub, speed, mass)
    assert aircraft.rotor.blades == int(BLADES[hub])
    assert entry_findings(aircraft) == []
    table = reductions(aircraft, operation.fleet["vrenholt-3"], operation.work_areas[brief.identity.work_area])
    assert table.unit == speed
    # one row of each kind, so that an author sees at once what the page can say
    assert {row.kind for row in table.rows} == {RowKind.COVERED, RowKind.REDUCTION, RowKind.VNE_LIMITS}


@pytest.mark.slow
@pytest.mark.parametrize(("hub", "speed", "mass"), ALL)
def test_whatever_is_answered_page_1_is_there_at_once(tmp_path: Path, hub: str, speed: str, mass: str) -> None:
    brief = made_with(tmp_path, hub, speed, mass)
    page = crew_page(brief, "test")
    table = page.front[1].grid
    assert table is not None
    assert len(table.rows) == 5
    assert speed in " ".join(cell for row in table.rows for cell in row)
    assert "EXAMPLE" in page.invented
    assert entry_findings(brief.aircraft) == []


@pytest.mark.parametrize(("hub", "speed", "mass"), [("teetering", "kt", "lb"), ("hingeless", "km/h", "kg")])
def test_a_starter_passes_check_as_a_draft(tmp_path: Path, hub: str, speed: str, mass: str) -> None:
    """Nothing against it but what is still to be typed, that it is invented, and that nobody has signed."""
    brief = made_with(tmp_path, hub, speed, mass)
    against = stands_against(findings(brief.identity.folder, TODAY))
    left = [one for one in against if one.text not in ('still "?"', "still the starter's example")]
    assert [one.place.rpartition(": ")[2] for one in left] == ["invented", "signatures"]


def test_without_an_operator_the_folder_becomes_one(tmp_path: Path) -> None:
    made = new(tmp_path / "op", VRENHOLT, TODAY)
    assert made.folder == tmp_path / "op" / "vrenholt-3"
    assert made.added_to is None
    assert sorted(path.relative_to(tmp_path / "op").as_posix() for path in made.written) == [
        "aircraft/vrenholt-3.toml",
        "operation.toml",
        "vrenholt-3/brief.ipynb",
        "vrenholt-3/brief.toml",
    ]


def test_below_an_operator_lines_are_only_added_to_its_file(tmp_path: Path, examples: Path) -> None:
    operator = Path(shutil.copytree(examples, tmp_path / "operator"))
    before = (operator / "operation.toml").read_text(encoding="utf-8")
    before_fleet = list(load_operation(operator).fleet)
    made = new(operator / "vrenholt", VRENHOLT, TODAY)
    assert made.folder == operator / "vrenholt"
    assert made.added_to == (operator / "operation.toml").resolve()
    after = (operator / "operation.toml").read_text(encoding="utf-8")
    assert after.startswith(before)
    assert list(load_operation(operator).fleet) == [*before_fleet, "vrenholt-3"]
    brief = load_brief(made.folder)
    assert brief.identity.work_area == "vellmark"  # the operator's own, which the example chart covers
    load_brief(operator / "vellmark-2t")


def test_a_work_area_the_example_chart_does_not_cover_is_left_alone(tmp_path: Path, examples: Path) -> None:
    operator = Path(shutil.copytree(examples, tmp_path / "operator"))
    path = operator / "operation.toml"
    text = path.read_text(encoding="utf-8").replace('"8,000 ft"', '"12,000 ft"')
    others = text[text.index("[work_areas.harl]") : text.index("[fleet.")]
    text = text.replace(others, "").replace("\n", "\r\n")
    path.write_bytes(b"\xef\xbb\xbf" + text.encode())
    made = new(operator, VRENHOLT, TODAY)
    assert made.folder == operator / "vrenholt-3"
    assert path.read_bytes().startswith(b"\xef\xbb\xbf" + text.encode().rstrip())
    assert b"\n" not in path.read_bytes().replace(b"\r\n", b"")
    assert load_brief(made.folder).identity.work_area == "example"


def test_an_operator_file_with_faults_is_not_touched(tmp_path: Path, examples: Path) -> None:
    operator = Path(shutil.copytree(examples, tmp_path / "operator"))
    path = operator / "operation.toml"
    path.write_text(path.read_text(encoding="utf-8").replace("people = 3", "people = 1"), encoding="utf-8")
    before = path.read_bytes()
    with pytest.raises(FaultyFile, match=r"policy\.people"):
        new(operator / "vrenholt", VRENHOLT, TODAY)
    assert path.read_bytes() == before
    assert not (operator / "vrenholt").exists()
    assert not (operator / "aircraft" / "vrenholt-3.toml").exists()


def test_nothing_is_written_over_and_nothing_half_written(tmp_path: Path) -> None:
    standing = tmp_path / "op" / "vrenholt-3" / "brief.toml"
    standing.parent.mkdir(parents=True)
    standing.write_text("mine", encoding="utf-8")
    with pytest.raises(FaultyFile, match="nothing is written over"):
        new(tmp_path / "op", VRENHOLT, TODAY)
    assert standing.read_text(encoding="utf-8") == "mine"
    assert [path for path in (tmp_path / "op").rglob("*") if path.is_file()] == [standing]


def test_check_lists_every_example_and_every_question_mark(tmp_path: Path) -> None:
    made = new(tmp_path / "op", VRENHOLT, TODAY)
    found = [finding for finding in findings(made.folder, TODAY) if finding.level is Level.BLOCKS]
    places = [finding.place for finding in found]
    for path in made.written:
        if path.suffix == ".toml":
            document = Document(path)
            marked = re.findall(r"(?m)^(?!#).*#.*EXAMPLE", path.read_text(encoding="utf-8"))
            assert len(document.examples()) == len(marked) > 0
            for key in (*(key for key, _ in document.examples()), *document.unanswered()):
                file = path.relative_to(made.folder.parent).as_posix()
                assert any(place.startswith(file) and place.endswith(f": {key}") for place in places), key
    assert any(place.endswith(": invented") for place in places)


def test_the_starter_leaves_no_placeholder_and_its_notebook_has_no_outputs(tmp_path: Path) -> None:
    made = new(tmp_path / "op", VRENHOLT, TODAY)
    for path in made.written:
        assert not re.search(r"\$[a-z{]", path.read_text(encoding="utf-8")), path
    cells = json.loads((made.folder / "brief.ipynb").read_text(encoding="utf-8"))["cells"]
    code = [cell for cell in cells if cell["cell_type"] == "code"]
    assert all(cell["outputs"] == [] and cell["execution_count"] is None for cell in code)
    first = "".join(code[0]["source"])
    assert 'load_aircraft("../aircraft/vrenholt-3.toml")' in first
    compile(first, "first cell", "exec")


@pytest.mark.parametrize("name", ["vellmark-2t/brief.ipynb"])
def test_the_example_notebook_is_committed_without_outputs(examples: Path, name: str) -> None:
    cells = json.loads((examples / name).read_text(encoding="utf-8"))["cells"]
    assert all(cell["outputs"] == [] for cell in cells if cell["cell_type"] == "code")


def test_dates_are_those_of_the_day(tmp_path: Path) -> None:
    identity = load_brief(new(tmp_path / "op", VRENHOLT, TODAY).folder).identity
    assert (identity.issued, identity.effective, identity.expires) == (TODAY, TODAY, dt.date(2031, 5, 31))
    assert identity.signatures == ()


@pytest.mark.parametrize(
    ("field", "answer", "words"),
    [
        ("hub", "articulate", "did you mean articulated?"),
        ("rotation", "left", "anticlockwise, clockwise"),
        ("blades", "three", "2, 3, 4, 5, 6, 7, 8"),
        ("airspeed_unit", "knots", "did you mean kt?"),
        ("mass_unit", "lbs", "did you mean lb?"),
        ("type_name", "", "a name of letters"),
        ("type_name", "../up", "a name of letters"),
        ("type_name", 'a"b', "a name of letters"),
        ("type_name", "$x", "a name of letters"),
    ],
)
def test_a_wrong_answer_says_what_is_permitted(field: str, answer: str, words: str) -> None:
    answers = {name: getattr(VRENHOLT, name) for name in CHOICES} | {field: answer}
    with pytest.raises(ReadingError, match=re.escape(words)):
        Answers(**answers)


def test_a_teetering_hub_has_two_blades() -> None:
    with pytest.raises(ReadingError, match="2 blades with a teetering hub"):
        Answers("Vrenholt 3", "3", "teetering", "clockwise", "kt", "lb")


def test_every_answer_that_will_not_do_is_found_and_what_is_not_given_is_not_held() -> None:
    given = {"blades": "many", "hub": "teetering", "mass_unit": "stone"}
    assert [question.name for question, _ in faults_of(given)] == ["blades", "mass_unit"]
    ((question, fault),) = faults_of(given | {"blades": "3", "mass_unit": "kg"})
    assert (question.name, fault.read) == ("hub", "3 blades")
    assert faults_of({}) == faults_of({"hub": "teetering"}) == []


def test_the_starters_are_found() -> None:
    assert (template_folder("starters") / "brief.ipynb").is_file()
