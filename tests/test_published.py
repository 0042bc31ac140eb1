"""Values that others have published, each with its source beside it; it says where a value is from memory."""

from __future__ import annotations

import math

import core_cases as cases
import numpy as np
import pytest

import tautwise
from tautwise import _core
from tautwise.reference import loads

# Exact definitions (NIST SP 811, appendix B.8).
FOOT, INCH, POUND = 0.3048, 0.0254, 4.4482216152605
PLF, PSI, PSF = POUND / FOOT, POUND / INCH**2, POUND / FOOT**2
ICE_57_PCF = 57.0 * 0.45359237 / FOOT**3


def fahrenheit(value):
    return (value - 32.0) / 1.8


def settled(problem, condition=0):
    found = _core.Project(problem).settle(condition)
    assert found["status"] == "ok", found["status_text"]
    return found


def only_span(problem, condition=0):
    return settled(problem, condition)["spans"][0]


# --- A. California PUC General Order 95, Appendix C and tables 18 and 23

COPPER_0 = cases.line(
    0.3258 * PLF, 17.0e6 * PSI * 0.0829 * INCH**2, diameter=0.368 * INCH, expansion=9.4e-6 * 1.8, strength=3953 * POUND
)


def stretched_by_heat(span, length, grown, of):
    """The convention of A1, F10 and I5: the natural length grows first and then stretches by T/EA on the grown one."""
    return cases.problem(cases.span(span), cases.lengths_rule(length * (1.0 + grown)), of=of)


def copper(condition, heavy=None):
    """Strung so that the iced and windy line at 0 F has 1976.5 lb at its supports: bisection on the length."""
    heavy = heavy or cases.condition(
        temperature_degC=fahrenheit(0),
        ice_thickness_m=0.5 * INCH,
        ice_density_kg_per_m3=ICE_57_PCF,
        wind_pressure_Pa=6 * PSF,
    )
    low, high = 299.0 * FOOT, 301.0 * FOOT
    for _ in range(60):
        middle = 0.5 * (low + high)
        rule = cases.lengths_rule(middle, temperature=fahrenheit(0))
        made = cases.problem(cases.span(300 * FOOT), rule, of=COPPER_0, conditions=[heavy, condition])
        too_tight = only_span(made)["tension_to_N"] > 1976.5 * POUND
        low, high = (middle, high) if too_tight else (low, middle)
    return made


@pytest.fixture(scope="module")
def copper_at_60():
    return copper(cases.condition(temperature_degC=fahrenheit(60)))


def test_a1_sag_of_copper_0(copper_at_60):
    state = only_span(copper_at_60, 1)
    assert state["sag_m"] / FOOT == pytest.approx(5.30, abs=0.05)
    assert state["sag_m"] / FOOT == pytest.approx(5.294, abs=6e-4)
    # 692.26 lb goes with the table's rounded resultant, 1.103 lb/ft; ours is 1.5e-4 more, H three times that less.
    assert state["horizontal_tension_N"] / POUND == pytest.approx(692.26, rel=6e-4)


def test_a1_with_the_rounded_resultant():
    """1.103 lb/ft straight: L0 299.93230 ft, H 692.26 lb, as computed in high precision. our own"""
    spread = [cases.spread_load((0.0, 0.0, -(1.103 - 0.3258) * PLF))]
    heavy = cases.condition(temperature_degC=fahrenheit(0), loads=spread)
    made = copper(cases.condition(temperature_degC=fahrenheit(60)), heavy=heavy)
    assert made["stringing"]["lengths_m"][0] / FOOT == pytest.approx(299.93230, abs=6e-6)
    grown = 9.4e-6 * 60.0
    warm = stretched_by_heat(300 * FOOT, made["stringing"]["lengths_m"][0], grown, COPPER_0)
    assert only_span(warm)["horizontal_tension_N"] / POUND == pytest.approx(692.26, abs=6e-3)


def test_a2_twenty_degrees_warmer():
    state = only_span(copper(cases.condition(temperature_degC=fahrenheit(80))), 1)
    assert state["sag_m"] / FOOT == pytest.approx(5.78, abs=0.04)
    assert state["sag_m"] / FOOT == pytest.approx(5.750, abs=6e-4)


def test_a3_sag_at_35_percent_of_the_span(copper_at_60):
    place = _core.Project(copper_at_60).at(1, np.array([0.35 * 300 * FOOT]))
    share = -place["position_m"][0, 2] / only_span(copper_at_60, 1)["sag_m"]
    assert share * 5.30 == pytest.approx(4.82, abs=0.01)


@pytest.mark.parametrize(("span", "sag"), [(250, 3.68), (200, 2.36)])
def test_a5_sag_goes_with_the_square_of_the_span(copper_at_60, span, sag):
    pull = only_span(copper_at_60, 1)["horizontal_tension_N"]
    made = cases.problem(cases.span(span * FOOT), cases.rule("pull", pull), of=COPPER_0)
    assert only_span(made)["sag_m"] / FOOT == pytest.approx(sag, abs=0.01)


# conductor, d in, w; lb/ft: heavy vertical, horizontal, resultant; light horizontal, resultant
CONDUCTORS = [
    ("Cu 500 kcmil", 0.813, 1.544, 2.3604, 0.9065, 2.528, 0.5420, 1.636),
    ("Cu 0", 0.368, 0.3258, 0.8655, 0.6840, 1.103, 0.2453, 0.408),
    ("ACSR 795 26/7", 1.108, 1.093, 2.0928, 1.0540, 2.343, 0.7387, 1.319),
    ("ACSR 397.5 26/7", 0.783, 0.5464, 1.3442, 0.8915, 1.613, 0.5220, 0.756),
    ("ACSR 266.8 26/7", 0.642, 0.3668, 1.0769, 0.8210, 1.354, 0.4280, 0.564),
    ("ACSR 2/0 6/1", 0.447, 0.1837, 0.7725, 0.7235, 1.058, 0.2980, 0.350),
    ("ACSR 2 6/1", 0.316, 0.0916, 0.5990, 0.6580, 0.890, 0.2107, 0.230),
]


def core_load(of, condition):
    """Load per natural metre, (across, down), as the core applies it: from the forces on both supports."""
    found = settled(cases.problem(cases.span(100.0), cases.lengths_rule(100.0), of=of, conditions=[condition]))
    rows = found["supports"]
    return tuple(sum(row[key] for row in rows) / 100.0 for key in ("across_N", "down_N"))


@pytest.mark.parametrize("row", CONDUCTORS, ids=lambda row: row[0])
def test_a_conductor_loads(row):
    _, diameter, weight, vertical, horizontal, resultant, light, light_resultant = row
    of = cases.line(weight * PLF, diameter=diameter * INCH)
    ice = {"ice_thickness_m": 0.5 * INCH, "ice_density_kg_per_m3": ICE_57_PCF}
    across, down = core_load(of, cases.condition(wind_pressure_Pa=6 * PSF, **ice))
    # "Within one unit of the last digit": four decimals of components, three of resultants.
    assert down / PLF == pytest.approx(vertical, abs=1.01e-4)
    assert across / PLF == pytest.approx(horizontal, abs=1.01e-4)
    assert math.hypot(across, down) / PLF == pytest.approx(resultant, abs=1.01e-3)
    across, down = core_load(of, cases.condition(wind_pressure_Pa=8 * PSF))
    assert across / PLF == pytest.approx(light, abs=1.01e-4)
    assert math.hypot(across, down) / PLF == pytest.approx(light_resultant, abs=1.01e-3)


# --- D. ACSR 795 kcmil 26/7: Grigsby (ed.), Electric Power Generation, Transmission, and Distribution, table 14.5

DRAKE = cases.line(
    1.094 * PLF,
    10.755e6 * PSI * 0.7264 * INCH**2,
    diameter=1.108 * INCH,
    expansion=1.0503e-5 * 1.8,
    strength=31500 * POUND,
)
HEAVY = {
    "temperature_degC": fahrenheit(0),
    "ice_thickness_m": 0.5 * INCH,
    "ice_density_kg_per_m3": ICE_57_PCF,
    "wind_pressure_Pa": 4 * PSF,
    "resultant_addition_N_per_m": 0.30 * PLF,
}
ICED = {"temperature_degC": fahrenheit(32), "ice_thickness_m": 0.5 * INCH, "ice_density_kg_per_m3": ICE_57_PCF}
# condition, sag ft, tension lb
D2 = [
    (HEAVY, 13.61, 11318),
    (ICED, 13.93, 9224),
    (-20, 8.22, 8161),
    (0, 9.19, 7301),
    (30, 10.75, 6242),
    (60, 12.36, 5429),
    (90, 13.96, 4809),
    (120, 15.52, 4330),
    (167, 16.97, 3960),
    (212, 18.04, 3728),
]


def drake_condition(given):
    return cases.condition(**(given if isinstance(given, dict) else {"temperature_degC": fahrenheit(given)}))


def test_d1_loads_and_the_angle_of_blow_out():
    across, down = core_load(DRAKE, cases.condition(**ICED))
    assert down / PLF == pytest.approx(2.094, abs=1e-3)
    across, down = core_load(DRAKE, cases.condition(**HEAVY))
    assert math.hypot(across, down) / PLF == pytest.approx(2.509, abs=1e-3)
    assert math.hypot(across, down) / PLF == pytest.approx(2.50857, abs=6e-6)
    # The constant keeps the direction; the angle is that of the loads without it.
    assert math.degrees(math.atan2(across, down)) == pytest.approx(18.551, abs=6e-4)


@pytest.mark.parametrize(("given", "sag", "tension"), D2)
def test_d2_sag_of_700_ft_at_the_listed_tension(given, sag, tension):
    """Listed: the mean of horizontal and support tension, the sag in the resultant's plane, the load per hung foot."""
    load = np.hypot(*core_load(DRAKE, drake_condition(given)))
    of = cases.line(load, STIFF)
    low, high = 0.9 * tension, 1.1 * tension
    for _ in range(50):
        pull = 0.5 * (low + high)
        state = only_span(cases.problem(cases.span(700 * FOOT), cases.rule("pull", pull * POUND), of=of))
        mean = 0.5 * (state["horizontal_tension_N"] + state["tension_to_N"]) / POUND
        low, high = (pull, high) if mean < tension else (low, pull)
    assert state["sag_m"] / FOOT == pytest.approx(sag, abs=0.01)


@pytest.mark.parametrize(("given", "tension"), [(given, tension) for given, _, tension in D2[:8]])
def test_d5_change_of_state_with_one_composite_modulus(given, tension):
    """From the bare line at 0 F, the whole final column below the knee within 1.5 % (composite E and expansion)."""
    cold = drake_condition(0)
    low, high = 698.0 * FOOT, 701.0 * FOOT
    for _ in range(50):
        length = 0.5 * (low + high)
        rule = cases.lengths_rule(length, temperature=fahrenheit(0))
        made = cases.problem(cases.span(700 * FOOT), rule, of=DRAKE, conditions=[cold, drake_condition(given)])
        state = only_span(made)
        mean = 0.5 * (state["horizontal_tension_N"] + state["tension_to_N"]) / POUND
        low, high = (length, high) if mean > 7301 else (low, length)
    state = only_span(made, 1)
    assert 0.5 * (state["horizontal_tension_N"] + state["tension_to_N"]) / POUND == pytest.approx(tension, rel=0.015)


# --- E. Karnovsky & Lebed, Advanced Methods of Structural Analysis, Springer 2010, ch. 5

STIFF = 1e14  # EA, N: strains of 1e-10 and less, inextensible beside the tolerances
FEATHER = 1e-9  # N/m: the loads are some 1e3 N


def point_problem(length, at, force, weight=FEATHER, stiffness=STIFF):
    of = cases.line(weight, stiffness)
    given = cases.condition(loads=[cases.point_load(at, (0.0, 0.0, -force))])
    return cases.problem(cases.span(100.0), cases.lengths_rule(length), of=of, conditions=[given])


def test_e1_one_load_on_a_weightless_cable():
    """Length 1.2 l, load at 0.4 l of the span: place the load on the natural line where its station comes out so."""
    low, high = 30.0, 80.0
    for _ in range(60):
        at = 0.5 * (low + high)
        found = settled(point_problem(120.0, at, 1000.0))
        low, high = (at, high) if found["loads"][0]["position_m"][0] < 40.0 else (low, at)
    assert found["spans"][0]["horizontal_tension_N"] / 1000.0 == pytest.approx(0.7339, abs=1e-4)
    assert found["spans"][0]["horizontal_tension_N"] / 1000.0 == pytest.approx(0.733892, abs=6e-7)
    assert found["spans"][0]["sag_m"] / 100.0 == pytest.approx(0.327024, abs=6e-7)


def test_e2_one_load_at_mid_span():
    state = only_span(point_problem(101.0, 50.5, 1000.0))
    assert state["sag_m"] / 100.0 == pytest.approx(0.071, rel=2e-3)
    assert state["sag_m"] / 100.0 == pytest.approx(0.070887, abs=6e-7)
    assert state["horizontal_tension_N"] / 1000.0 == pytest.approx(3.53, rel=2e-3)
    assert state["horizontal_tension_N"] / 1000.0 == pytest.approx(3.52673, abs=6e-6)


@pytest.mark.parametrize("beta", [0.1, 0.5, 2.0])
def test_e3_a_central_load_on_a_shallow_cable(beta):
    """H = H_q sqrt(1 + 3 b + 3 b^2), b = P/(q l), equal length to second order: sag/span 0.5 % here."""
    q, length = 10.0, 100.0 * (1.0 + 8.0 / 3.0 * 0.005**2)
    alone = only_span(cases.problem(cases.span(100.0), cases.lengths_rule(length), of=cases.line(q, STIFF)))
    both = only_span(point_problem(length, 0.5 * length, beta * q * 100.0, weight=q))
    ratio = both["horizontal_tension_N"] / alone["horizontal_tension_N"]
    assert ratio == pytest.approx(math.sqrt(1.0 + 3.0 * beta + 3.0 * beta**2), rel=5e-4)


def test_e4_load_along_the_cable():
    state = only_span(cases.problem(cases.span(20.0), cases.rule("pull", 5600.0), of=cases.line(1250.0, STIFF)))
    found = state["sag_m"], state["natural_length_m"], state["tension_max_N"] / 1e3
    assert found == pytest.approx((16.63, 41.27, 26.39), rel=1e-3)
    assert found == pytest.approx((16.6367, 41.272, 26.396), abs=6e-4)


# --- F. Textbooks


@pytest.mark.parametrize("length", [101.0, 110.0, 150.0, 300.0])
def test_the_inextensible_catenary(length):
    """Common practice: 2 c sinh(L / 2c) = l, sag = c (cosh(L / 2c) - 1), T = w (c + sag). Numbers our own."""
    low, high = 1e-9, 50.0  # x with sinh(x)/x = l/L
    for _ in range(200):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if math.sinh(middle) / middle < length / 100.0 else (low, middle)
    c = 50.0 / low
    state = only_span(cases.problem(cases.span(100.0), cases.lengths_rule(length), of=cases.line(40.0, STIFF)))
    sag = c * (math.cosh(low) - 1.0)
    found = state["horizontal_tension_N"], state["sag_m"], state["tension_max_N"]
    assert found == pytest.approx((40.0 * c, sag, 40.0 * (c + sag)), rel=2e-6)


def test_f3_goenen_13_1():
    """Goenen, Electric Power Transmission System Engineering, 2nd ed., example 13.1"""
    weight = 4122.0 / 5280.0
    of = cases.line(weight * PLF, STIFF)
    state = only_span(cases.problem(cases.span(500 * FOOT), cases.rule("pull", 1600 * weight * POUND), of=of))
    found = np.array([state["natural_length_m"] / FOOT, state["sag_m"] / FOOT])
    assert found == pytest.approx([502.037, 19.57], rel=1e-4)
    assert found == pytest.approx([502.03699, 19.571019], rel=3e-8)
    tensions = np.array([state["tension_max_N"], state["horizontal_tension_N"]]) / POUND
    assert tensions == pytest.approx([1264.37, 1249.09], rel=1e-4)
    assert tensions == pytest.approx([1264.3696, 1249.0909], rel=8e-8)


def test_f4_goenen_13_2():
    """The same, example 13.2: its ice is 1.25 t (d + t), ours the annulus by 57 lb/ft3, 0.5 % less"""
    of = cases.line(5399.0 / 5280.0 * PLF, STIFF, diameter=1.093 * INCH)
    ice = cases.condition(ice_thickness_m=0.5 * INCH, ice_density_kg_per_m3=ICE_57_PCF)
    assert (core_load(of, ice)[1] - of["weight_N_per_m"]) / PLF == pytest.approx(0.99049, abs=6e-6)
    book = {**ice, "ice_density_kg_per_m3": ICE_57_PCF * 0.9956 / 0.99049, "wind_pressure_Pa": 4 * PSF}
    across, down = core_load(of, cases.condition(**book))
    found = down / PLF, across / PLF, math.hypot(across, down) / PLF
    assert found == pytest.approx((2.0182, 0.6977, 2.1354), rel=1e-3)
    heavy = cases.line(found[2] * PLF, STIFF)
    state = only_span(cases.problem(cases.span(500 * FOOT), cases.rule("pull", 14250 * POUND), of=heavy))
    assert state["sag_m"] / FOOT == pytest.approx(4.68, rel=1e-3)
    assert state["sag_m"] / FOOT == pytest.approx(4.68333, rel=1e-4)
    assert state["sag_m"] / FOOT * down / math.hypot(across, down) == pytest.approx(4.43, rel=1.2e-3)


def test_f5_goenen_12_2():
    """The same, example 12.2: 40 mph on 8 wires of 0.81 in and 120 ft; p = 0.00256 V^2"""
    pressure = 0.00256 * 40**2
    assert pressure == pytest.approx(4.096)
    across, _ = core_load(cases.line(10.0, diameter=0.81 * INCH), cases.condition(wind_pressure_Pa=pressure * PSF))
    assert 8 * 120 * across / PLF == pytest.approx(265.4, rel=5e-4)


def test_f10_soni_3_14():
    """Soni, example 3.14, in kilogram-force: wind at 0 C strings it to 4000 kg; still air at 30 C"""
    kgf = 9.80665
    of = cases.line(0.9 * kgf, 9320e6 * kgf * 240e-6, diameter=19.5e-3, expansion=18.44e-6)
    windy = cases.condition(temperature_degC=0.0, wind_pressure_Pa=38.5 * kgf)
    resultant = math.hypot(*core_load(of, windy))
    # Horizontal tension 4000 kg under the resultant: the length in the plane of the resultant.
    bare = {**of, "weight_N_per_m": resultant}
    strung = cases.problem(cases.span(300.0), cases.rule("pull", 4000 * kgf), of=bare)
    (length,) = _core.Project(strung).string()["lengths_m"]
    state = only_span(stretched_by_heat(300.0, length, 18.44e-6 * 30.0, of))
    assert state["horizontal_tension_N"] / kgf == pytest.approx(2867.848, rel=2e-7)
    assert state["sag_m"] == pytest.approx(3.52665, abs=6e-6)
    # The book's parabola, stress 11 951 292 kg/m2, is 1.6e-4 from the exact one.
    assert state["horizontal_tension_N"] / kgf / 240e-6 == pytest.approx(11951292, rel=2e-4)
    # Ours adds heat and stretch on one length: e0 T/EA = 6e-7 of length apart.
    warm = cases.condition(temperature_degC=30.0)
    ours = cases.problem(cases.span(300.0), cases.lengths_rule(length, temperature=0.0), of=of, conditions=[warm])
    assert only_span(ours)["horizontal_tension_N"] == pytest.approx(state["horizontal_tension_N"], rel=2e-4)


def test_f12_three_loads_on_a_weightless_cable():
    """Statics text, example 10.1: 400, 600, 400 N every 2 m, C 2.25 m below A, A 2 m below B"""
    # Statics gives the places from H = 1600 N and the shears; A is at the left, B at the right, 2 m higher.
    shears = [-(1400.0 - 1100.0), 100.0, 700.0, 1100.0]
    points = [(0.0, 0.0)]
    for shear in shears:
        points.append((points[-1][0] + 2.0, points[-1][1] + 2.0 * shear / 1600.0))
    sides = [math.hypot(2.0, 2.0 * shear / 1600.0) for shear in shears]
    loads_ = [cases.point_load(s, (0.0, 0.0, -f)) for s, f in zip(np.cumsum(sides)[:3], (400, 600, 400), strict=True)]
    made = cases.problem(
        cases.span(8.0, points[-1][1]),
        cases.lengths_rule(sum(sides)),
        of=cases.line(FEATHER, STIFF),
        conditions=[cases.condition(loads=loads_)],
    )
    found = settled(made)
    state = found["spans"][0]
    assert points[-1][1] == pytest.approx(2.0)
    assert state["horizontal_tension_N"] == pytest.approx(1600.0, rel=1e-7)
    assert found["supports"][1]["down_N"] == pytest.approx(1100.0, rel=1e-7)
    assert state["tension_max_N"] == pytest.approx(1941.649, rel=1e-6)
    assert math.degrees(math.atan(state["slope_max"])) == pytest.approx(34.5085, abs=6e-5)


def test_f13_beer_johnston_7_107():
    """0.6 kg/m over 60 m, sag 1.5 m. Answers from memory"""
    of = cases.line(0.6 * 9.81, STIFF)
    state = only_span(cases.problem(cases.span(60.0), cases.rule("sag", 1.5, 0), of=of))
    assert state["tension_max_N"] == pytest.approx(1775.0, rel=1e-3)
    assert state["tension_max_N"] == pytest.approx(1776.10, rel=3e-6)
    assert state["natural_length_m"] == pytest.approx(60.1, rel=1e-3)
    assert state["natural_length_m"] == pytest.approx(60.09988, rel=1e-7)


def test_f14_golden_gate_side_span():
    """Beer & Johnston 7.117: 10.2 kip per horizontal foot, 1100 ft, rise 496 ft, 30 ft from the chord. From memory

    A parabola: its load lies evenly on the plan, so each of 200 pieces of equal run carries the same point load.
    """
    kip, n = POUND, 200  # scaled down a thousandfold, so that the line stays inextensible
    run, H, w = 1100 * FOOT, 51425 * kip, 10.2 * kip / FOOT
    x = np.linspace(0.0, run, n + 1)
    z = 496.0 / 1100.0 * x - w * x * (run - x) / (2.0 * H)
    sides = np.hypot(np.diff(x), np.diff(z))
    loads_ = [cases.point_load(s, (0.0, 0.0, -w * run / n)) for s in np.cumsum(sides)[:-1]]
    made = cases.problem(
        cases.span(run, 496 * FOOT),
        cases.lengths_rule(sides.sum()),
        of=cases.line(1e-3, STIFF),
        conditions=[cases.condition(loads=loads_)],
    )
    state = only_span(made)
    # The last side is half a piece from the support: its slope is short of the end's by w dx / 2H, 0.11 % of 0.56.
    assert state["horizontal_tension_N"] / kip == pytest.approx(51425, rel=1e-4)
    assert state["sag_m"] / FOOT == pytest.approx(30.0, rel=1e-3)
    assert state["tension_max_N"] / kip == pytest.approx(58900, rel=1.5e-3)
    assert math.degrees(math.atan(state["slope_max"])) == pytest.approx(29.2, rel=2e-3)


# --- G. Standards and facts of the trade

NESC = [  # rule 250B: ice in, wind psf, constant lb/ft; metric: mm, Pa, N/m. Metric from memory
    ("heavy", 0.50, 4.0, 0.30, 12.5, 190.0, 4.40),
    ("medium", 0.25, 4.0, 0.20, 6.5, 190.0, 2.50),
    ("light", 0.0, 9.0, 0.05, 0.0, 430.0, 0.70),
    ("warm islands, to 9000 ft", 0.0, 9.0, 0.05, 0.0, 430.0, 0.70),  # G2, from memory
]


@pytest.mark.parametrize("row", NESC, ids=lambda row: row[0])
def test_g1_g2_nesc_loads_in_both_systems(row):
    """The metric loads are the imperial ones, rounded: 3.6 % of ice, 1 % of wind, 4.1 % of the constant."""
    _, ice, wind, constant, ice_mm, wind_Pa, constant_N = row
    of = cases.line(1.094 * PLF, diameter=1.108 * INCH)
    imperial = cases.condition(
        ice_thickness_m=ice * INCH,
        ice_density_kg_per_m3=ICE_57_PCF,
        wind_pressure_Pa=wind * PSF,
        resultant_addition_N_per_m=constant * PLF,
    )
    metric = cases.condition(
        ice_thickness_m=ice_mm / 1e3,
        ice_density_kg_per_m3=913.0,
        wind_pressure_Pa=wind_Pa,
        resultant_addition_N_per_m=constant_N,
    )
    assert abs(ICE_57_PCF - 913.0) < 0.1
    assert math.hypot(*core_load(of, metric)) == pytest.approx(math.hypot(*core_load(of, imperial)), rel=0.025)


def test_g3_nesc_tension_limits():
    """Rule 261H: 60 % of breaking strength loaded, 35 % initial, 25 % final unloaded. From memory"""
    of = {**DRAKE}
    limits = [cases.limit("tension", share=share) for share in (0.60, 0.35, 0.25)]
    made = cases.problem(cases.span(700 * FOOT), cases.rule("pull", 7000 * POUND), of=of, limits=limits)
    rows = _core.Project(made).judge()
    assert [row["allowed"] / POUND for row in rows] == pytest.approx([18900, 11025, 7875], rel=1e-12)


@pytest.mark.parametrize(("speed", "pressure"), [(27.972, 479.63), (15.6, 149.18)])
def test_g4_velocity_pressure(speed, pressure):
    """NESC/ASCE: p = 0.613 V^2, Pa; 0.00256 V^2, psf and mph"""
    given = cases.condition(wind_speed_m_per_s=speed, air_density_kg_per_m3=2 * 0.613)
    of = cases.line(10.0, diameter=0.02)
    assert core_load(of, given)[0] / 0.02 == pytest.approx(pressure, rel=2e-5)
    psf = 0.00256 * (speed / 0.44704) ** 2
    assert psf * PSF == pytest.approx(pressure, rel=1.5e-3)


def test_g5_wind_on_a_span_at_an_angle():
    """IEC 60826: q0 = rho V^2 / 2 with 1.225 kg/m3, force q0 C d L sin^2. From memory"""
    given = cases.condition(wind_speed_m_per_s=24.0, wind_drag=1.1, wind_angle_rad=math.radians(60.0))
    across, _ = core_load(cases.line(10.0, diameter=0.03), given)
    assert across == pytest.approx(0.5 * 1.225 * 24.0**2 * 1.1 * 0.03 * 0.75, rel=1e-12)


def test_g6_air_of_en_50341():
    """EN 50341: 1.25 kg/m3. From memory"""
    given = cases.condition(wind_speed_m_per_s=24.0, air_density_kg_per_m3=1.25)
    assert core_load(cases.line(10.0, diameter=0.03), given)[0] == pytest.approx(0.5 * 1.25 * 576 * 0.03, rel=1e-12)


@pytest.mark.parametrize("density", [900.0, 600.0, 200.0, 800.0])
def test_g7_ice_classes(density):
    """ISO 12494: glaze 900, rime from 200, wet snow to 800 kg/m3. From memory"""
    given = cases.condition(ice_thickness_m=0.02, ice_density_kg_per_m3=density)
    of = cases.line(10.0, diameter=0.03)
    assert core_load(of, given)[1] - 10.0 == pytest.approx(math.pi * 0.02 * 0.05 * density * 9.80665, rel=1e-10)


def test_g8_units():
    """Standard gravity 9.80665 m/s2; 1 lbf/ft = 14.593903 N/m; 1 psf = 47.880259 Pa. Defined"""
    assert loads.weight(1.0) == 9.80665
    assert abs(PLF / 14.593903 - 1.0) < 2e-8
    assert abs(PSF / 47.880259 - 1.0) < 2e-8


# --- H. Closed forms


@pytest.mark.parametrize("away", [0.98, 1.0, 1.02])
def test_h1_the_sag_of_least_tension(away):
    """u = coth u: Tmax/(wL) 0.75443978076916 at sag/L 0.337661500968678 and length/L 1.25773645616809. Confirmed"""
    length = 100.0 * (1.0 + away * 0.25773645616809)
    state = only_span(cases.problem(cases.span(100.0), cases.lengths_rule(length), of=cases.line(10.0, STIFF)))
    if away == 1.0:
        assert state["tension_max_N"] / 1000.0 == pytest.approx(0.75443978076916, rel=1e-11)
        assert state["sag_m"] / 100.0 == pytest.approx(0.337661500968678, rel=1e-10)
        assert state["horizontal_tension_N"] / 1000.0 == pytest.approx(0.416778279800482, rel=1e-10)
        assert math.degrees(math.atan(state["slope_max"])) == pytest.approx(56.465835127452, rel=1e-11)
        assert 100.0 * 10.0 / state["tension_max_N"] == pytest.approx(1.32548683869836, rel=1e-11)
    else:
        assert state["tension_max_N"] / 1000.0 > 0.75443978076916 * (1.0 + 1e-6)


def test_h3_catenary_of_uniform_strength():
    """y = -(s/g) ln cos(g x/s): area and load grow with the tension. Formula from memory, numbers our own

    With natural length counted along the line, the load per metre is T/T0 times that at the middle; 400 uniform
    pieces of it leave an error of about (1/400)^2 of the change of load, which is 0.3 % here.
    """
    stress, gravity, half = 500e6, 7850 * 9.80665, 500.0
    assert math.pi * stress / gravity == pytest.approx(20404.66856, rel=1e-9)
    k = gravity / stress
    sag = -math.log(math.cos(k * half)) / k
    assert sag == pytest.approx(19.26458974, rel=1e-9)
    x = np.linspace(-half, half, 401)
    s = np.arctanh(np.sin(k * x)) / k
    middle = 0.5 * (s[1:] + s[:-1])
    grow = np.cosh(k * middle)
    base = 1.0
    spread = [
        cases.spread_load((0.0, 0.0, -base * (g - 1.0)), float(a), float(b))
        for g, a, b in zip(grow, s[:-1] - s[0], s[1:] - s[0], strict=True)
    ]
    of = cases.line(base, STIFF)
    rule = cases.lengths_rule(float(s[-1] - s[0]))
    made = cases.problem(cases.span(2 * half), rule, of=of, conditions=[cases.condition(loads=spread)])
    state = only_span(made)
    assert state["sag_m"] == pytest.approx(sag, rel=1e-7)
    assert state["horizontal_tension_N"] == pytest.approx(base / k, rel=1e-6)


# --- I. High-precision oracles. our own, 30 digits. Printed digits bound the tolerance.


@pytest.mark.parametrize(
    ("made", "H", "vertical", "tension", "sag", "length"),
    [
        (cases.problem(cases.span(300.0), cases.lengths_rule(300.8)), 17368.8076566, 2401.888, 17534.0966513,
         10.3551736026, 300.951041549),
        (cases.problem(cases.span(300.0), cases.lengths_rule(299.5)), 65609.3448867, 2391.5075, 65652.9164972,
         2.73350164376, 300.06640776),
        (cases.problem(cases.span(10.0), cases.lengths_rule(10.02), of=cases.line(3.0, 2.5e6)), 135.14387091, 15.03,
         135.977081689, 0.277751986247, 10.0205427712),
    ],
    ids=["a", "c", "f"],
)  # fmt: skip
def test_i_level_spans(made, H, vertical, tension, sag, length):
    found = settled(made)
    state = found["spans"][0]
    assert state["horizontal_tension_N"] == pytest.approx(H, rel=1e-11)
    assert found["supports"][0]["down_N"] == pytest.approx(vertical, rel=1e-12)
    assert state["tension_from_N"] == pytest.approx(tension, rel=1e-11)
    assert state["sag_m"] == pytest.approx(sag, rel=1e-11)
    assert state["line_length_m"] == pytest.approx(length, rel=1e-11)


@pytest.mark.parametrize(("length", "total"), [(300.8, -31815.3228054), (299.5, 9869.2602108)])
def test_i_energies(length, total):
    """The complementary energy is the exact total; the potential one comes from above, within the promised gap."""
    found = settled(cases.problem(cases.span(300.0), cases.lengths_rule(length)))
    assert found["energy_lower_J"] == pytest.approx(total, rel=1e-11)
    assert -1e-9 * abs(total) <= found["energy_J"] - total <= 1e-6 * abs(total)


def test_i_settle_is_fast_to_converge():
    """The aim set for this line: fewer than 40 evaluations."""
    assert settled(cases.problem(cases.span(300.0), cases.lengths_rule(300.8)))["evaluations"] < 40


def test_i_wind_in_three_dimensions():
    """12 N/m across with 15.97 N/m down."""
    given = cases.condition(wind_pressure_Pa=600.0)
    found = settled(cases.problem(cases.span(300.0), cases.lengths_rule(300.8), conditions=[given]))
    state, support = found["spans"][0], found["supports"][0]
    assert state["horizontal_tension_N"] == pytest.approx(21339.4227818, rel=1e-11)
    assert state["tension_from_N"] == pytest.approx(21549.8801311, rel=1e-11)
    pull = support["along_N"], support["across_N"], support["down_N"]
    assert pull == pytest.approx((21339.4227818, 1804.8, 2401.888), rel=1e-11)
    assert state["blowout_m"] == pytest.approx(6.33280685539, rel=1e-11)
    assert state["sag_m"] == pytest.approx(8.42791045671, rel=1e-11)


LIFELINE = [(1e3, 7583.9184572, 7601.2151318, 0.33376411483), (6e3, 24063.194717, 24251.030352, 0.62465687729),
            (10e3, 33626.428399, 33997.967654, 0.74439187606)]  # fmt: skip


@pytest.mark.parametrize(("force", "H", "tension", "sag"), LIFELINE)
def test_i4_horizontal_lifeline(force, H, tension, sag):
    of = cases.line(2.5, 3.0e6)
    bare = cases.problem(cases.span(10.0), cases.rule("pull", 1000.0), of=of)
    (length,) = _core.Project(bare).string()["lengths_m"]
    assert length == pytest.approx(9.9969278491648, rel=1e-13)
    assert only_span(bare)["sag_m"] == pytest.approx(0.03123999317, rel=1e-9)
    loaded = cases.condition(loads=[cases.point_load(5.0, (0.0, 0.0, -force), place="station")])
    state = only_span(cases.changed(bare, conditions=[loaded]))
    assert state["horizontal_tension_N"] == pytest.approx(H, rel=1e-10)
    assert state["tension_max_N"] == pytest.approx(tension, rel=1e-10)
    assert state["sag_m"] == pytest.approx(sag, rel=1e-10)


THERMAL = [
    (-40, 19658.17428, 9.152378844),
    (-20, 18417.28607, 9.767360729),
    (0, 17368.80766, 10.3551736),
    (20, 16470.07121, 10.91831312),
    (40, 15690.01219, 11.45910425),
    (60, 15005.56997, 11.97964165),
    (85, 14258.31509, 12.60464036),
]
PARABOLA = [19638.963, 18408.618, 17368.808, 16477.371, 15703.590, 15024.642, 14283.410]


@pytest.mark.parametrize(("row", "cubic"), list(zip(THERMAL, PARABOLA, strict=True)))
def test_i5_temperature(row, cubic):
    warmer, H, sag = row
    grown = 18.9e-6 * warmer
    thinned = cases.line(15.97 / (1.0 + grown))
    state = only_span(stretched_by_heat(300.0, 300.8, grown, thinned))
    assert state["horizontal_tension_N"] == pytest.approx(H, rel=1e-9)
    assert state["sag_m"] == pytest.approx(sag, rel=1e-9)
    assert state["horizontal_tension_N"] == pytest.approx(cubic, rel=1.8e-3)
    # Ours adds heat and stretch on one length, W = EA/2 (L - 1 - e0)^2: e0 T/EA = 8e-7 of length apart at most,
    # and H follows the length by up to 140 times as much.
    given = cases.condition(temperature_degC=15.0 + warmer)
    ours = only_span(cases.problem(cases.span(300.0), cases.lengths_rule(300.8), conditions=[given]))
    assert ours["horizontal_tension_N"] == pytest.approx(H, rel=1e-4)


IRVINE = [(300.8, 0.5, 0.449041392, 0.448915375), (300.8, 1.0, 0.873773791, 0.873423491),
          (303.0, 0.5, 0.489832175, 0.489781239), (303.0, 1.0, 0.973327963, 0.973187187),
          (310.0, 0.5, 0.498088086, 0.498059137), (310.0, 1.0, 0.994917691, 0.994839916)]  # fmt: skip


@pytest.mark.parametrize(("length", "added", "cubic", "exact"), IRVINE)
def test_i7_irvine_s_cubic(length, added, cubic, exact):
    """Added uniform load: the rise of H over H, exact and by Irvine's cubic (within 0.04 %)."""
    more = cases.condition(loads=[cases.spread_load((0.0, 0.0, -added * 15.97))])
    made = cases.problem(cases.span(300.0), cases.lengths_rule(length), conditions=[cases.condition(), more])
    before, after = (only_span(made, c)["horizontal_tension_N"] for c in (0, 1))
    assert after / before - 1.0 == pytest.approx(exact, rel=5e-9)
    assert after / before - 1.0 == pytest.approx(cubic, rel=4.1e-4)


@pytest.mark.parametrize(("factor", "H"), [(1.5, 25165.93247), (2.0, 32539.13228)])
def test_i8_change_of_weight(factor, H):
    more = cases.condition(loads=[cases.spread_load((0.0, 0.0, -(factor - 1.0) * 15.97))])
    made = cases.problem(cases.span(300.0), cases.lengths_rule(300.8), conditions=[more])
    assert only_span(made)["horizontal_tension_N"] == pytest.approx(H, rel=1e-9)


def test_three_spans_of_the_pulley_oracle_one_by_one():
    """250/400/300 m over frictionless pulleys: each span at its listed length carries the one listed tension.

    The pulleys themselves come with sheaves; here each span lies between anchors.
    """
    lengths = (250.374481229, 401.904131087, 300.721387685)
    supports = [cases.support(x, 0.0) for x in (0.0, 250.0, 650.0, 950.0)]
    spans = settled(cases.problem(supports, cases.lengths_rule(*lengths)))["spans"]
    assert sum(lengths) == pytest.approx(953.0, abs=2e-9)
    # Lengths are printed to 1e-9 m: with dT/dL of about 2e4 N/m, 1e-9 of the tension.
    assert [row["tension_max_N"] for row in spans] == pytest.approx([18229.9522451] * 3, rel=3e-9)
    horizontal = [18119.9944082, 17945.254677, 18071.1125259]
    assert [row["horizontal_tension_N"] for row in spans] == pytest.approx(horizontal, rel=3e-9)
    sags = [6.88888103116, 17.8363161315, 9.95133397143]
    assert [row["sag_m"] for row in spans] == pytest.approx(sags, rel=3e-9)


# --- The same through project files in US units

COPPER_FILE = """
format = "tautwise 1"
title = "Number 0 copper, 300 ft"
[line]
diameter = "0.368 in"
area = "0.0829 in^2"
weight = "0.3258 lbf/ft"
modulus = "17.0e6 psi"
expansion = "9.4e-6 / degF"
breaking_strength = "3953 lbf"
[[support]]
name = "A"
station = "0 ft"
elevation = "30 ft"
hold = "anchor"
[[support]]
name = "B"
station = "300 ft"
elevation = "30 ft"
hold = "anchor"
[stringing]
temperature = "0 degF"
natural_length = ["{length} ft"]
[[condition]]
name = "heavy"
temperature = "0 degF"
ice = {{ thickness = "0.5 in", density = "57 lb/ft^3" }}
wind = {{ pressure = "6 lbf/ft^2" }}
[[condition]]
name = "60"
temperature = "60 degF"
[[condition]]
name = "80"
temperature = "80 degF"
"""

DRAKE_FILE = """
format = "tautwise 1"
title = "795 kcmil 26/7, 700 ft"
[line]
diameter = "1.108 in"
area = "0.7264 in^2"
weight = "1.094 lbf/ft"
modulus = "10.755e6 psi"
expansion = "1.0503e-5 / degF"
breaking_strength = "31500 lbf"
[[support]]
name = "A"
station = "0 ft"
elevation = "100 ft"
hold = "anchor"
[[support]]
name = "B"
station = "700 ft"
elevation = "100 ft"
hold = "anchor"
[stringing]
temperature = "{temperature} degF"
horizontal_tension = "{pull} lbf"
[[condition]]
name = "bare"
temperature = "{temperature} degF"
"""


def loaded(folder, text):
    file = folder / "line.taut.toml"
    file.write_text(text)
    return tautwise.load(file)


def test_a1_and_a2_through_a_project_file(tmp_path, copper_at_60):
    length = copper_at_60["stringing"]["lengths_m"][0] / FOOT
    project = loaded(tmp_path, COPPER_FILE.format(length=f"{length:.9f}"))
    heavy, warm, warmer = (project.settle(name).spans[0] for name in ("heavy", "60", "80"))
    assert heavy.tension_to_N / POUND == pytest.approx(1976.5, rel=1e-6)
    assert warm.sag_m / FOOT == pytest.approx(5.30, abs=0.05)
    assert warmer.sag_m / FOOT == pytest.approx(5.78, abs=0.04)
    assert warm.sag_m == pytest.approx(only_span(copper_at_60, 1)["sag_m"], rel=1e-8)


@pytest.mark.parametrize(("temperature", "sag", "tension"), [row for row in D2 if isinstance(row[0], int)])
def test_d2_through_a_project_file(tmp_path, temperature, sag, tension):
    """H from the listed mean of H and T: T = H + w sag. The load is that per natural foot, 0.03 to 0.1 % more."""
    pull = tension - 0.5 * 1.094 * sag
    project = loaded(tmp_path, DRAKE_FILE.format(temperature=temperature, pull=f"{pull:.6f}"))
    assert project.settle("bare").spans[0].sag_m / FOOT == pytest.approx(sag, rel=1.6e-3)
