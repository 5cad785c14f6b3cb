"""Briefs small enough to run in a second."""

from __future__ import annotations

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
    shutil.copytree(examples, folder, ignore=shutil.ignore_patterns(".*", "__pycache__", "*.html"))
    words = nb.text("# Why we slow down\n\nHeavy, high, hot.")
    nb.write(folder / "vellmark-2t" / "brief.ipynb", words, nb.code(SLIDER))
    return folder


@pytest.fixture
def brief(operator: Path) -> Path:
    return operator / "vellmark-2t"
