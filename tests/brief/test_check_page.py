"""The crew's page held against its own rules before it is built."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from briefkit import units
from briefkit.aircraft.model import Hub, ManualSpeed
from briefkit.brief import check_page, recognition
from briefkit.brief.check import Level
from briefkit.brief.check_page import page_findings
from briefkit.brief.crew_page import table_of
from briefkit.brief.identity import load_brief


@pytest.fixture(scope="module")
def brief(examples: Path):
    return load_brief(examples / "vellmark-2t")


@pytest.fixture(scope="module")
def table(brief):
    return table_of(brief)


def test_the_example_page_keeps_its_rules(brief, table) -> None:
    assert page_findings(brief, table) == []


@pytest.mark.parametrize("off", [-0.02, 0.02, np.nan])
def test_a_level_answer_that_is_not_the_manuals_vne_blocks(brief, table, monkeypatch, off: float) -> None:
    """design.md 2, step 5: level at 100 % the answer is the manual's VNE by definition."""
    real = check_page.equivalent_vnes

    def wrong(aircraft, conditions):
        answers = real(aircraft, conditions)
        ias = answers.ias.copy()
        ias[3] += off
        return replace(answers, ias=ias)

    monkeypatch.setattr(check_page, "equivalent_vnes", wrong)
    (found,) = page_findings(brief, table)
    assert found.level is Level.BLOCKS
    assert found.text.startswith("level at ")


def test_a_page_without_its_cautions_blocks(brief, table, monkeypatch) -> None:
    """G24: the caution on aft and forward cyclic."""
    monkeypatch.setattr(recognition, "_CAUTIONS", ())
    monkeypatch.setattr(recognition, "cautions", lambda: recognition.Section("Cautions", points=("VNE governs.",)))
    assert [one.text for one in page_findings(brief, table)] == ["the page lacks the cautions"]


def test_two_blades_without_the_low_g_caution_block(brief, table, monkeypatch) -> None:
    """G25."""
    monkeypatch.setattr(recognition, "low_g", lambda aircraft: ())
    assert [one.text for one in page_findings(brief, table)] == ["the page lacks the low-g caution of two blades"]
    three = replace(brief.aircraft, rotor=replace(brief.aircraft.rotor, blades=3, hub=Hub.ARTICULATED))
    assert page_findings(replace(brief, aircraft=three), table) == []


def test_an_answer_under_the_manuals_rough_air_speed_is_for_the_chief_pilot(brief, table) -> None:
    """page.md 3: section 3 prints the manual's sentence and nothing else."""
    rough = ManualSpeed("Rough air", "100 KIAS", "turbulence", "flight manual 2-6", "100 kt", units.Speed.of(100, "kt"))
    (found,) = page_findings(replace(brief, aircraft=replace(brief.aircraft, speeds=(rough,))), table)
    assert (found.level, "under Rough air: 100 KIAS" in found.text) == (Level.NOTE, True)
    slow = replace(rough, speed=units.Speed.of(20, "kt"))
    assert page_findings(replace(brief, aircraft=replace(brief.aircraft, speeds=(slow,))), table) == []


def test_a_first_sheet_that_is_too_long_is_noted(brief, table) -> None:
    long = replace(table, rows=table.rows * 6)
    found = page_findings(brief, long)
    assert [one.level for one in found] == [Level.NOTE]
    assert "longer than one A5 sheet" in found[0].text
