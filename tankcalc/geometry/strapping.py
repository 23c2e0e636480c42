"""Vessels known by their strapping table: volume against innage."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from tankcalc.errors import GeometryError
from tankcalc.geometry.body import Array
from tankcalc.geometry.dimensions import elevation
from tankcalc.geometry.outlines import turned
from tankcalc.geometry.polynomial import PiecewisePolynomial
from tankcalc.geometry.vessel import Vessel

LARGEST_M3 = 1e9
"""No vessel holds a cubic kilometre."""


def strapped(levels_m: Sequence[float] | Array, volumes_m3: Sequence[float] | Array) -> Vessel:
    """Return the vessel that a strapping table describes.

    Parameters
    ----------
    levels_m : sequence of float, n of them
        Innage of the table's lines, m above the datum, strictly rising; at least two.
    volumes_m3 : sequence of float, n of them
        Volumes at these, m3, strictly rising; the first may be above zero (a heel below the
        first line) but not below.

    Returns
    -------
    Vessel
        Linear between the lines; nothing below the first or above the last.

    Raises
    ------
    GeometryError
        The key "table" or, for one line, "table.3" (counted from 1).

    Notes
    -----
    The area is constant between two lines, (V2 - V1) / (z2 - z1): the table says no more.

    Examples
    --------
    >>> table = strapped([0.0, 1.0, 3.0], [0.5, 8.0, 28.0])
    >>> table.volume(2.0), table.area(2.0), table.level(18.0)
    (18.0, 10.0, 2.0)
    """
    z = np.array([elevation(f"table.{i}", level) for i, level in enumerate(levels_m, start=1)])
    volumes = _volumes(volumes_m3)
    if len(z) != len(volumes):
        raise GeometryError("table", f"{len(z)} levels but {len(volumes)} volumes.")
    if len(z) < 2:
        raise GeometryError("table", "a table has at least two lines.")
    _refuse_fall("level", "m", z)
    _refuse_fall("volume", "m3", volumes)
    areas = np.diff(volumes) / np.diff(z)
    level = np.zeros_like(areas)
    body = PiecewisePolynomial(z, np.stack([areas, level, level]), volumes)
    radii = np.sqrt(areas / np.pi)
    profile = np.column_stack([np.repeat(z, 2)[1:-1], np.repeat(radii, 2)])
    return Vessel("strapped", body, turned(profile))


def _volumes(volumes_m3: Sequence[float] | Array) -> Array:
    for number, volume in enumerate(volumes_m3, start=1):
        if not np.isfinite(volume) or not 0.0 <= volume <= LARGEST_M3:
            raise GeometryError(
                f"table.{number}", f"{volume:g} m3 is no volume of a vessel (0 to 1e9 m3)."
            )
    return np.array(volumes_m3, dtype=np.float64)


def _refuse_fall(what: str, unit: str, values: Array) -> None:
    for i in np.flatnonzero(np.diff(values) <= 0.0)[:1]:
        raise GeometryError(
            f"table.{i + 2}",
            f"the {what} does not rise: {values[i]:g} {unit}, then {values[i + 1]:g} {unit}.",
        )
