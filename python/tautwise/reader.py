"""Project files: bytes to plain tables, with the file and line of every key.

Sizes and depths are capped before the TOML parser sees the text. `include` merges other files of the same folder; the
faults found later name the file and line they stand in.
"""

from __future__ import annotations

import hashlib
import math
import os
import re
import stat
import tomllib
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING, Any

from tautwise.errors import Fault, InputError
from tautwise.keylines import Path as KeyPath
from tautwise.keylines import TooMuch, scan
from tautwise.strict import described, nearest, shown

if TYPE_CHECKING:
    from tautwise.additions import Additions
    from tautwise.model import Project

FORMAT = "tautwise 1"
FILE_BYTES_MOST = 1_000_000
INCLUDE_DEPTH_MOST = 8
INCLUDE_FILES_MOST = 32
ARRAYS = ("crossing", "support", "condition", "mark", "limit", "waiver")

_BARE_QUANTITY = re.compile(r"=\s*([+-]?[0-9.][0-9.eE+-]*\s*[A-Za-z%/\N{DEGREE SIGN}][^,#\]}]*)")
_PLACE = re.compile(r"\s*\(at (?:line ([0-9]+), column [0-9]+|end of document)\)$")
_TWICE = {"Cannot overwrite": "this key stands here for the second time", "Cannot declare": "this table stands twice"}
_OTHER_FORMAT = re.compile(r"tautwise [0-9]{1,3}")
_BARE_NAME = re.compile(r"[A-Za-z0-9_-]+")


class WrittenNumber(str):
    """A TOML float that no double holds ("1e999", "nan"), as it was written; never a text."""


@dataclass(frozen=True)
class Source:
    """A file that was read: its name as shown to the user and the SHA-256 of its bytes."""

    name: str
    sha256: str


@dataclass
class Document:
    """A project before it is checked.

    Fields
    ------
    tables: the merged tables, as the TOML parser gives them.
    name: the project file as the user named it; None where the tables came as keyword arguments.
    folder: where relative file names start, and which no file may leave.
    index: file name and line of each key path.
    sources: the files read, the project file first.
    faults: what is already known to be wrong.
    incomplete: an included file could not be read, so that what is missing may stand there.
    additions: what a size and rule packs added to the tables; None before they did.
    above: the projects for which this one is read, as resolved paths.
    family: while it is read, every project read so far for the first of them, None where one could not be.
    """

    tables: dict[str, Any]
    name: str | None = None
    folder: Path = field(default_factory=Path)
    index: dict[KeyPath, tuple[str, int]] = field(default_factory=dict)
    sources: list[Source] = field(default_factory=list)
    faults: list[Fault] = field(default_factory=list)
    incomplete: bool = False
    additions: Additions | None = None
    above: tuple[Path, ...] = ()
    family: dict[Path, Project | None] | None = None

    def where(self, path: KeyPath) -> tuple[str | None, int | None]:
        """File and line of a key, or of the nearest table around it.

        >>> Document({}, "a.toml", index={("line",): ("a.toml", 3)}).where(("line", "weight"))
        ('a.toml', 3)
        """
        if self.name is None:
            return None, None
        for length in range(len(path), 0, -1):
            if path[:length] in self.index:
                return self.index[path[:length]]
        return self.name, 1

    def fault(self, path: KeyPath, problem: str, expected: str = "", example: str = "") -> Fault:
        """A fault at a key, its path written with the names of the array elements where they have one.

        >>> tables = {"support": [{"name": "West mast"}]}
        >>> str(Document(tables).fault(("support", 0, "station"), "missing", "a length", 'station = "0 m"'))
        'support."West mast".station: missing; expected a length, for example station = "0 m"'
        """
        file, line = self.where(path)
        return Fault(file, line, shown_path(path, self.tables), problem, expected, example)

    def rename(self, path: KeyPath, key: str) -> None:
        """Go on as if a key had another name; its lines stay known.

        >>> document = Document({"line": {"wieght": "1 N/m"}}, "a.toml", index={("line", "wieght"): ("a.toml", 2)})
        >>> document.rename(("line", "wieght"), "weight")
        >>> document.tables, document.where(("line", "weight"))
        ({'line': {'weight': '1 N/m'}}, ('a.toml', 2))
        """
        table: Any = self.tables
        for part in path[:-1]:
            table = table[part]
        table[key] = table.pop(path[-1])
        length = len(path)
        for old in [known for known in self.index if known[:length] == path]:
            self.index[(*path[:-1], key, *old[length:])] = self.index[old]


def read_project(
    path: str | os.PathLike[str], above: tuple[Path, ...] = (), family: dict[Path, Project | None] | None = None
) -> Document:
    """Read a project file and all that it includes.

    Parameters
    ----------
    path: the file; TOML in UTF-8, at most 1 MB.
    above: the projects for which it is read. family: those read before it.

    Returns
    -------
    The document; what is wrong with its format and its includes is among its faults.

    Raises
    ------
    InputError: the file cannot be read, is too large in some way, is not TOML, or of a newer format.
    """
    name = os.fspath(path)
    reader = _Reader(name)
    tables, index = reader.file(Path(name), name, ())
    sources, faults = reader.sources, reader.faults
    return Document(
        tables, name, Path(name).parent, index, sources, faults, reader.incomplete, above=above, family=family
    )


def read_text(path: Path, name: str, bytes_most: int) -> tuple[str, Source]:
    """Read a text file of the user, refusing what is no such thing.

    Returns
    -------
    The text, line ends as "\\n" and without a byte order mark, and the source with the hash of the bytes.

    Raises
    ------
    InputError: no regular file, too large, empty, a NUL byte, or not UTF-8.
    """
    data = _read_bytes(path, name, bytes_most)
    if not data.strip():
        raise InputError([Fault(name, 1, "", "the file is empty")])
    line = _first_bad_line(data)
    if line:
        raise InputError([Fault(name, line, "", "this is not a text file", "text in UTF-8")])
    text = data.decode("utf-8-sig").replace("\r\n", "\n")
    return text, Source(name, hashlib.sha256(data).hexdigest())


def shown_path(path: KeyPath, tables: dict[str, Any]) -> str:
    """A key path as messages show it: array elements by their name or id, else by their index from 0.

    >>> shown_path(("condition", 0, "ice", "thickness"), {"condition": [{"name": "hot"}]})
    'condition.hot.ice.thickness'
    >>> shown_path(("limit", 3, "least"), {})
    'limit[3].least'
    """
    text = ""
    value: Any = tables
    for part in path:
        value = _inside(value, part)
        if isinstance(part, int):
            label = _label(value)
            text += f".{_quoted(label)}" if label else f"[{part}]"
        else:
            text += f".{_quoted(part)}" if text else _quoted(part)
    return text


def inside_folder(folder: Path, file: Path) -> bool:
    """Whether a file lies in a folder or below it, links followed.

    >>> inside_folder(Path("a"), Path("a/b.csv")), inside_folder(Path("a"), Path("a/../b.csv"))
    (True, False)
    """
    return file.resolve().is_relative_to(folder.resolve())


class _Reader:
    def __init__(self, name: str) -> None:
        self.folder = Path(name).parent
        self.sources: list[Source] = []
        self.seen: set[Path] = set()
        self.faults: list[Fault] = []
        self.incomplete = False

    def file(
        self, path: Path, name: str, stack: tuple[Path, ...]
    ) -> tuple[dict[str, Any], dict[KeyPath, tuple[str, int]]]:
        text, source = read_text(path, name, FILE_BYTES_MOST)
        self.sources.append(source)
        lines = _scanned(text, name)
        tables = _parsed(text, name, lines)
        index = {key: (name, line) for key, line in lines.items()}
        document = Document(tables, name, path.parent, index)
        self.faults += _format_faults(document, is_main=not stack)
        self.seen.add(path.resolve())
        for key, entry in _includes(document):
            try:
                file = self.included(document, key, entry, (*stack, path.resolve()))
                shown_name = os.path.join(os.path.dirname(name), entry)
                extra, extra_index = self.file(file, shown_name, (*stack, path.resolve()))
            except InputError as error:
                self.faults += error.faults
                self.incomplete = True
            else:
                _merge(tables, index, extra, extra_index)
        tables.pop("include", None)
        return tables, index

    def included(self, document: Document, key: KeyPath, entry: Any, stack: tuple[Path, ...]) -> Path:
        problem = _entry_problem(entry) or self.include_problem(document.folder / entry, entry, stack)
        if problem:
            raise InputError(
                [document.fault(key, problem, "a file in the project's folder or below it", 'include = "loads.toml"')]
            )
        return document.folder / str(entry)

    def include_problem(self, file: Path, entry: str, stack: tuple[Path, ...]) -> str:
        text = f'"{shown(entry)}"'
        try:
            real = file.resolve()
        except (OSError, RuntimeError):
            return f"{text} leads nowhere"
        if real == stack[-1]:
            return f"{text}: the file includes itself"
        if real in stack:
            return f"{text}: the files include each other in a circle"
        if real in self.seen:
            return f"{text} is included twice"
        if len(stack) > INCLUDE_DEPTH_MOST or len(self.seen) > INCLUDE_FILES_MOST:
            return f"too many included files: at most {INCLUDE_FILES_MOST}, at most {INCLUDE_DEPTH_MOST} deep"
        if not inside_folder(self.folder, file):
            return f"{text} is outside the project's folder"
        if not file.exists():
            return f"there is no file {text}"
        return "" if file.is_file() else f"{text} is not a file"


def _read_bytes(path: Path, name: str, bytes_most: int) -> bytes:
    try:
        # Never open what is no regular file: a pipe would wait, a device would not end.
        regular = stat.S_ISREG(os.stat(path).st_mode)
        data = _first_bytes(path, bytes_most + 1) if regular else b""
    except FileNotFoundError:
        raise InputError([Fault(name, None, "", "there is no such file")]) from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or "the name cannot be used"
        raise InputError([Fault(name, None, "", f"the file cannot be read: {reason}")]) from None
    if not regular:
        raise InputError([Fault(name, None, "", "this is not a file")])
    if len(data) > bytes_most:
        problem = f"the file is too large: at most {bytes_most / 1e6:g} MB are read"
        raise InputError([Fault(name, 1, "", problem)])
    return data


def _first_bytes(path: Path, count: int) -> bytes:
    with open(path, "rb") as stream:
        return stream.read(count)


def _first_bad_line(data: bytes) -> int:
    nul = data.find(b"\0")
    try:
        data.decode("utf-8")
    except UnicodeDecodeError as error:
        return data.count(b"\n", 0, error.start) + 1
    return data.count(b"\n", 0, nul) + 1 if nul >= 0 else 0


def _scanned(text: str, name: str) -> dict[KeyPath, int]:
    try:
        return scan(text)
    except TooMuch as error:
        raise InputError([Fault(name, error.line, "", error.problem)]) from None


def _parsed(text: str, name: str, lines: dict[KeyPath, int]) -> dict[str, Any]:
    try:
        return tomllib.loads(text, parse_float=_written_float)
    except (ValueError, RecursionError, OverflowError) as error:
        raise InputError([_syntax_fault(str(error), text, name, lines)]) from None


def _written_float(text: str) -> float | WrittenNumber:
    value = float(text)
    return value if math.isfinite(value) else WrittenNumber(text)


def _syntax_fault(message: str, text: str, name: str, lines: dict[KeyPath, int]) -> Fault:
    all_lines = text.split("\n")
    found = _PLACE.search(message)
    number = int(found[1]) if found and found[1] else len(all_lines) - text.endswith("\n")
    words = _PLACE.sub("", message)
    content = all_lines[number - 1] if number <= len(all_lines) else ""
    keys = [path for path, line in lines.items() if line == number and isinstance(path[-1], str)]
    key = shown_path(keys[-1], {}) if keys else ""
    bare = _BARE_QUANTITY.search(content)
    if bare and "quote" not in words:
        quantity = shown(bare[1].strip())
        return Fault(name, number, key, f"{quantity} without quotes", "a text in quotes", f'"{quantity}"')
    if words.startswith("Illegal character '\\n'"):
        return Fault(name, number, key, "a text in quotes that does not end on its line")
    twice = next((meaning for begin, meaning in _TWICE.items() if words.startswith(begin)), None)
    if twice:
        return Fault(name, number, key, twice)
    return Fault(name, number, key, f"this is not TOML: {shown(words[:1].lower() + words[1:], 200)}")


def _format_faults(document: Document, is_main: bool) -> list[Fault]:
    given = document.tables.get("format")
    if given == FORMAT or (given is None and not is_main):
        return []
    wanted = ("the format of the file", f'format = "{FORMAT}"')
    if given is None and any(nearest(key, ("format",)) for key in document.tables):
        return []  # reported as the unknown key that it is
    if given is None and document.tables:
        return [document.fault(("format",), "missing", *wanted)]
    if given is None:
        problem = "the file holds no key"
    elif isinstance(given, str) and given.startswith("tautwise"):
        problem = f'"{shown(given)}" is a format that this version does not read'
    else:
        problem = f"{described(given)} is not a format of Tautwise"
    fault = document.fault(("format",), problem, *wanted)
    if given is None or (isinstance(given, str) and _OTHER_FORMAT.fullmatch(given)):
        raise InputError([fault])
    document.tables["format"] = FORMAT  # a slip, told once: what else is wrong is told as well
    return [fault]


def _entry_problem(entry: Any) -> str:
    if not isinstance(entry, str) or isinstance(entry, WrittenNumber) or not entry.strip() or len(entry) > 200:
        return f"{described(entry)} is no file name"
    return "" if entry.isprintable() else f'"{shown(entry)}" holds characters that cannot be printed'


def _includes(document: Document) -> list[tuple[KeyPath, Any]]:
    given = document.tables.get("include")
    if given is None:
        return []
    if not isinstance(given, list):
        return [(("include",), given)]
    return [(("include", number), entry) for number, entry in enumerate(given)]


def _merge(
    into: dict[str, Any],
    index: dict[KeyPath, tuple[str, int]],
    extra: dict[str, Any],
    extra_index: dict[KeyPath, tuple[str, int]],
    at: KeyPath = (),
) -> None:
    """Add an included file: its arrays of tables follow, elsewhere the including file wins."""
    for key, value in extra.items():
        path = (*at, key)
        own = into.get(key)
        if key not in into:
            into[key] = value
            _copy(index, extra_index, path, 0)
        elif isinstance(own, dict) and isinstance(value, dict):
            _merge(own, index, value, extra_index, path)
        elif not at and key in ARRAYS and isinstance(own, list) and isinstance(value, list):
            _copy(index, extra_index, path, len(own))
            own.extend(value)


def _copy(
    index: dict[KeyPath, tuple[str, int]], extra: dict[KeyPath, tuple[str, int]], path: KeyPath, shift: int
) -> None:
    length = len(path)
    for key, place in extra.items():
        if key[:length] != path:
            continue
        if shift and len(key) > length and isinstance(key[length], int):
            key = (*path, int(key[length]) + shift, *key[length + 1 :])
        index.setdefault(key, place)


def _inside(value: Any, part: str | int) -> Any:
    if isinstance(value, dict):
        return value.get(part)
    if isinstance(value, list | tuple) and isinstance(part, int) and part < len(value):
        return value[part]
    return None


def _label(value: Any) -> str:
    if isinstance(value, dict):
        for key in ("name", "id"):
            label = value.get(key)
            if isinstance(label, str) and label.strip():
                return label
    return ""


def _quoted(key: str) -> str:
    return key if _BARE_NAME.fullmatch(key) else f'"{shown(key)}"'
