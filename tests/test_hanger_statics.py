"""The balance at a hanger, written out by hand in 30-digit arithmetic.

Two spans meet at the clamp of a link. With the elastic catenary of each span (Irvine, Cable Structures, 1981, ch. 1, in
vector form: t(s) = R - q s, r' = t/|t| (1 + e0 + |t|/EA)) the unknowns are the two pulls R1 and R2; the equations:

    span 2 ends at its anchor                               r1(L1) + displacement(R2, q2, L2) = end
    the link is as long as it is                            |a - c| = l,  c = r1(L1)
    and points along the force that it takes                F x (a - c) = 0,  F = t1(L1) - R2 + (0, 0, W/2)

Half of the link's weight W acts at the clamp, the other half at the support. Nothing of the core is used but a start.

Tolerance: forces follow natural lengths by up to EA/T = 3e3 and the core closes its spans to 1e-12 of the chord, so
1e-9 of the pull; places and angles accordingly.
"""

from __future__ import annotations

import math

import core_cases as cases
import mpmath as mp
import pytest

from tautwise import _core

WEIGHT, STIFFNESS, DIAMETER, EXPANSION = 15.97, 34.7e6, 0.02, 18.9e-6
LINK, LINK_WEIGHT = 2.5, 700.0
GRAVITY = 9.80665
LENGTHS = (250.7, 330.6)
ENDS = ((0.0, 0.0, 30.0), (250.0, 0.0, 36.0), (580.0, 0.0, 27.0))  # anchor, hanger's support, anchor

# More on span 1 (down, N/m), ice on both (thickness, m), wind pressure (Pa), temperature (degC)
CASES = {
    "bare": (0.0, 0.0, 0.0, 15.0),
    "hot": (0.0, 0.0, 0.0, 70.0),
    "more on one side": (14.0, 0.0, 0.0, 0.0),
    "wind": (0.0, 0.0, 600.0, 5.0),
    "iced, more on one side, wind": (9.0, 0.012, 350.0, -5.0),
}


def problem_of(name):
    more, ice, pressure, temperature = CASES[name]
    supports = [
        cases.support(ENDS[0][0], ENDS[0][2]),
        cases.support(ENDS[1][0], ENDS[1][2], "hanger", hanger_length_m=LINK, hanger_weight_N=LINK_WEIGHT),
        cases.support(ENDS[2][0], ENDS[2][2]),
    ]
    loads = [cases.spread_load((0.0, 0.0, -more), 0.0, LENGTHS[0])] if more else []
    given = cases.condition(
        temperature_degC=temperature, ice_thickness_m=ice, wind_pressure_Pa=pressure, wind_drag=1.1, loads=loads
    )
    of = cases.line(WEIGHT, STIFFNESS, diameter=DIAMETER, expansion=EXPANSION)
    return cases.problem(supports, cases.lengths_rule(*LENGTHS), of=of, conditions=[given])


def loads_of(name):
    """Load of each span, N/m, and the thermal strain, by hand: ring of ice, wind on the iced diameter."""
    more, ice, pressure, temperature = (mp.mpf(repr(value)) for value in CASES[name])
    d = mp.mpf(repr(DIAMETER))
    ring = 900 * mp.mpf(repr(GRAVITY)) * mp.pi * ice * (d + ice)
    wind = pressure * mp.mpf("1.1") * (d + 2 * ice)
    down = mp.mpf(repr(WEIGHT)) + ring
    strain = mp.mpf(repr(EXPANSION)) * (temperature - 15)
    return [[0, wind, -down - more], [0, wind, -down]], strain


def dot(a, b):
    return sum(x * y for x, y in zip(a, b, strict=True))


def displacement(pull, load, length, strain):
    """End less start of a span, from t = a e + b, e along the load: the integrals of a/T and 1/T over the length."""
    q = mp.sqrt(dot(load, load))
    e = [part / q for part in load]
    a0 = dot(pull, e)
    a1 = a0 - q * length
    b = [t - a0 * part for t, part in zip(pull, e, strict=True)]
    h = mp.sqrt(dot(b, b))
    along = (mp.hypot(a0, h) - mp.hypot(a1, h)) / q
    aside = (mp.asinh(a0 / h) - mp.asinh(a1 / h)) / q
    elastic = [
        length * (t - load_i * length / 2) / mp.mpf(repr(STIFFNESS)) for t, load_i in zip(pull, load, strict=True)
    ]
    return [(1 + strain) * (along * e[i] + aside * b[i]) + elastic[i] for i in range(3)]


def balance(name, start):
    """Clamp, force of the link on the line and both pulls, from the six equations."""
    (first, second), strain = loads_of(name)
    length = [mp.mpf(repr(each)) for each in LENGTHS]
    near, support, far = ([mp.mpf(repr(part)) for part in place] for place in ENDS)

    def parts(values):
        one, two = values[:3], values[3:]
        step = displacement(one, first, length[0], strain)
        clamp = [near[i] + step[i] for i in range(3)]
        arriving = [one[i] - first[i] * length[0] for i in range(3)]
        force = [arriving[i] - two[i] + (mp.mpf(repr(LINK_WEIGHT)) / 2 if i == 2 else 0) for i in range(3)]
        return one, two, clamp, force

    def equations(*values):
        _, two, clamp, force = parts(values)
        step = displacement(two, second, length[1], strain)
        link = [support[i] - clamp[i] for i in range(3)]
        rows = [clamp[i] + step[i] - far[i] for i in range(3)]
        rows.append(dot(link, link) - mp.mpf(repr(LINK)) ** 2)
        rows.append((force[0] * link[2] - force[2] * link[0]) / force[2])
        rows.append((force[1] * link[2] - force[2] * link[1]) / force[2])
        return rows

    found = mp.findroot(equations, [mp.mpf(value) for value in start], tol=mp.mpf(10) ** -24, maxsteps=60)
    return parts(list(found))


def rough_start(settled):
    """Both pulls to three digits: the start of the search, and nothing more."""
    spans, (first, hanger, _) = settled["spans"], settled["supports"]
    one = [first["along_N"], first["across_N"], -first["down_N"]]
    rise = spans[1]["rise_m"] / spans[1]["span_m"]
    two = [spans[1]["horizontal_tension_N"], hanger["across_N"] / 2, spans[1]["horizontal_tension_N"] * (rise - 0.15)]
    return [float(f"{value:.2e}") for value in one + two]


@pytest.mark.parametrize("name", CASES)
def test_the_link_takes_what_the_spans_leave(name):
    settled = _core.Project(problem_of(name)).settle(0)
    assert settled["status"] == "ok"
    with mp.workdps(30):
        one, two, clamp, force = balance(name, rough_start(settled))
    first, hanger, last = settled["supports"]
    size = float(mp.sqrt(dot(two, two)))
    near = {"abs": 1e-9 * size}
    # The link pulls the line up by force; on the support it and half of its weight pull down.
    assert hanger["along_N"] == pytest.approx(-float(force[0]), **near)
    assert hanger["across_N"] == pytest.approx(-float(force[1]), **near)
    assert hanger["down_N"] == pytest.approx(float(force[2]) + 0.5 * LINK_WEIGHT, **near)
    assert hanger["position_m"] == pytest.approx([float(part) for part in clamp], abs=1e-8)
    aside = math.hypot(float(clamp[0]) - 250.0, float(clamp[1]))
    assert hanger["swing_rad"] == pytest.approx(math.asin(aside / LINK), abs=1e-8)
    assert first["along_N"] == pytest.approx(float(one[0]), **near)
    assert settled["spans"][1]["tension_from_N"] == pytest.approx(size, rel=1e-9)
    # What ends at the last anchor, by the same pull less the load.
    (_, second), _ = loads_of(name)
    assert last["down_N"] == pytest.approx(float(two[2] - second[2] * LENGTHS[1]), **near)


def test_more_on_one_side_pulls_the_clamp_there():
    """Horizontal balance alone: the link leans by the difference of the horizontal pulls over what it carries."""
    settled = _core.Project(problem_of("more on one side")).settle(0)
    hanger, spans = settled["supports"][1], settled["spans"]
    carried = hanger["down_N"] - 0.5 * LINK_WEIGHT
    assert hanger["position_m"][0] < 250.0 - 0.05
    lean = (hanger["position_m"][0] - 250.0) / (ENDS[1][2] - hanger["position_m"][2])
    difference = spans[1]["horizontal_tension_N"] - spans[0]["horizontal_tension_N"]
    # No wind: the horizontal tensions are along x; 1e-9 of them over what is carried.
    assert lean == pytest.approx(difference / carried, abs=1e-9 * spans[0]["horizontal_tension_N"] / carried)


def test_wind_swings_the_link_across():
    """Across: leaning by its share of the wind over what it carries; along: hardly, its spans being alike."""
    settled = _core.Project(problem_of("wind")).settle(0)
    hanger = settled["supports"][1]
    carried = hanger["down_N"] - 0.5 * LINK_WEIGHT
    across = hanger["position_m"][1] / (ENDS[1][2] - hanger["position_m"][2])
    assert across == pytest.approx(hanger["across_N"] / carried, abs=1e-9)
    total = 600.0 * 1.1 * DIAMETER * sum(LENGTHS)
    ends = settled["supports"][0]["across_N"] + settled["supports"][2]["across_N"]
    assert hanger["across_N"] + ends == pytest.approx(total, rel=1e-9)
