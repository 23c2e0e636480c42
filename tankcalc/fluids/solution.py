"""A solution, by the user's grid of density over concentration and temperature."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import ClassVar

import numpy as np

from tankcalc.errors import InputError
from tankcalc.fluids.models import DensityModel, FloatArray, strictly_rising
from tankcalc.fluids.table import Table


@dataclass(frozen=True)
class Grid:
    """Densities at concentrations and temperatures, with whose figures they are.

    Parameters
    ----------
    concentrations : tuple of float (n,)
        At least two, strictly rising, 0 to 1; on the basis that the figures are for.
    temperatures_k : tuple of float (m,)
        At least two, strictly rising, K.
    densities_kg_m3 : tuple of n tuples of m floats
        A row for each concentration, above zero, kg/m3.
    source, date : str
        Whose figures these are, and when they were printed or measured.

    Raises
    ------
    InputError
        Rows that do not fit, columns that do not rise, densities that are not above zero.
    """

    concentrations: tuple[float, ...]
    temperatures_k: tuple[float, ...]
    densities_kg_m3: tuple[tuple[float, ...], ...]
    source: str
    date: str

    def __post_init__(self) -> None:
        for what, steps in (
            ("concentrations", self.concentrations),
            ("temperatures", self.temperatures_k),
        ):
            if len(steps) < 2 or not strictly_rising(steps):
                raise InputError(f"a grid needs at least two {what}, each above the one before.")
        if not (self.concentrations[0] >= 0.0 and self.concentrations[-1] <= 1.0):
            raise InputError("the concentrations of a grid must be between 0 and 1.")
        if len(self.densities_kg_m3) != len(self.concentrations):
            raise InputError(
                f"a grid of {len(self.concentrations)} concentrations needs as many rows of "
                f"densities, found {len(self.densities_kg_m3)}."
            )
        for n, row in enumerate(self.densities_kg_m3, start=1):
            if len(row) != len(self.temperatures_k):
                raise InputError(
                    f"row {n} of the grid holds {len(row)} densities for "
                    f"{len(self.temperatures_k)} temperatures."
                )
            if not all(0.0 < rho < float("inf") for rho in row):
                raise InputError("a density must be above zero.")


@dataclass(frozen=True)
class Solution(DensityModel):
    """One concentration of a grid; monotone interpolation in both directions.

    Parameters
    ----------
    concentration : float
        Within the grid, on the grid's own basis (as a rule the mass fraction).
    grid : Grid

    Raises
    ------
    InputError
        A concentration outside the grid.

    Notes
    -----
    At each temperature of the grid the density at this concentration is found by the monotone
    cubic of `Table`, then the same is done over temperature. Nothing is extrapolated.

    Examples
    --------
    >>> import numpy as np
    >>> rows = ((1000.0, 990.0), (1100.0, 1080.0))
    >>> grid = Grid((0.0, 0.2), (293.15, 313.15), rows, "made up", "2026")
    >>> round(float(Solution(0.1, grid).density(np.array(303.15))), 6)
    1042.5
    """

    kind: ClassVar[str] = "solution"
    concentration: float
    grid: Grid

    def __post_init__(self) -> None:
        low, high = self.grid.concentrations[0], self.grid.concentrations[-1]
        if not low <= self.concentration <= high:
            raise InputError(
                f"a concentration of {100.0 * self.concentration:g} % is outside the grid's, "
                f"{100.0 * low:g} to {100.0 * high:g} %."
            )

    @property
    def source(self) -> str:  # type: ignore[override]
        """Whose figures the grid holds, and of when."""
        return f"{self.grid.source}, {self.grid.date}"

    @property
    def limits_k(self) -> tuple[float, float]:  # type: ignore[override]
        """First and last temperature of the grid, K."""
        return (self.grid.temperatures_k[0], self.grid.temperatures_k[-1])

    @cached_property
    def _over_temperature(self) -> Table:
        at = np.array(self.concentration)
        return Table(
            self.grid.temperatures_k,
            tuple(
                float(Table(self.grid.concentrations, column).density(at))
                for column in zip(*self.grid.densities_kg_m3, strict=True)
            ),
        )

    def density(self, temperature_k: FloatArray) -> FloatArray:
        """Return the density (kg/m3) at temperatures in K, an array of any shape."""
        return self._over_temperature.density(temperature_k)
