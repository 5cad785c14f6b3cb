"""Giving models back: a closed panel leaves nothing behind, and a cell that runs again closes what it showed before.

ipywidgets keeps every model alive until it is closed, and closing a box closes the box alone. So a whole tree is
walked, and what a notebook cell made is remembered until that cell runs again. This is the one registry of the
package that outlives a call: the kernel offers no other moment at which a cell's old output is known to be gone.
"""

from __future__ import annotations

import hashlib
from collections.abc import Iterator
from typing import Any

from ipywidgets import Widget

_Cell = str
_made: dict[_Cell, tuple[str, list[Widget]]] = {}


def close_tree(*roots: Widget) -> None:
    """Close widgets and everything reachable from their synced traits: children, marks, scales, axes, layouts."""
    for widget in list(_walk(roots)):
        Widget.close(widget)


def tree(*roots: Widget) -> list[Widget]:
    """The widgets `close_tree` would close."""
    return list(_walk(roots))


def remember(widget: Widget) -> None:
    """Note that the running cell made `widget`; what an earlier run of the same cell made is closed first.

    Outside a kernel there are no cells and nothing is remembered.
    """
    now = _running_cell()
    if now is None:
        return
    cell, run = now
    before, widgets = _made.get(cell, (run, []))
    if before != run:
        for old in widgets:
            old.close()
        widgets = []
    widgets.append(widget)
    _made[cell] = (run, widgets)


def forget(widget: Widget) -> None:
    """A widget closed by hand need not be closed again."""
    for cell, (run, widgets) in list(_made.items()):
        left = [other for other in widgets if other is not widget]
        if left:
            _made[cell] = (run, left)
        else:
            del _made[cell]


def _walk(roots: tuple[Widget, ...]) -> Iterator[Widget]:
    seen: set[int] = set()
    waiting: list[Any] = list(roots)
    while waiting:
        thing = waiting.pop()
        if isinstance(thing, Widget):
            if id(thing) in seen:
                continue
            seen.add(id(thing))
            yield thing
            waiting += [getattr(thing, name) for name in thing.traits(sync=True)]
        elif isinstance(thing, dict):
            waiting += thing.values()
        elif isinstance(thing, (list, tuple)):
            waiting += thing


def _running_cell() -> tuple[_Cell, str] | None:
    """(cell, this run of it) from the request the kernel is answering; the cell's text stands in for a missing id."""
    from IPython import get_ipython

    kernel = getattr(get_ipython(), "kernel", None)
    if kernel is None:
        return None
    request = kernel.get_parent("shell")
    run = request.get("header", {}).get("msg_id")
    if not run:
        return None
    cell = request.get("metadata", {}).get("cellId")
    if not cell:
        code = str(request.get("content", {}).get("code", ""))
        cell = "text " + hashlib.sha256(code.encode()).hexdigest()
    return cell, run
