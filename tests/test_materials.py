"""Curved lines and their history: against the slow twin, SciPy, mpmath, and told in other ways."""

from __future__ import annotations

import copy
import math

import core_cases as cases
import material_cases as material
import numpy as np
import pytest

from tautwise import _core
from tautwise.reference import states
from tautwise.reference.curved import curved_line, expanded
from tautwise.reference.project import Twin

SAME = 1e-9  # as in test_twin: what two right answers may differ by
STATES = ("initial", "final", "after creep")
KEYS = (
    "natural_length_m",
    "line_length_m",
    "horizontal_tension_N",
    "tension_from_N",
    "tension_to_N",
    "tension_max_N",
    "sag_m",
    "slant_sag_m",
    "slope_max",
)


def drawn(seed):
    """One or two spans of a drawn curved line, heavy, hot and cold, in all three states."""
    rng = np.random.default_rng(1000 + seed)
    n = 1 + seed % 2
    stations = np.concatenate([[0.0], np.cumsum(rng.uniform(120.0, 300.0, n))])
    supports = [cases.support(0.0, 30.0)]
    supports += [cases.hanger(float(x), float(rng.normal(30.0, 1.0))) for x in stations[1:-1]]
    supports += [cases.support(float(stations[-1]), float(rng.normal(30.0, 5.0)))]
    heavy = -float(rng.uniform(5, 20))
    loads = [cases.spread_load((0.0, 0.0, heavy)), cases.point_load(50.0, (0.0, 0.0, -9e2))]
    conditions = [
        cases.condition(temperature_degC=15.0),
        cases.condition(temperature_degC=-20.0, loads=loads, wind_pressure_Pa=300.0),
        cases.condition(temperature_degC=-20.0, loads=loads, state="final"),
        cases.condition(temperature_degC=70.0, state="after creep"),
    ]
    of = material.drawn_line(seed)
    pull = 0.12 * 1e-2 * sum(part["loading_N"][1] for part in of["parts"])
    rule = cases.rule("pull", float(rng.uniform(0.6, 1.0)) * pull)
    problem = cases.problem(supports, rule, of=of, conditions=conditions)
    return {**problem, "history": {"met": [True, True, False, True], "creep_condition": 0}}


@pytest.mark.parametrize("seed", range(3))
@pytest.mark.parametrize("condition", [2, 3])
def test_drawn_curved_lines_agree_with_the_twin(seed, condition):
    """Tensions, lengths, sag and lower bound, final and after creep; the history holds the conditions as strung."""
    problem = drawn(seed)
    found, twin = _core.Project(problem).settle(condition), Twin(problem)
    settled = twin.settle(condition)
    assert found["status"] == "ok"
    for k, (hung, span) in enumerate(zip(settled.spans, found["spans"], strict=True)):
        expected = {
            "natural_length_m": hung.length_m,
            "line_length_m": hung.line_length_m(),
            "horizontal_tension_N": states.horizontal_tension(settled, k),
            "tension_from_N": float(np.linalg.norm(hung.pull)),
            "tension_to_N": float(np.linalg.norm(hung.end_tension())),
            "sag_m": states.sag_of(settled, k),
        }
        for key, value in expected.items():
            assert span[key] == pytest.approx(value, rel=SAME, abs=1e-8), key
    total = sum(float((span.pull - span.end_tension())[2]) for span in settled.spans)
    total += float(settled.section.clamp_loads[:, 2].sum())
    lower = settled.lower_bound_J() + 30.0 * total  # the core counts from the first support
    assert found["energy_lower_J"] == pytest.approx(lower, rel=1e-9, abs=1e-5)


@pytest.mark.parametrize("seed", range(2))
def test_the_twin_is_in_equilibrium(seed):
    """Potential = complementary energy: only the true shape has both."""
    settled = Twin(drawn(seed)).settle(3)
    scale = sum(span.stored_J() for span in settled.spans) + abs(settled.potential_J())
    assert abs(settled.potential_J() - settled.lower_bound_J()) < 1e-10 * scale


def one_span(of, rise=15.0, state="initial", temperature=40.0, pull=20e3, **other):
    supports = [cases.support(0.0, 30.0), cases.support(250.0, 30.0 + rise)]
    heavy = cases.condition(temperature_degC=-10.0, loads=[cases.spread_load((0.0, 0.0, -22.0))])
    now = cases.condition(temperature_degC=temperature, state=state, **other)
    problem = cases.problem(supports, cases.rule("pull", pull), of=of, conditions=[heavy, now])
    return {**problem, "history": {"met": [True, False], "creep_condition": None}}


def law(of, problem, state):
    """L(T) and W(L) of the span, by the twin."""
    twin = Twin(problem)
    return twin.section(1, None, state=state).material_of(0)


@pytest.mark.parametrize("state", STATES)
def test_scipy_bvp_agrees(state):
    """t' = q, r' = t/|t| L(|t|) as a boundary-value problem, L from a table: 1e-7 asked of the solver."""
    from scipy.integrate import solve_bvp
    from scipy.interpolate import PchipInterpolator

    problem = one_span(material.conductor(), state=state)
    found = _core.Project(problem).settle(1)["spans"][0]
    line, length, q = law(None, problem, state), found["natural_length_m"], problem["line"]["weight_N_per_m"]

    table = np.linspace(5e3, 40e3, 4000)
    stretch_of = PchipInterpolator(table, line.stretch(table))

    def slope(s, y):
        size = np.hypot(y[2], y[3])
        stretch = stretch_of(size)
        return np.vstack([y[2] / size * stretch, y[3] / size * stretch, 0.0 * s, 0.0 * s + q])

    def ends(a, b):
        return np.array([a[0], a[1], b[0] - 250.0, b[1] - 15.0])

    s = np.linspace(0.0, length, 400)
    guess = np.vstack([s * 250.0 / length, s * 15.0 / length, 0.0 * s + 20e3, q * (s - 0.5 * length) + 1.2e3])
    answer = solve_bvp(slope, ends, s, guess, tol=1e-7, max_nodes=4_000)
    assert answer.success
    assert found["horizontal_tension_N"] == pytest.approx(answer.y[2, 0], rel=1e-6)
    assert found["tension_from_N"] == pytest.approx(math.hypot(answer.y[2, 0], answer.y[3, 0]), rel=1e-6)


def test_fifty_digits_agree_on_the_knee():
    """Hot and crept, where the outer part goes slack within the span: the closing error in 40-digit arithmetic."""
    mp = pytest.importorskip("mpmath")
    problem = one_span(material.conductor(), state="after creep", temperature=60.0, rise=60.0)
    found = _core.Project(problem).settle(1)["spans"][0]
    line = law(None, problem, "after creep")
    kinks = [kink for kink in line.kinks_N() if found["horizontal_tension_N"] < kink < found["tension_max_N"]]
    assert kinks  # the knee lies within
    with mp.workdps(40):
        q, length = mp.mpf(problem["line"]["weight_N_per_m"]), mp.mpf(found["natural_length_m"])
        laws = [(part, mp.mpf(shift)) for part, shift in zip(line.parts, line.shifts, strict=True)]

        def strain(T):
            """Unloading lines alone: sum E_i (x - shift_i - permanent_i)+ = T, the core carrying first."""

            def excess(some):
                rates = [mp.mpf(part.row["final_stiffness_N"]) for part, _ in some]
                starts = [shift + mp.mpf(part.permanent) for part, shift in some]
                return (T + sum(r * z for r, z in zip(rates, starts, strict=True))) / sum(rates)

            alone, both = excess(laws[:1]), excess(laws)
            second = laws[1][1] + mp.mpf(laws[1][0].permanent)
            return both if both > second else alone

        def ends(h, v):
            knee = [mp.sqrt(kink**2 - h**2) for kink in map(mp.mpf, kinks)]
            places = sorted(s for k in knee for s in ((v - k) / q, (v + k) / q) if 0 < s < length)

            def across(s):
                T = mp.sqrt(h**2 + (v - q * s) ** 2)
                return (1 + strain(T)) / T

            cuts = [0, *places, length]
            return (
                mp.quad(lambda s: across(s) * h, cuts) - 250,
                mp.quad(lambda s: across(s) * (q * s - v), cuts) - 60,
            )

        h0 = mp.mpf(found["horizontal_tension_N"])
        v0 = mp.sqrt(found["tension_from_N"] ** 2 - h0**2) * (1 if found["low_station_m"] > 1e-6 else -1)
        h, v = mp.findroot(ends, (h0, v0), tol=1e-25)
        assert float(h) == pytest.approx(found["horizontal_tension_N"], rel=1e-10)
        assert float(mp.hypot(h, v)) == pytest.approx(found["tension_from_N"], rel=1e-10)


def test_a_knee_within_the_span_costs_no_accuracy():
    """The bracket closes and the exact line closes on a span with the knee inside."""
    found = _core.Project(one_span(material.conductor(), state="after creep", temperature=60.0, rise=60.0)).settle(1)
    assert found["status"] == "ok"
    assert found["closing_m"] < 1e-10
    assert -1e-9 < found["gap_relative"] < 1e-6


def span_of(problem, condition=1):
    found = _core.Project(problem).settle(condition)
    assert found["status"] == "ok"
    return found["spans"][0]


@pytest.mark.parametrize("state", STATES)
def test_mirrored_it_is_the_same(state):
    there = span_of(one_span(material.conductor(), rise=40.0, state=state))
    back = span_of(one_span(material.conductor(), rise=-40.0, state=state))
    assert back["tension_to_N"] == pytest.approx(there["tension_from_N"], rel=2e-12)
    assert back["permanent_strain"] == pytest.approx(there["permanent_strain"], rel=2e-10, abs=1e-15)


@pytest.mark.parametrize("state", STATES)
def test_the_order_of_the_parts_does_not_matter(state):
    of = material.conductor()
    turned = {**of, "parts": of["parts"][::-1]}
    one, other = span_of(one_span(of, state=state)), span_of(one_span(turned, state=state))
    assert other["horizontal_tension_N"] == pytest.approx(one["horizontal_tension_N"], rel=2e-12)


def test_powers_of_two_in_force_change_nothing():
    """All forces times 1024: lengths and strains are the same to the last digit."""
    of = material.conductor()
    more = copy.deepcopy(of)
    more["weight_N_per_m"] *= 1024.0
    for part in more["parts"]:
        for key in ("loading_N", "creep_N"):
            part[key] = [1024.0 * term for term in part[key]]
        part["final_stiffness_N"] *= 1024.0
    given = one_span(more, state="after creep", pull=20e3 * 1024.0)
    given["conditions"][0]["loads"] = [cases.spread_load((0.0, 0.0, -22.0 * 1024.0))]
    one, other = span_of(one_span(of, state="after creep")), span_of(given)
    assert other["natural_length_m"] == one["natural_length_m"]
    assert other["sag_m"] == pytest.approx(one["sag_m"], rel=1e-13)


@pytest.mark.parametrize("state", STATES)
def test_a_straight_curve_is_the_linear_line(state):
    """One part with a straight loading line that unloads along itself: modulus and stiffness say the same."""
    plain = cases.line(12.0, 2e7, expansion=17e-6)
    row = {"loading_N": [0.0, 2e7], "valid_to": 0.01, "final_stiffness_N": 2e7, "expansion_per_K": 17e-6}
    curved = {**plain, "parts": [row], "test_temperature_degC": -7.0}
    for of in (plain, curved):
        of |= {"creep_coefficient": 1e-5, "creep_exponent": 0.2, "creep_hours": 1e4, "bedding_in_strain": 1e-4}
    one, other = span_of(one_span(plain, state=state)), span_of(one_span(curved, state=state))
    for key in KEYS:
        assert other[key] == pytest.approx(one[key], rel=1e-11, abs=1e-11), key
    added = {"initial": 0.0, "final": 1e-4, "after creep": 1e-4 + 1e-5 * 1e4**0.2}[state]
    assert one["permanent_strain"] == pytest.approx(added, abs=1e-15)


def test_permanent_stretch_grows_with_the_heaviest_condition():
    """More ice leaves more stretch, creep adds to it, and what is left never shrinks."""
    left = []
    for plf in (5.0, 15.0, 30.0, 60.0):
        problem = one_span(material.conductor(), state="final")
        problem["conditions"][0]["loads"] = [cases.spread_load((0.0, 0.0, -plf))]
        left.append(span_of(problem)["permanent_strain"])
    assert left == sorted(left)
    assert left[0] < left[-1]
    assert span_of(one_span(material.conductor(), state="after creep"))["permanent_strain"] > left[0]


def test_a_met_condition_returns_to_itself():
    """The heaviest condition in the state it has left is where it was: unloading starts from the loading curve."""
    problem = one_span(material.conductor())
    problem["conditions"][1] = {**problem["conditions"][0], "state": "final"}
    problem["conditions"][1] |= {"loads": copy.deepcopy(problem["conditions"][0]["loads"])}
    core = _core.Project(problem)
    heavy, again = (core.settle(c)["spans"][0] for c in (0, 1))
    # what counts is the span's mean strain; its ends are stretched beyond it (2 % of the tension), its middle less,
    # where the unloading line is steeper by a third: a 1e-3 of the tension is left
    assert again["horizontal_tension_N"] == pytest.approx(heavy["horizontal_tension_N"], rel=1e-3)


def test_legendre_pair_of_the_twin():
    """W + W* = T L where T = W'(L), W*' = L: quadrature of the law against itself."""
    line = curved_line(material.conductor(), 30.0, 15.0)
    assert len(expanded(material.conductor(), 30.0, 15.0, 0.0)) == 2
    tension = np.array([200.0, 3e3, 2e4, 9e4])
    stretch = line.stretch(tension)
    np.testing.assert_allclose(line.stored(stretch) + line.conjugate(tension), tension * stretch, rtol=1e-13)
    step = 1.0
    slope = (line.conjugate(tension + step) - line.conjugate(tension - step)) / (2.0 * step)
    np.testing.assert_allclose(slope, stretch, rtol=1e-9)
