"""Published values and closed forms for the placing of loads, each with its source; from memory where it says so.

Loads per metre (A, D1, G1, G4 to G7), E1 to E4, F4, F5, F12, I7 and I8 by added loads stand in test_published.py.
"""

from __future__ import annotations

import math

import core_cases as cases
import numpy as np
import pytest

import tautwise as tw
from refresh_expected import EXAMPLES
from tautwise import _core

STIFF = 1e13  # EA, N: strains of 1e-9 and less beside the tolerances
FEATHER = 1e-9  # N/m


def settled(problem, condition=0):
    found = _core.Project(problem).settle(condition)
    assert found["status"] == "ok", found["status_text"]
    return found


def carriage(kind, at=None, force=1000.0, span=0):
    place = {"place": "whole", "from_m": None} if at is None else {"place": "station", "from_m": at}
    return {**cases.point_load(at, (0.0, 0.0, -force)), **place, "carriage": kind, "carriage_span": span}


def one_span(length, loads, rise=0.0, run=100.0, weight=FEATHER, stiffness=STIFF, **condition):
    given = [cases.condition(loads=loads, **condition)]
    return cases.problem(
        cases.span(run, rise), cases.lengths_rule(length), of=cases.line(weight, stiffness), conditions=given
    )


# --- carriages on a weightless, inextensible line


def test_e1_by_a_carriage_held_at_0_4_of_the_span():
    """Karnovsky & Lebed, Advanced Methods of Structural Analysis, ch. 5: length 1.2 l, H = 0.7339 P; sag 0.327024 l."""
    span = settled(one_span(120.0, [carriage("held", 40.0)]))["spans"][0]
    assert span["horizontal_tension_N"] == pytest.approx(733.892, abs=6e-4)
    assert span["sag_m"] == pytest.approx(32.7024, abs=6e-5)


def test_e2_by_a_free_carriage():
    """The same, length 1.01 l: it rolls to mid-span from anywhere; sag 0.070887 l, H 3.52673 P."""
    for start in (None, 10.0, 93.0):
        found = settled(one_span(101.0, [carriage("free", start)]))
        # The place follows the tensions' difference, known to 1e-12 of them, by its growth over the span, 0.3.
        assert found["loads"][0]["position_m"][0] == pytest.approx(50.0, abs=1e-7)
        assert found["spans"][0]["sag_m"] == pytest.approx(7.0887, abs=6e-5)
        assert found["spans"][0]["horizontal_tension_N"] == pytest.approx(3526.73, abs=6e-3)


@pytest.mark.parametrize("rise", [20.0, -35.0])
def test_a_free_carriage_on_an_inclined_line_hangs_between_equal_slopes(rise):
    """On the ellipse around both ends the lowest point: cos a = l / L on both sides, T = P / (2 sin a)."""
    length = 115.0
    angle = math.acos(100.0 / length)
    behind = 0.5 * (length - rise / math.sin(angle))
    found = settled(one_span(length, [carriage("free")], rise))
    mark = found["loads"][0]
    assert mark["at_length_m"] == pytest.approx(behind, abs=1e-6)
    assert mark["position_m"][0] == pytest.approx(behind * math.cos(angle), abs=1e-6)
    assert mark["position_m"][2] == pytest.approx(-behind * math.sin(angle), abs=1e-6)
    assert mark["tension_N"] == pytest.approx(1000.0 / (2.0 * math.sin(angle)), rel=1e-8)
    assert mark["tension_beyond_N"] == pytest.approx(mark["tension_N"], rel=1e-10)


def test_a_held_carriage_is_in_balance_about_both_supports():
    """Statics by hand: V of the far support from moments about the near one, and the brake from the two slopes."""
    found = settled(one_span(115.0, [carriage("held", 30.0)], 20.0))
    x, _, z = found["loads"][0]["position_m"]
    near, far = found["supports"]
    assert x == pytest.approx(30.0, abs=1e-9)
    assert near["down_N"] + far["down_N"] == pytest.approx(1000.0, rel=1e-9)
    assert 100.0 * far["down_N"] + 20.0 * far["along_N"] == pytest.approx(1000.0 * 30.0, rel=1e-8)
    H = near["along_N"]
    slopes = math.hypot(1.0, z / x), math.hypot(1.0, (20.0 - z) / (100.0 - x))
    mark = found["loads"][0]
    assert mark["tension_beyond_N"] - mark["tension_N"] == pytest.approx(H * (slopes[1] - slopes[0]), rel=1e-7)


@pytest.mark.parametrize(("degrees", "ratio", "published"), [(15.0, 1.9319, 2), (5.0, 5.7369, 6), (30.0, 1.0, 1)])
def test_g17_the_force_in_a_lifeline(degrees, ratio, published):
    """OSHA 29 CFR 1926 subpart M, appendix C: about 2:1 at a sag angle of 15 degrees and 6:1 at 5; 1 / (2 sin a)."""
    length = 10.0 / math.cos(math.radians(degrees))
    span = settled(one_span(length, [carriage("free")], run=10.0))["spans"][0]
    assert span["tension_max_N"] / 1000.0 == pytest.approx(ratio, abs=6e-5)
    assert round(span["tension_max_N"] / 1000.0) == published


# --- loads per run


@pytest.mark.parametrize("length", [100.2, 101.0, 103.0])
def test_a_line_under_a_load_per_run_is_a_parabola(length):
    """sag = p L^2 / (8 H), whatever the line's stiffness, where its own weight is nothing."""
    run = {**cases.spread_load((0.0, 0.0, -30.0)), "is_run": True}
    found = settled(one_span(length, [run], stiffness=2e6))
    span = found["spans"][0]
    assert span["sag_m"] == pytest.approx(30.0 * 100.0**2 / (8.0 * span["horizontal_tension_N"]), rel=1e-9)
    assert [row["down_N"] for row in found["supports"]] == pytest.approx([1500.0, 1500.0], rel=1e-9)


def test_a_load_per_run_lies_on_its_stretch_only():
    """Snow on the first 40 m of a taut line of 100: reactions as of a beam, 40 p (1 - 0.2) and 40 p 0.2."""
    run = {**cases.spread_load((0.0, 0.0, -30.0), 0.0, 40.0, "length"), "is_run": True}
    near, far = (row["down_N"] for row in settled(one_span(100.0, [run], stiffness=1e8))["supports"])
    # The strain of 1e-3 makes the stretch so much longer, its slope of 0.04 so much shorter.
    assert near / 1200.0 == pytest.approx(0.8, rel=3e-3)
    assert far / 1200.0 == pytest.approx(0.2, rel=3e-3)


def test_a_triangular_load_reacts_by_thirds():
    """Statics: q from 0 to q0 over the span l gives q0 l / 6 and q0 l / 3; a sag of 1 % moves it by (8/3) 1e-4."""
    ramp = {**cases.spread_load((0.0, 0.0, 0.0), 0.0, 100.02, "length"), "vector_to": (0.0, 0.0, -60.0)}
    near, far = (row["down_N"] for row in settled(one_span(100.02, [ramp]))["supports"])
    assert near == pytest.approx(60.0 * 100.02 / 6.0, rel=1e-3)
    assert far == pytest.approx(60.0 * 100.02 / 3.0, rel=1e-3)
    assert near + far == pytest.approx(60.0 * 100.02 / 2.0 + 100.02 * FEATHER, rel=1e-12)


# --- H6: Irvine's cubics against the exact line


@pytest.mark.parametrize("place", [0.5, 0.3])
@pytest.mark.parametrize("size", [0.1, 0.5, 1.0])
def test_h6_irvine_s_cubic_for_a_point_load(place, size):
    """h^3 + (2 + l2/24) h^2 + (1 + l2/12) h = (l2/2) x (1 - x) P (1 + P), l2 = lambda^2. From memory (Irvine).

    The cubic keeps terms to second order in the slopes, of 0.14 here under the load: (0.14)^2 / 8 = 0.25 % of H + h.
    """
    w, length = 15.97, 300.8
    bare = settled(cases.problem(cases.span(300.0), cases.lengths_rule(length)))["spans"][0]
    H = bare["horizontal_tension_N"]
    stretched = 300.0 * (1.0 + 8.0 * (bare["sag_m"] / 300.0) ** 2)
    l2 = (w * 300.0 / H) ** 2 * 300.0 * 34.7e6 / (H * stretched)
    roots = np.roots([1.0, 2.0 + l2 / 24.0, 1.0 + l2 / 12.0, -0.5 * l2 * place * (1.0 - place) * size * (1.0 + size)])
    (h,) = [root.real for root in roots if abs(root.imag) < 1e-9 and root.real > 0.0]
    load = carriage("held", 300.0 * place, size * w * 300.0)
    loaded = cases.problem(cases.span(300.0), cases.lengths_rule(length), conditions=[cases.condition(loads=[load])])
    exact = settled(loaded)["spans"][0]["horizontal_tension_N"] / H
    assert 1.0 + h == pytest.approx(exact, rel=2.5e-3)


@pytest.mark.parametrize(("factor", "H"), [(1.5, 25165.93247), (2.0, 32539.13228)])
def test_i8_by_a_load_factor_on_weight(factor, H):
    made = cases.problem(
        cases.span(300.0), cases.lengths_rule(300.8), conditions=[cases.condition(factor_weight=factor)]
    )
    assert settled(made)["spans"][0]["horizontal_tension_N"] == pytest.approx(H, rel=1e-9)


# --- air


# ISO 2533, table 1: geometric altitude m, density kg/m3. From memory
ATMOSPHERE = [(0.0, 1.2250), (1000.0, 1.1117), (2000.0, 1.0066), (3000.0, 0.90925), (5000.0, 0.73643)]


@pytest.mark.parametrize(("geometric", "density"), ATMOSPHERE)
def test_iso_2533_air_density(geometric, density):
    """The formula takes geopotential altitudes; the table's are geometric, r z / (r + z) of them, r = 6356.766 km.

    Five digits are given: 5e-5 of the density at most.
    """
    altitude = 6356766.0 * geometric / (6356766.0 + geometric)
    given = cases.condition(
        temperature_degC=15.0 - 0.0065 * altitude,
        wind_pressure_Pa=None,
        wind_speed_m_per_s=20.0,
        wind_altitude_m=altitude,
    )
    of = cases.line(10.0, diameter=0.02)
    made = cases.problem(cases.span(100.0), cases.lengths_rule(100.0), of=of, conditions=[given])
    across = sum(row["across_N"] for row in settled(made)["supports"]) / 100.0
    assert across / (0.5 * 0.02 * 20.0**2) == pytest.approx(density, rel=5e-5)


# --- wind on a string, by hand


def test_the_wind_on_a_hanger_s_string_acts_half_at_its_clamp():
    """Two level spans under wind: tan(swing) = (line's wind + p A / 2) / (line's weight + half the string's).

    The other halves act at the support, which takes all of both.
    """
    supports = [
        cases.support(0.0, 30.0),
        cases.hanger(300.0, 32.0, 2.0, 600.0, hanger_wind_area_m2=0.5),
        cases.support(600.0, 30.0),
    ]
    given = cases.condition(wind_pressure_Pa=400.0)
    found = settled(cases.problem(supports, cases.rule("pull", 17e3), conditions=[given]))
    total = {key: sum(row[key] for row in found["supports"]) for key in ("across_N", "down_N")}
    length = sum(row["natural_length_m"] for row in found["spans"])
    diameter = cases.line()["diameter_m"]
    assert total["across_N"] == pytest.approx(400.0 * diameter * length + 400.0 * 0.5, rel=1e-9)
    assert total["down_N"] == pytest.approx(15.97 * length + 600.0, rel=1e-9)
    middle = found["supports"][1]
    below = middle["across_N"] - 100.0, middle["down_N"] - 300.0
    assert math.tan(middle["swing_rad"]) == pytest.approx(below[0] / below[1], rel=1e-9)


# --- the example of unequal ice, by hand


def test_ice_on_every_second_span_by_hand():
    """Sag w L^2 / (8 H) within 1 %; the difference of H pulls a hanger along; iced spans hang lower than all iced."""
    project = tw.load(EXAMPLES / "unequal_ice.taut.toml")
    every, second = project.settle("ice on all spans"), project.settle("ice on every second span")
    weight = 0.86 * 9.80665
    ice = math.pi * 0.014 * 0.034 * 900.0 * 9.80665
    for k, span in enumerate(second.spans):
        load = weight + (ice if k % 2 else 0.0)
        assert span.sag_m == pytest.approx(load * span.span_m**2 / (8.0 * span.horizontal_tension_N), rel=0.01)
        assert (span.sag_m > every.spans[k].sag_m) == bool(k % 2)
    for k in range(1, 10):
        difference = second.spans[k].horizontal_tension_N - second.spans[k - 1].horizontal_tension_N
        assert second.supports[k].along_N == pytest.approx(difference, abs=2.0)
        assert abs(second.supports[k].swing_deg) > abs(every.supports[k].swing_deg)
