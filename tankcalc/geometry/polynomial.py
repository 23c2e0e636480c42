"""Bodies whose area is a quadratic of elevation between breaks: nearly all with a vertical axis."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from tankcalc.geometry.body import Array, Body, Indices, merged_breaks


@dataclass(frozen=True, slots=True)
class Slab:
    """A layer whose area is ``a0 + a1 u + a2 u^2``, u the height above its bottom (SI).

    Negative coefficients take space away (a cone that points up, deadwood).
    """

    bottom: float
    top: float
    a0: float
    a1: float = 0.0
    a2: float = 0.0

    def negative(self) -> Slab:
        """Return the layer that takes this one's space away."""
        return Slab(self.bottom, self.top, -self.a0, -self.a1, -self.a2)

    def above(self, bottom: float) -> tuple[float, float, float]:
        """Return the coefficients for heights above another bottom."""
        u = bottom - self.bottom
        return self.a0 + u * (self.a1 + u * self.a2), self.a1 + 2.0 * u * self.a2, self.a2


def frustum(bottom: float, top: float, bottom_radius: float, top_radius: float) -> Slab:
    """Return the layer of an upright cone's frustum, by its radii at bottom and top, m.

    Examples
    --------
    >>> frustum(0.0, 2.0, 1.0, 1.0)
    Slab(bottom=0.0, top=2.0, a0=3.141592653589793, a1=0.0, a2=0.0)
    """
    growth = (top_radius - bottom_radius) / (top - bottom)
    return Slab(
        bottom,
        top,
        math.pi * bottom_radius**2,
        2.0 * math.pi * bottom_radius * growth,
        math.pi * growth**2,
    )


class PiecewisePolynomial(Body):
    """A body whose area is a quadratic between breaks.

    Parameters
    ----------
    breaks : ndarray, shape (n + 1,)
        Elevations, m, rising.
    coefficients : ndarray, shape (3, n)
        ``a0``, ``a1``, ``a2`` of each interval, for heights above its lower break.
    volumes : ndarray, shape (n + 1,), or None
        Volumes at the breaks, m3, where they are given rather than integrated; the first one
        sits at the lowest break.

    Notes
    -----
    With u the height above the break z_i below z,
    V = V_i + a0 u + a1 u^2 / 2 + a2 u^3 / 3 and
    M = M_i + z_i (V - V_i) + a0 u^2 / 2 + a1 u^3 / 3 + a2 u^4 / 4.
    """

    def __init__(self, breaks: Array, coefficients: Array, volumes: Array | None = None) -> None:
        self.breaks = breaks
        self.bottom, self.top = float(breaks[0]), float(breaks[-1])
        self._starts = breaks[:-1]
        self._a0, self._a1, self._a2 = coefficients
        heights = np.diff(breaks)
        gained, moments = self._within(np.arange(len(heights)), heights)
        below = np.concatenate([[0.0], np.cumsum(gained)]) if volumes is None else volumes
        self._volumes = below[:-1]
        first = below[0] * self.bottom
        self._moments = first + np.concatenate([[0.0], np.cumsum(moments)])[:-1]

    @classmethod
    def of(cls, slabs: Sequence[Slab]) -> PiecewisePolynomial:
        """Return the body of layers side by side or one above the other; overlaps add up."""
        breaks = merged_breaks([np.array([(slab.bottom, slab.top) for slab in slabs]).ravel()])
        coefficients = np.zeros((3, len(breaks) - 1))
        middles = 0.5 * (breaks[1:] + breaks[:-1])
        for slab in slabs:
            for i in range(*np.searchsorted(middles, [slab.bottom, slab.top]).tolist()):
                coefficients[:, i] += slab.above(float(breaks[i]))
        return cls(breaks, coefficients)

    def _piece(self, z: Array) -> Indices:
        return np.searchsorted(self._starts[1:], z, side="right")

    def _within(self, piece: Indices, u: Array) -> tuple[Array, Array]:
        a0, a1, a2 = self._a0[piece], self._a1[piece], self._a2[piece]
        gained = u * (a0 + u * (a1 / 2.0 + u * (a2 / 3.0)))
        lever = u * u * (a0 / 2.0 + u * (a1 / 3.0 + u * (a2 / 4.0)))
        return gained, self._starts[piece] * gained + lever

    def area(self, z: Array) -> Array:
        """Return the area at each elevation, m2; at a step, that of the layer above."""
        piece = self._piece(z)
        u = z - self._starts[piece]
        area: Array = self._a0[piece] + u * (self._a1[piece] + u * self._a2[piece])
        return area

    def volume_and_moment(self, z: Array) -> tuple[Array, Array]:
        """Return the volume below each elevation, m3, and its moment about z = 0, m4."""
        piece = self._piece(z)
        gained, moment = self._within(piece, z - self._starts[piece])
        return self._volumes[piece] + gained, self._moments[piece] + moment
