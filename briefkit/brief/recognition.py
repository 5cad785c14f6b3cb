"""Sheet 2: which one is it, the cautions that are always printed, and the manual's own hover figures."""

from __future__ import annotations

from briefkit.aircraft.model import Aircraft
from briefkit.brief.pages import Grid, Ink, Section
from briefkit.envelope import cues

_CAUTIONS = (
    "VNE governs, as the flight manual, its supplements, placards and markings give it. Supplements change VNE.",
    "Never look for the onset in flight to check a number.",
    "The reduction does not cover gusts, rolling in, sideslip, the centre of gravity, or power-off flight.",
    "Autorotation has its own VNE and its own rotor-speed range: the manual’s.",
    "The computation knows nothing of structure, control loads, the tail rotor or fitted equipment.",
)


def recognition(aircraft: Aircraft) -> tuple[Section, ...]:
    """The sections of sheet 2."""
    return (which_one(aircraft), *low_g(aircraft), cautions(), *hover(aircraft))


def which_one(aircraft: Aircraft) -> Section:
    """The table that keeps one reflex from being used for another condition."""
    likenesses = cues.which_one(aircraft)
    rows = tuple((one.name, one.when, one.sign, one.first, one.source) for one in likenesses)
    grid = Grid(
        ("Condition", "When", "What you notice", "First act", "Source"),
        rows,
        "Which one is it?",
        Ink.CONTEXT,
        numbers=False,
    )
    mirrored = cues.sides(aircraft).mirrored
    shake = cues.vibration(aircraft)
    after = (
        f"Vibration of blade stall: mainly at {aircraft.rotor.blades} per revolution, {shake.blade:.1f} Hz at 100 % "
        f"(once per revolution is {shake.once:.1f} Hz; a new shake at once per revolution alone points to track and "
        f"balance; {cues.NO_SOURCE}).",
        *((f"Left and right are {mirrored}.",) if mirrored else ()),
    )
    return Section("Which one is it?", grid=grid, after=after)


def low_g(aircraft: Aircraft) -> tuple[Section, ...]:
    """The low-g caution of two-bladed rotors; nothing for others."""
    if not cues.needs_low_g_caution(aircraft):
        return ()
    roll = cues.sides(aircraft).advancing
    points = (
        f"Light in the seat in forward flight: first gently aft on the cyclic to load the rotor. The aircraft may roll "
        f"{roll}: correct the roll only once the rotor is loaded. Cyclic against the roll earlier can bump the mast.",
        "No abrupt forward cyclic. Slow down in turbulence.",
    )
    return (Section("Two blades: low g", points=points, after=(cues.CHAPTER_11 + ".",)),)


def cautions() -> Section:
    """Printed on every handout."""
    raises = f"Both aft and forward cyclic raise the angle of attack on the retreating side ({cues.CHAPTER_11})."
    return Section("Cautions", points=(*_CAUTIONS, raises))


def hover(aircraft: Aircraft) -> tuple[Section, ...]:
    """The manual's hover ceilings as typed: where one cannot hover, that decides first."""
    if not aircraft.hover:
        return ()
    points = tuple(f"{line.label}: {line.text} ({line.source})." for line in aircraft.hover)
    return (
        Section(
            "Hover, from the manual", points=points, after=("Where the manual gives no hover, that decides first.",)
        ),
    )
