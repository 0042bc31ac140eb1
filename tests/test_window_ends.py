"""Ends of a window that no limit sets: open-ended, or where the line cannot be settled beyond."""

import dataclasses

import pytest

import tautwise as tw
from tautwise.figure_window import plot_window
from tautwise.text import Ink
from tautwise.text_limits import window_text

pytest.importorskip("matplotlib").use("Agg")

ROPE = {"diameter": "20 mm", "weight": "15.97 N/m", "stiffness": "34.7 MN", "expansion": "18.9e-6 / K",
        "breaking_strength": "90 kN"}  # fmt: skip


def support(name, station, elevation="20 m", **keys):
    return {"name": name, "station": station, "elevation": elevation, **keys}


def sheaves(**keys):
    sheave = {"hold": "sheave", "friction": 0.02}
    supports = [
        support("A", "0 m"),
        support("B", "250 m", **sheave),
        support("C", "650 m", "35 m", **sheave),
        support("D", "950 m"),
    ]
    return project(
        ROPE,
        supports,
        [{"name": "everyday", "temperature": "15 degC"}, {"name": "hot", "temperature": "60 degC"}],
        **keys,
    )


def project(line, supports, conditions, limits):
    tables = {"line": line, "support": supports, "condition": conditions, "limit": limits}
    return tw.Project(format="tautwise 1", title="ends", stringing={"temperature": "15 degC"}, **tables)


def ramp():
    """The anchor is drawn in by the pull, past the place of a load."""
    line = ROPE | {"weight": "10 N/m", "stiffness": "20 MN", "breaking_strength": "200 kN"}
    supports = [support("L", "0 m", "10 m", stiffness_along="200 kN/m"), support("R", "100 m", "10 m")]
    load = [
        {"per_length": "0 N/m", "per_length_to": "400 N/m", "from": "0 m", "to": "100 m"},
        {"force": "1 N", "at": "0.18 m"},
    ]
    return project(
        line,
        supports,
        [{"name": "ramp", "temperature": "15 degC", "load": load}],
        [{"id": "t", "kind": "tension", "share": 0.5}, {"id": "s", "kind": "sag", "most": "7 m"}],
    )


TENSION = {"id": "t", "kind": "tension", "share": 0.3}


@pytest.fixture(scope="module")
def slack():
    return sheaves(limits=[TENSION])


def test_an_end_beyond_which_nothing_settles_names_no_limit(slack):
    window = slack.window()
    low = window.low
    assert (low.limit, low.condition, low.utilisation) == (None, None, None)
    assert "no equilibrium" in low.reason
    assert window.high.limit == "t"
    assert window.high.utilisation == pytest.approx(1.0, abs=1e-8)
    assert window.specify is None
    assert window.least_used.horizontal_tension_N == pytest.approx(low.horizontal_tension_N, rel=1e-3)
    assert not [price for price in window.prices if price.end == "low"]


def test_text_json_and_repr_say_so(slack):
    window = slack.window()
    text = "\n".join(window_text(window, slack, Ink(False)))
    assert "none: cannot be settled beyond" in text
    assert "Specify none" in text
    assert "--pull" not in text
    document = window.to_dict()
    assert document["specify"] is None
    assert document["low"]["limit"] is None
    assert document["low"]["reason"] in document["findings"][0]
    assert all(finding in repr(window) for finding in window.findings)
    assert tw.PullWindow.from_json(window.to_json()) == window


def test_a_place_that_leaves_the_line_is_no_limit_on_tension():
    window = ramp().window()
    assert window.low.limit == "s"
    assert window.high.limit is None
    assert "off the line" in window.high.reason
    assert window.specify is not None, "it lies between two limits, clear of that end"
    assert window.low.horizontal_tension_N < window.specify.horizontal_tension_N < window.high.horizontal_tension_N


def test_a_clearance_closes_the_side_where_nothing_settles():
    window = sheaves(limits=[TENSION, {"id": "s", "kind": "sag", "most": "20 m"}]).window()
    assert window.low.limit == "s"
    assert window.findings == ()
    assert window.specify == window.least_used


def test_open_ended_windows_specify_nothing_anywhere():
    supports = [support("A", "0 m"), support("B", "300 m")]
    window = project(ROPE, supports, [{"name": "c", "temperature": "0 degC"}], [TENSION]).window()
    assert window.low.limit is None
    assert window.low.reason is None
    assert window.to_dict()["specify"] is None
    assert window.findings[0].startswith("open-ended below")
    assert "specify none" in repr(window)


def test_the_picture_shows_every_stretch_and_both_ends():
    supports = [support("A", "0 m"), support("B", "300 m")]
    window = project(ROPE, supports, [{"name": "c", "temperature": "0 degC"}], [TENSION]).window()
    low, high = window.low.horizontal_tension_N, window.high.horizontal_tension_N
    split = dataclasses.replace(window, intervals=((low, low * 1.2), (0.8 * high, high)))
    left, right = plot_window(split).get_xlim()
    assert left <= low / 1e3
    assert right >= high / 1e3
