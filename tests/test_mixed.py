"""Everything at once: drawn lines that mix holds, routes, laws, loads and ways of stringing, and what always holds.

A condition settles with a closed bracket, or says that it did not and prints no numbers as if it had. The forces on the
supports are all that acts on the line and its hangers, whatever the line is made of. The slow twin finds the same.
"""

from __future__ import annotations

import copy
import math
from itertools import pairwise

import core_cases as cases
import material_cases as material
import numpy as np
import pytest

from tautwise import _core
from tautwise.reference import loads as twin_loads
from tautwise.reference.project import Twin
from tautwise.reference.route import route_of

DRAWN = range(48)
TWINNED = (2, 3, 7, 8, 11, 14, 15, 34, 35, 37, 39, 45, 50, 55, 56, 58)  # those that the twin hangs within seconds
HONEST = {"slack", "not_settled", "gap_too_wide", "over_sheave", "not_finite"}
BALANCE = 1e-9  # of the greatest tension: closing errors of 1e-13 of a span times EA/T, at most 1e4
FLAT = {"sag_station_m": 1e-5, "low_station_m": 1e-5}  # places of an extreme, as in test_twin


def drawn(seed):
    """Two to five spans; each choice is drawn by itself, but what is refused together is not drawn together."""
    rng = np.random.default_rng([seed, 2026])
    n = int(rng.integers(2, 6))
    turning, curved = bool(rng.random() < 0.5), bool(rng.random() < 0.4)
    places = drawn_places(rng, n, turning)
    kinds = ["anchor", "hanger", "vee", "post", "sheave", "link"]
    inner = [str(rng.choice(kinds, p=[0.12, 0.26, 0.14, 0.14, 0.2, 0.14])) for _ in range(n - 1)]
    holds = [str(rng.choice(["anchor", "spring", "post"])), *inner, str(rng.choice(["anchor", "spring", "post"]))]
    supports = [drawn_support(rng, kind, place) for kind, place in zip(holds, places, strict=True)]
    of = (
        material.drawn_line(int(rng.integers(0, 100)))
        if curved
        else cases.line(float(rng.uniform(5, 20)), float(10.0 ** rng.uniform(6.8, 7.5)), strength=120e3)
    )
    states = ["initial", "final", "after creep"] if curved else ["initial"]
    conditions = [
        drawn_condition(rng, n, places, turning=turning, state="initial"),
        drawn_condition(rng, n, places, turning=turning, state=str(rng.choice(states))),
    ]
    stiffness = sum(part["loading_N"][1] for part in of["parts"]) if curved else of["stiffness_N"]
    pull = float(stiffness * rng.uniform(0.6e-3, 1.4e-3))
    stringing = cases.rule("pull", pull)
    if rng.random() < 0.3:
        stringing |= {"method": "over_sheaves", "clip": str(rng.choice(["plumb", "lies"]))}
    found = cases.problem(supports, stringing, of=of, conditions=conditions)
    if turning:
        found["route"] = "turning"
    if curved:
        found["history"] = {"met": [True, False], "creep_condition": None}
    return found


def drawn_places(rng, n, turning):
    """Supports in plan: on a straight route a little aside of it, else turned by up to 30 deg at each."""
    lengths, heading, at = rng.uniform(120.0, 300.0, n), float(rng.uniform(-math.pi, math.pi)), np.zeros(2)
    if not turning:
        stations = np.concatenate([[0.0], np.cumsum(lengths)])
        return [(float(x), float(rng.choice([0.0, rng.normal(0.0, 0.5)]))) for x in stations]
    places = [(0.0, 0.0)]
    for length in lengths:
        at = at + length * np.array([math.cos(heading), math.sin(heading)])
        places.append((float(at[0]), float(at[1])))
        heading += float(rng.uniform(-0.5, 0.5))
    return places


def drawn_support(rng, kind, place):
    elevation, link = float(rng.normal(30.0, 1.5)), float(rng.uniform(0.8, 3.0))
    where = {"offset_m": place[1]}
    soft = {f"stiffness_{way}_N_per_m": float(10.0 ** rng.uniform(4.7, 7.0)) for way in ("along", "across")}
    string = {"hanger_wind_area_m2": float(rng.choice([0.0, 0.4]))}
    weight = float(rng.uniform(200, 900))
    if kind == "post":
        return cases.support(place[0], elevation, "post", **soft, **where)
    if kind == "spring":
        return cases.support(place[0], elevation, stiffness_vertical_N_per_m=2e6, **soft, **where)
    if kind == "hanger":
        return cases.hanger(place[0], elevation, link, weight, **string, **where)
    if kind == "vee":
        spread = {"hanger_spread_m": float(rng.uniform(0.6, 1.6)) * link}
        return cases.hanger(place[0], elevation, link, weight, **spread, **string, **where)
    if kind == "sheave":
        return cases.support(place[0], elevation, "sheave", **where)
    if kind == "link":
        return cases.support(
            place[0], elevation + link, "sheave", hanger_length_m=link, hanger_weight_N=weight, **string, **where
        )
    return cases.support(place[0], elevation, **where)


def drawn_condition(rng, n, places, *, turning, state):
    reach = sum(math.dist(a, b) for a, b in pairwise(places))
    low, high = sorted(float(x) for x in rng.uniform(0.05, 0.95, 2) * reach)
    span = int(rng.integers(0, n))
    stations = np.concatenate([[0.0], np.cumsum([math.dist(a, b) for a, b in pairwise(places)])])
    if not turning:
        stations = np.array([x for x, _ in places])
    between = float(stations[span] + rng.uniform(0.25, 0.75) * (stations[span + 1] - stations[span]))
    carriage = str(rng.choice(["free", "held"]))
    loads = [
        cases.spread_load((0.0, 0.0, float(-rng.uniform(0, 10))), low, high, frame="route"),
        {**cases.spread_load((0.0, 1.0, -4.0)), "covers": [bool(k % 2) for k in range(n)]},
        cases.point_load(0.37 * reach, (100.0, -200.0, -700.0), frame="route"),
        cases.point_load(between, (0.0, 50.0, -500.0), "station", "route"),
        {**cases.spread_load((1.0, 0.0, -9.0), low, high, frame="route"), "vector_to": (0.0, 2.0, -1.0)},
        {
            **cases.point_load(between, (0.0, 0.0, -900.0), "station", "route"),
            "carriage": carriage,
            "carriage_span": span,
        },
    ]
    wind = {"wind_bearing_rad": float(rng.uniform(0, 2 * math.pi))} if turning else {}
    wind = wind if rng.random() < 0.7 else {"wind_angle_rad": float(rng.uniform(-math.pi, math.pi))}
    return cases.condition(
        state=state,
        temperature_degC=float(rng.uniform(-25, 60)),
        ice_thickness_m=float(rng.choice([0.0, 0.008])),
        ice_share=rng.uniform(0.0, 1.0, n),
        wind_pressure_Pa=float(rng.choice([0.0, 250.0])),
        resultant_addition_N_per_m=float(rng.choice([0.0, 2.0])),
        factor_weight=float(rng.uniform(0.9, 1.2)),
        factor_wind=float(rng.uniform(0.9, 1.3)),
        factor_load=float(rng.uniform(0.8, 1.4)),
        loads=[load for load in loads if rng.random() < 0.35],
        **wind,
    )


def numbers_of(found):
    """Every number of spans and supports, flat; what is not given is left out."""
    rows = [*found["spans"], *(part for span in found["spans"] for part in span["lived"]), *found["supports"]]
    values = [value for row in rows for value in row.values() if value is not None and not isinstance(value, list)]
    return np.hstack(values)


def on_the_supports(problem, found):
    """Sum of the forces of line and hangers on the supports, in the plan's axes."""
    route, total = route_of(problem), np.zeros(3)
    for j, row in enumerate(found["supports"]):
        total += np.array([row["along_N"], row["across_N"], -row["down_N"]]) @ route.axes(j)
    return total


def acting(problem, condition, found):
    """Sum of all that acts, by the definitions, on the natural lengths found; loads stay where they are on the line."""
    row, route = problem["conditions"][condition], route_of(problem)
    ends = np.concatenate([[0.0], np.cumsum([span["natural_length_m"] for span in found["spans"]])])
    total = np.zeros(3)

    def turned(vector, span):
        x, y = route.direction(span)
        return np.array([x * vector[0] - y * vector[1], y * vector[0] + x * vector[1], vector[2]])

    for k in range(len(ends) - 1):
        basic = twin_loads.basic(problem["line"], row, True, k, route.direction(k))
        total += (ends[k + 1] - ends[k]) * turned(basic, k)
    for load in row["loads"]:
        vector = np.asarray(load["vector"])
        if load["is_point"]:
            total += row["factor_load"] * vector
            continue
        first, last = (0.0, ends[-1]) if load["place"] == "whole" else (load["from_m"], load["to_m"])
        for k in range(len(ends) - 1):
            overlap = min(last, ends[k + 1]) - max(first, ends[k])
            if overlap > 0.0 and (load.get("covers") is None or load["covers"][k]):
                mean = vector
                if load.get("vector_to") is not None:
                    middle = 0.5 * (min(last, ends[k + 1]) + max(first, ends[k]))
                    mean = vector + (np.asarray(load["vector_to"]) - vector) * (middle - first) / (last - first)
                total += row["factor_load"] * overlap * (mean if load["frame"] == "route" else turned(mean, k))
    for j, support in enumerate(problem["supports"]):
        if support["hanger_length_m"] > 0.0:
            span = min(j, len(ends) - 2)
            area = support.get("hanger_wind_area_m2", 0.0)
            whole = 2.0 * twin_loads.at_hanger(row, support["hanger_weight_N"], area, route.direction(span))
            total += turned(whole, span)
    return total


@pytest.mark.parametrize("seed", DRAWN)
@pytest.mark.parametrize("condition", [0, 1])
def test_a_mixed_line_settles_and_balances(seed, condition):
    problem = drawn(seed)
    found = _core.Project(problem).settle(condition)
    if found["status"] != "ok":
        assert found["status"] in HONEST, found["status"]
        return
    assert found["gap_relative"] <= 1e-6
    assert not np.isnan(numbers_of(found)).any()
    size = max(span["tension_max_N"] for span in found["spans"])
    assert np.abs(on_the_supports(problem, found) - acting(problem, condition, found)).max() < BALANCE * size
    assert found["sheave_imbalance_N"] <= BALANCE * size


def test_most_of_them_settle():
    """What is drawn is meant to be hung; a few lines are honestly not."""
    outcomes = [_core.Project(drawn(seed)).settle(c)["status"] for seed in DRAWN for c in (0, 1)]
    assert outcomes.count("ok") >= 0.9 * len(outcomes), {name: outcomes.count(name) for name in set(outcomes)}


@pytest.mark.parametrize("seed", TWINNED)
def test_the_twin_finds_the_same(seed):
    problem = drawn(seed)
    found = _core.Project(problem).settle(1)
    if found["status"] != "ok":
        pytest.skip(found["status"])
    twin = Twin(problem)
    expected = twin.states(1)
    size = max(row["tension_max_N"] for row in expected["spans"])
    for mine, theirs in zip(expected["spans"], found["spans"], strict=True):
        for key in ("tension_from_N", "tension_to_N", "tension_max_N", "horizontal_tension_N"):
            assert theirs[key] == pytest.approx(mine[key], rel=0, abs=BALANCE * size), key
        for key in ("natural_length_m", "line_length_m", "sag_m", "blowout_m", "sag_station_m"):
            assert theirs[key] == pytest.approx(mine[key], rel=1e-9, abs=FLAT.get(key, 1e-6)), key
    for key in ("along_N", "across_N", "down_N"):
        mine = [row[key] for row in expected["supports"]]
        theirs = [row[key] for row in found["supports"]]
        np.testing.assert_allclose(theirs, mine, rtol=0, atol=BALANCE * size, err_msg=key)


def clamped_as_found(problem, found):
    """The same line with sheaves turned into clamps, on the natural lengths that it has run to."""
    held = with_loads_by_length(problem, found)
    for row in held["supports"]:
        if row["hold"] == "sheave":
            row["hold"] = "hanger" if row["hanger_length_m"] > 0.0 else "anchor"
    return held


def runs(seed):
    return any(row["hold"] == "sheave" for row in drawn(seed)["supports"])


@pytest.mark.parametrize("seed", [seed for seed in DRAWN if runs(seed)])
def test_a_line_on_sheaves_hangs_as_if_clamped_where_it_ran(seed):
    """Once run, a sheave is a clamp that happens to see equal tensions: the solver for clamped lines agrees."""
    problem = drawn(seed)
    found = _core.Project(problem).settle(0)
    if found["status"] != "ok":
        pytest.skip(found["status"])
    held = _core.Project(clamped_as_found(problem, found)).settle(0)
    assert held["status"] == "ok"
    size = max(span["tension_max_N"] for span in found["spans"])
    for key in ("tension_from_N", "tension_to_N", "horizontal_tension_N"):
        assert [s[key] for s in held["spans"]] == pytest.approx([s[key] for s in found["spans"]], abs=BALANCE * size)
    for key in ("along_N", "across_N", "down_N"):
        expected = [row[key] for row in found["supports"]]
        assert [row[key] for row in held["supports"]] == pytest.approx(expected, abs=BALANCE * size)


def with_loads_by_length(problem, found):
    """Condition 0 alone, on the natural lengths found, its point loads where they were found; nothing to be strung."""
    held = copy.deepcopy(problem)
    held["stringing"] = cases.lengths_rule(*(span["natural_length_m"] for span in found["spans"]))
    held["conditions"] = held["conditions"][:1]
    held.pop("history", None)
    for load, mark in zip(held["conditions"][0]["loads"], found["loads"], strict=True):
        if load["is_point"]:
            load |= {"place": "length", "from_m": mark["at_length_m"], "carriage": "none"}
            load.pop("carriage_span", None)
    return held


def mirrored(problem):
    """Seen in a mirror along x: left is right, and north is south."""
    other = copy.deepcopy(problem)
    for support in other["supports"]:
        support["offset_m"] *= -1.0
    (row,) = other["conditions"]
    row["wind_angle_rad"] *= -1.0
    if row.get("wind_bearing_rad") is not None:
        row["wind_bearing_rad"] = math.pi - row["wind_bearing_rad"]
    for load in row["loads"]:
        for key in ("vector", "vector_to"):
            if load.get(key) is not None:
                load[key] = (load[key][0], -load[key][1], load[key][2])
    return other


def swapped(problem):
    """From the other end, the plan turned by half a turn: every direction along the route is what it was."""
    other = copy.deepcopy(problem)
    other["supports"].reverse()
    for support in other["supports"]:
        support["station_m"], support["offset_m"] = -support["station_m"], -support["offset_m"]
    other["stringing"]["lengths_m"].reverse()
    total = sum(other["stringing"]["lengths_m"])
    (row,) = other["conditions"]
    row["ice_share"] = row["ice_share"][::-1].copy()
    row["wind_angle_rad"] += math.pi
    if row.get("wind_bearing_rad") is not None:
        row["wind_bearing_rad"] = (row["wind_bearing_rad"] + math.pi) % (2.0 * math.pi)
    for load in row["loads"]:
        ends = load.get("vector"), load.get("vector_to")
        first, last = ends if ends[1] is None else ends[::-1]
        load["vector"] = (-first[0], -first[1], first[2])
        if last is not None:
            load["vector_to"] = (-last[0], -last[1], last[2])
        if load.get("covers") is not None:
            load["covers"] = load["covers"][::-1]
        if load["place"] == "length":
            low, high = load["from_m"], load["to_m"]
            load["from_m"] = total - (low if high is None else high)
            load["to_m"] = None if high is None else total - low
    return other


def told_again(seed, how):
    """A drawn line, by natural lengths, and the same told in another way, both settled."""
    problem = drawn(seed)
    found = _core.Project(problem).settle(0)
    if found["status"] != "ok":
        pytest.skip(found["status"])
    held = with_loads_by_length(problem, found)
    if how is swapped and held["conditions"][0].get("wind_bearing_rad") is None:
        for support in held["supports"]:  # a string under a wind told by its angle looks at the span ahead
            support["hanger_wind_area_m2"] = 0.0
    pair = [_core.Project(each).settle(0) for each in (held, how(held))]
    assert [one["status"] for one in pair] == ["ok", "ok"]
    return pair


@pytest.mark.parametrize("seed", DRAWN[::2])
def test_mirror(seed):
    here, there = told_again(seed, mirrored)
    size = max(span["tension_max_N"] for span in here["spans"])
    for key in ("tension_from_N", "tension_to_N"):
        assert [s[key] for s in there["spans"]] == pytest.approx([s[key] for s in here["spans"]], abs=BALANCE * size)
    for key, sign in (("along_N", 1.0), ("across_N", -1.0), ("down_N", 1.0)):
        expected = [sign * row[key] for row in here["supports"]]
        assert [row[key] for row in there["supports"]] == pytest.approx(expected, abs=BALANCE * size), key


@pytest.mark.parametrize("seed", DRAWN[1::2])
def test_swapped_ends(seed):
    here, there = told_again(seed, swapped)
    size = max(span["tension_max_N"] for span in here["spans"])
    for key, other in (("tension_from_N", "tension_to_N"), ("tension_to_N", "tension_from_N"), ("sag_m", "sag_m")):
        expected = [row[key] for row in reversed(here["spans"])]
        assert [row[other] for row in there["spans"]] == pytest.approx(expected, abs=BALANCE * size), key
    for key, sign in (("along_N", -1.0), ("across_N", -1.0), ("down_N", 1.0)):
        expected = [sign * row[key] for row in reversed(here["supports"])]
        assert [row[key] for row in there["supports"]] == pytest.approx(expected, abs=BALANCE * size), key
