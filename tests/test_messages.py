"""Messages that an engineer can act on: a real example, the unit of a bound, what was meant."""

from __future__ import annotations

import inspect

import numpy as np
import pytest
from test_results import CONDITIONS, LINE, STRENGTH, make

import tautwise as tw
from tautwise.errors import Fault, InputError
from tautwise.text import Ink
from tautwise.text_limits import window_text

PLAIN = Ink(False)
HOT, ICY = CONDITIONS
POINT = {"force": "2 kN", "at": "75 m"}


def message(**tables) -> str:
    with pytest.raises(InputError) as caught:
        make(**tables)
    return str(caught.value)


def strung(**rule):
    return {"stringing": {"temperature": "15 degC", **rule}}


def with_condition(**keys):
    return {"conditions": [HOT | keys]}


def with_limit(**keys):
    return {"limit": [STRENGTH | keys]}


@pytest.mark.parametrize(
    ("tables", "words"),
    [
        (with_limit(conditions=[]), 'an empty list; expected one name or more, for example conditions = ["hot"]'),
        (with_limit(spans=[]), 'for example spans = ["West mast"]'),
        (with_limit(conditions="hot"), 'expected a list, for example conditions = ["hot"]'),
        (with_limit(conditions=["hot", "hot"]), 'limit.strength.conditions[1]: "hot" stands here twice'),
        (with_condition(ice=[1]), 'a table, for example ice = { thickness = "15 mm", density = "900 kg/m^3" }'),
        (with_condition(wind="x"), 'expected a table, for example wind = { pressure = "400 Pa" }'),
        (with_condition(load=POINT), 'expected a list, for example load = [ { force = "2 kN", at = "75 m" } ]'),
        (with_condition(load=[3]), 'expected a table, for example { force = "2 kN", at = "75 m" }'),
        (strung(tension="9 kN"), 'stringing.tension: the text "9 kN" where a table is needed; did you mean '
         '"horizontal_tension"? expected a table, for example tension = { support = "West", value = "9 kN" }'),
        (strung(sag="3 m"), 'for example sag = { from = "West mast", to = "East mast", value = "6.7 m" }'),
        ({"conditions": [{"temperature": "60 degC"}]}, 'missing; expected a name, for example name = "hot"'),
        ({"crossing": [{"from": "1 m", "to": "2 m", "top": "1 m"}]}, 'expected a name, for example name = "channel"'),
        (with_condition(temperature="60"), "expected a temperature above -273.15 degC, for"),
        (with_limit(share=50), "a ratio above 0 and at most 1, for"),
        ({"line": LINE | {"diameter": "-1 mm"}}, "expected a length above 0, for"),
        ({"support": [{"name": "A", "station": "0 m", "height": "1 m", "hold": "ancor"}] * 2},
         'did you mean "anchor"? expected anchor, hanger, sheave or post'),
        ({"line": {3: 4}}, "line: the key 3 is no text"),
        ({"limit": [{3: 4}]}, "limit[0].kind: missing"),
        ({"line": LINE | {3: 4}}, "line: the key 3 is no text"),
        ({"rules": [{"pack": "nesc-261h", 1: 2}]}, "rules[0]: the key 1 is no text"),
        ({"rules": [{"pack": "nesc-261h", None: 2, (1, 2): 3}]}, "rules[0]: the key (1, 2) is no text"),
    ],
)  # fmt: skip
def test_messages_say_what_to_write(tables, words):
    text = message(**tables)
    assert words in text
    assert "..." not in text
    assert "?;" not in text


def test_a_question_ends_its_sentence():
    assert str(Fault(None, None, "a", "did you mean b?", "c", "d")) == "a: did you mean b? expected c, for example d"


@pytest.mark.parametrize(
    "call",
    [
        lambda project: project.settle(3),
        lambda project: project.settle(["hot"]),
        lambda project: project.settle("hot", pull=b"x"),
        lambda project: project.settle("hot", pull=True),
        lambda project: project.vet(pull=[1.0]),
        lambda project: project.vet(pull=10**400),
        lambda project: project.vet(pull=float("nan")),
    ],
)
def test_arguments_of_the_wrong_kind_are_bad_input(call):
    with pytest.raises(InputError):
        call(make())


def test_pulls_of_numpy_are_pulls():
    project = make()
    assert project.vet(pull=np.float32(20000.0)).files[0].pull_N == project.vet(pull="20 kN").files[0].pull_N


def test_a_line_far_too_long_says_so():
    with pytest.raises(InputError, match=r"natural_length: the line is too long: 1000000\.000 m for .*300\.002 m"):
        make(**strung(natural_length="1e6 m")).settle_all()


def test_a_line_that_hangs_deeper_than_a_quarter_of_its_span_is_pointed_out():
    loose, taut = (solve_warnings(length) for length in ("360 m", "302 m"))
    assert [text for text in loose if "m deep over 300 m in 'hot'; is the line this long?" in text]
    assert not taut


def solve_warnings(length):
    from tautwise.solve import settle_report

    return settle_report(make(**strung(natural_length=length))).warnings


# --- plausibility


def ring(mm, **line):
    return {"conditions": [ICY | {"ice": {"thickness": f"{mm} mm", "density": "900 kg/m^3"}}], "line": LINE | line}


@pytest.mark.parametrize(
    ("tables", "key", "words"),
    [
        (ring(50), "ice.thickness", "50 mm of ice all round: it is the radial thickness"),
        (ring(61, diameter="60 mm", weight="150 N/m"), "ice.thickness", "61 mm of ice all round"),
        (ring(47.9), "", ""),
        ({"conditions": [HOT | {"temperature": "125 degF"}]}, "", ""),
        ({"conditions": [HOT | {"temperature": "121 degC"}]}, "condition.hot.temperature", "121 degC: degF for degC?"),
        (with_limit(share=None, most="76 N"), "limit.strength.most", "76 N: kN for N?"),
        (with_limit(share=None, most="760 kN"), "limit.strength.most", "above the breaking strength, 190 kN"),
        (with_limit(share=None, most="76 kN"), "", ""),
        (with_limit(kind="support_load", share=None, most="76 N"), "limit.strength.most", "76 N: kN for N?"),
        ({"support": [{"name": "West", "station": "0 m", "height": "18 m", "capacity": {"along": "90 N"}},
                      {"name": "East", "station": "300 m", "height": "16 m"}]},
         "support.West.capacity.along", "90 N: kN for N?"),
        ({"crossing": [{"name": "road", "from": "280 m", "to": "320 m", "top": "1 m"}]}, "crossing.road.to",
         "lies partly off the route, which runs from 0 m to 300 m"),
        ({"crossing": [{"name": "road", "from": "-20 m", "to": "20 m", "top": "1 m"}]}, "crossing.road.from",
         "lies partly off the route"),
        (strung(horizontal_tension="1.23456789 N"), "horizontal_tension", "a pull of 1.235 N: kN for N?"),
    ],
)  # fmt: skip
def test_values_that_are_hardly_meant(tables, key, words):
    warnings = make(**tables).warnings
    if not key:
        assert warnings == ()
        return
    (warning,) = warnings
    assert key in warning
    assert words in warning


# --- a window that is shut by one limit


def test_a_limit_that_no_pull_keeps_has_its_own_heading():
    project = make(least="40 m")
    text = "\n".join(window_text(project.window(), project, PLAIN))
    assert "No pull keeps this limit" in text
    assert "exclude one another" not in text
    project = make(least="14 m", share=0.15)
    text = "\n".join(window_text(project.window(), project, PLAIN))
    assert "These exclude one another" in text


# --- Python


def test_the_signature_names_the_keys():
    names = list(inspect.signature(tw.Project).parameters)
    assert names == [
        "title", "line", "ground", "crossing", "support", "stringing", "history", "condition", "mark", "limit",
        "waiver", "rules",
    ]  # fmt: skip


def test_arrays_of_spans_are_frozen():
    states = tw.settle_spans([300.0, 310.0], 0.0, [300.8, 310.8], 34.7e6, 15.97)
    with pytest.raises(ValueError, match="read-only"):
        states.sag[0] = 1.0


def test_masked_arrays_are_refused():
    masked = np.ma.masked_array([300.0, 310.0], [False, True])
    with pytest.raises(InputError, match="rise: a masked array"):
        tw.settle_spans(300.0, masked, 300.8, 34.7e6, 15.97)
    with pytest.raises(InputError, match="span: a masked array"):
        tw.natural_length(masked, 0.0, 17e3, 34.7e6, 15.97)


def test_parts_of_results_are_short():
    project = make()
    line = project.settle("hot")
    best = project.window().specify
    assert repr(line.spans[0]).startswith("SpanState 'West to East': 300.0 m, sag ")
    for part in (line.spans[0], line.supports[0], best, best.edges[0], project.window().low):
        assert len(repr(part)) < 120
        assert type(part).__name__ in repr(part)
