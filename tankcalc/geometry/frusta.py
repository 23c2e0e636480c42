"""Hoppers, silos and vials: frusta of upright cones, one on the other."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from tankcalc.errors import GeometryError
from tankcalc.geometry.dimensions import length, length_or_zero
from tankcalc.geometry.outlines import turned
from tankcalc.geometry.polynomial import PiecewisePolynomial, frustum
from tankcalc.geometry.vessel import Vessel


def stack(sections: Sequence[tuple[float, float, float]]) -> Vessel:
    """Return a vessel made of frusta.

    Parameters
    ----------
    sections : sequence of (height_m, bottom_diameter_m, top_diameter_m)
        From the bottom up, inside, m. One of a section's diameters may be zero (a tip);
        neighbours may differ (a step). Elevation 0 is the lowest point.

    Returns
    -------
    Vessel
        In closed form: V = pi h (r1^2 + r1 r + r^2) / 3 in each frustum.

    Raises
    ------
    GeometryError
        An impossible dimension (keys "sections.1.height", "sections.1.bottom_diameter" and
        "sections.1.top_diameter", counted from 1).

    Examples
    --------
    >>> round(stack([(3.0, 0.6, 4.0)]).volume(1.5), 6)
    2.760675
    """
    if not sections:
        raise GeometryError("sections", "a stack has at least one section.")
    slabs, corners, low = [], [], 0.0
    for number, (height, bottom, top) in enumerate(sections, start=1):
        key = f"sections.{number}"
        high = low + length(f"{key}.height", height)
        lower = 0.5 * length_or_zero(f"{key}.bottom_diameter", bottom)
        upper = 0.5 * length_or_zero(f"{key}.top_diameter", top)
        if lower == upper == 0.0:
            raise GeometryError(f"{key}.top_diameter", "only one end of a section can be a tip.")
        slabs.append(frustum(low, high, lower, upper))
        corners += [[low, lower], [high, upper]]
        low = high
    return Vessel("stack", PiecewisePolynomial.of(slabs), turned(np.array(corners)))
