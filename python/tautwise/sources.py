"""Where the numbers of a project come from: the values of its size and rule packs, its waivers, the methods in use."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, TypeVar

from tautwise.columns import Table, text_column
from tautwise.records import Record

if TYPE_CHECKING:
    from tautwise.model import Project
    from tautwise.tables import Condition

T = TypeVar("T")

NOT_STATED = "not stated"

_ELASTIC = "elastic catenary: H. M. Irvine, Cable Structures, MIT Press 1981, chapter 1"
_PROOF = "complementary energy, the Legendre dual of the potential energy; convex, since a line bears no compression"
_EXPANSION = "strain T / EA + expansion (t - t0) on the natural length, t0 the stringing temperature: Hooke's law"
_GRAVITY = "mass times 9.80665 m/s2, standard gravity: CGPM 1901"
_ICE = "exact ring of ice, pi t (d + t) rho g, t radial: geometry"
_SPEED = "wind pressure rho V^2 / 2: Bernoulli"
_WIND = "wind force p C (d + 2 t) sin^2, square to the span: IEC 60826, EN 50341 (from memory)"
_ADDITION = "constant added to the resultant, whose direction it keeps: as NESC 250B does"
_WINDOW = "searches by the NLopt library (L-BFGS, SLSQP); whatever it returns is judged again"


@dataclass(frozen=True, slots=True)
class SourceLine(Record):
    """Where one value comes from.

    Fields
    ------
    what: the key, or what else it is about. value: as written, with its unit. source: standard with table or clause
        and edition, file and line, or the method. confidence: "seen" (read in the source), "from memory", "defined",
        "measured", or "not stated".
    """

    what: str
    value: str
    source: str
    confidence: str


def sources_of(project: Project) -> tuple[SourceLine, ...]:
    """Every value of the project's size and rule packs, then its waivers, then the methods that its results use."""
    return (*project.origins, *_waivers(project), *_methods(project))


def with_sources(result: T, project: Project, asked: bool = True) -> T:
    """A result with where its numbers come from, where asked for."""
    return replace(result, sources=sources_of(project)) if asked else result  # type: ignore[type-var]


def sources_lines(sources: Sequence[SourceLine]) -> list[str]:
    """The same as an aligned table."""
    columns = (text_column("value of"), text_column("is"), text_column("confidence"), text_column("source"))
    rows = tuple((each.what, each.value or None, each.confidence or NOT_STATED, each.source) for each in sources)
    return Table(columns, rows).lines()


def _waivers(project: Project) -> Iterator[SourceLine]:
    for number, waiver in enumerate(project.waivers):
        where = f" in {waiver.condition}" if waiver.condition else ""
        value = f"until {waiver.until.isoformat()}"
        source = f"{project.place(('waiver', number))}: {' '.join(waiver.reason.split())}"
        yield SourceLine(f"waiver of {waiver.limit}{where}", value, source, "")


def _methods(project: Project) -> Iterator[SourceLine]:
    uses = [_ELASTIC, _PROOF, _EXPANSION]
    if project.line.given_weight_N_per_m is None:
        uses.append(_GRAVITY)
    if any(one.ice is not None for one in project.conditions):
        uses.append(_ICE)
    winds = [one.wind for one in project.conditions if one.wind is not None]
    if winds:
        uses.append(_WIND)
    if any(wind.speed_m_per_s is not None for wind in winds):
        uses.append(_SPEED)
    if any(_adds(one) for one in project.conditions):
        uses.append(_ADDITION)
    for text in (*uses, _WINDOW):
        method, _, source = text.partition(": ")
        yield SourceLine("method", "", f"{method}: {source}" if source else method, "")


def _adds(condition: Condition) -> bool:
    return bool(condition.resultant_addition_N_per_m)
