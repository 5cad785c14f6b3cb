"""The closed reader of typed quantities, against definitions and against pint as an oracle where both accept."""

from __future__ import annotations

import math
import warnings

import pint
import pytest
from hypothesis import given
from hypothesis import strategies as st

from briefkit import units
from briefkit.errors import ReadingError

# Our unit as typed -> how pint spells it. Only used as an oracle: pint reads "3 350 kg" as 1,050 kg.
ORACLE = {
    ("mass", "kg"): "kilogram",
    ("mass", "lb"): "pound",
    ("height", "ft"): "foot",
    ("height", "m"): "meter",
    ("length", "m"): "meter",
    ("length", "mm"): "millimeter",
    ("length", "cm"): "centimeter",
    ("length", "ft"): "foot",
    ("length", "in"): "inch",
    ("speed", "kt"): "knot",
    ("speed", "km/h"): "kilometer/hour",
    ("speed", "mph"): "mile/hour",
    ("vertical speed", "ft/min"): "foot/minute",
    ("vertical speed", "m/s"): "meter/second",
    ("temperature", "degC"): "degC",
    ("temperature", "°C"): "degC",
    ("temperature", "C"): "degC",
    ("temperature difference", "degC"): "delta_degC",
    ("temperature difference", "°C"): "delta_degC",
    ("temperature difference", "C"): "delta_degC",
    ("angle", "deg"): "degree",
    ("angle", "°"): "degree",
    ("ratio", "%"): "percent",
    ("pressure", "hPa"): "hectopascal",
    ("pressure", "inHg"): "inch_Hg_32F",
    ("rotation", "rpm"): "revolution/minute",
    ("area", "m2"): "meter**2",
    ("area", "m²"): "meter**2",
    ("area", "ft2"): "foot**2",
    ("area", "ft²"): "foot**2",
    ("fuel flow", "kg/h"): "kilogram/hour",
    ("fuel flow", "lb/h"): "pound/hour",
    ("inertia", "kg m2"): "kilogram*meter**2",
    ("inertia", "kg m²"): "kilogram*meter**2",
    ("inertia", "slug ft2"): "slug*foot**2",
}
SI = {
    "mass": "kilogram",
    "height": "meter",
    "length": "meter",
    "speed": "meter/second",
    "vertical speed": "meter/second",
    "temperature": "kelvin",
    "temperature difference": "kelvin",
    "angle": "radian",
    "ratio": "dimensionless",
    "pressure": "pascal",
    "rotation": "radian/second",
    "area": "meter**2",
    "inertia": "kilogram*meter**2",
    "fuel flow": "kilogram/second",
}
QUANTITIES = (*SI, "number")


@pytest.fixture(scope="module")
def registry() -> pint.UnitRegistry:
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # pint's own warnings while it reads its definitions
        made = pint.UnitRegistry(autoconvert_offset_to_baseunit=True)
    # Inch of mercury at 0 C: 13,595.1 kg/m3 x standard gravity (ISO 80000-4 annex; NIST SP 811 B.9 gives 3.386389 kPa).
    made.define("inch_Hg_32F = 0.0254 * 13595.1 * 9.80665 * pascal")
    return made


def test_every_permitted_unit_has_an_oracle() -> None:
    assert {(kind, unit) for kind in SI for unit in units.permitted_units(kind)} == set(ORACLE)


@pytest.mark.slow
@given(
    pair=st.sampled_from(sorted(ORACLE)),
    number=st.decimals(min_value=-99_999, max_value=99_999, places=4, allow_nan=False, allow_infinity=False),
)
def test_reading_agrees_with_pint(registry: pint.UnitRegistry, pair: tuple[str, str], number: object) -> None:
    kind, unit = pair
    expected = registry.Quantity(float(number), ORACLE[pair]).to(SI[kind]).magnitude  # type: ignore[arg-type]
    # 1e-6: the digits NIST prints for the inch of mercury; the others agree to rounding
    assert units.read(f"{number:f} {unit}", kind) == pytest.approx(expected, rel=1e-6, abs=1e-9)


@given(
    pair=st.sampled_from(sorted(ORACLE)),
    number=st.floats(min_value=-9e5, max_value=9e5).map(lambda x: round(x, 3)),
    grouped=st.booleans(),
    minus=st.sampled_from("-\u2212"),
    gap=st.sampled_from(["", " ", "\u00a0"]),
)
def test_what_is_written_reads_back(pair: tuple[str, str], number: float, grouped: bool, minus: str, gap: str) -> None:
    kind, unit = pair
    text = (f"{number:,.3f}" if grouped else f"{number:.3f}").replace("-", minus) + gap + unit
    value, read = units.read_with_unit(text, kind)
    assert read == unit
    assert units.from_si(value, kind, unit) == pytest.approx(number, rel=1e-12, abs=1e-9)
    assert units.to_si(number, kind, unit) == pytest.approx(value, rel=1e-12, abs=1e-9)


@pytest.mark.parametrize(
    ("text", "kind"),
    [
        ("3 350 kg", "mass"),
        ("3'350 kg", "mass"),
        ("4,45 m", "length"),
        ("1,00,000 ft", "height"),
        ("12,34 ft", "height"),
        (",500 ft", "height"),
        (".5 m", "length"),
        ("5. m", "length"),
        ("1.2.3 m", "length"),
        ("5e3 ft", "height"),
        ("nan ft", "height"),
        ("inf ft", "height"),
        ("-inf degC", "temperature"),
        ("2*3 kg", "mass"),
        ("1/2 m", "length"),
        ("910", "mass"),
        ("kg", "mass"),
        ("", "mass"),
        ("?", "mass"),
        ("910 kg lb", "mass"),
        ("910 KG", "mass"),
        ("910 lbs", "mass"),
        ("85 knots", "speed"),
        ("85 m/s", "speed"),
        ("95 F", "temperature"),
        ("300 K", "temperature"),
        ("--7 degC", "temperature"),
        ("- 7 degC", "temperature"),
        ("\u20137 degC", "temperature"),  # an en dash is no minus
        ("2886", "pressure"),
        ("1013 mb", "pressure"),
        ("９１０ kg", "mass"),  # full-width digits
        ("٣ kg", "mass"),  # Arabic-Indic digit
        ("5.73 deg", "number"),
    ],
)
def test_everything_else_is_refused_with_what_is_permitted(text: str, kind: str) -> None:
    with pytest.raises(ReadingError, match="permitted: ") as refused:
        units.read(text, kind)
    assert refused.value.read == text
    shown = [unit for unit in units.permitted_units(kind) if unit]
    assert all(unit in refused.value.permitted for unit in shown) or not shown


@given(st.text(max_size=12), st.sampled_from(QUANTITIES))
def test_any_text_is_read_to_a_finite_number_or_refused(text: str, kind: str) -> None:
    try:
        value = units.read(text, kind)
    except ReadingError:
        return
    assert math.isfinite(value)


@pytest.mark.parametrize("read", [910, 4.45, True, None, ["910 kg"]])
def test_what_is_not_text_is_refused(read: object) -> None:
    with pytest.raises(ReadingError, match="text with a unit"):
        units.read(read, "mass")  # type: ignore[arg-type]


def test_constants_are_those_of_their_definitions() -> None:
    # International yard and pound agreement 1959; nautical mile ISO 80000-3; slug = lbf s2/ft.
    assert units.FOOT == 0.3048
    assert units.POUND == 0.45359237
    assert 0.514444 < units.KNOT < 0.514445
    assert pytest.approx(units.POUND * units.GRAVITY / units.FOOT, rel=1e-9) == units.SLUG
    # ISO 2533:1975 table 1 (defining constants of the standard atmosphere).
    assert (units.SEA_LEVEL_PRESSURE, units.SEA_LEVEL_TEMPERATURE, units.GAS_CONSTANT, units.LAPSE_RATE) == (
        101325.0,
        288.15,
        287.05287,
        0.0065,
    )


@given(st.floats(min_value=-1e6, max_value=1e6), st.sampled_from([1.0, 2.0, 5.0, 10.0]))
def test_rounding_goes_to_the_safe_side(number: float, step: float) -> None:
    down, up = units.round_down(number, step), units.round_up(number, step)
    slack = 0.005 + 1e-9 * abs(number) + 1e-6 * step
    assert number - step - slack < down <= number + slack
    assert number - slack <= up < number + step + slack
    assert down % step == 0.0
    assert up % step == 0.0


def test_rounding_looks_through_the_noise_of_floats() -> None:
    assert units.round_down(84.9999999) == 85.0
    assert units.round_up(5.0000001, 5.0) == 5.0
    assert units.round_up(5.01, 5.0) == 10.0
    assert units.round_down(84.99) == 84.0


@pytest.mark.parametrize(
    ("number", "decimals", "text"),
    [
        (2006, 0, "2,006"),
        (-7.4, 0, "\u22127"),
        (-0.2, 0, "0"),
        (1234.56, 1, "1,234.6"),
        (-1234.56, 2, "\u22121,234.56"),
    ],
)
def test_numbers_are_shown_grouped_with_a_true_minus(number: float, decimals: int, text: str) -> None:
    assert units.show_number(number, decimals) == text


@pytest.mark.parametrize("number", [math.nan, math.inf, -math.inf])
def test_what_is_not_finite_never_reaches_a_page(number: float) -> None:
    with pytest.raises(ValueError, match="not finite"):
        units.show_number(number)


def test_a_typed_mass_prints_with_its_unit() -> None:
    assert units.show(units.read("2,006 lb", "mass"), "mass", "lb") == "2,006\u00a0lb"
    assert units.show(units.read("-7 degC", "temperature"), "temperature", "degC") == "\u22127\u00a0°C"
