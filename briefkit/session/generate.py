"""A first deck from the operator's own files, as text to be edited: never finished, and never by the name of a type.

Each work area's hot day with the heaviest mass in the briefed turn, the rotor at the bottom of the green, a light
aircraft, a case where stall is not what decides, and one just outside the chart. What each case teaches is the trade's
(FAA-H-8083-21B chapter 11, and common practice); what the tool says there is asked of the tool.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Final

from briefkit import units
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.operation import FleetEntry, Operation, WorkArea
from briefkit.brief.deciding import tip_first
from briefkit.brief.identity import load_brief
from briefkit.envelope import cues
from briefkit.envelope.condition import Condition
from briefkit.errors import BriefkitError, BuildError
from briefkit.session.answers import Answers, Says, answers
from briefkit.session.deck import DECK_FILE

_HEAD: Final = """\
# The deck of a recurrent check, generated from {operation} and {aircraft}: edit every case before use.
# Each case starts somewhere and changes one thing. What the tool says there (says, least_reduction, most_bank) is held
# against the tool whenever this file is read. No names and no results: those belong in the training records.

[deck]
title = "{title}"
source = ""                    # where the check is ordered, like "OM-D 3.1 rev 4"
"""


@dataclass(frozen=True)
class _Draft:
    """A case before it is text: typed values, and what the instructor says."""

    name: str
    start: dict[str, str]
    change: dict[str, str]
    prompt: str
    teaching: str
    source: str = ""


def generate(aircraft: Aircraft, operation: Operation, *areas: str) -> str:
    """The text of a `deck.toml` for one aircraft over the work areas named (all of them where none is).

    Raises `BuildError` where there is no fleet entry, no such work area, or none in which the manual permits flight.
    """
    fleet = operation.entry_for(aircraft)
    if fleet is None:
        raise BuildError(f"{operation.file}: no fleet entry for {aircraft.file}, {aircraft.configuration}")
    if unknown := [key for key in areas if key not in operation.work_areas]:
        raise BuildError(f"no work area {unknown[0]}; there is {', '.join(operation.work_areas)} ({operation.file})")
    chosen = [operation.work_areas[key] for key in areas or operation.work_areas]
    days = [(area, day) for area in chosen if (day := _hot_day(aircraft, fleet, area)) is not None]
    if not days:
        raise BuildError(
            "in none of the work areas does the manual permit flight on the hot day: no case to start from"
        )
    drafts = [*_hot(aircraft, fleet, days), *_drooped(aircraft, days[0][1]), *_light(aircraft, fleet, days[0][1])]
    drafts += [_not_stall(aircraft, fleet, chosen, days[0][1]), _refused(aircraft, fleet, days[0][1])]
    title = f"{aircraft.name}, {aircraft.configuration}: recurrent check"
    head = _HEAD.format(operation=operation.file, aircraft=aircraft.file, title=_escaped(title))
    return head + "".join(_text(aircraft, fleet, draft) for draft in drafts)


def write_deck(folder: Path, *areas: str) -> Path:
    """A generated deck in a brief's folder, by default for the brief's own work area; the file written.

    Raises `BuildError` where there is a deck already or the folder refuses, and as `load_brief` and `generate` do.
    """
    brief = load_brief(folder)
    text = generate(brief.aircraft, brief.operation, *(areas or (brief.identity.work_area,)))
    path = folder / DECK_FILE
    try:
        with path.open("x", encoding="utf-8", newline="\n") as stream:
            stream.write(text)
    except FileExistsError:
        raise BuildError(f"{path}: there already; nothing is written over") from None
    except OSError as error:
        raise BuildError(f"{path}: cannot be written ({error.strerror})") from None
    return path


# --- cases ---------------------------------------------------------------------------------------------------------


def _hot_day(aircraft: Aircraft, fleet: FleetEntry, area: WorkArea) -> dict[str, str] | None:
    """The area's hot day, heaviest mass, as high as the manual permits; None where it permits no flight there."""
    for height in (area.high_altitude.value, area.low_altitude.value):
        typed = {
            "mass": fleet.masses[0].text,
            "pressure_altitude": _height(aircraft, height),
            "oat": area.high_temperature.text,
        }
        if _manual_permits(aircraft, fleet, typed):
            return typed
    return None


def _hot(aircraft: Aircraft, fleet: FleetEntry, days: list[tuple[WorkArea, dict[str, str]]]) -> Iterator[_Draft]:
    bank = {"bank": fleet.brief_bank.text}
    recovery, source = cues.recovery(aircraft)
    for number, (area, day) in enumerate(days):
        prompt = (
            "What is VNE here, at this mass: show me in your own manual. How much slower before this turn? If it "
            "starts all the same: what do you feel first, what do you do first, and what will you not do with the "
            "cyclic?"
        )
        teaching = f"If it starts: {cues.onset_words(aircraft)} {' '.join(recovery)}"
        if number:
            prompt = "Another base, its own hot day. Which of the figures changes, and which way does the answer go?"
            teaching = (
                "Mass, height, heat and load factor add up: each asks the same blade for a larger angle, and VNE was "
                "made for level flight."
            )
            source = cues.CHAPTER_11
        yield _Draft(f"{area.name}: hot day, heaviest, the briefed turn", day, bank, prompt, teaching, source)


def _drooped(aircraft: Aircraft, day: dict[str, str]) -> Iterator[_Draft]:
    low = aircraft.limits.rotor_on[0]
    if low.value >= 1.0:
        return
    yield _Draft(
        "Rotor at the bottom of the green",
        day,
        {"rotor_speed": low.text},
        "The rotor has drooped to the lower limit. Which way does the answer go, and does your chart say so? How would "
        "you tell blade stall from low rotor rpm?",
        "A slower rotor needs a larger blade angle for the same lift, and its retreating side is slower still: keep "
        "the rpm. Low rotor rpm is horn, yaw and sinking, at any speed; blade stall is a heavy shake and nose up at "
        "high speed. The hands differ.",
        cues.CHAPTER_11,
    )


def _light(aircraft: Aircraft, fleet: FleetEntry, day: dict[str, str]) -> Iterator[_Draft]:
    if len(fleet.masses) < 2:
        return
    start = day | {"bank": fleet.brief_bank.text}
    yield _Draft(
        "The same day, light",
        start,
        {"mass": fleet.masses[-1].text},
        "The same turn on the same day, as light as we fly. What is left of the reduction?",
        "Mass is the one figure a crew chooses before the flight. A light rotor has room that a heavy one has not; VNE "
        "is the manual's all the same.",
        cues.NO_SOURCE,
    )


def _not_stall(aircraft: Aircraft, fleet: FleetEntry, areas: list[WorkArea], day: dict[str, str]) -> _Draft:
    """A case where the equivalent level flight gives the manual's VNE: below freezing, heavy, in a turn if it can be.

    Level at 100 % it does so by definition: true of every type, on any day it may fly.
    """
    bank = {"bank": fleet.brief_bank.text}
    mild: _Draft | None = None
    for area, cold in _cold_days(aircraft, fleet, areas):
        freezing = _condition(cold).oat <= units.ZERO_CELSIUS
        if mild is not None and not freezing:
            continue
        said = _ask(aircraft, fleet, cold | bank)
        if said is not None and said.computed.says is Says.MANUAL_VNE:
            name = f"{area.name}: {'cold, and ' if freezing else ''}stall is not what decides"
            mild = _no_reduction(aircraft, area, name, cold, bank)
            if freezing:
                return mild
    if mild is not None:
        return mild
    cooler = day | {"oat": _temperature(_condition(day).oat - 10.0)}
    start, change = (cooler, {"oat": day["oat"]}) if _manual_permits(aircraft, fleet, cooler) else (
        day | bank, {"bank": "0 deg"})  # fmt: skip
    return _no_reduction(aircraft, areas[0], "Level, rotor at 100 %: the manual decides alone", start, change)


def _cold_days(
    aircraft: Aircraft, fleet: FleetEntry, areas: list[WorkArea]
) -> Iterator[tuple[WorkArea, dict[str, str]]]:
    """Cold days to try: each area's own, then as cold as chart and limits go; each with the masses, heaviest first."""
    coldest = max([aircraft.limits.min_temperature.value, *aircraft.vne.temperatures[:1]])
    for end in ("", _temperature(coldest)):
        for area in areas:
            for mass in fleet.masses:
                yield (
                    area,
                    {
                        "mass": mass.text,
                        "pressure_altitude": _height(aircraft, area.low_altitude.value),
                        "oat": end or area.low_temperature.text,
                    },
                )


def _no_reduction(
    aircraft: Aircraft, area: WorkArea, name: str, start: dict[str, str], change: dict[str, str]
) -> _Draft:
    source = cues.NO_SOURCE
    teaching = (
        "Nothing to take off for stall is not room to go faster: VNE still limits, for the maker's own reasons, which "
        "no computation here can see."
    )
    if _tip_comes_first(aircraft, area, _condition(start | change)):
        teaching = (
            "Nothing to take off is not room to go faster. In this cold the advancing tip comes first: the manual's "
            "VNE falls towards the cold, and a faster rotor brings the tip nearer."
        )
    if aircraft.vne.cap_text:
        teaching = (
            f"In this configuration the manual's own speed, {aircraft.vne.cap_text}, rules long before the blade "
            "does. It is in the supplement, not in the chart."
        )
        source = aircraft.vne.cap_source
    return _Draft(
        name,
        start,
        change,
        "How much slower before this? And if nothing: what is it that VNE protects you from here?",
        teaching,
        source,
    )


def _tip_comes_first(aircraft: Aircraft, area: WorkArea, at: Condition) -> bool:
    """Whether the manual's chart says so on the case's own day and at its mass, by the rule the crew's page goes by."""
    day = replace(
        area,
        low_temperature=replace(area.low_temperature, value=at.oat),
        low_altitude=replace(area.low_altitude, value=at.pressure_altitude),
    )
    heaviest = replace(aircraft.limits.max_mass, value=at.mass)
    return bool(tip_first(replace(aircraft, limits=replace(aircraft.limits, max_mass=heaviest)), day))


def _refused(aircraft: Aircraft, fleet: FleetEntry, day: dict[str, str]) -> _Draft:
    """One case just outside what the manual covers: the chart's cold or hot end, else its top."""
    chart, limits = aircraft.vne, aircraft.limits
    middle = _condition(day).pressure_altitude
    tries: list[tuple[dict[str, str], dict[str, str]]] = []
    for edge, step in ((chart.temperatures[:1], -3.0), (chart.temperatures[-1:], 3.0)):
        for end in edge:
            inside = day | {"oat": _temperature(max(end, limits.min_temperature.value) if step < 0.0 else end)}
            tries.append((inside, {"oat": _temperature(end + step)}))
    step = 100.0 if aircraft.units.height == "m" else units.to_si(250.0, "height", "ft")
    top = min(chart.heights[-1] if not chart.density_altitude else math.inf, limits.max_altitude.value)
    cool = day | {"oat": _temperature(max(limits.min_temperature.value, _coolest(aircraft, top)))}
    tries.append((cool | {"pressure_altitude": _height(aircraft, min(middle, top))},
                  {"pressure_altitude": _height(aircraft, top + step)}))  # fmt: skip
    for start, change in tries:
        here, there = _ask(aircraft, fleet, start), _ask(aircraft, fleet, start | change)
        if here and there and here.manual.vne is not None and there.computed.says is Says.REFUSED:
            return _Draft(
                "Just outside the manual’s chart",
                start,
                change,
                "What is VNE now? Show me the entry you would read.",
                "Where the chart ends there is no VNE, so there is no flight: nobody reads on past the edge, neither "
                "by eye nor by a tool. The answer is another plan.",
                "14 CFR 91.9(a)",
            )
    raise BuildError("no case just outside the manual’s chart was found; write one by hand")


def _coolest(aircraft: Aircraft, height: float) -> float:
    """A temperature the chart and the limits permit at a height [K]: ten degrees under the hottest."""
    hottest = float(aircraft.limits.max_temperature_at(height))
    ends = aircraft.vne.temperatures
    return (min(hottest, ends[-1]) if ends else min(hottest, units.ZERO_CELSIUS + 20.0)) - 10.0


# --- text ----------------------------------------------------------------------------------------------------------


def _text(aircraft: Aircraft, fleet: FleetEntry, draft: _Draft) -> str:
    """One case as TOML, with what the tool says of it today."""
    said = answers(aircraft, fleet, _condition(draft.start | draft.change)).computed
    lines = ["", "[[case]]", f'name = "{_escaped(draft.name)}"']
    lines += [f"start = {_inline(draft.start)}", f"change = {_inline(draft.change)}"]
    lines += [f'prompt = "{_escaped(draft.prompt)}"', f'teaching = "{_escaped(draft.teaching)}"']
    lines.append(f'expected = "{_escaped(_decision(said.says, said.text))}"')
    lines.append(f'says = "{said.says}"')
    if said.says in (Says.REDUCTION, Says.COVERED_BANK):
        lines.append(f'least_reduction = "{said.reduction:g} {aircraft.units.speed}"')
    if said.says is Says.COVERED_BANK:
        lines.append(f'most_bank = "{said.bank_deg} deg"')
    lines.append(f'source = "{_escaped(draft.source)}"')
    return "\n".join(lines) + "\n"


def _decision(says: Says, text: str) -> str:
    """A decision, not a number alone: what a crew would do with the answer."""
    if says is Says.REFUSED:
        return "No figure, so not like this: change the height, the mass, the time of day or the route."
    if says is Says.MANUAL_VNE:
        return "Nothing comes off VNE for stall; fly to the manual’s VNE and its other speeds, and no faster."
    if says is Says.NO_TURN:
        return "No turn here at this mass: go lighter, lower or cooler, or another way round."
    return text


def _inline(values: dict[str, str]) -> str:
    return "{ " + ", ".join(f'{key} = "{_escaped(text)}"' for key, text in values.items()) + " }"


def _escaped(text: str) -> str:
    return text.replace("\\", "\\\\").replace('"', '\\"')


def _condition(typed: dict[str, str]) -> Condition:
    return Condition(**typed)


def _ask(aircraft: Aircraft, fleet: FleetEntry, typed: dict[str, str]) -> Answers | None:
    try:
        return answers(aircraft, fleet, _condition(typed))
    except BriefkitError:  # a number no helicopter can have
        return None


def _manual_permits(aircraft: Aircraft, fleet: FleetEntry, typed: dict[str, str]) -> bool:
    said = _ask(aircraft, fleet, typed)
    return said is not None and said.manual.vne is not None


def _height(aircraft: Aircraft, metres: float) -> str:
    """Rounded up to a whole unit: a higher day is the more loaded one."""
    unit = aircraft.units.height
    number = units.round_up(units.from_si(metres, "height", unit))
    return f"{number:,.0f} {unit}"


def _temperature(kelvin: float) -> str:
    return f"{round(kelvin - units.ZERO_CELSIUS):+d} degC"
