"""Stations and directions in plan: a straight route, or one that turns at its supports."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from .quadrature import Array


@dataclass(frozen=True)
class Route:
    """Places of the supports in plan, m, (n + 1, 2), and whether the route turns at them.

    >>> bent = Route(np.array([[0.0, 0.0], [300.0, 0.0], [300.0, 400.0]]), turning=True)
    >>> bent.support_station(2), bent.station(1, np.array([290.0, 100.0, 7.0]))
    (700.0, 400.0)
    >>> bent.axes(1).round(3).tolist()
    [[0.707, 0.707, 0.0], [-0.707, 0.707, 0.0], [0.0, 0.0, 1.0]]
    """

    places: Array
    turning: bool = False

    def direction(self, span: int) -> Array:
        """Unit vector in plan from one support to the next."""
        run = self.places[span + 1] - self.places[span]
        return np.asarray(run / math.hypot(*run))

    def support_station(self, support: int) -> float:
        """Plan distance along the supports up to one of them; its x on a straight route."""
        if not self.turning:
            return float(self.places[support, 0])
        return math.fsum(math.dist(self.places[k], self.places[k + 1]) for k in range(support))

    def station(self, span: int, place: Array) -> float:
        """Station of a place of a span's line: how far it is along the span's plan direction."""
        if not self.turning:
            return float(place[0])
        ahead = (np.asarray(place)[:2] - self.places[span]) @ self.direction(span)
        return self.support_station(span) + float(ahead)

    def left(self, span: int, place: Array) -> float:
        """How far left of a span's own direction a place is; of the route where that is straight."""
        if not self.turning:
            return float(place[1])
        x, y = self.direction(span)
        return float(np.array([-y, x]) @ (np.asarray(place)[:2] - self.places[span]))

    def axes(self, support: int) -> Array:
        """Rows: ahead, to the left, up. At an angle point ahead halves the angle between the spans' directions."""
        if not self.turning:
            return np.eye(3)
        beside = [self.direction(k) for k in (support - 1, support) if 0 <= k < len(self.places) - 1]
        both = np.sum(beside, axis=0)
        x, y = both / math.hypot(*both)
        return np.array([[x, y, 0.0], [-y, x, 0.0], [0.0, 0.0, 1.0]])


def route_of(problem: Mapping[str, Any]) -> Route:
    """The route of a problem's supports."""
    rows = problem["supports"]
    places = np.array([[row["station_m"], row.get("offset_m", 0.0)] for row in rows], dtype=np.float64)
    return Route(places, problem.get("route") == "turning")
