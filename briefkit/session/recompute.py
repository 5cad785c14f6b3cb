"""A session log against today's files: each figure computed again, what differs and by how much; and as CSV."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from importlib.metadata import version
from pathlib import Path, PurePosixPath
from typing import Any, Final

from briefkit.aircraft.load import load_aircraft
from briefkit.aircraft.model import Aircraft
from briefkit.aircraft.operation import Operation, load_operation
from briefkit.brief.identity import operator_folder
from briefkit.envelope.condition import Condition
from briefkit.errors import BriefkitError
from briefkit.session.answers import answers
from briefkit.session.record import Log, RecordError, Step
from briefkit.session.recurrent import outputs

_NUMBERS: Final = ("vne", "reduction", "exact", "bank_deg")
_SAME: Final = 0.005  # figures are kept to 0.01 of their unit
_LABELS: Final = {
    "vne": "manual’s VNE",
    "reduction": "reduction",
    "exact": "reduction before rounding",
    "bank_deg": "covered bank",
    "says": "kind of answer",
    "manual": "manual’s figure",
    "computed": "computed figure",
    "where": "place on the chart",
    "unit": "unit",
}
_COLUMNS: Final = ("line", "at", "session", "kind", "case", "type", "configuration", "version", "aircraft")
_INPUTS: Final = {
    "mass": "mass_kg", "pressure_altitude": "pressure_altitude_m", "oat": "oat_K", "ias": "ias_m_s",
    "load_factor": "load_factor", "rotor_speed": "rotor_speed_fraction", "climb": "climb_m_s",
    "mass_spread": "mass_spread_kg", "oat_spread": "oat_spread_K",
}  # fmt: skip
_OUTPUTS: Final = ("manual", "vne", "unit", "where", "says", "computed", "reduction", "exact", "bank_deg")


@dataclass(frozen=True)
class Difference:
    """One figure of one step that is not today what it was: in words, and by how much where it is a number."""

    line: int
    case: str
    what: str
    then: str
    today: str
    by: float | None = None

    def __str__(self) -> str:
        by = "" if self.by is None else f" ({self.by:+.2f})"
        return f"line {self.line}, {self.case or 'no case'}: {self.what} was {self.then}, is {self.today} today{by}"


@dataclass(frozen=True)
class Recomputed:
    """What came of a log: steps computed again, what differs, and what has changed behind them (files, version)."""

    steps: int
    differences: tuple[Difference, ...]
    notes: tuple[str, ...]


def recompute(log: Log, operator: Path | str | None = None) -> Recomputed:
    """Every figure of a log with today's aircraft and operation files of the operator folder.

    The folder is the one the log lies in unless given. Raises `RecordError` where the log names a file outside it, and
    `FaultyFile` where a file has faults today.
    """
    folder = operator_folder(log.path.parent if operator is None else operator)
    operation = load_operation(folder)
    known: dict[tuple[str, str], Aircraft] = {}
    differences: list[Difference] = []
    notes: dict[str, None] = dict.fromkeys(log.faults)
    steps = 0
    for step in log.steps:
        if not step.inputs:
            continue
        key = step.aircraft, step.configuration
        if key not in known:
            known[key] = load_aircraft(_aircraft_file(folder, step), step.configuration)
        notes |= dict.fromkeys(_changes(step, known[key], operation))
        differences += _differences(step, known[key], operation)
        steps += 1
    return Recomputed(steps, tuple(differences), tuple(notes))


def _aircraft_file(folder: Path, step: Step) -> Path:
    inside = PurePosixPath(step.aircraft)
    target = (folder / inside).resolve()
    if inside.is_absolute() or "\\" in step.aircraft or target.suffix != ".toml" or not target.is_relative_to(folder):
        raise RecordError(f"line {step.line} names {step.aircraft!r}, which is not an aircraft file of {folder.name}")
    return target


def _changes(step: Step, aircraft: Aircraft, operation: Operation) -> Iterator[str]:
    today = {"aircraft": (aircraft.data_hash, step.aircraft), "operation": (operation.data_hash, operation.file)}
    for part, (digest, name) in today.items():
        if step.data.get(part) != digest:
            yield f"{name} has changed since ({str(step.data.get(part))[:8]} then, {digest[:8]} today)"
    if step.version != version("briefkit"):
        yield f"recorded with briefkit {step.version}; this is {version('briefkit')}"


def _differences(step: Step, aircraft: Aircraft, operation: Operation) -> Iterator[Difference]:
    fleet = operation.entry_for(aircraft)
    if fleet is None:
        yield Difference(step.line, step.case, "fleet entry", "there", f"not in {operation.file}")
        return
    try:
        condition = Condition.si(**{name: value for name, value in step.inputs.items() if name in _INPUTS})  # type: ignore[arg-type]  # only ias may be None, and None is refused
    except (BriefkitError, TypeError) as error:
        yield Difference(step.line, step.case, "inputs", "as recorded", f"refused: {error}")
        return
    today = outputs(answers(aircraft, fleet, condition))
    for name, then in step.outputs.items():
        if name not in today:
            yield Difference(step.line, step.case, name, _text(then), "nothing of that name")
        elif not _same(then, today[name]):
            yield _difference(step, name, then, today[name])


def _difference(step: Step, name: str, then: Any, today: Any) -> Difference:
    both = isinstance(then, int | float) and isinstance(today, int | float)
    by = float(today) - float(then) if both and name in _NUMBERS else None
    return Difference(step.line, step.case, _LABELS.get(name, name), _text(then), _text(today), by)


def _same(then: Any, today: Any) -> bool:
    if isinstance(then, int | float) and isinstance(today, int | float):
        return abs(float(then) - float(today)) < _SAME
    return bool(then == today)


def _text(value: Any) -> str:
    return "nothing" if value is None else f"{value:g}" if isinstance(value, float) else str(value)


def to_csv(log: Log) -> str:
    """A log as CSV (RFC 4180), one row a step, for a spreadsheet.

    A text that a spreadsheet would take for a formula gets an apostrophe before it.
    """
    stream = io.StringIO()
    writer = csv.writer(stream)
    head = [*_COLUMNS, "aircraft_hash", "operation_hash", "deck_hash", *_INPUTS.values(), *_OUTPUTS]
    writer.writerow([*head, "predictions", "decision"])
    for step in log.steps:
        row: list[Any] = [getattr(step, column) for column in _COLUMNS]
        row += [step.data.get(part, "") for part in ("aircraft", "operation", "deck")]
        row += [_cell(step.inputs, name) for name in _INPUTS] + [_cell(step.outputs, name) for name in _OUTPUTS]
        writer.writerow([_harmless(value) for value in (*row, " | ".join(step.predictions), step.decision)])
    return stream.getvalue()


def _cell(table: Mapping[str, Any], name: str) -> Any:
    value = table.get(name)
    return "" if value is None else value


def _harmless(value: Any) -> Any:
    return f"'{value}" if isinstance(value, str) and value[:1] in ("=", "+", "-", "@", "\t", "\r") else value


def write_csv(path: Path, text: str) -> None:
    """Write a CSV to a new file, UTF-8 with the mark a spreadsheet looks for. Raises `RecordError` if it is there."""
    try:
        with path.open("x", encoding="utf-8-sig", newline="") as stream:
            stream.write(text)
    except FileExistsError:
        raise RecordError(f"{path}: there already; nothing is written over") from None
    except OSError as error:
        raise RecordError(f"{path}: cannot be written ({error.strerror})") from None
