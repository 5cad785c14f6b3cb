"""The figures of the exhibits: what is drawn where, read back from their marks and from their stills."""

from __future__ import annotations

from xml.etree import ElementTree

import bqplot
import numpy as np
import pytest

from briefkit.figures import theme
from briefkit.figures.boundary import BoundaryFigure
from briefkit.figures.boundary_lines import Curves, Here
from briefkit.figures.chart import ChartFigure, Mark
from briefkit.figures.disc import DiscFigure, levels_for, reversed_region
from briefkit.figures.flapping import FlapCurveFigure, TipPathFigure
from briefkit.figures.stairs import stairs_figure
from briefkit.figures.still import Drawing, svg

SVG = "{http://www.w3.org/2000/svg}"
AZIMUTHS = np.arange(24) * (2 * np.pi / 24)
RADII = np.linspace(0.12, 1.0, 12)


def tree(figure: bqplot.Figure) -> ElementTree.Element:
    return ElementTree.fromstring(svg(Drawing(figure, "title", "description")))


def words(figure: bqplot.Figure) -> list[str]:
    return [text.text or "" for text in tree(figure).iter(f"{SVG}text")]


def place_of(figure: bqplot.Figure, word: str) -> tuple[float, float]:
    """Pixels of a word's anchor from the plot area's top left."""
    for text in tree(figure).iter(f"{SVG}text"):
        if text.text == word and text.get("transform"):
            x, y = text.get("transform", "").removeprefix("translate(").split(")")[0].split(",")
            return float(x), float(y)
    raise AssertionError(f"no word {word!r} on the figure")


# --- disc ---


def speeds(mu: float = 0.25) -> np.ndarray:
    """r + mu sin(psi), in knots at a tip speed of 400."""
    return 400.0 * (RADII[:, None] + mu * np.sin(AZIMUTHS))


def disc(rotation: int = 1, blades: int = 2, **more) -> DiscFigure:
    made = DiscFigure(blades=blades, rotation=rotation, root_cutout=0.12, unit="kt")
    azimuths, radii = reversed_region(RADII, AZIMUTHS, speeds(), 0.12)
    settings = {"reversed_azimuths": azimuths, "reversed_radii": radii}
    made.update(RADII, AZIMUTHS, speeds(), levels_for(0.0, 520.0), **(settings | more))
    return made


def test_the_reversed_region_is_the_circle_of_the_theory():
    """r + mu sin(psi) = 0 is a circle of diameter mu through the hub, on the retreating side (definition)."""
    azimuths, radii = reversed_region(RADII, AZIMUTHS, speeds(), 0.12)
    outer = radii > 0.12 + 1e-9
    assert radii.max() == pytest.approx(0.25, abs=1e-3)
    assert radii[outer] == pytest.approx(-0.25 * np.sin(azimuths[outer]), abs=2e-3)
    # It begins and ends where the circle meets the root cut-out: sin(psi) = -0.12 / 0.25.
    widest = np.degrees([azimuths.min(), azimuths.max()])
    assert widest == pytest.approx([180.0 + 28.7, 360.0 - 28.7], abs=2.0)


def test_without_reversed_flow_there_is_no_region():
    assert reversed_region(RADII, AZIMUTHS, speeds(0.0), 0.12)[0].size == 0


def test_an_anticlockwise_rotor_advances_on_the_right_and_a_clockwise_one_on_the_left():
    for rotation, side in ((1, 1.0), (-1, -1.0)):
        figure = disc(rotation).figure
        middle = theme.WIDTH / 2.0
        assert side * (place_of(figure, "advancing")[0] - middle) > 100.0
        assert side * (place_of(figure, "retreating")[0] - middle) < -100.0
        assert place_of(figure, "nose 180°")[1] < 60.0
        assert place_of(figure, "tail 0°")[1] > 290.0


@pytest.mark.parametrize("blades", [2, 3, 4, 5])
def test_the_clockwise_disc_is_the_exact_mirror(blades):
    """Every mark of the picture: blades, arrows, region and numbers change sides and nothing else."""
    one, other = disc(1, blades).figure, disc(-1, blades).figure
    for mine, theirs in zip(one.marks, other.marks, strict=True):
        if isinstance(mine, bqplot.Lines) and mine is not one.marks[4]:  # the hatching keeps its direction
            assert np.allclose(np.sort(np.ravel(mine.x)), np.sort(-np.ravel(theirs.x)), atol=1e-9)
            assert np.allclose(np.sort(np.ravel(mine.y)), np.sort(np.ravel(theirs.y)), atol=1e-9)


def test_the_wind_turns_the_sides():
    """With the wind on the right an anticlockwise rotor advances over the tail."""
    assert "tail 0°, advancing side" in words(disc(1, wind_from_deg=90.0).figure)
    assert "nose 180°, advancing side" in words(disc(-1, wind_from_deg=90.0).figure)
    assert "tail 0°, advancing side" in words(disc(-1, wind_from_deg=270.0).figure)


def test_without_wind_no_side_advances():
    still_air = words(disc(wind_from_deg=None).figure)
    assert not any("advancing" in word or "relative" in word for word in still_air)


def test_the_knots_stand_on_the_edges_of_their_steps():
    """Each number is written where the field has that value."""
    figure = disc().figure
    written = [word for word in words(figure) if word.isdigit()]
    assert len(written) >= 6
    for word in written:
        x, y = place_of(figure, word)
        radius = np.hypot(x - theme.WIDTH / 2.0, y - 178.0) / 138.0
        sine = (x - theme.WIDTH / 2.0) / 138.0 / radius
        assert 400.0 * (radius + 0.25 * sine) == pytest.approx(float(word), abs=4.0)


def test_the_picture_changes_widgets_so_that_it_is_redrawn():
    """bqplot redraws an Image mark only when its image is another widget."""
    made = disc()
    image_mark = made.figure.marks[0]
    before, count = image_mark.image, len(made.figure.marks)
    made.update(RADII, AZIMUTHS, speeds(0.1), levels_for(0.0, 520.0))
    assert image_mark.image is not before
    assert bytes(image_mark.image.value) != bytes(before.value)
    assert len(made.figure.marks) == count
    assert set(made.spare) >= {before, image_mark.image}


def test_levels_are_round_and_few():
    assert levels_for(0.0, 552.0).tolist() == [float(edge) for edge in range(0, 601, 50)]
    assert levels_for(0.0, 1020.0).tolist() == [float(edge) for edge in range(0, 1101, 100)]


@pytest.mark.parametrize("bad", [{"blades": 1}, {"rotation": 0}, {"root_cutout": 1.0}])
def test_what_is_no_rotor_is_refused(bad):
    with pytest.raises(ValueError, match="not a rotor"):
        DiscFigure(**({"blades": 2, "rotation": 1, "root_cutout": 0.1, "unit": "kt"} | bad))


# --- flapping ---


def test_flap_is_highest_and_lowest_where_the_sine_says():
    """beta = b0 + b1c cos + b1s sin: amplitude the root of the squares, highest at atan2(b1s, b1c)."""
    made = FlapCurveFigure()
    made.update(3.0, -3.0, 4.0)
    said = words(made.figure)
    assert "8.0° at 127°" in said
    assert "−2.0° at 307°" in said
    assert "3.0°" in said


@pytest.mark.parametrize("rotation", [1, -1])
def test_the_side_view_shows_the_tilt_it_states(rotation):
    """b1c < 0 lifts the nose: tilted back. b1s > 0 lifts the advancing blade: tilted to the retreating side."""
    made = TipPathFigure(rotation=rotation)
    made.update(2.0, -3.0, 1.0)
    said = words(made.figure)
    assert "3.0° back" in said
    assert "1.0° to the retreating side" in said
    left, hub, right = made.figure.marks[3].y[0]
    assert left > right  # seen from the left the nose is on the left of the page, and high
    assert hub == 0.0
    retreating = place_of(made.figure, "retreating")[0]
    advancing = place_of(made.figure, "advancing")[0]
    assert (advancing > retreating) == (rotation > 0)


def test_the_exaggeration_is_stated_and_true():
    made = TipPathFigure(rotation=1)
    made.update(2.0, -3.0, 1.0)
    factor = float(next(w for w in words(made.figure) if "times as large" in w).split("drawn ")[1].split()[0])
    left = made.figure.marks[3].y[0][0]
    assert np.degrees(np.arcsin(left / 0.86)) == pytest.approx(factor * 5.0, abs=1e-6)


# --- boundary ---

X = np.linspace(0.0, 10_000.0, 21)
VNE = 112.0 - X / 250.0
NONE = np.full(X.size, np.nan)


def curves(**more) -> Curves:
    ends = {"onset_x": X, "onset_lower": VNE + 5.0, "onset_central": VNE + 12.0, "onset_upper": VNE + 25.0}
    turn = np.where(X <= 6000.0, VNE - 8.0, np.nan)
    settings = {"x": X, "manual": VNE, "turns": [("level flight", VNE), ("30° bank", turn)], **ends}
    return Curves(**(settings | more))


def boundary(shown: Curves | None = None, here: Here | None = None) -> BoundaryFigure:
    made = BoundaryFigure(x_words="pressure altitude, ft", speed_words="KIAS", turns=2)
    made.update(shown or curves(), here)
    return made


def test_every_line_is_named_at_its_end_and_there_is_no_legend():
    figure = boundary().figure
    said = words(figure)
    assert {"VNE, manual", "and level flight", "30° bank,", "chart ends", "onset band,"} <= set(said)
    assert not any(mark.display_legend for mark in figure.marks)


def test_a_line_that_ends_is_not_drawn_on():
    """Where the chart ends the line ends, with a bar across it."""
    made = boundary()
    turn = made._turns[1].marks
    assert [mark.x.tolist()[-1] for mark in turn if mark.x.size] == [6000.0]
    assert np.allclose(np.ravel(made._stops.x), 6000.0)
    alone = words(boundary(curves(ended=[[], ["line"]])).figure)  # the chart goes on
    assert "line ends" in alone
    assert "chart ends" not in alone


def test_the_band_s_two_greys_part_along_a_step_of_vne():
    """VNE drops within a thousandth of a foot: no full grey above the lower step, none faint under the upper."""
    x = np.array([0.0, 5010.0, 5010.001, 10_000.0])
    step = curves(x=x, manual=np.array([110.0, 110.0, 90.0, 90.0]), turns=[("level flight", x), ("30° bank", x)])
    made = boundary(step)
    across, up = np.ravel(made._full[0].x), np.ravel(made._full[0].y)
    edge = np.ravel(VNE)[0] + 5.0 - across / 250.0  # the band's lower end
    assert (up[across > 5010.001] <= np.maximum(90.0, edge[across > 5010.001]) + 1e-9).all()
    assert up[np.isclose(across, 5010.0, atol=1e-4)].max() == 110.0


def test_a_line_that_begins_inside_the_figure_has_a_bar_there_too():
    late = np.where(X >= 3000.0, VNE - 8.0, np.nan)
    made = boundary(curves(turns=[("level flight", VNE), ("30° bank", late)]))
    assert np.allclose(np.ravel(made._stops.x), 3000.0)
    assert "30° bank," in words(made.figure)


def test_words_under_an_end_stay_inside_the_figure():
    low = np.where(X <= 9500.0, VNE - 14.0, np.nan)
    figure = boundary(curves(turns=[("level flight", VNE), ("30° bank", low)])).figure
    assert place_of(figure, "chart ends")[1] < 330 - 30 - 44


def test_a_gap_in_a_line_stays_a_gap():
    gap = np.where((X > 2000.0) & (X < 4000.0), np.nan, VNE - 8.0)
    made = boundary(curves(turns=[("level flight", VNE), ("30° bank", gap)]))
    drawn = [mark.x for mark in made._turns[1].marks if mark.x.size]
    assert [(run[0], run[-1]) for run in drawn] == [(0.0, 2000.0), (4000.0, 10_000.0)]
    assert all(mark in made.figure.marks for mark in made._turns[1].marks)


def test_a_band_without_an_upper_end_is_open_and_says_so():
    upper = np.where(X < 5000.0, np.nan, VNE + 25.0)
    made = boundary(curves(onset_upper=upper))
    assert "(open at the top)" in words(made.figure)
    assert made._pale[0].y.max() == made._area.y.max
    without = boundary(curves(onset_lower=NONE, onset_central=NONE, onset_upper=NONE))
    assert "onset band," not in words(without.figure)


def test_a_level_line_that_is_not_the_manuals_stands_on_its_own():
    made = boundary(curves(turns=[("level flight", VNE - 3.0), ("30° bank", NONE)]))
    said = words(made.figure)
    assert "level flight" in said
    assert "and level flight" not in said


def test_the_condition_is_marked_with_its_speed_and_its_answer():
    made = boundary(here=Here(5000.0, 80.0, "here, 80 KIAS", 84.0, "30° bank: 84 KIAS"))
    dots = [mark for mark in made.figure.marks if isinstance(mark, bqplot.Scatter) and mark.marker == "circle"]
    assert sorted(float(dot.y[0]) for dot in dots) == [80.0, 84.0]
    assert {"here, 80 KIAS", "30° bank: 84 KIAS"} <= set(words(made.figure))
    made.update(curves(), Here(5000.0, None, "here"))
    assert all(dot.y.size == 0 for dot in dots)


@pytest.mark.parametrize("speed", [60.0, 70.0, 80.0, 88.0])
def test_words_of_an_end_keep_clear_of_the_condition(speed):
    figure = boundary(here=Here(6000.0, speed, "here")).figure
    ring = next(p for p in tree(figure).iter(f"{SVG}path") if p.get("class") == "stroke-ink fill-paper")
    across, down = (float(v) for v in ring.get("transform", "")[10:-1].split(","))
    for word in ("30° bank,", "chart ends"):
        x, y = place_of(figure, word)
        assert not (x - 75.0 < across < x + 75.0 and abs(y - down) < 12.0)


def test_an_update_changes_arrays_and_makes_no_new_marks():
    made = boundary()
    before = list(made.figure.marks)
    made.update(curves(manual=VNE + 2.0), None)
    assert made.figure.marks == before


def test_the_band_is_pale_above_vne_and_stops_where_the_calibration_does():
    made = boundary(curves(onset_lower=VNE - 5.0, onset_upper=NONE, ceiling=(118.0, "calibrated to 118 KIAS")))
    pale, full = made._pale[0], made._full[0]
    assert pale.fill_opacities[0] < 0.6
    assert full.fill_opacities[0] == 1.0
    assert pale.y.max() == 118.0
    assert (full.y <= np.interp(full.x, X, VNE) + 1e-9).all()
    assert (pale.y >= np.interp(pale.x, X, VNE) - 1e-9).all()
    assert {"calibrated to 118 KIAS", "faint above VNE"} <= set(words(made.figure))


def test_a_place_where_a_line_leaves_vne_is_marked_and_named():
    made = boundary(curves(parts=[[], [(3000.0, "30° bank\nparts at 3,000 ft")]]))
    assert (made._parts.x[0], made._parts.y[0]) == (3000.0, pytest.approx(np.interp(3000.0, X, VNE)))
    assert "parts at 3,000 ft" in words(made.figure)


def test_a_long_name_of_a_line_that_is_the_manuals_takes_two_rows():
    made = BoundaryFigure(x_words="bank, °", speed_words="KIAS", turns=1)
    made.update(curves(turns=[("equivalent VNE", VNE)]))
    assert {"and equivalent", "VNE"} <= set(words(made.figure))


def test_the_same_curves_are_not_sent_again():
    made, shown = boundary(), curves()
    made.update(shown, Here(5000.0, 80.0, "here"))
    sent = []
    made._manual.marks[0].observe(lambda change: sent.append(change), "y")
    made.update(shown, Here(5500.0, 81.0, "here"))
    assert sent == []
    assert made._here.x[0] == 5500.0
    made.update(curves(manual=VNE + 2.0), None)
    assert sent


def test_a_figure_without_any_vne_is_refused():
    with pytest.raises(ValueError, match="no value anywhere"):
        boundary(curves(manual=NONE))


def test_banks_that_could_not_be_told_apart_are_refused():
    with pytest.raises(ValueError, match="told apart"):
        BoundaryFigure(x_words="", speed_words="", turns=5)
    with pytest.raises(ValueError, match="2 computed lines, not 1"):
        boundary(curves(turns=[("level flight", VNE)]))


# --- chart and stairs ---

# The invented 2T's chart (do not use for flight).
CELLS = np.array(
    [
        [112, 112, 112, 108],
        [112, 112, 107, 99],
        [112, 106, 97, 89],
        [105, 96, 88, 80],
        [95, 87, 79, 70],
        [86, 77, 69, 61],
    ],
    dtype=float,
)
COLUMNS = ["−20 °C", "0 °C", "+20 °C", "+40 °C"]


def chart(cells: np.ndarray = CELLS) -> ChartFigure:
    return ChartFigure(np.arange(6) * 2000.0, cells, COLUMNS, x_words="pressure altitude, ft", speed_words="KIAS")


def test_between_two_entries_the_lower_holds_where_the_manual_says_so():
    made = ChartFigure(
        np.arange(3) * 2000.0, np.array([[112.0], [107.0], [109.0]]), ["VNE"], x_words="ft", speed_words="KIAS",
        steps=True,
    )  # fmt: skip
    line = made.figure.marks[0]
    assert np.all(np.diff(line.x) >= 0.0)
    between = ((line.x[:-1] + line.x[1:]) / 2.0)[np.diff(line.x) > 0.0]
    assert between.tolist() == [1000.0, 3000.0]
    for first, last in ((0.0, 2000.0), (2000.0, 4000.0)):
        tread = line.y[:-1][(line.x[:-1] == first) & (line.x[1:] == last)]
        assert tread.tolist() == [107.0]
    assert [line.y[line.x == x].max() for x in (0.0, 2000.0, 4000.0)] == [112.0, 107.0, 109.0]


def test_the_chart_shows_every_cell_and_names_every_column():
    made = chart()
    nodes = next(mark for mark in made.figure.marks if isinstance(mark, bqplot.Scatter) and mark.x.size == 24)
    assert sorted(nodes.y.tolist()) == sorted(CELLS.ravel().tolist())
    made.update(Mark(8000.0, 79.0, ("here",)), None)
    assert set(COLUMNS) <= set(words(made.figure))


def test_a_blank_cell_is_a_gap():
    blank = CELLS.copy()
    blank[2, 3] = np.nan
    made = chart(blank)
    runs = [mark for mark in made.figure.marks if isinstance(mark, bqplot.Lines) and mark.colors == [theme.INK]]
    assert not any(0.0 in run.x and 10_000.0 in run.x and run.y[0] == 108.0 for run in runs if run.x.size)


def test_the_arrow_runs_from_here_to_there():
    made = chart()
    made.update(Mark(8000.0, 79.0, ("here",)), Mark(9480.0, 71.6, ("as loaded as",)))
    assert made._shaft.x[0] < made._shaft.x[1]
    assert made._head.x[0] == made._head.x.max()
    made.update(Mark(8000.0, 79.0, ("here",)), Mark(8000.0, 79.0, ("as loaded as",)))
    assert made._shaft.x.size == 0
    assert {"here", "as loaded as"} <= set(words(made.figure))


EDGES = [1301.0, 1700.0, 1750.0, 1800.0, 1900.0, 2006.0]
TEXTS = [f"{edge:,.0f} lb" for edge in EDGES]


def stairs(reductions, texts=("a", "b", "c", "d", "e")) -> bqplot.Figure:
    return stairs_figure(EDGES, TEXTS, reductions, texts, step=5.0, speed_words="kt below VNE")


def test_stairs_stand_on_their_reductions_heaviest_on_top():
    figure = stairs([0.0, 5.0, 10.0, 10.0, 10.0])
    tread = next(m for m in figure.marks if isinstance(m, bqplot.Lines) and m.colors == [theme.COMPUTED])
    assert tread.x.tolist() == [0, 0, -5, -5, -10, -10, -10, -10, -10, -10]
    assert np.all(np.diff(tread.y) >= 0.0)
    assert [place_of(figure, word)[1] for word in "edcba"] == sorted(place_of(figure, word)[1] for word in "abcde")
    assert {"briefed", "not briefed", *TEXTS} <= set(words(figure))


def test_the_hatching_is_on_the_far_side_only():
    figure = stairs([0.0, 5.0, 10.0, 10.0, 10.0])
    strokes = next(m for m in figure.marks if isinstance(m, bqplot.Lines) and m.stroke_width == 0.8)
    assert np.all(strokes.x >= -10.0 - 1e-9)
    low_row_top = figure.axes[1].tick_values[1]
    assert np.all(strokes.y >= low_row_top - 1e-9)


def test_a_row_without_a_turn_is_hatched_whole():
    figure = stairs([0.0, 5.0, 10.0, 10.0, None])
    strokes = next(m for m in figure.marks if isinstance(m, bqplot.Lines) and m.stroke_width == 0.8)
    assert strokes.x.min() == pytest.approx(figure.marks[0].scales["x"].min, abs=1e-6)


def test_nothing_taken_off_leaves_nothing_hatched():
    figure = stairs([0.0] * 5)
    assert "not briefed" not in words(figure)


@pytest.mark.parametrize(
    ("reductions", "named"), [([0.0, 4.0, 10.0, 10.0, 10.0], "step of 5"), ([0.0, 5.0], "need 5"), ([-5.0] * 5, "step")]
)
def test_stairs_that_are_no_stairs_are_refused(reductions, named):
    with pytest.raises(ValueError, match=named):
        stairs(reductions)


def test_masses_that_do_not_rise_are_refused():
    with pytest.raises(ValueError, match="must rise"):
        stairs_figure([2.0, 1.0], ["2", "1"], [0.0], ["a"], step=5.0, speed_words="kt")
