"""The invented 2T's file as text, to be changed part by part."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from briefkit.aircraft.load import load_aircraft
from briefkit.aircraft.model import Aircraft
from briefkit.errors import Fault, FaultyFile

Loader = Callable[..., Aircraft]


class Changed:
    """An aircraft file with parts of it changed, loaded or refused."""

    def __init__(self, text: str, folder: Path) -> None:
        self.text, self.folder = text, folder

    def replaced(self, *pairs: tuple[str, str]) -> Changed:
        """Each first text, which must be there, replaced by the second, once."""
        text = self.text
        for old, new in pairs:
            assert old in text, old
            text = text.replace(old, new, 1)
        return Changed(text, self.folder)

    def table(self, name: str, body: str) -> Changed:
        """The table [name] with another body."""
        start = self.text.index(f"[{name}]")
        end = self.text.find("\n[", start)
        end = len(self.text) if end < 0 else end
        return Changed(f"{self.text[:start]}[{name}]\n{body}\n{self.text[end:]}", self.folder)

    def added(self, more: str) -> Changed:
        return Changed(f"{self.text}\n{more}\n", self.folder)

    def load(self, configuration: str = "") -> Aircraft:
        path = self.folder / "type.toml"
        path.write_text(self.text, encoding="utf-8")
        return load_aircraft(path, configuration)

    def faults(self) -> list[Fault]:
        """The faults of the file, which must have some; each names a line that is in it."""
        with pytest.raises(FaultyFile) as refused:
            self.load()
        lines = self.text.count("\n") + 1
        assert all(fault.read and fault.permitted and 0 <= fault.line <= lines for fault in refused.value.faults)
        return list(refused.value.faults)

    def fault(self) -> Fault:
        """The one fault of the file."""
        faults = self.faults()
        assert len(faults) == 1, [str(fault) for fault in faults]
        return faults[0]


def _file(examples: Path, tmp_path: Path, name: str) -> Changed:
    return Changed((examples / "aircraft" / f"{name}.toml").read_text(encoding="utf-8"), tmp_path)


@pytest.fixture
def file_2t(examples: Path, tmp_path: Path) -> Changed:
    return _file(examples, tmp_path, "pelquill-2t")


@pytest.fixture
def file_3f(examples: Path, tmp_path: Path) -> Changed:
    return _file(examples, tmp_path, "ormbrae-3f")


@pytest.fixture
def file_4h(examples: Path, tmp_path: Path) -> Changed:
    return _file(examples, tmp_path, "kvillarn-4h")
