"""A user's table of density against temperature."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, ClassVar

import numpy as np

from tankcalc.errors import InputError
from tankcalc.fluids.models import DensityModel, FloatArray, strictly_rising

if TYPE_CHECKING:
    from collections.abc import Callable


@dataclass(frozen=True)
class Table(DensityModel):
    """Monotone interpolation between points of a table; no extrapolation.

    Parameters
    ----------
    temperatures_k : tuple of float
        At least two, strictly rising, K.
    densities_kg_m3 : tuple of float
        As many, above zero, kg/m3.

    Raises
    ------
    InputError
        Too few points, temperatures that do not rise, densities that are not above zero.

    Notes
    -----
    Two points are joined by a line; three or more by the monotone cubic of Fritsch and Butland.

    References
    ----------
    F. N. Fritsch and J. Butland, "A method for constructing local monotone piecewise cubic
    interpolants", SIAM J. Sci. Stat. Comput. 5 (1984) 300-304, as in
    ``scipy.interpolate.PchipInterpolator``.
    """

    kind: ClassVar[str] = "table"
    temperatures_k: tuple[float, ...]
    densities_kg_m3: tuple[float, ...]

    def __post_init__(self) -> None:
        if len(self.temperatures_k) != len(self.densities_kg_m3) or len(self.temperatures_k) < 2:
            raise InputError("a table needs at least two points.")
        if not strictly_rising(self.temperatures_k):
            raise InputError("the temperatures of a table must rise from point to point.")
        if not all(0.0 < rho < float("inf") for rho in self.densities_kg_m3):
            raise InputError("a density must be above zero.")

    @property
    def limits_k(self) -> tuple[float, float]:  # type: ignore[override]
        """First and last temperature of the table, K."""
        return (self.temperatures_k[0], self.temperatures_k[-1])

    @cached_property
    def _interpolant(self) -> Callable[[FloatArray], FloatArray]:
        if len(self.temperatures_k) == 2:
            return lambda t: np.interp(t, self.temperatures_k, self.densities_kg_m3)
        from scipy.interpolate import PchipInterpolator

        through_points: Callable[[FloatArray], FloatArray] = PchipInterpolator(
            self.temperatures_k, self.densities_kg_m3, extrapolate=False
        )
        return through_points

    def density(self, temperature_k: FloatArray) -> FloatArray:
        """Return the density (kg/m3) at temperatures in K, an array of any shape."""
        return np.asarray(self._interpolant(np.asarray(temperature_k)))
