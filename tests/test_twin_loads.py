"""Loads of every kind: the core against its slow twin, and relations that need no other program."""

from __future__ import annotations

import copy
import math

import core_cases as cases
import numpy as np
import pytest

from tautwise import _core
from tautwise.reference import run
from tautwise.reference.project import Twin
from tautwise.reference.span import Material

# As in test_twin: closing errors of 1e-13 leave 1e-9 of forces and places. Places of an extreme are flat.
FLAT = {"sag_station_m": 1e-5, "low_station_m": 1e-5}
DRAWN = range(10)


def drawn(seed, carriage=None):
    """Two to four spans of any hold: shares of ice, factors, a bearing, wind on strings, ramps, loads on some spans."""
    rng = np.random.default_rng([seed, 77])
    n = int(rng.integers(2, 5))
    stations = np.concatenate([[0.0], np.cumsum(rng.uniform(120.0, 350.0, n))])
    supports = [hold(rng, float(x), end=j in (0, n)) for j, x in enumerate(stations)]
    of = cases.line(float(rng.uniform(5, 20)), float(10.0 ** rng.uniform(6.8, 7.5)), strength=120e3)
    return cases.problem(
        supports,
        cases.rule("pull", float(10.0 ** rng.uniform(3.9, 4.4))),
        of=of,
        conditions=[loaded(rng, stations, carriage)],
    )


def hold(rng, station, *, end):
    offset = {"offset_m": float(rng.choice([0.0, rng.normal(0.0, 0.3)]))}
    elevation = float(rng.normal(30.0, 0.8))
    kind = rng.choice(["anchor", "post"] if end else ["anchor", "hanger", "hanger", "post"])
    if kind == "hanger":
        length, weight = float(rng.uniform(0.5, 3.0)), float(rng.uniform(100, 900))
        return cases.hanger(
            station, elevation, length, weight, hanger_wind_area_m2=float(rng.uniform(0, 0.8)), **offset
        )
    if kind == "post":
        return cases.post(station, elevation, *(float(10.0**power) for power in rng.uniform(4.5, 7.0, 2)), **offset)
    return cases.support(station, elevation, **offset)


def ramp(first, last, low, high, place="station"):
    return {**cases.spread_load(first, low, high, place), "vector_to": tuple(last)}


def loaded(rng, stations, carriage):
    n = len(stations) - 1
    low, high = np.sort(rng.uniform(stations[0] + 5.0, stations[-1] - 5.0, 2))
    loads = [
        ramp((0.0, 0.0, float(-rng.uniform(0, 30))), (0.0, 0.0, float(rng.uniform(-30, 10))), float(low), float(high)),
        ramp((0.0, 2.0, 1.0), (float(rng.normal(0, 1)), -1.0, -5.0), 1.0, float(stations[-1]) * 0.9, "length"),
        {**cases.spread_load((0.0, 0.0, -6.0)), "covers": [bool(k % 2) for k in range(n)]},
        cases.point_load(float(rng.uniform(10, stations[-1] - 10)), tuple(rng.normal(0, 500, 3)), "station", "route"),
    ]
    loads = [load for load in loads if rng.random() < 0.6]
    if carriage:
        span = int(rng.integers(0, n))
        at = float(stations[span] + rng.uniform(0.25, 0.75) * (stations[span + 1] - stations[span]))
        loads.append(
            {**cases.point_load(at, (0.0, 0.0, -1500.0), "station"), "carriage": carriage, "carriage_span": span}
        )
    factors = {f"factor_{key}": float(rng.uniform(0.8, 1.6)) for key in ("weight", "ice", "wind", "load")}
    return cases.condition(
        temperature_degC=float(rng.uniform(-30, 80)),
        ice_thickness_m=0.012,
        ice_share=rng.uniform(0.0, 1.0, n),
        wind_pressure_Pa=None,
        wind_speed_m_per_s=25.0,
        wind_altitude_m=float(rng.uniform(0, 3000)),
        wind_bearing_rad=float(rng.uniform(0, 2 * math.pi)),
        resultant_addition_N_per_m=float(rng.choice([0.0, 3.0])),
        loads=loads,
        **factors,
    )


def agree(problem, place=1e-8):
    found = _core.Project(problem).settle(0)
    twin = Twin(problem)
    settled, expected = twin.settle(0), twin.states(0)
    assert found["status"] == "ok"
    for mine, theirs in zip(expected["spans"], found["spans"], strict=True):
        for key, value in mine.items():
            assert theirs[key] == pytest.approx(value, rel=1e-9, abs=FLAT.get(key, place)), key
    size = max(row["tension_max_N"] for row in expected["spans"])
    for key in ("along_N", "across_N", "down_N"):
        mine = [row[key] for row in expected["supports"]]
        np.testing.assert_allclose([row[key] for row in found["supports"]], mine, rtol=0, atol=1e-9 * size, err_msg=key)
    np.testing.assert_allclose([row["position_m"] for row in found["supports"]], settled.clamps, rtol=0, atol=place)
    assert abs(found["gap_relative"]) < 1e-6
    return found


@pytest.mark.parametrize("seed", DRAWN)
def test_settled_sections_agree(seed):
    agree(drawn(seed))


@pytest.mark.parametrize("carriage", ["free", "held"])
@pytest.mark.parametrize("seed", DRAWN[:4])
def test_a_carriage_stands_where_the_twin_finds_it(seed, carriage):
    """The place of a free one follows the tensions' difference, which is known to 1e-11 of them or so."""
    found = agree(drawn(seed, carriage), place=1e-6)
    mark = found["loads"][-1]
    if carriage == "held":
        station = drawn(seed, carriage)["conditions"][0]["loads"][-1]["from_m"]
        assert mark["position_m"][0] == pytest.approx(station, abs=1e-9)
    else:
        assert mark["tension_beyond_N"] == pytest.approx(mark["tension_N"], rel=1e-9)


def run_load(size, **other):
    return {**cases.spread_load((0.0, 0.0, -size)), "is_run": True, **other}


@pytest.mark.parametrize(
    ("rise", "length", "across", "near"),
    [(0.0, 101.0, 0.0, 1e-9), (30.0, 108.0, 4.0, 1e-9), (-45.0, 125.0, 0.0, 1e-8)],
)
def test_a_load_per_run_against_its_differential_equation(rise, length, across, near):
    """64 pieces with the load's ends and total right miss its curvature: (angle turned)^2 / (50 64^4), 3e-9 at most."""
    load = run_load(40.0, frame="route")
    wind = cases.spread_load((0.0, across, 0.0), frame="route")
    problem = cases.problem(
        cases.span(100.0, rise),
        cases.lengths_rule(length),
        of=cases.line(8.0, 5e6),
        conditions=[cases.condition(loads=[load, wind])],
    )
    found = _core.Project(problem).settle(0)
    assert found["status"] == "ok"
    down = np.array([0.0, 0.0, -1.0])
    first = [-found["supports"][0][key] for key in ("along_N", "across_N")] + [found["supports"][0]["down_N"]]
    first = np.array([-first[0], -first[1], -first[2]])
    states = run.settle(
        Material(5e6), 8.0 * down + [0.0, across, 0.0], 40.0 * down, length, np.array([100.0, 0.0, rise]), first * 1.01
    )
    tensions = np.linalg.norm(states[:, 3:], axis=1)
    span = found["spans"][0]
    assert span["tension_from_N"] == pytest.approx(tensions[0], rel=near)
    assert span["tension_to_N"] == pytest.approx(tensions[-1], rel=near)
    assert span["horizontal_tension_N"] == pytest.approx(states[0, 3], rel=near)


GROUND = [(-5.0, 3.0), (60.0, 15.0), (130.0, 9.0), (210.0, 16.0), (300.0, 12.0), (420.0, 14.0), (2005.0, 8.0)]


@pytest.mark.parametrize("seed", DRAWN[:6])
def test_limits_agree_under_growing_loads(seed):
    """Golden section leaves 1e-8 of a sample's step, squared; values near 0 are forces of 1e4 N."""
    problem = drawn(seed)
    end = problem["supports"][-1]["station_m"]
    problem["ground"] = cases.profile([point for point in GROUND if point[0] < end] + [(end + 5.0, 8.0)])
    problem["crossings"] = [{"from_m": 90.0, "to_m": 105.0, "top_m": 12.0}]
    kinds = [
        cases.limit("clearance", least=5.0),
        cases.limit("clearance", least=5.0, crossing=0),
        cases.limit("sag", most=9.0),
        cases.limit("slope", most=0.25),
        cases.limit("tension", most=30e3),
        cases.limit("swing", most=0.5),
    ]
    problem["limits"] = [cases.complete(each, 1, len(problem["supports"])) for each in kinds]
    found, expected = _core.Project(problem).judge(), Twin(problem).judge()
    rows = [row for row in found if row["value"] is not None]
    assert {(row["limit"], row["condition"]) for row in rows} == set(expected)
    for row in rows:
        assert row["value"] == pytest.approx(expected[row["limit"], 0].value, rel=1e-8, abs=1e-6), row


# --- relations


def settled(problem):
    found = _core.Project(problem).settle(0)
    assert found["status"] == "ok"
    return found


def test_a_pattern_is_loads_on_some_spans():
    """Ice shed from every second span, or ice as a load on the others: without wind the diameter does not matter."""
    supports = [
        cases.support(0.0, 30.0),
        cases.hanger(200.0, 31.0),
        cases.hanger(420.0, 30.0),
        cases.support(650.0, 32.0),
    ]
    ice = math.pi * 0.01 * (0.01 + 0.02814) * 900.0 * 9.80665
    shed = cases.condition(ice_thickness_m=0.01, ice_density_kg_per_m3=900.0, ice_share=[1.0, 0.0, 1.0])
    load = {**cases.spread_load((0.0, 0.0, -ice)), "covers": [True, False, True]}
    made = [
        cases.problem(supports, cases.rule("pull", 15e3), of=cases.line(15.97, diameter=0.02814), conditions=[one])
        for one in (shed, cases.condition(loads=[load]))
    ]
    a, b = (settled(one) for one in made)
    for mine, theirs in zip(a["spans"], b["spans"], strict=True):
        assert numbers(mine) == pytest.approx(numbers(theirs), rel=1e-11)


def numbers(span):
    """A span's state without what its history has left, which is none here."""
    return {key: value for key, value in span.items() if key != "lived"}


def by_length(problem, lengths):
    """Strung to lengths, all places along the natural line: nothing of it depends on the weight as strung."""
    made = copy.deepcopy(problem)
    made["stringing"] = cases.lengths_rule(*lengths)
    for load in made["conditions"][0]["loads"]:
        load["place"] = "length" if load["place"] == "station" else load["place"]
    return made


def unfactored(problem):
    """The actions multiplied by hand."""
    made = copy.deepcopy(problem)
    row = made["conditions"][0]
    weight, load_factor = row.pop("factor_weight"), row.pop("factor_load")
    row["wind_speed_m_per_s"] *= math.sqrt(row.pop("factor_wind"))
    row["ice_density_kg_per_m3"] *= row.pop("factor_ice")
    made["line"]["weight_N_per_m"] *= weight
    for support in made["supports"]:
        support["hanger_weight_N"] *= weight
    for load in row["loads"]:
        load |= {key: tuple(load_factor * part for part in load[key]) for key in ("vector", "vector_to") if key in load}
    return made


def test_a_factor_is_the_load_so_many_times():
    heavy = by_length(drawn(3), Twin(drawn(3)).lengths_m())
    for mine, theirs in zip(settled(heavy)["spans"], settled(unfactored(heavy))["spans"], strict=True):
        assert numbers(mine) == pytest.approx(numbers(theirs), rel=1e-10, abs=1e-8)


def test_a_bearing_is_an_angle_from_the_span():
    """A span that runs north-east, wind from the west: 45 degrees from its direction, to the right."""
    supports = [cases.support(0.0, 30.0), cases.support(200.0, 30.0, offset_m=200.0)]
    made = []
    for wind in ({"wind_bearing_rad": math.radians(270.0)}, {"wind_angle_rad": math.radians(-45.0)}):
        condition = cases.condition(wind_pressure_Pa=500.0, **wind)
        made.append(settled(cases.problem(supports, cases.rule("pull", 15e3), conditions=[condition])))
    assert numbers(made[0]["spans"][0]) == pytest.approx(numbers(made[1]["spans"][0]), rel=1e-12)
    assert (
        sum(row["across_N"] for row in made[0]["supports"]) < 0.0 < sum(row["along_N"] for row in made[0]["supports"])
    )


def test_the_bracket_of_a_growing_load_closes_with_the_fourth_power_of_the_mesh():
    """As under a uniform load: what a mesh misses of a linear load would show as a lower power."""
    load = ramp((0.0, 0.0, -2.0), (0.0, 0.0, -30.0), 0.0, 300.8, "length")
    problem = cases.problem(cases.span(300.0), cases.lengths_rule(300.8), conditions=[cases.condition(loads=[load])])
    core = _core.Project(problem)
    gaps = [core.settle(0, elements_per_span=n, gap_relative=0.1)["gap_relative"] for n in (8, 16, 32)]
    assert min(gaps) > 0.0
    np.testing.assert_allclose([gaps[0] / gaps[1], gaps[1] / gaps[2]], 16.0, rtol=0.02)


def test_a_ramp_split_in_two_is_the_same_ramp():
    whole = ramp((0.0, 0.0, -4.0), (0.0, 0.0, -28.0), 20.0, 140.0, "length")
    halves = [
        ramp((0.0, 0.0, -4.0), (0.0, 0.0, -14.0), 20.0, 70.0, "length"),
        ramp((0.0, 0.0, -14.0), (0.0, 0.0, -28.0), 70.0, 140.0, "length"),
    ]
    made = [
        settled(
            cases.problem(cases.span(200.0, 12.0), cases.rule("pull", 9e3), conditions=[cases.condition(loads=loads)])
        )
        for loads in ([whole], halves)
    ]
    assert numbers(made[0]["spans"][0]) == pytest.approx(numbers(made[1]["spans"][0]), rel=1e-11)


def mirrored(problem):
    """Seen from behind: stations run the other way."""
    other = copy.deepcopy(problem)
    end = problem["supports"][-1]["station_m"]
    other["supports"] = other["supports"][::-1]
    for support in other["supports"]:
        support["station_m"] = end - support["station_m"]
    for load in other["conditions"][0]["loads"]:
        if load.get("carriage"):
            load["carriage_span"] = len(problem["supports"]) - 2 - load["carriage_span"]
        if load["from_m"] is not None:
            ends = [end - x for x in (load["from_m"], load["to_m"]) if x is not None][::-1]
            load["from_m"], load["to_m"] = ends[0], ends[1] if len(ends) == 2 else None
        if "vector_to" in load:
            load["vector"], load["vector_to"] = load["vector_to"], load["vector"]
    return other


@pytest.mark.parametrize("carriage", ["free", "held"])
def test_the_mirror_of_a_loaded_line(carriage):
    supports = [cases.support(0.0, 30.0), cases.hanger(200.0, 33.0), cases.support(420.0, 30.0)]
    loads = [
        ramp((0.0, 0.0, -4.0), (0.0, 0.0, -28.0), 120.0, 300.0),
        run_load(10.0),
        {**cases.point_load(270.0, (0.0, 0.0, -2000.0), "station"), "carriage": carriage, "carriage_span": 1},
    ]
    problem = cases.problem(supports, cases.rule("pull", 15e3), conditions=[cases.condition(loads=loads)])
    ahead, behind = settled(problem), settled(mirrored(problem))
    for mine, theirs in zip(ahead["spans"], behind["spans"][::-1], strict=True):
        for key in ("tension_max_N", "sag_m", "line_length_m", "natural_length_m"):
            assert mine[key] == pytest.approx(theirs[key], rel=1e-9)
        assert mine["tension_from_N"] == pytest.approx(theirs["tension_to_N"], rel=1e-9)
    places = [row["loads"][2]["position_m"] for row in (ahead, behind)]
    assert places[0][0] == pytest.approx(420.0 - places[1][0], abs=1e-6)
    assert places[0][2] == pytest.approx(places[1][2], abs=1e-8)


def test_a_free_carriage_is_at_the_lowest_energy():
    """No place of the same force on the line gives a lower energy: the carriage gains nothing by moving."""
    load = {**cases.point_load(150.0, (0.0, 0.0, -3000.0), "station"), "carriage": "free", "carriage_span": 0}
    problem = cases.problem(
        cases.span(300.0, 60.0), cases.rule("pull", 9e3), conditions=[cases.condition(loads=[load])]
    )
    found = settled(problem)
    rest = found["loads"][0]["at_length_m"]
    energies = []
    for aside in (-1.0, -0.1, 0.1, 1.0):
        fixed = copy.deepcopy(problem)
        fixed["conditions"][0]["loads"] = [cases.point_load(rest + aside, (0.0, 0.0, -3000.0))]
        energies.append(settled(fixed)["energy_lower_J"])
    assert min(energies) > found["energy_lower_J"]
    # The energy is a parabola there: ten times the way, a hundred times the rise.
    rises = np.array(energies) - found["energy_lower_J"]
    assert rises[0] / rises[1] == pytest.approx(100.0, rel=0.05)


def test_a_steep_line_s_carriage_rolls_down_to_its_support():
    """A taut line at 45 degrees has no place of equal tensions: the carriage stands at the lower support."""
    load = {**cases.point_load(50.0, (0.0, 0.0, -500.0), "station"), "carriage": "free", "carriage_span": 0}
    problem = cases.problem(
        cases.span(100.0, -100.0), cases.rule("pull", 60e3), conditions=[cases.condition(loads=[load])]
    )
    found = settled(problem)
    assert found["loads"][0]["position_m"] == pytest.approx((100.0, 0.0, -100.0), abs=1e-9)
    bare = settled(cases.problem(cases.span(100.0, -100.0), cases.rule("pull", 60e3)))
    assert found["supports"][1]["down_N"] == pytest.approx(bare["supports"][1]["down_N"] + 500.0, rel=1e-9)


def test_a_window_with_a_carriage_ends_where_the_twin_says():
    load = {**cases.point_load(150.0, (0.0, 0.0, -2500.0), "station"), "carriage": "free", "carriage_span": 0}
    problem = cases.problem(
        cases.span(300.0, 25.0),
        cases.rule("none", None),
        of=cases.line(12.0, 20e6, strength=80e3),
        conditions=[cases.condition(loads=[load, run_load(5.0)])],
        limits=[cases.limit("tension", most=40e3), cases.limit("sag", most=14.0)],
    )
    ((low, high),) = _core.Project(problem).window()["intervals"]
    for pull, limit in ((low, 1), (high, 0)):
        rows = _core.Project(problem).judge(pull=pull)
        assert rows[limit]["utilisation"] == pytest.approx(1.0, abs=1e-7)
