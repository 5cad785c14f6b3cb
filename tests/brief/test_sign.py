"""Signing: who may, in which order, what it writes, and that nothing of the author's is touched."""

from __future__ import annotations

import datetime as dt
import tomllib
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from briefkit.brief.check import Level, findings
from briefkit.brief.identity import ROLES, Signature, load_brief, load_identity
from briefkit.brief.seal import seal_of
from briefkit.brief.sign import problems, sign, valid, with_signature
from briefkit.errors import BriefkitError, FaultyFile

DAY = dt.date(2030, 3, 5)
TODAY = dt.date(2030, 6, 1)


def said(folder: Path) -> list[str]:
    brief = load_brief(folder)
    return [text for text, _ in problems(brief, seal_of(brief.identity))]


@pytest.mark.slow
def test_a_brief_signed_by_three_has_nothing_against_release(signed: Path) -> None:
    """G35, the good case: computed page and all."""
    assert said(signed) == []
    assert [one for one in findings(signed, TODAY) if one.level is not Level.NOTE] == []


def test_each_role_is_open_until_it_is_signed(complete: Path) -> None:
    """G35: a draft until three roles are filled; a code typed under [people] is no signature."""
    folder = complete / "vellmark-2t"
    assert said(folder) == ["nobody yet for prepared, checked, approved: a draft, not for crews"]
    sign(folder, "prepared", "NRC-17", DAY)
    assert said(folder) == ["nobody yet for checked, approved: a draft, not for crews"]
    text = (folder / "brief.toml").read_text(encoding="utf-8")
    (folder / "brief.toml").write_text(text.replace('approved = ""', 'approved = "NRC-02"'), encoding="utf-8")
    assert any("nobody yet for checked, approved" in one for one in said(folder))


@pytest.mark.parametrize(
    ("file", "old", "new"),
    [
        ("operation.toml", '"1,800 lb"', '"1,810 lb"'),
        ("aircraft/pelquill-2t.toml", "8,000         95    87", "8,000         95    86"),
        ("vellmark-2t/brief.toml", "2032-02-29", "2032-02-28"),
        ("vellmark-2t/brief.ipynb", "Heavy, high, hot.", "Light, low, cold."),
    ],
)
def test_an_edit_revokes_and_says_what_changed_and_whose_signature_it_was(
    signed: Path, signing, file: str, old: str, new: str
) -> None:
    """G36: any input edit after approval revokes approval."""
    signing.edit(signed.parent / file, (old, new))
    name = file.removeprefix("vellmark-2t/")
    assert said(signed) == [
        f"{name} changed after {code} {role} it on 2030-03-05" for role, code in signing.staff.items()
    ]
    signing(signed)
    assert said(signed) == []


def test_signing_revokes_nothing_and_touches_nothing_else(complete: Path, signing) -> None:
    folder = complete / "vellmark-2t"
    before = (folder / "brief.toml").read_text(encoding="utf-8")
    signing(folder)
    after = (folder / "brief.toml").read_text(encoding="utf-8")
    assert after.startswith(before)
    assert {one.role: one.code for one in load_identity(folder).signatures} == signing.staff
    sign(folder, "approved", "NRC-03", DAY)
    again = (folder / "brief.toml").read_text(encoding="utf-8")
    assert again.startswith(before)
    assert again.count("[[signatures]]") == 3
    assert said(folder) == []


def test_windows_line_ends_and_the_byte_order_mark_stay(complete: Path, signing) -> None:
    path = complete / "vellmark-2t" / "brief.toml"
    before = b"\xef\xbb\xbf" + path.read_bytes().replace(b"\n", b"\r\n")
    path.write_bytes(before)
    signing(path.parent)
    after = path.read_bytes()
    assert after.startswith(before)
    assert after.count(b"\n") == after.count(b"\r\n")
    assert said(path.parent) == []


@pytest.mark.parametrize(
    ("steps", "words"),
    [
        ([("checked", "NRC-21")], "not prepared yet"),
        ([("prepared", "NRC-17"), ("approved", "NRC-02")], "not checked yet"),
        ([("prepared", "NRC-17"), ("checked", "NRC-17")], "2 distinct people, the policy asks for 3"),
        ([("prepared", "NRC-17"), ("checked", "NRC-21"), ("approved", "NRC-17")], "approver is never the preparer"),
        (
            [("prepared", "NRC-17"), ("checked", "NRC-21"), ("approved", "NRC-21")],
            "2 distinct people, the policy asks for 3",
        ),
        ([("prepared", "Person")], "people are not named"),
        ([("reviewed", "NRC-17")], "permitted: prepared, checked, approved"),
    ],
)
def test_who_may_not_sign(complete: Path, steps: list[tuple[str, str]], words: str) -> None:
    """G35: distinct people, and no self-approval."""
    folder = complete / "vellmark-2t"
    *good, last = steps
    for role, code in good:
        sign(folder, role, code, DAY)
    before = (folder / "brief.toml").read_bytes()
    with pytest.raises(BriefkitError, match=words):
        sign(folder, *last, DAY)
    assert (folder / "brief.toml").read_bytes() == before


def test_two_people_are_enough_where_the_policy_says_two_but_never_one(complete: Path, signing) -> None:
    folder = complete / "vellmark-2t"
    signing.edit(complete / "operation.toml", ("people = 3", "people = 2"))
    sign(folder, "prepared", "NRC-17", DAY)
    sign(folder, "checked", "NRC-21", DAY)
    with pytest.raises(BriefkitError, match="approver is never the preparer"):
        sign(folder, "approved", "NRC-17", DAY)
    sign(folder, "approved", "NRC-21", DAY)
    assert said(folder) == []


def test_the_staff_named_under_people_are_the_ones_who_sign(complete: Path, signing) -> None:
    folder = complete / "vellmark-2t"
    signing.edit(folder / "brief.toml", ('prepared = ""', 'prepared = "NRC-40"'))
    with pytest.raises(BriefkitError, match="expected from NRC-40"):
        sign(folder, "prepared", "NRC-17", DAY)
    sign(folder, "prepared", "NRC-40", DAY)


def test_a_company_limit_may_need_another_approver(complete: Path, signing) -> None:
    folder = complete / "vellmark-2t"
    policy = 'people = 3\napprovers = ["NRC-02", "NRC-03"]\nlimit_approvers = ["NRC-01"]'
    signing.edit(complete / "operation.toml", ("people = 3", policy))
    sign(folder, "prepared", "NRC-17", DAY)
    sign(folder, "checked", "NRC-21", DAY)
    with pytest.raises(BriefkitError, match="NRC-09 may not approve a brief"):
        sign(folder, "approved", "NRC-09", DAY)
    sign(folder, "approved", "NRC-02", DAY)
    assert said(folder) == []
    status = 'brief_bank = "30 deg"          # the one bank turns are briefed to\nstatus = "for information" '
    signing.edit(complete / "operation.toml", (status, status.replace("for information", "company limit, OM-B 2.3")))
    assert any("NRC-02 may not approve a company limit" in one for one in said(folder))


def test_dates_run_in_order_and_nothing_is_in_force_before_it_is_approved(complete: Path) -> None:
    folder = complete / "vellmark-2t"
    sign(folder, "prepared", "NRC-17", DAY)
    with pytest.raises(BriefkitError, match="sign in turn"):
        sign(folder, "checked", "NRC-21", DAY - dt.timedelta(days=1))
    sign(folder, "checked", "NRC-21", DAY)
    with pytest.raises(BriefkitError, match=r"move document\.effective"):
        sign(folder, "approved", "NRC-02", dt.date(2030, 4, 2))
    sign(folder, "approved", "NRC-02", dt.date(2030, 4, 1))
    assert said(folder) == []


def test_a_brief_with_faults_cannot_be_signed(complete: Path, signing) -> None:
    signing.edit(complete / "operation.toml", ('"8,000 ft"', '"8,000"'))
    with pytest.raises(FaultyFile, match="work_areas"):
        sign(complete / "vellmark-2t", "prepared", "NRC-17", DAY)


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ('role = "checked"', 'role = "prepared"', "each role once"),
        ('role = "checked"', 'role = "reviewed"', "signatures"),
        ('content = "', 'content = "x', "64 hexadecimal digits"),
        ('code = "NRC-21"', 'code = "A. Person"', "a code, not a name"),
        ("signed = [", "signd = [", "did you mean signed"),
    ],
)
def test_a_signature_edited_by_hand_is_a_fault(signed: Path, signing, old: str, new: str, words: str) -> None:
    signing.edit(signed / "brief.toml", (old, new))
    with pytest.raises(FaultyFile, match=words):
        load_identity(signed)


def test_an_edited_hash_does_not_hold(signed: Path) -> None:
    path = signed / "brief.toml"
    lines = path.read_text(encoding="utf-8").split("\n")
    lines = [f'content = "{"0" * 64}"' if line.startswith("content = ") else line for line in lines]
    path.write_text("\n".join(lines), encoding="utf-8")
    brief = load_brief(signed)
    assert valid(brief.identity, seal_of(brief.identity)) == {}
    assert all("the signature itself changed" in text for text in said(signed))


def test_a_block_laid_out_by_hand_is_refused_rather_than_torn() -> None:
    text = '[document]\ntitle = "x"\n\n[[signatures]]\ncode = "NRC-1"\nrole = "checked"\n'
    with pytest.raises(BriefkitError, match=r"take the .* entries out by hand"):
        with_signature(text, Signature("checked", "NRC-2", DAY, "0" * 64, ("brief.toml 1",)))


LINE = st.sampled_from(
    [
        "# a comment",
        "",
        "[[signatures]]",
        'role = "checked"',
        'title = "x"',
        "]",
        'text = """',
        '"""',
        "signed = [",
        "[people]",
        'prepared = "NRC-1"  # who',
        "[[changes]]",
        "revision = 0",
    ]
)


@pytest.mark.slow
@given(
    lines=st.lists(LINE, max_size=12),
    role=st.sampled_from(ROLES),
    parts=st.lists(st.text(min_size=1, max_size=8), max_size=3),
)
@settings(max_examples=300, deadline=None)
def test_whatever_the_text_only_the_signature_changes_or_it_is_refused(
    lines: list[str], role: str, parts: list[str]
) -> None:
    text = "\n".join(lines)
    signature = Signature(role, "NRC-2", DAY, "0" * 64, tuple(parts))
    try:
        before = tomllib.loads(text)
    except ValueError:
        return
    if not all(isinstance(one, dict) for one in before.get("signatures", [])):
        return
    try:
        after = tomllib.loads(with_signature(text, signature))
    except BriefkitError:
        return
    kept = [one for one in before.pop("signatures", []) if one.get("role") != role]
    *others, last = after.pop("signatures")
    assert (after, others) == (before, kept)
    assert (last["role"], last["signed"]) == (role, parts)
