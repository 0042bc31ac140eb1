"""The little statistics that a fit needs: Student's t, the normal law and chi-square, in plain Python.

Sources: the incomplete beta function by its continued fraction, NIST Digital Library of Mathematical Functions 8.17.22,
by Lentz's method; chi-square by E. B. Wilson and M. M. Hilferty, PNAS 17 (1931) 684.
"""

from __future__ import annotations

import math
from statistics import NormalDist

CONFIDENCE = 0.95
THREE_SIGMA = 2.0 * NormalDist().cdf(-3.0)
"""How often a measurement that is well lies more than three standard deviations off, either side: 0.0027."""


def two_sided(t: float, freedom: float) -> float:
    """How often |t| is exceeded by Student's t with so many degrees of freedom; infinity: the normal law.

    I_x(nu/2, 1/2) with x = nu / (nu + t^2).

    >>> round(two_sided(2.228138852, 10), 9), round(two_sided(1.959963985, math.inf), 9)
    (0.05, 0.05)
    """
    if math.isinf(freedom):
        return 2.0 * NormalDist().cdf(-abs(t))
    return incomplete_beta(freedom / (freedom + t * t), 0.5 * freedom, 0.5)


def quantile(freedom: float, confidence: float = CONFIDENCE) -> float:
    """The t that is exceeded, either side, in a share 1 - `confidence`, by bisection to the last digit.

    >>> round(quantile(1), 6), round(quantile(10), 6), round(quantile(math.inf), 6)
    (12.706205, 2.228139, 1.959964)
    """
    if math.isinf(freedom):
        return NormalDist().inv_cdf(0.5 + 0.5 * confidence)
    low, high = 0.0, 1.0
    while two_sided(high, freedom) > 1.0 - confidence:
        high *= 2.0
    for _ in range(200):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if two_sided(middle, freedom) > 1.0 - confidence else (low, middle)
    return high


def incomplete_beta(x: float, a: float, b: float) -> float:
    """The regularised incomplete beta function I_x(a, b), 0 <= x <= 1.

    >>> round(incomplete_beta(0.5, 2.0, 3.0), 12), incomplete_beta(0.0, 2.0, 3.0), incomplete_beta(1.0, 2.0, 3.0)
    (0.6875, 0.0, 1.0)
    """
    if x <= 0.0 or x >= 1.0:
        return 0.0 if x <= 0.0 else 1.0
    if x > (a + 1.0) / (a + b + 2.0):  # there the fraction of the other side converges
        return 1.0 - incomplete_beta(1.0 - x, b, a)
    front = math.exp(math.lgamma(a + b) - math.lgamma(a) - math.lgamma(b) + a * math.log(x) + b * math.log1p(-x))
    return front / (a * _fraction(x, a, b))


def chi_square_exceeded(chi2: float, freedom: float) -> float:
    """About how often chi-square with so many degrees of freedom is exceeded: its cube root is near to normal.

    >>> round(chi_square_exceeded(18.307, 10), 3)
    0.05
    """
    spread = 2.0 / (9.0 * freedom)
    return NormalDist().cdf(-(math.cbrt(chi2 / freedom) - 1.0 + spread) / math.sqrt(spread))


def _fraction(x: float, a: float, b: float) -> float:
    """1 + d1/(1 + d2/(1 + ...)), of DLMF 8.17.22, by Lentz's method."""
    value, c, d = 1.0, 1.0, 0.0
    for n in range(1, 2000):
        m = n // 2
        if n % 2:
            part = -(a + m) * (a + b + m) * x / ((a + 2 * m) * (a + 2 * m + 1))
        else:
            part = m * (b - m) * x / ((a + 2 * m - 1) * (a + 2 * m))
        d = 1.0 / (1.0 + part * d or 1e-300)
        c = 1.0 + part / c or 1e-300
        value *= c * d
        if abs(c * d - 1.0) < 1e-16:
            break
    return value
