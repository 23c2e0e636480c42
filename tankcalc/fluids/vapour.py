"""What fills the space above the liquid."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Vapour:
    """What fills the space above the liquid: a density, or a gas by its molar mass.

    Attributes
    ----------
    density_kg_m3 : float or None
        Density of the vapour, kg/m3.
    molar_mass_kg_mol : float or None
        Molar mass of the gas, kg/mol; its density then follows from the vapour space's
        pressure and the temperature.
    compressibility : float
        Compressibility factor Z of that gas.
    uncertainty_kg_m3 : float or None
        Standard uncertainty of the density, where it is stated.
    """

    density_kg_m3: float | None = None
    molar_mass_kg_mol: float | None = None
    compressibility: float = 1.0
    uncertainty_kg_m3: float | None = None
