"""Density of sea water by the TEOS-10 polynomials."""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from tankcalc.fluids.models import FloatArray

LARGEST_SALINITY = 0.042
"""Absolute salinity, kg/kg, up to which the polynomial for the specific volume was fitted."""

# v_ijk in m3/kg, by powers i of the salinity variable, j of temperature, k of pressure.
_VOLUME: dict[tuple[int, int], tuple[float, ...]] = {
    (0, 0): (1.0769995862e-3, -6.0799143809e-5, 9.9856169219e-6, -1.1309361437e-6,
             1.0531153080e-7, -1.2647261286e-8, 1.9613503930e-9),
    (0, 1): (-1.5649734675e-5, 1.8505765429e-5, -1.1736386731e-6, -3.6527006553e-7,
             3.1454099902e-7),
    (0, 2): (2.7762106484e-5, -1.1716606853e-5, 2.1305028740e-6, 2.8695905159e-7),
    (0, 3): (-1.6521159259e-5, 7.9279656173e-6, -4.6132540037e-7),
    (0, 4): (6.9111322702e-6, -3.4102187482e-6, -6.3352916514e-8),
    (0, 5): (-8.0539615540e-7, 5.0736766814e-7),
    (0, 6): (2.0543094268e-7,),
    (1, 0): (-3.1038981976e-4, 2.4262468747e-5, -5.8484432984e-7, 3.6310188515e-7,
             -1.1147125423e-7),
    (1, 1): (3.5009599764e-5, -9.5677088156e-6, -5.5699154557e-6, -2.7295696237e-7),
    (1, 2): (-3.7435842344e-5, -2.3678308361e-7, 3.9137387080e-7),
    (1, 3): (2.4141479483e-5, -3.4558773655e-6, 7.7618888092e-9),
    (1, 4): (-8.7595873154e-6, 1.2956717783e-6),
    (1, 5): (-3.3052758900e-7,),
    (2, 0): (6.6928067038e-4, -3.4792460974e-5, -4.8122251597e-6, 1.6746303780e-8),
    (2, 1): (-4.3592678561e-5, 1.1100834765e-5, 5.4620748834e-6),
    (2, 2): (3.5907822760e-5, 2.9283346295e-6, -6.5731104067e-7),
    (2, 3): (-1.4353633048e-5, 3.1655306078e-7),
    (2, 4): (4.3703680598e-6,),
    (3, 0): (-8.5047933937e-4, 3.7470777305e-5, 4.9263106998e-6),
    (3, 1): (3.4532461828e-5, -9.8447117844e-6, -1.3544185627e-6),
    (3, 2): (-1.8698584187e-5, -4.8826139200e-7),
    (3, 3): (2.2863324556e-6,),
    (4, 0): (5.8086069943e-4, -1.7322218612e-5, -1.7811974727e-6),
    (4, 1): (-1.1959409788e-5, 2.5909225260e-6),
    (4, 2): (3.8595339244e-6,),
    (5, 0): (-2.1092370507e-4, 3.0927427253e-6),
    (5, 1): (1.3864594581e-6,),
    (6, 0): (3.1932457305e-5,),
}  # fmt: skip

# J/kg, by powers of the salinity variable (outer) and of temperature (inner).
_POTENTIAL_ENTHALPY: dict[int, tuple[float, ...]] = {
    0: (61.01362420681071, 168776.46138048015, -2735.2785605119625, 2574.2164453821433,
        -1536.6644434977543, 545.7340497931629, -50.91091728474331, -18.30489878927802),
    2: (268.5520265845071, -12019.028203559312, 3734.858026725145, -2046.7671145057618,
        465.28655623826234, -0.6370820302376359, -10.650848542359153),
    3: (937.2099110620707, 588.1802812170108, 248.39476522971285, -3.871557904936333,
        -2.6268019854268356),
    4: (-1687.914374187449, 936.3206544460336, -942.7827304544439, 369.4389437509002,
        -33.83664947895248, -9.987880382780322),
    5: (246.9598888781377,),
    6: (123.59576582457964,),
    7: (-48.5891069025409,),
}  # fmt: skip

_PER_G_KG = 0.0248826675584615  # 1 / (40 * 35.16504 / 35) kg/g
_SALINITY_OFFSET = 24.0 * _PER_G_KG
_HEAT_CAPACITY_J_KG_K = 3991.86795711963


@lru_cache(maxsize=1)
def _volume_coefficients() -> FloatArray:
    table = np.zeros((7, 7, 7))
    for (i, j), by_pressure in _VOLUME.items():
        table[i, j, : len(by_pressure)] = by_pressure
    return table


def conservative_temperature(salinity_g_kg: FloatArray, t_c: FloatArray) -> FloatArray:
    """Return the Conservative Temperature (degC) of water at the sea surface.

    Parameters
    ----------
    salinity_g_kg : array
        Absolute salinity, g/kg, 0 to 42.
    t_c : array that broadcasts with it
        Temperature (ITS-90) at 101 325 Pa, degC, which there is the potential temperature.

    References
    ----------
    IOC, SCOR and IAPSO, "The international thermodynamic equation of seawater - 2010",
    potential enthalpy as a polynomial of salinity and potential temperature, section 3.3.

    Examples
    --------
    >>> import numpy as np
    >>> round(float(conservative_temperature(np.array(35.0), np.array(15.0))), 4)
    14.9935
    """
    x = np.sqrt(_PER_G_KG * np.asarray(salinity_g_kg))
    y = 0.025 * np.asarray(t_c)
    enthalpy = sum(
        x**power * np.polynomial.polynomial.polyval(y, row)
        for power, row in _POTENTIAL_ENTHALPY.items()
    )
    return np.asarray(enthalpy / _HEAT_CAPACITY_J_KG_K)


def specific_volume(
    salinity_g_kg: FloatArray, conservative_c: FloatArray, sea_pressure_dbar: FloatArray
) -> FloatArray:
    """Return the specific volume of sea water, m3/kg.

    Parameters
    ----------
    salinity_g_kg : array
        Absolute salinity, g/kg, 0 to 42.
    conservative_c : array
        Conservative Temperature, degC, from freezing to 40.
    sea_pressure_dbar : array
        Pressure above 101 325 Pa, dbar (10 kPa), 0 to 8000; all three broadcast.

    References
    ----------
    F. Roquet et al., "Accurate polynomial expressions for the density and specific volume of
    seawater using the TEOS-10 standard", Ocean Modelling 90 (2015) 29-43, the 75-term
    expression.

    Examples
    --------
    >>> import numpy as np
    >>> round(1.0 / float(specific_volume(np.array(34.7118), np.array(28.8099), np.array(10.0))), 6)
    1021.839936
    """
    x = np.sqrt(_PER_G_KG * np.asarray(salinity_g_kg) + _SALINITY_OFFSET)
    y, z = 0.025 * np.asarray(conservative_c), 1e-4 * np.asarray(sea_pressure_dbar)
    x, y, z = np.broadcast_arrays(x, y, z)
    return np.asarray(np.polynomial.polynomial.polyval3d(x, y, z, _volume_coefficients()))


def freezing_c(salinity_g_kg: float) -> float:
    """Return the freezing temperature (degC) of sea water at the surface, within 0.01 K.

    References
    ----------
    F. J. Millero, in "Algorithms for computation of fundamental properties of seawater",
    Unesco technical papers in marine science 44 (1983), equation 24, with practical salinity
    as absolute salinity times 35 / 35.16504.
    """
    s = salinity_g_kg * 35.0 / 35.16504
    return float(-0.0575 * s + 1.710523e-3 * s**1.5 - 2.154996e-4 * s * s)
