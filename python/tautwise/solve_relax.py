"""The changes that open a shut window, as the core gives them, into records: words, place, and the file's own unit."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any

from tautwise.columns import cut
from tautwise.records import finite
from tautwise.results_window import Relaxation
from tautwise.solve_limits import UNITS, in_shown_unit, kind_of
from tautwise.strict import Refused
from tautwise.units import DIMENSIONS, number_and_unit, read_unit

if TYPE_CHECKING:
    from tautwise.model import Project

Row = Mapping[str, Any]
Change = tuple[str, str, float | None]

_STEPS = {"m": 1e-3, "N": 1.0, "rad": 1e-4, "1": 1e-4}  # as fine as a change is written, in SI


def relaxations_of(project: Project, rows: Sequence[Row]) -> tuple[Relaxation, ...]:
    """Every change, those of supports first: to move a support is a design, to ease a limit is a last resort."""
    ordered = sorted(rows, key=lambda row: row["kind"] == "allowance")
    return tuple(_relaxation(project, row) for row in ordered)


def _relaxation(project: Project, row: Row) -> Relaxation:
    limit, support = row.get("limit"), row.get("support")
    kind = kind_of(project.limits[row["limit"]]) if row["kind"] == "allowance" else ""
    by, to = float(row["by"]), finite(row.get("to"))
    if kind:
        words, key, share = _allowance_change(project, row["limit"], by, to)
        written = _written(project, key, "1" if share else _dimension(kind), share or to, up=by > 0.0)
    else:
        words, key, to = _support_change(project, row["kind"], row["support"], by, to)
        planned = project.turns and row["kind"] == "support_station"  # the file holds east and north, no station
        written = None if planned else _written(project, key, "m", to, up=by > 0.0)
    fault = project.core_fault(key, "")
    return Relaxation(
        change=words,
        by=in_shown_unit(kind, by) or 0.0,
        unit=UNITS[kind] if kind else "m",
        to=in_shown_unit(kind, to),
        pull_N=finite(row.get("pull_N")),
        limit=None if limit is None else project.limits[limit].id,
        support=None if support is None else project.supports[support].name,
        where=None if fault.file is None else f"{fault.file}:{fault.line}",
        written=written,
    )


def _allowance_change(project: Project, index: int, by: float, to: float | None) -> Change:
    """Words and place of a changed allowance, and the share after it where the file asks for one."""
    limit = project.limits[index]
    key = next((name for name in ("least", "share", "most") if getattr(limit, name, None) is not None), "least")
    share = getattr(limit, "share", None)
    words = f"allowed value of {limit.id}"
    if share is None or to is None or to == by:
        return words, f"limits[{index}].{key}", None
    changed = share * to / (to - by)
    return f"{words} (share = {cut(changed, 4, up=by > 0.0)})", f"limits[{index}].{key}", changed


def _support_change(project: Project, kind: str, index: int, by: float, to: float | None) -> Change:
    """Words and place of a moved support; its new value is that of the key the file holds."""
    support = project.supports[index]
    if kind == "support_station":
        return f"station of {support.name}", f"supports[{index}].station", to
    if support.height_m is not None:
        return f"height of {support.name}", f"supports[{index}].height", support.height_m + by
    return f"elevation of {support.name}", f"supports[{index}].elevation", to


def _dimension(kind: str) -> str:
    return {"deg": "rad"}.get(UNITS[kind], UNITS[kind])


def _written(project: Project, key: str, dimension: str, value: float | None, *, up: bool) -> str | None:
    """A value in SI as the file would hold it: its own unit, rounded towards `up`; None where that is not known."""
    text = project.core_raw(key)
    if value is None or not isinstance(text, str | int | float):
        return None
    try:
        unit = number_and_unit(text)[1] if isinstance(text, str) else ""
        factor = float(read_unit(unit).factor) if unit else 1.0
        if unit and read_unit(unit).base != DIMENSIONS[dimension].base:
            return None  # a slope that is written as an angle
    except Refused:
        return None
    decimals = max(0, math.ceil(-math.log10(_STEPS[dimension] / factor) - 1e-9))
    return f"{cut(value / factor, decimals, up=up)} {unit}".strip()
