"""The conditions of a project as the core takes them: shares and spans by number, places by station or length."""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from tautwise.patterns import SharesOf
from tautwise.tables import Condition, Load

if TYPE_CHECKING:
    from tautwise.model import Project

_WORD_VECTORS = {"down": (0.0, 0.0, -1.0), "up": (0.0, 0.0, 1.0), "across": (0.0, 1.0, 0.0), "along": (1.0, 0.0, 0.0)}
_ICE_DENSITY_UNUSED = 900.0


def condition_of(project: Project, condition: Condition) -> dict[str, Any]:
    """One row of the core's conditions: SI, degC, rad; None for "not given"."""
    ice, wind, factors = condition.ice, condition.wind, condition.factors
    core: dict[str, Any] = {
        "temperature_degC": condition.temperature_degC,
        "state": condition.state,
        "ice_thickness_m": ice.thickness_m if ice else 0.0,
        "ice_density_kg_per_m3": ice.density_kg_per_m3 if ice else _ICE_DENSITY_UNUSED,
        "wind_pressure_Pa": wind.pressure_Pa if wind else 0.0,
        "wind_speed_m_per_s": wind.speed_m_per_s if wind else None,
        "resultant_addition_N_per_m": condition.resultant_addition_N_per_m,
        "loads": [_load(project, load) for load in condition.loads],
    }
    core |= {f"factor_{action}": factor for action, factor in factors if factor != 1.0}
    if ice and ice.pattern is not None:
        core["ice_share"] = shares(ice.pattern, [support.name for support in project.supports])
    if wind:
        core["air_density_kg_per_m3"] = wind.air_density_kg_per_m3
        core["wind_drag"] = wind.drag
        core["wind_angle_rad"] = wind.angle_rad
        if wind.bearing_rad is not None:
            core["wind_bearing_rad"] = wind.bearing_rad
        if wind.altitude_m is not None:
            core["wind_altitude_m"] = wind.altitude_m
    return core


def shares(pattern: tuple[float, ...] | SharesOf, supports: Sequence[str]) -> list[float]:
    """The share of each span.

    >>> shares((1.0, 0.0), ["A", "B", "C", "D"])
    [1.0, 0.0, 1.0]
    >>> shares(SharesOf(0.5, beyond="B"), ["A", "B", "C", "D"])
    [1.0, 0.5, 0.5]
    """
    spans = len(supports) - 1
    if isinstance(pattern, SharesOf):
        there = covered(supports, pattern.spans, pattern.beyond, pattern.before)
        return [pattern.share if one else 1.0 for one in there]
    return [pattern[k % len(pattern)] for k in range(spans)]


def covered(supports: Sequence[str], spans: Sequence[str] | None, beyond: str | None, before: str | None) -> list[bool]:
    """Which spans are meant: those that start at the supports listed, or all beyond or before a support.

    >>> covered(["A", "B", "C", "D"], ["B"], None, None), covered(["A", "B", "C", "D"], None, None, "C")
    ([False, True, False], [True, True, False])
    """
    numbers = range(len(supports) - 1)
    if spans is not None:
        return [supports[k] in spans for k in numbers]
    if beyond is not None:
        return [k >= supports.index(beyond) for k in numbers]
    return [before is None or k < supports.index(before) for k in numbers]


def span_at(stations_m: Sequence[float], station_m: float) -> int:
    """The span in which a station lies; at a support the one ahead.

    >>> span_at([0.0, 10.0, 30.0], 10.0), span_at([0.0, 10.0, 30.0], 30.0)
    (1, 1)
    """
    return min(max(bisect_right(stations_m, station_m) - 1, 0), len(stations_m) - 2)


def _load(project: Project, load: Load) -> dict[str, Any]:
    by_word = isinstance(load.direction, str)
    direction = _WORD_VECTORS[load.direction] if by_word else load.direction
    core: dict[str, Any] = {
        "is_point": load.force_N is not None,
        "frame": "span" if by_word else "route",
        "vector": tuple(part * load.size for part in direction),
        "place": "whole",
        "from_m": None,
        "to_m": None,
    }
    if load.per_run_N_per_m is not None:
        core["is_run"] = True
    if load.per_length_to_N_per_m is not None:
        core["vector_to"] = tuple(part * load.per_length_to_N_per_m for part in direction)
    if load.spans is not None or load.beyond is not None or load.before is not None:
        names = [support.name for support in project.supports]
        there = covered(names, load.spans, load.beyond, load.before)
        core["covers"] = there
        if load.per_length_to_N_per_m is not None:
            stations = [support.station_m for support in project.supports]
            begins, ends = there.index(True), len(there) - there[::-1].index(True)
            core |= {"place": "station", "from_m": stations[begins], "to_m": stations[ends]}
    if load.carriage is not None:
        core |= {"carriage": load.carriage, "carriage_span": _carriage_span(project, load)}
    for place, first, second, last in (
        ("station", load.at_m, load.from_m, load.to_m),
        ("length", load.at_length_m, load.from_length_m, load.to_length_m),
    ):
        begin = first if first is not None else second
        if begin is not None:
            core |= {"place": place, "from_m": begin, "to_m": last}
    return core


def _carriage_span(project: Project, load: Load) -> int:
    if load.span is not None:
        return [support.name for support in project.supports].index(load.span)
    if load.at_m is not None:
        return span_at([support.station_m for support in project.supports], load.at_m)
    return 0
