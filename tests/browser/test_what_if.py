"""The recurrent check in a real JupyterLab: every other exhibit appears, a case by keyboard alone, a killed kernel."""

from __future__ import annotations

import math
import os
import shutil
from collections.abc import Iterator
from itertools import pairwise
from pathlib import Path
from typing import Any

import pytest

from briefkit.session.record import read_log

pytestmark = [pytest.mark.browser, pytest.mark.slow]

EXAMPLES = Path(__file__).parents[2] / "example_briefs"
TEXT = r"document.querySelector('.jp-Notebook').innerText.replace(/\u00a0/g, ' ')"
STAGES = (
    "Lock the predictions",
    "Show the manual’s figure",
    "Show the computed figure",
    "Record the decision",
    "Next case",
)


def cells(operator: Path) -> list[str]:
    """A notebook of exhibits, and the panel at its end."""
    start = f"""
from pathlib import Path
from briefkit import *
operator = Path({str(operator)!r})
aircraft = load_aircraft(operator / "aircraft" / "pelquill-2t.toml")
operation = load_operation(operator)
fleet = operation.entry_for(aircraft)
vellmark = operation.work_areas["vellmark"]
turn = Condition(mass="1,800 lb", pressure_altitude="8,000 ft", oat="20 degC", ias="60 kt", bank="30 deg")
"""
    return [
        start,
        "EquivalentChart(aircraft, turn)",
        "SetByTable(aircraft, fleet, [vellmark])",
        "Reductions(aircraft, fleet, vellmark)",
        "RulesOfThumb(aircraft, turn)",
        "CueCard(aircraft, turn)",
        "panel = WhatIf(load_deck(operator / 'vellmark-2t', aircraft))\npanel",
    ]


@pytest.fixture(scope="module")
def operator(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("operator") / "operator"
    shutil.copytree(EXAMPLES, folder, ignore=shutil.ignore_patterns(".*", "*.html", "*.png", "session_logs"))
    return folder


@pytest.fixture(scope="module")
def panel(lab: Any, operator: Path) -> Iterator[Any]:
    """The notebook, run once for the module: one page, one kernel."""
    seen = lab.open(cells(operator))
    seen.page.wait_for_selector(".briefkit-what-if input[type=text]", timeout=60_000)
    yield seen
    seen.page.context.close()
    lab.end_kernels()


def photograph(page: Any, name: str, part: Any = None) -> None:
    """Kept where BRIEFKIT_SCREENSHOTS says, to be looked at."""
    if folder := os.environ.get("BRIEFKIT_SCREENSHOTS"):
        (part or page).screenshot(path=Path(folder) / f"{name}.png")


def focused(page: Any) -> str:
    """What the keyboard speaks to: a button's words, or a box's label."""
    return str(page.evaluate(
        "() => { const it = document.activeElement; const box = it.closest('.widget-text');"
        " if (it.matches('.noUi-handle')) return 'slider';"
        " return it.tagName === 'BUTTON' ? it.innerText : box ? box.querySelector('label').innerText : it.tagName; }"
    ))  # fmt: skip


def tries(operator: Path) -> list[Any]:
    (path,) = (operator / "session_logs").glob("*.jsonl")
    return [step for step in read_log(path).steps if step.kind == "what-if"]


def tab_to(page: Any, name: str, key: str = "Tab") -> None:
    for _ in range(24):
        if focused(page) == name:
            return
        page.keyboard.press(key)
    pytest.fail(f"{name!r} is not reached by {key}; at {focused(page)!r}")


def at_rest(page: Any) -> None:
    """Wait until nothing of the exhibits moves any more."""
    assert page.evaluate("""async () => {
      const look = () => [...document.querySelectorAll('.briefkit, .briefkit *')].map(it => {
        const box = it.getBoundingClientRect();
        return [box.x, box.y, box.width, box.height].map(Math.round);
      }).join();
      let last = '';
      for (let i = 0; i < 100; i++) {
        await new Promise(done => setTimeout(done, 60));
        const now = look();
        if (now === last) return true;
        last = now;
      }
      return false;
    }""")


def press(page: Any, name: str, then: str) -> None:
    """Space on a button, and what must be on the screen afterwards. A key held down is one step: not sooner."""
    tab_to(page, name)
    page.wait_for_timeout(360)
    page.keyboard.press("Space")
    page.wait_for_function(f"{TEXT}.includes({then!r})", timeout=20_000)


def clipped(page: Any) -> list[str]:
    """Words and controls of the exhibits that reach past what is shown of them, or lie over one another."""
    return list(
        page.evaluate("""() => {
      const found = [];
      for (const root of document.querySelectorAll('.briefkit')) {
        const shown = [...root.querySelectorAll('p, h2, h3, h4, table, button, input, .bqplot')]
          .filter(it => it.getClientRects().length && it.offsetParent !== null || it.closest('.bqplot') === it);
        const frame = root.getBoundingClientRect();
        for (const it of shown) {
          const box = it.getBoundingClientRect();
          if (!box.width) continue;
          const own = it.matches('p, h2, h3, h4, button');
          if (own && it.scrollWidth > it.clientWidth + 1) found.push('cut: ' + it.innerText);
          const scrolls = it.closest('.widget-box') && [...root.querySelectorAll('.widget-box')].some(
            one => one.contains(it) && getComputedStyle(one).overflowX === 'auto');
          if (box.right > frame.right + 1 && !scrolls) found.push('past the edge: ' + (it.innerText || it.className));
        }
        // The row of moves stays at the foot of a filled window, over what is scrolled.
        const moves = root.querySelector('.moves');
        const lone = shown.filter(it => it.matches('p, h2, h3, h4, button, input'));
        for (let i = 0; i < lone.length; i++) for (let j = i + 1; j < lone.length; j++) {
          const a = lone[i].getBoundingClientRect(), b = lone[j].getBoundingClientRect();
          if (lone[i].contains(lone[j]) || lone[j].contains(lone[i])) continue;
          if (moves && root.matches('.briefkit-fill') && moves.contains(lone[i]) !== moves.contains(lone[j])) continue;
          const wide = Math.min(a.right, b.right) - Math.max(a.left, b.left);
          const high = Math.min(a.bottom, b.bottom) - Math.max(a.top, b.top);
          if (wide > 2 && high > 4) found.push(`over: ${lone[i].innerText} / ${lone[j].innerText}`);
        }
      }
      return found;
    }""")
    )


@pytest.mark.parametrize("width", [800, 1920])
def test_every_exhibit_appears_neither_cut_nor_overlapping(panel, width):
    page = panel.page
    page.set_viewport_size({"width": width, "height": 1600})
    page.wait_for_function(f"{TEXT}.includes('If it starts')", timeout=90_000)
    page.wait_for_function("document.querySelectorAll('.bqplot').length === 2", timeout=30_000)
    at_rest(page)
    text = str(page.evaluate(TEXT))
    for words in (
        "The equivalent level flight", "73 KIAS here, 6 kt below VNE", "What sets the answer", "Before a turn",
        "at most 20°, and 10 kt or more", "Rules of thumb", "kt slower", "about 15.1 times a second",
        "Which one is it?",
    ):  # fmt: skip
        assert words in text
    for place in range(5):
        photograph(page, f"exhibit-{place}-{width}", page.locator(".briefkit").nth(place))
    assert clipped(page) == []
    assert panel.outside == []
    assert panel.console == []


def test_a_case_is_predicted_revealed_and_logged_by_keyboard_only(panel, operator):
    page = panel.page
    page.evaluate("document.querySelector('.briefkit-what-if input').focus()")
    assert focused(page) == "Prediction 1"
    page.keyboard.type("74 KIAS, 10 less")
    page.keyboard.press("Tab")
    assert focused(page) == "Prediction 2"
    page.keyboard.type("70 KIAS")
    for now, then in pairwise(STAGES[:4]):
        press(page, now, then)
    text = str(page.evaluate(TEXT))
    assert "74 KIAS, 10 less; 70 KIAS" in text
    assert text.index("The manual\n") < text.index("Computed\n")
    tab_to(page, "Decision", "Shift+Tab")
    page.keyboard.type("at most 20 degrees, 10 kt slower")
    press(page, "Record the decision", "What to take from it")
    (path,) = (operator / "session_logs").glob("*.jsonl")
    log = read_log(path)
    assert [step.kind for step in log.steps] == ["opened", "case", "predictions", "manual", "computed", "decision"]
    assert log.steps[2].predictions == ("74 KIAS, 10 less", "70 KIAS")
    assert log.steps[-1].decision == "at most 20 degrees, 10 kt slower"
    # Keys pressed on a button must not reach the notebook's own single-key commands (a cell added, cut or run).
    assert page.evaluate("window.bkPanel.content.widgets.length") == len(cells(operator))


@pytest.mark.parametrize("width", [1920, 800])
def test_another_condition_is_tried_by_keyboard_only(panel, operator, width):
    page = panel.page
    page.set_viewport_size({"width": width, "height": 900 if width < 1000 else 1080})
    tab_to(page, "One key:")
    page.keyboard.press("f")
    page.wait_for_selector(".briefkit-fill", timeout=10_000)
    page.keyboard.press("t")
    page.wait_for_selector(".free-try .noUi-handle", timeout=10_000)
    before = tries(operator)
    tab_to(page, "slider", "Shift+Tab")
    while not page.evaluate("document.activeElement.closest('.widget-hslider').innerText").startswith("Bank"):
        page.keyboard.press("Shift+Tab")
        tab_to(page, "slider", "Shift+Tab")
    page.keyboard.press("ArrowLeft")
    page.wait_for_function(f"{TEXT}.includes('Tried')", timeout=10_000)
    page.wait_for_function(f"{TEXT}.includes('bank 29°')", timeout=10_000)
    page.keyboard.press("Tab")
    page.keyboard.press("Control+A")
    page.keyboard.type("steep")
    page.keyboard.press("Enter")
    page.wait_for_function(f"{TEXT}.includes('Refused')", timeout=10_000)
    now = tries(operator)
    assert len(now) == len(before) + 1
    assert now[-1].inputs["load_factor"] == pytest.approx(1.0 / math.cos(math.radians(29.0)), abs=1e-6)
    at_rest(page)
    photograph(page, f"panel-tried-{width}")
    assert clipped(page) == []
    # What was tried is on the screen beside or under the sliders, without scrolling.
    assert page.evaluate("""() => { const tried = [...document.querySelectorAll('.briefkit-fill h3')].find(
        it => it.textContent === 'Tried').getBoundingClientRect();
        const moves = document.querySelector('.briefkit-fill .moves').getBoundingClientRect();
        return tried.top > 0 && tried.bottom < moves.top; }""")
    tab_to(page, "One key:")
    page.keyboard.press("t")
    page.wait_for_function(f"!{TEXT}.includes('Tried')", timeout=10_000)
    page.keyboard.press("f")
    page.wait_for_selector(".briefkit-fill", state="detached", timeout=10_000)


@pytest.mark.parametrize("width", [800, 1920])
def test_it_fills_the_window_without_menus_or_code_and_neither_cuts_nor_overlaps(panel, width):
    page = panel.page
    page.set_viewport_size({"width": width, "height": 900 if width < 1000 else 1080})
    page.evaluate("document.querySelector('.briefkit-what-if').scrollIntoView()")
    at_rest(page)
    photograph(page, f"panel-in-lab-{width}")
    assert clipped(page) == []
    tab_to(page, "One key:", "Tab")
    page.keyboard.press("f")
    page.wait_for_selector(".briefkit-fill", timeout=10_000)
    at_rest(page)
    photograph(page, f"panel-filled-{width}")
    covered = page.evaluate(
        "() => [[5, 5], [innerWidth / 2, 12], [innerWidth - 30, 60], [40, innerHeight - 8], [200, 120]].every("
        "([x, y]) => document.elementFromPoint(x, y).closest('.briefkit-fill'))"
    )
    assert covered
    assert clipped(page) == []
    size = page.evaluate("parseFloat(getComputedStyle(document.querySelector('.briefkit-fill h2')).fontSize)")
    assert size >= 20
    moves = page.evaluate("document.querySelector('.moves').getBoundingClientRect().height / innerHeight")
    assert moves < 0.2
    if width > 1000:  # a projector shows the whole case, decided and all, without scrolling
        assert page.evaluate("(() => { const it = document.querySelector('.briefkit-fill');"
                             " return it.scrollHeight <= it.clientHeight + 1; })()")  # fmt: skip
    # What does not fit is scrolled to, by keyboard too: the last line can be seen above the row of moves.
    for _ in range(6):
        page.keyboard.press("PageDown")
    at_rest(page)
    photograph(page, f"panel-filled-{width}-end")
    assert page.evaluate(
        "() => { const all = [...document.querySelectorAll('.briefkit-fill .screen p')].map("
        "it => it.getBoundingClientRect().bottom);"
        " return Math.max(...all) <= document.querySelector('.briefkit-fill .moves').getBoundingClientRect().top + 1; }"
    )
    page.keyboard.press("f")
    page.wait_for_selector(".briefkit-fill", state="detached", timeout=10_000)


def test_one_key_blanks_the_whole_window_and_one_shows_it_again(panel):
    page = panel.page
    tab_to(page, "One key:")
    page.keyboard.press("b")
    page.wait_for_selector(".briefkit-blank", timeout=10_000)
    at_rest(page)
    photograph(page, "panel-blank")
    shown = page.evaluate("() => document.querySelector('.briefkit-blank').innerText.trim().split('\\n')")
    assert [line for line in shown if line.strip()] in (
        ["Show the screen", "One key:"],
        ["One key:", "Show the screen"],
    )
    assert page.evaluate(
        "() => [[5, 5], [innerWidth / 2, innerHeight / 2]].every(([x, y]) => getComputedStyle("
        "document.elementFromPoint(x, y).closest('.briefkit-blank')).backgroundColor === 'rgb(0, 0, 0)')"
    )
    page.keyboard.press("n")
    page.wait_for_function("document.querySelector('.briefkit-what-if h2').textContent.includes('Case 2 of 7')")
    page.keyboard.press("b")
    page.wait_for_selector(".briefkit-blank", state="detached", timeout=10_000)
    page.wait_for_function(f"{TEXT}.includes('Case 2 of 7')", timeout=10_000)


def test_a_kernel_killed_in_mid_deck_leaves_a_whole_log(panel, lab, operator):
    page = panel.page
    page.evaluate("document.querySelector('.briefkit-what-if input').focus()")
    page.keyboard.type("less 10 kt")
    press(page, STAGES[0], "less 10 kt")
    (path,) = (operator / "session_logs").glob("*.jsonl")
    before = read_log(path)
    assert before.steps[-1].predictions == ("less 10 kt",)
    page.evaluate("""async () => { const kernel = window.bkPanel.sessionContext.session.kernel;
        const gone = new Promise((yes, no) => {
          kernel.statusChanged.connect((_, now) => /restarting|dead/.test(now) && yes(now));
          setTimeout(() => no(new Error('the kernel lives')), 20000);
        });
        kernel.requestExecute({code: 'import os, signal; os.kill(os.getpid(), signal.SIGKILL)'});
        await gone; }""")
    after = read_log(path)
    assert after.faults == ()
    assert after.steps == before.steps
    assert not path.with_name(path.name + ".torn").exists()
