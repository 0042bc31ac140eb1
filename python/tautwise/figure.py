"""Pictures of a settled line and of a window, by Matplotlib, which is optional.

Colours and line styles both tell the curves apart, so that neither a colour-blind reader nor a black-and-white print
loses anything.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import cycle
from typing import Any

import numpy as np

from tautwise.errors import TautwiseError
from tautwise.figure_style import (
    CLEAR,
    CROSSING,
    CROSSING_EDGE,
    CURVES,
    EARTH,
    EARTH_EDGE,
    FAINT,
    INK,
    LEGEND_POINTS,
    STYLES,
    axes_or_new,
    carriage_marker,
    carriages_of,
    columns_of_legend,
    margins,
    plain,
)
from tautwise.figure_window import plot_window
from tautwise.places import Scenery
from tautwise.results_line import Equilibrium

__all__ = ["Tightest", "plot_line", "plot_window", "tightest_of"]

ASKED = "clearance asked for"
EXAGGERATIONS = (1, 1.5, 2, 2.5, 3, 4, 5, 6, 8, 10, 12, 15, 20, 25, 30, 40, 50)


@dataclass(frozen=True, slots=True)
class Tightest:
    """Where a line comes closest to what must be kept clear: above `below_m` at a station, `needs_m` asked for."""

    station_m: float
    line_m: float
    below_m: float
    needs_m: float
    condition: str

    @property
    def margin_m(self) -> float:
        """Clearance to spare; negative where the limit fails."""
        return self.line_m - self.below_m - self.needs_m


def plot_line(lines: Sequence[Equilibrium], ax: Any = None, *, chord: bool = False, points: int = 400) -> Any:
    """Draw a settled line over its ground, in one or several conditions.

    Parameters
    ----------
    lines: settled conditions of one project.
    ax: Matplotlib axes; None makes a figure.
    chord: also the straight lines from hold to hold of the first condition.
    points: of the curve, for each span.

    Returns
    -------
    The axes: stations in m to the right, elevations in m up, exaggerated by the number that the axis states.
    """
    if not lines:
        raise TautwiseError("no settled condition to draw")
    own = ax is None
    ax = axes_or_new(ax, (10.0, 5.0))
    if own:
        ax.figure.subplots_adjust(**margins(ax, _legend_labels(lines)))
    shapes = [(line, _in_profile(line.shape(points))) for line in lines]
    scenery = shapes[0][0]._line().scenery()
    others = _other_lines(lines)
    _frame(ax, scenery, shapes, others)
    if own:
        _fit_page(ax, _legend_labels(lines))
    _draw_ground(ax, scenery)
    _draw_crossings(ax, scenery)
    clamps = shapes[0][1][::points]
    _draw_supports(ax, scenery, clamps)
    if chord:
        ax.plot(clamps[:, 0], clamps[:, 2], color=FAINT, linewidth=0.8, zorder=3)
    for (line, position), colour, style in zip(shapes, cycle(CURVES), cycle(STYLES)):
        ax.plot(
            position[:, 0],
            position[:, 2],
            color=colour,
            linestyle=style,
            linewidth=1.8,
            label=plain(line.name),
            zorder=5,
        )
        for mark in carriages_of(line):
            ax.plot(mark.station_m, mark.position_m[2], label="_carriage", **carriage_marker(colour))
    for (label, places), style in zip(others.items(), cycle(STYLES)):
        ax.plot(*places.T, color=FAINT, linestyle=style, linewidth=1.0, zorder=4.5, label=plain(label))
    tightest = tightest_of(scenery, shapes)
    if tightest:
        _draw_tightest(ax, tightest)
    _draw_title(ax, scenery.title)
    _draw_legend(ax, own=own)
    return ax


def _in_profile(shape: dict[str, Any]) -> Any:
    """Places along a line with its stations for x, which on a route that turns are no coordinates."""
    return np.column_stack([shape["station_m"], np.asarray(shape["position_m"])[:, 1:]])


def tightest_of(scenery: Scenery, shapes: Sequence[tuple[Equilibrium, Any]]) -> Tightest | None:
    """The place of the least clearance to spare over ground and crossings, of all conditions; None without any."""
    found = [one for line, position in shapes for one in _clearances(scenery, line.name, position)]
    return min(found, key=lambda each: each.margin_m, default=None)


def _clearances(scenery: Scenery, condition: str, position: Any) -> list[Tightest]:
    x, z = position[:, 0], position[:, 2]
    tops = [(left, right, np.full_like(x, top), needs) for _, left, right, top, needs in scenery.crossings]
    if scenery.ground:
        ground = np.interp(x, *np.array(scenery.ground).T)
        stretches = scenery.ground_clearances or (() if tops else ((x[0], x[-1], 0.0),))
        tops += [(left, right, ground, needs) for left, right, needs in stretches]
    found = []
    for left, right, below, needs in tops:
        inside = np.flatnonzero((x >= left) & (x <= right))
        if inside.size:
            worst = inside[np.argmin((z - below)[inside])]
            found.append(Tightest(float(x[worst]), float(z[worst]), float(below[worst]), needs, condition))
    return found


def _other_lines(lines: Sequence[Equilibrium]) -> dict[str, Any]:
    """Label and (station, elevation) of the lines that limits keep from, in the conditions drawn."""
    drawn = (one for line in lines for one in line._line().scenery().others)
    return {label: np.array(places) for label, places in drawn}


def _frame(ax: Any, scenery: Scenery, shapes: Sequence[tuple[Equilibrium, Any]], others: dict[str, Any]) -> None:
    """Limits of the axes around everything, and a vertical exaggeration that is a round number."""
    heights = [position[:, 2] for _, position in shapes]
    heights += [np.array([elevation for _, _, elevation, _ in scenery.supports])]
    heights += [np.array([top, top + needs]) for *_, top, needs in scenery.crossings]
    stations = np.concatenate([position[:, 0] for _, position in shapes])
    left, right = float(stations.min()), float(stations.max())
    beside = (places[(places[:, 0] >= left) & (places[:, 0] <= right), 1] for places in others.values())
    heights += [elevations for elevations in beside if elevations.size]
    if scenery.ground:
        x, z = np.array(scenery.ground).T
        ends = np.interp([left, right], x, z)
        heights.append(np.concatenate([z[(x >= left) & (x <= right)], ends]))
    low, high = min(map(np.min, heights)), max(map(np.max, heights))
    room = max(high - low, 0.02 * (right - left))
    ax.set_xlim(left - 0.04 * (right - left), right + 0.04 * (right - left))
    ax.set_ylim(low - 0.12 * room, high + 0.22 * room)
    _exaggerate(ax)
    ax.set_xlabel("station, m")
    for side in ("top", "right"):
        ax.spines[side].set_visible(False)
    ax.grid(True, color="#d9dde1", linewidth=0.6)
    ax.set_axisbelow(True)


def _exaggerate(ax: Any) -> None:
    figure = ax.get_figure(root=False)
    box = ax.get_position(original=True)
    page = figure.bbox
    shape = 0.92 * (box.height * page.height) / (box.width * page.width)
    (left, right), (low, high) = ax.get_xlim(), ax.get_ylim()
    fits = shape * (right - left) / (high - low)
    factor = max((each for each in EXAGGERATIONS if each <= fits), default=EXAGGERATIONS[0])
    ax.set_aspect(factor, adjustable="box", anchor="SW")
    words = "true to scale" if factor == 1 else f"heights drawn {factor:g} times"
    ax.set_ylabel(f"elevation, m\n({words})")


def _fit_page(ax: Any, labels: list[str]) -> None:
    """Make the figure as high as its axes need at the exaggeration chosen."""
    (left, right), (low, high) = ax.get_xlim(), ax.get_ylim()
    wide, tall = ax.figure.get_size_inches()
    box = ax.get_position(original=True)
    needed = box.width * wide * ax.get_aspect() * (high - low) / (right - left)
    ax.figure.set_size_inches(wide, tall - box.height * tall + needed)
    ax.figure.subplots_adjust(**margins(ax, labels))


def _draw_ground(ax: Any, scenery: Scenery) -> None:
    if not scenery.ground:
        return
    x, z = np.array(scenery.ground).T
    deep = float(z.min()) - 1e3 * (float(np.ptp(z)) + 1.0)
    ax.fill_between(x, z, deep, facecolor=EARTH, edgecolor="none", zorder=1)
    ax.plot(x, z, color=EARTH_EDGE, linewidth=1.2, zorder=2)
    for number, (left, right, needs) in enumerate(scenery.ground_clearances):
        inside = np.unique(np.concatenate([[left, right], x[(x > left) & (x < right)]]))
        level = np.interp(inside, x, z) + needs
        label = ASKED if number == 0 else None
        ax.plot(inside, level, color=INK, linewidth=1.0, linestyle=":", zorder=3, label=label)


def _draw_crossings(ax: Any, scenery: Scenery) -> None:
    for name, left, right, top, needs in scenery.crossings:
        x, ground = _ground_between(scenery, left, right, top)
        edge = {"color": CROSSING_EDGE, "linewidth": 1.0, "zorder": 2.5}
        ax.fill_between(x, ground, top, where=ground <= top, interpolate=True, facecolor=CROSSING, zorder=1.5)
        ax.plot([left, right], [top, top], **edge)
        if needs > 0.0:
            known = ax.get_legend_handles_labels()[1]
            dotted = {"color": INK, "linewidth": 1.0, "linestyle": ":", "zorder": 3}
            label = None if ASKED in known else ASKED
            ax.plot([left, left, right, right], [top, top + needs, top + needs, top], label=label, **dotted)
        low = min(top, float(ground.min()))
        ax.annotate(plain(name), ((left + right) / 2, low), xytext=(0, -4), textcoords="offset points", ha="center",
                    va="top", fontsize=8, color=INK, zorder=6)  # fmt: skip


def _ground_between(scenery: Scenery, left: float, right: float, top: float) -> tuple[Any, Any]:
    """Stations and ground between two stations; without a profile a thin slab below `top`."""
    if not scenery.ground:
        return np.array([left, right]), np.full(2, top)
    x, z = np.array(scenery.ground).T
    stations = np.concatenate([[left], x[(x > left) & (x < right)], [right]])
    return stations, np.interp(stations, x, z)


def _draw_supports(ax: Any, scenery: Scenery, clamps: Any) -> None:
    symbols = {"anchor": "s", "hanger": "o", "post": "^", "sheave": "D"}
    for (name, station, elevation, hold), (x, _, z) in zip(scenery.supports, clamps, strict=True):
        if scenery.ground:
            foot = float(np.interp(station, *np.array(scenery.ground).T))
            ax.plot([station, station], [foot, elevation], color=INK, linewidth=2.2, solid_capstyle="butt", zorder=4)
        if hold in ("hanger", "sheave"):  # a fixed sheave has no link to see
            ax.plot([station, x], [elevation, z], color=INK, linewidth=1.2, zorder=6)
        ax.plot([x], [z], marker=symbols[hold], color=INK, markerfacecolor="white", markersize=5, zorder=7)
        ax.annotate(plain(name), (station, max(elevation, z)), xytext=(0, 7), textcoords="offset points", ha="center",
                    fontsize=8, color=INK, zorder=7)  # fmt: skip


def _draw_tightest(ax: Any, found: Tightest) -> None:
    height = found.line_m - found.below_m
    colour = CLEAR if found.margin_m < 0.0 else INK
    arrow = {"arrowstyle": "<->", "color": colour, "linewidth": 1.3, "shrinkA": 0, "shrinkB": 0}
    x = found.station_m
    ax.annotate("", (x, found.below_m), xytext=(x, found.line_m), arrowprops=arrow, zorder=8)
    box = {"facecolor": "white", "edgecolor": "none", "alpha": 0.8, "pad": 0.8}
    ax.annotate(f"{height:.2f} m", (x, found.below_m + 0.45 * height), xytext=(5, 0), textcoords="offset points",
                va="center", fontsize=8, color=colour, bbox=box, zorder=9)  # fmt: skip
    needs = f" ({found.needs_m:.4g} m asked for)" if found.needs_m else ""
    words = f"Tightest clearance: {height:.2f} m{needs}, station {x:.1f} m, {found.condition}"
    ax.set_title(plain(words), loc="left", fontsize=9, color=colour)


def _draw_title(ax: Any, title: str) -> None:
    if title:
        ax.annotate(plain(title), (0.0, 1.0), xycoords="axes fraction", xytext=(0, 22), textcoords="offset points",
                    fontsize=11, fontweight="bold", color=INK, annotation_clip=False)  # fmt: skip


def _legend_labels(lines: Sequence[Equilibrium]) -> list[str]:
    return [line.name for line in lines] + list(_other_lines(lines)) + [ASKED]


def _draw_legend(ax: Any, *, own: bool) -> None:
    """The legend below the axes, read along its rows; what is asked for comes last."""
    handles, labels = ax.get_legend_handles_labels()
    if not labels:
        return
    count = columns_of_legend(ax, labels)
    order = sorted(range(len(labels)), key=lambda number: labels[number] == ASKED)
    order = [number for column in range(count) for number in order[column::count]]
    style = {"ncols": count, "frameon": False, "fontsize": LEGEND_POINTS, "handlelength": 3.2}
    chosen = [handles[number] for number in order], [labels[number] for number in order]
    if own:
        ax.figure.legend(*chosen, loc="lower center", bbox_to_anchor=(0.5, 0.01), **style)
    else:
        ax.legend(*chosen, loc="upper center", bbox_to_anchor=(0.5, -0.16), **style)
