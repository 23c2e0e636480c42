"""Groups of petroleum liquids, the constants of their expansion, and refusals by name.

References
----------
API MPMS Chapter 11.1-2004 (ASTM D1250-04), table of constants in 11.1.6.1, limits in 11.1.2.3.
The limits of density and of the stated expansion are from memory of the field.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, NamedTuple

import numpy as np
import numpy.typing as npt

from tankcalc.errors import RangeError
from tankcalc.fluids.models import FloatArray


class Coefficients(NamedTuple):
    """alpha = k0 / rho^2 + k1 / rho + k2; one figure each, or an array of the densities' shape."""

    k0: FloatArray | float
    k1: FloatArray | float
    k2: FloatArray | float


@dataclass(frozen=True, slots=True)
class Group:
    """One set of constants and the densities at the base it holds for.

    Attributes
    ----------
    name : str
        As a fluid file names it.
    constants : Coefficients
        Of the expansion at the base temperature.
    low_kg_m3, high_kg_m3 : float
        First and last density at the base temperature, kg/m3.
    """

    name: str
    constants: Coefficients
    low_kg_m3: float
    high_kg_m3: float


@dataclass(frozen=True, slots=True)
class Commodity:
    """One group, or several that adjoin and take over from each other by density.

    Attributes
    ----------
    name : str
        Name used in messages.
    groups : tuple of Group
        By rising density; each begins where the one before it ends.
    """

    name: str
    groups: tuple[Group, ...]

    @property
    def low_kg_m3(self) -> float:
        """Lowest density at the base temperature, kg/m3."""
        return self.groups[0].low_kg_m3

    @property
    def high_kg_m3(self) -> float:
        """Highest density at the base temperature, kg/m3."""
        return self.groups[-1].high_kg_m3

    def index(self, base_kg_m3: FloatArray) -> npt.NDArray[np.intp]:
        """Return which group holds for each density; a boundary belongs to the heavier group."""
        return np.searchsorted([group.low_kg_m3 for group in self.groups[1:]], base_kg_m3, "right")

    def coefficients(self, index: npt.NDArray[np.intp]) -> Coefficients:
        """Return the constants of groups by their index; figures where there is one group."""
        if len(self.groups) == 1:
            return self.groups[0].constants
        table = np.array([group.constants for group in self.groups])
        return Coefficients(*(table[:, column][index] for column in range(3)))


LOW_KG_M3: Final = 610.6
HIGH_KG_M3: Final = 1163.5

_GASOLINE = Group("gasoline", Coefficients(192.4571, 0.2438, 0.0), LOW_KG_M3, 770.3520)
_TRANSITION = Group("transition", Coefficients(1489.0670, 0.0, -0.00186840), 770.3520, 787.5195)
_JET = Group("jet fuel", Coefficients(330.3010, 0.0, 0.0), 787.5195, 838.3127)
_FUEL_OIL = Group("fuel oil", Coefficients(103.8720, 0.2701, 0.0), 838.3127, HIGH_KG_M3)
_CRUDE = Group("crude", Coefficients(341.0957, 0.0, 0.0), LOW_KG_M3, HIGH_KG_M3)
_LUBRICATING = Group("lubricating oil", Coefficients(0.0, 0.34878, 0.0), 800.9, HIGH_KG_M3)

CRUDE: Final = Commodity("crude", (_CRUDE,))
REFINED: Final = Commodity("refined products", (_GASOLINE, _TRANSITION, _JET, _FUEL_OIL))
LUBRICATING_OIL: Final = Commodity("lubricating oil", (_LUBRICATING,))

COMMODITIES: Final[dict[str, Commodity]] = {
    "crude": CRUDE,
    "fuel oil": Commodity("fuel oil", (_FUEL_OIL,)),
    "jet fuel": Commodity("jet fuel", (_JET,)),
    "gasoline": Commodity("gasoline", (_GASOLINE,)),
    "transition": Commodity("transition", (_TRANSITION,)),
    "lubricating oil": LUBRICATING_OIL,
}
"""By the name a fluid file gives; "special" states its expansion and is made by ``special``."""

ALPHA60_PER_DEGF: Final = (230.0e-6, 930.0e-6)
"""Expansions at 60 degF a special liquid may state, 1/degF (from memory)."""


def special(alpha60_per_degf: float) -> Commodity:
    """Return the liquid of a stated expansion at 60 degF, 230e-6 to 930e-6 per degF.

    Raises
    ------
    RangeError
        The expansion lies outside those limits.
    """
    refuse_outside(
        alpha60_per_degf,
        ALPHA60_PER_DEGF,
        f"an expansion at 60 degF of {{found}} per degF ({1.8 * alpha60_per_degf:.7g} per K) is "
        "outside the 2004 equations ({low} to {high} per degF, 0.000414 to 0.001674 per K).",
    )
    constants = Coefficients(0.0, 0.0, alpha60_per_degf)
    return Commodity("special", (Group("special", constants, LOW_KG_M3, HIGH_KG_M3),))


def expansion(k: Coefficients, density_kg_m3: FloatArray) -> FloatArray:
    """Return the expansion at the base temperature, per degree, of a density there (kg/m3)."""
    return (k.k0 / density_kg_m3 + k.k1) / density_kg_m3 + k.k2


def steepness(k: Coefficients, density_kg_m3: FloatArray) -> FloatArray:
    """Return -d ln(expansion) / d ln(density), without a dimension."""
    return np.asarray(
        (2.0 * k.k0 + k.k1 * density_kg_m3) / (k.k0 + (k.k1 + k.k2 * density_kg_m3) * density_kg_m3)
    )


def refuse_outside(
    values: FloatArray | float, limits: tuple[float, float], message: str, slack: float = 0.0
) -> None:
    """Refuse values outside limits by a message with ``{found}``, ``{low}`` and ``{high}``.

    Raises
    ------
    RangeError
        A value lies outside by more than ``slack``, or is no number; the first one is named.
    """
    low, high = limits
    array = np.asarray(values, dtype=float)
    outside = ~((array >= low - slack) & (array <= high + slack))
    if np.any(outside):
        found = array[outside][0]
        raise RangeError(
            message.format(found=f"{found:.10g}", low=f"{low:.10g}", high=f"{high:.10g}")
        )
