"""Briefs small enough to run in a second."""

from __future__ import annotations

import datetime as dt
import json
import shutil
from pathlib import Path

import pytest

SLIDER = "import ipywidgets\nslider = ipywidgets.IntSlider(3, description='Mass')\nslider"


class Notebooks:
    """Notebooks as their file, whatever it says; the format's own library is not asked."""

    slider = SLIDER

    @staticmethod
    def code(source: str, **extra: object) -> dict[str, object]:
        return {"cell_type": "code", "source": source, "metadata": {}, "outputs": [], "execution_count": None} | extra

    @staticmethod
    def text(source: str, **extra: object) -> dict[str, object]:
        return {"cell_type": "markdown", "source": source, "metadata": {}} | extra

    @staticmethod
    def write(file: Path, *cells: dict[str, object], kernel: str = "python3") -> Path:
        named = {"kernelspec": {"name": kernel, "display_name": kernel, "language": "python"}}
        content = {"nbformat": 4, "nbformat_minor": 4, "metadata": named, "cells": list(cells)}
        file.write_text(json.dumps(content), encoding="utf-8")
        return file


@pytest.fixture(scope="session")
def nb() -> Notebooks:
    return Notebooks()


@pytest.fixture
def operator(tmp_path: Path, examples: Path, nb: Notebooks) -> Path:
    """The invented operator's folder with its one brief, whose notebook is words and one slider."""
    folder = tmp_path / "operator"
    shutil.copytree(
        examples, folder, ignore=shutil.ignore_patterns(".*", "__pycache__", "*.html", "corrant-3f", "ysbrane-4h")
    )
    words = nb.text("# Why we slow down\n\nHeavy, high, hot.")
    nb.write(folder / "vellmark-2t" / "brief.ipynb", words, nb.code(SLIDER))
    return folder


@pytest.fixture
def brief(operator: Path) -> Path:
    return operator / "vellmark-2t"


SIGNED_ON = dt.date(2030, 3, 5)
STAFF = {"prepared": "NRC-17", "checked": "NRC-21", "approved": "NRC-02"}


@pytest.fixture
def complete(operator: Path) -> Path:
    """The operator's folder as a real one: nothing says that it is invented. No register yet, nobody has signed."""
    (operator / "register.toml").unlink()
    for path in (operator / "operation.toml", operator / "aircraft" / "pelquill-2t.toml"):
        lines = path.read_text(encoding="utf-8").split("\n")
        kept = [line for line in lines if not line.startswith(("invented", "approvers", "limit_approvers"))]
        path.write_text("\n".join(kept), encoding="utf-8")
    return operator


class Signing:
    """Signs a brief in all three roles, each by another member of staff."""

    day, staff = SIGNED_ON, STAFF

    def __call__(self, folder: Path, day: dt.date = SIGNED_ON) -> Path:
        from briefkit.brief.sign import sign

        for role, code in STAFF.items():
            sign(folder, role, code, day)
        return folder

    @staticmethod
    def edit(path: Path, *pairs: tuple[str, str]) -> None:
        """Replace pieces of a text file, each of which has to be there."""
        text = path.read_text(encoding="utf-8")
        for old, new in pairs:
            assert old in text
            text = text.replace(old, new)
        path.write_text(text, encoding="utf-8")


@pytest.fixture(scope="session")
def signing() -> Signing:
    return Signing()


@pytest.fixture
def signed(complete: Path, signing: Signing) -> Path:
    """A brief with nothing against its release."""
    return signing(complete / "vellmark-2t")
