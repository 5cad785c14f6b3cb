"""A log against today's files: nothing differs, or what and by how much; as CSV; and at the command line."""

from __future__ import annotations

import csv
import io

import pytest
from typer.testing import CliRunner

from briefkit.cli import app
from briefkit.errors import FaultyFile
from briefkit.session.recompute import recompute, to_csv
from briefkit.session.record import RecordError, read_log
from briefkit.session.recurrent import Session


@pytest.fixture
def path(deck, log):
    session = Session(deck, log)
    for case in deck.cases:
        session.lock(["70 kt", "=1+1"])
        session.show_manual()
        session.show_computed()
        session.decide("- slower, by 10")
        if case is not deck.cases[-1]:
            session.next()
    session.close()
    return log.path


def revise(operator, old, new):
    file = operator / "aircraft" / "pelquill-2t.toml"
    text = file.read_text(encoding="utf-8")
    assert old in text
    file.write_text(text.replace(old, new), encoding="utf-8")


@pytest.mark.slow
def test_nothing_differs_on_the_day(path, deck):
    done = recompute(read_log(path))
    assert done.steps == 2 * len(deck.cases)
    assert done.differences == ()
    assert done.notes == ()


@pytest.mark.slow
def test_a_revised_chart_says_what_differs_and_by_how_much(path, operator):
    """The cell 8,000 ft, +40 is typed 66 for 70: halfway, at +30, VNE falls by 2 (linear interpolation)."""
    revise(operator, "87     79     70", "87     79     66")
    done = recompute(read_log(path))
    assert any(note.startswith("aircraft/pelquill-2t.toml has changed since") for note in done.notes)
    first = [one for one in done.differences if one.line == 4]
    vne = next(one for one in first if one.what == "manual’s VNE")
    assert (vne.then, vne.today, vne.by) == ("74.5", "72.5", -2.0)
    assert str(vne).endswith("manual’s VNE was 74.5, is 72.5 today (-2.00)")
    figure = next(one for one in first if one.what == "manual’s figure")
    assert (figure.then, figure.today) == ("74 KIAS", "72 KIAS")
    untouched = {one.case for one in done.differences}
    assert "Just outside the chart" not in untouched
    assert "Cold morning, light: stall is not what decides" not in untouched


@pytest.mark.slow
def test_a_changed_file_with_the_same_figures_is_only_noted(path, operator):
    revise(operator, "# Invented aircraft.", "# An invented aircraft.")
    done = recompute(read_log(path))
    assert done.differences == ()
    assert len(done.notes) == 1


@pytest.mark.slow
def test_an_altered_output_shows(path):
    path.write_bytes(path.read_bytes().replace(b'"reduction":10.0', b'"reduction":5.0'))
    done = recompute(read_log(path))
    assert {one.by for one in done.differences if one.what == "reduction"} == {5.0}
    assert any("edited" in note for note in done.notes)


@pytest.mark.parametrize("inside", ["../../etc/passwd.toml", "/etc/hosts", "aircraft/../../x.toml", "operation.txt"])
def test_a_log_leads_nowhere_outside_the_operator_s_folder(path, inside):
    path.write_text(path.read_text(encoding="utf-8").replace("aircraft/pelquill-2t.toml", inside), encoding="utf-8")
    with pytest.raises(RecordError, match="not an aircraft file"):
        recompute(read_log(path))


def test_inputs_nobody_could_have_typed_are_refused_in_words(path):
    text = path.read_text(encoding="utf-8").replace('"load_factor":1.154', '"load_factor":-1.154')
    path.write_text(text, encoding="utf-8")
    assert any(one.what == "inputs" and "refused" in one.today for one in recompute(read_log(path)).differences)


@pytest.mark.slow
def test_a_log_that_was_moved_needs_its_operator(path, operator, tmp_path_factory):
    moved = tmp_path_factory.mktemp("elsewhere") / path.name
    moved.write_bytes(path.read_bytes())
    with pytest.raises(FaultyFile, match="operation"):
        recompute(read_log(moved))
    assert recompute(read_log(moved), operator).differences == ()


def test_csv_is_one_row_a_step_and_no_formula(path, deck):
    """RFC 4180 by the standard library's reader; a leading =, +, - or @ of a text is a formula to a spreadsheet."""
    rows = list(csv.DictReader(io.StringIO(to_csv(read_log(path)))))
    assert len(rows) == len(read_log(path).steps)
    computed = next(row for row in rows if row["kind"] == "computed")
    assert float(computed["mass_kg"]) == pytest.approx(909.906, abs=1e-3)
    assert computed["reduction"] == "10.0"
    assert computed["case"] == deck.cases[0].name
    assert next(row["decision"] for row in rows if row["kind"] == "decision") == "'- slower, by 10"
    assert next(row["predictions"] for row in rows if row["kind"] == "predictions") == "70 kt | =1+1"
    assert not [cell for row in rows for cell in row.values() if cell[:1] in "=+@" and cell]


@pytest.mark.slow
def test_the_command(path, operator, tmp_path):
    runner = CliRunner()
    out = tmp_path / "log.csv"
    done = runner.invoke(app, ["recompute", str(path), "--csv", str(out)])
    assert done.exit_code == 0, done.output
    assert "with figures computed again, 0 differ" in done.output
    assert out.read_bytes().startswith(b"\xef\xbb\xbfline,at,")
    again = runner.invoke(app, ["recompute", str(path), "--csv", str(out)])
    assert again.exit_code == 1
    assert "nothing is written over" in again.output
    revise(operator, "87     79     70", "87     79     66")
    done = runner.invoke(app, ["recompute", str(path)])
    assert done.exit_code == 1
    assert "manual’s VNE was 74.5, is 72.5 today (-2.00)" in done.output
    other = tmp_path / "diary.jsonl"
    other.write_text("dear diary\n")
    done = runner.invoke(app, ["recompute", str(other)])
    assert done.exit_code == 1
    assert "Traceback" not in done.output
    assert "not a session log" in done.output


@pytest.mark.slow
def test_a_torn_log_is_reported_by_the_command(path):
    path.write_bytes(path.read_bytes()[:-20])
    done = CliRunner().invoke(app, ["recompute", str(path)])
    assert done.exit_code == 1
    assert "the last line is torn" in done.output
