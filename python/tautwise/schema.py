"""The JSON Schema of the project file, made from the same models that read it."""

from __future__ import annotations

import math
from typing import Any

from pydantic import Field

from tautwise.check import MOST
from tautwise.limits import Limit
from tautwise.rulepacks import pack_names
from tautwise.tables import Condition, Crossing, GroundTable, Head, History, Line, Mark, Stringing, Support
from tautwise.waivers import Waiver

_WEIGHT = {"oneOf": [{"required": ["weight"]}, {"required": ["mass"]}]}
_STIFFNESS = {
    "oneOf": [
        {"required": ["stiffness"]},
        {"required": ["modulus", "area"]},
        {"required": ["curve"]},
        {"required": ["core", "outer"]},
    ]
}
_ELEVATION = {"oneOf": [{"required": ["elevation"]}, {"required": ["height"]}]}
_PLACE = {"oneOf": [{"required": ["station"]}, {"required": ["east", "north"]}]}
_GIVEN_ONCE = {
    "Line": {"anyOf": [{"required": ["size"]}, {"allOf": [_WEIGHT, _STIFFNESS]}]},
    "GroundTable": {"oneOf": [{"required": ["profile"]}, {"required": ["points"]}]},
    "Support": {"allOf": [_ELEVATION, _PLACE]},
    "Wind": {"oneOf": [{"required": ["pressure"]}, {"required": ["speed"]}]},
    "Load": {"oneOf": [{"required": ["force"]}, {"required": ["per_length"]}, {"required": ["per_run"]}]},
    "Mark": {"oneOf": [{"required": ["at"]}, {"required": ["at_length"]}]},
    "TensionLimit": {"oneOf": [{"required": ["share"]}, {"required": ["most"]}]},
    "SupportLoadLimit": {"oneOf": [{"required": ["share"]}, {"required": ["most"]}]},
    "SpacingLimit": {"not": {"required": ["other_condition", "other_conditions"]}},
    "SagLimit": {"anyOf": [{"required": ["most"]}, {"required": ["least"]}]},
}


class ProjectFile(Head):
    """A Tautwise project file."""

    include: str | list[str] | None = None
    line: Line
    ground: GroundTable | None = None
    crossing: tuple[Crossing, ...] = Field((), max_length=MOST["crossing"])
    support: tuple[Support, ...] = Field(min_length=2, max_length=MOST["support"])
    stringing: Stringing
    history: History | None = None
    condition: tuple[Condition, ...] = Field((), min_length=1, max_length=MOST["condition"])
    mark: tuple[Mark, ...] = Field((), max_length=MOST["mark"])
    limit: tuple[Limit, ...] = Field((), max_length=MOST["limit"])
    waiver: tuple[Waiver, ...] = Field((), max_length=MOST["waiver"])


def project_schema() -> dict[str, Any]:
    """The JSON Schema (2020-12) of one whole project file, in which nothing is left to an included file.

    Quantities are strings with a pattern and examples; no key beyond those named is allowed.

    >>> schema = project_schema()
    >>> schema["additionalProperties"], schema["$defs"]["Line"]["properties"]["weight"]["examples"]
    (False, ['11.9 N/m'])
    """
    schema = _without_null(ProjectFile.model_json_schema(by_alias=True, mode="validation"))
    for name, rule in _GIVEN_ONCE.items():
        schema["$defs"][name].update(rule)
    schema["$defs"]["Wind"]["properties"]["angle"]["default"] = "90 deg"  # held in rad, written as text
    schema["required"] = ["format", *schema["required"]]
    schema["anyOf"] = [{"required": ["condition"]}, {"required": ["rules"]}]
    packs = {"type": "string", "enum": list(pack_names())}
    using = {"type": "object", "required": ["pack"], "properties": {"pack": packs}}
    schema["properties"]["rules"]["items"] = {"anyOf": [packs, using]}
    return {"$schema": "https://json-schema.org/draft/2020-12/schema", **schema}


def _is_nothing(value: Any) -> bool:
    return value is None or (isinstance(value, float) and math.isnan(value))


def _without_null(value: Any) -> Any:
    """Drop the null that optional attributes allow, as TOML has none, and the NaN of what is worked out."""
    if isinstance(value, list):
        return [_without_null(part) for part in value]
    if not isinstance(value, dict):
        return value
    kept = {key: _without_null(part) for key, part in value.items() if key != "default" or not _is_nothing(part)}
    options = kept.get("anyOf")
    if isinstance(options, list) and {"type": "null"} in options:
        options = [option for option in options if option != {"type": "null"}]
        del kept["anyOf"]
        kept = {**options[0], **kept} if len(options) == 1 else {**kept, "anyOf": options}
    return kept
