"""From a checked project through the C core to results: settle, window, vet.

The core judges ranges and computes; here its plain dictionaries become records, and its errors become ours, at the
key of the project file that is meant.
"""

from __future__ import annotations

import math
import os
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from itertools import pairwise
from typing import TYPE_CHECKING, Any, NoReturn

import numpy as np

from tautwise import _core
from tautwise.errors import Fault, InputError, NotSettledError, SearchCancelled
from tautwise.limits import GROUND, ClearanceLimit
from tautwise.places import Scenery
from tautwise.records import finite
from tautwise.results import (
    CAUTION,
    Equilibrium,
    FileVerdict,
    PullWindow,
    SettleReport,
    StrungState,
    VetReport,
)
from tautwise.solve_limits import limit_states, window_of
from tautwise.solve_line import conditions_of, equilibrium_of
from tautwise.strict import Refused
from tautwise.units import quantity

if TYPE_CHECKING:
    from tautwise.model import Project

Pull = float | str | None


def settle(project: Project, condition: str | None = None, *, pull: Pull = None, **options: Any) -> Equilibrium:
    """The equilibrium of a project's line in one condition.

    Parameters
    ----------
    condition: its name; may be left out where there is only one.
    pull: horizontal tension at stringing in N, or as text with a unit, instead of the project's stringing rule.
    options: of the core, such as ``gap_relative`` or ``elements_per_span``; defaults in ``_core.DEFAULTS``.

    Raises
    ------
    InputError: no such condition, no stringing, or natural lengths that leave the line slack.
    NotSettledError: no equilibrium within tolerance.
    """
    index = _condition_index(project, condition)
    newtons = pull_of(project, pull)
    core = core_of(project)
    found = _settled(project, core, index, newtons, options)
    return found.require_settled()


def settle_all(project: Project, *, pull: Pull = None, **options: Any) -> tuple[Equilibrium, ...]:
    """The equilibrium in every condition, in the order of the file; one that does not settle says so in its status."""
    newtons = pull_of(project, pull)
    core = core_of(project)
    return tuple(_settled(project, core, index, newtons, options) for index in range(len(project.conditions)))


def settle_report(project: Project, *, pull: Pull = None, **options: Any) -> SettleReport:
    """Every condition and the line as strung: the document of ``settle --json``."""
    conditions = settle_all(project, pull=pull, **options)
    return SettleReport(
        program=program(),
        nlopt=_core.NLOPT_VERSION,
        project=project.title,
        input_sha256=project.input_sha256,
        caution=CAUTION,
        stringing=strung(project, pull=pull),
        conditions=conditions,
    )


def strung(project: Project, *, pull: Pull = None) -> StrungState:
    """The line as strung: the pull and the natural length of each span."""
    newtons = pull_of(project, pull)
    with _errors_of(project, newtons):
        found = core_of(project).string(pull=newtons)
    return StrungState(
        project.stringing.temperature_degC,
        finite(found["horizontal_tension_N"]),
        tuple(float(length) for length in found["lengths_m"]),
    )


def window(project: Project, **options: Any) -> PullWindow:
    """The pretension window of a project.

    Parameters
    ----------
    options: of the core, such as ``scan_points`` or ``seconds_most``.

    Raises
    ------
    InputError: the core refuses a number.
    NotSettledError: the search ended without an answer that could be verified.
    SearchCancelled: Ctrl-C; its `best` is what had been found, or None.
    """
    core = core_of(project)
    with _errors_of(project):
        try:
            found = core.window(**options)
        except KeyboardInterrupt as stop:
            raise SearchCancelled("the search was cancelled", _best(project, getattr(stop, "best", None))) from None
    if found["status"] not in ("ok", "shut") or (found["open"] and not found["verified"] and options.get("verify", 1)):
        name = f"{project.source}: " if project.source else ""
        raise NotSettledError(f"{name}the window could not be decided: {found['status_text']}", found["status"])
    return window_of(project, found, program(), _core.NLOPT_VERSION, Judge(project, core))


def vet(project: Project, *, pull: Pull = None, every: bool = False) -> VetReport:
    """Every limit of a project, for its stringing or for a given pull.

    Parameters
    ----------
    every: a row for each limit and condition, instead of one for each limit with its worst condition.
    """
    newtons = pull_of(project, pull)
    core = core_of(project)
    with _errors_of(project, newtons):
        rows = core.judge(pull=newtons)
    if newtons is None and any(row["reason"] == "slack" for row in rows):
        _refuse_slack(project, "slack", _core.STATUS["slack"])
    limits = limit_states(project, rows, every=every)
    name = project.source or project.title
    holds = all(limit.status == "holds" for limit in limits)
    strung_at = strung(project, pull=pull).horizontal_tension_N
    file = FileVerdict(os.fspath(name), holds, limits, project.title, project.input_sha256, strung_at)
    return VetReport.of([file], program())


def core_of(project: Project) -> _core.Project:
    """The problem in the core.

    Raises
    ------
    InputError: a number is outside its range; the fault names the key of the project file.
    """
    with _errors_of(project):
        return _core.Project(project.to_core())


def program() -> str:
    """Name and version, as results carry them."""
    import tautwise

    return f"tautwise {tautwise.__version__}"


def pull_of(project: Project, pull: Pull) -> float | None:
    """A pull given by the caller in N; None leaves the project's stringing rule, which must then be there."""
    if pull is None:
        if _has_stringing(project):
            return None
        problem = "no stringing rule, so there is no line to settle"
        expected = "horizontal_tension, tension, sag or natural_length, or a pull with the call"
        fault = project.core_fault("stringing", problem, expected)
        raise InputError([Fault(fault.file, fault.line, fault.path, problem, expected, 'horizontal_tension = "20 kN"')])
    try:
        newtons = quantity(pull, "N") if isinstance(pull, str) else float(pull)
    except Refused as refused:
        raise InputError([Fault(None, None, "pull", refused.problem, refused.expected, refused.example)]) from None
    if not (math.isfinite(newtons) and newtons > 0.0):
        raise InputError([Fault(None, None, "pull", f"{newtons:g} N is no pull", "a force above 0", '"20 kN"')])
    return newtons


class LineOrigin:
    """What a settled line remembers of where it came from, so that places on it can be looked up later."""

    __slots__ = ("_core", "condition", "project", "pull")

    def __init__(self, project: Project, condition: int, pull: float | None, core: _core.Project | None = None) -> None:
        self.project = project
        self.condition = condition
        self.pull = pull
        self._core = core

    def __reduce__(self) -> tuple[Callable[..., LineOrigin], tuple[Any, ...]]:
        return (LineOrigin, (self.project, self.condition, self.pull))

    def at(self, stations: Any) -> dict[str, Any]:
        """Length, position, tension and clearance of the line at stations."""
        asked = np.ascontiguousarray(stations, dtype=np.float64)
        with _errors_of(self.project):
            found = self._problem().at(self.condition, asked, pull=self.pull)
        return {**found, "clearance_m": np.asarray(found["position_m"])[:, 2] - self._ground(asked)}

    def shape(self, points: int) -> dict[str, Any]:
        """Length, position and tension along the line, `points` for each span."""
        with _errors_of(self.project):
            return self._problem().shape(self.condition, points, pull=self.pull)

    def scenery(self) -> Scenery:
        """What stands around the line."""
        return scenery_of(self.project)

    def _problem(self) -> _core.Project:
        if self._core is None:
            self._core = core_of(self.project)
        return self._core

    def _ground(self, stations: Any) -> Any:
        ground = self.project.ground
        if ground is None:
            return np.full(stations.shape, math.nan)
        return np.interp(stations, ground.stations_m, ground.elevations_m, left=math.nan, right=math.nan)


class Judge:
    """What a window remembers, so that a limit can be looked up at any pull later."""

    __slots__ = ("_core", "project")

    def __init__(self, project: Project, core: _core.Project | None = None) -> None:
        self.project = project
        self._core = core

    def __reduce__(self) -> tuple[Callable[..., Judge], tuple[Any, ...]]:
        return (Judge, (self.project,))

    def judge(self, pull_N: float) -> dict[tuple[str, str], float]:
        """Utilisation of each limit (id) in each condition (name) at a pull; infinite where there is no line."""
        if self._core is None:
            self._core = core_of(self.project)
        limits, conditions = self.project.limits, self.project.conditions
        try:
            rows = self._core.judge(pull=pull_N)
        except _core.SettleError:
            return {}
        return {
            (limits[row["limit"]].id, conditions[row["condition"]].name): math.inf
            if row["status"] == "undecided"
            else row["utilisation"]
            for row in rows
        }


def scenery_of(project: Project) -> Scenery:
    """Ground, crossings and supports of a project, with the clearances that its limits ask for."""
    limits = [limit for limit in project.limits if isinstance(limit, ClearanceLimit)]
    ends = project.supports[0].station_m, project.supports[-1].station_m
    needed = {limit.over: 0.0 for limit in limits}
    for limit in limits:
        needed[limit.over] = max(needed[limit.over], limit.least)
    ground = project.ground
    return Scenery(
        ground=tuple(zip(ground.stations_m, ground.elevations_m, strict=True)) if ground else (),
        crossings=tuple((c.name, c.from_m, c.to_m, c.top_m, needed.get(c.name, 0.0)) for c in project.crossings),
        supports=tuple((s.name, s.station_m, project.elevation_m(s), s.hold) for s in project.supports),
        ground_clearances=tuple(
            (
                ends[0] if limit.from_m is None else limit.from_m,
                ends[1] if limit.to_m is None else limit.to_m,
                limit.least,
            )
            for limit in limits
            if limit.over == GROUND
        ),
    )


def _settled(
    project: Project, core: _core.Project, index: int, pull: float | None, options: dict[str, Any]
) -> Equilibrium:
    with _errors_of(project, pull):
        found = core.settle(index, pull=pull, **options)
    if pull is None:
        _refuse_slack(project, found["status"], found["status_text"], project.conditions[index].name)
    return equilibrium_of(project, index, found, LineOrigin(project, index, pull, core))


def _refuse_slack(project: Project, status: str, text: str, condition: str = "") -> None:
    """Lengths that leave a line slack, and a rule that none meets, are inputs at fault, not failed searches."""
    given = project.stringing.natural_length_m is not None
    where = f' in condition "{condition}"' if condition else ""
    if status == "slack" and given:
        chords = [f"{math.hypot(*parts):.3f} m" for parts in _chords(project)]
        listed = ", ".join(chords[:4]) + (", ..." if len(chords) > 4 else "")
        expected = f"natural lengths that put the line under load, or shorter ones (hold to hold: {listed})"
        raise InputError([project.core_fault("stringing.natural_length", f"{text}{where}", expected)])
    if status == "out_of_reach":
        key = "stringing.natural_length" if given else "stringing"
        raise InputError([project.core_fault(key, text, "a rule that the line can meet")])


def _chords(project: Project) -> list[tuple[float, float, float]]:
    points = [(s.station_m, s.offset_m, project.elevation_m(s)) for s in project.supports]
    return [(b[0] - a[0], b[1] - a[1], b[2] - a[2]) for a, b in pairwise(points)]


def _has_stringing(project: Project) -> bool:
    rule = project.stringing
    return any((rule.horizontal_tension_N, rule.tension, rule.sag, rule.natural_length_m))


def _condition_index(project: Project, condition: str | None) -> int:
    if condition is not None:
        return project.condition_index(condition)
    if len(project.conditions) > 1:
        names = ", ".join(f'"{name}"' for name in conditions_of(project)[:8])
        raise InputError([Fault(project.source, None, "", "several conditions, and none named", f"one of {names}")])
    return 0


def _best(project: Project, found: dict[str, Any] | None) -> PullWindow | None:
    try:
        return None if found is None else window_of(project, found, program(), _core.NLOPT_VERSION)
    except (KeyError, TypeError):
        return None


@contextmanager
def _errors_of(project: Project, pull: float | None = None) -> Iterator[None]:
    """The core's errors as ours."""
    try:
        yield
    except _core.RangeError as error:
        _raise_range(project, error)
    except _core.SettleError as error:
        status = getattr(error, "status", "not_settled")
        if pull is None:
            _refuse_slack(project, status, str(error))
        raise NotSettledError(str(error), status) from None


def _raise_range(project: Project, error: Any) -> NoReturn:
    path, expected = getattr(error, "path", ""), getattr(error, "expected", "")
    problem = "outside its range" if path else str(error)
    raise InputError([project.core_fault(path, problem, expected)]) from None
