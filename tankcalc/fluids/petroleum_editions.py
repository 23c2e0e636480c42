"""The equations of an edition applied to one liquid, with temperatures in K."""

from __future__ import annotations

from abc import ABC, abstractmethod
from typing import Final

import numpy as np

from tankcalc.constants import ICE_POINT_K
from tankcalc.fluids import petroleum_1980, petroleum_1984, petroleum_2004, petroleum_bases
from tankcalc.fluids.models import FloatArray
from tankcalc.fluids.petroleum_2004 import degf_from_kelvin, psig_from_pascal
from tankcalc.fluids.petroleum_groups import COMMODITIES, Group, expansion, special

BASE_15C_K: Final = ICE_POINT_K + 15.0
BASE_20C_K: Final = ICE_POINT_K + 20.0
BASE_60F_K: Final = ICE_POINT_K + 28.0 / 1.8


class Edition(ABC):
    """The equations of one edition for one liquid.

    Attributes
    ----------
    source : str
        Whose equations these are, for reports.
    """

    source: str

    @property
    @abstractmethod
    def limits_k(self) -> tuple[float, float]:
        """Temperatures the edition covers for this liquid, K."""

    @abstractmethod
    def factor(self, temperature_k: FloatArray) -> FloatArray:
        """Return the density against that at the base of the equations."""

    @abstractmethod
    def standard(
        self, observed_kg_m3: FloatArray, temperature_k: FloatArray, base_k: float
    ) -> FloatArray:
        """Return the density (kg/m3) at a base of the group's liquid observed at temperatures."""

    @abstractmethod
    def pressure_factor(self, temperature_k: FloatArray, gauge_pa: FloatArray) -> FloatArray:
        """Return the density against that at no pressure."""


class Edition2004(Edition):
    """The equations of 2004 for a named group, or for a special liquid with its expansion.

    Raises RangeError where the reference density or the expansion is outside the method.
    """

    def __init__(self, group: str, reference: float, at_k: float, per_k: float | None) -> None:
        self.source = f"equations of API MPMS 11.1-2004, {group}"
        self.commodity = special(per_k / 1.8) if per_k is not None else COMMODITIES[group]
        self.density60 = petroleum_bases.density60_from_observed(
            self.commodity, reference, degf_from_kelvin(at_k)
        )
        k = self.commodity.groups[0].constants
        density68 = petroleum_2004.density_on_1968_scale(k, self.density60)
        self.alpha60 = expansion(k, density68)

    @staticmethod
    def densities(group: str, at_k: float) -> tuple[float, float]:
        """Return the first and last density of a group at a base, kg/m3."""
        commodity, degf = COMMODITIES[group], degf_from_kelvin(at_k)
        ends = np.array([commodity.low_kg_m3, commodity.high_kg_m3])
        low, high = ends * petroleum_2004.factors_from_60(commodity, ends, degf).ctl
        return float(low), float(high)

    @property
    def limits_k(self) -> tuple[float, float]:
        """-50 to 150 degC, in K."""
        return (ICE_POINT_K - 50.0, ICE_POINT_K + 150.0)

    def factor(self, temperature_k: FloatArray) -> FloatArray:
        """Return CTL from 60 degF."""
        t68 = petroleum_2004.ipts68_from_its90_degf(degf_from_kelvin(temperature_k))
        return petroleum_2004.ctl_from_alpha60(self.alpha60, t68)

    def standard(
        self, observed_kg_m3: FloatArray, temperature_k: FloatArray, base_k: float
    ) -> FloatArray:
        """Return the density (kg/m3) at a base, by way of that at 60 degF."""
        return petroleum_bases.base_density_from_observed(
            self.commodity,
            observed_kg_m3,
            degf_from_kelvin(temperature_k),
            0.0,
            float(degf_from_kelvin(base_k)),
        )

    def pressure_factor(self, temperature_k: FloatArray, gauge_pa: FloatArray) -> FloatArray:
        """Return CPL of 2004."""
        return petroleum_2004.factors_from_60(
            self.commodity,
            self.density60,
            degf_from_kelvin(temperature_k),
            psig_from_pascal(gauge_pa),
        ).cpl


class Edition1980(Edition):
    """The closed form of 1980, at 60 degF where the reference is, and otherwise at 15 degC.

    Raises RangeError where the reference density or the expansion is outside the tables.
    """

    def __init__(self, group: str, reference: float, at_k: float, per_k: float | None) -> None:
        in_degf = at_k == BASE_60F_K
        self.base = petroleum_1980.BASE_60F if in_degf else petroleum_1980.BASE_15C
        self.source = f"equations of API MPMS 11.1 (1980), closed form at {self.base.name}, {group}"
        self.degree_k = 1.0 / 1.8 if in_degf else 1.0
        self.group = self._group(group, per_k)
        self.own = self._at_base(np.asarray(reference), np.asarray(at_k))

    @staticmethod
    def densities(group: str, at_k: float) -> tuple[float, float]:
        """Return the first and last density of a group at a base, kg/m3."""
        base = petroleum_1980.BASE_60F if at_k == BASE_60F_K else petroleum_1980.BASE_15C
        limits = base.groups[group]
        ends = np.array([limits.low_kg_m3, limits.high_kg_m3])
        t = base.at if at_k == BASE_60F_K else at_k - ICE_POINT_K
        low, high = ends * petroleum_1980.vcf(base, limits, ends, t)
        return float(low), float(high)

    def _group(self, name: str, per_k: float | None) -> Group:
        if per_k is not None:
            return self.base.special(per_k * self.degree_k)
        return self.base.groups[name]

    def _degrees(self, temperature_k: FloatArray | float) -> FloatArray:
        if self.base is petroleum_1980.BASE_60F:
            return degf_from_kelvin(temperature_k)
        return np.asarray(temperature_k, dtype=float) - ICE_POINT_K

    def _at_base(self, observed_kg_m3: FloatArray, temperature_k: FloatArray) -> FloatArray:
        return petroleum_1980.base_density_from_observed(
            self.base, self.group, observed_kg_m3, self._degrees(temperature_k)
        )

    @property
    def limits_k(self) -> tuple[float, float]:
        """Temperatures of the table for this density, K."""
        high = float(self.base.highest_for(self.group, self.own))
        ends = ((t - self.base.at) * self.degree_k for t in (self.base.lowest, high))
        low_k, high_k = (end + self._zero_k for end in ends)
        return (low_k, high_k)

    @property
    def _zero_k(self) -> float:
        """Base temperature of the equations, K."""
        return BASE_60F_K if self.base is petroleum_1980.BASE_60F else BASE_15C_K

    def factor(self, temperature_k: FloatArray) -> FloatArray:
        """Return VCF from 15 degC or 60 degF."""
        return petroleum_1980.vcf(self.base, self.group, self.own, self._degrees(temperature_k))

    def standard(
        self, observed_kg_m3: FloatArray, temperature_k: FloatArray, base_k: float
    ) -> FloatArray:
        """Return the density (kg/m3) at a base, by way of that at 15 degC or 60 degF."""
        own = self._at_base(observed_kg_m3, temperature_k)
        for there in (temperature_k, base_k):
            self.base.refuse_temperatures(self.group, own, self._degrees(there))
        return own * petroleum_1980.vcf(self.base, self.group, own, self._degrees(base_k))

    def pressure_factor(self, temperature_k: FloatArray, gauge_pa: FloatArray) -> FloatArray:
        """Return the factor of API MPMS 11.2.1M (1984)."""
        at_15 = float(self.own * self.factor(np.asarray(BASE_15C_K)))
        return petroleum_1984.pressure_factor(
            at_15, np.asarray(temperature_k) - ICE_POINT_K, gauge_pa
        )
