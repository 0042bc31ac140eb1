"""From the core's name of a number back to the key that a user wrote."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

from tautwise.keylines import Path as KeyPath

if TYPE_CHECKING:
    from tautwise.model import Project

_TABLES = {"supports": "support", "crossings": "crossing", "conditions": "condition", "marks": "mark"}
_TABLES |= {"limits": "limit", "loads": "load"}
_UNIT = re.compile(r"_(?:kg_per_m3|N_per_m|m_per_s|per_K|degC|rad|Pa|N|m2|m)$")
_PREFIXES = {"hanger_": (), "ice_": ("ice",), "wind_": ("wind",), "capacity_": ("capacity",), "air_": ("wind",)}
_PREFIXES |= {"sheave_": ()}
_PREFIXES |= {"factor_": ("factors",)}
_PLAN: dict[str | int, str] = {"station": "east", "offset": "north"}
_STRINGING_RULES = {
    "horizontal_tension_N": ("horizontal_tension",),
    "tension": ("tension", "value"),
    "sag": ("sag", "value"),
    "natural_length_m": ("natural_length",),
}


def file_path(project: Project, core_path: str) -> KeyPath:
    """The key path in the file of a path in the core's problem, such as ``supports[2].hanger_length_m``."""
    parts: list[str | int] = []
    if core_path.startswith("parts["):
        return _curve(project, core_path)
    for name, index in re.findall(r"([A-Za-z_0-9]+)(?:\[([0-9]+)\])?", core_path):
        if name == "loads" and not parts and index:
            parts += _load(project, int(index))
            continue
        parts += [*_key(name, inside=bool(parts)), *([int(index)] if index else [])]
    if parts[:1] == ["stringing"] and parts[1:2] in (["value"], ["index"], ["lengths"]):
        return ("stringing", *_stringing_rule(project))
    if parts[:1] == ["support"] and project.turns:
        parts = [_PLAN.get(part, part) for part in parts]
    return tuple(parts)


def _key(name: str, inside: bool) -> tuple[str, ...]:
    if not inside or name in _TABLES:
        return (_TABLES.get(name, name),)
    key = _UNIT.sub("", name)
    for prefix, tables in _PREFIXES.items():
        if key.startswith(prefix):
            return (*tables, key if prefix == "air_" else key.removeprefix(prefix))
    return (key,)


_CURVE_KEYS = {"loading_N": "initial", "creep_N": "creep", "final_stiffness_N": "final_modulus"}


def _curve(project: Project, core_path: str) -> KeyPath:
    """The core numbers the parts of a curved line."""
    given = [key for key in ("curve", "core", "outer") if getattr(project.line, key) is not None]
    found = re.fullmatch(r"parts\[([0-9]+)\]\.(\w+)", core_path)
    if found is None:
        return ("line",)
    key = _CURVE_KEYS.get(found[2], _UNIT.sub("", found[2]))
    return ("line", given[int(found[1])], key)


def _load(project: Project, index: int) -> KeyPath:
    """The core numbers the loads of all conditions in one row."""
    for number, condition in enumerate(project.conditions):
        if index < len(condition.loads):
            return ("condition", number, "load", index)
        index -= len(condition.loads)
    return ("condition",)


def _stringing_rule(project: Project) -> KeyPath:
    given = (keys for name, keys in _STRINGING_RULES.items() if getattr(project.stringing, name) is not None)
    return next(given, ())
