"""The core against general-purpose solvers that know nothing of lines: SciPy's boundary-value and root finders."""

from __future__ import annotations

import core_cases as cases
import numpy as np
import pytest
from scipy.integrate import solve_bvp
from scipy.optimize import root

from tautwise import _core

EA = 34.7e6


def boundary_value(run, rise, pieces, guess_N):
    """Shape of a line loaded piece by piece, all pieces on one unit interval (x, y, z, tx, ty, tz of each).

    r' = t/|t| (1 + |t|/EA), t' = -q; places meet at each joint and the tension drops by the point force there.
    pieces: (length, load, force at the end).
    """
    n = len(pieces)
    ends = np.cumsum([0.0] + [length for length, _, _ in pieces])

    def slope(_, y):
        out = np.empty_like(y)
        for k, (length, load, _) in enumerate(pieces):
            t = y[6 * k + 3 : 6 * k + 6]
            size = np.linalg.norm(t, axis=0)
            out[6 * k : 6 * k + 3] = length * t / size * (1.0 + size / EA)
            out[6 * k + 3 : 6 * k + 6] = -length * np.array(load)[:, None]
        return out

    def meet(a, b):
        rows = [a[:3], b[6 * n - 6 : 6 * n - 3] - [run, 0.0, rise]]
        for k in range(n - 1):
            rows.append(a[6 * k + 6 : 6 * k + 9] - b[6 * k : 6 * k + 3])
            rows.append((a[6 * k + 9 : 6 * k + 12] - b[6 * k + 3 : 6 * k + 6] + pieces[k][2]) / guess_N)
        return np.concatenate(rows)

    x = np.linspace(0.0, 1.0, 41)
    start = np.zeros((6 * n, x.size))
    for k, (length, _, _) in enumerate(pieces):
        share = (ends[k] + length * x) / ends[-1]
        start[6 * k] = run * share
        start[6 * k + 2] = rise * share - 0.05 * run * share * (1.0 - share)
        start[6 * k + 3] = guess_N
        start[6 * k + 5] = guess_N * (rise / run + 0.2 * (share - 0.5))
    found = solve_bvp(slope, meet, x, start, tol=1e-9, max_nodes=100000)
    assert found.success, found.message
    return found


PARTIAL = {
    "one load on a middle stretch": [(120.0, 0.0, 0.0), (90.0, 25.0, 0.0), (91.0, 0.0, 0.0)],
    "a point load": [(100.0, 0.0, 2000.0), (201.0, 0.0, 0.0)],
    "both, and wind": [(60.0, 0.0, 900.0), (140.0, 12.0, 0.0), (101.0, 3.0, 0.0)],
}


@pytest.mark.parametrize("rise", [0.0, 40.0])
@pytest.mark.parametrize("name", PARTIAL)
def test_partial_and_point_loads(name, rise):
    """solve_bvp keeps its relative residual under 1e-9; its answers are good to about 1e-8 of the largest."""
    wind = 9.0 if "wind" in name else 0.0
    stretches = PARTIAL[name]
    scale = float(np.hypot(300.0, rise)) / 300.0
    stretches = [(length * scale, more, force) for length, more, force in stretches]
    pieces = [(length, (0.0, wind, -15.97 - more), np.array([0.0, 0.0, -force])) for length, more, force in stretches]
    found = boundary_value(300.0, rise, pieces, 18e3)
    ends = np.cumsum([0.0] + [length for length, _, _ in stretches])
    loads = [
        cases.spread_load((0.0, 0.0, -more), float(a), float(b))
        for (_, more, _), a, b in zip(stretches, ends, ends[1:], strict=False)
        if more
    ]
    loads += [
        cases.point_load(float(s), (0.0, 0.0, -force))
        for (_, _, force), s in zip(stretches, ends[1:], strict=True)
        if force
    ]
    given = cases.condition(loads=loads, wind_pressure_Pa=wind / 0.02)
    made = cases.problem(cases.span(300.0, rise), cases.lengths_rule(ends[-1]), conditions=[given])
    core = _core.Project(made)
    settled = core.settle(0)
    assert settled["status"] == "ok"
    pull = found.sol(0.0)[3:6]
    support = settled["supports"][0]
    size = float(np.linalg.norm(pull))
    theirs = np.array([support["along_N"], support["across_N"], support["down_N"]])
    np.testing.assert_allclose(theirs, pull * [1.0, 1.0, -1.0], rtol=0, atol=2e-8 * size)
    middle = found.sol(0.5)
    stations = np.array([middle[6 * k] for k in range(len(pieces))])
    places = core.at(0, stations)["position_m"]
    expected = np.array([middle[6 * k : 6 * k + 3] for k in range(len(pieces))])
    np.testing.assert_allclose(places, expected, rtol=0, atol=3e-7)


@pytest.mark.parametrize(("run", "rise", "length"), [(300, 0, 300.8), (300, 60, 309), (80, -50, 95.0), (120, 5, 119.9)])
def test_closed_form_by_root(run, rise, length):
    """Irvine's closed form (1981) in H and V, solved by MINPACK's hybrd: good to its xtol, 1e-13 asked here."""
    weight = 15.97

    def closing(unknown):
        h, v = unknown * 1e3
        far = v - weight * length
        x = h * length / EA + h / weight * (np.arcsinh(v / h) - np.arcsinh(far / h))
        z = length / EA * (v - 0.5 * weight * length) + (np.hypot(h, v) - np.hypot(h, far)) / weight
        return [x - run, z + rise]

    start = only_span(run, rise, length)
    found = root(closing, np.array([start["horizontal_tension_N"] * 1.1, 0.5 * weight * length]) / 1e3, tol=1e-13)
    assert np.linalg.norm(closing(found.x)) < 1e-10
    assert start["horizontal_tension_N"] == pytest.approx(found.x[0] * 1e3, rel=1e-9)
    assert start["tension_from_N"] == pytest.approx(float(np.hypot(*found.x)) * 1e3, rel=1e-9)


def only_span(run, rise, length):
    found = _core.Project(cases.problem(cases.span(run, rise), cases.lengths_rule(length))).settle(0)
    assert found["status"] == "ok"
    return found["spans"][0]
