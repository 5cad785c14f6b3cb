"""Runs a brief's notebook in a fresh kernel of this interpreter, and asks that kernel once for the stills.

Stored outputs are never read. Stills are drawn at the end: a display is frozen when its cell is shown, and a slider
moved by a later cell would not be on paper. The kernel is ours to start and to end, so that an interrupt ends it too.
"""

from __future__ import annotations

import asyncio
import os
import re
import sys
import tempfile
from collections.abc import AsyncIterator, Coroutine, Iterator
from concurrent.futures import ThreadPoolExecutor
from contextlib import asynccontextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import Any, TypeVar

import nbformat
from jupyter_client.kernelspec import KernelSpec, KernelSpecManager
from jupyter_client.manager import AsyncKernelManager
from nbclient import NotebookClient
from nbclient.exceptions import CellExecutionError, CellTimeoutError, DeadKernelError
from nbformat import NotebookNode

from briefkit import errors
from briefkit.brief.stills import MIME, REQUEST
from briefkit.errors import BuildError

T = TypeVar("T")

CELL_SECONDS = 120
START_SECONDS = 60
_LARGEST_NOTEBOOK = 20_000_000
_WIDGET = "application/vnd.jupyter.widget-view+json"
_ESCAPES = re.compile(r"\x1b\[[0-9;]*[A-Za-z]")
_OURS = {
    name for name, kind in vars(errors).items() if isinstance(kind, type) and issubclass(kind, errors.BriefkitError)
}


@dataclass(frozen=True)
class Words:
    """A markdown cell: its text and the pictures pasted into it, and where it stands (for messages)."""

    place: str
    text: str
    attachments: dict[str, dict[str, str]]


@dataclass(frozen=True)
class Picture:
    """The still of one displayed exhibit, an HTML fragment, and the cell that shows it."""

    place: str
    html: str


@dataclass(frozen=True)
class Ran:
    """What a notebook leaves for the page, in its order, and what its cells said that is not for the page."""

    blocks: tuple[Words | Picture, ...]
    notes: tuple[str, ...]


class OwnInterpreter(KernelSpecManager):
    """Whatever kernel a notebook names, it gets the interpreter that runs briefkit."""

    def find_kernel_specs(self) -> dict[str, str]:
        return {"python3": sys.prefix}

    def get_kernel_spec(self, kernel_name: str) -> KernelSpec:
        # Without the first option each kernel prints a warning of the debugger's.
        argv = [sys.executable, "-Xfrozen_modules=off", "-m", "ipykernel_launcher", "-f", "{connection_file}"]
        return KernelSpec(argv=argv, display_name="Python 3", language="python")


def run(notebook: Path) -> Ran:
    """Run one notebook to the end and collect its words and stills; also from inside a running event loop.

    Raises:
        BuildError: the file cannot be read, a cell fails or takes longer than `CELL_SECONDS`, or something is
            displayed that has no still. The text names the cell.
    """
    return run_node(read_notebook(notebook), notebook)


def run_node(node: NotebookNode, notebook: Path) -> Ran:
    """`run` for a notebook already in memory; `notebook` says where it lives. Raises as `run`."""
    return complete(run_async(node, notebook))


def complete(work: Coroutine[Any, Any, T]) -> T:
    """Wait for a coroutine, also from inside a running event loop (a live notebook, a notebook server's export)."""
    if not _in_a_loop():
        return asyncio.run(work)
    with ThreadPoolExecutor(1) as pool:
        return pool.submit(asyncio.run, work).result()


def _in_a_loop() -> bool:
    try:
        asyncio.get_running_loop()
    except RuntimeError:
        return False
    return True


def read_notebook(notebook: Path) -> NotebookNode:
    """The notebook without anything it stored. Raises BuildError with a sentence when it cannot be read."""
    try:
        if notebook.stat().st_size > _LARGEST_NOTEBOOK:
            raise BuildError(f"{notebook.name}: larger than {_LARGEST_NOTEBOOK:,} bytes; clear its outputs and save it")
        node: NotebookNode = nbformat.read(notebook, as_version=4)  # type: ignore[no-untyped-call]
        return node
    except OSError as error:
        raise BuildError(f"{notebook.name}: cannot be read ({error.strerror})") from None
    except (ValueError, KeyError, AttributeError, TypeError, nbformat.ValidationError):
        raise BuildError(f"{notebook.name}: not a notebook, or a damaged one; open and save it in JupyterLab") from None


async def run_async(node: NotebookNode, notebook: Path) -> Ran:
    """`run` as a coroutine, so that several briefs run at once; `node` is left as it was."""
    cells = [_clean(cell) for cell in node.cells]
    names = list(_places(cells))
    bare = _node({"nbformat": 4, "nbformat_minor": 4, "metadata": {}, "cells": cells})
    async with _kernel(notebook.parent) as (manager, client, complaints):
        runner = NotebookClient(bare, km=manager, timeout=CELL_SECONDS)
        runner.kc = client
        for index, cell in enumerate(cells):
            await _run_cell(runner, cell, index, names[index], complaints)
        shown = [_shown(cell, names[index]) for index, cell in enumerate(cells)]
        _refuse_boxes(runner)
        answers = await _ask(runner, [model for models in shown for model in models], complaints)
    return _collect(cells, names, shown, answers)


def _clean(cell: NotebookNode) -> NotebookNode:
    """The cell without anything a former run left in it, and without tags that would skip it or excuse its error."""
    if cell.cell_type == "code":
        return _node(_code(cell.source))
    kept = {"cell_type": cell.cell_type, "metadata": {}, "source": cell.source}
    return _node(kept | {"attachments": dict(cell.get("attachments", {}))})


def _node(content: dict[str, Any]) -> NotebookNode:
    node: NotebookNode = nbformat.from_dict(content)  # type: ignore[no-untyped-call]
    return node


def _code(source: str) -> dict[str, Any]:
    return {"cell_type": "code", "metadata": {}, "source": source, "outputs": [], "execution_count": None}


def _places(cells: list[NotebookNode]) -> Iterator[str]:
    """Code cells as JupyterLab counts them after a run from the top; others by the cell they follow."""
    count = 0
    for cell in cells:
        if cell.cell_type != "code" or not cell.source.strip():
            yield f"the text after code cell {count}" if count else "the text before the first code cell"
            continue
        count += 1
        lines = [line.strip() for line in cell.source.splitlines() if line.strip() and not line.strip().startswith("#")]
        head = (lines or [cell.source.strip()])[0]
        yield f"code cell {count} ({head[:57] + '...' if len(head) > 60 else head})"


@asynccontextmanager
async def _kernel(folder: Path) -> AsyncIterator[tuple[AsyncKernelManager, Any, Path]]:
    """A kernel with nobody's profile, history or start-up file, working in `folder`; ended on every way out."""
    with tempfile.TemporaryDirectory(prefix="briefkit-", ignore_cleanup_errors=True) as private:
        complaints = Path(private) / "stderr"
        environment = {key: value for key, value in os.environ.items() if key != "PYTHONSTARTUP"}
        environment |= {"IPYTHONDIR": private, "PYTHONHASHSEED": "0", "PYDEVD_DISABLE_FILE_VALIDATION": "1"}
        manager = AsyncKernelManager(kernel_spec_manager=OwnInterpreter())
        client = None
        try:
            with complaints.open("wb") as stderr:
                await manager.start_kernel(
                    extra_arguments=["--HistoryManager.enabled=False"],
                    cwd=str(folder),
                    env=environment,
                    stderr=stderr,
                )
            client = manager.client()
            client.start_channels()
            await _ready(client, complaints)
            yield manager, client, complaints
        finally:
            if client is not None:
                client.stop_channels()
            if manager.has_kernel:
                await asyncio.shield(manager.shutdown_kernel(now=True))


async def _ready(client: Any, complaints: Path) -> None:
    try:
        await client.wait_for_ready(timeout=START_SECONDS)
    except RuntimeError as error:
        raise BuildError(f"the kernel did not start: {_last_line(complaints) or error}") from None
    client.allow_stdin = False  # a cell that asks its author a question fails instead of waiting for ever


async def _run_cell(runner: NotebookClient, cell: NotebookNode, index: int, place: str, complaints: Path) -> None:
    try:
        await runner.async_execute_cell(cell, index)
    except CellExecutionError as error:
        raise BuildError(f"{place}: {_said(error)}") from None
    except CellTimeoutError:
        raise BuildError(f"{place}: still running after {CELL_SECONDS} s") from None
    except DeadKernelError:
        current = asyncio.current_task()
        if current is not None and current.cancelling():  # nbclient takes our own interrupt for a dead kernel
            raise asyncio.CancelledError from None
        raise BuildError(f"{place}: the kernel ended while it ran. {_last_line(complaints)}".rstrip()) from None


def _said(error: CellExecutionError) -> str:
    """An error as its last line; one of ours as it stands (it lists every fault)."""
    text = _ESCAPES.sub("", str(error.evalue)).strip()
    if error.ename in _OURS:
        return text
    return ": ".join(part for part in (str(error.ename), text.splitlines()[-1] if text else "") if part)


def _shown(cell: NotebookNode, place: str) -> list[str]:
    """The models a cell displays; anything else displayed is refused, never dropped."""
    models = []
    for output in cell.get("outputs", []):
        if output.output_type == "stream":
            continue
        view = output.get("data", {}).get(_WIDGET)
        if view is None:
            text = str(output.get("data", {}).get("text/plain", "something")).splitlines() or ["something"]
            raise BuildError(
                f"{place}: shows {text[0][:60]!r}, which has no still for the page; "
                "show an exhibit or a figure, or end the line with a semicolon to show nothing"
            )
        models.append(str(view["model_id"]))
    return models


def _refuse_boxes(runner: NotebookClient) -> None:
    """An output box is left out of a still, so whatever stands in one would vanish from the page."""
    for state in runner.widget_state.values():
        if any(output["output_type"] != "stream" for output in state.get("outputs", ())):
            raise BuildError("an Output box shows a figure or an error; show it by itself, an Output box has no still")


async def _ask(runner: NotebookClient, models: list[str], complaints: Path) -> list[dict[str, str]]:
    """One question to the kernel: the still of each displayed model in turn, or why there is none."""
    if not models:
        return []
    cell = _node(_code(REQUEST.format(models=models)))
    runner.nb.cells.append(cell)
    await _run_cell(runner, cell, len(runner.nb.cells) - 1, "drawing the stills", complaints)
    for output in cell.outputs:
        if MIME in output.get("data", {}):
            return list(output.data[MIME])
    raise BuildError("drawing the stills: the kernel gave no answer")


def _collect(cells: list[NotebookNode], names: list[str], shown: list[list[str]], answers: list[dict[str, str]]) -> Ran:
    blocks: list[Words | Picture] = []
    notes: list[str] = []
    following = iter(answers)
    for cell, place, models in zip(cells, names, shown, strict=True):
        if cell.cell_type == "markdown" and cell.source.strip():
            blocks.append(Words(place, cell.source, cell.get("attachments", {})))
        for _ in models:
            answer = next(following)
            if "fault" in answer:
                raise BuildError(f"{place}: {answer['fault']}")
            blocks.append(Picture(place, answer["still"]))
        notes += [_note(output, place) for output in cell.get("outputs", []) if output.output_type == "stream"]
    return Ran(tuple(blocks), tuple(notes))


def _note(output: NotebookNode, place: str) -> str:
    last = (_ESCAPES.sub("", output.text).strip().splitlines() or [""])[-1]
    verb = "warned" if output.name == "stderr" else "printed"
    return f"{place} {verb} {last[:80]!r}: not on the page"


def _last_line(file: Path) -> str:
    try:
        lines = file.read_text(encoding="utf-8", errors="replace").strip().splitlines()
    except OSError:
        return ""
    return lines[-1].strip() if lines else ""
