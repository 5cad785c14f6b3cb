"""From six answers to a folder that builds: typed files and a notebook, their invented values all marked EXAMPLE.

The values are there so that page 1 is seen at once; `check` lists every one that is still to be replaced, and none of
it can be released. Nothing that exists is written over; to an operator's own `operation.toml` lines are only added.
"""

from __future__ import annotations

import datetime as dt
import json
import os
import re
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum
from pathlib import Path
from string import Template
from typing import Final

from briefkit import units
from briefkit.aircraft.operation import OPERATION_FILE, WorkArea, load_operation
from briefkit.brief.identity import BRIEF_FILE, NOTEBOOK, operator_folder
from briefkit.brief.templates import template_folder
from briefkit.brief.write import write_page
from briefkit.errors import BriefkitError, Fault, FaultyFile, ReadingError
from briefkit.physics import atmosphere
from briefkit.reading.quantity import did_you_mean

EXAMPLE_AREA: Final = "example"
_COMMENT_COLUMN: Final = 56
_NAME = re.compile(r"[^\W_][\w .,()/+'-]{0,60}")


@dataclass(frozen=True)
class Question:
    """One of the six things `new` asks; `choices` is empty where any text will do."""

    name: str
    text: str
    choices: tuple[str, ...] = ()


QUESTIONS: Final = (
    Question("type_name", "Type name, as on your documents"),
    Question("blades", "Main rotor blades", tuple(str(number) for number in range(2, 9))),
    Question("hub", "Hub", ("teetering", "articulated", "hingeless")),
    Question("rotation", "Rotation seen from above", ("anticlockwise", "clockwise")),
    Question("airspeed_unit", "Unit of the airspeed indicator", ("kt", "km/h", "mph")),
    Question("mass_unit", "Unit of the weight report", ("kg", "lb")),
)


@dataclass(frozen=True)
class Answers:
    """The six answers as typed. Raises `ReadingError` for an answer that is not one of its question's choices."""

    type_name: str
    blades: str
    hub: str
    rotation: str
    airspeed_unit: str
    mass_unit: str

    def __post_init__(self) -> None:
        for _, fault in faults_of(vars(self)):
            raise fault

    @property
    def stem(self) -> str:
        """The name of the aircraft file: "Pelquill 2T" is pelquill-2t."""
        return _stem(self.type_name)


def fault_of(question: Question, answer: str, known: Mapping[str, str]) -> ReadingError | None:
    """What is wrong with an answer beside those `known` already, by name; None where nothing is."""
    if question.choices and answer not in question.choices:
        remedy = did_you_mean(answer, question.choices)
        return ReadingError(answer, f"{question.text}: {', '.join(question.choices)}", remedy)
    if not question.choices and not (_NAME.fullmatch(answer) and _stem(answer)):
        return ReadingError(answer, "a name of letters, digits and spaces that names a file", "")
    both = {**known, question.name: answer}
    if both.get("hub") == "teetering" and (blades := both.get("blades", "2")) != "2":
        return ReadingError(f"{blades} blades", "2 blades with a teetering hub", "is the hub articulated?")
    return None


def faults_of(given: Mapping[str, str]) -> list[tuple[Question, ReadingError]]:
    """Every answer given, by name, that will not do, with its question; what is not given yet is not held."""
    known: dict[str, str] = {}
    found = []
    for question in QUESTIONS:
        if question.name not in given:
            continue
        if fault := fault_of(question, given[question.name], known):
            found.append((question, fault))
        else:
            known[question.name] = given[question.name]
    return found


def _stem(type_name: str) -> str:
    return re.sub(r"[^a-z0-9]+", "-", type_name.lower()).strip("-")


# What an invented example aircraft is in each unit: round figures, not conversions of one another.
_BY_SPEED: Final = {
    "kt": {"chart_file": "chart-kt.txt", "climb_speed": "55 kt", "calibration_spread": "4 kt", "power_off": "90 kt",
           "planned_speed": "70 kt"},
    "mph": {"chart_file": "chart-mph.txt", "climb_speed": "63 mph", "calibration_spread": "5 mph",
            "power_off": "104 mph", "planned_speed": "80 mph"},
    "km/h": {"chart_file": "chart-kmh.txt", "climb_speed": "102 km/h", "calibration_spread": "7 km/h",
             "power_off": "167 km/h", "planned_speed": "130 km/h"},
}  # fmt: skip
_FEET: Final = {"height": "ft", "max_altitude": "10,000 ft", "low_altitude": "4,000 ft", "high_altitude": "6,000 ft",
                "planned_altitude": "6,000 ft"}  # fmt: skip
_METRES: Final = {"height": "m", "max_altitude": "3,000 m", "low_altitude": "1,200 m", "high_altitude": "1,800 m",
                  "planned_altitude": "1,800 m"}  # fmt: skip
_BY_MASS: Final = {
    "kg": {"max_mass": "1,700 kg", "min_mass": "1,000 kg", "planned_mass": "1,500 kg",
           "masses": '"1,700 kg", "1,600 kg", "1,500 kg", "1,400 kg", "1,300 kg"'},
    "lb": {"max_mass": "3,750 lb", "min_mass": "2,200 lb", "planned_mass": "3,300 lb",
           "masses": '"3,750 lb", "3,550 lb", "3,300 lb", "3,100 lb", "2,900 lb"'},
}  # fmt: skip
# The example's solidity is 0.05 at a radius of 5 m, whatever the number of blades.
_SOLIDITY: Final = 0.05
_RADIUS_MM: Final = 5000.0
_HINGES: Final = {
    "teetering": 'precone = "unknown"\n',
    "articulated": 'hinge_offset = "4 %"                # EXAMPLE: of the radius\n',
    "hingeless": 'flap_frequency = "unknown"          # per revolution, like "1.10"\n',
}


@dataclass(frozen=True)
class Made:
    """What `new` has made: the brief's folder, the files written, and the file lines were added to (if any)."""

    folder: Path
    written: tuple[Path, ...]
    added_to: Path | None


class Starter(StrEnum):
    """What a brief begins as: its notebook, and the example work area it is made for."""

    TYPE = "type"
    HOT_AND_HIGH = "hot-and-high"
    RECURRENT_CHECK = "recurrent-check"


def new(folder: Path | str, answers: Answers, today: dt.date, starter: Starter | str = Starter.TYPE) -> Made:
    """Make a brief for one type.

    Below an operator folder `folder` becomes the brief's own folder. Where there is none, `folder` becomes the operator
    folder and the brief a folder in it. `today` is the day of issue; `starter` is one of
    `Starter`. Raises `FaultyFile` where a file to be written exists, or where the operator's own file has faults; then
    nothing has been written.
    """
    folder, starter = Path(folder), Starter(starter)
    operator = _operator_above(folder)
    values = _values(answers, today)
    if starter is Starter.HOT_AND_HIGH:
        values |= _HOT_METRES if answers.airspeed_unit == "km/h" else _HOT_FEET
    aircraft_folder = (operator or folder) / "aircraft"
    brief_folder = folder if operator is not None and folder.resolve() != operator else folder / answers.stem
    to_aircraft = os.path.relpath(aircraft_folder / f"{answers.stem}.toml", brief_folder)
    values["aircraft_path"] = Path(to_aircraft).as_posix()
    added_to, addition = None, ""
    if operator is not None:
        added_to = operator / OPERATION_FILE
        known = load_operation(added_to)
        fitting = (key for key, area in known.work_areas.items() if _fits(area))
        area = values["area"] if values["area"] in known.work_areas else None
        if starter is not Starter.HOT_AND_HIGH:  # which asks for a hot and high area, not for any that fits
            area = area or next(fitting, None)
        values["area"] = area or values["area"]
        addition = ("" if area else _filled("work_area.toml", values)) + (
            "" if answers.stem in known.fleet else _filled("fleet.toml", values)
        )
    files = {
        aircraft_folder / f"{answers.stem}.toml": _filled("aircraft.toml", values),
        brief_folder / BRIEF_FILE: _filled("brief.toml", values),
        brief_folder / NOTEBOOK: _filled_notebook(_BOOKS[starter], values),
    }
    if operator is None:
        parts = ("operation.toml", "work_area.toml", "fleet.toml")
        files[folder / OPERATION_FILE] = "".join(_filled(part, values) for part in parts)
    _write(files)
    if added_to is not None and addition:
        _add(added_to, addition)
    return Made(brief_folder, tuple(files), added_to if addition else None)


_BOOKS: Final = {
    Starter.TYPE: NOTEBOOK,
    Starter.HOT_AND_HIGH: "hot-and-high.ipynb",
    Starter.RECURRENT_CHECK: "recurrent-check.ipynb",
}
_HOT: Final = {
    "area": "example_hot",
    "area_name": "Hot and high work area",
    "low_oat": "+15 degC",
    "high_oat": "+30 degC",
}
_HOT_FEET: Final = _HOT | {"low_altitude": "6,000 ft", "high_altitude": "8,000 ft", "planned_altitude": "8,000 ft"}
_HOT_METRES: Final = _HOT | {"low_altitude": "1,800 m", "high_altitude": "2,400 m", "planned_altitude": "2,400 m"}


def _fits(area: WorkArea) -> bool:
    """Whether the example aircraft's chart and limits cover a work area, so that the first build succeeds."""
    high = area.high_altitude.value
    hottest = min(units.ZERO_CELSIUS + 40.0, float(atmosphere.temperature_at(high)) + 35.0)
    coldest = units.ZERO_CELSIUS - 20.0
    heights = area.low_altitude.value >= 0.0 and high <= 3000.0
    return heights and area.low_temperature.value >= coldest and area.high_temperature.value <= hottest


def _operator_above(folder: Path) -> Path | None:
    try:
        return operator_folder(folder)
    except FaultyFile:
        return None


def _values(answers: Answers, today: dt.date) -> dict[str, str]:
    metric = answers.airspeed_unit == "km/h"
    chord = _SOLIDITY * 3.14159 * _RADIUS_MM / int(answers.blades)
    values = {
        "type_name": answers.type_name,
        "stem": answers.stem,
        "blades": answers.blades,
        "hub": answers.hub,
        "rotation": answers.rotation,
        "speed": answers.airspeed_unit,
        "mass": answers.mass_unit,
        "pressure": "inHg" if answers.mass_unit == "lb" else "hPa",
        "chord": f"{chord:.0f} mm",
        "hinge": _HINGES[answers.hub],
        "area": EXAMPLE_AREA,
        "area_name": "Work area",
        "low_oat": "+10 degC",
        "high_oat": "+30 degC",
        "number": re.sub(r"[^A-Z0-9]+", "-", answers.stem.upper()).strip("-")[:20] + "-001",
        "issued": today.isoformat(),
        "effective": today.isoformat(),
        "expires": (today + dt.timedelta(days=364)).isoformat(),
        **_BY_SPEED[answers.airspeed_unit],
        **(_METRES if metric else _FEET),
        **_BY_MASS[answers.mass_unit],
    }
    values["chart"] = (template_folder("starters") / values.pop("chart_file")).read_text(encoding="utf-8")
    return values


def _filled(name: str, values: dict[str, str]) -> str:
    text = Template((template_folder("starters") / name).read_text(encoding="utf-8")).substitute(values)
    return re.sub(r"(?m)^([a-z\[].*?) {2,}(#.*)$", lambda line: f"{line[1]:<{_COMMENT_COLUMN}} {line[2]}", text)


def _filled_notebook(name: str, values: dict[str, str]) -> str:
    """The starter notebook with its code cells filled in; markdown stays as it is, dollars and all."""
    notebook = json.loads((template_folder("starters") / name).read_text(encoding="utf-8"))
    for cell in notebook["cells"]:
        if cell["cell_type"] == "code":
            cell["source"] = [Template(line).substitute(values) for line in cell["source"]]
    return json.dumps(notebook, indent=1, ensure_ascii=False) + "\n"


def _write(files: dict[Path, str]) -> None:
    standing = [path for path in files if path.exists()]
    if standing:
        remedy = "give another folder or type name, or move the file away"
        raise FaultyFile(
            [Fault(str(path), "file", "a file that exists", "nothing is written over", remedy) for path in standing]
        )
    for path, text in files.items():
        try:
            path.parent.mkdir(parents=True, exist_ok=True)
            with path.open("x", encoding="utf-8", newline="\n") as opened:
                opened.write(text)
        except OSError as error:
            said = (error.strerror or "not writable").lower()
            raise BriefkitError(f"{path}: {said}; give a folder that can be written to") from None


def _add(path: Path, addition: str) -> None:
    """Lines at the end of a TOML file that stays as it is otherwise, after a look that the whole is still TOML."""
    text = path.read_bytes().decode("utf-8")
    ends = "\r\n" if "\r\n" in text else "\n"
    joined = text.rstrip("\r\n") + ends + addition.replace("\n", ends)
    tomllib.loads(joined.removeprefix("\ufeff"))
    write_page(path, joined)
