"""Both figures of a case: the manual's as the manual has it, the computed one by hand and against the engine."""

from __future__ import annotations

import math
from dataclasses import replace

import ambiance
import numpy as np
import pytest

from briefkit import units
from briefkit.envelope.condition import Condition
from briefkit.envelope.equivalent import covered_bank, equivalent_vne
from briefkit.errors import BeyondChart, Refusal
from briefkit.session.answers import Says, answers


def ask(aircraft, operation, **text):
    fleet = operation.entry_for(aircraft)
    assert fleet is not None
    return answers(aircraft, fleet, Condition(**text))


def pressure(feet: float) -> float:
    """Pressure of the standard atmosphere, by another package (ambiance, ISO 2533), geopotential height."""
    return float(ambiance.Atmosphere(ambiance.Atmosphere.geop2geom_height(np.array([feet * 0.3048])[0])).pressure[0])


def mach_number(calibrated_kt: float, static: float) -> float:
    """Calibrated airspeed to Mach number by the pitot equation for air, ratio of specific heats 1.4 (NACA TR 837)."""
    impact = 101325.0 * ((1.0 + 0.2 * (calibrated_kt * 1852 / 3600 / 340.294) ** 2) ** 3.5 - 1.0)
    return math.sqrt(5.0 * ((impact / static + 1.0) ** (1 / 3.5) - 1.0))


def calibrated_kt(mach: float, static: float) -> float:
    impact = static * ((1.0 + 0.2 * mach**2) ** 3.5 - 1.0)
    return math.sqrt(5.0 * ((impact / 101325.0 + 1.0) ** (1 / 3.5) - 1.0)) * 340.294 * 3600 / 1852


@pytest.mark.slow
def test_a_turn_by_hand(two_t, operation):
    """1,800 lb, 8,000 ft, +20 °C, 30°: with a pencil, the typed chart, and an atmosphere that is not ours."""
    load = 1.0 / math.cos(math.radians(30.0))
    counts = 1800.0 * load**1.15
    heights = np.arange(8000.0, 10001.0, 5.0)
    loaded = [
        2006.0 / pressure(height) >= counts / pressure(8000.0) for height in heights
    ]  # one temperature: p for rho
    height = heights[int(np.argmax(loaded))]
    there = 79.0 + (height - 8000.0) / 2000.0 * (69.0 - 79.0)  # the +20 column, interpolated as the manual says
    mach = mach_number(62.0 + (there - 60.0) * 18.0 / 20.0, pressure(height))  # the calibration table's row 60 to 80
    here = 60.0 + (calibrated_kt(mach, pressure(8000.0)) - 62.0) * 20.0 / 18.0
    said = ask(two_t, operation, mass="1,800 lb", pressure_altitude="8,000 ft", oat="+20 degC", bank="30 deg")
    assert said.manual.text == "79 KIAS"
    assert said.computed.says is Says.REDUCTION
    assert said.computed.exact == pytest.approx(79.0 - here, abs=0.04)  # 5 ft of height is 0.025 kt of chart
    assert said.computed.reduction == 10.0
    assert said.computed.text == "Slow to VNE less 10 kt or more before the turn."
    for digits in (
        f"{math.ceil(counts):,} lb",
        f"{round(height, -1):,.0f} ft",
        f"{there:.1f} KIAS",
        f"{here:.1f} KIAS",
    ):
        assert digits in said.computed.how.replace("\u00a0", " ")


def test_the_manual_s_figure_is_a_cell_as_typed_and_else_rounded_down(two_t, operation):
    cell = ask(two_t, operation, mass="2,006 lb", pressure_altitude="6,000 ft", oat="0 degC", bank="20 deg").manual
    assert (cell.text, cell.vne) == ("96 KIAS", 96.0)  # the chart's row 6,000, column 0
    assert cell.where == "flight manual 2-4 rev 4: Hp 6,000\u00a0ft, 0 °C"
    between = ask(two_t, operation, mass="2,006 lb", pressure_altitude="8,000 ft", oat="30 degC").manual
    assert between.vne == 74.5  # halfway between 79 and 70
    assert between.text == "74 KIAS"
    assert between.where.endswith("+20 °C to +40 °C, interpolated")


def test_the_manual_s_figure_is_never_rounded_up(two_t, operation):
    said = ask(two_t, operation, mass="2,006 lb", pressure_altitude="8,000 ft", oat="25 degC").manual
    assert (said.text, said.vne) == ("76 KIAS", 76.75)  # a quarter of the way from 79 to 70


def test_a_covered_bank_under_ten_degrees_is_no_turn(two_t, operation):
    """page.md 2: "no turn briefed at this mass"; the chart's top is 10,000 ft."""
    day = {"mass": "2,006 lb", "pressure_altitude": "9,800 ft", "oat": "+20 degC", "bank": "30 deg"}
    said = ask(two_t, operation, **day)
    assert 0.0 < covered_bank(two_t, Condition(**day)) < 10.0
    assert said.computed.says is Says.NO_TURN
    assert said.computed.text.endswith("no turn of 30° at this mass.")
    assert (said.computed.bank_deg, said.computed.reduction) == (None, None)
    assert said.manual.vne is not None


def test_the_manual_s_figure_knows_no_bank(four_h, operation):
    day = {"mass": "2,600 kg", "pressure_altitude": "3,000 ft", "oat": "0 degC"}
    level, turn = (ask(four_h, operation, **day, bank=bank).manual for bank in ("0 deg", "60 deg"))
    assert level == turn
    assert "Rough air: 100 KIAS (flight manual 2-7 rev 6)." in level.also


def test_level_at_full_rotor_speed_the_manual_decides(two_t, operation):
    said = ask(two_t, operation, mass="2,006 lb", pressure_altitude="8,000 ft", oat="30 degC").computed
    assert (said.says, said.reduction, said.exact, said.how) == (Says.MANUAL_VNE, 0.0, 0.0, "")


@pytest.mark.parametrize("seed", range(40))
def test_any_condition_has_an_answer_that_is_never_looser_than_the_engine(two_t, operation, seed):
    """G1, G5, G8: no exception, no number above the manual's VNE, every rounding to the safe side."""
    random = np.random.default_rng(seed)
    condition = Condition.si(
        mass=random.uniform(560.0, 930.0),
        pressure_altitude=random.uniform(-300.0, 3300.0),
        oat=random.uniform(245.0, 318.0),
        load_factor=random.uniform(1.0, 1.6),
        rotor_speed=random.uniform(0.96, 1.03),
    )
    fleet = operation.entry_for(two_t)
    assert fleet is not None
    said = answers(two_t, fleet, condition)
    computed = said.computed
    try:
        engine = equivalent_vne(two_t, condition)
    except BeyondChart:
        assert computed.says in (Says.COVERED_BANK, Says.NO_TURN, Says.REFUSED)
        if computed.says is Says.COVERED_BANK:
            assert computed.bank_deg is not None
            assert computed.bank_deg <= covered_bank(two_t, condition) < computed.bank_deg + 5
            at = condition.changed(load_factor=1.0 / math.cos(math.radians(computed.bank_deg)))
            assert computed.exact == equivalent_vne(two_t, at).below_vne
    except Refusal:
        assert computed.says is Says.REFUSED
        assert computed.reduction is None
        assert computed.bank_deg is None
    else:
        assert computed.says in (Says.REDUCTION, Says.MANUAL_VNE, Says.NO_TURN)
        assert computed.exact == pytest.approx(engine.below_vne, abs=1e-9)
        if computed.reduction is not None:
            assert computed.reduction >= engine.below_vne - 0.005
            assert computed.reduction % 5.0 == 0.0
    if computed.reduction is not None:
        assert computed.exact is not None
        assert computed.reduction >= computed.exact - 0.005
        assert said.manual.vne is not None


def test_outside_the_chart_there_is_no_number_anywhere(two_t, operation):
    """G4: the axis is named, with what is permitted; neither figure has a speed."""
    said = ask(two_t, operation, mass="1,700 lb", pressure_altitude="2,000 ft", oat="-23 degC", bank="30 deg")
    for text in (said.manual.text, said.computed.text):
        assert "temperature \u221223 °C" in text
        assert "Permitted: \u221220" in text
        assert "KIAS" not in text
    assert "no flight here" in said.manual.text
    assert said.manual.vne is None
    assert said.computed.says is Says.REFUSED
    assert (said.computed.reduction, said.computed.exact, said.computed.bank_deg) == (None, None, None)


def test_a_bank_over_the_manual_s_limit_is_refused(three_f_with_load, operation):
    """G29: the 3F's load supplement permits 30 degrees."""
    day = {"mass": "2,200 kg", "pressure_altitude": "2,900 m", "oat": "+10 degC"}
    said = ask(three_f_with_load, operation, **day, bank="40 deg")
    assert said.computed.says is Says.REFUSED
    assert "Permitted: up to 30°" in said.computed.text
    assert said.manual.text == "150 km/h IAS"  # the load's own speed


def test_a_bank_over_the_company_s_is_not_briefed(two_t, operation):
    day = {"mass": "1,700 lb", "pressure_altitude": "6,000 ft", "oat": "+20 degC"}
    assert "Over 30° of bank is not briefed." in ask(two_t, operation, **day, bank="35 deg").computed.text
    assert "not briefed" not in ask(two_t, operation, **day, bank="30 deg").computed.text


def test_the_manual_s_own_turn_reduction_is_said_and_holds_where_it_is_larger(four_h, operation):
    """The 4H's manual: VNE less 10 above 30 degrees."""
    light = {"mass": "2,100 kg", "pressure_altitude": "0 ft", "oat": "-20 degC", "bank": "35 deg"}
    said = ask(four_h, operation, **light).computed
    assert said.says is Says.MANUAL_VNE
    own = "The manual’s own holds: VNE less 10 above 30 degrees (flight manual 2-7 rev 6). Computed alone: "
    assert said.text.startswith(own + "blade stall asks for nothing")
    middle = ask(four_h, operation, **light | {"mass": "3,100 kg", "oat": "0 degC", "bank": "33 deg"}).computed
    assert middle.reduction == 5.0
    assert middle.text.startswith(own + "slow to VNE less 5 kt")
    hot = light | {"mass": "3,200 kg", "oat": "+20 degC", "pressure_altitude": "3,000 ft"}
    heavy = ask(four_h, operation, **hot).computed
    assert heavy.reduction is not None
    assert heavy.reduction > 10.0
    assert heavy.text.startswith("Slow to VNE less")
    assert heavy.text.endswith("The slower of the two holds.")
    assert "manual’s own" not in ask(four_h, operation, **light | {"bank": "30 deg"}).computed.text


def test_an_answer_under_the_floor_is_no_turn(two_t, operation):
    fleet = operation.entry_for(two_t)
    assert fleet is not None
    stated = replace(fleet.brief_bank, value=units.read("70 kt", "speed"), text="70 kt")
    strict = replace(fleet, minimum_manoeuvring_speed=stated)
    condition = Condition(mass="1,800 lb", pressure_altitude="8,000 ft", oat="+20 degC", bank="30 deg")
    said = answers(two_t, strict, condition).computed  # VNE 79 less 10 is 69
    assert said.says is Says.NO_TURN
    assert said.reduction is None
    assert said.text == "The answer is under 70 KIAS (company minimum manoeuvring speed): no turn of 30°."


def test_the_operator_s_spreads_only_take_away(two_t, operation):
    fleet = operation.entry_for(two_t)
    assert fleet is not None
    condition = Condition(mass="1,800 lb", pressure_altitude="8,000 ft", oat="+20 degC", bank="30 deg")
    wide = answers(two_t, replace(fleet, mass_spread=10.0, temperature_spread=2.0), condition).computed
    narrow = answers(two_t, fleet, condition).computed
    assert wide.exact is not None
    assert narrow.exact is not None
    assert wide.exact > narrow.exact + 1.0
