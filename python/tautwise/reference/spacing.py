"""The least distance in space between a span and another line: samples, then golden section in golden section."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from .quadrature import Array, golden
from .section import Settled

SAMPLES = 301
REFINED = 4
"""How many of the lowest dips of the sampled distance are refined."""
WIDE = 6
"""How many samples beyond a dip are looked at: beside a line that runs along, samples say little of where it is."""


@dataclass(frozen=True)
class Beside:
    """Another line, settled, and how far its axes stand from ours, m."""

    settled: Settled
    shift: Array


def least_spacing(settled: Settled, span: int, beside: Beside) -> float:
    """The least distance, m, of a span from every span of the other line."""
    mine, length_m = curve_of(settled, span), settled.spans[span].length_m
    others = range(len(beside.settled.spans))
    return min(
        least_distance(mine, length_m, curve_of(beside.settled, k, beside.shift), beside.settled.spans[k].length_m)
        for k in others
    )


def curve_of(settled: Settled, span: int, shift: Array | None = None) -> Callable[[float], Array]:
    """Position on a span, m, as a function of the natural length from its start."""
    hung, start = settled.spans[span], settled.clamps[span]
    moved = start if shift is None else start + shift
    return lambda s: np.asarray(moved + hung.position_at(s))


def least_distance(
    mine: Callable[[float], Array], length_m: float, other: Callable[[float], Array], other_length_m: float
) -> float:
    """The least distance of two curves given by their natural lengths.

    >>> def straight(s): return np.array([s, 0.0, 0.0])
    >>> def across(s): return np.array([3.0, s - 4.0, 2.0])
    >>> round(least_distance(straight, 10.0, across, 10.0), 12)
    2.0
    """
    s, u = np.linspace(0.0, length_m, SAMPLES), np.linspace(0.0, other_length_m, SAMPLES)
    places = np.array([other(float(each)) for each in u])

    def nearest(at: float) -> float:
        """Distance of one place of ours from the whole other line."""
        place = mine(at)
        index = int(np.argmin(np.linalg.norm(places - place, axis=1)))
        return lowest(lambda x: float(np.linalg.norm(place - other(x))), *stretch(u, index))

    apart = np.array([float(np.min(np.linalg.norm(places - mine(float(each)), axis=1))) for each in s])
    padded = np.pad(apart, 1, constant_values=np.inf)
    dips = np.flatnonzero((apart <= padded[:-2]) & (apart <= padded[2:]))
    chosen = sorted(dips, key=lambda index: float(apart[index]))[:REFINED]
    return min(lowest(nearest, *stretch(s, int(index), WIDE)) for index in chosen)


def stretch(places: Array, index: int, steps: int = 1) -> tuple[float, float]:
    """The places some steps before and after one, as far as there are any."""
    return float(places[max(index - steps, 0)]), float(places[min(index + steps, len(places) - 1)])


def lowest(value: Callable[[float], float], low: float, high: float) -> float:
    """The least value between two places and at them, of a function with one dip."""
    return min(value(low), value(high), -golden(lambda x: -value(x), low, high, 42)[1])
