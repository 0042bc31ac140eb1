"""The line that fits measured points: what was found, how surely, and which points lie far off.

SI throughout, the unit in the name. :mod:`tautwise.fit` fills these records from the core.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any, ClassVar, cast

from tautwise.as_built import as_built, paste_lines
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
from tautwise.errors import TautwiseError
from tautwise.records import Record
from tautwise.results_line import clipped, pandas_module

if TYPE_CHECKING:
    from tautwise.model import Project

NO_PROJECT = "a fit read from JSON holds no project; fit the survey again"


@dataclass(frozen=True, slots=True)
class FittedPull(Record):
    """The pull of the whole line at stringing temperature: best value, standard error, and the interval's ends, N.

    The last three are None where the points leave nothing over to estimate them by.
    """

    horizontal_tension_N: float
    standard_error_N: float | None
    low_N: float | None
    high_N: float | None


@dataclass(frozen=True, slots=True)
class FittedSpan(Record):
    """One span of the fitted line.

    Fields
    ------
    points: measured between its supports, a thousandth of the span away from them or more.
    measured: its natural length was found from the points: by its own, or by the one pull of the whole line.
    natural_length_m: unstressed, at the stringing temperature; its standard error and the ends of its interval, None
        where it was not measured or the points leave nothing over.
    horizontal_tension_N, sag_m: bare, at the stringing temperature.
    """

    KEYS: ClassVar[Mapping[str, str | None]] = {"from_support": "from", "to_support": "to"}

    from_support: str
    to_support: str
    points: int
    measured: bool
    natural_length_m: float
    standard_error_m: float | None
    low_m: float | None
    high_m: float | None
    horizontal_tension_N: float
    sag_m: float

    @property
    def name(self) -> str:
        """Both supports."""
        return f"{self.from_support} to {self.to_support}"


@dataclass(frozen=True, slots=True)
class FittedPoint(Record):
    """One measured point beside the fitted line.

    Fields
    ------
    name: of the point, or the line of its file. line: of the file; None where there is none.
    station_m, elevation_m, offset_m, temperature_degC, date: as measured.
    line_elevation_m: of the fitted line at the station.
    residual_m, offset_residual_m: measured less line, positive above it and to its left.
    deviation: the residual over its own standard deviation, judged by the other points where no sigma was given
        (externally studentised); of elevation and offset the greater. None where nothing is left over to judge by.
    suspicious: farther off than one good measurement in 370 would be, as three sigma are.
    """

    name: str
    line: int | None
    station_m: float
    elevation_m: float
    offset_m: float | None
    temperature_degC: float
    date: str | None
    line_elevation_m: float
    residual_m: float
    offset_residual_m: float | None
    deviation: float | None
    suspicious: bool


@dataclass(frozen=True, slots=True, repr=False)
class SurveyFit(Record):
    """The line that hangs closest to the points of a survey; the document of ``fit --json``.

    Fields
    ------
    survey, survey_sha256: the file of the points. unknown: "pull" or "lengths".
    temperature_degC: of the stringing, at which the pull is meant and the natural lengths are measured.
    pull: None where each span's length was unknown.
    measurements, unknowns: how many; elevations and measured offsets count.
    rms_m: root of the mean squared residual. chi2: sum of squares, over the sigmas where they were given.
    standard_deviation_m: of one measurement, from what the fit leaves over; None where sigmas were given or nothing is.
    confidence: of the intervals; factor: so many standard errors to either side, by Student's t, or by the normal law
        where sigmas were given.
    gap_relative: the fitted line, settled bare with its proof at the stringing and the survey's temperatures: the
        widest bracket.
    step_relative: what a last step at the answer, by other differences, would still move the pull.
    origin: the project; kept out of JSON, kept by pickle.
    """

    FORMAT: ClassVar[str] = "tautwise-fit 1"
    KEYS: ClassVar[Mapping[str, str | None]] = {"origin": None}

    program: str
    project: str
    input_sha256: str | None
    survey: str | None
    survey_sha256: str | None
    unknown: str
    temperature_degC: float
    pull: FittedPull | None
    spans: tuple[FittedSpan, ...]
    points: tuple[FittedPoint, ...]
    temperatures_degC: tuple[float, ...]
    measurements: int
    unknowns: int
    sigmas_given: bool
    rms_m: float
    chi2: float
    standard_deviation_m: float | None
    confidence: float
    factor: float | None
    gap_relative: float
    step_relative: float
    steps: int
    evaluations: int
    warnings: tuple[str, ...]
    caution: str
    origin: Any = field(default=None, compare=False, repr=False)

    @property
    def natural_length_m(self) -> tuple[float, ...]:
        """The natural length of each span, at the stringing temperature."""
        return tuple(span.natural_length_m for span in self.spans)

    @property
    def suspicious(self) -> tuple[FittedPoint, ...]:
        """The points that lie too far off, farthest first."""
        return tuple(point for point in self.ranked() if point.suspicious)

    def ranked(self) -> tuple[FittedPoint, ...]:
        """The points, farthest off first."""

        def off(point: FittedPoint) -> float:
            return max(abs(point.residual_m), abs(point.offset_residual_m or 0.0))

        return tuple(sorted(self.points, key=lambda point: (abs(point.deviation or 0.0), off(point)), reverse=True))

    def to_project(self) -> Project:
        """The project as built: strung to the fitted natural lengths, everything else as it was.

        Raises
        ------
        TautwiseError: the result was read from JSON, which holds no project.
        """
        return as_built(self._project(), self.natural_length_m, self.survey, self.survey_sha256)

    def paste(self) -> str:
        """The ``[stringing]`` table of the line as built, to put in place of the project file's own."""
        return "\n".join(paste_lines(self._project(), self.natural_length_m)) + "\n"

    def to_dataframe(self) -> Any:
        """The points as a pandas data frame, a column for each key of a point."""
        return pandas_module().DataFrame([point.to_dict() for point in self.points])

    def plot(self, ax: Any = None, **options: Any) -> Any:
        """Draw the points on the fitted line; see :func:`tautwise.figure_fit.plot_fit`. Returns the Matplotlib axes."""
        from tautwise.figure_fit import plot_fit

        return plot_fit(self, ax, **options)

    def _project(self) -> Project:
        if self.origin is None:
            raise TautwiseError(NO_PROJECT)
        return cast("Project", self.origin)

    @property
    def summary(self) -> str:
        """The answer and how far the points lie off, in one line."""
        return f"{pull_words(self)}; {plural(len(self.points), 'point')}, {1e3 * self.rms_m:.1f} mm off (rms)"

    def _head(self) -> str:
        return f"SurveyFit {self.project!r}: {self.summary}"

    def __repr__(self) -> str:
        return clipped(self._head(), fitted_table(self).lines())

    def _repr_html_(self) -> str:
        return fitted_table(self).html(self._head())


def pull_words(found: SurveyFit) -> str:
    """The pull with its interval, or that natural lengths were found.

    >>> from types import SimpleNamespace
    >>> pull_words(SimpleNamespace(pull=FittedPull(20e3, 100.0, 19.8e3, 20.2e3)))
    'pull 20.000 kN +/- 0.200 kN'
    """
    pull = found.pull
    if pull is None:
        return f"natural lengths of {plural(sum(span.measured for span in found.spans), 'span')}"
    if pull.high_N is None:
        return f"pull {force_text(pull.horizontal_tension_N)}"
    (value, half), unit = forces_text(pull.horizontal_tension_N, pull.high_N - pull.horizontal_tension_N)
    return f"pull {value} {unit} +/- {half} {unit}"


def fitted_table(found: SurveyFit) -> Table:
    """The spans with their natural lengths and how sure they are."""
    columns = (
        text_column("between"),
        number_column("points", "", 0),
        number_column("natural length", "m", 4),
        number_column("+/-", "mm", 1),
        force_column("horizontal", [span.horizontal_tension_N for span in found.spans]),
        length_column("sag", [span.sag_m for span in found.spans]),
    )
    rows = ((s.name, s.points, s.natural_length_m, _half_mm(s), s.horizontal_tension_N, s.sag_m) for s in found.spans)
    return Table(columns, tuple(rows))


def _half_mm(span: FittedSpan) -> float | None:
    return None if span.high_m is None else 1e3 * (span.high_m - span.natural_length_m)


def point_table(points: tuple[FittedPoint, ...]) -> Table:
    """Points beside the fitted line."""
    offsets = any(point.offset_residual_m is not None for point in points)
    columns = [
        text_column("point"),
        number_column("station", "m", 2),
        number_column("temperature", "degC", 1),
        length_column("measured", [point.elevation_m for point in points]),
        length_column("line", [point.line_elevation_m for point in points]),
        number_column("above it", "mm", 1),
        number_column("left of it", "mm", 1),
        number_column("deviation", "", 1),
        text_column(""),
    ]
    rows: list[tuple[float | str | None, ...]] = [
        (
            p.name, p.station_m, p.temperature_degC, p.elevation_m, p.line_elevation_m, 1e3 * p.residual_m,
            None if p.offset_residual_m is None else 1e3 * p.offset_residual_m, p.deviation,
            "far off" if p.suspicious else "",
        )
        for p in points
    ]  # fmt: skip
    if not offsets:
        del columns[6]
        rows = [(*row[:6], *row[7:]) for row in rows]
    return Table(tuple(columns), tuple(rows))
