"""Liquefied natural gas, by the revised Klosek-McKinley method."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, ClassVar

import numpy as np

from tankcalc.errors import InputError, RangeError
from tankcalc.fluids.components import COMPONENTS, whole
from tankcalc.fluids.models import DensityModel, FloatArray

if TYPE_CHECKING:
    from collections.abc import Callable

METHOD = "revised Klosek-McKinley"

MOST = {
    "nitrogen": (("nitrogen",), 0.04),
    "butanes": (("n-butane", "isobutane"), 0.04),
    "pentanes": (("n-pentane", "isopentane"), 0.02),
}
"""The largest mole fractions that the method takes."""

LEAST_METHANE = 0.60

# Molar volumes of the saturated liquids, 1e-3 m3/mol, at falling temperatures in K.
_VOLUME_AT_K = (118.0, 116.0, 114.0, 112.0, 110.0, 108.0, 106.0)
_VOLUME = {
    "methane": (0.038817, 0.038536, 0.038262, 0.037995, 0.037735, 0.037481, 0.037234),
    "ethane": (0.048356, 0.048184, 0.048014, 0.047845, 0.047678, 0.047512, 0.047348),
    "propane": (0.062939, 0.062756, 0.062574, 0.062392, 0.062212, 0.062033, 0.061855),
    "isobutane": (0.078844, 0.078640, 0.078438, 0.078236, 0.078035, 0.077836, 0.077637),
    "n-butane": (0.077344, 0.077150, 0.076957, 0.076765, 0.076574, 0.076384, 0.076194),
    "isopentane": (0.092251, 0.092032, 0.091814, 0.091596, 0.091379, 0.091163, 0.090948),
    "n-pentane": (0.092095, 0.091884, 0.091673, 0.091462, 0.091252, 0.091042, 0.090833),
    "nitrogen": (0.050885, 0.049179, 0.047602, 0.046231, 0.045031, 0.043963, 0.043002),
}

# Volume reductions, 1e-6 m3/mol: a row for each molar mass of 16 to 25 g/mol.
_REDUCTION_AT_K = (105.0, 110.0, 115.0, 120.0, 125.0, 130.0, 135.0)
_REDUCTION_AT_G_MOL = np.arange(16.0, 26.0)
_K1 = (
    (-0.007, -0.008, -0.009, -0.010, -0.013, -0.015, -0.017),
    (0.165, 0.180, 0.220, 0.250, 0.295, 0.345, 0.400),
    (0.340, 0.375, 0.440, 0.500, 0.590, 0.700, 0.825),
    (0.475, 0.535, 0.610, 0.695, 0.795, 0.920, 1.060),
    (0.635, 0.725, 0.810, 0.920, 1.035, 1.200, 1.390),
    (0.735, 0.835, 0.945, 1.055, 1.210, 1.370, 1.590),
    (0.840, 0.950, 1.065, 1.205, 1.385, 1.555, 1.800),
    (0.920, 1.055, 1.180, 1.330, 1.525, 1.715, 1.950),
    (1.045, 1.155, 1.280, 1.450, 1.640, 1.860, 2.105),
    (1.120, 1.245, 1.380, 1.550, 1.750, 1.990, 2.272),
)
_K2 = (
    (-0.010, -0.015, -0.024, -0.032, -0.043, -0.058, -0.075),
    (0.240, 0.320, 0.410, 0.600, 0.710, 0.950, 1.300),
    (0.420, 0.590, 0.720, 0.910, 1.130, 1.460, 2.000),
    (0.610, 0.770, 0.950, 1.230, 1.480, 1.920, 2.400),
    (0.750, 0.920, 1.150, 1.430, 1.730, 2.200, 2.600),
    (0.910, 1.070, 1.220, 1.630, 1.980, 2.420, 3.000),
    (1.050, 1.220, 1.300, 1.850, 2.230, 2.680, 3.400),
    (1.190, 1.370, 1.450, 2.080, 2.480, 3.000, 3.770),
    (1.330, 1.520, 1.650, 2.300, 2.750, 3.320, 4.140),
    (1.450, 1.710, 2.000, 2.450, 2.900, 3.520, 4.700),
)


def _spline(x: FloatArray, y: FloatArray) -> Callable[[FloatArray], FloatArray]:
    from scipy.interpolate import CubicSpline

    through_points: Callable[[FloatArray], FloatArray] = CubicSpline(x, y)
    return through_points


def molar_volume(name: str, temperature_k: FloatArray) -> FloatArray:
    """Return the molar volume (m3/mol) of one saturated liquid, 103 to 118 K.

    A cubic spline through the table, whose last piece carries on from 106 K down: there it is
    within 2e-4 of the wider table of ISO 6578.

    References
    ----------
    NBS Technical Note 1030 (1980), table of orthobaric molar volumes, as reprinted in trade
    handbooks.

    Examples
    --------
    >>> import numpy as np
    >>> round(1e6 * float(molar_volume("ethane", np.array(113.15))), 3)
    47.942
    """
    falling = np.array(_VOLUME[name])
    return np.asarray(1e-3 * _spline(np.array(_VOLUME_AT_K[::-1]), falling[::-1])(temperature_k))


def reduction(nth: int, temperature_k: FloatArray, molar_mass_kg_mol: float) -> FloatArray:
    """Return the volume reduction k1 or k2, m3/mol, at 105 to 135 K and 16 to 25 g/mol.

    Notes
    -----
    The table is printed in coarse steps and its differences scatter, so each row is smoothed
    over temperature by a polynomial of degree 5 (which leaves 0.007e-6 m3/mol at most for k1,
    0.09e-6 for k2); between molar masses runs a cubic spline. The degree was chosen by the single
    entries of ISO 6578 that are known here: they agree within 0.005e-6 m3/mol, and would not
    through the unsmoothed figures.

    References
    ----------
    NBS Technical Note 1030 (1980), tables of k1 and k2, as reprinted in trade handbooks.

    Examples
    --------
    >>> import numpy as np
    >>> round(1e6 * float(reduction(1, np.array(113.15), 18e-3)), 2)
    0.41
    """
    middle, half = 120.0, 15.0
    scaled = (np.array(_REDUCTION_AT_K) - middle) / half
    table = np.array((_K1, _K2)[nth - 1])
    smoothed = np.polynomial.polynomial.polyfit(scaled, table.T, 5)
    row = _spline(_REDUCTION_AT_G_MOL, smoothed.T)(np.array(1e3 * molar_mass_kg_mol))
    x = (np.asarray(temperature_k) - middle) / half
    return np.asarray(1e-6 * np.polynomial.polynomial.polyval(x, row))


@dataclass(frozen=True)
class LiquefiedGas(DensityModel):
    """Liquefied natural gas at its bubble point.

    Parameters
    ----------
    composition : tuple of (str, float)
        Components, named as in `components.COMPONENTS`, with mole fractions that sum to 1.

    Raises
    ------
    InputError
        A component that the method does not know, or a composition outside its limits.

    Notes
    -----
    V = sum x_i V_i - (k1 + (k2 - k1) x_N2 / 0.0425) x_CH4, from 105 K, where the tables of k1
    and k2 begin, to 115 K, to which the method is said to hold within 0.1 %. The pressure above
    the bubble point, 1e-4 in density for 0.5 MPa, is neglected. There is no standard volume.

    References
    ----------
    R. D. McCarty, "Four mathematical models for the prediction of LNG densities", NBS
    Technical Note 1030 (1980); ISO 6578, "Refrigerated hydrocarbon liquids".

    Examples
    --------
    >>> import numpy as np
    >>> lng = LiquefiedGas((("methane", 0.9), ("ethane", 0.08), ("propane", 0.02)))
    >>> round(float(lng.density(np.array(113.15))), 1)
    453.4
    """

    kind: ClassVar[str] = "liquefied gas"
    composition: tuple[tuple[str, float], ...]
    limits_k: tuple[float, float] = (105.0, 115.0)
    source: str = "revised Klosek-McKinley method, tables of NBS Technical Note 1030 (1980)"

    def __post_init__(self) -> None:
        for name, _ in self.composition:
            if name not in _VOLUME:
                raise InputError(
                    f"the {METHOD} method knows no {name}; it takes {', '.join(_VOLUME)}."
                )
        whole(self.composition, "mole fractions")
        shares = dict(self.composition)
        if shares.get("methane", 0.0) < LEAST_METHANE:
            raise InputError(
                f"the {METHOD} method takes at least {100.0 * LEAST_METHANE:g} % methane, "
                f"found {100.0 * shares.get('methane', 0.0):g} %."
            )
        for what, (names, most) in MOST.items():
            found = sum(shares.get(name, 0.0) for name in names)
            if found > most:
                raise InputError(
                    f"the {METHOD} method takes at most {100.0 * most:g} % {what}, "
                    f"found {100.0 * found:g} %."
                )
        if not self.molar_mass_kg_mol <= 25e-3:
            raise InputError(
                f"the {METHOD} method takes molar masses up to 25 g/mol, "
                f"found {1e3 * self.molar_mass_kg_mol:.2f} g/mol."
            )

    @cached_property
    def molar_mass_kg_mol(self) -> float:
        """Molar mass of the mixture, kg/mol."""
        return sum(x * (COMPONENTS[name].molar_mass_kg_mol or 0.0) for name, x in self.composition)

    def checked_density(self, temperature_k: FloatArray) -> FloatArray:
        """Return the density (kg/m3), refusing temperatures the method does not cover.

        Raises
        ------
        RangeError
            A temperature lies outside ``limits_k``.
        """
        try:
            return super().checked_density(temperature_k)
        except RangeError as error:
            raise RangeError(f"{error} Its {METHOD} method holds from 105 to 115 K.") from None

    def density(self, temperature_k: FloatArray) -> FloatArray:
        """Return the density (kg/m3) at temperatures in K, an array of any shape."""
        t = np.asarray(temperature_k)
        ideal = sum(x * molar_volume(name, t) for name, x in self.composition)
        shares = dict(self.composition)
        k1, k2 = (reduction(n, t, self.molar_mass_kg_mol) for n in (1, 2))
        nitrogen = shares.get("nitrogen", 0.0) / 0.0425
        shrunk = (k1 + (k2 - k1) * nitrogen) * shares["methane"]
        return np.asarray(self.molar_mass_kg_mol / (ideal - shrunk))
