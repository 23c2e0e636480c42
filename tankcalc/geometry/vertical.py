"""Upright cylinders: courses of plate between a bottom and a roof."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from tankcalc.errors import GeometryError
from tankcalc.geometry.body import Array, Assembly, Body
from tankcalc.geometry.circle import Hoof, circle_area
from tankcalc.geometry.dimensions import at_most, length
from tankcalc.geometry.ends import ConeEnd, End, SlopeEnd
from tankcalc.geometry.meridian import points_of, profile
from tankcalc.geometry.outlines import closed, turned
from tankcalc.geometry.polynomial import PiecewisePolynomial, Slab, frustum
from tankcalc.geometry.upright import upright_end
from tankcalc.geometry.vessel import Vessel

Course = tuple[float, float, float]
"""Bottom, top and radius of a course, m."""


def vertical_cylinder(courses: Sequence[tuple[float, float]], bottom: End, roof: End) -> Vessel:
    """Return an upright cylindrical vessel.

    Parameters
    ----------
    courses : sequence of (height_m, diameter_m)
        Straight shell from the bottom up, inside, m. Elevation 0 is its lowest point.
    bottom : End
        Fits the first course. A bottom that bulges or falls lies below zero.
    roof : End
        Fits the last course; any but a slope. It counts for the capacity.

    Returns
    -------
    Vessel
        Area, volume and moment in closed form.

    Raises
    ------
    GeometryError
        A dimension is impossible; the key is as in the tank file ("bottom.depth",
        "courses.2.height", counted from 1; "height" and "diameter" for a single course).

    Notes
    -----
    Every layer has a closed form: quadratics of elevation for courses, cones, dishes and
    spheroids; arcs for a knuckle; circular segments for a sloped floor.

    Examples
    --------
    >>> from tankcalc.geometry import ConeEnd, FlatEnd
    >>> tank = vertical_cylinder([(12.0, 20.0)], FlatEnd(), FlatEnd())
    >>> round(tank.volume(12.0), 4)
    3769.9112
    >>> coned = vertical_cylinder([(5.0, 10.0)], ConeEnd(2.0), FlatEnd())
    >>> coned.z_min, round(coned.volume(3.0), 6)
    (-2.0, 287.979327)
    """
    shell = _shell(courses)
    slabs = [Slab(low, high, circle_area(2.0 * radius)) for low, high, radius in shell]
    bottom_slabs, rings, floor = _bottom(bottom, shell)
    _, top, radius = shell[-1]
    pieces = profile(roof, radius, "roof")
    roof_slabs, roof_rings = upright_end(pieces, top, upward=True)
    layers = PiecewisePolynomial.of([*bottom_slabs, *slabs, *roof_slabs])
    rings = [*rings, *roof_rings]
    cover = points_of(pieces, radius) + np.array([top, 0.0])
    wall = np.array([(z, r) for low, high, r in shell for z in (low, high)])
    outline = turned(np.concatenate([floor, wall, cover]))
    if isinstance(bottom, SlopeEnd):
        outline = closed(np.concatenate([outline[:-1], [[-shell[0][2], -bottom.fall_m]]]))
    body = Assembly([layers, *rings]) if rings else layers
    return Vessel("vertical cylinder", body, outline)


def _shell(courses: Sequence[tuple[float, float]]) -> list[Course]:
    if not courses:
        raise GeometryError("courses", "a shell has at least one course.")
    shell: list[Course] = []
    low = 0.0
    for number, (height, diameter) in enumerate(courses, start=1):
        prefix = f"courses.{number}." if len(courses) > 1 else ""
        high = low + length(f"{prefix}height", height)
        shell.append((low, high, 0.5 * length(f"{prefix}diameter", diameter)))
        low = high
    return shell


def _bottom(bottom: End, shell: Sequence[Course]) -> tuple[list[Slab], list[Body], Array]:
    """Return layers, other bodies and the profile (z, r) of a bottom, from the axis to the rim."""
    radius = shell[0][2]
    if isinstance(bottom, SlopeEnd):
        wedge = Hoof(radius, length("bottom.fall", bottom.fall_m))
        return [], [wedge], np.array([[0.0, radius]])
    if isinstance(bottom, ConeEnd) and bottom.points == "up":
        return [_raised(bottom, shell)], [], np.array([[bottom.depth_m, 0.0], [0.0, radius]])
    pieces = profile(bottom, radius, "bottom")
    slabs, rings = upright_end(pieces, 0.0, upward=False)
    return slabs, rings, points_of(pieces, radius)[::-1] * [-1.0, 1.0]


def _raised(cone: ConeEnd, shell: Sequence[Course]) -> Slab:
    """Return the space that a cone takes which points up into the shell."""
    depth = length("bottom.depth", cone.depth_m)
    radius = shell[0][2]
    at_most("bottom.depth", depth, shell[-1][1], "the height of the shell")
    for number, (low, _, course_radius) in enumerate(shell, start=1):
        if radius * (1.0 - low / depth) > course_radius:
            raise GeometryError(
                "bottom.depth", f"the cone is wider than course {number} where that begins."
            )
    return frustum(0.0, depth, radius, 0.0).negative()
