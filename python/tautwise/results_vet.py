"""Every limit judged: what it came to, what was allowed, where it was worst."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any, ClassVar

from tautwise.columns import NOTHING, Column, Table, number_column, plural, text_column
from tautwise.records import Record
from tautwise.results_line import CAUTION, clipped, pandas_module
from tautwise.sources import SourceLine

HOLDS = "holds"
FAILS = "fails"
UNDECIDED = "undecided"
WAIVED = "waived"  # only a word for people: the status stays "fails"
_RANK = {FAILS: 0, UNDECIDED: 1, WAIVED: 2, HOLDS: 3}


@dataclass(frozen=True, slots=True)
class WaiverState(Record):
    """Why a limit may fail, and until which day, "2027-06-30"."""

    reason: str
    until: str


@dataclass(frozen=True, slots=True)
class LimitState(Record):
    """One limit in one condition, at its worst place.

    Fields
    ------
    id, kind, clause: of the limit. status: "holds", "fails", or "undecided" (no settled line to judge, or nothing of
        the line is under the limit).
    condition, place: where it is worst; `station_m` if it is a point.
    value, allowed, margin: in `unit` ("m", "N", "deg", or "1" for a slope); margin is what is to spare.
    utilisation: share of the limit that is used; it holds while <= 1.
    side: "least" or "most", which side of `allowed` is right. reason: why it is undecided.
    waiver: of a limit that fails and may; None otherwise.
    other_place: of a spacing, where the other line is closest.
    """

    id: str
    kind: str
    status: str
    condition: str | None
    place: str | None
    value: float | None
    allowed: float | None
    unit: str
    utilisation: float | None
    margin: float | None
    clause: str | None
    station_m: float | None = None
    side: str | None = None
    why: str | None = None
    reason: str | None = None
    other_place: str | None = None
    waiver: WaiverState | None = None

    @property
    def word(self) -> str:
        """The status as people read it: a failing limit with a waiver is "waived"."""
        return WAIVED if self.waiver is not None else self.status


@dataclass(frozen=True, slots=True)
class FileVerdict(Record):
    """The limits of one project, worst first; `file` is its name, `pull_N` the pull it was judged at.

    It holds if every limit holds or is waived. `findings`: what is hardly meant in the
    input, waivers that are expired or excuse nothing, what the line shows that is hardly meant, what no limit judges.
    `sources`: where its numbers come from, where asked for.
    """

    file: str
    holds: bool
    limits: tuple[LimitState, ...]
    project: str = ""
    input_sha256: str | None = None
    pull_N: float | None = None
    findings: tuple[str, ...] = ()
    sources: tuple[SourceLine, ...] = ()


@dataclass(frozen=True, slots=True, repr=False)
class VetReport(Record):
    """Every limit of one or more projects; the document of ``vet --json``. It holds if every limit of every file does.

    >>> VetReport.of([]).holds
    True
    """

    FORMAT: ClassVar[str] = "tautwise-vet 1"

    holds: bool
    files: tuple[FileVerdict, ...]
    program: str = ""
    caution: str = CAUTION

    @classmethod
    def of(cls, files: Iterable[FileVerdict], program: str = "") -> VetReport:
        """One report of several files."""
        listed = tuple(files)
        return cls(all(each.holds for each in listed), listed, program)

    @property
    def limits(self) -> tuple[LimitState, ...]:
        """The limits of all files, worst first within each."""
        return tuple(limit for file in self.files for limit in file.limits)

    def to_dataframe(self) -> Any:
        """The limits as a pandas data frame, a row for each."""
        rows = [{"file": file.file, **limit.to_dict()} for file in self.files for limit in file.limits]
        return pandas_module().DataFrame(rows)

    def _head(self) -> str:
        failing = sum(limit.word not in (HOLDS, WAIVED) for limit in self.limits)
        waived = sum(limit.word == WAIVED for limit in self.limits)
        count = plural(len(self.limits), "limit")
        more = f" but {waived} waived" if waived else ""
        return f"VetReport: {count}, all hold{more}" if self.holds else f"VetReport: {failing} of {count} do not hold"

    def __repr__(self) -> str:
        return clipped(self._head(), limit_table(self.limits).lines())

    def _repr_html_(self) -> str:
        return limit_table(self.limits).html(self._head())


def worst_first(limits: Iterable[LimitState]) -> tuple[LimitState, ...]:
    """Failing limits first, then undecided ones, then waived ones, then by how far they are used."""
    return tuple(sorted(limits, key=lambda limit: (_RANK[limit.word], -(limit.utilisation or 0.0))))


def worst_of_each(limits: Iterable[LimitState]) -> tuple[LimitState, ...]:
    """Of each limit the worst row, from rows that are worst first."""
    worst: dict[str, LimitState] = {}
    for limit in limits:
        worst.setdefault(limit.id, limit)
    return tuple(worst.values())


def limit_table(limits: Iterable[LimitState]) -> Table:
    """A row for each limit: how far it is used, what it came to, what is allowed."""
    columns = (
        text_column("limit"),
        text_column("status"),
        number_column("used", "%", 1),
        Column("value", decimals=0),
        Column("allowed", decimals=0),
        Column("to spare", decimals=0),
        text_column("unit"),
        text_column("condition"),
        text_column("worst at"),
    )
    return Table(columns, tuple(_row(limit) for limit in limits))


def _row(limit: LimitState) -> tuple[float | str | None, ...]:
    unit = None if limit.allowed is None else limit.unit  # which of N and kN it would be, nobody knows
    numbers = shown_values(unit, limit.allowed, limit.value, limit.allowed, limit.margin)
    used = None if limit.utilisation is None else 100.0 * limit.utilisation
    return (limit.id, limit.word.upper() if limit.word == FAILS else limit.word, used, *numbers,
            limit.condition, both_places(limit.place, limit.other_place))  # fmt: skip


def both_places(place: str | None, other_place: str | None) -> str | None:
    """Where a limit is worst, and of a spacing where the other line is closest.

    >>> both_places("A to B, station 20.0 m", "upper.taut.toml: C to D, station 8.0 m")
    'A to B, station 20.0 m; upper.taut.toml: C to D, station 8.0 m'
    """
    return place if not other_place else f"{place}; {other_place}"


def shown_values(unit: str | None, allowed: float | None, *values: float | None) -> tuple[str | None, ...]:
    """Values of a limit and their unit, all as the allowed one asks for.

    >>> shown_values("N", 72e3, 45.67e3, 72e3)
    ('45.67', '72.00', 'kN')
    """
    if unit is None:
        return (*(None for _ in values), None)
    name, divisor, decimals = human_unit(unit, allowed)
    return (*(_shown(value, divisor, decimals) for value in values), name)


def human_unit(unit: str, allowed: float | None) -> tuple[str, float, int]:
    """Unit shown, what SI is divided by, decimals: kN from 1 kN on, slopes in percent.

    >>> human_unit("N", 25e3), human_unit("m", 6.5), human_unit("1", 0.1)
    (('kN', 1000.0, 2), ('m', 1.0, 3), ('%', 0.01, 2))
    """
    if unit == "N":
        return ("kN", 1e3, 2) if abs(allowed or 0.0) >= 1e3 else ("N", 1.0, 1)
    if unit == "m":
        return ("m", 1.0, 3 if abs(allowed or 0.0) < 100.0 else 1)
    return ("%", 0.01, 2) if unit == "1" else (unit, 1.0, 2)


def _shown(value: float | None, divisor: float, decimals: int) -> str:
    return NOTHING if value is None else f"{value / divisor:.{decimals}f}"
