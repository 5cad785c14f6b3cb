"""Three briefs, each with something else that sets the page: blade stall, the load's speed, the advancing tip.

What each must say is the trade's own order of things, as the issue states it; numbers of the invented manuals stand as
typed.
"""

from __future__ import annotations

import re
from dataclasses import replace

import pytest

from briefkit import units
from briefkit.brief.crew_page import crew_page
from briefkit.brief.deciding import ruled_turn, ruling_speed, tip_first
from briefkit.brief.identity import Brief, load_brief
from briefkit.brief.pages import CrewPage, Section


@pytest.fixture(scope="module")
def load(examples) -> Brief:
    return load_brief(examples / "corrant-3f")


@pytest.fixture(scope="module")
def cold(examples) -> Brief:
    return load_brief(examples / "ysbrane-4h")


def area_of(brief: Brief):
    return brief.operation.work_areas[brief.identity.work_area]


def said(part: Section) -> str:
    return " ".join((part.heading, *part.before, *part.after))


def front_of(page: CrewPage) -> str:
    cells = " ".join(cell for part in page.front if part.grid for row in part.grid.rows for cell in row)
    beside = " ".join(note for part in page.front if part.grid for note in part.grid.beside)
    return " ".join((*(said(part) for part in page.front), cells, beside))


@pytest.mark.slow
def test_with_a_load_the_supplement_s_speed_is_the_only_one_on_the_sheet(load):
    page = crew_page(load, "0")
    text = front_of(page)
    assert (
        page.front[1].before[0] == "With the load: 150 km/h IAS (load supplement p. 3 rev 1). Blade stall is not near."
    )
    assert set(re.findall(r"\d+ km/h", text)) == {"150 km/h", "25 km/h"}  # 25: power off, "VNE power on less 25 km/h"
    assert page.front[0].grid.rows == (("all here", "150"),)


def test_a_load_speed_above_the_chart_somewhere_does_not_rule(load):
    """Then the manual's own chart is on the page, as far as it is below."""
    fleet, area = load.operation.entry_for(load.aircraft), area_of(load)
    faster = replace(load.aircraft, vne=replace(load.aircraft.vne, cap=units.to_si(190.0, "speed", "km/h")))
    assert ruling_speed(faster, fleet, area) is None
    assert ruling_speed(replace(load.aircraft, basic_vne=None), fleet, area) is None


@pytest.mark.slow
def test_stall_is_not_called_far_where_the_basic_chart_leaves_little_room(load):
    """170 km/h is under the chart everywhere, but the chart gives 172 in the turn: 20 km/h of room are asked for."""
    fleet, area = load.operation.entry_for(load.aircraft), area_of(load)
    chart = replace(load.aircraft.vne, cap=units.to_si(170.0, "speed", "km/h"), cap_text="170 km/h")
    ruling = ruling_speed(replace(load.aircraft, vne=chart), fleet, area)
    assert ruling is not None
    assert ruling.stall_near
    sentence = ruled_turn(ruling, load.aircraft, "20°")
    assert "not near" not in sentence
    assert sentence.endswith("blade stall asks for nothing below it.")


def test_in_the_cold_the_advancing_tip_comes_first_and_nothing_is_taken_off(cold):
    page = crew_page(cold, "0")
    turn = said(page.front[1])
    assert "Cold: the advancing tip comes first. A faster rotor brings it nearer." in turn
    assert "blade stall asks for nothing below VNE here. VNE still limits. The manual says why" in turn
    assert "expect roughness" in turn
    assert page.front[1].grid is None


def test_an_area_both_cold_and_warm_says_where_the_cold_begins(cold):
    area = cold.operation.work_areas["ysbrane"]
    assert tip_first(cold.aircraft, area).startswith("Colder than −20 °C: the advancing tip comes first.")


def test_no_cold_sentence_where_the_chart_does_not_fall_towards_the_cold(cold, load, two_t, operation):
    area = area_of(cold)
    warm = replace(area, low_temperature=replace(area.low_temperature, value=units.ZERO_CELSIUS - 20.0))
    warm = replace(warm, high_temperature=replace(area.high_temperature, value=units.ZERO_CELSIUS))
    assert tip_first(cold.aircraft, warm) == ""
    assert tip_first(two_t, operation.work_areas["vellmark"]) == ""
    assert tip_first(load.aircraft, area_of(load)) == ""  # a chart without temperatures says nothing of the cold


@pytest.mark.slow
def test_nothing_computed_is_drawn_or_listed_where_nothing_is_taken_off(cold, load):
    for brief in (cold, load):
        page = crew_page(brief, "0")
        assert not any(part.heading == "The reduction as a picture" for part in page.analysis)
        (rows,) = (part for part in page.analysis if part.heading.startswith("The equivalent level flight of each"))
        assert rows.grid is None
        assert rows.before[0].startswith("Nothing is taken off at ")
