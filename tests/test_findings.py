"""What deserves a second look is in every result, in its text and on stderr: lifted, off its curves, not judged."""

from __future__ import annotations

import json
import re

import pytest

import tautwise as tw
from tautwise.cli import run as run_command
from tautwise.findings import findings_of
from tautwise.solve import settle_report
from tautwise.sources import sources_of

UPLIFT = """\
format = "tautwise 1"
[line]
diameter = "28 mm"
weight = "16 N/m"
stiffness = "30 MN"
expansion = "19e-6 / K"
breaking_strength = "140 kN"
[[support]]
name = "A"
station = "0 m"
elevation = "60 m"
[[support]]
name = "B"
station = "200 m"
elevation = "30 m"
hold = "HOLD"
length = "1 m"
[[support]]
name = "C"
station = "400 m"
elevation = "60 m"
[stringing]
temperature = "15 degC"
horizontal_tension = "18 kN"
METHOD
[[condition]]
name = "cold"
temperature = "-30 degC"
[[condition]]
name = "hot"
temperature = "60 degC"
[[limit]]
id = "t"
kind = "tension"
share = 0.5
conditions = ["cold"]
"""
TAUT = """
[[limit]]
id = "flat"
kind = "sag"
most = "8 m"
conditions = ["cold"]
"""
OVER = 'method = "over sheaves"'


@pytest.fixture
def command(tmp_path, monkeypatch, capsys):
    """Runs a command on a file of the given text: exit code, stdout and stderr."""
    monkeypatch.chdir(tmp_path)

    def call(name, text, *options):
        (tmp_path / "up.taut.toml").write_text(text, encoding="utf-8")
        code = run_command([name, "up.taut.toml", *options])
        return (code, *capsys.readouterr())

    return call


def uplift(hold="hanger", method=OVER):
    return UPLIFT.replace("HOLD", hold).replace("METHOD", method)


def listed(document):
    """The findings of any document."""
    return document["files"][0]["findings"] if "files" in document else document["warnings"]


@pytest.mark.parametrize("name", ["settle", "vet", "window", "sheet"])
@pytest.mark.parametrize(
    ("text", "words"),
    [
        (uplift(), "the line lifts at 'B' in 'cold': its hanger "),
        (
            uplift("sheave", "").replace('length = "1 m"', "") + TAUT,
            "the line lifts out of the sheave at 'B' in 'cold', with ",
        ),
    ],
    ids=["hanger", "sheave"],
)
def test_uplift_is_said_everywhere(command, name, text, words):
    """The line would hang above B's clamp: from A and C 30 m higher it would be at 60 m - w L^2 / (8 H) = 42 m."""
    code, out, err = command(name, text)
    assert code == 0
    assert len(re.findall(f"  Look again: (at the highest pull, )?{words}", out)) == 1  # of a window the end may lift
    assert len(re.findall(f"warning: up.taut.toml: (at the highest pull, )?{words}", err)) == 1
    _, out, _ = command(name, text, "--json")
    assert sum(words in finding for finding in listed(json.loads(out))) == 1


def test_the_sheet_marks_the_row_that_lifts(command):
    _, out, _ = command("sheet", uplift())
    (row,) = [line for line in out.splitlines() if line.startswith("  B  ")]
    assert row.endswith("LIFTS")
    _, out, _ = command("sheet", uplift().replace('elevation = "30 m"', 'elevation = "59 m"'))
    assert "LIFTS" not in out
    assert "Look again" not in out


@pytest.mark.parametrize("name", ["vet", "window"])
def test_a_condition_that_no_limit_judges(command, name):
    words = "no limit judges the condition 'hot'"
    _, out, err = command(name, uplift())
    assert words in out
    assert words in err
    _, out, err = command(name, uplift().replace('conditions = ["cold"]', ""))
    assert "no limit judges" not in out + err


@pytest.mark.parametrize("name", ["vet", "window"])
def test_no_limit_at_all_is_in_the_result(command, name):
    _, out, _ = command(name, uplift().partition("[[limit]]")[0], "--json")
    assert "up.taut.toml: no [[limit]], so " in listed(json.loads(out))[-1]


@pytest.mark.parametrize("name", ["settle", "vet", "window", "sheet"])
def test_rules_on_a_linear_line_say_that_it_has_one_state(command, name):
    text = uplift().replace("[line]", 'rules = ["go-95-heavy"]\n[line]')
    _, out, _ = command(name, text)
    asked = [each.what for each in tw.load("up.taut.toml").origins if each.what.endswith(" state")]
    count = out.count("judged on the line as strung: it is linear without bedding_in")
    assert count == (1 if asked else 0)


@pytest.mark.parametrize("name", ["settle", "vet", "window", "sheet"])
def test_a_rule_that_asks_for_two_states(root, name, capsys):
    assert run_command([name, str(root / "examples" / "yard_messenger.taut.toml")]) == 0
    out, err = capsys.readouterr()
    words = "judged on the line as strung: it is linear without bedding_in"
    assert (out.count(words), err.count(words)) == (1, 1)


def valley(root, tmp_path, **changed):
    text = (root / "examples" / "valley_conductor.taut.toml").read_text(encoding="utf-8")
    for before, after in changed.values():
        assert before in text
        text = text.replace(before, after)
    file = tmp_path / "valley.taut.toml"
    file.write_text(text, encoding="utf-8")
    return tw.load(file)


OUTER = 'initial = ["-512 psi", "4.902e4 psi", "-1.18e4 psi", "-5.76e4 psi"]'


def test_strain_beyond_what_was_measured(root, tmp_path):
    """A range of 0.1 %: ice and wind strain the line to about 0.15 %, everyday to T / EA = 27 kN / 33 MN = 0.08 %."""
    narrow = (OUTER, OUTER + '\nvalid_to = "0.1 %"')
    project = valley(root, tmp_path, narrow=narrow)
    ice = project.settle("ice and wind").spans[0]
    assert 0.001 < ice.part_strains[1] < 0.003
    words = "the outer is strained to "
    for found in (settle_report(project).warnings, project.vet().files[0].findings, project.window().warnings):
        said = [text for text in found if words in text]
        assert any("in 'ice and wind' (South tower to North tower), beyond what was measured" in text for text in said)
        assert len({text.partition(" in '")[2].partition("'")[0] for text in said}) == len(said)
        assert not any("'hot" in text for text in said)
        assert not any("core" in text for text in said)
    assert not [text for text in settle_report(valley(root, tmp_path)).warnings if "measured" in text]


def test_strain_beyond_it_in_the_history_alone(root, tmp_path):
    """The condition itself hangs on its unloading line; what it has unloaded from is beyond the range."""
    project = valley(root, tmp_path, narrow=(OUTER, OUTER + '\nvalid_to = "0.1 %"'))
    final = next(each for each in project.settle_all() if each.state == "final")
    assert final.spans[0].part_strains[1] < final.history.parts[-1].met_strain
    (said,) = [text for text in findings_of(project, [final], None) if "outer" in text]
    assert "in 'ice and wind'" in said


def test_which_condition_has_stretched_the_line(root, tmp_path):
    """Of the two that the history names ice and wind pulls harder; the outer part keeps e - F(e) / E_final A."""
    project = valley(root, tmp_path)
    found = {each.state: each.history for each in project.settle_all()}
    assert found["initial"] is None
    assert (found["final"].heaviest, found["final"].creep_condition) == ("ice and wind", None)
    assert (found["after creep"].heaviest, found["after creep"].creep_condition) == ("ice and wind", "everyday")
    (outer,) = [part for part in found["final"].parts if part.part == "outer"]
    initial = project.settle("ice and wind").spans[0].part_strains[1]
    assert outer.met_strain == pytest.approx(initial, rel=1e-9)
    percent = 100.0 * outer.met_strain
    psi = -512.0 + 4.902e4 * percent - 1.18e4 * percent**2 - 5.76e4 * percent**3
    assert outer.permanent_strain == pytest.approx(outer.met_strain - psi / 6.895e6, rel=1e-9)
    crept = {part.part: part for part in found["after creep"].parts}
    assert crept["outer"].by_creep
    assert crept["outer"].condition == "everyday"
    text = json.loads(next(each for each in project.settle_all() if each.state == "final").to_json())
    assert text["history"]["heaviest"] == "ice and wind"


def test_the_default_history_is_said(root, tmp_path):
    names = ('conditions = ["ice and wind", "cold"]', ""), ('creep_condition = "everyday"', "")
    project = valley(root, tmp_path, met=names[0], creep=names[1])
    crept = next(each for each in project.settle_all() if each.state == "after creep").history
    assert (crept.heaviest, crept.creep_condition) == ("ice and wind", "as strung")
    assert {part.condition for part in crept.parts if part.by_creep} == {"as strung"}


@pytest.mark.parametrize("words", ["History: stretched by ice and wind (South tower to North tower: outer 0.",
                                   "; creep at everyday (South tower to North tower: outer 0."])  # fmt: skip
def test_the_history_is_printed(root, capsys, words):
    assert run_command(["settle", str(root / "examples" / "valley_conductor.taut.toml")]) == 0
    assert words in capsys.readouterr().out


def test_sources_of_a_curved_line(root, tmp_path):
    methods = " ".join(each.source for each in sources_of(valley(root, tmp_path)) if each.what == "method")
    for words in ("stress-strain curves", "unloading along the final modulus", "creep curve"):
        assert words in methods
    assert "Hooke" not in methods
    assert "sheave" not in methods


@pytest.mark.parametrize(
    ("hold", "method", "wanted"),
    [
        ("sheave", "", ["Hooke", "runs over sheaves"]),
        ("hanger", "friction = 0.02\n" + OVER, ["runs over sheaves", "exp(mu theta)"]),
        ("hanger", "", ["Hooke"]),
    ],
)
def test_sources_of_sheaves(tmp_path, hold, method, wanted):
    file = tmp_path / "up.taut.toml"
    file.write_text(uplift(hold, method), encoding="utf-8")
    methods = " ".join(each.source for each in sources_of(tw.load(file)) if each.what == "method")
    assert all(words in methods for words in wanted)
    assert ("runs over sheaves" in methods) == ("runs over sheaves" in wanted)
    assert ("exp(mu theta)" in methods) == ("exp(mu theta)" in wanted)
