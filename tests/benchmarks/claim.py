"""The claim at length: `python tests/benchmarks/claim.py [worlds of each kind, 8]`. Minutes; prints, asserts nothing.

For every kind of limit and of manual: readings inside the chart, the share above true onset, the share more than 2 kt
over the true 0.9-speed; beside them the share in which the absolute 12-degree criterion, with class values for what a
manual does not give, lies above true onset.
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np

ROOT = Path(__file__).parents[2]
sys.path.insert(0, str(ROOT / "tests"))

from true_rotors import LIMITS, MANUALS, OUTSIDE_THE_CLAIM, Held, hold, make_world  # noqa: E402

from briefkit.aircraft.load import load_aircraft  # noqa: E402

LINE = "{:52s} {:24s} {:>8} {:>12} {:>12} {:>14}"


def main(worlds: int) -> None:
    """Try every kind and print the table."""
    pattern = load_aircraft(ROOT / "example_briefs" / "aircraft" / "pelquill-2t.toml")
    rng = np.random.default_rng(20309)
    print(LINE.format("limit", "manual", "readings", "above onset", "2 kt over", "12 deg above"))
    totals: dict[bool, list[Held]] = {True: [], False: []}
    for limit in (*LIMITS, *OUTSIDE_THE_CLAIM):
        for manual in MANUALS:
            made = [make_world(rng, limit, manual, pattern) for _ in range(worlds)]
            held = [hold(world, rng, 60) for world in made if world is not None]
            totals[limit in LIMITS] += held
            show(limit, manual, held)
    show("every limit of the claim", "all", totals[True])
    show("outside the claim", "all", totals[False])


def show(limit: str, manual: str, held: list[Held]) -> None:
    """One line of the table."""
    if not held:
        print(LINE.format(limit, manual, 0, "", "", ""))
        return
    onset = np.concatenate([one.over_onset for one in held])
    factor = np.concatenate([one.over_factor for one in held])
    guess = np.concatenate([one.guess_over_onset for one in held])
    shares = [f"{np.mean(values) * 100.0:.2f} %" for values in (onset > 0.0, factor > 2.0, guess > 0.0)]
    print(LINE.format(limit, manual, onset.size, *shares))


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 8)
