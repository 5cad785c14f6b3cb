"""The aircraft as its author stated it: frozen values in SI, each with the text as typed, its source and its spread."""

from __future__ import annotations

from dataclasses import dataclass, field
from enum import StrEnum

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.chart import VneChart
from briefkit.aircraft.section_table import OperatorSection
from briefkit.errors import OutsideCalibration, Reason
from briefkit.physics import atmosphere

Floats = NDArray[np.float64]


class Hub(StrEnum):
    """How the blades are held; decides coning freedom and the words of the cues."""

    TEETERING = "teetering"
    ARTICULATED = "articulated"
    HINGELESS = "hingeless"


class Rotation(StrEnum):
    """Seen from above."""

    ANTICLOCKWISE = "anticlockwise"
    CLOCKWISE = "clockwise"


@dataclass(frozen=True)
class Stated:
    """A number as its author stated it.

    `value` and `spread` (the half-width the author would bet on at 95 %) are SI; `text` is what was typed, so that a
    limit prints as typed; `basis` is empty for a known value and names the published basis of the class range where
    the author wrote "unknown".
    """

    value: float
    text: str
    source: str
    spread: float = 0.0
    basis: str = ""

    @property
    def known(self) -> bool:
        """False where the author wrote "unknown" and a class range stands in."""
        return not self.basis


@dataclass(frozen=True)
class DisplayUnits:
    """The units of the type's manual and weight report: all doors show these."""

    speed: str = "kt"
    height: str = "ft"
    mass: str = "lb"
    pressure: str = "inHg"

    def speed_label(self, kind: units.SpeedKind = units.SpeedKind.INDICATED) -> str:
        """ "KIAS", "km/h IAS", "mph IAS"; likewise for calibrated and true."""
        return kind.label(self.speed)

    @property
    def speed_step(self) -> float:
        """What a reduction is rounded up to: 5 kt, 10 km/h, 5 mph per printed row."""
        return 10.0 if self.speed == "km/h" else 5.0


@dataclass(frozen=True)
class Limits:
    """The manual's limits. Temperatures in kelvin, `isa_deviation` above standard, rotor speeds as fractions."""

    max_mass: Stated
    min_mass: Stated
    max_altitude: Stated
    min_temperature: Stated
    isa_deviation: Stated | None
    max_temperature: Stated | None
    max_bank: Stated | None
    rotor_on: tuple[Stated, Stated]
    rotor_off: tuple[Stated, Stated]
    climb_speed: Stated
    source: str

    def max_temperature_at(self, pressure_altitude: Floats | float) -> Floats:
        """Highest permitted outside air temperature [K] at a pressure altitude [m] (-1,000 to 11,000)."""
        height = np.asarray(pressure_altitude, dtype=float)
        highest = np.full(height.shape, np.inf)
        if self.isa_deviation is not None:
            highest = atmosphere.temperature_at(height) + self.isa_deviation.value
        if self.max_temperature is not None:
            highest = np.minimum(highest, self.max_temperature.value)
        return highest


@dataclass(frozen=True)
class Calibration:
    """Indicated against calibrated airspeed [m/s], both rising. "None in manual": empty arrays, one stated spread.

    With none, indicated is taken as calibrated and `spread` [m/s] is taken once, on the difference of two speeds.
    """

    indicated: tuple[float, ...]
    calibrated: tuple[float, ...]
    source: str
    spread: float = 0.0
    text: tuple[tuple[str, ...], ...] = ()

    @property
    def in_manual(self) -> bool:
        return bool(self.indicated)

    @property
    def lowest_indicated(self) -> float:
        return self.indicated[0] if self.indicated else 0.0

    @property
    def highest_indicated(self) -> float:
        return self.indicated[-1] if self.indicated else np.inf

    def to_calibrated(self, indicated: Floats | float) -> Floats:
        """Indicated [m/s] to calibrated [m/s], by straight lines; NaN outside the table (callers give the reason)."""
        if not self.indicated:
            return np.asarray(indicated, dtype=float)
        return np.asarray(np.interp(indicated, self.indicated, self.calibrated, left=np.nan, right=np.nan))

    def to_indicated(self, calibrated: Floats | float) -> Floats:
        """Calibrated [m/s] to indicated [m/s]; NaN outside the table (callers give the reason)."""
        if not self.indicated:
            return np.asarray(calibrated, dtype=float)
        return np.asarray(np.interp(calibrated, self.calibrated, self.indicated, left=np.nan, right=np.nan))

    def calibrated_of(self, speed: units.Speed) -> units.Speed:
        """The calibrated airspeed of an indicated one. Raises `OutsideCalibration`, `MixedSpeeds` for another kind."""
        indicated = speed.of_kind(units.SpeedKind.INDICATED).value
        found = float(self.to_calibrated(indicated))
        if not np.isfinite(found):
            raise self.refuse(indicated, speed.unit)
        return units.Speed(found, units.SpeedKind.CALIBRATED, speed.unit)

    def indicated_of(self, speed: units.Speed) -> units.Speed:
        """The indicated airspeed of a calibrated one, the inverse of `calibrated_of`; raises likewise."""
        found = float(self.to_indicated(speed.of_kind(units.SpeedKind.CALIBRATED).value))
        if not np.isfinite(found):
            raise self.refuse(np.nan, speed.unit)
        return units.Speed(found, units.SpeedKind.INDICATED, speed.unit)

    def refuse(self, indicated: float, unit: str) -> OutsideCalibration:
        """The refusal for an indicated speed [m/s] outside the table, in the type's own unit."""
        low, high = (units.from_si(end, "speed", unit) for end in (self.indicated[0], self.indicated[-1]))
        return OutsideCalibration(
            "indicated airspeed",
            "below the table" if not np.isfinite(indicated) else units.from_si(indicated, "speed", unit),
            f"{unit} indicated" if np.isfinite(indicated) else "",
            f"{low:g} to {high:g} {unit} indicated",
            self.source,
            Reason.OUTSIDE_CALIBRATION,
        )


@dataclass(frozen=True)
class PowerOffVne:
    """Power-off VNE in the forms 14 CFR 27.1505(c)(2) permits, or as a chart of its own; never above power-on VNE.

    (i) `constant`; (ii) power-on VNE `less` an airspeed; (iii) `constant`, or the `chart`, up to `to_height` (pressure
    altitude [m]), above it power-on VNE `less` an airspeed. What is taken off power-on VNE is `not_over` an airspeed.
    """

    source: str
    constant: Stated | None = None
    less: Stated | None = None
    to_height: Stated | None = None
    not_over: Stated | None = None
    chart: VneChart | None = None

    def indicated(
        self,
        power_on: Floats | float,
        height: Floats | float,
        temperature: Floats | float,
        mass: Floats | float,
        rotor_speed: Floats | float = 1.0,
    ) -> Floats:
        """Power-off VNE [m/s indicated] where power-on VNE is `power_on` [m/s indicated]; arguments broadcast.

        Pressure altitude [m], temperature [K], mass [kg], rotor speed (fraction). NaN where `power_on` is, and where
        a chart of its own has no value.
        """
        power_on, height = np.broadcast_arrays(np.asarray(power_on, float), np.asarray(height, float))
        own = power_on
        if self.constant is not None:
            own = np.minimum(power_on, self.constant.value)
        elif self.chart is not None:
            own = np.minimum(power_on, self.chart.indicated(height, temperature, mass, rotor_speed))
        if self.less is None:
            return own
        reduced = power_on - self.less.value
        if self.not_over is not None:
            reduced = np.minimum(reduced, self.not_over.value)
        if self.to_height is None:
            return reduced
        return np.where(height <= self.to_height.value * (1.0 + 1e-9), own, reduced)

    @property
    def text(self) -> str:
        """In words, its figures as typed: "85 kt, or VNE power on if less"."""
        reduced = f"VNE power on less {self.less.text}" if self.less is not None else ""
        if reduced and self.not_over is not None:
            reduced += f", at most {self.not_over.text}"
        own = "the power-off chart" if self.chart is not None else ""
        if self.constant is not None:
            own = f"{self.constant.text}, or VNE power on if less"
        if own and reduced and self.to_height is not None:
            return f"to {self.to_height.text} {own}; above that {reduced}"
        return own or reduced

    @property
    def figures(self) -> tuple[tuple[str, Stated], ...]:
        """What was typed, each with what it is, for the read-back sheet."""
        named = (
            ("constant", self.constant),
            ("up to, pressure altitude", self.to_height),
            ("VNE power on less", self.less),
            ("not over", self.not_over),
        )
        return tuple((name, stated) for name, stated in named if stated is not None)


@dataclass(frozen=True)
class ManualSpeed:
    """One other speed of the manual, printed verbatim with its page before anything computed.

    What its figure says, where it has one: `speed`, indicated, or `less_than_vne` [m/s], and `above_bank` [rad] where
    it holds above a bank angle only. `value` is the figure as typed.
    """

    label: str
    text: str
    applies: str
    source: str
    value: str = ""
    speed: units.Speed | None = None
    less_than_vne: float | None = None
    above_bank: float | None = None


@dataclass(frozen=True)
class RotorData:
    """What the rotor model needs; a value typed "unknown" carries its class range as spread and its basis.

    `flap_stop`: how far [rad] a blade may flap down from the plane square to the shaft before it meets its stop
    (teetering: how far it may see-saw, either way); None where the file gives none.
    """

    hub: Hub
    rotation: Rotation
    blades: int
    radius: Stated
    rpm: Stated
    chord: Stated
    twist: Stated
    root_cutout: Stated
    hinge_offset: Stated
    flap_frequency: Stated
    flap_inertia: Stated
    precone: Stated
    lift_slope: Stated
    drag_area: Stated
    source: str
    flap_stop: Stated | None = None

    @property
    def tip_speed(self) -> float:
        """At 100 % rotor speed [m/s]."""
        return self.rpm.value * self.radius.value


@dataclass(frozen=True)
class HoverLine:
    """One line of the manual's hover figures: its label and its cells, as typed."""

    label: str
    text: str
    source: str


@dataclass(frozen=True, eq=False)
class HoverTable:
    """The manual's hover ceilings of one kind ("IGE", "OGE"): pressure altitudes [m], (masses, columns).

    `columns` are outside air temperatures [K], or temperatures above standard [K] where `above_standard`. Both axes
    rise. `interpolate` where the manual says so, otherwise the next heavier mass and warmer column hold.
    """

    kind: str
    masses: tuple[float, ...]
    columns: tuple[float, ...]
    above_standard: bool
    ceilings: Floats
    interpolate: bool
    rows: tuple[tuple[str, ...], ...]
    source: str


@dataclass(frozen=True)
class Answer:
    """The author's answer to one kind of entry finding: the cells it speaks of ("" for all of them), and why."""

    kind: str
    cells: str
    reason: str


@dataclass(frozen=True, eq=False)  # compared by identity, so that tables made once per aircraft can be kept with it
class Aircraft:
    """One type in one configuration, as its file states it.

    `serials` are those this configuration may be flown on; `refused_serials` the others of the file, each with the
    reason. `configurations` names every one the file knows, the basic one first; `basic_vne` is the basic chart, None
    for the basic configuration itself. `section` is the operator's own blade section, where the file names a table.
    `data_hash` is the SHA-256 of the file as read (with its section table's, where it names one); `unanswered` lists
    keys typed "?" (a draft may have them, a released page may not), `sources` the source of each table that this
    configuration rests on.
    """

    name: str
    serials: tuple[str, ...]
    configuration: str
    units: DisplayUnits
    rotor: RotorData
    limits: Limits
    calibration: Calibration
    vne: VneChart
    vne_off: PowerOffVne
    speeds: tuple[ManualSpeed, ...] = ()
    hover: tuple[HoverLine, ...] = ()
    hover_tables: tuple[HoverTable, ...] = ()
    answers: tuple[Answer, ...] = ()
    recovery: str = ""
    recovery_source: str = ""
    invented: str = ""
    file: str = ""
    data_hash: str = ""
    sources: tuple[tuple[str, str], ...] = field(default=())
    unanswered: tuple[str, ...] = ()
    configurations: tuple[str, ...] = ()
    refused_serials: tuple[tuple[str, str], ...] = ()
    basic_vne: VneChart | None = None
    section: OperatorSection | None = None

    @property
    def mirrored(self) -> bool:
        """True for a clockwise rotor, whose pictures and side words are mirrored; the equations do not change."""
        return self.rotor.rotation is Rotation.CLOCKWISE
