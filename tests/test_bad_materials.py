"""Curved lines, creep and history that cannot be meant: refused with file, line, key, problem and expectation."""

from __future__ import annotations

from pathlib import Path

import pytest

from tautwise.errors import InputError
from tautwise.model import load

GOOD = (Path(__file__).resolve().parents[1] / "examples" / "valley_conductor.taut.toml").read_text()
OUTER = 'initial = ["-512 psi", "4.902e4 psi", "-1.18e4 psi", "-5.76e4 psi"]'

# Replaced text, its replacement, key path, problem, expectation. What the core refuses comes when it settles.
FILE_CASES = {
    "bare coefficients": (OUTER, "initial = [-512, 4.902e4]", "line.outer.initial", "[0]: a number without", "a0"),
    "one coefficient": (OUTER, 'initial = ["4 psi"]', "line.outer.initial", "a list of 1 stresses", "2 to 5 stresses"),
    "no list": (OUTER, 'initial = "4 psi"', "line.outer.initial", "where a list of stresses", "2 to 5"),
    "of another kind": (OUTER, 'initial = ["4 psi", "3 N"]', "line.outer.initial", '[1]: "3 N" is a force', "2 to 5"),
    "no modulus": ('final_modulus = "6.895e6 psi"\n', "", "line.outer.final_modulus", "missing", "pressure"),
    "no area": ('area = "0.7264 in^2" ', "# ", "line.core", "without the area", "area in [line]"),
    "stiffness too": ("weight =", 'stiffness = "20 MN"\nweight =', "line.stiffness", "at once", "[line.core]"),
    "half a line": ("[line.outer]", "[line.curve]", "line.core", "curve and core", "[line.curve] alone"),
    "negative creep": ("weight =", 'creep_strain = "-0.01 %"\nweight =', "line.creep_strain", "negative", "0 or more"),
    "creep twice": ("weight =", 'creep_strain = "0.01 %"\nweight =', "line.core.creep", "at once", "creep told once"),
    "unknown state": ('state = "final"', 'state = "finale"', ".state", "not known", "initial, final"),
    "unknown met": ('"cold"]', '"colt"]', "history.conditions[1]", 'there is no condition "colt"', ""),
    "no everyday": ('creep_condition = "everyday"', 'creep_condition = "daily"', "history.creep_condition",
                         'there is no condition "daily"', ""),
    "unknown history": ("creep_condition =", "creep_conditoin =", "history.creep_conditoin", "unknown", ""),
    "range in per cent": ('final_modulus = "6.895e6', 'valid_to = 0.45\nfinal_modulus = "6.895e6',
                          "line.outer.valid_to", "too large", "at most 0.2"),
}  # fmt: skip
CORE_CASES = {
    "falls": ('"-5.76e4 psi"]', '"-9.76e5 psi"]', "line.outer.initial", "a curve that grows from 0 to valid_to"),
    "carries nothing": ('"-512 psi"', '"-51200 psi"', "line.outer.initial", "a curve that carries something"),
    "creep falls": ('creep = ["0 psi", "16.30e3 psi"]', 'creep = ["0 psi", "-16 psi"]', "line.outer.creep",
                    "a curve that grows"),
    "creep shortens": ('creep = ["0 psi", "16.30e3 psi"]', 'creep = ["0 psi", "60e3 psi"]', "line.outer.creep",
                       "creep lengthens"),
    "no expansion like it": ('expansion = "12.8e-6 / degF"', 'expansion = "12.8e-3 / degF"', "line.outer.expansion",
                             "within 1e-3"),
}  # fmt: skip


def project_with(folder, old, new):
    assert old in GOOD, old
    file = folder / "x.taut.toml"
    file.write_text(GOOD.replace(old, new, 1))
    return file


@pytest.mark.parametrize("case", FILE_CASES)
def test_the_file_is_refused(tmp_path, case):
    old, new, path, problem, expected = FILE_CASES[case]
    with pytest.raises(InputError) as caught:
        load(project_with(tmp_path, old, new))
    fault = next((one for one in caught.value.faults if path in one.path and problem in one.problem), None)
    assert fault is not None, str(caught.value)
    assert fault.line
    assert expected in fault.expected


@pytest.mark.parametrize("case", CORE_CASES)
def test_the_core_refuses_at_the_key(tmp_path, case):
    old, new, path, expected = CORE_CASES[case]
    project = load(project_with(tmp_path, old, new))
    with pytest.raises(InputError) as caught:
        project.settle("everyday")
    (fault,) = caught.value.faults
    assert fault.path == path
    assert fault.line
    assert expected in fault.expected


def test_a_modulus_per_percent_is_noticed(tmp_path):
    project = load(project_with(tmp_path, 'final_modulus = "6.895e6 psi"', 'final_modulus = "68.95e3 psi"'))
    (warning,) = project.warnings
    assert "line.outer.final_modulus: 0.0141 times the first slope" in warning


def linear(state, extra=""):
    return f"""
format = "tautwise 1"
[line]
weight = "12 N/m"
stiffness = "20 MN"
{extra}
[[support]]
name = "A"
station = "0 m"
elevation = "9 m"
[[support]]
name = "B"
station = "200 m"
elevation = "9 m"
[stringing]
temperature = "15 degC"
horizontal_tension = "15 kN"
[[condition]]
name = "now"
temperature = "15 degC"
state = "{state}"
"""


@pytest.mark.parametrize(
    ("state", "extra", "problem"),
    [
        ("final", "", "without bedding_in has no final state"),
        ("after creep", 'bedding_in = "0.1 %"', "the line has no creep"),
        ("final", 'bedding_in = "-0.1 %"', "negative"),
        ("after creep", 'creep_law = { coefficient = "0.001 %", exponent = 1.6, time = "10 year" }', "too large"),
        ("after creep", 'creep_law = { coefficient = "0.001 %", exponent = 0.2, time = 87600 }', "without a unit"),
    ],
)
def test_states_that_a_linear_line_does_not_have(tmp_path, state, extra, problem):
    file = tmp_path / "x.taut.toml"
    file.write_text(linear(state, extra))
    with pytest.raises(InputError) as caught:
        load(file)
    assert problem in str(caught.value)


def test_the_power_law_is_what_it_says(tmp_path):
    """10 years are 87,660 h (Julian years); c t^n with c = 0.001 %, n = 0.2."""
    file = tmp_path / "x.taut.toml"
    law = 'creep_law = { coefficient = "0.001 %", exponent = 0.2, time = "10 year" }'
    file.write_text(linear("after creep", law))
    span = load(file).settle("now").spans[0]
    assert span.permanent_strain == pytest.approx(1e-5 * 87660.0**0.2, rel=1e-9)
