"""API gravity and relative density, to and from density.

References
----------
API MPMS Chapter 11.5.3 (2009), relations between density, relative density and API gravity; the
density of water at 60 degF is that of the 2004 edition of Chapter 11.1.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from tankcalc.errors import RangeError
from tankcalc.fluids.models import FloatArray

WATER_60F_KG_M3: Final = 999.016
"""Density of water at 60 degF: API MPMS 11.1-2004 (the 1980 edition took 999.012)."""


def density60_from_relative(relative: FloatArray | float) -> FloatArray:
    """Return the density at 60 degF (kg/m3) of a relative density 60/60 degF, above zero.

    Raises
    ------
    RangeError
        A relative density that is not above zero.
    """
    return _above_zero(relative, "relative density") * WATER_60F_KG_M3


def relative_from_density60(density_kg_m3: FloatArray | float) -> FloatArray:
    """Return the relative density 60/60 degF of a density at 60 degF, kg/m3 above zero.

    Raises
    ------
    RangeError
        A density that is not above zero.
    """
    return _above_zero(density_kg_m3, "density") / WATER_60F_KG_M3


def density60_from_api(api: FloatArray | float) -> FloatArray:
    """Return the density at 60 degF (kg/m3) of an API gravity (degAPI), above -131.5.

    Parameters
    ----------
    api : float or array
        API gravity, degAPI.

    Raises
    ------
    RangeError
        A gravity of -131.5 degAPI or less, which no density has.

    Notes
    -----
    RD = 141.5 / (131.5 + API), both at 60 degF.

    References
    ----------
    API MPMS 11.5.3, definition of API gravity.

    Examples
    --------
    >>> round(float(density60_from_api(10.0)), 3)
    999.016
    """
    shifted = 131.5 + np.asarray(api, dtype=float)
    if not np.all((shifted > 0.0) & np.isfinite(shifted)):
        raise RangeError("an API gravity lies above -131.5 degAPI.")
    return np.asarray(141.5 / shifted * WATER_60F_KG_M3)


def api_from_density60(density_kg_m3: FloatArray | float) -> FloatArray:
    """Return the API gravity (degAPI) of a density at 60 degF, kg/m3 above zero.

    Raises
    ------
    RangeError
        A density that is not above zero.
    """
    return 141.5 / relative_from_density60(density_kg_m3) - 131.5


def hydrometer_correction(t_degf: FloatArray | float) -> FloatArray:
    """Return what a soda-glass hydrometer's reading is multiplied by to be a density.

    Parameters
    ----------
    t_degf : float or array
        Temperature of the liquid and the glass, degF; the hydrometer is marked for 60 degF.

    Notes
    -----
    1 - 0.00001278 (t - 60) - 0.0000000062 (t - 60)^2. Tables 5 and 53 contain it; 6 and 54 do not.

    References
    ----------
    ASTM D1250-80 / API MPMS 11.1 (1980), implementation procedure of Table 5; from memory.

    Examples
    --------
    >>> round(float(hydrometer_correction(83.0)), 6)
    0.999703
    """
    dt = np.asarray(t_degf, dtype=float) - 60.0
    return 1.0 - 0.00001278 * dt - 0.0000000062 * dt * dt


def _above_zero(values: FloatArray | float, what: str) -> FloatArray:
    """Return the values as an array, refusing one that is not above zero."""
    array = np.asarray(values, dtype=float)
    if not np.all((array > 0.0) & np.isfinite(array)):
        raise RangeError(f"a {what} must be above zero.")
    return array
