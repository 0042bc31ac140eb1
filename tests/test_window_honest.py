"""A window is never open where the limits exclude one another, and never missed where it is only narrow.

Problems are built backwards: a limit's allowance is what the line shows at a chosen pull, so the window's edge is
known. Where a set of pulls is not that simple, each pull of a fine scan is judged by itself.
"""

from __future__ import annotations

import copy
import math
from itertools import pairwise

import core_cases as cases
import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from tautwise import _core
from tautwise.reference import window

LOW, HIGH = 12e3, 40e3  # inside every range searched (to 90 kN), above the pulls at which slack tension matters
CONDITIONS = (
    cases.condition(temperature_degC=75.0),
    cases.condition(temperature_degC=-5.0, ice_thickness_m=0.012, wind_pressure_Pa=400.0),
    cases.condition(temperature_degC=-30.0),
)
# kind, the side of the pull that it bounds, the rest of its keys
RULES = {
    "clearance": ("low", {}),
    "sag most": ("low", {}),
    "sag least": ("high", {}),
    "tension": ("high", {}),
    "catenary_constant": ("high", {}),
    "support_load": ("high", {"direction": "along"}),
}


def line_over_ground(limits, conditions=CONDITIONS, tolerance=0.0):
    return cases.problem(
        cases.span(300.0, 6.0, start=(0.0, 30.0)),
        cases.rule("none", None, tolerance=tolerance),
        of=cases.line(12.0, 20e6, strength=90e3),
        conditions=list(conditions),
        limits=limits,
        ground=[(-150.0, -400.0), (110.0, -396.0), (450.0, -398.0)],
    )


def limit_at(rule, condition, pull):
    """The rule with the allowance that the line just meets at a pull, and the side on which that bounds the pull."""
    side, keys = RULES[rule]
    kind, _, word = rule.partition(" ")
    word = word or ("least" if kind == "clearance" else "most")
    applies = [index == condition for index in range(len(CONDITIONS))]
    made = cases.limit(kind, **{word: 1.0}, applies=applies, **keys)
    (row,) = [row for row in _core.Project(line_over_ground([made])).judge(pull=pull) if row["condition"] == condition]
    return {**made, word: row["value"]}, side


def worst_at(problem):
    core = _core.Project(problem)

    def worst(pull):
        return max(row["utilisation"] for row in core.judge(pull=pull))

    return worst


pulls = st.floats(math.log(LOW), math.log(HIGH)).map(math.exp)
rules_low = st.sampled_from([rule for rule, (side, _) in RULES.items() if side == "low"])
rules_high = st.sampled_from([rule for rule, (side, _) in RULES.items() if side == "high"])
conditions = st.integers(0, len(CONDITIONS) - 1)


@given(rules_low, conditions, rules_high, conditions, pulls, st.floats(1e-5, 1.0))
def test_contradictory_limits_never_give_an_open_window(low_rule, c, high_rule, d, pull, apart):
    """One limit asks for more than `pull`, the other for less than a smaller one."""
    lower, _ = limit_at(low_rule, c, pull * (1.0 + apart))
    upper, _ = limit_at(high_rule, d, pull)
    found = _core.Project(line_over_ground([lower, upper])).window()
    assert not found["open"]
    assert found["intervals"] == []
    assert found["low"] is None
    assert found["high"] is None
    assert found["specify"] is None
    assert {row["limit"] for row in found["conflict"]} == {0, 1}
    needs = {row["limit"]: row for row in found["conflict"]}
    assert needs[0]["side"] == "at least"
    assert needs[1]["side"] == "at most"
    # An edge is where a utilisation is 1 to 1e-9 or so; it moves by no less than a thirtieth as much as the pull.
    assert needs[0]["needs_N"] == pytest.approx(pull * (1.0 + apart), rel=1e-6)
    assert needs[1]["needs_N"] == pytest.approx(pull, rel=1e-6)


@given(rules_low, conditions, rules_high, conditions, pulls, st.floats(-6.0, 0.0).map(lambda power: 10.0**power))
def test_narrow_windows_are_found(low_rule, c, high_rule, d, pull, width):
    """However narrow, wherever between the points of the scan."""
    lower, _ = limit_at(low_rule, c, pull)
    upper, _ = limit_at(high_rule, d, pull * (1.0 + width))
    found = _core.Project(line_over_ground([lower, upper])).window()
    assert found["open"], found["status"]
    ((low, high),) = found["intervals"]
    assert low == pytest.approx(pull, rel=1e-7)
    assert high == pytest.approx(pull * (1.0 + width), rel=1e-7)
    assert (found["low"]["limit"], found["high"]["limit"]) == (0, 1)
    assert low <= found["specify"]["pull_N"] <= high
    assert found["verified"]


@given(st.lists(st.tuples(st.sampled_from(list(RULES)), conditions, pulls), min_size=1, max_size=5))
def test_any_set_of_limits(drawn):
    """Each side's strictest limit decides."""
    made = [(limit_at(rule, condition, pull), pull) for rule, condition, pull in drawn]
    least = max([pull for (_, side), pull in made if side == "low"], default=0.0)
    most = min([pull for (_, side), pull in made if side == "high"], default=math.inf)
    assume(abs(least / most - 1.0) > 1e-7)
    found = _core.Project(line_over_ground([limit for (limit, _), _ in made])).window()
    assert found["open"] == (least < most)
    if found["open"]:
        ((low, high),) = found["intervals"]
        searched_low, searched_high = found["range_N"]
        assert low == pytest.approx(max(least, searched_low), rel=1e-7)
        assert high == pytest.approx(min(most, searched_high), rel=1e-7)
        assert (found["low"]["limit"] is None) == (least == 0.0)
        assert (found["high"]["limit"] is None) == (most == math.inf)


def test_no_limit_at_all():
    found = _core.Project(line_over_ground([])).window()
    assert found["open"]
    assert found["low"]["limit"] is None
    assert found["high"]["limit"] is None


def crest(least, sag=30.0):
    """A support on a crest: its load falls with the line's length as the pull grows, then rises with the slope."""
    supports = [cases.support(0.0, 18.0), cases.support(100.0, 20.0), cases.support(200.0, 18.0)]
    limits = [
        cases.limit("uplift", least=least, covers=[False, True, False]),
        cases.limit("sag", most=sag),
        cases.limit("tension", most=7000.0),
    ]
    return cases.problem(supports, cases.rule("none", None), of=cases.line(10.0, 5e6, strength=20e3), limits=limits)


@pytest.mark.parametrize("least", [1100.0, 1120.0, 1150.0, 1200.0])
def test_feasible_pulls_in_two_parts(least):
    """Both parts are found, with the gap between them."""
    problem = crest(least)
    found = _core.Project(problem).window()
    expected = window.intervals(worst_at(problem), *found["range_N"], points=400)
    assert len(expected) == 2
    np.testing.assert_allclose(np.array(found["intervals"]), np.array(expected), rtol=1e-7)
    pull = found["specify"]["pull_N"]
    (holder,) = [(low, high) for low, high in found["intervals"] if low <= pull <= high]
    assert (found["low"]["pull_N"], found["high"]["pull_N"]) == holder


@given(st.floats(1060.0, 1260.0), st.floats(0.5, 40.0))
def test_feasible_pulls_in_any_parts(least, sag):
    problem = crest(least, sag)
    found = _core.Project(problem).window()
    expected = window.intervals(worst_at(problem), *found["range_N"], points=400)
    assume(all(high / low > 1.0 + 1e-6 for low, high in expected))
    assume(all(b[0] / a[1] > 1.0 + 1e-6 for a, b in pairwise(expected)))
    assert found["open"] == bool(expected)
    assert len(found["intervals"]) == len(expected)
    if expected:
        np.testing.assert_allclose(np.array(found["intervals"]), np.array(expected), rtol=1e-6)


@given(st.lists(st.tuples(rules_low, conditions, pulls), min_size=1, max_size=2),
       st.lists(st.tuples(rules_high, conditions, pulls), min_size=1, max_size=2), st.floats(0.0, 0.1))  # fmt: skip
def test_the_pull_to_specify_holds_over_its_tolerance(lows, highs, tolerance):
    limits = [limit_at(rule, condition, pull)[0] for rule, condition, pull in lows + highs]
    found = _core.Project(line_over_ground(limits, tolerance=tolerance)).window()
    assume(found["open"])
    worst = worst_at(line_over_ground(limits))
    specify = found["specify"]
    pull = specify["pull_N"]
    ends = [pull * (1.0 - tolerance), pull, pull * (1.0 + tolerance)]
    assert max(map(worst, ends)) == pytest.approx(specify["worst_utilisation"], rel=1e-6)
    low, high = found["intervals"][0]
    others = np.geomspace(low, high, 41)
    over = [max(worst(other * (1.0 - tolerance)), worst(other * (1.0 + tolerance))) for other in others]
    assert specify["worst_utilisation"] <= min(over) * (1.0 + 1e-6)


def relaxed(problem, change):
    """The problem with one proposed change made; 1e-6 more of an allowance, as edges meet at a single pull."""
    told = copy.deepcopy(problem)
    if change["kind"] == "allowance":
        rule = told["limits"][change["limit"]]
        word = "least" if rule["least"] is not None else "most"
        rule[word] = change["to"] + math.copysign(1e-6 * abs(change["by"]), change["by"])
    else:
        key = "elevation_m" if change["kind"] == "support_height" else "station_m"
        told["supports"][change["support"]][key] += change["by"] * (1.0 + 1e-6)
    return told


@pytest.mark.parametrize(("low_rule", "high_rule"), [("clearance", "tension"), ("sag most", "catenary_constant")])
def test_a_proposed_relaxation_opens_the_window(low_rule, high_rule):
    lower, _ = limit_at(low_rule, 0, 21e3)
    upper, _ = limit_at(high_rule, 1 if high_rule == "tension" else 2, 19e3)
    problem = line_over_ground([lower, upper])
    shut = _core.Project(problem).window()
    assert not shut["open"]
    assert shut["relax"]
    for change in shut["relax"]:
        assert _core.Project(relaxed(problem, change)).window()["open"], change


def test_a_limit_that_nothing_satisfies():
    """The conflict says so."""
    problem = line_over_ground([cases.limit("clearance", least=440.0), cases.limit("tension", share=0.5)])
    found = _core.Project(problem).window()
    assert not found["open"]
    (row,) = [row for row in found["conflict"] if row["limit"] == 0]
    assert row["side"] == "never"
    assert row["needs_N"] is None
