"""A project strung to natural lengths that were found: as a project, as a table to paste, as the text of a file."""

from __future__ import annotations

import copy
import os
import re
import tomllib
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

from tautwise.errors import Fault, InputError
from tautwise.keylines import scan
from tautwise.reader import FILE_BYTES_MOST, Source, read_text
from tautwise.rules import STRINGING_RULES
from tautwise.strict import Refused, inert

if TYPE_CHECKING:
    from tautwise.model import Project
    from tautwise.results_fit import SurveyFit

LENGTH_DECIMALS = 7  # m: a tenth of a micrometre, which moves no tension that anyone measures
_HEADER = re.compile(r"[ \t]*\[[ \t]*stringing[ \t]*\][ \t]*(?:#.*)?")
_NEXT = re.compile(r"[ \t]*\[\[?[ \t]*[A-Za-z0-9_\"'-]")


def as_built(project: Project, lengths_m: Sequence[float], survey: str | None, sha256: str | None) -> Project:
    """The project with its stringing replaced by natural lengths.

    Parameters
    ----------
    lengths_m: one for each span, at the stringing temperature. survey, sha256: where they come from, part of its hash.
    """
    from tautwise.model import Project

    document = project._document
    tables = copy.deepcopy(document.tables)
    tables["stringing"] = _table(project, [f"{length!r} m" for length in lengths_m])
    if document.name is None:
        return Project(**tables)
    sources = [*document.sources, *([Source(survey, sha256)] if survey and sha256 else [])]
    return Project._of(replace(document, tables=tables, sources=sources, faults=[]))


def paste_lines(project: Project, lengths_m: Sequence[float]) -> list[str]:
    """The ``[stringing]`` table with natural lengths, as it stands in a file."""
    written = _table(project, [f"{length:.{LENGTH_DECIMALS}f} m" for length in lengths_m])
    lines = ["[stringing]"]
    for key, value in written.items():
        if isinstance(value, list):
            lines += [f"{key} = [", *(f'    "{length}",' for length in value), "]"]
        else:
            lines.append(f'{key} = "{value}"' if isinstance(value, str) else f"{key} = {value!r}")
    return lines


def rewritten(text: str, table: Sequence[str], comment: str) -> str:
    """The text of a project file with its ``[stringing]`` table replaced.

    Parameters
    ----------
    table: the new one's lines. comment: lines put in front of it.

    Raises
    ------
    Refused: the table does not stand by itself in this text, or anything else would change.

    >>> text = 'title = "x"\\n[stringing]\\nsag = "1 m"\\n\\n[[mark]]\\n'
    >>> print(rewritten(text, ["[stringing]"], "as built"), end="")
    title = "x"
    # as built
    [stringing]
    <BLANKLINE>
    [[mark]]
    """
    lines = text.split("\n")
    heads = [number for number, line in enumerate(lines) if _HEADER.fullmatch(line)]
    if len(heads) != 1 or scan(text).get(("stringing",)) != heads[0] + 1:
        raise Refused("its [stringing] table does not stand by itself in that file")
    end = heads[0] + 1
    while end < len(lines) and not _NEXT.match(lines[end]):
        end += 1
    while end > heads[0] + 1 and (not lines[end - 1].strip() or lines[end - 1].lstrip().startswith("#")):
        end -= 1  # comments and blanks before the next table belong to that
    new = "\n".join([*lines[: heads[0]], *(f"# {line}" for line in comment.split("\n")), *table, *lines[end:]])
    if _others(new) != _others(text):
        raise Refused("its [stringing] table does not stand by itself in that file")
    return new


def as_built_text(found: SurveyFit, project: Project, target: str) -> str:
    """The text of the project file as built, as it would stand in the file `target`.

    Raises
    ------
    InputError: it cannot be had by replacing one table; the fault holds the table to paste.
    """
    name = str(project.source)
    table = paste_lines(project, found.natural_length_m)
    if len(project._document.sources) > 1 and not _same_folder(name, target):
        problem = "the project names files of its folder"
        raise InputError([Fault(target, None, "", problem, f"a new file beside {name}")])
    text, source = read_text(Path(name), name, FILE_BYTES_MOST)
    if source.sha256 != project._document.sources[0].sha256:
        raise InputError([Fault(name, None, "", "the file has changed since it was read", "the same file")])
    points = os.path.basename(found.survey or "") or "a survey"
    try:
        comment = f"As built: natural lengths fitted to the points of {inert(points)}.{_unstretched(project)}"
        return rewritten(text, table, comment + sureness(found))
    except Refused as refused:
        problem = f"it is not written: {refused.problem}; put this in by hand: {' '.join(table)}"
        raise InputError([Fault(name, None, "stringing", problem)]) from None


def _unstretched(project: Project) -> str:
    return " The line was taken as never stretched." if project.line.stretches else ""


def sureness(found: SurveyFit) -> str:
    """How sure the lengths are, as further lines of the comment: points, intervals, spans without points, doubts."""
    lines = [f"{len(found.points)} points, {1e3 * found.rms_m:.1f} mm off the line (root mean square)."]
    if found.pull is not None and found.pull.low_N is not None and found.pull.high_N is not None:
        low, high = found.pull.low_N / 1e3, found.pull.high_N / 1e3
        lines.append(f"Pull {found.pull.horizontal_tension_N / 1e3:.3f} kN, from {low:.3f} to {high:.3f} kN (95 %).")
    lines += [
        f"{inert(span.name)}: +/- {5e2 * (span.high_m - span.low_m):.1f} mm (95 %)."
        for span in found.spans
        if span.low_m is not None and span.high_m is not None and found.pull is None
    ]
    bare = [span.name for span in found.spans if not span.points]
    lines += [f"No points in {inert(', '.join(bare))}."] if bare else []
    lines += [inert(text) for text in found.warnings if text.startswith("these points do not fit")]
    return "".join(f"\n{line}" for line in lines)


def _same_folder(one: str, other: str) -> bool:
    return os.path.realpath(os.path.dirname(one) or ".") == os.path.realpath(os.path.dirname(other) or ".")


def dropped(project: Project) -> tuple[str, ...]:
    """The keys of [stringing], beside its rule, that a line as built cannot keep: how it came over its sheaves."""
    raw = project._document.tables.get("stringing", {})
    gone = ("method", "clip", "friction") if project.stringing.over_sheaves else ()
    return tuple(key for key in gone if raw.get(key) is not None)


def _table(project: Project, lengths: list[str]) -> dict[str, Any]:
    """The natural lengths in place of the rule; everything else as it was written."""
    raw = project._document.tables.get("stringing", {})
    kept = {key: value for key, value in raw.items() if key not in (*STRINGING_RULES, *dropped(project))}
    first = {key: kept.pop(key) for key in ("temperature",) if key in kept}
    return {**first, "natural_length": lengths, **kept}


def _others(text: str) -> dict[str, Any]:
    try:
        tables = tomllib.loads(text)
    except (ValueError, RecursionError):
        raise Refused("its [stringing] table does not stand by itself in that file") from None
    return {key: value for key, value in tables.items() if key != "stringing"}
