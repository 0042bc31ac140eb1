"""Measures files and functions against the budgets, and lists what is above them.

A budget is a reason to look, not a reason to split what belongs together; only what is far beyond it fails.
"""

from __future__ import annotations

import ast
import re
import statistics
import sys
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
BUDGETS = {"C file": 400, "C function": 60, "Python file": 400, "Python function": 50}
FAR_BEYOND = 1.5


@dataclass(frozen=True)
class Measure:
    kind: str
    where: str
    lines: int

    @property
    def share(self) -> float:
        return self.lines / BUDGETS[self.kind]


def without_comments(text: str) -> str:
    """C text with comments, strings and characters blanked, lines kept."""
    pattern = r'/\*.*?\*/|//[^\n]*|"(?:\\.|[^"\\\n])*"|\'(?:\\.|[^\'\\\n])*\''
    return re.sub(pattern, lambda found: re.sub(r"[^\n]", " ", found.group()), text, flags=re.DOTALL)


def c_functions(text: str) -> Iterator[tuple[str, int, int]]:
    """Name, first and last line of each function of a C file: a brace at depth 0 after a closing parenthesis."""
    directive = r"^[ \t]*#(?:[^\n\\]|\\.|\\\n)*"
    clean = re.sub(
        directive, lambda found: "\n" * found.group().count("\n"), without_comments(text), flags=re.MULTILINE
    )
    depth = start = 0
    name = ""
    for found in re.finditer(r"[{};]", clean):
        mark = found.group()
        if mark == "{":
            head = clean[start : found.start()]
            if depth == 0:
                match = re.search(r"(\w+)\s*\(.*\)\s*$", head, flags=re.DOTALL)
                name = match.group(1) if match else ""
                first = clean.count("\n", 0, start + len(head) - len(head.lstrip())) + 1
            depth += 1
        elif mark == "}":
            depth -= 1
            if depth == 0:
                if name:
                    yield name, first, clean.count("\n", 0, found.start()) + 1
                start, name = found.end(), ""
        elif depth == 0:
            start = found.end()


def measure_c(file: Path) -> Iterator[Measure]:
    text, where = file.read_text(), file.relative_to(ROOT).as_posix()
    yield Measure("C file", where, text.count("\n"))
    for name, first, last in c_functions(text):
        yield Measure("C function", f"{where}:{first} {name}", last - first + 1)


def measure_python(file: Path) -> Iterator[Measure]:
    text, where = file.read_text(), file.relative_to(ROOT).as_posix()
    yield Measure("Python file", where, text.count("\n"))
    for node in ast.walk(ast.parse(text)):
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef):
            yield Measure("Python function", f"{where}:{node.lineno} {node.name}", body_lines(node))


def body_lines(node: ast.FunctionDef | ast.AsyncFunctionDef) -> int:
    """Lines of a function from its `def` on, less its docstring: examples and tables there are welcome."""
    lines = (node.end_lineno or node.lineno) - node.lineno + 1
    if ast.get_docstring(node, clean=False) is not None:
        docstring = node.body[0]
        lines -= (docstring.end_lineno or docstring.lineno) - docstring.lineno + 1
    return lines


def measure_all() -> list[Measure]:
    c_files = sorted((ROOT / "csrc").rglob("*.[ch]"))
    python_files = sorted((ROOT / "python").rglob("*.py"))
    return [m for file in c_files for m in measure_c(file)] + [m for file in python_files for m in measure_python(file)]


def report(measures: list[Measure]) -> Iterator[str]:
    for kind, budget in BUDGETS.items():
        lines = [m.lines for m in measures if m.kind == kind]
        if lines:
            yield f"{kind}: {len(lines)}, median {statistics.median(lines):.0f}, longest {max(lines)}, budget {budget}"
    for each in sorted(measures, key=lambda m: -m.share):
        if each.share > 1:
            yield f"  {each.share:.0%} of the {each.kind} budget: {each.where} ({each.lines} lines)"


def far_beyond(measures: list[Measure]) -> list[Measure]:
    return [each for each in measures if each.share > FAR_BEYOND]


if __name__ == "__main__":
    everything = measure_all()
    print("\n".join(report(everything)))
    sys.exit(bool(far_beyond(everything)))
