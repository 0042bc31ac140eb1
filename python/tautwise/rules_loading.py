"""Rules between the keys of a project's conditions, loads, marks and limits."""

from __future__ import annotations

from tautwise.check import LOADS_MOST, Checked, exactly_one, known_names
from tautwise.keylines import Path as KeyPath
from tautwise.limits import (
    GROUND,
    ClearanceLimit,
    SagLimit,
    SupportLoadLimit,
    SwingLimit,
)
from tautwise.strict import did_you_mean, shown
from tautwise.tables import Condition, Load, Mark, Support, Wind

_STATION_KEYS = ("at", "from", "to")
_LENGTH_KEYS = ("at_length", "from_length", "to_length")


def condition_rules(checked: Checked) -> None:
    """One condition at least; wind by pressure or speed; loads that lie on the line."""
    if checked.count("condition") == 0:
        checked.fault(("condition",), "no condition", "one [[condition]] table or more", 'name = "hot"')
    for number in range(checked.count("condition")):
        raw = checked.raw("condition", number)
        wind = ("condition", number, "wind")
        if isinstance(raw.get("wind"), dict):
            given = exactly_one(checked, wind, Wind, ("pressure", "speed"))
            if given == "pressure" and raw["wind"].get("air_density") is not None:
                checked.fault((*wind, "air_density"), "a pressure needs no air density", "speed instead of pressure")
        loads = raw.get("load")
        if isinstance(loads, list | tuple):
            _load_rules(checked, number, len(loads))


def mark_rules(checked: Checked) -> None:
    """Each mark at one place, on the line."""
    for number, mark in enumerate(checked.marks):
        path = ("mark", number)
        if checked.raw(*path):
            exactly_one(checked, path, Mark, ("at", "at_length"))
        if mark is not None and mark.at_m is not None:
            _on_route(checked, (*path, "at"), mark.at_m)


def limit_rules(checked: Checked) -> None:
    """Names that exist, and the bounds that each kind needs."""
    for number, limit in enumerate(checked.limits):
        path = ("limit", number)
        known_names(checked, (*path, "conditions"), "condition")
        known_names(checked, (*path, "supports"), "support")
        known_names(checked, (*path, "spans"), "support")
        _span_names(checked, path)
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


def _load_rules(checked: Checked, number: int, count: int) -> None:
    path = ("condition", number, "load")
    if count > LOADS_MOST:
        checked.fault(path, f"{count} loads; at most {LOADS_MOST} are read")
        return
    condition: Condition | None = checked.conditions[number] if number < len(checked.conditions) else None
    for index in range(count):
        raw = checked.raw(*path, index)
        if not raw:
            continue
        kind = exactly_one(checked, (*path, index), Load, ("force", "per_length"))
        if kind == "force":
            _force_places(checked, (*path, index))
        elif kind == "per_length":
            _stretch_places(checked, (*path, index))
        if condition is not None:
            _load_values(checked, (*path, index), condition.loads[index])


def _force_places(checked: Checked, path: KeyPath) -> None:
    exactly_one(checked, path, Load, ("at", "at_length"))
    for key in ("from", "to", "from_length", "to_length"):
        if checked.raw(*path).get(key) is not None:
            checked.fault((*path, key), "a force stands at one place", "at or at_length", 'at = "75 m"')


def _stretch_places(checked: Checked, path: KeyPath) -> None:
    raw = checked.raw(*path)
    given = [key for key in (*_STATION_KEYS, *_LENGTH_KEYS) if raw.get(key) is not None]
    if given in ([], ["from", "to"], ["from_length", "to_length"]):
        return
    problem = f"{', '.join(given)} {'is' if len(given) == 1 else 'are'} no stretch of the line"
    expected = "from and to, or from_length and to_length, or none for the whole line"
    checked.fault((*path, given[0]), problem, expected, 'from = "10 m", to = "60 m"')


def _load_values(checked: Checked, path: KeyPath, load: Load) -> None:
    for key, station in (("at", load.at_m), ("from", load.from_m), ("to", load.to_m)):
        if station is not None:
            _on_route(checked, (*path, key), station)
    for first, last, key in ((load.from_m, load.to_m, "to"), (load.from_length_m, load.to_length_m, "to_length")):
        if first is not None and last is not None and last <= first:
            problem = f"{last:g} m does not lie beyond the beginning of the stretch, {first:g} m"
            checked.fault((*path, key), problem, "a place beyond it")
    value = load.force_N if load.force_N is not None else load.per_length_N_per_m
    if value is not None and value < 0.0 and load.direction not in ("across", "along"):
        key = "force" if load.force_N is not None else "per_length"
        checked.fault((*path, key), "a negative load", "its size, and where it points", 'direction = "up"')


def _on_route(checked: Checked, path: KeyPath, station: float) -> None:
    route = checked.station_range()
    if route is not None and route[0] < route[1] and not route[0] <= station <= route[1]:
        problem = f"{station:g} m is not on the line, which runs from {route[0]:g} m to {route[1]:g} m"
        checked.fault(path, problem, "a station between the first and the last support")


def _span_names(checked: Checked, path: KeyPath) -> None:
    supports = checked.names("support")
    for number, name in enumerate(checked.listed(*path, "spans")):
        if len(supports) > 1 and name == supports[-1] and name not in supports[:-1]:
            problem = f'no span starts at the last support, "{shown(name)}"'
            checked.fault((*path, "spans", number), problem, "the name of the support where the span starts")


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
