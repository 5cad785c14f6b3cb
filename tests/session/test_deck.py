"""The deck file: every fault at once, held against the tool, and a first one generated from the operator's files."""

from __future__ import annotations

import math
import re
import tomllib

import pytest

from briefkit.aircraft.load import load_aircraft
from briefkit.aircraft.operation import load_operation
from briefkit.brief.seal import seal_of
from briefkit.errors import BuildError, FaultyFile
from briefkit.session import generate as generate_module
from briefkit.session.answers import Says
from briefkit.session.deck import load_deck
from briefkit.session.generate import generate, write_deck


def replaced(path, *pairs):
    text = path.read_text(encoding="utf-8")
    for old, new in pairs:
        assert old in text, old
        text = text.replace(old, new, 1)
    path.write_text(text, encoding="utf-8")


def faults(brief, operator):
    with pytest.raises(FaultyFile, match="fault") as caught:
        load_deck(brief, load_aircraft(operator / "aircraft" / "pelquill-2t.toml"))
    return caught.value.faults


@pytest.mark.slow
@pytest.mark.parametrize(("folder", "stem", "configuration", "unit"), [
    ("corrant-3f", "ormbrae-3f", "external load", "km/h"), ("ysbrane-4h", "kvillarn-4h", "basic", "KIAS"),
])  # fmt: skip
def test_the_other_examples_have_a_deck_in_their_own_unit(examples, folder, stem, configuration, unit):
    """One case where stall is not what decides, one the tool refuses, and where it is cold the tip's reason."""
    deck = load_deck(examples / folder, load_aircraft(examples / "aircraft" / f"{stem}.toml", configuration))
    assert {case.says for case in deck.cases} >= {Says.MANUAL_VNE, Says.REFUSED}
    assert any(unit in case.expected for case in deck.cases)
    assert not any(other in f"{case.expected} {case.teaching}" for case in deck.cases
                   for other in {"km/h", "KIAS"} - {unit})  # fmt: skip
    said = deck.answers(next(case for case in deck.cases if case.says is Says.MANUAL_VNE))
    assert said.computed.reduction == 0.0
    assert unit in said.manual.text


def test_the_example_trains_judgement_too(deck):
    """practice.md 5: one variable at a time, then a nasty pair; stall not the limit; a refusal."""
    assert {case.says for case in deck.cases} >= {Says.REDUCTION, Says.COVERED_BANK, Says.MANUAL_VNE, Says.REFUSED}
    first = deck.cases[0]
    assert first.start_text == "2,006 lb, Hp 8,000 ft, +30 °C, level, rotor 100 %"
    assert first.change_text == "30° of bank"
    assert first.changed == "bank"
    assert first.start.load_factor == 1.0
    assert first.condition == first.start.with_(bank="30 deg")
    pair = next(case for case in deck.cases if case.start.rotor_speed == pytest.approx(0.97))
    assert pair.condition.load_factor > 1.15
    assert next(case for case in deck.cases if case.says is Says.REFUSED).change_text == "\u221223 °C"
    low = next(case for case in deck.cases if case.changed == "qnh")
    # 18 hPa at 30 ft each (practice.md 3's Corrant: 8,640 ft on 990 hPa is 9,281 ft, 23 hPa for 641 ft: 28 each)
    assert (low.condition.pressure_altitude - low.start.pressure_altitude) / 0.3048 == pytest.approx(18 * 28, abs=15)


FAULTS = [
    ('title = "Pelquill', 'tilte = "Pelquill', "deck.tilte", "did you mean title?"),
    ('change = { bank = "30 deg" }', 'change = { bank = "30 deg", rotor_speed = "97 %" }', ".change", "one change"),
    ('change = { bank = "30 deg" }', "change = { }", ".change", "one change"),
    ('change = { bank = "30 deg" }', 'change = { bnak = "30 deg" }', ".change.bnak", "did you mean bank?"),
    ('change = { bank = "30 deg" }', 'change = { bank = "0 deg" }', ".change.bank", "another value than at the start"),
    ('change = { bank = "30 deg" }', 'change = { bank = "85 deg" }', ".change", "0 to 80 deg"),
    ('mass = "2,006 lb", p', 'mass = "2006 lbs", p', ".start.mass", 'did you mean "2006 lb"?'),
    ('oat = "+30 degC" }', 'oat = "86 F" }', ".start.oat", "in Celsius"),
    (
        'pressure_altitude = "8,000 ft"',
        'elevation = "8,000 ft"',
        ".start",
        "add pressure_altitude (or elevation with qnh)",
    ),
    ('says = "covered bank"', 'says = "stall"', ".says", '"covered bank"'),
    ('says = "covered bank"', 'says = "manual VNE"', ".says", "At most 20°"),
    (
        'least_reduction = "10 kt"',
        'least_reduction = "5 kt"',
        ".least_reduction",
        "10 kt or more, as the tool says today",
    ),
    ('least_reduction = "10 kt"\n', "", ".least_reduction", "given where says is"),
    ('most_bank = "20 deg"', 'most_bank = "25 deg"', ".most_bank", "20 deg or less, as the tool says today"),
    ('most_bank = "20 deg"\n', "", ".most_bank", "given where says is"),
    ('says = "manual VNE"', 'says = "manual VNE"\nleast_reduction = "0 kt"', ".least_reduction", "only there"),
    ('name = "Rotor at the bottom of the green"', 'name = "Hot day, heaviest, the briefed turn"', ".name", "once"),
    ("Show me the entry", "Ask J. Smith for the entry", ".prompt", "no person's data"),
    ("Show me the entry", "Ring +22 607 123 4567 for the entry", ".prompt", "no person's data"),
    ("The answer is another plan.", "Satisfactory if they see it.", ".teaching", "no results"),
    ('prompt = "What is VNE now?', f'prompt = "{"x" * 400} What?', ".prompt", ""),
    ('teaching = "Where', 'lesson = "Where', ".lesson", ""),
]


@pytest.mark.parametrize(("old", "new", "key", "words"), FAULTS, ids=[f"{new[:40]}" for _, new, _, _ in FAULTS])
def test_each_fault_names_its_place_and_what_is_permitted(brief, operator, old, new, key, words):
    replaced(brief / "deck.toml", (old, new))
    found = faults(brief, operator)
    assert [fault for fault in found if fault.key.endswith(key) and words in str(fault)], found
    assert len(found) <= 2
    assert found[0].line > 0


def test_every_fault_at_once(brief, operator):
    replaced(brief / "deck.toml", *((old, new) for old, new, *_ in (FAULTS[0], FAULTS[6], FAULTS[17])))
    assert [fault.key.rsplit(".", 1)[-1] for fault in faults(brief, operator)] == ["tilte", "mass", "prompt"]


@pytest.mark.parametrize("says", ["refused", "manual VNE"])
def test_a_deck_without_a_case_of_judgement_is_refused(brief, operator, says):
    path = brief / "deck.toml"
    head, *cases = re.split(r"(?=\[\[case\]\])", path.read_text(encoding="utf-8"))
    path.write_text(head + "".join(case for case in cases if f'says = "{says}"' not in case), encoding="utf-8")
    (fault,) = faults(brief, operator)
    assert fault.read == f'no case that says "{says}"'


def test_an_old_deck_does_not_teach_an_old_number(brief, operator):
    """The manual's chart is revised downwards: the deck that rests on the old one is refused where it is looser."""
    chart = operator / "aircraft" / "pelquill-2t.toml"
    replaced(chart, ("86    77     69     61", "86    77     66     48"))
    keys = {fault.key for fault in faults(brief, operator)}
    assert "case (entry 2).least_reduction" in keys


def test_a_deck_is_part_of_what_is_signed_and_a_log_is_not(brief, operator):
    from briefkit.brief.identity import load_identity

    before = dict(seal_of(load_identity(brief)).parts)
    (brief / "evening.jsonl").write_text("{}\n")
    assert dict(seal_of(load_identity(brief)).parts) == before
    replaced(brief / "deck.toml", ("What is VNE now?", "What is VNE here?"))
    after = dict(seal_of(load_identity(brief)).parts)
    assert {name for name in before if before[name] != after[name]} == {"deck.toml"}


# --- generated -----------------------------------------------------------------------------------------------------

TYPES = [("pelquill-2t", ""), ("ormbrae-3f", ""), ("ormbrae-3f", "external load"), ("kvillarn-4h", "")]


@pytest.mark.slow
@pytest.mark.parametrize(("stem", "configuration"), TYPES)
@pytest.mark.parametrize("areas", [("corrant",), ("vellmark", "ysbrane")])
def test_a_generated_deck_reads_back_whatever_the_type(operator, brief, stem, configuration, areas):
    aircraft, operation = load_aircraft(operator / "aircraft" / f"{stem}.toml", configuration), load_operation(operator)
    text = generate(aircraft, operation, *areas)
    (brief / "deck.toml").write_text(text, encoding="utf-8")
    deck = load_deck(brief, aircraft)
    fleet = operation.entry_for(aircraft)
    assert fleet is not None
    hot = deck.cases[0]
    assert hot.start.mass == fleet.masses[0].value
    assert hot.condition.load_factor == pytest.approx(1.0 / math.cos(fleet.brief_bank.value))
    assert deck.answers_before(hot).manual.vne is not None
    drooped = [case for case in deck.cases if case.changed == "rotor_speed"]
    assert [case.condition.rotor_speed for case in drooped] == [aircraft.limits.rotor_on[0].value]
    calm = [case for case in deck.cases if "not what decides" in case.name or "decides alone" in case.name]
    assert [deck.answers(case).computed.says for case in calm] == [Says.MANUAL_VNE]
    outside = deck.cases[-1]
    assert deck.answers_before(outside).manual.vne is not None  # just outside: the start is on the chart
    assert deck.answers(outside).manual.vne is None


def test_each_base_that_can_be_flown_has_its_hot_day(operator):
    """Sundreth at +47 is hotter than the 2T's chart: no case is made of it."""
    operation = load_operation(operator)
    text = generate(load_aircraft(operator / "aircraft" / "pelquill-2t.toml"), operation)
    hot = [case["name"].split(":")[0] for case in tomllib.loads(text)["case"] if "hot day" in case["name"]]
    flown = [area.name for key, area in operation.work_areas.items() if key not in ("sundreth", "ysbrane_winter")]
    assert [name for name in hot if "winter" not in name] == flown


def test_the_cold_case_is_cold_where_it_can_be(operator):
    aircraft, operation = load_aircraft(operator / "aircraft" / "kvillarn-4h.toml"), load_operation(operator)
    cases = tomllib.loads(generate(aircraft, operation, "ysbrane"))["case"]
    (cold,) = (case for case in cases if "not what decides" in case["name"])
    assert cold["start"]["oat"] == "-38 degC"
    assert cold["start"]["mass"] == "3,350 kg"  # the heaviest at which stall asks for nothing
    assert cold["change"] == {"bank": "30 deg"}
    assert cases[-1]["change"] == {"oat": "-43 degC"}  # the chart ends at -40


def test_a_warm_area_s_cold_case_goes_to_the_chart_s_cold_end(operator):
    """Vellmark's records end at +10: the case is set where the 2T's chart ends, -20."""
    aircraft, operation = load_aircraft(operator / "aircraft" / "pelquill-2t.toml"), load_operation(operator)
    cases = tomllib.loads(generate(aircraft, operation, "vellmark"))["case"]
    (cold,) = (case for case in cases if "not what decides" in case["name"])
    assert cold["start"]["oat"] == "-20 degC"


@pytest.mark.parametrize(
    ("stem", "area", "coldest", "tip"),
    [
        ("kvillarn-4h", "ysbrane", None, True),  # -38: the invented 4H's chart falls from 145 to 129 towards it
        ("kvillarn-4h", "vellmark", "+5 degC", False),  # the same chart, where it does not fall
        ("pelquill-2t", "vellmark", None, False),  # -20, below freezing, and the chart rises to its cold end
    ],
)
def test_the_tip_is_taught_only_where_the_manual_s_chart_says_so(operator, monkeypatch, stem, area, coldest, tip):
    aircraft, operation = load_aircraft(operator / "aircraft" / f"{stem}.toml"), load_operation(operator)
    if coldest:
        days = list(generate_module._cold_days(aircraft, operation.entry_for(aircraft), [operation.work_areas[area]]))
        mild = [(where, day | {"oat": coldest, "mass": "2,600 kg"}) for where, day in days[:1]]
        monkeypatch.setattr(generate_module, "_cold_days", lambda *_: iter(mild))
    cases = tomllib.loads(generate(aircraft, operation, area))["case"]
    (calm,) = (case for case in cases if "not what decides" in case["name"])
    assert ("advancing tip comes first" in calm["teaching"]) is tip
    assert ("VNE still limits" in calm["teaching"]) is not tip
    assert "not room to go faster" in calm["teaching"]
    if coldest:
        assert calm["start"]["oat"] == coldest


def test_nothing_is_drawn_from_the_name_of_a_type(operator):
    operation = load_operation(operator)
    path = operator / "aircraft" / "kvillarn-4h.toml"
    before = generate(load_aircraft(path), operation, "ysbrane")
    replaced(path, ('name = "Kvillarn 4H"', 'name = "Something 9Z"'))
    assert generate(load_aircraft(path), operation, "ysbrane") == before.replace("Kvillarn 4H", "Something 9Z")


@pytest.mark.slow
def test_the_roll_is_the_handbook_s_mirrored(operator):
    """G22, G23: FAA-H-8083-21B ch. 2 and 11, "usually to the left"; a clockwise rotor mirrors it."""
    operation = load_operation(operator)
    left = generate(load_aircraft(operator / "aircraft" / "pelquill-2t.toml"), operation, "vellmark")
    right = generate(load_aircraft(operator / "aircraft" / "kvillarn-4h.toml"), operation, "vellmark")
    assert "roll, usually left" in left
    assert "usually right" not in left
    assert "roll, usually right" in right
    assert "usually left" not in right


@pytest.mark.slow
def test_a_written_deck_is_never_written_over(operator, brief):
    (brief / "deck.toml").unlink()
    path = write_deck(brief)
    text = path.read_text(encoding="utf-8")
    assert "Vellmark work area" in text
    assert "Harl" not in text
    with pytest.raises(BuildError, match="nothing is written over"):
        write_deck(brief)
    assert path.read_text(encoding="utf-8") == text
    with pytest.raises(BuildError, match="no work area valmark"):
        write_deck(brief, "valmark")
