"""Features that meet: spacing and turning routes, courses of curved lines, history, carriages, winds."""

from __future__ import annotations

import copy
import math

import core_cases as cases
import material_cases as material
import numpy as np
import pytest

import tautwise as tw
from tautwise import _core
from tautwise.errors import InputError
from tautwise.reference.project import Twin

SAME = 1e-9  # as in test_twin

# --- spacing


def line_file(title, places, elevation, *, turning, limit=""):
    keys = ("east", "north") if turning else ("station", "offset")
    supports = "".join(
        f'[[support]]\nname = "{title}{j}"\n{keys[0]} = "{x!r} m"\n{keys[1]} = "{y!r} m"\nelevation = "{elevation} m"\n'
        for j, (x, y) in enumerate(places)
    )
    head = f'format = "tautwise 1"\ntitle = "{title}"\n[line]\nweight = "3 N/m"\nstiffness = "6 MN"\n'
    strung = '[stringing]\ntemperature = "10 degC"\nhorizontal_tension = "4 kN"\n'
    return head + supports + strung + '[[condition]]\nname = "bare"\ntemperature = "10 degC"\n' + limit


LIMIT = '[[limit]]\nid = "apart"\nkind = "spacing"\nother = "upper.taut.toml"\nleast = "1 m"\n'
BEND = [(100.0, 50.0), (180.0, 110.0), (180.0, 200.0)]


def spaced(folder, *, shift="", here=BEND, there=BEND, turning=(True, True)):
    upper = line_file("P", there, 10, turning=turning[1])
    (folder / "upper.taut.toml").write_text(upper)
    file = folder / "lower.taut.toml"
    file.write_text(line_file("A", here, 8, turning=turning[0], limit=LIMIT + shift))
    return tw.load(file)


def test_lines_that_turn_together_keep_their_stations(tmp_path):
    """The same plan 2 m higher: nearest where the lines are steepest, by 3 N/m * 100 m / (2 * 4 kN)."""
    (limit,) = spaced(tmp_path).vet().limits
    assert limit.value == pytest.approx(2.0 * math.cos(math.atan(0.0375)), rel=1e-4)
    here, there = (float(text.split()[-2]) for text in (limit.place, limit.other_place))
    assert 0.0 <= here <= 190.0
    assert here == pytest.approx(there, abs=0.1)
    assert limit.station_m == pytest.approx(here, abs=0.1)


def test_a_shift_by_east_and_north(tmp_path):
    """The other line's own plan lies 3 m east. Its first span, in direction (0.8, 0.6), passes our angle point 1.8 m
    aside, 2.4 m from its own end, where it sags by 3 * 2.4 * 97.6 / 8000 m.
    """
    moved = [(x - 500.0, y) for x, y in BEND]
    shift = 'shift = { east = "503 m", elevation = "0 m" }\n'
    (limit,) = spaced(tmp_path, there=moved, shift=shift).vet().limits
    assert limit.value == pytest.approx(math.hypot(1.8, 2.0 - 0.0878), rel=1e-3)


@pytest.mark.parametrize(
    ("turning", "shift", "path", "words"),
    [
        ((True, False), "", "other", "given by station and offset"),
        ((False, True), "", "other", "given by east and north"),
        ((True, True), 'shift = { station = "1 m" }\n', "shift.station", "given by east and north"),
        ((False, False), 'shift = { north = "1 m" }\n', "shift.north", "given by station and offset"),
    ],
)
def test_axes_that_do_not_meet_are_refused(tmp_path, turning, shift, path, words):
    places = [(0.0, 0.0), (90.0, 10.0)]
    with pytest.raises(InputError) as caught:
        spaced(tmp_path, here=places, there=places, turning=turning, shift=shift)
    (fault,) = caught.value.faults
    assert fault.path == f"limit.apart.{path}"
    assert words in fault.problem


def test_the_figure_draws_the_other_line_at_its_stations_here(tmp_path):
    from tautwise.origins import scenery_of

    project = spaced(tmp_path)
    ((_, drawn),) = scenery_of(project, 0).others
    stations = [x for x, _ in drawn]
    assert stations[0] == pytest.approx(0.0, abs=1e-9)
    assert stations[-1] == pytest.approx(190.0, abs=1e-9)


@pytest.mark.parametrize("curved", [False, True])
def test_courses_of_curved_lines_and_growing_loads(curved):
    """The cubic arcs against places of the line: 1e-10 m a smooth arc; a kink of the law stretches one along itself."""
    of = material.drawn_line(3) if curved else cases.line()
    ramp = {**cases.spread_load((0.0, 0.0, -2.0), 30.0, 200.0), "vector_to": (0.0, 6.0, -30.0)}
    at = np.linspace(3.0, 240.0, 60)
    problem = cases.problem(
        cases.span(250.0, 20.0),
        cases.rule("pull", 12e3),
        of=of,
        conditions=[cases.condition(loads=[ramp])],
        marks=[{"place": "length", "at_m": float(s)} for s in at],
    )
    core = _core.Project(problem)
    marks, arcs = core.settle(0)["marks"], core.course(0)
    for s, mark in zip(at, marks, strict=True):
        arc = arcs[np.searchsorted(arcs[:, 1], s)]
        h, u = arc[1] - arc[0], (s - arc[0]) / (arc[1] - arc[0])
        basis = np.array([1 - 3 * u**2 + 2 * u**3, 3 * u**2 - 2 * u**3, h * u * (1 - u) ** 2, h * u**2 * (u - 1)])
        place = basis @ np.array([arc[2:5], arc[5:8], arc[8:11], arc[11:14]])
        off = np.asarray(mark["position_m"]) - place
        tangent = arc[8:11] / np.linalg.norm(arc[8:11])
        assert np.linalg.norm(off - (off @ tangent) * tangent) < 1e-9
        assert np.linalg.norm(off) < 1e-6


# --- history


def test_a_history_on_sheaves_is_met_with_the_lengths_of_each_condition():
    """In the condition that was heaviest the final line hangs as it then did, its spans' lengths included.

    What is permanent is that of each span's mean strain, which differs from the strains along it by little.
    """
    supports = [cases.support(0.0, 30.0), cases.support(200.0, 32.0, "sheave"), cases.support(380.0, 31.0)]
    heavy = {**cases.spread_load((0.0, 0.0, -25.0)), "covers": [True, False]}
    loads = {"temperature_degC": -10.0, "loads": [heavy]}
    conditions = [cases.condition(**loads), cases.condition(**loads, state="final"), cases.condition()]
    problem = cases.problem(supports, cases.rule("pull", 16e3), of=material.conductor(), conditions=conditions)
    problem["history"] = {"met": [True, False, False], "creep_condition": None}
    core = _core.Project(problem)
    met, after, strung = (core.settle(c) for c in (0, 1, 2))
    for before, now, first in zip(met["spans"], after["spans"], strung["spans"], strict=True):
        assert abs(before["natural_length_m"] - first["natural_length_m"]) > 0.05
        assert now["natural_length_m"] == pytest.approx(before["natural_length_m"], abs=1e-3)
        assert now["tension_from_N"] == pytest.approx(before["tension_from_N"], rel=1e-4)


# --- loads per run beside sheaves, and where the route turns


def test_a_load_per_run_beside_sheaves():
    """Sheaves as clamps where the line has run, and the snow's weight from the horizontal run: no wind, so the spans'.

    A span is cut in 64; the first and the last piece of one grow with what runs over: 1e-8 of the pull.
    """
    supports = [cases.support(0.0, 30.0), cases.support(150.0, 38.0, "sheave"), cases.support(400.0, 31.0)]
    snow = {**cases.spread_load((0.0, 0.0, -20.0)), "is_run": True}
    problem = cases.problem(supports, cases.rule("pull", 9e3), conditions=[cases.condition(loads=[snow])])
    found = _core.Project(problem).settle(0)
    assert found["status"] == "ok"
    size = max(span["tension_max_N"] for span in found["spans"])
    weight = 15.97 * sum(span["natural_length_m"] for span in found["spans"]) + 20.0 * 400.0
    assert sum(row["down_N"] for row in found["supports"]) == pytest.approx(weight, abs=1e-9 * size)
    assert found["sheave_imbalance_N"] < 1e-9 * size
    held = copy.deepcopy(problem)
    held["stringing"] = cases.lengths_rule(*(span["natural_length_m"] for span in found["spans"]))
    held["supports"][1]["hold"] = "anchor"
    clamped = _core.Project(held).settle(0)
    for mine, theirs in zip(found["spans"], clamped["spans"], strict=True):
        for key in ("tension_from_N", "tension_to_N", "horizontal_tension_N"):
            assert mine[key] == pytest.approx(theirs[key], abs=1e-8 * size)


def test_a_held_carriage_stands_at_its_station_of_a_route_that_turns():
    places = [(0.0, 0.0), (0.0, 200.0), (150.0, 300.0)]
    supports = [{**cases.support(0.0, 30.0), "station_m": x, "offset_m": y} for x, y in places]
    load = {**cases.point_load(300.0, (0.0, 0.0, -2e3), "station"), "carriage": "held", "carriage_span": 1}
    problem = cases.problem(supports, cases.rule("pull", 9e3), conditions=[cases.condition(loads=[load])])
    found = _core.Project({**problem, "route": "turning"}).settle(0)
    assert found["status"] == "ok"
    assert found["loads"][0]["station_m"] == pytest.approx(300.0, abs=1e-9)


def test_a_free_carriage_rests_at_a_weight_that_it_cannot_pass():
    """Rolling on would lift it on either side of the weight: both stand at one place, which is where both hang."""
    weight = cases.point_load(100.0, (0.0, 0.0, -3e3))
    rolling = {**cases.point_load(60.0, (0.0, 0.0, -1e3), "station"), "carriage": "free", "carriage_span": 0}
    both = cases.point_load(100.0, (0.0, 0.0, -4e3))
    found, expected = (
        _core.Project(
            cases.problem(cases.span(200.0), cases.rule("pull", 9e3), conditions=[cases.condition(loads=loads)])
        ).settle(0)
        for loads in ([weight, rolling], [both])
    )
    assert found["status"] == "ok"
    assert found["loads"][1]["at_length_m"] == pytest.approx(100.0, abs=1e-9)
    assert found["spans"][0]["tension_from_N"] == pytest.approx(expected["spans"][0]["tension_from_N"], rel=SAME)


# --- wind from a bearing


@pytest.mark.parametrize(
    ("bearing", "pushed"), [(90.0, (-1.0, 0.0)), (0.0, (0.0, -1.0)), (225.0, (math.sqrt(0.5), math.sqrt(0.5)))]
)
def test_a_bearing_pushes_lines_square_and_hangers_as_it_blows(bearing, pushed):
    """One span north, one east, by hand: p C d l sin^2 across each, and the drag area of the hanger's string."""
    places = [(0.0, 0.0), (0.0, 200.0), (200.0, 200.0)]
    kinds = [cases.support(0.0, 30.0), cases.hanger(0.0, 30.0, hanger_wind_area_m2=0.5), cases.support(0.0, 30.0)]
    supports = [{**row, "station_m": x, "offset_m": y} for row, (x, y) in zip(kinds, places, strict=True)]
    blow = cases.condition(wind_pressure_Pa=400.0, wind_bearing_rad=math.radians(bearing))
    problem = {**cases.problem(supports, cases.rule("pull", 9e3), conditions=[blow]), "route": "turning"}
    found = _core.Project(problem).settle(0)
    axes = Twin(problem).route
    total = sum(
        np.array([row["along_N"], row["across_N"], -row["down_N"]]) @ axes.axes(j)
        for j, row in enumerate(found["supports"])
    )
    east, north = pushed
    lengths = [span["natural_length_m"] for span in found["spans"]]
    by_hand = 400.0 * 0.5 * np.array([east, north])
    by_hand[0] += 400.0 * 0.02 * lengths[0] * east * abs(east)  # the span north is pushed east or west alone
    by_hand[1] += 400.0 * 0.02 * lengths[1] * north * abs(north)
    np.testing.assert_allclose(total[:2], by_hand, rtol=0, atol=1e-6)


# --- a project of everything, in other units


def everything() -> dict:
    """A route that turns over a V, a sheave on a link and a post, a curve with its history, two winds, all loads."""
    loads = [
        {"per_run": "12 N/m"},
        {"per_length": "4 N/m", "per_length_to": "20 N/m", "from": "30 m", "to": "120 m"},
        {"force": "800 N", "at": "60 m", "direction": "across"},
        {"force": "1.2 kN", "carriage": "held", "at": "330 m"},
    ]
    return {
        "line": {
            "diameter": "20 mm",
            "weight": "14 N/m",
            "breaking_strength": "120 kN",
            "curve": {
                "area": "300 mm^2",
                "initial": ["0 MPa", "700 MPa", "-150 MPa"],
                "final_modulus": "75 GPa",
                "expansion": "18e-6 / K",
            },
        },
        "support": [
            {"name": "A", "east": "0 m", "north": "0 m", "elevation": "30 m", "stiffness_along": "900 kN/m"},
            {"name": "B", "east": "150 m", "north": "90 m", "elevation": "34 m", "hold": "hanger", "length": "2.5 m",
             "form": "V", "spread": "2 m", "weight": "500 N", "wind_area": "0.3 m^2"},
            {"name": "C", "east": "330 m", "north": "130 m", "elevation": "33 m", "hold": "sheave", "length": "1.2 m",
             "weight": "300 N"},
            {"name": "D", "east": "520 m", "north": "90 m", "elevation": "31 m", "hold": "post",
             "stiffness_along": "500 kN/m", "stiffness_across": "300 kN/m"},
        ],
        "stringing": {"temperature": "15 degC", "horizontal_tension": "16 kN", "method": "over sheaves"},
        "condition": [
            {"name": "laden", "temperature": "-5 degC", "wind": {"pressure": "300 Pa", "bearing": "200 deg"},
             "ice": {"thickness": "8 mm", "density": "900 kg/m^3", "pattern": [1, 0]}, "load": loads},
            {"name": "later", "temperature": "40 degC", "state": "final",
             "wind": {"speed": "20 m/s", "angle": "60 deg", "altitude": "900 m"}},
        ],
        "history": {"conditions": ["laden"]},
    }  # fmt: skip


UNITS = {"m": ("ft", 0.3048), "N": ("lbf", 4.4482216152605), "kN": ("lbf", 4.4482216152605e-3), "mm": ("in", 25.4),
         "N/m": ("lbf/ft", 4.4482216152605 / 0.3048), "MPa": ("psi", 4.4482216152605 / 25.4**2),
         "m^2": ("ft^2", 0.3048**2), "mm^2": ("in^2", 25.4**2), "Pa": ("psi", 4.4482216152605e6 / 25.4**2)}  # fmt: skip


def in_feet(value):
    """Every length, force and stress of a table in feet, pounds and inches."""
    if isinstance(value, dict):
        return {key: in_feet(part) for key, part in value.items()}
    if isinstance(value, list):
        return [in_feet(part) for part in value]
    number, _, unit = value.partition(" ") if isinstance(value, str) else ("", "", "")
    if unit not in UNITS:
        return value
    other, factor = UNITS[unit]
    return f"{float(number) / factor!r} {other}"


@pytest.mark.parametrize("name", ["laden", "later"])
def test_a_project_of_everything_in_other_units(name):
    """Numbers rounded once more: 1e-15 of a length moves a tension by EA/T of that."""
    here, there = tw.Project(**everything()).settle(name), tw.Project(**in_feet(everything())).settle(name)
    for mine, theirs in zip(here.spans, there.spans, strict=True):
        assert theirs.tension_from_N == pytest.approx(mine.tension_from_N, rel=1e-10)
        assert theirs.sag_m == pytest.approx(mine.sag_m, rel=1e-10)
        assert theirs.natural_length_m == pytest.approx(mine.natural_length_m, rel=1e-12)
    for mine, theirs in zip(here.supports, there.supports, strict=True):
        assert theirs.across_N == pytest.approx(mine.across_N, abs=1e-9 * here.spans[0].tension_max_N)
    assert here.gap_relative <= 1e-6
