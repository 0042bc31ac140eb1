"""Relations that hold for any line: the same problem told another way has the same answer.

Tolerance: inputs told another way are rounded differently by up to 2^-52; forces follow lengths by up to EA/T = 2e3
here, so 2000 * 2.2e-16 * a few = 2e-12 of the largest force is what two right answers may differ by; places 1e-11 m.
Factors that are powers of two change no rounding at all.
"""

from __future__ import annotations

import copy
import math

import core_cases as cases
import numpy as np
import pytest

from tautwise import _core

SAME = 2e-12
STATES = ("natural_length_m", "line_length_m", "horizontal_tension_N", "sag_m", "slant_sag_m", "blowout_m", "slope_max",
          "tension_max_N")  # fmt: skip


def base(along=1.0, across=1.0):
    """Three spans with every hold, ice, wind, heat, a partial load and a point load; told along or across mirrored."""
    supports = [
        cases.post(0.0, 20.0),
        cases.hanger(220.0, 23.0, offset_m=0.25 * across),
        cases.support(500.0, 25.0),
        cases.support(760.0, 18.0),
    ]
    total = sum(LENGTHS)
    spread = [100.0, 260.0] if along > 0 else [total - 260.0, total - 100.0]
    given = cases.condition(
        temperature_degC=40.0,
        ice_thickness_m=0.01,
        ice_density_kg_per_m3=400.0,
        wind_pressure_Pa=500.0,
        wind_angle_rad=across * 1.2,
        resultant_addition_N_per_m=2.0,
        loads=[
            cases.spread_load((0.0, 3.0 * across, -6.0), *spread),
            cases.point_load(600.0 if along > 0 else total - 600.0, (400.0 * along, 300.0 * across, -1500.0)),
        ],
    )
    lengths = LENGTHS
    if along < 0:
        supports = [{**support, "station_m": 760.0 - support["station_m"]} for support in reversed(supports)]
        lengths = LENGTHS[::-1]
    return cases.problem(supports, cases.lengths_rule(*lengths), conditions=[given])


LENGTHS = (220.6, 280.9, 260.8)


def settled(problem):
    found = _core.Project(problem).settle(0)
    assert found["status"] == "ok"
    return found


def forces(found):
    return np.array([[row[key] for key in ("along_N", "across_N", "down_N")] for row in found["supports"]])


def places(found):
    return np.array([row["position_m"] for row in found["supports"]])


def spans(found):
    return np.array([[row[key] for key in STATES] for row in found["spans"]])


@pytest.fixture(scope="module")
def plain():
    return settled(base())


def agree(found, expected, factor=1.0):
    np.testing.assert_allclose(spans(found), spans(expected), rtol=factor * SAME, atol=factor * 1e-11)


def close(found, expected, atol):
    np.testing.assert_allclose(found, expected, rtol=0, atol=atol)


def test_mirrored_across(plain):
    found = settled(base(across=-1.0))
    agree(found, plain)
    close(forces(found) * [1, -1, 1], forces(plain), SAME * 2e4)
    close(places(found) * [1, -1, 1], places(plain), 1e-11)


def test_ends_swapped(plain):
    found = settled(base(along=-1.0))
    np.testing.assert_allclose(spans(found)[::-1, :2], spans(plain)[:, :2], rtol=SAME)
    np.testing.assert_allclose(spans(found)[::-1, 3:], spans(plain)[:, 3:], rtol=SAME, atol=1e-11)
    close(forces(found)[::-1] * [-1, 1, 1], forces(plain), SAME * 2e4)
    close((places(found)[::-1] - [760, 0, 0]) * [-1, 1, 1], places(plain), 1e-11)


def test_shifted(plain):
    """By 1000 m: stations keep 1.1e-13 m, 500 times more than before; heights likewise."""
    moved = base()
    for row in moved["supports"]:
        row["station_m"] += 1024.0
        row["offset_m"] += 512.0
        row["elevation_m"] += 2048.0
    found = settled(moved)
    agree(found, plain, 10.0)
    close(forces(found), forces(plain), 10.0 * SAME * 2e4)
    close(places(found) - [1024, 512, 2048], places(plain), 1e-11)


PLACES = ("station_m", "offset_m", "elevation_m", "from_m", "to_m", "hanger_length_m", "ice_thickness_m", "diameter_m")


def told_in(problem, length, force):
    """The same problem in other units: lengths and forces as multiples."""
    powers = dict.fromkeys(PLACES, length)
    powers |= dict.fromkeys(("weight_N_per_m", "resultant_addition_N_per_m"), force / length)
    powers |= dict.fromkeys(("stiffness_along_N_per_m", "stiffness_across_N_per_m"), force / length)
    powers |= dict.fromkeys(("stiffness_N", "hanger_weight_N"), force)
    powers |= {"wind_pressure_Pa": force / length**2, "ice_density_kg_per_m3": force / length**3}

    def scaled(value):
        if isinstance(value, dict):
            return {key: one(key, item) for key, item in value.items()}
        return [scaled(item) for item in value] if isinstance(value, list) else value

    def one(key, item):
        return scaled(item) if key not in powers or item is None else item * powers[key]

    told = scaled(copy.deepcopy(problem))
    told["stringing"]["lengths_m"] = [each * length for each in problem["stringing"]["lengths_m"]]
    for load in told["conditions"][0]["loads"]:
        load["vector"] = tuple(each * force / (1.0 if load["is_point"] else length) for each in load["vector"])
    return told


@pytest.mark.parametrize(("length", "force"), [(2.0, 1.0), (1.0, 4.0), (1 / 0.3048, 1 / 4.4482216152605)])
def test_other_units(plain, length, force):
    found = settled(told_in(base(), length, force))
    close(forces(found) / force, forces(plain), SAME * 2e4)
    close(places(found) / length, places(plain), 1e-11)
    sags = [[row["sag_m"] for row in each["spans"]] for each in (found, plain)]
    np.testing.assert_allclose(np.array(sags[0]) / length, sags[1], rtol=SAME, atol=1e-11)


@pytest.mark.parametrize("factor", [0.5, 3.0])
def test_a_factor_on_everything_that_pulls(plain, factor):
    """Weight, loads, stiffness and hangers times a factor: the same shape, all forces times the factor."""
    found = settled(told_in(base(), 1.0, factor))
    close(forces(found) / factor, forces(plain), SAME * 2e4)
    close(places(found), places(plain), 1e-11)


def test_split_at_a_free_node(plain):
    """A point load of nothing, and a partial load told in two halves, change nothing."""
    split = base()
    loads = split["conditions"][0]["loads"]
    first, second = copy.deepcopy(loads[0]), copy.deepcopy(loads[0])
    first["to_m"] = second["from_m"] = 177.0
    split["conditions"][0]["loads"] = [first, second, loads[1], cases.point_load(333.0, (0.0, 0.0, 0.0))]
    found = settled(split)
    agree(found, plain)
    close(forces(found), forces(plain), SAME * 2e4)


def test_split_at_an_anchor_on_the_line():
    """An anchor put where the line already passes takes nothing but the line's own balance: both parts hang on."""
    whole = cases.problem(cases.span(300.0, 20.0), cases.lengths_rule(301.5))
    core = _core.Project(whole)
    before = core.settle(0)["spans"][0]
    shape = core.shape(0, 3)
    at = [float(value) for value in shape["position_m"][1]]
    supports = [cases.support(0.0, 0.0), cases.support(at[0], at[2]), cases.support(300.0, 20.0)]
    parts = settled(cases.problem(supports, cases.lengths_rule(100.5, 201.0)))
    pulls = [row["horizontal_tension_N"] for row in parts["spans"]]
    assert shape["length_m"][1] == pytest.approx(100.5, rel=1e-15)
    # The place is rounded to 6e-14 m; over 100 m that is 6e-16 of length, and 1e-12 of the pull.
    assert pulls == pytest.approx([before["horizontal_tension_N"]] * 2, rel=1e-11)
    assert abs(parts["supports"][1]["along_N"]) < 1e-11 * pulls[0]
    assert abs(parts["supports"][1]["down_N"]) < 1e-11 * pulls[0]


def test_one_condition_does_not_touch_another(plain):
    more = base()
    more["conditions"].insert(0, cases.condition(temperature_degC=-30.0))
    found = _core.Project(more).settle(1)
    assert spans(found).tolist() == spans(plain).tolist()


@pytest.mark.parametrize("rise", [0.0, 0.3])
def test_small_deflections(rise):
    """As q L / T goes to 0 the sag tends to q L^2 / (8 T), constant tension, with an error of order (q L / T)^2.

    On an inclined chord the common formula takes the load per metre of plan, q / cos.
    """
    weight, run = 10.0, 100.0
    slant = math.hypot(1.0, rise)
    of = cases.line(weight, 1e14)
    ratios = np.array([0.2, 0.1, 0.05, 0.025])
    errors = []
    for ratio in ratios:
        made = cases.problem(cases.span(run, rise * run), cases.rule("pull", weight * run / ratio), of=of)
        state = settled(made)["spans"][0]
        string = weight * slant * run**2 / (8.0 * weight * run / ratio)
        errors.append(state["sag_m"] / string - 1.0)
        assert state["small_deflection_sag_m"] == pytest.approx(string, rel=ratio**2)
    orders = np.log2(np.array(errors[:-1]) / errors[1:])
    np.testing.assert_allclose(orders, 2.0, atol=0.01)
    assert abs(errors[-1]) < ratios[-1] ** 2 / 40.0
