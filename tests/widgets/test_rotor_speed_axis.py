"""A manual that prints VNE over rotor speed: VNE here is that of the rotor as it turns, on every exhibit."""

from __future__ import annotations

import re

import numpy as np
import pytest

from briefkit.aircraft.load import load_aircraft
from briefkit.envelope import boundary as module
from briefkit.envelope.condition import Condition
from briefkit.widgets import boundary_words
from briefkit.widgets.answers import Answers
from briefkit.widgets.equivalent_chart import EquivalentChart
from briefkit.widgets.live import LiveCondition
from briefkit.widgets.stall_boundary import StallBoundary

# The form as DEVELOPERS.md gives it. By hand at 4,000 ft: half way from 100 to 80 at 97 %, from 110 to 90 at 102 %.
TABLE = r"""[vne.power_on]
source = "flight manual 2-4 rev 4"
reading = "interpolate"
chart = '''
ft \ %       97     102    kt indicated
0           100     110
8,000        80      90
'''

"""
SLOW = Condition(mass="1,750 lb", pressure_altitude="4,000 ft", oat="10 degC", ias="93 kt", rotor_speed="97 %")


@pytest.fixture(scope="module")
def turning(examples, tmp_path_factory):
    text = (examples / "aircraft" / "pelquill-2t.toml").read_text(encoding="utf-8")
    path = tmp_path_factory.mktemp("rotor") / "type.toml"
    path.write_text(re.sub(r"^\[vne\.power_on\].*?(?=^\[)", lambda _: TABLE, text, flags=re.M | re.S), encoding="utf-8")
    return load_aircraft(path)


@pytest.mark.parametrize(("rotor", "vne"), [("97 %", "90 KIAS"), ("98 %", "92 KIAS"), ("100 %", "96 KIAS")])
def test_vne_here_is_that_of_the_rotor_as_it_turns(turning, two_t, rotor, vne):
    assert Answers(turning, SLOW.with_(rotor_speed=rotor)).level.text == vne
    # A chart without rotor speeds is taken at 100 %.
    assert Answers(two_t, SLOW.with_(rotor_speed=rotor)).level == Answers(two_t, SLOW.with_(rotor_speed="100 %")).level


def test_a_speed_between_the_two_is_remarked_on(turning):
    live = LiveCondition(turning, SLOW)
    assert live.word == "This airspeed is above the manual's VNE here, 90 KIAS."
    live.change(rotor_speed="100 %")
    assert live.word == ""
    live.close()


def test_the_chart_says_the_same_and_at_which_rotor_speed_it_was_read(turning, plain):
    exhibit = EquivalentChart(turning, SLOW)
    assert "The manual's VNE here is 90 KIAS" in exhibit.still_parts().caption
    exhibit.close()
    exhibit = EquivalentChart(turning, SLOW.with_(bank="30 deg"))
    parts = exhibit.still_parts()
    exhibit.close()
    assert re.search(r"level at 2,006 lb, Hp [\d,]+ ft, \+1 °C, rotor at 99\.5 %, where", plain(parts.caption))
    assert parts.table.rows[0][-1] == "VNE 90 KIAS"


def test_a_line_that_ends_while_the_chart_goes_on_does_not_say_that_the_chart_ends(turning, monkeypatch, plain):
    """+10 degC is colder than standard below 2,520 ft, and this chart does not say which temperatures it is for."""
    monkeypatch.setattr(module, "with_band", lambda aircraft, condition, chart: chart)
    drawn = module.boundary(turning, SLOW, banks_deg=(0.0, 30.0))
    level, steep = (plain(boundary_words._told(drawn, curve)) for curve in drawn.equivalent)
    assert level == "nothing is taken off, the manual's VNE holds; the line ends at 2,600 ft"
    assert "; the line ends at 2,600 ft and the chart ends at 6,100 ft" in steep
    assert boundary_words.drawn(turning, SLOW, drawn).ended == [["line"], ["line", "chart"]]


@pytest.mark.slow  # another aircraft, so another onset table
def test_the_boundary_draws_it_over_rotor_speed(turning):
    exhibit = StallBoundary(turning, SLOW, against="rotor speed")
    parts, drawn = exhibit.still_parts(), exhibit._kept[1]
    exhibit.close()
    assert parts.caption.startswith("The manual's VNE here is 90 KIAS")
    np.testing.assert_allclose(drawn.vne, np.interp(drawn.x, [97.0, 102.0], [90.0, 100.0]), atol=0.006)
    for curve in drawn.equivalent:
        assert (curve.ias <= drawn.vne).all()
    assert [row[1] for row in parts.table.rows] == ["90", "92", "94", "96", "98", "100"]
