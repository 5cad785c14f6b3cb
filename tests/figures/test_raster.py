"""The disc's PNG, decoded by this file's own reader of ISO/IEC 15948 and held against the field it was drawn from."""

from __future__ import annotations

import struct
import zlib

import numpy as np
import pytest

from briefkit.figures import theme
from briefkit.figures.raster import SIDE, disc_png, refine

AZIMUTHS = np.arange(24) * (2 * np.pi / 24)
RADII = np.linspace(0.15, 1.0, 12)
LEVELS = np.arange(0.0, 1.41, 0.2)


def field(radius, azimuth):
    """Speed normal to the blade over tip speed at advance ratio 0.3: r + mu sin(psi), the definition."""
    return radius + 0.3 * np.sin(azimuth)


def decode(png: bytes) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Pixels, palette, opacities of an 8-bit indexed, unfiltered PNG; checks signature, lengths and CRCs."""
    assert png[:8] == b"\x89PNG\r\n\x1a\n"
    place, chunks = 8, {}
    while place < len(png):
        length, kind = struct.unpack(">I4s", png[place : place + 8])
        data = png[place + 8 : place + 8 + length]
        (crc,) = struct.unpack(">I", png[place + 8 + length : place + 12 + length])
        assert crc == zlib.crc32(kind + data)
        chunks[kind] = data
        place += 12 + length
    width, height, depth, colour, *rest = struct.unpack(">IIBBBBB", chunks[b"IHDR"])
    assert (depth, colour, rest) == (8, 3, [0, 0, 0])
    rows = np.frombuffer(zlib.decompress(chunks[b"IDAT"]), dtype=np.uint8).reshape(height, width + 1)
    assert not rows[:, 0].any()
    palette = np.frombuffer(chunks[b"PLTE"], dtype=np.uint8).reshape(-1, 3)
    return rows[:, 1:], palette, np.frombuffer(chunks[b"tRNS"], dtype=np.uint8)


def picture(rotation: int = 1, values=None) -> np.ndarray:
    """Red, green, blue, opacity of every pixel."""
    values = field(RADII[:, None], AZIMUTHS) if values is None else values
    pixels, palette, opacity = decode(disc_png(refine(RADII, AZIMUTHS, values, 0.15), LEVELS, rotation))
    return np.concatenate([palette[pixels], opacity[pixels][..., None]], axis=-1)


def pixel_at(radius: float, azimuth_deg: float, rotation: int = 1) -> tuple[int, int]:
    """Row and column of a place on the disc: azimuth 0 at the foot, growing with rotation, nose up."""
    psi = np.radians(azimuth_deg)
    x, y = rotation * radius * np.sin(psi), -radius * np.cos(psi)
    return int((1.0 - y) / 2.0 * SIDE), int((x + 1.0) / 2.0 * SIDE)


# Places well inside a step of the map (0.2 wide), so that a pixel's width cannot decide.
PLACES = [
    (radius, azimuth)
    for radius in (0.25, 0.45, 0.5, 0.75, 0.95)
    for azimuth in range(0, 360, 45)
    if (value := field(radius, np.radians(azimuth))) > 0.0 and 0.08 < value / 0.2 % 1.0 < 0.92
]


@pytest.mark.parametrize("rotation", [1, -1])
@pytest.mark.parametrize(("radius", "azimuth"), PLACES)
def test_every_place_has_the_colour_of_its_step(rotation, radius, azimuth):
    steps = theme.map_steps(LEVELS.size - 1)
    red, green, blue, opacity = picture(rotation)[pixel_at(radius, azimuth, rotation)]
    assert ((red, green, blue), opacity) == (steps[int(field(radius, np.radians(azimuth)) / 0.2)], 255)


def test_a_clockwise_disc_is_the_mirror_image():
    assert np.array_equal(picture(1), picture(-1)[:, ::-1])


def test_outside_the_rim_and_inside_the_root_nothing_is_drawn():
    shown = picture()
    for place in ((0, 0), pixel_at(1.02, 45), pixel_at(0.1, 200)):
        assert shown[place][3] == 0
    assert shown[pixel_at(0.98, 45)][3] == 255


def test_a_first_harmonic_comes_back_from_the_fine_grid():
    """The stated accuracy of the resampling, against the definition it samples."""
    polar = refine(RADII, AZIMUTHS, field(RADII[:, None], AZIMUTHS), 0.15)
    psi = np.arange(polar.values.shape[1]) * (2 * np.pi / polar.values.shape[1])
    assert np.abs(polar.values - field(polar.radii[:, None], psi)).max() < 0.3 * 5e-4


def test_azimuths_may_start_anywhere():
    shifted = AZIMUTHS + 0.4
    one = refine(RADII, AZIMUTHS, field(RADII[:, None], AZIMUTHS), 0.15)
    other = refine(RADII, shifted, field(RADII[:, None], shifted), 0.15)
    assert np.abs(one.values - other.values).max() < 5e-4


def test_the_same_field_is_the_same_bytes():
    polar = refine(RADII, AZIMUTHS, field(RADII[:, None], AZIMUTHS), 0.15)
    assert disc_png(polar, LEVELS, 1) == disc_png(polar, LEVELS, 1)


@pytest.mark.parametrize(
    ("radii", "azimuths", "values", "named"),
    [
        (RADII, AZIMUTHS, np.zeros((3, 24)), "do not match"),
        (RADII[::-1], AZIMUTHS, np.zeros((12, 24)), "rising radii"),
        (RADII, AZIMUTHS**1.1, np.zeros((12, 24)), "evenly"),
        (RADII, AZIMUTHS, np.full((12, 24), np.nan), "finite"),
    ],
)
def test_what_cannot_be_drawn_is_refused(radii, azimuths, values, named):
    with pytest.raises(ValueError, match=named):
        refine(radii, azimuths, values, 0.15)


@pytest.mark.parametrize("levels", [[1.0], [0.0, 0.0], [1.0, 0.5], np.arange(30.0)])
def test_levels_that_are_no_steps_are_refused(levels):
    polar = refine(RADII, AZIMUTHS, field(RADII[:, None], AZIMUTHS), 0.15)
    with pytest.raises(ValueError, match="rising steps"):
        disc_png(polar, levels, 1)
