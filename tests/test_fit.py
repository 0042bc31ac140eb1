"""Fits: what hangs exactly is found again, noise moves the answer as far as is stated, and the twin agrees."""

from __future__ import annotations

import math
import os
import pickle
import signal
import threading
from itertools import pairwise

import core_cases as cases
import numpy as np
import pytest
from scipy import optimize, stats

import tautwise as tw
from tautwise import _core, student
from tautwise.errors import TautwiseError
from tautwise.reference import survey as twin

LINE = {"diameter": "18 mm", "weight": "8.6 N/m", "stiffness": "24 MN", "expansion": "17e-6 / K"}
ROUTE = [
    {"name": "Quay", "station": "20 m", "elevation": "31 m", "hold": "post", "stiffness_along": "300 kN/m"},
    {"name": "Knoll", "station": "210 m", "elevation": "38 m", "hold": "hanger", "length": "1.5 m", "weight": "250 N"},
    {"name": "Weir", "station": "480 m", "elevation": "33 m", "hold": "hanger", "length": "1.5 m", "weight": "250 N"},
    {"name": "Mill", "station": "700 m", "elevation": "41 m"},
]
SIGMA_M = 0.02


def route(pull="9 kN", **more) -> tw.Project:
    tables = {
        "title": "Mill line",
        "line": LINE,
        "support": ROUTE,
        "stringing": {"temperature": "15 degC", "horizontal_tension": pull, "tolerance": "5 %"},
        "condition": [{"name": "hot", "temperature": "60 degC"}, {"name": "cold", "temperature": "-20 degC"}],
    }
    return tw.Project(**(tables | more))


def level(span=300.0, pull="17 kN", **more) -> tw.Project:
    ends = [
        {"name": "West", "station": "0 m", "elevation": "30 m"},
        {"name": "East", "station": f"{span} m", "elevation": "30 m"},
    ]
    return route(pull, support=ends, **more)


def elevations(problem, stations, temperature, pull=None) -> np.ndarray:
    """Of the core's bare line, through another of its methods."""
    bare = {**problem, "conditions": [cases.condition(temperature_degC=temperature)], "marks": [], "limits": []}
    return _core.Project(bare).at(0, np.asarray(stations, dtype=float), pull=pull)["position_m"][:, 2]


def stations_of(problem, per_span) -> np.ndarray:
    ends = [each["station_m"] for each in problem["supports"]]
    shares = (np.arange(per_span) + 1.0) / (per_span + 1.0)
    return np.concatenate([a + (b - a) * shares for a, b in pairwise(ends)])


def drawn(seed):
    """One to four spans of any hold, sagging from a quarter of a span to nearly nothing; two temperatures."""
    rng = np.random.default_rng(seed)
    n = int(rng.integers(1, 5))
    x = np.concatenate([[0.0], np.cumsum(rng.uniform(80.0, 350.0, n))]) + rng.uniform(-1e3, 1e3)
    supports = []
    for j, station in enumerate(x):
        kind = rng.choice(["anchor", "post"] if j in (0, n) else ["anchor", "hanger", "hanger", "post"])
        elevation = float(rng.normal(40.0, 1.0))
        if kind == "hanger":
            supports.append(cases.hanger(float(station), elevation, 1.8, 300.0))
        elif kind == "post":
            supports.append(cases.post(float(station), elevation, 4e5, 3e5))
        else:
            supports.append(cases.support(float(station), elevation))
    pull = float(np.exp(rng.uniform(math.log(0.5 * 15.97 * 350.0), math.log(35e3))))
    return cases.problem(supports, cases.rule("pull", pull)), pull, rng.uniform(-30.0, 70.0, 2).round(1)


def columns(stations, measured, temperature, sigma=None):
    stations = np.asarray(stations, dtype=float)
    found = {"station_m": stations, "elevation_m": measured, "temperature_degC": np.full(stations.shape, temperature)}
    return found if sigma is None else found | {"sigma_m": np.full(stations.shape, sigma)}


def joined(*parts):
    return {key: np.concatenate([part[key] for part in parts]) for key in parts[0]}


# Elevations carry the closing error, 1e-13 of a span, and rounding; against a sag of 1 m that is 1e-10 of the pull.
@pytest.mark.parametrize("seed", range(40))
def test_what_the_core_hangs_is_found_again(seed):
    problem, pull, temperatures = drawn(seed)
    x = stations_of(problem, 3)
    points = joined(*(columns(x, elevations(problem, x, t), t) for t in temperatures))
    core = _core.Project(problem)
    lengths = core.string()["lengths_m"]
    found = core.fit(points, unknown="pull")
    assert found["status"] == "ok"
    assert found["unknowns"][0]["value"] == pytest.approx(pull, rel=1e-8)
    assert found["lengths_m"] == pytest.approx(lengths, rel=1e-10)
    found = core.fit(points, unknown="lengths")
    assert found["status"] == "ok"
    assert [each["value"] for each in found["unknowns"]] == pytest.approx(lengths, rel=1e-10)
    assert found["step_relative"] < 1e-8


@pytest.mark.parametrize("seed", range(100, 106))
def test_what_the_twin_hangs_is_found_again(seed):
    problem, pull, (temperature, _) = drawn(seed)
    x = stations_of(problem, 2)
    measured = twin.places(problem, x, temperature, pull_N=pull)[:, 1]
    found = _core.Project(problem).fit(columns(x, measured, temperature))
    assert found["unknowns"][0]["value"] == pytest.approx(pull, rel=1e-8)
    lengths = np.array(_core.Project(problem).string()["lengths_m"]) * (1.0 + 2e-4 * np.sin(np.arange(x.size // 2)))
    measured = twin.places(problem, x, temperature, lengths_m=list(lengths))[:, 1]
    found = _core.Project(problem).fit(columns(x, measured, temperature), unknown="lengths")
    assert found["lengths_m"] == pytest.approx(list(lengths), rel=1e-8)


def test_scipy_on_the_twin_finds_the_same_pull_and_covariance():
    problem, rng = route().to_core(), np.random.default_rng(7)
    x = stations_of(problem, 3)
    measured = elevations(problem, x, 30.0) + rng.normal(0.0, SIGMA_M, x.size)

    def residuals(q):
        return measured - twin.places(problem, x, 30.0, pull_N=float(np.exp(q[0])))[:, 1]

    best = optimize.least_squares(residuals, [math.log(8e3)], method="lm", jac="3-point", xtol=1e-14, ftol=1e-14)
    found = _core.Project(problem).fit(columns(x, measured, 30.0))
    pull = float(np.exp(best.x[0]))
    # Squares are flat: SciPy stops where they change by 1e-14, so within 1e-7 of sigma; its differences err by 1e-6.
    assert found["unknowns"][0]["value"] == pytest.approx(pull, rel=1e-8)
    assert found["chi2"] == pytest.approx(2.0 * best.cost, rel=1e-9)
    covariance = pull**2 / float(best.jac[:, 0] @ best.jac[:, 0])
    assert found["unknowns"][0]["covariance"][0] == pytest.approx(covariance, rel=1e-5)
    assert np.array(found["residuals_m"]) == pytest.approx(best.fun, abs=1e-8)
    leverage = best.jac[:, 0] ** 2 / float(best.jac[:, 0] @ best.jac[:, 0])
    assert np.array(found["leverages"]) == pytest.approx(leverage, abs=1e-6)


def test_scipy_on_the_twin_finds_the_same_lengths_and_covariances():
    problem, rng = route().to_core(), np.random.default_rng(8)
    x = stations_of(problem, 3)
    measured = elevations(problem, x, 5.0) + rng.normal(0.0, SIGMA_M, x.size)
    start = np.array(_core.Project(problem).string()["lengths_m"])

    def residuals(lengths):
        return measured - twin.places(problem, x, 5.0, lengths_m=list(lengths))[:, 1]

    best = optimize.least_squares(
        residuals, start, jac="3-point", diff_step=1e-6, x_scale=1e-3, xtol=1e-14, ftol=1e-14, gtol=1e-14
    )
    found = _core.Project(problem).fit(columns(x, measured, 5.0), unknown="lengths")
    assert found["lengths_m"] == pytest.approx(list(best.x), rel=1e-9)
    covariance = np.linalg.inv(best.jac.T @ best.jac)
    given = np.array([each["covariance"] for each in found["unknowns"]])
    # SciPy differs over 1e-6 of a length, 0.3 mm: a hundredth of a per cent of the sag's own slope by its curvature.
    assert given == pytest.approx(covariance, rel=1e-3, abs=1e-3 * np.abs(covariance).max())
    assert found["chi2"] == pytest.approx(2.0 * best.cost, rel=1e-9)


def test_one_sag_gives_the_pull_of_the_parabola():
    """H = w L^2 / (8 D), the formula of every handbook, on a level span.

    A catenary's sag is that of the parabola times 1 + u^2/12 with u = w L / (2 H), to u^4/360 of it, and a line that
    stretches weighs w / (1 + T/EA) a metre. The rest is of the order of u^4: 1e-6 here.
    """
    problem = level(pull="26 kN").to_core()
    sag = 30.0 - elevations(problem, [150.0], 15.0)[0]
    found = _core.Project(problem).fit(columns([150.0], [30.0 - sag], 15.0))["unknowns"][0]["value"]
    parabola = 8.6 * 300.0**2 / (8.0 * sag)
    u = 8.6 * 300.0 / (2.0 * found)
    assert found != pytest.approx(parabola, rel=1e-4)
    assert found == pytest.approx(parabola * (1.0 + u * u / 12.0) * (1.0 - found / 24e6), rel=3e-6)


@pytest.mark.parametrize("given", [True, False])
def test_intervals_cover_the_truth_at_their_stated_rate(given):
    """400 surveys with 2 cm noise: 95 % intervals miss 20 times, within three standard deviations of a binomial, 13."""
    project, rng = level(), np.random.default_rng(11)
    problem = project.to_core()
    x = stations_of(problem, 5)
    exact = elevations(problem, x, 25.0)
    hits, squares, draws = 0, 0.0, 400
    for _ in range(draws):
        noisy = exact + rng.normal(0.0, SIGMA_M, x.size)
        survey = tw.Survey.of(x, noisy, 25.0, sigmas_m=SIGMA_M if given else None)
        pull = project.fit(survey).pull
        hits += pull.low_N <= 17e3 <= pull.high_N
        squares += ((pull.horizontal_tension_N - 17e3) / pull.standard_error_N) ** 2
    assert abs(hits - 0.95 * draws) < 3.0 * math.sqrt(draws * 0.95 * 0.05)
    if given:  # standardised errors are normal: their squares sum to chi-square, of variance 2 each
        assert abs(squares - draws) < 3.0 * math.sqrt(2.0 * draws)


def test_covariances_of_lengths_are_right_together():
    """Errors of three coupled lengths, whitened by their covariances: chi-square with 3 degrees each."""
    problem, rng = route().to_core(), np.random.default_rng(12)
    x = stations_of(problem, 4)
    exact = elevations(problem, x, 25.0)
    core = _core.Project(problem)
    lengths = np.array(core.string()["lengths_m"])
    distances, draws = [], 200
    for _ in range(draws):
        found = core.fit(columns(x, exact + rng.normal(0.0, SIGMA_M, x.size), 25.0, SIGMA_M), unknown="lengths")
        covariance = np.array([each["covariance"] for each in found["unknowns"]])
        error = np.array(found["lengths_m"]) - lengths
        distances.append(error @ np.linalg.solve(covariance, error))
    assert abs(sum(distances) - 3.0 * draws) < 3.0 * math.sqrt(6.0 * draws)
    assert stats.kstest(distances, "chi2", args=(3,)).pvalue > 0.01


def test_good_points_are_seldom_suspected_and_bad_ones_always():
    """A good point is suspected once in 370 times: of 2400 about 6.5, within three roots of it; 25 cm is 12 sigma."""
    project, rng = level(), np.random.default_rng(13)
    problem = project.to_core()
    x = stations_of(problem, 8)
    exact = elevations(problem, x, 25.0)
    suspected = 0
    for draw in range(300):
        noisy = exact + rng.normal(0.0, SIGMA_M, x.size)
        suspected += len(project.fit(tw.Survey.of(x, noisy, 25.0)).suspicious)
        if draw < 20:
            noisy[draw % x.size] += 0.25
            found = project.fit(tw.Survey.of(x, noisy, 25.0))
            assert found.ranked()[0].name == f"point {draw % x.size + 1}"
            assert found.ranked()[0].suspicious
            assert "farther off than three sigma" in found.warnings[0]
    assert abs(suspected - 2400 / 370.4) < 3.0 * math.sqrt(2400 / 370.4)


def test_external_deviations_are_those_of_leaving_a_point_out():
    """r / (s sqrt(1 - h)) with s of the others, against fits that do without the point; linear to 1e-3 of the sag."""
    project, rng = level(), np.random.default_rng(14)
    problem = project.to_core()
    x = stations_of(problem, 6)
    noisy = elevations(problem, x, 25.0) + rng.normal(0.0, SIGMA_M, x.size)
    found = project.fit(tw.Survey.of(x, noisy, 25.0))
    for index, point in enumerate(found.points):
        others = project.fit(tw.Survey.of(np.delete(x, index), np.delete(noisy, index), 25.0))
        predicted = elevations(problem, x[[index]], 25.0, pull=others.pull.horizontal_tension_N)[0]
        # leaving out: the point's residual over its standard deviation, its own and that of the prediction
        up, down = (elevations(problem, x[[index]], 25.0, pull=pull)[0] for pull in (17.1e3, 16.9e3))
        spread = math.hypot(others.standard_deviation_m, (up - down) / 200.0 * others.pull.standard_error_N)
        assert point.deviation == pytest.approx((noisy[index] - predicted) / spread, rel=0.02)


@pytest.mark.parametrize("unknown", ["pull", "lengths"])
def test_mirror_shift_and_scale_change_nothing_but_places(unknown):
    problem, rng = route().to_core(), np.random.default_rng(15)
    x = stations_of(problem, 3)
    measured = elevations(problem, x, 25.0) + rng.normal(0.0, SIGMA_M, x.size)
    found = _core.Project(problem).fit(columns(x, measured, 25.0), unknown=unknown)

    mirrored = {**problem, "supports": [{**s, "station_m": -s["station_m"]} for s in problem["supports"][::-1]]}
    other = _core.Project(mirrored).fit(columns(-x[::-1], measured[::-1], 25.0), unknown=unknown)
    assert other["lengths_m"][::-1] == pytest.approx(found["lengths_m"], rel=1e-12)
    assert other["residuals_m"][::-1] == pytest.approx(found["residuals_m"], abs=1e-9)
    assert other["chi2"] == pytest.approx(found["chi2"], rel=1e-9)

    def up(row):
        return {**row, "station_m": row["station_m"] + 500.0, "elevation_m": row["elevation_m"] - 70.0}

    shifted = {**problem, "supports": [up(row) for row in problem["supports"]]}
    other = _core.Project(shifted).fit(columns(x + 500.0, measured - 70.0, 25.0), unknown=unknown)
    assert other["lengths_m"] == pytest.approx(found["lengths_m"], rel=1e-12)

    order = rng.permutation(x.size)
    other = _core.Project(problem).fit(columns(x[order], measured[order], 25.0), unknown=unknown)
    assert other["lengths_m"] == pytest.approx(found["lengths_m"], rel=1e-12)


def test_feet_and_fahrenheit_give_the_same(tmp_path):
    project = route()
    problem = project.to_core()
    x = stations_of(problem, 2)
    z = elevations(problem, x, 20.0)
    metric, us = tmp_path / "metric.csv", tmp_path / "us.csv"
    rows = zip(x.tolist(), z.tolist(), strict=True)
    metric.write_text("station_m,elevation_m,temperature_degC\n" + "".join(f"{a!r},{b!r},20\n" for a, b in rows))
    rows = zip((x / 0.3048).tolist(), (z / 0.3048).tolist(), strict=True)
    us.write_text("temperature_degF,elevation_ft,station_ft\n" + "".join(f"68,{b!r},{a!r}\n" for a, b in rows))
    one, other = project.fit(metric), project.fit(str(us))
    assert other.pull.horizontal_tension_N == pytest.approx(one.pull.horizontal_tension_N, rel=1e-10)
    assert one.pull.horizontal_tension_N == pytest.approx(9e3, rel=1e-8)
    assert other.temperatures_degC == (20.0,)


def test_a_hundred_times_the_sigma_is_a_hundred_times_the_error():
    project = level()
    x = stations_of(project.to_core(), 4)
    z = elevations(project.to_core(), x, 25.0)
    small, large = (project.fit(tw.Survey.of(x, z, 25.0, sigmas_m=s)) for s in (0.001, 0.1))
    assert large.pull.standard_error_N == pytest.approx(100.0 * small.pull.standard_error_N, rel=1e-9)
    assert small.factor == pytest.approx(1.959964, abs=1e-6)
    assert small.standard_deviation_m is None


def test_half_the_sigma_counts_as_four_points():
    project, rng = level(), np.random.default_rng(19)
    x = stations_of(project.to_core(), 4)
    z = elevations(project.to_core(), x, 25.0) + rng.normal(0.0, SIGMA_M, x.size)
    sure = project.fit(tw.Survey.of(x, z, 25.0, sigmas_m=[0.02, 0.01, 0.02, 0.02]))
    copied = project.fit(tw.Survey.of([*x, *[x[1]] * 3], [*z, *[z[1]] * 3], 25.0, sigmas_m=0.02))
    assert sure.pull.horizontal_tension_N == pytest.approx(copied.pull.horizontal_tension_N, rel=1e-10)
    assert sure.pull.standard_error_N == pytest.approx(copied.pull.standard_error_N, rel=1e-9)
    assert sure.chi2 == pytest.approx(copied.chi2, rel=1e-9)


def test_points_of_several_days_fit_one_line():
    """Each temperature has its own shape; taken for one, they do not fit."""
    project = route()
    problem = project.to_core()
    x = stations_of(problem, 2)
    warm, cold = elevations(problem, x, 40.0), elevations(problem, x, -10.0)
    both = tw.Survey.of([*x, *x], [*warm, *cold], [40.0] * x.size + [-10.0] * x.size)
    found = project.fit(both)
    assert found.pull.horizontal_tension_N == pytest.approx(9e3, rel=1e-8)
    assert found.temperatures_degC == (-10.0, 40.0)
    assert found.rms_m < 1e-8
    assert project.fit(tw.Survey.of([*x, *x], [*warm, *cold], 15.0)).rms_m > 0.1


def test_the_project_as_built_hangs_through_the_points():
    project = route()
    problem = project.to_core()
    x = stations_of(problem, 4)
    found = project.fit(tw.Survey.of(x, elevations(problem, x, 30.0, pull=8e3), 30.0))
    built = found.to_project()
    assert built.stringing.natural_length_m == pytest.approx(found.natural_length_m, rel=1e-15)
    assert built.stringing.tolerance == pytest.approx(0.05)
    assert built.conditions == project.conditions
    again = elevations(built.to_core(), x, 30.0)
    assert again == pytest.approx([point.elevation_m for point in found.points], abs=1e-8)
    assert found.gap_relative < 1e-6
    states = built.settle("hot")
    direct = project.settle("hot", pull=8e3)
    assert states.spans[1].sag_m == pytest.approx(direct.spans[1].sag_m, rel=1e-8)
    assert found.spans[0].horizontal_tension_N == pytest.approx(8e3, rel=1e-7)


def test_a_span_without_points_takes_the_best_pull_and_says_so():
    project = route()
    problem = project.to_core()
    x = np.array([80.0, 115.0, 160.0, 560.0, 620.0])
    found = project.fit(tw.Survey.of(x, elevations(problem, x, 30.0), 30.0), unknown="lengths")
    assert [span.measured for span in found.spans] == [True, False, True]
    assert [span.points for span in found.spans] == [3, 0, 2]
    assert found.spans[1].standard_error_m is None
    assert found.natural_length_m == pytest.approx(_core.Project(problem).string()["lengths_m"], rel=1e-9)
    assert "no points in Knoll to Weir" in found.warnings[0]
    assert found.pull is None


def test_as_many_points_as_unknowns_have_no_interval():
    project = level()
    found = project.fit(tw.Survey.of([150.0], [24.0], 15.0))
    assert found.pull.standard_error_N is None
    assert found.factor is None
    assert found.points[0].residual_m == pytest.approx(0.0, abs=1e-9)
    assert "nothing tells how surely" in found.warnings[0]
    assert found.spans[0].high_m is None
    assert "None" not in repr(found)


def test_sigmas_that_are_too_small_are_found_out():
    project, rng = level(), np.random.default_rng(16)
    x = stations_of(project.to_core(), 8)
    noisy = elevations(project.to_core(), x, 25.0) + rng.normal(0.0, 0.1, x.size)
    found = project.fit(tw.Survey.of(x, noisy, 25.0, sigmas_m=0.01))
    assert any("times as far off as their sigmas say" in warning for warning in found.warnings)
    assert not any("as their sigmas" in w for w in project.fit(tw.Survey.of(x, noisy, 25.0, sigmas_m=0.1)).warnings)


def test_offsets_that_lean_show_the_wind():
    project, rng = level(), np.random.default_rng(17)
    x = stations_of(project.to_core(), 8)
    z = elevations(project.to_core(), x, 25.0)
    blown = project.fit(tw.Survey.of(x, z, 25.0, offsets_m=0.15 + rng.normal(0.0, 0.01, x.size)))
    assert "to the left of the line on average" in blown.warnings[-1]
    still = project.fit(tw.Survey.of(x, z, 25.0, offsets_m=[*rng.normal(0.0, 0.01, x.size - 1), math.nan]))
    assert not any("average" in warning for warning in still.warnings)
    assert still.measurements == 15
    assert still.points[-1].offset_residual_m is None


def test_results_are_whole_records():
    project = route()
    x = stations_of(project.to_core(), 2)
    found = project.fit(tw.Survey.of(x, elevations(project.to_core(), x, 30.0), 30.0))
    assert tw.SurveyFit.from_json(found.to_json()) == found
    assert pickle.loads(pickle.dumps(found)) == found
    assert pickle.loads(pickle.dumps(found)).to_project().stringing == found.to_project().stringing
    assert len(repr(found).splitlines()) <= 12
    assert "<table" in found._repr_html_()
    frame = pytest.importorskip("pandas") and found.to_dataframe()
    assert list(frame["station_m"]) == pytest.approx(list(x))
    for call in (tw.SurveyFit.from_json(found.to_json()).to_project, tw.SurveyFit.from_json(found.to_json()).paste):
        with pytest.raises(TautwiseError, match="fit the survey again"):
            call()


def test_picture_is_drawn():
    plt = pytest.importorskip("matplotlib.pyplot")
    project = route()
    x = stations_of(project.to_core(), 6)
    z = elevations(project.to_core(), x, 30.0) + np.random.default_rng(1).normal(0.0, 0.01, x.size)
    z[3] += 0.3
    found = project.fit(tw.Survey.of(x, z, 30.0))
    axes = found.plot()
    upper, lower = axes.figure.axes
    drawn_line = upper.lines[0].get_xydata()
    assert np.interp(x, *drawn_line.T) == pytest.approx([p.line_elevation_m for p in found.points], abs=0.02)
    assert any(text.get_text() == "point 4" for text in lower.texts)
    plt.close(axes.figure)
    own = plt.subplots()[1]
    assert found.plot(own) is own
    plt.close(own.figure)


def test_ctrl_c_ends_a_fit():
    supports = [{"name": f"P{j}", "station": f"{100 * j} m", "elevation": "30 m"} for j in range(200)]
    for one in supports[1:-1]:
        one |= {"hold": "hanger", "length": "1 m"}
    project = route(support=supports)
    x = stations_of(project.to_core(), 1)
    survey = tw.Survey.of(np.repeat(x, 10), np.full(10 * x.size, 27.9), np.tile(np.arange(10.0), x.size))
    timer = threading.Timer(0.3, os.kill, (os.getpid(), signal.SIGINT))
    timer.start()
    try:
        with pytest.raises(tw.SearchCancelled):
            project.fit(survey, unknown="lengths")
    finally:
        timer.cancel()


def test_a_pull_that_the_points_hardly_show_is_said():
    """Sag of 4 m known to 1 m."""
    project, rng = level(pull="24 kN"), np.random.default_rng(18)
    x = stations_of(project.to_core(), 8)
    noisy = elevations(project.to_core(), x, 25.0) + rng.normal(0.0, 1.0, x.size)
    assert any("% only" in warning for warning in project.fit(tw.Survey.of(x, noisy, 25.0)).warnings)


def test_too_many_spans_are_not_freed_at_once():
    supports = [{"name": f"P{j}", "station": f"{20 * j} m", "elevation": "30 m"} for j in range(303)]
    project = route(support=supports)
    x = stations_of(project.to_core(), 1)
    with pytest.raises(tw.InputError, match="points in 302 spans; expected 300 at most"):
        project.fit(tw.Survey.of(x, np.full(x.size, 29.9), 20.0), unknown="lengths")


def test_limits_of_the_search_are_kept():
    project = route()
    x = stations_of(project.to_core(), 2)
    z = elevations(project.to_core(), x, 30.0) - np.linspace(0.0, 1.0, x.size)
    with pytest.raises(tw.NotSettledError, match="seconds_most") as caught:
        project.fit(tw.Survey.of(x, z, 30.0), seconds_most=1e-9)
    assert caught.value.status == "deadline"
    with pytest.raises(tw.NotSettledError, match="evaluations_most"):
        project.fit(tw.Survey.of(x, z, 30.0), unknown="lengths", evaluations_most=1)


@pytest.mark.parametrize("freedom", [1, 2, 3, 7, 30, 400, 20000])
def test_student_is_that_of_scipy(freedom):
    assert student.quantile(freedom) == pytest.approx(stats.t.ppf(0.975, freedom), rel=1e-10)
    for t in (0.0, 0.3, 1.0, 3.0, 12.0):
        assert student.two_sided(t, freedom) == pytest.approx(2.0 * stats.t.sf(t, freedom), rel=1e-9, abs=1e-14)
    # Wilson and Hilferty: within 0.002 from three degrees of freedom on
    if freedom >= 3:
        for share in (0.5, 0.05, 0.001):
            exceeded = student.chi_square_exceeded(stats.chi2.isf(share, freedom), freedom)
            assert exceeded == pytest.approx(share, abs=0.003)
