"""What results remember of where they came from, so that places and limits can be looked up later.

They call the core through :mod:`tautwise.solve`, which makes them; hence the imports inside.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import TYPE_CHECKING, Any

import numpy as np

from tautwise.errors import NotSettledError
from tautwise.limits import GROUND, ClearanceLimit, SpacingLimit
from tautwise.neighbours import stations_beside
from tautwise.places import Scenery
from tautwise.solve_line import load_label

if TYPE_CHECKING:
    from tautwise.model import Project


class LineOrigin:
    """What a settled line remembers of where it came from, so that places on it can be looked up later."""

    __slots__ = ("_core", "condition", "project", "pull")

    def __init__(self, project: Project, condition: int, pull: float | None, core: Any = None) -> None:
        self.project = project
        self.condition = condition
        self.pull = pull
        self._core = core

    def __reduce__(self) -> tuple[Callable[..., LineOrigin], tuple[Any, ...]]:
        return (LineOrigin, (self.project, self.condition, self.pull))

    def at(self, stations: Any) -> dict[str, Any]:
        """Length, position, tension and clearance of the line at stations."""
        from tautwise.solve import errors_of

        asked = np.ascontiguousarray(stations, dtype=np.float64)
        with errors_of(self.project):
            found = self._problem().at(self.condition, asked, pull=self.pull)
        return {**found, "clearance_m": np.asarray(found["position_m"])[:, 2] - self._ground(asked)}

    def shape(self, points: int) -> dict[str, Any]:
        """Length, station, position and tension along the line, `points` for each span."""
        from tautwise.solve import errors_of

        with errors_of(self.project):
            found: dict[str, Any] = self._problem().shape(self.condition, points, pull=self.pull)
        return found

    def scenery(self) -> Scenery:
        """What stands around the line."""
        return scenery_of(self.project, self.condition)

    def _problem(self) -> Any:
        from tautwise.solve import line_core_of

        if self._core is None:
            self._core = line_core_of(self.project)
        return self._core

    def _ground(self, stations: Any) -> Any:
        ground = self.project.ground
        if ground is None:
            return np.full(stations.shape, math.nan)
        return np.interp(stations, ground.stations_m, ground.elevations_m, left=math.nan, right=math.nan)


class Judge:
    """What a window remembers, so that a limit can be looked up at any pull later."""

    __slots__ = ("_core", "project")

    def __init__(self, project: Project, core: Any = None) -> None:
        self.project = project
        self._core = core

    def __reduce__(self) -> tuple[Callable[..., Judge], tuple[Any, ...]]:
        return (Judge, (self.project,))

    def judge(self, pull_N: float) -> dict[tuple[str, str], float]:
        """Utilisation of each limit (id) in each condition (name) at a pull; infinite where there is no line."""
        from tautwise.solve import core_of, errors_of

        if self._core is None:
            self._core = core_of(self.project)
        limits, conditions = self.project.limits, self.project.conditions
        try:
            with errors_of(self.project, pull_N):
                rows = self._core.judge(pull=pull_N)
        except NotSettledError:
            return {}
        return {
            (limits[row["limit"]].id, conditions[row["condition"]].name): math.inf
            if row["status"] == "undecided"
            else row["utilisation"]
            for row in rows
        }


def scenery_of(project: Project, condition: int) -> Scenery:
    """Ground, crossings and supports of a project, with the clearances that its limits ask for, and other lines."""
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
        title=project.title,
        others=_other_lines(project, condition),
        turns=project.turns,
        carriages=tuple(
            load_label(load, number)
            for number, load in enumerate(project.conditions[condition].loads)
            if load.carriage is not None
        ),
    )


def _other_lines(project: Project, condition: int) -> tuple[tuple[str, tuple[tuple[float, float], ...]], ...]:
    """Label and (station, elevation) of each line that a spacing keeps from in a condition."""
    name = project.conditions[condition].name
    drawn: dict[str, tuple[tuple[float, float], ...]] = {}
    for number, limit in enumerate(project.limits):
        if not isinstance(limit, SpacingLimit) or not (limit.conditions is None or name in limit.conditions):
            continue
        beside = limit.other_condition_for(name)
        try:
            places = project.neighbour(number, beside).places(limit.shift)
        except NotSettledError:
            continue
        label = f"{project.others[number].title or limit.other}: {beside}"
        stations = stations_beside(project, places)
        drawn[label] = tuple((float(x), float(z)) for x, z in zip(stations, places[:, 2], strict=True))
    return tuple(drawn.items())
