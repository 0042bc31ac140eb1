"""One settled condition, as the core gives it, into the records of :mod:`tautwise.results_line`."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from tautwise.columns import force_text
from tautwise.history import history_of
from tautwise.places import Origin
from tautwise.records import finite
from tautwise.results_line import SETTLED, Equilibrium, LowPoint, MarkState, SpanState, SupportState

if TYPE_CHECKING:
    from tautwise.model import Project
    from tautwise.tables import Load

_ENERGIES = ("energy_J", "energy_lower_J", "gap_J", "gap_relative", "residual_N", "closing_m", "sheave_imbalance_N",
             "load_mismatch")  # fmt: skip
_COUNTS = ("elements", "evaluations", "newton_steps", "exact_steps")
_PLAIN_SPAN = (
    "span_m",
    "rise_m",
    "natural_length_m",
    "line_length_m",
    "horizontal_tension_N",
    "tension_from_N",
    "tension_to_N",
    "tension_max_N",
    "sag_m",
    "slant_sag_m",
    "blowout_m",
)
_LEAST_SAG_SHARE = 1e-9  # of the span: below it "how far off" would be noise over noise


def equilibrium_of(project: Project, index: int, found: Mapping[str, Any], origin: Origin) -> Equilibrium:
    """The record of one condition; one that did not settle has no spans, supports or marks."""
    condition = project.conditions[index]
    energies: dict[str, Any] = {name: finite(found[name]) for name in _ENERGIES}
    counts: dict[str, Any] = {name: int(found[name]) for name in _COUNTS}
    text = "settled within tolerance" if found["status"] == "ok" else found["status_text"]
    head = (condition.name, found["status"], text, condition.temperature_degC)
    if found["status"] != "ok":
        return Equilibrium.failed(head[0], head[3], head[1], head[2], state=condition.state, **energies, **counts)
    names = [support.name for support in project.supports]
    spans = tuple(_span(names[number], names[number + 1], state) for number, state in enumerate(found["spans"]))
    supports = tuple(_support(name, state) for name, state in zip(names, found["supports"], strict=True))
    return Equilibrium(
        head[0], SETTLED, head[2], head[3], **energies, **counts,
        state=condition.state, history=history_of(project, condition, found["spans"]),
        spans=spans, supports=supports, marks=_marks(project, index, found), origin=origin,
    )  # fmt: skip


def conditions_of(project: Project) -> list[str]:
    """The names of the conditions."""
    return [condition.name for condition in project.conditions]


def load_label(load: Load, number: int) -> str:
    """What a point load is called among the marks: its name, or its size and place."""
    if load.name:
        return load.name
    if load.carriage is not None:
        return f"carriage, {force_text(load.force_N or 0.0)}"
    place = load.at_m if load.at_m is not None else load.at_length_m
    size = force_text(load.force_N or 0.0)
    return f"load {number + 1}, {size}" if place is None else f"load {number + 1}, {size} at {place:g} m"


def _span(start: str, end: str, state: Mapping[str, Any]) -> SpanState:
    low = (finite(state["low_station_m"]), finite(state["low_elevation_m"]))
    small = finite(state["small_deflection_sag_m"])
    return SpanState(
        start,
        end,
        **{name: float(state[name]) for name in _PLAIN_SPAN},
        sag_station_m=finite(state["sag_station_m"]),
        low_point=None if low[0] is None or low[1] is None else LowPoint(low[0], low[1]),
        slope_max=finite(state["slope_max"]),
        small_deflection_sag_m=small,
        permanent_strain=float(state["permanent_strain"]),
        part_strains=tuple(float(part["strain"]) for part in state["lived"]),
        small_deflection_off_percent=_off_percent(small, float(state["sag_m"]), float(state["span_m"])),
    )


def _off_percent(small: float | None, exact: float, span: float) -> float | None:
    if small is None or abs(exact) <= _LEAST_SAG_SHARE * span:
        return None
    return finite(100.0 * (small - exact) / exact)


def _support(name: str, state: Mapping[str, Any]) -> SupportState:
    swing, along, across = (finite(state[f"swing_{part}rad"]) for part in ("", "along_", "across_"))
    return SupportState(
        name,
        float(state["along_N"]),
        float(state["across_N"]),
        float(state["down_N"]),
        float(state["resultant_N"]),
        None if swing is None else math.degrees(swing),
        None if along is None else math.degrees(along),
        None if across is None else math.degrees(across),
        float(state["station_m"]),
        _point(state["position_m"]),
    )


def _marks(project: Project, index: int, found: Mapping[str, Any]) -> tuple[MarkState, ...]:
    marks = [_mark(mark.name, state) for mark, state in zip(project.marks, found["marks"], strict=True)]
    loads = enumerate(project.conditions[index].loads)
    states = found["loads"]
    marks += [_mark(load_label(load, n), states[n]) for n, load in loads if load.force_N is not None]
    return tuple(marks)


def _mark(name: str, state: Mapping[str, Any]) -> MarkState:
    return MarkState(
        name,
        float(state["at_length_m"]),
        float(state["tension_N"]),
        float(state["station_m"]),
        _point(state["position_m"]),
        float(state["tension_beyond_N"]),
    )


def _point(values: Any) -> tuple[float, float, float]:
    x, y, z = (float(value) for value in values)
    return x, y, z
