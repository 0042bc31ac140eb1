"""Bad input about sheaves, stringing over them and the crew sheet, refused at its key with what was expected."""

from __future__ import annotations

import pytest

from tautwise.cli import run
from tautwise.errors import InputError, NotSettledError
from tautwise.model import load

GOOD = """\
format = "tautwise 1"

[line]
weight = "11.9 N/m"
stiffness = "22.5 MN"

[[support]]
name = "A"
station = "0 m"
elevation = "24 m"

[[support]]
name = "B"
station = "150 m"
elevation = "26 m"
hold = "sheave"
length = "0.5 m"
weight = "100 N"
friction = 0.02

[[support]]
name = "C"
station = "300 m"
elevation = "25 m"

[stringing]
temperature = "15 degC"
horizontal_tension = "20 kN"
method = "over sheaves"
clip = "plumb"
friction = 0.01
end_allowance = "2 m"

[[condition]]
name = "bare"
temperature = "15 degC"
"""

# name: (text replaced, by what, key, what is wrong, what is expected)
FAULTS = {
    "sheave next to nothing, first": ('elevation = "24 m"', 'elevation = "24 m"\nhold = "sheave"', "support.A.hold",
                                      "the first support is a sheave, next to nothing", "an anchor or a post at both"),
    "sheave next to nothing, last": ('elevation = "25 m"', 'elevation = "25 m"\nhold = "sheave"', "support.C.hold",
                                     "the last support is a sheave, next to nothing", "an anchor or a post at both"),
    "negative friction": ("friction = 0.02", "friction = -0.02", "support.B.friction", "-0.02", "0"),
    "friction above 1": ("friction = 0.02", "friction = 2", "support.B.friction", "2", "1"),
    "friction of a hanger": ('hold = "sheave"', 'hold = "hanger"', "support.B.friction",
                             "a hanger has no friction; friction belongs to a sheave", ""),
    "length of an anchor": ('elevation = "24 m"', 'elevation = "24 m"\nlength = "1 m"', "support.A.length",
                            "an anchor has no length; the length of its link belongs to a hanger or a sheave", ""),
    "weight of a fixed sheave": ('length = "0.5 m"\n', "", "support.B.weight", "a sheave without a link",
                                 "a length beside it"),
    "sheave with a spring": ("friction = 0.02", 'stiffness_along = "1 kN/m"', "support.B.stiffness_along",
                             "a sheave has no stiffness_along; a spring rate belongs to a post", ""),
    "misspelt hold": ('hold = "sheave"', 'hold = "sheeve"', "support.B.hold", 'did you mean "sheave"?', "anchor"),
    "misspelt method": ('method = "over sheaves"', 'method = "over sheeves"', "stringing.method",
                        'did you mean "over sheaves"?', "clamped or over sheaves"),
    "clip of a clamped line": ('method = "over sheaves"\nclip = "plumb"\nfriction = 0.01', 'clip = "plumb"',
                               "stringing.clip", "clip belongs to a line strung over",
                               'method = "over sheaves"'),
    "friction of a clamped line": ('method = "over sheaves"\nclip = "plumb"\n', "", "stringing.friction",
                                   "friction belongs to a line strung over", 'method = "over sheaves"'),
    "negative stringing friction": ("friction = 0.01", "friction = -0.01", "stringing.friction", "-0.01", "0"),
    "unknown clip": ('clip = "plumb"', 'clip = "where it hangs"', "stringing.clip", "where it hangs",
                     "plumb or where it lies"),
    "a length of each span": ('horizontal_tension = "20 kN"', 'natural_length = ["150 m", "150 m"]',
                              "stringing.natural_length", "a length of each span leaves nothing to run",
                              "one for the whole line"),
    "negative allowance": ('end_allowance = "2 m"', 'end_allowance = "-2 m"', "stringing.end_allowance", "-2", "0"),
    "allowance without unit": ('end_allowance = "2 m"', "end_allowance = 2", "stringing.end_allowance",
                               "without a unit", "length"),
}  # fmt: skip


def written(tmp_path, old="", new=""):
    assert old in GOOD
    file = tmp_path / "line.taut.toml"
    file.write_text(GOOD.replace(old, new, 1) if old else GOOD)
    return file


def test_the_good_one_is_good(tmp_path):
    assert load(written(tmp_path)).warnings == ()


@pytest.mark.parametrize("name", FAULTS)
def test_one_fault(tmp_path, name):
    old, new, path, problem, expected = FAULTS[name]
    with pytest.raises(InputError) as caught:
        load(written(tmp_path, old, new))
    (fault,) = caught.value.faults
    assert fault.line is not None
    assert fault.path.replace('"', "") == path
    assert problem in fault.problem
    assert expected in fault.expected


def test_what_is_hardly_meant_is_said(tmp_path):
    def warned(old, new):
        return "\n".join(load(written(tmp_path, old, new)).warnings)

    assert "rope on a fixed rod" in warned("friction = 0.02", "friction = 0.5")
    alone = 'hold = "sheave"\nlength = "0.5 m"\nweight = "100 N"\nfriction = 0.02\n'
    assert "no support between anchors" in warned(alone, "")


def test_a_load_beside_a_sheave(tmp_path):
    load_lines = """
load = [
    { per_length = "1 N/m", from = "149.6 m", to = "150.4 m" },
    { per_length = "200 N/m", from = "170 m", to = "290 m" },
]
"""
    file = tmp_path / "line.taut.toml"
    file.write_text(GOOD + load_lines.lstrip())
    with pytest.raises(NotSettledError, match="would run over a sheave: let the load begin further") as caught:
        load(file).settle()
    assert caught.value.status == "over_sheave"


def test_a_lifted_sheave_is_found(tmp_path):
    file = tmp_path / "line.taut.toml"
    file.write_text(GOOD.replace('elevation = "26 m"', 'elevation = "10 m"'))
    from tautwise.solve import settle_report

    report = settle_report(load(file))
    assert any("lifts out of the sheave at 'B' in 'bare'" in text for text in report.warnings)
    assert report.conditions[0].supports[1].down_N < 0.0
    assert any("lifts out of the sheave at 'B' while it is strung" in text for text in load(file).sheet().warnings)


@pytest.mark.parametrize(
    ("options", "words"),
    [
        (["--temperature", "15"], "without a unit"),
        (["--temperature", "15 kN"], "is a force"),
        (["--temperature", "900 degC"], "from -273.15 to 500 degC"),
        (["--pull", "-3 kN"], "no pull"),
        (["--csv", "--json"], "exclude one another"),
    ],
)
def test_bad_options_of_the_sheet(tmp_path, capsys, options, words):
    assert run(["sheet", str(written(tmp_path)), *options]) == 2
    assert words in capsys.readouterr().err


def test_a_sheet_needs_a_stringing(tmp_path, capsys):
    assert run(["sheet", str(written(tmp_path, 'horizontal_tension = "20 kN"\n'))]) == 2
    assert "no stringing rule" in capsys.readouterr().err
    for given in ([float("nan")], ["x"], [None], range(300)):
        with pytest.raises(InputError):
            load(written(tmp_path)).sheet(given)
