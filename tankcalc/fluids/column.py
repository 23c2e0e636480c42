"""Density over elevation, in straight pieces, with its integrals."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from tankcalc.fluids.fluid import Fluid, Layer
from tankcalc.fluids.models import FloatArray, Pieces, Temperatures

IntArray = npt.NDArray[np.intp]


BLOCK = 16_384
"""Readings worked on at a time: their intermediate figures stay in the processor's cache."""

FEW = 12
"""Up to this many edges comparing with each is quicker than a binary search."""


def piece_of(values: FloatArray, bounds: FloatArray) -> IntArray:
    """Return in which of the pieces between rising bounds each value lies, any shape."""
    if len(bounds) > FEW or values.size < FEW:
        return np.searchsorted(bounds, values, side="right")
    piece = np.zeros(values.shape, dtype=np.intp)
    for bound in bounds:
        piece += values >= bound
    return piece


@dataclass(frozen=True, slots=True, eq=False)
class Column:
    """A liquid's density rho(z) in straight pieces from minus to plus infinity.

    Attributes
    ----------
    edges_m : array (n - 1,)
        Elevations between pieces, m, strictly rising.
    at_m, density_kg_m3, slope : array (n,)
        Piece k holds rho = density[k] + slope[k] (z - at[k]), kg/m3, between its edges.
    layer : array of int (n,)
        Which layer of the fluid each piece belongs to, from the bottom up.
    to_edge : array (n - 1,)
        Integral of rho from the first edge to every edge, kg/m2.
    bulk_modulus_pa : float or None
        Where set, density is that at the surface's pressure and the column is compressed by
        its own weight.
    """

    edges_m: FloatArray
    at_m: FloatArray
    density_kg_m3: FloatArray
    slope: FloatArray
    layer: IntArray
    to_edge: FloatArray
    bulk_modulus_pa: float | None = None

    @classmethod
    def of(
        cls, parts: Sequence[tuple[Pieces, float]], bulk_modulus_pa: float | None = None
    ) -> Column:
        """Return the column of layers, each with its density and the elevation of its top."""
        edges, at, rho, slope, layer = [], [], [], [], []
        bottom = -np.inf
        for index, (pieces, top) in enumerate(parts):
            bounds = np.concatenate(([-np.inf], pieces.edges_m, [np.inf]))
            for k in range(len(pieces.at_m)):
                low, high = max(bounds[k], bottom), min(bounds[k + 1], top)
                if low < high:
                    edges.append(low)
                    at.append(pieces.at_m[k])
                    rho.append(pieces.density_kg_m3[k])
                    slope.append(pieces.slope[k])
                    layer.append(index)
            bottom = top
        inner = np.asarray(edges[1:], dtype=float)
        return cls._summed(
            cls(
                inner,
                np.asarray(at),
                np.asarray(rho),
                np.asarray(slope),
                np.asarray(layer, dtype=np.intp),
                np.zeros(len(inner)),
                bulk_modulus_pa,
            )
        )

    @staticmethod
    def _summed(column: Column) -> Column:
        """Return the column with its integral to every edge."""
        edges = column.edges_m
        to_edge = np.zeros(len(edges))
        if len(edges) > 1:
            steps = column._within(np.arange(1, len(edges)), edges[:-1], edges[1:])
            to_edge[1:] = np.cumsum(steps)
        return replace(column, to_edge=to_edge)

    def scaled(self, factors: Sequence[float]) -> Column:
        """Return the column with the density of each layer times its factor (zero: no mass)."""
        factor = np.asarray(factors, dtype=float)[self.layer]
        return self._summed(
            replace(self, density_kg_m3=self.density_kg_m3 * factor, slope=self.slope * factor)
        )

    def _within(self, piece: IntArray, low_m: FloatArray, high_m: FloatArray) -> FloatArray:
        """Return the integral of rho (kg/m2) between elevations of one piece."""
        middle = 0.5 * (low_m + high_m) - self.at_m[piece]
        rho = self.density_kg_m3[piece] + self.slope[piece] * middle
        return np.asarray(rho * (high_m - low_m))

    def density(self, z_m: npt.ArrayLike) -> FloatArray:
        """Return the density (kg/m3) at elevations (m) of any shape; at an edge, that above."""
        z = np.asarray(z_m, dtype=float)
        k = piece_of(z, self.edges_m)
        return np.asarray(self.density_kg_m3[k] + self.slope[k] * (z - self.at_m[k]))

    def areal_mass_to(self, z_m: npt.ArrayLike) -> FloatArray:
        """Return the integral of rho from the first edge to ``z_m``, kg/m2, any shape."""
        z = np.asarray(z_m, dtype=float)
        if not len(self.edges_m):
            return np.asarray(
                (self.density_kg_m3[0] + self.slope[0] * (0.5 * z - self.at_m[0])) * z
            )
        k = piece_of(z, self.edges_m)
        start = np.maximum(k - 1, 0)
        return np.asarray(self.to_edge[start] + self._within(k, self.edges_m[start], z))

    def areal_mass(self, low_m: npt.ArrayLike, high_m: npt.ArrayLike) -> FloatArray:
        """Return the integral of rho dz from ``low_m`` to ``high_m``, kg/m2."""
        return np.asarray(self.areal_mass_to(high_m) - self.areal_mass_to(low_m))

    def height_for(
        self, areal_mass: npt.ArrayLike, from_m: float, less_kg_m3: npt.ArrayLike = 0.0
    ) -> FloatArray:
        """Return the elevation at which the column from ``from_m`` up weighs ``areal_mass``.

        Parameters
        ----------
        areal_mass : array of any shape
            Integral of (rho - ``less_kg_m3``) from ``from_m`` upwards, kg/m2; negative values
            reach below ``from_m``.
        from_m : float
            Where the integral starts, m.
        less_kg_m3 : float or array that broadcasts with ``areal_mass``
            Density of what the liquid displaces, kg/m3; below the lightest liquid.

        Returns
        -------
        array
            Elevations, m, in the broadcast shape; NaN where an extended density profile ends
            before the column is heavy enough.

        Notes
        -----
        Closed form: in each straight piece the integral is a quadratic in z, taken by the root
        that is stable for small slopes.
        """
        less = np.asarray(less_kg_m3, dtype=float)
        if less.size and not any(less.strides):
            less = less.reshape(-1)[0]  # one density, broadcast over all rows
        target = np.asarray(areal_mass, dtype=float) + self.areal_mass_to(from_m) - less * from_m
        if target.size <= BLOCK:
            return self._height(target, less)
        displaced = np.broadcast_to(less, target.shape).ravel() if less.ndim else None
        flat, heights = target.ravel(), np.empty(target.size)
        for start in range(0, flat.size, BLOCK):
            block = slice(start, start + BLOCK)
            heights[block] = self._height(
                flat[block], less if displaced is None else displaced[block]
            )
        return heights.reshape(target.shape)

    def _height(self, target: FloatArray, less: FloatArray) -> FloatArray:
        """Return where the integral of (rho - less) from the datum reaches the targets, m."""
        reached = self.to_edge - less[..., None] * self.edges_m
        if not len(self.edges_m):
            start, k, rest = np.zeros(target.shape), np.zeros(target.shape, dtype=np.intp), target
        elif less.ndim == 0:
            k = piece_of(target, reached)
            low = np.maximum(k - 1, 0)
            start, rest = self.edges_m[low], target - reached[low]
        else:
            k = np.count_nonzero(reached <= target[..., None], axis=-1)
            low = np.maximum(k - 1, 0)
            start = self.edges_m[low]
            rest = target - (self.to_edge[low] - less * start)
        slope = self.slope[k]
        rho = self.density_kg_m3[k] + slope * (start - self.at_m[k]) - less
        with np.errstate(invalid="ignore", divide="ignore"):
            root = np.sqrt(rho * rho + 2.0 * slope * rest)
            height = start + 2.0 * rest / (rho + root)
        return np.asarray(np.where(np.isfinite(height), height, np.nan))

    def rising_density_below(self, surface_m: float, bottom_m: float) -> float | None:
        """Return the lowest elevation (m) at which density rises with height, or None."""
        bounds = np.concatenate(([-np.inf], self.edges_m, [np.inf]))
        for k in range(len(self.at_m)):
            low, high = max(bounds[k], bottom_m), min(bounds[k + 1], surface_m)
            if low >= high:
                continue
            if self.slope[k] > 0.0:
                return float(low)
            if k + 1 < len(self.at_m) and high < surface_m:
                below = self.density_kg_m3[k] + self.slope[k] * (high - self.at_m[k])
                if self.density(high) > below * (1.0 + 1e-12):
                    return float(high)
        return None

    def extremes(self, bottom_m: float, top_m: float) -> tuple[float, float]:
        """Return the smallest and the largest density (kg/m3) between two elevations (m)."""
        inside = self.edges_m[(self.edges_m > bottom_m) & (self.edges_m < top_m)]
        z = np.concatenate(([bottom_m], inside, [top_m]))
        above = self.density(z)
        k = np.searchsorted(self.edges_m, z, side="left")
        below = self.density_kg_m3[k] + self.slope[k] * (z - self.at_m[k])
        return float(min(above.min(), below.min())), float(max(above.max(), below.max()))


def column_of(fluid: Fluid, temperatures: Temperatures | None) -> Column:
    """Return the density over elevation of a fluid at these temperatures.

    Raises
    ------
    RangeError
        A temperature lies outside what a layer's density model covers.
    """
    return column_of_layers(fluid.layers, temperatures)


def column_of_layers(layers: Sequence[Layer], temperatures: Temperatures | None) -> Column:
    """Return the density over elevation of layers from the bottom up.

    Raises
    ------
    RangeError
        A temperature lies outside what a layer's density model covers.
    """
    parts = [
        (layer.model.pieces(temperatures), np.inf if layer.top_m is None else layer.top_m)
        for layer in layers
    ]
    return Column.of(parts, layers[-1].model.bulk_modulus_pa if len(layers) == 1 else None)
