"""Rules about where supports stand: along a straight route by station, or in plan by east and north."""

from __future__ import annotations

import math
from itertools import pairwise

from tautwise.check import Checked
from tautwise.faults import example_of
from tautwise.strict import shown
from tautwise.tables import Support

ROUTE_KEYS, PLAN_KEYS = ("station", "offset"), ("east", "north")


def support_place_rules(checked: Checked) -> None:
    """Each support has its place, all in one way, one after the other along the route."""
    count = checked.count("support")
    turning = checked.turning()
    for number in range(count):
        if checked.raw("support", number):
            if turning:
                _plan_rule(checked, number)
            elif checked.raw("support", number).get("station") is None:
                problem, expected = "missing", "a length"
                checked.fault(("support", number, "station"), problem, expected, example_of(Support, "station"))
    if turning:
        _apart_rule(checked)
    else:
        _order_rule(checked)


def _plan_rule(checked: Checked, number: int) -> None:
    """On a route that turns every support has both coordinates and nothing else."""
    raw = checked.raw("support", number)
    path = ("support", number)
    expected, example = "east and north of every support", 'east = "431.2 m"\nnorth = "118.6 m"'.replace("\n", ", ")
    given = [key for key in ROUTE_KEYS if raw.get(key) is not None]
    for key, other in (PLAN_KEYS, PLAN_KEYS[::-1]):
        if raw.get(key) is not None and raw.get(other) is None and not given:
            problem = f"angle point without coordinates: {key} is given without {other}"
            checked.fault((*path, key), problem, "both of them", example_of(Support, other))
    planned = any(raw.get(key) is not None for key in PLAN_KEYS)
    if given and planned:
        beside = " and ".join(key for key in PLAN_KEYS if raw.get(key) is not None)
        problem = f"{given[0]} is given together with {beside}"
        checked.fault((*path, given[0]), problem, "either station (and offset), or east and north", example)
    elif not planned:
        where = (*path, given[0]) if given else path
        problem = "angle point without coordinates: other supports of this route are given by east and north"
        checked.fault(where, problem, expected, example)


def _apart_rule(checked: Checked) -> None:
    places = [checked.plan(number) for number in range(checked.count("support"))]
    for number, (before, after) in enumerate(pairwise(places), start=1):
        if before is not None and after is not None and math.dist(before, after) == 0.0:
            other = shown(checked.names("support")[number - 1] or "the support before")
            problem = f'two supports at one place: "{other}" stands there too'
            checked.fault(("support", number, "east"), problem, "another place in plan")


def _order_rule(checked: Checked) -> None:
    stations = [checked.station(number) for number in range(checked.count("support"))]
    for number, (before, after) in enumerate(pairwise(stations), start=1):
        if before is None or after is None or after > before:
            continue
        other = shown(checked.names("support")[number - 1] or "the support before")
        problem = f'out of order: {after:g} m lies before {before:g} m of "{other}"'
        if after == before:
            problem = f'two supports at one station, {after:g} m: "{other}" stands there too'
        checked.fault(("support", number, "station"), problem, "stations that increase")
