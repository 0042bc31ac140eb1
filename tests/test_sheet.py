"""The crew sheet: as a crew reads it, as CSV, as JSON, as records."""

from __future__ import annotations

import csv
import io
import json
import math
from pathlib import Path

import pytest

import tautwise as tw
from tautwise.cli import run
from tautwise.results import CrewSheet
from tautwise.text_sheet import sheet_csv

HILL = "examples/hill_section.taut.toml"


@pytest.fixture(scope="module")
def sheet():
    return tw.load(HILL).sheet()


def test_lengths_add_up(sheet):
    (section,) = sheet.sections
    assert section.natural_length_m == pytest.approx(math.fsum(s.natural_length_m for s in sheet.spans), rel=1e-15)
    assert section.cut_length_m == pytest.approx(section.natural_length_m + 2 * 2.5, rel=1e-15)
    assert section.cut_marked_m - section.marked_length_m == pytest.approx(5.0, rel=1e-12)
    stretch = 1.0 + 18e3 / 21e6
    for span in sheet.spans:
        assert span.marked_length_m == pytest.approx(span.natural_length_m * stretch, rel=1e-14)


def test_temperatures_around_the_stringing(sheet):
    assert [each.temperature_degC for each in sheet.temperatures] == [-10.0 + 5.0 * step for step in range(11)]
    assert sheet.stringing_degC == sheet.at_stringing.temperature_degC == 15.0
    same = sheet.temperatures[5]
    for one, other in zip(same.over_sheaves, sheet.at_stringing.over_sheaves, strict=True):
        assert one.sag_m == pytest.approx(other.sag_m, rel=1e-11)
    sags = [each.over_sheaves[2].sag_m for each in sheet.temperatures]
    assert sags == sorted(sags)
    asked = tw.load(HILL).sheet([20, "50 degF", 20.0])
    assert [each.temperature_degC for each in asked.temperatures] == pytest.approx([10.0, 20.0])


def test_the_clamped_rows_are_what_settle_gives(sheet):
    project = tw.load(HILL)
    everyday = project.settle("everyday")
    for reading, span in zip(sheet.at_stringing.clamped, everyday.spans, strict=True):
        assert reading.sag_m == pytest.approx(span.sag_m, rel=1e-10)
        assert reading.horizontal_tension_N == pytest.approx(span.horizontal_tension_N, rel=1e-10)
    assert [s.natural_length_m for s in sheet.spans] == [s.natural_length_m for s in everyday.spans]


def test_another_pull(sheet):
    other = tw.load(HILL).sheet(pull="19 kN")
    assert other.horizontal_tension_N == 19e3
    assert other.at_stringing.over_sheaves[0].horizontal_tension_N == pytest.approx(19e3, rel=1e-12)
    assert other.spans[0].natural_length_m < sheet.spans[0].natural_length_m


def test_waves_come_back_once_three_and_five_times(sheet):
    for reading in sheet.at_stringing.over_sheaves:
        once = reading.return_wave_s[0]
        assert reading.return_wave_s == pytest.approx((once, 3 * once, 5 * once))
        assert reading.return_wave_parabola_s == pytest.approx(reading.return_wave_s, rel=2e-3)


def test_records_round_trip(sheet):
    again = CrewSheet.from_json(sheet.to_json())
    assert again == sheet
    assert again.to_json() == sheet.to_json()
    assert sheet.to_dict()["format"] == "tautwise-sheet 1"
    assert len(repr(sheet).splitlines()) <= 12
    assert "T3 to T4" in sheet._repr_html_()
    frame = sheet.to_dataframe()
    assert len(frame) == 12 * 2 * 6
    assert set(frame["state"]) == {"over sheaves", "clamped"}


def test_a_line_strung_clamped():
    plain = tw.load("examples/hill_feeder.taut.toml").sheet()
    assert not plain.over_sheaves
    assert plain.at_stringing.over_sheaves == ()
    assert all(support.clip_offset_m is None for support in plain.supports)
    assert all(span.pulled_from_first is None for span in plain.spans)
    assert len(plain.sections) == 1


def copied(folder, old, new):
    """The hill section with something else in it."""
    file = folder / "other.taut.toml"
    text = Path(HILL).read_text()
    assert old in text
    file.write_text(text.replace(old, new, 1))
    ground = Path("examples/hill_section_ground.csv")
    (folder / ground.name).write_text(ground.read_text())
    return str(file)


def test_friction_of_sheaves_in_service():
    """A line that stays on its sheaves: the range stands on its sheet too, around what it has without friction."""
    holds = (("A", 0, "anchor"), ("B", 250, "sheave"), ("C", 520, "sheave"), ("D", 760, "anchor"))
    project = tw.Project(
        line={"weight": "11.9 N/m", "stiffness": "22.5 MN"},
        support=[
            {"name": name, "station": f"{x} m", "elevation": f"{20 + x / 50} m", "hold": hold}
            | ({"friction": 0.05} if hold == "sheave" else {})
            for name, x, hold in holds
        ],
        stringing={"temperature": "15 degC", "horizontal_tension": "20 kN"},
        condition=[{"name": "bare", "temperature": "15 degC"}],
    )
    sheet = project.sheet()
    free = [reading.horizontal_tension_N for reading in sheet.at_stringing.clamped]
    first = [span.pulled_from_first.horizontal_tension_N for span in sheet.spans]
    last = [span.pulled_from_last.horizontal_tension_N for span in sheet.spans]
    assert first[0] == pytest.approx(20e3, rel=1e-12)
    assert last[2] == pytest.approx(free[2], rel=1e-10)
    assert first[0] - free[0] < 1e-6
    assert all(one < two - 10.0 for one, two in zip(first[1:], free[1:], strict=True))
    assert all(one < two - 10.0 for one, two in zip(last[:2], free[:2], strict=True))
    assert project.settle().sheave_imbalance_N < 1e-9 * 20e3


def test_posts_carry_sheaves_while_the_line_is_strung():
    tables = {"stiffness_along": "500 kN/m", "stiffness_across": "500 kN/m"}
    supports = [("A", 0, 20), ("B", 60, 24), ("C", 130, 22)]
    project = tw.Project(
        line={"weight": "5 N/m", "stiffness": "9 MN"},
        support=[
            {"name": name, "station": f"{x} m", "elevation": f"{z} m"}
            | ({"hold": "post"} | tables if name == "B" else {})
            for name, x, z in supports
        ],
        stringing={"temperature": "15 degC", "horizontal_tension": "6 kN", "method": "over sheaves"},
        condition=[{"name": "bare", "temperature": "15 degC"}],
    )
    sheet = project.sheet()
    over, clamped = sheet.at_stringing.over_sheaves, sheet.at_stringing.clamped
    assert abs(over[0].horizontal_tension_N - over[1].horizontal_tension_N) > 5.0
    assert clamped[0].horizontal_tension_N == pytest.approx(clamped[1].horizontal_tension_N, rel=1e-9)
    assert sheet.supports[1].clip_offset_m != 0.0
    assert project.settle().supports[1].along_N == pytest.approx(0.0, abs=1e-5)


def printed(capsys, *arguments):
    assert run(["sheet", *arguments]) == 0
    out = capsys.readouterr()
    assert out.err == ""
    return out.out


def test_the_text_says_what_to_do(capsys):
    text = printed(capsys, HILL)
    for words in (
        "Bare line at 15 degC, pulled in over sheaves, then clamped plumb",
        "Pull: 18.00 kN horizontal tension +/- 3 % in the first span.",
        "The allowance is 2.5 m at each end of a section.",
        "Mark every sheave before the first is clamped.",
        "What friction of the sheaves may leave",
        "Return wave, on the sheaves",
        "the judgement of a licensed engineer decide",
    ):
        assert words in text
    assert all(line == line.rstrip() for line in text.splitlines())


def test_the_text_of_other_lines(capsys, tmp_path):
    assert "hangers plumb" in printed(capsys, "examples/hill_feeder.taut.toml")
    given = f'natural_length = "{tw.load(HILL).sheet().sections[0].natural_length_m} m"'
    file = copied(tmp_path, 'horizontal_tension = "18 kN"', given)
    assert "Pull: 18.00 kN" in printed(capsys, file)


def test_csv(capsys, sheet):
    rows = list(csv.DictReader(io.StringIO(printed(capsys, HILL, "--csv", "--temperature", "20 degC"))))
    assert len(rows) == 2 * 2 * 6
    first = rows[0]
    assert (first["project"], first["temperature_degC"], first["state"]) == ("Hill section", "15.0", "over sheaves")
    assert float(first["sag_m"]) == sheet.at_stringing.over_sheaves[0].sag_m
    assert float(first["clip_offset_at_to_m"]) == sheet.supports[1].clip_offset_stretched_m
    assert rows[5]["clip_offset_at_to_m"] == ""


def test_names_are_inert_in_csv():
    project = tw.Project(
        title="=1+1",
        line={"weight": "11.9 N/m", "stiffness": "22.5 MN"},
        support=[
            {"name": name, "station": f"{x} m", "elevation": "20 m"} for name, x in (("@SUM(A1)", 0), ("-2+3", 200))
        ],
        stringing={"temperature": "15 degC", "horizontal_tension": "20 kN"},
        condition=[{"name": "bare", "temperature": "15 degC"}],
    )
    row = next(csv.DictReader(io.StringIO(sheet_csv([project.sheet()]))))
    assert (row["project"], row["from"], row["to"]) == ("'=1+1", "'@SUM(A1)", "'-2+3")


def test_json(capsys, sheet):
    document = json.loads(printed(capsys, HILL, "--json"))
    assert document["format"] == "tautwise-sheet 1"
    assert document["caution"]
    assert CrewSheet.from_dict(document).spans == sheet.spans
    both = json.loads(printed(capsys, HILL, "examples/hill_feeder.taut.toml", "--json"))
    assert [one["project"] for one in both] == ["Hill section", "Hill feeder"]


def test_several_sections(capsys, tmp_path):
    link = 'hold = "hanger"\nlength = "1.6 m"\nweight = "450 N"\n\n[[support]]\nname = "T4"'
    file = copied(tmp_path, link, 'hold = "anchor"\n\n[[support]]\nname = "T4"')
    text = printed(capsys, file)
    assert "in the first span after T1, T3." in text
    sheet = tw.load(file).sheet()
    assert [(one.from_support, one.to_support) for one in sheet.sections] == [("T1", "T3"), ("T3", "T7")]
    assert sheet.supports[2].clip_offset_m is None
    assert sheet.at_stringing.over_sheaves[2].horizontal_tension_N == pytest.approx(18e3, rel=1e-12)
