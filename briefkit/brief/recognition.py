"""Sheet 2: which one is it, the cautions that are always printed, and the manual's own hover figures."""

from __future__ import annotations

from briefkit.aircraft.hover import hover_lines
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.operation import FleetEntry, WorkArea
from briefkit.brief import words
from briefkit.brief.pages import Grid, Ink, Section
from briefkit.envelope import cues

_CAUTIONS = (
    "VNE governs: flight manual, supplements, placards, markings.",
    "Never look for the onset in flight to check a number.",
    "The reduction does not cover gusts, rolling in, sideslip, the centre of gravity, or power-off flight.",
    "Autorotation has its own VNE and rotor speeds: the manual’s.",
    "The computation knows nothing of structure, control loads, the tail rotor or fitted equipment.",
)


def recognition(
    aircraft: Aircraft, fleet: FleetEntry | None = None, area: WorkArea | None = None
) -> tuple[Section, ...]:
    """The sections of sheet 2; with a fleet entry and a work area also whether the manual gives a hover there."""
    there = () if fleet is None or area is None else hover(aircraft, fleet, area)
    return (which_one(aircraft), *low_g(aircraft), cautions(), *there)


def which_one(aircraft: Aircraft) -> Section:
    """The table that keeps one reflex from being used for another condition."""
    likenesses = cues.which_one(aircraft)
    # One source stands beside the heading, so that the words have the width of the sheet; what has none has a mark.
    rows = tuple((_marked(one), one.when, one.sign, one.first) for one in likenesses)
    named = sorted({one.source for one in likenesses if one.source != cues.NO_SOURCE})
    bare = any(one.source == cues.NO_SOURCE for one in likenesses)
    whose = " and ".join(named) + (f"; † {cues.NO_SOURCE}" if bare else "")
    header = ("Condition", "When", "What you notice", "First act")
    heading = "Which one is it?"
    grid = Grid(header, rows, heading, Ink.CONTEXT, numbers=False)
    mirrored = cues.sides(aircraft).mirrored
    shake = cues.vibration(aircraft)
    after = (
        f"Blade stall shakes mainly at {aircraft.rotor.blades} per revolution, {shake.blade:.1f} Hz. A new shake at 1 "
        f"per revolution, {shake.once:.1f} Hz, is track or balance †.",
        *((f"Left and right are {mirrored}.",) if mirrored else ()),
    )
    return Section(heading, whose, grid=grid, after=after, sources=(cues.HANDBOOK,))


def _marked(one: cues.Likeness) -> str:
    return f"{one.name} †" if one.source == cues.NO_SOURCE else one.name


def low_g(aircraft: Aircraft) -> tuple[Section, ...]:
    """The low-g caution of two-bladed rotors; nothing for others."""
    if not cues.needs_low_g_caution(aircraft):
        return ()
    roll = cues.sides(aircraft).advancing
    points = (
        f"Light in the seat: first gently aft on the cyclic, to load the rotor. Correct the roll ({roll}) only then: "
        "before, it can bump the mast.",
        "No abrupt forward cyclic. Slow down in turbulence.",
    )
    return (Section("Two blades: low g", cues.CHAPTER_11, points=points),)


def cautions() -> Section:
    """Printed on every handout."""
    raises = f"Both aft and forward cyclic raise the angle of attack on the retreating side ({cues.CHAPTER_11})."
    return Section("Cautions", points=(*_CAUTIONS, raises))


def hover(aircraft: Aircraft, fleet: FleetEntry, area: WorkArea) -> tuple[Section, ...]:
    """The manual's hover figures looked up for the heaviest mass at the area's highest and warmest."""
    height, oat = area.high_altitude.value, area.high_temperature.value
    lines = hover_lines(aircraft, fleet.masses[0].value, height, oat)
    if not lines:
        return ()
    mass = fleet.masses[0].text
    said = " ".join(line.text for line in lines)
    if all(line.possible is False for line in lines):
        pages = " and ".join(dict.fromkeys(line.source for line in lines))
        said = f"at {mass} the manual gives none, {' or '.join(line.kind for line in lines)} ({pages})."
    first = "" if all(line.possible for line in lines) else " That decides first."
    place = f"{words.top(aircraft, height)}, {words.temperature(oat)}"
    return (Section(f"Hover at {place}", before=(said + first,), sources=(fleet.source, area.source)),)


def ceilings(aircraft: Aircraft) -> tuple[Section, ...]:
    """The manual's hover ceilings as typed."""
    points = tuple(f"{line.label}: {line.text} ({line.source})." for line in aircraft.hover)
    return (Section("The manual’s hover ceilings", points=points),) if points else ()
