"""The absolute onset band: the criterion's range, widened by what the author does not know for certain.

Each stated spread is changed one at a time, both ways; the worse changes combine as the root of the sum of squares.
The band is softer than the manual's chart and is labelled so wherever it is shown.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from briefkit import units
from briefkit.aircraft.model import Aircraft, Stated
from briefkit.envelope.condition import Condition, Conditions
from briefkit.envelope.onset import FIRST_SIGNS, moved_onset, onset_speed, tip_angles
from briefkit.envelope.onset_build import INPUTS, TARGETS, possible
from briefkit.envelope.onset_table import ALLOWANCE, loading_of, onset_table
from briefkit.envelope.solution import rotor_of
from briefkit.envelope.speeds import indicated_of
from briefkit.errors import OutsideCalibration, OutsideLimits, Reason
from briefkit.physics.rotor import Rotor
from briefkit.units import Speed

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Contribution:
    """What one input's spread does to each end of the band, in the type's unit, zero or more; None where that end lies
    outside the calibration or the model.
    """

    name: str
    spread: str
    lowers_by: float | None
    raises_by: float | None


@dataclass(frozen=True)
class OnsetBand:
    """Indicated, in the type's unit: `lower` (12 degrees less spread), `central` (12), `upper` (16 plus spread).

    An end that lies outside the airspeed calibration or the model's range is None: there is no such indicated speed.
    `contributions` are the inputs with a spread, the largest effect on the lower end first.
    """

    lower: float | None
    central: float | None
    upper: float | None
    unit: str
    contributions: tuple[Contribution, ...]

    @property
    def speeds(self) -> tuple[Speed | None, Speed | None, Speed | None]:
        """`lower`, `central` and `upper` with their kind."""
        lower, central, upper = (
            None if end is None else Speed.of(end, self.unit) for end in (self.lower, self.central, self.upper)
        )
        return lower, central, upper


@dataclass(frozen=True, eq=False)
class OnsetBands:
    """The band of a batch, indicated [m/s], (batch,); NaN where there is no such speed.

    `lowers` and `raises` are the effects of each input of `names`, (batch, input).
    """

    lower: Floats
    central: Floats
    upper: Floats
    names: tuple[str, ...]
    lowers: Floats
    raises: Floats


def onset_band(aircraft: Aircraft, condition: Condition) -> OnsetBand:
    """The onset band of the rotor model at one condition (its `ias` is not used).

    Raises `OutsideLimits` above the maximum mass or where the retreating tip is above 12 degrees at every speed or
    reaches it at none; `OutsideCalibration` where no part of the band has an indicated speed.
    """
    many = Conditions.of(condition)
    unit = aircraft.units.speed
    limit = aircraft.limits.max_mass
    if condition.mass > limit.value * (1.0 + 1e-9):
        mass = units.from_si(condition.mass, "mass", aircraft.units.mass)
        permitted = f"up to {limit.text}"
        raise OutsideLimits("mass", mass, aircraft.units.mass, permitted, limit.source, Reason.OUTSIDE_LIMITS)
    if np.isnan(onset_speed(rotor_of(aircraft), many, FIRST_SIGNS)[0]):
        raise OutsideLimits(
            "retreating-tip angle", "12 degrees", "", "a speed at which the tip reaches it", "rotor model",
            Reason.OUTSIDE_MODEL,
        )  # fmt: skip
    bands = onset_bands(aircraft, many)

    lower, central, upper = (_shown(end[0], unit) for end in (bands.lower, bands.central, bands.upper))
    if lower is None and central is None and upper is None:
        low, high = (units.from_si(end, "speed", unit) for end in (
            aircraft.calibration.lowest_indicated, aircraft.calibration.highest_indicated))  # fmt: skip
        raise OutsideCalibration(
            "onset band", "outside the table", "", f"{low:g} to {high:g} {unit} indicated",
            aircraft.calibration.source, Reason.OUTSIDE_CALIBRATION,
        )  # fmt: skip
    listed = [
        Contribution(name, text, _shown(bands.lowers[0, i], unit), _shown(bands.raises[0, i], unit))
        for i, (name, text) in enumerate(zip(bands.names, _spread_texts(aircraft, condition), strict=True))
    ]
    listed.sort(key=lambda one: (-(one.lowers_by or 0.0), one.name))
    return OnsetBand(lower, central, upper, unit, tuple(listed))


def onset_bands(aircraft: Aircraft, many: Conditions) -> OnsetBands:
    """The onset band of a batch: three curves with the effect of every spread at both ends."""
    rotor = rotor_of(aircraft)
    curve = tip_angles(rotor, many)
    changed_many, names = _changed_conditions(aircraft, many)
    changed = _changed_rotor(aircraft, len(many), len(names))
    ends = []
    for target in TARGETS:
        speed = onset_speed(rotor, many, target, curve)
        ends.append((speed, moved_onset(rotor, many, changed, changed_many, speed, target, 2 * len(names))))
    return _combined(aircraft, many, changed_many, names, ends, 0.0)


def quick_onset_bands(aircraft: Aircraft, many: Conditions) -> OnsetBands:
    """The same from the type's table, some hundred times faster, with the table's error taken off the lower curves."""
    table = onset_table(aircraft)
    changed_many, names = _changed_conditions(aircraft, many)
    count = 2 * len(names)
    variant = np.arange(1, 1 + count)
    variant = np.tile(np.where(variant <= 2 * len(table.fields), variant, 0), len(many))
    stated = np.zeros(len(many), dtype=np.intp)
    ends = []
    for target in range(len(TARGETS)):
        speed, moved = (
            table.speed(target, which, loading_of(days), days.oat / days.rotor_speed**2) * days.rotor_speed
            for which, days in ((stated, many), (variant, changed_many))
        )
        ends.append((speed, moved))
    return _combined(aircraft, many, changed_many, names, ends, ALLOWANCE)


def _combined(
    aircraft: Aircraft,
    many: Conditions,
    changed_many: Conditions,
    names: list[str],
    ends: list[tuple[Floats, Floats]],
    less: float,
) -> OnsetBands:
    """The band from the onset [m/s true] at both criteria, as stated (batch,) and with each input changed."""
    effects = []
    for speed, moved in ends:
        at = indicated_of(aircraft.calibration, speed, many.pressure, many.oat)
        seen = indicated_of(aircraft.calibration, moved, changed_many.pressure, changed_many.oat)
        # Faster, and without an indicated speed: above the top of the calibration, so it lowers nothing.
        off = (moved > np.repeat(speed, 2 * len(names))) & np.isnan(seen)
        seen = np.where(off, np.inf, seen)
        effects.append((at, seen.reshape(len(many), len(names), 2) - at[:, None, None]))
    (central, around_first), (limit, around_last) = effects
    lowers = np.maximum(-around_first.min(axis=2), 0.0) if names else np.zeros((len(many), 0))
    raises = np.maximum(around_last.max(axis=2), 0.0) if names else np.zeros((len(many), 0))
    raises = np.where(np.isfinite(raises), raises, np.nan)
    unprinted = 0.0 if aircraft.calibration.in_manual else aircraft.calibration.spread
    lower = central - np.sqrt((lowers**2).sum(axis=1) + unprinted**2) - less
    upper = limit + np.sqrt((raises**2).sum(axis=1) + unprinted**2)
    lower = np.where(np.isnan(central), _under(aircraft, many, ends[0], unprinted) - less, lower)
    foot, top = aircraft.calibration.lowest_indicated, aircraft.calibration.highest_indicated
    lower, upper = (np.where((end >= foot) & (end <= top), end, np.nan) for end in (lower, upper))
    return OnsetBands(lower, central - less, upper, tuple(names), lowers, raises)


def _under(aircraft: Aircraft, many: Conditions, end: tuple[Floats, Floats], unprinted: float) -> Floats:
    """The lower end where the middle is above the calibration's top: the spreads combined as true airspeeds; NaN where
    it is above that top too.
    """
    speed, moved = end
    taken = np.maximum(speed[:, None, None] - moved.reshape(len(many), -1, 2), 0.0).max(axis=2)
    least = speed - np.sqrt((taken**2).sum(axis=1))
    return indicated_of(aircraft.calibration, least, many.pressure, many.oat) - unprinted


def _changed_conditions(aircraft: Aircraft, many: Conditions) -> tuple[Conditions, list[str]]:
    """For each condition in turn, each input down then up by its spread; the rotor's own inputs change no condition."""
    names = [name for field, name in INPUTS.items() if getattr(aircraft.rotor, field).spread > 0.0]
    if np.any(many.mass_spread):
        names.append("mass")
    if np.any(many.oat_spread):
        names.append("temperature")
    wide = many.repeat(2 * len(names))

    def steps(name: str) -> Floats:
        if name not in names:
            return np.zeros(len(wide))
        signs = np.zeros(2 * len(names))
        signs[2 * names.index(name) : 2 * names.index(name) + 2] = (-1.0, 1.0)
        return np.tile(signs, len(many))

    mass = wide.mass + steps("mass") * wide.mass_spread
    oat = wide.oat + steps("temperature") * wide.oat_spread
    return replace(wide, mass=mass, oat=oat), names


def _changed_rotor(aircraft: Aircraft, members: int, inputs: int) -> Rotor:
    """The rotor of each changed condition: its own inputs down then up, in the order of the names."""
    changes: dict[str, Floats] = {}
    fields = [field for field in INPUTS if getattr(aircraft.rotor, field).spread > 0.0]
    for i, field in enumerate(fields):
        stated = getattr(aircraft.rotor, field)
        values = np.full(2 * inputs, stated.value)
        values[2 * i : 2 * i + 2] = possible(field, stated.value + stated.spread * np.array([-1.0, 1.0]))
        changes[field] = np.tile(values, members)
    return rotor_of(aircraft, **changes)


def _spread_texts(aircraft: Aircraft, condition: Condition) -> list[str]:
    texts = [
        _half_width(field, getattr(aircraft.rotor, field))
        for field in INPUTS
        if getattr(aircraft.rotor, field).spread > 0.0
    ]
    if condition.mass_spread:
        texts.append(f"± {units.show(condition.mass_spread, 'mass', aircraft.units.mass)}")
    if condition.oat_spread:
        texts.append(f"± {units.show(condition.oat_spread, 'temperature difference', '°C', 1)}")
    return texts


def _half_width(field: str, stated: Stated) -> str:
    if field == "twist":
        return f"± {units.show(stated.spread, 'angle', 'deg', 1)}"
    share = stated.spread / abs(stated.value) * 100.0 if stated.value else 0.0
    return f"± {units.show_number(share, 0 if share >= 10.0 else 1)} %"


def _shown(speed: float, unit: str) -> float | None:
    return round(float(units.from_si(float(speed), "speed", unit)), 2) if np.isfinite(speed) else None
