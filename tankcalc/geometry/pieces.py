"""Pieces of a lying body of round section, many at a time, as columns of numbers.

Along a piece a parameter t runs from ``first`` to ``last``; x is the distance along the axis,
r the radius of the section. A plane cuts the section at x along y = alpha - beta x, y being the
height above the axis, square to it. In the shapes below p is the number of pieces, n that of
planes.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Sequence

import numpy as np

from tankcalc.geometry.body import Array
from tankcalc.geometry.meridian import Arc, Line, sweep_terms, swept

REACH = 0.5
"""How far from a piece, as a share of its length, the end of a cut still matters."""

SIGNS = np.array([1.0, -1.0])[:, None, None]
"""r + y is positive above the lower end of a vertical diameter, r - y below the upper one."""


class Pieces(ABC):
    """Pieces of one sort.

    Attributes
    ----------
    first, last : ndarray, shape (p, 1)
        Range of the parameter.
    near_first, near_last : ndarray, shape (p, 1)
        Range in which the end of a cut matters: `REACH` of the piece's length longer.
    full : ndarray, shape (2, p, 1)
        The integrals of `filled` over the whole piece.
    """

    first: Array
    last: Array
    near_first: Array
    near_last: Array
    full: Array

    def _measure(self, first: Array, last: Array) -> None:
        self.first, self.last = first, last
        far = REACH * (last - first)
        self.near_first, self.near_last = first - far, last + far
        self.full = self.filled(last) - self.filled(first)

    @abstractmethod
    def at(self, t: Array) -> tuple[Array, Array, Array]:
        """Return x, r and dx/dt (never negative) at ``t``, (p, n, nodes)."""

    @abstractmethod
    def inside(self, alpha: Array) -> tuple[Array, Array]:
        """Return the intervals of t on which r + y and r - y are positive, (2, p, n) each.

        An interval may reach beyond the piece; an empty one has its lower end at or above its
        upper one.
        """

    @abstractmethod
    def highest(self, sine: float, cosine: float) -> Array:
        """Return the t, (p, 1), at which x sine + r cosine is largest."""

    @abstractmethod
    def filled(self, t: Array) -> Array:
        """Return, for full sections up to ``t``, (p, n): volume and moment at x = 0, (2, p, n)."""


class Lines(Pieces):
    """Cylinders and cones: x = x0 + dx t, r = r0 + dr t, 0 <= t <= 1.

    r + y and r - y are linear in t; their signs change at one end of an interval, or nowhere.
    """

    def __init__(self, pieces: Sequence[Line], beta: float) -> None:
        columns = np.array([(piece.x0, piece.x1, piece.r0, piece.r1) for piece in pieces])
        self._x0, x1, self._r0, r1 = columns.T[:, :, None]
        self._dx, self._dr = x1 - self._x0, r1 - self._r0
        self._deep = [column[:, :, None] for column in (self._x0, self._dx, self._r0, self._dr)]
        self._value = self._r0 - SIGNS * (beta * self._x0)
        slope = self._dr - SIGNS * (beta * self._dx)
        self._rises, self._falls, self._is_level = slope > 0.0, slope < 0.0, slope == 0.0
        self._slope = np.where(self._is_level, 1.0, slope)
        square, mixed, growth = self._r0**2, self._r0 * self._dr, self._dr**2
        volume = self._dx * np.array([square, mixed, growth / 3.0, 0.0 * growth])
        lever = self._dx**2 * np.array([0.0 * square, square / 2.0, mixed / 1.5, growth / 4.0])
        self._terms = np.pi * np.stack([volume, self._x0 * volume + lever], axis=1)
        self._measure(np.zeros_like(x1), np.ones_like(x1))

    def at(self, t: Array) -> tuple[Array, Array, Array]:
        """Return x, r and dx/dt; see `Pieces.at`."""
        x0, dx, r0, dr = self._deep
        return x0 + dx * t, r0 + dr * t, dx

    def inside(self, alpha: Array) -> tuple[Array, Array]:
        """Return the intervals; see `Pieces.inside`."""
        value = self._value + SIGNS * alpha
        root = -value / self._slope
        nowhere = np.where(self._is_level & (value <= 0.0), np.inf, -np.inf)
        return np.where(self._rises, root, nowhere), np.where(self._falls, root, np.inf)

    def highest(self, sine: float, cosine: float) -> Array:
        """Return the higher end; see `Pieces.highest`."""
        return np.where(self._dx * sine + self._dr * cosine > 0.0, self.last, self.first)

    def filled(self, t: Array) -> Array:
        """Return volume and moment; see `Pieces.filled`. They are polynomials of t."""
        c1, c2, c3, c4 = self._terms
        filled: Array = t * (c1 + t * (c2 + t * (c3 + t * c4)))
        return filled


class Arcs(Pieces):
    """Arcs of heads: x = tip - side p (1 - cos t), r = r0 + q sin t.

    r + y and r - y have the form value + rho cos(t - middle), positive about the middle.

    Parameters
    ----------
    pieces : sequence of (Arc, rim, side)
        With the x of the rim it starts from, m, and +1 for a right head, -1 for a left one.
    beta : float
        Of the planes.
    """

    def __init__(self, pieces: Sequence[tuple[Arc, float, float]], beta: float) -> None:
        columns = [
            (rim + side * arc.tip, arc.p, side, arc.r0, arc.q, arc.start, arc.end)
            for arc, rim, side in pieces
        ]
        self._tip, p, side, r0, self._q, first, last = np.array(columns).T[:, :, None]
        self._reach = side * p
        deep = (self._tip, 2.0 * self._reach, r0, self._q, p)
        self._deep = [column[:, :, None] for column in deep]
        cosine_part = -SIGNS * (beta * self._reach)
        self._value = r0 - SIGNS * (beta * self._tip) - cosine_part
        self._rho = np.hypot(self._q, cosine_part)
        self._middle = np.arctan2(self._q, cosine_part)
        self._terms = sweep_terms(p, self._q, r0)
        self._terms[:, 1] = self._tip * self._terms[:, 0] - side * self._terms[:, 1]
        self._measure(first, last)

    def at(self, t: Array) -> tuple[Array, Array, Array]:
        """Return x, r and dx/dt; see `Pieces.at`."""
        tip, twice_reach, r0, q, p = self._deep
        half_sine = np.sin(0.5 * t)
        sine = 2.0 * half_sine * np.cos(0.5 * t)
        return tip - twice_reach * (half_sine * half_sine), r0 + q * sine, p * sine

    def inside(self, alpha: Array) -> tuple[Array, Array]:
        """Return the intervals; see `Pieces.inside`."""
        cosine = (self._value + SIGNS * alpha) / -self._rho
        half = np.arccos(np.minimum(np.maximum(cosine, -1.0), 1.0))
        return self._middle - half, self._middle + half

    def highest(self, sine: float, cosine: float) -> Array:
        """Return where the profile slopes like the plane; see `Pieces.highest`."""
        level = np.arctan2(self._q * cosine, self._reach * sine)
        return np.asarray(np.minimum(np.maximum(level, self.first), self.last))

    def filled(self, t: Array) -> Array:
        """Return volume and moment; see `Pieces.filled` and `tankcalc.geometry.meridian.swept`."""
        return swept(t, self._terms)
