"""Natural lengths from the stringing rule: bare, at the stringing temperature, one horizontal tension in every span."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Any

import numpy as np

from .quadrature import Array
from .section import Support
from .span import AnyMaterial, Hung, NotSettled, Piece, length_at


@dataclass(frozen=True)
class Strung:
    """Natural lengths (n), spans as hung between their clamps, and the clamps (n + 1, 3) at one pull.

    supports: as they hold the line while it is strung over sheaves.
    """

    lengths_m: list[float]
    spans: list[Hung]
    clamps: list[Array]
    supports: Sequence[Support] = ()


def string_to(
    material: AnyMaterial, weight_N_per_m: float, supports: Sequence[Support], pull_N: float
) -> Strung:
    """String a section to a horizontal tension: hangers plumb, but where the route turns or a post leans.

    There each clamp must be where its own force puts it: a few repetitions, then Newton with differences.
    Raises NotSettled.

    >>> from tautwise.reference.span import Material
    >>> ends = [Support(np.array([x, 0.0, 0.0])) for x in (0.0, 300.0)]
    >>> round(string_to(Material(34.7e6), 15.97, ends, 17368.8076566).lengths_m[0], 9)
    300.8
    """

    def moved(clamps: Array) -> Array:
        return np.array(follow(supports, between(material, weight_N_per_m, clamps, pull_N))) - clamps

    clamps = np.array([support.plumb() for support in supports])
    for step in range(60):
        move = moved(clamps)
        if float(np.abs(move).max()) < 1e-12 * max(1.0, float(np.abs(clamps).max())):
            spans = between(material, weight_N_per_m, clamps, pull_N)
            return Strung([span.length_m for span in spans], spans, list(clamps))
        clamps = clamps + (move if step < 4 else newton_move(moved, clamps, move))
    raise NotSettled("the clamps do not come to rest at this pull")


def between(material: AnyMaterial, weight_N_per_m: float, clamps: Array, pull_N: float) -> list[Hung]:
    """The bare spans between clamps (n + 1, 3), each with the same horizontal tension."""
    load = np.array([0.0, 0.0, -weight_N_per_m])
    found = [length_at(material, load, far - near, pull_N) for near, far in pairwise(clamps)]
    return [Hung(material, [Piece(length, load)], pull) for length, pull in found]


def newton_move(moved: Callable[[Array], Array], clamps: Array, move: Array) -> Array:
    """The step to where clamps move no more, from differences over 1e-4 m; at most 1 m."""
    slope = np.zeros((clamps.size, clamps.size))
    for i in range(clamps.size):
        aside = np.zeros(clamps.size)
        aside[i] = 1e-4
        change = moved(clamps + aside.reshape(-1, 3)) - moved(clamps - aside.reshape(-1, 3))
        slope[:, i] = change.ravel() / 2e-4
    step = np.asarray(np.linalg.solve(slope, -move.ravel()), dtype=np.float64).reshape(-1, 3)
    return step / max(1.0, float(np.abs(step).max()))


def follow(supports: Sequence[Support], spans: Sequence[Hung]) -> list[Array]:
    """Where the clamps are under the forces of their spans and half of each hanger's weight.

    A hanger that the line would lift is held down plumb while the line is strung.
    """
    clamps = []
    for j, support in enumerate(supports):
        force = np.array([0.0, 0.0, 0.5 * support.hanger_weight_N if support.hangs else 0.0])
        if j > 0:
            force = force + spans[j - 1].end_tension()
        if j < len(spans):
            force = force - spans[j].pull
        lifted = support.hangs and force[2] <= 0.0
        clamps.append(support.plumb() if lifted else support.clamp(force))
    return clamps


def tension_beside(strung: Strung, support: int) -> float:
    """The larger tension of the line beside a support, N."""
    behind = [float(np.linalg.norm(strung.spans[support - 1].end_tension()))] if support > 0 else []
    ahead = [float(np.linalg.norm(strung.spans[support].pull))] if support < len(strung.spans) else []
    return max(behind + ahead)


def sag_of(strung: Strung, span: int) -> float:
    """Greatest vertical distance from a span's chord down to the line, m."""
    chord = strung.clamps[span + 1] - strung.clamps[span]
    run = math.hypot(chord[0], chord[1])
    down = np.array([chord[0], chord[1], 0.0]) * chord[2] / run**2 - np.array([0.0, 0.0, 1.0])
    return strung.spans[span].extreme(down)[0]


def pull_by_rule(string: Callable[[float], Strung], rule: Mapping[str, Any], low_N: float) -> float:
    """The pull above low_N that gives a rule's value: doubled until it is passed, then bisection on its logarithm.

    low_N: below it lies a second pull of the same support tension, the slack one. Raises NotSettled.
    """
    value = float(rule["value"])
    asks: dict[str, Callable[[float], float]] = {
        "tension": lambda pull: tension_beside(string(pull), rule["index"]) - value,
        "sag": lambda pull: value - sag_of(string(pull), rule["index"]),
        "total_length": lambda pull: value - sum(string(pull).lengths_m),
    }
    wanted = asks[rule["rule"]]
    low, high = low_N, 2.0 * low_N
    if wanted(low) > 0.0:
        raise NotSettled("no pull satisfies the stringing rule")
    while wanted(high) < 0.0:
        low, high = high, 2.0 * high
    while high / low > 1.0 + 1e-15:
        middle = math.sqrt(low * high)
        if not low < middle < high:
            break
        low, high = (middle, high) if wanted(middle) < 0.0 else (low, middle)
    return math.sqrt(low * high)
