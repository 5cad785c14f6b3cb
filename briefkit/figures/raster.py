"""The disc map as an indexed PNG: a palette entry a step, smooth edges between steps, transparent outside."""

from __future__ import annotations

import struct
import zlib
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from briefkit.figures import theme

Floats = NDArray[np.float64]
Bytes = NDArray[np.uint8]

SIDE = 512
_RINGS, _SPOKES = 48, 180
_BLENDS = 4  # shades between two steps, so that an edge is smooth without more pixels
_MAX_STEPS = 24


@dataclass(frozen=True)
class Polar:
    """Values on a fine even polar grid: `values` (rings, spokes), `radii` (rings,), azimuths even from 0."""

    radii: Floats
    values: Floats


def refine(radii: ArrayLike, azimuths: ArrayLike, values: ArrayLike, root: float) -> Polar:
    """Values (radii, azimuths) resampled to a fine even grid from the root cut-out to the tip.

    `radii` (n,) rising, fractions of the radius; `azimuths` (m,) rad, even over one turn from any start; linear along
    the radius (straight on beyond the first and last node), periodic four-point cubic along the azimuth, so that a
    first harmonic comes back within 0.05 % from 24 azimuths. Not finite, uneven or wrong shapes raise ValueError.
    """
    r, psi, v = (np.asarray(part, dtype=float) for part in (radii, azimuths, values))
    if v.shape != (r.size, psi.size) or r.size < 2 or psi.size < 4:
        raise ValueError(f"values {v.shape} do not match {r.size} radii and {psi.size} azimuths")
    if not (np.all(np.isfinite(v)) and np.all(np.diff(r) > 0.0)):
        raise ValueError("a disc map needs finite values and rising radii")
    if not np.allclose(np.diff(psi), 2.0 * np.pi / psi.size, rtol=0.0, atol=1e-6):
        raise ValueError("a disc map needs azimuths spread evenly over one turn")
    rings = np.linspace(root, 1.0, _RINGS)
    low = np.clip(np.searchsorted(r, rings) - 1, 0, r.size - 2)
    share = ((rings - r[low]) / (r[low + 1] - r[low]))[:, None]
    along = v[low] * (1.0 - share) + v[low + 1] * share
    place = (np.arange(_SPOKES) * (2.0 * np.pi / _SPOKES) - psi[0]) * (psi.size / (2.0 * np.pi))
    base = np.floor(place).astype(int)
    t = place - base
    weights = (
        -0.5 * t + t**2 - 0.5 * t**3,
        1.0 - 2.5 * t**2 + 1.5 * t**3,
        0.5 * t + 2.0 * t**2 - 1.5 * t**3,
        -0.5 * t**2 + 0.5 * t**3,
    )
    fine = sum(weight * along[:, (base + offset) % psi.size] for offset, weight in enumerate(weights, start=-1))
    return Polar(rings, np.asarray(fine, dtype=float))


def disc_png(polar: Polar, levels: ArrayLike, rotation: int, level: int = 1) -> bytes:
    """The map as PNG bytes, SIDE by SIDE, nose up.

    `levels` (n + 1,) rising edges of the n steps; values beyond the first or last edge take the end step. `rotation`
    +1 anticlockwise seen from above, -1 clockwise (mirrored). `level` is zlib's. Palette: n steps with blends between
    neighbours, then one transparent entry.
    """
    edges = np.asarray(levels, dtype=float)
    count = edges.size - 1
    if count < 1 or count > _MAX_STEPS or not np.all(np.diff(edges) > 0.0):
        raise ValueError(f"a stepped map needs 1 to {_MAX_STEPS} rising steps, not edges {edges}")
    steps = _fractional_steps(polar.values, edges)
    lookup = _lookup(round(float(polar.radii[0]), 4), 1 if rotation > 0 else -1)
    wrapped = np.concatenate([steps, steps[:, :1]], axis=1).astype(np.float32).ravel()
    across = polar.values.shape[1] + 1
    inner = wrapped[lookup.index] * lookup.w00 + wrapped[lookup.index + 1] * lookup.w01
    inner += wrapped[lookup.index + across] * lookup.w10 + wrapped[lookup.index + across + 1] * lookup.w11
    slope = _slope(steps, polar.radii).astype(np.float32).ravel()[lookup.nearest]
    pixels = np.full(SIDE * SIDE, count * _BLENDS, dtype=np.uint8)
    pixels[lookup.inside] = _palette_index(inner, slope, count)
    return _png(pixels.reshape(SIDE, SIDE), _palette(count), level)


def _fractional_steps(values: Floats, edges: Floats) -> Floats:
    """Values as step numbers with a fraction: 2.25 lies a quarter of the way through the third step."""
    numbers = np.interp(values, edges, np.arange(edges.size, dtype=float))
    return np.asarray(numbers, dtype=float)


def _slope(steps: Floats, radii: Floats) -> Floats:
    """How many steps one pixel spans, on the polar grid; never zero, so that it can be divided by."""
    outward = np.gradient(steps, radii[1] - radii[0], axis=0)
    round_about = (np.roll(steps, -1, axis=1) - np.roll(steps, 1, axis=1)) / (4.0 * np.pi / steps.shape[1])
    slope = np.hypot(outward, round_about / np.maximum(radii, 0.05)[:, None]) * (2.0 / SIDE)
    return np.asarray(np.maximum(slope, 1e-4), dtype=float)


def _palette_index(steps: NDArray[np.float32], slope: NDArray[np.float32], count: int) -> Bytes:
    """Step numbers to palette entries: flat inside a step, blended across one pixel at its edge."""
    edge = np.clip(np.rint(steps), 1, max(count - 1, 1))
    past = np.clip((steps - edge) / slope + 0.5, 0.0, 1.0)
    shade = (edge - 1.0 + past) * _BLENDS
    entries: Bytes = np.minimum(np.rint(shade), (count - 1) * _BLENDS).astype(np.uint8)
    return entries


@dataclass(frozen=True)
class _Lookup:
    inside: NDArray[np.bool_]
    index: NDArray[np.int32]
    nearest: NDArray[np.int32]
    w00: NDArray[np.float32]
    w01: NDArray[np.float32]
    w10: NDArray[np.float32]
    w11: NDArray[np.float32]


@lru_cache(maxsize=8)
def _lookup(root: float, rotation: int) -> _Lookup:
    """For every pixel of the disc its place on the fine polar grid, with the four weights; made once a type."""
    centre = (np.arange(SIDE) + 0.5) / SIDE * 2.0 - 1.0
    x, y = np.meshgrid(centre * rotation, -centre)
    radius = np.hypot(x, y).ravel()
    inside = (radius >= root) & (radius <= 1.0)
    ring = (radius[inside] - root) / (1.0 - root) * (_RINGS - 1)
    spoke = (np.arctan2(x, -y).ravel()[inside] % (2.0 * np.pi)) / (2.0 * np.pi) * _SPOKES
    i = np.minimum(ring.astype(np.int32), _RINGS - 2)
    j = np.minimum(spoke.astype(np.int32), _SPOKES - 1)
    a, b = (ring - i).astype(np.float32), (spoke - j).astype(np.float32)
    index = (i * (_SPOKES + 1) + j).astype(np.int32)
    nearest = (np.rint(ring).astype(np.int32) * _SPOKES + np.rint(spoke).astype(np.int32) % _SPOKES).astype(np.int32)
    return _Lookup(inside, index, nearest, (1 - a) * (1 - b), (1 - a) * b, a * (1 - b), a * b)


@lru_cache(maxsize=32)
def _palette(count: int) -> tuple[bytes, bytes]:
    """PLTE and tRNS chunk contents: steps and their blends, then one transparent entry."""
    steps = theme.map_steps(count)
    colours = bytearray()
    for low, high in zip(steps, (*steps[1:], steps[-1]), strict=True):
        for blend in range(_BLENDS):
            share = blend / _BLENDS
            colours += bytes(round(a + (b - a) * share) for a, b in zip(low, high, strict=True))
    clear = bytes(theme.map_steps(1)[0])
    return bytes(colours) + clear, bytes([255]) * (len(colours) // 3) + b"\0"


def _png(pixels: Bytes, palette: tuple[bytes, bytes], level: int) -> bytes:
    """An 8-bit indexed PNG (ISO/IEC 15948): header, palette, transparency, one data chunk without row filters."""
    height, width = pixels.shape
    rows = np.zeros((height, width + 1), dtype=np.uint8)
    rows[:, 1:] = pixels
    chunks = (
        (b"IHDR", struct.pack(">IIBBBBB", width, height, 8, 3, 0, 0, 0)),
        (b"PLTE", palette[0]),
        (b"tRNS", palette[1]),
        (b"IDAT", zlib.compress(rows.tobytes(), level)),
        (b"IEND", b""),
    )
    out = bytearray(b"\x89PNG\r\n\x1a\n")
    for kind, data in chunks:
        out += struct.pack(">I", len(data)) + kind + data + struct.pack(">I", zlib.crc32(kind + data))
    return bytes(out)
