"""Waivers and --sources: what is excused, until when, what is a finding; where numbers come from."""

from __future__ import annotations

import datetime
import json

import pytest

import tautwise as tw
from tautwise import cli
from tautwise.errors import InputError
from tautwise.results import VetReport
from tautwise.solve import vet

TODAY = datetime.date(2026, 12, 1)
TEXT = """\
format = "tautwise 1"
title = "Waived"

[line]
diameter = "16 mm"
mass = "1.2 kg/m"
stiffness = "22 MN"
expansion = "11.5e-6 / K"
breaking_strength = "60 kN"

[[support]]
name = "A"
station = "0 m"
elevation = "10 m"

[[support]]
name = "B"
station = "200 m"
elevation = "10 m"

[stringing]
temperature = "15 degC"
horizontal_tension = "20 kN"

[[condition]]
name = "hot"
temperature = "60 degC"

[[condition]]
name = "cold"
temperature = "-30 degC"

[[condition]]
name = "ice"
temperature = "-5 degC"
ice = { thickness = "10 mm", density = "900 kg/m^3" }

[[limit]]
id = "strength"
kind = "tension"
share = "38 %"

[[limit]]
id = "sag"
kind = "sag"
most = "20 m"
"""
STRENGTH = {"limit": "strength", "reason": "old line", "until": datetime.date(2027, 6, 30)}


def toml(waiver: dict) -> str:
    rows = [f'{key} = {value.isoformat() if hasattr(value, "isoformat") else json.dumps(value)}'
            for key, value in waiver.items()]  # fmt: skip
    return "\n".join(["\n[[waiver]]", *rows, ""])


def load(folder, *waivers: dict) -> tw.Project:
    file = folder / "w.taut.toml"
    file.write_text(TEXT + "".join(map(toml, waivers)), encoding="utf-8")
    return tw.load(file)


def judged(folder, *waivers: dict, today=TODAY, every=False):
    project = load(folder, *waivers)
    report = vet(project, today=today, every=every)
    return project, report, [text.replace(str(folder), "FOLDER") for text in report.files[0].findings]


def failing(folder) -> list[str]:
    report = vet(load(folder), every=True)
    return [limit.condition for limit in report.limits if limit.status == "fails"]


def test_the_line_fails_in_two_conditions(tmp_path):
    assert failing(tmp_path) == ["ice", "cold"]
    assert not load(tmp_path).vet().holds


def test_a_waived_limit_fails_and_the_report_holds(tmp_path):
    _, report, findings = judged(tmp_path, STRENGTH)
    assert report.holds
    assert report.files[0].holds
    assert findings == []
    state = next(limit for limit in report.limits if limit.id == "strength")
    assert (state.status, state.condition, state.waiver.reason) == ("fails", "ice", "old line")
    assert state.waiver.until == "2027-06-30"
    assert VetReport.from_json(report.to_json()) == report


def test_a_waiver_excuses_up_to_and_with_its_day(tmp_path):
    assert judged(tmp_path, STRENGTH, today=datetime.date(2027, 6, 30))[1].holds
    _, report, findings = judged(tmp_path, STRENGTH, today=datetime.date(2027, 7, 1))
    assert not report.holds
    assert all(limit.waiver is None for limit in report.limits)
    assert findings == ["FOLDER/w.taut.toml:48: the waiver of strength expired on 2027-06-30 and excuses nothing"]


def test_a_waiver_of_one_condition_leaves_the_other(tmp_path):
    """Ice is worst; with it waived, the row of the limit is that of the cold, which fails."""
    _, report, findings = judged(tmp_path, {**STRENGTH, "condition": "ice"})
    state = next(limit for limit in report.limits if limit.id == "strength")
    assert (state.status, state.condition, state.waiver) == ("fails", "cold", None)
    assert not report.holds
    assert findings == []
    both = judged(tmp_path, {**STRENGTH, "condition": "ice"}, {**STRENGTH, "condition": "cold"}, every=True)[1]
    assert both.holds
    assert sum(limit.waiver is not None for limit in both.limits) == 2


@pytest.mark.parametrize(
    ("waiver", "words"),
    [
        ({**STRENGTH, "limit": "sag"}, "the waiver of sag is not used: the limit holds"),
        ({**STRENGTH, "condition": "hot"}, 'the waiver of strength is not used: the limit holds in "hot"'),
        ({**STRENGTH, "limit": "strenght"}, 'is not used: there is no limit "strenght"; did you mean "strength"?'),
        ({**STRENGTH, "condition": "hott"}, 'is not used: there is no condition "hott"; did you mean "hot"?'),
    ],
)
def test_an_unused_waiver_is_a_finding(tmp_path, waiver, words):
    _, report, findings = judged(tmp_path, waiver)
    assert not report.holds
    (finding,) = findings
    assert finding.startswith("FOLDER/w.taut.toml:48: ")
    assert words in finding


def test_an_expired_waiver_beside_one_in_force(tmp_path):
    old = {**STRENGTH, "until": datetime.date(2020, 1, 1)}
    _, report, findings = judged(tmp_path, old, STRENGTH)
    assert report.holds
    assert len(findings) == 1
    assert "expired" in findings[0]


def test_a_second_waiver_of_the_same_is_a_finding(tmp_path):
    assert "another waiver excuses it already" in judged(tmp_path, STRENGTH, STRENGTH)[2][0]


def test_the_window_does_not_know_waivers(tmp_path):
    assert load(tmp_path, STRENGTH).window().high == load(tmp_path).window().high


def test_nothing_undecided_is_excused(tmp_path):
    project = load(tmp_path, STRENGTH)
    from tautwise.solve import undecided

    assert not undecided(project, "no reason").holds


@pytest.mark.parametrize(
    ("drop", "put", "problem"),
    [
        ("reason", None, "waiver[0].reason: missing; expected a text"),
        ("until", None, "waiver[0].until: missing; expected a date, for example until = 2027-06-30"),
        ("limit", None, "waiver[0].limit: missing; expected a limit's id"),
        ("until", "2027-13-01", 'waiver[0].until: the text "2027-13-01" is no date; expected a date'),
        ("until", "2027-W01-1", 'waiver[0].until: the text "2027-W01-1" is no date; expected a date'),
        ("until", 2027, "waiver[0].until: the number 2027 is no date"),
        ("until", datetime.datetime(2027, 6, 30, 12), "waiver[0].until: a time of day where a date is needed"),
        ("reason", "", "waiver[0].reason: an empty text"),
        ("untill", "2027-06-30", "waiver[0].untill: unknown key"),
    ],
)
def test_an_incomplete_waiver_is_refused(tmp_path, drop, put, problem):
    waiver = {key: value for key, value in STRENGTH.items() if key != drop}
    with pytest.raises(InputError) as caught:
        load(tmp_path, waiver if put is None else {**waiver, drop: put})
    assert problem in str(caught.value)
    assert all(fault.line and fault.line > 47 for fault in caught.value.faults)


def test_the_command_prints_it_and_exits_with_0(tmp_path, capsys, monkeypatch):
    monkeypatch.chdir(tmp_path)
    load(tmp_path, STRENGTH)
    assert cli.run(["vet", "w.taut.toml", "--on", "2026-12-01"]) == 0
    out = capsys.readouterr().out
    assert "HOLDS: 1 of 2 limits kept, 1 waived at a pull of 20.00 kN" in out
    assert "strength  waived" in out
    assert "Waived until 2027-06-30: strength in ice. old line" in out
    assert cli.run(["vet", "w.taut.toml", "--on", "2027-12-01"]) == 1
    out = capsys.readouterr().out
    assert "FAILS: 1 of 2 limits not kept" in out
    assert "Look again: w.taut.toml:48: the waiver of strength expired on 2027-06-30" in out
    assert cli.run(["vet", "w.taut.toml", "--on", "2026-12-01", "--json"]) == 0
    document = json.loads(capsys.readouterr().out)
    assert document["holds"]
    (limit,) = [each for each in document["files"][0]["limits"] if each["id"] == "strength"]
    assert (limit["status"], limit["waiver"]) == ("fails", {"reason": "old line", "until": "2027-06-30"})
    assert cli.run(["vet", "w.taut.toml", "--on", "tomorrow"]) == 2
    assert 'on: the text "tomorrow" is no date; expected a date' in capsys.readouterr().err


@pytest.mark.parametrize("command", ["settle", "window", "vet"])
def test_sources_of_the_example(command, capsys, monkeypatch):
    """The project's own sources, one for each value of the size and the packs, in text and in JSON."""
    from refresh_expected import EXAMPLES

    monkeypatch.chdir(EXAMPLES)
    project = tw.load("yard_messenger.taut.toml")
    assert cli.run([command, "yard_messenger.taut.toml", "--sources"]) == 0
    out = capsys.readouterr().out
    for words in (
        "yard_messenger.taut.toml:13, instead of 0.375 in of the size",
        "ASTM A475, 7-wire strand; table and edition not noted",
        "NESC Rule 250B; edition not noted",
        "H. M. Irvine, Cable Structures, MIT Press 1981",
        "until 2035-12-31",
    ):
        assert words in out
    assert cli.run([command, "yard_messenger.taut.toml", "--sources", "--json"]) == 0
    document = json.loads(capsys.readouterr().out)
    sources = (document["files"][0] if command == "vet" else document)["sources"]
    assert [each["what"] for each in sources][: len(project.origins)] == [each.what for each in project.origins]
    assert all(each["source"] for each in sources)
    keys = {"diameter", "area", "weight", "modulus", "expansion", "breaking_strength"}
    assert {f"line.{key}" for key in keys} <= {each["what"] for each in sources}
    for condition in project.conditions:
        if condition.name.startswith("nesc"):
            assert f"{condition.name} temperature" in {each["what"] for each in sources}


def test_methods_are_those_in_use(tmp_path):
    from tautwise.sources import sources_of

    words = " ".join(each.source for each in sources_of(load(tmp_path)) if each.what == "method")
    assert "exact ring of ice" in words
    assert "standard gravity" in words
    assert "wind" not in words
