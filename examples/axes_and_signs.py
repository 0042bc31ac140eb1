"""Draws axes_and_signs.png: the axes, the measures of a span and the signs of forces, on a line that is really settled.

    python examples/axes_and_signs.py [FILE]

Colours and line styles both tell things apart, so that the picture reads without colour too.
"""

from __future__ import annotations

import sys
from io import BytesIO
from pathlib import Path

import matplotlib as mpl

mpl.use("Agg")
import matplotlib.pyplot as plt
import numpy as np
from matplotlib.patches import Arc, FancyArrowPatch
from matplotlib.patheffects import withStroke
from PIL import Image

import tautwise as tw

HERE = Path(__file__).parent
LINE, FORCE, WIND, MEASURE, INK, FAINT, EARTH, EARTH_EDGE = (
    "#1b4f8a", "#c8601a", "#12807a", "#22282e", "#22282e", "#8b949c", "#e4dccb", "#8c7b5b",
)  # fmt: skip
GROUND = ((16.0, 7.8), (20.0, 8.0), (66.0, 3.0), (130.0, 9.0), (196.0, 5.0), (226.0, 6.0))
WIND_DEG = 70.0
HALO = [withStroke(linewidth=3.0, foreground="white")]

SUPPORTS = [
    {"name": "A", "station": "20 m", "elevation": "29 m"},
    {"name": "B", "station": "120 m", "elevation": "46 m", "hold": "hanger", "length": "8 m", "weight": "100 N"},
    {"name": "C", "station": "200 m", "elevation": "35 m", "offset": "-7 m"},
]


def settled() -> tw.Equilibrium:
    """A slack line in a strong wind, so that everything can be seen at true scale."""
    project = tw.Project(
        line={"diameter": "20 mm", "weight": "12 N/m", "stiffness": "20 MN"},
        support=SUPPORTS,
        stringing={"temperature": "15 degC", "horizontal_tension": "1.3 kN"},
        condition=[
            {"name": "wind", "temperature": "15 degC", "wind": {"pressure": "500 Pa", "angle": f"{WIND_DEG} deg"}}
        ],
    )
    return project.settle("wind")


# --- pieces of a drawing


def label(ax, at, text, *, color=INK, ha="center", va="center", size=9.5, **how):
    ax.text(*at, text, color=color, ha=ha, va=va, fontsize=size, path_effects=HALO, zorder=9, **how)


def beside(point, right, up):
    return np.asarray(point) + np.array([right, up])


def arrow(ax, start, end, *, color=INK, style="-|>", width=1.4, scale=11.0, curve=0.0, dash="-", order=6.0):
    ax.add_patch(
        FancyArrowPatch(
            start, end, arrowstyle=style, mutation_scale=scale, color=color, linewidth=width, linestyle=dash,
            shrinkA=0.0, shrinkB=0.0, connectionstyle=f"arc3,rad={curve}", zorder=order,
        )
    )  # fmt: skip


def measure(ax, start, end, text, at, *, ends=(), ha="center", va="center"):
    """A dimension: a double arrow, faint lines from `ends` to it, its name at `at`."""
    for point, target in zip(ends, (start, end), strict=False):
        ax.plot(*zip(point, target, strict=True), color=FAINT, linewidth=0.7, zorder=2)
    arrow(ax, start, end, color=MEASURE, style="<|-|>", width=0.9, scale=8.0)
    box = {"facecolor": "white", "edgecolor": "none", "pad": 1.5} if ha == "center" else None
    label(ax, at, text, ha=ha, va=va, bbox=box)


def axes_cross(ax, origin, size, right, up, third, *, mirrored=False, towards=False):
    """Two axes of the view, and the third as a dot towards the reader or a cross away from the reader."""
    x, y = origin
    sign = -1.0 if mirrored else 1.0
    arrow(ax, (x, y), (x + sign * size, y), width=1.8)
    arrow(ax, (x, y), (x, y + size), width=1.8)
    label(ax, (x + sign * size * 1.08, y), right, ha="right" if mirrored else "left", weight="bold")
    label(ax, (x, y + size * 1.06), up, va="bottom", weight="bold")
    ax.plot(x, y, "o", markersize=9, markerfacecolor="white", markeredgecolor=INK, zorder=7)
    ax.plot(x, y, "." if towards else "x", markersize=4.5, color=INK, zorder=8)
    label(ax, (x + sign * size * 0.05, y - size * 0.32), third, ha="right" if mirrored else "left", va="top", size=8.5)


def title(ax, text, note):
    lines = 1 + note.count("\n")
    ax.set_title(text, loc="left", fontsize=11, fontweight="bold", color=INK, pad=5.0 + 11.5 * lines)
    ax.text(0.0, 1.0, note, transform=ax.transAxes, fontsize=8.8, color="#4b5560", va="bottom", linespacing=1.25)
    ax.set_aspect("equal")
    ax.axis("off")


def along(path, share):
    """Point and direction at a share of a drawn path's length."""
    steps = np.hypot(*np.diff(path, axis=0).T)
    run = np.concatenate([[0.0], np.cumsum(steps)]) / steps.sum()
    point = np.array([np.interp(share, run, path[:, k]) for k in (0, 1)])
    ahead = np.array([np.interp(min(share + 0.01, 1.0), run, path[:, k]) for k in (0, 1)])
    step = ahead - point
    return point, step / np.hypot(*step)


# --- the views


def side_view(ax, line, path):
    side = path[:, [0, 2]]
    first, clamp, last = (np.array(state.position_m)[[0, 2]] for state in line.supports)
    ground = np.array(GROUND)
    ax.fill_between(ground[:, 0], ground[:, 1], -1.0, color=EARTH, zorder=0)
    ax.plot(*ground.T, color=EARTH_EDGE, linewidth=1.2, zorder=1)
    ax.plot([14.0, 226.0], [0.0, 0.0], color=FAINT, linewidth=0.8, linestyle=":", zorder=1)
    for state in SUPPORTS:
        station, top = float(state["station"].split()[0]), float(state["elevation"].split()[0])
        ax.plot([station] * 2, [np.interp(station, *ground.T), top], color=FAINT, linewidth=3.0, zorder=1)
        ax.plot(station, top, "s", color=INK, markersize=5, zorder=7)
    ax.plot([120.0, clamp[0]], [46.0, clamp[1]], color=INK, linewidth=1.4, zorder=4)
    ax.plot(*side.T, color=LINE, linewidth=2.2, zorder=5)
    ax.plot(*clamp, "o", color=LINE, markersize=5, zorder=7)
    ax.plot(*zip(first, clamp, strict=True), color=FAINT, linewidth=1.0, linestyle=(0, (6, 3)), zorder=3)
    side_measures(ax, line.spans[0], first, clamp)
    side_words(ax, line.spans[0], first, last, side)
    axes_cross(ax, (-13.0, 0.0), 13.0, "x  ahead", "z  up", "y  left:\naway\nfrom you")
    ax.set(xlim=(-16.0, 229.0), ylim=(-14.5, 60.0))
    title(ax, "From the side", "elevation z over station x; at the hanger B the line is held at the hanger's lower end")


def side_measures(ax, span, first, clamp):
    top = 56.0
    measure(ax, (first[0], top), (clamp[0], top), "span", (70.0, top), ends=(beside(first, 0.0, 3.0), (clamp[0], 52.0)))
    measure(
        ax, (10.0, first[1]), (10.0, clamp[1]), "rise", (8.5, 0.5 * (first[1] + clamp[1])),
        ends=(first, clamp), ha="right",
    )  # fmt: skip
    x = span.sag_station_m
    chord = np.interp(x, [first[0], clamp[0]], [first[1], clamp[1]])
    measure(ax, (x, chord), (x, chord - span.sag_m), "sag", (x + 1.8, chord - 0.42 * span.sag_m), ha="left")
    measure(ax, (208.0, 0.0), (208.0, 35.0), "elevation", (210.0, 20.0), ends=((200.0, 0.0), (200.0, 35.0)), ha="left")
    measure(ax, (0.0, -6.0), (200.0, -6.0), "station", (100.0, -6.0), ends=((0.0, 0.0), (200.0, 0.0)))


def side_words(ax, span, first, last, side):
    low = (span.low_point.station_m, span.low_point.elevation_m)
    ax.plot(*low, "v", color=LINE, markersize=7, zorder=7)
    label(ax, (low[0], low[1] - 3.8), "low point", color=LINE)
    label(ax, (45.0, 33.4), "chord", color="#4b5560", size=9, rotation=5)
    point, step = along(side[side[:, 0] > 130.0], 0.32)
    normal = np.array([-step[1], step[0]])
    begin = point + 2.8 * normal
    arrow(ax, begin, begin + 20.0 * step, color=LINE, width=1.4)
    label(ax, begin + 10.0 * step + 6.0 * normal, "natural length s,\ncounted from A", color=LINE)
    for name, at in (("A", beside(first, 4.0, 3.2)), ("B", (124.5, 47.5)), ("C", beside(last, -1.0, 4.5))):
        label(ax, at, name, weight="bold", size=11)


def plan_view(ax, line, path):
    plan = path[:, :2]
    first, clamp, last = (np.array(state.position_m)[:2] for state in line.supports)
    ax.plot([-2.0, 226.0], [0.0, 0.0], color=FAINT, linewidth=0.8, linestyle=":", zorder=1)
    label(ax, (226.0, 1.8), "route, y = 0", color="#4b5560", ha="right", va="bottom", size=8.8)
    for a, b in ((first, clamp), (clamp, last)):
        ax.plot(*zip(a, b, strict=True), color=FAINT, linewidth=1.0, linestyle=(0, (6, 3)), zorder=3)
    ax.plot([120.0, clamp[0]], [0.0, clamp[1]], color=INK, linewidth=1.4, zorder=4)
    for x, y in ((20.0, 0.0), (120.0, 0.0), (200.0, -7.0)):
        ax.plot(x, y, "s", color=INK, markersize=5, zorder=7)
    ax.plot(*plan.T, color=LINE, linewidth=2.2, zorder=5)
    ax.plot(*clamp, "o", color=LINE, markersize=5, zorder=7)
    for name, at in (("A", (20.0, 4.6)), ("B", (120.0, -4.6)), ("C", (196.0, -10.0))):
        label(ax, at, name, weight="bold", size=11)
    measure(ax, (200.0, 0.0), (200.0, -7.0), "offset, negative:\nto the right", (203.0, -5.6), ha="left")
    plan_blowout(ax, line.spans[0], plan, first, clamp)
    plan_wind(ax)
    axes_cross(ax, (-13.0, -17.0), 13.0, "x  ahead", "y  left", "z  up: towards you", towards=True)
    ax.set(xlim=(-16.0, 229.0), ylim=(-24.0, 12.0))
    note = "offset y over station x; the wind angle is counted anticlockwise from the span, support to support"
    title(ax, "From above", note)


def plan_blowout(ax, span, plan, first, clamp):
    ahead = (clamp - first) / np.hypot(*(clamp - first))
    left = np.array([-ahead[1], ahead[0]])
    own = plan[plan[:, 0] < clamp[0]] - first
    foot = first + ahead * (own[np.argmax(own @ left)] @ ahead)
    tip = foot + span.blowout_m * left
    measure(ax, foot, tip, "blow-out", beside(0.5 * (foot + tip), 1.8, -0.2), ha="left")


def plan_wind(ax):
    corner, angle = np.array([28.0, -19.5]), np.radians(WIND_DEG)
    arrow(ax, corner, corner + 17.0 * np.array([np.cos(angle), np.sin(angle)]), color=WIND, width=2.4, scale=15.0)
    ax.plot([28.0, 45.0], [-19.5, -19.5], color=FAINT, linewidth=1.0, linestyle=(0, (6, 3)))
    ax.add_patch(Arc(corner, 17.0, 17.0, theta1=0.0, theta2=WIND_DEG, color=WIND, linewidth=1.4))
    at = corner + 10.5 * np.array([np.cos(0.5 * angle), np.sin(0.5 * angle)])
    label(ax, at, f"wind angle, here {WIND_DEG:.0f}°", color=WIND, ha="left")
    arrow(ax, (84.0, -21.0), (84.0, -8.0), color=WIND, width=2.0)
    force = "its force on the line: square across,\n90° is full force, to the left"
    label(ax, (87.0, -14.5), force, color=WIND, ha="left")


def swung_span(ax):
    """A span's middle seen along it: sag, blow-out and slant sag of a line under weight and wind."""
    across, down = 4.2, 6.6
    ax.plot(0.0, 0.0, "+", color=INK, markersize=11, markeredgewidth=1.6, zorder=7)
    label(ax, (0.6, 0.3), "chord, end on", ha="left", color="#4b5560", size=9)
    ax.plot(-across, -down, "o", color=LINE, markersize=9, zorder=7)
    label(ax, (-across - 0.6, -down), "line", color=LINE, ha="right")
    measure(ax, (0.0, 0.0), (0.0, -down), "sag", (0.4, -0.5 * down), ha="left")
    arrow(ax, (-across, -down), (0.0, -down), style="<|-|>", width=0.9, scale=8.0)
    label(ax, (-0.5 * across, -down - 0.9), "blow-out")
    arrow(ax, (0.0, 0.0), (-across * 0.95, -down * 0.95), style="<|-|>", width=0.9, scale=8.0)
    label(ax, (-0.5 * across - 0.6, -0.5 * down + 0.4), "slant sag", ha="right")
    axes_cross(ax, (5.4, -7.6), 2.3, "y", "z", "x  away from you", mirrored=True)
    square(ax, "Mid-span, looking ahead", "slant sag: from the chord in the\ndirection of the resultant load")


def swinging_hanger(ax):
    """A hanger seen along the line, swung to the left."""
    angle, length = np.radians(35.0), 7.4
    foot = length * np.array([-np.sin(angle), -np.cos(angle)])
    ax.plot([-1.6, 1.6], [0.0, 0.0], color=FAINT, linewidth=4.0, solid_capstyle="butt", zorder=2)
    ax.plot(0.0, 0.0, "s", color=INK, markersize=6, zorder=7)
    label(ax, (0.7, -0.9), "where it is fixed:\nstation, offset,\nelevation", ha="left", va="top", size=9)
    ax.plot([0.0, 0.0], [0.0, -length], color=FAINT, linewidth=1.0, linestyle=(0, (6, 3)), zorder=2)
    ax.plot(*zip((0.0, 0.0), foot, strict=True), color=INK, linewidth=1.8, zorder=4)
    ax.plot(*foot, "o", color=LINE, markersize=9, zorder=7)
    label(ax, beside(foot, -0.6, -1.3), "where the line is held", color=LINE, ha="left")
    ax.add_patch(Arc((0.0, 0.0), 9.0, 9.0, theta1=270.0 - 35.0, theta2=270.0, color=INK, linewidth=1.3))
    label(ax, (-1.2, -5.2), "swing")
    square(ax, "A hanger, looking ahead", "swing: angle from the vertical,\nto any side, never negative")


def end_tension(ax):
    """The line's end at a support, from the side: tension, its horizontal and its vertical part."""
    x = np.linspace(0.0, 9.6, 60)
    sinks = 0.62 * x - 0.026 * x**2
    ax.plot([-4.4, -4.4], [-9.4, 0.0], color=FAINT, linewidth=4.0, zorder=1)
    ax.plot(x - 4.4, -sinks, color=LINE, linewidth=2.2, zorder=3)
    ax.plot(-4.4, 0.0, "s", color=INK, markersize=6, zorder=7)
    flat, steep = np.array([6.2, 0.0]), np.array([6.2, -0.62 * 6.2])
    start = np.array([-4.4, 0.0])
    arrow(ax, start, start + flat, color=FORCE, width=2.0, scale=14.0)
    arrow(ax, start, start + steep, color=FORCE, width=2.0, scale=14.0, dash=(0, (4, 1.5)))
    ax.plot(*zip(start + flat, start + steep, strict=True), color=FAINT, linewidth=0.9, linestyle=":")
    label(ax, start + flat + (-3.0, 1.0), "horizontal tension", color=FORCE)
    label(ax, start + steep + (-0.6, -0.9), "tension", color=FORCE)
    label(ax, (-3.6, -7.4), "bare, at stringing:\nits horizontal part\nis the pull", color=INK, ha="left", size=9)
    square(ax, "The line's end, from the side", "horizontal tension: the part along\nthe span's plan direction")


def support_forces(ax):
    """The three components in an oblique view, as positive forces of the line on its support."""
    left = np.array([-2.6, 1.9])
    ax.plot([-0.4, -0.4], [-9.4, -1.4], color=FAINT, linewidth=4.0, zorder=1)
    start = np.array([-0.4, -1.4])
    ax.plot(*start, "s", color=INK, markersize=6, zorder=7)
    for end, text, at, ha in (
        ((4.4, 0.0), "along\n+ ahead, x", (1.5, 1.5), "left"),
        (left, "across\n+ left, y", beside(left, -0.3, -0.2), "right"),
        ((0.0, -4.6), "down\n+ down, −z\n− is uplift", (0.6, -4.0), "left"),
    ):
        arrow(ax, start, start + end, color=FORCE, width=2.4, scale=15.0)
        label(ax, start + at, text, color=FORCE, ha=ha)
    square(ax, "On a support, obliquely", "the force of the line on it, in the\naxes of the route")


def square(ax, text, note):
    ax.set(xlim=(-7.4, 6.8), ylim=(-9.6, 1.9))
    title(ax, text, note)


def saved(figure, file: Path) -> None:
    """Few colours make a small file."""
    whole = BytesIO()
    figure.savefig(whole, dpi=130, format="png")
    Image.open(whole).convert("RGB").quantize(64, dither=Image.Dither.NONE).save(file, optimize=True)


def main(file: Path) -> None:
    line = settled()
    path = line.shape(200)["position_m"]
    plt.rcParams["font.family"] = "DejaVu Sans"
    figure = plt.figure(figsize=(11.0, 8.9), layout="constrained")
    figure.get_layout_engine().set(h_pad=0.08, hspace=0.05)
    views = figure.add_gridspec(2, 1, height_ratios=(5.75, 3.0))
    upper = views[0].subgridspec(2, 1, height_ratios=(74.5, 36.0))
    details = views[1].subgridspec(1, 4)
    side_view(figure.add_subplot(upper[0]), line, path)
    plan_view(figure.add_subplot(upper[1]), line, path)
    for number, draw in enumerate((end_tension, swung_span, swinging_hanger, support_forces)):
        draw(figure.add_subplot(details[number]))
    saved(figure, file)
    plt.close(figure)


if __name__ == "__main__":
    main(Path(sys.argv[1]) if len(sys.argv) > 1 else HERE / "axes_and_signs.png")
