"""What a settled line shows that is hardly meant: above its strength, a loop, lifted from a sheave, nearly slack."""

from __future__ import annotations

from collections.abc import Sequence
from math import hypot
from typing import TYPE_CHECKING

from tautwise.columns import force_text, forces_text
from tautwise.outcomes import slack_words

if TYPE_CHECKING:
    from tautwise.model import Project
    from tautwise.results import Equilibrium
    from tautwise.results_vet import LimitState


DEEP_SAG_SHARE = 0.25  # of the span


def findings_of(project: Project, conditions: Sequence[Equilibrium], pull: float | None) -> tuple[str, ...]:
    """One line for each thing that is hardly meant, with the file's name in front; `pull` in N as it was asked for."""
    loops = [text for each in conditions for text in _loops(each)]
    slack = slack_words(project, pull)
    lifted = [text for each in conditions for text in _lifted(project, each)]
    strings = [text for each in conditions for text in _slack_strings(project, each)]
    found = [*_broken(project, conditions), *loops, *lifted, *([slack] if slack else []), *strings]
    head = f"{project.source}: " if project.source else ""
    return tuple(head + text for text in found)


def slack_finding(project: Project, pull: float | None) -> tuple[str, ...]:
    """That a pull in N leaves the line nearly slack, where it does."""
    return tuple(text for text in findings_of(project, (), pull))


def _broken(project: Project, conditions: Sequence[Equilibrium]) -> list[str]:
    strength = project.line.breaking_strength_N
    found = []
    for each in conditions:
        if strength is not None and (each.tension_max_N or 0.0) > strength:
            (tension, allowed), unit = forces_text(each.tension_max_N or 0.0, strength)
            found.append(f"the line is above its breaking strength in {each.name!r}: {tension} of {allowed} {unit}")
    return found


def _lifted(project: Project, line: Equilibrium) -> list[str]:
    """Sheaves out of which the line would lift."""
    sheaves = {support.name for support in project.supports if support.hold == "sheave"}
    return [
        f"the line lifts out of the sheave at {each.name!r} in {line.name!r}, with {force_text(-each.down_N)}"
        for each in line.supports
        if each.name in sheaves and each.down_N < 0.0
    ]


def _loops(line: Equilibrium) -> list[str]:
    """Spans that hang deeper than any line that is tensioned."""
    return [
        f"{span.name} hangs {span.sag_m:.4g} m deep over {span.span_m:.4g} m in {line.name!r}; is the line this long?"
        for span in line.spans
        if span.sag_m > DEEP_SAG_SHARE * span.span_m
    ]


def _slack_strings(project: Project, line: Equilibrium) -> list[str]:
    """V hangers whose line pushes so far aside that one string hangs slack.

    Of strings of length l with a spread s both are taut while |across| <= s / (2 l) of the force in the hanger.
    """
    found = []
    for support, state in zip(project.supports, line.supports, strict=False):
        length, spread = support.hanger_length_m, support.hanger_spread_m
        if not length or not spread:
            continue
        carried = hypot(state.along_N, state.across_N, state.down_N - 0.5 * support.hanger_weight_N)
        if carried > 0.0 and abs(state.across_N) > spread / (2.0 * length) * carried:
            side, other = ("right", "left") if state.across_N > 0.0 else ("left", "right")
            head = f"the line pushes to the {other} at {support.name!r} in {line.name!r}"
            found.append(f"{head}: the {other} string of its V is slack, and the {side} one carries alone")
    return found


def changed_places(states: Sequence[LimitState]) -> tuple[str, ...]:
    """Spacings that fail because the lines have passed through each other: which is above is not as strung."""
    return tuple(
        f"{state.id} in {state.condition}: the lines have passed through each other since they were strung bare; "
        f"{state.place} now hangs {-state.value:.3g} m on the wrong side of {state.other_place}."
        for state in states
        if state.kind == "spacing" and state.value is not None and state.value < 0.0
    )
