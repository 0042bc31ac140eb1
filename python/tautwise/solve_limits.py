"""Judged limits and a searched window, as the core gives them, into records with names, places and plain units."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from typing import TYPE_CHECKING, Any

from tautwise.columns import forces_text
from tautwise.limits import SpacingLimit
from tautwise.records import finite
from tautwise.results_line import CAUTION
from tautwise.results_vet import HOLDS, UNDECIDED, LimitState, worst_first
from tautwise.results_window import (
    Conflict,
    Price,
    PullToSpecify,
    PullWindow,
    Relaxation,
    UtilisationCurve,
    WindowEnd,
    WindowOrigin,
    second_looks,
    stands_on_open_end,
)

if TYPE_CHECKING:
    from tautwise.limits import BaseLimit
    from tautwise.model import Project

UNITS = {
    "clearance": "m",
    "tension": "N",
    "support_load": "N",
    "uplift": "N",
    "swing": "deg",
    "sag": "m",
    "catenary_constant": "m",
    "slope": "1",
    "spacing": "m",
}
POST_LEANS_MOST = 0.02  # of the span
Row = Mapping[str, Any]


def kind_of(limit: BaseLimit) -> str:
    """The kind of a limit, as the file names it."""
    return str(getattr(limit, "kind", ""))


def limit_states(
    project: Project,
    rows: Sequence[Row],
    *,
    every: bool,
    reason: Callable[[Row | None], str | None] = lambda row: None,
    excused: Callable[[LimitState], LimitState] = lambda state: state,
) -> tuple[LimitState, ...]:
    """The judged limits, worst first: one row for each limit, or one for each limit and condition.

    `reason` says why a row is undecided; it is asked with None for a limit that has no row. `excused` puts a waiver in.
    """
    states: list[LimitState] = []
    for index, limit in enumerate(project.limits):
        own = [excused(_limit_state(project, limit, row, reason)) for row in rows if row["limit"] == index]
        own = own or [_unjudged(limit, reason(None))]
        states += own if every else worst_first(own)[:1]
    return worst_first(states)


def window_of(
    project: Project,
    found: Row,
    program: str,
    nlopt: str,
    origin: WindowOrigin | None = None,
    relax: tuple[Relaxation, ...] = (),
) -> PullWindow:
    """The record of a searched window; `relax` for one that is shut."""
    is_open = bool(found["open"])
    low, high = found["range_N"]
    best = _specify(project, found["specify"]) if found["status"] != "shut" else None
    window = PullWindow(
        open=is_open,
        project=project.title,
        input_sha256=project.input_sha256,
        low=_end(project, found["low"]) if is_open else None,
        high=_end(project, found["high"]) if is_open else None,
        specify=best,
        prices=tuple(_price(project, row) for row in found["prices"]) if is_open else (),
        conflict=() if is_open else tuple(_conflict(project, row) for row in found["conflict"]),
        relax=() if is_open else relax,
        temperature_degC=project.stringing.temperature_degC,
        intervals=tuple((float(a), float(b)) for a, b in found["intervals"]),
        searched_N=(float(low), float(high)),
        verified=bool(found["verified"]),
        gap_relative=finite(found["gap_relative"]),
        evaluations=int(found["evaluations"]),
        settles=int(found["settles"]),
        pulls_N=tuple(float(pull) for pull in found["curves"]["pull_N"]),
        curves=_curves(project, found["curves"]),
        program=program,
        nlopt=nlopt,
        caution=CAUTION,
        origin=origin,
        least_used=best,
    )
    if not is_open:
        return window
    return replace(window, specify=None if stands_on_open_end(window) else best, findings=second_looks(window))


def place_of(project: Project, row: Row) -> str | None:
    """Where a limit is worst, in words: a support, a span, or a station in a span."""
    names = [support.name for support in project.supports]
    if row.get("support") is not None:
        return names[row["support"]]
    if row.get("span") is None:
        return None
    span = f"{names[row['span']]} to {names[row['span'] + 1]}"
    station = finite(row.get("station_m"))
    if station is None:
        return span
    held = _held_at(project, row, station) if _unit(project, row)[0] == "tension" else None
    return f"{span}, station {station:.1f} m" if held is None else f"{span}, at {held}"


def other_place_of(project: Project, row: Row) -> str | None:
    """Where another line is closest, in words: its file and condition, and a station in one of its spans."""
    number, at = row.get("limit"), finite(row.get("other_at_m"))
    limit = None if number is None else project.limits[number]
    if at is None or number is None or not isinstance(limit, SpacingLimit):
        return None
    beside = limit.other_condition_for(project.conditions[row["condition"]].name)
    near = project.neighbour(number, beside)
    return f"{limit.other}, {beside}: {near.place(at, row['other_position_m'], limit.shift)}"


def _held_at(project: Project, row: Row, station: float) -> str | None:
    """The support at whose clamp a station is; hangers swing, posts and springs give by less than this allows."""
    ends = project.supports[row["span"]], project.supports[row["span"] + 1]
    span = ends[1].station_m - ends[0].station_m
    reach = {"anchor": 1e-6 * span, "post": POST_LEANS_MOST * span}
    for support in ends:
        springs = support.stiffness_along_N_per_m or support.stiffness_across_N_per_m
        springs = springs or support.stiffness_vertical_N_per_m
        hold = "post" if support.hold == "anchor" and springs else support.hold
        if abs(station - support.station_m) <= reach.get(hold, support.hanger_length_m or 0.0):
            return support.name
    return None


def in_shown_unit(kind: str, value: float | None) -> float | None:
    """A value of the core in the unit that results carry: an angle in degrees, everything else in SI."""
    number = finite(value)
    return math.degrees(number) if number is not None and kind == "swing" else number


def _limit_state(
    project: Project, limit: BaseLimit, row: Row, reason: Callable[[Row | None], str | None]
) -> LimitState:
    kind = kind_of(limit)
    judged = row["status"] != UNDECIDED
    value, allowed, margin = (in_shown_unit(kind, row[name]) for name in ("value", "allowed", "margin"))
    return LimitState(
        id=limit.id,
        kind=kind,
        status=row["status"],
        condition=project.conditions[row["condition"]].name,
        place=place_of(project, row) if judged else None,
        value=value if judged else None,
        allowed=allowed,
        unit=UNITS[kind],
        utilisation=finite(row["utilisation"]) if judged else None,
        margin=margin if judged else None,
        clause=limit.clause,
        station_m=finite(row.get("station_m")) if judged else None,
        side=_side(limit, row),
        why=limit.why,
        reason=None if judged else reason(row) or reason(None),
        other_place=other_place_of(project, row) if judged else None,
    )


def _unjudged(limit: BaseLimit, reason: str | None) -> LimitState:
    kind = kind_of(limit)
    nothing: dict[str, Any] = dict.fromkeys(("condition", "place", "value", "allowed", "utilisation", "margin"))
    nothing |= {"clause": limit.clause, "why": limit.why, "reason": reason}
    return LimitState(limit.id, kind, UNDECIDED, unit=UNITS[kind], **nothing)


def _side(limit: BaseLimit, row: Row) -> str:
    value, allowed, holds = row["value"], row["allowed"], row["status"] == HOLDS
    if getattr(limit, "least", None) is None:
        return "most"
    if getattr(limit, "most", None) is None:
        return "least"
    return "least" if value is not None and allowed is not None and (value >= allowed) == holds else "most"


def _names(project: Project, row: Row) -> tuple[str | None, str | None]:
    limit, condition = row.get("limit"), row.get("condition")
    return (
        None if limit is None else project.limits[limit].id,
        None if condition is None else project.conditions[condition].name,
    )


def _unit(project: Project, row: Row) -> tuple[str, str]:
    """Kind and unit of the limit that a row is about."""
    kind = "tension" if row.get("limit") is None else kind_of(project.limits[row["limit"]])
    return kind, UNITS[kind]


def _end(project: Project, row: Row | None) -> WindowEnd | None:
    if row is None or row["pull_N"] is None:
        return None
    limit, condition = _names(project, row)
    if limit is None:
        return WindowEnd(float(row["pull_N"]), None, None, None, reason=_beyond(row, condition))
    kind, unit = _unit(project, row)
    return WindowEnd(
        float(row["pull_N"]),
        limit,
        condition,
        place_of(project, row),
        in_shown_unit(kind, row["value"]),
        in_shown_unit(kind, row["allowed"]),
        unit,
        finite(row["utilisation"]),
        finite(row.get("station_m")),
        other_place_of(project, row),
    )


def _beyond(row: Row, condition: str | None) -> str | None:
    """Why pulls beyond an end cannot be settled, and in which condition."""
    status = row.get("why", "ok")
    if status == "ok":
        return None
    text = "a load, a mark or a limit's place is off the line" if status == "error_place" else str(row["why_text"])
    return f"{condition}: {text}" if condition else text


def _specify(project: Project, row: Row | None) -> PullToSpecify | None:
    if row is None or row["pull_N"] is None or row["worst_utilisation"] is None:
        return None  # a search that was stopped before it had tried a pull
    limit, condition = _names(project, row)
    place = place_of(project, row)
    used = float(row["worst_utilisation"])
    return PullToSpecify(
        horizontal_tension_N=float(row["pull_N"]),
        worst_utilisation=used,
        tolerance_percent=100.0 * float(row["tolerance"]),
        reason=_reason(row, used, limit, condition),
        temperature_degC=project.stringing.temperature_degC,
        least_pull_N=float(row["least_pull_N"]),
        most_pull_N=float(row["most_pull_N"]),
        limit=limit,
        condition=condition,
        place=place,
        edges=tuple(end for edge in row.get("edges", ()) if (end := _end(project, edge)) is not None),
    )


def _reason(row: Row, used: float, limit: str | None, condition: str | None) -> str:
    (least, most), unit = forces_text(row["least_pull_N"], row["most_pull_N"])
    band = f"{least} to {most} {unit}"
    if limit is None:
        return f"anywhere from {band}, no limit bounds it"
    worst = f"{100 * used:.1f} % of {limit} in {condition}"
    return f"from {band} the worst use of any limit is {worst}, and no other pull makes it smaller"


def _price(project: Project, row: Row) -> Price:
    limit, condition = _names(project, row)
    kind, unit = _unit(project, row)
    support = row.get("support")
    per = str(row["variable"]).replace("_", " ")
    return Price(
        limit=limit,
        per=per,
        value=in_shown_unit(kind, row["margin_per_unit"]),
        unit=f"{unit} per {'N' if per == 'pull' else 'm'}",
        end=str(row["end"]),
        condition=condition,
        support=None if support is None else project.supports[support].name,
        pull_N_per_m=finite(row.get("pull_per_unit")),
    )


def _conflict(project: Project, row: Row) -> Conflict:
    limit, condition = _names(project, row)
    return Conflict(limit, condition, finite(row.get("needs_N")), str(row["side"]))


def _curves(project: Project, curves: Row) -> tuple[UtilisationCurve, ...]:
    rows = zip(curves["rows"], curves["utilisation"], strict=True)
    return tuple(
        UtilisationCurve(
            project.limits[limit].id,
            project.conditions[condition].name,
            tuple(finite(float(used)) for used in utilisation),
        )
        for (limit, condition), utilisation in rows
    )
