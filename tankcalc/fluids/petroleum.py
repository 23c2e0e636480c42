"""A petroleum liquid by its group and a density at 15 degC, 20 degC or 60 degF."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property
from typing import ClassVar, Final

import numpy as np

from tankcalc.errors import FigureError, InputError, RangeError
from tankcalc.fluids.models import DensityModel, FloatArray
from tankcalc.fluids.petroleum_editions import (
    BASE_15C_K,
    BASE_20C_K,
    BASE_60F_K,
    Edition,
    Edition1980,
    Edition2004,
)
from tankcalc.fluids.petroleum_groups import COMMODITIES, REFINED

GROUPS: Final = (*COMMODITIES, "special")
EDITIONS: Final = (2004, 1980)
BASES_K: Final = (BASE_15C_K, BASE_20C_K, BASE_60F_K)
BASE_NAMES: Final = dict(zip(BASES_K, ("15 degC", "20 degC", "60 degF"), strict=True))
REFINED_GROUPS: Final = tuple(group.name for group in REFINED.groups)


@dataclass(frozen=True)
class Petroleum(DensityModel):
    """The reference density times the volume correction factor of the group.

    Parameters
    ----------
    group : str
        "crude", "fuel oil", "jet fuel", "gasoline", "transition", "lubricating oil" or "special".
    reference_kg_m3 : float
        Density at ``at_k`` and no pressure, kg/m3, within the limits of the group.
    at_k : float
        15 degC, 20 degC or 60 degF, in K.
    edition : int
        2004, or 1980: their factors differ in the fifth or sixth decimal, in the transition zone
        and a metric base in the fourth.
    expansion_per_k : float or None
        Of a special liquid, and needed for it, 1/K. 2004: at 60 degF, i.e. 1.8 times the
        coefficient per degF. 1980: at 60 degF where ``at_k`` is that, and at 15 degC otherwise.

    Raises
    ------
    InputError
        Another group, base or edition; a density outside the group; an expansion outside the
        method, missing for a special liquid or given for another.

    Notes
    -----
    The pressure factor is that of 2004, or of API MPMS 11.2.1M (1984) with the edition of 1980.

    References
    ----------
    API MPMS 11.1-2004 (ASTM D1250-04); ASTM D1250-80 and ISO 91-1:1992.

    Examples
    --------
    >>> oil = Petroleum("fuel oil", 845.0, 288.15)
    >>> round(float(oil.checked_density(np.array(273.15 + 32.5))), 3)
    832.565
    """

    kind: ClassVar[str] = "petroleum"
    group: str
    reference_kg_m3: float
    at_k: float
    edition: int = 2004
    expansion_per_k: float | None = None

    def __post_init__(self) -> None:
        self._refuse_choices()
        if not 0.0 < self.reference_kg_m3 < float("inf"):
            raise FigureError("reference", "a reference density must be above zero.")
        try:
            _ = self._equations
        except RangeError as error:
            raise self._refusal(error) from error

    @property
    def base_k(self) -> float:  # type: ignore[override]
        """Temperature of the reference density, K."""
        return self.at_k

    @property
    def source(self) -> str:  # type: ignore[override]
        """Whose equations these are."""
        return self._equations.source

    @property
    def limits_k(self) -> tuple[float, float]:  # type: ignore[override]
        """Temperatures the edition covers, K; with that of 1980 they depend on the density."""
        return self._equations.limits_k

    def density(self, temperature_k: FloatArray) -> FloatArray:
        """Return the density (kg/m3) at temperatures in K, an array of any shape."""
        at_base = self._equations.factor(np.asarray(self.at_k))
        return self.reference_kg_m3 * (self._equations.factor(temperature_k) / at_base)

    def standard_density(
        self, observed_kg_m3: FloatArray, temperature_k: FloatArray, base_k: float
    ) -> FloatArray:
        """Return the density at a base temperature of a liquid observed at another, kg/m3.

        The equations are solved for the observed liquid, whatever the reference density.

        Raises
        ------
        RangeError
            The temperature is outside the method, or the density at the base outside the group.
        """
        return self._equations.standard(observed_kg_m3, temperature_k, base_k)

    def of_reference(self, reference_kg_m3: float) -> DensityModel:
        """Return the equations for a liquid of the same group with another reference density."""
        return replace(self, reference_kg_m3=reference_kg_m3)

    def pressure_factor(self, temperature_k: FloatArray, gauge_pa: FloatArray) -> FloatArray:
        """Return the density against that at outside pressure, for the reference density.

        Raises
        ------
        RangeError
            The temperature or the pressure is outside the method.
        """
        return self._equations.pressure_factor(temperature_k, gauge_pa)

    @cached_property
    def _equations(self) -> Edition:
        return self._of_group(self.group)

    def _of_group(self, group: str) -> Edition:
        """Return the equations with the reference density taken as that of a group."""
        make = Edition2004 if self.edition == 2004 else Edition1980
        return make(group, self.reference_kg_m3, self._base_k, self.expansion_per_k)

    def _refuse_choices(self) -> None:
        """Refuse a group, an edition or a base there is not, and an expansion out of place."""
        if self.group not in GROUPS:
            raise FigureError(
                "group", f"there is no such group of petroleum; there are {', '.join(GROUPS)}."
            )
        if self.edition not in EDITIONS:
            raise InputError("the editions are 2004 and 1980.")
        if not any(abs(self.at_k - base) < 1e-6 for base in BASES_K):
            raise FigureError("at", "a petroleum reference is at 15 degC, 20 degC or 60 degF.")
        if (self.group == "special") != (self.expansion_per_k is not None):
            if self.group == "special":
                raise FigureError("group", "a special liquid needs its expansion.")
            raise FigureError(
                "expansion",
                f"the expansion of {self.group} follows from its density; state none, "
                'or take the group "special".',
            )

    def _refusal(self, error: RangeError) -> FigureError:
        """Return which figure is at fault, with the limits at the base that was stated."""
        if self.group == "special":
            return FigureError("expansion", str(error))
        base = BASE_NAMES[self._base_k]
        make = Edition2004 if self.edition == 2004 else Edition1980
        low, high = make.densities(self.group, self._base_k)
        return FigureError(
            "reference",
            f"{_figure(self.reference_kg_m3)} kg/m3 at {base} is outside the {self.edition} "
            f'equations for the group "{self.group}", {_figure(low)} to {_figure(high)} kg/m3 '
            f"at {base}."
            f"{self._advice()}",
        )

    @property
    def _base_k(self) -> float:
        """The stated base, exactly."""
        return min(BASES_K, key=lambda base: abs(base - self.at_k))

    def _advice(self) -> str:
        """Return which other refined group covers the density, if one does."""
        if self.group not in REFINED_GROUPS:
            return ""
        for name in REFINED_GROUPS:
            try:
                self._of_group(name)
            except RangeError:
                continue
            return f' The group "{name}" covers it.'
        return ""


def _figure(kg_m3: float) -> str:
    """Return a density with two decimals at most."""
    return f"{round(kg_m3, 2):.10g}"
