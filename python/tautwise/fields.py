"""The kinds of value that keys of a project file hold, as pydantic types that say what they expect.

Each kind reads a value into SI, refuses anything else with the expectation and an example, and describes itself in the
JSON Schema.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Annotated, Any

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic_core import CoreSchema, PydanticCustomError, core_schema

from tautwise.reader import WrittenNumber
from tautwise.strict import NUMBER_PATTERN, Refused, described, nearest, shown
from tautwise.units import DIMENSIONS, quantity, read_unit

LABEL_LENGTH_MOST = 80
PROSE_LENGTH_MOST = 2000
LENGTHS_MOST = 2000
NAME_EXAMPLE = '"West mast"'


class Kind:
    """Base of the kinds: `read` turns a value into what the model keeps or raises `Refused`."""

    words = "a value"
    example = '"..."'

    def read(self, value: Any) -> Any:
        """The value as the model keeps it."""
        raise NotImplementedError

    def json_schema(self) -> dict[str, Any]:
        """What the JSON Schema says of it."""
        raise NotImplementedError

    def validate(self, value: Any) -> Any:
        """`read`, its refusal as an error that pydantic collects."""
        try:
            return self.read(value)
        except Refused as refused:
            context = {"problem": refused.problem, "expected": self.words, "example": self.example}
            raise PydanticCustomError("tautwise", "{problem}", context) from None

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_plain_validator_function(self.validate)

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> dict[str, Any]:
        return self.json_schema()


@dataclass(frozen=True)
class Measure(Kind):
    """A quantity kept in the SI unit `unit`, with its bounds in that unit and an example as it stands in a file.

    >>> Measure("m", "16 mm", above=0.0).read("0.75 in")
    0.01905
    >>> Measure("m", "16 mm", above=0.0).words
    'a length above 0'
    """

    unit: str
    written: str = ""
    above: float | None = None
    least: float | None = None
    most: float | None = None

    @property
    def words(self) -> str:  # type: ignore[override]
        """What is expected, bounds included."""
        bounds = [
            f"above {self._bound_words(self.above)}" if self.above is not None else "",
            f"of {self._bound_words(self.least)} or more" if self.least is not None else "",
            "and" if self.most is not None and (self.above is not None or self.least is not None) else "",
            f"at most {self._bound_words(self.most)}" if self.most is not None else "",
        ]
        return " ".join(part for part in (DIMENSIONS[self.unit].words, *bounds) if part)

    @property
    def example(self) -> str:  # type: ignore[override]
        """A right value as it stands in a file."""
        written = self.written or DIMENSIONS[self.unit].example
        return written if self.unit == "1" and "%" not in written else f'"{written}"'

    def read(self, value: Any) -> float:
        """The quantity in SI."""
        number = quantity(value, self.unit)
        if self.above is not None and number <= self.above:
            raise Refused(f"{_as_written(value)} is {'zero' if number == self.above == 0.0 else self._too_small}")
        if self.least is not None and number < self.least:
            raise Refused(f"{_as_written(value)} is {self._too_small}")
        if self.most is not None and number > self.most:
            raise Refused(f"{_as_written(value)} is too large")
        return number

    def json_schema(self) -> dict[str, Any]:
        """A text with a pattern; ratios may be plain numbers as well."""
        unit = r"\s*%?\s*" if self.unit == "1" else r"\s*[^\s0-9+\-.].*"
        text = {
            "type": "string",
            "pattern": f"^\\s*{NUMBER_PATTERN}{unit}$",
            "examples": [self.example.strip('"')],
            "description": self.words,
            "maxLength": 100,
        }
        if self.unit != "1":
            return text
        bounds = {"exclusiveMinimum": self.above, "minimum": self.least, "maximum": self.most}
        number = {"type": "number", **{key: bound for key, bound in bounds.items() if bound is not None}}
        return {"anyOf": [number, text], "description": self.words}

    @property
    def _too_small(self) -> str:
        return "negative" if 0.0 in (self.above, self.least) else "too small"

    def _bound_words(self, bound: float) -> str:
        if self.unit == "rad":
            return f"{math.degrees(bound):g} deg"
        return f"{bound:g}" if not bound or self.unit == "1" else f"{bound:g} {self.unit}"


@dataclass(frozen=True)
class Slope(Kind):
    """Rise over run: a ratio, or an angle whose tangent is kept.

    >>> Slope().read("12 %"), round(Slope().read("45 deg"), 12)
    (0.12, 1.0)
    """

    words = "a slope as a ratio or an angle, above 0"
    example = '"12 %"'

    def read(self, value: Any) -> float:
        """The rise over the run."""
        if isinstance(value, str) and self._is_angle(value):
            angle = quantity(value, "rad")
            slope = math.tan(angle) if 0.0 < angle < math.pi / 2 else -1.0
        else:
            slope = quantity(value, "1")
        if slope <= 0.0:
            raise Refused(f"{_as_written(value)} is no slope")
        return slope

    def json_schema(self) -> dict[str, Any]:
        """A number above 0 or a text."""
        text = {"type": "string", "pattern": f"^\\s*{NUMBER_PATTERN}.*$", "examples": ["12 %", "7 deg"]}
        return {"anyOf": [{"type": "number", "exclusiveMinimum": 0}, text], "description": self.words}

    @staticmethod
    def _is_angle(text: str) -> bool:
        try:
            return read_unit(text.strip().lstrip("+-.0123456789eE").strip()).base == DIMENSIONS["rad"].base
        except Refused:
            return False


@dataclass(frozen=True)
class Words(Kind):
    """A text: a name of one line, or prose where `prose`.

    >>> Words("a name", "West mast").read("East mast")
    'East mast'
    """

    what: str
    written: str
    prose: bool = False

    @property
    def words(self) -> str:  # type: ignore[override]
        """What is expected."""
        return self.what

    @property
    def example(self) -> str:  # type: ignore[override]
        """A right value as it stands in a file."""
        return f'"{self.written}"'

    def read(self, value: Any) -> str:
        """The text, which must be printable and neither empty nor long."""
        if not isinstance(value, str) or isinstance(value, WrittenNumber):
            raise Refused(f"{described(value)} where {self.what} is needed")
        most = PROSE_LENGTH_MOST if self.prose else LABEL_LENGTH_MOST
        if len(value) > most:
            raise Refused(f"a text of {len(value)} characters; at most {most} are taken")
        if not value.strip():
            raise Refused("an empty text")
        if not (value.replace("\n", " ") if self.prose else value).isprintable():
            raise Refused(f'"{shown(value)}" holds characters that cannot be printed')
        if not self.prose and value != value.strip():
            raise Refused(f'"{shown(value)}" begins or ends with a space')
        return value

    def json_schema(self) -> dict[str, Any]:
        """A text with its longest length."""
        most = PROSE_LENGTH_MOST if self.prose else LABEL_LENGTH_MOST
        return {"type": "string", "minLength": 1, "maxLength": most, "examples": [self.written]}


@dataclass(frozen=True)
class Choice(Kind):
    """One of a few words; `later` are words that are known but not available yet, with what to use instead.

    >>> Choice(("anchor", "post")).words
    'anchor or post'
    """

    options: tuple[str, ...]
    later: tuple[tuple[str, str], ...] = ()

    @property
    def words(self) -> str:  # type: ignore[override]
        """The options."""
        return ", ".join(self.options[:-1]) + (" or " if len(self.options) > 1 else "") + self.options[-1]

    @property
    def example(self) -> str:  # type: ignore[override]
        """The first option as it stands in a file."""
        return f'"{self.options[0]}"'

    def read(self, value: Any) -> str:
        """The option."""
        if not isinstance(value, str) or isinstance(value, WrittenNumber):
            raise Refused(f"{described(value)} where a word is needed")
        if value in dict(self.later):
            raise Refused(dict(self.later)[value])
        if value not in self.options:
            guess = nearest(value, self.options)
            hint = f'; did you mean "{guess}"?' if guess else ""
            raise Refused(f'"{shown(value)}" is not known{hint}')
        return value

    def json_schema(self) -> dict[str, Any]:
        """An enumeration."""
        return {"type": "string", "enum": list(self.options)}


@dataclass(frozen=True)
class Direction(Kind):
    """The direction of a load: a word, or a vector along the route's axes, which is kept with length 1.

    >>> Direction().read([0, 3, -4])
    (0.0, 0.6, -0.8)
    """

    words = "down, up, across, along or a vector [x, y, z] (ahead, to the left, up)"
    example = '"across"'
    options = ("down", "up", "across", "along")

    def read(self, value: Any) -> str | tuple[float, ...]:
        """The word, or the unit vector."""
        if isinstance(value, str):
            return Choice(self.options).read(value)
        if not isinstance(value, list | tuple) or len(value) != 3:
            raise Refused(f"{described(value)} is no direction")
        vector = tuple(quantity(part, "1") for part in value)
        length = math.hypot(*vector)
        if not 0.0 < length < math.inf:
            raise Refused("a vector that points nowhere")
        return tuple(part / length for part in vector)

    def json_schema(self) -> dict[str, Any]:
        """A word or three numbers."""
        vector = {"type": "array", "items": {"type": "number"}, "minItems": 3, "maxItems": 3}
        return {"anyOf": [{"type": "string", "enum": list(self.options)}, vector], "description": self.words}


@dataclass(frozen=True)
class Lengths(Kind):
    """A natural length of the whole line, or a list with one length for each span.

    >>> Lengths().read("100 ft"), Lengths().read(["100 m", "50 m"])
    (30.48, (100.0, 50.0))
    """

    words = "a length above 0, or a list with one for each span"
    example = '["101.2 m", "98.6 m"]'

    def read(self, value: Any) -> float | tuple[float, ...]:
        """The length or the lengths, m."""
        one = Measure("m", above=0.0)
        if not isinstance(value, list | tuple):
            return one.read(value)
        if not 1 <= len(value) <= LENGTHS_MOST:
            raise Refused(f"a list of {len(value)} lengths")
        return tuple(self._at(one, number, part) for number, part in enumerate(value))

    def json_schema(self) -> dict[str, Any]:
        """A quantity or a list of them."""
        one = Measure("m", "101.2 m", above=0.0).json_schema()
        return {"anyOf": [one, {"type": "array", "items": one, "minItems": 1}], "description": self.words}

    @staticmethod
    def _at(one: Measure, number: int, part: Any) -> float:
        try:
            return one.read(part)
        except Refused as refused:
            raise Refused(f"[{number}]: {refused.problem}") from None


def _as_written(value: Any) -> str:
    return f'"{shown(value)}"' if isinstance(value, str) else shown(str(value))


Coordinate = Annotated[float, Measure("m", "120 m")]
PositiveLength = Annotated[float, Measure("m", "16 mm", above=0.0)]
Elevation = Annotated[float, Measure("m", "24 m")]
Height = Annotated[float, Measure("m", "18 m", least=0.0)]
Distance = Annotated[float, Measure("m", "6.5 m", least=0.0)]
Sag = Annotated[float, Measure("m", "6.7 m", above=0.0)]
HangerLength = Annotated[float, Measure("m", "1.8 m", above=0.0)]
CatenaryConstant = Annotated[float, Measure("m", "1800 m", above=0.0)]
Thickness = Annotated[float, Measure("m", "15 mm", least=0.0)]
AlongLine = Annotated[float, Measure("m", "75 m", least=0.0)]
Area = Annotated[float, Measure("m^2", "150 mm^2", above=0.0)]
PositiveForce = Annotated[float, Measure("N", "20 kN", above=0.0)]
AxialStiffness = Annotated[float, Measure("N", "22.5 MN", above=0.0)]
SomeForce = Annotated[float, Measure("N", "150 N", least=0.0)]
AnyForce = Annotated[float, Measure("N", "2 kN")]
PositiveForcePerLength = Annotated[float, Measure("N/m", "11.9 N/m", above=0.0)]
SomeForcePerLength = Annotated[float, Measure("N/m", "4.4 N/m", least=0.0)]
AnyForcePerLength = Annotated[float, Measure("N/m", "30 N/m")]
SpringRate = Annotated[float, Measure("N/m", "250 kN/m", above=0.0)]
MassPerLength = Annotated[float, Measure("kg/m", "1.21 kg/m", above=0.0)]
Modulus = Annotated[float, Measure("Pa", "150 GPa", above=0.0)]
Expansion = Annotated[float, Measure("1/K", "11.5e-6 / K")]
Temperature = Annotated[float, Measure("degC", "-5 degC", above=-273.15)]
Density = Annotated[float, Measure("kg/m^3", "900 kg/m^3", above=0.0)]
Pressure = Annotated[float, Measure("Pa", "400 Pa", least=0.0)]
Speed = Annotated[float, Measure("m/s", "30 m/s", least=0.0)]
Angle = Annotated[float, Measure("rad", "60 deg", least=-2 * math.pi, most=2 * math.pi)]
SwingAngle = Annotated[float, Measure("rad", "35 deg", above=0.0, most=math.pi / 2)]
Bearing = Annotated[float, Measure("rad", "225 deg", least=0.0, most=2 * math.pi)]
Altitude = Annotated[float, Measure("m", "1200 m", least=-500.0, most=11000.0)]
DragArea = Annotated[float, Measure("m^2", "0.6 m^2", least=0.0)]
Factor = Annotated[float, Measure("1", "1.5", least=0.0, most=100.0)]
Drag = Annotated[float, Measure("1", "1.0", least=0.0)]
Friction = Annotated[float, Measure("1", "0.02", least=0.0, most=1.0)]
Allowance = Annotated[float, Measure("m", "1.5 m", least=0.0)]
Share = Annotated[float, Measure("1", "50 %", above=0.0, most=1.0)]
Strain = Annotated[float, Measure("1", "0.05 %", least=0.0, most=0.2)]
StrainRange = Annotated[float, Measure("1", "0.45 %", above=0.0, most=0.2)]
Exponent = Annotated[float, Measure("1", "0.16", least=0.0, most=1.0)]
Duration = Annotated[float, Measure("s", "10 year", least=0.0)]
Tolerance = Annotated[float, Measure("1", "3 %", least=0.0, most=0.5)]
Name = Annotated[str, Words("a name", NAME_EXAMPLE.strip('"'))]
Prose = Annotated[str, Words("a text", "...", prose=True)]
