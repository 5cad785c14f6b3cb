"""The SVG writer against the geometry of its own data, SVG 1.1 and the strict policy of the handout."""

from __future__ import annotations

import base64
from typing import Any

import bqplot
import ipywidgets
import numpy as np
import pytest
import traitlets

from briefkit.figures import theme
from briefkit.figures.markup import element, number, refuse_unhandled
from briefkit.figures.still import Drawing, svg

SVG = "{http://www.w3.org/2000/svg}"


def line(scales: Any, **more: Any) -> bqplot.Lines:
    return bqplot.Lines(**({"x": [0.0, 10.0], "y": [0.0, 5.0], "scales": scales, "colors": [theme.INK]} | more))


def draw(figure: bqplot.Figure, key: str = "") -> str:
    return svg(Drawing(figure, "A title", "A description."), key)


def test_every_svg_has_role_title_description_and_view_box(figure, scales, parsed):
    """WAI-ARIA Graphics: role img, named by title, described by desc."""
    root = parsed(draw(figure(line(scales))))
    assert root.tag == f"{SVG}svg"
    assert root.get("role") == "img"
    assert root.get("viewBox") == "0 0 140 90"
    ids = [root.find(f"{SVG}{name}").get("id") for name in ("title", "desc")]
    assert root.get("aria-labelledby").split() == ids
    assert root.find(f"{SVG}title").text == "A title"
    assert root.find(f"{SVG}desc").text == "A description."


def test_a_line_lies_where_its_data_are(figure, scales, parsed):
    root = parsed(draw(figure(line(scales, x=[0.0, 2.5, 10.0], y=[0.0, 1.0, 5.0]))))
    assert root.find(f".//{SVG}path").get("d") == "M0,50L25,40L100,0"
    assert root.find(f"{SVG}g").get("transform") == "translate(30,20)"


def test_a_reversed_scale_is_reversed(figure, scales, parsed):
    scales["x"].reverse = True
    root = parsed(draw(figure(line(scales, x=[0.0, 2.5], y=[0.0, 0.0]))))
    assert root.find(f".//{SVG}path").get("d") == "M100,50L75,50"


def test_many_lines_in_one_mark_are_all_drawn_with_their_own_colours(figure, scales, parsed):
    many = line(scales, x=[0.0, 10.0], y=[[0.0, 1.0], [1.0, 2.0], [2.0, 3.0]], colors=["#111111", "#222222"])
    paths = parsed(draw(figure(many))).findall(f".//{SVG}path")
    assert [path.get("stroke") for path in paths] == ["#111111", "#222222", "#111111"]


@pytest.mark.parametrize(
    ("dash", "written"), [("solid", None), ("dashed", "10,10"), ("dotted", "2,10"), ("dash_dotted", "10,5,2,5")]
)
def test_dashes_are_bqplots_own(figure, scales, parsed, dash, written):
    """The four patterns read in bqplot 0.13's front end."""
    path = parsed(draw(figure(line(scales, line_style=dash)))).find(f".//{SVG}path")
    assert path.get("stroke-dasharray") == written


def test_a_filled_polygon_is_closed_and_filled(figure, scales, parsed):
    patch = line(
        scales, x=[0, 10, 10], y=[0, 0, 5], fill="inside", fill_colors=[theme.BAND], close_path=True, stroke_width=0.0
    )
    path = parsed(draw(figure(patch))).find(f".//{SVG}path")
    assert path.get("d").endswith("Z")
    assert (path.get("fill"), path.get("stroke"), path.get("class")) == (theme.BAND, None, "fill-band")


def test_labels_keep_place_alignment_and_weight(figure, scales, parsed):
    label = bqplot.Label(
        x=[5.0], y=[2.5], text=["85 KIAS"], scales=scales, colors=[theme.COMPUTED], align="end", x_offset=3,
        y_offset=-4, default_size=12.0, font_weight="bold",
    )  # fmt: skip
    text = parsed(draw(figure(label))).find(f".//{SVG}text")
    assert text.text == "85 KIAS"
    assert text.get("transform") == "translate(53,21)"
    assert (text.get("text-anchor"), text.get("font-weight"), text.get("font-size")) == ("end", "bold", "12")
    assert text.get("class") == "fill-computed"


def test_text_is_escaped(figure, scales, parsed):
    label = bqplot.Label(x=[5.0], y=[2.5], text=['W < 2,006 lb & "hot"'], scales=scales)
    drawn = svg(Drawing(figure(label), "a < b", "c & d"))
    assert parsed(drawn).find(f".//{SVG}text").text == 'W < 2,006 lb & "hot"'
    assert "a &lt; b" in drawn


def test_markers_stand_at_their_points(figure, scales, parsed):
    dots = bqplot.Scatter(x=[0.0, 10.0], y=[5.0, 0.0], scales=scales, colors=[theme.INK], default_size=100)
    paths = parsed(draw(figure(dots))).findall(f".//{SVG}path")
    assert [path.get("transform") for path in paths] == ["translate(0,0)", "translate(100,50)"]
    # A marker's size is its area in square pixels: r = sqrt(100 / pi) = 5.64.
    assert paths[0].get("d").startswith("M0,5.64A5.64,5.64")


def test_an_image_is_its_own_png(figure, scales, parsed):
    png = b"\x89PNG\r\n\x1a\n" + b"not looked at"
    image = bqplot.Image(image=ipywidgets.Image(value=png, format="png"), x=[2, 8], y=[1, 4], scales=scales)
    drawn = parsed(draw(figure(image))).find(f".//{SVG}image")
    assert [drawn.get(name) for name in ("x", "y", "width", "height")] == ["20", "10", "60", "30"]
    assert base64.b64decode(drawn.get("href").removeprefix("data:image/png;base64,")) == png


def axis(scales: Any, **more: Any) -> bqplot.Axis:
    settings = {"scale": scales["x"], "side": "bottom", "tick_values": [0.0, 2.5, 10.0], "grid_lines": "none"}
    return bqplot.Axis(**(settings | {"tick_labels": {"0": "zero", "2.5": "2.5", "10": "10,000"}} | more))


def test_an_axis_shows_its_ticks_and_texts(figure, scales, parsed):
    root = parsed(draw(figure(axes=[axis(scales)])))
    texts = [(text.text, text.get("x")) for text in root.findall(f".//{SVG}text")]
    assert texts == [("zero", "0"), ("2.5", "25"), ("10,000", "100")]


def test_a_curve_beyond_the_limits_is_clipped_and_one_inside_is_not(figure, scales, parsed):
    inside, beyond = line(scales), line(scales, y=[0.0, 6.0])
    assert "clip-path" not in draw(figure(inside))
    root = parsed(draw(figure(beyond)))
    clip = root.find(f".//{SVG}clipPath")
    assert root.find(f".//*[@clip-path='url(#{clip.get('id')})']") is not None
    assert "clip-path" not in draw(figure(line(scales, y=[0.0, 6.0], apply_clip=False)))


def test_no_style_attribute_no_script_and_nothing_fetched(figure, scales):
    """The handout's policy is default-src 'none' with data: images: a style attribute would be dropped unseen."""
    drawn = draw(figure(line(scales), axes=[axis(scales)]))
    assert "style=" not in drawn
    assert "<script" not in drawn
    assert drawn.count("http") == 1  # the namespace, which is a name and not an address


def test_the_same_figure_is_the_same_bytes(figure, scales):
    assert draw(figure(line(scales))) == draw(figure(line(scales)))


def test_ids_differ_between_places_and_between_contents(figure, scales):
    here, there, other = (
        draw(figure(line(scales)), "1"),
        draw(figure(line(scales)), "2"),
        draw(figure(line(scales, y=[0, 4]))),
    )
    names = [text.split('aria-labelledby="')[1][:11] for text in (here, there, other)]
    assert len(set(names)) == 3


@pytest.mark.parametrize("bad", [np.nan, np.inf, -np.inf])
def test_numbers_that_are_not_finite_never_reach_a_page(figure, scales, bad):
    with pytest.raises(ValueError, match="not finite"):
        draw(figure(line(scales, y=[0.0, bad])))
    with pytest.raises(ValueError, match="not finite"):
        draw(figure(bqplot.Label(x=[1.0], y=[1.0], text=[f"{bad} kt"], scales=scales)))


@pytest.mark.parametrize("bad", [np.nan, np.inf])
def test_the_last_door_before_the_page_is_closed_too(bad):
    with pytest.raises(ValueError, match="not finite"):
        number(bad)
    assert [number(value) for value in (-0.001, 2.0, 1.005, 12.3456)] == ["0", "2", "1", "12.35"]


def test_an_unknown_mark_is_refused_by_name(figure, scales):
    pie = bqplot.Pie(sizes=[1, 2])
    with pytest.raises(ValueError, match="Pie"):
        draw(figure(pie))


def test_a_subclass_of_a_known_mark_is_refused(figure, scales):
    """A subclass may draw itself differently, so it is not taken for its parent."""

    class Odd(bqplot.Lines):
        pass

    with pytest.raises(ValueError, match="Odd"):
        draw(figure(Odd(x=[0, 1], y=[0, 1], scales=scales)))


@pytest.mark.parametrize(
    ("change", "named"),
    [
        ({"fill": "between"}, "between"),
        ({"interpolation": "basis"}, "interpolation"),
        ({"labels_visibility": "label"}, "labels_visibility"),
        ({"display_legend": True}, "display_legend"),
        ({"curves_subset": [0]}, "curves_subset"),
        ({"color": [1.0]}, "color"),
        ({"marker": "cross"}, "cross"),
    ],
)
def test_a_setting_that_would_change_the_look_is_refused_not_dropped(figure, scales, change, named):
    with pytest.raises(ValueError, match=named):
        draw(figure(line(scales, **change)))


def test_a_trait_unknown_to_this_writer_is_refused(scales):
    """A newer bqplot may add a trait: unless it is at its default it could change the look."""
    mark = line(scales)
    known = [name for name in mark.traits(sync=True) if not name.startswith("_")]
    mark.add_traits(sparkle=traitlets.Unicode("").tag(sync=True))
    refuse_unhandled(mark, known, ())
    mark.sparkle = "gold"
    with pytest.raises(ValueError, match="sparkle"):
        refuse_unhandled(mark, known, ())


@pytest.mark.parametrize(
    ("scale", "named"),
    [
        (bqplot.LinearScale(min=0.0, allow_padding=False), "explicit min and max"),
        (bqplot.LinearScale(min=0.0, max=5.0), "allow_padding"),
        (bqplot.LinearScale(min=5.0, max=5.0, allow_padding=False), "the same"),
        (bqplot.LogScale(min=1.0, max=5.0, allow_padding=False), "LogScale"),
    ],
)
def test_a_scale_the_front_end_would_stretch_is_refused(figure, scales, scale, named):
    with pytest.raises(ValueError, match=named):
        draw(figure(line({"x": scales["x"], "y": scale})))


def test_a_figure_without_a_size_in_pixels_is_refused(figure, scales):
    with pytest.raises(ValueError, match=r"layout\.width"):
        draw(figure(line(scales), layout=ipywidgets.Layout(height="90px")))


def test_a_figure_its_own_aspect_limits_would_shrink_is_refused(figure, scales):
    with pytest.raises(ValueError, match="aspect ratio"):
        draw(figure(line(scales), min_aspect_ratio=1.0, max_aspect_ratio=1.0))


def test_an_axis_without_explicit_ticks_or_texts_is_refused(figure, scales):
    with pytest.raises(ValueError, match="tick_values"):
        draw(figure(axes=[axis(scales, tick_values=None)]))
    with pytest.raises(ValueError, match=r'"2\.5"'):
        draw(figure(axes=[axis(scales, tick_labels={"0": "0", "10": "10"})]))


@pytest.mark.parametrize(("title", "desc"), [("", "words"), ("words", " ")])
def test_a_drawing_without_words_is_refused(figure, scales, title, desc):
    with pytest.raises(ValueError, match="title and a description"):
        svg(Drawing(figure(line(scales)), title, desc))


def test_an_invisible_mark_and_an_empty_one_leave_nothing(figure, scales):
    bare = draw(figure())
    for mark in (line(scales, visible=False), line(scales, x=[], y=[])):
        assert len(draw(figure(mark))) == len(bare)


def test_unequal_abscissas_and_ordinates_are_refused(figure, scales):
    with pytest.raises(ValueError, match="abscissas"):
        draw(figure(line(scales, x=[0.0, 1.0, 2.0], y=[0.0, 1.0])))


def test_a_picture_s_bytes_are_not_read_for_words():
    """Base64 (RFC 4648) may spell "nan" between signs by chance; in words it is still refused."""
    assert "+nan/" in element("image", {"href": "data:image/png;base64,iV+nan/="})
    with pytest.raises(ValueError, match="not finite"):
        element("text", {"aria-label": "VNE nan KIAS"})
