"""One road and the same bytes, by the exporter and by the build."""

from __future__ import annotations

import datetime as dt
import os
import subprocess
import sys
from pathlib import Path

import nbformat
import pytest
from nbconvert.exporters import get_exporter

from briefkit.brief import export as room
from briefkit.brief.build import build
from briefkit.brief.export import BriefExporter, export
from briefkit.errors import BuildError, FaultyFile


def nbconvert(notebook: Path, *options: str, settings: Path) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-m", "nbconvert", "--to", "briefkit", str(notebook), *options]
    environment = os.environ | {"JUPYTER_CONFIG_DIR": str(settings), "PYTHONWARNINGS": "default"}
    return subprocess.run(command, capture_output=True, text=True, env=environment, timeout=120, check=False)


@pytest.mark.slow
def test_the_three_doors_give_the_same_bytes(operator, brief, tmp_path):
    """Also where the machine's own nbconvert settings would change a page."""
    settings = tmp_path / "settings"
    settings.mkdir()
    hostile = ["c = get_config()", "c.Exporter.preprocessors = ['nbconvert.preprocessors.ClearOutputPreprocessor']"]
    hostile += ["c.TemplateExporter.exclude_markdown = True", "c.Exporter.file_extension = '.txt'"]
    (settings / "jupyter_nbconvert_config.py").write_text("\n".join(hostile))
    (result,) = build([operator], tmp_path / "out", dt.date.today())  # the exporter reads the clock
    assert not result.error
    assert result.page is not None
    built = result.page.read_bytes()
    done = nbconvert(brief / "brief.ipynb", "--output-dir", str(tmp_path / "other"), settings=settings)
    assert done.returncode == 0, done.stderr
    (written,) = (tmp_path / "other").iterdir()
    assert written.read_bytes() == built
    node = nbformat.read(brief / "brief.ipynb", as_version=4)
    resources = {"metadata": {"path": str(brief), "name": "brief"}}
    page, _ = BriefExporter().from_notebook_node(node, resources)
    assert page.encode() == built


@pytest.mark.slow
def test_the_command_line_says_a_sentence(brief, tmp_path):
    (brief / "brief.toml").write_text("[document]\nnumber = 7\n")
    done = nbconvert(brief / "brief.ipynb", settings=tmp_path)
    assert done.returncode == 1
    assert "faults:" in done.stderr
    assert "brief.toml" in done.stderr
    assert "Traceback" not in done.stderr
    assert not (brief / "brief.html").exists()


def test_it_is_found_by_name():
    assert get_exporter("briefkit") is BriefExporter


def test_only_the_notebook_of_a_brief(brief, nb, today):
    other = nb.write(brief / "other.ipynb", nb.text("x"))
    with pytest.raises(BuildError, match=r"other.ipynb: a brief is brief.ipynb beside its brief.toml; no other"):
        export(other, today)
    with pytest.raises(BuildError, match=r"exported from its file, brief\.ipynb, not from a stream"):
        BriefExporter().from_notebook_node(nbformat.v4.new_notebook())


def test_faults_come_before_any_kernel(brief, monkeypatch, today):
    monkeypatch.setattr(room, "run_node", lambda *_: pytest.fail("a kernel was started"))
    (brief / "brief.toml").write_text("")
    with pytest.raises(FaultyFile):
        export(brief / "brief.ipynb", today)
