"""The numbered list of sources of a brief, and a link from every mention of one on the page to its line in the list."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import fields, is_dataclass
from html import unescape
from typing import Final

from markupsafe import escape

from briefkit.aircraft.legs import Leg
from briefkit.aircraft.model import Aircraft, Stated
from briefkit.aircraft.operation import FleetEntry, WorkArea
from briefkit.brief.identity import Brief
from briefkit.brief.pages import Source
from briefkit.envelope import cues

_WORDS: Final = {
    "vne": "VNE power on", "vne_off": "VNE power off", "basic_vne": "VNE power on, basic configuration",
    "hover_tables": "hover ceilings", "calibration": "airspeed calibration", "rotor": "rotor", "limits": "limits",
    "rpm": "rotor speed at 100 %", "rotor_on": "rotor speed, power on", "rotor_off": "rotor speed, power off",
    "isa_deviation": "hottest day", "recovery": "recovery",
}  # fmt: skip
# Not put there as text of a source: a head, a drawing, another link, what is hidden from the eye.
_SKIPPED: Final = re.compile(r"<(head|svg|a|h1)\b|<caption class=\"(?:said|plain)\"")
_LEAST: Final = 4  # letters and digits: less is no name of a document, and stands in too many words
_SHORT: Final = 24  # letters that may stand together on a line of the narrowest telephone
_TOKEN: Final = re.compile(r"(<[^>]*>)")


def sources(brief: Brief) -> tuple[Source, ...]:
    """Every document a number on these pages is from, and none that only another brief of the operator uses."""
    operation = brief.operation
    found: dict[str, dict[str, None]] = {}
    fleet, area = operation.entry_for(brief.aircraft), operation.work_areas[brief.identity.work_area]
    stated = [
        *_of_aircraft(brief.aircraft),
        ("operator, order of documents, policy", operation.source),
        *([("masses, bank, status", fleet.source), *_stated(fleet, fleet.source)] if fleet is not None else ()),
        (area.name, area.source),
        *((f"leg, {leg.name}", leg.source) for leg in operation.legs if fleet and _flown(leg, fleet, area)),
        ("recognition, recovery, cautions", cues.HANDBOOK),
    ]
    for what, source in stated:
        if source:
            found.setdefault(source, {})[what] = None
    return tuple(Source(at, text, ", ".join(what)) for at, (text, what) in enumerate(found.items(), start=1))


def _flown(leg: Leg, fleet: FleetEntry, area: WorkArea) -> bool:
    return (leg.fleet, leg.work_area) == (fleet.key, area.key)


def _of_aircraft(aircraft: Aircraft) -> Iterator[tuple[str, str]]:
    """What and source: each table, and each value that states one of its own."""
    tables = dict(aircraft.sources)
    yield "type, serials", tables.get("type", "")
    yield f"configuration: {aircraft.configuration}", tables.get("configuration", "")
    for part in ("vne", "vne_off", "basic_vne", "limits", "calibration", "rotor"):
        table = getattr(aircraft, part)
        if table is None:
            continue
        yield _WORDS[part], table.source
        yield from _stated(table, table.source)
    if aircraft.vne.cap_text:
        yield "VNE power on, never above", aircraft.vne.cap_source
    if aircraft.vne.lowered:
        yield "VNE power on, taken off the basic chart", aircraft.vne.lowered_source
    for speed in aircraft.speeds:
        yield speed.label[:1].lower() + speed.label[1:], speed.source
    for hover in aircraft.hover_tables:
        yield f"{hover.kind} hover ceilings", hover.source
    yield "recovery", aircraft.recovery_source
    if aircraft.section is not None:
        yield "blade section", aircraft.section.source


def _stated(table: object, of_table: str) -> Iterator[tuple[str, str]]:
    """The values of a table that are not from the table's own source."""
    for name in fields(table) if is_dataclass(table) else ():
        value = getattr(table, name.name)
        for one in value if isinstance(value, tuple) else (value,):
            if isinstance(one, Stated) and (one.basis or one.source) not in ("", of_table):
                yield _WORDS.get(name.name, name.name.replace("_", " ")), one.basis or one.source


def link(page: str, listed: tuple[Source, ...]) -> str:
    """The page with every mention of a listed source a link to its line, one tap away; its own list is left as it is.

    `page` is HTML whose text and attributes are escaped, as the templates write it. Drawings, headings of the first
    level, hidden captions and the list itself are left alone.
    """
    names = {
        name: source
        for source in reversed(listed)
        for name in (source.text, source.text.removeprefix("flight "))
        if len(re.findall(r"\w", name)) >= _LEAST
    }
    if not names:
        return page
    mention = re.compile("|".join(_spaced(name) for name in sorted(names, key=len, reverse=True)))
    by_text = {_plain(name): source for name, source in names.items()}

    def linked(match: re.Match[str]) -> str:
        source = by_text.get(_plain(unescape(match[0])))
        if source is None:
            return match[0]
        short = ' class="short"' if len(source.text) <= _SHORT else ""
        return f'<a{short} href="#{source.anchor}">{match[0]}</a>'

    out, closing = [], ""
    for token in _TOKEN.split(page):
        if token.startswith("<"):
            closing = ("" if token == closing else closing) if closing else _closing(token)
            out.append(token)
        else:
            out.append(token if closing else mention.sub(linked, token))
    return "".join(out)


def _closing(tag: str) -> str:
    """The tag that ends what is left alone, where this one begins it."""
    if tag.startswith('<tr id="source-'):
        return "</tr>"
    found = _SKIPPED.match(tag)
    return f"</{found[1] or 'caption'}>" if found else ""


def _plain(text: str) -> str:
    return " ".join(text.split())


def _spaced(name: str) -> str:
    """A name as the template escapes and sets it, where a space may have become one that does not break."""
    return r"(?<![\w-])" + r"\s+".join(re.escape(str(escape(word))) for word in name.split()) + r"(?![\w-])"
