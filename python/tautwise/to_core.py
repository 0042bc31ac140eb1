"""The problem that the C core solves, from a checked project: names become indices, heights become elevations."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from tautwise.curves import force_terms
from tautwise.limits import GROUND, BaseLimit, ClearanceLimit, SpacingLimit, SupportLoadLimit, SwingLimit
from tautwise.rules_loading import has_capacity
from tautwise.tables import PLUMB, SECONDS_PER_HOUR, Line, Part, Support
from tautwise.to_core_loads import condition_of

if TYPE_CHECKING:
    from tautwise.model import Project


def problem_of(project: Project, judging: bool = True) -> dict[str, Any]:
    """The `problem` that ``tautwise._core.Project`` takes: plain values, SI, degC, rad; None for "not given".

    judging: False leaves out other lines and the spacings from them.
    """
    limits = [_limit(project, limit) for limit in project.limits]
    return {
        "line": _line(project),
        "supports": [_support(project, support) for support in project.supports],
        "ground": _ground(project),
        "crossings": [{"from_m": one.from_m, "to_m": one.to_m, "top_m": one.top_m} for one in project.crossings],
        "conditions": [condition_of(project, condition) for condition in project.conditions],
        "marks": [_place(mark.at_m, mark.at_length_m) for mark in project.marks],
        "limits": limits,
        "courses": _courses(project, limits, judging),
        "stringing": _stringing(project),
        "history": _history(project),
        "route": "turning" if project.turns else "straight",
    }


def _line(project: Project) -> dict[str, Any]:
    line = project.line
    return {
        "diameter_m": line.diameter_m or 0.0,
        "weight_N_per_m": line.weight_N_per_m,
        "stiffness_N": line.stiffness_N,
        "expansion_per_K": line.expansion_per_K,
        "breaking_strength_N": line.breaking_strength_N,
        **_stretching(line),
    }


def _stretching(line: Line) -> dict[str, Any]:
    """What a linear line that never stretches for good has not."""
    core: dict[str, Any] = {}
    if line.parts:
        core["parts"] = [_part(line, part) for part in line.parts]
    if line.test_temperature_degC is not None:
        core["test_temperature_degC"] = line.test_temperature_degC
    if line.bedding_in:
        core["bedding_in_strain"] = line.bedding_in
    return core | _creep(line)


def _part(line: Line, part: Part) -> dict[str, Any]:
    area = line.part_area_m2(part)
    return {
        "loading_N": force_terms(part.initial_Pa, area),
        "creep_N": None if part.creep_Pa is None else force_terms(part.creep_Pa, area),
        "valid_to": part.valid_to,
        "final_stiffness_N": part.final_modulus_Pa * area,
        "expansion_per_K": line.expansion_per_K if part.expansion_per_K is None else part.expansion_per_K,
    }


def _creep(line: Line) -> dict[str, Any]:
    """A given strain is the power law with the exponent 0."""
    if line.creep_strain:
        return {"creep_coefficient": line.creep_strain, "creep_exponent": 0.0, "creep_hours": 1.0}
    law = line.creep_law
    if law is None:
        return {}
    hours = law.time_s / SECONDS_PER_HOUR
    return {"creep_coefficient": law.coefficient, "creep_exponent": law.exponent, "creep_hours": hours}


def _history(project: Project) -> dict[str, Any] | None:
    if all(condition.state == "initial" for condition in project.conditions):
        return None
    names = [condition.name for condition in project.conditions]
    met = project.history.conditions
    everyday = project.history.creep_condition
    return {
        "met": [met is None or name in met for name in names],
        "creep_condition": None if everyday is None else names.index(everyday),
    }


def _support(project: Project, support: Support) -> dict[str, Any]:
    rigid = math.inf
    return {
        "station_m": support.plan_m[0],
        "offset_m": support.plan_m[1],
        "elevation_m": project.elevation_m(support),
        "height_m": support.height_m,
        "hold": support.hold,
        "hanger_length_m": support.hanger_length_m or 0.0,
        "hanger_spread_m": support.hanger_spread_m or 0.0,
        "hanger_weight_N": support.hanger_weight_N,
        "sheave_friction": support.sheave_friction,
        "hanger_wind_area_m2": support.wind_area_m2,
        "stiffness_along_N_per_m": support.stiffness_along_N_per_m or rigid,
        "stiffness_across_N_per_m": support.stiffness_across_N_per_m or rigid,
        "stiffness_vertical_N_per_m": support.stiffness_vertical_N_per_m or rigid,
        "capacity_along_N": support.capacity.along_N,
        "capacity_across_N": support.capacity.across_N,
        "capacity_down_N": support.capacity.down_N,
        "capacity_up_N": support.capacity.up_N,
    }


def _ground(project: Project) -> dict[str, Any] | None:
    if project.ground is None:
        return None
    return {
        "station_m": np.array(project.ground.stations_m, dtype=np.float64),
        "elevation_m": np.array(project.ground.elevations_m, dtype=np.float64),
    }


def _place(station_m: float | None, length_m: float | None) -> dict[str, Any]:
    if station_m is not None:
        return {"place": "station", "at_m": station_m}
    return {"place": "length", "at_m": length_m}


def _limit(project: Project, limit: BaseLimit) -> dict[str, Any]:
    core: dict[str, Any] = {
        "kind": getattr(limit, "kind", ""),
        "least": getattr(limit, "least", None),
        "most": getattr(limit, "most", None),
        "share": getattr(limit, "share", None),
        "applies": [limit.conditions is None or one.name in limit.conditions for one in project.conditions],
        "covers": _covers(project, limit),
    }
    if isinstance(limit, ClearanceLimit):
        core |= _clearance(project, limit)
    if isinstance(limit, SupportLoadLimit):
        core["direction"] = limit.direction
    return core


def _courses(project: Project, limits: list[dict[str, Any]], judging: bool) -> list[Any]:
    """The other lines that spacings keep from; their numbers go into the rows of the limits."""
    courses: list[Any] = []
    for number, (limit, row) in enumerate(zip(project.limits, limits, strict=True)):
        if not isinstance(limit, SpacingLimit):
            continue
        row["applies"] = [judging and applies for applies in row["applies"]]
        row["courses"] = [None] * len(project.conditions)
        for index, condition in enumerate(project.conditions):
            if row["applies"][index]:
                near = project.neighbour(number, limit.other_condition_for(condition.name))
                row["courses"][index] = len(courses)
                courses.append(near.moved(limit.shift))
        strung = project.neighbour_as_strung(number, near) if any(row["applies"]) else None
        if strung is not None:
            row["strung_course"] = len(courses)
            courses.append(strung.moved(limit.shift))
    return courses


def _clearance(project: Project, limit: ClearanceLimit) -> dict[str, Any]:
    stretch: dict[str, Any] = {"from_m": limit.from_m, "to_m": limit.to_m, "crossing": None}
    if limit.from_m is not None or limit.to_m is not None:
        stretch["from_m"] = limit.from_m if limit.from_m is not None else project.supports[0].station_m
        stretch["to_m"] = limit.to_m if limit.to_m is not None else project.supports[-1].station_m
    if limit.over != GROUND:
        stretch["crossing"] = [crossing.name for crossing in project.crossings].index(limit.over)
    return stretch


def _covers(project: Project, limit: BaseLimit) -> list[bool]:
    if limit.looks_at == "spans":
        spans = getattr(limit, "spans", None)
        return [_listed(one, spans) for one in project.supports[:-1]] + [False]
    supports = getattr(limit, "supports", None)
    return [_listed(one, supports) and _can_be_judged(one, limit) for one in project.supports]


def _listed(support: Support, names: Sequence[str] | None) -> bool:
    return names is None or support.name in names


def _can_be_judged(support: Support, limit: BaseLimit) -> bool:
    if isinstance(limit, SwingLimit):
        return support.hold == "hanger"
    if isinstance(limit, SupportLoadLimit) and limit.share is not None:
        return has_capacity(support, limit.direction)
    return True


def _stringing(project: Project) -> dict[str, Any]:
    stringing = project.stringing
    names = [support.name for support in project.supports]
    rule: str = "none"
    value: float | None = None
    index: int | None = None
    lengths: list[float] | None = None
    if stringing.horizontal_tension_N is not None:
        rule, value = "pull", stringing.horizontal_tension_N
    elif stringing.tension is not None:
        rule, value, index = "tension", stringing.tension.value_N, names.index(stringing.tension.support)
    elif stringing.sag is not None:
        rule, value, index = "sag", stringing.sag.value_m, names.index(stringing.sag.from_support)
    elif isinstance(stringing.natural_length_m, tuple):
        rule, lengths = "span_lengths", list(stringing.natural_length_m)
    elif stringing.natural_length_m is not None:
        rule, value = "total_length", stringing.natural_length_m
    return {
        "temperature_degC": stringing.temperature_degC,
        "rule": rule,
        "value": value,
        "index": index,
        "lengths_m": lengths,
        "tolerance": stringing.tolerance,
        "method": stringing.method.replace(" ", "_"),
        "clip": "plumb" if stringing.clip == PLUMB else "lies",
        "friction": stringing.friction,
        "end_allowance_m": stringing.end_allowance_m,
    }
