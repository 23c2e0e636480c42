"""Petroleum liquids by the edition of 2004 from an observed density to a base, and other bases.

Temperatures are in degF and pressures in psig, as in ``petroleum_2004``. Every function takes
floats or arrays that broadcast.

References
----------
API MPMS Chapter 11.1-2004 (ASTM D1250-04), procedures 11.1.6.2 (observed to 60 degF) and 11.1.7
(other bases), without rounding of what goes in.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from tankcalc.errors import RangeError
from tankcalc.fluids.models import FloatArray
from tankcalc.fluids.petroleum_2004 import (
    BASE_DEGF,
    SLACK,
    Factors,
    factors_from_60,
    ipts68_from_its90_degf,
    respond,
    within,
)
from tankcalc.fluids.petroleum_groups import Commodity
from tankcalc.fluids.petroleum_newton import settle, step

CHUNK = 16_384
"""Rows solved together: what a core's cache holds."""


def density60_from_observed(
    commodity: Commodity,
    observed_kg_m3: FloatArray | float,
    t_degf: FloatArray | float,
    p_psig: FloatArray | float = 0.0,
) -> FloatArray:
    """Return the density at 60 degF (kg/m3) of a liquid observed at a temperature and pressure.

    Parameters
    ----------
    commodity, t_degf, p_psig
        As for ``factors_from_60``.
    observed_kg_m3 : float or array
        Density at that temperature and pressure, kg/m3.

    Raises
    ------
    RangeError
        A limit of the method is passed, also by the density found.

    Notes
    -----
    Refined products change constants at three densities, where the factors step by up to 1e-7.
    Each is solved with the constants its answer belongs to; an observed density in such a step,
    which no base density has, is answered by the boundary itself (within 1e-4 kg/m3).

    Examples
    --------
    >>> from tankcalc.fluids.petroleum_groups import CRUDE
    >>> round(float(density60_from_observed(CRUDE, 823.7, 80.3)), 6)
    832.048516
    """
    t, p = within(t_degf, p_psig)
    observed, t, p = np.broadcast_arrays(np.asarray(observed_kg_m3, dtype=float), t, p)
    found = np.empty(observed.size)
    rows = observed.ravel(), t.ravel(), p.ravel()
    for start in range(0, observed.size, CHUNK):
        part = slice(start, start + CHUNK)
        found[part] = _solved(commodity, *(column[part] for column in rows))
    _refuse_unanswered(commodity, found, *rows)
    _refuse_two_answers(commodity, found, *rows)
    return found.reshape(observed.shape)


def factors_from_base(
    commodity: Commodity,
    base_kg_m3: FloatArray | float,
    base_degf: float,
    t_degf: FloatArray | float,
    p_psig: FloatArray | float = 0.0,
) -> Factors:
    """Return the factors from a base temperature and no pressure to a temperature and pressure.

    Parameters
    ----------
    commodity, t_degf, p_psig
        As for ``factors_from_60``.
    base_kg_m3 : float or array
        Density at the base, kg/m3; its limits are those at 60 degF, brought to the base.
    base_degf : float
        Base temperature, degF: 60, 59 (15 degC) or 68 (20 degC), or another of the range.

    Raises
    ------
    RangeError
        A limit of the method is passed.

    References
    ----------
    API MPMS 11.1-2004, 11.1.7.1: the ratio of two factors from one density at 60 degF.
    """
    density60 = density60_from_observed(commodity, base_kg_m3, base_degf)
    found = factors_from_60(commodity, density60, t_degf, p_psig)
    at_base = factors_from_60(commodity, density60, base_degf)
    return found._replace(ctl=found.ctl / at_base.ctl)


def density_from_base(
    commodity: Commodity,
    base_kg_m3: FloatArray | float,
    base_degf: float,
    t_degf: FloatArray | float,
    p_psig: FloatArray | float = 0.0,
) -> FloatArray:
    """Return the density (kg/m3) at a temperature and pressure; see ``factors_from_base``."""
    return base_kg_m3 * factors_from_base(commodity, base_kg_m3, base_degf, t_degf, p_psig).ctpl


def base_density_from_observed(
    commodity: Commodity,
    observed_kg_m3: FloatArray | float,
    t_degf: FloatArray | float,
    p_psig: FloatArray | float,
    base_degf: float,
) -> FloatArray:
    """Return the density at a base (kg/m3) of a liquid observed at a temperature and pressure.

    The arguments are those of ``density60_from_observed`` and ``factors_from_base``, and so are
    the refusals.
    """
    density60 = density60_from_observed(commodity, observed_kg_m3, t_degf, p_psig)
    if base_degf == BASE_DEGF:
        return density60
    return density60 * factors_from_60(commodity, density60, base_degf).ctl


def _refuse_unanswered(
    commodity: Commodity,
    found: FloatArray,
    observed: FloatArray,
    t_degf: FloatArray,
    p_psig: FloatArray,
) -> None:
    """Refuse an observed density that no density at 60 degF within the limits leads to."""
    low, high = commodity.low_kg_m3, commodity.high_kg_m3
    outside = ~((found >= low - SLACK) & (found <= high + SLACK))
    if np.any(outside):
        row = int(np.argmax(outside))
        raise RangeError(
            f"{_observation(observed[row], t_degf[row], p_psig[row])} comes from no density at "
            f"60 degF of {commodity.name} in the 2004 equations "
            f"({low:.10g} to {high:.10g} kg/m3)."
        )


def _refuse_two_answers(
    commodity: Commodity,
    found: FloatArray,
    observed: FloatArray,
    t_degf: FloatArray,
    p_psig: FloatArray,
) -> None:
    """Refuse an observed density that two densities at 60 degF lead to.

    With an expansion that does not fall with density, the compressibility of the lightest liquids
    outweighs their density: near 302 degF and 1500 psig those of 611 and 618 kg/m3 are alike.
    """
    low = commodity.low_kg_m3
    near = np.flatnonzero((found > low + SLACK) & (found < 1.02 * low))
    if not near.size:
        return
    lowest = np.full(near.size, low)
    k = commodity.coefficients(commodity.index(lowest))
    t68 = ipts68_from_its90_degf(t_degf[near])
    at_low = respond(k, lowest, t68, p_psig[near])
    both = (at_low.slope < 0.0) & (at_low.density_kg_m3 >= observed[near])
    if np.any(both):
        row = int(near[np.argmax(both)])
        raise RangeError(
            f"{_observation(observed[row], t_degf[row], p_psig[row])} comes from two densities "
            f"at 60 degF of {commodity.name} in the 2004 equations ({low:g} to "
            f"{found[row]:.2f} kg/m3). Observe it at a lower pressure."
        )


def _observation(observed_kg_m3: float, t_degf: float, p_psig: float) -> str:
    """Return an observation as messages give it."""
    pressed = f" and {p_psig:.10g} psig" if p_psig else ""
    t_degc = (t_degf - 32.0) / 1.8
    return f"{observed_kg_m3:.10g} kg/m3 at {t_degf:.10g} degF ({t_degc:.2f} degC){pressed}"


def _solved(
    commodity: Commodity, observed: FloatArray, t_degf: FloatArray, p: FloatArray
) -> FloatArray:
    """Return densities at 60 degF, each by the constants of the group it lies in."""
    t68 = ipts68_from_its90_degf(t_degf)
    limits = commodity.low_kg_m3, commodity.high_kg_m3
    # From above, where a liquid close to boiling still answers in one sense only.
    rho = np.clip(observed, 1.15 * limits[0], limits[1])
    for _ in range(3):  # after three steps from anywhere the group is right, or the next one
        k = commodity.coefficients(commodity.index(rho))
        rho = step(respond(k, rho, t68, p), rho, observed, limits)
    group = commodity.index(rho)
    k = commodity.coefficients(group)
    rho = settle(lambda base: respond(k, base, t68, p), rho, observed, limits)
    astray = np.flatnonzero((commodity.index(rho) != group) & ~np.isnan(rho))
    if astray.size:
        rows = observed[astray], t68[astray], p[astray]
        rho[astray] = _beyond_a_boundary(commodity, rho[astray], group[astray], *rows)
    return rho


def _beyond_a_boundary(
    commodity: Commodity,
    rho: FloatArray,
    group: npt.NDArray[np.intp],
    observed: FloatArray,
    t68: FloatArray,
    p: FloatArray,
) -> FloatArray:
    """Return densities again, by the next group's constants; the boundary where neither holds."""
    limits = commodity.low_kg_m3, commodity.high_kg_m3
    up = rho > np.array([entry.low_kg_m3 for entry in commodity.groups])[group]
    beyond = np.where(up, group + 1, group - 1)
    k = commodity.coefficients(beyond)
    again = settle(lambda base: respond(k, base, t68, p), rho, observed, limits)
    boundary = np.array([entry.low_kg_m3 for entry in commodity.groups])[np.maximum(group, beyond)]
    holds = np.where(up, again >= boundary, again < boundary)
    return np.where(holds, again, boundary)
