"""The crew sheet as a crew reads it: what to cut, what to pull, what to measure, where to clamp."""

from __future__ import annotations

import csv
import io
from collections.abc import Sequence
from typing import TYPE_CHECKING

from tautwise.columns import Column, Table, force_column, force_text, number_column, text_column
from tautwise.results_sheet import CrewSheet, CrewTemperature
from tautwise.strict import inert
from tautwise.text import Ink, caution, heading, next_steps, quoted

if TYPE_CHECKING:
    from tautwise.model import Project

SPANS_IN_A_ROW = 6
FLAT_M = 1.0  # sags below it are measured to the millimetre
FROM = ("from first", "from last")
FORMULA_SIGNS = ("=", "+", "-", "@")

Row = tuple[float | str | None, ...]


def sheet_text(sheet: CrewSheet, project: Project, ink: Ink) -> list[str]:
    """The sheet: lengths, pull, sags at each temperature, clipping offsets, return waves."""
    lines = [*heading(project, ink), *_pull_lines(sheet, ink), ""]
    lines += [ink.strong("Lengths to cut, unstressed at the stringing temperature"), *_section_lines(sheet)]
    lines += ["", *_span_lines(sheet)]
    if sheet.over_sheaves:
        lines += ["", *_day_lines(sheet, ink), "", *_offset_lines(sheet, ink)]
    if any(span.pulled_from_first for span in sheet.spans):
        lines += ["", *_friction_lines(sheet, ink)]
    lines += ["", *_clamped_lines(sheet, ink), "", *_wave_lines(sheet, ink)]
    file = quoted(project.source or "FILE")
    steps = [
        ("every condition in full", f"tautwise settle {file}"),
        ("for a spreadsheet", f"tautwise sheet --csv {file}"),
    ]
    return [*lines, *next_steps(steps, ink), *caution(sheet.caution, ink)]


def sheet_csv(sheets: Sequence[CrewSheet]) -> str:
    """A row for each temperature, state and span, under one head; no cell can be taken for a formula."""
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    heads: list[str] = []
    for sheet in sheets:
        for row in sheet.rows():
            if not heads:
                heads = ["project", *row]
                writer.writerow(heads)
            writer.writerow([_cell(sheet.project), *(_cell(value) for value in row.values())])
    return out.getvalue()


def _cell(value: float | str | None) -> str:
    if isinstance(value, str):
        text = inert(value)
        return "'" + text if text.startswith(FORMULA_SIGNS) else text
    return "" if value is None else repr(value)


def _pull_lines(sheet: CrewSheet, ink: Ink) -> list[str]:
    plumb = ", hangers plumb" if any(support.hold == "hanger" for support in sheet.supports) else ""
    where = "pulled in over sheaves" if sheet.over_sheaves else f"strung clamped{plumb}"
    then = f", then clamped {sheet.clip}" if sheet.over_sheaves else ""
    head = ink.strong(f"Bare line at {sheet.stringing_degC:.4g} degC, {where}{then}")
    if sheet.horizontal_tension_N is None:
        return [head, "  Pull until the sags are those below."]
    pull = force_text(sheet.horizontal_tension_N)
    keep = f" +/- {sheet.tolerance_percent:.4g} %" if sheet.tolerance_percent else ""
    first = ", ".join(section.from_support for section in sheet.sections)
    span = "in the first span" if sheet.over_sheaves else "in every span"
    after = f" after {first}" if sheet.over_sheaves and len(sheet.sections) > 1 else ""
    return [head, f"  Pull: {pull} horizontal tension{keep} {span}{after}."]


def _section_lines(sheet: CrewSheet) -> list[str]:
    rows: list[Row] = [
        (f"{s.from_support} to {s.to_support}", s.natural_length_m, s.cut_length_m, s.cut_marked_m)
        for s in sheet.sections
    ]
    columns = (
        text_column("section"),
        number_column("between ends", "m", 3),
        number_column("with allowance", "m", 3),
        number_column("marked under the pull", "m", 3),
    )
    allowance = f"  The allowance is {sheet.end_allowance_m:.4g} m at each end of a section."
    return [*Table(columns, tuple(rows)).lines(), allowance]


def _span_lines(sheet: CrewSheet) -> list[str]:
    rows: list[Row] = [(span.name, span.natural_length_m, span.marked_length_m) for span in sheet.spans]
    columns = (
        text_column("span"),
        number_column("natural length", "m", 3),
        number_column("marked under the pull", "m", 3),
    )
    return Table(columns, tuple(rows)).lines()


def _day_lines(sheet: CrewSheet, ink: Ink) -> list[str]:
    head = ink.strong("On the sheaves: pull of a section's first span, and sags, by the temperature of the line")
    return [head, *_by_temperature(sheet, on_sheaves=True)]


def _clamped_lines(sheet: CrewSheet, ink: Ink) -> list[str]:
    head = ink.strong("Clamped: horizontal tension of a section's first span, and sags")
    return [head, *_by_temperature(sheet, on_sheaves=False)]


def _by_temperature(sheet: CrewSheet, *, on_sheaves: bool) -> list[str]:
    """Temperatures down, spans across, a few spans in a row of the page."""
    states = sorted({*sheet.temperatures, sheet.at_stringing}, key=lambda state: state.temperature_degC)
    lines: list[str] = []
    begin = 0
    for section in sheet.sections:
        end = next(n for n in range(begin, len(sheet.spans)) if sheet.spans[n].to_support == section.to_support) + 1
        for first in range(begin, end, SPANS_IN_A_ROW):
            numbers = range(first, min(first + SPANS_IN_A_ROW, end))
            lines += [""] if lines else []
            lines += _block(sheet, states, begin, numbers, on_sheaves=on_sheaves)
        begin = end
    return lines


def _block(
    sheet: CrewSheet, states: Sequence[CrewTemperature], begin: int, numbers: range, *, on_sheaves: bool
) -> list[str]:
    readings = [state.over_sheaves if on_sheaves else state.clamped for state in states]
    pulls = [each[begin].horizontal_tension_N if each else None for each in readings]
    columns: list[Column] = [number_column("line at", "degC", 1), force_column("tension", pulls)]
    for number in numbers:
        flat = all(each[number].sag_m < FLAT_M for each in readings if each)
        columns.append(number_column(sheet.spans[number].name, "m", 3 if flat else 2))
    rows: list[Row] = [
        (state.temperature_degC, pull, *(each[number].sag_m if each else None for number in numbers))
        for state, pull, each in zip(states, pulls, readings, strict=True)
    ]
    return Table(tuple(columns), tuple(rows)).lines()


def _offset_lines(sheet: CrewSheet, ink: Ink) -> list[str]:
    rows: list[Row] = [
        (s.name, s.clip_offset_stretched_m, _side(s.clip_offset_stretched_m), s.block_swing_deg, s.block_down_N)
        for s in sheet.supports
        if s.clip_offset_m is not None
    ]
    columns = (
        text_column("support"),
        number_column("clip at", "m", 3),
        text_column("of the mark at the sheave"),
        number_column("sheave leans", "deg", 1),
        force_column("load on it", [s.block_down_N for s in sheet.supports]),
    )
    head = ink.strong(f"Clip off, along the line from where it lies on the sheave (at {sheet.stringing_degC:.4g} degC)")
    if not rows:
        return [head, "  Nothing is clamped between the ends."]
    return [head, *Table(columns, tuple(rows)).lines(), "  Mark every sheave before the first is clamped."]


def _side(offset: float | None) -> str:
    if offset is None or abs(offset) < 5e-4:
        return "at it"
    return "ahead" if offset > 0.0 else "behind"


def _friction_lines(sheet: CrewSheet, ink: Ink) -> list[str]:
    free = sheet.at_stringing.over_sheaves or sheet.at_stringing.clamped
    rows: list[Row] = []
    for span, reading in zip(sheet.spans, free, strict=True):
        ends = (span.pulled_from_first, span.pulled_from_last)
        tensions = [end.horizontal_tension_N if end else None for end in ends]
        sags = [end.sag_m if end else None for end in ends]
        rows.append((span.name, reading.horizontal_tension_N, *tensions, reading.sag_m, *sags))
    columns = (
        text_column("between"),
        *(force_column(head, [row[1] for row in rows if isinstance(row[1], float)]) for head in ("tension", *FROM)),
        *(number_column(head, "m", 3) for head in ("sag", *FROM)),
    )
    when = f"at {sheet.stringing_degC:.4g} degC"
    head = ink.strong(f"What friction of the sheaves may leave, pulled from the first or from the last end ({when})")
    return [head, *Table(columns, tuple(rows)).lines()]


def _wave_lines(sheet: CrewSheet, ink: Ink) -> list[str]:
    readings = sheet.at_stringing.over_sheaves or sheet.at_stringing.clamped
    state = "on the sheaves" if sheet.at_stringing.over_sheaves else "clamped"
    rows: list[Row] = [
        (span.name, reading.sag_m, *reading.return_wave_s, reading.return_wave_parabola_s[2])
        for span, reading in zip(sheet.spans, readings, strict=bool(readings))
    ]
    columns = (
        text_column("between"),
        number_column("sag", "m", 3),
        number_column("1 return", "s", 2),
        number_column("3 returns", "s", 2),
        number_column("5 returns", "s", 2),
        number_column("5, parabola", "s", 2),
    )
    head = ink.strong(f"Return wave, {state} at {sheet.stringing_degC:.4g} degC")
    return [head, *Table(columns, tuple(rows)).lines()]
