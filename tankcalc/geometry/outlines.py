"""Side views as closed polygons: x to the right, z up, metres."""

from __future__ import annotations

import numpy as np

from tankcalc.geometry.body import Array


def closed(points: Array) -> Array:
    """Return a polygon that ends where it begins, without doubled corners.

    Examples
    --------
    >>> closed(np.array([[0.0, 0.0], [1.0, 0.0], [1.0, 0.0], [1.0, 1.0]])).tolist()
    [[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 0.0]]
    """
    ring = np.concatenate([points, points[:1]])
    moved = np.any(np.diff(ring, axis=0) != 0.0, axis=1)
    polygon: Array = ring[np.concatenate([[True], moved])]
    return polygon


def turned(profile: Array) -> Array:
    """Return the side view of what a profile makes, turning round the upright axis x = 0.

    Parameters
    ----------
    profile : ndarray, shape (n, 2)
        Elevation and radius, m, from the bottom up.

    Returns
    -------
    ndarray, shape (m, 2)
        Closed polygon of (x, z), m.
    """
    right = profile[:, ::-1]
    left = right[::-1] * [-1.0, 1.0]
    return closed(np.concatenate([right, left]))
