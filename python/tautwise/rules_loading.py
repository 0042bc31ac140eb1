"""Rules between the keys of a project's marks and limits."""

from __future__ import annotations

from tautwise.check import Checked, exactly_one, known_names
from tautwise.keylines import Path as KeyPath
from tautwise.limits import (
    GROUND,
    ClearanceLimit,
    SagLimit,
    SupportLoadLimit,
    SwingLimit,
)
from tautwise.rules_loads import on_route, span_names
from tautwise.strict import did_you_mean, shown
from tautwise.tables import Mark, Support


def mark_rules(checked: Checked) -> None:
    """Each mark at one place, on the line."""
    for number, mark in enumerate(checked.marks):
        path = ("mark", number)
        if checked.raw(*path):
            exactly_one(checked, path, Mark, ("at", "at_length"))
        if mark is not None and mark.at_m is not None:
            on_route(checked, (*path, "at"), mark.at_m)


def limit_rules(checked: Checked) -> None:
    """Names that exist, and the bounds that each kind needs."""
    for number, limit in enumerate(checked.limits):
        path = ("limit", number)
        known_names(checked, (*path, "conditions"), "condition")
        known_names(checked, (*path, "supports"), "support")
        span_names(checked, (*path, "spans"))
        if checked.raw(*path).get("kind") == "clearance":
            _over_rule(checked, path)
        if isinstance(limit, ClearanceLimit):
            _clearance_rules(checked, path, limit)
        if checked.raw(*path).get("kind") in ("tension", "support_load"):
            exactly_one(checked, path, SupportLoadLimit, ("share", "most"))
        if isinstance(limit, SagLimit):
            _sag_rules(checked, path, limit)
        if isinstance(limit, SupportLoadLimit):
            _capacity_rules(checked, path, limit)
        if isinstance(limit, SwingLimit):
            _swing_rules(checked, path, limit)


def _over_rule(checked: Checked, path: KeyPath) -> None:
    crossings = [name for name in checked.names("crossing") if name]
    over = checked.raw(*path).get("over", GROUND)
    if over == GROUND:
        if not checked.ground_given:
            problem = "a clearance over the ground, and no ground profile"
            checked.fault(path, problem, "a [ground] table, or over with a crossing's name", 'over = "channel"')
    elif isinstance(over, str) and over not in crossings:
        problem = f'there is no crossing "{shown(over)}"; {did_you_mean(over, [*crossings, GROUND])}'
        checked.fault((*path, "over"), problem)


def _clearance_rules(checked: Checked, path: KeyPath, limit: ClearanceLimit) -> None:
    route = checked.station_range()
    if limit.from_m is not None and limit.to_m is not None and limit.to_m <= limit.from_m:
        checked.fault((*path, "to"), f"{limit.to_m:g} m does not lie beyond from, {limit.from_m:g} m")
    elif route and route[0] < route[1]:
        first = limit.from_m if limit.from_m is not None else route[0]
        last = limit.to_m if limit.to_m is not None else route[1]
        if last < route[0] or first > route[1]:
            key = "from" if limit.from_m is not None else "to"
            problem = f"the stretch lies off the route, which runs from {route[0]:g} m to {route[1]:g} m"
            checked.fault((*path, key), problem)


def _sag_rules(checked: Checked, path: KeyPath, limit: SagLimit) -> None:
    if limit.most is None and limit.least is None:
        checked.fault(path, "neither most nor least is given", "one of them or both", 'most = "4 m"')
    elif limit.most is not None and limit.least is not None and limit.least > limit.most:
        checked.fault((*path, "least"), f"least, {limit.least:g} m, is above most, {limit.most:g} m")


def _capacity_rules(checked: Checked, path: KeyPath, limit: SupportLoadLimit) -> None:
    if limit.share is None:
        return
    if limit.direction == "resultant":
        problem = "a share of capacity needs the direction that it is in"
        key = "direction" if checked.raw(*path).get("direction") is not None else "share"
        checked.fault((*path, key), problem, "along, across, down or up", 'direction = "down"')
        return
    supports = [support for support in checked.supports if support is not None]
    able = {support.name for support in supports if has_capacity(support, limit.direction)}
    if limit.supports is None and not able and len(supports) == len(checked.supports):
        example = f'capacity = {{ {limit.direction} = "30 kN" }}'
        checked.fault((*path, "share"), f"no support gives its capacity {limit.direction}", "one at least", example)
    for number, name in enumerate(limit.supports or ()):
        if name in {support.name for support in supports} - able:
            problem = f'support "{shown(name)}" gives no capacity {limit.direction}'
            example = f'capacity = {{ {limit.direction} = "30 kN" }}'
            expected = "a capacity there, or most here instead of share"
            checked.fault((*path, "supports", number), problem, expected, example)


def _swing_rules(checked: Checked, path: KeyPath, limit: SwingLimit) -> None:
    supports = [support for support in checked.supports if support is not None]
    hangers = {support.name for support in supports if support.hold == "hanger"}
    if limit.supports is None and not hangers and len(supports) == len(checked.supports):
        checked.fault((*path, "kind"), "no support is a hanger that could swing")
    for number, name in enumerate(limit.supports or ()):
        if name in {support.name for support in supports} - hangers:
            checked.fault((*path, "supports", number), f'support "{shown(name)}" is no hanger and does not swing')


def has_capacity(support: Support, direction: str) -> bool:
    """Whether a support states its capacity in a direction."""
    return getattr(support.capacity, f"{direction}_N", None) is not None
