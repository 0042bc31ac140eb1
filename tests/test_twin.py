"""The core against its slow twin, which shares no code with it: multi-span lines, loads, limits, windows."""

from __future__ import annotations

import math

import core_cases as cases
import numpy as np
import pytest

from tautwise import _core
from tautwise.reference import energy, states, window
from tautwise.reference.project import Twin
from tautwise.reference.span import Material

# Both stop at closing errors of 1e-13 of the span; a tension follows the length by up to EA/T (about 1e4 here), so
# 1e-9 of forces and places is what two right answers may differ by. The places of an extreme are flat: 1e-5 m.
FLAT = {"sag_station_m": 1e-5, "low_station_m": 1e-5}
DRAWN = range(12)


def drawn(seed):
    """A section of one to five spans with any hold, under two conditions with ice, wind, partial and point loads."""
    rng = np.random.default_rng(seed)
    n = int(rng.integers(1, 6))
    stations = np.concatenate([[0.0], np.cumsum(rng.uniform(120.0, 350.0, n))])
    supports = [hold(rng, float(x), end=j in (0, n)) for j, x in enumerate(stations)]
    conditions = [loaded(rng, stations) for _ in range(2)]
    pull = float(10.0 ** rng.uniform(3.7, 4.5))
    of = cases.line(float(rng.uniform(5, 20)), float(10.0 ** rng.uniform(6.7, 7.6)), strength=120e3)
    return cases.problem(supports, cases.rule("pull", pull), of=of, conditions=conditions)


def hold(rng, station, *, end):
    place = {"offset_m": float(rng.choice([0.0, rng.normal(0.0, 0.3)]))}
    elevation = float(rng.normal(30.0, 0.8))
    kind = rng.choice(["anchor", "post"] if end else ["anchor", "hanger", "hanger", "post"])
    if kind == "hanger":
        return cases.hanger(station, elevation, float(rng.uniform(0.5, 3.0)), float(rng.uniform(100, 900)), **place)
    if kind == "post":
        along, across = 10.0 ** rng.uniform(4.5, 7.0, 2)
        return cases.post(station, elevation, float(along), float(across), **place)
    return cases.support(station, elevation, **place)


def loaded(rng, stations):
    low, high = np.sort(rng.uniform(stations[0] + 5.0, stations[-1] - 5.0, 2))
    loads = [
        cases.spread_load((0.0, 0.0, float(-rng.uniform(0, 20))), float(low), float(high), place="station"),
        cases.point_load(float(rng.uniform(10, stations[-1] - 10)), tuple(rng.normal(0, 800, 3)), "station", "route"),
        cases.spread_load((0.0, float(rng.normal(0, 2)), float(-rng.uniform(0, 3)))),
        cases.point_load(float(rng.uniform(1.0, stations[-1])), (0.0, 0.0, -600.0)),
    ]
    return cases.condition(
        temperature_degC=float(rng.uniform(-30, 80)),
        ice_thickness_m=float(rng.choice([0.0, 0.012])),
        wind_pressure_Pa=float(rng.choice([0.0, 500.0])),
        wind_angle_rad=float(rng.uniform(-math.pi, math.pi)),
        resultant_addition_N_per_m=float(rng.choice([0.0, 3.0])),
        loads=[load for load in loads if rng.random() < 0.5],
    )


def same(found, expected, key):
    if isinstance(expected, float) and math.isnan(expected):
        assert found is None, key
    else:
        assert found == pytest.approx(expected, rel=1e-9, abs=FLAT.get(key, 1e-8)), key


def forces(rows):
    return {key: np.array([row[key] for row in rows], dtype=float) for key in ("along_N", "across_N", "down_N")}


@pytest.mark.parametrize("seed", DRAWN)
@pytest.mark.parametrize("condition", [0, 1])
def test_settled_sections_agree(seed, condition):
    problem = drawn(seed)
    found = _core.Project(problem).settle(condition)
    twin = Twin(problem)
    settled = twin.settle(condition)
    expected = twin.states(condition)
    assert found["status"] == "ok"
    for mine, theirs in zip(expected["spans"], found["spans"], strict=True):
        for key, value in mine.items():
            same(theirs[key], value, key)
    size = max(row["tension_max_N"] for row in expected["spans"])
    for key, value in forces(expected["supports"]).items():
        np.testing.assert_allclose(forces(found["supports"])[key], value, rtol=0, atol=1e-9 * size, err_msg=key)
    places = np.array([row["position_m"] for row in found["supports"]])
    np.testing.assert_allclose(places, settled.clamps, rtol=0, atol=1e-8)
    lower = from_first_support(settled)
    assert found["energy_lower_J"] == pytest.approx(lower, rel=1e-9, abs=1e-6)
    assert found["energy_J"] >= lower - 1e-9 * abs(lower)


def from_first_support(settled):
    """D with the loads' work counted from the first support, as the core counts it."""
    total = sum((states.total_load(span) for span in settled.spans), settled.section.clamp_loads.sum(axis=0))
    return settled.lower_bound_J() + float(total @ settled.section.supports[0].place)


@pytest.mark.parametrize("seed", DRAWN[:6])
def test_the_twin_is_in_equilibrium(seed):
    """Potential energy of its shape = its complementary energy: only the true shape has both (weak duality)."""
    settled = Twin(drawn(seed)).settle(0)
    scale = sum(span.stored_J() for span in settled.spans) + abs(settled.potential_J())
    assert abs(settled.potential_J() - settled.lower_bound_J()) < 1e-11 * scale


@pytest.mark.parametrize("seed", DRAWN[:4])
def test_the_core_s_shape_has_the_energy_it_claims(seed):
    """Potential energy of the points that `shape` returns, by plain three-node elements, lies just above D.

    Quadratic elements of length h miss the shape's energy by O(h^4): 400 of them a span leave about 1e-9 of it.
    """
    problem = cases.problem(cases.span(250.0, 20.0), cases.rule("pull", 9000.0 + 2000.0 * seed))
    core = _core.Project(problem)
    shape = core.shape(0, 400)
    s, nodes = shape["length_m"], shape["position_m"]
    lengths, loads = s[2::2] - s[:-2:2], np.tile([0.0, 0.0, -15.97], (len(s) // 2, 1))
    above = energy.potential(Material(34.7e6), nodes, lengths, loads, points=4)
    lower = core.settle(0)["energy_lower_J"]
    assert -1e-9 < (above - lower) / abs(lower) < 1e-7


def test_the_bracket_closes_with_the_fourth_power_of_the_mesh():
    """Quadratic elements with two Gauss points miss the energy by h^4: 16 times less at each doubling."""
    core = _core.Project(cases.problem(cases.span(300.0), cases.lengths_rule(300.8)))
    meshes = [core.settle(0, elements_per_span=n, gap_relative=0.1) for n in (8, 16, 32)]
    gaps = np.array([mesh["gap_relative"] for mesh in meshes])
    assert (gaps > 0.0).all()
    np.testing.assert_allclose(gaps[:-1] / gaps[1:], 16.0, rtol=0.01)


RULES = [
    ("pull", 14e3, None),
    ("tension", 15e3, 1),
    ("sag", 6.0, 2),
    ("total_length", 702.5, None),
]


@pytest.mark.parametrize(("name", "value", "index"), RULES)
def test_stringing_rules_agree(name, value, index):
    supports = [cases.post(0.0, 20.0), cases.hanger(200.0, 22.0), cases.support(420.0, 25.0), cases.support(700.0, 18)]
    problem = cases.problem(supports, cases.rule(name, value, index))
    found = _core.Project(problem).string()
    twin = Twin(problem)
    # The rules are solved to rounding; a sag is flat to 1e-12 of itself in the pull, a length to 1e-10.
    assert found["horizontal_tension_N"] == pytest.approx(twin.pull_N(), rel=1e-9)
    np.testing.assert_allclose(found["lengths_m"], twin.lengths_m(twin.pull_N()), rtol=1e-12)


def test_a_route_that_turns_at_hangers():
    """The hangers swing aside until each clamp lies where its own force puts it; strung as well as in service."""
    supports = [
        cases.support(0.0, 30.0),
        cases.hanger(300.0, 30.0, 2.0, 400.0, offset_m=-3.0),
        cases.hanger(450.0, 30.0, 2.0, 400.0, offset_m=-1.0),
        cases.support(600.0, 30.0, offset_m=2.0),
    ]
    problem = cases.problem(supports, cases.rule("pull", 17e3))
    twin = Twin(problem)
    np.testing.assert_allclose(_core.Project(problem).string()["lengths_m"], twin.lengths_m(17e3), rtol=1e-12)
    found = _core.Project(problem).settle(0)
    assert found["status"] == "ok"
    np.testing.assert_allclose([row["position_m"] for row in found["supports"]], twin.settle(0).clamps, atol=1e-8)


def lifted(weight):
    supports = [cases.support(0.0, 30.0), cases.hanger(100.0, weight, 1.0, 0.0), cases.support(200.0, 30.0)]
    return cases.problem(supports, cases.lengths_rule(100.3, 100.3))


@pytest.mark.parametrize("clamp", [27.0, 24.5])
def test_a_hanger_that_the_line_lifts(clamp):
    """The free line passes 100 m at about 25.2 m: one hanger carries, the other's clamp is held up by the line."""
    problem = lifted(clamp)
    settled = Twin(problem).settle(0)
    found = _core.Project(problem).settle(0)
    assert found["status"] == "ok"
    # The twin's slack hanger is good to 1e-9 of the loads over a link of 1 m.
    np.testing.assert_allclose([row["position_m"] for row in found["supports"]], settled.clamps, atol=1e-5)
    assert found["energy_lower_J"] == pytest.approx(from_first_support(settled), rel=1e-8)


# --- limits and windows

GROUND = [(-5.0, 3.0), (60.0, 5.0), (90.0, 9.0), (210.0, 6.0), (300.0, 12.0), (420.0, 2.0), (505.0, 8.0)]


def test_uplift_of_a_lifted_hanger_is_judged_by_its_place():
    """A hanger far below its neighbours: carrying, then slack, then stood on its head; rows from both codes agree."""
    supports = [cases.support(0.0, 60.0), cases.hanger(300.0, 10.0, 1.5, 300.0), cases.support(600.0, 60.0)]
    rules = (cases.limit("uplift", least=0.0), cases.limit("swing", most=1.0))
    problem = cases.problem(supports, cases.rule("pull", 12e3), limits=rules)
    states = []
    for pull in (9e3, 12e3, 14.4e3, 15.4e3, 20e3):
        found, expected = _core.Project(problem).judge(pull=pull), Twin(problem).judge(pull)
        for row in found:
            wanted = expected[row["limit"], row["condition"]].utilisation
            # The twin's slack hanger is good to 1e-9 of the loads over a link of 1.5 m.
            assert row["utilisation"] == pytest.approx(wanted, rel=1e-5, abs=1e-5)
        states.append(found[0]["status"])
    assert states == ["holds", "holds", "holds", "fails", "fails"]


def judged(pull=12e3):
    """Three spans under three conditions, with a limit of every kind."""
    supports = [
        cases.post(0.0, 24.0, capacity_along_N=40e3),
        cases.hanger(200.0, 25.0, capacity_down_N=9e3),
        cases.support(300.0, 22.0, capacity_up_N=5e3, capacity_across_N=4e3),
        cases.support(500.0, 28.0),
    ]
    conditions = [
        cases.condition(temperature_degC=75.0),
        cases.condition(temperature_degC=-20.0),
        cases.condition(
            temperature_degC=-5.0,
            ice_thickness_m=0.012,
            wind_pressure_Pa=400.0,
            resultant_addition_N_per_m=4.4,
            loads=[cases.point_load(120.0, (0.0, 0.0, -500.0), place="station")],
        ),
    ]
    ice_only = [False, False, True]
    limits = [
        cases.limit("clearance", least=5.0),
        cases.limit("clearance", least=6.0, crossing=0, applies=[True, False, True]),
        cases.limit("clearance", least=4.0, from_m=95.0, to_m=180.0),
        cases.limit("tension", share=0.5),
        cases.limit("tension", most=14e3, applies=[False, True, False], covers=[False, True, False, False]),
        cases.limit("support_load", direction="down", share=0.9, covers=[False, True, False, False]),
        cases.limit("support_load", direction="along", most=38e3),
        cases.limit("support_load", direction="across", most=6e3, applies=ice_only),
        cases.limit("support_load", direction="resultant", most=45e3, applies=ice_only),
        cases.limit("uplift", least=0.0, covers=[False, True, True, False]),
        cases.limit("uplift", least=400.0, covers=[False, True, False, False]),
        cases.limit("swing", most=math.radians(60.0)),
        cases.limit("sag", most=9.0, least=0.5),
        cases.limit("catenary_constant", most=1400.0, applies=[False, True, False]),
        cases.limit("slope", most=0.25),
    ]
    of = cases.line(12.0, 20e6, strength=80e3)
    return cases.problem(
        supports,
        cases.rule("pull", pull),
        of=of,
        conditions=conditions,
        limits=limits,
        ground=GROUND,
        crossings=[(380.0, 440.0, 11.0)],
    )


@pytest.mark.parametrize("pull", [7e3, 14e3])
def test_limits_agree(pull):
    found = _core.Project(judged()).judge(pull=pull)
    expected = Twin(judged()).judge(pull)
    assert {(row["limit"], row["condition"]) for row in found if row["value"] is not None} == set(expected)
    for row in found:
        verdict = expected.get((row["limit"], row["condition"]))
        if verdict is not None:
            mine = verdict.value, verdict.allowed, verdict.margin, verdict.utilisation
            theirs = row["value"], row["allowed"], row["margin"], row["utilisation"]
            # Golden section leaves 1e-8 of a sample's step, squared; forces as before. Values near 0: forces of 1e4 N.
            assert theirs == pytest.approx(mine, rel=1e-8, abs=1e-6), row
            assert (row["status"] == "holds") == (verdict.utilisation <= 1.0), row


def narrowed(low=None, high=None):
    """A window of one span between a clearance when hot and a tension when iced."""
    conditions = [
        cases.condition(temperature_degC=75.0),
        cases.condition(temperature_degC=-5.0, ice_thickness_m=0.012, wind_pressure_Pa=400.0),
    ]
    limits = [
        cases.limit("clearance", least=9.0 if low is None else low, applies=[True, False]),
        cases.limit("tension", most=40e3 if high is None else high, applies=[False, True]),
    ]
    return cases.problem(
        cases.span(300.0, 4.0, start=(0.0, 20.0)),
        cases.rule("none", None),
        of=cases.line(12.0, 20e6, strength=80e3),
        conditions=conditions,
        limits=limits,
        ground=[(0.0, 0.0), (100.0, 3.0), (300.0, 1.0)],
    )


@pytest.mark.parametrize("problem", [narrowed(), narrowed(low=7.0, high=45e3)], ids=["plain", "wider"])
def test_windows_agree(problem):
    found = _core.Project(problem).window()
    low, high = found["range_N"]
    expected = window.intervals(Twin(problem).worst, low, high, points=12)
    assert found["open"] == bool(expected)
    # The edges are pulls at which a utilisation is 1 to 1e-8 or better; it changes by about as much as the pull.
    np.testing.assert_allclose(np.array(found["intervals"]), np.array(expected), rtol=1e-7)


def test_the_window_of_three_spans():
    """At each edge that the core names the twin turns from holding to failing; between them it holds."""
    problem = judged()
    problem["limits"] = [problem["limits"][i] for i in (0, 3, 6)]
    ((low, high),) = _core.Project(problem).window()["intervals"]
    worst = Twin(problem).worst
    assert worst(low * (1.0 - 1e-6)) > 1.0 >= worst(low * (1.0 + 1e-6))
    assert worst(high * (1.0 - 1e-6)) <= 1.0 < worst(high * (1.0 + 1e-6))
    assert worst(math.sqrt(low * high)) < 1.0
