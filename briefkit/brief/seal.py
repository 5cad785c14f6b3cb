"""What a signature covers: one hash over everything a page is made from, kept part by part so that a change has a name.

Covered: cell sources and the pictures pasted into cells, `brief.toml` without its signatures, every other file of the
brief's folder (a notebook may read any of them: its deck, modules, tables, pictures), the aircraft file with the
section table it names, the operation file, the handout's template, and briefkit's version. Never stored outputs. It
finds an edit; it is no lock: whoever can write the folder can also write a signature, so the folder's own access rights
are part of the control.
"""

from __future__ import annotations

import datetime as dt
import hashlib
import json
import tomllib
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from importlib.metadata import version
from pathlib import Path
from typing import Any, Final

from briefkit.aircraft.operation import OPERATION_FILE
from briefkit.aircraft.section_table import section_file
from briefkit.brief.identity import BRIEF_FILE, NOTEBOOK, Identity, Signature
from briefkit.brief.templates import template_folder
from briefkit.errors import BuildError

_SHOWN: Final = 16
_TEXT: Final = (".toml", ".py", ".csv", ".txt", ".md", ".j2", ".css")
# What a build, an editor or the office leaves beside a brief: none of it is read for the page.
_NOT_COVERED: Final = (".html", ".pdf", ".zip", ".pyc", ".jsonl", ".torn")
_REGISTER: Final = "register.toml"


@dataclass(frozen=True)
class Seal:
    """The parts of a brief, each with its SHA-256, in a fixed order."""

    parts: tuple[tuple[str, str], ...]

    @property
    def content(self) -> str:
        """One SHA-256 over all parts: what is signed."""
        return _sha("\n".join(f"{name} {digest}" for name, digest in self.parts).encode("utf-8"))

    @property
    def lines(self) -> tuple[str, ...]:
        """The parts as they stand in a signature: "operation.toml 1f2e3d4c5b6a7988"."""
        return tuple(f"{name} {digest[:_SHOWN]}" for name, digest in self.parts)


def seal_of(identity: Identity, cells: Iterable[Any] | None = None) -> Seal:
    """The seal of a brief as it stands on disk; `cells` are the notebook's cells where they are already in memory.

    Raises `BuildError` where a file that is covered cannot be read.
    """
    if not identity.notebook.resolve().is_relative_to(identity.operator):
        raise BuildError(f"{identity.notebook}: a link out of the operator folder; put the notebook itself here")
    try:
        known = _cells_of_file(identity.notebook) if cells is None else list(cells)
        parts = {
            BRIEF_FILE: _brief_toml(identity.folder / identity.file),
            NOTEBOOK: _sha(_canonical([_cell(cell) for cell in known])),
            identity.aircraft: _file(identity.aircraft_path),
            OPERATION_FILE: _file(identity.operator / OPERATION_FILE),
        }
        if (section := section_file(identity.aircraft_path)) is not None:
            parts[section.relative_to(identity.operator).as_posix()] = _file(section)
        for path in covered(identity):
            name = path.relative_to(identity.folder).as_posix()
            parts[f"{name} (brief)" if name in parts else name] = _file(path)
        template = [f"{path.name} {_file(path)}" for path in sorted(template_folder().iterdir()) if path.is_file()]
    except OSError as error:
        raise BuildError(f"{error.filename}: cannot be read ({error.strerror})") from None
    except (ValueError, KeyError, TypeError, AttributeError):
        raise BuildError(f"{identity.notebook.name}: not a notebook that can be read") from None
    parts["template"] = _sha("\n".join(template).encode("utf-8"))
    parts["briefkit"] = _sha(version("briefkit").encode("utf-8"))
    return Seal(tuple(parts.items()))


def holds(signature: Signature, seal: Seal) -> bool:
    """Whether nothing that was signed has changed since."""
    return signature.content == seal.content


def changed(signature: Signature, seal: Seal) -> tuple[str, ...]:
    """What has changed since a signature, in words: "operation.toml", "cases.csv (new)", "deck.toml (gone)"."""
    if holds(signature, seal):
        return ()
    then = dict(line.rpartition(" ")[::2] for line in signature.signed)
    now = dict(line.rpartition(" ")[::2] for line in seal.lines)
    found = [f"{name} (new)" if name not in then else name for name, digest in now.items() if then.get(name) != digest]
    found += [f"{name} (gone)" for name in then if name not in now]
    return tuple(found) or ("the signature itself",)


def covered(identity: Identity) -> tuple[Path, ...]:
    """The files of the brief's folder that are covered beside `brief.toml` and the notebook, in order."""
    return tuple(sorted(_others(identity.folder, identity.operator)))


def _others(folder: Path, operator: Path) -> Iterator[Path]:
    """Every other file of the brief's folder; not hidden ones, not another brief's, not what a build has written."""
    for path in folder.iterdir():
        if path.name.startswith(".") or path.name == "__pycache__":
            continue
        if path.is_symlink() and (path.is_dir() or not path.resolve().is_relative_to(operator)):
            raise BuildError(f"{path}: a link to a folder or out of the operator folder; put the files themselves here")
        if path.is_dir():
            if not (path / BRIEF_FILE).is_file() and path not in (operator / "aircraft", operator / "issued"):
                yield from _others(path, operator)
            continue
        own = folder == operator and path.name in (OPERATION_FILE, _REGISTER)
        if path.is_file() and path.suffix not in _NOT_COVERED and path.name not in (BRIEF_FILE, NOTEBOOK) and not own:
            yield path


def _brief_toml(path: Path) -> str:
    """The data rather than the text, so that no trick with text blocks hides content among the signatures."""
    data = tomllib.loads(_plain(path.read_bytes()).decode("utf-8"))
    data.pop("signatures", None)
    return _sha(_canonical(data))


def _cells_of_file(path: Path) -> list[dict[str, Any]]:
    return list(json.loads(path.read_text(encoding="utf-8"))["cells"])


def _cell(cell: Any) -> list[Any]:
    """What of a cell reaches the page: its kind, its source, and the pictures pasted into it."""
    return [cell["cell_type"], _joined(cell["source"]), _joined(cell.get("attachments") or {})]


def _joined(value: Any) -> Any:
    """Text as one piece: a notebook file may keep it as a list of lines."""
    if isinstance(value, list):
        return "".join(value)
    if isinstance(value, dict):
        return {str(key): _joined(inner) for key, inner in value.items()}
    return value


def _canonical(value: object) -> bytes:
    return json.dumps(value, sort_keys=True, ensure_ascii=True, default=_dated).encode("ascii")


def _dated(value: object) -> list[str]:
    if isinstance(value, dt.date | dt.time):
        return ["date", value.isoformat()]
    raise TypeError(f"no plain form for {type(value).__name__}")


def _file(path: Path) -> str:
    content = path.read_bytes()
    return _sha(_plain(content) if path.suffix in _TEXT else content)


def _plain(content: bytes) -> bytes:
    """Line ends and the byte-order mark are an editor's business, not the author's."""
    return content.removeprefix(b"\xef\xbb\xbf").replace(b"\r\n", b"\n")


def _sha(content: bytes) -> str:
    return hashlib.sha256(content).hexdigest()
