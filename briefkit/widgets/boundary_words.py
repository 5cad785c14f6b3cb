"""What the stall boundary says in words: where its lines leave VNE and end, how the onset band lies, what bounds it."""

from __future__ import annotations

import math
from typing import Final

import numpy as np

from briefkit import units
from briefkit.aircraft.model import Aircraft, ManualSpeed
from briefkit.envelope import region
from briefkit.envelope.boundary import Against, Boundary, EquivalentCurve, Margin
from briefkit.envelope.condition import Condition
from briefkit.envelope.equivalent import covered_bank
from briefkit.errors import Reason, Refusal
from briefkit.figures.boundary_lines import Curves
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
            [(place, f"{name(curve)}\nparts at {_at(curves, place, curve)}") for place in curve.parts]
            for curve in curves.equivalent
        ],
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


def _at(curves: Boundary, x: float, curve: EquivalentCurve) -> str:
    """Where a line leaves VNE, rounded towards the part of the axis where VNE still stands."""
    beyond = np.interp(x + 0.5 * (curves.x[1] - curves.x[0]), curves.x, curves.vne - curve.ias)
    return _rounded(curves, x, up=math.isfinite(beyond) and not beyond > 0.0)


def _last(curves: Boundary, x: float, curve: EquivalentCurve) -> str:
    """Where a line ends, rounded towards the part of the axis where it still has an answer."""
    before = np.interp(x - 0.5 * (curves.x[1] - curves.x[0]), curves.x, curve.ias)
    return _rounded(curves, x, up=not math.isfinite(before))


def _rounded(curves: Boundary, x: float, *, up: bool) -> str:
    step = {"ft": 100.0, "m": 50.0, "lb": 10.0, "kg": 10.0, "%": 0.1}.get(curves.x_unit, 1.0)
    share = round(x / step, 6)
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
    apart = central - float(np.interp(x, curves.x, curves.vne))
    shown = units.round_down(apart) if found is Margin.ABOVE else units.round_up(-apart)
    return f"{units.show_number(shown)} {found}"


def onset_here(aircraft: Aircraft, curves: Boundary, x: float) -> str:
    """The band at the present condition in one sentence, told from its lower end."""
    found, low = band(curves, x), float(np.interp(x, curves.onset_x, curves.onset_lower))
    if not math.isfinite(low):
        return "There is no onset band here: it lies outside the airspeed calibration or the rotor model."
    label, said = aircraft.units.speed_label(), margin(curves, x)
    vne = float(np.interp(x, curves.x, curves.vne))
    reduced = " It begins under VNE." if low < vne else " It begins above VNE, which governs."
    told = "against VNE it is not resolved" if said == str(Margin.UNRESOLVED) else f"first signs are {said}"
    unit = "" if said == str(Margin.UNRESOLVED) else f" ({aircraft.units.speed})"
    return f"The onset band here is {found} {label}, softer than the chart; {told}{unit}.{reduced}"


def covered_load(aircraft: Aircraft, condition: Condition) -> str:
    """How much load factor the chart covers here, for a pull-up or a gust: instead of any speed."""
    try:
        bank = covered_bank(aircraft, condition)
    except Refusal as refusal:
        return f"No load factor above level flight is covered here: {words.why(refusal)}."
    load = math.floor(100.0 / math.cos(math.radians(bank)) + 1e-6) / 100.0
    return f"The manual's chart covers a load factor of {load:.2f} here; no speed is given for a gust."


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
        listed = " and ".join([", ".join(called[:-1]), called[-1]] if len(called) > 1 else called)
        said.append(f"{listed[0].upper()}{listed[1:]}: {where}.")
    if curves.calibrated is not None:
        foot, top = (units.show_number(end) for end in curves.calibrated)
        said.append(
            f"Airspeed is calibrated from {foot} to {top} {curves.speed_unit} ({aircraft.calibration.source}): nothing "
            "is drawn outside."
        )
    if not np.all(np.isfinite(curves.onset_lower) & np.isfinite(curves.onset_upper)):
        said.append("Where the band or its upper end is missing, that speed is outside the calibration or the model.")
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
    if not curve.parts:
        apart = bool(np.nanmax(curves.vne[known] - curve.ias[known]) > 0.05)
        where = "below the manual's VNE all along" if apart else "nothing is taken off, the manual's VNE holds"
    else:
        where = "parts from the manual's VNE at " + " and ".join(_at(curves, x, curve) for x in curve.parts)
    if curve.ends:
        where += "; the chart ends at " + " and ".join(_last(curves, x, curve) for x in curve.ends)
    return where
