"""The type's onset table against solving the rotor model directly."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from briefkit import units
from briefkit.envelope.condition import Conditions
from briefkit.envelope.onset_build import INPUTS
from briefkit.envelope.onset_table import ALLOWANCE, onset_table
from briefkit.envelope.spread import onset_bands, quick_onset_bands


def conditions(aircraft, count):
    rng = np.random.default_rng(20307)
    height = rng.uniform(0.0, 3000.0, count)
    most = aircraft.limits.max_mass.value
    low, high = (end.value for end in aircraft.limits.rotor_on)
    return Conditions.si(
        mass=rng.uniform(aircraft.limits.min_mass.value, most, count),
        pressure_altitude=height,
        oat=np.minimum(rng.uniform(254.0, 313.0, count), aircraft.limits.max_temperature_at(height)),
        load_factor=rng.uniform(1.0, 1.5, count),
        rotor_speed=rng.uniform(low, high, count),
    )


def certain(aircraft):
    """The same rotor without any spread: what is solved directly is then the stated rotor alone."""
    sure = {name: replace(getattr(aircraft.rotor, name), spread=0.0) for name in INPUTS}
    return replace(aircraft, rotor=replace(aircraft.rotor, **sure))


def hold(mine, theirs, less, covered):
    """Within three quarters of the allowance of the direct answer, over most of what has one."""
    both = np.isfinite(mine) & np.isfinite(theirs)
    assert both.sum() >= covered * np.isfinite(theirs).sum() - 1
    assert np.abs(mine + less - theirs)[both].max() < 0.75 * ALLOWANCE
    if less:  # on the safe side: the lower curves never above the direct ones
        assert (mine[both] < theirs[both]).all()


@pytest.mark.slow
@pytest.mark.parametrize(
    ("name", "count", "covered"), [("two_t", 80, 0.75), ("three_f", 60, 0.75), ("four_h", 60, 0.75)]
)
def test_table_is_within_its_allowance(name, count, covered, request):
    """On seeded conditions; the table ends earlier than the model, mostly where the cold tip's Mach number does."""
    aircraft = request.getfixturevalue(name)
    many = conditions(aircraft, count)
    quick, direct = quick_onset_bands(aircraft, many), onset_bands(aircraft, many)
    for end, less in (("lower", ALLOWANCE), ("central", ALLOWANCE), ("upper", 0.0)):
        hold(getattr(quick, end), getattr(direct, end), less, covered)


@pytest.mark.slow
def test_stated_onset_of_five_hundred_conditions(two_t):
    many = conditions(two_t, 500)
    hold(quick_onset_bands(two_t, many).central, onset_bands(certain(two_t), many).central, ALLOWANCE, 0.95)


def test_table_is_made_once(two_t):
    assert onset_table(two_t) is onset_table(two_t)


def test_a_rotor_without_a_spread_has_a_table_too(two_t):
    """A variant for each input with a spread, none otherwise; the stated rotor's answers stay the same."""
    table = onset_table(certain(two_t))
    assert table.fields == ()
    at = np.zeros(1, dtype=np.intp), np.array([900.0]), np.array([units.ZERO_CELSIUS + 20.0])
    assert table.speed(0, *at) == pytest.approx(onset_table(two_t).speed(0, *at), abs=1e-9)


def test_off_the_table_there_is_no_number(two_t):
    table = onset_table(two_t)
    zero = np.zeros(4, dtype=np.intp)
    loading = np.array([1e-3, 1e6, 800.0, 800.0])
    oat = np.array([288.0, 288.0, 150.0, 400.0])
    assert np.isnan(table.speed(0, zero, loading, oat)).all()
    inside = table.speed(0, zero[:1], np.array([900.0]), np.array([units.ZERO_CELSIUS + 20.0]))
    assert np.isfinite(inside).all()
