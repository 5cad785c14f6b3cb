"""Curves of the stall-boundary exhibit: they are the single answers, drawn out; and they end where the chart does."""

from __future__ import annotations

import numpy as np
import pytest

from briefkit.envelope.boundary import boundary
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.equivalent import covered_bank, equivalent_vne
from briefkit.envelope.onset import gust_angle
from briefkit.envelope.solution import rotor_of, state_of
from briefkit.envelope.spread import onset_band
from briefkit.errors import OutsideLimits, Reason
from briefkit.physics.trim import trim, vertical_gust

HOT = Condition(mass="2,006 lb", pressure_altitude="5,210 ft", oat="20 degC")


@pytest.mark.parametrize("against", ["pressure altitude", "mass"])
def test_curves_are_the_single_answers(two_t, against):
    drawn = boundary(two_t, HOT, against, banks_deg=(0.0, 20.0))
    unit = {"pressure altitude": "ft", "mass": "lb"}[against]
    keyword = against.replace(" ", "_")
    for i in range(0, len(drawn.x), 12):
        one = HOT.with_(**{keyword: f"{drawn.x[i]:.6f} {unit}"})
        assert drawn.vne[i] == equivalent_vne(two_t, one).ias
        if drawn.equivalent[1].reason[i] is Reason.NONE:
            assert drawn.equivalent[1].ias[i] == pytest.approx(
                equivalent_vne(two_t, one.with_(bank="20 deg")).ias, abs=0.011
            )


def test_steep_curves_end_with_the_chart(two_t):
    steep = boundary(two_t, HOT, banks_deg=(30.0,)).equivalent[0]
    ends = steep.reason == Reason.BEYOND_CHART
    assert ends.any()
    assert np.isnan(steep.ias[ends]).all()
    # Once beyond the chart, higher is beyond it too.
    assert ends[np.argmax(ends) :].all()


def test_nothing_above_the_manuals_vne(two_t):
    drawn = boundary(two_t, HOT)
    for curve in drawn.equivalent:
        usable = curve.reason == Reason.NONE
        assert (curve.ias[usable] <= drawn.vne[usable]).all()


def test_against_the_bank_it_ends_at_the_covered_bank(two_t):
    drawn = boundary(two_t, HOT, "bank")
    curve = drawn.equivalent[0]
    assert curve.bank_deg is None
    last = drawn.x[curve.reason == Reason.NONE].max()
    assert last <= covered_bank(two_t, HOT) < last + 1.1
    assert (np.diff(curve.ias[curve.reason == Reason.NONE]) <= 1e-9).all()
    assert (drawn.vne == drawn.vne[0]).all()


def test_against_rotor_speed_slower_is_lower(two_t):
    drawn = boundary(two_t, HOT, "rotor speed", banks_deg=(0.0,))
    assert (drawn.x[0], drawn.x[-1]) == (pytest.approx(97.0), pytest.approx(102.0))
    slow = drawn.x <= 100.0
    assert (np.diff(drawn.equivalent[0].ias[slow]) >= -1e-9).all()


def test_a_gust_lowers_the_onset_and_has_no_equivalent(two_t):
    drawn = boundary(two_t, HOT, "gust")
    assert drawn.equivalent == ()
    assert drawn.x_unit == "ft/min"
    central = drawn.onset_central[np.isfinite(drawn.onset_central)]
    assert (np.diff(central) < 0.0).all()
    assert drawn.onset_central[0] == pytest.approx(onset_band(two_t, HOT).central, abs=0.02)


def test_gust_angle_is_the_rotor_models(two_t):
    """The angle at the slow tip against the rotor model's own first instant of a gust with controls held."""
    rotor, many = rotor_of(two_t), Conditions.of(HOT)
    speed = np.array([40.0])
    flight = trim(rotor, state_of(rotor, many, speed))
    instant = vertical_gust(flight, 3.0).instant_tip_angle - flight.tip_angle
    assert gust_angle(rotor, many, speed, 3.0) == pytest.approx(instant, rel=0.02)
    # About 0.38 degree for each metre a second on this rotor: common practice's 57.3/(tip speed less airspeed).
    assert np.degrees(instant[0]) / 3.0 == pytest.approx(57.3 / (rotor.tip_speed - 40.0), rel=0.02)


def test_a_day_the_manual_does_not_permit_is_refused(two_t):
    with pytest.raises(OutsideLimits, match="outside air temperature"):
        boundary(two_t, HOT.with_(oat="45 degC"))
    with pytest.raises(ValueError, match="colour"):
        boundary(two_t, HOT, "colour")
