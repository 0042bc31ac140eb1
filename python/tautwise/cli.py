"""The ``tautwise`` command.

Data go to stdout, everything else to stderr. Exit codes: 0 done, and every limit holds or a window exists; 1 a limit
fails or the window is shut; 2 bad input or usage; 3 could not be settled, cancelled, or another failure of the program
itself. Everything heavy is imported inside the commands, so that ``tautwise --help`` is quick.
"""

from __future__ import annotations

import os
import sys
from collections.abc import Callable, Iterable, Sequence
from typing import TYPE_CHECKING, Any, TypeVar

import click

from tautwise.cli_output import (
    NoOutput,
    flushed,
    print_documents,
    print_json,
    print_text,
    print_texts,
    silence_stdout,
    tell,
)
from tautwise.files import ENDING, not_to_be_written, there_already, unfolded, write_whole

if TYPE_CHECKING:
    from tautwise.model import Project
    from tautwise.text import Ink

T = TypeVar("T")

DONE, FAILS, BAD_INPUT, FAILED = 0, 1, 2, 3


class Careful(click.Command):
    """A command whose errors become messages and exit codes; what it returns is its exit code."""

    def invoke(self, ctx: click.Context) -> Any:
        """Run the command; leaves through `ctx.exit`."""
        from tautwise.errors import InputError, SearchCancelled, TautwiseError

        try:
            code = super().invoke(ctx)
        except InputError as error:
            tell(str(fault) for fault in error.faults)
            code = BAD_INPUT
        except SearchCancelled as stop:
            from tautwise.text_limits import best_so_far

            tell([best_so_far(stop.best)])  # type: ignore[arg-type]
            code = FAILED
        except KeyboardInterrupt:
            tell(["cancelled"])
            code = FAILED
        except TautwiseError as error:
            tell([str(error)])
            code = FAILED
        ctx.exit(code or DONE)


class Commands(click.Group):
    """The group of commands, in the order in which a design uses them."""

    command_class = Careful

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Names in order of definition."""
        return list(self.commands)


json_option = click.option("--json", "as_json", is_flag=True, help="Print one JSON document instead of text.")
sources_option = click.option("--sources", is_flag=True, help="Also print where the numbers come from.")
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
        print_text(start_text())
        return DONE
    if refusal := not_to_be_written(file, force=force):
        tell([refusal])
        return BAD_INPUT
    try:
        write_whole(file, start_text(), force=force)
    except FileExistsError:
        tell([there_already(file)])
        return BAD_INPUT
    except OSError as error:
        tell([f"{file}: cannot be written: {error.strerror}"])
        return FAILED
    if as_json:
        print_json({"format": "tautwise-start 1", "file": file})
        return DONE
    from tautwise.text import Ink, next_steps, quoted

    steps = [
        ("read it and change every value to yours", quoted(file)),
        ("find the pulls that keep every limit", f"tautwise window {quoted(file)}"),
    ]
    tell([f"Wrote {file}.", *next_steps(steps, Ink(False))])
    return DONE


@commands.command()
@files_argument
@pull_option
@sources_option
@json_option
def settle(files: Sequence[str], pull: str | None, sources: bool, as_json: bool) -> int:
    """Find where the line hangs and how hard it pulls, in every condition.

    With several files, --json prints a list of documents.
    """
    from tautwise.solve import settle_report
    from tautwise.sources import with_sources

    done, failed = _each(_loaded(files), lambda project: settle_report(project, pull=pull))
    if as_json:
        print_documents([with_sources(report, project, sources) for project, report in done], many=len(files) > 1)
    else:
        from tautwise.text import settle_text

        print_texts(
            [*settle_text(report, project, _ink(), pull), *_source_lines(project, sources)] for project, report in done
        )
    for project, report in done:
        tell(f"warning: {text}" for text in report.warnings[len(project.warnings) :])
        head = f"{project.source}: " if project.source else ""
        failed += [head + each.unsettled_text() for each in report.conditions if not each.settled]
    tell(failed)
    return FAILED if failed else DONE


@commands.command()
@files_argument
@sources_option
@json_option
def window(files: Sequence[str], sources: bool, as_json: bool) -> int:
    """Find the pulls that keep every limit, and the pull to specify.

    Ctrl-C ends the search, says what it had found and exits with 3. With several files, --json prints a list of
    documents.
    """
    projects = _loaded(files)
    from tautwise.solve import window as search
    from tautwise.sources import with_sources

    done, failed = _each(projects, lambda project: search(project))
    if as_json:
        print_documents([with_sources(found, project, sources) for project, found in done], many=len(files) > 1)
    else:
        from tautwise.text_limits import window_text

        print_texts([*window_text(found, project, _ink()), *_source_lines(project, sources)] for project, found in done)
    for project, found in done:
        tell(f"warning: {text}" for text in found.warnings[len(project.warnings) :])
    tell(failed)
    if not all(found.open for _, found in done):
        return FAILS
    return FAILED if failed else DONE


@commands.command()
@files_argument
@click.option("--every", is_flag=True, help="A row for each limit and condition, not only the worst condition.")
@click.option("--on", "day", metavar="DATE", help="Judge waivers as of this day instead of today, as in 2027-06-30.")
@pull_option
@sources_option
@json_option
def vet(files: Sequence[str], every: bool, day: str | None, pull: str | None, sources: bool, as_json: bool) -> int:
    """Check every limit in every condition; takes files and folders.

    In a folder, every file that ends in .taut.toml is checked.
    """
    from tautwise.sources import with_sources
    from tautwise.waivers import day_of

    options = {} if day is None else {"today": day_of(day)}
    projects = _loaded(unfolded(files))
    from tautwise.errors import NotSettledError
    from tautwise.results import VetReport
    from tautwise.solve import undecided
    from tautwise.solve import vet as check

    def judged(project: Project) -> VetReport:
        try:
            report = check(project, pull=pull, every=every, **options)
        except NotSettledError as error:
            tell([str(error)])
            return undecided(project, str(error), pull=pull)
        return report

    done, _ = _each(projects, judged)
    verdicts = (with_sources(file, project, sources) for project, each in done for file in each.files)
    report = VetReport.of(verdicts, done[0][1].program)
    for project, file in zip([project for project, _ in done], report.files, strict=True):
        tell(f"warning: {text}" for text in file.findings[len(project.warnings) :])
    if as_json:
        print_documents([report])
    else:
        from tautwise.text_limits import vet_text

        lines = [line for project in projects for line in _source_lines(project, sources)]
        print_texts([[*vet_text(report, projects, _ink()), *lines]])
    if report.holds:
        return DONE
    return FAILS if any(limit.word == "fails" for limit in report.limits) else FAILED


@commands.command()
@click.argument("text", nargs=-1, metavar="[TEXT]...")
@click.option("--kind", help='Sizes of this kind only, such as "ACSR", "steel strand" or "wire rope".')
@click.option("--diameter", metavar="RANGE", help='Such as ">= 10 mm", "10 mm to 16 mm" or "12 mm".')
@click.option("--strength", metavar="RANGE", help='Breaking strength, such as ">= 50 kN".')
@click.option("--catalogue", multiple=True, metavar="FILE", help="A file of your own sizes; may be given repeatedly.")
@click.option("--sources", is_flag=True, help="Each value with its own unit, its source and how sure it is.")
@click.option("--csv", "as_csv", is_flag=True, help="Print CSV, in SI.")
@json_option
def sizes(text: Sequence[str], sources: bool, as_csv: bool, as_json: bool, **asked: Any) -> int:
    """List the sizes of the catalogue, or those that TEXT names.

    TEXT is a whole name, or words that a name holds.
    """
    from tautwise.catalogue import sizes as listed
    from tautwise.size_records import SizeList
    from tautwise.text_catalogue import sizes_csv, sizes_text

    found = listed(" ".join(text) or None, **asked)
    if as_json:
        print_documents([SizeList(found)])
    elif as_csv:
        print_text(sizes_csv(found))
    else:
        print_texts([sizes_text(found, _ink(), sources=sources, ropes=not text and not asked["kind"])])
    return DONE


@commands.command()
@click.argument("names", nargs=-1, metavar="[NAME]...")
@json_option
def rules(names: Sequence[str], as_json: bool) -> int:
    """List the rule packs, or print those named in words, with their sources."""
    from tautwise.rulepacks import RulePackList, packs_of
    from tautwise.text_catalogue import pack_text, rules_text

    packs = packs_of(names)
    if as_json:
        print_documents([packs[0] if len(names) == 1 else RulePackList(packs)])
    else:
        print_texts([pack_text(each, _ink()) for each in packs] if names else [rules_text(packs, _ink())])
    return DONE


@commands.command()
@files_argument
@click.option("--temperature", "temperatures", multiple=True, metavar="TEMPERATURE",
              help='A temperature of the line, such as "25 degC"; may be given several times.')  # fmt: skip
@pull_option
@click.option("--csv", "as_csv", is_flag=True, help="Print one CSV table instead of text.")
@json_option
def sheet(files: Sequence[str], temperatures: Sequence[str], pull: str | None, as_csv: bool, as_json: bool) -> int:
    """Print the crew sheet: lengths to cut, sags by temperature, clipping offsets, return waves.

    With several files, --json prints a list of documents.
    """
    if as_csv and as_json:
        raise click.UsageError("--csv and --json exclude one another")
    from tautwise.solve_sheet import sheet as crew_sheet

    done, failed = _each(_loaded(files), lambda project: crew_sheet(project, temperatures or None, pull=pull))
    if as_json:
        print_documents([found for _, found in done], many=len(files) > 1)
    elif as_csv:
        from tautwise.text_sheet import sheet_csv

        print_text(sheet_csv([found for _, found in done]))
    else:
        from tautwise.text_sheet import sheet_text

        print_texts(sheet_text(found, project, _ink()) for project, found in done)
    for project, found in done:
        tell(f"warning: {text}" for text in found.warnings[len(project.warnings) :])
    tell(failed)
    return FAILED if failed else DONE


@commands.command()
@click.argument("file", metavar="FILE")
@click.argument("survey", metavar="SURVEY")
@click.option("--unknown", type=click.Choice(["pull", "lengths"]), default="pull", show_default=True,
              help="One pull of the whole line, or one natural length for each span.")  # fmt: skip
@click.option("--temperature", metavar="TEMPERATURE", help='Of the line, such as "18 degC", where the survey has none.')
@click.option("--write", "target", metavar="NEW", help="Write the project as built to this file.")
@click.option("--force", is_flag=True, help="Overwrite a file that is there.")
@json_option
def fit(
    file: str, survey: str, unknown: str, temperature: str | None, target: str | None, force: bool, as_json: bool
) -> int:
    """Find the pull or the natural lengths of a line from points measured on it.

    SURVEY is a CSV file with columns station_m, elevation_m (or _ft) and, where measured, temperature_degC, offset_m,
    sigma_m, point, date: a point on each line, of the bare line in still air.
    """
    from tautwise.as_built import as_built_text
    from tautwise.fit import fit as search

    (project,) = _loaded([file])
    refusal = "" if target is None else not_to_be_written(target, force=force)
    if refusal:
        tell([refusal])
        return BAD_INPUT
    found = search(project, survey, unknown=unknown, temperature=temperature)
    if target is not None:
        text = as_built_text(found, project, target)
        try:
            write_whole(target, text, force=force)
        except FileExistsError:
            tell([there_already(target)])
            return BAD_INPUT
        except OSError as error:
            tell([f"{target}: cannot be written: {error.strerror}"])
            return FAILED
    if as_json:
        print_documents([found])
    else:
        from tautwise.text_fit import fit_text

        print_texts([fit_text(found, project, _ink(), target, temperature)])
    if target is not None:
        tell([f"Wrote {target}."])
    tell(f"warning: {text}" for text in found.warnings)
    return DONE


@commands.command()
@json_option
def schema(as_json: bool) -> int:
    """Print the JSON Schema of the project file, for editors and checks (always JSON)."""
    from tautwise.schema import project_schema

    print_json(project_schema())
    return DONE


def main(arguments: Sequence[str] | None = None) -> None:
    """Run the command line and exit with its code.

    Parameters
    ----------
    arguments: as after the program's name; None takes those of the process.
    """
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="backslashreplace")  # a locale of few letters must not end a command
    sys.exit(run(arguments))


def run(arguments: Sequence[str] | None = None) -> int:
    """Run the command line; the exit code."""
    try:
        code = commands.main(arguments, prog_name="tautwise", standalone_mode=False)
        return flushed(int(code or DONE))
    except click.exceptions.Exit as stop:
        try:
            return flushed(stop.exit_code)
        except NoOutput as error:
            return _unwritten(error)
    except SystemExit:  # how click leaves where the reader of a help text has closed the pipe
        silence_stdout()
        return DONE
    except NoOutput as error:
        return _unwritten(error)
    except OSError as error:  # from the printing of a help text; everything else has its own message
        return _unwritten(NoOutput(error.strerror or error))
    except click.ClickException as error:
        error.show()
        return BAD_INPUT
    except (click.Abort, KeyboardInterrupt):
        tell(["cancelled"])
    except MemoryError:
        tell(["out of memory"])
    except Exception as error:
        words = " ".join(f"{type(error).__name__}: {error}".split())
        tell([f"tautwise failed, which is its own fault and not the input's: {words}"])
    return FAILED


def _version(ctx: click.Context, option: click.Parameter, asked: bool) -> None:
    if asked and not ctx.resilient_parsing:
        import tautwise

        print_text(f"tautwise {tautwise.__version__}\n")
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
        tell(f"warning: {warning}" for warning in project.warnings)
    if faults:
        raise InputError(dict.fromkeys(faults))
    return projects


def _each(projects: Iterable[Project], work: Callable[[Project], T]) -> tuple[list[tuple[Project, T]], list[str]]:
    """What `work` makes of each project, and why the others could not be settled; bad input of all in one error."""
    from tautwise.errors import Fault, InputError, NotSettledError

    done: list[tuple[Project, T]] = []
    failed: list[str] = []
    faults: list[Fault] = []
    for project in projects:
        try:
            done.append((project, work(project)))
        except InputError as error:
            faults += error.faults
        except NotSettledError as error:
            failed.append(str(error))
    if faults:
        raise InputError(dict.fromkeys(faults))
    return done, failed


def _source_lines(project: Project, asked: bool) -> list[str]:
    """Where the numbers come from, in words, where asked for."""
    from tautwise.sources import sources_lines, sources_of

    return ["", _ink().strong("Where the numbers come from"), *sources_lines(sources_of(project))] if asked else []


def _ink() -> Ink:
    """Accents where stdout is a terminal that wants them."""
    from tautwise.text import Ink

    plain = os.environ.get("NO_COLOR") or os.environ.get("TERM") == "dumb"
    return Ink(sys.stdout is not None and sys.stdout.isatty() and not plain)


def _unwritten(error: NoOutput) -> int:
    silence_stdout()
    tell([f"the output cannot be written: {error}"])
    return FAILED
