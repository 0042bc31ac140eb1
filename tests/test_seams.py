"""Where features meet: loads that depend on the shape, history, searches over sheaves, surveys of stretched lines."""

from __future__ import annotations

from typing import Any

import pytest

import tautwise as tw

LINE = {"diameter": "20 mm", "weight": "10 N/m", "stiffness": "20 MN", "expansion": "12e-6 / K",
        "breaking_strength": "100 kN"}  # fmt: skip
CURVE = {"initial": ["0 MPa", "600 MPa", "-60 MPa"], "final_modulus": "70 GPa", "expansion": "12e-6 / K"}
CURVED = {key: LINE[key] for key in ("diameter", "weight", "breaking_strength")} | {"area": "300 mm^2", "curve": CURVE}
HANGER = {"hold": "hanger", "length": "1 m", "weight": "100 N"}


def support(number: int, station: float, elevation: float, **own: str) -> dict[str, str]:
    return {"name": f"S{number}", "station": f"{station!r} m", "elevation": f"{elevation!r} m", **own}


def row(name: str = "c", **own: Any) -> dict[str, Any]:
    return {"name": name, "temperature": "15 degC"} | own


@pytest.mark.parametrize("load", [
    {"per_run": "60 N/m"}, {"force": "12 kN", "carriage": "free", "at": "30 m"}, {"force": "12 kN", "carriage": "free"},
    {"force": "12 kN", "carriage": "held", "at": "30 m"}, {"per_length": "60 N/m"},
])  # fmt: skip
def test_a_condition_leaves_the_same_whatever_state_it_is_listed_in(load):
    """History settles each met condition as strung, with its loads brought into line with the shape."""
    found = []
    for state in ("initial", "final"):
        project = tw.Project(
            line=CURVED, support=[support(0, 0.0, 20.0), support(1, 200.0, 90.0)], history={"conditions": ["heavy"]},
            stringing={"temperature": "15 degC", "horizontal_tension": "9 kN"},
            condition=[row("heavy", load=[load], state=state), row("later", state="final")])  # fmt: skip
        (span,) = project.settle("later").spans
        found.append((span.permanent_strain, span.sag_m, span.horizontal_tension_N))
    assert found[0] == pytest.approx(found[1], rel=1e-9)
    assert found[0][0] > 1e-5


def over_sheaves(*higher_m: float) -> tw.Project:
    heights = [20.0 + higher_m[0], 32.0 + higher_m[1], 45.0 + higher_m[2], 40.0 + higher_m[3]]
    supports = [support(j, station, heights[j], **({} if j in (0, 3) else HANGER))
                for j, station in enumerate((0.0, 200.0, 420.0, 600.0))]  # fmt: skip
    return tw.Project(
        line=LINE, support=supports, ground={"points": [["0 m", "0 m"], ["600 m", "22 m"]]},
        stringing={"temperature": "15 degC", "method": "over sheaves"},
        condition=[row("hot", temperature="60 degC"), row("cold", temperature="-20 degC")],
        limit=[{"id": "clear", "kind": "clearance", "least": "10 m"}, {"id": "pull", "kind": "tension", "share": 0.25}],
    )  # fmt: skip


def test_prices_of_supports_over_sheaves_are_what_moving_them_does():
    """The ends among them, which the line is pulled in between."""
    window = over_sheaves(0.0, 0.0, 0.0, 0.0).window()
    prices = [price for price in window.prices if price.per == "support height"]
    assert {price.support for price in prices} & {"S0", "S3"}
    for price in prices:
        step = [0.01 if price.support == f"S{j}" else 0.0 for j in range(4)]
        ends = [getattr(over_sheaves(*(sign * each for each in step)).window(), price.end) for sign in (1.0, -1.0)]
        slope = (ends[0].horizontal_tension_N - ends[1].horizontal_tension_N) / 0.02
        assert price.pull_N_per_m == pytest.approx(slope, rel=1e-3)


@pytest.mark.parametrize("at", [100.0, 100.3])
def test_a_point_load_amid_a_load_per_run_leaves_no_sliver(at):
    supports = [support(j, 200.0 * j, 20.0, **({} if j in (0, 6) else HANGER)) for j in range(7)]
    loads = [{"per_run": "3 N/m"}, *({"force": "100 N", "at": f"{at + 200 * k} m"} for k in range(5))]
    project = tw.Project(line=LINE, support=supports, condition=[row(load=loads)],
                         stringing={"temperature": "15 degC", "horizontal_tension": "9 kN"})  # fmt: skip
    found = project.settle()
    assert found.gap_relative < 1e-6
    assert found.load_mismatch < 1e-9


@pytest.mark.parametrize("start", [30.0, 100.0, 170.0])
def test_a_carriage_rests_against_a_heavier_load(start):
    """The lowest place is the kink that the heavier load makes: the tension jumps there, more than the carriage can."""
    trolley = {"name": "trolley", "force": "1 kN", "carriage": "free", "at": f"{start} m"}
    project = tw.Project(line=LINE, support=[support(0, 0.0, 30.0), support(1, 200.0, 32.0)],
                         condition=[row(load=[{"force": "20 kN", "at": "60 m"}, trolley])],
                         stringing={"temperature": "15 degC", "horizontal_tension": "9 kN"})  # fmt: skip
    heavy, rolled = project.settle().marks
    assert rolled.at_length_m == pytest.approx(heavy.at_length_m, abs=1e-6)


@pytest.mark.parametrize("line", [LINE | {"bedding_in": "0.05 %"}, CURVED])
def test_a_line_with_a_final_state_can_be_surveyed(line, tmp_path):
    """Points of the bare line as strung give its pull back, though other conditions come after a history."""
    project = tw.Project(line=line, support=[support(0, 0.0, 20.0), support(1, 200.0, 24.0)],
                         stringing={"temperature": "15 degC", "horizontal_tension": "9 kN"},
                         condition=[row(), row("later", state="final")])  # fmt: skip
    found = project.settle("c").at([40.0, 80.0, 120.0, 160.0])
    rows = "".join(f"{x!r},{z!r},15\n" for x, _, z in found.position_m.tolist())
    survey = tmp_path / "points.csv"
    survey.write_text("station_m,elevation_m,temperature_degC\n" + rows)
    assert project.fit(survey).pull.horizontal_tension_N == pytest.approx(9e3, rel=1e-7)


def test_a_curved_line_is_marked_by_its_own_law():
    """On a flat span nearly all of the line is under the pull: the marked length is its line length."""
    project = tw.Project(line=CURVED, support=[support(0, 0.0, 20.0), support(1, 200.0, 20.0)], condition=[row()],
                         stringing={"temperature": "15 degC", "horizontal_tension": "30 kN"})  # fmt: skip
    (span,) = project.settle().spans
    (told,) = project.sheet().spans
    assert told.marked_length_m == pytest.approx(span.line_length_m, rel=1e-6)
