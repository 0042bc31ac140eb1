"""Another project's line, settled in one of its conditions, as the course that a spacing keeps from."""

from __future__ import annotations

import math
from bisect import bisect_right
from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import accumulate
from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from tautwise.limits import Shift
    from tautwise.model import Project

    Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Neighbour:
    """A line beside ours, in its own axes.

    Fields
    ------
    arcs: (n, 14), natural lengths (2), positions (2 x 3) and slopes (2 x 3) of the ends of its cubic arcs.
    names: of its supports. ends_m: natural length from its first support to each of the others.
    stations_m, plan_m: of its supports. turns: whether its stations follow them in plan.
    """

    arcs: Floats
    names: tuple[str, ...]
    ends_m: tuple[float, ...]
    stations_m: tuple[float, ...]
    plan_m: tuple[tuple[float, float], ...]
    turns: bool

    def moved(self, shift: Shift) -> Floats:
        """The arcs in our axes."""
        arcs = self.arcs.copy()
        arcs[:, 2:8] += 2 * list(shift.vector_m)
        return arcs

    def places(self, shift: Shift) -> Floats:
        """Places along the line, (n + 1, 3), in our axes."""
        arcs = self.moved(shift)
        return np.vstack([arcs[:, 2:5], arcs[-1:, 5:8]])

    def place(self, at_m: float, position_m: Sequence[float], shift: Shift) -> str:
        """A place in words: the span, and the station in the line's own axes; `position_m` in ours."""
        span = min(bisect_right(self.ends_m, at_m), len(self.ends_m) - 1)
        x, y = (position_m[axis] - shift.vector_m[axis] for axis in (0, 1))
        return f"{self.names[span]} to {self.names[span + 1]}, station {self._station_m(span, x, y):.1f} m"

    def _station_m(self, span: int, x: float, y: float) -> float:
        if not self.turns:
            return x
        (x0, y0), (x1, y1) = self.plan_m[span : span + 2]
        return self.stations_m[span] + ((x - x0) * (x1 - x0) + (y - y0) * (y1 - y0)) / math.hypot(x1 - x0, y1 - y0)


def neighbour_of(project: Project, condition: str) -> Neighbour:
    """The line of a project in one of its conditions, for the stringing that its file gives, proven as `settle` does.

    Raises
    ------
    InputError: its natural lengths leave it slack, or the like, at the keys of its file.
    NotSettledError: no equilibrium within tolerance.
    """
    from tautwise.solve import line_core_of, settle

    settled: Any = settle(project, condition)
    lengths = [span.natural_length_m for span in settled.spans]
    arcs = line_core_of(project).course(project.condition_index(condition))
    supports = project.supports
    return Neighbour(
        arcs,
        tuple(support.name for support in supports),
        tuple(accumulate(lengths)),
        tuple(support.station_m for support in supports),
        tuple(support.plan_m for support in supports),
        project.turns,
    )


def stations_beside(project: Project, places: Floats) -> Floats:
    """Stations of this project's route at which places (n, 3) lie: of the nearest point of the route where it turns."""
    if not project.turns:
        return np.asarray(places[:, 0])
    plan = np.array([support.plan_m for support in project.supports])
    nearest, found = np.full(len(places), np.inf), np.zeros(len(places))
    for k, support in enumerate(project.supports[:-1]):
        chord = plan[k + 1] - plan[k]
        share = np.clip((places[:, :2] - plan[k]) @ chord / (chord @ chord), 0.0, 1.0)
        away = np.linalg.norm(places[:, :2] - plan[k] - share[:, None] * chord, axis=1)
        found = np.where(away < nearest, support.station_m + share * math.hypot(*chord), found)
        nearest = np.minimum(away, nearest)
    return found


def as_strung(project: Project, near: Neighbour) -> Neighbour | None:
    """The same line as strung, bare, from which follows which of two crossing lines is the upper one; None where it
    cannot be settled so.
    """
    from tautwise.errors import TautwiseError
    from tautwise.solve import course_as_strung

    try:
        return replace(near, arcs=course_as_strung(project))
    except TautwiseError:
        return None
