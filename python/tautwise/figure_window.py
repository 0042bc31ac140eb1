"""The picture of a window: for each limit the stretch of pulls that keeps it, and where all of them overlap."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from tautwise.figure_style import CLEAR, CURVES, FAINT, INK, axes_or_new, plain
from tautwise.results_window import PullWindow

CLOSE_ENOUGH = 2e-4
END_POINTS = 8
OPEN, OPEN_EDGE, BAR = "#dcebd5", "#5d8a45", CURVES[0]


@dataclass(frozen=True, slots=True)
class Stretch:
    """Pulls, N, that keep a limit in every condition; `low_by` and `high_by` name the condition at each end."""

    low: float
    high: float
    low_by: str | None
    high_by: str | None


def plot_window(window: PullWindow, ax: Any = None) -> Any:
    """Draw a window: pulls to the right, a bar for each limit over the pulls that keep it, the open part shaded.

    Parameters
    ----------
    ax: Matplotlib axes; None makes a figure.

    Returns
    -------
    The axes. A bar that runs out of the picture goes on to the end of the pulls searched.
    """
    rows = stretches_of(window)
    own = ax is None
    ax = axes_or_new(ax, (9.0, 1.5 + 0.42 * max(len(rows), 1)))
    if own:
        _make_room(ax, list(rows))
    divisor, unit = (1e3, "kN") if window.searched_N[1] >= 1e3 else (1.0, "N")
    left, right = _range_shown(window, rows)
    ax.set_xlim(left / divisor, right / divisor)
    ax.set_ylim(len(rows) - 0.4, -0.75)
    for low, high in window.intervals:
        ax.axvspan(low / divisor, high / divisor, facecolor=OPEN, edgecolor=OPEN_EDGE, linewidth=1.0, zorder=1)
    for number, stretches in enumerate(rows.values()):
        _draw_row(ax, number, stretches, (left, right), divisor)
    _draw_specified(ax, window, len(rows), divisor)
    _label(ax, window, list(rows), unit)
    return ax


def stretches_of(window: PullWindow) -> dict[str, list[Stretch]]:
    """For each limit, the pulls that keep it in every condition.

    Ends are looked up on the line itself; of a window read from JSON they are estimated between the curves' pulls.
    """
    pulls = np.array(window.pulls_N)
    names = list(dict.fromkeys(curve.limit for curve in window.curves))
    judge = window.origin.judge if window.origin else None
    found: dict[str, list[Stretch]] = {}
    for name in names:
        curves = [curve for curve in window.curves if curve.limit == name]
        used = np.array([[np.inf if u is None else u for u in curve.utilisation] for curve in curves])
        rows = _Rows(
            pulls, used, [curve.condition for curve in curves], _exact_ends(window, name), window.intervals, name, judge
        )
        found[name] = rows.stretches()
    return found


@dataclass(frozen=True, slots=True)
class _Rows:
    """One limit in its conditions: utilisation over pulls, and ends that the search found exactly."""

    pulls: Any
    used: Any
    conditions: list[str]
    exact: list[float]
    open: tuple[tuple[float, float], ...]
    limit: str
    judge: Callable[[float], Mapping[tuple[str, str], float]] | None

    def stretches(self) -> list[Stretch]:
        holds = np.concatenate([[False], self.used.max(axis=0) <= 1.0, [False]])
        changes = np.flatnonzero(holds[1:] != holds[:-1]).tolist()
        return [self._stretch(first, after - 1) for first, after in zip(changes[::2], changes[1::2], strict=True)]

    def _stretch(self, first: int, last: int) -> Stretch:
        low, low_by = self._crossing(first, first - 1)
        high, high_by = self._crossing(last, last + 1)
        return Stretch(low, high, low_by, high_by)

    def _crossing(self, inside: int, outside: int) -> tuple[float, str | None]:
        """Where the first condition reaches 1 on the way from a pull that holds to its neighbour that does not."""
        near = float(self.pulls[inside])
        if not 0 <= outside < len(self.pulls):
            return near, None
        far = float(self.pulls[outside])
        if self.judge is not None:
            return self._bisected(near, far)
        a, b = self.used[:, inside], self.used[:, outside]
        with np.errstate(invalid="ignore", divide="ignore"):
            shares = np.where(b > 1.0, np.where(np.isfinite(b), (1.0 - a) / (b - a), 0.0), np.inf)
        first = int(np.argmin(shares))
        between = [end for end in self.exact if min(near, far) <= end <= max(near, far)]
        end = between[0] if between else near * (far / near) ** float(shares[first])
        return self._beside_the_open(end, near), self.conditions[first]

    def _bisected(self, near: float, far: float) -> tuple[float, str | None]:
        """The same from the line itself, to within what a picture can show."""
        worst = None
        while abs(far / near - 1.0) > CLOSE_ENOUGH:
            middle = float(np.sqrt(near * far))
            used = self._judged(middle)
            if max(used) <= 1.0:
                near = middle
            else:
                far, worst = middle, self.conditions[int(np.argmax(used))]
        return near, worst or self.conditions[int(np.argmax(self._judged(far)))]

    def _judged(self, pull: float) -> list[float]:
        found = self.judge(pull) if self.judge else {}
        return [found.get((self.limit, condition), np.inf) for condition in self.conditions]

    def _beside_the_open(self, end: float, near: float) -> float:
        """An end between two pulls is an estimate; where the window is known to be open it cannot lie inside."""
        for low, high in self.open:
            if low < end < high:
                return low if end < near else high
        return end


def _exact_ends(window: PullWindow, limit: str) -> list[float]:
    ends = [end.horizontal_tension_N for end in (window.low, window.high) if end and end.limit == limit]
    return ends + [each.needs_N for each in window.conflict if each.limit == limit and each.needs_N is not None]


def _range_shown(window: PullWindow, rows: dict[str, list[Stretch]]) -> tuple[float, float]:
    """The pulls worth seeing: every open stretch, the ends of bars near it or the conflict, some room around."""
    ends = [end for bars in rows.values() for bar in bars for end in _bounded_ends(bar)]
    ends += [end for interval in window.intervals for end in interval]
    ends += [each.needs_N for each in window.conflict if each.needs_N is not None]
    ends = ends or list(window.searched_N)
    middle = window.least_used.horizontal_tension_N if window.least_used else float(np.median(ends))
    near = [end for end in ends if middle / 4.0 <= end <= 4.0 * middle] or ends
    near += [end for interval in window.intervals for end in interval]
    low, high = min(near), max(near)
    room = 0.25 * max(high - low, 0.2 * middle)
    return max(low - room, window.searched_N[0]), min(high + room, window.searched_N[1])


def _bounded_ends(bar: Stretch) -> list[float]:
    return [end for end, by in ((bar.low, bar.low_by), (bar.high, bar.high_by)) if by is not None]


def _make_room(ax: Any, names: list[str]) -> None:
    wide, high = ax.figure.get_size_inches()
    longest = max(map(len, names), default=0)
    left = min(0.2 + longest * 0.085, 0.4 * wide)
    ax.figure.subplots_adjust(left=left / wide, right=1 - 0.2 / wide, bottom=0.55 / high, top=1 - 0.6 / high)


def _draw_row(ax: Any, number: int, stretches: list[Stretch], shown: tuple[float, float], divisor: float) -> None:
    visible = [bar for bar in stretches if bar.high > shown[0] and bar.low < shown[1]]
    if not visible:
        words = "holds at no pull tried" if not stretches else "holds outside this picture"
        ax.text(
            0.5, number, words, transform=ax.get_yaxis_transform(), ha="center", va="center", fontsize=8, color=CLEAR
        )
    for bar in visible:
        low, high = max(bar.low, shown[0]), min(bar.high, shown[1])
        ax.barh(number, (high - low) / divisor, left=low / divisor, height=0.42, color=BAR, alpha=0.85, zorder=3)
        for end, by, side in ((bar.low, bar.low_by, "left"), (bar.high, bar.high_by, "right")):
            if by is not None and shown[0] < end < shown[1]:
                _draw_end(ax, number, end / divisor, by, side)


def _draw_end(ax: Any, number: int, end: float, by: str, side: str) -> None:
    """The end of a bar with the condition that sets it, written outside, or on the bar where there is no room."""
    ax.plot([end, end], [number - 0.3, number + 0.3], color=CLEAR, linewidth=2.0, zorder=4)
    left, right = ax.get_xlim()
    inches = ax.get_position().width * ax.figure.get_size_inches()[0]
    room = ((end - left) if side == "left" else (right - end)) / (right - left) * inches
    outside = room > 0.1 + len(by) * 0.6 * END_POINTS / 72.0
    to_left = outside == (side == "left")
    box = {"facecolor": "white", "edgecolor": "none", "alpha": 0.75, "pad": 0.8} if outside else None
    ax.annotate(plain(by), (end, number), xytext=(-5 if to_left else 5, 0), textcoords="offset points", va="center",
                ha="right" if to_left else "left", fontsize=END_POINTS, color=CLEAR if outside else "white", bbox=box,
                zorder=6)  # fmt: skip


def _draw_specified(ax: Any, window: PullWindow, rows: int, divisor: float) -> None:
    best = window.specify
    if best is None:
        return
    pull = best.horizontal_tension_N / divisor
    ax.axvspan(best.least_pull_N / divisor, best.most_pull_N / divisor, facecolor="#f3c969", alpha=0.55, zorder=2)
    ax.plot([pull, pull], [-0.75, rows - 0.4], color=INK, linewidth=1.6, zorder=5)
    tolerance = f" +/- {best.tolerance_percent:g} %" if best.tolerance_percent else ""
    ax.annotate(f"specify {pull:.4g} {'kN' if divisor > 1 else 'N'}{tolerance}", (pull, -0.75), xytext=(0, 4),
                textcoords="offset points", ha="center", va="bottom", fontsize=9, color=INK)  # fmt: skip


def _label(ax: Any, window: PullWindow, names: list[str], unit: str) -> None:
    ax.set_yticks(range(len(names)), [plain(name) for name in names])
    ax.tick_params(axis="y", length=0)
    ax.set_xlabel(f"pull (horizontal tension, bare, at {window.temperature_degC:.4g} degC), {unit}")
    state = "open where shaded" if window.open else "shut: no pull keeps every limit"
    ax.set_title(plain(f"{window.project or 'Pretension window'}: {state}"), loc="left", fontsize=10, pad=20,
                 color=INK if window.open else CLEAR)  # fmt: skip
    for side in ("top", "right", "left"):
        ax.spines[side].set_visible(False)
    ax.grid(True, axis="x", color="#d9dde1", linewidth=0.6)
    ax.set_axisbelow(True)
    if not names:
        ax.text(0.5, 0.5, "no limits", transform=ax.transAxes, ha="center", color=FAINT)
