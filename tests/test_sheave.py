"""Lines over sheaves, in service and while they are strung: oracles, the twin, and relations that hold for any of them.

Two right answers: closing errors of 1e-13 of a span move the tension by up to EA/T of that, so 1e-10 of tensions is
what is promised, and met by a wide margin on these lines (EA/T is about 2000).
"""

from __future__ import annotations

import copy
import math

import core_cases as cases
import mpmath as mp
import numpy as np
import pytest
from scipy.integrate import quad

import tautwise as tw
from tautwise import _core
from tautwise.reference.project import Twin, held_down
from tautwise.reference.sheave import run_over
from tautwise.reference.stringing import string_to

PROMISED = 1e-10
W, EA = 15.97, 34.7e6
G = 9.80665


def sheave(station, elevation, length=0.0, weight=0.0, **other):
    return cases.support(
        station, elevation, "sheave", hanger_length_m=length, hanger_weight_N=weight, **other
    )


def three_spans(elevations=(0.0, 0.0, 0.0, 0.0), lengths=(250.5, 402.0, 300.5), **other):
    """250, 400 and 300 m, 953 m of line in all: I of the own oracles where it is level."""
    a, b, c, d = elevations
    supports = [cases.support(0.0, a), sheave(250.0, b), sheave(650.0, c), cases.support(950.0, d)]
    return cases.problem(supports, cases.lengths_rule(*lengths), **other)


def settle(problem, condition=0, **options):
    found = _core.Project(problem).settle(condition, **options)
    assert found["status"] == "ok", found["status_text"]
    return found


# I, three spans a): 30 digits; level, frictionless point pulleys, total 953.0 m.
ORACLE = {
    "tension_from_N": (18229.9522451,) * 3,
    "tension_to_N": (18229.9522451,) * 3,
    "horizontal_tension_N": (18119.9944082, 17945.254677, 18071.1125259),
    "natural_length_m": (250.374481229, 401.904131087, 300.721387685),
    "sag_m": (6.88888103116, 17.8363161315, 9.95133397143),
}


@pytest.mark.parametrize("rule", [("span_lengths", None), ("total_length", 953.0)], ids=["lengths", "total"])
def test_three_level_spans_against_thirty_digits(rule):
    problem = three_spans()
    if rule[0] == "total_length":
        problem["stringing"] = cases.rule(*rule)
    found = settle(problem)
    for key, values in ORACLE.items():
        for span, value in zip(found["spans"], values, strict=True):
            assert span[key] == pytest.approx(value, rel=1e-11)  # as many digits as are given
    assert found["sheave_imbalance_N"] < 1e-10 * 18230.0
    assert found["gap_relative"] < 1e-6


def test_by_the_project_file():
    """The same through a project: one natural length for the whole line."""
    names, stations = ("A", "B", "C", "D"), (0, 250, 650, 950)
    holds = ("anchor", "sheave", "sheave", "anchor")
    project = tw.Project(
        line={"weight": "15.97 N/m", "stiffness": "34.7 MN"},
        support=[
            {"name": name, "station": f"{x} m", "elevation": "30 m", "hold": hold}
            for name, x, hold in zip(names, stations, holds, strict=True)
        ],
        stringing={"temperature": "15 degC", "natural_length": "953 m"},
        condition=[{"name": "bare", "temperature": "15 degC"}],
    )
    found = project.settle()
    assert [span.tension_max_N for span in found.spans] == pytest.approx([18229.9522451] * 3, rel=1e-11)
    assert found.sheave_imbalance_N < 1e-6
    assert found.supports[1].swing_deg is None


def ended(h, v, length):
    """Where a span ends that starts with the tension (h, v), v down the line, and its tension there; Irvine, ch. 1."""
    far = v - mp.mpf(W) * length
    x = h * length / mp.mpf(EA) + h / mp.mpf(W) * (mp.asinh(v / h) - mp.asinh(far / h))
    z = (v * length - mp.mpf(W) * length**2 / 2) / mp.mpf(EA)
    z += (mp.hypot(h, v) - mp.hypot(h, far)) / mp.mpf(W)
    return x, z, mp.hypot(h, far)


@pytest.mark.parametrize("elevations", [(0.0, 20.0, 9.0, 0.0), (100.0, 131.0, 88.0, 142.0)])
def test_uneven_levels_against_fifty_digits(elevations):
    found = settle(three_spans(elevations))
    runs = (250, 400, 300)

    def equations(*unknown):
        values = [mp.mpf(value) for value in unknown]
        spans = [values[3 * k : 3 * k + 3] for k in range(3)]
        missed, behind = [sum(span[2] for span in spans) - 953], None
        for k, (h, v, length) in enumerate(spans):
            x, z, far = ended(h, v, length)
            # ended() runs down the line where v is positive: up is minus z.
            missed += [x - runs[k], -z - (mp.mpf(elevations[k + 1]) - mp.mpf(elevations[k]))]
            if behind is not None:
                missed.append(mp.hypot(h, v) - behind)
            behind = far
        return missed

    with mp.workdps(50):
        start = []
        for span in found["spans"]:
            h = span["horizontal_tension_N"]
            up = span["tension_from_N"] ** 2 - h**2
            # the sign of v: the line falls from its start unless it climbs steeper than its own sag
            falls = span["rise_m"] / span["span_m"] < W * span["natural_length_m"] / (2.0 * h)
            start += [h, math.sqrt(up) * (1.0 if falls else -1.0), span["natural_length_m"]]
        exact = mp.findroot(equations, start, tol=1e-40, maxsteps=40)
    for k, span in enumerate(found["spans"]):
        h, v, length = (float(exact[3 * k + i]) for i in range(3))
        assert span["horizontal_tension_N"] == pytest.approx(h, rel=PROMISED)
        assert span["tension_from_N"] == pytest.approx(math.hypot(h, v), rel=PROMISED)
        assert span["natural_length_m"] == pytest.approx(length, rel=PROMISED)


def mixed():
    """A fixed and a swinging sheave, a hanger, a sheave again; ice, wind, heat, loads fixed on the line."""
    supports = [
        cases.support(0.0, 100.0),
        sheave(250.0, 130.0),
        sheave(650.0, 110.0, 1.5, 300.0),
        cases.hanger(900.0, 118.0),
        sheave(1100.0, 121.0),
        cases.support(1300.0, 125.0),
    ]
    conditions = [
        cases.condition(temperature_degC=-5.0, ice_thickness_m=0.012, wind_pressure_Pa=350.0),
        cases.condition(temperature_degC=60.0, loads=[cases.point_load(400.0, (150.0, 80.0, -900.0))]),
        cases.condition(loads=[cases.spread_load((0.0, 0.0, -20.0), 300.0, 600.0)]),
    ]
    of = cases.line(diameter=0.02)
    return cases.problem(supports, cases.rule("pull", 18e3), of=of, conditions=conditions)


@pytest.fixture(scope="module")
def twin():
    return Twin(mixed())


@pytest.mark.parametrize("condition", range(3))
def test_mixed_holds_against_the_twin(twin, condition):
    found, expected = settle(mixed(), condition), twin.states(condition)
    strung = _core.Project(mixed()).string()
    assert strung["lengths_m"] == pytest.approx(twin.lengths_m(), rel=1e-12)
    for span, wanted in zip(found["spans"], expected["spans"], strict=True):
        for key in ("natural_length_m", "horizontal_tension_N", "tension_from_N", "tension_to_N", "tension_max_N"):
            assert span[key] == pytest.approx(wanted[key], rel=PROMISED), key
        assert span["sag_m"] == pytest.approx(wanted["sag_m"], rel=1e-8)  # the twin looks for it by golden section
    for support, wanted in zip(found["supports"], expected["supports"], strict=True):
        for key in ("along_N", "across_N", "down_N"):
            assert support[key] == pytest.approx(wanted[key], abs=1e-9 * 5e4), key
    assert found["supports"][2]["swing_rad"] is not None
    assert found["supports"][1]["swing_rad"] is None


def test_a_load_keeps_its_place_on_the_line():
    """A mark and a load at one natural length stay together, however much runs over the sheaves."""
    problem = mixed()
    problem["marks"] = [{"place": "length", "at_m": 400.0}, {"place": "length", "at_m": 251.0}]
    loaded, bare = settle(problem, 1), settle(problem, 0)
    assert loaded["marks"][0]["position_m"] == loaded["loads"][0]["position_m"]
    first = [found["spans"][0]["natural_length_m"] for found in (loaded, bare)]
    assert abs(first[0] - first[1]) > 0.01  # the line has run
    for found, length in zip((loaded, bare), first, strict=True):
        ahead = found["marks"][1]["position_m"][0] - 250.0
        assert ahead == pytest.approx(251.0 - length, rel=0.05)  # natural length against its horizontal part


H = 2e-4  # m of line that is transferred


def energy(problem, lengths):
    """Complementary energy with the sheaves as clamps: each span between fixed points."""
    held = copy.deepcopy(problem)
    for row in held["supports"]:
        row["hold"] = "anchor"
    held["stringing"] = cases.lengths_rule(*lengths)
    return settle(held)["energy_lower_J"]


@pytest.mark.parametrize("across", [0, 1])
def test_energy_is_stationary_under_transfer(across):
    """Central differences over each sheave: T is steep in the length, so V'(0) = h^2 T'' / 6 is 1e-8 T here; energies
    of 1e5 J, rounded at 1e-11, add as much."""
    problem = three_spans((0.0, 20.0, 9.0, 0.0))
    found = settle(problem)
    lengths = [span["natural_length_m"] for span in found["spans"]]
    moved = {}
    for h in (-H, 0.0, H):
        at = list(lengths)
        at[across] -= h
        at[across + 1] += h
        moved[h] = energy(problem, at)
    tension = found["spans"][1]["tension_from_N"]
    slope = (moved[H] - moved[-H]) / (2.0 * H)
    assert abs(slope) < 1e-7 * tension  # a sheave left clamped shows some per cent of it
    assert moved[0.0] < min(moved[H], moved[-H])


def told(problem, mirror):
    """The same line from its other end."""
    other = copy.deepcopy(problem)
    total = problem["supports"][-1]["station_m"]
    if mirror:
        other["supports"] = other["supports"][::-1]
        for row in other["supports"]:
            row["station_m"] = total - row["station_m"]
        other["stringing"]["lengths_m"] = other["stringing"]["lengths_m"][::-1]
    return other


def test_ends_swapped():
    problem = three_spans((0.0, 20.0, 9.0, -14.0))
    there, back = settle(problem), settle(told(problem, mirror=True))
    for span, other in zip(there["spans"], back["spans"][::-1], strict=True):
        assert span["natural_length_m"] == pytest.approx(other["natural_length_m"], rel=1e-12)
        assert span["tension_from_N"] == pytest.approx(other["tension_to_N"], rel=1e-11)
        assert span["sag_m"] == pytest.approx(other["sag_m"], rel=1e-11)


@pytest.mark.parametrize(("length", "force"), [(4.0, 1.0), (1.0, 16.0), (0.3048, 4.4482216152605)])
def test_other_units(length, force):
    """Lengths by one factor, forces by another."""
    plain = three_spans((0.0, 20.0, 9.0, -14.0))
    other = copy.deepcopy(plain)
    other["line"]["weight_N_per_m"] *= force / length
    other["line"]["stiffness_N"] *= force
    for row in other["supports"]:
        row["station_m"] *= length
        row["elevation_m"] *= length
    other["stringing"]["lengths_m"] = [value * length for value in other["stringing"]["lengths_m"]]
    found, wanted = settle(other), settle(plain)
    for span, base in zip(found["spans"], wanted["spans"], strict=True):
        assert span["tension_from_N"] == pytest.approx(base["tension_from_N"] * force, rel=1e-11)
        assert span["natural_length_m"] == pytest.approx(base["natural_length_m"] * length, rel=1e-12)


def test_a_sheave_on_a_straight_line_carries_nothing():
    """A tight line without weight, and a sheave on its chord."""
    line = cases.line(weight=0.0, expansion=1e-5)
    supports = [cases.support(0.0, 0.0), sheave(40.0, 4.0), cases.support(100.0, 10.0)]
    problem = cases.problem(supports, cases.lengths_rule(40.0, 60.0), of=line)
    found = settle(problem)
    chord = math.hypot(100.0, 10.0)
    assert found["spans"][0]["tension_from_N"] == pytest.approx(EA * (chord / 100.0 - 1.0), rel=1e-11)
    assert abs(found["supports"][1]["resultant_N"]) < 1e-6


# ---- strung over sheaves ---------------------------------------------------------------------------------------------

STATIONS = (0.0, 260.0, 545.0, 840.0, 985.0, 1255.0, 1530.0)
ELEVATIONS = (113.0, 140.0, 187.0, 232.0, 239.0, 222.0, 177.0)


def hill(method="over_sheaves", link=1.6, weight=450.0, stations=STATIONS, elevations=ELEVATIONS, **rule):
    """Six spans on a hill; `rule`: more keys of the stringing."""
    supports = [
        cases.support(x, z)
        if j in (0, len(stations) - 1)
        else cases.hanger(x, z, link, weight)
        for j, (x, z) in enumerate(zip(stations, elevations, strict=True))
    ]
    stringing = {**cases.rule("pull", 18e3), "method": method, **rule}
    return cases.problem(supports, stringing)


def offsets(problem, **options):
    return [row["offset_m"] for row in _core.Project(problem).sheet(np.array([]), **options)["supports"]]


@pytest.fixture(scope="module")
def hill_twin():
    return Twin(hill())


def test_offsets_against_the_twin(hill_twin):
    strung, lengths = hill_twin.strung(18e3), hill_twin.lengths_m()
    found = _core.Project(hill()).sheet(np.array([]))
    marks = np.cumsum(lengths) - np.cumsum(strung.lengths_m)
    assert [row["offset_m"] for row in found["supports"]] == pytest.approx([0.0, *marks], abs=1e-10)
    assert [row["natural_m"] for row in found["lengths"]] == pytest.approx(lengths, rel=1e-12)
    for k, reading in enumerate(found["temperatures"][-1]["over"]):
        pull = strung.spans[k].pull
        assert reading["horizontal_tension_N"] == pytest.approx(math.hypot(pull[0], pull[1]), rel=PROMISED)


def test_offsets_keep_what_they_must():
    """None at the ends; behind the mark on the way up, ahead beyond it: on sheaves the line lies too far downhill."""
    found = offsets(hill())
    assert found[0] == found[-1] == 0.0
    assert found[1] < -0.05
    assert found[2] < -0.1
    assert found[5] > 0.05
    core = _core.Project(hill())
    blocks = core.sheet(np.array([]))["temperatures"][-1]["over"]
    assert sum(core.string()["lengths_m"]) == pytest.approx(
        sum(_core.Project(hill(clip="lies")).string()["lengths_m"]), rel=1e-14
    )
    assert blocks[0]["horizontal_tension_N"] == pytest.approx(18e3, rel=1e-12)


def test_level_ends_and_equal_spans_need_no_offset():
    """Equal spans over level sheaves: equal tension is equal horizontal tension."""
    level = hill(stations=(0.0, 250.0, 500.0, 750.0, 1000.0), elevations=(100.0,) * 5)
    assert offsets(level) == pytest.approx([0.0] * 5, abs=1e-10)


def test_offsets_of_small_slopes():
    """Parabolas between fixed points: H_k grows by w dz over the supports' lowest points, and a span's length is its
    chord + w^2 l^3 cos(phi) / (24 H^2), less H l / EA. What they leave out is of the order of slope^2, 1e-3 here; the
    links are so short that the blocks stand still."""
    stations, elevations = (0.0, 200.0, 400.0, 600.0, 800.0), (0.0, 4.0, 9.0, 11.0, 6.0)
    pull, link = 18e3, 1e-4
    supports = [
        cases.support(x, z) if j in (0, 4) else cases.hanger(x, z, link, 0.0)
        for j, (x, z) in enumerate(zip(stations, elevations, strict=True))
    ]
    problem = cases.problem(supports, {**cases.rule("pull", pull), "method": "over_sheaves"})
    rises = np.diff(elevations)

    def end_tension(h, rise, far):
        slope = rise / 200.0 + (1 if far else -1) * W * 200.0 / (2.0 * h)
        return h * (1.0 + slope**2 / 2.0)

    blocks = [pull]
    for k in range(1, 4):
        behind = end_tension(blocks[-1], rises[k - 1], far=True)
        h = blocks[-1]
        for _ in range(50):
            h -= end_tension(h, rises[k], far=False) - behind
        blocks.append(h)

    def length(h, rise):
        chord = math.hypot(200.0, rise)
        return chord + W**2 * 200.0**3 / (24.0 * h**2) * (200.0 / chord) - h * chord / EA

    total = sum(map(length, blocks, rises))
    low, high = 0.5 * pull, 2.0 * pull
    for _ in range(200):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if sum(length(middle, rise) for rise in rises) > total else (low, middle)
    wanted = np.cumsum([length(low, rise) - length(h, rise) for h, rise in zip(blocks, rises, strict=True)])
    found = offsets(problem)
    assert found[1:-1] == pytest.approx(list(wanted[:-1]), rel=0.005)
    assert min(abs(one) for one in found[1:-1]) > 5e-4


@pytest.mark.parametrize("rule", ["tension", "sag", "total_length"])
def test_every_rule_finds_the_pull_again(rule):
    core = _core.Project(hill())
    reading = core.sheet(np.array([]))["temperatures"][-1]["over"]
    lies = _core.Project(hill(clip="lies")).string()["lengths_m"]
    value, index = {
        "tension": (reading[1]["tension_max_N"], 2),
        "sag": (reading[3]["sag_m"], 3),
        "total_length": (sum(lies), None),
    }[rule]
    again = hill()
    again["stringing"].update(rule=rule, value=value, index=index)
    assert _core.Project(again).string()["horizontal_tension_N"] == pytest.approx(18e3, rel=1e-9)


@pytest.mark.parametrize("drag", [-1, 1])
def test_friction_against_the_twin(drag, hill_twin):
    """Pulled from the first end the tension falls ahead, from the last end it grows; e^(mu theta) at every sheave."""
    problem = hill(friction=0.03)
    found = _core.Project(problem).sheet(np.array([]))
    rows = found["first" if drag < 0 else "last"]
    free = found["temperatures"][-1]["over"]
    if drag > 0:
        assert rows[-1]["horizontal_tension_N"] == pytest.approx(free[-1]["horizontal_tension_N"], rel=1e-10)
    else:
        assert rows[0]["horizontal_tension_N"] == pytest.approx(18e3, rel=1e-12)
    assert all(row["horizontal_tension_N"] < one["horizontal_tension_N"] + 1e-6
               for row, one in zip(rows, free, strict=True))  # fmt: skip
    twin = Twin(problem)
    pull = rows[0]["horizontal_tension_N"]
    plumb = string_to(twin.material(15.0), W, twin.supports, pull)
    strung = twin.pulled_in(plumb, pull, drag)
    for row, span in zip(rows, strung.spans, strict=True):
        assert row["horizontal_tension_N"] == pytest.approx(math.hypot(*span.pull[:2]), rel=PROMISED)


def test_lifted_hangers_are_held_down():
    """Pulled so hard that the line lifts a hanger: it is a fixed sheave at its plumb end, in the twin too."""
    problem = hill()
    problem["stringing"]["value"] = 2e5
    twin = Twin(problem)
    plumb = string_to(twin.material(15.0), W, twin.supports, 2e5)
    assert [support.hangs for support in held_down(twin.supports, plumb)].count(False) > 2
    assert _core.Project(problem).string()["lengths_m"] == pytest.approx(twin.lengths_m(), rel=1e-11)
    sheet = _core.Project(problem).sheet(np.array([]))
    assert min(row["block_down_N"] for row in sheet["supports"][1:-1]) < 0.0
    assert run_over(twin.bare(plumb.lengths_m), {}).spans[0].length_m == plumb.lengths_m[0]


def test_a_window_over_sheaves():
    """The window judges the clamped line; at its ends the limits are met to rounding."""
    limits = [cases.limit("tension", most=30e3), cases.limit("sag", most=7.0)]
    problem = {**hill(), "limits": [cases.complete(one, 1, 7) for one in limits]}
    core = _core.Project(problem)
    found = core.window()
    assert found["open"]
    assert found["verified"]
    for end in ("low", "high"):
        rows = core.judge(pull=found[end]["pull_N"])
        assert max(row["utilisation"] for row in rows) == pytest.approx(1.0, abs=1e-9)


# ---- return waves ----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("temperature", [-10.0, 15.0, 40.0])
def test_return_waves_by_quadrature(temperature):
    """2 int ds sqrt(m lambda / T) over the hung line, by SciPy; T and lambda from the catenary of the reading."""
    found = _core.Project(hill()).sheet(np.array([temperature]))
    rows = found["temperatures"][0]["clamped"]
    strain = 18.9e-6 * (temperature - 15.0)
    settled = cases.problem(
        hill()["supports"],
        cases.lengths_rule(*(row["natural_m"] for row in found["lengths"])),
        conditions=[cases.condition(temperature_degC=temperature)],
    )
    spans = settle(settled)["spans"]
    for row, span in zip(rows, spans, strict=True):
        h, t0, t1, length = (span[key] for key in ("horizontal_tension_N", "tension_from_N", "tension_to_N",
                                                   "natural_length_m"))  # fmt: skip
        # Statics: v0 + v1 = w S and v0^2 - v1^2 = t0^2 - t1^2, v0 down the line at the start.
        v0 = 0.5 * (W * length + (t0**2 - t1**2) / (W * length))

        def slowness(s, v0=v0, h=h):
            t = math.hypot(h, v0 - W * s)
            return math.sqrt(W / G * (1.0 + strain + t / EA) / t)

        exact = 2.0 * quad(slowness, 0.0, length, epsabs=1e-13, epsrel=1e-13)[0]
        assert row["return_s"] == pytest.approx(exact, rel=1e-10)


def test_the_parabola_of_flat_spans():
    """2 sqrt(8 D / g) is off by the order of (sag / span)^2: 1e-4 and less for a sag below 1 % of the span."""
    level = hill(stations=(0.0, 250.0, 500.0), elevations=(100.0,) * 3)
    rows = _core.Project(level).sheet(np.array([]))["temperatures"][-1]["clamped"]
    for row in rows:
        assert row["return_parabola_s"] == pytest.approx(2.0 * math.sqrt(8.0 * row["sag_m"] / G), rel=1e-14)
        flat = (row["sag_m"] / 250.0) ** 2
        assert row["return_s"] == pytest.approx(row["return_parabola_s"], rel=2.0 * flat + 1e-5)
        assert row["return_s"] != row["return_parabola_s"]
