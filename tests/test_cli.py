"""The command line: sentences, exit codes, and nothing loaded that a command does not need."""

from __future__ import annotations

import json
import os
import re
import shutil
import signal
import subprocess
import sys
import time
import urllib.error
import urllib.request
from pathlib import Path

import pytest
from typer.testing import CliRunner

from briefkit.brief import lab
from briefkit.cli import app

COMMAND = [sys.executable, "-c", "from briefkit.cli import main; main()"]
HEAVY = ("numpy", "scipy", "nbformat", "nbclient", "nbconvert", "jupyter_client", "ipywidgets", "bqplot")


def briefkit(*arguments: object, **options: object) -> subprocess.CompletedProcess[str]:
    command = [*COMMAND, *map(str, arguments)]
    return subprocess.run(command, capture_output=True, text=True, timeout=120, check=False, **options)  # type: ignore[call-overload,no-any-return]


@pytest.fixture
def operator(tmp_path: Path, examples: Path) -> Path:
    """The invented operator, with a notebook of words only."""
    folder = tmp_path / "operator"
    shutil.copytree(examples, folder, ignore=shutil.ignore_patterns(".*", "*.html"))
    write_notebook(folder / "vellmark-2t" / "brief.ipynb", "1 + 1;")
    return folder


def write_notebook(file: Path, source: str) -> None:
    cell = {"cell_type": "code", "source": source, "metadata": {}, "outputs": [], "execution_count": None}
    file.write_text(json.dumps({"nbformat": 4, "nbformat_minor": 4, "metadata": {}, "cells": [cell]}))


@pytest.mark.parametrize("arguments", [["--help"], ["build", "--help"], ["new", "--help"], ["--version"]])
def test_help_loads_nothing_it_does_not_need(arguments):
    look = f"import sys; print('loaded:', [name for name in {HEAVY!r} if name in sys.modules], file=sys.stderr)"
    source = f"import atexit\natexit.register(exec, {look!r}, {{}})\nfrom briefkit.cli import main\nmain()"
    done = subprocess.run([sys.executable, "-c", source, *arguments], capture_output=True, text=True, check=False)
    assert done.returncode == 0
    assert "briefkit" in done.stdout or "Usage" in done.stdout
    assert "loaded: []" in done.stderr


def test_usage_errors_are_2_and_say_what_is_meant(tmp_path):
    for arguments in (
        ["bogus"],
        ["build"],
        ["build", tmp_path / "gone"],
        ["check", tmp_path / "gone"],
        ["build", "--x"],
    ):
        done = briefkit(*arguments)
        assert done.returncode == 2, arguments
        assert "Error" in done.stderr
        assert "Traceback" not in done.stderr


@pytest.mark.slow
def test_build_says_what_it_wrote(operator, tmp_path):
    out = tmp_path / "the pages"
    done = briefkit("build", operator, "--out", out)
    assert (done.returncode, done.stderr) == (0, "")
    page = out / "NB-2T-001.html"
    line = done.stdout.strip()
    assert line.startswith(f"{page}  ")
    assert line.endswith(f" s  {page.stat().st_size:,} bytes")


@pytest.mark.slow
def test_a_brief_that_fails_is_a_sentence_and_exit_1(operator, tmp_path):
    write_notebook(operator / "vellmark-2t" / "brief.ipynb", "raise ValueError('[bold]late[/bold]')")
    done = briefkit("build", operator, "--out", tmp_path / "out")
    assert done.returncode == 1
    assert "vellmark-2t: code cell 1 (raise ValueError" in done.stderr
    assert "ValueError: [bold]late[/bold]" in done.stderr  # file text is not markup
    assert "1 of 1 not built" in done.stderr
    assert "Traceback" not in done.stderr + done.stdout


@pytest.mark.slow
@pytest.mark.skipif(os.name == "nt", reason="POSIX signals")
def test_an_interrupt_is_one_line_and_ends_every_kernel(operator, tmp_path):
    source = "import os, time\nopen('pid', 'w').write(str(os.getpid()))\ntime.sleep(600)"
    write_notebook(operator / "vellmark-2t" / "brief.ipynb", source)
    out = tmp_path / "out"
    command = [*COMMAND, "build", str(operator), "--out", str(out)]
    with subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True) as process:
        pid_file = operator / "vellmark-2t" / "pid"
        wait_for(lambda: pid_file.exists() and pid_file.read_text() != "")
        process.send_signal(signal.SIGINT)
        _, said = process.communicate(timeout=30)
    assert (process.returncode, said) == (130, "stopped\n")
    kernel = int(pid_file.read_text())
    wait_for(lambda: not alive(kernel))
    assert list(out.iterdir()) == []


def wait_for(done: object, seconds: float = 30.0) -> None:
    deadline = time.monotonic() + seconds
    while not done():  # type: ignore[operator]
        assert time.monotonic() < deadline
        time.sleep(0.05)


def alive(pid: int) -> bool:
    try:
        os.kill(pid, 0)
    except ProcessLookupError:
        return False
    return True


def test_check_lists_what_stands_in_the_way(operator):
    done = CliRunner().invoke(app, ["check", str(operator / "vellmark-2t")])
    assert done.exit_code == 1
    assert "blocks release" in done.output
    assert "nobody yet for prepared, checked, approved" in done.output


def test_new_asks_what_is_not_given_and_writes_over_nothing(tmp_path):
    folder = tmp_path / "a folder"
    given = ["new", str(folder), "--type-name", "Testrel 9", "--blades", "3", "--hub", "articulated"]
    done = CliRunner().invoke(app, given, input="clockwise\nkm/h\nkg\n")
    assert done.exit_code == 0, done.output
    assert "Rotation seen from above (anticlockwise, clockwise)" in done.output
    assert (folder / "testrel-9" / "brief.ipynb").is_file()
    assert f"briefkit build '{folder}/testrel-9'" in done.output
    before = {file: file.read_bytes() for file in folder.rglob("*") if file.is_file()}
    again = CliRunner().invoke(app, given, input="clockwise\nkm/h\nkg\n")
    assert again.exit_code == 1
    assert "Traceback" not in again.output
    assert {file: file.read_bytes() for file in folder.rglob("*") if file.is_file()} == before


def test_new_refuses_an_answer_that_is_not_one(tmp_path):
    given = [
        "new",
        str(tmp_path / "x"),
        "--type-name",
        "T",
        "--blades",
        "3",
        "--hub",
        "hinge",
        "--rotation",
        "clockwise",
    ]
    done = CliRunner().invoke(app, [*given, "--airspeed-unit", "kt", "--mass-unit", "kg"])
    assert done.exit_code == 1
    assert "read 'hinge'; permitted: Hub: teetering, articulated, hingeless" in done.output
    assert not (tmp_path / "x").exists()


def test_live_serves_this_machine_only_behind_a_token(operator, monkeypatch, capsys):
    served: list[list[str]] = []
    overrides: list[object] = []

    def serve(argv: list[str]) -> None:
        served.append(argv)
        settings = next(part.split("=", 1)[1] for part in argv if part.startswith("--LabApp.app_settings_dir="))
        overrides.append(json.loads((Path(settings) / "overrides.json").read_text()))

    monkeypatch.setattr(lab, "_serve", serve)
    lab.open_lab(operator / "vellmark-2t", print, browser=False)
    (argv,) = served
    options = dict(part.removeprefix("--").split("=", 1) for part in argv)
    assert options["ServerApp.ip"] == "127.0.0.1"
    assert options["ServerApp.allow_remote_access"] == "False"
    assert options["ServerApp.open_browser"] == "False"
    assert options["ServerApp.root_dir"] == str(operator)
    assert options["LabApp.default_url"] == "/lab/tree/vellmark-2t/brief.ipynb"
    assert len(options["IdentityProvider.token"]) >= 32
    lab.open_lab(operator / "vellmark-2t", print, browser=False)
    assert served[1] != argv, "a token is used once"
    assert overrides[0] == {
        "@jupyterlab/apputils-extension:notification": {"fetchNews": "false", "checkForUpdates": False}
    }


@pytest.mark.slow
@pytest.mark.skipif(os.name == "nt", reason="POSIX signals")
def test_live_in_earnest(operator, tmp_path):
    """A real server: an address once it answers, nothing without the token, our interpreter, gone at one interrupt."""
    private = {name: str(tmp_path / name) for name in ("JUPYTER_CONFIG_DIR", "JUPYTER_DATA_DIR", "JUPYTER_RUNTIME_DIR")}
    command = [*COMMAND, "live", str(operator / "vellmark-2t"), "--no-browser"]
    options = {"stdout": subprocess.PIPE, "stderr": subprocess.PIPE, "text": True, "env": os.environ | private}
    with subprocess.Popen(command, **options) as process:  # type: ignore[call-overload]
        try:
            address = process.stdout.readline().strip()
            found = re.fullmatch(
                r"(http://127\.0\.0\.1:\d+)/lab/tree/vellmark-2t/brief\.ipynb\?token=(\S{32,})", address
            )
            assert found is not None, address
            base, token = found.groups()
            assert ask(f"{base}/api/contents") == 403
            assert ask(f"{base}/api/contents?token={token}") == 200
            opener = urllib.request.build_opener(urllib.request.ProxyHandler({}))
            with opener.open(f"{base}/api/kernelspecs?token={token}", timeout=10) as answer:
                specs = json.load(answer)["kernelspecs"]
            assert [spec["spec"]["argv"][0] for spec in specs.values()] == [sys.executable]
        finally:
            process.send_signal(signal.SIGINT)
            process.communicate(timeout=30)


def ask(url: str) -> int:
    try:
        with urllib.request.build_opener(urllib.request.ProxyHandler({})).open(url, timeout=10) as answer:
            return int(answer.status)
    except urllib.error.HTTPError as error:
        error.close()
        return error.code


def test_live_needs_a_notebook_and_says_when_jupyterlab_is_missing(operator, tmp_path, monkeypatch):
    done = CliRunner().invoke(app, ["live", str(operator / "aircraft")])
    assert (done.exit_code, "no notebook here" in done.output) == (1, True)
    monkeypatch.setattr(lab, "find_spec", lambda _: None)
    done = CliRunner().invoke(app, ["live", str(operator / "vellmark-2t")])
    assert (done.exit_code, "install briefkit with its lab extra" in done.output) == (1, True)
