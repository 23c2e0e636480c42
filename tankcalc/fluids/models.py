"""What every density model is: a temperature goes in, a density comes out.

A model lives in a module of its own and is entered in the profile schema; nothing else needs
to know of it.
"""

from __future__ import annotations

import itertools
from abc import ABC, abstractmethod
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar

import numpy as np
import numpy.typing as npt

from tankcalc.constants import ICE_POINT_K
from tankcalc.errors import RangeError

if TYPE_CHECKING:
    from tankcalc.fluids.vapour import Vapour

FloatArray = npt.NDArray[np.float64]

SUBDIVISIONS = 128
"""Straight pieces per interval between two temperature elements: the density is then within
2e-7 of water's, the most curved of liquids, with 30 K between elements."""


@dataclass(frozen=True, slots=True)
class Temperatures:
    """Liquid temperature over elevation: one for all, or linear between elements.

    Attributes
    ----------
    values_k : tuple of float
        At least one temperature, K.
    elevations_m : tuple of float
        Their elevations, m, rising; empty when the one temperature is that of all the liquid.
        Beyond the outermost elements their temperature is held.
    """

    values_k: tuple[float, ...]
    elevations_m: tuple[float, ...] = ()

    def knots(self) -> FloatArray:
        """Return the elevations (m) between which temperature is refined; may be empty."""
        if len(self.elevations_m) < 2 or len(set(self.values_k)) == 1:
            return np.empty(0)
        z = np.asarray(self.elevations_m)
        steps = np.linspace(0.0, 1.0, SUBDIVISIONS, endpoint=False)
        inner = (z[:-1, None] + np.diff(z)[:, None] * steps).ravel()
        return np.append(inner, z[-1])

    def at(self, z_m: FloatArray) -> FloatArray:
        """Return the temperature (K) at elevations ``z_m``, same shape."""
        if not self.elevations_m:
            return np.full(np.shape(z_m), self.values_k[0])
        return np.asarray(np.interp(z_m, self.elevations_m, self.values_k))


@dataclass(frozen=True, slots=True)
class Pieces:
    """Straight pieces of density over elevation, from minus to plus infinity.

    Attributes
    ----------
    edges_m : array (n - 1,)
        Elevations between the pieces, m, rising.
    at_m : array (n,)
        Elevation at which ``density_kg_m3`` of each piece holds, m.
    density_kg_m3 : array (n,)
    slope : array (n,)
        d rho / dz, kg/m4.
    """

    edges_m: FloatArray
    at_m: FloatArray
    density_kg_m3: FloatArray
    slope: FloatArray


def pieces_through(z_m: FloatArray, rho: FloatArray, *, extend: bool = False) -> Pieces:
    """Return straight pieces through points, held (or extended) beyond the outermost ones.

    Parameters
    ----------
    z_m, rho : array (n,)
        Elevations (m), strictly rising, and densities (kg/m3).
    extend : bool
        Carry the outermost slopes on instead of holding the outermost values.
    """
    if len(z_m) == 1:
        return Pieces(edges_m=np.empty(0), at_m=z_m, density_kg_m3=rho, slope=np.zeros(1))
    inner = np.diff(rho) / np.diff(z_m)
    ends = (inner[:1], inner[-1:]) if extend else (np.zeros(1), np.zeros(1))
    return Pieces(
        edges_m=z_m,
        at_m=np.concatenate((z_m[:1], z_m)),
        density_kg_m3=np.concatenate((rho[:1], rho)),
        slope=np.concatenate((ends[0], inner, ends[1])),
    )


class DensityModel(ABC):
    """A liquid's density, by temperature and, for sampled columns, by elevation.

    Attributes
    ----------
    kind : str
        The model's name in a fluid file.
    needs_temperature : bool
        False where the density is stated as it is in the tank.
    limits_k : (float, float)
        Temperatures outside of which the model refuses, K.
    bulk_modulus_pa : float or None
        Where set, the column is compressed by its own weight.
    base_k : float or None
        Temperature of the standard volume where the model states one, K; None: the site's.
    source : str
        Whose equations or figures these are, with the edition, for reports.
    """

    kind: ClassVar[str]
    needs_temperature: ClassVar[bool] = True
    limits_k: tuple[float, float] = (0.0, float("inf"))
    bulk_modulus_pa: float | None = None
    base_k: float | None = None
    source: str = "figures of the fluid file"

    @property
    def vapour(self) -> Vapour | None:
        """What stands above the liquid where the model knows it; None: it does not."""
        return None

    def saturation_pa(self, temperature_k: float) -> float | None:
        """Return the pressure (Pa, absolute) at which it boils; None: the model knows none."""
        return None

    @abstractmethod
    def density(self, temperature_k: FloatArray) -> FloatArray:
        """Return the density (kg/m3) at temperatures in K, an array of any shape."""

    def checked_density(self, temperature_k: FloatArray) -> FloatArray:
        """Return the density (kg/m3), refusing temperatures the model does not cover.

        Raises
        ------
        RangeError
            A temperature lies outside ``limits_k``.
        """
        low, high = self.limits_k
        outside = ~((temperature_k >= low) & (temperature_k <= high))
        if np.any(outside):
            found = float(np.ravel(temperature_k)[np.ravel(outside)][0]) - ICE_POINT_K
            raise RangeError(
                f"{found:.2f} degC is outside what the {self.kind} density covers "
                f"({low - ICE_POINT_K:.2f} to {high - ICE_POINT_K:.2f} degC)."
            )
        return self.density(temperature_k)

    def standard_density(
        self, observed_kg_m3: FloatArray, temperature_k: FloatArray, base_k: float
    ) -> FloatArray:
        """Return the density at a base temperature of a liquid observed at another, kg/m3.

        Parameters
        ----------
        observed_kg_m3, temperature_k : array
            Density at the temperature (K); of one shape, or broadcasting.
        base_k : float
            Base temperature, K.

        Raises
        ------
        RangeError
            A temperature lies outside ``limits_k``, or the density outside the model's range.

        Notes
        -----
        An observed density other than the model's own scales the whole of its curve.
        """
        at_base = self.checked_density(np.asarray(base_k))
        at_observed = self.checked_density(np.asarray(temperature_k, dtype=float))
        return np.asarray(observed_kg_m3 * at_base / at_observed)

    def of_reference(self, reference_kg_m3: float) -> DensityModel:
        """Return the model of a liquid with another density at the base temperature, kg/m3.

        The same model where the change with temperature does not depend on that density.
        """
        return self

    def pressure_factor(self, temperature_k: FloatArray, gauge_pa: FloatArray) -> FloatArray:
        """Return the density against that at outside pressure; 1 unless the model knows better."""
        return np.ones(np.broadcast_shapes(np.shape(temperature_k), np.shape(gauge_pa)))

    def pieces(self, temperatures: Temperatures | None) -> Pieces:
        """Return density over elevation for a liquid at these temperatures."""
        if temperatures is None:
            temperatures = Temperatures((ICE_POINT_K,))
        knots = temperatures.knots()
        if not knots.size:
            knots = np.zeros(1)
        return pieces_through(knots, self.checked_density(temperatures.at(knots)))


def strictly_rising(values: Sequence[float]) -> bool:
    """Return whether every value is above the one before it."""
    return all(high > low for low, high in itertools.pairwise(values))
