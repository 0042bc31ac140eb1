"""What the commands print of limits: the window with its ends, and the verdict with the governing limit."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

from tautwise.columns import Column, Table, force_column, force_text, number_column, plural, text_column
from tautwise.results_vet import FAILS, HOLDS, FileVerdict, LimitState, VetReport, human_unit, limit_table
from tautwise.results_window import OPEN_ENDED, PullWindow, Relaxation, conflict_table, price_table
from tautwise.text import Ink, caution, heading, next_steps, quoted, rounded

if TYPE_CHECKING:
    from tautwise.model import Project


def window_text(window: PullWindow, project: Project, ink: Ink) -> list[str]:
    """The window with what governs it and the pull to specify, or what shuts it and the changes that open it."""
    body = _open_lines(window, project, ink) if window.open else _shut_lines(window, project, ink)
    return [*heading(project, ink), *body, *caution(window.caution, ink)]


def vet_text(report: VetReport, projects: Sequence[Project], ink: Ink, *, every: bool = False) -> list[str]:
    """Every limit, worst first, file by file; of several files the ones that fail come first."""
    pairs = sorted(zip(report.files, projects, strict=True), key=lambda pair: (pair[0].holds, -_worst_use(pair[0])))
    lines: list[str] = []
    if len(pairs) > 1:
        lines += [_files_head(report, ink), *_file_table([file for file, _ in pairs]).lines(), ""]
    for file, project in pairs:
        lines += [*heading(project, ink), *_verdict_lines(file, ink, every=every), ""]
    failing = [project for file, project in pairs if not file.holds]
    meant = quoted((failing or list(projects))[0].source or "FILE") if projects else "FILE"
    aim = "find the pulls that keep every limit" if failing else "see how far the pull may move"
    return [*lines[:-1], *next_steps([(aim, f"tautwise window {meant}")], ink), *caution(report.caution, ink)]


def best_so_far(window: PullWindow | None) -> str:
    """What a cancelled search had found, in one line."""
    if window is None or window.specify is None:
        return "cancelled; no pull to report yet"
    best = window.specify
    pull, used = force_text(best.horizontal_tension_N), 100.0 * best.worst_utilisation
    return f"cancelled; best pull so far, not verified: {pull}, worst use of a limit {used:.1f} %"


def _open_lines(window: PullWindow, project: Project, ink: Ink) -> list[str]:
    lines = [_open_head(window, ink), "", *_end_table(window).lines(), *_second_looks(window)]
    if window.specify:
        lines += ["", *_specify_lines(window, ink)]
    prices = price_table(window.prices)
    if prices.rows:
        lines += ["", ink.strong("What moves the ends, pull for each metre"), *prices.lines()]
    file = quoted(project.source or "FILE")
    if _is_open_ended(window):
        return [*lines, *next_steps([("add the limit that is missing, then", f"tautwise window {file}")], ink)]
    pull = f'"{window.specify.horizontal_tension_N / 1e3:.4g} kN"' if window.specify else '"... kN"'
    steps = [
        ("judge every limit at this pull", f"tautwise vet {file} --pull {pull}"),
        ("see the line hang at this pull", f"tautwise settle {file} --pull {pull}"),
        ("keep it", f"horizontal_tension = {pull} under [stringing]"),
    ]
    return [*lines, *next_steps(steps, ink)]


def _open_head(window: PullWindow, ink: Ink) -> str:
    bare = f"strung bare at {window.temperature_degC:.4g} degC"
    if len(window.intervals) > 1:
        stretches = " and ".join(_stretch(low, high) for low, high in window.intervals)
        return ink.strong(f"OPEN, in {len(window.intervals)} stretches: pulls of {stretches}, {bare}")
    low, high = window.low, window.high
    if low is None or high is None:
        return ink.strong(f"OPEN, {bare}")
    stretch = _stretch(low.horizontal_tension_N, high.horizontal_tension_N)
    return ink.strong(f"OPEN: pulls of {stretch} keep every limit, {bare}")


def _stretch(low: float, high: float) -> str:
    unit, divisor, decimals = human_unit("N", high)
    return f"{rounded(low / divisor, decimals, up=True)} to {rounded(high / divisor, decimals, up=False)} {unit}"


def _end_table(window: PullWindow) -> Table:
    ends = [(name, end) for name, end in (("lowest", window.low), ("highest", window.high)) if end]
    unit, divisor, decimals = human_unit("N", max((end.horizontal_tension_N for _, end in ends), default=0.0))
    columns = (
        text_column("end"),
        Column("pull", unit, 1.0, decimals),
        text_column("governed by"),
        text_column("condition"),
        text_column("at"),
    )
    rows = tuple(
        (
            name,
            rounded(end.horizontal_tension_N / divisor, decimals, up=name == "lowest"),
            end.limit or OPEN_ENDED,
            end.condition,
            end.place,
        )
        for name, end in ends
    )
    return Table(columns, rows)


def _is_open_ended(window: PullWindow) -> bool:
    return any(end is not None and end.limit is None for end in (window.low, window.high))


def _second_looks(window: PullWindow) -> list[str]:
    looks = []
    low, high = window.searched_N
    if window.low and window.low.limit is None:
        looks.append(f"open-ended below: no limit stops the pull down to {force_text(low)}, the lowest one tried.")
        looks.append("a slack line breaks most clearances; is a clearance or a sag limit missing?")
    if window.high and window.high.limit is None:
        looks.append(f"open-ended above: no limit stops the pull up to {force_text(high)}, the highest one tried.")
        looks.append("a pull always costs strength; is a limit on tension or on a support's load missing?")
    if len(window.intervals) > 1:
        looks.append(
            "the pulls between these stretches break a limit; the ends shown are of the stretch to specify from."
        )
    return ["", *(f"  Look again: {text}" for text in looks)] if looks else []


def _specify_lines(window: PullWindow, ink: Ink) -> list[str]:
    best = window.specify
    if best is None:
        return []
    band = "exactly"
    if best.tolerance_percent:
        band = f"+/- {best.tolerance_percent:g} % ({force_text(best.least_pull_N)} to {force_text(best.most_pull_N)})"
    word = "Of the pulls tried, the limits are used least at" if _is_open_ended(window) else "Specify"
    head = f"{word} {force_text(best.horizontal_tension_N)} {band}, bare line at {best.temperature_degC:.4g} degC"
    lines = [ink.strong(head)]
    if best.limit:
        place = f", {best.place}" if best.place else ""
        use = f"{100.0 * best.worst_utilisation:.1f} %"
        lines.append(f"  Most used over that range: {best.limit}, {use} ({best.condition}{place}).")
    if _is_open_ended(window):
        lines.append(ink.alarm("  Specify none before the open-ended side has its limit."))
    if best.worst_utilisation > 1.0:
        lines.append(ink.alarm("  The window is narrower than the tolerance: at its edges a limit fails."))
    return lines


def _shut_lines(window: PullWindow, project: Project, ink: Ink) -> list[str]:
    low, high = window.searched_N
    tried = f"from {force_text(low)} to {force_text(high)}"
    lines = [
        ink.alarm("SHUT: no pull keeps every limit") + f" (tried {tried}, bare at {window.temperature_degC:.4g} degC)"
    ]
    if window.conflict:
        lines += ["", ink.strong("These exclude one another"), *conflict_table(window.conflict).lines()]
    file = quoted(project.source or "FILE")
    if not window.relax:
        lines += ["", "No single change of a limit or a support was found that opens it."]
        return [
            *lines,
            *next_steps([("see each limit at some pull", f'tautwise vet {file} --pull "{_between(window)}"')], ink),
        ]
    lines += ["", ink.strong("Each of these changes alone opens it, if only just"), *_relax_table(window.relax).lines()]
    first = window.relax[0]
    place = f", {first.where}" if first.where else ""
    return [*lines, *next_steps([(f"change the {first.change}{place}, then", f"tautwise window {file}")], ink)]


def _between(window: PullWindow) -> str:
    """A pull amid what the conflicting limits need."""
    needs = [each.needs_N for each in window.conflict if each.needs_N] or list(window.searched_N)
    return f"{math.exp(math.fsum(map(math.log, needs)) / len(needs)) / 1e3:.3g} kN"


def _relax_table(relax: Sequence[Relaxation]) -> Table:
    columns = (
        text_column("change"),
        Column("by", decimals=0),
        Column("to", decimals=0),
        text_column("unit"),
        force_column("then a pull of", [each.pull_N for each in relax]),
        text_column("where"),
    )
    return Table(columns, tuple(_relax_row(each) for each in relax))


def _relax_row(each: Relaxation) -> tuple[float | str | None, ...]:
    unit, divisor, decimals = human_unit(each.unit, max(abs(each.to or 0.0), abs(each.by)))
    decimals = max(decimals, 3)
    up = each.by > 0.0
    by = rounded(each.by / divisor, decimals, up=up)
    to = None if each.to is None else rounded(each.to / divisor, decimals, up=up)
    return (each.change, f"+{by}" if up else by, to, unit, each.pull_N, each.where)


def _verdict_lines(file: FileVerdict, ink: Ink, *, every: bool) -> list[str]:
    lines = [_verdict_head(file, ink)]
    if not file.limits:
        return lines
    lines += ["", *(_accented(line, ink) for line in limit_table(file.limits).lines())]
    if not every:
        lines += ["", *_governing_lines(file.limits[0])]
    return lines


def _accented(line: str, ink: Ink) -> str:
    word = f"  {FAILS.upper()}  "
    return line.replace(word, f"  {ink.alarm(FAILS.upper())}  ", 1)


def _verdict_head(file: FileVerdict, ink: Ink) -> str:
    pull = "" if file.pull_N is None else f" at a pull of {force_text(file.pull_N)}"
    if not file.limits:
        return ink.strong(f"No limit to judge{pull}: add [[limit]] tables")
    wrong = sum(limit.status != HOLDS for limit in file.limits)
    count = plural(len(file.limits), "limit")
    if not wrong:
        return ink.strong(f"HOLDS: {count} kept{pull}")
    word = "FAILS" if any(limit.status == FAILS for limit in file.limits) else "UNDECIDED"
    return ink.alarm(f"{word}: {wrong} of {count} not kept{pull}")


def _governing_lines(worst: LimitState) -> list[str]:
    place = f", {worst.place}" if worst.place else ""
    used = "" if worst.utilisation is None else f", {100.0 * worst.utilisation:.1f} % used"
    lines = [f"Governing: {worst.id} in {worst.condition or 'no condition'}{place}{used}."]
    notes = (("Where it stands", worst.clause), ("Why", worst.why))
    return [*lines, *(f"  {head}: {' '.join(text.split())}" for head, text in notes if text)]


def _files_head(report: VetReport, ink: Ink) -> str:
    failing = sum(not file.holds for file in report.files)
    count = plural(len(report.files), "file")
    if failing:
        return ink.alarm(f"{failing} of {count} with limits that do not hold")
    return ink.strong(f"{count}, every limit holds")


def _file_table(files: Sequence[FileVerdict]) -> Table:
    columns = (
        text_column("file"),
        text_column("verdict"),
        number_column("worst use", "%", 1),
        text_column("governing limit"),
        text_column("condition"),
    )
    rows: list[tuple[float | str | None, ...]] = []
    for file in files:
        worst = file.limits[0] if file.limits else None
        word = "holds" if file.holds else (worst.status.upper() if worst else "")
        used = None if worst is None or worst.utilisation is None else 100.0 * worst.utilisation
        rows.append((file.file, word, used, worst.id if worst else None, worst.condition if worst else None))
    return Table(columns, tuple(rows))


def _worst_use(file: FileVerdict) -> float:
    return max((limit.utilisation or 0.0 for limit in file.limits), default=0.0)
