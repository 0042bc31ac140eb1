"""Project files of turning routes, springs and V hangers: read, refused, warned about, shown and drawn."""

from __future__ import annotations

import json
import math

import numpy as np
import pytest

from tautwise.errors import InputError
from tautwise.model import Project, load
from tautwise.schema import project_schema
from tautwise.solve import settle_report
from tautwise.solve_relax import relaxations_of
from tautwise.text import Ink, settle_text

GOOD = """\
format = "tautwise 1"

[line]
diameter = "20 mm"
weight = "15.97 N/m"
stiffness = "34.7 MN"
expansion = "18.9e-6 / K"
breaking_strength = "120 kN"

[ground]
points = [["-10 m", "0 m"], ["300 m", "5 m"], ["950 m", "0 m"]]

[[support]]
name = "A"
east = "1000 m"
north = "2000 m"
height = "25 m"

[[support]]
name = "B"
east = "1300 m"
north = "2000 m"
height = "27 m"
hold = "hanger"
form = "V"
length = "3.5 m"
spread = "5.2 m"
weight = "400 N"
capacity = { across = "12 kN" }

[[support]]
name = "C"
east = "1580 m"
north = "2100 m"
elevation = "26 m"
hold = "post"
stiffness_along = "200 kN/m"
stiffness_across = "100 kN/m"

[[support]]
name = "D"
east = "1880 m"
north = "2100 m"
elevation = "26 m"
stiffness_along = "500 kN/m"
stiffness_vertical = "900 kN/m"

[stringing]
temperature = "15 degC"
horizontal_tension = "17 kN"

[[condition]]
name = "bare"
temperature = "15 degC"

[[condition]]
name = "gale"
temperature = "5 degC"
wind = { pressure = "900 Pa" }
load = [ { force = "500 N", at = "350 m" } ]

[[mark]]
name = "ball"
at = "600 m"

[[limit]]
id = "B across"
kind = "support_load"
supports = ["B"]
direction = "across"
share = 0.9
"""
SECOND = math.hypot(280.0, 100.0)


def written(tmp_path, text):
    file = tmp_path / "turn.taut.toml"
    file.write_text(text)
    return file


@pytest.fixture
def project(tmp_path):
    return load(written(tmp_path, GOOD))


def faults(tmp_path, *changes):
    text = GOOD
    for old, new in changes:
        assert old in text
        text = text.replace(old, new, 1)
    with pytest.raises(InputError) as caught:
        settle_report(load(written(tmp_path, text)))
    return [str(fault).split("turn.taut.toml:", 1)[1] for fault in caught.value.faults]


PLAN_B = 'east = "1300 m"\nnorth = "2000 m"\n'
NO_PLACE = (
    "angle point without coordinates: other supports of this route are given by east and north; expected east and "
)
NO_PLACE += 'north of every support, for example east = "431.2 m", north = "118.6 m"'


@pytest.mark.parametrize(
    ("old", "new", "expected"),
    [
        (PLAN_B, 'station = "300 m"\n', f"21: support.B.station: {NO_PLACE}"),
        (PLAN_B, "", f"19: support.B: {NO_PLACE}"),
        (
            'north = "2100 m"\nelevation = "26 m"\nhold',
            'elevation = "26 m"\nhold',
            "33: support.C.east: angle point without coordinates: east is given without north; expected both of them, "
            'for example north = "120 m"',
        ),
        (
            'east = "1580 m"\n',
            "",
            "33: support.C.north: angle point without coordinates: north is given without east; expected both of them, "
            'for example east = "120 m"',
        ),
        (
            PLAN_B,
            PLAN_B + 'offset = "3 m"\n',
            "23: support.B.offset: offset is given together with east and north; expected either station (and offset), "
            'or east and north, for example east = "431.2 m", north = "118.6 m"',
        ),
        (
            PLAN_B,
            'east = "1000 m"\nnorth = "2000 m"\n',
            '21: support.B.east: two supports at one place: "A" stands there too; expected another place in plan',
        ),
        (
            'east = "1300 m"',
            'east = "1300 kN"',
            '21: support.B.east: "1300 kN" is a force; expected a length, for example east = "120 m"',
        ),
        ('east = "1300 m"', 'eats = "1300 m"', '21: support.B.eats: unknown key; did you mean "east"?'),
        (
            'spread = "5.2 m"\n',
            "",
            "19: support.B: a V hanger without its spread; expected the distance between the upper ends of its two "
            'strings, for example spread = "4.2 m"',
        ),
        (
            'form = "V"\n',
            "",
            '26: support.B.spread: only a V hanger has a spread; expected no spread, or a V, for example form = "V"',
        ),
        ('form = "V"', 'form = "W"', '25: support.B.form: "W" is not known; expected I or V, for example form = "I"'),
        (
            '"5.2 m"',
            '"7 m"',
            '27: support.B.spread: "7 m" is outside its range; expected a spread of less than twice '
            "the hanger's length",
        ),
        (
            'stiffness_across = "100 kN/m"',
            'stiffness_vertical = "100 kN/m"',
            "38: support.C.stiffness_vertical: a post has no stiffness_vertical; a vertical spring rate belongs to an "
            "anchor",
        ),
        (
            'spread = "5.2 m"',
            'spread = "5.2 m"\nstiffness_along = "1 kN/m"',
            "28: support.B.stiffness_along: a hanger has no stiffness_along; a spring rate belongs to a post or an "
            "anchor",
        ),
        (
            'stiffness_vertical = "900 kN/m"',
            'spread = "3 m"',
            "46: support.D.spread: an anchor has no spread; the spread of a V belongs to a hanger",
        ),
        (
            '"900 kN/m"',
            '"-900 kN/m"',
            '46: support.D.stiffness_vertical: "-900 kN/m" is negative; expected a force per length above 0, for '
            'example stiffness_vertical = "250 kN/m"',
        ),
        (
            'at = "600 m"',
            'at = "960 m"',
            "64: mark.ball.at: 960 m is not on the line, which runs from 0 m to 897.321 m; expected a station between "
            "the first and the last support",
        ),
    ],
)
def test_refused(tmp_path, old, new, expected):
    assert faults(tmp_path, (old, new)) == [expected]


def test_a_hairpin_and_a_place_too_far_are_refused_at_their_keys(tmp_path):
    no_ground = ('[ground]\npoints = [["-10 m", "0 m"], ["300 m", "5 m"], ["950 m", "0 m"]]\n', "")
    heights = (('height = "25 m"', 'elevation = "25 m"'), ('height = "27 m"', 'elevation = "27 m"'))
    back = ('east = "1880 m"\nnorth = "2100 m"', 'east = "1300 m"\nnorth = "2000 m"')
    (fault,) = faults(tmp_path, no_ground, *heights, back)
    assert "support.C.east: " in fault
    assert "a turn of less than 179 degrees" in fault
    (fault,) = faults(tmp_path, no_ground, *heights, ('north = "2000 m"', 'north = "20000 km"'))
    assert "support.A.north: " in fault


def test_the_ground_reaches_along_the_route(tmp_path):
    (fault,) = faults(tmp_path, ('["950 m", "0 m"]', '["890 m", "0 m"]'))
    assert "does not cover the route, from 0 m to 897.321 m" in fault


def test_a_straight_route_still_needs_its_stations():
    with pytest.raises(InputError, match=r'station: missing; expected a length, for example station = "120 m"'):
        Project(
            line={"weight": "10 N/m", "stiffness": "10 MN"},
            support=[{"name": "A", "station": "0 m", "elevation": "1 m"}, {"name": "B", "elevation": "1 m"}],
            stringing={"temperature": "15 degC"},
            condition=[{"name": "bare", "temperature": "15 degC"}],
        )


def test_warned_of_a_turn_that_is_hardly_meant(tmp_path):
    text = GOOD.replace('east = "1880 m"\nnorth = "2100 m"', 'east = "1450 m"\nnorth = "2400 m"')
    (warning,) = load(written(tmp_path, text)).warnings
    assert "33: support.C.east: the route turns by 94 deg here: east and north mixed up" in warning


def test_stations_follow_from_the_plan(project):
    assert project.turns
    assert [support.station_m for support in project.supports] == pytest.approx(
        [0.0, 300.0, 300 + SECOND, 600 + SECOND]
    )
    core = project.to_core()
    assert core["route"] == "turning"
    assert (core["supports"][1]["station_m"], core["supports"][1]["offset_m"]) == (1300.0, 2000.0)
    assert core["supports"][1]["hanger_spread_m"] == 5.2
    assert core["supports"][3]["stiffness_vertical_N_per_m"] == 900e3
    assert core["supports"][1]["elevation_m"] == pytest.approx(32.0)  # 27 m above the ground at station 300 m


def test_results_say_where_and_how_far(project):
    gale = project.settle("gale")
    assert [state.station_m for state in gale.supports] == pytest.approx([0.0, 300.0, 300 + SECOND, 600 + SECOND])
    hanger, post = gale.supports[1:3]
    assert hanger.swing_across_deg > 5.0
    assert math.hypot(
        math.tan(math.radians(hanger.swing_along_deg)), math.tan(math.radians(hanger.swing_across_deg))
    ) == (pytest.approx(math.tan(math.radians(hanger.swing_deg)), rel=1e-9))
    assert (post.swing_deg, post.swing_along_deg, post.swing_across_deg) == (None, None, None)
    ball, force = gale.marks
    assert 580.0 < ball.station_m < 610.0
    assert ball.position_m[:2] == pytest.approx((1580.0, 2100.0), abs=10.0)
    assert force.position_m[0] > 1300.0
    places = gale.at([100.0, 500.0])
    assert places.position_m[0, 0] == pytest.approx(1100.0, abs=1e-6)
    assert np.isfinite(places.clearance_m).all()
    again = type(gale).from_json(gale.to_json())
    assert again.supports == gale.supports
    assert json.loads(gale.to_json())["supports"][1]["swing_across_deg"] == hanger.swing_across_deg


def test_the_text_gives_marks_in_plan(project):
    text = "\n".join(settle_text(settle_report(project), project, Ink(False)))
    assert "station     east    north  elevation" in text


def test_a_slack_string_is_said(project):
    from tautwise.findings import findings_of

    gale, bare = project.settle("gale"), project.settle("bare")
    (found,) = findings_of(project, [bare, gale], None)
    assert "pushes to the left at 'B' in 'gale': the left string of its V is slack" in found


def test_the_schema_knows_both_ways():
    support = project_schema()["$defs"]["Support"]
    assert {"required": ["east", "north"]} in support["allOf"][1]["oneOf"]
    assert "default" not in support["properties"]["station"]
    assert {"form", "spread", "stiffness_vertical", "east", "north"} <= set(support["properties"])
    json.dumps(project_schema(), allow_nan=False)


def test_a_moved_support_is_not_told_as_a_coordinate(project):
    """A relaxation names the station; the file holds east and north, so no new text for a key is offered."""
    rows = [
        {"kind": "support_station", "support": 1, "by": 2.0, "to": 302.0, "pull_N": 17e3},
        {"kind": "support_height", "support": 1, "by": 2.0, "to": 34.0, "pull_N": 17e3},
    ]
    station, height = relaxations_of(project, rows)
    assert (station.change, station.by, station.to, station.written) == ("station of B", 2.0, 302.0, None)
    assert station.where.endswith("turn.taut.toml:21")
    assert height.written == "29.000 m"


def test_drawn(project):
    plt = pytest.importorskip("matplotlib.pyplot")
    gale = project.settle("gale")
    ax = gale.plot(chord=True)
    low, high = ax.get_xlim()
    assert low < 0.0
    assert high > 897.0
    curve = next(line for line in ax.lines if line.get_label() == "gale")
    assert min(curve.get_xdata()) >= 0.0
    assert max(curve.get_xdata()) < 898.0
    plan = gale.plot_plan()
    assert (plan.get_xlabel(), plan.get_ylabel()) == ("east, m", "north, m")
    texts = [text.get_text() for text in plan.texts]
    assert {"A", "B", "C", "D"} <= set(texts)
    assert any(text.endswith("kN") for text in texts)
    plt.close("all")
