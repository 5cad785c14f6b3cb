"""A reader sees the old page or the new one, whole."""

from __future__ import annotations

import os
import stat
from pathlib import Path

import pytest

from briefkit.brief import write
from briefkit.brief.write import sweep, write_page
from briefkit.errors import BuildError

unix = pytest.mark.skipif(os.name == "nt", reason="file modes are POSIX")


@unix
def test_whole_readable_and_nothing_beside(tmp_path):
    page = tmp_path / "out" / "page.html"
    mask = os.umask(0o077)
    try:
        assert write_page(page, "36 °C") == 6
    finally:
        os.umask(mask)
    assert page.read_bytes() == "36 °C".encode()
    assert stat.S_IMODE(page.stat().st_mode) == 0o644
    assert list(page.parent.iterdir()) == [page]


@pytest.mark.parametrize("step", ["fsync", "replace"])
def test_a_failure_leaves_the_old_page_and_nothing_beside(tmp_path, monkeypatch, step):
    page = tmp_path / "page.html"
    write_page(page, "old")

    def full(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(write.os, step, full)
    with pytest.raises(BuildError, match=r"page.html: cannot be written \(No space left on device\); what was there"):
        write_page(page, "new")
    assert page.read_text() == "old"
    assert list(tmp_path.iterdir()) == [page]


def test_an_interrupt_leaves_the_old_page(tmp_path, monkeypatch):
    page = tmp_path / "page.html"
    write_page(page, "old")

    def interrupted(*_: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(write.os, "replace", interrupted)
    with pytest.raises(KeyboardInterrupt):
        write_page(page, "new")
    assert page.read_text() == "old"
    assert list(tmp_path.iterdir()) == [page]


def test_a_link_planted_beside_is_not_followed(tmp_path):
    elsewhere = tmp_path / "elsewhere"
    elsewhere.write_text("precious")
    (tmp_path / f".page.html.{os.getpid()}.part").symlink_to(elsewhere)
    with pytest.raises(BuildError, match="cannot be written"):
        write_page(tmp_path / "page.html", "new")
    assert elsewhere.read_text() == "precious"


def test_what_an_interrupted_build_left_is_swept(tmp_path):
    page = tmp_path / "page.html"
    write_page(page, "whole")
    (tmp_path / ".page.html.1234.part").write_text("half")
    assert sweep(tmp_path) == 1
    assert list(tmp_path.iterdir()) == [page]


def test_the_order_is_flush_then_replace_then_flush_the_folder(tmp_path, monkeypatch):
    """The order that survives a power cut: POSIX.1-2017 fsync and rename."""
    steps: list[str] = []
    for name in ("fsync", "replace"):
        real = getattr(os, name)
        monkeypatch.setattr(write.os, name, lambda *a, real=real, name=name: (steps.append(name), real(*a))[1])
    write_page(Path(tmp_path / "page.html"), "x")
    assert steps == ["fsync", "replace", "fsync"]
