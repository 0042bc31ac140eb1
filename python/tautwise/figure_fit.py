"""Picture of a fit: the points on the fitted line, and below it how far they lie off."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from tautwise.figure_style import CLEAR, CURVES, INK, LEGEND_POINTS, STYLES, axes_or_new, plain

if TYPE_CHECKING:
    from tautwise.results_fit import SurveyFit

CURVES_MOST = 4
MARKERS = ("o", "^", "s", "v")


def plot_fit(found: SurveyFit, ax: Any = None, *, points: int = 200) -> Any:
    """Draw the points of a survey on the fitted line, bare at the survey's temperatures.

    Parameters
    ----------
    found: a fit with its project. ax: Matplotlib axes for the line alone; None makes a figure with the residuals below.
    points: of the curve, for each span.

    Returns
    -------
    The axes of the line; its figure's second axes, if any, show measured less line in mm. Far points are red and named.
    """
    from tautwise.origins import scenery_of

    below = None
    if ax is None:
        ax = axes_or_new(None, (10.0, 6.2))
        figure = ax.figure
        ax.remove()
        ax, below = figure.subplots(2, 1, sharex=True, height_ratios=(3, 1.3))
        figure.subplots_adjust(left=0.09, right=0.985, top=0.9, bottom=0.165, hspace=0.12)
    scenery = scenery_of(found._project(), 0)
    for (degrees, (stations, heights)), colour, style in zip(_curves(found, points), CURVES, STYLES, strict=False):
        ax.plot(stations, heights, color=colour, linestyle=style, linewidth=1.6, zorder=3,
                label=f"fitted line at {degrees:.4g} degC")  # fmt: skip
    for name, station, elevation, _ in scenery.supports:
        ax.plot([station], [elevation], marker="s", color=INK, markerfacecolor="white", markersize=5, zorder=5)
        ax.annotate(plain(name), (station, elevation), xytext=(0, 6), textcoords="offset points", ha="center",
                    fontsize=8, color=INK)  # fmt: skip
    _draw_points(found, ax, below)
    _finish(found, ax, below)
    return ax


def _shown(found: SurveyFit) -> tuple[float, ...]:
    """The temperatures drawn: all, or some of them from the coldest to the warmest."""
    every = found.temperatures_degC
    picked = np.unique(np.linspace(0, len(every) - 1, CURVES_MOST).round().astype(int))
    return tuple(every[number] for number in picked)


def _curves(found: SurveyFit, points: int) -> list[tuple[float, Any]]:
    from tautwise.solve import shape_bare

    shown = _shown(found)
    shapes = shape_bare(found._project(), found.natural_length_m, shown, points)
    return list(zip(shown, shapes, strict=True))


def _draw_points(found: SurveyFit, ax: Any, below: Any) -> None:
    shown = np.array(_shown(found))
    for number, marker in enumerate(MARKERS[: len(shown)]):
        own = [p for p in found.points if int(np.argmin(abs(shown - p.temperature_degC))) == number]
        for far in (False, True):
            group = [p for p in own if p.suspicious == far]
            if not group:
                continue
            colour = CLEAR if far else CURVES[number]
            style = {"linestyle": "none", "marker": marker, "markersize": 4.5, "color": colour}
            style["markerfacecolor"] = "white"
            x = [p.station_m for p in group]
            ax.plot(x, [p.elevation_m for p in group], zorder=6, **style)
            if below is not None:
                below.plot(x, [1e3 * p.residual_m for p in group], zorder=6, **style)
    for point in found.suspicious[:5]:
        target, height = (ax, point.elevation_m) if below is None else (below, 1e3 * point.residual_m)
        target.annotate(plain(point.name), (point.station_m, height), xytext=(6, 0), textcoords="offset points",
                        va="center", fontsize=8, color=CLEAR)  # fmt: skip


def _finish(found: SurveyFit, ax: Any, below: Any) -> None:
    ax.set_title(plain(": ".join(filter(None, (found.project, found.summary)))), loc="left", fontsize=9, color=INK)
    ax.set_ylabel("elevation, m")
    ax.margins(x=0.03, y=0.14)
    for each in (ax, below):
        if each is not None:
            each.grid(True, color="#d9dde1", linewidth=0.6)
            each.set_axisbelow(True)
            for side in ("top", "right"):
                each.spines[side].set_visible(False)
    style = {"frameon": False, "fontsize": LEGEND_POINTS, "handlelength": 3.2}
    if below is None:
        ax.legend(**style)
        ax.set_xlabel("station, m")
        return
    ax.figure.legend(*ax.get_legend_handles_labels(), loc="lower center", ncols=2, **style)
    below.axhline(0.0, color=INK, linewidth=0.8)
    below.margins(y=0.2)
    below.set_xlabel("station, m")
    below.set_ylabel("measured less\nline, mm")
