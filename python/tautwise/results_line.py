"""Where a line hangs and how hard it pulls: the settled line in one condition, and in all of them.

SI throughout, the unit in the name. Axes: x along the route (station), y across it (positive to the left when looking
ahead), z up (elevation); of a route that turns, x is east and y north. Nothing here computes an equilibrium;
:mod:`tautwise.solve` fills these records from the core.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any, ClassVar

from tautwise.columns import (
    Table,
    force_column,
    force_text,
    forces_text,
    length_column,
    number_column,
    plural,
    text_column,
)
from tautwise.errors import NotSettledError, TautwiseError
from tautwise.history import HistoryState
from tautwise.places import Origin, Places
from tautwise.records import Record
from tautwise.sources import SourceLine

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import ArrayLike, NDArray

    Floats = NDArray[np.float64]

SETTLED = "settled"
CAUTION = "A design aid: local codes and the judgement of a licensed engineer decide, and the input is theirs to check."
ROWS_SHOWN = 7

NO_LINE = "a result read from JSON holds no line to look up places on; settle the project again"


@dataclass(frozen=True, slots=True)
class LowPoint(Record):
    """The lowest point of a span's line between its clamps."""

    station_m: float
    elevation_m: float


@dataclass(frozen=True, slots=True)
class SpanState(Record):
    """One span of a settled line.

    Fields
    ------
    span_m, rise_m: plan distance between the clamps; far clamp above near clamp.
    natural_length_m, line_length_m: unstressed at the stringing temperature; stretched.
    horizontal_tension_N: the component along the span's plan direction, at its start.
    tension_from_N, tension_to_N, tension_max_N: magnitudes at both ends, and the greatest.
    sag_m: greatest vertical distance from the chord down to the line, at `sag_station_m`.
    slant_sag_m: greatest distance from the chord in the direction of the resultant load.
    blowout_m: greatest horizontal distance from the vertical plane of the chord.
    low_point: lowest point between the clamps.
    slope_max: greatest rise over run of the line.
    permanent_strain: what the line's history has added to its strain at this temperature and horizontal tension.
    part_strains: of each part of a curved law, at the span's mean stretch, without what is given as strain.
    small_deflection_sag_m: sag of a taut string under the same loads and horizontal tension, the usual shortcut.
    small_deflection_off_percent: how far that is off the exact sag; None where there is no sag.
    """

    KEYS: ClassVar[Mapping[str, str | None]] = {"from_support": "from", "to_support": "to"}

    from_support: str
    to_support: str
    span_m: float
    rise_m: float
    natural_length_m: float
    line_length_m: float
    horizontal_tension_N: float
    tension_from_N: float
    tension_to_N: float
    tension_max_N: float
    sag_m: float
    sag_station_m: float | None
    slant_sag_m: float
    blowout_m: float
    low_point: LowPoint | None
    slope_max: float | None
    small_deflection_sag_m: float | None
    small_deflection_off_percent: float | None
    permanent_strain: float = 0.0
    part_strains: tuple[float, ...] = ()

    @property
    def name(self) -> str:
        """The supports at both ends."""
        return f"{self.from_support} to {self.to_support}"

    def __repr__(self) -> str:
        most = force_text(self.tension_max_N)
        return f"SpanState {self.name!r}: {self.span_m:.1f} m, sag {self.sag_m:.3f} m, tension up to {most}"


@dataclass(frozen=True, slots=True)
class SupportState(Record):
    """What the line does to one support: forces in N, along positive ahead, across positive to the left.

    At an angle point, ahead halves the angle between the spans' directions, so that `across_N` is along the bisector.
    `down_N` is positive downwards; negative is uplift. `swing_deg` is a hanger's angle from the vertical, else None;
    `swing_along_deg` is the same as seen from the side, positive ahead, and `swing_across_deg` as seen along the line,
    positive to the left. `station_m` is where the support stands. `position_m` is where the line is held, the lower end
    of a hanger: (station, offset, elevation), or (east, north, elevation) where supports are given so.
    """

    name: str
    along_N: float
    across_N: float
    down_N: float
    resultant_N: float
    swing_deg: float | None
    swing_along_deg: float | None
    swing_across_deg: float | None
    station_m: float
    position_m: tuple[float, float, float]

    def __repr__(self) -> str:
        (along, across, down), unit = forces_text(self.along_N, self.across_N, self.down_N)
        return f"SupportState {self.name!r}: {along} along, {across} across, {down} {unit} down"


@dataclass(frozen=True, slots=True)
class MarkState(Record):
    """A mark, point load or carriage: natural length from the first support, tension, position.

    `station_m` is where it is along the route now; `position_m` as of a support.
    tension_beyond_N: just beyond the place; other than tension_N, that before it, where a point load acts. Their
        difference is what a held carriage is braked with; a free one has none.
    """

    name: str
    at_length_m: float
    tension_N: float
    station_m: float
    position_m: tuple[float, float, float]
    tension_beyond_N: float

    def __repr__(self) -> str:
        x, y, z = self.position_m
        return f"MarkState {self.name!r}: at ({x:.2f}, {y:.2f}, {z:.2f}) m, tension {force_text(self.tension_N)}"


@dataclass(frozen=True, slots=True)
class StrungState(Record):
    """The line as strung: bare, at `temperature_degC`; the natural length of each span at that temperature.

    Strung over sheaves, or with sheaves in service, `horizontal_tension_N` is that of the first span after each anchor.
    """

    temperature_degC: float
    horizontal_tension_N: float | None
    natural_length_m: tuple[float, ...]
    method: str = "clamped"


@dataclass(frozen=True, slots=True, repr=False)
class Equilibrium(Record):
    """A line in one condition, with the bracket of energies that proves it settled.

    Fields
    ------
    name: the condition. status: "settled", or why not; then there are no spans, supports or marks.
    energy_J, energy_lower_J: potential energy from above and complementary energy from below, J; the exact energy lies
        between them, `gap_J` apart; `gap_relative` is that over the energy that the loads and the stretch exchange.
    residual_N, closing_m: largest out-of-balance force of the discretised line, closing error of the exact one.
    sheave_imbalance_N: largest difference of tension across a sheave of the exact line; 0 where there is none.
    load_mismatch: how far loads per run and a carriage are from what the shape asks for; 0 where there are none.
    elements, evaluations: of the discretised line, and of its energy by the optimiser.
    newton_steps, exact_steps: Newton steps of the discretised and of the exact line.
    spans, supports, marks: along the line; marks hold the condition's point loads too.
    state, history: of the line, and what it has lived through; None in the state initial.

    >>> empty = Equilibrium.from_json(Equilibrium.failed("hot", 60.0, "slack", "the line carries no tension").to_json())
    >>> empty
    Equilibrium 'hot': slack, the line carries no tension
    >>> empty.settled
    False
    """

    KEYS: ClassVar[Mapping[str, str | None]] = {"origin": None}

    name: str
    status: str
    status_text: str
    temperature_degC: float
    energy_J: float | None
    energy_lower_J: float | None
    gap_J: float | None
    gap_relative: float | None
    residual_N: float | None
    closing_m: float | None
    sheave_imbalance_N: float | None
    load_mismatch: float | None
    elements: int
    evaluations: int
    newton_steps: int
    exact_steps: int
    spans: tuple[SpanState, ...]
    supports: tuple[SupportState, ...]
    marks: tuple[MarkState, ...]
    state: str = "initial"
    history: HistoryState | None = None
    origin: Origin | None = field(default=None, compare=False, repr=False)

    @classmethod
    def failed(cls, name: str, temperature_degC: float, status: str, text: str, **given: Any) -> Equilibrium:
        """A condition that did not settle; `given` holds what is known of the attempt."""
        numbers: dict[str, Any] = dict.fromkeys(
            (
                "energy_J",
                "energy_lower_J",
                "gap_J",
                "gap_relative",
                "residual_N",
                "closing_m",
                "sheave_imbalance_N",
                "load_mismatch",
            )
        )
        counts: dict[str, Any] = dict.fromkeys(("elements", "evaluations", "newton_steps", "exact_steps"), 0)
        return cls(
            name,
            status,
            text,
            temperature_degC,
            **(numbers | counts | given),
            spans=(),
            supports=(),
            marks=(),
        )

    @property
    def settled(self) -> bool:
        """Whether this is an equilibrium, proven by its bracket."""
        return self.status == SETTLED

    @property
    def tension_max_N(self) -> float | None:
        """Greatest tension of the line."""
        return max((span.tension_max_N for span in self.spans), default=None)

    @property
    def sag_max_m(self) -> float | None:
        """Greatest sag of all spans."""
        return max((span.sag_m for span in self.spans), default=None)

    def unsettled_text(self) -> str:
        """That this condition is not settled, and why, in one line."""
        return f'condition "{self.name}" is not settled: {self.status_text}'

    def require_settled(self) -> Equilibrium:
        """The same line.

        Raises
        ------
        NotSettledError: it is not settled.
        """
        if not self.settled:
            raise NotSettledError(self.unsettled_text(), self.status)
        return self

    def at(self, station: ArrayLike) -> Places:
        """Where the line is at stations, from the exact shape.

        Parameters
        ----------
        station: m along the route, a number or an array of any shape.

        Raises
        ------
        TautwiseError: the result was read from JSON, which holds no line.
        """
        import numpy as np

        stations = np.asarray(station, dtype=np.float64)
        found = self._line().at(stations.ravel())
        others = {name: values for name, values in found.items() if name not in ("position_m", "station_m")}
        flat = {name: np.asarray(values).reshape(stations.shape) for name, values in others.items()}
        return Places(stations, position_m=np.asarray(found["position_m"]).reshape((*stations.shape, 3)), **flat)

    def shape(self, points: int = 200) -> dict[str, Floats]:
        """The exact line as arrays `length_m`, `position_m` (n by 3) and `tension_N`, `points` for each span."""
        return self._line().shape(points)

    def to_dataframe(self) -> Any:
        """The spans as a pandas data frame, a column for each key of a span."""
        rows = [{"condition": self.name, **_flat(span.to_dict())} for span in self.spans]
        return pandas_module().DataFrame(rows)

    def plot(self, ax: Any = None, **options: Any) -> Any:
        """Draw the line over its ground; see :func:`tautwise.figure.plot_line`. Returns the Matplotlib axes."""
        from tautwise.figure import plot_line

        return plot_line([self], ax, **options)

    def plot_plan(self, ax: Any = None, **options: Any) -> Any:
        """Draw the line from above; see :func:`tautwise.figure_plan.plot_plan`. Returns the Matplotlib axes."""
        from tautwise.figure_plan import plot_plan

        return plot_plan([self], ax, **options)

    def _line(self) -> Origin:
        self.require_settled()
        if self.origin is None:
            raise TautwiseError(NO_LINE)
        return self.origin

    def _table(self) -> Table:
        return span_table(self.spans[:ROWS_SHOWN])

    def _head(self) -> str:
        if not self.settled:
            return f"Equilibrium {self.name!r}: {self.status}, {self.status_text}"
        return f"Equilibrium {self.name!r}: settled, {plural(len(self.spans), 'span')}, gap {self.gap_relative:.1e}"

    def __repr__(self) -> str:
        more = [f"  ... and {len(self.spans) - ROWS_SHOWN} more"] if len(self.spans) > ROWS_SHOWN else []
        return "\n".join([self._head(), *(self._table().lines() if self.spans else []), *more])

    def _repr_html_(self) -> str:
        return span_table(self.spans).html(self._head())


@dataclass(frozen=True, slots=True, repr=False)
class SettleReport(Record):
    """All conditions of a project, settled for one stringing; the document of ``settle --json``.

    `program` and `nlopt` are the versions in use, `input_sha256` the hash of the project file; `warnings` say what is
    hardly meant, first in the input, then in what came out. `sources` say where the numbers come from, where asked for.
    """

    FORMAT: ClassVar[str] = "tautwise-settle 1"

    program: str
    nlopt: str
    project: str
    input_sha256: str | None
    caution: str
    stringing: StrungState
    conditions: tuple[Equilibrium, ...]
    warnings: tuple[str, ...] = ()
    sources: tuple[SourceLine, ...] = ()

    @property
    def settled(self) -> bool:
        """Whether every condition is settled."""
        return all(each.settled for each in self.conditions)

    def __getitem__(self, name: str) -> Equilibrium:
        for each in self.conditions:
            if each.name == name:
                return each
        raise KeyError(name)

    def to_dataframe(self) -> Any:
        """The spans of every condition as a pandas data frame."""
        return pandas_module().concat([each.to_dataframe() for each in self.conditions], ignore_index=True)

    def plot(self, ax: Any = None, **options: Any) -> Any:
        """Draw every settled condition into one axes; see :func:`tautwise.figure.plot_line`."""
        from tautwise.figure import plot_line

        return plot_line([each for each in self.conditions if each.settled], ax, **options)

    def _table(self) -> Table:
        return condition_table(self.conditions)

    def __repr__(self) -> str:
        return clipped(f"SettleReport {self.project!r}", self._table().lines())

    def _repr_html_(self) -> str:
        return self._table().html(self.project)


def span_table(spans: Sequence[SpanState]) -> Table:
    """The spans with their tensions and sags, along the line."""
    columns = (
        text_column("between"),
        length_column("span", [span.span_m for span in spans]),
        force_column("horizontal", [span.horizontal_tension_N for span in spans]),
        force_column("tension", [span.tension_max_N for span in spans]),
        length_column("sag", [span.sag_m for span in spans]),
    )
    return Table(columns, tuple((s.name, s.span_m, s.horizontal_tension_N, s.tension_max_N, s.sag_m) for s in spans))


def condition_table(conditions: Sequence[Equilibrium]) -> Table:
    """One row for each condition."""
    columns = (
        text_column("condition"),
        number_column("temperature", "degC", 1),
        force_column("greatest tension", [each.tension_max_N for each in conditions]),
        length_column("greatest sag", [each.sag_max_m for each in conditions]),
        text_column("status"),
    )
    rows = ((each.name, each.temperature_degC, each.tension_max_N, each.sag_max_m, each.status) for each in conditions)
    return Table(columns, tuple(rows))


def clipped(head: str, lines: list[str], most: int = 11) -> str:
    """A head and at most so many lines below it."""
    if len(lines) > most:
        lines = [*lines[: most - 1], f"  ... and {len(lines) - most + 1} more"]
    return "\n".join([head, *lines])


def _flat(data: dict[str, Any]) -> dict[str, Any]:
    low = data.pop("low_point") or {"station_m": None, "elevation_m": None}
    return data | {f"low_point_{name}": value for name, value in low.items()}


def pandas_module() -> Any:
    """The pandas package, or an error that names the extra that brings it."""
    try:
        import pandas
    except ImportError:
        raise TautwiseError("data frames need pandas, which is not installed: pip install 'tautwise[tables]'") from None
    return pandas
