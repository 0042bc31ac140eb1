"""Natural length that moves between spans: over sheaves, from a winch, or until the hangers hang plumb.

For given natural lengths a section is settled as ever. What is sought is the natural length m_j moved across each
support j into the span ahead at which the tensions beside it agree as they should; found by Newton with differences.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from .quadrature import Array, Growing
from .section import Section, Settled, settle_section
from .span import NotSettled, Piece

STEP_M = 1e-4


@dataclass(frozen=True)
class Feed:
    """What natural length does at a support.

    kind: "sheave" runs over until |T| is the same on both sides, but for friction: T_ahead = T_behind
    e^(drag mu theta), theta the angle through which the line turns; "plumb" is shifted until the horizontal tension is
    the same on both sides; "winch" comes in from outside until the horizontal tension ahead is pull_N.
    """

    kind: str
    mu: float = 0.0
    drag: int = 0
    pull_N: float = 0.0


def run_over(section: Section, feeds: Mapping[int, Feed]) -> Settled:
    """A section in equilibrium with natural length that moves at the supports in `feeds`. Raises NotSettled.

    >>> from .section import Support
    >>> from .span import Material, Piece
    >>> load, xs = np.array([0.0, 0.0, -15.97]), (0.0, 250.0, 650.0, 950.0)
    >>> spans = [[Piece(length, load)] for length in (250.5, 402.0, 300.5)]
    >>> supports = [Support(np.array([x, 0.0, 0.0])) for x in xs]
    >>> section = Section(Material(34.7e6), spans, supports, np.zeros((4, 3)))
    >>> settled = run_over(section, {1: Feed("sheave"), 2: Feed("sheave")})
    >>> [round(float(np.linalg.norm(span.pull)), 5) for span in settled.spans]
    [18229.95225, 18229.95225, 18229.95225]
    """
    order = sorted(feeds)

    def at(moved: Array) -> Settled:
        return settle_section(shifted(section, feeds, dict(zip(order, moved.tolist(), strict=True))))

    def missed(settled: Settled) -> Array:
        return np.array([miss(settled, j, feeds[j]) for j in order])

    moved = np.zeros(len(order))
    settled = at(moved)
    for _ in range(60):
        error = missed(settled)
        size = float(np.abs(error).max(initial=0.0))
        if size <= 1e-15:
            return settled
        step = -np.asarray(np.linalg.solve(slopes(lambda m: missed(at(m)), moved), error))
        trial, moved_to = stepped(at, missed, moved, step, size)
        after = float(np.abs(missed(trial)).max())
        if size <= 1e-11 and after > 0.5 * size:
            return settled if size < after else trial
        settled, moved = trial, moved_to
    raise NotSettled(f"tensions differ by {size:g} of themselves")


def slopes(missed: Callable[[Array], Array], moved: Array) -> Array:
    """Central differences of the misses in the moved lengths."""
    found = np.zeros((moved.size, moved.size))
    for i in range(moved.size):
        aside = np.zeros(moved.size)
        aside[i] = STEP_M
        found[:, i] = (missed(moved + aside) - missed(moved - aside)) / (2.0 * STEP_M)
    return found


def stepped(
    at: Callable[[Array], Settled], missed: Callable[[Settled], Array], moved: Array, step: Array, size: float
) -> tuple[Settled, Array]:
    """Halve the step until the line can be hung and misses by less."""
    for halvings in range(40):
        to = moved + 0.5**halvings * step
        try:
            trial = at(to)
        except (NotSettled, ValueError):
            continue
        if float(np.abs(missed(trial)).max()) < size or size <= 1e-11:
            return trial, to
    raise NotSettled("no step brings the tensions nearer to one another")


def shifted(section: Section, feeds: Mapping[int, Feed], moved: Mapping[int, float]) -> Section:
    """The section with natural length put before a support's span ahead and taken from the end of the span behind."""
    spans = [list(span) for span in section.spans]
    for j, length in moved.items():
        spans[j][0] = begun_before(longer(spans[j][0], length), length)
        if feeds[j].kind != "winch":
            spans[j - 1][-1] = longer(spans[j - 1][-1], -length)
    return replace(section, spans=spans)


def longer(piece: Piece, length_m: float) -> Piece:
    """A piece with so much more natural length; ValueError where nothing would be left."""
    grown = replace(piece, length_m=piece.length_m + length_m)
    if grown.length_m <= 0.0:
        raise ValueError("a piece of the line would run over a sheave")
    return grown


def begun_before(piece: Piece, length_m: float) -> Piece:
    """A piece that begins so much earlier, a load that grows being where it was on the line."""
    if not isinstance(piece.load, Growing):
        return piece
    return replace(piece, load=replace(piece.load, start=piece.load.at(-length_m)))


def miss(settled: Settled, support: int, feed: Feed) -> float:
    """By how much, of themselves, the tensions beside a support differ from what they should be."""
    ahead = settled.spans[support].pull
    if feed.kind == "winch":
        return math.log(math.hypot(ahead[0], ahead[1]) / feed.pull_N)
    behind = settled.spans[support - 1].end_tension()
    if feed.kind == "plumb":
        return math.log(math.hypot(ahead[0], ahead[1]) / math.hypot(behind[0], behind[1]))
    ratio = math.log(float(np.linalg.norm(ahead) / np.linalg.norm(behind)))
    return ratio - feed.drag * feed.mu * turn(ahead, behind)


def turn(ahead: Array, behind: Array) -> float:
    """The angle through which a line turns between two tension vectors, rad.

    >>> round(turn(np.array([1.0, 0.0, 1.0]), np.array([1.0, 0.0, -1.0])), 9) == round(math.pi / 2, 9)
    True
    """
    return math.atan2(float(np.linalg.norm(np.cross(ahead, behind))), float(ahead @ behind))


def lengths_of(settled: Settled) -> list[float]:
    """Natural length of each span."""
    return [span.length_m for span in settled.spans]


def begins(holds: Sequence[str], support: int) -> bool:
    """Whether a section of the line begins at a support: the first one, or an anchor in between."""
    return support == 0 or (support < len(holds) - 1 and holds[support] == "anchor")
