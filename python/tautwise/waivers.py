"""Waivers: a limit that may fail until a day, with the reason; and what is to be said of those that excuse nothing.

A waiver excuses a limit that fails, in one condition or in all, up to and with its day. It changes nothing about what
is computed, and the window search does not know it: the window holds the pulls that keep every limit.
"""

from __future__ import annotations

import datetime
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Annotated, Any

from tautwise.errors import Fault, InputError
from tautwise.fields import Kind, Name, Prose, Words
from tautwise.results_vet import FAILS, LimitState, WaiverState
from tautwise.strict import Refused, described, did_you_mean, shown, strict_day
from tautwise.tables import Table

if TYPE_CHECKING:
    from tautwise.model import Project


@dataclass(frozen=True)
class Day(Kind):
    """A date of TOML, or a text such as "2027-06-30".

    >>> Day().read("2027-06-30")
    datetime.date(2027, 6, 30)
    """

    words = "a date"
    example = "2027-06-30"

    def read(self, value: Any) -> datetime.date:
        """The day."""
        if isinstance(value, datetime.datetime):
            raise Refused("a time of day where a date is needed")
        if isinstance(value, datetime.date):
            return value
        day = strict_day(value) if isinstance(value, str) else None
        if day is None:
            raise Refused(f"{described(value)} is no date")
        return day

    def json_schema(self) -> dict[str, Any]:
        """A date as JSON writes it."""
        return {"type": "string", "format": "date", "examples": [self.example]}


def day_of(text: str) -> datetime.date:
    """The day of an option.

    Raises
    ------
    InputError: it is none.
    """
    try:
        return Day().read(text)
    except Refused as refused:
        raise InputError([Fault(None, None, "on", refused.problem, Day.words, Day.example)]) from None


class Waiver(Table):
    """A limit that may fail, in a condition or in all, until a day."""

    limit: Annotated[str, Words("a limit's id", "strength")]
    condition: Name | None = None
    reason: Prose
    until: Annotated[datetime.date, Day()]


class WaiverBook:
    """The waivers of a project on a day: what they excuse, and which of them excuse nothing.

    Parameters
    ----------
    today: the day on which the limits are judged.
    """

    def __init__(self, project: Project, today: datetime.date) -> None:
        self.project = project
        self.today = today
        self.used: set[int] = set()

    def excused(self, state: LimitState) -> LimitState:
        """The same limit, with its waiver where it fails and a waiver in force is meant for it."""
        for number, waiver in enumerate(self.project.waivers):
            if state.status == FAILS and self._meant(waiver, state):
                self.used.add(number)
                if waiver.until >= self.today:
                    return replace(state, waiver=WaiverState(waiver.reason, waiver.until.isoformat()))
        return state

    def findings(self, states: Sequence[LimitState]) -> Iterator[str]:
        """One line for each waiver that is expired or excuses nothing; `states` with a row for each condition."""
        for number, waiver in enumerate(self.project.waivers):
            if waiver.until < self.today:
                text = f"expired on {waiver.until.isoformat()} and excuses nothing"
            elif number in self.used:
                continue
            else:
                text = f"is not used: {self._why_unused(waiver, states)}"
            yield f"{self.project.place(('waiver', number))}: the waiver of {shown(waiver.limit)} {text}"

    @staticmethod
    def _meant(waiver: Waiver, state: LimitState) -> bool:
        return waiver.limit == state.id and waiver.condition in (None, state.condition)

    def _why_unused(self, waiver: Waiver, states: Sequence[LimitState]) -> str:
        ids = [limit.id for limit in self.project.limits]
        if waiver.limit not in ids:
            return f'there is no limit "{shown(waiver.limit)}"; {did_you_mean(waiver.limit, ids)}'
        names = [condition.name for condition in self.project.conditions]
        if waiver.condition is not None and waiver.condition not in names:
            return f'there is no condition "{shown(waiver.condition)}"; {did_you_mean(waiver.condition, names)}'
        meant = [state for state in states if self._meant(waiver, state)]
        where = f' in "{shown(waiver.condition)}"' if waiver.condition else ""
        if not meant:
            return f"the limit is not judged{where}"
        if any(state.status == FAILS for state in meant):
            return "another waiver excuses it already"
        return f"the limit holds{where}" if all(state.status != "undecided" for state in meant) else "it is undecided"
