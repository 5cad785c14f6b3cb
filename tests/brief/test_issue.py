"""Issuing and verifying: only a released page is registered, and a page somebody holds gets a plain answer."""

from __future__ import annotations

import datetime as dt
import io
import json
import re
import shutil
import zipfile
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from briefkit.brief.check import Level, findings, stands_against
from briefkit.brief.compare import compare, revision_of
from briefkit.brief.crew_page import table_of
from briefkit.brief.export import released
from briefkit.brief.harden import harden
from briefkit.brief.identity import Brief, load_brief
from briefkit.brief.index import Result, index_of, relist
from briefkit.brief.issue import State, digest, find_register, issue, opened, verify
from briefkit.brief.register import Issued, Register, load_register
from briefkit.brief.release import standing
from briefkit.brief.standing import DRAFT
from briefkit.errors import BriefkitError

DAY = dt.date(2030, 3, 20)
IN_FORCE = dt.date(2030, 6, 1)


def make(brief: Brief, day: dt.date) -> tuple[str, str, object]:
    """A page without the notebook's part, which needs a kernel."""
    known = standing(brief, day)
    identity = brief.identity
    page = (
        f"<html><title>{identity.number} rev {identity.revision}: {identity.title}</title>{known.seal.content}</html>"
    )
    return page, known.mark, known.table or table_of(brief)


@pytest.fixture
def issued(signed: Path, tmp_path: Path) -> tuple[Path, Path, Issued]:
    """A brief, its issued page, its line in the register."""
    entry, page = issue(signed, tmp_path / "out", DAY, make)
    return signed, page, entry


def revised(folder: Path, signing, *pairs: tuple[str, str], effective: str = "2030-07-01") -> Path:
    """The next revision, from the office's desk: other dates, a line of changes; signed anew."""
    path = folder / "brief.toml"
    text = path.read_text(encoding="utf-8")
    number = load_brief(folder).identity.revision
    signing.edit(path, (f"revision = {number}\nissued", f"revision = {number + 1}\nissued"))
    old = next(line for line in text.split("\n") if line.startswith("effective"))
    change = f'[[changes]]\nrevision = {number + 1}\ntext = "Next"\n'
    signing.edit(
        path, (old, f"effective = {effective}"), ("[[changes]]\nrevision = 0", f"{change}\n[[changes]]\nrevision = 0")
    )
    for file, *pair in pairs:
        signing.edit(folder.parent / file, tuple(pair))
    return signing(folder)


@pytest.mark.slow
def test_a_signed_brief_is_issued_registered_and_archived(issued) -> None:
    folder, page, entry = issued
    register = load_register(folder.parent)
    assert register.issued == (entry,)
    assert entry.page == digest(page.read_bytes())
    assert (entry.number, entry.revision, entry.brief, entry.registered) == ("NB-2T-001", 0, "vellmark-2t", DAY)
    assert [turn.mass for turn in entry.turns] == ["2,006 lb", "1,900 lb", "1,800 lb", "1,750 lb", "1,700 lb"]
    with zipfile.ZipFile(folder.parent / "issued" / "NB-2T-001-rev-0.zip") as archive:
        names = archive.namelist()
        assert archive.read("NB-2T-001.html") == page.read_bytes()
    made_from = {"aircraft/pelquill-2t.toml", "brief/brief.ipynb", "brief/brief.toml", "operation.toml"}
    assert {"NB-2T-001.html", *made_from} <= set(names)
    assert verify(page, register, IN_FORCE).state is State.AS_REGISTERED


@pytest.mark.slow
def test_the_register_and_the_archive_revoke_no_signature(issued) -> None:
    folder, _, _ = issued
    assert stands_against(findings(folder, IN_FORCE)) == []


@pytest.mark.slow
def test_an_archive_holds_no_outputs_and_no_metadata(signed: Path, tmp_path: Path) -> None:
    path = signed / "brief.ipynb"
    notebook = json.loads(path.read_text(encoding="utf-8"))
    notebook["cells"][1]["outputs"] = [{"output_type": "stream", "name": "stdout", "text": "secret"}]
    notebook["metadata"]["author"] = "secret"
    path.write_text(json.dumps(notebook), encoding="utf-8")
    issue(signed, tmp_path / "out", DAY, make)
    with zipfile.ZipFile(signed.parent / "issued" / "NB-2T-001-rev-0.zip") as archive:
        assert all(b"secret" not in archive.read(name) for name in archive.namelist())


def test_a_draft_is_never_issued(complete: Path, tmp_path: Path) -> None:
    """G35: nobody has signed."""
    folder = complete / "vellmark-2t"
    with pytest.raises(BriefkitError, match="DRAFT"):
        issue(folder, tmp_path / "out", DAY, make)
    assert not (complete / "register.toml").exists()
    assert not (tmp_path / "out").exists()


@pytest.mark.slow
def test_a_page_edited_after_signing_is_never_issued(signed: Path, tmp_path: Path, signing) -> None:
    """G36: swap after signing."""
    signing.edit(signed.parent / "operation.toml", ('"1,800 lb"', '"1,810 lb"'))
    with pytest.raises(BriefkitError, match="DRAFT"):
        issue(signed, tmp_path / "out", DAY, make)


@pytest.mark.slow
def test_a_file_changed_while_it_is_issued_stops_it(signed: Path, tmp_path: Path) -> None:
    """G36: between looking and writing."""

    def slow(brief: Brief, day: dt.date) -> tuple[str, str, object]:
        made = make(brief, day)
        (signed / "cases.csv").write_text("1")
        return made

    with pytest.raises(BriefkitError, match="changed while it was being issued"):
        issue(signed, tmp_path / "out", DAY, slow)
    assert not (signed.parent / "register.toml").exists()


@pytest.mark.slow
def test_a_revision_is_issued_once(issued, tmp_path: Path) -> None:
    folder, page, _ = issued
    before = page.read_bytes(), (folder.parent / "register.toml").read_bytes()
    with pytest.raises(BriefkitError, match="a changed page is a new revision"):
        issue(folder, tmp_path / "out", DAY, make)
    assert (page.read_bytes(), (folder.parent / "register.toml").read_bytes()) == before


def test_the_index_beside_an_issued_page_says_what_stands_there_now(signed: Path, tmp_path: Path) -> None:
    """The line of a draft, or of a brief that was not built, gives way; the others stay; it is told once."""
    out = tmp_path / "out"
    page, other = out / "NB-2T-001.html", Result(signed, out / "NB-9X-001.html", title="Other", mark=DRAFT)
    out.mkdir()
    (out / "NB-2T-001.deck.html").touch()
    draft = Result(signed, page, title="Old title", mark=DRAFT)
    failed = Result(signed, None, error="x")
    (out / "index.html").write_text(index_of((draft, other, failed)), encoding="utf-8")
    issue(signed, out, DAY, make)
    index = (out / "index.html").read_text(encoding="utf-8")
    lines = re.findall(r"<li>.*?</li>", index, re.DOTALL)
    assert [re.findall(r'href="(.*?)"', line)[0] for line in lines] == [page.name, "NB-9X-001.html"]
    assert (DRAFT in lines[0], DRAFT in lines[1]) == (False, True)
    assert "NB-2T-001.deck.html" in lines[0]
    assert "readback" not in lines[0]  # none stands there
    assert "Old title" not in index
    assert harden(index, neighbours=True) == index
    relist(out, signed, out / "NB-3Y-001.html", "<h1>Third</h1>")
    third = re.findall(r"<li>.*?</li>", (out / "index.html").read_text(encoding="utf-8"), re.DOTALL)
    assert third[:2] == lines
    assert "Third" in third[2]


def test_an_index_that_is_not_ours_is_left_alone(tmp_path: Path) -> None:
    relist(tmp_path, tmp_path, tmp_path / "NB-2T-001.html", "<h1>A</h1>")
    assert list(tmp_path.iterdir()) == []
    for content in (b"<ul><li>mine</li></ul>", b"\xff"):
        (tmp_path / "index.html").write_bytes(content)
        relist(tmp_path, tmp_path, tmp_path / "NB-2T-001.html", "<h1>A</h1>")
        assert (tmp_path / "index.html").read_bytes() == content


# --- the mark of a page ------------------------------------------------------------------------------------------


@pytest.mark.slow
def test_only_a_released_page_carries_no_mark(signed: Path, signing) -> None:
    """G35 and G36 on the page itself."""
    assert standing(load_brief(signed), IN_FORCE).mark == ""
    signing.edit(
        signed.parent / "aircraft" / "pelquill-2t.toml", ('climb_speed = { value = "54', 'climb_speed = { value = "55')
    )
    assert standing(load_brief(signed), IN_FORCE).mark == DRAFT


@pytest.mark.slow
def test_cells_that_were_not_saved_make_a_draft(signed: Path, nb) -> None:
    cells = [nb.text("Something else")]
    known = standing(load_brief(signed), IN_FORCE, cells)
    assert (known.mark, known.signed) == (DRAFT, {})


@pytest.mark.slow
def test_a_brief_loaded_before_an_edit_makes_a_draft(signed: Path, signing) -> None:
    brief = load_brief(signed)
    signing.edit(signed.parent / "operation.toml", ('"1,800 lb"', '"1,810 lb"'))
    signing(signed)
    assert standing(brief, IN_FORCE).mark == DRAFT
    assert standing(load_brief(signed), IN_FORCE).mark == ""


@pytest.mark.slow
@pytest.mark.parametrize(
    ("day", "mark"),
    [(dt.date(2032, 2, 28), ""), (dt.date(2032, 2, 29), "EXPIRED 29 Feb 2032: not for crews")],
)
def test_an_expired_page_says_so_large(signed: Path, day: dt.date, mark: str) -> None:
    """G15: on every sheet in its running line, and in the page's own heading."""
    from briefkit.brief.crew_page import crew_page

    brief = load_brief(signed)
    page = crew_page(brief, "0.1.0", standing(brief, day))
    assert page.mark == mark
    assert page.heading.startswith("EXPIRED 29 Feb 2032: ") is bool(mark)
    assert "expires 29 Feb 2032" in page.running


@pytest.mark.slow
def test_release_refuses_expiry_beyond_policy(signed: Path, signing) -> None:
    """G15: 24 months from 1 April 2030 end on 1 April 2032."""
    signing.edit(signed / "brief.toml", ("expires = 2032-02-29", "expires = 2032-04-02"))
    signing(signed)
    assert standing(load_brief(signed), IN_FORCE).mark == DRAFT


@pytest.mark.slow
def test_a_revised_manual_makes_a_draft_of_a_signed_brief(signed: Path) -> None:
    """G14."""
    text = '[[documents]]\nname = "flight manual"\naircraft = "pelquill-2t"\nrevision = "{}"\n'
    (signed.parent / "register.toml").write_text(text.format("4"))
    assert standing(load_brief(signed), IN_FORCE).mark == ""
    (signed.parent / "register.toml").write_text(text.format("5"))
    assert standing(load_brief(signed), IN_FORCE).mark == DRAFT


# --- figures relaxed since the last issue ------------------------------------------------------------------------


RAISED = ("aircraft/pelquill-2t.toml", "8,000         95    87     79", "8,000         95    87     80")


@pytest.mark.slow
def test_a_relaxed_figure_needs_a_reason_before_release(issued, signing, tmp_path: Path) -> None:
    """G37: against what crews have in hand, from the archive of the last issue."""
    folder, _, _ = issued
    revised(folder, signing, RAISED)
    against = stands_against(findings(folder, IN_FORCE))
    texts = [one.text for one in against]
    assert {one.level for one in against} == {Level.REASON}
    assert "VNE power on, row 8,000, column +20: 79 KIAS -> 80 KIAS: less conservative" in texts
    with pytest.raises(BriefkitError, match="DRAFT"):
        issue(folder, tmp_path / "out", DAY, make)
    names = [text.partition(": ")[0] for text in texts]
    reason = f'text = "Next"\nfigures = {json.dumps(names)}\nreason = "flight manual rev 5 raised the chart"'
    signing.edit(folder / "brief.toml", ('text = "Next"', reason))
    signing(folder)
    assert stands_against(findings(folder, IN_FORCE)) == []
    known = standing(load_brief(folder), IN_FORCE)
    assert known.mark == ""
    assert {why for _, why in known.relaxed} == {"flight manual rev 5 raised the chart"}
    from briefkit.brief.control import changes

    grid = changes(load_brief(folder).identity, known).grid
    assert grid is not None
    cell = "VNE power on, row 8,000, column +20"
    assert (cell, "79 KIAS", "80 KIAS", "flight manual rev 5 raised the chart") in grid.rows


@pytest.mark.slow
def test_an_issued_revision_is_never_made_again_with_another_content(issued, signing) -> None:
    """G36 and G37: raising a cell and signing again under the old revision would pass the comparison by."""
    folder, _, _ = issued
    signing.edit(folder.parent / RAISED[0], RAISED[1:])
    signing(folder)
    (found,) = stands_against(findings(folder, IN_FORCE, page=False))
    assert (found.level, found.text) == (Level.BLOCKS, "rev 0 was issued on 2030-03-20 with another content")
    assert standing(load_brief(folder), IN_FORCE).mark == DRAFT
    register = folder.parent / "register.toml"
    signing.edit(register, ("revision = 0", "revision = 3"))
    assert "rev 3 was issued on 2030-03-20, this is rev 0" in [
        one.text for one in findings(folder, IN_FORCE, page=False)
    ]


@pytest.mark.slow
def test_a_more_conservative_revision_needs_none(issued, signing) -> None:
    folder, _, _ = issued
    lowered = (
        "aircraft/pelquill-2t.toml",
        "8,000         95    87     79     70",
        "8,000         95    87     78     70",
    )
    revised(folder, signing, lowered)
    texts = [one.text for one in stands_against(findings(folder, IN_FORCE))]
    # A flatter fall above 8,000 ft makes the equivalent level flight there relatively faster: only turns may relax.
    assert all(text.startswith("turn at") for text in texts)


@pytest.mark.slow
def test_an_archive_that_is_gone_or_altered_blocks(issued, signing) -> None:
    folder, _, _ = issued
    revised(folder, signing)
    archive = folder.parent / "issued" / "NB-2T-001-rev-0.zip"
    content = archive.read_bytes()
    with zipfile.ZipFile(io.BytesIO(content)) as old, zipfile.ZipFile(archive, "w") as new:
        for name in old.namelist():
            new.writestr(name, old.read(name) + (b" " if name.endswith(".html") else b""))
    for spoil in (lambda: None, lambda: archive.write_bytes(b"no archive"), archive.unlink):
        spoil()
        (found,) = stands_against(findings(folder, IN_FORCE))
        assert found.level is Level.BLOCKS
        assert found.text.startswith("the last issued revision cannot be read")


@pytest.mark.slow
def test_what_crews_were_told_is_what_the_page_printed(issued, signing) -> None:
    """G37: the rows of the issued page are on record; another version of briefkit cannot rewrite them."""
    folder, _, _ = issued
    path = folder.parent / "register.toml"
    printed = "1,800 lb: at most 30 deg, VNE less 10"
    signing.edit(path, (printed, "1,800 lb: at most 30 deg, VNE less 15"))
    with opened(folder.parent / "issued" / "NB-2T-001-rev-0.zip") as old:
        found = {one.name: one for one in compare(old, revision_of(folder))}
    assert found["turn at 1,800 lb"].less_conservative


# --- verify ------------------------------------------------------------------------------------------------------


@pytest.fixture
def held(tmp_path: Path) -> tuple[Path, Register]:
    """A page somebody holds, and a register with its line."""
    page = tmp_path / "held.html"
    page.write_text("<title>NB-2T-001 rev 0: Retreating-blade stall</title><p>VNE 87</p>", encoding="utf-8")
    entry = Issued(
        "NB-2T-001", 0, "Retreating-blade stall", "vellmark-2t", digest(page.read_bytes()), "b" * 64, DAY,
        dt.date(2030, 4, 1), dt.date(2032, 2, 29),
    )  # fmt: skip
    return page, Register(tmp_path / "register.toml", (), (entry,))


@pytest.mark.parametrize(
    ("day", "state"),
    [
        (dt.date(2030, 3, 31), State.NOT_YET),
        (dt.date(2030, 4, 1), State.AS_REGISTERED),
        (dt.date(2032, 2, 28), State.AS_REGISTERED),
        (dt.date(2032, 2, 29), State.EXPIRED),
        (dt.date(2040, 1, 1), State.EXPIRED),
    ],
)
def test_a_page_on_a_day(held: tuple[Path, Register], day: dt.date, state: State) -> None:
    assert verify(*held, day).state is state


@pytest.mark.slow
def test_a_page_replaced_by_a_later_revision(issued, signing, tmp_path: Path) -> None:
    folder, page, _ = issued
    held = Path(shutil.copy(page, tmp_path / "held.html"))
    revised(folder, signing)
    issue(folder, tmp_path / "out", IN_FORCE, make)
    register = load_register(folder.parent)
    before = verify(held, register, dt.date(2030, 6, 30))
    assert before.state is State.AS_REGISTERED
    assert "rev 1 replaces it on 2030-07-01" in before.text
    after = verify(held, register, dt.date(2030, 7, 1))
    assert (after.state, "rev 1" in after.text) == (State.SUPERSEDED, True)
    assert verify(held, register, dt.date(2033, 1, 1)).state is State.SUPERSEDED
    assert verify(page, register, dt.date(2030, 7, 1)).state is State.AS_REGISTERED


def test_a_withdrawn_page(held: tuple[Path, Register]) -> None:
    page, register = held
    withdrawn = replace(register, issued=(replace(register.issued[0], withdrawn=dt.date(2030, 5, 1)),))
    assert verify(page, withdrawn, dt.date(2030, 4, 30)).state is State.AS_REGISTERED
    assert verify(page, withdrawn, dt.date(2030, 5, 1)).state is State.WITHDRAWN


@given(data=st.data())
@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_any_change_of_the_page_is_found(held: tuple[Path, Register], data: st.DataObject) -> None:
    """One byte more, less or other, anywhere."""
    page, register = held
    whole = page.read_bytes()
    at = data.draw(st.integers(0, len(whole) - 1))
    byte = data.draw(st.integers(0, 255))
    kind = data.draw(st.sampled_from(["more", "less", "other"]))
    rest = {"more": bytes([byte]) + whole[at:], "less": whole[at + 1 :], "other": bytes([byte]) + whole[at + 1 :]}[kind]
    changed = page.with_name("changed.html")
    changed.write_bytes(whole[:at] + rest)
    verdict = verify(changed, register, IN_FORCE)
    same = changed.read_bytes() == whole
    assert (verdict.state is State.AS_REGISTERED) is same
    assert same or verdict.state in (State.ALTERED, State.NOT_REGISTERED)


def test_an_altered_page_is_told_from_a_strange_one(held: tuple[Path, Register], tmp_path: Path) -> None:
    page, register = held
    page.write_text(page.read_text(encoding="utf-8") + " ", encoding="utf-8")
    assert verify(page, register, IN_FORCE).state is State.ALTERED
    strange = tmp_path / "strange.html"
    for text in ("", "<title>NB-9X-001 rev 0: other</title>", "<title>NB-2T-001 rev 5: later</title>", "\x00\xff"):
        strange.write_bytes(text.encode("latin-1"))
        assert verify(strange, register, IN_FORCE).state is State.NOT_REGISTERED


@pytest.mark.slow
def test_the_register_is_found_above_the_page_or_named(issued, tmp_path: Path, monkeypatch) -> None:
    folder, page, entry = issued
    monkeypatch.chdir(tmp_path)
    inside = folder.parent / "pages" / "page.html"
    inside.parent.mkdir()
    shutil.copy(page, inside)
    for register in (
        find_register(inside, None),
        find_register(page, folder.parent),
        find_register(page, folder.parent / "register.toml"),
    ):
        assert register.issued == (entry,)
    with pytest.raises(BriefkitError, match="name it with --register"):
        find_register(page, None)
    assert verify(page, Register(tmp_path / "register.toml"), IN_FORCE).state is State.NOT_REGISTERED


@pytest.mark.slow
def test_in_earnest_with_a_kernel(signed: Path, tmp_path: Path) -> None:
    """The page of a released brief: no DRAFT on it, its codes and dates, and the same page from `build`."""
    from briefkit.brief.build import build

    entry, page = issue(signed, tmp_path / "out", DAY, released)
    html = page.read_text(encoding="utf-8")
    assert "DRAFT" not in html
    for code in ("NRC-17", "NRC-21", "NRC-02"):
        assert code in html
    assert verify(page, load_register(signed.parent), IN_FORCE).state is State.AS_REGISTERED
    (result,) = build([signed], tmp_path / "again", IN_FORCE)
    assert result.page is not None
    assert digest(result.page.read_bytes()) == entry.page


@pytest.mark.slow
def test_a_notebook_that_changes_its_own_brief_while_it_runs_is_not_built(
    signed: Path, tmp_path: Path, nb, signing
) -> None:
    """G36: what was signed has to be what was run."""
    nb.write(signed / "brief.ipynb", nb.code("open('helper.py', 'w').write('x = 1');"))
    signing(signed)
    with pytest.raises(BriefkitError, match="changed while the notebook ran"):
        issue(signed, tmp_path / "out", DAY, released)
