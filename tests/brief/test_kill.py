"""A build killed at any moment: a reader finds the old page or the new one, whole, and the next build sweeps the rest.

SIGKILL cannot be caught, so nothing tidies up. Each exporter is a forked process of its own.
"""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

from briefkit.brief.write import sweep, write_page

pytestmark = pytest.mark.skipif(not hasattr(os, "fork"), reason="forks and signals are POSIX")

KILLS = 200

# A page says in its first line how long it is and in its last what the rest hashes to, so that a torn one shows.
PAGES = """
import hashlib, os, random, signal, sys, time
from pathlib import Path
from briefkit.brief import write
page = Path(sys.argv[1])

def text(number):
    body = f"page {number} " + "x" * (number * 7919 % 300_000) + "\\n"
    return body + hashlib.sha256(body.encode()).hexdigest()

def number_of(content):
    body, _, digest = content.rpartition("\\n")
    body += "\\n"
    if hashlib.sha256(body.encode()).hexdigest() != digest:
        return None
    return int(body.split()[1])
"""

RANDOM = (
    PAGES
    + """
chance = random.Random(20300301)
torn = started = finished = seen_new = leftovers = 0
write.write_page(page, text(0))
for kill in range(int(sys.argv[2])):
    told, tell = os.pipe()
    child = os.fork()
    if not child:
        for at in range(started + 1, started + 1000):
            write.write_page(page, text(at))
            os.write(tell, f"{at}\\n".encode())
    os.close(tell)
    time.sleep(chance.uniform(0.0, 0.012))
    os.kill(child, signal.SIGKILL)
    os.waitpid(child, 0)
    done = [int(line) for line in os.read(told, 100_000).split()] or [finished]
    os.close(told)
    found = number_of(page.read_text())
    # not torn, never older than what was finished, never newer than the one that was being written
    torn += found is None or not done[-1] <= found <= max(done[-1], started) + 1
    seen_new += found is not None and found > finished
    started = finished = done[-1] if found is None else found
    leftovers += write.sweep(page.parent)
print(torn, seen_new, leftovers, len(list(page.parent.iterdir())))
"""
)

AT_A_STEP = (
    PAGES
    + """
step, moment = sys.argv[2:4]

def die():
    os.kill(os.getpid(), signal.SIGKILL)

class Stream:
    def __init__(self, inner):
        self.inner = inner
    def __enter__(self):
        return self
    def __exit__(self, *_):
        self.inner.close()
    def write(self, content):
        if moment == "before":
            die()
        self.inner.write(content[: len(content) // 2] if moment == "half way" else content)
        self.inner.flush()
        die()
    def __getattr__(self, name):
        return getattr(self.inner, name)

def around(real):
    def call(*given):
        if moment == "before":
            die()
        real(*given)
        die()
    return call

write.write_page(page, text(41))
child = os.fork()
if not child:
    if step == "write":
        opened = os.fdopen
        write.os.fdopen = lambda *given: Stream(opened(*given))
    else:
        setattr(write.os, step, around(getattr(os, step)))
    write.write_page(page, text(42))
    os._exit(0)
_, status = os.waitpid(child, 0)
print(os.WTERMSIG(status) == signal.SIGKILL, number_of(page.read_text()))
"""
)


def run(script: str, *given: object) -> list[str]:
    done = subprocess.run([sys.executable, "-c", script, *map(str, given)], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    return done.stdout.split()


@pytest.mark.slow
def test_200_kills_at_random_moments_leave_no_torn_page(tmp_path):
    torn, seen_new, leftovers, files = map(int, run(RANDOM, tmp_path / "page.html", KILLS))
    assert torn == 0
    assert files == 1
    # the kills did fall within the work: some after a page was in place, some with a half one beside it
    assert seen_new > KILLS // 10
    assert leftovers > KILLS // 10


@pytest.mark.parametrize(
    ("step", "moment", "whole"),
    [
        ("write", "before", 41),
        ("write", "half way", 41),
        ("write", "after", 41),
        ("fsync", "before", 41),
        ("fsync", "after", 41),
        ("replace", "before", 41),
        ("replace", "after", 42),
    ],
)
def test_a_kill_before_and_after_each_step(tmp_path, step, moment, whole):
    page = tmp_path / "page.html"
    assert run(AT_A_STEP, page, step, moment) == ["True", str(whole)]
    left = [file for file in tmp_path.iterdir() if file != page]
    assert len(left) == (0 if (step, moment) == ("replace", "after") else 1)
    assert sweep(tmp_path) == len(left)
    assert list(tmp_path.iterdir()) == [page]
    write_page(page, "and the next build writes as ever")
    assert Path(page).read_text() == "and the next build writes as ever"
