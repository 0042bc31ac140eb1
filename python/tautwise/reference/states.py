"""What can be read off a settled section, under the same keys as the solver's results."""

from __future__ import annotations

import math

import numpy as np

from .quadrature import Array, Growing, golden, load_at
from .section import Settled
from .span import Hung

UP = np.array([0.0, 0.0, 1.0])


def chord_of(settled: Settled, span: int) -> Array:
    """Far clamp less near clamp, m."""
    return np.asarray(settled.clamps[span + 1] - settled.clamps[span])


def below_chord(chord: Array) -> Array:
    """Direction d with d.r = vertical distance of r below a chord that starts at the origin.

    >>> below_chord(np.array([10.0, 0.0, 5.0])).tolist()
    [0.5, 0.0, -1.0]
    """
    run = math.hypot(chord[0], chord[1])
    return np.array([chord[0] * chord[2] / run**2, chord[1] * chord[2] / run**2, -1.0])


def along_load(chord: Array, load: Array) -> Array:
    """Direction d with d.r = distance of r from the chord, measured along the load: r = chord part + (d.r) load/|load|.

    >>> along_load(np.array([10.0, 0.0, 0.0]), np.array([0.0, 3.0, -4.0])).round(12).tolist()
    [0.0, 0.6, -0.8]
    """
    size = float(np.linalg.norm(load))
    if size == 0.0 or float(np.linalg.norm(np.cross(chord, load))) == 0.0:
        return np.zeros(3)
    basis = np.array([chord, load / size, np.cross(chord, load)])
    return np.asarray(np.linalg.solve(basis, np.array([0.0, 1.0, 0.0])))


def total_load(hung: Hung) -> Array:
    """Sum of the loads between a span's ends, N."""
    return np.asarray(hung.pull - hung.end_tension())


def tension_max(hung: Hung) -> float:
    """Greatest tension of a span, N: |t| is convex along a piece, so it sits at one of the piece's ends.

    Under a growing load it need not: samples, then golden section.
    """
    starts = [tension for _, tension, _ in hung.starts()]
    ends = [tension - piece.load * piece.length_m for _, tension, piece in hung.starts()]
    most = max(float(np.linalg.norm(tension)) for tension in starts + ends)
    for _, tension, piece in hung.starts():
        if isinstance(piece.load, Growing):
            places = np.linspace(0.0, piece.length_m, 257)
            sizes = [float(np.linalg.norm(tension - piece.load * s)) for s in places]
            peak = int(np.argmax(sizes))
            near, far = places[max(peak - 1, 0)], places[min(peak + 1, 256)]
            refined = golden(
                lambda s, t=tension, q=piece.load: float(np.linalg.norm(t - q * s)),  # type: ignore[misc]
                float(near),
                float(far),
            )
            most = max(most, sizes[peak], refined[1])
    return most


def sag_of(settled: Settled, span: int) -> float:
    """Greatest vertical distance from the chord down to the line, m."""
    return max(0.0, settled.spans[span].extreme(below_chord(chord_of(settled, span)))[0])


def horizontal_tension(settled: Settled, span: int) -> float:
    """Tension along the plan direction of the span, N."""
    chord = chord_of(settled, span)
    return float(settled.spans[span].pull[:2] @ chord[:2]) / math.hypot(chord[0], chord[1])


def slope_max(hung: Hung) -> float:
    """Greatest |dz| over plan distance along the span: samples of each piece, then golden section."""

    def slope(tension: Array) -> float:
        return abs(float(tension[2])) / math.hypot(tension[0], tension[1])

    most = 0.0
    for _, tension, piece in hung.starts():
        places = np.linspace(0.0, piece.length_m, 257)
        slopes = [slope(tension - piece.load * s) for s in places]
        peak = int(np.argmax(slopes))
        near, far = places[max(peak - 1, 0)], places[min(peak + 1, 256)]
        refined = golden(lambda s, t=tension, q=piece.load: slope(t - q * s), float(near), float(far))  # type: ignore[misc]
        most = max(most, slopes[peak], refined[1])
    return most


def small_deflection_sag(hung: Hung, span_m: float, rise_m: float, horizontal_N: float) -> float:
    """Greatest sag of a taut string of constant tension under the same loads, m.

    The load per natural metre is taken per metre of chord. v(x) = 1/H int G(x, y) q(y) dy with Green's function
    G = min(x, y) (L - max(x, y)) / L of -v'' = q/H.
    """
    scale, slant = span_m / hung.length_m, math.hypot(span_m, rise_m) / span_m
    distributed, points, x = [], [], 0.0
    for piece in hung.pieces:
        length = piece.length_m * scale
        ends = [-float(load_at(piece.load, s)[2]) * slant for s in (0.0, piece.length_m)]
        distributed.append((x, x + length, *ends))
        points.append((x + length, -float(piece.force[2])))
        x += length

    def green(x: float, y: float) -> float:
        return min(x, y) * (span_m - max(x, y)) / span_m

    def integral(x: float, a: float, b: float, qa: float, qb: float) -> float:
        """int G q dy between a and b: a product of two lines on either side of x, for Simpson's rule."""

        def product(y: float) -> float:
            return green(x, y) * (qa + (qb - qa) * (y - a) / (b - a))

        turn = min(b, max(a, x))
        return sum(
            (high - low) / 6.0 * (product(low) + 4.0 * product(0.5 * (low + high)) + product(high))
            for low, high in ((a, turn), (turn, b))
            if high > low
        )

    def sag(x: float) -> float:
        spread = sum(integral(x, a, b, qa, qb) for a, b, qa, qb in distributed)
        return (spread + sum(force * green(x, y) for y, force in points)) / horizontal_N

    candidates = [sag(y) for y, _ in points] + [golden(sag, a, b)[1] for a, b, _, _ in distributed]
    return max(0.0, *candidates)


def span_state(settled: Settled, span: int) -> dict[str, float]:
    """One span, keys and units as in the results of the solver."""
    hung, chord, start = settled.spans[span], chord_of(settled, span), settled.clamps[span]
    run = math.hypot(chord[0], chord[1])
    along = np.array([chord[0], chord[1], 0.0]) / run
    left = np.array([-along[1], along[0], 0.0])
    sag_at = hung.extreme(below_chord(chord))[1]
    low, low_at = hung.extreme(-UP)
    horizontal = horizontal_tension(settled, span)
    return {
        "span_m": run,
        "rise_m": float(chord[2]),
        "natural_length_m": hung.length_m,
        "line_length_m": hung.line_length_m(),
        "horizontal_tension_N": horizontal,
        "tension_from_N": float(np.linalg.norm(hung.pull)),
        "tension_to_N": float(np.linalg.norm(hung.end_tension())),
        "tension_max_N": tension_max(hung),
        "sag_m": sag_of(settled, span),
        "sag_station_m": settled.station(span, start + hung.position_at(sag_at)),
        "slant_sag_m": max(0.0, hung.extreme(along_load(chord, total_load(hung)))[0]),
        "blowout_m": max(0.0, hung.extreme(left)[0], hung.extreme(-left)[0]),
        "low_station_m": settled.station(span, start + hung.position_at(low_at)),
        "low_elevation_m": float(start[2]) - low,
        "slope_max": slope_max(hung),
        "small_deflection_sag_m": small_deflection_sag(hung, run, float(chord[2]), horizontal),
    }


def support_state(settled: Settled, support: int) -> dict[str, float]:
    """Force of line and hold on a support in its axes, N, and the angles of a hanger from the vertical, else NaN."""
    at, links = settled.section.supports[support], settled.section.link_loads
    force = at.axes @ (settled.hold_forces[support] - (0.0 if links is None else links[support]))
    swing = [math.nan] * 3
    if at.hangs:
        x, y, z = at.axes @ (settled.clamps[support] - at.place)
        swing = [math.atan2(math.hypot(x, y), -z), math.atan2(x, -z), math.atan2(y, -z)]
    route = settled.section.route
    return {
        "along_N": -float(force[0]),
        "across_N": -float(force[1]),
        "down_N": float(force[2]),
        "resultant_N": float(np.linalg.norm(force)),
        "swing_rad": swing[0],
        "swing_along_rad": swing[1],
        "swing_across_rad": swing[2],
        "station_m": float(at.place[0]) if route is None else route.support_station(support),
    }
