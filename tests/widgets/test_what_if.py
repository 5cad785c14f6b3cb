"""The what-if panel through the front end's message path: order, keys, what is sent, what is logged, what is left."""

from __future__ import annotations

import html
import json
import re
import shutil

import html5lib
import pytest
from ipywidgets import Widget

from briefkit.brief.identity import load_identity
from briefkit.brief.seal import covered, seal_of
from briefkit.brief.write import sweep
from briefkit.errors import ReadingError
from briefkit.figures.still import still
from briefkit.session.record import SessionLog, new_log_path, read_log
from briefkit.session.recurrent import Stage
from briefkit.widgets import closing
from briefkit.widgets.disc import DiscMap
from briefkit.widgets.paper import ToPaper, write_live_page
from briefkit.widgets.what_if import WhatIf


def sent(panel: Widget) -> str:
    """Everything the browser has been given of a panel."""
    states = [widget.get_state() for widget in closing.tree(panel)]
    return html.unescape(json.dumps(states, default=str, ensure_ascii=False))


def log_of(panel):
    return read_log(panel.session.log.path)


def to_computed(panel, from_browser, press):
    from_browser(panel._boxes[0], "74 KIAS")
    for _ in range(3):
        press(panel._step)
    assert panel.session.stage is Stage.COMPUTED


def test_a_case_goes_predict_manual_computed_decide_and_every_step_is_on_the_log(panel, from_browser, press):
    from_browser(panel._boxes[0], "74 KIAS, then 10 less")
    from_browser(panel._boxes[2], "69 KIAS")
    press(panel._step)
    assert "74 KIAS, then 10 less; 69 KIAS" in panel._said.value
    assert panel._predictions.layout.display == "none"
    press(panel._step)
    assert "74 KIAS" in panel._shown.value  # VNE at 8,000 ft, +30 C, between 79 and 70 on the invented chart: 74.5
    assert "computed" not in panel._shown.value.lower()
    press(panel._step)
    assert "At most 20°, and slow to VNE less 10 kt" in panel._shown.value
    from_browser(panel._decision, "at most 20 degrees, 10 kt slower first")
    press(panel._step)
    assert "What to take from it" in panel._shown.value
    press(panel._step)
    assert "Case 2 of 7" in panel._head.value
    steps = log_of(panel).steps
    assert [step.kind for step in steps] == ["opened", "case", "predictions", "manual", "computed", "decision", "case"]
    assert steps[2].predictions == ("74 KIAS, then 10 less", "69 KIAS")
    assert steps[4].outputs["bank_deg"] == 20
    assert log_of(panel).faults == ()


@pytest.mark.slow
def test_no_answer_is_sent_to_the_browser_before_it_is_shown(panel, deck, from_browser, press):
    said = deck.answers(deck.cases[0])
    hidden = [said.computed.text, said.manual.where, deck.cases[0].teaching, deck.cases[0].expected]
    assert not any(text in sent(panel) for text in hidden)
    from_browser(panel._boxes[0], "80")
    press(panel._step)
    press(panel._step)
    assert said.manual.where in sent(panel)
    assert not any(text in sent(panel) for text in (said.computed.text, deck.cases[0].teaching))


def test_a_step_without_what_it_needs_is_refused_in_words(panel, from_browser, press):
    press(panel._step)
    assert "No prediction" in panel._word.value
    assert panel.session.stage is Stage.PREDICT
    to_computed(panel, from_browser, press)
    press(panel._step)
    assert "No decision" in panel._word.value
    assert panel.session.stage is Stage.COMPUTED


def test_a_name_is_refused_and_nowhere_written(panel, from_browser, press):
    from_browser(panel._boxes[0], "Capt. Berg says 70")
    press(panel._step)
    assert "looks like a name" in panel._word.value
    assert "Berg" not in panel.session.log.path.read_text(encoding="utf-8")
    assert panel.session.stage is Stage.PREDICT
    assert panel._boxes[0].value == "Capt. Berg says 70"  # to be put right, not typed again


def test_locked_predictions_cannot_be_changed(panel, from_browser, press):
    from_browser(panel._boxes[0], "80")
    press(panel._step)
    from_browser(panel._boxes[0], "74")
    press(panel._step)
    assert panel.session.predictions == ("80",)
    assert "<p>80</p>" in panel._said.value


def test_single_keys_do_everything_but_type(panel, from_browser):
    from_browser(panel._boxes[0], "80")
    for key, stage in (("s", Stage.LOCKED), (" ", Stage.MANUAL), ("S", Stage.COMPUTED), ("r", Stage.PREDICT)):
        from_browser(panel._keys, key)
        assert panel.session.stage is stage
        assert panel._keys.value == ""
    from_browser(panel._keys, "n")
    assert panel.session.index == 1
    from_browser(panel._keys, "p")
    assert panel.session.index == 0
    from_browser(panel._keys, "f")
    assert "briefkit-fill" in panel._dom_classes
    from_browser(panel._keys, "x")
    assert "No such key" in panel._word.value


def test_one_key_blanks_and_a_case_is_set_meanwhile_but_nothing_revealed(panel, from_browser):
    from_browser(panel._keys, "b")
    assert "briefkit-blank" in panel._dom_classes
    from_browser(panel._keys, "n")
    assert panel.session.index == 1
    assert "briefkit-blank" in panel._dom_classes
    from_browser(panel._boxes[0], "80")
    from_browser(panel._keys, "s")
    assert panel.session.stage is Stage.PREDICT
    from_browser(panel._keys, "b")
    assert "briefkit-blank" not in panel._dom_classes


def test_a_key_held_down_takes_one_step(panel, from_browser):
    times = [0.0]
    panel._clock = lambda: times[0]
    panel._last_step = float("-inf")
    from_browser(panel._boxes[0], "80")
    for _ in range(40):  # a keyboard repeats about thirty times a second
        from_browser(panel._keys, "s")
        times[0] += 0.033
    assert panel.session.stage is Stage.LOCKED
    times[0] += 1.0
    from_browser(panel._keys, "s")
    assert panel.session.stage is Stage.MANUAL


def test_a_new_case_starts_empty(panel, from_browser, press):
    to_computed(panel, from_browser, press)
    press(panel._next)
    assert panel.session.stage is Stage.PREDICT
    assert panel._boxes[0].value == ""
    assert panel._shown.value == ""
    assert panel._said.value == ""
    press(panel._back)
    assert panel._shown.value == ""
    assert panel._back.disabled


def test_a_refused_case_says_so_in_the_ink_of_every_other_answer(panel, deck, from_browser, press):
    """No go / no-go colours: a refusal is an answer in words."""
    refused = next(i for i, case in enumerate(deck.cases) if str(case.says) == "refused")
    for _ in range(refused):
        press(panel._next)
    to_computed(panel, from_browser, press)
    assert "<p class='large computed'>" in panel._shown.value
    assert "No VNE here, so no flight here." in panel._shown.value
    assert not re.search(r"(?i)\b(red|green|yellow|amber|go|no-go)\b", panel._shown.value)


def test_a_fault_in_a_callback_is_seen_and_what_was_not_recorded_has_not_happened(panel, from_browser, press):
    panel.session.log.path.write_bytes(panel.session.log.path.read_bytes() + b"{}\n")  # another process wrote
    from_browser(panel._boxes[0], "80")
    press(panel._step)
    assert "Another process" in panel._word.value or "another process" in panel._word.value
    assert panel.session.stage is Stage.PREDICT
    panel.session.log.path.write_bytes(panel.session.log.path.read_bytes()[:-3])


def test_from_live_to_paper_writes_what_was_shown_and_no_more(panel, deck, operator, from_browser, press):
    from_browser(panel._boxes[0], "80")
    press(panel._step)
    press(panel._step)
    press(panel._paper)
    (path,) = (operator / "live_pages").glob("vellmark-2t-*.html")
    page = path.read_text(encoding="utf-8")
    assert path.name in panel._word.value
    html5lib.HTMLParser(strict=True).parse(page)
    said = deck.answers(deck.cases[0])
    assert said.manual.where.split(":")[0] in page
    assert said.computed.text.split(".")[0] not in page
    assert "not for crews" in page
    assert "<script" not in page
    assert deck.aircraft.data_hash[:12] in page
    assert "80" in html5lib.parse(page, namespaceHTMLElements=False).findtext(".//table/tbody/tr[4]/td")


@pytest.mark.parametrize("at_the_top", [False, True])
def test_what_a_session_writes_is_neither_signed_nor_swept(operator, at_the_top):
    """Pages and logs of sessions stand in the operator folder, which may be a brief's own folder too."""
    folder = operator if at_the_top else operator / "vellmark-2t"
    if at_the_top:
        for name in ("brief.toml", "brief.ipynb", "deck.toml"):
            (operator / "vellmark-2t" / name).rename(operator / name)
        for other in ("vellmark-2t", "corrant-3f", "ysbrane-4h"):
            shutil.rmtree(operator / other)
    before = seal_of(load_identity(folder))
    page = write_live_page(operator, folder.name, "<!doctype html>")
    log = new_log_path(folder)
    log.parent.mkdir()
    log.write_text("{}\n", encoding="utf-8")
    assert seal_of(load_identity(folder)) == before
    assert not any(path.is_relative_to(page.parent) for path in covered(load_identity(folder)))
    for out in (operator, page.parent, folder):
        sweep(out)  # what every build does first, wherever it is told to write
    assert page.is_file()
    assert log.is_file()


def test_the_panel_s_still_has_no_buttons(panel):
    drawn = still(panel)
    assert "Case 1 of 7" in drawn
    assert "<button" not in drawn
    assert "One key" not in drawn


def test_a_rehearsal_records_nothing_and_says_so(deck, operator):
    panel = WhatIf(deck, rehearsal=True)
    assert "nothing is recorded" in panel._word.value
    assert not (operator / "session_logs").exists()
    panel.close()


def test_a_torn_log_is_reported(deck, operator):
    path = operator / "session_logs" / "one.jsonl"
    WhatIf(deck, log=SessionLog(path, deck)).close()
    path.write_bytes(path.read_bytes() + b'{"log":1,"at":"20')
    panel = WhatIf(deck, log=SessionLog(path, deck))
    assert "torn" in panel._word.value
    panel.close()
    assert read_log(path).faults == ()


def test_unknown_words_and_wrong_things_are_refused_and_leave_no_models(deck, models_open):
    before = models_open()
    with pytest.raises(TypeError, match="rehersal"):
        WhatIf(deck, rehersal=True)
    with pytest.raises(ReadingError, match="a deck"):
        WhatIf("deck.toml")
    with pytest.raises(ReadingError, match="13 boxes"):
        WhatIf(deck, boxes=13, rehearsal=True)
    assert models_open() == before


def test_closing_frees_every_model_and_ends_the_log(deck, models_open):
    before = models_open()
    panel = WhatIf(deck)
    path = panel.session.log.path
    panel.close()
    panel.close()
    assert models_open() == before
    assert json.loads(path.read_text(encoding="utf-8").splitlines()[-1])["step"] == "closed"


@pytest.mark.slow
def test_a_whole_session_and_twenty_runs_of_its_cell_add_no_models(deck, models_open, monkeypatch, from_browser, press):
    now = [("cell", "0")]
    monkeypatch.setattr(closing, "_running_cell", lambda: now[0])
    monkeypatch.setattr(closing, "_made", {})
    counts = []
    for run in range(20):
        now[0] = ("cell", str(run))
        panel = WhatIf(deck, rehearsal=True)
        counts.append(models_open())
    panel._clock = iter(range(0, 10_000_000, 10)).__next__
    for _ in range(len(deck.cases) - 1):
        from_browser(panel._boxes[0], "80")
        for _ in range(3):
            press(panel._step)
        from_browser(panel._decision, "slow first")
        press(panel._step)
        press(panel._step)
    assert panel.session.index == len(deck.cases) - 1
    counts.append(models_open())
    assert len(set(counts)) == 1
    panel.close()


def test_every_box_and_button_has_a_name(panel):
    assert all(button.description for button in panel._buttons)
    assert [box.description for box in panel._boxes] == [f"Prediction {n}" for n in range(1, 5)]
    assert panel._decision.description
    assert panel._keys.description


def test_exhibits_go_to_paper_as_they_stand_and_an_old_picture_does_not(operator, two_t, live, press):
    disc = DiscMap(live)
    button = ToPaper(operator / "vellmark-2t", two_t, live, disc, title="Hot and high")
    live.change(mass="1,900 lb")
    press(button._button)
    page = button.written.read_text(encoding="utf-8")
    assert page.count("<svg") == 1
    assert "1,900" in page
    assert "Hot and high" in page
    disc.mark_old("not solved")
    press(button._button)
    assert "Not written" in button._word.value
    assert len(list((operator / "live_pages").iterdir())) == 1
    button.close()
    disc.close()
    with pytest.raises(ReadingError, match="nothing to write"):
        ToPaper(operator, two_t)
