"""Legs of the operation file: read in SI with their burn; what the aircraft's manual forbids of them is a fault."""

from __future__ import annotations

from pathlib import Path

import pytest

from briefkit.aircraft.operation import Operation, load_operation
from briefkit.aircraft.operation_check import cross_check
from briefkit.units import POUND


def test_the_invented_legs_are_read_as_typed(operation: Operation) -> None:
    leg = operation.legs[0]
    assert (leg.name, leg.fleet, leg.work_area) == ("Vellmark survey, full tanks", "pelquill-2t", "vellmark")
    assert (leg.take_off_mass.text, leg.fuel.text, leg.reserve.text) == ("2,006 lb", "183 lb", "33 lb")
    assert leg.burn is operation.fleet["pelquill-2t"].fuel_burn
    assert (leg.burn.text, leg.burn.source) == ("66 lb/h", "flight manual 5-10 rev 4")
    assert leg.burn.value == pytest.approx(66.0 * POUND / 3600.0)
    assert leg.burn.spread == pytest.approx(6.6 * POUND / 3600.0)
    assert ("legs (entry 1)", "OM-C 5.1 rev 9") in operation.sources


def test_an_operation_without_legs_has_none(examples: Path, tmp_path: Path) -> None:
    text = (examples / "operation.toml").read_text(encoding="utf-8")
    (tmp_path / "operation.toml").write_text(text[: text.index("[[legs]]")], encoding="utf-8")
    assert load_operation(tmp_path).legs == ()


def test_a_leg_may_not_end_lighter_than_the_manual_permits(examples: Path, tmp_path: Path, two_t) -> None:
    text = (examples / "operation.toml").read_text(encoding="utf-8")
    assert cross_check(load_operation(examples), two_t, ["vellmark"]) == []
    (tmp_path / "operation.toml").write_text(text.replace('fuel = "183 lb"', 'fuel = "720 lb"'), encoding="utf-8")
    (fault,) = cross_check(load_operation(tmp_path), two_t, ["vellmark"])
    assert (fault.key, fault.read) == ("legs (entry 1).fuel", "720 lb of 2,006 lb")
    assert "1,301 lb or more (pelquill-2t.toml" in fault.permitted
