"""Calls end when they are told to: deadlines, Ctrl-C and the GIL on large lines; and no more work than it takes."""

from __future__ import annotations

import os
import signal
import threading
import time
from dataclasses import dataclass, field

import numpy as np
import pytest

import tautwise as tw
from tautwise import _core, fit, neighbours

LATE_S = 1.0
"""How late an end may come on a busy machine. What these tests look for came seconds to a minute late."""


def long_line(spans: int, hold: str, **more) -> tw.Project:
    ends = {"hold": "anchor"}
    between = {"hold": hold, **({"length": "1 m", "weight": "100 N"} if hold == "hanger" else {})}
    supports = [
        {"name": f"P{j}", "station": f"{200 * j} m", "elevation": f"{20 + 2 * (7 * j % 11)} m"}
        | (between if 0 < j < spans else ends)
        for j in range(spans + 1)
    ]
    tables = {
        "line": {"diameter": "20 mm", "weight": "10 N/m", "stiffness": "20 MN", "expansion": "12e-6 / K"},
        "support": supports,
        "stringing": {"temperature": "15 degC", "horizontal_tension": "15 kN"},
        "condition": [{"name": "calm", "temperature": "15 degC"}],
    }
    return tw.Project(**(tables | more))


def over_sheaves() -> _core.Project:
    """A sag to be found over 1500 sheaves: seconds, if it were left alone."""
    rule = {"from": "P0", "to": "P1", "value": "3.4 m"}
    stringing = {"temperature": "15 degC", "method": "over sheaves", "sag": rule}
    return _core.Project(long_line(1500, "hanger", stringing=stringing).to_core())


def survey_of(spans: int, count: int) -> tw.Survey:
    x = (np.arange(count) + 0.5) * 200.0 * spans / count
    return tw.Survey.of(x, 30.0 - (x % 200.0) * (200.0 - x % 200.0) / 3000.0, temperature=15.0)


@dataclass
class Beat:
    """Another thread that wants to run every few milliseconds; `longest_s`: how long it could not."""

    longest_s: float = 0.0
    stopped: threading.Event = field(default_factory=threading.Event)

    def run(self) -> None:
        last = time.perf_counter()
        while not self.stopped.wait(0.005):
            now = time.perf_counter()
            self.longest_s, last = max(self.longest_s, now - last), now

    def __enter__(self) -> Beat:
        self.thread = threading.Thread(target=self.run)
        self.thread.start()
        return self

    def __exit__(self, *error: object) -> None:
        self.stopped.set()
        self.thread.join()


@pytest.mark.timing
@pytest.mark.parametrize("call", ["string", "settle", "sheet", "shape", "course"])
def test_a_search_over_sheaves_ends_at_its_deadline(call):
    core = over_sheaves()
    arguments = {"settle": (0,), "sheet": ([15.0],), "shape": (0, 2), "course": (0,)}.get(call, ())
    began = time.perf_counter()
    try:
        status = getattr(core, call)(*arguments, seconds_most=0.05)["status"]
    except _core.SettleError as error:
        status = error.status
    assert status == "deadline"
    assert time.perf_counter() - began < 0.05 + LATE_S


@pytest.mark.timing
@pytest.mark.parametrize("call", ["string", "settle", "shape"])
def test_ctrl_c_ends_a_search_over_sheaves(call):
    core = over_sheaves()
    timer = threading.Timer(0.3, os.kill, (os.getpid(), signal.SIGINT))
    began = time.perf_counter()
    timer.start()
    try:
        with pytest.raises(KeyboardInterrupt):
            getattr(core, call)(*(() if call == "string" else (0,)))
        assert time.perf_counter() - began < 0.3 + LATE_S
    finally:
        timer.cancel()


def test_judging_and_exact_lines_end_at_their_deadlines():
    """Not one step fits into a nanosecond."""
    limit = {"id": "strength", "kind": "tension", "most": "40 kN"}
    core = _core.Project(long_line(3, "hanger", limit=[limit]).to_core())
    assert [(row["status"], row["reason"]) for row in core.judge(seconds_most=1e-9)] == [("undecided", "deadline")]
    for call in (core.shape, core.course):
        with pytest.raises(_core.SettleError) as caught:
            call(0, seconds_most=1e-9)
        assert caught.value.status == "deadline"
    with pytest.raises(_core.SettleError) as caught:
        core.sheet([15.0], seconds_most=1e-9)
    assert caught.value.status == "deadline"


@pytest.mark.timing
def test_a_carriage_ends_at_its_deadline():
    """Loads per run and a carriage solve the line again and again."""
    loads = [{"per_run": "3 N/m"}, {"force": "1 kN", "carriage": "free", "at": "30 m"}]
    loads += [{"force": "100 N", "at": f"{100.3 + 200 * span} m"} for span in range(1, 400)]
    calm = {"name": "calm", "temperature": "15 degC", "load": loads}
    core = _core.Project(long_line(400, "hanger", condition=[calm]).to_core())
    began = time.perf_counter()
    assert core.settle(0, seconds_most=0.05)["status"] == "deadline"
    assert time.perf_counter() - began < 0.05 + LATE_S


@pytest.mark.timing
def test_many_points_on_many_spans_find_their_places_at_once():
    spans, points = 1999, survey_of(1999, 20_000)
    project = long_line(spans, "anchor")
    core, columns = _core.Project(project.to_core()), points.columns()
    began = time.perf_counter()
    assert core.fit(columns, unknown="pull", seconds_most=0.2)["status"] == "deadline"
    assert time.perf_counter() - began < 0.2 + LATE_S
    began = time.perf_counter()
    counts = fit._counts(project, points)
    assert 19_900 < sum(counts) <= 20_000  # less the few that are next to a support
    assert time.perf_counter() - began < LATE_S


@pytest.mark.timing
def test_a_fit_lets_other_threads_run():
    core, columns = _core.Project(long_line(300, "anchor").to_core()), survey_of(300, 20_000).columns()
    with Beat() as beat:
        core.fit(columns, unknown="lengths", seconds_most=0.2)
    assert beat.longest_s < 0.2  # 0.6 s when places were looked for from the first span on


def test_fits_and_sheets_do_not_settle_the_lines_beside(tmp_path, monkeypatch):
    calls = []
    monkeypatch.setattr(neighbours, "neighbour_of", lambda *given: calls.append(given))
    monkeypatch.chdir(tmp_path)
    (tmp_path / "upper.taut.toml").write_text(FILE)
    spacing = '[[limit]]\nid = "apart"\nkind = "spacing"\nother = "upper.taut.toml"\nleast = "1 m"\n'
    (tmp_path / "lower.taut.toml").write_text(FILE + spacing)
    lower = tw.load("lower.taut.toml")
    assert len(lower.others) == 1
    x = np.array([50.0, 100.0, 150.0])
    found = lower.fit(tw.Survey.of(x, 20.0 - x * (200.0 - x) / 3000.0, temperature=15.0))
    assert found.pull.horizontal_tension_N == pytest.approx(15e3, rel=0.01)
    assert lower.sheet().horizontal_tension_N == 15e3
    assert calls == []


FILE = """\
format = "tautwise 1"
[line]
weight = "10 N/m"
stiffness = "20 MN"
[[support]]
name = "A"
station = "0 m"
elevation = "20 m"
[[support]]
name = "B"
station = "200 m"
elevation = "20 m"
[stringing]
temperature = "15 degC"
horizontal_tension = "15 kN"
[[condition]]
name = "calm"
temperature = "15 degC"
"""
