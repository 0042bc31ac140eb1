"""Warnings about values that can be read but are hardly meant, each with the likely slip."""

from __future__ import annotations

import math
from collections.abc import Iterator
from itertools import pairwise
from typing import TYPE_CHECKING

from tautwise.keylines import Path as KeyPath
from tautwise.limits import SupportLoadLimit, TensionLimit
from tautwise.reader import Document
from tautwise.strict import shown
from tautwise.tables import Condition, Wind
from tautwise.units import STANDARD_GRAVITY_M_PER_S2

if TYPE_CHECKING:
    from tautwise.model import Project

Slip = tuple[KeyPath, str]

DENSITY_KG_PER_M3 = (1_000.0, 20_000.0)
MODULUS_PA = (1e9, 250e9)
FINAL_OVER_INITIAL = (0.3, 4.0)
BREAKING_STRESS_PA = (20e6, 3000e6)
EXPANSION_PER_K = (1e-6, 50e-6)
HOTTEST_DEGC, HOTTEST_WITH_ICE_DEGC = 120.0, 5.0
LEAST_PULL_N = 20.0
LEAST_ALLOWED_N = 100.0
ICE_DIAMETERS_MOST, ICE_MOST_M = 3.0, 0.060
WIND_PRESSURE_MOST_PA, WIND_SPEED_MOST_M_PER_S = 3000.0, 90.0
DRAG = (0.3, 2.5)
FRICTION_MOST = 0.3
FACTOR_MOST = 3.0
ALTITUDE_MOST_M = 5000.0
WIND_AREA_MOST_M2 = 20.0
SPAN_MOST_M, HEIGHT_MOST_M = 5000.0, 400.0
TURN_MOST_DEG = 90.0


def warnings_of(project: Project, document: Document) -> tuple[str, ...]:
    """One line for each value that is hardly meant: file, line, key, why, and what it may have been meant to be."""
    slips = [*_line(project), *_parts(project), *_stringing(project), *_supports(project), *_sheaves(project)]
    slips += [*_crossings(project), *_limits(project), *_history(project)]
    for number, condition in enumerate(project.conditions):
        slips += [((*("condition", number), *path), text) for path, text in _condition(project, condition)]
    return tuple(str(document.fault(path, text)) for path, text in slips)


def _history(project: Project) -> Iterator[Slip]:
    """A history that leaves out a heavier condition: what is permanent is then too little."""
    history = project.history
    if history.conditions is None:
        return
    loads = {condition.name: _per_metre(project, condition) for condition in project.conditions}
    met = max((loads[name] for name in history.conditions if name in loads), default=0.0)
    left = [name for name, load in loads.items() if name not in history.conditions and load > 1.02 * met]
    if left:
        name = max(left, key=lambda each: loads[each])
        text = (
            f'leaves out "{shown(name)}", which loads the line by {loads[name]:.4g} N/m, those listed by {met:.4g} N/m '
            "at most: its permanent stretch is not counted"
        )
        yield ("history", "conditions"), text


def _per_metre(project: Project, condition: Condition) -> float:
    """Weight, ice and wind square across, N for each metre: near enough to compare conditions."""
    diameter, thickness = project.line.diameter_m or 0.0, condition.ice.thickness_m if condition.ice else 0.0
    density = condition.ice.density_kg_per_m3 if condition.ice else 0.0
    ice = math.pi * density * STANDARD_GRAVITY_M_PER_S2 * thickness * (diameter + thickness)
    down = project.line.weight_N_per_m + ice + sum(load.per_length_N_per_m or 0.0 for load in condition.loads)
    pressure = 0.0
    if condition.wind is not None:
        wind = condition.wind
        speed = wind.speed_m_per_s or 0.0
        pressure = wind.drag * (wind.pressure_Pa or 0.5 * wind.air_density_kg_per_m3 * speed**2)
    across = pressure * (diameter + 2.0 * thickness)
    return math.hypot(down, across) + condition.resultant_addition_N_per_m


def _line(project: Project) -> Iterator[Slip]:
    line = project.line
    area = line.area_m2
    if area is None and line.diameter_m is not None:
        area = math.pi / 4 * line.diameter_m**2
    if area is not None:
        yield from _weight(project, area)
        if line.breaking_strength_N is not None:
            stress = line.breaking_strength_N / area
            if not BREAKING_STRESS_PA[0] <= stress <= BREAKING_STRESS_PA[1]:
                text = f"breaks at {_in(stress, 1e6)} MPa over {_in(area, 1e-6)} mm2: N for kN, or lbf for kip?"
                yield ("line", "breaking_strength"), text
    modulus = line.modulus_Pa
    key = "modulus"
    if modulus is None and area is not None and line.given_stiffness_N is not None:
        modulus, key = line.given_stiffness_N / area, "stiffness"
    if modulus is not None and not MODULUS_PA[0] <= modulus <= MODULUS_PA[1]:
        yield ("line", key), f"a modulus of {_in(modulus, 1e9)} GPa: MPa for GPa, psi for ksi, or the wrong area?"
    if line.area_m2 is not None and line.diameter_m is not None:
        solid = math.pi / 4 * line.diameter_m**2
        if line.area_m2 > 1.01 * solid:
            text = f"{_in(line.area_m2, 1e-6)} mm2 do not fit within the diameter, a circle of {_in(solid, 1e-6)} mm2"
            yield ("line", "area"), text
    expansion = line.given_expansion_per_K
    if expansion and not EXPANSION_PER_K[0] <= expansion <= EXPANSION_PER_K[1]:
        yield ("line", "expansion"), f"{expansion:.4g} per K: a power of ten lost, or per degF for per K?"


def _parts(project: Project) -> Iterator[Slip]:
    line = project.line
    for name, part in (("curve", line.curve), ("core", line.core), ("outer", line.outer)):
        if part is None:
            continue
        ratio = part.final_modulus_Pa / (100.0 * part.initial_Pa[1]) if part.initial_Pa[1] > 0.0 else 1.0
        if not FINAL_OVER_INITIAL[0] <= ratio <= FINAL_OVER_INITIAL[1]:
            text = f"{ratio:.3g} times the first slope of initial: psi per percent for psi, or the other way about?"
            yield ("line", name, "final_modulus"), text
        expansion = part.expansion_per_K
        if expansion and not EXPANSION_PER_K[0] <= expansion <= EXPANSION_PER_K[1]:
            text = f"{expansion:.4g} per K: a power of ten lost, or per degF for per K?"
            yield ("line", name, "expansion"), text


def _weight(project: Project, area_m2: float) -> Iterator[Slip]:
    weight, gravity = project.line.weight_N_per_m, STANDARD_GRAVITY_M_PER_S2
    key = "weight" if project.line.given_weight_N_per_m is not None else "mass"
    density = weight / (gravity * area_m2)
    low, high = DENSITY_KG_PER_M3
    if low <= density <= high:
        return
    text = f"{weight:.4g} N/m over {_in(area_m2, 1e-6)} mm2 would be a density of {density:,.0f} kg/m3"
    slips = {
        f'kg/km taken for N/m? then mass = "{weight / 1000:.4g} kg/m"': density * gravity / 1000,
        f'kg/m taken for N/m? then mass = "{weight:.4g} kg/m"': density * gravity,
        f"a factor of 1000? then {weight / 1000:.4g} N/m": density / 1000,
        f'N/m taken for kg/m? then weight = "{weight / gravity:.4g} N/m"': density / gravity,
    }
    likely = [slip for slip, meant in slips.items() if low <= meant <= high]
    yield ("line", key), f"{text}: {likely[0] if likely else 'check the weight and the diameter or area'}"


def _stringing(project: Project) -> Iterator[Slip]:
    stringing = project.stringing
    if stringing.temperature_degC > 60.0:
        text = f"{stringing.temperature_degC:.4g} degC is hot for stringing: degF for degC?"
        yield ("stringing", "temperature"), text
    pulls: dict[KeyPath, float | None] = {("horizontal_tension",): stringing.horizontal_tension_N}
    if stringing.tension is not None:
        pulls = {("tension", "value"): stringing.tension.value_N}
    strength = project.line.breaking_strength_N
    for key, pull in pulls.items():
        if pull is not None and pull < LEAST_PULL_N:
            yield ("stringing", *key), f"a pull of {pull:.4g} N: kN for N?"
        if pull is not None and strength is not None and pull > strength:
            text = f"{_force(pull)} is above the breaking strength, {_force(strength)}: kN for N, or kgf for N?"
            yield ("stringing", *key), text


def _sheaves(project: Project) -> Iterator[Slip]:
    between = [support.hold for support in project.supports[1:-1]]
    if project.stringing.over_sheaves and all(hold == "anchor" for hold in between):
        yield ("stringing", "method"), "there is no support between anchors for the line to run over"
    mus: list[tuple[KeyPath, float]] = [(("stringing", "friction"), project.stringing.friction)]
    for number, support in enumerate(project.supports):
        mus.append((("support", number, "friction"), support.sheave_friction or 0.0))
    for path, mu in mus:
        if mu > FRICTION_MOST:
            yield path, f"a coefficient of {mu:.4g} is that of a rope on a fixed rod: a loss in % for the coefficient?"


def _supports(project: Project) -> Iterator[Slip]:
    for number, (before, after) in enumerate(pairwise(project.supports), start=1):
        span = after.station_m - before.station_m
        if span > SPAN_MOST_M:
            text = f"a span of {span:.4g} m: ft for m, or a zero too many?"
            yield ("support", number, "east" if after.turns else "station"), text
    yield from _turns(project)
    for number, support in enumerate(project.supports):
        if support.wind_area_m2 > WIND_AREA_MOST_M2:
            yield ("support", number, "wind_area"), f"a wind area of {support.wind_area_m2:.4g} m2: cm2 or ft2 for m2?"
        if project.ground is None:
            continue
        key = "height" if support.height_m is not None else "elevation"
        height = project.elevation_m(support) - project.ground.elevation(support.station_m)
        if height < 0.0:
            yield ("support", number, key), f"the support lies {-height:.4g} m below the ground: height for elevation?"
        elif height > HEIGHT_MOST_M:
            text = f"the support lies {height:.4g} m above the ground: ft for m, or an elevation for a height?"
            yield ("support", number, key), text


def _turns(project: Project) -> Iterator[Slip]:
    places = [support.plan_m for support in project.supports]
    for number, (before, at, after) in enumerate(zip(places, places[1:], places[2:], strict=False), start=1):
        turn = math.atan2(after[1] - at[1], after[0] - at[0]) - math.atan2(at[1] - before[1], at[0] - before[0])
        degrees = abs(math.degrees(math.remainder(turn, math.tau)))
        if project.turns and degrees > TURN_MOST_DEG:
            text = f"the route turns by {degrees:.0f} deg here: east and north mixed up, or supports out of order?"
            yield ("support", number, "east"), text


def _crossings(project: Project) -> Iterator[Slip]:
    first, last = project.supports[0].station_m, project.supports[-1].station_m
    for number, crossing in enumerate(project.crossings):
        for key, station in (("from", crossing.from_m), ("to", crossing.to_m)):
            if not first <= station <= last:
                text = f"the crossing lies partly off the route, which runs from {first:.6g} m to {last:.6g} m"
                yield ("crossing", number, key), text


def _limits(project: Project) -> Iterator[Slip]:
    strength = project.line.breaking_strength_N
    for number, limit in enumerate(project.limits):
        if not isinstance(limit, TensionLimit | SupportLoadLimit) or limit.most is None:
            continue
        if limit.most < LEAST_ALLOWED_N:
            yield ("limit", number, "most"), f"{limit.most:.4g} N: kN for N?"
        elif isinstance(limit, TensionLimit) and strength is not None and limit.most > strength:
            text = f"{_force(limit.most)} is above the breaking strength, {_force(strength)}: kN for N, or kgf for N?"
            yield ("limit", number, "most"), text
    for number, support in enumerate(project.supports):
        for key in ("along", "across", "down", "up"):
            capacity = getattr(support.capacity, f"{key}_N")
            if capacity is not None and capacity < LEAST_ALLOWED_N:
                yield ("support", number, "capacity", key), f"{capacity:.4g} N: kN for N?"


def _condition(project: Project, condition: Condition) -> Iterator[Slip]:
    temperature, ice, wind = condition.temperature_degC, condition.ice, condition.wind
    iced = ice is not None and ice.thickness_m > 0.0
    if temperature > HOTTEST_DEGC:
        yield ("temperature",), f"{temperature:.4g} degC: degF for degC?"
    elif iced and temperature > HOTTEST_WITH_ICE_DEGC:
        yield ("temperature",), f'ice at {temperature:.4g} degC: degF for degC? then "{temperature:.4g} degF"'
    if ice is not None and iced:
        diameter = project.line.diameter_m or math.inf
        if ice.thickness_m > ICE_MOST_M or ice.thickness_m > ICE_DIAMETERS_MOST * diameter:
            text = f"{_in(ice.thickness_m, 1e-3)} mm of ice all round: it is the radial thickness, not the diameter"
            yield ("ice", "thickness"), text
        if not 200.0 <= ice.density_kg_per_m3 <= 950.0:
            yield ("ice", "density"), f"{ice.density_kg_per_m3:.4g} kg/m3 is no density of ice or rime"
    for action, factor in condition.factors:
        if factor > FACTOR_MOST:
            yield ("factors", action), f"a load factor of {factor:.4g}: a decimal point lost?"
    if wind is not None:
        yield from _wind(wind)


def _wind(wind: Wind) -> Iterator[Slip]:
    if wind.altitude_m is not None and wind.altitude_m > ALTITUDE_MOST_M:
        yield ("wind", "altitude"), f"an altitude of {wind.altitude_m:.4g} m: ft for m?"
    if wind.pressure_Pa is not None and wind.pressure_Pa > WIND_PRESSURE_MOST_PA:
        yield ("wind", "pressure"), f"{wind.pressure_Pa:.4g} Pa: psf or kPa for Pa, a factor of 1000?"
    if wind.speed_m_per_s is not None and wind.speed_m_per_s > WIND_SPEED_MOST_M_PER_S:
        yield ("wind", "speed"), f"{wind.speed_m_per_s:.4g} m/s: km/h for m/s?"
    if wind.drag and not DRAG[0] <= wind.drag <= DRAG[1]:
        yield ("wind", "drag"), f"a drag coefficient of {wind.drag:.4g}: that of a round line is about 1"


def _force(newtons: float) -> str:
    return f"{newtons:.4g} N" if newtons < 1e3 else f"{newtons / 1e3:.4g} kN"


def _in(value: float, unit: float) -> str:
    return shown(f"{value / unit:.4g}")
