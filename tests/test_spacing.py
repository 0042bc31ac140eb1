"""Spacing between two lines: closed forms, SciPy, the twin, relations, and a window that it bounds.

Tolerance where none is said: the other line's cubic arcs are good to 1e-10 m, everything else to rounding, so 1e-9 m.
"""

from __future__ import annotations

import copy
import math

import core_cases as cases
import numpy as np
import pytest
from scipy.optimize import minimize, minimize_scalar

from tautwise import _core
from tautwise.reference.project import Twin

NEAR = 1e-9


def beside(problem, other, shift=(0.0, 0.0, 0.0), *, condition=0, least=1.0, **keys):
    """A problem with a spacing from another one's line in one of its conditions, in every condition of ours."""
    curve = _core.Project(other).course(condition)
    curve[:, 2:8] += np.tile(shift, 2)
    told = copy.deepcopy(problem)
    limit = cases.limit("spacing", least=least, courses=[0] * len(told["conditions"]), **keys)
    told["limits"] = [*told["limits"], cases.complete(limit, len(told["conditions"]), len(told["supports"]))]
    told["courses"] = [curve]
    return told


def spacing(problem, other, shift=(0.0, 0.0, 0.0), **keys):
    """The row of the spacing in our first condition."""
    return _core.Project(beside(problem, other, shift, **keys)).judge()[0]


def level(run=300.0, length=300.8, **other):
    return cases.problem(cases.span(run), cases.lengths_rule(length), **other)


def straight(start, end):
    """A line of next to no weight, tight between two points (x, y, z); x must grow."""
    supports = [cases.support(x, z, offset_m=y) for x, y, z in (start, end)]
    of = cases.line(1e-9, 1e7)
    return cases.problem(supports, cases.lengths_rule(0.999 * math.dist(start, end)), of=of)


# --- closed forms


@pytest.mark.parametrize("offset", [1.5, -0.2, 40.0])
def test_the_same_line_beside_itself(offset):
    """Every place is as near as any other: the offset, to rounding."""
    assert spacing(level(), level(), (0.0, offset, 0.0))["value"] == pytest.approx(abs(offset), abs=1e-12)


@pytest.mark.parametrize("rise", [0.3, 5.0])
def test_the_same_line_above_itself(rise):
    """Least where it is steepest, from the lower end to the nearest place above: by Irvine's closed form."""
    weight, stiffness, length = 15.97, 34.7e6, 300.8
    row = spacing(level(), level(), (0.0, 0.0, rise))
    pull = _core.Project(level()).settle(0)["spans"][0]["horizontal_tension_N"]

    def place(s):
        up = -0.5 * weight * length
        x = pull / stiffness * s + pull / weight * (math.asinh((up + weight * s) / pull) - math.asinh(up / pull))
        z = (up * s + 0.5 * weight * s * s) / stiffness
        return x, z + (math.hypot(pull, up + weight * s) - math.hypot(pull, up)) / weight

    def apart(s):
        x, z = place(s)
        return math.hypot(x - 300.0, z + rise)

    best = minimize_scalar(apart, bounds=(290.0, 300.8), method="bounded", options={"xatol": 1e-9})
    assert row["value"] == pytest.approx(best.fun, abs=NEAR)
    assert row["value"] < rise
    assert abs(row["station_m"] - 150.0) == pytest.approx(150.0, abs=1e-9)


def skew(a0, a1, b0, b1):
    """Distance of two skew lines, and whether its feet lie within both stretches."""
    a0, a1, b0, b1 = map(np.array, (a0, a1, b0, b1))
    normal = np.cross(a1 - a0, b1 - b0)
    distance = abs((b0 - a0) @ normal) / np.linalg.norm(normal)
    shares = np.linalg.lstsq(np.column_stack([a1 - a0, b0 - b1]), b0 - a0, rcond=None)[0]
    return (
        distance,
        bool(((shares > 0.0) & (shares < 1.0)).all()),
        a0 + shares[0] * (a1 - a0),
        b0 + shares[1] * (b1 - b0),
    )


@pytest.mark.parametrize(
    ("other0", "other1"),
    [
        ((40.0, -50.0, 22.0), (70.0, 60.0, 25.0)),
        ((10.0, 5.0, 60.0), (90.0, -8.0, 2.0)),
        ((49.0, -30.0, 3.0), (51.0, 90.0, 8.0)),
    ],
)
def test_skew_straight_lines(other0, other1):
    """|(b - a) . n| / |n|, n normal to both. Sag w L^2 / (8 H) of these lines is below 1e-10 m."""
    mine0, mine1 = (0.0, 0.0, 10.0), (100.0, 20.0, 14.0)
    distance, inside, here, there = skew(mine0, mine1, other0, other1)
    assert inside
    row = spacing(straight(mine0, mine1), straight(other0, other1))
    assert row["value"] == pytest.approx(distance, abs=NEAR)
    assert row["station_m"] == pytest.approx(here[0], abs=1e-6)
    np.testing.assert_allclose(row["other_position_m"], there, atol=1e-6)


def test_ends_are_the_nearest_places():
    """Two straight lines one after the other: from end to end."""
    row = spacing(straight((0.0, 0.0, 10.0), (100.0, 0.0, 10.0)), straight((103.0, 4.0, 10.0), (200.0, 30.0, 22.0)))
    assert row["value"] == pytest.approx(5.0, abs=1e-12)
    assert row["other_at_m"] == pytest.approx(0.0, abs=1e-9)


def test_lines_that_touch():
    """A shared support: no distance; as much as the limit asks for is missing."""
    other = straight((300.0, 0.0, 0.0), (400.0, 50.0, 20.0))
    row = spacing(level(), other, least=2.0)
    assert row["value"] == pytest.approx(0.0, abs=NEAR)
    assert row["status"] == "fails"
    assert row["utilisation"] == pytest.approx(2.0, abs=NEAR)


def test_lines_that_cross():
    """A straight line through mid-span at the height of the sag there."""
    mine = level()
    low = _core.Project(mine).at(0, np.array([150.0]))["position_m"][0, 2]
    row = spacing(mine, straight((140.0, -40.0, low), (160.0, 40.0, low)))
    assert row["value"] == pytest.approx(0.0, abs=1e-8)


# --- against SciPy and the twin


def drawn(seed):
    """A line of two spans and another one near it, in wind, at any angle; sometimes with a point load."""
    rng = np.random.default_rng(seed)

    def line_from(x, y, z, run, turn, rise, spans, slack, loads=()):
        places = [(x + k * run * math.cos(turn), y + k * run * math.sin(turn), z + k * rise) for k in range(spans + 1)]
        supports = [cases.support(px, pz, offset_m=py) for px, py, pz in places]
        lengths = [slack * math.hypot(run, rise)] * spans
        wind = cases.condition(temperature_degC=30.0, wind_pressure_Pa=rng.uniform(0.0, 700.0), loads=list(loads))
        return cases.problem(supports, cases.lengths_rule(*lengths), conditions=[wind])

    load = [cases.point_load(60.0, (0.0, 200.0, -1500.0))] if seed % 2 else []
    mine = line_from(0.0, 0.0, 20.0, 150.0, 0.1, rng.uniform(-9.0, 9.0), 2, rng.uniform(1.0005, 1.03), load)
    turn = rng.uniform(-1.4, 1.4)
    other = line_from(*rng.uniform((60.0, -60.0, 15.0), (150.0, 20.0, 40.0)), 110.0, turn, rng.uniform(-8.0, 8.0),
                      1 + seed % 2, rng.uniform(1.0005, 1.05))  # fmt: skip
    return mine, other


def on_line(problem, condition=0):
    """Position at a natural length along the exact line, by the twin."""
    settled = Twin(problem).settle(condition)
    ends = np.cumsum([0.0] + [span.length_m for span in settled.spans])

    def at(s):
        k = min(int(np.searchsorted(ends, s, side="right")) - 1, len(settled.spans) - 1)
        return settled.clamps[k] + settled.spans[k].position_at(s - ends[k])

    return at, float(ends[-1])


@pytest.mark.parametrize("seed", range(8))
def test_drawn_pairs_by_scipy(seed):
    """Bounded minimisation over both natural lengths, from the best of a grid and its neighbours."""
    mine, other = drawn(seed)
    (a, la), (b, lb) = on_line(mine), on_line(other)
    s, u = np.linspace(0.0, la, 91), np.linspace(0.0, lb, 91)
    apart = np.linalg.norm(np.array([a(x) for x in s])[:, None] - np.array([b(x) for x in u])[None], axis=2)
    found = []
    for at in np.argsort(apart, axis=None)[:40:8]:
        i, j = np.unravel_index(at, apart.shape)
        best = minimize(lambda x: float(np.sum((a(x[0]) - b(x[1])) ** 2)), (s[i], u[j]), bounds=((0.0, la), (0.0, lb)),
                        method="L-BFGS-B", options={"ftol": 1e-15, "gtol": 1e-10})  # fmt: skip
        found.append(math.sqrt(best.fun))
    row = spacing(mine, other)
    # L-BFGS-B leaves a slope of about 1e-6 m, by finite differences, on a curvature of 1e-2 or more: 1e-8 / d.
    assert row["value"] == pytest.approx(min(found), abs=1e-6)
    assert row["value"] <= min(found) + NEAR


@pytest.mark.parametrize("seed", range(6))
def test_the_twin_agrees(seed):
    mine, other = drawn(20 + seed)
    told = beside(mine, other, (2.0, -1.0, 0.5))
    row = _core.Project(told).judge()[0]
    verdict = Twin({**told, "others": [(other, 0, (2.0, -1.0, 0.5))]}).judge()[0, 0]
    assert row["value"] == pytest.approx(verdict.value, abs=NEAR)
    assert row["utilisation"] == pytest.approx(verdict.utilisation, abs=NEAR)


@pytest.mark.parametrize("seed", range(4))
def test_the_places_are_on_both_lines_and_square_to_them(seed):
    mine, other = drawn(40 + seed)
    row = spacing(mine, other)
    b, lb = on_line(other)
    there = np.array(row["other_position_m"])
    np.testing.assert_allclose(b(row["other_at_m"]), there, atol=2e-10)
    here = _core.Project(mine).at(0, np.array([row["station_m"]]))["position_m"][0]
    assert np.linalg.norm(here - there) == pytest.approx(row["value"], abs=NEAR)
    if 1.0 < row["other_at_m"] < lb - 1.0:
        along = b(row["other_at_m"] + 1e-3) - b(row["other_at_m"] - 1e-3)
        # The difference over 1 mm is good to 1e-10 over 2e-3, the place to 1e-6 of a curvature.
        assert abs(along @ (here - there)) <= 1e-5 * np.linalg.norm(along) * row["value"]


# --- relations


@pytest.mark.parametrize("seed", range(4))
def test_symmetric_between_the_two(seed):
    mine, other = drawn(60 + seed)
    assert spacing(mine, other)["value"] == pytest.approx(spacing(other, mine)["value"], abs=NEAR)


def moved(problem, by):
    told = copy.deepcopy(problem)
    for support in told["supports"]:
        for key, step in zip(("station_m", "offset_m", "elevation_m"), by, strict=True):
            support[key] += step
    return told


def mirrored(problem):
    told = copy.deepcopy(problem)
    for support in told["supports"]:
        support["offset_m"] *= -1.0
    for state in told["conditions"]:
        state["wind_angle_rad"] *= -1.0
        for load in state["loads"]:
            load["vector"] = tuple(np.array(load["vector"]) * [1.0, -1.0, 1.0])
    return told


@pytest.mark.parametrize("seed", range(4))
def test_moved_and_mirrored(seed):
    """Moved together; the other moved by its supports or by the shift; both seen in a mirror."""
    mine, other = drawn(80 + seed)
    by = (31.0, -7.0, 4.0)
    value = spacing(mine, other)["value"]
    assert spacing(moved(mine, by), other, by)["value"] == pytest.approx(value, abs=NEAR)
    assert spacing(moved(mine, by), moved(other, by))["value"] == pytest.approx(value, abs=NEAR)
    assert spacing(mirrored(mine), mirrored(other))["value"] == pytest.approx(value, abs=NEAR)


def test_spans_that_are_covered():
    """The worst of the spans looked at; with all of them the least of each alone."""
    mine, other = drawn(3)
    each = [spacing(mine, other, covers=[k == span for k in range(3)])["value"] for span in range(2)]
    assert spacing(mine, other)["value"] == min(each)
    assert spacing(mine, other, covers=[False] * 3)["status"] == "undecided"


# --- courses


@pytest.mark.parametrize("slack", [0.9999, 1.0005, 1.05, 1.8])
def test_arcs_are_good_to_their_promise(slack):
    """Middles of the arcs against the exact line, from bar-tight to hanging deep: 1e-10 m and rounding."""
    problem = level(length=300.0 * slack)
    arcs = _core.Project(problem).course(0)
    at, _ = on_line(problem)
    bend = ((arcs[:, 1] - arcs[:, 0]) / 8.0)[:, None] * (arcs[:, 8:11] - arcs[:, 11:14])
    middle = 0.5 * (arcs[:, 2:5] + arcs[:, 5:8]) + bend
    for k in range(0, len(arcs), max(1, len(arcs) // 40)):
        np.testing.assert_allclose(middle[k], at(0.5 * (arcs[k, 0] + arcs[k, 1])), atol=2e-10)


@pytest.mark.parametrize(
    ("change", "error"),
    [
        (lambda curve: curve[:, :13], ValueError),
        (lambda curve: curve[:0], ValueError),
        (lambda curve: np.where(np.arange(14) == 1, np.nan, curve), _core.RangeError),
        (lambda curve: curve[::-1].copy(), _core.RangeError),
        (lambda curve: "curve", ValueError),
    ],
)
def test_curves_that_are_none(change, error):
    told = beside(level(), level(), (0.0, 2.0, 0.0))
    told["courses"] = [change(told["courses"][0])]
    with pytest.raises(error):
        _core.Project(told)


@pytest.mark.parametrize("courses", [None, [None], [1], [0, 0], 5])
def test_a_spacing_needs_its_curve(courses):
    told = beside(level(), level(), (0.0, 2.0, 0.0))
    told["limits"][0]["courses"] = courses
    with pytest.raises((_core.RangeError, ValueError, TypeError)):
        _core.Project(told)


# --- windows


def under_a_wire():
    """A cable that rises towards a wire above it as it is pulled, and sinks towards the ground as it is let go."""
    wire = cases.problem(cases.span(200.0, start=(0.0, 14.0)), cases.rule("pull", 20e3))
    cable = cases.problem(
        cases.span(200.0, start=(0.0, 12.4)),
        cases.rule("none", None),
        of=cases.line(9.0, 12e6, strength=60e3),
        conditions=[cases.condition(temperature_degC=60.0), cases.condition(temperature_degC=-10.0)],
        limits=[cases.limit("clearance", least=5.0, applies=[True, False])],
        ground=[(0.0, 0.0), (200.0, 0.0)],
    )
    return cable, wire


def test_a_window_that_a_spacing_bounds():
    """Open between ground and wire; honest at both ends, by cold starts, and at every pull searched."""
    cable, wire = under_a_wire()
    told = beside(cable, wire, (0.0, 0.3, 0.0), least=1.0, applies=[False, True])
    core = _core.Project(told)
    found = core.window()
    low, high = found["intervals"][0]
    assert found["open"]
    assert found["verified"]
    assert found["high"]["limit"] == 1
    assert found["high"]["value"] == pytest.approx(1.0, abs=1e-7)

    def worst(pull):
        return max(row["utilisation"] for row in core.judge(pull=pull))

    assert worst(low * (1.0 - 1e-6)) > 1.0 >= worst(low * (1.0 + 1e-6))
    assert worst(high * (1.0 - 1e-6)) <= 1.0 < worst(high * (1.0 + 1e-6))
    for pull in np.geomspace(*found["range_N"], 40):
        inside = any(a <= pull <= b for a, b in found["intervals"])
        assert (worst(pull) <= 1.0) == inside, pull


def test_continuous_in_the_pull():
    """No jump: a step of 1e-7 of the pull moves the distance by no more than the line's own places, some 1e-6 m."""
    cable, wire = under_a_wire()
    core = _core.Project(beside(cable, wire, (3.0, 0.3, 0.0), applies=[False, True]))
    for pull in np.geomspace(2e3, 4e4, 60):
        a, b = (core.judge(pull=pull * factor)[1]["value"] for factor in (1.0, 1.0 + 1e-7))
        assert abs(a - b) <= 2e-6


def test_a_shut_window_says_what_opens_it():
    """The wire too near: the spacing is named, and easing it as proposed opens the window."""
    cable, wire = under_a_wire()
    told = beside(cable, wire, (0.0, 0.3, 0.0), least=1.0, applies=[False, True])
    told["limits"][0]["least"] = 10.5
    told["limits"][1]["least"] = 1.55
    shut = _core.Project(told).window()
    assert not shut["open"]
    assert 1 in {row["limit"] for row in shut["conflict"]}
    (ease,) = [change for change in shut["relax"] if change["limit"] == 1]
    told["limits"][1]["least"] = ease["to"] * (1.0 - 1e-6)
    assert _core.Project(told).window()["open"]
