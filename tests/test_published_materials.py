"""A published sag-tension calculation, from one description of the conductor and its history (checks D2, D5 to D7).

Source: Grigsby (ed.), Electric Power Generation, Transmission, and Distribution, CRC, ch. 14, table 14.5: 700 ft level
span of 795 kcmil 26/7, 6,300 lb at 60 degF initial. "Tension" is the mean of the horizontal and the support tension
there. The final column is SEEN, the initial column MEM (from memory; its rows agree with their sags by w L^2 / (8 T)).
"""

from __future__ import annotations

import copy

import core_cases as cases
import material_cases as material
import numpy as np
import pytest
from material_cases import FT, LBF, PLF, celsius

from tautwise import _core

SPAN_FT, BARE_PLF, EVERYDAY_LBF = 700.0, 1.094, 6300.0
LOADS = ((0, 2.509), (32, 2.094), *((t, BARE_PLF) for t in (-20, 0, 30, 60, 90, 120, 167, 212)))  # degF, lbf/ft
INITIAL_LBF = (11361, 9643, 8824, 8115, 7142, 6300, 5596, 5020, 4326, 3837)
INITIAL_SAG_FT = (13.55, 13.33, 7.60, 8.26, 9.39, 10.65, 11.99, 13.37, 15.53, 17.52)
FINAL_LBF = (11318, 9224, 8161, 7301, 6242, 5429, 4809, 4330, 3960, 3728)
FINAL_SAG_FT = (13.61, 13.93, 8.22, 9.19, 10.75, 12.36, 13.96, 15.52, 16.97, 18.04)
EVERYDAY = len(LOADS) - 5


def problem(line, pull_N=EVERYDAY_LBF * LBF):
    """Every row as strung, then every row after the history of all of them, ten years of creep at 60 degF among it."""
    conditions = []
    for state in ("initial", "after creep"):
        for degF, plf in LOADS:
            loads = [cases.spread_load((0.0, 0.0, -(plf - BARE_PLF) * PLF), frame="route")] if plf > BARE_PLF else []
            conditions.append(cases.condition(temperature_degC=celsius(degF), state=state, loads=loads))
    supports = [cases.support(0.0, 0.0), cases.support(SPAN_FT * FT, 0.0)]
    rule = {**cases.rule("pull", pull_N), "temperature_degC": celsius(60.0)}
    found = cases.problem(supports, rule, of=line, conditions=conditions)
    return {**found, "history": {"met": [True] * len(LOADS) + [False] * len(LOADS), "creep_condition": EVERYDAY}}


def mean_tension_lbf(span):
    return 0.5 * (span["horizontal_tension_N"] + span["tension_from_N"]) / LBF


def columns(line):
    """Tensions (lbf) and sags (ft), initial and final, strung so that the mean tension at 60 degF is as published."""
    pull = EVERYDAY_LBF * LBF
    for _ in range(6):
        core = _core.Project(problem(line, pull))
        pull *= EVERYDAY_LBF / mean_tension_lbf(core.settle(EVERYDAY)["spans"][0])
    spans = []
    for c in range(2 * len(LOADS)):
        found = core.settle(c)
        assert found["status"] == "ok"
        spans.append(found["spans"][0])
    return np.array([mean_tension_lbf(s) for s in spans]), np.array([s["sag_m"] / FT for s in spans])


def compared(line, capsys, title):
    """Off the published tensions, per cent, initial and final; printed beside them."""
    tension, sag = columns(line)
    published = np.array(INITIAL_LBF + FINAL_LBF)
    off = 100.0 * (tension / published - 1.0)
    n = len(LOADS)
    with capsys.disabled():
        print(f"\n{title}")
        print("  degF  lbf/ft | initial lbf: published computed  off % | final lbf: published computed  off %")
        for i, (degF, plf) in enumerate(LOADS):
            first = f"{INITIAL_LBF[i]:22d} {tension[i]:8.0f} {off[i]:+6.2f}"
            print(f"  {degF:4d}  {plf:6.3f} | {first} | {FINAL_LBF[i]:20d} {tension[n + i]:8.0f} {off[n + i]:+6.2f}")
        worst = int(np.argmax(np.abs(off)))
        print(f"  worst {off[worst]:+.2f} % ({'initial' if worst < n else 'final'}, {LOADS[worst % n][0]} degF)")
    return off[:n], off[n:], sag


def test_both_columns_from_one_description(capsys):
    """With the fits of the conductor's own charts (MEM) every tension is within 0.3 % of the published, aim 1.5 %."""
    initial, final, sag = compared(material.conductor(material.CHART), capsys, "fourth-degree fits (MEM)")
    assert np.abs(initial).max() < 0.3
    assert np.abs(final).max() < 0.3
    np.testing.assert_allclose(sag[: len(LOADS)], INITIAL_SAG_FT, atol=0.04)
    np.testing.assert_allclose(sag[len(LOADS) :], FINAL_SAG_FT, atol=0.04)


def test_the_curves_of_the_text_miss_its_own_table(capsys):
    """With the curves printed in the same chapter (D7, SEEN) the initial column is off by 1.9 %, the final by 4 %.

    They are those of a general figure, stiffer at everyday stress (7.9e6 psi, where the rows from 60 to 0 degF ask for
    7.3e6) and creeping further (53.45e3 psi per percent, where its final row at 60 degF asks for about 57e3). Test
    temperatures from 60 to 75 degF and the heaviest load without creep were tried: neither brings both columns within
    1.5 %. The inverse fit X(Y) is stiffer still there (8.2e6 psi).
    """
    initial, final, _ = compared(material.conductor(), capsys, "curves of the text (D7)")
    assert np.abs(initial).max() < 2.0
    assert np.abs(final).max() < 4.0


def strung_to(line, row, wanted_lbf):
    """A line strung so that one row has a mean tension."""
    given = problem(line, wanted_lbf * LBF)
    given["stringing"]["temperature_degC"] = celsius(LOADS[row][0])
    for _ in range(6):
        core = _core.Project(given)
        given["stringing"]["value"] *= wanted_lbf / mean_tension_lbf(core.settle(row)["spans"][0])
    return _core.Project(given)


def test_the_final_column_moves_as_one_elastic_line_below_the_knee():
    """D5: from the bare row at 0 degF with 10.755e6 psi and 1.0503e-5 per degF; 1.5 % allowed."""
    linear = cases.line(BARE_PLF * PLF, 10.755e6 * material.PSI * material.AREA_M2, expansion=1.0503e-5 * 1.8)
    core = strung_to(linear, 3, FINAL_LBF[3])
    off = [mean_tension_lbf(core.settle(row)["spans"][0]) / FINAL_LBF[row] - 1.0 for row in range(8)]
    assert max(map(abs, off)) < 0.015, off


def test_above_the_knee_the_core_carries_alone():
    """D6: 3.86e6 psi on the whole area, 6.4e-6 per degF: from 167 to 212 degF, 3,728 lb published, 0.2 %.

    Our two parts do the same once the outer is slack; strains count from another natural length there, 1e-3 off, which
    is 1e-3 of the change of 5 %.
    """
    steel = cases.line(BARE_PLF * PLF, 3.86e6 * material.PSI * material.AREA_M2, expansion=6.4e-6 * 1.8)
    hot = strung_to(steel, 8, FINAL_LBF[8]).settle(9)["spans"][0]
    assert mean_tension_lbf(hot) == pytest.approx(3728, rel=2e-3)
    core = _core.Project(problem(material.conductor()))
    both = [mean_tension_lbf(core.settle(len(LOADS) + row)["spans"][0]) for row in (8, 9)]
    alone = strung_to(steel, 8, both[0]).settle(9)["spans"][0]
    assert both[1] == pytest.approx(mean_tension_lbf(alone), rel=1e-4)


def test_the_components_add_up_exactly():
    """D7: initial and final composite are the sums of their parts."""
    core, outer = material.TEXTBOOK["core"], material.TEXTBOOK["outer"]
    assert core["initial"][1] + outer["initial"][1] == pytest.approx(8.617e4, rel=1e-15)
    assert core["final"] + outer["final"] == pytest.approx(107.55e3, rel=1e-15)
    assert core["creep"][1] + outer["creep"][1] == pytest.approx(53.45e3, rel=1e-15)


def test_the_two_fits_of_the_text_invert_each_other():
    """D7: X(Y) and Y(X) round trip within 0.4 % at 10, 20 and 30 ksi, 0.5 % in between (16 ksi); 1.9 % at 5 ksi."""
    strain = np.polynomial.Polynomial([4.07e-3, 1.28e-5, -1.18e-10, 5.64e-15])
    stress = np.polynomial.Polynomial([-512.0, 8.617e4, -1.18e4, -5.76e4])
    assert np.abs(stress(strain(ends := np.array([10e3, 20e3, 30e3]))) / ends - 1.0).max() < 0.004
    between = np.arange(10e3, 30.1e3, 1e3)
    assert np.abs(stress(strain(between)) / between - 1.0).max() < 0.005
    assert abs(stress(strain(5e3)) / 5e3 - 1.0) == pytest.approx(0.019, abs=0.001)


def test_the_law_that_settles_is_the_published_one():
    """Level and almost without weight, a line strung to T is longer than its natural length by X with Y(X) = T/A."""
    line = material.conductor()
    line["weight_N_per_m"] = 1e-6
    line["parts"] = [copy.copy(part) | {"expansion_per_K": 0.0} for part in line["parts"]]
    for psi in (5e3, 10e3, 20e3, 30e3):
        given = problem(line, psi * material.PSI * material.AREA_M2)
        lengths = _core.Project(given).string()["lengths_m"]
        percent = 100.0 * (SPAN_FT * FT / lengths[0] - 1.0)
        composite = np.polynomial.Polynomial([-512.0, 8.617e4, -1.18e4, -5.76e4])
        assert composite(percent) == pytest.approx(psi, rel=1e-9)
