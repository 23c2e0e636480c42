"""Densities sampled at elevations, at tank temperature."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar, Literal

import numpy as np

from tankcalc.errors import InputError
from tankcalc.fluids.models import (
    DensityModel,
    FloatArray,
    Pieces,
    Temperatures,
    pieces_through,
    strictly_rising,
)


@dataclass(frozen=True)
class Samples(DensityModel):
    """Density linear between samples; beyond the outermost ones held, or extended.

    Parameters
    ----------
    elevations_m : tuple of float
        Elevations above the datum, strictly rising, m.
    densities_kg_m3 : tuple of float
        Densities at tank temperature, above zero, kg/m3.
    beyond : {"hold", "extend"}
        What holds below the lowest and above the highest sample.

    Raises
    ------
    InputError
        Points that do not rise, densities that are not above zero, or an extension without a
        slope.
    """

    kind: ClassVar[str] = "samples"
    needs_temperature: ClassVar[bool] = False
    elevations_m: tuple[float, ...]
    densities_kg_m3: tuple[float, ...]
    beyond: Literal["hold", "extend"] = "hold"

    def __post_init__(self) -> None:
        if len(self.elevations_m) != len(self.densities_kg_m3) or not self.elevations_m:
            raise InputError("samples need at least one point.")
        if not strictly_rising(self.elevations_m):
            raise InputError("the elevations of samples must rise from point to point.")
        if not all(0.0 < rho < float("inf") for rho in self.densities_kg_m3):
            raise InputError("a density must be above zero.")
        if self.beyond == "extend" and len(self.elevations_m) < 2:
            raise InputError('beyond = "extend" needs at least two points.')

    def density(self, temperature_k: FloatArray) -> FloatArray:
        """Return the plain mean of the samples (kg/m3), in the shape of the temperatures."""
        return np.full(np.shape(temperature_k), float(np.mean(self.densities_kg_m3)))

    def pieces(self, temperatures: Temperatures | None) -> Pieces:
        """Return the sampled density over elevation; temperature has no part in it."""
        return pieces_through(
            np.asarray(self.elevations_m, dtype=float),
            np.asarray(self.densities_kg_m3, dtype=float),
            extend=self.beyond == "extend",
        )
