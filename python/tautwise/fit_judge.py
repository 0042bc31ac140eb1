"""Which points of a survey lie too far from the line that fits them, and what else a fit shows that is hardly meant."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any

from tautwise.as_built import dropped
from tautwise.columns import plural
from tautwise.student import THREE_SIGMA, chi_square_exceeded, two_sided

if TYPE_CHECKING:
    from tautwise.model import Project
    from tautwise.results_fit import FittedPoint, FittedPull, FittedSpan
    from tautwise.survey import Survey

UNSEEN_M = 1e-6  # no survey sees a micrometre: residuals below are rounding
RARE = 1e-3
NAMED = 3
WIDE = 0.2
NO_FIT = "these points do not fit this line"
NO_FIT_SAG, NO_FIT_INTERVAL, NO_FIT_SIGMAS = 0.1, 0.3, 3.0  # of the greatest sag measured, of the pull, of the sigmas


def deviations(points: Survey, found: Mapping[str, Any], left: int) -> list[tuple[float | None, bool]]:
    """Of each point the deviation of its elevation or its offset, the greater one, and whether it is suspicious.

    Parameters
    ----------
    found: of the core. left: measurements less unknowns.
    """
    freedom = math.inf if points.has_sigmas else float(left - 1)
    judged = []
    for index in range(points.count):
        both = [
            _deviation(residual, leverage, points.sigmas_m[index], found["chi2"], left)
            for residual, leverage in (
                (found["residuals_m"][index], found["leverages"][index]),
                (found["offset_residuals_m"][index], found["offset_leverages"][index]),
            )
        ]
        known = [each for each in both if each is not None]
        worst = max(known, key=abs, default=None)
        far = worst is not None and freedom > 0 and two_sided(worst, freedom) < THREE_SIGMA
        judged.append((worst, far))
    return judged


def _deviation(
    residual: float | None, leverage: float | None, sigma: float | None, chi2: float, left: int
) -> float | None:
    """r / (s sqrt(1 - h)), s of the other points where none is given.

    The externally studentised residual, Cook and Weisberg, Residuals and Influence in Regression (1982), 2.2.

    >>> round(_deviation(0.02, 0.0, 0.01, 9.0, 5), 6), _deviation(1e-9, 0.0, None, 1e-20, 5)
    (2.0, 0.0)
    >>> round(_deviation(0.02, 0.5, None, 0.0012, 4), 6)
    2.44949
    """
    if residual is None or leverage is None or 1.0 - leverage < 1e-9:
        return None
    if sigma is not None:
        return residual / (sigma * math.sqrt(1.0 - leverage))
    if left < 2:
        return None
    if abs(residual) < UNSEEN_M:
        return 0.0
    own = residual * residual / (1.0 - leverage)
    others = max((chi2 - own) / (left - 1), 1e-12 * own)
    return math.copysign(math.sqrt(own / others), residual)


def findings_of(
    points: Survey,
    pull: FittedPull | None,
    spans: Sequence[FittedSpan],
    listed: Sequence[FittedPoint],
    chi2: float,
    left: int,
) -> tuple[str, ...]:
    """What deserves a second look, a sentence each."""
    found = [*_far_off(listed), *_not_measured(spans)]
    if left == 0 and not points.has_sigmas:
        found.append(
            "as many measurements as unknowns: the line goes through all of them, and nothing tells how surely"
        )
    if points.has_sigmas and left > 0 and chi_square_exceeded(chi2, left) < RARE:
        wider = math.sqrt(chi2 / left)
        found.append(
            f"the points lie {wider:.1f} times as far off as their sigmas say: the line differs from the project, "
            "or the intervals are too narrow"
        )
    return (*found, *_hardly_known(pull), *_blown(listed))


def as_built_findings(project: Project) -> tuple[str, ...]:
    """What the natural lengths are not, and what goes with the stringing rule."""
    found = []
    if project.line.stretches:
        found.append(
            "the line is taken as one that nothing has stretched for good yet; where it has been stretched already, "
            "the natural lengths are those of the line as it is now, and on the project as built a condition in the "
            "state final or after creep would count that stretch twice"
        )
    if gone := dropped(project):
        found.append(
            f"the project as built is clamped, so it leaves out {' and '.join(gone)} of its [stringing], which tell "
            "how the line came over its sheaves"
        )
    return tuple(found)


def misfit(
    points: Survey, pull: FittedPull | None, spans: Sequence[FittedSpan], rms_m: float, chi2: float, left: int
) -> tuple[str, ...]:
    """That the points are hardly those of this line, and by what that shows; before all other findings."""
    sag = max((span.sag_m for span in spans if span.points), default=0.0)
    found = []
    if rms_m > NO_FIT_SAG * sag > 0.0:
        found.append(f"they lie {rms_m:.3g} m off it, beside a sag of {sag:.3g} m")
    if points.has_sigmas and left > 0 and chi2 > NO_FIT_SIGMAS**2 * left:
        found.append(f"they lie {math.sqrt(chi2 / left):.1f} times as far off as their sigmas say")
    if pull is not None and pull.high_N is not None:
        share = pull.high_N / pull.horizontal_tension_N - 1.0
        if share > NO_FIT_INTERVAL:
            found.append(f"its pull is known to {100.0 * share:.0f} % only")
    return (f"{NO_FIT}: {', and '.join(found)}; is it the right line, span and unit?",) if found else ()


def _far_off(listed: Sequence[FittedPoint]) -> list[str]:
    far = sorted((point for point in listed if point.suspicious), key=lambda p: -abs(p.deviation or 0.0))
    words = [f"{point.name} (station {point.station_m:g} m) by {_off_words(point)}" for point in far[:NAMED]]
    more = [f"and {len(far) - NAMED} more"] if len(far) > NAMED else []
    return [f"{plural(len(far), 'point')} farther off than three sigma: {', '.join([*words, *more])}"] if far else []


def _off_words(point: FittedPoint) -> str:
    return f"{1e3 * max((point.residual_m, point.offset_residual_m or 0.0), key=abs):+.0f} mm"


def _not_measured(spans: Sequence[FittedSpan]) -> list[str]:
    left_out = [span.name for span in spans if not span.measured]
    if not left_out:
        return []
    names = ", ".join(left_out[:NAMED]) + (f" and {len(left_out) - NAMED} more" if len(left_out) > NAMED else "")
    return [f"no points in {names}: the natural length there is that of the one pull that fits all points best"]


def _hardly_known(pull: FittedPull | None) -> list[str]:
    """Intervals are those of the linearised problem: sag goes by 1 / pull, so wide ones are lopsided in truth."""
    if pull is None or pull.high_N is None:
        return []
    share = pull.high_N / pull.horizontal_tension_N - 1.0
    if share < WIDE:
        return []
    return [
        f"the pull is known to {100.0 * share:.0f} % only: the ends of so wide an interval are rough, the upper too low"
    ]


def _blown(listed: Sequence[FittedPoint]) -> list[str]:
    """Offsets that lean to one side by more than three times their mean's own standard error."""
    off = [point.offset_residual_m for point in listed if point.offset_residual_m is not None]
    if len(off) < 4:
        return []
    mean = math.fsum(off) / len(off)
    spread = math.sqrt(math.fsum((each - mean) ** 2 for each in off) / (len(off) - 1) / len(off))
    if abs(mean) < max(3.0 * spread, UNSEEN_M):
        return []
    side = "left" if mean > 0.0 else "right"
    return [f"the points lie {1e3 * abs(mean):.0f} mm to the {side} of the line on average: still air is assumed"]
