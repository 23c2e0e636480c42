"""Rectangular tanks, with a level or a falling floor."""

from __future__ import annotations

import numpy as np

from tankcalc.geometry.dimensions import at_most, length, length_or_zero
from tankcalc.geometry.outlines import closed
from tankcalc.geometry.polynomial import PiecewisePolynomial, Slab
from tankcalc.geometry.vessel import Vessel


def box(length_m: float, width_m: float, height_m: float, floor_fall_m: float = 0.0) -> Vessel:
    """Return a rectangular vessel.

    Parameters
    ----------
    length_m, width_m, height_m : float
        Inside dimensions, m; the height from the lowest point, which is elevation 0.
    floor_fall_m : float
        How much the floor rises along the length, m; from 0 to the height.

    Returns
    -------
    Vessel
        In closed form; while the floor is partly dry, A = length width h / floor_fall.

    Raises
    ------
    GeometryError
        An impossible dimension (keys "length", "width", "height", "floor_fall").

    Examples
    --------
    >>> box(4.0, 2.0, 3.0, floor_fall_m=0.5).capacity
    22.0
    """
    plan = length("length", length_m) * length("width", width_m)
    height = length("height", height_m)
    fall = length_or_zero("floor_fall", floor_fall_m)
    at_most("floor_fall", fall, height, "the height")
    slabs = []
    if fall > 0.0:
        slabs.append(Slab(0.0, fall, 0.0, plan / fall))
    if fall < height:
        slabs.append(Slab(fall, height, plan))
    corners = [[0.0, 0.0], [length_m, fall], [length_m, height], [0.0, height]]
    return Vessel("box", PiecewisePolynomial.of(slabs), closed(np.array(corners)))
