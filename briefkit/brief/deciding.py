"""What decides where blade stall does not: a load or kit speed, or the advancing tip in the cold.

Read from what the manual itself says, its speeds and the shape of its chart; never from the name of a type. Everything
here is a sentence, or the manual's own speed: nothing raises what a crew is told.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Final

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.operation import FleetEntry, WorkArea
from briefkit.brief import words
from briefkit.envelope.days import block_of
from briefkit.envelope.reductions import reductions
from briefkit.envelope.speeds import true_of
from briefkit.physics import atmosphere

# Stall is called "not near" only where the manual's basic chart leaves this many steps of the reduction (10 kt, 20
# km/h) above the ruling speed in the briefed turn, at every point of the area (common practice, no source).
_CLEAR_STEPS: Final = 2.0
_LEAST_FALL: Final = 0.5 * units.KNOT


@dataclass(frozen=True)
class Ruling:
    """A speed of the configuration that lies at or below the basic chart all over the work area: it is VNE there.

    `text` is the speed as typed, `source` its page, `stall_near` False where the basic chart leaves room above it in
    the briefed turn.
    """

    text: str
    source: str
    stall_near: bool


def ruling_speed(aircraft: Aircraft, fleet: FleetEntry, area: WorkArea) -> Ruling | None:
    """The configuration's one VNE, where the basic chart is nowhere lower in the area; else None."""
    chart = aircraft.vne
    if chart.cap is None or aircraft.basic_vne is None:
        return None
    free = replace(aircraft, vne=replace(chart, cap=None, cap_text="", cap_source=""))
    block = block_of(aircraft, area)
    masses = np.array([mass.value for mass in fleet.masses])
    height, oat, mass = np.meshgrid(block.heights, block.temperatures, masses, indexing="ij")
    lowest = float(np.min(free.vne.indicated(height, oat, mass)))
    if not lowest >= chart.cap:
        return None
    table = reductions(free, fleet, area)
    clear = units.from_si(chart.cap, "speed", table.unit) + _CLEAR_STEPS * aircraft.units.speed_step
    answers = [row.answer.ias if row.answer is not None else -np.inf for row in table.rows]
    at_brief_bank = all(row.bank_deg == round(table.brief_bank_deg) for row in table.rows)
    return Ruling(chart.cap_text, chart.cap_source, not (at_brief_bank and min(answers) >= clear))


def ruled_turn(ruling: Ruling, aircraft: Aircraft, bank: str) -> str:
    """Section 2 in a sentence where a configuration's speed rules."""
    kit = f"{aircraft.configuration[:1].upper()}{aircraft.configuration[1:]}"
    when = "With the load" if any(speed.applies == "load" for speed in aircraft.speeds) else kit
    said = f"{when}: {words.indicated(aircraft, ruling.text)} ({ruling.source})."
    if ruling.stall_near:
        return f"{said} Up to {bank} of bank, blade stall asks for nothing below it."
    return f"{said} Blade stall is not near."


def tip_first(aircraft: Aircraft, area: WorkArea) -> str:
    """A sentence where the manual's chart falls towards the cold, because the advancing tip comes first; else empty.

    Blade loading alone would let VNE rise as the air gets colder and denser. A chart that falls there, with the
    advancing tip's Mach number higher than on the area's warm side, says that the tip sets it.
    """
    chart = aircraft.vne
    if not chart.temperatures:
        return ""
    cold, hot = area.low_temperature.value, area.high_temperature.value
    height = area.low_altitude.value
    nodes = np.array([cold, *(node for node in chart.temperatures if node > cold)])
    mass = aircraft.limits.max_mass.value
    speeds = np.asarray(chart.indicated(height, nodes, mass), dtype=float)
    if not np.isfinite(speeds[0]):
        return ""
    peak = int(np.nanargmax(speeds))
    if speeds[peak] - speeds[0] < _LEAST_FALL:
        return ""
    turn = float(nodes[peak])
    mach = _advancing_mach(aircraft, height, np.array([cold, max(hot, turn)]), mass)
    if not mach[0] > mach[1]:
        return ""
    when = "Cold" if hot <= turn else f"Colder than {words.temperature(turn)}"
    return (
        f"{when}: the advancing tip comes first. A faster rotor brings it nearer. The signs below are for blade stall; "
        "expect roughness, and then slow down."
    )


def _advancing_mach(aircraft: Aircraft, height: float, oat: NDArray[np.float64], mass: float) -> NDArray[np.float64]:
    """Mach number of the advancing tip at the manual's VNE, rotor at 100 %."""
    pressure = np.full(oat.shape, float(atmosphere.pressure_at(height)))
    vne = np.asarray(aircraft.vne.indicated(height, oat, mass), dtype=float)
    true = np.asarray(true_of(aircraft.calibration, vne, pressure, oat), dtype=float)
    mach: NDArray[np.float64] = (true + aircraft.rotor.tip_speed) / np.asarray(atmosphere.speed_of_sound(oat))
    return mach
