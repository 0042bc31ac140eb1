"""Routes that turn in plan: statics by hand, relations that hold for any plan, springs at anchors, and the slow twin.

Tolerance of relations: as in test_metamorphic. Plan coordinates of 1e3 m are rounded to 1e-13 m, chords to twice that;
over 200 m with EA/T = 2e3 that is 2e-12 of a force.
"""

from __future__ import annotations

import copy
import math

import core_cases as cases
import numpy as np
import pytest

from tautwise import _core
from tautwise.reference import limits as twin_limits
from tautwise.reference.project import Twin, length_at_station

SAME = 4e-12
SPAN_KEYS = ("span_m", "rise_m", "natural_length_m", "line_length_m", "horizontal_tension_N", "tension_from_N",
             "tension_to_N", "tension_max_N", "sag_m", "slant_sag_m", "blowout_m", "low_elevation_m", "slope_max",
             "small_deflection_sag_m")  # fmt: skip
SUPPORT_KEYS = ("along_N", "across_N", "down_N", "resultant_N")
TURN = math.radians(20.0)


def at_angle_points(rows, places):
    """The supports at plan coordinates."""
    return [{**row, "station_m": x, "offset_m": y} for row, (x, y) in zip(rows, places, strict=True)]


def turning(rows, places, stringing, **parts):
    return {**cases.problem(at_angle_points(rows, places), stringing, **parts), "route": "turning"}


def bend(middle=None, pull=17e3, wind=0.0, angle=TURN, second=300.0, **parts):
    """Two level spans, of 300 m unless said otherwise, that turn to the left at the middle."""
    places = [(0.0, 0.0), (300.0, 0.0), (300.0 + second * math.cos(angle), second * math.sin(angle))]
    rows = [cases.support(0.0, 30.0), middle or cases.support(0.0, 30.0), cases.support(0.0, 30.0)]
    conditions = [cases.condition(wind_pressure_Pa=wind)]
    return turning(rows, places, cases.rule("pull", pull), conditions=conditions, **parts)


def settled(problem, condition=0, **options):
    found = _core.Project(problem).settle(condition, **options)
    assert found["status"] == "ok"
    return found


def column(found, *keys):
    return np.array([[row[key] for key in keys] for row in found], dtype=np.float64)


# --- statics by hand


def test_the_bisector_force_of_a_level_symmetric_turn():
    """Both spans pull with H at half the angle from the line across: 2 H sin(10 deg), towards the inside, the left."""
    found = settled(bend())
    middle = found["supports"][1]
    assert middle["across_N"] == pytest.approx(2.0 * 17e3 * math.sin(TURN / 2), rel=1e-12)
    assert abs(middle["along_N"]) < 1e-12 * 17e3
    assert middle["down_N"] == pytest.approx(15.97 * found["spans"][0]["natural_length_m"], rel=1e-12)
    assert middle["station_m"] == 300.0
    for end, sign in ((found["supports"][0], 1.0), (found["supports"][2], -1.0)):
        assert end["along_N"] == pytest.approx(sign * 17e3, rel=1e-12)
        assert abs(end["across_N"]) < 1e-12 * 17e3


@pytest.mark.parametrize("wind", [0.0, 400.0])
def test_all_forces_on_the_line_add_up_to_nothing(wind):
    """The supports' forces, turned back into the plan, are those of weight and wind square to each span."""
    problem = bend(wind=wind)
    found = settled(problem)
    directions = [0.0, TURN]
    total = np.zeros(3)
    for heading, row in zip((0.0, TURN / 2, TURN), found["supports"], strict=True):
        ahead, left = (
            np.array([math.cos(heading), math.sin(heading)]),
            np.array([-math.sin(heading), math.cos(heading)]),
        )
        total[:2] += row["along_N"] * ahead + row["across_N"] * left
        total[2] -= row["down_N"]
    for heading, row in zip(directions, found["spans"], strict=True):
        length = row["natural_length_m"]
        total -= length * np.array([-wind * 0.02 * math.sin(heading), wind * 0.02 * math.cos(heading), -15.97])
    assert np.abs(total).max() < 1e-11 * 17e3


def test_wind_square_to_each_span_bears_on_the_bisector_by_hand():
    """Symmetric: half of each span's wind acts at the angle point, at 10 deg from the bisector, besides 2 H sin(10)."""
    found = settled(bend(wind=400.0))
    span = found["spans"][0]
    wind = 400.0 * 0.02 * span["natural_length_m"]
    by_hand = 2.0 * span["horizontal_tension_N"] * math.sin(TURN / 2) + wind * math.cos(TURN / 2)
    assert found["supports"][1]["across_N"] == pytest.approx(by_hand, rel=1e-12)


def test_an_elastic_post_leans_along_the_bisector():
    """By its own across stiffness only: force over stiffness, along the bisector, which is at 100 deg in plan."""
    found = settled(bend(cases.post(0.0, 30.0, along=2e5, across=1e5)))
    middle = found["supports"][1]
    moved = np.array(middle["position_m"][:2]) - [300.0, 0.0]
    bisector = np.array([-math.sin(TURN / 2), math.cos(TURN / 2)])
    np.testing.assert_allclose(moved, middle["across_N"] / 1e5 * bisector, rtol=0, atol=1e-11)
    assert found["gap_relative"] < 1e-6


@pytest.mark.parametrize("rigid", ["along", "across"])
def test_a_post_that_gives_one_way_only(rigid):
    given = {"along": 8e4, "across": 6e4, rigid: math.inf}
    found = settled(bend(cases.post(0.0, 30.0, **given), wind=300.0, angle=-TURN))
    middle = found["supports"][1]
    moved = np.array(middle["position_m"][:2]) - [300.0, 0.0]
    ahead = np.array([math.cos(TURN / 2), -math.sin(TURN / 2)])
    left = np.array([ahead[1] * -1.0, ahead[0]])
    give = {"along": middle["along_N"] / given["along"], "across": middle["across_N"] / given["across"]}
    assert moved @ ahead == pytest.approx(give["along"], abs=1e-11)
    assert moved @ left == pytest.approx(give["across"], abs=1e-11)
    assert 0.0 <= found["gap_relative"] < 1e-6


@pytest.mark.parametrize("inside", [False, True])
def test_springs_at_anchors(inside):
    """Each direction by its own rate, at an end and at an angle point; the bracket closes."""
    spring = {"stiffness_along_N_per_m": 4e5, "stiffness_across_N_per_m": 2e5, "stiffness_vertical_N_per_m": 3e5}
    problem = bend(wind=300.0)
    j = 1 if inside else 2
    problem["supports"][j] |= spring
    found = settled(problem)
    state, at = found["supports"][j], problem["supports"][j]
    heading = TURN / 2 if inside else TURN
    moved = np.array(state["position_m"]) - [at["station_m"], at["offset_m"], 30.0]
    assert moved[2] == pytest.approx(-state["down_N"] / 3e5, abs=1e-11)
    assert moved[:2] @ [math.cos(heading), math.sin(heading)] == pytest.approx(state["along_N"] / 4e5, abs=1e-11)
    assert moved[:2] @ [-math.sin(heading), math.cos(heading)] == pytest.approx(state["across_N"] / 2e5, abs=1e-11)
    assert 0.0 <= found["gap_relative"] < 1e-6


def test_stiff_springs_tend_to_a_rigid_anchor():
    """A rate of 1e13 N/m gives 2e-9 m under 2e4 N; what follows is 2e-9 / 300 EA / T = 1e-8 of a force."""
    problem = bend(wind=300.0)
    for row in problem["supports"]:
        row |= dict.fromkeys((f"stiffness_{part}_N_per_m" for part in ("along", "across", "vertical")), 1e13)
    stiff, rigid = settled(problem), settled(bend(wind=300.0))
    found, expected = (column(each["supports"], *SUPPORT_KEYS) for each in (stiff, rigid))
    np.testing.assert_allclose(found, expected, rtol=0, atol=1e-7 * 17e3)


# --- relations

PLACES = [(0.0, 0.0), (210.0, 40.0), (480.0, 20.0), (700.0, 180.0), (700.0, 390.0)]
LENGTHS = (214.4, 271.3, 272.6, 210.6)


def rows():
    return [
        cases.support(0.0, 30.0, stiffness_along_N_per_m=3e5, stiffness_vertical_N_per_m=5e5),
        cases.hanger(0.0, 31.0, 2.5, 400.0),
        cases.post(0.0, 33.0, 9e4, 2e5),
        cases.hanger(0.0, 30.0, 3.0, 500.0, hanger_spread_m=4.4),
        cases.support(0.0, 28.0),
    ]


def general(turned=0.0, mirrored=1.0, moved=(0.0, 0.0)):
    """Four spans with every hold, wind, ice, and loads in both frames, with its plan turned, mirrored and moved."""
    c, s = math.cos(turned), math.sin(turned)

    def image(x, y):
        y *= mirrored
        return c * x - s * y + moved[0], s * x + c * y + moved[1]

    push = image(300.0, 500.0)
    force = (push[0] - moved[0], push[1] - moved[1], -900.0)
    condition = cases.condition(
        temperature_degC=-5.0,
        ice_thickness_m=0.01,
        wind_pressure_Pa=300.0,
        wind_angle_rad=mirrored * 1.3,
        resultant_addition_N_per_m=2.0,
        loads=[
            cases.point_load(400.0, force, frame="route"),
            cases.spread_load((0.0, 2.0 * mirrored, -8.0), 100.0, 350.0),
        ],
    )
    places = [image(x, y) for x, y in PLACES]
    return turning(rows(), places, cases.lengths_rule(*LENGTHS), conditions=[condition])


@pytest.fixture(scope="module")
def plain():
    return settled(general())


def agree(found, expected, signs=(1, 1, 1, 1)):
    np.testing.assert_allclose(column(found["spans"], *SPAN_KEYS), column(expected["spans"], *SPAN_KEYS), rtol=SAME)
    forces, others = (column(each["supports"], *SUPPORT_KEYS) for each in (found, expected))
    np.testing.assert_allclose(forces * signs, others, rtol=0, atol=SAME * 4e4)
    for key in ("station_m", "swing_rad"):
        np.testing.assert_allclose(column(found["supports"], key), column(expected["supports"], key), rtol=SAME)
    gaps = [each["gap_relative"] for each in (found, expected)]
    assert gaps[0] == pytest.approx(gaps[1], abs=1e-9)


@pytest.mark.parametrize("degrees", [37.0, 90.0, 180.0, -122.5])
def test_the_plan_turned(plain, degrees):
    """Nothing but positions changes, and those turn too."""
    turned = math.radians(degrees)
    found = settled(general(turned))
    agree(found, plain)
    c, s = math.cos(turned), math.sin(turned)
    x, y, z = column(plain["supports"], "position_m")[:, 0].T
    image = np.array([c * x - s * y, s * x + c * y, z]).T
    np.testing.assert_allclose(column(found["supports"], "position_m")[:, 0], image, rtol=0, atol=1e-11)


def test_the_plan_moved(plain):
    agree(settled(general(moved=(4096.0, -8192.0))), plain)


def test_the_plan_mirrored(plain):
    found = settled(general(mirrored=-1.0))
    agree(found, plain, (1, -1, 1, 1))
    swings = [column(each["supports"][1:4:2], "swing_across_rad") for each in (found, plain)]
    np.testing.assert_allclose(swings[0], -swings[1], rtol=1e-10)


MARKS = [{"place": "station", "at_m": 610.0}]


def test_supports_on_one_line_are_a_straight_route():
    """Heading east the axes are those of the straight route; only stations count from the first support."""
    stations = [0.0, 220.0, 500.0, 760.0]
    row = [cases.support(0.0, 20.0), cases.hanger(0.0, 23.0), cases.post(0.0, 25.0), cases.support(0.0, 18.0)]
    loads = [cases.point_load(300.0, (100.0, 200.0, -700.0), place="station")]
    conditions = [cases.condition(wind_pressure_Pa=300.0, loads=loads)]
    limits = [cases.limit("clearance", least=5.0), cases.limit("clearance", least=5.0, crossing=0)]
    parts = {"conditions": conditions, "limits": limits, "crossings": [(390.0, 420.0, 9.0)],
             "ground": [(0.0, 2.0), (250.0, 6.0), (760.0, 3.0)], "marks": MARKS}  # fmt: skip
    straight = cases.problem(at_angle_points(row, [(x, 0.0) for x in stations]), cases.rule("pull", 15e3), **parts)
    bent = turning(row, [(x + 512.0, 64.0) for x in stations], cases.rule("pull", 15e3), **parts)
    found, expected = settled(bent), settled(straight)
    agree(found, expected)
    for key in ("sag_station_m", "low_station_m"):
        np.testing.assert_allclose(column(found["spans"], key), column(expected["spans"], key), rtol=1e-9)
    for kind in ("marks", "loads"):
        (mine,), (theirs,) = found[kind], expected[kind]
        assert mine["station_m"] == pytest.approx(theirs["station_m"], abs=1e-10)
        assert theirs["station_m"] == theirs["position_m"][0]
        assert mine["position_m"][0] - 512.0 == pytest.approx(theirs["position_m"][0], abs=1e-10)
    judged = [_core.Project(each).judge() for each in (bent, straight)]
    for mine, theirs in zip(*judged, strict=True):
        assert mine["value"] == pytest.approx(theirs["value"], abs=1e-10)
        assert mine["station_m"] == pytest.approx(theirs["station_m"], abs=1e-6)


# --- the twin


def drawn(seed):
    """Two to five spans that turn by up to 50 deg, with any hold, springs, partial loads and loads at stations."""
    rng = np.random.default_rng(seed)
    n = int(rng.integers(2, 6))
    heading = np.cumsum(rng.uniform(-0.8, 0.8, n)) + rng.uniform(0, 2 * math.pi)
    steps = rng.uniform(120.0, 320.0, n)
    corners = np.cumsum(steps[:, None] * np.column_stack([np.cos(heading), np.sin(heading)]), axis=0)
    places = np.vstack([[0.0, 0.0], corners]) + rng.uniform(-500, 500, 2)
    row = [hold(rng, end=j in (0, n)) for j in range(n + 1)]
    total = float(steps.sum())
    loads = [
        cases.point_load(float(rng.uniform(20, total - 20)), (50.0, -300.0, -700.0), "station", "route"),
        cases.spread_load((0.0, 1.0, -6.0), 0.2 * total, 0.6 * total, place="station"),
    ]
    conditions = [cases.condition(wind_pressure_Pa=float(rng.uniform(0, 500)), temperature_degC=5.0, loads=loads)]
    return turning(row, [tuple(map(float, each)) for each in places], cases.rule("pull", 14e3), conditions=conditions)


def hold(rng, *, end):
    elevation = float(rng.normal(30.0, 0.8))
    kind = rng.choice(["anchor", "spring", "post"] if end else ["anchor", "spring", "hanger", "vee", "post", "guide"])
    if kind in ("hanger", "vee"):
        spread = {"hanger_spread_m": float(rng.uniform(0.5, 5.0))} if kind == "vee" else {}
        return cases.hanger(0.0, elevation, 3.0, float(rng.uniform(100, 900)), **spread)
    along, across, up = (float(value) for value in 10.0 ** rng.uniform(4.8, 6.5, 3))
    if kind in ("post", "guide"):
        return cases.post(0.0, elevation, along, math.inf if kind == "guide" else across)
    rates = {"stiffness_along_N_per_m": along, "stiffness_across_N_per_m": across, "stiffness_vertical_N_per_m": up}
    return cases.support(0.0, elevation, **(rates if kind == "spring" else {}))


@pytest.mark.parametrize("seed", range(10))
def test_the_twin_agrees(seed):
    """Tolerances as in test_twin: 1e-9 of forces and places; where an extreme lies is flat."""
    problem = drawn(seed)
    found, twin = settled(problem), Twin(problem)
    expected, settled_twin = twin.states(0), twin.settle(0)
    size = max(row["tension_max_N"] for row in expected["spans"])
    for mine, theirs in zip(found["spans"], expected["spans"], strict=True):
        for key, value in theirs.items():
            assert mine[key] == pytest.approx(value, rel=1e-9, abs=1e-5 if "station" in key else 1e-8), key
    for mine, theirs in zip(found["supports"], expected["supports"], strict=True):
        for key, value in theirs.items():
            assert (mine[key] is None) == math.isnan(value)
            atol = 1e-9 * size if key.endswith("N") else 1e-8
            assert math.isnan(value) or mine[key] == pytest.approx(value, rel=0, abs=atol), key
    places = np.array([row["position_m"] for row in found["supports"]])
    np.testing.assert_allclose(places, settled_twin.clamps, rtol=0, atol=1e-8)
    at = found["loads"][0]
    strung = length_at_station(twin.settle(-1), problem["conditions"][0]["loads"][0]["from_m"])
    assert at["at_length_m"] == pytest.approx(strung, abs=1e-8)
    assert 0.0 <= found["gap_relative"] <= 1e-6
    scale = sum(span.stored_J() for span in settled_twin.spans) + abs(settled_twin.potential_J())
    assert abs(settled_twin.potential_J() - settled_twin.lower_bound_J()) < 1e-11 * scale


def test_the_core_strings_as_the_twin_does():
    problem = drawn(3)
    np.testing.assert_allclose(_core.Project(problem).string()["lengths_m"], Twin(problem).lengths_m(), rtol=1e-12)


def limited():
    problem = drawn(5)
    total = sum(math.dist(*map(at, pair)) for pair in zip(problem["supports"], problem["supports"][1:], strict=False))
    problem["ground"] = cases.profile([(0.0, 2.0), (0.3 * total, 12.0), (0.55 * total, 4.0), (total + 1.0, 8.0)])
    problem["crossings"] = [{"from_m": 0.6 * total, "to_m": 0.75 * total, "top_m": 9.0}]
    given = [
        cases.limit("clearance", least=5.0),
        cases.limit("clearance", least=4.0, crossing=0),
        cases.limit("support_load", direction="across", most=6e3),
        cases.limit("support_load", direction="along", most=20e3),
        cases.limit("swing", most=1.0),
        cases.limit("uplift", least=0.0),
        cases.limit("tension", most=30e3),
    ]
    problem["limits"] = [cases.complete(each, 1, len(problem["supports"])) for each in given]
    return problem


def at(row):
    return row["station_m"], row["offset_m"]


def test_limits_agree():
    problem = limited()
    found, expected = _core.Project(problem).judge(), Twin(problem).judge()
    assert len([row for row in found if row["value"] is not None]) == len(expected)
    for row in found:
        verdict = expected.get((row["limit"], row["condition"]))
        if verdict is not None:
            assert isinstance(verdict, twin_limits.Verdict)
            assert (row["value"], row["utilisation"]) == pytest.approx((verdict.value, verdict.utilisation), rel=1e-8)


def test_a_profile_of_many_points_over_an_oblique_span():
    """The bound that spares most of a profile holds where the line's direction is no axis; the twin samples."""
    problem = bend(wind=300.0)
    problem = {**problem, "supports": [turned(row, 0.7) for row in problem["supports"]]}
    x = np.linspace(-1.0, 601.0, 241)
    problem["ground"] = {"station_m": x, "elevation_m": 5.0 + 3.0 * np.sin(0.05 * x)}
    problem["limits"] = [cases.complete(cases.limit("clearance", least=2.0), 1, 3)]
    (found,) = _core.Project(problem).judge()
    expected = Twin(problem).judge()[0, 0]
    assert found["value"] == pytest.approx(expected.value, abs=1e-9)


def turned(row, angle):
    x, y = at(row)
    c, s = math.cos(angle), math.sin(angle)
    return {**row, "station_m": c * x - s * y, "offset_m": s * x + c * y}


# --- places along the route


def test_stations_that_the_clamp_skips_are_at_the_clamp():
    """A hanger inside of the turn: its clamp's stations in both spans lie either side of the support's own."""
    problem = bend(cases.hanger(0.0, 30.0, 3.0, 300.0), marks=[{"place": "station", "at_m": 300.0}])
    found = settled(problem)
    (mark,), middle = found["marks"], found["supports"][1]
    assert mark["position_m"] == pytest.approx(middle["position_m"], abs=1e-12)
    aside = middle["position_m"][1] / math.cos(TURN / 2)
    assert mark["station_m"] == pytest.approx(300.0 + aside * math.sin(TURN / 2), abs=1e-9)
    assert aside > 1.0


def test_places_along_the_line_carry_their_station():
    core = _core.Project(bend(cases.post(0.0, 30.0)))
    shape = core.shape(0, 40)
    x, y = shape["position_m"][41:, :2].T
    ahead = 300.0 + (x - 300.0) * math.cos(TURN) + y * math.sin(TURN)
    np.testing.assert_allclose(shape["station_m"][41:], ahead, rtol=0, atol=1e-10)
    np.testing.assert_array_equal(shape["station_m"][:40], shape["position_m"][:40, 0])
    found = core.at(0, np.array([100.0, 450.0, 700.0]))
    np.testing.assert_allclose(found["station_m"][:2], [100.0, 450.0], atol=1e-9)
    assert math.isnan(found["station_m"][2])


def test_the_greatest_tension_is_placed_along_the_route():
    """At the higher end, which is the far clamp of the second span: the end of the route."""
    problem = bend(limits=[cases.limit("tension", most=30e3)])
    problem["supports"][2]["elevation_m"] = 50.0
    (row,) = _core.Project(problem).judge()
    assert (row["span"], row["station_m"]) == (1, pytest.approx(600.0, abs=1e-9))


# --- moving a support


def window_problem(most=5e3):
    """A clearance when hot against the across force of an angle point."""
    rules = [cases.limit("clearance", least=6.0), cases.limit("support_load", direction="across", most=most)]
    ground = [(-10.0, 10.0), (700.0, 12.0)]
    problem = bend(cases.post(0.0, 30.0, 4e5, 4e5), second=220.0, limits=rules, ground=ground)
    return {**problem, "stringing": cases.rule("none", None)}


def test_prices_move_supports_along_their_own_axes():
    """Against the same difference made by hand: the support moved in plan, stations of the route counted anew.

    Margins of 1e4 N are rounded to 1e-11 of themselves; over 2e-3 m that is 1e-4 N/m.
    """
    problem = window_problem(7e3)
    window = _core.Project(problem).window()
    prices = [row for row in window["prices"] if row["variable"] == "support_station"]
    assert window["open"]
    assert {row["support"] for row in prices} >= {1}
    for row in prices:
        pull = window[row["end"]]["pull_N"]
        margins = [margin(moved_ahead(problem, row["support"], by), row, pull) for by in (1e-3, -1e-3)]
        assert row["margin_per_unit"] == pytest.approx((margins[0] - margins[1]) / 2e-3, rel=1e-6, abs=1e-4)
    assert any(abs(row["margin_per_unit"]) > 1.0 for row in prices)


def moved_ahead(problem, support, by):
    moved = copy.deepcopy(problem)
    heading = (0.0, TURN / 2, TURN)[support]
    moved["supports"][support]["station_m"] += by * math.cos(heading)
    moved["supports"][support]["offset_m"] += by * math.sin(heading)
    return moved


def margin(problem, row, pull):
    judged = _core.Project(problem).judge(pull=pull)
    return next(each["margin"] for each in judged if each["limit"] == row["limit"])


def test_a_relaxation_that_moves_a_support_opens_the_window():
    problem = window_problem(2.5e3)
    window = _core.Project(problem).window()
    assert not window["open"]
    moves = [row for row in window["relax"] if row["kind"] == "support_station"]
    for row in moves:
        assert _core.Project(moved_ahead(problem, row["support"], row["by"])).window()["open"]
    heights = [row for row in window["relax"] if row["kind"] == "support_height"]
    for row in heights:
        raised = copy.deepcopy(problem)
        raised["supports"][row["support"]]["elevation_m"] += row["by"]
        assert _core.Project(raised).window()["open"]
    assert moves or heights
