"""Spans coupled at their supports, in equilibrium: one dense Newton on the pulls of all spans.

Given the tension vector R_k at each span's start, statics gives the force F_j of each hold on the line, and
that the place of each clamp. The equilibrium is where every span ends at its clamp: the maximum of D. That it is
one is shown by the potential energy of the same shape, which must be no more than D.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from .quadrature import Array
from .span import AnyMaterial, Hung, NotSettled, Piece, settle


@dataclass(frozen=True)
class Support:
    """How the line is held: anchor (fixed), hanger (swinging link) or post (elastic in plan, rigid vertically)."""

    place: Array
    hold: str = "anchor"
    hanger_length_m: float = 0.0
    hanger_weight_N: float = 0.0
    stiffness_N_per_m: tuple[float, float] = (np.inf, np.inf)
    """Along and across the route; posts only."""
    blur_N: float = 0.0
    """Force below which a hanger's link counts as slack; see settle_section."""

    def plumb(self) -> Array:
        """Where the clamp is when nothing pulls it aside."""
        return np.asarray(
            self.place - np.array([0.0, 0.0, self.hanger_length_m if self.hold == "hanger" else 0.0])
        )

    def clamp(self, force: Array) -> Array:
        """Where the clamp is under the force of the hold on the line: a link pulls towards its fixing."""
        if self.hold == "hanger":
            return np.asarray(self.place - self.hanger_length_m * force / self.blurred(force))
        return np.asarray(self.place - self.softness() @ force)

    def flexibility(self, force: Array) -> Array:
        """- d clamp / d force, m/N, 3x3."""
        if self.hold != "hanger":
            return self.softness()
        size = self.blurred(force)
        return np.asarray(self.hanger_length_m / size * (np.eye(3) - np.outer(force, force) / size**2))

    def blurred(self, force: Array) -> float:
        """|F| without its kink at 0: sqrt(F^2 + blur^2)."""
        return math.hypot(float(np.linalg.norm(force)), self.blur_N)

    def softness(self) -> Array:
        """Give of a post, m/N, on the diagonal of a 3x3 matrix."""
        soft = 1.0 / np.array(self.stiffness_N_per_m) if self.hold == "post" else np.zeros(2)
        return np.asarray(np.diag([*soft, 0.0]))


@dataclass(frozen=True)
class Section:
    """The loads of one condition on the pieces of each span, and on the clamps themselves: N, (n + 1, 3)."""

    material: AnyMaterial | Sequence[AnyMaterial]
    spans: Sequence[Sequence[Piece]]
    supports: Sequence[Support]
    clamp_loads: Array

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

    def position_at(self, span: int, s: float) -> Array:
        """Place of the line at natural length s of a span."""
        return np.asarray(self.clamps[span] + self.spans[span].position_at(s))

    def lower_bound_J(self) -> float:
        """Complementary energy D, datum elevation 0: sum of F.a - W*_hold(F), less int W* ds."""
        total = -sum(span.conjugate_J() for span in self.spans)
        for support, force in zip(self.section.supports, self.hold_forces, strict=True):
            total += float(force @ support.place) - 0.5 * float(force @ support.softness() @ force)
            if support.hold == "hanger":
                total -= support.hanger_length_m * (support.blurred(force) - support.blur_N)
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
                    * float(piece.load @ self.position_at(k, start + half * (1.0 + point)))
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
        total = sum(
            float(np.linalg.norm(piece.load)) * piece.length_m for span in section.spans for piece in span
        )
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
