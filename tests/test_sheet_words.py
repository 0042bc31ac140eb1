"""The crew sheet in words: what a sheave bears in all, sides without signs, sheaves in service, hangers at an angle."""

from __future__ import annotations

import math
import re

import pytest

import tautwise as tw
from tautwise.text import Ink
from tautwise.text_sheet import sheet_text

LINE = {"diameter": "20 mm", "weight": "15.97 N/m", "stiffness": "34.7 MN", "expansion": "18.9e-6 / K"}
STRUNG = {"temperature": "15 degC", "horizontal_tension": "20 kN"}
STILL = [{"name": "still", "temperature": "15 degC"}]
TURN = math.radians(20.0)


def printed(project):
    return "\n".join(sheet_text(project.sheet(), project, Ink()))


def turning(hold="hanger", **stringing):
    """Two level spans of 300 m with a turn of 20 deg to the left at a hanger of 2 m and 400 N."""
    own = {"length": "2 m", "weight": "400 N"} if hold == "hanger" else {}
    supports = [
        {"name": "P1", "east": "0 m", "north": "0 m", "elevation": "20 m"},
        {"name": "P2", "east": "300 m", "north": "0 m", "elevation": "22 m", "hold": hold, **own},
        {"name": "P3", "east": f"{300 + 300 * math.cos(TURN)!r} m", "north": f"{300 * math.sin(TURN)!r} m",
         "elevation": "20 m"},
    ]  # fmt: skip
    return tw.Project(line=LINE, support=supports, condition=STILL, stringing={**STRUNG, **stringing})


def straight(holds, **stringing):
    """Spans of 250, 400 and 300 m."""
    places = zip(("A", "B", "C", "D"), (0, 250, 650, 950), (20, 20, 35, 20), ("anchor", *holds, "anchor"), strict=True)
    supports = [
        {"name": name, "station": f"{x} m", "elevation": f"{z} m", "hold": hold}
        | ({"length": "2 m"} if hold == "hanger" else {})
        for name, x, z, hold in places
    ]
    return tw.Project(line=LINE, support=supports, condition=STILL, stringing={**STRUNG, **stringing})


def test_the_load_of_an_angle_by_statics():
    """Across: 2 H sin(half the turn), less what the sheave has swung inwards, since spans pull along their chords."""
    project = turning(method="over sheaves")
    sheet = project.sheet()
    row = sheet.supports[1]
    inwards = 2.0 * math.sin(math.radians(row.block_swing_deg))
    half = math.atan2(300.0 * math.sin(TURN / 2) - inwards, 300.0 * math.cos(TURN / 2))
    across = 2.0 * 20e3 * math.sin(half)
    assert row.block_across_N == pytest.approx(across, rel=1e-9)  # closed form on the printed swing
    assert row.block_resultant_N == pytest.approx(math.hypot(row.block_down_N, across), rel=1e-9)
    assert row.block_resultant_N > 1.2 * row.block_down_N
    (printed_row,) = [line for line in printed(project).splitlines() if re.match(r"  P2  .*at it", line)]
    assert f"{row.block_resultant_N / 1e3:.3f}" in printed_row
    assert f"{across / 1e3:.3f}" in printed_row


def test_a_side_needs_no_sign():
    sheet = tw.load("examples/hill_section.taut.toml").sheet()
    project = tw.load("examples/hill_section.taut.toml")
    behind = [each for each in sheet.supports if (each.clip_offset_stretched_m or 0.0) < -1e-3]
    assert behind
    text = printed(project)
    for each in behind:
        assert re.search(rf"^  {each.name} +{-each.clip_offset_stretched_m:.3f}  behind", text, re.M)
    assert not re.search(r"-\d\S*  behind", text)


def test_sheaves_in_service():
    text = printed(straight(("sheave", "sheave")))
    assert "Bare line at 15 degC, runs over sheaves in service (B, C)\n" in text
    assert "horizontal tension in the first span." in text
    assert "clamped" not in text.lower()
    assert "in every span" not in text
    readings = straight(("sheave", "sheave")).sheet().at_stringing.clamped
    pulls = [f"{each.horizontal_tension_N / 1e3:.2f}" for each in readings]
    assert len(set(pulls)) > 1
    assert re.search(r"In service: horizontal tension of each span\n.*\n.*\n(.*\n)* +15\.0 +" + " +".join(pulls), text)


def test_sheaves_in_service_among_hangers():
    text = printed(straight(("hanger", "sheave")))
    assert "strung clamped, hangers plumb, runs over sheaves in service (C)\n" in text
    assert "in the first span." in text
    text = printed(straight(("hanger", "sheave"), method="over sheaves"))
    assert "pulled in over sheaves, then clamped plumb, runs over sheaves in service (C)\n" in text


def test_hangers_are_called_plumb_where_they_are():
    assert "strung clamped, hangers plumb\n" in printed(straight(("hanger", "hanger")))
    assert "in every span." in printed(straight(("hanger", "hanger")))
    for stringing in ({}, {"method": "over sheaves"}):
        assert "plumb" not in printed(turning(**stringing))


def test_marked_under_the_pull_is_explained():
    assert "  Marked under the pull: the same piece as a tape shows it" in printed(straight(("hanger", "hanger")))
