"""The log: whole after a killed process, a torn line set apart, a lost or edited line noticed, no names."""

from __future__ import annotations

import datetime as dt
import json
import os
import signal
import subprocess
import sys
import textwrap

import pytest

from briefkit.session.privacy import PersonalData
from briefkit.session.record import RecordError, SessionLog, new_log_path, read_log
from briefkit.session.recurrent import Session

DAY = dt.datetime(2030, 4, 2, 9, 30, 15, tzinfo=dt.UTC)


@pytest.fixture
def run(deck, log):
    session = Session(deck, log)
    session.lock(["70 kt", "65"])
    session.show_manual()
    session.show_computed()
    session.decide("at most 20 degrees")
    return session


def lines(path):
    return [json.loads(line) for line in path.read_bytes().splitlines()]


def test_every_line_says_what_it_rests_on(run, log, deck, operator):
    """AMC5 SPA.EFB.100(b)(3): inputs, outputs, version and data of every computation."""
    for record in lines(log.path):
        assert record["at"] == "2030-04-02T09:30:15Z"
        assert record["type"] == "Pelquill 2T"
        assert record["configuration"] == "doors on"
        assert record["aircraft"] == "aircraft/pelquill-2t.toml"
        assert record["data"]["aircraft"] == deck.aircraft.data_hash
        assert record["data"]["deck"] == deck.data_hash
        assert record["briefkit"]
    computed = lines(log.path)[4]
    assert computed["inputs"]["mass"] == pytest.approx(2006 * 0.45359237)
    assert computed["inputs"]["oat"] == pytest.approx(303.15)
    assert {"manual", "vne", "unit", "says", "computed", "reduction", "exact", "bank_deg"} <= computed["outputs"].keys()
    text = log.path.read_text(encoding="utf-8")
    assert str(operator) not in text  # no path of this machine
    assert not {"name", "result", "pilot", "trainee"} & {key for record in lines(log.path) for key in record}
    assert log.path.stat().st_mode & 0o077 == 0  # for its owner's eyes


def test_no_file_before_the_first_step(deck, tmp_path):
    log = SessionLog(tmp_path / "later.jsonl", deck)
    assert not log.path.exists()
    log.step("opened")
    assert len(lines(log.path)) == 1


KILLED = """
    import sys, os
    from pathlib import Path
    from briefkit.aircraft.load import load_aircraft
    from briefkit.session.deck import load_deck
    from briefkit.session.record import SessionLog
    from briefkit.session.recurrent import Session
    operator, path = Path(sys.argv[1]), sys.argv[2]
    deck = load_deck(operator / "vellmark-2t", load_aircraft(operator / "aircraft" / "pelquill-2t.toml"))
    session = Session(deck, SessionLog(path, deck))
    steps = 2
    while True:
        for act in (lambda: session.lock(["70 kt", "about 65"]), session.show_manual, session.show_computed,
                    lambda: session.decide("at most 20 degrees")):
            act()
            steps += 1
            print(steps, flush=True)
        session.reset()
        steps += 1
        print(steps, flush=True)
"""


@pytest.mark.slow
@pytest.mark.skipif(os.name == "nt", reason="no SIGKILL")
@pytest.mark.parametrize("after", [4, 9, 23])
def test_a_killed_process_leaves_a_whole_log(operator, deck, tmp_path, after):
    """Every step that was reported done is on the log, whole, whenever the process dies."""
    path = tmp_path / "killed.jsonl"
    command = [sys.executable, "-c", textwrap.dedent(KILLED), str(operator), str(path)]
    with subprocess.Popen(command, stdout=subprocess.PIPE, text=True) as process:
        assert process.stdout is not None
        said = 0
        while said < after:
            said = int(process.stdout.readline())
        process.send_signal(signal.SIGKILL)
        done = [said, *(int(line) for line in process.stdout.read().split("\n")[:-1] if line)][-1]
        process.wait()
    read = read_log(path)
    torn = [fault for fault in read.faults if "torn" in fault]
    assert list(read.faults) == torn  # at worst the step in hand
    assert done <= len(read.steps) <= done + 1
    again = SessionLog(path, deck)  # and it goes on from there
    again.step("opened")
    assert again.session == read.steps[0].session
    assert read_log(path).faults == ()
    assert bool(again.torn) == bool(torn)


@pytest.mark.parametrize("kept", [1, 40, -1])
def test_a_torn_last_line_is_set_apart_and_reported(run, log, deck, kept):
    whole = log.path.read_bytes()
    last = whole.splitlines(keepends=True)[-1]
    fragment = last[:kept]
    log.path.write_bytes(whole[: -len(last)] + fragment)
    assert any("torn" in fault for fault in read_log(log.path).faults)
    assert log.path.read_bytes().endswith(fragment)  # reading changes nothing
    again = SessionLog(log.path, deck, clock=lambda: DAY)
    beside = log.path.with_name("one.jsonl.torn")
    assert "torn" in again.torn
    assert beside.name in again.torn
    assert beside.read_bytes() == fragment + b"\n"
    assert log.path.read_bytes() == whole[: -len(last)]
    again.step("opened")
    assert read_log(log.path).faults == ()
    assert len(read_log(log.path).steps) == len(whole.splitlines())


def test_a_whole_log_is_re_opened_without_a_word(run, log, deck):
    again = SessionLog(log.path, deck)
    assert again.torn == ""
    assert again.session == log.session
    again.step("opened")
    assert read_log(log.path).faults == ()
    assert not log.path.with_name("one.jsonl.torn").exists()


@pytest.mark.parametrize(
    ("edit", "said"),
    [
        (lambda rows: [*rows[:3], rows[3].replace(b"74 KIAS", b"84 KIAS"), *rows[4:]], "line 5 does not follow"),
        (lambda rows: [*rows[:2], *rows[3:]], "line 3 does not follow"),
        (lambda rows: [rows[0], rows[2], rows[1], *rows[3:]], "line 2 does not follow"),
        (lambda rows: [*rows[:2], b"what is this\n", *rows[2:]], "line 3 is not a step"),
        (lambda rows: [*rows[:3], rows[3].replace(b'"vne":74.5', b'"vne":NaN'), *rows[4:]], "line 4 is not a step"),
        (
            lambda rows: [*rows[:3], rows[3].replace(b'"mass":9', b'"mass":"9", "x":9'), *rows[4:]],
            "line 4 is not a step",
        ),
    ],
)
def test_a_lost_or_edited_line_shows(run, log, edit, said):
    rows = log.path.read_bytes().splitlines(keepends=True)
    edited = edit(rows)
    assert edited != rows
    log.path.write_bytes(b"".join(edited))
    assert any(said in fault for fault in read_log(log.path).faults), read_log(log.path).faults


def test_two_writers_do_not_mix(run, log, deck):
    other = SessionLog(log.path, deck)
    other.step("opened")
    before = log.path.read_bytes()
    with pytest.raises(RecordError, match="another process"):
        run.next()
    assert log.path.read_bytes() == before


def test_half_a_step_is_taken_back_when_the_disk_is_full(run, log, monkeypatch):
    before = log.path.read_bytes()
    real = os.write
    calls = []

    def half(handle, content):
        calls.append(content)
        if len(calls) > 1:
            raise OSError(28, "No space left on device")
        return real(handle, content[:50])

    monkeypatch.setattr("briefkit.session.record.os.write", half)
    with pytest.raises(RecordError, match="No space left"):
        run.reset()
    monkeypatch.undo()
    assert len(calls) == 2
    assert log.path.read_bytes() == before
    run.reset()
    assert read_log(log.path).faults == ()


@pytest.mark.parametrize("content", [b"", b"a diary\n", b'{"log":2}\n', b"\xff\xfe\n", b"[" * 100_000 + b"\n"])
def test_what_is_not_a_log_is_neither_read_nor_written_to(deck, tmp_path, content):
    path = tmp_path / "other.jsonl"
    path.write_bytes(content)
    with pytest.raises(RecordError, match="not a session log"):
        read_log(path)
    if content:
        with pytest.raises(RecordError, match="not a session log"):
            SessionLog(path, deck)
        assert path.read_bytes() == content


def test_the_log_itself_refuses_names(log):
    for fields in ({"predictions": ["70 kt", "Berg 70"]}, {"decision": "let Berg fly it"}):
        with pytest.raises(PersonalData, match="no names"):
            log.step("decision", **fields)
    assert not log.path.exists()


def test_no_such_log(tmp_path):
    with pytest.raises(RecordError, match="cannot be read"):
        read_log(tmp_path / "gone.jsonl")


def test_too_much_is_refused(log):
    with pytest.raises(RecordError, match="at most 24"):
        log.step("predictions", predictions=["70"] * 25)
    with pytest.raises(RecordError, match="at most 400"):
        log.step("decision", decision="x " * 300)
    with pytest.raises(ValueError, match="Out of range float values"):
        log.step("manual", outputs={"vne": float("nan")})
    with pytest.raises(ValueError, match="a step is one of"):
        log.step("diary")
    assert not log.path.exists()


def test_a_log_lies_beside_the_briefs_and_in_none_of_them(operator, brief):
    path = new_log_path(brief, DAY)
    assert path.parent == operator / "session_logs"
    assert path.name.startswith("vellmark-2t-20300402T093015Z-")
    assert new_log_path(brief, DAY) != path
