"""Every bad input is refused, with file, line, key path, what is wrong, what is expected and an example."""

from __future__ import annotations

import time

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tautwise.errors import Fault, InputError, NotSettledError, SearchCancelled, TautwiseError
from tautwise.model import Project, load

GOOD = """\
format = "tautwise 1"
title = "Inlet"

[line]
diameter = "16 mm"
area = "150 mm^2"
weight = "11.9 N/m"
modulus = "150 GPa"
expansion = "11.5e-6 / K"
breaking_strength = "190 kN"

[ground]
points = [["0 m", "3 m"], ["300 m", "5 m"]]

[[crossing]]
name = "channel"
from = "120 m"
to = "180 m"
top = "4.5 m"

[[support]]
name = "West mast"
station = "0 m"
elevation = "24 m"
hold = "anchor"

[[support]]
name = "Middle"
station = "150 m"
height = "18 m"
hold = "hanger"
length = "1.8 m"

[[support]]
name = "East mast"
station = "300 m"
height = "18 m"
hold = "post"
stiffness_along = "250 kN/m"

[stringing]
temperature = "15 degC"
horizontal_tension = "20 kN"

[[condition]]
name = "hot"
temperature = "60 degC"

[[condition]]
name = "ice and wind"
temperature = "-5 degC"
ice = { thickness = "15 mm", density = "900 kg/m^3" }
wind = { pressure = "400 Pa", drag = 1.0 }
load = [ { force = "2 kN", at = "75 m" } ]

[[mark]]
name = "ball"
at = "75 m"

[[limit]]
id = "channel"
kind = "clearance"
over = "channel"
least = "6.5 m"
conditions = ["hot", "ice and wind"]

[[limit]]
id = "strength"
kind = "tension"
share = 0.5
"""


def refused(folder, text, **others):
    for name, content in others.items():
        (folder / f"{name}.csv").write_text(content)
    file = folder / "x.taut.toml"
    file.write_text(text)
    with pytest.raises(InputError) as caught:
        load(file)
    return file, caught.value


def changed(old, new):
    assert GOOD.count(old) >= 1, old
    return GOOD.replace(old, new, 1), GOOD[: GOOD.index(old)].count("\n") + 1


def test_the_good_file_is_good(tmp_path):
    file = tmp_path / "x.taut.toml"
    file.write_text(GOOD)
    assert load(file).warnings == ()


# Replaced text, its replacement, lines further down where the fault stands, key path, problem, expectation, example.
CASES = {
    "unknown key": ('elevation = "24 m"', 'elevation = "24 m"\nheigth = "2 m"', 1,
                    'support."West mast".heigth', 'unknown key; did you mean "height"?', "", ""),
    "unknown table": ("[[mark]]", "[[marks]]", 0, "marks", 'unknown key; did you mean "mark"?', "", ""),
    "unknown nested key": ("drag = 1.0", "darg = 1.0", 0, 'condition."ice and wind".wind.darg',
                           'did you mean "drag"?', "", ""),
    "missing unit": ('diameter = "16 mm"', 'diameter = "16"', 0, "line.diameter", "a number without a unit",
                     "a length above 0", 'diameter = "16 mm"'),
    "bare number": ('weight = "11.9 N/m"', "weight = 11.9", 0, "line.weight", "a number without a unit",
                    "a force per length above 0", 'weight = "11.9 N/m"'),
    "wrong dimension": ('station = "150 m"', 'station = "150 kN"', 0, "support.Middle.station",
                        '"150 kN" is a force', "a length", 'station = "120 m"'),
    "mass for weight": ('weight = "11.9 N/m"', 'weight = "1.2 kg/m"', 0, "line.weight", "is a mass per length",
                        "a force per length", 'weight = "11.9 N/m"'),
    "nan": ("share = 0.5", "share = nan", 0, "limit.strength.share", '"nan" is not finite', "a ratio above 0",
            'share = "50 %"'),
    "nan in a text": ('temperature = "60 degC"', 'temperature = "nan degC"', 0, "condition.hot.temperature",
                      "not finite", "a temperature", 'temperature = "-5 degC"'),
    "inf": ("drag = 1.0", "drag = inf", 0, 'condition."ice and wind".wind.drag', "not finite", "a ratio", "drag = 1.0"),
    "overflow": ('modulus = "150 GPa"', 'modulus = "1e999 GPa"', 0, "line.modulus", "too large", "a pressure",
                 'modulus = "150 GPa"'),
    "overflow of a number": ("share = 0.5", "share = 1e999", 0, "limit.strength.share", '"1e999" is too large',
                             "a ratio", 'share = "50 %"'),
    "underscore": ('station = "150 m"', 'station = "1_50 m"', 0, "support.Middle.station", "no underscores", "a length",
                   'station = "120 m"'),
    "full-width digits": ('station = "150 m"', 'station = "１50 m"', 0, "support.Middle.station", "is not a number",
                          "a length", 'station = "120 m"'),
    "negative length": ('length = "1.8 m"', 'length = "-1.8 m"', 0, "support.Middle.length", '"-1.8 m" is negative',
                        "a length above 0", 'length = "1.8 m"'),
    "zero weight": ('weight = "11.9 N/m"', 'weight = "0 N/m"', 0, "line.weight", '"0 N/m" is zero',
                    "a force per length above 0", 'weight = "11.9 N/m"'),
    "below absolute zero": ('temperature = "60 degC"', 'temperature = "-300 degC"', 0, "condition.hot.temperature",
                            "too small", "above -273.15", 'temperature = "-5 degC"'),
    "two supports at one station": ('station = "150 m"', 'station = "0 m"', 0, "support.Middle.station",
                                    'two supports at one station, 0 m: "West mast"', "stations that increase", ""),
    "supports out of order": ('station = "150 m"', 'station = "350 m"', 7, 'support."East mast".station',
                              "out of order: 300 m lies before 350 m", "stations that increase", ""),
    "condition that does not exist": ('["hot", "ice and wind"]', '["hott"]', 0, "limit.channel.conditions[0]",
                                      'no condition "hott"; did you mean "hot"?', "", ""),
    "crossing that does not exist": ('over = "channel"', 'over = "chanel"', 0, "limit.channel.over",
                                     'no crossing "chanel"; did you mean "channel"?', "", ""),
    "span that does not exist": ("share = 0.5", 'share = 0.5\nspans = ["Midle"]', 1, "limit.strength.spans[0]",
                                 'did you mean "Middle"?', "", ""),
    "span that starts at the end": ("share = 0.5", 'share = 0.5\nspans = ["East mast"]', 1, "limit.strength.spans[0]",
                                    "no span starts at the last support", "where the span starts", ""),
    "kind that does not exist": ('kind = "tension"', 'kind = "tensile"', 0, "limit.strength.kind", "no kind of limit",
                                 "one of clearance, tension", 'kind = "clearance"'),
    "key of another kind": ("share = 0.5", 'share = 0.5\nover = "channel"', 1, "limit.strength.over",
                            "no key of this kind of limit", "", ""),
    "share and most": ("share = 0.5", 'share = 0.5\nmost = "60 kN"', 1, "limit.strength.most",
                       "share and most are given at once", "exactly one", ""),
    "share in percent": ("share = 0.5", "share = 50", 0, "limit.strength.share", "50 is too large", "at most 1",
                         'share = "50 %"'),
    "negative least": ('least = "6.5 m"', 'least = "-1 m"', 0, "limit.channel.least", "is negative", "0 or more",
                       'least = "6.5 m"'),
    "ground too short": ('["300 m", "5 m"]', '["299 m", "5 m"]', 0, "ground.points", "does not cover the route",
                         "from the first support to the last", ""),
    "ground not increasing": ('["300 m", "5 m"]', '["200 m", "1 m"], ["200 m", "5 m"]', 0, "ground.points[2]",
                              "does not lie beyond", "stations that increase", ""),
    "ground point": ('["300 m", "5 m"]', '["300 m"], ["400 m", "1 m"]', 0, "ground.points[1]", "is no point",
                     "[station, elevation]", '["0 m", "3 m"]'),
    "profile missing": ('points = [["0 m", "3 m"], ["300 m", "5 m"]]', 'profile = "none.csv"', 0, "ground.profile",
                        'no file "none.csv"', "a CSV file", 'profile = "ground.csv"'),
    "profile outside": ('points = [["0 m", "3 m"], ["300 m", "5 m"]]', 'profile = "../x.csv"', 0, "ground.profile",
                        "outside the project's folder", "a file in the project's folder", 'profile = "ground.csv"'),
    "two stringing values": ('horizontal_tension = "20 kN"', 'horizontal_tension = "20 kN"\nnatural_length = "301 m"',
                             1, "stringing.natural_length", "horizontal_tension and natural_length are given at once",
                             "exactly one", ""),
    "lengths of other spans": ('horizontal_tension = "20 kN"', 'natural_length = ["301 m"]', 0,
                               "stringing.natural_length", "1 natural lengths for 2 spans", "one for each span", ""),
    "length of no size": ('horizontal_tension = "20 kN"', 'natural_length = ["150 m", "-1 m"]', 0,
                          "stringing.natural_length", '[1]: "-1 m" is negative', "a length above 0",
                          'natural_length = ["101.2 m", "98.6 m"]'),
    "sag over two spans": ('horizontal_tension = "20 kN"',
                           'sag = { from = "West mast", to = "East mast", value = "3 m" }', 0, "stringing.sag.to",
                           'no span runs from "West mast" to "East mast"', "the support that follows from", ""),
    "tension nowhere": ('horizontal_tension = "20 kN"', 'tension = { support = "North", value = "3 kN" }', 0,
                        "stringing.tension.support", 'no support "North"', "", ""),
    "weight and mass": ('weight = "11.9 N/m"', 'weight = "11.9 N/m"\nmass = "1.2 kg/m"', 1, "line.mass",
                        "weight and mass are given at once", "exactly one", ""),
    "no weight": ('weight = "11.9 N/m"\n', "", -3, "line", "weight or mass is missing", "exactly one",
                  'weight = "11.9 N/m"'),
    "modulus without area": ('area = "150 mm^2"\n', "", -2, "line", "modulus is given without area", "both",
                             'area = "150 mm^2"'),
    "no diameter": ('diameter = "16 mm"\n', "", -1, "line", 'diameter is missing, on which the ice or wind of "ice',
                    "outside diameter", 'diameter = "16 mm"'),
    "no expansion": ('expansion = "11.5e-6 / K"\n', "", -5, "line", 'expansion is missing, and "hot"', "thermal strain",
                     'expansion = "11.5e-6 / K"'),
    "share of no strength": ('breaking_strength = "190 kN"\n', "", None, "limit.strength.share",
                             "a share of the breaking strength", "breaking_strength in [line]", ""),
    "unknown hold": ('hold = "anchor"', 'hold = "ancor"', 0, 'support."West mast".hold', 'did you mean "anchor"?',
                     "anchor, hanger, sheave or post", 'hold = "anchor"'),
    "key of another hold": ('hold = "anchor"', 'hold = "anchor"\nlength = "2 m"', 1, 'support."West mast".length',
                            "an anchor has no length; the length of its link belongs to a hanger or a sheave", "", ""),
    "hanger at the end": ('hold = "anchor"', 'hold = "hanger"\nlength = "2 m"', 0, 'support."West mast".hold',
                          "the first support is a hanger", "an anchor or a post", 'hold = "anchor"'),
    "hanger without length": ('length = "1.8 m"\n', "", None, "support.Middle.length", "missing",
                              "the length of the hanger", 'length = "1.8 m"'),
    "elevation and height": ('height = "18 m"', 'height = "18 m"\nelevation = "20 m"', 0, "support.Middle.height",
                             "elevation and height are given at once", "exactly one", ""),
    "same name": ('name = "Middle"', 'name = "West mast"', 0, 'support."West mast".name', 'another support "West mast"',
                  "a name of its own", ""),
    "name of control characters": ('name = "Middle"', 'name = "M\\u001b[31m"', 0, "name", "cannot be printed", "a name",
                                   'name = "West mast"'),
    "crossing backwards": ('to = "180 m"', 'to = "110 m"', 0, "crossing.channel.to", "does not lie beyond from",
                           "a station beyond from", ""),
    "crossing named ground": ('name = "channel"', 'name = "ground"', 0, "crossing.ground.name",
                              'a crossing cannot be named "ground"', "", ""),
    "crossing off the route": ('from = "120 m"\nto = "180 m"', 'from = "420 m"\nto = "480 m"', -2, "crossing.channel",
                               "the crossing lies off the route", "", ""),
    "air density with pressure": ("drag = 1.0", 'air_density = "1.2 kg/m^3"', 0,
                                  'condition."ice and wind".wind.air_density', "needs no air density", "", ""),
    "force on a stretch": ('at = "75 m" } ]', 'at = "75 m", to = "80 m" } ]', 0,
                           'condition."ice and wind".load[0].to', "a force stands at one place", "at or at_length", ""),
    "stretch backwards": ('{ force = "2 kN", at = "75 m" }', '{ per_length = "2 N/m", from = "75 m", to = "5 m" }', 0,
                          'condition."ice and wind".load[0].to', "beyond the beginning", "a place beyond", ""),
    "too many loads": ('load = [ {', "load = [ " + '{ force = "1 N", at = "3 m" }, ' * 2000 + "{", 0,
                       'condition."ice and wind".load', "2001 loads; at most 2000", "", ""),
    "text too long": ('title = "Inlet"', 'title = "' + "x" * 100 + '"', 0, "title", "at most 80", "a title", "title ="),
    "text with a space": ('name = "Middle"', 'name = " Middle"', 0, "support", "begins or ends with a space", "", ""),
    "empty text": ('title = "Inlet"', 'title = ""', 0, "title", "an empty text", "a title", "title ="),
    "number for a word": ('hold = "anchor"', "hold = 1", 0, 'support."West mast".hold', "the number 1 where a word",
                          "anchor, hanger, sheave or post", 'hold = "anchor"'),
    "pressure and speed": ('pressure = "400 Pa",', 'pressure = "400 Pa", speed = "3 m/s",', 0,
                           'condition."ice and wind".wind.speed', "pressure and speed are given at once", "", ""),
    "load off the line": ('at = "75 m" } ]', 'at = "375 m" } ]', 0, 'condition."ice and wind".load[0].at',
                          "375 m is not on the line", "between the first and the last support", ""),
    "load of two places": ('at = "75 m" } ]', 'at = "75 m", at_length = "3 m" } ]', 0,
                           'condition."ice and wind".load[0].at_length', "at and at_length are given at once", "", ""),
    "half a stretch": ('{ force = "2 kN", at = "75 m" }', '{ per_length = "2 kN/m", from = "75 m" }', 0,
                       'condition."ice and wind".load[0].from', "from is no stretch of the line", "from and to", ""),
    "negative load": ('force = "2 kN"', 'force = "-2 kN"', 0, 'condition."ice and wind".load[0].force',
                      "a negative load", "where it points", 'direction = "up"'),
    "no direction": ('force = "2 kN",', 'force = "2 kN", direction = [0, 0, 0],', 0,
                     'condition."ice and wind".load[0].direction', "points nowhere", "a vector [x, y, z]", ""),
    "true for a number": ("drag = 1.0", "drag = true", 0, 'condition."ice and wind".wind.drag', "a true/false value",
                          "a ratio", "drag = 1.0"),
    "list for a table": ('ice = { thickness = "15 mm", density = "900 kg/m^3" }', 'ice = ["15 mm"]', 0,
                         'condition."ice and wind".ice', "a list where a table is needed", "a table",
                         "ice = { thickness"),
    "text for a list": ('["hot", "ice and wind"]', '"hot"', 0, "limit.channel.conditions",
                        'the text "hot" where a list is needed', "a list", ""),
    "table for a text": ('title = "Inlet"', "title = { a = 1 }", 0, "title", "a table where a title is needed",
                         "a title", 'title = "Inlet crossing"'),
    "size": ('diameter = "16 mm"', 'size = "x"\ndiameter = "16 mm"', 0, "line.size", 'no size "x"', "", ""),
    "arrange": ("[[mark]]", "[arrange]\npolish = false\n[[mark]]", 0, "arrange", "not available in this", "", ""),
}  # fmt: skip


@pytest.mark.parametrize("case", CASES)
def test_one_fault(tmp_path, case):
    old, new, further, path, problem, expected, example = CASES[case]
    text, number = changed(old, new)
    file, error = refused(tmp_path, text)
    found = [fault for fault in error.faults if problem in fault.problem]
    assert len(found) == 1, str(error)
    fault = found[0]
    assert fault.file == str(file)
    assert path in fault.path
    assert expected in fault.expected
    assert example in fault.example
    if further is not None:
        assert fault.line == number + further
    assert str(fault).startswith(f"{file}:{fault.line}: {fault.path}: ")


def test_the_form_of_a_message(tmp_path):
    text, number = changed('weight = "11.9 N/m"', "weight = 11.9")
    file, error = refused(tmp_path, text)
    assert str(error) == (
        f"{file}:{number}: line.weight: a number without a unit; "
        'expected a force per length above 0, for example weight = "11.9 N/m"'
    )


def test_every_fault_of_a_file_comes_in_one_run(tmp_path):
    text = GOOD
    for old, new in [
        ('title = "Inlet"', 'titel = "Inlet"'),
        ('diameter = "16 mm"', "diameter = 16"),
        ('modulus = "150 GPa"', 'modulus = "150 mm"'),
        ('["300 m", "5 m"]', '["200 m", "5 m"]'),
        ('top = "4.5 m"', "top = true"),
        ('station = "150 m"', 'station = "0 m"'),
        ('length = "1.8 m"', 'length = "-1.8 m"'),
        ('horizontal_tension = "20 kN"', 'horizontal_tension = "20 kN"\nnatural_length = "301 m"'),
        ('temperature = "60 degC"', 'temperature = "60"'),
        ("drag = 1.0", "drag = nan"),
        ('at = "75 m" } ]', 'at = "375 m" } ]'),
        ('at = "75 m"\n', 'at = "-1 m"\n'),
        ('over = "channel"', 'over = "chanel"'),
        ('least = "6.5 m"', 'least = "6.5 N"'),
        ('["hot", "ice and wind"]', '["hott"]'),
        ("share = 0.5", "share = 50"),
    ]:
        assert old in text
        text = text.replace(old, new, 1)
    _, error = refused(tmp_path, text)
    lines = [fault.line for fault in error.faults]
    assert lines == sorted(lines)
    paths = [fault.path for fault in error.faults]
    assert paths == [
        "titel", "line.diameter", "line.modulus", "ground.points", "crossing.channel.top", "support.Middle.station",
        "support.Middle.length", "stringing.natural_length", "condition.hot.temperature",
        'condition."ice and wind".wind.drag', "mark.ball.at", "limit.channel.over", "limit.channel.least",
        "limit.channel.conditions[0]", "limit.strength.share",
    ]  # fmt: skip


def test_a_profile_with_a_lone_quote_names_its_own_line(tmp_path):
    text, _ = changed('points = [["0 m", "3 m"], ["300 m", "5 m"]]', 'profile = "ground.csv"')
    rows = 'station_m,elevation_m\n0,3\n100,"4\n200,5\n300,"5\n'
    _, error = refused(tmp_path, text, ground=rows)
    places = [(fault.file, fault.line) for fault in error.faults]
    assert places == [(str(tmp_path / "ground.csv"), 3), (str(tmp_path / "ground.csv"), 5)]
    assert "a quote that is not closed" in str(error)


def test_faults_of_profile_and_file_come_together(tmp_path):
    text, _ = changed('points = [["0 m", "3 m"], ["300 m", "5 m"]]', 'profile = "ground.csv"')
    _, error = refused(tmp_path, text.replace("share = 0.5", "share = 5"), ground="station_m,elevation_m\n0,3\n0,4\n")
    assert {fault.file for fault in error.faults} == {str(tmp_path / "x.taut.toml"), str(tmp_path / "ground.csv")}


def test_missing_tables(tmp_path):
    _, error = refused(tmp_path, 'format = "tautwise 1"\n')
    text = str(error)
    for part in ("[line] is missing", "[stringing] is missing", "no support", "no condition"):
        assert part in text


def test_missing_format(tmp_path):
    file, error = refused(tmp_path, GOOD.replace('format = "tautwise 1"\n', ""))
    assert str(error) == (
        f'{file}:1: format: missing; expected the format of the file, for example format = "tautwise 1"'
    )


@pytest.mark.parametrize(
    "text",
    ["support = 3", 'support = "x"', "support = [3]", "[support]\nname = 1", "line = []", "[[line]]", "ground = 1",
     "condition = [[]]", "limit = [{}]", "limit = [1]", "limit = [{ kind = [] }]", "limit = [{ kind = {} }]",
     "[[support.capacity]]", "stringing = true", "mark = {}", "[[condition]]\nload = 3", "[[condition]]\nload = [[]]",
     "[[condition]]\nwind = []", "[[condition]]\nname = 1979-05-27", "[line]\nweight = 1979-05-27T07:32:00Z",
     "[[limit]]\nid = 3\nkind = 'sag'\nspans = [3, []]", "[[support]]\nname = ['a']\n[[support]]\nname = {}",
     "[stringing]\nsag = { from = 3, to = [] }\ntension = 3", "[[limit]]\nkind='clearance'\nover = 3",
     "[ground]\npoints = 3", "[ground]\npoints = [[], 3, {}]", "[ground]\nprofile = ''", "[ground]"],
)  # fmt: skip
def test_values_of_the_wrong_shape_are_faults_and_nothing_else(tmp_path, text):
    _, error = refused(tmp_path, 'format = "tautwise 1"\n' + text + "\n")
    assert all(isinstance(fault, Fault) and fault.problem for fault in error.faults)


def test_a_clearance_over_no_ground(tmp_path):
    text = GOOD.replace('[ground]\npoints = [["0 m", "3 m"], ["300 m", "5 m"]]\n', "").replace('over = "channel"\n', "")
    _, error = refused(tmp_path, text)
    problems = " ".join(fault.problem for fault in error.faults)
    assert "a height needs a ground profile" in problems
    assert "a clearance over the ground, and no ground profile" in problems


@pytest.mark.parametrize(
    ("limit", "problem"),
    [
        ('kind = "support_load"\nshare = 0.5', "a share of capacity needs the direction"),
        ('kind = "support_load"\ndirection = "down"\nshare = 0.5', "no support gives its capacity down"),
        ('kind = "support_load"\ndirection = "up"\nshare = 0.5\nsupports = ["Middle"]', "gives no capacity up"),
        ('kind = "support_load"', "share or most is missing"),
        ('kind = "swing"\nmost = "30 deg"\nsupports = ["West mast"]', "is no hanger"),
        ('kind = "swing"\nmost = "120 deg"', "is too large"),
        ('kind = "swing"\nmost = "30"', "a number without a unit"),
        ('kind = "sag"', "neither most nor least"),
        ('kind = "sag"\nmost = "3 m"\nleast = "4 m"', "is above most"),
        ('kind = "slope"\nmost = -0.1', "is no slope"),
        ('kind = "slope"\nmost = "95 deg"', "is no slope"),
        ('kind = "slope"\nmost = "5 m"', "is a length"),
        ('kind = "uplift"\nleast = "-1 N"', "is negative"),
        ('kind = "catenary_constant"\nmost = "0 m"', "is zero"),
        ('kind = "clearance"\nleast = "1 m"\nfrom = "400 m"', "off the route"),
        ('kind = "clearance"\nleast = "1 m"\nfrom = "40 m"\nto = "30 m"', "does not lie beyond from"),
        ('kind = "tension"\nshare = 0.5\nconditions = []', "an empty list"),
    ],
)
def test_limits_that_cannot_be_judged(tmp_path, limit, problem):
    _, error = refused(tmp_path, f'{GOOD}\n[[limit]]\nid = "extra"\n{limit}\n')
    (fault,) = error.faults
    assert problem in fault.problem
    assert fault.path.startswith("limit.extra")


def test_too_many_tables_are_refused_in_time(tmp_path):
    started = time.perf_counter()
    _, error = refused(tmp_path, GOOD + '[[mark]]\nname = "x"\n' * 30_000)
    assert "30001 tables; at most 2000 are read" in str(error)
    assert time.perf_counter() - started < 5.0


def test_keyword_arguments_give_the_same_faults_without_a_line():
    with pytest.raises(InputError) as caught:
        Project(line={"wieght": "3 N/m"}, support=[], conditions=[])
    text = str(caught.value)
    assert 'line.wieght: unknown key; did you mean "weight"?' in text
    assert 'conditions: unknown key; did you mean "condition"?' in text
    assert {fault.file for fault in caught.value.faults} == {None}


def test_an_input_error_is_a_value_error_and_pickles():
    import pickle

    error = InputError([Fault("a", 2, "b", "c"), Fault("a", 1, "b", "c", "d", "e")])
    assert isinstance(error, ValueError)
    assert isinstance(error, TautwiseError)
    assert pickle.loads(pickle.dumps(error)).faults == error.faults
    assert str(error).splitlines() == ["a:1: b: c; expected d, for example e", "a:2: b: c"]
    assert pickle.loads(pickle.dumps(NotSettledError("x", "slack"))).status == "slack"
    assert issubclass(SearchCancelled, KeyboardInterrupt)


LINES = GOOD.splitlines()
VALUES = ["3", '"x"', "[]", "{}", "true", "nan", '""', '"3 m"', "[[[1]]]", "1e999"]


@settings(max_examples=150)
@given(st.data())
def test_no_damaged_file_breaks_the_reader(tmp_path_factory, data):
    lines = list(LINES)
    for _ in range(data.draw(st.integers(1, 4))):
        number = data.draw(st.integers(0, len(lines) - 1))
        action = data.draw(st.sampled_from(["drop", "double", "swap", "value", "cut"]))
        if action == "drop" and len(lines) > 1:
            del lines[number]
        elif action == "double":
            lines.insert(number, lines[number])
        elif action == "swap":
            lines[number], lines[0] = lines[0], lines[number]
        elif action == "value":
            value = data.draw(st.sampled_from(VALUES))
            lines[number] = lines[number].split("=")[0] + "= " + value
        else:
            lines[number] = lines[number][: len(lines[number]) // 2]
    file = tmp_path_factory.mktemp("damaged") / "x.toml"
    file.write_text("\n".join(lines))
    try:
        load(file)
    except InputError as error:
        assert all(fault.problem and fault.line is not None for fault in error.faults)


# --- a slip is told once


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ("breaking_strength", "breaking_strenght", 'unknown key; did you mean "breaking_strength"?'),
        ("expansion", "expantion", 'unknown key; did you mean "expansion"?'),
        ("diameter", "diametre", 'unknown key; did you mean "diameter"?'),
        ("area =", "aera =", 'unknown key; did you mean "area"?'),
        ("weight", "wieght", 'unknown key; did you mean "weight"?'),
        ('name = "West mast"', 'nam = "West mast"', 'unknown key; did you mean "name"?'),
        ('station = "150 m"', 'staton = "150 m"', 'unknown key; did you mean "station"?'),
        ('length = "1.8 m"', 'lenght = "1.8 m"', 'unknown key; did you mean "length"?'),
        ('top = "4.5 m"', 'tpo = "4.5 m"', 'unknown key; did you mean "top"?'),
        ("[[crossing]]", "[[crosing]]", 'unknown key; did you mean "crossing"?'),
        ("[line]", "[lin]", 'unknown key; did you mean "line"?'),
        ("pressure =", "presure =", 'unknown key; did you mean "pressure"?'),
        ('at = "75 m" } ]', 'att = "75 m" } ]', 'unknown key; did you mean "at"?'),
        ('kind = "clearance"', 'kin = "clearance"', 'unknown key; did you mean "kind"?'),
        ("points =", "point =", 'unknown key; did you mean "points"?'),
    ],
)
def test_a_misspelt_key_has_no_follow_ups(tmp_path, old, new, words):
    text, number = changed(old, new)
    (fault,) = refused(tmp_path, text)[1].faults
    assert (fault.problem, fault.line) == (words, number)


def test_values_under_a_misspelt_table_are_checked_with_their_lines(tmp_path):
    text, number = changed("[[crossing]]", "[[crosing]]")
    first, second = refused(tmp_path, text.replace('top = "4.5 m"', 'top = "4.5"'))[1].faults
    assert (first.problem, first.line) == ('unknown key; did you mean "crossing"?', number)
    assert (second.problem, second.line) == ("a number without a unit", number + 4)


def test_a_misspelt_key_beside_the_right_one_hides_nothing(tmp_path):
    text, _ = changed('weight = "11.9 N/m"', 'weight = "11.9"\nwieght = "11.9 N/m"')
    assert [fault.problem for fault in refused(tmp_path, text)[1].faults] == [
        "a number without a unit",
        'unknown key; did you mean "weight"?',
    ]


def test_a_name_that_stands_twice_says_where_the_other_is(tmp_path):
    first = changed('name = "hot"', "")[1]
    text, _ = changed('name = "ice and wind"', 'name = "hot"')
    file, error = refused(tmp_path, text.replace(', "ice and wind"]', "]"))
    (fault,) = error.faults
    assert fault.problem == f'there is another condition "hot", at {file}:{first}'


# --- texts from files are inert

RED = "\N{ESCAPE}[31m"


def test_faults_print_no_control_characters():
    text = str(Fault(f"{RED}.toml", 3, f"line.{RED}", f"x{RED}", f"y{RED}", f"z\x9b{RED}\u202e"))
    assert text.isprintable()
    assert "\\x1b[31m.toml:3: " in text


@pytest.mark.parametrize(
    "slip",
    [
        ('name = "West mast"', 'name = "\\u001b[31mWest"'),
        ('name = "West mast"', 'name = "\\u202eWest"'),
        ('"24 m"', '"\\u001b[31m24 m"'),
        ('"24 m"', '"24 \\u009b31m"'),
        ("hold =", '"\\u001b[31m" = 3\nhold ='),
        ('over = "channel"', 'over = "\\u001b[31mchannel"'),
        ('title = "Inlet"', 'title = "\\u0007"'),
        ("[ground]", 'include = "\\u001b[31m.toml"\n[ground]'),
        ("[[mark]]", '["\\u001b[31m"]\nx = 1\n[[mark]]'),
        ('kind = "clearance"', 'kind = "\\u001b[31m"'),
    ],
)
def test_nothing_from_a_file_reaches_the_terminal_raw(tmp_path, slip):
    faults = refused(tmp_path, changed(*slip)[0])[1].faults
    assert faults
    assert all(str(fault).isprintable() for fault in faults)


# --- words that an engineer can act on


@pytest.mark.parametrize(
    ("old", "new", "problems"),
    [
        ('hold = "post"\nstiffness_along = "250 kN/m"', 'hold = "hanger"', ["the last support is a hanger"]),
        ('title = "Inlet"', 'title = "Inlet', ["a text in quotes that does not end on its line"]),
    ],
)
def test_one_slip_is_one_message(tmp_path, old, new, problems):
    faults = refused(tmp_path, changed(old, new)[0])[1].faults
    found = [fault.problem for fault in faults]
    assert len(found) == len(problems), found
    assert all(words in problem for words, problem in zip(problems, found, strict=True))


def test_a_line_far_too_short_says_how_far_it_would_stretch(tmp_path):
    file = tmp_path / "x.taut.toml"
    file.write_text(changed('horizontal_tension = "20 kN"', 'natural_length = "200 m"')[0])
    with pytest.raises(InputError, match=r"stringing\.natural_length: .*stretch by 50 %.*hold to hold.*150\.\d+ m"):
        load(file).settle("hot")


def test_a_missing_capacity_says_what_to_add(tmp_path):
    limit = 'kind = "support_load"\nsupports = ["Middle"]\ndirection = "down"\nshare = 0.5\n#'
    (fault,) = refused(tmp_path, changed('kind = "clearance"\nover = "channel"\nleast', limit)[0])[1].faults
    assert 'capacity = { down = "30 kN" }' in fault.example
