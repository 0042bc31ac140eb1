"""Shares of a load along the spans: one for each, repeated, or one on some spans only."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from tautwise.fields import LENGTHS_MOST, Kind, Measure
from tautwise.strict import Refused, described, nearest, shown
from tautwise.units import quantity


@dataclass(frozen=True)
class SharesOf:
    """A share on some spans, all of the rest: those listed, or those beyond or before a support."""

    share: float
    spans: tuple[str, ...] | None = None
    beyond: str | None = None
    before: str | None = None


@dataclass(frozen=True)
class Pattern(Kind):
    """Shares repeated along the spans, or one share beyond or before a support or on some spans.

    >>> Pattern().read([1, "50 %"])
    (1.0, 0.5)
    >>> Pattern().read({"beyond": "Pole 3", "share": 0.5})
    SharesOf(share=0.5, spans=None, beyond='Pole 3', before=None)
    """

    words = "shares from 0 to 1 repeated along the spans, or a share beyond or before a support or on some spans"
    example = "[1, 0]"
    where = ("beyond", "before", "spans")

    def read(self, value: Any) -> tuple[float, ...] | SharesOf:
        """The shares, or the share and where it is."""
        if isinstance(value, SharesOf):
            return value
        if isinstance(value, dict):
            return self._share_of(value)
        if not isinstance(value, list | tuple):
            raise Refused(f"{described(value)} is no pattern")
        if not 1 <= len(value) <= LENGTHS_MOST:
            raise Refused(f"a list of {len(value)} shares")
        return tuple(self._share(part) for part in value)

    def json_schema(self) -> dict[str, Any]:
        """A list of shares or a table."""
        share = Measure("1", "0.5", least=0.0, most=1.0).json_schema()
        name = {"type": "string", "minLength": 1}
        places = {"beyond": name, "before": name, "spans": {"type": "array", "items": name, "minItems": 1}}
        table = {
            "type": "object",
            "properties": {"share": share, **places},
            "required": ["share"],
            "additionalProperties": False,
        }
        return {"anyOf": [{"type": "array", "items": share, "minItems": 1}, table], "description": self.words}

    def _share_of(self, value: dict[str, Any]) -> SharesOf:
        for key in value:
            if key not in ("share", *self.where):
                guess = nearest(str(key), ("share", *self.where))
                raise Refused(f'unknown key "{shown(str(key))}"' + (f'; did you mean "{guess}"?' if guess else ""))
        given = [key for key in self.where if value.get(key) is not None]
        if len(given) != 1:
            raise Refused(f"{' and '.join(given)} are given at once" if given else "beyond, before or spans is missing")
        if value.get("share") is None:
            raise Refused("share is missing")
        names = value[given[0]]
        listed = given[0] == "spans" and isinstance(names, list | tuple) and names
        if not all(isinstance(name, str) for name in (names if listed else [names])) or (given[0] == "spans") != bool(
            listed
        ):
            raise Refused(f"{given[0]} is no {'list of names' if given[0] == 'spans' else 'name of a support'}")
        places: dict[str, Any] = {given[0]: tuple(names) if listed else names}
        return SharesOf(self._share(value["share"]), **places)

    @staticmethod
    def _share(value: Any) -> float:
        share = quantity(value, "1")
        if not 0.0 <= share <= 1.0:
            raise Refused(f"a share of {shown(str(value))}, which is {'negative' if share < 0.0 else 'above 1'}")
        return share
