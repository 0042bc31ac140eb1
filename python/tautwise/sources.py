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
ONE_STATE = "the line is linear and without bedding_in, so that initial and final are judged on the same one"

_ELASTIC = "elastic catenary: H. M. Irvine, Cable Structures, MIT Press 1981, chapter 1"
_PROOF = "complementary energy, the Legendre dual of the potential energy; convex, since a line bears no compression"
_CURVES = "stress-strain curves up to the fourth power, the parts under one stretch: strain summation, CIGRE TB 324"
_QUADRATURE = "stretch along the line by quadrature, cut where the law changes: Gauss, Legendre"
_CURVE_EXPANSION = "each part's own thermal strain, from the test temperature of the curves: strain summation"
_HISTORY = "unloading along the final modulus from the greatest mean strain of each span in its history"
_CREEP = "creep curve in place of the loading curve, in the everyday condition; the larger of load and creep stays"
_CREEP_LAW = "creep strain c t^n at time t, n = 0 where it is given as one strain: power law"
_BEDDING = "bedding-in strain added to every state but the initial one: as given"
_SHEAVES = "natural length runs over sheaves until the tension is equal on both sides: balance of moments"
_FRICTION = "T_1 = T_2 exp(mu theta) on a sheave with friction, for the crew sheet's range: Euler, Eytelwein"
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
    uses = [_ELASTIC, _PROOF, *_law(project), *_sheaves(project)]
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


def _law(project: Project) -> Iterator[str]:
    """How the line stretches, and what of it stays."""
    line = project.line
    if line.parts:
        yield from (_CURVES, _QUADRATURE, _CURVE_EXPANSION)
    else:
        yield _EXPANSION
    states = {condition.state for condition in project.conditions} - {"initial"}
    if not states:
        return
    if line.parts:
        yield _HISTORY
    if "after creep" in states and any(part.creep_Pa is not None for part in line.parts):
        yield _CREEP
    if "after creep" in states and (line.creep_strain or line.creep_law is not None):
        yield _CREEP_LAW
    if line.bedding_in:
        yield _BEDDING


def _sheaves(project: Project) -> Iterator[str]:
    in_service = [support for support in project.supports if support.hold == "sheave"]
    if in_service or project.stringing.over_sheaves:
        yield _SHEAVES
        if project.stringing.friction or any(support.sheave_friction for support in in_service):
            yield _FRICTION


def _adds(condition: Condition) -> bool:
    return bool(condition.resultant_addition_N_per_m)
