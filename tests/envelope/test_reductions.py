"""The reduction table of the demo work area, row by row, and what its rows may never say."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from briefkit import units
from briefkit.aircraft.model import Stated
from briefkit.envelope.condition import Conditions
from briefkit.envelope.days import block_of
from briefkit.envelope.equivalent import equivalent_vnes
from briefkit.envelope.reductions import RowKind, reductions
from briefkit.errors import Reason, Refusal


@pytest.fixture(scope="module")
def fleet(operation):
    return operation.fleet["pelquill-2t"]


@pytest.fixture(scope="module")
def area(operation):
    return operation.work_areas["vellmark"]


@pytest.fixture(scope="module")
def table(two_t, fleet, area):
    return reductions(two_t, fleet, area)


def test_rows_of_the_demo_work_area(table):
    # The rows a separate trial of the same definition gave for this block.
    said = [(row.mass.text, row.kind, row.bank_deg, row.reduction) for row in table.rows]
    assert said == [
        ("2,006 lb", RowKind.COVERED, 20, 10.0),
        ("1,900 lb", RowKind.COVERED, 25, 10.0),
        ("1,800 lb", RowKind.REDUCTION, 30, 10.0),
        ("1,750 lb", RowKind.REDUCTION, 30, 5.0),
        ("1,700 lb", RowKind.VNE_LIMITS, 30, 0.0),
    ]


def test_each_row_covers_every_point_of_its_block(two_t, area, table):
    """Random points inside the area, off the block's own grid, never need more than the row prints."""
    rng = np.random.default_rng(20304)
    for row in table.rows:
        many = Conditions.si(
            mass=row.mass.value,
            pressure_altitude=rng.uniform(area.low_altitude.value, area.high_altitude.value, 400),
            oat=rng.uniform(area.low_temperature.value, area.high_temperature.value, 400),
            load_factor=1.0 / math.cos(math.radians(row.bank_deg)),
        )
        answers = equivalent_vnes(two_t, many)
        assert (answers.reason == Reason.NONE).all()
        assert answers.below_vne.max() <= row.exact + 0.06
        assert answers.below_vne.max() <= row.reduction + 0.005


def test_the_block_has_corners_chart_entries_and_steps(two_t, area):
    block = block_of(two_t, area)
    assert block.heights[0] == area.low_altitude.value
    assert block.heights[-1] == area.high_altitude.value
    assert max(np.diff(block.heights)) <= 250 * units.FOOT + 1e-9
    assert any(abs(oat - (units.ZERO_CELSIUS + 20.0)) < 1e-9 for oat in block.temperatures)
    assert max(np.diff(block.temperatures)) <= 2.0 + 1e-9


def test_reduction_is_rounded_up_and_never_down(table):
    for row in table.rows:
        assert row.reduction >= row.exact
        assert row.reduction % 5.0 == 0.0


def test_floor_is_the_highest_of_the_four(two_t, fleet, area, table):
    assert (table.floor.text, table.floor.reason) == ("54 kt", "climb speed")
    company = Stated(units.read("60 kt", "speed"), "60 kt", "OM-B 2.3")
    raised = reductions(two_t, replace(fleet, minimum_manoeuvring_speed=company), area)
    assert (raised.floor.text, raised.floor.reason) == ("60 kt", "company minimum manoeuvring speed")


def test_under_the_floor_no_turn(two_t, fleet, area):
    company = Stated(units.read("95 kt", "speed"), "95 kt", "OM-B 2.3")
    rows = reductions(two_t, replace(fleet, minimum_manoeuvring_speed=company), area).rows
    assert {row.kind for row in rows} == {RowKind.UNDER_FLOOR}
    assert all(row.answer is None for row in rows)


def test_steep_briefs_hold_to_the_covered_bank(two_t, fleet, area):
    steep = replace(fleet, brief_bank=Stated(math.radians(45.0), "45 deg", "OM-B"))
    for row in reductions(two_t, steep, area).rows:
        assert row.kind is RowKind.COVERED
        assert row.bank_deg % 5 == 0
        assert row.bank_deg < 45


def test_a_block_beyond_the_manual_is_refused(two_t, fleet, area):
    hot = replace(area, high_temperature=Stated(units.ZERO_CELSIUS + 39.0, "39 degC", "OM-C"))
    with pytest.raises(Refusal, match="outside air temperature"):
        reductions(two_t, fleet, hot)
