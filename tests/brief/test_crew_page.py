"""What the crew's page says, held against the rules it was worked out by and the handbook it quotes."""

from __future__ import annotations

import math
import re
from dataclasses import replace

import pytest

from briefkit import units
from briefkit.aircraft.model import Hub, ManualSpeed, Rotation, Stated
from briefkit.brief import derivation, front, recognition
from briefkit.brief.crew_page import crew_page
from briefkit.brief.identity import load_brief
from briefkit.brief.standing import DRAFT
from briefkit.envelope import cues
from briefkit.envelope.reductions import reductions


@pytest.fixture(scope="module")
def brief(examples):
    return load_brief(examples / "vellmark-2t")


@pytest.fixture(scope="module")
def page(brief):
    return crew_page(brief, "0.1.0")


@pytest.fixture(scope="module")
def fleet(operation):
    return operation.fleet["pelquill-2t"]


@pytest.fixture(scope="module")
def area(operation):
    return operation.work_areas["vellmark"]


def text(*sections):
    """Every string of some sections, in order."""
    found = []
    for section in sections:
        grid = section.grid
        rows = [] if grid is None else [grid.caption, *grid.header, *(cell for row in grid.rows for cell in row)]
        beside = () if grid is None else grid.beside
        found += [section.heading, section.aside, *section.before, *rows, *beside, *section.points, *section.after]
    return "\n".join(found)


@pytest.mark.slow
def test_an_unsigned_page_is_a_draft(page):
    assert page.mark == DRAFT
    assert page.running.startswith("DRAFT: not for crews | NB-2T-001 rev 0 | expires 29 Feb 2032")


def test_manual_vne_is_printed_cell_for_cell(page, two_t):
    rows = {row[0]: row[1:] for row in page.front[0].grid.rows}
    # The cells as the invented manual prints them; the two at +40 C are hotter than ISA+35 there.
    assert rows == {"6,000": ("96", "88", "80*"), "8,000": ("87", "79", "70*")}
    assert page.front[0].grid.header == ("Hp ft (29.92 set)", "0 °C", "+20 °C", "+40 °C")
    assert "for reading between only" in text(page.front[0])
    assert "Power off: 85 KIAS" in text(page.front[0])


def test_reduction_rows_and_their_grammar(page):
    rows = page.front[1].grid.rows
    assert rows == (
        ("2,006 lb", "at most 20°, and 10 kt or more"),
        ("1,900 lb", "at most 25°, and 10 kt or more"),
        ("1,800 lb", "10 kt or more"),
        ("1,750 lb", "5 kt or more"),
        ("1,700 lb or less", "VNE still limits"),
    )
    # Never a speed beside a bank angle: no indicated speed stands in a row that has a bank.
    assert not any("KIAS" in cell for row in rows for cell in row)
    said = text(page.front[1])
    assert "For awareness: before a turn of up to 30° of bank" in said
    assert "Answer under 54 KIAS (climb speed): no 30-degree turn" in said
    assert "Over 30°: not briefed" in said
    assert "In between: the heavier line" in said


def test_company_limit_changes_the_heading(two_t, fleet, area):
    table = reductions(two_t, fleet, area)
    section = front.turn_section(two_t, replace(fleet, status="company limit, OM-B 2.3"), area, table)
    assert section.heading.startswith("2. Company limit, OM-B 2.3: before a turn")


def test_nothing_to_take_off_says_so(two_t, fleet, area):
    light = replace(fleet, masses=(Stated(units.read("1,500 lb", "mass"), "1,500 lb", "weight report"),))
    said = text(front.turn_section(two_t, light, area, reductions(two_t, light, area)))
    assert "Up to 30° of bank, blade stall asks for nothing below VNE here. VNE still limits" in said
    assert "kt or more" not in said


def test_the_manuals_own_speeds_come_first(two_t, fleet, area):
    rough = ManualSpeed("Rough air", "100 KIAS", "turbulence", "flight manual 2-6")
    turn = ManualSpeed("Turns", "VNE less 10 kt above 30° of bank", "bank", "flight manual 2-6")
    aircraft = replace(two_t, speeds=(rough, turn))
    assert front.rough_air(aircraft).before == ("100 KIAS (flight manual 2-6).",)
    said = front.turn_section(aircraft, fleet, area, reductions(aircraft, fleet, area))
    assert said.before[0].startswith("The manual’s own first: Turns, VNE less 10 kt above 30° of bank")
    assert front.rough_air(two_t).before == ("The manual gives no speed. Slow down early; gentle hands.",)


def test_recovery_is_the_handbooks_or_the_manuals(two_t):
    """G24: the aircraft's own procedure overrides the handbook's; one of them, with its edition, never a blend."""
    handbook = text(front.if_it_starts(two_t))
    assert "FAA-H-8083-21B ch. 11 (the manual has no procedure)" in handbook
    assert "Do not pull aft or push forward on the cyclic" in handbook
    own = replace(two_t, recovery="Lower collective, reduce airspeed.", recovery_source="flight manual 3-9")
    said = text(front.if_it_starts(own))
    assert "Lower collective, reduce airspeed." in said
    assert "flight manual 3-9" in said
    assert "Usually first" not in said


def test_two_blades_carry_the_low_g_caution(two_t):
    """G25."""
    assert "Two blades: low g" in text(*recognition.recognition(two_t))
    three = replace(two_t, rotor=replace(two_t.rotor, blades=3, hub=Hub.ARTICULATED))
    assert "Two blades" not in text(*recognition.recognition(three))
    assert "Low g" not in text(*recognition.recognition(three))


def test_a_clockwise_rotor_is_mirrored_everywhere(two_t):
    """G23 for words: left and right change places, and the page says that it has mirrored the handbook."""
    clockwise = replace(two_t, rotor=replace(two_t.rotor, rotation=Rotation.CLOCKWISE))
    sections = (front.if_it_starts(two_t), *recognition.recognition(two_t))
    mirrored = (front.if_it_starts(clockwise), *recognition.recognition(clockwise))
    here, there = text(*sections), text(*mirrored)
    assert "roll, usually left" in here
    assert "roll, usually right" in there
    assert "rolls right uncommanded" in here
    assert "rolls left uncommanded" in there
    assert "mirrored: FAA-H-8083-21B speaks of anticlockwise rotors" in there
    sides = re.compile(r"\b(left|right)\b")
    swapped = [{"left": "right", "right": "left"}[side] for side in sides.findall(here)]
    assert sides.findall(there.replace("Left and right are", "")) == swapped


@pytest.mark.parametrize(
    ("rpm", "blades", "once", "per_blade"), [(452, 2, 7.5, 15.1), (374, 3, 6.2, 18.7), (356, 4, 5.9, 23.7)]
)
def test_vibration_frequencies(two_t, rpm, blades, once, per_blade):
    # Revolutions per minute over 60, and times the blades: arithmetic.
    rotor = replace(two_t.rotor, blades=blades, rpm=Stated(rpm * math.pi / 30.0, f"{rpm} rpm", "manual"))
    found = cues.vibration(replace(two_t, rotor=rotor))
    assert found.once == pytest.approx(once, abs=0.05)
    assert found.blade == pytest.approx(per_blade, abs=0.05)


def test_the_worked_line_can_be_followed(page):
    line = page.analysis[0].after[0]
    assert line == (
        "By hand: 1,800 lb at 8,000 ft, +20 °C, 30 degrees counts as 2,124 lb; 2,006 lb is as loaded at 9,480 ft, "
        "+20 °C; the manual’s VNE there, 71.6 KIAS, is 87.2 kt true, which is 73.9 KIAS at 8,000 ft; VNE here is 79: "
        "5.1 below, so 10 kt."
    )


@pytest.mark.slow
def test_a_climb_is_said_and_worked(two_t, fleet, area):
    climbing = replace(fleet, climb=Stated(units.read("500 ft/min", "vertical speed"), "500 ft/min", "OM-B 2.3"))
    table = reductions(two_t, climbing, area)
    assert "Turn, level or climbing at up to 500 ft/min" in text(front.turn_section(two_t, climbing, area, table))
    level = {row.mass.text: row.exact for row in reductions(two_t, fleet, area).rows}
    for row in table.rows:
        assert row.exact >= level[row.mass.text] - 1e-9 or row.bank_deg < 30
    row = derivation.worked_row(table)
    assert "a climb of 500\u00a0ft/min costs another" in derivation.worked_line(two_t, row)


def test_every_source_is_listed(page, two_t):
    said = text(*page.control)
    for _, source in two_t.sources:
        assert source in said
    assert "FAA-H-8083-21B" in said


def test_no_number_on_a_page_is_missing(page):
    everything = text(*page.front, *page.recognition, *page.analysis, *page.control, page.slip)
    assert not re.search(r"\b(nan|inf|None)\b", everything)
