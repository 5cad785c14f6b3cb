"""The type's onset table against solving the rotor model directly."""

from __future__ import annotations

import numpy as np
import pytest

from briefkit import units
from briefkit.envelope.condition import Conditions
from briefkit.envelope.onset_table import ALLOWANCE, onset_table
from briefkit.envelope.spread import onset_bands, quick_onset_bands


@pytest.fixture(scope="module")
def conditions(two_t):
    rng = np.random.default_rng(20307)
    height = rng.uniform(0.0, 3048.0, 500)
    hottest = two_t.limits.max_temperature_at(height)
    return Conditions.si(
        mass=rng.uniform(two_t.limits.min_mass.value, two_t.limits.max_mass.value, 500),
        pressure_altitude=height,
        oat=np.minimum(rng.uniform(254.0, 313.0, 500), hottest),
        load_factor=rng.uniform(1.0, 1.5, 500),
        rotor_speed=rng.uniform(0.97, 1.02, 500),
    )


@pytest.mark.slow
def test_table_is_within_its_allowance(two_t, conditions):
    quick, direct = quick_onset_bands(two_t, conditions), onset_bands(two_t, conditions)
    for name, less in (("lower", ALLOWANCE), ("central", ALLOWANCE), ("upper", 0.0)):
        mine, theirs = getattr(quick, name), getattr(direct, name)
        both = np.isfinite(mine) & np.isfinite(theirs)
        assert both.sum() > 30
        error = np.abs(mine + less - theirs)[both].max()
        assert error < 0.5 * ALLOWANCE
        # Nothing the table answers is unknown to the model; the table ends earlier, never later.
        assert not (np.isfinite(mine) & ~np.isfinite(theirs)).any()
    # On the safe side: the lower curves never above the direct ones.
    known = np.isfinite(quick.lower) & np.isfinite(direct.lower)
    assert (quick.lower[known] < direct.lower[known]).all()


def test_table_is_made_once(two_t):
    assert onset_table(two_t) is onset_table(two_t)


def test_off_the_table_there_is_no_number(two_t):
    table = onset_table(two_t)
    zero = np.zeros(4, dtype=np.intp)
    loading = np.array([1e-3, 1e6, 800.0, 800.0])
    oat = np.array([288.0, 288.0, 150.0, 400.0])
    assert np.isnan(table.speed(0, zero, loading, oat)).all()
    inside = table.speed(0, zero[:1], np.array([900.0]), np.array([units.ZERO_CELSIUS + 20.0]))
    assert np.isfinite(inside).all()
