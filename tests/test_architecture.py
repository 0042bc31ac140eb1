"""Dependencies point one way, the core keeps its promises, names follow their file."""

from __future__ import annotations

import ast
import re
import subprocess
from graphlib import CycleError, TopologicalSorter
from importlib.machinery import EXTENSION_SUFFIXES
from pathlib import Path

import pytest

import budgets

ROOT = Path(__file__).resolve().parents[1]
CORE = ROOT / "csrc" / "core"
PACKAGE = ROOT / "python" / "tautwise"

# A file may include its own layer (without a cycle) and those above it in this list.
CORE_LAYERS = (
    {"alloc", "status", "sum", "vector", "gauss"},
    {"line", "polynomial", "couple", "blocktri"},
    {"check", "material", "load", "hold", "route", "vee"},
    {"span", "uniform"},
    {"section", "stringing", "wave"},
    {"ground", "energy", "history", "pulling", "course", "spacing", "crossing"},
    {"limit"},
    {"trial"},
    {"crew"},
)
# Nouns that a file exports beside its own name.
NOUNS = {"line": {"options"}, "material": {"curve", "part", "permanent"}, "span": {"piece"}, "uniform": {"plain"}}

FORBIDDEN_IN_CORE = re.compile(
    r"\b(v?f?printf|v?sn?printf|puts|fputs|perror|exit|_Exit|abort|assert|signal|raise|longjmp|malloc|calloc|realloc|free"
    r"|getenv|rand|time|system)\s*\("
)


def c_files(folder: str) -> list[Path]:
    return sorted(file for file in (ROOT / "csrc" / folder).glob("*.[ch]"))


def includes(file: Path) -> list[str]:
    return re.findall(r'^\s*#\s*include\s*[<"]([^>"]+)[>"]', file.read_text(), flags=re.MULTILINE)


def noun(file: Path) -> str:
    """What a file is about: section_state.c belongs to section."""
    return file.stem.partition("_")[0]


def core_includes(file: Path) -> set[str]:
    nouns = {noun(CORE / name) for name in includes(file) if (CORE / name).exists()}
    return nouns - {noun(file)}


def core_nouns() -> set[str]:
    return {noun(file) for file in c_files("core")}


def layer_of(name: str) -> int:
    return next((index for index, layer in enumerate(CORE_LAYERS) if name in layer), len(CORE_LAYERS))


# --- includes


def test_each_core_file_has_its_layer():
    assert core_nouns() <= set().union(*CORE_LAYERS)


@pytest.mark.parametrize("file", c_files("core"), ids=lambda file: file.name)
def test_core_includes_point_one_way(file):
    below = {other for other in core_includes(file) if layer_of(other) > layer_of(noun(file))}
    assert not below, f"{file.name} includes {below}, which stand on it"


def test_core_includes_have_no_cycle():
    graph: dict[str, set[str]] = {name: set() for name in core_nouns()}
    for file in c_files("core"):
        graph[noun(file)] |= core_includes(file)
    try:
        TopologicalSorter(graph).prepare()
    except CycleError as error:
        pytest.fail(f"cycle: {error.args[1]}")


@pytest.mark.parametrize("file", c_files("core"), ids=lambda file: file.name)
def test_core_needs_the_c_library_only(file):
    allowed = {f"{name}.h" for name in ("float", "limits", "math", "stdbool", "stddef", "stdint", "stdlib", "string")}
    foreign = {name for name in includes(file) if not (CORE / name).exists()} - allowed
    assert not foreign


@pytest.mark.parametrize("file", c_files("search"), ids=lambda file: file.name)
def test_search_never_sees_python(file):
    ours = {other.name for other in c_files("binding")}
    assert not [name for name in includes(file) if name.startswith(("Python", "numpy/")) or name in ours]


@pytest.mark.parametrize("file", c_files("binding"), ids=lambda file: file.name)
def test_binding_never_sees_nlopt(file):
    assert "nlopt.h" not in includes(file)


@pytest.mark.parametrize("file", c_files("core"), ids=lambda file: file.name)
def test_core_never_prints_exits_or_allocates_by_itself(file):
    calls = FORBIDDEN_IN_CORE.findall(budgets.without_comments(file.read_text()))
    assert not calls


# --- symbols


@pytest.fixture(scope="module")
def core_objects(tmp_path_factory):
    """Each core file compiled by itself."""
    folder = tmp_path_factory.mktemp("objects")
    files = sorted(CORE.glob("*.c"))
    subprocess.run(["gcc", "-std=c11", "-O1", f"-I{CORE}", "-c", *map(str, files)], cwd=folder, check=True)
    return {file.stem: folder / f"{file.stem}.o" for file in files}


def symbols(file: Path, *options: str) -> list[tuple[str, str]]:
    """Kind letter and name of each symbol."""
    answer = subprocess.run(["nm", *options, str(file)], capture_output=True, text=True, check=True)
    return [(line.split()[-2], line.split()[-1]) for line in answer.stdout.splitlines()]


def test_core_has_no_writable_globals(core_objects):
    writable = {
        stem: [name for kind, name in symbols(file) if kind in "bBdDCsSgG"] for stem, file in core_objects.items()
    }
    assert not {stem: names for stem, names in writable.items() if names}


def test_core_exports_are_named_after_their_file(core_objects):
    def follows(stem: str, symbol: str) -> bool:
        own = noun(Path(stem))
        return any(re.match(rf"tw_{each}(_|$)", symbol) for each in {own} | NOUNS.get(own, set()))

    strange = {
        stem: [name for kind, name in symbols(file, "-g") if kind != "U" and not follows(stem, name)]
        for stem, file in core_objects.items()
    }
    assert not {stem: names for stem, names in strange.items() if names}


def test_extension_exports_its_init_only():
    extension = next(file for suffix in EXTENSION_SUFFIXES for file in PACKAGE.glob(f"_core{suffix}"))
    exported = {name for kind, name in symbols(extension, "-D", "--defined-only") if kind.isupper()}
    assert exported - {"_init", "_fini", "_edata", "_end", "__bss_start"} == {"PyInit__core"}


# --- Python


def python_files() -> list[Path]:
    return sorted(PACKAGE.rglob("*.py"))


def module_name(file: Path) -> str:
    parts = file.relative_to(PACKAGE.parent).with_suffix("").parts
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


def imported_by(node: ast.AST, package: str) -> set[str]:
    if isinstance(node, ast.Import):
        return {alias.name for alias in node.names}
    if isinstance(node, ast.ImportFrom):
        above = package.split(".")[: len(package.split(".")) - node.level + 1] if node.level else []
        base = ".".join([*above, *([node.module] if node.module else [])])
        return {base} | {f"{base}.{alias.name}" for alias in node.names}
    return set()


def imports(file: Path, *, inside_functions: bool = True) -> set[str]:
    """Absolute names of everything that a file imports."""
    name = module_name(file)
    package = name if file.name == "__init__.py" else name.rpartition(".")[0]
    tree = ast.parse(file.read_text())
    skipped: set[ast.AST] = set()
    if not inside_functions:
        functions = [node for node in ast.walk(tree) if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef)]
        skipped = {inner for function in functions for inner in ast.walk(function)}
        skipped |= {inner for node in ast.walk(tree) if is_for_types(node) for inner in ast.walk(node)}
    return {found for node in ast.walk(tree) if node not in skipped for found in imported_by(node, package)}


def is_for_types(node: ast.AST) -> bool:
    return isinstance(node, ast.If) and "TYPE_CHECKING" in ast.unparse(node.test)


@pytest.mark.parametrize("file", sorted((PACKAGE / "reference").rglob("*.py")), ids=lambda file: file.name)
def test_reference_stands_alone(file):
    ours = {name for name in imports(file) if name.startswith("tautwise.")}
    assert all(name.startswith("tautwise.reference") for name in ours)


@pytest.mark.parametrize("file", python_files(), ids=lambda file: str(file.relative_to(PACKAGE)))
def test_extension_is_imported_in_two_places(file):
    assert "tautwise._core" not in imports(file) or file.name in {"solve.py", "kernel.py", "__init__.py"}


def test_importing_the_package_is_light():
    at_once = imports(PACKAGE / "__init__.py", inside_functions=False)
    heavy = {name for name in at_once if name.split(".")[0] in {"numpy", "pint", "pydantic", "pandas", "matplotlib"}}
    assert not heavy
    assert "tautwise._core" not in at_once


@pytest.mark.parametrize("file", python_files(), ids=lambda file: str(file.relative_to(PACKAGE)))
def test_nothing_stands_on_the_commands(file):
    assert "tautwise.cli" not in imports(file) or file.name in {"cli.py", "__main__.py"}


# --- budgets


def test_nothing_is_far_beyond_its_budget():
    assert not budgets.far_beyond(budgets.measure_all())


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("int f(void)\n{\n    return 1;\n}\n", [("f", 1, 4)]),
        ("static int x[2] = {1, 2};\n\nint g(int a,\n      int b)\n{\n    if (a) { b = '}'; }\n}\n", [("g", 3, 7)]),
        ("#define M(x) { x }\nstruct s { int a; };\nvoid h(void) { /* } */ }\n", [("h", 3, 3)]),
    ],
)
def test_functions_are_found(text, expected):
    assert list(budgets.c_functions(text)) == expected
