"""On which line of a TOML file each key stands, and whether the file is small enough in every way to be parsed.

The standard parser forgets lines, takes seconds over one long dotted key and overflows on deep nesting. This scanner
reads the same text first. It accepts a little more than TOML does, so that whatever it cannot follow the parser
refuses no later; then the lines found so far still serve.

Paths are tuples of keys and of indices of arrays, as in ``("support", 2, "capacity", "along")``.
"""

from __future__ import annotations

import re
from bisect import bisect_right
from contextlib import suppress

Path = tuple[str | int, ...]

NESTING_MOST = 12
KEY_LENGTH_MOST = 200
KEY_PARTS_MOST = 6
TEXT_LENGTH_MOST = 10_000
BARE_LENGTH_MOST = 100

_BLANK = re.compile(r"[ \t]*")
_GAP = re.compile(r"(?:[ \t\n]|#[^\n]*)*")
_REST = re.compile(r"[ \t]*(?:#[^\n]*)?(?:\n|\Z)")
_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")
_BASIC = re.compile(r'"[^"\\\n]*(?:\\[^\n][^"\\\n]*)*"')
_LITERAL = re.compile(r"'[^'\n]*'")
_LONG_BASIC = re.compile(r'"""[^"\\]*(?:(?:\\.|""?(?!"))[^"\\]*)*"{3,5}', re.DOTALL)
_LONG_LITERAL = re.compile(r"'''[^']*(?:''?(?!')[^']*)*'{3,5}")
_BARE_VALUE = re.compile(r"[0-9]{4}-[0-9]{2}-[0-9]{2} [0-9][^\s,\]}#]*|[^\s,\[\]{}#\"'=]+")
_ESCAPE = re.compile(r"\\(u[0-9a-fA-F]{4}|U[0-9a-fA-F]{8}|.)")
_ESCAPES = {"b": "\b", "t": "\t", "n": "\n", "f": "\f", "r": "\r", '"': '"', "\\": "\\"}


class TooMuch(ValueError):
    """The text exceeds a size that a project file never needs. `line` is where."""

    def __init__(self, line: int, problem: str) -> None:
        super().__init__(problem)
        self.line = line
        self.problem = problem


class KeyLines:
    """The line of each key of a TOML text.

    >>> lines = KeyLines('title = "x"\\n[[support]]\\nname = "A"\\ncapacity = { along = "1 kN" }\\n')
    >>> lines[("support", 0, "capacity", "along")], lines[("support", 0)]
    (4, 2)
    >>> lines[("support", 0, "station")]  # not there: the table it would be in
    2
    """

    def __init__(self, text: str) -> None:
        self._found = scan(text)

    def __getitem__(self, path: Path) -> int:
        for length in range(len(path), 0, -1):
            if path[:length] in self._found:
                return self._found[path[:length]]
        return 1


def scan(text: str) -> dict[Path, int]:
    """Map the path of each key, table and array element to its line, counted from 1.

    Raises
    ------
    TooMuch: nesting, a key, a text or a number beyond the limits of this module.

    >>> scan('a.b = [1,\\n 2]')
    {('a',): 1, ('a', 'b'): 1, ('a', 'b', 0): 1, ('a', 'b', 1): 2}
    """
    scanner = _Scanner(text.replace("\r\n", "\n"))
    with suppress(_Lost):  # the parser will say what is wrong, and where
        scanner.read()
    return scanner.found


class _Lost(Exception):
    """The text is no TOML from here on."""


class _Scanner:
    def __init__(self, text: str) -> None:
        self.text = text
        self.at = 0
        self.found: dict[Path, int] = {}
        self.table: Path = ()
        self.counts: dict[Path, int] = {}
        self.newlines = [place for place, char in enumerate(text) if char == "\n"]

    def read(self) -> None:
        self.skip(_GAP)
        while self.at < len(self.text):
            if self.text.startswith("[", self.at):
                self.header()
            else:
                self.pair(self.table, 0)
            if not self.skip(_REST):
                raise _Lost
            self.skip(_GAP)

    def header(self) -> None:
        line = self.line()
        brackets = 2 if self.text.startswith("[[", self.at) else 1
        self.at += brackets
        keys = self.key()
        if not self.text.startswith("]" * brackets, self.at):
            raise _Lost
        self.at += brackets
        path = (*self.placed(keys[:-1], line), keys[-1])
        self.found.setdefault(path, line)
        if brackets == 2:
            self.counts[path] = self.counts.get(path, 0) + 1
        if path in self.counts:
            path += (self.counts[path] - 1,)
        self.found.setdefault(path, line)
        self.table = path

    def placed(self, keys: list[str], line: int) -> Path:
        """The path of a header's leading keys; within an array of tables its latest element is meant."""
        path: Path = ()
        for key in keys:
            path += (key,)
            self.found.setdefault(path, line)
            if path in self.counts:
                path += (self.counts[path] - 1,)
        return path

    def pair(self, table: Path, depth: int) -> None:
        line = self.line()
        path = table
        for key in self.key():
            path += (key,)
            self.found.setdefault(path, line)
        if not self.text.startswith("=", self.at):
            raise _Lost
        self.at += 1
        self.skip(_BLANK)
        self.value(path, depth)

    def key(self) -> list[str]:
        start, parts = self.at, []
        while True:
            self.skip(_BLANK)
            parts.append(self.key_part())
            if self.at - start > KEY_LENGTH_MOST:
                raise self.too_much(f"a key of more than {KEY_LENGTH_MOST} characters", start)
            if len(parts) > KEY_PARTS_MOST:
                raise self.too_much(f"a key of more than {KEY_PARTS_MOST} parts", start)
            self.skip(_BLANK)
            if not self.text.startswith(".", self.at):
                return parts
            self.at += 1

    def key_part(self) -> str:
        char = self.text[self.at : self.at + 1]
        if char == '"':
            return _unescaped(self.take(_BASIC)[1:-1])
        if char == "'":
            return self.take(_LITERAL)[1:-1]
        return self.take(_BARE_KEY)

    def value(self, path: Path, depth: int) -> None:
        char = self.text[self.at : self.at + 1]
        if char in {"[", "{"} and depth >= NESTING_MOST:
            raise self.too_much(f"nested more than {NESTING_MOST} deep", self.at)
        if char == "[":
            self.array(path, depth)
        elif char == "{":
            self.inline_table(path, depth)
        elif char in {'"', "'"}:
            self.string(char)
        elif len(self.take(_BARE_VALUE)) > BARE_LENGTH_MOST:
            raise self.too_much(f"a number of more than {BARE_LENGTH_MOST} characters", self.at)

    def array(self, path: Path, depth: int) -> None:
        self.at += 1
        index = 0
        self.skip(_GAP)
        while not self.text.startswith("]", self.at):
            self.found.setdefault((*path, index), self.line())
            self.value((*path, index), depth + 1)
            index += 1
            self.separator("]")
        self.at += 1

    def inline_table(self, path: Path, depth: int) -> None:
        self.at += 1
        self.skip(_GAP)
        while not self.text.startswith("}", self.at):
            self.pair(path, depth + 1)
            self.separator("}")
        self.at += 1

    def separator(self, end: str) -> None:
        self.skip(_GAP)
        if self.text.startswith(",", self.at):
            self.at += 1
            self.skip(_GAP)
        elif not self.text.startswith(end, self.at):
            raise _Lost

    def string(self, quote: str) -> None:
        start = self.at
        if self.text.startswith(quote * 3, self.at):
            self.take(_LONG_BASIC if quote == '"' else _LONG_LITERAL)
        else:
            self.take(_BASIC if quote == '"' else _LITERAL)
        if self.at - start > TEXT_LENGTH_MOST:
            raise self.too_much(f"a text of more than {TEXT_LENGTH_MOST} characters", start)

    def skip(self, pattern: re.Pattern[str]) -> bool:
        found = pattern.match(self.text, self.at)
        if found:
            self.at = found.end()
        return found is not None

    def take(self, pattern: re.Pattern[str]) -> str:
        found = pattern.match(self.text, self.at)
        if not found:
            raise _Lost
        self.at = found.end()
        return found.group()

    def line(self, at: int | None = None) -> int:
        return bisect_right(self.newlines, (self.at if at is None else at) - 1) + 1

    def too_much(self, problem: str, at: int) -> TooMuch:
        return TooMuch(self.line(at), problem)


def _unescaped(text: str) -> str:
    def one(found: re.Match[str]) -> str:
        mark = found.group(1)
        if len(mark) > 1:
            code = int(mark[1:], 16)
            return chr(code) if code < 0x110000 else mark
        return _ESCAPES.get(mark, mark)

    return _ESCAPE.sub(one, text)
