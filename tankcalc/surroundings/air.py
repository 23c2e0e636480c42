"""The outside air: its density, and the pressure and temperature of the standard atmosphere."""

from __future__ import annotations

import math
from typing import Final

from tankcalc.constants import ICE_POINT_K, STANDARD_ATMOSPHERE_PA, STANDARD_GRAVITY_M_S2
from tankcalc.surroundings.limits import check

PRESSURES_HPA: Final = (400.0, 1150.0)
TEMPERATURES_C: Final = (-60.0, 60.0)
"""Outside air that is believed: any weather at any inhabited height."""

_CARBON_DIOXIDE: Final = 0.0004
"""Mole fraction of carbon dioxide that CIPM-2007 takes for outside air."""


def moist_air_density(
    absolute_pa: float,
    temperature_k: float,
    humidity: float,
    carbon_dioxide: float = _CARBON_DIOXIDE,
) -> float:
    """Return the density of moist air.

    Parameters
    ----------
    absolute_pa : float
        Pressure, Pa absolute, 40 000 to 115 000.
    temperature_k : float
        Temperature, K, 213.15 to 333.15.
    humidity : float
        Relative humidity over liquid water, 0 to 1.
    carbon_dioxide : float
        Mole fraction of carbon dioxide, 0 to 0.01.

    Returns
    -------
    float
        Density, kg/m3.

    Raises
    ------
    InputError
        If the air is outside the ranges above.

    Notes
    -----
    The equation of the International Committee for Weights and Measures, CIPM-2007::

        rho = (3.483740 + 1.4446 (xc - 0.0004)) 10^-3 (1 - 0.3780 xv) p / (Z T)

    with xv the mole fraction of water vapour and Z the compressibility factor. It is recommended,
    with a relative standard uncertainty of 2.2e-5, for 600 to 1100 hPa and 15 to 27 degC. Outside
    that range it is used all the same: from -60 to 60 degC it stays within 2e-4 of the real moist
    air of ASHRAE RP-1485, and within 8e-4 of it in saturated air at 60 degC. Air bears 0.15 % of
    a liquid's weight, so that is about 1e-6 of a level.

    References
    ----------
    Picard, Davis, Glaeser, Fujii: Revised formula for the density of moist air (CIPM-2007),
    Metrologia 45 (2008) 149, eq. (1) to (4) and Appendix A.

    Examples
    --------
    >>> round(moist_air_density(101_325.0, 293.15, 0.5), 5)
    1.19931
    """
    check("air pressure", absolute_pa / 100.0, PRESSURES_HPA, "hPa")
    check("air temperature", temperature_k - ICE_POINT_K, TEMPERATURES_C, "degC")
    check("air humidity", humidity, (0.0, 1.0), "(relative)")
    check("carbon dioxide", carbon_dioxide, (0.0, 0.01), "(mole fraction)")
    xv = _vapour_fraction(absolute_pa, temperature_k, humidity)
    z = _compressibility(absolute_pa, temperature_k, xv)
    molar = (3.483740 + 1.4446 * (carbon_dioxide - _CARBON_DIOXIDE)) * 1e-3
    return molar * (1.0 - 0.3780 * xv) * absolute_pa / (z * temperature_k)


def standard_pressure(height_m: float) -> float:
    """Return the pressure of the standard atmosphere at a height above sea level.

    Parameters
    ----------
    height_m : float
        Geometric height above sea level, m, -2000 to 20 000.

    Returns
    -------
    float
        Pressure, Pa absolute. The weather moves the true one by some 3 % either way.

    Raises
    ------
    InputError
        If the height is out of range.

    Notes
    -----
    Hydrostatic equilibrium of an ideal gas with a constant lapse rate, in geopotential height
    H = r h / (r + h)::

        p = p0 (T / T0)^(g M / (R L)),         T = T0 - L H             up to H = 11 km
        p = p(11 km) exp(-g M (H - 11 km) / (R T)),  T = 216.65 K       above it

    References
    ----------
    U.S. Standard Atmosphere 1976, eq. (18), (33a), (33b) and Tables 2 and 4; ISO 2533:1975.

    Examples
    --------
    >>> round(standard_pressure(500.0))
    95461
    """
    h = _geopotential(height_m)
    at_11_km = float((_TROPOPAUSE_K / _SEA_LEVEL_K) ** (_G_M_OVER_R / _LAPSE_K_M))
    if h > _TROPOPAUSE_M:
        above = math.exp(-_G_M_OVER_R * (h - _TROPOPAUSE_M) / _TROPOPAUSE_K)
        return STANDARD_ATMOSPHERE_PA * at_11_km * above
    ratio = (_SEA_LEVEL_K - _LAPSE_K_M * h) / _SEA_LEVEL_K
    return STANDARD_ATMOSPHERE_PA * float(ratio ** (_G_M_OVER_R / _LAPSE_K_M))


def standard_temperature(height_m: float) -> float:
    """Return the temperature of the standard atmosphere at a height above sea level.

    Parameters
    ----------
    height_m : float
        Geometric height above sea level, m, -2000 to 20 000.

    Returns
    -------
    float
        Temperature, K.

    Raises
    ------
    InputError
        If the height is out of range.

    References
    ----------
    U.S. Standard Atmosphere 1976, eq. (23) and Table 4; ISO 2533:1975.

    Examples
    --------
    >>> standard_temperature(0.0)
    288.15
    """
    return max(_TROPOPAUSE_K, _SEA_LEVEL_K - _LAPSE_K_M * _geopotential(height_m))


# U.S. Standard Atmosphere 1976, Tables 2 and 4.
_SEA_LEVEL_K: Final = 288.15
_LAPSE_K_M: Final = 6.5e-3
_TROPOPAUSE_M: Final = 11_000.0
_TROPOPAUSE_K: Final = _SEA_LEVEL_K - _LAPSE_K_M * _TROPOPAUSE_M
_EARTH_RADIUS_M: Final = 6_356_766.0
# Its own gas constant, 8.31432 J/(mol K), not today's; molar mass of air 28.9644 g/mol.
_G_M_OVER_R: Final = STANDARD_GRAVITY_M_S2 * 28.9644e-3 / 8.31432


def _geopotential(height_m: float) -> float:
    check("height", height_m, (-2_000.0, 20_000.0), "m")
    return _EARTH_RADIUS_M * height_m / (_EARTH_RADIUS_M + height_m)


def _vapour_fraction(p: float, T: float, humidity: float) -> float:
    """Return the mole fraction of water vapour: CIPM-2007, Appendix A1."""
    t = T - ICE_POINT_K
    exponent = 1.2378847e-5 * T * T - 1.9121316e-2 * T + 33.93711047 - 6.3431645e3 / T
    enhancement = 1.00062 + 3.14e-8 * p + 5.6e-7 * t * t
    return humidity * enhancement * math.exp(exponent) / p


def _compressibility(p: float, T: float, xv: float) -> float:
    """Return the compressibility factor: CIPM-2007, Appendix A2."""
    t = T - ICE_POINT_K
    dry = 1.58123e-6 - 2.9331e-8 * t + 1.1043e-10 * t * t
    mixed = (5.707e-6 - 2.051e-8 * t) * xv + (1.9898e-4 - 2.376e-6 * t) * xv * xv
    second = 1.83e-11 - 0.765e-8 * xv * xv
    return 1.0 - p / T * (dry + mixed) + (p / T) ** 2 * second
