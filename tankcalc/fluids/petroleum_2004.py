"""Volume correction of petroleum liquids for temperature and pressure, edition of 2004.

Temperatures are in degF and pressures in psig where the standard defines its figures in them.
Every function takes floats or arrays that broadcast.

References
----------
API MPMS Chapter 11.1-2004 (ASTM D1250-04), procedure 11.1.6.1 (60 degF to observed), without
rounding of what goes in.
"""

from __future__ import annotations

from typing import Final, NamedTuple

import numpy as np

from tankcalc.constants import ICE_POINT_K
from tankcalc.fluids.models import FloatArray
from tankcalc.fluids.petroleum_groups import (
    Coefficients,
    Commodity,
    expansion,
    refuse_outside,
    steepness,
)
from tankcalc.fluids.petroleum_newton import Response

PSI_PA: Final = 6894.757
"""One psi as the 2004 procedures convert it, Pa; exactly it is 6894.757293 Pa."""

LIMITS_DEGF: Final = (-58.0, 302.0)
LIMITS_PSIG: Final = (0.0, 1500.0)
BASE_DEGF: Final = 60.0

SHIFT_60: Final = 0.01374979547
"""Twice the shift of the temperature scale at 60 degF, degF (11.1.6.1 step 2)."""

SCALE_SHIFT: Final = (
    -0.148759,
    -0.267408,
    1.080760,
    1.269056,
    -4.089591,
    -1.871251,
    7.438081,
    -3.536296,
)
"""a1 to a8 of t68 = t90 - sum a_i (t90 / 630)^i, in degC (11.1.5.3)."""

COMPRESSIBILITY: Final = (-1.9947, 0.00013427, 793920.0, 2326.0)
"""A, B, C, D of the compressibility (11.1.6.1 step 5)."""

SLACK = 1e-7
"""Rounding allowed at a limit that was reached through a change of unit or a solution."""


class Factors(NamedTuple):
    """Volume at the base over volume as it is, i.e. density as it is over density at the base.

    Attributes
    ----------
    ctl : array
        For temperature.
    scaled_compressibility : array
        1e-5 per psi.
    cpl : array
        For pressure.
    """

    ctl: FloatArray
    scaled_compressibility: FloatArray
    cpl: FloatArray

    @property
    def ctpl(self) -> FloatArray:
        """For both."""
        return self.ctl * self.cpl


def degf_from_kelvin(temperature_k: FloatArray | float) -> FloatArray:
    """Return temperatures in degF from K."""
    return (np.asarray(temperature_k, dtype=float) - ICE_POINT_K) * 1.8 + 32.0


def psig_from_pascal(gauge_pa: FloatArray | float) -> FloatArray:
    """Return gauge pressures in psi from Pa, by the factor of the 2004 procedures."""
    return np.asarray(gauge_pa, dtype=float) / PSI_PA


def ipts68_from_its90_degf(t_degf: FloatArray | float) -> FloatArray:
    """Return temperatures on the scale of 1968 (degF) from those of 1990 (degF).

    Notes
    -----
    The equations were fitted on the older scale; at 100 degF the two differ by 0.017 degF.

    References
    ----------
    API MPMS 11.1-2004, 11.1.5.3.

    Examples
    --------
    >>> round(float(ipts68_from_its90_degf(100.0)), 6)
    100.017344
    """
    t90 = (np.asarray(t_degf, dtype=float) - 32.0) / 1.8
    scaled = t90 / 630.0
    shift = np.zeros_like(scaled)
    for coefficient in reversed(SCALE_SHIFT):
        shift = (shift + coefficient) * scaled
    return 1.8 * (t90 - shift) + 32.0


def density_on_1968_scale(k: Coefficients, density60_kg_m3: FloatArray) -> FloatArray:
    """Return the density (kg/m3) at 60 degF of the older scale from that at 60 degF.

    References
    ----------
    API MPMS 11.1-2004, 11.1.6.1 step 3.
    """
    a = SHIFT_60 / 2.0 * expansion(k, density60_kg_m3)
    grown = np.exp(a * (1.0 + 0.8 * a)) - 1.0
    return density60_kg_m3 * (
        1.0 + grown / (1.0 + a * (1.0 + 1.6 * a) * steepness(k, density60_kg_m3))
    )


def ctl_from_alpha60(alpha60_per_degf: FloatArray, t68_degf: FloatArray) -> FloatArray:
    """Return the factor for temperature from 60 degF; arguments on the older scale.

    Notes
    -----
    exp(-alpha Dt (1 + 0.8 alpha (Dt + 0.01374979547))) with Dt = t - 60.0068749.

    References
    ----------
    API MPMS 11.1-2004, 11.1.6.1 step 4.
    """
    dt = t68_degf - (BASE_DEGF + SHIFT_60 / 2.0)
    return np.exp(-alpha60_per_degf * dt * (1.0 + 0.8 * alpha60_per_degf * (dt + SHIFT_60)))


def scaled_compressibility(density68_kg_m3: FloatArray, t68_degf: FloatArray) -> FloatArray:
    """Return the compressibility, 1e-5 per psi; arguments on the older scale.

    References
    ----------
    API MPMS 11.1-2004, 11.1.6.1 step 5.
    """
    a, b, c, d = COMPRESSIBILITY
    return np.exp(a + b * t68_degf + (c + d * t68_degf) / (density68_kg_m3 * density68_kg_m3))


def cpl_from_compressibility(scaled: FloatArray, p_psig: FloatArray) -> FloatArray:
    """Return the factor for pressure, psig at or above zero; 1 / (1 - 1e-5 F p)."""
    return 1.0 / (1.0 - 1e-5 * scaled * p_psig)


def factors_from_60(
    commodity: Commodity,
    density60_kg_m3: FloatArray | float,
    t_degf: FloatArray | float,
    p_psig: FloatArray | float = 0.0,
) -> Factors:
    """Return the factors from 60 degF and no pressure to a temperature and a pressure.

    Parameters
    ----------
    commodity : Commodity
        ``CRUDE``, ``REFINED``, ``LUBRICATING_OIL``, one of ``COMMODITIES``, or ``special``.
    density60_kg_m3 : float or array
        Density at 60 degF, kg/m3, within the commodity's limits.
    t_degf : float or array
        -58 to 302 degF, scale of 1990.
    p_psig : float or array
        Up to 1500 psig; below zero counts as zero.

    Raises
    ------
    RangeError
        A limit of the method is passed; the message names it with its figures.

    Examples
    --------
    >>> from tankcalc.fluids.petroleum_groups import CRUDE
    >>> found = factors_from_60(CRUDE, 850.0, 100.0, 500.0)
    >>> round(float(found.ctl), 6), round(float(found.cpl), 6)
    (0.981008, 1.002863)
    """
    density60 = np.asarray(density60_kg_m3, dtype=float)
    refuse_outside(
        density60,
        (commodity.low_kg_m3, commodity.high_kg_m3),
        f"{{found}} kg/m3 at 60 degF is outside {commodity.name} of the 2004 equations "
        "({low} to {high} kg/m3 at 60 degF).",
        SLACK,
    )
    t, p = within(t_degf, p_psig)
    k = commodity.coefficients(commodity.index(density60))
    t68 = ipts68_from_its90_degf(t)
    density68 = density_on_1968_scale(k, density60)
    scaled = scaled_compressibility(density68, t68)
    ctl = ctl_from_alpha60(expansion(k, density68), t68)
    return Factors(ctl, scaled, cpl_from_compressibility(scaled, p))


def within(t_degf: FloatArray | float, p_psig: FloatArray | float) -> tuple[FloatArray, FloatArray]:
    """Return temperature and pressure (none below zero) after refusing what the method does."""
    refuse_outside(
        t_degf,
        LIMITS_DEGF,
        "{found} degF is outside the temperatures of the 2004 equations "
        "({low} to {high} degF, -50 to 150 degC).",
        SLACK,
    )
    p = np.maximum(np.asarray(p_psig, dtype=float), 0.0)
    refuse_outside(
        p,
        LIMITS_PSIG,
        "{found} psig is outside the pressures of the 2004 equations "
        "({low} to {high} psig, 0 to 10342 kPa gauge).",
        SLACK,
    )
    return np.asarray(t_degf, dtype=float), p


def respond(k: Coefficients, rho: FloatArray, t68: FloatArray, p: FloatArray) -> Response:
    """Return the density that densities at 60 degF come to, with its slope."""
    density68 = density_on_1968_scale(k, rho)
    alpha = expansion(k, density68)
    scaled = scaled_compressibility(density68, t68)
    cpl = cpl_from_compressibility(scaled, p)
    grown = alpha * (t68 - BASE_DEGF)
    by_heat = steepness(k, rho) * grown * (1.0 + 1.6 * grown)
    _, _, c, d = COMPRESSIBILITY
    by_pressure = 2e-5 * scaled * p * cpl * (c + d * t68) / (density68 * density68)
    return Response(rho * ctl_from_alpha60(alpha, t68) * cpl, 1.0 + by_heat - by_pressure)
