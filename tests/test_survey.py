"""Surveys: what is refused, with file, line, column and expectation; and `tautwise fit` with its exit codes."""

from __future__ import annotations

import json
import tomllib
from itertools import pairwise

import pytest
from hypothesis import example, given
from hypothesis import strategies as st
from test_examples import assert_alike

import tautwise as tw
from refresh_expected import EXAMPLES, expected_file, printed
from tautwise import as_built, survey
from tautwise.cli import run
from tautwise.errors import InputError
from tautwise.strict import Refused

PROJECT = """\
format = "tautwise 1"
title = "Ford"

[line]
diameter = "18 mm"
weight = "8.6 N/m"
stiffness = "24 MN"
expansion = "17e-6 / K"

[[support]]
name = "Inn"
station = "0 m"
elevation = "30 m"

[[support]]
name = "Barn"
station = "200 m"
elevation = "34 m"

# how it was meant
[stringing]
temperature = "60 degF"   # bare
sag = { from = "Inn", to = "Barn", value = "4 m" }
tolerance = "3 %"

# the summer
[[condition]]
name = "hot"
temperature = "50 degC"

[[limit]]
id = "sag"
kind = "sag"
most = "5 m"
"""
HEADER = "station_m,elevation_m,temperature_degC\n"
MORE = HEADER.strip()
POINTS = HEADER + "50,27.55,20\n100,27.42,20\n150,29.61,20\n"


@pytest.fixture
def folder(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "ford.taut.toml").write_text(PROJECT)
    (tmp_path / "points.csv").write_text(POINTS)
    return tmp_path


def refusals(text, *, fit=False, temperature=None, unknown="pull"):
    """The faults of a survey, as text."""
    try:
        points = survey.survey_of(text, "points.csv", temperature)
        if fit:
            ford().fit(points, unknown=unknown)
    except InputError as error:
        return [str(fault) for fault in error.faults]
    return []


def ford() -> tw.Project:
    return tw.Project(**{key: table for key, table in tomllib.loads(PROJECT).items() if key != "format"})


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("station_m,elevation_m\n1,2\n", 'points.csv:1: temperature: missing; expected the line\'s temperature: a '
         'column temperature_degC, or --temperature "18 degC", for example station_m,elevation_m,temperature_degC'),
        ("station_m,temperature_degC\n1,2\n", "points.csv:1: elevation: missing; expected a column elevation_m or "
         "elevation_ft, for example station_m,elevation_m,temperature_degC"),
        ("station,elevation_m,temperature_degC\n1,2,3\n", 'points.csv:1: station: there is no column "station"; '
         'did you mean "station_m"?'),
        ("station_m,station_ft,elevation_m,temperature_degC\n1,2,3,4\n", "points.csv:1: station: this column stands "
         "here twice"),
        (HEADER, "points.csv:1: no points below the header; expected a point on each line, for example "
         "120.0,17.25,18.5"),
        (HEADER + "1,2\n", "points.csv:2: 2 values; expected 3, one for each column of the header"),
        (HEADER + "1,two,3\n", 'points.csv:2: elevation_m: "two" is not a number; expected a number, for example '
         "17.25"),
        (HEADER + "1,,3\n", "points.csv:2: elevation_m: an empty value; expected a number, for example 17.25"),
        (HEADER + "1,1_000,3\n", 'points.csv:2: elevation_m: "1_000" is not a number: no underscores within a number; '
         "expected a number, for example 17.25"),
        (HEADER + "nan,1,3\n", 'points.csv:2: station_m: "nan" is not a number: it must be finite; expected a number, '
         "for example 120.0"),
        (HEADER + "1,1e999,3\n", 'points.csv:2: elevation_m: "1e999" is too large for a number; expected a number, '
         "for example 17.25"),
        (HEADER + '1,"2,3\n4,5,6\n', "points.csv:2: a quote that is not closed on its line; expected plain numbers, "
         "for example 120.0,4.5"),
        (MORE + ",sigma_m\n1,2,3,0\n", "points.csv:2: sigma_m: 0 is no standard deviation; "
         "expected a number above 0, for example 0.02"),
        (MORE + ",sigma_m\n1,2,3,\n", "points.csv:2: sigma_m: an empty value; expected a "
         "number, for example 0.02"),
        (MORE + ",date\n1,2,3,3 May\n", 'points.csv:2: date: "3 May" is no date; expected '
         "year-month-day, for example 2026-05-03"),
        (MORE + ",date\n1,2,3,2026-02-30\n", 'points.csv:2: date: "2026-02-30" is no date; '
         "expected year-month-day, for example 2026-05-03"),
        (f"point,station_m,elevation_m,temperature_degC\n{'x' * 61},1,2,3\n",
         f'points.csv:2: point: "{"x" * 57}..." is no name; expected up to 60 characters, for example B-12'),
    ],
)  # fmt: skip
def test_a_bad_file_is_refused(text, words):
    assert refusals(text) == [words]


def test_every_fault_is_told_in_one_run_and_not_a_thousand():
    text = HEADER + "".join(f"{number},x,20\n" for number in range(100))
    faults = refusals(text)
    assert len(faults) == 21
    assert faults[-1].endswith("and 80 more faults of this file")


def test_what_is_too_much_is_refused():
    text = HEADER + "1,2,3\n" * (survey.POINTS_MOST + 1)
    assert refusals(text) == ["points.csv:1: 20001 points; at most 20000 are read"]
    text = HEADER + "".join(f"1,2,{number / 100}\n" for number in range(1001))
    assert refusals(text) == ["points.csv:1: 1001 different temperatures; at most 1000 are read"]


def test_a_temperature_given_twice_is_refused(folder):
    assert "given twice" in refusals(POINTS, temperature=20.0)[0]
    points = tw.read_survey("points.csv")
    with pytest.raises(InputError, match="given twice: in the survey and with the call"):
        tw.load("ford.taut.toml").fit(points, temperature=20.0)


@pytest.mark.parametrize(
    ("text", "unknown", "words"),
    [
        (HEADER + "100,27,20\n200.5,33,20\n", "pull", "points.csv:3: station: 200.5 m is beyond the supports; expected "
         "a station from Inn at 0 m to Barn at 200 m"),
        (HEADER + "0,30,20\n200,34,20\n", "pull", "points.csv: no point lies between the supports, away from them; "
         "expected points along the spans, best about their middles"),
        (HEADER + "0,30,20\n200,34,20\n", "lengths", "points.csv: no point lies between the supports, away from them; "
         "expected points along the spans, best about their middles"),
        (HEADER + "100,27,-300\n", "pull", "points.csv:2: temperature: outside its range; expected a temperature "
         "from -273.15 to 2000 degC"),
        (HEADER + "100,27000,20\n", "pull", "points.csv:2: elevation: outside its range; expected an elevation within "
         "20 km"),
    ],
)  # fmt: skip
def test_points_that_cannot_be_used_are_refused(text, unknown, words):
    assert refusals(text, fit=True, unknown=unknown) == [words]


def test_points_above_the_chord_are_refused_or_not_settled():
    project = ford()
    for unknown in ("pull", "lengths"):
        with pytest.raises((InputError, tw.NotSettledError)) as caught:
            project.fit(tw.Survey.of([50.0, 100.0], [36.0, 39.0], 20.0), unknown=unknown)
        assert "points" in str(caught.value)


def test_calls_with_something_else_are_refused(folder):
    project = tw.load("ford.taut.toml")
    with pytest.raises(InputError, match=r"unknown: .* is not known; expected pull or lengths"):
        project.fit("points.csv", unknown="sag")
    with pytest.raises(InputError, match="where a file name or a Survey is needed"):
        project.fit([[1.0, 2.0]])
    with pytest.raises(InputError, match="there is no such file"):
        project.fit("nothing.csv")
    with pytest.raises(InputError, match="2 values; expected 1, one for each station"):
        tw.Survey.of([1.0], [2.0, 3.0], 20.0)
    with pytest.raises(InputError, match=r"temperature: .*is a length"):
        tw.Survey.of([1.0], [2.0], "3 m")
    with pytest.raises(InputError, match="point 2: station"):
        project.fit(tw.Survey.of([100.0, 300.0], [27.0, 30.0], 20.0))
    mixed = tw.Survey.of([50.0, 100.0], [27.55, 27.4], 20.0, sigmas_m=[0.02, float("nan")])
    with pytest.raises(InputError, match="point 2: sigma: outside its range; expected a standard deviation of every"):
        project.fit(mixed)


@given(st.text(max_size=200))
@example("station_m,elevation_m,temperature_degC\n1,2,3\r\n4,5,6")
@example('"station_m",elevation_m,temperature_degC\n"1",2,3')
def test_any_text_is_read_or_refused(text):
    """The rows are counted by this test's own splitting of lines."""
    if not text.strip():
        return
    try:
        found = survey.survey_of(text, "points.csv")
    except InputError as error:
        assert all(fault.file == "points.csv" for fault in error.faults)
    else:
        assert found.count == sum(bool(line.strip()) for line in text.split("\n")) - 1


def test_columns_come_in_any_order_and_may_be_empty():
    text = "sigma_ft,offset_m,date,point,temperature_degF,elevation_ft,station_ft\n1,,,,68,10,20\n"
    text += "2,0.5,2026-05-03,B,68,10,20\n"
    found = survey.survey_of(text, "p.csv")
    assert found.sigmas_m == (0.3048, 0.6096)
    assert found.offsets_m == (None, 0.5)
    assert found.temperatures_degC == (20.0, 20.0)
    assert found.dates == (None, "2026-05-03")
    assert found.names == ("line 2", "B")
    assert found.stations_m == (20 * 0.3048,) * 2


# --- the command


def test_command_prints_the_pull_and_what_to_paste(folder, capsys):
    assert run(["fit", "ford.taut.toml", "points.csv"]) == 0
    out, err = capsys.readouterr()
    assert err == ""
    assert "Pull " in out
    assert "A design aid" in out
    pasted = out[out.index("  [stringing]") :].split("\n\n")[0]
    table = tomllib.loads(pasted)["stringing"]
    assert table["temperature"] == "60 degF"
    assert table["tolerance"] == "3 %"
    assert len(table["natural_length"]) == 1


def test_command_prints_json(folder, capsys):
    assert run(["fit", "ford.taut.toml", "points.csv", "--json", "--unknown", "lengths"]) == 0
    document = json.loads(capsys.readouterr().out)
    assert document["format"] == "tautwise-fit 1"
    assert document["pull"] is None
    assert [point["line"] for point in document["points"]] == [2, 3, 4]
    assert document["spans"][0]["from"] == "Inn"
    assert tw.SurveyFit.from_dict(document).measurements == 3


def test_command_takes_the_temperature(folder, capsys):
    (folder / "bare.csv").write_text("station_m,elevation_m\n50,27.55\n100,27.42\n150,29.61\n")
    assert run(["fit", "ford.taut.toml", "bare.csv"]) == 2
    assert "--temperature" in capsys.readouterr().err
    assert run(["fit", "ford.taut.toml", "bare.csv", "--temperature", "68 degF", "--json"]) == 0
    assert json.loads(capsys.readouterr().out)["temperatures_degC"] == [20.0]
    assert run(["fit", "ford.taut.toml", "bare.csv", "--temperature", "68"]) == 2
    assert "temperature: a number without a unit" in capsys.readouterr().err
    assert run(["fit", "ford.taut.toml", "bare.csv", "--temperature", "68 degF"]) == 0
    assert "bare.csv --temperature '68 degF' --write" in capsys.readouterr().out


def test_command_writes_the_project_as_built(folder, capsys):
    assert run(["fit", "ford.taut.toml", "points.csv", "--write", "built.taut.toml"]) == 0
    assert "Wrote built.taut.toml." in capsys.readouterr().err
    old, new = (tomllib.loads((folder / name).read_text()) for name in ("ford.taut.toml", "built.taut.toml"))
    assert {k: v for k, v in new.items() if k != "stringing"} == {k: v for k, v in old.items() if k != "stringing"}
    text = (folder / "built.taut.toml").read_text()
    for kept in ("# how it was meant\n", "# the summer\n[[condition]]"):
        assert kept in text
    found = tw.load("ford.taut.toml").fit("points.csv")
    assert tw.load("built.taut.toml").stringing.natural_length_m == pytest.approx(found.natural_length_m, abs=1e-7)
    assert run(["vet", "built.taut.toml"]) in (0, 1)
    capsys.readouterr()
    before = (folder / "built.taut.toml").read_bytes()
    assert run(["fit", "ford.taut.toml", "points.csv", "--write", "built.taut.toml"]) == 2
    assert "the file is there already" in capsys.readouterr().err
    assert (folder / "built.taut.toml").read_bytes() == before
    assert run(["fit", "ford.taut.toml", "points.csv", "--write", "ford.taut.toml", "--force"]) == 0
    assert tw.load("ford.taut.toml").stringing.natural_length_m is not None
    assert not [path for path in folder.iterdir() if path.name.startswith(".tautwise")]


def test_command_says_where_it_cannot_write(folder, capsys):
    assert run(["fit", "ford.taut.toml", "points.csv", "--write", "nowhere/built.taut.toml"]) == 3
    assert "cannot be written" in capsys.readouterr().err
    head, _, rest = PROJECT.partition("[stringing]")
    table, _, conditions = rest.partition("\n# the summer")
    (folder / "stringing.toml").write_text(f"[stringing]{table}")
    text = head.replace("title", 'include = ["stringing.toml"]\ntitle') + conditions
    (folder / "parts.taut.toml").write_text(text)
    assert run(["fit", "parts.taut.toml", "points.csv", "--write", "built.taut.toml"]) == 2
    err = capsys.readouterr().err
    assert "does not stand by itself in that file; put this in by hand: [stringing]" in err
    assert not (folder / "built.taut.toml").exists()
    (folder / "other").mkdir()
    assert run(["fit", "parts.taut.toml", "points.csv", "--write", "other/built.taut.toml"]) == 2
    assert "expected a new file beside parts.taut.toml" in capsys.readouterr().err


@pytest.mark.parametrize(
    "text",
    [
        'stringing = { sag = "1 m" }\n',
        'stringing.sag = "1 m"\n',
        'a = """\n[stringing]\n"""\n[stringing]\nsag = "1 m"\n',
        '[stringing]\ntemperature = "1 degC"\n[stringing.sag]\nvalue = "1 m"\n',
        '[stringing]\nnatural_length = [\n["1 m"],\n]\n[mark]\n',
        'title = "x"\n',
    ],
)
def test_a_table_that_does_not_stand_by_itself_is_not_replaced(text):
    with pytest.raises(Refused):
        as_built.rewritten(text, ["[stringing]", 'sag = "2 m"'], "as built")


def test_example_prints_what_is_expected():
    code, out, err = printed("hill_feeder", "fit")
    assert code == 0
    assert_alike(out, expected_file("hill_feeder", "fit").read_text(encoding="utf-8"))
    assert err == "warning: 1 point farther off than three sigma: H18 (station 481.7 m) by +337 mm\n"


def test_example_was_measured_on_the_pull_that_is_found(tmp_path):
    """The points were made on a line strung to 9.45 kN, with 2.5 cm of noise and 30 cm on H18."""
    project = tw.load(EXAMPLES / "hill_feeder.taut.toml")
    lines = (EXAMPLES / "hill_feeder_survey.csv").read_text(encoding="utf-8").splitlines(keepends=True)
    good = tmp_path / "good.csv"
    good.write_text("".join(line for line in lines if not line.startswith("H18,")))
    found = project.fit(good)
    assert found.pull.low_N < 9450.0 < found.pull.high_N
    assert found.suspicious == ()
    assert found.standard_deviation_m == pytest.approx(0.025, rel=0.4)  # three of its own errors, 1 / sqrt(2 x 28)
    weight = 0.635 * 9.80665  # N/m; a parabola's sag on the slope of the chord, w L c / (8 H), within 1 %
    for span, (before, after) in zip(found.spans, pairwise(project.supports), strict=True):
        run = after.station_m - before.station_m
        chord = (run**2 + (project.elevation_m(after) - project.elevation_m(before)) ** 2) ** 0.5
        assert span.sag_m == pytest.approx(weight * run * chord / (8.0 * found.pull.horizontal_tension_N), rel=0.01)


def test_a_fault_is_told_and_ends_with_two(folder, capsys):
    (folder / "points.csv").write_text(HEADER + "100,27,20\n300,30,20\n")
    assert run(["fit", "ford.taut.toml", "points.csv"]) == 2
    assert capsys.readouterr().err.startswith("points.csv:3: station: 300 m is beyond the supports")
    assert run(["fit", "nothing.taut.toml", "points.csv"]) == 2
    assert run(["fit", "ford.taut.toml"]) == 2
    assert run(["fit", "ford.taut.toml", "points.csv", "--unknown", "sag"]) == 2
