"""The errors of Tautwise and the faults of an input.

Every error derives from :class:`TautwiseError`. An :class:`InputError` carries one :class:`Fault` for each thing that
is wrong with a project file, all of them found in one run.

>>> fault = Fault("inlet.taut.toml", 7, "line.weight", "a number without a unit", "a force per length", '"11.9 N/m"')
>>> print(InputError([fault]))
inlet.taut.toml:7: line.weight: a number without a unit; expected a force per length, for example "11.9 N/m"
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from tautwise.strict import inert


class TautwiseError(Exception):
    """Base of all errors that Tautwise raises on purpose."""


@dataclass(frozen=True)
class Fault:
    """One thing that is wrong with an input.

    Fields
    ------
    file: name of the file as the user gave it; None for a project built from keyword arguments.
    line: line of that file, from 1; None where there is no file.
    path: the key that is meant (``condition."ice and wind".ice.thickness``); empty for the file as a whole.
    problem: what is wrong.
    expected: what would be right; empty where `problem` says it.
    example: a right value as it stands in a file; empty where there is none.

    >>> str(Fault(None, None, "line.area", "missing", "an area", 'area = "150 mm^2"'))
    'line.area: missing; expected an area, for example area = "150 mm^2"'
    """

    file: str | None
    line: int | None
    path: str
    problem: str
    expected: str = ""
    example: str = ""

    def __str__(self) -> str:
        place = ":".join(str(part) for part in (self.file, self.line) if part is not None)
        head = ": ".join(part for part in (place, self.path) if part)
        text = f"{head}: {self.problem}" if head else self.problem
        if self.expected:
            text += f"{'' if text.endswith('?') else ';'} expected {self.expected}"
        if self.example:
            text += f", for example {self.example}" if self.expected else f"; for example {self.example}"
        return inert(text)


class InputError(TautwiseError, ValueError):
    """An input that cannot be used. `faults` holds everything that is wrong with it, in the order of the lines.

    Parameters
    ----------
    faults: the faults, at least one; sorted here by file (in the order of their first appearance) and line.

    >>> error = InputError([Fault("a.toml", 9, "title", "empty"), Fault("a.toml", 2, "format", "missing")])
    >>> [fault.line for fault in error.faults]
    [2, 9]
    """

    faults: tuple[Fault, ...]

    def __init__(self, faults: Iterable[Fault]) -> None:
        self.faults = _sorted(faults)
        super().__init__("\n".join(str(fault) for fault in self.faults))

    def __reduce__(self) -> tuple[type[InputError], tuple[tuple[Fault, ...]]]:
        return (InputError, (self.faults,))


class NotSettledError(TautwiseError):
    """A line could not be settled within tolerance, and the caller asked for a settled one.

    Attributes
    ----------
    status: name of the outcome, such as ``gap_too_wide`` or ``slack``.

    >>> NotSettledError("no equilibrium within tolerance", "not_settled").status
    'not_settled'
    """

    def __init__(self, message: str, status: str = "not_settled") -> None:
        super().__init__(message)
        self.status = status

    def __reduce__(self) -> tuple[type[NotSettledError], tuple[str, str]]:
        return (NotSettledError, (str(self), self.status))


class ShutWindowError(TautwiseError):
    """No pull satisfies every limit, and the caller asked for one that does.

    >>> str(ShutWindowError("no pull satisfies every limit"))
    'no pull satisfies every limit'
    """


class SearchCancelled(TautwiseError, KeyboardInterrupt):
    """A search was cancelled with Ctrl-C. `best` is what it had found so far, or None.

    >>> SearchCancelled("cancelled", best=None).best is None
    True
    """

    def __init__(self, message: str = "cancelled", best: object = None) -> None:
        super().__init__(message)
        self.best = best


def _sorted(faults: Iterable[Fault]) -> tuple[Fault, ...]:
    listed = tuple(faults)
    files = list(dict.fromkeys(fault.file for fault in listed))
    return tuple(sorted(listed, key=lambda fault: (files.index(fault.file), fault.line or 0)))
