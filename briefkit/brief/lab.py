"""Opens a brief in JupyterLab: on this machine only, behind a token, with this interpreter and without pop-ups."""

from __future__ import annotations

import json
import secrets
import socket
import tempfile
import time
from collections.abc import Callable
from importlib.util import find_spec
from pathlib import Path
from threading import Thread
from typing import Final
from urllib.parse import quote

from briefkit.brief.identity import NOTEBOOK, operator_folder
from briefkit.brief.low_delay import send_at_once
from briefkit.errors import BuildError

_LOOPBACK: Final = "127.0.0.1"
_START_SECONDS: Final = 120
# The question whether to fetch news, and the look for newer versions: both ask the network.
_OVERRIDES: Final = {"@jupyterlab/apputils-extension:notification": {"fetchNews": "false", "checkForUpdates": False}}


def open_lab(path: Path, tell: Callable[[str], None], *, browser: bool = True, low_delay: bool = True) -> None:
    """Serve the operator folder and open the brief's notebook; returns when the server is stopped.

    `path` is a brief's folder or its notebook; `tell` hears the address once it answers. `low_delay` lets the kernel's
    small messages leave at once, where the installed server allows it. Raises:
        BuildError: JupyterLab is not installed, or there is no notebook here.
        FaultyFile: no operation.toml here or above.
    """
    if find_spec("jupyterlab") is None:
        raise BuildError("JupyterLab is not installed; install briefkit with its lab extra: briefkit[lab]")
    notebook = (path / NOTEBOOK if path.is_dir() else path).resolve()
    if notebook.suffix != ".ipynb" or not notebook.is_file():
        raise BuildError(f"{path}: no notebook here; a brief is a folder with {NOTEBOOK}")
    root = operator_folder(notebook.parent)
    with tempfile.TemporaryDirectory(prefix="briefkit-") as private:
        (Path(private) / "overrides.json").write_text(json.dumps(_OVERRIDES), encoding="utf-8")
        port, token = _free_port(), secrets.token_urlsafe(24)
        place = "/lab/tree/" + quote(notebook.relative_to(root).as_posix())
        address = f"http://{_LOOPBACK}:{port}{place}?token={token}"
        Thread(target=_tell_when_open, args=(port, lambda: tell(address)), daemon=True).start()
        if low_delay:
            send_at_once()
        _serve(arguments(root, place, port, token, Path(private), browser=browser))


def arguments(root: Path, place: str, port: int, token: str, settings: Path, *, browser: bool) -> list[str]:
    """The server's settings; given in full, so that a machine's own configuration cannot widen them."""
    return [
        f"--ServerApp.root_dir={root}",
        f"--ServerApp.ip={_LOOPBACK}",
        "--ServerApp.allow_remote_access=False",
        f"--ServerApp.port={port}",
        "--ServerApp.port_retries=0",
        f"--ServerApp.open_browser={browser}",
        "--ServerApp.answer_yes=True",
        "--ServerApp.allow_root=True",  # in a container there may be nobody else; it still answers this machine only
        "--Application.log_level=WARN",
        "--ServerApp.kernel_spec_manager_class=briefkit.brief.run.OwnInterpreter",
        f"--IdentityProvider.token={token}",
        f"--LabApp.default_url={place}",
        f"--LabApp.app_settings_dir={settings}",
        "--LabApp.extension_manager=readonly",
    ]


def _serve(argv: list[str]) -> None:
    from jupyterlab.labapp import LabApp  # type: ignore[import-untyped]

    # In this process, so that the token never stands in the list of processes.
    LabApp.launch_instance(argv=argv)


def _tell_when_open(port: int, tell: Callable[[], None]) -> None:
    """An address said before the server listens would be a page that cannot be reached."""
    deadline = time.monotonic() + _START_SECONDS
    while time.monotonic() < deadline:
        with socket.socket() as probe:
            if probe.connect_ex((_LOOPBACK, port)) == 0:
                return tell()
        time.sleep(0.1)
    return None


def _free_port() -> int:
    with socket.socket() as probe:
        probe.bind((_LOOPBACK, 0))
        return int(probe.getsockname()[1])
