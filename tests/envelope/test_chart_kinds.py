"""Every kind of chart a manual may print, against a brute-force search written out here from the definition."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from briefkit import units
from briefkit.aircraft.chart import ReadingRule, VneChart
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.equivalent import LOAD_EXPONENT, covered_banks, equivalent_vne, equivalent_vnes
from briefkit.errors import OutsideChart, Reason
from briefkit.physics import airspeed, atmosphere

FT, KT, C0 = units.FOOT, units.KNOT, units.ZERO_CELSIUS
MOST = 2006 * units.POUND


def chart(speeds, **axes):
    """An invented chart; `speeds` in knots, shaped (heights, temperatures, masses, rotor speeds)."""
    values = np.asarray(speeds, dtype=float) * KT
    return VneChart(
        heights=tuple(h * FT for h in axes.pop("heights")),
        temperatures=tuple(C0 + t for t in axes.pop("temperatures", ())),
        masses=tuple(m * units.POUND for m in axes.pop("masses", ())),
        speeds=values,
        reading=axes.pop("reading", ReadingRule.INTERPOLATE),
        source="invented manual 2-4",
        rows=(),
        **axes,
    )


HEIGHTS = (0, 2000, 4000, 6000, 8000, 10000)
BY_TEMPERATURE = [
    [112, 112, 112, 108],
    [112, 112, 107, 99],
    [112, 106, 97, 89],
    [105, 96, 88, 80],
    [95, 87, 79, 70],
    [86, 77, 69, 61],
]
BY_MASS = [[112, 110, 103], [112, 106, 97], [109, 99, 88], [100, 90, 79], [91, 81, 70], [82, 72, 61]]
KINDS = {
    "height and temperature": chart(
        np.array(BY_TEMPERATURE)[:, :, None, None], heights=HEIGHTS, temperatures=(-20, 0, 20, 40)
    ),
    "next lower cell": chart(
        np.array(BY_TEMPERATURE)[:, :, None, None],
        heights=HEIGHTS,
        temperatures=(-20, 0, 20, 40),
        reading=ReadingRule.NEXT_LOWER,
    ),
    "capped": chart(
        np.array(BY_TEMPERATURE)[:, :, None, None], heights=HEIGHTS, temperatures=(-20, 0, 20, 40), cap=95 * KT
    ),
    "height and mass": chart(
        np.array(BY_MASS)[:, None, :, None],
        heights=HEIGHTS,
        masses=(1400, 1700, 2006),
        covers_temperatures="2-4",
        or_less=True,
    ),
    "bands of mass": chart(
        np.array(BY_MASS)[:, None, :, None],
        heights=HEIGHTS,
        masses=(1400, 1700, 2006),
        covers_temperatures="2-4",
        or_less=True,
        bands=True,
    ),
    "density altitude": chart(
        np.array([[112], [112], [108], [98], [88], [78], [68]])[:, :, None, None],
        heights=(-2000, 0, 2000, 4000, 7000, 10000, 12500),
        density_altitude=True,
    ),
    "height alone, every temperature": chart(
        np.array([[108], [99], [89], [80], [70], [61]])[:, :, None, None], heights=HEIGHTS, covers_temperatures="2-4"
    ),
    "height alone, standard day": chart(
        np.array([[112], [110], [101], [92], [83], [74]])[:, :, None, None], heights=HEIGHTS
    ),
    "height and rotor speed": chart(
        np.array([[100, 110], [92, 102], [84, 93], [75, 84], [66, 74], [57, 65]])[:, None, None, :],
        heights=HEIGHTS,
        rotor_speeds=(0.97, 1.02),
        covers_temperatures="2-4",
    ),
}


def brute_force(aircraft, many, i, standard_only):
    """Largest indicated speed here [m/s] over a 20 ft x 0.25 C grid of permitted points; None where none qualifies."""
    vne = aircraft.vne
    height = np.arange(0.0, 10000.1, 20.0) * FT
    oats = [None] if standard_only else list(C0 + np.arange(-30.0, 40.01, 0.25))
    masses = np.array(vne.masses) if vne.masses else np.array([MOST])
    if vne.masses and not vne.bands:
        masses = np.linspace(masses[0], masses[-1], 31)
    speeds = np.linspace(0.97, 1.02, 11) if vne.rotor_speeds else np.array([1.0])
    k, n = many.rotor_speed[i], many.load_factor[i]
    loaded = n**LOAD_EXPONENT * many.mass[i] / (many.density[i] * k**2)
    best = None
    for oat in oats:
        h, m, kk = (grid.ravel() for grid in np.meshgrid(height, masses, speeds, indexing="ij"))
        t = 288.15 - 0.0065 * h if oat is None else np.full(h.shape, oat)
        pressure = atmosphere.pressure_at(h)
        rho = pressure / (287.05287 * t)
        good = (t <= 288.15 - 0.0065 * h + 35.0) & (t / kk**2 <= many.oat[i] / k**2) & (m / (rho * kk**2) >= loaded)
        if not good.any():
            continue
        indicated = vne.indicated(h[good], t[good], m[good], kk[good])
        cas = np.interp(indicated / KT, (40, 60, 80, 100, 120), (44, 62, 80, 98, 116)) * KT
        known = np.isfinite(cas)
        if known.any():
            true = airspeed.true_from_calibrated(cas[known], pressure[good][known], t[good][known]) / kk[good][known]
            best = max(best or 0.0, float(true.max()))
    if best is None:
        return None
    back = float(airspeed.calibrated_from_true(best * k, many.pressure[i], many.oat[i])) / KT
    return float(np.interp(back, (44, 62, 80, 98, 116), (40, 60, 80, 100, 120)))


@pytest.mark.slow
@pytest.mark.parametrize("kind", KINDS)
def test_agrees_with_a_brute_force_search(two_t, kind):
    aircraft = replace(two_t, vne=KINDS[kind])
    standard_only = kind == "height alone, standard day"
    rng = np.random.default_rng(20311)
    height = rng.uniform(0.0, 9500.0, 24) * FT
    many = Conditions.si(
        mass=rng.uniform(1301.0, 2006.0, 24) * units.POUND,
        pressure_altitude=height,
        oat=atmosphere.temperature_at(height) + rng.uniform(0.0 if standard_only else -15.0, 30.0, 24),
        load_factor=rng.uniform(1.0, 1.3, 24),
        rotor_speed=rng.uniform(0.97, 1.02, 24),
    )
    answers = equivalent_vnes(aircraft, many)
    compared = 0
    for i in range(len(many)):
        if answers.reason[i] is Reason.OUTSIDE_CHART:
            continue
        found = brute_force(aircraft, many, i, standard_only)
        if answers.reason[i] is not Reason.NONE:
            assert found is None, answers.reason[i]
        elif found is not None:
            # Ours finds all the grid finds; the grid stops up to a step short of constraint and cell.
            assert answers.ias[i] >= min(found, answers.vne[i]) - 0.05
            assert answers.ias[i] <= min(found, answers.vne[i]) + 0.3
            compared += 1
    assert compared >= 8


@pytest.mark.parametrize("kind", KINDS)
def test_level_at_full_rotor_speed_it_is_the_manuals_vne(two_t, kind):
    aircraft = replace(two_t, vne=KINDS[kind])
    rng = np.random.default_rng(20312)
    height = rng.uniform(0.0, 9500.0, 200) * FT
    many = Conditions.si(
        mass=rng.uniform(1301.0, 2006.0, 200) * units.POUND,
        pressure_altitude=height,
        oat=atmosphere.temperature_at(height) + rng.uniform(-15.0, 30.0, 200),
    )
    answers = equivalent_vnes(aircraft, many)
    usable = answers.reason == Reason.NONE
    assert usable.sum() > 50
    np.testing.assert_array_equal(answers.ias[usable], answers.vne[usable])


@pytest.mark.slow
@pytest.mark.parametrize("kind", KINDS)
def test_covered_bank_is_where_the_chart_ends(two_t, kind):
    aircraft = replace(two_t, vne=KINDS[kind])
    warm = Conditions.si(mass=1900 * units.POUND, pressure_altitude=4000 * FT, oat=C0 + 20.0)
    bank = float(covered_banks(aircraft, warm)[0][0])
    assert 0.1 < bank < 1.3
    inside, beyond = (replace(warm, load_factor=np.array([1.0 / np.cos(bank + step)])) for step in (-1e-4, 1e-4))
    assert equivalent_vnes(aircraft, inside).reason[0] is Reason.NONE
    assert equivalent_vnes(aircraft, beyond).reason[0] is Reason.BEYOND_CHART


def test_a_chart_without_temperatures_is_refused_on_a_colder_day(two_t):
    aircraft = replace(two_t, vne=KINDS["height alone, standard day"])
    cold = Condition(mass="1,900 lb", pressure_altitude="4,000 ft", oat="-5 degC", bank="20 deg")
    with pytest.raises(OutsideChart, match="does not say which temperatures"):
        equivalent_vne(aircraft, cold)
    assert equivalent_vne(aircraft, cold.with_(bank="0 deg")).below_vne == 0.0
    assert equivalent_vne(aircraft, cold.with_(oat="20 degC")).below_vne > 0.0
