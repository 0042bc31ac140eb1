"""Lines between springs: every stringing rule finds the line that the pull rule hangs; loads reach to the clamps."""

import pytest

import tautwise as tw
from tautwise import solve

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
        {"tension": {"at": "A", "value": f"{state.spans[0].tension_from_N!r} N"}},
    ]
    for rule in rules:
        again = solve.strung(line(rule, **keys))
        # the bracket of the settled state is 1e-6 of energy; sag and tension come from the exact shape
        assert again.horizontal_tension_N == pytest.approx(strung.horizontal_tension_N, rel=1e-8)
        assert again.natural_length_m == pytest.approx(strung.natural_length_m, rel=1e-10)
