"""V hangers: statics by hand, the single string as their limit, slack strings, uplift, and the twin."""

from __future__ import annotations

import math

import core_cases as cases
import numpy as np
import pytest
from test_route import at_angle_points, bend, column, settled, turning

from tautwise import _core
from tautwise.reference.project import Twin

LENGTH, SPREAD = 5.0, 6.0  # a drop of 4 m
FORCES = ("along_N", "across_N", "down_N")


def vee(elevation, weight=300.0, *, length=LENGTH, spread=SPREAD, **other):
    """`elevation` is that of the plumb clamp."""
    drop = math.sqrt(length**2 - (0.5 * spread) ** 2)
    row = cases.hanger(0.0, 0.0, length, weight, hanger_spread_m=spread, **other)
    return {**row, "elevation_m": elevation + drop}


def line(middle, *, wind=0.0, loads=(), lengths=(300.6, 300.6)):
    """Two level spans of 300 m on a straight route."""
    supports = [cases.support(0.0, 30.0), {**middle, "station_m": 300.0}, cases.support(600.0, 30.0)]
    conditions = [cases.condition(wind_pressure_Pa=wind, loads=list(loads))]
    return cases.problem(supports, cases.lengths_rule(*lengths), conditions=conditions)


def swung(found, row, support=1):
    """Clamp from the support."""
    return np.array(found["supports"][support]["position_m"]) - [300.0, row["offset_m"], row["elevation_m"]]


def strings(clamp, spread=SPREAD):
    """Unit vectors from the clamp to the right and the left upper end, and the strings' lengths."""
    ends = np.array([[0.0, -0.5 * spread, 0.0], [0.0, 0.5 * spread, 0.0]]) - clamp
    lengths = np.linalg.norm(ends, axis=1)
    return ends / lengths[:, None], lengths


def test_it_holds_against_wind_without_swinging():
    """Force within the V: the clamp stays, and the strings' tensions follow from the triangle of forces."""
    row = vee(30.0)
    found = settled(line(row, wind=200.0))
    state = found["supports"][1]
    np.testing.assert_allclose(swung(found, row), [0.0, 0.0, -4.0], atol=1e-9)
    assert state["swing_rad"] == pytest.approx(0.0, abs=1e-9)
    down, across = state["down_N"] - 150.0, state["across_N"]
    assert across == pytest.approx(200.0 * 0.02 * 300.6, rel=1e-3)  # half of each span's wind
    assert abs(across) < 0.6 * math.hypot(down, across)
    # T1 + T2 = down l / R, T1 - T2 = across l / b: resolve at the clamp, vertically and across.
    units, _ = strings(swung(found, row))
    tensions = np.linalg.solve(units[:, 1:].T, [-across, down])
    assert tensions == pytest.approx([(down / 4.0 + across / 3.0) * 2.5, (down / 4.0 - across / 3.0) * 2.5], rel=1e-9)


def test_it_swings_along_on_its_circle():
    """Unequal spans pull it ahead: tan of the swing is the force along over the force down, at the drop's radius."""
    row = vee(30.0)
    found = settled(line(row, lengths=(300.4, 300.9)))
    state, clamp = found["supports"][1], swung(found, row)
    assert math.hypot(clamp[0], clamp[2]) == pytest.approx(4.0, rel=1e-12)
    assert abs(clamp[1]) < 1e-12
    assert clamp[0] < -0.05
    angle = math.atan2(state["along_N"], state["down_N"] - 150.0)
    assert state["swing_along_rad"] == pytest.approx(angle, rel=1e-9)
    assert state["swing_across_rad"] == pytest.approx(0.0, abs=1e-12)
    assert state["swing_rad"] == pytest.approx(abs(angle), rel=1e-9)


@pytest.mark.parametrize("side", [1.0, -1.0])
def test_one_string_goes_slack_and_the_other_swings(side):
    """More across than the V can hold: the windward string carries all of it, along itself, at its length."""
    row = vee(30.0, spread=1.2)
    problem = line(row, wind=900.0)
    problem["conditions"][0]["wind_angle_rad"] = side * 0.5 * math.pi
    found = settled(problem)
    state, clamp = found["supports"][1], swung(found, row)
    units, lengths = strings(clamp, 1.2)
    carries = 0 if side > 0.0 else 1  # wind to the left hangs the line on the right string
    force = -np.array([state["along_N"], state["across_N"], 150.0 - state["down_N"]])
    assert lengths[carries] == pytest.approx(LENGTH, rel=1e-12)
    assert lengths[1 - carries] < LENGTH * (1.0 - 1e-3)
    np.testing.assert_allclose(force, np.linalg.norm(force) * units[carries], atol=1e-8 * np.linalg.norm(force))
    assert side * state["swing_across_rad"] > 0.1
    assert found["gap_relative"] < 1e-6


def test_without_spread_it_is_a_single_string():
    """As the spread s goes to 0 the strings' ends meet: places differ by s / 2 at most, forces with s^1."""
    single = cases.hanger(0.0, 30.0, LENGTH, 300.0)
    expected = settled(line(single, wind=400.0))
    for spread in (1e-3, 1e-6):
        row = {**single, "hanger_spread_m": spread}
        found = settled(line(row, wind=400.0))
        assert np.linalg.norm(swung(found, row) - swung(expected, row)) <= spread
        forces = column(found["supports"], *FORCES) - column(expected["supports"], *FORCES)
        assert np.abs(forces).max() < 1e4 * spread


def test_a_wide_v_is_a_post_that_cannot_give_across():
    """Both strings taut under wind: the clamp is held across as by an anchor, and free along on its circle."""
    row = vee(30.0, weight=0.0)
    held = cases.support(0.0, 30.0)
    found, expected = settled(line(row, wind=150.0)), settled(line(held, wind=150.0))
    forces = [column(each["supports"], *FORCES) for each in (found, expected)]
    np.testing.assert_allclose(forces[0], forces[1], rtol=0, atol=1e-9 * 2e4)


def test_the_loads_at_the_limit_of_the_v():
    """Across = b / l of the force: the slack string's tension passes through nothing, and all is continuous."""
    row = vee(30.0, weight=0.0)
    states = []
    for wind in np.linspace(460.0, 700.0, 25):
        found = settled(line(row, wind=float(wind)))
        down, across = found["supports"][1]["down_N"], found["supports"][1]["across_N"]
        states.append((abs(across) / math.hypot(down, across) - 0.6, found["supports"][1]["swing_across_rad"]))
    outside = np.array(states)[:, 0] > 0.0
    swings = np.array(states)[:, 1]
    assert 3 < outside.sum() < 22
    assert np.abs(swings[~outside]).max() < 1e-9
    assert (np.diff(swings[outside]) > 0.0).all()
    assert swings[outside][0] < 0.02


def test_lifted():
    """A V far below its neighbours: pulled up, both strings slack; reported as uplift, as a single string would be."""
    row = vee(10.0, weight=0.0)
    problem = line(row, lengths=(300.3, 300.3))
    problem["limits"] = [cases.complete(cases.limit("uplift", least=0.0), 1, 3)]
    core = _core.Project(problem)
    (judged,) = core.judge()
    risen = (swung(core.settle(0), row)[2] + 4.0) / 4.0  # in drops
    assert judged["status"] == "fails"
    assert judged["support"] == 1
    assert judged["utilisation"] == pytest.approx(1.0 + risen, rel=1e-9)


def test_slack_within_reach():
    """A line that holds itself up within the lens: no force in the hanger, the clamp where the free line is."""
    free = settled(cases.problem(cases.span(600.0, start=(0.0, 30.0)), cases.lengths_rule(601.6)))
    lowest = 30.0 - free["spans"][0]["sag_m"]
    row = vee(lowest - 1.0, weight=0.0)
    found = settled(line(row, lengths=(300.8, 300.8)))
    assert found["supports"][1]["resultant_N"] < 1e-6
    assert swung(found, row)[2] == pytest.approx(-3.0, abs=1e-6)


def test_at_an_angle_point():
    """Its strings hang across the bisector and take 2 H sin(10 deg) of the turn as tension differences."""
    found = settled(bend(vee(30.0, length=3.0, spread=5.6), pull=6e3))
    state = found["supports"][1]
    turn = math.radians(20.0)
    assert state["across_N"] == pytest.approx(2.0 * 6e3 * math.sin(turn / 2), rel=1e-9)
    assert state["swing_rad"] == pytest.approx(0.0, abs=1e-9)
    np.testing.assert_allclose(state["position_m"], [300.0, 0.0, 30.0], atol=1e-9)


@pytest.mark.parametrize("seed", range(6))
def test_the_twin_agrees(seed):
    """V hangers of any spread on a turning route, some with a slack string; tolerances as in test_twin."""
    rng = np.random.default_rng(100 + seed)
    places = [(0.0, 0.0), (250.0, float(rng.uniform(-60, 60))), (480.0, float(rng.uniform(-60, 60))), (760.0, 0.0)]
    spreads = rng.uniform(0.3, 5.8, 2)
    rows = [
        cases.support(0.0, 30.0),
        *(vee(30.0, length=3.0, spread=float(s)) for s in spreads),
        cases.support(0.0, 30.0),
    ]
    conditions = [cases.condition(wind_pressure_Pa=float(rng.uniform(0, 600)))]
    problem = turning(rows, places, cases.rule("pull", 9e3), conditions=conditions)
    found, twin = settled(problem), Twin(problem)
    size = max(row["tension_max_N"] for row in found["spans"])
    expected = twin.states(0)["supports"]
    np.testing.assert_allclose(column(found["supports"], *FORCES), column(expected, *FORCES), rtol=0, atol=1e-9 * size)
    placed = np.array([row["position_m"] for row in found["supports"]])
    np.testing.assert_allclose(placed, twin.settle(0).clamps, rtol=0, atol=1e-8)
    assert 0.0 <= found["gap_relative"] <= 1e-6


def test_mirrored():
    rows = [cases.support(0.0, 30.0), vee(30.0, spread=1.0), cases.support(0.0, 30.0)]
    found = []
    for sign in (1.0, -1.0):
        problem = turning(rows, [(0.0, 0.0), (300.0, sign * 20.0), (610.0, 0.0)], cases.rule("pull", 9e3))
        found.append(column(settled(problem)["supports"], *FORCES))
    np.testing.assert_allclose(found[0] * [1, -1, 1], found[1], rtol=0, atol=1e-11 * 1e4)
    assert at_angle_points(rows, [(0.0, 0.0)] * 3)[1]["hanger_spread_m"] == 1.0
