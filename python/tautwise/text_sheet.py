"""The crew sheet as a crew reads it: what to cut, what to pull, what to measure, where to clamp."""

from __future__ import annotations

import csv
import io
from collections.abc import Sequence
from typing import TYPE_CHECKING

from tautwise.columns import Column, Table, force_column, force_text, number_column, text_column
from tautwise.results_sheet import CrewSheet, CrewTemperature, SpanReading
from tautwise.strict import inert
from tautwise.tables import PLUMB
from tautwise.text import Ink, caution, heading, look_again_lines, next_steps, quoted

if TYPE_CHECKING:
    from tautwise.model import Project

SPANS_IN_A_ROW = 6
FLAT_M = 1.0  # sags below it are measured to the millimetre
FROM = ("from first", "from last")
MARKED = "  Marked under the pull: the same piece as a tape shows it while the pull at that temperature stretches it."
FORMULA_SIGNS = ("=", "+", "-", "@")

Row = tuple[float | str | None, ...]
Readings = tuple[SpanReading, ...]


def sheet_text(sheet: CrewSheet, project: Project, ink: Ink) -> list[str]:
    """The sheet: lengths, pull, sags at each temperature, clipping offsets, return waves."""
    lines = [*heading(project, ink), *_pull_lines(sheet, project, ink), ""]
    lines += [ink.strong("Lengths to cut, unstressed at the stringing temperature"), *_section_lines(sheet)]
    lines += ["", *_span_lines(sheet)]
    if sheet.over_sheaves:
        lines += ["", *_day_lines(sheet, ink), "", *_offset_lines(sheet, ink)]
    if any(span.pulled_from_first for span in sheet.spans):
        lines += ["", *_friction_lines(sheet, ink)]
    lines += ["", *_clamped_lines(sheet, ink), "", *_wave_lines(sheet, ink)]
    lines += look_again_lines(project, sheet.warnings)
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


def _pull_lines(sheet: CrewSheet, project: Project, ink: Ink) -> list[str]:
    head = ink.strong(f"Bare line at {sheet.stringing_degC:.4g} degC, {_method_words(sheet, project)}")
    if sheet.horizontal_tension_N is None:
        return [head, "  Pull until the sags are those below."]
    pull = force_text(sheet.horizontal_tension_N)
    keep = f" +/- {sheet.tolerance_percent:.4g} %" if sheet.tolerance_percent else ""
    first = ", ".join(section.from_support for section in sheet.sections)
    differs = sheet.over_sheaves or bool(sheet.in_service)
    span = "in the first span" if differs else "in every span"
    after = f" after {first}" if differs and len(sheet.sections) > 1 else ""
    return [head, f"  Pull: {pull} horizontal tension{keep} {span}{after}."]


def _method_words(sheet: CrewSheet, project: Project) -> str:
    """How the line is strung, and what is clamped in the end; hangers at an angle lean and are not called plumb."""
    straight = not project.turns and len({support.offset_m for support in project.supports}) == 1
    clamped = any(support.hold in ("hanger", "post") for support in sheet.supports)
    runs = f"runs over sheaves in service ({', '.join(sheet.in_service[:SPANS_IN_A_ROW])})" if sheet.in_service else ""
    if sheet.over_sheaves:
        clip = sheet.clip if straight or sheet.clip != PLUMB else "with one horizontal tension"
        then = f"then clamped {clip}" if clamped or not runs else ""
        return ", ".join(filter(None, ("pulled in over sheaves", then, runs)))
    if runs and not clamped:
        return runs
    hung = straight and any(support.hold == "hanger" for support in sheet.supports)
    return ", ".join(filter(None, ("strung clamped", "hangers plumb" if hung else "", runs)))


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
    return [*Table(columns, tuple(rows)).lines(), MARKED]


def _day_lines(sheet: CrewSheet, ink: Ink) -> list[str]:
    head = ink.strong("On the sheaves: pull of a section's first span, and sags, by the temperature of the line")
    return [head, *_by_temperature(sheet, on_sheaves=True)]


def _clamped_lines(sheet: CrewSheet, ink: Ink) -> list[str]:
    if sheet.in_service:
        pulls, sags = (ink.strong(f"In service: {what}") for what in ("horizontal tension of each span", "sags"))
        by_span = _by_temperature(sheet, on_sheaves=False, pulls=True)
        return [pulls, *by_span, "", sags, *_by_temperature(sheet, on_sheaves=False, pulls=False)]
    head = ink.strong("Clamped: horizontal tension of a section's first span, and sags")
    return [head, *_by_temperature(sheet, on_sheaves=False)]


def _by_temperature(sheet: CrewSheet, *, on_sheaves: bool, pulls: bool | None = None) -> list[str]:
    """Temperatures down, spans across, a few spans in a row of the page.

    pulls: None is the first span's tension and every sag, True every tension alone, False every sag alone.
    """
    states = sorted({*sheet.temperatures, sheet.at_stringing}, key=lambda state: state.temperature_degC)
    lines: list[str] = []
    begin = 0
    for section in sheet.sections:
        end = next(n for n in range(begin, len(sheet.spans)) if sheet.spans[n].to_support == section.to_support) + 1
        for first in range(begin, end, SPANS_IN_A_ROW):
            numbers = range(first, min(first + SPANS_IN_A_ROW, end))
            lines += [""] if lines else []
            readings = [state.over_sheaves if on_sheaves else state.clamped for state in states]
            lines += (
                _pull_block(sheet, states, numbers, readings)
                if pulls
                else _block(sheet, states, numbers, readings, None if pulls is False else begin)
            )
        begin = end
    return lines


def _block(
    sheet: CrewSheet, states: Sequence[CrewTemperature], numbers: range, readings: Sequence[Readings], first: int | None
) -> list[str]:
    """Sags of some spans, beside the tension of the section's first one where it is asked for."""
    pulls = [each[first].horizontal_tension_N if each and first is not None else None for each in readings]
    columns: list[Column] = [number_column("line at", "degC", 1), force_column("tension", pulls)]
    for number in numbers:
        flat = all(each[number].sag_m < FLAT_M for each in readings if each)
        columns.append(number_column(sheet.spans[number].name, "m", 3 if flat else 2))
    rows: list[Row] = [
        (state.temperature_degC, pull, *(each[number].sag_m if each else None for number in numbers))
        for state, pull, each in zip(states, pulls, readings, strict=True)
    ]
    if first is None:
        del columns[1]
        rows = [(row[0], *row[2:]) for row in rows]
    return Table(tuple(columns), tuple(rows)).lines()


def _pull_block(
    sheet: CrewSheet, states: Sequence[CrewTemperature], numbers: range, readings: Sequence[Readings]
) -> list[str]:
    """Horizontal tensions of some spans."""
    every = [each[number].horizontal_tension_N for each in readings if each for number in numbers]
    columns = (
        number_column("line at", "degC", 1),
        *(force_column(sheet.spans[number].name, every) for number in numbers),
    )
    rows: list[Row] = [
        (state.temperature_degC, *(each[number].horizontal_tension_N if each else None for number in numbers))
        for state, each in zip(states, readings, strict=True)
    ]
    return Table(columns, tuple(rows)).lines()


def _offset_lines(sheet: CrewSheet, ink: Ink) -> list[str]:
    listed = [each for each in sheet.supports if each.clip_offset_m is not None]
    lifts = any(each.lifts for each in listed)
    rows: list[Row] = [
        (s.name, None if s.clip_offset_stretched_m is None else abs(s.clip_offset_stretched_m),
         _side(s.clip_offset_stretched_m), s.block_swing_deg, s.block_down_N, s.block_across_N, s.block_resultant_N,
         *(["LIFTS" if s.lifts else None] if lifts else []))
        for s in listed
    ]  # fmt: skip
    loads = [each.block_resultant_N for each in listed]
    columns = (
        text_column("support"),
        number_column("clip at", "m", 3),
        text_column("of the mark at the sheave"),
        number_column("sheave leans", "deg", 1),
        *(force_column(part, loads) for part in ("load down", "across", "in all")),
        *([text_column("look again")] if lifts else []),
    )
    head = ink.strong(f"Clip off, along the line from where it lies on the sheave (at {sheet.stringing_degC:.4g} degC)")
    if not rows:
        return [head, "  Nothing is clamped between the ends."]
    note = "  Mark every sheave before the first is clamped. Loads are on the sheave's hold; across, to the left."
    return [head, *Table(columns, tuple(rows)).lines(), note]


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
    state = "in service" if sheet.in_service else "clamped"
    state = "on the sheaves" if sheet.at_stringing.over_sheaves else state
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
