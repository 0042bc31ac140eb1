"""One span of line, found by its complementary energy, with every integral taken numerically.

Along the natural length s the tension vector is t(s) = R - (load met so far); it points towards growing s,
and r(s) = r0 + int t/|t| (1 + e0 + |t|/EA) ds. The equilibrium is the R whose line ends where it must.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from functools import partial
from itertools import pairwise
from typing import TypeVar

import numpy as np

from .curved import CurvedMaterial
from .quadrature import Array, PieceLoad, golden, nodes, panels

Number = TypeVar("Number", float, Array)


class NotSettled(ArithmeticError):
    """No equilibrium was found."""


@dataclass(frozen=True)
class Material:
    """A linear line that carries no compression.

    >>> Material(stiffness_N=1e6, strain=1e-3).stretch(2000.0)
    1.003
    """

    stiffness_N: float
    strain: float = 0.0
    """e0: thermal expansion and creep."""

    def stretch(self, tension: Number) -> Number:
        """Stretched over natural length at a tension: W*'(T)."""
        return 1.0 + self.strain + tension / self.stiffness_N

    def stored(self, stretch: Array) -> Array:
        """Energy of stretch per natural metre, J/m: W(L) = EA/2 (L - 1 - e0)+^2."""
        return np.asarray(0.5 * self.stiffness_N * np.maximum(0.0, stretch - 1.0 - self.strain) ** 2)

    def conjugate(self, tension: Number) -> Number:
        """Complementary energy per natural metre, J/m: W*(T) = T (1 + e0) + T^2 / (2 EA)."""
        return tension * (1.0 + self.strain) + tension**2 / (2.0 * self.stiffness_N)

    def compliance(self, tension: Number) -> Number:
        """dL/dT."""
        return 0.0 * tension + 1.0 / self.stiffness_N

    def kinks_N(self) -> list[float]:
        """Tensions at which the law bends sharply: none."""
        return []


AnyMaterial = Material | CurvedMaterial


def smooth(material: AnyMaterial, tension: Array, load: PieceLoad, length: float) -> list[float]:
    """Panels of a stretch that are cut where |t| passes a kink of the law, found between samples by bisection."""
    edges = panels(tension, load, length)

    def above(s: float, kink: float) -> float:
        return float(np.linalg.norm(tension - load * s)) - kink

    cuts: list[float] = []
    for kink in material.kinks_N():
        places = [float(s) for a, b in pairwise(edges) for s in np.linspace(a, b, 65)]
        for start, end in pairwise(places):
            low, high = start, end
            if above(low, kink) * above(high, kink) < 0.0:
                for _ in range(80):
                    middle = 0.5 * (low + high)
                    low, high = (middle, high) if above(low, kink) * above(middle, kink) > 0.0 else (low, middle)
                cuts.append(0.5 * (low + high))
    return sorted([*edges, *cuts])


@dataclass(frozen=True)
class Piece:
    """A stretch of natural length under a uniform or growing load (N/m), with a point force (N) at its end."""

    length_m: float
    load: PieceLoad
    force: Array = field(default_factory=lambda: np.zeros(3))


@dataclass(frozen=True)
class Hung:
    """A span hung from its start with a given pull; positions are measured from the start."""

    material: AnyMaterial
    pieces: Sequence[Piece]
    pull: Array

    @property
    def length_m(self) -> float:
        """Natural length."""
        return float(sum(piece.length_m for piece in self.pieces))

    def starts(self) -> list[tuple[float, Array, Piece]]:
        """Natural length and tension vector where each piece starts, and the piece."""
        found, s, tension = [], 0.0, self.pull
        for piece in self.pieces:
            found.append((s, tension, piece))
            s, tension = s + piece.length_m, tension - piece.load * piece.length_m - piece.force
        return found

    def end_tension(self) -> Array:
        """Tension vector at the span's end: R less all loads."""
        total = sum((piece.load * piece.length_m + piece.force for piece in self.pieces), np.zeros(3))
        return self.pull - total

    def tension_at(self, s: float) -> Array:
        """Tension vector at natural length s, before a point force that acts there."""
        for start, tension, piece in reversed(self.starts()):
            if s > start or start == 0.0:
                return tension - piece.load * (s - start)
        raise ValueError("s lies before the span")

    def position_at(self, s: float) -> Array:
        """Position at natural length s."""
        total = np.zeros(3)
        for start, tension, piece in self.starts():
            if s > start:
                within = min(s - start, piece.length_m)
                total = total + displacement(self.material, tension, piece.load, within)
        return total

    def positions_at(self, places: Array) -> Array:
        """The same for many natural lengths in ascending order; shape (n, 3)."""
        found = np.zeros((len(places), 3))
        base = np.zeros(3)
        for start, tension, piece in self.starts():
            edges = np.array(smooth(self.material, tension, piece.load, piece.length_m))
            here = (places > start) & (places <= start + piece.length_m)
            within = np.unique(np.concatenate([edges, places[here] - start]))
            moved = displacements(self.material, tension, piece.load, within)
            found[here] = base + moved[np.searchsorted(within, places[here] - start)]
            base = base + moved[-1]
        return found

    def closing(self, chord: Array) -> Array:
        """How far the span's end misses its place, m: the gradient of -D."""
        return self.position_at(self.length_m) - chord

    def flexibility(self) -> Array:
        """Change of the end's place per change of the pull, m/N, 3x3: the Hessian of -D."""
        total = np.zeros((3, 3))
        for _, tension, piece in self.starts():
            total += flexibility(self.material, tension, piece.load, piece.length_m)
        return total

    def conjugate_J(self) -> float:
        """int W* ds."""
        return self._integral(self.material.conjugate)

    def stored_J(self) -> float:
        """int W ds of the stretch that the tension makes."""
        return self._integral(lambda size: self.material.stored(self.material.stretch(size)))

    def line_length_m(self) -> float:
        """Stretched length."""
        return self._integral(self.material.stretch)

    def _integral(self, of_tension: Callable[[Array], Array]) -> float:
        total = 0.0
        for _, tension, piece in self.starts():
            places, weights = nodes(smooth(self.material, tension, piece.load, piece.length_m))
            sizes = np.linalg.norm(tension - piece.load * places[:, None], axis=1)
            total += float(weights @ of_tension(sizes))
        return total

    def extreme(self, direction: Array) -> tuple[float, float]:
        """Greatest direction . r over the span, and the natural length where it is.

        Within a piece it has one peak or none: samples, then golden section.
        """
        best = (-math.inf, 0.0)
        for start, tension, piece in self.starts():
            base = float(direction @ self.position_at(start))
            height = partial(height_along, self.material, tension, piece.load, direction)
            samples = self.samples(tension, piece)
            heights = displacements(self.material, tension, piece.load, samples) @ direction
            peak = int(np.argmax(heights))
            near = samples[max(peak - 2, 0)], samples[min(peak + 2, len(samples) - 1)]
            within, most = golden(height, float(near[0]), float(near[1]))
            if heights[peak] >= most:
                within, most = float(samples[peak]), float(heights[peak])
            best = max(best, (base + most, start + within))
        return best

    @staticmethod
    def samples(tension: Array, piece: Piece) -> Array:
        """64 places in each panel of a piece, natural lengths from its start."""
        edges = panels(tension, piece.load, piece.length_m)
        return np.concatenate([np.linspace(a, b, 65) for a, b in pairwise(edges)])


def height_along(material: AnyMaterial, tension: Array, load: PieceLoad, direction: Array, s: float) -> float:
    """direction . (r(s) - r(0)) of a stretch, m."""
    return float(direction @ displacement(material, tension, load, s))


def displacement(material: AnyMaterial, tension: Array, load: PieceLoad, length: float) -> Array:
    """r(length) - r(0) of a stretch that starts with a tension vector, m.

    >>> bar = displacement(Material(1e6), np.array([1000.0, 0.0, 0.0]), np.zeros(3), 10.0)
    >>> bar.round(12).tolist()
    [10.01, 0.0, 0.0]
    """
    if length <= 0.0:
        return np.zeros(3)
    places, weights = nodes(smooth(material, tension, load, length))
    t = tension - load * places[:, None]
    size = np.linalg.norm(t, axis=1)
    return np.asarray((weights * material.stretch(size) / size) @ t)


def displacements(material: AnyMaterial, tension: Array, load: PieceLoad, lengths: Array) -> Array:
    """The same for many lengths that grow from 0 in steps shorter than a panel; shape (n, 3)."""
    places, weights = nodes([float(s) for s in lengths])
    t = tension - load * places[:, None]
    size = np.linalg.norm(t, axis=1)
    parts = ((weights * material.stretch(size) / size)[:, None] * t).reshape(len(lengths) - 1, -1, 3)
    return np.vstack([np.zeros(3), np.cumsum(parts.sum(axis=1), axis=0)])


def flexibility(material: AnyMaterial, tension: Array, load: PieceLoad, length: float) -> Array:
    """d displacement / d tension, m/N: int [L/|t| (I - tt'/|t|^2) + dL/dT tt'/|t|^2] ds.

    >>> matrix = flexibility(Material(1e6), np.array([1000.0, 0.0, 0.0]), np.zeros(3), 10.0)
    >>> matrix.diagonal().round(9).tolist()
    [1e-05, 0.01001, 0.01001]
    """
    places, weights = nodes(smooth(material, tension, load, length))
    t = tension - load * places[:, None]
    size = np.linalg.norm(t, axis=1)
    across = weights * material.stretch(size) / size
    along = weights * material.compliance(size) - across
    return np.asarray(across.sum() * np.eye(3) + np.einsum("n,ni,nj->ij", along / size**2, t, t))


def lower_bound(hung: Hung, chord: Array) -> float:
    """D(R) = t(S).chord - int W* ds, J, datum the span's start: no shape's potential energy is less."""
    return float(hung.end_tension() @ chord) - hung.conjugate_J()


def settle(material: AnyMaterial, pieces: Sequence[Piece], chord: Array, start: Array | None = None) -> Hung:
    """The equilibrium between two points `chord` apart, by damped Newton on the closing error.

    Case I(a) of the published checks:

    >>> pieces = [Piece(300.8, np.array([0.0, 0.0, -15.97]))]
    >>> hung = settle(Material(34.7e6), pieces, np.array([300.0, 0.0, 0.0]))
    >>> hung.pull.round(5).tolist()
    [17368.80766, 0.0, -2401.888]
    """
    hung = Hung(material, pieces, first_pull(material, pieces, chord) if start is None else start)
    scale = float(np.linalg.norm(chord)) + hung.length_m
    error = hung.closing(chord)
    for _ in range(200):
        step = np.asarray(np.linalg.solve(hung.flexibility(), -error), dtype=np.float64)
        hung, new_error = go_along(hung, chord, step, error)
        small = float(np.linalg.norm(step)) <= 1e-13 * float(np.linalg.norm(hung.pull))
        stuck = float(np.linalg.norm(new_error)) >= 0.5 * float(np.linalg.norm(error)) and near(error, scale)
        error = new_error
        if (small or stuck) and near(error, scale):
            return hung
    raise NotSettled(f"closing error {np.linalg.norm(error):g} m")


def near(error: Array, scale: float) -> bool:
    """Whether a closing error is within 1e-11 of the span's size."""
    return bool(np.linalg.norm(error) <= 1e-11 * scale)


def go_along(hung: Hung, chord: Array, step: Array, error: Array) -> tuple[Hung, Array]:
    """Halve the step until D has risen or the end is closer: D is concave, so a short enough step does."""
    before = lower_bound(hung, chord)
    rise = -float(step @ error)
    factor = 1.0
    for _ in range(80):
        trial = Hung(hung.material, hung.pieces, hung.pull + factor * step)
        trial_error = trial.closing(chord)
        closer = np.linalg.norm(trial_error) <= 0.9 * np.linalg.norm(error)
        if closer or lower_bound(trial, chord) >= before + 1e-4 * factor * rise:
            return trial, trial_error
        factor *= 0.5
    return trial, trial_error


def first_pull(material: AnyMaterial, pieces: Sequence[Piece], chord: Array) -> Array:
    """The best D among pulls along the chord of 1e-6 to 1e2 times all loads and EA strained by the chord."""
    total = sum((piece.load * piece.length_m + piece.force for piece in pieces), np.zeros(3))
    along = chord / np.linalg.norm(chord)
    length = sum(piece.length_m for piece in pieces)
    taut = material.stiffness_N * max(0.0, float(np.linalg.norm(chord)) / length - 1.0 - material.strain)
    sizes = [float(np.linalg.norm(total)) * 10.0**power for power in range(-6, 5)] + [
        taut,
        1.1 * taut,
    ]
    pulls = [size * along + 0.5 * total for size in sizes if size > 0.0]
    if not pulls:
        raise NotSettled("the line carries no load and no tension")
    return max(pulls, key=lambda pull: lower_bound(Hung(material, pieces, pull), chord))


def length_at(material: AnyMaterial, load: Array, chord: Array, horizontal_N: float) -> tuple[float, Array]:
    """Natural length of a span strung to a horizontal tension, m, and the pull at its start.

    The load is straight down. Newton on (length, vertical tension) from the inextensible catenary, whose
    length is sqrt(rise^2 + (2 c sinh(run / 2c))^2), c = H/w.

    >>> load, chord = np.array([0.0, 0.0, -15.97]), np.array([300.0, 0.0, 0.0])
    >>> length, pull = length_at(Material(34.7e6), load, chord, 17368.8076566)
    >>> round(length, 9)
    300.8
    """
    run, rise = float(np.hypot(chord[0], chord[1])), float(chord[2])
    plan = np.array([chord[0], chord[1], 0.0]) / run
    weight = -float(load[2])
    bend = 0.5 * weight * run / horizontal_N
    arc = run * (np.sinh(bend) / bend if bend > 0.0 else 1.0)
    length = float(np.hypot(rise, arc)) / (material.stretch(horizontal_N))
    vertical = horizontal_N * rise / run - 0.5 * weight * float(np.hypot(rise, arc))
    if bend > 0.0:
        vertical = horizontal_N * float(np.sinh(np.arcsinh(rise / arc) - bend))
    for _ in range(60):
        hung = Hung(material, [Piece(length, load)], horizontal_N * plan + np.array([0.0, 0.0, vertical]))
        error = hung.closing(chord)
        far = hung.end_tension()
        size = float(np.linalg.norm(far))
        grow = far / size * material.stretch(size)
        lift = hung.flexibility()[:, 2]
        matrix = np.array([[grow @ plan, lift @ plan], [grow[2], lift[2]]])
        change = np.linalg.solve(matrix, -np.array([error @ plan, error[2]]))
        length, vertical = max(length + float(change[0]), 0.5 * length), vertical + float(change[1])
        if abs(change[0]) <= 4e-16 * length or (abs(change[0]) <= 1e-12 * length and near(error, length)):
            return length, horizontal_N * plan + np.array([0.0, 0.0, vertical])
    raise NotSettled("no natural length for this horizontal tension")
