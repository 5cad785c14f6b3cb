"""Colours held against WCAG 2.2: legible, and in order when the page is printed grey."""

from __future__ import annotations

import re

import numpy as np
import pytest

from briefkit.figures import theme


def rgb(colour: str) -> tuple[int, int, int]:
    return tuple(int(colour[i : i + 2], 16) for i in (1, 3, 5))  # type: ignore[return-value]


def luminance(colour: tuple[int, int, int]) -> float:
    """Relative luminance, 0 (black) to 1 (white), of an 8-bit sRGB colour (WCAG 2.2, definition; IEC 61966-2-1)."""
    parts = []
    for part in colour:
        share = part / 255.0
        parts.append(share / 12.92 if share <= 0.04045 else ((share + 0.055) / 1.055) ** 2.4)
    return 0.2126 * parts[0] + 0.7152 * parts[1] + 0.0722 * parts[2]


def contrast(one: str | tuple[int, int, int], other: str | tuple[int, int, int]) -> float:
    """WCAG 2.2 contrast ratio."""
    bright = [luminance(rgb(c) if isinstance(c, str) else c) for c in (one, other)]
    return (max(bright) + 0.05) / (min(bright) + 0.05)


def test_luminance_of_known_colours():
    """WCAG 2.2 definition: black 0, white 1; sRGB green weighs 0.7152."""
    assert luminance((0, 0, 0)) == 0.0
    assert luminance((255, 255, 255)) == pytest.approx(1.0)
    assert luminance((0, 255, 0)) == pytest.approx(0.7152)
    assert contrast("#777777", "#ffffff") == pytest.approx(4.48, abs=0.005)  # the well-known grey just below 4.5


@pytest.mark.parametrize("role", ["ink", "grey", "computed"])
def test_words_are_legible_on_white_and_on_a_dark_page(role):
    """Success criterion 1.4.3: 4.5 to 1 for text, on the paper and on the onset band."""
    sheet = dict(re.findall(r"--([a-z]+):(#[0-9a-f]{6});", theme.stylesheet().split("@media")[0]))
    dark = dict(re.findall(r"--([a-z]+):(#[0-9a-f]{6});", theme.stylesheet().split("@media")[1]))
    for colours in (sheet, dark):
        assert contrast(colours[role], colours["paper"]) >= 4.5
    assert contrast(sheet[role], sheet["band"]) >= 4.2


@pytest.mark.parametrize("count", [2, 5, 9, 12])
def test_steps_of_the_map_darken_in_order_and_stay_apart_in_grey(count):
    bright = [luminance(step) for step in theme.map_steps(count)]
    lightness = [116.0 * b ** (1 / 3) - 16.0 if b > 0.008856 else 903.3 * b for b in bright]  # CIE 1976 L*
    assert np.all(np.diff(lightness) < -3.0)


def test_steps_keep_one_hue():
    for red, green, blue in theme.map_steps(9):
        assert red <= green <= blue


def test_nothing_is_red_yellow_or_green():
    """14 CFR 27.1545 gives those colours a meaning on an airspeed indicator."""
    for role in ("ink", "grey", "rule", "band", "computed", "paper"):
        for colour in re.findall(rf"--{role}:(#[0-9a-f]{{6}});", theme.stylesheet()):
            red, green, blue = rgb(colour)
            assert blue >= max(red, green) - 2


def test_a_step_count_out_of_range_is_refused():
    with pytest.raises(ValueError, match="1 to 24"):
        theme.map_steps(0)
