"""Projects: from a file or keyword arguments to the core's problem, the schema, plausibility."""

from __future__ import annotations

import copy
import hashlib
import json
import math
import pickle
import tomllib
from fractions import Fraction

import numpy as np
import pint
import pytest
from pydantic import ValidationError

from tautwise.errors import InputError
from tautwise.model import Project, load
from tautwise.schema import project_schema
from tautwise.start import start_text

BASE = {
    "title": "Test",
    "line": {
        "diameter": "16 mm",
        "area": "150 mm^2",
        "weight": "11.9 N/m",
        "modulus": "150 GPa",
        "expansion": "11.5e-6 / K",
        "breaking_strength": "190 kN",
    },
    "ground": {"points": [["0 m", "6 m"], ["150 m", "0 m"], ["400 m", "10 m"]]},
    "crossing": [{"name": "channel", "from": "120 m", "to": "180 m", "top": "3 m"}],
    "support": [
        {"name": "A", "station": "0 m", "height": "18 m", "capacity": {"along": "90 kN", "down": "30 kN"}},
        {"name": "B", "station": "200 m", "elevation": "25 m", "hold": "hanger", "length": "1.8 m", "weight": "150 N"},
        {"name": "C", "station": "400 m", "elevation": "24 m", "hold": "post", "stiffness_along": "250 kN/m"},
    ],
    "stringing": {"temperature": "15 degC", "horizontal_tension": "20 kN", "tolerance": "3 %"},
    "condition": [
        {"name": "hot", "temperature": "60 degC"},
        {
            "name": "ice and wind",
            "temperature": "-5 degC",
            "ice": {"thickness": "15 mm", "density": "900 kg/m^3"},
            "wind": {"pressure": "400 Pa", "drag": 1.1, "angle": "60 deg"},
            "resultant_addition": "4.4 N/m",
            "load": [
                {"force": "2 kN", "at": "75 m", "name": "ball"},
                {"per_length": "30 N/m", "from": "10 m", "to": "60 m", "direction": "across"},
                {"per_length": "5 N/m", "direction": [3, 0, -4]},
                {"force": "1 kN", "at_length": "100 m", "direction": "up"},
            ],
        },
    ],
    "mark": [{"name": "m1", "at": "75 m"}, {"name": "m2", "at_length": "80 m"}],
    "limit": [
        {"id": "channel", "kind": "clearance", "over": "channel", "least": "6.5 m", "conditions": ["hot"]},
        {"id": "ground", "kind": "clearance", "least": "5 m", "from": "50 m"},
        {"id": "strength", "kind": "tension", "share": 0.5, "spans": ["B"]},
        {"id": "pull", "kind": "support_load", "direction": "along", "share": "80 %"},
        {"id": "push", "kind": "support_load", "most": "40 kN", "supports": ["A", "C"]},
        {"id": "uplift", "kind": "uplift", "supports": ["B"]},
        {"id": "swing", "kind": "swing", "most": "45 deg"},
        {"id": "sag", "kind": "sag", "most": "9 m", "least": "1 m", "spans": ["A"]},
        {"id": "stiff", "kind": "catenary_constant", "most": "1800 m"},
        {"id": "slope", "kind": "slope", "most": "12 %", "clause": "4.2", "why": "the trolley"},
    ],
}


def project(**changes):
    """A project from BASE with whole tables replaced."""
    return Project(**{**copy.deepcopy(BASE), **changes})


def with_key(path, value):
    """BASE with one key set; the path as in `support.1.station`."""
    tables = copy.deepcopy(BASE)
    *parents, last = path.split(".")
    table = tables
    for part in parents:
        table = table[int(part)] if isinstance(table, list) else table[part]
    table[int(last) if isinstance(table, list) else last] = value
    return tables


def test_the_core_problem_in_full():
    core = project().to_core()
    assert core["line"] == {
        "diameter_m": 0.016,
        "weight_N_per_m": 11.9,
        "stiffness_N": pytest.approx(22.5e6, rel=1e-15),
        "expansion_per_K": 11.5e-6,
        "breaking_strength_N": 190e3,
    }
    first, hanger, post = core["supports"]
    assert (first["hold"], first["elevation_m"], first["height_m"]) == ("anchor", 24.0, 18.0)
    assert (first["capacity_along_N"], first["capacity_up_N"]) == (90e3, None)
    assert (hanger["hold"], hanger["hanger_length_m"], hanger["hanger_weight_N"]) == ("hanger", 1.8, 150.0)
    assert (hanger["elevation_m"], hanger["height_m"]) == (25.0, None)
    assert (post["stiffness_along_N_per_m"], post["stiffness_across_N_per_m"]) == (250e3, math.inf)
    assert core["ground"]["station_m"].dtype == np.float64
    assert core["ground"]["elevation_m"].tolist() == [6.0, 0.0, 10.0]
    assert core["crossings"] == [{"from_m": 120.0, "to_m": 180.0, "top_m": 3.0}]
    assert core["marks"] == [{"place": "station", "at_m": 75.0}, {"place": "length", "at_m": 80.0}]


def test_conditions_for_the_core():
    hot, loaded = project().to_core()["conditions"]
    assert (hot["ice_thickness_m"], hot["wind_pressure_Pa"], hot["wind_speed_m_per_s"]) == (0.0, 0.0, None)
    assert (loaded["ice_thickness_m"], loaded["ice_density_kg_per_m3"]) == (0.015, 900.0)
    assert (loaded["wind_pressure_Pa"], loaded["wind_drag"]) == (400.0, 1.1)
    assert loaded["wind_angle_rad"] == pytest.approx(math.pi / 3, rel=1e-15)
    ball, stretch, slanted, lifted = loaded["loads"]
    assert ball == {
        "is_point": True,
        "place": "station",
        "frame": "span",
        "from_m": 75.0,
        "to_m": None,
        "vector": (0.0, 0.0, -2000.0),
    }
    assert (stretch["from_m"], stretch["to_m"], stretch["vector"]) == (10.0, 60.0, (0.0, 30.0, 0.0))
    assert (slanted["place"], slanted["frame"], slanted["from_m"]) == ("whole", "route", None)
    assert slanted["vector"] == pytest.approx((3.0, 0.0, -4.0))
    assert (lifted["place"], lifted["from_m"], lifted["vector"]) == ("length", 100.0, (0.0, 0.0, 1000.0))


def test_wind_by_speed():
    tables = with_key("condition.1.wind", {"speed": "25 m/s", "air_density": "1.2 kg/m^3"})
    wind = Project(**tables).to_core()["conditions"][1]
    assert (wind["wind_pressure_Pa"], wind["wind_speed_m_per_s"], wind["air_density_kg_per_m3"]) == (None, 25.0, 1.2)
    assert (wind["wind_drag"], wind["wind_angle_rad"]) == (1.0, math.pi / 2)


def test_limits_for_the_core():
    limits = {limit.id: core for limit, core in zip(project().limits, project().to_core()["limits"], strict=True)}
    channel = limits["channel"]
    assert (channel["crossing"], channel["least"], channel["from_m"]) == (0, 6.5, None)
    assert (channel["applies"], channel["covers"]) == ([True, False], [True, True, False])
    assert (limits["ground"]["crossing"], limits["ground"]["from_m"], limits["ground"]["to_m"]) == (None, 50.0, 400.0)
    assert (limits["strength"]["share"], limits["strength"]["covers"]) == (0.5, [False, True, False])
    # A share of capacity looks at the supports that state it.
    assert (limits["pull"]["share"], limits["pull"]["covers"]) == (0.8, [True, False, False])
    assert (limits["push"]["direction"], limits["push"]["covers"]) == ("resultant", [True, False, True])
    assert (limits["uplift"]["least"], limits["uplift"]["covers"]) == (0.0, [False, True, False])
    assert limits["swing"]["covers"] == [False, True, False]
    assert limits["swing"]["most"] == pytest.approx(math.pi / 4)
    assert (limits["sag"]["most"], limits["sag"]["least"], limits["sag"]["covers"]) == (9.0, 1.0, [True, False, False])
    assert limits["slope"]["most"] == 0.12


def test_a_slope_by_angle():
    assert Project(**with_key("limit.9.most", "45 deg")).limits[9].most == pytest.approx(1.0)


@pytest.mark.parametrize(
    ("rule", "core"),
    [
        ({"horizontal_tension": "20 kN"}, ("pull", 20e3, None, None)),
        ({"tension": {"support": "B", "value": "21 kN"}}, ("tension", 21e3, 1, None)),
        ({"sag": {"from": "B", "to": "C", "value": "3 m"}}, ("sag", 3.0, 1, None)),
        ({"natural_length": "402 m"}, ("total_length", 402.0, None, None)),
        ({"natural_length": ["201 m", "200.5 m"]}, ("span_lengths", None, None, [201.0, 200.5])),
        ({}, ("none", None, None, None)),
    ],
)
def test_stringing_for_the_core(rule, core):
    stringing = project(stringing={"temperature": "15 degC", **rule}).to_core()["stringing"]
    assert (stringing["rule"], stringing["value"], stringing["index"], stringing["lengths_m"]) == core
    assert (stringing["temperature_degC"], stringing["tolerance"]) == (15.0, 0.0)


def flat(value, at=""):
    if isinstance(value, dict):
        return {path: part for key, inner in value.items() for path, part in flat(inner, f"{at}.{key}").items()}
    if isinstance(value, list | tuple | np.ndarray):
        return {path: part for key, inner in enumerate(value) for path, part in flat(inner, f"{at}[{key}]").items()}
    return {at: value}


POUND, FOOT, GRAVITY = Fraction("0.45359237"), Fraction("0.3048"), Fraction("9.80665")
LBF = POUND * GRAVITY
US = {
    "in": FOOT / 12,
    "ft": FOOT,
    "in^2": (FOOT / 12) ** 2,
    "lb/ft": POUND / FOOT,
    "ksi": 1000 * LBF / (FOOT / 12) ** 2,
    "/ degF": Fraction(9, 5),
    "lbf": LBF,
    "psf": LBF / FOOT**2,
}


def us(si, unit):
    """An SI value as text in a US unit, from the defined values of pound, foot and gravity."""
    return f"{float(Fraction(si) / US[unit]):.17g} {unit}"


def test_us_units_equal_si_units():
    tables = copy.deepcopy(BASE)
    tables["line"] = {
        "diameter": us("0.016", "in"),
        "area": us("150e-6", "in^2"),
        "mass": us(Fraction("11.9") / GRAVITY, "lb/ft"),
        "modulus": us("150e9", "ksi"),
        "expansion": us("11.5e-6", "/ degF"),
        "breaking_strength": us("190e3", "lbf"),
    }
    tables["ground"] = {"points": [["0 ft", us("6", "ft")], [us("150", "ft"), "0 ft"], ["400 m", "10 m"]]}
    tables["stringing"] = {"temperature": "59 degF", "horizontal_tension": us("20e3", "lbf"), "tolerance": 0.03}
    tables["condition"][0]["temperature"] = "140 degF"
    tables["condition"][1]["wind"]["pressure"] = us("400", "psf")
    si_core, us_core = flat(project().to_core()), flat(Project(**tables).to_core())
    assert si_core.keys() == us_core.keys()
    for path, value in si_core.items():
        # Two roundings of text and value at most: a few units in the last place.
        assert us_core[path] == (pytest.approx(value, rel=1e-15) if isinstance(value, float) else value), path


def test_mass_and_stiffness():
    line = project(line={**BASE["line"], "weight": None, "mass": "1.21 kg/m"}).line
    assert line.weight_N_per_m == 1.21 * 9.80665
    line = project(line={"diameter": "16 mm", "weight": "11.9 N/m", "stiffness": "22.5 MN", "expansion": "0 / K",
                         "breaking_strength": "190 kN"}).line  # fmt: skip
    assert line.stiffness_N == 22.5e6


def test_pint_quantities_among_keyword_arguments():
    ureg = pint.UnitRegistry()
    tables = with_key("stringing.horizontal_tension", ureg.Quantity(20.0, "kN"))
    assert Project(**tables).to_core()["stringing"]["value"] == 20e3


def test_what_needs_no_conditions_is_not_asked_for():
    bare = Project(
        line={"weight": "2.5 N/m", "stiffness": "3 MN"},
        support=[
            {"name": "A", "station": "0 m", "elevation": "1 m"},
            {"name": "B", "station": "10 m", "elevation": "1 m"},
        ],
        stringing={"temperature": "15 degC", "horizontal_tension": "1 kN"},
        condition=[{"name": "fall", "temperature": "15 degC", "load": [{"force": "6 kN", "at": "5 m"}]}],
    )
    core = bare.to_core()
    assert (core["line"]["diameter_m"], core["line"]["expansion_per_K"], core["ground"]) == (0.0, 0.0, None)


# --- Project as a value


def test_a_project_is_a_frozen_value():
    one, two = project(), project()
    assert one == two
    assert hash(one) == hash(two)
    assert pickle.loads(pickle.dumps(one)) == one
    with pytest.raises(ValidationError):
        one.title = "other"
    assert repr(one) == "Project('Test': 3 supports, 2 conditions, 10 limits)"
    assert one.source is None
    assert len(one.input_sha256) == 64
    assert one.input_sha256 != project(title="Other").input_sha256


def test_conditions_by_name():
    assert project().condition_index("ice and wind") == 1
    with pytest.raises(InputError, match='did you mean "hot"'):
        project().condition_index("hott")


def toml_of(tables):
    return 'format = "tautwise 1"\n' + "\n".join(f"{key} = {inline(value)}" for key, value in tables.items())


def inline(value):
    if isinstance(value, dict):
        return "{ " + ", ".join(f"{json.dumps(key)} = {inline(part)}" for key, part in value.items()) + " }"
    if isinstance(value, list):
        return "[" + ", ".join(inline(part) for part in value) + "]"
    return json.dumps(value)


def test_file_and_keyword_arguments_give_the_same_problem(tmp_path):
    file = tmp_path / "x.taut.toml"
    file.write_text(toml_of(BASE))
    loaded = load(file)
    np.testing.assert_equal(loaded.to_core(), project().to_core())
    assert loaded.source == str(file)
    assert loaded.input_sha256 == hashlib.sha256(file.read_bytes()).hexdigest()


def test_the_hash_covers_included_files_and_the_profile(tmp_path):
    tables = {key: value for key, value in BASE.items() if key not in ("ground", "line")}
    main, line, csv = tmp_path / "x.toml", tmp_path / "line.toml", tmp_path / "ground.csv"
    main.write_text('include = "line.toml"\n' + toml_of({**tables, "ground": {"profile": "ground.csv"}}))
    line.write_text(f"line = {inline(BASE['line'])}\n")
    csv.write_text("station_m,elevation_m\n0,6\n150,0\n400,10\n")
    loaded = load(main)
    np.testing.assert_equal(loaded.to_core(), project().to_core())
    sums = "".join(f"{hashlib.sha256(file.read_bytes()).hexdigest()}  {file.name}\n" for file in (main, line, csv))
    assert loaded.input_sha256 == hashlib.sha256(sums.encode()).hexdigest()
    csv.write_text("station_m,elevation_m\n0,6\n150,0\n400,11\n")
    assert load(main).input_sha256 != loaded.input_sha256


def test_the_hash_does_not_depend_on_the_working_directory(tmp_path, monkeypatch):
    (tmp_path / "ground.csv").write_text("station_m,elevation_m\n0,6\n150,0\n400,10\n")
    (tmp_path / "x.toml").write_text(toml_of({**BASE, "ground": {"profile": "ground.csv"}}))
    far = load(tmp_path / "x.toml")
    monkeypatch.chdir(tmp_path)
    near = load("x.toml")
    assert near.input_sha256 == far.input_sha256
    assert near.source == "x.toml"


@pytest.mark.parametrize(
    ("core_path", "line", "path"),
    [
        ("line.weight_N_per_m", 3, "line.weight"),
        ("supports[1].hanger_length_m", 6, "support.B.length"),
        ("supports[0].capacity_down_N", 6, "support.A.capacity.down"),
        ("conditions[1].ice_thickness_m", 8, 'condition."ice and wind".ice.thickness'),
        ("conditions[1].air_density_kg_per_m3", 8, 'condition."ice and wind".wind.air_density'),
        ("loads[2].from_m", 8, 'condition."ice and wind".load[2].from'),
        ("limits[0].least", 10, "limit.channel.least"),
        ("stringing.value", 7, "stringing.horizontal_tension"),
    ],
)
def test_faults_of_the_core_are_led_back_to_the_file(tmp_path, core_path, line, path):
    file = tmp_path / "x.toml"
    file.write_text(toml_of(BASE))
    fault = load(file).core_fault(core_path, "out of range", "something else")
    assert (fault.file, fault.line, fault.path) == (str(file), line, path)
    assert str(fault).endswith("out of range; expected something else")


# --- the schema and the first file


def test_the_schema_describes_the_file():
    schema = project_schema()
    json.dumps(schema)
    assert schema["additionalProperties"] is False
    assert all(table["additionalProperties"] is False for table in schema["$defs"].values())
    assert schema["required"] == ["format", "line", "support", "stringing"]
    assert schema["anyOf"] == [{"required": ["condition"]}, {"required": ["rules"]}]
    weight = schema["$defs"]["Line"]["properties"]["weight"]
    assert weight["type"] == "string"
    assert weight["examples"] == ["11.9 N/m"]


def test_the_schema_takes_and_refuses_what_the_reader_does():
    jsonschema = pytest.importorskip("jsonschema")
    validator = jsonschema.Draft202012Validator(project_schema())
    validator.check_schema(project_schema())
    good = {"format": "tautwise 1", **copy.deepcopy(BASE)}
    assert [error.message for error in validator.iter_errors(good)] == []
    assert [error.message for error in validator.iter_errors(tomllib.loads(start_text()))] == []
    for path, value in [
        ("line.weight", 11.9),
        ("line.mass", "1.2 kg/m"),
        ("line.wieght", "11.9 N/m"),
        ("support.0.hold", "pulley"),
        ("limit.0.kind", "clearence"),
        ("limit.2.most", "3 kN"),
        ("stringing.tolerance", 3),
        ("condition.1.ice.thickness", "nan mm"),
    ]:
        bad = {"format": "tautwise 1", **with_key(path, value)}
        assert list(validator.iter_errors(bad)), path


def test_the_first_file_loads_without_a_warning(tmp_path):
    file = tmp_path / "first.taut.toml"
    file.write_text(start_text())
    first = load(file)
    assert first.warnings == ()
    assert first.ground is not None
    assert {limit.kind for limit in first.limits} >= {"clearance", "tension", "support_load"}
    assert max(len(line) for line in start_text().splitlines()) <= 120


# --- plausibility


def test_a_sound_project_has_no_warnings():
    assert project().warnings == ()


@pytest.mark.parametrize(
    ("path", "value", "key", "slip"),
    [
        ("line.weight", "1210 N/m", "line.weight", "kg/km taken for N/m"),
        ("line.weight", "1.21 N/m", "line.weight", "kg/m taken for N/m"),
        ("line.weight", "11900 N/m", "line.weight", "factor of 1000"),
        ("line.modulus", "150 MPa", "line.modulus", "MPa for GPa"),
        ("line.breaking_strength", "190 N", "line.breaking_strength", "MPa over 150 mm2"),
        ("line.expansion", "11.5e-5 / K", "line.expansion", "power of ten"),
        ("line.area", "250 mm^2", "line.area", "do not fit within the diameter"),
        ("stringing.temperature", "75 degC", "stringing.temperature", "degF for degC"),
        ("stringing.horizontal_tension", "15 N", "stringing.horizontal_tension", "kN for N"),
        ("stringing.horizontal_tension", "500 kN", "stringing.horizontal_tension", "above the breaking strength"),
        ("condition.0.temperature", "180 degC", "condition.hot.temperature", "degF for degC"),
        ("condition.1.temperature", "23 degC", 'condition."ice and wind".temperature', "degF for degC"),
        ("condition.1.ice.thickness", "90 mm", 'condition."ice and wind".ice.thickness', "radial"),
        ("condition.1.ice.density", "90 kg/m^3", 'condition."ice and wind".ice.density', "no density of ice"),
        ("condition.1.wind.pressure", "4 kPa", 'condition."ice and wind".wind.pressure', "psf or kPa for Pa"),
        ("condition.1.wind", {"speed": "100 m/s"}, 'condition."ice and wind".wind.speed', "km/h for m/s"),
        ("condition.1.wind.drag", 11, 'condition."ice and wind".wind.drag', "about 1"),
        ("support.1.elevation", "900 m", "support.B.elevation", "above the ground"),
        ("support.1.elevation", "1 m", "support.B.elevation", "below the ground"),
    ],
)
def test_slips_are_named(path, value, key, slip):
    warnings = Project(**with_key(path, value)).warnings
    assert [warning for warning in warnings if warning.startswith(f"{key}: ") and slip in warning]
    assert len(warnings) == (2 if path == "line.breaking_strength" else 1)


def test_a_mass_that_is_a_weight():
    (warning,) = project(line={**BASE["line"], "weight": None, "mass": "11.9 kg/m"}).warnings
    assert 'N/m taken for kg/m? then weight = "11.9 N/m"' in warning


def test_a_span_of_many_kilometres():
    tables = with_key("support.2.station", "9 km")
    tables["ground"]["points"].append(["9 km", "10 m"])
    (warning,) = Project(**tables).warnings
    assert warning.startswith("support.C.station: a span of 8800 m")


def test_warnings_name_the_line(tmp_path):
    file = tmp_path / "x.toml"
    text = start_text().replace('"11.9 N/m"', '"1210 N/m"')
    file.write_text(text)
    number = next(number for number, row in enumerate(text.splitlines(), start=1) if row.startswith("weight ="))
    (warning,) = load(file).warnings
    assert warning.startswith(f"{file}:{number}: line.weight: 1210 N/m over 150 mm2 would be a density of")
    assert 'mass = "1.21 kg/m"' in warning
