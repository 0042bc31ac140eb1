"""Pictures: that they draw, say what they exaggerate, and show what the numbers say."""

from __future__ import annotations

import io
import sys

import numpy as np
import pytest
from test_results import make

import tautwise as tw

pytest.importorskip("matplotlib")

import matplotlib.pyplot as plt

from tautwise.figure import plot_line, tightest_of
from tautwise.figure_window import stretches_of

CROSSING = [{"name": "channel", "from": "120 m", "to": "180 m", "top": "3 m"}]


@pytest.fixture(scope="module")
def project():
    over = {"id": "over", "kind": "clearance", "over": "channel", "least": "8 m"}
    ground = {"id": "ground", "kind": "clearance", "least": "5 m"}
    return make(crossing=CROSSING, limit=[over, ground, {"id": "strength", "kind": "tension", "share": 0.5}])


@pytest.fixture(autouse=True)
def closed():
    yield
    plt.close("all")


def drawn(ax) -> bytes:
    stream = io.BytesIO()
    ax.figure.savefig(stream, format="png")
    return stream.getvalue()


def texts(ax) -> str:
    words = [text.get_text() for text in ax.texts]
    return "\n".join([*words, ax.get_xlabel(), ax.get_ylabel(), ax.get_title(loc="left")])


@pytest.mark.parametrize("make_axes", [lambda: None, lambda: plt.subplots(figsize=(5, 7))[1]])
def test_line_states_the_exaggeration_it_draws(project, make_axes):
    ax = plot_line(project.settle_all(), make_axes())
    assert drawn(ax)[:4] == b"\x89PNG"
    corner, right, up = ax.transData.transform([(0, 0), (1, 0), (0, 1)])
    ratio = (up - corner)[1] / (right - corner)[0]
    said = ax.get_ylabel()
    stated = 1.0 if "true to scale" in said else float(said.split("drawn ")[1].split(" ")[0])
    assert ratio == pytest.approx(stated, rel=1e-6)
    assert "station, m" in ax.get_xlabel()


def test_line_shows_everything_that_matters(project):
    ax = plot_line(project.settle_all(), chord=True)
    shown = texts(ax)
    labels = ax.get_legend_handles_labels()[1]
    assert {"hot", "ice and wind", "clearance asked for"} == set(labels)
    assert len(set(labels)) == len(labels)
    for word in ("West", "East", "channel", "Tightest clearance", "8 m asked for"):
        assert word in shown
    left, right = ax.get_xlim()
    low, high = ax.get_ylim()
    assert left < 0 < 300 < right
    assert low < 0.5
    assert high > 24


def test_legend_is_on_the_page_and_survives_a_tight_crop(project):
    ax = plot_line(project.settle_all())
    drawn(ax)
    (legend,) = ax.figure.legends
    box, page = legend.get_window_extent(), ax.figure.bbox
    assert page.x0 <= box.x0 < box.x1 <= page.x1
    assert page.y0 <= box.y0 < box.y1 <= ax.xaxis.label.get_window_extent().y0
    assert legend.get_in_layout()


def test_tightest_clearance_is_that_of_the_limits(project):
    lines = project.settle_all()
    found = tightest_of(lines[0].origin.scenery(), [(line, line.shape(2000)["position_m"]) for line in lines])
    worst = min((row for row in project.vet().limits if row.kind == "clearance"), key=lambda row: row.margin)
    assert found.margin_m == pytest.approx(worst.margin, abs=1e-3)
    assert found.condition == worst.condition


def test_line_without_ground_or_limits():
    supports = [
        {"name": "A", "station": "0 m", "elevation": "20 m"},
        {"name": "B", "station": "50 m", "elevation": "21 m", "hold": "hanger", "length": "0.5 m"},
        {"name": "C", "station": "90 m", "elevation": "19 m"},
    ]
    project = make(support=supports, ground=None, limit=[], conditions=[{"name": "x", "temperature": "15 degC"}])
    assert drawn(project.settle().plot())


def test_nothing_settled_is_nothing_to_draw():
    with pytest.raises(tw.TautwiseError, match="no settled condition"):
        plot_line([])


def test_bars_end_where_limits_do(project):
    window = project.window()
    rows = stretches_of(window)
    assert list(rows) == ["over", "ground", "strength"]
    (over,), (strength,) = rows[window.low.limit], rows[window.high.limit]
    assert over.low == pytest.approx(window.low.horizontal_tension_N, rel=1e-3)
    assert over.low_by == window.low.condition
    assert strength.high == pytest.approx(window.high.horizontal_tension_N, rel=1e-3)
    assert strength.low_by is None


def test_bars_agree_with_the_verdict(project):
    (bar,) = stretches_of(project.window())["ground"]
    for pull, holds in ((0.999 * bar.low, False), (1.001 * bar.low, True)):
        row = next(row for row in project.vet(pull=pull).limits if row.id == "ground")
        assert (row.status == "holds") is holds


def test_window_read_from_json_is_drawn_by_estimate(project):
    window = project.window()
    again = type(window).from_json(window.to_json())
    assert again == window
    assert drawn(again.plot())
    for name, bars in stretches_of(again).items():
        for bar, exact in zip(bars, stretches_of(window)[name], strict=True):
            assert (bar.low, bar.high) == pytest.approx((exact.low, exact.high), rel=0.15)


def test_window_picture_says_what_to_specify(project):
    window = project.window()
    ax = window.plot()
    assert drawn(ax)
    pull = f"{window.specify.horizontal_tension_N / 1e3:.4g}"
    assert f"specify {pull} kN +/- 3 %" in texts(ax)
    assert "pull (horizontal tension, bare, at 15 degC), kN" in texts(ax)
    assert [label.get_text() for label in ax.get_yticklabels()] == ["over", "ground", "strength"]


def test_shut_window_picture_says_shut():
    ax = make(least="14 m", share=0.15).window().plot()
    assert drawn(ax)
    assert "shut" in ax.get_title(loc="left")
    assert not any("specify" in text.get_text() for text in ax.texts)


def test_words_of_the_window_picture_do_not_overlap(project):
    ax = project.window().plot()
    drawn(ax)
    boxes = [text.get_window_extent() for text in ax.texts if text.get_text()]
    for number, box in enumerate(boxes):
        assert not any(box.overlaps(other) for other in boxes[number + 1 :])


def test_missing_matplotlib_names_the_extra(project, monkeypatch):
    monkeypatch.setitem(sys.modules, "matplotlib.pyplot", None)
    with pytest.raises(tw.TautwiseError, match=r"tautwise\[figures\]"):
        project.window().plot()


def test_shape_is_dense_and_ends_at_the_supports(project):
    shape = project.settle("hot").shape(50)
    assert shape["position_m"].shape == (51, 3)
    assert np.all(np.diff(shape["length_m"]) > 0)
    assert shape["position_m"][-1] == pytest.approx((300, 0, 23))


def test_names_are_texts_and_no_formulas(project):
    supports = [
        {"name": "$\\frac$", "station": "0 m", "height": "18 m"},
        {"name": "A $_x$ 5 $", "station": "300 m", "height": "16 m"},
    ]
    named = make(support=supports, limit=[{"id": "$x^2$", "kind": "clearance", "least": "5 m"}])
    assert drawn(plot_line([named.settle("hot")]))
    assert drawn(named.window().plot())
    odd = make(conditions=[{"name": "hot $\\frac$ $", "temperature": "60 degC"}])
    ax = plot_line([odd.settle()])
    assert drawn(ax)
    labels = [text.get_text() for text in (ax.figure.legends or [ax.get_legend()])[0].get_texts()]
    assert "hot $\\frac$ $" in [label.replace("\\$", "$") for label in labels]


def test_the_picture_of_a_line_is_titled_and_red_only_where_a_clearance_fails(project):
    from matplotlib.colors import to_rgba

    from tautwise.figure_style import CLEAR

    for pull, fails in (("25 kN", False), ("5 kN", True)):
        ax = plot_line(project.settle_all(pull=pull))
        assert project.title in [text.get_text() for text in ax.texts]
        items = [*ax.texts, *ax.lines, ax.title, ax._left_title]
        colours = {to_rgba(item.get_color()) for item in items}
        assert (to_rgba(CLEAR) in colours) == fails
