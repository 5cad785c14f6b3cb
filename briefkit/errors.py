"""The one family of errors, and the closed lists of reasons whose text is what a crew or an author reads."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum


class Reason(StrEnum):
    """Why a member of a batch has no number. The text is printed as it stands."""

    NONE = ""
    OUTSIDE_CHART = "outside the manual's VNE chart"
    BEYOND_CHART = "loaded beyond anything on the manual's VNE chart"
    TOO_COLD = "no point on the manual's VNE chart is cold enough for this rotor speed"
    NOT_EVEN_LEVEL = "not even level flight at this rotor speed is on the chart"
    NO_TEMPERATURES = "the manual's chart does not say which temperatures it was made for"
    OUTSIDE_CALIBRATION = "outside the manual's airspeed calibration"
    OUTSIDE_LIMITS = "outside the manual's limits"
    OUTSIDE_MODEL = "outside the range the rotor model is valid for"
    NO_TRIM = "the rotor model found no steady flight"


class SetBy(StrEnum):
    """What sets a printed speed."""

    MANUAL_VNE = "manual VNE"
    EQUIVALENT = "manual VNE at the equivalent level flight"
    MANUAL_OTHER = "manual's own other speed"


class BriefkitError(Exception):
    """Base of every error this package raises on purpose. Its text is one a pilot may read."""


class ReadingError(BriefkitError, ValueError):
    """A typed quantity could not be read: what was read, what is permitted, what to write instead."""

    def __init__(self, read: str, permitted: str, remedy: str = "") -> None:
        self.read, self.permitted, self.remedy = read, permitted, remedy
        super().__init__(f"read {read!r}; permitted: {permitted}" + (f"; {remedy}" if remedy else ""))


class MixedSpeeds(BriefkitError, TypeError):
    """Speeds of unlike kinds (indicated, calibrated, true), or a speed and a bare number, in one sum or comparison."""


class Refusal(BriefkitError):
    """The tool declines to give a number, and says why.

    Fields: `quantity` (what was asked about, in words), `value` and `unit` (what it was), `permitted` (the range, in
    words), `where` (chart, table or file that sets it), `reason` (a `Reason`).
    """

    def __init__(
        self,
        quantity: str,
        value: float | str,
        unit: str,
        permitted: str,
        where: str,
        reason: Reason,
    ) -> None:
        self.quantity, self.value, self.unit = quantity, value, unit
        self.permitted, self.where, self.reason = permitted, where, reason
        shown = value if isinstance(value, str) else f"{round(value, 2):,g}"
        shown = " ".join(part for part in (str(shown), unit) if part)
        super().__init__(f"{quantity} {shown}: {reason} ({where}). Permitted: {permitted}")


class OutsideChart(Refusal):
    """The condition is not on the manual's chart."""


class BeyondChart(Refusal):
    """The equivalent level flight is beyond the chart. `covered_bank` is in radians (None where not even level)."""

    covered_bank: float | None = None


class OutsideCalibration(Refusal):
    """The speed is outside the manual's airspeed calibration."""


class OutsideLimits(Refusal):
    """A limit of the manual, or of the model, is passed."""


class NoTrim(Refusal):
    """The rotor model found no steady state."""


@dataclass(frozen=True)
class Fault:
    """One thing wrong in a typed file.

    `key` is the dotted key, or key with row and column for a chart. `read` is what stood there, `permitted` what may
    stand there, `remedy` what to write instead; `line` is the line of the file, 0 where it has none.
    """

    file: str
    key: str
    read: str
    permitted: str
    remedy: str = ""
    line: int = 0

    def __str__(self) -> str:
        tail = f"; {self.remedy}" if self.remedy else ""
        place = f"{self.file}, line {self.line}" if self.line else self.file
        return f"{place}: {self.key}: read {self.read}; permitted: {self.permitted}{tail}"


class FaultyFile(BriefkitError):
    """A typed file has faults: `faults` lists every one of them."""

    def __init__(self, faults: list[Fault] | tuple[Fault, ...]) -> None:
        self.faults = tuple(faults)
        count = "1 fault" if len(self.faults) == 1 else f"{len(self.faults)} faults"
        super().__init__("\n".join([count + ":", *(f"  {fault}" for fault in self.faults)]))


class BuildError(BriefkitError):
    """A brief could not be run or exported; the last good page was left as it was."""
