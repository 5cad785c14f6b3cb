"""How long the example takes to build, in a fresh process, as its author waits for it."""

from __future__ import annotations

import subprocess
import sys


def test_the_example_cold(benchmark, examples, tmp_path):
    """Budget: 15 s on two cores, interpreter start and every import included."""
    command = [sys.executable, "-c", "from briefkit.cli import main; main()", "build", str(examples)]

    def build() -> None:
        subprocess.run([*command, "--out", str(tmp_path)], check=True, capture_output=True)

    benchmark.pedantic(build, rounds=2, iterations=1)
    size = (tmp_path / "NB-2T-001.html").stat().st_size
    benchmark.extra_info["bytes"] = size
    print(f"\nexample page: {size:,} bytes, slowest of two builds {benchmark.stats.stats.max:.1f} s")
    assert size < 300_000
    assert benchmark.stats.stats.max < 15.0
