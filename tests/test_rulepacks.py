"""Rule packs: published loads through the core, every value with its source, names, parameters, what is refused."""

from __future__ import annotations

import json
import math

import pytest

import tautwise as tw
from tautwise import cli
from tautwise.errors import InputError
from tautwise.rulepacks import leaves, pack, pack_names, raw_pack, rule_packs, value_sources

LBF_PER_FT = 14.593902937206364
FOOT_M = 0.3048
SUPPORTS = [{"name": name, "station": at, "elevation": "30 ft"} for name, at in (("A", "0 ft"), ("B", "300 ft"))]
DISTRICTS = [name for name in pack_names() if name.startswith("nesc-250b")]

# California PUC General Order 95, Appendix C, tables 18 and 23 (checks A, seen), lb/ft: heavy vertical, horizontal and
# resultant, light horizontal and resultant.
GO_95 = {
    "GO 95 copper 500 kcmil HD": (2.3604, 0.9065, 2.528, 0.5420, 1.636),
    "GO 95 copper 0 AWG MHD": (0.8655, 0.6840, 1.103, 0.2453, 0.408),
    "GO 95 ACSR 795 kcmil 26/7": (2.0928, 1.0540, 2.343, 0.7387, 1.319),
    "GO 95 ACSR 397.5 kcmil 26/7": (1.3442, 0.8915, 1.613, 0.5220, 0.756),
    "GO 95 ACSR 266.8 kcmil 26/7": (1.0769, 0.8210, 1.354, 0.4280, 0.564),
    "GO 95 ACSR 2/0 AWG 6/1": (0.7725, 0.7235, 1.058, 0.2980, 0.350),
    "GO 95 ACSR 2 AWG 6/1": (0.5990, 0.6580, 0.890, 0.2107, 0.230),
}


def project(rules, line=None, **tables) -> tw.Project:
    line = line or {"size": "Drake"}
    given = {"support": SUPPORTS, "stringing": {"temperature": "60 degF", "horizontal_tension": "2000 lbf"}}
    return tw.Project(line=line, rules=rules, **{**given, **tables})


def loads_lbf_per_ft(made: tw.Project, condition: str) -> tuple[float, float]:
    """Load down and across per natural length: what both supports carry together, by the core."""
    settled = made.settle(condition)
    length = math.fsum(span.natural_length_m for span in settled.spans)
    down, across = (math.fsum(getattr(each, key) for each in settled.supports) for key in ("down_N", "across_N"))
    return down / length / LBF_PER_FT, across / length / LBF_PER_FT


def refusal(rules, **tables) -> list[str]:
    with pytest.raises(InputError) as caught:
        project(rules, **tables)
    return [str(fault) for fault in caught.value.faults]


# --- published values


@pytest.mark.parametrize("size", GO_95)
def test_go_95_loads(size):
    """Within one unit of the last digit printed, as the table itself adds up."""
    line = {"size": size, "stiffness": "5 MN", "expansion": "1e-5 / K"}
    made = project(["go-95-heavy", "go-95-light"], line)
    heavy, light = (loads_lbf_per_ft(made, f"go-95-{name} load") for name in ("heavy", "light"))
    vertical, horizontal, resultant, light_horizontal, light_resultant = GO_95[size]
    assert heavy == pytest.approx((vertical, horizontal), abs=1.0e-4)
    assert math.hypot(*heavy) == pytest.approx(resultant, abs=1.0e-3)
    assert light[1] == pytest.approx(light_horizontal, abs=1.0e-4)
    assert math.hypot(*light) == pytest.approx(light_resultant, abs=1.0e-3)


def test_go_95_temperatures_and_share():
    made = project(["go-95-heavy", "go-95-light"])
    assert [round(one.temperature_degC * 1.8 + 32.0, 9) for one in made.conditions] == [0.0, 25.0]
    assert [(limit.id, limit.share, limit.conditions) for limit in made.limits] == [
        ("go-95-heavy-tension", 0.5, ("go-95-heavy load",)),
        ("go-95-light-tension", 0.5, ("go-95-light load",)),
    ]


def test_go_95_sag_from_a_size_and_a_pack_alone():
    """A1 (seen): No. 0 copper, 300 ft, half its strength under the heavy load; 5.30 ft at 60 degF, bare, +-0.05 ft."""
    bare = [{"name": "bare", "temperature": "60 degF"}]
    made = project(["go-95-heavy"], {"size": "GO 95 copper 0 MHD"}, condition=bare)
    window = made.window()
    assert (window.high.limit, window.high.condition) == ("go-95-heavy-tension", "go-95-heavy load")
    state = made.settle("bare", pull=window.high.horizontal_tension_N)
    assert state.spans[0].sag_m / FOOT_M == pytest.approx(5.30, abs=0.05)


def test_heavy_district_on_the_published_conductor():
    """D1: 795 kcmil 26/7, ice alone 2.094 lb/ft, with wind and the constant 2.509 (seen), each to 0.001."""
    down, across = loads_lbf_per_ft(project(["nesc-250b-heavy"]), "nesc-250b-heavy load")
    total = math.hypot(down, across)
    assert total == pytest.approx(2.509, abs=1e-3)
    assert down * (1.0 - 0.30 / total) == pytest.approx(2.094, abs=1e-3)


@pytest.mark.parametrize(  # checks G1 (seen) and G2 (from memory): ice in, wind psf, degF, constant lb/ft
    ("name", "ice", "wind", "temperature", "constant"),
    [
        ("nesc-250b-heavy", 0.50, 4.0, 0.0, 0.30),
        ("nesc-250b-medium", 0.25, 4.0, 15.0, 0.20),
        ("nesc-250b-light", 0.0, 9.0, 30.0, 0.05),
        ("nesc-250b-islands-low", 0.0, 9.0, 50.0, 0.05),
        ("nesc-250b-islands-high", 0.25, 4.0, 15.0, 0.20),
    ],
)
def test_districts_by_hand(name, ice, wind, temperature, constant):
    made = project([name])
    (condition,) = made.conditions
    assert condition.temperature_degC == pytest.approx((temperature - 32.0) / 1.8, abs=1e-12)
    diameter = 1.108
    sleeve = 57.0 * math.pi / 4.0 * ((diameter + 2 * ice) ** 2 - diameter**2) / 144.0
    across = wind * (diameter + 2 * ice) / 12.0
    resultant = math.hypot(1.094 + sleeve, across) + constant
    assert math.hypot(*loads_lbf_per_ft(made, condition.name)) == pytest.approx(resultant, rel=1e-9)


@pytest.mark.parametrize("district", DISTRICTS)
def test_shares_of_261h(district):
    """G3: 60 % loaded, 35 % initial and 25 % final unloaded, at the district's temperature."""
    made = project([district, "nesc-261h"])
    assert [(limit.id, limit.share, limit.conditions) for limit in made.limits] == [
        ("nesc-261h-loaded", 0.60, (f"{district} load",)),
        ("nesc-261h-unloaded-initial", 0.35, (f"{district} unloaded initial",)),
        ("nesc-261h-unloaded-final", 0.25, (f"{district} unloaded final",)),
    ]
    assert len({condition.temperature_degC for condition in made.conditions}) == 1
    assert all(one.ice is None and one.wind is None for one in made.conditions[1:])
    report = made.vet(pull="3000 lbf")
    assert {limit.id: limit.clause for limit in report.limits}["nesc-261h-loaded"] == (
        "NESC Rule 261H1; edition not noted; from memory"
    )


def test_a_state_is_given_where_the_line_has_one():
    """A linear line is the same in both states, and says so; one that beds in is not."""
    rules = ["nesc-250b-heavy", "nesc-261h"]
    linear = project(rules)
    assert [one.state for one in linear.conditions[1:]] == ["initial", "initial"]
    assert sum("the line is linear" in each.source for each in linear.origins) == 2
    bedded = project(rules, line={"size": "Drake", "bedding_in": "0.03 %"})
    assert [one.state for one in bedded.conditions[1:]] == ["initial", "final"]


def test_iec_60826_wind():
    """G5: 1/2 x 1.225 x 32^2 x 1.9 x 0.95 Pa, tau 0.97; the drag as given."""
    rules = [{"pack": "iec-60826-wind", "wind_speed": "32 m/s", "gust_factor": 1.9, "temperature": "10 degC",
              "span_factor": "95 %", "air_correction": 0.97, "drag": "1.1"}]  # fmt: skip
    (condition,) = project(rules).conditions
    assert condition.wind.pressure_Pa == pytest.approx(0.5 * 0.97 * 1.225 * 32.0**2 * 1.9 * 0.95, rel=1e-14)
    assert (condition.wind.drag, condition.temperature_degC) == (1.1, 10.0)


def test_en_50341_wind():
    """G6: rho 1.25 kg/m3; 1/2 x 1.25 x 40^2 = 1000 Pa."""
    made = project([{"pack": "en-50341-wind", "wind_speed": "144 km/h", "temperature": "5 degC"}])
    assert made.conditions[0].wind.pressure_Pa == pytest.approx(1000.0, rel=1e-14)
    down, across = loads_lbf_per_ft(made, "en-50341-wind wind")
    assert across * LBF_PER_FT == pytest.approx(1000.0 * 1.108 * 0.0254, rel=1e-9)
    assert down == pytest.approx(1.094, rel=1e-9)


def test_osha_lifeline():
    """G17: a safety factor of 2, in the conditions that are listed or in all."""
    hot = [{"name": "hot", "temperature": "60 degC"}, {"name": "arrest", "temperature": "15 degC"}]
    (limit,) = project(["osha-lifeline"], condition=hot).limits
    assert (limit.share, limit.conditions) == (0.5, None)
    (limit,) = project([{"pack": "osha-lifeline", "conditions": ["arrest"]}], condition=hot).limits
    assert limit.conditions == ("arrest",)
    assert "5000 lb (22.2 kN)" in " ".join(note.source for note in pack("osha-lifeline").notes)
    assert pytest.approx(22.2e3, abs=50) == 5000 * 4.4482216152605


@pytest.mark.parametrize(("angle", "ratio"), [(15.0, 2), (5.0, 6)])
def test_the_ratios_of_the_lifeline_note(angle, ratio):
    assert round(1.0 / (2.0 * math.sin(math.radians(angle)))) == ratio


# --- every pack


@pytest.mark.parametrize("name", pack_names())
def test_every_value_has_its_source(name):
    raw = raw_pack(name)
    assert raw["format"] == "tautwise rules 1"
    assert raw["name"] == name
    for source in raw["source"].values():
        assert source["clause"]
        assert source["edition"]
        assert source["confidence"] in ("seen", "from memory")
    for row in (*raw.get("condition", ()), *raw.get("limit", ())):
        paths = [path for path, _ in leaves(row)]
        assert paths
        assert [each.what for each in value_sources(raw, row, "")] == paths
    for row in raw.get("parameter", ()):
        assert row.get("source") in raw["source"] if "default" in row else "example" in row
    assert "Check every value against the edition in force" in raw["caution"]


@pytest.mark.parametrize("name", pack_names())
def test_every_pack_is_printed_with_sources_and_caution(name, capsys):
    assert cli.run(["rules", name]) == 0
    out = capsys.readouterr().out
    assert pack(name).caution in out
    assert f'rules = ["{name}"]' in out or f'pack = "{name}"' in out
    assert "edition not noted" in out
    assert cli.run(["rules", name, "--json"]) == 0
    document = json.loads(capsys.readouterr().out)
    assert (document["format"], document["name"]) == ("tautwise-rules 1", name)
    assert type(pack(name)).from_dict(document) == pack(name)


def test_the_list_of_packs(capsys):
    assert cli.run(["rules"]) == 0
    out = capsys.readouterr().out
    assert all(name in out for name in pack_names())
    assert [each.name for each in tw.rule_packs()] == [each.name for each in rule_packs()] == list(pack_names())
    assert cli.run(["rules", "nesc-250-heavy"]) == 2
    assert 'did you mean "nesc-250b-heavy"?' in capsys.readouterr().err


# --- in a project


def test_the_schema_takes_what_the_reader_does():
    jsonschema = pytest.importorskip("jsonschema")
    from tautwise.schema import project_schema

    validator = jsonschema.Draft202012Validator(project_schema())
    supports = [{**each, "hold": "anchor"} for each in SUPPORTS]
    good = {"format": "tautwise 1", "line": {"size": "Drake", "catalogue": ["own.csv"]}, "support": supports,
            "stringing": {"temperature": "15 degC"}, "rules": ["go-95-heavy", {"pack": "go-95-light", "as": "x"}],
            "waiver": [{"limit": "x", "reason": "y", "until": "2027-06-30"}]}  # fmt: skip
    assert [error.message for error in validator.iter_errors(good)] == []
    for key, value in (("rules", ["go-95-hevy"]), ("rules", [{"as": "x"}]), ("line", {"sise": "Drake"}),
                       ("waiver", [{"limit": "x", "until": "2027-06-30"}]), ("rules", None)):  # fmt: skip
        bad = {name: part for name, part in {**good, key: value}.items() if part is not None}
        assert list(validator.iter_errors(bad)), key


def test_entries_of_the_project_win_and_the_result_says_so(tmp_path):
    text = """\
format = "tautwise 1"
rules = ["go-95-heavy"]
[line]
size = "Drake"
[[support]]
name = "A"
station = "0 m"
elevation = "9 m"
[[support]]
name = "B"
station = "90 m"
elevation = "9 m"
[stringing]
temperature = "15 degC"
horizontal_tension = "9 kN"
[[condition]]
name = "go-95-heavy load"
temperature = "-20 degC"
[[limit]]
id = "go-95-heavy-tension"
kind = "tension"
share = 0.4
"""
    file = tmp_path / "p.taut.toml"
    file.write_text(text, encoding="utf-8")
    made = tw.load(file)
    assert len(made.conditions) == len(made.limits) == 1
    assert made.conditions[0].temperature_degC == -20.0
    assert made.limits[0].share == 0.4
    assert made.warnings == (
        f'{file}:16: condition."go-95-heavy load": stands instead of that of the rule pack "go-95-heavy"',
        f'{file}:19: limit.go-95-heavy-tension: stands instead of that of the rule pack "go-95-heavy"',
    )
    assert not [each for each in made.origins if each.what.startswith("go-95")]
    assert made.vet().files[0].findings == made.warnings


def test_one_pack_twice_with_prefixes():
    gust = {"pack": "iec-60826-wind", "gust_factor": 1.9, "temperature": "10 degC"}
    made = project([{**gust, "wind_speed": "30 m/s"}, {**gust, "wind_speed": "40 m/s", "as": "gale"}])
    assert [one.name for one in made.conditions] == ["iec-60826-wind wind", "gale wind"]
    origins = {each.what: each for each in made.origins}
    assert origins["gale wind_speed"].value == "40 m/s"
    assert origins["gale air_density"].source.startswith("default of the pack; IEC 60826")
    assert origins["gale wind wind.pressure"].value.startswith("1/2 tau rho V^2 Gc GL = 1862")
    assert origins["gale wind wind.pressure"].confidence == "from memory"


IEC = "iec-60826-wind"


@pytest.mark.parametrize(
    ("rules", "problem"),
    [
        (["nesc-250b-hevy"], 'rules[0]: there is no rule pack "nesc-250b-hevy"; did you mean "nesc-250b-heavy"? '
         "expected one of en-50341-wind, go-95-heavy"),
        ("go-95-heavy", 'rules: the text "go-95-heavy" where a list of at most 32 rule packs is needed'),
        ([3], "rules[0]: the number 3 where a rule pack is needed"),
        ([{"as": "x"}], "rules[0]: a table where a rule pack is needed"),
        (["nesc-261h"], 'rules[0]: "nesc-261h" judges the conditions of a district of nesc-250b, and none is among'),
        ([{"pack": IEC, "wind_speed": "3 m/s", "temperature": "5 degC"}],
         f'gust_factor is missing, which "{IEC}" needs; '
         "expected combined wind factor Gc, by terrain and height, for example gust_factor"),
        ([{"pack": "en-50341-wind", "wind_speed": "3 m", "temperature": "5 degC"}],
         'rules[0].wind_speed: "3 m" is a length; expected a speed'),
        ([{"pack": "en-50341-wind", "wind_sped": "3 m/s", "wind_speed": "3 m/s", "temperature": "5 degC"}],
         'rules[0].wind_sped: unknown key; did you mean "wind_speed"?'),
        ([{"pack": "en-50341-wind", "wind_speed": "-3 m/s", "temperature": "5 degC"}], '"-3 m/s" is negative'),
        (["go-95-heavy", "go-95-heavy"], 'rules[1]: "go-95-heavy" stands here twice; expected a name of its own'),
        ([{"pack": "go-95-heavy", "as": 7}], "rules[0].as: the number 7 is no name"),
        ([{"pack": "go-95-heavy", "conditions": ["hot"]}], "rules[0].conditions: unknown key"),
        ([{"pack": "osha-lifeline", "conditions": "hot"}], 'rules[0].conditions: the text "hot" where a list'),
    ],
)  # fmt: skip
def test_refused_once_and_without_follow_ups(rules, problem):
    faults = refusal(rules, limit=[{"id": "x", "kind": "slope", "most": 1.0, "conditions": ["go-95-heavy load"]}])
    assert len(faults) == 1, faults
    assert problem in faults[0]


def test_a_missing_pack_is_refused_at_its_line(tmp_path):
    file = tmp_path / "p.taut.toml"
    text = 'format = "tautwise 1"\nrules = [\n  "go-95-heavy",\n  "go-95-hevy",\n]\n[line]\n'
    file.write_text(text, encoding="utf-8")
    with pytest.raises(InputError) as caught:
        tw.load(file)
    (fault,) = [each for each in caught.value.faults if each.path.startswith("rules")]
    assert (fault.file, fault.line) == (str(file), 4)


def test_a_fault_of_a_packs_limit_stands_at_the_packs_line(tmp_path):
    line = "[line]\nweight = '1 N/m'\ndiameter = '20 mm'\nstiffness = '9 MN'\nexpansion = '1e-5 / K'\n"
    supports = "".join(f"[[support]]\nname = '{n}'\nstation = '{n} m'\nelevation = '9 m'\n" for n in (0, 90))
    file = tmp_path / "p.taut.toml"
    head = 'format = "tautwise 1"\nrules = [\n  "nesc-250b-light",\n  "go-95-heavy",\n]\n'
    file.write_text(f"{head}{line}{supports}[stringing]\ntemperature = '15 degC'\n", encoding="utf-8")
    with pytest.raises(InputError) as caught:
        tw.load(file)
    assert [(fault.file, fault.line) for fault in caught.value.faults] == [(str(file), 4)]


def test_a_limit_of_a_pack_says_what_the_line_lacks():
    line = {"weight": "10 N/m", "diameter": "20 mm", "stiffness": "20 MN", "expansion": "1e-5 / K"}
    faults = refusal(["go-95-heavy"], line=line)
    assert len(faults) == 1
    assert "limit.go-95-heavy-tension.share: a share of the breaking strength, which [line] does not give" in faults[0]
