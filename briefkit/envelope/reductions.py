"""How much slower before a turn: the largest reduction over a work area, row by row of mass.

A reduction is knots below the manual's VNE, never a speed beside a bank angle: it cannot be flown as a target, and it
is the manual's own grammar. It can only lower what a crew is told.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from enum import StrEnum

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.model import Aircraft, Stated
from briefkit.aircraft.operation import FleetEntry, WorkArea
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.days import Block, block_of
from briefkit.envelope.equivalent import EquivalentVne, covered_banks, equivalent_vne, equivalent_vnes
from briefkit.errors import Reason
from briefkit.units import Speed, SpeedKind

Floats = NDArray[np.float64]

COVERED_BANK_STEP_DEG = 5
LOWEST_BRIEFED_BANK_DEG = 10


class RowKind(StrEnum):
    """What a row of the reduction table says."""

    REDUCTION = "reduction"
    COVERED = "covered bank with its own reduction"
    VNE_LIMITS = "VNE still limits"
    NO_TURN = "no turn briefed"
    UNDER_FLOOR = "no turn: the answer is under the floor"


@dataclass(frozen=True)
class Floor:
    """The lowest speed an answer may have, indicated, and whose it is."""

    speed: Speed
    text: str
    reason: str


@dataclass(frozen=True)
class ReductionRow:
    """One mass. `bank_deg` is the bank the row holds to; `reduction` is in the type's unit, rounded up to its step.

    `at` is the block point that sets the row and `answer` the equivalent VNE there (None where no number is printed);
    `exact` is the largest reduction before rounding. `covered_load` is the load factor that the chart reaches at every
    point of the block, floored to 0.01; 0 where somewhere not even level flight is on it.
    """

    mass: Stated
    kind: RowKind
    bank_deg: int
    reduction: float
    exact: float
    at: Condition | None
    answer: EquivalentVne | None
    covered_load: float = 0.0


@dataclass(frozen=True)
class ReductionTable:
    """The table of section 2 of the crew's page: one briefed bank, rows heaviest first."""

    brief_bank_deg: float
    unit: str
    rows: tuple[ReductionRow, ...]
    block: Block
    floor: Floor


def floor_of(aircraft: Aircraft, fleet: FleetEntry) -> Floor:
    """Highest of climb speed, IMC minimum when briefed, company minimum manoeuvring speed, foot of the calibration."""
    unit = aircraft.units

    def floor(value: float, text: str, reason: str) -> Floor:
        return Floor(Speed(value, SpeedKind.INDICATED, unit.speed), text, reason)

    candidates = [floor(aircraft.limits.climb_speed.value, aircraft.limits.climb_speed.text, "climb speed")]
    if aircraft.calibration.in_manual:
        low = aircraft.calibration.lowest_indicated
        candidates.append(floor(low, units.show(low, "speed", unit.speed), "foot of the airspeed calibration"))
    for stated, reason in (
        (fleet.imc_speed, "IMC minimum"),
        (fleet.minimum_manoeuvring_speed, "company minimum manoeuvring speed"),
    ):
        if stated is not None:
            candidates.append(floor(stated.value, stated.text, reason))
    return max(candidates, key=lambda one: one.speed)


def reductions(aircraft: Aircraft, fleet: FleetEntry, area: WorkArea) -> ReductionTable:
    """The table for one aircraft over one work area.

    Every point of the block is evaluated at the briefed bank with the rotor at 100 %. Where part of the block is
    beyond the chart the row holds to the smallest covered bank, rounded down to 5 degrees, with the largest reduction
    at that bank; under 10 degrees no turn is briefed. Raises the refusal of a block point that the manual itself
    forbids.
    """
    block = block_of(aircraft, area)
    floor = floor_of(aircraft, fleet)
    bank = fleet.brief_bank.value
    rows = tuple(
        replace(
            _row(aircraft, fleet, mass, block, bank, floor), covered_load=_covered_load(aircraft, fleet, mass, block)
        )
        for mass in fleet.masses
    )
    return ReductionTable(math.degrees(bank), aircraft.units.speed, rows, block, floor)


def _row(aircraft: Aircraft, fleet: FleetEntry, mass: Stated, block: Block, bank: float, floor: Floor) -> ReductionRow:
    points = _points(fleet, mass, block, bank)
    answers = equivalent_vnes(aircraft, points, upper=False)
    kind, bank_deg = RowKind.REDUCTION, round(math.degrees(bank))
    if np.any(answers.reason == Reason.BEYOND_CHART):
        banks, _ = covered_banks(aircraft, points)
        smallest = math.degrees(float(np.nanmin(banks))) if np.any(np.isfinite(banks)) else 0.0
        kind, bank_deg = RowKind.COVERED, int(units.round_down(smallest, COVERED_BANK_STEP_DEG))
        if bank_deg < LOWEST_BRIEFED_BANK_DEG:
            return ReductionRow(mass, RowKind.NO_TURN, 0, 0.0, 0.0, None, None)
        points = _points(fleet, mass, block, math.radians(bank_deg))
        answers = equivalent_vnes(aircraft, points, upper=False)
    refused = np.isin(answers.reason, (Reason.NONE, Reason.OUTSIDE_CALIBRATION), invert=True)
    if np.any(refused):
        equivalent_vne(aircraft, _single(points, int(np.argmax(refused))))  # raises, naming the limit
    # An answer without an indicated speed lies under the foot of the calibration, which is a floor.
    unreadable = answers.reason == Reason.OUTSIDE_CALIBRATION
    worst = int(np.argmax(np.where(unreadable, np.inf, answers.below_vne)))
    exact = 0.0 if unreadable[worst] else float(answers.below_vne[worst])
    reduction = units.round_up(exact, aircraft.units.speed_step)
    lowest_floor = floor.speed.number
    at = _single(points, worst)
    if bool(unreadable[worst]) or np.all(answers.vne - reduction < lowest_floor):
        return ReductionRow(mass, RowKind.UNDER_FLOOR, bank_deg, 0.0, exact, at, None)
    if reduction == 0.0 and kind is RowKind.REDUCTION:
        kind = RowKind.VNE_LIMITS
    return ReductionRow(mass, kind, bank_deg, reduction, exact, at, equivalent_vne(aircraft, at))


def _covered_load(aircraft: Aircraft, fleet: FleetEntry, mass: Stated, block: Block) -> float:
    banks, reasons = covered_banks(aircraft, _points(fleet, mass, block, 0.0))
    if np.any(reasons != Reason.NONE):
        return 0.0
    return math.floor(100.0 / math.cos(float(np.min(banks))) + 1e-9) / 100.0


def _points(fleet: FleetEntry, mass: Stated, block: Block, bank: float) -> Conditions:
    height, oat = (grid.ravel() for grid in np.meshgrid(block.heights, block.temperatures, indexing="ij"))
    return Conditions.si(
        mass=mass.value,
        pressure_altitude=height,
        oat=oat,
        load_factor=1.0 / math.cos(bank),
        climb=0.0 if fleet.climb is None else fleet.climb.value,
        mass_spread=fleet.mass_spread,
        oat_spread=fleet.temperature_spread,
    )


def _single(points: Conditions, index: int) -> Condition:
    values = {name: float(getattr(points, name)[index]) for name in Condition.__dataclass_fields__ if name != "ias"}
    return Condition.si(**values)
