"""Which of two crossing lines is the upper one: as strung, and by their supports; a finding where these differ."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np

from tautwise.limits import SpacingLimit

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from tautwise.model import Project

    Floats = NDArray[np.float64]


def order_findings(project: Project, arcs: Floats) -> Iterator[str]:
    """Spacings from a line strung on the other side of this one than its supports stand.

    Parameters
    ----------
    arcs: of this line as strung, bare, as :func:`tautwise.solve.course_as_strung` gives them.
    """
    for number, limit in enumerate(project.limits):
        if not isinstance(limit, SpacingLimit):
            continue
        condition = limit.other_condition_for(project.conditions[0].name)
        near = project.neighbour(number, condition)
        strung = project.neighbour_as_strung(number, near)
        if strung is None:
            continue
        places = strung.moved(limit.shift)
        shift = places[0, 2:5] - strung.arcs[0, 2:5]
        ours, theirs = _supports(project), _supports(project.others[number]) + shift
        for k, m, chord_gap, gap in _crossings(ours, theirs, _ends(arcs), _ends(places)):
            if chord_gap * gap < 0.0:
                mine = " to ".join(support.name for support in project.supports[k : k + 2])
                yield (
                    f"{limit.id}: as strung, {near.names[m]} to {near.names[m + 1]} of {limit.other} hangs "
                    f"{abs(gap):.2f} m {'below' if gap > 0.0 else 'above'} {mine} where they cross, though the "
                    f"straight line between its supports passes {'above' if gap > 0.0 else 'below'}: it is taken to "
                    "have been strung so."
                )


def _supports(project: Project) -> Floats:
    return np.array([(*support.plan_m, project.elevation_m(support)) for support in project.supports])


def _ends(arcs: Floats) -> Floats:
    return np.vstack([arcs[:, 2:5], arcs[-1:, 5:8]])


def _crossings(ours: Floats, theirs: Floats, mine: Floats, other: Floats) -> Iterator[tuple[int, int, float, float]]:
    """Spans whose straight lines cross in plan, how far ours passes above the other there, and how far it hangs so."""
    for k, (a, b) in enumerate(pairwise(ours)):
        for m, (c, d) in enumerate(pairwise(theirs)):
            along, beside = (b - a)[:2], (d - c)[:2]
            det = along[0] * beside[1] - along[1] * beside[0]
            if abs(det) <= 1e-9 * np.linalg.norm(along) * np.linalg.norm(beside):
                continue
            off = (c - a)[:2]
            t, u = (off[0] * other_way[1] - off[1] * other_way[0] for other_way in (beside, along))
            t, u = t / det, u / det
            if 0.0 < t < 1.0 and 0.0 < u < 1.0:
                chord_gap = a[2] + t * (b - a)[2] - c[2] - u * (d - c)[2]
                yield k, m, float(chord_gap), _height(mine, a, b, t) - _height(other, c, d, u)


def _height(places: Floats, start: Sequence[float] | Floats, end: Sequence[float] | Floats, share: float) -> float:
    """Elevation of a line at a share of the way between two supports, from the ends of its arcs."""
    along = (np.asarray(end) - np.asarray(start))[:2]
    off = places[:, :2] - np.asarray(start)[:2]
    shares = off @ along / (along @ along)
    aside = np.abs(off @ np.array([-along[1], along[0]])) / (along @ along)
    there = (aside < 0.05) & (shares > -0.05) & (shares < 1.05)
    order = np.argsort(shares[there])
    return float(np.interp(share, shares[there][order], places[there][order, 2]))
