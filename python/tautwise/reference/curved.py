"""A line with a curved law, from its definition: parts that share one stretch, and what history leaves in them.

Part i has the strain e = (L - 1) - expansion (t - t_test) + e_s0 - (strains added to the whole line). It carries its
loading polynomial, straight beyond its ends and never less than nothing; once stretched to `meets`, its unloading
line from `permanent` up to there. e_s0 makes the line unstressed at L = 1, as strung, at the stringing temperature.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Any

import numpy as np

GAUSS = np.polynomial.legendre.leggauss(5)
"""Exact for the integral of a polynomial of the fourth degree."""


def bisect(value: Callable[[float], float], low: float, high: float) -> float:
    """Where a value that grows passes 0, to the last digit.

    >>> round(bisect(lambda x: x * x - 2.0, 0.0, 2.0), 12)
    1.414213562373
    """
    while True:
        middle = 0.5 * (low + high)
        if not low < middle < high:
            return middle
        low, high = (low, middle) if value(middle) > 0.0 else (middle, high)


@dataclass(frozen=True)
class Part:
    """One part: its row of the problem, and what a history has left in it.

    >>> part = Part({"loading_N": [0.0, 1e6], "valid_to": 0.01, "final_stiffness_N": 2e6}, permanent=5e-4, meets=1e-3)
    >>> [round(float(part.force(e)), 6) for e in (4e-4, 7.5e-4, 2e-3)]
    [0.0, 500.0, 2000.0]
    """

    row: Mapping[str, Any]
    permanent: float = -math.inf
    meets: float = -math.inf
    creeping: bool = False

    def loading(self, strain: Any, creeping: bool) -> Any:
        """Force on first loading, or on the creep curve where the part has one, N."""
        creeps = creeping and self.row.get("creep_N") is not None
        place = np.minimum(np.maximum(strain, 0.0), float(self.row["valid_to"]))
        value: Any = 0.0
        slope: Any = 0.0
        for term in reversed(self.row["creep_N" if creeps else "loading_N"]):
            value, slope = value * place + term, slope * place + value
        return np.maximum(0.0, value + slope * (strain - place))

    def force(self, strain: Any) -> Any:
        """Force as the part stands now, N."""
        loaded = self.loading(strain, self.creeping)
        if self.meets == -math.inf:
            return loaded
        unloading = np.maximum(0.0, float(self.row["final_stiffness_N"]) * (strain - self.permanent))
        return np.where(strain <= self.meets, unloading, loaded)

    def begins(self) -> float:
        """Strain at which it begins to carry."""
        if self.meets > -math.inf:
            return self.permanent
        return bisect(lambda e: float(self.loading(e, self.creeping)) or -1.0, -0.5, float(self.row["valid_to"]))

    def kinks(self) -> list[float]:
        """Strains between which its force is smooth."""
        return [self.begins(), self.meets, 0.0, float(self.row["valid_to"])]

    def stretched(self, strain: float, creeping: bool) -> Part:
        """After it was stretched to a strain, or crept to it: the larger permanent stretch stays."""
        force = float(self.loading(strain, creeping))
        permanent = strain - force / float(self.row["final_stiffness_N"])
        over = creeping and force > float(self.loading(strain, False))
        if force <= 0.0 or permanent <= self.permanent or over:
            return self
        meets = self.meeting(permanent, strain) if creeping and self.row.get("creep_N") is not None else strain
        return Part(self.row, permanent, meets)

    def meeting(self, permanent: float, strain: float) -> float:
        """Where its unloading line meets the loading curve again: the first of 10,000 places, then bisection."""
        rate = float(self.row["final_stiffness_N"])

        def above(e: float) -> float:
            return rate * (e - permanent) - float(self.loading(e, False))

        places = strain + (0.5 - strain) * np.linspace(0.0, 1.0, 10_001) ** 3
        for low, high in pairwise(places):
            if above(float(high)) > 0.0:
                return bisect(above, float(low), float(high))
        return math.inf


class CurvedMaterial:
    """Parts under one stretch at a temperature; the interface of `span.Material`.

    >>> row = {"loading_N": [0.0, 1e6, -1e7], "valid_to": 0.01, "final_stiffness_N": 1e6}
    >>> line = CurvedMaterial([Part(row)], [0.0])
    >>> round(float(line.stretch(np.array([750.0]))[0]), 9), round(float(line.stored(np.array([1.001]))[0]), 9)
    (1.000755711, 0.496666667)
    """

    def __init__(self, parts: Sequence[Part], shifts: Sequence[float]) -> None:
        self.parts, self.shifts = list(parts), list(shifts)
        kinks = {kink + shift for part, shift in zip(parts, shifts, strict=True) for kink in part.kinks()}
        self.strain = min(part.begins() + shift for part, shift in zip(parts, shifts, strict=True))
        self.knots = sorted({self.strain} | {x for x in kinks if self.strain < x < math.inf})
        self.stiffness_N = sum(float(part.row["loading_N"][1]) for part in parts)

    def force(self, strain: Any) -> Any:
        """Tension at L - 1, N."""
        return sum(part.force(strain - shift) for part, shift in zip(self.parts, self.shifts, strict=True))

    def kinks_N(self) -> list[float]:
        """Tensions between which the law is smooth."""
        return [float(self.force(x)) for x in self.knots[1:]]

    def stretch(self, tension: Any) -> Any:
        """L that carries a tension: 60 halvings of what lies between no tension and half as long again."""
        low = np.full(np.shape(tension), self.strain)
        high = np.full(np.shape(tension), 0.5)
        for _ in range(60):
            middle = 0.5 * (low + high)
            more = self.force(middle) > tension
            low, high = np.where(more, low, middle), np.where(more, middle, high)
        return 1.0 + 0.5 * (low + high)

    def stored(self, stretch: Any) -> Any:
        """int N dL up to a stretch, J/m, from knot to knot."""
        strain = np.asarray(stretch) - 1.0
        total = np.zeros(np.shape(strain))
        for low, high in zip(self.knots, [*self.knots[1:], math.inf], strict=True):
            half = 0.5 * (np.clip(strain, low, high) - low)
            for point, weight in zip(*GAUSS, strict=True):
                total = total + half * float(weight) * self.force(low + half * (1.0 + float(point)))
        return total

    def conjugate(self, tension: Any) -> Any:
        """W*(T) = T L - W(L) at the L that carries T."""
        stretch = self.stretch(tension)
        return tension * stretch - self.stored(stretch)

    def compliance(self, tension: Any) -> Any:
        """dL/dT by central differences over a ten-thousandth of T, enough for Newton."""
        step = 1e-4 * np.asarray(tension) + 1e-6
        return (self.stretch(tension + step) - self.stretch(tension - step)) / (2.0 * step)


def expanded(line: Mapping[str, Any], temperature_degC: float, reference_degC: float, added: float) -> list[float]:
    """The strain that each part has less than L - 1."""
    test = float(line.get("test_temperature_degC", 20.0))
    rates = [float(row.get("expansion_per_K", 0.0)) for row in line["parts"]]
    first = min(
        Part(row).begins() + rate * (reference_degC - test) for row, rate in zip(line["parts"], rates, strict=True)
    )
    return [rate * (temperature_degC - test) - first + added for rate in rates]


def creep_strain(line: Mapping[str, Any]) -> float:
    """c t^n.

    >>> creep_strain({"creep_coefficient": 1e-5, "creep_exponent": 0.5, "creep_hours": 100.0})
    0.0001
    """
    time = math.pow(float(line.get("creep_hours", 0.0)), float(line.get("creep_exponent", 0.0)))
    return float(line.get("creep_coefficient", 0.0)) * time


def curved_line(
    line: Mapping[str, Any],
    temperature_degC: float,
    reference_degC: float,
    parts: Sequence[Part] | None = None,
    added: float = 0.0,
) -> CurvedMaterial:
    """The material of a line at a temperature; `parts` as a history has left them."""
    now = [Part(row) for row in line["parts"]] if parts is None else list(parts)
    return CurvedMaterial(now, expanded(line, temperature_degC, reference_degC, added))


def lived_through(
    line: Mapping[str, Any],
    reference_degC: float,
    met: Sequence[tuple[float, float]],
    crept: tuple[float, float] | None,
) -> list[Part]:
    """The parts of a span after it met (temperature, mean stretch) as strung, and crept to one of these."""
    parts = [Part(row) for row in line["parts"]]
    for creeping, found in ((False, met), (True, [crept] if crept else [])):
        for temperature, stretch in found:
            shifts = expanded(line, temperature, reference_degC, 0.0)
            pairs = zip(parts, shifts, strict=True)
            parts = [part.stretched(stretch - 1.0 - shift, creeping) for part, shift in pairs]
    return parts
