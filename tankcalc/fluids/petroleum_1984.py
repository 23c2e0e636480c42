"""Compressibility of petroleum liquids as of 1984, the companion of the 1980 tables.

References
----------
API MPMS 11.2.1M (1984); from memory of the field. It agrees with the 2004 compressibility to about
one part in a thousand.
"""

from __future__ import annotations

import numpy as np

from tankcalc.fluids.models import FloatArray
from tankcalc.fluids.petroleum_groups import refuse_outside

LIMITS = (
    (638.0, 1074.0, "kg/m3 at 15 degC"),
    (-30.0, 90.0, "degC"),
    (0.0, 10300.0, "kPa gauge"),
)
"""Of density, temperature and pressure."""


def pressure_factor(
    density15_kg_m3: float, t_degc: FloatArray | float, gauge_pa: FloatArray | float
) -> FloatArray:
    """Return the density under pressure against that at none.

    Parameters
    ----------
    density15_kg_m3 : float
        Density at 15 degC, 638 to 1074 kg/m3.
    t_degc : float or array
        -30 to 90 degC.
    gauge_pa : float or array
        Up to 10 300 kPa; at or below zero the factor is 1 whatever else.

    Raises
    ------
    RangeError
        One of these limits is passed under a pressure above zero.

    Notes
    -----
    1 / (1 - 1e-6 F p), p in kPa, F = exp(-1.62080 + 0.00021592 t + 0.87096 / r^2
    + 0.0042092 t / r^2), r in kg/L.

    Examples
    --------
    >>> round(float(pressure_factor(850.0, 40.0, 1e6)), 6)
    1.000841
    """
    density, t, kpa = np.broadcast_arrays(
        density15_kg_m3, t_degc, np.maximum(np.asarray(gauge_pa, dtype=float), 0.0) / 1000.0
    )
    pressed = ~(kpa == 0.0)
    for values, (low, high, unit) in zip((density, t, kpa), LIMITS, strict=True):
        message = f"{{found}} {unit} is outside the 1984 compressibility ({{low}} to {{high}} "
        refuse_outside(values[pressed], (low, high), f"{message}{unit}).", 1e-7)
    squared = (density / 1000.0) ** 2
    scaled = np.exp(-1.62080 + 0.00021592 * t + (0.87096 + 0.0042092 * t) / squared)
    return np.asarray(1.0 / (1.0 - 1e-6 * scaled * kpa))
