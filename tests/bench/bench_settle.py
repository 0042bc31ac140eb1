"""Settle one span: the core beside SciPy on the same problem, in one run. By hand: python tests/bench/bench_settle.py

The span: 300 m, 20 m rise, weight and wind, 3-D, 1e-6 asked of everyone. SciPy gets the same discretised energy in
NumPy (minimize), the line's differential equations (solve_bvp), and the elastic catenary's closed form (root).
"""

from __future__ import annotations

import sys
import time
from collections.abc import Callable
from pathlib import Path

import numpy as np
from scipy.integrate import solve_bvp
from scipy.optimize import minimize, root

from tautwise import _core

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))
import core_cases as cases

RUN, RISE, LENGTH, EA, WEIGHT, WIND = 300.0, 20.0, 301.4, 34.7e6, 15.97, 12.0
LOAD = np.array([0.0, WIND, -WEIGHT])
ELEMENTS = 64
GAUSS = np.array([-1.0, 1.0]) / np.sqrt(3.0)


def problem():
    wind = cases.condition(wind_pressure_Pa=WIND / 0.02)
    return cases.problem(cases.span(RUN, RISE), cases.lengths_rule(LENGTH), conditions=[wind])


def clock(call: Callable[[], object], least_s: float = 0.3) -> float:
    """Seconds of one call, the best of three rounds of as many as fill a third of the time."""
    count = 1
    while True:
        start = time.perf_counter()
        for _ in range(count):
            call()
        took = time.perf_counter() - start
        if took > least_s / 3.0 or count >= 10**6:
            break
        count *= 4
    rounds = [took]
    for _ in range(2 if took < 2.0 else 0):
        start = time.perf_counter()
        for _ in range(count):
            call()
        rounds.append(time.perf_counter() - start)
    return min(rounds) / count


def energy(free, ends):
    """Potential energy and gradient of three-node elements, two Gauss points; free: the inner nodes, flat."""
    nodes = np.vstack([ends[0], free.reshape(-1, 3), ends[1]])
    part = LENGTH / ELEMENTS
    a, b = nodes[1::2] - nodes[:-1:2], nodes[2::2] - nodes[1::2]
    total, slope = 0.0, np.zeros_like(nodes)
    for xi in GAUSS:
        stretch = 2.0 / part * ((0.5 - xi) * a + (0.5 + xi) * b)
        size = np.linalg.norm(stretch, axis=1)
        tension = EA * np.maximum(0.0, size - 1.0)
        total += 0.25 * part * float(tension @ np.maximum(0.0, size - 1.0))
        force = (tension / size)[:, None] * stretch
        slope[:-1:2] -= (0.5 - xi) * force
        slope[1::2] += (0.5 - xi) * force - (0.5 + xi) * force
        slope[2::2] += (0.5 + xi) * force
    share = np.zeros(len(nodes))
    share[1::2] = 4.0 / 6.0 * part
    share[2::2] += part / 6.0
    share[:-1:2] += part / 6.0
    total -= float(share @ (nodes @ LOAD))
    slope -= share[:, None] * LOAD
    return total, slope[1:-1].ravel()


def by_minimize():
    ends = np.array([[0.0, 0.0, 0.0], [RUN, 0.0, RISE]])
    x = np.linspace(0.0, 1.0, 2 * ELEMENTS + 1)[1:-1, None]
    start = ends[0] + x * ends[1] + 40.0 * x * (1.0 - x) * LOAD / np.linalg.norm(LOAD)
    options = {"maxiter": 10**5, "maxfun": 10**6, "ftol": 1e-15, "gtol": 1e-4, "maxcor": 20}
    return minimize(energy, start.ravel(), args=(ends,), jac=True, method="L-BFGS-B", options=options)


def by_bvp():
    def slope(_, y):
        size = np.linalg.norm(y[3:], axis=0)
        return np.vstack([LENGTH * y[3:] / size * (1.0 + size / EA), np.repeat(-LENGTH * LOAD[:, None], y.shape[1], 1)])

    def meet(a, b):
        return np.concatenate([a[:3], b[:3] - [RUN, 0.0, RISE]])

    x = np.linspace(0.0, 1.0, 21)
    start = np.zeros((6, x.size))
    start[0], start[2], start[3], start[5] = RUN * x, RISE * x, 2e4, 2e4 * RISE / RUN + 4800.0 * (x - 0.5)
    return solve_bvp(slope, meet, x, start, tol=1e-6)


def by_root():
    q = float(np.linalg.norm(LOAD))
    drop = -RISE * WEIGHT / q
    reach = float(np.sqrt(RUN**2 + RISE**2 - drop**2))

    def closing(unknown):
        h, v = unknown * 1e3
        far = v - q * LENGTH
        x = h * LENGTH / EA + h / q * (np.arcsinh(v / h) - np.arcsinh(far / h))
        z = LENGTH / EA * (v - 0.5 * q * LENGTH) + (np.hypot(h, v) - np.hypot(h, far)) / q
        return [x - reach, z - drop]

    return root(closing, np.array([20.0, 3.0]))


def beside_scipy():
    core = _core.Project(problem())
    found = core.settle(0)
    one, many = ([np.full(n, value) for value in (RUN, RISE, LENGTH, EA, WEIGHT, WIND, 0.0)] for n in (1, 10000))
    lowest, solved, rooted = by_minimize(), by_bvp(), by_root()
    miss = abs(lowest.fun / found["energy_J"] - 1.0)
    off = abs(np.linalg.norm(solved.sol(0.0)[3:6]) / found["spans"][0]["tension_from_N"] - 1.0)
    note = f"{found['evaluations']} evaluations, gap {found['gap_relative']:.1e}"
    rows = [
        ("tautwise settle, with its bracket", lambda: core.settle(0), note, 1),
        ("tautwise array kernel, one span of 10000", lambda: _core.settle_spans(*many), "", 10000),
        ("tautwise array kernel, called for one", lambda: _core.settle_spans(*one), "", 1),
        ("SciPy minimize, L-BFGS-B, same energy", by_minimize, f"{lowest.nfev} evaluations, energy off {miss:.1e}", 1),
        ("SciPy solve_bvp, 1e-6", by_bvp, f"{solved.x.size} nodes, tension off {off:.1e}", 1),
        ("SciPy root on the closed form", by_root, f"{rooted.nfev} evaluations", 1),
    ]
    settle = clock(rows[0][1])
    print(f"one span, {ELEMENTS} elements\n{'':42}{'time, ms':>12}{'times settle':>14}")
    for name, call, note, count in rows:
        seconds = clock(call) / count
        print(f"{name:42}{seconds * 1e3:12.4f}{seconds / settle:14.4g}  {note}")


def time_per_node():
    core = _core.Project(problem())
    print(f"\n{'nodes':>9}{'evaluations':>13}{'ms':>10}{'ns per node':>13}{'gap':>10}")
    for power in range(2, 7):
        elements = 10**power // 2
        found = core.settle(0, elements_per_span=elements)
        seconds = clock(lambda n=elements: core.settle(0, elements_per_span=n))
        nodes = 2 * found["elements"] + 1
        times = f"{seconds * 1e3:10.3f}{seconds / nodes * 1e9:13.1f}{found['gap_relative']:10.1e}"
        print(f"{nodes:9}{found['evaluations']:13}{times}  {found['status']}")


if __name__ == "__main__":
    beside_scipy()
    time_per_node()
