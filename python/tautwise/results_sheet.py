"""The crew sheet: what is cut, pulled, measured and clamped when a line is strung.

All of it bare, without wind; lengths are natural ones at the stringing temperature. SI, the unit in the name.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any, ClassVar

from tautwise.columns import Table, force_column, force_text, length_column, number_column, plural, text_column
from tautwise.records import Record
from tautwise.results_line import clipped, pandas_module
from tautwise.tables import OVER_SHEAVES

RETURNS = (1, 3, 5)
"""How many returns of a wave a crew counts."""

OVER, CLAMPED = "over sheaves", "clamped"
SHEAVE = "sheave"


@dataclass(frozen=True, slots=True)
class SpanReading(Record):
    """One span at one temperature.

    Fields
    ------
    horizontal_tension_N, tension_max_N, sag_m: as in a settled line.
    return_wave_s: times in which a transverse wave comes back once, three and five times, exact on the hung line:
        2 n int ds sqrt(m lambda / T), m the mass per natural metre, lambda the stretch, T the tension.
    return_wave_parabola_s: the same as common practice takes them from the sag D, 2 n sqrt(8 D / g).
    """

    horizontal_tension_N: float
    tension_max_N: float
    sag_m: float
    return_wave_s: tuple[float, float, float]
    return_wave_parabola_s: tuple[float, float, float]


@dataclass(frozen=True, slots=True)
class CrewSpan(Record):
    """The length of one span, and how far friction lets it be off while it lies on sheaves.

    Fields
    ------
    natural_length_m: between the clamps, unstressed, at the stringing temperature.
    marked_length_m: the same under the pull at the stringing temperature.
    pulled_from_first, pulled_from_last: the span when the line is pulled in against friction from its first or from its
        last end, at the stringing temperature; None where no sheave has friction.
    """

    KEYS: ClassVar[Mapping[str, str | None]] = {"from_support": "from", "to_support": "to"}

    from_support: str
    to_support: str
    natural_length_m: float
    marked_length_m: float
    pulled_from_first: SpanReading | None
    pulled_from_last: SpanReading | None

    @property
    def name(self) -> str:
        """The supports at both ends."""
        return f"{self.from_support} to {self.to_support}"


@dataclass(frozen=True, slots=True)
class CrewSection(Record):
    """The line from one anchor to the next.

    Fields
    ------
    natural_length_m, marked_length_m: the sum of its spans, unstressed and under the pull.
    cut_length_m, cut_marked_m: the same with the allowance at both ends.
    """

    KEYS: ClassVar[Mapping[str, str | None]] = {"from_support": "from", "to_support": "to"}

    from_support: str
    to_support: str
    natural_length_m: float
    marked_length_m: float
    cut_length_m: float
    cut_marked_m: float


@dataclass(frozen=True, slots=True)
class CrewSupport(Record):
    """Where the line is clamped at one support; None where nothing is clamped there or the line was not on sheaves.

    Fields
    ------
    clip_offset_m: natural length from where the line lies on the sheave to where it is clamped, positive ahead.
    clip_offset_stretched_m: as a tape along the hung line shows it.
    block_swing_deg: the sheave's link from the vertical. block_down_N: on the support; negative is uplift.
    block_across_N, block_resultant_N: of the same load, across (positive to the left), and all of it.
    """

    name: str
    hold: str
    clip_offset_m: float | None
    clip_offset_stretched_m: float | None
    block_swing_deg: float | None
    block_down_N: float | None
    block_across_N: float | None = None
    block_resultant_N: float | None = None

    @property
    def lifts(self) -> bool:
        """Whether the line lifts out of the sheave while it is strung."""
        return (self.block_down_N or 0.0) < 0.0


@dataclass(frozen=True, slots=True)
class CrewTemperature(Record):
    """Every span at one temperature of the line: on its sheaves, with the length that is to be clamped, and clamped.

    A state that has no equilibrium, or does not exist, is empty.
    """

    temperature_degC: float
    over_sheaves: tuple[SpanReading, ...]
    clamped: tuple[SpanReading, ...]


@dataclass(frozen=True, slots=True, repr=False)
class CrewSheet(Record):
    """All that a crew needs on the day; the document of ``sheet --json``.

    Fields
    ------
    method, clip, stringing_degC, horizontal_tension_N: how the line is strung; the pull is that of the first span after
        each anchor, None where natural lengths are given. tolerance_percent: of the pull, as the crew can keep it.
    end_allowance_m: added at each end of a section.
    sections, spans, supports: along the line.
    at_stringing: every span at the stringing temperature. temperatures: at others, rising.
    """

    FORMAT: ClassVar[str] = "tautwise-sheet 1"

    program: str
    project: str
    input_sha256: str | None
    caution: str
    method: str
    clip: str
    stringing_degC: float
    horizontal_tension_N: float | None
    tolerance_percent: float
    end_allowance_m: float
    sections: tuple[CrewSection, ...]
    spans: tuple[CrewSpan, ...]
    supports: tuple[CrewSupport, ...]
    at_stringing: CrewTemperature
    temperatures: tuple[CrewTemperature, ...]
    warnings: tuple[str, ...] = ()

    @property
    def in_service(self) -> tuple[str, ...]:
        """The sheaves that the line runs over for good."""
        return tuple(support.name for support in self.supports if support.hold == SHEAVE)

    @property
    def over_sheaves(self) -> bool:
        """Whether the line is pulled in over sheaves."""
        return self.method == OVER_SHEAVES

    def rows(self) -> Iterator[dict[str, Any]]:
        """One flat row for each temperature, state and span, with the length of the span and the offset at its end."""
        for each in (self.at_stringing, *self.temperatures):
            for state, readings in ((OVER, each.over_sheaves), (CLAMPED, each.clamped)):
                for number, reading in enumerate(readings):
                    yield self._row(each.temperature_degC, state, number, reading)

    def _row(self, temperature: float, state: str, number: int, reading: SpanReading) -> dict[str, Any]:
        span = self.spans[number]
        waves = {f"return_{n}_s": t for n, t in zip(RETURNS, reading.return_wave_s, strict=True)}
        waves |= {f"return_{n}_parabola_s": t for n, t in zip(RETURNS, reading.return_wave_parabola_s, strict=True)}
        return {
            "temperature_degC": temperature,
            "state": state,
            "from": span.from_support,
            "to": span.to_support,
            "natural_length_m": span.natural_length_m,
            "marked_length_m": span.marked_length_m,
            "clip_offset_at_to_m": self.supports[number + 1].clip_offset_stretched_m,
            "horizontal_tension_N": reading.horizontal_tension_N,
            "tension_max_N": reading.tension_max_N,
            "sag_m": reading.sag_m,
            **waves,
        }

    def to_dataframe(self) -> Any:
        """The rows as a pandas data frame."""
        return pandas_module().DataFrame(list(self.rows()))

    def _table(self) -> Table:
        return sag_table(self)

    def _head(self) -> str:
        pull = "given lengths" if self.horizontal_tension_N is None else force_text(self.horizontal_tension_N)
        return f"CrewSheet {self.project!r}: {self.method}, {plural(len(self.spans), 'span')}, {pull}"

    def __repr__(self) -> str:
        return clipped(self._head(), self._table().lines())

    def _repr_html_(self) -> str:
        return self._table().html(self._head())


def sag_table(sheet: CrewSheet) -> Table:
    """Each span as it is measured at the stringing temperature: on the sheaves where it lies on them, else clamped."""
    readings = sheet.at_stringing.over_sheaves or sheet.at_stringing.clamped
    columns = (
        text_column("between"),
        length_column("natural length", [span.natural_length_m for span in sheet.spans]),
        force_column("horizontal", [reading.horizontal_tension_N for reading in readings]),
        length_column("sag", [reading.sag_m for reading in readings]),
        number_column("3 returns", "s", 2),
    )
    rows = (
        (s.name, s.natural_length_m, r.horizontal_tension_N, r.sag_m, r.return_wave_s[1])
        for s, r in zip(sheet.spans, readings, strict=bool(readings))
    )
    return Table(columns, tuple(rows))
