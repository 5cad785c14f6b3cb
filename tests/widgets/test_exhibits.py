"""The three exhibits: what they say, how they fail, what they leave behind."""

from __future__ import annotations

import dataclasses
import re
from xml.etree import ElementTree

import html5lib
import numpy as np
import pytest

from briefkit import units
from briefkit.aircraft.load import load_aircraft
from briefkit.envelope.condition import Condition
from briefkit.envelope.equivalent import equivalent_vne
from briefkit.envelope.solution import solve
from briefkit.errors import OutsideLimits, ReadingError, Reason
from briefkit.figures.still import still
from briefkit.widgets.disc import DiscMap
from briefkit.widgets.exhibit import Exhibit
from briefkit.widgets.flapping import Flapping
from briefkit.widgets.live import LiveCondition
from briefkit.widgets.stall_boundary import StallBoundary

KINDS = [DiscMap, Flapping, StallBoundary]


@pytest.fixture
def fixed(two_t, start):
    made = []

    def make(kind, condition=start, **settings):
        made.append(kind(two_t, condition, **settings))
        return made[-1]

    yield make
    for exhibit in made:
        exhibit.close()


@pytest.mark.parametrize("kind", KINDS)
def test_an_exhibit_has_everything_a_page_needs(fixed, kind):
    parts = fixed(kind).still_parts()
    assert parts.title
    assert any(character.isdigit() for character in parts.alt)
    assert ("Mass", "1,800\u00a0lb") in parts.inputs
    assert ("Airspeed", "60\u00a0KIAS") in parts.inputs
    assert len(parts.table.rows) >= 4
    html = still(fixed(kind))
    html5lib.HTMLParser(strict=True).parseFragment(html)
    assert html.count("<svg") == len(parts.drawings)


def test_the_disc_states_tip_speeds_by_their_definition(fixed, two_t, start):
    """Normal to the blade at the tip: tip speed times (1 + mu) on the advancing, (1 - mu) on the retreating side."""
    parts = fixed(DiscMap).still_parts()
    mu = solve(two_t, start).advance_ratio
    tip = units.from_si(two_t.rotor.tip_speed, "speed", "kt")
    rows = {row[0]: row for row in parts.table.rows}
    assert rows["advancing side"][-1] == f"{tip * (1 + mu):.0f} kt"
    assert rows["retreating side"][-1] == f"{tip * (1 - mu):.0f} kt"
    assert f"{tip * (1 - mu):.0f} kt (true)" in parts.caption
    assert f"Out to {100 * mu:.0f} % of the radius" in parts.caption


def test_the_flapping_states_the_solution_s_angles(fixed, two_t, start):
    solution = solve(two_t, start)
    parts = fixed(Flapping).still_parts()
    assert f"Coning {solution.b0_deg:.1f}°" in parts.caption
    assert f"tilted {-solution.b1c_deg:.1f}° back" in parts.caption
    rows = dict(parts.table.rows)
    assert rows["nose, 180°"] == f"{solution.b0_deg - solution.b1c_deg:.1f}°"
    assert "does not show which way a stalling rotor rolls" in " ".join(parts.notes)


def test_the_boundary_states_the_manual_s_vne_and_the_answer(fixed, two_t, start):
    turn = start.with_(bank="30 deg")
    answer = equivalent_vne(two_t, turn)
    caption = fixed(StallBoundary, turn).still_parts().caption
    assert "The manual's VNE here is 79 KIAS (flight manual 2-4 rev 4)." in caption
    assert f"{answer.text} here" in caption
    assert "6 kt below VNE" in caption  # 79 less 73.9 is 5.1: rounded up
    assert "2,006\u00a0lb, Hp\u00a09,48" in caption


def test_level_at_100_percent_the_answer_is_the_manual_s(fixed):
    assert "Level at 100 % rotor speed that is the answer." in fixed(StallBoundary).still_parts().caption


def test_beyond_the_chart_there_is_no_figure_and_the_reason_is_said(fixed, start):
    heavy = start.with_(mass="2,006 lb", bank="45 deg")
    exhibit = fixed(StallBoundary, heavy)
    caption = exhibit.still_parts().caption
    assert "there is no figure" in caption
    assert str(Reason.BEYOND_CHART) in caption
    assert not re.search(r"\bnan\b", still(exhibit), re.IGNORECASE)


def test_the_boundary_s_table_never_rounds_up(fixed, two_t, start):
    exhibit = fixed(StallBoundary, start.with_(bank="30 deg"))
    for row in exhibit.still_parts().table.rows:
        here = start.with_(pressure_altitude=f"{row[0]} ft", bank="30 deg")
        if row[2] == "beyond chart":
            continue
        assert int(row[2]) <= equivalent_vne(two_t, here).ias + 1e-9 < int(row[2]) + 1


def test_the_boundary_against_mass(fixed):
    parts = fixed(StallBoundary, against="mass").still_parts()
    assert parts.table.header[0] == "Mass, lb"
    assert [row[0] for row in parts.table.rows][-1] == "2,006"
    with pytest.raises(ValueError, match="torque"):
        fixed(StallBoundary, against="torque")


@pytest.mark.slow
@pytest.mark.parametrize(
    ("against", "first", "last", "unit"),
    [("rotor speed", "97", "102", "%"), ("bank", "0", "60", "°"), ("gust", "0", "2,000", "ft/min")],
)
def test_the_boundary_against_the_other_quantities(fixed, start, against, first, last, unit):
    parts = fixed(StallBoundary, start.with_(bank="20 deg"), against=against).still_parts()
    assert parts.table.header[0].endswith(f", {unit}")
    assert (parts.table.rows[0][0], parts.table.rows[-1][0]) == (first, last)
    assert ("gust" in parts.title) == (against == "gust")
    assert ("Equivalent VNE" in parts.table.header) == (against == "bank")


@pytest.mark.slow
@pytest.mark.parametrize("name", ["two_t", "three_f", "four_h"])
def test_no_words_of_the_boundary_overlap_or_leave_the_figure(request, name):
    """Every variable of every type: boxes of the words on the still, letters half an em wide."""
    aircraft = request.getfixturevalue(name)
    mass, oat = {
        "two_t": ("1,800 lb", "20 degC"),
        "three_f": ("2,200 kg", "10 degC"),
        "four_h": ("2,890 kg", "-5 degC"),
    }[name]
    for bank in ("0 deg", "30 deg") if name == "two_t" else ("30 deg",):
        condition = Condition(mass=mass, pressure_altitude="2,300 m", oat=oat, ias="85 kt", bank=bank)
        for against in ("pressure altitude", "mass", "rotor speed", "bank", "gust"):
            exhibit = StallBoundary(aircraft, condition, against=against)
            boxes = _boxes_of_words(still(exhibit))
            exhibit.close()
            assert all(left >= 0.0 and right <= 440.0 for left, right, _, _ in boxes)
            for i, one in enumerate(boxes):
                for other in boxes[i + 1 :]:
                    apart = one[0] >= other[1] or other[0] >= one[1] or one[2] >= other[3] or other[2] >= one[3]
                    assert apart, (against, bank, one, other)


def _boxes_of_words(html: str) -> list[tuple[float, float, float, float]]:
    """(left, right, top, bottom) of each word drawn, in the pixels of the figure."""
    boxes = []

    def walk(element, across, down):
        moved = re.match(r"translate\(([-\d.]+),([-\d.]+)\)", element.get("transform", ""))
        if moved:
            across, down = across + float(moved[1]), down + float(moved[2])
        if element.tag.endswith("text") and element.text:
            x, y = across + float(element.get("x", 0.0)), down + float(element.get("y", 0.0))
            wide = 6.5 * len(element.text)
            left = x - {"middle": 0.5, "end": 1.0}.get(element.get("text-anchor", "start"), 0.0) * wide
            boxes.append((left, left + wide, y - 6.0, y + 6.0))
        for child in element:
            walk(child, across, down)

    walk(ElementTree.fromstring(re.search(r"<svg.*?</svg>", html, re.DOTALL)[0]), 0.0, 0.0)
    return boxes


def test_the_boundary_says_where_its_lines_part_and_end_and_what_is_not_resolved(fixed, start):
    parts = fixed(StallBoundary, start.with_(bank="30 deg"), against="mass").still_parts()
    notes = " ".join(parts.notes).replace("\u00a0", " ")
    assert "30° bank: parts from the manual's VNE at 1,700 lb; the chart ends at" in notes
    assert "Airspeed is calibrated from 40 to 120 kt (flight manual 5-2 rev 4)" in notes
    assert "against VNE it is not resolved" in parts.caption
    assert parts.table.header[-1] == "First signs, 12°"
    assert {row[-1] for row in parts.table.rows} <= {"not resolved", "no figure"}
    drawing = fixed(StallBoundary, start, against="gust").still_parts()
    assert "covers a load factor of 1." in drawing.caption
    assert "no speed is given for a gust" in drawing.caption


@pytest.mark.slow  # another aircraft, so another onset table
def test_the_manuals_own_speed_in_a_turn_is_above_no_line(four_h):
    """The invented 4H: VNE less 10 above 30 degrees. Neither a line nor the answer lies above it (G1, page.md 3)."""
    turn = Condition(mass="2,890 kg", pressure_altitude="7,000 ft", oat="-5 degC", ias="90 kt", bank="33 deg")
    exhibit = StallBoundary(four_h, turn, against="bank")
    drawn = exhibit._kept[1]
    past = drawn.x > 30.00005
    assert drawn.vne[past].max() == pytest.approx(drawn.vne[0] - 10.0, abs=0.01)
    assert drawn.vne[~past].min() == drawn.vne[0]
    known = np.isfinite(drawn.equivalent[0].ias)
    assert (drawn.equivalent[0].ias <= drawn.vne)[known].all()
    caption = exhibit.still_parts().caption
    assert "With 33° bank the manual's own holds, 106 KIAS: VNE less 10 above 30 degrees" in caption
    exhibit.close()
    exhibit = StallBoundary(four_h, turn, banks=(30.0, 33.0))
    steep = exhibit._kept[1].equivalent
    exhibit.close()
    assert (steep[1].ias <= steep[0].ias + 1e-9)[np.isfinite(steep[1].ias)].all()


@pytest.mark.slow  # another aircraft, so another onset table
def test_banks_above_the_manual_s_limit_do_not_exist(two_t, start, fixed):
    """page.md 3: nothing computed above a manual bank limit exists anywhere."""
    limited = dataclasses.replace(
        two_t, limits=dataclasses.replace(two_t.limits, max_bank=dataclasses.replace(
            two_t.limits.max_mass, value=np.radians(20.0), text="20 deg")))  # fmt: skip
    exhibit = StallBoundary(limited, start)
    assert "30° bank" not in still(exhibit)
    exhibit.close()


# --- fixed and following ---


@pytest.mark.parametrize("kind", [DiscMap, Flapping])
def test_a_fixed_exhibit_raises_what_its_condition_refuses(two_t, start, kind):
    with pytest.raises(OutsideLimits, match="mass"):
        kind(two_t, start.with_(mass="2,100 lb"))
    without = Condition(mass="1,800 lb", pressure_altitude="8,000 ft", oat="20 degC")
    with pytest.raises(ReadingError, match="no airspeed"):
        kind(two_t, without)


def test_the_boundary_needs_no_airspeed(fixed):
    parts = fixed(StallBoundary, Condition(mass="1,800 lb", pressure_altitude="8,000 ft", oat="20 degC")).still_parts()
    assert "Airspeed" not in dict(parts.inputs)


@pytest.mark.parametrize("kind", KINDS)
def test_what_is_no_source_is_refused_with_words(two_t, start, live, kind):
    for arguments in ((two_t,), (live, start), ("2T", start)):
        with pytest.raises(ReadingError, match="an aircraft with a condition, or a LiveCondition"):
            kind(*arguments)
    with pytest.raises(TypeError, match="colour"):
        kind(two_t, start, colour="red")


class Breaks(Flapping):
    """Fails where it is told to, after having drawn once."""

    wrong: Exception | None = None

    def _draw(self, answers):
        if self.wrong:
            raise self.wrong
        return super()._draw(answers)


@pytest.mark.parametrize(
    ("error", "said"),
    [
        (OutsideLimits("airspeed", 90, "kt", "less", "rotor model", Reason.OUTSIDE_MODEL), "rotor model"),
        (ZeroDivisionError("by nought"), "fault in the program: ZeroDivisionError: by nought"),
    ],
)
def test_a_failed_update_greys_the_old_picture_and_says_so(live, control, from_browser, error, said):
    """Through the message path, where ipywidgets would swallow the error and leave the old picture as if current."""
    exhibit, other = Breaks(live), DiscMap(live)
    exhibit.wrong = error
    from_browser(control("mass").slider, 1700.0)
    assert said in exhibit.fault
    assert "Not current" in exhibit._state.value
    assert "1,800\u00a0lb" in exhibit._state.value  # what the grey picture is for
    assert "briefkit-old" in exhibit._picture._dom_classes
    assert other.fault == ""  # one failure stops no other exhibit
    with pytest.raises(ReadingError, match="not current"):
        still(exhibit)
    exhibit.wrong = None
    from_browser(control("mass").slider, 1750.0)
    assert exhibit.fault == ""
    assert "briefkit-old" not in exhibit._picture._dom_classes
    assert ("Mass", "1,750\u00a0lb") in exhibit.still_parts().inputs


def test_a_first_failure_is_shown_too(live):
    class Never(Breaks):
        wrong = ValueError("not today")

    exhibit = Never(live)
    assert "not today" in exhibit.fault
    with pytest.raises(ReadingError, match="not current"):
        exhibit.still_parts()


def test_an_exhibit_that_left_is_not_redrawn(live):
    exhibit = DiscMap(live)
    exhibit.close()
    live.change(mass="1,700 lb")
    assert ("Mass", "1,800\u00a0lb") in exhibit.still_parts().inputs


@pytest.mark.parametrize("kind", KINDS)
def test_closing_frees_every_model(two_t, start, kind, models_open):
    before = models_open()
    exhibit = kind(two_t, start)
    assert models_open() > before + 10
    exhibit.close()
    assert models_open() == before


def test_an_airspeed_move_does_not_compute_the_boundary_again(live, control, from_browser, monkeypatch):
    from briefkit.widgets import stall_boundary as module

    exhibit = StallBoundary(live)
    calls = []
    real = module.boundary
    monkeypatch.setattr(module, "boundary", lambda *a: calls.append(a) or real(*a))
    from_browser(control("ias").slider, 65.0)
    from_browser(control("pressure_altitude").slider, 7000.0)
    assert calls == []
    assert ("Pressure altitude", "7,000\u00a0ft") in exhibit.still_parts().inputs
    from_browser(control("mass").slider, 1700.0)
    assert len(calls) == 1


def test_kept_curves_are_those_of_a_fresh_exhibit(live, control, from_browser, fixed):
    moving = StallBoundary(live)
    from_browser(control("pressure_altitude").slider, 7000.0)
    from_browser(control("ias").slider, 65.0)
    fresh = fixed(StallBoundary, live.condition)
    assert moving.still_parts().table == fresh.still_parts().table
    assert moving.still_parts().caption == fresh.still_parts().caption


def test_the_base_class_draws_nothing_of_its_own(two_t, start):
    with pytest.raises(NotImplementedError):
        Exhibit(two_t, start)


@pytest.mark.slow
def test_a_chart_over_density_altitude_has_its_panel_and_its_boundary(two_t, start):
    """The rows are density altitudes: the slider still shows pressure altitude, from below sea level."""
    chart = dataclasses.replace(
        two_t.vne, temperatures=(), speeds=two_t.vne.speeds[:, 2:3], density_altitude=True, printed=None, typed=()
    )
    cool = start.with_(pressure_altitude="3,000 ft", oat="10 degC")
    live = LiveCondition(dataclasses.replace(two_t, vne=chart), cool)
    slider = next(control.slider for control in live._controls if control.dial.field == "pressure_altitude")
    assert slider.min < 0.0
    assert slider.max == pytest.approx(10_000.0)
    boundary = StallBoundary(live)
    assert boundary.fault == ""
    assert ("Pressure altitude", "3,000\u00a0ft") in boundary.still_parts().inputs
    boundary.close()
    live.close()


@pytest.mark.slow
@pytest.mark.parametrize("name", ["ormbrae-3f", "kvillarn-4h"])
def test_the_other_invented_types_have_every_exhibit_in_their_own_units(examples, name):
    aircraft = load_aircraft(examples / "aircraft" / f"{name}.toml")
    metric = aircraft.units.speed == "km/h"
    condition = Condition(
        mass="2,000 kg" if metric else "3,000 kg",
        pressure_altitude="2,000 m",
        oat="10 degC",
        ias="90 kt",
        bank="20 deg",
    )
    live = LiveCondition(aircraft, condition)
    for kind in KINDS:
        exhibit = kind(live)
        assert exhibit.fault == ""
        html = still(exhibit)
        assert ("km/h" in html) == metric
        assert ("KIAS" in html) != metric
        exhibit.close()
    live.close()
