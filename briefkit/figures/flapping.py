"""Flapping: the flap angle round the azimuth, and the tip-path plane from the side and from behind."""

from __future__ import annotations

import math
from collections.abc import Sequence

import bqplot
import numpy as np
from numpy.typing import NDArray

from briefkit.figures import canvas, theme
from briefkit.figures.canvas import Margins, put, write
from briefkit.units import show_number

Floats = NDArray[np.float64]

_CURVE_ROOM = Margins(40, 96, 30, 52)
_CURVE_HEIGHT = 280
_SIDE_ROOM = Margins(0, 0, 0, 0)
_SIDE_HEIGHT = 170
_PSI = np.linspace(0.0, 360.0, 73)
_EXAGGERATIONS = (6.0, 5.0, 4.0, 3.0, 2.0, 1.0)


class FlapCurveFigure:
    """Flap angle against azimuth over one turn, with the coning line: built once, changed in place."""

    def __init__(self) -> None:
        area = self._area = canvas.plane((0.0, 360.0, -1.0, 1.0), theme.WIDTH, _CURVE_HEIGHT, _CURVE_ROOM)
        self._zero = canvas.lines(area, theme.RULE, theme.THIN)
        self._coning = canvas.lines(area, theme.GREY, theme.LINE, "dashed")
        self._before = canvas.lines(area, theme.GREY, theme.LINE, "dotted")
        self._curve = canvas.lines(area, theme.COMPUTED, theme.HEAVY)
        self._dots = bqplot.Scatter(
            x=[], y=[], scales=area.scales, colors=[theme.COMPUTED], default_size=45, enable_hover=False
        )
        self._dot_words = [canvas.texts(area, theme.COMPUTED, bold=True, align="middle", dy=dy) for dy in (-13, 14)]
        self._coning_words = canvas.texts(area, theme.GREY, dx=8)
        self._before_words = canvas.texts(area, theme.GREY, dx=8)
        self._sides = canvas.texts(area, theme.INK, align="middle")
        self._title = canvas.texts(area, theme.GREY)
        self._x_axis = canvas.axis(area.x, "bottom", [0, 90, 180, 270, 360], [f"{psi}°" for psi in range(0, 361, 90)])
        self._y_axis = canvas.axis(area.y, "left", [-1.0, 1.0])
        marks = [
            self._zero, self._coning, self._before, self._curve, self._dots, *self._dot_words, self._coning_words,
            self._before_words, self._sides,
        ]  # fmt: skip
        self.figure = canvas.figure(area, _CURVE_ROOM, [*marks, self._title], [self._x_axis, self._y_axis])

    def update(self, b0_deg: float, b1c_deg: float, b1s_deg: float, before_deg: float | None = None) -> None:
        """New coefficients [deg] of beta = b0 + b1c cos(psi) + b1s sin(psi), up positive, psi 0 over the tail.

        `before_deg`: the flap angle all round where the controls were trimmed, drawn dotted (None: nothing held).
        """
        psi = np.radians(_PSI)
        beta = b0_deg + b1c_deg * np.cos(psi) + b1s_deg * np.sin(psi)
        area = self._area
        step = 1.0 if np.ptp(beta) < 8.0 else 2.0
        room = 0.13 * max(float(np.ptp(beta)), step)  # for the words over the highest and under the lowest point
        low = min(math.floor((beta.min() - room) / step) * step, 0.0)
        high = math.ceil((beta.max() + room) / step) * step
        canvas.rescale(area, (0.0, 360.0, low, high))
        ticks = canvas.ticks(low, high, 6)
        # One decimal always: the front end keeps the text of a tick that stays, so "3" would stand beside "3.5".
        canvas.set_ticks(self._y_axis, ticks, [show_number(tick, 1) for tick in ticks.tolist()])
        put(self._zero, [0.0, 360.0], [0.0, 0.0])
        put(self._coning, [0.0, 360.0], [b0_deg, b0_deg])
        put(self._curve, _PSI, beta)
        if before_deg is None:
            put(self._before, [], [])
        else:
            put(self._before, [0.0, 360.0], [before_deg, before_deg])
        self._write(b0_deg, b1c_deg, b1s_deg, before_deg)

    def _write(self, b0: float, b1c: float, b1s: float, before: float | None) -> None:
        area = self._area
        tilt = math.hypot(b1c, b1s)
        words: Sequence[list[tuple[float, float, str]]] = ([], [])
        if tilt > 0.005:
            top = math.degrees(math.atan2(b1s, b1c)) % 360.0
            for place, (psi, beta) in enumerate(((top, b0 + tilt), ((top + 180.0) % 360.0, b0 - tilt))):
                shown = min(max(psi, 44.0), 318.0)  # keeps the words inside; the dot stays where it is
                words[place].append((shown, beta, f"{show_number(beta, 1)}° at {show_number(psi)}°"))
            put(self._dots, [top, (top + 180.0) % 360.0], [b0 + tilt, b0 - tilt])
        else:
            put(self._dots, [], [])
        for mark, places in zip(self._dot_words, words, strict=True):
            write(mark, places)
        gap = (area.y.max - area.y.min) / area.height * 7.0
        rows = [(360.0, b0 + gap, "coning"), (360.0, b0 - gap, f"{show_number(b0, 1)}°")]
        write(self._coning_words, rows)
        # Where both lines meet, their words would lie on one another: the one that stays is the coning's.
        apart = before is not None and abs(before - b0) > 4.5 * gap
        write(self._before_words, [(360.0, before, "trimmed")] if before is not None and apart else [])
        foot = area.y_at(area.height + 36.0)
        names = ((0, "tail"), (90, "advancing"), (180, "nose"), (270, "retreating"), (360, "tail"))
        write(self._sides, [(float(at), foot, name) for at, name in names])
        write(self._title, [(area.x_at(-_CURVE_ROOM.left + 2.0), area.y_at(-18.0), "flap angle, degrees up")])


class TipPathFigure:
    """The tip-path plane from the left side and from behind, angles drawn larger than they are, and it says so."""

    def __init__(self, *, rotation: int) -> None:
        """`rotation` +1 anticlockwise seen from above, -1 clockwise: it decides which side advances."""
        if rotation not in (1, -1):
            raise ValueError(f"rotation is +1 or -1, not {rotation}")
        self._rotation = rotation
        half_height = _SIDE_HEIGHT / theme.WIDTH * 2.2
        area = self._area = canvas.plane((-2.2, 2.2, -half_height, half_height), theme.WIDTH, _SIDE_HEIGHT, _SIDE_ROOM)
        self._level = canvas.lines(area, theme.RULE, theme.THIN)
        self._shaft = canvas.lines(area, theme.GREY, theme.LINE)
        self._plane = canvas.lines(area, theme.COMPUTED, theme.LINE, "dashed")
        self._before = canvas.lines(area, theme.GREY, theme.LINE, "dotted")
        self._blades = canvas.lines(area, theme.INK, theme.HEAVY)
        self._names = canvas.texts(area, theme.GREY, align="middle")
        self._tilt = canvas.texts(area, theme.COMPUTED, bold=True, align="middle")
        marks = [self._level, self._shaft, self._plane, self._blades, self._before, self._names, self._tilt]
        self.figure = canvas.figure(area, _SIDE_ROOM, marks)

    def update(self, b0_deg: float, b1c_deg: float, b1s_deg: float, before_deg: float | None = None) -> None:
        """New coefficients [deg], as for `FlapCurveFigure`; the blades where the controls were trimmed drawn dotted."""
        largest = max(abs(b0_deg) + math.hypot(b1c_deg, b1s_deg), abs(before_deg or 0.0))
        factor = next((f for f in _EXAGGERATIONS if f * largest <= 33.0), 1.0)
        # (centre, flap of the blade pointing left on the page, flap of the one pointing right): nose left, then from
        # behind, where an anticlockwise rotor advances on the right.
        nose, tail = b0_deg - b1c_deg, b0_deg + b1c_deg
        advancing, retreating = b0_deg + b1s_deg, b0_deg - b1s_deg
        left, right = (retreating, advancing) if self._rotation > 0 else (advancing, retreating)
        views = ((-1.1, nose, tail), (1.1, left, right))
        colours = [theme.INK] * 2
        arms = [_arms(centre, one, other, factor) for centre, one, other in views]
        put(self._blades, [arm[0] for arm in arms], [arm[1] for arm in arms], colors=colours)
        self._show_before(before_deg, factor)
        put(self._plane, [arm[0][::2] for arm in arms], [arm[1][::2] for arm in arms], colors=[theme.COMPUTED] * 2)
        put(self._level, [[c - 0.86, c + 0.86] for c, *_ in views], [[0.0, 0.0]] * 2, colors=[theme.RULE] * 2)
        put(self._shaft, [[c, c] for c, *_ in views], [[0.0, -0.32]] * 2, colors=[theme.GREY] * 2)
        tips = [height for arm in arms for height in (arm[1][0], arm[1][2])]
        self._write(b1c_deg, b1s_deg, factor, [min(tip, 0.0) - 0.14 for tip in tips])

    def _show_before(self, before_deg: float | None, factor: float) -> None:
        if before_deg is None:
            put(self._before, [], [])
            return
        arms = [_arms(centre, before_deg, before_deg, factor) for centre in (-1.1, 1.1)]
        put(self._before, [arm[0] for arm in arms], [arm[1] for arm in arms], colors=[theme.GREY] * 2)

    def _write(self, b1c: float, b1s: float, factor: float, below: Sequence[float]) -> None:
        sides = ("retreating", "advancing") if self._rotation > 0 else ("advancing", "retreating")
        foot = self._area.y.min + 0.08
        size = "disc tilt, " + ("true to angle" if factor == 1.0 else f"angles drawn {factor:g} times as large")
        names = [
            (-1.85, below[0], "nose"),
            (-0.35, below[1], "tail"),
            (0.42, below[2], sides[0]),
            (1.78, below[3], sides[1]),
            (-1.1, -0.45, "from the left"),
            (1.1, -0.45, "from behind"),
            (0.0, foot, size),
        ]
        write(self._names, names)
        back = f"{show_number(abs(b1c), 1)}° {'back' if b1c < 0.0 else 'forward'}" if abs(b1c) >= 0.05 else "no tilt"
        # Tilted towards the side whose blade is low: b1s > 0 lifts the advancing blade.
        low = "retreating" if b1s > 0.0 else "advancing"
        aside = f"{show_number(abs(b1s), 1)}° to the {low} side" if abs(b1s) >= 0.05 else "no tilt"
        top = self._area.y.max - 0.08
        write(self._tilt, [(-1.1, top, back), (1.1, top, aside)])


def _arms(centre: float, left_deg: float, right_deg: float, factor: float) -> tuple[list[float], list[float]]:
    """Left tip, hub, right tip of two opposite blades, flap angles drawn `factor` times as large."""
    left, right = math.radians(factor * left_deg), math.radians(factor * right_deg)
    x = [centre - 0.86 * math.cos(left), centre, centre + 0.86 * math.cos(right)]
    return x, [0.86 * math.sin(left), 0.0, 0.86 * math.sin(right)]
