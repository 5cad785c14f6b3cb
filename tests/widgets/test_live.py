"""The live condition through Python and through the front end's message path."""

from __future__ import annotations

import math
from html import unescape

import pytest

from briefkit import units
from briefkit.envelope.condition import Condition
from briefkit.errors import OutsideCalibration, OutsideChart, OutsideLimits, ReadingError
from briefkit.widgets import answers as answers_module
from briefkit.widgets.disc import DiscMap
from briefkit.widgets.flapping import Flapping
from briefkit.widgets.live import LiveCondition
from briefkit.widgets.stall_boundary import StallBoundary


def test_the_panel_shows_the_condition_in_the_manual_s_units(live, control):
    shown = {name: control(name).box.value for name in ("mass", "pressure_altitude", "oat", "ias", "load_factor")}
    assert shown == {
        "mass": "1,800 lb", "pressure_altitude": "8,000 ft", "oat": "+20 °C", "ias": "60 KIAS", "load_factor": "0°",
    }  # fmt: skip
    assert control("rotor_speed").box.value == "100 %"


@pytest.mark.parametrize(
    ("field", "value", "attribute", "expected"),
    [
        ("mass", 1700.0, "mass", 1700 * units.POUND),
        ("pressure_altitude", 6000.0, "pressure_altitude", 6000 * units.FOOT),
        ("oat", 10.0, "oat", 283.15),
        ("ias", 50.0, "ias", 50 * units.KNOT),
        ("load_factor", 30.0, "load_factor", 1 / math.cos(math.radians(30.0))),
        ("rotor_speed", 98.0, "rotor_speed", 0.98),
    ],
)
def test_a_slider_moved_in_the_browser_moves_the_condition(
    live, control, from_browser, field, value, attribute, expected
):
    from_browser(control(field).slider, value)
    assert getattr(live.condition, attribute) == pytest.approx(expected, rel=1e-9)
    assert live.word == ""


@pytest.mark.parametrize(
    ("field", "typed", "shown"),
    [
        ("mass", "1,700 lb", "1,700 lb"),
        ("mass", "1700", "1,700 lb"),
        ("mass", "800 kg", "1,763.7 lb"),
        ("oat", "\u22127", "\u22127 °C"),
        ("ias", "55 KIAS", "55 KIAS"),
        ("ias", "55", "55 KIAS"),
        ("load_factor", "20 deg", "20°"),
        ("load_factor", "20", "20°"),
        ("rotor_speed", "98.5 %", "98.5 %"),
        ("pressure_altitude", "2,000 m", "6,561.7 ft"),
    ],
)
def test_a_box_takes_what_one_would_type(live, control, from_browser, field, typed, shown):
    from_browser(control(field).box, typed)
    assert live.word == ""
    assert control(field).box.value == shown


@pytest.mark.parametrize(
    ("field", "typed", "said"),
    [
        ("mass", "2,100 lb", "Permitted: 1,301"),
        ("mass", "1.800 kg", "outside"),
        ("mass", "heavy", "read 'heavy'"),
        ("mass", "1800 stone", "mass in kg, lb"),
        ("pressure_altitude", "12,000 ft", "10,000"),
        ("oat", "45", "outside air temperature"),
        ("ias", "30 kt", "calibration"),
        ("ias", "nan", "read 'nan'"),
        ("load_factor", "85", "bank"),
        ("rotor_speed", "90 %", "97"),
        ("mass", "", "read ''"),
        ("pressure_altitude", "8,50", 'a decimal point, not a comma: "8.50 ft"'),
        ("mass", "1,85 lb", 'a decimal point, not a comma: "1.85 lb"'),
        ("oat", "68 F", "in Celsius: (F - 32) x 5/9"),
    ],
)
def test_an_impossible_entry_is_refused_in_words_and_changes_nothing(
    live, control, from_browser, plain, field, typed, said
):
    before, shown = live.condition, control(field).box.value
    from_browser(control(field).box, typed)
    assert live.condition is before
    assert live.word.startswith("Refused: ")
    assert said in plain(live.word)
    assert f"Entered: {typed}." in live.word
    assert f"stays at {shown}" in plain(live.word)
    assert live.word in unescape(live._word.value)
    assert control(field).box.value == shown


@pytest.mark.parametrize(
    ("typed", "field", "echo", "shown"),
    [
        ("800 kg", "mass", 1764.0, "1,763.7 lb"),
        ("25.4", "load_factor", 25.0, "25.4°"),
        ("20.3", "oat", 20.0, "+20.3 °C"),
    ],
)
def test_the_front_end_s_own_rounding_changes_nothing(live, control, from_browser, typed, field, echo, shown):
    """Seen in JupyterLab: drawn off its grid, a slider rounds its value and sends that as if a hand had moved it."""
    from_browser(control(field).box, typed)
    before = live.condition
    from_browser(control(field).slider, echo)
    assert live.condition is before
    assert control(field).box.value == shown


def test_the_front_end_s_rounding_wipes_no_refusal(live, control, from_browser):
    from_browser(control("mass").box, "2,100 lb")
    from_browser(control("mass").slider, 1800.0000001)
    assert "Refused" in live.word


@pytest.mark.parametrize(
    ("typed", "moved", "shown"),
    [
        ("8,050", 8150.0, "8,100 ft"),
        ("8,050", 7950.0, "8,000 ft"),
        ("8,050", 9999.0, "9,900 ft"),
        ("8,050", 10_000.0, "10,000 ft"),
        ("8,000", 7400.0, "7,400 ft"),
    ],
)
def test_a_slider_moves_by_round_numbers_and_reaches_its_end(live, control, from_browser, typed, moved, shown):
    from_browser(control("pressure_altitude").box, typed)
    from_browser(control("pressure_altitude").slider, moved)
    assert control("pressure_altitude").box.value == shown


def test_the_slider_s_grid_runs_through_the_number_it_shows(live, control, from_browser):
    from_browser(control("mass").box, "800 kg")
    slider = control("mass").slider
    steps = (slider.value - slider.min) / slider.step
    assert steps == pytest.approx(round(steps), abs=1e-5)
    assert slider.min == pytest.approx(1301.698, abs=1e-3)


def test_a_slider_into_a_forbidden_corner_is_refused_and_set_back(live, control, from_browser):
    """+30 C is permitted low down, but not at 10,000 ft (ISA+35 ends at +30.2 C there... at +36 it is not)."""
    from_browser(control("oat").slider, 36.0)
    assert "outside air temperature" in live.word
    assert control("oat").slider.value == 20.0
    assert live.condition.oat == pytest.approx(293.15)


def test_a_good_entry_after_a_refusal_clears_the_words(live, control, from_browser):
    from_browser(control("mass").box, "2,100 lb")
    from_browser(control("mass").box, "1,900 lb")
    assert live.word == ""
    assert live._word.value == ""


def test_a_speed_above_vne_is_shown_with_a_remark(live, control, from_browser):
    from_browser(control("ias").box, "90 kt")
    assert live.word == "This airspeed is above the manual's VNE here, 79 KIAS."


def test_the_sliders_end_where_the_manual_does(control):
    """The invented 2T: 1,301 to 2,006 lb, 10,000 ft, chart from -20 to +40 C, rotor 97 to 102 %."""
    ends = {field: (control(field).slider.min, control(field).slider.max) for field in ("mass", "oat", "rotor_speed")}
    assert ends == {"mass": (1301.0, 2006.0), "oat": (-20.0, 40.0), "rotor_speed": (97.0, 102.0)}
    assert control("pressure_altitude").slider.max == pytest.approx(10_000.0)


def test_every_control_has_a_name(live):
    assert [c.slider.description for c in live._controls] == [
        "Mass", "Pressure altitude", "Outside air temperature", "Airspeed", "Bank", "Rotor speed",
    ]  # fmt: skip
    assert all(c.box.tooltip for c in live._controls)


def test_python_may_change_it_too_and_hears_the_refusal(live, control):
    live.change(bank="25 deg", mass="1,900 lb")
    assert control("load_factor").box.value == "25°"
    with pytest.raises(OutsideLimits, match="mass"):
        live.change(mass="2,100 lb")
    with pytest.raises(TypeError, match="unknown: banc"):
        live.change(banc="25 deg")
    assert control("mass").box.value == "1,900 lb"


def test_assigning_a_condition_applies_it(live, start):
    live.condition = start.with_(oat="10 degC")
    assert live.condition.oat == pytest.approx(283.15)
    with pytest.raises(ReadingError, match="no airspeed"):
        live.condition = Condition(mass="1,800 lb", pressure_altitude="8,000 ft", oat="20 degC")


@pytest.mark.parametrize(
    ("change", "kind"),
    [
        ({"mass": "2,100 lb"}, OutsideLimits),
        ({"pressure_altitude": "12,000 ft"}, OutsideChart),
        ({"ias": "30 kt"}, OutsideCalibration),
    ],
)
def test_a_start_that_is_not_permitted_is_raised_and_leaves_no_models(two_t, start, change, kind):
    with pytest.raises(kind):
        LiveCondition(two_t, start.with_(**change))


def test_unknown_names_are_refused(two_t, start, live):
    with pytest.raises(TypeError, match="conditon"):
        LiveCondition(two_t, conditon=start)
    with pytest.raises(TypeError, match="agains"):
        StallBoundary(live, agains="mass")


def test_one_change_is_one_solve_whatever_follows(live, monkeypatch):
    """Three exhibits on one live condition share the answer."""
    calls = []
    real = answers_module.solve
    monkeypatch.setattr(answers_module, "solve", lambda *a: calls.append(a) or real(*a))
    for exhibit in (DiscMap(live), Flapping(live), DiscMap(live)):
        assert exhibit.fault == ""
    assert len(calls) == 1
    live.change(ias="65 kt")
    assert len(calls) == 2


def test_every_follower_is_redrawn_before_the_change_returns(live):
    """A deferred refresh was stale on paper six times of six in the trial."""
    followers = [DiscMap(live), Flapping(live), StallBoundary(live)]
    live.change(mass="1,900 lb")
    for exhibit in followers:
        assert exhibit.condition is live.condition
        assert ("Mass", "1,900\u00a0lb") in exhibit.still_parts().inputs
        assert "1,900\u00a0lb, Hp\u00a08,000\u00a0ft" in exhibit._caption.value


@pytest.mark.slow
def test_moving_makes_no_new_models(live, control, from_browser, models_open):
    exhibits = [DiscMap(live), Flapping(live), StallBoundary(live)]
    from_browser(control("ias").slider, 61.0)
    before = models_open()
    for step in range(60):
        from_browser(control("ias").slider, 50.0 + step / 3.0)
    assert models_open() == before
    assert all(exhibit.fault == "" for exhibit in exhibits)


def test_closing_the_panel_frees_all_its_models_and_tells_its_exhibits(two_t, start, models_open):
    before = models_open()
    live = LiveCondition(two_t, start)
    disc = DiscMap(live)
    live.close()
    assert "closed" in disc.fault
    assert "Not current" in disc._state.value
    disc.close()
    assert models_open() == before
