"""What a condition puts on a metre of line."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

import numpy as np

from .quadrature import Array

GRAVITY = 9.80665
"""m/s2, standard gravity (ISO 80000-3)."""


def weight(mass_kg_per_m: float) -> float:
    """Weight per metre, N/m, of a mass per metre.

    >>> round(weight(1.0), 5)
    9.80665
    """
    return mass_kg_per_m * GRAVITY


def ice(diameter_m: float, thickness_m: float, density_kg_per_m3: float) -> float:
    """Weight of radial ice, N/m: the area between two circles, times density and gravity.

    >>> round(ice(0.02, 0.01, 900.0), 6)
    8.318295
    """
    outer, inner = 0.5 * diameter_m + thickness_m, 0.5 * diameter_m
    return math.pi * (outer**2 - inner**2) * density_kg_per_m3 * GRAVITY


def wind_pressure(air_density_kg_per_m3: float, speed_m_per_s: float) -> float:
    """Pressure of wind at rest on a surface, Pa: rho v^2 / 2 (Bernoulli).

    >>> wind_pressure(1.25, 20.0)
    250.0
    """
    return 0.5 * air_density_kg_per_m3 * speed_m_per_s**2


def wind(pressure_Pa: float, drag: float, iced_diameter_m: float, angle_rad: float) -> float:
    """Wind across the line, N/m, positive to the left: p C d sin^2, with the sign of the sine.

    The angle runs from the span's plan direction, anticlockwise from above. Method: cross-flow principle
    (IEC 60826, 6.2.6).

    >>> round(wind(400.0, 1.0, 0.03, math.pi / 2), 12), round(wind(400.0, 1.0, 0.03, -math.pi / 6), 12)
    (12.0, -3.0)
    """
    return math.copysign(pressure_Pa * drag * iced_diameter_m * math.sin(angle_rad) ** 2, math.sin(angle_rad))


def pressure_of(condition: Mapping[str, Any]) -> float:
    """Wind pressure of a condition, Pa: as given, or from its speed; 0 without wind.

    >>> pressure_of({"wind_speed_m_per_s": 20.0, "air_density_kg_per_m3": 1.25}), pressure_of({})
    (250.0, 0.0)
    """
    if condition.get("wind_pressure_Pa") is not None:
        return float(condition["wind_pressure_Pa"])
    if condition.get("wind_speed_m_per_s") is not None:
        return wind_pressure(condition.get("air_density_kg_per_m3", 1.225), condition["wind_speed_m_per_s"])
    return 0.0


def basic(line: Mapping[str, Any], condition: Mapping[str, Any], with_addition: bool = True) -> Array:
    """Weight, ice and wind of a condition in the span's frame (along, to the left, up), N/m.

    The constant that some codes add to the resultant makes the vector longer and keeps its direction.

    >>> line = {"diameter_m": 0.02, "weight_N_per_m": 9.0}
    >>> gale = {"wind_pressure_Pa": 600.0, "resultant_addition_N_per_m": 3.0}
    >>> basic(line, gale).round(9).tolist(), basic(line, gale, with_addition=False).round(9).tolist()
    ([0.0, 14.4, -10.8], [0.0, 12.0, -9.0])
    """
    diameter, thickness = float(line.get("diameter_m", 0.0)), float(condition.get("ice_thickness_m", 0.0))
    down = line["weight_N_per_m"] + ice(diameter, thickness, condition.get("ice_density_kg_per_m3", 900.0))
    across = wind(
        pressure_of(condition),
        condition.get("wind_drag", 1.0),
        diameter + 2.0 * thickness,
        condition.get("wind_angle_rad", 0.5 * math.pi),
    )
    load = np.array([0.0, across, -down])
    resultant = float(np.linalg.norm(load))
    if with_addition and resultant > 0.0:
        load *= (resultant + condition.get("resultant_addition_N_per_m", 0.0)) / resultant
    return load
