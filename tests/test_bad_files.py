"""One tiny file a fault: each is refused at its key with the words an author needs, and with nothing else beside.

The first two lines of each file in `bad/` say which key and which words. Whatever else the tiny files lack shows only
as "... is needed".
"""

from __future__ import annotations

import shutil
from collections.abc import Callable
from pathlib import Path

import pytest

from briefkit.aircraft.load import load_aircraft
from briefkit.aircraft.operation import load_operation
from briefkit.brief.identity import load_identity
from briefkit.errors import Fault, FaultyFile

BAD = Path(__file__).parent / "bad"
FILES = sorted(BAD.glob("*.toml"))
LOADERS: dict[str, Callable[[Path], object]] = {
    "aircraft": load_aircraft,
    "operation": load_operation,
    "brief": load_identity,
}


@pytest.fixture(scope="module")
def operator(tmp_path_factory: pytest.TempPathFactory, examples: Path) -> Path:
    """An operator folder with a brief folder in it, for the files that need one above them."""
    folder = tmp_path_factory.mktemp("operator")
    shutil.copy(examples / "operation.toml", folder)
    shutil.copytree(examples / "aircraft", folder / "aircraft")
    (folder / "brief").mkdir()
    return folder


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_the_fault_is_named_once_where_it_is(path: Path, operator: Path) -> None:
    key, says = (line.partition(": ")[2] for line in path.read_text(encoding="utf-8").split("\n")[:2])
    copy = Path(shutil.copy(path, operator / "brief"))
    with pytest.raises(FaultyFile) as refused:
        LOADERS[path.stem.partition("-")[0]](copy)
    named = [fault for fault in refused.value.faults if fault.key == key]
    assert len(named) == 1, str(refused.value)
    for words in says.split(" | "):
        assert words in str(named[0])
    rest = [fault for fault in refused.value.faults if fault is not named[0]]
    assert all(is_missing(fault) for fault in rest), str(refused.value)
    assert str(copy) in str(refused.value)


def is_missing(fault: Fault) -> bool:
    return fault.read == "nothing" and "is needed" in fault.permitted
