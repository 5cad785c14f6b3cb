"""The run of a deck: predictions locked, then the manual, then the computed figure, then a decision; all logged."""

from __future__ import annotations

import pytest

from briefkit.session.privacy import PersonalData
from briefkit.session.record import RecordError, read_log
from briefkit.session.recurrent import Session, SessionError, Stage


@pytest.fixture
def session(deck, log):
    return Session(deck, log)


def kinds(log):
    return [step.kind for step in read_log(log.path).steps]


def run_case(session):
    session.lock(["70 kt", "about 65", "no turn"])
    session.show_manual()
    session.show_computed()
    session.decide("slow to VNE less 10 first, at most 20 degrees")


def test_a_case_from_start_to_decision(session, deck, log):
    assert session.stage is Stage.PREDICT
    session.lock([" 70 kt", "", "no turn"])
    assert session.predictions == ("70 kt", "no turn")
    manual = session.show_manual()
    assert manual == deck.answers(deck.cases[0]).manual
    computed = session.show_computed()
    assert computed == deck.answers(deck.cases[0]).computed
    session.decide("at most 20 degrees")
    assert session.stage is Stage.DECIDED
    assert kinds(log) == ["opened", "case", "predictions", "manual", "computed", "decision"]
    steps = read_log(log.path).steps
    assert steps[2].predictions == ("70 kt", "no turn")
    assert steps[3].outputs["manual"] == "74 KIAS"
    assert "computed" not in steps[3].outputs  # the first reveal does not hold the second
    assert steps[4].outputs["bank_deg"] == 20
    assert steps[4].inputs["load_factor"] == deck.cases[0].condition.load_factor
    assert steps[5].decision == "at most 20 degrees"
    assert {step.case for step in steps[1:]} == {deck.cases[0].name}


def test_nothing_is_shown_before_a_prediction_is_locked(session):
    for act in (session.show_manual, session.show_computed):
        with pytest.raises(SessionError, match=r"lock the predictions first|comes first"):
            act()
    with pytest.raises(SessionError, match="no prediction"):
        session.lock(["", "  "])
    with pytest.raises(SessionError, match="both figures"):
        session.decide("slow down")
    with pytest.raises(SessionError, match="both figures"):
        session.what_if(session.case.start)
    assert session.stage is Stage.PREDICT


def test_a_locked_prediction_stays(session):
    session.lock(["70 kt"])
    with pytest.raises(SessionError, match="locked"):
        session.lock(["74 kt"])
    with pytest.raises(SessionError, match="manual’s figure comes first"):
        session.show_computed()
    session.show_manual()
    with pytest.raises(SessionError, match="locked"):
        session.lock(["74 kt"])
    with pytest.raises(SessionError, match="shown already"):
        session.show_manual()
    assert session.predictions == ("70 kt",)


def test_next_back_reset_begin_a_case_anew(session, deck, log):
    run_case(session)
    assert session.next() is deck.cases[1]
    assert (session.stage, session.predictions, session.decision) == (Stage.PREDICT, (), "")
    session.lock(["64"])
    session.reset()
    assert (session.stage, session.predictions) == (Stage.PREDICT, ())
    assert session.back() is deck.cases[0]
    with pytest.raises(SessionError, match="first case"):
        session.back()
    for _ in deck.cases[1:]:
        session.next()
    with pytest.raises(SessionError, match="last case"):
        session.next()
    assert session.case is deck.cases[-1]
    assert "reset" in kinds(log)
    assert [step.predictions for step in read_log(log.path).steps if step.kind == "predictions"] == [
        ("70 kt", "about 65", "no turn"), ("64",)
    ]  # fmt: skip


def test_a_case_the_tool_refuses_runs_like_any_other(session, deck, log):
    while session.case is not deck.cases[-1]:
        session.next()
    session.lock(["102"])
    assert session.show_manual().vne is None
    assert session.show_computed().reduction is None
    session.decide("no flight: wait for a warmer day")
    assert read_log(log.path).steps[-2].outputs["vne"] is None


def test_other_conditions_are_logged_too(session, log):
    run_case(session)
    said = session.what_if(session.case.condition.with_(bank="20 deg"))
    step = read_log(log.path).steps[-1]
    assert step.kind == "what-if"
    assert step.outputs["reduction"] == said.computed.reduction


@pytest.mark.parametrize("text", ["Berg 70", "satisfactory"])
def test_a_refused_text_has_not_happened(session, log, text):
    before = log.path.read_bytes()
    with pytest.raises(PersonalData, match="prediction 2"):
        session.lock(["70 kt", text])
    assert session.stage is Stage.PREDICT
    assert log.path.read_bytes() == before
    session.lock(["70 kt"])
    session.show_manual()
    session.show_computed()
    before = log.path.read_bytes()
    with pytest.raises(PersonalData, match="decision"):
        session.decide(text)
    assert session.stage is Stage.COMPUTED
    assert log.path.read_bytes() == before


def test_a_step_that_is_not_recorded_has_not_happened(session, log, monkeypatch):
    def full(handle, content):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr("briefkit.session.record.os.write", full)
    with pytest.raises(RecordError, match="not recorded"):
        session.lock(["70 kt"])
    assert (session.stage, session.predictions) == (Stage.PREDICT, ())
    with pytest.raises(RecordError, match="not recorded"):
        session.next()
    assert session.index == 0


def test_a_rehearsal_records_nothing_and_keeps_the_same_order(deck):
    session = Session(deck)
    with pytest.raises(SessionError, match="lock"):
        session.show_manual()
    with pytest.raises(PersonalData, match="name"):
        session.lock(["Berg 70"])
    run_case(session)
    assert session.stage is Stage.DECIDED


def test_blank_leaves_the_case_as_it_is(session):
    session.lock(["70 kt"])
    assert session.toggle_blank() is True
    assert session.stage is Stage.LOCKED
    assert session.toggle_blank() is False


def test_closed_is_closed(session, log):
    session.close()
    session.close()
    assert kinds(log)[-1] == "closed"
    assert kinds(log).count("closed") == 1
    with pytest.raises(SessionError, match="closed"):
        session.lock(["70 kt"])
    with pytest.raises(SessionError, match="closed"):
        session.next()
