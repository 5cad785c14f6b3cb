"""The kernel's side of a build: draws the still of every displayed model, in the kernel that holds them."""

from __future__ import annotations

from typing import Final

from briefkit.errors import BriefkitError

MIME: Final = "application/vnd.briefkit.stills+json"
REQUEST: Final = "import briefkit.brief.stills as _briefkit_stills\n_briefkit_stills.publish({models!r})"


def publish(models: list[str]) -> None:
    """Send one message: for each model in turn `{"still": html}`, or `{"fault": why}` for one that has none."""
    from IPython.display import display

    answers = [_answer(model, f"shown-{place}") for place, model in enumerate(models)]
    display({MIME: answers}, raw=True)  # type: ignore[no-untyped-call]


def _answer(model: str, key: str) -> dict[str, str]:
    from ipywidgets.widgets import widget

    from briefkit.figures.still import still

    # ipywidgets keeps its living models only here; a displayed model that is not among them was closed.
    living = widget._instances.get(model)
    if living is None:
        return {"fault": "shows an exhibit that was closed before the end of the notebook; run the cells in order"}
    try:
        return {"still": still(living, key)}
    except (BriefkitError, ValueError) as error:
        return {"fault": f"no still: {error}"}
