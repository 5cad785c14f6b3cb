"""The still against the picture bqplot itself draws in Chromium: curves, marks, words, image and ticks in one place."""

from __future__ import annotations

import re
from collections.abc import Iterator
from typing import Any
from xml.etree import ElementTree

import pytest

from briefkit.figures.still import Drawing, svg

pytestmark = [pytest.mark.browser, pytest.mark.slow]

SVG = "{http://www.w3.org/2000/svg}"
SHARE = 1e-4  # of the plot area, as measured in the trial of the writer

# Run here and in the notebook's kernel alike, so that both draw the same figure.
FIGURE = """
import bqplot, ipywidgets, numpy as np
from briefkit.figures.raster import disc_png, refine

x = bqplot.LinearScale(min=-3.0, max=11.0, allow_padding=False)
y = bqplot.LinearScale(min=40.0, max=130.0, allow_padding=False)
scales = {"x": x, "y": y}
t = np.linspace(-2.5, 10.3, 57)
radii, azimuths = np.linspace(0.1, 1.0, 9), np.arange(24) * 2 * np.pi / 24
png = disc_png(refine(radii, azimuths, radii[:, None] + 0.2 * np.sin(azimuths), 0.1), np.linspace(0, 1.2, 7), 1)
marks = [
    bqplot.Image(image=ipywidgets.Image(value=png, format="png"), x=[1.0, 4.0], y=[50.0, 70.0], scales=scales),
    bqplot.Lines(x=t, y=85 + 30 * np.sin(t), scales=scales, colors=["#0b3f8c"], line_style="dashed", stroke_width=1.8),
    bqplot.Lines(x=t, y=np.stack([90 - t, 80 - t ** 2 / 4]), scales=scales, colors=["#16181d", "#646a73"]),
    bqplot.Lines(x=[0, 3, 5], y=[45, 60, 44], scales=scales, colors=["#e4e6ea"], fill="inside", close_path=True,
                 fill_colors=["#e4e6ea"]),
    bqplot.Scatter(x=[0.3, 7.7], y=[61.0, 99.0], scales=scales, colors=["#16181d"], default_size=90),
    bqplot.Label(x=[2.2, 8.1], y=[120.0, 47.0], text=["VNE", "30°"], scales=scales, colors=["#16181d"], align="end",
                 x_offset=5, y_offset=-3, default_size=12, font_weight="normal"),
]
look = {"grid_lines": "none", "color": "#646a73"}
axes = [
    bqplot.Axis(scale=x, side="bottom", tick_values=[-2, 0, 2.5, 10], **look,
                tick_labels={"-2": "−2", "0": "0", "2.5": "2.5", "10": "10"}),
    bqplot.Axis(scale=y, side="left", tick_values=[40, 75, 130], tick_labels={"40": "40", "75": "75", "130": "130"},
                **look),
]
figure = bqplot.Figure(marks=marks, axes=axes, padding_x=0, padding_y=0,
                       fig_margin={"left": 41, "right": 23, "top": 17, "bottom": 37},
                       layout=ipywidgets.Layout(width="443px", height="327px", min_width="443px", min_height="327px"))
"""
WIDTH, HEIGHT = 443 - 41 - 23, 327 - 17 - 37

_DOM = """() => {
  const all = selector => [...document.querySelectorAll('.bqplot ' + selector)];
  const shift = node => {const m = node.transform.baseVal.consolidate().matrix; return [m.e, m.f];};
  const image = all('image')[0], box = image.getBBox(), move = image.getCTM();
  const frame = all('.plotarea_background')[0].getCTM();
  return {
    lines: all('.curve .line').map(node => node.getAttribute('d')),
    dashes: all('.curve .line').map(node => getComputedStyle(node).strokeDasharray),
    dots: all('.object_grp').filter(node => node.querySelector('.dot')).map(shift),
    dotShape: all('.object_grp .dot')[0].getAttribute('d'),
    words: all('.object_grp').filter(node => node.querySelector('.label')).map(
      node => [...shift(node), node.textContent, getComputedStyle(node.querySelector('text')).textAnchor]),
    image: [move.a * box.x + move.e - frame.e, move.d * box.y + move.f - frame.f,
            move.a * box.width, move.d * box.height],
    ticks: all('.axis .tick').map(node => [...shift(node), node.querySelector('text').textContent]),
  };
}"""


@pytest.fixture(scope="module")
def drawn() -> ElementTree.Element:
    scope: dict[str, Any] = {}
    exec(FIGURE, scope)
    return ElementTree.fromstring(svg(Drawing(scope["figure"], "title", "description")))


@pytest.fixture(scope="module")
def dom(lab: Any) -> Iterator[dict[str, Any]]:
    seen = lab.open([FIGURE + "\nfigure"])
    seen.page.wait_for_selector(".bqplot .axis .tick", timeout=60_000)
    seen.page.wait_for_function("document.querySelectorAll('.bqplot .label').length === 2")
    yield seen.page.evaluate(_DOM)
    seen.page.context.close()
    lab.end_kernels()


def numbers(path: str) -> list[float]:
    return [float(part) for part in re.findall(r"-?\d+(?:\.\d+)?(?:e-?\d+)?", path)]


def close(ours: list[float], theirs: list[float]) -> bool:
    """Within 1e-4 of the plot area, coordinate by coordinate (x and y alternate)."""
    room = [WIDTH * SHARE, HEIGHT * SHARE] * len(ours)
    return len(ours) == len(theirs) > 0 and all(abs(a - b) <= r for a, b, r in zip(ours, theirs, room, strict=False))


def moved(node: ElementTree.Element) -> list[float]:
    return numbers(node.get("transform", ""))[:2]


def test_every_curve_lies_where_bqplot_draws_it(drawn, dom):
    ours = [node.get("d") for node in drawn.iter(f"{SVG}path") if node.get("stroke-linejoin")]
    assert len(ours) == len(dom["lines"]) == 4
    for mine, theirs in zip(ours, dom["lines"], strict=True):
        assert close(numbers(mine), numbers(theirs))
        assert mine.endswith("Z") == theirs.endswith("Z")


def test_dashes_are_the_same(drawn, dom):
    ours = [
        numbers(node.get("stroke-dasharray", "")) for node in drawn.iter(f"{SVG}path") if node.get("stroke-linejoin")
    ]
    assert ours == [numbers(dash) for dash in dom["dashes"]]


def test_marks_stand_in_the_same_places_with_the_same_shape(drawn, dom):
    dots = [node for node in drawn.iter(f"{SVG}path") if node.get("transform")]
    assert len(dots) == len(dom["dots"]) == 2
    for mine, theirs in zip(dots, dom["dots"], strict=True):
        assert close(moved(mine), theirs)
    mine, theirs = numbers(dots[0].get("d", "")), numbers(dom["dotShape"])
    assert mine == pytest.approx(theirs, abs=0.01)


def test_words_stand_in_the_same_places(drawn, dom):
    ours = [node for node in drawn.iter(f"{SVG}text") if node.get("dominant-baseline")]
    assert [(node.text, node.get("text-anchor")) for node in ours] == [(word[2], word[3]) for word in dom["words"]]
    for mine, theirs in zip(ours, dom["words"], strict=True):
        assert close(moved(mine), theirs[:2])


def test_the_image_covers_the_same_box(drawn, dom):
    image = drawn.find(f".//{SVG}image")
    ours = [float(image.get(name)) for name in ("x", "y", "width", "height")]
    assert close(ours, dom["image"])


def test_ticks_stand_in_the_same_places_with_the_same_words(drawn, dom):
    """d3 draws its ticks half a pixel off on a screen of one device pixel a pixel; the words are ours."""
    ours = []
    for axis in drawn.findall(f".//{SVG}g/{SVG}g"):
        for text in axis.findall(f"{SVG}text"):
            sideways = text.get("text-anchor") == "end"
            place = float(text.get("y" if sideways else "x", "0"))
            ours.append(((0.0, place) if sideways else (place, 0.0), text.text))
    assert [word for _, word in ours] == [tick[2] for tick in dom["ticks"]]
    for (mine, _), theirs in zip(ours, dom["ticks"], strict=True):
        assert mine == pytest.approx(tuple(theirs[:2]), abs=0.51)
