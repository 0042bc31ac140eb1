"""The text of the commands: aligned, worst first, honest at the edges, with what to do next."""

from __future__ import annotations

import dataclasses
import re

import pytest
from hypothesis import given
from hypothesis import strategies as st
from test_results import make

from tautwise import solve
from tautwise.columns import Column, Table, cut, force_column, forces_text, length_column, text_column, width
from tautwise.results import VetReport
from tautwise.results_window import second_looks
from tautwise.text import Ink, condition_text, settle_text
from tautwise.text_limits import best_so_far, vet_text, window_text
from tautwise.words import condition_words

PLAIN = Ink(False)


@pytest.fixture(scope="module")
def project():
    return make()


@pytest.fixture(scope="module")
def window(project):
    return project.window()


@pytest.fixture(scope="module")
def narrow():
    return make(least="14 m", share=0.15)


def table_below(lines: list[str], head: str) -> list[str]:
    start = next(number for number, line in enumerate(lines) if line.lstrip().startswith(head))
    return lines[start : lines.index("", start)]


# --- tables


def test_columns_are_aligned():
    table = Table((text_column("span"), force_column("pull", [2e4])), (("A to B", 2e4), ("C", None), ("東", 900.0)))
    lines = table.lines()
    assert len({width(line) for line in lines if line.endswith(("kN", "0", "-"))}) == 1
    assert lines[1].split() == ["kN"]
    assert lines[3].split() == ["C", "-"]


def test_units_fit_the_numbers():
    assert force_column("x", [999.0]).unit == "N"
    assert force_column("x", [1000.0]).unit == "kN"
    assert length_column("x", [99.0]).decimals == 3
    assert length_column("x", [100.0]).decimals == 2
    assert Column("x", "m", 1.0, 3).shown(-1e-9) == "0.000"


def test_html_is_escaped():
    html = Table((text_column("<b>"),), (("<i>",),)).html("<u>")
    assert "<b>" not in html
    assert "&lt;i&gt;" in html
    assert "&lt;u&gt;" in html


@given(st.floats(1e-3, 1e6), st.integers(0, 4), st.booleans())
def test_rounding_stays_on_the_safe_side(value, decimals, up):
    text = cut(value, decimals, up=up)
    slip = 1e-6 * 10.0**-decimals + 1e-15 * value
    assert (float(text) >= value - slip) if up else (float(text) <= value + slip)
    assert abs(float(text) - value) <= 10.0**-decimals * (1 + 1e-6) + 1e-9 * value
    assert len(text.partition(".")[2]) == decimals


# --- settle


def test_conditions_come_with_the_highest_tension_first(project):
    report = solve.settle_report(project)
    lines = settle_text(report, project, PLAIN)
    rows = table_below(lines, "condition ")[2:]
    assert [row.split("  ")[1] for row in rows] == ["ice and wind", "hot"]
    assert "degC" in table_below(lines, "condition ")[1]
    text = "\n".join(lines)
    assert text.index("\nice and wind: -5 degC, 10 mm of ice") < text.index("\nhot: 60 degC")


def test_exact_sag_stands_beside_the_small_deflection_one(project):
    lines = settle_text(solve.settle_report(project), project, PLAIN)
    head, units, row = table_below(lines, "between ")
    for word in ("sag", "small-deflection", "off by"):
        assert word in head
    assert "%" in units
    span = project.settle("ice and wind").spans[0]
    assert f"{span.sag_m:.3f}" in row
    assert f"{span.small_deflection_sag_m:.3f}" in row


def test_proof_caution_and_next_steps(project):
    text = "\n".join(settle_text(solve.settle_report(project), project, PLAIN, "25 kN"))
    assert "Proof: two energies" in text
    assert "A design aid" in text
    assert "tautwise vet FILE --pull '25 kN'" in text
    assert "tautwise window" in text


def test_blow_out_only_where_there_is_some(project):
    text = "\n".join(settle_text(solve.settle_report(project), project, PLAIN))
    still = text[text.index("\nhot: ") :]
    assert "blow-out" in text
    assert "blow-out" not in still


def test_uplift_is_pointed_out():
    supports = [
        {"name": "A", "station": "0 m", "elevation": "60 m"},
        {"name": "B", "station": "100 m", "elevation": "20 m", "hold": "post"},
        {"name": "C", "station": "200 m", "elevation": "60 m"},
    ]
    supports[1] |= {"stiffness_along": "1 MN/m", "stiffness_across": "1 MN/m"}
    project = make(support=supports, ground=None, limit=[], conditions=[{"name": "x", "temperature": "15 degC"}])
    lines = settle_text(solve.settle_report(project), project, PLAIN)
    assert "  Uplift (down is negative) at B." in lines


# --- window


def test_window_names_its_ends_and_the_pull(window, project):
    text = "\n".join(window_text(window, project, PLAIN))
    assert re.search(r"^OPEN: pulls of [\d.]+ to [\d.]+ kN keep every limit", text, re.MULTILINE)
    for end in (window.low, window.high):
        assert end.limit in text
        assert end.place in text
    pull = f"{window.specify.horizontal_tension_N / 1e3:.2f}"
    assert f"Specify {pull} kN +/- 3 %" in text
    assert "--pull" in text


def test_ends_are_rounded_inwards(window, project):
    text = "\n".join(window_text(window, project, PLAIN))
    low, high = map(float, re.search(r"pulls of ([\d.]+) to ([\d.]+) kN", text).groups())
    assert window.low.horizontal_tension_N <= 1e3 * low
    assert window.high.horizontal_tension_N >= 1e3 * high
    assert project.vet(pull=f"{low} kN").holds
    assert project.vet(pull=f"{high} kN").holds


def test_open_ended_window_asks_for_a_second_look():
    free = make(limit=[{"id": "clearance", "kind": "clearance", "least": "6.5 m"}])
    text = "\n".join(window_text(free.window(), free, PLAIN))
    assert "Look again: open-ended above" in text
    assert "missing" in text
    assert "Specify none" in text
    assert "keep it" not in text


def test_several_stretches_are_said_to_be_several(window, project):
    low, high = window.intervals[0]
    split = dataclasses.replace(window, intervals=((low, 0.9 * high), (0.95 * high, high)))
    split = dataclasses.replace(split, findings=second_looks(split))
    text = "\n".join(window_text(split, project, PLAIN))
    assert "OPEN, in 2 stretches" in text
    assert "between these stretches break a limit" in text


def test_tolerance_wider_than_the_window_is_said(window, project):
    best = dataclasses.replace(window.specify, worst_utilisation=1.02)
    text = "\n".join(window_text(dataclasses.replace(window, specify=best), project, PLAIN))
    assert "narrower than the tolerance" in text


def test_shut_window_names_conflict_and_changes(narrow):
    shut = narrow.window()
    lines = window_text(shut, narrow, PLAIN)
    assert lines[2].startswith("SHUT: no pull keeps every limit")
    rows = table_below(lines, "change ")
    assert len(rows) == 2 + len(shut.relax)
    assert any(row.lstrip().startswith("height of East") for row in rows)
    assert "change the " in lines[-3]


def test_changes_are_rounded_so_that_they_still_open(narrow):
    shut = narrow.window()
    rows = table_below(window_text(shut, narrow, PLAIN), "allowed value of clearance")
    to = float(rows[0].split()[5])
    assert to <= next(each.to for each in shut.relax if each.limit == "clearance")
    assert make(least=f"{to} m", share=0.15).window().open


def test_no_single_change_is_said_plainly(narrow):
    shut = dataclasses.replace(narrow.window(), relax=())
    text = "\n".join(window_text(shut, narrow, PLAIN))
    assert "No single change" in text
    assert re.search(r'--pull "[\d.]+ kN"', text)


def test_best_so_far(window):
    assert "not verified" in best_so_far(window)
    assert "no pull to report" in best_so_far(None)


# --- vet


def test_governing_limit_is_named(project):
    report = project.vet()
    lines = vet_text(report, [project], PLAIN)
    worst = report.limits[0]
    assert any(line.startswith("HOLDS: 2 limits kept at a pull of 20.00 kN") for line in lines)
    assert f"Governing: {worst.id} in {worst.condition}, {worst.place}, {100 * worst.utilisation:.1f} % used." in lines


def test_failing_files_come_first(project):
    poor = make(least="14 m", title="Poor")
    report = VetReport.of([project.vet().files[0], poor.vet().files[0]])
    text = "\n".join(vet_text(report, [project, poor], PLAIN))
    assert text.startswith("1 of 2 files with limits that do not hold")
    assert text.index("\nPoor\n") < text.index("\nInlet\n")
    assert "FAILS: 1 of 2 limits not kept" in text


def test_accents_change_nothing_but_accents(narrow):
    report = narrow.vet()
    shut = narrow.window()
    pairs = [
        (vet_text(report, [narrow], Ink(True)), vet_text(report, [narrow], PLAIN)),
        (window_text(shut, narrow, Ink(True)), window_text(shut, narrow, PLAIN)),
    ]
    for accented, plain in pairs:
        assert "\033[" in "".join(accented)
        assert [re.sub(r"\033\[[\d;]*m", "", line) for line in accented] == plain


# --- exact words and digits


def test_both_edges_of_the_specified_pull_are_shown(window, project):
    text = "\n".join(window_text(window, project, PLAIN))
    best = window.specify
    least, most = best.edges
    assert (least.horizontal_tension_N, most.horizontal_tension_N) == (best.least_pull_N, best.most_pull_N)
    assert max(least.utilisation, most.utilisation) == pytest.approx(best.worst_utilisation)
    for edge in best.edges:
        judged = {row.id: row for row in project.vet(pull=edge.horizontal_tension_N).limits}
        assert judged[edge.limit].utilisation == pytest.approx(edge.utilisation, abs=1e-6)
        assert re.search(
            rf"^    at {edge.horizontal_tension_N / 1e3:.2f} kN  {edge.limit} {100 * edge.utilisation:.1f} % "
            rf"\({edge.condition}, ",
            text,
            re.MULTILINE,
        )


def test_an_exact_pull_has_one_edge():
    exact = make(stringing={"temperature": "15 degC"})
    text = "\n".join(window_text(exact.window(), exact, PLAIN))
    assert re.search(r"^  Most used: \S+ [\d.]+ % \(", text, re.MULTILINE)


def test_numbers_of_a_line_share_their_decimals():
    assert forces_text(10e3, 9.6e3, 10.4e3) == (["10.000", "9.600", "10.400"], "kN")
    assert forces_text(238.0, 85e3) == (["0.238", "85.000"], "kN")
    assert forces_text(20e3, 19.4e3) == (["20.00", "19.40"], "kN")
    assert forces_text(20.0) == (["20.0"], "N")


def test_specified_pull_and_its_range_share_their_decimals(window, project):
    text = "\n".join(window_text(window, project, PLAIN))
    assert re.search(r"^Specify \d+\.\d\d kN \+/- 3 % \(\d+\.\d\d to \d+\.\d\d kN\), bare line at", text, re.MULTILINE)


def test_ends_show_value_and_what_is_allowed(window, project):
    head, _, low, high = table_below(window_text(window, project, PLAIN), "end ")
    assert head.split() == ["end", "pull", "governed", "by", "value", "allowed", "unit", "condition", "at"]
    assert low.split()[3:6] == ["6.500", "6.500", "m"]
    assert high.split()[3:6] == ["95.00", "95.00", "kN"]


def test_conflict_is_rounded_to_the_safe_side(narrow):
    shut = narrow.window()
    rows = table_below(window_text(shut, narrow, PLAIN), "limit ")[1:]
    for row, each in zip(rows, shut.conflict, strict=True):
        number = 1e3 * float(re.search(r"at (?:least|most) ([\d.]+) kN", row)[1])
        assert (number >= each.needs_N) if each.side == "at least" else (number <= each.needs_N)
    assert len({row.split()[-2].partition(".")[2].__len__() for row in rows}) == 1


def test_relaxations_begin_with_the_supports(narrow):
    shut = narrow.window()
    kinds = [each.support is None for each in shut.relax]
    assert kinds == sorted(kinds)
    assert True in kinds
    lines = window_text(shut, narrow, PLAIN)
    assert any(line.startswith("Choose one") for line in lines)
    assert "change the height of " in lines[-3]


def test_changes_come_in_the_unit_of_the_file_too():
    supports = [
        {"name": "West", "station": "0 ft", "height": "59 ft"},
        {"name": "East", "station": "300 m", "height": "16 m"},
    ]
    feet = make(least="46 ft", share="15 %", support=supports)
    shut = feet.window()
    written = {each.change.partition(" (")[0]: each.written for each in shut.relax}
    height = next(each for each in shut.relax if each.change == "height of West")
    number, unit = height.written.split()
    assert unit == "ft"
    assert 0.0 <= float(number) * 0.3048 - height.to < 0.001
    assert written["height of East"].endswith(" m")
    assert re.fullmatch(r"[\d.]+ ft", written["allowed value of clearance"])
    assert re.fullmatch(r"[\d.]+ %", written["allowed value of strength"])
    head, _, *rows = table_below(window_text(shut, feet, PLAIN), "change ")
    assert "in the file" in head
    assert any(height.written in row for row in rows)
    moved = [supports[0] | {"height": height.written}, supports[1]]
    assert make(least="46 ft", share="15 %", support=moved).window().open


def test_prices_too_small_to_matter_are_left_out(window, project):
    small = dataclasses.replace(window.prices[1], pull_N_per_m=0.004 * window.low.horizontal_tension_N)
    large = dataclasses.replace(small, pull_N_per_m=-0.006 * window.low.horizontal_tension_N)
    lines = window_text(dataclasses.replace(window, prices=(small, large)), project, PLAIN)
    assert any("until another limit takes over" in line for line in lines)
    assert len(table_below(lines[8:], "end ")) == 3


def test_spans_have_their_own_words(project):
    head, _, row = table_below(settle_text(solve.settle_report(project), project, PLAIN), "between ")
    assert head.split()[:6] == ["between", "span", "natural", "length", "horizontal", "tension"]
    span = project.settle("ice and wind").spans[0]
    assert f"{span.natural_length_m:.3f}" in row
    assert not any(" pull " in line for line in settle_text(solve.settle_report(project), project, PLAIN)[6:-6])


@pytest.mark.parametrize(
    ("gap", "words"), [(-6e-15, "less than 1e-14 of it"), (-2e-9, "2.0e-09 of it"), (0.0, "less than 1e-14 of it")]
)
def test_the_proof_states_a_magnitude(project, gap, words):
    found = dataclasses.replace(project.settle("hot"), gap_relative=gap)
    assert words in condition_text(found, project, PLAIN)[-1]


def test_every_row_is_counted(project):
    report = solve.vet(project, every=True)
    lines = vet_text(report, [project], PLAIN)
    assert any(line.startswith("HOLDS: 2 limits kept in all 4 rows, at a pull of 20.00 kN") for line in lines)
    assert any(line.startswith("Governing: ") for line in lines)
    poor = make(least="13.73 m")
    lines = vet_text(solve.vet(poor, every=True), [poor], PLAIN)
    assert any(line.startswith("FAILS: 1 of 2 limits not kept (1 of 4 rows), at a pull of") for line in lines)


def test_tension_at_a_support_names_it(project):
    row = next(row for row in project.vet().limits if row.id == "strength")
    assert row.place == "West to East, at West"
    clearance = next(row for row in project.vet().limits if row.id == "clearance")
    assert re.fullmatch(r"West to East, station \d+\.\d m", clearance.place)


@pytest.mark.parametrize(
    ("load", "words"),
    [
        ({"force": "2 kN", "at_length": "75 m"}, "2 kN at 75 m along the line"),
        ({"name": "arrest", "force": "6 kN", "at": "75 m", "direction": "across"}, "arrest: 6 kN across at 75 m"),
        ({"per_length": "30 N/m", "from": "10 m", "to": "60 m"}, "30 N/m from 10 m to 60 m"),
        ({"per_length": "5 N/m", "direction": "up"}, "5 N/m up on the whole line"),
        ({"force": "500 N", "at": "75 m", "direction": [0, 3, -4]}, "500 N along (0, 0.6, -0.8) at 75 m"),
    ],
)
def test_loads_are_named_with_size_and_place(load, words):
    project = make(conditions=[{"name": "x", "temperature": "15 degC", "load": [load]}])
    assert condition_words(project.conditions[0]) == f"15 degC, {words}"


def test_many_loads_are_counted():
    loads = [{"force": "500 N", "at": f"{place} m"} for place in range(10, 110, 10)]
    project = make(conditions=[{"name": "x", "temperature": "15 degC", "load": loads}])
    assert condition_words(project.conditions[0]).endswith("500 N at 30 m, and 7 more loads")
