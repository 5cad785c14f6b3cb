"""Typed TOML to checked tables, with every fault of a file listed at once.

A `Document` is one file as read. Each of its tables is held against a `Table` (pydantic, for shape only) and comes back
with the faulty keys left out, so that the checks after it still run; the faults gather in the document and are raised
together at the end. Nothing of pydantic is handed on: loaders copy what they need into frozen dataclasses.
"""

from __future__ import annotations

import hashlib
import math
import re
from collections.abc import Iterable, Mapping
from pathlib import Path
from typing import Any, ClassVar, Final, TypeVar

from pydantic import BaseModel, ConfigDict, ValidationError
from pydantic_core import ErrorDetails

from briefkit.errors import Fault, FaultyFile
from briefkit.reading import lines
from briefkit.reading.quantity import did_you_mean, nearest, quoted

SIZE_LIMIT: Final = 256_000
EXAMPLE: Final = "EXAMPLE"  # marks a starter's invented values, in a comment at the end of their line


class Table(BaseModel):
    """Shape of one table. Every key defaults to None; `required` names those that may not be left out."""

    model_config = ConfigDict(extra="forbid", strict=True, frozen=True)
    required: ClassVar[tuple[str, ...]] = ()


T = TypeVar("T", bound=Table)


class Document:
    """One typed file as read: its data, the SHA-256 of its bytes, and the faults found so far.

    Raises `FaultyFile` where there is no such file, it is over 256 kB, or it is not UTF-8 text. A byte-order mark and
    any line ends are accepted. Slips of TOML are faults like any other: the line is set aside and reading goes on.
    """

    def __init__(self, path: Path | str) -> None:
        self.path = Path(path)
        self.file = str(path)
        self.faults: list[Fault] = []
        content = self._content()
        self.data_hash = hashlib.sha256(content).hexdigest()
        try:
            self._text = content.decode("utf-8-sig").replace("\r\n", "\n").replace("\r", "\n")
        except UnicodeDecodeError as error:
            line = content[: error.start].count(b"\n") + 1
            raise FaultyFile(
                [Fault(self.file, "file", "bytes that are not UTF-8 text", "UTF-8", "save the file as UTF-8", line)]
            ) from None
        self._lines = lines.line_numbers(self._text)
        self._slips: set[int] = set()
        self.data, slips = lines.parse(self._text)
        for slip in slips:
            self.fault(slip.key, slip.read, "TOML", slip.remedy, slip.line)
        self._slips = {slip.line for slip in slips}
        if slips and not self.data:
            self.raise_faults()

    # -- reading tables ------------------------------------------------------------------------------------------

    def tables(self, prefix: str, required: Iterable[str], optional: Iterable[str] = ()) -> None:
        """Record unknown and missing tables at `prefix` ("" for the top of the file)."""
        present = self._at(prefix)
        if present is None:
            return
        required = tuple(required)
        known = (*required, *optional)
        self._unknown_and_missing(prefix, present, known, required, "table")

    def table(self, key: str, shape: type[T]) -> T | None:
        """The table at a dotted key with its faulty keys left out; None where there is none (see `tables`)."""
        value = self._at(key)
        return None if value is None else self._shaped(key, value, shape)

    def entries(self, key: str, shape: type[T]) -> list[tuple[str, T]]:
        """The array of tables at a dotted key, with the name of each for faults: "manual.speeds (entry 2)"."""
        parent, _, last = key.rpartition(".")
        holder = self._at(parent)
        value = [] if holder is None else holder.get(last, [])
        if not isinstance(value, list):
            self.fault(key, quoted(value), f"entries, each under [[{key}]]")
            return []
        found = []
        for number, entry in enumerate(value, start=1):
            name = f"{key} (entry {number})"
            if isinstance(entry, dict):
                found.append((name, self._shaped(name, entry, shape)))
            else:
                self.fault(name, quoted(entry), f"a table under [[{key}]]")
        return found

    def raw(self, key: str) -> Mapping[str, object]:
        """What stands in the table at a dotted key, held to no shape; empty where there is none."""
        return self._at(key) or {}

    def part(self, key: str, value: Mapping[str, object], shape: type[T]) -> T:
        """A table that stands inside another one, held to a shape under its dotted key; faulty keys left out."""
        return self._shaped(key, dict(value), shape)

    def named(self, key: str, shape: type[T]) -> dict[str, T]:
        """The tables below a dotted key, by name: [work_areas.vellmark], [work_areas.harl]."""
        found = {}
        for name in self._at(key) or {}:
            if (entry := self._at(f"{key}.{name}")) is not None:
                found[name] = self._shaped(f"{key}.{name}", entry, shape)
        return found

    # -- faults --------------------------------------------------------------------------------------------------

    def fault(self, key: str, read: str, permitted: str, remedy: str = "", line: int = 0) -> None:
        """Record a fault; the line is looked up by the key unless given. One line with a TOML slip gives one fault."""
        line = line or self.line_of(key)
        if line not in self._slips:
            self.faults.append(Fault(self.file, key, read, permitted, remedy, line))

    def has_fault_below(self, key: str) -> bool:
        """Whether a table, or anything in it, already has a fault: what depends on the whole table is not held then."""
        return any(re.match(rf"{re.escape(key)}(?![\w-])", fault.key) for fault in self.faults)

    def line_of(self, key: str) -> int:
        """The line a dotted key, or what is first below it, or the nearest table above it, stands on; 0 for neither."""
        while key:
            if key in self._lines:
                return self._lines[key]
            below = [line for name, line in self._lines.items() if name.startswith((f"{key}.", f"{key} ("))]
            if below:
                return min(below)
            key = re.sub(r"(?:[.,][^.,]*|[^.,]+)$", "", key)
        return 0

    def block_line(self, key: str) -> int:
        """The line the first line of a text block stands on: the one below, where the opening quotes end theirs."""
        line = self.line_of(key)
        opening = self._text.split("\n")[line - 1] if line else ""
        return line + 1 if opening.rstrip().endswith(("'''", '"""')) else line

    def unanswered(self) -> tuple[str, ...]:
        """Dotted keys whose value, or part of whose text block, is still "?"."""
        return tuple(lines.unanswered(self.data))

    def examples(self) -> tuple[tuple[str, int], ...]:
        """Dotted keys, with their lines, that still carry a starter's mark EXAMPLE in their comment."""
        return tuple(lines.marked(self._text, EXAMPLE))

    def raise_faults(self) -> None:
        """Raise `FaultyFile` with every fault, in the order of the file, if there is any."""
        if self.faults:
            raise FaultyFile(sorted(self.faults, key=lambda fault: fault.line or math.inf))

    # -- inside --------------------------------------------------------------------------------------------------

    def _content(self) -> bytes:
        try:
            if self.path.exists() and not self.path.is_file() and not self.path.is_dir():
                raise FaultyFile([Fault(self.file, "file", "a device or a pipe", "a readable TOML file")])
            if self.path.stat().st_size > SIZE_LIMIT:
                raise FaultyFile(
                    [Fault(self.file, "file", f"{self.path.stat().st_size:,} bytes", f"at most {SIZE_LIMIT:,} bytes")]
                )
            return self.path.read_bytes()
        except OSError as error:
            beside = self.path.parent.glob(f"*{self.path.suffix}") if self.path.parent.is_dir() else []
            remedy = did_you_mean(self.path.name, (other.name for other in beside), "check the path")
            if self.path.is_dir():
                remedy = "give a file in it"
            said = (error.strerror or "not readable").lower()
            raise FaultyFile([Fault(self.file, "file", said, "a readable TOML file", remedy)]) from None

    def _at(self, key: str) -> dict[str, Any] | None:
        """The table at a dotted key; None where absent; a fault where something else stands there."""
        value: Any = self.data
        for part in key.split(".") if key else ():
            if not isinstance(value, dict) or part not in value:
                return None
            value = value[part]
        if isinstance(value, dict):
            return value
        self.fault(key, quoted(value), f"a table, under [{key}]")
        return None

    def _shaped(self, key: str, value: dict[str, Any], shape: type[T]) -> T:
        faulty: set[str] = set()
        try:
            shape.model_validate(value)
        except ValidationError as error:
            for detail in error.errors(include_url=False):
                faulty.add(str(detail["loc"][0]))
                if detail["type"] != "extra_forbidden":
                    self._record(key, detail)
        self._unknown_and_missing(key, value, tuple(shape.model_fields), shape.required, "key")
        return shape.model_validate({name: read for name, read in value.items() if name not in faulty})

    def _record(self, table: str, detail: ErrorDetails) -> None:
        name, *places = detail["loc"]
        key = f"{table}.{name}" + "".join(f", value {int(place) + 1}" for place in places)
        if detail["type"] == "typed":
            for part, read, permitted, remedy in detail["ctx"]["faults"]:
                self.fault(key + part, read, permitted, remedy)
        else:
            permitted, remedy = _in_words(detail)
            self.fault(key, quoted(detail["input"]), permitted, remedy)

    def _unknown_and_missing(
        self, prefix: str, present: Mapping[str, object], known: tuple[str, ...], required: tuple[str, ...], noun: str
    ) -> None:
        """A misspelt required name is one fault: unknown, with the missing one as its remedy."""
        dot = f"{prefix}." if prefix else ""
        missing = [name for name in required if name not in present]
        for name in present:
            if name in known:
                continue
            like = nearest(name, missing) or nearest(name, (k for k in known if k not in present))
            if like in missing:
                missing.remove(like)
            remedy = f"did you mean {like}?" if like else "take it out"
            self.fault(f"{dot}{name}", f"the {noun} {name}", ", ".join(known), remedy)
        for name in missing:
            self.fault(f"{dot}{name}", "nothing", f"the {noun} {name} is needed", "add it", self.line_of(prefix))


def _in_words(detail: ErrorDetails) -> tuple[str, str]:
    """Permitted and remedy for a shape error of pydantic, in the words of a person who types TOML."""
    kind, context = detail["type"], detail.get("ctx", {})
    if kind == "literal_error":
        choices = re.findall(r"'([^']*)'", str(context["expected"]))
        return ", ".join(f'"{choice}"' for choice in choices), did_you_mean(str(detail["input"]), choices)
    if kind in ("string_type", "string_pattern_mismatch"):
        return "text between quotes, on one line", ""
    if kind.startswith("int"):
        return "a whole number without quotes", ""
    if kind.startswith("date"):
        return "a date without quotes, like 2032-02-29", ""
    if kind in ("list_type", "tuple_type"):
        return 'a list between square brackets, like ["first", "second"]', ""
    if kind in ("too_short", "too_long"):
        return f"{context.get('min_length', context.get('max_length'))} values", ""
    if kind in ("greater_than_equal", "less_than_equal"):
        return (f"{context['ge']} or more" if "ge" in context else f"{context['le']} or less"), ""
    return str(detail["msg"]).lower(), ""
