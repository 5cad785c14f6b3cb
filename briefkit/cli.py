"""The command line: parses, calls what a notebook would call, prints. Rooms are entered only by their own command."""

from __future__ import annotations

import shlex
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from briefkit.errors import BriefkitError

if TYPE_CHECKING:
    from briefkit.brief.build import Result

app = typer.Typer(
    help="Briefs on retreating-blade stall for the crews of your own aircraft: one offline page each.",
    no_args_is_help=True,
    add_completion=False,
    pretty_exceptions_enable=False,
    rich_markup_mode=None,
)

Paths = Annotated[list[Path], typer.Argument(metavar="PATH...", exists=True, help="Brief folders, or folders of them.")]


def main() -> None:
    """The `briefkit` command."""
    app()


@app.callback(invoke_without_command=True)
def top(version: Annotated[bool, typer.Option("--version", help="Print the version and stop.")] = False) -> None:
    if version:
        from importlib.metadata import version as installed

        typer.echo(f"briefkit {installed('briefkit')}")
        raise typer.Exit


@app.command("build")
def build_command(
    paths: Paths,
    out: Annotated[Path, typer.Option("--out", file_okay=False, help="Folder for the pages.")] = Path("out"),
) -> None:
    """Make the page of every brief.

    Runs each brief below PATH and writes its page, its read-back sheet and an index. Exit 1 if one failed; the others
    are built, and a page already there is left whole.
    """
    with _plain_errors():
        from rich.console import Console
        from rich.progress import BarColumn, MofNCompleteColumn, Progress, TextColumn, TimeElapsedColumn

        from briefkit.brief.build import build, find_briefs

        console = Console(stderr=True)
        columns = (TextColumn("building"), BarColumn(), MofNCompleteColumn(), TimeElapsedColumn())
        with Progress(*columns, console=console, transient=True, disable=not console.is_terminal) as progress:
            bar = progress.add_task("", total=len(find_briefs(paths)))

            def tell(result: Result) -> None:
                _print_result(result)
                progress.advance(bar)

            results = build(paths, out, tell)
        failed = sum(bool(result.error) for result in results)
        if failed:
            typer.echo(
                f"{failed} of {len(results)} not built; pages of earlier builds were left as they were", err=True
            )
            raise typer.Exit(1)


def _print_result(result: Result) -> None:
    if result.error or result.page is None:
        typer.echo(f"{result.brief}: {result.error}", err=True)
        return
    typer.echo(f"{result.page}  {result.seconds:.1f} s  {result.size:,} bytes")
    for note in result.notes:
        typer.echo(f"  {note}")


@app.command("check")
def check_command(paths: Paths) -> None:
    """List what stands in the way of release.

    Exit 1 if something blocks it. Nothing is run or written.
    """
    with _plain_errors():
        from briefkit.brief.check import Level, findings

        blocks = 0
        for path in paths:
            found = findings(path)
            blocks += sum(finding.level is Level.BLOCKS for finding in found)
            typer.echo("\n".join(map(str, found)) if found else f"{path}: nothing stands against release")
        if blocks:
            raise typer.Exit(1)


@app.command("new")
def new_command(
    folder: Annotated[Path, typer.Argument(help="The folder to make.")],
    type_name: Annotated[str, typer.Option(help="Type name, as on your documents.")] = "",
    blades: Annotated[str, typer.Option(help="Main rotor blades.")] = "",
    hub: Annotated[str, typer.Option(help="teetering, articulated or hingeless.")] = "",
    rotation: Annotated[str, typer.Option(help="Seen from above: anticlockwise or clockwise.")] = "",
    airspeed_unit: Annotated[str, typer.Option(help="kt, km/h or mph.")] = "",
    mass_unit: Annotated[str, typer.Option(help="kg or lb.")] = "",
) -> None:
    """Make a brief for a type of yours.

    Six answers; what is not given as an option is asked. Nothing that exists is written over.
    """
    given = {
        "type_name": type_name,
        "blades": blades,
        "hub": hub,
        "rotation": rotation,
        "airspeed_unit": airspeed_unit,
        "mass_unit": mass_unit,
    }
    with _plain_errors():
        from briefkit.brief.new import QUESTIONS, Answers, new

        for question in QUESTIONS:
            if not given[question.name]:
                choices = f" ({', '.join(question.choices)})" if question.choices else ""
                given[question.name] = typer.prompt(question.text + choices)
        made = new(folder, Answers(**given))
        for file in made.written:
            typer.echo(f"written: {file}")
        if made.added_to is not None:
            typer.echo(f"lines added: {made.added_to}")
        where = shlex.quote(str(made.folder))
        typer.echo(f"see page 1:  briefkit build {where}")
        typer.echo(f"what is still to be typed:  briefkit check {where}")
        typer.echo(f"work on it:  briefkit live {where}")


@app.command("live")
def live_command(
    path: Annotated[Path, typer.Argument(exists=True, help="A brief's folder or its notebook.")],
    browser: Annotated[bool, typer.Option(help="Open the browser.")] = True,
) -> None:
    """Open a brief in JupyterLab.

    On this machine only and behind a token; stop with Ctrl-C.
    """
    with _plain_errors():
        from briefkit.brief.lab import open_lab

        open_lab(path, lambda address: typer.echo(f"{address}\nstop with Ctrl-C"), browser=browser)


@contextmanager
def _plain_errors() -> Iterator[None]:
    """An expected error is its own text and exit 1; an interrupt is one line."""
    try:
        yield
    except BriefkitError as error:
        typer.echo(str(error), err=True)
        raise typer.Exit(1) from None
    except KeyboardInterrupt:
        typer.echo("stopped", err=True)
        raise typer.Exit(130) from None
