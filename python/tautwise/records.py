"""What all results share: frozen records that turn into JSON and back without loss.

A record is a frozen dataclass. Its fields are the keys of its JSON object, in order; `KEYS` names the few whose key is
another (no Python name), or that never leave the process (None). Numbers that are not finite never reach JSON: they are
null there, and None in Python.
"""

from __future__ import annotations

import json
import math
from collections.abc import Mapping
from dataclasses import MISSING, Field, fields
from functools import cache
from types import MappingProxyType, UnionType
from typing import Any, ClassVar, Self, Union, cast, get_args, get_origin, get_type_hints

from tautwise.errors import Fault, InputError


class Record:
    """Base of the results: exact round trip through plain dictionaries and JSON.

    >>> from dataclasses import dataclass
    >>> @dataclass(frozen=True, slots=True)
    ... class Pair(Record):
    ...     KEYS = {"first": "from"}
    ...     first: str
    ...     sag_m: float | None
    >>> Pair("West mast", 0.1).to_json()
    '{"from": "West mast", "sag_m": 0.1}'
    >>> Pair.from_json('{"from": "West mast", "sag_m": null}')
    Pair(first='West mast', sag_m=None)
    """

    __slots__ = ()

    FORMAT: ClassVar[str] = ""
    KEYS: ClassVar[Mapping[str, str | None]] = MappingProxyType({})

    def to_dict(self) -> dict[str, Any]:
        """Plain dictionaries, lists, texts and finite numbers, under the keys of the JSON document."""
        kind: Any = type(self)
        own = {name: _plain(getattr(self, attribute)) for name, attribute in _keys(kind).items()}
        return {"format": self.FORMAT, **own} if self.FORMAT else own

    def to_json(self, indent: int | None = None) -> str:
        """The record as one JSON document; floats are written with all their digits.

        Parameters
        ----------
        indent: spaces for each level, lists of plain values on one line; None for one line in all.
        """
        data = self.to_dict()
        if indent is None:
            return _json(data)
        return readable_json(data, indent)

    @classmethod
    def from_dict(cls, data: Mapping[str, Any]) -> Self:
        """The record that `to_dict` gave.

        Raises
        ------
        InputError: a key is missing, unknown, or holds something else.
        """
        return cast(Self, _record(cls, data, ""))

    @classmethod
    def from_json(cls, text: str | bytes) -> Self:
        """The record that `to_json` gave.

        Raises
        ------
        InputError: this is not JSON, or not such a record.
        """
        try:
            data = json.loads(text, parse_constant=_refuse_constant)
        except (ValueError, RecursionError) as error:
            raise InputError([Fault(None, None, "", f"this is not JSON: {error}")]) from None
        return cast(Self, _record(cls, data, ""))


def finite(value: float | None) -> float | None:
    """A number for a result: None where it is missing or not finite.

    >>> finite(2), finite(float("nan")), finite(None)
    (2.0, None, None)
    """
    return None if value is None or not math.isfinite(value) else float(value)


def readable_json(value: Any, indent: int = 2) -> str:
    """JSON with one key or table on a line, and lists of plain values on one line.

    >>> print(readable_json({"open": True, "pull_N": [1.0, 2.0]}))
    {
      "open": true,
      "pull_N": [1.0, 2.0]
    }
    """
    return _written(value, indent, "\n")


def _written(value: Any, indent: int, line: str) -> str:
    parts = value.values() if isinstance(value, dict) else value
    plain = not isinstance(value, dict | list) or not any(isinstance(part, dict | list) for part in parts)
    if not isinstance(value, dict | list) or not value or (plain and isinstance(value, list)):
        return _json(value)
    below = line + " " * indent
    if isinstance(value, list):
        return "[" + ",".join(below + _written(part, indent, below) for part in value) + line + "]"
    rows = (f"{_json(name)}: {_written(part, indent, below)}" for name, part in value.items())
    return "{" + ",".join(below + row for row in rows) + line + "}"


def _json(value: Any) -> str:
    """JSON on one line, in which nothing is left that a terminal might obey."""
    text = json.dumps(value, ensure_ascii=False, allow_nan=False)
    return text if text.isprintable() else "".join(map(_escaped, text))


def _escaped(char: str) -> str:
    return char if char.isprintable() else json.dumps(char)[1:-1]


def _refuse_constant(text: str) -> float:
    raise ValueError(f"{text} is not a finite number")


@cache
def _keys(kind: Any) -> dict[str, str]:
    """JSON key and attribute of each field that is written."""
    named = {kind.KEYS.get(each.name, each.name): each.name for each in fields(kind)}
    return {name: attribute for name, attribute in named.items() if name is not None}


@cache
def _hints(kind: Any) -> dict[str, Any]:
    return get_type_hints(kind)


@cache
def _optional(kind: Any) -> frozenset[str]:
    return frozenset(each.name for each in fields(kind) if _has_default(each))


def _has_default(each: Field[Any]) -> bool:
    return each.default is not MISSING or each.default_factory is not MISSING


def _plain(value: Any) -> Any:
    if isinstance(value, Record):
        return value.to_dict()
    if isinstance(value, tuple):
        return [_plain(part) for part in value]
    return finite(value) if isinstance(value, float) else value


def _record(kind: Any, data: Any, path: str) -> Any:
    if not isinstance(data, Mapping):
        raise _wrong(path, "a table of keys")
    keys = _keys(kind)
    wanted = getattr(kind, "FORMAT", "")
    if wanted and data.get("format") != wanted:
        raise _wrong(f"{path}.format".lstrip("."), f'"{wanted}"')
    unknown = sorted(str(name) for name in set(data) - set(keys) - ({"format"} if wanted else set()))
    missing = [name for name, attribute in keys.items() if name not in data and attribute not in _optional(kind)]
    if unknown or missing:
        problem = f"unknown key {unknown[0]}" if unknown else f"key {missing[0]} is missing"
        raise InputError([Fault(None, None, path, problem)])
    hints = _hints(kind)
    given = {keys[name]: (name, value) for name, value in data.items() if name in keys}
    values = {
        attribute: _value(hints[attribute], value, f"{path}.{name}".lstrip("."))
        for attribute, (name, value) in given.items()
    }
    return kind(**values)


def _value(kind: Any, value: Any, path: str) -> Any:
    origin = get_origin(kind)
    if origin in (Union, UnionType):
        inner = next(each for each in get_args(kind) if each is not type(None))
        return None if value is None else _value(inner, value, path)
    if origin is tuple:
        return _tuple(get_args(kind), value, path)
    if issubclass(kind, Record):
        return _record(kind, value, path)
    accepted = (float, int) if kind is float else kind
    if not isinstance(value, accepted) or (isinstance(value, bool) and kind is not bool):
        raise _wrong(path, {float: "a number", int: "a whole number", str: "a text", bool: "true or false"}[kind])
    return kind(value)


def _tuple(kinds: tuple[Any, ...], value: Any, path: str) -> tuple[Any, ...]:
    if not isinstance(value, list | tuple):
        raise _wrong(path, "a list")
    each = kinds[:1] * len(value) if kinds[-1] is Ellipsis else kinds
    if len(each) != len(value):
        raise _wrong(path, f"a list of {len(each)}")
    return tuple(
        _value(kind, part, f"{path}[{number}]") for number, (kind, part) in enumerate(zip(each, value, strict=True))
    )


def _wrong(path: str, expected: str) -> InputError:
    return InputError([Fault(None, None, path, "not what it should be", expected)])
