"""Equivalent VNEs, reduction tables and onset bands, each beside a plain baseline in the same run.

`pytest tests/benchmarks/test_envelope.py`; the figures are printed, nothing is asserted of time.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.optimize import brentq

from briefkit import units
from briefkit.envelope.condition import Conditions
from briefkit.envelope.equivalent import equivalent_vnes
from briefkit.envelope.onset import FIRST_SIGNS, tip_angle_at
from briefkit.envelope.onset_table import onset_table
from briefkit.envelope.reductions import reductions
from briefkit.envelope.rows import rows_of
from briefkit.envelope.solution import rotor_of
from briefkit.envelope.speeds import true_of
from briefkit.envelope.spread import quick_onset_bands
from briefkit.physics import atmosphere


def conditions(aircraft, count):
    rng = np.random.default_rng(20330)
    height = rng.uniform(0.0, 3000.0, count)
    return Conditions.si(
        mass=rng.uniform(600.0, aircraft.limits.max_mass.value, count),
        pressure_altitude=height,
        oat=np.minimum(rng.uniform(255.0, 312.0, count), aircraft.limits.max_temperature_at(height)),
        load_factor=rng.uniform(1.0, 1.4, count),
        rotor_speed=rng.uniform(0.97, 1.02, count),
    )


def test_equivalent_vnes_in_batch(two_t, benchmark):
    many = conditions(two_t, 2000)
    rows_of(two_t)
    benchmark.extra_info["answers"] = 2000
    answers = benchmark(equivalent_vnes, two_t, many, upper=False)
    assert len(answers.ias) == 2000


def test_baseline_plain_grid_search(two_t, benchmark):
    """One answer by a 5 ft x 0.1 C search over the permitted region, the chart read at every point."""
    many = conditions(two_t, 1)
    height, oat = np.meshgrid(
        np.arange(0.0, 3048.1, 5 * units.FOOT), 253.15 + np.arange(0.0, 60.05, 0.1), indexing="ij"
    )
    pressure = atmosphere.pressure_at(height)
    loading = two_t.limits.max_mass.value / (pressure / (units.GAS_CONSTANT * oat))
    hot = oat <= two_t.limits.max_temperature_at(height)

    def search():
        asked = float((many.load_factor**1.15 * many.mass / (many.density * many.rotor_speed**2))[0])
        good = hot & (loading >= asked) & (oat <= float((many.oat / many.rotor_speed**2)[0]))
        speed = true_of(two_t.calibration, two_t.vne.indicated(height[good], oat[good], 0.0), pressure[good], oat[good])
        return float(np.nanmax(speed)) if good.any() else math.nan

    benchmark.pedantic(search, rounds=3)


def test_a_pages_reduction_table(two_t, operation, benchmark):
    fleet, area = operation.fleet["pelquill-2t"], operation.work_areas["vellmark"]
    table = benchmark(reductions, two_t, fleet, area)
    assert len(table.rows) == 5


def test_onset_bands_in_batch(two_t, benchmark):
    many = conditions(two_t, 500)
    onset_table(two_t)
    benchmark.extra_info["answers"] = 500
    benchmark(quick_onset_bands, two_t, many)


def test_baseline_onset_by_root_finding(two_t, benchmark):
    """One onset, without its spread, by scipy's brentq on the rotor model."""
    one, rotor = conditions(two_t, 8).take(np.array([0])), rotor_of(two_t)

    def solve():
        return brentq(lambda v: float(tip_angle_at(rotor, one, np.array([v]))[0]) - FIRST_SIGNS, 25.0, 70.0, xtol=0.005)

    benchmark.pedantic(solve, rounds=3)


@pytest.fixture(autouse=True)
def said(request, benchmark, capsys):
    """Print the time for one answer."""
    yield
    stats = getattr(benchmark, "stats", None)
    if stats is not None:
        each = stats.stats.median / benchmark.extra_info.get("answers", 1)
        with capsys.disabled():
            print(f"\n{request.node.name}: {each * 1e6:,.1f} microseconds an answer")
