"""The rotor disc from above, nose up the page: a stepped map with blades, rotation, wind and reversed flow."""

from __future__ import annotations

import math
from collections.abc import Sequence

import bqplot
import ipywidgets
import numpy as np
from numpy.typing import ArrayLike, NDArray

from briefkit.figures import canvas, theme
from briefkit.figures.canvas import Margins, put, text_width, write
from briefkit.figures.hatch import hatch
from briefkit.figures.raster import Polar, disc_png, refine
from briefkit.units import show_number

Floats = NDArray[np.float64]

_ROOM = Margins(0, 0, 0, 0)
_HEIGHT = 356
_RADIUS = 138.0  # px; the sides keep room for words, so that they need not be turned
_HALF_WIDTH = theme.WIDTH / 2.0 / _RADIUS
_HALF_HEIGHT = _HEIGHT / 2.0 / _RADIUS
_STEP_SIZE = 11.0  # px, of the numbers on the map
_FINE = np.linspace(0.0, 2.0 * math.pi, 121)
_LABEL_RAYS = (180.0, 165.0, 150.0, 135.0, 120.0, 105.0, 90.0)


class DiscFigure:
    """A live bqplot figure of one rotor's disc: built once, changed in place by `update`."""

    def __init__(self, *, blades: int, rotation: int, root_cutout: float, unit: str) -> None:
        """A figure for a rotor of `blades` blades, `rotation` +1 anticlockwise seen from above or -1 clockwise.

        `root_cutout` is a fraction of the radius (0 up to 0.9), `unit` the unit of the values as it is printed.
        """
        if blades < 2 or rotation not in (1, -1) or not 0.0 <= root_cutout < 0.9:
            raise ValueError(f"not a rotor: {blades} blades, rotation {rotation}, root cut-out {root_cutout}")
        self._blades, self._rotation, self._unit = blades, rotation, unit
        self._root = max(root_cutout, 0.02)
        self._blade_azimuths = _spread_blades(blades)
        self._rays = [ray for ray in _LABEL_RAYS if all(_apart(ray, psi) > 7.0 for psi in self._blade_azimuths)]
        self._plane = canvas.plane(
            (-_HALF_WIDTH, _HALF_WIDTH, -_HALF_HEIGHT, _HALF_HEIGHT), theme.WIDTH, _HEIGHT, _ROOM
        )
        self._make_marks()
        self.figure = canvas.figure(self._plane, _ROOM, self._marks_in_order())
        self._draw_rotor()

    def update(
        self,
        radii: ArrayLike,
        azimuths: ArrayLike,
        values: ArrayLike,
        levels: ArrayLike,
        *,
        reversed_azimuths: ArrayLike = (),
        reversed_radii: ArrayLike = (),
        wind_from_deg: float | None = 0.0,
    ) -> None:
        """New values on the disc.

        `radii` (n,) fractions of the radius; `azimuths` (m,) rad, 0 over the tail and growing with rotation, even over
        one turn; `values` (n, m) in the unit; `levels` rising edges of the steps. `reversed_azimuths` [rad] and
        `reversed_radii` (k,) are the closed boundary of the reversed-flow region (empty: none). `wind_from_deg` is
        where the relative wind comes from, clockwise from the nose seen from above (None: no wind). Not finite raises
        ValueError.
        """
        polar = refine(radii, azimuths, values, self._root)
        edges = np.asarray(levels, dtype=float)
        self._show_map(disc_png(polar, edges, self._rotation))
        self._show_levels(polar, edges)
        self._show_reversed(np.asarray(reversed_azimuths, dtype=float), np.asarray(reversed_radii, dtype=float))
        self._show_wind(wind_from_deg)

    @property
    def spare(self) -> tuple[ipywidgets.Image, ...]:
        """The two image models that take turns: the one not shown is not reachable from the figure."""
        return tuple(self._images)

    # --- construction ---

    def _make_marks(self) -> None:
        area = self._plane
        self._images = [ipywidgets.Image(value=b"", format="png") for _ in range(2)]
        self._turn = 0
        self._map = bqplot.Image(
            image=self._images[0], x=[-1.0, 1.0], y=[-1.0, 1.0], scales=area.scales, pixelated=False, enable_hover=False
        )
        self._rim = canvas.lines(area, theme.MAP_INK, 1.2, close_path=True)
        self._root_ring = canvas.lines(area, theme.MAP_INK, 0.8, close_path=True)
        self._region = canvas.patch(area, theme.MAP_PAPER, edge=theme.MAP_INK, width=1.4)
        self._strokes = canvas.lines(area, theme.MAP_INK, 0.8)
        self._leader = canvas.lines(area, theme.GREY, theme.THIN)
        self._blade = canvas.patch(area, theme.MAP_INK)
        self._hub = canvas.patch(area, theme.INK)  # on the page, not on the map
        self._plates = canvas.patch(area, theme.MAP_PAPER)
        self._steps = canvas.texts(area, theme.MAP_INK, align="middle", size=_STEP_SIZE)
        self._arc = canvas.lines(area, theme.INK, theme.LINE)
        self._arc_head = canvas.patch(area, theme.INK)
        self._wind = canvas.lines(area, theme.INK, theme.LINE)
        self._wind_head = canvas.patch(area, theme.INK)
        self._left = canvas.texts(area, align="end")
        self._right = canvas.texts(area, align="start")
        self._middle = canvas.texts(area, align="middle")
        self._wind_words = canvas.texts(area, align="start")
        self._note = canvas.texts(area, theme.GREY, align="end")
        self._region_words = canvas.texts(area, theme.GREY, align="start" if self._rotation > 0 else "end")

    def _marks_in_order(self) -> list[bqplot.Mark]:
        return [
            self._map, self._rim, self._root_ring, self._region, self._strokes, self._blade, self._hub, self._plates,
            self._steps, self._leader, self._arc, self._arc_head, self._wind, self._wind_head, self._left, self._right,
            self._middle, self._wind_words, self._region_words, self._note,
        ]  # fmt: skip

    def _at(self, radius: ArrayLike, azimuth: ArrayLike) -> tuple[Floats, Floats]:
        """Rotor coordinates to the page: azimuth 0 at the foot, growing with rotation."""
        r, psi = np.asarray(radius, dtype=float), np.asarray(azimuth, dtype=float)
        return self._rotation * r * np.sin(psi), -r * np.cos(psi)

    def _draw_rotor(self) -> None:
        put(self._rim, *self._at(1.0, _FINE))
        put(self._root_ring, *self._at(self._root, _FINE))
        put(self._hub, *self._at(0.028, _FINE))
        along = np.array([0.0, self._root, self._root, 1.0, 1.0, self._root, self._root, 0.0])
        aside = np.array([0.006, 0.006, 0.012, 0.012, -0.012, -0.012, -0.006, -0.006])
        x, y = [], []
        for psi in self._blade_azimuths:
            (ex, ey), (nx, ny) = self._at(1.0, psi), self._at(1.0, psi + math.pi / 2.0)
            x.append(along * ex + aside * nx)
            y.append(along * ey + aside * ny)
        colours = [theme.MAP_INK] * self._blades
        put(self._blade, x, y, colors=colours, fill_colors=colours, fill_opacities=[1.0] * self._blades)
        turn = np.radians(np.linspace(22.0, 62.0, 25))
        put(self._arc, *self._at(1.09, turn))
        put(self._arc_head, *self._head(1.09, float(turn[-1])))
        write(self._note, [(_HALF_WIDTH - 0.03, _HALF_HEIGHT - 0.09, f"numbers in {self._unit}")])

    def _point(self, radius: float, azimuth: float) -> tuple[float, float]:
        x, y = self._at(radius, azimuth)
        return float(x), float(y)

    def _head(self, radius: float, azimuth: float) -> tuple[list[float], list[float]]:
        """A head for an arrow that runs along an arc with rotation."""
        tip = self._point(radius, azimuth + 0.075)
        wings = [self._point(radius + side, azimuth - 0.01) for side in (0.04, -0.04)]
        corners = [tip, *wings]
        return [corner[0] for corner in corners], [corner[1] for corner in corners]

    # --- updates ---

    def _show_map(self, png: bytes) -> None:
        # bqplot redraws an Image mark only when its image is another widget, so two take turns.
        self._turn = 1 - self._turn
        image = self._images[self._turn]
        image.value = png
        self._map.image = image

    def _show_levels(self, polar: Polar, edges: Floats) -> None:
        """The value of an edge, on a plate upon it: along the nose where it runs there, else further round.

        Ink on the middle steps would not be read by a red lamp, which leaves only the red part of their light.
        """
        placed: list[tuple[float, float, str]] = []
        for index in range(1, edges.size - 1):
            text = show_number(float(edges[index]), 0 if np.all(edges == np.round(edges)) else 1)
            for ray in self._rays:
                spot = self._crossing(polar, float(edges[index]), math.radians(ray))
                if spot is not None and _has_room(spot, text, placed):
                    placed.append((*spot, text))
                    break
        fills = [theme.MAP_PAPER] * max(len(placed), 1)
        plates = [_plate(*place) for place in placed]
        put(
            self._plates,
            [x for x, _ in plates],
            [y for _, y in plates],
            colors=fills,
            fill_colors=fills,
            fill_opacities=[1.0] * len(fills),
        )
        write(self._steps, placed)

    def _crossing(self, polar: Polar, level: float, azimuth: float) -> tuple[float, float] | None:
        """Where a level crosses a ray, outermost, well inside the disc; None if it does not."""
        spokes = polar.values.shape[1]
        profile = polar.values[:, round(azimuth / (2.0 * math.pi) * spokes) % spokes] - level
        crossings = np.flatnonzero((profile[:-1] < 0.0) != (profile[1:] < 0.0))
        for i in crossings[::-1]:
            share = profile[i] / (profile[i] - profile[i + 1])
            radius = float(polar.radii[i] + share * (polar.radii[i + 1] - polar.radii[i]))
            if max(0.12, self._root + 0.05) < radius < 0.955:
                return self._point(radius, azimuth)
        return None

    def _show_reversed(self, azimuths: Floats, radii: Floats) -> None:
        if azimuths.size == 0:
            put(self._region, [], [])
            put(self._strokes, [], [])
            put(self._leader, [], [])
            write(self._region_words, [])
            return
        x, y = self._at(radii, azimuths)
        put(self._region, x, y)
        put(self._strokes, *hatch(x, y, 0.045))
        side = -float(self._rotation)
        words = (side * (_HALF_WIDTH - 0.03), -_HALF_HEIGHT + 0.2)
        put(self._leader, [side * 0.99, float(np.mean(x))], [-_HALF_HEIGHT + 0.2, float(np.mean(y))])
        write(self._region_words, [(*words, "reversed"), (words[0], words[1] - 0.1, "flow")])

    def _show_wind(self, wind_from_deg: float | None) -> None:
        """The arrow of the relative wind, and the words round the rim."""
        right, left = (90, 270) if self._rotation > 0 else (270, 90)
        names = {0: "nose 180°", 90: f"{right}°", 180: "tail 0°", 270: f"{left}°"}
        sides: dict[int, str] = {}
        if wind_from_deg is None:
            put(self._wind, [], [])
            put(self._wind_head, [], [])
            write(self._wind_words, [])
        else:
            self._draw_wind(wind_from_deg)
            turned = (wind_from_deg + 90.0 * self._rotation) / 90.0
            quarter = round(turned) % 4 * 90
            if abs(turned - round(turned)) < 0.25:  # between the quarters no side of the aircraft is the advancing one
                sides = {quarter: "advancing", (quarter + 180) % 360: "retreating"}
        rows = {}
        for bearing, name in names.items():
            side = sides.get(bearing)
            if bearing in (0, 180):
                rows[bearing] = [f"{name}, {side} side" if side else name]
            else:
                rows[bearing] = [side, f"side {name}"] if side else [name]
        write(self._middle, [(0.0, 1.085, rows[0][0]), (0.0, -1.085, rows[180][0])])
        turning = (*self._point(1.17, math.radians(42.0)), "rotation")
        extra = {self._rotation: [turning], -self._rotation: []}
        write(self._right, [*_stack(1.06, rows[90]), *extra[1]])
        write(self._left, [*_stack(-1.06, rows[270]), *extra[-1]])

    def _draw_wind(self, wind_from_deg: float) -> None:
        """Beside the bearing the wind comes from, on the side away from the rotation arrow."""
        busy = 180.0 - 42.0 * self._rotation
        beside = max(
            (wind_from_deg - 25.0, wind_from_deg + 25.0), key=lambda b: abs((b - busy + 180.0) % 360.0 - 180.0)
        )
        place, blow = math.radians(beside), math.radians(wind_from_deg)
        x, y = 1.16 * math.sin(place), 1.16 * math.cos(place)
        dx, dy = -math.sin(blow), -math.cos(blow)
        put(self._wind, [x - 0.1 * dx, x + 0.06 * dx], [y - 0.1 * dy, y + 0.06 * dy])
        corners = [(0.12, 0.0), (0.04, 0.04), (0.04, -0.04)]
        put(self._wind_head, [x + a * dx - b * dy for a, b in corners], [y + a * dy + b * dx for a, b in corners])
        hand = 1.0 if x > 0.0 else -1.0
        aside = x + hand * (0.1 + 0.06 * abs(dx))
        words = [(aside, y + 0.05, "relative"), (aside, y - 0.05, "wind")]
        write(self._wind_words, words, align="start" if hand > 0 else "end")


def _has_room(spot: tuple[float, float], text: str, placed: Sequence[tuple[float, float, str]]) -> bool:
    """Whether a plate there lies inside the rim and clear of those placed before."""
    x, y = _plate(*spot, text)
    return float(np.hypot(x, y).max()) < 1.0 and all(
        abs(spot[0] - p[0]) > 0.23 or abs(spot[1] - p[1]) > 0.1 for p in placed
    )


def _plate(x: float, y: float, text: str) -> tuple[Floats, Floats]:
    """Corners, a little cut, of a plate that a text centred on (x, y) stands on."""
    wide, high, cut = 0.5 * text_width(text, _STEP_SIZE) + 1.5, 0.5 * _STEP_SIZE + 0.75, 1.5
    across = np.array([cut - wide, wide - cut, wide, wide, wide - cut, cut - wide, -wide, -wide])
    up = np.array([high, high, high - cut, cut - high, -high, -high, cut - high, high - cut])
    return x + across / _RADIUS, y + up / _RADIUS


def _stack(x: float, rows: Sequence[str]) -> list[tuple[float, float, str]]:
    """Rows of words one under the other, about the middle of the page."""
    return [(x, 0.05 * (len(rows) - 1) - 0.1 * index, row) for index, row in enumerate(rows)]


def reversed_region(radii: ArrayLike, azimuths: ArrayLike, speed: ArrayLike, root: float) -> tuple[Floats, Floats]:
    """Closed boundary (azimuths [rad], radii) of the region where `speed` (radii, azimuths) is negative; empty: none.

    Between the root cut-out and the outermost change of sign on each azimuth, as the arrays of `DiscFigure.update`.
    """
    polar = refine(radii, azimuths, speed, root)
    inside = polar.values[0] < 0.0
    if not np.any(inside):
        return np.empty(0), np.empty(0)
    spokes = inside.size
    start = int(np.flatnonzero(~inside)[0]) if not np.all(inside) else 0
    members = [(start + step) % spokes for step in range(spokes) if inside[(start + step) % spokes]]
    outer = [_edge(polar, member) for member in members]
    psi = 2.0 * math.pi / spokes * np.array([member if member >= start else member + spokes for member in members])
    return np.concatenate([psi, psi[::-1]]), np.concatenate([outer, np.full(len(members), polar.radii[0])])


def _edge(polar: Polar, spoke: int) -> float:
    """Radius of the outermost change from negative to positive on one spoke; the tip if it never changes."""
    profile = polar.values[:, spoke]
    changes = np.flatnonzero((profile[:-1] < 0.0) & (profile[1:] >= 0.0))
    if changes.size == 0:
        return 1.0
    i = changes[-1]
    share = profile[i] / (profile[i] - profile[i + 1])
    return float(polar.radii[i] + share * (polar.radii[i + 1] - polar.radii[i]))


def _spread_blades(blades: int) -> list[float]:
    """Where the blades are drawn: evenly, as far as possible from the written numbers and the reversed flow."""
    best = max(range(360), key=lambda start: _clearance(start, blades))
    return [math.radians(best + 360.0 * index / blades) for index in range(blades)]


def _clearance(start_deg: float, blades: int) -> float:
    azimuths = [math.radians(start_deg + 360.0 * index / blades) for index in range(blades)]
    return min(_apart(keep, azimuth) for azimuth in azimuths for keep in (180.0, 270.0))


def _apart(angle_deg: float, azimuth: float) -> float:
    """The angle between a direction in degrees and an azimuth in radians [deg]."""
    return abs((angle_deg - math.degrees(azimuth) + 180.0) % 360.0 - 180.0)


def levels_for(low: float, high: float, choices: Sequence[float] = (10.0, 20.0, 25.0, 50.0, 100.0)) -> Floats:
    """Edges of at most twelve even steps of a round size that cover low to high."""
    step = next((choice for choice in choices if (high - low) / choice <= 12.0), choices[-1])
    first, last = math.floor(low / step + 1e-9), math.ceil(high / step - 1e-9)
    return np.array([index * step for index in range(first, last + 1)], dtype=float)
