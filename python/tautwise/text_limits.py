"""What the commands print of limits: the window with its ends, and the verdict with the governing limit."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

from tautwise.columns import (
    Column,
    Table,
    cut,
    force_format,
    force_text,
    forces_text,
    number_column,
    plural,
    text_column,
)
from tautwise.results_vet import (
    FAILS,
    UNDECIDED,
    WAIVED,
    FileVerdict,
    LimitState,
    VetReport,
    both_places,
    human_unit,
    limit_table,
    shown_values,
)
from tautwise.results_window import (
    AT_LEAST,
    NEVER,
    PullToSpecify,
    PullWindow,
    Relaxation,
    WindowEnd,
    conflict_table,
    governed_by,
    price_table,
)
from tautwise.text import Ink, caution, heading, look_again_lines, next_steps, quoted

if TYPE_CHECKING:
    from tautwise.model import Project


def window_text(window: PullWindow, project: Project, ink: Ink) -> list[str]:
    """The window with what governs it and the pull to specify, or what shuts it and the changes that open it."""
    body = _open_lines(window, project, ink) if window.open else _shut_lines(window, project, ink)
    note = ["", "Waivers are not applied here: these are the pulls that keep every limit."] if project.waivers else []
    return [*heading(project, ink), *body, *note, *caution(window.caution, ink)]


def vet_text(report: VetReport, projects: Sequence[Project], ink: Ink) -> list[str]:
    """Every limit, worst first, file by file; of several files the ones that fail come first."""
    pairs = sorted(zip(report.files, projects, strict=True), key=lambda pair: (pair[0].holds, -_worst_use(pair[0])))
    lines: list[str] = []
    if len(pairs) > 1:
        lines += [_files_head(report, ink), *_file_table([file for file, _ in pairs]).lines(), ""]
    for file, project in pairs:
        lines += [*heading(project, ink), *_verdict_lines(file, project, ink), ""]
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
    lines += look_again_lines(project, window.warnings)
    if window.least_used:
        lines += ["", *_specify_lines(window, ink)]
    prices = price_table(window)
    if prices.rows:
        head = "What moves the ends, pull for each metre, until another limit takes over"
        lines += ["", ink.strong(head), *prices.lines()]
    file = quoted(project.source or "FILE")
    if window.specify is None:
        return [*lines, *next_steps([("add the limit that is missing, then", f"tautwise window {file}")], ink)]
    pull = f'"{_specified(window.specify)[0]}"'
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
    unit, divisor, decimals = force_format([low, high])
    return f"{cut(low / divisor, decimals, up=True)} to {cut(high / divisor, decimals, up=False)} {unit}"


def _end_table(window: PullWindow) -> Table:
    ends = [(name, end) for name, end in (("lowest", window.low), ("highest", window.high)) if end]
    unit, divisor, decimals = force_format(end.horizontal_tension_N for _, end in ends)
    columns = (
        text_column("end"),
        Column("pull", unit, 1.0, decimals),
        text_column("governed by"),
        Column("value", decimals=0),
        Column("allowed", decimals=0),
        text_column("unit"),
        text_column("condition"),
        text_column("at"),
    )
    rows = tuple(
        (
            name,
            cut(end.horizontal_tension_N / divisor, decimals, up=name == "lowest"),
            governed_by(end),
            *shown_values(end.unit, end.allowed, end.value, end.allowed),
            end.condition,
            both_places(end.place, end.other_place),
        )
        for name, end in ends
    )
    return Table(columns, rows)


def _second_looks(window: PullWindow) -> list[str]:
    return ["", *(f"  Look again: {text}" for text in window.findings)] if window.findings else []


def _specify_lines(window: PullWindow, ink: Ink) -> list[str]:
    best = window.specify or window.least_used
    if best is None:
        return []
    pull, band = _specified(best)
    word = "Specify" if window.specify else "Of the pulls tried, the limits are used least at"
    lines = [ink.strong(f"{word} {pull} {band}, bare line at {best.temperature_degC:.4g} degC"), *_edge_lines(best)]
    if window.specify is None:
        lines.append(ink.alarm("  Specify none before the open-ended side has its limit."))
    if best.worst_utilisation > 1.0:
        lines.append(ink.alarm("  The window is narrower than the tolerance: at its edges a limit fails."))
    return lines


def _specified(best: PullToSpecify) -> tuple[str, str]:
    """The pull and the range that its tolerance leaves, with the same decimals."""
    (pull, least, most), unit = forces_text(best.horizontal_tension_N, best.least_pull_N, best.most_pull_N)
    if not best.tolerance_percent:
        return f"{pull} {unit}", "exactly"
    return f"{pull} {unit}", f"+/- {best.tolerance_percent:g} % ({least} to {most} {unit})"


def _edge_lines(best: PullToSpecify) -> list[str]:
    """What is used most at either edge of the range."""
    edges = [edge for edge in best.edges if edge.limit and edge.utilisation is not None]
    if not edges:
        return []
    if not best.tolerance_percent:
        return [f"  Most used: {_edge_words(edges[0])}"]
    pulls, unit = forces_text(*(edge.horizontal_tension_N for edge in edges))
    rows = (f"    at {pull} {unit}  {_edge_words(edge)}" for pull, edge in zip(pulls, edges, strict=True))
    return ["  Most used over that range:", *rows]


def _edge_words(edge: WindowEnd) -> str:
    place = f", {both_places(edge.place, edge.other_place)}" if edge.place else ""
    return f"{edge.limit} {100.0 * (edge.utilisation or 0.0):.1f} % ({edge.condition}{place})"


def _shut_lines(window: PullWindow, project: Project, ink: Ink) -> list[str]:
    low, high = window.searched_N
    (least, most), unit = forces_text(low, high)
    tried = f"from {least} to {most} {unit}"
    lines = [
        ink.alarm("SHUT: no pull keeps every limit") + f" (tried {tried}, bare at {window.temperature_degC:.4g} degC)"
    ]
    lines += [*_conflict_lines(window, ink), *look_again_lines(project, window.warnings)]
    file = quoted(project.source or "FILE")
    if not window.relax:
        lines += ["", "No single change of a limit or a support was found that opens it."]
        return [
            *lines,
            *next_steps([("see each limit at some pull", f'tautwise vet {file} --pull "{_between(window)}"')], ink),
        ]
    head = "Choose one: each of these changes alone opens it, if only just"
    lines += ["", ink.strong(head), *_relax_table(window).lines()]
    first = window.relax[0]
    place = f", {first.where}" if first.where else ""
    return [*lines, *next_steps([(f"change the {first.change}{place}, then", f"tautwise window {file}")], ink)]


def _conflict_lines(window: PullWindow, ink: Ink) -> list[str]:
    """The limits that exclude one another; or the one that no pull keeps, beside which no other matters."""
    if not window.conflict:
        return []
    never = [each for each in window.conflict if each.side == NEVER]
    if never:
        head = f"No pull keeps {'this limit' if len(never) == 1 else 'any of these limits'}"
        columns = (text_column("limit"), text_column("condition"))
        return ["", ink.strong(head), *Table(columns, tuple((each.limit, each.condition) for each in never)).lines()]
    table = conflict_table(window.conflict, [each.pull_N for each in window.relax])
    return ["", ink.strong("These exclude one another"), *table.lines()]


def _between(window: PullWindow) -> str:
    """A pull amid what the conflicting limits need."""
    needs = [each.needs_N for each in window.conflict if each.needs_N] or list(window.searched_N)
    return f"{math.exp(math.fsum(map(math.log, needs)) / len(needs)) / 1e3:.3g} kN"


def _relax_table(window: PullWindow) -> Table:
    relax = window.relax
    unit, divisor, decimals = force_format(
        [*(each.pull_N for each in relax), *(each.needs_N for each in window.conflict)]
    )
    columns = [
        text_column("change"),
        Column("by", decimals=0),
        Column("to", decimals=0),
        text_column("unit"),
        text_column("in the file"),
        Column("then a pull near", unit, divisor, decimals),
        text_column("where"),
    ]
    rows = [_relax_row(each, _near(window, each, divisor, decimals)) for each in relax]
    if all(row[4] is None or str(row[4]).rpartition(" ")[2] in (row[3], "%") or " " not in str(row[4]) for row in rows):
        del columns[4]
        rows = [(*row[:4], *row[5:]) for row in rows]
    return Table(tuple(columns), tuple(rows))


def _relax_row(each: Relaxation, pull: str | None) -> tuple[float | str | None, ...]:
    unit, divisor, decimals = human_unit(each.unit, max(abs(each.to or 0.0), abs(each.by)))
    decimals = max(decimals, 3)
    up = each.by > 0.0
    by = cut(each.by / divisor, decimals, up=up)
    to = None if each.to is None else cut(each.to / divisor, decimals, up=up)
    return (each.change, f"+{by}" if up else by, to, unit, each.written, pull, each.where)


def _near(window: PullWindow, each: Relaxation, divisor: float, decimals: int) -> str | None:
    """The pull after a change; where a limit is eased, the other one bounds it, and decides how it is rounded."""
    if each.pull_N is None:
        return None
    others = [one for one in window.conflict if one.limit != each.limit and one.needs_N is not None]
    if each.limit is None or not others:
        return f"{each.pull_N / divisor:.{decimals}f}"
    bound = min(others, key=lambda one: abs((one.needs_N or 0.0) - (each.pull_N or 0.0)))
    return cut(each.pull_N / divisor, decimals, up=bound.side == AT_LEAST)


def _verdict_lines(file: FileVerdict, project: Project, ink: Ink) -> list[str]:
    lines = [_verdict_head(file, ink)]
    findings = look_again_lines(project, file.findings)
    if not file.limits:
        return [*lines, *findings]
    lines += ["", *(_accented(line, ink) for line in limit_table(file.limits).lines())]
    return [*lines, "", *_governing_lines(file.limits), *_waived_lines(file.limits), *findings]


def _accented(line: str, ink: Ink) -> str:
    word = f"  {FAILS.upper()}  "
    return line.replace(word, f"  {ink.alarm(FAILS.upper())}  ", 1)


def _verdict_head(file: FileVerdict, ink: Ink) -> str:
    pull = "" if file.pull_N is None else f"at a pull of {force_text(file.pull_N)}"
    if not file.limits:
        return ink.strong(f"No limit to judge {pull}".rstrip() + ": add [[limit]] tables")
    limits = {limit.id for limit in file.limits}
    count, rows = plural(len(limits), "limit"), len(file.limits)
    if file.holds:
        every = f" in all {rows} rows," if rows > len(limits) else ""
        waived = {limit.id for limit in file.limits if limit.word == WAIVED}
        kept = f"{len(limits) - len(waived)} of {count} kept, {len(waived)} waived" if waived else f"{count} kept"
        every = f", in {rows} rows," if every and waived else every
        return ink.strong(f"HOLDS: {kept}{every} {pull}".rstrip(", "))
    failing = [limit.id for limit in file.limits if limit.word == FAILS]
    if not failing:
        unjudged = {limit.id for limit in file.limits if limit.word == UNDECIDED}
        return ink.alarm(f"UNDECIDED: {len(unjudged)} of {count} could not be judged {pull}".rstrip())
    every = f" ({len(failing)} of {rows} rows)," if rows > len(limits) else ""
    return ink.alarm(f"FAILS: {len(set(failing))} of {count} not kept{every} {pull}".rstrip(", "))


def _governing_lines(limits: Sequence[LimitState]) -> list[str]:
    worst = next((limit for limit in limits if limit.word != WAIVED), limits[0])
    lines = []
    if worst.status != UNDECIDED:
        place = f", {both_places(worst.place, worst.other_place)}" if worst.place else ""
        used = "" if worst.utilisation is None else f", {100.0 * worst.utilisation:.1f} % used"
        lines = [f"Governing: {worst.id} in {worst.condition or 'no condition'}{place}{used}."]
        notes = (("Where it stands", worst.clause), ("Why", worst.why))
        lines += [f"  {head}: {' '.join(text.split())}" for head, text in notes if text]
    reasons = dict.fromkeys(limit.reason for limit in limits if limit.status == UNDECIDED and limit.reason)
    return [*lines, *(f"Undecided: {reason}" for reason in reasons)]


def _waived_lines(limits: Sequence[LimitState]) -> list[str]:
    """Which limits may fail, until when and why."""
    return [
        f"Waived until {limit.waiver.until}: {limit.id} in {limit.condition}. {' '.join(limit.waiver.reason.split())}"
        for limit in limits
        if limit.waiver is not None
    ]


def _files_head(report: VetReport, ink: Ink) -> str:
    failing = sum(any(limit.word == FAILS for limit in file.limits) for file in report.files)
    unjudged = sum(not file.holds for file in report.files) - failing
    count = plural(len(report.files), "file")
    if failing:
        more = f", {unjudged} with limits that could not be judged" if unjudged else ""
        return ink.alarm(f"{failing} of {count} with limits that do not hold{more}")
    if unjudged:
        return ink.alarm(f"{unjudged} of {count} with limits that could not be judged")
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
        governs = worst if worst and worst.status != UNDECIDED else None
        names = (governs.id, governs.condition) if governs else (None, None)
        rows.append((file.file, word, used, *names))
    return Table(columns, tuple(rows))


def _worst_use(file: FileVerdict) -> float:
    return max((limit.utilisation or 0.0 for limit in file.limits), default=0.0)
