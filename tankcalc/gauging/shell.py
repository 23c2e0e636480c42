"""The vessel as it stands: its shell at its own temperature, stretched by the head in it."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from tankcalc.geometry import Course, LoadedVessel, Stretch
from tankcalc.instruments import Purge, Transmitter
from tankcalc.tank import Shell, Tank

if TYPE_CHECKING:
    from tankcalc.gauging.liquid import Liquid

STEEL_MODULUS_PA = 2.06e11
"""Young's modulus of carbon steel, where the tank file states none (from memory), Pa."""

UPRIGHT = frozenset({"vertical cylinder", "strapped", "box"})
"""Shapes whose volume grows with the area: their levels are lengths, not shares of the height."""


@dataclass(frozen=True, slots=True)
class ShellState:
    """What was found of the shell.

    Attributes
    ----------
    temperature_k : float or None
        Of the shell, K; None where nothing says it.
    factor : float or None
        Volume at that temperature against that at the calibration, for one level (CTSh); None
        where it is not known.
    grows_upright : bool
        Whether elevations grow with it, the level being a share of the height (CTSh then has a
        cube in it).
    expands : bool
        Whether the tank file says how the shell grows.
    table_density_kg_m3 : float or None
        Density whose head the capacity table allows for.
    """

    temperature_k: float | None = None
    factor: float | None = None
    grows_upright: bool = False
    expands: bool = False
    table_density_kg_m3: float | None = None


def shell_temperature_k(liquid_k: float, air_k: float | None, insulated: bool) -> float:
    """Return the temperature of a shell between liquid and air, K.

    Notes
    -----
    (7 TL + TA) / 8 for a bare shell, the liquid's for an insulated one (API MPMS 12.1.1; from
    memory, as in trade training texts). Not rounded; without an air temperature the liquid's.

    Examples
    --------
    >>> shell_temperature_k(305.65, 291.15, insulated=False)
    303.8375
    """
    if insulated or air_k is None:
        return liquid_k
    return (7.0 * liquid_k + air_k) / 8.0


def linear_growth(expansion_per_k: float, shell_k: float, calibrated_k: float) -> float:
    """Return the factor on the lengths of a shell against those at its calibration.

    Examples
    --------
    CTSh of a vertical shell is its square:

    >>> round(linear_growth(1.116e-5, 323.15, 288.15) ** 2, 5)
    1.00078
    """
    return 1.0 + expansion_per_k * (shell_k - calibrated_k)


def tank_as_it_stands(
    tank: Tank, liquid: Liquid, air_k: float | None, gravity_m_s2: float
) -> tuple[Tank, ShellState]:
    """Return the tank with its vessel and taps as they stand, and the state of its shell.

    Parameters
    ----------
    tank : Tank
        As its file describes it.
    liquid : Liquid
        Temperature and density of what is in it.
    air_k : float or None
        Outside temperature, K.
    gravity_m_s2 : float
        Local gravity, m/s2.

    Returns
    -------
    Tank
        Without shell data, so that nothing is corrected twice.
    ShellState
    """
    shell = tank.shell
    if shell is None:
        return tank, ShellState()
    state, growth = _state(shell, liquid.mean_temperature_k, air_k, tank.vessel.kind in UPRIGHT)
    stretch = _stretch(shell, liquid, tank, gravity_m_s2)
    if growth == 1.0 and stretch is None:
        return replace(tank, shell=None), state
    upright = 1.0 if tank.vessel.kind in UPRIGHT else growth
    vessel = LoadedVessel(tank.vessel, growth, upright, stretch)
    taps = {tag: _raised(fitted, growth) for tag, fitted in tank.transmitters.items()}
    dp = tank.dp
    if dp is not None:
        high, low = (replace(s, elevation_m=s.elevation_m * growth) for s in (dp.high, dp.low))
        dp = replace(dp, high=high, low=low)
    return replace(tank, vessel=vessel, transmitters=taps, dp=dp, shell=None), state


def _state(
    shell: Shell, liquid_k: float | None, air_k: float | None, upright: bool
) -> tuple[ShellState, float]:
    """Return the state of the shell, and the factor on its lengths."""
    table = shell.table_density_kg_m3
    if shell.expansion_per_k is None or shell.calibrated_at_k is None:
        return ShellState(table_density_kg_m3=table), 1.0
    if liquid_k is None:
        return ShellState(None, None, False, True, table), 1.0
    temperature = shell_temperature_k(liquid_k, air_k, shell.insulated)
    growth = linear_growth(shell.expansion_per_k, temperature, shell.calibrated_at_k)
    factor = growth**2 if upright else growth**3
    return ShellState(temperature, factor, not upright, True, table), growth


def _stretch(shell: Shell, liquid: Liquid, tank: Tank, gravity_m_s2: float) -> Stretch | None:
    """Return what the head adds beyond what the vessel's figures allow for already."""
    if not shell.thickness_m or not shell.courses_m:
        return None
    low, high = tank.vessel.z_min, tank.vessel.z_max
    mean = float(liquid.column.areal_mass(low, high)) / (high - low)
    beyond = mean - (shell.table_density_kg_m3 or 0.0)
    plates = shell.thickness_m
    if len(plates) == 1:
        plates = plates * len(shell.courses_m)
    courses = tuple(
        Course(*course, plate) for course, plate in zip(shell.courses_m, plates, strict=True)
    )
    return Stretch(courses, beyond * gravity_m_s2, shell.modulus_pa or STEEL_MODULUS_PA)


def _raised(fitted: Transmitter, growth: float) -> Transmitter:
    """Return a transmitter whose tap rose with the shell; a bubbler's tip hangs from above."""
    if isinstance(fitted.leg, Purge):
        return fitted
    return replace(fitted, elevation_m=fitted.elevation_m * growth)
