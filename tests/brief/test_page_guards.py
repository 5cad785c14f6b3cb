"""Guards of the page by number, changes with their bars, sources with their links, and files that would lead astray."""

from __future__ import annotations

import re
from dataclasses import replace

import pytest

from briefkit.brief import export, prose
from briefkit.brief.build import build
from briefkit.brief.crew_page import crew_page
from briefkit.brief.export import mark_changes
from briefkit.brief.harden import LARGEST_PAGE, harden
from briefkit.brief.identity import Brief, Change, load_brief
from briefkit.brief.pages import CrewPage, Section, Source, render
from briefkit.brief.run import Words
from briefkit.brief.sources import link, sources
from briefkit.envelope import cues
from briefkit.errors import BuildError


@pytest.fixture(scope="module")
def briefs(examples) -> dict[str, Brief]:
    return {name: load_brief(examples / name) for name in ("vellmark-2t", "corrant-3f", "ysbrane-4h")}


@pytest.fixture(scope="module")
def pages(briefs) -> dict[str, CrewPage]:
    return {name: crew_page(brief, "0") for name, brief in briefs.items()}


def words_of(*parts: Section) -> str:
    cells = [" ".join(row) for part in parts if part.grid for row in part.grid.rows]
    said = [" ".join((part.heading, *part.before, *part.points, *part.after)) for part in parts]
    return " ".join(said + cells)


@pytest.mark.slow
@pytest.mark.parametrize("name", ["vellmark-2t", "corrant-3f", "ysbrane-4h"])
def test_guard_g24_recovery_is_the_manual_s_or_the_handbook_s_with_its_edition(briefs, pages, name):
    """FAA-H-8083-21B ch. 11: usually the collective first; neither aft nor forward cyclic."""
    start = words_of(pages[name].front[3])
    assert "FAA-H-8083-21B ch. 11" in start
    assert "Usually first: collective down" in start
    assert "Do not pull aft or push forward on the cyclic" in start
    assert "Both aft and forward cyclic raise the angle of attack" in words_of(*pages[name].recognition)
    brief = briefs[name]
    own = replace(brief.aircraft, recovery="Lower the lever.", recovery_source="flight manual 3-2 rev 4")
    theirs = words_of(crew_page(replace(brief, aircraft=own), "0").front[3])
    assert "Lower the lever. flight manual 3-2 rev 4" in theirs
    assert "Usually first" not in theirs  # lists are never merged


def test_guard_g25_two_blades_always_carry_the_low_g_caution(pages):
    assert "Two blades: low g" in words_of(*pages["vellmark-2t"].recognition)
    for name in ("corrant-3f", "ysbrane-4h"):
        assert "Two blades: low g" not in words_of(*pages[name].recognition)


def test_a_place_has_one_height_on_a_page_and_a_sentence_its_masses(pages):
    """Heights of the area's top are rounded up wherever they stand; a sheet without rows says for which masses."""
    for name, top, mass in (("corrant-3f", "3,183 m", "2,380 kg"), ("ysbrane-4h", "2,203 ft", "3,350 kg")):
        turn = words_of(pages[name].front[1])
        assert f"to {top}, " in turn
        assert f"Every mass up to {mass}, with all it carries." in turn
        assert f"Hover at {top}, " in words_of(*pages[name].recognition)
    assert "interpolate (manual 2-4 rev 4), and round down." in pages["vellmark-2t"].front[0].grid.beside[0]


def test_a_section_that_changed_in_this_revision_carries_a_bar(briefs, pages):
    identity = briefs["vellmark-2t"].identity
    changed = replace(
        identity, revision=2,
        changes=(Change(1, "x", sections=("3",)), Change(2, "y", sections=("2", "cautions", "The manual’s chart"))),
    )  # fmt: skip
    marked = mark_changes(pages["vellmark-2t"], changed)
    parts = (*marked.front, *marked.recognition, *marked.analysis, *marked.control)
    assert [part.heading[:9] for part in parts if part.changed] == ["2. For aw", "Cautions", "The manua"]
    html = harden(render(marked, ()))
    assert len(re.findall(r'class="part[^"]* changed"', html)) == 3
    wrong = replace(changed, changes=(Change(2, "y", sections=("7",)),))
    with pytest.raises(BuildError, match=r"brief\.toml: changes: no section '7' on the page; there is: 1\. VNE"):
        mark_changes(pages["vellmark-2t"], wrong)


def test_the_list_holds_what_this_brief_rests_on_and_nothing_else(briefs):
    """Each source once and numbered; no work area or aircraft of another brief."""
    for name, brief in briefs.items():
        listed = sources(brief)
        assert [source.number for source in listed] == list(range(1, len(listed) + 1))
        texts = [source.text for source in listed]
        assert len(texts) == len(set(texts))
        area = brief.operation.work_areas[brief.identity.work_area]
        assert {area.source, cues.HANDBOOK, brief.aircraft.vne.source, brief.aircraft.limits.climb_speed.source} <= {
            *texts
        }
        others = {one.source for one in brief.operation.work_areas.values()} - {area.source}
        assert not others & {*texts}, name


LISTED = (Source(1, "flight manual 2-4 rev 4", "VNE"), Source(2, "OM-B 2.3 rev 11", "masses"), Source(3, "a & b", "x"))


@pytest.mark.parametrize(
    ("written", "linked"),
    [
        ("<p>flight manual 2-4 rev 4</p>", '<p><a class="short" href="#source-1">flight manual 2-4 rev 4</a></p>'),
        ("<p>(manual 2-4 rev\u00a04)</p>", '<p>(<a class="short" href="#source-1">manual 2-4 rev\u00a04</a>)</p>'),
        ("<p>flight manual 2-4 rev 44, XOM-B 2.3 rev 11</p>", None),
        ('<p title="OM-B 2.3 rev 11">x</p>', None),
        ("<h1>OM-B 2.3 rev 11</h1>", None),
        ("<svg><text>OM-B 2.3 rev 11</text></svg>", None),
        ('<tr id="source-2"><td>OM-B 2.3 rev 11</td></tr>', None),
        ('<caption class="said">OM-B 2.3 rev 11</caption>', None),
        ("<td>OM-B 2.3 rev 11</td>", '<td><a class="short" href="#source-2">OM-B 2.3 rev 11</a></td>'),
        ("<p>a &amp; b</p>", None),  # two letters are no name of a document
    ],
)  # fmt: skip
def test_every_mention_of_a_source_leads_to_its_line(written, linked):
    assert link(written, LISTED) == (linked or written)


def test_a_picture_too_large_is_not_even_read(tmp_path):
    with (tmp_path / "a.png").open("wb") as file:
        file.truncate(prose.LARGEST_PICTURE + 1)
    with pytest.raises(BuildError, match=r"the picture 'a\.png' is larger than 1,000,000 bytes"):
        prose.set_words(Words("code cell 1", "![x](a.png)", {}), tmp_path)
    assert prose.LARGEST_PICTURE < LARGEST_PAGE


@pytest.mark.parametrize("file", ["brief.ipynb", "brief.toml"])
def test_a_link_does_not_lead_out_of_the_operator_folder(operator, brief, tmp_path, file, today):
    outside = tmp_path / "elsewhere"
    outside.mkdir()
    (brief / file).rename(outside / file)
    (brief / file).symlink_to(outside / file)
    (result,) = build([brief], tmp_path / "out", today)
    assert f"{file}: a link out of the operator folder" in result.error
    with pytest.raises(BuildError, match="a link out of the operator folder"):
        export.export(brief / "brief.ipynb", today)


def test_a_link_within_the_operator_folder_may_stand(operator, brief, tmp_path):
    (brief / "brief.ipynb").rename(operator / "shared.ipynb")
    (brief / "brief.ipynb").symlink_to(operator / "shared.ipynb")
    identity = load_brief(brief).identity
    export.stays_inside(identity)  # raises where a link leads out, as the test above
    assert identity.notebook.resolve() == (operator / "shared.ipynb").resolve()
