"""The free sliders of the what-if panel: tried between cases, each try on the log, and back to the case again."""

from __future__ import annotations

import html
import re

import pytest

from briefkit.envelope.condition import Condition
from briefkit.session.answers import answers
from briefkit.session.record import read_log
from briefkit.session.recurrent import Stage
from briefkit.widgets.words import number_of


@pytest.fixture
def trying(panel, from_browser, press):
    """The panel with both figures of its first case out and the sliders open."""
    from_browser(panel._boxes[0], "74 KIAS")
    for _ in range(3):
        press(panel._step)
    press(panel._try)
    return panel


@pytest.fixture
def turn(trying, from_browser):
    """Move one number's slider, or type into its box."""

    def move(field, slider=None, typed=None):
        one = next(control for control in trying._free.controls if control.dial.field == field)
        from_browser(one.box if typed is not None else one.slider, typed if typed is not None else slider)

    return move


def tried(panel):
    return [step for step in read_log(panel.session.log.path).steps if step.kind == "what-if"]


def shown(panel):
    return re.sub(r"<[^>]*>", " ", html.unescape(panel._free.said.value)).replace("\u00a0", " ")


def test_the_sliders_stay_away_until_both_figures_are_out(panel, from_browser, press):
    from_browser(panel._keys, "t")
    assert "before anything else is tried" in panel._word.value
    assert panel._try.disabled
    assert panel._free.layout.display == "none"
    from_browser(panel._boxes[0], "74 KIAS")
    for _ in range(3):
        press(panel._step)
    from_browser(panel._keys, "t")
    assert panel._free.layout.display == "flex"
    assert panel.session.case.prompt not in panel._head.value
    from_browser(panel._keys, "t")
    assert panel._free.layout.display == "none"
    assert html.escape(panel.session.case.prompt) in panel._head.value


def test_after_the_decision_the_lesson_gives_way_to_what_is_tried_and_comes_back(trying, from_browser, press):
    from_browser(trying._decision, "slow first")
    press(trying._step)
    assert "What to take from it" not in trying._shown.value
    assert "74 KIAS" in trying._shown.value
    press(trying._try)
    assert "What to take from it" in trying._shown.value


def test_each_try_is_answered_and_logged_as_one(trying, deck, turn):
    turn("mass", slider=1700.0)
    turn("load_factor", typed="20")
    turn("oat", typed="+20 degC")
    now = trying._free.condition
    assert (round(now.mass / 0.45359237), round(now.oat, 2)) == (1700, 293.15)
    said = answers(deck.aircraft, deck.fleet, now)
    assert f"The manual: {said.manual.text}" in re.sub(" +", " ", shown(trying))
    beside = (said.manual.where, *said.manual.also)
    assert [line for line in beside if " ".join(line.split()) not in " ".join(shown(trying).split())] == []
    assert said.computed.text in shown(trying)
    assert "1,700 lb, Hp 8,000 ft, +20 °C, bank 20°, rotor speed 100 %" in shown(trying)
    steps = tried(trying)
    assert [step.case for step in steps] == [deck.cases[0].name] * 3
    assert steps[-1].inputs["mass"] == now.mass
    assert steps[-1].outputs["computed"] == said.computed.text
    assert trying.session.stage is Stage.COMPUTED  # a try is no step of the case


def test_a_slider_asks_when_it_is_let_go_and_not_on_the_way(trying):
    assert not any(control.slider.continuous_update for control in trying._free.controls)


def test_what_cannot_be_read_is_refused_in_words_and_not_logged(trying, turn):
    before = trying._free.condition
    for field, typed in (("mass", "heavy"), ("load_factor", "95"), ("oat", "95 F"), ("mass", "1,8 t")):
        trying._free._show()
        turn(field, typed=typed)
        assert "Refused" in trying._free._word.value
        assert trying._free.condition == before
        control = next(control for control in trying._free.controls if control.dial.field == field)
        assert control.read(control.box.value) == pytest.approx(number_of(control.dial, before), abs=0.06)
    assert tried(trying) == []


def test_a_condition_off_the_chart_is_an_answer_in_words_and_logged(trying, turn):
    turn("mass", typed="2,100 lb")
    assert "No VNE here, so no flight here." in shown(trying)
    assert tried(trying)[0].outputs["vne"] is None
    assert not re.search(r"(?i)\b(red|green|yellow|no-go|nan)\b", trying._free.said.value)


def test_elevation_and_qnh_set_the_height_together(trying, from_browser):
    """The invented Corrant, 8,640 ft on 990 hPa, is Hp 9,281 ft (the altimeter-setting relation, ICAO Doc 7488). The
    boxes keep what was typed until the height is set another way."""
    free = trying._free
    from_browser(free.by_qnh.elevation, "8,640")
    assert tried(trying) == []
    from_browser(free.by_qnh.qnh, "990 hPa")
    assert free.condition.pressure_altitude / 0.3048 == pytest.approx(9281.0, abs=1.0)
    assert (free.by_qnh.elevation.value, free.by_qnh.qnh.value) == ("8,640", "990 hPa")
    assert len(tried(trying)) == 1
    height = next(control for control in free.controls if control.dial.field == "pressure_altitude")
    from_browser(height.slider, 6000.0)
    assert (free.by_qnh.elevation.value, free.by_qnh.qnh.value) == ("", "")
    from_browser(free.by_qnh.elevation, "8,640 ft")
    from_browser(free.by_qnh.qnh, "2886")
    assert "Refused" in free._word.value
    assert free.condition.pressure_altitude == pytest.approx(6000.0 * 0.3048)


def test_back_to_the_case_and_a_reset_forget_what_was_tried(trying, deck, turn, press):
    case = deck.cases[0].condition
    turn("mass", slider=1700.0)
    press(trying._free.again)
    assert trying._free.condition == case
    assert trying._free.said.value == ""
    assert len(tried(trying)) == 1
    turn("mass", slider=1650.0)
    press(trying._reset)
    assert trying.session.stage is Stage.PREDICT
    assert trying._free.layout.display == "none"
    assert trying._free.condition == case
    press(trying._next)
    assert trying._free.condition == deck.cases[1].condition


def test_what_was_tried_last_goes_to_paper(trying, turn):
    turn("mass", slider=1700.0)
    rows = trying.still_parts().table.rows
    assert [row[0] for row in rows[-3:]] == ["Tried", "The manual", "Computed"]
    assert "1,700\u00a0lb" in rows[-3][1]


def test_a_try_the_log_refuses_has_not_happened(trying, turn):
    before, path = trying._free.condition, trying.session.log.path
    path.write_bytes(path.read_bytes() + b"{}\n")  # another process wrote
    turn("mass", slider=1700.0)
    assert "nother process" in trying._free._word.value
    assert trying._free.condition == before
    assert trying._free.said.value == ""
    path.write_bytes(path.read_bytes()[:-3])


def test_many_tries_add_no_models(trying, turn, models_open):
    before = models_open()
    for mass in range(1500, 1515):
        turn("mass", slider=float(mass))
    assert models_open() == before
    assert len(tried(trying)) == 15


def test_every_number_has_a_name(trying):
    for control in trying._free.controls:
        assert control.slider.description == control.box.description == control.dial.name
    assert all(box.description for box in (trying._free.by_qnh.elevation, trying._free.by_qnh.qnh))


def test_the_live_panel_takes_elevation_and_qnh_too(live, from_browser):
    from_browser(live._height.elevation, "5,210")
    from_browser(live._height.qnh, "995 hPa")
    typed = Condition(mass="1,800 lb", elevation="5,210 ft", qnh="995 hPa", oat="20 degC", ias="60 kt")
    assert live.condition.pressure_altitude == pytest.approx(typed.pressure_altitude)
    from_browser(live._height.qnh, "28 hPa")
    assert "Refused" in live.word
    assert "height stays" in live.word
    assert live.condition.pressure_altitude == pytest.approx(typed.pressure_altitude)
    live.change(pressure_altitude="6,000 ft")
    assert (live._height.elevation.value, live._height.qnh.value) == ("", "")
