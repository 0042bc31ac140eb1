"""One size of the catalogue: what is known of a line by its name, each value with where it comes from."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any, ClassVar, get_args

from tautwise.columns import Column, Table, text_column
from tautwise.fields import (
    Area,
    AxialStiffness,
    Expansion,
    Kind,
    MassPerLength,
    Measure,
    Modulus,
    PositiveForce,
    PositiveForcePerLength,
    PositiveLength,
)
from tautwise.records import Record
from tautwise.results_line import pandas_module
from tautwise.units import STANDARD_GRAVITY_M_PER_S2

CONFIDENCES = ("seen", "from memory", "defined", "measured")


def _measure(annotation: Any) -> Measure:
    return next(part for part in get_args(annotation) if isinstance(part, Kind))  # type: ignore[return-value]


MEASURES: Mapping[str, Measure] = {
    "diameter": _measure(PositiveLength),
    "area": _measure(Area),
    "weight": _measure(PositiveForcePerLength),
    "mass": _measure(MassPerLength),
    "modulus": _measure(Modulus),
    "stiffness": _measure(AxialStiffness),
    "expansion": _measure(Expansion),
    "breaking_strength": _measure(PositiveForce),
}


@dataclass(frozen=True, slots=True)
class SizeValue(Record):
    """One value of a size.

    Fields
    ------
    key: as under [line] of a project file. written: with its own unit, as the source has it.
    value: in `unit`, the SI unit. source: standard and table, or how it is computed. confidence: "seen" (read in the
        source), "from memory", "defined", "measured", or empty where a user's file does not say.
    """

    key: str
    written: str
    value: float
    unit: str
    source: str
    confidence: str = ""


@dataclass(frozen=True, slots=True)
class Size(Record):
    """A size of the catalogue. What no source gives is None.

    Fields
    ------
    name, aliases: what it is called; capitals and spaces do not matter. kind: such as "steel strand".
    diameter_m, area_m2, weight_N_per_m, modulus_Pa, stiffness_N (EA), expansion_per_K, breaking_strength_N: in SI;
        weight also where the source gives the mass, stiffness also where it gives modulus and area.
    values: each value as its source gives it. note: what else there is to know.
    file, line: where it stands; the line is None for a size computed from factors.

    >>> value = SizeValue("mass", "1.21 kg/m", 1.21, "kg/m", "a list", "seen")
    >>> Size.of("rope", "wire rope", (value,), "ropes.csv").weight_N_per_m
    11.8660465
    """

    name: str
    kind: str
    diameter_m: float | None
    area_m2: float | None
    weight_N_per_m: float | None
    modulus_Pa: float | None
    stiffness_N: float | None
    expansion_per_K: float | None
    breaking_strength_N: float | None
    values: tuple[SizeValue, ...]
    file: str
    line: int | None = None
    aliases: tuple[str, ...] = ()
    note: str = ""

    @classmethod
    def of(
        cls,
        name: str,
        kind: str,
        values: tuple[SizeValue, ...],
        file: str,
        line: int | None = None,
        aliases: tuple[str, ...] = (),
        note: str = "",
    ) -> Size:
        """A size from its values."""
        si = {value.key: value.value for value in values}
        weight = si.get("weight")
        if weight is None and "mass" in si:
            weight = si["mass"] * STANDARD_GRAVITY_M_PER_S2
        stiffness = si.get("stiffness")
        if stiffness is None and "modulus" in si and "area" in si:
            stiffness = si["modulus"] * si["area"]
        others = (si.get("modulus"), stiffness, si.get("expansion"), si.get("breaking_strength"))
        return cls(name, kind, si.get("diameter"), si.get("area"), weight, *others, values, file, line, aliases, note)

    @property
    def missing(self) -> tuple[str, ...]:
        """What a project must still give: "weight", "stiffness"."""
        lacks = {"weight": self.weight_N_per_m is None, "stiffness": self.stiffness_N is None}
        return tuple(key for key, lacking in lacks.items() if lacking)

    @property
    def place(self) -> str:
        """File and line."""
        return self.file if self.line is None else f"{self.file}:{self.line}"

    def value(self, key: str) -> SizeValue | None:
        """The value of a key, or None."""
        return next((value for value in self.values if value.key == key), None)


class Sizes(tuple[Size, ...]):
    """Sizes in the order of the catalogue; a tuple that shows itself as a table."""

    __slots__ = ()

    def to_dataframe(self) -> Any:
        """The sizes as a pandas data frame, a row for each, in SI."""
        rows = [{key: value for key, value in size.to_dict().items() if key != "values"} for size in self]
        return pandas_module().DataFrame(rows)

    def _repr_html_(self) -> str:
        return size_table(self).html(f"{len(self)} sizes")


@dataclass(frozen=True, slots=True)
class SizeList(Record):
    """The document of ``sizes --json``."""

    FORMAT: ClassVar[str] = "tautwise-sizes 1"

    sizes: tuple[Size, ...]


def name_key(name: str) -> str:
    """What is left of a name where capitals, spaces, hyphens and the kind of cross do not matter.

    >>> name_key(" 6\\N{MULTIPLICATION SIGN}19  Fiber core") == name_key("6X19 fibre core")
    True
    """
    plain = name.casefold().replace("\N{MULTIPLICATION SIGN}", "x").replace("fiber", "fibre")
    return re.sub(r"[\s,_\-]+", "", plain)


def size_table(sizes: Iterable[Size]) -> Table:
    """A row for each size, in SI with the customary prefixes; what no source gives is a dash."""
    columns = (
        text_column("size"),
        text_column("kind"),
        Column("diameter", "mm", 1e-3, 2),
        Column("area", "mm2", 1e-6, 2),
        Column("weight", "N/m", 1.0, 3),
        Column("strength", "kN", 1e3, 2),
        Column("modulus", "GPa", 1e9, 1),
        text_column("to give"),
    )
    rows = tuple(
        (s.name, s.kind, s.diameter_m, s.area_m2, s.weight_N_per_m, s.breaking_strength_N, s.modulus_Pa,
         ", ".join(s.missing) or None)
        for s in sizes
    )  # fmt: skip
    return Table(columns, rows)
