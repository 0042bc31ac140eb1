"""A shut window: each relaxation that it proposes, put into the project, opens it, and a smaller one does not."""

from __future__ import annotations

import re
import tomllib
from typing import Any

import pytest

import tautwise as tw
from refresh_expected import EXAMPLES, printed

FILE = EXAMPLES / "shut_window.taut.toml"
KEYS = {"clearance": "least", "support_height": "height", "support_station": "station"}


@pytest.fixture(scope="module")
def shut() -> tw.PullWindow:
    return tw.load(FILE).window()


def test_window_is_shut_by_clearance_against_strength(shut):
    assert not shut.open
    assert (shut.low, shut.high, shut.specify) == (None, None, None)
    needs = {each.limit: each for each in shut.conflict}
    assert set(needs) == {"lorry-clearance", "strength"}
    assert (needs["lorry-clearance"].condition, needs["lorry-clearance"].side) == ("hot", "at least")
    assert (needs["strength"].condition, needs["strength"].side) == ("ice and wind", "at most")
    assert needs["lorry-clearance"].needs_N > needs["strength"].needs_N
    with pytest.raises(tw.ShutWindowError, match="lorry-clearance"):
        shut.require_open()


def test_conflicting_needs_are_where_each_limit_is_used_up(shut):
    project = tw.load(FILE)
    for each in shut.conflict:
        used = {limit.id: limit.utilisation for limit in project.vet(pull=each.needs_N).limits}
        assert used[each.limit] == pytest.approx(1.0, abs=1e-6)


def test_every_kind_of_change_is_proposed(shut):
    kinds = [kind_of(change) for change in shut.relax]
    assert sorted(kinds) == ["allowance"] * 2 + ["support_height"] * 2 + ["support_station"] * 2


@pytest.mark.parametrize("number", range(6))
def test_relaxation_opens_the_window_through_python(shut, number):
    change = shut.relax[number]
    assert project_with(change, 1.0 + 1e-6).window().open
    assert not project_with(change, 0.9).window().open


@pytest.mark.parametrize("number", range(6))
def test_its_pull_then_keeps_every_limit(shut, number):
    change = shut.relax[number]
    report = project_with(change, 1.0 + 1e-6).vet(pull=change.pull_N)
    assert max(limit.utilisation for limit in report.limits) <= 1.0 + 1e-5


@pytest.mark.parametrize("number", range(6))
def test_relaxation_opens_the_window_in_the_file(shut, number, tmp_path):
    """The line that the text names, changed to the value that the text prints."""
    change, row = shut.relax[number], printed_changes()[number]
    name, line = row["where"].rsplit(":", 1)
    lines = FILE.read_text(encoding="utf-8").splitlines(keepends=True)
    assert name == FILE.name
    lines[int(line) - 1] = edited(lines[int(line) - 1], row)
    edit = tmp_path / "edited.taut.toml"
    edit.write_text("".join(lines), encoding="utf-8")
    window = tw.load(edit).window()
    assert window.open
    assert window.low.horizontal_tension_N == pytest.approx(change.pull_N, rel=0.01)


def test_relaxations_are_about_what_a_parabola_says(shut):
    """Half the lift of one pole is felt at mid-span, where the clearance lacks its 0.17 m; station 70 m lies amid."""
    by = {change.change.partition(" (")[0]: change.by for change in shut.relax}
    lacking = -by["allowed value of lorry-clearance"]
    assert by["height of West pole"] == pytest.approx(2 * lacking, rel=0.06)
    assert by["height of East pole"] == pytest.approx(2 * lacking, rel=0.06)
    # A shorter span sags less: the sag goes with the square of the span, 3 m and more on 140 m.
    assert 0 < by["station of West pole"] < 10
    assert -10 < by["station of East pole"] < 0


def kind_of(change: Any) -> str:
    if change.support is None:
        return "allowance"
    return "support_station" if change.change.startswith("station") else "support_height"


def project_with(change: Any, part: float) -> tw.Project:
    """The project with `part` of a change, from keyword arguments."""
    tables = tomllib.loads(FILE.read_text(encoding="utf-8"))
    value = change.to - change.by + part * change.by
    if change.support is not None:
        support = next(each for each in tables["support"] if each["name"] == change.support)
        support[KEYS[kind_of(change)]] = f"{value!r} m"
    elif change.unit == "m":
        limit_in(tables, change)["least"] = f"{value!r} m"
    else:
        limit = limit_in(tables, change)
        del limit["share"]
        limit["most"] = f"{value!r} N"
    return tw.Project(**tables)


def limit_in(tables: dict[str, Any], change: Any) -> dict[str, Any]:
    return next(each for each in tables["limit"] if each["id"] == change.limit)


def printed_changes() -> list[dict[str, str]]:
    _, out, _ = printed("shut_window", "window")
    pattern = (
        r"^  (?P<change>\S.*?)\s{2,}(?P<by>[+-][\d.]+)\s+(?P<to>[\d.]+)\s+(?P<unit>\w+)\s+\S+\s+(?P<where>\S+:\d+)$"
    )
    return [found.groupdict() for found in map(re.compile(pattern).match, out.splitlines()) if found]


def edited(line: str, row: dict[str, str]) -> str:
    share = re.search(r"share = ([\d.]+)", row["change"])
    if share:
        return re.sub(r"share = [\d.]+", f"share = {share[1]}", line)
    return re.sub(r'= "[^"]*"', f'= "{row["to"]} {row["unit"]}"', line)
