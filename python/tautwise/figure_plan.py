"""The plan of a settled line, by Matplotlib: where it runs, and what it does to its supports across."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import cycle
from typing import Any

import numpy as np

from tautwise.errors import TautwiseError
from tautwise.figure_style import (
    CURVES,
    FAINT,
    INK,
    LEGEND_POINTS,
    STYLES,
    axes_or_new,
    carriage_marker,
    carriages_of,
    plain,
)
from tautwise.results_line import Equilibrium

LONGEST_SHARE = 0.12  # of the route: the arrow of the largest force


def plot_plan(lines: Sequence[Equilibrium], ax: Any = None, *, points: int = 60) -> Any:
    """Draw a settled line from above, in one or several conditions, true to scale.

    Parameters
    ----------
    lines: settled conditions of one project.
    ax: Matplotlib axes; None makes a figure.
    points: of the curve, for each span.

    Returns
    -------
    The axes: x (station, or east) to the right, y (offset, or north) up, m. Arrows show the horizontal force of the
    line on each support between the ends in the first condition.
    """
    if not lines:
        raise TautwiseError("no settled condition to draw")
    ax = axes_or_new(ax, (10.0, 5.0))
    first = lines[0]
    for line, colour, style in zip(lines, cycle(CURVES), cycle(STYLES)):
        x, y, _ = np.asarray(line.shape(points)["position_m"]).T
        ax.plot(x, y, color=colour, linestyle=style, linewidth=1.6, label=plain(line.name), zorder=5)
        for mark in carriages_of(line):
            ax.plot(*mark.position_m[:2], label="_carriage", **carriage_marker(colour))
    places = np.array([state.position_m[:2] for state in first.supports])
    ax.plot(*places.T, color=FAINT, linewidth=0.8, zorder=3)
    forces = _draw_forces(ax, first, places)
    for number, (state, place) in enumerate(zip(first.supports, places, strict=True)):
        ax.plot(*place, marker="o", color=INK, markerfacecolor="white", markersize=5, zorder=7)
        above = number in forces and forces[number][1] < 0.0  # out of the way of the arrow
        ax.annotate(plain(state.name), place, xytext=(0, 7 if above else -13), textcoords="offset points", ha="center",
                    fontsize=8, color=INK, zorder=8)  # fmt: skip
    scenery = first._line().scenery()
    turns = scenery.turns
    if forces:
        ax.plot([], [], linestyle="none", marker=r"$\rightarrow$", markersize=12, color=INK,
                label=f"horizontal force on a support, {plain(first.name)}")  # fmt: skip
    if scenery.title:
        ax.set_title(plain(scenery.title), loc="left", fontsize=11, fontweight="bold", color=INK)
    ax.set_xlabel("east, m" if turns else "station, m")
    ax.set_ylabel("north, m" if turns else "offset, m")
    ax.set_aspect("equal", adjustable="datalim")
    ax.margins(0.08, 0.25)
    ax.grid(True, color="#d9dde1", linewidth=0.6)
    ax.set_axisbelow(True)
    ax.legend(frameon=False, fontsize=LEGEND_POINTS, loc="best")
    return ax


def _draw_forces(ax: Any, line: Equilibrium, places: Any) -> dict[int, Any]:
    """Arrows from the supports between the ends, as long as their forces are large; those forces, N."""
    route = float(np.linalg.norm(np.diff(places, axis=0), axis=1).sum())
    ends = np.diff(places, axis=0) / np.linalg.norm(np.diff(places, axis=0), axis=1)[:, None]
    between = range(1, len(places) - 1)
    forces = {number: _plan_force(line, number, ends) for number in between}
    most = max((float(np.linalg.norm(force)) for force in forces.values()), default=0.0)
    for number, force in forces.items():
        if most > 0.0 and float(np.linalg.norm(force)) > 0.02 * most:
            tip = places[number] + force * LONGEST_SHARE * route / most
            arrow = {"arrowstyle": "-|>", "color": INK, "linewidth": 1.1, "shrinkA": 3, "shrinkB": 0}
            ax.annotate("", tip, xytext=places[number], arrowprops=arrow, zorder=6)
            ax.annotate(f"{float(np.linalg.norm(force)) / 1e3:.2f} kN", tip, xytext=(4, 0), fontsize=7.5, color=INK,
                        textcoords="offset points", va="center", zorder=8)  # fmt: skip
    return forces


def _plan_force(line: Equilibrium, number: int, directions: Any) -> Any:
    """Horizontal force on a support in the plan's axes; ahead halves the angle between its spans."""
    state = line.supports[number]
    ahead = directions[number - 1] + directions[number]
    ahead = ahead / np.linalg.norm(ahead) if line._line().scenery().turns else np.array([1.0, 0.0])
    return state.along_N * ahead + state.across_N * np.array([-ahead[1], ahead[0]])
