"""From a checked project through the C core to results: settle, window, vet.

The core judges ranges and computes; here its plain dictionaries become records, and its errors become ours, at the
key of the project file that is meant.
"""

from __future__ import annotations

import datetime
import math
import os
import re
from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from dataclasses import replace
from numbers import Real
from typing import TYPE_CHECKING, Any, NoReturn

from tautwise import _core
from tautwise.columns import force_text
from tautwise.errors import Fault, InputError, NotSettledError, SearchCancelled
from tautwise.findings import changed_places, findings_of, judging_findings
from tautwise.order import order_findings
from tautwise.origins import Judge, LineOrigin
from tautwise.outcomes import AS_STRUNG, chords_m, explained, range_fault, refuse_slack
from tautwise.records import finite
from tautwise.results import (
    CAUTION,
    Equilibrium,
    FileVerdict,
    LimitState,
    PullWindow,
    SettleReport,
    StrungState,
    VetReport,
)
from tautwise.results_vet import HOLDS, WAIVED, worst_of_each
from tautwise.solve_limits import limit_states, window_of
from tautwise.solve_line import conditions_of, equilibrium_of
from tautwise.solve_places import LENGTHS, OFF_THE_LINE, beyond_faults, held_faults, off_faults, places_of
from tautwise.solve_relax import relaxations_of
from tautwise.strict import Refused
from tautwise.units import quantity
from tautwise.waivers import WaiverBook

if TYPE_CHECKING:
    from tautwise.model import Project

Pull = float | str | None
_COARSE = {"elements_per_span": 4, "gap_relative": 1.0}


def settle(project: Project, condition: str | None = None, *, pull: Pull = None, **options: Any) -> Equilibrium:
    """The equilibrium of a project's line in one condition.

    Parameters
    ----------
    condition: its name; may be left out where there is only one.
    pull: horizontal tension at stringing in N, or as text with a unit, instead of the project's stringing rule.
    options: of the core, such as ``gap_relative`` or ``elements_per_span``; defaults in ``_core.DEFAULTS``.

    Raises
    ------
    InputError: no such condition, no stringing, or natural lengths that leave the line slack.
    NotSettledError: no equilibrium within tolerance.
    """
    index = _condition_index(project, condition)
    newtons = pull_of(project, pull)
    core = line_core_of(project)
    require_places(project, core, newtons)
    found = _settled(project, core, index, newtons, options)
    if not found.settled:
        head = f"{project.source}: " if project.source else ""
        raise NotSettledError(head + found.unsettled_text(), found.status)
    return found


def settle_all(project: Project, *, pull: Pull = None, **options: Any) -> tuple[Equilibrium, ...]:
    """The equilibrium in every condition, in the order of the file; one that does not settle says so in its status."""
    newtons = pull_of(project, pull)
    core = line_core_of(project)
    require_places(project, core, newtons)
    return tuple(_settled(project, core, index, newtons, options) for index in range(len(project.conditions)))


def settle_report(project: Project, *, pull: Pull = None, **options: Any) -> SettleReport:
    """Every condition and the line as strung: the document of ``settle --json``."""
    conditions = settle_all(project, pull=pull, **options)
    findings = findings_of(project, conditions, None if pull is None else pull_of(project, pull))
    return SettleReport(
        program=program(),
        nlopt=_core.NLOPT_VERSION,
        project=project.title,
        input_sha256=project.input_sha256,
        caution=CAUTION,
        stringing=strung(project, pull=pull),
        conditions=conditions,
        warnings=(*project.warnings, *findings),
    )


def strung(project: Project, *, pull: Pull = None) -> StrungState:
    """The line as strung: the pull and the natural length of each span."""
    newtons = pull_of(project, pull)
    with errors_of(project, newtons, AS_STRUNG):
        found = line_core_of(project).string(pull=newtons)
    return StrungState(
        project.stringing.temperature_degC,
        finite(found["horizontal_tension_N"]),
        tuple(float(length) for length in found["lengths_m"]),
        project.stringing.method,
    )


def window(project: Project, **options: Any) -> PullWindow:
    """The pretension window of a project.

    Parameters
    ----------
    options: of the core, such as ``scan_points`` or ``seconds_most``.

    Raises
    ------
    InputError: the core refuses a number.
    NotSettledError: the search ended without an answer that could be verified.
    SearchCancelled: Ctrl-C; its `best` is what had been found, or None.
    """
    core = core_of(project)
    with errors_of(project):
        try:
            found = core.window(**options)
        except KeyboardInterrupt as stop:
            raise SearchCancelled("the search was cancelled", _best(project, getattr(stop, "best", None))) from None
    if found["status"] not in ("ok", "shut") or (found["open"] and not found["verified"] and options.get("verify", 1)):
        raise _undecided(project, found)
    relax = relaxations_of(project, found["relax"])
    answer = window_of(project, found, program(), _core.NLOPT_VERSION, Judge(project, core), relax)
    lines = _window_findings(project, core, answer) if project.limits else ()
    judging = judging_findings(project, "every pull is in the window")
    return replace(answer, warnings=(*project.warnings, *lines, *judging))


def _window_findings(project: Project, core: _core.Project, answer: PullWindow) -> tuple[str, ...]:
    """What the line shows at the pull to specify, and what more at the ends that a limit governs.

    Nobody specifies the pull of a window that is open-ended, so nothing is said of it there.
    """
    best = answer.specify
    bounded = all(end is not None and end.limit is not None for end in (answer.low, answer.high))
    found = list(line_findings(project, core, best.horizontal_tension_N)) if best is not None and bounded else []
    for low, high in answer.intervals:
        stretch = f"at pulls of {force_text(low)} to {force_text(high)}, "
        found += [stretch + text for text in _order(project, math.sqrt(low * high))]
    said = {_without_numbers(text) for text in found}
    head = f"{project.source}: " if project.source else ""
    for word, end in (("lowest", answer.low), ("highest", answer.high)):
        if end is None or end.limit is None:
            continue
        texts = line_findings(project, core, end.horizontal_tension_N)
        new = [text for text in texts if _without_numbers(text) not in said]
        found += [f"{head}at the {word} pull, {text.removeprefix(head)}" for text in new]
    return tuple(found)


def _without_numbers(text: str) -> str:
    """The same for two pulls that differ in nothing but how much."""
    return re.sub(r"\d[\d.e+-]* ?(?:%|k?N)?", "", text)


def vet(project: Project, *, pull: Pull = None, every: bool = False, today: datetime.date | None = None) -> VetReport:
    """Every limit of a project, for its stringing or for a given pull.

    Parameters
    ----------
    today: the day for which waivers are judged; None is the day it is.
    every: a row for each limit and condition, instead of one for each limit with its worst condition.
    """
    newtons = pull_of(project, pull)
    core = core_of(project)
    require_places(project, core, newtons)
    with errors_of(project, newtons, AS_STRUNG):
        rows = core.judge(pull=newtons, seconds_most=_core.DEFAULTS["seconds_most"] * len(project.conditions))
    if newtons is None and any(row["reason"] == "slack" for row in rows):
        refuse_slack(project, "slack", _core.STATUS["slack"])
    if any(row["reason"] == OFF_THE_LINE for row in rows):
        refuse_places(project, newtons)
    book = WaiverBook(project, today or datetime.date.today())
    states = limit_states(project, rows, every=True, reason=_reasons(project, newtons), excused=book.excused)
    limits = states if every else worst_of_each(states)
    strung_to = strung(project, pull=pull).horizontal_tension_N
    findings = (*changed_places(states), *_order(project, newtons), *book.findings(states))
    findings += (*line_findings(project, core, newtons), *_vet_findings(project))
    return _verdict(project, limits, strung_to, (*project.warnings, *findings))


def _vet_findings(project: Project) -> tuple[str, ...]:
    return judging_findings(project, "there is nothing to vet")


def line_findings(project: Project, core: _core.Project, pull: float | None) -> tuple[str, ...]:
    """What the line shows that is hardly meant, in the conditions in which it settles; `pull` in N.

    A coarse mesh does: findings are read off the exact line, which is in balance whatever the mesh.
    """
    with errors_of(project, pull):
        found = [core.settle(index, pull=pull, **_COARSE) for index in range(len(project.conditions))]
    origin = [LineOrigin(project, index, pull, core) for index in range(len(found))]
    lines = [equilibrium_of(project, *each) for each in zip(range(len(found)), found, origin, strict=True)]
    strung_to = pull if pull is not None else project.stringing.horizontal_tension_N
    return findings_of(project, lines, strung_to)


def undecided(project: Project, reason: str, *, pull: Pull = None) -> VetReport:
    """The report of a project whose line could not be settled at all: every limit undecided, for one reason."""
    given = project.stringing.horizontal_tension_N if pull is None else pull_of(project, pull)
    findings = (*project.warnings, *_vet_findings(project))  # the reason says why the line did not settle
    return _verdict(project, limit_states(project, (), every=False, reason=lambda row: reason), given, findings)


def core_of(project: Project) -> _core.Project:
    """The problem in the core, with the other lines that spacings keep from.

    Raises
    ------
    InputError: a number is outside its range; the fault names the key of the project file.
    NotSettledError: another line could not be settled.
    """
    problem = project.to_core()
    with errors_of(project):
        return _core.Project(problem)


def line_core_of(project: Project) -> _core.Project:
    """As `core_of`, without other lines and spacings: all that it takes to settle the line."""
    problem = project.to_core(judging=False)
    with errors_of(project):
        return _core.Project(problem)


def settled_bare(
    project: Project, lengths_m: Sequence[float], temperatures_degC: Sequence[float]
) -> tuple[list[dict[str, Any]], float]:
    """The spans of the bare line on natural lengths at the stringing temperature, and the widest bracket there and at
    other temperatures.

    Raises
    ------
    NotSettledError: no equilibrium within tolerance at one of them.
    """
    strung = project.stringing.temperature_degC
    every = (strung, *dict.fromkeys(each for each in temperatures_degC if each != strung))
    core = _bare_core(project, lengths_m, every)
    found = []
    for index, degrees in enumerate(every):
        with errors_of(project, math.inf, f"the line at {degrees:g} degC"):
            found.append(core.settle(index))
        if found[-1]["status"] != "ok":
            raise NotSettledError(f"the line at {degrees:g} degC: {found[-1]['status_text']}", found[-1]["status"])
    return found[0]["spans"], max(abs(each["gap_relative"]) for each in found)


def shape_bare(
    project: Project, lengths_m: Sequence[float], temperatures_degC: Sequence[float], points: int
) -> list[Any]:
    """Station and elevation along the bare line on natural lengths, at each temperature; `points` for each span."""
    core = _bare_core(project, lengths_m, temperatures_degC)
    with errors_of(project, math.inf):
        shapes = [core.shape(index, points) for index in range(len(temperatures_degC))]
    return [(shape["station_m"], shape["position_m"][:, 2]) for shape in shapes]


def _bare_core(project: Project, lengths_m: Sequence[float], temperatures_degC: Sequence[float]) -> _core.Project:
    rule = {
        "temperature_degC": project.stringing.temperature_degC, "rule": "span_lengths", "lengths_m": list(lengths_m)
    }  # fmt: skip
    bare = [{"temperature_degC": each} for each in temperatures_degC]
    problem = {**project.to_core(judging=False), "conditions": bare, "marks": [], "limits": [], "stringing": rule}
    problem["history"] = None
    return _core.Project(problem)


def program() -> str:
    """Name and version, as results carry them."""
    import tautwise

    return f"tautwise {tautwise.__version__}"


def pull_of(project: Project, pull: Pull) -> float | None:
    """A pull given by the caller in N; None leaves the project's stringing rule, which must then be there."""
    if pull is None:
        if _has_stringing(project):
            return None
        problem = "no stringing rule, so there is no line to settle"
        expected = "horizontal_tension, tension, sag or natural_length, or a pull given with the command or the call"
        fault = project.core_fault("stringing", problem, expected)
        raise InputError([Fault(fault.file, fault.line, fault.path, problem, expected, 'horizontal_tension = "20 kN"')])
    try:
        newtons = _newtons(pull)
    except Refused as refused:
        raise InputError([Fault(None, None, "pull", refused.problem, refused.expected, refused.example)]) from None
    if not (math.isfinite(newtons) and newtons > 0.0):
        raise InputError([Fault(None, None, "pull", f"{newtons:g} N is no pull", "a force above 0", '"20 kN"')])
    return newtons


def _newtons(pull: object) -> float:
    if isinstance(pull, bool) or not isinstance(pull, Real):
        return quantity(pull, "N")
    try:
        return float(pull)  # NumPy's numbers too
    except OverflowError:
        raise Refused("the number is too large", "a force", '"20 kN"') from None


@contextmanager
def errors_of(project: Project, pull: float | None = None, where: str = "") -> Iterator[None]:
    """The core's errors as ours; `where` says what was being settled, as in 'condition "hot"' or `AS_STRUNG`."""
    try:
        yield
    except _core.RangeError as error:
        path, expected = getattr(error, "path", ""), getattr(error, "expected", "")
        fault = range_fault(project, path, expected) if path else project.core_fault("", str(error), expected)
        raise InputError([fault]) from None
    except _core.SettleError as error:
        status = getattr(error, "status", "not_settled")
        if status == OFF_THE_LINE:
            refuse_places(project, pull)
        if pull is None:
            refuse_slack(project, status, str(error))
        words = explained(project, status, str(error), pull, _core.DEFAULTS)
        raise NotSettledError(": ".join(filter(None, (project.source, where, words))), status) from None


def require_places(project: Project, core: _core.Project, pull: float | None) -> None:
    """Refuse lengths along the line that lie beyond its end, as strung to `pull` (None: by the project's rule).

    Raises
    ------
    InputError: one fault for each of them.
    """
    if not any(places_of(project, LENGTHS)):
        return
    with errors_of(project, pull, AS_STRUNG):
        total = math.fsum(core.string(pull=pull)["lengths_m"])
    faults = beyond_faults(project, total, "its natural length as strung")
    if faults:
        raise InputError(faults)


def refuse_places(project: Project, pull: float | None) -> NoReturn:
    """Raise for what the core found to be off the line, at the keys that are meant.

    Raises
    ------
    InputError: always.
    """
    if pull is not None or _has_stringing(project):
        require_places(project, line_core_of(project), pull)
        faults = off_faults(project, *_strung_range(project, pull))
    else:
        faults = beyond_faults(project, math.fsum(chords_m(project)), "about its length")
    words = _core.STATUS[OFF_THE_LINE]
    faults = faults or held_faults(project)
    raise InputError(faults or [Fault(project.source, None, "", words, "marks and loads that lie on the line")])


def _order(project: Project, pull: float | None) -> tuple[str, ...]:
    if not project.others:
        return ()
    try:
        return tuple(order_findings(project, course_as_strung(project, pull)))
    except (NotSettledError, InputError):
        return ()  # limits that need that line say so themselves


def course_as_strung(project: Project, pull: float | None = None) -> Any:
    """The exact line as strung, bare: arcs (n, 14), as another project's course.

    Raises
    ------
    InputError, NotSettledError: it has no equilibrium.
    """
    with errors_of(project, pull, AS_STRUNG):
        return _core.Project(_as_strung(project)).course(0, pull=pull)


def _as_strung(project: Project) -> dict[str, Any]:
    bare = {"temperature_degC": project.stringing.temperature_degC}
    core = project.to_core(judging=False)
    return {**core, "conditions": [bare], "marks": [], "limits": [], "history": None}


def _strung_range(project: Project, pull: float | None) -> tuple[float, float]:
    """First and last station, m, of the line as strung, bare: posts lean."""
    with errors_of(project, pull, AS_STRUNG):
        supports = _core.Project(_as_strung(project)).settle(0, pull=pull)["supports"]
    if not supports:
        return -math.inf, math.inf
    if project.turns:
        return float(supports[0]["station_m"]), float(supports[-1]["station_m"])
    return float(supports[0]["position_m"][0]), float(supports[-1]["position_m"][0])


def _verdict(
    project: Project, limits: tuple[LimitState, ...], pull: float | None, findings: tuple[str, ...] = ()
) -> VetReport:
    holds = all(limit.word in (HOLDS, WAIVED) for limit in limits)
    name = os.fspath(project.source or project.title)
    verdict = FileVerdict(name, holds, limits, project.title, project.input_sha256, pull, findings)
    return VetReport.of([verdict], program())


def _reasons(project: Project, pull: float | None) -> Callable[[Mapping[str, Any] | None], str | None]:
    """Why a judged row is undecided, in words."""

    def reason(row: Mapping[str, Any] | None) -> str | None:
        if row is None:
            return "nothing of the line is under this limit"
        name = row["reason"]
        return explained(project, name, _core.STATUS[name], pull, _core.DEFAULTS) if name else None

    return reason


def _undecided(project: Project, found: Mapping[str, Any]) -> NotSettledError:
    status = found["status"] if found["status"] in _core.STATUS else "not_settled"
    text = found["status_text"] if status not in ("ok", "shut") else "its ends could not be verified"
    words = explained(project, status, text, math.inf, _core.DEFAULTS, "window")
    name = f"{project.source}: " if project.source else ""
    return NotSettledError(f"{name}the window could not be decided: {words}", status)


def _settled(
    project: Project, core: _core.Project, index: int, pull: float | None, options: dict[str, Any]
) -> Equilibrium:
    name = project.conditions[index].name
    with errors_of(project, pull, f'condition "{name}"'):
        found = core.settle(index, pull=pull, **options)
    status, text = found["status"], found["status_text"]
    if status == OFF_THE_LINE:
        refuse_places(project, pull)
    if pull is None:
        refuse_slack(project, status, text, name)
    found = {**found, "status_text": explained(project, status, text, pull, _core.DEFAULTS)}
    return equilibrium_of(project, index, found, LineOrigin(project, index, pull, core))


def _has_stringing(project: Project) -> bool:
    return project.stringing.has_rule


def _condition_index(project: Project, condition: str | None) -> int:
    if condition is not None:
        return project.condition_index(condition)
    if len(project.conditions) > 1:
        names = ", ".join(f'"{name}"' for name in conditions_of(project)[:8])
        raise InputError([Fault(project.source, None, "", "several conditions, and none named", f"one of {names}")])
    return 0


def _best(project: Project, found: dict[str, Any] | None) -> PullWindow | None:
    return None if found is None else window_of(project, found, program(), _core.NLOPT_VERSION)
