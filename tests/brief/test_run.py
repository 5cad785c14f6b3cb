"""A brief runs in a fresh kernel of this interpreter, and its stills are drawn at the end."""

from __future__ import annotations

import asyncio
import os
import sys
import time
from pathlib import Path

import pytest

from briefkit.brief import run
from briefkit.brief.run import Picture, Words
from briefkit.errors import BuildError

WHOSE = (
    "import os, sys\n"
    f"assert sys.executable == {sys.executable!r}, sys.executable\n"
    "assert os.getcwd() == {folder!r}, os.getcwd()\n"
    "open('pid', 'w').write(str(os.getpid()))\n"
    "print('for the author')"
)
STORED = [
    {"output_type": "display_data", "metadata": {}, "data": {"text/html": "<b>STORED</b>", "text/plain": "STORED"}},
    {"output_type": "error", "ename": "E", "evalue": "STORED", "traceback": []},
]


def ended(pid_file: Path) -> bool:
    """Whether the process whose number stands in a file is gone, within two seconds."""
    for _ in range(20):
        try:
            os.kill(int(pid_file.read_text()), 0)
        except ProcessLookupError:
            return True
        time.sleep(0.1)
    return False


@pytest.mark.slow
def test_fresh_kernel_final_state_and_order(tmp_path, nb):
    notebook = nb.write(
        tmp_path / "brief.ipynb",
        nb.text("Before."),
        nb.code(WHOSE.replace("{folder!r}", repr(str(tmp_path))), outputs=STORED, execution_count=9),
        nb.code(nb.slider, outputs=STORED),
        nb.text("Between."),
        nb.code("slider.value = 7;"),
        nb.code("slider"),
        kernel="no-such-kernel",
    )
    ran = run.run(notebook)
    assert [type(block) for block in ran.blocks] == [Words, Picture, Words, Picture]
    assert [block.text for block in ran.blocks if isinstance(block, Words)] == ["Before.", "Between."]
    pictures = [block.html for block in ran.blocks if isinstance(block, Picture)]
    # shown at 3 and again at 7: both stills are of the end
    assert all("<dd>7</dd>" in html and "<dt>Mass</dt>" in html for html in pictures)
    assert "STORED" not in repr(ran)
    assert ran.notes == ("code cell 1 (import os, sys) printed 'for the author': not on the page",)
    assert ended(tmp_path / "pid")
    assert "STORED" in notebook.read_text(), "the author's file is left as it was"


# after a first cell that shows a slider: source, tags, message
FAILING = {
    "error": ("1 / 0  # a comment", [], r"code cell 2 \(1 / 0  # a comment\): ZeroDivisionError: division by zero"),
    "plain object": ("{'onset': 96.4}", [], r"code cell 2 .*shows \"\{'onset': 96.4\}\", which has no still"),
    "html of another kind": ("from IPython.display import HTML\nHTML('<b>98 kt</b>')", [], "has no still"),
    "widget without a still": ("ipywidgets.Image()", [], "code cell 2 .*no still: cannot put a Image"),
    "closed before the end": ("slider.close()", [], r"code cell 1 .*was closed before the end"),
    "figure in an output box": (
        "box = ipywidgets.Output()\nwith box:\n    display(slider)\nbox",
        [],
        "an Output box shows a figure or an error",
    ),
    "error marked as expected": ("raise ValueError('late')", ["raises-exception"], "ValueError: late"),
    "cell marked to be skipped": ("1 / 0", ["skip-execution"], "ZeroDivisionError"),
    "asks its author": ("input('mass?')", [], "StdinNotImplementedError"),
    "our own error keeps every line": (
        "from briefkit.errors import *\nraise FaultyFile([Fault('a', 'b', 'c', 'd'), Fault('e', 'f', 'g', 'h')])",
        [],
        r"code cell 2 \(from briefkit.errors import \*\): 2 faults:\n.*a: b: read c.*\n.*e: f: read g",
    ),
    "kernel ends": ("import os\nos._exit(3)", [], r"code cell 2 \(import os\): the kernel ended while it ran"),
}


@pytest.mark.slow
@pytest.mark.parametrize("case", FAILING, ids=str)
def test_a_failing_cell_is_named_in_a_sentence(tmp_path, case, nb):
    source, tags, message = FAILING[case]
    first = nb.code("import os\nopen('pid', 'w').write(str(os.getpid()))\n" + nb.slider)
    cell = nb.code(source, metadata={"tags": tags})
    notebook = nb.write(tmp_path / "brief.ipynb", nb.text("words"), first, cell)
    with pytest.raises(BuildError, match=message) as caught:
        run.run(notebook)
    assert "Traceback" not in str(caught.value)
    assert "\x1b" not in str(caught.value)
    assert ended(tmp_path / "pid")


@pytest.mark.slow
def test_a_cell_that_does_not_end_is_ended(tmp_path, monkeypatch, nb):
    monkeypatch.setattr(run, "CELL_SECONDS", 1)
    sleeper = "import os, time\nopen('pid', 'w').write(str(os.getpid()))\ntime.sleep(600)"
    notebook = nb.write(tmp_path / "brief.ipynb", nb.code(sleeper))
    with pytest.raises(BuildError, match=r"code cell 1 \(import os, time\): still running after 1 s"):
        run.run(notebook)
    assert ended(tmp_path / "pid")


@pytest.mark.slow
def test_a_kernel_that_cannot_start_says_why(tmp_path, monkeypatch, nb):
    broken = [sys.executable, "-c", "import sys; sys.exit('no ipykernel here')"]
    monkeypatch.setattr(
        run.OwnInterpreter,
        "get_kernel_spec",
        lambda *_: run.KernelSpec(argv=broken, display_name="x", language="python"),
    )
    notebook = nb.write(tmp_path / "brief.ipynb", nb.code("1"))
    with pytest.raises(BuildError, match="the kernel did not start: no ipykernel here"):
        run.run(notebook)


@pytest.mark.slow
def test_from_inside_a_running_loop(tmp_path, nb):
    """A notebook server exports from inside its own event loop."""
    notebook = nb.write(tmp_path / "brief.ipynb", nb.code(nb.slider))

    async def export() -> run.Ran:
        return run.run(notebook)

    ran = asyncio.run(export())
    assert isinstance(ran.blocks[0], Picture)


@pytest.mark.slow
def test_no_profile_history_or_start_file_of_the_machine(tmp_path, monkeypatch, nb):
    profile = tmp_path / "ipython" / "profile_default" / "startup"
    profile.mkdir(parents=True)
    (profile / "00.py").write_text("planted = 1")
    (tmp_path / "start.py").write_text("planted = 1")
    monkeypatch.setenv("IPYTHONDIR", str(tmp_path / "ipython"))
    monkeypatch.setenv("PYTHONSTARTUP", str(tmp_path / "start.py"))
    notebook = nb.write(
        tmp_path / "brief.ipynb",
        nb.code("assert 'planted' not in globals()\nassert not get_ipython().history_manager.enabled"),
    )
    assert run.run(notebook) == run.Ran((), ())


@pytest.mark.parametrize("content", ["", "{", "[]", '{"cells": 3}', '{"nbformat": 4, "cells": [{}]}', "\0\1"])
def test_a_damaged_notebook_is_a_sentence(tmp_path, content):
    notebook = tmp_path / "brief.ipynb"
    notebook.write_text(content)
    with pytest.raises(BuildError, match=r"brief.ipynb: not a notebook, or a damaged one"):
        run.read_notebook(notebook)


def test_a_notebook_that_is_not_there_or_too_large(tmp_path, monkeypatch, nb):
    with pytest.raises(BuildError, match=r"brief.ipynb: cannot be read \(No such file"):
        run.read_notebook(tmp_path / "brief.ipynb")
    monkeypatch.setattr(run, "_LARGEST_NOTEBOOK", 100)
    notebook = nb.write(tmp_path / "brief.ipynb", nb.text("x" * 200))
    with pytest.raises(BuildError, match="larger than 100 bytes; clear its outputs"):
        run.read_notebook(notebook)
