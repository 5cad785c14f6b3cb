"""VNE in every form manuals print it: expected speeds are worked by hand from the typed figures beside each test."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from briefkit.aircraft.chart import Axis, ReadingRule, density_altitude_of
from briefkit.aircraft.line_text import read_lines
from briefkit.aircraft.slope_text import read_slope
from briefkit.reading.document import Document
from briefkit.units import FOOT, KNOT, POUND, ZERO_CELSIUS

OAT = 15.0 + ZERO_CELSIUS
ANY = 900.0


def power_on(form: str, reading: str = "interpolate") -> str:
    return f'source = "flight manual 2-4 rev 4"\nreading = "{reading}"\n{form}\n'


def chart(text: str, reading: str = "interpolate") -> str:
    return power_on(f"chart = '''\n{text}\n'''", reading)


def kt(speeds: object) -> list[float]:
    return [round(float(speed), 3) for speed in np.ravel(np.asarray(speeds)) / KNOT]


def test_mass_alone(file_2t):
    body = chart("lb        kt indicated\n≤1,600     112\n2,006      90")
    vne = file_2t.table("vne.power_on", body).load().vne
    assert vne.variables == (Axis.MASS,)
    assert kt(vne.indicated(np.array([-500.0, 0.0, 3000.0]), OAT, 1803 * POUND)) == [101.0, 101.0, 101.0]
    assert kt(vne.indicated(0.0, OAT, 1000 * POUND)) == [112.0]
    assert np.isnan(vne.indicated(3500.0, OAT, ANY))  # above 10,000 ft, the maximum altitude


def test_temperature_down_and_height_across(file_2t):
    body = chart("degC \\ ft     0   10,000     kt indicated\n-20     112   86\n+40     108   61")
    vne = file_2t.table("vne.power_on", body).load().vne
    assert vne.speeds.shape == (2, 2, 1, 1)
    assert kt(vne.indicated(10_000 * FOOT, 40.0 + ZERO_CELSIUS, ANY)) == [61.0]
    assert kt(vne.indicated(0.0, 40.0 + ZERO_CELSIUS, ANY)) == [108.0]
    assert vne.printed[1, 0, 0, 0] == "86"


def test_rotor_speed_across(file_2t):
    body = chart("ft \\ %     97   102     kt indicated\n0     100   110\n10,000     80   90")
    vne = file_2t.table("vne.power_on", body).load().vne
    assert vne.rotor_speeds == pytest.approx((0.97, 1.02))
    assert kt(vne.indicated(0.0, OAT, ANY, np.array([0.97, 1.0]))) == [100.0, 106.0]


def test_density_altitude_down_the_side(file_2t):
    body = chart("DA ft \\ lb     1,600   2,006     kt indicated\n0 or less     112   100\n8,000     90   70")
    vne = file_2t.table("vne.power_on", body).load().vne
    assert vne.density_altitude
    at = float(density_altitude_of(np.array(4000 * FOOT), np.array(OAT))) / FOOT
    expected = 100.0 - 30.0 * at / 8000.0
    assert kt(vne.indicated(4000 * FOOT, OAT, 2006 * POUND)) == [pytest.approx(expected, abs=0.01)]
    # "0 or less": a cold day's density altitude is below sea level
    assert kt(vne.indicated(0.0, ZERO_CELSIUS - 20.0, 2006 * POUND)) == [100.0]
    assert np.isnan(vne.indicated(0.0, OAT, 1500 * POUND))  # its first mass does not say "or less"


def test_or_less_on_the_first_row_holds_below_sea_level_and_only_there(file_2t):
    body = chart("ft \\ degC     -20   +40     kt indicated\n0 or less     112   108\n10,000     86   61")
    vne = file_2t.table("vne.power_on", body).load().vne
    assert kt(vne.indicated(-165 * FOOT, ZERO_CELSIUS - 20.0, ANY)) == [112.0]
    plain = file_2t.load().vne
    assert np.isnan(plain.indicated(-165 * FOOT, ZERO_CELSIUS - 20.0, ANY))


def test_or_less_on_the_coldest_column_holds_for_colder(file_2t):
    body = chart("ft \\ degC     ≤-20   +40     kt indicated\n0     112   108\n10,000     86   61")
    vne = file_2t.table("vne.power_on", body).load().vne
    assert kt(vne.indicated(0.0, ZERO_CELSIUS - 29.0, ANY)) == [112.0]
    assert np.isnan(vne.indicated(0.0, ZERO_CELSIUS + 41.0, ANY))


@pytest.mark.parametrize(
    "heads",
    ["≤1,700  ≤2,006", "<=1,700  <=2,006", "1,700 or less   2,006 or less", "1,700 lb or less  2,006 lb or less"],
)
def test_bands_are_read_as_the_band_a_mass_falls_in(file_2t, heads):
    vne = (
        file_2t.table("vne.power_on", chart(f"ft \\ lb   {heads}   kt indicated\n0   112   100\n10,000   90   70"))
        .load()
        .vne
    )
    assert vne.bands
    masses = np.array([1400, 1700, 1701, 2006]) * POUND
    assert kt(vne.indicated(0.0, OAT, masses)) == [112.0, 112.0, 100.0, 100.0]
    assert kt(vne.indicated(5000 * FOOT, OAT, 1701 * POUND)) == [85.0]  # heights are still interpolated
    assert np.isnan(vne.indicated(0.0, OAT, 2007 * POUND))


THREE = """at 1,700 lb or less
ft \\ degC   -20   +40   kt indicated
0   112   108
10,000   96   80
at 2,006 lb or less
ft \\ degC   -20   +40   kt indicated
0   112   100
10,000   86   61"""


def test_a_third_variable_is_one_chart_a_value(file_2t):
    vne = file_2t.table("vne.power_on", chart(THREE)).load().vne
    assert vne.variables == (Axis.HEIGHT, Axis.TEMPERATURE, Axis.MASS)
    assert vne.bands
    at = (10_000 * FOOT, ZERO_CELSIUS + 10.0)
    assert kt(vne.indicated(*at, np.array([1600, 1800]) * POUND)) == [88.0, 73.5]
    assert vne.rows[1] == ("at ≤1,700lb", "", "")


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ("at 2,006 lb or less\nft \\ degC   -20", "at 2,006 lb or less\nft \\ degC   -10", "other rows or columns"),
        ("at 1,700 lb or less\n", "", "a chart without a line above it"),
        ("at 2,006 lb or less", "at +20 degC", "one unit in all"),
        ("at 2,006 lb or less", "at heaviest", '"heaviest"'),
        ("at 1,700 lb or less", "at 2,100 lb or less", "more than the one before it"),
        ("at 1,700 lb or less", "at 1,700 lb", '"or less" on the first entry alone, or, for masses, on every one'),
    ],
)
def test_charts_under_lines_that_do_not_fit_are_refused(file_2t, old, new, words):
    faults = file_2t.table("vne.power_on", chart(THREE.replace(old, new))).faults()
    assert any(words in str(fault) for fault in faults), [str(fault) for fault in faults]


LINES = """ft    kt indicated
-20 degC: 0 112, 4,000 112, 10,000 86
+40 degC: 0 108, 1,000 106, 8,000 70"""


def lines(text: str, reading: str = "interpolate", error: str = 'reading_error = "1 kt"') -> str:
    return power_on(f"{error}\nlines = '''\n{text}\n'''", reading)


def test_lines_keep_every_point_and_end_where_they_end(file_2t):
    vne = file_2t.table("vne.power_on", lines(LINES)).load().vne
    cold, hot = ZERO_CELSIUS - 20.0, ZERO_CELSIUS + 40.0
    heights = np.array([0, 1000, 4000, 7000, 8000]) * FOOT
    assert kt(vne.indicated(heights, cold, ANY)) == [112.0, 112.0, 112.0, 99.0, pytest.approx(94.667, abs=1e-3)]
    assert kt(vne.indicated(heights, hot, ANY)) == [
        108.0,
        106.0,
        pytest.approx(90.571, abs=1e-3),
        pytest.approx(75.143, abs=1e-3),
        70.0,
    ]
    assert kt(vne.indicated(1000 * FOOT, ZERO_CELSIUS + 10.0, ANY)) == [109.0]
    assert np.isnan(vne.indicated(8100 * FOOT, hot, ANY))
    assert np.isnan(vne.indicated(8100 * FOOT, ZERO_CELSIUS + 10.0, ANY))  # it leans on the hot line, which has ended
    assert kt(vne.indicated(10_000 * FOOT, cold, ANY)) == [86.0]
    assert vne.reading_error == pytest.approx(KNOT)
    assert vne.straight == (Axis.HEIGHT,)


def test_between_lines_the_lower_one_holds_unless_the_manual_interpolates(file_2t):
    vne = file_2t.table("vne.power_on", lines(LINES, "next lower VNE")).load().vne
    assert vne.reading is ReadingRule.NEXT_LOWER
    assert kt(vne.indicated(500 * FOOT, ZERO_CELSIUS + 10.0, ANY)) == [107.0]  # half way along the hot line


def test_one_line_alone_and_lines_against_temperature(file_2t):
    vne = file_2t.table("vne.power_on", lines("ft    kt indicated\nall: 0 112, 10,000 61")).load().vne
    assert kt(vne.indicated(5000 * FOOT, OAT, ANY)) == [86.5]
    against = "degC    kt indicated\n0 ft: -20 112, +40 108\n10,000 ft: -20 86, +40 61"
    vne = file_2t.table("vne.power_on", lines(against)).load().vne
    assert vne.straight == (Axis.TEMPERATURE,)
    assert kt(vne.indicated(5000 * FOOT, ZERO_CELSIUS + 10.0, ANY)) == [91.75]


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ("4,000 112", "4,000 112 86", "two points or more, each its place and its speed"),
        ("-20 degC: 0 112, 4,000 112,", "-20 degC: 0 112, 4000 112,4500 110,", "a comma and a space part points"),
        ("1,000 106", "0 106", "more than the one before it"),
        ("+40 degC:", "+40 lb:", "one unit in all"),
        ("+40 degC:", "8,000 ft:", "one unit in all"),
        ("+40 degC:", "-40 degC:", "more than the one before it"),
        ("kt indicated", "kt", "what goes along, and the speeds"),
        ("8,000 70", "8,000 -", "a line ends at its last point"),
        ("8,000 70", "8,000 700", "above 0, up to 250 kt"),
        ("+40 degC: 0 108, 1,000 106, 8,000 70", "+40 degC: 0 108", "two points or more"),
        ("+40 degC:", "hot", "a name, a colon, points"),
    ],
)
def test_a_slip_in_a_line_is_named(file_2t, old, new, words):
    assert old in LINES
    faults = file_2t.table("vne.power_on", lines(LINES.replace(old, new))).faults()
    assert any(words in str(fault) and "vne.power_on.lines" in fault.key for fault in faults), list(map(str, faults))


def test_lines_without_a_reading_error_are_refused(file_2t):
    fault = file_2t.table("vne.power_on", lines(LINES, error="")).fault()
    assert fault.key == "vne.power_on.reading_error"


def test_a_slope_begins_where_it_says(file_2t):
    vne = (
        file_2t.table("vne.power_on", power_on('base = "112 kt"\nless = "3 kt per 1,000 ft above 3,000 ft"')).load().vne
    )
    heights = np.array([-300, 0, 3000, 4000, 10_000]) * FOOT
    assert kt(vne.indicated(heights, OAT, ANY)) == [112.0, 112.0, 112.0, 109.0, 91.0]
    assert np.isnan(vne.indicated(10_100 * FOOT, OAT, ANY))
    lower = power_on('base = "112 kt"\nless = "3 kt per 1,000 ft above 3,000 ft"', "next lower VNE")
    assert kt(file_2t.table("vne.power_on", lower).load().vne.indicated(4000 * FOOT, OAT, ANY)) == [109.0]
    assert vne.rows == (("VNE", "as typed"), ("base", "112 kt"), ("less", "3 kt per 1,000 ft above 3,000 ft"))


def test_slopes_over_two_variables_add(file_2t):
    both = 'base = "112 kt"\nless = ["3 kt per 1,000 ft above 3,000 ft", "5 kt per 100 lb above 1,800 lb"]'
    vne = file_2t.table("vne.power_on", power_on(both)).load().vne
    assert vne.variables == (Axis.HEIGHT, Axis.MASS)
    assert kt(vne.indicated(5000 * FOOT, OAT, np.array([1301, 1800, 1850, 2000]) * POUND)) == [
        106.0,
        106.0,
        103.5,
        96.0,
    ]


def test_a_slope_over_temperature_rotor_speed_and_density_altitude(file_2t):
    vne = file_2t.table("vne.power_on", power_on('base = "112 kt"\nless = "1 kt per 5 degC above 20 degC"')).load().vne
    assert kt(vne.indicated(0.0, ZERO_CELSIUS + np.array([-20.0, 20.0, 40.0]), ANY)) == [112.0, 112.0, 108.0]
    slow = power_on('base = "112 kt"\nless = "4 kt per 1 % below 100 %"')
    vne = file_2t.table("vne.power_on", slow).load().vne
    assert kt(vne.indicated(0.0, OAT, ANY, np.array([0.97, 0.99, 1.0, 1.02]))) == [100.0, 108.0, 112.0, 112.0]
    dense = power_on('base = "112 kt"\nless = "3 kt per 1,000 ft density altitude above 3,000 ft"')
    vne = file_2t.table("vne.power_on", dense).load().vne
    at = float(density_altitude_of(np.array(6000 * FOOT), np.array(OAT))) / FOOT
    assert kt(vne.indicated(6000 * FOOT, OAT, ANY)) == [pytest.approx(112.0 - 3.0 * (at - 3000.0) / 1000.0, abs=0.01)]


def test_a_slope_under_a_chart_of_something_else(file_2t):
    both = (
        chart("lb    kt indicated\n≤1,700   112\n2,006   100").rstrip() + '\nless = "3 kt per 1,000 ft above 3,000 ft"'
    )
    vne = file_2t.table("vne.power_on", both).load().vne
    assert kt(vne.indicated(5000 * FOOT, OAT, np.array([1700, 2006]) * POUND)) == [106.0, 94.0]
    assert vne.printed.ravel().tolist().count("112") == 2  # typed cells stand where nothing is taken off


DENSE = 'base = "112 kt"\nless = ["3 kt per 1,000 ft above 0 ft", "1 kt per 1,000 ft DA above 0 ft"]'


@pytest.mark.parametrize(
    ("form", "key", "words"),
    [
        ('base = "112 kt"\nless = "3 per 1,000 ft above 3,000 ft"', "less", "an airspeed per a step above a value"),
        ('base = "112 kt"\nless = "3 kt per 1,000 ft above 3,000 m"', "less", "one unit on both sides"),
        ('base = "112 kt"\nless = "3 kt per 100 lb above 3,000 ft"', "less", "an airspeed per a step above a value"),
        ('base = "112 kt"\nless = "3 kt per 1,000 ft below 3,000 ft"', "less", "below one for rotor speeds only"),
        ('base = "112 kt"\nless = "30 kt per 1,000 ft above 3,000 ft"', "less", "20 kt or more everywhere"),
        (DENSE, "less", "the same unit"),
        ('base = "112 kt"\ncap = "90"', "cap", "speed in kt"),
        ('less = "3 kt per 1,000 ft above 3,000 ft"', "chart", "one of chart, lines, base"),
        ("base = \"112 kt\"\nchart = '''\nft   kt indicated\n0   112\n10,000   90\n'''", "chart", "chart and base"),
        (
            "less = \"3 kt per 1,000 ft above 3,000 ft\"\nchart = '''\nft   kt indicated\n0   112\n10,000   90\n'''",
            "less",
            "has no axis for",
        ),
    ],
)  # fmt: skip
def test_a_form_that_cannot_be_read_is_named(file_2t, form, key, words):
    fault = file_2t.table("vne.power_on", power_on(form)).fault()
    assert fault.key == f"vne.power_on.{key}"
    assert words in str(fault)
    assert fault.line


def test_a_cap_is_the_lesser_of_the_two(file_2t):
    vne = file_2t.replaced(('reading = "interpolate"', 'reading = "interpolate"\ncap = "100 kt"')).load().vne
    assert kt(vne.indicated(np.array([0.0, 8000 * FOOT]), ZERO_CELSIUS, ANY)) == [100.0, 87.0]
    assert (vne.cap_text, vne.cap_source) == ("100 kt", "flight manual 2-4 rev 4")


def test_a_dash_is_a_cell_the_manual_leaves_without_a_value(file_2t):
    vne = file_2t.replaced(("77     69     61", "77     69      -")).load().vne
    assert np.isnan(vne.indicated(9000 * FOOT, ZERO_CELSIUS + 30.0, ANY))
    assert kt(vne.indicated(10_000 * FOOT, ZERO_CELSIUS + 20.0, ANY)) == [69.0]
    whole = file_2t.replaced(("10,000        86    77     69     61", "10,000        -    -     -      -"))
    assert "no value in the row" in str(whole.fault())


def test_a_statement_on_temperatures_has_its_page_and_its_place(file_2t, file_3f):
    said = file_3f.load().vne.covers_temperatures
    assert said.startswith("flight manual 2-3")
    bare = file_3f.replaced(("flight manual 2-3 rev 2: VNE holds at every permitted temperature", "holds at all"))
    assert "with its page" in bare.fault().permitted
    own = file_2t.replaced(('reading = "interpolate"', 'reading = "interpolate"\ncovers_temperatures = "2-4: all"'))
    assert "varies with temperature itself" in own.fault().permitted


def test_every_unit_a_manual_may_use(file_3f):
    """The 3F's chart retyped in mph, feet and pounds is the same chart: 1 mph = 1.609344 km/h exactly."""
    text = file_3f.text
    for metric, other in (("km/h", "mph"), ('"m"', '"ft"'), ('"kg"', '"lb"'), ('"hPa"', '"inHg"')):
        text = text.replace(metric, other)
    text = text.replace("m \\ kg   ≤1,700   2,000   2,380", "ft \\ lb   ≤3,748   4,409   5,247")
    for metres, feet in (
        ("4,000 m", "13,123 ft"),
        ("1,500 m", "4,921 ft"),
        ("2,380 kg", "5,247 lb"),
        ("1,290 kg", "2,844 lb"),
    ):
        text = text.replace(f'"{metres}"', f'"{feet}"')
    text = text.replace("kg \\ ISA     0     +20     +35     m\n2,380", "lb \\ ISA     0     +20     +35     ft\n5,247")
    for row, feet in (("1,000", "3,281"), ("2,000", "6,562"), ("3,000", "9,843"), ("4,000", "13,123")):
        text = text.replace(f"\n{row}   ", f"\n{feet}   ")
    text = text.replace("300              294", "280              275")  # 300 mph is past what is read
    aircraft = type(file_3f)(text, file_3f.folder).load()
    assert aircraft.units.speed == "mph"
    speed = aircraft.vne.indicated(1000.0, OAT, 2000.0)
    assert float(speed) == pytest.approx(269 * 0.44704, rel=2e-4)


def test_a_density_altitude_slope_runs_to_the_hottest_day_at_the_highest_height(file_2t):
    dense = power_on('base = "112 kt"\nless = "3 kt per 1,000 ft density altitude above 3,000 ft"')
    vne = file_2t.table("vne.power_on", dense).load().vne
    hottest = 15.0 - 0.0065 * 10_000 * FOOT + 35.0 + ZERO_CELSIUS  # ISA+35 at 10,000 ft
    at = float(density_altitude_of(np.array(10_000 * FOOT), np.array(hottest))) / FOOT
    assert at > 13_000
    assert kt(vne.indicated(10_000 * FOOT, hottest, ANY)) == [
        pytest.approx(112.0 - 3.0 * (at - 3000.0) / 1000.0, abs=0.01)
    ]


def test_a_temperature_colder_than_any_air_is_named_at_the_header(file_2t):
    fault = file_2t.replaced(("-20     0    +20    +40     kt", "-200     0    +20    +40     kt")).fault()
    assert fault.key == "vne.power_on.chart, header"
    assert fault.read == "-200 degC"
    assert "kt indicated" in file_2t.text.split("\n")[fault.line - 1]


ANYTHING = st.text(alphabet=st.sampled_from("0129.,;:-+ \t\nkftdegCindicatedlbDA%at≤'\\ \u2212"), max_size=60)
OPEN = settings(max_examples=80, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])


@OPEN
@given(text=ANYTHING, at=st.integers(0, len(LINES)))
def test_any_text_among_lines_is_a_chart_or_has_a_fault(tmp_path, text, at):
    block = LINES[:at] + text.replace("'''", "") + LINES[at:]
    path = tmp_path / "lines.toml"
    path.write_text(f"[vne.power_on]\nlines = '''\n{block}\n'''\n", encoding="utf-8")
    document = Document(path)
    read = read_lines(document, "vne.power_on.lines", document.data["vne"]["power_on"]["lines"])
    assert (read is None) == bool(document.faults)
    if read is not None:
        assert not np.any(read.speeds <= 0.0)
        assert all(np.all(np.diff(axis.values) > 0.0) for axis in read.axes)


@OPEN
@given(text=ANYTHING, at=st.integers(0, 33))
def test_any_text_in_a_slope_is_a_slope_or_a_fault(tmp_path, text, at):
    path = tmp_path / "slope.toml"
    path.write_text("[vne.power_on]\n", encoding="utf-8")
    document = Document(path)
    slope = read_slope(document, "vne.power_on.less", "3 kt per 1,000 ft above 3,000 ft"[:at] + text)
    assert (slope is None) == bool(document.faults)
    if slope is not None:
        assert slope.rate > 0.0
