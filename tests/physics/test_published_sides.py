"""G20 and G21: the model against published measurements, by the side on which an error would be unsafe.

The unsafe side is the one that puts onset later: thrust read too high at a pitch (the blade then seems to need less
angle), flapping to the rear read too low (at 270 degrees the blade falls at that rate, which is angle of attack). Each
limit there is stricter than on the safe side. The limits are a gate against drift (common practice, no source), wider
than today's residuals by about the reading error; they claim no accuracy.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from numpy.typing import NDArray

from briefkit.brief.published import PUBLISHED, published_line
from briefkit.physics.rotor import Distribution, Rotor, State
from briefkit.physics.section import Attached
from briefkit.physics.trim import Controls, held, torque_free
from briefkit.units import FOOT, INCH, SLUG

Array = NDArray[np.float64]
Table = Callable[[str], list[dict[str, str]]]

# What each published series may be out by: (unsafe side, safe side).
LIMITS = {
    "hover thrust at a given pitch": (7.0, 15.0),  # the four runs scatter by 7 % among themselves
    "thrust in autorotation": (4.0, 8.0),
    "flapping to the rear": (0.30, 0.35),  # to advance ratio 0.35; see the test for 0.4
}


def hover(table: Table) -> Array:
    """Thrust of the rotor of NACA TN 2474 at the printed pitch, less the printed one [%]."""
    rotor = Rotor(
        blades=3, radius=36.0 * INCH, chord=1.89 * INCH, twist=0.0, root_cutout=6.0 / 36.0, flap_inertia=0.05,
        hub="articulated", tip_speed=115.0, drag_area=0.0, lift_slope=5.90,
    )  # fmt: skip
    found: list[float] = []
    for run in ("15", "16", "39", "41"):
        rows = [row for row in table("naca_tn2474_hover_6ft.csv") if row["run"] == run and row["dCQ"]]
        rows = [row for row in rows if float(row["theta075_deg"]) > 6.4]  # low Reynolds number below
        pitch = np.radians([float(row["theta075_deg"]) for row in rows])
        tip_speed = float(rows[0]["rpm"]) * np.pi / 30.0 * 36.0 * INCH
        flown = held(rotor, State(1.225, 340.3, tip_speed, 0.0, 1.0), Controls(pitch, 0.0, 0.0))
        found += list(100.0 * (flown.ct / np.array([float(row["CT"]) for row in rows]) - 1.0))
    return np.array(found)


def autorotation(table: Table) -> tuple[Array, Array, Array, Array]:
    """The autogiro rotor of NACA TR 487: advance ratios and thrust residuals [%], those and a1 residuals [deg]."""
    step, outer, speed = 0.394, 1.833, 100.0
    rotor = Rotor(
        blades=4, radius=22.5 * FOOT, chord=outer * FOOT, twist=0.0, root_cutout=0.05,
        flap_inertia=334.0 * SLUG * FOOT**2, hub="articulated", tip_speed=speed, drag_area=0.0, tip_loss=0.959,
        lift_slope=5.85, taper=Distribution((0.0, step, step, 1.0), (1.25 / outer, 1.25 / outer, 1.0, 1.0)),
        twist_shape=Distribution((0.0, step, step, 1.0), (0.0384, 0.0384, -0.0157 + 0.0872 * step, 0.0715)),
    )  # fmt: skip
    state = State(0.00210 * SLUG / FOOT**3, 1e9, speed, np.linspace(0.14, 0.45, 24) * speed, 3000.0)
    flight = torque_free(rotor, state, Controls(-0.0157 + 0.0872 * 0.75, 0.0, 0.0), section=Attached((0.0120, 0, 0)))
    series = []
    for name, values, most in (("CT_exp", flight.ct, 0.3), ("a1_exp", np.degrees(-flight.hub_b1c), 0.4)):
        rows = [row for row in table("naca_tr487_flight_curves.csv") if row[name] and float(row["mu"]) <= most]
        mu, measured = (np.array([float(row[key]) for row in rows]) for key in ("mu", name))
        series += [mu, np.interp(mu, flight.mu, values), measured]
    return series[0], 100.0 * (series[1] / series[2] - 1.0), series[3], series[4] - series[5]


@pytest.fixture(scope="module")
def residuals(table: Table) -> dict[str, Array]:
    _, thrust, _, flapping = autorotation(table)
    return dict(zip(LIMITS, (hover(table), thrust, flapping), strict=True))


def test_g21_the_unsafe_side_is_held_the_tighter(residuals: dict[str, Array]) -> None:
    for one in PUBLISHED:
        unsafe_limit, safe_limit = LIMITS[one.what]
        assert unsafe_limit < safe_limit
        values = residuals[one.what] * (1.0 if one.unsafe == "above" else -1.0)
        # At advance ratio 0.4 flapping is 0.42 low, known and printed: no worse than that, and held to the limit below.
        inside = values[:-1] if one.what == "flapping to the rear" else values
        assert inside.max() < unsafe_limit, one.what
        assert inside.min() > -safe_limit, one.what
    assert residuals["flapping to the rear"][-1] > -0.43


def test_g20_the_worst_residuals_are_printed_with_their_signs(residuals: dict[str, Array]) -> None:
    """The page prints what the model gives today, on both sides."""
    for one in PUBLISHED:
        printed = 0.5 * 10.0**-one.decimals + 1e-9
        assert residuals[one.what].min() == pytest.approx(one.low, abs=printed), one.what
        assert residuals[one.what].max() == pytest.approx(one.high, abs=printed), one.what
    said = published_line()
    assert "−9.0 to +4.7\u00a0% (NACA TN 2474, four runs; above zero is the unsafe side)" in said
    assert "flapping to the rear −0.42 to +0.16° (NACA TR 487" in said
