"""What ``sizes`` and ``rules`` print: lists to choose from, and each value with its source."""

from __future__ import annotations

import csv
import io
from collections.abc import Sequence
from typing import TYPE_CHECKING

from tautwise.columns import Column, Table, plural, text_column
from tautwise.ropes import EXAMPLE, GRADES, factors
from tautwise.rulepacks import RuleItem, RulePack
from tautwise.size_records import Size, size_table
from tautwise.sources import NOT_STATED, sources_lines
from tautwise.strict import toml_text
from tautwise.text import caution, next_steps, quoted

if TYPE_CHECKING:
    from tautwise.text import Ink

CAUTION = "Check the maker's certificate: catalogue values differ between tables and editions."
_FORMULA = ("=", "+", "-", "@", "\t", "\r")
_CSV_KEYS = ("name", "kind", "diameter_m", "area_m2", "weight_N_per_m", "modulus_Pa", "stiffness_N", "expansion_per_K",
             "breaking_strength_N", "file", "line", "note")  # fmt: skip


def sizes_text(sizes: Sequence[Size], ink: Ink, *, sources: bool, ropes: bool) -> list[str]:
    """A list of sizes, or each with its sources; `ropes`: how they are named is told too."""
    if not sizes:
        return ["No size is like this."]
    if sources:
        lines = [line for size in sizes for line in (*_size_lines(size, ink), "")][:-1]
    else:
        lines = [ink.strong(plural(len(sizes), "size")), *size_table(sizes).lines()]
        if any(size.missing for size in sizes):
            lines += ["", '  "to give": what no source gives, so that a project must.']
    if ropes:
        lines += ["", *_rope_lines(ink)]
    first = sizes[0].name
    steps = [
        ("use it", f"size = {toml_text(first)} under [line]"),
        ("see its sources", f"tautwise sizes {quoted(first)} --sources"),
    ]
    return [*lines, *next_steps(steps[: 1 if sources else 2], ink), *caution(CAUTION, ink)]


def sizes_csv(sizes: Sequence[Size]) -> str:
    """The sizes as CSV, in SI; a text that a spreadsheet would take for a formula gets an apostrophe in front.

    >>> sizes_csv([]).startswith("name,kind,diameter_m,")
    True
    """
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(_CSV_KEYS)
    for size in sizes:
        writer.writerow([_cell(getattr(size, key)) for key in _CSV_KEYS])
    return out.getvalue()


def rules_text(packs: Sequence[RulePack], ink: Ink) -> list[str]:
    """The list of packs."""
    columns = (text_column("pack"), text_column("is"), text_column("adds"), text_column("to give"))
    rows = tuple((pack.name, pack.title, _adds(pack), ", ".join(_required(pack)) or None) for pack in packs)
    steps = [("read one with its sources", f"tautwise rules {packs[0].name}"), ("use it", _use(packs[0]))]
    return [*Table(columns, rows).lines(), *next_steps(steps, ink), *caution(packs[0].caution, ink)]


def pack_text(pack: RulePack, ink: Ink) -> list[str]:
    """One pack in words: what it adds, what it asks for, where each value comes from."""
    lines = [ink.strong(f"{pack.name}: {pack.title}"), ink.alarm(pack.caution)]
    if pack.parameters:
        lines += ["", ink.strong("Asks for"), *_parameter_table(pack).lines()]
    for item in pack.items:
        lines += ["", ink.strong(_item_head(pack, item)), *sources_lines(item.values)]
    if pack.notes:
        lines += ["", *(f"{each.source} ({each.confidence or NOT_STATED})" for each in pack.notes)]
    return [*lines, *next_steps([("use it", _use(pack))], ink)]


def _size_lines(size: Size, ink: Ink) -> list[str]:
    columns = (
        text_column("key"), text_column("value"), Column("in SI", decimals=0), text_column("unit"),
        text_column("confidence"), text_column("source"),
    )  # fmt: skip
    rows = tuple(
        (each.key, each.written, f"{each.value:.6g}", each.unit, each.confidence or NOT_STATED, each.source)
        for each in size.values
    )
    lines = [ink.strong(f"{size.name} ({size.kind})"), f"  {size.place}"]
    if size.aliases:
        lines.append(f"  also called {'; '.join(size.aliases)}")
    lines += Table(columns, rows).lines()
    if size.missing:
        lines.append(f"  No source gives what makes its {' and '.join(size.missing)}: give it beside the size.")
    return [*lines, *([f"  Note: {size.note}."] if size.note else [])]


def _rope_lines(ink: Ink) -> list[str]:
    cores: dict[str, list[str]] = {}
    for row in factors():
        cores.setdefault(row.construction, []).append(row.core)
    rows = tuple((construction, ", ".join(names)) for construction, names in cores.items())
    head = f'Ropes of EN 12385 are named by construction, core, diameter and grade: "{EXAMPLE}"'
    grades = f"  grades {', '.join(map(str, GRADES))} N/mm2"
    return [ink.strong(head), *Table((text_column("construction"), text_column("core")), rows).lines(), grades]


def _parameter_table(pack: RulePack) -> Table:
    columns = (text_column("key"), text_column("meaning"), text_column("default"), text_column("example"))
    rows = tuple((each.name, each.words, each.default, f'{each.name} = "{each.example}"') for each in pack.parameters)
    return Table(columns, rows)


def _item_head(pack: RulePack, item: RuleItem) -> str:
    if item.table == "condition":
        beside = f', beside "{item.needs}"' if item.needs else ""
        return f'Condition "{pack.name} {item.name}"{beside}'
    where = f" in conditions of {', '.join(item.judged_in)}" if item.judged_in else ""
    return f'Limit "{pack.name}-{item.name}": {item.kind}{where}'


def _adds(pack: RulePack) -> str:
    counts = {table: sum(item.table == table for item in pack.items) for table in ("condition", "limit")}
    return ", ".join(plural(count, table) for table, count in counts.items() if count)


def _required(pack: RulePack) -> list[str]:
    return [each.name for each in pack.parameters if each.default is None]


def _use(pack: RulePack) -> str:
    required = [each for each in pack.parameters if each.default is None]
    if not required:
        return f'rules = ["{pack.name}"] at the top of the file'
    given = ", ".join(f'{each.name} = "{each.example}"' for each in required)
    return f'rules = [{{ pack = "{pack.name}", {given} }}] at the top of the file'


def _cell(value: object) -> object:
    if isinstance(value, str) and value.startswith(_FORMULA):
        return f"'{value}"
    return "" if value is None else value
