"""Curves of the stall-boundary exhibit: they are the single answers, drawn out; and they end where the chart does."""

from __future__ import annotations

import numpy as np
import pytest

from briefkit.envelope.boundary import Margin, boundary, with_band
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.equivalent import covered_bank, equivalent_vne
from briefkit.envelope.onset import gust_angle
from briefkit.envelope.solution import rotor_of, state_of
from briefkit.envelope.spread import onset_band
from briefkit.errors import OutsideLimits, Reason
from briefkit.physics.trim import trim, vertical_gust

HOT = Condition(mass="2,006 lb", pressure_altitude="5,210 ft", oat="20 degC")


@pytest.mark.slow
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


def test_where_a_line_parts_from_vne_and_where_it_ends(two_t):
    """Against single answers on both sides of the place."""
    curve = boundary(two_t, HOT.with_(mass="1,800 lb", pressure_altitude="8,000 ft"), "bank").equivalent[0]
    (parts,), (end,) = curve.parts, curve.ends
    here = HOT.with_(mass="1,800 lb", pressure_altitude="8,000 ft")
    assert equivalent_vne(two_t, here.with_(bank=f"{parts - 0.1:.2f} deg")).below_vne == pytest.approx(0.0, abs=0.02)
    assert 0.05 < equivalent_vne(two_t, here.with_(bank=f"{parts + 0.3:.2f} deg")).below_vne < 0.5
    assert end <= covered_bank(two_t, here) < end + 1.0
    # Slower rotor is worse: the line meets VNE from the other side, and ends at its slow end.
    slow = boundary(two_t, here, "rotor speed", banks_deg=(20.0, 30.0)).equivalent
    assert 97.0 < slow[1].ends[0] < slow[0].parts[0] < 100.0


def test_a_margin_smaller_than_half_the_band_is_not_resolved(two_t):
    """G19. Also where the band is open at the top; a number only where first signs are clear of VNE."""
    drawn = boundary(two_t, HOT.with_(pressure_altitude="8,000 ft", oat="10 degC"), "bank")
    told = {Margin.NONE: 0, Margin.UNRESOLVED: 0, Margin.UNDER: 0}
    for x in drawn.onset_x:
        found = drawn.margin_at(float(x))
        told[found] += 1
        lower, central, upper = (
            float(np.interp(x, drawn.onset_x, edge))
            for edge in (drawn.onset_lower, drawn.onset_central, drawn.onset_upper)
        )
        if found is Margin.UNDER:
            assert drawn.vne[0] - central >= (upper - lower) / 2.0
        elif found is Margin.UNRESOLVED:
            known = np.isfinite(central) and np.isfinite(upper)
            assert not known or abs(central - drawn.vne[0]) < max(central - lower, (upper - lower) / 2.0)
    assert min(told.values()) > 0


def test_another_bank_moves_the_band_alone(two_t):
    turning = HOT.with_(bank="25 deg")
    moved, fresh = with_band(two_t, turning, boundary(two_t, HOT)), boundary(two_t, turning)
    for field in ("vne", "onset_x", "onset_lower", "onset_central", "onset_upper"):
        np.testing.assert_array_equal(getattr(moved, field), getattr(fresh, field))
    for one, other in zip(moved.equivalent, fresh.equivalent, strict=True):
        np.testing.assert_array_equal(one.ias, other.ias)


def test_the_band_begins_below_a_middle_that_is_above_the_calibration(two_t):
    """At sea level first signs lie above the 120 KIAS the indicator is calibrated to; less their spread they do not."""
    drawn = boundary(two_t, HOT)
    above = np.isnan(drawn.onset_central) & np.isfinite(drawn.onset_lower)
    assert above.any()
    assert (drawn.onset_lower[above] <= 120.0).all()
    first = np.flatnonzero(np.isfinite(drawn.onset_central))[0]
    step = drawn.onset_lower[first - 1] - drawn.onset_lower[first]
    assert 0.0 < step < 5.0  # it goes on where it was
