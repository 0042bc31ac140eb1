"""Integrals along a stretch of line whose tension vector changes linearly, by Gauss-Legendre quadrature."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Growing:
    """A load per natural metre that grows along its piece, N/m: start + rate s.

    Times a length it is what that length carries, as a uniform load is:

    >>> (Growing(np.array([0.0, 0.0, -2.0]), np.array([0.0, 0.0, -0.5])) * 4.0).tolist()
    [0.0, 0.0, -12.0]
    """

    start: Array
    rate: Array

    def __mul__(self, length: float | Array) -> Array:
        return np.asarray(self.start * length + 0.5 * self.rate * length**2)

    def at(self, s: float) -> Array:
        """The load at natural length s."""
        return np.asarray(self.start + self.rate * s)


PieceLoad = Array | Growing


def load_at(load: PieceLoad, s: float) -> Array:
    """The load per natural metre at natural length s of its piece."""
    return load.at(s) if isinstance(load, Growing) else load


POINTS, WEIGHTS = np.polynomial.legendre.leggauss(16)


def least_tension(tension: Array, load: PieceLoad, start: float, end: float) -> float:
    """Least |t| over start <= s <= end of t(s) = tension - load s, in N; of a growing load a lower bound.

    >>> least_tension(np.array([3.0, 0.0, -4.0]), np.array([0.0, 0.0, -1.0]), 0.0, 10.0)
    3.0
    """
    if isinstance(load, Growing):
        middle = float(np.linalg.norm(tension - load * (0.5 * (start + end))))
        return max(0.0, middle - 0.5 * strength(load, start, end) * (end - start))
    square = float(load @ load)
    nearest = float(tension @ load) / square if square > 0.0 else start
    nearest = min(max(nearest, start), end)
    return float(np.linalg.norm(tension - load * nearest))


def strength(load: PieceLoad, start: float, end: float) -> float:
    """Greatest |load| between two natural lengths, N/m."""
    return max(float(np.linalg.norm(load_at(load, s))) for s in (start, end))


def panels(tension: Array, load: PieceLoad, length: float) -> list[float]:
    """Edges, in m of natural length, of panels that are short enough for the quadrature.

    t/|t| is analytic but for two points of the complex plane, |t(s)|/|load| away from s. A panel no longer
    than that lets 16 points err by about (2 + sqrt 5)^-32 = 1e-20 (Trefethen, SIAM Review 50 (2008) 67-87,
    theorem 4.5).

    >>> panels(np.array([10.0, 0.0, 0.0]), np.array([0.0, 0.0, -1.0]), 10.0)
    [0.0, 10.0]
    >>> panels(np.array([10.0, 0.0, 0.0]), np.array([0.0, 0.0, -1.0]), 24.0)
    [0.0, 6.0, 12.0, 24.0]
    """
    edges = [0.0]
    waiting = [length]
    while waiting:
        start, end = edges[-1], waiting[-1]
        least = least_tension(tension, load, start, end)
        if strength(load, start, end) * (end - start) <= least or end - start < 1e-12 * length:
            edges.append(waiting.pop())
        else:
            waiting.append(0.5 * (start + end))
    return edges


def nodes(edges: list[float]) -> tuple[Array, Array]:
    """Places and weights of the quadrature over all panels.

    >>> places, weights = nodes([0.0, 1.0, 3.0])
    >>> round(float(weights @ places**2), 12)
    9.0
    """
    start, end = np.array(edges[:-1]), np.array(edges[1:])
    half = 0.5 * (end - start)
    places = (start + half)[:, None] + half[:, None] * POINTS
    return places.ravel(), (half[:, None] * WEIGHTS).ravel()


def golden(value: Callable[[float], float], low: float, high: float, steps: int = 60) -> tuple[float, float]:
    """Place and value of the greatest value between low and high, by golden section (Kiefer, 1953).

    >>> place, most = golden(lambda x: -(x - 2.0) ** 2 + 5.0, 0.0, 3.0)
    >>> round(place, 6), round(most, 12)
    (2.0, 5.0)
    """
    ratio = 0.5 * (math.sqrt(5.0) - 1.0)
    left, right = high - ratio * (high - low), low + ratio * (high - low)
    at_left, at_right = value(left), value(right)
    for _ in range(steps):
        if at_left >= at_right:
            high, right, at_right = right, left, at_left
            left = high - ratio * (high - low)
            at_left = value(left)
        else:
            low, left, at_left = left, right, at_right
            right = low + ratio * (high - low)
            at_right = value(right)
    return max(((left, at_left), (right, at_right)), key=lambda pair: pair[1])
