"""The session log of a recurrent check: one JSON line a step, on the disk before the next step is taken.

Every line stands alone: session, time, type, hashes of the files, briefkit's version, inputs, outputs, the group's
predictions and decision; and the hash of the line before it, so that a lost or edited line shows. No names and no
results: those belong in the operator's own training records.

Keep logs for three months at least (AMC5 SPA.EFB.100(b)(3), computation log); better for the life of the brief and
three years. briefkit never deletes one.
"""

from __future__ import annotations

import datetime as dt
import hashlib
import json
import os
import secrets
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from importlib.metadata import version
from pathlib import Path
from typing import Any, Final

from briefkit.brief.identity import operator_folder
from briefkit.brief.write import flush_folder
from briefkit.errors import BriefkitError
from briefkit.session.deck import Deck
from briefkit.session.privacy import refuse_personal

FORMAT: Final = 1
FOLDER: Final = "session_logs"
TORN: Final = ".torn"
SIZE_LIMIT: Final = 20_000_000
LONGEST_NOTE: Final = 400
MOST_PREDICTIONS: Final = 24
STEPS: Final = ("opened", "case", "predictions", "manual", "computed", "decision", "what-if", "reset", "closed")
_FIRST: Final = "0" * 16


class RecordError(BriefkitError):
    """A step could not be recorded, or a log could not be read."""


@dataclass(frozen=True)
class Step:
    """One line of a log as read. `line` is its number in the file, `data` the hashes of the files behind it."""

    line: int
    at: str
    session: str
    kind: str
    case: str
    version: str
    type: str
    configuration: str
    aircraft: str
    data: Mapping[str, str]
    inputs: Mapping[str, float | None]
    outputs: Mapping[str, Any]
    predictions: tuple[str, ...]
    decision: str


@dataclass(frozen=True)
class Log:
    """A log as read: its steps in order, and what is wrong with it in words (`faults`), empty for a whole one."""

    path: Path
    steps: tuple[Step, ...]
    faults: tuple[str, ...]


class SessionLog:
    """A log to append to: `SessionLog(path, deck)`. The file is made by the first step, and re-opened if it exists.

    A last line that a killed process left torn is set apart beside the log (`.torn`) and reported in `torn`. Raises
    `RecordError` where the file is not such a log or cannot be written.
    """

    def __init__(self, path: Path | str, deck: Deck, clock: Callable[[], dt.datetime] | None = None) -> None:
        self.path = Path(path)
        self._deck = deck
        self._clock = clock or (lambda: dt.datetime.now(dt.UTC))
        self._version = version("briefkit")
        self.torn, self.session = "", secrets.token_hex(4)
        self._last, self._size = _FIRST, 0
        if self.path.exists():
            self._reopen()

    def step(
        self,
        kind: str,
        *,
        case: str = "",
        inputs: Mapping[str, float | None] | None = None,
        outputs: Mapping[str, Any] | None = None,
        predictions: Sequence[str] = (),
        decision: str = "",
    ) -> None:
        """Append one step; it is on the disk when this returns.

        Raises `PersonalData` where a prediction or the decision looks like a name or a result, and `RecordError` where
        the disk refuses or another process has written to the log: nothing of the step is written then.
        """
        if kind not in STEPS:
            raise ValueError(f"a step is one of {', '.join(STEPS)}, not {kind}")
        if len(predictions) > MOST_PREDICTIONS:
            raise RecordError(f"{len(predictions)} predictions; at most {MOST_PREDICTIONS} are recorded for a case")
        for number, text in enumerate((*predictions, decision), start=1):
            place = f"prediction {number}" if number <= len(predictions) else "decision"
            if len(text) > LONGEST_NOTE:
                raise RecordError(f"{place}: {len(text)} characters; at most {LONGEST_NOTE} are recorded")
            refuse_personal(place, text, self._deck.words)
        self._append({
            "log": FORMAT,
            "at": self._clock().astimezone(dt.UTC).strftime("%Y-%m-%dT%H:%M:%SZ"),
            "session": self.session,
            "step": kind,
            "case": case,
            "briefkit": self._version,
            "type": self._deck.aircraft.name,
            "configuration": self._deck.aircraft.configuration,
            "aircraft": self._deck.aircraft_file,
            "data": {
                "aircraft": self._deck.aircraft.data_hash,
                "operation": self._deck.operation_hash,
                "deck": self._deck.data_hash,
            },
            "inputs": dict(inputs or {}),
            "outputs": dict(outputs or {}),
            "predictions": list(predictions),
            "decision": decision,
            "follows": self._last,
        })  # fmt: skip

    def _append(self, record: Mapping[str, Any]) -> None:
        line = json.dumps(record, ensure_ascii=False, allow_nan=False, separators=(",", ":")).encode("utf-8")
        try:
            self.path.parent.mkdir(parents=True, exist_ok=True)
            flags = os.O_RDWR | os.O_CREAT | os.O_APPEND | getattr(os, "O_NOFOLLOW", 0) | getattr(os, "O_BINARY", 0)
            handle = os.open(self.path, flags, 0o600)
            try:
                if os.fstat(handle).st_size != self._size:
                    raise RecordError(f"{self.path}: another process has written to this log; start a new one")
                try:
                    _write_all(handle, line + b"\n")
                    os.fsync(handle)
                except OSError:
                    os.ftruncate(handle, self._size)  # a step that is not whole is no step
                    raise
            finally:
                os.close(handle)
            if not self._size:
                flush_folder(self.path.parent)
        except OSError as error:
            raise RecordError(f"{self.path}: the step was not recorded ({error.strerror})") from None
        self._last, self._size = _digest(line), self._size + len(line) + 1

    def _reopen(self) -> None:
        content = _content(self.path)
        whole, torn = _parted(content)
        if torn:
            self._set_apart(torn, len(whole))
        log = _read(self.path, whole)
        if not log.steps:
            if whole:
                raise RecordError(f"{self.path}: not a session log; nothing was written to it")
            return
        lines = whole.splitlines()
        self.session, self._last, self._size = log.steps[-1].session, _digest(lines[-1]), len(whole)

    def _set_apart(self, torn: bytes, length: int) -> None:
        """Keep the fragment beside the log first, and only then cut it off."""
        beside = self.path.with_name(self.path.name + TORN)
        try:
            with beside.open("ab") as stream:
                stream.write(torn + b"\n")
                stream.flush()
                os.fsync(stream.fileno())
            with self.path.open("r+b") as stream:
                stream.truncate(length)
                os.fsync(stream.fileno())
        except OSError as error:
            raise RecordError(f"{self.path}: its torn last line could not be set apart ({error.strerror})") from None
        self.torn = f"the last line of {self.path.name} was torn ({len(torn)} bytes); it was set apart in {beside.name}"


def new_log_path(brief_folder: Path | str, now: dt.datetime | None = None) -> Path:
    """Where a new session of a brief is logged: `session_logs/` of the operator folder, outside every brief's seal.

    Raises `FaultyFile` where no operator folder is above the brief.
    """
    folder = Path(brief_folder).resolve()
    at = (now or dt.datetime.now(dt.UTC)).astimezone(dt.UTC)
    name = f"{folder.name}-{at:%Y%m%dT%H%M%SZ}-{secrets.token_hex(2)}.jsonl"
    return operator_folder(folder) / FOLDER / name


def read_log(path: Path | str) -> Log:
    """A log with everything that is wrong with it: a torn last line, lines that are not steps, lost or edited lines.

    Nothing is changed on the disk. Raises `RecordError` where there is no such file, or no step in it.
    """
    path = Path(path)
    whole, torn = _parted(_content(path))
    log = _read(path, whole)
    faults = list(log.faults)
    if torn:
        faults.append(f"the last line is torn ({len(torn)} bytes)")
    if not log.steps:
        raise RecordError(f"{path}: not a session log, or an empty one")
    return Log(path, log.steps, tuple(faults))


def _read(path: Path, whole: bytes) -> Log:
    steps: list[Step] = []
    faults: list[str] = []
    follows = _FIRST
    for number, line in enumerate(whole.splitlines(), start=1):
        step, said = _step(number, line)
        if step is None:
            faults.append(f"line {number} is not a step of a session log")
        else:
            steps.append(step)
            if said != follows:
                faults.append(f"line {number} does not follow the line before it: a line was lost or edited")
        follows = _digest(line)
    return Log(path, tuple(steps), tuple(faults))


def _step(number: int, line: bytes) -> tuple[Step | None, str]:
    """A line as a step, and the hash it says it follows; None where it is not one."""
    try:
        record = json.loads(line.decode("utf-8"), parse_constant=_no_constant)
    except (ValueError, RecursionError):
        return None, ""
    if not isinstance(record, dict) or record.get("log") != FORMAT or record.get("step") not in STEPS:
        return None, ""
    texts = [record.get(key) for key in ("at", "session", "case", "briefkit", "type", "configuration", "aircraft")]
    tables = [record.get(key) for key in ("data", "inputs", "outputs")]
    predictions, decision = record.get("predictions"), record.get("decision")
    if not all(isinstance(text, str) for text in (*texts, decision)) or not all(isinstance(t, dict) for t in tables):
        return None, ""
    numbers = all(value is None or (isinstance(value, int | float) and not isinstance(value, bool))
                  for value in tables[1].values())  # type: ignore[union-attr]  # held to be a table above  # fmt: skip
    if not numbers or not isinstance(predictions, list) or not all(isinstance(text, str) for text in predictions):
        return None, ""
    at, session, case, briefkit, kind, configuration, aircraft = map(str, texts)
    data, inputs, outputs = (dict(table) for table in tables if table is not None)
    step = Step(
        number, at, session, str(record["step"]), case, briefkit, kind, configuration, aircraft,
        data, inputs, outputs, tuple(predictions), str(decision),
    )  # fmt: skip
    return step, str(record.get("follows"))


def _no_constant(name: str) -> float:
    raise ValueError(f"{name} is not a number")


def _parted(content: bytes) -> tuple[bytes, bytes]:
    """Whole lines, and what stands after the last line end."""
    end = content.rfind(b"\n") + 1
    return content[:end], content[end:]


def _content(path: Path) -> bytes:
    try:
        if path.stat().st_size > SIZE_LIMIT:
            raise RecordError(f"{path}: more than {SIZE_LIMIT:,} bytes; not a session log")
        return path.read_bytes()
    except OSError as error:
        raise RecordError(f"{path}: cannot be read ({error.strerror})") from None


def _write_all(handle: int, content: bytes) -> None:
    while content:
        content = content[os.write(handle, content) :]


def _digest(line: bytes) -> str:
    return hashlib.sha256(line).hexdigest()[:16]
