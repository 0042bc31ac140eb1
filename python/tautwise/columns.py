"""Tables to be read: aligned columns with the unit under each head, as plain text and as HTML.

>>> table = Table((text_column("span"), length_column("sag", [1.25, 10.5])), (("A to B", 1.25), ("B to C", 10.5)))
>>> print("\\n".join(table.lines()))
  span       sag
               m
  A to B   1.250
  B to C  10.500
"""

from __future__ import annotations

import html
import math
import unicodedata
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from tautwise.strict import inert

NOTHING = "-"

_TABLE_STYLE = "border-collapse:collapse;font-variant-numeric:tabular-nums"
_CELL_STYLE = "padding:0.1em 0.7em;border:0;text-align:"


@dataclass(frozen=True, slots=True)
class Column:
    """One column: its head, its unit, what SI values are divided by, the decimals shown. None: texts as they are."""

    head: str
    unit: str = ""
    divisor: float = 1.0
    decimals: int | None = None

    def shown(self, value: float | str | None) -> str:
        """A cell of this column."""
        if value is None:
            return NOTHING
        if isinstance(value, str) or self.decimals is None:
            return inert(str(value))
        text = f"{value / self.divisor:.{self.decimals}f}"
        return text.removeprefix("-") if float(text) == 0.0 else text


@dataclass(frozen=True, slots=True)
class Table:
    """Columns and rows of SI numbers, texts or None."""

    columns: tuple[Column, ...]
    rows: tuple[tuple[float | str | None, ...], ...]

    def lines(self, indent: int = 2) -> list[str]:
        """Aligned lines: heads, units where there are any, rows."""
        cells = self._cells()
        heads = [tuple(column.head for column in self.columns)]
        if any(column.unit for column in self.columns):
            heads.append(tuple(column.unit for column in self.columns))
        whole = [*heads, *cells]
        widths = [max(map(width, column)) for column in zip(*whole, strict=True)]
        return [" " * indent + self._joined(row, widths) for row in whole]

    def html(self, caption: str = "") -> str:
        """The same as an HTML table that needs no style sheet; every text is escaped."""
        heads = "".join(self._cell("th", n, _head_html(column)) for n, column in enumerate(self.columns))
        rows = "".join(f"<tr>{self._row_html(row)}</tr>" for row in self._cells())
        title = f'<caption style="text-align:left">{html.escape(inert(caption))}</caption>' if caption else ""
        return f'<table style="{_TABLE_STYLE}">{title}<thead><tr>{heads}</tr></thead><tbody>{rows}</tbody></table>'

    def _cells(self) -> list[tuple[str, ...]]:
        return [
            tuple(column.shown(value) for column, value in zip(self.columns, row, strict=True)) for row in self.rows
        ]

    def _joined(self, row: tuple[str, ...], widths: Sequence[int]) -> str:
        padded = (
            text + " " * (size - width(text)) if column.decimals is None else " " * (size - width(text)) + text
            for text, size, column in zip(row, widths, self.columns, strict=True)
        )
        return "  ".join(padded).rstrip()

    def _row_html(self, row: tuple[str, ...]) -> str:
        return "".join(self._cell("td", number, html.escape(text)) for number, text in enumerate(row))

    def _cell(self, tag: str, number: int, content: str) -> str:
        side = "left" if self.columns[number].decimals is None else "right"
        return f'<{tag} style="{_CELL_STYLE}{side}">{content}</{tag}>'


def text_column(head: str) -> Column:
    """A column of texts, to the left."""
    return Column(head)


def number_column(head: str, unit: str, decimals: int) -> Column:
    """A column of numbers shown as they are.

    >>> number_column("use", "%", 1).shown(99.96)
    '100.0'
    """
    return Column(head, unit, 1.0, decimals)


def force_column(head: str, values: Iterable[float | None]) -> Column:
    """A column of forces in N, shown in N or kN as its largest value asks for.

    >>> force_column("pull", [12.0, 20000.0]).shown(20000.0), force_column("pull", [12.0]).shown(12.0)
    ('20.00', '12.0')
    """
    most = _largest(values)
    if most < 1e3:
        return Column(head, "N", 1.0, 1)
    return Column(head, "kN", 1e3, 3 if most < 1e4 else 2)


def length_column(head: str, values: Iterable[float | None]) -> Column:
    """A column of lengths in m, to the millimetre below 100 m and the centimetre above."""
    return Column(head, "m", 1.0, 3 if _largest(values) < 100.0 else 2)


def force_text(value: float) -> str:
    """A force with its unit.

    >>> force_text(18234.0), force_text(64.0)
    ('18.23 kN', '64.0 N')
    """
    column = force_column("", [value])
    return f"{column.shown(value)} {column.unit}"


def forces_text(*values: float) -> tuple[list[str], str]:
    """Forces of one sentence: all in the unit of the largest, with the decimals that the smallest needs.

    >>> forces_text(10e3, 9.6e3, 10.4e3)
    (['10.000', '9.600', '10.400'], 'kN')
    """
    unit, divisor, decimals = force_format(values)
    return [f"{value / divisor:.{decimals}f}" for value in values], unit


def force_format(values: Iterable[float | None]) -> tuple[str, float, int]:
    """Unit, what N is divided by, and decimals, for forces that are read side by side.

    >>> force_format([238.0, 85e3]), force_format([20.0])
    (('kN', 1000.0, 3), ('N', 1.0, 1))
    """
    sizes = [abs(value) for value in values if value]
    if max(sizes, default=0.0) < 1e3:
        return "N", 1.0, 1
    return "kN", 1e3, 3 if min(sizes) < 1e4 else 2


def cut(value: float, decimals: int, *, up: bool) -> str:
    """A number cut to decimals towards the safe side, so that what is printed still holds.

    >>> cut(14.2041, 2, up=True), cut(22.8799, 2, up=False)
    ('14.21', '22.87')
    """
    scale = 10.0**decimals
    whole = (math.ceil if up else math.floor)(round(value * scale, 6)) / scale
    return f"{whole:.{decimals}f}"


def plural(count: int, word: str) -> str:
    """A count and its word.

    >>> plural(1, "span"), plural(3, "span")
    ('1 span', '3 spans')
    """
    return f"{count} {word}" if count == 1 else f"{count} {word}s"


def width(text: str) -> int:
    """Columns of a terminal that a text takes.

    >>> width("Mast 3"), width("\\u6771")
    (6, 2)
    """
    if text.isascii():
        return len(text)
    return sum(0 if unicodedata.combining(c) else 2 if unicodedata.east_asian_width(c) in "WF" else 1 for c in text)


def _largest(values: Iterable[float | None]) -> float:
    return max((abs(value) for value in values if value is not None), default=0.0)


def _head_html(column: Column) -> str:
    head = html.escape(column.head)
    return f"{head}<br><small>{html.escape(column.unit)}</small>" if column.unit else head
