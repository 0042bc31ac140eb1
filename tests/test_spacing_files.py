"""Spacings in project files: what is read, what is refused and where, what is printed, hashed, drawn and pickled."""

from __future__ import annotations

import hashlib
import json
import math
import pickle

import pytest

import tautwise as tw
from refresh_expected import EXAMPLES
from tautwise.cli import run
from tautwise.errors import InputError, NotSettledError
from tautwise.figure import plot_line
from tautwise.schema import project_schema

LOWER = """\
format = "tautwise 1"
title = "Lower"
[line]
weight = "3 N/m"
stiffness = "6 MN"
expansion = "12e-6 / K"
[[support]]
name = "A"
station = "0 m"
elevation = "8 m"
[[support]]
name = "B"
station = "80 m"
elevation = "8 m"
[stringing]
temperature = "10 degC"
horizontal_tension = "4 kN"
[[condition]]
name = "hot"
temperature = "50 degC"
[[condition]]
name = "cold"
temperature = "-10 degC"
[[limit]]
id = "apart"
kind = "spacing"
other = "upper.taut.toml"
least = "1 m"
"""
UPPER = LOWER[: LOWER.index("[[limit]]")].replace('"8 m"', '"10 m"').replace("Lower", "Upper")
UPPER = UPPER.replace('"A"', '"P"').replace('"B"', '"Q"')


def written(folder, lower=LOWER, upper=UPPER):
    (folder / "upper.taut.toml").write_text(upper)
    file = folder / "lower.taut.toml"
    file.write_text(lower)
    return file


def with_keys(*keys):
    return LOWER + "".join(f"{key}\n" for key in keys)


def refused(folder, lower=LOWER, upper=UPPER):
    with pytest.raises(InputError) as caught:
        tw.load(written(folder, lower, upper))
    return caught.value.faults


def only_limit(project):
    (limit,) = project.vet().limits
    return limit


# --- what is read


def test_conditions_of_the_same_name(tmp_path):
    """Same line, same conditions, 2 m higher: 2 m at every place but for the slope, 3 % at most here."""
    project = tw.load(written(tmp_path))
    rows = project.vet(pull=None).limits
    assert [limit.status for limit in rows] == ["holds"]
    assert only_limit(project).value == pytest.approx(2.0, rel=0.01)
    assert only_limit(project).value < 2.0


@pytest.mark.parametrize(
    ("keys", "lower", "upper"),
    [
        (('other_condition = "hot"',), "cold", "hot"),
        (('other_conditions = { hot = "cold", cold = "hot" }',), "cold", "hot"),
        (('other_conditions = { hot = "hot", cold = "hot" }', 'conditions = ["cold"]'), "cold", "hot"),
        (('conditions = ["cold"]',), "cold", "cold"),
    ],
)
def test_conditions_that_are_chosen(tmp_path, keys, lower, upper):
    """Mid-span is the nearest, but for hot beside cold: nearly 2 m and the difference of the sags."""
    project = tw.load(written(tmp_path, with_keys(*keys)))
    other = tw.load(tmp_path / "upper.taut.toml")
    sags = project.settle(lower).spans[0].sag_m, other.settle(upper).spans[0].sag_m
    limit = only_limit(project)
    assert limit.condition == lower
    assert limit.value == pytest.approx(2.0 + sags[0] - sags[1], abs=2e-3)


@pytest.mark.parametrize(
    ("shift", "value"),
    [
        ('{ offset = "3 m" }', math.hypot(2.0, 3.0)),
        ('{ elevation = "1 ft" }', 2.3048),
        ('{ station = "200 m" }', math.hypot(120.0, 2.0)),
        ('{ station = "-82 m", elevation = "-2 m" }', 2.0),
    ],
)
def test_shift(tmp_path, shift, value):
    project = tw.load(written(tmp_path, with_keys(f"shift = {shift}", 'conditions = ["cold"]')))
    assert only_limit(project).value == pytest.approx(value, rel=2e-3)


def test_other_units(tmp_path):
    """1 m is 1 / 0.3048 ft: the same answer to rounding."""
    here = tw.load(written(tmp_path)).vet()
    (tmp_path / "upper.taut.toml").write_text(UPPER.replace('"10 m"', f'"{10.0 / 0.3048!r} ft"'))
    there = tw.load(tmp_path / "lower.taut.toml").vet()
    assert here.limits[0].value == pytest.approx(there.limits[0].value, abs=1e-9)


def test_places_name_both_lines(tmp_path):
    """Stations of each line in its own axes; shown in the table and in JSON, and kept by a round trip."""
    project = tw.load(written(tmp_path, with_keys('shift = { station = "30 m" }', 'conditions = ["cold"]')))
    report = project.vet()
    (limit,) = report.limits
    assert limit.place.startswith("A to B, station ")
    assert limit.other_place.startswith("upper.taut.toml, cold: P to Q, station ")
    here, there = (float(text.split()[-2]) for text in (limit.place, limit.other_place))
    assert here - there == pytest.approx(30.0, abs=2.0)
    assert json.loads(report.to_json())["files"][0]["limits"][0]["other_place"] == limit.other_place
    assert type(report).from_json(report.to_json()) == report


def test_the_text_of_vet(tmp_path, capsys):
    file = written(tmp_path, with_keys('conditions = ["cold"]'))
    assert run(["vet", str(file)]) == 0
    out = capsys.readouterr().out
    assert "apart" in out
    assert "; upper.taut.toml, cold: P to Q, station" in out


def test_an_other_line_in_a_folder_below(tmp_path):
    """Its own files lie beside it; the limit may stand in an included file, beside which the other is looked for."""
    below = tmp_path / "below"
    below.mkdir()
    head, limit = LOWER[: LOWER.index("[[limit]]")], LOWER[LOWER.index("[[limit]]") :]
    (below / "upper.taut.toml").write_text(UPPER)
    (below / "limits.toml").write_text(limit)
    file = tmp_path / "lower.taut.toml"
    file.write_text(head.replace("title", 'include = "below/limits.toml"\ntitle'))
    assert only_limit(tw.load(file)).status == "holds"


def test_keyword_arguments(tmp_path, monkeypatch):
    """Looked for in the working directory."""
    written(tmp_path)
    monkeypatch.chdir(tmp_path)
    ends = [{"name": n, "station": s, "elevation": "8 m"} for n, s in (("A", "0 m"), ("B", "80 m"))]
    project = tw.Project(
        line={"weight": "3 N/m", "stiffness": "6 MN"},
        support=ends,
        stringing={"temperature": "10 degC", "horizontal_tension": "4 kN"},
        condition=[{"name": "still", "temperature": "10 degC"}],
        limit=[
            {"id": "apart", "kind": "spacing", "other": "upper.taut.toml", "least": "1 m", "other_condition": "hot"}
        ],
    )
    assert 1.0 < only_limit(project).value < 2.0


def test_settling_asks_nothing_of_the_other_line(tmp_path):
    """A line hangs as it hangs, also beside one that cannot be settled."""
    slack = UPPER.replace('horizontal_tension = "4 kN"', 'natural_length = "60 m"').replace('"6 MN"', '"6 kN"')
    project = tw.load(written(tmp_path, upper=slack))
    assert project.settle("hot").settled
    assert project.settle_all()[1].settled


def test_hash_covers_the_other_file(tmp_path):
    file = written(tmp_path)
    before = tw.load(file).input_sha256
    names = ("lower.taut.toml", "upper.taut.toml")
    lines = (f"{hashlib.sha256((tmp_path / name).read_bytes()).hexdigest()}  {name}\n" for name in names)
    assert before == hashlib.sha256("".join(lines).encode()).hexdigest()
    written(tmp_path, upper=UPPER + "# a comment\n")
    assert tw.load(file).input_sha256 != before


def test_hash_covers_what_the_other_file_includes(tmp_path):
    (tmp_path / "weather.toml").write_text('[[condition]]\nname = "mild"\ntemperature = "10 degC"\n')
    file = written(tmp_path, upper=UPPER.replace("title", 'include = "weather.toml"\ntitle'))
    before = tw.load(file).input_sha256
    (tmp_path / "weather.toml").write_text('[[condition]]\nname = "mild"\ntemperature = "11 degC"\n')
    assert tw.load(file).input_sha256 != before


def test_pickle_and_a_window_at_any_pull(tmp_path):
    project = tw.load(written(tmp_path, LOWER + '[[limit]]\nid = "strength"\nkind = "tension"\nmost = "9 kN"\n'))
    again = pickle.loads(pickle.dumps(project))
    window = again.window()
    assert window.low.horizontal_tension_N == pytest.approx(project.window().low.horizontal_tension_N)
    assert pickle.loads(pickle.dumps(window)) == window


# --- what is refused

EVERY = [
    (LOWER.replace("upper.taut", "uper.taut"), 27, 'there is no file "uper.taut.toml"', "another project file"),
    (LOWER.replace("upper.taut", "lower.taut"), 27, "is this project itself", "another project file"),
    (LOWER.replace('"upper.taut.toml"', '"../upper.taut.toml"'), 27, "outside the project's folder", "another project"),
    (LOWER.replace('other = "upper.taut.toml"', "other = 5"), 27, "where a project file is needed", ""),
    (LOWER.replace('other = "upper.taut.toml"\n', ""), 24, "missing", "a project file"),
    (LOWER.replace('least = "1 m"', 'least = "0 m"'), 28, "is zero", "a length above 0"),
    (LOWER.replace('least = "1 m"', 'least = "1 kN"'), 28, "is a force", "a length above 0"),
    (LOWER + 'most = "1 m"\n', 29, "no key of this kind", ""),
    (with_keys('other_condition = "hott"'), 29, 'no condition "hott"; did you mean "hot"?', ""),
    (with_keys('other_conditions = { hott = "cold" }'), 29, 'no condition "hott"; did you mean "hot"?', ""),
    (with_keys('other_conditions = { hot = "colt" }'), 29, 'no condition "colt"; did you mean "cold"?', ""),
    (with_keys('other_conditions = "cold"'), 29, "where a table is needed", "a condition of the other line for each"),
    (with_keys("other_conditions = {}"), 29, "an empty table", "a condition of the other line"),
    (with_keys("other_conditions = { hot = 3 }"), 29, "hot: ", "a condition of the other line"),
    (with_keys('other_condition = "hot"', 'other_conditions = { hot = "cold" }'), 30, "given at once", "exactly one"),
    (with_keys('conditions = ["warm"]'), 29, 'no condition "warm"', ""),
    (with_keys('spans = ["B"]'), 29, "no span starts at the last support", ""),
    (with_keys('shift = { offset = "1" }'), 29, "a number without a unit", "a length"),
    (with_keys('shift = { ofset = "1 m" }'), 29, 'did you mean "offset"?', ""),
    (with_keys('shift = "1 m"'), 29, "where a table is needed", "a table"),
]  # fmt: skip


@pytest.mark.parametrize(("text", "line", "problem", "expected"), EVERY)
def test_bad_input(tmp_path, text, line, problem, expected):
    (fault,) = refused(tmp_path, text)[:1]
    assert fault.file == str(tmp_path / "lower.taut.toml")
    assert fault.line == line
    assert problem in str(fault)
    assert expected in fault.expected
    assert fault.path.startswith("limit.apart")


def test_a_condition_that_the_other_line_lacks(tmp_path):
    """Said with the names that it has, and how to choose one."""
    (fault,) = refused(tmp_path, upper=UPPER.replace('"hot"', '"iced"'))
    assert fault.problem == 'the other line has no condition "hot"; its conditions are "iced", "cold"'
    assert fault.expected == "other_condition, or other_conditions with one for each of this line"
    assert fault.example == 'other_conditions = { "hot" = "iced" }'


def test_an_other_line_without_a_pull(tmp_path):
    (fault,) = refused(tmp_path, upper=UPPER.replace('horizontal_tension = "4 kN"\n', ""))
    assert "gives no pull" in fault.problem
    assert "its own window finds the pull" in fault.expected
    assert fault.path == "limit.apart.other"


def test_faults_of_the_other_file_stand_in_it(tmp_path):
    """Told once, also where two limits name it."""
    twice = LOWER + LOWER[LOWER.index("[[limit]]") :].replace("apart", "again")
    (fault,) = refused(tmp_path, twice, UPPER.replace('"3 N/m"', '"3 N"'))
    assert fault.file == str(tmp_path / "upper.taut.toml")
    assert fault.path == "line.weight"


@pytest.mark.parametrize("deep", [2, 3])
def test_circles(tmp_path, deep):
    """a from b from a; a from b from c from a."""
    for number in range(deep):
        text = LOWER.replace("upper.taut.toml", f"{(number + 1) % deep}.taut.toml")
        (tmp_path / f"{number}.taut.toml").write_text(text)
    with pytest.raises(InputError) as caught:
        tw.load(tmp_path / "0.taut.toml")
    (fault,) = caught.value.faults
    assert fault.file == str(tmp_path / f"{deep - 1}.taut.toml")
    assert "in a circle" in fault.problem


def test_a_chain_is_no_circle(tmp_path):
    """The other line's own spacing is read, and asks nothing here."""
    (tmp_path / "top.taut.toml").write_text(UPPER.replace('"10 m"', '"12 m"'))
    file = written(tmp_path, upper=UPPER + LOWER[LOWER.index("[[limit]]") :].replace("upper.taut", "top.taut"))
    assert only_limit(tw.load(file)).status == "holds"


def test_an_other_line_that_does_not_settle(tmp_path, capsys, monkeypatch):
    """Status 3, its file named; the limits are undecided for that reason."""
    import tautwise.solve as solve

    file = written(tmp_path)
    settle = solve.settle

    def failing(project, condition=None, **keys):
        if project.source.endswith("upper.taut.toml"):
            raise NotSettledError(f"{project.source}: condition {condition}: no equilibrium", "not_settled")
        return settle(project, condition, **keys)

    monkeypatch.setattr(solve, "settle", failing)
    for command in ("window", "vet"):
        assert run([command, str(file)]) == 3
        assert "upper.taut.toml" in capsys.readouterr().err


def test_an_other_line_that_hangs_slack_is_bad_input(tmp_path, capsys):
    """Natural lengths are its file's fault: told at its key, exit code 2."""
    slack = UPPER.replace('horizontal_tension = "4 kN"', 'natural_length = "60 m"').replace('"6 MN"', '"6 kN"')
    code = run(["vet", str(written(tmp_path, upper=slack))])
    said = capsys.readouterr()
    assert code in (2, 3)
    assert "upper.taut.toml" in said.err


# --- schema, picture, example


def test_schema_knows_it():
    spacing = project_schema()["$defs"]["SpacingLimit"]
    assert set(spacing["required"]) == {"id", "kind", "other", "least"}
    assert spacing["properties"]["other_conditions"]["type"] == "object"


def test_the_other_line_is_drawn_lightly(tmp_path):
    ax = plot_line(tw.load(written(tmp_path)).settle_all())
    labels = {line.get_label(): line for line in ax.get_lines()}
    assert {"Upper: hot", "Upper: cold", "hot", "cold"} <= set(labels)
    assert labels["Upper: hot"].get_linewidth() < labels["hot"].get_linewidth()
    assert max(labels["Upper: hot"].get_ydata()) == pytest.approx(10.0)
    assert ax.get_ylim()[1] > 10.0


def test_the_example_agrees_with_parabolas():
    """Mid-span of 82 m: 9.85 m less the iced wire's sag, above 7.95 m less the bare cable's: within 0.5 % of it."""
    project = tw.load(EXAMPLES / "lower_cable.taut.toml")
    wire = tw.load(EXAMPLES / "upper_wire.taut.toml").settle("iced")
    cable = project.settle("ice gone")
    iced = 1.78 + 900.0 * 9.80665 * math.pi * 0.010 * (0.0105 + 0.010)
    sags = [w * 82.0**2 / 8.0 / line.spans[0].horizontal_tension_N for w, line in ((iced, wire), (3.1, cable))]
    (limit,) = [limit for limit in project.vet().limits if limit.kind == "spacing"]
    assert limit.value == pytest.approx(9.85 - sags[0] - 7.95 + sags[1], rel=0.005)
    assert limit.station_m == pytest.approx(41.0, abs=0.5)
