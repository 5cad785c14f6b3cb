"""The command line: sentences, exit codes, and nothing loaded that a command does not need."""

from __future__ import annotations

import contextlib
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
from types import SimpleNamespace

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
    """The invented operator, with a notebook of words only and no deck."""
    folder = tmp_path / "operator"
    shutil.copytree(
        examples, folder, ignore=shutil.ignore_patterns(".*", "*.html", "deck.toml", "corrant-3f", "ysbrane-4h")
    )
    write_notebook(folder / "vellmark-2t" / "brief.ipynb", "1 + 1;")
    return folder


def write_notebook(file: Path, source: str) -> None:
    cell = {"cell_type": "code", "source": source, "metadata": {}, "outputs": [], "execution_count": None}
    file.write_text(json.dumps({"nbformat": 4, "nbformat_minor": 4, "metadata": {}, "cells": [cell]}))


@pytest.mark.slow
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
        ["verify", tmp_path / "gone"],
        ["compare", tmp_path / "gone", tmp_path],
        ["build", "--x"],
    ):
        done = run(*arguments)
        assert done.exit_code == 2, arguments
        assert "Error" in done.stderr


@pytest.mark.slow
def test_build_says_what_it_wrote_and_a_brief_that_fails_is_a_sentence_and_exit_1(operator, tmp_path):
    """One of two briefs fails: the other is built all the same."""
    out, late = tmp_path / "the pages", operator / "late"
    shutil.copytree(operator / "vellmark-2t", late)
    (late / "brief.toml").write_text((late / "brief.toml").read_text().replace("NB-2T-001", "NB-2T-002"))
    write_notebook(late / "brief.ipynb", "raise ValueError('[bold]late[/bold]')")
    done = briefkit("build", operator, "--out", out)
    assert done.returncode == 1
    page = out / "NB-2T-001.html"
    line = done.stdout.strip()
    assert line.startswith(f"{page}  ")
    assert line.endswith(f" s  {page.stat().st_size:,} bytes")
    assert "late: code cell 1 (raise ValueError" in done.stderr
    assert "ValueError: [bold]late[/bold]" in done.stderr  # file text is not markup
    assert "1 of 2 not built" in done.stderr
    assert "Traceback" not in done.stderr + done.stdout


@pytest.mark.slow
@pytest.mark.skipif(os.name == "nt", reason="POSIX signals")
def test_an_interrupt_is_one_line_and_ends_every_kernel(operator, tmp_path):
    source = "import os, time\nopen('pid', 'w').write(str(os.getpid()))\ntime.sleep(600)"
    write_notebook(operator / "vellmark-2t" / "brief.ipynb", source)
    out = tmp_path / "out"
    command = [*COMMAND, "build", str(operator), "--out", str(out)]
    with started(command) as process:
        pid_file = operator / "vellmark-2t" / "pid"
        wait_for(lambda: pid_file.exists() and pid_file.read_text() != "")
        process.send_signal(signal.SIGINT)
        _, said = process.communicate(timeout=30)
    assert (process.returncode, said) == (130, "stopped\n")
    kernel = int(pid_file.read_text())
    wait_for(lambda: not alive(kernel))
    assert list(out.iterdir()) == []


@contextlib.contextmanager
def started(command, env=None):
    """A process that an interrupt reaches, whoever started the tests, and that never outlives its test."""
    before = signal.signal(signal.SIGINT, signal.default_int_handler)  # a job in the background would inherit "ignored"
    try:
        process = subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, env=env)
    finally:
        signal.signal(signal.SIGINT, before)
    with process:
        try:
            yield process
        finally:
            process.kill()


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


def test_new_asks_again_at_once_and_keeps_the_answers_before(tmp_path):
    typed = ("Testrel 9", "many", "3", "teetering", "articulated", "clockwise", "knots", "kt", "kg")
    done = CliRunner().invoke(app, ["new", str(tmp_path / "x")], input="\n".join(typed) + "\n")
    assert done.exit_code == 0, done.output
    said = done.output.partition("written:")[0]
    assert said.count("Type name, as on your documents") == 1
    many = "Error: read 'many'; permitted: Main rotor blades: 2, 3, 4, 5, 6, 7, 8\nMain rotor blades (2, 3"
    assert many in said
    assert "Error: read '3 blades'; permitted: 2 blades with a teetering hub; is the hub articulated?\nHub (" in said
    assert "did you mean kt?\nUnit of the airspeed indicator" in said
    made = (tmp_path / "x" / "aircraft" / "testrel-9.toml").read_text(encoding="utf-8")
    assert "blades = 3" in made


def test_new_lists_every_option_that_will_not_do_before_it_asks(tmp_path):
    done = run("new", tmp_path / "x", "--blades", "many", "--hub", "hinge", "--mass-unit", "lbs")
    assert (done.exit_code, done.stdout) == (1, "")
    assert [line.partition(":")[0] for line in done.stderr.splitlines()] == ["--blades", "--hub", "--mass-unit"]
    assert not (tmp_path / "x").exists()


def test_live_serves_this_machine_only_behind_a_token(operator, monkeypatch, capsys):
    served: list[list[str]] = []
    overrides: list[object] = []

    def serve(argv: list[str]) -> None:
        served.append(argv)
        settings = next(part.split("=", 1)[1] for part in argv if part.startswith("--LabApp.app_settings_dir="))
        overrides.append(json.loads((Path(settings) / "overrides.json").read_text()))

    monkeypatch.setattr(lab, "_serve", serve)
    arranged: list[bool] = []
    monkeypatch.setattr(lab, "send_at_once", lambda: arranged.append(True))
    lab.open_lab(operator / "vellmark-2t", print, browser=False)
    (argv,) = served
    assert arranged == [True]
    options = dict(part.removeprefix("--").split("=", 1) for part in argv)
    assert options["ServerApp.ip"] == "127.0.0.1"
    assert options["ServerApp.allow_remote_access"] == "False"
    assert options["ServerApp.open_browser"] == "False"
    assert options["ServerApp.root_dir"] == str(operator)
    assert options["LabApp.default_url"] == "/lab/tree/vellmark-2t/brief.ipynb"
    assert len(options["IdentityProvider.token"]) >= 32
    lab.open_lab(operator / "vellmark-2t", print, browser=False)
    assert served[1] != argv, "a token is used once"
    done = CliRunner().invoke(app, ["live", str(operator / "vellmark-2t"), "--no-browser", "--no-low-delay"])
    assert (done.exit_code, len(served), len(arranged)) == (0, 3, 2)
    assert overrides[0] == {
        "@jupyterlab/apputils-extension:notification": {"fetchNews": "false", "checkForUpdates": False}
    }


@pytest.mark.slow
@pytest.mark.skipif(os.name == "nt", reason="POSIX signals")
def test_live_in_earnest(operator, tmp_path):
    """A real server: an address once it answers, nothing without the token, our interpreter, gone at one interrupt."""
    private = {name: str(tmp_path / name) for name in ("JUPYTER_CONFIG_DIR", "JUPYTER_DATA_DIR", "JUPYTER_RUNTIME_DIR")}
    command = [*COMMAND, "live", str(operator / "vellmark-2t"), "--no-browser"]
    with started(command, os.environ | private) as process:
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


@pytest.fixture
def company(operator):
    """The operator as a real one: nothing says that it is invented."""
    for path in (operator / "operation.toml", operator / "aircraft" / "pelquill-2t.toml"):
        lines = path.read_text(encoding="utf-8").split("\n")
        path.write_text("\n".join(line for line in lines if not line.startswith("invented")), encoding="utf-8")
    return operator


def run(*arguments):
    done = CliRunner().invoke(app, list(map(str, arguments)))
    assert done.exception is None or isinstance(done.exception, SystemExit), done.exception
    assert "Traceback" not in done.output
    return done


def sign_all(folder):
    for role, code in (("prepared", "NRC-17"), ("checked", "NRC-21"), ("approved", "NRC-02")):
        done = run("sign", folder, "--role", role, "--code", code, "--date", "2030-03-05")
        assert done.exit_code == 0, done.output


@pytest.mark.slow
def test_signing_by_hand_and_what_is_refused(company):
    folder = company / "vellmark-2t"
    done = run("sign", folder, "--role", "checked", "--code", "NRC-21", "--date", "2030-03-05")
    assert (done.exit_code, "not prepared yet" in done.output) == (1, True)
    sign_all(folder)
    assert run("check", folder, "--date", "2030-06-01").exit_code == 0
    assert run("sign", folder, "--role", "prepared", "--code", "NRC-17", "--date", "5 March").exit_code == 2
    assert run("sign", folder, "--role", "prepared").exit_code == 2


@pytest.mark.slow
def test_check_has_exit_codes_and_json_for_scripts(company):
    folder = company / "vellmark-2t"
    done = run("check", folder, "--json", "--date", "2030-06-01")
    said = json.loads(done.output)
    assert (done.exit_code, said["stands_against_release"]) == (1, 1)
    levels = {finding["level"] for finding in said["findings"]}
    assert levels == {"blocks release", "note"}
    assert {"level", "place", "text", "remedy"} == set(said["findings"][0])
    sign_all(folder)
    done = run("check", folder, "--json", "--date", "2030-06-01")
    assert (done.exit_code, json.loads(done.output)["stands_against_release"]) == (0, 0)
    assert run("check", folder, "--date", "2032-02-29").exit_code == 1
    assert run("check", company / "operation.toml").exit_code == 2
    (company / "empty").mkdir()
    assert run("check", company / "empty").exit_code == 2


@pytest.mark.slow
def test_compare_lists_what_changed_and_exits_1_where_a_reason_is_missing(company, tmp_path):
    old, new = company / "vellmark-2t", Path(shutil.copytree(company, tmp_path / "new")) / "vellmark-2t"
    assert (run("compare", old, new).output, run("compare", old, new).exit_code) == ("nothing changed\n", 0)
    file = new.parent / "aircraft" / "pelquill-2t.toml"
    file.write_text(file.read_text(encoding="utf-8").replace('max_mass = "2,006 lb"', 'max_mass = "2,050 lb"'))
    done = run("compare", old, new)
    line = "limits, max_mass: 2,006 lb -> 2,050 lb: less conservative, no reason given"
    assert (done.exit_code, line in done.output) == (1, True)
    brief = new / "brief.toml"
    # The chart has no mass axis, so a heavier maximum makes every turn look lighter: those need the reason too.
    relaxed = [one["name"] for one in json.loads(run("compare", old, new, "--json").output) if one["less_conservative"]]
    assert any(name.startswith("turn at") for name in relaxed)
    figures = json.dumps(["limits", *(name for name in relaxed if not name.startswith("limits"))])
    reason = f'text = "First issue"\nfigures = {figures}\nreason = "supplement 4"'
    brief.write_text(brief.read_text(encoding="utf-8").replace('text = "First issue"', reason))
    done = run("compare", old, new)
    assert (done.exit_code, "less conservative (supplement 4)" in done.output) == (0, True)
    found = {one["name"]: one for one in json.loads(run("compare", old, new, "--json").output)}["limits, max_mass"]
    assert (found["less_conservative"], found["reason"]) == (True, "supplement 4")
    (tmp_path / "x.zip").write_bytes(b"none")
    assert run("compare", tmp_path / "x.zip", new).exit_code == 1


def test_verify_without_a_register_is_a_sentence(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    page = tmp_path / "page.html"
    page.write_text("<title>NB-2T-001 rev 0: x</title>")
    done = run("verify", page)
    assert (done.exit_code, "name it with --register" in done.output) == (1, True)
    (tmp_path / "register.toml").write_text("")
    done = run("verify", page, "--json")
    assert (done.exit_code, json.loads(done.output)[0]["state"]) == (1, "not in this register")


@pytest.mark.slow
def test_issue_and_verify(company, tmp_path):
    folder, out = company / "vellmark-2t", tmp_path / "out"
    done = run("issue", folder, "--out", out, "--date", "2030-03-20")
    assert (done.exit_code, "DRAFT" in done.output) == (1, True)
    sign_all(folder)
    done = run("issue", folder, "--out", out, "--date", "2030-03-20")
    assert done.exit_code == 0, done.output
    page = out / "NB-2T-001.html"
    assert run("verify", page, "--register", company, "--date", "2030-06-01").exit_code == 0
    done = run("verify", page, "--register", company, "--date", "2032-02-29")
    assert (done.exit_code, f"{page}: expired: NB-2T-001 rev 0" in done.output) == (1, True)
    page.write_text(page.read_text(encoding="utf-8").replace("87", "97"), encoding="utf-8")
    done = run("verify", page, "--register", company, "--date", "2030-06-01")
    assert (done.exit_code, "altered" in done.output) == (1, True)


@pytest.mark.parametrize("command", [["sign", "--role", "prepared", "--code", "NRC-17"], ["issue"], ["deck"]])
def test_a_command_for_one_brief_says_which_briefs_are_below(operator, command):
    done = run(*command, operator)
    assert (done.exit_code, done.stderr) == (1, f"{operator}: no brief.toml here; briefs below: vellmark-2t\n")


def test_issue_says_what_stands_against_it(company, tmp_path):
    """The findings themselves, the first few; no kernel is started for a draft."""
    file = company / "vellmark-2t" / "brief.toml"
    text = file.read_text(encoding="utf-8")
    start, end = text.index("basis = ["), text.index("[subject]")
    file.write_text(text[:start] + f"basis = {['Manual'] * 6}\n\n" + text[end:], encoding="utf-8")
    out = tmp_path / "out"
    done = run("issue", file.parent, "--out", out, "--date", "2030-03-20")
    lines = done.stderr.splitlines()
    assert (done.exit_code, out.exists()) == (1, False)
    assert lines[0] == "NB-2T-001 rev 0: DRAFT: not for crews; against its release:"
    assert lines[1].startswith("  blocks release: vellmark-2t/brief.toml: document.basis, value 1: 'Manual' names no")
    assert (len(lines), lines[-1]) == (7, f"  and 2 more: briefkit check {file.parent}")


def test_issue_notes_that_no_section_is_named(company, monkeypatch):
    """`issue` itself is held in tests/brief; here what the command says after it."""
    from briefkit.brief import issue as issuing

    folder = company / "vellmark-2t"
    file = folder / "brief.toml"
    entry = SimpleNamespace(number="NB-2T-001", revision=1, page="0" * 64)
    monkeypatch.setattr(issuing, "issue", lambda *_: (entry, Path("page.html")))
    assert "margin" not in run("issue", folder).output
    file.write_text(file.read_text(encoding="utf-8").replace("revision = 0", "revision = 1"), encoding="utf-8")
    done = run("issue", folder)
    assert done.exit_code == 0
    assert f"  note: {file}: changes: no section named for revision 1: no bar stands in the margin" in done.output
