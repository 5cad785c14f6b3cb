"""Whether a page may say anything but DRAFT: signed by policy, nothing against release, and not past its day."""

from __future__ import annotations

import datetime as dt
import shlex
from collections.abc import Iterable
from typing import Any, Final

from briefkit.brief.check import findings, page_standing, stands_against
from briefkit.brief.compare import explained
from briefkit.brief.identity import Brief, load_brief
from briefkit.brief.seal import seal_of
from briefkit.brief.sign import valid
from briefkit.brief.standing import DRAFT, Standing

_SHOWN: Final = 5  # lines of what stands against a release; briefkit check has them all


def standing(brief: Brief, today: dt.date, cells: Iterable[Any] | None = None) -> Standing:
    """The standing of a loaded brief on a day; `cells` are those that will be run.

    A page made from anything but the files that were looked at is a draft: cells not saved, a file changed meanwhile.
    """
    identity = brief.identity
    seal = seal_of(identity, cells)
    table, differences, found = page_standing(brief)
    found = found + findings(identity.folder, today, page=False)
    fresh = load_brief(identity.folder)
    looked_at = _hashes(brief) == _hashes(fresh) and seal == seal_of(identity)
    released = looked_at and not stands_against(found)
    expired = identity.expires if identity.expires <= today else None
    relaxed = tuple((one, explained(brief, one)) for one in differences)
    return Standing("" if released else DRAFT, seal, valid(identity, seal), relaxed, table, expired)


def in_the_way(brief: Brief, today: dt.date) -> str:
    """What stands against the release of a brief, a line each: the first few, and how many more."""
    found = list(map(str, stands_against(findings(brief.identity.folder, today))))
    more = len(found) - _SHOWN
    said = [
        *found[:_SHOWN],
        *([f"and {more} more: briefkit check {shlex.quote(str(brief.identity.folder))}"] if more > 0 else []),
    ]
    return "\n".join(f"  {line}" for line in said) or "  a file of the brief changed meanwhile: look, then issue again"


def _hashes(brief: Brief) -> tuple[str, ...]:
    return brief.identity.data_hash, brief.aircraft.data_hash, brief.operation.data_hash, brief.aircraft.configuration
