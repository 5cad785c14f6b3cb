"""What the stall boundary says in words: where its lines leave VNE and end, how the onset band lies, what bounds it."""

from __future__ import annotations

import math
from typing import Final

import numpy as np

from briefkit import units
from briefkit.aircraft.model import Aircraft, ManualSpeed
from briefkit.envelope import region
from briefkit.envelope.boundary import CHART_POINTS, Against, Boundary, EquivalentCurve, Margin
from briefkit.envelope.condition import Condition
from briefkit.envelope.equivalent import covered_bank
from briefkit.envelope.margin import margin_to_vne
from briefkit.envelope.partings import SAME
from briefkit.envelope.spread import onset_band
from briefkit.errors import Reason, Refusal
from briefkit.figures.boundary_lines import Curves
from briefkit.units import Speed
from briefkit.widgets import words

_TIE: Final = "\u00a0"
_ENDS: Final = str(Reason.BEYOND_CHART)  # "the chart ends at" says it


def name(curve: EquivalentCurve) -> str:
    """What a line is called."""
    if curve.bank_deg is None:
        return "equivalent VNE"
    return "level flight" if curve.bank_deg == 0.0 else f"{curve.bank_deg:g}° bank"


def drawn(aircraft: Aircraft, condition: Condition, curves: Boundary) -> Curves:
    """The curves as the figure takes them, with the words that belong to places on them."""
    label = aircraft.units.speed_label()
    ceiling = None
    if curves.calibrated is not None:
        top = curves.calibrated[1]
        ceiling = (top, f"calibrated to {units.show_number(top)} {label}")
    return Curves(
        x=curves.x,
        manual=curves.vne,
        turns=[(name(curve), curve.ias) for curve in curves.equivalent],
        onset_x=curves.onset_x,
        onset_lower=curves.onset_lower,
        onset_central=curves.onset_central,
        onset_upper=curves.onset_upper,
        parts=[
            [(place, f"{name(curve)}\nparts at {_at(curves, place)}") for place in curve.parts]
            for curve in curves.equivalent
        ],
        ended=[[_ender(curves, place, curve) for place in curve.ends] for curve in curves.equivalent],
        ceiling=ceiling,
        foot=_foot(aircraft, condition, curves),
        limited=curves.limited,
    )


def _number(curves: Boundary, x: float) -> str:
    """A place along the axis: a tenth of a percent of rotor speed, else whole."""
    tenths = curves.against is Against.ROTOR_SPEED or curves.x_unit == "m/s"
    return units.show_number(x, 1 if tenths and abs(x - round(x)) >= 0.05 else 0)


def _place(curves: Boundary, x: float) -> str:
    unit = units.SHOWN.get(curves.x_unit, curves.x_unit)
    return f"{_number(curves, x)}{'' if unit == '°' else _TIE}{unit}"


def _at(curves: Boundary, x: float) -> str:
    """Where a line leaves VNE, rounded towards the part of the axis where VNE still stands."""
    return _rounded(curves, x, up=_slower(curves))


def _ender(curves: Boundary, x: float, curve: EquivalentCurve) -> str:
    """What ends where a line does: the chart, or the line alone, for a reason that the notes give."""
    here = int(np.abs(curves.x - x).argmin())
    beside = curve.reason[max(here - 1, 0) : here + 2]
    return "chart" if Reason.BEYOND_CHART in beside.tolist() else "line"


def _last(curves: Boundary, x: float, curve: EquivalentCurve) -> str:
    """Where a line ends, rounded towards the part of the axis where it still has an answer."""
    before = np.interp(x - 0.5 * (curves.x[-1] - curves.x[0]) / CHART_POINTS, curves.x, curve.ias)
    return _rounded(curves, x, up=not math.isfinite(before))


def _rounded(curves: Boundary, x: float, *, up: bool) -> str:
    step = {"ft": 100.0, "m": 50.0, "lb": 10.0, "kg": 10.0, "%": 0.1}.get(curves.x_unit, 1.0)
    share = round(x / step, 3)  # a hair beside an entry of the chart is the entry
    return _place(curves, (math.ceil(share) if up else math.floor(share)) * step)


def _foot(aircraft: Aircraft, condition: Condition, curves: Boundary) -> str:
    """What bounds the axis."""
    if curves.against is Against.GUST:
        return ""
    if not curves.limited:
        return "the manual gives no limit"
    low, high = _number(curves, float(curves.x[0])), _number(curves, float(curves.x[-1]))
    if curves.against is Against.ALTITUDE and float(region.top_of(aircraft, condition.oat)) < region.highest_altitude(
        aircraft
    ):
        oat = units.from_si(condition.oat, "temperature", "°C")
        return f"permitted at {'+' if oat > 0 else ''}{units.show_number(oat)} °C: {low} to {high}"
    return f"permitted {low} to {high}"


def band(curves: Boundary, x: float) -> str:
    """The band at one place, floored; "no figure" where it has no lower end."""
    ends = (float(np.interp(x, curves.onset_x, edge)) for edge in (curves.onset_lower, curves.onset_upper))
    low, high = (units.show_number(units.round_down(end)) if math.isfinite(end) else "" for end in ends)
    if low and high:
        return f"{low} to {high}"
    return f"from {low}" if low else "no figure"


def margin(curves: Boundary, x: float) -> str:
    """How first signs lie to VNE at one place: a number only where it is larger than the band is soft (G19)."""
    found = curves.margin_at(x)
    if found in (Margin.NONE, Margin.UNRESOLVED):
        return str(found)
    central = float(np.interp(x, curves.onset_x, curves.onset_central))
    return _apart(central - float(np.interp(x, curves.x, curves.vne)))


def _apart(above: float) -> str:
    if above > 0.0:
        return f"{units.show_number(units.round_down(above))} {Margin.ABOVE}"
    return f"{units.show_number(units.round_up(-above))} {Margin.UNDER}"


def onset_here(aircraft: Aircraft, curves: Boundary, x: float, solved_at: Condition | None = None) -> str:
    """The band at the present condition in one sentence, told from its lower end.

    Where the band as drawn has none, it is solved for `solved_at` if that is given: some 60 ms, too slow to follow.
    """
    found, low = band(curves, x), float(np.interp(x, curves.onset_x, curves.onset_lower))
    if math.isfinite(low):
        return _onset(aircraft, curves, x, f"here is {found}", low, margin(curves, x))
    if solved_at is None:
        return (
            "There is no onset band here: it lies outside the airspeed calibration, the rotor model or the table it is "
            "drawn from."
        )
    return _solved(aircraft, curves, x, solved_at)


def _solved(aircraft: Aircraft, curves: Boundary, x: float, condition: Condition) -> str:
    """The band of one condition that the table does not reach, by the rotor model itself."""
    try:
        alone = onset_band(aircraft, condition)
    except Refusal as refusal:
        return f"There is no onset band here: {refusal.reason}."
    if alone.lower is None:
        return "There is no onset band here: its lower end lies outside the airspeed calibration."
    vne = Speed.of(float(np.interp(x, curves.x, curves.vne)), alone.unit)
    found, said = margin_to_vne(aircraft, alone, vne), str(Margin.UNRESOLVED)
    if found.resolved and found.margin is not None:
        said = _apart(found.margin.number)
    ends = [units.show_number(units.round_down(end)) for end in (alone.lower, alone.upper) if end is not None]
    told = " to ".join(ends) if len(ends) == 2 else f"from {ends[0]}"
    where = f"here, solved for this condition alone because the drawn one ends before it, is {told}"
    return _onset(aircraft, curves, x, where, alone.lower, said)


def _onset(aircraft: Aircraft, curves: Boundary, x: float, where: str, low: float, said: str) -> str:
    label, vne = aircraft.units.speed_label(), float(np.interp(x, curves.x, curves.vne))
    reduced = " It begins under VNE." if low < vne else " It begins above VNE, which governs."
    told = "against VNE it is not resolved" if said == str(Margin.UNRESOLVED) else f"first signs are {said}"
    unit = "" if said == str(Margin.UNRESOLVED) else f" ({aircraft.units.speed})"
    return f"The onset band {where} {label}, softer than the chart; {told}{unit}.{reduced}"


def covered_load(aircraft: Aircraft, condition: Condition) -> str:
    """How much load factor the chart covers here, for a pull-up or a gust: instead of any speed."""
    try:
        bank = covered_bank(aircraft, condition)
    except Refusal as refusal:
        return f"No load factor above level flight is covered here: {words.why(refusal)}."
    load = math.floor(100.0 / math.cos(math.radians(bank)) + 1e-6) / 100.0
    return f"The manual's chart covers a load factor of {load:.2f} here; no speed is given for a gust."


def rotor_there(aircraft: Aircraft, rotor_speed: float) -> str:
    """The rotor speed of a point on a chart that has them; nothing on any other, whose points are at 100 %."""
    return f", rotor at {100.0 * rotor_speed:.4g} %" if aircraft.vne.rotor_speeds else ""


def own_turn(aircraft: Aircraft, speed: float) -> str:
    """The manual's own speed in a turn, where it is the lower one."""
    listed = "; ".join(f"{own.text} ({own.source})" for own in _own(aircraft, "bank"))
    return (
        f"the manual's own holds, {units.show_number(units.round_down(speed))} {aircraft.units.speed_label()}: {listed}"
    )


def notes(aircraft: Aircraft, curves: Boundary) -> tuple[str, ...]:
    """What stands under the figure; the manual's own words for a turn or rough air come first."""
    asked = {Against.BANK: "bank", Against.GUST: "turbulence"}.get(curves.against, "")
    said = [f"The manual: {own.label.lower()}, {own.text} ({own.source})." for own in _own(aircraft, asked)]
    if curves.equivalent:
        said.append("Black is the manual's. Blue is the manual's own chart read at the equivalent level flight.")
    said.append(
        "The grey band is the rotor model's absolute onset, from first signs (12° at the retreating tip) less their "
        "spread to the limit of control (16°) with its own: softer than the chart, faint where it lies above VNE, and "
        "no speed to fly. A margin to VNE smaller than half the band, or than a band open at the top, is not resolved."
    )
    told: dict[str, list[str]] = {}
    for curve in curves.equivalent:
        told.setdefault(_told(curves, curve), []).append(name(curve))
    for where, called in told.items():
        listed = _listed(called)
        said.append(f"{listed[0].upper()}{listed[1:]}: {where}.")
    if curves.calibrated is not None:
        foot, top = (units.show_number(end) for end in curves.calibrated)
        said.append(
            f"Airspeed is calibrated from {foot} to {top} {curves.speed_unit} ({aircraft.calibration.source}): nothing "
            "is drawn outside."
        )
    if not np.all(np.isfinite(curves.onset_lower) & np.isfinite(curves.onset_upper)):
        said.append(
            "Where the band or its upper end is missing, that speed is outside the calibration, the model or the table "
            "that the band is drawn from."
        )
    said += [
        f"Where a blue line ends: {reason}."
        for reason in sorted({str(r) for curve in curves.equivalent for r in curve.reason if r} - {_ENDS})
    ]
    return tuple(said)


def _own(aircraft: Aircraft, asked: str) -> list[ManualSpeed]:
    return [own for own in aircraft.speeds if own.applies == asked]


def _told(curves: Boundary, curve: EquivalentCurve) -> str:
    """Where a line leaves VNE, and where it ends."""
    known = np.isfinite(curve.ias)
    if not known.any():
        return "no figure anywhere on this line"
    below = curves.vne[known] - curve.ias[known]
    if len(curve.parts) == 1 and len(curve.meets) <= 1:
        where = f"parts from the manual's VNE at {_at(curves, curve.parts[0])}"
        if curve.meets:
            where += f" and meets it again at {_rounded(curves, curve.meets[0], up=not _slower(curves))}"
    elif curve.parts or curve.meets:
        where = f"below the manual's VNE {_listed(_stretches(curves, curve))}"
    elif (below > SAME).all():
        where = "below the manual's VNE all along"
    elif (below > SAME).any():
        most = units.show_number(math.ceil(round(10.0 * float(below.max()), 6)) / 10.0, 1)
        where = f"at most {most}{_TIE}{curves.speed_unit} below the manual's VNE"
    else:
        where = "nothing is taken off, the manual's VNE holds"
    if curve.ends:
        where += "; " + _listed(
            [f"the {_ender(curves, x, curve)} ends at {_last(curves, x, curve)}" for x in curve.ends]
        )
    return where


def _slower(curves: Boundary) -> bool:
    """Whether the rotor has it harder towards the low end of the axis."""
    return curves.against is Against.ROTOR_SPEED


def _stretches(curves: Boundary, curve: EquivalentCurve) -> list[str]:
    """Where a line is under VNE, from low to high, each rounded outwards."""
    into, out = (curve.meets, curve.parts) if _slower(curves) else (curve.parts, curve.meets)
    told, start = [], ""
    for x, enters in sorted([(x, True) for x in into] + [(x, False) for x in out]):
        if enters:
            start = f"from {_rounded(curves, x, up=False)}"
        else:
            end = _rounded(curves, x, up=True)
            told.append(f"{start} to {end}" if start else f"up to {end}")
            start = ""
    return [*told, start] if start else told


def _listed(items: list[str]) -> str:
    return " and ".join([", ".join(items[:-1]), items[-1]] if len(items) > 1 else items)
