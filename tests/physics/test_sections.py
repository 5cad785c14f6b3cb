"""Blade sections against published values and a general-purpose package, and the operator's own table."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest
from numpy.typing import NDArray

from briefkit.errors import OutsideLimits, Reason
from briefkit.physics.rotor import Rotor, State
from briefkit.physics.section import Attached, Naca0012, Section, TableSection
from briefkit.physics.trim import trim

Array = NDArray[np.float64]
Table = Callable[[str], list[dict[str, str]]]
SLOPE = np.array(5.73)


def lift_and_drag(section: Section, degrees: object, mach: float) -> tuple[Array, Array]:
    angle = np.radians(np.atleast_1d(np.asarray(degrees, dtype=np.float64)))
    return section.coefficients(angle, np.full_like(angle, mach), SLOPE)


def test_drag_polar_of_tr_716() -> None:
    # NACA TR 716: .0087 - .0216 alpha + .400 alpha^2, least .008408 at .0270 rad (transcribed).
    angle = np.linspace(-0.1, 0.2, 30_001)
    drag = Attached().coefficients(angle, np.zeros_like(angle), SLOPE)[1]
    assert drag.min() == pytest.approx(0.008408, abs=5e-7)
    assert angle[drag.argmin()] == pytest.approx(0.0270, abs=5e-5)
    assert lift_and_drag(Attached(), 0.0, 0.0)[1][0] == 0.0087


def test_attached_lift_is_linear_with_prandtl_glauert() -> None:
    degrees = np.array([-16.0, -5.0, 0.0, 12.0, 16.0, 30.0, 45.0])
    lift, _ = lift_and_drag(Attached(), degrees, 0.0)
    np.testing.assert_allclose(lift, 5.73 * np.radians(degrees), rtol=1e-12)
    faster, _ = lift_and_drag(Attached(), degrees, 0.6)
    np.testing.assert_allclose(faster, lift / 0.8, rtol=1e-12)  # sqrt(1 - .36)
    held, _ = lift_and_drag(Attached(), degrees, 0.95)
    np.testing.assert_allclose(held, lift / np.sqrt(1.0 - 0.85**2), rtol=1e-12)


def test_attached_in_reversed_flow() -> None:
    # From the trailing edge the angle is reckoned from there: 178 degrees is -2, -175 is +5.
    lift, drag = lift_and_drag(Attached(), [178.0, -175.0, -2.0, 5.0], 0.0)
    assert lift[:2] == pytest.approx(lift[2:], abs=1e-12)
    assert drag[:2] == pytest.approx(drag[2:], abs=1e-12)


@pytest.mark.parametrize("section", [Attached(), Naca0012()])
@pytest.mark.parametrize("mach", [0.0, 0.3, 0.6, 0.724, 0.726, 0.8, 0.95, 1.0])
def test_continuous_round_the_circle(section: Section, mach: float) -> None:
    degrees = np.linspace(-180.0, 180.0, 36_001)  # a hundredth of a degree
    lift, drag = lift_and_drag(section, degrees, mach)
    assert np.isfinite(lift).all()
    assert (drag > 0.0).all()
    steepest = 0.02 if isinstance(section, Attached) else 0.003  # nowhere steeper than 2 and 0.3 per degree
    assert np.abs(np.diff(lift)).max() < steepest
    assert np.abs(np.diff(drag)).max() < 1e-3
    assert lift[0] == pytest.approx(lift[-1], abs=1e-9)
    assert drag[0] == pytest.approx(drag[-1], abs=1e-9)


@pytest.mark.parametrize("degrees", [3.0, 8.0, 12.0, 17.0, 25.0, 170.0])
def test_continuous_in_mach_number(degrees: float) -> None:
    mach = np.linspace(0.0, 1.0, 10_001)
    angle = np.full_like(mach, np.radians(degrees))
    for section in (Attached(), Naca0012()):
        for values in section.coefficients(angle, mach, SLOPE):
            assert np.abs(np.diff(values)).max() < 2.5e-3


def test_closed_forms_as_printed() -> None:
    # Typed from memory, so this pins the code to the forms and no more: slope .1/sqrt(1-M^2) - .01 M per degree, and
    # departure at 15 - 16 M degrees.
    for mach in (0.0, 0.3, 0.5, 0.7):
        slope = 0.1 / np.sqrt(1.0 - mach**2) - 0.01 * mach
        departure = 15.0 - 16.0 * mach
        lift, _ = lift_and_drag(Naca0012(), [1.0, departure, departure + 2.0], mach)
        assert lift[:2] == pytest.approx([slope, slope * departure], rel=1e-12)
        assert lift[2] < slope * (departure + 2.0)
    # Drag at 9 degrees: .0081 + (-350 a + 396 a^2 - 63.3 a^3 + 3.66 a^4) 1e-6 + .00066 (a - (17 - 23.4 M))^2.54.
    slow = 0.0081 + (-350.0 * 9.0 + 396.0 * 81.0 - 63.3 * 729.0 + 3.66 * 6561.0) * 1e-6
    _, drag = lift_and_drag(Naca0012(), [9.0], 0.5)
    assert drag[0] == pytest.approx(slow + 0.00066 * 3.7**2.54, rel=1e-12)
    # Above Mach .725: the slope falls by .744 a Mach number, and 21 (M - .725)^3.2 is added to the drag.
    lift, drag = lift_and_drag(Naca0012(), [0.0, 1.0], 0.8)
    assert lift[1] == pytest.approx(0.1 / np.sqrt(1.0 - 0.725**2) - 0.00725 - 0.744 * 0.075, rel=1e-12)
    assert drag[0] == pytest.approx(0.0081 + 21.0 * 0.075**3.2, rel=1e-12)


def test_stall_angle_is_where_lift_is_largest() -> None:
    degrees = np.linspace(0.0, 18.0, 18_001)
    for mach in (0.1, 0.3, 0.4, 0.5, 0.6, 0.7):
        lift, _ = lift_and_drag(Naca0012(), degrees, mach)
        found = np.degrees(Naca0012().stall_angle(np.array(mach)))
        assert found == pytest.approx(degrees[lift.argmax()], abs=0.002)
    angles = Naca0012().stall_angle(np.linspace(0.2, 0.8, 61))
    assert (np.diff(angles) <= 0.0).all()  # earlier as Mach number grows


def test_against_measured_sections() -> None:
    # SAND80-2114 (1981), NACA 0015 (transcribed): lift .5500 at 5 degrees; largest lift 1.0971 at 12 degrees (Reynolds
    # number 1e6), 1.1962 at 14 (2e6), 1.3298 at 15 (5e6). NACA 0012 is thinner and the forms are of a
    # rotor blade, not of a polished model: slope 10 %, largest lift in the range at blade Mach numbers of .3 to .5.
    lift, _ = lift_and_drag(Naca0012(), 5.0, 0.1)
    assert lift[0] == pytest.approx(0.55, rel=0.10)
    degrees = np.linspace(0.0, 18.0, 1801)
    for mach, least, most in ((0.1, 1.0971, 1.45), (0.3, 1.0971, 1.3298), (0.4, 1.0, 1.3298)):
        largest = lift_and_drag(Naca0012(), degrees, mach)[0].max()
        assert least < largest < most


def test_against_a_computed_section(table: Table) -> None:
    # The clean section lifts more and drags less than the forms, up to stall: that is the safe side. Size: slope 15 %.
    rows = table("naca0012_computed.csv")
    for mach in (0.1, 0.3, 0.4, 0.5):
        own = [row for row in rows if float(row["mach"]) == mach and float(row["alpha_deg"]) <= 8.0]
        degrees = np.array([float(row["alpha_deg"]) for row in own])
        lift, drag = lift_and_drag(Naca0012(), degrees, mach)
        theirs, their_drag = (np.array([float(row[key]) for row in own]) for key in ("cl", "cd"))
        linear = degrees <= 4.0
        np.testing.assert_allclose(lift[linear], theirs[linear], rtol=0.15)
        assert (lift[linear] <= theirs[linear]).all()
        assert (drag[linear] >= their_drag[linear]).all()
        largest = lift_and_drag(Naca0012(), np.linspace(0.0, 18.0, 181), mach)[0].max()
        highest = max(float(row["cl"]) for row in rows if float(row["mach"]) == mach)
        assert largest < 1.1 * highest
    # Attached: the published slope of 5.73 per radian is .1 a degree.
    clean = next(float(row["cl"]) for row in rows if row["mach"] == "0.1" and row["alpha_deg"] == "4")
    assert lift_and_drag(Attached(), 4.0, 0.1)[0][0] == pytest.approx(clean, rel=0.12)


def own_table(first: float = -180.0, last: float = 180.0, highest: float = 1.0, step: float = 0.5) -> TableSection:
    """The closed forms as an operator's table would give them."""
    degrees = np.arange(first, last + step / 2.0, step)
    machs = np.linspace(0.0, highest, 41)
    pairs = [lift_and_drag(Naca0012(), degrees, mach) for mach in machs]
    return TableSection(machs, np.radians(degrees), *(np.stack(part) for part in zip(*pairs, strict=True)))


def test_table_gives_its_points_and_straight_lines_between() -> None:
    section = own_table()
    lift, drag = lift_and_drag(section, [-7.0, 4.0, 4.25, 4.5, 160.0], 0.5)
    exact = lift_and_drag(Naca0012(), [-7.0, 4.0, 4.5, 160.0], 0.5)
    assert lift[[0, 1, 3, 4]] == pytest.approx(exact[0], abs=1e-12)
    assert lift[2] == pytest.approx(0.5 * (lift[1] + lift[3]), abs=1e-12)
    assert drag[[0, 1, 3, 4]] == pytest.approx(exact[1], abs=1e-12)
    assert np.degrees(section.stall_angle(np.array(0.5))) == pytest.approx(12.7, abs=0.4)


def test_a_plateau_of_lift_stalls_at_its_first_point() -> None:
    degrees = np.array([-10.0, 0.0, 10.0, 12.0, 14.0, 16.0, 20.0])
    lift = np.array([[-1.0, 0.0, 1.0, 1.2, 1.2, 1.2, 0.9]])
    section = TableSection(np.array([0.3]), np.radians(degrees), lift, np.full_like(lift, 0.01))
    assert np.degrees(section.stall_angle(np.array(0.3))) == pytest.approx(12.0)


def test_past_its_ends_a_table_becomes_a_flat_plate() -> None:
    # Complete ten degrees past the end: 1.15 sin(2 alpha) and 1.03 - 1.02 cos(2 alpha), the other way round too.
    lift, drag = lift_and_drag(own_table(-10.0, 20.0), [30.0, 60.0, -20.0, -60.0], 0.3)
    twice = np.radians([60.0, 120.0, -40.0, -120.0])
    np.testing.assert_allclose(lift, 1.15 * np.sin(twice), rtol=1e-12)
    np.testing.assert_allclose(drag, 1.03 - 1.02 * np.cos(twice), rtol=1e-12)
    degrees = np.linspace(-180.0, 180.0, 36_001)
    lift, drag = lift_and_drag(own_table(-10.0, 20.0), degrees, 0.3)
    assert np.abs(np.diff(lift)).max() < 0.003
    assert np.abs(np.diff(drag)).max() < 1e-3


def test_rotor_with_a_table_is_the_rotor(
    rotor: Rotor, mass: tuple[float, float], state_of: Callable[..., State]
) -> None:
    state = state_of(rotor, speed=np.array([0.0, 20.0, 45.0]), mass=mass[1])
    closed, tabulated = trim(rotor, state, section="stalling"), trim(rotor, state, section=own_table())
    assert tabulated.solved.all()
    assert np.degrees(np.abs(closed.tip_angle - tabulated.tip_angle)).max() < 0.05
    np.testing.assert_allclose(closed.cq, tabulated.cq, rtol=0.02)
    # A table that ends at -10 and +20 degrees passes over to a flat plate: the same within what little lies out there.
    short = trim(rotor, state, section=own_table(-10.0, 20.0))
    assert np.degrees(np.abs(short.tip_angle - tabulated.tip_angle)).max() < 0.1


def test_past_its_last_mach_number_a_table_is_not_known(
    rotor: Rotor, mass: tuple[float, float], state_of: Callable[..., State]
) -> None:
    section = own_table(highest=0.7)
    assert section.highest_mach == 0.7
    flight = trim(rotor, state_of(rotor, speed=np.array([10.0, 60.0]), mass=mass[0]), section=section)
    assert flight.reason[0] is Reason.NONE
    assert flight.reason[1] is Reason.OUTSIDE_MODEL


@pytest.mark.parametrize(
    "change",
    [
        {"machs": np.linspace(1.0, 0.0, 41)},
        {"machs": np.linspace(0.0, 1.2, 41)},
        {"angles": np.zeros(31)},
        {"angles": np.radians(np.linspace(-2.0, 20.0, 31))},
        {"angles": np.radians(np.linspace(-10.0, 12.0, 31))},
        {"lift": np.zeros((41, 30))},
        {"lift": np.full((41, 31), np.nan)},
        {"drag": np.zeros((41, 31))},
    ],
)
def test_tables_that_cannot_be_used(change: dict[str, Array]) -> None:
    with pytest.raises(OutsideLimits, match="section table"):
        replace(own_table(-10.0, 20.0, step=1.0), **change)
