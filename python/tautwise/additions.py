"""What a project's size and rule packs add to its tables, before these are checked.

Values of the size fill the keys that [line] leaves out. Conditions and limits of packs follow the project's own, which
win where they bear the same name. Every added key stands on the line of the file that asked for it.
"""

from __future__ import annotations

import os
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING, Any

from tautwise.catalogue import Catalogue
from tautwise.errors import InputError
from tautwise.keylines import Path as KeyPath
from tautwise.reader import Document, WrittenNumber, inside_folder, read_text
from tautwise.rulepacks import PRESSURE, clause_of, filled, leaves, pack_names, parameters, raw_pack, value_sources
from tautwise.size_files import BYTES_MOST, read_sizes
from tautwise.size_records import Size, SizeValue
from tautwise.sources import NOT_STATED, ONE_STATE, SourceLine
from tautwise.strict import Refused, described, did_you_mean, nearest, shown
from tautwise.units import number_and_unit, read_unit

if TYPE_CHECKING:
    from tautwise.check import Checked

FILES_MOST = 16
PACKS_MOST = 32
KEYWORDS = "the keyword arguments"
LACKING, FAILED = "lacking", "failed"

_STRETCHES = ("curve", "core", "outer", "bedding_in")  # keys of a line that is another in its final state
_RULES_EXAMPLE = 'rules = ["nesc-250b-heavy", "nesc-261h"]'
_INSTEAD = {  # which keys of the file stand in for a size's
    "weight": ("mass",),
    "mass": ("weight",),
    "modulus": ("stiffness", "curve", "core", "outer"),
    "stiffness": ("modulus", "curve", "core", "outer"),
}


@dataclass
class Additions:
    """What was added, for the results.

    Fields
    ------
    size: of the line, if it names one that is known. failed: it names one that could not be found.
    notes: what a reader should know, such as which of two sizes was taken. origins: where each value comes from.
    """

    size: Size | None = None
    failed: bool = False
    notes: list[str] = field(default_factory=list)
    origins: list[SourceLine] = field(default_factory=list)


@dataclass
class _Use:
    """A pack as a project uses it."""

    raw: dict[str, Any]
    path: KeyPath
    prefix: str
    given: dict[str, Any]
    conditions: list[str] | None = None

    @property
    def name(self) -> str:
        return str(self.raw["name"])


def add_to(document: Document) -> Additions:
    """Fill the tables of a document; what is wrong goes among its faults."""
    added = Additions()
    document.additions = added
    _add_size(document, added)
    _add_rules(document, added)
    return added


def size_rules(checked: Checked) -> str:
    """Note what the size and [line] lack together: `LACKING`, `FAILED` where the size is not known, or nothing."""
    added = checked.document.additions
    if added is None or added.failed:
        return FAILED if added else ""
    if added.size is None:
        return ""
    raw, name, told = checked.raw("line"), shown(added.size.name), ""
    if raw.get("weight") is None and raw.get("mass") is None:
        problem = f'"{name}" gives no weight'
        checked.fault(("line", "size"), problem, "weight or mass beside it", 'weight = "11.9 N/m"')
        told = LACKING
    curved = any(raw.get(key) is not None for key in ("stiffness", *_INSTEAD["modulus"][1:]))
    lacking = [key for key in ("area", "modulus") if raw.get(key) is None]
    if lacking and not curved:
        problem = f'"{name}" gives no {" and no ".join(lacking)}, so the line has no stiffness'
        example = 'stiffness = "22.5 MN"' if len(lacking) > 1 or lacking == ["modulus"] else 'area = "150 mm^2"'
        checked.fault(("line", "size"), problem, f"{' and '.join(lacking)}, or stiffness, beside it", example)
        told = LACKING
    return told


def _add_size(document: Document, added: Additions) -> None:
    line = document.tables.get("line")
    if not isinstance(line, dict):
        return
    name = line.get("size")
    files = _catalogue_files(document, line.get("catalogue"))
    if name is None:
        return
    added.failed = True
    if files is None or not isinstance(name, str) or isinstance(name, WrittenNumber):
        return  # told as the kind of value that it is
    try:
        added.size, others = Catalogue.of(files).find(name)
    except Refused as refused:
        example = refused.example if refused.expected else ""
        document.faults.append(document.fault(("line", "size"), refused.problem, refused.expected, example))
        return
    added.failed = False
    for other in others:
        text = f'"{shown(added.size.name)}" is taken from {added.size.place}, not from {other.place}'
        added.notes.append(str(document.fault(("line", "size"), text)))
    _fill_line(document, line, added.size, added)


def _fill_line(document: Document, line: dict[str, Any], size: Size, added: Additions) -> None:
    place = document.where(("line", "size"))
    own = set(line)
    added.origins.append(SourceLine("line.size", size.name, f"{size.place}{': ' if size.note else ''}{size.note}", ""))
    for value in size.values:
        given = next((key for key in (value.key, *_INSTEAD.get(value.key, ())) if key in own), None)
        added.origins.append(_origin(document, value, given, line))
        if given is None:
            line[value.key] = value.written
            if place[0] is not None and place[1] is not None:
                document.index[("line", value.key)] = (place[0], place[1])
    line.setdefault("name", size.name)


def _origin(document: Document, value: SizeValue, given: str | None, line: Mapping[str, Any]) -> SourceLine:
    if given is None:
        return SourceLine(f"line.{value.key}", _with_si(value), value.source, value.confidence or NOT_STATED)
    file, number = document.where(("line", given))
    place = f"{file}:{number}" if file else KEYWORDS
    return SourceLine(f"line.{given}", shown(str(line[given])), f"{place}, instead of {value.written} of the size", "")


def _with_si(value: SizeValue) -> str:
    if read_unit(number_and_unit(value.written)[1]).factor == 1:
        return value.written
    return f"{value.written} = {value.value:.6g} {value.unit}".replace("1/K", "/ K")


def _catalogue_files(document: Document, given: Any) -> list[tuple[Size, ...]] | None:
    """The sizes of each file of the catalogue; None where one could not be read."""
    if given is None:
        return []
    if not isinstance(given, list | tuple):
        return None
    if len(given) > FILES_MOST:
        problem = f"{len(given)} files; at most {FILES_MOST} are read"
        document.faults.append(document.fault(("line", "catalogue"), problem))
        return None
    read: list[tuple[Size, ...]] = []
    whole = True
    for number, entry in enumerate(given):
        path: KeyPath = ("line", "catalogue", number)
        if not isinstance(entry, str) or isinstance(entry, WrittenNumber):
            return None
        try:
            read.append(_read_catalogue(document, path, entry))
        except InputError as error:
            document.faults += error.faults
            whole = False
    return read if whole else None


def _read_catalogue(document: Document, path: KeyPath, entry: str) -> tuple[Size, ...]:
    named_in, _ = document.where(path)
    folder = Path(named_in).parent if named_in else document.folder
    file = folder / entry
    problem = ""
    if not entry.strip() or not entry.isprintable():
        problem = f'"{shown(entry)}" is no file name'
    elif not inside_folder(document.folder, file):
        problem = f'"{shown(entry)}" is outside the project\'s folder'
    elif not file.is_file():
        problem = f'there is no file "{shown(entry)}"'
    if problem:
        expected = "a CSV file in the project's folder or below it"
        raise InputError([document.fault(path, problem, expected, 'catalogue = ["my_sizes.csv"]')])
    name = os.path.join(os.path.dirname(named_in), entry) if named_in else entry
    text, source = read_text(file, name, BYTES_MOST)
    document.sources.append(source)
    return read_sizes(text, name)


def _add_rules(document: Document, added: Additions) -> None:
    given = document.tables.get("rules")
    if given is None:
        return
    before = len(document.faults)
    uses = _uses(document, given)
    if len(document.faults) == before:
        for use in uses:
            added.origins += _parameter_origins(document, use)
        _add_conditions(document, uses, added)
        _add_limits(document, uses, added)
    if len(document.faults) > before:
        document.incomplete = True  # what other tables name may be what could not be added


def _uses(document: Document, given: Any) -> list[_Use]:
    if not isinstance(given, list | tuple) or len(given) > PACKS_MOST:
        problem = f"{described(given)} where a list of at most {PACKS_MOST} rule packs is needed"
        document.faults.append(document.fault(("rules",), problem, "a list", _RULES_EXAMPLE))
        return []
    uses: list[_Use] = []
    for number, entry in enumerate(given):
        use = _use(document, ("rules", number), entry)
        if use is None:
            continue
        if use.prefix in [other.prefix for other in uses]:
            problem = f'"{shown(use.prefix)}" stands here twice'
            example = f'{{ pack = "{use.name}", as = "{use.name} 2" }}'
            document.faults.append(document.fault(use.path, problem, "a name of its own for each use", example))
        uses.append(use)
    return uses


def _use(document: Document, path: KeyPath, entry: Any) -> _Use | None:
    table = {"pack": entry} if isinstance(entry, str) else entry
    name = table.get("pack") if isinstance(table, dict) else None
    if not isinstance(name, str):
        problem = f"{described(entry)} where a rule pack is needed"
        document.faults.append(document.fault(path, problem, "its name, or a table with pack", _RULES_EXAMPLE))
        return None
    if name not in pack_names():
        listed = ", ".join(pack_names())
        guess = nearest(name, pack_names())
        hint = f'; did you mean "{guess}"?' if guess else ""
        problem = f'there is no rule pack "{shown(name)}"{hint}'
        document.faults.append(document.fault(path, problem, f"one of {listed}"))
        return None
    raw = raw_pack(name)
    free = [limit for limit in raw.get("limit", ()) if "judged_in" not in limit]
    known = [each.name for each in parameters(raw)]
    allowed = ["pack", "as", *known, *(["conditions"] if free else [])]
    for key in [key for key in table if key not in allowed]:
        if isinstance(key, str):
            fault = document.fault((*path, key), f"unknown key; {did_you_mean(key, allowed)}")
        else:
            fault = document.fault(path, f"the key {shown(str(key))} is no text", "the keys of a project file")
        document.faults.append(fault)
    prefix = table.get("as", name)
    if not isinstance(prefix, str) or not prefix.strip() or not prefix.isprintable() or len(prefix) > 40:
        problem = f"{described(prefix)} is no name"
        document.faults.append(document.fault((*path, "as"), problem, "a name of 40 characters at most", 'as = "gale"'))
        return None
    given = _given(document, path, raw, table)
    return _Use(raw, path, prefix, given, _conditions_of(document, path, table.get("conditions")))


def _given(document: Document, path: KeyPath, raw: dict[str, Any], table: Mapping[str, Any]) -> dict[str, Any]:
    """The parameters of a use as written, defaults where the project gives none."""
    given: dict[str, Any] = {}
    for each in parameters(raw):
        written = table.get(each.name, each.default)
        example = f'{each.name} = "{each.example}"'
        if written is None:
            problem = f'{each.name} is missing, which "{raw["name"]}" needs'
            document.faults.append(document.fault(path, problem, each.words, example))
            continue
        try:
            each.measure.read(written)
        except Refused as refused:
            at = (*path, each.name)
            document.faults.append(document.fault(at, refused.problem, each.measure.words, example))
        given[each.name] = written
    return given


def _conditions_of(document: Document, path: KeyPath, given: Any) -> list[str] | None:
    if given is None:
        return None
    if isinstance(given, list | tuple) and given and all(isinstance(name, str) for name in given):
        return list(given)
    problem = f"{described(given)} where a list of conditions is needed"
    document.faults.append(document.fault((*path, "conditions"), problem, "a list of names", 'conditions = ["hot"]'))
    return None


def _add_conditions(document: Document, uses: Iterable[_Use], added: Additions) -> None:
    names = {use.name for use in uses}
    line = document.tables.get("line")
    stretches = isinstance(line, dict) and any(line.get(key) is not None for key in _STRETCHES)
    for use, row in _rows(uses, "condition"):
        if row.get("needs", use.name) not in names:
            continue
        table = filled(use.raw, row, use.given)
        table["name"] = f"{use.prefix} {row['name']}"
        if "state" in table and not stretches:
            del table["state"]
            added.origins.append(SourceLine(f"{table['name']} state", row["state"], ONE_STATE, ""))
        if _append(document, "condition", "name", table, use, added):
            added.origins += _origins(use, row, table["name"], table)


def _add_limits(document: Document, uses: list[_Use], added: Additions) -> None:
    for use, row in _rows(uses, "limit"):
        table = filled(use.raw, row, use.given)
        table["id"] = f"{use.prefix}-{row['id']}"
        conditions = use.conditions
        if "judged_in" in row:
            conditions = _tagged(uses, row["judged_in"])
            if not conditions:
                problem = f'"{use.name}" judges the conditions of {row["of"]}, and none is among the rules'
                fault = document.fault(use.path, problem, "one of them", _RULES_EXAMPLE)
                document.faults += [fault] if fault not in document.faults else []
                continue
        if conditions is not None:
            table["conditions"] = conditions
        source = use.raw["source"][next(iter(row["sources"].values()))]
        table["clause"] = f"{clause_of(source)}; {source['confidence']}"
        if _append(document, "limit", "id", table, use, added):
            added.origins += _origins(use, row, table["id"], table)


def _rows(uses: Iterable[_Use], table: str) -> Iterator[tuple[_Use, dict[str, Any]]]:
    return ((use, row) for use in uses for row in use.raw.get(table, ()))


def _tagged(uses: Iterable[_Use], tags: Iterable[str]) -> list[str]:
    rows = _rows(uses, "condition")
    return [f"{use.prefix} {row['name']}" for use, row in rows if set(tags) & set(row.get("tags", ()))]


def _append(document: Document, array: str, label: str, table: dict[str, Any], use: _Use, added: Additions) -> bool:
    """Add a table to an array, unless the project has one of its name; whether it was added."""
    rows = document.tables.setdefault(array, [])
    if not isinstance(rows, list):
        return False  # told as the kind of value that it is
    for number, row in enumerate(rows):
        if isinstance(row, dict) and row.get(label) == table[label]:
            text = f'stands instead of that of the rule pack "{use.name}"'
            added.notes.append(str(document.fault((array, number), text)))
            return False
    place = document.where(use.path)
    if place[0] is not None and place[1] is not None:
        document.index[(array, len(rows))] = (place[0], place[1])
    rows.append(table)
    return True


def _parameter_origins(document: Document, use: _Use) -> Iterator[SourceLine]:
    """Where each parameter of a use comes from: the project, or the pack's default."""
    entry = document.tables["rules"][use.path[1]]
    for each in parameters(use.raw):
        what, value = f"{use.prefix} {each.name}", str(use.given[each.name])
        if isinstance(entry, dict) and each.name in entry:
            file, number = document.where((*use.path, each.name))
            yield SourceLine(what, shown(value), f"{file}:{number}" if file else KEYWORDS, "")
        else:
            yield SourceLine(what, value, f"default of the pack; {each.source}", each.confidence)


def _origins(use: _Use, row: Mapping[str, Any], name: str, table: Mapping[str, Any]) -> Iterator[SourceLine]:
    """Where each value of a condition or limit comes from; parameters have their own lines."""
    for path, written in leaves(row):
        given = isinstance(written, str) and written.startswith("{") and written != f"{{{PRESSURE}}}"
        if given or (path == "state" and "state" not in table):
            continue
        source = next(each for each in value_sources(use.raw, row, "") if each.what == path)
        value = str(_leaf(table, path))
        shown_value = value if source.value == value else f"{source.value} = {value}"
        yield SourceLine(f"{name} {path}", shown_value, source.source, source.confidence)


def _leaf(table: Mapping[str, Any], path: str) -> Any:
    value: Any = table
    for part in path.split("."):
        value = value[part]
    return value
