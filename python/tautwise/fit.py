"""From a project and a survey through the C core to the line that fits: pull or natural lengths, and how sure they are.

Least squares on the exact line; the covariances are those of the linearised problem, s^2 (J^T J)^-1. Where no standard
deviations are given, s^2 is estimated from what the fit leaves over, chi2 / (measurements - unknowns), and intervals go
by Student's t; where they are given, by the normal law.
"""

from __future__ import annotations

import math
import os
from bisect import bisect_right
from collections.abc import Mapping, Sequence
from itertools import pairwise
from typing import TYPE_CHECKING, Any

from tautwise.errors import Fault, InputError, NotSettledError, SearchCancelled
from tautwise.fit_judge import as_built_findings, deviations, findings_of, misfit
from tautwise.results_fit import FittedPoint, FittedPull, FittedSpan, SurveyFit
from tautwise.results_line import CAUTION
from tautwise.solve import errors_of, line_core_of, program, settled_bare
from tautwise.strict import described, shown
from tautwise.student import CONFIDENCE, quantile
from tautwise.survey import Survey, survey_from

if TYPE_CHECKING:
    from tautwise.model import Project

UNKNOWNS = ("pull", "lengths")
SPANS_MOST = 300
"""Natural lengths that are freed at once: their covariances fill a square."""
INNER = 1e-3
"""As in the core: points this close to a support, as a share of the span, tell of no span."""


def fit(
    project: Project,
    survey: Survey | str | os.PathLike[str],
    *,
    unknown: str = "pull",
    temperature: float | str | None = None,
    **options: Any,
) -> SurveyFit:
    """The line that hangs closest to points measured on it, bare and in still air.

    Parameters
    ----------
    survey: the points, or the name of their CSV file.
    unknown: "pull": one pull of the whole line, hangers plumb at stringing; "lengths": one natural length for each span
        that carries points (the others take that of the one pull that fits best).
    temperature: of the line during the survey, degC or text with a unit, where the file has no such column.
    options: of the core: ``evaluations_most`` (steps), ``seconds_most``.

    Raises
    ------
    InputError: the survey cannot be used, or its points do not show what is unknown.
    NotSettledError: no least squares found within the limits of the search.
    SearchCancelled: Ctrl-C.
    """
    if unknown not in UNKNOWNS:
        raise InputError([Fault(None, None, "unknown", f"{described(unknown)} is not known", "pull or lengths")])
    sheave = next((one.name for one in project.supports if one.hold == "sheave"), None)
    if unknown == "lengths" and sheave is not None:
        problem = f'natural length runs over the sheave "{shown(sheave)}"; the spans beside it have none of their own'
        raise InputError([Fault(project.source, None, "unknown", problem, "pull")])
    points = survey_from(survey, temperature)
    _refuse_stations(project, points)
    if unknown == "lengths" and (spans := sum(count > 0 for count in _counts(project, points))) > SPANS_MOST:
        raise InputError([points.whole_fault(f"points in {spans} spans", f"{SPANS_MOST} at most, a section at a time")])
    found = _found(project, points, unknown, options)
    if found["status"] != "ok":
        raise _failure(project, points, found)
    return _result(project, points, unknown, found)


def _found(project: Project, points: Survey, unknown: str, options: Mapping[str, Any]) -> dict[str, Any]:
    core = line_core_of(project)
    try:
        with errors_of(project):
            found: dict[str, Any] = core.fit(points.columns(), unknown=unknown, **options)
    except KeyboardInterrupt:
        raise SearchCancelled("the fit was cancelled") from None
    except InputError as error:
        raise InputError(_at_points(points, fault) for fault in error.faults) from None
    return found


def _at_points(points: Survey, fault: Fault) -> Fault:
    """A fault of the core's observations, at the point that is meant."""
    head, _, column = fault.path.partition("].")
    number = head.removeprefix("observations[")
    if not number.isdigit():
        return fault
    return points.fault(int(number), column, fault.problem, fault.expected)


def _refuse_stations(project: Project, points: Survey) -> None:
    first, last = project.supports[0], project.supports[-1]
    expected = f"a station from {first.name} at {first.station_m:g} m to {last.name} at {last.station_m:g} m"
    faults = [
        points.fault(index, "station", f"{station:g} m is beyond the supports", expected)
        for index, station in enumerate(points.stations_m)
        if not first.station_m <= station <= last.station_m
    ]
    more = len(faults) - 20
    if faults:
        raise InputError([*faults[:20], *([points.whole_fault(f"and {more} more such points")] if more > 0 else [])])


def _failure(project: Project, points: Survey, found: Mapping[str, Any]) -> Exception:
    status = found["status"]
    if status == "undetermined":
        return InputError([_undetermined(project, points, found)])
    head = f"{points.source}: " if points.source else ""
    advice = {"deadline": "seconds_most", "evaluation_limit": "evaluations_most"}.get(status)
    words = f"; allow more with project.fit(..., {advice}=...) in Python" if advice else ""
    if status == "not_settled":
        words = "; look for a station or an elevation that is far off, or in the wrong unit"
    return NotSettledError(f"{head}no line was found that fits the points: {found['status_text']}{words}", status)


def _undetermined(project: Project, points: Survey, found: Mapping[str, Any]) -> Fault:
    inner = sum(_counts(project, points))
    expected = "points along the spans, best about their middles"
    if inner == 0:
        return points.whole_fault("no point lies between the supports, away from them", expected)
    span = found["undetermined"]
    names = [support.name for support in project.supports]
    where = "" if span is None else f" of {names[span]} to {names[span + 1]}"
    problem = f"the points do not show how tight the line is{where}: it hangs too straight, or they lie on its ends"
    return points.whole_fault(problem, expected)


def _counts(project: Project, points: Survey) -> list[int]:
    """Points in the inner part of each span."""
    ends = [support.station_m for support in project.supports]
    counts = [0] * (len(ends) - 1)
    for station in points.stations_m:
        span = min(max(bisect_right(ends, station) - 1, 0), len(counts) - 1)
        edge = INNER * (ends[span + 1] - ends[span])
        counts[span] += ends[span] + edge < station < ends[span + 1] - edge
    return counts


def _result(project: Project, points: Survey, unknown: str, found: Mapping[str, Any]) -> SurveyFit:
    count, unknowns = found["rows"], len(found["unknowns"])
    left = count - unknowns
    variance = 1.0 if points.has_sigmas else found["chi2"] / left if left > 0 else None
    factor = quantile(math.inf if points.has_sigmas else left) if variance is not None else None
    temperatures = tuple(sorted(set(points.temperatures_degC)))
    states, gap = settled_bare(project, found["lengths_m"], (temperatures[0], temperatures[-1]))
    listed = _points(points, found, left)
    residuals = [r for r in (*found["residuals_m"], *found["offset_residuals_m"]) if r is not None]
    deviation = None if points.has_sigmas or variance is None else math.sqrt(variance)
    spans = _spans(project, points, found, states, variance, factor)
    pull = _pull(found, variance, factor) if unknown == "pull" else None
    rms = math.sqrt(math.fsum(r * r for r in residuals) / len(residuals))
    warnings = misfit(points, pull, spans, rms, found["chi2"], left)
    warnings += findings_of(points, pull, spans, listed, found["chi2"], left)
    warnings += as_built_findings(project)
    return SurveyFit(
        program=program(), project=project.title, input_sha256=project.input_sha256, survey=points.source,
        survey_sha256=points.sha256, unknown=unknown, temperature_degC=project.stringing.temperature_degC,
        pull=pull, spans=spans, points=listed,
        temperatures_degC=temperatures, measurements=count, unknowns=unknowns, sigmas_given=points.has_sigmas,
        rms_m=rms, chi2=found["chi2"],
        standard_deviation_m=deviation, confidence=CONFIDENCE, factor=factor, gap_relative=gap,
        step_relative=found["step_relative"], steps=found["steps"], evaluations=found["evaluations"],
        warnings=warnings, caution=CAUTION, origin=project,
    )  # fmt: skip


def _interval(
    value: float, error: float | None, factor: float | None
) -> tuple[float | None, float | None, float | None]:
    """Standard error and both ends of the interval."""
    if error is None or factor is None:
        return None, None, None
    return error, value - factor * error, value + factor * error


def _error(found: Mapping[str, Any], unknown: int, variance: float | None) -> float | None:
    return None if variance is None else math.sqrt(variance * found["unknowns"][unknown]["covariance"][unknown])


def _pull(found: Mapping[str, Any], variance: float | None, factor: float | None) -> FittedPull:
    value = float(found["unknowns"][0]["value"])
    return FittedPull(value, *_interval(value, _error(found, 0, variance), factor))


def _spans(
    project: Project, points: Survey, found: Mapping[str, Any], states: Sequence[Mapping[str, Any]],
    variance: float | None, factor: float | None,
) -> tuple[FittedSpan, ...]:  # fmt: skip
    own = {each["span"]: number for number, each in enumerate(found["unknowns"])}
    spans = []
    for k, (count, (before, after)) in enumerate(
        zip(_counts(project, points), pairwise(project.supports), strict=True)
    ):
        length, state = float(found["lengths_m"][k]), states[k]
        error = _error(found, own[k], variance) if k in own else None
        pull_error = _error(found, own[None], variance) if None in own else None
        if pull_error is not None:
            error = abs(found["length_rates"][k]) * pull_error
        sure, low, high = _interval(length, error, factor)
        pull, sag, measured = float(state["horizontal_tension_N"]), float(state["sag_m"]), k in own or None in own
        spans.append(FittedSpan(before.name, after.name, count, measured, length, sure, low, high, pull, sag))
    return tuple(spans)


def _points(points: Survey, found: Mapping[str, Any], left: int) -> tuple[FittedPoint, ...]:
    judged = deviations(points, found, left)
    return tuple(
        FittedPoint(
            points.names[i], points.lines[i] if points.lines else None, points.stations_m[i], points.elevations_m[i],
            points.offsets_m[i], points.temperatures_degC[i], points.dates[i],
            points.elevations_m[i] - found["residuals_m"][i], found["residuals_m"][i],
            found["offset_residuals_m"][i], *judged[i],
        )
        for i in range(points.count)
    )  # fmt: skip
