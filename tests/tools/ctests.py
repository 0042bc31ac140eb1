"""Builds the C tests with the core and the searches, and runs them: ctests.py MODE [PROGRAM ...].

    sanitize   under the address and undefined-behaviour sanitizers (alloc_test only when it is named)
    coverage   every program, then the share of the core's lines that ran
    valgrind   every program under valgrind

Each program ends with a line "NAME: N passed, N failed". Objects are kept under build/ctests/MODE and compiled anew
when their source, a header or the flags change.
"""

from __future__ import annotations

import hashlib
import json
import os
import re
import shlex
import subprocess
import sys
import time
from collections.abc import Iterable, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
FOLDERS = ("csrc/core", "csrc/search", "csrc/tests")
LARGEST_RUN_S = 600
WARNINGS = ["-Wall", "-Wextra", "-Wpedantic", "-Wshadow", "-Wconversion", "-Wstrict-prototypes", "-Wmissing-prototypes"]
COMMON = [
    "-std=c11",
    "-ffp-contract=off",
    "-g",
    *WARNINGS,
    "-Werror",
    "-DTW_ALLOC_TEST",
    *(f"-I{folder}" for folder in FOLDERS),
]
MODES = {
    "sanitize": ["-O1", "-fsanitize=address,undefined", "-fno-sanitize-recover=undefined", "-fno-omit-frame-pointer"],
    "coverage": ["-O0", "--coverage", "-fprofile-abs-path"],
    "valgrind": ["-O1"],
}
SANITIZERS = {
    "ASAN_OPTIONS": "detect_leaks=1:allocator_may_return_null=1",
    "UBSAN_OPTIONS": "print_stacktrace=1",
}
RUN_UNDER = {"valgrind": ["valgrind", "--quiet", "--leak-check=full", "--error-exitcode=99"]}


@dataclass(frozen=True)
class Run:
    name: str
    passed: int
    failed: int
    seconds: float
    output: str


def on_every_core(work, items: Iterable) -> list:
    with ThreadPoolExecutor(os.cpu_count()) as pool:
        return list(pool.map(work, items))


def nlopt_flags(what: str) -> list[str]:
    answer = subprocess.run(["pkg-config", what, "nlopt"], capture_output=True, text=True, check=True)
    return shlex.split(answer.stdout)


def command(arguments: Sequence[str]) -> None:
    done = subprocess.run(arguments, cwd=ROOT, stdout=subprocess.PIPE, stderr=subprocess.STDOUT, text=True, check=False)
    if done.returncode:
        raise SystemExit(f"{shlex.join(arguments)}\n{done.stdout}\nbuild: 0 passed, 1 failed")


def is_program(source: Path) -> bool:
    return source.parent.name == "tests" and (source.stem.startswith("test_") or source.stem.endswith("_test"))


class Build:
    """The objects and programs of one mode."""

    def __init__(self, mode: str) -> None:
        self.mode = mode
        self.folder = ROOT / "build" / "ctests" / mode
        self.folder.mkdir(parents=True, exist_ok=True)
        self.flags = [*COMMON, *MODES[mode], *nlopt_flags("--cflags")]
        self.sources = sorted(file for folder in FOLDERS for file in (ROOT / folder).glob("*.c"))
        headers = sorted(file for folder in FOLDERS for file in (ROOT / folder).glob("*.h"))
        self.headers = b"".join(header.read_bytes() for header in headers)

    def object_of(self, source: Path) -> Path:
        return self.folder / f"{source.parent.name}-{source.stem}.o"

    def compile(self, source: Path) -> None:
        product = self.object_of(source)
        arguments = ["gcc", *self.flags, "-c", str(source.relative_to(ROOT)), "-o", str(product)]
        key = hashlib.sha256(shlex.join(arguments).encode() + self.headers + source.read_bytes()).hexdigest()
        stamp = product.with_suffix(".key")
        if product.exists() and stamp.exists() and stamp.read_text() == key:
            return
        stamp.unlink(missing_ok=True)
        command(arguments)
        stamp.write_text(key)

    def link(self, source: Path) -> Path:
        program = self.folder / source.stem
        shared = [str(self.object_of(other)) for other in self.sources if not is_program(other)]
        libs = [*nlopt_flags("--libs"), "-lm", "-lpthread"]
        command(["gcc", *self.flags, str(self.object_of(source)), *shared, "-o", str(program), *libs])
        return program

    def programs(self, names: Sequence[str]) -> list[Path]:
        """Compile everything, link the named programs; without names all, but alloc_test not under the sanitizers."""
        candidates = [source for source in self.sources if is_program(source)]
        if unknown := set(names) - {source.stem for source in candidates}:
            raise SystemExit(f"no such program: {', '.join(sorted(unknown))}")
        left_out = {"alloc_test"} if self.mode == "sanitize" else set()
        wanted = [source for source in candidates if source.stem in (names or {source.stem} - left_out)]
        on_every_core(self.compile, [source for source in self.sources if not is_program(source) or source in wanted])
        return on_every_core(self.link, wanted)


def run(mode: str, program: Path) -> Run:
    began = time.monotonic()
    try:
        done = subprocess.run(
            [*RUN_UNDER.get(mode, []), str(program)],
            cwd=ROOT,
            env=os.environ | SANITIZERS,
            stdout=subprocess.PIPE,
            stderr=subprocess.STDOUT,
            text=True,
            errors="replace",
            timeout=LARGEST_RUN_S,
            check=False,
        )
        output, code = done.stdout, done.returncode
    except subprocess.TimeoutExpired:
        output, code = f"did not end within {LARGEST_RUN_S} s", 1
    return Run(program.name, *counts(output, code), time.monotonic() - began, output)


def counts(output: str, code: int) -> tuple[int, int]:
    """A program that ends without its line, or with an error and no failed check, counts as one failure."""
    found = re.findall(r"(\d+) passed, (\d+) failed", output)
    passed, failed = map(int, found[-1]) if found else (0, 1)
    return passed, max(failed, int(code != 0))


def show(run: Run) -> None:
    print(f"{run.name:24} {run.passed:7} passed {run.failed:4} failed {run.seconds:7.1f} s")
    if run.failed:
        print(run.output)


def core_coverage(folder: Path) -> None:
    """Print the share of each core file's lines that ran, and write the lines that did not to uncovered.txt."""
    notes = sorted(str(file) for file in folder.glob("core-*.gcda"))
    answer = subprocess.run(
        ["gcov", "--json-format", "--stdout", *notes], cwd=folder, capture_output=True, text=True, check=True
    )
    missed: list[str] = []
    lines_in_all = ran_in_all = 0
    for document in map(json.loads, answer.stdout.splitlines()):
        for file in document["files"]:
            path = Path(file["file"])
            if path.suffix != ".c" or path.parent.name != "core":
                continue
            hits: dict[int, int] = {}
            for line in file["lines"]:
                hits[line["line_number"]] = hits.get(line["line_number"], 0) + line["count"]
            ran = sum(count > 0 for count in hits.values())
            lines_in_all, ran_in_all = lines_in_all + len(hits), ran_in_all + ran
            print(f"core/{path.name:19} {100 * ran / max(len(hits), 1):6.1f} % of {len(hits)} lines")
            missed += [f"csrc/core/{path.name}:{number}" for number, count in sorted(hits.items()) if count == 0]
    (folder / "uncovered.txt").write_text("\n".join(missed) + "\n")
    print(f"coverage of the core: {100 * ran_in_all / max(lines_in_all, 1):.1f} % of {lines_in_all} lines")


def main(mode: str, names: Sequence[str]) -> int:
    build = Build(mode)
    programs = build.programs(names)
    if mode == "coverage":
        for old in build.folder.glob("*.gcda"):
            old.unlink()
    runs = on_every_core(lambda program: run(mode, program), programs)
    failed = sum(each.failed for each in runs)
    passed = sum(each.passed for each in runs)
    for each in runs:
        if mode != "coverage" or each.failed:
            show(each)
    if mode == "coverage":
        passed = int(failed == 0)  # the checks themselves count where they run under the sanitizers
        core_coverage(build.folder)
    print(f"{mode}: {passed} passed, {failed} failed")
    return int(failed > 0)


if __name__ == "__main__":
    if len(sys.argv) < 2 or sys.argv[1] not in MODES:
        raise SystemExit(__doc__)
    sys.exit(main(sys.argv[1], sys.argv[2:]))
