"""Small words: drag and air in a condition's heading, statuses, units, places at springs; what the plan shows."""

from __future__ import annotations

from dataclasses import replace

import matplotlib.pyplot as plt
import pytest

import tautwise as tw
from tautwise.results_line import Equilibrium
from tautwise.results_vet import LimitState, limit_table
from tautwise.solve import settle_report
from tautwise.tables import Condition
from tautwise.text import Ink, settle_text
from tautwise.words import condition_words

LINE = {"diameter": "20 mm", "weight": "16 N/m", "stiffness": "30 MN", "breaking_strength": "90 kN"}


def project(**anchor):
    supports = [
        {"name": "L", "station": "0 m", "elevation": "20 m", **anchor},
        {"name": "M", "station": "150 m", "elevation": "20 m", "hold": "hanger", "length": "1 m"},
        {"name": "R", "station": "300 m", "elevation": "15 m"},
    ]
    load = {"name": "trolley", "force": "2 kN", "carriage": "held", "at": "70 m"}
    return tw.Project(
        title="Yard",
        line=LINE,
        support=supports,
        condition=[{"name": "still", "temperature": "15 degC", "load": [load]}],
        stringing={"temperature": "15 degC", "horizontal_tension": "15 kN"},
        limit=[{"id": "t", "kind": "tension", "share": 0.5}],
    )


@pytest.mark.parametrize(
    ("wind", "words"),
    [
        ({"pressure": "300 Pa"}, "wind of 300 Pa"),
        ({"pressure": "300 Pa", "drag": 1.2}, "wind of 300 Pa (drag 1.2)"),
        ({"speed": "30 m/s", "altitude": "800 m"}, "wind of 30 m/s (air at 800 m)"),
        ({"speed": "30 m/s", "altitude": "800 m", "drag": 0.9, "bearing": "270 deg"},
         "wind of 30 m/s from a bearing of 270 deg (drag 0.9, air at 800 m)"),
    ],
)  # fmt: skip
def test_what_differs_of_a_wind_is_in_the_heading(wind, words):
    assert condition_words(Condition(name="x", temperature="5 degC", wind=wind)) == f"5 degC, {words}"


def test_a_status_is_words():
    made = project()
    failed = Equilibrium.failed("still", 15.0, "gap_too_wide", "the bracket is too wide")
    report = replace(settle_report(made), conditions=(failed,))
    (row,) = [line for line in settle_text(report, made, Ink()) if line.startswith("  still")]
    assert "gap too wide" in row
    assert "_" not in row


def test_an_undecided_row_has_no_unit_to_guess():
    rows = [
        LimitState("t", "tension", "holds", "a", None, 2e4, 45e3, "N", 0.5, 2.5e4, None),
        LimitState("t", "tension", "undecided", "b", None, None, None, "N", None, None, None),
    ]
    decided, undecided = limit_table(rows).lines()[-2:]
    assert " kN " in decided
    assert " N " not in undecided


def test_a_sprung_anchor_is_a_place():
    for anchor in ({}, {"stiffness_along": "500 kN/m"}):
        (limit,) = project(**anchor).vet().limits
        assert limit.place == "L to M, at L"


def test_the_plan_says_what_it_shows():
    line = project().settle()
    plan = line.plot_plan()
    assert plan.get_title(loc="left") == "Yard"
    assert "horizontal force on a support, still" in plan.get_legend_handles_labels()[1]
    profile = line.plot()
    mark = line.marks[0]
    for axes, place in ((plan, mark.position_m[:2]), (profile, (mark.station_m, mark.position_m[2]))):
        (drawn,) = [each for each in axes.lines if each.get_label() == "_carriage"]
        assert (drawn.get_xdata()[0], drawn.get_ydata()[0]) == pytest.approx(place)
    plt.close("all")
