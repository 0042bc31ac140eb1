"""What the documents say is true: their Python runs, commands print what is shown, links lead somewhere."""

from __future__ import annotations

import doctest
import re
import runpy
import shlex
import sys
from dataclasses import dataclass
from itertools import zip_longest
from pathlib import Path

import pytest

import tautwise as tw
from steps import LANES, LAST
from tautwise import cli
from tautwise.schema import project_schema

ROOT = Path(__file__).resolve().parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
DEVELOPERS = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
NUMBER = re.compile(r"(?<![\w.])[+-]?\d+(?:\.\d+)?(?:e[+-]?\d+)?(?![\w])")
PICTURE_BYTES_MOST = 150_000


@dataclass(frozen=True)
class Shown:
    """A command of a console block, the folder it runs in, and the lines shown below it ("..." for lines left out)."""

    command: str
    folder: Path
    lines: tuple[str, ...]


def blocks(kind: str) -> list[str]:
    return re.findall(rf"^```{kind}\n(.*?)^```", README, flags=re.MULTILINE | re.DOTALL)


def shown() -> list[Shown]:
    """A block that begins with an examples run shows commands that run in its folder."""
    found = []
    for block in blocks("console"):
        folder = ROOT
        for part in re.split(r"^\$ ", block, flags=re.MULTILINE)[1:]:
            command, *lines = part.rstrip("\n").split("\n")
            if command == "bash examples/run":
                folder = ROOT / "examples"
            found.append(Shown(command, folder, tuple(lines)))
    return found


def numbers_agree(printed: str, real: str) -> bool:
    """Within one unit of the last digit printed; a number with an exponent within a factor of 3."""
    if "e" in printed:
        return 1 / 3 <= float(printed) / float(real) <= 3
    digits = len(printed.partition(".")[2])
    return abs(float(printed) - float(real)) <= 1.001 * 10.0**-digits


def lines_agree(printed: str, real: str) -> bool:
    words = [re.sub(r"\s+", " ", NUMBER.sub("#", line)).strip() for line in (printed, real)]
    pairs = zip_longest(NUMBER.findall(printed), NUMBER.findall(real), fillvalue="")
    return words[0] == words[1] and all(numbers_agree(a, b) for a, b in pairs)


def missing(printed: tuple[str, ...], real: list[str]) -> str:
    """The first printed line that the real output does not have in its place; empty where all is well."""
    at, free = 0, False
    for line in printed:
        if line == "...":
            free = True
            continue
        candidates = range(at, len(real)) if free else range(at, min(at + 1, len(real)))
        here = next((number for number in candidates if lines_agree(line, real[number])), None)
        if here is None:
            return line
        at, free = here + 1, False
    return "" if free or at == len(real) else f"(nothing), where the output goes on: {real[at]}"


TAUTWISE = [each for each in shown() if each.command.startswith("tautwise ")]


@pytest.fixture
def written(tmp_path):
    """The README's project file, and the same with the two slips that it shows the messages of."""
    text = blocks("toml")[0]
    (tmp_path / "yard.taut.toml").write_text(text, encoding="utf-8")
    text = text.replace("tolerance =", "tolerence =").replace('weight = "7.55 N/m"', 'weight = "7.55 kN"')
    (tmp_path / "faulty.taut.toml").write_text(text, encoding="utf-8")
    return tmp_path


@pytest.mark.parametrize("each", TAUTWISE, ids=lambda each: each.command)
def test_commands_print_what_is_shown(each, written, monkeypatch, capsys):
    monkeypatch.chdir(written if re.search("faulty|yard", each.command) else each.folder)
    cli.run(shlex.split(each.command)[1:])
    output = capsys.readouterr()
    real = (output.err + output.out).rstrip("\n")
    if line := missing(each.lines, real.split("\n")):
        pytest.fail(f"{each.command} does not print what the README shows: {line}\nIt prints:\n{real}", pytrace=False)


def test_something_is_shown():
    commands = [each.command for each in shown()]
    assert "bash examples/run" in commands
    assert "bash tests/run" in commands
    assert len(TAUTWISE) >= 3


def test_test_run_shows_steps_that_exist():
    names = {step.name for lane in (*LANES, LAST) for step in lane}
    lines = next(each.lines for each in shown() if each.command == "bash tests/run")
    listed = {found.group(1) for line in lines if (found := re.match(r"([\w-]+) +\d+ passed +0 failed", line))}
    assert listed
    assert listed <= names
    assert not [line for line in lines if re.search(r"\b[1-9]\d* failed", line)]


def test_python_runs(monkeypatch):
    monkeypatch.chdir(ROOT)
    options = doctest.ELLIPSIS | doctest.NORMALIZE_WHITESPACE
    failed, tried = doctest.testfile(str(ROOT / "README.md"), module_relative=False, optionflags=options)
    assert tried > 0
    assert failed == 0


def test_the_project_file_is_complete(tmp_path):
    file = tmp_path / "yard.taut.toml"
    file.write_text(blocks("toml")[0], encoding="utf-8")
    project = tw.load(file)
    assert not project.warnings
    assert project.window().open


def test_the_commands_are_listed():
    listed = set(re.findall(r"^\| `tautwise (\w+)", README, flags=re.MULTILINE))
    assert listed == set(cli.commands.commands)


@pytest.mark.parametrize("name", ["README.md", "DEVELOPERS.md"])
def test_links_lead_somewhere(name):
    links = re.findall(r"\]\(([^)#\s]+)(?:#[^)]*)?\)", (ROOT / name).read_text(encoding="utf-8"))
    assert links
    assert not [link for link in links if "://" not in link and not (ROOT / link).exists()]


# --- DEVELOPERS.md


def code_words() -> set[str]:
    return set(re.findall(r"`([^`\n]+)`", DEVELOPERS))


def test_paths_in_the_developers_page_exist():
    paths = {word for word in code_words() if re.fullmatch(r"[\w./-]+/[\w.-]*", word) and "NAME" not in word}
    assert len(paths) > 20
    assert not [path for path in sorted(paths) if not (ROOT / path).exists()]


def test_every_key_is_listed():
    """Each key of the project file's schema stands among README's keys, or is a table of its own there."""
    part = README[README.index("### Every key") : README.index("## Commands")]
    told = set(re.findall(r"[a-z0-9_]+", " ".join(re.findall(r"`([^`]+)`", part))))
    schema = project_schema()
    keys = {key for one in (schema, *schema["$defs"].values()) for key in one.get("properties", {})}
    assert len(keys) > 100
    assert not sorted(keys - told)


def test_the_map_names_every_file():
    words = code_words()
    files = [file for folder in ("core", "search", "binding") for file in (ROOT / "csrc" / folder).glob("*.[ch]")]
    files += list((ROOT / "python" / "tautwise").glob("*.py"))
    stems = {file.stem for file in files if not file.stem.startswith("__")}
    assert not sorted(stems - words)


def test_functions_in_the_developers_page_exist():
    """Names of C functions, macros and types, and of Python functions that are said to be called."""
    sources = [*(ROOT / "csrc").rglob("*.[ch]"), *(ROOT / "python").rglob("*.py"), *(ROOT / "tests").rglob("*.py")]
    text = "\n".join(file.read_text(encoding="utf-8") for file in sources)
    names = {word.rstrip("()") for word in code_words() if re.fullmatch(r"(tw_|TW_)\w+|_?[A-Za-z]\w*\(\)", word)}
    assert len(names) > 20
    assert not sorted(name for name in names if not re.search(rf"\b{re.escape(name)}\b", text))


# --- the figure


def test_the_figure_is_drawn(tmp_path, monkeypatch):
    pytest.importorskip("matplotlib")
    file = tmp_path / "figure.png"
    monkeypatch.setattr(sys, "argv", ["axes_and_signs.py", str(file)])
    runpy.run_path(str(ROOT / "examples" / "axes_and_signs.py"), run_name="__main__")
    for each in (file, ROOT / "examples" / "axes_and_signs.png"):
        assert 10_000 < each.stat().st_size < PICTURE_BYTES_MOST
