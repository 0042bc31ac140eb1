"""Marks and loads that are to be on the line and are not: faults at their keys, with how far the line reaches."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING, Any

from tautwise.errors import Fault
from tautwise.tables import Load, Mark

if TYPE_CHECKING:
    from tautwise.model import Project

OFF_THE_LINE = "error_place"
LENGTHS = ("at_length", "from_length", "to_length")
STATIONS = ("at", "from", "to")
Place = tuple[str, float]

_ROUNDING = 1e-12  # of the length, as in the core


def beyond_faults(project: Project, total_m: float, what: str) -> list[Fault]:
    """A fault for each length along the line beyond `total_m`, which is `what`."""
    return [
        project.core_fault(path, f"{value:g} m lies beyond the end of the line", f"at most {what}, {total_m:.3f} m")
        for path, value in places_of(project, LENGTHS)
        if value > total_m * (1.0 + _ROUNDING)
    ]


def off_faults(project: Project, low_m: float, high_m: float) -> list[Fault]:
    """A fault for each station that does not lie between those of the line's ends as strung."""
    where = f"the line, which runs from {low_m:.6g} m to {high_m:.6g} m as strung"
    return [
        project.core_fault(path, f"{value:g} m is not on {where}", "a station between its ends")
        for path, value in places_of(project, STATIONS)
        if not low_m <= value <= high_m
    ]


def held_faults(project: Project) -> list[Fault]:
    """A fault for each held carriage: where the line is off no other place, a clamp has swung past one of these."""
    loads = [load for condition in project.conditions for load in condition.loads]
    return [
        project.core_fault(
            f"loads[{index}].at",
            f"the line of this span does not pass {load.at_m:g} m once it is loaded",
            "a station farther from the support, whose clamp moves along",
        )
        for index, load in enumerate(loads)
        if load.carriage == "held"
    ]


def places_of(project: Project, keys: tuple[str, ...]) -> Iterator[Place]:
    """Path in the core's problem and value, m, of each place of a mark or a load given by one of some keys."""
    for number, mark in enumerate(project.marks):
        yield from _of(mark, f"marks[{number}]", keys)
    index = 0
    for condition in project.conditions:
        for load in condition.loads:
            yield from _of(load, f"loads[{index}]", keys)
            index += 1


def _of(table: Mark | Load, path: str, keys: tuple[str, ...]) -> Iterator[Place]:
    for key in keys:
        value: Any = getattr(table, f"{key}_m", None)
        if value is not None:
            yield f"{path}.{key}", value
