"""The batch root finder on its own: small systems with known roots, side by side."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray

from briefkit.physics.newton import Roots, solve

Array = NDArray[np.float64]
Members = NDArray[np.intp]
WIDE = np.full(2, 10.0)


class Circles:
    """x^2 + y^2 = a^2 and y = slope x by member, and a third number that is only kept: the member's radius."""

    def __init__(self, radius: Array, slope: Array) -> None:
        self.radius, self.slope, self.calls = radius, slope, 0

    def left(self, x: Array, members: Members) -> Array:
        self.calls += 1
        one, other = x.T
        radius, slope = self.radius[members], self.slope[members]
        return np.array([one**2 + other**2 - radius**2, other - slope * one, radius]).T

    def slopes(self, x: Array, members: Members) -> tuple[Array, Array]:
        one, other = x.T
        rows = [[2.0 * one, 2.0 * other], [-self.slope[members], np.ones_like(one)]]
        return self.left(x, members), np.array(rows).transpose(2, 0, 1)

    def solve(self, start: Array, step: Array = WIDE, most: int = 50) -> Roots:
        return solve(self.left, self.slopes, start, step, 1e-12, most)


def test_every_member_finds_its_root() -> None:
    radius, slope = np.array([1.0, 5.0, 0.2, 30.0]), np.array([0.0, 1.0, -0.2, 0.3])
    roots = Circles(radius, slope).solve(np.ones((4, 2)))
    exact = radius / np.sqrt(1.0 + slope**2)
    np.testing.assert_allclose(roots.x, np.array([exact, slope * exact]).T, atol=1e-11)
    assert np.abs(roots.left).max() <= 1e-12
    np.testing.assert_array_equal(roots.kept[:, 0], radius)
    assert (roots.evaluations < 20).all()


def test_members_do_not_know_each_other() -> None:
    radius, slope = np.array([1.0, 1e6, 3.0]), np.array([0.5, 2.0, -1.0])
    together = Circles(radius, slope).solve(np.ones((3, 2)))
    for member in range(3):
        alone = Circles(radius[member : member + 1], slope[member : member + 1]).solve(np.ones((1, 2)))
        np.testing.assert_allclose(alone.x[0], together.x[member], rtol=1e-14)
        assert alone.evaluations[0] == together.evaluations[member]


def test_singular_slopes_of_one_leave_the_others_alone() -> None:
    # The first member starts where its slopes vanish; the second must go the way it goes alone.
    start = np.array([[0.0, 0.0], [1.0, 1.0]])
    roots = Circles(np.array([2.0, 2.0]), np.array([0.0, 1.0])).solve(start)
    alone = Circles(np.array([2.0]), np.array([1.0])).solve(start[1:])
    np.testing.assert_allclose(roots.x[1], alone.x[0], rtol=1e-14)
    assert roots.evaluations[1] == alone.evaluations[0]
    assert np.isfinite(roots.x[0]).all()


def test_no_step_is_longer_than_asked() -> None:
    circles = Circles(np.array([100.0]), np.array([0.0]))
    path = []
    original = circles.left

    def watched(x: Array, members: Members) -> Array:
        path.append(x[0].copy())
        return original(x, members)

    solve(watched, circles.slopes, np.array([[50.0, 0.0]]), np.array([4.0, 4.0]), 1e-12, 50)
    assert np.abs(np.diff([50.0, *(point[0] for point in path)])).max() <= 4.0 + 1e-12
    assert path[-1][0] == pytest.approx(100.0)


def test_what_has_no_root_stops_and_says_how_far_it_came() -> None:
    class NoRoot(Circles):
        def left(self, x: Array, members: Members) -> Array:
            return super().left(x, members) + np.array([2.0 * self.radius[0] ** 2, 0.0, 0.0])

    problem = NoRoot(np.array([1.0, 1.0]), np.array([0.0, 0.0]))
    roots = problem.solve(np.ones((2, 2)), most=25)
    assert (roots.evaluations <= 26).all()  # a refresh may come with the last step
    assert (np.abs(roots.left).max(axis=1) >= 1.0).all()
