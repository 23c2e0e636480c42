"""The liquid as it stands in the tank: the profile chosen, with what was read of it."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from tankcalc.constants import ICE_POINT_K
from tankcalc.errors import RangeError
from tankcalc.fluids.column import Column, column_of_layers
from tankcalc.fluids.constant import Constant
from tankcalc.fluids.fluid import Fluid, Layer
from tankcalc.fluids.models import DensityModel, Temperatures
from tankcalc.fluids.water import Water
from tankcalc.readings import Readings
from tankcalc.result import Notice
from tankcalc.tank import Tank


@dataclass(frozen=True, slots=True)
class Liquid:
    """Layers at tank temperature.

    Attributes
    ----------
    layers : tuple of Layer
        From the bottom up, after the readings of water level and density.
    column : Column
        Their density over elevation.
    water_top_m : float or None
        Top of the free water above the datum, m; None where there is none.
    temperature_k : float or None
        Temperature of the liquid nearest the surface, K, where one is known.
    temperatures : Temperatures or None
        Over elevation; None where none is known.
    mean_temperature_k : float or None
        Mean over the height from the bottom of the vessel to the surface, K; to the highest
        element where the surface is not known yet.
    product : DensityModel
        Of the uppermost liquid, as its profile has it; an observed density does not replace it.
    notices : tuple of Notice
        What was assumed.
    pressure_factor : float
        Density of the uppermost liquid against that at outside pressure (CPL); the column has it
        already.
    gauge_pa : float
        The pressure that this is for, Pa gauge.
    """

    layers: tuple[Layer, ...]
    column: Column
    water_top_m: float | None
    temperature_k: float | None
    temperatures: Temperatures | None
    mean_temperature_k: float | None
    product: DensityModel
    notices: tuple[Notice, ...]
    pressure_factor: float = 1.0
    gauge_pa: float = 0.0

    def under(self, gauge_pa: float) -> Liquid:
        """Return the liquid under a pressure (Pa gauge), where its model says what that does.

        An observed density is that in the tank already.
        """
        kelvin, model = self.mean_temperature_k, self.layers[-1].model
        if kelvin is None or gauge_pa <= 0.0 or not model.needs_temperature:
            return self
        try:
            factor = float(model.pressure_factor(np.asarray(kelvin), np.asarray(gauge_pa)))
        except RangeError as error:
            message = f"The liquid's compression under p3 is left out: {error}"
            return replace(self, notices=(*self.notices, Notice("not_compressed", message)))
        if factor == 1.0:
            return self
        factors = [1.0] * (len(self.layers) - 1) + [factor]
        column = self.column.scaled(factors)
        return replace(self, column=column, pressure_factor=factor, gauge_pa=gauge_pa)


def liquid_in(
    tank: Tank, fluid: Fluid, readings: Readings, surface_m: float | None = None
) -> Liquid:
    """Return the liquid that the profile and the readings describe.

    Parameters
    ----------
    tank : Tank
        Its surroundings give the temperature where none was read.
    fluid : Fluid
        The density profile.
    readings : Readings
        Temperatures, water level and observed density are used here.
    surface_m : float or None
        The surface where it is known already, m; for the mean temperature.

    Raises
    ------
    RangeError
        A temperature lies outside what a density model covers.
    """
    layers = _with_density(fluid.layers, readings.density_kg_m3)
    layers = _with_water(layers, readings.water_level_m, tank.vessel.z_min)
    temperatures, notices = _temperatures(tank, layers, readings)
    column = column_of_layers(layers, temperatures)
    return Liquid(
        layers,
        column,
        free_water_top(layers),
        temperatures.values_k[-1] if temperatures else None,
        temperatures,
        _mean_k(temperatures, tank.vessel.z_min, surface_m) if temperatures else None,
        fluid.layers[-1].model,
        notices,
    )


def _mean_k(temperatures: Temperatures, bottom_m: float, surface_m: float | None) -> float:
    """Return the mean temperature (K) over the height of the liquid."""
    elevations, values = temperatures.elevations_m, temperatures.values_k
    if len(elevations) < 2:
        return values[-1]
    top = elevations[-1] if surface_m is None else max(surface_m, bottom_m)
    bottom = min(bottom_m, elevations[0])
    inside = [z for z in elevations if bottom < z < top]
    z = np.array([bottom, *inside, top])
    if not top > bottom:
        return float(temperatures.at(z[:1])[0])
    return float(np.trapezoid(temperatures.at(z), z) / (top - bottom))


def free_water_top(layers: tuple[Layer, ...]) -> float | None:
    """Return the top of the free water (m), or None where there is none.

    The lowest of several layers is free water when its model is that of water, or when its name
    says so (salt water, produced water).
    """
    return layers[0].top_m if _has_water(layers) else None


def _has_water(layers: tuple[Layer, ...]) -> bool:
    """Return whether the lowest of several layers is free water."""
    if len(layers) < 2:
        return False
    return layers[0].model.kind == Water.kind or "water" in layers[0].name.lower()


def _with_density(layers: tuple[Layer, ...], observed_kg_m3: float | None) -> tuple[Layer, ...]:
    """Give the uppermost layer the density observed at tank temperature."""
    if observed_kg_m3 is None:
        return layers
    return (*layers[:-1], Layer(layers[-1].name, Constant(observed_kg_m3)))


def _with_water(
    layers: tuple[Layer, ...], read_m: float | None, bottom_m: float
) -> tuple[Layer, ...]:
    """Put the water's top where it was read: that of the water there is, or a new layer of it."""
    if read_m is None:
        return layers
    above = layers[1:] if _has_water(layers) else layers
    if read_m <= bottom_m:
        return above
    water = layers[0] if _has_water(layers) else Layer("free water", Water())
    above = tuple(layer for layer in above if layer.top_m is None or layer.top_m > read_m)
    return (replace(water, top_m=read_m), *above)


def _temperatures(
    tank: Tank, layers: tuple[Layer, ...], readings: Readings
) -> tuple[Temperatures | None, tuple[Notice, ...]]:
    """Return the liquid's temperatures, from the readings or else from the outside air."""
    if readings.temperatures:
        ordered = sorted(readings.temperatures, key=lambda pair: pair[0] or 0.0)
        elevations = tuple(z for z, _ in ordered if z is not None)
        return Temperatures(tuple(t for _, t in ordered), elevations), ()
    if not any(layer.model.needs_temperature for layer in layers):
        return None, ()
    air_k, whose = readings.air_temperature_k, "read"
    if air_k is None:
        air_k, whose = tank.surroundings.air_temperature_k, "the site's"
    if air_k is None:
        air_k, whose = ICE_POINT_K + 15.0, "assumed"
    message = (
        f"No liquid temperature was given: the density is taken at the outside air's "
        f"{air_k - ICE_POINT_K:.1f} degC ({whose}). Give the liquid's temperature."
    )
    return Temperatures((air_k,)), (Notice("temperature_assumed", message, "temperature"),)
