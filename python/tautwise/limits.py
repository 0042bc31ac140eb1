"""The limits of a project file, one model per kind.

`spans` lists spans by the name of the support where each starts; `supports` lists supports by name.
"""

from __future__ import annotations

from typing import Annotated, Any, ClassVar, Literal

from pydantic import Field

from tautwise.fields import (
    LABEL_LENGTH_MOST,
    CatenaryConstant,
    Choice,
    Coordinate,
    Distance,
    Kind,
    Measure,
    Name,
    PositiveForce,
    Prose,
    Sag,
    Share,
    Slope,
    SomeForce,
    SwingAngle,
    Words,
)
from tautwise.strict import Refused, described, shown
from tautwise.tables import Table

DIRECTIONS = ("along", "across", "down", "up", "resultant")
GROUND = "ground"

Names = Annotated[tuple[Name, ...], Field(min_length=1)]
LimitId = Annotated[str, Words("an id", "strength")]


class BaseLimit(Table):
    """What every limit has: an id, the conditions it is judged in (default: all), and where the rule stands."""

    looks_at: ClassVar[str] = "spans"

    id: LimitId
    conditions: Names | None = None
    clause: Prose | None = None
    why: Prose | None = None


class ClearanceLimit(BaseLimit):
    """The least vertical distance, m, of the line above the ground or a crossing, between two stations."""

    kind: Literal["clearance"]
    over: Annotated[str, Words("ground or a crossing's name", "ground")] = GROUND
    least: Distance
    from_m: Coordinate | None = Field(None, alias="from")
    to_m: Coordinate | None = Field(None, alias="to")


class TensionLimit(BaseLimit):
    """The most tension of the line, N, or the most share of its breaking strength."""

    kind: Literal["tension"]
    share: Share | None = None
    most: PositiveForce | None = None
    spans: Names | None = None


class SupportLoadLimit(BaseLimit):
    """The most force on a support, N, or the most share of its capacity, in one direction."""

    looks_at: ClassVar[str] = "supports"

    kind: Literal["support_load"]
    direction: Annotated[str, Choice(DIRECTIONS)] = "resultant"
    share: Share | None = None
    most: PositiveForce | None = None
    supports: Names | None = None


class UpliftLimit(BaseLimit):
    """The least downward force of the line on a support, N."""

    looks_at: ClassVar[str] = "supports"

    kind: Literal["uplift"]
    least: SomeForce = 0.0
    supports: Names | None = None


class SwingLimit(BaseLimit):
    """The most swing of a hanger from the vertical, an angle."""

    looks_at: ClassVar[str] = "supports"

    kind: Literal["swing"]
    most: SwingAngle
    supports: Names | None = None


class SagLimit(BaseLimit):
    """The most and the least sag of a span, m."""

    kind: Literal["sag"]
    most: Sag | None = None
    least: Distance | None = None
    spans: Names | None = None


class CatenaryConstantLimit(BaseLimit):
    """The most horizontal tension over bare weight per metre, m."""

    kind: Literal["catenary_constant"]
    most: CatenaryConstant
    spans: Names | None = None


class SlopeLimit(BaseLimit):
    """The most slope of the line, rise over run."""

    kind: Literal["slope"]
    most: Annotated[float, Slope()]
    spans: Names | None = None


class ConditionPairs(Kind):
    """For conditions of this line, by name, those of another line; kept as pairs.

    >>> ConditionPairs().read({"hot": "ice"})
    (('hot', 'ice'),)
    """

    words = "a table with a condition of the other line for each of this line"
    example = '{ hot = "ice" }'

    def read(self, value: Any) -> tuple[tuple[str, str], ...]:
        """The pairs."""
        if not isinstance(value, dict):
            raise Refused(f"{described(value)} where a table is needed")
        if not value:
            raise Refused("an empty table")
        name = Words("a name", "ice")
        return tuple((str(key), self._name(name, key, other)) for key, other in value.items())

    def json_schema(self) -> dict[str, Any]:
        """A table of names."""
        name = {"type": "string", "minLength": 1, "maxLength": LABEL_LENGTH_MOST}
        return {"type": "object", "minProperties": 1, "additionalProperties": name, "description": self.words}

    @staticmethod
    def _name(name: Words, key: Any, other: Any) -> str:
        try:
            return str(name.read(other))
        except Refused as refused:
            raise Refused(f"{shown(str(key))}: {refused.problem}") from None


class Shift(Table):
    """How the axes of another line stand in this line's: where its station 0, offset 0, elevation 0 lies.

    Of lines that are given by east and north: where its east 0, north 0, elevation 0 lies.
    """

    station_m: Coordinate = Field(0.0, alias="station")
    offset_m: Coordinate = Field(0.0, alias="offset")
    east_m: Coordinate = Field(0.0, alias="east")
    north_m: Coordinate = Field(0.0, alias="north")
    elevation_m: Coordinate = Field(0.0, alias="elevation")

    @property
    def vector_m(self) -> tuple[float, float, float]:
        """In plan and up; one of the two ways to say it is 0."""
        return self.station_m + self.east_m, self.offset_m + self.north_m, self.elevation_m


class SpacingLimit(BaseLimit):
    """The least distance in space, m, to the line of another project file, each line in a condition of its own."""

    kind: Literal["spacing"]
    other: Annotated[str, Words("a project file", "upper_wire.taut.toml")]
    least: Annotated[float, Measure("m", "1.2 m", above=0.0)]
    other_condition: Name | None = None
    other_conditions: Annotated[Any, ConditionPairs()] = None
    shift: Shift = Shift()
    spans: Names | None = None

    def other_condition_for(self, name: str) -> str:
        """The other line's condition beside one of this line: its own, one for all, or that of the same name."""
        pairs: dict[str, str] = dict(self.other_conditions or ())
        return pairs.get(name, self.other_condition or name)


Limit = Annotated[
    ClearanceLimit
    | TensionLimit
    | SupportLoadLimit
    | UpliftLimit
    | SwingLimit
    | SagLimit
    | CatenaryConstantLimit
    | SlopeLimit
    | SpacingLimit,
    Field(discriminator="kind"),
]

LIMITS: dict[str, type[BaseLimit]] = {
    "clearance": ClearanceLimit,
    "tension": TensionLimit,
    "support_load": SupportLoadLimit,
    "uplift": UpliftLimit,
    "swing": SwingLimit,
    "sag": SagLimit,
    "catenary_constant": CatenaryConstantLimit,
    "slope": SlopeLimit,
    "spacing": SpacingLimit,
}
