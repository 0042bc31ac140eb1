"""What a settled line shows that is hardly meant: above its strength, a loop, lifted off, nearly slack, off its curves.

And what is worth knowing of how it is judged: conditions that no limit judges, rules that ask for another state.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from math import hypot
from typing import TYPE_CHECKING

from tautwise.columns import force_text, forces_text
from tautwise.history import AS_STRUNG, part_names
from tautwise.outcomes import slack_words
from tautwise.sources import ONE_STATE

if TYPE_CHECKING:
    from tautwise.model import Project
    from tautwise.results import Equilibrium
    from tautwise.results_vet import LimitState


DEEP_SAG_SHARE = 0.25  # of the span
OVERTURNED_DEG = 90.0  # a hanger's swing from the vertical, beyond which its clamp is above it
SLACK_SHARE = 1e-6  # of the line's tension: below it a hanger carries nothing
NAMES_MOST = 6


def findings_of(project: Project, conditions: Sequence[Equilibrium], pull: float | None) -> tuple[str, ...]:
    """One line for each thing that is hardly meant, with the file's name in front; `pull` in N as it was asked for."""
    loops = [text for each in conditions for text in _loops(each)]
    slack = slack_words(project, pull)
    lifted = [text for each in conditions for text in _lifted(project, each)]
    strings = [text for each in conditions for text in _slack_strings(project, each)]
    found = [*_broken(project, conditions), *loops, *lifted, *([slack] if slack else []), *strings]
    found += [*_off_the_curves(project, conditions), *_one_state(project)]
    return _headed(project, found)


def judging_findings(project: Project, nothing: str) -> tuple[str, ...]:
    """What no limit judges: `nothing` says what follows where there is no limit at all; else conditions left out."""
    if not project.limits:
        return _headed(project, [f"no [[limit]], so {nothing}"])
    limits = [limit.conditions for limit in project.limits]
    judged = {name for names in limits if names is not None for name in names}
    left = [] if None in limits else [each.name for each in project.conditions if each.name not in judged]
    return _headed(project, [f"no limit judges the condition{_listed(left)}"] if left else [])


def bare_texts(project: Project, findings: Sequence[str]) -> list[str]:
    """Findings without the file's name in front, as they stand below its own heading."""
    head = f"{project.source}: " if project.source else ""
    return [text.removeprefix(head) for text in findings]


def _headed(project: Project, texts: Sequence[str]) -> tuple[str, ...]:
    head = f"{project.source}: " if project.source else ""
    return tuple(head + text for text in texts)


def _listed(names: Sequence[str]) -> str:
    more = f" and {len(names) - NAMES_MOST} more" if len(names) > NAMES_MOST else ""
    return ("s " if len(names) > 1 else " ") + ", ".join(repr(name) for name in names[:NAMES_MOST]) + more


def _one_state(project: Project) -> list[str]:
    """That rules ask for a final state which a linear line has not."""
    asked = [each.what.removesuffix(" state") for each in project.origins if each.source == ONE_STATE]
    if not asked:
        return []
    verb = "is" if len(asked) == 1 else "are"
    why = "on the line as strung: it is linear without bedding_in"
    return [f"the rule condition{_listed(asked)} {verb} judged {why}"]


def _off_the_curves(project: Project, conditions: Sequence[Equilibrium]) -> Iterator[str]:
    """Parts strained beyond what was measured, now or in their history; the worst span of each part and condition."""
    limits = dict(zip(part_names(project.line), (part.valid_to for part in project.line.parts), strict=True))
    worst: dict[tuple[str, str], tuple[float, str]] = {}
    for each in conditions:
        kept = each.history.parts if each.history is not None else ()
        met = {(one.from_support, one.part): one.met_strain for one in kept}
        reached = [
            (each.name, part, strain, span.name)
            for span in each.spans
            for part, strain in zip(limits, span.part_strains, strict=True)
            if strain > met.get((span.from_support, part), 0.0)  # else it is on its unloading line
        ]
        reached += [
            (one.condition, one.part, one.met_strain, f"{one.from_support} to {one.to_support}") for one in kept
        ]
        for condition, part, strain, span in reached:
            if strain > max(limits[part], worst.get((condition, part), (0.0, ""))[0]):
                worst[condition, part] = (strain, span)
    for (condition, part), (strain, span) in worst.items():
        where = "as strung, creeping" if condition == AS_STRUNG else f"in {condition!r}"
        yield (
            f"the {part} is strained to {100.0 * strain:.3g} % {where} ({span}), beyond what was measured: its "
            f"valid_to is {100.0 * limits[part]:.3g} %, and straight lines stand for its curves beyond"
        )


def _broken(project: Project, conditions: Sequence[Equilibrium]) -> list[str]:
    strength = project.line.breaking_strength_N
    found = []
    for each in conditions:
        if strength is not None and (each.tension_max_N or 0.0) > strength:
            (tension, allowed), unit = forces_text(each.tension_max_N or 0.0, strength)
            found.append(f"the line is above its breaking strength in {each.name!r}: {tension} of {allowed} {unit}")
    return found


def _lifted(project: Project, line: Equilibrium) -> list[str]:
    """Sheaves out of which the line would lift, and hangers that it has turned over."""
    holds = {support.name: support.hold for support in project.supports}
    found = []
    for each in line.supports:
        if holds[each.name] == "sheave" and each.down_N < 0.0:
            found.append(
                f"the line lifts out of the sheave at {each.name!r} in {line.name!r}, with {force_text(-each.down_N)}"
            )
        if (each.swing_deg or 0.0) > OVERTURNED_DEG and holds[each.name] == "hanger":
            force = f"stands {each.swing_deg:.0f} deg from hanging, with {force_text(each.resultant_N)} in it"
            slack = each.resultant_N < SLACK_SHARE * (line.tension_max_N or 0.0)
            words = "is slack" if slack else force
            found.append(f"the line lifts at {each.name!r} in {line.name!r}: its hanger {words}")
    return found


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
