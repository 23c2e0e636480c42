"""Figures against elevation as polynomials on cells, made once and looked up quickly."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import TypeAlias

import numpy as np

from tankcalc.geometry.body import Array, Indices

DEGREE = 7
"""Of the polynomials; the more, the fewer cells have to be fitted."""

FIRST_CELLS = 8
MOST_CELLS = 64
MOST_SPLITS = 8

NARROW = 1e-9
"""Share of the height within which a step of the area needs no resolving."""

_MARGIN = 1e-9
"""Keeps an elevation at the end of a stretch from being counted into the next one."""

_FEW = 64
"""So many bounds are compared with one by one faster than by bisection."""

Figures: TypeAlias = Callable[[Array], tuple[Array, ...]]


def tabulated(figures: Figures, breaks: Array, allowed: Sequence[float]) -> Figures:
    """Return the same figures from a table; or as they are, where no table agrees.

    Parameters
    ----------
    figures : callable
        From a flat array of elevations, m, to any number of arrays.
    breaks : ndarray
        Elevations where the figures are not smooth, m, rising.
    allowed : sequence of float
        Largest deviation of each figure.

    Returns
    -------
    callable
        Like ``figures``.

    Notes
    -----
    The interval between two breaks is halved. On each half the figures are functions of
    t = sqrt(distance from the break), smooth also where an area starts like a square root;
    they are interpolated by polynomials on equal cells of t. There are twice as many cells
    until all are found to agree with the exact figures at points between the nodes; where many
    do not suffice, because another break is near, the stretch next to the break is fitted
    by itself.
    """
    narrow = NARROW * float(breaks[-1] - breaks[0])
    fits: list[Fit] = []
    for stretch in _stretches(breaks):
        found = _fitted(figures, stretch, allowed, narrow)
        if not found:
            return figures
        fits += found
    return Table(fits)


@dataclass(frozen=True, slots=True)
class Stretch:
    """Elevations anchor + direction t^2, t from ``start`` to ``end``."""

    anchor: float
    direction: float
    start: float
    end: float
    splits: int = 0

    @property
    def low(self) -> float:
        """Lowest elevation, m."""
        return self.anchor + self.direction * (self.start if self.direction > 0 else self.end) ** 2

    @property
    def height(self) -> float:
        """Difference of its elevations, m."""
        return (self.end - self.start) * (self.end + self.start)

    @property
    def origin(self) -> float:
        """Where its first cell starts, a margin before ``start``."""
        return self.start - _MARGIN * (self.end - self.start)

    @property
    def width(self) -> float:
        """From there to the end of its last cell."""
        return (1.0 + 2.0 * _MARGIN) * (self.end - self.start)

    def elevations(self, cells: int, places: Array) -> Array:
        """Return the elevations, (cells, n), at places from 0 to 1 in each cell."""
        t = self.origin + self.width * ((np.arange(cells)[:, None] + places) / cells)
        return self.anchor + self.direction * t * t

    def split(self) -> tuple[Stretch, Stretch]:
        """Return the part next to the break and the rest, in rising elevation."""
        bound = self.start + 0.125 * (self.end - self.start)
        near = replace(self, end=bound, splits=self.splits + 1)
        rest = replace(self, start=bound, splits=self.splits + 1)
        return (near, rest) if self.direction > 0 else (rest, near)


Fit: TypeAlias = tuple[Stretch, Array]
"""A stretch and its coefficients, (columns, powers, cells)."""


class Table:
    """Polynomials on the cells of all stretches, one after the other."""

    def __init__(self, fits: Sequence[Fit]) -> None:
        stretches = [stretch for stretch, _ in fits]
        cells = np.array([coefficients.shape[-1] for _, coefficients in fits])
        self._bounds = [stretch.low for stretch in stretches[1:]]
        self._anchors = np.array([stretch.anchor for stretch in stretches])
        self._scales = cells / np.array([stretch.width for stretch in stretches])
        origins = np.array([stretch.origin for stretch in stretches])
        first_cells = np.concatenate([[0.0], np.cumsum(cells)[:-1]])
        self._offsets = first_cells - self._scales * origins
        self._columns = [list(rows) for rows in np.concatenate([rows for _, rows in fits], axis=-1)]

    def __call__(self, z: Array) -> tuple[Array, ...]:
        """Return the figures at each elevation."""
        cell, place = self._locate(z)
        return tuple(_horner(rows, cell, place) for rows in self._columns)

    def _locate(self, z: Array) -> tuple[Indices, Array]:
        """Return the cell of each elevation and its place there, -1/2 to 1/2."""
        stretch = self._stretch(z)
        place = z - self._anchors.take(stretch)
        np.abs(place, out=place)
        np.sqrt(place, out=place)
        place *= self._scales.take(stretch)
        place += self._offsets.take(stretch)
        cell = place.astype(np.intp)
        place -= cell
        place -= 0.5
        return cell, place

    def _stretch(self, z: Array) -> Indices:
        if len(self._bounds) > _FEW:
            return np.searchsorted(self._bounds, z, side="right")
        count = np.zeros(len(z), dtype=np.uint8)
        for bound in self._bounds:
            count += z >= bound
        return count.astype(np.intp)


def _horner(rows: Sequence[Array], cell: Indices, place: Array) -> Array:
    """Return the polynomials' values; ``rows`` from the highest power down.

    "clip" spares the check of every index; none is outside.
    """
    value = rows[0].take(cell, mode="clip")
    term = np.empty_like(value)
    for row in rows[1:]:
        value *= place
        value += row.take(cell, out=term, mode="clip")
    return value


def _stretches(breaks: Array) -> list[Stretch]:
    stretches = []
    for low, high in zip(breaks[:-1].tolist(), breaks[1:].tolist(), strict=True):
        middle = 0.5 * (low + high)
        stretches.append(Stretch(low, 1.0, 0.0, (middle - low) ** 0.5))
        stretches.append(Stretch(high, -1.0, 0.0, (high - middle) ** 0.5))
    return stretches


_NODES = 0.5 - 0.5 * np.cos(np.pi * (np.arange(DEGREE + 1) + 0.5) / (DEGREE + 1))
_CHECKS = np.array([0.03, 0.5, 0.85])
_TO_COEFFICIENTS = np.linalg.inv(np.vander(2.0 * _NODES - 1.0)) * np.exp2(
    np.arange(DEGREE, -1.0, -1.0)[:, None]
)
"""From values at the nodes to powers of the place in the cell, -1/2 to 1/2, highest first."""


def _fitted(
    figures: Figures, stretch: Stretch, allowed: Sequence[float], narrow: float
) -> list[Fit]:
    """Return fits that cover a stretch, in rising elevation; none if no table agrees."""
    cells = FIRST_CELLS
    while cells <= MOST_CELLS:
        coefficients = _interpolated(figures, stretch, cells)
        if stretch.height <= narrow or _agrees(figures, stretch, coefficients, allowed):
            return [(stretch, coefficients)]
        cells *= 2
    fits: list[Fit] = []
    for part in stretch.split() if stretch.splits < MOST_SPLITS else ():
        found = _fitted(figures, part, allowed, narrow)
        if not found:
            return []
        fits += found
    return fits


def _interpolated(figures: Figures, stretch: Stretch, cells: int) -> Array:
    values = np.array(figures(stretch.elevations(cells, _NODES).ravel()))
    values = values.reshape(len(values), cells, -1)
    base = values[:, :, :1]
    coefficients = np.einsum("pn,vcn->vpc", _TO_COEFFICIENTS, values - base)
    coefficients[:, -1, :] += base[:, :, 0]
    return np.asarray(coefficients)


def _agrees(
    figures: Figures, stretch: Stretch, coefficients: Array, allowed: Sequence[float]
) -> bool:
    cells = coefficients.shape[-1]
    exact = figures(stretch.elevations(cells, _CHECKS).ravel())
    cell = np.repeat(np.arange(cells), len(_CHECKS))
    place = np.tile(_CHECKS - 0.5, cells)
    return all(
        np.abs(_horner(list(rows), cell, place) - column).max() <= limit
        for rows, column, limit in zip(coefficients, exact, allowed, strict=True)
    )
