"""Each starter builds as it is and passes `check` as a draft: nothing faulty, everything invented listed."""

from __future__ import annotations

import datetime as dt

import pytest
from typer.testing import CliRunner

from briefkit.aircraft.operation import load_operation
from briefkit.brief.build import build
from briefkit.brief.check import findings
from briefkit.brief.identity import load_brief
from briefkit.brief.new import Answers, Starter, new
from briefkit.brief.run import read_notebook
from briefkit.cli import app
from briefkit.envelope.reductions import RowKind, reductions

TODAY = dt.date(2030, 6, 1)
VRENHOLT = Answers("Vrenholt 3", "3", "articulated", "clockwise", "kt", "kg")
OPTIONS = [
    "--type-name", "Vrenholt 3", "--blades", "3", "--hub", "articulated", "--rotation", "clockwise",
    "--airspeed-unit", "kt", "--mass-unit", "kg",
]  # fmt: skip


@pytest.mark.parametrize("unit", ["kt", "km/h", "mph"])
@pytest.mark.parametrize("starter", Starter)
def test_page_1_has_something_to_say_at_once(tmp_path, starter, unit):
    answers = Answers("Vrenholt 3", "3", "articulated", "clockwise", unit, "kg")
    brief = load_brief(new(tmp_path / "op", answers, TODAY, starter).folder)
    area = brief.operation.work_areas[brief.identity.work_area]
    fleet = brief.operation.entry_for(brief.aircraft)
    assert fleet is not None
    kinds = {row.kind for row in reductions(brief.aircraft, fleet, area).rows}
    assert RowKind.COVERED in kinds
    assert (area.name == "Hot and high work area") == (starter is Starter.HOT_AND_HIGH)


@pytest.mark.slow
@pytest.mark.parametrize("starter", Starter)
def test_it_builds_as_it_is_and_every_invented_value_is_listed(tmp_path, starter):
    made = CliRunner().invoke(app, ["new", str(tmp_path / "op"), *OPTIONS, "--starter", starter])
    assert made.exit_code == 0, made.output
    folder = tmp_path / "op" / "vrenholt-3"
    assert (folder / "deck.toml").is_file() == (starter is Starter.RECURRENT_CHECK)
    (result,) = build([folder], tmp_path / "out", dt.date.today())
    assert result.error == ""
    assert result.notes == ()
    assert result.mark == "DRAFT: not for crews"
    listed = findings(folder, dt.date.today())
    assert not any("fault" in str(one) for one in listed)
    assert any("EXAMPLE" in str(one) for one in listed)
    assert all(not cell.get("outputs") for cell in read_notebook(folder / "brief.ipynb").cells)


def test_below_an_operator_s_own_folder_a_hot_area_is_added_once(tmp_path):
    operator = tmp_path / "op"
    new(operator, VRENHOLT, TODAY)
    for number in ("4", "5"):
        other = Answers(f"Vrenholt {number}", "3", "articulated", "clockwise", "kt", "kg")
        brief = load_brief(new(operator / number, other, TODAY, "hot-and-high").folder)
        assert brief.identity.work_area == "example_hot"
    assert [*load_operation(operator).work_areas] == ["example", "example_hot"]


def test_a_starter_nobody_has(tmp_path):
    made = CliRunner().invoke(app, ["new", str(tmp_path / "op"), *OPTIONS, "--starter", "cold"])
    assert made.exit_code == 2
    assert "is not one of type, hot-and-high, recurrent-check" in " ".join(made.output.split())
    assert not (tmp_path / "op").exists()
