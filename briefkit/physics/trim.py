"""Steady flight of a rotor: the ways to ask for it.

Trimmed: the rotor carries the apparent weight and pulls the airframe's drag along a given flight path, with no net hub
moment, so the shaft stands on the disc (or, where a centre of gravity is stated, with no moment about that). Held: the
controls stay where they are. Torque-free: no engine. All are batches over one set of equations (`balance`), in the
shaft's axes turned to the wind, where the wind's direction over the ground plays no part; answers are turned back.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from briefkit.physics.balance import BALANCED, CLIMB, GLIDING, HELD, TRIMMED, WINDMILLING, Model, disc_of, loads_of
from briefkit.physics.rotor import Case, Rotor, State, Values, case_of
from briefkit.physics.section import Section
from briefkit.physics.solving import solved, turned
from briefkit.physics.steady import Elements, Trim, tip_angle

__all__ = ["Controls", "Elements", "Gust", "Trim", "held", "torque_free", "trim", "vertical_gust"]

Array = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Controls:
    """What a pilot holds: floats or arrays of one batch length [rad], in axes fixed to the shaft.

    `t0`, `t1c`, `t1s` pitch; `shaft_c`, `shaft_s`: the shaft's plane rises over azimuth by shaft_c cos(psi) +
    shaft_s sin(psi) from the plane normal to the apparent weight, so shaft_c is its tilt nose down.
    """

    t0: Values
    t1c: Values
    t1s: Values
    shaft_c: Values = 0.0
    shaft_s: Values = 0.0

    @classmethod
    def of(cls, flight: Trim) -> Controls:
        """The controls of a flight that was solved."""
        tilt, turn = flight.motion.tilt, flight.case.wind_azimuth
        return cls(flight.t0, flight.t1c, flight.t1s, tilt * np.cos(turn), tilt * np.sin(turn))

    def spread(self, case: Case) -> tuple[Case, Array]:
        """The case over the batch length of the controls, and (batch, 9) columns of `Motion` in wind axes.

        Of the columns pitch, tilt into the wind and climb are set, the rest are zero.
        """
        values = (self.t0, self.t1c, self.t1s, self.shaft_c, self.shaft_s)
        case = case.spread(*values)
        t0, t1c, t1s, shaft_c, shaft_s = (np.broadcast_to(np.asarray(v, float), (case.size,)) for v in values)
        t1c, t1s = turned(t1c, t1s, -case.wind_azimuth)
        tilt, _ = turned(shaft_c, shaft_s, -case.wind_azimuth)
        zero = np.zeros(case.size)
        return case, np.stack([t0, t1c, t1s, zero, zero, zero, zero, tilt, case.climb], axis=1)


def trim(
    rotor: Rotor,
    state: State,
    *,
    inflow: str = "white-blake",
    section: str | Section = "attached",
    grid: tuple[int, int] = (24, 12),
) -> Trim:
    """The rotor trimmed in a state: a batch, of length 1 for a single one.

    Blade element with tip loss, momentum inflow with a first-harmonic gradient, rigid flapping by harmonic balance,
    reversed flow kept. `inflow` names an entry of `inflow.INFLOWS`, `section` one of `section.SECTIONS` or is a
    section; `grid` = (azimuths, radii).

    A member outside the range of the model (advance ratio 0.5, blade loading CT/sigma 0.18, advancing-tip Mach 0.95 or
    the section's highest, descent into the rotor's own wake, nearer the ground than half the radius, a number that is
    not finite) gets `Reason.OUTSIDE_MODEL`; one for which no steady flight was found, `Reason.NO_TRIM` with the last
    residual. Raises `OutsideLimits` for names or grids that do not exist, ValueError for arrays of different lengths.
    """
    stated = np.any(np.asarray(state.hub_height) != 0.0) or np.any(np.asarray(state.cg_ahead) != 0.0)
    way = BALANCED if stated else TRIMMED
    return solved(rotor, state, way, Model.of(rotor, inflow, section, grid), case_of(rotor, state))


def held(
    rotor: Rotor,
    state: State,
    controls: Controls,
    *,
    gust: Values = 0.0,
    inflow: str = "white-blake",
    section: str | Section = "attached",
    grid: tuple[int, int] = (24, 12),
) -> Trim:
    """The rotor with its controls held: how the disc settles in a new state before the pilot answers.

    `controls` are usually `Controls.of` a trimmed flight, `state` that flight with something changed (after a glide,
    with the climb rate that was found); `gust` [m/s] of air straight up. The weight in the state is not used: `ct` is
    the thrust there is. Flapping from the shaft is in `hub_b1c`, `hub_b1s`; `disc_tilt` is that of the disc. Members,
    refusals and errors as for `trim`.
    """
    case, columns = controls.spread(case_of(rotor, state, gust))
    return solved(rotor, state, HELD, Model.of(rotor, inflow, section, grid), case, columns)


def torque_free(
    rotor: Rotor,
    state: State,
    controls: Controls | None = None,
    *,
    inflow: str = "white-blake",
    section: str | Section = "attached",
    grid: tuple[int, int] = (24, 12),
) -> Trim:
    """The rotor that needs no torque (autorotation).

    Without `controls`: trimmed, down the glide path that is found; `climb_rate` of the answer tells it, that of the
    state is not used. With controls: they are held, and the shaft's tilt to the wind is found; the weight is not used
    and `ct` tells the thrust (an autogiro's rotor). Members, refusals and errors as for `trim`.
    """
    model, case = Model.of(rotor, inflow, section, grid), case_of(rotor, state)
    if controls is None:
        return solved(rotor, state, GLIDING, model, case)
    case, columns = controls.spread(case)
    return solved(rotor, state, WINDMILLING, model, case, columns)


@dataclass(frozen=True, eq=False)
class Gust:
    """A flight met by air straight up, controls held: before, in the first instant, and when flapping has settled.

    `instant_tip_angle` [rad] and `instant_load` (thrust over that before), each (batch,): flapping and inflow as they
    were. NaN where either flight has a reason.
    """

    before: Trim
    instant_tip_angle: Array
    instant_load: Array
    settled: Trim


def vertical_gust(before: Trim, gust: Values) -> Gust:
    """What a gust of air straight up [m/s] does to a solved flight before the pilot answers; down is negative.

    A sharp-edged gust over the whole disc, the aircraft not yet moving with it, steady aerodynamics.
    """
    case, columns = Controls.of(before).spread(case_of(before.rotor, before.state, gust))
    columns[:, CLIMB] = before.motion.climb  # of a glide it was found, not stated
    settled = solved(before.rotor, before.state, HELD, before.model, case, columns)
    disc = disc_of(case, before.motion, before.model)
    gone = np.where(before.solved & settled.solved, 1.0, np.nan)
    angle = tip_angle(before.rotor, case, disc.terms)
    thrust = loads_of(case, before.motion, disc.sums).thrust
    return Gust(before, angle * gone, thrust / before.ct * gone, settled)
