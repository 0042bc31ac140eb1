"""A section with a carriage: the force is tried at places of its span until it may stay there."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any

import numpy as np

from .section import Section, Settled
from .sheave import lengths_of

if TYPE_CHECKING:
    from .project import Twin

MARGIN = 1e-6
"""A carriage nearer to a support than this share of the span is at it."""


def settle(twin: Twin, condition: int, pull_N: float | None, section_at: Callable[[float | None], Section]) -> Settled:
    """A condition in equilibrium, its carriage where it rests or is held.

    section_at: the loaded section with the carriage at a natural length from the first support; None: there is none.

    A free one rests where the tension is the same before and beyond it: of all places it makes the line's energy
    least. It moves to the side of the smaller tension. A held one is where the line passes its station.
    """
    rows = twin.problem["conditions"][condition].get("loads", ()) if condition >= 0 else ()
    load = next((row for row in rows if row.get("carriage", "none") != "none"), None)
    if load is None:
        return twin.at_rest(section_at(None))
    span, lengths = int(load["carriage_span"]), twin.lengths_m(pull_N)
    start, length = sum(lengths[:span]), lengths[span]

    def tried(s: float) -> tuple[Settled, float]:
        settled = twin.at_rest(section_at(start + s))
        return settled, miss(settled, load, span, start + s - sum(lengths_of(settled)[:span]))

    low, high = MARGIN * length, (1.0 - MARGIN) * length
    at_low, at_high = tried(low)[1], tried(high)[1]
    if at_low >= 0.0:
        return tried(0.0)[0]
    if at_high <= 0.0:
        return tried(length)[0]
    while high - low > 1e-13 * length:
        middle = high - (high - low) * min(max(at_high / (at_high - at_low), 0.02), 0.98)
        settled, at_middle = tried(middle)
        if at_middle == 0.0:
            break
        if at_middle < 0.0:
            low, at_low, at_high = middle, at_middle, 0.5 * at_high
        else:
            high, at_high, at_low = middle, at_middle, 0.5 * at_low
    return settled


def miss(settled: Settled, load: dict[str, Any], span: int, s: float) -> float:
    """What is zero where the carriage stands: tension beyond less before, N, or its station less that asked for, m."""
    if load["carriage"] == "held":
        return settled.station(span, settled.position_at(span, s)) - float(load["from_m"])
    hung = settled.spans[span]
    here = [tension for at, tension, _ in hung.starts() if abs(at - s) < 1e-9 * hung.length_m]
    return float(np.linalg.norm(here[0])) - float(np.linalg.norm(hung.tension_at(s - 1e-12 * hung.length_m)))
