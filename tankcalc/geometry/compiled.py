"""A body as tables of polynomials, for very many elevations."""

from __future__ import annotations

from functools import cached_property

import numpy as np

from tankcalc.geometry.body import Array, Assembly, Body
from tankcalc.geometry.polynomial import PiecewisePolynomial
from tankcalc.geometry.table import Figures, tabulated

MOST_BREAKS = 48
"""A body with more of them (a long strapping table) is looked up piece by piece."""

AGREEMENT = 2e-14
"""Largest deviation of a volume from the exact one, as a share of capacity."""

AREA_AGREEMENT = 1e-11
"""The same for an area, as a share of the largest; a quadrature gives 1e-12 of it."""


def compiled(body: Body) -> Body:
    """Return a body that gives the same figures, faster where there are very many.

    Parameters
    ----------
    body : Body
        Any; one made of quadratics alone is fast enough and comes back as it is.

    Returns
    -------
    Body
        Its tables are made when they are first asked for.
    """
    if isinstance(body, PiecewisePolynomial):
        return body
    if isinstance(body, Assembly) and len(body.breaks) > MOST_BREAKS:
        return Assembly([compiled(part) for part in body.parts])
    return Compiled(body)


class Compiled(Body):
    """Tables that agree with a body's exact figures to `AGREEMENT`.

    Parameters
    ----------
    exact : Body
        The body; its breaks must be few, and between them its figures smooth in the square
        root of the distance from either break.
    """

    def __init__(self, exact: Body) -> None:
        self.exact = exact
        self.bottom, self.top, self.breaks = exact.bottom, exact.top, exact.breaks
        self._empty = exact.volume_and_moment(exact.breaks[:1])
        self._capacity = float(exact.volume_and_moment(exact.breaks[-1:])[0][0])

    def area(self, z: Array) -> Array:
        """Return the horizontal area at each elevation, m2."""
        return self.areas(z)[0]

    def volume_and_moment(self, z: Array) -> tuple[Array, Array]:
        """Return the volume below each elevation, m3, and its moment about z = 0, m4."""
        volume, moment = self.volumes(z)
        is_empty = z <= self.bottom
        if is_empty.any():
            volume[is_empty], moment[is_empty] = self._empty
        return volume, moment

    @cached_property
    def areas(self) -> Figures:
        """The table of areas."""
        largest = float(self.exact.area(np.linspace(self.bottom, self.top, 65)).max())
        return tabulated(lambda z: (self.exact.area(z),), self.breaks, [AREA_AGREEMENT * largest])

    @cached_property
    def volumes(self) -> Figures:
        """The table of volumes and moments."""
        allowed = AGREEMENT * self._capacity
        lever = max(abs(self.bottom), abs(self.top))
        return tabulated(self.exact.volume_and_moment, self.breaks, [allowed, allowed * lever])
