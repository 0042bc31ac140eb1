"""The ground profile: a CSV file with a station and an elevation column, or points in the project file."""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from pathlib import Path
from typing import Any

from tautwise.csvlines import CsvLines, numbered_lines
from tautwise.errors import Fault, InputError
from tautwise.reader import Document, Source, inside_folder, read_text
from tautwise.strict import Refused, described, did_you_mean, shown, strict_float
from tautwise.units import quantity

CSV_BYTES_MOST = 16_000_000
CSV_POINTS_MOST = 500_000
POINTS_MOST = 10_000

_COLUMNS = {"station_m": 1.0, "elevation_m": 1.0, "station_ft": 0.3048, "elevation_ft": 0.3048}
_HEADER = "station_m,elevation_m"
_POINTS = ("a list of points [station, elevation]", 'points = [["0 m", "3 m"], ["240 m", "5 m"]]')


@dataclass(frozen=True)
class Ground:
    """A ground profile, straight between its points.

    Fields
    ------
    stations_m: strictly increasing, at least two.
    elevations_m: one for each station.
    profile: name of the CSV file; None for points of the project file.

    >>> Ground((0.0, 100.0), (2.0, 4.0)).elevation(25.0)
    2.5
    """

    stations_m: tuple[float, ...]
    elevations_m: tuple[float, ...]
    profile: str | None = None

    def elevation(self, station_m: float) -> float:
        """Elevation of the ground, m, at a station, which must lie on the profile."""
        last = len(self.stations_m) - 2
        left = min(max(bisect_right(self.stations_m, station_m) - 1, 0), last)
        x0, x1 = self.stations_m[left : left + 2]
        z0, z1 = self.elevations_m[left : left + 2]
        return z0 + (z1 - z0) * (station_m - x0) / (x1 - x0)

    def covers(self, from_m: float, to_m: float) -> bool:
        """Whether the profile reaches from one station to another."""
        return self.stations_m[0] <= from_m and to_m <= self.stations_m[-1]


def csv_ground(document: Document, profile: str) -> tuple[Ground, Source]:
    """Read the ground profile that ``ground.profile`` names.

    The file: comma-separated, a header with ``station_m,elevation_m`` (or ``_ft``), one point a line, stations
    increasing; at most 16 MB and 500,000 points.

    Raises
    ------
    InputError: everything that is wrong with the file, with its own line numbers.
    """
    at = ("ground", "profile")
    named_in, _ = document.where(at)
    folder = Path(named_in).parent if named_in else document.folder
    file = folder / profile
    example = 'profile = "ground.csv"'
    if not inside_folder(document.folder, file):
        problem = f'"{shown(profile)}" is outside the project\'s folder'
        raise InputError([document.fault(at, problem, "a file in the project's folder or below it", example)])
    if not file.is_file():
        raise InputError([document.fault(at, f'there is no file "{shown(profile)}"', "a CSV file", example)])
    name = str(Path(named_in).parent / profile) if named_in else profile
    text, source = read_text(file, name, CSV_BYTES_MOST)
    return _Csv(name).read(text, profile), source


def point_ground(document: Document, points: Any) -> Ground:
    """The ground profile that ``ground.points`` lists.

    Raises
    ------
    InputError: everything that is wrong with the points.
    """
    at = ("ground", "points")
    if not isinstance(points, list | tuple) or not 2 <= len(points) <= POINTS_MOST:
        size = f" of {len(points)}" if isinstance(points, list | tuple) else ""
        problem = f"{described(points)}{size} where 2 to {POINTS_MOST} points are needed"
        raise InputError([document.fault(at, problem, *_POINTS)])
    faults: list[Fault] = []
    pairs = [_point(document, number, point, faults) for number, point in enumerate(points)]
    for number, ((before, _), (after, _)) in enumerate(pairwise(pairs), start=1):
        if after <= before:
            problem = f"station {after:g} m does not lie beyond the one before it, {before:g} m"
            faults.append(document.fault((*at, number), problem, "stations that increase"))
    if faults:
        raise InputError(faults)
    return Ground(tuple(station for station, _ in pairs), tuple(elevation for _, elevation in pairs))


def _point(document: Document, number: int, point: Any, faults: list[Fault]) -> tuple[float, float]:
    at = ("ground", "points", number)
    if not isinstance(point, list | tuple) or len(point) != 2:
        faults.append(document.fault(at, f"{described(point)} is no point", "[station, elevation]", '["0 m", "3 m"]'))
        return float("nan"), float("nan")
    values = [float("nan"), float("nan")]
    for index, part in enumerate(point):
        try:
            values[index] = quantity(part, "m")
        except Refused as refused:
            faults.append(document.fault((*at, index), refused.problem, refused.expected, refused.example))
    return values[0], values[1]


class _Csv(CsvLines):
    """Reads one CSV file, gathering its faults."""

    def read(self, text: str, profile: str) -> Ground:
        numbered = numbered_lines(text)
        header_line, header = numbered[0]
        columns = self.header(header_line, header)
        if len(numbered) - 1 > CSV_POINTS_MOST:
            self.fault(header_line, f"{len(numbered) - 1} points; at most {CSV_POINTS_MOST} are read")
        self.give_up()
        rows = self.rows(numbered[1:])
        points = [self.point(number, row, columns) for number, row in rows]
        if not self.faults and len(points) != len(numbered) - 1:
            self.fault(header_line, f"{len(numbered) - 1} lines hold {len(points)} rows", "one row on each line")
        self.increasing([number for number, _ in rows], [point[0] for point in points])
        if not self.faults and len(points) < 2:
            self.fault(header_line, f"the profile has {len(points)} points", "two or more")
        self.give_up()
        return Ground(tuple(point[0] for point in points), tuple(point[1] for point in points), profile)

    def header(self, number: int, line: str) -> list[str]:
        names = [cell.strip() for cell in self.row(number, line) or []]
        kinds = [name.split("_")[0] for name in names]
        if all(name in _COLUMNS for name in names) and sorted(kinds) == ["elevation", "station"]:
            return names
        wrong = [name for name in names if name not in _COLUMNS]
        problem = f'the header is "{shown(line)}"'
        if wrong and len(names) == 2:
            problem += f"; {did_you_mean(wrong[0], _COLUMNS)}"
        self.fault(number, problem, "the columns station_m and elevation_m (or _ft)", _HEADER)
        return []

    def point(self, number: int, row: list[str], columns: list[str]) -> tuple[float, float]:
        values = {"station": float("nan"), "elevation": float("nan")}
        if len(row) != 2:
            self.fault(number, f"{len(row)} values", "two values", "120.0,4.5")
            return values["station"], values["elevation"]
        for column, cell in zip(columns, row, strict=True):
            try:
                values[column.split("_")[0]] = strict_float(cell.strip()) * _COLUMNS[column]
            except Refused as refused:
                problem = refused.problem if cell.strip() else "an empty value"
                self.fault(number, problem, f"a number in the column {column}", "120.0")
        return values["station"], values["elevation"]

    def increasing(self, numbers: Sequence[int], stations: Sequence[float]) -> None:
        for number, (before, after) in zip(numbers[1:], pairwise(stations), strict=False):
            if after <= before:
                problem = f"station {after:g} m does not lie beyond the one before it, {before:g} m"
                self.fault(number, problem, "stations that increase")
