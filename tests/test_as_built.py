"""Projects as built: what of [stringing] stays, what is dropped and said, and which state the lengths are of."""

from __future__ import annotations

import tomllib

import pytest

import tautwise as tw
from tautwise.cli import run

PROJECT = """\
format = "tautwise 1"
title = "Weir"

[line]
weight = "9 N/m"
stiffness = "20 MN"

[[support]]
name = "North"
station = "0 m"
elevation = "20 m"
hold = "anchor"

[[support]]
name = "Mid"
station = "150 m"
elevation = "21 m"
hold = "hanger"
length = "1 m"

[[support]]
name = "South"
station = "300 m"
elevation = "20 m"
hold = "anchor"

[stringing]
method = "over sheaves"
end_allowance = "3 m"
clip = "where it lies"
friction = 0.02
tolerance = "3 %"
temperature = "10 degC"
horizontal_tension = "9 kN"

[[condition]]
name = "calm"
temperature = "10 degC"
"""
POINTS = "station_m,elevation_m,temperature_degC\n40,17.7,10\n75,17.0,10\n110,18.0,10\n225,16.9,10\n260,17.6,10\n"
SHEAVES = 'method = "over sheaves"\n'


@pytest.fixture
def folder(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "points.csv").write_text(POINTS)
    return tmp_path


def built(folder, text, capsys):
    """The [stringing] as built, and what was said."""
    (folder / "weir.taut.toml").write_text(text)
    assert run(["fit", "weir.taut.toml", "points.csv", "--write", "built.taut.toml", "--force"]) == 0
    err = capsys.readouterr().err
    tw.load("built.taut.toml").settle("calm")
    return tomllib.loads((folder / "built.taut.toml").read_text())["stringing"], err


def test_what_does_not_belong_to_the_rule_stays(folder, capsys):
    clamped = PROJECT.replace(SHEAVES, 'method = "clamped"\n').replace('clip = "where it lies"\nfriction = 0.02\n', "")
    table, err = built(folder, clamped, capsys)
    lengths = table.pop("natural_length")
    assert len(lengths) == 2
    assert table == {"temperature": "10 degC", "method": "clamped", "end_allowance": "3 m", "tolerance": "3 %"}
    assert "leaves out" not in err
    project = tw.load("weir.taut.toml").fit("points.csv").to_project()
    assert project.stringing.end_allowance_m == 3.0


def test_how_it_came_over_its_sheaves_is_dropped_and_said(folder, capsys):
    table, err = built(folder, PROJECT, capsys)
    assert set(table) == {"temperature", "natural_length", "end_allowance", "tolerance"}
    assert "the project as built is clamped, so it leaves out method and clip and friction of its [stringing]" in err
    table, err = built(folder, PROJECT.replace('clip = "where it lies"\nfriction = 0.02\n', ""), capsys)
    assert "it leaves out method of its [stringing]" in err


def test_a_line_that_stretches_is_fitted_as_never_stretched_and_that_is_said(folder, capsys):
    said = "count that stretch twice"
    assert said not in built(folder, PROJECT, capsys)[1]
    bedded = PROJECT.replace('stiffness = "20 MN"', 'stiffness = "20 MN"\nbedding_in = "0.05 %"')
    assert said in built(folder, bedded, capsys)[1]
    assert ". The line was taken as never stretched.\n" in (folder / "built.taut.toml").read_text()
