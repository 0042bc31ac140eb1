"""CSV files, read line by line, so that a lone quote cannot swallow the lines after it.

>>> lines = CsvLines("points.csv")
>>> lines.row(2, "120.0,4.5")
['120.0', '4.5']
>>> lines.row(3, '120.0,"4.5') is None, str(lines.faults[0])
(True, 'points.csv:3: a quote that is not closed on its line; expected plain numbers, for example 120.0,4.5')
"""

from __future__ import annotations

import csv
from collections.abc import Sequence

from tautwise.errors import Fault, InputError

FAULTS_MOST = 20


class CsvLines:
    """One CSV file and what is wrong with it.

    Parameters
    ----------
    name: of the file, as its faults give it.
    """

    row_words: tuple[str, str] = ("plain numbers", "120.0,4.5")
    """What a line should hold, and an example."""

    def __init__(self, name: str) -> None:
        self.name = name
        self.faults: list[Fault] = []

    def rows(self, numbered: Sequence[tuple[int, str]]) -> list[tuple[int, list[str]]]:
        """The cells of numbered lines; those that are no row are left out, with a fault."""
        read = ((number, self.row(number, line)) for number, line in numbered)
        return [(number, row) for number, row in read if row is not None]

    def row(self, number: int, line: str) -> list[str] | None:
        """The cells of one line."""
        try:
            found = list(csv.reader([line], strict=True))
        except csv.Error:
            found = []
        if len(found) != 1 or line.count('"') % 2:
            wrong = "a quote that is not closed on its line" if '"' in line else "characters that are no row"
            self.fault(number, wrong, *self.row_words)
            return None
        return found[0]

    def fault(self, line: int, problem: str, expected: str = "", example: str = "", column: str = "") -> None:
        """Note what is wrong with a line, or with one of its columns."""
        self.faults.append(Fault(self.name, line, column, problem, expected, example))

    def give_up(self) -> None:
        """Raise if there are faults.

        Raises
        ------
        InputError: the first of them, in the order of the lines, and how many more.
        """
        if not self.faults:
            return
        kept = sorted(self.faults, key=lambda fault: fault.line or 0)[:FAULTS_MOST]
        more = len(self.faults) - len(kept)
        if more:
            kept.append(Fault(self.name, kept[-1].line, "", f"and {more} more faults of this file"))
        raise InputError(kept)


def numbered_lines(text: str) -> list[tuple[int, str]]:
    """The lines of a text that are not empty, with their numbers.

    >>> numbered_lines("a\\n\\nb\\n")
    [(1, 'a'), (3, 'b')]
    """
    return [(number, line) for number, line in enumerate(text.split("\n"), start=1) if line.strip()]
