"""What to say when the core ends without an equilibrium: which key is at fault, in which condition, and what to do.

Inputs at fault become :class:`InputError` at their key; everything else becomes a status that says what would help.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import replace
from itertools import pairwise
from typing import TYPE_CHECKING, Any

from tautwise.errors import Fault, InputError
from tautwise.strict import shown

if TYPE_CHECKING:
    from tautwise.model import Project

AS_STRUNG = "the line as strung, bare"
SLACK_SAG_SHARE = 0.5  # of the span: a parabola that deep is no tensioned line
_PATIENCE = {"deadline": "seconds_most", "evaluation_limit": "evaluations_most"}
TURN_EXPECTED = "a turn of less than 179 degrees"
CURVE_EXPECTED = "a curve that grows from 0 to valid_to"
_NEARLY_SLACK = ("not_settled", "not_finite", "gap_too_wide", "slack", "deadline", "evaluation_limit")


def explained(
    project: Project, status: str, text: str, pull: float | None, defaults: Mapping[str, Any], call: str = "settle"
) -> str:
    """A status in words, with what would help.

    Parameters
    ----------
    status, text: of the core. pull: N, None for the project's own. defaults: of the options. call: the method in use.
    """
    if status == "not_finite":
        text = "no equilibrium was found"
    advice = slack_words(project, pull) if status in _NEARLY_SLACK else ""
    if not advice and status in _PATIENCE:
        option = _PATIENCE[status]
        ten_times = f"{10 * defaults[option]:g}"
        advice = f"allow more with project.{call}({option}={ten_times}) in Python, or ask less of one file"
    if not advice and status == "not_settled" and _swinging_sheave(project):
        advice = "a swinging sheave that carries next to nothing has no place of its own; fix it, or look at the loads"
    if status == "over_sheave":
        advice = "let the load begin further from the sheave, or give it at the sheave itself"
    if not advice and status in ("not_settled", "not_finite", "gap_too_wide"):
        advice = "look for a value that is far off, such as a stiffness or a weight in the wrong unit"
    return f"{text}: {advice}" if advice else text


def _swinging_sheave(project: Project) -> bool:
    return any(support.hold == "sheave" and support.hanger_length_m for support in project.supports)


def range_fault(project: Project, path: str, expected: str) -> Fault:
    """A number that the core refuses, with what the file holds and an example."""
    raw = project.core_raw(path)
    plain = isinstance(raw, str | int | float) and not isinstance(raw, bool)
    value = f'"{shown(raw)}"' if isinstance(raw, str) else f"{raw}"
    problem = f"{value} is outside its range" if plain else "outside its range"
    fault = project.core_fault(path, problem, expected)
    if expected == TURN_EXPECTED:
        number = int(path.partition("[")[2].partition("]")[0])
        before, at, after = (project.supports[number + step].plan_m for step in (-1, 0, 1))
        turn = math.atan2(after[1] - at[1], after[0] - at[0]) - math.atan2(at[1] - before[1], at[0] - before[0])
        degrees = abs(math.degrees(math.remainder(turn, math.tau)))
        problem = f"the route turns by {degrees:.4g} deg here"
        return replace(fault, problem=problem, example="two supports a few metres apart, each for half of the turn")
    if expected == CURVE_EXPECTED:
        line = project.line
        part = line.curve or (line.core if "[0]" in path else line.outer) or line.core
        valid = None if part is None else part.valid_to
        problem = "the curve falls somewhere" + (f" from 0 to valid_to, {100.0 * valid:.4g} %" if valid else "")
        return replace(fault, problem=problem, example='a smaller valid_to, such as valid_to = "0.4 %"')
    return fault


def slack_words(project: Project, pull: float | None) -> str:
    """That a pull leaves the line nearly slack, and a pull that would not; empty where it does not.

    A parabola under the bare weight sags w L^2 / (8 H); half a span deep, it is no tensioned line any more.
    """
    rule = project.stringing
    if pull is None:
        pull = rule.horizontal_tension_N or (rule.tension.value_N if rule.tension else None)
    weight = project.line.weight_N_per_m
    before, after = max(pairwise(project.supports), key=lambda pair: pair[1].station_m - pair[0].station_m)
    span = after.station_m - before.station_m
    if pull is None or weight * span <= 8.0 * SLACK_SAG_SHARE * pull:
        return ""
    enough = _rounded_up(weight * span / 2.0)
    return (
        f"a pull of {short_force(pull)} leaves the line nearly slack, as the {span:.4g} m from {before.name} to "
        f'{after.name} weigh {short_force(weight * span)}; try "{short_force(enough)}" or more'
    )


def short_force(newtons: float) -> str:
    """A force as someone would write it in a file.

    >>> short_force(20.0), short_force(1800.0)
    ('20 N', '1.8 kN')
    """
    return f"{newtons:.4g} N" if abs(newtons) < 1e3 else f"{newtons / 1e3:.4g} kN"


def refuse_slack(project: Project, status: str, text: str, condition: str = "") -> None:
    """Lengths that leave a line slack, and a rule that none meets, are inputs at fault, not failed searches."""
    given = project.stringing.natural_length_m is not None
    where = f' in condition "{condition}"' if condition else ""
    if status == "slack" and given:
        expected = f"natural lengths that put the line under load, or shorter ones ({_holds_apart(project)})"
        raise InputError([project.core_fault("stringing.natural_length", f"{text}{where}", expected)])
    if status == "out_of_reach" and given:
        raise InputError([_out_of_reach(project, text)])
    if status == "out_of_reach":
        raise InputError([project.core_fault("stringing", text, "a rule that the line can meet")])


def chords_m(project: Project) -> list[float]:
    """Straight distances, m, from hold to hold."""
    points = [(*s.plan_m, project.elevation_m(s)) for s in project.supports]
    return [math.dist(before, after) for before, after in pairwise(points)]


def _out_of_reach(project: Project, text: str) -> Fault:
    given = project.stringing.natural_length_m
    total, apart = math.fsum(given if isinstance(given, tuple) else (given or 0.0,)), math.fsum(chords_m(project))
    if total > apart:
        text = f"the line is too long: {total:.3f} m for supports that are {apart:.3f} m apart along it"
    if total < apart:
        text = f"the line is too short: {total:.3f} m would have to stretch by {100.0 * (apart / total - 1.0):.3g} %"
    return project.core_fault("stringing.natural_length", text, f"lengths near the distances {_holds_apart(project)}")


def _holds_apart(project: Project) -> str:
    chords = [f"{length:.3f} m" for length in chords_m(project)]
    return "hold to hold: " + ", ".join(chords[:4]) + (", ..." if len(chords) > 4 else "")


def _rounded_up(value: float) -> float:
    """The next number of two digits."""
    step = 10.0 ** (math.floor(math.log10(value)) - 1)
    return math.ceil(value / step) * step
