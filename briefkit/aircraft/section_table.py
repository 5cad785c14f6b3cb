"""An operator's own blade section from a plain CSV: `mach, alpha_deg, cl, cd`, one line a point, on a whole grid.

Lines that begin with # are notes. Rows go by Mach number, within it by rising angle, and every Mach number has the same
angles: a table with holes would have to be guessed at, so it is refused with the row named.

The aircraft file names it: the CSV stands beside that file, so that it lies in the operator folder and is covered by
what is signed. `spread` is the half-width of its angle of maximum lift.

    [section]
    table = "pelquill-2t-section.csv"
    source = "wind-tunnel report 12 rev 1, table 3"
    spread = "1 deg"
"""

from __future__ import annotations

import hashlib
import math
import re
import tomllib
from dataclasses import dataclass
from itertools import pairwise
from pathlib import Path
from typing import Annotated, ClassVar, Final

import numpy as np
from numpy.typing import NDArray

from briefkit.aircraft.tables import Text
from briefkit.errors import Fault, FaultyFile, OutsideLimits, ReadingError
from briefkit.physics.section import Naca0012, TableSection
from briefkit.reading.document import SIZE_LIMIT, Document, Table
from briefkit.reading.quantity import Typed, quantity, quoted
from briefkit.units import read

KEY: Final = "section"
_FILE = re.compile(r"[A-Za-z0-9][A-Za-z0-9 _.-]*\.csv")
COLUMNS: Final = ("mach", "alpha_deg", "cl", "cd")
_ATTACHED: Final = (-5.0, 5.0)  # degrees: across zero lift, before any stall that a rotor could be flown with
_RANGES: Final = {"mach": (0.0, 1.0), "alpha_deg": (-180.0, 180.0), "cl": (-4.0, 4.0), "cd": (0.0001, 3.0)}


@dataclass(frozen=True)
class _Row:
    line: int
    mach: float
    alpha: float
    lift: float
    drag: float


class SectionEntry(Table):
    required: ClassVar[tuple[str, ...]] = ("table",)
    table: Text | None = None
    spread: Annotated[Typed | None, quantity("angle", 0.0, math.radians(8.0))] = None
    source: str = ""


@dataclass(frozen=True, eq=False)
class OperatorSection:
    """The operator's section as stated: its table, the file's name, source and the half-width of its stall angle [rad].

    `digest` is the SHA-256 of the file. A section for `trim` and for `stall_measures`.
    """

    table: TableSection
    file: str
    source: str
    spread: float
    digest: str

    @property
    def highest_mach(self) -> float:
        """The last Mach number of the table."""
        return self.table.highest_mach

    def coefficients(
        self, angle: NDArray[np.float64], mach: NDArray[np.float64], lift_slope: NDArray[np.float64]
    ) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
        """Those of the table, as typed."""
        return self.table.coefficients(angle, mach, lift_slope)

    def stall_angle(self, mach: NDArray[np.float64]) -> NDArray[np.float64]:
        """Angle of maximum lift [rad] less its spread; beyond the table's last Mach number no more than NACA 0012's."""
        own = self.table.stall_angle(mach)
        beyond = np.asarray(mach) > self.highest_mach
        return np.where(beyond, np.minimum(own, Naca0012().stall_angle(mach)), own) - self.spread


def read_section(document: Document, entry: SectionEntry | None) -> OperatorSection | None:
    """The section an aircraft file names; None where there is none, or a faulty one with its faults in the document."""
    if entry is None or entry.table is None or document.has_fault_below(KEY):
        return None
    key, folder = f"{KEY}.table", document.path.parent
    if not _FILE.fullmatch(entry.table):
        document.fault(key, quoted(entry.table), "the name of a .csv file beside this one, without folders")
        return None
    path = folder / entry.table
    if path.is_symlink() or (path.exists() and not path.is_file()):
        document.fault(key, quoted(entry.table), "a file of its own, no link", "put the file itself beside this one")
        return None
    try:
        if path.stat().st_size > SIZE_LIMIT:
            document.fault(key, f"{path.stat().st_size:,} bytes", f"at most {SIZE_LIMIT:,} bytes")
            return None
        table = read_section_table(path)
    except OSError as error:
        document.fault(key, f"{quoted(entry.table)}, {(error.strerror or 'not readable').lower()}", "a readable file")
        return None
    except FaultyFile as faulty:
        for fault in faulty.faults:
            document.fault(f"{key}, {fault.file}, {fault.key}", fault.read, fault.permitted, fault.remedy)
        return None
    spread = (entry.spread.value or 0.0) if entry.spread else 0.0
    return OperatorSection(table, entry.table, entry.source, spread, hashlib.sha256(path.read_bytes()).hexdigest())


def section_file(aircraft_file: Path) -> Path | None:
    """The section table an aircraft file names, without reading either for sense; None where it names none.

    Raises OSError where the aircraft file cannot be read and ValueError where it is not TOML.
    """
    named = tomllib.loads(aircraft_file.read_bytes().decode("utf-8-sig")).get(KEY)
    table = named.get("table") if isinstance(named, dict) else None
    return aircraft_file.parent / table if isinstance(table, str) and _FILE.fullmatch(table) else None


def read_section_table(path: Path) -> TableSection:
    """The section in a file; raises `FaultyFile` with every fault, each by its line.

    Angles in degrees from the chord, at least from -5 to +15; Mach numbers from 0 to 1, at most the last of which the
    rotor's advancing tip may reach.
    """
    faults: list[Fault] = []
    rows = _rows(path, faults)
    if not faults:
        _check_grid(path, rows, faults)
    if not faults:
        _check_lift(path, rows, faults)
    if faults:
        raise FaultyFile(faults)
    machs = np.unique([row.mach for row in rows])
    shape = (machs.size, len(rows) // machs.size)
    angles = np.radians([row.alpha for row in rows[: shape[1]]])
    lift, drag = np.array([row.lift for row in rows]), np.array([row.drag for row in rows])
    try:
        return TableSection(machs, angles, lift.reshape(shape), drag.reshape(shape))
    except OutsideLimits as refusal:
        ends = f"angles from {rows[0].alpha:g} to {rows[shape[1] - 1].alpha:g}"
        raise FaultyFile([Fault(path.name, "alpha_deg", ends, refusal.permitted)]) from refusal


def _rows(path: Path, faults: list[Fault]) -> list[_Row]:
    try:
        text = path.read_text(encoding="utf-8-sig")
    except (OSError, UnicodeDecodeError) as error:
        reason = error.strerror if isinstance(error, OSError) else "not UTF-8 text"
        faults.append(Fault(path.name, "file", str(reason), "a plain text file"))
        return []
    lines = [
        (number, [cell.strip() for cell in line.split(",")])
        for number, line in enumerate(text.splitlines(), start=1)
        if line.strip() and not line.lstrip().startswith("#")
    ]
    if not lines or tuple(cell.lower() for cell in lines[0][1]) != COLUMNS:
        first = ", ".join(lines[0][1]) if lines else "nothing"
        faults.append(Fault(path.name, "line 1" if not lines else f"line {lines[0][0]}", first, ", ".join(COLUMNS)))
        return []
    rows = [_row(path, number, cells, faults) for number, cells in lines[1:]]
    if not rows:
        faults.append(Fault(path.name, "rows", "none", "one line a point under the header"))
    return [row for row in rows if row is not None]


def _row(path: Path, line: int, cells: list[str], faults: list[Fault]) -> _Row | None:
    if len(cells) != len(COLUMNS):
        faults.append(Fault(path.name, f"line {line}", f"{len(cells)} cells", "four: " + ", ".join(COLUMNS)))
        return None
    values = []
    for column, cell in zip(COLUMNS, cells, strict=True):
        least, most = _RANGES[column]
        try:
            value = read(cell, "number")
        except ReadingError as error:
            faults.append(Fault(path.name, f"line {line}, {column}", cell, error.permitted, error.remedy))
            continue
        if least <= value <= most:
            values.append(value)
        else:
            faults.append(Fault(path.name, f"line {line}, {column}", cell, f"{least:g} to {most:g}"))
    return _Row(line, *values) if len(values) == len(COLUMNS) else None


def _check_grid(path: Path, rows: list[_Row], faults: list[Fault]) -> None:
    """Mach numbers in rising blocks, each with the angles of the first, rising."""
    first = [row.alpha for row in rows if row.mach == rows[0].mach]
    for before, row in pairwise(rows):
        if row.mach < before.mach:
            permitted = f"{before.mach:g} or more: rows go by rising Mach number"
            faults.append(Fault(path.name, f"line {row.line}, mach", f"{row.mach:g}", permitted))
            return
        if row.mach == before.mach and row.alpha <= before.alpha:
            permitted = f"above {before.alpha:g}: angles rise within a Mach number"
            faults.append(Fault(path.name, f"line {row.line}, alpha_deg", f"{row.alpha:g}", permitted))
            return
    for start in range(0, len(rows), len(first)):
        block = rows[start : start + len(first)]
        for place, row in enumerate(block):
            if row.mach != block[0].mach or row.alpha != first[place]:
                wanted = f"{first[place]:g} at Mach {block[0].mach:g}: every Mach number has the angles of the first"
                read_as = f"{row.alpha:g} at Mach {row.mach:g}"
                faults.append(Fault(path.name, f"line {row.line}, alpha_deg", read_as, wanted))
                return
        if len(block) < len(first):
            wanted = f"a row for {first[len(block)]:g} at Mach {block[0].mach:g}"
            faults.append(Fault(path.name, f"after line {block[-1].line}", "the end of the file", wanted))


def _check_lift(path: Path, rows: list[_Row], faults: list[Fault]) -> None:
    """At every Mach number lift rises from -5 to +5 degrees, between points as the section reads them.

    A sign turned round would put the stall at the first point above zero, or nowhere.
    """
    low, high = _ATTACHED
    for mach in dict.fromkeys(row.mach for row in rows):
        block = [row for row in rows if row.mach == mach]
        angles, lift = [row.alpha for row in block], [row.lift for row in block]
        if not angles[0] <= low < high <= angles[-1]:
            return  # too short a table, which is said of its angles
        at_low, at_high = np.interp(_ATTACHED, angles, lift)
        if not at_high > at_low:
            read_as = f"{at_low:.4g} at {low:g} degrees, {at_high:.4g} at {high:+g}, at Mach {mach:g}"
            permitted = f"lift that rises from {low:g} to {high:+g} degrees"
            place = f"lines {block[0].line} to {block[-1].line}, cl"
            faults.append(Fault(path.name, place, read_as, permitted, "look again at the signs of alpha_deg and cl"))
