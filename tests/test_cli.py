"""The commands: what goes where, and every exit code."""

from __future__ import annotations

import json
import os
import stat
import subprocess
import sys
import time

import pytest
from test_results import make

import tautwise as tw
from tautwise import cli, solve
from tautwise.start import start_text

GOOD = start_text()
SHUT = GOOD.replace('least = "6.5 m"', 'least = "16 m"').replace("share = 0.5 ", "share = 0.12 ")
FAILING = GOOD.replace('horizontal_tension = "20 kN"', 'horizontal_tension = "5 kN"')


@pytest.fixture
def folder(tmp_path, monkeypatch):
    """A working folder with a few project files."""
    monkeypatch.chdir(tmp_path)
    texts = {"good": GOOD, "shut": SHUT, "failing": FAILING}
    for name, text in texts.items():
        (tmp_path / f"{name}.taut.toml").write_text(text)
    return tmp_path


@pytest.fixture
def run(capsys):
    """Run a command line: exit code, stdout, stderr."""

    def call(*arguments: str) -> tuple[int, str, str]:
        code = cli.run(list(arguments))
        out, err = capsys.readouterr()
        return code, out, err

    return call


def process(*arguments: str, **options) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-m", "tautwise", *arguments]
    return subprocess.run(command, capture_output=True, text=True, check=False, **options)


# --- exit codes


@pytest.mark.parametrize(
    ("arguments", "code"),
    [
        ("settle good.taut.toml", 0),
        ("settle good.taut.toml --json", 0),
        ("window good.taut.toml", 0),
        ("window shut.taut.toml", 1),
        ("window shut.taut.toml --json", 1),
        ("window good.taut.toml shut.taut.toml", 1),
        ("vet good.taut.toml", 0),
        ("vet failing.taut.toml", 1),
        ("vet failing.taut.toml --json", 1),
        ("vet good.taut.toml failing.taut.toml", 1),
        ("schema", 0),
        ("--help", 0),
        ("--version", 0),
        ("window --help", 0),
        ("nonsense", 2),
        ("settle", 2),
        ("settle --nonsense good.taut.toml", 2),
        ("settle missing.taut.toml", 2),
        ("settle good.taut.toml --pull 20", 2),
        ("settle good.taut.toml --pull -20kN", 2),
        ("vet .git", 2),
    ],
)
def test_exit_codes(folder, run, arguments, code):
    assert run(*arguments.split())[0] == code


def test_good_answers_leave_stderr_empty(folder, run):
    for command in ("settle", "window", "vet", "schema"):
        files = () if command == "schema" else ("good.taut.toml",)
        code, out, err = run(command, *files)
        assert (code, err) == (0, "")
        assert out.endswith("\n")


def test_unsettled_condition_is_a_row_and_exit_3(folder, run, monkeypatch):
    whole = solve.settle_report
    monkeypatch.setattr(solve, "settle_report", lambda project, pull: whole(project, pull=pull, seconds_most=1e-9))
    code, out, err = run("settle", "good.taut.toml")
    assert code == 3
    assert "NOT SETTLED" in out
    assert err.count("is not settled") == 3
    code, out, err = run("settle", "good.taut.toml", "--json")
    assert code == 3
    assert {each["status"] for each in json.loads(out)["conditions"]} == {"deadline"}


def test_undecided_window_exits_3(folder, run, monkeypatch):
    def undecided(project):
        raise tw.NotSettledError("the window could not be decided: stopped at the deadline", "deadline")

    monkeypatch.setattr(solve, "window", undecided)
    code, out, err = run("window", "good.taut.toml")
    assert (code, out) == (3, "")
    assert "deadline" in err


@pytest.mark.parametrize("stop", [KeyboardInterrupt(), tw.SearchCancelled(best=None)])
def test_cancelled_search_exits_3(folder, run, monkeypatch, stop):
    def cancelled(project):
        raise stop

    monkeypatch.setattr(solve, "window", cancelled)
    code, out, err = run("window", "good.taut.toml")
    assert (code, out) == (3, "")
    assert "cancelled" in err


def test_cancelled_search_says_the_best_so_far(folder, run, monkeypatch):
    best = make().window()

    def cancelled(project):
        raise tw.SearchCancelled(best=best)

    monkeypatch.setattr(solve, "window", cancelled)
    code, _, err = run("window", "good.taut.toml")
    assert code == 3
    assert f"{best.specify.horizontal_tension_N / 1e3:.2f} kN" in err
    assert "not verified" in err


@pytest.mark.parametrize(
    ("error", "words"),
    [(RuntimeError("broken\nwheel"), "RuntimeError: broken wheel"), (MemoryError(), "out of memory")],
)
def test_own_failures_are_one_message_and_exit_3(folder, run, monkeypatch, error, words):
    def broken(project, pull, every):
        raise error

    monkeypatch.setattr(solve, "vet", broken)
    code, out, err = run("vet", "good.taut.toml")
    assert (code, out) == (3, "")
    assert words in err
    assert "Traceback" not in err


# --- input


def test_every_fault_of_every_file_on_its_own_line(folder, run):
    (folder / "bad.taut.toml").write_text(GOOD.replace('"16 mm"', '"16"').replace("[[mark]]", "[[mork]]"))
    code, out, err = run("vet", "good.taut.toml", "bad.taut.toml", "missing.taut.toml")
    assert (code, out) == (2, "")
    lines = err.splitlines()
    assert len(lines) == 3
    assert lines[0].startswith("bad.taut.toml:9: line.diameter: ")
    assert lines[2].startswith("missing.taut.toml: ")


def test_lengths_without_tension_are_bad_input(folder, run):
    text = GOOD.replace('horizontal_tension = "20 kN"  ', 'natural_length = ["302 m"]')
    text = text.replace("# load = [", 'load = [ { per_length = "11.9 N/m", direction = "up" } ] #')
    text = text.replace("ice = {", "# ice = {").replace("wind = {", "# wind = {")
    (folder / "loose.taut.toml").write_text(text)
    for command in ("settle", "vet"):
        code, out, err = run(command, "loose.taut.toml")
        assert (code, out) == (2, "")
        assert "stringing.natural_length: the line carries no tension" in err


def test_warnings_go_to_stderr_and_change_nothing(folder, run):
    (folder / "odd.taut.toml").write_text(GOOD.replace('"60 degC"', '"160 degC"'))
    code, out, err = run("settle", "odd.taut.toml")
    assert code == 0
    assert err.startswith("warning: odd.taut.toml:")
    assert "warning" not in out


def test_a_line_that_hangs_like_a_loop_is_pointed_out(folder, run):
    (folder / "loop.taut.toml").write_text(
        GOOD.replace('horizontal_tension = "20 kN"  ', 'natural_length = ["800 m"]').replace("18 m", "390 m")
    )
    code, _, err = run("settle", "loop.taut.toml")
    assert code == 0
    assert "is the line this long?" in err


def test_pull_on_the_command_line_replaces_the_stringing(folder, run):
    _, out, _ = run("settle", "good.taut.toml", "--pull", "30 kN", "--json")
    assert json.loads(out)["stringing"]["horizontal_tension_N"] == 30000.0
    assert run("vet", "failing.taut.toml", "--pull", "6744 lbf")[0] == 0


# --- output


def test_json_documents(folder, run):
    for command, word in (("settle", "settle"), ("window", "window"), ("vet", "vet")):
        _, out, _ = run(command, "good.taut.toml", "--json")
        assert json.loads(out)["format"] == f"tautwise-{word} 1"
    _, out, _ = run("settle", "good.taut.toml", "failing.taut.toml", "--json")
    assert len(json.loads(out)) == 2
    _, out, _ = run("vet", "good.taut.toml", "failing.taut.toml", "--json")
    assert [file["holds"] for file in json.loads(out)["files"]] == [True, False]
    assert json.loads(run("schema")[1])["$schema"]


def test_vet_takes_folders(folder, run):
    below = folder / "b" / "c"
    below.mkdir(parents=True)
    (below / "x.taut.toml").write_text(GOOD)
    (below / "other.toml").write_text("nothing")
    _, out, _ = run("vet", ".", "good.taut.toml", "--json")
    names = [file["file"] for file in json.loads(out)["files"]]
    assert names == ["b/c/x.taut.toml", "failing.taut.toml", "good.taut.toml", "shut.taut.toml"]


def test_vet_every_has_a_row_for_each_condition(folder, run):
    _, out, _ = run("vet", "good.taut.toml", "--every", "--json")
    assert len(json.loads(out)["files"][0]["limits"]) == 12


def test_files_without_limits_are_said_to_have_none(folder, run):
    (folder / "free.taut.toml").write_text(GOOD.partition("[[limit]]")[0])
    code, _, err = run("vet", "free.taut.toml")
    assert (code, "nothing to vet" in err) == (0, True)
    code, out, err = run("window", "free.taut.toml")
    assert "every pull" in err
    assert "open-ended" in out


def test_plain_text_where_stdout_is_no_terminal(folder, run):
    assert "\033" not in run("window", "good.taut.toml")[1]


def test_accents_only_on_a_terminal_that_wants_them(monkeypatch):
    monkeypatch.setattr(sys.stdout, "isatty", lambda: True)
    monkeypatch.setenv("TERM", "xterm")
    monkeypatch.delenv("NO_COLOR", raising=False)
    assert cli._ink().on
    monkeypatch.setenv("NO_COLOR", "1")
    assert not cli._ink().on


# --- start


def test_start_writes_a_file_that_works(folder, run):
    code, out, err = run("start", "new.taut.toml")
    assert (code, out) == (0, "")
    assert "tautwise window new.taut.toml" in err
    assert run("window", "new.taut.toml")[0] == 0
    mask = os.umask(0)
    os.umask(mask)
    assert stat.S_IMODE((folder / "new.taut.toml").stat().st_mode) == 0o666 & ~mask


def test_start_never_overwrites_unless_asked(folder, run):
    (folder / "mine.taut.toml").write_text("mine")
    code, out, err = run("start", "mine.taut.toml")
    assert (code, out) == (2, "")
    assert "--force" in err
    assert (folder / "mine.taut.toml").read_text() == "mine"
    assert run("start", "mine.taut.toml", "--force")[0] == 0
    assert (folder / "mine.taut.toml").read_text() == GOOD


def test_start_leaves_nothing_behind_when_it_fails(folder, run, monkeypatch):
    def full(descriptor):
        raise OSError(28, "No space left on device")

    before = sorted(folder.iterdir())
    monkeypatch.setattr(os, "fsync", full)
    code, _, err = run("start", "new.taut.toml")
    assert code == 3
    assert "No space left" in err
    assert sorted(folder.iterdir()) == before
    assert run("start", "nowhere/new.taut.toml")[0] == 3


def test_start_to_the_screen_and_by_default(folder, run):
    assert run("start", "-") == (0, GOOD, "")
    code, out, _ = run("start", "--json")
    assert (code, json.loads(out)["file"]) == (0, "line.taut.toml")


# --- the process


def test_module_runs_as_a_command(folder):
    done = process("vet", "failing.taut.toml")
    assert done.returncode == 1
    assert done.stdout.startswith("Inlet crossing\n")


def test_closed_pipe_is_no_traceback(folder):
    command = f"{sys.executable} -m tautwise schema | head -c 1"
    done = subprocess.run(command, shell=True, capture_output=True, text=True, check=True)
    assert (done.stdout, done.stderr) == ("{", "")


@pytest.mark.timing
def test_help_is_quick():
    process("--help")
    began = time.perf_counter()
    done = process("--help")
    assert done.returncode == 0
    assert time.perf_counter() - began < 0.3


def test_help_imports_nothing_heavy():
    code = (
        "import sys; from tautwise import cli; cli.run(['--help']); "
        "print({'numpy', 'pydantic', 'pint', 'tautwise._core'} & set(sys.modules), file=sys.stderr)"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stderr.strip() == "set()"
