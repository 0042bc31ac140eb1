"""What the commands print for people: the answer first, then worst first, then what to do next.

Every function returns lines. `Ink` puts the few accents in where a terminal shows them; without it the text is plain.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from tautwise.columns import Table, force_column, force_text, length_column, number_column, plural, text_column
from tautwise.findings import bare_texts
from tautwise.history import history_words
from tautwise.results_line import Equilibrium, SettleReport, SupportState
from tautwise.strict import shown
from tautwise.words import condition_words

if TYPE_CHECKING:
    from tautwise.model import Project

GAP_IN_ROUNDING = 1e-14  # below it the two energies differ by rounding alone
BLOWN_M = 5e-4  # blow-out below half a millimetre is not worth a column
LOOKS_MOST = 8
TEXT_MOST = 400  # of a finding, which holds names from the file
LOADED_SHARE = 1e-3  # of the tension: a difference across a mark that is worth a column

Row = tuple[float | str | None, ...]


@dataclass(frozen=True, slots=True)
class Ink:
    """Accents of a terminal, or none.

    >>> Ink(False).strong("West mast")
    'West mast'
    """

    on: bool = False

    def strong(self, text: str) -> str:
        """A head or the answer."""
        return f"\033[1m{text}\033[0m" if self.on else text

    def alarm(self, text: str) -> str:
        """Something that fails."""
        return f"\033[1;31m{text}\033[0m" if self.on else text

    def quiet(self, text: str) -> str:
        """Something that need not be read each time."""
        return f"\033[2m{text}\033[0m" if self.on else text


def heading(project: Project, ink: Ink) -> list[str]:
    """Title and file."""
    names = [project.title, shown(str(project.source or ""), 200)]
    given = [name for name in names if name]
    return [ink.strong(given[0]), *given[1:], ""] if given else []


def next_steps(steps: Sequence[tuple[str, str]], ink: Ink) -> list[str]:
    """What to do next: aim and command."""
    widest = max(len(aim) for aim, _ in steps)
    lines = [f"  {aim.ljust(widest)}  {command}" for aim, command in steps]
    return ["", ink.strong("Next"), *lines]


def quoted(name: object) -> str:
    """A file name as a shell takes it.

    >>> quoted("a b.toml")
    "'a b.toml'"
    """
    import shlex

    return shlex.quote(shown(str(name), 200))


def look_again_lines(project: Project, findings: Sequence[str]) -> list[str]:
    """What deserves a second look; the file stands in the heading already."""
    texts = bare_texts(project, findings)
    more = [f"  and {plural(len(texts) - LOOKS_MOST, 'more warning')}."] if len(texts) > LOOKS_MOST else []
    return ["", *(f"  Look again: {shown(text, TEXT_MOST)}" for text in texts[:LOOKS_MOST]), *more] if texts else []


def caution(text: str, ink: Ink) -> list[str]:
    """The caution, at the foot of every answer."""
    return ["", ink.quiet(text)]


def settle_text(report: SettleReport, project: Project, ink: Ink, pull: str | None = None) -> list[str]:
    """The settled conditions, highest tension first, each in full; `pull` as it was asked for."""
    ranked = sorted(report.conditions, key=lambda each: (each.settled, -(each.tension_max_N or 0.0)))
    lines = [*heading(project, ink), *_strung_lines(report, project), "", *_summary(ranked, project, ink)]
    for each in ranked:
        lines += ["", *condition_text(each, project, ink)]
    lines += look_again_lines(project, report.warnings)
    file = quoted(project.source or "FILE")
    at_pull = f" --pull {quoted(pull)}" if pull else ""
    steps = [("judge every limit at this pull", f"tautwise vet {file}{at_pull}")] if project.limits else []
    steps.append(("find the pulls that keep every limit", f"tautwise window {file}"))
    return [*lines, *next_steps(steps, ink), *caution(report.caution, ink)]


def condition_text(found: Equilibrium, project: Project, ink: Ink) -> list[str]:
    """One condition in full."""
    condition = next(each for each in project.conditions if each.name == found.name)
    head = f"{ink.strong(found.name)}: {condition_words(condition)}"
    if not found.settled:
        return [head, ink.alarm(f"  NOT SETTLED: {found.status_text}")]
    lines = [head, *_span_lines(found), "", *_support_lines(found.supports)]
    if found.marks:
        lines += ["", *_mark_lines(found, turns=project.turns)]
    return [*lines, "", *_stretch_lines(found), f"  {_bracket_words(found)}"]


def _stretch_lines(found: Equilibrium) -> list[str]:
    """What history has done to the line, span by span."""
    if found.state == "initial":
        return []
    longer = [100.0 * span.permanent_strain for span in found.spans]
    least, most = f"{min(longer):.4f}", f"{max(longer):.4f}"
    much = most if least == most else f"{least} to {most}"
    lines = [f"  Stretched for good: {much} % longer at this tension and temperature than as strung."]
    if found.history is not None:
        lines += [f"  History: {history_words(found.history)}."]
    return lines


def _strung_lines(report: SettleReport, project: Project) -> list[str]:
    strung = report.stringing
    pull = "to its natural lengths"
    if strung.horizontal_tension_N is not None:
        pull = f"with a pull of {force_text(strung.horizontal_tension_N)}"
    total = math.fsum(strung.natural_length_m)
    spans = plural(len(strung.natural_length_m), "span")
    rule = project.stringing
    over = f" over sheaves, clamped {rule.clip}," if rule.over_sheaves else ""
    return [
        f"Strung bare{over} at {strung.temperature_degC:.4g} degC {pull}; natural length {total:.3f} m in {spans}.",
    ]


def _summary(ranked: Sequence[Equilibrium], project: Project, ink: Ink) -> list[str]:
    strength = project.line.breaking_strength_N
    shares = [None if strength is None or e.tension_max_N is None else 100 * e.tension_max_N / strength for e in ranked]
    columns = [
        text_column("condition"),
        number_column("temperature", "degC", 1),
        force_column("tension", [each.tension_max_N for each in ranked]),
        number_column("of strength", "%", 1),
        length_column("greatest sag", [each.sag_max_m for each in ranked]),
        text_column("in span"),
        text_column("state"),
    ]
    rows: list[Row] = [
        (each.name, each.temperature_degC, each.tension_max_N, share, each.sag_max_m, _deepest(each), _words(each))
        for each, share in zip(ranked, shares, strict=True)
    ]
    if strength is None:
        del columns[3]
        rows = [(*row[:3], *row[4:]) for row in rows]
    lines = [ink.strong("Conditions, highest tension first"), *Table(tuple(columns), tuple(rows)).lines()]
    return [*lines, *_broken_lines(ranked, strength, ink)]


def _broken_lines(ranked: Sequence[Equilibrium], strength: float | None, ink: Ink) -> list[str]:
    broken = [each.name for each in ranked if strength is not None and (each.tension_max_N or 0.0) > strength]
    if strength is None or not broken:
        return []
    return [ink.alarm(f"  Above its breaking strength of {force_text(strength)}: {', '.join(broken)}.")]


def _words(found: Equilibrium) -> str:
    """The status of a condition as words."""
    return found.status.replace("_", " ")


def _deepest(found: Equilibrium) -> str | None:
    return max(found.spans, key=lambda span: span.sag_m).name if found.spans else None


def _span_lines(found: Equilibrium) -> list[str]:
    spans = found.spans
    blown = max(span.blowout_m for span in spans) >= BLOWN_M
    columns = [
        text_column("between"),
        length_column("span", [span.span_m for span in spans]),
        number_column("natural length", "m", 3),
        force_column("horizontal", [span.horizontal_tension_N for span in spans]),
        force_column("tension", [span.tension_max_N for span in spans]),
        length_column("sag", [span.sag_m for span in spans]),
        length_column("small-deflection", [span.small_deflection_sag_m for span in spans]),
        number_column("off by", "%", 2),
        length_column("blow-out", [span.blowout_m for span in spans]),
        length_column("lowest at", [1e3]),
        length_column("elevation", [span.low_point.elevation_m for span in spans if span.low_point]),
    ]
    rows: list[Row] = [
        (
            s.name, s.span_m, s.natural_length_m, s.horizontal_tension_N, s.tension_max_N, s.sag_m,
            s.small_deflection_sag_m, s.small_deflection_off_percent, s.blowout_m,
            s.low_point.station_m if s.low_point else None, s.low_point.elevation_m if s.low_point else None,
        )
        for s in spans
    ]  # fmt: skip
    if not blown:
        del columns[8]
        rows = [(*row[:8], *row[9:]) for row in rows]
    return Table(tuple(columns), tuple(rows)).lines()


def _support_lines(supports: Sequence[SupportState]) -> list[str]:
    forces = ("along_N", "across_N", "down_N", "resultant_N")
    most = [max(abs(getattr(each, name)) for name in forces) for each in supports]
    swinging = any(each.swing_deg is not None for each in supports)
    heads = ("along", "across", "down", "resultant")
    columns = [text_column("on support"), *(force_column(head, most) for head in heads)]
    rows: list[Row] = [
        (each.name, each.along_N, each.across_N, each.down_N, each.resultant_N, each.swing_deg) for each in supports
    ]
    if swinging:
        columns.append(number_column("swing", "deg", 1))
    rows = [row[: len(columns)] for row in rows]
    uplift = [each.name for each in supports if each.down_N < 0.0]
    note = [f"  Uplift (down is negative) at {', '.join(uplift)}."] if uplift else []
    return [*Table(tuple(columns), tuple(rows)).lines(), *note]


def _mark_lines(found: Equilibrium, *, turns: bool) -> list[str]:
    marks = found.marks
    loaded = any(abs(mark.tension_beyond_N - mark.tension_N) > LOADED_SHARE * mark.tension_N for mark in marks)
    plan = [length_column("east", [1e3]), length_column("north", [1e3])] if turns else [length_column("offset", [0.0])]
    columns = [
        text_column("mark"),
        length_column("along natural line", [1e3]),
        force_column("tension", [mark.tension_N for mark in marks]),
        force_column("beyond", [mark.tension_beyond_N for mark in marks]),
        length_column("station", [1e3]),
        *plan,
        length_column("elevation", [mark.position_m[2] for mark in marks]),
    ]
    first = 0 if turns else 1  # the x of a straight route is its station
    rows: list[Row] = [
        (m.name, m.at_length_m, m.tension_N, m.tension_beyond_N, m.station_m, *m.position_m[first:]) for m in marks
    ]
    if not loaded:
        del columns[3]
        rows = [(*row[:3], *row[4:]) for row in rows]
    return Table(tuple(columns), tuple(rows)).lines()


def _bracket_words(found: Equilibrium) -> str:
    work = f"{found.elements} elements, {plural(found.evaluations, 'evaluation')}"
    if found.gap_relative is None:
        return work
    gap = abs(found.gap_relative)
    apart = f"{gap:.1e}" if gap >= GAP_IN_ROUNDING else f"less than {GAP_IN_ROUNDING:.0e}"
    return f"Proof: two energies enclose the exact one, {apart} of it apart ({work})."


def joined(lines: Iterable[str]) -> str:
    """Lines as one text that ends with a line end."""
    return "\n".join(lines) + "\n"
