"""Runs the steps of the test command, side by side where they can be, and sums up what they say.

Each step is a command whose output holds a line such as "12 passed, 1 failed" (in pytest's words too); a step without
one counts as one check. The outputs are kept under build/steps/.
"""

from __future__ import annotations

import os
import re
import subprocess
import sys
import time
from collections.abc import Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
LOGS = ROOT / "build" / "steps"
PYTEST_FOUND_NONE = 5


@dataclass(frozen=True)
class Step:
    name: str
    command: tuple[str, ...]
    shows: int = 1  # so many of the last lines are worth showing when all is well


@dataclass(frozen=True)
class Outcome:
    step: Step
    passed: int
    failed: int
    skipped: int
    seconds: float
    output: str


PYTHON = sys.executable
PYTEST = (PYTHON, "-m", "pytest", "-q", "--continue-on-collection-errors")
CTESTS = (PYTHON, "tests/tools/ctests.py")
# The lanes run side by side, the steps of a lane one after the other.
LANES = (
    (
        Step("c-tests", (*CTESTS, "sanitize"), shows=40),
        Step("allocation-failures", (*CTESTS, "sanitize", "alloc_test")),
        Step("coverage", (*CTESTS, "coverage"), shows=40),
        Step("sanitized", ("bash", "tests/sanitized")),
    ),
    (
        Step("ruff", (PYTHON, "-m", "ruff", "check", ".")),
        Step("mypy", (PYTHON, "-m", "mypy")),
        Step("budgets", (PYTHON, "tests/tools/budgets.py"), shows=40),
        Step("pytest", (*PYTEST, "-m", "not timing", "--durations=10"), shows=14),
    ),
)
# These need the machine for themselves.
LAST = (Step("timing", (*PYTEST, "-m", "timing")),)


def counts(output: str, code: int) -> tuple[int, int, int]:
    """Passed, failed, skipped: from the last line that counts, or one check for the whole step."""
    found = {"passed": 0, "failed": 0, "skipped": 0, "error": 0}
    for line in reversed(output.splitlines()):
        pairs = re.findall(r"(\d+) (passed|failed|skipped|error)", line)
        if pairs:
            found |= {word: int(number) for number, word in pairs}
            break
    else:
        found["passed"] = int(code == 0)
    failed = found["failed"] + found["error"]
    return found["passed"], max(failed, int(code != 0)), found["skipped"]


def run(step: Step) -> Outcome:
    began = time.monotonic()
    process = subprocess.run(
        step.command,
        cwd=ROOT,
        stdin=subprocess.DEVNULL,
        stdout=subprocess.PIPE,
        stderr=subprocess.STDOUT,
        text=True,
        errors="replace",
        check=False,
    )
    (LOGS / f"{step.name}.txt").write_text(process.stdout)
    nothing_to_do = step.command[: len(PYTEST)] == PYTEST and process.returncode == PYTEST_FOUND_NONE
    passed, failed, skipped = (0, 0, 0) if nothing_to_do else counts(process.stdout, process.returncode)
    outcome = Outcome(step, passed, failed, skipped, time.monotonic() - began, process.stdout)
    show(outcome)
    return outcome


def show(outcome: Outcome) -> None:
    """One head line and what is worth reading below it: everything of a step that failed."""
    lines = outcome.output.rstrip().splitlines()
    verdict = f"{outcome.failed} FAILED" if outcome.failed else "ok"
    head = f"== {outcome.step.name}: {verdict}, {outcome.seconds:.1f} s"
    shown = lines if outcome.failed else lines[-outcome.step.shows :]
    print("\n".join([head, *(f"   {line}" for line in shown)]), flush=True)


def chosen(steps: Sequence[Step], names: Sequence[str]) -> list[Step]:
    return [step for step in steps if not names or step.name in names]


def main(names: Sequence[str]) -> int:
    known = [step.name for lane in (*LANES, LAST) for step in lane]
    if unknown := set(names) - set(known):
        print(f"no such step: {', '.join(sorted(unknown))}; there are {', '.join(known)}")
        return 2
    LOGS.mkdir(parents=True, exist_ok=True)
    os.environ.setdefault("PYTHONDONTWRITEBYTECODE", "1")
    with ThreadPoolExecutor(len(LANES)) as pool:
        lanes = pool.map(lambda lane: [run(step) for step in chosen(lane, names)], LANES)
        outcomes = [outcome for lane in lanes for outcome in lane]
    outcomes += [run(step) for step in chosen(LAST, names)]
    return sum_up(outcomes)


def sum_up(outcomes: Sequence[Outcome]) -> int:
    passed, failed, skipped = (sum(getattr(o, name) for o in outcomes) for name in ("passed", "failed", "skipped"))
    for outcome in outcomes:
        print(f"{outcome.step.name:20} {outcome.passed:6} passed {outcome.failed:4} failed {outcome.seconds:8.1f} s")
    print(f"{passed} passed, {failed} failed" + (f", {skipped} skipped" if skipped else ""))
    return int(failed > 0 or passed == 0)


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
