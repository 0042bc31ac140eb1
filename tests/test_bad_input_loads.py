"""Bad loads are refused, with file, line, key path, what is wrong, what is expected and an example."""

from __future__ import annotations

import math

import core_cases as cases
import pytest

from tautwise import _core
from tautwise.errors import InputError
from tautwise.from_core import file_path
from tautwise.model import load

GOOD = """\
format = "tautwise 1"

[line]
diameter = "16 mm"
area = "150 mm^2"
weight = "11.9 N/m"
modulus = "150 GPa"
expansion = "11.5e-6 / K"

[[support]]
name = "West mast"
station = "0 m"
elevation = "24 m"

[[support]]
name = "Middle"
station = "150 m"
elevation = "25 m"
hold = "hanger"
length = "1.8 m"
wind_area = "0.4 m^2"

[[support]]
name = "East mast"
station = "300 m"
elevation = "24 m"

[stringing]
temperature = "15 degC"
horizontal_tension = "20 kN"

[[condition]]
name = "iced"
temperature = "-5 degC"
ice = { thickness = "15 mm", density = "900 kg/m^3", pattern = [1, 0] }
wind = { speed = "25 m/s", altitude = "1200 m" }
factors = { weight = 1.1, ice = 1.5, wind = 1.5, load = 1.2 }
load = [ { force = "2 kN", carriage = "free", span = "Middle" } ]
"""
LOAD = '{ force = "2 kN", carriage = "free", span = "Middle" }'
PATTERN = "pattern = [1, 0]"
WIND = 'wind = { speed = "25 m/s", altitude = "1200 m" }'


def loads(*made):
    return {LOAD: ", ".join(made)}


def file_of(tmp_path, changes):
    text = GOOD
    for old, new in changes.items():
        assert old in text
        text = text.replace(old, new, 1)
    file = tmp_path / "bad.taut.toml"
    file.write_text(text, encoding="utf-8")
    return file


# What stands in place of the pattern, and what is said of it.
PATTERNS = [
    ("pattern = [1, 0, 1]", "3 shares for 2 spans"),
    ("pattern = [1, 1.2]", "a share of 1.2, which is above 1"),
    ("pattern = [-0.1]", "which is negative"),
    ("pattern = []", "a list of 0 shares"),
    ('pattern = "all"', "is no pattern"),
    ('pattern = { beyond = "Midle", share = 0.5 }', 'did you mean "Middle"?'),
    ('pattern = { beyond = "East mast", share = 0 }', "no span starts at"),
    ('pattern = { before = "West mast", share = 0 }', "no span lies before"),
    ('pattern = { beyond = "Middle" }', "share is missing"),
    ("pattern = { share = 0.5 }", "beyond, before or spans is missing"),
    ('pattern = { beyond = "Middle", shares = 0 }', 'did you mean "share"?'),
    ('pattern = { spans = ["Middel"], share = 0 }', 'no support "Middel"'),
]

# What is replaced, by what, its key in the condition or support, and what is said.
KEYS = [
    (WIND, 'wind = { speed = "25 m/s", bearing = "225 deg" }', "wind.bearing", "east and north"),
    (
        WIND,
        'wind = { speed = "25 m/s", bearing = "225 deg", angle = "60 deg" }',
        "wind.bearing",
        "angle and bearing are given at once",
    ),
    (
        WIND,
        'wind = { speed = "25 m/s", altitude = "1 km", air_density = "1.1 kg/m^3" }',
        "wind.altitude",
        "air_density and altitude are given at once",
    ),
    (WIND, 'wind = { pressure = "1 kPa", altitude = "1 km" }', "wind.altitude", "needs no altitude"),
    ("1200 m", "12 km", "wind.altitude", "too large"),
    ("ice = 1.5, ", "ice = -1.5, ", "factors.ice", "negative"),
    ("ice = 1.5, ", "snow = 1.5, ", "factors.snow", "unknown key"),
    ("factors = { weight = 1.1, ice = 1.5, wind = 1.5, load = 1.2 }", "factors = 1.5", "factors", "table"),
    ('hold = "hanger"\nlength = "1.8 m"\n', "", "wind_area", "an anchor has no wind_area"),
    ("0.4 m^2", "-0.4 m^2", "wind_area", "negative"),
]

# The loads, the key of the load that is wrong (empty: the load itself), and what is said.
LOADS = [
    ('{ per_length_to = "3 N/m", force = "1 kN", at = "20 m" }', "per_length_to", "end of a ramp"),
    ('{ per_length = "3 N/m", per_length_to = "9 N/m" }', "per_length_to", "neither begins nor ends"),
    ('{ per_length = "3 N/m", spans = ["Midle"] }', "spans[0]", 'did you mean "Middle"?'),
    ('{ per_length = "3 N/m", spans = ["East mast"] }', "spans[0]", "no span starts at the last"),
    ('{ per_length = "3 N/m", beyond = "East mast" }', "beyond", "no span starts at the last"),
    ('{ per_length = "3 N/m", before = "West mast" }', "before", "no span lies before"),
    ('{ per_length = "3 N/m", beyond = "Middle", before = "Middle" }', "before", "given at once"),
    ('{ per_length = "3 N/m", spans = ["Middle"], from = "1 m", to = "9 m" }', "spans", "beside from"),
    ('{ per_length = "3 N/m", span = "Middle" }', "span", "only a carriage"),
    ('{ force = "3 N", at = "3 m", spans = ["Middle"] }', "spans", "a force stands at one place"),
    ('{ per_run = "3 N/m", direction = "across" }', "direction", "down or up"),
    ('{ per_run = "-3 N/m" }', "per_run", "a negative load"),
    ('{ per_run = "3 N/m", per_length = "3 N/m" }', "per_run", "given at once"),
    ('{ per_run = "3 N/m", at = "30 m" }', "at", "no stretch of the line"),
    ('{ per_run = "3 N/m", from = "30 m", to = "400 m" }', "to", "not on the line"),
    ('{ carriage = "free", span = "Middle" }', "", "a carriage without a force"),
    ('{ force = "0 N", carriage = "free", span = "Middle" }', "force", "without a force"),
    ('{ force = "1 kN", carriage = "free" }', "", "neither span nor at"),
    ('{ force = "1 kN", carriage = "free", span = "Midle" }', "span", 'did you mean "Middle"?'),
    ('{ force = "1 kN", carriage = "free", span = "East mast" }', "span", "no span starts at"),
    ('{ force = "1 kN", carriage = "free", span = "Middle", at = "20 m" }', "at", "not in the span"),
    ('{ force = "1 kN", carriage = "free", at = "150 m" }', "at", "a carriage at a support"),
    ('{ force = "1 kN", carriage = "fre", at = "50 m" }', "carriage", 'did you mean "free"?'),
    ('{ force = "1 kN", carriage = "held" }', "", "at is missing"),
    ('{ force = "1 kN", carriage = "held", at_length = "9 m" }', "at_length", "no place of the natural"),
    (
        f"{LOAD}, {LOAD}",
        "load[1].carriage",
        "a second carriage",
    ),
]


def faults_of(tmp_path, old, new):
    with pytest.raises(InputError) as refused:
        load(file_of(tmp_path, {old: new}))
    line = GOOD[: GOOD.index(old)].count("\n") + 1
    assert all(fault.file.endswith("bad.taut.toml") for fault in refused.value.faults)
    return line, refused.value.faults


def one_says(faults, path, words, line):
    """One fault at the path says so, at a line about where it was written, and says what is right."""
    said = [fault for fault in faults if fault.path == path and words in f"{fault.problem} {fault.expected}"]
    assert said, [str(fault) for fault in faults]
    assert line <= said[0].line <= line + 2
    assert said[0].expected or "did you mean" in said[0].problem or "belongs to" in said[0].problem


@pytest.mark.parametrize(("new", "words"), PATTERNS)
def test_bad_patterns_are_refused(tmp_path, new, words):
    line, faults = faults_of(tmp_path, PATTERN, new)
    one_says(faults, "condition.iced.ice.pattern", words, line)


@pytest.mark.parametrize(("old", "new", "key", "words"), KEYS)
def test_bad_keys_are_refused(tmp_path, old, new, key, words):
    line, faults = faults_of(tmp_path, old, new)
    one_says(faults, f"{'support.Middle' if key == 'wind_area' else 'condition.iced'}.{key}", words, line)


@pytest.mark.parametrize(("new", "key", "words"), LOADS)
def test_bad_loads_are_refused(tmp_path, new, key, words):
    line, faults = faults_of(tmp_path, LOAD, new)
    path = key if key.startswith("load") else f"load[0].{key}".rstrip(".")
    one_says(faults, f"condition.iced.{path}", words, line)


def test_the_good_file_is_good(tmp_path):
    project = load(file_of(tmp_path, {}))
    assert not project.warnings
    condition = project.settle()
    assert condition.settled
    assert condition.marks[0].tension_beyond_N == pytest.approx(condition.marks[0].tension_N, rel=1e-9)


GOOD_LOADS = [
    '{ per_length = "3 N/m", per_length_to = "9 N/m", from = "10 m", to = "80 m" }',
    '{ per_run = "300 N/m", spans = ["Middle"] }',
    '{ per_run = "300 N/m", beyond = "Middle" }',
    '{ per_length = "30 N/m", before = "Middle", direction = "across" }',
    '{ force = "1 kN", carriage = "held", at = "40 m" }',
    '{ force = "1 kN", carriage = "free", at = "40 m" }',
]


@pytest.mark.parametrize("made", GOOD_LOADS)
def test_good_loads_settle(tmp_path, made):
    condition = load(file_of(tmp_path, loads(made))).settle()
    assert condition.settled


def test_a_held_carriage_that_its_span_leaves_behind(tmp_path):
    """A heavy load ahead draws the hanger's clamp past the carriage's station."""
    made = '{ force = "9 kN", at = "225 m" }, { force = "1 kN", carriage = "held", at = "150.01 m" }'
    with pytest.raises(InputError) as refused:
        load(file_of(tmp_path, {**loads(made), PATTERN: "pattern = [0, 1]"})).settle()
    (fault,) = refused.value.faults
    assert fault.path == "condition.iced.load[1].at"
    assert "does not pass 150.01 m" in fault.problem


def test_other_units_say_the_same(tmp_path):
    """One pound-force is 4.4482216152605 N, one foot 0.3048 m: to the last digits of a conversion."""
    foot, pound = 0.3048, 4.4482216152605
    us = '{ per_run = "20 lbf/ft", spans = ["Middle"] }, { force = "450 lbf", carriage = "held", at = "130 ft" }'
    si = (
        f'{{ per_run = "{20 * pound / foot!r} N/m", spans = ["Middle"] }}, '
        f'{{ force = "{450 * pound!r} N", carriage = "held", at = "{130 * foot!r} m" }}'
    )
    a, b = (load(file_of(tmp_path, loads(made))).settle() for made in (us, si))
    assert [span.sag_m for span in a.spans] == pytest.approx([span.sag_m for span in b.spans], rel=1e-11)
    assert a.marks[0].tension_beyond_N == pytest.approx(b.marks[0].tension_beyond_N, rel=1e-10)


SLIPS = [
    ({"wind = 1.5, load": "wind = 15, load"}, "condition.iced.factors.wind", "a load factor of 15"),
    ({"1200 m": "6000 m"}, "condition.iced.wind.altitude", "ft for m?"),
    ({"0.4 m^2": "40 m^2"}, "support.Middle.wind_area", "a wind area of 40 m2"),
]


@pytest.mark.parametrize(("changes", "key", "words"), SLIPS)
def test_what_is_hardly_meant_is_said(tmp_path, changes, key, words):
    (warning,) = load(file_of(tmp_path, changes)).warnings
    assert key in warning
    assert words in warning


# --- what only a script that talks to the core can give

CARRIAGE = {**cases.point_load(30.0, (0.0, 0.0, -1.0), "station"), "carriage": "free", "carriage_span": 0}
SHORT = cases.spread_load((0.0, 0.0, -1.0), 1.0, 9.0)
CORE = [
    ({"ice_share": [1.5]}, "conditions[0].ice_pattern"),
    ({"ice_share": [math.nan]}, "conditions[0].ice_pattern"),
    ({"factor_wind": -1.0}, "conditions[0].factor_wind"),
    ({"wind_altitude_m": 2e4}, "conditions[0].wind_altitude_m"),
    ({"wind_bearing_rad": 7.0}, "conditions[0].wind_bearing_rad"),
    ({"loads": [CARRIAGE, CARRIAGE]}, "conditions[0].loads"),
    ({"loads": [{**CARRIAGE, "is_point": False}]}, "loads[0].carriage"),
    ({"loads": [{**CARRIAGE, "carriage_span": 1}]}, "loads[0].carriage"),
    ({"loads": [{**CARRIAGE, "carriage": "held", "place": "length"}]}, "loads[0].from_m"),
    ({"loads": [{**cases.spread_load((0.0, 0.0, -1.0)), "vector_to": (0.0, 0.0, -2.0)}]}, "loads[0].from_m"),
    ({"loads": [{**cases.point_load(30.0, (0.0, 0.0, -1.0)), "is_run": True}]}, "loads[0].is_run"),
    ({"loads": [{**SHORT, "vector_to": (0.0, math.inf, 0.0)}]}, "loads[0].vector_to[1]"),
]  # fmt: skip


@pytest.mark.parametrize(("given", "path"), CORE, ids=lambda value: str(value)[:40])
def test_the_core_refuses_them_by_their_path(given, path):
    with pytest.raises(_core.RangeError) as refused:
        _core.Project(cases.problem(cases.span(100.0), cases.rule("pull", 1e4), conditions=[cases.condition(**given)]))
    assert refused.value.path == path
    assert refused.value.expected


WRONG = [
    {"ice_share": [1.0, 1.0]},
    {"ice_share": "all"},
    {"loads": [{**cases.spread_load((0.0, 0.0, -1.0)), "covers": [True, False]}]},
    {"loads": [{**cases.spread_load((0.0, 0.0, -1.0)), "covers": 1}]},
    {"loads": [{**CARRIAGE, "carriage": "loose"}]},
    {"loads": [{**cases.spread_load((0.0, 0.0, -1.0), 1.0, 9.0), "vector_to": (0.0, 1.0)}]},
]


@pytest.mark.parametrize("given", WRONG, ids=lambda value: str(value)[:40])
def test_the_core_refuses_what_has_no_right_shape(given):
    with pytest.raises((ValueError, TypeError)):
        _core.Project(cases.problem(cases.span(100.0), cases.rule("pull", 1e4), conditions=[cases.condition(**given)]))


def test_a_fault_of_the_core_finds_its_key_in_the_file(tmp_path):
    project = load(file_of(tmp_path, {}))
    for path, key in (
        ("conditions[0].ice_pattern", ("condition", 0, "ice", "pattern")),
        ("conditions[0].factor_wind", ("condition", 0, "factors", "wind")),
        ("conditions[0].wind_altitude_m", ("condition", 0, "wind", "altitude")),
        ("supports[1].hanger_wind_area_m2", ("support", 1, "wind_area")),
        ("loads[0].carriage", ("condition", 0, "load", 0, "carriage")),
    ):
        assert file_path(project, path) == key
