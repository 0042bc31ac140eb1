"""A condition and its loads in short, as the head of a table says them."""

from __future__ import annotations

from typing import TYPE_CHECKING

from tautwise.columns import plural

if TYPE_CHECKING:
    from tautwise.tables import Condition, Load

LOADS_NAMED = 3


def condition_words(condition: Condition) -> str:
    """Temperature and loads of a condition."""
    words = [f"{condition.temperature_degC:.4g} degC"]
    if condition.state != "initial":
        words.append({"final": "final state"}.get(condition.state, condition.state))
    if condition.ice and condition.ice.thickness_m:
        words.append(f"{1e3 * condition.ice.thickness_m:.4g} mm of ice")
    if condition.wind and condition.wind.pressure_Pa:
        words.append(f"wind of {condition.wind.pressure_Pa:.4g} Pa")
    if condition.wind and condition.wind.speed_m_per_s:
        words.append(f"wind of {condition.wind.speed_m_per_s:.4g} m/s")
    if condition.resultant_addition_N_per_m:
        words.append(f"{condition.resultant_addition_N_per_m:.4g} N/m added to the resultant")
    words += [load_words(load) for load in condition.loads[:LOADS_NAMED]]
    more = len(condition.loads) - LOADS_NAMED
    if more > 0:
        words.append(f"and {plural(more, 'more load')}")
    return ", ".join(words)


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
        size = f"{load.per_length_N_per_m or 0.0:.4g} N/m"
    parts = [f"{load.name}:" if load.name else "", size, _direction_words(load), _place_words(load)]
    return " ".join(part for part in parts if part)


def _direction_words(load: Load) -> str:
    if isinstance(load.direction, str):
        return "" if load.direction == "down" else load.direction
    return f"along ({', '.join(f'{part:.3g}' for part in load.direction)})"


def _place_words(load: Load) -> str:
    if load.at_m is not None:
        return f"at {load.at_m:g} m"
    if load.at_length_m is not None:
        return f"at {load.at_length_m:g} m along the line"
    if load.from_m is not None and load.to_m is not None:
        return f"from {load.from_m:g} m to {load.to_m:g} m"
    if load.from_length_m is not None and load.to_length_m is not None:
        return f"from {load.from_length_m:g} m to {load.to_length_m:g} m along the line"
    return "on the whole line"
