"""The register: read, added to without touching what is there, and what a source cites held against it."""

from __future__ import annotations

import datetime as dt
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from briefkit.brief.check import Level, findings
from briefkit.brief.register import (
    Controlled,
    Issued,
    Register,
    Turn,
    add_issued,
    citations,
    load_register,
    older,
    stale,
)
from briefkit.errors import BriefkitError, FaultyFile

TODAY = dt.date(2030, 6, 1)
ENTRY = Issued(
    "NB-2T-001", 0, "Retreating-blade stall", "vellmark-2t", "a" * 64, "b" * 64, dt.date(2030, 3, 20),
    dt.date(2030, 4, 1), dt.date(2032, 2, 29), ("OM-B rev 11",), (Turn("2,006 lb", 20.0, 10.0),),
)  # fmt: skip
DOCUMENTS = """
[[documents]]
name = "flight manual"
aircraft = "pelquill-2t"
revision = "4"

[[documents]]
name = "maintenance manual"
aircraft = "pelquill-2t"
revision = "rev 7"

[[documents]]
name = "OM-B"
revision = "11"

[[documents]]
name = "OM-C"
revision = "9"

[[documents]]
name = "OM-A"
revision = "12"
"""


def serious(folder: Path) -> list[tuple[str, str]]:
    found = [one for one in findings(folder, TODAY, page=False) if one.level is not Level.NOTE]
    return [(one.place.rpartition("/")[2], one.text) for one in found]


def registered(folder: Path, text: str) -> Path:
    (folder / "register.toml").write_text(text, encoding="utf-8")
    return folder / "vellmark-2t"


def test_an_operator_without_a_register_has_an_empty_one(tmp_path: Path) -> None:
    register = load_register(tmp_path)
    assert (register.documents, register.issued) == ((), ())


def test_what_is_added_is_read_back_and_nothing_else_changes(tmp_path: Path) -> None:
    path = tmp_path / "register.toml"
    before = "# The office keeps this\r\n\r\n" + DOCUMENTS.strip().replace("\n", "\r\n") + "   # current\r\n"
    path.write_bytes(before.encode())
    add_issued(path, ENTRY)
    second = replace(ENTRY, revision=1, title='Quotes " and \\ and Ü')
    add_issued(path, second)
    assert path.read_bytes().decode().startswith(before)
    register = load_register(path)
    assert register.issued == (ENTRY, second)
    assert register.before("NB-2T-001", 1) == ENTRY
    assert register.before("NB-2T-001", 0) is None
    assert len(register.documents) == 5


@pytest.mark.slow
@given(
    title=st.text(st.characters(blacklist_categories=("Cs", "Cc")), min_size=1).filter(str.strip),
    masses=st.lists(st.sampled_from(["2,006 lb", "910 kg"]), max_size=3),
)
@settings(max_examples=60, deadline=None)
def test_any_title_comes_back(tmp_path_factory: pytest.TempPathFactory, title: str, masses: list[str]) -> None:
    path = tmp_path_factory.mktemp("register") / "register.toml"
    entry = replace(ENTRY, title=title, turns=tuple(Turn(mass, 25.0, 7.5) for mass in masses))
    add_issued(path, entry)
    assert load_register(path).issued == (entry,)


def test_a_register_with_a_slip_is_never_added_to(tmp_path: Path) -> None:
    path = tmp_path / "register.toml"
    for text in ("issued = 3\n", "[issued]\nx = 1\n", 'a = """\n'):
        path.write_text(text)
        with pytest.raises(BriefkitError, match="cannot be added"):
            add_issued(path, ENTRY)
        assert path.read_text() == text


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ('[[documents]]\nname = "OM-B"\n', "the key revision is needed"),
        ('[[documents]]\nname = "OM-B"\nrevison = "1"\n', "did you mean revision"),
        ('[[documents]]\nname = "OM-B"\nrevision = 11\n', "text between quotes"),
        ('[[documents]]\nname = "OM-B"\nrevision = "1"\nreview = "soon"\n', "a date without quotes"),
        ('[[issued]]\nnumber = "X"\n', "the key page is needed"),
    ],
)
def test_slips_in_the_register_are_faults_and_block(complete: Path, text: str, words: str) -> None:
    folder = registered(complete, text)
    with pytest.raises(FaultyFile, match=words):
        load_register(complete)
    assert any(place.startswith("register.toml") for place, _ in serious(folder))


CASES = [
    ("flight manual 2-4 rev 4", [("flight manual", "4")]),
    ("Flight Manual 2-4, revision 4", [("flight manual", "4")]),
    ("worked back from torque, flight manual 5-8 rev 4", [("flight manual", "4")]),
    ("OM-B rev 11; OM-C rev 9", [("OM-B", "11"), ("OM-C", "9")]),
    ("OM-B; OM-C rev 9", [("OM-B", ""), ("OM-C", "9")]),
    ("OM-B 2.3, OM-C 4.2 rev 9", [("OM-B", ""), ("OM-C", "9")]),
    ("OM-BX rev 3", []),
    ("flight manual supplement 3 rev 2", [("flight manual supplement", "2")]),
    ("measured at 0.75 R, work order 2231", []),
]


@pytest.mark.parametrize(("source", "expected"), CASES)
def test_what_a_source_cites(source: str, expected: list[tuple[str, str]]) -> None:
    names = ("flight manual", "flight manual supplement", "OM-B", "OM-C")
    register = Register(Path("register.toml"), tuple(Controlled(name, "1") for name in names))
    found = citations(register, "pelquill-2t", (("place", source),))
    assert [(one.document.name, one.revision) for one in found] == expected


def test_another_types_manual_is_not_meant() -> None:
    register = Register(Path("register.toml"), (Controlled("flight manual", "9", "ormbrae-3f"),))
    assert citations(register, "pelquill-2t", (("place", "flight manual 2-4 rev 4"),)) == []


@pytest.mark.parametrize(
    ("cited", "current", "is_stale", "is_older"),
    [
        ("4", "4", False, True), ("4", "rev 4", False, True), ("4", "5", True, True), ("5", "4", True, False),
        ("B", "b", False, True), ("B", "C", True, True), ("", "4", True, True), ("9", "10", True, True),
    ],
)  # fmt: skip
def test_stale_revisions(cited: str, current: str, is_stale: bool, is_older: bool) -> None:
    register = Register(Path("register.toml"), (Controlled("OM-B", current),))
    (found,) = citations(register, "x", (("place", f"OM-B 2.3 rev {cited}" if cited else "OM-B 2.3"),))
    assert stale(found) is is_stale
    if is_stale:
        assert older(found) is is_older


def test_current_sources_have_nothing_against_them(complete: Path, signing) -> None:
    """G14, the good case."""
    assert serious(signing(registered(complete, DOCUMENTS))) == []


@pytest.mark.slow
def test_a_revised_manual_blocks_every_number_from_it_and_names_the_briefs(complete: Path, signing) -> None:
    """G14: a source older than its registered current revision; and the signatures themselves still hold."""
    folder = signing(registered(complete, DOCUMENTS.replace('revision = "4"', 'revision = "5"')))
    found = serious(folder)
    assert found
    assert all("current is flight manual rev 5" in text for _, text in found)
    assert any("VNE power on" in place for place, _ in found)
    assert any("document.basis" in place for place, _ in found)
    over = [one for one in findings(complete, TODAY, page=False) if "touches" in one.text]
    assert [one.text for one in over] == [f"flight manual (pelquill-2t), now rev 5, touches {folder.name}"]


@pytest.mark.slow
def test_a_source_newer_than_the_register_or_without_a_revision_blocks(complete: Path, signing) -> None:
    folder = registered(complete, DOCUMENTS)
    signing.edit(complete / "aircraft" / "pelquill-2t.toml", ("flight manual 5-2 rev 4", "flight manual 5-2 rev 5"))
    signing.edit(complete / "aircraft" / "pelquill-2t.toml", ("flight manual 4-6 rev 4", "flight manual 4-6"))
    found = [text for _, text in serious(signing(folder))]
    assert any("registered is flight manual rev 4" in text for text in found)
    assert any("does not say which revision" in text for text in found)


@pytest.mark.slow
def test_a_document_past_its_review_blocks(complete: Path, signing) -> None:
    """G14: review date passed."""
    text = DOCUMENTS.replace('name = "OM-B"', 'name = "OM-B"\nreview = 2030-06-01')
    (found,) = serious(signing(registered(complete, text)))
    assert found == ("register.toml", "OM-B was due for review on 2030-06-01")
    assert serious(registered(complete, text.replace("2030-06-01", "2030-06-02"))) == []


@pytest.mark.slow
def test_an_issued_page_that_rests_on_a_revised_document_is_to_be_recalled(complete: Path) -> None:
    path = complete / "register.toml"
    path.write_text(DOCUMENTS.replace('revision = "11"', 'revision = "12"'), encoding="utf-8")
    add_issued(path, ENTRY)
    over = [one.text for one in findings(complete, TODAY, page=False) if "with the crews" in one.text]
    assert over == ["NB-2T-001 rev 0 is with the crews and rests on OM-B rev 11, revised since"]
    text = path.read_text(encoding="utf-8")
    path.write_text(text.replace("expires = 2032-02-29", "expires = 2032-02-29\nwithdrawn = 2030-05-01"))
    assert not [one for one in findings(complete, TODAY, page=False) if "with the crews" in one.text]


@pytest.mark.parametrize(
    ("basis", "text"),
    [
        ("basis = []", "no document this brief rests on"),
        ('basis = ["Flight manual"]', "'Flight manual' names no revision"),
    ],
)
def test_the_basis_documents_are_named_with_their_revision(complete: Path, signing, basis: str, text: str) -> None:
    path = complete / "vellmark-2t" / "brief.toml"
    whole = path.read_text(encoding="utf-8")
    start, end = whole.index("basis = ["), whole.index("[subject]")
    path.write_text(f"{whole[:start]}{basis}\n\n{whole[end:]}", encoding="utf-8")
    (found,) = serious(signing(path.parent))
    assert found[1] == text


def test_a_revision_that_names_no_section_is_noted(complete: Path) -> None:
    """Its page would carry no bar in the margin: a note, and nothing against release."""
    path = complete / "vellmark-2t" / "brief.toml"
    first = path.read_text(encoding="utf-8")
    path.write_text(first.replace("revision = 0", "revision = 1"), encoding="utf-8")
    said = "no section named for revision 1: no bar stands in the margin"
    (note,) = [one for one in findings(path, TODAY, page=False) if one.text == said]
    assert (note.level, note.place) == (Level.NOTE, "vellmark-2t/brief.toml: changes")
    named = first.replace("revision = 0", "revision = 1", 1).replace("revision = 0", 'sections = ["2"]\nrevision = 1')
    for text in (first, named, first.replace("revision = 0", "revision = 1", 1)):
        path.write_text(text, encoding="utf-8")
        assert not [one for one in findings(path, TODAY, page=False) if "margin" in one.text]
