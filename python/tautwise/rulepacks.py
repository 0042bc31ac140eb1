"""Rule packs: loading conditions and limits of published rules as data, each value with its clause and edition.

A pack is a TOML file under data/rules. Its conditions and limits have the keys of a project file; ``sources`` beside
them says for each value which ``[source.NAME]`` it comes from. ``{name}`` stands for a parameter that the project
gives, ``{pressure}`` for a pressure 1/2 rho V^2 times factors. ``tags`` of a condition are what ``judged_in`` of a
limit names, in this pack or another; ``needs`` names the pack beside which alone a condition is used.

>>> [name for name in pack_names() if name.startswith("go-95")]
['go-95-heavy', 'go-95-light']
>>> pack("osha-lifeline").title
'OSHA, horizontal lifeline'
"""

from __future__ import annotations

import math
import tomllib
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from typing import Any, ClassVar

from tautwise.errors import Fault, InputError
from tautwise.fields import Measure
from tautwise.records import Record
from tautwise.sources import SourceLine
from tautwise.strict import did_you_mean, shown

FORMAT = "tautwise rules 1"
PRESSURE = "pressure"
OWN_KEYS = ("tags", "judged_in", "needs", "of", "sources")  # of a pack's tables, not of a project's


@dataclass(frozen=True, slots=True)
class RuleParameter(Record):
    """A value that a project gives to a pack, or may give where there is a default."""

    name: str
    words: str
    unit: str
    example: str
    default: str | None
    source: str
    confidence: str

    @property
    def measure(self) -> Measure:
        """How it is read."""
        return Measure(self.unit, self.example, least=None if self.unit == "degC" else 0.0)


@dataclass(frozen=True, slots=True)
class RuleItem(Record):
    """A condition or a limit of a pack: its values with their sources; `judged_in` tells a limit's conditions."""

    table: str
    name: str
    kind: str
    judged_in: tuple[str, ...]
    needs: str
    values: tuple[SourceLine, ...]


@dataclass(frozen=True, slots=True)
class RulePack(Record):
    """A pack in words; the document of ``rules NAME --json``."""

    FORMAT: ClassVar[str] = "tautwise-rules 1"

    name: str
    title: str
    caution: str
    parameters: tuple[RuleParameter, ...]
    items: tuple[RuleItem, ...]
    notes: tuple[SourceLine, ...]


@dataclass(frozen=True, slots=True)
class RulePackList(Record):
    """The document of ``rules --json``."""

    FORMAT: ClassVar[str] = "tautwise-rule-packs 1"

    packs: tuple[RulePack, ...]


@cache
def pack_names() -> tuple[str, ...]:
    """The names of the packs."""
    names = (file.name for file in files("tautwise").joinpath("data", "rules").iterdir())
    return tuple(sorted(name.removesuffix(".toml") for name in names if name.endswith(".toml")))


@cache
def raw_pack(name: str) -> dict[str, Any]:
    """The tables of a pack as its file has them."""
    text = files("tautwise").joinpath("data", "rules", f"{name}.toml").read_text(encoding="utf-8")
    return tomllib.loads(text)


@cache
def pack(name: str) -> RulePack:
    """A pack in words."""
    raw = raw_pack(name)
    items = [
        RuleItem(
            table, row.get("name") or row["id"], row.get("kind", ""), tuple(row.get("judged_in", ())),
            row.get("needs", ""), tuple(value_sources(raw, row, "")),
        )
        for table in ("condition", "limit")
        for row in raw.get(table, ())
    ]  # fmt: skip
    notes = tuple(SourceLine("note", "", row["text"], row["confidence"]) for row in raw.get("note", ()))
    return RulePack(raw["name"], raw["title"], raw["caution"], tuple(parameters(raw)), tuple(items), notes)


def rule_packs() -> tuple[RulePack, ...]:
    """Every pack, in the order of their names."""
    return packs_of(())


def packs_of(names: Sequence[str]) -> tuple[RulePack, ...]:
    """The packs of some names, or all where none is given.

    Raises
    ------
    InputError: there is no such pack.
    """
    known = pack_names()
    wrong = [name for name in names if name not in known]
    if wrong:
        texts = (f'there is no rule pack "{shown(name)}"; {did_you_mean(name, known)}' for name in wrong)
        raise InputError([Fault(None, None, "", text, f"one of {', '.join(known)}") for text in texts])
    return tuple(pack(name) for name in names or known)


def parameters(raw: Mapping[str, Any]) -> Iterator[RuleParameter]:
    """The parameters of a pack."""
    for row in raw.get("parameter", ()):
        source = raw["source"].get(row.get("source"), {})
        example = row.get("example") or row["default"]
        where = (clause_of(source), source["confidence"]) if source else ("", "")
        yield RuleParameter(row["name"], row["words"], row["unit"], example, row.get("default"), *where)


def filled(raw: Mapping[str, Any], row: Mapping[str, Any], given: Mapping[str, Any]) -> dict[str, Any]:
    """A condition or limit of a pack as a table of a project file, parameters put in."""
    values = {f"{{{name}}}": value for name, value in given.items()}
    if PRESSURE in raw:
        values[f"{{{PRESSURE}}}"] = f"{_pressure(raw, given)!r} Pa"
    return {key: _replaced(value, values) for key, value in row.items() if key not in OWN_KEYS}


def value_sources(raw: Mapping[str, Any], row: Mapping[str, Any], prefix: str) -> Iterator[SourceLine]:
    """Where each value of a condition or limit comes from."""
    head = f"{prefix} " if prefix else ""
    for path, value in leaves(row):
        name = _source_name(row["sources"], path)
        if name is not None:
            source = raw["source"][name]
            text = raw[PRESSURE]["words"] if value == f"{{{PRESSURE}}}" else str(value)
            if text.startswith("{"):
                yield SourceLine(f"{head}{path}", text.strip("{}"), "asked for", "")
            else:
                yield SourceLine(f"{head}{path}", text, clause_of(source), source["confidence"])


def leaves(row: Mapping[str, Any], at: str = "") -> Iterator[tuple[str, Any]]:
    """The values of a pack's table that come from a rule, with their paths; names and what packs keep for themselves
    left out.

    >>> dict(leaves({"name": "load", "ice": {"thickness": "0.5 in"}}))
    {'ice.thickness': '0.5 in'}
    """
    for key, value in row.items():
        if at == "" and key in (*OWN_KEYS, "name", "id", "kind"):
            continue
        path = f"{at}.{key}" if at else key
        if isinstance(value, dict):
            yield from leaves(value, path)
        else:
            yield path, value


def clause_of(source: Mapping[str, Any]) -> str:
    """Clause and edition in words."""
    return f"{source['clause']}; edition {source['edition']}"


def _source_name(sources: Mapping[str, str], path: str) -> str | None:
    parts = path.split(".")
    keys = (".".join(parts[:length]) for length in range(len(parts), 0, -1))
    return next((sources[key] for key in keys if key in sources), None)


def _replaced(value: Any, values: Mapping[str, Any]) -> Any:
    if isinstance(value, dict):
        return {key: _replaced(part, values) for key, part in value.items()}
    return values.get(value, value) if isinstance(value, str) else value


def _pressure(raw: Mapping[str, Any], given: Mapping[str, Any]) -> float:
    """1/2 rho V^2 times the factors, Pa (IEC 60826 and EN 50341, from memory)."""
    measures = {each.name: each.measure for each in parameters(raw)}
    speed, density, *factors = (
        measures[name].read(given[name])
        for name in (raw[PRESSURE]["speed"], raw[PRESSURE]["air_density"], *raw[PRESSURE]["factors"])
    )
    return 0.5 * density * speed * speed * math.prod(factors)
