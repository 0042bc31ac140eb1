"""Limits judged on a settled section: value, allowed value, utilisation and margin of the worst place."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from .quadrature import Array, golden
from .section import Settled
from .spacing import Beside, least_spacing
from .states import horizontal_tension, sag_of, slope_max, support_state, tension_max

SPAN_KINDS = {"clearance", "tension", "sag", "catenary_constant", "slope", "spacing"}


@dataclass(frozen=True)
class Verdict:
    """One rule at one place; it holds while the utilisation is at most 1."""

    value: float
    allowed: float
    margin: float
    utilisation: float


def most(value: float, allowed: float) -> Verdict:
    """A value that must not exceed what is allowed.

    >>> most(30.0, 40.0)
    Verdict(value=30.0, allowed=40.0, margin=10.0, utilisation=0.75)
    """
    return Verdict(value, allowed, allowed - value, value / allowed)


def least(value: float, allowed: float, scale: float) -> Verdict:
    """A value that must not fall below what is allowed: allowed/value, beyond 1 mirrored to stay finite.

    Where 0 is allowed, 1 less the value over a scale, not below 0.

    >>> least(8.0, 6.0, 1.0).utilisation, least(3.0, 6.0, 1.0).utilisation, least(0.25, 0.0, 1.0).utilisation
    (0.75, 1.5, 0.75)
    """
    if allowed <= 0.0:
        return Verdict(value, allowed, value - allowed, max(0.0, 1.0 - (value - allowed) / scale))
    utilisation = allowed / value if value >= allowed else 2.0 - value / allowed
    return Verdict(value, allowed, value - allowed, utilisation)


def number(row: Mapping[str, Any], key: str) -> float | None:
    """An optional number: None where missing, None or NaN."""
    value = row.get(key)
    return None if value is None or math.isnan(value) else float(value)


def judge(
    problem: Mapping[str, Any], limit: int, settled: Settled, bare: Settled, beside: Beside | None = None
) -> Verdict | None:
    """The worst of a limit's places in one condition; `bare` is the condition without its resultant addition.

    beside: the line that a spacing keeps from.
    """
    rule = problem["limits"][limit]
    by_span = rule["kind"] in SPAN_KINDS
    count = len(settled.spans) + (0 if by_span else 1)
    covers = rule.get("covers") or [True] * (count + 1)
    found: list[Verdict] = []
    for place in range(count):
        if covers[place]:
            found += (
                judge_span(problem, rule, settled, place, beside)
                if by_span
                else judge_support(rule, settled, bare, place, problem)
            )
    return max(found, key=lambda verdict: verdict.utilisation, default=None)


def judge_span(
    problem: Mapping[str, Any],
    rule: Mapping[str, Any],
    settled: Settled,
    span: int,
    beside: Beside | None = None,
) -> list[Verdict]:
    """Verdicts of one span."""
    if rule["kind"] == "spacing":
        return [] if beside is None else [least(least_spacing(settled, span, beside), rule["least"], 1.0)]
    if rule["kind"] == "clearance":
        clearance = least_clearance(problem, rule, settled, span)
        return [] if clearance is None else [least(clearance, rule["least"], 1.0)]
    hung = settled.spans[span]
    if rule["kind"] == "tension":
        share = number(rule, "share")
        allowed = rule["most"] if share is None else share * problem["line"]["breaking_strength_N"]
        return [most(tension_max(hung), allowed)]
    if rule["kind"] == "sag":
        sag, bounds = sag_of(settled, span), (number(rule, "most"), number(rule, "least"))
        upper = [] if bounds[0] is None else [most(sag, bounds[0])]
        return upper + ([] if bounds[1] is None else [least(sag, bounds[1], 1.0)])
    if rule["kind"] == "catenary_constant":
        return [most(horizontal_tension(settled, span) / problem["line"]["weight_N_per_m"], rule["most"])]
    return [most(slope_max(hung), rule["most"])]


def judge_support(
    rule: Mapping[str, Any], settled: Settled, bare: Settled, support: int, problem: Mapping[str, Any]
) -> list[Verdict]:
    """Verdicts of one support."""
    at = settled.section.supports[support]
    state = support_state(settled, support)
    if rule["kind"] == "swing":
        return [most(support_state(bare, support)["swing_rad"], rule["most"])] if at.hold == "hanger" else []
    if rule["kind"] == "uplift":
        risen = lift(settled, support)
        if risen is not None:
            down = min(state["down_N"], 0.0)
            return [Verdict(down, rule["least"], down - rule["least"], 1.0 + max(risen, 1e-6))]
        beside = [span.length_m for k, span in enumerate(settled.spans) if k in (support - 1, support)]
        return [least(state["down_N"], rule["least"], 0.5 * sum(beside) * problem["line"]["weight_N_per_m"])]
    direction = rule.get("direction", "resultant")
    loads = {
        "along": abs(state["along_N"]),
        "across": abs(state["across_N"]),
        "down": max(0.0, state["down_N"]),
        "up": max(0.0, -state["down_N"]),
        "resultant": state["resultant_N"],
    }
    allowed, share = number(rule, "most"), number(rule, "share")
    if share is not None:
        capacity = number(problem["supports"][support], f"capacity_{direction}_N")
        allowed = None if capacity is None else share * capacity
    return [] if allowed is None else [most(loads[direction], allowed)]


def lift(settled: Settled, support: int) -> float | None:
    """How far a hanger's clamp has risen from plumb, in hanger lengths; None where the hanger carries from below.

    It is lifted when it is slack, its clamp nearer than its length, or when its clamp is no lower than its support.
    """
    at = settled.section.supports[support]
    if at.hold != "hanger":
        return None
    link = settled.clamps[support] - at.place
    if link[2] < 0.0 and at.reach_m(settled.clamps[support]) >= at.hanger_length_m * (1.0 - 1e-6):
        return None
    return float(link[2]) / at.drop_m() + 1.0


def least_clearance(
    problem: Mapping[str, Any], rule: Mapping[str, Any], settled: Settled, span: int
) -> float | None:
    """Least vertical clearance of a span over the ground or a crossing's top between the rule's stations, m.

    Dense samples of the line, the stretch's own bounds and the profile's points; then golden section on both sides
    of the lowest. None where the span does not pass there.
    """
    top = top_of(problem, rule)
    if top is None:
        return None
    stations, elevations = top
    low, high = bounds_of(rule, stations)
    hung, start = settled.spans[span], settled.clamps[span]

    def clearance(s: float) -> float:
        place = start + hung.position_at(s)
        return float(place[2]) - float(np.interp(settled.station(span, place), stations, elevations))

    def passes(s: float) -> float:
        return settled.station(span, start + hung.position_at(s))

    samples = np.linspace(0.0, hung.length_m, 401)
    passed = np.array([passes(float(s)) for s in samples])
    edges = [x for x in [low, high, *stations] if low <= x <= high]
    cuts = [
        s
        for x in edges
        for s in crossings_of(passes, samples, passed, x)
    ]
    places = np.unique(np.concatenate([samples, cuts]))
    found = start + hung.positions_at(places)
    along = np.array([settled.station(span, place) for place in found])
    inside = (along >= low - 1e-9) & (along <= high + 1e-9)
    if not inside.any():
        return None
    heights = np.where(inside, found[:, 2] - np.interp(along, stations, elevations), np.inf)
    at = int(np.argmin(heights))
    best = float(heights[at])
    for near, far in ((at - 1, at), (at, at + 1)):
        if near >= 0 and far < len(places) and inside[near] and inside[far]:
            best = min(best, -golden(lambda s: -clearance(s), float(places[near]), float(places[far]), 40)[1])
    return best


def top_of(problem: Mapping[str, Any], rule: Mapping[str, Any]) -> tuple[Array, Array] | None:
    """Stations and elevations of what must be kept clear of."""
    if rule.get("crossing") is not None:
        crossing = problem["crossings"][rule["crossing"]]
        return np.array([crossing["from_m"], crossing["to_m"]]), np.full(2, float(crossing["top_m"]))
    ground = problem.get("ground")
    return None if ground is None else (np.asarray(ground["station_m"]), np.asarray(ground["elevation_m"]))


def bounds_of(rule: Mapping[str, Any], stations: Array) -> tuple[float, float]:
    """First and last station that the rule looks at."""
    low, high = number(rule, "from_m"), number(rule, "to_m")
    first = float(stations[0]) if low is None else max(low, float(stations[0]))
    return first, float(stations[-1]) if high is None else min(high, float(stations[-1]))


def crossings_of(station: Callable[[float], float], samples: Array, passed: Array, x: float) -> list[float]:
    """Natural lengths at which the line passes a station, by bisection between samples."""
    found = []
    for i in np.flatnonzero((passed[:-1] - x) * (passed[1:] - x) <= 0.0):
        low, high = float(samples[i]), float(samples[i + 1])
        rising = passed[i + 1] > passed[i]
        for _ in range(50):
            middle = 0.5 * (low + high)
            low, high = (middle, high) if (station(middle) < x) == rising else (low, middle)
        found.append(0.5 * (low + high))
    return found
