"""The liquid as it stands in the tank: the profile chosen, with what was read of it."""

from __future__ import annotations

from dataclasses import dataclass, replace

from tankcalc.constants import ICE_POINT_K
from tankcalc.fluids.column import Column, column_of_layers
from tankcalc.fluids.constant import Constant
from tankcalc.fluids.fluid import Fluid, Layer
from tankcalc.fluids.models import Temperatures
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
    notices : tuple of Notice
        What was assumed.
    """

    layers: tuple[Layer, ...]
    column: Column
    water_top_m: float | None
    temperature_k: float | None
    notices: tuple[Notice, ...]


def liquid_in(tank: Tank, fluid: Fluid, readings: Readings) -> Liquid:
    """Return the liquid that the profile and the readings describe.

    Parameters
    ----------
    tank : Tank
        Its surroundings give the temperature where none was read.
    fluid : Fluid
        The density profile.
    readings : Readings
        Temperatures, water level and observed density are used here.

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
        notices,
    )


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
