"""Wire ropes of EN 12385 by construction, core, diameter and grade, computed from the published factors.

A name is ``CONSTRUCTION CORE DIAMETER GRADE``, as in "6x19 steel core 16 mm 1770": diameter d with its unit, grade R
in N/mm2. Mass W d^2 / 100 (kg/m), metallic area C d^2 (mm2), least breaking force K d^2 R / 1000 (kN), d in mm, the
factors W, C, K of the construction and core (EN 12385; K. Feyrer, Wire Ropes, table 1.9).
"""

from __future__ import annotations

import csv
import re
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from importlib.resources import files

from tautwise.size_records import Size, SizeValue, name_key
from tautwise.strict import Refused, did_you_mean, shown
from tautwise.units import quantity

GRADES = (1370, 1570, 1770, 1960, 2160)  # N/mm2
DIAMETERS_MM = (2.0, 60.0)
LISTED_MM = (6, 8, 10, 12, 14, 16, 18, 20, 22, 24, 26, 28, 32, 36, 40)  # a choice for lists; any other can be named
LISTED_GRADES = (1770, 1960)
EXAMPLE = "6x19 steel core 16 mm 1770"
FILE = "ropes/en12385.csv"
KIND = "wire rope"

_NAME = re.compile(r"([0-9]{1,2}x[0-9]{1,3})\s+(.+?)\s+([0-9.]+\s*[a-z]+)\s+([0-9]{3,4})(?:\s*n/mm(?:2|\^2))?")
_BEGIN = re.compile(r"\s*[0-9]{1,2}\s*x\s*[0-9]{1,3}\b")
_MODULI = {"fibre core": 80, "steel core": 100, "strand core": 100}  # kN/mm2
_CLASS = "EN 1993-1-11 table 3.1, strand rope with {}, {} +/- 10 kN/mm2: a value for the class, use the maker's"
_STEEL = "EN 1993-1-11, steel"


@dataclass(frozen=True)
class Factors:
    """The factors of one construction and core; W and C are None where the table gives none."""

    construction: str
    core: str
    W: float | None
    C: float | None
    K: float
    source: str
    confidence: str
    note: str
    line: int


@cache
def factors() -> tuple[Factors, ...]:
    """The shipped factors.

    >>> [row.K for row in factors() if row.construction == "6x7"]
    [0.332, 0.359, 0.388]
    """
    text = files("tautwise").joinpath("data", FILE).read_text(encoding="utf-8")
    lines = text.split("\n")
    skipped = sum(line.startswith("#") for line in lines)
    rows = csv.DictReader(lines[skipped:], strict=True)
    return tuple(
        Factors(
            row["construction"], row["core"], _number(row["W"]), _number(row["C"]), float(row["K"]), row["source"],
            row["confidence"], row["note"], number,
        )
        for number, row in enumerate(rows, start=skipped + 2)
    )  # fmt: skip


def looks_like_rope(name: str) -> bool:
    """Whether a name begins as those of ropes do.

    >>> looks_like_rope("6 x 19 steel"), looks_like_rope("Drake ACSR")
    (True, False)
    """
    return bool(_BEGIN.match(name.replace("\N{MULTIPLICATION SIGN}", "x").casefold()))


def rope(name: str) -> Size:
    """The rope of a name.

    Raises
    ------
    Refused: what of the name is not known.

    >>> found = rope("6x7 fibre core 10 mm 1770")
    >>> round(found.breaking_strength_N), [value.written for value in found.values if value.key == "mass"]
    (58764, ['0.345 kg/m'])
    """
    plain = name.casefold().replace("\N{MULTIPLICATION SIGN}", "x").replace("fiber", "fibre").replace(",", " ")
    found = _NAME.fullmatch(re.sub(r"\s*x\s*(?=[0-9])", "x", plain.strip(), count=1))
    if not found:
        raise Refused(f'"{shown(name)}" is no rope', "construction, core, diameter and grade", f'"{EXAMPLE}"')
    row = _row(found[1], found[2])
    try:
        millimetres = quantity(found[3], "m") * 1e3
    except Refused as refused:
        raise Refused(refused.problem, "a diameter with its unit", f'"{EXAMPLE}"') from None
    if not DIAMETERS_MM[0] <= millimetres <= DIAMETERS_MM[1]:
        low, high = DIAMETERS_MM
        raise Refused(f"{found[3]} is no diameter of these ropes", f"{low:g} to {high:g} mm", f'"{EXAMPLE}"')
    grade = int(found[4])
    if grade not in GRADES:
        listed = ", ".join(map(str, GRADES))
        raise Refused(f"{grade} is no grade of these ropes", f"one of {listed} N/mm2", f'"{EXAMPLE}"')
    return _computed(row, round(millimetres, 9), grade)


def listed_ropes() -> Iterator[Size]:
    """Ropes of customary diameters and grades, for lists."""
    for row in factors():
        for diameter in LISTED_MM:
            for grade in LISTED_GRADES:
                yield _computed(row, float(diameter), grade)


def _row(construction: str, core: str) -> Factors:
    rows = [row for row in factors() if row.construction == construction]
    if not rows:
        known = list(dict.fromkeys(row.construction for row in factors()))
        raise Refused(f'there is no construction "{shown(construction)}"; {did_you_mean(construction, known)}')
    found = next((row for row in rows if name_key(row.core) == name_key(core)), None)
    if found is None:
        guess = did_you_mean(core, [row.core for row in rows])
        raise Refused(f'a rope {construction} has no "{shown(core)}"; {guess}')
    return found


def _computed(row: Factors, d: float, grade: int) -> Size:
    """Values rounded as they are written, so that a row can be checked by hand."""
    given = [("diameter", *_written(d, "mm", "m"), "the name")]
    if row.C is not None:
        given.append(("area", *_written(row.C * d * d, "mm^2", "m^2"), f"C d^2 with C = {row.C:.3f}; {row.source}"))
    if row.W is not None:
        words = f"W d^2 / 100 with W = {row.W:.3f}; {row.source}"
        given.append(("mass", *_written(row.W * d * d / 100.0, "kg/m", "kg/m"), words))
    strength = row.K * d * d * grade / 1000.0
    words = f"K d^2 R / 1000 with K = {row.K:.3f}, R = {grade} N/mm2; {row.source}"
    given.append(("breaking_strength", *_written(strength, "kN", "N"), words))
    values = [SizeValue(*value, "defined" if value[0] == "diameter" else row.confidence) for value in given]
    modulus = _MODULI[row.core]
    source = _CLASS.format(row.core, modulus)
    values.append(SizeValue("modulus", *_written(modulus, "kN/mm^2", "Pa"), source, "from memory"))
    values.append(SizeValue("expansion", *_written(12e-6, "/ K", "1/K"), _STEEL, "from memory"))
    name = f"{row.construction} {row.core} {d:.10g} mm {grade}"
    return Size.of(name, KIND, tuple(values), FILE, row.line, note=row.note)


def _written(value: float, unit: str, si: str) -> tuple[str, float, str]:
    text = f"{value:.10g} {unit}"
    return text, quantity(text, si), si


def _number(text: str) -> float | None:
    return float(text) if text else None
