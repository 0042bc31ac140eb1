"""A window over ten conditions, on one span and on forty spans. By hand: python tests/bench/bench_window.py"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
from bench_settle import clock

from tautwise import _core
from tautwise.reference.project import Twin

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))
import core_cases as cases


def conditions():
    """Heat, cold, ice, wind and all together."""
    heat = [cases.condition(temperature_degC=float(t)) for t in (-30, 15, 50, 80)]
    ice = [cases.condition(temperature_degC=-5.0, ice_thickness_m=t) for t in (0.006, 0.012)]
    wind = [cases.condition(temperature_degC=5.0, wind_pressure_Pa=p) for p in (300.0, 600.0)]
    both = [cases.condition(temperature_degC=-5.0, ice_thickness_m=0.01, wind_pressure_Pa=p) for p in (200.0, 300.0)]
    return heat + ice + wind + both


def section(spans):
    rng = np.random.default_rng(7)
    stations = np.concatenate([[0.0], np.cumsum(rng.uniform(240.0, 320.0, spans))])
    heights = 30.0 + rng.uniform(-1.5, 1.5, spans + 1)
    inner = [cases.hanger(float(x), float(z), 2.0, 400.0) for x, z in zip(stations[1:-1], heights[1:-1], strict=True)]
    supports = [cases.support(0.0, heights[0]), *inner, cases.support(float(stations[-1]), heights[-1])]
    limits = [
        cases.limit("clearance", least=7.0),
        cases.limit("tension", share=0.55),
        cases.limit("catenary_constant", most=2500.0),
    ]
    if inner:
        limits.append(cases.limit("uplift", least=0.0, covers=[False, *[True] * (spans - 1), False]))
    x = np.linspace(-10.0, float(stations[-1]) + 10.0, 50 * spans)
    ground = np.column_stack([x, 2.0 * np.sin(x / 60.0)])
    of, none = cases.line(12.0, 20e6, strength=90e3), cases.rule("none", None)
    return cases.problem(supports, none, of=of, conditions=conditions(), limits=limits, ground=ground)


def show(spans, twin):
    problem = section(spans)
    core = _core.Project(problem)
    found = core.window()
    seconds = clock(core.window)
    quick = clock(lambda: core.window(verify=False))
    ends = [f"{found[end]['pull_N']:.0f} N" if found[end] else "-" for end in ("low", "high")]
    times = f"{seconds * 1e3:.2f} ms, {quick * 1e3:.2f} ms without its proof"
    work = f"{found['evaluations']} evaluations, {found['settles']} settles"
    print(f"{spans:3} span(s): {'open' if found['open'] else 'shut'} {' to '.join(ends)}; {times}; {work}")
    if twin:
        judged = clock(lambda: Twin(problem).judge(15e3))
        print(f"    the NumPy twin judges one pull in {judged * 1e3:.0f} ms, {judged / seconds:.0f} windows' time")


if __name__ == "__main__":
    show(1, twin=True)
    show(40, twin=False)
