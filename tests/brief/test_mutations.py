"""Slips of typing in the demo files: refused with a sentence that names the place, or the same values all the same.

Chosen kinds of slip (key, type, unit, shape, sign, swapped rows) at seeded places. What no file can know (how cold a
work area really is) is listed by name. A changed digit is classed: refused, found (by which finding), or not
detectable; the shares are printed (`pytest -s`). Not detectable is what the second pilot's read-back is for.
"""

# ruff: noqa: T201

from __future__ import annotations

import random
import re
import shutil
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass, fields, is_dataclass
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest

from briefkit.aircraft.answers import EntryFinding, answered
from briefkit.aircraft.findings import all_findings
from briefkit.aircraft.load import load_configurations
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.operation import load_operation
from briefkit.aircraft.operation_check import cross_check
from briefkit.brief.check_aircraft import similarity_findings
from briefkit.brief.identity import load_identity
from briefkit.errors import Fault, FaultyFile

AIRCRAFT = ("pelquill-2t", "ormbrae-3f", "kvillarn-4h")
FILES = (*(f"aircraft/{name}.toml" for name in AIRCRAFT), "operation.toml", "vellmark-2t/brief.toml")
# Which area each type is briefed for: an operation file is held against the manuals there.
AREAS = {"pelquill-2t": "vellmark", "ormbrae-3f": "corrant", "kvillarn-4h": "ysbrane"}
WORDS = ("name", "source", "reason", "invented", "label", "text", "title", "documents", "basis", "covers_temperatures")
# Texts that say how a value was typed; the value itself is compared.
TYPED_TEXT = (
    "text",
    "rows",
    "printed",
    "typed",
    "file",
    "data_hash",
    "cap_text",
    "lowered",
    "value_text",
    "unanswered",
)
SEED, COUNT = 20300301, 400


@dataclass(frozen=True)
class Slip:
    """One changed file: which, what kind of slip, at which line (from 1), and the text afterwards."""

    file: str
    kind: str
    line: int
    text: str
    what: str


# -- slips -----------------------------------------------------------------------------------------------------------

KEY = re.compile(r"(\s*)([a-z_][\w-]*)(\s*=\s*)(.+)")
QUANTITY = re.compile(r'"([+\-]?[\d,.]+) ?([a-zA-Z%/°]+(?: m2)?[²2]?)"')
OTHER_UNITS = {
    "kt": ("km/h", "mph", "kts", ""), "km/h": ("kt", "mph", "kmh", ""), "ft": ("m", "feet", ""), "m": ("ft", "km", ""),
    "lb": ("kg", "lbs", ""), "kg": ("lb", "KG", ""), "degC": ("°C", "degF", "deg", ""), "deg": ("°", "rad", ""),
    "%": ("", "percent"), "mm": ("cm", "m", "in", ""), "m2": ("ft2", "m", ""), "kg m2": ("slug ft2", "kg", ""),
    "rpm": ("%", "1/min", ""), "hPa": ("inHg", "mb", ""),
}  # fmt: skip


def lines_of(text: str) -> list[tuple[int, str, bool]]:
    """Line number, line and whether it stands in a text block."""
    found, inside = [], False
    for number, line in enumerate(text.split("\n"), start=1):
        if inside and "'''" in line:
            inside = False
            continue
        found.append((number, line, inside))
        if line.rstrip().endswith("'''"):
            inside = True
    return found


def with_line(text: str, number: int, line: str) -> str:
    lines = text.split("\n")
    lines[number - 1] = line
    return "\n".join(lines)


def keyed(text: str) -> Iterator[tuple[int, str, re.Match[str]]]:
    for number, line, inside in lines_of(text):
        match = KEY.fullmatch(line)
        if match and not inside and not line.lstrip().startswith("#"):
            yield number, line, match


def key_slips(file: str, text: str) -> Iterator[Slip]:
    for number, line, match in keyed(text):
        name = match[2]
        for other in (name[:-1] or "x", name.upper(), name + "s", f"x_{name}", name[1:] or "y"):
            yield Slip(file, "key", number, with_line(text, number, line.replace(name, other, 1)), f"{name} as {other}")
        yield Slip(file, "key", number, with_line(text, number, f"{line}\n{line}"), f"{name} twice")
        yield Slip(file, "key", number, with_line(text, number, line.replace("=", ":", 1)), f"{name} with a colon")
    for number, line, inside in lines_of(text):
        named = re.match(r"\[(?:work_areas|fleet)\.", line) is not None  # such a name is the author's own
        if line.startswith("[") and not inside and not named:
            for other in (line.replace("]", "s]", 1), line[:2] + line[3:], line.replace("[", "", 1)):
                yield Slip(file, "key", number, with_line(text, number, other), f"{line} as {other}")


def type_slips(file: str, text: str) -> Iterator[Slip]:
    for number, _, match in keyed(text):
        value = re.sub(r"\s+#.*", "", match[4])
        if value.startswith('"') and match[2] not in ("prepared", "checked", "approved"):
            for other in (value.strip('"'), "3.5", "true", f"[{value}]", "{ value = 3 }", "'''\n" + value, '"?"'):
                yield Slip(file, "type", number, with_line(text, number, f"{match[1]}{match[2]} = {other}"),
                           f"{match[2]} = {other}")  # fmt: skip
        elif value.startswith("[") and value.endswith("]"):
            for other in ("3", value.replace('"', ""), f"[{value}, 3]", "[]", value.replace("]", '"'), value[:-1]):
                yield Slip(
                    file, "type", number, with_line(text, number, f"{match[2]} = {other}"), f"{match[2]} = {other}"
                )
        elif re.fullmatch(r"\d+", value):
            for other in (f'"{value}"', f"{value}.5", "-1", "true", f"{value} {value}"):
                yield Slip(
                    file, "type", number, with_line(text, number, f"{match[2]} = {other}"), f"{match[2]} = {other}"
                )


def unit_slips(file: str, text: str) -> Iterator[Slip]:
    for number, line, inside in lines_of(text):
        if line.lstrip().startswith(("#", "label", "text", "source", "reason")) or inside:
            continue
        for match in QUANTITY.finditer(line):
            for other in OTHER_UNITS.get(match[2], ()):
                changed = f'{line[: match.start()]}"{match[1]} {other}"{line[match.end() :]}'
                yield Slip(
                    file, "unit", number, with_line(text, number, changed), f"{match[0]} in {other or 'no unit'}"
                )
    for number, line, inside in lines_of(text):
        if inside and ("\\" in line or "indicated" in line):
            for unit in re.findall(r"(?<![\w/])(?:ft|kt|km/h|degC|kg|lb|m|ISA)(?![\w/])", line):
                for other in OTHER_UNITS.get(unit, ("degC",)):
                    changed = re.sub(rf"(?<![\w/]){re.escape(unit)}(?![\w/])", other, line, count=1)
                    yield Slip(
                        file, "unit", number, with_line(text, number, changed), f"{unit} as {other or 'nothing'}"
                    )


def shape_slips(file: str, text: str) -> Iterator[Slip]:
    for number, line, inside in lines_of(text):
        cells = line.split()
        if not inside or not cells:
            continue
        for at in range(len(cells)):
            dropped = "  ".join(cells[:at] + cells[at + 1 :])
            yield Slip(file, "shape", number, with_line(text, number, dropped), f"without {cells[at]}")
            doubled = "  ".join([*cells[: at + 1], *cells[at:]])
            yield Slip(file, "shape", number, with_line(text, number, doubled), f"{cells[at]} twice")
            if "," in cells[at]:
                parted = line.replace(cells[at], cells[at].replace(",", " "), 1)
                yield Slip(file, "shape", number, with_line(text, number, parted), f"{cells[at]} parted")
        yield Slip(file, "shape", number, with_line(text, number, f"{line}\n{line}"), "row twice")


def sign_slips(file: str, text: str) -> Iterator[Slip]:
    for number, line, inside in lines_of(text):
        if line.lstrip().startswith(("#", "label", "text", "source", "reason", "number", "issued", "eff", "exp")):
            continue
        pattern = r"(?<![\w.,+\-])[+\-]?\d[\d,.]*" if inside else r'(?<=")[+\-]?\d[\d,.]*(?= )'
        for match in re.finditer(pattern, line.split("#")[0]):
            number_ = match[0]
            other = number_[1:] if number_.startswith("-") else "-" + number_.lstrip("+")
            changed = line[: match.start()] + other + line[match.end() :]
            yield Slip(file, "sign", number, with_line(text, number, changed), f"{number_} as {other}")


def swap_slips(file: str, text: str) -> Iterator[Slip]:
    lines = text.split("\n")
    listed = lines_of(text)
    for (number, line, inside), (_, other, inside_too) in pairwise(listed):
        if inside and inside_too and line.strip() and other.strip():
            swapped = [*lines]
            swapped[number - 1], swapped[number] = other, line
            yield Slip(file, "swapped rows", number, "\n".join(swapped), f"{line.split()[0]} and {other.split()[0]}")


def all_slips(examples: Path) -> dict[str, list[Slip]]:
    made: dict[str, list[Slip]] = {}
    for file in FILES:
        text = (examples / file).read_text(encoding="utf-8")
        for kind in (key_slips, type_slips, unit_slips, shape_slips, sign_slips, swap_slips):
            for slip in kind(file, text):
                if slip.text != text:
                    made.setdefault(slip.kind, []).append(slip)
    return made


# -- outcomes --------------------------------------------------------------------------------------------------------


def values(thing: object) -> object:
    """What a loaded file means: numbers and words, without how they were typed."""
    if is_dataclass(thing) and not isinstance(thing, type):
        return tuple((f.name, values(getattr(thing, f.name))) for f in fields(thing) if f.name not in TYPED_TEXT)
    if isinstance(thing, np.ndarray):
        return (thing.shape, tuple(np.round(thing.astype(float).ravel(), 9).tolist()) if thing.dtype != object else ())
    if isinstance(thing, dict):
        return tuple((key, values(value)) for key, value in thing.items())
    if isinstance(thing, (tuple, list)):
        return tuple(values(one) for one in thing)
    return round(thing, 9) if isinstance(thing, float) else str(thing)


@pytest.fixture(scope="module")
def world(tmp_path_factory: pytest.TempPathFactory, examples: Path) -> Path:
    folder = tmp_path_factory.mktemp("operator")
    shutil.copytree(examples / "aircraft", folder / "aircraft")
    shutil.copy(examples / "operation.toml", folder)
    (folder / "vellmark-2t").mkdir()
    shutil.copy(examples / "vellmark-2t" / "brief.toml", folder / "vellmark-2t")
    return folder


def load(world: Path, examples: Path, file: str) -> object:
    if file.startswith("aircraft"):
        return load_configurations(world / file)
    if file == "operation.toml":
        operation = load_operation(world)
        faults: list[Fault] = []
        for name, area in AREAS.items():
            for aircraft in load_configurations(examples / "aircraft" / f"{name}.toml").values():
                faults += cross_check(operation, aircraft, [area])
        if faults:
            raise FaultyFile(faults)
        return operation
    return load_identity(world / file)


def tried(world: Path, examples: Path, slip: Slip, original: object) -> tuple[str, str]:
    """ "refused", "same", "still ?" or "changed", and the sentence."""
    (world / slip.file).write_text(slip.text, encoding="utf-8")
    try:
        loaded = load(world, examples, slip.file)
    except FaultyFile as error:
        return "refused", str(error) if names_the_place(error, slip) else "SILENT " + str(error)
    finally:
        shutil.copy(examples / slip.file, world / slip.file)
    asked = [one.unanswered for one in (loaded.values() if isinstance(loaded, dict) else [loaded])]
    if any(asked):
        return "still ?", "`check` says so, and nothing is released"
    return ("same", "") if values(loaded) == original else ("changed", "")


def names_the_place(error: FaultyFile, slip: Slip) -> bool:
    """A fault on the line of the slip or its text block, or one whose key holds the key of the line."""
    before = slip.text.split("\n")[: slip.line]
    key = next((m[2] for line in reversed(before) if (m := KEY.fullmatch(line))), "")
    opening = next((n for n in range(len(before), 0, -1) if before[n - 1].rstrip().endswith("'''")), slip.line)
    tables = [line.strip("[] ") for line in before if line.startswith("[")]
    for fault in error.faults:
        if not ((fault.read and fault.permitted) or fault.remedy):
            return False
        if fault.line and opening <= fault.line <= slip.line + 2:
            return True
        parts = re.split(r"[.\s]", tables[-1]) if tables else []
        if (key and key in fault.key) or any(part in fault.key for part in parts) or fault.key == "file":
            return True
    return False


# What no file can know, each with why: it is left to the second pilot's read-back, and counted.
def not_detectable(slip: Slip) -> str:
    line = slip.text.split("\n")[slip.line - 1]
    if slip.file == "operation.toml" and slip.kind == "sign" and re.match("elevations|temperatures", line):
        return "how high and how cold a work area is only the operator knows"
    if slip.kind == "unit" and slip.what.startswith("ISA as"):
        return "a hover table may be over temperatures or over temperatures above standard"
    if slip.kind == "unit" and line.startswith("flap_inertia"):
        return "a third more inertia is within its spread; no number on the crew's page rests on it"
    if slip.kind == "unit" and line.startswith("chord") and "2 mm" in slip.what:
        return "a wider spread: the onset band grows, no number on the crew's page rests on it"
    return ""


@pytest.mark.slow
def test_a_slip_is_refused_where_it_is_or_changes_nothing(world: Path, examples: Path) -> None:
    choose = random.Random(SEED)
    made = all_slips(examples)
    each = COUNT // len(made) + 1
    chosen = [slip for kind in made for slip in choose.sample(made[kind], min(each, len(made[kind])))]
    rest = [slip for kind in made for slip in made[kind] if slip not in chosen]
    chosen = (chosen + choose.sample(rest, min(len(rest), max(0, COUNT - len(chosen)))))[:COUNT]
    originals = {file: values(load(world, examples, file)) for file in FILES}
    counts: Counter[tuple[str, str]] = Counter()
    wrong = []
    for slip in chosen:
        outcome, said = tried(world, examples, slip, originals[slip.file])
        why = not_detectable(slip) if outcome == "changed" else ""
        counts[slip.kind, "not detectable" if why else outcome] += 1
        if (outcome == "changed" and not why) or said.startswith("SILENT"):
            wrong.append(f"{outcome}: {slip.file}:{slip.line} {slip.kind}: {slip.what} {said[:300]}")
    print()
    for kind in made:
        print(f"{kind}: " + ", ".join(f"{outcome} {n}" for (k, outcome), n in sorted(counts.items()) if k == kind))
    assert wrong == []
    assert len(chosen) == COUNT
    # Few enough to read: of what can be seen in a file nothing passes in silence.
    assert sum(n for (_, outcome), n in counts.items() if outcome == "not detectable") <= COUNT // 20


# -- changed digits --------------------------------------------------------------------------------------------------


def digit_slips(text: str) -> Iterator[tuple[str, Slip]]:
    """Every digit of every number of an aircraft file, each changed once: (which part of the file, the slip)."""
    choose = random.Random(SEED)
    part, key = "", ""
    for number, line, inside in lines_of(text):
        if line.startswith("["):
            part = line.strip("[]").split("]")[0]
        match = KEY.fullmatch(line)
        key = match[2] if match else key
        if line.lstrip().startswith(
            ("#", "label", "text", "source", "reason", "name", "serials", "rises", "similarity")
        ):
            continue
        values_ = re.sub(r'source = "[^"]*"|#.*', lambda found: " " * len(found[0]), line)
        if not inside and not match:
            continue
        for at, letter in enumerate(values_):
            if letter.isdigit() and not re.match(r"\d*F", values_[at:]) and "m2" not in values_[at - 1 : at + 1]:
                other = choose.choice([digit for digit in "0123456789" if digit != letter])
                changed = line[:at] + other + line[at + 1 :]
                yield (
                    f"{part}.{key}",
                    Slip("", "digit", number, with_line(text, number, changed), f"{line.strip()} -> {changed.strip()}"),
                )


@pytest.mark.slow
@pytest.mark.parametrize("name", AIRCRAFT)
def test_changed_digits_are_classed(examples: Path, tmp_path: Path, name: str) -> None:
    path = tmp_path / f"{name}.toml"
    text = (examples / "aircraft" / f"{name}.toml").read_text(encoding="utf-8")
    path.write_text(text, encoding="utf-8")
    original = values(load_configurations(path))
    counts: dict[str, Counter[str]] = {}
    for part, slip in digit_slips(text):
        path.write_text(slip.text, encoding="utf-8")
        tally = counts.setdefault(part, Counter())
        try:
            loaded = load_configurations(path)
        except FaultyFile:
            tally["refused"] += 1
            continue
        kinds = {one.kind for aircraft in loaded.values() for one in unanswered(aircraft)}
        if kinds:
            tally["found"] += 1
            tally.update(f"  {kind}" for kind in kinds)
        else:
            tally["same" if values(loaded) == original else "not detectable"] += 1
    print(f"\n{name}")
    for part, tally in counts.items():
        print(f"  {part}: " + ", ".join(f"{kind} {n}" for kind, n in tally.most_common()))
    chart = counts["vne.power_on.chart"]
    caught, missed = chart["refused"] + chart["found"], chart["not detectable"]
    print(f"  chart: {caught / (caught + missed):.0%} of {caught + missed} changed digits refused or found")
    # Measured when written: 93, 86 and 93 %. What is missed is within 3 kt of the typed figure, but for a few.
    assert caught >= 0.8 * (caught + missed)


def unanswered(aircraft: Aircraft) -> list[EntryFinding]:
    every = [*all_findings(aircraft), *similarity_findings(aircraft)]
    return [one for one in every if not answered(aircraft, one)]
