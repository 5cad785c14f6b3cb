"""Roots of a batch of small systems at once: Newton with analytic start, Broyden between, each member on its own.

No member's path depends on another's: step lengths, refreshes and the decision to stop are taken member by member, so a
batch gives what the same states give one by one.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Members = NDArray[np.intp]
Function = Callable[[Array, Members], Array]
Slopes = Callable[[Array, Members], tuple[Array, Array]]

GROWTH = 2.0  # a step may let the largest residual grow this much before it is shortened
SHORTER = 0.3


@dataclass(frozen=True, eq=False)
class Roots:
    """`x` (batch, unknown); `left` (batch, equation) the residuals there and `kept` what came with them; `evaluations`
    (batch,) of the function."""

    x: Array
    left: Array
    kept: Array
    evaluations: NDArray[np.intp]


@dataclass(eq=False)
class _Walk:
    """Where each member stands: best point, its residual, inverse slopes there, and the fraction of a step in use."""

    x: Array
    left: Array
    inverse: Array
    fraction: Array
    stale: NDArray[np.bool_]
    evaluations: NDArray[np.intp]


def solve(function: Function, slopes: Slopes, start: Array, largest_step: Array, tolerance: float, most: int) -> Roots:
    """Roots of `function` near `start` (batch, unknown), until every |residual| is at most `tolerance`.

    `function(x, members)` and `slopes(x, members)` take the rows of the members named and give (member, equation +)
    residuals, and (the same, (member, equation, unknown) slopes). Columns past as many as there are unknowns are only
    kept with the point they belong to. A member stops after `most` evaluations; its last
    residual tells how far it came. No unknown moves more than `largest_step` in one step.
    """
    everyone, unknowns = np.arange(start.shape[0]), start.shape[1]
    left, jacobian = slopes(start, everyone)
    walk = _Walk(
        start.copy(),
        left,
        _inverse(jacobian),
        np.ones(start.shape[0]),
        np.zeros(start.shape[0], dtype=bool),
        np.ones(start.shape[0], dtype=np.intp),
    )
    while True:
        size = np.abs(walk.left[:, :unknowns]).max(axis=1)
        open_members = np.flatnonzero((size > tolerance) & (walk.evaluations < most))
        if open_members.size == 0:
            return Roots(walk.x, walk.left[:, :unknowns], walk.left[:, unknowns:], walk.evaluations)
        _refresh(walk, slopes, open_members[walk.stale[open_members]])
        _advance(walk, function, open_members, largest_step)


def _advance(walk: _Walk, function: Function, members: Members, largest_step: Array) -> None:
    """One trial step of the members; kept where the residual does not grow too much."""
    unknowns = walk.x.shape[1]
    inverse, left = walk.inverse[members], walk.left[members, :unknowns]
    step = -(inverse @ left[:, :, None])[:, :, 0]
    reach = (np.abs(step) / largest_step).max(axis=1)
    step *= (walk.fraction[members] / np.maximum(1.0, reach))[:, None]
    trial = walk.x[members] + step
    all_new = function(trial, members)
    new = all_new[:, :unknowns]
    walk.evaluations[members] += 1
    old_size, new_size = np.abs(left).max(axis=1), np.abs(new).max(axis=1)
    keep = new_size <= GROWTH * old_size
    kept = members[keep]
    walk.inverse[kept] = _broyden(inverse[keep], step[keep], new[keep] - left[keep])
    walk.x[kept], walk.left[kept] = trial[keep], all_new[keep]
    walk.fraction[kept] = np.minimum(1.0, walk.fraction[kept] / SHORTER)
    slow = keep & (new_size > 0.5 * old_size)
    walk.fraction[members[~keep]] *= SHORTER
    walk.stale[members] = ~keep | slow


def _refresh(walk: _Walk, slopes: Slopes, members: Members) -> None:
    """New slopes where the last step was bad or slow."""
    if members.size:
        walk.left[members], jacobian = slopes(walk.x[members], members)
        walk.inverse[members] = _inverse(jacobian)
        walk.evaluations[members] += 1
        walk.stale[members] = False


def _broyden(inverse: Array, step: Array, change: Array) -> Array:
    """Broyden's good update of an inverse Jacobian: the least change that maps the residual's change to the step."""
    mapped = (inverse @ change[:, :, None])[:, :, 0]
    row = (step[:, None, :] @ inverse)[:, 0]
    scale = (step * mapped).sum(axis=1)
    safe = np.where(np.abs(scale) > 1e-300, scale, np.inf)
    updated: Array = inverse + (step - mapped)[:, :, None] * row[:, None, :] / safe[:, None, None]
    return updated


def _inverse(jacobian: Array) -> Array:
    """Inverse by member; a singular one gets its pseudo-inverse, and the others stay what they are alone."""
    try:
        return np.asarray(np.linalg.inv(jacobian), dtype=np.float64)
    except np.linalg.LinAlgError:
        return np.stack([_one_inverse(member) for member in jacobian])


def _one_inverse(matrix: Array) -> Array:
    try:
        return np.asarray(np.linalg.inv(matrix), dtype=np.float64)
    except np.linalg.LinAlgError:
        return np.asarray(np.linalg.pinv(matrix), dtype=np.float64)
