"""Files of sizes: CSV, a row for each size, read strictly.

The head names the columns: ``name``, ``kind``, and any of the keys under [line] (diameter, area, weight or mass,
modulus or stiffness, expansion, breaking_strength). A column may state its unit, ``weight [lbf/kft]``, and then holds
plain numbers; without one each cell has its own, ``0.273 lbf/ft``. An empty cell is a value that no source gives.
``source`` and ``confidence`` (seen, from memory, defined, measured) stand for the whole row; ``modulus_source`` and
``modulus_confidence`` for one value, likewise for the other keys. ``aliases`` are other names, parted by semicolons;
``note`` is free text. Lines that begin with # are comments.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass

from tautwise.csvlines import CsvLines
from tautwise.fields import PROSE_LENGTH_MOST, Words
from tautwise.size_records import CONFIDENCES, MEASURES, Size, SizeValue, name_key
from tautwise.strict import Refused, did_you_mean, shown

BYTES_MOST = 2_000_000
ROWS_MOST = 20_000

_TEXTS = ("name", "aliases", "kind", "source", "confidence", "note")
_COLUMNS = (*_TEXTS, *MEASURES, *(f"{key}_{what}" for key in MEASURES for what in ("source", "confidence")))
_HEAD = re.compile(r"([a-z_]+)\s*(?:\[([^\[\]]{1,32})\])?")
_EXAMPLE = "name,kind,diameter [mm],area [mm^2],mass [kg/m],modulus [GPa],breaking_strength [kN],source"
_TWICE = (("weight", "mass"), ("modulus", "stiffness"))


@dataclass(frozen=True)
class _Row:
    line: int
    cells: dict[str, str]
    units: dict[str, str]

    def text(self, column: str) -> str:
        return self.cells.get(column, "")

    def written(self, key: str) -> str:
        return f"{self.text(key)} {self.units.get(key, '')}".strip()


def read_sizes(text: str, name: str) -> tuple[Size, ...]:
    """The sizes of a CSV text.

    Parameters
    ----------
    text: with "\\n" between its lines. name: of the file, as messages and sources show it.

    Raises
    ------
    InputError: everything that is wrong with it, each with its line, twenty at most.

    >>> read_sizes("name,mass [kg/m],source\\nmy rope,0.345,a certificate\\n", "my.csv")[0].values[0].written
    '0.345 kg/m'
    """
    return _Reader(name).read(text)


class _Reader(CsvLines):
    row_words = ("cells with commas between them", "")

    def read(self, text: str) -> tuple[Size, ...]:
        lines = [(n, line) for n, line in enumerate(text.split("\n"), start=1) if line.strip() and line[0] != "#"]
        if not lines:
            self.fault(1, "the file holds no table", "a head and a row for each size", _EXAMPLE)
            self.give_up()
        columns = self.head(*lines[0])
        if len(lines) - 1 > ROWS_MOST:
            self.fault(lines[0][0], f"{len(lines) - 1} sizes; at most {ROWS_MOST} are read")
        self.give_up()
        rows = [row for number, line in lines[1:] if (row := self.sized(number, line, columns)) is not None]
        sizes = [size for row in rows if (size := self.size(row)) is not None]
        self.unique(sizes)
        self.give_up()
        return tuple(sizes)

    def head(self, number: int, line: str) -> list[tuple[str, str]]:
        columns: list[tuple[str, str]] = []
        for cell in self.row(number, line) or []:
            found = _HEAD.fullmatch(cell.strip())
            column, unit = (found[1], found[2] or "") if found else (cell.strip(), "")
            if column not in _COLUMNS or (unit and column not in MEASURES):
                wrong = did_you_mean(column, _COLUMNS)
                hint = f"; {wrong}" if wrong.startswith("did") and column not in _COLUMNS else ""
                expected = f"name, kind, {', '.join(MEASURES)}, source, confidence, aliases, note"
                self.fault(number, f'"{shown(cell)}" is no column of sizes{hint}', expected, _EXAMPLE)
            elif column in [other for other, _ in columns]:
                self.fault(number, f'the column "{column}" stands here twice')
            columns.append((column, unit))
        names = [column for column, _ in columns]
        if not self.faults and ("name" not in names or not any(key in names for key in MEASURES)):
            self.fault(number, "the head names no sizes", "name and at least one of the keys under [line]", _EXAMPLE)
        return columns

    def sized(self, number: int, line: str, columns: Sequence[tuple[str, str]]) -> _Row | None:
        cells = self.row(number, line)
        if cells is None:
            return None
        if len(cells) != len(columns):
            self.fault(number, f"{len(cells)} cells under {len(columns)} columns", "one for each; empty for no value")
            return None
        named = {column: cell.strip() for (column, _), cell in zip(columns, cells, strict=True)}
        return _Row(number, named, dict(columns))

    def size(self, row: _Row) -> Size | None:
        before = len(self.faults)
        name = self.label(row, "name", row.text("name"))
        kind = self.label(row, "kind", row.text("kind") or "line")
        split = [alias.strip() for alias in row.text("aliases").split(";")]
        aliases = tuple(self.label(row, "aliases", alias) for alias in split if alias)
        for column in (column for column in row.cells if column.endswith(("source", "note")) and row.text(column)):
            self.prose(row, column)
        values = tuple(value for key in MEASURES if (value := self.value(row, key)) is not None)
        for pair in _TWICE:
            if all(row.text(key) for key in pair):
                self.fault(row.line, f"{pair[0]} and {pair[1]} are given at once", "one of them", column=pair[1])
        if not values and len(self.faults) == before:
            self.fault(row.line, f'"{shown(name)}" has no value', "at least one", column="name")
        if len(self.faults) > before:
            return None
        return Size.of(name, kind, values, self.name, row.line, aliases, row.text("note"))

    def value(self, row: _Row, key: str) -> SizeValue | None:
        if not row.text(key):
            return None
        measure, written = MEASURES[key], row.written(key)
        confidence = row.text(f"{key}_confidence") or ("" if row.text(f"{key}_source") else row.text("confidence"))
        if confidence and confidence not in CONFIDENCES:
            self.fault(row.line, f'"{shown(confidence)}" is no confidence', ", ".join(CONFIDENCES), column="confidence")
        try:
            number = measure.read(written)
        except Refused as refused:
            problem = refused.problem
            self.fault(row.line, problem, refused.expected or measure.words, measure.example.strip('"'), column=key)
            return None
        source = row.text(f"{key}_source") or row.text("source") or f"{self.name}:{row.line}, which names no source"
        return SizeValue(key, written, number, measure.unit, source, confidence)

    def label(self, row: _Row, column: str, text: str) -> str:
        try:
            return Words("a name", "my rope 12 mm").read(text)
        except Refused as refused:
            self.fault(row.line, refused.problem, "a name", "my rope 12 mm", column=column)
            return text

    def prose(self, row: _Row, column: str) -> None:
        text = row.text(column)
        if len(text) > PROSE_LENGTH_MOST or not text.isprintable():
            problem = f'"{shown(text)}" is too long or cannot be printed'
            self.fault(row.line, problem, "a text of one line", column=column)

    def unique(self, sizes: Sequence[Size]) -> None:
        seen: dict[str, Size] = {}
        for size in sizes:
            for name in (size.name, *size.aliases):
                other = seen.setdefault(name_key(name), size)
                if other is not size:
                    problem = f'"{shown(name)}" is the name of another size too, in line {other.line}'
                    self.fault(size.line or 1, problem, "a name of its own", column="name")
