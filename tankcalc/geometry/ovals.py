"""Lying tanks of elliptical or obround section with flat ends."""

from __future__ import annotations

from typing import Literal

import numpy as np

from tankcalc.errors import GeometryError
from tankcalc.geometry.body import Array, Assembly, Body
from tankcalc.geometry.circle import Prism
from tankcalc.geometry.dimensions import length
from tankcalc.geometry.outlines import turned
from tankcalc.geometry.polynomial import PiecewisePolynomial, Slab
from tankcalc.geometry.vessel import Vessel


def oval(
    section: Literal["ellipse", "obround"], width_m: float, height_m: float, length_m: float
) -> Vessel:
    """Return a lying vessel of oval section, with flat ends.

    Parameters
    ----------
    section : {"ellipse", "obround"}
        An obround is two half circles joined by straight sides: lying when it is wider than
        high, standing when it is higher than wide.
    width_m, height_m : float
        Inside width and height of the section, m. Elevation 0 is its lowest point.
    length_m : float
        Inside length, m.

    Returns
    -------
    Vessel
        In closed form.

    Raises
    ------
    GeometryError
        An impossible dimension (keys "section", "width", "height", "length").

    Examples
    --------
    >>> round(oval("ellipse", 2.0, 1.4, 3.0).volume(0.5), 6)
    2.115205
    >>> round(oval("obround", 2.0, 1.2, 2.0).volume(0.5), 6)
    1.692089
    """
    width, height = length("width", width_m), length("height", height_m)
    extent = length("length", length_m)
    match section:
        case "ellipse":
            body: Body = Prism(0.5 * height, 0.5 * height, 0.5 * width, extent)
            edge = _arc(0.5 * height, 0.5 * height, 0.5 * width, -1.0, 1.0)
        case "obround":
            body = _obround(width, height, extent)
            radius, straight = 0.5 * min(width, height), max(height - width, 0.0)
            lower = _arc(radius, radius, radius, -1.0, 0.0)
            upper = _arc(radius + straight, radius, radius, 0.0, 1.0)
            outward = np.array([0.0, 0.5 * max(width - height, 0.0)])
            edge = np.concatenate([lower, upper]) + outward
        case _:
            raise GeometryError("section", 'must be "ellipse" or "obround".')
    return Vessel("oval", body, turned(edge))


def _obround(width: float, height: float, extent: float) -> Body:
    if height <= width:
        radius = 0.5 * height
        middle = Slab(0.0, height, (width - height) * extent)
        return Assembly([Prism(radius, radius, radius, extent), PiecewisePolynomial.of([middle])])
    radius = 0.5 * width
    high = height - radius
    return Assembly(
        [
            Prism(radius, radius, radius, extent, top=radius),
            PiecewisePolynomial.of([Slab(radius, high, width * extent)]),
            Prism(high, radius, radius, extent, bottom=high, top=height),
        ]
    )


def _arc(centre: float, half_height: float, half_width: float, first: float, last: float) -> Array:
    """Return (z, half width) of part of an ellipse's edge, between two heights in half heights."""
    angle = np.linspace(np.arcsin(first), np.arcsin(last), 25)
    return np.column_stack([centre + half_height * np.sin(angle), half_width * np.cos(angle)])
