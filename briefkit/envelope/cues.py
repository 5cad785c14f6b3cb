"""What stall on the retreating side feels like, what to do, what it is not: sourced text, mirrored for the rotor.

Nothing here is derived from the solver: a steady flapping solution tilts the disc the other way, so a roll direction
taken from it would be wrong. The handbook speaks of rotors that turn anticlockwise seen from above; for a clockwise
rotor left and right change places, and the text says so.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Final

from briefkit.aircraft.model import Aircraft, Hub

HANDBOOK: Final = "FAA-H-8083-21B"
CHAPTER_11: Final = f"{HANDBOOK} ch. 11"
NO_SOURCE: Final = "common practice, no source"


@dataclass(frozen=True)
class Sides:
    """Which side is which on this rotor; `mirrored` is the remark a reader of the handbook needs, or empty."""

    retreating: str
    advancing: str
    mirrored: str


@dataclass(frozen=True)
class Vibration:
    """Rotor frequencies at 100 % [Hz]: once per revolution and once per blade."""

    once: float
    blade: float


@dataclass(frozen=True)
class Likeness:
    """One row of "which one is it?": a condition, when, what one notices, the first act, and whose words they are."""

    name: str
    when: str
    sign: str
    first: str
    source: str


def sides(aircraft: Aircraft) -> Sides:
    """Retreating and advancing side seen from the pilot's seat."""
    if aircraft.mirrored:
        return Sides("right", "left", f"mirrored: {HANDBOOK} speaks of anticlockwise rotors")
    return Sides("left", "right", "")


def vibration(aircraft: Aircraft) -> Vibration:
    """Stall on every blade is felt mainly at blades per revolution (common practice, no source)."""
    once = aircraft.rotor.rpm.value / (2.0 * math.pi)
    return Vibration(once, once * aircraft.rotor.blades)


def onset_words(aircraft: Aircraft) -> str:
    """What one feels first, one line."""
    return f"low, heavy shake; nose up; roll, usually {sides(aircraft).retreating}."


def recovery(aircraft: Aircraft) -> tuple[tuple[str, ...], str]:
    """The recovery sentences and their source: the aircraft's own manual where it has a procedure, or the handbook."""
    if aircraft.recovery:
        return (aircraft.recovery,), aircraft.recovery_source
    return (
        "Usually first: collective down. Take away the cause: roll level, restore rpm.",
        "Do not pull aft or push forward on the cyclic.",
    ), f"{CHAPTER_11} (the manual has no procedure)"


def which_one(aircraft: Aircraft) -> tuple[Likeness, ...]:
    """Conditions that are taken for one another and need different hands; the low-g column for two-bladed rotors."""
    side = sides(aircraft)
    stall = Likeness(
        "Blade stall, retreating side",
        "High speed, heavy, high, hot, in a turn or rough air",
        f"Low, heavy shake; nose up; roll, usually {side.retreating}",
        "Usually collective down; then take away the cause. Cyclic neither aft nor forward",
        CHAPTER_11,
    )
    low_rpm = Likeness(
        "Low rotor rpm, rotor stall",
        "Any speed",
        "Rpm low, horn, yaw, sinking",
        "At once: collective down, throttle on, aft cyclic. Once stalled there is no way back",
        CHAPTER_11,
    )
    low_g = Likeness(
        "Low g",
        "Push-over, or a gust, in forward flight",
        f"Light in the seat; then rolls {side.advancing} uncommanded",
        "First gently aft on the cyclic, only then correct the roll",
        CHAPTER_11,
    )
    ring = Likeness(
        "Vortex ring",
        "Slow, sinking with power on",
        "Uncommanded pitch and roll, sink rate growing",
        "Speed, or out sideways; collective partly down",
        CHAPTER_11,
    )
    mach = Likeness(
        "Advancing tip near sonic",
        "High speed, cold",
        "Roughness, power rising",
        "Slow down",
        NO_SOURCE,
    )
    return (stall, low_rpm, *((low_g,) if needs_low_g_caution(aircraft) else ()), ring, mach)


def needs_low_g_caution(aircraft: Aircraft) -> bool:
    """Every two-bladed or teetering rotor carries it."""
    return aircraft.rotor.blades == 2 or aircraft.rotor.hub is Hub.TEETERING


def hub_words(aircraft: Aircraft, phase_lag_deg: float) -> str:
    """How this hub answers, with the engineering value of the phase lag beside the handbook's quarter turn."""
    said = {
        Hub.TEETERING: (
            "Teetering hub: the mast is held by thrust alone, so unloading the rotor is the hazard. Leaving a blade "
            "stall must never become a push-over."
        ),
        Hub.ARTICULATED: (
            "Articulated hub: a small moment reaches the mast through the hinge offset; at low g the blades can "
            "strike their droop stops."
        ),
        Hub.HINGELESS: (
            "Hingeless hub: the strongest moment at the mast, so the nose-up is crisper. Mast and hub moment limits "
            "are in the flight manual, not in this brief."
        ),
    }[aircraft.rotor.hub]
    return (
        f"{said} The handbook teaches that a force is felt about 90 degrees later in the rotation ({HANDBOOK} ch. 2); "
        f"for this blade and air it is {phase_lag_deg:.0f} degrees."
    )
