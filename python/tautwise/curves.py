"""Stress-strain curves of a project file: polynomials in the percent of strain, and what is asked of them.

A curve stands in a file as its coefficients, each with the unit of a stress: ``initial = ["-512 psi", "4.902e4 psi"]``
is -512 psi plus 4.902e4 psi for each percent of strain, then for each percent squared and so on, to the fourth power.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from tautwise.fields import Kind, Measure
from tautwise.strict import Refused, described
from tautwise.units import quantity

TERMS_MOST = 5
PERCENT = 100.0


@dataclass(frozen=True)
class Stresses(Kind):
    """The coefficients of a stress-strain curve, Pa per percent of strain to the power of their place.

    >>> Stresses().read(["0 MPa", "256 GPa"])
    (0.0, 256000000000.0)
    """

    words = "2 to 5 stresses: a0, a1, ... of the stress a0 + a1 x + a2 x^2 + ... at x percent of strain"
    example = '["-512 psi", "4.902e4 psi", "-1.18e4 psi", "-5.76e4 psi"]'

    def read(self, value: Any) -> tuple[float, ...]:
        """The coefficients, Pa."""
        if not isinstance(value, list | tuple):
            raise Refused(f"{described(value)} where a list of stresses is needed")
        if not 2 <= len(value) <= TERMS_MOST:
            raise Refused(f"a list of {len(value)} stresses")
        return tuple(self._at(number, part) for number, part in enumerate(value))

    def json_schema(self) -> dict[str, Any]:
        """A list of quantities."""
        one = Measure("Pa", "4.902e4 psi").json_schema()
        return {"type": "array", "items": one, "minItems": 2, "maxItems": TERMS_MOST, "description": self.words}

    @staticmethod
    def _at(number: int, part: Any) -> float:
        try:
            return quantity(part, "Pa")
        except Refused as refused:
            raise Refused(f"[{number}]: {refused.problem}") from None


def force_terms(stresses_Pa: Sequence[float], area_m2: float) -> list[float]:
    """Coefficients of the force, N, at a strain as a ratio.

    >>> force_terms((0.0, 2.0, 3.0), 0.5)
    [0.0, 100.0, 15000.0]
    """
    return [stress * area_m2 * PERCENT**power for power, stress in enumerate(stresses_Pa)]


def steepest(terms: Sequence[float], end: float) -> float:
    """Greatest slope of a polynomial from 0 to `end`, looked for at places a sixty-fourth of that apart.

    >>> steepest([0.0, 2.0, -1.0], 0.5)
    2.0
    """
    places = [end * step / 64 for step in range(65)]
    return max(math.fsum(k * terms[k] * x ** (k - 1) for k in range(1, len(terms))) for x in places)
