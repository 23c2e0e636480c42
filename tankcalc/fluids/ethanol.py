"""Mixtures of ethanol and water."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import ClassVar

import numpy as np

from tankcalc.constants import ICE_POINT_K
from tankcalc.errors import InputError
from tankcalc.fluids.models import DensityModel, FloatArray

# Rows: the polynomials in the mass fraction that multiply x**0 (A), then B_k; C_i,k.
_A = (9.982012300e2, -1.929769495e2, 3.891238958e2, -1.668103923e3, 1.352215441e4,
      -8.829278388e4, 3.062874042e5, -6.138381234e5, 7.470172998e5, -5.478461354e5,
      2.234460334e5, -3.903285426e4)  # fmt: skip
_B = (-2.0618513e-1, -5.2682542e-3, 3.6130013e-5, -3.8957702e-7, 7.1693540e-9, -9.9739231e-11)
_C = (
    (1.693443461530087e-1, -1.046914743455169e1, 7.196353469546523e1, -7.047478054272792e2,
     3.924090430035045e3, -1.210164659068747e4, 2.248646550400788e4, -2.605562982188164e4,
     1.852373922069467e4, -7.420201433430137e3, 1.285617841998974e3),
    (-1.193013005057010e-2, 2.517399633803461e-1, -2.170575700536993, 1.353034988843029e1,
     -5.029988758547014e1, 1.096355666577570e2, -1.422753946421155e2, 1.080435942856230e2,
     -4.414153236817392e1, 7.442971530188783),
    (-6.802995733503803e-4, 1.876837790289664e-2, -2.002561813734156e-1, 1.022992966719220,
     -2.895696483903638, 4.810060584300675, -4.672147440794683, 2.458043105903461,
     -5.411227621436812e-1),
    (4.075376675622027e-6, -8.763058573471110e-6, 6.515031360099368e-6, -1.515784836987210e-6),
    (-2.788074354782409e-8, 1.345612883493354e-8),
)  # fmt: skip


@dataclass(frozen=True)
class Ethanol(DensityModel):
    """Ethanol and water, by the general formula of the international alcohol tables.

    Parameters
    ----------
    mass_fraction : float
        Kilograms of ethanol in a kilogram of the mixture, 0 to 1.

    Raises
    ------
    InputError
        A mass fraction that is not between 0 and 1.

    Notes
    -----
    rho = A1 + sum A_k p^(k-1) + sum B_k x^k + sum C_i,k p^k x^i, with p the mass fraction and
    x = t - 20, from -20 to 40 degC. The standard volume is that at 20 degC. The formula uses
    the temperature scale of 1968; the difference to today's, 0.01 K at most, is neglected
    (0.01 kg/m3).

    References
    ----------
    OIML R 22 (1975), "International alcoholometric tables", general formula; the same in the
    annex of Council Directive 76/766/EEC.

    Examples
    --------
    >>> import numpy as np
    >>> round(float(Ethanol(0.5).density(np.array(293.15))), 3)
    913.771
    """

    kind: ClassVar[str] = "ethanol"
    mass_fraction: float
    limits_k: tuple[float, float] = (ICE_POINT_K - 20.0, ICE_POINT_K + 40.0)
    base_k: float | None = ICE_POINT_K + 20.0
    source: str = "general formula of OIML R 22 (1975)"

    def __post_init__(self) -> None:
        if not 0.0 <= self.mass_fraction <= 1.0:
            raise InputError("the mass fraction of ethanol must be between 0 and 1.")

    @cached_property
    def _by_power(self) -> FloatArray:
        """Coefficients of the powers of x for this mixture."""
        p = self.mass_fraction
        powers = p ** np.arange(12.0)
        row = np.array((np.dot(_A, powers), *_B))
        for i, c in enumerate(_C, start=1):
            row[i] += np.dot(c, powers[1 : len(c) + 1])
        return row

    def density(self, temperature_k: FloatArray) -> FloatArray:
        """Return the density (kg/m3) at temperatures in K, an array of any shape."""
        x = np.asarray(temperature_k) - (ICE_POINT_K + 20.0)
        return np.asarray(np.polynomial.polynomial.polyval(x, self._by_power))
