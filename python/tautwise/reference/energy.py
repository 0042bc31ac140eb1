"""Potential energy of a line given by its nodes: three-node elements, plain loops.

P[r] = int W(|r'|) ds - int q.r ds - sum F_i.r(s_i)
"""

from __future__ import annotations

import numpy as np

from .quadrature import Array
from .span import Material


def shape_functions(xi: float) -> Array:
    """Quadratic shape functions of start, middle and end node at -1 <= xi <= 1.

    >>> shape_functions(0.5).tolist()
    [-0.125, 0.75, 0.375]
    """
    return np.array([0.5 * xi * (xi - 1.0), 1.0 - xi * xi, 0.5 * xi * (xi + 1.0)])


def shape_slopes(xi: float) -> Array:
    """Their derivatives in xi.

    >>> shape_slopes(0.5).tolist()
    [0.0, -1.0, 1.0]
    """
    return np.array([xi - 0.5, -2.0 * xi, xi + 0.5])


def element_stored(material: Material, nodes: Array, length_m: float, points: int = 2) -> float:
    """Energy of stretch of one element, J, by so many Gauss points; nodes (3, 3), natural length in m.

    >>> straight = np.array([[0.0, 0, 0], [5.05, 0, 0], [10.1, 0, 0]])
    >>> round(element_stored(Material(1e6), straight, 10.0), 9)
    500.0
    """
    total = 0.0
    for xi, weight in zip(*np.polynomial.legendre.leggauss(points), strict=True):
        stretch = float(np.linalg.norm(shape_slopes(float(xi)) @ nodes)) * 2.0 / length_m
        total += float(weight) * 0.5 * length_m * float(material.stored(np.array(stretch)))
    return total


def element_work(nodes: Array, length_m: float, load: Array) -> float:
    """Work of a uniform load on one element, J: Simpson's rule is exact for a quadratic shape.

    >>> level = np.array([[0.0, 0, 2.0], [5.0, 0, 2.0], [10.0, 0, 2.0]])
    >>> element_work(level, 10.0, np.array([0.0, 0.0, -3.0]))
    -60.0
    """
    return float(load @ (nodes[0] + 4.0 * nodes[1] + nodes[2])) * length_m / 6.0


def potential(material: Material, nodes: Array, lengths_m: Array, loads: Array, points: int = 2) -> float:
    """Potential energy of a line, J; nodes (2 n + 1, 3) in order, n natural lengths, loads (n, 3) in N/m.

    With two points the energy that the solver makes least; with more it tends to that of the shape itself, which
    no line of the same length and ends can undercut.

    >>> nodes = np.array([[0.0, 0, 0], [5.05, 0, -0.1], [10.1, 0, 0]])
    >>> round(potential(Material(1e6), nodes, np.array([10.0]), np.array([[0.0, 0, -30.0]])), 6)
    506.747649
    """
    total = 0.0
    for i, (length, load) in enumerate(zip(lengths_m, loads, strict=True)):
        element = nodes[2 * i : 2 * i + 3]
        total += element_stored(material, element, float(length), points) - element_work(
            element, float(length), load
        )
    return total


def gradient(material: Material, nodes: Array, lengths_m: Array, loads: Array, step_m: float = 1e-5) -> Array:
    """Its slope in each node's place by central differences, N, (2 n + 1, 3): the out-of-balance forces.

    >>> nodes = np.array([[0.0, 0, 0], [5.05, 0, 0], [10.1, 0, 0]])
    >>> gradient(Material(1e6), nodes, np.array([10.0]), np.zeros((1, 3)))[2].round(3).tolist()
    [10000.0, 0.0, 0.0]
    """
    slope = np.zeros_like(nodes)
    for place in np.ndindex(*nodes.shape):
        aside = np.zeros_like(nodes)
        aside[place] = step_m
        above = potential(material, nodes + aside, lengths_m, loads)
        slope[place] = (above - potential(material, nodes - aside, lengths_m, loads)) / (2.0 * step_m)
    return slope
