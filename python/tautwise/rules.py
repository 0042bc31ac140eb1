"""Rules between the keys of a project's line, ground, crossings, supports and stringing."""

from __future__ import annotations

from itertools import pairwise

from tautwise.check import Checked, at_most_one, exactly_one
from tautwise.faults import example_of
from tautwise.limits import GROUND, TensionLimit
from tautwise.strict import did_you_mean, shown
from tautwise.tables import CLAMPED, HOLDS, OVER_SHEAVES, Condition, Line, Stringing, Support

STRINGING_RULES = ("horizontal_tension", "tension", "sag", "natural_length")

_HOLD_KEYS = {
    "length": (("hanger", "sheave"), "the length of its link"),
    "weight": (("hanger", "sheave"), "the weight of its link"),
    "friction": (("sheave",), "friction"),
    "stiffness_along": (("post",), "a spring rate"),
    "stiffness_across": (("post",), "a spring rate"),
}


def line_rules(checked: Checked) -> None:
    """Weight or mass, stiffness or modulus and area, and what the conditions and limits need."""
    if not isinstance(checked.document.tables.get("line"), dict):
        return
    exactly_one(checked, ("line",), Line, ("weight", "mass"))
    raw = checked.raw("line")
    if exactly_one(checked, ("line",), Line, ("stiffness", "modulus")) == "modulus" and raw.get("area") is None:
        checked.fault(("line",), "modulus is given without area", "both, or stiffness", 'area = "150 mm^2"')
    _needed_by_conditions(checked)
    for number, limit in enumerate(checked.limits):
        if isinstance(limit, TensionLimit) and limit.share is not None and raw.get("breaking_strength") is None:
            problem = "a share of the breaking strength, which [line] does not give"
            checked.fault(("limit", number, "share"), problem, "breaking_strength in [line]", 'most = "60 kN" instead')


def support_rules(checked: Checked) -> None:
    """Two supports at least, in order, held at both ends, each with the keys of its hold."""
    count = checked.count("support")
    if count < 2:
        problem = "only one support" if count else "no support"
        checked.fault(("support",), problem, "two [[support]] tables or more")
    for number in range(count):
        if checked.raw("support", number):
            _elevation_rule(checked, number)
            _hold_rules(checked, number)
    _order_rules(checked)
    for number in (0, count - 1) if count > 1 else ():
        why = {"hanger": "which would swing away", "sheave": "next to nothing: the line would run off it"}
        hold = checked.raw("support", number).get("hold")
        if isinstance(hold, str) and hold in why:
            which = "first" if number == 0 else "last"
            problem = f"the {which} support is a {hold}, {why[hold]}"
            checked.fault(("support", number, "hold"), problem, "an anchor or a post at both ends", 'hold = "anchor"')


def place_rules(checked: Checked) -> None:
    """Crossings that run forwards and lie on the route; a ground that reaches from end to end."""
    route = checked.station_range()
    for number, crossing in enumerate(checked.crossings):
        if crossing is None:
            continue
        if crossing.name == GROUND:
            problem = f'a crossing cannot be named "{GROUND}", the word for the ground profile'
            checked.fault(("crossing", number, "name"), problem)
        if crossing.to_m <= crossing.from_m:
            problem = f"{crossing.to_m:g} m does not lie beyond from, {crossing.from_m:g} m"
            checked.fault(("crossing", number, "to"), problem, "a station beyond from")
        elif route and route[0] < route[1] and (crossing.to_m < route[0] or crossing.from_m > route[1]):
            problem = f"the crossing lies off the route, which runs from {route[0]:g} m to {route[1]:g} m"
            checked.fault(("crossing", number), problem)
    _ground_rule(checked, route)


def stringing_rules(checked: Checked) -> None:
    """At most one rule, its supports known, one natural length for each span."""
    if not isinstance(checked.document.tables.get("stringing"), dict):
        return
    given = [key for key in STRINGING_RULES if checked.raw("stringing").get(key) is not None]
    at_most_one(checked, ("stringing",), Stringing, STRINGING_RULES)
    stringing = checked.stringing
    _method_rules(checked)
    if given == ["tension"]:
        _support_index(checked, ("stringing", "tension", "support"))
    if given == ["sag"]:
        _sag_rule(checked)
    if stringing is None or len(given) != 1:
        return
    lengths = stringing.natural_length_m
    spans = checked.count("support") - 1
    if isinstance(lengths, tuple) and len(lengths) != spans:
        problem = f"{len(lengths)} natural lengths for {spans} span{'s' if spans != 1 else ''}"
        checked.fault(("stringing", "natural_length"), problem, "one for each span, or one for the whole line")


def _method_rules(checked: Checked) -> None:
    """What belongs to a line strung over sheaves, and what it leaves no room for."""
    raw = checked.raw("stringing")
    over = raw.get("method") == OVER_SHEAVES
    for key in ("clip", "friction") if raw.get("method", CLAMPED) == CLAMPED else ():
        if raw.get(key) is not None:
            problem = f'{key} belongs to a line strung over sheaves, and this one is strung "{CLAMPED}"'
            checked.fault(("stringing", key), problem, f'method = "{OVER_SHEAVES}" beside it')
    if over and isinstance(raw.get("natural_length"), list):
        problem = "a length of each span leaves nothing to run over the sheaves"
        checked.fault(("stringing", "natural_length"), problem, "one for the whole line", 'natural_length = "1850 m"')


def _needed_by_conditions(checked: Checked) -> None:
    raw = checked.raw("line")
    conditions = [condition for condition in checked.conditions if condition is not None]
    sleeved = next((one.name for one in conditions if _acts_on_diameter(one)), None)
    if sleeved is not None and raw.get("diameter") is None:
        problem = f'diameter is missing, on which the ice or wind of "{shown(sleeved)}" acts'
        checked.fault(("line",), problem, "the bare outside diameter", example_of(Line, "diameter"))
    if checked.stringing is None or raw.get("expansion") is not None:
        return
    strung = checked.stringing.temperature_degC
    warmer = next((one.name for one in conditions if one.temperature_degC != strung), None)
    if warmer is not None:
        problem = f'expansion is missing, and "{shown(warmer)}" is not at the stringing temperature'
        checked.fault(("line",), problem, "the thermal strain per degree", example_of(Line, "expansion"))


def _acts_on_diameter(condition: Condition) -> bool:
    return condition.wind is not None or (condition.ice is not None and condition.ice.thickness_m > 0.0)


def _elevation_rule(checked: Checked, number: int) -> None:
    path = ("support", number)
    if exactly_one(checked, path, Support, ("elevation", "height")) == "height" and not checked.ground_given:
        problem = "a height needs a ground profile to stand on"
        checked.fault((*path, "height"), problem, "a [ground] table, or elevation", 'elevation = "24 m"')


def _hold_rules(checked: Checked, number: int) -> None:
    raw = checked.raw("support", number)
    hold = raw.get("hold", "anchor")
    path = ("support", number)
    if not isinstance(hold, str) or hold not in HOLDS:
        return
    for key, (owners, what) in _HOLD_KEYS.items():
        if raw.get(key) is not None and hold not in owners:
            article = "an" if hold == "anchor" else "a"
            checked.fault((*path, key), f"{article} {hold} has no {key}; {what} belongs to a {' or a '.join(owners)}")
    if hold == "sheave" and raw.get("weight") is not None and raw.get("length") is None:
        problem = "a sheave without a link hangs on nothing that could weigh on the line"
        checked.fault((*path, "weight"), problem, "a length beside it", 'length = "0.6 m"')
    at_an_end = number in (0, checked.count("support") - 1)  # no place for a hanger, with or without a length
    if hold == "hanger" and raw.get("length") is None and not at_an_end:
        checked.fault((*path, "length"), "missing", "the length of the hanger", 'length = "1.8 m"')


def _order_rules(checked: Checked) -> None:
    stations = [checked.station(number) for number in range(checked.count("support"))]
    for number, (before, after) in enumerate(pairwise(stations), start=1):
        if before is None or after is None or after > before:
            continue
        other = shown(checked.names("support")[number - 1] or "the support before")
        problem = f'out of order: {after:g} m lies before {before:g} m of "{other}"'
        if after == before:
            problem = f'two supports at one station, {after:g} m: "{other}" stands there too'
        checked.fault(("support", number, "station"), problem, "stations that increase")


def _ground_rule(checked: Checked, route: tuple[float, float] | None) -> None:
    ground = checked.ground
    if ground is None or route is None or ground.covers(*route):
        return
    first, last = ground.stations_m[0], ground.stations_m[-1]
    problem = (
        f"the ground profile runs from {first:g} m to {last:g} m and does not cover the route, "
        f"from {route[0]:g} m to {route[1]:g} m"
    )
    key = "points" if ground.profile is None else "profile"
    checked.fault(("ground", key), problem, "a profile from the first support to the last")


def _support_index(checked: Checked, path: tuple[str, ...]) -> int | None:
    name = checked.raw(*path[:-1]).get(path[-1])
    names = checked.names("support")
    if not isinstance(name, str):
        return None  # reported as the kind of value that it is
    if name in names:
        return names.index(name)
    known = [other for other in names if other]
    checked.fault(path, f'there is no support "{shown(name)}"; {did_you_mean(name, known)}')
    return None


def _sag_rule(checked: Checked) -> None:
    first = _support_index(checked, ("stringing", "sag", "from"))
    second = _support_index(checked, ("stringing", "sag", "to"))
    if first is not None and second is not None and second != first + 1:
        names = checked.names("support")
        problem = f'no span runs from "{shown(names[first] or "")}" to "{shown(names[second] or "")}"'
        checked.fault(("stringing", "sag", "to"), problem, "the support that follows from")
