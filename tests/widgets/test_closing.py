"""A notebook cell that runs again gives back what it made before; without a kernel there are no cells."""

from __future__ import annotations

import pytest

from briefkit.widgets import closing
from briefkit.widgets.disc import DiscMap
from briefkit.widgets.live import LiveCondition


@pytest.fixture
def cell(monkeypatch):
    """Stand in for the kernel: say which cell runs, and which run of it this is."""
    now: list[tuple[str, str] | None] = [None]
    monkeypatch.setattr(closing, "_running_cell", lambda: now[0])
    monkeypatch.setattr(closing, "_made", {})

    def run(name: str | None, number: int = 0) -> None:
        now[0] = None if name is None else (name, str(number))

    return run


@pytest.mark.slow
def test_twenty_runs_of_a_notebook_add_no_models(two_t, start, cell, models_open):
    counts = []
    for number in range(20):
        cell("one", 2 * number)
        live = LiveCondition(two_t, start)
        cell("two", 2 * number + 1)
        disc = DiscMap(live)
        counts.append(models_open())
    assert len(set(counts)) == 1
    disc.close()
    live.close()


def test_one_run_may_show_the_same_thing_twice(two_t, start, cell):
    cell("one", 1)
    first, second = DiscMap(two_t, start), DiscMap(two_t, start)
    assert first.comm is not None
    assert second.comm is not None
    cell("one", 2)
    third = DiscMap(two_t, start)
    assert first.comm is None
    assert second.comm is None
    third.close()


def test_another_cell_closes_nothing(two_t, start, cell):
    cell("one", 1)
    first = DiscMap(two_t, start)
    cell("two", 2)
    second = DiscMap(two_t, start)
    assert first.comm is not None
    first.close()
    second.close()


def test_a_live_condition_made_anew_marks_the_old_exhibits(two_t, start, cell):
    cell("one", 1)
    live = LiveCondition(two_t, start)
    cell("two", 2)
    disc = DiscMap(live)
    cell("one", 3)
    again = LiveCondition(two_t, start)
    assert "run its cell again" in disc.fault
    disc.close()
    again.close()


def test_the_running_cell_is_read_from_the_kernel_s_request(monkeypatch):
    request = {"header": {"msg_id": "m1"}, "metadata": {"cellId": "c1"}, "content": {"code": "DiscMap(live)"}}

    class Kernel:
        def get_parent(self, channel):
            assert channel == "shell"
            return request

    class Shell:
        kernel = Kernel()

    monkeypatch.setattr("IPython.get_ipython", lambda: Shell())
    assert closing._running_cell() == ("c1", "m1")
    request["metadata"] = {}
    cell, run = closing._running_cell()
    assert cell.startswith("text ")
    assert run == "m1"
    request["header"] = {}
    assert closing._running_cell() is None


def test_outside_a_kernel_nothing_is_remembered(two_t, start):
    before = dict(closing._made)
    disc = DiscMap(two_t, start)
    assert closing._made == before
    disc.close()
