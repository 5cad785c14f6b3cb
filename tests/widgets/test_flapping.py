"""The flapping exhibit: controls held against trimmed, and what is left to the flap stop."""

from __future__ import annotations

import dataclasses
import math

import numpy as np
import pytest

from briefkit.aircraft.load import load_aircraft
from briefkit.envelope.condition import Condition
from briefkit.envelope.held import held_at, to_stop_deg
from briefkit.envelope.solution import rotor_of, solve
from briefkit.errors import OutsideLimits, ReadingError
from briefkit.figures.still import still
from briefkit.physics.trim import Controls, held
from briefkit.widgets.flapping import HOLD, TRIM, Flapping


@pytest.fixture
def fast(start):
    return start.with_(ias="78 kt")


@pytest.fixture
def flapping(two_t):
    made = []

    def make(condition, held_from=None, aircraft=two_t):
        made.append(Flapping(aircraft, condition, held_from=held_from))
        return made[-1]

    yield make
    for exhibit in made:
        exhibit.close()


@pytest.fixture(scope="module")
def hinged(examples):
    return load_aircraft(examples / "aircraft" / "ormbrae-3f.toml")


def test_with_the_controls_held_a_faster_disc_flaps_back_and_a_slower_one_forward(two_t, start, fast):
    """Blowback, FAA-H-8083-21B ch. 2: with speed the disc tilts aft until the pilot moves the cyclic forward."""
    trimmed = solve(two_t, start)
    assert held_at(two_t, trimmed, fast).b1c_deg < -0.5
    assert held_at(two_t, trimmed, start.with_(ias="45 kt")).b1c_deg > 0.5
    same = held_at(two_t, trimmed, start)
    assert same.tilt_deg == pytest.approx(0.0, abs=1e-6)
    assert same.load == pytest.approx(1.0, abs=0.01)


def test_how_far_back_agrees_with_the_closed_form(two_t, start, fast):
    """a1 = mu (8/3 theta75 + 2 lambda) / (1 + 3/2 mu^2), flapping from the control plane with the inflow through the
    disc: the classical result without compressibility (NACA TR 487 and every textbook since; here from memory). At the
    tip Mach numbers here Prandtl-Glauert lifts the advancing side by a third more than the retreating one, weighted to
    the tip: more flapping than the closed form, by up to a quarter (common practice, no source).
    """
    trimmed = solve(two_t, start)
    rotor = rotor_of(two_t)
    many = solve(two_t, fast).trim.state
    found = held(rotor, many, Controls.of(trimmed.trim))
    mu, t0, inflow = float(found.mu[0]), float(found.t0[0]), float(found.inflow[0])
    a1 = math.degrees(mu * (8.0 / 3.0 * t0 - 2.0 * inflow) / (1.0 + 1.5 * mu**2))
    # From the control plane: what has been added from the mast, on what the trimmed flight had.
    assert a1 < -(held_at(two_t, trimmed, fast).b1c_deg + trimmed.b1c_deg) < 1.25 * a1


def test_what_is_left_to_the_stop_by_hand(two_t, hinged):
    """Teetering: stop less see-saw, 11 - 2 = 9. On a hinge: the lowest blade stands at coning less tilt, 2.5 - 2 = 0.5
    up, and the stop is 4 below level: 4.5."""
    assert to_stop_deg(two_t, 2.5, 2.0) == pytest.approx(9.0)
    assert to_stop_deg(hinged, 2.5, 2.0) is None
    stopped = dataclasses.replace(two_t.rotor.flap_stop, value=math.radians(4.0))
    with_stop = dataclasses.replace(hinged, rotor=dataclasses.replace(hinged.rotor, flap_stop=stopped))
    assert to_stop_deg(with_stop, 2.5, 2.0) == pytest.approx(4.5)


def test_held_the_exhibit_says_from_where_how_far_and_what_is_left(flapping, two_t, start, fast, plain):
    now = held_at(two_t, solve(two_t, start), fast)
    parts = flapping(fast, start).still_parts()
    said = plain(parts.caption)
    assert parts.title == "Flapping, controls held"
    assert "held as trimmed at 1,800 lb, Hp 8,000 ft, +20 °C, 60 KIAS" in said
    assert f"tilted {-now.b1c_deg:.1f}° back" in said
    assert f"pulls {now.load:.2f} times the weight" in said
    assert ("Controls held from", "1,800 lb, Hp 8,000 ft, +20 °C, 60 KIAS, bank 0°, rotor speed 100 %") in [
        (name, plain(value)) for name, value in parts.inputs
    ]
    rows = {row[0]: row[1:] for row in parts.table.rows}
    assert rows["nose, 180°"] == ("2.5°", f"{now.b0_deg - now.b1c_deg:.1f}°")
    left = math.floor((11.0 - now.tilt_deg) * 10.0) / 10.0
    assert rows["left to the flap stop, at most"] == ("11.0°", f"{left:.1f}°")
    assert any(
        f"11° (maintenance manual 62-10 rev 7). Left to it, at most: {left:.1f}°" in note for note in parts.notes
    )
    assert "trimmed</text>" not in still(flapping(start))


def test_a_turn_with_the_controls_held_says_what_it_would_need(flapping, start, plain):
    turning = flapping(start.with_(bank="30 deg"), start).still_parts()
    assert "stands where it stood" in turning.caption
    assert "a level turn at 30° bank needs 1.15" in plain(turning.caption)


def test_past_the_stop_there_is_no_number(flapping, two_t, start, fast):
    tight = dataclasses.replace(two_t.rotor.flap_stop, value=math.radians(0.5))
    aircraft = dataclasses.replace(two_t, rotor=dataclasses.replace(two_t.rotor, flap_stop=tight))
    rows = {row[0]: row[1:] for row in flapping(fast, start, aircraft).still_parts().table.rows}
    assert rows["left to the flap stop, at most"] == ("0.5°", "nothing: the stop is met")


def test_without_a_stop_in_the_file_there_is_no_row(flapping, hinged):
    there = Condition(mass="2,000 kg", pressure_altitude="2,000 m", oat="10 degC", ias="150 km/h")
    for exhibit in (flapping(there, None, hinged), flapping(there.with_(ias="200 km/h"), there, hinged)):
        assert len(exhibit.still_parts().table.rows) == 4
        assert not any("Flap stop" in note for note in exhibit.still_parts().notes)


def test_the_button_holds_what_is_trimmed_now_and_lets_go_again(live, from_browser, models_open, plain):
    exhibit = Flapping(live)
    count, trimmed = models_open(), exhibit.still_parts().caption
    assert exhibit._hold.description == HOLD
    from_browser(exhibit._hold, True)
    assert exhibit._hold.description == TRIM
    assert "stands where it stood" in exhibit.still_parts().caption
    live.change(ias="75 kt")
    said = plain(exhibit.still_parts().caption)
    assert "held as trimmed at 1,800 lb, Hp 8,000 ft, +20 °C, 60 KIAS" in said
    assert "back" in said
    from_browser(exhibit._hold, False)
    live.change(ias="60 kt")
    assert exhibit.still_parts().caption == trimmed
    assert models_open() == count


def test_what_cannot_be_held_is_said_and_greyed(live, two_t, start, from_browser, monkeypatch):
    exhibit = Flapping(live)
    from_browser(exhibit._hold, True)
    real = held
    monkeypatch.setattr(
        "briefkit.envelope.held.held",
        lambda rotor, state, controls: real(rotor, dataclasses.replace(state, speed=np.array([200.0])), controls),
    )
    live.change(ias="75 kt")
    assert "controls held, 75 KIAS" in exhibit.fault
    with pytest.raises(ReadingError, match="not current"):
        exhibit.still_parts()
    with pytest.raises(OutsideLimits, match="nearer to where the controls were trimmed"):
        held_at(two_t, solve(two_t, start), start)


def test_a_condition_to_hold_from_is_held_to_the_manual_too(two_t, start, models_open):
    before = models_open()
    with pytest.raises(OutsideLimits, match="mass"):
        Flapping(two_t, start, held_from=start.with_(mass="2,100 lb"))
    assert models_open() == before


def test_a_tick_has_one_text_whatever_the_others_are(flapping, start, fast):
    """bqplot does not write a tick anew that was there before: its text may depend on its value alone."""
    seen = {}
    for exhibit in (flapping(start), flapping(start, start), flapping(fast, start)):
        for value, text in exhibit._curve._y_axis.tick_labels.items():
            assert seen.setdefault(value, text) == text
