"""The catalogue of lines: the shipped sizes, a user's own, and how a name finds its size.

Later files win over earlier ones, and a note says so.

>>> sizes("drake")[0].name
'Drake ACSR'
"""

from __future__ import annotations

import os
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from pathlib import Path
from typing import Any

from tautwise.errors import Fault, InputError
from tautwise.fields import Words
from tautwise.reader import read_text
from tautwise.ropes import EXAMPLE, KIND, listed_ropes, looks_like_rope, rope
from tautwise.size_files import BYTES_MOST, read_sizes
from tautwise.size_records import Size, Sizes, name_key
from tautwise.strict import Refused, described, did_you_mean, nearest, shown
from tautwise.units import quantity

SHIPPED = ("astm_a475.csv", "astm_b232.csv", "go95.csv", "en1993_1_11.csv")
SIZE_WORDS = Words("the name of a size", "Drake ACSR")
CLOSE = 0.005  # a diameter or a strength given without a sign means this near


@cache
def shipped() -> tuple[Size, ...]:
    """The sizes that come with Tautwise, without the ropes, which are computed from their names."""
    folder = files("tautwise").joinpath("data", "sizes")
    texts = ((name, folder.joinpath(name).read_text(encoding="utf-8")) for name in SHIPPED)
    return tuple(size for name, text in texts for size in read_sizes(text, f"sizes/{name}"))


@dataclass(frozen=True)
class Catalogue:
    """The sizes of several files, later ones winning.

    Fields
    ------
    sizes: in the order of the files, the shipped ones first.
    """

    sizes: tuple[Size, ...]

    @classmethod
    def of(cls, extra: Iterable[Sequence[Size]] = ()) -> Catalogue:
        """The shipped sizes and those of further files."""
        return cls((*shipped(), *(size for file in extra for size in file)))

    def find(self, name: str) -> tuple[Size, tuple[Size, ...]]:
        """The size of a name, and the sizes of earlier files that it stands before.

        Raises
        ------
        Refused: there is no such size; with the nearest one.

        >>> Catalogue.of().find("a475 3/8IN ehs")[0].name
        'A475 3/8 in EHS'
        """
        text = SIZE_WORDS.read(name.strip())
        key = name_key(text)
        found = [size for size in self.sizes if key in map(name_key, (size.name, *size.aliases))]
        if found:
            name = name_key(found[-1].name)  # an alias means that name, which a later file may hold without the alias
            same = [size for size in self.sizes if name_key(size.name) == name]
            return same[-1], tuple(size for size in self.sizes if size in (*same[:-1], *found) and size is not same[-1])
        if looks_like_rope(text):
            return rope(text), ()
        raise Refused(f'there is no size "{shown(text)}"; {self._guess(text)}')

    def standing(self) -> Iterator[Size]:
        """The sizes that a name finds: those that a later file replaces left out."""
        last = {name_key(size.name): size for size in self.sizes}
        return (size for size in self.sizes if last[name_key(size.name)] is size)

    def _guess(self, text: str) -> str:
        names = {name_key(name): name for size in self.sizes for name in (size.name, *size.aliases)}
        guess = nearest(name_key(text), names)
        if guess is not None:
            return f'did you mean "{shown(names[guess])}"?'
        return f'"tautwise sizes" lists them; ropes are named as in "{EXAMPLE}"'


def sizes(
    text: str | None = None,
    *,
    kind: str | None = None,
    diameter: str | None = None,
    strength: str | None = None,
    catalogue: str | os.PathLike[str] | Iterable[str | os.PathLike[str]] = (),
) -> Sizes:
    """The sizes of the catalogue that match.

    Parameters
    ----------
    text: words that the name or an alias holds, in any order; or the whole name of one size.
    kind: such as "ACSR" or "steel strand".
    diameter, strength: a range: ``">= 10 mm"``, ``"<= 20 kN"``, ``"10 mm to 16 mm"``, or about one value, ``"12 mm"``.
    catalogue: further files of sizes.

    Returns
    -------
    Size records, a tuple with ``to_dataframe()``. Ropes of EN 12385 are listed at customary diameters where `kind` or
    `text` asks for them; any other is found by its whole name.

    Raises
    ------
    InputError: a range or a kind that is none, a file that cannot be read, a text that matches nothing.

    >>> [size.name for size in sizes("EHS", diameter=">= 0.4 in")]
    ['A475 7/16 in EHS', 'A475 1/2 in EHS']
    >>> sizes("6x19 steel core 17 mm 1770")[0].name
    '6x19 steel core 17 mm 1770'
    """
    paths = [catalogue] if isinstance(catalogue, str | os.PathLike) else list(catalogue)
    whole = Catalogue.of(read_file(path) for path in paths)
    known = [*whole.standing(), *(listed_ropes() if _wants_ropes(text, kind) else ())]
    found = [size for size in _named(whole, known, text) if _is_kind(size, kind, known)]
    for label, wanted in (("diameter", diameter), ("strength", strength)):
        if wanted is not None:
            low, high = _range(label, wanted)
            found = [size for size in found if _within(size, label, low, high)]
    return Sizes(found)


def read_file(path: str | os.PathLike[str], name: str | None = None) -> tuple[Size, ...]:
    """The sizes of a user's file; `name` is what messages call it."""
    shown_name = name or os.fspath(path)
    text, _ = read_text(Path(path), shown_name, BYTES_MOST)
    return read_sizes(text, shown_name)


def _wants_ropes(text: str | None, kind: str | None) -> bool:
    if kind is not None:
        return name_key(kind) in name_key(KIND)
    return text is not None and (looks_like_rope(text) or "rope" in name_key(text))


def _named(whole: Catalogue, known: Sequence[Size], text: str | None) -> Sequence[Size]:
    if text is None or not text.strip():
        return known
    try:
        exact, _ = whole.find(text)
    except Refused as refused:
        words = [name_key(word) for word in text.split()]
        held = [size for size in known if _holds(size, words)]
        if not held:
            raise InputError([Fault(None, None, "", refused.problem, refused.expected, refused.example)]) from None
        return held
    return [exact]


def _holds(size: Size, words: Sequence[str]) -> bool:
    names = [name_key(name) for name in (size.name, size.kind, *size.aliases)]
    return all(any(word in name for name in names) for word in words)


def _is_kind(size: Size, kind: str | None, known: Sequence[Size]) -> bool:
    if kind is None:
        return True
    kinds = list(dict.fromkeys([*(each.kind for each in known), KIND]))
    if not any(name_key(kind) in name_key(each) for each in kinds):
        raise InputError([Fault(None, None, "kind", f'there is no kind "{shown(kind)}"; {did_you_mean(kind, kinds)}')])
    return name_key(kind) in name_key(size.kind)


def _range(label: str, wanted: Any) -> tuple[float, float]:
    unit, example = ("m", '">= 10 mm" or "10 mm to 16 mm"') if label == "diameter" else ("N", '">= 50 kN"')
    try:
        if not isinstance(wanted, str):
            raise Refused(f"{described(wanted)} is no range")
        text = wanted.strip()
        if text.startswith((">=", "<=")):
            bound = quantity(text[2:].strip(), unit)
            return (bound, float("inf")) if text[0] == ">" else (0.0, bound)
        if " to " in text:
            low, high = (quantity(part.strip(), unit) for part in text.split(" to ", 1))
            return low, high
        value = quantity(text, unit)
        return value * (1.0 - CLOSE), value * (1.0 + CLOSE)
    except Refused as refused:
        expected = f"a {'length' if unit == 'm' else 'force'}, a range or a bound"
        raise InputError([Fault(None, None, label, refused.problem, expected, example)]) from None


def _within(size: Size, label: str, low: float, high: float) -> bool:
    value = size.diameter_m if label == "diameter" else size.breaking_strength_N
    slack = 1e-9  # a bound written in other units is the bound
    return value is not None and low * (1.0 - slack) <= value <= high * (1.0 + slack)
