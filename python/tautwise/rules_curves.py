"""Rules between the keys of a curved line and of a history."""

from __future__ import annotations

from typing import Any

from tautwise.check import Checked, at_most_one, known_names
from tautwise.strict import did_you_mean, shown
from tautwise.tables import Line

CURVES = ("curve", "core", "outer")


def is_curved(raw: dict[str, Any]) -> bool:
    """Whether a line, as it was written, has a curved law."""
    return any(raw.get(key) is not None for key in CURVES)


def expands(raw: dict[str, Any]) -> bool:
    """Whether a line, as it was written, gives the expansion of all of it."""
    if raw.get("expansion") is not None:
        return True
    parts = [raw[key] for key in CURVES if raw.get(key) is not None]
    return bool(parts) and all(isinstance(part, dict) and part.get("expansion") is not None for part in parts)


def curve_rules(checked: Checked) -> None:
    """One curve, or a core and an outer part; on a stated area; creep told once, and only where a state asks for it."""
    raw = checked.raw("line")
    if not raw:
        return
    at_most_one(checked, ("line",), Line, ("creep_strain", "creep_law"))
    if is_curved(raw):
        _parts(checked, raw)
        _areas(checked, raw)
        _creeps_once(checked, raw)
    _states(checked, raw)


def history_rules(checked: Checked) -> None:
    """Conditions that exist."""
    if checked.document.tables.get("history") is None:
        return
    known_names(checked, ("history", "conditions"), "condition")
    everyday = checked.raw("history").get("creep_condition")
    names = [name for name in checked.names("condition") if name]
    if isinstance(everyday, str) and everyday not in names:
        problem = f'there is no condition "{shown(everyday)}"; {did_you_mean(everyday, names)}'
        checked.fault(("history", "creep_condition"), problem)


def _parts(checked: Checked, raw: dict[str, Any]) -> None:
    given = [key for key in CURVES if raw.get(key) is not None]
    for key in ("stiffness", "modulus"):
        if raw.get(key) is not None:
            problem = f"{key} and a stress-strain curve are given at once"
            checked.fault(("line", key), problem, f"either {key} or [line.{given[0]}]")
    if "curve" in given and len(given) > 1:
        problem = f"curve and {given[1]} are given at once"
        checked.fault(("line", given[1]), problem, "[line.curve] alone, or [line.core] and [line.outer]")
    elif len(given) == 1 and given != ["curve"]:
        other = "outer" if given == ["core"] else "core"
        problem = f"[line.{given[0]}] is given without [line.{other}]"
        checked.fault(("line", given[0]), problem, "both parts, or [line.curve] for a line of one")


def _areas(checked: Checked, raw: dict[str, Any]) -> None:
    if raw.get("area") is not None:
        return
    for key in CURVES:
        part = raw.get(key)
        if isinstance(part, dict) and part.get("area") is None:
            problem = "stresses are given without the area they are on"
            expected = "area in [line] (for stresses on the whole section) or here"
            checked.fault(("line", key), problem, expected, 'area = "468.6 mm^2"')


def _creeps_once(checked: Checked, raw: dict[str, Any]) -> None:
    told = next((key for key in ("creep_strain", "creep_law") if raw.get(key) is not None), None)
    for key in CURVES:
        part = raw.get(key)
        if told and isinstance(part, dict) and part.get("creep") is not None:
            problem = f"{told} and a creep curve are given at once"
            checked.fault(("line", key, "creep"), problem, "creep told once")


def _states(checked: Checked, raw: dict[str, Any]) -> None:
    """A state that the line cannot tell from another is hardly meant."""
    parts = [raw[key] for key in CURVES if isinstance(raw.get(key), dict)]
    creeps = any(raw.get(key) is not None for key in ("creep_strain", "creep_law"))
    creeps = creeps or any(part.get("creep") is not None for part in parts)
    stretches = bool(parts) or raw.get("bedding_in") is not None
    for number, condition in enumerate(checked.conditions):
        state = condition.state if condition is not None else "initial"
        if state == "after creep" and not creeps:
            problem = "the line has no creep: it would be as in the state final"
            expected = "creep_strain or creep_law in [line], or creep in its parts"
            checked.fault(("condition", number, "state"), problem, expected, 'creep_strain = "0.03 %"')
        elif state == "final" and not stretches:
            problem = "a linear line without bedding_in has no final state"
            checked.fault(("condition", number, "state"), problem, "bedding_in in [line], or a curved law")
