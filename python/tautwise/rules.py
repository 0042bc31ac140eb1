"""Rules between the keys of a project's line, ground, crossings, supports and stringing."""

from __future__ import annotations

from tautwise.additions import FAILED, size_rules
from tautwise.check import Checked, at_most_one, exactly_one
from tautwise.faults import example_of
from tautwise.limits import GROUND, TensionLimit
from tautwise.rules_curves import expands, is_curved
from tautwise.rules_route import support_place_rules
from tautwise.strict import did_you_mean, shown
from tautwise.tables import CLAMPED, HOLDS, OVER_SHEAVES, Condition, Line, Stringing, Support

STRINGING_RULES = ("horizontal_tension", "tension", "sag", "natural_length")

_HOLD_KEYS = {
    "length": (("hanger", "sheave"), "the length of its link"),
    "weight": (("hanger", "sheave"), "the weight of its link"),
    "wind_area": (("hanger", "sheave"), "the drag area of its string"),
    "form": (("hanger",), "the form of its link"),
    "spread": (("hanger",), "the spread of a V"),
    "friction": (("sheave",), "friction"),
    "stiffness_along": (("post", "anchor"), "a spring rate"),
    "stiffness_across": (("post", "anchor"), "a spring rate"),
    "stiffness_vertical": (("anchor",), "a vertical spring rate"),
}


def line_rules(checked: Checked) -> None:
    """Weight or mass, stiffness or modulus and area, and what the conditions and limits need."""
    if not isinstance(checked.document.tables.get("line"), dict):
        return
    told = size_rules(checked)
    if told == FAILED:
        return
    if not told:
        _weight_and_stiffness(checked)
    raw = checked.raw("line")
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
    support_place_rules(checked)
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


def _weight_and_stiffness(checked: Checked) -> None:
    raw = checked.raw("line")
    exactly_one(checked, ("line",), Line, ("weight", "mass"))
    given = None if is_curved(raw) else exactly_one(checked, ("line",), Line, ("stiffness", "modulus"))
    if given == "modulus" and raw.get("area") is None:
        checked.fault(("line",), "modulus is given without area", "both, or stiffness", 'area = "150 mm^2"')


def _needed_by_conditions(checked: Checked) -> None:
    raw = checked.raw("line")
    conditions = [condition for condition in checked.conditions if condition is not None]
    sleeved = next((one.name for one in conditions if _acts_on_diameter(one)), None)
    if sleeved is not None and raw.get("diameter") is None:
        problem = f'diameter is missing, on which the ice or wind of "{shown(sleeved)}" acts'
        checked.fault(("line",), problem, "the bare outside diameter", example_of(Line, "diameter"))
    if checked.stringing is None or expands(raw):
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
            names = " or ".join(_with_article(owner) for owner in owners)
            checked.fault((*path, key), f"{_with_article(hold)} has no {key}; {what} belongs to {names}")
    if hold == "hanger":
        _form_rule(checked, number)
    if hold == "sheave" and raw.get("weight") is not None and raw.get("length") is None:
        problem = "a sheave without a link hangs on nothing that could weigh on the line"
        checked.fault((*path, "weight"), problem, "a length beside it", 'length = "0.6 m"')
    at_an_end = number in (0, checked.count("support") - 1)  # no place for a hanger, with or without a length
    if hold == "hanger" and raw.get("length") is None and not at_an_end:
        checked.fault((*path, "length"), "missing", "the length of the hanger", 'length = "1.8 m"')


def _form_rule(checked: Checked, number: int) -> None:
    raw = checked.raw("support", number)
    path = ("support", number)
    form, spread = raw.get("form", "I"), raw.get("spread")
    if form == "V" and spread is None:
        problem = "a V hanger without its spread"
        checked.fault(path, problem, "the distance between the upper ends of its two strings", 'spread = "4.2 m"')
    if form == "I" and spread is not None:
        checked.fault((*path, "spread"), "only a V hanger has a spread", "no spread, or a V", 'form = "V"')


def _with_article(word: str) -> str:
    return f"{'an' if word[0] in 'aeiou' else 'a'} {word}"


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
