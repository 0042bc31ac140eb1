"""Curved lines for the tests: the published conductor of 26 aluminium and 7 steel wires, and drawn ones. SI."""

from __future__ import annotations

from typing import Any

import core_cases as cases
import numpy as np

LBF, FT, INCH = 4.4482216152605, 0.3048, 0.0254
PSI = LBF / INCH**2
AREA_M2 = 0.7264 * INCH**2
PLF = LBF / FT
PART_EXPANSION = {"core": 6.4e-6 * 1.8, "outer": 12.8e-6 * 1.8}  # per K

# Grigsby (ed.), Electric Power Generation, Transmission, and Distribution, CRC, ch. 14 (SEEN; checks D7): psi on the
# whole area at x percent of strain; final slopes in psi per percent; creep of ten years, the outer's that of the whole
# less the core's.
TEXTBOOK = {
    "core": {"initial": [0.0, 37.15e3], "creep": [0.0, 37.15e3], "final": 38.60e3},
    "outer": {"initial": [-512.0, 4.902e4, -1.18e4, -5.76e4], "creep": [0.0, 16.30e3], "final": 68.95e3},
}
# The fourth-degree fits published for the same conductor with its sag-tension charts (MEM: from memory, no page seen).
CHART = {
    "core": {
        "initial": [-69.3, 38629.0, 3998.1, -45713.0, 27892.0],
        "creep": [47.1, 36211.3, 12201.4, -72392.0, 46338.0],
        "final": 37.0e3,
    },
    "outer": {
        "initial": [-1213.0, 44308.1, -14004.4, -37618.0, 30676.0],
        "creep": [-544.8, 21426.8, -18842.2, 5495.0],
        "final": 64.0e3,
    },
}


def celsius(fahrenheit: float) -> float:
    return (fahrenheit - 32.0) / 1.8


def force_terms(stresses_psi) -> list[float]:
    return [stress * PSI * AREA_M2 * 100.0**power for power, stress in enumerate(stresses_psi)]


def part(row, name) -> dict[str, Any]:
    return {
        "loading_N": force_terms(row["initial"]),
        "creep_N": force_terms(row["creep"]),
        "valid_to": 0.0045,
        "final_stiffness_N": 100.0 * row["final"] * PSI * AREA_M2,
        "expansion_per_K": PART_EXPANSION[name],
    }


def conductor(curves=TEXTBOOK) -> dict[str, Any]:
    line = cases.line(1.094 * PLF, 12e6 * PSI * AREA_M2, diameter=1.108 * INCH, expansion=0.0, strength=31500 * LBF)
    parts = [part(curves[name], name) for name in ("core", "outer")]
    return {**line, "parts": parts, "test_temperature_degC": celsius(70.0)}


def drawn_line(seed) -> dict[str, Any]:
    """A line of one or two parts with curves of the third degree that grow throughout, and creep below them."""
    rng = np.random.default_rng(seed)
    parts = [drawn_part(rng) for _ in range(1 + seed % 2)]
    line = cases.line(float(rng.uniform(5, 20)), 3e7, strength=120e3)
    return {
        **line,
        "parts": parts,
        "test_temperature_degC": float(rng.uniform(10, 30)),
        "bedding_in_strain": float(rng.choice([0.0, 2e-4])),
    }


def drawn_part(rng) -> dict[str, Any]:
    stiffness, end = float(rng.uniform(5e6, 3e7)), float(rng.uniform(2e-3, 5e-3))
    square = -stiffness / end * float(rng.uniform(0.05, 0.3))
    cube = -stiffness / end**2 * float(rng.uniform(0.0, 0.1))
    offset = -stiffness * float(rng.choice([0.0, 1e-4]))
    rest = float(rng.uniform(0.5, 0.95))
    return {
        "loading_N": [offset, stiffness, square, cube],
        "creep_N": [0.0 * offset, rest * (stiffness + square * end + cube * end**2) + offset / end],
        "valid_to": end,
        "final_stiffness_N": stiffness * float(rng.uniform(0.95, 1.2)),
        "expansion_per_K": float(rng.uniform(5e-6, 25e-6)),
    }
