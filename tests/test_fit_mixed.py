"""Fits of lines that turn, run over sheaves, or have a curved law: what hangs exactly is found again."""

from __future__ import annotations

import math
from itertools import pairwise

import core_cases as cases
import material_cases as material
import numpy as np
import pytest

import tautwise as tw
from tautwise import _core
from tautwise.errors import InputError
from tautwise.reference import survey as twin

# Elevations carry the closing error, 1e-13 of a span, and rounding; against a sag of 1 m that is 1e-10 of the pull.
FOUND = 1e-8


def bent(**stringing):
    """Three spans that turn left and right, a hanger at the first angle point."""
    places = [(40.0, 900.0), (210.0, 1010.0), (420.0, 1040.0), (600.0, 920.0)]
    supports = [cases.support(0.0, 30.0), cases.hanger(0.0, 31.0), cases.support(0.0, 33.0), cases.support(0.0, 28.0)]
    supports = [{**row, "station_m": x, "offset_m": y} for row, (x, y) in zip(supports, places, strict=True)]
    return {**cases.problem(supports, {**cases.rule("pull", 9e3), **stringing}), "route": "turning"}


def stations_of(problem, per_span=4):
    rows = [(row["station_m"], row["offset_m"]) for row in problem["supports"]]
    ends = [row[0] for row in rows]
    if problem.get("route") == "turning":
        ends = np.concatenate([[0.0], np.cumsum([math.dist(a, b) for a, b in pairwise(rows)])])
    shares = (np.arange(per_span) + 1.0) / (per_span + 1.0)
    return np.concatenate([a + (b - a) * shares for a, b in pairwise(ends)])


def measured(problem, temperature, pull=None):
    """Columns of a survey without errors, elevations from another method of the core."""
    x = stations_of(problem)
    bare = {**problem, "conditions": [cases.condition(temperature_degC=temperature)]}
    z = _core.Project(bare).at(0, x, pull=pull)["position_m"][:, 2]
    return {"station_m": x, "elevation_m": z, "temperature_degC": np.full(x.shape, temperature)}


@pytest.mark.parametrize("unknown", ["pull", "lengths"])
def test_a_route_that_turns(unknown):
    problem = bent()
    found = _core.Project(problem).fit(measured(problem, 35.0), unknown=unknown)
    assert found["status"] == "ok"
    assert found["lengths_m"] == pytest.approx(_core.Project(problem).string()["lengths_m"], rel=1e-10)
    if unknown == "pull":
        assert found["unknowns"][0]["value"] == pytest.approx(9e3, rel=FOUND)


def test_offsets_on_a_route_that_turns_are_left_of_each_span():
    """By the twin: the hanger at the angle point leans inwards, so the spans beside it leave their own direction."""
    problem = bent()
    x = stations_of(problem)
    places = twin.places(problem, x, 20.0, pull_N=9e3)
    assert 0.01 < np.abs(places[:, 0]).max() < 2.1
    points = {"station_m": x, "elevation_m": places[:, 1], "offset_m": places[:, 0],
              "temperature_degC": np.full(x.shape, 20.0)}  # fmt: skip
    found = _core.Project(problem).fit(points)
    assert found["status"] == "ok"
    assert found["unknowns"][0]["value"] == pytest.approx(9e3, rel=FOUND)
    assert np.abs(found["offset_residuals_m"]).max() < 1e-8


@pytest.mark.parametrize("clip", ["plumb", "lies"])
def test_a_line_strung_over_sheaves(clip):
    """The pull is that of the first span, over sheaves: on a slope not that of equal horizontal tension."""
    middle = [cases.hanger(180.0, 55.0), cases.hanger(400.0, 92.0)]
    supports = [cases.support(0.0, 30.0), *middle, cases.support(600.0, 130.0)]
    problem = cases.problem(supports, {**cases.rule("pull", 9e3), "method": "over_sheaves", "clip": clip})
    found = _core.Project(problem).fit(measured(problem, 30.0))
    assert found["status"] == "ok"
    assert found["unknowns"][0]["value"] == pytest.approx(9e3, rel=FOUND)


def over_sheaves_in_service():
    supports = [cases.support(0.0, 30.0), cases.support(150.0, 33.0, "sheave"), cases.support(420.0, 31.0)]
    return cases.problem(supports, cases.rule("pull", 9e3))


def test_a_line_on_a_sheave_has_one_pull_but_not_two_lengths():
    problem = over_sheaves_in_service()
    core, points = _core.Project(problem), measured(problem, 45.0)
    assert core.fit(points)["unknowns"][0]["value"] == pytest.approx(9e3, rel=FOUND)
    assert core.fit(points, unknown="lengths")["status"] == "undetermined"


def test_lengths_beside_a_sheave_are_refused():
    project = tw.Project(
        line={"weight": "8 N/m", "stiffness": "20 MN"},
        support=[
            {"name": "A", "station": "0 m", "elevation": "30 m"},
            {"name": "B", "station": "150 m", "elevation": "33 m", "hold": "sheave"},
            {"name": "C", "station": "420 m", "elevation": "31 m"},
        ],
        stringing={"temperature": "15 degC", "horizontal_tension": "9 kN"},
        condition=[{"name": "bare", "temperature": "15 degC"}],
    )
    points = tw.Survey.of([60.0, 250.0, 300.0], [28.0, 24.0, 23.5], "15 degC")
    with pytest.raises(InputError) as caught:
        project.fit(points, unknown="lengths")
    (fault,) = caught.value.faults
    assert fault.path == "unknown"
    assert "sheave" in fault.problem
    assert "pull" in fault.expected


@pytest.mark.parametrize("unknown", ["pull", "lengths"])
@pytest.mark.parametrize("seed", range(4))
def test_a_curved_law(seed, unknown):
    """A length's unknown is the pull of a linear line: another law than the line's, but every length has one."""
    of = material.drawn_line(seed)
    pull = 1.1e-3 * sum(part["loading_N"][1] for part in of["parts"])
    supports = [cases.support(0.0, 30.0), cases.hanger(180.0, 33.0), cases.support(390.0, 31.0)]
    problem = cases.problem(supports, cases.rule("pull", pull), of=of)
    found = _core.Project(problem).fit(measured(problem, 50.0), unknown=unknown)
    assert found["status"] == "ok"
    assert found["lengths_m"] == pytest.approx(_core.Project(problem).string()["lengths_m"], rel=1e-10)
