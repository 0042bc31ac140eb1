"""Numbers and quantities: what is read, exactly, and what is refused."""

from __future__ import annotations

import math
from fractions import Fraction

import pint
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from tautwise.strict import Refused, did_you_mean, exact_number, finite_number, nearest, shown, strict_float
from tautwise.units import DIMENSIONS, quantity, read_unit


@pytest.mark.parametrize("text", ["0", "-0.5", "+3", ".5", "12.50", "1e3", "1E-3", "1.5e+03"])
def test_numbers_of_the_grammar_are_read_as_python_reads_them(text):
    assert strict_float(text) == float(text)
    assert exact_number(text) == Fraction(text)


@pytest.mark.parametrize(
    "text",
    [
        "",
        " 1",
        "1 ",
        "1_0",
        "５",
        "٣",
        "nan",
        "inf",
        "-inf",
        "Infinity",
        "0x1",
        "1e",
        "e3",
        "5.",
        "--1",
        "1,5",
        "1e9999",
    ],
)
def test_what_is_no_number_is_refused(text):
    with pytest.raises(Refused):
        strict_float(text)


@pytest.mark.parametrize(
    ("text", "hint"),
    [
        ("1_000", "no underscores"),
        ("1,000", "decimal point"),
        ("1/2", "decimal number"),
        ("\N{MINUS SIGN}5", '"-"'),
        ("1e999", "too large"),
        ("1e-999", "too small"),
        ("9" * 5000, "5000 characters"),
    ],
)
def test_common_slips_get_a_hint(text, hint):
    with pytest.raises(Refused, match=hint):
        strict_float(text)


@given(st.floats(allow_nan=False, allow_infinity=False))
def test_every_double_is_read_back(number):
    assert strict_float(repr(number)) == number


@given(st.text(max_size=60))
@example("1e5")
@example("１２")
def test_no_text_breaks_the_number_reader(text):
    try:
        value = strict_float(text)
    except Refused:
        return
    assert math.isfinite(value)
    assert text.isascii()


@pytest.mark.parametrize(
    ("text", "unit", "value"),
    [
        ("12.5 kN", "N", 12500.0),
        ("12.5kN", "N", 12500.0),
        ("16 mm", "m", 0.016),
        ("0.75 in", "m", 0.01905),
        ("150 mm^2", "m^2", 150e-6),
        ("150 mm²", "m^2", 150e-6),
        ("0.1 in**2", "m^2", 6.4516e-5),
        ("-20 degC", "degC", -20.0),
        ("-40 degF", "degC", -40.0),
        ("32 degF", "degC", 0.0),
        ("273.15 K", "degC", 0.0),
        ("15 °C", "degC", 15.0),
        ("11.5e-6 / K", "1/K", 11.5e-6),
        ("11.5e-6 1/K", "1/K", 11.5e-6),
        ("11.5e-6 K^-1", "1/K", 11.5e-6),
        ("9e-6 / degF", "1/K", 16.2e-6),
        ("900 kg/m^3", "kg/m^3", 900.0),
        ("3 %", "1", 0.03),
        ("0.03", "1", 0.03),
        ("180 deg", "rad", math.pi),
        ("400 Pa", "Pa", 400.0),
        ("0.4 kN/m^2", "Pa", 400.0),
        ("150 GPa", "Pa", 150e9),
        ("36 km/h", "m/s", 10.0),
        ("1.21 kg/m", "kg/m", 1.21),
    ],
)
def test_quantities(text, unit, value):
    assert quantity(text, unit) == value


# 1 lbf = 0.45359237 kg x 9.80665 m/s2, 1 ft = 0.3048 m: defined values; one rounding each.
LBF = Fraction("0.45359237") * Fraction("9.80665")
FT = Fraction("0.3048")


@pytest.mark.parametrize(
    ("text", "unit", "value"),
    [
        ("95 lbf/ft", "N/m", 95 * LBF / FT),
        ("95 plf", "N/m", 95 * LBF / FT),
        ("6 psf", "Pa", 6 * LBF / FT**2),
        ("6 lbf/ft^2", "Pa", 6 * LBF / FT**2),
        ("17.0e6 psi", "Pa", 17_000_000 * LBF / (FT / 12) ** 2),
        ("3953 lbf", "N", 3953 * LBF),
        ("4 kip", "N", 4000 * LBF),
        ("57 lb/ft^3", "kg/m^3", 57 * Fraction("0.45359237") / FT**3),
        ("0.815 lb/ft", "kg/m", Fraction("0.815") * Fraction("0.45359237") / FT),
        ("40 mph", "m/s", 40 * 5280 * FT / 3600),
        ("0 degF", "degC", Fraction(-160, 9)),
    ],
)
def test_us_units_are_exact_up_to_one_rounding(text, unit, value):
    assert quantity(text, unit) == float(value)


@pytest.mark.parametrize(
    ("value", "unit", "problem", "expected"),
    [
        (3, "m", "a number without a unit", "a length"),
        ("3", "N", "a number without a unit", "a force"),
        ("16 mm", "N", "is a length", "a force"),
        ("5 lb/ft", "N/m", "a mass per length: lb and kg are masses", "a force per length"),
        ("5 kg", "N", "lbf or kgf", "a force"),
        ("20 C", "degC", "write degC", "a temperature"),
        ("20 deg C", "degC", "write degC", "a temperature"),
        ("20 m", "degC", "is a length", "a temperature"),
        ("5 KN", "N", "did you mean kN", "a force"),
        ("5 kn", "N", "did you mean kN", "a force"),
        ("5 furlang", "m", 'no unit "furlang"', "a length"),
        ("20 deg", "1", "an angle", "a ratio"),
        ("5 %", "rad", "is a ratio", "an angle"),
        (True, "m", "true/false", "a length"),
        ([1], "m", "a list", "a length"),
        ({}, "m", "a table", "a length"),
        ("", "m", "empty", "a length"),
        ("m", "m", "does not begin with a number", "a length"),
        ("nan m", "m", "not finite", "a length"),
        ("-inf m", "m", "not finite", "a length"),
        ("1e999 m", "m", "too large", "a length"),
        ("1e300 km^9", "m", "is a quantity of another kind", "a length"),
        ("1 000 m", "m", "not a number", "a length"),
        ("5 m^99999", "m", "not understood as a unit", "a length"),
        ("5 m^9^9^9^9", "m", "not understood as a unit", "a length"),
        ("5 " + "m*" * 40 + "m", "m", "characters", "a length"),
        ("5 N m", "N", "between two units", "a force"),
        ("5 __import__('os')", "m", "not understood as a unit", "a length"),
        (10**400, "1", "too large", "a ratio"),
        (math.inf, "1", "not a finite number", "a ratio"),
    ],
)
def test_refusals_say_what_is_wrong_and_what_is_expected(value, unit, problem, expected):
    with pytest.raises(Refused) as caught:
        quantity(value, unit)
    assert problem in caught.value.problem
    assert expected in caught.value.expected
    assert caught.value.example == f'"{DIMENSIONS[unit].example}"'


def test_overflow_by_the_unit_is_refused():
    with pytest.raises(Refused, match="too large"):
        quantity("1e306 km", "m")


@given(st.text(alphabet="0123456789.eE+-_ /*^%°mkNPadgCFlbft()'\"\\", max_size=40), st.sampled_from(sorted(DIMENSIONS)))
def test_no_text_breaks_the_quantity_reader(text, unit):
    try:
        assert math.isfinite(quantity(text, unit))
    except Refused as refused:
        assert refused.expected


def test_a_unit_is_read_once():
    assert read_unit("lbf/ft") is read_unit("lbf/ft")


def test_pint_quantities_of_any_registry_are_taken():
    ureg = pint.UnitRegistry()
    assert quantity(ureg.Quantity(12.5, "kN"), "N") == pytest.approx(12500.0, rel=1e-15)
    assert quantity(ureg.Quantity(32.0, "degF"), "degC") == pytest.approx(0.0, abs=1e-12)
    assert quantity(ureg.Quantity(3.0, "percent"), "1") == pytest.approx(0.03)
    with pytest.raises(Refused, match="is not a force"):
        quantity(ureg.Quantity(12.5, "m"), "N")
    with pytest.raises(Refused):
        quantity(ureg.Quantity(math.nan, "m"), "m")


def test_finite_numbers():
    assert finite_number(3) == 3.0
    for value in (True, "3", None, math.nan, -math.inf, 10**400):
        with pytest.raises(Refused):
            finite_number(value)


def test_shown_text_is_safe_to_print():
    assert shown("a\x1b[31mb\n") == "a\\x1b[31mb\\n"
    assert len(shown("x" * 1000)) == 60


def test_nearest_words():
    assert nearest("HOT", ["hot", "cold"]) == "hot"
    assert nearest("zzz", ["hot"]) is None
    assert did_you_mean("x", []) == "there are none"
    assert did_you_mean("qqqq", [str(number) for number in range(20)]).endswith(", ...")
