"""The relative wind from any side: hover in wind, sideward and rearward flight on the disc map."""

from __future__ import annotations

import math
import re

import numpy as np
import pytest

from briefkit import units
from briefkit.aircraft.load import load_aircraft
from briefkit.envelope.condition import Condition
from briefkit.envelope.solution import solve
from briefkit.envelope.wind import solve_in_wind
from briefkit.errors import OutsideLimits, ReadingError
from briefkit.figures.still import still
from briefkit.widgets.disc import DiscMap
from briefkit.widgets.disc_quantities import QUANTITIES
from briefkit.widgets.wind import Wind, read_wind


@pytest.fixture
def disc(two_t, start):
    made = []

    def make(aircraft=two_t, condition=start, **settings):
        made.append(DiscMap(aircraft, condition, **settings))
        return made[-1].still_parts()

    yield make
    for exhibit in made:
        exhibit.close()


@pytest.fixture(scope="module")
def clockwise(examples):
    condition = Condition(mass="3,000 kg", pressure_altitude="5,000 ft", oat="10 degC", ias="90 kt")
    return load_aircraft(examples / "aircraft" / "kvillarn-4h.toml"), condition


def test_by_hand_a_wind_from_the_right_advances_over_the_tail(disc, two_t, plain):
    """By hand: seen from above the blade of an anticlockwise rotor moves to the right over the tail, so into a wind
    from the right. 20 kt on a tip at 210.6 m/s = 409 kt: 429 there, 389 over the nose, 409 into and down the wind.
    """
    parts = disc(wind_from="90 deg", wind="20 kt")
    tip = units.from_si(two_t.rotor.tip_speed, "speed", "kt")
    assert tip == pytest.approx(409.4, abs=0.1)
    assert {row[0]: plain(row[-1]) for row in parts.table.rows} == {
        "advancing side, 0°": "429 kt", "upwind side, 90°": "409 kt", "retreating side, 180°": "389 kt",
        "downwind side, 270°": "409 kt",
    }  # fmt: skip
    said = plain(parts.caption)
    assert "20 kt true from the right, 90° clockwise from the nose: the blade advances over the tail" in said
    assert "20 kt true from the right" in plain(parts.alt)
    assert ("Relative wind", "20 kt true from the right, 90° clockwise from the nose") in [
        (name, plain(value)) for name, value in parts.inputs
    ]
    assert "Airspeed" not in dict(parts.inputs)
    assert any("manual says" in note for note in parts.notes)


@pytest.mark.parametrize(
    ("wind_from", "advances"),
    [("90 deg", "nose"), ("180 deg", "right side"), ("-90 deg", "tail"), ("0 deg", "left side")],
)
def test_a_clockwise_rotor_is_the_mirror_image(disc, clockwise, plain, wind_from, advances):
    parts = disc(*clockwise, wind_from=wind_from, wind="30 kt")
    assert f"the blade advances over the {advances}" in plain(parts.caption)


@pytest.mark.parametrize("bearing", [90.0, 200.0])
@pytest.mark.parametrize("kind", ["two_t", "clockwise"])
def test_the_disc_turns_with_the_wind_and_nothing_else_changes(request, two_t, start, clockwise, kind, bearing):
    """A rotor knows the wind only by its own direction (design.md 3): turned to the wind, it is forward flight."""
    aircraft, condition = (two_t, start) if kind == "two_t" else clockwise
    ahead = solve(aircraft, condition)
    aside = solve_in_wind(aircraft, condition, math.radians(bearing), ahead.tas)
    for name in ("tip_angle_deg", "advance_ratio", "blade_loading", "b0_deg", "t0_deg"):
        assert getattr(aside, name) == pytest.approx(getattr(ahead, name), rel=1e-9)
    turn = Wind(bearing).turn(-1 if aircraft.mirrored else 1)
    # beta at an azimuth is that of forward flight at the same azimuth from the wind
    psi = np.linspace(0.0, 6.0, 7)
    over = ahead.b1c_deg * np.cos(psi) + ahead.b1s_deg * np.sin(psi)
    assert aside.b1c_deg * np.cos(psi + turn) + aside.b1s_deg * np.sin(psi + turn) == pytest.approx(over, abs=1e-7)
    radii = np.linspace(0.3, 1.0, 4)
    for name in ("speed", "mach", "angle"):
        there, here = getattr(aside.trim.elements(radii, psi + turn), name), getattr(
            ahead.trim.elements(radii, psi), name)  # fmt: skip
        assert there == pytest.approx(here, rel=1e-7, abs=1e-9)


@pytest.mark.parametrize(("wind_from", "named"), [("90 deg", True), ("75 deg", True), ("45 deg", False)])
def test_round_the_rim_a_side_is_named_only_where_it_is_the_one(two_t, start, wind_from, named):
    exhibit = DiscMap(two_t, start, wind_from=wind_from, wind="30 kt")
    picture = still(exhibit).partition("<svg")[2].partition("</svg>")[0]
    assert ("tail 0°, advancing side" in picture) is named
    assert "nose 180°" in picture
    exhibit.close()


def test_rearward_flight_retreats_on_the_right_of_an_anticlockwise_rotor(disc, plain):
    parts = disc(wind_from="180 deg", wind="25 kt", quantity="angle of attack")
    assert "advances over the left side and retreats over the right side" in plain(parts.caption)
    angle = {row[0]: float(row[-1].rstrip("°")) for row in parts.table.rows}
    assert angle["retreating side, 90°"] > angle["advancing side, 270°"]


@pytest.mark.parametrize("quantity", QUANTITIES)
def test_in_still_air_no_side_advances(disc, plain, quantity):
    parts = disc(wind="0 kt", quantity=quantity)
    assert "no side advances" in plain(parts.caption)
    assert not re.search("(advancing|retreating) tip (meets|stands)", plain(parts.caption))
    assert [row[0] for row in parts.table.rows] == ["90° side", "nose", "270° side", "tail"]
    assert len({row[-1] for row in parts.table.rows}) == 1


@pytest.mark.parametrize(
    ("wind_from", "wind", "permitted"),
    [("400 deg", "", "-180 to 360"), ("90", "", "add the unit"), ("0 deg", "-5 kt", "0 to 138 kt true"),
     ("0 deg", "150 kt", "0 to 138 kt true")],
)  # fmt: skip
def test_a_wind_that_cannot_be_is_refused_in_words(two_t, start, models_open, wind_from, wind, permitted):
    before = models_open()
    with pytest.raises(ReadingError, match=permitted):
        DiscMap(two_t, start, wind_from=wind_from, wind=wind)
    assert models_open() == before


def test_a_climb_faster_than_the_wind_is_refused(two_t, start):
    steep = start.with_(climb="500 ft/min")
    with pytest.raises(OutsideLimits, match="relative wind 2 kt true"):
        solve_in_wind(two_t, steep, 0.0, units.to_si(2.0, "speed", "kt"))


def test_the_same_bearing_however_it_is_typed(two_t):
    assert read_wind(two_t, "-90 deg", "").bearing_deg == read_wind(two_t, "270°", "").bearing_deg == 270.0
    assert read_wind(two_t, "360 deg", "").as_flown


def test_the_controls_turn_the_picture_and_refuse_in_words(live, from_browser, models_open, plain):
    exhibit = DiscMap(live)
    other = DiscMap(live, quantity="Mach")
    before, open_now = exhibit.still_parts().caption, models_open()
    controls = exhibit._control
    from_browser(controls.slider, 90.0)
    assert "from the right" in exhibit.still_parts().caption
    assert controls.bearing.value == "90°"
    assert "from the right" not in other.still_parts().caption
    from_browser(controls.speed, "25")
    assert "25 kt true from the right" in plain(exhibit.still_parts().caption)
    assert controls.speed.value == "25 kt"
    turned = exhibit.still_parts().caption
    for box, typed in ((controls.speed, "fast"), (controls.bearing, "north"), (controls.speed, "400 kt")):
        from_browser(box, typed)
        assert "Refused" in controls.word.value
        assert typed in controls.word.value
        assert exhibit.still_parts().caption == turned
    assert (controls.bearing.value, controls.speed.value) == ("90°", "25 kt")
    live.change(mass="1,700 lb")
    assert "25 kt true from the right" in plain(exhibit.still_parts().caption)
    assert ("Mass", "1,700\u00a0lb") in exhibit.still_parts().inputs
    from_browser(controls.bearing, "0")
    from_browser(controls.speed, "")
    live.change(mass="1,800 lb")
    assert exhibit.still_parts().caption == before
    assert models_open() == open_now


def test_a_wind_the_model_refuses_leaves_the_picture_and_says_so(live, from_browser, plain):
    live.change(climb="500 ft/min")
    exhibit = DiscMap(live)
    before = exhibit.still_parts()
    from_browser(exhibit._control.speed, "2 kt")
    assert "Refused: relative wind 2 kt true" in plain(exhibit._control.word.value)
    assert exhibit.still_parts() is before
    live.change(mass="1,700 lb")
    assert exhibit.fault == ""


def test_an_odd_bearing_stays_as_typed(live, from_browser):
    """The slider's grid goes through it, or the front end would round it and send that back."""
    exhibit = DiscMap(live)
    from_browser(exhibit._control.bearing, "37 deg")
    slider = exhibit._control.slider
    assert slider.value == 37.0
    assert (slider.value - slider.min) % slider.step == 0.0
    assert "from the front right, 37°" in exhibit.still_parts().caption
