"""A project: a line, its supports, ground, conditions and limits, read from a file or built from keyword arguments.

>>> project = Project(
...     line={"diameter": "16 mm", "weight": "11.9 N/m", "stiffness": "22.5 MN", "expansion": "11.5e-6 / K"},
...     support=[
...         {"name": "West", "station": "0 m", "elevation": "24 m"},
...         {"name": "East", "station": "300 m", "elevation": "24 m"},
...     ],
...     stringing={"temperature": "15 degC", "horizontal_tension": "20 kN"},
...     condition=[{"name": "hot", "temperature": "60 degC"}],
... )
>>> project.supports[1].station_m, project.conditions[0].name, project.line.weight_N_per_m
(300.0, 'hot', 11.9)
"""

from __future__ import annotations

import datetime
import hashlib
import inspect
import json
import os
from pathlib import Path
from typing import TYPE_CHECKING, Any, cast

from pydantic import BaseModel, ConfigDict, PrivateAttr, SerializeAsAny

from tautwise.additions import add_to
from tautwise.check import Checked, read_tables, stations_in_plan
from tautwise.errors import Fault, InputError
from tautwise.from_core import file_path
from tautwise.keylines import Path as KeyPath
from tautwise.limits import BaseLimit
from tautwise.others import other_rules
from tautwise.plausible import warnings_of
from tautwise.profile import Ground
from tautwise.reader import Document, Source, read_project, shown_path
from tautwise.rules import line_rules, place_rules, stringing_rules, support_rules
from tautwise.rules_curves import curve_rules, history_rules
from tautwise.rules_loading import limit_rules, mark_rules
from tautwise.rules_loads import condition_rules
from tautwise.size_records import Size
from tautwise.sources import SourceLine
from tautwise.strict import described, did_you_mean, shown
from tautwise.tables import Condition, Crossing, History, Line, Mark, Stringing, Support
from tautwise.to_core import problem_of
from tautwise.waivers import Waiver

if TYPE_CHECKING:
    from tautwise.neighbours import Neighbour
    from tautwise.results import CrewSheet, Equilibrium, PullWindow, SurveyFit, VetReport
    from tautwise.solve_sheet import Temperatures
    from tautwise.survey import Survey

RULES = (
    line_rules,
    curve_rules,
    history_rules,
    support_rules,
    place_rules,
    stringing_rules,
    condition_rules,
    mark_rules,
    limit_rules,
    other_rules,
)
TABLES = ("title", "line", "ground", "crossing", "support", "stringing", "history", "condition", "mark", "limit")


class Project(BaseModel):
    """A checked project; frozen, SI inside.

    Parameters
    ----------
    Keyword arguments with the keys and the nesting of a project file; quantities as text with a unit or as pint
    quantities. A relative ``ground.profile`` is looked for in the working directory.

    Attributes
    ----------
    title: of the project, possibly empty.
    line, ground (or None), stringing, history: the tables.
    supports, crossings, conditions, marks, limits, waivers: the arrays of tables, in the order of the file; conditions
        and limits of rule packs follow.
    source: the project file as the user named it; None for keyword arguments.
    input_sha256: the SHA-256 of the file. With included files, a ground profile, files of sizes, or projects that a
        spacing keeps from: of the lines "HASH  NAME" of all of them, as ``sha256sum`` prints them. For keyword
        arguments: of their canonical JSON.
    warnings: values that can be read but are hardly meant, and which of two sizes or rules was taken, one line each.
    origins: where each value of its size and its rule packs comes from.

    Raises
    ------
    InputError: everything that is wrong, in one go.
    """

    model_config = ConfigDict(frozen=True, extra="forbid", arbitrary_types_allowed=True)

    title: str
    line: Line
    ground: Ground | None
    stringing: Stringing
    history: History = History()
    crossings: tuple[Crossing, ...]
    supports: tuple[Support, ...]
    conditions: tuple[Condition, ...]
    marks: tuple[Mark, ...]
    limits: tuple[SerializeAsAny[BaseLimit], ...]
    waivers: tuple[Waiver, ...]
    source: str | None
    input_sha256: str
    _document: Document = PrivateAttr()
    _warnings: tuple[str, ...] = PrivateAttr(default=())
    _others: dict[int, Project] = PrivateAttr(default_factory=dict)
    _neighbours: dict[tuple[str, str | None], Any] = PrivateAttr(default_factory=dict)

    def __init__(self, **tables: Any) -> None:
        document = Document(_without_none(tables), sources=[_keyword_source(tables)])
        self._fill(document)

    @classmethod
    def _of(cls, document: Document) -> Project:
        project = cls.__new__(cls)
        project._fill(document)
        return project

    def _fill(self, document: Document) -> None:
        added = add_to(document)
        values, others = _checked_values(document)
        BaseModel.__init__(self, **values)
        self._document = document
        self._others = others
        self._neighbours = {}
        self._warnings = (*added.notes, *warnings_of(self, document))

    @property
    def warnings(self) -> tuple[str, ...]:
        """Values that can be read but are hardly meant, and what was taken instead of what; one line each."""
        return self._warnings

    @property
    def origins(self) -> tuple[SourceLine, ...]:
        """Where each value of the size and the rule packs comes from."""
        added = self._document.additions
        return tuple(added.origins) if added else ()

    @property
    def size(self) -> Size | None:
        """The size that [line] names, or None."""
        added = self._document.additions
        return added.size if added else None

    def place(self, path: KeyPath) -> str:
        """File and line of a key, or its path where there is no file."""
        file, line = self._document.where(path)
        return f"{file}:{line}" if file else shown_path(path, self._document.tables)

    def condition_index(self, name: str) -> int:
        """The number of a condition, from 0.

        Raises
        ------
        InputError: there is no such condition.
        """
        names = [condition.name for condition in self.conditions]
        if not isinstance(name, str):
            raise InputError([Fault(self.source, None, "condition", f"{described(name)} is no condition's name")])
        if name not in names:
            problem = f'there is no condition "{shown(name)}"; {did_you_mean(name, names)}'
            raise InputError([Fault(self.source, None, "", problem)])
        return names.index(name)

    @property
    def turns(self) -> bool:
        """Whether the route turns in plan: supports are given by east and north."""
        return self.supports[0].turns

    def elevation_m(self, support: Support) -> float:
        """Elevation, m, of the point where a support's hold is fixed."""
        if support.given_elevation_m is not None:
            return support.given_elevation_m
        ground = cast(Ground, self.ground)  # a height without a ground profile is refused when read
        return ground.elevation(support.station_m) + cast(float, support.height_m)

    @property
    def others(self) -> dict[int, Project]:
        """The projects that spacings keep from, by the number of the limit."""
        return self._others

    def neighbour(self, number: int, condition: str) -> Neighbour:
        """The line that the spacing with a number keeps from, settled in a condition of its own; settled once.

        Raises
        ------
        NotSettledError: it has no equilibrium within tolerance; the message names its file.
        """
        other = self._others[number]
        key = (other.source or "", condition)
        if key not in self._neighbours:
            from tautwise.neighbours import neighbour_of

            self._neighbours[key] = neighbour_of(other, condition)
        return cast("Neighbour", self._neighbours[key])

    def neighbour_as_strung(self, number: int, near: Neighbour) -> Neighbour | None:
        """The same line as strung, bare; settled once."""
        other = self._others[number]
        key = (other.source or "", None)
        if key not in self._neighbours:
            from tautwise.neighbours import as_strung

            self._neighbours[key] = as_strung(other, near)
        return cast("Neighbour | None", self._neighbours[key])

    def to_core(self, judging: bool = True) -> dict[str, Any]:
        """The problem as ``tautwise._core.Project`` takes it: plain values in SI, names resolved to indices.

        Parameters
        ----------
        judging: False leaves out other lines, which then need not be settled, and with them the spacings.
        """
        return problem_of(self, judging)

    def core_fault(self, path: str, problem: str, expected: str = "") -> Fault:
        """A fault that the core found (path such as ``supports[2].hanger_length_m``), at the key in the file."""
        return self._document.fault(file_path(self, path), problem, expected)

    def core_raw(self, path: str) -> Any:
        """What the file holds under the key that a path of the core means; None where there is none."""
        value: Any = self._document.tables
        for part in file_path(self, path):
            try:
                value = value[part]
            except (KeyError, IndexError, TypeError):
                return None
        return value

    def settle(self, condition: str | None = None, pull: float | str | None = None) -> Equilibrium:
        """The equilibrium in one condition, for the given stringing.

        Parameters
        ----------
        condition: its name; may be left out where there is only one.
        pull: horizontal tension at stringing in N, or as text with a unit, instead of the stringing rule.
        """
        import tautwise.solve as solve

        return solve.settle(self, condition, pull=pull)

    def settle_all(self, pull: float | str | None = None) -> tuple[Equilibrium, ...]:
        """The equilibrium in every condition, in the order of the file; `pull` as in `settle`."""
        import tautwise.solve as solve

        return solve.settle_all(self, pull=pull)

    def window(self, **options: Any) -> PullWindow:
        """The pretension window: the pulls that keep every limit in every condition, and the pull to specify."""
        import tautwise.solve as solve

        return solve.window(self, **options)

    def vet(self, pull: float | str | None = None, today: datetime.date | None = None) -> VetReport:
        """Every limit in every condition, for the given stringing; `pull` as in `settle`.

        Waivers are judged for the day `today`, by default the day it is.
        """
        import tautwise.solve as solve

        return solve.vet(self, pull=pull, today=today)

    def sheet(self, temperatures_degC: Temperatures = None, pull: float | str | None = None) -> CrewSheet:
        """What a crew needs to string the line: lengths to cut, sags by temperature, clipping offsets, return waves.

        Parameters
        ----------
        temperatures_degC: of the line; by default from 25 K below to 25 K above the stringing temperature.
        pull: as in `settle`.
        """
        from tautwise.solve_sheet import sheet

        return sheet(self, temperatures_degC, pull=pull)

    def fit(
        self,
        survey: Survey | str | os.PathLike[str],
        unknown: str = "pull",
        temperature: float | str | None = None,
        **options: Any,
    ) -> SurveyFit:
        """The line that hangs closest to measured points; parameters and errors as in :func:`tautwise.fit.fit`."""
        from tautwise.fit import fit

        return fit(self, survey, unknown=unknown, temperature=temperature, **options)

    def __repr__(self) -> str:
        counts = (("support", self.supports), ("condition", self.conditions), ("limit", self.limits))
        words = ", ".join(f"{len(rows)} {word}{'' if len(rows) == 1 else 's'}" for word, rows in counts)
        return f"Project({self.title!r}: {words})"

    __str__ = __repr__


Project.__signature__ = inspect.Signature(  # the keys of a file, which are not the fields of the model
    [
        inspect.Parameter(key, inspect.Parameter.KEYWORD_ONLY, default=None, annotation=Any)
        for key in (*TABLES, "waiver", "rules")
    ]
)


def load(path: str | os.PathLike[str]) -> Project:
    """Read a project file.

    Parameters
    ----------
    path: the file, TOML, by convention ``NAME.taut.toml``. The ground profile and included files lie in its folder.

    Raises
    ------
    InputError: everything that is wrong with the file, each with file, line, key, expectation and example.
    """
    return Project._of(read_project(path))


def _checked_values(document: Document) -> tuple[dict[str, Any], dict[int, Project]]:
    checked = read_tables(document)
    for rule in () if document.incomplete else RULES:  # what they look for may stand in the file that is not there
        rule(checked)
    if checked.faults:
        raise InputError(checked.faults)
    values = _values(checked) | {"source": document.name, "input_sha256": _digest(document.sources)}
    return values, checked.others


def _values(checked: Checked) -> dict[str, Any]:
    return {
        "title": checked.head.title,
        "line": checked.line,
        "ground": checked.ground,
        "stringing": checked.stringing,
        "history": checked.history,
        "crossings": tuple(checked.crossings),
        "supports": _with_stations(checked),
        "conditions": tuple(checked.conditions),
        "marks": tuple(checked.marks),
        "limits": tuple(checked.limits),
        "waivers": tuple(checked.waivers),
    }


def _with_stations(checked: Checked) -> tuple[Support | None, ...]:
    """The supports; of a route that turns with their stations, which follow from the plan."""
    supports = checked.supports
    if not checked.turning():
        return tuple(supports)
    stations = stations_in_plan([support.plan_m for support in supports if support is not None])
    return tuple(
        None if support is None else support.model_copy(update={"station_m": station})
        for support, station in zip(supports, stations, strict=True)
    )


def _digest(sources: list[Source]) -> str:
    if len(sources) == 1:
        return sources[0].sha256
    folder = Path(sources[0].name).parent
    names = (os.path.relpath(source.name, folder) if source.name else "" for source in sources)
    lines = (f"{source.sha256}  {name}\n" for source, name in zip(sources, names, strict=True))
    return hashlib.sha256("".join(lines).encode()).hexdigest()


def _keyword_source(tables: dict[str, Any]) -> Source:
    text = json.dumps(_text_keys(tables), sort_keys=True, ensure_ascii=False, separators=(",", ":"), default=str)
    return Source("", hashlib.sha256(text.encode("utf-8", "surrogatepass")).hexdigest())


def _text_keys(value: Any) -> Any:
    """Without keys that are no text, which are refused later and cannot be sorted now."""
    if isinstance(value, dict):
        return {key: _text_keys(part) for key, part in value.items() if isinstance(key, str)}
    return [_text_keys(part) for part in value] if isinstance(value, list | tuple) else value


def _without_none(value: Any) -> Any:
    if isinstance(value, dict):
        return {key: _without_none(part) for key, part in value.items() if part is not None}
    if isinstance(value, list | tuple):
        return [_without_none(part) for part in value]
    return value
