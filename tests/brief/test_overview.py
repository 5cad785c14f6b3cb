"""What sets the answer where, and the line of section 2 along a leg, as the analysis page prints them."""

from __future__ import annotations

import re
from dataclasses import replace

import pytest

from briefkit import units
from briefkit.brief.front import row_text
from briefkit.brief.overview import leg_points, leg_sections, set_by_section
from briefkit.envelope.overview import set_by_table
from briefkit.envelope.reductions import reductions
from briefkit.units import POUND


@pytest.fixture(scope="module")
def fleet(operation):
    return operation.fleet["pelquill-2t"]


@pytest.fixture(scope="module")
def table(two_t, operation, fleet):
    return reductions(two_t, fleet, operation.work_areas["vellmark"])


@pytest.fixture(scope="module")
def section(two_t, operation, fleet, table):
    (found,) = leg_sections(two_t, fleet, operation.work_areas["vellmark"], table, operation.legs)
    return found


def test_masses_by_hour_with_the_line_that_holds(two_t, table, section):
    """By hand: 66 lb/h less 6.6 is 59.4 lb/h, 1,946.6 after an hour, 1,900 after 106 / 59.4 = 1.785 h; the reserve is
    reached at 66 lb/h, after 150 / 66 = 2.273 h."""
    rows = [row[:3] for row in section.grid.rows]
    assert [tuple(cell.replace("\u00a0", " ") for cell in row) for row in rows] == [
        ("take-off", "2,006 lb", "2,006 lb"),
        ("1 h", "1,947 lb", "2,006 lb"),
        ("1 h 48 min", "1,900 lb", "1,900 lb"),
        ("2 h", "1,888 lb", "1,900 lb"),
        ("2 h 17 min", "1,871 lb", "1,900 lb"),
    ]
    said = {row.mass.text: row_text(two_t, table, row) for row in table.rows}
    assert all(row[3] == said[row[2]] for row in section.grid.rows)
    assert "66 lb/h, give or take 7\u00a0lb an hour (flight manual 5-10 rev 4)" in section.before[0]


def test_never_a_lighter_line_than_the_mass_the_aircraft_can_have(operation, table):
    leg = replace(operation.legs[0], fuel=replace(operation.legs[0].fuel, value=600 * POUND))
    for hour, mass in leg_points(table, leg):
        slowest = leg.take_off_mass.value - 3600.0 * (leg.burn.value - leg.burn.spread) * hour
        assert mass == pytest.approx(slowest)
        assert mass > leg.take_off_mass.value - 3600.0 * leg.burn.value * hour - 1e-9


def test_a_leg_of_another_aircraft_or_area_is_not_on_this_page(two_t, operation, fleet, table):
    assert leg_sections(two_t, fleet, operation.work_areas["harl"], table, operation.legs) == ()


def test_where_nothing_is_taken_off_a_leg_says_so(two_t, operation, fleet, table):
    limits = replace(table, rows=(table.rows[-1],))
    (said,) = leg_sections(two_t, fleet, operation.work_areas["vellmark"], limits, operation.legs)
    assert said.grid is None
    assert said.before[0].endswith("Nothing is taken off at any of its masses: VNE still limits.")


def test_what_sets_the_answer_where(two_t, operation, fleet, table):
    areas = tuple(operation.work_areas.values())
    section = set_by_section(two_t, fleet, areas, operation.work_areas["vellmark"], table)
    assert section.grid.header == ("Where", *(mass.text for mass in fleet.masses))
    shown = {row[0]: row[1:] for row in section.grid.rows}
    for one in set_by_table(two_t, fleet, areas):
        day = f"{one.oat - units.ZERO_CELSIUS:+.0f}".replace("-", "\u2212")
        where = f"{one.area}, {day} °C"
        if where not in shown:  # the whole line without a figure: said below the table, with the reason
            said = re.compile(rf"No figure, .*{re.escape(one.area)} at [^;:]*{re.escape(day)} °C")
            assert any(said.match(point) for point in section.points), where
            assert one.answer is None
            continue
        cell = shown[where][[mass.text for mass in fleet.masses].index(one.mass.text)]
        if one.answer is None:
            assert cell == "beyond"
        elif one.answer.below_vne == 0.0:
            assert cell == "VNE"
        else:
            assert float(cell) >= one.answer.below_vne
            assert float(cell) % 5.0 == 0.0
    assert any("Sundreth Flats at +47 °C: outside air temperature 47 °C" in point for point in section.points)
    assert not any("-" in point.replace("2-4", "") for point in section.points)  # true minus signs


def test_the_line_of_section_2_stands_above_its_points(two_t, operation, fleet, table):
    """A point may need less than its block: 1,800 lb, 5 kt at the top of the area, 10 on a day between (page.md 1)."""
    section = set_by_section(two_t, fleet, operation.work_areas.values(), operation.work_areas["vellmark"], table)
    assert section.grid.rows[0] == (
        "Vellmark work area, all of it: section 2", "beyond", "beyond", "10", "5", "VNE",
    )  # fmt: skip
    points = [row for row in section.grid.rows[1:] if row[0].startswith("Vellmark work area")]
    assert [row[3] for row in points] == ["5", "5"]


def test_areas_without_a_figure_leave_only_the_line_of_section_2(two_t, operation, fleet, table):
    winter = operation.work_areas["ysbrane_winter"]
    section = set_by_section(two_t, fleet, (winter,), operation.work_areas["vellmark"], table)
    assert len(section.grid.rows) == 1
    assert len(section.points) == 2
