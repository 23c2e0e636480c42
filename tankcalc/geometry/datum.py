"""Elevations measured from another datum."""

from __future__ import annotations

from tankcalc.geometry.dimensions import elevation
from tankcalc.geometry.vessel import Vessel


def moved_datum(vessel: Vessel, up_by_m: float) -> Vessel:
    """Return the same vessel with its datum moved up, so that every elevation falls by as much.

    Parameters
    ----------
    vessel : Vessel
        As before.
    up_by_m : float
        How far the datum moves up, m; negative: down.

    Returns
    -------
    Vessel
        Area and volume at the same place are the same; moments are about the new datum.

    Raises
    ------
    GeometryError
        Not a sensible elevation (key "datum").

    Examples
    --------
    >>> from tankcalc.geometry import sphere
    >>> moved = moved_datum(sphere(10.0), 0.5)
    >>> moved.z_min, moved.z_max
    (-0.5, 9.5)
    """
    return vessel.with_datum(vessel.datum + elevation("datum", up_by_m))
