"""What is hardly meant is said at once, and a refusal says what was found there and what would do."""

import re

import pytest

import tautwise as tw
from tautwise import cli
from tautwise.catalogue import Catalogue
from tautwise.fit_judge import NO_FIT
from tautwise.schema import project_schema
from tautwise.size_files import read_sizes
from tautwise.start import start_text

HEAD = "name,kind,diameter [mm],weight [N/m],modulus [GPa],area [mm^2],expansion [1/K],breaking_strength [kN],source\n"


# --- an alias means a name, and the later file holds that name


def test_an_alias_finds_the_size_of_the_later_file(tmp_path):
    (tmp_path / "a.csv").write_text(HEAD + "Drake ACSR,ACSR,28,15,70,468,19e-6,100,own\n")
    whole = Catalogue.of([read_sizes((tmp_path / "a.csv").read_text(), "a.csv")])
    for name in ("Drake", "Drake ACSR", "drake acsr"):
        size, hidden = whole.find(name)
        assert size.breaking_strength_N == pytest.approx(100e3)
        assert [each.name for each in hidden] == ["Drake ACSR"]


# --- a history without its heaviest condition


def curved(conditions, history):
    line = {"diameter": "28.1 mm", "area": "469 mm^2", "weight": "16 N/m", "expansion": "19e-6 / K",
            "curve": {"initial": ["0 MPa", "500 MPa"], "final_modulus": "75 GPa"}}  # fmt: skip
    ends = [{"name": name, "station": f"{x} m", "elevation": "20 m"} for name, x in (("A", 0), ("B", 200))]
    return tw.Project(line=line, support=ends, condition=conditions, history=history,
                      stringing={"temperature": "15 degC", "horizontal_tension": "20 kN"})  # fmt: skip


LIGHT, HEAVY = {"name": "light", "temperature": "15 degC"}, {"name": "heavy", "temperature": "-5 degC",
    "ice": {"thickness": "12 mm", "density": "900 kg/m^3"}}  # fmt: skip


def test_a_history_that_leaves_out_a_heavier_condition_is_warned_of():
    (warning,) = curved([LIGHT, HEAVY], {"conditions": ["light"]}).warnings
    assert re.search(r'^history\.conditions: leaves out "heavy".* not counted', warning)
    assert curved([LIGHT, HEAVY], {"conditions": ["heavy"]}).warnings == ()
    assert curved([LIGHT, HEAVY], None).warnings == ()


# --- points of another line


def surveyed(tmp_path, lift):
    ends = [{"name": name, "station": f"{x} m", "elevation": "20 m"} for name, x in (("A", 0), ("B", 200), ("C", 400))]
    project = tw.Project(
        line={"diameter": "20 mm", "weight": "10 N/m", "stiffness": "20 MN", "expansion": "12e-6 / K"},
        support=[ends[0], ends[1] | {"hold": "hanger", "length": "1 m"}, ends[2]],
        condition=[LIGHT],
        stringing={"temperature": "15 degC", "horizontal_tension": "20 kN"},
    )
    rows = [(x, 19.0 + x / 200.0 * -0.0 - 2.0 * (x / 100.0) * (2.0 - x / 100.0) * 1.25 + up) for x, up in lift]
    text = "station_m,elevation_m,temperature_degC\n" + "".join(f"{x},{z:.3f},15\n" for x, z in rows)
    (tmp_path / "points.csv").write_text(text)
    return project, project.fit(tmp_path / "points.csv")


def test_points_that_do_not_fit_are_said_first(tmp_path):
    _, found = surveyed(tmp_path, [(40, 1.5), (80, -1.0), (120, 2.0), (160, -2.0)])
    assert found.warnings[0].startswith(NO_FIT)
    assert "beside a sag of" in found.warnings[0]
    _, found = surveyed(tmp_path, [(40, 0.01), (80, -0.01), (120, 0.01), (160, -0.01)])
    assert not any(text.startswith(NO_FIT) for text in found.warnings)


def test_the_file_as_built_says_how_sure_it_is(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "p.taut.toml").write_text(start_text())
    (tmp_path / "s.csv").write_text("station_m,elevation_m,temperature_degC\n80,9,15\n150,25,15\n220,9,15\n")
    assert cli.run(["fit", "p.taut.toml", "s.csv", "--write", "new.taut.toml"]) == 0
    out = capsys.readouterr().out
    assert re.search(r"^These points do not fit this line", out, re.MULTILINE)
    assert out.index("These points") < out.index("Pull ")
    comments = [line for line in (tmp_path / "new.taut.toml").read_text().splitlines() if line.startswith("# ")]
    assert any("3 points, " in line and "off the line" in line for line in comments)
    assert any(re.search(r"Pull .* kN, from .* to .* kN \(95 %\)", line) for line in comments)
    assert any(NO_FIT in line for line in comments)
    assert tw.load(tmp_path / "new.taut.toml").stringing.natural_length_m


# --- refusals


def refused(**tables):
    base = {"condition": [LIGHT], "stringing": {"temperature": "15 degC", "horizontal_tension": "20 kN"}}
    base["line"] = {"diameter": "20 mm", "weight": "10 N/m", "stiffness": "20 MN", "expansion": "12e-6 / K"}
    with pytest.raises(tw.InputError) as caught:
        tw.Project(**(base | tables)).settle()
    return [str(fault) for fault in caught.value.faults]


def corners(*places):
    return [
        {"name": f"P{k}", "east": f"{x} m", "north": f"{y} m", "elevation": "20 m"} for k, (x, y) in enumerate(places)
    ]


def test_a_support_with_station_and_north_makes_one_fault():
    supports = corners((0, 0), (100, 0), (200, 30))
    supports[1] = {"name": "P1", "station": "100 m", "north": "0 m", "elevation": "20 m"}
    wind = {"name": "gale", "temperature": "15 degC", "wind": {"pressure": "400 Pa", "bearing": "180 deg"}}
    faults = refused(support=supports, condition=[wind])
    assert len(faults) == 1
    assert "station is given together with north" in faults[0]
    assert "for example east" in faults[0]


def test_a_turn_back_gives_its_angle_and_what_to_do():
    (fault,) = refused(support=corners((0, 0), (100, 0), (0, 0.1)))
    assert re.search(
        r"P1.*turns by 179\.9.* deg here; expected a turn of less than 179 degrees, for example two supports", fault
    )


def test_a_falling_curve_gives_its_range_and_an_example():
    line = {"diameter": "20 mm", "area": "200 mm^2", "weight": "10 N/m", "expansion": "12e-6 / K",
            "curve": {"initial": ["0 MPa", "500 MPa", "-900 MPa"], "final_modulus": "75 GPa"}}  # fmt: skip
    (fault,) = refused(line=line, support=corners((0, 0), (100, 0)))
    assert re.search(
        r"initial: the curve falls somewhere from 0 to valid_to, 0\.45 %; expected .* for example a smaller", fault
    )


def test_a_carriage_on_spans_is_told_of_span():
    load = {"force": "2 kN", "carriage": "free", "spans": ["P0"]}
    faults = refused(support=corners((0, 0), (100, 0), (200, 0)), condition=[LIGHT | {"load": [load]}])
    assert len(faults) == 1
    assert "spans: a carriage stands in one span; expected span" in faults[0]
    assert 'span = "' in faults[0]


# --- the schema and the file to begin from


def test_defaults_of_the_schema_are_of_their_own_type():
    def walk(node):
        if isinstance(node, dict):
            if node.get("type") == "string" and "default" in node:
                yield node
            for part in node.values():
                yield from walk(part)
        elif isinstance(node, list):
            for part in node:
                yield from walk(part)

    schema = project_schema()
    assert schema["$defs"]["Wind"]["properties"]["angle"]["default"] == "90 deg"
    texts = list(walk(schema))
    assert texts
    assert "rad" not in schema["$defs"]["SwingLimit"]["description"]


@pytest.mark.parametrize(
    "key",
    [
        "[history]",
        "creep_strain",
        "clip",
        "bearing",
        "stiffness_along = ",
        "span = ",
        "include",
        "before",
        "creep_condition",
    ],
)
def test_the_file_to_begin_from_shows_every_choice(key):
    assert key in start_text()
