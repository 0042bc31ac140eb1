"""The ``tautwise`` command.

Data go to stdout, everything else to stderr. Exit codes: 0 done, and every limit holds or a window exists; 1 a limit
fails or the window is shut; 2 bad input or usage; 3 could not be settled, cancelled, or another failure of the program
itself. Everything heavy is imported inside the commands, so that ``tautwise --help`` is quick.
"""

from __future__ import annotations

import os
import sys
from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING, Any

import click

if TYPE_CHECKING:
    from tautwise.model import Project
    from tautwise.records import Record
    from tautwise.results import SettleReport
    from tautwise.text import Ink

DONE, FAILS, BAD_INPUT, FAILED = 0, 1, 2, 3
ENDING = ".taut.toml"


class Careful(click.Command):
    """A command whose errors become messages and exit codes; what it returns is its exit code."""

    def invoke(self, ctx: click.Context) -> Any:
        """Run the command; leaves through `ctx.exit`."""
        from tautwise.errors import InputError, SearchCancelled, TautwiseError

        try:
            code = super().invoke(ctx)
        except InputError as error:
            _tell(str(fault) for fault in error.faults)
            code = BAD_INPUT
        except SearchCancelled as stop:
            from tautwise.text_limits import best_so_far

            _tell([best_so_far(stop.best)])  # type: ignore[arg-type]
            code = FAILED
        except KeyboardInterrupt:
            _tell(["cancelled"])
            code = FAILED
        except TautwiseError as error:
            _tell([str(error)])
            code = FAILED
        ctx.exit(code or DONE)


class Commands(click.Group):
    """The group of commands, in the order in which a design uses them."""

    command_class = Careful

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Names in order of definition."""
        return list(self.commands)


json_option = click.option("--json", "as_json", is_flag=True, help="Print one JSON document instead of text.")
pull_option = click.option("--pull", metavar="FORCE", help='String to this pull instead, such as "20 kN".')
files_argument = click.argument("files", nargs=-1, required=True, metavar="FILE...")


@click.group(cls=Commands, context_settings={"help_option_names": ["-h", "--help"]})
@click.option("--version", is_flag=True, is_eager=True, expose_value=False, callback=lambda *given: _version(*given),
              help="Show the version and exit.")  # fmt: skip
def commands() -> None:
    """How hard to pull a line, and where to hold it up.

    Begin with "tautwise start", then "tautwise window FILE". Exit codes: 0 all is well, 1 a limit fails or the window
    is shut, 2 bad input, 3 could not be settled or another failure.

    A design aid: local codes and a licensed engineer decide.
    """


@commands.command()
@click.argument("file", default=f"line{ENDING}", metavar="[FILE]")
@click.option("--force", is_flag=True, help="Overwrite a file that is there.")
@json_option
def start(file: str, force: bool, as_json: bool) -> int:
    """Write a commented project file to begin from; - writes it to the screen."""
    from tautwise.start import start_text

    if file == "-":
        _print(start_text())
        return DONE
    if os.path.lexists(file) and not force:
        _tell([_there_already(file)])
        return BAD_INPUT
    try:
        _write_whole(file, start_text(), force=force)
    except FileExistsError:
        _tell([_there_already(file)])
        return BAD_INPUT
    except OSError as error:
        _tell([f"{file}: cannot be written: {error.strerror}"])
        return FAILED
    if as_json:
        _print_json({"format": "tautwise-start 1", "file": file})
        return DONE
    from tautwise.text import Ink, next_steps, quoted

    steps = [
        ("read it and change every value to yours", quoted(file)),
        ("find the pulls that keep every limit", f"tautwise window {quoted(file)}"),
    ]
    _tell([f"Wrote {file}.", *next_steps(steps, Ink(False))])
    return DONE


@commands.command()
@files_argument
@pull_option
@json_option
def settle(files: Sequence[str], pull: str | None, as_json: bool) -> int:
    """Find where the line hangs and how hard it pulls, in every condition.

    With several files, --json prints a list of documents.
    """
    projects = _loaded(files)
    from tautwise.solve import settle_report

    reports = [settle_report(project, pull=pull) for project in projects]
    if as_json:
        _print_documents(reports)
    else:
        from tautwise.text import settle_text

        _print_texts(
            settle_text(report, project, _ink(), pull) for report, project in zip(reports, projects, strict=True)
        )
    for project, report in zip(projects, reports, strict=True):
        _tell(f"warning: {project.source}: {text}" for text in _loops(report))
    failed = [
        f"{project.source}: condition {each.name!r} is not settled: {each.status_text}"
        for report, project in zip(reports, projects, strict=True)
        for each in report.conditions
        if not each.settled
    ]
    _tell(failed)
    return FAILED if failed else DONE


@commands.command()
@files_argument
@json_option
def window(files: Sequence[str], as_json: bool) -> int:
    """Find the pulls that keep every limit, and the pull to specify.

    Ctrl-C ends the search, says what it had found and exits with 3. With several files, --json prints a list of
    documents.
    """
    projects = _loaded(files)
    from tautwise.solve import window as search

    for project in projects:
        if not project.limits:
            _tell([f"warning: {project.source}: no [[limit]], so every pull is in the window"])
    windows = [search(project) for project in projects]
    if as_json:
        _print_documents(windows)
    else:
        from tautwise.text_limits import window_text

        _print_texts(window_text(found, project, _ink()) for found, project in zip(windows, projects, strict=True))
    return DONE if all(found.open for found in windows) else FAILS


@commands.command()
@files_argument
@click.option("--every", is_flag=True, help="A row for each limit and condition, not only the worst condition.")
@pull_option
@json_option
def vet(files: Sequence[str], every: bool, pull: str | None, as_json: bool) -> int:
    """Check every limit in every condition; takes files and folders.

    In a folder, every file that ends in .taut.toml is checked.
    """
    projects = _loaded(_unfolded(files))
    from tautwise.results import VetReport
    from tautwise.solve import vet as check

    reports = [check(project, pull=pull, every=every) for project in projects]
    report = VetReport.of((file for each in reports for file in each.files), reports[0].program)
    for project in projects:
        if not project.limits:
            _tell([f"warning: {project.source}: no [[limit]], so there is nothing to vet"])
    if as_json:
        _print_documents([report])
    else:
        from tautwise.text_limits import vet_text

        _print_texts([vet_text(report, projects, _ink(), every=every)])
    if report.holds:
        return DONE
    return FAILS if any(limit.status == "fails" for limit in report.limits) else FAILED


@commands.command()
@json_option
def schema(as_json: bool) -> int:
    """Print the JSON Schema of the project file, for editors and checks (always JSON)."""
    from tautwise.schema import project_schema

    _print_json(project_schema())
    return DONE


def main(arguments: Sequence[str] | None = None) -> None:
    """Run the command line and exit with its code.

    Parameters
    ----------
    arguments: as after the program's name; None takes those of the process.
    """
    sys.exit(run(arguments))


def run(arguments: Sequence[str] | None = None) -> int:
    """Run the command line; the exit code."""
    try:
        code = commands.main(arguments, prog_name="tautwise", standalone_mode=False)
        sys.stdout.flush()
        return int(code or DONE)
    except click.exceptions.Exit as stop:
        return stop.exit_code
    except click.ClickException as error:
        error.show()
        return BAD_INPUT
    except (click.Abort, KeyboardInterrupt):
        _tell(["cancelled"])
    except BrokenPipeError:
        _silence_stdout()
    except MemoryError:
        _tell(["out of memory"])
    except Exception as error:
        words = " ".join(f"{type(error).__name__}: {error}".split())
        _tell([f"tautwise failed, which is its own fault and not the input's: {words}"])
    return FAILED


def _version(ctx: click.Context, option: click.Parameter, asked: bool) -> None:
    if asked and not ctx.resilient_parsing:
        import tautwise

        _print(f"tautwise {tautwise.__version__}\n")
        ctx.exit()


def _loaded(files: Iterable[str]) -> list[Project]:
    """The projects; every fault of every file in one error."""
    from tautwise.errors import Fault, InputError
    from tautwise.model import load

    projects: list[Project] = []
    faults: list[Fault] = []
    for file in files:
        try:
            projects.append(load(file))
        except InputError as error:
            faults += error.faults
    for project in projects:
        _tell(f"warning: {warning}" for warning in project.warnings)
    if faults:
        raise InputError(faults)
    return projects


def _loops(report: SettleReport) -> list[str]:
    """Spans that hang deeper than they are long, which is hardly meant."""
    return [
        f"{span.name} hangs {span.sag_m:.4g} m deep over {span.span_m:.4g} m in {each.name!r}; is the line this long?"
        for each in report.conditions
        for span in each.spans
        if span.sag_m > span.span_m
    ]


def _unfolded(files: Iterable[str]) -> list[str]:
    """Files, and the project files in and below folders, in order of name."""
    from pathlib import Path

    from tautwise.errors import Fault, InputError

    found: list[str] = []
    for file in files:
        if not os.path.isdir(file):
            found.append(file)
            continue
        inside = sorted(str(path) for path in Path(file).rglob(f"*{ENDING}") if path.is_file())
        if not inside:
            raise InputError([Fault(file, None, "", f"no file in this folder ends in {ENDING}")])
        found += inside
    return list(dict.fromkeys(found))


def _ink() -> Ink:
    """Accents where stdout is a terminal that wants them."""
    from tautwise.text import Ink

    plain = os.environ.get("NO_COLOR") or os.environ.get("TERM") == "dumb"
    return Ink(sys.stdout.isatty() and not plain)


def _tell(lines: Iterable[str]) -> None:
    """Print to stderr, a line each."""
    for line in lines:
        click.echo(line, err=True)


def _print(text: str) -> None:
    sys.stdout.write(text)


def _print_texts(texts: Iterable[list[str]]) -> None:
    from tautwise.text import joined

    _print("\n".join(joined(lines) for lines in texts))


def _print_documents(records: Sequence[Record]) -> None:
    documents = [record.to_dict() for record in records]
    _print_json(documents[0] if len(documents) == 1 else documents)


def _print_json(document: Any) -> None:
    from tautwise.records import readable_json

    _print(readable_json(document) + "\n")


def _there_already(file: str) -> str:
    return f"{file}: the file is there already; --force overwrites it"


def _write_whole(file: str, text: str, *, force: bool) -> None:
    """Write a file whole or not at all: to a temporary name beside it, synced, then put in place."""
    import tempfile

    folder = os.path.dirname(file) or "."
    with tempfile.NamedTemporaryFile(
        "w", encoding="utf-8", newline="\n", dir=folder, prefix=".tautwise-", delete=False
    ) as stream:
        try:
            stream.write(text)
            stream.flush()
            os.fsync(stream.fileno())
            os.chmod(stream.name, 0o666 & ~_umask())
            _put_in_place(stream.name, file, force=force)
        except BaseException:
            os.unlink(stream.name)
            raise


def _put_in_place(temporary: str, file: str, *, force: bool) -> None:
    if force:
        os.replace(temporary, file)
        return
    os.link(temporary, file)  # unlike a rename, never over a file that has appeared meanwhile
    os.unlink(temporary)


def _umask() -> int:
    mask = os.umask(0o077)
    os.umask(mask)
    return mask


def _silence_stdout() -> None:
    """Let the exit not stumble over what cannot be written any more."""
    try:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    except (OSError, ValueError):
        sys.stdout = None
