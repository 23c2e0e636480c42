"""dp/dz = -rho g through a tank at rest: pressures, masses, and the surface behind a pressure.

All elevations are metres above the datum, all pressures absolute unless the name says
otherwise. Functions take floats or arrays that broadcast and return arrays.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from tankcalc.errors import RangeError
from tankcalc.fluids.column import Column, piece_of

if TYPE_CHECKING:
    from tankcalc.geometry import Vessel

FloatArray = npt.NDArray[np.float64]

COMPRESSION_STEPS = 32
"""Straight pieces a compressed column is cut into for its mass: good to 1e-7 of the mass for
the softest liquid accepted, 1e-10 for an ordinary one."""


def head_pa(
    column: Column, gravity_m_s2: float, low_m: npt.ArrayLike, surface_m: npt.ArrayLike
) -> FloatArray:
    """Return the pressure rise from the surface down to ``low_m``, Pa.

    Parameters
    ----------
    column : Column
        Density over elevation, kg/m3.
    gravity_m_s2 : float
        Local gravity, m/s2.
    low_m, surface_m : array
        Elevations, m; ``low_m`` at or below the surface.

    Notes
    -----
    g integral(rho dz); with a bulk modulus K, rho = rho0 exp(p / K) and therefore
    p = -K ln(1 - g integral(rho0 dz) / K), p counted from the surface.

    Examples
    --------
    >>> from tankcalc.fluids.column import Column, piece_of
    >>> from tankcalc.fluids.constant import Constant
    >>> water = Column.of([(Constant(1000.0).pieces(None), float("inf"))])
    >>> float(head_pa(water, 9.80665, 0.0, 10.0))
    98066.5
    """
    weight = gravity_m_s2 * column.areal_mass(low_m, surface_m)
    if column.bulk_modulus_pa is None:
        return np.asarray(weight)
    with np.errstate(invalid="ignore", divide="ignore"):
        # No column is as heavy as its modulus: the head then comes out as no number.
        return np.asarray(-column.bulk_modulus_pa * np.log1p(-weight / column.bulk_modulus_pa))


def surface_from_pressures(
    column: Column,
    gravity_m_s2: float,
    low_m: float,
    difference_pa: npt.ArrayLike,
    vapour_density_kg_m3: npt.ArrayLike,
    high_m: float,
) -> FloatArray:
    """Return the elevation (m) of the surface between two elevations of known pressure.

    Parameters
    ----------
    column : Column
        Density over elevation, kg/m3.
    gravity_m_s2 : float
        Local gravity, m/s2.
    low_m, high_m : float
        Elevations of the two pressures, m; the upper one is in the vapour.
    difference_pa : array
        Lower minus upper pressure, both absolute, Pa.
    vapour_density_kg_m3 : float or array
        Density of what fills the space between surface and ``high_m``, kg/m3, below that of
        the liquid.

    Returns
    -------
    array
        Surface elevation, m. A difference too small for any liquid above ``low_m`` gives an
        elevation at or below ``low_m``; one too large gives an elevation above ``high_m``.
        Both are for the caller to refuse.

    Notes
    -----
    Solves g [integral(rho, low..h) + rv (high - h)] = difference in closed form, piece by
    piece. A compressed column is heavier by a part in 1e4 or less; that excess is moved to the
    other side and the closed form repeated until it stands still.
    """
    target = np.asarray(difference_pa, dtype=float) / gravity_m_s2
    target = target - np.asarray(vapour_density_kg_m3) * (high_m - low_m)
    surface = column.height_for(target, low_m, vapour_density_kg_m3)
    if column.bulk_modulus_pa is None:
        return surface
    for _ in range(50):
        rigid = column.areal_mass(low_m, surface)
        excess = head_pa(column, gravity_m_s2, low_m, surface) / gravity_m_s2 - rigid
        better = column.height_for(target - excess, low_m, vapour_density_kg_m3)
        settled = np.all(~(np.abs(better - surface) > 1e-12 * (1.0 + np.abs(surface))))
        surface = better
        if settled:
            break
    return surface


@dataclass(frozen=True, eq=False)
class Filling:
    """A liquid column standing in a vessel: mass from level and level from mass.

    Parameters
    ----------
    vessel : Vessel
        Geometry; elevations above the datum, m.
    column : Column
        Density over elevation, kg/m3.
    gravity_m_s2 : float
        Local gravity, m/s2; matters only to a column with a bulk modulus.

    Notes
    -----
    With V(z) and its first moment M(z) = integral(A z dz), the mass of a piece of density
    a + b z between two elevations is exactly a (V2 - V1) + b (M2 - M1).
    """

    vessel: Vessel
    column: Column
    gravity_m_s2: float

    def mass(self, surface_m: npt.ArrayLike) -> FloatArray:
        """Return the mass of the liquid (kg) below surfaces (m) of any shape.

        Raises
        ------
        RangeError
            A surface lies outside the vessel.
        """
        surface = np.asarray(surface_m, dtype=float)
        volume, moment = self.vessel.volume_and_moment(surface)
        return self.mass_from(surface, volume, moment)

    def mass_from(
        self, surface_m: FloatArray, volume_m3: FloatArray, moment_m4: FloatArray
    ) -> FloatArray:
        """Return the mass (kg) where volume (m3) and first moment (m4) are known already."""
        if self.column.bulk_modulus_pa is not None:
            return self._compressed_mass(surface_m)
        stretch = self.vessel.stretch
        if stretch is not None:
            volume_m3, moment_m4 = self._still.volume_and_moment(surface_m)
            rigid = self._rigid_mass(surface_m, volume_m3, moment_m4)
            return rigid + stretch.mass_gain(self.column.density, self._jumps, surface_m)
        return self._rigid_mass(surface_m, volume_m3, moment_m4)

    def _rigid_mass(
        self, surface_m: FloatArray, volume_m3: FloatArray, moment_m4: FloatArray
    ) -> FloatArray:
        """Return the mass (kg) in the vessel without its stretch under the head."""
        start, plain, sloped = self._pieces
        if len(start) == 1:
            return np.asarray(start[0] + plain[0] * volume_m3 + sloped[0] * moment_m4)
        k = piece_of(surface_m, self._edges)
        return np.asarray(start[k] + plain[k] * volume_m3 + sloped[k] * moment_m4)

    def level_from_mass(self, mass_kg: npt.ArrayLike) -> FloatArray:
        """Return the surface (m) below which the liquid weighs ``mass_kg``, any shape.

        Raises
        ------
        RangeError
            More than the vessel holds of this liquid, or less than its table starts from.
        """
        mass = np.asarray(mass_kg, dtype=float)
        low, high = self.vessel.z_min, self.vessel.z_max
        least, most = float(self.mass(low)), float(self.mass(high))
        if not np.all((mass >= least - 1e-12 * most) & (mass <= most * (1.0 + 1e-12))):
            raise RangeError(
                f"between {least:.6g} kg and {most:.6g} kg of this liquid fit into the tank."
            )

        def mass_and_slope(z: FloatArray) -> tuple[FloatArray, FloatArray]:
            return self.mass(z), self.vessel.area(z) * self.column.density(z)

        return rising_root(mass_and_slope, np.clip(mass, least, most), low, high)

    @cached_property
    def _still(self) -> Vessel:
        """The vessel without its stretch under the head."""
        return self.vessel.unstretched

    @cached_property
    def _jumps(self) -> list[float]:
        """Elevations between layers (m), where density jumps."""
        jumps: list[float] = self.column.edges_m[np.diff(self.column.layer) != 0].tolist()
        return jumps

    @cached_property
    def _edges(self) -> FloatArray:
        edges = self.column.edges_m
        return edges[(edges > self.vessel.z_min) & (edges < self.vessel.z_max)]

    @cached_property
    def _pieces(self) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Mass = start + plain V + sloped M in each piece between the edges inside the vessel."""
        column, edges = self.column, self._edges
        bounds = np.concatenate(([self.vessel.z_min], edges))
        inside = np.searchsorted(column.edges_m, bounds, side="right")
        sloped = column.slope[inside]
        plain = column.density_kg_m3[inside] - sloped * column.at_m[inside]
        start = np.zeros(len(bounds))
        if len(edges):
            volume, moment = self._still.volume_and_moment(edges)
            steps = (plain[:-1] - plain[1:]) * volume + (sloped[:-1] - sloped[1:]) * moment
            start[1:] = np.cumsum(steps)
        return start, plain, sloped

    def _compressed_mass(self, surface_m: FloatArray) -> FloatArray:
        """Return the mass (kg) of a column compressed by its own weight."""
        modulus = self.column.bulk_modulus_pa
        assert modulus is not None
        grid = np.linspace(self.vessel.z_min, self.vessel.z_max, COMPRESSION_STEPS + 1)
        nodes = sorted({*grid.tolist(), *self._edges.tolist()})
        below_surface = self.column.areal_mass_to(surface_m)

        def density(z: FloatArray) -> FloatArray:
            weight = self.gravity_m_s2 * (below_surface - self.column.areal_mass_to(z))
            return self.column.density(z) / (1.0 - weight / modulus)

        volume, moment = self.vessel.volume_and_moment(np.full(surface_m.shape, nodes[0]))
        low = np.full(surface_m.shape, nodes[0])
        mass = volume * density(low)
        for node in nodes[1:]:
            high = np.minimum(node, surface_m)
            thick = np.maximum(high - low, 1e-300)
            slope = (density(high) - density(low)) / thick
            next_volume, next_moment = self.vessel.volume_and_moment(high)
            d_volume, d_moment = next_volume - volume, next_moment - moment
            piece = density(low) * d_volume + slope * (d_moment - low * d_volume)
            mass = mass + np.where(high > low, piece, 0.0)
            low, volume, moment = high, next_volume, next_moment
        return np.asarray(mass)


def rising_root(
    value_and_slope: Callable[[FloatArray], tuple[FloatArray, FloatArray]],
    target: FloatArray,
    low: float,
    high: float,
) -> FloatArray:
    """Return where a function that rises from ``low`` to ``high`` reaches each target.

    Parameters
    ----------
    value_and_slope : callable
        Gives the function and its derivative at an array of places.
    target : array of any shape
        Values between those at ``low`` and ``high``.

    Notes
    -----
    Newton steps inside a shrinking bracket; a step that leaves the bracket is replaced by its
    middle, so that a vanishing slope (the tip of a cone) cannot throw it out.
    """
    left, right = np.full(target.shape, low), np.full(target.shape, high)
    place: FloatArray = 0.5 * (left + right)
    for _ in range(200):
        value, slope = value_and_slope(place)
        miss = value - target
        left, right = np.where(miss < 0.0, place, left), np.where(miss > 0.0, place, right)
        with np.errstate(divide="ignore", invalid="ignore"):
            step = place - miss / slope
        inside = (step >= left) & (step <= right)
        better: FloatArray = np.where(
            miss == 0.0, place, np.where(inside, step, 0.5 * (left + right))
        )
        if np.all(np.abs(better - place) <= 1e-15 * (high - low)):
            return better
        place = better
    return place
