"""A span under a load per horizontal metre, as the differential equation that it is.

Per natural metre the line carries w + p |t_xy|/|t| W*'(|t|): the second part is p times how far the line gets in plan.
So dt/ds = -(w + p ...) and dr/ds = t/|t| W*'(|t|), integrated by Runge and Kutta's classical rule, and the pull is
found that brings the end where it must be.
"""

from __future__ import annotations

import numpy as np

from .quadrature import Array
from .span import Material, NotSettled

STEPS = 2000


def rates(material: Material, load: Array, run_load: Array, state: Array) -> Array:
    """d(r, t)/ds."""
    tension = state[3:]
    size = float(np.linalg.norm(tension))
    ahead = tension / size * material.stretch(size)
    return np.concatenate([ahead, -load - run_load * np.hypot(ahead[0], ahead[1])])


def hang(material: Material, load: Array, run_load: Array, length_m: float, pull: Array) -> Array:
    """Places and tension vectors along the line, (STEPS + 1, 6), from the origin."""
    states = [np.concatenate([np.zeros(3), pull])]
    h = length_m / STEPS
    for _ in range(STEPS):
        now = states[-1]
        a = rates(material, load, run_load, now)
        b = rates(material, load, run_load, now + 0.5 * h * a)
        c = rates(material, load, run_load, now + 0.5 * h * b)
        d = rates(material, load, run_load, now + h * c)
        states.append(now + h / 6.0 * (a + 2.0 * b + 2.0 * c + d))
    return np.array(states)


def settle(material: Material, load: Array, run_load: Array, length_m: float, chord: Array, pull: Array) -> Array:
    """The hung states of a span between two points `chord` apart, from a first pull: Newton with differences.

    A line that weighs next to nothing under a load per run is a parabola, sag p L^2 / (8 H):

    >>> down = np.array([0.0, 0.0, -1.0])
    >>> chord, pull = np.array([100.0, 0.0, 0.0]), np.array([7e3, 0.0, -1e3])
    >>> states = settle(Material(1e9), 0.0 * down, 20.0 * down, 100.3, chord, pull)
    >>> bool(abs(-states[STEPS // 2, 2] / (20.0 * 100.0**2 / (8.0 * states[0, 3])) - 1.0) < 1e-10)
    True
    """
    scale = float(np.linalg.norm(chord))
    for _ in range(50):
        states = hang(material, load, run_load, length_m, pull)
        error = states[-1, :3] - chord
        if float(np.linalg.norm(error)) < 1e-13 * scale:
            return states
        step = 1e-6 * float(np.linalg.norm(pull))
        slope = np.array(
            [
                (hang(material, load, run_load, length_m, pull + aside)[-1, :3] - states[-1, :3]) / step
                for aside in step * np.eye(3)
            ]
        ).T
        change = np.asarray(np.linalg.solve(slope, -error), dtype=np.float64)
        pull = pull + change / max(1.0, 2.0 * float(np.linalg.norm(change)) / float(np.linalg.norm(pull)))
    if float(np.linalg.norm(error)) < 1e-11 * scale:
        return states
    raise NotSettled(f"closing error {np.linalg.norm(error):g} m")
