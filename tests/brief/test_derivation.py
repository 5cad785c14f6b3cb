"""What the analysis page says of the method's upper edge, of loads, and of the chart itself."""

from __future__ import annotations

import math
import re
from dataclasses import replace

import numpy as np
import pytest

from briefkit import units
from briefkit.aircraft.model import Stated
from briefkit.brief.derivation import chart_section, covered_line, plain_line, rows_section, shape_line, worked_row
from briefkit.envelope.condition import Conditions
from briefkit.envelope.equivalent import equivalent_vne, equivalent_vnes
from briefkit.envelope.reductions import reductions
from briefkit.errors import Reason


@pytest.fixture(scope="module")
def table(two_t, operation):
    return reductions(two_t, operation.fleet["pelquill-2t"], operation.work_areas["vellmark"])


def plain(text: str) -> str:
    return text.replace("\u00a0", " ")


def test_the_upper_edge_is_the_reading_without_the_guard(two_t, table):
    """By hand at 8,000 ft, +20 C, 30 degrees: 1,800 lb counts as 2,079 lb; 2,006 lb is as loaded at 2,006 / 2,079 of
    the pressure, 72,640 Pa or 8,926 ft. The chart at +20 C: 79 - 10 x 926 / 2,000 = 74.4 KIAS, 74.9 KCAS, there 89.2 kt
    true (density 0.7046 of standard); here (0.7301) 76.2 KCAS, which is 75.8 KIAS.
    """
    row = worked_row(table)
    said = plain_line(two_t, row)
    assert re.search(r"1\.155 as it is, the chart would give 75\.9 KIAS there, 2 kt more: the upper edge", said)
    assert row.answer.upper == pytest.approx(75.8, abs=0.1)
    with pytest.raises(ValueError, match="only a row with an answer"):
        plain_line(two_t, replace(row, answer=None))


def test_the_covered_load_factor_holds_all_over_the_area_and_no_more_does(two_t, table):
    height, oat = (axis.ravel() for axis in np.meshgrid(table.block.heights, table.block.temperatures))
    for row in table.rows:
        for load, covered in ((row.covered_load, True), (row.covered_load + 0.015, False)):
            many = Conditions.si(mass=row.mass.value, pressure_altitude=height, oat=oat, load_factor=load)
            reasons = equivalent_vnes(two_t, many, upper=False).reason
            assert (not np.any(reasons == Reason.BEYOND_CHART)) is covered, (row.mass.text, load)
    (said,) = covered_line(two_t, table)
    assert "1.06 at 2,006 lb, 1.12 at 1,900 lb" in said
    assert not re.search(r"\d ?(?:kt|KIAS|km/h)", said)  # a load, never a speed
    assert rows_section(two_t, table).after[-1] == said


def test_where_not_even_level_flight_is_covered_no_load_is_said(two_t, table):
    none = replace(table, rows=tuple(replace(row, covered_load=0.0) for row in table.rows))
    assert covered_line(two_t, none) == ()


def test_a_bank_limit_that_ends_what_is_covered_is_named(two_t, table):
    limited = replace(two_t, limits=replace(two_t.limits, max_bank=Stated(math.radians(30.0), "30 deg", "p. 3")))
    ended = replace(table, rows=(replace(table.rows[0], covered_load=1.15),))
    assert "Never above 1.15: the manual’s bank limit, 30 deg (p. 3)." in covered_line(limited, ended)[0]
    assert "bank limit" not in covered_line(limited, table)[0]
    assert "bank limit" not in covered_line(two_t, ended)[0]


def test_what_the_chart_says_of_itself(two_t, four_h):
    """Counted in the invented manuals: the 2T's chart prints 112 in six cells of 24; the 4H's coldest column is capped
    by tip Mach number at 129 in three cells of 25 and is answered for in its file.
    """
    assert plain(shape_line(two_t)).startswith("Its 24 cells: 6 flat at the highest value, 112 kt, set by something")
    assert "18 falling with loading" in shape_line(two_t)
    assert re.search(r"on one curve within 1\.\d kt\.$", plain(shape_line(two_t)))
    assert "3 on a cold edge, where the advancing tip sets it" in shape_line(four_h)
    assert "2 of these lie more than 2 kt off the curve of the others" in plain(shape_line(four_h))
    flat = replace(two_t, vne=replace(two_t.vne, speeds=np.full_like(two_t.vne.speeds, 100.0 * units.KNOT)))
    assert shape_line(flat).endswith("Too few fall to tell whether they lie on one curve.")
    assert chart_section(two_t).after[1] == shape_line(two_t)


def test_the_upper_edge_is_never_above_vne(two_t, table):
    row = worked_row(table)
    assert row.answer.ias <= row.answer.upper <= equivalent_vne(two_t, row.at.changed(load_factor=1.0)).ias
