"""Problems for `_core.Project`, built with few words. All SI; everything not given is absent or bare."""

from __future__ import annotations

import copy
import math
from typing import Any

import numpy as np

Problem = dict[str, Any]

SUPPORT = {
    "offset_m": 0.0,
    "height_m": None,
    "hold": "anchor",
    "hanger_length_m": 0.0,
    "hanger_weight_N": 0.0,
    "stiffness_along_N_per_m": math.inf,
    "stiffness_across_N_per_m": math.inf,
    "capacity_along_N": None,
    "capacity_across_N": None,
    "capacity_down_N": None,
    "capacity_up_N": None,
}
CONDITION = {
    "temperature_degC": 15.0,
    "ice_thickness_m": 0.0,
    "ice_density_kg_per_m3": 900.0,
    "wind_pressure_Pa": None,
    "wind_speed_m_per_s": None,
    "air_density_kg_per_m3": 1.225,
    "wind_drag": 1.0,
    "wind_angle_rad": 0.5 * math.pi,
    "resultant_addition_N_per_m": 0.0,
}
LIMIT = {"least": None, "most": None, "share": None, "crossing": None, "from_m": None, "to_m": None}


def line(weight=15.97, stiffness=34.7e6, *, diameter=0.02, expansion=18.9e-6, strength=None) -> dict[str, Any]:
    """The line of the published oracles unless told otherwise."""
    return {
        "diameter_m": diameter,
        "weight_N_per_m": weight,
        "stiffness_N": stiffness,
        "expansion_per_K": expansion,
        "breaking_strength_N": strength,
    }


def support(station, elevation, hold="anchor", **other) -> dict[str, Any]:
    return {**SUPPORT, "station_m": station, "elevation_m": elevation, "hold": hold, **other}


def hanger(station, elevation, length=2.0, weight=300.0, **other) -> dict[str, Any]:
    """`elevation` is that of the plumb clamp."""
    return support(station, elevation + length, "hanger", hanger_length_m=length, hanger_weight_N=weight, **other)


def post(station, elevation, along=2e5, across=1e5, **other) -> dict[str, Any]:
    return support(station, elevation, "post", stiffness_along_N_per_m=along, stiffness_across_N_per_m=across, **other)


def condition(**other) -> dict[str, Any]:
    return {**CONDITION, **other, "loads": list(other.get("loads", ()))}


def point_load(at, vector, place="length", frame="span") -> dict[str, Any]:
    return {"is_point": True, "place": place, "frame": frame, "from_m": at, "to_m": None, "vector": tuple(vector)}


def spread_load(vector, from_m=None, to_m=None, place="length", frame="span") -> dict[str, Any]:
    place = "whole" if from_m is None else place
    return {"is_point": False, "place": place, "frame": frame, "from_m": from_m, "to_m": to_m, "vector": tuple(vector)}


def limit(kind, **other) -> dict[str, Any]:
    return {**LIMIT, "direction": "resultant", **other, "kind": kind}


def lengths_rule(*lengths, temperature=15.0) -> dict[str, Any]:
    return {**rule("span_lengths", None, temperature=temperature), "lengths_m": [float(length) for length in lengths]}


def rule(name, value, index=None, *, temperature=15.0, tolerance=0.0) -> dict[str, Any]:
    """A stringing rule: pull, tension, sag, total_length or none."""
    return {
        "temperature_degC": temperature,
        "rule": name,
        "value": value,
        "index": index,
        "lengths_m": None,
        "tolerance": tolerance,
    }


def problem(supports, stringing, *, of=None, conditions=None, limits=(), ground=None, crossings=(), marks=()):
    """A whole problem; `ground` is a list of (station, elevation)."""
    conditions = [condition()] if conditions is None else list(conditions)
    return {
        "line": line() if of is None else of,
        "supports": list(supports),
        "ground": None if ground is None else profile(ground),
        "crossings": [dict(zip(("from_m", "to_m", "top_m"), crossing, strict=True)) for crossing in crossings],
        "conditions": conditions,
        "marks": list(marks),
        "limits": [complete(each, len(conditions), len(supports)) for each in limits],
        "stringing": stringing,
    }


def profile(points) -> dict[str, np.ndarray]:
    stations, elevations = np.array(points, dtype=np.float64).T
    return {"station_m": stations.copy(), "elevation_m": elevations.copy()}


def complete(row, condition_count, support_count) -> dict[str, Any]:
    """A limit with its flags: where it says nothing it applies to all."""
    return {"applies": [True] * condition_count, "covers": [True] * support_count, **row}


def span(run, rise=0.0, *, start=(0.0, 0.0)) -> list[dict[str, Any]]:
    """Two anchors."""
    return [support(start[0], start[1]), support(start[0] + run, start[1] + rise)]


def changed(base: Problem, **parts) -> Problem:
    """A deep copy with some top-level parts replaced."""
    return {**copy.deepcopy(base), **parts}
