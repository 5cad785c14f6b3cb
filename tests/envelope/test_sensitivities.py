"""Rules of thumb hold where they say they hold; tables of a whole operation are the single answers."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from briefkit import units
from briefkit.aircraft.model import Stated
from briefkit.envelope.condition import Condition
from briefkit.envelope.equivalent import equivalent_vne
from briefkit.envelope.overview import masses_by_hour, set_by_table
from briefkit.envelope.sensitivities import rules_of_thumb
from briefkit.errors import BeyondChart

PLANNED = Condition(mass="1,800 lb", pressure_altitude="7,000 ft", oat="20 degC", bank="30 deg")
FIELDS = {
    "pressure altitude": ("pressure_altitude", "height", 1000.0),
    "temperature": ("oat", "temperature", 10.0),
    "mass": ("mass", "mass", 100.0),
    "rotor speed": ("rotor_speed", "ratio", -1.0),
}


@pytest.fixture(scope="module")
def rules(two_t):
    return rules_of_thumb(two_t, PLANNED)


def test_four_rules_with_their_signs(rules):
    assert [rule.quantity for rule in rules] == list(FIELDS)
    assert all(rule.change < 0.0 for rule in rules)  # higher, hotter, heavier, slower rotor
    assert [rule.step for rule in rules] == ["+1,000 ft", "+10 °C", "+100 lb", "−1 %"]


@pytest.mark.slow
def test_each_rule_holds_within_a_knot_over_its_range(two_t, rules):
    at = equivalent_vne(two_t, PLANNED).ias
    for rule in rules:
        field, quantity, step = FIELDS[rule.quantity]
        start = units.from_si(getattr(PLANNED, field), quantity, rule.unit)
        assert rule.low < start < rule.high
        for share in (0.0, 0.25, 0.5, 0.75, 1.0):
            value = rule.low + share * (rule.high - rule.low)
            one = PLANNED.changed(**{field: units.to_si(value, quantity, rule.unit)})
            told = at + rule.change * (value - start) / step
            assert equivalent_vne(two_t, one).ias == pytest.approx(told, abs=1.15)


def test_no_rules_where_there_is_no_answer(two_t):
    with pytest.raises(BeyondChart):
        rules_of_thumb(two_t, PLANNED.with_(bank="45 deg"))


@pytest.mark.slow  # a climb asks the rotor model
def test_a_stated_climb_is_in_the_set_by_table(two_t, operation):
    fleet, area = operation.fleet["pelquill-2t"], operation.work_areas["harl"]
    climbing = replace(fleet, climb=Stated(500.0 * units.FOOT / 60.0, "500 ft/min", "OM-B"))
    level, climbed = (set_by_table(two_t, entry, (area,)) for entry in (fleet, climbing))
    heavy = [rows[0].answer.below_vne for rows in (level, climbed)]
    assert heavy[1] > heavy[0] + 1.0


@pytest.mark.slow
def test_set_by_table_is_the_single_answers(two_t, operation):
    fleet, area = operation.fleet["pelquill-2t"], operation.work_areas["vellmark"]
    rows = set_by_table(two_t, fleet, (area,))
    assert len(rows) == 2 * len(fleet.masses)
    for row in rows:
        one = Condition.si(
            mass=row.mass.value,
            pressure_altitude=area.high_altitude.value,
            oat=row.oat,
            load_factor=1.0 / math.cos(fleet.brief_bank.value),
        )
        if row.answer is None:
            with pytest.raises(BeyondChart):
                equivalent_vne(two_t, one)
            assert "beyond" in row.refusal
        else:
            assert row.answer == equivalent_vne(two_t, one)


def test_masses_along_a_leg():
    # 910 kg with 83 kg of fuel at 30 kg/h, 20 kg kept: 63 kg is 2.1 hours.
    assert masses_by_hour(910.0, 83.0, 30.0, 20.0) == ((0.0, 910.0), (1.0, 880.0), (2.0, 850.0), (2.1, 847.0))
    assert masses_by_hour(900.0, 60.0, 30.0) == ((0.0, 900.0), (1.0, 870.0), (2.0, 840.0))
    with pytest.raises(ValueError, match="burn"):
        masses_by_hour(900.0, 60.0, 0.0)
    with pytest.raises(ValueError, match="reserve"):
        masses_by_hour(900.0, 60.0, 30.0, 70.0)
