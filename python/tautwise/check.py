"""From the tables of a document to checked models, gathering every fault on the way.

A table that fails does not hide what is wrong elsewhere: rules between tables look at whatever could be read.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from itertools import accumulate, pairwise
from typing import TYPE_CHECKING, Any, TypeVar

from pydantic import ValidationError

from tautwise.errors import Fault, InputError
from tautwise.faults import NOT_YET, example_of, faults_of, keys_of, slips_of, unknown_key
from tautwise.keylines import Path as KeyPath
from tautwise.limits import LIMITS, BaseLimit
from tautwise.profile import Ground, csv_ground, point_ground
from tautwise.reader import ARRAYS, Document
from tautwise.strict import Refused, described, did_you_mean, nearest, shown
from tautwise.tables import Condition, Crossing, GroundTable, Head, History, Line, Mark, Stringing, Support, Table
from tautwise.units import quantity
from tautwise.waivers import Waiver

if TYPE_CHECKING:
    from tautwise.model import Project

MOST = {"crossing": 2000, "support": 2000, "condition": 500, "mark": 2000, "limit": 500, "waiver": 500}
LOADS_MOST = 2000
TOP_TABLES = ("line", "ground", "stringing", "history")
TOP_KEYS = (*keys_of(Head), "include", *TOP_TABLES, *ARRAYS)

T = TypeVar("T", bound=Table)


@dataclass
class Checked:
    """What could be read of a document; None where a table is missing or wrong."""

    document: Document
    head: Head = field(default_factory=Head)
    line: Line | None = None
    ground: Ground | None = None
    ground_given: bool = False
    stringing: Stringing | None = None
    history: History | None = None
    crossings: list[Crossing | None] = field(default_factory=list)
    supports: list[Support | None] = field(default_factory=list)
    conditions: list[Condition | None] = field(default_factory=list)
    marks: list[Mark | None] = field(default_factory=list)
    limits: list[BaseLimit | None] = field(default_factory=list)
    waivers: list[Waiver | None] = field(default_factory=list)
    others: dict[int, Project] = field(default_factory=dict)
    faults: list[Fault] = field(default_factory=list)
    misspelt: set[KeyPath] = field(default_factory=set)

    def fault(self, path: KeyPath, problem: str, expected: str = "", example: str = "") -> None:
        """Note a fault at a key path, unless the key was misspelt and has its fault."""
        if not any(path[: len(one)] == one for one in self.misspelt):
            self.faults.append(self.document.fault(path, problem, expected, example))

    def slip(self, path: KeyPath, guess: str, known: Iterable[str]) -> None:
        """Note a misspelt key, and go on as if it were the right one, so that it is told once and has no follow-ups."""
        self.faults.append(unknown_key(self.document, path, known))
        self.document.rename(path, guess)
        if len(path) > 1:
            self.misspelt.add((*path[:-1], guess))

    def raw(self, *path: str | int) -> dict[str, Any]:
        """The table at a path as it was written; empty where there is none."""
        value: Any = self.document.tables
        for part in path:
            if isinstance(part, int):
                value = value[part] if isinstance(value, list | tuple) and 0 <= part < len(value) else None
            else:
                value = value.get(part) if isinstance(value, dict) else None
        return value if isinstance(value, dict) else {}

    def count(self, key: str) -> int:
        """How many tables an array of tables has, right or wrong."""
        value = self.document.tables.get(key)
        return len(value) if isinstance(value, list | tuple) else 0

    def names(self, key: str, label: str = "name") -> list[str | None]:
        """The names in an array of tables, None where there is no usable one."""
        written = [self.raw(key, number).get(label) for number in range(self.count(key))]
        return [name if isinstance(name, str) else None for name in written]

    def station(self, number: int) -> float | None:
        """The station of a support, even where something else about it is wrong; of a turning route None."""
        return self._length("support", number, "station")

    def turning(self) -> bool:
        """Whether supports are given by east and north: one is enough to ask it of all."""
        rows = [self.raw("support", number) for number in range(self.count("support"))]
        return any(row.get("east") is not None or row.get("north") is not None for row in rows)

    def plan(self, number: int) -> tuple[float, float] | None:
        """East and north of a support, even where something else about it is wrong."""
        east, north = (self._length("support", number, key) for key in ("east", "north"))
        return None if east is None or north is None else (east, north)

    def station_range(self) -> tuple[float, float] | None:
        """Stations of the first and the last support, where both could be read."""
        count = self.count("support")
        if count < 2:
            return None
        if self.turning():
            places = [place for place in map(self.plan, range(count)) if place is not None]
            return (0.0, stations_in_plan(places)[-1]) if len(places) == count else None
        first, last = self.station(0), self.station(count - 1)
        return None if first is None or last is None else (first, last)

    def _length(self, table: str, number: int, key: str) -> float | None:
        try:
            return quantity(self.raw(table, number).get(key), "m")
        except Refused:
            return None

    def listed(self, *path: str | int) -> list[str]:
        """The names in a list of names, those that are none left out; empty where there is no list."""
        value = self.raw(*path[:-1]).get(str(path[-1]))
        return [name for name in value if isinstance(name, str)] if isinstance(value, list | tuple) else []


def stations_in_plan(places: Sequence[tuple[float, float]]) -> list[float]:
    """Stations, m, of supports at plan coordinates: distances in plan from one to the next, added up.

    >>> stations_in_plan([(100.0, 50.0), (400.0, 50.0), (400.0, 450.0)])
    [0.0, 300.0, 700.0]
    """
    return [0.0, *accumulate(math.dist(before, after) for before, after in pairwise(places))]


def read_tables(document: Document) -> Checked:
    """Read each table by itself; rules between them come after."""
    checked = Checked(document, faults=list(document.faults))
    _top_keys(checked)
    head = {key: value for key, value in document.tables.items() if key in keys_of(Head)}
    checked.head = _table(checked, (), Head, head) or Head()
    checked.line = _required(checked, "line", Line, 'weight = "11.9 N/m"')
    checked.stringing = _required(checked, "stringing", Stringing, 'temperature = "15 degC"')
    checked.ground = _ground(checked)
    checked.history = _history(checked)
    checked.crossings = _array(checked, "crossing", Crossing)
    checked.supports = _array(checked, "support", Support)
    checked.conditions = _array(checked, "condition", Condition)
    checked.marks = _array(checked, "mark", Mark)
    checked.limits = [_limit(checked, number) for number in _numbers(checked, "limit")]
    checked.waivers = _array(checked, "waiver", Waiver)
    _unique_names(checked)
    if document.incomplete:
        there = [fault for fault in checked.faults if fault.problem != "missing" or fault in document.faults]
        checked.faults = there
    return checked


def exactly_one(checked: Checked, path: KeyPath, model: type[Table], keys: Sequence[str]) -> str | None:
    """Note a fault unless exactly one of some keys is given; the key where one is.

    More than one is reported at the last, where the reader's eye should stop.
    """
    given = [key for key in keys if checked.raw(*path).get(key) is not None]
    options = " or ".join((", ".join(keys[:-1]), keys[-1])) if len(keys) > 1 else keys[0]
    if not given:
        checked.fault(path, f"{options} is missing", "exactly one of them", example_of(model, keys[0]))
        return None
    if any((*path, key) in checked.misspelt for key in given):
        return given[0]
    if len(given) > 1:
        problem = f"{' and '.join(given)} are given at once"
        checked.fault((*path, given[-1]), problem, f"exactly one of {options}")
        return None
    return given[0]


def at_most_one(checked: Checked, path: KeyPath, model: type[Table], keys: Sequence[str]) -> str | None:
    """As `exactly_one`, but none is right too."""
    if any(checked.raw(*path).get(key) is not None for key in keys):
        return exactly_one(checked, path, model, keys)
    return None


def known_names(checked: Checked, path: KeyPath, array: str) -> None:
    """A fault for each name in the list at a path that no table of an array bears."""
    there = checked.names(array)
    listed = checked.listed(*path)
    for number, name in enumerate(listed):
        if name in listed[:number]:
            checked.fault((*path, number), f'"{shown(name)}" stands here twice')
        elif name not in there:
            known = [other for other in there if other]
            checked.fault((*path, number), f'there is no {array} "{shown(name)}"; {did_you_mean(name, known)}')


def _top_keys(checked: Checked) -> None:
    tables = checked.document.tables
    for key in [key for key in tables if key not in TOP_KEYS]:
        guess = None if key in NOT_YET else nearest(key, TOP_KEYS)
        if guess and guess not in tables:
            checked.slip((key,), guess, TOP_KEYS)
        else:
            checked.faults.append(unknown_key(checked.document, (key,), TOP_KEYS))


def _table(checked: Checked, path: KeyPath, model: type[T], raw: Any) -> T | None:
    try:
        return model.model_validate(raw)
    except ValidationError as error:
        if _slips(checked, path, model, error):
            return _table(checked, path, model, raw)
        checked.faults.extend(faults_of(error, model, checked.document, path, checked.misspelt))
        return None


def _slips(checked: Checked, at: KeyPath, model: type[Table], error: ValidationError) -> bool:
    """Note the misspelt keys of a table whose right ones are missing; whether there were any."""
    found = False
    for path, guess in slips_of(error, model):
        table = checked.raw(*at, *path[:-1])
        if guess not in table:
            checked.slip((*at, *path), guess, (guess,))
            found = True
    return found


def _required(checked: Checked, key: str, model: type[T], example: str) -> T | None:
    raw = checked.document.tables.get(key)
    if raw is None:
        if not checked.document.incomplete:
            checked.fault((), f"the table [{key}] is missing", f"[{key}] with its keys", example)
        return None
    return _table(checked, (key,), model, raw) if _is_table(checked, (key,), raw) else None


def _is_table(checked: Checked, path: KeyPath, raw: Any) -> bool:
    if isinstance(raw, dict):
        return True
    key = next(part for part in reversed(path) if isinstance(part, str))
    header = f"[[{key}]]" if key in ARRAYS else f"[{key}]"
    checked.fault(path, f"{described(raw)} where a table is needed", f"a table under {header}")
    return False


def _ground(checked: Checked) -> Ground | None:
    raw = checked.document.tables.get("ground")
    if raw is None:
        return None
    checked.ground_given = True
    if not _is_table(checked, ("ground",), raw):
        return None
    table = _table(checked, ("ground",), GroundTable, raw)
    given = exactly_one(checked, ("ground",), GroundTable, ("profile", "points"))
    if table is None or given is None:
        return None
    try:
        if table.profile is None:
            return point_ground(checked.document, table.points)
        ground, source = csv_ground(checked.document, table.profile)
    except InputError as error:
        checked.faults.extend(error.faults)
        return None
    checked.document.sources.append(source)
    return ground


def _history(checked: Checked) -> History | None:
    raw = checked.document.tables.get("history")
    if raw is None:
        return History()
    return _table(checked, ("history",), History, raw) if _is_table(checked, ("history",), raw) else None


def _array(checked: Checked, key: str, model: type[T]) -> list[T | None]:
    rows: list[T | None] = []
    for number in _numbers(checked, key):
        path = (key, number)
        raw = checked.document.tables[key][number]
        rows.append(_table(checked, path, model, raw) if _is_table(checked, path, raw) else None)
    return rows


def _numbers(checked: Checked, key: str) -> range:
    raw = checked.document.tables.get(key)
    if raw is None:
        return range(0)
    if not isinstance(raw, list | tuple):
        checked.fault((key,), f"{described(raw)} where a list of tables is needed", f"one table under each [[{key}]]")
        return range(0)
    if len(raw) > MOST[key]:
        checked.fault((key,), f"{len(raw)} tables; at most {MOST[key]} are read")
        return range(0)
    return range(len(raw))


def _limit(checked: Checked, number: int) -> BaseLimit | None:
    path = ("limit", number)
    raw = checked.document.tables["limit"][number]
    if not _is_table(checked, path, raw):
        return None
    if "kind" not in raw:
        known = {key for model in LIMITS.values() for key in keys_of(model)}
        slip = next((key for key in raw if key not in known and nearest(str(key), known) == "kind"), None)
        if slip is not None:
            checked.slip((*path, slip), "kind", ("kind",))
    kind = raw.get("kind")
    kinds = ", ".join(LIMITS)
    if kind is None:
        checked.fault((*path, "kind"), "missing", f"one of {kinds}", 'kind = "clearance"')
        return None
    model = LIMITS.get(kind) if isinstance(kind, str) else None
    if model is None:
        guess = did_you_mean(kind, LIMITS) if isinstance(kind, str) else ""
        problem = f"{described(kind)} is no kind of limit" + (f"; {guess}" if guess.startswith("did") else "")
        checked.fault((*path, "kind"), problem, f"one of {kinds}", 'kind = "clearance"')
        return None
    return _table(checked, path, model, raw)


def _unique_names(checked: Checked) -> None:
    for key in ARRAYS:
        label = "id" if key == "limit" else "name"
        seen: dict[str, int] = {}
        for number, name in enumerate(checked.names(key, label)):
            if name is None:
                continue
            if name in seen:
                file, line = checked.document.where((key, seen[name], label))
                place = f", at {file}:{line}" if file else ""
                problem = f'there is another {key} "{shown(name)}"{place}'
                checked.fault((key, number, label), problem, f"{'an' if label == 'id' else 'a'} {label} of its own")
            seen.setdefault(name, number)
