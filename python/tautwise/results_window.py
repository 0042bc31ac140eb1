"""The pretension window: which pulls satisfy every limit, what governs its ends, or why there is none.

Pulls are horizontal tensions at installation (bare line at the stringing temperature), N.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from typing import Any, ClassVar, Protocol

from tautwise.columns import Table, cut, force_column, force_format, force_text, number_column, text_column
from tautwise.errors import ShutWindowError
from tautwise.records import Record
from tautwise.sources import SourceLine

OPEN_ENDED = "none"
NEAR_END = 1e-3  # a pull to specify that near an end where nothing can be settled stands on that end
AT_LEAST, NEVER = "at least", "never"
LEAST_PRICE_SHOWN = 0.005  # of the end's pull for each metre


@dataclass(frozen=True, slots=True)
class WindowEnd(Record):
    """One end of the window and the limit that governs it.

    `limit` None: no limit bounds this side within the pulls searched. The end is then open, which deserves a second
    look: a limit may be missing. `reason`: why the line cannot be settled beyond an end that no limit sets; the window
    is open on that side as well. `other_place`: of a spacing, where the other line is closest.
    """

    horizontal_tension_N: float
    limit: str | None
    condition: str | None
    place: str | None
    value: float | None = None
    allowed: float | None = None
    unit: str | None = None
    utilisation: float | None = None
    station_m: float | None = None
    other_place: str | None = None
    reason: str | None = None

    def __repr__(self) -> str:
        where = f"{self.limit} in {self.condition}" if self.limit else "no limit"
        where = f"cannot be settled beyond: {self.reason}" if self.reason else where
        return f"WindowEnd {force_text(self.horizontal_tension_N)}: {where}"


@dataclass(frozen=True, slots=True)
class PullToSpecify(Record):
    """The pull whose worst utilisation over its tolerance is smallest.

    `least_pull_N` and `most_pull_N` are what the crew may leave it at, `edges` what is used most at each of them;
    `limit` in `condition` at `place` is the worse of the two.
    """

    horizontal_tension_N: float
    worst_utilisation: float
    tolerance_percent: float
    reason: str
    temperature_degC: float
    least_pull_N: float
    most_pull_N: float
    limit: str | None
    condition: str | None
    place: str | None
    edges: tuple[WindowEnd, ...] = ()

    def __repr__(self) -> str:
        pull, used = force_text(self.horizontal_tension_N), 100.0 * self.worst_utilisation
        return f"PullToSpecify {pull} +/- {self.tolerance_percent:g} %: worst use of a limit {used:.1f} %"


@dataclass(frozen=True, slots=True)
class Price(Record):
    """What one unit of a variable buys on the limit that governs an end of the window.

    `value` in `unit`: change of that limit's margin for each unit of the variable (`per`: "pull", "support height",
    "support station"). `pull_N_per_m`: how far the end of the window moves with it, N/m; None for the pull itself.
    """

    limit: str | None
    per: str
    value: float | None
    unit: str
    end: str
    condition: str | None
    support: str | None
    pull_N_per_m: float | None


@dataclass(frozen=True, slots=True)
class Conflict(Record):
    """One of the limits that exclude one another: it needs a pull of "at least" or "at most" `needs_N`, or "never"."""

    limit: str | None
    condition: str | None
    needs_N: float | None
    side: str


@dataclass(frozen=True, slots=True)
class Relaxation(Record):
    """A single change that opens a shut window, the smallest of its kind.

    Fields
    ------
    change: what to change, in words. by, unit: how far. to: the value after it, in the same unit.
    pull_N: a pull that then satisfies every limit. limit, support: the one that is meant.
    where: file and line to change, None where there is none.
    written: the value after it in the unit that the file uses for this key, rounded to the safe side.
    """

    change: str
    by: float
    unit: str
    to: float | None
    pull_N: float | None
    limit: str | None
    support: str | None
    where: str | None
    written: str | None = None


@dataclass(frozen=True, slots=True)
class UtilisationCurve(Record):
    """How far one limit is used in one condition at each of the window's pulls; it holds while <= 1."""

    limit: str
    condition: str
    utilisation: tuple[float | None, ...]


class WindowOrigin(Protocol):
    """What a window remembers of where it came from; kept out of JSON, kept by pickle."""

    def judge(self, pull_N: float) -> Mapping[tuple[str, str], float]:
        """Utilisation of each limit (id) in each condition (name) at a pull."""


@dataclass(frozen=True, slots=True)
class PullWindow(Record):
    """Every pull that satisfies every limit in every condition; the document of ``window --json``.

    Fields
    ------
    open: whether there is such a pull. low, high, specify: None where there is none. `specify` is also None where an
    end has no limit of its own, as no pull can be specified on the strength of that end.
    least_used: the pull of those searched whose worst use of a limit over the tolerance is smallest; as `specify`.
    findings: what in this window deserves a second look.
    intervals: every open stretch found, N; `low` and `high` end the one that holds the pull to specify.
    searched_N: the pulls that the search looked at.
    prices: what the pull, a support's height or its station buys at each end.
    conflict, relax: of a shut window, the limits that exclude one another and the smallest single changes that open it.
    pulls_N, curves: utilisation of each limit in each condition over the pulls.
    verified: the answer was settled again, each condition with its bracket, `gap_relative` the widest of them.
    warnings: what is hardly meant in the input. sources: where its numbers come from, where asked for.
    """

    FORMAT: ClassVar[str] = "tautwise-window 1"
    KEYS: ClassVar[Mapping[str, str | None]] = {"origin": None}

    open: bool
    project: str
    input_sha256: str | None
    low: WindowEnd | None
    high: WindowEnd | None
    specify: PullToSpecify | None
    prices: tuple[Price, ...]
    conflict: tuple[Conflict, ...]
    relax: tuple[Relaxation, ...]
    temperature_degC: float
    intervals: tuple[tuple[float, float], ...]
    searched_N: tuple[float, float]
    verified: bool
    gap_relative: float | None
    evaluations: int
    settles: int
    pulls_N: tuple[float, ...]
    curves: tuple[UtilisationCurve, ...]
    program: str
    nlopt: str
    caution: str
    origin: WindowOrigin | None = field(default=None, compare=False, repr=False)
    warnings: tuple[str, ...] = ()
    sources: tuple[SourceLine, ...] = ()
    least_used: PullToSpecify | None = None
    findings: tuple[str, ...] = ()

    def require_open(self) -> PullWindow:
        """The same window.

        Raises
        ------
        ShutWindowError: no pull satisfies every limit; the message names the conflict.
        """
        if not self.open:
            raise ShutWindowError(f"no pull satisfies every limit: {conflict_text(self.conflict)}")
        return self

    def plot(self, ax: Any = None, **options: Any) -> Any:
        """Draw the window; see :func:`tautwise.figure.plot_window`. Returns the Matplotlib axes."""
        from tautwise.figure import plot_window

        return plot_window(self, ax, **options)

    def _table(self) -> Table:
        ends = [("lowest", self.low), ("highest", self.high)]
        pulls = [end.horizontal_tension_N for _, end in ends if end]
        columns = (
            text_column(""),
            force_column("pull", pulls),
            text_column("governed by"),
            text_column("condition"),
            text_column("place"),
        )
        rows = (
            (name, end.horizontal_tension_N, governed_by(end), end.condition, end.place) for name, end in ends if end
        )
        return Table(columns, tuple(rows))

    def _head(self) -> str:
        if not self.open:
            return f"PullWindow {self.project!r}: shut, {conflict_text(self.conflict)}"
        if self.specify is None:
            return f"PullWindow {self.project!r}: open, specify none: an end has no limit"
        return f"PullWindow {self.project!r}: open, specify {force_text(self.specify.horizontal_tension_N)}"

    def __repr__(self) -> str:
        lines = self._table().lines() if self.open else conflict_table(self.conflict[:8]).lines()
        return "\n".join([self._head(), *lines, *(f"Look again: {text}" for text in self.findings)])

    def _repr_html_(self) -> str:
        return (self._table() if self.open else conflict_table(self.conflict)).html(self._head())


def governed_by(end: WindowEnd) -> str:
    """The limit at an end, or that there is none.

    >>> governed_by(WindowEnd(4221.0, None, None, None, reason="everyday: no equilibrium"))
    'none: cannot be settled beyond'
    """
    return end.limit or (f"{OPEN_ENDED}: cannot be settled beyond" if end.reason else OPEN_ENDED)


def stands_on_open_end(window: PullWindow) -> bool:
    """Whether the pull used least means nothing, because an end has no limit of its own.

    Where pulls beyond an end cannot be settled, it still means something between two different limits: the far end has
    one, another is used most at this end, and the pull with its tolerance keeps clear of it.
    """
    ends = (window.low, window.high)
    for end, far in (ends, ends[::-1]):
        if end is None or end.limit is not None:
            continue
        best, between = window.least_used, far is not None and far.limit is not None
        if end.reason is None or best is None or far is None or not between or _worst_at(window, end) == far.limit:
            return True
        edge = best.least_pull_N if end is window.low else best.most_pull_N
        if abs(edge / end.horizontal_tension_N - 1.0) < NEAR_END:
            return True
    return False


def _worst_at(window: PullWindow, end: WindowEnd) -> str | None:
    """The limit used most at the pull tried last before an end."""
    low, high = sorted((end.horizontal_tension_N, (window.least_used or end).horizontal_tension_N))
    inside = [k for k, pull in enumerate(window.pulls_N) if low <= pull <= high]
    if not inside:
        return None
    at = inside[0] if end is window.low else inside[-1]
    worst = max(window.curves, key=lambda curve: curve.utilisation[at] or 0.0, default=None)
    return worst.limit if worst else None


def second_looks(window: PullWindow) -> tuple[str, ...]:
    """What in an open window deserves a second look."""
    looks = []
    low, high = window.searched_N
    for end, which, further in ((window.low, "lowest", "lower"), (window.high, "highest", "higher")):
        if end is not None and end.reason is not None:
            looks.append(f"no limit sets the {which} pull: a {further} one cannot be settled ({end.reason}).")
    if window.low and window.low.limit is None and window.low.reason is None:
        looks.append(f"open-ended below: no limit stops the pull down to {force_text(low)}, the lowest one tried.")
    if window.low and window.low.limit is None:
        looks.append("a slack line breaks most clearances; is a clearance or a sag limit missing?")
    if window.high and window.high.limit is None and window.high.reason is None:
        looks.append(f"open-ended above: no limit stops the pull up to {force_text(high)}, the highest one tried.")
        looks.append("a pull always costs strength; is a limit on tension or on a support's load missing?")
    if len(window.intervals) > 1:
        looks.append(
            "the pulls between these stretches break a limit; the ends shown are of the stretch to specify from."
        )
    return tuple(looks)


def conflict_text(conflict: tuple[Conflict, ...]) -> str:
    """The limits that exclude one another, in one line.

    >>> low = Conflict("clearance", "hot", 21000.0, "at least")
    >>> conflict_text((low, Conflict("strength", "ice", 18000.0, "at most")))
    'clearance (hot) needs at least 21.00 kN, strength (ice) at most 18.00 kN'
    """
    texts = need_texts(conflict)
    parts = [f"{each.limit} ({each.condition}) {text}" for each, text in zip(conflict, texts, strict=True)]
    return ", ".join(parts).replace(") at ", ") needs at ", 1) or "no single limit to blame was found"


def need_texts(conflict: tuple[Conflict, ...], beside_N: Iterable[float | None] = ()) -> list[str]:
    """What each of the conflicting limits needs, rounded so that it still holds, in the digits of forces beside it."""
    unit, divisor, decimals = force_format([*(each.needs_N for each in conflict), *beside_N])
    return [
        "holds at no pull"
        if each.side == NEVER or each.needs_N is None
        else f"{each.side} {cut(each.needs_N / divisor, decimals, up=each.side == AT_LEAST)} {unit}"
        for each in conflict
    ]


def conflict_table(conflict: tuple[Conflict, ...], beside_N: Iterable[float | None] = ()) -> Table:
    """The limits that exclude one another; `beside_N` are forces shown beside it, in the same digits."""
    columns = (text_column("limit"), text_column("condition"), text_column("needs a pull of"))
    rows = zip(conflict, need_texts(conflict, beside_N), strict=True)
    return Table(columns, tuple((each.limit, each.condition, text) for each, text in rows))


def price_table(window: PullWindow) -> Table:
    """What moves the ends of a window: how far for each metre of a support, strongest first."""
    pulls = {"low": window.low, "high": window.high}
    listed = [price for price in window.prices if _matters(price, pulls.get(price.end))]
    listed.sort(key=lambda price: (price.end != "low", -abs(price.pull_N_per_m or 0.0)))
    columns = (
        text_column("end"),
        number_column("moves by", "kN/m", 3),
        text_column("for each metre of"),
        text_column("governed by"),
    )
    rows = (
        (
            f"{price.end}est",
            (price.pull_N_per_m or 0.0) / 1e3,
            f"{price.per.removeprefix('support ')} of {price.support}",
            price.limit,
        )
        for price in listed
    )
    return Table(columns, tuple(rows))


def _matters(price: Price, end: WindowEnd | None) -> bool:
    return end is not None and abs(price.pull_N_per_m or 0.0) >= LEAST_PRICE_SHOWN * end.horizontal_tension_N
