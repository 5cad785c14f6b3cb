"""The command line: parses, calls what a notebook would call, prints. Rooms are entered only by their own command."""

from __future__ import annotations

import datetime as dt
import json
import shlex
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from briefkit.errors import BriefkitError

if TYPE_CHECKING:
    from briefkit.brief.build import Result
    from briefkit.brief.finding import Finding
    from briefkit.brief.new import Question

app = typer.Typer(
    help="Briefs on retreating-blade stall for the crews of your own aircraft: one offline page each.",
    no_args_is_help=True,
    add_completion=False,
    pretty_exceptions_enable=False,
    rich_markup_mode=None,
)

Day = Annotated[
    dt.datetime | None,
    typer.Option("--date", formats=["%Y-%m-%d"], help="The day, like 2030-03-01; today by default."),
]
Json = Annotated[bool, typer.Option("--json", help="Print JSON for scripts.")]
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
    pdf: Annotated[
        bool, typer.Option("--pdf", help="Print each page to PDF too, where a Chromium is installed.")
    ] = False,
    paper: Annotated[str, typer.Option(help="Paper of the PDF: A4, A5 or Letter.")] = "A4",
    date: Day = None,
) -> None:
    """Make the page of every brief.

    Runs each brief below PATH and writes its page, its read-back sheet, the sheets of its deck if it has one, and an
    index. Exit 1 if one failed; the others are built, and a page already there is left whole. An issued page is never
    written over by another one. The same files give the same bytes; a PDF is a print of the page, and its bytes are not
    promised.
    """
    with _plain_errors():
        from rich.console import Console
        from rich.progress import BarColumn, MofNCompleteColumn, Progress, TextColumn, TimeElapsedColumn

        from briefkit.brief.build import build, find_briefs
        from briefkit.session.sheets import deck_pages

        console = Console(stderr=True)
        columns = (TextColumn("building"), BarColumn(), MofNCompleteColumn(), TimeElapsedColumn())
        with Progress(*columns, console=console, transient=True, disable=not console.is_terminal) as progress:
            bar = progress.add_task("", total=len(find_briefs(paths)))

            def tell(result: Result) -> None:
                _print_result(result)
                progress.advance(bar)

            results = build(paths, out, _day(date), tell, deck_pages)
        if pdf:
            from briefkit.brief.pdf import print_pdfs

            for file in print_pdfs(results, paper):
                typer.echo(file)
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
def check_command(paths: Paths, as_json: Json = False, date: Day = None) -> None:
    """List what stands in the way of release.

    Three levels: blocks release, needs a reason, note. Exit 0 if nothing stands against release, 1 if something does, 2
    if there is nothing to check. Over a folder it says which briefs a revised document touches. No notebook is run and
    nothing is written.
    """
    with _plain_errors(faulty=2):
        from briefkit.brief.check import findings, stands_against

        every = [(path, findings(path, _day(date))) for path in paths]
        if as_json:
            _print_json(
                {"stands_against_release": sum(len(stands_against(found)) for _, found in every)},
                [finding for _, found in every for finding in found],
            )
        for path, found in every if not as_json else []:
            lines = list(map(str, found))
            against = len(stands_against(found))
            lines += [] if against else [f"{path}: nothing stands against release"]
            typer.echo("\n".join(lines))
        if any(stands_against(found) for _, found in every):
            raise typer.Exit(1)


def _print_json(counts: dict[str, int], found: list[Finding]) -> None:
    from dataclasses import asdict

    typer.echo(json.dumps({**counts, "findings": [asdict(finding) for finding in found]}, ensure_ascii=False, indent=1))


def _day(date: dt.datetime | None) -> dt.date:
    return dt.date.today() if date is None else date.date()


@app.command("sign")
def sign_command(
    folder: Annotated[Path, typer.Argument(exists=True, file_okay=False, help="The brief's folder.")],
    role: Annotated[str, typer.Option(help="prepared, checked or approved.")],
    code: Annotated[str, typer.Option(help='Your staff code, like "NRC-17"; never a name.')],
    date: Day = None,
) -> None:
    """Sign a brief in one role.

    Writes staff code, date and the hash of everything the page is made from into brief.toml; any later edit makes the
    signature void, and check says what changed. Prepared, checked, approved: in this order, by different people.
    """
    with _plain_errors():
        from briefkit.brief.check import findings, stands_against
        from briefkit.brief.sign import sign

        signature = sign(folder, role, code, _day(date))
        typer.echo(f"{folder}: {role} by {code} on {signature.date}, content {signature.content[:12]}")
        if left := len(stands_against(findings(folder, _day(date), page=False))):
            count = "1 finding still stands" if left == 1 else f"{left} findings still stand"
            typer.echo(f"{count} against release:  briefkit check {shlex.quote(str(folder))}")


@app.command("compare")
def compare_command(
    old: Annotated[Path, typer.Argument(exists=True, help="A brief's folder, or the archive of an issued one.")],
    new: Annotated[Path, typer.Argument(exists=True, help="The same, of the later revision.")],
    as_json: Json = False,
) -> None:
    """Say what changed between two revisions, in words and numbers.

    Figures that became less conservative come first, each with the reason NEW gives in [[changes]]. Exit 1 if one has
    no reason.
    """
    with _plain_errors():
        from contextlib import ExitStack
        from dataclasses import asdict

        from briefkit.brief.compare import compare, explained
        from briefkit.brief.issue import opened

        with ExitStack() as stack:
            before, after = (stack.enter_context(opened(path)) for path in (old, new))
            found = [
                (one, explained(after.brief, one) if one.less_conservative else "") for one in compare(before, after)
            ]
        if as_json:
            typer.echo(json.dumps([{**asdict(one), "reason": why} for one, why in found], ensure_ascii=False, indent=1))
        for one, why in found if not as_json else []:
            typer.echo(str(one) + (f" ({why})" if why else ", no reason given" if one.less_conservative else ""))
        if not found and not as_json:
            typer.echo("nothing changed")
        if any(one.less_conservative and not why for one, why in found):
            raise typer.Exit(1)


@app.command("issue")
def issue_command(
    folder: Annotated[Path, typer.Argument(exists=True, file_okay=False, help="The brief's folder.")],
    out: Annotated[Path, typer.Option("--out", file_okay=False, help="Folder for the page.")] = Path("out"),
    date: Day = None,
) -> None:
    """Issue a signed brief: its page, a line in register.toml, an archive of everything it was made from.

    Refused, with what stands against it, while it is not released, or where this revision was issued already. An index
    that stands in the folder is told.
    """
    with _plain_errors():
        from briefkit.brief.check_register import unmarked_changes
        from briefkit.brief.export import released
        from briefkit.brief.identity import BRIEF_FILE, load_identity
        from briefkit.brief.issue import issue

        entry, page = issue(folder, out, _day(date), released)
        typer.echo(f"{page}  {entry.number} rev {entry.revision}, SHA-256 {entry.page}")
        for note in unmarked_changes(str(folder / BRIEF_FILE), load_identity(folder)):
            typer.echo(f"  {note}")


@app.command("verify")
def verify_command(
    pages: Annotated[list[Path], typer.Argument(metavar="PAGE...", exists=True, dir_okay=False, help="Issued pages.")],
    register: Annotated[
        Path | None, typer.Option(exists=True, help="The operator's folder or register; else looked for above PAGE.")
    ] = None,
    date: Day = None,
    as_json: Json = False,
) -> None:
    """Say whether a page is as registered, altered, superseded, expired, or not in this register.

    Exit 0 only if every page is as registered and in force.
    """
    with _plain_errors():
        from briefkit.brief.issue import State, find_register, verify

        answers = [(page, verify(page, find_register(page, register), _day(date))) for page in pages]
        if as_json:
            said = [{"page": str(page), "state": answer.state, "text": answer.text} for page, answer in answers]
            typer.echo(json.dumps(said, ensure_ascii=False, indent=1))
        for page, answer in answers if not as_json else []:
            typer.echo(f"{page}: {answer}")
        if any(answer.state is not State.AS_REGISTERED for _, answer in answers):
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
    starter: Annotated[str, typer.Option(help="type, hot-and-high or recurrent-check (with a first deck).")] = "type",
) -> None:
    """Make a brief for a type of yours.

    Six answers; what is not given as an option is asked, and asked again until it will do. Nothing that exists is
    written over.
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
        from briefkit.brief.new import Answers, Starter, new

        if starter not in tuple(Starter):
            raise typer.BadParameter(f"{starter!r} is not one of {', '.join(Starter)}", param_hint="--starter")
        made = new(folder, Answers(**_asked({name: said for name, said in given.items() if said})), _day(None), starter)
        for file in made.written:
            typer.echo(f"written: {file}")
        if starter == Starter.RECURRENT_CHECK:
            from briefkit.session.generate import write_deck

            typer.echo(f"written: {write_deck(made.folder)}; edit every case before use")
        if made.added_to is not None:
            typer.echo(f"lines added: {made.added_to}")
        where = shlex.quote(str(made.folder))
        typer.echo(f"see page 1:  briefkit build {where}")
        typer.echo(f"what is still to be typed:  briefkit check {where}")
        typer.echo(f"work on it:  briefkit live {where}")


def _asked(given: dict[str, str]) -> dict[str, str]:
    """The answers given as options, held at once and all together, and those asked for, each held as it is typed."""
    from briefkit.brief.new import QUESTIONS, fault_of, faults_of

    if faults := faults_of(given):
        raise BriefkitError("\n".join(f"--{one.name.replace('_', '-')}: {fault}" for one, fault in faults))
    for question in QUESTIONS:
        if question.name in given:
            continue

        def held(typed: str, question: Question = question) -> str:
            if fault := fault_of(question, typed.strip(), given):
                raise typer.BadParameter(str(fault))  # said, and asked again
            return typed.strip()

        choices = f" ({', '.join(question.choices)})" if question.choices else ""
        given[question.name] = typer.prompt(question.text + choices, value_proc=held)
    return given


@app.command("deck")
def deck_command(
    folder: Annotated[Path, typer.Argument(exists=True, file_okay=False, help="The brief's folder.")],
    area: Annotated[list[str] | None, typer.Option(help="A work area; the brief's own if none is given.")] = None,
) -> None:
    """Write a first deck for the recurrent check.

    Cases drawn from the aircraft and operation files, to be edited: hot days, drooped rotor, light, one where stall
    does not decide, one the tool refuses. Nothing that exists is written over.
    """
    with _plain_errors():
        from briefkit.session.generate import write_deck

        typer.echo(f"written: {write_deck(folder, *(area or ()))}; edit every case before use")


@app.command("recompute")
def recompute_command(
    log: Annotated[Path, typer.Argument(exists=True, dir_okay=False, help="A session log.")],
    operator: Annotated[
        Path | None,
        typer.Option(exists=True, file_okay=False, help="The operator's folder; else looked for above LOG."),
    ] = None,
    csv: Annotated[Path | None, typer.Option(dir_okay=False, help="Write the log as CSV to this new file.")] = None,
) -> None:
    """Compute every figure of a session log again, and say what differs today.

    Exit 0 if the log is whole and nothing differs, 1 if something does.
    """
    with _plain_errors():
        from briefkit.session.recompute import recompute, to_csv, write_csv
        from briefkit.session.record import read_log

        read = read_log(log)
        if csv is not None:
            write_csv(csv, to_csv(read))
            typer.echo(f"written: {csv}")
        done = recompute(read, operator)
        for note in (*done.notes, *done.differences):
            typer.echo(str(note))
        differ = len({one.line for one in done.differences})
        typer.echo(f"{len(read.steps)} steps, {done.steps} with figures computed again, {differ} differ")
        if done.differences or read.faults:
            raise typer.Exit(1)


@app.command("live")
def live_command(
    path: Annotated[Path, typer.Argument(exists=True, help="A brief's folder or its notebook.")],
    browser: Annotated[bool, typer.Option(help="Open the browser.")] = True,
    low_delay: Annotated[bool, typer.Option(help="Let sliders' small messages leave the server at once.")] = True,
) -> None:
    """Open a brief in JupyterLab.

    On this machine only and behind a token; stop with Ctrl-C.
    """
    with _plain_errors():
        from briefkit.brief.lab import open_lab

        def tell(address: str) -> None:
            typer.echo(f"{address}\nstop with Ctrl-C")

        open_lab(path, tell, browser=browser, low_delay=low_delay)


@contextmanager
def _plain_errors(faulty: int = 1) -> Iterator[None]:
    """An expected error is its own text and exit 1 (or `faulty`); an interrupt is one line."""
    try:
        yield
    except BriefkitError as error:
        typer.echo(str(error), err=True)
        raise typer.Exit(faulty) from None
    except KeyboardInterrupt:
        typer.echo("stopped", err=True)
        raise typer.Exit(130) from None
