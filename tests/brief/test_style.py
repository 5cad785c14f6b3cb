"""The page's colours, from the style sheet itself: contrast in both schemes, under a red lamp, in grey, to every eye.

WCAG 2.2: relative luminance and contrast ratio as defined there; 1.4.3 asks 4.5 : 1 of text, 1.4.11 asks 3 : 1 of what
is needed to understand a drawing. 14 CFR 27.1545 gives red, yellow and green their meanings.
"""

from __future__ import annotations

import colorsys
import re
from itertools import combinations
from xml.etree import ElementTree

import numpy as np
import pytest

from briefkit.brief.templates import template_folder
from briefkit.figures import theme
from briefkit.figures.disc import DiscFigure, levels_for
from briefkit.figures.parts import Drawing
from briefkit.figures.svg import svg

HANDOUT = (template_folder() / "handout.css").read_text(encoding="utf-8")
SCHEMES = ("light", "dark")
TEXT = ("ink", "grey", "computed")


def variables(scheme: str) -> dict[str, str]:
    """The colour variables as a browser would find them in the page's style sheet."""
    blocks = re.findall(r":root\{(--[^}]*)\}", theme.stylesheet())
    assert len(blocks) == 2
    return dict(re.findall(r"--(\w+):(#[0-9a-f]{6});", blocks[SCHEMES.index(scheme)]))


def linear(colour: str) -> np.ndarray:
    """IEC 61966-2-1: red, green, blue as shares of light."""
    part = np.array([int(colour[at : at + 2], 16) for at in (1, 3, 5)]) / 255.0
    return np.where(part <= 0.04045, part / 12.92, ((part + 0.055) / 1.055) ** 2.4)


def luminance(colour: str) -> float:
    return float(linear(colour) @ [0.2126, 0.7152, 0.0722])


def ratio(one: float, other: float) -> float:
    high, low = max(one, other), min(one, other)
    return (high + 0.05) / (low + 0.05)


def lightness(light: float) -> float:
    """CIE 1976 L*: even steps to the eye."""
    return 116.0 * np.cbrt(light) - 16.0 if light > 0.008856 else 903.3 * light


def test_the_ruler_itself():
    """Black on white is 21 : 1; #767676 on white is the darkest grey said to pass at 4.54 : 1 (WCAG's own example)."""
    assert ratio(luminance("#000000"), luminance("#ffffff")) == pytest.approx(21.0)
    assert ratio(luminance("#767676"), luminance("#ffffff")) == pytest.approx(4.54, abs=0.005)


@pytest.mark.parametrize("scheme", SCHEMES)
@pytest.mark.parametrize("role", TEXT)
def test_text_stands_out_from_its_paper(scheme, role):
    colours = variables(scheme)
    assert ratio(luminance(colours[role]), luminance(colours["paper"])) >= 4.5
    # text also stands on the band of a drawing
    assert ratio(luminance(colours[role]), luminance(colours["band"])) >= 4.5


@pytest.mark.parametrize("scheme", SCHEMES)
@pytest.mark.parametrize("role", TEXT)
def test_text_can_be_read_by_a_red_lamp(scheme, role):
    """Only red light comes back from the paper: 7 : 1 (WCAG 1.4.6's ratio) by the red part alone."""
    colours = variables(scheme)
    assert ratio(linear(colours[role])[0], linear(colours["paper"])[0]) >= 7.0


def test_numbers_on_the_stepped_map_can_be_read_by_a_red_lamp():
    """Each lies whole on a plate, 7 : 1 by red light alone and in grey; neither changes with the scheme or the step.

    Printed or dark, the map is the paper: its ink and plate carry no class that a style sheet could restate.
    """
    radii, azimuths = np.linspace(0.12, 1.0, 12), np.linspace(0.0, 2.0 * np.pi, 24, endpoint=False)
    figure = DiscFigure(blades=4, rotation=-1, root_cutout=0.12, unit="kt")
    figure.update(radii, azimuths, 400.0 * (radii[:, None] + 0.3 * np.sin(azimuths)), levels_for(0.0, 520.0))
    drawn = list(ElementTree.fromstring(svg(Drawing(figure.figure, "Disc", "Speeds"))).iter())
    plates = [
        (part.get("fill"), np.array(re.findall(r"(-?[\d.]+),(-?[\d.]+)", part.get("d", "")), dtype=float))
        for part in drawn
        if part.tag.endswith("path") and part.get("fill") == theme.MAP_PAPER and part.get("stroke") is None
    ]
    numbers = [part for part in drawn if part.tag.endswith("text") and (part.text or "").isdigit()]
    assert len(numbers) >= 6
    for text in numbers:
        x, y = map(float, re.findall(r"-?[\d.]+", text.get("transform", "")))
        wide, high = 0.25 * 1.1 * 11.0 * len(text.text or ""), 0.36 * 11.0  # digits are 0.55 em wide, 0.72 em tall
        under = [
            fill for fill, corners in plates
            if np.all(corners.min(0) <= [x - wide, y - high]) and np.all(corners.max(0) >= [x + wide, y + high])
        ]  # fmt: skip
        assert len(under) == 1, text.text
        ink, plate = linear(text.get("fill", "")), linear(under[0] or "")
        assert ratio(ink[0], plate[0]) >= 7.0
        assert ratio(luminance(text.get("fill", "")), luminance(under[0] or "")) >= 7.0
        assert text.get("class") is None


@pytest.mark.parametrize("scheme", SCHEMES)
def test_guard_g40_the_inks_differ_in_grey_and_to_every_eye(scheme):
    """Manual, computed, context and rules keep steps of lightness apart, whatever becomes of the hue.

    Viénot, Brettel and Mollon 1999, matrices for protanopia and deuteranopia in linear RGB (from memory).
    """
    sights = {
        "full": np.eye(3),
        "protan": np.array([[0.11238, 0.88762, 0.0], [0.11238, 0.88762, 0.0], [0.00401, -0.00401, 1.0]]),
        "deutan": np.array([[0.29275, 0.70725, 0.0], [0.29275, 0.70725, 0.0], [-0.02234, 0.02234, 1.0]]),
    }
    colours = variables(scheme)
    classes = ("ink", "computed", "grey", "rule", "paper")
    for name, sight in sights.items():
        steps = {
            role: lightness(float(np.clip(sight @ linear(colours[role]), 0, 1) @ [0.2126, 0.7152, 0.0722]))
            for role in classes
        }
        for one, other in combinations(classes, 2):
            assert abs(steps[one] - steps[other]) >= 8.0, (name, one, other)


def test_guard_g38_no_colour_of_the_page_is_a_certified_mark_s():
    """Every colour is a grey or a blue: hue 200 to 230 degrees, or so little of it that none is seen."""
    found = set(re.findall(r"#[0-9a-fA-F]{6}\b", theme.stylesheet() + HANDOUT))
    found |= {f"#{r:02x}{g:02x}{b:02x}" for count in range(1, 25) for r, g, b in theme.map_steps(count)}
    assert len(found) > 12
    for colour in found:
        hue, _, _ = colorsys.rgb_to_hls(*(int(colour[at : at + 2], 16) / 255 for at in (1, 3, 5)))
        chroma = max(int(colour[at : at + 2], 16) for at in (1, 3, 5)) - min(
            int(colour[at : at + 2], 16) for at in (1, 3, 5)
        )
        assert chroma <= 24 or 200 <= 360 * hue <= 230, colour


def test_the_page_s_own_style_sheet_names_no_colour_but_the_variables():
    assert not re.search(r"#[0-9a-fA-F]{3,8}\b|rgba?\(|hsla?\(", HANDOUT)
    used = set(re.findall(r"(?<![-\w])color: ([^;]+);", HANDOUT))
    assert used == {"var(--ink)", "var(--grey)", "var(--computed)", "inherit"}
    assert set(re.findall(r"var\(--(\w+)\)", HANDOUT)) <= set(variables("light"))


def test_paper_is_always_printed_light():
    """The dark scheme is for screens only: a printed page would drown in toner."""
    dark = theme.stylesheet().split("@media")[1]
    assert dark.startswith(" screen and (prefers-color-scheme:dark)")
    assert "prefers-color-scheme" not in HANDOUT
