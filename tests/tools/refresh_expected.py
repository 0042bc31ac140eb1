"""Writes the expected text outputs of the examples anew: NAME.COMMAND.expected.txt beside each project file.

    python tests/tools/refresh_expected.py [NAME ...]        default: every example

A refresh freezes whatever the program prints today, right or wrong. So read the difference line by line before it is
kept, and be able to say of each changed number why it changed; tests/test_examples.py holds the hand estimates that
the numbers have to agree with.
"""

from __future__ import annotations

import contextlib
import io
import os
import sys
from collections.abc import Sequence
from pathlib import Path

EXAMPLES = Path(__file__).resolve().parents[2] / "examples"
ENDING = ".taut.toml"
COMMANDS = ("settle", "window", "vet", "sheet")
SURVEY = "_survey.csv"  # beside a project file: points measured on its line, for the command fit
ANSWERS = (0, 1)  # exit codes that come with an answer


def example_names() -> list[str]:
    """Names of the example projects."""
    return sorted(path.name.removesuffix(ENDING) for path in EXAMPLES.glob(f"*{ENDING}"))


def commands_of(name: str) -> tuple[str, ...]:
    """The commands that an example shows."""
    return (*COMMANDS, "fit") if (EXAMPLES / (name + SURVEY)).exists() else COMMANDS


def expected_file(name: str, command: str) -> Path:
    """Where the expected output of a command on an example is kept."""
    return EXAMPLES / f"{name}.{command}.expected.txt"


def printed(name: str, command: str, *options: str) -> tuple[int, str, str]:
    """Exit code, stdout and stderr of a command on an example, run in the folder of the examples."""
    from tautwise.cli import run

    out, err = io.StringIO(), io.StringIO()
    with contextlib.chdir(EXAMPLES), contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
        survey = [name + SURVEY] if command == "fit" else []
        code = run([command, name + ENDING, *survey, *options])
    return code, out.getvalue(), err.getvalue()


def refresh(name: str, command: str) -> bool:
    """Write one expected output; False where the command gave no answer."""
    code, out, err = printed(name, command)
    sys.stderr.write(err)
    if code not in ANSWERS or not out:
        sys.stderr.write(f"{name}: {command} ended with exit code {code}; its expected output stays as it is\n")
        return False
    target = expected_file(name, command)
    changed = not target.exists() or target.read_text(encoding="utf-8") != out
    target.write_text(out, encoding="utf-8")
    if changed:
        sys.stdout.write(f"{os.path.relpath(target)} changed: read it line by line\n")
    return True


def main(names: Sequence[str]) -> int:
    """Write the expected outputs of the named examples, or of all."""
    unknown = set(names) - set(example_names())
    if unknown:
        sys.stderr.write(f"no such example: {', '.join(sorted(unknown))}; there are {', '.join(example_names())}\n")
        return 2
    done = [refresh(name, command) for name in names or example_names() for command in commands_of(name)]
    return 0 if all(done) else 1


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
