"""One density at any temperature."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from tankcalc.errors import InputError
from tankcalc.fluids.models import DensityModel, FloatArray


@dataclass(frozen=True)
class Constant(DensityModel):
    """A density stated as it is in the tank (kg/m3, above zero)."""

    kind: ClassVar[str] = "constant"
    needs_temperature: ClassVar[bool] = False
    value_kg_m3: float

    def __post_init__(self) -> None:
        if not 0.0 < self.value_kg_m3 < float("inf"):
            raise InputError("a density must be above zero.")

    def density(self, temperature_k: FloatArray) -> FloatArray:
        """Return the stated density (kg/m3) in the shape of the temperatures."""
        return np.full(np.shape(temperature_k), self.value_kg_m3)
