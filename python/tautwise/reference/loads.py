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


def iced_diameter(diameter_m: float, thickness_m: float, share: float) -> float:
    """Diameter of the ring of ice, m, of which only a share of the area is left.

    >>> iced_diameter(0.02, 0.01, 1.0), iced_diameter(0.02, 0.01, 0.0)
    (0.04, 0.02)
    """
    whole = (diameter_m + 2.0 * thickness_m) ** 2 - diameter_m**2
    return math.sqrt(diameter_m**2 + share * whole)


def air_density(altitude_m: float, temperature_degC: float) -> float:
    """Density of air, kg/m3, at a temperature and the standard atmosphere's pressure at an altitude (ISO 2533).

    >>> round(air_density(0.0, 15.0), 5), round(air_density(2000.0, 2.0), 3)
    (1.225, 1.006)
    """
    pressure = 101325.0 * (1.0 - 2.25577e-5 * altitude_m) ** 5.25588
    return float(pressure / (287.05287 * (temperature_degC + 273.15)))


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
        density = condition.get("air_density_kg_per_m3", 1.225)
        if condition.get("wind_altitude_m") is not None:
            density = air_density(condition["wind_altitude_m"], condition["temperature_degC"])
        return wind_pressure(density, condition["wind_speed_m_per_s"])
    return 0.0


def wind_angle(condition: Mapping[str, Any], along: Array) -> float:
    """Angle from a plan direction to where the wind blows, rad, anticlockwise from above.

    A bearing is where it blows from, clockwise from north; x is east and y north.

    >>> west = {"wind_bearing_rad": 1.5 * math.pi}
    >>> round(wind_angle(west, np.array([0.0, 1.0])), 6), round(wind_angle(west, np.array([1.0, 0.0])), 6)
    (-1.570796, 0.0)
    """
    if condition.get("wind_bearing_rad") is None:
        return float(condition.get("wind_angle_rad", 0.5 * math.pi))
    towards = -np.array([math.sin(condition["wind_bearing_rad"]), math.cos(condition["wind_bearing_rad"])])
    turn = math.atan2(towards[1], towards[0]) - math.atan2(along[1], along[0])
    return math.remainder(turn, 2.0 * math.pi) + 0.0


def basic(
    line: Mapping[str, Any],
    condition: Mapping[str, Any],
    with_addition: bool = True,
    span: int = 0,
    along: Array | None = None,
) -> Array:
    """Weight, ice and wind of a condition on a span, in its frame (along, to the left, up), N/m, each times its factor.

    The constant that some codes add to the resultant makes the vector longer and keeps its direction.

    >>> line = {"diameter_m": 0.02, "weight_N_per_m": 9.0}
    >>> gale = {"wind_pressure_Pa": 600.0, "resultant_addition_N_per_m": 3.0}
    >>> basic(line, gale).round(9).tolist(), basic(line, gale, with_addition=False).round(9).tolist()
    ([0.0, 14.4, -10.8], [0.0, 12.0, -9.0])
    """
    diameter, thickness = float(line.get("diameter_m", 0.0)), float(condition.get("ice_thickness_m", 0.0))
    shares = condition.get("ice_share")
    share = 1.0 if shares is None else float(shares[span])
    sleeve = share * ice(diameter, thickness, condition.get("ice_density_kg_per_m3", 900.0))
    down = condition.get("factor_weight", 1.0) * line["weight_N_per_m"] + condition.get("factor_ice", 1.0) * sleeve
    across = condition.get("factor_wind", 1.0) * wind(
        pressure_of(condition),
        condition.get("wind_drag", 1.0),
        iced_diameter(diameter, thickness, share),
        wind_angle(condition, np.array([1.0, 0.0]) if along is None else along),
    )
    load = np.array([0.0, across, -down])
    resultant = float(np.linalg.norm(load))
    if with_addition and resultant > 0.0:
        load *= (resultant + condition.get("resultant_addition_N_per_m", 0.0)) / resultant
    return load


def at_hanger(condition: Mapping[str, Any], weight_N: float, wind_area_m2: float, along: Array) -> Array:
    """Half of a hanger's weight and of the wind on its string, in the wind's own direction, in the frame of `along`, N.

    >>> gale = {"wind_pressure_Pa": 500.0, "wind_angle_rad": math.pi}
    >>> at_hanger(gale, 600.0, 0.4, np.array([1.0, 0.0])).round(9).tolist()
    [-100.0, 0.0, -300.0]
    """
    angle = wind_angle(condition, along)
    push = 0.5 * condition.get("factor_wind", 1.0) * pressure_of(condition) * wind_area_m2
    return np.array(
        [push * math.cos(angle), push * math.sin(angle), -0.5 * condition.get("factor_weight", 1.0) * weight_N]
    )
