"""Points of a bare line as a survey would measure them, and how far given points lie from one, the slow way."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from .project import Twin, length_at_station
from .quadrature import Array


def places(
    problem: Mapping[str, Any],
    stations_m: Sequence[float],
    temperature_degC: float,
    pull_N: float | None = None,
    lengths_m: Sequence[float] | None = None,
) -> Array:
    """Offset and elevation, in columns, of the bare line at stations and a temperature.

    Parameters
    ----------
    pull_N: horizontal tension at stringing, hangers plumb; or lengths_m: natural length of each span.

    >>> line = {"diameter_m": 0.02, "weight_N_per_m": 15.97, "stiffness_N": 34.7e6, "expansion_per_K": 0.0}
    >>> supports = [{"station_m": x, "elevation_m": 0.0, "hold": "anchor"} for x in (0.0, 300.0)]
    >>> problem = {"line": line, "supports": supports, "stringing": {"temperature_degC": 15.0}}
    >>> places(problem, [150.0], 15.0, lengths_m=[300.8]).round(8).tolist()
    [[0.0, -10.3551736]]
    """
    rule = {"temperature_degC": problem["stringing"]["temperature_degC"]}
    rule |= {"rule": "pull", "value": pull_N} if lengths_m is None else {"rule": "span_lengths", "lengths_m": lengths_m}
    twin = Twin({**problem, "conditions": [{"temperature_degC": temperature_degC}], "stringing": rule})
    settled = twin.settle(0)
    ends = np.cumsum([hung.length_m for hung in settled.spans])
    found = []
    for station in stations_m:
        s = length_at_station(settled, station)
        span = min(int(np.searchsorted(ends, s)), len(ends) - 1)
        within = s - (ends[span - 1] if span else 0.0)
        place = settled.position_at(span, float(within))
        found.append([twin.route.left(span, place), place[2]])
    return np.array(found, dtype=np.float64)
