"""Figures small enough to read by hand."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any
from xml.etree import ElementTree

import bqplot
import pytest
from ipywidgets import Layout

SVG = "{http://www.w3.org/2000/svg}"


@pytest.fixture
def scales() -> dict[str, bqplot.LinearScale]:
    return {
        "x": bqplot.LinearScale(min=0.0, max=10.0, allow_padding=False),
        "y": bqplot.LinearScale(min=0.0, max=5.0, allow_padding=False),
    }


@pytest.fixture
def figure(scales: dict[str, bqplot.LinearScale]) -> Callable[..., bqplot.Figure]:
    """A figure of 140 x 90 px whose plot area is 100 x 50 px at (30, 20)."""

    def make(*marks: bqplot.Mark, **more: Any) -> bqplot.Figure:
        settings: dict[str, Any] = {
            "layout": Layout(width="140px", height="90px"),
            "fig_margin": {"left": 30, "right": 10, "top": 20, "bottom": 20},
        }
        return bqplot.Figure(marks=list(marks), **(settings | more))

    return make


@pytest.fixture
def parsed() -> Callable[[str], ElementTree.Element]:
    """Markup to a tree; a page that is not well-formed fails here."""
    return ElementTree.fromstring
