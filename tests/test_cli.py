"""The commands: what goes where, and every exit code."""

from __future__ import annotations

import json
import os
import re
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
    assert lines[0].startswith("bad.taut.toml:12: line.diameter: ")
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


# --- several files, and lines that are hardly lines


LOOSE = GOOD.replace('horizontal_tension = "20 kN"', 'horizontal_tension = "1 N"')


def test_one_line_that_does_not_settle_stops_no_other(folder, run):
    (folder / "a_loose.taut.toml").write_text(LOOSE)
    code, out, err = run("vet", "a_loose.taut.toml", "good.taut.toml", "--json")
    assert code == 3
    loose, good = json.loads(out)["files"]
    assert (loose["holds"], good["holds"]) == (False, True)
    assert {limit["status"] for limit in loose["limits"]} == {"undecided"}
    assert len(loose["limits"]) == 4
    assert "a_loose.taut.toml" in loose["limits"][0]["reason"]
    assert "good.taut.toml" not in err
    code, out, err = run("vet", "a_loose.taut.toml", "good.taut.toml")
    assert code == 3
    assert "UNDECIDED" in out
    assert out.count("leaves the line nearly slack") == 1
    assert out.startswith("1 of 2 files with limits that could not be judged\n")
    assert "finite range" not in out + err
    assert re.search(r"^a_loose\.taut\.toml: .*leaves the line nearly slack", err, re.MULTILINE)
    assert run("vet", ".")[0] == 1
    assert run("vet", "a_loose.taut.toml", "failing.taut.toml")[0] == 1


def test_bad_input_that_settling_finds_comes_from_every_file(folder, run):
    for name in "ab":
        text = GOOD.replace('at = "150 m"', 'at_length = "500 m"')
        (folder / f"{name}.taut.toml").write_text(text)
    code, out, err = run("settle", "a.taut.toml", "good.taut.toml", "b.taut.toml")
    assert (code, out) == (2, "")
    assert [line.partition(":")[0] for line in err.splitlines()] == ["a.taut.toml", "b.taut.toml"]


@pytest.mark.parametrize("command", ["settle", "window"])
def test_other_commands_go_on_as_well(folder, run, command, monkeypatch):
    (folder / "a.taut.toml").write_text(LOOSE)
    if command == "window":
        whole = solve.window
        options = {"a.taut.toml": {"seconds_most": 1e-9}}
        monkeypatch.setattr(solve, "window", lambda project: whole(project, **options.get(project.source, {})))
    code, out, err = run(command, "a.taut.toml", "good.taut.toml", "--json")
    assert code == 3
    assert [document["format"] for document in json.loads(out)] == [f"tautwise-{command} 1"]
    assert re.search(r"^a\.taut\.toml: ", err, re.MULTILINE)


@pytest.mark.parametrize("pull", ["0.001 N", "1 N"])
@pytest.mark.parametrize("command", ["settle", "vet"])
def test_a_pull_that_leaves_the_line_slack_is_explained(folder, run, command, pull):
    code, _, err = run(command, "good.taut.toml", "--pull", pull)
    assert code == 3
    (line,) = err.splitlines()
    assert re.match(r'good\.taut\.toml: (the line as strung, bare|condition "hot"): ', line)
    assert f"a pull of {pull} leaves the line nearly slack" in line
    asked = re.search(r'try "([^"]+)" or more', line)[1]
    assert run("settle", "good.taut.toml", "--pull", asked)[0] == 0


@pytest.mark.parametrize(
    ("old", "new", "key", "words"),
    [
        ('\nat = "150 m"', '\nat_length = "500 m"', "at_length", "500 m lies beyond the end of the line"),
        ("# load = [ {", 'load = [ { force = "1 kN", at_length = "400 m" } ] # {', "at_length", "400 m lies beyond"),
        (
            "# load = [ {",
            'load = [ { per_length = "9 N/m", from_length = "9 m", to_length = "301 m" } ] # {',
            "to_length",
            "301 m lies beyond",
        ),
        ('\nat = "150 m"', '\nat = "301 m"', "at", "301 m is not on the line, which runs from 0 m to 300 m"),
    ],
)
@pytest.mark.parametrize("command", ["settle", "vet"])
def test_places_off_the_line_are_faults_at_their_keys(folder, run, command, old, new, key, words):
    assert old in GOOD
    text = GOOD.replace(old, new)
    (folder / "off.taut.toml").write_text(text)
    code, out, err = run(command, "off.taut.toml")
    assert (code, out) == (2, "")
    line = text[: text.index(new.strip())].count("\n") + 1
    assert err.startswith(f"off.taut.toml:{line}: ")
    assert f".{key}: " in err
    assert words in err
    if "length" in key:
        assert re.search(r"natural length.* 300\.131 m", err)


def test_window_names_a_load_off_the_line_too(folder, run):
    load = 'load = [ { force = "1 kN", at_length = "400 m" } ] # {'
    (folder / "off.taut.toml").write_text(GOOD.replace("# load = [ {", load))
    code, out, err = run("window", "off.taut.toml")
    assert (code, out) == (2, "")
    assert re.match(r"off\.taut\.toml:\d+: condition\.\"ice and wind\"\.load\[0\]\.at_length: 400 m", err)


def test_a_line_above_its_strength_is_a_warning_everywhere(folder, run):
    code, out, err = run("settle", "good.taut.toml", "--pull", "200 kN")
    assert code == 0
    assert "Above its breaking strength of 190.00 kN: cold" in out
    assert "warning: good.taut.toml: the line is above its breaking strength in 'cold': 211.62 of 190.00 kN" in err
    _, out, _ = run("settle", "good.taut.toml", "--pull", "200 kN", "--json")
    warnings = json.loads(out)["warnings"]
    assert len(warnings) == 2
    assert "above its breaking strength in 'cold'" in warnings[0]
    _, out, err = run("settle", "good.taut.toml", "--json")
    assert (json.loads(out)["warnings"], err) == ([], "")


def test_stopped_window_says_what_to_do(folder, run, monkeypatch):
    project = tw.load("good.taut.toml")
    with pytest.raises(tw.NotSettledError, match=r"good\.taut\.toml: .*project\.window\(seconds_most=600\)"):
        project.window(seconds_most=1e-9)
    found = solve.core_of(project).window() | {"status": "evaluation_limit", "status_text": "stopped"}

    class Stopped:
        def window(self):
            return found

    monkeypatch.setattr(solve, "core_of", lambda project: Stopped())
    with pytest.raises(tw.NotSettledError, match=r"good\.taut\.toml: .*project\.window\(evaluations_most=10000\)"):
        project.window()


# --- what files and names may hold


def test_file_names_are_inert(folder, run):
    name = "\N{ESCAPE}[31mred.taut.toml"
    (folder / name).write_text(GOOD)
    (folder / f"x{name}").write_text(GOOD.replace('"16 mm"', '"16"'))
    for arguments in (("settle", name), ("window", name), ("vet", "."), ("vet", f"x{name}"), ("vet", name, "--json")):
        _, out, err = run(*arguments)
        assert "\N{ESCAPE}" not in out + err
    assert "\\x1b[31mred" in run("vet", f"x{name}")[2]


def test_names_that_are_no_text_are_shown_all_the_same(folder):
    name = b"odd\xff.taut.toml"
    (folder / os.fsdecode(name)).write_text(GOOD)
    for options in ((), ("--json",)):
        command = [sys.executable, "-m", "tautwise", "vet", name, *options]
        done = subprocess.run(command, capture_output=True, check=False)
        assert (done.returncode, done.stderr) == (0, b"")
        assert b"odd\\udcff" in done.stdout


def test_package_and_help_import_nothing_heavy():
    code = (
        "import sys, tautwise; from tautwise import cli; cli.run(['settle', '--help']); cli.run(['--help']); "
        "print({'numpy', 'pydantic', 'pint', 'jinja2', 'tautwise._core'} & set(sys.modules), file=sys.stderr)"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stderr.strip() == "set()"
