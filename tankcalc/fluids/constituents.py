"""Liquid foodstuffs, by what they are made of."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from tankcalc.constants import ICE_POINT_K
from tankcalc.errors import InputError
from tankcalc.fluids.components import whole
from tankcalc.fluids.models import DensityModel, FloatArray

DENSITIES: dict[str, tuple[float, ...]] = {
    "water": (997.18, 3.1439e-3, -3.7574e-3),
    "protein": (1329.9, -0.5184),
    "fat": (925.59, -0.41757),
    "carbohydrate": (1599.1, -0.31046),
    "fibre": (1311.5, -0.36589),
    "ash": (2423.8, -0.28063),
}
"""Density of each constituent, kg/m3: coefficients of the powers of the temperature in degC."""


def constituent_density(name: str, t_c: FloatArray) -> FloatArray:
    """Return the density (kg/m3) of one constituent at -40 to 150 degC.

    References
    ----------
    Y. Choi and M. R. Okos, "Effects of temperature and composition on the thermal properties
    of foods", in Food Engineering and Process Applications 1 (1986) 93-101; the same table in
    ASHRAE Handbook - Refrigeration, "Thermal properties of foods".
    """
    return np.asarray(np.polynomial.polynomial.polyval(np.asarray(t_c), DENSITIES[name]))


@dataclass(frozen=True)
class Constituents(DensityModel):
    """Water, protein, fat, carbohydrate, fibre and ash, mixed without change of volume.

    Parameters
    ----------
    mass_fractions : tuple of (str, float)
        Constituents, named as in `DENSITIES`, with their mass fractions, which sum to 1.

    Raises
    ------
    InputError
        A constituent not known, a fraction not between 0 and 1, or a sum that is not 1.

    Notes
    -----
    1 / rho = sum of w / rho_i. Air in the product and ice below its freezing point are not
    counted. For milk the result is about 0.6 % low: a measured density is better.

    Examples
    --------
    >>> import numpy as np
    >>> juice = Constituents((("water", 0.88), ("carbohydrate", 0.12)))
    >>> round(float(juice.density(np.array(293.15))), 1)
    1042.6
    """

    kind: ClassVar[str] = "constituents"
    mass_fractions: tuple[tuple[str, float], ...]
    limits_k: tuple[float, float] = (ICE_POINT_K - 40.0, ICE_POINT_K + 150.0)
    source: str = "equations of Choi and Okos (1986), volumes added"

    def __post_init__(self) -> None:
        for name, _ in self.mass_fractions:
            if name not in DENSITIES:
                raise InputError(f"{name} is no constituent. Known: {', '.join(DENSITIES)}.")
        whole(self.mass_fractions, "mass fractions")

    def density(self, temperature_k: FloatArray) -> FloatArray:
        """Return the density (kg/m3) at temperatures in K, an array of any shape."""
        t_c = np.asarray(temperature_k) - ICE_POINT_K
        return np.asarray(
            1.0 / sum(w / constituent_density(name, t_c) for name, w in self.mass_fractions)
        )
