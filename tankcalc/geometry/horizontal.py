"""Lying cylinders with heads, level or tilted."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from tankcalc.errors import GeometryError
from tankcalc.geometry.body import Array, Assembly, Body
from tankcalc.geometry.circle import Prism
from tankcalc.geometry.dimensions import length
from tankcalc.geometry.ends import EllipsoidalEnd, End, FlatEnd, HemisphericalEnd
from tankcalc.geometry.lying import Lying
from tankcalc.geometry.meridian import Arc, Line, Piece, depth_of, points_of, profile
from tankcalc.geometry.outlines import closed
from tankcalc.geometry.polynomial import PiecewisePolynomial, Slab
from tankcalc.geometry.vessel import Vessel

LEAST_SLOPE = 1e-15
"""A slope below it moves no digit of any elevation."""


def horizontal_cylinder(
    diameter_m: float,
    length_m: float,
    left: End,
    right: End,
    slope: float = 0.0,
    dip_at_m: float | None = None,
) -> Vessel:
    """Return a lying cylindrical vessel.

    Parameters
    ----------
    diameter_m, length_m : float
        Inside diameter, and length of the straight shell between the heads, m.
    left, right : End
        The heads; any but a slope. The apex of a cone points away from the vessel.
    slope : float
        Rise over shell length (the sine of the tilt), positive when the right end is higher.
    dip_at_m : float or None
        Distance of the dip point from the left end of the straight shell, m; None: the middle.
        Elevation 0 is the inside bottom of the shell there.

    Returns
    -------
    Vessel
        From the lowest to the highest inside point, heads included.

    Raises
    ------
    GeometryError
        An impossible dimension (keys "diameter", "length", "slope", "dip_at", "left.depth", ...).

    Notes
    -----
    Closed forms for a level vessel with flat, hemispherical or ellipsoidal heads; quadrature
    between break points otherwise (`tankcalc.geometry.lying`). The depth square to the axis at
    x is (z - (x - dip_at) slope) / sqrt(1 - slope^2); heads fill at their own depth.

    Examples
    --------
    >>> from tankcalc.geometry import FlatEnd
    >>> level = horizontal_cylinder(3.0, 6.0, FlatEnd(), FlatEnd())
    >>> round(level.volume(1.0), 6)
    12.375311
    >>> tilted = horizontal_cylinder(3.0, 6.0, FlatEnd(), FlatEnd(), slope=0.02, dip_at_m=0.0)
    >>> round(tilted.z_max, 6)
    3.1194
    """
    radius, extent = 0.5 * length("diameter", diameter_m), length("length", length_m)
    sine, dip_at = _tilt(slope), _dip(dip_at_m, extent)
    heads = (profile(left, radius, "left"), profile(right, radius, "right"))
    if sine == 0.0 and all(
        isinstance(head, FlatEnd | HemisphericalEnd | EllipsoidalEnd) for head in (left, right)
    ):
        body: Body = _level(radius, extent, sum(depth_of(head) for head in heads))
    else:
        body = _cut_by_planes(radius, extent, heads, sine, dip_at)
    return Vessel("horizontal cylinder", body, _outline(radius, extent, heads, sine, dip_at))


def _tilt(slope: float) -> float:
    if not abs(slope) < 1.0:
        raise GeometryError("slope", "rise over length must lie between -1 and 1.")
    return float(slope) if abs(slope) > LEAST_SLOPE else 0.0


def _dip(dip_at_m: float | None, extent: float) -> float:
    if dip_at_m is None:
        return 0.5 * extent
    if not 0.0 <= dip_at_m <= extent:
        raise GeometryError("dip_at", f"must lie on the straight shell, 0 m to {extent:g} m.")
    return float(dip_at_m)


def _level(radius: float, extent: float, depths: float) -> Body:
    """Return the level cylinder with half spheroids at its ends, in closed form.

    A half spheroid of depth a is cut along half an ellipse of the semi-axes w and a w / R:
    A = pi a w^2 / (2 R), w^2 = 2 R z - z^2.
    """
    shell = Prism(radius, radius, radius, extent)
    if depths == 0.0:
        return shell
    k = 0.5 * math.pi * depths / radius
    spheroids = PiecewisePolynomial.of([Slab(0.0, shell.top, 0.0, 2.0 * k * radius, -k)])
    return Assembly([shell, spheroids])


def _cut_by_planes(
    radius: float,
    extent: float,
    heads: tuple[Sequence[Piece], Sequence[Piece]],
    sine: float,
    dip_at: float,
) -> Lying:
    left, right = heads
    lines = [Line(0.0, extent, radius, radius)]
    lines += [Line(-p.x1, -p.x0, p.r1, p.r0) for p in left if isinstance(p, Line)]
    lines += [Line(extent + p.x0, extent + p.x1, p.r0, p.r1) for p in right if isinstance(p, Line)]
    arcs = [(p, 0.0, -1.0) for p in left if isinstance(p, Arc)]
    arcs += [(p, extent, 1.0) for p in right if isinstance(p, Arc)]
    return Lying(radius, sine, dip_at, lines, arcs)


def _outline(
    radius: float,
    extent: float,
    heads: tuple[tuple[Piece, ...], tuple[Piece, ...]],
    sine: float,
    dip_at: float,
) -> Array:
    """Return the side view, turned by the tilt about the datum."""
    left = points_of(heads[0], radius)[::-1] * [-1.0, 1.0]
    right = points_of(heads[1], radius) + np.array([extent, 0.0])
    upper = np.concatenate([left, right])
    x, y = np.concatenate([upper, upper[::-1] * [1.0, -1.0]]).T
    along, up = x - dip_at, y + radius
    cosine = math.sqrt(1.0 - sine * sine)
    return closed(
        np.column_stack([dip_at + along * cosine - up * sine, along * sine + up * cosine])
    )
