"""What a page says of itself: draft, released or past its day, under which signatures."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import Final

from briefkit.brief.compare import Difference
from briefkit.brief.identity import Signature
from briefkit.brief.seal import Seal
from briefkit.envelope.reductions import ReductionTable

DRAFT: Final = "DRAFT: not for crews"


@dataclass(frozen=True)
class Standing:
    """What a page says of itself: `mark` is "" for a released one, `expired` the day it ended where it has.

    `signed` are the signatures that hold, by role; `relaxed` the figures less conservative than in the last issued
    revision, each with the reason given; `table` the table of turns the page was looked at with. `release.standing`
    finds it.
    """

    mark: str
    seal: Seal
    signed: dict[str, Signature]
    relaxed: tuple[tuple[Difference, str], ...]
    table: ReductionTable | None
    expired: dt.date | None = None
