"""Colours, line styles and axes that the pictures share."""

from __future__ import annotations

from typing import Any

from tautwise.errors import TautwiseError
from tautwise.results_line import Equilibrium, MarkState
from tautwise.strict import inert

CURVES = ("#1b4f8a", "#c8601a", "#12807a", "#7d3c86", "#8a7400", "#4b5560")
STYLES = ("-", "--", "-.", (0, (5, 1, 1, 1, 1, 1)), (0, (2, 1)), (0, (9, 2)))
CROSSING, CROSSING_EDGE = "#b9d3dd", "#4c7f93"
EARTH, EARTH_EDGE, CLEAR, INK, FAINT = "#e4dccb", "#8c7b5b", "#a3243b", "#22282e", "#8b949c"
LEGEND_POINTS = 8.5


def axes_or_new(ax: Any, size: tuple[float, float]) -> Any:
    """The given axes, or those of a new figure of so many inches.

    Raises
    ------
    TautwiseError: Matplotlib is not installed.
    """
    if ax is not None:
        return ax
    try:
        import matplotlib.pyplot as plt
    except ImportError:
        raise TautwiseError(
            "pictures need Matplotlib, which is not installed: pip install 'tautwise[figures]'"
        ) from None
    return plt.subplots(figsize=size)[1]


def plain(text: str) -> str:
    """A name as Matplotlib shows it letter by letter: between two dollar signs it would read a formula.

    >>> plain("$x^2$").replace(chr(92), "|")
    '|$x^2|$'
    """
    return inert(text).replace("$", "\\$")


def columns_of_legend(ax: Any, labels: list[str]) -> int:
    """How many columns of a legend fit into the width of the figure.

    A letter is about 0.6 of the size of its type wide, a handle with its gaps about seven letters.
    """
    column = (max(map(len, labels)) + 7) * 0.6 * LEGEND_POINTS / 72.0
    return max(1, min(len(labels), int(0.96 * ax.figure.get_size_inches()[0] / column)))


def margins(ax: Any, labels: list[str]) -> dict[str, float]:
    """Room for axis labels, a title, and a legend with these labels below; shares of the figure."""
    wide, high = ax.figure.get_size_inches()
    rows = -(-len(labels) // columns_of_legend(ax, labels))
    return {
        "left": 0.95 / wide,
        "right": 1.0 - 0.15 / wide,
        "top": 1.0 - 0.6 / high,
        "bottom": (0.65 + 0.2 * rows) / high,
    }


def carriage_marker(colour: str) -> dict[str, Any]:
    """How a carriage is drawn on a curve."""
    look = {"marker": "v", "markersize": 7, "markerfacecolor": "white", "linestyle": "none"}
    return {**look, "color": colour, "zorder": 6}


def carriages_of(line: Equilibrium) -> list[MarkState]:
    """The marks of a settled line that are carriages."""
    names = line._line().scenery().carriages
    return [mark for mark in line.marks if mark.name in names]
