"""A real JupyterLab on loopback with Debian's Chromium in front; skipped, with the reason, where either is missing."""

from __future__ import annotations

import json
import os
import secrets
import shutil
import socket
import subprocess
import sys
import time
import urllib.request
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import nbformat
import pytest

CHROMIUM = "/usr/bin/chromium"
# No network beyond loopback, no first-run pages, a sandbox a container has not got.
FLAGS = [
    "--no-sandbox", "--disable-gpu", "--disable-background-networking", "--disable-component-update",
    "--disable-sync", "--no-first-run",
]  # fmt: skip
NO_NEWS = {"@jupyterlab/apputils-extension:notification": {"fetchNews": "false", "checkForUpdates": False}}


@pytest.fixture(scope="module")
def chromium() -> Iterator[Any]:
    """A browser of its own for a test module (a session-wide one breaks later asyncio.run calls)."""
    if not Path(CHROMIUM).exists():
        # .ci/run installs it: there a missing browser is a failure, not a reason to look away
        missing = pytest.fail if os.environ.get("CI") == "true" else pytest.skip
        missing(f"needs Debian's Chromium at {CHROMIUM}")
    from playwright.sync_api import sync_playwright

    with sync_playwright() as play:
        browser = play.chromium.launch(executable_path=CHROMIUM, args=FLAGS)
        yield browser
        browser.close()


@dataclass
class Lab:
    """A running server: `open` shows a notebook of the given cells, run, in a page of its own."""

    url: str
    token: str
    folder: Path
    browser: Any

    def open(self, cells: list[str], width: int = 1300) -> LabPage:
        name = f"{secrets.token_hex(4)}.ipynb"
        # With a kernel named, no dialog asks for one.
        kernel = {"name": "python3", "display_name": "Python 3", "language": "python"}
        book = nbformat.v4.new_notebook(metadata={"kernelspec": kernel})
        book.cells = [nbformat.v4.new_code_cell(cell) for cell in cells]
        nbformat.write(book, self.folder / name)
        context = self.browser.new_context(viewport={"width": width, "height": 1600})
        page = context.new_page()
        seen = LabPage(page, [], [])
        page.on("console", lambda message: seen.console.append(message.text) if message.type == "error" else None)
        page.on("request", lambda request: seen.outside.append(request.url) if self._outside(request.url) else None)
        page.goto(f"{self.url}/lab?token={self.token}&reset")
        page.wait_for_function("window.jupyterapp !== undefined", timeout=60_000)
        page.evaluate(_RUN_ALL, name)
        return seen

    def _outside(self, url: str) -> bool:
        return not url.startswith((self.url, self.url.replace("http", "ws"), "data:", "blob:"))

    def end_kernels(self) -> None:
        for kernel in self._ask("GET", "/api/kernels"):
            self._ask("DELETE", f"/api/kernels/{kernel['id']}")

    def _ask(self, method: str, path: str) -> Any:
        request = urllib.request.Request(self.url + path, method=method)
        request.add_header("Authorization", f"token {self.token}")
        with urllib.request.urlopen(request, timeout=10) as answer:
            body = answer.read()
        return json.loads(body) if body else None


@dataclass
class LabPage:
    """A page with a notebook that has been run; `console` holds error messages, `outside` requests off loopback."""

    page: Any
    console: list[str]
    outside: list[str]

    def run_cell_again(self, index: int) -> None:
        self.page.evaluate(_RUN_ONE, index)


# Menus met a "Select Kernel" dialog in two of three trial runs; commands passed ten of ten.
_RUN_ALL = """name => Promise.race([
  new Promise((_, no) => setTimeout(() => no(new Error('the notebook did not run within 60 s')), 60000)), (async () => {
  const app = window.jupyterapp;
  await app.restored;
  const panel = await app.commands.execute('docmanager:open', {path: name, factory: 'Notebook'});
  await panel.context.ready;
  await panel.sessionContext.ready;
  window.bkPanel = panel;
  await app.commands.execute('notebook:run-all-cells');
  })()])"""
_RUN_ONE = """async index => {
  const app = window.jupyterapp;
  window.bkPanel.content.activeCellIndex = index;
  await app.commands.execute('notebook:run-cell');
}"""


@pytest.fixture(scope="module")
def lab(chromium: Any, tmp_path_factory: pytest.TempPathFactory) -> Iterator[Lab]:
    """One server for a test module, on loopback, in a folder of its own, with nothing of the user's configuration."""
    if shutil.which("jupyter-lab", path=str(Path(sys.executable).parent)) is None:
        pytest.skip("needs JupyterLab (the lab extra)")
    with serving(tmp_path_factory.mktemp("lab"), chromium) as served:
        yield served


@contextmanager
def serving(folder: Path, browser: Any, low_delay: bool = True) -> Iterator[Lab]:
    """A server on loopback in `folder`, `low_delay` as `briefkit live` sets it."""
    home, books = folder / "home", folder / "books"
    (home / "settings").mkdir(parents=True)
    books.mkdir()
    (home / "settings" / "overrides.json").write_text(json.dumps(NO_NEWS), encoding="utf-8")
    port, token = _free_port(), secrets.token_hex(16)
    environment = os.environ | {
        "HOME": str(home), "JUPYTER_CONFIG_DIR": str(home / "config"), "JUPYTER_DATA_DIR": str(home / "data"),
        "JUPYTER_RUNTIME_DIR": str(home / "runtime"), "IPYTHONDIR": str(home / "ipython"),
    }  # fmt: skip
    start = "from jupyterlab.labapp import main; main()"
    if low_delay:
        start = f"from briefkit.brief.low_delay import send_at_once; assert send_at_once(); {start}"
    command = [
        sys.executable, "-c", start, "--no-browser", "--ServerApp.ip=127.0.0.1", f"--ServerApp.port={port}",
        f"--IdentityProvider.token={token}", f"--ServerApp.root_dir={books}", "--ServerApp.port_retries=0",
        "--LabApp.expose_app_in_browser=True", f"--LabApp.app_settings_dir={home / 'settings'}", "--allow-root",
    ]  # fmt: skip
    with (folder / "log").open("wb") as log:
        server = subprocess.Popen(command, env=environment, stdout=log, stderr=subprocess.STDOUT)
        try:
            _wait_until(lambda: _answers(port), 40.0, f"JupyterLab did not start; see {folder / 'log'}")
            yield Lab(f"http://127.0.0.1:{port}", token, books, browser)
        finally:
            server.terminate()
            try:
                server.wait(timeout=20)
            except subprocess.TimeoutExpired:  # a kernel that will not go must not fail the test before it
                server.kill()
                server.wait()


@pytest.fixture
def notebook(lab: Lab) -> Iterator[Callable[..., LabPage]]:
    """Opens notebooks and gives their pages and kernels back afterwards."""
    opened: list[LabPage] = []

    def open_one(cells: list[str], width: int = 1300) -> LabPage:
        opened.append(lab.open(cells, width))
        return opened[-1]

    yield open_one
    for seen in opened:
        seen.page.context.close()
    lab.end_kernels()


def _free_port() -> int:
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        return int(probe.getsockname()[1])


def _answers(port: int) -> bool:
    with socket.socket() as probe:
        probe.settimeout(0.5)
        return probe.connect_ex(("127.0.0.1", port)) == 0


def _wait_until(done: Callable[[], bool], seconds: float, complaint: str) -> None:
    end = time.monotonic() + seconds
    while not done():
        if time.monotonic() > end:
            pytest.fail(complaint)
        time.sleep(0.1)
