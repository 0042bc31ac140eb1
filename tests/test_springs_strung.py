"""Lines between springs: every stringing rule finds the line that the pull rule hangs; loads reach to the clamps."""

import pytest

import tautwise as tw
from tautwise import solve
from tautwise.reference.project import Twin
from tautwise.reference.states import sag_of

ROPE = {"diameter": "16 mm", "weight": "11.9 N/m", "stiffness": "20 MN", "expansion": "12e-6 / K"}


def line(stringing, *, span="100 m", left="10 kN/m", right=None, **more):
    right = right or {"stiffness_along": "10 kN/m"}
    supports = [
        {"name": "A", "station": "0 m", "elevation": "10 m", "stiffness_along": left},
        {"name": "B", "station": span, "elevation": "10 m"} | right,
    ]
    tables = {"condition": [{"name": "bare", "temperature": "20 degC"}], "support": supports} | more
    return tw.Project(format="tautwise 1", line=ROPE, stringing={"temperature": "20 degC"} | stringing, **tables)


SHORT = {"span": "12 m", "left": "500 kN/m", "right": {"hold": "post", "stiffness_along": "300 kN/m",
                                                       "stiffness_across": "300 kN/m"}}  # fmt: skip


@pytest.mark.parametrize(
    ("keys", "pull"), [({}, "14 kN"), ({}, "100 kN"), ({}, "450 kN"), (SHORT, "4.5 kN"), (SHORT, "400 kN")]
)
def test_every_rule_finds_the_line_of_the_pull_rule(keys, pull):
    by_pull = line({"horizontal_tension": pull}, **keys)
    strung = solve.strung(by_pull)
    state = by_pull.settle("bare")
    rules = [
        {"sag": {"from": "A", "to": "B", "value": f"{state.spans[0].sag_m!r} m"}},
        {"tension": {"support": "A", "value": f"{state.spans[0].tension_from_N!r} N"}},
    ]
    for rule in rules:
        again = solve.strung(line(rule, **keys))
        # the bracket of the settled state is 1e-6 of energy; sag and tension come from the exact shape
        assert again.horizontal_tension_N == pytest.approx(strung.horizontal_tension_N, rel=1e-8)
        assert again.natural_length_m == pytest.approx(strung.natural_length_m, rel=1e-10)


# --- loads that reach to the clamps of supports that yield

WHOLE = {"per_length": "20 N/m"}


def loaded(load, **keys):
    return line(
        {"horizontal_tension": "14 kN"}, condition=[{"name": "snow", "temperature": "0 degC", "load": [load]}], **keys
    )


def test_a_load_from_support_to_support_covers_the_line_though_its_ends_are_drawn_in():
    whole = loaded(WHOLE).settle("snow").spans[0]
    between = loaded(WHOLE | {"from": "0 m", "to": "100 m"}).settle("snow").spans[0]
    assert between == whole  # the same pieces: the same to the last digit
    within = loaded(WHOLE | {"from": "1 m", "to": "100 m"}).settle("snow").spans[0]  # the clamp hangs at 1.4 m
    assert within == whole


def test_a_place_of_a_force_or_beyond_the_support_stays_refused():
    with pytest.raises(tw.InputError, match=r"1 m is not on the line, which runs from 1\.4"):
        loaded({"force": "1 kN", "at": "1 m"}).settle("snow")
    with pytest.raises(tw.InputError, match=r"to: 1 m is not on the line"):
        loaded(WHOLE | {"from": "0 m", "to": "1 m"}).settle("snow")


def test_the_twin_takes_drawn_in_ends_too():
    load = {"per_length": "0 N/m", "per_length_to": "40 N/m", "from": "0 m", "to": "100 m"}
    project = loaded(load, left="40 kN/m")
    spans = project.settle("snow").spans
    assert spans[0].sag_m == pytest.approx(sag_of(Twin(project.to_core()).settle(0), 0), rel=1e-9)


def test_a_ramp_over_spans():
    ramp = {"per_length": "0 N/m", "per_length_to": "40 N/m"}
    supports = [{"name": name, "station": f"{100 * k} m", "elevation": "10 m"} for k, name in enumerate("ABC")]
    by_name = loaded(ramp | {"spans": ["B"]}, support=supports).settle("snow").spans
    by_place = loaded(ramp | {"from": "100 m", "to": "200 m"}, support=supports).settle("snow").spans
    assert by_name == by_place
    both = loaded(ramp | {"before": "C"}, support=supports).settle("snow").spans
    assert both == loaded(ramp | {"from": "0 m", "to": "200 m"}, support=supports).settle("snow").spans
    four = [*supports, {"name": "D", "station": "300 m", "elevation": "10 m"}]
    with pytest.raises(tw.InputError, match="spans that do not adjoin"):
        loaded(ramp | {"spans": ["A", "C"]}, support=four)
