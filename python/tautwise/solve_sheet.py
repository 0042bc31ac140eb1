"""The crew sheet of a project: from the core's numbers to the records of :mod:`tautwise.results_sheet`."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from itertools import pairwise
from typing import TYPE_CHECKING, Any

import numpy as np

from tautwise.columns import force_text
from tautwise.errors import Fault, InputError
from tautwise.outcomes import AS_STRUNG
from tautwise.records import finite
from tautwise.results_line import CAUTION
from tautwise.results_sheet import (
    RETURNS,
    CrewSection,
    CrewSheet,
    CrewSpan,
    CrewSupport,
    CrewTemperature,
    SpanReading,
)
from tautwise.solve import Pull, errors_of, line_core_of, line_findings, program, pull_of
from tautwise.strict import Refused
from tautwise.units import quantity

if TYPE_CHECKING:
    from tautwise.model import Project

STEP_K, STEPS = 5.0, (-5, 5)
RANGE_DEGC = (-273.15, 500.0)
MOST_TEMPERATURES = 200

Temperatures = Iterable[float | str] | None


def sheet(project: Project, temperatures_degC: Temperatures = None, *, pull: Pull = None, **options: Any) -> CrewSheet:
    """What a crew needs to string a project's line.

    Parameters
    ----------
    temperatures_degC: of the line, in degC or as text with a unit; by default from 25 K below to 25 K above the
        stringing temperature, rounded to 5 degC.
    pull: horizontal tension at stringing in N, or as text with a unit, instead of the project's stringing rule.

    Raises
    ------
    InputError: no stringing, or a temperature that is none.
    NotSettledError: the line cannot be strung so.
    """
    degC = _temperatures(project, temperatures_degC)
    newtons = pull_of(project, pull)
    core = line_core_of(project)
    with errors_of(project, newtons, AS_STRUNG):
        found = core.sheet(np.array(degC, dtype=np.float64), pull=newtons, **options)
    return _sheet_of(project, found, line_findings(project, core, newtons))


def _temperatures(project: Project, given: Temperatures) -> list[float]:
    if given is None:
        middle = STEP_K * round(project.stringing.temperature_degC / STEP_K)
        return [middle + STEP_K * step for step in range(STEPS[0], STEPS[1] + 1)]
    degC = sorted({_degC(one) for one in given})
    if len(degC) > MOST_TEMPERATURES:
        raise _bad(f"{len(degC)} temperatures", f"{MOST_TEMPERATURES} at most")
    return degC


def _degC(given: float | str) -> float:
    try:
        value = quantity(given, "degC") if isinstance(given, str) else float(given)
    except (Refused, TypeError, ValueError) as error:
        expected = error.expected if isinstance(error, Refused) else "a temperature"
        raise _bad(getattr(error, "problem", f"{given!r} is no temperature"), expected) from None
    if not RANGE_DEGC[0] <= value <= RANGE_DEGC[1]:
        raise _bad(f"{value:g} degC", f"from {RANGE_DEGC[0]:g} to {RANGE_DEGC[1]:g} degC")
    return value


def _bad(problem: str, expected: str) -> InputError:
    return InputError([Fault(None, None, "temperature", problem, expected, '"25 degC"')])


def _sheet_of(project: Project, found: Mapping[str, Any], findings: tuple[str, ...]) -> CrewSheet:
    stringing = project.stringing
    spans = _spans(project, found)
    states = [_temperature(row, over=found["over_sheaves"]) for row in found["temperatures"]]
    supports = tuple(_support(*both) for both in zip(project.supports, found["supports"], strict=True))
    return CrewSheet(
        program=program(),
        project=project.title,
        input_sha256=project.input_sha256,
        caution=CAUTION,
        method=stringing.method,
        clip=stringing.clip,
        stringing_degC=stringing.temperature_degC,
        horizontal_tension_N=finite(found["horizontal_tension_N"]),
        tolerance_percent=100.0 * stringing.tolerance,
        end_allowance_m=stringing.end_allowance_m,
        sections=_sections(project, spans),
        spans=spans,
        supports=supports,
        at_stringing=states[-1],
        temperatures=tuple(states[:-1]),
        warnings=(*project.warnings, *_lifted(project, supports), *_unsettled(project, states), *findings),
    )


def _spans(project: Project, found: Mapping[str, Any]) -> tuple[CrewSpan, ...]:
    names = [support.name for support in project.supports]
    first, last = _readings(found["first"]), _readings(found["last"])
    return tuple(
        CrewSpan(
            names[number],
            names[number + 1],
            float(length["natural_m"]),
            float(length["marked_m"]),
            first[number] if first else None,
            last[number] if last else None,
        )
        for number, length in enumerate(found["lengths"])
    )


def _sections(project: Project, spans: Sequence[CrewSpan]) -> tuple[CrewSection, ...]:
    inner = [n for n, support in enumerate(project.supports[1:-1], start=1) if support.hold == "anchor"]
    more = 2.0 * project.stringing.end_allowance_m
    found = []
    for first, last in pairwise([0, *inner, len(spans)]):
        natural = math.fsum(span.natural_length_m for span in spans[first:last])
        marked = math.fsum(span.marked_length_m for span in spans[first:last])
        ends = (project.supports[first].name, project.supports[last].name)
        found.append(CrewSection(*ends, natural, marked, natural + more, marked + more))
    return tuple(found)


def _support(support: Any, row: Mapping[str, Any]) -> CrewSupport:
    swing = finite(row["block_swing_rad"])
    clamped = support.hold in ("hanger", "post")
    return CrewSupport(
        support.name,
        support.hold,
        finite(row["offset_m"]) if clamped else None,
        finite(row["offset_stretched_m"]) if clamped else None,
        None if swing is None else math.degrees(swing),
        finite(row["block_down_N"]),
        finite(row["block_across_N"]),
        finite(row["block_resultant_N"]),
    )


def _temperature(row: Mapping[str, Any], *, over: bool) -> CrewTemperature:
    return CrewTemperature(
        float(row["temperature_degC"]), _readings(row["over"]) if over else (), _readings(row["clamped"])
    )


def _readings(rows: Sequence[Mapping[str, Any]]) -> tuple[SpanReading, ...]:
    """The spans of one state; none where it has no equilibrium."""
    if any(finite(row["sag_m"]) is None for row in rows):
        return ()
    return tuple(
        SpanReading(
            float(row["horizontal_tension_N"]),
            float(row["tension_max_N"]),
            float(row["sag_m"]),
            _times(row["return_s"]),
            _times(row["return_parabola_s"]),
        )
        for row in rows
    )


def _times(once_s: float) -> tuple[float, float, float]:
    first, second, third = (count * float(once_s) for count in RETURNS)
    return first, second, third


def _lifted(project: Project, supports: Iterable[CrewSupport]) -> list[str]:
    head = f"{project.source}: " if project.source else ""
    return [
        f"{head}the line lifts out of the sheave at {each.name!r} while it is strung: it pulls up with "
        f"{force_text(-(each.block_down_N or 0.0))}"
        for each in list(supports)[1:-1]
        if each.hold != "anchor" and each.lifts
    ]


def _unsettled(project: Project, states: Iterable[CrewTemperature]) -> list[str]:
    head = f"{project.source}: " if project.source else ""
    bare = [f"{state.temperature_degC:g} degC" for state in states if not state.clamped]
    return [f"{head}no equilibrium at {', '.join(bare)}"] if bare else []
