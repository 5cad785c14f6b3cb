"""Curves of the stall-boundary exhibit: they are the single answers, drawn out; and they end where the chart does."""

from __future__ import annotations

import numpy as np
import pytest

from briefkit.envelope.boundary import boundary
from briefkit.envelope.condition import Condition
from briefkit.envelope.equivalent import equivalent_vne
from briefkit.errors import OutsideLimits, Reason

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


def test_a_day_the_manual_does_not_permit_is_refused(two_t):
    with pytest.raises(OutsideLimits, match="outside air temperature"):
        boundary(two_t, HOT.with_(oat="45 degC"))
    with pytest.raises(ValueError, match="colour"):
        boundary(two_t, HOT, "colour")
