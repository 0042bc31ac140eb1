"""Rules between the keys of a project's conditions and their loads."""

from __future__ import annotations

from tautwise.check import LOADS_MOST, Checked, at_most_one, exactly_one, known_names
from tautwise.keylines import Path as KeyPath
from tautwise.patterns import SharesOf
from tautwise.strict import did_you_mean, shown
from tautwise.tables import Condition, Load, Wind

_STATION_KEYS = ("at", "from", "to")
_LENGTH_KEYS = ("at_length", "from_length", "to_length")
_SPAN_KEYS = ("spans", "beyond", "before")
_SIZES = ("force", "per_length", "per_run")


def condition_rules(checked: Checked) -> None:
    """One condition at least; wind by pressure or speed; ice and loads that lie on the line."""
    if checked.count("condition") == 0:
        checked.fault(("condition",), "no condition", "one [[condition]] table or more", 'name = "hot"')
    for number in range(checked.count("condition")):
        raw = checked.raw("condition", number)
        if isinstance(raw.get("wind"), dict):
            _wind_rules(checked, ("condition", number, "wind"))
        condition = checked.conditions[number] if number < len(checked.conditions) else None
        if condition is not None and condition.ice is not None and condition.ice.pattern is not None:
            _pattern_rules(checked, ("condition", number, "ice", "pattern"), condition.ice.pattern)
        loads = raw.get("load")
        if isinstance(loads, list | tuple):
            _load_rules(checked, number, len(loads))


def on_route(checked: Checked, path: KeyPath, station: float) -> None:
    """A fault for a station that is not between the first and the last support."""
    route = checked.station_range()
    if route is not None and route[0] < route[1] and not route[0] <= station <= route[1]:
        problem = f"{station:g} m is not on the line, which runs from {route[0]:g} m to {route[1]:g} m"
        checked.fault(path, problem, "a station between the first and the last support")


def span_names(checked: Checked, path: KeyPath) -> None:
    """Spans by the supports where they start: names that exist, the last one excluded."""
    known_names(checked, path, "support")
    supports = checked.names("support")
    for number, name in enumerate(checked.listed(*path)):
        if len(supports) > 1 and name == supports[-1] and name not in supports[:-1]:
            _no_span(checked, (*path, number), name)


def _no_span(checked: Checked, path: KeyPath, name: str) -> None:
    problem = f'no span starts at the last support, "{shown(name)}"'
    checked.fault(path, problem, "the name of the support where the span starts")


def _wind_rules(checked: Checked, wind: KeyPath) -> None:
    raw = checked.raw(*wind)
    given = exactly_one(checked, wind, Wind, ("pressure", "speed"))
    for key in ("air_density", "altitude"):
        if given == "pressure" and raw.get(key) is not None:
            checked.fault((*wind, key), f"a pressure needs no {key.replace('_', ' ')}", "speed instead of pressure")
    at_most_one(checked, wind, Wind, ("air_density", "altitude"))
    at_most_one(checked, wind, Wind, ("angle", "bearing"))
    if raw.get("bearing") is not None and not checked.turning():
        problem = "a bearing needs supports that are given by east and north"
        checked.fault((*wind, "bearing"), problem, "angle, from the span's direction", 'angle = "60 deg"')


def _pattern_rules(checked: Checked, path: KeyPath, pattern: tuple[float, ...] | SharesOf) -> None:
    spans = checked.count("support") - 1
    if not isinstance(pattern, SharesOf):
        if len(pattern) > spans > 0:
            problem = f"{len(pattern)} shares for {spans} span{'s' if spans != 1 else ''}"
            checked.fault(path, problem, "no more shares than spans; they repeat", "pattern = [1, 0]")
    elif pattern.spans is not None:
        for name in pattern.spans:
            _support_name(checked, path, name, last="spans")
    else:
        side = "beyond" if pattern.beyond is not None else "before"
        _support_name(checked, path, pattern.beyond or pattern.before or "", last=side)


def _support_name(checked: Checked, path: KeyPath, name: str, last: str) -> None:
    """A support that exists and has a span ahead of it, or behind it for `before`."""
    supports = [other for other in checked.names("support") if other]
    if name not in supports:
        checked.fault(path, f'there is no support "{shown(name)}"; {did_you_mean(name, supports)}')
    elif last == "before" and name == supports[0]:
        checked.fault(path, f'no span lies before the first support, "{shown(name)}"', "a later support")
    elif last != "before" and name == supports[-1]:
        _no_span(checked, path, name)


def _load_rules(checked: Checked, number: int, count: int) -> None:
    path = ("condition", number, "load")
    if count > LOADS_MOST:
        checked.fault(path, f"{count} loads; at most {LOADS_MOST} are read")
        return
    condition: Condition | None = checked.conditions[number] if number < len(checked.conditions) else None
    carriages = [index for index in range(count) if checked.raw(*path, index).get("carriage") is not None]
    for index in carriages[1:]:
        problem = "a second carriage in one condition"
        checked.fault(
            (*path, index, "carriage"),
            problem,
            "one at most; the other as a force at a place, or in a condition of its own",
        )
    for index in range(count):
        raw = checked.raw(*path, index)
        if not raw:
            continue
        _kind_rules(checked, (*path, index))
        if condition is not None:
            _load_values(checked, (*path, index), condition.loads[index])


def _kind_rules(checked: Checked, path: KeyPath) -> None:
    raw = checked.raw(*path)
    if raw.get("carriage") is not None and raw.get("force") is None:
        checked.fault(path, "a carriage without a force", "the force that it carries", 'force = "2 kN"')
        return
    kind = exactly_one(checked, path, Load, _SIZES)
    if raw.get("per_length_to") is not None and kind != "per_length":
        checked.fault((*path, "per_length_to"), "the end of a ramp that has no per_length to begin with", "per_length")
    if kind == "force" and raw.get("carriage") is not None:
        _carriage_rules(checked, path)
    elif kind == "force":
        _force_places(checked, path)
    elif kind is not None:
        _stretch_places(checked, path)
    if raw.get("span") is not None and raw.get("carriage") is None:
        checked.fault(
            (*path, "span"),
            "only a carriage stands in a span",
            "spans, for a load on some spans",
            'spans = ["West mast"]',
        )


def _force_places(checked: Checked, path: KeyPath) -> None:
    exactly_one(checked, path, Load, ("at", "at_length"))
    _no_stretch(checked, path)


def _no_stretch(checked: Checked, path: KeyPath) -> None:
    for key in ("from", "to", "from_length", "to_length", *_SPAN_KEYS):
        if checked.raw(*path).get(key) is not None:
            checked.fault((*path, key), "a force stands at one place", "at or at_length", 'at = "75 m"')


def _carriage_rules(checked: Checked, path: KeyPath) -> None:
    raw = checked.raw(*path)
    sides = [key for key in _SPAN_KEYS if raw.get(key) is not None]
    if sides:
        problem = "a carriage stands in one span"
        checked.fault((*path, sides[0]), problem, "span, by the support where it starts", 'span = "West mast"')
        return
    _no_stretch(checked, path)
    if raw.get("at_length") is not None:
        problem = "a carriage is no place of the natural line"
        checked.fault((*path, "at_length"), problem, "the station where it is, or is to start", 'at = "75 m"')
    if raw.get("carriage") == "held" and raw.get("at") is None:
        checked.fault(path, "at is missing", "the station where the carriage is held", 'at = "75 m"')
    if raw.get("carriage") == "held" and raw.get("span") is not None:
        checked.fault((*path, "span"), "a held carriage stands in the span of its station")
    if (
        raw.get("carriage") == "free"
        and raw.get("span") is None
        and raw.get("at") is None
        and checked.count("support") > 2
    ):
        problem = "a free carriage on a line of several spans, and neither span nor at"
        checked.fault(path, problem, "the span in which it rolls", 'span = "West mast"')
    if raw.get("span") is not None:
        _carriage_span(checked, path)


def _carriage_span(checked: Checked, path: KeyPath) -> None:
    name = checked.raw(*path).get("span")
    if isinstance(name, str):
        _support_name(checked, (*path, "span"), name, last="span")


def _stretch_places(checked: Checked, path: KeyPath) -> None:
    raw = checked.raw(*path)
    given = [key for key in (*_STATION_KEYS, *_LENGTH_KEYS) if raw.get(key) is not None]
    sides = [key for key in _SPAN_KEYS if raw.get(key) is not None]
    if given not in ([], ["from", "to"], ["from_length", "to_length"]):
        problem = f"{', '.join(given)} {'is' if len(given) == 1 else 'are'} no stretch of the line"
        expected = "from and to, or from_length and to_length, or none for the whole line"
        checked.fault((*path, given[0]), problem, expected, 'from = "10 m", to = "60 m"')
    elif given and sides:
        checked.fault((*path, sides[0]), f"{sides[0]} beside {given[0]}", "a stretch, or spans, not both")
    elif not given and not sides and raw.get("per_length_to") is not None:
        checked.fault(
            (*path, "per_length_to"),
            "a ramp that neither begins nor ends",
            "from and to, from_length and to_length, or spans",
            'from = "10 m", to = "60 m"',
        )
    at_most_one(checked, path, Load, _SPAN_KEYS)
    span_names(checked, (*path, "spans"))
    if raw.get("per_length_to") is not None:
        _adjoining(checked, (*path, "spans"))
    for key in ("beyond", "before"):
        if isinstance(raw.get(key), str):
            _support_name(checked, (*path, key), raw[key], last=key)


def _adjoining(checked: Checked, path: KeyPath) -> None:
    """A ramp runs over spans that follow one another."""
    supports = checked.names("support")
    numbers = sorted({supports.index(name) for name in checked.listed(*path) if name in supports[:-1]})
    if numbers and numbers[-1] - numbers[0] >= len(numbers):
        checked.fault(path, "a ramp over spans that do not adjoin", "spans that follow one another, or a ramp for each")


def _load_values(checked: Checked, path: KeyPath, load: Load) -> None:
    for key, station in (("at", load.at_m), ("from", load.from_m), ("to", load.to_m)):
        if station is not None:
            on_route(checked, (*path, key), station)
    for first, last, key in ((load.from_m, load.to_m, "to"), (load.from_length_m, load.to_length_m, "to_length")):
        if first is not None and last is not None and last <= first:
            problem = f"{last:g} m does not lie beyond the beginning of the stretch, {first:g} m"
            checked.fault((*path, key), problem, "a place beyond it")
    sizes = ((load.force_N, "force"), (load.per_length_N_per_m, "per_length"), (load.per_run_N_per_m, "per_run"))
    for value, key in sizes:
        if value is not None and value < 0.0 and load.direction not in ("across", "along"):
            checked.fault((*path, key), "a negative load", "its size, and where it points", 'direction = "up"')
    if load.per_run_N_per_m is not None and load.direction not in ("down", "up"):
        problem = "a load per horizontal metre that does not act down or up"
        checked.fault((*path, "direction"), problem, "down or up; per_length for other loads", 'direction = "down"')
    if load.carriage is not None:
        _carriage_values(checked, path, load)


def _carriage_values(checked: Checked, path: KeyPath, load: Load) -> None:
    if load.force_N == 0.0:
        checked.fault((*path, "force"), "a carriage without a force", "the force that it carries", 'force = "2 kN"')
    if load.at_m is None:
        return
    stations = [checked.station(number) for number in range(checked.count("support"))]
    if load.at_m in stations:
        checked.fault((*path, "at"), f"a carriage at a support, {load.at_m:g} m", "a station within a span")
    names = checked.names("support")
    if load.span in names[:-1]:
        number = names.index(load.span)
        near, far = stations[number], stations[number + 1]
        if near is not None and far is not None and not near < load.at_m < far:
            problem = f'{load.at_m:g} m is not in the span from "{shown(load.span or "")}", {near:g} m to {far:g} m'
            checked.fault((*path, "at"), problem, "a station within it, or span alone")
