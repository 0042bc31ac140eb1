"""The catalogue: published values, every row plausible and with its source, names, a user's own files."""

from __future__ import annotations

import csv
import hashlib
import io
import json
import math
import re
import shlex
import tomllib

import pytest
from hypothesis import given
from hypothesis import strategies as st

import tautwise as tw
from tautwise import cli
from tautwise.catalogue import Catalogue, shipped
from tautwise.errors import InputError
from tautwise.ropes import factors, listed_ropes, rope
from tautwise.size_files import read_sizes
from tautwise.size_records import CONFIDENCES, MEASURES, Size, name_key
from tautwise.strict import Refused, toml_text
from tautwise.text import Ink
from tautwise.text_catalogue import sizes_text

POUND_N = 4.4482216152605
FOOT_M = 0.3048
GRAVITY = 9.80665
GRADES = ("common", "SM", "HS", "EHS")
KILONEWTONS = {  # a published table in kN (checks G9, seen)
    "3/16": (5.115, 8.452, 12.677, 17.748),
    "1/4": (8.452, 14.012, 21.129, 29.581),
    "9/32": (11.432, 18.905, 28.469, 39.812),
    "5/16": (14.234, 23.798, 35.586, 49.820),
}
POUNDS = {  # G9 (seen), G10 (from memory): lb per 1000 ft, then strengths in lb
    "3/16": (73, 1150, 1900, 2850, 3990),
    "1/4": (121, 1900, 3150, 4750, 6650),
    "9/32": (164, 2570, 4250, 6400, 8950),
    "5/16": (205, 3200, 5350, 8000, 11200),
    "3/8": (273, 4250, 6950, 10800, 15400),
    "7/16": (399, 5700, 9350, 14500, 20800),
    "1/2": (517, 7400, 12100, 18800, 26900),
}
ACSR = {  # G11 and G12: diameter in, lb per 1000 ft, rated lb, area in2 or none
    "Linnet": (0.720, 462, 14100, 0.3070),
    "Hawk": (0.858, 656, 19500, 0.4354),
    "Drake": (1.108, 1094, 31500, 0.7264),
    "Cardinal": (1.196, 1229, 33800, 0.8462),
    "Turkey": (0.198, 36.1, 1190, None),
    "Swan": (0.250, 57.4, 1860, None),
    "Sparrow": (0.316, 91.3, 2850, None),
    "Robin": (0.354, 115.1, 3550, None),
    "Raven": (0.398, 145.3, 4380, None),
    "Swanate": (0.257, 67.0, 2360, None),
    "Sparate": (0.325, 105.7, 3640, None),
    "Parakeet": (0.914, 716, 19800, None),
    "Falcon": (1.545, 2042, 54500, None),
}
MODULI = {  # G15, EN 1993-1-11, from memory
    "spiral strand": 150e9,
    "fully locked coil rope": 160e9,
    "strand rope steel core": 100e9,
    "strand rope fibre core": 80e9,
    "parallel wires": 205e9,
    "parallel strands": 195e9,
}
EVERY = [*shipped(), *listed_ropes()]


def one(name: str) -> Size:
    return Catalogue.of().find(name)[0]


# --- published values


@pytest.mark.parametrize("size", KILONEWTONS)
def test_strand_in_kilonewtons_is_the_strand_in_pounds(size):
    """Less than 1 lb apart: the table in kN is rounded to 1 N, a quarter of a pound."""
    for grade, kilonewtons in zip(GRADES, KILONEWTONS[size], strict=True):
        found = one(f"A475 {size} in {grade}")
        assert abs(found.breaking_strength_N - kilonewtons * 1e3) < POUND_N


@pytest.mark.parametrize("size", POUNDS)
def test_strand_of_a475(size):
    weight, *strengths = POUNDS[size]
    above, below = map(int, size.split("/"))
    for grade, pounds in zip(GRADES, strengths, strict=True):
        found = one(f"A475 {size} in {grade}")
        assert found.breaking_strength_N == pytest.approx(pounds * POUND_N, rel=1e-12)
        assert found.weight_N_per_m == pytest.approx(weight * POUND_N / (1000 * FOOT_M), rel=1e-12)
        assert found.diameter_m == pytest.approx(above / below * 0.0254, rel=1e-12)
        confidence = "seen" if size in KILONEWTONS else "from memory"
        assert found.value("breaking_strength").confidence == confidence


@pytest.mark.parametrize("size", POUNDS)
def test_strand_area_is_the_formula_of_its_source_and_fits_its_weight(size):
    """Within 2 %: the lay makes wires 1 to 2 % longer than the strand, and zinc is lighter than steel (7850 kg/m3)."""
    found = one(f"A475 {size} in HS")
    source = found.value("area").source
    wire = float(re.search(r"d = ([0-9.]+) in", source)[1]) * 0.0254
    assert found.area_m2 == pytest.approx(7 * math.pi / 4 * wire**2, rel=3e-4)  # four digits are written
    assert found.weight_N_per_m == pytest.approx(found.area_m2 * 7850 * GRAVITY, rel=0.02)
    assert found.diameter_m == pytest.approx(3 * wire, rel=0.05)


@pytest.mark.parametrize("word", ACSR)
def test_acsr_of_b232(word):
    diameter, weight, pounds, area = ACSR[word]
    found = one(word)
    assert found.name == f"{word} ACSR"
    assert found.diameter_m == pytest.approx(diameter * 0.0254, rel=1e-12)
    assert found.weight_N_per_m == pytest.approx(weight * POUND_N / (1000 * FOOT_M), rel=1e-12)
    assert found.breaking_strength_N == pytest.approx(pounds * POUND_N, rel=1e-12)
    if area is None:
        assert found.area_m2 is None
        assert found.stiffness_N is None
        assert "stiffness" in found.missing
    else:
        assert found.area_m2 == pytest.approx(area * 0.0254**2, rel=1e-12)


@pytest.mark.parametrize(
    ("stranding", "share", "size"), [("26/7", 6.16, "Drake"), ("54/7", 7.71, "Cardinal"), ("6/1", 6.0, "Swan")]
)
def test_acsr_moduli_agree_with_the_mixture_rule(stranding, share, size):
    """G13: (55 m + 190) / (m + 1) within 6.5 % (6/1: 79 beside 74.3 GPa), expansion within 2 %; m: Al over steel."""
    found = one(size)
    assert stranding in found.value("modulus").source
    assert found.modulus_Pa == pytest.approx((55 * share + 190) / (share + 1) * 1e9, rel=0.065)
    assert found.expansion_per_K == pytest.approx((23 * 55 * share + 11.5 * 190) / (55 * share + 190) * 1e-6, rel=0.02)


@pytest.mark.parametrize(("grade", "kilonewtons"), [(1770, 58.8), (1960, 65.1)])
def test_rope_of_the_published_example(grade, kilonewtons):
    """G14: 6x7 with fibre core, 10 mm; as printed, to the last digit."""
    found = rope(f"6x7 fibre core 10 mm {grade}")
    assert round(found.breaking_strength_N / 1e3, 1) == kilonewtons
    assert found.value("mass").value == pytest.approx(0.345, abs=5e-4)
    assert found.weight_N_per_m == pytest.approx(0.345 * GRAVITY, rel=1e-12)
    assert found.area_m2 == pytest.approx(36.9e-6, rel=1e-12)


def test_factors_are_the_table():
    """G14, W C K of Feyrer's table 1.9, typed here a second time."""
    table = {
        "6x7": ".345,.369,.332/.384,.432,.359",
        "6x19": ".359,.384,.330/.400,.449,.356",
        "8x19": ".340,.349,.293/.407,.457,.356",
        "6x36": ".367,.393,.330/.409,.460,.356",
        "8x36": ".348,.357,.293/.417,.468,.356",
        "18x7": ".382,.408,.328/.401,.433,.328",
        "34x7": ".390,.416,.318/.401,.428,.318",
    }
    wanted = {}
    for construction, cores in table.items():
        for core, numbers in zip(("fibre core", "steel core"), cores.split("/"), strict=True):
            wanted[construction, core] = tuple(map(float, numbers.split(",")))
    wanted["6x7", "strand core"] = (None, None, 0.388)
    assert {(row.construction, row.core): (row.W, row.C, row.K) for row in factors()} == wanted


@pytest.mark.parametrize("kind", MODULI)
def test_moduli_of_en_1993(kind):
    found = one(f"EN 1993-1-11 {kind}")
    assert found.modulus_Pa == pytest.approx(MODULI[kind], rel=1e-12)
    assert found.expansion_per_K == pytest.approx(12e-6, rel=1e-12)
    assert found.missing == ("weight", "stiffness")
    assert {value.confidence for value in found.values} == {"from memory"}


# --- every row


def test_a_source_that_is_a_standard_names_its_table_or_says_that_it_is_not_noted():
    for size in shipped():
        for value in size.values:
            if value.source.startswith("ASTM"):
                assert re.search(r"\btable\b", value.source), (size.name, value.key, value.source)


def test_every_value_has_a_source():
    for size in EVERY:
        assert size.values
        for value in size.values:
            assert value.source
            assert value.confidence in CONFIDENCES, (size.name, value)
            assert MEASURES[value.key].read(value.written) == value.value
        assert "names no source" not in " ".join(value.source for value in size.values)


@pytest.mark.parametrize("kind", dict.fromkeys(size.kind for size in EVERY))
def test_every_size_is_plausible(kind):
    for size in EVERY:
        if size.kind == kind:
            assert_plausible(size)


def assert_plausible(size: Size) -> None:
    """By hand: medium-hard copper breaks under 3.7 km of itself, the strongest steel wire under 28 km.

    Aluminium alone has 2.7 g/cm3, copper 8.9. Strands fill 35 % to all of their circle. Fibre cores and grease add up
    to 25 % to steel's 7.85 g/cm3.
    """
    if size.weight_N_per_m is not None and size.breaking_strength_N is not None:
        assert 3.5e3 < size.breaking_strength_N / size.weight_N_per_m < 30e3
        density = size.weight_N_per_m / GRAVITY / (math.pi / 4 * size.diameter_m**2)
        assert 2200 < density < 9000
    if size.area_m2 is not None:
        assert 0.35 < size.area_m2 / (math.pi / 4 * size.diameter_m**2) < 1.0
        assert 150e6 < size.breaking_strength_N / size.area_m2 < 2160e6
        metal = size.weight_N_per_m / GRAVITY / size.area_m2
        assert 3000 < metal < 1.25 * 7850
    if size.modulus_Pa is not None:
        assert 50e9 < size.modulus_Pa < 210e9
        assert 11e-6 < size.expansion_per_K < 24e-6


def test_names_are_unique():
    names = [name_key(name) for size in shipped() for name in (size.name, *size.aliases)]
    assert len(names) == len(set(names))


def test_every_name_finds_its_size():
    for size in EVERY:
        for name in (size.name, *size.aliases, size.name.upper().replace(" ", "  "), f" {size.name.casefold()} "):
            assert one(name).name == size.name


@pytest.mark.parametrize(
    ("name", "problem"),
    [
        ("Drakke", 'did you mean "Drake"?'),
        ("A475 3/8 in EHSS", 'did you mean "A475 3/8 in EHS"?'),
        ("spiral strnd", 'did you mean "spiral strand"?'),
        ("zzzzzz", '"tautwise sizes" lists them'),
        ("6x18 steel core 10 mm 1770", 'there is no construction "6x18"; did you mean'),
        ("6x19 steal core 10 mm 1770", 'did you mean "steel core"?'),
        ("6x19 steel core 10 1770", '"6x19 steel core 10 1770" is no rope'),
        ("6x19 steel core 10 kN 1770", '"10 kn" is not understood'),
        ("6x19 steel core 10 mm 1700", "1700 is no grade"),
        ("6x19 steel core 300 mm 1770", "300 mm is no diameter"),
        ("6x19 strand core 10 mm 1770", 'has no "strand core"'),
    ],
)
def test_an_unknown_name_is_refused_with_the_nearest(name, problem):
    with pytest.raises(Refused) as caught:
        Catalogue.of().find(name)
    if "kn" not in problem:
        assert problem in caught.value.problem
    else:
        assert "kn" in caught.value.problem.casefold()


# --- lists


def test_sizes_filters():
    strong = tw.sizes(kind="steel strand", diameter="9 mm to 12 mm", strength=">= 60 kN")
    assert [size.name for size in strong] == ["A475 3/8 in EHS", "A475 7/16 in HS", "A475 7/16 in EHS"]
    assert tw.sizes("EHS", diameter="0.375 in") == tw.sizes("A475 3/8 in EHS")
    assert {size.kind for size in tw.sizes(kind="wire rope", diameter="<= 8 mm")} == {"wire rope"}
    assert len(tw.sizes()) == len(shipped())
    with pytest.raises(InputError, match='did you mean "ACSR"'):
        tw.sizes(kind="ACRS")
    with pytest.raises(InputError, match="a length, a range or a bound"):
        tw.sizes(diameter=">= 10 kN")


def test_sizes_as_a_data_frame():
    pytest.importorskip("pandas")
    frame = tw.sizes("acsr").to_dataframe()
    assert list(frame.name[:2]) == ["Turkey ACSR", "Swan ACSR"]
    assert frame.diameter_m.min() > 0


def test_a_record_makes_the_round_trip():
    for size in (one("Drake"), one("6x7 strand core 12 mm 1960")):
        assert Size.from_json(size.to_json()) == size


def test_the_commands_json_csv_and_text(capsys):
    assert cli.run(["sizes", "drake", "--json"]) == 0
    document = json.loads(capsys.readouterr().out)
    assert document["format"] == "tautwise-sizes 1"
    assert document["sizes"][0]["values"][0]["written"] == "1.108 in"
    assert cli.run(["sizes", "--kind", "ACSR", "--csv"]) == 0
    rows = list(csv.DictReader(io.StringIO(capsys.readouterr().out)))
    assert float(next(row for row in rows if row["name"] == "Drake ACSR")["area_m2"]) == one("Drake").area_m2
    assert cli.run(["sizes", "drakes", "--sources"]) == 2
    assert 'did you mean "Drake"?' in capsys.readouterr().err
    assert cli.run(["sizes", "--strength", ">= 9 MN"]) == 0
    assert "No size is like this" in capsys.readouterr().out
    assert cli.run(["sizes"]) == 0
    assert "6x19 steel core 16 mm 1770" in capsys.readouterr().out


# --- a user's own files

OWN = """\
# from the certificates
name,kind,diameter [mm],area,mass [kg/m],modulus [GPa],breaking_strength [kN],source,confidence,modulus_source
=my rope,wire rope,12,55 mm^2,0.5,95,80,certificate 7,seen,own test
Drake,ACSR,28.1,468 mm^2,1.6,,140,another table,from memory,
"""
PROJECT = """\
format = "tautwise 1"
[line]
size = "{size}"
{more}

[[support]]
name = "A"
station = "0 m"
elevation = "10 m"

[[support]]
name = "B"
station = "100 m"
elevation = "10 m"

[stringing]
temperature = "15 degC"
horizontal_tension = "8 kN"

[[condition]]
name = "hot"
temperature = "40 degC"
"""


def project(folder, size: str, more: str = "", own: str = OWN) -> tw.Project:
    (folder / "own.csv").write_text(own, encoding="utf-8")
    file = folder / "p.taut.toml"
    file.write_text(PROJECT.format(size=size, more=more), encoding="utf-8")
    return tw.load(file)


def refused(folder, size: str, more: str = "", own: str = OWN) -> list[str]:
    with pytest.raises(InputError) as caught:
        project(folder, size, more, own)
    return [str(fault).replace(str(folder), "FOLDER") for fault in caught.value.faults]


def test_a_size_fills_the_line(tmp_path):
    line = project(tmp_path, "drake").line
    drake = one("Drake")
    assert (line.size, line.name) == ("drake", "Drake ACSR")
    assert line.diameter_m == drake.diameter_m
    assert line.weight_N_per_m == drake.weight_N_per_m
    assert line.stiffness_N == drake.stiffness_N
    assert line.expansion_per_K == drake.expansion_per_K
    assert line.breaking_strength_N == drake.breaking_strength_N


@pytest.mark.parametrize(
    ("given", "attribute", "value"),
    [
        ('diameter = "30 mm"', "diameter_m", 0.03),
        ('weight = "17 N/m"', "weight_N_per_m", 17.0),
        ('mass = "2 kg/m"', "weight_N_per_m", 2 * GRAVITY),
        ('stiffness = "30 MN"', "stiffness_N", 30e6),
        ('modulus = "60 GPa"', "modulus_Pa", 60e9),
        ('expansion = "20e-6 / K"', "expansion_per_K", 20e-6),
        ('breaking_strength = "100 kN"', "breaking_strength_N", 100e3),
        ('name = "mine"', "name", "mine"),
    ],
)
def test_keys_of_the_file_override_the_size(tmp_path, given, attribute, value):
    made = project(tmp_path, "drake", given)
    assert getattr(made.line, attribute) == pytest.approx(value, rel=1e-12) if attribute != "name" else value
    key = given.partition(" ")[0]
    if key != "name":
        origin = next(each for each in made.origins if each.what == f"line.{key}")
        assert origin.source.startswith(f"{made.source}:4, instead of ")
    assert made.settle("hot").settled


def test_a_later_file_wins_and_the_result_says_so(tmp_path):
    made = project(tmp_path, "DRAKE", 'catalogue = ["own.csv"]\nmodulus = "70 GPa"\nexpansion = "19e-6 / K"')
    assert made.line.diameter_m == pytest.approx(0.0281)
    assert made.size.place == f"{tmp_path}/own.csv:4"
    (warning,) = made.warnings
    assert warning == (
        f'{made.source}:3: line.size: "Drake" is taken from {tmp_path}/own.csv:4, not from sizes/astm_b232.csv:14'
    )
    assert made.window().warnings[:1] == made.warnings
    files = [tmp_path / "p.taut.toml", tmp_path / "own.csv"]
    listed = "".join(f"{hashlib.sha256(file.read_bytes()).hexdigest()}  {file.name}\n" for file in files)
    assert made.input_sha256 == hashlib.sha256(listed.encode()).hexdigest()


def test_an_own_value_has_its_own_source(tmp_path):
    made = project(tmp_path, "=my rope", 'catalogue = ["own.csv"]\nexpansion = "12e-6 / K"')
    origins = {each.what: each for each in made.origins}
    assert origins["line.modulus"].source == "own test"
    assert origins["line.modulus"].confidence == "not stated"
    assert origins["line.mass"].source == "certificate 7"
    assert origins["line.mass"].confidence == "seen"


def test_a_name_that_is_a_formula_stays_inert(tmp_path, capsys):
    (tmp_path / "own.csv").write_text(OWN, encoding="utf-8")
    assert cli.run(["sizes", "=my rope", "--catalogue", str(tmp_path / "own.csv"), "--csv"]) == 0
    out = capsys.readouterr().out
    assert next(csv.reader(io.StringIO(out.splitlines()[1])))[0] == "'=my rope"


@pytest.mark.parametrize(
    ("size", "more", "problem"),
    [
        ("Drakke", "", 'FOLDER/p.taut.toml:3: line.size: there is no size "Drakke"; did you mean "Drake"?'),
        ("Swan", "", 'FOLDER/p.taut.toml:3: line.size: "Swan ACSR" gives no area, so the line has no stiffness; '
         'expected area, or stiffness, beside it, for example area = "150 mm^2"'),
        ("Falcon", 'expansion = "2e-5 / K"',
         'FOLDER/p.taut.toml:3: line.size: "Falcon ACSR" gives no area and no modulus, so'),
        ("GO 95 copper 0 HD", 'expansion = "2e-5 / K"',
         'line.size: "GO 95 copper 0 AWG HD" gives no modulus, so the line has no stiffness'),
        ("spiral strand", 'stiffness = "9 MN"', 'line.size: "EN 1993-1-11 spiral strand" gives no weight; expected'),
        ("Drake", 'catalogue = ["none.csv"]', 'FOLDER/p.taut.toml:4: line.catalogue[0]: there is no file "none.csv"'),
        ("Drake", 'catalogue = ["../x.csv"]', 'line.catalogue[0]: "../x.csv" is outside the project\'s folder'),
        ("Drake", 'catalogue = "own.csv"', 'line.catalogue: the text "own.csv" where a list is needed'),
        ("Drake", 'weight = "3 N/m"\nmass = "1 kg/m"', "line.mass: weight and mass are given at once"),
    ],
)  # fmt: skip
def test_what_cannot_be_used_is_refused(tmp_path, size, more, problem):
    faults = refused(tmp_path, size, more)
    assert len(faults) == 1, faults
    assert problem in faults[0]


def test_a_line_is_whole_with_the_users_area(tmp_path):
    made = project(tmp_path, "Swan", 'area = "24.7 mm^2"')
    assert made.line.stiffness_N == pytest.approx(79e9 * 24.7e-6, rel=1e-12)
    assert project(tmp_path, "Falcon", 'stiffness = "50 MN"\nexpansion = "20e-6 / K"').line.stiffness_N == 50e6


@pytest.mark.parametrize(
    ("old", "new", "problem"),
    [
        ("12,55", "-12,55", '3: diameter: "-12 mm" is negative; expected a length above 0, for example 16 mm'),
        ("55 mm^2", "55", "3: area: a number without a unit; expected an area"),
        ("55 mm^2", "55 N", '3: area: "55 N" is a force; expected an area'),
        ("0.5,95", "1e999,95", "3: mass: "),
        (",0.5,95", ",nan,95", '3: mass: "nan kg/m" is not finite'),
        ("12,55", "1_2,55", "3: diameter: "),
        ("=my rope,", '"=my rope,', "3: a quote that is not closed on its line"),
        (",95,80", ",95", "3: 9 cells under 10 columns"),
        ("diameter [mm]", "diametre [mm]", '2: "diametre [mm]" is no column of sizes; did you mean "diameter"?'),
        ("mass [kg/m]", "source", '2: the column "source" stands here twice'),
        ("name,kind", "title,kind", '2: "title" is no column of sizes'),
        ("source,confidence", "source [m],confidence", '2: "source [m]" is no column of sizes'),
        (",seen,", ",certain,", '3: confidence: "certain" is no confidence; expected seen, from memory, defined'),
        ("Drake,ACSR", ",ACSR", "4: name: an empty text; expected a name"),
        ("Drake,ACSR", "=MY ROPE,ACSR", '4: name: "=MY ROPE" is the name of another size too, in line 3'),
        ("Drake,ACSR,28.1,468 mm^2,1.6,,140", "Drake,ACSR,,,,,", '4: name: "Drake" has no value'),
        ("certificate 7", "certi\x1bficate", "3: source: "),
        ("certificate 7", 'certificate 7"', "3: a quote that is not closed on its line"),
    ],
)
def test_bad_rows_are_refused_with_their_line(tmp_path, old, new, problem):
    assert OWN.count(old) == 1
    faults = refused(tmp_path, "drake", 'catalogue = ["own.csv"]', OWN.replace(old, new))
    assert any(f"FOLDER/own.csv:{problem}" in fault for fault in faults), faults


def test_two_weights_in_a_row_are_refused():
    with pytest.raises(InputError, match="weight and mass are given at once"):
        read_sizes("name,weight,mass\nx,1 N/m,1 kg/m\n", "f")


def test_the_faults_of_a_file_come_together_and_capped(tmp_path):
    own = OWN + "bad,x,-1,,,,,,,\n" * 60
    faults = refused(tmp_path, "drake", 'catalogue = ["own.csv"]', own)
    assert len(faults) == 21
    assert "40 more faults of this file" in faults[-1]


def test_files_too_large_or_none_are_refused(tmp_path):
    assert "too large" in refused(tmp_path, "drake", 'catalogue = ["own.csv"]', "#" * 2_000_001)[0]
    assert "holds no table" in refused(tmp_path, "drake", 'catalogue = ["own.csv"]', "# nothing\n")[0]
    assert "the file is empty" in refused(tmp_path, "drake", 'catalogue = ["own.csv"]', "\n")[0]
    assert "not a text file" in refused(tmp_path, "drake", 'catalogue = ["own.csv"]', "a\0b")[0]


def test_an_included_file_names_its_own_catalogue(tmp_path):
    (tmp_path / "lines").mkdir()
    (tmp_path / "lines" / "own.csv").write_text(OWN, encoding="utf-8")
    (tmp_path / "lines" / "line.toml").write_text(
        '[line]\nsize = "=my rope"\nexpansion = "1e-5 / K"\ncatalogue = ["own.csv"]\n', encoding="utf-8"
    )
    text = PROJECT.format(size="", more="").replace('[line]\nsize = ""\n', 'include = "lines/line.toml"\n')
    (tmp_path / "p.taut.toml").write_text(text, encoding="utf-8")
    made = tw.load(tmp_path / "p.taut.toml")
    assert made.size.place == f"{tmp_path}/lines/own.csv:3"


def test_keyword_arguments_take_a_size():
    made = tw.Project(
        line={"size": "Drake ACSR"},
        support=[{"name": n, "station": s, "elevation": "9 m"} for n, s in (("A", "0 m"), ("B", "99 m"))],
        stringing={"temperature": "15 degC"},
        condition=[{"name": "bare", "temperature": "15 degC"}],
    )
    assert made.line.weight_N_per_m == one("Drake").weight_N_per_m


@given(st.text(max_size=60), st.text(max_size=60))
def test_any_text_is_read_or_refused(head, row):
    try:
        sizes = read_sizes(f"{head}\n{row}\n", "f.csv")
    except InputError as error:
        assert error.faults
    else:
        assert all(isinstance(size, Size) for size in sizes)


@given(st.text(max_size=40))
def test_any_name_is_found_or_refused(name):
    try:
        assert isinstance(one(name), Size)
    except Refused as refused:
        assert refused.problem


@given(st.text(alphabet="0123456789x mstelcorfib.", max_size=30))
def test_any_rope_is_computed_or_refused(name):
    try:
        assert rope(name).breaking_strength_N > 0
    except Refused as refused:
        assert refused.problem


NAMES = ["my rope", "Bob's rope", 'rope 6"', "a\\b", "$(rm x) `y`", "; ls"]


@pytest.mark.parametrize("name", NAMES)
def test_what_is_to_be_pasted_is_quoted(name):
    cell = '"' + name.replace('"', '""') + '"'
    sizes = read_sizes(f"name,mass [kg/m]\n{cell},0.345\n", "my.csv")
    lines = sizes_text(sizes, Ink(False), sources=False, ropes=False)
    (use,) = (line for line in lines if "under [line]" in line)
    (see,) = (line for line in lines if "--sources" in line)
    written = use[use.index("size = ") : use.index(" under [line]")]
    assert tomllib.loads(written) == {"size": name}
    assert shlex.split(see[see.index("tautwise sizes") :]) == ["tautwise", "sizes", name, "--sources"]


@given(st.text())
def test_any_text_survives_its_toml(text):
    text = text.encode("utf-8", "ignore").decode()  # no lone surrogates, which TOML has none of
    assert tomllib.loads(f"x = {toml_text(text)}") == {"x": text}
