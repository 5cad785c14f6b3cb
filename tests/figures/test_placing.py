"""Words inside a figure keep clear of a line where it runs, also where it runs straight up."""

from __future__ import annotations

from briefkit.figures import canvas
from briefkit.figures.placing import Crowd


def test_words_stand_clear_of_the_upright_of_a_step():
    """A line that drops from top to bottom within a millionth of the axis: words beside it, never across it."""
    area = canvas.plane((0.0, 100.0, 0.0, 100.0), 400, 300, canvas.Margins(20, 20, 20, 20))
    crowd = Crowd(area)
    crowd.add_line([0.0, 50.0, 50.0001, 100.0], [99.0, 99.0, 1.0, 1.0])
    middle = area.across(50.0)
    for aside in (-12.0, 12.0):
        left, _ = crowd.place(middle + aside, area.down(50.0), 60.0, 14.0)
        assert left > middle or left + 60.0 < middle
