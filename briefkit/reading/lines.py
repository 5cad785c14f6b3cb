"""Where things stand in a TOML file, and slips of TOML as faults like any other.

The standard parser stops at the first slip and gives no line for a key. Here a slip is recorded, the line is set aside
and the rest is still read, so that an author sees every fault of the file at once.
"""

from __future__ import annotations

import json
import re
import tomllib
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any, Final

from briefkit.reading.quantity import NOT_YET

_MOST_SLIPS: Final = 50  # after so many the rest of a file is not looked at

_HEADER = re.compile(r"\s*(\[\[?)\s*([^\[\]]+?)\s*\]\]?\s*(?:#.*)?")
_PAIR = re.compile(r"""\s*((?:[\w-]+|"[^"]*"|'[^']*')(?:\s*\.\s*(?:[\w-]+|"[^"]*"|'[^']*'))*)\s*=\s*(.*)""")
_QUOTES: Final = ("'''", '"""')
_AT_LINE = re.compile(r"(.*) \(at line (\d+), column (\d+)\)", re.DOTALL)


@dataclass(frozen=True)
class Slip:
    """One line that is not TOML: where, what stood there, what to write instead."""

    line: int
    key: str
    read: str
    remedy: str


def parse(text: str) -> tuple[dict[str, Any], list[Slip]]:
    """The data of a TOML text and its slips; a line with a slip is read as text in quotes where that makes sense."""
    places = line_numbers(text)
    lines = text.split("\n")
    slips = _left_open(lines)
    while len(slips) < _MOST_SLIPS:
        try:
            return tomllib.loads("\n".join(lines)), slips
        except RecursionError:
            return {}, [Slip(0, "file", "lists within lists without end", "take the square brackets out")]
        except ValueError as error:  # a TOMLDecodeError, or a whole number of thousands of digits
            at = _AT_LINE.fullmatch(str(error))
            said, number = (at[1], int(at[2])) if at else (str(error), 0)
            line = lines[number - 1] if number else ""
            again = any(slip.line == number for slip in slips)
            if not again:
                key = next((key for key, place in places.items() if place == number), f"line {number}")
                slips.append(_slip(line, number, key, said))
            pair = _PAIR.fullmatch(line)
            if again or pair is None:
                break
            lines[number - 1] = "" if "Cannot overwrite" in said else f"{pair[1]} = {json.dumps(pair[2])}"
    return {}, slips


def _left_open(lines: list[str]) -> list[Slip]:
    """Blocks whose closing quotes are missing: the next quotes are those that open another one.

    The parser would point at a line far below. The opening quotes are taken out of `lines`, so that the rest is read.
    """
    slips, opened, quotes = [], 0, ""
    for number, line in enumerate(lines, start=1):
        pair = _PAIR.fullmatch(line)
        opening = pair[2][:3] if pair and pair[2][:3] in _QUOTES and pair[2][:3] not in pair[2][3:] else ""
        if opened and opening == quotes:
            key, _, rest = lines[opened - 1].partition("=")
            read = f"a block that is still open at line {number}, `{line.strip()}`"
            slips.append(Slip(opened, _bare(key), read, f"a block opened with {quotes} has to be closed with {quotes}"))
            lines[opened - 1] = f"{key}= {json.dumps(rest.replace(quotes, '').strip())}"
            opened = number
        elif opened:
            opened = 0 if quotes in line else opened
        elif opening:
            opened, quotes = number, opening
    return slips


def _slip(line: str, number: int, key: str, said: str) -> Slip:
    if not number and "end of document" in said:
        return Slip(0, "file", "the end of the file", "a block opened with ''' has to be closed with '''")
    if not number:
        return Slip(0, "file", "a whole number of thousands of digits", "look for it")
    pair = _PAIR.fullmatch(line)
    if "Cannot overwrite" in said or "twice" in said:
        return Slip(number, key, f"`{line.strip()}`", "this name stands twice in the file; take one out")
    if "Invalid date" in said:
        return Slip(number, key, f"`{line.strip()}`", "there is no such day or time")
    if "Unescaped" in said:
        remedy = "open and close a block that has a \\ in it with ''', not with \"\"\""
        return Slip(number, key, f"`{line.strip()}`", remedy)
    if pair is not None and not pair[2].startswith(('"', "'", "[", "{")):
        value = re.sub(r"\s*#.*", "", pair[2]).strip("“”„‘’ ")
        written = json.dumps(value, ensure_ascii=False)
        return Slip(number, key, f"`{pair[2].strip()}`", f"text stands between straight quotes: {pair[1]} = {written}")
    return Slip(number, key, f"`{line.strip()}`", f"{said[:1].lower()}{said[1:]}")


def line_numbers(text: str) -> dict[str, int]:
    """Dotted key to line number, good enough to point with: headers, keys, and text blocks passed over."""
    found: dict[str, int] = {}
    counts: dict[str, int] = {}
    prefix, closing = "", ""
    for number, line in enumerate(text.split("\n"), start=1):
        if closing:
            closing = "" if closing in line else closing
        elif header := _HEADER.fullmatch(line):
            prefix = _inside_entry(_bare(header[2]), counts)
            if header[1] == "[[":
                counts[prefix] = counts.get(prefix, 0) + 1
                prefix = f"{prefix} (entry {counts[prefix]})"
            found.setdefault(prefix, number)
        elif pair := _PAIR.fullmatch(line):
            key = _bare(pair[1])
            found.setdefault(f"{prefix}.{key}" if prefix else key, number)
            opening = pair[2][:3]
            closing = opening if opening in _QUOTES and opening not in pair[2][3:] else ""
    return found


def _inside_entry(key: str, counts: Mapping[str, int]) -> str:
    """A header below an array of tables names the last of its entries: "configuration (entry 2).power_on"."""
    for name, count in counts.items():
        if key.startswith(f"{name}."):
            return f"{name} (entry {count}){key[len(name) :]}"
    return key


def _bare(key: str) -> str:
    return ".".join(part.strip().strip("\"'") for part in key.split("."))


def marked(text: str, mark: str) -> list[tuple[str, int]]:
    """Dotted keys and lines whose comment begins with `mark`; what stands in a text block is no comment."""
    places = {line: key for key, line in line_numbers(text).items()}
    comment = re.compile(rf"[^#]*#\s*{re.escape(mark)}\b.*")
    return [(places[n], n) for n, line in enumerate(text.split("\n"), start=1) if n in places and comment.match(line)]


def unanswered(value: object, key: str = "") -> Iterable[str]:
    """Dotted keys below `value` that are still "?", whole or in part of a text block."""
    if isinstance(value, Mapping):
        for name, inner in value.items():
            yield from unanswered(inner, f"{key}.{name}" if key else name)
    elif isinstance(value, list):
        for number, inner in enumerate(value, start=1):
            between = f"{key} (entry {number})" if isinstance(inner, Mapping) else f"{key}, value {number}"
            yield from unanswered(inner, between)
    elif isinstance(value, str):
        parts = re.split(r"[\s;]+", value) if "\n" in value else [value.strip()]
        if NOT_YET in parts:
            yield key
