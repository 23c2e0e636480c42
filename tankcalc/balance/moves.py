"""Movements of the log as movements of the balance: in mass and in standard volume."""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType
from typing import TYPE_CHECKING, Any

from tankcalc.balance.account import Kind, Movement
from tankcalc.balance.effects import MASS, STANDARD, Effect

if TYPE_CHECKING:
    from tankcalc.balance.history import LoggedMovement

METER_SHARE = 0.001
"""Relative standard uncertainty of a metered movement of which nothing is stated (common practice,
no source)."""


WATER_KG_M3 = 999.1
"""Density of drawn water, kg/m3: fresh at 15 degC. From 0 to 40 degC it is 0.8 % less at most; salt
makes it heavier."""


def product_kg_m3(figures: Mapping[str, Any]) -> float | None:
    """Return the density of the product in the tank, kg/m3, from a result by JSON key."""
    found = _ratio(figures, "product_mass_kg", "product_volume_m3")
    return found or _ratio(figures, MASS, "volume_m3")


def standard_kg_m3(figures: Mapping[str, Any]) -> float | None:
    """Return the mass of the product per standard volume, kg/m3, from a result by JSON key."""
    found = _ratio(figures, "product_mass_kg", STANDARD)
    return found or _ratio(figures, MASS, STANDARD)


def _ratio(figures: Mapping[str, Any], above: str, below: str) -> float | None:
    top, bottom = figures.get(above), figures.get(below)
    if not isinstance(top, int | float) or not isinstance(bottom, int | float):
        return None
    return float(top) / float(bottom) if top > 0.0 and bottom > 0.0 else None


def movement_of(
    logged: LoggedMovement,
    figures: Mapping[str, Any],
    density: Effect | None,
    tank: str,
    meter_share: float,
) -> Movement:
    """Return a movement of the log in mass and standard volume.

    Parameters
    ----------
    logged : LoggedMovement
        As one tank sees it.
    figures : mapping
        Result of the last reading, at or before the movement, of the tank that logged it.
    density : Effect or None
        The error of the product's density: its origin, and under mass its relative standard
        uncertainty; None where the readings themselves give the density.
    tank : str
        The tank it counts for.
    meter_share : float
        Relative standard uncertainty of a metered quantity.

    Notes
    -----
    A mass is taken as it is; a volume becomes mass by the density of the tank's product then:
    m = V rho, and V_std = m / rho_std. All that one tank received, or delivered, has one error
    of its meter: meters do not average out over a day. A transfer has one error at both ends.
    """
    mass, volume = logged.figure(MASS), logged.figure("volume_m3")
    rho, standard_rho = product_kg_m3(figures), standard_kg_m3(figures)
    drawn = "drawn" in logged.entry.typed
    converted = mass is None and volume is not None
    if mass is None and volume is not None:
        rho = WATER_KG_M3 if drawn else rho
        mass = volume * rho if rho is not None else None
    standard = mass / standard_rho if mass is not None and standard_rho is not None else None
    amounts = {MASS: mass, STANDARD: standard}
    way = "received" if logged.inwards else "delivered"
    origin = f"transfer {logged.entry.id}" if logged.other else f"{tank}: {way}"
    known = {basis: value for basis, value in amounts.items() if value is not None}
    effects = [Effect("meters", origin, MappingProxyType(known)).times(meter_share)]
    if converted and mass is not None and density is not None and not drawn:
        relative = density.amounts[MASS]
        effects.append(Effect("density", density.origin, {MASS: mass * relative}))
    return Movement(
        logged.entry.t_us,
        _kind(logged),
        MappingProxyType(amounts),
        tuple(effects),
        logged.other,
        converted and not drawn,
    )


def _kind(logged: LoggedMovement) -> Kind:
    if "drawn" in logged.entry.typed:
        return "water drawn"
    if not logged.other:
        return "received" if logged.inwards else "delivered"
    return "transfer in" if logged.inwards else "transfer out"
