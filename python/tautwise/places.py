"""Places on a settled line, and what stands around it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Protocol

from tautwise.records import Record

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Scenery(Record):
    """What stands around a line, as a picture needs it; lengths in m.

    Fields
    ------
    ground: (station, elevation) of the profile's points; empty where there is none.
    crossings: name, from, to, top, and the widest clearance that a limit asks for above it.
    supports: name, station and elevation of the point where the hold is fixed, and the hold.
    ground_clearances: from, to, and the clearance that a limit asks for above the ground.
    title: of the project.
    others: label and (station, elevation) along each other line that a limit keeps from.
    turns: the route turns in plan, given by east and north.
    carriages: the marks of a line in this condition that are carriages.
    """

    ground: tuple[tuple[float, float], ...]
    crossings: tuple[tuple[str, float, float, float, float], ...]
    supports: tuple[tuple[str, float, float, str], ...]
    ground_clearances: tuple[tuple[float, float, float], ...]
    title: str = ""
    others: tuple[tuple[str, tuple[tuple[float, float], ...]], ...] = ()
    turns: bool = False
    carriages: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, eq=False)
class Places:
    """Places on a settled line, one for each station asked for, in arrays of its shape; NaN where no line passes.

    Fields
    ------
    station_m: as asked for.
    length_m: natural length from the first support.
    position_m: x, y, z along the last axis; x and y are east and north on a route that turns.
    tension_N: magnitude.
    clearance_m: above the ground profile; NaN where there is none.
    """

    station_m: Floats
    length_m: Floats
    position_m: Floats
    tension_N: Floats
    clearance_m: Floats

    def __eq__(self, other: object) -> bool:
        import numpy as np

        if not isinstance(other, Places):
            return NotImplemented
        names = ("station_m", "length_m", "position_m", "tension_N", "clearance_m")
        return all(np.array_equal(getattr(self, name), getattr(other, name), equal_nan=True) for name in names)

    __hash__ = None  # type: ignore[assignment]


class Origin(Protocol):
    """What a settled line remembers of where it came from; kept out of JSON, kept by pickle."""

    def at(self, stations: Any) -> dict[str, Any]:
        """Length, position, tension and clearance of the line at stations."""

    def shape(self, points: int) -> dict[str, Any]:
        """Length, station, position and tension along the line, `points` for each span."""

    def scenery(self) -> Scenery:
        """What stands around the line."""
