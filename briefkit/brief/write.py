"""Writes a page so that a reader sees the old one or the new one, whole, and never half of either."""

from __future__ import annotations

import contextlib
import os
from pathlib import Path
from typing import Final

from briefkit.errors import BuildError

_LEFTOVER: Final = ".part"


def write_page(path: Path, text: str | bytes) -> int:
    """Write UTF-8 text (or bytes) beside, flush it to the disk, put it in place, readable by all; the number of bytes.

    Raises:
        BuildError: the folder or the disk refuses; a page already there is left whole.
    """
    content = text.encode("utf-8") if isinstance(text, str) else text
    beside = path.with_name(f".{path.name}.{os.getpid()}{_LEFTOVER}")
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        try:
            _write_through(beside, content)
            os.replace(beside, path)
        except BaseException:
            with contextlib.suppress(OSError):
                beside.unlink(missing_ok=True)
            raise
        flush_folder(path.parent)
    except OSError as error:
        raise BuildError(f"{path}: cannot be written ({error.strerror}); what was there is as it was") from None
    return len(content)


def sweep(folder: Path) -> int:
    """Remove what an interrupted build left in a folder; how many files there were."""
    leftovers = [file for file in folder.glob(f".*{_LEFTOVER}") if file.is_file()]
    for file in leftovers:
        with contextlib.suppress(OSError):
            file.unlink(missing_ok=True)
    return len(leftovers)


def _write_through(file: Path, content: bytes) -> None:
    handle = os.open(file, os.O_WRONLY | os.O_CREAT | os.O_TRUNC | getattr(os, "O_NOFOLLOW", 0), 0o644)
    with os.fdopen(handle, "wb") as stream:
        stream.write(content)
        stream.flush()
        os.fsync(stream.fileno())
    file.chmod(0o644)  # whatever the umask: crews must be able to read it


def flush_folder(folder: Path) -> None:
    """Have the folder's own list of files on the disk, so that a file put in it stays after a failure of power."""
    if os.name == "nt":  # a folder cannot be opened there, and the replacement is already durable
        return
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)
