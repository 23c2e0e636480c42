"""Volume correction of petroleum liquids for temperature by the closed form of 1980.

At the 15 degC base temperatures count in degC, at the 60 degF base in degF; the constants differ
accordingly. The 20 degC base is the ratio of two factors of the 15 degC base.

References
----------
ASTM D1250-80 / API MPMS Chapter 11.1 (1980), Volumes X and XII; ISO 91-1:1992. The limits
are from memory of the field.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from tankcalc.errors import RangeError
from tankcalc.fluids.models import FloatArray
from tankcalc.fluids.petroleum_groups import (
    Coefficients,
    Group,
    expansion,
    refuse_outside,
    steepness,
)
from tankcalc.fluids.petroleum_newton import Response, settle

SLACK = 1e-7
"""Rounding allowed at a limit that was reached through a change of unit or a solution."""

_WATER_60F_KG_M3: Final = 999.012
"""Density of water at 60 degF as the 1980 edition took it."""


def _density60(api: float) -> float:
    """Return the density (kg/m3) of an API gravity in the edition's own water."""
    return 141.5 / (131.5 + api) * _WATER_60F_KG_M3


@dataclass(frozen=True, slots=True)
class Base:
    """The tables of one base: 53/54 at 15 degC, 5/6 at 60 degF.

    Attributes
    ----------
    name : str
        The base as messages give it.
    degree : str
        Unit of its temperatures.
    at : float
        Base temperature in that unit.
    groups : dict
        By the name a fluid file gives.
    lowest : float
        First temperature, in that unit.
    steps_kg_m3 : tuple of float
        Densities at the base at which crude and refined products may become hotter.
    highest : tuple of float
        Last temperature before, between and after those steps; the last one for other groups.
    special_limits : (float, float)
        Expansions per degree a special liquid may state.
    """

    name: str
    degree: str
    at: float
    groups: dict[str, Group]
    lowest: float
    steps_kg_m3: tuple[float, ...]
    highest: tuple[float, ...]
    special_limits: tuple[float, float]

    def special(self, alpha: float) -> Group:
        """Return the liquid of a stated expansion per degree at the base.

        Raises
        ------
        RangeError
            The expansion lies outside the limits of tables 6C and 54C.
        """
        refuse_outside(
            alpha,
            self.special_limits,
            f"an expansion at {self.name} of {{found}} per {self.degree} is outside the 1980 "
            f"equations ({{low}} to {{high}} per {self.degree}).",
        )
        return Group("special", Coefficients(0.0, 0.0, alpha), 0.0, float("inf"))

    def highest_for(self, group: Group, base_kg_m3: FloatArray | float) -> FloatArray:
        """Return the last temperature of liquids by their density at the base (kg/m3)."""
        if group.name in ("lubricating oil", "special"):
            return np.full(np.shape(base_kg_m3), self.highest[-1])
        step = np.searchsorted(self.steps_kg_m3, base_kg_m3, "right")
        return np.asarray(self.highest)[step]

    def refuse_temperatures(
        self, group: Group, base_kg_m3: FloatArray | float, t: FloatArray | float
    ) -> None:
        """Refuse a temperature (unit of the base) the tables do not have for a density.

        Raises
        ------
        RangeError
            Named with the limits of its density.
        """
        there, highest = np.broadcast_arrays(
            np.asarray(t, dtype=float), self.highest_for(group, base_kg_m3)
        )
        outside = ~((there >= self.lowest - SLACK) & (there <= highest + SLACK))
        if np.any(outside):
            raise RangeError(
                f"{there[outside][0]:.10g} {self.degree} is outside the temperatures of the 1980 "
                f"equations for {group.name} of this density "
                f"({self.lowest:g} to {highest[outside][0]:g} {self.degree})."
            )


BASE_15C: Final = Base(
    "15 degC",
    "degC",
    15.0,
    {
        group.name: group
        for group in (
            Group("crude", Coefficients(613.9723, 0.0, 0.0), 610.5, 1075.0),
            Group("gasoline", Coefficients(346.4228, 0.4388, 0.0), 653.0, 770.0),
            Group("transition", Coefficients(2680.3206, 0.0, -0.00336312), 770.0, 788.0),
            Group("jet fuel", Coefficients(594.5418, 0.0, 0.0), 788.0, 839.0),
            Group("fuel oil", Coefficients(186.9696, 0.4862, 0.0), 839.0, 1075.0),
            Group("lubricating oil", Coefficients(0.0, 0.6278, 0.0), 800.0, 1164.0),
        )
    },
    -18.0,
    (778.5, 824.0),
    (95.0, 125.0, 150.0),
    (486.0e-6, 1674.0e-6),
)
"""Tables 53 and 54 (metric)."""

BASE_60F: Final = Base(
    "60 degF",
    "degF",
    60.0,
    {
        group.name: group
        for group in (
            Group("crude", Coefficients(341.0957, 0.0, 0.0), _density60(100.0), _density60(0.0)),
            Group("gasoline", Coefficients(192.4571, 0.2438, 0.0), _density60(85.0), 770.3520),
            Group("transition", Coefficients(1489.0670, 0.0, -0.00186840), 770.3520, 787.5195),
            Group("jet fuel", Coefficients(330.3010, 0.0, 0.0), 787.5195, 838.3127),
            Group("fuel oil", Coefficients(103.8720, 0.2701, 0.0), 838.3127, _density60(0.0)),
            Group(
                "lubricating oil", Coefficients(0.0, 0.34878, 0.0), _density60(45), _density60(-10)
            ),
        )
    },
    0.0,
    (_density60(50.0), _density60(40.0)),
    (200.0, 250.0, 300.0),
    (270.0e-6, 930.0e-6),
)
"""Tables 5 and 6 (degF), their densities in kg/m3."""


def vcf(
    base: Base, group: Group, base_kg_m3: FloatArray | float, t: FloatArray | float
) -> FloatArray:
    """Return the volume correction factor from the base to temperatures ``t``.

    Parameters
    ----------
    base : Base
        ``BASE_15C`` or ``BASE_60F``.
    group : Group
        One of the base's groups, or its ``special``.
    base_kg_m3 : float or array
        Density at the base, kg/m3.
    t : float or array
        Temperature in the unit of the base; limits are not looked at here.

    Notes
    -----
    exp(-a dt (1 + 0.8 a dt)), a = K0 / rho^2 + K1 / rho (+ A, for the transition zone).

    Examples
    --------
    >>> round(float(vcf(BASE_15C, BASE_15C.groups["crude"], 850.0, 30.0)), 5)
    0.98721
    """
    grown = expansion(group.constants, np.asarray(base_kg_m3, dtype=float)) * (
        np.asarray(t, dtype=float) - base.at
    )
    return np.exp(-grown * (1.0 + 0.8 * grown))


def base_density_from_observed(
    base: Base, group: Group, observed_kg_m3: FloatArray | float, t: FloatArray | float
) -> FloatArray:
    """Return the density at the base (kg/m3) of a liquid observed at temperatures ``t``.

    The arguments are those of ``vcf``; ``observed_kg_m3`` is the density at ``t``, already
    corrected for the glass of a hydrometer (``gravity_scales.hydrometer_correction``).

    Raises
    ------
    RangeError
        No density of the group at the base leads to the observed one.
    """
    observed, there = np.broadcast_arrays(
        np.asarray(observed_kg_m3, dtype=float), np.asarray(t, dtype=float)
    )
    if group.name == "special":
        refuse_outside(observed, (SLACK, 1e5), "a density of {found} kg/m3 is that of no liquid.")
        return np.asarray(observed / vcf(base, group, 1.0, there))
    k, limits = group.constants, (group.low_kg_m3, group.high_kg_m3)

    def respond(rho: FloatArray) -> Response:
        grown = expansion(k, rho) * (there - base.at)
        slope = 1.0 + steepness(k, rho) * grown * (1.0 + 1.6 * grown)
        return Response(rho * np.exp(-grown * (1.0 + 0.8 * grown)), slope)

    found = settle(respond, np.clip(observed, *limits), observed, limits)
    outside = ~((found >= limits[0] - SLACK) & (found <= limits[1] + SLACK))
    if np.any(outside):
        raise RangeError(
            f"{observed[outside][0]:.10g} kg/m3 at {there[outside][0]:.10g} {base.degree} comes "
            f"from no density at {base.name} of {group.name} in the 1980 equations "
            f"({limits[0]:.7g} to {limits[1]:.7g} kg/m3)."
        )
    return found
