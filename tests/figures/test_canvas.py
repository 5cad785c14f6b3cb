"""The builders' shared parts: ticks, gaps, words that keep apart, hatching."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from briefkit.figures import canvas
from briefkit.figures.hatch import hatch


@pytest.mark.parametrize(
    ("low", "high", "expected"),
    [
        (0.0, 10_000.0, [0, 2000, 4000, 6000, 8000, 10_000]),
        (50.0, 130.0, [60, 80, 100, 120]),
        (-2.5, 8.0, [-2.0, 0.0, 2.0, 4.0, 6.0, 8.0]),
        (1301.0, 2006.0, [1400, 1600, 1800, 2000]),
    ],
)
def test_ticks_are_round_and_inside(low, high, expected):
    assert canvas.ticks(low, high, 5).tolist() == expected


def test_tick_texts_are_keyed_as_javascript_writes_numbers():
    """bqplot looks a text up by String(number): "1000", never "1000.0"."""
    scale = canvas.plane((0, 2000, 0, 1), 100, 100, canvas.Margins(0, 0, 0, 0)).x
    assert canvas.axis(scale, "bottom", [0.0, 0.5, 1000.0]).tick_labels == {"0": "0.0", "0.5": "0.5", "1000": "1,000.0"}


def test_a_gap_stays_a_gap():
    nan = np.nan
    runs = canvas.finite_runs([0, 1, 2, 3, 4, 5, 6], [1, 1, nan, 2, nan, 3, 3])
    assert [(x.tolist(), y.tolist()) for x, y in runs] == [([0, 1], [1, 1]), ([3], [2]), ([5, 6], [3, 3])]
    assert canvas.finite_runs([0, 1], [nan, nan]) == []


def test_put_refuses_what_is_not_finite():
    area = canvas.plane((0, 1, 0, 1), 100, 100, canvas.Margins(0, 0, 0, 0))
    with pytest.raises(ValueError, match="not finite"):
        canvas.put(canvas.lines(area, "#000000", 1.0), [0.0, 1.0], [0.0, np.nan])


@pytest.mark.parametrize("limits", [(0.0, 0.0, 0.0, 1.0), (1.0, 0.0, 0.0, 1.0), (0.0, 1.0, 0.0, np.inf)])
def test_limits_that_are_no_range_are_refused(limits):
    with pytest.raises(ValueError, match="finite and rising"):
        canvas.plane(limits, 100, 100, canvas.Margins(0, 0, 0, 0))


@given(
    st.lists(st.tuples(st.floats(-50.0, 350.0), st.floats(8.0, 50.0)), min_size=1, max_size=6),
)
def test_words_never_overlap_and_stay_inside_where_they_fit(boxes):
    targets, heights = [box[0] for box in boxes], [box[1] for box in boxes]
    centres = canvas.spread_out(targets, heights, 0.0, 320.0)
    order = np.argsort(centres, kind="stable")
    for above, below in itertools.pairwise(order):
        assert centres[above] + heights[above] / 2 <= centres[below] - heights[below] / 2 + 1e-6
    if sum(heights) <= 320.0:
        assert min(c - h / 2 for c, h in zip(centres, heights, strict=True)) >= -1e-6
        assert max(c + h / 2 for c, h in zip(centres, heights, strict=True)) <= 320.0 + 1e-6


def test_words_that_are_apart_already_stay_where_they_are():
    assert canvas.spread_out([40.0, 100.0, 200.0], [10.0, 20.0, 30.0], 0.0, 320.0) == [40.0, 100.0, 200.0]


def test_two_words_on_one_place_move_apart_equally():
    assert canvas.spread_out([100.0, 100.0], [20.0, 20.0], 0.0, 320.0) == [90.0, 110.0]


def test_hatching_of_a_square_has_the_square_s_area():
    """Length of strokes times their spacing tends to the area (the definition of the integral)."""
    x, y = hatch([0, 2, 2, 0], [0, 0, 3, 3], 0.01, 45.0)
    length = np.hypot(x[:, 1] - x[:, 0], y[:, 1] - y[:, 0]).sum()
    assert length * 0.01 == pytest.approx(6.0, rel=2e-3)


@pytest.mark.parametrize("first", range(8))
def test_hatching_leaves_the_notch_of_a_concave_polygon_free(first):
    """Whatever corner the polygon starts from."""
    x, y = hatch(np.roll([0, 4, 4, 3, 3, 1, 1, 0], first), np.roll([0, 0, 3, 3, 1, 1, 3, 3], first), 0.05, 0.0)
    for (a, b), (height, _) in zip(x, y, strict=True):
        assert not (1.0 + 1e-9 < (a + b) / 2 < 3.0 - 1e-9 and height > 1.0 + 1e-9)


def test_a_polygon_too_small_for_a_stroke_has_none():
    x, _ = hatch([0.1, 0.2, 0.2], [0.5, 0.5, 0.6], 5.0)
    assert x.shape == (0, 2)


@pytest.mark.parametrize(("x", "spacing"), [([0, 1], 1.0), ([0, 1, 1], 0.0)])
def test_hatching_needs_a_polygon_and_a_spacing(x, spacing):
    with pytest.raises(ValueError, match="three corners"):
        hatch(x, x, spacing)
