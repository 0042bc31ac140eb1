"""The core against 50 digits: the closed form of one span (Irvine, Cable Structures, 1981, ch. 1) solved by mpmath.

Drawn from slack-deep to bar-tight and from level to steep, in three dimensions, with strain from heat. The closed form
is written here in the load's plane: t = (h, v - q s), x across the load, z along it, both from the span's start.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import core_cases as cases
import mpmath as mp
import numpy as np
import pytest

from tautwise import _core

PROMISED = 1e-10
KERNEL_CASES = 300
PROJECT_CASES = 40


@dataclass(frozen=True)
class Span:
    run: float
    rise: float
    length: float
    stiffness: float
    weight: float
    across: float
    strain: float


def drawn(seed):
    rng = np.random.default_rng(seed)
    run = 10.0 ** rng.uniform(-0.5, 3.3)
    rise = run * rng.choice([0.0, rng.uniform(-1, 1), rng.choice([-1, 1]) * 10.0 ** rng.uniform(0, 1.3)])
    stiffness = 10.0 ** rng.uniform(5, 9)
    # From strained by up to 1 % to ten times as long as the chord.
    spare = rng.choice([-(10.0 ** rng.uniform(-7, -2)), 10.0 ** rng.uniform(-7, -1), 10.0 ** rng.uniform(-1, 1)])
    length = float(np.hypot(run, rise)) * (1.0 + spare)
    weight = stiffness * 10.0 ** rng.uniform(-8, -3) / length
    across = weight * rng.choice([0.0, rng.uniform(-3, 3)])
    strain = rng.choice([0.0, rng.uniform(-1e-3, 2e-3)])
    return Span(*map(float, (run, rise, length, stiffness, weight, across, strain)))


def in_its_plane(span):
    """Size of the load, directions along it (e) and across it (p), and the far end in them."""
    load = mp.hypot(span.weight, span.across)
    e = mp.matrix([0, mp.mpf(span.across) / load, -mp.mpf(span.weight) / load])
    chord = mp.matrix([mp.mpf(span.run), 0, mp.mpf(span.rise)])
    drop = (e.T * chord)[0]
    p = chord - drop * e
    reach = mp.norm(p)
    return load, e, p / reach, reach, drop


def place(span, load, h, v, s):
    """(x, z) at natural length s."""
    grown, ea = 1 + mp.mpf(span.strain), mp.mpf(span.stiffness)
    far = v - load * s
    x = h * s / ea + grown * h / load * (mp.asinh(v / h) - mp.asinh(far / h))
    z = (v * s - load * s * s / 2) / ea + grown / load * (mp.hypot(h, v) - mp.hypot(h, far))
    return x, z


def settled(span, h, v):
    """(h, v) to 50 digits by Newton; the root is the only one (D is concave), so any start serves."""
    load, _, _, reach, drop = in_its_plane(span)
    s = mp.mpf(span.length)

    def closing(logh, v):
        x, z = place(span, load, mp.exp(logh), v, s)
        return x - reach, z - drop

    logh, v = mp.findroot(closing, (mp.log(h), v), tol=mp.mpf(10) ** -80, maxsteps=60)
    return mp.exp(logh), v


def line_length(span, load, h, v):
    """int (1 + e0 + T/EA) ds, with the primitive (t T + h^2 asinh(t/h)) / 2 of T."""

    def primitive(t):
        return (t * mp.hypot(h, t) + h * h * mp.asinh(t / h)) / 2

    s = mp.mpf(span.length)
    return s * (1 + mp.mpf(span.strain)) + (primitive(v) - primitive(v - load * s)) / load / mp.mpf(span.stiffness)


def height(span, direction, h, v):
    """Greatest direction . r: where direction . t = 0, which is linear in s."""
    load, e, p, _, _ = in_its_plane(span)
    along, over = (direction.T * e)[0], (direction.T * p)[0]
    s = (over * h + along * v) / (along * load) if along != 0 else mp.mpf(0)
    s = min(max(s, mp.mpf(0)), mp.mpf(span.length))
    x, z = place(span, load, h, v, s)
    return max(mp.mpf(0), over * x + along * z)


def expected(span, guess):
    load, e, p, _, _ = in_its_plane(span)
    start = mp.matrix([mp.mpf(value) for value in guess])
    h, v = settled(span, (p.T * start)[0], (e.T * start)[0])
    slope = mp.mpf(span.rise) / mp.mpf(span.run)
    chord = mp.matrix([mp.mpf(span.run), 0, mp.mpf(span.rise)])
    q = load * e
    normal = q - (q.T * chord)[0] / (chord.T * chord)[0] * chord
    slant = load / (normal.T * normal)[0] * normal
    return {
        "horizontal_tension": h * p[0] + v * e[0],
        "tension_from": mp.hypot(h, v),
        "tension_to": mp.hypot(h, v - load * mp.mpf(span.length)),
        "sag": height(span, mp.matrix([slope, 0, -1]), h, v),
        "slant_sag": height(span, slant, h, v),
        "line_length": line_length(span, load, h, v),
    }


KEYS = ("horizontal_tension", "tension_from", "tension_to", "sag", "slant_sag", "line_length")


def guess_of(span, found):
    """Pull at the start from the kernel's horizontal tension and the two tensions (statics in the load's plane)."""
    with mp.workdps(50):
        load, e, p, _, _ = in_its_plane(span)
        h = mp.mpf(float(found["horizontal_tension"])) / p[0]
        first, last, s = (mp.mpf(float(value)) for value in (found["tension_from"], found["tension_to"], span.length))
        v = (first**2 - last**2) / (2 * load * s) + load * s / 2
        return [float(x) for x in h * p + v * e]


def errors(span, found):
    """Relative error of each result, less what roundings leave of any answer in double precision.

    Those are: a length off by its last digit, times 8; and sags, which are differences of places, by 4 last digits of
    the natural length.
    """
    with mp.workdps(50):
        guess = guess_of(span, found)
        exact = expected(span, guess)
        known = {key: mp.mpf(float(found[key])) for key in KEYS if exact[key] != 0}
        missed = {key: abs(value - exact[key]) / exact[key] for key, value in known.items()}
        if max(missed.values()) > PROMISED:
            longer = expected(replace(span, length=mp.mpf(span.length) * (1 + mp.mpf(2) ** -52)), guess)
            for key in missed:
                missed[key] -= 8 * abs(longer[key] / exact[key] - 1)
                missed[key] -= mp.mpf(2) ** -50 * span.length / exact[key] if "sag" in key else 0
        return {key: float(value) for key, value in missed.items()}


@pytest.mark.parametrize("block", range(10))
def test_settle_spans(block):
    spans = [drawn(1000 * block + i) for i in range(KERNEL_CASES // 10)]
    columns = [np.array(column) for column in zip(*(vars(span).values() for span in spans), strict=True)]
    *values, status = _core.settle_spans(*columns)
    assert not status.any()
    for i, span in enumerate(spans):
        worst = errors(span, {key: value[i] for key, value in zip(KEYS, values, strict=True)})
        assert max(worst.values()) < PROMISED, (span, worst)


@pytest.mark.parametrize("block", range(5))
def test_natural_length(block):
    """Back from the horizontal tension to the length. What settle_spans shows at 1e-10 in H is much less in length."""
    spans = [drawn(50000 + 1000 * block + i) for i in range(20)]
    columns = {key: np.array([vars(span)[key] for span in spans]) for key in vars(spans[0])}
    pull, *_ = _core.settle_spans(*columns.values())
    others = [columns[key] for key in ("stiffness", "weight", "across", "strain")]
    found, status = _core.natural_length(columns["run"], columns["rise"], pull, *others)
    assert not status.any()
    for i, span in enumerate(spans):
        assert exact_length(span, float(pull[i])) == pytest.approx(float(found[i]), rel=1e-12), span


def exact_length(span, pull):
    with mp.workdps(50):
        load, _, p, reach, drop = in_its_plane(span)
        h = mp.mpf(pull) / p[0]

        def closing(s, v):
            x, z = place(span, load, h, v, s)
            return x - reach, z - drop

        s = mp.mpf(span.length)
        s, _ = mp.findroot(closing, (s, load * s / 2 + h * drop / reach), tol=mp.mpf(10) ** -70, maxsteps=100)
        return float(s)


@pytest.mark.parametrize("seed", range(PROJECT_CASES))
def test_settled_project(seed):
    """The same through a whole project: weight, wind by pressure, heat by temperature."""
    span = drawn(9000 + seed)
    of = cases.line(span.weight, span.stiffness, diameter=0.01, expansion=abs(span.strain) / 100.0)
    given = cases.condition(
        temperature_degC=15.0 + float(np.copysign(100.0, span.strain)),
        wind_pressure_Pa=abs(span.across) / 0.01,
        wind_angle_rad=float(np.copysign(0.5 * np.pi, span.across)),
    )
    made = cases.problem(cases.span(span.run, span.rise), cases.lengths_rule(span.length), of=of, conditions=[given])
    found = _core.Project(made).settle(0)
    assert found["status"] == "ok"
    state = found["spans"][0]
    names = ("horizontal_tension_N", "tension_from_N", "tension_to_N", "sag_m", "slant_sag_m", "line_length_m")
    # The wind per metre is rounded once more on its way; the oracle takes what the core applied.
    applied = sum(row["across_N"] for row in found["supports"]) / span.length
    span = Span(**{**vars(span), "across": span.across if span.across else 0.0, "strain": heat(of, given)})
    assert applied == pytest.approx(span.across, rel=1e-9, abs=1e-12 * span.weight)
    worst = errors(span, {key: state[name] for key, name in zip(KEYS, names, strict=True)})
    assert max(worst.values()) < PROMISED, (span, worst)


def heat(of, given):
    return of["expansion_per_K"] * (given["temperature_degC"] - 15.0)
