"""Fresh, air-free water and sea water at atmospheric pressure."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from tankcalc.constants import ICE_POINT_K
from tankcalc.errors import InputError
from tankcalc.fluids.models import DensityModel, FloatArray
from tankcalc.fluids.sea_water import (
    LARGEST_SALINITY,
    conservative_temperature,
    freezing_c,
    specific_volume,
)

# Coefficients a5..a10 with exponents n, and b5..b10 with exponents m: IAPWS SR6-08(2011), Table 1.
_A = ((0, 1.93763157e-2), (4, 6.74458446e3), (5, -2.22521604e5), (7, 1.00231247e8),
      (8, -1.63552118e9), (9, 8.32299658e9))  # fmt: skip
_B = ((1, 5.78545292e-3), (2, -1.53195665e-2), (3, 3.11337859e-2), (4, -4.23546241e-2),
      (5, 3.38713507e-2), (6, -1.19946761e-2))  # fmt: skip
_GAS_CONSTANT_J_KG_K = 461.51805


def density_0_to_40_degc(t_c: FloatArray) -> FloatArray:
    """Return the density of air-free water, kg/m3, between 0 and 40 degC at 101 325 Pa.

    Parameters
    ----------
    t_c : array of any shape
        Temperature, degC (ITS-90), 0 to 40.

    References
    ----------
    M. Tanaka et al., "Recommended table for the density of water between 0 degC and 40 degC
    based on recent experimental reports", Metrologia 38 (2001) 301-309, equation 1; stated
    uncertainty below 0.001 kg/m3.

    Examples
    --------
    >>> import numpy as np
    >>> round(float(density_0_to_40_degc(np.array(20.0))), 4)
    998.2067
    """
    rise = t_c - 3.983035
    fall = rise**2 * (t_c + 301.797) / (522528.9 * (t_c + 69.34881))
    return 999.974950 * (1.0 - fall)


def density_at_0_1_mpa(t_k: FloatArray) -> FloatArray:
    """Return the density of liquid water at 0.1 MPa, kg/m3, from -20 to 110 degC.

    Parameters
    ----------
    t_k : array of any shape
        Temperature, K, 253.15 to 383.15 (metastable beyond the boiling point).

    References
    ----------
    IAPWS SR6-08(2011), "Revised Supplementary Release on Properties of Liquid Water at
    0.1 MPa", equation for the specific volume with the coefficients of Table 1; agrees with
    IAPWS-95 within 1e-7.

    Examples
    --------
    >>> import numpy as np
    >>> round(float(density_at_0_1_mpa(np.array(298.15))), 3)
    997.047
    """
    alpha, beta = 10.0 / (593.0 - t_k), 10.0 / (t_k - 232.0)
    total = sum(a * alpha**n for n, a in _A) + sum(b * beta**m for m, b in _B)
    return np.asarray(1e5 / (_GAS_CONSTANT_J_KG_K * 10.0 * total))


_AT_40_DEGC = np.array(ICE_POINT_K + 40.0)
_SEAM = density_0_to_40_degc(np.array(40.0)) / density_at_0_1_mpa(_AT_40_DEGC)


@dataclass(frozen=True)
class Water(DensityModel):
    """Fresh water from 0 to 100 degC, or sea water up to 40 degC.

    Parameters
    ----------
    salinity : float
        Absolute salinity, kilograms of salt in a kilogram of water, 0 to 0.042.

    Raises
    ------
    InputError
        A salinity that is not that of sea water.

    Notes
    -----
    Fresh: the recommended formula of 2001 up to 40 degC, the equation for 0.1 MPa above, scaled
    by 0.9999994 so that the two meet at 40 degC. Dissolved air makes water up to 0.003 kg/m3
    lighter, the pressure of 10 m of water 0.04 kg/m3 heavier; both are neglected.

    Salt: TEOS-10 at atmospheric pressure, from the freezing point up; the proportions of the
    salts are those of the ocean.

    Examples
    --------
    >>> import numpy as np
    >>> round(float(Water(0.035).density(np.array(288.15))), 3)
    1025.849
    """

    kind: ClassVar[str] = "water"
    salinity: float = 0.0

    def __post_init__(self) -> None:
        if not 0.0 <= self.salinity <= LARGEST_SALINITY:
            raise InputError(
                f"a salinity must be between 0 and {LARGEST_SALINITY:g} "
                f"({1000.0 * LARGEST_SALINITY:g} g/kg): stronger brines are a solution."
            )

    @property
    def source(self) -> str:  # type: ignore[override]
        """Whose equations these are."""
        if self.salinity:
            return "TEOS-10, 75-term specific volume of Roquet et al. 2015"
        return "Tanaka et al. 2001 to 40 degC, IAPWS SR6-08(2011) above"

    @property
    def limits_k(self) -> tuple[float, float]:  # type: ignore[override]
        """Temperatures (K) that the equations cover."""
        if self.salinity:
            return (ICE_POINT_K + freezing_c(1000.0 * self.salinity), ICE_POINT_K + 40.0)
        return (ICE_POINT_K, ICE_POINT_K + 100.0)

    def density(self, temperature_k: FloatArray) -> FloatArray:
        """Return the density (kg/m3) at temperatures in K, an array of any shape."""
        t_c = np.asarray(temperature_k) - ICE_POINT_K
        if self.salinity:
            salinity_g_kg = np.asarray(1000.0 * self.salinity)
            conservative_c = conservative_temperature(salinity_g_kg, t_c)
            return 1.0 / specific_volume(salinity_g_kg, conservative_c, np.zeros(()))
        cool = density_0_to_40_degc(np.minimum(t_c, 40.0))
        warm = _SEAM * density_at_0_1_mpa(np.maximum(temperature_k, _AT_40_DEGC))
        return np.where(t_c <= 40.0, cool, warm)
