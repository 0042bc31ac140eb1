"""Points measured on a hanging line: a CSV file with one point a line, read strictly.

A header names the columns with their units: ``station_m,elevation_m`` (or ``_ft``), and where there are such
``temperature_degC`` (or ``_degF``), ``offset_m``, ``sigma_m`` (or ``_ft``), ``point`` and ``date``, in any order.

>>> survey = survey_of("station_m,elevation_m\\n40,17.25\\n80,13.5\\n", "points.csv", temperature_degC=12.0)
>>> survey.stations_m, survey.elevations_m, survey.temperatures_degC, survey.names
((40.0, 80.0), (17.25, 13.5), (12.0, 12.0), ('line 2', 'line 3'))
"""

from __future__ import annotations

import hashlib
import math
import os
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from tautwise.csvlines import CsvLines, numbered_lines
from tautwise.errors import Fault, InputError
from tautwise.reader import read_text
from tautwise.strict import Refused, described, did_you_mean, shown, strict_day, strict_float
from tautwise.units import quantity

CSV_BYTES_MOST = 4_000_000
POINTS_MOST = 20_000
TEMPERATURES_MOST = 1000
NAME_MOST = 60

_FOOT = 0.3048
_LENGTHS = ("station", "elevation", "offset", "sigma")
_SCALES: dict[str, Callable[[float], float]] = {
    **{f"{kind}_m": float for kind in _LENGTHS},
    **{f"{kind}_ft": lambda value: value * _FOOT for kind in _LENGTHS},
    "temperature_degC": float,
    "temperature_degF": lambda value: (value - 32.0) / 1.8,
}
_COLUMNS = (*_SCALES, "point", "date")
_HEADER = "station_m,elevation_m,temperature_degC"
_EXAMPLES = {"station": "120.0", "elevation": "17.25", "offset": "0.05", "sigma": "0.02", "temperature": "18.5"}


@dataclass(frozen=True)
class Survey:
    """Points measured on one hanging line, bare and in still air.

    Fields
    ------
    stations_m, elevations_m, temperatures_degC: of each point; the temperature is the line's.
    offsets_m, sigmas_m: None where they were not measured or not given; sigmas for every point or for none.
    dates: as "2026-05-03", or None. names: of the points. lines: of the file; empty where there is none.
    source, sha256: the file, or None.

    >>> Survey.of([40.0, 80.0], [17.25, 13.5], temperature="12 degC").count
    2
    """

    stations_m: tuple[float, ...]
    elevations_m: tuple[float, ...]
    temperatures_degC: tuple[float, ...]
    offsets_m: tuple[float | None, ...]
    sigmas_m: tuple[float | None, ...]
    dates: tuple[str | None, ...]
    names: tuple[str, ...]
    lines: tuple[int, ...] = ()
    source: str | None = None
    sha256: str | None = None

    @property
    def count(self) -> int:
        """How many points there are."""
        return len(self.stations_m)

    @property
    def has_sigmas(self) -> bool:
        """Whether the standard deviations of the measurements are given."""
        return any(sigma is not None for sigma in self.sigmas_m)

    @classmethod
    def of(
        cls,
        stations_m: Iterable[float],
        elevations_m: Iterable[float],
        temperature: float | str | Iterable[float],
        offsets_m: Iterable[float] | None = None,
        sigmas_m: float | Iterable[float] | None = None,
    ) -> Survey:
        """A survey from numbers in m.

        Parameters
        ----------
        temperature: of the line, degC or text with a unit; one, or one for each point.
        offsets_m: NaN where not measured. sigmas_m: standard deviation, one or one for each point.

        Raises
        ------
        InputError: the columns differ in length, or hold what is no number.
        """
        stations = tuple(map(float, stations_m))
        count = len(stations)
        several = isinstance(temperature, Iterable) and not isinstance(temperature, str)
        one = () if several else temperature_of(temperature)
        sigmas = [sigmas_m] * count if isinstance(sigmas_m, int | float) else sigmas_m
        columns: dict[str, tuple[Any, ...]] = {
            "elevations_m": tuple(map(float, elevations_m)),
            "temperature": tuple(map(float, temperature)) if several else (one,) * count,  # type: ignore[arg-type]
            "offsets_m": (None,) * count if offsets_m is None else tuple(map(_maybe, offsets_m)),
            "sigmas_m": (None,) * count if sigmas is None else tuple(map(_maybe, sigmas)),
        }
        faults = [
            Fault(None, None, name, f"{len(values)} values", f"{count}, one for each station")
            for name, values in columns.items()
            if len(values) != count
        ]
        if faults:
            raise InputError(faults)
        names = tuple(f"point {number}" for number in range(1, count + 1))
        return cls(
            stations, columns["elevations_m"], columns["temperature"], columns["offsets_m"], columns["sigmas_m"],
            (None,) * count, names,
        )  # fmt: skip

    def columns(self) -> dict[str, list[float]]:
        """Plain columns as the core takes them, NaN where nothing was measured."""
        return {
            "station_m": list(self.stations_m),
            "elevation_m": list(self.elevations_m),
            "temperature_degC": list(self.temperatures_degC),
            "offset_m": [math.nan if value is None else value for value in self.offsets_m],
            "sigma_m": [math.nan if value is None else value for value in self.sigmas_m],
        }

    def fault(self, index: int, column: str, problem: str, expected: str = "", example: str = "") -> Fault:
        """What is wrong with a number of one point."""
        if self.lines:
            return Fault(self.source, self.lines[index], column, problem, expected, example)
        return Fault(self.source, None, f"{self.names[index]}: {column}", problem, expected, example)

    def whole_fault(self, problem: str, expected: str = "", example: str = "") -> Fault:
        """What is wrong with the survey as a whole."""
        return Fault(self.source, None, "", problem, expected, example)


def read_survey(path: str | os.PathLike[str], temperature: float | str | None = None) -> Survey:
    """Read the points of a survey from a CSV file.

    Parameters
    ----------
    path: comma-separated, UTF-8, at most 4 MB and 20,000 points.
    temperature: of the line during the survey, degC or text with a unit; where the file has no such column.

    Raises
    ------
    InputError: everything that is wrong with the file, each fault with its line and column.
    """
    name = os.fspath(path)
    degrees = None if temperature is None else temperature_of(temperature)
    text, source = read_text(Path(name), name, CSV_BYTES_MOST)
    return survey_of(text, name, degrees, source.sha256)


def temperature_of(given: object) -> float:
    """A temperature in degC, from a number or a text with its unit.

    >>> temperature_of("68 degF"), temperature_of(18)
    (20.0, 18.0)
    """
    try:
        if isinstance(given, int | float) and not isinstance(given, bool) and math.isfinite(given):
            return float(given)
        return quantity(given, "degC")
    except Refused as refused:
        fault = Fault(None, None, "temperature", refused.problem, refused.expected, refused.example)
        raise InputError([fault]) from None


def survey_of(text: str, name: str, temperature_degC: float | None = None, sha256: str | None = None) -> Survey:
    """The survey that a CSV text holds; parameters and errors as in `read_survey`."""
    return _Reader(name, temperature_degC).read(text, sha256 or hashlib.sha256(text.encode()).hexdigest())


class _Reader(CsvLines):
    """Reads the CSV of one survey, gathering its faults."""

    def __init__(self, name: str, temperature_degC: float | None) -> None:
        super().__init__(name)
        self.temperature_degC = temperature_degC

    def read(self, text: str, sha256: str) -> Survey:
        numbered = numbered_lines(text)
        header_line, header = numbered[0]
        columns = self.header(header_line, header)
        self.give_up()
        if len(numbered) - 1 > POINTS_MOST:
            self.fault(header_line, f"{len(numbered) - 1} points; at most {POINTS_MOST} are read")
        if len(numbered) < 2:
            self.fault(header_line, "no points below the header", "a point on each line", "120.0,17.25,18.5")
        self.give_up()
        rows = self.rows(numbered[1:])
        points = [self.point(number, row, columns) for number, row in rows]
        if not self.faults and len(points) != len(numbered) - 1:
            self.fault(header_line, f"{len(numbered) - 1} lines hold {len(points)} rows", "one row on each line")
        self.temperatures(header_line, points)
        self.give_up()
        return self.survey([number for number, _ in rows], points, sha256)

    def header(self, number: int, line: str) -> list[str]:
        names = [cell.strip() for cell in self.row(number, line) or []]
        kinds = [_kind(name) for name in names]
        for name in names:
            if name not in _COLUMNS:
                hint = did_you_mean(name, _COLUMNS) if name else "a column without a name"
                self.fault(number, f'there is no column "{shown(name)}"; {hint}', "", "", shown(name))
        for kind in dict.fromkeys(kinds):
            if kinds.count(kind) > 1:
                self.fault(number, "this column stands here twice", "", "", kind)
        for kind in ("station", "elevation"):
            if kind not in kinds:
                self.fault(number, "missing", f"a column {kind}_m or {kind}_ft", _HEADER, kind)
        if "temperature" not in kinds and self.temperature_degC is None:
            expected = 'the line\'s temperature: a column temperature_degC, or --temperature "18 degC"'
            self.fault(number, "missing", expected, _HEADER, "temperature")
        if "temperature" in kinds and self.temperature_degC is not None:
            self.fault(number, "given twice: in the file and with the command or the call", "", "", "temperature")
        return names

    def point(self, number: int, row: list[str], columns: Sequence[str]) -> dict[str, Any]:
        if len(row) != len(columns):
            self.fault(number, f"{len(row)} values", f"{len(columns)}, one for each column of the header")
            return {}
        found: dict[str, Any] = {}
        for column, cell in zip(columns, (cell.strip() for cell in row), strict=True):
            found[_kind(column)] = self.cell(number, column, cell)
        return found

    def cell(self, number: int, column: str, cell: str) -> float | str | None:
        kind = _kind(column)
        if kind in ("point", "date"):
            return self.word(number, kind, cell)
        if not cell and kind == "offset":
            return None
        try:
            value = _SCALES[column](strict_float(cell))
        except Refused as refused:
            problem = refused.problem if cell else "an empty value"
            self.fault(number, problem, "a number", _EXAMPLES[kind], column)
            return None
        if kind == "sigma" and value <= 0.0:
            self.fault(number, f"{shown(cell)} is no standard deviation", "a number above 0", "0.02", column)
        return value

    def word(self, number: int, kind: str, cell: str) -> str | None:
        if kind == "date" and cell and strict_day(cell) is None:
            self.fault(number, f'"{shown(cell)}" is no date', "year-month-day", "2026-05-03", kind)
        if kind == "point" and (len(cell) > NAME_MOST or not cell.isprintable()):
            self.fault(number, f'"{shown(cell)}" is no name', f"up to {NAME_MOST} characters", "B-12", kind)
        return cell or None

    def temperatures(self, line: int, points: Sequence[dict[str, Any]]) -> None:
        different = len({point.get("temperature") for point in points})
        if different > TEMPERATURES_MOST:
            self.fault(line, f"{different} different temperatures; at most {TEMPERATURES_MOST} are read")

    def survey(self, numbers: Sequence[int], points: Sequence[dict[str, Any]], sha256: str) -> Survey:
        def column(kind: str, missing: Any = None) -> tuple[Any, ...]:
            return tuple(point.get(kind, missing) for point in points)

        return Survey(
            column("station"), column("elevation"), column("temperature", self.temperature_degC), column("offset"),
            column("sigma"), column("date"),
            tuple(point.get("point") or f"line {n}" for n, point in zip(numbers, points, strict=True)),
            tuple(numbers), self.name, sha256,
        )  # fmt: skip


def survey_from(given: object, temperature: float | str | None) -> Survey:
    """A survey as callers give it: one that was read, or the name of its file."""
    if isinstance(given, Survey):
        if temperature is not None:
            problem = "given twice: in the survey and with the call"
            raise InputError([Fault(given.source, None, "temperature", problem)])
        return given
    if not isinstance(given, str | os.PathLike):
        raise InputError([Fault(None, None, "survey", f"{described(given)} where a file name or a Survey is needed")])
    return read_survey(given, temperature)


def _kind(column: str) -> str:
    return column.split("_")[0]


def _maybe(value: float | None) -> float | None:
    return None if value is None or math.isnan(value) else float(value)
