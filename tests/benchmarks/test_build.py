"""How long the examples take to build, in a fresh process, as their author waits for them; and to export again."""

from __future__ import annotations

import subprocess
import sys

from briefkit.brief.export import compose, contents
from briefkit.brief.identity import load_brief


def test_three_briefs_cold(benchmark, examples, tmp_path):
    """Budget: 25 s on two cores, interpreter start and every import included; pages under 400 kB."""
    command = [
        sys.executable,
        "-c",
        "from briefkit.cli import main; main()",
        "build",
        str(examples),
        "--date",
        "2030-06-01",
    ]

    def build() -> None:
        subprocess.run([*command, "--out", str(tmp_path)], check=True, capture_output=True)

    benchmark.pedantic(build, rounds=2, iterations=1)
    sizes = {file.name: file.stat().st_size for file in tmp_path.glob("NB-??-001.html")}
    benchmark.extra_info["bytes"] = sizes
    print(f"\nexample pages: {sizes}, slowest of two builds {benchmark.stats.stats.max:.1f} s")
    assert len(sizes) == 3
    assert max(sizes.values()) < 400_000
    assert benchmark.stats.stats.max < 25.0


def test_an_executed_notebook_exported_again(benchmark, examples, exported, today):
    """Budget: 1 s in the same process, from the typed files to the hardened page."""
    folder = examples / "vellmark-2t"

    def again() -> str:
        return compose(contents(load_brief(folder), today), exported.ran, folder)

    html = benchmark.pedantic(again, rounds=5, iterations=1, warmup_rounds=1)
    assert html == exported.html
    print(f"\nexported again, slowest of five {benchmark.stats.stats.max:.2f} s")
    assert benchmark.stats.stats.max < 1.0
