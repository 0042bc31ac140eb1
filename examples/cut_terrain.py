"""Cut the ground profile of `ridge_to_ridge.taut.toml` from a real elevation grid.

    python cut_terrain.py [FILE.csv]        default: ridge_to_ridge_ground.csv beside this script

Source: the sample data `jacksboro_fault_dem.npz` that the Matplotlib package ships: 344 x 403 heights in whole metres,
row 0 along the north edge, spacing 1/1200 degree of latitude and of longitude. Its keys `xmin`, `xmax`, `ymin`, `ymax`
are the outer edges of the grid in degrees (`ymin` names the north edge), so the centre of row r and column c lies at

    latitude = ymin - (r + 1/2) dy        longitude = xmin + (c + 1/2) dx

Method: places on the straight line between two grid places, sampled by bilinear interpolation. Degrees become metres
at the line's mean latitude phi with the two radii of curvature of the WGS 84 ellipsoid (a = 6378137 m,
1/f = 298.257223563, e^2 = f (2 - f)):

    metres per degree of latitude  = pi/180  a (1 - e^2) / (1 - e^2 sin^2 phi)^(3/2)
    metres per degree of longitude = pi/180  a cos phi / (1 - e^2 sin^2 phi)^(1/2)

Over the 3 km of the line the change of phi moves a station by less than 0.1 m; the heights themselves are the coarse
part: a grid of about 75 m x 90 m rounds off every crest and gully between its points.
"""

from __future__ import annotations

import csv
import math
import sys
from pathlib import Path
from typing import Any

import numpy as np

GRID = "jacksboro_fault_dem.npz"
FROM = (150.0, 35.0)  # row, column: on the western ridge
TO = (125.0, 62.0)  # on the ground that rises east of the second ridge
STEP_M = 25.0
WGS84_A_M = 6378137.0
WGS84_F = 1.0 / 298.257223563

Place = tuple[float, float]


def metres_per_degree(latitude_deg: float) -> tuple[float, float]:
    """Length of one degree of latitude and of longitude at a latitude, m.

    >>> [round(length, 1) for length in metres_per_degree(0.0)]
    [110574.3, 111319.5]
    """
    phi = math.radians(latitude_deg)
    e2 = WGS84_F * (2.0 - WGS84_F)
    bulge = 1.0 - e2 * math.sin(phi) ** 2
    north = WGS84_A_M * (1.0 - e2) / bulge**1.5
    east = WGS84_A_M * math.cos(phi) / math.sqrt(bulge)
    return math.radians(north), math.radians(east)


def bilinear(heights: np.ndarray, row: float, column: float) -> float:
    """Height at a place between grid points, linear along rows and along columns.

    >>> bilinear(np.array([[0.0, 2.0], [4.0, 6.0]]), 0.5, 0.5)
    3.0
    """
    top, left = math.floor(row), math.floor(column)
    down, right = row - top, column - left
    (a, b), (c, d) = heights[top : top + 2, left : left + 2].astype(float)
    return float((a * (1 - right) + b * right) * (1 - down) + (c * (1 - right) + d * right) * down)


def route_length(grid: Any, start: Place, end: Place) -> float:
    """Plan length of the straight line between two grid places, m."""
    dx, dy = float(grid["dx"]), float(grid["dy"])
    mean_row = 0.5 * (start[0] + end[0])
    north, east = metres_per_degree(float(grid["ymin"]) - (mean_row + 0.5) * dy)
    return math.hypot((end[0] - start[0]) * dy * north, (end[1] - start[1]) * dx * east)


def profile(grid: Any, start: Place = FROM, end: Place = TO, step_m: float = STEP_M) -> list[Place]:
    """Station and elevation, m, every `step_m` along the line."""
    length = route_length(grid, start, end)
    stations = [step_m * number for number in range(math.floor(length / step_m) + 1)]
    rows = []
    for station in stations:
        part = station / length
        row, column = (a + (b - a) * part for a, b in zip(start, end, strict=True))
        rows.append((station, bilinear(grid["elevation"], row, column)))
    return rows


def main(arguments: list[str]) -> None:
    """Write the csv."""
    from matplotlib.cbook import get_sample_data

    target = Path(arguments[0]) if arguments else Path(__file__).with_name("ridge_to_ridge_ground.csv")
    with get_sample_data(GRID) as grid, target.open("w", newline="", encoding="utf-8") as stream:
        writer = csv.writer(stream, lineterminator="\n")
        writer.writerow(["station_m", "elevation_m"])
        writer.writerows([f"{station:.1f}", f"{elevation:.1f}"] for station, elevation in profile(grid))


if __name__ == "__main__":
    main(sys.argv[1:])
