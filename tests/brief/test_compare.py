"""What changed between two revisions, and which figures became less conservative."""

from __future__ import annotations

import shutil
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from briefkit import units
from briefkit.aircraft.operation import load_operation
from briefkit.brief.compare import Difference, Revision, compare, explained, relaxed, revision_of
from briefkit.brief.identity import load_brief
from briefkit.brief.register import Turn


@pytest.fixture
def revisions(complete: Path, tmp_path: Path):
    """The old folder, the new one, and a function that compares them; the table of turns is computed once a side."""
    new = Path(shutil.copytree(complete, tmp_path / "new")) / "vellmark-2t"
    return (
        complete / "vellmark-2t",
        new,
        lambda **kinds: compare(revision_of(complete / "vellmark-2t"), revision_of(new)),
    )


def named(found: list[Difference]) -> dict[str, tuple[str, str, bool]]:
    return {one.name: (one.old, one.new, one.less_conservative) for one in found}


@pytest.mark.slow
def test_two_of_a_kind_differ_in_nothing(revisions) -> None:
    _, _, differences = revisions
    assert differences() == []


CHART_ROW = "6,000        105    96     88     80"


@pytest.mark.slow
def test_a_raised_vne_cell_is_less_conservative_and_a_lowered_one_is_not(revisions, signing) -> None:
    """G37: cells. The manual's own figures are 105, 96, 88, 80 KIAS."""
    _, new, differences = revisions
    aircraft = new.parent / "aircraft" / "pelquill-2t.toml"
    signing.edit(aircraft, (CHART_ROW, "6,000        105    97     87     80"))
    found = named(differences())
    assert found["VNE power on, row 6,000, column 0"] == ("96 KIAS", "97 KIAS", True)
    assert found["VNE power on, row 6,000, column +20"] == ("88 KIAS", "87 KIAS", False)
    cells = [name for name in found if name.startswith("VNE power on")]
    assert len(cells) == 2


@pytest.mark.slow
def test_a_row_left_out_raises_what_is_read_between_its_neighbours(revisions, signing) -> None:
    """Halfway from 4,000 to 8,000 ft: 112 and 95 make 103.5, under the printed 105; 106 and 87 make 96.5, over 96."""
    _, new, differences = revisions
    aircraft = new.parent / "aircraft" / "pelquill-2t.toml"
    signing.edit(aircraft, (CHART_ROW + "\n", ""))
    found = named(differences())
    assert found["VNE power on, row 6,000, column -20"] == ("105 KIAS", "103.5 KIAS", False)
    assert found["VNE power on, row 6,000, column 0"] == ("96 KIAS", "96.5 KIAS", True)


def test_a_chart_that_reaches_further_is_less_conservative(revisions, signing) -> None:
    _, new, differences = revisions
    aircraft = new.parent / "aircraft" / "pelquill-2t.toml"
    signing.edit(
        aircraft, ("10,000        86    77     69     61", "10,000        86    77     69     61\n11,000  80 72 64 56")
    )
    assert named(differences())["VNE power on, row 11,000, column 0"] == ("not on the chart", "72 KIAS", True)


def test_interpolating_where_the_lower_entry_held_is_less_conservative(revisions, signing) -> None:
    old, _, differences = revisions
    signing.edit(
        old.parent / "aircraft" / "pelquill-2t.toml", ('reading = "interpolate"', 'reading = "next lower VNE"')
    )
    found = named(differences())
    assert found["VNE power on, between entries"] == ("next lower VNE", "interpolate", True)


@pytest.mark.slow
@pytest.mark.parametrize(
    ("old", "new", "name", "less"),
    [
        ('constant = "85 kt"', 'constant = "88 kt"', "VNE power off, row 0, column -20", True),
        ('constant = "85 kt"', 'constant = "80 kt"', "VNE power off, row 0, column -20", False),
        ('max_mass = "2,006 lb"', 'max_mass = "2,050 lb"', "limits, max_mass", True),
        ('min_temperature = "-30 degC"', 'min_temperature = "-25 degC"', "limits, min_temperature", False),
        ('isa_deviation = "35 degC"', 'isa_deviation = "37 degC"', "limits, isa_deviation", True),
        ('rotor_on = ["97 %"', 'rotor_on = ["96 %"', "limits, rotor_on, lowest", True),
        ('"102 %"]', '"101 %"]', "limits, rotor_on, highest", False),
        ('"54 kt"', '"52 kt"', "limits, climb_speed", True),
        ("2,006    7,250", "2,006    7,350", "hover OGE, 2,006 lb, 0", True),
    ],
)
def test_limits_each_have_a_safer_side(revisions, signing, old: str, new: str, name: str, less: bool) -> None:
    _, folder, differences = revisions
    signing.edit(folder.parent / "aircraft" / "pelquill-2t.toml", (old, new))
    assert named(differences())[name][2] is less


def test_a_smaller_reduction_and_a_steeper_bank_are_less_conservative(complete: Path) -> None:
    """G37: the table of turns, at every mass either revision prints, the heavier line holding in between."""
    brief = load_brief(complete / "vellmark-2t")
    old = Revision(brief, (Turn("2,006 lb", 20, 10), Turn("1,800 lb", 30, 10), Turn("1,700 lb", 30, 0)))
    new = Revision(brief, (Turn("2,006 lb", 25, 10), Turn("1,900 lb", 30, 5), Turn("1,700 lb", 30, 5)))
    found = named(compare(old, new))
    assert found == {
        "turn at 2,006 lb": ("up to 20 deg, VNE less 10 kt", "up to 25 deg, VNE less 10 kt", True),
        "turn at 1,900 lb": ("up to 20 deg, VNE less 10 kt", "up to 30 deg, VNE less 5 kt", True),
        "turn at 1,800 lb": ("up to 30 deg, VNE less 10 kt", "up to 30 deg, VNE less 5 kt", True),
        "turn at 1,700 lb": ("up to 30 deg, VNE", "up to 30 deg, VNE less 5 kt", False),
    }


@pytest.mark.parametrize(
    ("was", "now", "less"),
    [
        ((0, 0), (30, 10), True),  # no turn before
        ((30, 10), (0, 0), False),  # no turn now
        ((20, 10), (25, 15), True),  # steeper, though slower
        ((25, 10), (20, 5), True),  # less off VNE, though flatter
        ((25, 10), (20, 10), False),
    ],
)
def test_no_turn_is_the_safest_row(complete: Path, was: tuple[int, int], now: tuple[int, int], less: bool) -> None:
    brief = load_brief(complete / "vellmark-2t")
    (found,) = compare(Revision(brief, (Turn("910 kg", *was),)), Revision(brief, (Turn("910 kg", *now),)))
    assert found.less_conservative is less


ROWS = st.lists(
    st.tuples(st.integers(1300, 2006), st.sampled_from([0, 10, 20, 30]), st.sampled_from([0, 5, 10, 15])),
    min_size=1,
    max_size=4,
    unique_by=lambda row: row[0],
)


def row_at(rows: list[tuple[int, int, int]], mass: int) -> tuple[int, int]:
    """The rule of the page in other words: walk down the printed lines, the last one not lighter holds."""
    held = (0, 0)
    for pounds, bank, reduction in sorted(rows, reverse=True):
        if pounds >= mass:
            held = (bank, reduction)
    return held


@pytest.mark.slow
@given(old=ROWS, new=ROWS)
@settings(max_examples=40, deadline=None)
def test_whatever_mass_is_relaxed_some_line_says_so(two_brief, old, new) -> None:
    """G37 over every mass in pounds: a relaxed one is never passed over, and nothing is called so that is not."""
    one, two = (
        Revision(two_brief, tuple(Turn(f"{m} lb", b, r if b else 0) for m, b, r in rows)) for rows in (old, new)
    )
    loose = False
    for mass in {0, *(m + d for m, _, _ in (*old, *new) for d in (-1, 0, 1))}:
        (bank, less), (bank_now, less_now) = row_at(old, mass), row_at(new, mass)
        less, less_now = less if bank else 0, less_now if bank_now else 0
        loose |= bank_now > bank or (bank > 0 and bank_now > 0 and less_now < less)
    assert bool(relaxed(one, two)) is loose


@pytest.fixture(scope="module")
def two_brief(examples: Path):
    return load_brief(examples / "vellmark-2t")


@pytest.mark.slow
def test_words_dates_sources_and_cells_are_listed(revisions, signing, nb) -> None:
    _, new, differences = revisions
    signing.edit(new / "brief.toml", ("2032-02-29", "2031-12-31"), ("OM-C rev 9", "OM-C rev 10"))
    signing.edit(new.parent / "operation.toml", ('brief_bank = "30 deg"  ', 'brief_bank = "25 deg"  '))
    nb.write(new / "brief.ipynb", nb.text("# Why we slow down\n\nHeavy, high, cold."), nb.code(nb.slider))
    found = named(differences())
    assert found["expires"] == ("2032-02-29", "2031-12-31", False)
    assert found["brief_bank"] == ("30 deg", "25 deg", False)
    assert found["notebook cell 1"] == ("Heavy, high, hot.", "Heavy, high, cold.", False)
    assert "OM-C rev 10" in found["basis"][1]
    # At 25 degrees crews were told to be 10 kt below VNE, and are now told 5.
    assert found["turn at 1,800 lb"] == ("up to 30 deg, VNE less 10 kt", "up to 25 deg, VNE less 5 kt", True)


def test_a_reason_answers_the_figures_it_names_and_no_others(complete: Path, signing) -> None:
    path = complete / "vellmark-2t" / "brief.toml"
    reason = 'text = "First issue"\nfigures = ["VNE power on, row 6,000", "turn at 1,800 lb"]\nreason = "manual rev 5"'
    signing.edit(path, ('text = "First issue"', reason))
    brief = load_brief(path.parent)
    for name, why in (
        ("VNE power on, row 6,000, column 0", "manual rev 5"),
        ("VNE power on, row 8,000, column 0", ""),
        ("turn at 1,800 lb", "manual rev 5"),
        ("turn at 1,800 lbs more", ""),
    ):
        assert explained(brief, Difference(name, "1", "2", True)) == why
    signing.edit(path, ("revision = 0\ntext", "revision = 7\ntext"))
    assert explained(load_brief(path.parent), Difference("turn at 1,800 lb", "1", "2", True)) == ""


def test_units_of_another_airspeed_indicator_are_converted() -> None:
    """One knot is 1.852 km/h (definition): 10 kt off VNE is more than 10 km/h off it."""
    assert units.from_si(units.to_si(10.0, "speed", "kt"), "speed", "km/h") == pytest.approx(18.52)


# -- legs: along them the lines of section 2 become lighter ----------------------------------------------------------

BURN = 'value = "66 lb/h", spread = "10 %"'
SURVEY = "leg Vellmark survey, full tanks"
WHOLE = "2,006 lb at take-off, fuel 183 lb, reserve 33 lb, in vellmark (OM-C 5.1 rev 9)"


@pytest.fixture
def edited(two_brief, examples: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch):
    """What compare finds after edits of the operation file; charts and turns stay as they are, and are not read."""
    monkeypatch.setattr("briefkit.brief.compare._vne", lambda *_: ())

    def found(*edits: tuple[str, str], back: bool = False) -> dict[str, tuple[str, str, bool]]:
        text = (examples / "operation.toml").read_text(encoding="utf-8")
        for was, now in edits:
            assert was in text
            text = text.replace(was, now, 1)
        (tmp_path / "operation.toml").write_text(text, encoding="utf-8")
        new = Revision(replace(two_brief, operation=load_operation(tmp_path)), ())
        old = Revision(two_brief, ())
        return named(compare(new, old) if back else compare(old, new))

    return found


@pytest.mark.parametrize(
    ("typed", "shown", "less"),
    [
        # The lower end of the burn is what counts: 59.4 lb/h of 66 give or take 6.6, by hand.
        ('"66 lb/h", spread = "2 %"', "66 lb/h, give or take 1.32 (at least 64.68 lb/h)", True),
        ('"60 lb/h", spread = "0.1 lb/h"', "60 lb/h, give or take 0.1 (at least 59.9 lb/h)", True),
        ('"76 lb/h", spread = "30 lb/h"', "76 lb/h, give or take 30 (at least 46 lb/h)", False),
        ('"76 lb/h", spread = "10 %"', "76 lb/h, give or take 7.6 (at least 68.4 lb/h)", True),
        ('"30 kg/h", spread = "3.1 kg/h"', "30 kg/h, give or take 3.1 (at least 26.9 kg/h)", False),  # 59.3 lb/h
    ],
)
def test_a_burn_is_compared_at_its_lower_end_and_shown_with_its_spread(edited, typed, shown, less) -> None:
    found = edited((BURN, f"value = {typed}"))
    assert found["fuel_burn"] == ("66 lb/h, give or take 6.6 (at least 59.4 lb/h)", shown, less)
    assert edited((BURN, f"value = {typed}"), back=True)["fuel_burn"][2] is not less


@pytest.mark.parametrize(
    ("was", "now", "name", "less"),
    [
        ('take_off_mass = "2,006 lb"', 'take_off_mass = "1,800 lb"', "take-off mass", True),
        ('reserve = "33 lb"', 'reserve = "60 lb"', "reserve", False),
        ('fuel = "183 lb"', 'fuel = "190 lb"', "fuel", False),
        ("OM-C 5.1 rev 9", "OM-C 5.1 rev 10", "source", False),
    ],
)
def test_each_figure_of_a_leg_is_listed(edited, was, now, name, less) -> None:
    plain = [text.rpartition(" = ")[2].strip('"') for text in (was, now)]
    assert edited((was, now)) == {f"{SURVEY}, {name}": (*plain, less)}
    back = edited((was, now), back=True)[f"{SURVEY}, {name}"]
    assert back == (*reversed(plain), name == "reserve")


def test_a_leg_that_is_new_is_less_conservative_and_one_that_is_gone_is_not(edited) -> None:
    """Without it the line of the take-off mass held all the way; a leg under a new name is a new one."""
    renamed = ('name = "Vellmark survey, full tanks"', 'name = "Survey"')
    assert edited(renamed) == {SURVEY: (WHOLE, "", False), "leg Survey": ("", WHOLE, True)}
    # Of this aircraft in another work area it is not on the page; another aircraft's never is.
    moved = ('work_area = "vellmark"\ntake_off_mass = "2,006 lb"', 'work_area = "harl"\ntake_off_mass = "2,006 lb"')
    assert edited(moved) == {SURVEY: (WHOLE, "in harl, not on this page", False)}
    assert edited(moved, back=True) == {SURVEY: ("in harl, not on this page", WHOLE, True)}
    assert edited(moved, renamed)[SURVEY] == (WHOLE, "", False)
    assert edited(('take_off_mass = "3,350 kg"', 'take_off_mass = "3,100 kg"')) == {}


def test_two_legs_of_one_name_are_told_apart(edited, examples: Path) -> None:
    text = (examples / "operation.toml").read_text(encoding="utf-8")
    first = text[text.index("[[legs]]") : text.rindex("[[legs]]")]
    lighter = first.replace("2,006 lb", "1,800 lb")
    found = edited((first, first + lighter))
    assert list(found) == [f"{SURVEY} (2)"]
    assert found[f"{SURVEY} (2)"][2] is True


def test_a_spread_that_alone_changed_is_said(edited) -> None:
    wider = ('brief_bank = "30 deg"  ', 'brief_bank = { value = "30 deg", spread = "1 deg" }  ')
    assert edited(wider) == {"brief_bank": ("30 deg", "30 deg, wider spread", False)}
    assert edited(wider, back=True) == {"brief_bank": ("30 deg", "30 deg, narrower spread", False)}
