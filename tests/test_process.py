"""The command as a process of its own: signals, pipes that close, disks that are full, odd encodings."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import threading

import pytest

import tautwise as tw
from tautwise import cli
from tautwise.start import start_text
from tautwise.text_limits import best_so_far

GOOD = start_text()
FAILING = GOOD.replace('horizontal_tension = "20 kN"', 'horizontal_tension = "5 kN"')
SPANS, CONDITIONS = 200, 20


@pytest.fixture
def folder(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    for name, text in {"good": GOOD, "failing": FAILING}.items():
        (tmp_path / f"{name}.taut.toml").write_text(text, encoding="utf-8")
    return tmp_path


def shell(line: str) -> subprocess.CompletedProcess[str]:
    line = line.replace("tautwise", f"{sys.executable} -m tautwise")
    return subprocess.run(["bash", "-c", line], capture_output=True, text=True, check=False)


def long_search() -> tw.Project:
    hanger = {"hold": "hanger", "length": "1 m"}
    supports = [{"name": f"P{n}", "station": f"{100 * n} m", "elevation": "20 m"} for n in range(SPANS + 1)]
    return tw.Project(
        line={
            "diameter": "16 mm",
            "weight": "11.9 N/m",
            "stiffness": "22.5 MN",
            "expansion": "11.5e-6 / K",
            "breaking_strength": "190 kN",
        },
        support=[each | (hanger if 0 < n < SPANS else {}) for n, each in enumerate(supports)],
        stringing={"temperature": "15 degC"},
        condition=[{"name": f"c{n}", "temperature": f"{4 * n - 20} degC"} for n in range(CONDITIONS)],
        crossing=[{"name": "road", "from": "0 m", "to": f"{100 * SPANS} m", "top": "0 m"}],
        limit=[
            {"id": "strength", "kind": "tension", "share": 0.4},
            {"id": "road", "kind": "clearance", "over": "road", "least": "15 m"},
        ],
    )


def test_ctrl_c_reports_the_best_point_of_a_real_search():
    project = long_search()
    timer = threading.Timer(0.5, os.kill, (os.getpid(), signal.SIGINT))
    timer.start()
    try:
        with pytest.raises(tw.SearchCancelled) as caught:
            project.window(scan_points=400)  # some ten seconds, if it were left alone
    finally:
        timer.cancel()
    best = caught.value.best
    assert best is not None
    assert best.specify.horizontal_tension_N > 0.0
    assert best.specify.edges == ()
    assert "best pull so far, not verified: " in best_so_far(best)


@pytest.mark.parametrize(
    ("command", "code"),
    [
        ("vet failing.taut.toml", 1),
        ("vet good.taut.toml", 0),
        ("settle good.taut.toml", 0),
        ("window good.taut.toml --json", 0),
    ],
)
@pytest.mark.parametrize("unbuffered", ["", "PYTHONUNBUFFERED=1 "])
def test_a_closed_stdout_leaves_the_verdict(folder, command, code, unbuffered):
    done = shell(f"{unbuffered}tautwise {command} | true; echo ${{PIPESTATUS[0]}}")
    assert (done.stdout, done.stderr) == (f"{code}\n", "")
    done = shell(f"(sleep 0.3; {unbuffered}tautwise {command}; echo $? >&2) | true")
    assert done.stderr == f"{code}\n"


@pytest.mark.parametrize("command", ["schema", "start -", "--help", "vet good.taut.toml"])
def test_a_full_disk_is_a_plain_message(folder, command):
    if not os.path.exists("/dev/full"):
        pytest.skip("no /dev/full here")
    done = shell(f"tautwise {command} > /dev/full")
    assert done.returncode == 3
    assert done.stderr == "the output cannot be written: No space left on device\n"


def test_no_stdout_at_all_is_a_plain_message(folder):
    done = shell("tautwise vet good.taut.toml >&-")
    assert done.returncode == 3
    assert done.stderr.startswith("the output cannot be written")
    assert len(done.stderr.splitlines()) == 1


def test_an_output_that_knows_few_letters_gets_escapes(folder):
    (folder / "good.taut.toml").write_text(GOOD.replace("West mast", "Östmast"), encoding="utf-8")
    done = shell("PYTHONIOENCODING=ascii tautwise settle good.taut.toml")
    assert (done.returncode, done.stderr) == (0, "")
    assert "\\xd6stmast" in done.stdout


# --- start


def test_start_never_replaces_what_is_no_file(folder, capsys):
    os.mkfifo("pipe")
    os.mkdir("folder")
    for name in ("pipe", "folder"):
        assert cli.run(["start", "--force", name]) == 2
        assert f"{name}: this is not a regular file" in capsys.readouterr().err
    assert not os.path.isfile("pipe")


def test_start_wants_a_name(folder, capsys):
    assert cli.run(["start", ""]) == 2
    assert "a file name" in capsys.readouterr().err
