"""Building: whole pages only, one failure stops nobody, the same inputs give the same bytes."""

from __future__ import annotations

import datetime as dt
import re
import shutil
from pathlib import Path
from types import SimpleNamespace

import pytest

from briefkit.brief import build as building
from briefkit.brief.build import Result, build, find_briefs
from briefkit.brief.index import heading_of
from briefkit.brief.issue import State, digest, verify
from briefkit.brief.register import Issued, add_issued, load_register
from briefkit.brief.run import Ran
from briefkit.errors import BuildError


def another(brief: Path, number: str) -> Path:
    """A second brief of the same operator under another number."""
    folder = brief.with_name(number.lower())
    shutil.copytree(brief, folder)
    toml = folder / "brief.toml"
    toml.write_text(toml.read_text().replace("NB-2T-001", number))
    return folder


@pytest.mark.slow
def test_one_failure_stops_nobody_and_leaves_the_last_good_page(operator, brief, tmp_path, nb, today):
    out = tmp_path / "out"
    second = another(brief, "NB-2T-002")
    heard: list[Result] = []
    first = build([operator], out, today, heard.append)
    assert sorted(heard, key=lambda result: result.brief) == sorted(first, key=lambda result: result.brief)
    names = ["NB-2T-001.html", "NB-2T-001.readback.html", "NB-2T-002.html", "NB-2T-002.readback.html", "index.html"]
    assert sorted(file.name for file in out.iterdir()) == names
    before = {file.name: file.read_bytes() for file in out.iterdir()}
    assert all(result.size == len(before[result.page.name]) > 20_000 for result in first if result.page)

    # the same again: the same bytes; what an interrupted build left behind is gone
    (out / ".NB-2T-001.html.1.part").write_text("half")
    build([operator], out, today)
    assert {file.name: file.read_bytes() for file in out.iterdir()} == before

    # one notebook breaks: its page stays, the other is built, the index says so
    nb.write(second / "brief.ipynb", nb.code("1 / 0"))
    nb.write(brief / "brief.ipynb", nb.text("# Something new"))
    by_folder = {result.brief.name: result for result in build([operator], out, today)}
    assert by_folder["nb-2t-002"].error == "code cell 1 (1 / 0): ZeroDivisionError: division by zero"
    assert not by_folder[brief.name].error
    assert (out / "NB-2T-002.html").read_bytes() == before["NB-2T-002.html"]
    assert "Something new" in (out / "NB-2T-001.html").read_text()
    index = (out / "index.html").read_text()
    assert re.findall(r'href="([^"]*)"', index) == ["NB-2T-001.html", "NB-2T-001.readback.html"]
    assert "not built" in index
    assert "may be out of date; do not hand it out" in index


@pytest.mark.slow
def test_two_briefs_may_not_carry_one_number(operator, brief, tmp_path, today):
    clash = another(brief, "NB-2T-002")
    (clash / "brief.toml").write_text((brief / "brief.toml").read_text())
    index = another(brief, "INDEX")
    errors = {result.brief: result.error for result in build([operator], tmp_path / "out", today)}
    taken = [error for error in (errors[brief], errors[clash]) if error]
    assert len(taken) == 1
    assert re.search(r"document number NB-2T-001 is taken by the brief in .*; give this brief its own", taken[0])
    assert "document number INDEX is taken by the index page" in errors[index]


def test_faults_of_the_typed_files_are_a_result(operator, brief, tmp_path, today):
    toml = operator / "aircraft" / "pelquill-2t.toml"
    toml.write_text(toml.read_text().replace('radius = "4.45 m"', 'radius = "4,45 m"'))
    (result,) = build([brief], tmp_path / "out", today)
    assert "1 fault" in result.error
    assert "4,45 m" in result.error
    assert result.page is None
    assert [file.name for file in (tmp_path / "out").iterdir()] == ["index.html"]
    assert "There is no page" in (tmp_path / "out" / "index.html").read_text()


def test_briefs_are_found_once_and_in_order(operator, brief, tmp_path, today):
    second = another(brief, "NB-2T-000")
    hidden = operator / ".ipynb_checkpoints" / "x"
    hidden.mkdir(parents=True)
    shutil.copy(brief / "brief.toml", hidden)
    assert find_briefs([operator]) == (second, brief)
    assert find_briefs([brief / "brief.ipynb", operator, brief]) == (brief, second)
    with pytest.raises(BuildError, match=r"no brief here; a brief is a folder with brief\.toml"):
        find_briefs([tmp_path / "operator" / "aircraft"])
    with pytest.raises(BuildError, match="no such file or folder"):
        find_briefs([tmp_path / "gone"])


def test_a_folder_that_cannot_be_used(brief, tmp_path, today):
    (tmp_path / "file").write_text("")
    with pytest.raises(BuildError, match=r"file: cannot be used as a folder \(File exists\)"):
        build([brief], tmp_path / "file", today)


def test_a_draft_is_never_written_over_the_issued_page(operator, brief, tmp_path, monkeypatch):
    """Both go to `out` by default: the page that is in the register stays, the other brief is built."""

    async def no_kernel(*_: object) -> Ran:
        return Ran((), ())

    drawn = SimpleNamespace(heading="Heavy & hot", mark="DRAFT: not for crews")
    monkeypatch.setattr(building, "run_async", no_kernel)
    monkeypatch.setattr(building, "contents", lambda *_: drawn)
    monkeypatch.setattr(building, "complaint", lambda _: "")
    monkeypatch.setattr(building, "compose", lambda page, *_: f"<title>NB-2T-001 rev 0: x</title>{page.heading}")
    monkeypatch.setattr(building, "_readback", lambda *_: "")
    second, out, day = another(brief, "NB-2T-002"), tmp_path / "out", dt.date(2030, 6, 1)
    page = out / "NB-2T-001.html"
    out.mkdir()
    page.write_text("<title>NB-2T-001 rev 0: x</title><h1>Issued &amp; held</h1>", encoding="utf-8")
    entry = Issued(
        "NB-2T-001", 0, "x", "vellmark-2t", digest(page.read_bytes()), "b" * 64, day, day, dt.date(2032, 2, 29)
    )
    (operator / "register.toml").unlink()
    add_issued(operator / "register.toml", entry)
    results = {result.brief: result for result in build([operator], out, day)}
    assert results[brief].error.startswith(f"{page}: NB-2T-001 rev 0 was issued as this page")
    assert "build to another folder with --out, or raise document.revision" in results[brief].error
    assert not results[second].error
    assert verify(page, load_register(operator), day).state is State.AS_REGISTERED
    index = (out / "index.html").read_text(encoding="utf-8")
    assert "Issued &amp; held" in index
    assert "The issued page, NB-2T-001 rev 0." in index
    assert "do not hand it out" not in index

    # elsewhere it is written; so it is over a page that was edited, and where the bytes are those of the register
    (other,) = build([brief], tmp_path / "drafts", day)
    assert not other.error
    same = page.read_bytes()
    monkeypatch.setattr(building, "compose", lambda *_: same.decode("utf-8"))
    assert not build([brief], out, day)[0].error
    page.write_bytes(same + b" ")
    assert not build([brief], out, day)[0].error
    assert page.read_bytes() == same


def test_the_heading_of_a_page():
    assert heading_of('<h1 class="x">A <b>B</b> &amp; C\n</h1><h1>D</h1>') == "A B & C"
    assert heading_of("<p>A</p>") == ""
