"""What its history has left in a line on a curved law, span by span and part by part, as records and in words."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, ClassVar

from tautwise.records import Record, finite
from tautwise.tables import SECONDS_PER_HOUR

if TYPE_CHECKING:
    from tautwise.model import Project
    from tautwise.tables import Condition, Line

AS_STRUNG = "as strung"  # the everyday condition where none is named: bare, at the stringing temperature
SPANS_OF_PART = ("curve", "core", "outer")


@dataclass(frozen=True, slots=True)
class PartStretch(Record):
    """What one part of a span has kept.

    Fields
    ------
    part: "curve", "core" or "outer". permanent_strain: kept. met_strain: from which it has unloaded, at the span's mean
        stretch. condition: that left it. by_creep: whether creep in that condition left it, and not its load.
    """

    KEYS: ClassVar[Mapping[str, str | None]] = {"from_support": "from", "to_support": "to"}

    from_support: str
    to_support: str
    part: str
    permanent_strain: float
    met_strain: float
    condition: str
    by_creep: bool

    @property
    def name(self) -> str:
        """The span and its part."""
        return f"{self.from_support} to {self.to_support}: {self.part}"


@dataclass(frozen=True, slots=True)
class HistoryState(Record):
    """What a line has lived through before a condition that is not in the state initial.

    Fields
    ------
    heaviest: the condition that has left most; None where none has left anything.
    creep_condition: the everyday condition, or "as strung"; None where there is no creep curve, or the state is final.
    given_strain: bedding in, and in the state after creep the creep given as strain.
    parts: what each part of each span has kept, where it has kept anything.
    """

    heaviest: str | None
    creep_condition: str | None
    given_strain: float
    parts: tuple[PartStretch, ...]


def part_names(line: Line) -> tuple[str, ...]:
    """The parts of a curved line, in the core's order."""
    return tuple(name for name in SPANS_OF_PART if getattr(line, name) is not None)


def history_of(project: Project, condition: Condition, spans: Sequence[Mapping[str, Any]]) -> HistoryState | None:
    """What the core says its history has left in a line; None in the state initial."""
    if condition.state == "initial":
        return None
    names = [support.name for support in project.supports]
    parts = tuple(
        _part(project, (names[number], names[number + 1], part), row)
        for number, span in enumerate(spans)
        for part, row in zip(part_names(project.line), span["lived"], strict=True)
        if finite(row["met"]) is not None
    )
    loaded = [part for part in parts if not part.by_creep]
    heaviest = max(loaded, key=lambda part: part.permanent_strain).condition if loaded else None
    return HistoryState(heaviest, _everyday(project, condition), _given(project.line, condition), parts)


def _part(project: Project, place: tuple[str, str, str], row: Mapping[str, Any]) -> PartStretch:
    condition = AS_STRUNG if row["condition"] is None else project.conditions[row["condition"]].name
    return PartStretch(*place, float(row["permanent"]), float(row["met"]), condition, bool(row["crept"]))


def _everyday(project: Project, condition: Condition) -> str | None:
    if condition.state != "after creep" or all(part.creep_Pa is None for part in project.line.parts):
        return None
    return project.history.creep_condition or AS_STRUNG


def _given(line: Line, condition: Condition) -> float:
    crept = 0.0
    if condition.state == "after creep":
        law = line.creep_law
        crept = line.creep_strain or 0.0
        if law is not None:
            crept = law.coefficient * (law.time_s / SECONDS_PER_HOUR) ** law.exponent
    return line.bedding_in + crept


def history_words(found: HistoryState) -> str:
    """By what a line is stretched, and where most.

    >>> part = PartStretch("A", "B", "outer", 0.00051, 0.0012, "ice and wind", False)
    >>> history_words(HistoryState("ice and wind", "everyday", 0.0, (part,)))
    'stretched by ice and wind (A to B: outer 0.0510 %); creep at everyday left no more'
    """
    loaded = dict.fromkeys(part.condition for part in found.parts if not part.by_creep)
    texts = [f"{condition} ({_most(found, condition, by_creep=False)})" for condition in loaded]
    said = [f"stretched by {' and by '.join(texts)}"] if texts else []
    if found.creep_condition is not None:
        most = _most(found, found.creep_condition, by_creep=True)
        said.append(f"creep at {found.creep_condition} " + (f"({most})" if most else "left no more"))
    if found.given_strain:
        said.append(f"{100.0 * found.given_strain:.4f} % given as strain")
    return "; ".join(said) or "nothing has stretched it for good"


def _most(found: HistoryState, condition: str, *, by_creep: bool) -> str:
    """The part that has kept most, in the span where it is."""
    own = [part for part in found.parts if part.condition == condition and part.by_creep == by_creep]
    if not own:
        return ""
    most = max(own, key=lambda part: part.permanent_strain)
    head = "most in " if len({(part.from_support, part.to_support) for part in own}) > 1 else ""
    return f"{head}{most.name} {100.0 * most.permanent_strain:.4f} %"
