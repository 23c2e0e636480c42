"""A reference density with a coefficient of thermal expansion."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

from tankcalc.errors import InputError
from tankcalc.fluids.models import DensityModel, FloatArray


@dataclass(frozen=True)
class Expansion(DensityModel):
    """rho = reference / (1 + coefficient (T - at)).

    Parameters
    ----------
    reference_kg_m3 : float
        Density at ``at_k``, kg/m3, above zero.
    at_k : float
        Temperature of the reference density, K.
    coefficient_per_k : float
        Volume expansion, 1/K; liquids that store well lie between 2e-4 and 3e-3.
    bulk_modulus_pa : float or None
        Where given, the column is compressed by its own weight, Pa.

    Raises
    ------
    InputError
        A density or modulus that is not above zero, or an expansion beyond 0.02 per kelvin.

    Notes
    -----
    The coefficient is that of the volume, referred to the volume at ``at_k``.

    Examples
    --------
    >>> import numpy as np
    >>> oil = Expansion(reference_kg_m3=845.0, at_k=288.15, coefficient_per_k=8.3e-4)
    >>> round(float(oil.density(np.array(305.65))), 3)
    832.902
    """

    kind: ClassVar[str] = "expansion"
    reference_kg_m3: float
    at_k: float
    coefficient_per_k: float
    bulk_modulus_pa: float | None = None

    def __post_init__(self) -> None:
        if not 0.0 < self.reference_kg_m3 < float("inf"):
            raise InputError("a reference density must be above zero.")
        if not abs(self.coefficient_per_k) <= 0.02:
            raise InputError("an expansion beyond 0.02 per kelvin is that of no liquid.")
        if self.bulk_modulus_pa is not None and not self.bulk_modulus_pa >= 1e7:
            raise InputError("a bulk modulus below 10 MPa is that of no liquid.")

    @property
    def limits_k(self) -> tuple[float, float]:  # type: ignore[override]
        """Temperatures (K) within 150 K of the reference: one coefficient says no more."""
        return (max(self.at_k - 150.0, 0.0), self.at_k + 150.0)

    def density(self, temperature_k: FloatArray) -> FloatArray:
        """Return the density (kg/m3) at temperatures in K, an array of any shape."""
        return self.reference_kg_m3 / (1.0 + self.coefficient_per_k * (temperature_k - self.at_k))
