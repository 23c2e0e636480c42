"""What a tank would hold after a receipt or a delivery, or at another temperature."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from tankcalc.constants import ICE_POINT_K
from tankcalc.errors import InputError, NoAnswerError
from tankcalc.gauging.liquid import liquid_in
from tankcalc.readings import Readings
from tankcalc.result import Result
from tankcalc.tank import Tank

if TYPE_CHECKING:
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.fluids.models import DensityModel
    from tankcalc.geometry import Vessel

USUAL_BASE_K = ICE_POINT_K + 15.0
"""Temperature of a standard volume where the density model states none, K."""


@dataclass(frozen=True, slots=True)
class Contents:
    """What stands in a tank, made ready for what-ifs.

    Attributes
    ----------
    vessel : Vessel
        At calibration temperature.
    shell : float
        Volume in the tank over that of the vessel at the same level: correction of the shell.
    level_m : float
        Surface above the datum, m.
    below_m3, below_kg : float
        Free water, which takes no part in mixing and growing.
    product_m3, product_kg : float
        What lies on it.
    temperature_k : float or None
        Mean temperature of the product, K; None where it is not known.
    density : callable
        Product density (kg/m3) at a temperature (K), through the density in the tank now; raises
        RangeError beyond the model's limits.
    base_kg_m3, base_k : float or None
        Density at the temperature of the standard volume (K); None where the density model knows
        no temperature.
    """

    vessel: Vessel
    shell: float
    level_m: float
    below_m3: float
    below_kg: float
    product_m3: float
    product_kg: float
    temperature_k: float | None
    density: Callable[[float], float]
    base_kg_m3: float | None = None
    base_k: float | None = None

    @property
    def expands(self) -> bool:
        """Whether the density model knows of temperature."""
        return self.base_k is not None

    @property
    def density_kg_m3(self) -> float:
        """Density of the product as it is in the tank, kg/m3."""
        if self.product_m3 > 0.0:
            return self.product_kg / self.product_m3
        return self.density(USUAL_BASE_K if self.temperature_k is None else self.temperature_k)

    def volume_at(self, level_m: float) -> float:
        """Return what the tank holds up to a level (m) inside the vessel, m3."""
        return self.shell * self.vessel.volume(level_m)

    def level_at(self, volume_m3: float) -> float | None:
        """Return the level (m) of a volume, None where the vessel cannot hold it."""
        if volume_m3 > self.shell * self.vessel.capacity:
            return None
        return self.vessel.level(max(volume_m3, self.volume_at(self.vessel.z_min)) / self.shell)

    def holding(self, volume_m3: float, mass_kg: float, kelvin: float | None) -> After:
        """Return the tank with this much liquid in it, its product at a temperature (K)."""
        over = max(volume_m3 - self.shell * self.vessel.capacity, 0.0)
        return After(volume_m3, mass_kg, self.level_at(volume_m3), kelvin, over)


@dataclass(frozen=True, slots=True)
class After:
    """A tank as it would be.

    Attributes
    ----------
    volume_m3, mass_kg : float
        All the liquid.
    level_m : float or None
        None where it does not fit.
    temperature_k : float or None
        Mean temperature of the product, K.
    over_m3 : float
        How much does not fit, m3; zero where all does.
    """

    volume_m3: float
    mass_kg: float
    level_m: float | None
    temperature_k: float | None
    over_m3: float = 0.0


def contents_of(tank: Tank, fluid: Fluid, readings: Readings, result: Result) -> Contents:
    """Return the contents behind an answer.

    Raises
    ------
    NoAnswerError
        The readings were refused, or are arrays.
    RangeError
        The temperature lies outside what the density model covers.

    Notes
    -----
    The uppermost liquid's density curve is scaled so that it goes through the product's mean
    density in the tank now, whether from the profile, from two pressures or from a sample.
    """
    figures = (result.level_m, result.volume_m3, result.mass_kg)
    if result.status == "refused" or not all(isinstance(x, float) for x in figures):
        raise NoAnswerError("there is no answer to plan from.")
    level, volume, mass = (float(x) for x in figures if x is not None)
    product_m3 = _number(result.product_volume_m3, volume)
    product_kg = _number(result.product_mass_kg, mass)
    model = fluid.layers[-1].model
    temperature = _temperature(tank, fluid, readings, level)
    now = product_kg / product_m3 if product_m3 > 0.0 else None
    density = _curve(model, now, temperature)
    base = (model.base_k or USUAL_BASE_K) if model.needs_temperature else None
    held = tank.vessel.volume(level)
    return Contents(
        vessel=tank.vessel,
        shell=volume / held if held > 0.0 else 1.0,
        level_m=level,
        below_m3=volume - product_m3,
        below_kg=mass - product_kg,
        product_m3=product_m3,
        product_kg=product_kg,
        temperature_k=temperature,
        density=density,
        base_kg_m3=None if base is None else density(base),
        base_k=base,
    )


def _number(value: object, otherwise: float) -> float:
    return float(value) if isinstance(value, float) else otherwise


def _temperature(tank: Tank, fluid: Fluid, readings: Readings, level_m: float) -> float | None:
    """Return the product's mean temperature: of the elements in the liquid, plainly averaged."""
    wet = [k for z, k in readings.temperatures if z is None or z <= level_m]
    if wet:
        return sum(wet) / len(wet)
    return liquid_in(tank, fluid, readings).temperature_k


def _curve(
    model: DensityModel, now_kg_m3: float | None, temperature_k: float | None
) -> Callable[[float], float]:
    """Return density over temperature, through the density now."""

    def by_model(kelvin: float) -> float:
        return float(model.checked_density(np.asarray(kelvin)))

    if not model.needs_temperature:
        fixed = by_model(USUAL_BASE_K) if now_kg_m3 is None else now_kg_m3
        return lambda kelvin: fixed
    if now_kg_m3 is None or temperature_k is None:
        return by_model
    factor = now_kg_m3 / by_model(temperature_k)
    return lambda kelvin: factor * by_model(kelvin)


def after_adding(
    contents: Contents, added_kg: float, added_k: float | None = None, *, mixed: bool = True
) -> After:
    """Return the tank after a receipt of the same product, or a delivery.

    Parameters
    ----------
    added_kg : float
        Mass received, kg; below zero: delivered.
    added_k : float or None
        Its temperature, K; None: that of the tank. Of no account for a delivery.
    mixed : bool
        Whether the two mix; otherwise the receipt lies apart at its own temperature.

    Raises
    ------
    InputError
        More is delivered than there is of the product, or a temperature that is needed is not
        known.
    RangeError
        A temperature outside what the density model covers.

    Notes
    -----
    Mass adds. Mixed, the temperature is T = (m0 T0 + m1 T1) / (m0 + m1): equal heat capacity of
    the two, no heat to shell, vapour or outside; the volume is (m0 + m1) / rho(T). Not mixed it
    is m0 / rho(T0) + m1 / rho(T1). The shell stays as it is: 1e-5 to 4e-5 per kelvin of change.
    """
    if added_kg < -contents.product_kg * (1.0 + 1e-12):
        raise InputError("more is taken out than there is of the product.")
    own, total = contents.temperature_k, max(contents.product_kg + added_kg, 0.0)
    other = own if added_kg <= 0.0 or added_k is None else added_k
    if not contents.expands or other == own or total == 0.0:
        return _with_product(contents, total / contents.density_kg_m3, total, own)
    if contents.product_kg == 0.0:
        return _with_product(contents, total / contents.density(_known(other)), total, other)
    mean = (contents.product_kg * _known(own) + added_kg * _known(other)) / total
    if mixed:
        product_m3 = total / contents.density(mean)
    else:
        product_m3 = contents.product_m3 + added_kg / contents.density(_known(other))
    return _with_product(contents, product_m3, total, mean)


def at_temperature(contents: Contents, kelvin: float) -> After:
    """Return the tank when its product has come to a temperature.

    Parameters
    ----------
    kelvin : float
        Temperature of all the product, K.

    Raises
    ------
    InputError
        The temperature now is not known.
    RangeError
        The temperature lies outside what the density model covers.

    Notes
    -----
    V2 = V1 rho1 / rho2 at constant mass. Of the shell's growth nothing is taken off, which is on
    the safe side when warming; free water keeps its volume.
    """
    if not contents.expands or contents.product_m3 == 0.0:
        return _with_product(contents, contents.product_m3, contents.product_kg, kelvin)
    _known(contents.temperature_k)
    product_m3 = contents.product_kg / contents.density(kelvin)
    return _with_product(contents, product_m3, contents.product_kg, kelvin)


def _known(kelvin: float | None) -> float:
    if kelvin is None:
        raise InputError("the temperature of the product is not known. Give it.")
    return kelvin


def _with_product(
    contents: Contents, product_m3: float, product_kg: float, kelvin: float | None
) -> After:
    volume, mass = contents.below_m3 + product_m3, contents.below_kg + product_kg
    return contents.holding(volume, mass, kelvin)
