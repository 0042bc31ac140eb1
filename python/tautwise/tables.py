"""The tables of a project file as frozen models, every number in SI with its unit in the attribute's name.

The key of an attribute in a file, or among keyword arguments, is its alias: `diameter_m` is written ``diameter``.
Rules between keys are in :mod:`tautwise.rules`; here is only what each key holds by itself.
"""

from __future__ import annotations

import math
from typing import Annotated, Any

from pydantic import BaseModel, ConfigDict, Field

from tautwise.curves import Stresses, force_terms, steepest
from tautwise.fields import (
    Allowance,
    AlongLine,
    Altitude,
    Angle,
    AnyForce,
    AnyForcePerLength,
    Area,
    AxialStiffness,
    Bearing,
    Choice,
    Coordinate,
    Density,
    Direction,
    Drag,
    DragArea,
    Duration,
    Elevation,
    Expansion,
    Exponent,
    Factor,
    Friction,
    HangerLength,
    Height,
    Lengths,
    MassPerLength,
    Modulus,
    Name,
    PositiveForce,
    PositiveForcePerLength,
    PositiveLength,
    Pressure,
    Sag,
    SomeForce,
    SomeForcePerLength,
    Speed,
    SpringRate,
    Strain,
    StrainRange,
    Temperature,
    Thickness,
    Tolerance,
    Words,
)
from tautwise.patterns import Pattern
from tautwise.units import STANDARD_GRAVITY_M_PER_S2

HOLDS = ("anchor", "hanger", "sheave", "post")
CLAMPED, OVER_SHEAVES = METHODS = ("clamped", "over sheaves")
PLUMB, WHERE_IT_LIES = CLIPS = ("plumb", "where it lies")

STATES = ("initial", "final", "after creep")
SECONDS_PER_HOUR = 3600.0

HangerForm = Annotated[str, Choice(("I", "V"))]
Hold = Annotated[str, Choice(HOLDS)]


class Table(BaseModel):
    """Base of the tables: frozen, and no key that is not declared."""

    model_config = ConfigDict(frozen=True, extra="forbid", hide_input_in_errors=True)


class CreepLaw(Table):
    """Creep as a strain c t^n that grows with the time t in hours, whatever the tension."""

    coefficient: Strain
    exponent: Exponent
    time_s: Duration = Field(alias="time")


class Part(Table):
    """A part of a line with a curved law: stress on `area` against percent of strain, and how it unloads and creeps.

    `initial` is first loading, `creep` what is reached in the end at constant stress, both up to the strain `valid_to`,
    from where they go on straight; `final_modulus` is that of unloading.
    """

    initial_Pa: Annotated[tuple[float, ...], Stresses()] = Field(alias="initial")
    creep_Pa: Annotated[tuple[float, ...], Stresses()] | None = Field(None, alias="creep")
    final_modulus_Pa: Modulus = Field(alias="final_modulus")
    valid_to: StrainRange = 0.0045
    area_m2: Area | None = Field(None, alias="area")
    expansion_per_K: Expansion | None = Field(None, alias="expansion")


class Line(Table):
    """The line itself, bare: per natural metre at the stringing temperature.

    Its law is linear, by modulus or stiffness; or curved: one `curve`, or a `core` and an `outer` part that share the
    load until one goes slack.
    """

    name: Name | None = None
    size: Annotated[str, Words("the name of a size", "Drake ACSR")] | None = None
    catalogue: tuple[Annotated[str, Words("a file name", "my_sizes.csv")], ...] = ()
    diameter_m: PositiveLength | None = Field(None, alias="diameter")
    area_m2: Area | None = Field(None, alias="area")
    given_weight_N_per_m: PositiveForcePerLength | None = Field(None, alias="weight")
    mass_kg_per_m: MassPerLength | None = Field(None, alias="mass")
    modulus_Pa: Modulus | None = Field(None, alias="modulus")
    given_stiffness_N: AxialStiffness | None = Field(None, alias="stiffness")
    given_expansion_per_K: Expansion | None = Field(None, alias="expansion")
    breaking_strength_N: PositiveForce | None = Field(None, alias="breaking_strength")
    curve: Part | None = None
    core: Part | None = None
    outer: Part | None = None
    test_temperature_degC: Temperature | None = Field(None, alias="test_temperature")
    bedding_in: Strain = 0.0
    creep_strain: Strain | None = None
    creep_law: CreepLaw | None = None

    @property
    def parts(self) -> tuple[Part, ...]:
        """The parts of a curved law; none on a linear line."""
        return tuple(part for part in (self.curve, self.core, self.outer) if part is not None)

    @property
    def stretches(self) -> bool:
        """Whether loads leave a permanent stretch in it."""
        return bool(self.parts or self.bedding_in)

    def part_area_m2(self, part: Part) -> float:
        """The area that a part's stresses are on, m2."""
        return part.area_m2 or self.area_m2 or math.nan

    @property
    def weight_N_per_m(self) -> float:
        """Weight, N/m; from the mass with 9.80665 m/s2 where that is given."""
        if self.given_weight_N_per_m is not None:
            return self.given_weight_N_per_m
        return (self.mass_kg_per_m or math.nan) * STANDARD_GRAVITY_M_PER_S2

    @property
    def stiffness_N(self) -> float:
        """EA, N; from modulus and area where these are given; of a curved law its greatest slope."""
        if self.given_stiffness_N is not None:
            return self.given_stiffness_N
        if self.parts:
            return math.fsum(self._steepest_N(part) for part in self.parts)
        return (self.modulus_Pa or math.nan) * (self.area_m2 or math.nan)

    def _steepest_N(self, part: Part) -> float:
        area = self.part_area_m2(part)
        return max(part.final_modulus_Pa * area, steepest(force_terms(part.initial_Pa, area), part.valid_to))

    @property
    def expansion_per_K(self) -> float:
        """Thermal strain per kelvin; 0 where no condition needs it."""
        return self.given_expansion_per_K or 0.0


class GroundTable(Table):
    """Where the ground profile is: a CSV file, or points [station, elevation]."""

    profile: Annotated[str, Words("a file name", "ground.csv")] | None = None
    points: Any = Field(
        None,
        json_schema_extra={
            "type": "array",
            "minItems": 2,
            "items": {"type": "array", "minItems": 2, "maxItems": 2, "items": {"type": "string"}},
            "examples": [[["0 m", "3 m"], ["240 m", "5 m"]]],
        },
    )


class Crossing(Table):
    """What must be kept clear of between two stations, up to an elevation."""

    name: Name
    from_m: Coordinate = Field(alias="from")
    to_m: Coordinate = Field(alias="to")
    top_m: Elevation = Field(alias="top")


class Capacity(Table):
    """What a support can take in each direction, N."""

    along_N: PositiveForce | None = Field(None, alias="along")
    across_N: PositiveForce | None = Field(None, alias="across")
    down_N: PositiveForce | None = Field(None, alias="down")
    up_N: PositiveForce | None = Field(None, alias="up")


class Support(Table):
    """A support: where it stands and how it holds the line.

    On a route that turns it is given by east and north, and `station_m` is the distance in plan along the supports.
    """

    name: Name
    station_m: Coordinate = Field(math.nan, alias="station")
    offset_m: Coordinate = Field(0.0, alias="offset")
    east_m: Coordinate | None = Field(None, alias="east")
    north_m: Coordinate | None = Field(None, alias="north")
    given_elevation_m: Elevation | None = Field(None, alias="elevation")
    height_m: Height | None = Field(None, alias="height")
    hold: Hold = "anchor"
    hanger_length_m: HangerLength | None = Field(None, alias="length")
    hanger_form: HangerForm = Field("I", alias="form")
    hanger_spread_m: HangerLength | None = Field(None, alias="spread")
    hanger_weight_N: SomeForce = Field(0.0, alias="weight")
    sheave_friction: Friction | None = Field(None, alias="friction")
    wind_area_m2: DragArea = Field(0.0, alias="wind_area")
    stiffness_along_N_per_m: SpringRate | None = Field(None, alias="stiffness_along")
    stiffness_across_N_per_m: SpringRate | None = Field(None, alias="stiffness_across")
    stiffness_vertical_N_per_m: SpringRate | None = Field(None, alias="stiffness_vertical")
    capacity: Capacity = Capacity()

    @property
    def turns(self) -> bool:
        """Whether it is given by east and north."""
        return self.east_m is not None

    @property
    def plan_m(self) -> tuple[float, float]:
        """x and y in plan, m: east and north, or station and offset."""
        if self.east_m is None or self.north_m is None:
            return self.station_m, self.offset_m
        return self.east_m, self.north_m


class TensionAt(Table):
    """The larger of the line's tensions beside a support, as strung."""

    support: Name
    value_N: PositiveForce = Field(alias="value")


class SagOf(Table):
    """The sag of the span between two neighbouring supports, as strung."""

    from_support: Name = Field(alias="from")
    to_support: Name = Field(alias="to")
    value_m: Sag = Field(alias="value")


class Stringing(Table):
    """How the line is strung: bare, at a temperature, by one rule or (for a window search) by none."""

    temperature_degC: Temperature = Field(alias="temperature")
    horizontal_tension_N: PositiveForce | None = Field(None, alias="horizontal_tension")
    tension: TensionAt | None = None
    sag: SagOf | None = None
    natural_length_m: Annotated[Any, Lengths()] = Field(None, alias="natural_length")
    tolerance: Tolerance = 0.0
    method: Annotated[str, Choice(METHODS)] = CLAMPED
    clip: Annotated[str, Choice(CLIPS)] = PLUMB
    friction: Friction = 0.0
    end_allowance_m: Allowance = Field(0.0, alias="end_allowance")

    @property
    def over_sheaves(self) -> bool:
        """Whether the line is pulled in over sheaves and then clamped."""
        return self.method == OVER_SHEAVES

    @property
    def has_rule(self) -> bool:
        """Whether the file says how hard to pull."""
        return any((self.horizontal_tension_N, self.tension, self.sag, self.natural_length_m))


class Ice(Table):
    """A sleeve of ice: radial thickness and density, and the share of it that each span keeps."""

    thickness_m: Thickness = Field(alias="thickness")
    density_kg_per_m3: Density = Field(alias="density")
    pattern: Annotated[Any, Pattern()] = None


class Wind(Table):
    """Wind by pressure or by speed, on the iced diameter; 90 deg blows square across, to the left.

    A bearing is where it blows from, as on a compass; the air's density is given, or that at an altitude.
    """

    pressure_Pa: Pressure | None = Field(None, alias="pressure")
    speed_m_per_s: Speed | None = Field(None, alias="speed")
    drag: Drag = 1.0
    angle_rad: Angle = Field(math.pi / 2, alias="angle")
    bearing_rad: Bearing | None = Field(None, alias="bearing")
    air_density_kg_per_m3: Density = Field(1.225, alias="air_density")
    altitude_m: Altitude | None = Field(None, alias="altitude")


class Factors(Table):
    """What each action of a condition is multiplied with."""

    weight: Factor = 1.0
    ice: Factor = 1.0
    wind: Factor = 1.0
    load: Factor = 1.0


class Load(Table):
    """A force at a place of the line or on a carriage, or a load per length or per run on a stretch of it."""

    name: Name | None = None
    force_N: AnyForce | None = Field(None, alias="force")
    per_length_N_per_m: AnyForcePerLength | None = Field(None, alias="per_length")
    per_length_to_N_per_m: AnyForcePerLength | None = Field(None, alias="per_length_to")
    per_run_N_per_m: AnyForcePerLength | None = Field(None, alias="per_run")
    direction: Annotated[Any, Direction()] = "down"
    carriage: Annotated[str, Choice(("free", "held"))] | None = None
    span: Name | None = None
    spans: Annotated[tuple[Name, ...], Field(min_length=1)] | None = None
    beyond: Name | None = None
    before: Name | None = None
    at_m: Coordinate | None = Field(None, alias="at")
    from_m: Coordinate | None = Field(None, alias="from")
    to_m: Coordinate | None = Field(None, alias="to")
    at_length_m: AlongLine | None = Field(None, alias="at_length")
    from_length_m: AlongLine | None = Field(None, alias="from_length")
    to_length_m: AlongLine | None = Field(None, alias="to_length")

    @property
    def size(self) -> float:
        """The force, N, or the load per length or per run, N/m, at the beginning."""
        given = (self.force_N, self.per_length_N_per_m, self.per_run_N_per_m)
        return next((value for value in given if value is not None), 0.0)


class Condition(Table):
    """A loading condition that the line must live through."""

    name: Name
    temperature_degC: Temperature = Field(alias="temperature")
    state: Annotated[str, Choice(STATES)] = "initial"
    ice: Ice | None = None
    wind: Wind | None = None
    resultant_addition_N_per_m: SomeForcePerLength = Field(0.0, alias="resultant_addition")
    factors: Factors = Factors()
    loads: tuple[Load, ...] = Field((), alias="load")


class History(Table):
    """What the line has been through before a condition in the state final or after creep.

    `conditions` are those it has met (default: all), `creep_condition` is the everyday one (default: bare, at the
    stringing temperature).
    """

    conditions: Annotated[tuple[Name, ...], Field(min_length=1)] | None = None
    creep_condition: Name | None = None


class Mark(Table):
    """A place on the line whose position is reported in every condition."""

    name: Name
    at_m: Coordinate | None = Field(None, alias="at")
    at_length_m: AlongLine | None = Field(None, alias="at_length")


class Head(Table):
    """The keys outside any table."""

    format: Annotated[str, Choice(("tautwise 1",))] = "tautwise 1"
    title: Annotated[str, Words("a title", "Inlet crossing")] = ""
    rules: Any = Field(
        None,
        json_schema_extra={
            "type": "array",
            "examples": [["nesc-250b-heavy", "nesc-261h"]],
        },
    )
