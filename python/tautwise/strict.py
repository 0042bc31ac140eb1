"""Numbers and names as Tautwise reads them: strictly, so that a slip of the keyboard never becomes a design.

`float()` accepts "1_000", full-width digits, "nan" and turns "1e999" into infinity. None of these is a number here.
Quantities (a number and a unit) are read by :mod:`tautwise.units` on top of this grammar.
"""

from __future__ import annotations

import difflib
import math
import re
from collections.abc import Iterable
from datetime import date
from fractions import Fraction

NUMBER_PATTERN = r"[+-]?(?:[0-9]+(?:\.[0-9]+)?|\.[0-9]+)(?:[eE][+-]?[0-9]{1,3})?"
NUMBER_LENGTH_MOST = 40
SHOWN_LENGTH_MOST = 60

_NUMBER = re.compile(NUMBER_PATTERN)
_DAY = re.compile(r"[0-9]{4}-[0-9]{2}-[0-9]{2}")
_COMMA_NUMBER = re.compile(r"[+-]?[0-9]+,[0-9]+")


class Refused(ValueError):
    """A value that is not what it should be: what is wrong, what is expected and an example.

    >>> Refused("empty", "a name").problem
    'empty'
    """

    def __init__(self, problem: str, expected: str = "", example: str = "") -> None:
        super().__init__(problem)
        self.problem = problem
        self.expected = expected
        self.example = example

    def __reduce__(self) -> tuple[type[Refused], tuple[str, str, str]]:
        return (Refused, (self.problem, self.expected, self.example))


def exact_number(text: str) -> Fraction:
    """Read a decimal number exactly.

    Grammar: an optional sign, ASCII digits with an optional decimal point, an optional exponent; at most 40
    characters; within the range of a double.

    Raises
    ------
    Refused: anything else, with a hint where the slip is a common one.

    >>> exact_number("12.5"), exact_number("-1e-3")
    (Fraction(25, 2), Fraction(-1, 1000))
    >>> exact_number("1_000")
    Traceback (most recent call last):
    ...
    tautwise.strict.Refused: "1_000" is not a number: no underscores within a number
    """
    strict_float(text)
    return Fraction(text)


def strict_float(text: str) -> float:
    """Read a decimal number as the nearest double.

    >>> strict_float("1.5e3")
    1500.0
    >>> strict_float("1e999")
    Traceback (most recent call last):
    ...
    tautwise.strict.Refused: "1e999" is too large for a number
    """
    if len(text) > NUMBER_LENGTH_MOST:
        raise Refused(f"a number of {len(text)} characters; at most {NUMBER_LENGTH_MOST} are read")
    if not _NUMBER.fullmatch(text):
        raise Refused(f'"{shown(text)}" is not a number{_number_hint(text)}')
    value = float(text)
    if math.isinf(value):
        raise Refused(f'"{text}" is too large for a number')
    if value == 0.0 and re.match(r"[^eE]*[1-9]", text):
        raise Refused(f'"{text}" is too small for a number')
    return value


def strict_day(text: str) -> date | None:
    """Read a day as year-month-day; None for any other text, such as a week of ISO 8601.

    >>> strict_day("2027-06-30"), strict_day("2027-W01-1"), strict_day("2027-02-30")
    (datetime.date(2027, 6, 30), None, None)
    """
    try:
        return date.fromisoformat(text) if _DAY.fullmatch(text) else None
    except ValueError:
        return None


def nearest_double(value: Fraction) -> float:
    """The double nearest to an exact value; one that overflows is refused.

    >>> nearest_double(Fraction(1, 3))
    0.3333333333333333
    """
    try:
        return float(value)
    except OverflowError:
        raise Refused("the number is too large") from None


def finite_number(value: object) -> float:
    """A Python or TOML number (not a boolean, not a string) as a finite double.

    >>> finite_number(2)
    2.0
    >>> finite_number(float("nan"))
    Traceback (most recent call last):
    ...
    tautwise.strict.Refused: nan is not a finite number
    """
    if isinstance(value, bool) or not isinstance(value, int | float):
        raise Refused(f"{described(value)} where a number is needed")
    try:
        number = float(value)
    except OverflowError:
        raise Refused("the number is too large") from None
    if not math.isfinite(number):
        raise Refused(f"{number} is not a finite number")
    return number


def shown(text: str, most: int = SHOWN_LENGTH_MOST) -> str:
    """Text from a file made safe to print: control characters escaped, long text cut.

    >>> shown("a" + chr(27) + "[31m")
    'a\\\\x1b[31m'
    >>> shown("x" * 100)[-3:]
    '...'
    """
    return inert(text if len(text) <= most else text[: most - 3] + "...")


def inert(text: str) -> str:
    """Text with every character that a terminal might obey written out: control, format, line ends, lone surrogates.

    >>> inert("red" + chr(27) + "[31m" + chr(0x202E))
    'red\\\\x1b[31m\\\\u202e'
    """
    if text.isprintable():
        return text
    return "".join(char if char.isprintable() else ascii(char)[1:-1] for char in text)


def toml_text(text: str) -> str:
    """A text as it stands in a TOML file.

    >>> print(toml_text('6" strand'))
    "6\\" strand"
    """
    escaped = text.replace("\\", "\\\\").replace('"', '\\"')
    return '"' + "".join(char if char.isprintable() else f"\\U{ord(char):08x}" for char in escaped) + '"'


def described(value: object) -> str:
    """What a value is, in the words of someone who writes a project file.

    >>> described(True), described([1]), described({}), described("12 m"), described(3)
    ('a true/false value', 'a list', 'a table', 'the text "12 m"', 'the number 3')
    """
    if isinstance(value, bool):
        return "a true/false value"
    if isinstance(value, str):
        return f'the text "{shown(value)}"'
    if isinstance(value, int | float):
        return f"the number {_short_number(value)}"
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, list | tuple):
        return "a list"
    return "nothing" if value is None else f"a value of type {type(value).__name__}"


def nearest(word: str, known: Iterable[str]) -> str | None:
    """The known word that `word` was most likely meant to be, or None.

    >>> nearest("elevaton", ["station", "elevation"]), nearest("tpo", ["to", "top"])
    ('elevation', 'top')
    """
    words = list(known)
    folded = {other.casefold(): other for other in words}
    if word.casefold() in folded:
        return folded[word.casefold()]
    swapped = [other for other in words if sorted(other) == sorted(word)]
    found = swapped or difflib.get_close_matches(word[:200], words, n=1, cutoff=0.6)
    return found[0] if found else None


def did_you_mean(word: str, known: Iterable[str]) -> str:
    """The end of a message: which known word was meant, or which there are.

    >>> did_you_mean("hott", ["hot", "cold"])
    'did you mean "hot"?'
    >>> did_you_mean("zzz", ["hot", "cold"])
    'there are "hot", "cold"'
    """
    words = list(known)
    guess = nearest(word, words)
    if guess is not None:
        return f'did you mean "{shown(guess)}"?'
    if not words:
        return "there are none"
    listed = ", ".join(f'"{shown(other)}"' for other in words[:8])
    return f"there are {listed}" + (", ..." if len(words) > 8 else "")


def _short_number(value: float) -> str:
    # An int of thousands of digits cannot even be turned into text.
    if isinstance(value, int) and abs(value) >= 10**20:
        return "with more than 20 digits"
    return repr(value)


def _number_hint(text: str) -> str:
    if "_" in text:
        return ": no underscores within a number"
    if _COMMA_NUMBER.fullmatch(text):
        return ": write a decimal point, and nothing between thousands"
    if text.casefold().strip("+-") in {"nan", "inf", "infinity"}:
        return ": it must be finite"
    if "\N{MINUS SIGN}" in text or "\N{EN DASH}" in text:
        return ': write the minus sign as "-"'
    if "/" in text:
        return ": write a fraction as a decimal number"
    return ""
