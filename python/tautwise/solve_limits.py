"""Judged limits and a searched window, as the core gives them, into records with names, places and plain units."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any

from tautwise.columns import force_text
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
}
Row = Mapping[str, Any]


def kind_of(limit: BaseLimit) -> str:
    """The kind of a limit, as the file names it."""
    return str(getattr(limit, "kind", ""))


def limit_states(project: Project, rows: Sequence[Row], *, every: bool) -> tuple[LimitState, ...]:
    """The judged limits, worst first: one row for each limit, or one for each limit and condition."""
    states: list[LimitState] = []
    for index, limit in enumerate(project.limits):
        own = [_limit_state(project, limit, row) for row in rows if row["limit"] == index]
        own = own or [_unjudged(limit)]
        states += own if every else worst_first(own)[:1]
    return worst_first(states)


def window_of(project: Project, found: Row, program: str, nlopt: str, origin: WindowOrigin | None = None) -> PullWindow:
    """The record of a searched window."""
    is_open = bool(found["open"])
    low, high = found["range_N"]
    return PullWindow(
        open=is_open,
        project=project.title,
        input_sha256=project.input_sha256,
        low=_end(project, found["low"]) if is_open else None,
        high=_end(project, found["high"]) if is_open else None,
        specify=_specify(project, found["specify"]) if found["status"] != "shut" else None,
        prices=tuple(_price(project, row) for row in found["prices"]) if is_open else (),
        conflict=() if is_open else tuple(_conflict(project, row) for row in found["conflict"]),
        relax=() if is_open else tuple(_relaxation(project, row) for row in found["relax"]),
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
    )


def place_of(project: Project, row: Row) -> str | None:
    """Where a limit is worst, in words: a support, a span, or a station in a span."""
    names = [support.name for support in project.supports]
    if row.get("support") is not None:
        return names[row["support"]]
    if row.get("span") is None:
        return None
    span = f"{names[row['span']]} to {names[row['span'] + 1]}"
    station = finite(row.get("station_m"))
    return span if station is None else f"{span}, station {station:.1f} m"


def in_shown_unit(kind: str, value: float | None) -> float | None:
    """A value of the core in the unit that results carry: an angle in degrees, everything else in SI."""
    number = finite(value)
    return math.degrees(number) if number is not None and kind == "swing" else number


def _limit_state(project: Project, limit: BaseLimit, row: Row) -> LimitState:
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
    )


def _unjudged(limit: BaseLimit) -> LimitState:
    kind = kind_of(limit)
    nothing: dict[str, Any] = dict.fromkeys(("condition", "place", "value", "allowed", "utilisation", "margin"))
    return LimitState(limit.id, kind, UNDECIDED, unit=UNITS[kind], clause=limit.clause, why=limit.why, **nothing)


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
    if row is None:
        return None
    limit, condition = _names(project, row)
    if limit is None:
        return WindowEnd(float(row["pull_N"]), None, None, None)
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
    )


def _specify(project: Project, row: Row | None) -> PullToSpecify | None:
    if row is None:
        return None
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
    )


def _reason(row: Row, used: float, limit: str | None, condition: str | None) -> str:
    band = f"{force_text(row['least_pull_N'])} to {force_text(row['most_pull_N'])}"
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


def _relaxation(project: Project, row: Row) -> Relaxation:
    kind, unit = _unit(project, row) if row["kind"] == "allowance" else ("", "m")
    limit, support = row.get("limit"), row.get("support")
    by, to = float(row["by"]), finite(row.get("to"))
    if row["kind"] == "allowance":
        change, key = _allowance_change(project, row["limit"], by, to)
    else:
        change, key, to = _support_change(project, row["kind"], row["support"], by, to)
    fault = project.core_fault(key, "")
    return Relaxation(
        change=change,
        by=in_shown_unit(kind, by) or 0.0,
        unit=unit,
        to=in_shown_unit(kind, to),
        pull_N=finite(row.get("pull_N")),
        limit=None if limit is None else project.limits[limit].id,
        support=None if support is None else project.supports[support].name,
        where=None if fault.file is None else f"{fault.file}:{fault.line}",
    )


def _allowance_change(project: Project, index: int, by: float, to: float | None) -> tuple[str, str]:
    """Words and place of a changed allowance; a share is given too where the file asks for one."""
    limit = project.limits[index]
    key = next((name for name in ("least", "share", "most") if getattr(limit, name, None) is not None), "least")
    share = getattr(limit, "share", None)
    words = f"allowed value of {limit.id}"
    if share is not None and to is not None and to != by:
        words += f" (share = {math.ceil(1e4 * share * to / (to - by)) / 1e4:g})"
    return words, f"limits[{index}].{key}"


def _support_change(
    project: Project, kind: str, index: int, by: float, to: float | None
) -> tuple[str, str, float | None]:
    """Words and place of a moved support; its new value is that of the key the file holds."""
    support = project.supports[index]
    if kind == "support_station":
        return f"station of {support.name}", f"supports[{index}].station", to
    if support.height_m is not None:
        return f"height of {support.name}", f"supports[{index}].height", support.height_m + by
    return f"elevation of {support.name}", f"supports[{index}].elevation", to


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
