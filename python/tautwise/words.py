"""A condition and its loads in short, as the head of a table says them."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from tautwise.columns import plural
from tautwise.patterns import SharesOf

if TYPE_CHECKING:
    from tautwise.tables import Condition, Load, Wind

LOADS_NAMED = 3


def condition_words(condition: Condition) -> str:
    """Temperature and loads of a condition."""
    words = [f"{condition.temperature_degC:.4g} degC"]
    if condition.state != "initial":
        words.append({"final": "final state"}.get(condition.state, condition.state))
    if condition.ice and condition.ice.thickness_m:
        words.append(f"{1e3 * condition.ice.thickness_m:.4g} mm of ice{_pattern_words(condition.ice.pattern)}")
    if condition.wind and condition.wind.pressure_Pa:
        words.append(f"wind of {condition.wind.pressure_Pa:.4g} Pa{_from_words(condition.wind)}")
    if condition.wind and condition.wind.speed_m_per_s:
        words.append(f"wind of {condition.wind.speed_m_per_s:.4g} m/s{_from_words(condition.wind)}")
    if condition.resultant_addition_N_per_m:
        words.append(f"{condition.resultant_addition_N_per_m:.4g} N/m added to the resultant")
    factors = [f"{key} times {value:.4g}" for key, value in condition.factors if value != 1.0]
    words += factors
    words += [load_words(load) for load in condition.loads[:LOADS_NAMED]]
    more = len(condition.loads) - LOADS_NAMED
    if more > 0:
        words.append(f"and {plural(more, 'more load')}")
    return ", ".join(words)


def _from_words(wind: Wind) -> str:
    """Where it blows from, and what else differs from plain: drag, and the air that a speed is taken in."""
    where = "" if wind.bearing_rad is None else f" from a bearing of {math.degrees(wind.bearing_rad):.4g} deg"
    own = [f"drag {wind.drag:.4g}"] if wind.drag != 1.0 else []
    if wind.altitude_m is not None:
        own.append(f"air at {wind.altitude_m:.4g} m")
    return f"{where} ({', '.join(own)})" if own else where


def _pattern_words(pattern: tuple[float, ...] | SharesOf | None) -> str:
    if pattern is None:
        return ""
    if not isinstance(pattern, SharesOf):
        return f" (shares {', '.join(f'{share:g}' for share in pattern)} along the spans)"
    where = f"on {_names(pattern.spans)}" if pattern.spans else ""
    return f" (share {pattern.share:g} {where or _side(pattern.beyond, pattern.before)})"


def _names(spans: tuple[str, ...]) -> str:
    first = ", ".join(spans[:LOADS_NAMED])
    return (
        f"the span from {first}"
        if len(spans) == 1
        else f"the spans from {first}{' ...' if spans[LOADS_NAMED:] else ''}"
    )


def _side(beyond: str | None, before: str | None) -> str:
    return f"beyond {beyond}" if beyond else f"before {before}"


def load_words(load: Load) -> str:
    """A load's name, size, direction and place.

    >>> from tautwise.tables import Load
    >>> load_words(Load(**{"name": "arrest", "force": "6 kN", "at": "13.8 m"}))
    'arrest: 6 kN at 13.8 m'
    >>> load_words(Load(**{"per_length": "5 N/m", "direction": "up"}))
    '5 N/m up on the whole line'
    """
    if load.force_N is not None:
        size = f"{load.force_N:.4g} N" if abs(load.force_N) < 1e3 else f"{load.force_N / 1e3:.4g} kN"
    else:
        size = f"{load.size:.4g} N/m"
        if load.per_length_to_N_per_m is not None:
            size = f"{load.size:.4g} to {load.per_length_to_N_per_m:.4g} N/m"
        if load.per_run_N_per_m is not None:
            size += " of run"
    parts = [f"{load.name}:" if load.name else "", size, _direction_words(load), _place_words(load)]
    return " ".join(part for part in parts if part)


def _direction_words(load: Load) -> str:
    if isinstance(load.direction, str):
        return "" if load.direction == "down" else load.direction
    return f"along ({', '.join(f'{part:.3g}' for part in load.direction)})"


def _place_words(load: Load) -> str:
    if load.carriage == "free":
        return f"on a free carriage{f' in the span from {load.span}' if load.span else ''}"
    if load.carriage == "held":
        return f"on a carriage held at {load.at_m:g} m"
    if load.spans is not None:
        return f"on {_names(load.spans)}"
    if load.beyond is not None or load.before is not None:
        return _side(load.beyond, load.before)
    if load.at_m is not None:
        return f"at {load.at_m:g} m"
    if load.at_length_m is not None:
        return f"at {load.at_length_m:g} m along the line"
    if load.from_m is not None and load.to_m is not None:
        return f"from {load.from_m:g} m to {load.to_m:g} m"
    if load.from_length_m is not None and load.to_length_m is not None:
        return f"from {load.from_length_m:g} m to {load.to_length_m:g} m along the line"
    return "on the whole line"
