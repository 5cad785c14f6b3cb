"""Where the templates lie: inside the package in a wheel, beside it in a checkout."""

from __future__ import annotations

from pathlib import Path

from briefkit.errors import BuildError


def template_folder(kind: str = "handout") -> Path:
    """The folder of the `handout`'s template and style, or of the `starters`. Raises `BuildError` where it is gone."""
    package = Path(__file__).resolve().parents[1]
    for folder in (package / "templates" / kind, package.parent / "templates" / kind):
        if folder.is_dir():
            return folder
    raise BuildError(f"the {kind} template is missing from this installation; install briefkit again")
