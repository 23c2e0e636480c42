"""Gauss-Legendre nodes and weights."""

from __future__ import annotations

import numpy as np

from tankcalc.geometry.body import Array


def gauss_legendre(order: int) -> tuple[Array, Array]:
    """Return nodes from -1 to 1, ascending, and weights.

    Parameters
    ----------
    order : int
        Number of nodes.

    Returns
    -------
    tuple of ndarray, shape (order,)
        Exact for polynomials up to the degree ``2 order - 1``.

    Notes
    -----
    Newton's method on the Legendre polynomial by its recurrence; `numpy.polynomial` has the
    same, but loading it and its eigenvalues would take longer than all else in this package.

    References
    ----------
    Abramowitz & Stegun, Handbook of Mathematical Functions (1964), 25.4.29 and 22.7.10.

    Examples
    --------
    >>> nodes, weights = gauss_legendre(3)
    >>> (nodes**2 * 5.0).round(12).tolist(), (weights * 9.0).round(12).tolist()
    ([3.0, 0.0, 3.0], [5.0, 8.0, 5.0])
    """
    x = -np.cos(np.pi * (np.arange(order) + 0.75) / (order + 0.5))
    for _ in range(5):
        lower, value = np.ones_like(x), x
        for n in range(1, order):
            lower, value = value, ((2 * n + 1) * x * value - n * lower) / (n + 1)
        slope = order * (lower - x * value) / ((1.0 - x) * (1.0 + x))
        x = x - value / slope
    return x, 2.0 / ((1.0 - x) * (1.0 + x) * slope * slope)
