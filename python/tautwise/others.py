"""The other projects whose lines a spacing keeps from: found, read, and checked against what the limit asks of them."""

from __future__ import annotations

import os
from pathlib import Path
from typing import TYPE_CHECKING

from tautwise.check import Checked, at_most_one
from tautwise.errors import InputError
from tautwise.keylines import Path as KeyPath
from tautwise.limits import SpacingLimit
from tautwise.reader import inside_folder, read_project
from tautwise.strict import did_you_mean, shown

if TYPE_CHECKING:
    from tautwise.model import Project

OTHERS_DEEP_MOST = 8
OTHERS_MOST = 100
_EXAMPLE = 'other = "upper_wire.taut.toml"'


def other_rules(checked: Checked) -> None:
    """Each spacing's other project: a file in the project's folder, not one of those for which this one is read, with a
    pull and the conditions that are asked for. Each is read once, however many keep from it, and its files count among
    this project's sources."""
    document = checked.document
    first = document.family is None
    if document.family is None:
        document.family = {}
    _read_others(checked, document.family)
    if first:
        document.family = None


def _read_others(checked: Checked, family: dict[Path, Project | None]) -> None:
    for number, limit in enumerate(checked.limits):
        if checked.raw("limit", number).get("kind") == "spacing":
            at_most_one(checked, ("limit", number), SpacingLimit, ("other_condition", "other_conditions"))
        if not isinstance(limit, SpacingLimit):
            continue
        path = ("limit", number, "other")
        file, name = _named(checked, path, limit.other)
        problem = _problem(checked, file, limit.other)
        if problem:
            checked.fault(path, problem, "another project file in the project's folder or below it", _EXAMPLE)
            continue
        real = file.resolve()
        if real not in family:
            if len(family) >= OTHERS_MOST:
                problem = f"too many projects that keep from one another: at most {OTHERS_MOST} are read"
                checked.fault(path, problem, "fewer, or only those that are near")
                return
            family[real] = None  # counts while it is read
            family[real] = _read(checked, name, family)
        other = family[real]
        if other is not None:
            _count_sources(checked, other)
            checked.others[number] = other
            _axes_rule(checked, number, other)
            _pull_rule(checked, path, other)
            _condition_rule(checked, number, limit, other)


def _named(checked: Checked, path: KeyPath, entry: str) -> tuple[Path, str]:
    """The file that an entry means, which lies beside the file that names it, and how messages name it."""
    named_in, _ = checked.document.where(path)
    if named_in is None:
        return checked.document.folder / entry, entry
    return Path(named_in).parent / entry, os.path.join(os.path.dirname(named_in), entry)


def _above(checked: Checked) -> tuple[Path, ...]:
    document = checked.document
    return document.above if document.name is None else (*document.above, Path(document.name).resolve())


def _problem(checked: Checked, file: Path, entry: str) -> str:
    text = f'"{shown(entry)}"'
    above = _above(checked)
    try:
        real = file.resolve()
    except (OSError, RuntimeError, ValueError):
        return f"{text} leads nowhere"
    if above and real == above[-1]:
        return f"{text} is this project itself"
    if real in above:
        return f"{text}: the projects keep from each other in a circle; the spacing is judged in the first of them"
    if len(above) > OTHERS_DEEP_MOST:
        return f"too many projects that keep from one another: at most {OTHERS_DEEP_MOST} deep"
    if not inside_folder(checked.document.folder, file):
        return f"{text} is outside the project's folder"
    return "" if file.is_file() else f"there is no file {text}"


def _read(checked: Checked, name: str, family: dict[Path, Project | None]) -> Project | None:
    from tautwise.model import Project

    try:
        return Project._of(read_project(name, _above(checked), family))
    except InputError as error:
        checked.faults.extend(fault for fault in error.faults if fault not in checked.faults)
        return None


def _count_sources(checked: Checked, other: Project) -> None:
    known = {source.name for source in checked.document.sources}
    checked.document.sources.extend(source for source in other._document.sources if source.name not in known)


def _axes_rule(checked: Checked, number: int, other: Project) -> None:
    """Both lines in one kind of axes, and a shift in those."""
    turning = checked.turning()
    names = {True: "east and north", False: "station and offset"}
    if turning != other.turns:
        problem = f'the supports of "{shown(other.source or "")}" are given by {names[other.turns]}, those here are not'
        expected = f"both lines by {names[True]}, or both by {names[False]}"
        checked.fault(("limit", number, "other"), problem, expected)
        return
    raw = checked.raw("limit", number).get("shift")
    for key in ("station", "offset") if turning else ("east", "north"):
        if isinstance(raw, dict) and raw.get(key) is not None:
            problem = f"the lines are given by {names[turning]}"
            example = 'shift = { east = "12 m" }' if turning else 'shift = { offset = "1.5 m" }'
            checked.fault(("limit", number, "shift", key), problem, names[turning], example)


def _pull_rule(checked: Checked, path: KeyPath, other: Project) -> None:
    if not other.stringing.has_rule:
        problem = f'"{shown(other.source or "")}" gives no pull, so its line hangs nowhere'
        expected = "horizontal_tension, or another rule, under its [stringing]; its own window finds the pull"
        checked.fault(path, problem, expected, 'horizontal_tension = "20 kN"')


def _condition_rule(checked: Checked, number: int, limit: SpacingLimit, other: Project) -> None:
    """Conditions that exist: of this line left in `other_conditions`, of the other right there and elsewhere."""
    path: KeyPath = ("limit", number)
    here = [name for name in checked.names("condition") if name]
    there = [condition.name for condition in other.conditions]
    listed = ", ".join(f'"{shown(name)}"' for name in there[:8])
    pairs = dict(limit.other_conditions or ())
    for name, beside in pairs.items():
        at = (*path, "other_conditions", name)
        if name not in here:
            checked.fault(at, f'there is no condition "{shown(name)}"; {did_you_mean(name, here)}')
        elif beside not in there:
            checked.fault(at, f'the other line has no condition "{shown(beside)}"; {did_you_mean(beside, there)}')
    if limit.other_condition is not None and limit.other_condition not in there:
        name = limit.other_condition
        problem = f'the other line has no condition "{shown(name)}"; {did_you_mean(name, there)}'
        checked.fault((*path, "other_condition"), problem)
    if limit.other_condition is not None:
        return
    for name in limit.conditions or here:
        if name in here and name not in pairs and name not in there:
            problem = f'the other line has no condition "{shown(name)}"; its conditions are {listed}'
            expected = "other_condition, or other_conditions with one for each of this line"
            example = f'other_conditions = {{ "{shown(name)}" = "{shown(there[0])}" }}'
            checked.fault((*path, "other"), problem, expected, example)
