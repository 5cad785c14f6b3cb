"""The house: imports go one way, nothing loads what it does not need, nothing strange at top level."""

from __future__ import annotations

import ast
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
PACKAGE = ROOT / "briefkit"
# A room may import only rooms that stand before it (DEVELOPERS.md, "The house").
ORDER = (
    "errors", "units", "reading", "physics", "aircraft", "envelope", "figures", "brief", "session", "widgets", "cli",
)  # fmt: skip
FORBIDDEN = {"brief": {"widgets"}}
NEEDS_ONLY = {"physics": {"numpy", "briefkit"}, "errors": set(), "units": {"briefkit", "numpy"}}
FILES = {"README.md", "DEVELOPERS.md", "pyproject.toml", "LICENSE"}
TOP_LEVEL = FILES | {"briefkit", "templates", "tests", "example_briefs"}

MODULES = sorted(path for path in PACKAGE.rglob("*.py") if path != PACKAGE / "__init__.py")


def imports(path: Path) -> set[str]:
    """Every module a file imports, those under TYPE_CHECKING and inside functions too."""
    found: set[str] = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            found |= {name.name for name in node.names}
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: relative import"
            whole = node.module == "briefkit"
            found |= {f"briefkit.{name.name}" if whole else str(node.module) for name in node.names}
    return found


def room_of(path: Path) -> str:
    return path.relative_to(PACKAGE).parts[0].removesuffix(".py")


@pytest.mark.parametrize("path", MODULES, ids=lambda path: str(path.relative_to(PACKAGE)))
def test_imports_go_one_way(path):
    room = room_of(path)
    assert room in ORDER, f"{room} is not a room of the house"
    for name in imports(path):
        if not name.startswith("briefkit"):
            continue
        other = name.split(".")[1] if "." in name else ""
        assert other in ORDER, f"{path.name} imports {name}: nothing imports from briefkit itself"
        assert ORDER.index(other) <= ORDER.index(room), f"{path.name}: {room} may not import {other}"
        assert other not in FORBIDDEN.get(room, set())


@pytest.mark.parametrize("path", MODULES, ids=lambda path: str(path.relative_to(PACKAGE)))
def test_lower_rooms_need_little(path):
    allowed = NEEDS_ONLY.get(room_of(path))
    if allowed is not None:
        outside = {name.split(".")[0] for name in imports(path)} - sys.stdlib_module_names - {"__future__"}
        assert outside <= allowed


def test_package_faces_stay_empty():
    for path in PACKAGE.rglob("__init__.py"):
        if path != PACKAGE / "__init__.py":
            body = ast.parse(path.read_text(encoding="utf-8")).body
            assert all(isinstance(node, ast.Expr) and isinstance(node.value, ast.Constant) for node in body), path


def test_modules_stay_small():
    for path in MODULES:
        assert path.read_text(encoding="utf-8").count("\n") <= 400, path


def test_top_level_is_the_agreed_one():
    listed = subprocess.run(["git", "ls-files"], cwd=ROOT, capture_output=True, text=True, check=False)
    if listed.returncode:
        pytest.skip("not a git checkout: nothing lists the project's own files")
    top = {line.split("/")[0] for line in listed.stdout.splitlines()}
    assert {name for name in top if not name.startswith(".")} <= TOP_LEVEL


def loaded(code: str) -> set[str]:
    """Top-level modules in a fresh process after some code."""
    script = f"{code}\nimport sys\nprint(*sorted({{name.split('.')[0] for name in sys.modules}}))"
    done = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, check=True)
    return set(done.stdout.split())


def test_import_loads_no_numpy():
    assert "numpy" not in loaded("import briefkit")


@pytest.mark.slow
def test_public_names_load_what_they_need_only():
    heavy = {"scipy", "nbconvert", "ipywidgets", "bqplot"}
    assert not heavy & loaded("from briefkit import load_aircraft, load_operation, Condition, equivalent_vne")
    help_text = "import contextlib, io\nfrom briefkit.cli import app\n"
    help_text += "from typer.testing import CliRunner\nassert CliRunner().invoke(app, ['--help']).exit_code == 0"
    assert not heavy & loaded(help_text)


@pytest.mark.slow
def test_every_public_name_resolves():
    code = "import warnings; warnings.simplefilter('ignore')\nimport briefkit\n"
    code += "for name in briefkit.__all__:\n    getattr(briefkit, name)\n"
    code += "assert set(briefkit.__all__) <= set(dir(briefkit))"
    assert "briefkit" in loaded(code)


def test_an_unknown_name_is_an_attribute_error():
    import briefkit

    with pytest.raises(AttributeError, match="colour"):
        _ = briefkit.colour
