"""Results: what they hold, that they are frozen, and that they come back whole from JSON and pickle."""

from __future__ import annotations

import dataclasses
import json
import math
import pickle

import numpy as np
import pytest

import tautwise as tw
from tautwise import solve
from tautwise.records import Record
from tautwise.results import PullWindow, SettleReport, VetReport, WindowEnd
from tautwise.solve_limits import limit_states
from tautwise.start import start_text

LINE = {
    "diameter": "16 mm",
    "weight": "11.9 N/m",
    "stiffness": "22.5 MN",
    "expansion": "11.5e-6 / K",
    "breaking_strength": "190 kN",
}
GROUND = {"points": [["0 m", "6 m"], ["150 m", "0.5 m"], ["300 m", "7 m"]]}
CONDITIONS = [
    {"name": "hot", "temperature": "60 degC"},
    {
        "name": "ice and wind",
        "temperature": "-5 degC",
        "ice": {"thickness": "10 mm", "density": "900 kg/m^3"},
        "wind": {"pressure": "300 Pa"},
        "load": [{"force": "2 kN", "at_length": "75 m"}],
    },
]
CLEARANCE = {"id": "clearance", "kind": "clearance", "least": "6.5 m"}
STRENGTH = {"id": "strength", "kind": "tension", "share": 0.5, "clause": "invented rule 3"}


def make(*, least="6.5 m", share=0.5, stringing=None, conditions=CONDITIONS, **more) -> tw.Project:
    tables = {
        "title": "Inlet",
        "line": LINE,
        "ground": GROUND,
        "support": [
            {"name": "West", "station": "0 m", "height": "18 m"},
            {"name": "East", "station": "300 m", "height": "16 m"},
        ],
        "stringing": stringing or {"temperature": "15 degC", "horizontal_tension": "20 kN", "tolerance": "3 %"},
        "condition": conditions,
        "limit": [CLEARANCE | {"least": least}, STRENGTH | {"share": share}],
    }
    return tw.Project(**(tables | more))


@pytest.fixture(scope="module")
def project() -> tw.Project:
    return make()


@pytest.fixture(scope="module")
def window(project) -> PullWindow:
    return project.window()


@pytest.fixture(scope="module")
def shut() -> PullWindow:
    return make(least="14 m", share=0.15).window()


@pytest.fixture(scope="module", params=["equilibrium", "report", "window", "shut", "vet", "every"])
def record(request, project, window, shut) -> Record:
    made = {
        "equilibrium": lambda: project.settle("ice and wind"),
        "report": lambda: solve.settle_report(project),
        "window": lambda: window,
        "shut": lambda: shut,
        "vet": lambda: project.vet(),
        "every": lambda: solve.vet(project, every=True),
    }
    return made[request.param]()


# --- every record


def test_json_round_trip_is_exact(record):
    again = type(record).from_json(record.to_json())
    assert again == record
    assert again.to_json() == record.to_json()


def test_readable_json_holds_the_same(record):
    assert json.loads(record.to_json(indent=2)) == json.loads(record.to_json())


def test_pickle_round_trip(record):
    assert pickle.loads(pickle.dumps(record)) == record


def test_records_are_frozen_and_small(record):
    name = dataclasses.fields(record)[0].name
    with pytest.raises(dataclasses.FrozenInstanceError):
        setattr(record, name, None)
    assert not hasattr(record, "__dict__")


def test_short_repr_and_html(record):
    assert 1 <= len(repr(record).splitlines()) <= 12
    assert record._repr_html_().startswith("<table")


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "not JSON"),
        ('{"format": "tautwise-vet 1", "holds": NaN}', "not JSON"),
        ("[]", "a table"),
        ('{"format": "other 1"}', "tautwise-vet 1"),
        ('{"format": "tautwise-vet 1", "holds": true, "files": [], "x": 1}', "unknown key x"),
        ('{"format": "tautwise-vet 1", "holds": true}', "files is missing"),
        ('{"format": "tautwise-vet 1", "holds": 1, "files": []}', "holds"),
        ('{"format": "tautwise-vet 1", "holds": true, "files": {}}', "a list"),
        ("[" * 100_000, "not JSON"),
    ],
)
def test_other_json_is_refused(text, words):
    with pytest.raises(tw.InputError, match=words):
        VetReport.from_json(text)


# --- result keys


def test_settle_document(project):
    document = solve.settle_report(project).to_dict()
    assert next(iter(document)) == "format"
    assert document["format"] == "tautwise-settle 1"
    assert {"program", "project", "input_sha256", "stringing", "conditions"} <= set(document)
    assert set(document["stringing"]) >= {"temperature_degC", "horizontal_tension_N", "natural_length_m"}
    condition = document["conditions"][1]
    energies = {"energy_J", "energy_lower_J", "gap_J", "gap_relative", "residual_N"}
    assert {"name", "status", "spans", "supports", "marks"} | energies <= set(condition)
    assert condition["status"] == "settled"
    span = set(condition["spans"][0])
    assert span >= {"from", "to", "span_m", "rise_m", "natural_length_m", "line_length_m", "horizontal_tension_N"}
    assert span >= {"tension_from_N", "tension_to_N", "tension_max_N", "sag_m", "slant_sag_m", "blowout_m"}
    assert span >= {"low_point", "small_deflection_sag_m"}
    assert set(condition["spans"][0]["low_point"]) == {"station_m", "elevation_m"}
    support = condition["supports"][0]
    assert set(support) >= {"name", "along_N", "across_N", "down_N", "resultant_N", "swing_deg", "position_m"}
    assert set(support) >= {"swing_along_deg", "swing_across_deg", "station_m"}
    mark = {"name", "at_length_m", "tension_N", "tension_beyond_N", "station_m", "position_m"}
    assert set(condition["marks"][0]) == mark


def test_window_documents(window, shut):
    wanted = {"format", "open", "project", "input_sha256", "low", "high", "specify", "prices", "conflict", "relax"}
    for document in (window.to_dict(), shut.to_dict()):
        assert document["format"] == "tautwise-window 1"
        assert wanted <= set(document)
    document = window.to_dict()
    assert {"horizontal_tension_N", "limit", "condition", "place"} <= set(document["low"])
    assert {"horizontal_tension_N", "worst_utilisation", "tolerance_percent", "reason"} <= set(document["specify"])
    assert {"limit", "per", "value", "unit"} <= set(document["prices"][0])
    document = shut.to_dict()
    assert [document[key] for key in ("low", "high", "specify")] == [None, None, None]
    assert {"limit", "condition", "needs_N", "side"} <= set(document["conflict"][0])
    assert {"change", "by", "unit"} <= set(document["relax"][0])


def test_vet_document(project):
    document = project.vet().to_dict()
    assert list(document)[:3] == ["format", "holds", "files"]
    row = document["files"][0]["limits"][0]
    assert set(row) >= {"id", "kind", "status", "condition", "place", "value", "allowed", "unit", "utilisation"}
    assert set(row) >= {"margin", "clause"}


# --- the settled line


def test_settled_line_is_in_balance(project):
    shape = project.settle("hot")
    down = sum(support.down_N for support in shape.supports)
    assert down == pytest.approx(11.9 * shape.spans[0].natural_length_m, rel=1e-9)
    assert shape.supports[0].along_N == pytest.approx(-shape.supports[1].along_N, rel=1e-9)
    assert shape.energy_lower_J <= shape.energy_J
    assert shape.gap_relative <= 1e-6


def test_small_deflection_sag_stands_beside_the_exact_one(project):
    span = project.settle("hot").spans[0]
    off = 100 * (span.small_deflection_sag_m - span.sag_m) / span.sag_m
    assert span.small_deflection_off_percent == pytest.approx(off)
    assert 0 < abs(off) < 1


def test_point_loads_are_among_the_marks(project):
    (mark,) = project.settle("ice and wind").marks
    assert mark.name == "load 1, 2.000 kN at 75 m"
    assert mark.position_m[0] == pytest.approx(75, abs=1)


def test_places_on_the_line(project):
    shape = project.settle("hot")
    places = shape.at([0.0, 150.0, 300.0])
    assert places.position_m[0] == pytest.approx((0, 0, 24), abs=1e-9)
    assert places.clearance_m[1] == pytest.approx(places.position_m[1, 2] - 0.5)
    assert places.tension_N[0] == pytest.approx(shape.spans[0].tension_from_N)
    assert places == shape.at([0.0, 150.0, 300.0])
    assert shape.at(150.0).tension_N.shape == ()
    assert shape.at(np.full((2, 3), 10.0)).position_m.shape == (2, 3, 3)


def test_no_line_beyond_its_ends(project):
    places = project.settle("hot").at([-1.0, 301.0])
    assert np.isnan(places.tension_N).all()
    assert np.isnan(places.clearance_m).all()


def test_places_after_pickle_but_not_after_json(project):
    shape = project.settle("hot")
    assert pickle.loads(pickle.dumps(shape)).at(150.0) == shape.at(150.0)
    with pytest.raises(tw.TautwiseError, match="settle the project again"):
        type(shape).from_json(shape.to_json()).at(150.0)


def test_data_frames(project):
    pytest.importorskip("pandas")
    frame = solve.settle_report(project).to_dataframe()
    assert list(frame["condition"]) == ["hot", "ice and wind"]
    assert frame["sag_m"].min() > 5
    assert len(project.vet().to_dataframe()) == 2


def test_condition_must_be_named_and_known(project):
    with pytest.raises(tw.InputError, match="hot"):
        project.settle()
    with pytest.raises(tw.InputError, match="did you mean"):
        project.settle("hott")


@pytest.mark.parametrize(("pull", "words"), [("20", "N"), ("20 m", "length"), (0.0, "no pull"), (math.nan, "no pull")])
def test_bad_pulls_are_refused(project, pull, words):
    with pytest.raises(tw.InputError, match=words):
        project.settle("hot", pull=pull)


def test_pull_as_text_or_number(project):
    assert project.settle("hot", pull="20 kN") == project.settle("hot", pull=20000.0) == project.settle("hot")


def test_without_stringing_there_is_nothing_to_settle():
    bare = make(stringing={"temperature": "15 degC"})
    with pytest.raises(tw.InputError, match="horizontal_tension"):
        bare.settle("hot")
    assert bare.settle("hot", pull="20 kN").settled
    assert bare.window().open


def test_unsettled_condition_raises_or_is_a_row(project):
    with pytest.raises(tw.NotSettledError) as caught:
        solve.settle(project, "hot", elements_most=64, gap_relative=1e-12)
    rows = solve.settle_all(project, elements_most=64, gap_relative=1e-12)
    assert [row.settled for row in rows] == [False, False]
    assert rows[0].status == caught.value.status != "settled"
    assert rows[0].spans == ()
    assert "hot" in repr(rows[0])
    with pytest.raises(tw.NotSettledError):
        rows[0].at(0.0)


def test_natural_lengths_without_tension_are_bad_input():
    floating = [{"name": "afloat", "temperature": "15 degC", "load": [{"per_length": "11.9 N/m", "direction": "up"}]}]
    loose = make(stringing={"temperature": "15 degC", "natural_length": ["302 m"]}, conditions=floating)
    for call in (loose.settle, loose.vet):
        with pytest.raises(tw.InputError, match=r"stringing\.natural_length.*no tension.*300"):
            call()


# --- the window and the verdict


def test_ends_of_the_window_are_where_limits_meet_their_edge(project, window):
    low, high = window.low.horizontal_tension_N, window.high.horizontal_tension_N
    for inside in (low * (1 + 1e-6), window.specify.horizontal_tension_N, high * (1 - 1e-6)):
        assert project.vet(pull=inside).holds
    for outside, limit in ((low * (1 - 1e-4), window.low.limit), (high * (1 + 1e-4), window.high.limit)):
        report = project.vet(pull=outside)
        assert [row.id for row in report.limits if row.status == "fails"] == [limit]
    assert window.low.utilisation == pytest.approx(1.0, abs=1e-6)
    assert window.require_open() is window


def test_specified_pull_has_its_tolerance(window):
    best = window.specify
    assert best.tolerance_percent == pytest.approx(3)
    assert best.least_pull_N == pytest.approx(0.97 * best.horizontal_tension_N)
    assert best.limit in best.reason


def test_shut_window_says_so(shut):
    assert not shut.open
    assert {each.limit for each in shut.conflict} == {"clearance", "strength"}
    with pytest.raises(tw.ShutWindowError, match=r"clearance .*at least.*strength"):
        shut.require_open()


def test_a_proposed_relaxation_opens_the_window(shut):
    allowance = next(each for each in shut.relax if each.limit == "clearance")
    assert make(least=f"{allowance.to - 1e-6} m", share=0.15).window().open
    assert not make(least=f"{allowance.to + 0.01} m", share=0.15).window().open
    height = next(each for each in shut.relax if each.change == "height of East")
    supports = [
        {"name": "West", "station": "0 m", "height": "18 m"},
        {"name": "East", "station": "300 m", "height": f"{height.to + 1e-6} m"},
    ]
    assert make(least="14 m", share=0.15, support=supports).window().open


def test_share_is_given_with_a_relaxed_allowance(shut):
    change = next(each.change for each in shut.relax if each.limit == "strength")
    share = float(change.partition("share = ")[2].strip(")"))
    assert make(least="14 m", share=share).window().open


def test_window_without_limits_is_open_ended():
    free = make(limit=[CLEARANCE]).window()
    assert free.open
    assert free.high.limit is None


def test_verdict_is_worst_first_and_names_places(project):
    report = project.vet()
    used = [limit.utilisation for limit in report.limits]
    assert used == sorted(used, reverse=True)
    assert {limit.side for limit in report.limits} == {"least", "most"}
    assert next(limit for limit in report.limits if limit.id == "strength").clause == "invented rule 3"
    assert len(solve.vet(project, every=True).limits) == 4


def test_swing_is_in_degrees():
    supports = [
        {"name": "A", "station": "0 m", "elevation": "20 m"},
        {"name": "B", "station": "150 m", "elevation": "22 m", "hold": "hanger", "length": "1 m"},
        {"name": "C", "station": "300 m", "elevation": "20 m"},
    ]
    limits = [{"id": "swing", "kind": "swing", "most": "80 deg", "conditions": ["ice and wind"]}]
    project = make(support=supports, limit=limits)
    (row,) = project.vet().limits
    assert (row.unit, row.allowed) == ("deg", pytest.approx(80))
    assert row.value == pytest.approx(project.settle("ice and wind").supports[1].swing_deg)
    assert project.settle("hot").supports[0].swing_deg is None


def test_a_limit_that_meets_nothing_is_undecided(project):
    rows = limit_states(project, [], every=False)
    assert {(row.status, row.condition, row.value) for row in rows} == {("undecided", None, None)}
    assert VetReport.of([]).holds


class Interrupted:
    """A core whose search is interrupted."""

    def __init__(self, best):
        self.best = best

    def window(self, **options):
        stop = KeyboardInterrupt()
        if self.best is not None:
            stop.best = self.best
        raise stop


def test_cancelled_search_carries_the_best_so_far(project, monkeypatch):
    found = solve.core_of(project).window()
    found |= {"status": "cancelled", "open": False, "intervals": []}
    monkeypatch.setattr(solve, "core_of", lambda project: Interrupted(found))
    with pytest.raises(tw.SearchCancelled) as caught:
        project.window()
    assert caught.value.best.specify.horizontal_tension_N > 0
    assert not caught.value.best.open
    monkeypatch.setattr(solve, "core_of", lambda project: Interrupted(None))
    with pytest.raises(tw.SearchCancelled) as caught:
        project.window()
    assert caught.value.best is None


def test_undecided_search_is_never_a_window(project, monkeypatch):
    found = solve.core_of(project).window()

    class Lying:
        def window(self, **options):
            return found | {"verified": False}

    monkeypatch.setattr(solve, "core_of", lambda project: Lying())
    with pytest.raises(tw.NotSettledError):
        project.window()


def test_long_lines_still_print_short():
    supports = [{"name": f"M{k}", "station": f"{100 * k} m", "elevation": "20 m"} for k in range(40)]
    for number in range(1, 39):
        supports[number] |= {"hold": "hanger", "length": "1 m"}
    project = make(support=supports, ground=None, limit=[STRENGTH], conditions=[CONDITIONS[0]])
    shape = project.settle()
    assert len(shape.spans) == 39
    assert len(repr(shape).splitlines()) <= 12
    assert shape._repr_html_().count("<tr>") == 40


def test_names_are_inert_in_html():
    supports = [
        {"name": "<script>x</script>", "station": "0 m", "height": "18 m"},
        {"name": "East", "station": "300 m", "height": "16 m"},
    ]
    project = make(support=supports)
    assert "<script" not in project.settle("hot")._repr_html_()
    assert "<script" not in project.vet()._repr_html_()


def test_every_number_that_is_not_finite_becomes_null():
    end = WindowEnd(1.0, None, None, None, value=math.nan, utilisation=math.inf)
    assert json.loads(end.to_json())["value"] is None
    assert SettleReport.FORMAT == "tautwise-settle 1"


# --- the package and the array kernel


def test_package_is_lazy_and_complete():
    assert set(tw.__all__) <= set(dir(tw))
    assert all(getattr(tw, name) is not None for name in tw.__all__)
    with pytest.raises(AttributeError):
        tw.nothing  # noqa: B018


def test_start_file_loads_and_is_open(tmp_path):
    file = tmp_path / "a.taut.toml"
    file.write_text(start_text())
    assert tw.load(file).window().open


def test_kernel_against_published_oracles():
    # Own 30-digit oracles I(a), I(c), span 300 m level.
    states = tw.settle_spans(300.0, 0.0, [300.8, 299.5], 34.7e6, 15.97)
    assert states.horizontal_tension == pytest.approx([17368.8076566, 65609.3448867], rel=1e-11)
    assert states.sag == pytest.approx([10.3551736026, 2.73350164376], rel=1e-10)
    assert states.line_length == pytest.approx([300.951041549, 300.06640776], rel=1e-11)
    assert states.settled.all()


def test_kernel_broadcasts_and_inverts():
    pulls = np.array([[5e3], [10e3], [20e3]])
    lengths = tw.natural_length(np.array([100.0, 200.0]), 5.0, pulls, 20e6, 12.0, across=4.0)
    assert lengths.shape == (3, 2)
    again = tw.settle_spans(np.array([100.0, 200.0]), 5.0, lengths, 20e6, 12.0, across=4.0)
    assert again.horizontal_tension == pytest.approx(np.broadcast_to(pulls, (3, 2)), rel=1e-9)
    assert again == pickle.loads(pickle.dumps(again))


def test_kernel_counts_what_failed():
    with pytest.warns(RuntimeWarning, match=r"2 of 3 spans not settled \(2: error_range\)"):
        states = tw.settle_spans([300.0, -1.0, np.nan], 0.0, 300.8, 34.7e6, 15.97)
    assert np.isnan(states.sag).tolist() == [False, True, True]
    assert "1 settled, 2 not" in repr(states)
    with pytest.warns(RuntimeWarning, match="1 of 1 span "):
        assert np.isnan(tw.natural_length(300.0, 0.0, -1.0, 34.7e6, 15.97))


# --- texts from elsewhere are inert


def test_control_characters_never_leave_a_table_or_a_document(project):
    bad = "\N{ESCAPE}[31m\x9b\u202e<b>"
    row = dataclasses.replace(project.vet().limits[0], id=bad, place=bad)
    report = VetReport.of([dataclasses.replace(project.vet().files[0], limits=(row,), file=bad)])
    for text in (repr(report), report._repr_html_(), report.to_json(), report.to_json(indent=2)):
        assert text.replace("\n", "").isprintable()
    assert "<b>" not in report._repr_html_()
    assert VetReport.from_json(report.to_json()) == report
    assert VetReport.from_json(report.to_json(indent=2)) == report


def test_specified_pull_carries_both_edges(window):
    best = window.specify
    edges = window.to_dict()["specify"]["edges"]
    assert [edge["horizontal_tension_N"] for edge in edges] == [best.least_pull_N, best.most_pull_N]
    keys = {"limit", "condition", "place", "value", "allowed", "unit", "utilisation"}
    assert all(keys <= set(edge) for edge in edges)


def test_a_mark_off_a_leaning_end_says_where_the_line_runs():
    supports = [
        {"name": "A", "station": "0 m", "height": "18 m", "hold": "post", "stiffness_along": "60 kN/m"},
        {"name": "B", "station": "300 m", "height": "16 m"},
    ]
    project = make(support=supports, mark=[{"name": "end", "at": "0 m"}])
    with pytest.raises(
        tw.InputError, match=r"^mark\.end\.at: 0 m is not on the line, which runs from 0\.333.* m to 300"
    ):
        project.settle("hot")
