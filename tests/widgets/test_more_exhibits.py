"""The exhibits beside the three pictures: the manual's chart, what sets the answer, reductions, rules, cues."""

from __future__ import annotations

import dataclasses
import functools
import re

import html5lib
import numpy as np
import pytest

from briefkit import units
from briefkit.aircraft.chart import ReadingRule
from briefkit.envelope import cues
from briefkit.envelope.condition import Condition
from briefkit.envelope.equivalent import equivalent_vne
from briefkit.errors import BeyondChart, OutsideLimits, ReadingError, Reason
from briefkit.figures.still import still
from briefkit.widgets import live as live_module
from briefkit.widgets import rules_of_thumb as rules_module
from briefkit.widgets import stall_boundary as boundary_module
from briefkit.widgets.answers import Answers
from briefkit.widgets.cue_card import CueCard
from briefkit.widgets.equivalent_chart import EquivalentChart
from briefkit.widgets.reductions import Reductions
from briefkit.widgets.rules_of_thumb import RulesOfThumb
from briefkit.widgets.set_by import SetByTable
from briefkit.widgets.stall_boundary import StallBoundary

AT_A_CONDITION = [EquivalentChart, RulesOfThumb, CueCard]


@pytest.fixture
def shown():
    made = []

    def make(kind, *arguments):
        made.append(kind(*arguments))
        return made[-1]

    yield make
    for exhibit in made:
        exhibit.close()


@pytest.fixture
def vellmark(operation):
    return operation.work_areas["vellmark"]


@pytest.fixture
def fleet(operation, two_t):
    return operation.entry_for(two_t)


@pytest.mark.parametrize("kind", AT_A_CONDITION)
def test_each_has_what_a_page_needs_and_follows(shown, two_t, start, live, kind):
    for exhibit in (shown(kind, two_t, start), shown(kind, live)):
        parts = exhibit.still_parts()
        assert parts.title
        assert any(character.isdigit() for character in parts.alt)
        assert ("Mass", "1,800\u00a0lb") in parts.inputs
        html = still(exhibit)
        html5lib.HTMLParser(strict=True).parseFragment(html)
        assert html.count("<svg") == len(parts.drawings)
        assert "<table" in html
    live.change(mass="1,900 lb")
    assert ("Mass", "1,900\u00a0lb") in exhibit.still_parts().inputs


@pytest.mark.parametrize("kind", AT_A_CONDITION)
def test_fixed_ones_raise_what_is_refused_and_leave_no_models(two_t, start, kind):
    with pytest.raises(OutsideLimits, match="mass"):
        kind(two_t, start.with_(mass="2,100 lb"))
    with pytest.raises(TypeError, match="conditon"):
        kind(two_t, conditon=start)
    with pytest.raises(ReadingError, match="an aircraft alone"):
        kind(two_t)


# --- the manual's chart ---


def test_the_chart_states_the_worked_example(shown, two_t, start, plain):
    """1,800 lb at 8,000 ft, +20 C, 30 degrees, worked by hand on the invented chart: the heaviest mass, 2,006 lb, is as
    loaded at 9,480 ft, +20 C, where the chart gives 71.6 KIAS; 73.9 KIAS here, 5.1 below VNE (ISA pressure ratios)."""
    parts = shown(EquivalentChart, two_t, start.with_(bank="30 deg")).still_parts()
    caption = plain(parts.caption)
    assert "VNE here is 79 KIAS (flight manual 2-4 rev 4)" in caption
    assert re.search(r"level at 2,006 lb, Hp 9,4[78]\d ft, \+20 °C, where the chart gives 71\.6 KIAS", caption)
    assert "73 KIAS here, 6 kt below VNE" in caption
    assert [row[0] for row in parts.table.rows] == ["here", "there", "answer here"]
    assert parts.table.rows[2][-1] == "73 KIAS"


def test_the_marks_stand_where_the_table_says(shown, two_t, start):
    exhibit = shown(EquivalentChart, two_t, start.with_(bank="30 deg"))
    chart, answer = exhibit._chart, equivalent_vne(two_t, start.with_(bank="30 deg"))
    assert chart._here.x.tolist() == pytest.approx([8000.0])
    assert chart._here.y.tolist() == pytest.approx([79.0], abs=0.01)
    there = units.from_si(answer.chart_point.pressure_altitude, "height", "ft")
    assert chart._there.x.tolist() == pytest.approx([there])
    assert chart._there.y.tolist() == pytest.approx([answer.chart_point.vne])


def test_level_there_is_one_mark_and_the_manual_s_answer(shown, two_t, start):
    exhibit = shown(EquivalentChart, two_t, start)
    assert exhibit._chart._there.x.tolist() == []
    assert "Level at 100 % rotor speed that is the answer." in exhibit.still_parts().caption


def test_beyond_the_chart_says_why_and_no_bank_without_its_reduction(shown, two_t, start):
    exhibit = shown(EquivalentChart, two_t, start.with_(bank="60 deg"))
    caption = exhibit.still_parts().caption
    assert str(Reason.BEYOND_CHART) in caption
    assert not re.search(r"\d+ deg", caption)
    assert exhibit._chart._there.x.tolist() == []


def test_a_chart_over_mass_in_km_h(shown, three_f, plain):
    """The invented 3F: lines by mass, a turn at 2,100 kg; the answer is never above the manual's."""
    condition = Condition(mass="2,100 kg", pressure_altitude="2,000 m", oat="10 degC", bank="20 deg")
    parts = shown(EquivalentChart, three_f, condition).still_parts()
    answer = equivalent_vne(three_f, condition)
    assert answer.below_vne > 0.0
    assert answer.text in parts.caption
    assert "km/h" in plain(parts.caption)
    assert "kg" in parts.table.rows[1][1]


# --- rules of thumb ---


def test_a_rule_holds_within_a_knot_at_both_ends_of_its_range_and_not_far_beyond(shown, two_t, start):
    turn = start.with_(bank="30 deg")
    rules = {row[0]: row[1:] for row in shown(RulesOfThumb, two_t, turn).still_parts().table.rows}
    change, holds = rules["pressure altitude +1,000 ft"]
    slower = float(change.split()[0])
    low, high = (float(number.replace(",", "")) for number in re.findall(r"[\d,]+", holds))
    here = equivalent_vne(two_t, turn).ias
    for end in (low, high):
        there = equivalent_vne(two_t, turn.with_(pressure_altitude=f"{end:.0f} ft")).ias
        # The printed cost is rounded up by less than 0.1 for each step.
        assert there == pytest.approx(
            here - slower * (end - 8000.0) / 1000.0, abs=1.0 + 0.1 * abs(end - 8000.0) / 1000.0
        )
    try:
        beyond = equivalent_vne(two_t, turn.with_(pressure_altitude=f"{high + 600:.0f} ft")).ias
        assert abs(beyond - (here - slower * (high + 600.0 - 8000.0) / 1000.0)) > 1.0
    except BeyondChart:
        pass


def test_a_cost_is_never_understated(shown, two_t, start):
    turn = start.with_(bank="30 deg")
    rows = {row[0]: row[1] for row in shown(RulesOfThumb, two_t, turn).still_parts().table.rows}
    less = equivalent_vne(two_t, turn).ias - equivalent_vne(two_t, turn.with_(rotor_speed="99 %")).ias
    assert less > 1.0
    assert float(rows["rotor speed −1 %"].split()[0]) >= less - 0.15
    assert rows["rotor speed −1 %"].endswith("kt slower")


def test_rules_beyond_the_chart_are_refused_in_words_when_live(shown, live):
    rules = shown(RulesOfThumb, live)
    live.change(bank="60 deg")
    assert str(Reason.BEYOND_CHART) in rules.fault
    assert "Not current" in rules._state.value
    with pytest.raises(ReadingError, match="not current"):
        rules.still_parts()


# --- cues ---


def test_the_shake_is_blades_times_revolutions(shown, two_t, start):
    """452 rpm, two blades: 452/60 x 2 = 15.07 a second; at 97 % 14.6 (definition)."""
    assert "about 15.1 times a second, once a blade" in shown(CueCard, two_t, start).still_parts().caption
    slow = shown(CueCard, two_t, start.with_(rotor_speed="97 %")).still_parts()
    assert "about 14.6 times a second" in slow.caption


def test_left_and_right_change_places_for_a_clockwise_rotor(shown, two_t, four_h, start):
    """Handbook ch. 2: usually to the left with counterclockwise rotation; mirrored for the invented 4H (G23)."""
    condition = Condition(mass="3,000 kg", pressure_altitude="3,000 ft", oat="10 degC")
    ours, theirs = (still(shown(CueCard, *pair)) for pair in ((two_t, start), (four_h, condition)))
    assert "roll, usually left" in ours
    assert "usually right" not in ours
    assert "roll, usually right" in theirs
    assert "usually left" not in theirs
    assert "mirrored" in theirs
    assert "mirrored" not in ours


def test_the_recovery_is_the_handbook_s_with_its_caution_or_the_manual_s_alone(shown, two_t, start):
    """FAA-H-8083-21B ch. 11: usually reduce collective first; neither aft nor forward cyclic. Never merged (G24)."""
    import dataclasses

    note = shown(CueCard, two_t, start).still_parts().caption
    assert note.index("collective down") < note.index("roll level") < note.index("Do not pull aft or push forward")
    assert cues.CHAPTER_11 in note
    own = dataclasses.replace(two_t, recovery="Lower the lever, then level.", recovery_source="flight manual 3-9")
    note = shown(CueCard, own, start).still_parts().caption
    assert note.endswith("What to do: Lower the lever, then level. Source: flight manual 3-9.")
    assert "collective" not in note


def test_two_blades_carry_the_low_g_row(shown, two_t, four_h, start):
    """G25: every two-bladed type carries the caution."""
    condition = Condition(mass="3,000 kg", pressure_altitude="3,000 ft", oat="10 degC")
    names = [[row[0] for row in shown(CueCard, *pair).still_parts().table.rows] for pair in
             ((two_t, start), (four_h, condition))]  # fmt: skip
    assert "Low g" in names[0]
    assert "Low g" not in names[1]


def test_without_an_airspeed_the_card_still_stands(shown, two_t):
    condition = Condition(mass="1,800 lb", pressure_altitude="8,000 ft", oat="20 degC")
    parts = shown(CueCard, two_t, condition).still_parts()
    assert "What to do" in parts.caption
    assert parts.notes == ()  # the phase lag needs a solved rotor


# --- over an operation ---


def test_the_reductions_are_those_of_the_crew_s_page(shown, two_t, fleet, vellmark):
    rows = dict(shown(Reductions, two_t, fleet, vellmark).still_parts().table.rows)
    assert rows["1,800 lb"] == "10 kt or more"
    assert rows["2,006 lb"] == "at most 20°, and 10 kt or more"
    assert rows["1,700 lb"] == "VNE still limits"


def test_between_two_lines_the_heavier_holds_and_is_marked(shown, live, fleet, vellmark, plain):
    exhibit = shown(Reductions, live, fleet, vellmark)
    live.change(mass="1,820 lb")
    assert "At 1,820 lb the line for 1,900 lb holds: at most 25°, and 10 kt or more." in plain(exhibit._caption.value)
    marked = re.findall(r'<tr class="now"><th scope="row">([^<]*)', exhibit._grid.value)
    assert marked == ["1,900 lb"]
    live.change(mass="1,900 lb")
    assert re.findall(r'<tr class="now"><th scope="row">([^<]*)', exhibit._grid.value) == ["1,900 lb"]


def test_an_area_the_manual_forbids_is_raised(two_t, fleet, operation, models_open):
    from briefkit.errors import OutsideChart

    before = models_open()
    with pytest.raises(OutsideChart):
        Reductions(two_t, fleet, operation.work_areas["sundreth"])
    assert models_open() == before


@pytest.mark.slow
def test_what_sets_the_answer_where(shown, two_t, live, fleet, operation, plain):
    areas = [operation.work_areas[key] for key in ("vellmark", "sundreth")]
    parts = shown(SetByTable, two_t, fleet, areas).still_parts()
    text = [plain(" | ".join(row)) for row in parts.table.rows]
    assert any("1,700 lb" in row and "nothing | manual VNE" in row for row in text)
    assert any("1,800 lb" in row and "5 kt | manual VNE at the equivalent level flight" in row for row in text)
    assert any("hottest, +47 °C | 2,006 lb to 1,700 lb | no figure" in row for row in text)
    assert not any(re.search(r"up to \d+ deg of bank", row) for row in text)
    following = shown(SetByTable, live, fleet, areas)
    live.change(bank="30 deg")
    first = following.still_parts().table.rows[0]
    assert first[0] == "this condition"
    assert first[3] == "10 kt"  # 5.1 below, rounded up to the step
    with pytest.raises(ReadingError, match="no work area"):
        SetByTable(two_t, fleet, [])


@pytest.mark.slow
def test_five_hundred_moves_add_no_models(shown, live, fleet, vellmark, models_open, monkeypatch):
    """Twenty-five conditions twenty times over: each is solved once, and drawn by every exhibit each time."""
    monkeypatch.setattr(live_module, "Answers", functools.cache(Answers))
    for module, name in ((rules_module, "rules_of_thumb"), (boundary_module, "boundary")):
        monkeypatch.setattr(module, name, functools.cache(getattr(module, name)))
    exhibits = [shown(kind, live) for kind in (*AT_A_CONDITION, StallBoundary)]
    exhibits += [shown(SetByTable, live, fleet, [vellmark]), shown(Reductions, live, fleet, vellmark)]
    # Labels and lines that a first look at a condition adds are kept for the next.
    conditions = [live.condition.with_(mass=f"{1400 + 16 * i} lb", bank=f"{i} deg") for i in range(25)]
    for condition in conditions:
        live.condition = condition
    before = models_open()
    for step in range(500):
        live.condition = conditions[step % 25]
    assert models_open() == before
    assert [exhibit.fault for exhibit in exhibits] == [""] * 6


def test_under_next_lower_vne_the_chart_is_drawn_in_steps(shown, two_t, start):
    """The ring of a condition between two rows of a column lies on that column's line, as the manual is read."""
    lower = dataclasses.replace(two_t, vne=dataclasses.replace(two_t.vne, reading=ReadingRule.NEXT_LOWER))
    for aircraft, vne in ((two_t, 83.5), (lower, 79.0)):
        exhibit = shown(EquivalentChart, aircraft, start.with_(pressure_altitude="7,000 ft"))
        line = exhibit._chart.figure.marks[2]  # +20 degC
        assert exhibit._chart._here.y.tolist() == [vne]
        assert np.interp(7000.0, line.x, line.y) == pytest.approx(vne)


def test_a_chart_of_three_variables_draws_the_lines_of_its_mass(shown, live, models_open):
    """The lines are made anew where a move enters the chart at another mass, and the old ones are given back."""
    exhibit = shown(EquivalentChart, live)
    figure, before = exhibit._chart.figure, models_open()
    exhibit._columns = exhibit._columns + 1.0  # as if the lines drawn were another mass's
    live.change(mass="1,900 lb")
    assert exhibit._chart.figure is not figure
    assert figure.comm is None
    assert exhibit._chart.figure in exhibit._picture.children
    assert models_open() == before
