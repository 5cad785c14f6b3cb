"""What a signature covers: every edit is found and named, nothing else makes a signature void."""

from __future__ import annotations

import json
import os
import shutil
import tomllib
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from briefkit.brief import seal as seal_module
from briefkit.brief.identity import Signature, load_identity
from briefkit.brief.run import read_notebook
from briefkit.brief.seal import changed, holds, seal_of
from briefkit.errors import BuildError


def signature(folder: Path) -> Signature:
    identity = load_identity(folder)
    seal = seal_of(identity)
    return Signature("checked", "NRC-21", identity.issued, seal.content, seal.lines)


def what_changed(folder: Path, before: Signature) -> tuple[str, ...]:
    return changed(before, seal_of(load_identity(folder)))


def in_notebook(folder: Path, change) -> None:
    path = folder / "brief.ipynb"
    notebook = json.loads(path.read_text(encoding="utf-8"))
    change(notebook)
    path.write_text(json.dumps(notebook), encoding="utf-8")


EDITS = {
    "brief.toml": lambda f, e: e(f / "brief.toml", ("First issue", "First issue, read twice")),
    "operation.toml": lambda f, e: e(f.parent / "operation.toml", ('"1,800 lb"', '"1,810 lb"')),
    "aircraft/pelquill-2t.toml": lambda f, e: e(f.parent / "aircraft" / "pelquill-2t.toml", ("2,006 lb", "2,007 lb")),
    "brief.ipynb": lambda f, e: in_notebook(f, lambda n: n["cells"][0].update(source="Other words")),
    "cases.csv (new)": lambda f, e: (f / "cases.csv").write_text("1,2\n"),
    "notes.toml (new)": lambda f, e: (f / "notes.toml").write_text("[deck]\n"),
    "helpers/maths.py (new)": lambda f, e: (
        (f / "helpers").mkdir(),
        (f / "helpers" / "maths.py").write_text("x = 1\n"),
    ),
}


@pytest.mark.parametrize("name", EDITS)
def test_every_edit_is_found_and_named(brief: Path, signing, name: str) -> None:
    """G36: any edit of an input after a signature; G13: nothing computed from an edited file can be released."""
    before = signature(brief)
    assert what_changed(brief, before) == ()
    EDITS[name](brief, signing.edit)
    assert what_changed(brief, before) == (name,)
    assert not holds(before, seal_of(load_identity(brief)))


def test_a_file_that_is_gone_or_edited_is_named(brief: Path) -> None:
    (brief / "cases.csv").write_text("1,2\n")
    before = signature(brief)
    (brief / "cases.csv").write_text("1,3\n")
    assert what_changed(brief, before) == ("cases.csv",)
    (brief / "cases.csv").unlink()
    assert what_changed(brief, before) == ("cases.csv (gone)",)


@pytest.mark.parametrize(
    "change",
    [
        lambda n: n["cells"][0].update(cell_type="code"),
        lambda n: n["cells"].reverse(),
        lambda n: n["cells"].pop(),
        lambda n: n["cells"][0].update(attachments={"a.png": {"image/png": "AAAA"}}),
    ],
    ids=["kind of a cell", "order", "a cell less", "a pasted picture"],
)
def test_what_of_a_notebook_reaches_the_page_is_covered(brief: Path, change) -> None:
    before = signature(brief)
    in_notebook(brief, change)
    assert what_changed(brief, before) == ("brief.ipynb",)


def test_what_never_reaches_the_page_is_not_covered(brief: Path) -> None:
    before = signature(brief)
    in_notebook(
        brief, lambda n: n["cells"][1].update(outputs=[{"output_type": "stream", "text": "1"}], execution_count=7)
    )
    in_notebook(brief, lambda n: n["metadata"].update(kernelspec={"name": "other"}))
    in_notebook(brief, lambda n: n["cells"][0].update(source=["# Why we slow down\n", "\n", "Heavy, high, hot."]))
    (brief / "NB-2T-001.html").write_text("a page")
    (brief / ".hidden").write_text("an editor's")
    (brief / "__pycache__").mkdir()
    (brief / "__pycache__" / "x.pyc").write_bytes(b"1")
    toml = brief / "brief.toml"
    toml.write_bytes(b"\xef\xbb\xbf" + toml.read_bytes().replace(b"\n", b"\r\n") + b"# a comment\r\n")
    assert what_changed(brief, before) == ()


def test_moving_or_renaming_the_folder_is_no_edit(brief: Path, tmp_path: Path) -> None:
    before = signature(brief)
    there = Path(shutil.copytree(brief.parent, tmp_path / "elsewhere"))
    os.rename(there / "vellmark-2t", there / "other-name")
    assert what_changed(there / "other-name", before) == ()


def test_the_version_and_the_template_are_covered(brief: Path, monkeypatch, tmp_path: Path) -> None:
    before = signature(brief)
    monkeypatch.setattr(seal_module, "version", lambda _: "9.9.9")
    assert what_changed(brief, before) == ("briefkit",)
    monkeypatch.undo()
    template = Path(shutil.copytree(seal_module.template_folder(), tmp_path / "template"))
    (template / "handout.css").write_text("body { color: black; }")
    monkeypatch.setattr(seal_module, "template_folder", lambda: template)
    assert what_changed(brief, before) == ("template",)


def test_content_hidden_in_a_text_block_that_looks_like_a_signature_is_covered(brief: Path, signing) -> None:
    block = "text = '''First\n[[signatures]]\nrole = {}\n'''"
    signing.edit(brief / "brief.toml", ('text = "First issue"', block.format("checked")))
    data = tomllib.loads((brief / "brief.toml").read_text(encoding="utf-8"))
    assert "signatures" not in data
    one = seal_module._brief_toml(brief / "brief.toml")
    signing.edit(brief / "brief.toml", ("role = checked", "role = other"))
    assert seal_module._brief_toml(brief / "brief.toml") != one


@pytest.mark.slow
@given(source=st.text(max_size=60), other=st.text(max_size=60))
@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_two_notebooks_have_one_seal_only_if_their_words_are_the_same(brief: Path, source: str, other: str) -> None:
    identity = load_identity(brief)
    cells = [[{"cell_type": "markdown", "source": text}] for text in (source, other)]
    one, two = (seal_of(identity, cell).content for cell in cells)
    assert (one == two) is (source == other)


def test_cells_in_memory_have_the_seal_of_their_file(brief: Path) -> None:
    identity = load_identity(brief)
    assert seal_of(identity, read_notebook(identity.notebook).cells) == seal_of(identity)


def test_a_link_out_of_the_operator_folder_cannot_be_signed(brief: Path, tmp_path: Path) -> None:
    (tmp_path / "outside.csv").write_text("1")
    (brief / "cases.csv").symlink_to(tmp_path / "outside.csv")
    with pytest.raises(BuildError, match="out of the operator folder"):
        seal_of(load_identity(brief))
    (brief / "cases.csv").unlink()
    shutil.move(brief / "brief.ipynb", tmp_path / "outside.ipynb")
    (brief / "brief.ipynb").symlink_to(tmp_path / "outside.ipynb")
    with pytest.raises(BuildError, match="out of the operator folder"):
        seal_of(load_identity(brief))


def test_a_notebook_that_cannot_be_read_is_a_sentence(brief: Path) -> None:
    for broken in ("{", '{"cells": 3}', '{"cells": [{"source": "x"}]}', "[]"):
        (brief / "brief.ipynb").write_text(broken)
        with pytest.raises(BuildError, match="not a notebook that can be read"):
            seal_of(load_identity(brief))
