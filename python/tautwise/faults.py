"""Faults from what pydantic collects: each error becomes a fault with the key's line, expectation and example."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from typing import Any, get_args

from pydantic import BaseModel, ValidationError
from pydantic.fields import FieldInfo

from tautwise.errors import Fault
from tautwise.fields import NAME_EXAMPLE, Kind
from tautwise.keylines import Path as KeyPath
from tautwise.limits import LIMITS
from tautwise.reader import Document
from tautwise.strict import described, nearest, shown

NOT_YET = {
    "arrange": "arranging supports is not available in this version",
    "sweep": "sweeps are not available in this version",
}

TABLES = {
    "ice": '{ thickness = "15 mm", density = "900 kg/m^3" }',
    "wind": '{ pressure = "400 Pa" }',
    "capacity": '{ along = "90 kN" }',
    "tension": '{ support = "West mast", value = "20 kN" }',
    "sag": '{ from = "West mast", to = "East mast", value = "6.7 m" }',
    "load": '{ force = "2 kN", at = "75 m" }',
    "factors": "{ wind = 1.5, ice = 1.2 }",
    "shift": '{ offset = "1.5 m" }',
}
LISTS = {
    "load": f"[ {TABLES['load']} ]",
    "conditions": '["hot"]',
    "supports": '["West mast"]',
    "spans": '["West mast"]',
    "catalogue": '["my_sizes.csv"]',
}
NAMES = {"condition": "hot", "conditions": "hot", "crossing": "channel", "mark": "marker ball", "load": "trolley"}


def faults_of(
    error: ValidationError, model: type[BaseModel], document: Document, at: KeyPath, hidden: Iterable[KeyPath] = ()
) -> Iterator[Fault]:
    """The faults behind a validation error of the table at path `at`, those at or below `hidden` paths left out."""
    for item in error.errors(include_url=False, include_input=True):
        path = item["loc"]
        if any((*at, *path)[: len(one)] == one for one in hidden):
            continue
        kind, context = item["type"], item.get("ctx", {})
        if kind == "extra_forbidden":
            yield unknown_key(document, (*at, *path), keys_of(_model_at(model, path[:-1]) or model))
        elif kind == "tautwise":
            example = _example((*at, *path), context["example"])
            yield document.fault((*at, *path), context["problem"], context["expected"], example)
        elif kind == "missing":
            field = _field_at(model, path)
            words, example = _expectation(field)
            yield document.fault((*at, *path), "missing", words, _example((*at, *path), example))
        else:
            yield _shape_fault(document, (*at, *path), kind, item["input"])


def slips_of(error: ValidationError, model: type[BaseModel]) -> Iterator[tuple[KeyPath, str]]:
    """The unknown keys behind a validation error that are near a known one: path in the table, and the known key."""
    for item in error.errors(include_url=False, include_input=False):
        path = item["loc"]
        if item["type"] == "extra_forbidden" and path[-1] not in NOT_YET:
            guess = nearest(str(path[-1]), keys_of(_model_at(model, path[:-1]) or model))
            if guess:
                yield path, guess


def unknown_key(document: Document, path: KeyPath, known: Iterable[str]) -> Fault:
    """The fault of a key that is not known, with the nearest one that is."""
    key, keys = str(path[-1]), list(known)
    if key in NOT_YET and key not in keys:
        return document.fault(path, NOT_YET[key])
    guess = nearest(key, keys)
    if guess:
        return document.fault(path, f'unknown key; did you mean "{guess}"?')
    kinds = [kind for kind, model in LIMITS.items() if key in keys_of(model)]
    if path[0] == "limit" and kinds:
        return document.fault(path, f"no key of this kind of limit, whose keys are {', '.join(keys)}")
    return document.fault(path, "unknown key", f"one of {', '.join(keys)}")


def keys_of(model: type[BaseModel]) -> list[str]:
    """The keys of a table as they are written.

    >>> from tautwise.tables import Crossing
    >>> keys_of(Crossing)
    ['name', 'from', 'to', 'top']
    """
    return [field.alias or name for name, field in model.model_fields.items()]


def example_of(model: type[BaseModel], key: str) -> str:
    """How a key of a table is written.

    >>> from tautwise.tables import Line
    >>> example_of(Line, "weight")
    'weight = "11.9 N/m"'
    """
    return _example((key,), _expectation(_field_at(model, (key,)))[1])


def _example(path: KeyPath, value: str) -> str:
    if value == NAME_EXAMPLE:
        tables = [part for part in path if isinstance(part, str) and part in NAMES]
        value = f'"{NAMES[tables[-1]]}"' if tables else value
    if not value or not path or not isinstance(path[-1], str):
        return value
    key = path[-1]
    return f"{key} = {value}" if key.replace("_", "").isalnum() and key.isascii() else value


def _shape_fault(document: Document, path: KeyPath, kind: str, value: Any) -> Fault:
    key = next((part for part in reversed(path) if isinstance(part, str)), "")
    if kind == "invalid_key":
        return document.fault(path[:-1], f"the key {shown(str(path[-1]))} is no text", "the keys of a project file")
    if kind == "too_short":
        return document.fault(path, "an empty list", "one name or more", _example(path, LISTS.get(key, "")))
    if kind.startswith(("tuple", "list")):
        words = f"{described(value)} where a list is needed"
        return document.fault(path, words, "a list", _example(path, LISTS.get(key, "")))
    words, example = f"{described(value)} where a table is needed", TABLES.get(key, "")
    if path == ("stringing", "tension") and isinstance(value, str):
        words += '; did you mean "horizontal_tension"?'
        example = _tension_example(document, value)
    return document.fault(path, words, "a table", _example(path, example))


def _tension_example(document: Document, value: str) -> str:
    """The tension at the first support, as it would be written."""
    supports = document.tables.get("support")
    first = supports[0] if isinstance(supports, list | tuple) and supports else None
    name = first.get("name") if isinstance(first, dict) else None
    where = name if isinstance(name, str) else "West mast"
    return f'{{ support = "{shown(where)}", value = "{shown(value)}" }}'


def _field_at(model: type[BaseModel], path: KeyPath) -> FieldInfo | None:
    current: type[BaseModel] | None = model
    field: FieldInfo | None = None
    for part in path:
        if not isinstance(part, str):
            continue
        if current is None:
            return None
        fields = {field.alias or name: field for name, field in current.model_fields.items()}
        field = fields.get(part)
        current = _table_in(field.annotation) if field else None
    return field


def _model_at(model: type[BaseModel], path: KeyPath) -> type[BaseModel] | None:
    if not path:
        return model
    field = _field_at(model, path)
    return _table_in(field.annotation) if field else None


def _table_in(annotation: Any) -> type[BaseModel] | None:
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        return annotation
    return next((found for part in get_args(annotation) if (found := _table_in(part))), None)


def _expectation(field: FieldInfo | None) -> tuple[str, str]:
    if field is None:
        return "", ""
    kind = next((part for part in (*field.metadata, *_parts(field.annotation)) if isinstance(part, Kind)), None)
    return (kind.words, kind.example) if kind else ("", "")


def _parts(annotation: Any) -> Iterator[Any]:
    metadata = getattr(annotation, "__metadata__", ())
    yield from metadata
    for part in get_args(annotation):
        yield part
        yield from _parts(part)


def quoted_list(names: Iterable[str]) -> str:
    """Names in quotes, with commas.

    >>> quoted_list(["hot", "cold"])
    '"hot", "cold"'
    """
    return ", ".join(f'"{shown(name)}"' for name in names)
