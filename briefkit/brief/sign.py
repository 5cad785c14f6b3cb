"""Signing: a staff code, a day and the hash of what was signed, added to `brief.toml`; all else stays as it is."""

from __future__ import annotations

import datetime as dt
import json
import re
import tomllib
from itertools import pairwise
from pathlib import Path
from typing import Any, Final

from briefkit.aircraft.operation import FOR_INFORMATION, Operation
from briefkit.brief.identity import BRIEF_FILE, ROLES, Brief, Identity, Signature, load_brief, staff_code
from briefkit.brief.seal import Seal, changed, holds, seal_of
from briefkit.brief.write import write_page
from briefkit.errors import BriefkitError

_NOTE: Final = "# Written by briefkit sign; an edit of anything that was signed makes it void."
_KEY = re.compile(r"(?:role|code|date|content) = \S.*|signed = \[")
_PART = re.compile(r'  ".*",')


def sign(folder: Path | str, role: str, code: str, day: dt.date) -> Signature:
    """Sign a brief in one role; an earlier signature in that role is replaced, the author's text stays as it is.

    Raises `FaultyFile` where a file of the brief has faults, `BriefkitError` where this person may not sign this role
    now: not a staff code, not the one expected, a role before it still open or void, too few different people.
    """
    folder = Path(folder)
    brief = load_brief(folder)
    seal = seal_of(brief.identity)
    _refuse(brief, seal, role, code, day)
    signature = Signature(role, code, day, seal.content, seal.lines)
    path = brief.identity.folder / brief.identity.file
    write_page(path, with_signature(path.read_bytes().decode("utf-8"), signature))
    return signature


def problems(brief: Brief, seal: Seal) -> list[tuple[str, str]]:
    """Why a brief does not count as signed, each with its remedy; empty where it is."""
    identity, policy = brief.identity, brief.operation.policy
    signed = {signature.role: signature for signature in identity.signatures}
    found = []
    for role, signature in signed.items():
        if not holds(signature, seal):
            parts = ", ".join(changed(signature, seal))
            text = f"{parts} changed after {signature.code} {role} it on {signature.date}"
            found.append((text, f"look at the change, then briefkit sign --role {role}"))
    open_roles = [role for role in ROLES if role not in signed]
    if open_roles:
        text = f"nobody yet for {', '.join(open_roles)}: a draft, not for crews"
        found.append((text, "the page says DRAFT until all three have signed: briefkit sign"))
    for role, signature in signed.items():
        if identity.expected(role) not in ("", signature.code):
            text = f"{role} by {signature.code}, expected from {identity.expected(role)}"
            found.append((text, "the staff expected to sign are named in [people]"))
    found += _dates_in_order(identity, signed)
    found += _approver(brief, signed)
    codes = {signature.code for signature in signed.values()}
    if not open_roles and len(codes) < policy.people:
        text = f"{len(codes)} distinct people, the policy asks for {policy.people} ({brief.operation.file})"
        found.append((text, "another person has to sign one of the roles"))
    return found


def valid(identity: Identity, seal: Seal) -> dict[str, Signature]:
    """The signatures that still hold, by role."""
    return {signature.role: signature for signature in identity.signatures if holds(signature, seal)}


def _approver(brief: Brief, signed: dict[str, Signature]) -> list[tuple[str, str]]:
    approved, prepared = signed.get("approved"), signed.get("prepared")
    if approved is None:
        return []
    found = []
    if prepared is not None and approved.code == prepared.code:
        found.append((f"{approved.code} has prepared and approved", "the approver is never the preparer"))
    approvers, why = _approvers(brief)
    if approvers and approved.code not in approvers:
        found.append((f"{approved.code} may not approve {why}", f"{' or '.join(approvers)} ({brief.operation.file})"))
    if approved.date > brief.identity.effective:
        text = f"approved on {approved.date}, after {brief.identity.effective}, when it became effective"
        found.append((text, "nothing is in force before it is approved: move document.effective, then sign again"))
    return found


def _approvers(brief: Brief) -> tuple[tuple[str, ...], str]:
    """Who may approve, and what: a company limit may need another approver than a page for information."""
    policy, entry = brief.operation.policy, brief.operation.entry_for(brief.aircraft)
    if entry is not None and entry.status != FOR_INFORMATION and policy.limit_approvers:
        return policy.limit_approvers, "a company limit"
    return policy.approvers, "a brief"


def _dates_in_order(identity: Identity, signed: dict[str, Signature]) -> list[tuple[str, str]]:
    present = [signed[role] for role in ROLES if role in signed]
    return [
        (f"{later.role} on {later.date}, before it was {earlier.role} on {earlier.date}", "sign in turn")
        for earlier, later in pairwise(present)
        if later.date < earlier.date
    ]


def _refuse(brief: Brief, seal: Seal, role: str, code: str, day: dt.date) -> None:
    identity, operation = brief.identity, brief.operation
    place = str(identity.folder / identity.file)
    if role not in ROLES:
        raise BriefkitError(f"--role {role}: permitted: {', '.join(ROLES)}")
    if not staff_code(code):
        raise BriefkitError(f'--code {code}: a staff code with a digit in it, like "NRC-17"; people are not named')
    if identity.expected(role) not in ("", code):
        raise BriefkitError(f"{place}: {role} is expected from {identity.expected(role)} ([people]), not from {code}")
    standing = valid(identity, seal)
    for before in ROLES[: ROLES.index(role)]:
        if before not in standing:
            old = next((one for one in identity.signatures if one.role == before), None)
            why = f"; {', '.join(changed(old, seal))} changed after {old.code} signed" if old else ""
            raise BriefkitError(f"{place}: not {before} yet{why}. Prepared, checked, approved: in this order")
    kept = {name: one for name, one in standing.items() if ROLES.index(name) < ROLES.index(role)}
    after = {**kept, role: Signature(role, code, day, seal.content)}
    said = _dates_in_order(identity, after) + _approver(brief, after) + _too_few(operation, after)
    if said:
        raise BriefkitError(f"{place}: {'; '.join(': '.join(one) for one in said)}")


def _too_few(operation: Operation, signed: dict[str, Signature]) -> list[tuple[str, str]]:
    """Refused as soon as the people asked for can no longer be reached."""
    missing = len(ROLES) - len(signed)
    distinct = len({signature.code for signature in signed.values()})
    if distinct + missing >= operation.policy.people:
        return []
    text = f"{distinct + missing} distinct people, the policy asks for {operation.policy.people} ({operation.file})"
    return [(text, "another person has to sign this role")]


def with_signature(text: str, signature: Signature) -> str:
    """The text of a `brief.toml` with one signature more, or in the place of the one of its role; all else as it was.

    Raises `BriefkitError` where the text is laid out so that this cannot be done safely.
    """
    ends = "\r\n" if "\r\n" in text else "\n"
    before = _data(text)
    lines = _without(text.split(ends), before, signature.role)
    while lines and not lines[-1].strip():
        lines.pop()
    made = ends.join([*lines, "", *_block(signature), ""])
    try:
        after = _data(made)
    except ValueError:
        raise BriefkitError(f"{BRIEF_FILE}: a file of the brief has a name that cannot be written; rename it") from None
    written = {
        "role": signature.role,
        "code": signature.code,
        "date": signature.date,
        "content": signature.content,
        "signed": list(signature.signed),
    }
    kept = [entry for entry in before.pop("signatures", []) if entry.get("role") != signature.role]
    if after.pop("signatures", []) != [*kept, written] or after != before:
        remedy = "take the [[signatures]] entries out by hand and sign again"
        raise BriefkitError(f"{BRIEF_FILE}: a signature was edited so that it cannot be replaced; {remedy}")
    return made


def _data(text: str) -> dict[str, Any]:
    return tomllib.loads(text.removeprefix("\ufeff"))


def _block(signature: Signature) -> list[str]:
    return [
        _NOTE,
        "[[signatures]]",
        f'role = "{signature.role}"',
        f'code = "{signature.code}"',
        f"date = {signature.date.isoformat()}",
        f'content = "{signature.content}"',
        "signed = [",
        *(f"  {json.dumps(part, ensure_ascii=False)}," for part in signature.signed),
        "]",
    ]


def _without(lines: list[str], data: dict[str, Any], role: str) -> list[str]:
    """The lines without the role's own block, as `_block` wrote it; anything else is left where it is."""
    if all(entry.get("role") != role for entry in data.get("signatures", [])):
        return lines
    for start, line in enumerate(lines):
        if line != "[[signatures]]" or f'role = "{role}"' not in lines[start + 1 : start + 2]:
            continue
        end = start + 1
        while end < len(lines) and (_KEY.fullmatch(lines[end]) or _PART.fullmatch(lines[end])):
            end += 1
        end += end < len(lines) and lines[end] == "]"
        first = start - (start > 0 and lines[start - 1] == _NOTE)
        first -= first > 0 and not lines[first - 1].strip()
        return lines[:first] + lines[end:]
    return lines
