"""The pretension window the plain way: look at many pulls, then close in on each edge by bisection."""

from __future__ import annotations

import math
from collections.abc import Callable
from itertools import pairwise

import numpy as np

from .quadrature import golden


def intervals(
    worst: Callable[[float], float], low_N: float, high_N: float, points: int = 200
) -> list[tuple[float, float]]:
    """Every stretch of pulls between two at which the worst utilisation is at most 1, edges to 1e-10.

    Pulls are scanned evenly on a logarithmic scale; around each least value of the scan golden section looks for a
    window that hides between its points.

    >>> [(round(a, 6), round(b, 6)) for a, b in intervals(lambda pull: (pull - 3.0) ** 2, 1.0, 10.0)]
    [(2.0, 4.0)]
    >>> intervals(lambda pull: 1.1, 1.0, 10.0)
    []
    """
    pulls = [float(pull) for pull in np.geomspace(low_N, high_N, points)]
    values = [worst(pull) for pull in pulls]
    hidden = []
    for i, value in enumerate(values):
        beside = values[max(i - 1, 0) : i + 2]
        if value > 1.0 and value == min(beside):
            near, far = math.log(pulls[max(i - 1, 0)]), math.log(pulls[min(i + 1, points - 1)])
            place, least = golden(lambda x: -worst(math.exp(x)), near, far)
            hidden.append((math.exp(place), -least))
    scanned = sorted([*zip(pulls, values, strict=True), *hidden])
    found: list[tuple[float, float]] = []
    start = scanned[0][0] if scanned[0][1] <= 1.0 else None
    for (near_N, near), (far_N, far) in pairwise(scanned):
        if near > 1.0 >= far:
            start = edge(worst, far_N, near_N)
        elif near <= 1.0 < far and start is not None:
            found.append((start, edge(worst, near_N, far_N)))
            start = None
    return found if start is None else [*found, (start, scanned[-1][0])]


def edge(worst: Callable[[float], float], holds_N: float, fails_N: float) -> float:
    """The last pull that holds between one that holds and one that fails.

    >>> round(edge(lambda pull: pull / 2.0, 1.0, 3.0), 9)
    2.0
    """
    while abs(fails_N / holds_N - 1.0) > 1e-10:
        middle = math.sqrt(holds_N * fails_N)
        if worst(middle) <= 1.0:
            holds_N = middle
        else:
            fails_N = middle
    return holds_N
