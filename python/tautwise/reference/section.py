"""Spans coupled at their supports, in equilibrium: one dense Newton on the pulls of all spans.

Given the tension vector R_k at each span's start, statics gives the force F_j of each hold on the line, and
that the place of each clamp. The equilibrium is where every span ends at its clamp: the maximum of D. That it is
one is shown by the potential energy of the same shape, which must be no more than D.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field, replace

import numpy as np

from .quadrature import Array, load_at
from .route import Route
from .span import AnyMaterial, Hung, NotSettled, Piece, settle


@dataclass(frozen=True)
class Support:
    """How the line is held: anchor or post (fixed or elastic), or hanger (swinging link, or two strings as a V).

    A sheave is fixed, or hangs on a link where it has a length; see :mod:`.sheave` for what runs over it.
    """

    place: Array
    hold: str = "anchor"
    hanger_length_m: float = 0.0
    hanger_weight_N: float = 0.0
    stiffness_N_per_m: tuple[float, float, float] = (np.inf, np.inf, np.inf)
    """Along, across and up, in the support's axes; not for hangers."""
    spread_m: float = 0.0
    """Between the upper ends of a V, across; 0: a single link."""
    axes: Array = field(default_factory=lambda: np.eye(3))
    """Rows: ahead, to the left, up."""
    blur_N: float = 0.0
    """Force below which a hanger's link counts as slack; see settle_section."""

    @property
    def hangs(self) -> bool:
        """Whether there is a link."""
        return self.hold in ("hanger", "sheave") and self.hanger_length_m > 0.0

    def plumb(self) -> Array:
        """Where the clamp is when nothing pulls it aside."""
        return np.asarray(self.place - np.array([0.0, 0.0, self.drop_m()]))

    def drop_m(self) -> float:
        """How far a plumb clamp hangs below its support."""
        return math.sqrt(self.hanger_length_m**2 - (0.5 * self.spread_m) ** 2) if self.hangs else 0.0

    def clamp(self, force: Array) -> Array:
        """Where the clamp is under the force of the hold on the line."""
        if not self.hangs:
            return np.asarray(self.place - self.softness() @ force)
        own = np.append(self.axes @ force, self.blur_N)
        return np.asarray(self.place + self.axes.T @ self.hanging(own)[0][:3])

    def flexibility(self, force: Array) -> Array:
        """- d clamp / d force, m/N, 3x3."""
        if not self.hangs:
            return self.softness()
        own = np.append(self.axes @ force, self.blur_N)
        return np.asarray(self.axes.T @ self.hanging(own)[1][:3, :3] @ self.axes)

    def support_function(self, force: Array) -> float:
        """Of a hanger, J: minus the least that F . (clamp - support) can be; its kink at 0 is blurred."""
        own, none = np.append(self.axes @ force, self.blur_N), np.array([0.0, 0.0, 0.0, self.blur_N])
        return float(none @ self.hanging(none)[0] - own @ self.hanging(own)[0])

    def hanging(self, force: Array) -> tuple[Array, Array]:
        """Clamp from the support and how it gives, in the support's axes; a fourth component blurs the force.

        Each string is tried alone, pulling along the force; it is right where the other is then not too long. Else both
        are taut, and the clamp is on the circle that is as far from both upper ends, furthest against the force.

        >>> vee = Support(np.zeros(3), "hanger", 5.0, spread_m=6.0)
        >>> vee.clamp(np.array([0.0, 100.0, 500.0])).tolist()
        [0.0, 0.0, -4.0]
        >>> vee.clamp(np.array([0.0, 400.0, 300.0])).tolist()
        [0.0, -1.0, -3.0]
        """
        size = float(np.linalg.norm(force))
        half = np.array([0.0, 0.5 * self.spread_m, 0.0, 0.0])
        if size == 0.0:
            return np.zeros(4), np.zeros((4, 4))
        for end, other in ((half, -half), (-half, half)):
            alone = end - self.hanger_length_m * force / size
            if self.spread_m == 0.0 or float(np.linalg.norm(alone - other)) <= self.hanger_length_m:
                return alone, self.hanger_length_m / size * (np.eye(4) - np.outer(force, force) / size**2)
        normal = force * np.array([1.0, 0.0, 1.0, 1.0])
        size = float(np.linalg.norm(normal))
        give = np.diag([1.0, 0.0, 1.0, 1.0]) - np.outer(normal, normal) / size**2
        return -self.drop_m() * normal / size, self.drop_m() / size * give

    def reach_m(self, clamp: Array) -> float:
        """The longer way from a hanger's upper ends to its clamp."""
        own = self.axes @ (clamp - self.place)
        return max(float(np.linalg.norm(own - [0.0, side * self.spread_m, 0.0])) for side in (-0.5, 0.5))

    def softness(self) -> Array:
        """Give of a post or an anchor, m/N, 3x3."""
        soft = np.zeros(3) if self.hangs else 1.0 / np.array(self.stiffness_N_per_m)
        return np.asarray(self.axes.T @ np.diag(soft) @ self.axes)


@dataclass(frozen=True)
class Section:
    """The loads of one condition on the pieces of each span, and on the clamps themselves: N, (n + 1, 3).

    link_loads: the half of a link's weight and wind that its support takes without the line, N, (n + 1, 3).
    """

    material: AnyMaterial | Sequence[AnyMaterial]
    spans: Sequence[Sequence[Piece]]
    supports: Sequence[Support]
    clamp_loads: Array
    route: Route | None = None
    """None: straight."""
    link_loads: Array | None = None

    def material_of(self, span: int) -> AnyMaterial:
        """One material for all spans, or one for each."""
        return self.material[span] if isinstance(self.material, Sequence) else self.material


@dataclass(frozen=True)
class Settled:
    """A section in equilibrium: the hung spans, the clamps and the forces of the holds on the line, (n + 1, 3)."""

    section: Section
    spans: Sequence[Hung]
    clamps: Array
    hold_forces: Array

    def station(self, span: int, place: Array) -> float:
        """Station of a place of a span's line."""
        route = self.section.route
        return float(place[0]) if route is None else route.station(span, place)

    def position_at(self, span: int, s: float) -> Array:
        """Place of the line at natural length s of a span."""
        return np.asarray(self.clamps[span] + self.spans[span].position_at(s))

    def lower_bound_J(self) -> float:
        """Complementary energy D, datum elevation 0: sum of F.a - W*_hold(F), less int W* ds."""
        total = -sum(span.conjugate_J() for span in self.spans)
        for support, force in zip(self.section.supports, self.hold_forces, strict=True):
            total += float(force @ support.place) - 0.5 * float(force @ support.softness() @ force)
            if support.hangs:
                total -= support.support_function(force)
        return total

    def potential_J(self) -> float:
        """Stretch of line and posts less the work of every load, from the shape itself; datum elevation 0."""
        total = 0.0
        for k, span in enumerate(self.spans):
            total += span.stored_J() - self._work_of(k)
        for j, support in enumerate(self.section.supports):
            force = self.hold_forces[j]
            total += 0.5 * float(force @ support.softness() @ force)
            total -= float(self.section.clamp_loads[j] @ self.clamps[j])
        return total

    def _work_of(self, k: int) -> float:
        """int q.r ds + sum F.r(s) of a span, by 64 Gauss points a piece."""
        points, weights = np.polynomial.legendre.leggauss(64)
        work = 0.0
        for start, _, piece in self.spans[k].starts():
            half = 0.5 * piece.length_m
            for point, weight in zip(points, weights, strict=True):
                work += (
                    half
                    * float(weight)
                    * float(
                        load_at(piece.load, half * (1.0 + point)) @ self.position_at(k, start + half * (1.0 + point))
                    )
                )
            work += float(piece.force @ self.position_at(k, start + piece.length_m))
        return work


def settle_section(section: Section) -> Settled:
    """The equilibrium: the greatest D over all pulls, by Newton with a dense Hessian. Raises NotSettled.

    D has a kink where a hanger carries nothing, so where a line holds itself up within reach of a slack hanger,
    |F| is blurred, ever less, down to 1e-9 of the loads; the answer is then good to about that.

    >>> from tautwise.reference.span import Material
    >>> load, hanger = np.array([0.0, 0.0, -10.0]), dict(hold="hanger", hanger_length_m=2.0)
    >>> supports = [Support(np.array([0.0, 0.0, -2.0])), Support(np.array([100.0, 0.0, 0.0]), **hanger),
    ...             Support(np.array([200.0, 0.0, -2.0]))]
    >>> spans = [[Piece(100.0, load)], [Piece(100.0, load)]]
    >>> section = Section(Material(1e7), spans, supports, np.zeros((3, 3)))
    >>> settled = settle_section(section)
    >>> (settled.clamps[1] + 0.0).round(9).tolist(), settled.hold_forces[1].round(6).tolist()
    ([100.0, 0.0, -2.0], [0.0, 0.0, 1000.0])
    """
    pulls = first_guess(section)
    try:
        return newton(section, pulls)
    except NotSettled:
        total = sum(float(np.linalg.norm(piece.load * piece.length_m)) for span in section.spans for piece in span)
    for power in range(1, 10):
        supports = [replace(support, blur_N=total * 10.0**-power) for support in section.supports]
        settled = newton(replace(section, supports=supports), pulls)
        pulls = np.array([span.pull for span in settled.spans])
    return settled


def newton(section: Section, pulls: Array) -> Settled:
    """Newton from given pulls until the spans meet to 1e-15 of the line's length, or as near as rounding lets."""
    at = hang(section, pulls)
    scale = sum(span.length_m for span in at.spans)
    floor = 1e-10 if all(support.blur_N == 0.0 for support in section.supports) else 1e-8
    for _ in range(200):
        error = closing(at)
        size = float(np.linalg.norm(error))
        step = np.asarray(np.linalg.solve(hessian(at), -error.ravel()), dtype=np.float64).reshape(-1, 3)
        at = go_along(at, step, error)
        after = float(np.linalg.norm(closing(at)))
        if after <= 1e-15 * scale or (size <= floor * scale and after > 0.5 * size):
            return at
    raise NotSettled(f"closing error {size:g} m")


def first_guess(section: Section) -> Array:
    """The pulls of each span by itself between plumb clamps."""
    clamps = [support.plumb() for support in section.supports]
    pulls = [
        settle(section.material_of(k), span, clamps[k + 1] - clamps[k]).pull for k, span in enumerate(section.spans)
    ]
    return np.array(pulls)


def hang(section: Section, pulls: Array) -> Settled:
    """The spans hung with given pulls from where their holds then are; they need not meet."""
    spans = [
        Hung(section.material_of(k), span, pull)
        for k, (span, pull) in enumerate(zip(section.spans, pulls, strict=True))
    ]
    forces = -np.array(section.clamp_loads, dtype=np.float64)
    for k, hung in enumerate(spans):
        forces[k] -= hung.pull
        forces[k + 1] += hung.end_tension()
    clamps = [support.clamp(force) for support, force in zip(section.supports, forces, strict=True)]
    return Settled(section, spans, np.array(clamps), forces)


def closing(at: Settled) -> Array:
    """How far each span misses its far clamp, m, (n, 3): the gradient of -D."""
    return np.array([span.closing(at.clamps[k + 1] - at.clamps[k]) for k, span in enumerate(at.spans)])


def hessian(at: Settled) -> Array:
    """Second derivatives of -D in the pulls, m/N, (3 n, 3 n): flexibilities of spans and holds."""
    n = len(at.spans)
    blocks = np.zeros((n, n, 3, 3))
    for k, span in enumerate(at.spans):
        blocks[k, k] += span.flexibility()
    for j, support in enumerate(at.section.supports):
        give = support.flexibility(at.hold_forces[j])
        beside = [k for k in (j - 1, j) if 0 <= k < n]
        for a in beside:
            for b in beside:
                blocks[a, b] += give if a == b else -give
    return blocks.transpose(0, 2, 1, 3).reshape(3 * n, 3 * n)


def go_along(at: Settled, step: Array, error: Array) -> Settled:
    """Halve the step until D has risen or the spans miss by less: D is concave, so a short enough one does."""
    before, size = at.lower_bound_J(), float(np.linalg.norm(error))
    rise = -float(np.sum(step * error))
    pulls = np.array([span.pull for span in at.spans])
    for halvings in range(60):
        trial = hang(at.section, pulls + 0.5**halvings * step)
        if trial.lower_bound_J() >= before + 1e-4 * 0.5**halvings * rise:
            break
        if float(np.linalg.norm(closing(trial))) <= 0.9 * size and halvings == 0:
            break
    return trial
