"""Quantities: text such as "12.5 kN" or "95 lbf/ft" read as a float in SI.

The number is read by our own strict grammar, the structure of the unit (names, powers, `*`, `/`) too; only the meaning
of a single unit name is asked of pint, whose registry is made when the first unit is met and kept. All arithmetic is
exact until the last step, so "12 in" and "1 ft" give the same double.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from functools import cache, lru_cache
from typing import Any

from tautwise.strict import NUMBER_PATTERN, Refused, described, exact_number, finite_number, nearest_double, shown

UNIT_LENGTH_MOST = 32
QUANTITY_LENGTH_MOST = 100
STANDARD_GRAVITY_M_PER_S2 = 9.80665

_FACTOR = re.compile(r"1|(?P<name>[A-Za-z]{1,24})(?:\^(?P<power>-?[1-9]))?")
_SPELLINGS = (
    ("\N{DEGREE CELSIUS}", "degC"),
    ("\N{DEGREE FAHRENHEIT}", "degF"),
    ("\N{DEGREE SIGN}C", "degC"),
    ("\N{DEGREE SIGN}F", "degF"),
    ("\N{DEGREE SIGN}", "deg"),
    ("\N{SUPERSCRIPT TWO}", "^2"),
    ("\N{SUPERSCRIPT THREE}", "^3"),
    ("\N{MIDDLE DOT}", "*"),
    ("\N{MICRO SIGN}", "u"),
    ("\N{GREEK SMALL LETTER MU}", "u"),
    ("%", "percent"),
    ("**", "^"),
)
_OWN_DEFINITIONS = ("psf = lbf / ft ** 2", "ksf = 1000 * lbf / ft ** 2", "plf = lbf / ft", "klf = 1000 * lbf / ft")
_LENGTH_UNITS = ("m", "mm", "cm", "km", "ft", "in", "yd", "mi")
_FORCE_UNITS = ("N", "kN", "MN", "lbf", "kip", "kgf", "kg", "g", "lb")
_PRESSURE_UNITS = ("Pa", "kPa", "MPa", "GPa", "psi", "ksi", "psf", "plf")
_OTHER_UNITS = ("K", "degC", "degF", "deg", "rad", "mph", "s", "h")
_COMMON_UNITS = (*_LENGTH_UNITS, *_FORCE_UNITS, *_PRESSURE_UNITS, *_OTHER_UNITS)

Base = frozenset[tuple[str, int]]


@dataclass(frozen=True)
class Dimension:
    """A kind of quantity: the SI unit it is kept in, its name in messages, and an example of how it is written.

    >>> DIMENSIONS["N"].words, DIMENSIONS["N"].example
    ('a force', '12.5 kN')
    """

    unit: str
    words: str
    example: str
    base: Base


@dataclass(frozen=True)
class Unit:
    """A unit that was read: its factor to SI, its base units with their powers, and its name if it is a single one."""

    factor: Fraction
    base: Base
    single: str | None


def _dimension(unit: str, words: str, example: str, **base: int) -> Dimension:
    return Dimension(unit, words, example, frozenset(base.items()))


DIMENSIONS: Mapping[str, Dimension] = {
    dimension.unit: dimension
    for dimension in (
        _dimension("m", "a length", "12 m", meter=1),
        _dimension("m^2", "an area", "150 mm^2", meter=2),
        _dimension("N", "a force", "12.5 kN", kilogram=1, meter=1, second=-2),
        _dimension("N/m", "a force per length", "11.9 N/m", kilogram=1, second=-2),
        _dimension("kg/m", "a mass per length", "1.21 kg/m", kilogram=1, meter=-1),
        _dimension("kg/m^3", "a mass per volume", "900 kg/m^3", kilogram=1, meter=-3),
        _dimension("Pa", "a pressure", "400 Pa", kilogram=1, meter=-1, second=-2),
        _dimension("m/s", "a speed", "30 m/s", meter=1, second=-1),
        _dimension("degC", "a temperature", "-20 degC", kelvin=1),
        _dimension("1/K", "an expansion per degree", "11.5e-6 / K", kelvin=-1),
        _dimension("rad", "an angle", "20 deg", radian=1),
        _dimension("s", "a time", "10 year", second=1),
        _dimension("1", "a ratio", "3 %"),
    )
}
_OTHER_DIMENSIONS = (
    _dimension("kg", "a mass", "1 kg", kilogram=1),
    _dimension("m^3", "a volume", "1 m^3", meter=3),
    _dimension("N*m", "a moment", "1 N*m", kilogram=1, meter=2, second=-2),
    _dimension("m/s^2", "an acceleration", "1 m/s^2", meter=1, second=-2),
    _dimension("C", "an electric charge", "1 C", ampere=1, second=1),
)
_WORDS = {dimension.base: dimension.words for dimension in (*_OTHER_DIMENSIONS, *DIMENSIONS.values())}
_FORCES = {DIMENSIONS["N"].base, DIMENSIONS["N/m"].base, DIMENSIONS["Pa"].base}
_MASSES = {_OTHER_DIMENSIONS[0].base, DIMENSIONS["kg/m"].base, frozenset({("kilogram", 1), ("meter", -2)})}


def quantity(value: object, unit: str) -> float:
    """A quantity in SI.

    Parameters
    ----------
    value: text of a number and a unit, or a pint quantity. A plain number is taken only where `unit` is "1".
    unit: the SI unit of the answer, one of the keys of `DIMENSIONS`; temperatures are absolute, in degC.

    Raises
    ------
    Refused: no number, no unit, an unknown unit, or a unit of another dimension.

    >>> quantity("12.5 kN", "N"), quantity("0.75 in", "m"), quantity("3 %", "1"), quantity("-40 degF", "degC")
    (12500.0, 0.01905, 0.03, -40.0)
    >>> quantity("16 mm", "N")
    Traceback (most recent call last):
    ...
    tautwise.strict.Refused: "16 mm" is a length
    """
    wanted = DIMENSIONS[unit]
    try:
        if isinstance(value, str):
            return _from_text(value, wanted)
        if hasattr(value, "magnitude") and hasattr(value, "units"):
            return _from_pint(value, wanted)
        return _from_number(value, wanted)
    except Refused as refused:
        expected = refused.expected or wanted.words
        raise Refused(refused.problem, expected, f'"{wanted.example}"') from None


@lru_cache(maxsize=1024)
def read_unit(text: str) -> Unit:
    """Read the unit of a quantity.

    Names joined by `*` or `/`, each with an optional whole power (`mm^2`, `kg/m^3`, `/ K`); at most 32 characters.

    >>> read_unit("lbf/ft^2") == read_unit("psf")
    False
    >>> read_unit("lbf/ft^2").factor == read_unit("psf").factor
    True
    """
    if len(text) > UNIT_LENGTH_MOST:
        raise Refused(f"a unit of {len(text)} characters; at most {UNIT_LENGTH_MOST} are read")
    factors = _split(text)
    factor = Fraction(1)
    powers: dict[str, int] = {}
    for name, power in factors:
        scale, base = _meaning(name)
        factor *= scale**power
        for base_name, base_power in base:
            powers[base_name] = powers.get(base_name, 0) + power * base_power
    single = factors[0][0] if len(factors) == 1 and factors[0][1] == 1 else None
    return Unit(factor, frozenset(item for item in powers.items() if item[1]), single)


def _from_text(text: str, wanted: Dimension) -> float:
    if len(text) > QUANTITY_LENGTH_MOST:
        raise Refused(f"a text of {len(text)} characters where {wanted.words} is needed")
    number_text, unit_text = number_and_unit(text.strip())
    number = exact_number(number_text)
    if not unit_text:
        if wanted.unit == "1":
            return nearest_double(number)
        raise Refused("a number without a unit")
    unit = read_unit(unit_text)
    if unit.base != wanted.base:
        raise Refused(f'"{shown(text)}" is {_words(unit)}{_dimension_hint(unit, wanted)}')
    if wanted.unit != "degC":
        return nearest_double(number * unit.factor)
    if unit.single is None:
        raise Refused(f'"{shown(text)}" is not a temperature')
    return nearest_double(_celsius(number, unit.single))


def number_and_unit(text: str) -> tuple[str, str]:
    """The number and the unit of a quantity, as written.

    >>> number_and_unit("12.5 kN")
    ('12.5', 'kN')
    """
    if not text:
        raise Refused("an empty text")
    if re.match(r"[+-]?(?:nan|inf|infinity)\b", text, re.IGNORECASE):
        raise Refused(f'"{shown(text)}" is not finite')
    found = re.match(NUMBER_PATTERN + r"(?=$|[^0-9.,_eE]|[eE](?![0-9+-]))", text)
    if found:
        rest = text[found.end() :]
        # "1 000 N" and "1/2 in": a second number is no unit.
        if not re.match(r"\s*[*/]?\s*[0-9]", rest) or re.match(r"\s*1\s*/", rest):
            return found.group(), rest.strip()
    if text[0].isalpha():
        raise Refused(f'"{shown(text)}" does not begin with a number')
    head = re.match(r"\S+(?:\s+[0-9]+)*", text)
    number = head.group() if head else text
    exact_number(re.sub(r"[A-Za-z%]+$", "", number) or number)
    raise Refused(f'"{shown(text)}" is not a number and a unit')


def _from_number(value: object, wanted: Dimension) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float):
        raise Refused(f"{described(value)} where {wanted.words} is needed")
    number = finite_number(value)
    if wanted.unit != "1":
        raise Refused("a number without a unit")
    return number


def _from_pint(value: Any, wanted: Dimension) -> float:
    target = {"1": "dimensionless"}.get(wanted.unit, wanted.unit.replace("^", "**"))
    try:
        converted = float(value.to(target).magnitude)
    except Exception:  # pint's errors differ between its releases and its lazy registries
        raise Refused(f'"{shown(str(value))}" is not {wanted.words}') from None
    return finite_number(converted)


def _split(text: str) -> list[tuple[str, int]]:
    plain = text
    for spelling, name in _SPELLINGS:
        plain = plain.replace(spelling, name)
    if plain.startswith("/"):
        plain = "1" + plain
    pieces = re.split(r"\s*([*/])\s*", plain)
    factors: list[tuple[str, int]] = []
    for index in range(0, len(pieces), 2):
        found = _FACTOR.fullmatch(pieces[index])
        if not found:
            raise Refused(f'"{shown(text)}" is not understood as a unit{_unit_hint(plain)}')
        if found["name"]:
            sign = -1 if index and pieces[index - 1] == "/" else 1
            factors.append((found["name"], sign * int(found["power"] or 1)))
    if not factors:
        raise Refused(f'"{shown(text)}" is not understood as a unit')
    return factors


@cache
def _registry() -> Any:
    import pint

    registry: Any = pint.UnitRegistry(non_int_type=Fraction)
    for definition in _OWN_DEFINITIONS:
        registry.define(definition)
    return registry


@lru_cache(maxsize=1024)
def _meaning(name: str) -> tuple[Fraction, Base]:
    try:
        factor, unit = _registry().get_base_units(name)
    except Exception:  # whatever pint makes of a name that it does not know
        raise Refused(f'there is no unit "{shown(name)}"{_name_hint(name)}') from None
    powers = {str(base): int(power) for base, power in unit._units.items()}
    return Fraction(factor), frozenset(powers.items())


def _celsius(number: Fraction, name: str) -> Fraction:
    registry = _registry()
    return Fraction(registry.Quantity(number, name).to("degC").magnitude)


def _words(unit: Unit) -> str:
    return _WORDS.get(unit.base, "a quantity of another kind")


def _dimension_hint(unit: Unit, wanted: Dimension) -> str:
    if wanted.unit == "degC" and unit.single in {"C", "F"}:
        return f": write deg{unit.single}"
    if wanted.base in _FORCES and unit.base in _MASSES:
        return ": lb and kg are masses, the force is lbf or kgf"
    if wanted.unit == "kg/m" and unit.base == DIMENSIONS["N/m"].base:
        return ": N and lbf are forces, the mass is kg or lb"
    for name in _COMMON_UNITS:
        if unit.single and name != unit.single and name.casefold() == unit.single.casefold():
            return f": did you mean {name}?"
    return ""


def _name_hint(name: str) -> str:
    for known in _COMMON_UNITS:
        if known.casefold() == name.casefold() or known.casefold() == name.casefold().removesuffix("s"):
            return f": did you mean {known}?"
    return ""


def _unit_hint(plain: str) -> str:
    if re.fullmatch(r"deg\s+[CF]", plain):
        return f": write {plain.replace(' ', '')}"
    if re.search(r"[A-Za-z]\s+[A-Za-z]", plain):
        return ': write "*" or "/" between two units'
    return ""
