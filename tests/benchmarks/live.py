"""Slider to picture in a real JupyterLab and Chromium: `python tests/benchmarks/live.py [moves]`.

Prints, without and with the low-delay setting of `briefkit live`: the median and 95th percentile from a move of the
airspeed slider to the disc's new picture on the screen, one move at a time; then a flood of moves: how many pictures
were drawn of the values sent, and how long after letting go the last one stood, against the time between two pictures.
First the kernel's own time for the disc map, the flapping and the boundary together. Other work on the machine shows in
the figures: its load is printed beside them.
"""

from __future__ import annotations

import importlib.util
import os
import statistics
import sys
import tempfile
import time
from itertools import pairwise
from pathlib import Path
from types import ModuleType
from typing import Any

ROOT = Path(__file__).parents[2]
AIRCRAFT = ROOT / "example_briefs" / "aircraft" / "pelquill-2t.toml"
START = 'Condition(mass="1,800 lb", pressure_altitude="8,000 ft", oat="20 degC", ias="60 kt")'
CELLS = [
    f"from briefkit import *\nlive = LiveCondition(load_aircraft({str(AIRCRAFT)!r}), {START})\nlive",
    "DiscMap(live)",
    "Flapping(live)",
    "StallBoundary(live)",
]
# When a move reached the page, and when a picture of it had been drawn: the load of the image, and the frame after it.
WATCH = """() => {
  const seen = window.bkSeen = {moves: [], pictures: [], released: 0};
  document.addEventListener('pointermove', () => seen.moves.push(performance.now()), true);
  document.addEventListener('pointerup', () => { seen.released = performance.now(); }, true);
  document.querySelector('.bqplot image').addEventListener('load',
    () => requestAnimationFrame(() => seen.pictures.push(performance.now())));
}"""


def browser_tools() -> ModuleType:
    """The server and the browser of the browser tests."""
    spec = importlib.util.spec_from_file_location("briefkit_browser_tools", ROOT / "tests" / "browser" / "conftest.py")
    assert spec is not None
    assert spec.loader is not None
    tools = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = tools
    spec.loader.exec_module(tools)
    return tools


class Hand:
    """A mouse on the handle of the airspeed slider."""

    def __init__(self, page: Any) -> None:
        self.page = page
        handle = page.locator(".briefkit .widget-hbox", has_text="Airspeed").first.locator(".noUi-handle")
        handle.scroll_into_view_if_needed()
        box = handle.bounding_box()
        self.x, self.y = box["x"] + box["width"] / 2, box["y"] + box["height"] / 2
        page.mouse.move(self.x, self.y)
        page.mouse.down()

    def to(self, place: int) -> None:
        """Somewhere up the slider, to and fro; no two places in turn give the same speed."""
        self.page.mouse.move(self.x + 8 * (1 + abs(place % 20 - 10)), self.y)


def one_at_a_time(page: Any, moves: int) -> list[float]:
    """Milliseconds from each move to its picture; the page is at rest before each."""
    hand, took = Hand(page), []
    for place in range(moves):
        page.evaluate("() => { bkSeen.moves = []; bkSeen.pictures = []; }")
        hand.to(place)
        page.wait_for_function("() => bkSeen.pictures.length > 0", timeout=10_000, polling=40)
        page.wait_for_function("() => bkPanel.sessionContext.session.kernel.status === 'idle'", polling=40)
        page.wait_for_timeout(100)  # the other exhibits of this move are drawn too before the next
        took.append(page.evaluate("() => bkSeen.pictures[0] - bkSeen.moves[0]"))
    page.mouse.up()
    return took


def flood(page: Any, moves: int) -> tuple[int, float, float]:
    """Pictures drawn of `moves` sent without waiting, ms between two of them, ms from letting go to the last."""
    hand = Hand(page)
    page.evaluate("() => { bkSeen.pictures = []; bkSeen.released = 0; }")
    for place in range(moves):
        hand.to(place)
        page.wait_for_timeout(16)
    page.mouse.up()
    drawn = -1
    while drawn != (now := page.evaluate("() => bkSeen.pictures.length")):
        drawn = now
        page.wait_for_timeout(500)
    pictures = page.evaluate("() => bkSeen.pictures")
    gap = statistics.median(b - a for a, b in pairwise(pictures))
    return drawn, gap, max(pictures[-1] - page.evaluate("() => bkSeen.released"), 0.0)


def last_is_shown(page: Any) -> bool:
    """The disc's caption names the speed in the box, and the picture is the one that speed gives."""
    picture = "() => document.querySelector('.bqplot image').getAttribute('href')"
    size = "async () => (await (await fetch(document.querySelector('.bqplot image').href.baseVal)).arrayBuffer())"
    look = f"async () => {{ const a = new Uint8Array(await ({size})()); return Array.from(a).join(); }}"
    box = page.locator(".briefkit .widget-hbox", has_text="Airspeed").first.locator("input[type=text]")
    speed, before = box.input_value(), page.evaluate(look)
    for typed in ("55 KIAS", speed):
        href = page.evaluate(picture)
        box.fill(typed)
        box.press("Enter")
        page.wait_for_function(f"href => ({picture})() !== href", arg=href, timeout=10_000)
        page.wait_for_timeout(300)
    return bool(page.evaluate(look) == before)


def kernel_times() -> dict[str, float]:
    """Median ms from a slider's value to all new data, three exhibits together, no browser."""
    from briefkit import Condition, DiscMap, Flapping, LiveCondition, StallBoundary, load_aircraft

    live = LiveCondition(load_aircraft(AIRCRAFT), eval(START, {"Condition": Condition}))
    exhibits = [DiscMap(live), Flapping(live), StallBoundary(live)]
    found = {}
    for field, values in (("ias", range(50, 76)), ("load_factor", range(5, 31)), ("mass", range(1600, 1730, 5))):
        slider = next(control.slider for control in live._controls if control.dial.field == field)
        took = []
        for value in values:
            begun = time.perf_counter()
            slider.value = float(value)
            took.append(1e3 * (time.perf_counter() - begun))
        found[field] = statistics.median(took)
    for exhibit in exhibits:
        exhibit.close()
    live.close()
    return found


def main(moves: int = 80) -> None:
    """Measure and print."""
    tools = browser_tools()
    from playwright.sync_api import sync_playwright

    names = {"ias": "airspeed", "load_factor": "bank", "mass": "mass"}
    print("kernel, three exhibits, median: ", end="")
    print(", ".join(f"{names[field]} {ms:.0f} ms" for field, ms in kernel_times().items()))
    with sync_playwright() as play:
        browser = play.chromium.launch(executable_path=tools.CHROMIUM, args=tools.FLAGS)
        for low_delay in (False, True):
            with tempfile.TemporaryDirectory() as folder, tools.serving(Path(folder), browser, low_delay) as lab:
                page = lab.open(CELLS).page
                page.wait_for_function("document.querySelectorAll('.bqplot').length === 4", timeout=90_000)
                page.wait_for_timeout(2000)
                page.evaluate(WATCH)
                took = sorted(one_at_a_time(page, moves))
                drawn, gap, after = flood(page, moves)
                name = "with low delay" if low_delay else "without"
                p95 = took[min(int(0.95 * moves), moves - 1)]
                print(
                    f"{name}: slider to picture median {statistics.median(took):.0f} ms, p95 {p95:.0f} ms; flood: "
                    f"{drawn} drawn of {moves} sent, {gap:.0f} ms between two, last {after:.0f} ms after letting go "
                    f"({after / gap:.1f} refreshes), last value shown: {'yes' if last_is_shown(page) else 'NO'}; "
                    f"load {os.getloadavg()[0]:.1f} on {os.cpu_count()} cores"
                )
        browser.close()


if __name__ == "__main__":
    main(*(int(argument) for argument in sys.argv[1:2]))
